//! Dialogs. Each only collects an answer ([`Asked`]); `window::app` acts on it.

use eframe::egui::{self, Id, Key, Modal, RichText, TextEdit, Ui};

use crate::project::choices::Discipline;
use crate::project::{Edit, Project, RowEntry, limits};
use crate::window::actions::{Action, OTHER_KEYS};
use crate::window::files::Found;
use crate::window::theme::palette;

/// What a path is wanted for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Purpose {
    /// A project to open.
    Open,
    /// A place for the project.
    Project,
    /// A place for the equations.
    Equations,
    /// A place for the record.
    Record,
    /// A place for the design as text.
    Review,
    /// A place for a picture.
    Picture,
}

impl Purpose {
    /// Ending of a file name for it.
    pub fn ending(self) -> &'static str {
        match self {
            Purpose::Open | Purpose::Project => ".ron",
            Purpose::Equations | Purpose::Review => ".txt",
            Purpose::Record => ".json",
            Purpose::Picture => ".svg",
        }
    }

    fn title(self) -> &'static str {
        match self {
            Purpose::Open => "Open a project",
            Purpose::Project => "Save the project as",
            Purpose::Equations => "Save the equations as",
            Purpose::Record => "Save the record as",
            Purpose::Review => "Save the design as text as",
            Purpose::Picture => "Save the picture as",
        }
    }
}

/// What was about to happen when unsaved changes came up.
#[derive(Debug, Clone, PartialEq)]
pub enum Then {
    /// Start a new project.
    New,
    /// Ask for a file and open it.
    AskOpen,
    /// Open this file.
    Open(std::path::PathBuf),
    /// Open this sample.
    Sample(usize),
    /// Close the window.
    Quit,
}

/// An open dialog with what was typed so far.
#[derive(Debug, Clone)]
pub enum Dialog {
    /// Signal names of a new project.
    New {
        /// Names, separated by spaces.
        inputs: String,
        /// Names, separated by spaces.
        outputs: String,
        /// Names of the first rows, separated by spaces.
        rows: String,
        /// One line.
        title: String,
        /// How the inputs may change.
        discipline: Discipline,
    },
    /// A path.
    Path {
        /// What for.
        purpose: Purpose,
        /// As typed or chosen.
        path: String,
        /// What is to be written, unless it is the project.
        text: Option<String>,
        /// The file is there: ask once more.
        replace: bool,
    },
    /// Unsaved changes.
    Unsaved(Then),
    /// The file has changed on the disk.
    ChangedOnDisk {
        /// Whether it was found out while saving.
        saving: bool,
    },
    /// A crashed window left a copy.
    Recover(Found),
    /// Signals with their new names, in order, as (name, old place).
    Signals {
        /// Inputs.
        inputs: Vec<(String, Option<usize>)>,
        /// Outputs.
        outputs: Vec<(String, Option<usize>)>,
    },
    /// Title and notes.
    About {
        /// One line.
        title: String,
        /// Free text.
        notes: String,
    },
    /// A new name for a row.
    RenameRow {
        /// The row.
        row: usize,
        /// The new name.
        name: String,
    },
    /// A new name for a merged row.
    NameMerged {
        /// The merged row.
        index: usize,
        /// The new name.
        name: String,
    },
    /// Something to be told: title and text.
    Tell(String, String),
    /// The list of keys.
    Keys,
}

/// The answer.
#[derive(Debug, Clone)]
pub enum Asked {
    /// Nothing further.
    Close,
    /// A new project.
    Create(Box<Project>),
    /// An edit.
    Edit(Edit),
    /// Edits that are one for the user, with their name.
    Edits(Vec<Edit>, &'static str),
    /// A path was given.
    Path(Purpose, String, Option<String>),
    /// Show the system's dialog; `Some(name)` for saving. This dialog stays open.
    Browse(Box<Dialog>, Option<String>),
    /// Save, then go on.
    SaveThen(Then),
    /// Give the changes up and go on.
    DiscardThen(Then),
    /// Read the file again.
    Reload,
    /// Write over what is on the disk.
    Overwrite,
    /// Keep working on what is here.
    KeepMine,
    /// Open the copy.
    Recover(Found),
    /// Delete the copy.
    Forget(Found),
}

impl Dialog {
    /// An empty form for a new project.
    pub fn new_project() -> Dialog {
        Dialog::New {
            inputs: String::new(),
            outputs: String::new(),
            rows: String::new(),
            title: String::new(),
            discipline: Discipline::Single,
        }
    }

    /// Asks for a path.
    pub fn path(purpose: Purpose, path: String, text: Option<String>) -> Dialog {
        Dialog::Path { purpose, path, text, replace: false }
    }

    /// The signals of a project, to be changed.
    pub fn signals(project: &Project) -> Dialog {
        let list = |names: &[String]| names.iter().enumerate().map(|(i, n)| (n.clone(), Some(i))).collect();
        Dialog::Signals { inputs: list(&project.inputs), outputs: list(&project.outputs) }
    }

    /// Title and notes of a project, to be changed.
    pub fn about(project: &Project) -> Dialog {
        Dialog::About { title: project.title.clone(), notes: project.notes.clone() }
    }
}

/// Shows the dialog; `None` while it is open.
pub fn show(ctx: &egui::Context, dialog: &mut Dialog, project: &Project) -> Option<Asked> {
    let mut asked = None;
    let modal = Modal::new(Id::unique("dialog")).show(ctx, |ui| {
        ui.set_width(if matches!(dialog, Dialog::Keys) { 620.0 } else { 440.0 });
        asked = body(ui, dialog, project);
    });
    if asked.is_none() && modal.should_close() {
        asked = Some(match dialog {
            Dialog::ChangedOnDisk { .. } => Asked::KeepMine,
            _ => Asked::Close,
        });
    }
    asked
}

fn body(ui: &mut Ui, dialog: &mut Dialog, project: &Project) -> Option<Asked> {
    match dialog {
        Dialog::New { inputs, outputs, rows, title, discipline } => {
            new_project(ui, (title, inputs, outputs, rows), discipline)
        }
        Dialog::Path { .. } => path(ui, dialog),
        Dialog::Unsaved(then) => {
            heading(ui, "Unsaved changes");
            ui.label("The project has changes that are not in its file.");
            buttons(
                ui,
                &[
                    ("Save", Asked::SaveThen(then.clone())),
                    ("Discard", Asked::DiscardThen(then.clone())),
                    ("Keep editing", Asked::Close),
                ],
            )
        }
        Dialog::ChangedOnDisk { saving } => {
            heading(ui, "The file has changed on the disk");
            ui.label("Another program wrote it since it was opened here.");
            let mine = if *saving {
                ("Write mine over it", Asked::Overwrite)
            } else {
                ("Keep mine", Asked::KeepMine)
            };
            buttons(ui, &[("Read it again", Asked::Reload), mine])
        }
        Dialog::Recover(found) => {
            heading(ui, "Unsaved work was found");
            let of =
                found.of.as_ref().map_or("a project without a file".to_owned(), |p| p.display().to_string());
            ui.label(format!("The program ended without saving {of}. A copy of the work is there."));
            buttons(
                ui,
                &[
                    ("Open the copy", Asked::Recover(found.clone())),
                    ("Delete it", Asked::Forget(found.clone())),
                    ("Later", Asked::Close),
                ],
            )
        }
        Dialog::Signals { inputs, outputs } => signals(ui, inputs, outputs, project),
        Dialog::About { title, notes } => {
            heading(ui, "Title and notes");
            field(ui, "Title", title, true);
            let label = ui.label("Notes");
            ui.add(TextEdit::multiline(notes).desired_rows(8).desired_width(f32::INFINITY))
                .labelled_by(label.id);
            let edits = vec![Edit::SetTitle(title.clone()), Edit::SetNotes(notes.clone())];
            buttons(ui, &[("Keep", Asked::Edits(edits, "Change title and notes")), ("Cancel", Asked::Close)])
        }
        Dialog::RenameRow { row, name } => {
            heading(ui, "Rename the row");
            let enter = field(ui, "Name", name, true);
            ui.weak("Every reference follows.");
            let edits = Asked::Edit(Edit::RenameRow { row: *row, name: name.trim().to_owned() });
            if enter {
                return Some(edits);
            }
            buttons(ui, &[("Rename", edits), ("Cancel", Asked::Close)])
        }
        Dialog::NameMerged { index, name } => {
            heading(ui, "Name the merged row");
            let enter = field(ui, "Name", name, true);
            let edits = Asked::Edit(Edit::NameMergedRow { index: *index, name: name.trim().to_owned() });
            if enter {
                return Some(edits);
            }
            buttons(ui, &[("Rename", edits), ("Cancel", Asked::Close)])
        }
        Dialog::Tell(title, text) => {
            heading(ui, title);
            ui.label(text.as_str());
            buttons(ui, &[("Close", Asked::Close)])
        }
        Dialog::Keys => {
            list_of_keys(ui);
            buttons(ui, &[("Close", Asked::Close)])
        }
    }
}

fn heading(ui: &mut Ui, text: &str) {
    ui.label(RichText::new(text).heading());
    ui.add_space(4.0);
}

/// A labelled text field; whether Enter ended it. `first` takes the keyboard when the dialog opens.
fn field(ui: &mut Ui, name: &str, text: &mut String, first: bool) -> bool {
    let label = ui.label(name);
    let response = ui.add(TextEdit::singleline(text).desired_width(f32::INFINITY)).labelled_by(label.id);
    let ended = response.lost_focus() && ui.input(|i| i.key_pressed(Key::Enter));
    // Not in the frame in which Enter gives the keyboard up: taking it back would hide that.
    if first && !ended && ui.memory(|m| m.focused().is_none()) {
        response.request_focus();
    }
    ended
}

fn buttons(ui: &mut Ui, list: &[(&str, Asked)]) -> Option<Asked> {
    ui.add_space(8.0);
    let mut asked = None;
    ui.horizontal(|ui| {
        for (words, answer) in list {
            if ui.button(*words).clicked() {
                asked = Some(answer.clone());
            }
        }
    });
    asked
}

fn names(text: &str) -> Vec<String> {
    text.split([' ', ',', ';', '\t']).filter(|w| !w.is_empty()).map(str::to_owned).collect()
}

fn new_project(
    ui: &mut Ui,
    (title, inputs, outputs, rows): (&mut String, &mut String, &mut String, &mut String),
    discipline: &mut Discipline,
) -> Option<Asked> {
    heading(ui, "New project");
    field(ui, "Title", title, true);
    field(ui, "Inputs (names with spaces between)", inputs, false);
    field(ui, "Outputs", outputs, false);
    let enter =
        field(ui, "First rows (optional; each is a state in which the controller rests)", rows, false);
    ui.horizontal(|ui| {
        ui.label("Inputs change");
        ui.radio_value(discipline, Discipline::Single, "one at a time");
        ui.radio_value(discipline, Discipline::Burst, "in bursts");
    });
    let (inputs, outputs) = (names(inputs), names(outputs));
    let fits = !inputs.is_empty() && inputs.len() <= limits::INPUTS && outputs.len() <= limits::OUTPUTS;
    if inputs.len() > limits::INPUTS || outputs.len() > limits::OUTPUTS {
        ui.colored_label(
            palette(ui.visuals()).bad,
            format!("At most {} inputs and {} outputs.", limits::INPUTS, limits::OUTPUTS),
        );
    }
    ui.add_space(8.0);
    let mut asked = None;
    ui.horizontal(|ui| {
        let create = ui.add_enabled(fits, egui::Button::new("Create")).clicked();
        if create || enter && fits {
            let mut project = Project::new(inputs.clone(), outputs.clone());
            project.title = title.trim().to_owned();
            project.discipline = *discipline;
            for name in names(rows).into_iter().take(limits::ROWS) {
                project.rows.push(RowEntry { name, ..RowEntry::default() });
            }
            asked = Some(Asked::Create(Box::new(project)));
        }
        if ui.button("Cancel").clicked() {
            asked = Some(Asked::Close);
        }
    });
    asked
}

fn path(ui: &mut Ui, dialog: &mut Dialog) -> Option<Asked> {
    let again = dialog.clone();
    let Dialog::Path { purpose, path, text, replace } = dialog else { return None };
    heading(ui, purpose.title());
    let before = path.clone();
    let enter = field(ui, "Path", path, true);
    if *path != before {
        *replace = false;
    }
    let opens = *purpose == Purpose::Open;
    if *replace {
        ui.colored_label(
            palette(ui.visuals()).warn,
            "This file is there already. Press again to replace it.",
        );
    }
    ui.add_space(8.0);
    let mut asked = None;
    ui.horizontal(|ui| {
        let words = match (opens, *replace) {
            (true, _) => "Open",
            (false, false) => "Save",
            (false, true) => "Replace",
        };
        let ready = !path.trim().is_empty();
        if ui.add_enabled(ready, egui::Button::new(words)).clicked() || enter && ready {
            if !opens && !*replace && std::path::Path::new(path.trim()).exists() {
                *replace = true;
            } else {
                asked = Some(Asked::Path(*purpose, path.trim().to_owned(), text.clone()));
            }
        }
        if ui.button("Browse…").clicked() {
            let file =
                std::path::Path::new(path.trim()).file_name().map(|n| n.to_string_lossy().into_owned());
            asked = Some(Asked::Browse(Box::new(again), (!opens).then(|| file.unwrap_or_default())));
        }
        if ui.button("Cancel").clicked() {
            asked = Some(Asked::Close);
        }
    });
    asked
}

type Named = Vec<(String, Option<usize>)>;

fn signals(ui: &mut Ui, inputs: &mut Named, outputs: &mut Named, project: &Project) -> Option<Asked> {
    heading(ui, "Signals");
    ui.columns(2, |columns| {
        signal_list(&mut columns[0], "Input", inputs, limits::INPUTS);
        signal_list(&mut columns[1], "Output", outputs, limits::OUTPUTS);
    });
    ui.weak("Columns and output words follow. A new input stands at 0 in every cell that is there.");
    let edits = signal_edits(inputs, outputs, project);
    buttons(ui, &[("Keep", Asked::Edits(edits, "Change signals")), ("Cancel", Asked::Close)])
}

fn signal_list(ui: &mut Ui, kind: &str, list: &mut Named, most: usize) {
    ui.label(RichText::new(format!("{kind}s")).strong());
    let mut change = None;
    let len = list.len();
    for (i, (name, _)) in list.iter_mut().enumerate() {
        ui.horizontal(|ui| {
            let response = ui.add(TextEdit::singleline(name).desired_width(100.0));
            response.accessible_name(format!("{kind} {}", i + 1));
            let mut button = |sign: &str, what: &str, on: bool| {
                let response = ui.add_enabled(on, egui::Button::new(sign).small());
                response.accessible_name(format!("{what} {} {}", kind.to_lowercase(), i + 1)).clicked()
            };
            if button("↑", "Move up", i > 0) {
                change = Some((i, 'u'));
            }
            if button("↓", "Move down", i + 1 < len) {
                change = Some((i, 'd'));
            }
            if button("×", "Remove", true) {
                change = Some((i, 'x'));
            }
        });
    }
    match change {
        Some((i, 'u')) => list.swap(i - 1, i),
        Some((i, 'd')) => list.swap(i, i + 1),
        Some((i, _)) => {
            list.remove(i);
        }
        None => {}
    }
    if ui.add_enabled(len < most, egui::Button::new(format!("Add {}", kind.to_lowercase()))).clicked() {
        list.push((String::new(), None));
    }
}

/// The edits that lead from the project's signals to the wanted lists: remove, then move, then add and rename.
pub fn signal_edits(
    inputs: &[(String, Option<usize>)],
    outputs: &[(String, Option<usize>)],
    project: &Project,
) -> Vec<Edit> {
    let mut edits = Vec::new();
    let mut plan = |wanted: &[(String, Option<usize>)], names: &[String], input: bool| {
        let mut now: Vec<usize> = (0..names.len()).collect();
        for gone in (0..names.len()).rev().filter(|i| !wanted.iter().any(|w| w.1 == Some(*i))) {
            now.remove(gone);
            edits.push(if input {
                Edit::RemoveInput { input: gone }
            } else {
                Edit::RemoveOutput { output: gone }
            });
        }
        let order: Vec<usize> = wanted.iter().filter_map(|w| w.1).collect();
        for (to, old) in order.iter().enumerate() {
            let Some(from) = now.iter().position(|n| n == old) else { continue };
            if from != to {
                let moved = now.remove(from);
                now.insert(to, moved);
                edits.push(if input {
                    Edit::MoveInput { input: from, to }
                } else {
                    Edit::MoveOutput { output: from, to }
                });
            }
        }
        for (at, (name, old)) in wanted.iter().enumerate() {
            let name = name.trim().to_owned();
            match old {
                None if input => edits.push(Edit::AddInput { at, name }),
                None => edits.push(Edit::AddOutput { at, name }),
                Some(old) if names[*old] != name => edits.push(if input {
                    Edit::RenameInput { input: at, name }
                } else {
                    Edit::RenameOutput { output: at, name }
                }),
                Some(_) => {}
            }
        }
    };
    plan(inputs, &project.inputs, true);
    plan(outputs, &project.outputs, false);
    edits
}

fn list_of_keys(ui: &mut Ui) {
    heading(ui, "Keys");
    egui::ScrollArea::vertical().max_height(420.0).show(ui, |ui| {
        egui::Grid::new("keys").num_columns(2).striped(true).spacing([20.0, 4.0]).show(ui, |ui| {
            for action in Action::all() {
                if let Some(keys) = action.keys() {
                    ui.label(RichText::new(ui.ctx().format_shortcut(&keys)).monospace());
                    ui.label(action.words());
                    ui.end_row();
                }
            }
            for (keys, what) in OTHER_KEYS {
                ui.label(RichText::new(keys).monospace());
                ui.label(what);
                ui.end_row();
            }
        });
    });
}
