//! Plain values of the codes. No algorithm lives here.

use std::collections::BTreeMap;

use crate::base::{Bound, Code, Column, Row};
use crate::project::choices::Method;

/// How the bits of one step of a way change.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Step {
    /// One bit in each step.
    OneBit,
    /// All bits of the way change at once, in any order: the way has exactly two codes.
    Together,
}

/// How the circuit goes from one row to another in a column, for one start code.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Way {
    /// The row that is left.
    pub from: Row,
    /// The column in which it happens.
    pub column: Column,
    /// The row that is entered.
    pub to: Row,
    /// Start code, codes passed, final code. `OneBit`: neighbours differ in one bit. `Together`: the two ends.
    pub path: Vec<Code>,
    /// How the steps go.
    pub step: Step,
}

/// A spare code that ways pass through.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Spare {
    /// P1, P2, ..
    pub name: String,
    /// The code.
    pub code: Code,
}

/// What a code does in a column.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Role {
    /// The code of a row whose cell is specified in the reduced table.
    Row(Row),
    /// The code of a row whose cell is unspecified in the reduced table, used as a step on a way to a row.
    Lent(Row),
    /// A spare code on the way to a row.
    Spare,
    /// A code inside the subcube of a move that changes several bits at once.
    OnTheWay,
}

/// A specified entry of the encoded table.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Entry {
    /// The next code.
    pub next: Code,
    /// The row in which every way through here ends.
    pub goal: Row,
    /// What the code does here.
    pub role: Role,
}

/// The encoded table: for each code in use and each column an entry, or unspecified.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Encoded {
    /// Number of state variables.
    pub bits: usize,
    /// Number of inputs.
    pub inputs: usize,
    /// Specified entries; everything else is unspecified.
    pub entries: BTreeMap<(Code, Column), Entry>,
}

impl Encoded {
    /// The entry of a code in a column.
    pub fn get(&self, code: Code, column: Column) -> Option<Entry> {
        self.entries.get(&(code, column)).copied()
    }
}

/// The result of the state assignment.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Coded {
    /// The method that made it.
    pub method: Method,
    /// Number of state variables.
    pub bits: usize,
    /// The codes of each merged row, the one used at power-up first for the initial row. One code a row but for
    /// multiple row and codes by hand.
    pub codes: Vec<Vec<Code>>,
    /// Spare codes in use, in the order of their names.
    pub spare: Vec<Spare>,
    /// A way for each unstable specified cell of the reduced table and each code of its row, in order of row, column,
    /// code.
    pub ways: Vec<Way>,
    /// The encoded table.
    pub encoded: Encoded,
    /// Code at power-up.
    pub initial: Code,
    /// Whether fewer bits are possible with this method. One hot and multiple row claim nothing: they are `Proved` only
    /// in the sense of their construction.
    pub bound: Bound,
    /// Steps of the longest way (0 if there is no way).
    pub longest_path: usize,
    /// With this number of bits: whether the number of spare codes, and with it the longest way, is smallest. Claimed by
    /// adjacency and shared row only; elsewhere it is `Proved` in the sense of the construction.
    pub tidy: Bound,
}

impl Coded {
    /// The row that owns a code, if any.
    pub fn row_of(&self, code: Code) -> Option<Row> {
        self.codes.iter().position(|codes| codes.contains(&code)).map(Row::new)
    }

    /// The way from a code of `from` in `column`, if the cell is unstable.
    pub fn way(&self, from: Row, code: Code, column: Column) -> Option<&Way> {
        self.ways.iter().find(|w| w.from == from && w.column == column && w.path[0] == code)
    }
}
