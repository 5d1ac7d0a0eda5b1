//! Whether state variables and inputs fit within the limit, and what to say if not.

use crate::base::{Effort, Finding, Level};
use crate::codes::single_step;
use crate::merge::values::Reduced;
use crate::project::limits::VARIABLES;

/// The fewest bits that give so many codes.
pub(super) fn bits_for(codes: usize) -> usize {
    (usize::BITS - codes.saturating_sub(1).leading_zeros()) as usize
}

/// The most state variables that the inputs leave room for.
pub(super) fn room(reduced: &Reduced) -> usize {
    VARIABLES.saturating_sub(reduced.table.inputs)
}

/// The finding for a method that needs (at least) `bits` state variables and does not fit.
pub(super) fn too_many(reduced: &Reduced, method: &str, bits: usize, why: &str) -> Finding {
    let (rows, inputs) = (reduced.table.len(), reduced.table.inputs);
    let room = room(reduced);
    // The quick construction shows that the way out is one.
    let fits = single_step::upper_bound(reduced, &Effort::of(1_000_000)).filter(|&few| few <= room);
    let mend = match fits {
        Some(few) if method != "single step" => {
            format!("The single-step method does with {few} at most.")
        }
        _ => "Merge more rows, or split the controller into smaller ones.".to_owned(),
    };
    Finding::new(
        Level::Error,
        "too-many-variables",
        format!(
            "The {method} method needs {bits} state variables for {rows} rows{why}; with {inputs} inputs that makes \
             {}, and a design may have {VARIABLES} at most. {mend}",
            bits + inputs
        ),
    )
}
