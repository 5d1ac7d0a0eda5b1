//! The codes on a map: a cell for each code, to four bits as a Karnaugh-like grid, beyond that as a list of the codes in
//! use; the ways of one column as arrows.
//!
//! Cost: a cell for each code shown, an arrow for each step.

use crate::base::{Code, Column};
use crate::codes::values::{Coded, Step};
use crate::drawing::implication::short;
use crate::drawing::values::{Anchor, Ink, Pick, Picture, Point, Shape};
use crate::merge::values::Reduced;
use crate::proof::values::Races;

const WIDTH: f32 = 92.0;
const HEIGHT: f32 = 54.0;
/// Most bits of a full grid.
const GRID_BITS: usize = 4;

/// Draws the code map with the ways of `column`; ways with a critical race are drawn in their own ink and named.
pub fn code_map(reduced: &Reduced, coded: &Coded, races: &Races, column: Column) -> Picture {
    let mut picture = Picture::new(format!("Codes in column {}", reduced.table.column_text(column)));
    let places = places(coded);
    let (left, top) = frame(coded.bits);
    let spot = |code: Code| {
        places
            .iter()
            .find(|p| p.0 == code)
            .map(|&(_, c, r)| Point::new(left + (c as f32 + 0.5) * WIDTH, top + (r as f32 + 0.5) * HEIGHT))
    };
    for &(code, c, r) in &places {
        let min = Point::new(left + c as f32 * WIDTH, top + r as f32 * HEIGHT);
        cell(&mut picture, reduced, coded, column, code, min);
    }
    let lost = |from, code| {
        races
            .critical
            .iter()
            .any(|race| race.column == column && race.from == from && race.path.first() == Some(&code))
    };
    for way in coded.ways.iter().filter(|w| w.column == column) {
        let bad = lost(way.from, way.path[0]);
        for step in way.path.windows(2) {
            let (Some(from), Some(to)) = (spot(step[0]), spot(step[1])) else { continue };
            let ink = if bad { Ink::Bad } else { Ink::Accent };
            match around(from, to, coded.bits) {
                None => arrow(&mut picture, from, to, ink, way.step),
                Some((out, inn)) => {
                    picture.line(ink, Point::new(from.x, from.y + 6.0), Point::new(out.x, out.y + 6.0), 1.5);
                    let (from, to) = (Point::new(inn.x, inn.y + 6.0), Point::new(to.x, to.y + 6.0));
                    picture.add(ink, Shape::Arrow { from, to, width: 1.5 });
                }
            }
        }
    }
    let columns = places.iter().map(|p| p.1 + 1).max().unwrap_or(1);
    let rows = places.iter().map(|p| p.2 + 1).max().unwrap_or(1);
    picture.size = (left + columns as f32 * WIDTH + 8.0, top + rows as f32 * HEIGHT + 8.0);
    axis_labels(&mut picture, coded.bits, (columns, rows));
    picture
}

/// The codes shown, each with its place in the grid (column, row).
fn places(coded: &Coded) -> Vec<(Code, usize, usize)> {
    if coded.bits <= GRID_BITS {
        let across = coded.bits.div_ceil(2);
        let down = coded.bits - across;
        let gray = |i: usize| i ^ i >> 1;
        return (0..1usize << down)
            .flat_map(|r| {
                (0..1usize << across).map(move |c| {
                    let code = reversed(gray(c), across) | reversed(gray(r), down) << across;
                    (Code(code as u32), c, r)
                })
            })
            .collect();
    }
    let mut codes: Vec<Code> = coded.codes.iter().flatten().copied().collect();
    codes.extend(coded.spare.iter().map(|s| s.code));
    codes.sort_unstable();
    codes.dedup();
    codes.into_iter().enumerate().map(|(i, code)| (code, i % 6, i / 6)).collect()
}

/// The lowest `k` bits of `value` in reverse: the first variable counts most on an axis.
fn reversed(value: usize, k: usize) -> usize {
    (0..k).fold(0, |bits, i| bits | (value >> i & 1) << (k - 1 - i))
}

fn cell(picture: &mut Picture, reduced: &Reduced, coded: &Coded, column: Column, code: Code, min: Point) {
    let max = Point::new(min.x + WIDTH, min.y + HEIGHT);
    let pick = Pick::Code(code);
    picture.hit(min, max, pick);
    let owner = coded.row_of(code);
    let stable = coded.encoded.get(code, column).is_some_and(|e| e.next == code);
    if stable {
        picture.add_pick(Ink::Wash, pick, Shape::Rect { min, max, radius: 0.0, width: 0.0 });
    }
    picture.add_pick(Ink::Hair, pick, Shape::Rect { min, max, radius: 0.0, width: 1.0 });
    let top = Point::new(min.x + 6.0, min.y + 11.0);
    if coded.bits > GRID_BITS {
        picture.mono(
            Ink::Faint,
            Point::new(max.x - 5.0, max.y - 9.0),
            Anchor::Right,
            9.0,
            code.text(coded.bits),
        );
    }
    if let Some(row) = owner {
        picture.text(Ink::Main, top, Anchor::Left, 13.0, short(reduced.table.name(row)));
    } else if let Some(spare) = coded.spare.iter().find(|s| s.code == code) {
        picture.text(Ink::Faint, top, Anchor::Left, 12.0, spare.name.clone());
    }
    if stable {
        let centre = Point::new(max.x - 11.0, min.y + 11.0);
        picture.add_pick(Ink::Accent, pick, Shape::Circle { centre, radius: 5.0, width: 1.4 });
    }
}

/// Where a step leaves the map and comes in again: the first and the last column are neighbours, and so are the rows. `None` for
/// a step within the map.
fn around(from: Point, to: Point, bits: usize) -> Option<(Point, Point)> {
    if bits > GRID_BITS {
        return None;
    }
    let (dx, dy) = (to.x - from.x, to.y - from.y);
    let (w, h) = (WIDTH * 0.5 + 7.0, HEIGHT * 0.5 + 3.0);
    if dy.abs() < 1.0 && dx.abs() > 2.5 * WIDTH {
        let s = dx.signum();
        Some((Point::new(from.x - s * w, from.y), Point::new(to.x + s * w, to.y)))
    } else if dx.abs() < 1.0 && dy.abs() > 2.5 * HEIGHT {
        let s = dy.signum();
        Some((Point::new(from.x, from.y - s * h), Point::new(to.x, to.y + s * h)))
    } else {
        None
    }
}

fn arrow(picture: &mut Picture, from: Point, to: Point, ink: Ink, step: Step) {
    let (dx, dy) = (to.x - from.x, to.y - from.y);
    let length = (dx * dx + dy * dy).sqrt().max(1.0);
    let (ux, uy) = (dx / length, dy / length);
    // Two arrows between the same cells go side by side.
    let (ox, oy) = (-uy * 6.0, ux * 6.0 + 6.0);
    let from = Point::new(from.x + ux * 14.0 + ox, from.y + uy * 12.0 + oy);
    let to = Point::new(to.x - ux * 14.0 + ox, to.y - uy * 12.0 + oy);
    let width = if step == Step::Together { 2.4 } else { 1.5 };
    picture.add(ink, Shape::Arrow { from, to, width });
}

/// Room on the left and above for the names and values of the axes.
fn frame(bits: usize) -> (f32, f32) {
    if bits > GRID_BITS || bits == 0 { (6.0, 6.0) } else { (if bits > 1 { 64.0 } else { 16.0 }, 40.0) }
}

fn axis_labels(picture: &mut Picture, bits: usize, (columns, rows): (usize, usize)) {
    if bits > GRID_BITS || bits == 0 {
        return;
    }
    let (left, top) = frame(bits);
    let across = bits.div_ceil(2);
    let down = bits - across;
    let names =
        |from: usize, to: usize| (from..to).map(|i| format!("y{}", i + 1)).collect::<Vec<_>>().join(" ");
    let middle = Point::new(left + columns as f32 * WIDTH / 2.0, 9.0);
    picture.text(Ink::Faint, middle, Anchor::Centre, 12.0, names(0, across));
    if down > 0 {
        let middle = Point::new(4.0, top + rows as f32 * HEIGHT / 2.0);
        picture.text(Ink::Faint, middle, Anchor::Left, 12.0, names(across, bits));
    }
    let gray = |i: usize| i ^ i >> 1;
    let text = |i: usize, k: usize| -> String {
        (0..k).map(|b| if gray(i) >> (k - 1 - b) & 1 == 1 { '1' } else { '0' }).collect()
    };
    for c in 0..columns {
        let at = Point::new(left + (c as f32 + 0.5) * WIDTH, top - 12.0);
        picture.mono(Ink::Faint, at, Anchor::Centre, 11.0, text(c, across));
    }
    if down > 0 {
        for r in 0..rows {
            let at = Point::new(left - 8.0, top + (r as f32 + 0.5) * HEIGHT);
            picture.mono(Ink::Faint, at, Anchor::Right, 11.0, text(r, down));
        }
    }
}
