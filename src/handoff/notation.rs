//! Equations as text, in one of three notations: the textbook's, the operators of IEEE 1364, or those of IEEE 1076.
//!
//! Only the operators are taken from the standards; a line is no complete statement of either language.

use crate::logic::values::{Cube, Equations, Function};
use crate::project::choices::Shape;

/// How equations are written.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, serde::Serialize, serde::Deserialize)]
pub enum Notation {
    /// `D·G + G'·y1`.
    #[default]
    Textbook,
    /// `(D & G) | (~G & y1)`.
    Ieee1364,
    /// `(D and G) or (not G and y1)`.
    Ieee1076,
}

impl Notation {
    /// All notations.
    pub const ALL: [Notation; 3] = [Notation::Textbook, Notation::Ieee1364, Notation::Ieee1076];

    /// The word of the command line.
    pub fn word(self) -> &'static str {
        match self {
            Notation::Textbook => "textbook",
            Notation::Ieee1364 => "ieee1364",
            Notation::Ieee1076 => "ieee1076",
        }
    }

    fn literal(self, name: &str, positive: bool) -> String {
        match (self, positive) {
            (_, true) => name.to_owned(),
            (Notation::Textbook, false) => format!("{name}'"),
            (Notation::Ieee1364, false) => format!("~{name}"),
            (Notation::Ieee1076, false) => format!("not {name}"),
        }
    }

    fn and(self) -> &'static str {
        match self {
            Notation::Textbook => "·",
            Notation::Ieee1364 => " & ",
            Notation::Ieee1076 => " and ",
        }
    }

    fn or(self) -> &'static str {
        match self {
            Notation::Textbook => " + ",
            Notation::Ieee1364 => " | ",
            Notation::Ieee1076 => " or ",
        }
    }

    fn constant(self, value: bool) -> &'static str {
        match (self, value) {
            (Notation::Textbook, false) => "0",
            (Notation::Textbook, true) => "1",
            (Notation::Ieee1364, false) => "1'b0",
            (Notation::Ieee1364, true) => "1'b1",
            (Notation::Ieee1076, false) => "'0'",
            (Notation::Ieee1076, true) => "'1'",
        }
    }
}

/// A product, or a sum where the shape is product-of-sums, without brackets around it. Without literals: the constant.
pub fn term(notation: Notation, equations: &Equations, cube: Cube) -> String {
    let literals: Vec<String> = equations
        .variables
        .iter()
        .enumerate()
        .filter(|(i, _)| cube.care >> i & 1 == 1)
        .map(|(i, name)| notation.literal(name, cube.ones >> i & 1 == 1))
        .collect();
    let product = equations.shape == Shape::SumOfProducts;
    if literals.is_empty() {
        return notation.constant(product).to_owned();
    }
    literals.join(if product { notation.and() } else { notation.or() })
}

/// The terms of a function, each with the brackets that it needs, in the order of the function. Never empty: a constant
/// is one term.
pub fn terms(notation: Notation, equations: &Equations, function: &Function) -> Vec<String> {
    if function.products.is_empty() {
        return vec![notation.constant(equations.shape == Shape::ProductOfSums).to_owned()];
    }
    let several = function.products.len() > 1;
    let bracketed = several && (equations.shape == Shape::ProductOfSums || notation != Notation::Textbook);
    function
        .products
        .iter()
        .map(|p| {
            let text = term(notation, equations, p.cube);
            if bracketed && p.cube.literals() > 1 { format!("({text})") } else { text }
        })
        .collect()
}

/// What stands between two terms of a function, blanks included.
pub fn joint(notation: Notation, shape: Shape) -> &'static str {
    match shape {
        Shape::SumOfProducts => notation.or(),
        Shape::ProductOfSums => notation.and(),
    }
}

/// The right side of a function's equation on one line.
pub fn right_side(notation: Notation, equations: &Equations, function: &Function) -> String {
    terms(notation, equations, function).join(joint(notation, equations.shape))
}

/// All functions, a line each, for a file or the clipboard.
pub fn equations_text(equations: &Equations, notation: Notation) -> String {
    let line = |f: &Function| format!("{} = {}\n", f.name, right_side(notation, equations, f));
    equations.functions.iter().map(line).collect()
}
