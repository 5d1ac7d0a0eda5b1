//! Logic hazards: can a function glitch while signals change in a stretch of a move?
//!
//! Three-valued evaluation with the changing signals at X must give a constant where the function has one value over
//! the stretch (E. B. Eichelberger, Hazard detection in combinational and sequential switching circuits, 1965). Where it
//! changes over two or more signals three values say nothing; there the value may change at most once on every way, and
//! every product that meets the cube must hold its 1-end (every sum's cube of zeros its 0-end; after S. M. Nowick,
//! D. L. Dill, Exact two-level minimization of hazard-free logic with multiple-input changes, 1995). A change over one
//! signal needs nothing. Exact for two-level logic with any gate and wire delays.
//!
//! Set and reset functions are free where the latch holds; see [`latch`] for what is left to ask.
//! Cost: a stretch of `d` signals looks at each product once, and at `2^d` points if its value changes.

use crate::proof::circuit::{Circuit, Cover, Excitation, holds, meets};
use crate::proof::report::{Report, Stretch};
use crate::proof::values::HazardFound;

/// Which hazard it is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Glitch {
    /// It should stay at this value and can leave it for a moment.
    Static(bool),
    /// It changes once, but can go back and forth before.
    Dynamic,
    /// Its very values change more than once on some way.
    Function,
}

/// Checks every function over one stretch.
pub(super) fn check(circuit: &Circuit, stretch: Stretch, names: &Naming, report: &mut Report) {
    let Stretch { from, to, .. } = stretch;
    for (i, excitation) in circuit.state.iter().enumerate() {
        match excitation {
            Excitation::Next(f) => {
                if let Some(glitch) = ordinary(circuit, f, from, to) {
                    report.hazard(names.glitch(circuit, f.name, stretch, glitch));
                }
            }
            Excitation::Latch(set, reset) => {
                for (f, active) in [(set, true), (reset, false)] {
                    if let Some(glitch) = latch(circuit, f, i, active, from, to) {
                        report.hazard(names.pulse(circuit, f.name, stretch, glitch, active));
                    }
                }
            }
        }
    }
    for (j, f) in circuit.outputs.iter().enumerate() {
        let Some(f) = f else { continue };
        if stretch.outputs >> j & 1 == 1
            && let Some(glitch) = ordinary(circuit, f, from, to)
        {
            report.hazard(names.glitch(circuit, f.name, stretch, glitch));
        }
    }
    both_on(circuit, stretch, names, report);
}

/// A function that is bound at every point between `from` and `to`.
fn ordinary(circuit: &Circuit, f: &Cover, from: u32, to: u32) -> Option<Glitch> {
    let cube = circuit.cube(from, to);
    if f.over(cube).is_some() {
        return None;
    }
    let (old, new) = (f.value(from), f.value(to));
    let changing = from ^ to;
    if changing.count_ones() == 1 {
        return (old == new).then_some(Glitch::Static(old));
    }
    if old == new {
        let constant = points(from, to).all(|p| f.value(p) == old);
        return Some(if constant { Glitch::Static(old) } else { Glitch::Function });
    }
    if points(from, to).any(|p| f.value(p) == new && later(p, to).any(|q| f.value(q) == old)) {
        return Some(Glitch::Function);
    }
    // The end at which the products (or the cubes of zeros) are on.
    let end = if old != f.zeros { from } else { to };
    let torn = f.cubes.iter().any(|&c| meets(c, cube) && !holds(c, end));
    torn.then_some(Glitch::Dynamic)
}

/// A set function (`active`) or reset function of state variable `i`. Call `Y` its next value, seen from the function's
/// side. Where `Y` is inactive the function must be 0 without a pulse; where `y` is inactive and `Y` active it must be 1;
/// where both are active the latch holds by itself and asks nothing.
fn latch(circuit: &Circuit, f: &Cover, i: usize, active: bool, from: u32, to: u32) -> Option<Glitch> {
    let y = 1u32 << (circuit.inputs + i);
    let is_active = |p: u32| (circuit.next(p) >> i & 1 == 1) == active;
    let held = |p: u32| (p & y != 0) == active;
    let some_active = points(from, to).any(is_active);
    let all_active = points(from, to).all(is_active);
    if !some_active {
        return ordinary(circuit, f, from, to);
    }
    if (from ^ to) & y == 0 {
        let idle = if held(from) {
            // A single change between held and withdrawn asks for nothing, unless the function is 0 at both ends.
            all_active || ((from ^ to).count_ones() == 1 && f.value(from) != f.value(to))
        } else {
            false
        };
        return if idle { None } else { ordinary(circuit, f, from, to) };
    }
    if all_active {
        // The latch is being set: the function must stand until the variable has changed.
        let (a, b) = if held(from) { (from ^ y, to) } else { (from, to ^ y) };
        return ordinary(circuit, f, a, b);
    }
    ordinary(circuit, f, from, to)
}

/// Set and reset must never be 1 together, on the way neither.
fn both_on(circuit: &Circuit, stretch: Stretch, names: &Naming, report: &mut Report) {
    if !circuit.state.iter().any(|e| matches!(e, Excitation::Latch(..))) {
        return;
    }
    for p in points(stretch.from, stretch.to) {
        let mut both = circuit.both_on(p);
        while both != 0 {
            let i = both.trailing_zeros() as usize;
            both &= both - 1;
            if let Excitation::Latch(set, reset) = &circuit.state[i] {
                report.hazard(names.together(circuit, set.name, reset.name, stretch, p));
            }
        }
    }
}

/// All points of the smallest cube with `from` and `to`.
pub(super) fn points(from: u32, to: u32) -> impl Iterator<Item = u32> {
    let free = from ^ to;
    let mut sub = Some(0u32);
    std::iter::from_fn(move || {
        let s = sub?;
        sub = if s == free { None } else { Some(s.wrapping_sub(free) & free) };
        Some(from ^ s)
    })
}

/// The points one signal change nearer to `to`.
pub(super) fn later(p: u32, to: u32) -> impl Iterator<Item = u32> {
    let mut left = p ^ to;
    std::iter::from_fn(move || {
        let bit = left & left.wrapping_neg();
        left ^= bit;
        (bit != 0).then_some(p ^ bit)
    })
}

/// Turns points into words.
pub(super) struct Naming<'a> {
    /// Inputs, then state variables.
    pub variables: &'a [String],
    /// Names of the merged rows.
    pub rows: &'a [String],
}

impl Naming<'_> {
    fn bits(&self, value: u32, first: usize, last: usize) -> String {
        (first..last).map(|i| if value >> i & 1 == 1 { '1' } else { '0' }).collect()
    }

    /// A point as text over the variables.
    pub fn point(&self, p: u32) -> String {
        self.bits(p, 0, self.variables.len())
    }

    /// What happens in a stretch.
    pub fn stretch(&self, circuit: &Circuit, s: Stretch) -> String {
        let n = circuit.inputs;
        let changing: Vec<&str> = self
            .variables
            .iter()
            .enumerate()
            .filter(|(i, _)| (s.from ^ s.to) >> i & 1 == 1)
            .map(|(_, name)| name.as_str())
            .collect();
        let row = self.rows.get(s.row.at()).map_or("?", String::as_str);
        if (s.from ^ s.to) >> n == 0 {
            format!(
                "row {row} (code {}), inputs {} -> {} ({} changes)",
                self.bits(s.from, n, self.variables.len()),
                self.bits(s.from, 0, n),
                self.bits(s.to, 0, n),
                changing.join(", ")
            )
        } else {
            format!(
                "row {row}, inputs {}, code {} -> {} ({} changes)",
                self.bits(s.from, 0, n),
                self.bits(s.from, n, self.variables.len()),
                self.bits(s.to, n, self.variables.len()),
                changing.join(", ")
            )
        }
    }

    /// A hazard of any kind, with its place.
    pub fn found(
        &self,
        circuit: &Circuit,
        name: &str,
        s: Stretch,
        kind: &'static str,
        what: String,
    ) -> HazardFound {
        HazardFound {
            function: name.to_string(),
            row: s.row,
            from: self.point(s.from),
            to: self.point(s.to),
            kind,
            text: format!("{}: {what}", self.stretch(circuit, s)),
        }
    }

    fn glitch(&self, circuit: &Circuit, name: &str, s: Stretch, glitch: Glitch) -> HazardFound {
        let (kind, what) = match glitch {
            Glitch::Static(true) => (
                "static-1",
                format!("{name} must stay 1 and can drop to 0, no term holds it over the whole change"),
            ),
            Glitch::Static(false) => (
                "static-0",
                format!("{name} must stay 0 and can rise to 1, no term holds it over the whole change"),
            ),
            Glitch::Dynamic => (
                "dynamic",
                format!(
                    "{name} changes once but can go back and forth, a term is on in the middle of the change only"
                ),
            ),
            Glitch::Function => {
                ("function", format!("the value of {name} changes more than once on some way"))
            }
        };
        self.found(circuit, name, s, kind, what)
    }

    fn pulse(&self, circuit: &Circuit, name: &str, s: Stretch, glitch: Glitch, active: bool) -> HazardFound {
        match glitch {
            Glitch::Static(false) => {
                let next = if active { 0 } else { 1 };
                let what = format!(
                    "{name} must stay 0 and can pulse to 1, while the next state of its latch is {next}"
                );
                self.found(circuit, name, s, "pulse", what)
            }
            other => self.glitch(circuit, name, s, other),
        }
    }

    /// Set and reset are both 1 at a point of the stretch.
    pub fn together(&self, circuit: &Circuit, set: &str, reset: &str, s: Stretch, p: u32) -> HazardFound {
        let what = format!("{set} and {reset} are both 1 at {}", self.point(p));
        self.found(circuit, set, s, "both-on", what)
    }
}
