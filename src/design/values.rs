//! The whole design as plain values. No algorithm lives here.

use std::sync::Arc;

use crate::base::{Finding, Level};
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
