//! The chain: runs the stages in order and keeps each stage's value until its own input changes.

pub mod values;

pub use values::Design;
