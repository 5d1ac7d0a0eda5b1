//! Conformance of the functions: does the circuit do what the reduced table says, for every order of bit changes?
//!
//! Every move that can happen is followed from each code in which its start is reached: the inputs change in every
//! order (inside a burst the state must stay), then the excited state bits in every order (general multiple-winner). The circuit must
//! settle in a code of the right row, and an output whose value is given at both ends changes at most once on
//! every way, unless the table itself asks for a pulse in the unstable cell. Beside that, cells that no move enters, and
//! all entries of the encoded table, bind the values of the functions.
//!
//! Exact. The cost is that of the moves times the codes they pass; a step of `d` bits at once counts `d * 2^d`.

use std::collections::BTreeSet;

use crate::base::{Code, Column, Outputs, Row};
use crate::codes::values::{Coded, Role};
use crate::merge::values::Reduced;
use crate::project::choices::OutputStyle;
use crate::proof::circuit::Circuit;
use crate::proof::hazards::{Naming, later, points};
use crate::proof::report::{Report, Stretch};
use crate::proof::settle::{Settled, settle, way_to};
use crate::proof::walk::{Moves, output_names};

/// What the functions are held against.
pub(super) struct Conform<'a> {
    pub reduced: &'a Reduced,
    pub coded: &'a Coded,
    pub circuit: &'a Circuit<'a>,
    pub output_names: &'a [String],
    pub naming: &'a Naming<'a>,
}

/// A stable total state of the circuit.
type State = (Row, Column, Code);

/// What was met so far.
#[derive(Default)]
struct Trace {
    /// Stable states, each with the number of the one before it on a shortest way.
    reached: Vec<(State, Option<usize>)>,
    seen: BTreeSet<State>,
    stretches: Vec<Stretch>,
    /// Points of which a mismatch was told already.
    told: BTreeSet<u32>,
}

impl Trace {
    fn reach(&mut self, state: State, before: Option<usize>) {
        if self.seen.insert(state) {
            self.reached.push((state, before));
        }
    }
}

/// A move that is being followed.
struct Following {
    /// Number of the state in which it starts.
    at: usize,
    from: State,
    column: Column,
    to: Row,
}

impl Conform<'_> {
    /// Follows all moves; returns the stretches in which something changes, each once.
    pub fn check(&self, moves: &Moves, report: &mut Report) -> Vec<Stretch> {
        let mut trace = Trace::default();
        self.follow_all(moves, &mut trace, report);
        self.every_cell(&mut trace.told, report);
        self.every_entry(&trace.told, report);
        self.outputs_of_rows(report);
        once(trace.stretches)
    }

    fn follow_all(&self, moves: &Moves, trace: &mut Trace, report: &mut Report) {
        let start = self.reduced.initial;
        if !self.codes(start.row).contains(&self.coded.initial) {
            report.mismatch("functions", || {
                format!(
                    "the code at power-up, {}, is none of row {}",
                    self.code(self.coded.initial.0),
                    self.row(start.row)
                )
            });
        }
        self.follow_from((start.row, start.column, self.coded.initial), moves, trace, report);
        // Power-up can leave a row in any of its codes, so the moves must be sound from those that the walk misses too.
        for &(row, column) in moves.keys() {
            for &code in self.codes(row) {
                self.follow_from((row, column, code), moves, trace, report);
            }
        }
    }

    /// Follows all moves from a stable total state and from those that they lead to, breadth first.
    fn follow_from(&self, start: State, moves: &Moves, trace: &mut Trace, report: &mut Report) {
        let mut at = trace.reached.len();
        trace.reach(start, None);
        while at < trace.reached.len() {
            let (from, _) = trace.reached[at];
            for &(column, to) in moves.get(&(from.0, from.1)).into_iter().flatten() {
                report.proof.moves_checked += 1;
                for code in self.follow(&Following { at, from, column, to }, trace, report) {
                    trace.reach((to, column, Code(code)), Some(at));
                }
            }
            at += 1;
        }
    }

    /// Follows one move from one code; returns the codes of the right row in which it can end.
    fn follow(&self, of: &Following, trace: &mut Trace, report: &mut Report) -> Vec<u32> {
        let Trace { reached, stretches, told, .. } = trace;
        let circuit = self.circuit;
        let (row, from, Code(code)) = of.from;
        let start = self.point(from, code);
        let entry = self.point(of.column, code);
        for inner in points(start, entry).filter(|&p| p != start && p != entry) {
            if circuit.next(inner) != code && told.insert(inner) {
                report.mismatch("functions", || {
                    format!(
                        "{}: inside this burst, at {}, the circuit leaves its state for code {}",
                        self.place(of, reached),
                        self.naming.point(inner),
                        self.code(circuit.next(inner))
                    )
                });
            }
        }
        let settled = self.settle(of.column, code);
        let mut ends = settled.ends.clone();
        ends.retain(|&end| self.codes(of.to).contains(&Code(end)));
        if (ends.len() < settled.ends.len() || !settled.sound()) && told.insert(entry) {
            report.mismatch("functions", || {
                format!("{}: {}", self.place(of, reached), self.lost(of.column, code, of.to, &settled))
            });
        }
        let table = &self.reduced.table;
        let old = table.cell(row, from).outputs;
        let new = table.cell(of.to, of.column).outputs;
        for &end in &ends {
            self.compare(self.point(of.column, end), new, told, report, || self.place(of, reached));
        }
        let passed = table.cell(row, of.column).outputs;
        self.compare(entry, passed, told, report, || self.place(of, reached));
        // An open end puts no condition on the output.
        let bound = old.care & new.care & circuit.present();
        stretches.push(Stretch { from: start, to: entry, row, outputs: bound });
        for &(a, b) in &settled.steps {
            let (from, to) = (self.point(of.column, a), self.point(of.column, b));
            stretches.push(Stretch { from, to, row, outputs: bound });
        }
        self.once_each_way(of, bound, (old.ones, passed, new.ones), &settled, report);
        ends
    }

    /// Each bound output changes at most once on every way; where the unstable cell is given, at most once before it and once after it.
    fn once_each_way(
        &self,
        of: &Following,
        bound: u32,
        (old, passed, new): (u32, Outputs, u32),
        settled: &Settled,
        report: &mut Report,
    ) {
        let (row, column, Code(code)) = of.from;
        let start = self.point(column, code);
        let entry = self.point(of.column, code);
        let mut wrong = 0;
        let before = (new & !passed.care) | passed.ones;
        let after = (old & !passed.care) | passed.ones;
        self.lattice(start, entry, old, before, &mut wrong);
        for &(a, b) in &settled.steps {
            self.lattice(self.point(of.column, a), self.point(of.column, b), after, new, &mut wrong);
        }
        wrong &= bound;
        while wrong != 0 {
            let j = wrong.trailing_zeros() as usize;
            wrong &= wrong - 1;
            let Some(f) = self.circuit.outputs[j].as_ref() else { continue };
            let end = settled.ends.first().map_or(entry, |&e| self.point(of.column, e));
            let stretch = Stretch { from: start, to: end, row, outputs: 0 };
            let bit = |word: u32| word >> j & 1;
            let what = if bit(old) == bit(new) {
                format!(
                    "{} is {} at both ends of the move and takes the other value on some way",
                    f.name,
                    bit(old)
                )
            } else {
                format!("{} changes from {} to {} more than once on some way", f.name, bit(old), bit(new))
            };
            let mut found = self.naming.found(self.circuit, f.name, stretch, "function", what);
            found.text = format!(
                "row {} (code {}), inputs {} -> {}: {}",
                self.row(row),
                self.code(code),
                self.column(column),
                self.column(of.column),
                found.text.split_once(": ").map_or("", |(_, what)| what)
            );
            report.hazard(found);
        }
    }

    /// Marks outputs that leave `old = new` or go back from `new` to `old` somewhere between two points.
    fn lattice(&self, from: u32, to: u32, old: u32, new: u32, wrong: &mut u32) {
        let same = !(old ^ new);
        for p in points(from, to) {
            let here = self.circuit.word(p);
            *wrong |= same & (here ^ old);
            for q in later(p, to) {
                let there = self.circuit.word(q);
                *wrong |= !same & !(here ^ new) & !(there ^ old);
            }
        }
    }

    /// Values at every specified cell and every code of its row, whether a move enters it or not.
    fn every_cell(&self, told: &mut BTreeSet<u32>, report: &mut Report) {
        let table = &self.reduced.table;
        for row in table.rows() {
            for column in table.columns() {
                let cell = table.cell(row, column);
                for &code in self.codes(row) {
                    let p = self.point(column, code.0);
                    let place = || {
                        format!(
                            "row {} (code {}), inputs {}",
                            self.row(row),
                            self.code(code.0),
                            self.column(column)
                        )
                    };
                    self.compare(p, cell.outputs, told, report, place);
                    let Some(to) = cell.next else { continue };
                    if to == row {
                        if self.circuit.next(p) != code.0 && told.insert(p) {
                            report.mismatch("functions", || {
                                format!(
                                    "{} is stable, but the circuit goes on to code {}",
                                    place(),
                                    self.code(self.circuit.next(p))
                                )
                            });
                        }
                        continue;
                    }
                    let settled = self.settle(column, code.0);
                    let right = settled.ends.iter().all(|&end| self.codes(to).contains(&Code(end)));
                    if (!right || !settled.sound()) && told.insert(p) {
                        report.mismatch("functions", || {
                            format!("{}: {}", place(), self.lost(column, code.0, to, &settled))
                        });
                    }
                }
            }
        }
    }

    /// The next code of every entry of the encoded table, spare codes and codes on the way included.
    fn every_entry(&self, told: &BTreeSet<u32>, report: &mut Report) {
        for (&(code, column), entry) in &self.coded.encoded.entries {
            let p = self.point(column, code.0);
            let next = self.circuit.next(p);
            if next != entry.next.0 && !told.contains(&p) {
                report.mismatch("functions", || {
                    format!(
                        "code {} ({}), inputs {}: the next code is {}, the encoded table says {}",
                        self.code(code.0),
                        match entry.role {
                            Role::Row(row) | Role::Lent(row) => format!("row {}", self.row(row)),
                            Role::Spare => "spare".to_string(),
                            Role::OnTheWay => format!("on the way to row {}", self.row(entry.goal)),
                        },
                        self.column(column),
                        self.code(next),
                        self.code(entry.next.0)
                    )
                });
            }
            let both = self.circuit.both_on(p);
            if both != 0 {
                report.mismatch("functions", || {
                    format!(
                        "code {}, inputs {}: set and reset of {} are both 1",
                        self.code(code.0),
                        self.column(column),
                        output_names(&self.naming.variables[self.circuit.inputs..], both)
                    )
                });
            }
        }
    }

    /// Outputs of rows must not look at the inputs.
    fn outputs_of_rows(&self, report: &mut Report) {
        if self.reduced.outputs != OutputStyle::PerRow {
            return;
        }
        let inputs = (1u32 << self.circuit.inputs) - 1;
        for f in self.circuit.outputs.iter().flatten() {
            if f.cubes.iter().any(|c| c.care & inputs != 0) {
                report.mismatch("functions", || {
                    format!("{} belongs to rows, but its function looks at an input", f.name)
                });
            }
        }
    }

    /// Specified outputs against the functions at one point.
    fn compare(
        &self,
        p: u32,
        asked: Outputs,
        told: &mut BTreeSet<u32>,
        report: &mut Report,
        place: impl FnOnce() -> String,
    ) {
        let wrong = (self.circuit.word(p) ^ asked.ones) & asked.care & self.circuit.present();
        if wrong != 0 && told.insert(p) {
            report.mismatch("functions", || {
                format!(
                    "{}: the table says outputs {}, at {} the functions give the opposite of {}",
                    place(),
                    asked.text(self.reduced.table.outputs),
                    self.naming.point(p),
                    output_names(self.output_names, wrong)
                )
            });
        }
    }

    fn settle(&self, column: Column, code: u32) -> Settled {
        settle(code, |c| Some(self.circuit.next(self.point(column, c))))
    }

    /// What went wrong on the way to row `to`.
    fn lost(&self, column: Column, code: u32, to: Row, settled: &Settled) -> String {
        let wrong = settled.ends.iter().find(|&&e| !self.codes(to).contains(&Code(e)));
        let way = |codes: &[u32]| codes.iter().map(|&c| self.code(c)).collect::<Vec<_>>().join(" ");
        match (wrong, &settled.cycle) {
            (Some(&end), _) => {
                let path = way_to(code, end, |c| Some(self.circuit.next(self.point(column, c))));
                format!(
                    "the circuit should go to row {} and can settle in code {} ({}), by codes {}",
                    self.row(to),
                    self.code(end),
                    self.coded
                        .row_of(Code(end))
                        .map_or("no row".to_string(), |r| format!("row {}", self.row(r))),
                    way(&path)
                )
            }
            (None, Some(path)) => {
                format!(
                    "the circuit should go to row {} and can go round for ever, by codes {}",
                    self.row(to),
                    way(path)
                )
            }
            (None, None) => {
                format!(
                    "the circuit should go to row {} and wanders through thousands of codes",
                    self.row(to)
                )
            }
        }
    }

    /// Where a move starts, with the input sequence that leads there.
    fn place(&self, of: &Following, reached: &[(State, Option<usize>)]) -> String {
        let mut columns = vec![self.column(of.column)];
        let mut first = of.from;
        let mut at = Some(of.at);
        while let Some((state, before)) = at.map(|k| reached[k]) {
            columns.push(self.column(state.1));
            first = state;
            at = before;
        }
        columns.reverse();
        let (row, from, Code(code)) = of.from;
        format!(
            "row {} (code {}), inputs {} -> {}, reached from {} by {}",
            self.row(row),
            self.code(code),
            self.column(from),
            self.column(of.column),
            self.row(first.0),
            columns.join(" ")
        )
    }

    fn codes(&self, row: Row) -> &[Code] {
        &self.coded.codes[row.at()]
    }

    fn point(&self, column: Column, code: u32) -> u32 {
        self.circuit.point(u32::from(column.0), code)
    }

    fn row(&self, row: Row) -> &str {
        self.reduced.table.name(row)
    }

    fn column(&self, column: Column) -> String {
        self.reduced.table.column_text(column)
    }

    fn code(&self, code: u32) -> String {
        Code(code).text(self.coded.bits)
    }
}

/// Each stretch once, with the outputs of all moves that have it.
fn once(mut stretches: Vec<Stretch>) -> Vec<Stretch> {
    stretches.sort_unstable();
    stretches.dedup_by(|next, kept| {
        let same = (next.from, next.to) == (kept.from, kept.to);
        if same {
            kept.outputs |= next.outputs;
        }
        same
    });
    stretches
}
