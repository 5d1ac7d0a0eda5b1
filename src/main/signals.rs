//! What can end a search from outside: Ctrl-C, and the time of `--budget`.

use std::process;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::thread;
use std::time::{Duration, Instant};

use stillgate::base::Stop;

/// Exit code after a second Ctrl-C: 128 and the number of the signal, as shells have it.
const INTERRUPTED: i32 = 130;

/// Who has raised the stop.
#[derive(Debug, Clone, Default)]
pub struct Halt {
    /// Raised by either.
    pub stop: Stop,
    asked: Arc<AtomicBool>,
}

impl Halt {
    /// Whether the user asked for it.
    pub fn asked(&self) -> bool {
        self.asked.load(Ordering::Relaxed)
    }

    /// The first Ctrl-C raises the stop, the second ends the program. Where no handler can be had, Ctrl-C ends it at once.
    pub fn on_interrupt(&self) {
        let halt = self.clone();
        let handler = move || {
            if halt.asked.swap(true, Ordering::Relaxed) {
                process::exit(INTERRUPTED);
            }
            halt.stop.raise();
        };
        let _ = ctrlc::set_handler(handler);
    }

    /// Raises the stop when the time is over.
    pub fn after(&self, time: Duration) {
        let stop = self.stop.clone();
        let end = Instant::now() + time;
        if time.is_zero() {
            stop.raise();
            return;
        }
        thread::spawn(move || {
            while let Some(left) = end.checked_duration_since(Instant::now()).filter(|d| !d.is_zero()) {
                thread::sleep(left);
            }
            stop.raise();
        });
    }
}
