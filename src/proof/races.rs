//! The race check: does every move of the encoded table settle in the right row, in whatever order its bits change?
//!
//! Exact, and independent of the method that made the codes: it reads the codes of the rows and the next codes of the
//! encoded table, not the ways. From each code of each row, in each column that the reduced table specifies, every
//! non-empty subset of the excited bits is followed (general multiple-winner; D. A. Huffman, The synthesis of
//! sequential switching circuits, 1954, for critical and non-critical races). The cost is linear in the codes passed,
//! and for a step of `d` bits at once in the `2^d` codes of its subcube.

use crate::base::{Code, Column, Row};
use crate::codes::values::Coded;
use crate::merge::values::Reduced;
use crate::proof::settle::{Settled, settle, way_to};
use crate::proof::values::{Race, RaceKind, Races};

/// Follows every move of the reduced table through the encoded table.
pub fn races(reduced: &Reduced, coded: &Coded) -> Races {
    let mut found = Races::default();
    let columns = by_column(reduced, coded);
    shared_codes(reduced, coded, &mut found);
    for column in reduced.table.columns() {
        let next = |code: u32| next_code(&columns[column.at()], code);
        for row in reduced.table.rows() {
            let Some(to) = reduced.table.next(row, column) else { continue };
            for &code in codes_of(coded, row) {
                let start = Start { row, column, to, code, right: codes_of(coded, to) };
                if to == row { start.rest(&next, &mut found) } else { start.leave(&next, &mut found) }
            }
        }
    }
    found
}

/// The specified entries of each column as (code, next code), by code.
fn by_column(reduced: &Reduced, coded: &Coded) -> Vec<Vec<(u32, u32)>> {
    let mut columns = vec![Vec::new(); 1 << reduced.table.inputs];
    for (&(code, column), entry) in &coded.encoded.entries {
        if let Some(entries) = columns.get_mut(column.at()) {
            entries.push((code.0, entry.next.0));
        }
    }
    columns
}

fn next_code(entries: &[(u32, u32)], code: u32) -> Option<u32> {
    entries.binary_search_by_key(&code, |e| e.0).ok().map(|i| entries[i].1)
}

fn codes_of(coded: &Coded, row: Row) -> &[Code] {
    coded.codes.get(row.at()).map_or(&[], Vec::as_slice)
}

/// Two rows with the same code cannot be told apart: a race that is lost before it begins.
fn shared_codes(reduced: &Reduced, coded: &Coded, found: &mut Races) {
    let mut owners: Vec<(Code, Row)> = reduced
        .table
        .rows()
        .flat_map(|row| codes_of(coded, row).iter().map(move |&code| (code, row)))
        .collect();
    owners.sort_unstable();
    for pair in owners.windows(2) {
        let ((code, from), (other, to)) = (pair[0], pair[1]);
        if code == other && from != to {
            let path = vec![code];
            found.critical.push(Race { from, column: Column(0), to, kind: RaceKind::Critical, path });
        }
    }
}

/// A specified cell of the reduced table, seen from one code of its row.
struct Start<'a> {
    row: Row,
    column: Column,
    to: Row,
    code: Code,
    /// The codes of `to`.
    right: &'a [Code],
}

impl Start<'_> {
    /// A stable cell must be stable at every code of its row.
    fn rest(&self, next: &impl Fn(u32) -> Option<u32>, found: &mut Races) {
        if next(self.code.0) == Some(self.code.0) {
            return;
        }
        let settled = settle(self.code.0, next);
        if self.judge(&settled, next, found) {
            // It comes to rest in the row after all, but it should not have moved.
            let path: Vec<u32> = settled.steps.first().map_or(vec![self.code.0], |&(a, b)| vec![a, b]);
            found.critical.push(self.race(RaceKind::Critical, &path));
        }
    }

    /// An unstable cell must lead to one code of the next row.
    fn leave(&self, next: &impl Fn(u32) -> Option<u32>, found: &mut Races) {
        let settled = settle(self.code.0, next);
        if !self.judge(&settled, next, found) {
            return;
        }
        if settled.steps.iter().any(|&(a, b)| (a ^ b).count_ones() > 1) {
            found.noncritical += 1;
        }
        let steps = length(self.code.0, next);
        if steps > 1 {
            found.cycles.push((self.row, self.column, steps));
        }
        found.longest = found.longest.max(steps);
    }

    /// Lists what can be lost from here, each kind once. True if nothing can.
    fn judge(&self, settled: &Settled, next: &impl Fn(u32) -> Option<u32>, found: &mut Races) -> bool {
        let before = found.critical.len();
        // Two ends are one too many even where both belong to the right row: the design counts on the one of its way.
        let wrong =
            settled.ends.iter().find(|&&end| !self.right.contains(&Code(end))).or(settled.ends.get(1));
        if let Some(&end) = wrong {
            found.critical.push(self.race(RaceKind::Critical, &way_to(self.code.0, end, next)));
        }
        if let Some(path) = &settled.cycle {
            found.critical.push(self.race(RaceKind::Oscillation, path));
        }
        if let Some(path) = &settled.stray {
            found.critical.push(self.race(RaceKind::Stray, path));
        }
        if settled.lost {
            found.critical.push(self.race(RaceKind::Stray, &[self.code.0]));
        }
        found.critical.len() == before
    }

    fn race(&self, kind: RaceKind, path: &[u32]) -> Race {
        let path = path.iter().map(|&c| Code(c)).collect();
        Race { from: self.row, column: self.column, to: self.to, kind, path }
    }
}

/// Steps from a code to rest when all excited bits change together. The start is known to settle.
fn length(start: u32, next: &impl Fn(u32) -> Option<u32>) -> usize {
    let mut code = start;
    let mut steps = 0;
    while let Some(goal) = next(code) {
        if goal == code {
            break;
        }
        code = goal;
        steps += 1;
    }
    steps
}
