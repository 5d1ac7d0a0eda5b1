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
    /// Pairs (lower, higher) that must be merged with this one, each with the first column, in text order, that asks
    /// for it; in order, without repeats. Left empty for a conflict.
    pub implies: Vec<((Row, Row), Column)>,
    /// What was found.
    pub verdict: Verdict,
}

/// The implication table: all pairs `(a, b)` with `a < b`, in the order of `b`, then `a`.
///
/// A table of 1,000 rows has half a million squares, and what they imply can be a hundred times as much. The table
/// therefore keeps the verdicts and a copy of the next rows; what a pair implies is looked up when it is asked for.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct PairTable {
    /// Number of rows.
    pub rows: usize,
    /// Number of rounds in which something was struck.
    pub passes: usize,
    inputs: usize,
    next: Vec<Option<Row>>,
    verdicts: Vec<PackedVerdict>,
}

/// A verdict in eight bytes: half a million of them should stay small. Zero is "compatible".
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub(super) struct PackedVerdict(u64);

impl PackedVerdict {
    const CONFLICT: u64 = 1;
    const STRUCK: u64 = 2;

    /// Packs a verdict; a pass beyond 2^30 cannot occur, as there are fewer pairs than that.
    pub(super) fn pack(verdict: Verdict) -> Self {
        PackedVerdict(match verdict {
            Verdict::Compatible => 0,
            Verdict::Conflict(Conflict { column, output }) => {
                let column = column.map_or(0, |c| u64::from(c.0) + 1);
                Self::CONFLICT | column << 2 | (output as u64) << 32
            }
            Verdict::Struck { by, pass } => {
                Self::STRUCK | (pass as u64) << 2 | u64::from(by.0.0) << 32 | u64::from(by.1.0) << 48
            }
        })
    }

    fn unpack(self) -> Verdict {
        let middle = self.0 >> 2 & 0x3fff_ffff;
        match self.0 & 3 {
            Self::CONFLICT => Verdict::Conflict(Conflict {
                column: middle.checked_sub(1).map(|c| Column(c as u16)),
                output: (self.0 >> 32) as usize,
            }),
            Self::STRUCK => Verdict::Struck {
                by: (Row((self.0 >> 32) as u16), Row((self.0 >> 48) as u16)),
                pass: middle as usize,
            },
            _ => Verdict::Compatible,
        }
    }
}

impl PairTable {
    /// The table of `rows` rows with the given verdicts, one for each pair in the order of [`PairTable::index`], for
    /// a flow table with these next rows.
    pub(super) fn new(table: &FlowTable, verdicts: Vec<PackedVerdict>, passes: usize) -> Self {
        debug_assert_eq!(verdicts.len(), table.len() * table.len().saturating_sub(1) / 2);
        let next = table.rows().flat_map(|r| table.row_cells(r).iter().map(|cell| cell.next)).collect();
        PairTable { rows: table.len(), passes, inputs: table.inputs, next, verdicts }
    }

    /// Where the square of two different rows stands, in any order of the two.
    pub fn index(a: Row, b: Row) -> usize {
        let (lo, hi) = (a.min(b).at(), a.max(b).at());
        debug_assert!(lo != hi);
        hi * (hi - 1) / 2 + lo
    }

    /// What was found for two different rows, in any order.
    pub fn verdict(&self, a: Row, b: Row) -> Verdict {
        self.verdicts[Self::index(a, b)].unpack()
    }

    /// Whether two rows are compatible. A row is compatible with itself.
    pub fn compatible(&self, a: Row, b: Row) -> bool {
        a == b || self.verdicts[Self::index(a, b)] == PackedVerdict::default()
    }

    /// Pairs (lower, higher) that must be merged with two different rows, each with the first column, in text order,
    /// that asks for it; in order, without repeats. Empty for a conflict.
    pub fn implies(&self, a: Row, b: Row) -> Vec<((Row, Row), Column)> {
        if matches!(self.verdict(a, b), Verdict::Conflict(_)) {
            return Vec::new();
        }
        let own = (a.min(b), a.max(b));
        let cells = |r: Row| &self.next[r.at() << self.inputs..(r.at() + 1) << self.inputs];
        let (of_a, of_b) = (cells(a), cells(b));
        let mut found: Vec<((Row, Row), Column)> = columns_in_text_order(self.inputs)
            .filter_map(|c| {
                let (p, q) = (of_a[c.at()]?, of_b[c.at()]?);
                let pair = (p.min(q), p.max(q));
                (p != q && pair != own).then_some((pair, c))
            })
            .collect();
        // The sort is stable: of one pair's columns the first in text order stays in front and survives.
        found.sort_by_key(|&(pair, _)| pair);
        found.dedup_by_key(|&mut (pair, _)| pair);
        found
    }

    /// The square of two different rows, in any order.
    pub fn get(&self, a: Row, b: Row) -> Pair {
        let (a, b) = (a.min(b), a.max(b));
        Pair { a, b, implies: self.implies(a, b), verdict: self.verdict(a, b) }
    }

    /// All squares, in the order of the higher row, then the lower.
    pub fn iter(&self) -> impl Iterator<Item = Pair> + '_ {
        (1..self.rows).flat_map(move |b| (0..b).map(move |a| self.get(Row::new(a), Row::new(b))))
    }
}

/// All columns in the order of their bit strings, in which the first input counts most.
pub fn columns_in_text_order(inputs: usize) -> impl Iterator<Item = Column> {
    (0..1u32 << inputs).map(move |rank| Column((rank.reverse_bits() >> 1 >> (31 - inputs)) as u16))
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
    /// The chosen closed cover, in row order of its sets (sets compared as ascending lists). A cover by hand stays in
    /// the user's order.
    pub cover: Vec<RowSet>,
    /// Further smallest covers, as far as asked for.
    pub further: Vec<Vec<RowSet>>,
    /// What is wrong with the cover; only a cover by hand can have faults, and then `reduced` is `None`.
    pub faults: Vec<CoverFault>,
    /// Rows of which no two fit in one set, so that no cover can be smaller than this. They are pairwise incompatible;
    /// with bursts, two compatible rows also count where no set may hold them both because it would leave a burst.
    pub clique: Vec<Row>,
    /// Proved lower bound on the number of sets.
    pub lower_bound: usize,
    /// Whether the number of sets is smallest. Also true for a cover by hand that happens to be.
    pub bound: Bound,
    /// Whether the cover is also proved best among the smallest: fewest members in total, then first in row order.
    /// Also true for a cover by hand, for which nothing is chosen.
    pub tie_proved: bool,
    /// The reduced table.
    pub reduced: Option<Reduced>,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn verdicts_survive_packing() {
        let column = |c| Some(Column(c));
        let mut verdicts = vec![Verdict::Compatible];
        for column in [None, column(0), column(1023), column(u16::MAX)] {
            verdicts.extend([0, 31].map(|output| Verdict::Conflict(Conflict { column, output })));
        }
        for by in [(Row(0), Row(1)), (Row(1022), Row(1023)), (Row(0), Row(u16::MAX))] {
            verdicts.extend([1, 523_776, (1 << 30) - 1].map(|pass| Verdict::Struck { by, pass }));
        }
        for verdict in verdicts {
            assert_eq!(PackedVerdict::pack(verdict).unpack(), verdict);
        }
    }

    #[test]
    fn columns_come_in_the_order_of_their_bit_strings() {
        for inputs in 0..5 {
            let texts: Vec<String> = columns_in_text_order(inputs).map(|c| c.text(inputs)).collect();
            assert_eq!(texts.len(), 1 << inputs);
            assert!(texts.is_sorted());
        }
    }
}
