//! The closed-cover problem as the searches see it: which rows may share a set, and what a set then asks for.
//!
//! With bursts a set that holds a row in the middle of a burst must hold all its own next rows of that column. This can
//! keep two rows apart that the implication table calls compatible; [`Problem::new`] works that out (soundly, not
//! completely: the searches still enforce the rule itself), so that bounds and searches profit from it.
//!
//! # Complexity
//!
//! Without inner cells, one pass over the table. With them, O(n²·c) steps for each round, where n rows and c columns
//! are given; a round is needed only while pairs still fall.
//!
//! # References
//!
//! - A. Grasselli and F. Luccio, "A method for minimizing the number of internal states in incompletely specified
//!   sequential networks", IEEE Trans. on Electronic Computers EC-14, 1965 (covering with closure).

use fixedbitset::FixedBitSet;

use crate::base::{Column, Effort, Halted, Row};
use crate::merge::values::{CoverFault, PairTable, RowSet, columns_in_text_order};
use crate::search::clique::{self, Graph};
use crate::spec::values::FlowTable;

/// A column in which rows go to at least two different rows.
pub(super) struct Closing {
    /// Next row of each row.
    pub(super) next: Vec<Option<usize>>,
    /// The different next rows, ascending, each with the rows that go there.
    pub(super) goals: Vec<(usize, Vec<usize>)>,
    /// Rows for which the column lies inside a burst.
    pub(super) inner: Vec<usize>,
}

/// Rows, which of them may share a set, and the columns that ask for closure.
pub(super) struct Problem {
    pub(super) rows: usize,
    /// Rows joined where one set may hold both.
    pub(super) together: Graph,
    /// Rows joined where no set may hold both.
    pub(super) apart: Graph,
    /// Columns with at least two different next rows; in no other can closure fail, but for the burst rule.
    pub(super) closing: Vec<Closing>,
    /// Rows of which no two may share a set, ascending.
    pub(super) clique: Vec<usize>,
}

impl Problem {
    /// The problem of a table with its merger diagram.
    pub(super) fn new(table: &FlowTable, diagram: &Graph, effort: &Effort) -> Self {
        let closing: Vec<Closing> = columns_in_text_order(table.inputs)
            .map(|c| closing(table, c))
            .filter(|c| c.goals.len() > 1 || (!c.inner.is_empty() && !c.goals.is_empty()))
            .collect();
        let mut together = diagram.clone();
        if closing.iter().any(|c| !c.inner.is_empty()) {
            // Halting early leaves rows together that could be kept apart: weaker bounds, nothing wrong.
            let _ = part_by_bursts(&closing, &mut together, effort);
        }
        let apart = together.complement();
        let clique = clique::maximum(&apart, effort).0;
        Problem { rows: table.len(), together, apart, closing, clique }
    }

    /// Whether all rows may share one set.
    pub(super) fn all_together(&self) -> bool {
        (0..self.rows).all(|r| self.apart.row(r).iter().all(|&w| w == 0))
    }
}

fn closing(table: &FlowTable, column: Column) -> Closing {
    let next: Vec<Option<usize>> = table.rows().map(|r| table.next(r, column).map(Row::at)).collect();
    let mut arriving = vec![Vec::new(); table.len()];
    for (row, goal) in next.iter().enumerate() {
        if let Some(goal) = goal {
            arriving[*goal].push(row);
        }
    }
    let goals = arriving.into_iter().enumerate().filter(|(_, from)| !from.is_empty()).collect();
    let inner = table.rows().filter(|&r| table.cell(r, column).inner).map(Row::at).collect();
    Closing { next, goals, inner }
}

fn next_of(set: &RowSet, closing: &Closing, rows: usize) -> RowSet {
    let mut next = FixedBitSet::with_capacity(rows);
    set.ones().filter_map(|r| closing.next[r]).for_each(|r| next.insert(r));
    next
}

/// Parts the pairs that no set can hold, because what the burst rule adds to them does not fit together.
fn part_by_bursts(closing: &[Closing], together: &mut Graph, effort: &Effort) -> Result<(), Halted> {
    let n = together.vertices();
    loop {
        let mut fell = false;
        for b in 1..n {
            effort.spend(1 + b as u64 / 2)?;
            for a in 0..b {
                if together.joined(a, b) && !fits(closing, together, a, b) {
                    together.part(a, b);
                    fell = true;
                }
            }
        }
        if !fell {
            return Ok(());
        }
    }
}

/// Whether the least set that holds two rows and obeys the burst rule has no pair that is parted, nor asks for one.
fn fits(closing: &[Closing], together: &Graph, a: usize, b: usize) -> bool {
    let n = together.vertices();
    let mut set = FixedBitSet::with_capacity(n);
    set.insert(a);
    set.insert(b);
    let mut size = 2;
    loop {
        for c in closing {
            if c.inner.iter().any(|&r| set.contains(r)) {
                let next = next_of(&set, c, n);
                set.union_with(&next);
            }
        }
        let larger = set.count_ones(..);
        if larger == size {
            break;
        }
        size = larger;
    }
    let all_joined =
        |s: &RowSet| s.ones().all(|x| s.ones().take_while(|&y| y < x).all(|y| together.joined(x, y)));
    all_joined(&set) && closing.iter().all(|c| all_joined(&next_of(&set, c, n)))
}

/// Everything that is wrong with a cover by hand, sets first, then rows.
pub(super) fn cover_faults(table: &FlowTable, pairs: &PairTable, sets: &[Vec<Row>]) -> Vec<CoverFault> {
    let holds = |set: &[Row], row: &Row| set.contains(row);
    let mut faults = Vec::new();
    for (s, set) in sets.iter().enumerate() {
        if set.is_empty() {
            faults.push(CoverFault::Empty(s));
        }
        for (i, &a) in set.iter().enumerate() {
            for &b in set[i + 1..].iter().filter(|&&b| !pairs.compatible(a, b)) {
                faults.push(CoverFault::Incompatible { set: s, rows: (a.min(b), a.max(b)) });
            }
        }
        for column in columns_in_text_order(table.inputs) {
            let mut needs: Vec<Row> = set.iter().filter_map(|&r| table.next(r, column)).collect();
            needs.sort_unstable();
            needs.dedup();
            let inside = set.iter().any(|&r| table.cell(r, column).inner);
            if inside && !needs.iter().all(|r| holds(set, r)) {
                faults.push(CoverFault::LeavesBurst { set: s, column, needs });
            } else if !sets.iter().any(|t| needs.iter().all(|r| holds(t, r))) {
                faults.push(CoverFault::Open { set: s, column, needs });
            }
        }
    }
    for row in table.rows().filter(|r| !sets.iter().any(|set| holds(set, r))) {
        faults.push(CoverFault::Uncovered(row));
    }
    faults
}
