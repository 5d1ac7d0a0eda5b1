//! A whole job by keyboard alone: from File, New to equations in a file.

use eframe::egui::Key;
use stillgate::window::actions::Station;

use crate::drive::{BOTH, CTRL, NONE, TABLE, Window, read};

/// The gated D latch: D and G in, Q out. Each row with its next rows in columns 00, 01, 10, 11 of D G.
const LATCH: [(&str, [&str; 4]); 6] = [
    ("a", ["c", ". 0", "", "b"]),
    ("b", ["", "a", "e", ". 1"]),
    ("c", [". 0", "a", "d", ""]),
    ("d", ["c", "", ". 0", "b"]),
    ("e", ["f", "", ". 1", "b"]),
    ("f", [". 1", "a", "e", ""]),
];

/// Types the latch into the table, whose cursor must be on the first cell.
fn type_latch(w: &mut Window) {
    for (_, cells) in LATCH {
        for text in cells {
            if text.is_empty() {
                w.tap(NONE, Key::Tab);
            } else {
                w.type_text(text);
                w.tap(NONE, Key::Tab);
            }
        }
        w.tap(NONE, Key::Home);
        w.tap(NONE, Key::ArrowDown);
    }
    w.settle();
}

#[test]
fn from_new_to_saved_equations_by_keyboard_alone() {
    let folder = tempfile::tempdir().unwrap();
    let mut w = Window::sample("sump_pump");
    w.press(CTRL, Key::N);
    assert!(w.sees("New project"));
    w.tab_to("Title");
    w.type_text("Gated D latch");
    w.tap(NONE, Key::Tab);
    w.type_text("D G");
    w.tap(NONE, Key::Tab);
    w.type_text("Q");
    w.tap(NONE, Key::Tab);
    w.type_text("a b c d e f");
    w.press(NONE, Key::Enter);
    assert!(w.app().dialog.is_none());
    assert_eq!(w.project().inputs, ["D", "G"]);
    assert_eq!(w.project().rows.len(), 6);
    assert!(w.has_keyboard(TABLE), "the new table waits for the mouse");

    type_latch(&mut w);
    w.cell(2, 0);
    w.press(BOTH, Key::I);
    assert_eq!(w.project().initial, Some(("c".into(), "00".into())));
    let words: Vec<&str> = w.app().figures().iter().map(|f| f.text.as_str()).collect();
    assert_eq!(words[1], "6 → 2, smallest");
    assert_eq!(words[2], "1 bit, no critical race");
    assert_eq!(words[5], "ready");

    let project = folder.path().join("latch.ron");
    w.press(CTRL, Key::S);
    w.tab_to("Path");
    w.retype(&project.display().to_string());
    w.press(NONE, Key::Enter);
    assert_eq!(read(&project).rows.len(), 6);
    assert!(!w.app().history.dirty());

    let equations = folder.path().join("latch.txt");
    w.press(BOTH, Key::E);
    w.tab_to("Path");
    w.retype(&equations.display().to_string());
    w.press(NONE, Key::Enter);
    // Next state D·G + G'·y, and D·y against the static hazard, as the textbooks have it.
    let text = std::fs::read_to_string(&equations).unwrap();
    for term in ["D·G", "D·y1", "G'·y1"] {
        assert!(text.contains(term), "no {term} in\n{text}");
    }
    assert!(text.lines().any(|l| l.trim_start().starts_with("Q = y1")), "{text}");

    // Saving again over a file that is there asks first.
    w.press(BOTH, Key::E);
    w.tab_to("Path");
    w.retype(&equations.display().to_string());
    w.press(NONE, Key::Enter);
    assert!(w.sees_with("This file is there already"));
    w.press(NONE, Key::Escape);
    assert!(w.app().dialog.is_none());
    w.go(Station::HandOff);
}
