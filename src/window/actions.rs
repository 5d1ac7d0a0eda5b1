//! Every command of the window: its words, its keys, its menu. One place carries them out (`window::app`).

use eframe::egui::{Key, KeyboardShortcut, Modifiers};

/// The six stations of the chain.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum Station {
    /// The primitive table.
    #[default]
    Behaviour,
    /// Implication table, merger diagram, cover, reduced table.
    Merging,
    /// State assignment.
    Codes,
    /// Functions and maps.
    Equations,
    /// What was checked.
    Proof,
    /// Files for others.
    HandOff,
}

impl Station {
    /// All stations in the order of the chain.
    pub const ALL: [Station; 6] = [
        Station::Behaviour,
        Station::Merging,
        Station::Codes,
        Station::Equations,
        Station::Proof,
        Station::HandOff,
    ];

    /// Its name.
    pub fn name(self) -> &'static str {
        match self {
            Station::Behaviour => "Behaviour",
            Station::Merging => "Merging",
            Station::Codes => "Codes",
            Station::Equations => "Equations",
            Station::Proof => "Proof",
            Station::HandOff => "Hand-off",
        }
    }

    /// The station with this name.
    pub fn named(name: &str) -> Option<Station> {
        Station::ALL.into_iter().find(|s| s.name() == name)
    }
}

/// A command that a menu or a key gives.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Action {
    /// Asks for signal names and starts an empty table.
    New,
    /// Asks for a file.
    Open,
    /// Writes the file.
    Save,
    /// Asks for a name and writes the file.
    SaveAs,
    /// Writes the equations as text.
    SaveEquations,
    /// Writes the record as JSON.
    SaveRecord,
    /// Closes the window.
    Quit,
    /// Takes back the last edit.
    Undo,
    /// Makes it again.
    Redo,
    /// A new row after the cursor.
    InsertRow,
    /// A copy of the row.
    DuplicateRow,
    /// Removes the rows of the range.
    DeleteRow,
    /// Moves the row up.
    RowUp,
    /// Moves the row down.
    RowDown,
    /// Asks for the row's new name.
    RenameRow,
    /// Copies the first row of the range to the others.
    FillDown,
    /// Makes the cells of the range stable.
    MakeStable,
    /// Makes the cells of the range unspecified.
    Clear,
    /// Makes the cursor's cell the one after power-up.
    SetInitial,
    /// Adds, renames, moves, removes signals.
    Signals,
    /// Title and notes.
    About,
    /// Goes to a station.
    Go(Station),
    /// Shows or hides the why pane.
    WhyPane,
    /// Counting or Gray order of the columns.
    ColumnOrder,
    /// All columns or those in use.
    ColumnsUsed,
    /// Larger text.
    Larger,
    /// Smaller text.
    Smaller,
    /// Light, dark, or as the system.
    Theme,
    /// Ends the running search with the best so far.
    Stop,
    /// The list of keys.
    Keys,
}

/// The menus in order: a title and its commands; `None` is a line between groups.
pub const MENUS: [(&str, &[Option<Action>]); 4] = [
    (
        "File",
        &[
            Some(Action::New),
            Some(Action::Open),
            None,
            Some(Action::Save),
            Some(Action::SaveAs),
            None,
            Some(Action::SaveEquations),
            Some(Action::SaveRecord),
            None,
            Some(Action::Quit),
        ],
    ),
    (
        "Edit",
        &[
            Some(Action::Undo),
            Some(Action::Redo),
            None,
            Some(Action::InsertRow),
            Some(Action::DuplicateRow),
            Some(Action::DeleteRow),
            Some(Action::RowUp),
            Some(Action::RowDown),
            Some(Action::RenameRow),
            None,
            Some(Action::FillDown),
            Some(Action::MakeStable),
            Some(Action::Clear),
            Some(Action::SetInitial),
            None,
            Some(Action::Signals),
            Some(Action::About),
        ],
    ),
    (
        "View",
        &[
            Some(Action::Go(Station::Behaviour)),
            Some(Action::Go(Station::Merging)),
            Some(Action::Go(Station::Codes)),
            Some(Action::Go(Station::Equations)),
            Some(Action::Go(Station::Proof)),
            Some(Action::Go(Station::HandOff)),
            None,
            Some(Action::WhyPane),
            Some(Action::ColumnOrder),
            Some(Action::ColumnsUsed),
            None,
            Some(Action::Larger),
            Some(Action::Smaller),
            Some(Action::Theme),
        ],
    ),
    ("Help", &[Some(Action::Keys), Some(Action::Stop)]),
];

impl Action {
    /// The words in the menu.
    pub fn words(self) -> &'static str {
        match self {
            Action::New => "New…",
            Action::Open => "Open…",
            Action::Save => "Save",
            Action::SaveAs => "Save as…",
            Action::SaveEquations => "Save equations…",
            Action::SaveRecord => "Save record…",
            Action::Quit => "Quit",
            Action::Undo => "Undo",
            Action::Redo => "Redo",
            Action::InsertRow => "Insert row",
            Action::DuplicateRow => "Duplicate row",
            Action::DeleteRow => "Delete rows",
            Action::RowUp => "Move row up",
            Action::RowDown => "Move row down",
            Action::RenameRow => "Rename row…",
            Action::FillDown => "Fill down",
            Action::MakeStable => "Make stable",
            Action::Clear => "Make unspecified",
            Action::SetInitial => "Start here after power-up",
            Action::Signals => "Signals…",
            Action::About => "Title and notes…",
            Action::Go(station) => station.name(),
            Action::WhyPane => "Why pane",
            Action::ColumnOrder => "Columns in Gray order",
            Action::ColumnsUsed => "Only columns in use",
            Action::Larger => "Larger text",
            Action::Smaller => "Smaller text",
            Action::Theme => "Light / dark",
            Action::Stop => "Stop the search",
            Action::Keys => "Keys",
        }
    }

    /// Its keys.
    pub fn keys(self) -> Option<KeyboardShortcut> {
        let on = |modifiers: Modifiers, key: Key| Some(KeyboardShortcut::new(modifiers, key));
        const CTRL: Modifiers = Modifiers::COMMAND;
        const BOTH: Modifiers = Modifiers::COMMAND.plus(Modifiers::SHIFT);
        match self {
            Action::New => on(CTRL, Key::N),
            Action::Open => on(CTRL, Key::O),
            Action::Save => on(CTRL, Key::S),
            Action::SaveAs => on(BOTH, Key::S),
            Action::SaveEquations => on(BOTH, Key::E),
            Action::SaveRecord => on(BOTH, Key::J),
            Action::Quit => on(CTRL, Key::Q),
            Action::Undo => on(CTRL, Key::Z),
            Action::Redo => on(BOTH, Key::Z),
            Action::InsertRow => on(CTRL, Key::I),
            Action::DuplicateRow => on(CTRL, Key::D),
            Action::DeleteRow => on(CTRL, Key::Delete),
            Action::RowUp => on(Modifiers::ALT, Key::ArrowUp),
            Action::RowDown => on(Modifiers::ALT, Key::ArrowDown),
            Action::RenameRow => on(CTRL, Key::R),
            Action::FillDown => on(BOTH, Key::D),
            Action::MakeStable => on(CTRL, Key::Enter),
            Action::Clear => on(Modifiers::NONE, Key::Delete),
            Action::SetInitial => on(BOTH, Key::I),
            Action::Signals => on(CTRL, Key::G),
            Action::About => on(CTRL, Key::T),
            Action::Go(station) => on(
                CTRL,
                match station {
                    Station::Behaviour => Key::Num1,
                    Station::Merging => Key::Num2,
                    Station::Codes => Key::Num3,
                    Station::Equations => Key::Num4,
                    Station::Proof => Key::Num5,
                    Station::HandOff => Key::Num6,
                },
            ),
            Action::WhyPane => on(Modifiers::NONE, Key::F9),
            Action::ColumnOrder => on(Modifiers::NONE, Key::F7),
            Action::ColumnsUsed => on(Modifiers::NONE, Key::F8),
            Action::Larger => on(CTRL, Key::Plus),
            Action::Smaller => on(CTRL, Key::Minus),
            Action::Theme => on(Modifiers::NONE, Key::F10),
            Action::Stop => on(CTRL, Key::Period),
            Action::Keys => on(Modifiers::NONE, Key::F1),
        }
    }

    /// Commands that belong to the grid: their keys count only while the table has the keyboard.
    pub fn in_table(self) -> bool {
        matches!(self, Action::Clear | Action::MakeStable | Action::RowUp | Action::RowDown)
    }

    /// All commands in menu order.
    pub fn all() -> impl Iterator<Item = Action> {
        MENUS.iter().flat_map(|(_, actions)| actions.iter().flatten().copied())
    }
}

/// Keys that no menu shows, with what they do: for the list of keys.
pub const OTHER_KEYS: [(&str, &str); 12] = [
    ("Arrows, Tab, Shift+Tab", "move in the table; with Shift, arrows select a range"),
    ("Home, End, Ctrl+Home, Ctrl+End", "first and last column; first and last cell"),
    ("Page Up, Page Down", "a screen up or down"),
    ("Letters, digits, - or .", "type a cell: a next row, or outputs, or both with a space between"),
    ("Enter, F2", "edit the cell; Enter again keeps it and goes down, Tab goes right, Escape leaves it"),
    ("Space", "make the cell stable, or leave it if it is"),
    ("Ctrl+C, Ctrl+X, Ctrl+V", "copy, cut, paste as tab-separated text, for a spreadsheet"),
    ("Ctrl+A", "select all cells"),
    ("Arrows in a picture", "go to the next item in that direction"),
    ("Ctrl+wheel, drag, double click", "zoom, pan, fit a picture"),
    ("Tab, Shift+Tab", "next and previous control outside the table"),
    ("Escape", "leave the table, close a dialog"),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_two_commands_share_their_keys_or_words() {
        let all: Vec<Action> = Action::all().collect();
        for (i, a) in all.iter().enumerate() {
            assert!(a.keys().is_some(), "{a:?} has no keys");
            for b in &all[i + 1..] {
                assert_ne!(a.keys(), b.keys(), "{a:?} and {b:?}");
                assert_ne!(a.words(), b.words());
            }
        }
    }
}
