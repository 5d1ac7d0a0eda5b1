//! How long an exact search may go on, who may stop it, and what it then knows.
//!
//! Budgets count *steps*, never seconds, so that a result replays on any machine. A caller that wants a time limit
//! raises the [`Stop`] signal, and then says that its result depends on the machine.

use std::cell::Cell;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// A signal that any thread may raise to end all searches that hold it. Clones share one flag.
#[derive(Debug, Clone, Default)]
pub struct Stop(Arc<AtomicBool>);

impl Stop {
    /// Asks every search that holds this signal to end with the best it has.
    pub fn raise(&self) {
        self.0.store(true, Ordering::Relaxed);
    }

    /// Whether the signal was raised.
    pub fn raised(&self) -> bool {
        self.0.load(Ordering::Relaxed)
    }
}

/// The search ran out of steps or was stopped. Not an error of the user: the best result so far is still returned.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Halted;

/// What a search reports while it runs.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Progress {
    /// What is being computed, for the status line ("smallest closed cover").
    pub task: &'static str,
    /// Size of the best solution so far, if there is one.
    pub best: Option<usize>,
    /// Proved lower bound on that size.
    pub bound: usize,
}

/// What is known of a smallest result.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Bound {
    /// No smaller one exists.
    Proved,
    /// The search was halted; nothing smaller than `lower` exists.
    Stopped {
        /// Proved lower bound.
        lower: usize,
    },
}

impl Bound {
    /// Whether the result is proved smallest.
    pub fn proved(self) -> bool {
        self == Bound::Proved
    }
}

/// The steps that one search may still take, with its stop signal and its listener.
pub struct Effort<'a> {
    left: Cell<u64>,
    stop: Stop,
    listener: &'a dyn Fn(&Progress),
}

impl<'a> Effort<'a> {
    /// An effort of `steps` steps that can be stopped by `stop` and reports to `listener`.
    pub fn new(steps: u64, stop: Stop, listener: &'a dyn Fn(&Progress)) -> Self {
        Effort { left: Cell::new(steps), stop, listener }
    }

    /// Takes `steps` steps. `Err` once the budget is used up or the stop signal raised; then return the best so far.
    pub fn spend(&self, steps: u64) -> Result<(), Halted> {
        let left = self.left.get();
        if left < steps || self.stop.raised() {
            self.left.set(0);
            return Err(Halted);
        }
        self.left.set(left - steps);
        Ok(())
    }

    /// The stop signal that this effort listens to.
    pub fn stop(&self) -> Stop {
        self.stop.clone()
    }

    /// Steps still to be had.
    pub fn left(&self) -> u64 {
        if self.stop.raised() { 0 } else { self.left.get() }
    }

    /// Tells the listener how far the search is.
    pub fn report(&self, progress: &Progress) {
        (self.listener)(progress);
    }
}

impl Effort<'static> {
    /// An effort that nobody stops or listens to.
    pub fn of(steps: u64) -> Self {
        Effort::new(steps, Stop::default(), &|_| {})
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn spending_more_than_is_left_halts_for_good() {
        let effort = Effort::of(3);
        assert_eq!(effort.spend(2), Ok(()));
        assert_eq!(effort.spend(2), Err(Halted));
        assert_eq!(effort.spend(1), Err(Halted));
    }

    #[test]
    fn a_raised_stop_halts() {
        let stop = Stop::default();
        let effort = Effort::new(100, stop.clone(), &|_| {});
        stop.raise();
        assert_eq!(effort.spend(1), Err(Halted));
        assert_eq!(effort.left(), 0);
    }
}
