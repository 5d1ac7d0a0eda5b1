//! What must be joined to what: the demands that a reduced table makes on codes whose bits change one at a time.
//!
//! A *point* is a code in use: one for each code of a row, then the spare codes. In a column, the points of the rows
//! that lead to one stable row form its *basin*; a point of a row without a specified cell and a spare code are *free*
//! and can serve any one basin. Codes are good if in every column each basin, with the free points that it takes, holds
//! a way from each of its points to the stable one.
//!
//! Two rules forbid some ways. Outputs per cell: a cell that is not stable and whose given output contradicts the
//! destination's changes late, and nothing else may pass there (the point is *barred*). Outputs per row: outputs belong to
//! the point whatever the column, so on the way to a row an output that has its final value must keep it.
//!
//! Cost: linear in rows times columns.

use fixedbitset::FixedBitSet;

use crate::base::{Column, Outputs, Row};
use crate::merge::values::Reduced;
use crate::project::choices::OutputStyle;

/// The part that a point plays in a column.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Part {
    /// In the basin with this index in [`Field::basins`].
    Basin(u16),
    /// At the disposal of any one basin.
    Free,
    /// Stable, with nothing that leads to it: taken.
    Taken,
}

/// The points that lead to one stable row in one column.
#[derive(Debug, Clone)]
pub(super) struct Basin {
    /// The stable row.
    pub goal: Row,
    /// Points of the stable row.
    pub sinks: Vec<u16>,
    /// Points that must reach a sink; never empty.
    pub sources: Vec<u16>,
    /// Points that no other move may pass through on the way to `goal`.
    pub barred: FixedBitSet,
    /// The outputs of `goal`, where outputs belong to rows; open otherwise.
    pub aim: Outputs,
}

/// The demands of one column that has an unstable cell.
#[derive(Debug, Clone)]
pub(super) struct Field {
    /// The column.
    pub column: Column,
    /// The part of each point.
    pub parts: Vec<Part>,
    /// Basins in which something moves, by row order of their goals.
    pub basins: Vec<Basin>,
    /// Whether some point is free.
    pub any_free: bool,
}

/// All demands of a table on a set of points.
#[derive(Debug, Clone)]
pub(super) struct Net {
    /// The row of each point, `None` for a spare code.
    pub owner: Vec<Option<Row>>,
    /// Columns in which something moves, in order.
    pub fields: Vec<Field>,
    /// The outputs of each point where outputs belong to rows; open otherwise.
    pub values: Vec<Outputs>,
    /// The outputs that a step has to respect: all of them where outputs belong to rows, else none.
    pub watched: u32,
}

impl Net {
    /// One point for each row, followed by `spare` spare codes.
    pub fn of(reduced: &Reduced, spare: usize) -> Net {
        let rows = reduced.table.rows().map(Some);
        Net::over(reduced, rows.chain(std::iter::repeat_n(None, spare)).collect())
    }

    /// Points given by their rows; every row has at least one.
    pub fn over(reduced: &Reduced, owner: Vec<Option<Row>>) -> Net {
        let table = &reduced.table;
        let per_row = reduced.outputs == OutputStyle::PerRow;
        let values: Vec<Outputs> = owner
            .iter()
            .map(|owner| match owner {
                Some(row) if per_row => row_outputs(reduced, *row),
                _ => Outputs::default(),
            })
            .collect();
        let watched = if per_row { mask(table.outputs) } else { 0 };
        let fields = table.columns().filter_map(|column| field(reduced, &owner, column)).collect();
        Net { owner, fields, values, watched }
    }

    /// Number of points.
    pub fn len(&self) -> usize {
        self.owner.len()
    }

    /// Outputs of a point that may still be chosen, as a mask.
    pub fn open(&self, point: usize) -> u32 {
        self.watched & !self.values[point].care
    }
}

impl Basin {
    /// The outputs with their final value at a point whose outputs are `word`.
    fn settled(&self, word: u32) -> u32 {
        self.aim.care & !(word ^ self.aim.ones)
    }

    /// The outputs, as a mask, that forbid a step between points with the outputs `from` and `to`: they would leave their
    /// final value.
    pub fn spoilt(&self, from: u32, to: u32) -> u32 {
        self.settled(from) & !self.settled(to)
    }
}

/// The outputs of a row where outputs belong to rows.
pub(super) fn row_outputs(reduced: &Reduced, row: Row) -> Outputs {
    reduced.table.row_cells(row).iter().fold(Outputs::default(), |word, cell| word.or(cell.outputs))
}

/// Whether a cell that is not stable has a given output that contradicts the stable cell of `goal`: a late change.
pub(super) fn late(reduced: &Reduced, row: Row, goal: Row, column: Column) -> bool {
    let table = &reduced.table;
    reduced.outputs == OutputStyle::PerCell
        && row != goal
        && table.cell(row, column).outputs.conflicts(table.cell(goal, column).outputs) != 0
}

fn mask(outputs: usize) -> u32 {
    if outputs >= 32 { u32::MAX } else { (1 << outputs) - 1 }
}

fn field(reduced: &Reduced, owner: &[Option<Row>], column: Column) -> Option<Field> {
    let table = &reduced.table;
    let mut index = vec![None; table.len()];
    let mut basins = Vec::new();
    for goal in table.rows() {
        let moves = |row: Row| row != goal && table.next(row, column) == Some(goal);
        if !table.rows().any(moves) {
            continue;
        }
        index[goal.at()] = Some(basins.len() as u16);
        let points = |wanted: &dyn Fn(Row) -> bool| -> Vec<u16> {
            (0..owner.len()).filter(|&p| owner[p].is_some_and(wanted)).map(|p| p as u16).collect()
        };
        let mut barred = FixedBitSet::with_capacity(owner.len());
        for (p, row) in owner.iter().enumerate() {
            barred.set(p, row.is_some_and(|row| late(reduced, row, goal, column)));
        }
        let per_row = reduced.outputs == OutputStyle::PerRow;
        basins.push(Basin {
            goal,
            sinks: points(&|row| row == goal),
            sources: points(&moves),
            barred,
            aim: if per_row { row_outputs(reduced, goal) } else { Outputs::default() },
        });
    }
    if basins.is_empty() {
        return None;
    }
    let part = |row: &Option<Row>| match row.map(|row| table.next(row, column)) {
        None | Some(None) => Part::Free,
        Some(Some(goal)) => index[goal.at()].map_or(Part::Taken, Part::Basin),
    };
    let parts: Vec<Part> = owner.iter().map(part).collect();
    let any_free = parts.contains(&Part::Free);
    Some(Field { column, parts, basins, any_free })
}
