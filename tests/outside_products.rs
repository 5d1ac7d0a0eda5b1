//! The cheapest hazard-free cover of every function against the optimum of HiGHS (crates.io `highs`).
//!
//! The integer program is written from the function's values and transitions alone: required cubes, allowed products and
//! their cover are worked out again by brute force over all cubes.

mod common;

use std::sync::atomic::{AtomicUsize, Ordering};

use stillgate::logic::values::Target;
use stillgate::project::{Form, Method, Shape};

use common::naive::Covering;
use common::optimum::{Found, PRODUCT, fewest_products};
use common::random::{primitive, shape_of};
use common::{derive, text, with};

/// Seconds that the solver may take for one function.
const SECONDS: f64 = 60.0;

#[test]
fn fewest_products_then_fewest_literals() {
    let (met, better) = (AtomicUsize::new(0), AtomicUsize::new(0));
    text::for_seeds("products", 240, |seed| {
        let project = primitive(seed, shape_of(seed));
        let method = Method::ALL[seed as usize % Method::ALL.len()].clone();
        let form = Form::ALL[seed as usize / 5 % 3];
        let shape = Shape::ALL[seed as usize / 15 % 2];
        let design = derive(&with(&project, &method, form, shape));
        let Some(equations) = &design.equations else { return };
        let variables = equations.variables.len();
        if variables > 7 {
            return;
        }
        for function in &equations.functions {
            let best = fewest_products(function, equations, SECONDS);
            let ours = PRODUCT * function.products.len() as u64 + function.literals() as u64;
            assert!(function.bound.proved(), "{}", function.name);
            let Found::Optimum(best) = best.found else {
                panic!("{}: the solver says {:?}, the program found {ours}", function.name, best.found)
            };
            if matches!(function.target, Target::Output(_)) {
                // Where an output may be early or late, the program may do better than the values it states.
                assert!(ours <= best, "{} of {}: {ours}, best {best}", function.name, project.title);
                better.fetch_add(usize::from(ours < best), Ordering::Relaxed);
            } else {
                assert_eq!(ours, best, "{} of {}", function.name, project.title);
            }
            met.fetch_add(1, Ordering::Relaxed);
        }
    });
    let (met, better) = (met.into_inner(), better.into_inner());
    assert!(met > 500 && better * 10 < met, "{met} functions, {better} better than the oracle");
}

#[test]
fn every_product_is_allowed_and_every_required_cube_is_held() {
    let met = AtomicUsize::new(0);
    text::for_seeds("products-allowed", 400, |seed| {
        let project = primitive(seed, shape_of(seed));
        let method = Method::ALL[seed as usize % Method::ALL.len()].clone();
        let form = Form::ALL[seed as usize / 5 % 3];
        let shape = Shape::ALL[seed as usize / 15 % 2];
        let design = derive(&with(&project, &method, form, shape));
        let Some(equations) = &design.equations else { return };
        let variables = equations.variables.len();
        if variables > 9 {
            return;
        }
        for function in &equations.functions {
            let asked = Covering::of(function, equations);
            let cubes: Vec<_> = function.products.iter().map(|p| common::ones_of(p.cube, shape)).collect();
            for cube in &asked.required {
                assert!(
                    cubes.iter().any(|c| c.contains(*cube)),
                    "{}: {} is not held",
                    function.name,
                    cube.text(variables)
                );
            }
            for cube in cubes {
                for &(way, end) in &asked.privileged {
                    assert!(
                        !cube.meets(way) || cube.holds(end),
                        "{}: {} glitches",
                        function.name,
                        cube.text(variables)
                    );
                    met.fetch_add(1, Ordering::Relaxed);
                }
            }
        }
    });
    assert!(met.into_inner() > 500);
}
