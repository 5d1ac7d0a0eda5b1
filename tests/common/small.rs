//! Every normal-mode flow table of a small size, by number.

use std::collections::BTreeMap;

use stillgate::project::{Discipline, Project, RowEntry};

use crate::common::random::{bits, cell, name, project};

/// A size at which all tables are counted.
#[derive(Debug, Clone, Copy)]
pub struct Size {
    /// Rows.
    pub rows: usize,
    /// Inputs.
    pub inputs: usize,
    /// How the inputs change.
    pub discipline: Discipline,
}

impl Size {
    /// Number of tables, those that are not in normal mode counted too.
    pub fn count(self) -> u64 {
        (0..self.cells()).fold(1, |n, _| n * self.kinds())
    }

    /// Kinds of cells: open, or a next row with one output of 0, 1, -.
    fn kinds(self) -> u64 {
        1 + 3 * self.rows as u64
    }

    fn cells(self) -> usize {
        self.rows << self.inputs
    }

    /// Table number `number` with one output, or `None` if it is not one of the family: each row has a stable cell, each
    /// stable cell a given output, and each unstable cell leads to a row that is stable in its column.
    pub fn table(self, number: u64) -> Option<Project> {
        let columns = 1usize << self.inputs;
        let mut rest = number;
        let mut grid: Vec<Option<(usize, char)>> = Vec::with_capacity(self.cells());
        for _ in 0..self.cells() {
            let kind = (rest % self.kinds()) as usize;
            rest /= self.kinds();
            grid.push(kind.checked_sub(1).map(|k| (k / 3, ['0', '1', '-'][k % 3])));
        }
        let at = |row: usize, column: usize| grid[row * columns + column];
        let stable = |row: usize, column: usize| at(row, column).is_some_and(|(next, _)| next == row);
        for row in 0..self.rows {
            let first = (0..columns).find(|&c| stable(row, c));
            first?;
            for column in 0..columns {
                if let Some((next, output)) = at(row, column)
                    && (!stable(next, column) || next == row && output == '-')
                {
                    return None;
                }
            }
        }
        let first = (0..columns).find(|&c| stable(0, c))? as u32;
        let rows = (0..self.rows)
            .map(|row| {
                let cells: BTreeMap<_, _> = (0..columns)
                    .filter_map(|c| {
                        let (next, output) = at(row, c)?;
                        Some((bits(c as u32, self.inputs), cell(&name(next), output)))
                    })
                    .collect();
                RowEntry { name: name(row), cells }
            })
            .collect();
        Some(project(format!("Small table {number}"), self.inputs, 1, self.discipline, first, rows))
    }
}
