//! What the user chooses at each stage, as plain values. Every stage may import this module, and no other of the room.

use std::collections::BTreeMap;

use serde::Deserialize;

/// How the inputs may change.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, Deserialize)]
pub enum Discipline {
    /// One input bit at a time.
    #[default]
    Single,
    /// Several bits, in any order; the circuit waits for the whole burst.
    Burst,
}

/// Whether outputs belong to cells or to rows.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, Deserialize)]
pub enum OutputStyle {
    /// Outputs of a cell depend on row and column.
    #[default]
    PerCell,
    /// Outputs depend on the row alone.
    PerRow,
}

/// Which closed cover is used.
#[derive(Debug, Clone, PartialEq, Eq, Hash, Default)]
pub enum CoverChoice {
    /// The smallest, found and proved by search.
    #[default]
    Smallest,
    /// Sets of row names, checked.
    ByHand(Vec<Vec<String>>),
}

/// Choices for merging.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct MergingChoice {
    /// Outputs per cell or per row.
    pub outputs: OutputStyle,
    /// Which closed cover.
    pub cover: CoverChoice,
    /// Names of the merged rows in the order of the cover; missing ones are named A, B, .., Z, AA, ..
    pub names: Vec<String>,
}

/// How rows get their codes.
#[derive(Debug, Clone, PartialEq, Eq, Hash, Default)]
pub enum Method {
    /// One code a row, one bit a step, no spare codes.
    #[default]
    Adjacency,
    /// The same with spare codes as extra rows.
    SharedRow,
    /// All bits of a move change at once, without a critical race.
    SingleStep,
    /// One bit a row.
    OneHot,
    /// Several codes a row.
    MultipleRow,
    /// Codes by merged row name, as bit strings.
    ByHand(BTreeMap<String, Vec<String>>),
}

impl Method {
    /// The five methods that need nothing from the user.
    pub const ALL: [Method; 5] =
        [Method::Adjacency, Method::SharedRow, Method::SingleStep, Method::OneHot, Method::MultipleRow];

    /// The word of the record, with `_` between words.
    pub fn word(&self) -> &'static str {
        match self {
            Method::Adjacency => "adjacency",
            Method::SharedRow => "shared_row",
            Method::SingleStep => "single_step",
            Method::OneHot => "one_hot",
            Method::MultipleRow => "multiple_row",
            Method::ByHand(_) => "by_hand",
        }
    }
}

/// Choices for codes.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct CodesChoice {
    /// The assignment method.
    pub method: Method,
}

/// Form of the excitation.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, Deserialize)]
pub enum Form {
    /// `Y = f(x, y)`, fed back.
    #[default]
    Feedback,
    /// A set and a reset function for a latch.
    SetReset,
    /// A set and a reset function for a C-element.
    CElement,
}

impl Form {
    /// All forms.
    pub const ALL: [Form; 3] = [Form::Feedback, Form::SetReset, Form::CElement];

    /// The word of the record.
    pub fn word(self) -> &'static str {
        match self {
            Form::Feedback => "feedback",
            Form::SetReset => "set_reset",
            Form::CElement => "c_element",
        }
    }
}

/// Two-level shape of the functions.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, Deserialize)]
pub enum Shape {
    /// Sum of products.
    #[default]
    SumOfProducts,
    /// Product of sums.
    ProductOfSums,
}

impl Shape {
    /// Both shapes.
    pub const ALL: [Shape; 2] = [Shape::SumOfProducts, Shape::ProductOfSums];

    /// The word of the record.
    pub fn word(self) -> &'static str {
        match self {
            Shape::SumOfProducts => "sum_of_products",
            Shape::ProductOfSums => "product_of_sums",
        }
    }
}

/// Choices for the equations.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct LogicChoice {
    /// Form of the excitation.
    pub form: Form,
    /// Shape of every function.
    pub shape: Shape,
    /// Share products between functions where that is cheaper.
    pub share: bool,
    /// Outputs that change late (with the state, not with the input), by name.
    pub late: Vec<String>,
}

/// Gate library style.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default, Deserialize)]
pub enum Style {
    /// AND and OR gates with inverters.
    #[default]
    AndOr,
    /// NAND gates only.
    NandOnly,
    /// NOR gates only.
    NorOnly,
}

/// Choices for the gates.
#[derive(Debug, Clone, PartialEq)]
pub struct GatesChoice {
    /// Gate library style.
    pub style: Style,
    /// Largest fan-in of a gate, at least 2.
    pub fan_in: u8,
    /// Smallest and largest delay of a gate, in the user's time unit.
    pub delay: (f64, f64),
    /// Name of a reset input that forces the initial code.
    pub reset: Option<String>,
}

impl Default for GatesChoice {
    fn default() -> Self {
        GatesChoice { style: Style::AndOr, fan_in: 4, delay: (0.5, 1.5), reset: None }
    }
}

/// All choices of a project.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Choices {
    /// For merging.
    pub merging: MergingChoice,
    /// For codes.
    pub codes: CodesChoice,
    /// For the equations.
    pub logic: LogicChoice,
    /// For the gates.
    pub gates: GatesChoice,
}
