//! The whole design as plain values. No algorithm lives here.

use std::sync::Arc;

use crate::base::{Code, Column, Finding, Level, Row};
use crate::codes::values::Coded;
use crate::gates::values::Cost;
use crate::logic::values::Equations;
use crate::merge::values::Merged;
use crate::project::choices::{Form, Method, Shape};
use crate::proof::values::{Proof, Races};
use crate::spec::values::Spec;

/// Everything that was derived from a project. A stage that could not run is `None`; the findings say why.
#[derive(Debug, Clone, Default)]
pub struct Design {
    /// All findings, in the order of the stages.
    pub findings: Vec<Finding>,
    /// The checked specification.
    pub spec: Option<Arc<Spec>>,
    /// Merging.
    pub merged: Option<Arc<Merged>>,
    /// Codes.
    pub coded: Option<Arc<Coded>>,
    /// What the race check says of the codes.
    pub races: Option<Arc<Races>>,
    /// Equations.
    pub equations: Option<Arc<Equations>>,
    /// Cost of the equations in gates.
    pub cost: Option<Cost>,
    /// The proof.
    pub proof: Option<Arc<Proof>>,
}

impl Design {
    /// Whether there is a finding of level error.
    pub fn has_error(&self) -> bool {
        self.findings.iter().any(|f| f.level == Level::Error)
    }

    /// Whether everything was derived without an error or a clash and the proof holds: exit code 0 of `derive`.
    pub fn proved(&self) -> bool {
        !self.has_error()
            && self.races.as_ref().is_some_and(|r| r.critical.is_empty())
            && self.equations.as_ref().is_some_and(|e| e.clashes.is_empty())
            && self.proof.as_ref().is_some_and(|p| p.holds())
    }
}

/// A design of the same project with other choices, for comparing.
#[derive(Debug, Clone)]
pub struct Alternative {
    /// The assignment method.
    pub method: Method,
    /// Form of the excitation.
    pub form: Form,
    /// Shape of every function.
    pub shape: Shape,
    /// What came of it.
    pub design: Design,
}

/// Something that can be selected, in any view.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Pick {
    /// A row of the primitive table.
    Row(Row),
    /// A cell of the primitive table.
    Cell(Row, Column),
    /// Two rows: a square of the implication table, a line of the merger diagram.
    Pair(Row, Row),
    /// A maximal compatible, by index.
    Compatible(usize),
    /// A row of the reduced table.
    Merged(Row),
    /// A cell of the reduced table.
    MergedCell(Row, Column),
    /// A code.
    Code(Code),
    /// An entry of the encoded table.
    Entry(Code, Column),
    /// A function, by index.
    Function(usize),
    /// A product of a function.
    Product(usize, usize),
    /// A point of a Karnaugh map: function and value of its variables.
    Point(usize, u32),
    /// A move of the reduced table, by index.
    Move(usize),
}
