//! A closed cover that is quickly found and never proved: rows join the first block that takes them.
//!
//! Used only where the exact search runs out of effort. Heuristic; the result is always a closed partition.
//!
//! # Complexity
//!
//! At most n·b trials for n rows and b blocks in the result; a trial follows what a merge forces, O(n·c) steps at worst
//! for c columns, and most end at the first comparison.
//!
//! # References
//!
//! - M. C. Paull and S. H. Unger, IRE Trans. on Electronic Computers EC-8, 1959 (merging with what it implies).

use fixedbitset::FixedBitSet;

use crate::merge::problem::Problem;
use crate::merge::values::RowSet;

/// A closed partition of all rows, in the order of its sets' lists.
pub(super) fn closed_partition(problem: &Problem) -> Vec<RowSet> {
    let mut blocks = Blocks::single(problem.rows);
    for row in 0..problem.rows {
        if blocks.of[row] != row {
            continue;
        }
        for first in 0..row {
            if blocks.of[first] == first
                && let Some(merged) = blocks.merged(problem, first, row)
            {
                blocks = merged;
                break;
            }
        }
    }
    (0..problem.rows).filter(|&r| blocks.of[r] == r).map(|r| blocks.members[r].clone()).collect()
}

/// A partition; each block is named by its lowest row.
#[derive(Clone)]
struct Blocks {
    of: Vec<usize>,
    members: Vec<RowSet>,
}

impl Blocks {
    fn single(rows: usize) -> Self {
        let members = (0..rows)
            .map(|r| {
                let mut set = FixedBitSet::with_capacity(rows);
                set.insert(r);
                set
            })
            .collect();
        Blocks { of: (0..rows).collect(), members }
    }

    /// This partition with two blocks merged, and whatever that forces; `None` if that does not fit.
    fn merged(&self, problem: &Problem, a: usize, b: usize) -> Option<Self> {
        if !self.fit(problem, a, b) {
            return None;
        }
        let mut blocks = self.clone();
        let mut forced = vec![(a, b)];
        while let Some((a, b)) = forced.pop() {
            let (a, b) = (blocks.of[a].min(blocks.of[b]), blocks.of[a].max(blocks.of[b]));
            if a == b {
                continue;
            }
            if !blocks.fit(problem, a, b) {
                return None;
            }
            blocks.unite(a, b);
            for closing in &problem.closing {
                let own = closing.inner.iter().any(|&r| blocks.of[r] == a).then_some(a);
                let mut goals =
                    own.into_iter().chain(blocks.members[a].ones().filter_map(|r| closing.next[r]));
                if let Some(first) = goals.next() {
                    forced.extend(goals.filter(|&g| blocks.of[g] != blocks.of[first]).map(|g| (first, g)));
                }
            }
        }
        Some(blocks)
    }

    fn fit(&self, problem: &Problem, a: usize, b: usize) -> bool {
        self.members[a].ones().all(|x| self.members[b].ones().all(|y| problem.together.joined(x, y)))
    }

    fn unite(&mut self, a: usize, b: usize) {
        let moved = std::mem::take(&mut self.members[b]);
        for r in moved.ones() {
            self.of[r] = a;
        }
        self.members[a].union_with(&moved);
    }
}
