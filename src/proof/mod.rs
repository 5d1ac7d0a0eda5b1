//! Proof apart from the synthesis: race check, conformance, logic hazards, power-up, feedback that must be slow.
//!
//! Imports plain values only, never a stage's algorithm: what is proved here is read off the tables, the codes and the
//! products, and nothing that a stage says of its own work (ways, transitions, required cubes) is believed.

mod circuit;
mod conform;
mod feedback;
mod hazards;
mod power_up;
mod prove;
mod races;
mod report;
mod settle;
pub mod values;
mod walk;

pub use prove::prove;
pub use races::races;
pub use values::{HazardFound, LISTED, Mismatch, Proof, Race, RaceKind, Races, Trap};
