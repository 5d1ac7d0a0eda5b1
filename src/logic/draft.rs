//! From the encoded design to the covering problem of one function: on-set, off-set, transitions, required and privileged
//! cubes [Huffman 1957; Nowick & Dill 1995], and the latch forms' set and reset functions [Muller & Bartky 1959; Unger 1969].
//!
//! For product-of-sums everything is said of the zeros: a sum is 0 exactly on a cube of zeros, and the hazard conditions
//! are those of the complement. Linear in points and transitions, times the points of transitions of several bits.

use std::borrow::Cow;

use crate::base::Code;
use crate::logic::cubes::gather;
use crate::logic::expand::{Expander, Rules};
use crate::logic::minimise::{Fence, Problem};
use crate::logic::table::{Fault, Span, Table};
use crate::logic::values::{Cube, Privileged, Target, Transition, mask};
use crate::project::choices::Shape;

/// What a function must be at a point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Value {
    /// 0.
    Off,
    /// 1.
    On,
    /// Either.
    Free,
}

impl Value {
    fn of(value: bool) -> Value {
        if value { Value::On } else { Value::Off }
    }
}

/// A function before it is minimised.
#[derive(Debug, Clone)]
pub(crate) struct Draft {
    /// What it drives.
    pub(crate) target: Target,
    /// The variables that it may depend on.
    pub(crate) mask: u32,
    /// The value at each point of the table.
    pub(crate) values: Vec<Value>,
    /// Points where it must be 1, and where it must be 0, ascending (with the variables outside `mask` at 0).
    pub(crate) on: Vec<u32>,
    /// See `on`.
    pub(crate) off: Vec<u32>,
    /// The transitions in which it must not glitch.
    pub(crate) transitions: Vec<Transition>,
    /// The covering problem: for ones, or for zeros in product-of-sums shape.
    pub(crate) problem: Problem,
    /// Transitions in which the table itself makes it glitch.
    pub(crate) faults: Vec<Fault>,
}

/// The values of a function at all points of the table.
pub(crate) fn values(table: &Table, target: Target) -> Vec<Value> {
    let next = |at: usize, i: usize| table.next[at].map(|q| q.0 >> i & 1 == 1);
    let now = |at: usize, i: usize| table.code(at).0 >> i & 1 == 1;
    (0..table.points.len())
        .map(|at| match target {
            Target::Next(i) => next(at, i).map_or(Value::Free, Value::of),
            Target::Set(i) => match (now(at, i), next(at, i)) {
                (_, Some(false)) => Value::Off,
                (false, Some(true)) => Value::On,
                _ => Value::Free,
            },
            Target::Reset(i) => match (now(at, i), next(at, i)) {
                (_, Some(true)) => Value::Off,
                (true, Some(false)) => Value::On,
                _ => Value::Free,
            },
            Target::Output(j) => table.outputs[at].get(j).map_or(Value::Free, Value::of),
        })
        .collect()
}

impl Draft {
    /// The function with the given value at each point of the table; it may depend on the variables of `mask`.
    pub(crate) fn new(table: &Table, target: Target, shape: Shape, mask: u32, values: Vec<Value>) -> Draft {
        let pick = |wanted: Value| {
            let mut points: Vec<u32> = values
                .iter()
                .zip(&table.points)
                .filter(|(v, _)| **v == wanted)
                .map(|(_, p)| p & mask)
                .collect();
            points.sort_unstable();
            points.dedup();
            points
        };
        let (on, off) = (pick(Value::On), pick(Value::Off));
        let mut draft = Draft {
            target,
            mask,
            on,
            off,
            values,
            transitions: Vec::new(),
            problem: Problem::default(),
            faults: Vec::new(),
        };
        let mut asked = Asked { ones: shape == Shape::SumOfProducts, cubes: Vec::new(), fences: Vec::new() };
        for span in &table.spans {
            if bound_by(target, span) {
                draft.span(table, span, &mut asked);
            }
        }
        let (held, missed) = match shape {
            Shape::SumOfProducts => (&draft.on, &draft.off),
            Shape::ProductOfSums => (&draft.off, &draft.on),
        };
        draft.problem = Problem::new(mask, held, gather(missed, mask), asked.cubes, asked.fences);
        draft
    }

    /// What one transition asks for.
    fn span(&mut self, table: &Table, span: &Span, asked: &mut Asked) {
        let mut inside: Cow<'_, [usize]> = Cow::Borrowed(&span.inside);
        let mut end = span.end;
        if let Some(i) = set_or_reset(self.target)
            && flips(table, span, i)
            && self.values[span.start] == Value::On
        {
            // Only the face on which the latch has not yet switched binds the function that switches it.
            let far = table.points[span.end] ^ 1 << (table.inputs + i);
            match table.find(far) {
                Some(face) if face != span.start => end = face,
                _ => return,
            }
            let face = table.cube(span.start, end);
            inside = span.inside.iter().copied().filter(|&p| face.holds(table.points[p])).collect();
        }
        let part = Stretch { start: span.start, end, inside: &inside, cube: table.cube(span.start, end) };
        let (from, to) = (self.values[span.start], self.values[end]);
        let one = |v: Value| (v == Value::On) == asked.ones;
        if from == Value::Free || to == Value::Free {
            // The side of a latch that may be on while it idles must not pulse once the change has begun to end that. A
            // product can do so only where several bits change; two sums can even at one bit.
            let idle = set_or_reset(self.target).is_some() && from == Value::Free && to == Value::Off;
            if idle && !(asked.ones && inside.is_empty()) {
                let start = table.points[if asked.ones { span.start } else { end }];
                asked.fences.push(Fence { cube: Privileged { cube: part.cube, start }, why: None });
            }
            return;
        }
        let why = self.transitions.len();
        self.transitions.push(Transition {
            cause: span.cause,
            phase: span.phase,
            start: table.points[span.start],
            end: table.points[end],
            values: (from == Value::On, to == Value::On),
        });
        if !self.steady(table, part) {
            self.faults.push(Fault {
                target: self.target,
                moves: vec![span.cause],
                text: "the function would have to change more than once on some way through this transition; an early \
                       output, another code method or another state bit would help"
                    .into(),
            });
            return;
        }
        match (one(from), one(to)) {
            (false, false) => {}
            (true, true) => asked.cubes.push((self.shadow(part.cube), why)),
            (true, false) => self.anchored(table, part, part.start, why, asked),
            (false, true) => self.anchored(table, part, part.end, why, asked),
        }
    }

    /// Whether the function changes at most once on every way through a transition.
    fn steady(&self, table: &Table, part: Stretch<'_>) -> bool {
        let new = self.values[part.end];
        let end = table.points[part.end];
        if self.values[part.start] == new {
            return part.inside.iter().all(|&p| self.values[p] == new || self.values[p] == Value::Free);
        }
        part.inside.iter().filter(|&&p| self.values[p] == new).all(|&p| {
            let ahead = table.points[p] ^ end;
            (0..32).map(|b| 1u32 << b).filter(|bit| ahead & bit != 0).all(|bit| {
                table
                    .find(table.points[p] ^ bit)
                    .is_none_or(|q| self.values[q] == new || self.values[q] == Value::Free)
            })
        })
    }

    /// A change between 0 and 1 that is held from one side only: `anchor` is the end of the cube where the wanted value
    /// stands.
    fn anchored(&self, table: &Table, part: Stretch<'_>, anchor: usize, why: usize, asked: &mut Asked) {
        let base = table.points[anchor];
        let wanted = self.values[anchor];
        let free = mask(table.variables()) & !part.cube.care;
        let mut holes: Vec<Cube> = Vec::new();
        let mut fenced = false;
        for &p in part.inside {
            if self.values[p] != wanted && self.values[p] != Value::Free {
                holes.push(Cube { care: free, ones: table.points[p] & free });
            } else if p != anchor {
                fenced = true;
            }
        }
        if !fenced {
            return asked.cubes.push((self.shadow(Cube::at(base, table.variables())), why));
        }
        let mut stretches = Vec::new();
        let seed = Cube { care: free, ones: base & free };
        let rules = Rules { off: &holes, privileged: &[] };
        // The cube's own points bound this; it needs no budget.
        let _ = Expander::default().expand(seed, rules, u64::MAX, &mut stretches);
        for stretch in stretches {
            let cube = Cube { care: part.cube.care | stretch.care, ones: part.cube.ones | stretch.ones };
            asked.cubes.push((self.shadow(cube), why));
        }
        let cube = Privileged { cube: self.shadow(part.cube), start: base & self.mask };
        asked.fences.push(Fence { cube, why: Some(why) });
    }

    /// The cube as far as the function can see it.
    fn shadow(&self, cube: Cube) -> Cube {
        Cube { care: cube.care & self.mask, ones: cube.ones & self.mask }
    }
}

/// A transition as far as it binds a function.
#[derive(Clone, Copy)]
struct Stretch<'s> {
    start: usize,
    end: usize,
    /// All its points, if it is more than an edge.
    inside: &'s [usize],
    cube: Cube,
}

/// What the transitions ask of the products.
struct Asked {
    /// Whether products hold ones (otherwise zeros).
    ones: bool,
    cubes: Vec<(Cube, usize)>,
    fences: Vec<Fence>,
}

fn bound_by(target: Target, span: &Span) -> bool {
    match target {
        Target::Output(j) => span.outputs >> j & 1 == 1,
        _ => span.state,
    }
}

fn set_or_reset(target: Target) -> Option<usize> {
    match target {
        Target::Set(i) | Target::Reset(i) => Some(i),
        _ => None,
    }
}

/// Whether state variable `i` changes in a transition.
fn flips(table: &Table, span: &Span, i: usize) -> bool {
    let (Code(a), Code(b)) = (table.code(span.start), table.code(span.end));
    (a ^ b) >> i & 1 == 1
}
