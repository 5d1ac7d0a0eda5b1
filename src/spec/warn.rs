//! Warnings about a table without errors, and the open questions put into words.
//!
//! Exact; linear in the cells and moves of the table.

use crate::base::{Column, TotalState};
use crate::project::choices::Discipline;
use crate::spec::names::{listed, outputs_in, shown};
use crate::spec::report::{Report, Spot};
use crate::spec::values::{FlowTable, Question, Spec};
use crate::spec::ways::Ways;

/// Everything in the table that is probably not meant, though it can be derived from.
pub fn warnings(spec: &Spec, ways: &Ways, report: &mut Report) {
    let reached = Reached::new(spec);
    for row in spec.table.rows() {
        if !reached.rows[row.at()] {
            let name = spec.table.name(row);
            report.warning("unreachable-row", Spot::row(name), || {
                format!(
                    "Row {} cannot be reached from the initial total state. Lead to it from some cell, or remove it.",
                    shown(name)
                )
            });
        }
    }
    cells_never_entered(spec, ways, &reached, report);
    open_stable_outputs(spec, ways, report);
    rows_never_left(spec, ways, report);
    pulses(spec, ways, report);
}

/// Puts every open question to the engineer, at the open cell.
pub fn ask(spec: &Spec, report: &mut Report) {
    for question in &spec.questions {
        let name = spec.table.name(question.from.row);
        report.question("open-question", Spot::cell(name, question.column, spec.table.inputs), || {
            asked(spec, question)
        });
    }
}

/// What happens to the inputs between two columns, in words: `low rises and high falls`.
pub fn change(inputs: &[String], from: Column, to: Column) -> String {
    let mut parts = Vec::new();
    for (verbs, way) in [(["rises", "rise"], to.0 & !from.0), (["falls", "fall"], from.0 & !to.0)] {
        let named = inputs.iter().enumerate().filter(|(i, _)| way >> i & 1 == 1);
        let names: Vec<&str> = named.map(|(_, name)| name.as_str()).collect();
        if !names.is_empty() {
            parts.push(format!("{} {}", listed(names.iter().copied()), verbs[usize::from(names.len() > 1)]));
        }
    }
    parts.join(" and ")
}

fn asked(spec: &Spec, question: &Question) -> String {
    let Question { from, column, distance } = *question;
    let after = match distance {
        0 => "right after power-up".into(),
        1 => "after one input change".into(),
        n => format!("after {n} input changes"),
    };
    format!(
        "In row {}, column {} ({after}), what if {}? Column {} is open: say where to go, or stay, or that this never \
         happens.",
        shown(spec.table.name(from.row)),
        spec.table.column_text(from.column),
        change(&spec.signals.inputs, from.column, column),
        spec.table.column_text(column)
    )
}

struct Reached {
    rows: Vec<bool>,
    states: Vec<bool>,
}

impl Reached {
    fn new(spec: &Spec) -> Self {
        let mut rows = vec![false; spec.table.len()];
        let mut states = vec![false; spec.table.len() << spec.table.inputs];
        for (at, _) in &spec.reachable {
            rows[at.row.at()] = true;
            states[place(&spec.table, *at)] = true;
        }
        Reached { rows, states }
    }
}

fn place(table: &FlowTable, at: TotalState) -> usize {
    (at.row.at() << table.inputs) + at.column.at()
}

/// Cells with content that no start of their row is brought to, and stable cells of several in a row that are never met.
fn cells_never_entered(spec: &Spec, ways: &Ways, reached: &Reached, report: &mut Report) {
    let mut entered = vec![false; spec.table.len() << spec.table.inputs];
    for start in ways.starts() {
        for &column in ways.targets(start) {
            entered[place(&spec.table, TotalState { row: start.at.row, column })] = true;
        }
    }
    for row in spec.given.rows() {
        let starts = ways.of_row(row);
        for column in spec.given.columns() {
            let at = TotalState { row, column };
            let cell = spec.given.cell(row, column);
            let promised_only = cell.next.is_none() && cell.outputs.care == 0;
            if promised_only || spec.table.cell(row, column).inner || entered[place(&spec.table, at)] {
                continue;
            }
            let stable = cell.next == Some(row);
            let near = spec.discipline == Discipline::Burst
                || starts.iter().any(|start| start.at.column.distance(column) == 1);
            let never = if stable {
                starts.len() > 1 && reached.rows[row.at()] && !reached.states[place(&spec.table, at)]
            } else {
                cell.next.is_some() || !near
            };
            if never {
                let name = spec.given.name(row);
                report.warning("cell-never-entered", Spot::cell(name, column, spec.given.inputs), || {
                    format!(
                        "Row {}, column {}: no input change that the discipline allows leads to this cell. It is kept, \
                         and still binds merging; clear it if it is not needed.",
                        shown(name),
                        spec.given.column_text(column)
                    )
                });
            }
        }
    }
}

fn open_stable_outputs(spec: &Spec, ways: &Ways, report: &mut Report) {
    let all = u32::MAX.checked_shr(32 - spec.table.outputs as u32).unwrap_or(0);
    for start in ways.starts() {
        let TotalState { row, column } = start.at;
        let open = all & !spec.table.cell(row, column).outputs.care;
        if open != 0 {
            let name = spec.table.name(row);
            report.warning("open-stable-output", Spot::cell(name, column, spec.table.inputs), || {
                format!(
                    "Row {} rests in column {} with {} left open: either value may appear. Give it a value if anything \
                     depends on it.",
                    shown(name),
                    spec.table.column_text(column),
                    outputs_in(open, &spec.signals.outputs)
                )
            });
        }
    }
}

fn rows_never_left(spec: &Spec, ways: &Ways, report: &mut Report) {
    if spec.table.len() == 1 {
        return;
    }
    for row in spec.table.rows() {
        let leaves = |column: &Column| spec.table.next(row, *column).is_some_and(|next| next != row);
        if !ways.of_row(row).iter().any(|start| ways.targets(start).iter().any(leaves)) {
            let name = spec.table.name(row);
            report.warning("row-never-left", Spot::row(name), || {
                format!(
                    "Row {} can never be left: no allowed input change leads to another row. Add a cell that leads on, \
                     if the controller is not to stay there for good.",
                    shown(name)
                )
            });
        }
    }
}

/// Outputs that the user gave in an unstable cell against the value on both sides of the move.
fn pulses(spec: &Spec, ways: &Ways, report: &mut Report) {
    let mut told = vec![false; spec.table.len() << spec.table.inputs];
    for start in ways.starts() {
        let TotalState { row, column: from } = start.at;
        for &column in ways.targets(start) {
            let cell = spec.table.cell(row, column);
            let Some(next) = cell.next.filter(|&next| next != row) else { continue };
            let before = cell.outputs.conflicts(spec.table.cell(row, from).outputs);
            let pulsed = before & cell.outputs.conflicts(spec.table.cell(next, column).outputs);
            let place = place(&spec.table, TotalState { row, column });
            if pulsed != 0 && !std::mem::replace(&mut told[place], true) {
                let name = spec.table.name(row);
                report.warning("pulse-asked-for", Spot::cell(name, column, spec.table.inputs), || {
                    format!(
                        "Row {}, column {}: {} changes in this unstable cell and changes back in row {}, a pulse as \
                         short as the state change. Leave the output open here, unless the pulse is wanted.",
                        shown(name),
                        spec.table.column_text(column),
                        outputs_in(pulsed, &spec.signals.outputs),
                        shown(spec.table.name(next))
                    )
                });
            }
        }
    }
}
