//! Plain values of the equations. No algorithm lives here.
//!
//! A *point* is a value of all variables: bit `i` is input `i` for `i < inputs`, then the state variables `y1, y2, ..`.

use crate::base::{Bound, Code, Column, Row};
use crate::project::choices::{Form, Shape};

/// The point of an input combination and a code.
pub fn point(column: Column, code: Code, inputs: usize) -> u32 {
    u32::from(column.0) | code.0 << inputs
}

/// A cube: the variables in `care` are fixed to the bits of `ones`, the others are free. `ones` is inside `care`.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct Cube {
    /// Fixed variables.
    pub care: u32,
    /// Their values.
    pub ones: u32,
}

impl Cube {
    /// The smallest cube that holds two points, over `variables` variables.
    pub fn spanned(a: u32, b: u32, variables: usize) -> Cube {
        let care = !(a ^ b) & mask(variables);
        Cube { care, ones: a & care }
    }

    /// The cube of one point.
    pub fn at(point: u32, variables: usize) -> Cube {
        Cube::spanned(point, point, variables)
    }

    /// Whether the point lies in the cube.
    pub fn holds(self, point: u32) -> bool {
        point & self.care == self.ones
    }

    /// Whether the other cube lies in this one.
    pub fn contains(self, other: Cube) -> bool {
        self.care & other.care == self.care && other.ones & self.care == self.ones
    }

    /// Whether the cubes have a point in common.
    pub fn meets(self, other: Cube) -> bool {
        (self.ones ^ other.ones) & self.care & other.care == 0
    }

    /// The common cube.
    pub fn common(self, other: Cube) -> Option<Cube> {
        self.meets(other).then_some(Cube { care: self.care | other.care, ones: self.ones | other.ones })
    }

    /// Number of literals.
    pub fn literals(self) -> u32 {
        self.care.count_ones()
    }

    /// One character for each variable: `1` true, `0` complemented, `-` absent.
    pub fn text(self, variables: usize) -> String {
        (0..variables)
            .map(|i| match (self.care >> i & 1, self.ones >> i & 1) {
                (0, _) => '-',
                (_, 0) => '0',
                _ => '1',
            })
            .collect()
    }
}

/// All ones in the lowest `variables` bits.
pub fn mask(variables: usize) -> u32 {
    if variables >= 32 { u32::MAX } else { (1 << variables) - 1 }
}

/// What a function drives.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Target {
    /// The excitation `Y(i+1)` of state variable `i`, fed back.
    Next(usize),
    /// The set function `S(i+1)`.
    Set(usize),
    /// The reset function `R(i+1)`.
    Reset(usize),
    /// Output `j`.
    Output(usize),
}

/// Which part of a move a transition belongs to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Phase {
    /// The inputs change, the code stands.
    Input,
    /// Step number `.0` (from 0) of the way: the code changes, the inputs stand.
    State(usize),
}

/// A transition in which a function must not glitch.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Transition {
    /// Index into `Reduced::moves` of the move that it belongs to.
    pub cause: usize,
    /// The part of the move.
    pub phase: Phase,
    /// Point where it starts.
    pub start: u32,
    /// Point where it ends.
    pub end: u32,
    /// Value of the function at the start, and at the end.
    pub values: (bool, bool),
}

/// A cube that one chosen product must hold as a whole (for product-of-sums: a cube of zeros that one sum must hold).
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Required {
    /// The cube.
    pub cube: Cube,
    /// Indices into `Function::transitions` that ask for it; empty for a single on-set point that no transition meets.
    pub why: Vec<usize>,
}

/// A cube that a product may meet only if it holds the start point.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Privileged {
    /// The cube.
    pub cube: Cube,
    /// The point that a product must hold to be allowed in.
    pub start: u32,
}

/// A chosen product (in product-of-sums shape: a sum, as the cube of its zeros complemented literal by literal, so
/// that the same text stands for the sum with those literals).
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Product {
    /// In sum-of-products: the points where the product is 1. In product-of-sums: `care` the variables of the sum and
    /// `ones` the uncomplemented ones; the sum is 0 where every one of its literals is 0.
    pub cube: Cube,
    /// Indices into `Function::required` of those that this product alone holds.
    pub alone: Vec<usize>,
    /// The value of the function at every point would be right without it: it is there for hazards alone.
    pub hazard_only: bool,
}

/// A finished function.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Function {
    /// `Y1`, `S1`, `R1`, or the output's own name.
    pub name: String,
    /// What it drives.
    pub target: Target,
    /// Points where it must be 1, as disjoint or overlapping cubes.
    pub on: Vec<Cube>,
    /// Points where it must be 0.
    pub off: Vec<Cube>,
    /// Transitions in which it must not glitch.
    pub transitions: Vec<Transition>,
    /// Required cubes (of ones for sum-of-products, of zeros for product-of-sums).
    pub required: Vec<Required>,
    /// Privileged cubes.
    pub privileged: Vec<Privileged>,
    /// The chosen products or sums, in the order of their text. Empty: constant 0 for products, 1 for sums; one product without
    /// literals is the opposite constant.
    pub products: Vec<Product>,
    /// Whether fewer products, and with as many products fewer literals, are impossible. `lower` is a bound on the products.
    /// With products shared: whether fewer different products, and with as many fewer literals, are impossible for all
    /// functions together.
    pub bound: Bound,
}

impl Function {
    /// Number of literals of all products.
    pub fn literals(&self) -> usize {
        self.products.iter().map(|p| p.cube.literals() as usize).sum()
    }

    /// The value at a point, from the products alone.
    pub fn value(&self, shape: Shape, point: u32) -> bool {
        match shape {
            Shape::SumOfProducts => self.products.iter().any(|p| p.cube.holds(point)),
            Shape::ProductOfSums => self.products.iter().all(|p| {
                let Cube { care, ones } = p.cube;
                point & care & ones != 0 || !point & care & !ones != 0
            }),
        }
    }
}

/// An input change that can race its own feedback.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct EssentialHazard {
    /// Merged row of the stable total state.
    pub row: Row,
    /// Its column.
    pub column: Column,
    /// The column after the change.
    pub to: Column,
    /// For bursts and implementation hazards: the intermediate column that the far end may still see; for a single-bit change
    /// it equals `column`.
    pub seen: Column,
}

/// Transitions that no hazard-free cover can satisfy together.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Clash {
    /// Name of the function.
    pub function: String,
    /// The transitions, each in words.
    pub transitions: Vec<String>,
    /// Why they clash and what would help.
    pub text: String,
}

/// The equations of a design.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Equations {
    /// Form of the excitation.
    pub form: Form,
    /// Shape of every function.
    pub shape: Shape,
    /// Number of inputs among the variables.
    pub inputs: usize,
    /// Names: inputs, then `y1, y2, ..`.
    pub variables: Vec<String>,
    /// Excitations first, then outputs. A function with a clash is missing.
    pub functions: Vec<Function>,
    /// Whether products are shared; then equal cubes in several functions are one product.
    pub shared: bool,
    /// Essential hazards of single-bit changes.
    pub essential: Vec<EssentialHazard>,
    /// Essential hazards of bursts.
    pub burst_essential: Vec<EssentialHazard>,
    /// Hazards of the same kind that only the finished functions have, where the table leaves cells open.
    pub implementation: Vec<EssentialHazard>,
    /// What cannot be done.
    pub clashes: Vec<Clash>,
    /// Notes worth listing (a fall of S together with a rise of R).
    pub notes: Vec<String>,
}
