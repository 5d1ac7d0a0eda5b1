//! Satisfiability: a thin, deterministic front of a library solver that honours an [`Effort`].
//!
//! Clauses go in one by one, questions are asked under assumptions, and what was learnt is kept between questions. The
//! solver's decisions are counted as steps (two for each), so a halted search replays on any machine.
//!
//! # Complexity
//! Exponential in the worst case; the budget of the [`Effort`] bounds it.
//!
//! # References
//! N. Een, N. Sorensson: An Extensible SAT-solver, SAT 2003 (the family of solvers that the library belongs to).

use std::cell::Cell;

use batsat::Callbacks;
use rustsat::solvers::{Solve, SolveIncremental, SolverResult};
pub use rustsat::types::Lit;
use rustsat::types::{Cl, TernaryVal, Var};

use crate::base::{Effort, Halted, Stop};

/// Steps charged for each decision of the solver: a decision with its propagation takes a few microseconds.
const STEPS_PER_DECISION: u64 = 2;

/// Meters the solver from inside.
#[derive(Default)]
struct Meter {
    left: Cell<u64>,
    stop: Stop,
}

impl Callbacks for Meter {
    fn stop(&self) -> bool {
        let left = self.left.get();
        self.left.set(left.saturating_sub(STEPS_PER_DECISION));
        left < STEPS_PER_DECISION || self.stop.raised()
    }
}

/// An incremental SAT problem.
#[derive(Default)]
pub struct Sat {
    solver: rustsat_batsat::Solver<Meter>,
    variables: u32,
    clauses: usize,
}

impl Sat {
    /// An empty problem: satisfiable.
    pub fn new() -> Self {
        Sat::default()
    }

    /// A fresh variable, as its positive literal.
    pub fn variable(&mut self) -> Lit {
        let lit = Var::new(self.variables).pos_lit();
        self.variables += 1;
        lit
    }

    /// Number of variables so far.
    pub fn variables(&self) -> usize {
        self.variables as usize
    }

    /// Number of clauses so far.
    pub fn clauses(&self) -> usize {
        self.clauses
    }

    /// Adds a clause: at least one of the literals holds. The empty clause makes the problem unsatisfiable.
    pub fn clause(&mut self, literals: &[Lit]) {
        self.clauses += 1;
        // The library's only error is running out of memory while it reserves variables.
        let added = self.solver.add_clause_ref(Cl::new(literals));
        debug_assert!(added.is_ok());
    }

    /// At most one of the literals holds; pairwise for a few, by a chain of auxiliary variables beyond.
    pub fn at_most_one(&mut self, literals: &[Lit]) {
        if literals.len() <= 5 {
            for (i, &a) in literals.iter().enumerate() {
                for &b in &literals[i + 1..] {
                    self.clause(&[!a, !b]);
                }
            }
            return;
        }
        let mut seen = literals[0];
        for &lit in &literals[1..] {
            self.clause(&[!seen, !lit]);
            let next = self.variable();
            self.clause(&[!seen, next]);
            self.clause(&[!lit, next]);
            seen = next;
        }
    }

    /// Looks for an assignment under assumptions. `Ok(true)`: found, ask [`Sat::value`]. `Ok(false)`: proved that there is none.
    ///
    /// # Errors
    /// [`Halted`] when the effort is used up or stopped.
    pub fn solve(&mut self, assumptions: &[Lit], effort: &Effort<'_>) -> Result<bool, Halted> {
        let before = effort.left();
        effort.spend(STEPS_PER_DECISION)?;
        {
            let meter = self.solver.batsat_mut().cb_mut();
            meter.left.set(before);
            meter.stop = effort.stop();
        }
        let result = self.solver.solve_assumps(assumptions);
        let used = before - self.solver.batsat_ref().cb().left.get();
        let halted = effort.spend(used.saturating_sub(STEPS_PER_DECISION)).is_err();
        match result {
            Ok(SolverResult::Sat) => Ok(true),
            Ok(SolverResult::Unsat) => Ok(false),
            _ => {
                debug_assert!(halted || effort.left() < 2 * STEPS_PER_DECISION);
                Err(Halted)
            }
        }
    }

    /// Value of a literal in the assignment found last. A variable that no clause mentions is false.
    pub fn value(&self, lit: Lit) -> bool {
        match self.solver.lit_val(lit) {
            Ok(TernaryVal::True) => true,
            Ok(TernaryVal::False) => false,
            _ => lit.is_neg(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// `pigeons` pigeons in `holes` holes.
    fn pigeonhole(pigeons: usize, holes: usize) -> Sat {
        let mut sat = Sat::new();
        let at: Vec<Vec<Lit>> = (0..pigeons).map(|_| (0..holes).map(|_| sat.variable()).collect()).collect();
        for row in &at {
            sat.clause(row);
        }
        for hole in 0..holes {
            let column: Vec<Lit> = at.iter().map(|row| row[hole]).collect();
            sat.at_most_one(&column);
        }
        sat
    }

    #[test]
    fn pigeons_fit_only_if_there_are_holes_enough() {
        let effort = Effort::of(10_000_000);
        let mut fits = pigeonhole(7, 7);
        assert_eq!(fits.solve(&[], &effort), Ok(true));
        assert_eq!(pigeonhole(7, 6).solve(&[], &effort), Ok(false));
    }

    #[test]
    fn assumptions_are_forgotten_afterwards() {
        let effort = Effort::of(1000);
        let mut sat = Sat::new();
        let (a, b) = (sat.variable(), sat.variable());
        sat.clause(&[a, b]);
        assert_eq!(sat.solve(&[!a, !b], &effort), Ok(false));
        assert_eq!(sat.solve(&[!a], &effort), Ok(true));
        assert!(sat.value(b) && !sat.value(a));
    }

    #[test]
    fn a_small_budget_halts_a_hard_problem_and_replays() {
        let run = || {
            let effort = Effort::of(2000);
            (pigeonhole(11, 10).solve(&[], &effort), effort.left())
        };
        assert_eq!(run(), (Err(Halted), 0));
        assert_eq!(run(), run());
    }

    #[test]
    fn a_raised_stop_halts() {
        let stop = Stop::default();
        stop.raise();
        let effort = Effort::new(1000, stop, &|_| {});
        assert_eq!(pigeonhole(3, 3).solve(&[], &effort), Err(Halted));
    }
}
