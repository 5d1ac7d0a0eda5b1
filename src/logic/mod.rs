//! From codes to hazard-free two-level equations.
//!
//! [`equations`] lays the design out point by point (`table`), drafts each function with the transitions in which it
//! must not glitch (`draft`), finds a smallest set of products that holds what must be held (`expand`, `minimise`, with
//! [`search::cover`](crate::search::cover)), settles early and late outputs (`outputs`), shares products if asked to (`share`), and
//! says why each product is there (`finish`). Essential hazards (`essential`) are found beside it.

pub mod values;

mod cubes;
mod draft;
mod equations;
mod essential;
mod expand;
mod finish;
mod minimise;
mod outputs;
mod per_row;
mod share;
mod subsets;
mod table;
mod words;

pub use equations::equations;
pub use values::{
    Clash, Cube, Equations, EssentialHazard, Function, Privileged, Product, Required, Target, Transition,
};
