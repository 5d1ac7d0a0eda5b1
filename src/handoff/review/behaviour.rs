//! Section Behaviour: signals, discipline, and the primitive flow table that everything is derived from.

use crate::base::{Column, Row};
use crate::handoff::plain::{align, blocks, counted};
use crate::handoff::review::Page;
use crate::project::Project;
use crate::project::choices::Discipline;
use crate::spec::values::{FlowTable, Spec};

pub fn write(page: &mut Page, project: &Project, spec: &Spec) {
    page.section("Behaviour");
    let table = &spec.table;
    let signals = |names: &[String]| if names.is_empty() { "none".to_owned() } else { names.join(", ") };
    let start =
        format!("row {}, column {}", table.name(spec.initial.row), table.column_text(spec.initial.column));
    let facts = [
        ("Inputs", signals(&spec.signals.inputs)),
        ("Outputs", signals(&spec.signals.outputs)),
        (
            "Discipline",
            match spec.discipline {
                Discipline::Single => "single: one input changes at a time".to_owned(),
                Discipline::Burst => "burst: several inputs may change, in any order".to_owned(),
            },
        ),
        ("Start", start),
    ];
    page.lines(align(&facts.map(|(name, text)| vec![name.to_owned(), text]), "", &[]));
    page.gap();
    page.text(&format!(
        "Primitive flow table: {}, {}, {}. A cell holds the next row and the outputs; (a) is stable, . is unspecified.",
        counted(table.len(), "row", "rows"),
        counted(spec.moves.len(), "move that can happen", "moves that can happen"),
        counted(spec.questions.len(), "open question", "open questions"),
    ));
    let columns = used_columns(table, project.layout.gray);
    let changed = table.rows().any(|r| columns.iter().any(|&c| differs(spec, r, c)));
    if changed {
        page.text("* Not as written: a chain of unstable cells is folded, or an output or a cell inside a burst is filled in.");
    }
    if columns.len() < 1 << table.inputs {
        page.text(&format!(
            "{} with no specified cell left out.",
            counted((1 << table.inputs) - columns.len(), "column", "columns")
        ));
    }
    page.gap();
    page.lines(table_lines(table, &columns, |r, c| if differs(spec, r, c) { "*" } else { "" }));
}

fn differs(spec: &Spec, row: Row, column: Column) -> bool {
    let (given, used) = (spec.given.cell(row, column), spec.table.cell(row, column));
    given.next != used.next || given.outputs != used.outputs
}

/// Columns in which some cell says something: by bit string, or in Gray order (neighbours differ in one input).
pub fn used_columns(table: &FlowTable, gray: bool) -> Vec<Column> {
    let used = |c: &Column| {
        let cells = table.rows().map(|r| table.cell(r, *c));
        cells.into_iter().any(|cell| cell.next.is_some() || cell.outputs.care != 0)
    };
    let mut columns: Vec<Column> = table.columns().filter(used).collect();
    if gray {
        columns.sort_by_key(|c| gray_rank(*c, table.inputs));
    } else {
        columns.sort_by_key(|c| table.column_text(*c));
    }
    columns
}

/// Position of a column in the reflected Gray sequence whose first input changes least often.
fn gray_rank(column: Column, inputs: usize) -> u32 {
    (0..inputs)
        .fold((0, 0), |(rank, parity), i| {
            let bit = u32::from(column.0 >> i & 1) ^ parity;
            (rank << 1 | bit, bit)
        })
        .0
}

/// A flow table in aligned columns; `mark` goes behind a cell.
pub fn table_lines(
    table: &FlowTable,
    columns: &[Column],
    mark: impl Fn(Row, Column) -> &'static str,
) -> Vec<String> {
    let heads = columns.iter().map(|&c| format!(" {}", table.column_text(c)));
    let heads: Vec<String> = std::iter::once("row".to_owned()).chain(heads).collect();
    let rows: Vec<Vec<String>> = table
        .rows()
        .map(|r| {
            let cells = columns.iter().map(|&c| cell_text(table, r, c) + mark(r, c));
            std::iter::once(table.name(r).to_owned()).chain(cells).collect()
        })
        .collect();
    blocks(&heads, &rows, "  ")
}

/// The same for a table whose outputs belong to rows: they stand in a column of their own.
pub fn table_lines_per_row(table: &FlowTable, columns: &[Column]) -> Vec<String> {
    let heads = columns.iter().map(|&c| format!(" {}", table.column_text(c)));
    let heads: Vec<String> = ["row".to_owned(), "outputs".to_owned()].into_iter().chain(heads).collect();
    let rows: Vec<Vec<String>> = table
        .rows()
        .map(|r| {
            let word =
                columns.first().map_or(String::new(), |&c| table.cell(r, c).outputs.text(table.outputs));
            let cells = columns.iter().map(|&c| match table.next(r, c) {
                Some(next) if next == r => format!("({})", table.name(next)),
                Some(next) => format!(" {}", table.name(next)),
                None => " .".to_owned(),
            });
            [table.name(r).to_owned(), word].into_iter().chain(cells).collect()
        })
        .collect();
    blocks(&heads, &rows, "  ")
}

/// `(a) 01` stable, ` b  -1` unstable, ` -  0-` outputs alone, ` .` unspecified.
fn cell_text(table: &FlowTable, row: Row, column: Column) -> String {
    let cell = table.cell(row, column);
    let outputs = cell.outputs.text(table.outputs);
    match cell.next {
        Some(next) if next == row => format!("({}) {outputs}", table.name(next)),
        Some(next) => format!(" {}  {outputs}", table.name(next)),
        None if cell.outputs.care != 0 => format!(" -  {outputs}"),
        None => " .".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn gray_order_changes_one_input_at_a_time() {
        let mut columns: Vec<Column> = (0..16).map(Column).collect();
        columns.sort_by_key(|c| gray_rank(*c, 4));
        assert!(columns.windows(2).all(|w| w[0].distance(w[1]) == 1));
        // The last input is the one that changes first.
        assert_eq!(columns[1].text(4), "0001");
    }
}
