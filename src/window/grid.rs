//! A painted grid with a cursor and a range: the face of every table in the window.
//!
//! Rows and columns are virtual (only what is seen is laid out), header and row labels stay in place while the rest scrolls.
//! The grid knows nothing of flow tables: it is told what to paint and says what happened.

use std::ops::RangeInclusive;

use eframe::egui::{
    self, Align2, EventFilter, FontFamily, FontId, Id, Key, Modifiers, Pos2, Rect, ScrollArea, Sense,
    StrokeKind, Ui, Vec2, pos2, vec2,
};

use crate::drawing::Ink;
use crate::window::theme::{palette, strong};

/// What stands in a cell.
#[derive(Debug, Clone, Default)]
pub struct Face {
    /// Main text.
    pub text: String,
    /// Second text, fainter, behind the first.
    pub aside: String,
    /// A ring around the main text: stable.
    pub ring: bool,
    /// Something is wrong or asked here: an ink and a sign.
    pub mark: Option<(Ink, &'static str)>,
    /// Figures of one width.
    pub mono: bool,
    /// Paint the cell as not in use.
    pub dim: bool,
    /// Paint the cell as linked to the selection.
    pub linked: bool,
}

/// What a grid shows.
pub struct Grid<'a> {
    /// Name for screen readers and tests.
    pub name: &'a str,
    /// Text of the corner above the row labels.
    pub corner: &'a str,
    /// Column headers.
    pub columns: &'a [String],
    /// Row labels.
    pub rows: &'a dyn Fn(usize) -> String,
    /// Number of rows.
    pub len: usize,
    /// The face of a cell.
    pub face: &'a dyn Fn(usize, usize) -> Face,
    /// Width of a cell, of the labels, and height of a row, in points.
    pub size: (f32, f32, f32),
}

/// Cursor and range of a grid. Column `usize::MAX` as cursor column stands for the row label.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Cursor {
    /// Row and column of the cursor.
    pub at: (usize, usize),
    /// The other end of the range.
    pub from: (usize, usize),
    /// Bring the cursor into view in the next frame.
    pub follow: bool,
}

impl Cursor {
    /// Puts the cursor on a cell, with no range.
    pub fn go(&mut self, row: usize, column: usize) {
        *self = Cursor { at: (row, column), from: (row, column), follow: true };
    }

    /// Rows and columns of the range.
    pub fn range(&self) -> (RangeInclusive<usize>, RangeInclusive<usize>) {
        let span = |a: usize, b: usize| a.min(b)..=a.max(b);
        (span(self.at.0, self.from.0), span(self.at.1, self.from.1))
    }

    fn keep_inside(&mut self, rows: usize, columns: usize) {
        let fit = |p: (usize, usize)| (p.0.min(rows.saturating_sub(1)), p.1.min(columns.saturating_sub(1)));
        (self.at, self.from) = (fit(self.at), fit(self.from));
    }
}

/// What happened in a grid.
#[derive(Debug, Default)]
pub struct Happened {
    /// The cursor moved, or a cell was clicked.
    pub moved: bool,
    /// A cell was double-clicked.
    pub double_clicked: bool,
    /// A row label was clicked.
    pub label: Option<usize>,
    /// Whether the grid has the keyboard.
    pub focused: bool,
    /// The id of the focusable widget.
    pub id: Option<Id>,
    /// Where the cursor's cell is on the screen, if it is seen.
    pub cell: Option<Rect>,
}

impl Grid<'_> {
    /// Shows the grid in a place of the given size.
    pub fn show(&self, ui: &mut Ui, id_salt: &str, cursor: &mut Cursor, place: Vec2) -> Happened {
        cursor.keep_inside(self.len, self.columns.len());
        let (cw, lw, rh) = self.size;
        let header = rh;
        let total = vec2(lw + cw * self.columns.len() as f32, header + rh * self.len as f32);
        let mut happened = Happened::default();
        let (outer, _) = ui.allocate_exact_size(place, Sense::hover());
        let mut inside = ui.new_child(egui::UiBuilder::new().max_rect(outer).id_salt(id_salt));
        ScrollArea::both()
            .id_salt(id_salt)
            .auto_shrink(false)
            .scroll_source(egui::scroll_area::ScrollSource {
                drag: egui::scroll_area::DragScroll::Never,
                ..Default::default()
            })
            .show_viewport(&mut inside, |ui, _| {
                ui.set_min_size(total);
                let origin = ui.min_rect().min;
                let clip = ui.clip_rect();
                let sheet = Rect::from_min_size(origin, total).intersect(clip);
                let response = ui.interact(sheet, ui.scope_id().with("sheet"), Sense::click_and_drag());
                response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::Grid, true, self.name));
                happened.id = Some(response.id);
                happened.focused = response.has_focus();
                let body = Rect::from_min_max(clip.min + vec2(lw, header), clip.max);
                self.pointer(ui, &response, origin, body, cursor, &mut happened);
                if happened.focused {
                    let page = ((body.height() / rh) as usize).max(2) - 1;
                    if self.keys(ui, response.id, cursor, page) {
                        happened.moved = true;
                    }
                }
                if std::mem::take(&mut cursor.follow) {
                    let cell = self.cell_rect(origin, cursor.at);
                    // The header and the labels cover part of what scrolls: ask for a little more room.
                    let wanted = Rect::from_min_max(cell.min - vec2(lw, header), cell.max);
                    ui.scroll_to_rect_animation(wanted, None, egui::style::ScrollAnimation::none());
                }
                self.paint(ui, origin, clip, cursor, happened.focused);
                let cell = self.cell_rect(origin, cursor.at);
                happened.cell = (self.len > 0 && clip.intersects(cell)).then_some(cell);
            });
        happened
    }

    fn cell_rect(&self, origin: Pos2, (r, c): (usize, usize)) -> Rect {
        let (cw, lw, rh) = self.size;
        Rect::from_min_size(origin + vec2(lw + c as f32 * cw, rh + r as f32 * rh), vec2(cw, rh))
    }

    fn pointer(
        &self,
        ui: &Ui,
        response: &egui::Response,
        origin: Pos2,
        body: Rect,
        cursor: &mut Cursor,
        happened: &mut Happened,
    ) {
        let (cw, lw, rh) = self.size;
        let Some(p) = response.interact_pointer_pos() else { return };
        let row = ((p.y - origin.y - rh) / rh).floor();
        let column = ((p.x - origin.x - lw) / cw).floor();
        let pressed = response.drag_started() || response.clicked();
        if pressed {
            response.request_focus();
        }
        if self.len == 0 || p.y < body.top() || row as usize >= self.len {
            return;
        }
        let row = row.max(0.0) as usize;
        if p.x < body.left() {
            if response.clicked() {
                happened.label = Some(row);
                cursor.at = (row, self.columns.len().saturating_sub(1));
                cursor.from = (row, 0);
            }
            return;
        }
        let column = (column.max(0.0) as usize).min(self.columns.len().saturating_sub(1));
        let here = (row.min(self.len - 1), column);
        if pressed {
            cursor.at = here;
            if !ui.input(|i| i.modifiers.shift) {
                cursor.from = here;
            }
            happened.moved = true;
        } else if response.dragged() {
            cursor.at = here;
            happened.moved = true;
        }
        happened.double_clicked = response.double_clicked();
    }

    fn keys(&self, ui: &Ui, id: Id, cursor: &mut Cursor, page: usize) -> bool {
        if self.len == 0 || self.columns.is_empty() {
            return false;
        }
        let filter = EventFilter { tab: true, horizontal_arrows: true, vertical_arrows: true, escape: false };
        ui.memory_mut(|m| m.set_focus_lock_filter(id, filter));
        let (rows, columns) = (self.len - 1, self.columns.len() - 1);
        let mut at = cursor.at;
        let mut extend = false;
        let mut pressed = false;
        // Longer chords first: a chord without Shift would also take the one with Shift.
        let moves: [(Key, isize, isize); 6] = [
            (Key::ArrowUp, -1, 0),
            (Key::ArrowDown, 1, 0),
            (Key::ArrowLeft, 0, -1),
            (Key::ArrowRight, 0, 1),
            (Key::PageUp, -(page as isize), 0),
            (Key::PageDown, page as isize, 0),
        ];
        ui.input_mut(|i| {
            if i.modifiers.alt {
                return;
            }
            for (modifiers, growing) in [(Modifiers::SHIFT, true), (Modifiers::NONE, false)] {
                for (key, dr, dc) in moves {
                    let n = i.count_and_consume_key(modifiers, key) as isize;
                    if n > 0 {
                        at.0 = at.0.saturating_add_signed(n * dr).min(rows);
                        at.1 = at.1.saturating_add_signed(n * dc).min(columns);
                        (pressed, extend) = (true, growing);
                    }
                }
            }
            let jumps = [
                (Modifiers::COMMAND, Key::Home, (0, 0)),
                (Modifiers::COMMAND, Key::End, (rows, columns)),
                (Modifiers::NONE, Key::Home, (at.0, 0)),
                (Modifiers::NONE, Key::End, (at.0, columns)),
            ];
            for (modifiers, key, to) in jumps {
                if i.consume_key(modifiers, key) {
                    (at, pressed) = (to, true);
                }
            }
            if i.consume_key(Modifiers::SHIFT, Key::Tab) {
                at = if at.1 > 0 { (at.0, at.1 - 1) } else { (at.0.saturating_sub(1), columns) };
                pressed = true;
            }
            if i.consume_key(Modifiers::NONE, Key::Tab) {
                at = if at.1 < columns { (at.0, at.1 + 1) } else { ((at.0 + 1).min(rows), 0) };
                pressed = true;
            }
            if i.consume_key(Modifiers::COMMAND, Key::A) {
                (cursor.from, at, pressed, extend) = ((0, 0), (rows, columns), true, true);
            }
        });
        if pressed {
            cursor.at = at;
            if !extend {
                cursor.from = at;
            }
            cursor.follow = true;
        }
        pressed
    }

    fn paint(&self, ui: &Ui, origin: Pos2, clip: Rect, cursor: &Cursor, focused: bool) {
        let (cw, lw, rh) = self.size;
        let p = palette(ui.visuals());
        let body = Rect::from_min_max(clip.min + vec2(lw, rh), clip.max);
        let first = |from: f32, unit: f32| (from / unit).floor().max(0.0) as usize;
        let rows = first(body.top() - origin.y - rh, rh)
            ..(first(body.bottom() - origin.y - rh, rh) + 1).min(self.len);
        let columns = first(body.left() - origin.x - lw, cw)
            ..(first(body.right() - origin.x - lw, cw) + 1).min(self.columns.len());
        let end = pos2(
            (origin.x + lw + cw * self.columns.len() as f32).min(clip.right()),
            (origin.y + rh + rh * self.len as f32).min(clip.bottom()),
        );
        let painter = ui.painter_at(body);
        let (in_rows, in_columns) = cursor.range();
        let size = rh * 0.52;
        let (mono, small) =
            (FontId::new(size, FontFamily::Monospace), FontId::new(size * 0.92, FontFamily::Monospace));
        let text_font = FontId::new(size, FontFamily::Proportional);
        for r in rows.clone() {
            for c in columns.clone() {
                let cell = self.cell_rect(origin, (r, c));
                let face = (self.face)(r, c);
                if face.linked {
                    painter.rect_filled(cell, 0, p.wash);
                } else if face.dim {
                    painter.rect_filled(cell, 0, p.shade);
                }
                if focused && in_rows.contains(&r) && in_columns.contains(&c) && cursor.at != cursor.from {
                    painter.rect_filled(cell, 0, p.wash.gamma_multiply(0.7));
                }
                let y = cell.center().y;
                let x = cell.left() + 10.0;
                let font = if face.mono { &mono } else { &text_font };
                let drawn = painter.text(pos2(x, y), Align2::LEFT_CENTER, &face.text, font.clone(), p.ink);
                if face.ring {
                    let ring = drawn.expand2(vec2(5.0, 1.0));
                    painter.rect_stroke(
                        ring,
                        (ring.height() / 2.0) as u8,
                        (1.3, p.accent),
                        StrokeKind::Inside,
                    );
                }
                if !face.aside.is_empty() {
                    let at = pos2(cell.right() - 8.0, y);
                    painter.text(at, Align2::RIGHT_CENTER, &face.aside, small.clone(), p.faint);
                }
                if let Some((ink, sign)) = face.mark {
                    painter.text(
                        cell.right_top() + vec2(-2.0, 1.0),
                        Align2::RIGHT_TOP,
                        sign,
                        FontId::new(size * 0.75, strong()),
                        p.of(ink),
                    );
                }
            }
        }
        for r in rows.start..=rows.end {
            let y = origin.y + rh + r as f32 * rh;
            ui.painter_at(clip).hline(clip.left()..=end.x, y, (1.0, p.hair));
        }
        for c in columns.start..=columns.end {
            let x = origin.x + lw + c as f32 * cw;
            ui.painter_at(Rect::from_min_max(pos2(body.left(), clip.top()), clip.max)).vline(
                x,
                clip.top()..=end.y,
                (1.0, p.hair),
            );
        }
        let labels = ui
            .painter_at(Rect::from_min_max(pos2(clip.left(), body.top()), pos2(body.left(), clip.bottom())));
        for r in rows {
            let y = origin.y + rh + (r as f32 + 0.5) * rh;
            let font = FontId::new(size, strong());
            labels.text(pos2(clip.left() + 8.0, y), Align2::LEFT_CENTER, (self.rows)(r), font, p.ink);
        }
        let head =
            ui.painter_at(Rect::from_min_max(pos2(body.left(), clip.top()), pos2(clip.right(), body.top())));
        for c in columns {
            let x = origin.x + lw + (c as f32 + 0.5) * cw;
            head.text(
                pos2(x, clip.top() + rh / 2.0),
                Align2::CENTER_CENTER,
                &self.columns[c],
                mono.clone(),
                p.faint,
            );
        }
        let corner = FontId::new(size * 0.9, FontFamily::Proportional);
        let all = ui.painter_at(clip);
        all.text(
            pos2(clip.left() + 8.0, clip.top() + rh / 2.0),
            Align2::LEFT_CENTER,
            self.corner,
            corner,
            p.faint,
        );
        all.vline(body.left(), clip.top()..=end.y, (1.0, p.hair));
        all.hline(clip.left()..=end.x, body.top(), (1.0, p.hair));
        if self.len > 0 && cursor.at.1 < self.columns.len() {
            let cell = self.cell_rect(origin, cursor.at);
            let (width, colour) = if focused { (2.0, p.accent) } else { (1.0, p.faint) };
            painter.rect_stroke(cell, 2, (width, colour), StrokeKind::Inside);
        }
    }
}
