//! The Proof station: what was checked, every move, hazards, power-up.

use std::sync::Arc;

use eframe::egui::{self, RichText, Ui};

use crate::design::values::Pick;
use crate::merge::values::Reduced;
use crate::proof::values::Proof;
use crate::window::app::{Command, Scene};
use crate::window::grid::{Cursor, Face, Grid};
use crate::window::theme::{palette, pane};

/// State of the station.
#[derive(Default)]
pub struct ProofView {
    cursor: Cursor,
}

/// Shows the station.
pub fn show(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut ProofView) {
    let design = Arc::clone(scene.design);
    let reduced = design.merged.as_ref().and_then(|m| m.reduced.as_ref());
    let (Some(proof), Some(reduced)) = (&design.proof, reduced) else {
        ui.weak("There are no equations to prove yet: see the stations before.");
        return;
    };
    let wide = ui.available_width();
    egui::Panel::right("power up")
        .frame(pane(10, 0, 0, 0))
        .resizable(true)
        .default_size(wide * 0.36)
        .size_range(200.0..=wide * 0.6)
        .show(ui, |ui| {
            egui::ScrollArea::vertical()
                .id_salt("power up")
                .auto_shrink(false)
                .show(ui, |ui| power_up(ui, scene, proof));
        });
    verdict(ui, proof);
    ui.separator();
    moves(ui, scene, view, reduced);
}

fn verdict(ui: &mut Ui, proof: &Proof) {
    let p = palette(ui.visuals());
    let good = |ui: &mut Ui, ok: bool, words: String| {
        let (sign, ink) = if ok { ("✓", p.accent) } else { ("!", p.bad) };
        ui.horizontal(|ui| {
            ui.label(RichText::new(sign).strong().color(ink));
            ui.label(words);
        });
    };
    ui.label(RichText::new(if proof.holds() { "Proved" } else { "Not proved" }).heading());
    good(
        ui,
        proof.conforms(),
        format!(
            "Tables and functions agree in all {} moves, for every order of changes.",
            proof.moves_checked
        ),
    );
    good(ui, proof.hazards.is_empty(), "No function can glitch; set and reset are never on together.".into());
    for m in proof.mismatches.iter().take(20) {
        ui.label(RichText::new(&m.text).color(p.bad));
    }
    for h in proof.hazards.iter().take(20) {
        ui.label(RichText::new(&h.text).color(p.bad));
    }
    if !proof.slow.is_empty() {
        let names: Vec<String> = proof.slow.iter().map(|i| format!("y{}", i + 1)).collect();
        ui.label(
            RichText::new(format!(
                "Asked of the implementation: the feedback of {} is slower than the direct logic (essential hazards, see Equations).",
                names.join(", ")
            ))
            .color(p.warn),
        );
    }
}

fn moves(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut ProofView, reduced: &Reduced) {
    ui.label(RichText::new("Moves").heading());
    let table = &reduced.table;
    let heads: Vec<String> = ["from", "inputs", "to", "outputs"].iter().map(|s| (*s).to_owned()).collect();
    let marks = scene.marks;
    let face = |r: usize, c: usize| {
        let m = reduced.moves[r];
        let text = match c {
            0 => table.name(m.from.row).to_owned(),
            1 => format!("{} → {}", table.column_text(m.from.column), table.column_text(m.column)),
            2 if m.to == m.from.row => "stays".to_owned(),
            2 => table.name(m.to).to_owned(),
            _ => {
                let out = |row, column| table.cell(row, column).outputs.text(table.outputs);
                format!("{} → {}", out(m.from.row, m.from.column), out(m.to, m.column))
            }
        };
        let mono = c % 2 == 1;
        Face { text, mono, linked: marks.holds(Pick::Move(r)), ..Face::default() }
    };
    let number = |r: usize| (r + 1).to_string();
    let longest = table.names.iter().map(|n| n.chars().count()).max().unwrap_or(1);
    let chars = (2 * table.inputs.max(table.outputs) + 3).max(longest).max(6) as f32;
    let grid = Grid {
        name: "Moves",
        corner: "",
        columns: &heads,
        rows: &number,
        len: reduced.moves.len(),
        face: &face,
        size: (chars * 8.0 + 28.0, 48.0, 22.0),
    };
    let place = ui.available_size();
    let happened = grid.show(ui, "moves", &mut view.cursor, place);
    if happened.moved || happened.label.is_some() {
        scene.send(Command::Pick(Some(Pick::Move(view.cursor.at.0))));
    }
}

fn power_up(ui: &mut Ui, scene: &mut Scene<'_>, proof: &Proof) {
    let p = palette(ui.visuals());
    let Some(coded) = scene.design.coded.clone() else { return };
    let inputs = scene.project.inputs.len();
    ui.label(RichText::new("Power-up").heading());
    ui.label(format!("{} total states tried.", proof.power_up_states));
    if proof.traps.is_empty() {
        ui.label(RichText::new("✓ every one comes to rest in a code that is in use").color(p.accent));
        return;
    }
    ui.label(
        RichText::new(format!(
            "! {} can trap the controller; a reset to {} mends it",
            proof.traps.len(),
            coded.initial.text(coded.bits)
        ))
        .color(p.warn),
    );
    for trap in proof.traps.iter().take(200) {
        let ends: Vec<String> = trap.codes.iter().take(6).map(|c| c.text(coded.bits)).collect();
        let what = if trap.oscillates { "goes round through" } else { "rests in" };
        let words = format!(
            "{} with inputs {}: {what} {}",
            trap.code.text(coded.bits),
            trap.column.text(inputs),
            ends.join(", ")
        );
        if ui.link(RichText::new(words).color(p.ink)).clicked() {
            scene.send(Command::Pick(Some(Pick::Entry(trap.code, trap.column))));
        }
    }
}
