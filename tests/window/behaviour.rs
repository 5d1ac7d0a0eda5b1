//! Gestures of the Behaviour station.

use eframe::egui::{Event, Key};
use stillgate::base::{Column, Row};
use stillgate::design::values::Pick;
use stillgate::project::CellEntry;
use stillgate::project::choices::Discipline;
use stillgate::window::actions::Station;

use crate::drive::{ALT, BOTH, CTRL, NONE, SHIFT, TABLE, Window};

fn cell(w: &Window, row: &str, column: &str) -> Option<CellEntry> {
    let row = w.project().rows.iter().find(|r| r.name == row).unwrap_or_else(|| panic!("no row {row}"));
    row.cells.get(column).cloned()
}

fn entry(next: &str, outputs: &str) -> Option<CellEntry> {
    Some(CellEntry { next: next.into(), outputs: outputs.into() })
}

fn names(w: &Window) -> Vec<&str> {
    w.project().rows.iter().map(|r| r.name.as_str()).collect()
}

#[test]
fn typing_sets_a_cell_and_the_figures_follow() {
    let mut w = Window::sample("sump_pump");
    assert_eq!(w.app().figures()[0].text, "4 rows · complete");
    w.cell(1, 2);
    assert_eq!(w.app().marks.picked, Some(Pick::Cell(Row::new(1), Column::parse("10", 2).unwrap())));
    // Enter goes down, Tab to the right, Escape leaves the cell as it was.
    w.enter("rising 1");
    assert_eq!(cell(&w, "rising", "10"), entry("rising", "1"));
    w.type_text("dry");
    w.press(NONE, Key::Escape);
    assert_eq!(cell(&w, "full", "10"), entry("falling", "-"));
    w.type_text("dry");
    w.press(NONE, Key::Tab);
    assert_eq!(cell(&w, "full", "10"), entry("dry", "-"));
    w.type_text("0");
    w.press(NONE, Key::Tab);
    assert_eq!(cell(&w, "full", "11"), entry("full", "0"));
    // F2 edits what is there.
    w.cell(0, 0);
    w.tap(NONE, Key::F2);
    w.tap(NONE, Key::Backspace);
    w.enter("1");
    assert_eq!(cell(&w, "dry", "00"), entry("dry", "1"));
    // What cannot be read stays in the field, and the reason is said.
    w.cell(0, 2);
    w.type_text("rising 00");
    w.tap(NONE, Key::Enter);
    w.settle();
    assert!(w.app().status.contains("no output word"), "{}", w.app().status);
    assert!(w.app().table.typing());
    w.press(NONE, Key::Escape);
    assert_eq!(cell(&w, "dry", "10"), entry("rising", "-"));
}

#[test]
fn one_key_makes_a_cell_stable_and_one_makes_it_unspecified() {
    let mut w = Window::sample("sump_pump");
    w.cell(0, 1);
    w.press(NONE, Key::Delete);
    assert_eq!(cell(&w, "dry", "01"), None);
    assert_eq!(w.app().figures()[0].text, "4 rows · 1 question");
    w.type_text(" ");
    w.settle();
    assert_eq!(cell(&w, "dry", "01"), entry("dry", "-"));
    w.press(NONE, Key::Backspace);
    assert_eq!(cell(&w, "dry", "01"), None);
    w.press(CTRL, Key::Enter);
    assert_eq!(cell(&w, "dry", "01"), entry("dry", "-"));
    // A range: two rows by two columns.
    w.cell(1, 0);
    w.tap(SHIFT, Key::ArrowRight);
    w.tap(SHIFT, Key::ArrowDown);
    w.settle();
    assert!(w.sees("4 cells selected"));
    w.press(NONE, Key::Delete);
    assert_eq!([cell(&w, "rising", "00"), cell(&w, "full", "01")], [None, None]);
    assert_eq!(w.project().rows[1].cells.len(), 2);
}

#[test]
fn ranges_go_to_a_spreadsheet_and_back() {
    let mut w = Window::sample("sump_pump");
    w.cell(0, 0);
    w.repeat(2, SHIFT, Key::ArrowRight);
    w.repeat(1, SHIFT, Key::ArrowDown);
    let text = w.copied(Event::Copy);
    assert_eq!(text, "dry 0\t- -\trising -\ndry -\t\trising 0");
    w.cell(2, 0);
    w.paste(&text);
    assert_eq!(cell(&w, "full", "00"), entry("dry", "0"));
    assert_eq!(cell(&w, "falling", "01"), None);
    assert_eq!(cell(&w, "falling", "10"), entry("rising", "0"));
    // One paste is one step back.
    w.press(CTRL, Key::Z);
    assert_eq!(cell(&w, "full", "00"), None);
    // What lies outside the table is left out and said; what cannot be read changes nothing.
    w.cell(3, 3);
    w.paste("falling 1\tdry 0\nfull 1\tdry 0");
    assert_eq!(cell(&w, "falling", "11"), entry("falling", "1"));
    assert!(w.app().status.contains("3 lay outside"), "{}", w.app().status);
    w.cell(0, 3);
    let before = w.project().clone();
    w.paste("dry 0\nx y z");
    assert!(w.app().status.starts_with("Nothing was pasted"), "{}", w.app().status);
    assert_eq!(*w.project(), before);
    // Cut takes the cells away.
    w.cell(0, 0);
    assert_eq!(w.copied(Event::Cut), "dry 0");
    assert_eq!(cell(&w, "dry", "00"), None);
}

#[test]
fn fill_down_copies_the_first_row_of_the_range() {
    let mut w = Window::sample("sump_pump");
    w.cell(0, 0);
    w.repeat(2, SHIFT, Key::ArrowDown);
    w.press(BOTH, Key::D);
    for row in ["rising", "full"] {
        assert_eq!(cell(&w, row, "00"), entry("dry", "0"));
    }
    assert_eq!(cell(&w, "falling", "00"), entry("dry", "-"));
}

#[test]
fn rows_are_inserted_copied_moved_renamed_and_deleted() {
    let mut w = Window::sample("sump_pump");
    w.cell(1, 0);
    w.press(CTRL, Key::I);
    assert_eq!(names(&w), ["dry", "rising", "a", "full", "falling"]);
    w.press(CTRL, Key::Delete);
    assert_eq!(names(&w), ["dry", "rising", "full", "falling"]);
    w.cell(1, 0);
    w.press(CTRL, Key::D);
    assert_eq!(names(&w), ["dry", "rising", "rising2", "full", "falling"]);
    assert_eq!(cell(&w, "rising2", "10"), entry("rising2", "0"));
    w.press(ALT, Key::ArrowDown);
    assert_eq!(names(&w), ["dry", "rising", "full", "rising2", "falling"]);
    w.press(ALT, Key::ArrowUp);
    w.press(ALT, Key::ArrowUp);
    assert_eq!(names(&w), ["dry", "rising2", "rising", "full", "falling"]);
    // The copy is deleted; a range of rows goes in one go.
    w.press(CTRL, Key::Delete);
    assert_eq!(names(&w), ["dry", "rising", "full", "falling"]);
    // Every reference follows a new name, the start after power-up too.
    w.cell(0, 0);
    w.press(CTRL, Key::R);
    assert!(w.sees("Rename the row"));
    w.tab_to("Name");
    w.retype("empty");
    w.press(NONE, Key::Enter);
    assert_eq!(names(&w)[0], "empty");
    assert_eq!(cell(&w, "rising", "00"), entry("empty", "-"));
    assert_eq!(w.project().initial, Some(("empty".into(), "00".into())));
    assert_eq!(w.project().scenarios[0].steps[0].row.as_deref(), Some("empty"));
    // A name that is taken changes nothing and says why.
    w.press(CTRL, Key::R);
    w.tab_to("Name");
    w.retype("full");
    w.press(NONE, Key::Enter);
    assert_eq!(names(&w)[0], "empty");
    assert!(w.app().status.contains("full"), "{}", w.app().status);
}

#[test]
fn a_range_of_rows_is_deleted_and_comes_back_with_one_undo() {
    let mut w = Window::sample("sump_pump");
    let before = w.project().clone();
    w.cell(1, 0);
    w.tap(SHIFT, Key::ArrowDown);
    w.press(CTRL, Key::Delete);
    assert_eq!(names(&w), ["dry", "falling"]);
    w.press(CTRL, Key::Z);
    assert_eq!(*w.project(), before);
}

#[test]
fn signals_are_added_renamed_moved_and_removed_with_their_columns() {
    let mut w = Window::sample("sump_pump");
    w.press(CTRL, Key::G);
    assert!(w.sees("Signals"));
    w.tab_to("Input 1");
    w.retype("wet");
    w.click("Move down input 1");
    w.click("Add output");
    w.tab_to("Output 2");
    w.retype("lamp");
    w.click("Keep");
    assert_eq!(w.project().inputs, ["high", "wet"]);
    assert_eq!(w.project().outputs, ["pump", "lamp"]);
    // Columns and output words have followed.
    assert_eq!(cell(&w, "dry", "01"), entry("rising", "--"));
    assert_eq!(cell(&w, "full", "11"), entry("full", "1-"));
    w.press(CTRL, Key::G);
    w.click("Remove output 1");
    w.click("Keep");
    assert_eq!(w.project().outputs, ["lamp"]);
    w.press(CTRL, Key::G);
    w.click("Add input");
    w.tab_to("Input 3");
    w.retype("wet");
    w.click("Keep");
    assert_eq!(w.project().inputs.len(), 2, "a name that is taken was accepted");
    assert!(w.app().status.contains("wet"), "{}", w.app().status);
}

#[test]
fn an_open_question_is_answered_with_one_click() {
    let mut w = Window::sample("conveyor_diverter");
    assert_eq!(w.app().figures()[0].text, "9 rows · 1 question");
    let question =
        w.app().design.findings.iter().find(|f| f.level == stillgate::base::Level::Question).unwrap().clone();
    let (row, column) = (question.at.row.clone().unwrap(), question.at.column.clone().unwrap());
    // The question is a link to its cell.
    w.click(&question.text);
    let at = w.project().rows.iter().position(|r| r.name == row).unwrap();
    assert_eq!(w.app().marks.picked, Some(Pick::Cell(Row::new(at), Column::parse(&column, 2).unwrap())));
    w.click("never happens");
    assert_eq!(cell(&w, &row, &column), entry("-", "-"));
    assert_eq!(w.app().figures()[0].text, "9 rows · complete");
    w.press(CTRL, Key::Z);
    w.click("stay");
    assert_eq!(cell(&w, &row, &column).unwrap().next, row);
    assert!(!w.app().design.findings.contains(&question));
    w.press(CTRL, Key::Z);
    w.click("go to row…");
    let offered = w.project().rows.iter().find(|r| r.cells.get(&column).is_some_and(|c| c.next == r.name));
    let target = offered.unwrap().name.clone();
    w.click(&target);
    assert_eq!(cell(&w, &row, &column).unwrap().next, target);
}

#[test]
fn columns_stand_in_counting_or_gray_order_all_or_those_in_use() {
    let mut w = Window::sample("source_transfer");
    let before = w.project().clone();
    w.cell(0, 3);
    let picked = |w: &Window| match w.app().marks.picked {
        Some(Pick::Cell(_, c)) => c.text(3),
        other => panic!("{other:?}"),
    };
    assert_eq!(picked(&w), "011");
    w.press(NONE, Key::F7);
    w.cell(0, 3);
    assert_eq!(picked(&w), "010");
    w.press(NONE, Key::F8);
    w.press(NONE, Key::F7);
    w.cell(0, 0);
    let used: std::collections::BTreeSet<&String> = before.rows.iter().flat_map(|r| r.cells.keys()).collect();
    assert_eq!(picked(&w), **used.first().unwrap());
    w.tap(NONE, Key::End);
    w.settle();
    assert_eq!(picked(&w), **used.last().unwrap());
    // How the columns stand is no edit.
    assert_eq!(w.project().rows, before.rows);
    assert!(!w.app().history.dirty());
}

#[test]
fn the_discipline_is_a_choice_with_its_undo() {
    let mut w = Window::sample("sump_pump");
    w.click("in bursts");
    assert_eq!(w.project().discipline, Discipline::Burst);
    w.press(CTRL, Key::Z);
    assert_eq!(w.project().discipline, Discipline::Single);
}

#[test]
fn the_mouse_selects_edits_and_names_rows() {
    let mut w = Window::sample("sump_pump");
    let table = w.place(TABLE);
    // The first row lies below the header, to the right of the labels.
    let first = table.min + eframe::egui::vec2(140.0, 26.0 * 1.5);
    w.click_at(first);
    assert!(w.has_keyboard(TABLE));
    assert!(matches!(w.app().marks.picked, Some(Pick::Cell(r, _)) if r.at() == 0));
    w.drag(first, first + eframe::egui::vec2(10.0, 60.0));
    assert!(w.sees_with("cells selected"));
    w.click_at(table.min + eframe::egui::vec2(20.0, 26.0 * 2.5));
    assert_eq!(w.app().marks.picked, Some(Pick::Row(Row::new(1))));
    // A double click opens the cell.
    for _ in 0..2 {
        w.harness().hover_at(first);
        w.harness().drag_at(first);
        w.harness().drop_at(first);
        w.frame();
    }
    w.settle();
    assert!(w.app().table.typing());
    w.press(NONE, Key::Escape);
    assert!(!w.app().table.typing());
    assert_eq!(w.app().station, Station::Behaviour);
}
