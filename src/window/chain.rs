//! The chain: six stations in a row, joined by a line, each with its key figure and the mark of its state.

use eframe::egui::{self, Align2, FontId, Sense, StrokeKind, Ui, pos2, vec2};

use crate::explain::figures::{Figure, State};
use crate::window::actions::Station;
use crate::window::theme::{palette, strong};

/// How fresh the figures are.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Fresh {
    /// They belong to the project as it is.
    Now,
    /// A derivation is under way.
    Working,
}

const HEIGHT: f32 = 50.0;

/// Draws the chain; returns the station that was clicked.
pub fn chain(ui: &mut Ui, figures: &[Figure; 6], fresh: Fresh, open: Station) -> Option<Station> {
    let mut clicked = None;
    let p = palette(ui.visuals());
    let width = ui.available_width();
    let (strip, _) = ui.allocate_exact_size(vec2(width, HEIGHT), Sense::hover());
    let each = width / 6.0;
    let y = strip.top() + 17.0;
    for (i, (station, figure)) in Station::ALL.into_iter().zip(figures).enumerate() {
        let rect = egui::Rect::from_min_size(strip.min + vec2(i as f32 * each, 0.0), vec2(each, HEIGHT));
        let response = ui.interact(rect, ui.scope_id().with(("station", i)), Sense::click());
        let (sign, word, colour) = match (fresh, figure.state) {
            (Fresh::Working, _) => ("…", "working", p.faint),
            (_, State::Done) => ("✓", "done", p.accent),
            (_, State::Asks) => ("?", "needs an answer", p.warn),
            (_, State::Error) => ("!", "error", p.bad),
        };
        let label = format!("{}: {}, {word}", station.name(), figure.text);
        response.widget_info(|| egui::WidgetInfo::selected(egui::Role::Tab, true, station == open, &label));
        let painter = ui.painter_at(rect);
        if station == open {
            painter.rect_filled(rect, 0, p.paper);
            painter.hline(rect.x_range(), rect.top() + 1.0, (2.0, p.accent));
        } else if response.hovered() {
            painter.rect_filled(rect, 0, p.shade);
        }
        if response.has_focus() {
            painter.rect_stroke(rect.shrink(2.0), 2, (1.0, p.accent), StrokeKind::Inside);
        }
        let dot = pos2(rect.left() + 18.0, y);
        let from = if i == 0 { dot.x } else { rect.left() };
        let name_end = {
            let at = pos2(dot.x + 15.0, y);
            let ink = if station == open { p.ink } else { p.faint };
            painter.text(at, Align2::LEFT_CENTER, station.name(), FontId::new(13.0, strong()), ink).right()
        };
        painter.hline(from..=dot.x - 8.0, y, (1.0, p.hair));
        if i < 5 {
            painter.hline((name_end + 8.0).min(rect.right())..=rect.right(), y, (1.0, p.hair));
        }
        painter.circle_stroke(dot, 8.0, (1.2, colour));
        painter.text(dot, Align2::CENTER_CENTER, sign, FontId::new(10.0, strong()), colour);
        let mut job = egui::text::LayoutJob::simple_singleline(
            figure.text.clone(),
            FontId::proportional(12.0),
            if figure.state == State::Error && fresh == Fresh::Now { p.bad } else { p.faint },
        );
        job.wrap = egui::text::TextWrapping::truncate_at_width(each - 38.0);
        let galley = painter.layout_job(job);
        painter.galley(pos2(dot.x + 15.0, y + 11.0), galley, p.faint);
        if response.on_hover_text(&figure.text).clicked() {
            clicked = Some(station);
        }
    }
    clicked
}
