//! The finished functions as a circuit: values, next codes and three-valued values, from the products alone.
//!
//! Own evaluation with masks; exact. Up to [`DENSE`] variables all next codes and output words are computed beforehand,
//! 64 points at a time: `products * 2^v / 64` word operations, and `2^v` words of memory for `v` variables. Beyond that
//! each look costs one pass over the products.

use crate::codes::values::Coded;
use crate::logic::values::{Cube, Equations, Target};
use crate::merge::values::Reduced;
use crate::project::choices::Shape;
use crate::proof::report::Report;

/// Most variables for which everything is computed beforehand.
pub(super) const DENSE: usize = 20;

/// A two-level function: the union of cubes of ones, or with `zeros` the complement of the union of cubes of zeros.
#[derive(Debug)]
pub(super) struct Cover<'a> {
    /// Its name, for messages.
    pub name: &'a str,
    /// The products, or the cubes in which a sum is 0.
    pub cubes: Vec<Cube>,
    /// Whether the cubes are those of zeros.
    pub zeros: bool,
}

impl Cover<'_> {
    /// The value at a point.
    pub fn value(&self, point: u32) -> bool {
        self.cubes.iter().any(|&c| holds(c, point)) != self.zeros
    }

    /// The three-valued value where the variables free in `cube` are at X; `None` is X.
    pub fn over(&self, cube: Cube) -> Option<bool> {
        let mut met = false;
        for &c in &self.cubes {
            if inside(cube, c) {
                return Some(!self.zeros);
            }
            met |= meets(c, cube);
        }
        if met { None } else { Some(self.zeros) }
    }
}

/// How a state variable gets its next value.
#[derive(Debug)]
pub(super) enum Excitation<'a> {
    /// `Y`, fed back.
    Next(Cover<'a>),
    /// A latch or C-element: `S` or (`y` and not `R`).
    Latch(Cover<'a>, Cover<'a>),
}

/// The circuit. A point is a column in the low bits and a code above it.
#[derive(Debug)]
pub(super) struct Circuit<'a> {
    /// Number of inputs.
    pub inputs: usize,
    /// Number of state variables.
    pub bits: usize,
    /// Excitation of each state variable.
    pub state: Vec<Excitation<'a>>,
    /// Each output; `None` where no function was found.
    pub outputs: Vec<Option<Cover<'a>>>,
    /// Next code and output word of every point, if there are few enough.
    dense: Option<(Vec<u32>, Vec<u32>)>,
}

impl<'a> Circuit<'a> {
    /// Puts the functions together. What is missing or does not fit is noted; without all excitations there is no
    /// circuit.
    pub fn new(
        reduced: &Reduced,
        coded: &Coded,
        equations: &'a Equations,
        report: &mut Report,
    ) -> Option<Circuit<'a>> {
        let (inputs, bits) = (reduced.table.inputs, coded.bits);
        if equations.inputs != inputs || equations.variables.len() != inputs + bits || inputs + bits > 31 {
            report.mismatch("functions", || {
                format!(
                    "the functions speak of {} inputs and {} variables, the encoded table of {inputs} and {}",
                    equations.inputs,
                    equations.variables.len(),
                    inputs + bits
                )
            });
            return None;
        }
        let find = |target| {
            let function = equations.functions.iter().find(|f| f.target == target)?;
            let zeros = equations.shape == Shape::ProductOfSums;
            let cubes = function
                .products
                .iter()
                .map(|p| {
                    if zeros { Cube { care: p.cube.care, ones: p.cube.care & !p.cube.ones } } else { p.cube }
                })
                .collect();
            Some(Cover { name: function.name.as_str(), cubes, zeros })
        };
        let state: Vec<Option<Excitation>> = (0..bits)
            .map(|i| match (find(Target::Next(i)), find(Target::Set(i)), find(Target::Reset(i))) {
                (Some(next), None, None) => Some(Excitation::Next(next)),
                (None, Some(set), Some(reset)) => Some(Excitation::Latch(set, reset)),
                _ => None,
            })
            .collect();
        let outputs: Vec<Option<Cover>> =
            (0..reduced.table.outputs).map(|j| find(Target::Output(j))).collect();
        for i in (0..bits).filter(|&i| state[i].is_none()) {
            report.mismatch("functions", || {
                format!("{} has no excitation, or more than one", equations.variables[inputs + i])
            });
        }
        for j in (0..outputs.len()).filter(|&j| outputs[j].is_none()) {
            report.mismatch("functions", || format!("output number {} has no function", j + 1));
        }
        let state = state.into_iter().collect::<Option<Vec<_>>>()?;
        let mut circuit = Circuit { inputs, bits, state, outputs, dense: None };
        if inputs + bits <= DENSE {
            circuit.dense = Some(circuit.all());
        }
        Some(circuit)
    }

    /// Number of variables.
    pub fn variables(&self) -> usize {
        self.inputs + self.bits
    }

    /// The point of a column and a code.
    pub fn point(&self, column: u32, code: u32) -> u32 {
        column | code << self.inputs
    }

    /// The code of a point.
    pub fn code(&self, point: u32) -> u32 {
        point >> self.inputs
    }

    /// The smallest cube that holds two points.
    pub fn cube(&self, a: u32, b: u32) -> Cube {
        let care = ((1u32 << self.variables()) - 1) & !(a ^ b);
        Cube { care, ones: a & care }
    }

    /// The next code at a point.
    pub fn next(&self, point: u32) -> u32 {
        match &self.dense {
            Some((next, _)) => next[point as usize],
            None => self.next_now(point),
        }
    }

    /// The values of all outputs at a point, bit `j` for output `j`; a missing output is 0.
    pub fn word(&self, point: u32) -> u32 {
        match &self.dense {
            Some((_, word)) => word[point as usize],
            None => self
                .outputs
                .iter()
                .enumerate()
                .fold(0, |w, (j, f)| w | u32::from(f.as_ref().is_some_and(|f| f.value(point))) << j),
        }
    }

    /// Outputs that have a function, as a bit mask.
    pub fn present(&self) -> u32 {
        self.outputs.iter().enumerate().fold(0, |w, (j, f)| w | u32::from(f.is_some()) << j)
    }

    /// State variables whose set and reset are both 1 at a point, as a bit mask.
    pub fn both_on(&self, point: u32) -> u32 {
        self.state.iter().enumerate().fold(0, |w, (i, e)| match e {
            Excitation::Next(_) => w,
            Excitation::Latch(set, reset) => w | u32::from(set.value(point) && reset.value(point)) << i,
        })
    }

    fn next_now(&self, point: u32) -> u32 {
        let code = self.code(point);
        self.state.iter().enumerate().fold(0, |next, (i, e)| {
            let on = match e {
                Excitation::Next(f) => f.value(point),
                Excitation::Latch(set, reset) => {
                    set.value(point) || (code >> i & 1 == 1 && !reset.value(point))
                }
            };
            next | u32::from(on) << i
        })
    }

    /// Next codes and output words of all points.
    fn all(&self) -> (Vec<u32>, Vec<u32>) {
        let v = self.variables();
        let mut next = vec![0; 1 << v];
        let mut word = vec![0; 1 << v];
        for (i, e) in self.state.iter().enumerate() {
            let on = match e {
                Excitation::Next(f) => truth(f, v),
                Excitation::Latch(set, reset) => {
                    let (set, reset) = (truth(set, v), truth(reset, v));
                    let y = truth_of_variable(self.inputs + i, v);
                    set.iter().zip(reset).zip(y).map(|((s, r), y)| s | (y & !r)).collect()
                }
            };
            spread(&on, i, &mut next);
        }
        for (j, f) in self.outputs.iter().enumerate() {
            if let Some(f) = f {
                spread(&truth(f, v), j, &mut word);
            }
        }
        (next, word)
    }
}

/// Whether the cube holds the point.
pub(super) fn holds(cube: Cube, point: u32) -> bool {
    (point ^ cube.ones) & cube.care == 0
}

/// Whether `small` lies inside `large`.
fn inside(small: Cube, large: Cube) -> bool {
    large.care & !small.care == 0 && (large.ones ^ small.ones) & large.care == 0
}

/// Whether two cubes have a common point.
pub(super) fn meets(a: Cube, b: Cube) -> bool {
    (a.ones ^ b.ones) & a.care & b.care == 0
}

/// Bits of a 64-point word in which variable `i < 6` is 1.
const LOW: [u64; 6] = [
    0xaaaa_aaaa_aaaa_aaaa,
    0xcccc_cccc_cccc_cccc,
    0xf0f0_f0f0_f0f0_f0f0,
    0xff00_ff00_ff00_ff00,
    0xffff_0000_ffff_0000,
    0xffff_ffff_0000_0000,
];

/// The truth table of a function over `v` variables, 64 points to a word.
fn truth(f: &Cover, v: usize) -> Vec<u64> {
    let words = 1usize << v.saturating_sub(6);
    let mut table = vec![0u64; words];
    for &cube in &f.cubes {
        let low = (0..6)
            .filter(|i| cube.care >> i & 1 == 1)
            .fold(u64::MAX, |m, i| m & if cube.ones >> i & 1 == 1 { LOW[i] } else { !LOW[i] });
        let (care, ones) = ((cube.care >> 6) as usize, (cube.ones >> 6) as usize);
        let free = (words - 1) & !care;
        let mut sub = free;
        loop {
            table[(ones | sub) & (words - 1)] |= low;
            if sub == 0 {
                break;
            }
            sub = (sub - 1) & free;
        }
    }
    if f.zeros {
        table.iter_mut().for_each(|w| *w = !*w);
    }
    table
}

fn truth_of_variable(i: usize, v: usize) -> Vec<u64> {
    let words = 1usize << v.saturating_sub(6);
    (0..words).map(|w| if i < 6 { LOW[i] } else { ((w >> (i - 6) & 1) as u64).wrapping_neg() }).collect()
}

/// Sets bit `i` of the value of each point that is on.
fn spread(on: &[u64], i: usize, values: &mut [u32]) {
    for (chunk, &word) in values.chunks_mut(64).zip(on) {
        for (k, value) in chunk.iter_mut().enumerate() {
            *value |= ((word >> k & 1) as u32) << i;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn truth_tables_agree_with_point_by_point_values() {
        let cubes =
            vec![Cube { care: 0b1000_0011, ones: 0b1000_0001 }, Cube { care: 0b10_0100, ones: 0b10_0000 }];
        for zeros in [false, true] {
            let f = Cover { name: "f", cubes: cubes.clone(), zeros };
            for v in [8usize, 9] {
                let table = truth(&f, v);
                for point in 0..1u32 << v {
                    assert_eq!(table[point as usize / 64] >> (point % 64) & 1 == 1, f.value(point));
                }
            }
        }
    }

    #[test]
    fn three_values_see_the_static_hazard_of_a_missing_consensus_term() {
        // a·b + a'·c at b = c = 1 while a changes (D. A. Huffman 1957); variables a, b, c.
        let ab = Cube { care: 0b011, ones: 0b011 };
        let ac = Cube { care: 0b101, ones: 0b100 };
        let bc = Cube { care: 0b110, ones: 0b110 };
        let change = Cube { care: 0b110, ones: 0b110 };
        assert_eq!(Cover { name: "f", cubes: vec![ab, ac], zeros: false }.over(change), None);
        assert_eq!(Cover { name: "f", cubes: vec![ab, ac, bc], zeros: false }.over(change), Some(true));
        assert_eq!(Cover { name: "f", cubes: vec![ab, ac], zeros: true }.over(change), None);
        assert_eq!(Cover { name: "f", cubes: vec![bc], zeros: true }.over(change), Some(false));
    }
}
