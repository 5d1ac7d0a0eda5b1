//! The project: the only thing that is edited, and its RON file.
//!
//! [`Project`] mirrors the file field by field. It speaks in names and bit strings, not in indices, so that a
//! project with a mistake in it (an unknown next row, a missing stable cell) can still be opened, saved and mended:
//! [`spec`](crate::spec) turns it into a table and says what is wrong.
//!
//! | to | use |
//! | --- | --- |
//! | open a file | [`read`], which enforces [`limits`] while it parses |
//! | save | [`write`], canonical: what it wrote reads back equal, and is then written the same, byte for byte |
//! | change something | [`Edit::apply`], a pure function from a project to the next |
//! | change with undo | [`History`] |
//!
//! Comments in a file are for people who write it by hand. They are not part of the project: saving drops them.
//!
//! [`read`] and [`write`] take time and memory linear in the file, an edit linear in the project.

pub mod choices;

mod bounds;
mod edit;
mod edit_rows;
mod edit_signals;
mod explain;
mod file;
mod history;
mod limited;
mod pretty;
mod write;

#[cfg(test)]
mod arbitrary;
#[cfg(test)]
mod edit_tests;

use std::collections::BTreeMap;

pub use choices::{
    Choices, CodesChoice, CoverChoice, Discipline, Form, GatesChoice, LogicChoice, MergingChoice, Method,
    OutputStyle, Shape, Style,
};

pub use bounds::fits;
pub use edit::{Edit, EditError};
pub use explain::ReadError;
pub use file::read;
pub use history::History;
pub use write::write;

/// The project format that this program reads and writes.
pub const FORMAT: u32 = 1;

/// What a project may hold at most. Anything beyond is refused when the file is read, and by every edit.
pub mod limits {
    /// Rows of the primitive table.
    pub const ROWS: usize = 1024;
    /// Inputs.
    pub const INPUTS: usize = 10;
    /// Outputs.
    pub const OUTPUTS: usize = 32;
    /// Inputs plus state variables of the encoded design.
    pub const VARIABLES: usize = 24;
    /// Characters of a name, and of any other string for which no limit of its own stands here.
    pub const NAME: usize = 64;
    /// Characters of the title.
    pub const TITLE: usize = 256;
    /// Characters of the notes.
    pub const NOTES: usize = 1 << 16;
    /// Cells of one row.
    pub const CELLS: usize = 1 << INPUTS;
    /// Scenarios, and steps of one scenario.
    pub const SCENARIOS: usize = 1024;
    /// Largest fan-in of a gate that may be asked for; the smallest is 2.
    pub const FAN_IN: u8 = 64;
    /// Largest delay of a gate, in the user's time unit. Delays are finite and not negative.
    pub const DELAY: f64 = 1e9;
    /// Bytes of a file.
    pub const FILE_BYTES: usize = 16 << 20;
    /// Nesting of brackets in a file.
    pub const NESTING: usize = 32;
}

/// A controller as its designer wrote it.
#[derive(Debug, Clone, PartialEq)]
pub struct Project {
    /// One line.
    pub title: String,
    /// Free text.
    pub notes: String,
    /// Input names, in column order.
    pub inputs: Vec<String>,
    /// Output names, in output-string order.
    pub outputs: Vec<String>,
    /// How the inputs may change.
    pub discipline: Discipline,
    /// Row name and column of the total state after power-up; `None` while nobody has said.
    pub initial: Option<(String, String)>,
    /// The primitive flow table, in the user's order.
    pub rows: Vec<RowEntry>,
    /// Timing sequences that the table must agree with.
    pub scenarios: Vec<Scenario>,
    /// What the user chose at each stage.
    pub choices: Choices,
    /// What the window remembers for this project.
    pub layout: Layout,
}

/// A row of the primitive flow table as written.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct RowEntry {
    /// Name of the row.
    pub name: String,
    /// Cells by column bit string. A column that is left out is unspecified.
    pub cells: BTreeMap<String, CellEntry>,
}

/// A cell as written.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct CellEntry {
    /// Name of the next row, or `-`.
    pub next: String,
    /// One of `0`, `1`, `-` for each output.
    pub outputs: String,
}

/// A timing sequence: what should happen, step by step.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Scenario {
    /// Name of the scenario.
    pub name: String,
    /// Whether the last step leads back to the first.
    pub loops: bool,
    /// The first step is where it starts; each further one is an input change and what the outputs settle to.
    pub steps: Vec<Step>,
}

/// One step of a scenario.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Step {
    /// The inputs as a column bit string.
    pub inputs: String,
    /// The settled outputs, one of `0`, `1`, `-` each.
    pub outputs: String,
    /// The row that the controller is then in, if the user says so.
    pub row: Option<String>,
}

/// What the window remembers for a project. The batch commands read and write it unchanged.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Layout {
    /// Station that was open, by its name.
    pub station: String,
    /// Columns in Gray order (otherwise in counting order).
    pub gray: bool,
    /// Show only the columns that some cell uses.
    pub used_only: bool,
}

impl Project {
    /// An empty project with the given signals.
    pub fn new(inputs: Vec<String>, outputs: Vec<String>) -> Self {
        Project {
            title: String::new(),
            notes: String::new(),
            inputs,
            outputs,
            discipline: Discipline::Single,
            initial: None,
            rows: Vec::new(),
            scenarios: Vec::new(),
            choices: Choices::default(),
            layout: Layout::default(),
        }
    }
}
