//! The command line: the only place that reads files and writes to the streams.
//!
//! Everything that is computed comes from the library; this program reads the arguments and the file, passes on
//! Ctrl-C and the time that `--budget` gives, and turns the design into text and an exit code.

#[path = "main/file.rs"]
mod file;
#[path = "main/signals.rs"]
mod signals;
#[path = "main/terminal.rs"]
mod terminal;
#[path = "main/usage.rs"]
mod usage;

use std::path::{Path, PathBuf};
use std::process::ExitCode;

use stillgate::base::{Finding, Level, Progress};
use stillgate::design::{self, STEPS, Settings};
use stillgate::handoff;
use stillgate::project::Project;
use stillgate::spec;

use signals::Halt;
use terminal::Meter;
use usage::{Options, Request};

/// Exit code for an error in the design, or a design that cannot be derived.
const FAULTY: u8 = 1;
/// Exit code for wrong usage and for files that cannot be read.
const UNUSABLE: u8 = 2;
/// Steps that each stage still gets after Ctrl-C or the end of `--budget`: a fraction of a second.
const GRACE: u64 = 200_000;

fn main() -> ExitCode {
    let outcome = usage::read(std::env::args_os().skip(1).collect()).and_then(|request| match request {
        Request::Window(file) => window(file),
        Request::Print(text) => print(text, true),
        Request::Check(path) => check(&path),
        Request::Derive(path, options) => derive(&path, &options),
        Request::Compare(path, options) => compare(&path, &options),
    });
    match outcome {
        Ok(true) => ExitCode::SUCCESS,
        Ok(false) => ExitCode::from(FAULTY),
        Err(text) => {
            terminal::say(&format!("stillgate: {text}"));
            ExitCode::from(UNUSABLE)
        }
    }
}

#[cfg(feature = "window")]
fn window(file: Option<PathBuf>) -> Result<bool, String> {
    stillgate::window::run(file).map(|()| true)
}

#[cfg(not(feature = "window"))]
fn window(_: Option<PathBuf>) -> Result<bool, String> {
    Err("this build has no window; what works: check FILE, derive FILE, compare FILE (see --help)".to_owned())
}

/// Prints text; `good` is handed through. A full disk is worth a message, and no success.
fn print(text: &str, good: bool) -> Result<bool, String> {
    terminal::print(text).map(|()| good).map_err(|e| format!("cannot write the output: {e}"))
}

fn check(path: &Path) -> Result<bool, String> {
    let project = file::open(path)?;
    let checked = spec::check(&project);
    terminal::say_findings(&checked.findings);
    let good = !checked.findings.iter().any(|f| f.level == Level::Error);
    print(
        &format!("{}: {}\n", handoff::plain(&path.display().to_string()), handoff::tally(&checked.findings)),
        good,
    )
}

fn derive(path: &Path, options: &Options) -> Result<bool, String> {
    let project = chosen(path, options)?;
    let (mut design, note) = searching(options, |settings| design::derive(&project, settings));
    design.findings.extend(note);
    terminal::say_findings(&design.findings);
    let text = if options.json {
        handoff::record(&project, &design)
    } else {
        handoff::review(&project, &design, options.notation)
    };
    print(&text, design.proved())
}

fn compare(path: &Path, options: &Options) -> Result<bool, String> {
    let project = chosen(path, options)?;
    let (all, note) = searching(options, |settings| design::alternatives(&project, settings));
    // What all of them say is said once; what only some say stands in the table.
    let common = |f: &&Finding| all.iter().all(|a| a.design.findings.contains(f));
    let findings = all.first().map(|a| a.design.findings.iter().filter(common).cloned().collect());
    let mut findings: Vec<Finding> = findings.unwrap_or_default();
    findings.extend(note);
    terminal::say_findings(&findings);
    let failed = |design: &design::Design| design.proof.as_ref().is_some_and(|p| !p.holds());
    let good = all.iter().any(|a| a.design.proved()) && !all.iter().any(|a| failed(&a.design));
    print(&handoff::comparison(&project, &all), good)
}

/// The project of a file, with the choices of the command line.
fn chosen(path: &Path, options: &Options) -> Result<Project, String> {
    let mut project = file::open(path)?;
    options.apply(&mut project.choices);
    Ok(project)
}

/// Runs searches that Ctrl-C or the end of the budget can stop, with their progress on the terminal. The finding says who
/// stopped them: a result that was cut by the clock or by hand is another one on another machine.
fn searching<T>(options: &Options, run: impl FnOnce(&Settings<'_>) -> T) -> (T, Option<Finding>) {
    let halt = Halt::default();
    halt.on_interrupt();
    if let Some(time) = options.budget {
        halt.after(time);
    }
    let meter = Meter::new();
    let listener = |progress: &Progress| meter.show(progress);
    let settings = Settings {
        steps: if options.budget.is_some() { u64::MAX } else { STEPS },
        stop: halt.stop.clone(),
        grace: GRACE,
        covers: options.covers.unwrap_or(1),
        listener: &listener,
    };
    let result = run(&settings);
    let cut = halt.stop.raised().then(|| match options.budget.filter(|_| !halt.asked()) {
        Some(time) => format!("after {} s", time.as_secs_f64()),
        None => "by hand".to_owned(),
    });
    meter.wipe();
    let note = cut.map(|how| {
        let text = format!("The searches were stopped {how}: how far they came depends on the machine.");
        Finding::new(Level::Note, "stopped", text)
    });
    (result, note)
}
