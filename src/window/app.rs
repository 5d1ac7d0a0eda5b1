//! The state of the window, and the one place that carries commands out.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::mpsc::{Receiver, TryRecvError};

use eframe::egui::{self, RichText, ThemePreference, Ui, ViewportCommand};

use crate::design::values::Pick;
use crate::design::{Alternative, Deriver, Design, alternatives};
use crate::explain::figures::{Figure, figures};
use crate::explain::links::linked;
use crate::explain::{Why, why};
use crate::handoff::Notation;
use crate::project::{self, Edit, EditError, History, Project};
use crate::window::actions::{Action, MENUS, Station};
use crate::window::behaviour::{self, TableView};
use crate::window::chain::{Fresh, chain};
use crate::window::codes::{self, CodesView};
use crate::window::dialogs::{self, Asked, Dialog, Purpose, Then};
use crate::window::equations::{self, EquationsView};
use crate::window::files::{self, Found, Recovery, Stamp};
use crate::window::handoff::{self, HandOffView};
use crate::window::keys;
use crate::window::merging::{self, MergingView};
use crate::window::paint::Marks;
use crate::window::proof::{self, ProofView};
use crate::window::samples::SAMPLES;
use crate::window::theme;
use crate::window::why_pane::why_pane;
use crate::window::worker::Worker;

/// Seconds between looks at the file on the disk, and between an edit and its recovery copy.
const LOOK_SECONDS: f64 = 1.5;
/// Entries of the list of recent files.
const RECENT: usize = 8;

/// How the window starts.
#[derive(Debug, Clone, Default)]
pub struct Start {
    /// A project to open; otherwise a sample.
    pub file: Option<PathBuf>,
    /// Folder for the recovery copy; without one there is none.
    pub data: Option<PathBuf>,
}

/// What survives a restart.
#[derive(Debug, Clone, serde::Serialize, serde::Deserialize)]
#[serde(default)]
pub struct Prefs {
    /// Light, dark, or as the system.
    pub theme: ThemePreference,
    /// Zoom of everything.
    pub zoom: f32,
    /// Whether the why pane is open.
    pub why: bool,
    /// How equations are written.
    pub notation: Notation,
    /// Files opened last, newest first.
    pub recent: Vec<PathBuf>,
}

impl Default for Prefs {
    fn default() -> Self {
        Prefs {
            theme: ThemePreference::System,
            zoom: 1.0,
            why: true,
            notation: Notation::default(),
            recent: Vec::new(),
        }
    }
}

/// What a view asks for.
#[derive(Debug, Clone)]
pub enum Command {
    /// A command of the menu.
    Do(Action),
    /// Selects something, or nothing.
    Pick(Option<Pick>),
    /// Selects something and goes to the station that shows it.
    Show(Pick),
    /// An edit of the project.
    Edit(Edit),
    /// Edits that are one for the user, with their name.
    Edits(Vec<Edit>, &'static str),
    /// An edit that goes on with the last one (typing, dragging).
    EditOn(Edit),
    /// Opens a file.
    OpenFile(PathBuf),
    /// Opens a sample by its index.
    OpenSample(usize),
    /// Changes what the window remembers for the project.
    Layout(project::Layout),
    /// Changes how equations are written.
    Notation(Notation),
    /// Puts text on the clipboard.
    Copy(String),
    /// Asks for a file name and writes text there.
    Write(Purpose, String),
    /// Opens a dialog.
    Ask(Dialog),
    /// Says something in the status line.
    Say(String),
}

/// What every view may look at, and where it puts its commands.
pub struct Scene<'a> {
    /// The project as it is now.
    pub project: &'a Arc<Project>,
    /// The newest design; it may belong to an older project while a derivation is under way.
    pub design: &'a Arc<Design>,
    /// The selection.
    pub marks: &'a Marks,
    /// How equations are written.
    pub notation: Notation,
    /// Commands of this frame.
    pub commands: &'a mut Vec<Command>,
}

impl Scene<'_> {
    /// Sends a command.
    pub fn send(&mut self, command: Command) {
        self.commands.push(command);
    }
}

/// The window.
pub struct App {
    /// The project with its history.
    pub history: History,
    /// Its file.
    pub path: Option<PathBuf>,
    /// The newest design.
    pub design: Arc<Design>,
    /// The open station.
    pub station: Station,
    /// The selection.
    pub marks: Marks,
    /// What survives a restart.
    pub prefs: Prefs,
    /// The open dialog.
    pub dialog: Option<Dialog>,
    /// The status line.
    pub status: String,
    /// The table of the Behaviour station.
    pub table: TableView,
    merging: MergingView,
    codes: CodesView,
    equations: EquationsView,
    proof: ProofView,
    handoff: HandOffView,
    figures: [Figure; 6],
    explained: Option<Why>,
    took_ms: f64,
    revision: u64,
    worker: Worker<Design>,
    comparer: Worker<Vec<Alternative>>,
    compared: u64,
    stamp: Option<Stamp>,
    looked: f64,
    recovery: Option<Recovery>,
    kept: u64,
    kept_at: f64,
    asked: Option<Receiver<Option<PathBuf>>>,
    browse: Option<Option<String>>,
    closing: bool,
    title: String,
}

impl App {
    /// Opens the window's state.
    ///
    /// # Errors
    /// The operating system's, if it gives no worker thread.
    pub fn new(cc: &eframe::CreationContext<'_>, start: Start) -> std::io::Result<App> {
        theme::install(&cc.egui_ctx);
        let prefs: Prefs = cc.storage.and_then(|s| eframe::get_value(s, eframe::APP_KEY)).unwrap_or_default();
        cc.egui_ctx.set_theme(prefs.theme);
        cc.egui_ctx.set_zoom_factor(prefs.zoom.clamp(0.6, 2.5));
        let opened = start.data.as_deref().and_then(|d| Recovery::open(&d.join("recovery")));
        let (recovery, found) = opened.map_or((None, Vec::new()), |(r, f)| (Some(r), f));
        let project = Project::new(vec!["a".into()], vec!["q".into()]);
        let mut app = App {
            history: History::new(project.clone()),
            path: None,
            design: Arc::new(Design::default()),
            station: Station::Behaviour,
            marks: Marks::default(),
            prefs,
            dialog: None,
            status: String::new(),
            table: TableView::default(),
            merging: MergingView::default(),
            codes: CodesView::default(),
            equations: EquationsView::default(),
            proof: ProofView::default(),
            handoff: HandOffView::default(),
            figures: figures(&project, &Design::default()),
            explained: None,
            took_ms: 0.0,
            revision: 0,
            worker: {
                let mut deriver = Deriver::default();
                Worker::start(&cc.egui_ctx, "derive", move |project, settings| {
                    deriver.derive(project, settings)
                })?
            },
            comparer: Worker::start(&cc.egui_ctx, "compare", alternatives)?,
            compared: 0,
            stamp: None,
            looked: 0.0,
            recovery,
            kept: 0,
            kept_at: 0.0,
            asked: None,
            browse: None,
            closing: false,
            title: String::new(),
        };
        match start.file {
            Some(file) => app.open_file(&file),
            None => app.open_sample(0),
        }
        if let Some(copy) = found.into_iter().next() {
            app.dialog = Some(Dialog::Recover(copy));
        }
        Ok(app)
    }

    /// Whether a derivation is under way.
    pub fn working(&self) -> bool {
        self.worker.busy()
    }

    /// The figures of the chain.
    pub fn figures(&self) -> &[Figure; 6] {
        &self.figures
    }

    fn project(&self) -> &Arc<Project> {
        self.history.project()
    }

    // ---- the project's life ----

    fn take_over(&mut self, project: Project, path: Option<PathBuf>) {
        self.station = Station::named(&project.layout.station).unwrap_or_default();
        self.history = History::new(project);
        self.stamp = path.as_deref().and_then(files::stamp);
        self.path = path;
        self.table = TableView::default();
        self.table.take_keyboard();
        self.merging = MergingView::default();
        self.codes = CodesView::default();
        self.equations = EquationsView::default();
        self.proof = ProofView::default();
        self.marks = Marks::default();
        self.explained = None;
        if let Some(recovery) = &self.recovery {
            recovery.forget();
        }
        self.changed();
        self.kept = self.revision;
    }

    fn open_file(&mut self, path: &Path) {
        match files::read(path) {
            Ok(project) => {
                self.take_over(project, Some(path.to_path_buf()));
                self.remember(path);
                self.status = format!("Opened {}", path.display());
            }
            Err(text) => self.dialog = Some(Dialog::Tell("The file was not opened".into(), text)),
        }
    }

    fn open_sample(&mut self, index: usize) {
        let Some((name, text)) = SAMPLES.get(index) else { return };
        match project::read(text.as_bytes()) {
            Ok(project) => {
                self.take_over(project, None);
                self.status = format!("Sample {name}");
            }
            Err(e) => self.dialog = Some(Dialog::Tell("The sample was not opened".into(), e.to_string())),
        }
    }

    fn remember(&mut self, path: &Path) {
        let path = std::path::absolute(path).unwrap_or_else(|_| path.to_path_buf());
        self.prefs.recent.retain(|p| *p != path);
        self.prefs.recent.insert(0, path);
        self.prefs.recent.truncate(RECENT);
    }

    fn save_to(&mut self, path: &Path) -> bool {
        if self.history.project().layout.station != self.station.name() {
            let layout =
                project::Layout { station: self.station.name().into(), ..self.project().layout.clone() };
            self.history.set_layout(layout);
        }
        match files::save(path, &project::write(self.project())) {
            Ok(()) => {
                self.history.mark_saved();
                self.stamp = files::stamp(path);
                self.path = Some(path.to_path_buf());
                self.remember(path);
                if let Some(recovery) = &self.recovery {
                    recovery.forget();
                }
                self.kept = self.revision;
                self.status = format!("Saved {}", path.display());
                true
            }
            Err(text) => {
                self.dialog = Some(Dialog::Tell("The file was not saved".into(), text));
                false
            }
        }
    }

    fn save(&mut self) -> bool {
        let Some(path) = self.path.clone() else {
            self.ask_path(Purpose::Project, None);
            return false;
        };
        let now = files::stamp(&path);
        if now != self.stamp && now.is_some() {
            self.dialog = Some(Dialog::ChangedOnDisk { saving: true });
            return false;
        }
        self.save_to(&path)
    }

    fn ask_path(&mut self, purpose: Purpose, text: Option<String>) {
        let stem = self.path.as_deref().and_then(Path::file_stem).map(|s| s.to_string_lossy().into_owned());
        let stem = stem.unwrap_or_else(|| {
            let title: String = self.project().title.to_lowercase();
            let words: Vec<&str> =
                title.split(|c: char| !c.is_ascii_alphanumeric()).filter(|w| !w.is_empty()).collect();
            if words.is_empty() { "controller".to_owned() } else { words.join("_") }
        });
        let folder = self.path.as_deref().and_then(Path::parent).map(Path::to_path_buf).unwrap_or_default();
        let path = match purpose {
            Purpose::Open => folder.join(""),
            _ => folder.join(format!("{stem}{}", purpose.ending())),
        };
        self.dialog = Some(Dialog::path(purpose, path.display().to_string(), text));
    }

    /// Derives the project anew after a change.
    fn changed(&mut self) {
        self.revision += 1;
        let project = Arc::clone(self.project());
        self.worker.send(self.revision, project);
    }

    fn edit(&mut self, change: impl FnOnce(&mut History) -> Result<(), EditError>) {
        let before = Arc::clone(self.project());
        match change(&mut self.history) {
            Ok(()) if !Arc::ptr_eq(&before, self.project()) => self.changed(),
            Ok(()) => {}
            Err(e) => self.status = e.text,
        }
    }

    // ---- commands ----

    fn carry_out(&mut self, ctx: &egui::Context, commands: Vec<Command>) {
        for command in commands {
            match command {
                Command::Do(action) => self.act(ctx, action),
                Command::Pick(pick) => self.pick(pick),
                Command::Show(pick) => {
                    self.pick(Some(pick));
                    self.station = station_of(pick, self.station);
                    if let Pick::Cell(row, column) = pick {
                        self.table.go(self.history.project(), row, Some(column));
                    } else if let Pick::Row(row) = pick {
                        self.table.go(self.history.project(), row, None);
                    }
                }
                Command::Edit(edit) => self.edit(|h| h.apply(&edit)),
                Command::Edits(edits, name) => self.edit(|h| h.apply_all(&edits, name)),
                Command::EditOn(edit) => self.edit(|h| h.apply_joined(&edit)),
                Command::OpenFile(path) => self.unless_dirty(ctx, Then::Open(path)),
                Command::OpenSample(index) => self.unless_dirty(ctx, Then::Sample(index)),
                Command::Layout(layout) => self.history.set_layout(layout),
                Command::Notation(notation) => self.prefs.notation = notation,
                Command::Copy(text) => {
                    ctx.copy_text(text);
                    self.status = "Copied".into();
                }
                Command::Write(purpose, text) => self.ask_path(purpose, Some(text)),
                Command::Ask(dialog) => self.dialog = Some(dialog),
                Command::Say(text) => self.status = text,
            }
        }
    }

    fn act(&mut self, ctx: &egui::Context, action: Action) {
        match action {
            Action::New => self.unless_dirty(ctx, Then::New),
            Action::Open => self.unless_dirty(ctx, Then::AskOpen),
            Action::Save => {
                self.save();
            }
            Action::SaveAs => self.ask_path(Purpose::Project, None),
            Action::SaveEquations => match self.equations_text() {
                Some(text) => self.ask_path(Purpose::Equations, Some(text)),
                None => {
                    self.status =
                        "There are no equations yet: the stages before must be derived first.".into()
                }
            },
            Action::SaveRecord => {
                let text = crate::handoff::record(self.project(), &self.design);
                self.ask_path(Purpose::Record, Some(text));
            }
            Action::Quit => ctx.send_viewport_cmd(ViewportCommand::Close),
            Action::Undo => self.step(History::undo, "Undone"),
            Action::Redo => self.step(History::redo, "Redone"),
            Action::Signals => self.dialog = Some(Dialog::signals(self.history.project())),
            Action::About => self.dialog = Some(Dialog::about(self.history.project())),
            Action::Go(station) => {
                self.station = station;
                if station == Station::Behaviour {
                    self.table.take_keyboard();
                }
            }
            Action::WhyPane => self.prefs.why = !self.prefs.why,
            Action::ColumnOrder | Action::ColumnsUsed => {
                let mut layout = self.project().layout.clone();
                if action == Action::ColumnOrder {
                    layout.gray = !layout.gray;
                } else {
                    layout.used_only = !layout.used_only;
                }
                self.history.set_layout(layout);
            }
            Action::Larger | Action::Smaller => {
                let step = if action == Action::Larger { 0.1 } else { -0.1 };
                self.prefs.zoom = ((self.prefs.zoom + step) * 10.0).round().clamp(6.0, 25.0) / 10.0;
                ctx.set_zoom_factor(self.prefs.zoom);
            }
            Action::Theme => {
                self.prefs.theme = match self.prefs.theme {
                    ThemePreference::System if ctx.theme() == egui::Theme::Dark => ThemePreference::Light,
                    ThemePreference::Dark => ThemePreference::Light,
                    _ => ThemePreference::Dark,
                };
                ctx.set_theme(self.prefs.theme);
            }
            Action::Stop => self.worker.stop(),
            Action::Keys => self.dialog = Some(Dialog::Keys),
            Action::InsertRow
            | Action::DuplicateRow
            | Action::DeleteRow
            | Action::RowUp
            | Action::RowDown
            | Action::RenameRow
            | Action::FillDown
            | Action::MakeStable
            | Action::Clear
            | Action::SetInitial => {
                self.station = Station::Behaviour;
                let project = Arc::clone(self.project());
                let commands = self.table.act(&project, action);
                self.carry_out(ctx, commands);
            }
        }
    }

    fn step(&mut self, turn: impl Fn(&mut History) -> Option<String>, word: &str) {
        match turn(&mut self.history) {
            Some(name) => {
                self.status = format!("{word}: {name}");
                self.changed();
            }
            None => self.status = format!("Nothing to be {}", word.to_lowercase()),
        }
    }

    fn pick(&mut self, pick: Option<Pick>) {
        self.marks.picked = pick;
        self.refresh_marks();
    }

    fn refresh_marks(&mut self) {
        self.marks.linked = self.marks.picked.map_or_else(BTreeSet::new, |p| linked(&self.design, p));
        self.explained = self.marks.picked.and_then(|p| why(&self.design, p));
    }

    fn equations_text(&self) -> Option<String> {
        let equations = self.design.equations.as_ref()?;
        Some(crate::handoff::equations_text(equations, self.prefs.notation))
    }

    /// Carries on with `then`, after asking about unsaved changes if there are any.
    fn unless_dirty(&mut self, ctx: &egui::Context, then: Then) {
        if self.history.dirty() {
            self.dialog = Some(Dialog::Unsaved(then));
        } else {
            self.go_on(ctx, then);
        }
    }

    fn go_on(&mut self, ctx: &egui::Context, then: Then) {
        match then {
            Then::New => self.dialog = Some(Dialog::new_project()),
            Then::AskOpen => self.ask_path(Purpose::Open, None),
            Then::Open(path) => self.open_file(&path),
            Then::Sample(index) => self.open_sample(index),
            Then::Quit => {
                self.closing = true;
                ctx.send_viewport_cmd(ViewportCommand::Close);
            }
        }
    }

    fn answer(&mut self, ctx: &egui::Context, asked: Asked) {
        self.dialog = None;
        match asked {
            Asked::Close => {}
            Asked::Create(project) => {
                self.take_over(*project, None);
                self.history.mark_unsaved();
                self.status = "New project".into();
            }
            Asked::Edit(edit) => self.edit(|h| h.apply(&edit)),
            Asked::Edits(edits, name) => self.edit(|h| h.apply_all(&edits, name)),
            Asked::Path(purpose, path, text) => {
                let path = PathBuf::from(path);
                match (purpose, text) {
                    (Purpose::Open, _) => self.open_file(&path),
                    (Purpose::Project, _) => {
                        self.save_to(&path);
                    }
                    (_, Some(text)) => match files::save(&path, &text) {
                        Ok(()) => self.status = format!("Wrote {}", path.display()),
                        Err(text) => self.dialog = Some(Dialog::Tell("Nothing was written".into(), text)),
                    },
                    (_, None) => {}
                }
            }
            Asked::Browse(dialog, save_as) => {
                self.dialog = Some(*dialog);
                self.browse = Some(save_as);
            }
            Asked::SaveThen(then) => {
                if self.save() {
                    self.go_on(ctx, then);
                }
            }
            Asked::DiscardThen(then) => {
                self.history.mark_saved();
                if let Some(recovery) = &self.recovery {
                    recovery.forget();
                }
                self.go_on(ctx, then);
            }
            Asked::Reload => {
                if let Some(path) = self.path.clone() {
                    self.open_file(&path);
                }
            }
            Asked::Overwrite => {
                if let Some(path) = self.path.clone() {
                    self.save_to(&path);
                }
            }
            Asked::KeepMine => {
                self.stamp = self.path.as_deref().and_then(files::stamp);
                self.history.mark_unsaved();
            }
            Asked::Recover(found) => self.recover(&found),
            Asked::Forget(found) => files::discard(&found),
        }
    }

    fn recover(&mut self, found: &Found) {
        match files::read(&found.copy) {
            Ok(project) => {
                self.take_over(project, found.of.clone());
                self.history.mark_unsaved();
                self.kept = 0;
                files::discard(found);
                self.status = "Recovered; not saved yet".into();
            }
            Err(text) => self.dialog = Some(Dialog::Tell("The recovery copy was not opened".into(), text)),
        }
    }

    // ---- each frame ----

    /// Compares all methods while the Codes station is open, once the design itself is there.
    fn compare(&mut self) {
        if let Some(done) = self.comparer.poll() {
            self.codes.alternatives = Some(Arc::new(done.value));
        }
        if self.station == Station::Codes && self.compared != self.revision && !self.worker.busy() {
            self.compared = self.revision;
            self.comparer.send(self.revision, Arc::clone(self.history.project()));
        }
    }

    fn housekeeping(&mut self, ctx: &egui::Context) {
        let now = ctx.input(|i| i.time);
        if self.history.dirty() && self.kept != self.revision && self.recovery.is_some() {
            if now - self.kept_at >= LOOK_SECONDS {
                let text = project::write(self.project());
                if let Some(recovery) = &self.recovery
                    && let Err(text) = recovery.keep(&text, self.path.as_deref())
                {
                    self.status = text;
                }
                (self.kept, self.kept_at) = (self.revision, now);
            } else {
                ctx.request_repaint_after_secs(LOOK_SECONDS as f32);
            }
        }
        if now - self.looked >= LOOK_SECONDS && self.path.is_some() {
            self.looked = now;
            let seen = self.path.as_deref().and_then(files::stamp);
            if seen.is_some() && seen != self.stamp && self.dialog.is_none() {
                self.dialog = Some(Dialog::ChangedOnDisk { saving: false });
            }
            ctx.request_repaint_after_secs(2.0 * LOOK_SECONDS as f32);
        }
        if let Some(asked) = &self.asked {
            match asked.try_recv() {
                Ok(Some(path)) => {
                    if let Some(Dialog::Path { path: text, .. }) = &mut self.dialog {
                        *text = path.display().to_string();
                    }
                    self.asked = None;
                }
                Ok(None) => {
                    self.status = "No file was chosen. A path can be typed too.".into();
                    self.asked = None;
                }
                Err(TryRecvError::Disconnected) => self.asked = None,
                Err(TryRecvError::Empty) => {}
            }
        }
    }

    fn menu_bar(&mut self, ui: &mut Ui, commands: &mut Vec<Command>) {
        egui::Panel::top("menu").show(ui, |ui| {
            egui::MenuBar::new().ui(ui, |ui| {
                for (title, actions) in MENUS {
                    ui.menu_button(title, |ui| {
                        for action in actions {
                            let Some(action) = *action else {
                                ui.separator();
                                continue;
                            };
                            let mut button = egui::Button::new(self.words(action));
                            if let Some(keys) = action.keys() {
                                button = button.shortcut_text(ui.ctx().format_shortcut(&keys));
                            }
                            if ui.add_enabled(self.enabled(action), button).clicked() {
                                commands.push(Command::Do(action));
                            }
                            if action == Action::Open {
                                self.open_menus(ui, commands);
                            }
                        }
                    });
                }
            });
        });
    }

    fn open_menus(&self, ui: &mut Ui, commands: &mut Vec<Command>) {
        ui.menu_button("Open recent", |ui| {
            if self.prefs.recent.is_empty() {
                ui.weak("No file yet");
            }
            for path in &self.prefs.recent {
                if ui.button(path.display().to_string()).clicked() {
                    commands.push(Command::OpenFile(path.clone()));
                }
            }
        });
        ui.menu_button("Open sample", |ui| {
            for (i, (name, _)) in SAMPLES.iter().enumerate() {
                if ui.button(name.replace('_', " ")).clicked() {
                    commands.push(Command::OpenSample(i));
                }
            }
        });
    }

    fn words(&self, action: Action) -> String {
        let named = |name: Option<&str>| {
            name.map_or_else(|| action.words().to_owned(), |n| format!("{} {n}", action.words()))
        };
        match action {
            Action::Undo => named(self.history.undo_names().next()),
            Action::Redo => named(self.history.redo_names().next()),
            Action::ColumnOrder if self.project().layout.gray => "Columns in counting order".into(),
            Action::ColumnsUsed if self.project().layout.used_only => "All columns".into(),
            _ => action.words().to_owned(),
        }
    }

    fn enabled(&self, action: Action) -> bool {
        match action {
            Action::Undo => self.history.undo_names().next().is_some(),
            Action::Redo => self.history.redo_names().next().is_some(),
            Action::Stop => self.worker.busy(),
            Action::SaveEquations => self.design.equations.is_some(),
            Action::DuplicateRow
            | Action::DeleteRow
            | Action::RowUp
            | Action::RowDown
            | Action::RenameRow
            | Action::FillDown
            | Action::MakeStable
            | Action::Clear
            | Action::SetInitial => !self.project().rows.is_empty(),
            _ => true,
        }
    }

    fn status_line(&mut self, ui: &mut Ui, commands: &mut Vec<Command>) {
        egui::Panel::bottom("status").show(ui, |ui| {
            egui::Sides::new().show(
                ui,
                |ui| {
                    if self.worker.busy() {
                        let words = match self.worker.progress() {
                            None => "Deriving…".to_owned(),
                            Some(p) => match p.best {
                                Some(best) => format!("{}: {best} found, at least {}", p.task, p.bound),
                                None => format!("{}: at least {}", p.task, p.bound),
                            },
                        };
                        ui.label(words);
                        if ui.small_button("Stop").clicked() {
                            commands.push(Command::Do(Action::Stop));
                        }
                    } else {
                        ui.label(RichText::new(&self.status).weak());
                    }
                },
                |ui| {
                    ui.label(RichText::new(format!("derived in {:.1} ms", self.took_ms)).weak());
                    let saved = if self.history.dirty() { "not saved" } else { "saved" };
                    ui.label(RichText::new(saved).weak());
                },
            );
        });
    }
}

/// The station that shows an item best; the open one if it does too.
fn station_of(pick: Pick, open: Station) -> Station {
    match pick {
        Pick::Row(_) | Pick::Cell(..) => Station::Behaviour,
        Pick::Pair(..) | Pick::Compatible(_) | Pick::Merged(_) => Station::Merging,
        Pick::MergedCell(..) if open == Station::Codes => open,
        Pick::MergedCell(..) => Station::Merging,
        Pick::Code(_) | Pick::Entry(..) => Station::Codes,
        Pick::Function(_) | Pick::Product(..) | Pick::Point(..) => Station::Equations,
        Pick::Move(_) => Station::Proof,
    }
}

impl eframe::App for App {
    fn logic(&mut self, ctx: &egui::Context, _frame: &mut eframe::Frame) {
        if let Some(done) = self.worker.poll() {
            self.design = Arc::new(done.value);
            self.took_ms = done.took_ms;
            self.figures = figures(self.history.project(), &self.design);
            self.refresh_marks();
        }
        self.compare();
        self.housekeeping(ctx);
        let close = ctx.input(|i| i.viewport().close_requested());
        if close && self.history.dirty() && !self.closing {
            ctx.send_viewport_cmd(ViewportCommand::CancelClose);
            self.dialog = Some(Dialog::Unsaved(Then::Quit));
        }
        let name = self.path.as_deref().and_then(Path::file_name).map(|n| n.to_string_lossy().into_owned());
        let name = name.unwrap_or_else(|| {
            let title = &self.project().title;
            if title.is_empty() { "untitled".to_owned() } else { title.chars().take(60).collect() }
        });
        let title = format!("{}{name} – Stillgate", if self.history.dirty() { "*" } else { "" });
        if title != self.title {
            // A viewport command asks for a repaint: only on a change, or the window never sleeps.
            ctx.send_viewport_cmd(ViewportCommand::Title(title.clone()));
            self.title = title;
        }
    }

    fn ui(&mut self, ui: &mut Ui, frame: &mut eframe::Frame) {
        let mut commands = Vec::new();
        if self.dialog.is_none() {
            commands.extend(keys::pressed(ui, self.table.typing()).into_iter().map(Command::Do));
        }
        for file in ui.input(|i| i.raw.dropped_files.clone()) {
            commands.push(Command::OpenFile(file.path().to_path_buf()));
        }
        if let Some(save_as) = self.browse.take()
            && self.asked.is_none()
        {
            self.asked = Some(files::ask(ui.ctx(), frame, save_as));
        }
        self.menu_bar(ui, &mut commands);
        let fresh = if self.worker.busy() { Fresh::Working } else { Fresh::Now };
        egui::Panel::top("chain").frame(egui::Frame::side_top_panel(ui.style()).inner_margin(0)).show(
            ui,
            |ui| {
                if let Some(station) = chain(ui, &self.figures, fresh, self.station) {
                    commands.push(Command::Do(Action::Go(station)));
                }
            },
        );
        self.status_line(ui, &mut commands);
        if self.prefs.why {
            let frame = egui::Frame::side_top_panel(ui.style()).inner_margin(egui::Margin::symmetric(10, 8));
            let pane = egui::Panel::right("why").frame(frame).resizable(true);
            pane.default_size(260.0).size_range(180.0..=480.0).show(ui, |ui| {
                if let Some(pick) = why_pane(ui, self.explained.as_ref()) {
                    commands.push(Command::Show(pick));
                }
            });
        }
        let paper = theme::palette(ui.visuals()).paper;
        let canvas = egui::Frame::central_panel(ui.style()).fill(paper);
        egui::CentralPanel::default().frame(canvas).show(ui, |ui| {
            let mut scene = Scene {
                project: self.history.project(),
                design: &self.design,
                marks: &self.marks,
                notation: self.prefs.notation,
                commands: &mut commands,
            };
            match self.station {
                Station::Behaviour => behaviour::show(ui, &mut scene, &mut self.table),
                Station::Merging => merging::show(ui, &mut scene, &mut self.merging),
                Station::Codes => codes::show(ui, &mut scene, &mut self.codes),
                Station::Equations => equations::show(ui, &mut scene, &mut self.equations),
                Station::Proof => proof::show(ui, &mut scene, &mut self.proof),
                Station::HandOff => handoff::show(ui, &mut scene, &mut self.handoff),
            }
        });
        let project = Arc::clone(self.project());
        if let Some(mut dialog) = self.dialog.take() {
            match dialogs::show(ui.ctx(), &mut dialog, &project) {
                None => self.dialog = Some(dialog),
                Some(asked) => {
                    self.dialog = Some(dialog);
                    self.answer(ui.ctx(), asked);
                }
            }
        }
        if !commands.is_empty() {
            self.carry_out(ui.ctx(), commands);
            ui.ctx().request_repaint();
        }
    }

    fn save(&mut self, storage: &mut dyn eframe::Storage) {
        eframe::set_value(storage, eframe::APP_KEY, &self.prefs);
    }

    fn on_exit(&mut self, _gl: Option<&eframe::glow::Context>) {
        if let Some(recovery) = &self.recovery {
            recovery.forget();
        }
    }
}
