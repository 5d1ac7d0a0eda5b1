//! What leaves the program: one writer a file, each to a string.

mod comparison;
mod lines;
mod notation;
mod plain;
mod record;
mod review;
mod words;

pub use comparison::comparison;
pub use notation::{Notation, equations_text, right_side, term};
pub use plain::plain;
pub use record::{SCHEMA, record};
pub use review::review;
pub use words::{finding_line, tally};
