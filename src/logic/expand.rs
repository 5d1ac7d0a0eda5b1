//! All maximal allowed products that hold a given cube.
//!
//! A product that holds cube `r` keeps some literals of `r`. It misses an off-cube if it keeps a literal in which `r`
//! conflicts with it. It respects a privileged cube with start `s` if it keeps a literal in which `r` conflicts with the
//! cube, or none in which `r` conflicts with `s`. Maximal products keep a minimal set of literals. The search adds
//! literals only where a rule is broken, so every minimal set is met; each literal must keep some rule of its own, which
//! prunes nearly everything else [Nowick & Dill 1995 shrink prime implicants to the same end].
//!
//! Over few variables all sets of literals are struck out at once, a bit for each, see
//! [`subsets`](crate::logic::subsets): v·2^v/64 operations on words for v variables.
//!
//! Exact. The number of maximal products can be exponential in the variables (Dunham & Fridshal 1959); the time is about
//! proportional to their number times the number of minimal rules.

use crate::logic::cubes::join_of;
use crate::logic::subsets::{Family, MOST};
use crate::logic::values::{Cube, Privileged};

/// What a product must not do.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Rules<'r> {
    /// Cubes that it must miss.
    pub(crate) off: &'r [Cube],
    /// Cubes that it may meet only if it holds their start.
    pub(crate) privileged: &'r [Privileged],
}

impl Rules<'_> {
    /// Whether a product is allowed.
    pub(crate) fn allow(&self, product: Cube) -> bool {
        self.off.iter().all(|&o| !product.meets(o))
            && self.privileged.iter().all(|p| !product.meets(p.cube) || product.holds(p.start))
    }

    /// The smallest allowed product that holds a cube, or the cube that had to be taken in and the off-cube it then meets.
    ///
    /// Taking in the start of each privileged cube that is met is forced, so that nothing smaller is allowed.
    pub(crate) fn closure(&self, cube: Cube, variables: u32) -> Result<Cube, Cube> {
        let mut grown = cube;
        loop {
            let forced = self.privileged.iter().find(|p| grown.meets(p.cube) && !grown.holds(p.start));
            let Some(forced) = forced else { break };
            grown = join_of(grown, Cube { care: variables, ones: forced.start & variables });
        }
        if self.off.iter().any(|&o| grown.meets(o)) { Err(grown) } else { Ok(grown) }
    }

    /// One allowed product that holds a cube, made as large as single literals dropped in turn allow. Not always maximal;
    /// for when there is no time for all of them.
    pub(crate) fn one(&self, cube: Cube, variables: u32) -> Option<Cube> {
        let mut best = self.closure(cube, variables).ok()?;
        for bit in (0..32).map(|b| 1u32 << b) {
            if best.care & bit != 0 {
                let wider = Cube { care: best.care & !bit, ones: best.ones & !bit };
                if let Ok(wider) = self.closure(wider, variables) {
                    best = wider;
                }
            }
        }
        Some(best)
    }
}

/// The scratch memory of expansions, kept between calls.
#[derive(Debug, Default)]
pub(crate) struct Expander {
    /// Minimal sets of literals of which one must be kept.
    blocks: Vec<u32>,
    /// Pairs: if any literal of the second is kept, one of the first must be.
    fences: Vec<(u32, u32)>,
    /// Sets of kept literals found.
    kept: Vec<u32>,
    /// Nodes of the search.
    nodes: u64,
    /// For few variables: families of sets of dropped literals.
    dense: Option<Box<[Family; 4]>>,
}

impl Expander {
    /// Appends all maximal allowed products that hold `seed` to `products`; returns the work done in steps, or `None` if
    /// it would be more than `limit` (then `products` holds none or some of them).
    ///
    /// The seed must itself lie in an allowed product, see [`Rules::closure`]; otherwise nothing is appended.
    pub(crate) fn expand(
        &mut self,
        seed: Cube,
        rules: Rules<'_>,
        limit: u64,
        products: &mut Vec<Cube>,
    ) -> Option<u64> {
        let span = 32 - seed.care.leading_zeros();
        if span as usize <= MOST {
            self.all_at_once(seed, rules, products)
        } else {
            self.one_by_one(seed, rules, limit, products)
        }
    }

    /// For few variables: of all sets of dropped literals, strikes those that break a rule, and keeps the largest.
    fn all_at_once(&mut self, seed: Cube, rules: Rules<'_>, products: &mut Vec<Cube>) -> Option<u64> {
        let span = (32 - seed.care.leading_zeros()) as usize;
        let [allowed, broken, near, scratch] =
            &mut **self.dense.get_or_insert_with(|| Box::new(std::array::from_fn(|_| Family::new(MOST))));
        broken.reset(span);
        for o in rules.off {
            broken.insert(seed.care & o.care & (seed.ones ^ o.ones));
        }
        broken.close_upward(seed.care);
        for p in rules.privileged {
            let far = seed.care & (seed.ones ^ p.start);
            if far != 0 {
                // Broken where all of the near literals are dropped, but not all of the far ones.
                near.reset(span);
                near.insert(far & p.cube.care);
                near.close_upward(seed.care);
                allowed.reset(span);
                allowed.insert(far);
                allowed.close_upward(seed.care);
                near.subtract(allowed);
                broken.join(near);
            }
        }
        allowed.reset(span);
        allowed.insert(seed.care);
        allowed.close_downward(seed.care);
        allowed.subtract(broken);
        allowed.keep_maximal(seed.care, scratch);
        products.extend(allowed.members().map(|dropped| {
            let care = seed.care & !dropped;
            Cube { care, ones: seed.ones & care }
        }));
        Some(1)
    }

    /// For any number of variables: searches for the minimal sets of kept literals.
    fn one_by_one(
        &mut self,
        seed: Cube,
        rules: Rules<'_>,
        limit: u64,
        products: &mut Vec<Cube>,
    ) -> Option<u64> {
        self.blocks.clear();
        self.fences.clear();
        self.kept.clear();
        self.nodes = 0;
        for o in rules.off {
            let block = seed.care & o.care & (seed.ones ^ o.ones);
            insert_minimal(&mut self.blocks, block);
        }
        for p in rules.privileged {
            let far = seed.care & (seed.ones ^ p.start);
            if far != 0 {
                self.fences.push((far & p.cube.care, far));
            }
        }
        self.blocks.sort_unstable_by_key(|b| (b.count_ones(), *b));
        let budget = limit.saturating_mul(16);
        self.search(0, 0, budget);
        if self.nodes > budget {
            return None;
        }
        if !self.fences.is_empty() {
            keep_minimal(&mut self.kept);
        }
        products.extend(self.kept.iter().map(|&care| Cube { care, ones: seed.ones & care }));
        Some(1 + self.nodes / 16 + rules.off.len() as u64 / 256)
    }

    fn search(&mut self, kept: u32, barred: u32, budget: u64) {
        self.nodes += 1;
        if self.nodes > budget || !self.each_has_a_rule(kept) {
            return;
        }
        let Some(broken) = self.broken(kept, barred) else {
            return self.kept.push(kept);
        };
        let mut barred = barred;
        let mut open = broken & !barred;
        while open != 0 {
            let bit = open & open.wrapping_neg();
            open ^= bit;
            self.search(kept | bit, barred, budget);
            barred |= bit;
        }
    }

    /// The broken rule with the fewest ways to mend it: literals of which one must be kept.
    fn broken(&self, kept: u32, barred: u32) -> Option<u32> {
        let blocks = self.blocks.iter().filter(|&b| b & kept == 0).copied();
        let fences =
            self.fences.iter().filter(|(near, far)| near & kept == 0 && far & kept != 0).map(|f| f.0);
        blocks.chain(fences).min_by_key(|b| (b & !barred).count_ones())
    }

    /// Whether each kept literal is, or with more literals may be, the only one that keeps some rule.
    fn each_has_a_rule(&self, kept: u32) -> bool {
        let alone = |rule: u32| {
            let hit = rule & kept;
            if hit & hit.wrapping_sub(1) == 0 { hit } else { 0 }
        };
        let mut needed = 0;
        for &b in &self.blocks {
            needed |= alone(b);
        }
        for f in &self.fences {
            needed |= alone(f.0);
        }
        needed == kept
    }
}

/// Adds a set to a family unless it holds one of its members, and drops the members that hold it.
pub(crate) fn insert_minimal(family: &mut Vec<u32>, set: u32) {
    if family.iter().any(|have| have & !set == 0) {
        return;
    }
    family.retain(|have| set & !have != 0);
    family.push(set);
}

fn keep_minimal(family: &mut Vec<u32>) {
    family.sort_unstable_by_key(|k| (k.count_ones(), *k));
    family.dedup();
    let mut minimal: Vec<u32> = Vec::with_capacity(family.len());
    for &set in family.iter() {
        if minimal.iter().all(|have| have & !set != 0) {
            minimal.push(set);
        }
    }
    *family = minimal;
}

#[cfg(test)]
mod tests {
    use super::*;

    /// All maximal allowed products that hold the seed, by trying every subset of its literals.
    fn by_exhaustion(seed: Cube, rules: Rules<'_>) -> Vec<Cube> {
        let mut allowed = Vec::new();
        let mut sub = seed.care;
        loop {
            let product = Cube { care: sub, ones: seed.ones & sub };
            if rules.allow(product) {
                allowed.push(product);
            }
            if sub == 0 {
                break;
            }
            sub = (sub - 1) & seed.care;
        }
        let mut maximal: Vec<Cube> =
            allowed.iter().copied().filter(|p| !allowed.iter().any(|q| q != p && q.contains(*p))).collect();
        maximal.sort_unstable();
        maximal
    }

    #[test]
    fn finds_exactly_the_maximal_products() {
        let mut seed = 0x9e37_79b9_7f4a_7c15_u64;
        let mut next = move || {
            seed ^= seed << 13;
            seed ^= seed >> 7;
            seed ^= seed << 17;
            seed as u32
        };
        let mut expander = Expander::default();
        let mut fenced = 0;
        for _ in 0..2000 {
            let variables = 0b11_1111;
            let mut cube = |wide: bool| {
                let care = variables & (next() | if wide { 0 } else { next() });
                Cube { care, ones: next() & care }
            };
            let start = cube(false);
            let off: Vec<Cube> = (0..6).map(|_| cube(false)).filter(|o| !o.meets(start)).collect();
            let privileged: Vec<Privileged> = (0..4)
                .map(|_| (cube(true), cube(true)))
                .map(|(c, s)| Privileged { cube: c, start: c.ones | (s.ones & !c.care) })
                .collect();
            let rules = Rules { off: &off, privileged: &privileged };
            let mut found = Vec::new();
            expander.expand(start, rules, 1 << 20, &mut found).expect("small");
            found.sort_unstable();
            let mut other = Vec::new();
            expander.one_by_one(start, rules, 1 << 20, &mut other).expect("small");
            other.sort_unstable();
            assert_eq!(found, other);
            let expected = by_exhaustion(start, rules);
            fenced += usize::from(expected != by_exhaustion(start, Rules { off: &off, privileged: &[] }));
            assert_eq!(found, expected);
            match rules.closure(start, variables) {
                Ok(least) => assert!(found.iter().any(|p| p.contains(least)) && rules.allow(least)),
                Err(_) => assert!(found.is_empty()),
            }
            assert_eq!(rules.one(start, variables).is_some(), !found.is_empty());
        }
        assert!(fenced > 100, "the privileged cubes must matter: {fenced}");
    }
}
