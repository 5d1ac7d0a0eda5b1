//! Essential hazards: an input change that can race its own feedback [Unger 1959, 1969].
//!
//! A far part of the circuit may still see an old column when the state has already changed. If the state then goes
//! elsewhere and does not come back, the hazard is essential: no choice of logic removes it, only a delay in the feedback.
//! Exact on the reduced table, O(rows · columns · inputs), for bursts times the columns of the burst. Where the table leaves
//! the cell open the finished functions decide, for every order of the
//! state variables (of more than six excited at once: each alone, or all together).

use std::collections::BTreeSet;

use crate::base::{Code, Column, Row};
use crate::codes::values::Coded;
use crate::logic::values::{EssentialHazard, Function, Target, point};
use crate::merge::values::Reduced;
use crate::project::choices::{Discipline, Shape};
use crate::spec::values::FlowTable;

/// Essential hazards of single-bit changes, and of bursts.
pub(crate) fn essential(
    table: &FlowTable,
    discipline: Discipline,
) -> (Vec<EssentialHazard>, Vec<EssentialHazard>) {
    let mut found = (Vec::new(), Vec::new());
    each_change(table, discipline, |row, column, to, next| {
        for seen in seen_columns(column, to) {
            let strayed = table.next(next, seen);
            let back = strayed.and_then(|s| table.next(s, to));
            if back.is_some_and(|b| b != next) {
                let list = if column.distance(to) == 1 { &mut found.0 } else { &mut found.1 };
                list.push(EssentialHazard { row, column, to, seen });
            }
        }
    });
    found
}

/// The same where the table leaves the cell open and the functions decide. Functions with a clash are missing; then
/// nothing is said.
pub(crate) fn implementation(
    reduced: &Reduced,
    coded: &Coded,
    functions: &[Function],
    shape: Shape,
    discipline: Discipline,
) -> Vec<EssentialHazard> {
    let table = &reduced.table;
    let Some(circuit) = Circuit::new(functions, shape, table.inputs, coded.bits) else {
        return Vec::new();
    };
    let mut found = Vec::new();
    each_change(table, discipline, |row, column, to, next| {
        for seen in seen_columns(column, to).filter(|&c| table.next(next, c).is_none()) {
            let arrived = coded.codes[row.at()].iter().map(|&code| {
                let way = coded
                    .ways
                    .iter()
                    .find(|w| w.from == row && w.column == to && w.path.first() == Some(&code));
                way.and_then(|w| w.path.last().copied()).unwrap_or(code)
            });
            let arrived: BTreeSet<Code> = arrived.collect();
            let astray = arrived.iter().any(|&code| {
                circuit.rests(code, seen).iter().any(|&stray| {
                    circuit.rests(stray, to).iter().any(|rest| !coded.codes[next.at()].contains(rest))
                })
            });
            if astray {
                found.push(EssentialHazard { row, column, to, seen });
            }
        }
    });
    found
}

/// Every input change from a stable total state into a specified cell that leaves the row: one bit, or a clean burst.
fn each_change(table: &FlowTable, discipline: Discipline, mut visit: impl FnMut(Row, Column, Column, Row)) {
    for row in table.rows() {
        for column in table.columns().filter(|&c| table.stable(row, c)) {
            for to in table.columns() {
                let Some(next) = table.next(row, to).filter(|&next| next != row) else { continue };
                let single = column.distance(to) == 1;
                if single || discipline == Discipline::Burst && clean(table, row, column, to) {
                    visit(row, column, to, next);
                }
            }
        }
    }
}

/// Whether the row stays everywhere strictly inside a burst, as far as it is specified there.
fn clean(table: &FlowTable, row: Row, from: Column, to: Column) -> bool {
    from.between(to)
        .filter(|&c| c != from && c != to)
        .all(|c| table.next(row, c).is_none_or(|next| next == row))
}

/// The columns that may still be seen during a change: all on the way but the last.
fn seen_columns(from: Column, to: Column) -> impl Iterator<Item = Column> {
    let mut all: Vec<Column> = from.between(to).filter(|&c| c != to).collect();
    all.sort_unstable();
    all.into_iter()
}

/// Codes that are followed from one start; a circuit that strays further is not followed to the end.
const CODES: usize = 4096;

/// Which of the excited variables may change at once: any of them, if they are few; otherwise each alone, or all.
fn orders(excited: u32) -> Vec<u32> {
    if excited.count_ones() > 6 {
        let single = (0..32).map(|b| 1 << b).filter(|bit| excited & bit != 0);
        return single.chain([excited]).collect();
    }
    let mut all = Vec::new();
    let mut subset = excited;
    while subset != 0 {
        all.push(subset);
        subset = (subset - 1) & excited;
    }
    all
}

/// The excitations, to be run.
struct Circuit<'f> {
    /// For each state variable the next-state function, or set and reset.
    stages: Vec<(&'f Function, Option<&'f Function>)>,
    shape: Shape,
    inputs: usize,
}

impl Circuit<'_> {
    fn new(functions: &[Function], shape: Shape, inputs: usize, bits: usize) -> Option<Circuit<'_>> {
        let find = |target: Target| functions.iter().find(|f| f.target == target);
        let stages = (0..bits).map(|i| match find(Target::Next(i)) {
            Some(next) => Some((next, None)),
            None => Some((find(Target::Set(i))?, Some(find(Target::Reset(i))?))),
        });
        Some(Circuit { stages: stages.collect::<Option<_>>()?, shape, inputs })
    }

    /// The state variables that may change. Set and reset together leave a latch undecided: it may change.
    fn excited(&self, code: Code, column: Column) -> u32 {
        let at = point(column, code, self.inputs);
        self.stages.iter().enumerate().fold(0, |excited, (i, (first, second))| {
            let now = code.0 >> i & 1 == 1;
            let moves = match second {
                None => first.value(self.shape, at) != now,
                Some(reset) if now => reset.value(self.shape, at),
                Some(_) => first.value(self.shape, at),
            };
            excited | u32::from(moves) << i
        })
    }

    /// Where the circuit may come to rest in a column, or go round for ever, for every order of changes.
    fn rests(&self, code: Code, column: Column) -> BTreeSet<Code> {
        let mut seen = BTreeSet::from([code]);
        let mut stack = vec![code];
        let mut rests = BTreeSet::new();
        while let Some(code) = stack.pop() {
            let excited = self.excited(code, column);
            if excited == 0 {
                rests.insert(code);
            }
            for subset in orders(excited) {
                let next = Code(code.0 ^ subset);
                if seen.len() < CODES && seen.insert(next) {
                    stack.push(next);
                }
            }
        }
        if rests.is_empty() { seen } else { rests }
    }
}
