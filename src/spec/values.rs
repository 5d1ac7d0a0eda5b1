//! Plain values of the specification: the flow table and what the checks made of it. No algorithm lives here.

use crate::base::{Column, Finding, Outputs, Row, TotalState};
use crate::project::choices::Discipline;

/// Names of the signals.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Signals {
    /// Inputs, in column order.
    pub inputs: Vec<String>,
    /// Outputs, in output-word order.
    pub outputs: Vec<String>,
}

/// A cell of a flow table.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct Cell {
    /// The next row; `None` is unspecified.
    pub next: Option<Row>,
    /// The outputs, each 0, 1 or open.
    pub outputs: Outputs,
    /// The cell lies strictly inside a burst of its row: it is passed on the way, and must not be left there.
    pub inner: bool,
}

/// A flow table, primitive or reduced: a dense grid of `rows` by `2^inputs` cells.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct FlowTable {
    /// Number of inputs; there are `2^inputs` columns.
    pub inputs: usize,
    /// Number of outputs.
    pub outputs: usize,
    /// Row names, in order.
    pub names: Vec<String>,
    cells: Vec<Cell>,
}

impl FlowTable {
    /// A table with all cells unspecified.
    pub fn new(inputs: usize, outputs: usize, names: Vec<String>) -> Self {
        let cells = vec![Cell::default(); names.len() << inputs];
        FlowTable { inputs, outputs, names, cells }
    }

    /// Number of rows.
    pub fn len(&self) -> usize {
        self.names.len()
    }

    /// Whether there is no row.
    pub fn is_empty(&self) -> bool {
        self.names.is_empty()
    }

    /// All rows in order.
    pub fn rows(&self) -> impl ExactSizeIterator<Item = Row> + use<> {
        (0..self.names.len()).map(Row::new)
    }

    /// All columns, in the order of their numbers (bit 0 is the first input).
    pub fn columns(&self) -> impl ExactSizeIterator<Item = Column> + use<> {
        (0..1u32 << self.inputs).map(|c| Column(c as u16))
    }

    /// The cell at (row, column).
    pub fn cell(&self, row: Row, column: Column) -> Cell {
        self.cells[(row.at() << self.inputs) + column.at()]
    }

    /// The cell at (row, column), to be changed.
    pub fn cell_mut(&mut self, row: Row, column: Column) -> &mut Cell {
        &mut self.cells[(row.at() << self.inputs) + column.at()]
    }

    /// All `2^inputs` cells of a row, by column number.
    pub fn row_cells(&self, row: Row) -> &[Cell] {
        &self.cells[row.at() << self.inputs..(row.at() + 1) << self.inputs]
    }

    /// The next row of (row, column).
    pub fn next(&self, row: Row, column: Column) -> Option<Row> {
        self.cell(row, column).next
    }

    /// Whether (row, column) is stable.
    pub fn stable(&self, row: Row, column: Column) -> bool {
        self.next(row, column) == Some(row)
    }

    /// Name of a row.
    pub fn name(&self, row: Row) -> &str {
        &self.names[row.at()]
    }

    /// Bit string of a column.
    pub fn column_text(&self, column: Column) -> String {
        column.text(self.inputs)
    }
}

/// A move of a table that can happen: from a stable total state the inputs change to `column`, and the table goes to `to`
/// (which may be the row it was in).
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Move {
    /// Where it starts; stable, reachable.
    pub from: TotalState,
    /// The inputs after the change.
    pub column: Column,
    /// The row that is stable in `column` and entered in the end.
    pub to: Row,
}

/// An open question: an input change that the discipline allows in a reachable stable state, whose cell is unspecified.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Question {
    /// The stable total state in which the inputs may change.
    pub from: TotalState,
    /// The column whose cell in `from.row` is open.
    pub column: Column,
    /// Fewest input changes from the initial total state to `from`.
    pub distance: usize,
}

/// A checked specification. Every later stage works on `table`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Spec {
    /// Signal names.
    pub signals: Signals,
    /// How the inputs may change.
    pub discipline: Discipline,
    /// The table as written (no inner cells, chains and open outputs as the user left them).
    pub given: FlowTable,
    /// The table that is derived from: in normal mode, chains folded, inner cells filled, held outputs filled in.
    pub table: FlowTable,
    /// The total state after power-up; stable in `table`.
    pub initial: TotalState,
    /// Every move that can happen, in the order of a breadth-first walk from `initial`; a change that the table leaves
    /// unspecified is no move.
    pub moves: Vec<Move>,
    /// Reachable stable total states with their distance in input changes, in breadth-first order.
    pub reachable: Vec<(TotalState, usize)>,
    /// Open questions, soonest met first.
    pub questions: Vec<Question>,
}

/// What the checks made of a project.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Checked {
    /// What is wrong or open, errors first.
    pub findings: Vec<Finding>,
    /// The table to derive from; there exactly if no finding is an error.
    pub spec: Option<Spec>,
}
