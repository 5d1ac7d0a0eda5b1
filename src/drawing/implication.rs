//! The implication table as a staircase: a square for each pair of rows.
//!
//! Three kinds of square: a tick (compatible, implies nothing), a cross (the outputs conflict), and the pairs that it
//! implies, struck through where one of them fell, with the number of the pass. In a large table their number stands for the
//! pairs. Cost: one square for each pair.

use crate::base::Row;
use crate::drawing::values::{Anchor, Ink, Pick, Picture, Point, Shape, elide, text_width};
use crate::merge::values::{PairTable, Verdict};
use crate::spec::values::FlowTable;

/// Pairs listed in a square; more are counted.
const LISTED: usize = 3;
/// Width and height up to which the squares carry names. A larger table has smaller squares with signs alone, so that it can
/// be seen as a whole; the names of the pairs then stand in the explanation of a square.
const WORDY: (f32, f32) = (500.0, 400.0);
/// Characters of a name beside squares with signs alone.
const NAME: usize = 20;
/// Side of a square with a sign alone.
const SIGN: f32 = 18.0;

/// Draws the implication table as it stands after `pass` passes (`None`: in the end).
pub fn implication_table(table: &FlowTable, pairs: &PairTable, pass: Option<usize>) -> Picture {
    let mut picture = Picture::new("Implication table");
    let n = table.len();
    if n < 2 {
        picture.size = (120.0, 30.0);
        picture.text(Ink::Faint, Point::new(4.0, 15.0), Anchor::Left, 12.0, "one row: no pairs");
        return picture;
    }
    let longest = table.names.iter().map(|name| name.chars().count().min(12)).max().unwrap_or(1);
    let label = text_width(longest, 12.0) + 10.0;
    let lines = pairs.iter().map(|pair| shown_lines(pair.implies.len())).max().unwrap_or(1);
    let width = (text_width(2 * longest + 1, 10.0) + 8.0).clamp(26.0, 190.0);
    let height = (lines as f32 * 12.0 + 6.0).max(24.0);
    if (n - 1) as f32 * width > WORDY.0 || (n - 1) as f32 * height > WORDY.1 {
        signs(&mut picture, table, pairs, pass);
        return picture;
    }
    let origin = Point::new(label, 4.0);
    let corner =
        |a: usize, b: usize| Point::new(origin.x + a as f32 * width, origin.y + (b - 1) as f32 * height);
    for b in 1..n {
        let y = origin.y + (b as f32 - 0.5) * height;
        let name = short(table.name(Row::new(b)));
        picture.text(Ink::Main, Point::new(label - 6.0, y), Anchor::Right, 12.0, name);
        for a in 0..b {
            square(
                &mut picture,
                table,
                pairs,
                (Row::new(a), Row::new(b)),
                corner(a, b),
                (width, height),
                pass,
            );
        }
    }
    let bottom = origin.y + (n - 1) as f32 * height;
    for a in 0..n - 1 {
        let x = origin.x + (a as f32 + 0.5) * width;
        picture.text(
            Ink::Main,
            Point::new(x, bottom + 12.0),
            Anchor::Centre,
            12.0,
            short(table.name(Row::new(a))),
        );
    }
    picture.size = (origin.x + (n - 1) as f32 * width + 6.0, bottom + 24.0);
    picture
}

/// The table with a sign in each square. A name stands where its line ends, which is the head of its column: with many rows
/// the eye has a short way from any square to both names.
fn signs(picture: &mut Picture, table: &FlowTable, pairs: &PairTable, pass: Option<usize>) {
    let n = table.len();
    let longest = table.names.iter().map(|name| name.chars().count().min(NAME)).max().unwrap_or(1);
    let origin = Point::new(3.0, 4.0);
    for b in 0..n {
        let y = origin.y + b as f32 * SIGN;
        for a in 0..b {
            let min = Point::new(origin.x + a as f32 * SIGN, y);
            square(picture, table, pairs, (Row::new(a), Row::new(b)), min, (SIGN, SIGN), pass);
        }
        let at = Point::new(origin.x + b as f32 * SIGN + 5.0, y + SIGN / 2.0);
        picture.text(Ink::Main, at, Anchor::Left, 12.0, elide(table.name(Row::new(b)), NAME));
    }
    picture.size = (
        origin.x + (n - 1) as f32 * SIGN + text_width(longest, 12.0) + 16.0,
        origin.y + n as f32 * SIGN + 6.0,
    );
}

fn shown_lines(implied: usize) -> usize {
    if implied > LISTED { LISTED + 1 } else { implied.max(1) }
}

fn square(
    picture: &mut Picture,
    table: &FlowTable,
    pairs: &PairTable,
    (a, b): (Row, Row),
    min: Point,
    (width, height): (f32, f32),
    pass: Option<usize>,
) {
    let max = Point::new(min.x + width, min.y + height);
    let centre = Point::new((min.x + max.x) / 2.0, (min.y + max.y) / 2.0);
    let pick = Pick::Pair(a, b);
    picture.hit(min, max, pick);
    let square = pairs.get(a, b);
    let verdict = square.verdict;
    let struck = matches!(verdict, Verdict::Struck { pass: fell, .. } if pass.is_none_or(|p| fell <= p));
    let conflict = matches!(verdict, Verdict::Conflict(_));
    if conflict || struck {
        picture.add_pick(Ink::Shade, pick, Shape::Rect { min, max, radius: 0.0, width: 0.0 });
    }
    picture.add_pick(Ink::Hair, pick, Shape::Rect { min, max, radius: 0.0, width: 1.0 });
    let implied = &square.implies;
    if conflict {
        let r = 5.0;
        for (dx, dy) in [(r, r), (r, -r)] {
            let from = Point::new(centre.x - dx, centre.y - dy);
            picture.line(Ink::Bad, from, Point::new(centre.x + dx, centre.y + dy), 1.6);
        }
    } else if implied.is_empty() {
        let corners = [(-5.0, 0.0), (-1.5, 4.0), (5.5, -5.0)];
        let at = |(dx, dy): (f32, f32)| Point::new(centre.x + dx, centre.y + dy);
        picture.line(Ink::Accent, at(corners[0]), at(corners[1]), 1.8);
        picture.line(Ink::Accent, at(corners[1]), at(corners[2]), 1.8);
    } else if width <= SIGN {
        let ink = if struck { Ink::Faint } else { Ink::Main };
        picture.text(ink, centre, Anchor::Centre, 10.0, implied.len().to_string());
        if struck {
            let (from, to) = (Point::new(min.x + 2.0, max.y - 2.0), Point::new(max.x - 2.0, min.y + 2.0));
            picture.line(Ink::Warn, from, to, 1.4);
        }
    } else {
        let lines = shown_lines(implied.len());
        let top = centre.y - (lines as f32 - 1.0) * 6.0;
        for (k, &((p, q), _)) in implied.iter().take(LISTED).enumerate() {
            let text = format!("{} {}", short(table.name(p)), short(table.name(q)));
            let at = Point::new(centre.x, top + k as f32 * 12.0);
            picture.text(if struck { Ink::Faint } else { Ink::Main }, at, Anchor::Centre, 10.0, text);
        }
        if implied.len() > LISTED {
            let at = Point::new(centre.x, top + LISTED as f32 * 12.0);
            picture.text(Ink::Faint, at, Anchor::Centre, 9.0, format!("+{} more", implied.len() - LISTED));
        }
        if struck {
            picture.line(
                Ink::Warn,
                Point::new(min.x + 3.0, max.y - 3.0),
                Point::new(max.x - 3.0, min.y + 3.0),
                1.4,
            );
            if let Verdict::Struck { pass, .. } = verdict {
                let at = Point::new(max.x - 3.0, max.y - 6.0);
                picture.text(Ink::Warn, at, Anchor::Right, 8.0, pass.to_string());
            }
        }
    }
}

/// A name of at most twelve characters.
pub(crate) fn short(name: &str) -> String {
    elide(name, 12)
}
