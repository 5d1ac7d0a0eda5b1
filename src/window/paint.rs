//! Paints a [`Picture`] in the window, with pan, zoom, selection by mouse and by arrow keys.

use std::collections::BTreeSet;

use eframe::egui::{
    self, Align2, Color32, EventFilter, FontFamily, FontId, Key, Modifiers, Pos2, Rect, Sense, Shape as Mark,
    Stroke, StrokeKind, Ui, Vec2, pos2, vec2,
};

use crate::drawing::{Anchor, Ink, Item, Pick, Picture, Point, Shape};
use crate::window::theme::{Palette, palette};

/// Pan and zoom of one picture. `None`: the picture is fitted into its place.
#[derive(Debug, Clone, Copy, Default)]
pub struct View {
    held: Option<(Vec2, f32)>,
    carried: Option<Pick>,
    /// What was selected in the last frame.
    seen: Option<Pick>,
}

/// What happened to a picture in a frame.
#[derive(Debug, Clone, Copy, Default)]
pub struct Gesture {
    /// An item was clicked, or reached by an arrow key.
    pub picked: Option<Pick>,
    /// An item was dragged onto another.
    pub dropped: Option<(Pick, Pick)>,
}

/// What is selected, and what it touches in any view.
#[derive(Debug, Clone, Default)]
pub struct Marks {
    /// The selected item.
    pub picked: Option<Pick>,
    /// Everything that belongs to it, itself included.
    pub linked: BTreeSet<Pick>,
}

impl Marks {
    /// Whether an item belongs to the selection.
    pub fn holds(&self, pick: Pick) -> bool {
        self.linked.contains(&pick)
    }
}

const ZOOM: std::ops::RangeInclusive<f32> = 0.1..=6.0;
/// The smallest zoom that a picture starts with: smaller type cannot be read. What does not fit is panned to.
const READABLE: f32 = 0.62;

/// Shows the picture in the available space and returns what the user picked in this frame. Drag pans, Ctrl and wheel zoom,
/// a double click fits; with the keyboard focus, arrows go from item to item.
pub fn picture(ui: &mut Ui, picture: &Picture, view: &mut View, marks: &Marks, size: Vec2) -> Option<Pick> {
    show(ui, picture, view, marks, size, &|_| false).picked
}

/// The same, for a picture whose items can be dragged onto each other, if `carries` says so of the item.
pub fn show(
    ui: &mut Ui,
    picture: &Picture,
    view: &mut View,
    marks: &Marks,
    size: Vec2,
    carries: &dyn Fn(Pick) -> bool,
) -> Gesture {
    let selected = marks.picked;
    let (rect, response) = ui.allocate_exact_size(size, Sense::click_and_drag());
    let title = picture.title.clone();
    response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::Canvas, true, &title));
    let fitted = fit(picture, rect.size());
    let (mut offset, mut zoom) = view.held.unwrap_or(fitted);
    let under = |p: Pos2, offset: Vec2, zoom: f32| {
        let at = (p - rect.min - offset) / zoom;
        picture.at(Point::new(at.x, at.y))
    };
    if response.drag_started()
        && let Some(from) = ui.input(|i| i.pointer.press_origin())
    {
        view.carried = under(from, offset, zoom).filter(|&pick| carries(pick));
    }
    let mut gesture = Gesture::default();
    if response.dragged() && view.carried.is_none() {
        offset += response.drag_delta();
        view.held = Some((offset, zoom));
    }
    if response.drag_stopped()
        && let (Some(from), Some(p)) = (view.carried.take(), response.interact_pointer_pos())
    {
        gesture.dropped = under(p, offset, zoom).filter(|&to| to != from).map(|to| (from, to));
    }
    if let Some(pointer) = response.hover_pos() {
        let factor = ui.input(egui::InputState::zoom_delta);
        if factor != 1.0 {
            let local = pointer - rect.min;
            let before = (local - offset) / zoom;
            zoom = (zoom * factor).clamp(*ZOOM.start(), *ZOOM.end());
            offset = local - before * zoom;
            view.held = Some((offset, zoom));
        }
    }
    if response.double_clicked() {
        // From the readable view of a large picture to the whole of it, and back.
        let whole = whole(picture, rect.size());
        view.held = (view.held.is_none() && whole.1 < fitted.1).then_some(whole);
        (offset, zoom) = view.held.unwrap_or(fitted);
    }
    if view.seen != selected {
        view.seen = selected;
        let hit = picture.hits.iter().find(|hit| Some(hit.2) == selected);
        if let Some(shift) = hit.and_then(|hit| into_view(hit, rect.size(), offset, zoom)) {
            offset += shift;
            view.held = Some((offset, zoom));
        }
    }
    let frame = Frame { origin: rect.min + offset, zoom, palette: palette(ui.visuals()) };
    let painter = ui.painter_at(rect);
    for item in &picture.items {
        frame.item(&painter, item, marks);
    }
    for (min, max, pick) in picture.hits.iter().filter(|hit| marks.linked.contains(&hit.2)) {
        let mark = Rect::from_min_max(frame.at(*min), frame.at(*max));
        let width = if Some(*pick) == selected { 2.5 } else { 1.2 };
        painter.rect_stroke(mark, 3, (width, frame.palette.accent), StrokeKind::Inside);
    }
    if response.has_focus() {
        painter.rect_stroke(rect, 2, (1.0, frame.palette.accent), StrokeKind::Inside);
        if let Some(next) = by_keys(ui, &response, picture, selected) {
            gesture.picked = Some(next);
        }
    }
    if let (Some(_), Some(p)) = (view.carried, response.interact_pointer_pos()) {
        painter.circle_stroke(p, 10.0, (2.0, frame.palette.accent));
    }
    if let Some(p) = response.interact_pointer_pos().filter(|_| response.clicked()) {
        response.request_focus();
        gesture.picked = under(p, offset, zoom);
    }
    gesture
}

/// The view that a picture starts with: all of it, or its top left part if the whole could not be read.
fn fit(picture: &Picture, size: Vec2) -> (Vec2, f32) {
    let (offset, zoom) = whole(picture, size);
    if zoom >= READABLE { (offset, zoom) } else { (Vec2::ZERO, READABLE) }
}

fn whole(picture: &Picture, size: Vec2) -> (Vec2, f32) {
    let (w, h) = (picture.size.0.max(1.0), picture.size.1.max(1.0));
    let zoom = (size.x / w).min(size.y / h).clamp(*ZOOM.start(), 1.25);
    let slack = size - vec2(w, h) * zoom;
    (vec2((slack.x / 2.0).max(0.0), 0.0), zoom)
}

/// By how much a picture must move so that a hit is seen; `None` if it is.
fn into_view(hit: &(Point, Point, Pick), size: Vec2, offset: Vec2, zoom: f32) -> Option<Vec2> {
    let way = |low: f32, high: f32, room: f32| {
        let room = room.max(high - low);
        if low < 0.0 {
            -low
        } else if high > room {
            room - high
        } else {
            0.0
        }
    };
    let at = |p: Point| vec2(p.x, p.y) * zoom + offset;
    let (min, max) = (at(hit.0), at(hit.1));
    let shift = vec2(way(min.x, max.x, size.x), way(min.y, max.y, size.y));
    (shift != Vec2::ZERO).then_some(shift)
}

/// Arrow keys: the nearest hit in that direction, measured from the selected one.
fn by_keys(ui: &Ui, response: &egui::Response, picture: &Picture, selected: Option<Pick>) -> Option<Pick> {
    let filter = EventFilter { tab: false, horizontal_arrows: true, vertical_arrows: true, escape: false };
    ui.memory_mut(|m| m.set_focus_lock_filter(response.id, filter));
    let keys = [
        (Key::ArrowRight, vec2(1.0, 0.0)),
        (Key::ArrowLeft, vec2(-1.0, 0.0)),
        (Key::ArrowDown, vec2(0.0, 1.0)),
        (Key::ArrowUp, vec2(0.0, -1.0)),
    ];
    let (_, way) =
        keys.into_iter().find(|(key, _)| ui.input_mut(|i| i.consume_key(Modifiers::NONE, *key)))?;
    let centre = |hit: &(Point, Point, Pick)| vec2((hit.0.x + hit.1.x) / 2.0, (hit.0.y + hit.1.y) / 2.0);
    let Some(from) = picture.hits.iter().find(|hit| Some(hit.2) == selected).map(centre) else {
        return picture.hits.first().map(|hit| hit.2);
    };
    picture
        .hits
        .iter()
        .filter_map(|hit| {
            let d = centre(hit) - from;
            let ahead = d.dot(way);
            let aside = (d - way * ahead).length();
            (ahead > 1.0).then_some((ahead + 3.0 * aside, hit.2))
        })
        .min_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, pick)| pick)
}

struct Frame {
    origin: Pos2,
    zoom: f32,
    palette: &'static Palette,
}

impl Frame {
    fn at(&self, p: Point) -> Pos2 {
        self.origin + vec2(p.x, p.y) * self.zoom
    }

    fn stroke(&self, width: f32, colour: Color32) -> Stroke {
        Stroke::new((width * self.zoom.clamp(0.6, 1.5)).max(0.6), colour)
    }

    fn item(&self, painter: &egui::Painter, item: &Item, marks: &Marks) {
        let marked = item.pick.is_some_and(|pick| marks.linked.contains(&pick));
        let colour = if marked && !matches!(item.ink, Ink::Wash | Ink::Shade) {
            self.palette.accent
        } else {
            self.palette.of(item.ink)
        };
        let widen = if marked { 1.5 } else { 1.0 };
        let clip = painter.clip_rect();
        match &item.shape {
            Shape::Line { from, to, width } => {
                painter.line_segment([self.at(*from), self.at(*to)], self.stroke(width * widen, colour));
            }
            Shape::Arrow { from, to, width } => {
                self.arrow(painter, self.at(*from), self.at(*to), width * widen, colour)
            }
            Shape::Rect { min, max, radius, width } => {
                let rect = Rect::from_min_max(self.at(*min), self.at(*max));
                if !clip.intersects(rect) {
                    return;
                }
                let radius = (radius * self.zoom).clamp(0.0, 200.0) as u8;
                if *width > 0.0 {
                    painter.rect_stroke(rect, radius, self.stroke(width * widen, colour), StrokeKind::Middle);
                } else {
                    painter.rect_filled(rect, radius, colour);
                }
            }
            Shape::Circle { centre, radius, width } => {
                if *width > 0.0 {
                    painter.circle_stroke(
                        self.at(*centre),
                        radius * self.zoom,
                        self.stroke(width * widen, colour),
                    );
                } else {
                    painter.circle_filled(self.at(*centre), radius * self.zoom * widen, colour);
                }
            }
            Shape::Outline { points, width } => {
                let points: Vec<Pos2> = points.iter().map(|p| self.at(*p)).collect();
                let fill = colour.gamma_multiply(0.10);
                painter.add(Mark::convex_polygon(points, fill, self.stroke(*width, colour)));
            }
            Shape::Text { at, text, size, anchor, mono } => {
                let at = self.at(*at);
                // Names stay readable down to the smallest zoom that a picture starts with.
                let least = if *size >= 12.0 && self.zoom >= READABLE { 9.0 } else { 0.0 };
                let size = (size * self.zoom).max(least);
                // Below five points text is a smudge: leave it out.
                if size < 5.0 || at.y < clip.top() - size || at.y > clip.bottom() + size {
                    return;
                }
                let align = match anchor {
                    Anchor::Left => Align2::LEFT_CENTER,
                    Anchor::Centre => Align2::CENTER_CENTER,
                    Anchor::Right => Align2::RIGHT_CENTER,
                };
                let family = if *mono { FontFamily::Monospace } else { FontFamily::Proportional };
                painter.text(at, align, text, FontId::new(size, family), colour);
            }
        }
    }

    fn arrow(&self, painter: &egui::Painter, from: Pos2, to: Pos2, width: f32, colour: Color32) {
        let way = (to - from).normalized();
        let head = (5.0 + width) * self.zoom;
        let base = to - way * head;
        let side = vec2(-way.y, way.x) * head * 0.5;
        painter.line_segment([from, base], self.stroke(width, colour));
        painter.add(Mark::convex_polygon(
            vec![to, pos2(base.x + side.x, base.y + side.y), base - side],
            colour,
            Stroke::NONE,
        ));
    }
}
