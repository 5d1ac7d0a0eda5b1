//! Plays the scenarios of a project on its table and says where the two part.
//!
//! Only the first disagreement of a scenario is told: what comes after it starts from another state. Exact; linear in
//! the steps, with one binary search each.

use std::collections::HashMap;

use crate::base::{Column, Outputs, Row, TotalState};
use crate::project::choices::Discipline;
use crate::project::{Project, Scenario, Step, limits};
use crate::spec::names::shown;
use crate::spec::report::{Report, Spot};
use crate::spec::values::Spec;
use crate::spec::warn::change;
use crate::spec::ways::Ways;

/// Plays every scenario that has steps.
pub fn scenarios(project: &Project, spec: &Spec, ways: &Ways, report: &mut Report) {
    if project.scenarios.len() > limits::SCENARIOS {
        report.error("limit-scenarios", Spot::NOWHERE, || {
            let (count, most) = (project.scenarios.len(), limits::SCENARIOS);
            format!("There are {count} scenarios; at most {most} are possible.")
        });
        return;
    }
    let mut rows = HashMap::with_capacity(spec.table.len());
    for row in spec.table.rows() {
        rows.insert(spec.table.name(row), row);
    }
    let player = Player { spec, ways, rows };
    for (i, scenario) in project.scenarios.iter().enumerate() {
        let title =
            if scenario.name.is_empty() { format!("number {}", i + 1) } else { shown(&scenario.name) };
        if scenario.steps.len() > limits::SCENARIOS {
            report.error("limit-steps", Spot::NOWHERE, || {
                let (count, most) = (scenario.steps.len(), limits::SCENARIOS);
                format!("Scenario {title} has {count} steps; at most {most} are possible.")
            });
            continue;
        }
        if let Err(trouble) = player.play(scenario) {
            let spot = match trouble.at {
                Some(TotalState { row, column }) => {
                    Spot::cell(spec.table.name(row), column, spec.table.inputs)
                }
                None => Spot::NOWHERE,
            };
            let code = if trouble.malformed { "scenario-malformed" } else { "scenario-disagrees" };
            report.error(code, spot, || format!("Scenario {title}, step {}: {}", trouble.step, trouble.text));
        }
    }
}

/// Why a scenario cannot be played to its end.
struct Trouble {
    /// Counted from 1.
    step: usize,
    malformed: bool,
    at: Option<TotalState>,
    text: String,
}

/// What a step expects.
struct Expected {
    column: Column,
    outputs: Outputs,
    row: Option<Row>,
}

struct Player<'a> {
    spec: &'a Spec,
    ways: &'a Ways,
    rows: HashMap<&'a str, Row>,
}

impl Player<'_> {
    fn play(&self, scenario: &Scenario) -> Result<(), Trouble> {
        let steps: Vec<Expected> = scenario
            .steps
            .iter()
            .enumerate()
            .map(|(i, step)| self.read(i + 1, step))
            .collect::<Result<_, _>>()?;
        let Some(first) = steps.first() else { return Ok(()) };
        let start = self.start(first)?;
        self.compare(1, start, first)?;
        let mut at = start;
        for (i, step) in steps.iter().enumerate().skip(1) {
            at = self.change(i + 1, at, step.column)?;
            self.compare(i + 1, at, step)?;
        }
        if scenario.loops && at != start {
            self.close(steps.len(), at, start)?;
        }
        Ok(())
    }

    /// The state of the first step: its row, or else the initial one, in its column.
    fn start(&self, first: &Expected) -> Result<TotalState, Trouble> {
        let at = TotalState { row: first.row.unwrap_or(self.spec.initial.row), column: first.column };
        if self.ways.start(at).is_some() {
            return Ok(at);
        }
        let (row, column) = self.words(at);
        let text = format!(
            "it starts in row {row}, column {column}, but the table does not rest there. Start in a stable cell."
        );
        Err(Trouble { step: 1, malformed: false, at: Some(at), text })
    }

    /// Where one input change leads.
    fn change(&self, step: usize, from: TotalState, column: Column) -> Result<TotalState, Trouble> {
        let spec = self.spec;
        let (row, written) = self.words(from);
        let target = spec.table.column_text(column);
        let malformed = |text| Err(Trouble { step, malformed: true, at: None, text });
        if column == from.column {
            return malformed(format!(
                "the inputs stay {target}. Every step after the first changes an input."
            ));
        }
        if spec.discipline == Discipline::Single && column.distance(from.column) > 1 {
            return malformed(format!(
                "the inputs change from {written} to {target}, but only one may change at a time. Put a step in between, \
                 or allow bursts."
            ));
        }
        let targets = self.ways.start(from).map_or(&[][..], |start| self.ways.targets(start));
        let next = spec.table.next(from.row, column).filter(|_| targets.contains(&column));
        if let Some(next) = next {
            return Ok(TotalState { row: next, column });
        }
        let why = if spec.table.cell(from.row, column).inner {
            "which is in the middle of a burst"
        } else if spec.table.next(from.row, column).is_some() {
            "which the discipline does not allow"
        } else {
            "which the table leaves open"
        };
        let text = format!(
            "from row {row}, column {written}, {} (to column {target}), {why}. Mend the cell or the scenario.",
            change(&spec.signals.inputs, from.column, column)
        );
        Err(Trouble { step, malformed: false, at: Some(TotalState { row: from.row, column }), text })
    }

    /// Compares the settled state with what the step expects.
    fn compare(&self, step: usize, at: TotalState, expected: &Expected) -> Result<(), Trouble> {
        let (row, column) = self.words(at);
        let outputs = self.spec.table.cell(at.row, at.column).outputs;
        let differ = |text| Err(Trouble { step, malformed: false, at: Some(at), text });
        if let Some(wanted) = expected.row.filter(|&wanted| wanted != at.row) {
            let wanted = shown(self.spec.table.name(wanted));
            return differ(format!(
                "row {wanted} is expected, but in column {column} the table is in row {row}."
            ));
        }
        let missing = expected.outputs.care & !outputs.care;
        if missing | outputs.conflicts(expected.outputs) != 0 {
            let width = self.spec.table.outputs;
            return differ(format!(
                "outputs {} are expected, but the table gives {} in row {row}, column {column}.",
                expected.outputs.text(width),
                outputs.text(width)
            ));
        }
        Ok(())
    }

    /// The change after the last step must lead back to the state of the first.
    fn close(&self, step: usize, at: TotalState, start: TotalState) -> Result<(), Trouble> {
        let back = if at.column == start.column { at } else { self.change(step, at, start.column)? };
        if back == start {
            return Ok(());
        }
        let text = format!(
            "the scenario is to lead back to row {}, but the table is then in row {}.",
            shown(self.spec.table.name(start.row)),
            shown(self.spec.table.name(back.row))
        );
        Err(Trouble { step, malformed: false, at: Some(back), text })
    }

    fn read(&self, number: usize, step: &Step) -> Result<Expected, Trouble> {
        let malformed = |text| Trouble { step: number, malformed: true, at: None, text };
        let (inputs, outputs) = (self.spec.table.inputs, self.spec.table.outputs);
        let column = Column::parse(&step.inputs, inputs).ok_or_else(|| {
            let written = shown(&step.inputs);
            malformed(format!("the inputs {written} are not a bit string of {inputs} characters 0 or 1."))
        })?;
        let outputs = Outputs::parse(&step.outputs, outputs).ok_or_else(|| {
            let written = shown(&step.outputs);
            malformed(format!(
                "the outputs {written} are not one of 0, 1, - for each of the {outputs} outputs."
            ))
        })?;
        let row = match &step.row {
            None => None,
            Some(name) => Some(self.rows.get(name.as_str()).copied().ok_or_else(|| {
                malformed(format!("there is no row {}. Name one of the table's rows.", shown(name)))
            })?),
        };
        Ok(Expected { column, outputs, row })
    }

    fn words(&self, at: TotalState) -> (String, String) {
        (shown(self.spec.table.name(at.row)), self.spec.table.column_text(at.column))
    }
}
