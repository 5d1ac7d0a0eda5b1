//! What a design must do, worked out by brute force and without the proof: where every input of every gate may see a
//! change as late as it likes.

use std::collections::{BTreeSet, VecDeque};

use stillgate::base::{Code, Column};
use stillgate::codes::{Coded, Step};
use stillgate::logic::values::{Cube, Equations, Function, Target, mask};
use stillgate::merge::Reduced;
use stillgate::project::choices::{OutputStyle, Shape};

/// The cube in which a product is 1, or a sum 0.
pub fn cube_of(shape: Shape, shown: Cube) -> Cube {
    match shape {
        Shape::SumOfProducts => shown,
        Shape::ProductOfSums => Cube { care: shown.care, ones: shown.care & !shown.ones },
    }
}

/// Whether the products of a state function still do what the equations stage itself says that they must: values,
/// required cubes, privileged cubes. `right` is the function as derived, `now` the one with a fault in it.
pub fn keeps_promises(shape: Shape, right: &Function, now: &Function, variables: usize) -> bool {
    let cubes: Vec<Cube> = now.products.iter().map(|p| cube_of(shape, p.cube)).collect();
    let points = |list: &[Cube]| -> Vec<u32> {
        (0..=mask(variables)).filter(|&p| list.iter().any(|c| c.holds(p))).collect()
    };
    points(&right.on).into_iter().all(|p| now.value(shape, p))
        && points(&right.off).into_iter().all(|p| !now.value(shape, p))
        && right.required.iter().all(|r| held(&cubes, r.cube))
        && right
            .privileged
            .iter()
            .all(|f| held(&cubes, f.cube) || cubes.iter().all(|c| !c.meets(f.cube) || c.holds(f.start)))
}

/// Whether one product holds the whole cube; all others are harmless there then.
fn held(cubes: &[Cube], cube: Cube) -> bool {
    cubes.iter().any(|c| c.contains(cube))
}

/// A function before and after a fault, and the promises that the fault breaks, for messages.
pub fn compare(right: &Equations, faulty: &Equations, f: usize) -> String {
    let v = right.variables.len();
    let list = |f: &Function| f.products.iter().map(|p| p.cube.text(v)).collect::<Vec<_>>().join(" ");
    let (old, new) = (&right.functions[f], &faulty.functions[f]);
    let cubes: Vec<Cube> = new.products.iter().map(|p| cube_of(right.shape, p.cube)).collect();
    let mut text = format!("{} over {:?}: {} became {}", old.name, right.variables, list(old), list(new));
    for p in 0..=mask(v) {
        let now = new.value(right.shape, p);
        let wrong = if now { &old.off } else { &old.on };
        if wrong.iter().any(|c| c.holds(p)) {
            text += &format!("\n  value at {}", Cube::at(p, v).text(v));
        }
    }
    for r in old.required.iter().filter(|r| !cubes.iter().any(|c| c.contains(r.cube))) {
        let why: Vec<_> = r.why.iter().map(|&t| old.transitions[t]).collect();
        text += &format!("\n  required {} for {why:?}", r.cube.text(v));
    }
    for p in old
        .privileged
        .iter()
        .filter(|p| !held(&cubes, p.cube) && cubes.iter().any(|c| c.meets(p.cube) && !c.holds(p.start)))
    {
        text += &format!("\n  privileged {} from {:b}", p.cube.text(v), p.start);
    }
    text
}

/// Whether an output function is right: the values that the reduced table gives, and on every way of every move that
/// can happen at most one change, whatever the delays.
pub fn output_is_right(reduced: &Reduced, coded: &Coded, shape: Shape, f: &Function) -> bool {
    let Target::Output(j) = f.target else { return true };
    let n = reduced.table.inputs;
    let point = |column: Column, code: Code| u32::from(column.0) | code.0 << n;
    if reduced.outputs == OutputStyle::PerRow && f.products.iter().any(|p| p.cube.care & mask(n) != 0) {
        return false;
    }
    for row in reduced.table.rows() {
        for column in reduced.table.columns() {
            for &code in &coded.codes[row.at()] {
                let asked = reduced.table.cell(row, column).outputs.get(j);
                if asked.is_some_and(|v| f.value(shape, point(column, code)) != v) {
                    return false;
                }
            }
        }
    }
    reduced.moves.iter().all(|mv| {
        let old = reduced.table.cell(mv.from.row, mv.from.column).outputs.get(j);
        let new = reduced.table.cell(mv.to, mv.column).outputs.get(j);
        let (Some(old), Some(new)) = (old, new) else { return true };
        let passed = reduced.table.cell(mv.from.row, mv.column).outputs.get(j);
        coded.codes[mv.from.row.at()].iter().all(|&code| {
            let mut stretches = vec![(point(mv.from.column, code), point(mv.column, code))];
            if let Some(way) = coded.way(mv.from.row, code, mv.column) {
                match way.step {
                    Step::OneBit => stretches.extend(
                        way.path.windows(2).map(|p| (point(mv.column, p[0]), point(mv.column, p[1]))),
                    ),
                    Step::Together => {
                        let ends = (way.path[0], way.path[way.path.len() - 1]);
                        stretches.push((point(mv.column, ends.0), point(mv.column, ends.1)));
                    }
                }
            }
            let calm = stretches.iter().all(|&(a, b)| !glitches(shape, f, a, b));
            let (first, rest) = (&stretches[..1], &stretches[1..]);
            calm && match passed.filter(|_| mv.to != mv.from.row) {
                Some(mid) => {
                    changes_once(shape, f, first, old, mid) && changes_once(shape, f, rest, mid, new)
                }
                None => changes_once(shape, f, &stretches, old, new),
            }
        })
    })
}

/// Whether on every way through the stretches, in order, the value goes from `old` to `new` in at most one change.
fn changes_once(shape: Shape, f: &Function, stretches: &[(u32, u32)], old: bool, new: bool) -> bool {
    // (point, stretch, changed): all that a way can have come to.
    let Some(&(start, _)) = stretches.first() else { return old == new };
    let mut queue = VecDeque::from([(start, 0, false)]);
    let mut seen = BTreeSet::new();
    if f.value(shape, start) != old {
        return false;
    }
    while let Some((p, k, changed)) = queue.pop_front() {
        if !seen.insert((p, k, changed)) {
            continue;
        }
        let (_, end) = stretches[k];
        if p == end {
            if k + 1 < stretches.len() {
                queue.push_back((p, k + 1, changed));
            } else if f.value(shape, p) != new {
                return false;
            }
            continue;
        }
        for bit in (0..32).map(|i| 1u32 << i).filter(|bit| (p ^ end) & bit != 0) {
            let now = f.value(shape, p) != f.value(shape, p ^ bit);
            if now && changed {
                return false;
            }
            queue.push_back((p ^ bit, k, changed || now));
        }
    }
    true
}

/// Whether a two-level function can change more often than its end values ask, if every product sees the signals change
/// in an order and at times of its own.
pub fn glitches(shape: Shape, f: &Function, a: u32, b: u32) -> bool {
    let free = a ^ b;
    if free == 0 {
        return false;
    }
    // Products as (value at each sub-mask of the changing signals), those that never change aside.
    let subs: Vec<u32> = (0..=free).filter(|s| s & !free == 0).collect();
    let mut moving: Vec<Vec<bool>> = Vec::new();
    let mut always = false;
    for p in &f.products {
        let cube = cube_of(shape, p.cube);
        let values: Vec<bool> = subs.iter().map(|s| cube.holds(a ^ s)).collect();
        if values.iter().all(|&v| v) {
            always = true;
        } else if values.iter().any(|&v| v) && !moving.contains(&values) {
            moving.push(values);
        }
    }
    if always || moving.is_empty() {
        return false;
    }
    let (old, new) = (f.value(shape, a), f.value(shape, b));
    let base = subs.len() as u64;
    let level = |state: u64| {
        let mut rest = state;
        moving.iter().any(|values| {
            let at = (rest % base) as usize;
            rest /= base;
            values[at]
        }) != (shape == Shape::ProductOfSums)
    };
    let mut queue = VecDeque::from([(0u64, false)]);
    let mut seen = BTreeSet::new();
    while let Some((state, changed)) = queue.pop_front() {
        if !seen.insert((state, changed)) {
            continue;
        }
        let here = level(state);
        let mut place = 1u64;
        for _ in 0..moving.len() {
            let at = subs[(state / place % base) as usize];
            for k in (0..subs.len()).filter(|&k| (subs[k] ^ at).count_ones() == 1 && subs[k] & at == at) {
                let next = state - state / place % base * place + k as u64 * place;
                let now = level(next) != here;
                if now && (changed || old == new) {
                    return true;
                }
                queue.push_back((next, changed || now));
            }
            place *= base;
        }
    }
    false
}
