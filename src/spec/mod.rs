//! From the project to a checked flow table: signals, checks, inner cells, held outputs, open questions.

pub mod values;

pub use values::{Cell, FlowTable, Move, Question, Signals, Spec};
