//! The maximal compatibles, as maximal cliques of the merger diagram, and what closure asks of each.
//!
//! They are for the eye and for the user who chooses a cover by hand: no search depends on them. There can be exponentially
//! many, so they are listed only up to a limit, and then not at all.
//!
//! # Complexity
//!
//! See [`clique::maximal`]; then for each compatible one pass over the different next rows of the columns, n/64 words each.
//!
//! # References
//!
//! - M. C. Paull and S. H. Unger, IRE Trans. on Electronic Computers EC-8, 1959 (compatibility classes).
//! - A. Grasselli and F. Luccio, IEEE Trans. on Electronic Computers EC-14, 1965 (class sets).

use crate::base::Effort;
use crate::merge::problem::Problem;
use crate::merge::values::{Merged, RowSet};
use crate::search::clique::{self, Graph};

/// Maximal compatibles are listed up to this number.
pub const MOST_MAXIMAL: usize = 5_000;

/// Lists the maximal compatibles with their class sets, if they can be listed.
pub(super) fn list(diagram: &Graph, problem: &Problem, merged: &mut Merged, effort: &Effort) {
    let (maximal, complete) = clique::maximal(diagram, MOST_MAXIMAL, effort);
    merged.maximal_complete = complete;
    if complete {
        let mut classes = Classes::of(problem);
        merged.class_sets = maximal.iter().map(|set| classes.asked_by(set)).collect();
        merged.maximal = maximal;
    }
}

/// For each column that can ask for anything, its next rows with the sets of rows that go there.
struct Classes {
    rows: usize,
    words: usize,
    /// Next rows of all columns, one column after the other, and where each column ends.
    goals: Vec<usize>,
    ends: Vec<usize>,
    /// `words` words for each of `goals`.
    from: Vec<usize>,
    /// The next rows in each column, `words` words each; filled anew for each compatible.
    next: Vec<usize>,
}

impl Classes {
    fn of(problem: &Problem) -> Self {
        let words = problem.rows.div_ceil(usize::BITS as usize);
        let (mut goals, mut ends, mut from) = (Vec::new(), Vec::new(), Vec::new());
        for closing in &problem.closing {
            for (goal, rows) in &closing.goals {
                goals.push(*goal);
                let start = from.len();
                from.resize(start + words, 0);
                rows.iter().for_each(|&r| insert(&mut from[start..], r));
            }
            ends.push(goals.len());
        }
        Classes { rows: problem.rows, words, goals, ends, from, next: Vec::new() }
    }

    /// The sets of two or more next rows that closure asks to lie together, none inside `set` or inside another.
    fn asked_by(&mut self, set: &RowSet) -> Vec<RowSet> {
        self.next.clear();
        let mut i = 0;
        for &end in &self.ends {
            let start = self.next.len();
            self.next.resize(start + self.words, 0);
            let mut count = 0;
            while i < end {
                if meet(&self.from[i * self.words..][..self.words], set.as_slice()) {
                    insert(&mut self.next[start..], self.goals[i]);
                    count += 1;
                }
                i += 1;
            }
            if count < 2 || inside(&self.next[start..], set.as_slice()) {
                self.next.truncate(start);
            }
        }
        let asked: Vec<&[usize]> = self.next.chunks_exact(self.words).collect();
        let mut kept: Vec<RowSet> = (0..asked.len())
            .filter(|&i| {
                // Of equal sets the first stays.
                !(0..asked.len())
                    .any(|j| j != i && inside(asked[i], asked[j]) && (j < i || asked[i] != asked[j]))
            })
            .map(|i| RowSet::with_capacity_and_blocks(self.rows, asked[i].iter().copied()))
            .collect();
        kept.sort_by(clique::compare_as_lists);
        kept
    }
}

fn insert(words: &mut [usize], row: usize) {
    let bits = usize::BITS as usize;
    words[row / bits] |= 1 << (row % bits);
}

fn meet(a: &[usize], b: &[usize]) -> bool {
    a.iter().zip(b).any(|(x, y)| x & y != 0)
}

fn inside(a: &[usize], b: &[usize]) -> bool {
    a.iter().zip(b).all(|(x, y)| x & !y == 0)
}
