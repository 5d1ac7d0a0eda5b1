//! The merger diagram: the rows on a circle, a line for each compatible pair, the chosen sets as outlines.
//!
//! Cost: a line for each compatible pair and a convex outline for each set.

use std::f32::consts::TAU;

use crate::base::Row;
use crate::drawing::values::{Anchor, Ink, Pick, Picture, Point, Shape, elide, text_width};
use crate::merge::values::{PairTable, RowSet};
use crate::spec::values::FlowTable;

/// Rows beyond which the lines are drawn more lightly.
const CROWD: usize = 14;
/// Characters of a name.
const NAME: usize = 16;
/// Height of a line of text.
const LINE: f32 = 15.0;

/// Draws the merger diagram with `sets` outlined (the cover, or one compatible that is selected).
pub fn merger_diagram(table: &FlowTable, pairs: &PairTable, sets: &[RowSet]) -> Picture {
    let mut picture = Picture::new("Merger diagram");
    let n = table.len();
    let longest = table.names.iter().map(|name| name.chars().count().min(NAME)).max().unwrap_or(1);
    let margin = text_width(longest, 12.0) + 26.0;
    // Enough height for a line of text for each row of one side, up to where a picture would be lost in lines anyway.
    let radius = (n as f32 * 26.0 / TAU).clamp(70.0, 420.0);
    // Names that had to give way may stand a little above and below the circle.
    let above = if n > CROWD { 44.0 } else { 28.0 };
    let centre = Point::new(margin + radius, above + radius);
    picture.size = (2.0 * (margin + radius), 2.0 * (above + radius));
    let at = |i: usize, r: f32| {
        // The first row stands at the top, the others follow clockwise.
        let angle = TAU * i as f32 / n.max(1) as f32 - TAU / 4.0;
        Point::new(centre.x + r * angle.cos(), centre.y + r * angle.sin())
    };
    for (i, set) in sets.iter().enumerate() {
        let members: Vec<Point> = set.ones().map(|r| at(r, radius)).collect();
        outline(&mut picture, &members, i);
    }
    for b in 0..n {
        for a in 0..b {
            let (ra, rb) = (Row::new(a), Row::new(b));
            if pairs.compatible(ra, rb) {
                let (from, to) = (at(a, radius), at(b, radius));
                let free = pairs.get(ra, rb).implies.is_empty();
                // Many lines at full strength are one black spot.
                let (ink, width) = match (free, n > CROWD) {
                    (true, false) => (Ink::Main, 1.8),
                    (false, false) => (Ink::Faint, 1.0),
                    (true, true) => (Ink::Faint, 0.8),
                    (false, true) => (Ink::Hair, 0.8),
                };
                picture.add_pick(ink, Pick::Pair(ra, rb), Shape::Line { from, to, width });
            }
        }
    }
    for i in 0..n {
        let (spot, row) = (at(i, radius), Row::new(i));
        picture.add_pick(Ink::Main, Pick::Row(row), Shape::Circle { centre: spot, radius: 4.5, width: 0.0 });
        picture.hit(
            Point::new(spot.x - 9.0, spot.y - 9.0),
            Point::new(spot.x + 9.0, spot.y + 9.0),
            Pick::Row(row),
        );
    }
    let spots: Vec<Point> = (0..n).map(|i| at(i, radius)).collect();
    labels(&mut picture, table, &spots, (centre, radius));
    picture
}

/// The names around the circle: on each side as high as their spots, but never closer than a line of text. A name that had to
/// move has a hairline to its spot.
fn labels(picture: &mut Picture, table: &FlowTable, spots: &[Point], (centre, radius): (Point, f32)) {
    let n = spots.len();
    // Clockwise from the top: the right side runs downwards, the left one upwards.
    let right: Vec<usize> = (0..n.div_ceil(2)).collect();
    let left: Vec<usize> = (n.div_ceil(2)..n).rev().collect();
    for (side, sign) in [(right, 1.0_f32), (left, -1.0)] {
        let wanted: Vec<f32> =
            side.iter().map(|&i| centre.y + (spots[i].y - centre.y) * (radius + 12.0) / radius).collect();
        let heights = apart(&wanted, LINE);
        for (&i, &y) in side.iter().zip(&heights) {
            let reach = ((radius + 16.0).powi(2) - (y - centre.y).powi(2)).max(0.0).sqrt().max(12.0);
            let at = Point::new(centre.x + sign * reach, y);
            let moved = (at.x - spots[i].x).hypot(at.y - spots[i].y) > 24.0;
            if moved {
                picture.line(Ink::Hair, spots[i], Point::new(at.x - sign * 2.0, y), 0.8);
            }
            let anchor = if sign > 0.0 { Anchor::Left } else { Anchor::Right };
            picture.text(Ink::Main, at, anchor, 12.0, elide(table.name(Row::new(i)), NAME));
        }
    }
}

/// Ascending heights near the `wanted` ones, at least `gap` apart: neighbours that are too close share the room around their
/// middle. Linear, each height joins a group once.
fn apart(wanted: &[f32], gap: f32) -> Vec<f32> {
    // Groups as (first height, members).
    let mut groups: Vec<(f32, usize)> = Vec::new();
    for &y in wanted {
        let mut group = (y, 1);
        while let Some(&(above, members)) = groups.last()
            && above + members as f32 * gap > group.0
        {
            groups.pop();
            let total = members + group.1;
            let middle = (above + (members - 1) as f32 * gap / 2.0) * members as f32
                + (group.0 + (group.1 - 1) as f32 * gap / 2.0) * group.1 as f32;
            group = (middle / total as f32 - (total - 1) as f32 * gap / 2.0, total);
        }
        groups.push(group);
    }
    groups.into_iter().flat_map(|(y, n)| (0..n).map(move |k| y + k as f32 * gap)).collect()
}

/// A rounded-looking outline around the members: the convex hull of small octagons about each.
fn outline(picture: &mut Picture, members: &[Point], index: usize) {
    // Sets that share a row get rings of different size, so that both outlines can be seen.
    let pad = 9.0 + 2.5 * (index % 3) as f32;
    let ring = members.iter().flat_map(|m| {
        (0..12).map(move |k| {
            let a = TAU * k as f32 / 12.0;
            Point::new(m.x + pad * a.cos(), m.y + pad * a.sin())
        })
    });
    let hull = convex_hull(ring.collect());
    let shape = Shape::Outline { points: hull, width: 1.5 };
    picture.add(Ink::Hue((index % 8) as u8), shape);
}

/// Convex hull, counter-clockwise (Andrew's monotone chain, 1979), `O(n log n)`.
fn convex_hull(mut points: Vec<Point>) -> Vec<Point> {
    points.sort_by(|a, b| a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y)));
    if points.len() < 3 {
        return points;
    }
    let cross = |o: Point, a: Point, b: Point| (a.x - o.x) * (b.y - o.y) - (a.y - o.y) * (b.x - o.x);
    let half = |points: &mut dyn Iterator<Item = Point>| {
        let mut chain: Vec<Point> = Vec::new();
        for p in points {
            while chain.len() >= 2 && cross(chain[chain.len() - 2], chain[chain.len() - 1], p) <= 0.0 {
                chain.pop();
            }
            chain.push(p);
        }
        chain.pop();
        chain
    };
    let mut hull = half(&mut points.iter().copied());
    hull.extend(half(&mut points.iter().rev().copied()));
    hull
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_keep_their_distance_and_their_order() {
        let heights = apart(&[0.0, 1.0, 2.0, 50.0, 51.0, 100.0], 15.0);
        assert!(heights.windows(2).all(|w| w[1] - w[0] >= 15.0 - 1e-3), "{heights:?}");
        // A group stays around its middle, a single one where it was.
        assert!((heights[1] - 1.0).abs() < 1e-3 && (heights[5] - 100.0).abs() < 1e-3, "{heights:?}");
        assert_eq!(apart(&[], 15.0), Vec::<f32>::new());
    }
}
