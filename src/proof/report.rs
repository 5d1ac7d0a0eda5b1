//! Collects what the parts of the proof find, and keeps the lists short.

use crate::base::Row;
use crate::proof::values::{HazardFound, LISTED, Mismatch, Proof, Trap};

/// The proof while it is being made.
#[derive(Debug, Default)]
pub(super) struct Report {
    /// What was found so far.
    pub proof: Proof,
}

impl Report {
    /// Notes a disagreement; the text is only made if it is listed.
    pub fn mismatch(&mut self, stage: &'static str, text: impl FnOnce() -> String) {
        if self.proof.mismatches.len() < LISTED {
            self.proof.mismatches.push(Mismatch { stage, text: text() });
        } else {
            self.proof.more_mismatches += 1;
        }
    }

    /// Notes a glitch, unless the very same one is listed already.
    pub fn hazard(&mut self, found: HazardFound) {
        let same = |h: &HazardFound| {
            h.kind == found.kind && h.function == found.function && h.from == found.from && h.to == found.to
        };
        if self.proof.hazards.iter().any(same) {
            return;
        }
        if self.proof.hazards.len() < LISTED {
            self.proof.hazards.push(found);
        } else {
            self.proof.more_hazards += 1;
        }
    }

    /// Notes a total state from which the circuit may not come to a code in use.
    pub fn trap(&mut self, trap: impl FnOnce() -> Trap) {
        if self.proof.traps.len() < LISTED {
            self.proof.traps.push(trap());
        } else {
            self.proof.more_traps += 1;
        }
    }
}

/// A stretch of a move in which signals change: from one point to another, in any order.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Stretch {
    /// Point where it starts.
    pub from: u32,
    /// Point where it ends.
    pub to: u32,
    /// Merged row whose move it belongs to.
    pub row: Row,
    /// Outputs that must not glitch in it, as a bit mask.
    pub outputs: u32,
}
