//! Products shared between functions: the fewest different products for all functions together, then the fewest literals
//! with a shared product counted once.
//!
//! A product may serve a function only if it is allowed there, so each function stays free of hazards by itself. For each
//! set of functions the maximal products allowed in all of them, and holding a required cube of each, are candidates: an
//! optimal product, grown as far as the functions that use it allow, is one of them. They are found by expanding the
//! required cubes of the first function of the set under the rules of all; a set without candidates ends its branch. One
//! covering problem over the required cubes of all functions then chooses. Exact for the early and late outputs that the
//! functions settled on alone.
//!
//! Source: E. J. McCluskey and H. Schorr, "Essential multiple-output prime implicants", 1962 (from memory).
//!
//! Cost: the expansions of one function times the sets of functions that have a product in common; at worst exponential in
//! the number of functions.

use crate::base::{Bound, Effort};
use crate::logic::expand::{Expander, Rules};
use crate::logic::minimise::{Minimum, Problem};
use crate::logic::values::{Cube, Privileged};
use crate::search::cover::Covering;

/// Minimises functions together. `alone`: the minimum of each for itself, which the result never exceeds. The bound of
/// each result tells of all of them together: `Proved`, or stopped with what each needs for itself at least.
pub(crate) fn share(problems: &[&Problem], alone: &[Minimum], effort: &Effort<'_>) -> Vec<Minimum> {
    let mut gather = Gather {
        problems,
        effort,
        expander: Expander::default(),
        found: alone.iter().flat_map(|m| m.products.iter().copied()).collect(),
        complete: true,
    };
    gather.run();
    let complete = gather.complete;
    let mut candidates = gather.found;
    candidates.sort_unstable_by_key(|c| (c.literals(), *c));
    candidates.dedup();
    let Some((chosen, bound)) = choose(problems, &candidates, effort) else {
        return alone.to_vec();
    };
    let (together, apart) =
        (price(chosen.iter().copied()), price(alone.iter().flat_map(|m| m.products.iter().copied())));
    let proved = complete && bound.proved();
    let pick = |n: usize| {
        let own = if together < apart { used(problems[n], &chosen, effort) } else { None };
        own.unwrap_or_else(|| alone[n].products.clone())
    };
    let least = |n: usize| match alone[n].bound {
        Bound::Proved => alone[n].products.len(),
        Bound::Stopped { lower } => lower,
    };
    let bound = |n: usize| if proved { Bound::Proved } else { Bound::Stopped { lower: least(n) } };
    (0..problems.len()).map(|n| Minimum { products: pick(n), bound: bound(n) }).collect()
}

/// Different products, and their literals.
fn price(products: impl Iterator<Item = Cube>) -> (usize, u32) {
    let mut all: Vec<Cube> = products.collect();
    all.sort_unstable();
    all.dedup();
    (all.len(), all.iter().map(|c| c.literals()).sum())
}

/// The cheapest set of candidates that serves all functions.
fn choose(problems: &[&Problem], candidates: &[Cube], effort: &Effort<'_>) -> Option<(Vec<Cube>, Bound)> {
    let rows = problems.iter().map(|p| p.required.len()).sum();
    let mut covering = Covering::new(rows);
    for &candidate in candidates {
        let mut held = Vec::new();
        let mut first = 0;
        for problem in problems {
            if allowed(problem, candidate) {
                let cubes = problem.required.iter().enumerate();
                held.extend(cubes.filter(|(_, r)| candidate.contains(r.cube)).map(|(i, _)| first + i));
            }
            first += problem.required.len();
        }
        covering.push(candidate.literals(), held);
    }
    let cover = covering.solve(effort, 0)?;
    Some((cover.columns.iter().map(|&j| candidates[j]).collect(), cover.bound))
}

/// The fewest of the chosen products that serve one function.
fn used(problem: &Problem, chosen: &[Cube], effort: &Effort<'_>) -> Option<Vec<Cube>> {
    let mine: Vec<Cube> = chosen.iter().copied().filter(|&c| allowed(problem, c)).collect();
    let mut covering = Covering::new(problem.required.len());
    for c in &mine {
        let held = (0..problem.required.len()).filter(|&r| c.contains(problem.required[r].cube));
        covering.push(c.literals(), held);
    }
    Some(covering.solve(effort, 0)?.columns.iter().map(|&j| mine[j]).collect())
}

fn allowed(problem: &Problem, product: Cube) -> bool {
    product.care & !problem.mask == 0 && problem.rules().allow(product)
}

/// Gathers candidates.
struct Gather<'g, 'e> {
    problems: &'g [&'g Problem],
    effort: &'g Effort<'e>,
    expander: Expander,
    found: Vec<Cube>,
    complete: bool,
}

/// The rules of a set of functions together.
#[derive(Clone, Default)]
struct Union {
    functions: Vec<usize>,
    mask: u32,
    off: Vec<Cube>,
    privileged: Vec<Privileged>,
}

impl Union {
    fn with(&self, problems: &[&Problem], next: usize) -> Union {
        let mut union = self.clone();
        union.functions.push(next);
        union.mask = if self.functions.is_empty() { u32::MAX } else { self.mask } & problems[next].mask;
        union.off.extend(&problems[next].off);
        union.privileged.extend(&problems[next].privileged);
        union
    }
}

impl Gather<'_, '_> {
    fn run(&mut self) {
        for first in 0..self.problems.len() {
            let union = Union::default().with(self.problems, first);
            let seeds: Vec<Cube> = self.problems[first].required.iter().map(|r| r.cube).collect();
            self.extend(&union, &seeds);
        }
    }

    /// Candidates of a set of functions, then of the sets with one later function more. `seeds`: required cubes of the
    /// first function that some product serving all of the set may hold.
    fn extend(&mut self, union: &Union, seeds: &[Cube]) {
        let rules = Rules { off: &union.off, privileged: &union.privileged };
        let mut fruitful = Vec::new();
        for &seed in seeds {
            let start = self.found.len();
            let shadow = Cube { care: seed.care & union.mask, ones: seed.ones & union.mask };
            let work = self.expander.expand(shadow, rules, self.effort.left(), &mut self.found);
            if work.is_none_or(|work| self.effort.spend(work).is_err()) {
                self.complete = false;
                return;
            }
            let problems = self.problems;
            let mut kept = start;
            for at in start..self.found.len() {
                let product = self.found[at];
                let serves = |f: &usize| problems[*f].required.iter().any(|r| product.contains(r.cube));
                if union.functions.iter().all(serves) {
                    self.found[kept] = product;
                    kept += 1;
                }
            }
            self.found.truncate(kept);
            if kept > start {
                fruitful.push(seed);
            }
        }
        if fruitful.is_empty() {
            return;
        }
        let last = union.functions.last().map_or(0, |&f| f + 1);
        for next in last..self.problems.len() {
            self.extend(&union.with(self.problems, next), &fruitful);
            if !self.complete {
                return;
            }
        }
    }
}
