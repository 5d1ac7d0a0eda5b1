//! Prime implicants against the Quine-McCluskey of sympy (PyPI).
//!
//! A chosen product always lies inside a prime of the function, and is one where no privileged cube stands in the way. The
//! brute-force oracle of the other tests is held against the same primes.

mod common;

use serde_json::{Value, json};
use stillgate::logic::values::Cube;
use stillgate::project::{Form, Method, Shape};

use common::random::{Rng, primitive, shape_of};
use common::{derive, naive, ones_of, with};

fn sympy(cases: Vec<Value>) -> Vec<Vec<String>> {
    let answer = common::python::ask("primes.py", &Value::Array(cases));
    serde_json::from_value(answer).expect("lists of strings")
}

fn cube_of(text: &str) -> Cube {
    text.chars().enumerate().fold(Cube::default(), |cube, (i, c)| match c {
        '1' => Cube { care: cube.care | 1 << i, ones: cube.ones | 1 << i },
        '0' => Cube { care: cube.care | 1 << i, ones: cube.ones },
        _ => cube,
    })
}

#[test]
fn the_oracle_finds_the_primes_of_random_functions() {
    let mut cases = Vec::new();
    let mut ours = Vec::new();
    for seed in 0..150 {
        let rng = &mut Rng::new(seed);
        let variables = rng.within(1, 5);
        let share = *rng.pick(&[0.2, 0.5, 0.8]);
        let points: Vec<u32> = (0..1u32 << variables).filter(|_| rng.chance(share)).collect();
        let mut primes: Vec<String> =
            naive::primes(&points, variables).into_iter().map(|c| c.text(variables)).collect();
        primes.sort();
        cases.push(json!({"variables": variables, "points": points}));
        ours.push(primes);
    }
    assert_eq!(ours, sympy(cases));
}

#[test]
fn chosen_products_are_primes_unless_a_hazard_forbids_it() {
    let mut cases = Vec::new();
    let mut chosen: Vec<(String, bool, Vec<Cube>)> = Vec::new();
    for seed in 0..150u64 {
        let project = primitive(seed, shape_of(seed));
        let method = &Method::ALL[seed as usize % Method::ALL.len()];
        let form = Form::ALL[seed as usize / 5 % 3];
        let shape = Shape::ALL[seed as usize / 15 % 2];
        let design = derive(&with(&project, method, form, shape));
        let Some(equations) = &design.equations else { continue };
        let variables = equations.variables.len();
        if variables > 5 {
            continue;
        }
        for function in &equations.functions {
            let forbidden = match shape {
                Shape::SumOfProducts => &function.off,
                Shape::ProductOfSums => &function.on,
            };
            let points: Vec<u32> =
                (0..1u32 << variables).filter(|&p| !forbidden.iter().any(|c| c.holds(p))).collect();
            cases.push(json!({"variables": variables, "points": points}));
            chosen.push((
                format!("{} of {}", function.name, project.title),
                function.privileged.is_empty(),
                function.products.iter().map(|p| ones_of(p.cube, shape)).collect(),
            ));
        }
    }
    assert!(chosen.len() > 150, "only {} functions", chosen.len());
    for ((name, free, products), primes) in chosen.iter().zip(sympy(cases)) {
        let primes: Vec<Cube> = primes.iter().map(|p| cube_of(p)).collect();
        for product in products {
            assert!(primes.iter().any(|p| p.contains(*product)), "{name}: no prime holds {product:?}");
            assert!(!free || primes.contains(product), "{name}: {product:?} is no prime");
        }
    }
}
