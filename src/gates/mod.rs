//! What the equations cost in gates.

pub mod values;

pub use values::Cost;
