//! The chain: runs the stages in order and keeps each stage's value until its own input changes.
//!
//! [`derive`] is for one design; a [`Deriver`] is for a project that is edited, and runs again only the stages whose
//! input is no longer what it was. Both do nothing themselves but pass values on, turn names into rows, and say in
//! findings what the stages found.

mod compare;
mod deriver;
mod kept;
mod report;
mod settings;
pub mod values;

pub use compare::alternatives;
pub use deriver::Deriver;
pub use settings::{STEPS, Settings};
pub use values::{Alternative, Design};

use crate::project::Project;

/// Derives a design from a project, from the first stage to the last that can run.
pub fn derive(project: &Project, settings: &Settings<'_>) -> Design {
    Deriver::default().derive(project, settings)
}
