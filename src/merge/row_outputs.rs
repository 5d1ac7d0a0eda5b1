//! Outputs that belong to rows: one word for each row, drawn from its stable cells, or the reasons why there is none.
//!
//! A row's word is the union of its stable cells. An output that is given in a cell that is not stable is what the user
//! wants to see on the way, so it must be the row's own or that of the row it goes to; where one of the two is open it is
//! bound. Where both are open either will do; this is a 2-satisfiability problem, and it is solved by trying the row's own
//! first and giving way to the other only where that leads to a contradiction.
//!
//! # Complexity
//!
//! One pass over all cells for each word that is bound; none in tables whose stable outputs are all given.
//!
//! # References
//!
//! - E. F. Moore, "Gedanken-experiments on sequential machines", Automata Studies, 1956 (outputs of rows).
//! - S. Even, A. Itai and A. Shamir, "On the complexity of timetable and multicommodity flow problems", SIAM J. on
//!   Computing 5, 1976 (trying one value with propagation, then the other).

use crate::base::{Column, Finding, Level, Outputs, Row};
use crate::merge::values::columns_in_text_order;
use crate::spec::values::Spec;

/// The outputs of each row of `spec.table`.
///
/// # Errors
///
/// A finding of level error for each row whose stable cells contradict each other, or else for the first given output
/// that no choice can honour; each names the row and the columns.
pub(super) fn row_outputs(spec: &Spec) -> Result<Vec<Outputs>, Vec<Finding>> {
    let words = union_of_stable_cells(spec)?;
    let demands = demands(spec);
    let mut words = settle(&demands, words).map_err(|broken| vec![unmet(spec, &broken)])?;
    // Only demands with both sides open are left.
    for demand in &demands {
        if demand.state(&words) != State::Undecided {
            continue;
        }
        let mut own = words.clone();
        demand.bind(&mut own, demand.row);
        words = match settle(&demands, own) {
            Ok(settled) => settled,
            Err(_) => {
                demand.bind(&mut words, demand.goal.unwrap_or(demand.row));
                settle(&demands, words).map_err(|broken| vec![unmet(spec, &broken)])?
            }
        };
    }
    Ok(words)
}

fn union_of_stable_cells(spec: &Spec) -> Result<Vec<Outputs>, Vec<Finding>> {
    let table = &spec.table;
    let mut words = vec![Outputs::default(); table.len()];
    let mut findings = Vec::new();
    for row in table.rows() {
        for output in 0..table.outputs {
            let mut first: Option<(Column, bool)> = None;
            for column in columns_in_text_order(table.inputs).filter(|&c| table.stable(row, c)) {
                match (first, table.cell(row, column).outputs.get(output)) {
                    (_, None) => {}
                    (None, Some(value)) => first = Some((column, value)),
                    (Some((_, had)), Some(value)) if had == value => {}
                    (Some((had_at, had)), Some(value)) => {
                        findings.push(contradiction(spec, row, output, (had_at, had), (column, value)));
                        break;
                    }
                }
            }
            words[row.at()] = words[row.at()].with(output, first.map(|(_, value)| value));
        }
    }
    if findings.is_empty() { Ok(words) } else { Err(findings) }
}

/// An output that is given in a cell that is not stable.
struct Demand {
    row: Row,
    column: Column,
    /// Where the cell leads; `None` if that is open.
    goal: Option<Row>,
    output: usize,
    value: bool,
}

#[derive(PartialEq, Eq)]
enum State {
    Met,
    Undecided,
    /// Only this row can still meet it.
    Only(Row),
    Broken,
}

impl Demand {
    fn state(&self, words: &[Outputs]) -> State {
        let own = words[self.row.at()].get(self.output);
        let Some(goal) = self.goal else {
            return match own {
                None => State::Only(self.row),
                Some(value) if value == self.value => State::Met,
                Some(_) => State::Broken,
            };
        };
        match (own, words[goal.at()].get(self.output)) {
            (Some(value), _) | (_, Some(value)) if value == self.value => State::Met,
            (_, Some(value)) if value == self.value => State::Met,
            (None, None) => State::Undecided,
            (None, Some(_)) => State::Only(self.row),
            (Some(_), None) => State::Only(goal),
            (Some(_), Some(_)) => State::Broken,
        }
    }

    fn bind(&self, words: &mut [Outputs], row: Row) {
        words[row.at()] = words[row.at()].with(self.output, Some(self.value));
    }
}

fn demands(spec: &Spec) -> Vec<Demand> {
    let table = &spec.table;
    let mut demands = Vec::new();
    for row in table.rows() {
        for column in columns_in_text_order(table.inputs).filter(|&c| !table.stable(row, c)) {
            let cell = table.cell(row, column);
            for output in 0..table.outputs {
                if let Some(value) = cell.outputs.get(output) {
                    demands.push(Demand { row, column, goal: cell.next, output, value });
                }
            }
        }
    }
    demands
}

/// Binds whatever has one choice left until nothing changes; or the demand that cannot be met.
fn settle(demands: &[Demand], mut words: Vec<Outputs>) -> Result<Vec<Outputs>, Demand> {
    loop {
        let mut changed = false;
        for demand in demands {
            match demand.state(&words) {
                State::Met | State::Undecided => {}
                State::Only(row) => {
                    demand.bind(&mut words, row);
                    changed = true;
                }
                State::Broken => return Err(Demand { ..*demand }),
            }
        }
        if !changed {
            return Ok(words);
        }
    }
}

fn contradiction(
    spec: &Spec,
    row: Row,
    output: usize,
    (first, had): (Column, bool),
    (second, value): (Column, bool),
) -> Finding {
    let table = &spec.table;
    let text = format!(
        "With outputs per row, row {} would need {} = {} in column {} and {} in column {}. Split the row, or let outputs belong to \
         cells.",
        table.name(row),
        spec.signals.outputs[output],
        u8::from(had),
        table.column_text(first),
        u8::from(value),
        table.column_text(second),
    );
    Finding::new(Level::Error, "row-outputs-contradict", text)
        .at_row(table.name(row))
        .at_column(table.column_text(second))
}

fn unmet(spec: &Spec, demand: &Demand) -> Finding {
    let table = &spec.table;
    let goal = match demand.goal {
        Some(goal) => {
            format!("neither row {} nor row {}, where it goes,", table.name(demand.row), table.name(goal))
        }
        None => format!("row {}", table.name(demand.row)),
    };
    let has = if demand.goal.is_some() { "has it" } else { "has not got it" };
    let text = format!(
        "Column {} of row {} asks for {} = {}, but with outputs per row {goal} {has}. Leave the output of this cell open, or let \
         outputs belong to cells.",
        table.column_text(demand.column),
        table.name(demand.row),
        spec.signals.outputs[demand.output],
        u8::from(demand.value),
    );
    Finding::new(Level::Error, "row-output-unmet", text)
        .at_row(table.name(demand.row))
        .at_column(table.column_text(demand.column))
}
