//! What the equations cost in gates.

mod cost;
pub mod values;

pub use cost::cost;
pub use values::Cost;
