//! What the tests and benchmarks share: seeded random controllers, small tables one by one, and oracles that are written
//! from the definitions and solved by libraries that the program does not use.

// Each test and each benchmark is a crate of its own and uses its own part of this.
#![allow(dead_code)]

pub mod naive;
pub mod optimum;
pub mod python;
pub mod random;
pub mod simulate;
pub mod small;
pub mod text;

use stillgate::design::{Design, Settings};
use stillgate::logic::values::Cube;
use stillgate::project::{Form, Method, Project, Shape};

/// The project with another method, form and shape.
pub fn with(project: &Project, method: &Method, form: Form, shape: Shape) -> Project {
    let mut project = project.clone();
    project.choices.codes.method = method.clone();
    project.choices.logic.form = form;
    project.choices.logic.shape = shape;
    project
}

/// The whole chain with the default budget.
pub fn derive(project: &Project) -> Design {
    stillgate::design::derive(project, &Settings::default())
}

/// The points that a product of a shape is about: its ones, or, for a sum, its zeros.
pub fn ones_of(cube: Cube, shape: Shape) -> Cube {
    match shape {
        Shape::SumOfProducts => cube,
        Shape::ProductOfSums => Cube { care: cube.care, ones: cube.care & !cube.ones },
    }
}

/// Median of some figures; they are sorted in place.
pub fn median(figures: &mut [f64]) -> f64 {
    figures.sort_by(f64::total_cmp);
    figures[figures.len() / 2]
}
