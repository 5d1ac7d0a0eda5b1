//! What edits do, and that their references follow.

use proptest::prelude::*;

use crate::project::arbitrary::{edit, raw_edits, tidy_project, wild_project};
use crate::project::{
    CellEntry, CoverChoice, Discipline, Edit, Form, Method, OutputStyle, Project, RowEntry, Shape, Style,
    fits, limits, read, write,
};

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
    assert_eq!(two.choices.merging.cover, CoverChoice::ByHand(vec![vec!["full".into(), "falling".into()]]));
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
        (Edit::InsertRow { at: 5, row: RowEntry { name: "x".into(), ..RowEntry::default() } }, "number 6"),
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

#[test]
fn moving_a_signal_moves_its_place_in_every_string() {
    let after = made(&Edit::MoveInput { input: 0, to: 1 }, &pump());
    assert_eq!(after.inputs, ["high", "low"]);
    assert_eq!((cell(&after, 0, "01"), cell(&after, 0, "10")), (pair("rising", "-"), None));
    let inputs = |project: &Project| {
        project.scenarios[0].steps.iter().map(|step| step.inputs.clone()).collect::<Vec<_>>()
    };
    assert_eq!(inputs(&after), ["00", "01", "11", "01"]);
    let started = made(&Edit::SetInitial(Some(("rising".into(), "10".into()))), &pump());
    let moved = made(&Edit::MoveInput { input: 1, to: 0 }, &started);
    assert_eq!(moved.initial, Some(("rising".into(), "01".into())));

    let two = made(&Edit::AddOutput { at: 1, name: "alarm".into() }, &pump());
    let after = made(&Edit::MoveOutput { output: 0, to: 1 }, &two);
    assert_eq!(after.outputs, ["alarm", "pump"]);
    assert_eq!(cell(&after, 2, "11"), pair("full", "-1"));
    assert_eq!(after.scenarios[0].steps[2].outputs, "-1");
    let after = made(&Edit::RemoveOutput { output: 1 }, &after);
    assert_eq!((cell(&after, 2, "11"), after.choices.logic.late.len()), (pair("full", "-"), 0));
    assert_eq!(after.scenarios[0].steps[2].outputs, "-");
}

#[test]
fn rows_go_where_they_are_put() {
    let names = |project: &Project| project.rows.iter().map(|row| row.name.clone()).collect::<Vec<_>>();
    let row = RowEntry { name: "new".into(), ..RowEntry::default() };
    let after = made(&Edit::InsertRow { at: 4, row }, &pump());
    assert_eq!(names(&after), ["dry", "rising", "full", "falling", "new"]);
    let after = made(&Edit::MoveRow { row: 4, to: 1 }, &after);
    assert_eq!(names(&after), ["dry", "new", "rising", "full", "falling"]);
    let after = made(&Edit::MoveRow { row: 0, to: 4 }, &after);
    assert_eq!(names(&after), ["new", "rising", "full", "falling", "dry"]);
}

#[test]
fn cells_are_set_together_or_not_at_all() {
    let stay = CellEntry { next: "dry".into(), outputs: "1".into() };
    let cells =
        vec![(0, "01".into(), Some(stay.clone())), (1, "11".into(), None), (0, "00".into(), Some(stay))];
    let after = made(&Edit::SetCells(cells.clone()), &pump());
    assert_eq!((cell(&after, 0, "00"), cell(&after, 0, "01")), (pair("dry", "1"), pair("dry", "1")));
    assert_eq!(cell(&after, 1, "11"), None);
    let beyond = cells.into_iter().chain([(9, "00".into(), None)]).collect();
    assert!(Edit::SetCells(beyond).apply(&pump()).is_err());
}

#[test]
fn each_choice_changes_itself_alone() {
    let plain = Project::new(vec!["a".into()], vec!["q".into()]);
    let codes = Method::ByHand([("A".to_owned(), vec!["0".to_owned()])].into());
    for (edit, line) in [
        (Edit::SetDiscipline(Discipline::Burst), "discipline: Burst"),
        (Edit::SetOutputStyle(OutputStyle::PerRow), "merging: (outputs: PerRow)"),
        (Edit::SetCover(CoverChoice::ByHand(vec![vec!["r".into()]])), "merging: (cover: ByHand([[\"r\"]]))"),
        (Edit::SetMergedNames(vec!["Off".into()]), "merging: (names: [\"Off\"])"),
        (Edit::SetMethod(Method::OneHot), "codes: (method: OneHot)"),
        (Edit::SetMethod(codes), "codes: (method: ByHand({\"A\": [\"0\"]}))"),
        (Edit::SetForm(Form::CElement), "logic: (form: CElement)"),
        (Edit::SetShape(Shape::ProductOfSums), "logic: (shape: ProductOfSums)"),
        (Edit::SetShare(true), "logic: (share: true)"),
        (Edit::SetLate(vec!["q".into()]), "logic: (late: [\"q\"])"),
        (Edit::SetStyle(Style::NorOnly), "gates: (style: NorOnly)"),
        (Edit::SetFanIn(2), "gates: (fan_in: 2)"),
        (Edit::SetDelay(0.0, 3.0), "gates: (delay: (0.0, 3.0))"),
        (Edit::SetReset(Some("clear".into())), "gates: (reset: Some(\"clear\"))"),
    ] {
        let text = write(&made(&edit, &plain));
        let before = write(&plain);
        let new: Vec<&str> =
            text.lines().filter(|line| !before.lines().any(|old| old == *line)).map(str::trim).collect();
        let expected = format!("{line},");
        assert!(new == [&*expected] || new == ["choices: (", &*expected, "),"], "{edit:?}: {new:?}");
    }
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
