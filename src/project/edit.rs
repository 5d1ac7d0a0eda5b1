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

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::project::arbitrary::{edit, raw_edits, tidy_project, wild_project};
    use crate::project::{fits, limits, read, write};

    /// The sump pump with something in every place that names a row or a signal.
    fn pump() -> Project {
        read(include_bytes!("../../tests/data/project/pump.ron")).expect("a sound file")
    }

    fn made(edit: &Edit, project: &Project) -> Project {
        edit.apply(project).expect("can be made")
    }

    fn cell(project: &Project, row: usize, column: &str) -> Option<(String, String)> {
        project.rows[row].cells.get(column).map(|cell| (cell.next.clone(), cell.outputs.clone()))
    }

    fn pair(next: &str, outputs: &str) -> Option<(String, String)> {
        Some((next.into(), outputs.into()))
    }

    #[test]
    fn renaming_a_row_follows_every_reference() {
        let before = pump();
        let old = write(&before);
        assert!(old.matches("\"rising\"").count() >= 5, "{old}");
        let after = made(&Edit::RenameRow { row: 1, name: "filling".into() }, &before);
        assert_eq!(write(&after), old.replace("\"rising\"", "\"filling\""));
    }

    #[test]
    fn renaming_an_output_follows_late() {
        let after = made(&Edit::RenameOutput { output: 0, name: "motor".into() }, &pump());
        assert_eq!((after.outputs, after.choices.logic.late), (vec!["motor".into()], vec!["motor".into()]));
    }

    #[test]
    fn a_deleted_row_is_forgotten_everywhere() {
        let after = made(&Edit::DeleteRow { row: 0 }, &pump());
        assert!(!write(&after).contains("\"dry\""));
        assert_eq!(after.initial, None);
        // A cell that gave no output has nothing left to say; one that did keeps it.
        assert_eq!(cell(&after, 0, "00"), None);
        assert_eq!(cell(&after, 2, "00"), pair("-", "0"));
        let after = made(&Edit::DeleteRow { row: 1 }, &pump());
        assert_eq!(
            after.choices.merging.cover,
            CoverChoice::ByHand(vec![vec!["dry".into()], vec!["full".into(), "falling".into()]])
        );
        assert_eq!(after.scenarios[0].steps[1].row, None);
    }

    #[test]
    fn a_set_of_the_cover_that_is_emptied_takes_its_name_along() {
        let one = made(&Edit::DeleteRow { row: 0 }, &pump());
        let two = made(&Edit::DeleteRow { row: 0 }, &one);
        assert_eq!(
            two.choices.merging.cover,
            CoverChoice::ByHand(vec![vec!["full".into(), "falling".into()]])
        );
        assert_eq!(two.choices.merging.names, vec!["On".to_owned()]);
    }

    #[test]
    fn a_copy_leads_to_itself_and_joins_its_set() {
        let after = made(&Edit::DuplicateRow { row: 1, name: "again".into() }, &pump());
        assert_eq!(after.rows[2].name, "again");
        assert_eq!(cell(&after, 2, "10"), pair("again", "0"));
        assert_eq!(cell(&after, 2, "11"), pair("full", "-"));
        assert_eq!(cell(&after, 1, "10"), pair("rising", "0"));
        let CoverChoice::ByHand(sets) = after.choices.merging.cover else { panic!("by hand") };
        assert_eq!(sets[0], ["dry", "rising", "again"]);
    }

    #[test]
    fn a_removed_input_leaves_the_columns_where_it_was_low() {
        let after = made(&Edit::RemoveInput { input: 0 }, &pump());
        assert_eq!(after.inputs, ["high"]);
        assert_eq!(cell(&after, 0, "0"), pair("dry", "0"));
        assert_eq!(after.rows[0].cells.len(), 1);
        assert_eq!(after.initial, Some(("dry".into(), "0".into())));
        assert_eq!(after.scenarios[0].steps[2].inputs, "1");
        let moved = Edit::SetInitial(Some(("rising".into(), "10".into())));
        assert_eq!(made(&Edit::RemoveInput { input: 0 }, &made(&moved, &pump())).initial, None);
    }

    #[test]
    fn an_added_input_is_low_everywhere_and_an_added_output_open() {
        let after = made(&Edit::AddInput { at: 1, name: "test".into() }, &pump());
        assert_eq!(after.inputs, ["low", "test", "high"]);
        assert_eq!(cell(&after, 1, "101"), pair("full", "-"));
        assert_eq!(after.scenarios[0].steps[2].inputs, "101");
        let after = made(&Edit::AddOutput { at: 0, name: "alarm".into() }, &after);
        assert_eq!(cell(&after, 0, "000"), pair("dry", "-0"));
        assert_eq!(after.scenarios[0].steps[0].outputs, "-0");
    }

    #[test]
    fn a_short_column_gives_way_to_the_right_one() {
        let mut project = pump();
        let stray = CellEntry { next: "stray".into(), outputs: "1".into() };
        project.rows[0].cells.insert("0".into(), stray.clone());
        project.rows[0].cells.insert("1".into(), stray);
        let after = made(&Edit::RemoveInput { input: 1 }, &project);
        assert_eq!(cell(&after, 0, "0"), pair("dry", "0"));
        assert_eq!(cell(&after, 0, "1"), pair("rising", "-"));
    }

    #[test]
    fn naming_a_merged_row_keeps_its_code() {
        let mut project = pump();
        project.choices.merging.names.clear();
        project.choices.codes.method = Method::ByHand([("B".to_owned(), vec!["1".to_owned()])].into());
        let after = made(&Edit::NameMergedRow { index: 1, name: "Running".into() }, &project);
        assert_eq!(after.choices.merging.names, ["A", "Running"]);
        assert_eq!(
            after.choices.codes.method,
            Method::ByHand([("Running".to_owned(), vec!["1".to_owned()])].into())
        );
        let far = made(&Edit::NameMergedRow { index: 27, name: "Last".into() }, &project);
        assert_eq!(far.choices.merging.names[25..], ["Z", "AA", "Last"]);
    }

    #[test]
    fn two_rows_of_one_name_keep_their_references() {
        let mut project = pump();
        project.rows[1].name = "dry".into();
        let after = made(&Edit::RenameRow { row: 1, name: "rising".into() }, &project);
        assert_eq!(cell(&after, 0, "00"), pair("dry", "0"));
        assert_eq!(after, pump());
    }

    #[test]
    fn what_cannot_be_done_is_refused_with_a_reason() {
        let project = pump();
        let wide = Edit::SetCell { row: 0, column: "000".into(), cell: Some(CellEntry::default()) };
        for (edit, reason) in [
            (Edit::RenameRow { row: 0, name: "full".into() }, "another row is named \"full\""),
            (Edit::RenameRow { row: 0, name: "-".into() }, "the next row is open"),
            (Edit::DeleteRow { row: 9 }, "there is no row number 10"),
            (
                Edit::InsertRow { at: 5, row: RowEntry { name: "x".into(), ..RowEntry::default() } },
                "number 6",
            ),
            (Edit::AddInput { at: 0, name: "pump".into() }, "another signal is named \"pump\""),
            (wide, "give a 0 or 1 for each of the 2 inputs"),
            (Edit::SetFanIn(1), "choose 2 to 64"),
            (Edit::SetDelay(f64::NAN, 1.0), "is no range of delays"),
            (Edit::SetDelay(2.0, 1.0), "is no range of delays"),
            (Edit::SetTitle("x".repeat(limits::TITLE + 1)), "the title has 257 characters"),
            (Edit::SetLate(vec![String::new(); 33]), "33 late outputs are too many"),
        ] {
            let error = edit.apply(&project).expect_err(reason);
            assert!(error.text.contains(reason), "{error}");
        }
        // A column that should not be there can be cleared all the same.
        made(&Edit::SetCell { row: 0, column: "000".into(), cell: None }, &project);
    }

    #[test]
    fn a_project_too_large_to_be_opened_again_cannot_be_made() {
        let outputs = "1".repeat(32);
        let cells = (0..1 << 10)
            .map(|c| (format!("{c:010b}"), CellEntry { next: "n".repeat(40), outputs: outputs.clone() }));
        let row = RowEntry { name: String::new(), cells: cells.collect() };
        let mut project = Project::new((0..10).map(|i| format!("x{i}")).collect(), Vec::new());
        project.rows = (0..150).map(|i| RowEntry { name: format!("r{i}"), ..row.clone() }).collect();
        assert_eq!(fits(&project), Ok(()));
        assert_eq!(read(write(&project).as_bytes()).as_ref(), Ok(&project));
        project.rows.extend((150..190).map(|i| RowEntry { name: format!("r{i}"), ..row.clone() }));
        assert!(write(&project).len() > limits::FILE_BYTES);
        let error = Edit::SetShare(true).apply(&project).expect_err("too large");
        assert!(error.text.contains("bytes"), "{error}");
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(400))]

        #[test]
        fn there_and_back_is_the_same(project in tidy_project(), a in any::<prop::sample::Index>(), b in any::<prop::sample::Index>()) {
            let (rows, inputs, outputs) = (project.rows.len(), project.inputs.len(), project.outputs.len());
            let (row, input, output) = (a.index(rows), a.index(inputs), a.index(outputs));
            let fresh = || "fresh".to_owned();
            let name = project.rows[row].name.clone();
            for (there, back) in [
                (Edit::RenameRow { row, name: fresh() }, Edit::RenameRow { row, name }),
                (Edit::MoveRow { row, to: b.index(rows) }, Edit::MoveRow { row: b.index(rows), to: row }),
                (Edit::DuplicateRow { row, name: fresh() }, Edit::DeleteRow { row: row + 1 }),
                (Edit::AddInput { at: input, name: fresh() }, Edit::RemoveInput { input }),
                (Edit::MoveInput { input, to: b.index(inputs) }, Edit::MoveInput { input: b.index(inputs), to: input }),
                (Edit::AddOutput { at: output, name: fresh() }, Edit::RemoveOutput { output }),
                (Edit::MoveOutput { output, to: b.index(outputs) }, Edit::MoveOutput { output: b.index(outputs), to: output }),
                (
                    Edit::RenameOutput { output, name: fresh() },
                    Edit::RenameOutput { output, name: project.outputs[output].clone() },
                ),
            ] {
                let away = made(&there, &project);
                prop_assert_eq!(&made(&back, &away), &project, "{:?}", there);
            }
        }

        #[test]
        fn a_renamed_row_leaves_no_trace(project in tidy_project(), a in any::<prop::sample::Index>()) {
            let row = a.index(project.rows.len());
            let old = format!("\"{}\"", project.rows[row].name);
            let text = write(&made(&Edit::RenameRow { row, name: "fresh".into() }, &project));
            prop_assert!(!text.contains(&old));
            prop_assert_eq!(text.matches("\"fresh\"").count(), write(&project).matches(&old).count());
        }

        #[test]
        fn no_edit_of_any_project_panics(project in wild_project(), raws in raw_edits()) {
            for raw in raws {
                let edit = edit(&project, raw);
                match edit.apply(&project) {
                    Ok(next) => prop_assert!(fits(&next).is_ok()),
                    Err(error) => prop_assert!(!error.text.is_empty()),
                }
                prop_assert!(!edit.name().is_empty());
            }
        }
    }
}
