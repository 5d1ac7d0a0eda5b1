//! From codes to hazard-free two-level equations.

pub mod values;

pub use values::{
    Clash, Cube, Equations, EssentialHazard, Function, Privileged, Product, Required, Target, Transition,
};
