//! How much a derivation may search, and who may stop and watch it.

use crate::base::{Effort, Progress, Stop};

/// Steps for each search if nobody says otherwise: a few seconds of work, which hardly any controller needs.
pub const STEPS: u64 = 5_000_000;

/// How a derivation is run. None of it changes what is right, only how far the searches go.
pub struct Settings<'a> {
    /// Steps for each stage's search.
    pub steps: u64,
    /// Ends the search that is running, and all later ones, with the best so far.
    pub stop: Stop,
    /// Steps that each stage after a stop still gets, so that the best so far becomes a whole design. 0 where only
    /// speed counts, as in a window whose user has typed on.
    pub grace: u64,
    /// How many smallest covers to list in all.
    pub covers: usize,
    /// Hears how far a search is.
    pub listener: &'a dyn Fn(&Progress),
}

impl Default for Settings<'static> {
    fn default() -> Self {
        Settings { steps: STEPS, stop: Stop::default(), grace: 0, covers: 1, listener: &|_| {} }
    }
}

impl<'a> Settings<'a> {
    /// The effort of the next stage.
    pub(super) fn effort(&self) -> Effort<'a> {
        if self.stop.raised() {
            Effort::new(self.grace, Stop::default(), self.listener)
        } else {
            Effort::new(self.steps, self.stop.clone(), self.listener)
        }
    }
}
