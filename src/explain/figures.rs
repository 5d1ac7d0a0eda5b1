//! The key figure of each station: what the chain shows at a glance.

use crate::base::Level;
use crate::design::values::Design;
use crate::logic::values::Cube;
use crate::project::Project;
use crate::project::choices::Shape;

/// The state of a station.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum State {
    /// Derived, nothing to be said against it.
    Done,
    /// Derived, but an answer of the user is wanted, or something is not proved smallest.
    Asks,
    /// Wrong, or it could not run.
    Error,
}

/// One figure.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Figure {
    /// A few words with the numbers that matter.
    pub text: String,
    /// How it stands.
    pub state: State,
}

/// The six figures, in the order of the chain.
pub fn figures(project: &Project, design: &Design) -> [Figure; 6] {
    [
        behaviour(project, design),
        merging(design),
        codes(design),
        equations(design),
        proof(design),
        hand_off(design),
    ]
}

fn figure(state: State, text: impl Into<String>) -> Figure {
    Figure { text: text.into(), state }
}

fn waiting() -> Figure {
    figure(State::Error, "waits")
}

/// `1 row`, `2 rows`.
pub fn counted(n: usize, word: &str) -> String {
    format!("{n} {word}{}", if n == 1 { "" } else { "s" })
}

fn behaviour(project: &Project, design: &Design) -> Figure {
    let rows = counted(project.rows.len(), "row");
    if design.spec.is_none() {
        let errors = design.findings.iter().filter(|f| f.level == Level::Error).count();
        return figure(State::Error, format!("{rows} · {}", counted(errors, "error")));
    }
    match design.findings.iter().filter(|f| f.level == Level::Question).count() {
        0 => figure(State::Done, format!("{rows} · complete")),
        n => figure(State::Asks, format!("{rows} · {}", counted(n, "question"))),
    }
}

fn merging(design: &Design) -> Figure {
    let (Some(spec), Some(merged)) = (&design.spec, &design.merged) else { return waiting() };
    let sizes = format!("{} → {}", spec.table.len(), merged.cover.len());
    if !merged.faults.is_empty() {
        return figure(
            State::Error,
            format!("{sizes} · cover has {}", counted(merged.faults.len(), "fault")),
        );
    }
    if merged.bound.proved() {
        figure(State::Done, format!("{sizes}, smallest"))
    } else if merged.lower_bound < merged.cover.len() {
        figure(State::Asks, format!("{sizes}, at least {}", merged.lower_bound))
    } else {
        figure(State::Asks, format!("{sizes}, not proved"))
    }
}

fn codes(design: &Design) -> Figure {
    let Some(coded) = &design.coded else { return waiting() };
    let bits = counted(coded.bits, "bit");
    match design.races.as_ref().map_or(0, |r| r.critical.len()) {
        0 if coded.bound.proved() => figure(State::Done, format!("{bits}, no critical race")),
        0 => figure(State::Asks, format!("{bits}, not proved fewest")),
        n => figure(State::Error, format!("{bits}, {}", counted(n, "critical race"))),
    }
}

fn equations(design: &Design) -> Figure {
    let Some(equations) = &design.equations else { return waiting() };
    if !equations.clashes.is_empty() {
        return figure(State::Error, counted(equations.clashes.len(), "function") + " clash");
    }
    let mut cubes: Vec<Cube> =
        equations.functions.iter().flat_map(|f| f.products.iter().map(|p| p.cube)).collect();
    if equations.shared {
        cubes.sort_unstable();
        cubes.dedup();
    }
    let literals: u32 = cubes.iter().map(|c| c.literals()).sum();
    let kind = if equations.shape == Shape::SumOfProducts { "product" } else { "sum" };
    let proved = equations.functions.iter().all(|f| f.bound.proved());
    let text = format!("{} · {literals} lit.", counted(cubes.len(), kind));
    figure(if proved { State::Done } else { State::Asks }, text)
}

fn proof(design: &Design) -> Figure {
    let Some(proof) = &design.proof else { return waiting() };
    if !proof.holds() {
        let n = proof.mismatches.len() + proof.hazards.len();
        return figure(State::Error, format!("fails · {}", counted(n, "fault")));
    }
    if proof.slow.is_empty() {
        return figure(State::Done, "proved");
    }
    let slow: Vec<String> = proof.slow.iter().map(|i| format!("y{}", i + 1)).collect();
    figure(State::Done, format!("proved · {} slow", slow.join(" ")))
}

fn hand_off(design: &Design) -> Figure {
    if design.proved() { figure(State::Done, "ready") } else { figure(State::Error, "not proved") }
}
