//! Closed covers of `k` sets as a satisfiability problem.
//!
//! `inside(s, r)` says that set `s` holds row `r`; `receives(s, c, t)` that set `t` holds all next rows of set `s` in
//! column `c`. The rows of the problem's clique are fixed in different sets, which also settles much of the rest, and
//! whatever is settled that way never becomes a variable. Columns in which a set can have one next row only ask for
//! nothing. The literal `disjoint` asks that no row lies in two sets, `at_most_extra(e)` that the sets have at most `e`
//! members more than there are rows.
//!
//! # Complexity
//!
//! With n rows, k sets and c columns with g different next rows each: O(k·(n + c·(g + k))) variables and
//! O(k·(e + n·k + c·(n + g·k))) clauses, where e pairs of rows may not share a set.
//!
//! # References
//!
//! - A. Grasselli and F. Luccio, IRE/IEEE Trans. on Electronic Computers EC-14, 1965 (the problem).
//! - C. Sinz, "Towards an optimal CNF encoding of Boolean cardinality constraints", CP 2005 (the counter of members).

use fixedbitset::FixedBitSet;

use crate::base::{Effort, Halted};
use crate::merge::problem::{Closing, Problem};
use crate::merge::values::RowSet;
use crate::search::sat::{Lit, Sat};

/// Larger problems are not written down: they would take gigabytes.
const MOST_CLAUSES: u64 = 4_000_000;

/// A membership or another statement: settled, or left to the solver.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Truth {
    /// It never holds.
    No,
    /// It always holds.
    Yes,
    /// It holds if the literal does.
    If(Lit),
}

/// The clauses for covers of `sets` sets.
pub(super) struct Model<'p> {
    /// The solver; searches add their own clauses.
    pub(super) sat: Sat,
    /// Number of sets.
    pub(super) sets: usize,
    /// No row lies in two sets.
    pub(super) disjoint: Lit,
    problem: &'p Problem,
    inside: Vec<Truth>,
    counter: Option<Counter>,
}

/// A unary count of members beyond one a row: `above[e]` holds if there are more than `e`.
struct Counter {
    above: Vec<Lit>,
}

impl<'p> Model<'p> {
    /// The covers of `sets` sets; `sets` is at least the size of the clique.
    ///
    /// # Errors
    /// [`Halted`] where the effort does not suffice to write the clauses.
    pub(super) fn new(problem: &'p Problem, sets: usize, effort: &Effort) -> Result<Self, Halted> {
        let clauses = estimate(problem, sets);
        if clauses > MOST_CLAUSES {
            return Err(Halted);
        }
        effort.spend(clauses / 8)?;
        let mut sat = Sat::new();
        let disjoint = sat.variable();
        let inside = memberships(problem, sets, &mut sat);
        let mut model = Model { sat, sets, disjoint, problem, inside, counter: None };
        model.cover();
        model.keep_apart();
        for closing in &problem.closing {
            for s in 0..sets {
                model.close(s, closing);
            }
        }
        Ok(model)
    }

    /// Whether set `s` holds row `r`.
    pub(super) fn inside(&self, s: usize, r: usize) -> Truth {
        self.inside[s * self.problem.rows + r]
    }

    /// The sets of the assignment found last, in the order of their lists.
    pub(super) fn found(&self) -> Vec<RowSet> {
        let mut sets: Vec<RowSet> = (0..self.sets)
            .map(|s| {
                let mut set = FixedBitSet::with_capacity(self.problem.rows);
                for r in 0..self.problem.rows {
                    let holds = match self.inside(s, r) {
                        Truth::No => false,
                        Truth::Yes => true,
                        Truth::If(lit) => self.sat.value(lit),
                    };
                    set.set(r, holds);
                }
                set
            })
            .collect();
        sets.sort_by(crate::search::clique::compare_as_lists);
        sets
    }

    /// Adds a clause of statements.
    pub(super) fn clause(&mut self, literals: &[Truth]) {
        if literals.contains(&Truth::Yes) {
            return;
        }
        let mut open = [self.disjoint; 8];
        let mut count = 0;
        let mut long = Vec::new();
        for literal in literals {
            if let Truth::If(lit) = literal {
                if count < open.len() {
                    open[count] = *lit;
                } else {
                    if count == open.len() {
                        long.extend_from_slice(&open);
                    }
                    long.push(*lit);
                }
                count += 1;
            }
        }
        self.sat.clause(if count <= open.len() { &open[..count] } else { &long });
    }

    /// The assumption that there are at most `extra` members more than rows.
    pub(super) fn at_most_extra(&mut self, extra: usize) -> Lit {
        loop {
            if let Some(&above) = self.counter.as_ref().and_then(|counter| counter.above.get(extra)) {
                return !above;
            }
            let width = (extra + 1).max(4).next_power_of_two();
            self.count_extra(width);
        }
    }

    /// Forbids a cover, whatever the order of its sets.
    pub(super) fn forbid(&mut self, cover: &[RowSet]) {
        let mut present = Vec::with_capacity(cover.len());
        for set in cover {
            let here = self.sat.variable();
            present.push(!here);
            for s in 0..self.sets {
                let mut clause: Vec<Truth> = (0..self.problem.rows)
                    .map(|r| if set.contains(r) { not(self.inside(s, r)) } else { self.inside(s, r) })
                    .collect();
                clause.push(Truth::If(here));
                self.clause(&clause);
            }
        }
        self.sat.clause(&present);
    }

    fn cover(&mut self) {
        for r in 0..self.problem.rows {
            let holders: Vec<Truth> = (0..self.sets).map(|s| self.inside(s, r)).collect();
            self.clause(&holders);
            for (s, &a) in holders.iter().enumerate() {
                for &b in &holders[s + 1..] {
                    self.clause(&[Truth::If(!self.disjoint), not(a), not(b)]);
                }
            }
        }
    }

    fn keep_apart(&mut self) {
        let problem = self.problem;
        for b in 1..problem.rows {
            for a in (0..b).filter(|&a| problem.apart.joined(a, b)) {
                for s in 0..self.sets {
                    self.clause(&[not(self.inside(s, a)), not(self.inside(s, b))]);
                }
            }
        }
    }

    /// All next rows of set `s` in a column lie together in one set, in `s` itself in the middle of a burst.
    fn close(&mut self, s: usize, closing: &Closing) {
        let goals: Vec<(usize, Truth)> = closing
            .goals
            .iter()
            .map(|(goal, from)| (*goal, self.some_inside(s, from)))
            .filter(|&(_, asked)| asked != Truth::No)
            .collect();
        if goals.is_empty() || (goals.len() == 1 && closing.inner.is_empty()) {
            return;
        }
        let receives: Vec<Truth> = (0..self.sets).map(|t| self.receiver(t, &goals)).collect();
        self.clause(&receives);
        for (t, &receiver) in receives.iter().enumerate() {
            for &(goal, asked) in &goals {
                let held = self.inside(t, goal);
                self.clause(&[not(asked), not(receiver), held]);
                // Follows where sets are disjoint: there is no other set to go to.
                self.clause(&[Truth::If(!self.disjoint), not(asked), not(held), receiver]);
            }
        }
        for &row in &closing.inner {
            self.clause(&[not(self.inside(s, row)), receives[s]]);
        }
    }

    /// A statement that holds if set `s` holds any of the rows (and is free to hold if not).
    fn some_inside(&mut self, s: usize, rows: &[usize]) -> Truth {
        let mut any = Truth::No;
        let mut several = false;
        for &r in rows {
            match self.inside(s, r) {
                Truth::No => {}
                Truth::Yes => return Truth::Yes,
                Truth::If(lit) => {
                    several |= any != Truth::No;
                    any = Truth::If(lit);
                }
            }
        }
        if !several {
            return any;
        }
        let any = Truth::If(self.sat.variable());
        for &r in rows {
            self.clause(&[not(self.inside(s, r)), any]);
        }
        any
    }

    /// A fresh receiver, or `No` where set `t` cannot hold a goal that is asked for in any case.
    fn receiver(&mut self, t: usize, goals: &[(usize, Truth)]) -> Truth {
        let barred =
            goals.iter().any(|&(goal, asked)| asked == Truth::Yes && self.inside(t, goal) == Truth::No);
        if barred { Truth::No } else { Truth::If(self.sat.variable()) }
    }

    /// Writes a counter that tells up to `width` extra members apart.
    fn count_extra(&mut self, width: usize) {
        let mut above: Vec<Truth> = vec![Truth::No; width];
        for r in 0..self.problem.rows {
            let holders: Vec<Truth> =
                (0..self.sets).map(|s| self.inside(s, r)).filter(|&t| t != Truth::No).collect();
            let mut earlier = holders.first().copied().unwrap_or(Truth::No);
            for (i, &holder) in holders.iter().enumerate().skip(1) {
                let again = Truth::If(self.sat.variable());
                self.clause(&[not(earlier), not(holder), again]);
                above = self.add_one(&above, again);
                if i + 1 < holders.len() {
                    let either = Truth::If(self.sat.variable());
                    self.clause(&[not(earlier), either]);
                    self.clause(&[not(holder), either]);
                    earlier = either;
                }
            }
        }
        let above = above
            .into_iter()
            .map(|count| match count {
                Truth::If(lit) => lit,
                settled => {
                    let lit = self.sat.variable();
                    self.sat.clause(&[if settled == Truth::Yes { lit } else { !lit }]);
                    lit
                }
            })
            .collect();
        self.counter = Some(Counter { above });
    }

    /// The unary count `above`, one higher if `one` holds.
    fn add_one(&mut self, above: &[Truth], one: Truth) -> Vec<Truth> {
        let mut below = Truth::Yes;
        let mut sum = Vec::with_capacity(above.len());
        for &count in above {
            if below == Truth::No {
                sum.push(Truth::No);
                continue;
            }
            let higher = Truth::If(self.sat.variable());
            self.clause(&[not(count), higher]);
            self.clause(&[not(below), not(one), higher]);
            sum.push(higher);
            below = count;
        }
        sum
    }
}

/// The opposite statement.
pub(super) fn not(statement: Truth) -> Truth {
    match statement {
        Truth::No => Truth::Yes,
        Truth::Yes => Truth::No,
        Truth::If(lit) => Truth::If(!lit),
    }
}

/// Each row of the clique stands in the set of its number, and keeps out the rows it cannot be with.
fn memberships(problem: &Problem, sets: usize, sat: &mut Sat) -> Vec<Truth> {
    let mut inside = Vec::with_capacity(sets * problem.rows);
    for s in 0..sets {
        for r in 0..problem.rows {
            inside.push(match problem.clique.get(s) {
                Some(&fixed) if fixed == r => Truth::Yes,
                Some(&fixed) if problem.apart.joined(fixed, r) => Truth::No,
                _ => Truth::If(sat.variable()),
            });
        }
    }
    inside
}

/// About how many clauses there will be.
fn estimate(problem: &Problem, sets: usize) -> u64 {
    let apart: u64 = (0..problem.rows)
        .map(|r| problem.apart.row(r).iter().map(|w| u64::from(w.count_ones())).sum::<u64>())
        .sum();
    let (n, k) = (problem.rows as u64, sets as u64);
    let closing: u64 = problem
        .closing
        .iter()
        .map(|c| k * (c.goals.iter().map(|g| g.1.len() as u64).sum::<u64>() + 2 * k * c.goals.len() as u64))
        .sum();
    apart / 2 * k + n * k * k / 2 + closing
}
