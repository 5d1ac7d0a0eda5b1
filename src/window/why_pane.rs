//! The why pane: explains the selection, with links back to what causes it.

use eframe::egui::{self, RichText, Ui};

use crate::design::values::Pick;
use crate::explain::{Piece, Why};
use crate::window::theme::palette;

/// Shows an explanation; returns the link that was followed.
pub fn why_pane(ui: &mut Ui, why: Option<&Why>) -> Option<Pick> {
    let mut followed = None;
    let p = palette(ui.visuals());
    let Some(why) = why else {
        ui.label(RichText::new("Why?").heading());
        ui.label(
            RichText::new("Select a cell, a square, a set, a code, a product or a move, and the reason for it stands here.")
                .color(p.faint),
        );
        return None;
    };
    ui.label(RichText::new(&why.title).heading());
    egui::ScrollArea::vertical().id_salt("why").auto_shrink([false, true]).show(ui, |ui| {
        for sentence in &why.sentences {
            ui.horizontal_wrapped(|ui| {
                ui.spacing_mut().item_spacing = egui::vec2(0.0, 3.0);
                for piece in sentence {
                    match piece {
                        Piece::Text(text) => {
                            ui.label(text);
                        }
                        Piece::Link(text, pick) => {
                            if ui.link(RichText::new(text).color(p.accent)).clicked() {
                                followed = Some(*pick);
                            }
                        }
                    }
                }
            });
            ui.add_space(4.0);
        }
    });
    followed
}
