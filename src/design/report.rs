//! What the stages found, as findings in plain words.

use crate::base::{Bound, Code, Finding, Level, Row};
use crate::codes::Coded;
use crate::design::values::Design;
use crate::logic::Equations;
use crate::merge::{CoverFault, Merged, Reduced};
use crate::project::Project;
use crate::project::choices::{CoverChoice, Method, Shape};
use crate::proof::{Proof, Race, RaceKind, Races};
use crate::spec::FlowTable;

/// An error for each fault of a cover by hand.
pub fn cover_faults(table: &FlowTable, merged: &Merged, findings: &mut Vec<Finding>) {
    for fault in &merged.faults {
        findings.push(cover_fault(table, fault));
    }
}

fn cover_fault(table: &FlowTable, fault: &CoverFault) -> Finding {
    let error = |code, text: String| Finding::new(Level::Error, code, text);
    match fault {
        CoverFault::Uncovered(row) => {
            let name = table.name(*row);
            error("cover-leaves-row-out", format!("No set of the cover holds row {name}. Add it to one, or as a set."))
                .at_row(name)
        }
        CoverFault::Incompatible { set, rows: (a, b) } => error(
            "cover-incompatible",
            format!(
                "Set {} of the cover holds rows {} and {}, which are not compatible. Put them in different sets.",
                set + 1,
                table.name(*a),
                table.name(*b)
            ),
        )
        .at_row(table.name(*a)),
        CoverFault::Open { set, column, needs } => error(
            "cover-open",
            format!(
                "Set {} of the cover needs {} together in one set, for column {}. Add such a set, or split this one.",
                set + 1,
                braced(table, needs),
                table.column_text(*column)
            ),
        )
        .at_column(table.column_text(*column)),
        CoverFault::LeavesBurst { set, column, needs } => error(
            "cover-leaves-burst",
            format!(
                "Set {} of the cover would leave in the middle of a burst, in column {}: it must hold {} itself.",
                set + 1,
                table.column_text(*column),
                braced(table, needs)
            ),
        )
        .at_column(table.column_text(*column)),
        CoverFault::Empty(set) => {
            error("cover-empty-set", format!("Set {} of the cover is empty. Remove it, or name its rows.", set + 1))
        }
    }
}

fn braced(table: &FlowTable, rows: &[Row]) -> String {
    let names: Vec<&str> = rows.iter().map(|&r| table.name(r)).collect();
    format!("{{{}}}", names.join(", "))
}

/// An error for each race that can be lost.
pub fn critical_races(reduced: &Reduced, coded: &Coded, races: &Races, findings: &mut Vec<Finding>) {
    for race in &races.critical {
        findings.push(critical_race(reduced, coded, race));
    }
}

fn critical_race(reduced: &Reduced, coded: &Coded, race: &Race) -> Finding {
    let table = &reduced.table;
    let what = match race.kind {
        RaceKind::Critical => "settle in a code of another row",
        RaceKind::Oscillation => "go round for ever",
        RaceKind::Stray => "reach a code that is specified for nothing",
    };
    Finding::new(
        Level::Error,
        "critical-race",
        format!(
            "On the way from row {} to row {} the codes can {what}: {}. Give these rows other codes, or choose another method.",
            table.name(race.from),
            table.name(race.to),
            path_text(&race.path, coded.bits)
        ),
    )
    .at_column(table.column_text(race.column))
}

fn path_text(path: &[Code], bits: usize) -> String {
    path.iter().map(|c| c.text(bits)).collect::<Vec<_>>().join(" > ")
}

/// An error for each function that has no hazard-free form.
pub fn clashes(equations: &Equations, findings: &mut Vec<Finding>) {
    for clash in &equations.clashes {
        findings.push(Finding::new(Level::Error, "clash", format!("{}: {}", clash.function, clash.text)));
    }
}

/// An error for each thing that the proof refutes.
pub fn proof_faults(proof: &Proof, findings: &mut Vec<Finding>) {
    for mismatch in &proof.mismatches {
        findings.push(Finding::new(Level::Error, "proof-mismatch", mismatch.text.clone()));
    }
    for hazard in &proof.hazards {
        findings.push(Finding::new(Level::Error, "hazard", format!("{}: {}", hazard.function, hazard.text)));
    }
    for (more, what) in [(proof.more_mismatches, "disagreements"), (proof.more_hazards, "hazards")] {
        if more > 0 {
            findings.push(Finding::new(
                Level::Note,
                "findings-cut",
                format!("{more} more {what} are not listed."),
            ));
        }
    }
}

/// Warnings and notes on a finished design: traps at power-up, feedback that must be slow, and what is not proved.
pub fn notes(project: &Project, design: &mut Design, stopped: bool) {
    let mut findings = Vec::new();
    traps(design, &mut findings);
    slow_feedback(design, &mut findings);
    if let Some(equations) = &design.equations {
        let notes = equations.notes.iter();
        findings.extend(notes.map(|n| Finding::new(Level::Note, "latch-inputs", n.clone())));
    }
    let why = if stopped { "stopped" } else { "the budget of steps ran out" };
    for text in unproved(project, design) {
        findings.push(Finding::new(Level::Note, "not-proved", format!("Not proved: {why}. {text}")));
    }
    design.findings.append(&mut findings);
}

fn traps(design: &Design, findings: &mut Vec<Finding>) {
    let (Some(proof), Some(coded)) = (&design.proof, &design.coded) else { return };
    let Some(first) = proof.traps.first() else { return };
    let inputs = design.spec.as_ref().map_or(0, |s| s.table.inputs);
    findings.push(Finding::new(
        Level::Warning,
        "power-up-trap",
        format!(
            "From {} of {} total states at power-up the circuit does not come to rest in a code that is in use; the first is \
             code {} in column {}. Reset it to code {}.",
            proof.traps.len() + proof.more_traps,
            proof.power_up_states,
            first.code.text(coded.bits),
            first.column.text(inputs),
            coded.initial.text(coded.bits)
        ),
    ));
}

fn slow_feedback(design: &Design, findings: &mut Vec<Finding>) {
    let (Some(equations), Some(proof)) = (&design.equations, &design.proof) else { return };
    let number = equations.essential.len() + equations.burst_essential.len() + equations.implementation.len();
    if number == 0 && proof.slow.is_empty() {
        return;
    }
    let names: Vec<String> = proof.slow.iter().map(|i| format!("y{}", i + 1)).collect();
    let remedy = if names.is_empty() {
        "No feedback has to be slow for them.".to_owned()
    } else {
        format!(
            "The feedback of {} must be slower than the slowest direct way of an input.",
            names.join(", ")
        )
    };
    let hazards = match number {
        0 => "The functions can race their own feedback.".to_owned(),
        1 => "1 essential hazard.".to_owned(),
        n => format!("{n} essential hazards."),
    };
    findings.push(Finding::new(Level::Note, "essential-hazard", format!("{hazards} {remedy}")));
}

/// What is right but not proved smallest, a sentence each.
fn unproved(project: &Project, design: &Design) -> Vec<String> {
    let mut texts = Vec::new();
    if let Some(merged) = &design.merged
        && let Bound::Stopped { lower } = merged.bound
        && project.choices.merging.cover == CoverChoice::Smallest
    {
        let size = merged.cover.len();
        texts.push(format!(
            "The closed cover has {size} sets; whether fewer do is open, at least {} are needed.",
            lower.max(merged.lower_bound)
        ));
    }
    if let Some(merged) = &design.merged
        && merged.bound.proved()
        && !merged.tie_proved
    {
        texts.push(
            "Whether another closed cover of this size has fewer members in its sets is open.".to_owned(),
        );
    }
    if let Some(coded) = &design.coded
        && !matches!(coded.method, Method::ByHand(_))
    {
        if let Bound::Stopped { lower } = coded.bound {
            texts.push(format!(
                "The codes have {} state variables; whether fewer do is open, at least {lower} are needed.",
                coded.bits
            ));
        } else if !coded.tidy.proved() {
            texts.push(
                "The number of state variables is smallest; whether fewer spare codes do is open.".to_owned(),
            );
        }
    }
    if let Some(equations) = &design.equations {
        let open: Vec<&str> =
            equations.functions.iter().filter(|f| !f.bound.proved()).map(|f| f.name.as_str()).collect();
        if !open.is_empty() {
            let terms = match equations.shape {
                Shape::SumOfProducts => "products",
                Shape::ProductOfSums => "sums",
            };
            texts.push(format!("Whether {} can do with fewer {terms} or literals is open.", open.join(", ")));
        }
    }
    texts
}
