//! Plain values of merging. No algorithm lives here.

use fixedbitset::FixedBitSet;

use crate::base::{Bound, Column, Row, TotalState};
use crate::project::choices::OutputStyle;
use crate::spec::values::{FlowTable, Move};

/// A set of rows of the primitive table.
pub type RowSet = FixedBitSet;

/// The user's choice, in rows.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct MergeChoice {
    /// Outputs per cell or per row.
    pub outputs: OutputStyle,
    /// A cover by hand, sets in the user's order; `None` asks for the smallest.
    pub by_hand: Option<Vec<Vec<Row>>>,
    /// Names for the merged rows, in cover order; missing or empty ones become A, B, ..
    pub names: Vec<String>,
    /// How many smallest covers to list in all (at least 1 is found).
    pub covers: usize,
}

/// Why two rows cannot have the same outputs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Conflict {
    /// The column; `None` where outputs belong to rows.
    pub column: Option<Column>,
    /// The output, by index.
    pub output: usize,
}

/// What the implication table says of a pair.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Verdict {
    /// The rows may be merged, if what the pair implies is merged too.
    Compatible,
    /// Some output is 0 in one row and 1 in the other.
    Conflict(Conflict),
    /// The pair implies an incompatible pair.
    Struck {
        /// The implied pair that fell before.
        by: (Row, Row),
        /// The round in which it fell, counted from 1.
        pass: usize,
    },
}

/// A square of the implication table.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub struct Pair {
    /// The lower row.
    pub a: Row,
    /// The higher row.
    pub b: Row,
    /// Pairs (lower, higher) that must be merged with this one, each with the first column that asks for it; in order,
    /// without repeats. Left empty for a conflict.
    pub implies: Vec<((Row, Row), Column)>,
    /// What was found.
    pub verdict: Verdict,
}

/// The implication table: all pairs `(a, b)` with `a < b`, in the order of `b`, then `a`.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct PairTable {
    /// Number of rows.
    pub rows: usize,
    /// The squares; see [`PairTable::get`].
    pub pairs: Vec<Pair>,
    /// Number of rounds in which something was struck.
    pub passes: usize,
}

impl PairTable {
    /// The square of two different rows, in any order.
    pub fn get(&self, a: Row, b: Row) -> &Pair {
        let (lo, hi) = (a.min(b).at(), a.max(b).at());
        debug_assert!(lo != hi);
        &self.pairs[hi * (hi - 1) / 2 + lo]
    }

    /// Whether two rows are compatible. A row is compatible with itself.
    pub fn compatible(&self, a: Row, b: Row) -> bool {
        a == b || self.get(a, b).verdict == Verdict::Compatible
    }
}

/// What is wrong with a cover by hand.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub enum CoverFault {
    /// No set holds this row.
    Uncovered(Row),
    /// Two rows of a set are not compatible.
    Incompatible {
        /// Index of the set.
        set: usize,
        /// The two rows.
        rows: (Row, Row),
    },
    /// No set holds all next rows that a set has in a column.
    Open {
        /// Index of the set.
        set: usize,
        /// The column.
        column: Column,
        /// The rows that must lie together in one set.
        needs: Vec<Row>,
    },
    /// The column lies inside a burst of a member, but the set does not hold all its own next rows there.
    LeavesBurst {
        /// Index of the set.
        set: usize,
        /// The column.
        column: Column,
        /// The rows that must lie in this very set.
        needs: Vec<Row>,
    },
    /// A set is empty.
    Empty(usize),
}

/// The reduced flow table and what can happen in it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reduced {
    /// The table; row names are the names of the merged rows. In normal mode: every next row is stable in its column.
    pub table: FlowTable,
    /// The primitive rows of each merged row, ascending.
    pub members: Vec<Vec<Row>>,
    /// The merged row and column after power-up.
    pub initial: TotalState,
    /// Every move that can happen, in breadth-first order, without repeats.
    pub moves: Vec<Move>,
    /// Whether outputs belong to rows; then every cell of a row holds the row's outputs.
    pub outputs: OutputStyle,
}

/// The result of merging.
#[derive(Debug, Clone, PartialEq)]
pub struct Merged {
    /// The implication table.
    pub pairs: PairTable,
    /// All maximal compatibles, by their lists of rows in ascending order. Empty if there are more than can be listed;
    /// see `maximal_complete`.
    pub maximal: Vec<RowSet>,
    /// Whether `maximal` lists all of them.
    pub maximal_complete: bool,
    /// For each maximal compatible, the sets of rows (two or more, not inside the compatible itself, none inside
    /// another) that closure asks to lie together.
    pub class_sets: Vec<Vec<RowSet>>,
    /// The chosen closed cover, in row order of its sets.
    pub cover: Vec<RowSet>,
    /// Further smallest covers, as far as asked for.
    pub further: Vec<Vec<RowSet>>,
    /// What is wrong with the cover; only a cover by hand can have faults, and then `reduced` is `None`.
    pub faults: Vec<CoverFault>,
    /// Rows that are pairwise incompatible: no cover can be smaller than this.
    pub clique: Vec<Row>,
    /// Proved lower bound on the number of sets.
    pub lower_bound: usize,
    /// Whether the number of sets is smallest. Also true for a cover by hand that happens to be.
    pub bound: Bound,
    /// The reduced table.
    pub reduced: Option<Reduced>,
}
