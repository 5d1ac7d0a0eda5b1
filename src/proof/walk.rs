//! Conformance of the tables: the primitive table as the user wrote it and the reduced table, walked together.
//!
//! The walk starts in the initial total state and takes every input change that the primitive table allows: one bit,
//! or a burst whose way is clean (every column strictly between is unspecified or stable in the row, and contradicts no
//! output of the start). Chains of unstable cells are followed here; nothing that the specification stage prepared is
//! read. Exact; the cost is that of the pairs of states reached times the changes they allow (a burst of `k` bits looks at
//! `2^k` columns). The moves of the reduced table that this walk meets are the moves that can happen.
//!
//! Beside the walk, every specified cell is compared with the rows that it was merged into, so that cells which cannot
//! be entered bind too.

use std::collections::{BTreeMap, BTreeSet};

use crate::base::{Column, Outputs, Row};
use crate::merge::values::Reduced;
use crate::project::choices::{Discipline, OutputStyle};
use crate::proof::report::Report;
use crate::spec::values::{FlowTable, Spec};

/// Moves of the reduced table that can happen: for each stable total state where they lead.
pub(super) type Moves = BTreeMap<(Row, Column), BTreeSet<(Column, Row)>>;

/// A primitive and a merged row that are in force together.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct Pair {
    primitive: Row,
    column: Column,
    merged: Row,
}

struct Walk<'a> {
    spec: &'a Spec,
    given: &'a FlowTable,
    reduced: &'a Reduced,
    /// Pairs in the order in which they were met, each with the one before it on a shortest way.
    met: Vec<(Pair, usize)>,
    seen: BTreeSet<Pair>,
    moves: Moves,
}

/// Compares the tables and returns the moves of the reduced table that can happen.
pub(super) fn walk(spec: &Spec, reduced: &Reduced, report: &mut Report) -> Moves {
    every_cell(spec, reduced, report);
    let mut walk = Walk {
        spec,
        given: &spec.given,
        reduced,
        met: Vec::new(),
        seen: BTreeSet::new(),
        moves: Moves::new(),
    };
    walk.start(report);
    let mut at = 0;
    while at < walk.met.len() {
        let pair = walk.met[at].0;
        for column in allowed(walk.given, spec.discipline, pair.primitive, pair.column) {
            walk.change(at, column, report);
        }
        at += 1;
    }
    walk.moves
}

impl Walk<'_> {
    fn start(&mut self, report: &mut Report) {
        let column = self.spec.initial.column;
        let merged = self.reduced.initial.row;
        let Some(primitive) = rest(self.given, self.spec.initial.row, column) else {
            report.mismatch("tables", || {
                format!(
                    "the initial total state does not come to rest: {}",
                    self.given.name(self.spec.initial.row)
                )
            });
            return;
        };
        if self.reduced.initial.column != column || !self.reduced.table.stable(merged, column) {
            report.mismatch("tables", || {
                format!(
                    "the reduced table starts in row {} with inputs {}, which is not the stable state that row {} with \
                     inputs {} asks for",
                    self.reduced.table.name(merged),
                    self.reduced.table.column_text(self.reduced.initial.column),
                    self.given.name(primitive),
                    self.given.column_text(column)
                )
            });
            return;
        }
        let pair = Pair { primitive, column, merged };
        self.met.push((pair, 0));
        self.seen.insert(pair);
        self.agree(0, primitive, merged, column, report);
    }

    /// One input change, in both tables.
    fn change(&mut self, at: usize, column: Column, report: &mut Report) {
        let pair = self.met[at].0;
        let (given, table) = (self.given, &self.reduced.table);
        self.hold_inside(at, column, report);
        let Some(primitive) = rest(given, pair.primitive, column) else {
            report.mismatch("tables", || {
                format!("{}: the primitive table never comes to rest", self.place(at, column))
            });
            return;
        };
        let Some(merged) = table.next(pair.merged, column) else {
            report.mismatch("tables", || {
                format!(
                    "{}: the primitive table goes to row {}, the reduced table has no next row in row {}",
                    self.place(at, column),
                    given.name(primitive),
                    table.name(pair.merged)
                )
            });
            return;
        };
        if !table.stable(merged, column) {
            report.mismatch("tables", || {
                format!(
                    "{}: the reduced table goes from row {} to row {}, which is not stable there",
                    self.place(at, column),
                    table.name(pair.merged),
                    table.name(merged)
                )
            });
            return;
        }
        self.on_the_way(at, column, merged, report);
        self.agree(at, primitive, merged, column, report);
        self.moves.entry((pair.merged, pair.column)).or_default().insert((column, merged));
        let reached = Pair { primitive, column, merged };
        if self.seen.insert(reached) {
            self.met.push((reached, at));
        }
    }

    /// Strictly inside a burst the merged row must stay and contradict no output of the start.
    fn hold_inside(&self, at: usize, column: Column, report: &mut Report) {
        let pair = self.met[at].0;
        if pair.column.distance(column) < 2 {
            return;
        }
        let table = &self.reduced.table;
        let old = self.given.cell(pair.primitive, pair.column).outputs;
        for inner in pair.column.between(column).filter(|&c| c != pair.column && c != column) {
            let cell = table.cell(pair.merged, inner);
            if cell.next != Some(pair.merged) {
                report.mismatch("tables", || {
                    format!(
                        "{}: inside this burst, with inputs {}, the reduced table must stay in row {} and does not",
                        self.place(at, column),
                        table.column_text(inner),
                        table.name(pair.merged)
                    )
                });
            }
            let wrong = old.conflicts(cell.outputs);
            if wrong != 0 {
                report.mismatch("tables", || {
                    format!(
                        "{}: inside this burst, with inputs {}, {} must hold",
                        self.place(at, column),
                        table.column_text(inner),
                        self.names(wrong)
                    )
                });
            }
        }
    }

    /// Outputs that the user gave in the unstable cell must appear there.
    fn on_the_way(&self, at: usize, column: Column, merged: Row, report: &mut Report) {
        let pair = self.met[at].0;
        let asked = self.given.cell(pair.primitive, column).outputs;
        let wrong = unlike(asked, self.passed(pair.merged, merged, column));
        if wrong != 0 {
            report.mismatch("tables", || {
                format!(
                    "{}: on leaving row {} the primitive table asks for outputs {}, the reduced table has {} in row {} \
                     ({} differs)",
                    self.place(at, column),
                    self.given.name(pair.primitive),
                    asked.text(self.given.outputs),
                    self.reduced.table.cell(pair.merged, column).outputs.text(self.given.outputs),
                    self.reduced.table.name(pair.merged),
                    self.names(wrong)
                )
            });
        }
    }

    fn passed(&self, from: Row, to: Row, column: Column) -> Vec<Outputs> {
        passed(self.reduced, from, to, column)
    }

    /// The outputs of a stable primitive cell must appear in the merged row.
    fn agree(&self, at: usize, primitive: Row, merged: Row, column: Column, report: &mut Report) {
        let asked = self.given.cell(primitive, column).outputs;
        let shown = self.reduced.table.cell(merged, column).outputs;
        let wrong = unlike(asked, vec![shown]);
        if wrong != 0 {
            report.mismatch("tables", || {
                format!(
                    "{}: row {} has outputs {}, the reduced table shows {} in row {} ({} differs)",
                    self.place(at, column),
                    self.given.name(primitive),
                    asked.text(self.given.outputs),
                    shown.text(self.given.outputs),
                    self.reduced.table.name(merged),
                    self.names(wrong)
                )
            });
        }
    }

    /// Where we are, with the input sequence that leads there from the initial total state.
    fn place(&self, at: usize, column: Column) -> String {
        let pair = self.met[at].0;
        let mut columns = vec![column];
        let mut k = at;
        loop {
            columns.push(self.met[k].0.column);
            if k == 0 {
                break;
            }
            k = self.met[k].1;
        }
        columns.reverse();
        columns.dedup();
        let sequence: Vec<String> = columns.iter().map(|&c| self.given.column_text(c)).collect();
        format!(
            "row {} (merged row {}), inputs {} -> {}, reached by {}",
            self.given.name(pair.primitive),
            self.reduced.table.name(pair.merged),
            self.given.column_text(pair.column),
            self.given.column_text(column),
            sequence.join(" ")
        )
    }

    fn names(&self, outputs: u32) -> String {
        output_names(&self.spec.signals.outputs, outputs)
    }
}

/// The output words that may stand for an unstable cell. Where outputs belong to rows the cell shows the old row's
/// until the state has changed, so either row's will do.
fn passed(reduced: &Reduced, from: Row, to: Row, column: Column) -> Vec<Outputs> {
    let mut words = vec![reduced.table.cell(from, column).outputs];
    if reduced.outputs == OutputStyle::PerRow {
        words.push(reduced.table.cell(to, column).outputs);
    }
    words
}

/// Outputs that `asked` specifies and none of the words shows with that value.
fn unlike(asked: Outputs, words: Vec<Outputs>) -> u32 {
    words.into_iter().fold(asked.care, |wrong, w| wrong & !(w.care & !(w.ones ^ asked.ones)))
}

/// Every specified primitive cell against the merged rows that its row belongs to.
fn every_cell(spec: &Spec, reduced: &Reduced, report: &mut Report) {
    let (given, table) = (&spec.given, &reduced.table);
    for merged in table.rows() {
        for &row in &reduced.members[merged.at()] {
            for column in given.columns() {
                let cell = given.cell(row, column);
                let shown = table.cell(merged, column);
                let to = shown.next.unwrap_or(merged);
                let place = || {
                    format!(
                        "row {} (in merged row {}), inputs {}",
                        given.name(row),
                        table.name(merged),
                        given.column_text(column)
                    )
                };
                let words = if cell.next == Some(row) {
                    vec![shown.outputs]
                } else {
                    passed(reduced, merged, to, column)
                };
                let wrong = unlike(cell.outputs, words);
                if wrong != 0 {
                    report.mismatch("tables", || {
                        format!(
                            "{}: outputs {} became {} ({} differs)",
                            place(),
                            cell.outputs.text(given.outputs),
                            shown.outputs.text(given.outputs),
                            output_names(&spec.signals.outputs, wrong)
                        )
                    });
                }
                let Some(end) = cell.next.and_then(|_| rest(given, row, column)) else { continue };
                let arrives = shown.next.is_some_and(|t| reduced.members[t.at()].contains(&end));
                if !arrives || !table.stable(to, column) {
                    report.mismatch("tables", || {
                        format!(
                            "{}: goes to row {}, but the reduced table goes to {}",
                            place(),
                            given.name(end),
                            shown.next.map_or("no row".to_string(), |t| format!(
                                "row {}, which {}",
                                table.name(t),
                                if arrives { "is not stable there" } else { "does not hold it" }
                            ))
                        )
                    });
                }
            }
        }
    }
}

/// The input changes that can happen in a stable total state of the primitive table.
fn allowed(given: &FlowTable, discipline: Discipline, row: Row, from: Column) -> Vec<Column> {
    let specified = |&c: &Column| c != from && given.next(row, c).is_some();
    match discipline {
        Discipline::Single => (0..given.inputs).map(|i| Column(from.0 ^ 1 << i)).filter(specified).collect(),
        Discipline::Burst => {
            given.columns().filter(specified).filter(|&to| clean(given, row, from, to)).collect()
        }
    }
}

/// Whether a burst meets nothing on its way that could be taken for its end.
fn clean(given: &FlowTable, row: Row, from: Column, to: Column) -> bool {
    let old = given.cell(row, from).outputs;
    from.between(to).filter(|&c| c != from && c != to).all(|c| {
        let cell = given.cell(row, c);
        cell.next.is_none_or(|next| next == row) && old.conflicts(cell.outputs) == 0
    })
}

/// The stable row at the end of a chain of unstable cells.
fn rest(given: &FlowTable, row: Row, column: Column) -> Option<Row> {
    let mut at = row;
    for _ in 0..=given.len() {
        let next = given.next(at, column)?;
        if next == at {
            return Some(at);
        }
        at = next;
    }
    None
}

/// Names of the outputs in a mask.
pub(super) fn output_names(names: &[String], mask: u32) -> String {
    let listed: Vec<&str> =
        names.iter().enumerate().filter(|(j, _)| mask >> j & 1 == 1).map(|(_, n)| n.as_str()).collect();
    listed.join(", ")
}
