//! Codes without critical races: six assignment methods and the encoded table.

pub mod values;

pub use values::{Coded, Encoded, Entry, Role, Spare, Step, Way};
