//! Section Proof: what was checked apart from the synthesis, what the design costs, and what it still asks of its builder.

use crate::base::Level;
use crate::codes::values::Coded;
use crate::design::values::Design;
use crate::handoff::plain::{align, counted, listed, wrap};
use crate::handoff::review::Page;
use crate::merge::values::Reduced;
use crate::project::Project;
use crate::project::choices::{Discipline, Style};
use crate::proof::values::{Proof, Trap};

/// Most traps that are written out.
const TRAPS: usize = 20;

pub fn write(
    page: &mut Page,
    project: &Project,
    design: &Design,
    reduced: &Reduced,
    coded: &Coded,
    proof: &Proof,
) {
    page.section("Proof");
    if proof.conforms() {
        page.text(&format!(
            "The functions do what the tables say: {} followed, every order of changes.",
            counted(proof.moves_checked, "move", "moves")
        ));
    } else {
        page.text(&format!(
            "THE PROOF FAILED: {}.",
            counted(proof.mismatches.len() + proof.more_mismatches, "disagreement", "disagreements")
        ));
        for mismatch in &proof.mismatches {
            page.lines(wrap("  ", "      ", &format!("{}: {}", mismatch.stage, mismatch.text)));
        }
    }
    if proof.hazards.is_empty() {
        page.text("No function can glitch in a move that can happen.");
    } else {
        page.text(&format!(
            "A FUNCTION CAN GLITCH: {}.",
            counted(proof.hazards.len() + proof.more_hazards, "hazard", "hazards")
        ));
        for hazard in &proof.hazards {
            let row = reduced.table.name(hazard.row);
            let text = format!(
                "{} ({}), row {row}, {} to {}: {}",
                hazard.function, hazard.kind, hazard.from, hazard.to, hazard.text
            );
            page.lines(wrap("  ", "      ", &text));
        }
    }
    power_up(page, reduced, coded, proof);
    cost(page, project, design);
    caution(page, project, design, proof);
}

fn power_up(page: &mut Page, reduced: &Reduced, coded: &Coded, proof: &Proof) {
    let tried = counted(proof.power_up_states, "total state", "total states");
    if proof.traps.is_empty() {
        let how = if proof.power_up_exact { "" } else { ", as far as they were tried" };
        page.text(&format!("Power-up: from each of {tried} it comes to rest in a code that is in use{how}."));
        return;
    }
    page.text(&format!(
        "Power-up: from {} of {tried} it does not come to rest in a code that is in use. Reset it to {}.",
        proof.traps.len() + proof.more_traps,
        coded.initial.text(coded.bits)
    ));
    for trap in proof.traps.iter().take(TRAPS) {
        page.lines(wrap("  ", "      ", &trap_text(reduced, coded, trap)));
    }
    let more = proof.traps.len().saturating_sub(TRAPS) + proof.more_traps;
    if more > 0 {
        page.line(format!("  and {more} more"));
    }
}

fn trap_text(reduced: &Reduced, coded: &Coded, trap: &Trap) -> String {
    let codes: Vec<String> = trap.codes.iter().map(|c| c.text(coded.bits)).collect();
    format!(
        "code {} in column {}: {} {}",
        trap.code.text(coded.bits),
        reduced.table.column_text(trap.column),
        if trap.oscillates { "goes round through" } else { "rests in" },
        codes.join(", ")
    )
}

fn cost(page: &mut Page, project: &Project, design: &Design) {
    let Some(cost) = &design.cost else { return };
    let gates = &project.choices.gates;
    let style = match gates.style {
        Style::AndOr => "AND, OR and inverters",
        Style::NandOnly => "NAND and inverters",
        Style::NorOnly => "NOR and inverters",
    };
    page.gap();
    page.line(format!("Cost with {style}, at most {} inputs a gate:", gates.fan_in.max(2)));
    let figures = [
        ("literals", cost.literals),
        ("gates", cost.gates),
        ("transistors", cost.transistors),
        ("levels", cost.levels),
    ];
    page.lines(align(&figures.map(|(name, n)| vec![name.to_owned(), n.to_string()]), "  ", &[1]));
}

fn caution(page: &mut Page, project: &Project, design: &Design, proof: &Proof) {
    page.gap();
    let mut text = match project.discipline {
        Discipline::Single => {
            "Holds as long as one input changes at a time, and only after the circuit has settled."
        }
        Discipline::Burst => {
            "Holds as long as a burst begins only after the circuit has settled from the one before."
        }
    }
    .to_owned();
    if !proof.slow.is_empty() {
        let names: Vec<String> = proof.slow.iter().map(|i| format!("y{}", i + 1)).collect();
        text.push_str(&format!(
            " The feedback of {} must be slower than the slowest direct way of the inputs.",
            listed(&names)
        ));
    }
    let open = design.findings.iter().filter(|f| f.level == Level::Question).count();
    if open > 0 {
        text.push_str(&format!(
            " {} left open: the environment must never ask for them.",
            counted(open, "input change is", "input changes are")
        ));
    }
    text.push_str(" Inputs that are not synchronous to each other need an arbiter where their order matters; this proof says nothing of metastability.");
    page.text(&text);
}
