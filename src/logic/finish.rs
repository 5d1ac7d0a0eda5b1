//! From a smallest set of products to a finished function: order, and the reason for each product.

use crate::base::Bound;
use crate::logic::cubes::gather;
use crate::logic::draft::Draft;
use crate::logic::values::{Cube, Function, Product};
use crate::project::choices::Shape;

/// The finished function. O(products · (required cubes + points)).
pub(crate) fn finish(
    draft: Draft,
    name: String,
    shape: Shape,
    mut chosen: Vec<Cube>,
    bound: Bound,
) -> Function {
    chosen.sort_unstable_by(|&a, &b| by_text(shown(a, shape), shown(b, shape)));
    let held = match shape {
        Shape::SumOfProducts => &draft.on,
        Shape::ProductOfSums => &draft.off,
    };
    let mut needed = vec![false; chosen.len()];
    for &point in held {
        if let Some(n) = only(&chosen, |c| c.holds(point)) {
            needed[n] = true;
        }
    }
    let mut alone = vec![Vec::new(); chosen.len()];
    for (r, required) in draft.problem.required.iter().enumerate() {
        if let Some(n) = only(&chosen, |c| c.contains(required.cube)) {
            alone[n].push(r);
        }
    }
    let products = chosen
        .iter()
        .zip(alone)
        .zip(needed)
        .map(|((&cube, alone), needed)| Product { cube: shown(cube, shape), alone, hazard_only: !needed })
        .collect();
    Function {
        name,
        target: draft.target,
        on: gather(&draft.on, draft.mask),
        off: gather(&draft.off, draft.mask),
        transitions: draft.transitions,
        required: draft.problem.required,
        privileged: draft.problem.privileged,
        products,
        bound,
    }
}

/// A product as it is shown: in product-of-sums shape the sum that is 0 exactly on the cube.
fn shown(cube: Cube, shape: Shape) -> Cube {
    match shape {
        Shape::SumOfProducts => cube,
        Shape::ProductOfSums => Cube { care: cube.care, ones: cube.care & !cube.ones },
    }
}

/// The only cube that passes a test, if there is exactly one.
fn only(cubes: &[Cube], test: impl Fn(Cube) -> bool) -> Option<usize> {
    let mut all = cubes.iter().enumerate().filter(|(_, c)| test(**c)).map(|(n, _)| n);
    let first = all.next()?;
    all.next().is_none().then_some(first)
}

/// The order of the texts: `-` before `0` before `1`, first variable first.
pub(crate) fn by_text(a: Cube, b: Cube) -> std::cmp::Ordering {
    let differ = (a.care ^ b.care) | (a.ones ^ b.ones);
    let at = differ & differ.wrapping_neg();
    let rank = |c: Cube| u8::from(c.care & at != 0) + u8::from(c.ones & at != 0);
    rank(a).cmp(&rank(b))
}
