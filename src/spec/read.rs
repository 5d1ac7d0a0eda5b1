//! From names and bit strings to a dense table, cell by cell. Exact; linear in the cells.

use std::collections::HashMap;

use crate::base::{Column, Outputs, Row, TotalState};
use crate::project::{CellEntry, Project, limits};
use crate::spec::names::{check_rows, shown};
use crate::spec::report::{Report, Spot};
use crate::spec::values::{Cell, FlowTable};

/// The table as it was written.
pub struct Drawn<'a> {
    /// Cells as given; nothing folded or filled in.
    pub given: FlowTable,
    /// For each cell, rows first: it was written down with everything open, as the promise that it is never needed.
    pub answered: Vec<bool>,
    rows: HashMap<&'a str, Row>,
}

impl Drawn<'_> {
    /// The row of that name.
    pub fn row(&self, name: &str) -> Option<Row> {
        self.rows.get(name).copied()
    }
}

/// Reads rows and cells. `None` if there is nothing to read or more than the program can hold.
pub fn table<'a>(project: &'a Project, report: &mut Report) -> Option<Drawn<'a>> {
    let (inputs, outputs) = (project.inputs.len(), project.outputs.len());
    if project.rows.is_empty() {
        report.error("no-rows", Spot::NOWHERE, || {
            "The flow table has no row. Add a row with a stable cell for every internal state.".into()
        });
    }
    if project.rows.len() > limits::ROWS {
        report.error("limit-rows", Spot::NOWHERE, || {
            let (rows, most) = (project.rows.len(), limits::ROWS);
            format!("The flow table has {rows} rows; at most {most} are possible. Split the controller.")
        });
    }
    let possible = 1..=limits::INPUTS;
    if !possible.contains(&inputs) || outputs > limits::OUTPUTS {
        return None;
    }
    if !(1..=limits::ROWS).contains(&project.rows.len()) {
        return None;
    }
    check_rows(project, report);
    let names: Vec<String> = project.rows.iter().map(|row| row.name.clone()).collect();
    let mut given = FlowTable::new(inputs, outputs, names);
    let mut answered = vec![false; project.rows.len() << inputs];
    let mut rows = HashMap::with_capacity(project.rows.len());
    for (i, entry) in project.rows.iter().enumerate() {
        rows.entry(entry.name.as_str()).or_insert(Row::new(i));
    }
    for (row, entry) in given.rows().zip(&project.rows) {
        for (written, cell) in &entry.cells {
            let spot = Spot::written(&entry.name, written);
            let Some(column) = Column::parse(written, inputs) else {
                report.error("bad-column", spot, || bad_column(&entry.name, written, inputs));
                continue;
            };
            let outputs = read_outputs(project, cell, &entry.name, spot, report);
            let next = match cell.next.as_str() {
                "-" => None,
                name if name == entry.name => Some(row),
                name => rows.get(name).copied().or_else(|| {
                    report.error("unknown-next-row", spot, || {
                        let (row, next) = (shown(&entry.name), shown(name));
                        let mend = suggestion(project, name);
                        format!("Row {row}, column {written}: the next row {next} does not exist. {mend}")
                    });
                    None
                }),
            };
            *given.cell_mut(row, column) = Cell { next, outputs, inner: false };
            answered[(row.at() << inputs) + column.at()] = cell.next == "-" && outputs.care == 0;
        }
    }
    Some(Drawn { given, answered, rows })
}

/// Reads the total state after power-up; it must be one that the controller rests in.
pub fn initial(project: &Project, drawn: &Drawn<'_>, report: &mut Report) -> Option<TotalState> {
    let Some((name, written)) = &project.initial else {
        report.error("no-initial", Spot::NOWHERE, || {
            "The total state after power-up is not given. Name a row and a column in which it is stable."
                .into()
        });
        return None;
    };
    let row = drawn.row(name);
    if row.is_none() {
        report.error("unknown-initial-row", Spot::NOWHERE, || {
            format!("The initial row {} does not exist. Name one of the table's rows.", shown(name))
        });
    }
    let column = Column::parse(written, project.inputs.len());
    if column.is_none() {
        report.error("bad-initial-column", Spot::NOWHERE, || {
            format!(
                "The initial column {} is not a bit string of {} characters 0 or 1, one for each input.",
                shown(written),
                project.inputs.len()
            )
        });
    }
    let at = TotalState { row: row?, column: column? };
    if !drawn.given.stable(at.row, at.column) {
        report.error("initial-not-stable", Spot::cell(name, at.column, project.inputs.len()), || {
            format!(
                "The controller is to start in row {}, column {written}, but does not rest there. Start in a stable \
                 cell, or make this one stable.",
                shown(name)
            )
        });
        return None;
    }
    Some(at)
}

fn read_outputs(
    project: &Project,
    cell: &CellEntry,
    row: &str,
    spot: Spot<'_>,
    report: &mut Report,
) -> Outputs {
    Outputs::parse(&cell.outputs, project.outputs.len()).unwrap_or_else(|| {
        report.error("bad-outputs", spot, || {
            format!(
                "Row {}: the outputs {} are not one of 0, 1, - for each of the {} outputs.",
                shown(row),
                shown(&cell.outputs),
                project.outputs.len()
            )
        });
        Outputs::default()
    })
}

fn bad_column(row: &str, written: &str, inputs: usize) -> String {
    format!(
        "Row {}: the column {} is not a bit string of {inputs} characters 0 or 1, one for each input in order.",
        shown(row),
        shown(written)
    )
}

/// What to do about an unknown row name. A slip in the case is the likeliest cause.
fn suggestion(project: &Project, name: &str) -> String {
    match project.rows.iter().find(|row| row.name.eq_ignore_ascii_case(name)) {
        Some(row) => format!("Did you mean {}?", shown(&row.name)),
        None => "Add that row, or name one of the table's rows, or - for unspecified.".into(),
    }
}
