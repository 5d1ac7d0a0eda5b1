//! Rows must rest somewhere, and every unstable cell must lead to a rest: normal mode.
//!
//! In each column the next rows form a graph in which every row has at most one way out. Following it from every
//! unstable cell ends in a stable cell (then the chain is folded), in a cycle, or in a row without a cell. Each row is
//! followed once a column. Exact; `O(rows x columns)`.

use crate::base::{Column, Row};
use crate::spec::names::shown;
use crate::spec::report::{Report, Spot};
use crate::spec::values::FlowTable;

/// Every row needs a stable cell.
pub fn rests(table: &FlowTable, report: &mut Report) {
    for row in table.rows() {
        if !table.columns().any(|column| table.stable(row, column)) {
            let name = table.name(row);
            report.error("no-stable-cell", Spot::row(name), || {
                format!(
                    "Row {} has no stable cell, so the controller can never rest in it. Let one of its cells lead to \
                     the row itself, or remove the row.",
                    shown(name)
                )
            });
        }
    }
}

/// What is known of a row in the column at hand.
#[derive(Clone, Copy, PartialEq)]
enum Followed {
    Not,
    /// On the path that is being followed.
    Now,
    /// Where its chain ends; `None` after an error.
    To(Option<Row>),
}

/// Replaces the next row of every unstable cell by the row in which its chain comes to rest.
pub fn fold_chains(table: &mut FlowTable, report: &mut Report) {
    let mut followed = vec![Followed::Not; table.len()];
    let mut path = Vec::new();
    for column in table.columns() {
        followed.fill(Followed::Not);
        for row in table.rows() {
            if table.next(row, column).is_some_and(|next| next != row) {
                follow(table, row, column, &mut followed, &mut path, report);
            }
        }
        for row in table.rows() {
            if let (Some(next), Followed::To(Some(end))) = (table.next(row, column), followed[row.at()])
                && next != end
            {
                warn_of_chain(table, row, next, end, column, report);
                table.cell_mut(row, column).next = Some(end);
            }
        }
    }
}

/// Follows the chain that starts in `row` and notes the end for every row on it.
fn follow(
    table: &FlowTable,
    row: Row,
    column: Column,
    followed: &mut [Followed],
    path: &mut Vec<Row>,
    report: &mut Report,
) {
    path.clear();
    let mut at = row;
    let end = loop {
        match followed[at.at()] {
            Followed::To(end) => break end,
            Followed::Now => {
                let first = path.iter().position(|&r| r == at).unwrap_or(0);
                report_cycle(table, &path[first..], column, report);
                break None;
            }
            Followed::Not => {}
        }
        match table.next(at, column) {
            Some(next) if next == at => break Some(at),
            Some(next) => {
                followed[at.at()] = Followed::Now;
                path.push(at);
                at = next;
            }
            None => {
                report_dead_end(table, path.last().copied().unwrap_or(row), at, column, report);
                break None;
            }
        }
    };
    for row in path.iter() {
        followed[row.at()] = Followed::To(end);
    }
}

fn report_cycle(table: &FlowTable, cycle: &[Row], column: Column, report: &mut Report) {
    let first = table.name(cycle[0]);
    report.error("oscillation", Spot::cell(first, column, table.inputs), || {
        // A cycle through a thousand rows is named by its beginning.
        let shown_rows: Vec<&str> = cycle.iter().take(12).map(|&row| table.name(row)).collect();
        let more = if cycle.len() > shown_rows.len() { " -> .." } else { "" };
        let round: Vec<String> = shown_rows.into_iter().map(shown).collect();
        format!(
            "With inputs {} the controller never rests: {}{more} -> {}. Make one of these cells stable.",
            table.column_text(column),
            round.join(" -> "),
            shown(first)
        )
    });
}

fn report_dead_end(table: &FlowTable, from: Row, to: Row, column: Column, report: &mut Report) {
    let (name, next) = (table.name(from), shown(table.name(to)));
    report.error("dead-end", Spot::cell(name, column, table.inputs), || {
        format!(
            "Row {}, column {} leads to row {next}, which has no cell in that column to rest in. Make row {next} stable \
             there, or lead to another row.",
            shown(name),
            table.column_text(column)
        )
    });
}

fn warn_of_chain(table: &FlowTable, row: Row, next: Row, end: Row, column: Column, report: &mut Report) {
    let name = table.name(row);
    report.warning("chain-folded", Spot::cell(name, column, table.inputs), || {
        format!(
            "Row {}, column {} leads on through {} to row {}. It is taken to lead there at once; outputs of the cells \
             in between are not produced.",
            shown(name),
            table.column_text(column),
            shown(table.name(next)),
            shown(table.name(end))
        )
    });
}
