//! Edits as values: the one way in which a project changes.
//!
//! [`Edit::apply`] is pure: it takes a project and gives the next. References follow: whoever renames a row, moves an
//! input or removes an output finds every cell, cover, scenario and choice that spoke of it changed along. Where
//! a mistake makes a reference ambiguous (two rows of one name), it stays as it is. An edit costs a copy of the project.
//!
//! Rows and signals are meant by their place, counted from 0, because a project with a mistake in it may
//! have two of one name.

use std::fmt;

use crate::project::{
    CellEntry, CoverChoice, Discipline, Form, Method, OutputStyle, Project, RowEntry, Scenario, Shape, Style,
    bounds, edit_rows as rows, edit_signals as signals,
};

/// One change of a project.
#[derive(Debug, Clone, PartialEq)]
pub enum Edit {
    /// Another title.
    SetTitle(String),
    /// Other notes.
    SetNotes(String),
    /// How the inputs may change.
    SetDiscipline(Discipline),
    /// The total state after power-up: row and column.
    SetInitial(Option<(String, String)>),
    /// One cell; `None` makes it unspecified.
    SetCell {
        /// The row.
        row: usize,
        /// The column as a bit string.
        column: String,
        /// The new cell.
        cell: Option<CellEntry>,
    },
    /// Several cells in one go: row, column, new cell. A later one wins over an earlier one at the same place.
    SetCells(Vec<(usize, String, Option<CellEntry>)>),
    /// A new row.
    InsertRow {
        /// Where it will stand.
        at: usize,
        /// The row.
        row: RowEntry,
    },
    /// Removes a row. Cells that lead to it keep their outputs and lose the next row; covers, scenarios and the
    /// initial state forget it.
    DeleteRow {
        /// The row.
        row: usize,
    },
    /// A copy right after the row. Where the row leads to itself, the copy leads to itself; in a cover by
    /// hand the copy joins its original.
    DuplicateRow {
        /// The row.
        row: usize,
        /// Name of the copy.
        name: String,
    },
    /// The same rows in another order.
    MoveRow {
        /// The row.
        row: usize,
        /// Where it will stand.
        to: usize,
    },
    /// Another name for a row.
    RenameRow {
        /// The row.
        row: usize,
        /// The new name.
        name: String,
    },
    /// A new input. Every column gets a 0 there: the table describes what happens while the input is low.
    AddInput {
        /// Its place.
        at: usize,
        /// Its name.
        name: String,
    },
    /// Another name for an input.
    RenameInput {
        /// The input.
        input: usize,
        /// The new name.
        name: String,
    },
    /// The same inputs in another order.
    MoveInput {
        /// The input.
        input: usize,
        /// Its new place.
        to: usize,
    },
    /// Removes an input. Cells of the columns in which it was 0 stay. An initial state in which it was not 0 is forgotten.
    RemoveInput {
        /// The input.
        input: usize,
    },
    /// A new output, unspecified everywhere.
    AddOutput {
        /// Its place.
        at: usize,
        /// Its name.
        name: String,
    },
    /// Another name for an output.
    RenameOutput {
        /// The output.
        output: usize,
        /// The new name.
        name: String,
    },
    /// The same outputs in another order.
    MoveOutput {
        /// The output.
        output: usize,
        /// Its new place.
        to: usize,
    },
    /// Removes an output.
    RemoveOutput {
        /// The output.
        output: usize,
    },
    /// All scenarios anew.
    SetScenarios(Vec<Scenario>),
    /// Outputs per cell or per row.
    SetOutputStyle(OutputStyle),
    /// Which closed cover.
    SetCover(CoverChoice),
    /// Names of all merged rows, in the order of the cover.
    SetMergedNames(Vec<String>),
    /// Name of one merged row; codes by hand follow.
    NameMergedRow {
        /// Its place in the cover.
        index: usize,
        /// The new name.
        name: String,
    },
    /// The assignment method.
    SetMethod(Method),
    /// Form of the excitation.
    SetForm(Form),
    /// Shape of the functions.
    SetShape(Shape),
    /// Whether products are shared.
    SetShare(bool),
    /// Outputs that change late, by name.
    SetLate(Vec<String>),
    /// Gate library style.
    SetStyle(Style),
    /// Largest fan-in of a gate.
    SetFanIn(u8),
    /// Smallest and largest delay of a gate.
    SetDelay(f64, f64),
    /// Name of a reset input.
    SetReset(Option<String>),
}

/// Why an edit cannot be made.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct EditError {
    /// What is the matter and what to do, in one sentence.
    pub text: String,
}

impl EditError {
    pub(super) fn new(text: impl Into<String>) -> Self {
        EditError { text: text.into() }
    }
}

impl fmt::Display for EditError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.text)
    }
}

impl std::error::Error for EditError {}

impl Edit {
    /// The project after this edit.
    ///
    /// # Errors
    ///
    /// When the place does not exist, a name is taken, or the result would break a limit; says what to do.
    pub fn apply(&self, project: &Project) -> Result<Project, EditError> {
        let mut next = project.clone();
        self.carry_out(&mut next)?;
        bounds::fits(&next).map_err(EditError::new)?;
        Ok(next)
    }

    fn carry_out(&self, project: &mut Project) -> Result<(), EditError> {
        let choices = &mut project.choices;
        match self {
            Edit::SetTitle(title) => project.title.clone_from(title),
            Edit::SetNotes(notes) => project.notes.clone_from(notes),
            Edit::SetDiscipline(discipline) => project.discipline = *discipline,
            Edit::SetInitial(initial) => project.initial.clone_from(initial),
            Edit::SetCell { row, column, cell } => rows::set_cell(project, *row, column, cell.as_ref())?,
            Edit::SetCells(cells) => {
                for (row, column, cell) in cells {
                    rows::set_cell(project, *row, column, cell.as_ref())?;
                }
            }
            Edit::InsertRow { at, row } => rows::insert(project, *at, row.clone())?,
            Edit::DeleteRow { row } => rows::delete(project, *row)?,
            Edit::DuplicateRow { row, name } => rows::duplicate(project, *row, name)?,
            Edit::MoveRow { row, to } => shift(&mut project.rows, *row, *to, "row")?,
            Edit::RenameRow { row, name } => rows::rename(project, *row, name)?,
            Edit::AddInput { at, name } => signals::add_input(project, *at, name)?,
            Edit::RenameInput { input, name } => signals::rename_input(project, *input, name)?,
            Edit::MoveInput { input, to } => signals::move_input(project, *input, *to)?,
            Edit::RemoveInput { input } => signals::remove_input(project, *input)?,
            Edit::AddOutput { at, name } => signals::add_output(project, *at, name)?,
            Edit::RenameOutput { output, name } => signals::rename_output(project, *output, name)?,
            Edit::MoveOutput { output, to } => signals::move_output(project, *output, *to)?,
            Edit::RemoveOutput { output } => signals::remove_output(project, *output)?,
            Edit::SetScenarios(scenarios) => project.scenarios.clone_from(scenarios),
            Edit::SetOutputStyle(outputs) => choices.merging.outputs = *outputs,
            Edit::SetCover(cover) => choices.merging.cover.clone_from(cover),
            Edit::SetMergedNames(names) => choices.merging.names.clone_from(names),
            Edit::NameMergedRow { index, name } => rows::name_merged(choices, *index, name)?,
            Edit::SetMethod(method) => choices.codes.method.clone_from(method),
            Edit::SetForm(form) => choices.logic.form = *form,
            Edit::SetShape(shape) => choices.logic.shape = *shape,
            Edit::SetShare(share) => choices.logic.share = *share,
            Edit::SetLate(late) => choices.logic.late.clone_from(late),
            Edit::SetStyle(style) => choices.gates.style = *style,
            Edit::SetFanIn(fan_in) => choices.gates.fan_in = *fan_in,
            Edit::SetDelay(least, most) => choices.gates.delay = (*least, *most),
            Edit::SetReset(reset) => choices.gates.reset.clone_from(reset),
        }
        Ok(())
    }

    /// What was done, as the menu says it after "Undo".
    pub fn name(&self) -> String {
        match self {
            Edit::SetTitle(_) => "Change title".into(),
            Edit::SetNotes(_) => "Change notes".into(),
            Edit::SetDiscipline(Discipline::Single) => "Let one input change at a time".into(),
            Edit::SetDiscipline(Discipline::Burst) => "Let inputs change in bursts".into(),
            Edit::SetInitial(Some((row, column))) => format!("Start in {row}, column {column}"),
            Edit::SetInitial(None) => "Forget initial state".into(),
            Edit::SetCell { column, cell: Some(_), .. } => format!("Set cell in column {column}"),
            Edit::SetCell { column, cell: None, .. } => format!("Clear cell in column {column}"),
            Edit::SetCells(cells) if cells.iter().all(|(_, _, cell)| cell.is_none()) => "Clear cells".into(),
            Edit::SetCells(_) => "Set cells".into(),
            Edit::InsertRow { row, .. } => format!("Insert row {}", row.name),
            Edit::DeleteRow { row } => format!("Delete row number {}", row.saturating_add(1)),
            Edit::DuplicateRow { name, .. } => format!("Duplicate row as {name}"),
            Edit::MoveRow { to, .. } => format!("Move row to place {}", to.saturating_add(1)),
            Edit::RenameRow { name, .. } => format!("Rename row to {name}"),
            Edit::AddInput { name, .. } => format!("Add input {name}"),
            Edit::RenameInput { name, .. } => format!("Rename input to {name}"),
            Edit::MoveInput { to, .. } => format!("Move input to place {}", to.saturating_add(1)),
            Edit::RemoveInput { input } => format!("Remove input number {}", input.saturating_add(1)),
            Edit::AddOutput { name, .. } => format!("Add output {name}"),
            Edit::RenameOutput { name, .. } => format!("Rename output to {name}"),
            Edit::MoveOutput { to, .. } => format!("Move output to place {}", to.saturating_add(1)),
            Edit::RemoveOutput { output } => format!("Remove output number {}", output.saturating_add(1)),
            Edit::SetScenarios(_) => "Change scenarios".into(),
            Edit::SetOutputStyle(OutputStyle::PerCell) => "Give outputs per cell".into(),
            Edit::SetOutputStyle(OutputStyle::PerRow) => "Give outputs per row".into(),
            Edit::SetCover(CoverChoice::Smallest) => "Use smallest cover".into(),
            Edit::SetCover(CoverChoice::ByHand(_)) => "Change cover by hand".into(),
            Edit::SetMergedNames(_) => "Name merged rows".into(),
            Edit::NameMergedRow { name, .. } => format!("Name merged row {name}"),
            Edit::SetMethod(Method::ByHand(_)) => "Change codes by hand".into(),
            Edit::SetMethod(method) => format!("Choose {} codes", method.word().replace('_', " ")),
            Edit::SetForm(Form::Feedback) => "Choose plain feedback".into(),
            Edit::SetForm(Form::SetReset) => "Choose set/reset latches".into(),
            Edit::SetForm(Form::CElement) => "Choose C-elements".into(),
            Edit::SetShape(shape) => format!("Choose {}", shape.word().replace('_', " ")),
            Edit::SetShare(true) => "Share products".into(),
            Edit::SetShare(false) => "Keep products apart".into(),
            Edit::SetLate(_) => "Change late outputs".into(),
            Edit::SetStyle(Style::AndOr) => "Use AND and OR gates".into(),
            Edit::SetStyle(Style::NandOnly) => "Use NAND gates only".into(),
            Edit::SetStyle(Style::NorOnly) => "Use NOR gates only".into(),
            Edit::SetFanIn(fan_in) => format!("Set fan-in to {fan_in}"),
            Edit::SetDelay(..) => "Change gate delays".into(),
            Edit::SetReset(Some(name)) => format!("Reset by input {name}"),
            Edit::SetReset(None) => "Remove reset input".into(),
        }
    }
}

/// The place of an item that must exist.
pub(super) fn existing(place: usize, count: usize, what: &str) -> Result<usize, EditError> {
    if place < count {
        return Ok(place);
    }
    Err(EditError::new(format!(
        "there is no {what} number {}: choose one of {count}",
        place.saturating_add(1)
    )))
}

/// Moves an item to another place; the ones between make room.
pub(super) fn shift<T>(items: &mut Vec<T>, from: usize, to: usize, what: &str) -> Result<(), EditError> {
    existing(from, items.len(), what)?;
    existing(to, items.len(), what)?;
    let item = items.remove(from);
    items.insert(to, item);
    Ok(())
}
