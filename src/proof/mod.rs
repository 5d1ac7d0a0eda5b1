//! Proof apart from the synthesis. Imports plain values only, never a stage's algorithm.

pub mod values;

pub use values::{HazardFound, Mismatch, Proof, Race, RaceKind, Races, Trap};
