//! The two streams: text to standard output, everything about it to standard error, and one line of progress.

use std::cell::Cell;
use std::io::{self, IsTerminal, Write};
use std::time::{Duration, Instant};

use stillgate::base::{Finding, Progress};
use stillgate::handoff::{finding_line, plain};

/// Writes text to standard output. A reader that has gone away is no error: it has seen what it wanted.
pub fn print(text: &str) -> io::Result<()> {
    let mut out = io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() == io::ErrorKind::BrokenPipe => Ok(()),
        result => result,
    }
}

/// Writes a line to standard error. Where even that fails there is nobody left to tell.
pub fn say(line: &str) {
    let _ = writeln!(io::stderr().lock(), "{line}");
}

/// Writes findings to standard error, one a line.
pub fn say_findings(findings: &[Finding]) {
    let mut err = io::stderr().lock();
    for finding in findings {
        if writeln!(err, "{}", finding_line(finding)).is_err() {
            return;
        }
    }
}

/// One line on the terminal that says how far the searches are, rewritten in place. Nothing where standard error is no
/// terminal.
pub struct Meter {
    shown: bool,
    next: Cell<Instant>,
    dirty: Cell<bool>,
}

/// How often the line is rewritten, and how long nothing is shown at first.
const PAUSE: Duration = Duration::from_millis(100);

impl Meter {
    /// A meter that begins to speak in a moment.
    pub fn new() -> Self {
        let next = Cell::new(Instant::now() + PAUSE);
        Meter { shown: io::stderr().is_terminal(), next, dirty: Cell::new(false) }
    }

    /// Shows how far a search is, if it is time.
    pub fn show(&self, progress: &Progress) {
        let now = Instant::now();
        if !self.shown || now < self.next.get() {
            return;
        }
        self.next.set(now + PAUSE);
        self.dirty.set(true);
        let best = progress.best.map_or("none so far".to_owned(), |best| format!("best so far {best}"));
        let line = format!("{}: {best}, at least {}", plain(progress.task), progress.bound);
        let mut err = io::stderr().lock();
        let _ = write!(err, "\r\x1b[K{line}").and_then(|()| err.flush());
    }

    /// Wipes the line.
    pub fn wipe(&self) {
        if self.dirty.replace(false) {
            let mut err = io::stderr().lock();
            let _ = write!(err, "\r\x1b[K").and_then(|()| err.flush());
        }
    }
}
