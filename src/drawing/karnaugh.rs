//! Karnaugh maps to six variables, with a loop for each product.
//!
//! [Karnaugh 1953] Rows and columns stand in Gray order, so that neighbours differ in one variable. Five variables make two maps, six make
//! four. Products that are there for hazards alone are drawn in their own ink with a dashed-looking double line and listed
//! by number. Cost: a cell for each point, at most four rectangles for each product and map.

use crate::drawing::values::{Anchor, Ink, Pick, Picture, Point, Shape, text_width};
use crate::logic::values::{Cube, Equations, Function};
use crate::project::choices::Shape as TwoLevel;

/// Most variables that a map can show.
pub const MOST: usize = 6;

const CELL: f32 = 34.0;

/// The variables of a map: which stand across, which down, which choose the map.
struct Axes {
    across: Vec<usize>,
    down: Vec<usize>,
    maps: Vec<usize>,
}

/// Draws the map of a function; `None` beyond six variables. `chosen`: a product to bring out.
pub fn karnaugh_map(equations: &Equations, function: usize, chosen: Option<usize>) -> Option<Picture> {
    let f = &equations.functions[function];
    let n = equations.variables.len();
    if n > MOST {
        return None;
    }
    let axes = axes(n);
    let names =
        |list: &[usize]| list.iter().map(|&v| equations.variables[v].as_str()).collect::<Vec<_>>().join(" ");
    let mut picture = Picture::new(format!("Karnaugh map of {}", f.name));
    let (columns, rows) = (1usize << axes.across.len(), 1usize << axes.down.len());
    let across_name = names(&axes.across);
    let down_name = names(&axes.down);
    let left =
        text_width(axes.down.len().max(1), 12.0) + text_width(down_name.chars().count().min(12), 12.0) + 16.0;
    let size = (left + columns as f32 * CELL + 16.0, 48.0 + rows as f32 * CELL + 12.0);
    for map in 0..1usize << axes.maps.len() {
        let origin = Point::new((map & 1) as f32 * size.0, (map >> 1) as f32 * size.1);
        let fixed = spread(gray(map), &axes.maps);
        if !axes.maps.is_empty() {
            let title = axes
                .maps
                .iter()
                .map(|&v| format!("{} = {}", equations.variables[v], fixed >> v & 1))
                .collect::<Vec<_>>()
                .join(", ");
            picture.text(Ink::Main, Point::new(origin.x + left, origin.y + 8.0), Anchor::Left, 12.0, title);
        }
        let grid = Point::new(origin.x + left, origin.y + 48.0);
        let x = grid.x + columns as f32 * CELL / 2.0;
        picture.text(Ink::Faint, Point::new(x, grid.y - 26.0), Anchor::Centre, 12.0, across_name.clone());
        let y = grid.y + rows as f32 * CELL / 2.0;
        picture.text(Ink::Faint, Point::new(origin.x + 4.0, y), Anchor::Left, 12.0, down_name.clone());
        cells(&mut picture, function, f, &axes, fixed, grid);
        for (index, product) in f.products.iter().enumerate() {
            let zeros = equations.shape == TwoLevel::ProductOfSums;
            let cube = if zeros { complement(product.cube) } else { product.cube };
            let ink = if product.hazard_only { Ink::Warn } else { Ink::Hue((index % 8) as u8) };
            let width = if chosen == Some(index) { 3.0 } else { 1.6 };
            let inset = 3.0 + 2.0 * (index % 4) as f32;
            for (min, max) in loops(cube, &axes, fixed, grid) {
                let min = Point::new(min.x + inset, min.y + inset);
                let max = Point::new(max.x - inset, max.y - inset);
                let pick = Pick::Product(function, index);
                picture.add_pick(ink, pick, Shape::Rect { min, max, radius: 9.0, width });
                if product.hazard_only {
                    let min = Point::new(min.x + 2.5, min.y + 2.5);
                    let max = Point::new(max.x - 2.5, max.y - 2.5);
                    picture.add_pick(ink, pick, Shape::Rect { min, max, radius: 7.0, width: 0.8 });
                }
            }
        }
    }
    let (maps_across, maps_down) = match axes.maps.len() {
        0 => (1.0, 1.0),
        1 => (2.0, 1.0),
        _ => (2.0, 2.0),
    };
    picture.size = (size.0 * maps_across, size.1 * maps_down);
    Some(picture)
}

fn cells(picture: &mut Picture, index: usize, f: &Function, axes: &Axes, fixed: u32, grid: Point) {
    let (columns, rows) = (1usize << axes.across.len(), 1usize << axes.down.len());
    let bits = |value: u32, list: &[usize]| -> String {
        list.iter().map(|&v| if value >> v & 1 == 1 { '1' } else { '0' }).collect()
    };
    for c in 0..columns {
        let at = Point::new(grid.x + (c as f32 + 0.5) * CELL, grid.y - 9.0);
        picture.mono(Ink::Main, at, Anchor::Centre, 11.0, bits(spread(gray(c), &axes.across), &axes.across));
    }
    for r in 0..rows {
        let at = Point::new(grid.x - 6.0, grid.y + (r as f32 + 0.5) * CELL);
        picture.mono(Ink::Main, at, Anchor::Right, 11.0, bits(spread(gray(r), &axes.down), &axes.down));
        for c in 0..columns {
            let point = fixed | spread(gray(c), &axes.across) | spread(gray(r), &axes.down);
            let min = Point::new(grid.x + c as f32 * CELL, grid.y + r as f32 * CELL);
            let max = Point::new(min.x + CELL, min.y + CELL);
            let pick = Pick::Point(index, point);
            picture.hit(min, max, pick);
            picture.add_pick(Ink::Hair, pick, Shape::Rect { min, max, radius: 0.0, width: 1.0 });
            let holds = |cubes: &[Cube]| cubes.iter().any(|cube| cube.holds(point));
            let (ink, text) = match (holds(&f.on), holds(&f.off)) {
                (true, _) => (Ink::Main, "1"),
                (_, true) => (Ink::Main, "0"),
                _ => (Ink::Faint, "–"),
            };
            let middle = Point::new((min.x + max.x) / 2.0, (min.y + max.y) / 2.0);
            picture.mono(ink, middle, Anchor::Centre, 13.0, text);
        }
    }
}

/// The rectangles of a cube in one map; a loop over the edge of the map comes in two or four parts.
fn loops(cube: Cube, axes: &Axes, fixed: u32, grid: Point) -> Vec<(Point, Point)> {
    let chosen = axes.maps.iter().fold(0, |m, &v| m | 1 << v);
    if (cube.ones ^ fixed) & cube.care & chosen != 0 {
        return Vec::new();
    }
    let runs = |axis: &[usize]| -> Vec<(usize, usize)> {
        let mask = axis.iter().fold(0, |m, &v| m | 1u32 << v);
        let inside = |i: usize| (spread(gray(i), axis) ^ cube.ones) & cube.care & mask == 0;
        let mut runs: Vec<(usize, usize)> = Vec::new();
        for i in (0..1usize << axis.len()).filter(|&i| inside(i)) {
            match runs.last_mut() {
                Some(run) if run.1 == i => run.1 = i + 1,
                _ => runs.push((i, i + 1)),
            }
        }
        runs
    };
    let down = runs(&axes.down);
    runs(&axes.across)
        .into_iter()
        .flat_map(|(c0, c1)| {
            down.iter().map(move |&(r0, r1)| {
                let at = |c: usize, r: usize| Point::new(grid.x + c as f32 * CELL, grid.y + r as f32 * CELL);
                (at(c0, r0), at(c1, r1))
            })
        })
        .collect()
}

fn complement(sum: Cube) -> Cube {
    Cube { care: sum.care, ones: sum.care & !sum.ones }
}

/// State variables go down, inputs across, as far as both have at most two variables.
fn axes(n: usize) -> Axes {
    let all: Vec<usize> = (0..n).collect();
    let in_map = n.min(4);
    let across = in_map.div_ceil(2);
    Axes { across: all[..across].to_vec(), down: all[across..in_map].to_vec(), maps: all[in_map..].to_vec() }
}

fn gray(i: usize) -> usize {
    i ^ i >> 1
}

/// Puts the bits of `value` on the variables of `axis`, the first variable as the most significant.
fn spread(value: usize, axis: &[usize]) -> u32 {
    let k = axis.len();
    axis.iter().enumerate().fold(0, |bits, (i, &v)| bits | ((value >> (k - 1 - i) & 1) as u32) << v)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn neighbours_in_gray_order_differ_in_one_variable() {
        for n in 1..=MOST {
            let axes = axes(n);
            for axis in [&axes.across, &axes.down] {
                let k = 1usize << axis.len();
                for i in 0..k {
                    let d = spread(gray(i), axis) ^ spread(gray((i + 1) % k), axis);
                    assert_eq!(d.count_ones(), u32::from(k > 1));
                }
            }
        }
    }

    #[test]
    fn a_loop_over_the_edge_comes_in_parts_and_covers_the_cube() {
        let axes = axes(4);
        let cube = Cube { care: 0b1010, ones: 0 };
        let parts = loops(cube, &axes, 0, Point::new(0.0, 0.0));
        let area: f32 = parts.iter().map(|(a, b)| (b.x - a.x) * (b.y - a.y) / CELL / CELL).sum();
        assert_eq!(area, 4.0);
        assert_eq!(parts.len(), 4);
    }
}
