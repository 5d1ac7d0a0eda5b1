//! Undo and redo through a whole job, and the names of the steps.

use eframe::egui::Key;
use stillgate::project::Project;
use stillgate::window::actions::Station;

use crate::drive::{ALT, BOTH, CTRL, NONE, SHIFT, Window};

/// The project without what the window remembers of its layout, which is no part of the history.
fn work(w: &Window) -> Project {
    Project { layout: Default::default(), ..w.project().clone() }
}

#[test]
fn undo_leads_back_to_the_empty_table_and_redo_to_the_end() {
    let mut w = Window::sample("sump_pump");
    w.press(CTRL, Key::N);
    w.tab_to("Title");
    w.tap(NONE, Key::Tab);
    w.type_text("low high");
    w.tap(NONE, Key::Tab);
    w.type_text("pump");
    w.tap(NONE, Key::Tab);
    w.press(NONE, Key::Enter);
    let empty = work(&w);
    assert!(empty.rows.is_empty());

    let mut states = vec![empty.clone()];
    let mut did = |w: &mut Window| {
        let now = work(w);
        assert_ne!(states.last(), Some(&now), "a step without an effect");
        states.push(now);
    };
    w.press(CTRL, Key::I);
    did(&mut w);
    w.press(CTRL, Key::I);
    did(&mut w);
    w.cell(0, 0);
    w.enter(". 0");
    did(&mut w);
    w.cell(0, 2);
    w.enter("b");
    did(&mut w);
    w.cell(1, 2);
    w.enter(". 1");
    did(&mut w);
    w.cell(1, 0);
    w.enter("a");
    did(&mut w);
    w.cell(0, 0);
    w.press(BOTH, Key::I);
    did(&mut w);
    w.press(CTRL, Key::R);
    w.tab_to("Name");
    w.retype("dry");
    w.press(NONE, Key::Enter);
    did(&mut w);
    w.cell(1, 0);
    w.press(CTRL, Key::D);
    did(&mut w);
    w.press(ALT, Key::ArrowUp);
    did(&mut w);
    w.cell(0, 0);
    w.tap(SHIFT, Key::ArrowDown);
    w.press(BOTH, Key::D);
    did(&mut w);
    w.cell(1, 0);
    w.press(CTRL, Key::Delete);
    did(&mut w);
    w.press(CTRL, Key::T);
    w.tab_to("Title");
    w.retype("Small pump");
    w.click("Keep");
    did(&mut w);
    w.click("in bursts");
    did(&mut w);
    w.go(Station::Equations);
    w.click("product of sums");
    did(&mut w);
    let end = work(&w);

    // Each step has a name, and the menu shows it.
    let steps = w.app().history.undo_names().count();
    assert!(w.app().history.undo_names().all(|n| !n.is_empty()));
    assert_eq!(steps, states.len() - 1, "one gesture, one step");
    for before in states.iter().rev().skip(1) {
        w.press(CTRL, Key::Z);
        assert_eq!(work(&w), *before);
    }
    assert_eq!(work(&w), empty);
    w.press(CTRL, Key::Z);
    assert!(w.app().status.starts_with("Nothing to be undone"), "{}", w.app().status);
    for _ in 0..steps {
        w.press(BOTH, Key::Z);
        assert!(w.app().status.starts_with("Redone: "), "{}", w.app().status);
    }
    assert_eq!(work(&w), end);
    w.press(BOTH, Key::Z);
    assert_eq!(work(&w), end);
}

#[test]
fn the_design_follows_undo_and_redo() {
    let mut w = Window::sample("sump_pump");
    let figures = w.app().figures().clone();
    w.cell(0, 2);
    w.press(NONE, Key::Delete);
    let other = w.app().figures().clone();
    assert_ne!(figures, other);
    w.press(CTRL, Key::Z);
    assert_eq!(*w.app().figures(), figures);
    w.press(BOTH, Key::Z);
    assert_eq!(*w.app().figures(), other);
    assert!(w.app().history.dirty());
    w.press(CTRL, Key::Z);
    assert!(!w.app().history.dirty());
}

#[test]
fn undo_while_a_cell_is_typed_belongs_to_the_text() {
    let mut w = Window::sample("sump_pump");
    w.cell(0, 2);
    w.enter("dry 0");
    let after = w.project().clone();
    w.type_text("full");
    w.press(CTRL, Key::Z);
    assert_eq!(*w.project(), after);
    w.press(NONE, Key::Escape);
    w.press(CTRL, Key::Z);
    assert_ne!(*w.project(), after);
}
