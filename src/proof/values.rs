//! Plain values of the proof.

use crate::base::{Code, Column, Row};

/// How a move of the encoded table can go wrong.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum RaceKind {
    /// It can settle in a code of another row.
    Critical,
    /// It can go round for ever.
    Oscillation,
    /// It can reach a code that the encoded table leaves unspecified in this column.
    Stray,
}

/// A race that can be lost, with the order of changes that loses it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Race {
    /// The row that is left.
    pub from: Row,
    /// Column in which it happens.
    pub column: Column,
    /// The row that should be entered.
    pub to: Row,
    /// What can happen.
    pub kind: RaceKind,
    /// Codes passed on the losing way, start first.
    pub path: Vec<Code>,
}

/// What the race check found.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Races {
    /// Races that can be lost.
    pub critical: Vec<Race>,
    /// Starts of moves with a race that is won in every order.
    pub noncritical: usize,
    /// Starts of moves that pass more than one step (cycles through spare or shared rows), with the number of steps.
    pub cycles: Vec<(Row, Column, usize)>,
    /// Steps of the longest way found.
    pub longest: usize,
}

/// A place where functions and table disagree.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Mismatch {
    /// What was compared: "tables", "functions".
    pub stage: &'static str,
    /// What was expected, what was found, and where, with the sequence that leads there.
    pub text: String,
}

/// A glitch that a function can make.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct HazardFound {
    /// Name of the function.
    pub function: String,
    /// Merged row in which the transition starts.
    pub row: Row,
    /// Point where it starts, as text over the variables.
    pub from: String,
    /// Point where it ends.
    pub to: String,
    /// `static-1`, `static-0`, `dynamic`, `function`, `both-on` (set and reset together), `pulse`.
    pub kind: &'static str,
    /// In words.
    pub text: String,
}

/// A total state from which the circuit does not come to rest in a code that is in use.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Trap {
    /// The code at power-up.
    pub code: Code,
    /// The inputs.
    pub column: Column,
    /// Whether it goes round for ever (otherwise it rests in a code that no row uses).
    pub oscillates: bool,
    /// Codes it rests in or goes round through.
    pub codes: Vec<Code>,
}

/// How many mismatches, hazards and traps a [`Proof`] lists of each; the rest is counted.
pub const LISTED: usize = 100;

/// What the proof found.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Proof {
    /// Disagreements between primitive table, reduced table and functions: the first [`LISTED`].
    pub mismatches: Vec<Mismatch>,
    /// Disagreements beyond those listed.
    pub more_mismatches: usize,
    /// Moves of the reduced table (each start code counted) that were followed.
    pub moves_checked: usize,
    /// Glitches: the first [`LISTED`].
    pub hazards: Vec<HazardFound>,
    /// Glitches beyond those listed.
    pub more_hazards: usize,
    /// State variables whose feedback must be slower than the direct logic, by number from 0.
    pub slow: Vec<usize>,
    /// Where power-up can trap the controller: the first [`LISTED`] by column and code. Not a failure of the proof: a
    /// reset mends it.
    pub traps: Vec<Trap>,
    /// Traps beyond those listed.
    pub more_traps: usize,
    /// Total states tried at power-up.
    pub power_up_states: usize,
    /// Whether every total state was tried with every order of changes; otherwise bits changed one at a time or all
    /// together, and beyond 2^20 total states only from codes near those in use.
    pub power_up_exact: bool,
}

impl Proof {
    /// Whether the functions do what the tables say.
    pub fn conforms(&self) -> bool {
        self.mismatches.is_empty()
    }

    /// Whether everything that is a failure if it fails has passed.
    pub fn holds(&self) -> bool {
        self.mismatches.is_empty() && self.hazards.is_empty()
    }
}
