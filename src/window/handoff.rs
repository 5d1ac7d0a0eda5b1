//! The Hand-off station: what can be given away, with a preview, to copy or to save.

use std::sync::Arc;

use eframe::egui::{self, RichText, Ui};

use crate::design::Design;
use crate::handoff::{Notation, equations_text, record, review};
use crate::window::app::{Command, Scene};
use crate::window::dialogs::Purpose;
use crate::window::theme::palette;

/// Characters of a preview; the file holds everything.
const PREVIEW: usize = 60_000;

/// State of the station.
#[derive(Default)]
pub struct HandOffView {
    open: usize,
    kept: Option<(Arc<Design>, usize, Notation, String)>,
}

/// Shows the station.
pub fn show(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut HandOffView) {
    let p = palette(ui.visuals());
    if scene.design.proved() {
        ui.label(RichText::new("✓ Proved; ready to hand off.").color(p.accent));
    } else {
        ui.label(RichText::new("! This design is not proved. What is written here says so.").color(p.bad));
    }
    ui.label(
        RichText::new(
            "A design aid: where a controller can hurt someone, functional-safety standards, local codes and a licensed engineer decide.",
        )
        .weak(),
    );
    ui.separator();
    let kinds = [
        ("Design as text", Purpose::Review),
        ("Equations", Purpose::Equations),
        ("Record (JSON)", Purpose::Record),
    ];
    ui.horizontal(|ui| {
        for (i, (name, _)) in kinds.iter().enumerate() {
            ui.selectable_value(&mut view.open, i, *name);
        }
    });
    view.open = view.open.min(kinds.len() - 1);
    let fresh = view.kept.as_ref().is_some_and(|(of, open, notation, _)| {
        Arc::ptr_eq(of, scene.design) && *open == view.open && *notation == scene.notation
    });
    if !fresh {
        let text = match kinds[view.open].1 {
            Purpose::Equations => match &scene.design.equations {
                Some(e) => equations_text(e, scene.notation),
                None => "There are no equations yet.\n".to_owned(),
            },
            Purpose::Record => record(scene.project, scene.design),
            _ => review(scene.project, scene.design, scene.notation),
        };
        view.kept = Some((Arc::clone(scene.design), view.open, scene.notation, text));
    }
    let Some((_, _, _, text)) = &view.kept else { return };
    ui.horizontal(|ui| {
        if ui.button("Copy").clicked() {
            scene.send(Command::Copy(text.clone()));
        }
        if ui.button("Save…").clicked() {
            scene.send(Command::Write(kinds[view.open].1, text.clone()));
        }
        ui.weak(format!("{} lines", text.lines().count()));
    });
    egui::ScrollArea::both().id_salt("preview").auto_shrink(false).show(ui, |ui| {
        let mut shown: &str = if text.len() <= PREVIEW {
            text
        } else {
            let end = (0..=PREVIEW).rev().find(|&i| text.is_char_boundary(i)).unwrap_or(0);
            &text[..end]
        };
        let field = egui::TextEdit::multiline(&mut shown)
            .font(egui::TextStyle::Monospace)
            .desired_width(f32::INFINITY);
        ui.add(field).accessible_name("Preview");
    });
}
