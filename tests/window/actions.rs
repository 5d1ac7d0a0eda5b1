//! Every command is in a menu and on a key, and both do the same.

use std::collections::BTreeMap;

use eframe::egui::{Key, Modifiers};
use stillgate::project::Project;
use stillgate::window::actions::{Action, MENUS, Station};

use crate::drive::{ALT, BOTH, CTRL, NONE, SHIFT, Window};

/// What a person would notice of a command.
#[derive(Debug, PartialEq)]
struct Outcome {
    project: Project,
    station: Station,
    dialog: Option<String>,
    theme: String,
    zoom: f32,
    why: bool,
    undo: usize,
    redo: usize,
    closing: bool,
}

fn outcome(w: &Window, closing: bool) -> Outcome {
    let app = w.app();
    Outcome {
        project: w.project().clone(),
        station: app.station,
        dialog: app.dialog.as_ref().map(|d| format!("{d:?}")),
        theme: format!("{:?}", app.prefs.theme),
        zoom: app.prefs.zoom,
        why: app.prefs.why,
        undo: app.history.undo_names().count(),
        redo: app.history.redo_names().count(),
        closing,
    }
}

/// A window in which the command has something to do.
fn prepared(action: Action) -> Window {
    let mut w = Window::sample("sump_pump");
    if action == Action::Save {
        // Without a file, Save asks for a name.
        assert!(w.app().path.is_none());
    }
    match action {
        Action::Undo | Action::Redo => {
            w.cell(0, 2);
            w.press(NONE, Key::Delete);
            if action == Action::Redo {
                w.press(CTRL, Key::Z);
            }
        }
        Action::Go(Station::Behaviour) => w.go(Station::Merging),
        Action::FillDown => {
            w.cell(0, 0);
            w.repeat(1, SHIFT, Key::ArrowDown);
        }
        Action::MakeStable | Action::Clear | Action::SetInitial => w.cell(0, 2),
        Action::InsertRow
        | Action::DuplicateRow
        | Action::DeleteRow
        | Action::RowUp
        | Action::RowDown
        | Action::RenameRow => w.cell(1, 0),
        _ => {}
    }
    w
}

fn chord(action: Action) -> (Modifiers, Key) {
    let keys = action.keys().unwrap_or_else(|| panic!("{action:?} has no keys"));
    // The keyboard reports Ctrl as well as the platform's command key.
    let mut modifiers = keys.modifiers;
    if modifiers.command {
        modifiers = modifiers.plus(Modifiers::CTRL);
    }
    (modifiers, keys.logical_key)
}

fn menu_of(action: Action) -> &'static str {
    MENUS.iter().find(|(_, list)| list.contains(&Some(action))).unwrap().0
}

fn words(w: &Window, action: Action) -> String {
    match action {
        Action::Undo => format!("Undo {}", w.app().history.undo_names().next().unwrap_or_default()),
        Action::Redo => format!("Redo {}", w.app().history.redo_names().next().unwrap_or_default()),
        _ => action.words().to_owned(),
    }
}

#[test]
fn every_command_is_reached_by_menu_and_by_its_keys() {
    for action in Action::all().filter(|a| *a != Action::Stop) {
        let mut by_keys = prepared(action);
        let before = outcome(&by_keys, false);
        let (modifiers, key) = chord(action);
        by_keys.tap(modifiers, key);
        by_keys.settle();
        let keyed = outcome(&by_keys, by_keys.closed);

        let mut by_menu = prepared(action);
        let words = words(&by_menu, action);
        by_menu.menu(menu_of(action), &words);
        let chosen = outcome(&by_menu, by_menu.closed);
        assert_ne!(before, keyed, "the keys of {action:?} do nothing");
        assert_eq!(keyed, chosen, "{action:?} by keys and by menu");
    }
}

#[test]
fn no_two_commands_share_keys_not_even_the_keys_of_the_table() {
    let mut seen: BTreeMap<String, Action> = BTreeMap::new();
    for action in Action::all() {
        let (modifiers, key) = chord(action);
        let text = format!("{modifiers:?} {key:?}");
        if let Some(other) = seen.insert(text.clone(), action) {
            panic!("{action:?} and {other:?} share {text}");
        }
    }
    // Clipboard and selection of the table and of text fields.
    for key in [Key::A, Key::C, Key::X, Key::V, Key::Home, Key::End] {
        assert!(!seen.contains_key(&format!("{CTRL:?} {key:?}")), "Ctrl+{key:?} is taken");
    }
    for key in [Key::Tab, Key::Enter, Key::Space, Key::Escape, Key::F2, Key::ArrowUp] {
        assert!(!seen.contains_key(&format!("{NONE:?} {key:?}")), "{key:?} is taken");
    }
}

#[test]
fn a_longer_chord_is_not_taken_for_the_shorter_one() {
    let mut w = Window::sample("sump_pump");
    w.cell(0, 2);
    w.press(NONE, Key::Delete);
    w.press(CTRL, Key::Z);
    let undone = w.project().clone();
    w.press(BOTH, Key::Z);
    assert_ne!(*w.project(), undone, "Ctrl+Shift+Z undid");
    // Alt and an arrow moves the row, the arrow alone the cursor.
    w.cell(1, 0);
    w.press(ALT, Key::ArrowDown);
    assert_eq!(w.project().rows[2].name, "rising");
}

#[test]
fn the_list_of_keys_names_every_command() {
    let mut w = Window::sample("sump_pump");
    w.press(NONE, Key::F1);
    let names = w.names();
    for action in Action::all() {
        assert!(names.iter().any(|n| n == action.words()), "{action:?} is not in the list of keys");
    }
    w.press(NONE, Key::Escape);
    assert!(w.app().dialog.is_none());
}

#[test]
fn a_search_is_stopped_by_its_key_and_the_best_so_far_stays() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("hard.ron");
    std::fs::write(&path, crate::tables::ring(420)).unwrap();
    let mut w = Window::start_only(&path);
    // However long the chain takes: Stop is heard while it runs, or it is done.
    let mut heard = false;
    for _ in 0..200 {
        if !w.app().working() {
            break;
        }
        heard = true;
        w.tap(CTRL, Key::Period);
    }
    w.settle();
    assert!(heard, "the table is too easy to be stopped");
    assert!(!w.app().working());
    assert!(w.app().design.spec.is_some());
}

#[test]
fn tab_leads_from_the_chain_to_the_station_and_round() {
    let mut w = Window::sample("sump_pump");
    for station in Station::ALL {
        w.go(station);
        let mut reached = Vec::new();
        for _ in 0..60 {
            w.tap(NONE, Key::Tab);
            reached.extend(w.focused());
        }
        let different: std::collections::BTreeSet<&String> = reached.iter().collect();
        let least = if station == Station::Behaviour { 1 } else { 8 };
        assert!(different.len() >= least, "{}: only {different:?}", station.name());
    }
}
