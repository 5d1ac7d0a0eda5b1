//! The smallest hazard-free cover of one function by products.
//!
//! A *problem* is stated for ones; for product-of-sums the caller states it for the zeros. Each required cube and each
//! point that must be held is a row, each maximal allowed product a column; see [`expand`](crate::logic::expand) and
//! [`cover`](crate::search::cover). Exact: a smallest cover by allowed products exists among the maximal ones, for
//! growing a product keeps what it holds and only drops literals.
//!
//! Source: D. L. Dill and S. M. Nowick, "Exact two-level minimization of hazard-free logic with multiple-input changes",
//! IEEE Transactions on Computer-Aided Design, 1995; E. J. McCluskey, 1956, for the covering.

use crate::base::{Bound, Effort};
use crate::logic::cubes::join_of;
use crate::logic::expand::{Expander, Rules};
use crate::logic::values::{Cube, Privileged, Required};
use crate::search::cover::Covering;

/// More candidate products than this are not kept; the result then says that it is not proved.
const CANDIDATES: usize = 1 << 17;

/// A privileged cube with the transitions that fence it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Fence {
    /// The cube and the point that a product must hold to be allowed in.
    pub(crate) cube: Privileged,
    /// Index into the function's transitions; `None` for the idle side of a latch.
    pub(crate) why: Option<usize>,
}

/// What a set of products must hold, and what no product of it may do.
#[derive(Debug, Clone, Default)]
pub(crate) struct Problem {
    /// Variables that products may contain.
    pub(crate) mask: u32,
    /// Cubes that must be missed.
    pub(crate) off: Vec<Cube>,
    /// Cubes each to be held by one product: none inside another, together all points that must be held.
    pub(crate) required: Vec<Required>,
    /// Cubes that a product may meet only if it holds their start.
    pub(crate) fences: Vec<Fence>,
    /// The cubes of `fences`.
    pub(crate) privileged: Vec<Privileged>,
}

/// A smallest set of products.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Minimum {
    /// The products.
    pub(crate) products: Vec<Cube>,
    /// Whether a smaller set is impossible.
    pub(crate) bound: Bound,
}

/// A required cube that no allowed product holds.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Unheld {
    /// Index into the problem's required cubes.
    pub(crate) required: usize,
}

impl Problem {
    /// A problem from the points that must be held (ascending, without repeats), the cubes that must be missed, what the
    /// transitions ask for, and the fences.
    pub(crate) fn new(
        mask: u32,
        on: &[u32],
        off: Vec<Cube>,
        asked: Vec<(Cube, usize)>,
        fences: Vec<Fence>,
    ) -> Problem {
        let mut privileged: Vec<Privileged> = fences.iter().map(|f| f.cube).collect();
        privileged.sort_unstable();
        privileged.dedup();
        Problem { mask, off, required: largest(mask, on, asked), fences, privileged }
    }

    /// The rules for its products.
    pub(crate) fn rules(&self) -> Rules<'_> {
        Rules { off: &self.off, privileged: &self.privileged }
    }

    /// The first required cube that no allowed product holds.
    pub(crate) fn unheld(&self) -> Option<Unheld> {
        let rules = self.rules();
        let required = self.required.iter().position(|r| rules.closure(r.cube, self.mask).is_err())?;
        Some(Unheld { required })
    }

    /// A smallest set of allowed products that holds every required cube. Stops when `effort` has no more than `keep` steps
    /// left and then returns the best it has.
    pub(crate) fn minimum(&self, effort: &Effort<'_>, keep: u64) -> Result<Minimum, Unheld> {
        if let Some(unheld) = self.unheld() {
            return Err(unheld);
        }
        let (products, complete) = self.candidates(effort, keep);
        let mut covering = Covering::new(self.required.len());
        for p in &products {
            let held = (0..self.required.len()).filter(|&r| p.contains(self.required[r].cube));
            covering.push(p.literals(), held);
        }
        let Some(cover) = covering.solve(effort, keep) else {
            // Every required cube has a candidate, see `candidates`.
            return Err(Unheld { required: 0 });
        };
        let bound = match cover.bound {
            _ if complete => cover.bound,
            _ => Bound::Stopped { lower: self.apart().min(cover.columns.len()) },
        };
        Ok(Minimum { products: cover.columns.iter().map(|&j| products[j]).collect(), bound })
    }

    /// All maximal allowed products that hold a required cube, and whether these are really all. If not, each required
    /// cube still has one.
    pub(crate) fn candidates(&self, effort: &Effort<'_>, keep: u64) -> (Vec<Cube>, bool) {
        let rules = self.rules();
        let mut products = Vec::new();
        let mut expander = Expander::default();
        let mut complete = true;
        for r in &self.required {
            let limit = effort.left().saturating_sub(keep);
            let work = match limit {
                0 => None,
                _ => expander.expand(r.cube, rules, limit, &mut products),
            };
            complete = products.len() <= CANDIDATES && work.is_some_and(|work| effort.spend(work).is_ok());
            if !complete {
                break;
            }
        }
        if !complete {
            products.truncate(CANDIDATES);
            products.extend(self.required.iter().filter_map(|r| rules.one(r.cube, self.mask)));
        }
        products.sort_unstable_by_key(|p| (p.literals(), *p));
        products.dedup();
        (products, complete)
    }

    /// A number of required cubes of which no two fit into one allowed product: at least as many products are needed.
    pub(crate) fn apart(&self) -> usize {
        let rules = self.rules();
        let mut chosen: Vec<Cube> = Vec::new();
        for r in self.required.iter().take(256) {
            if chosen.iter().all(|&c| rules.closure(join_of(c, r.cube), self.mask).is_err()) {
                chosen.push(r.cube);
            }
        }
        chosen.len()
    }
}

/// The cubes asked for that lie in no other, each with all that ask for just this cube, and the points in none of them.
fn largest(mask: u32, on: &[u32], mut asked: Vec<(Cube, usize)>) -> Vec<Required> {
    asked.sort_unstable_by_key(|&(cube, why)| (cube.literals(), cube, why));
    let mut required: Vec<Required> = Vec::new();
    for group in asked.chunk_by(|a, b| a.0 == b.0) {
        let cube = group[0].0;
        if !required.iter().any(|r| r.cube.contains(cube)) {
            let mut why: Vec<usize> = group.iter().map(|a| a.1).collect();
            why.dedup();
            required.push(Required { cube, why });
        }
    }
    let cubes = required.len();
    for &point in on {
        if !required[..cubes].iter().any(|r| r.cube.holds(point)) {
            required.push(Required { cube: Cube { care: mask, ones: point & mask }, why: Vec::new() });
        }
    }
    required
}
