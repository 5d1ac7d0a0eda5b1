//! The Behaviour station: the primitive table as an editor, with open questions and findings below it.

use std::collections::HashMap;
use std::sync::Arc;

use eframe::egui::{self, Id, Key, Modifiers, RichText, TextEdit, Ui, vec2};

use crate::base::{Column, Finding, Level, Row};
use crate::design::Design;
use crate::design::values::Pick;
use crate::drawing::{Ink, elide};
use crate::explain::figures::counted;
use crate::project::choices::Discipline;
use crate::project::{CellEntry, Edit, Layout, Project, RowEntry};
use crate::window::actions::Action;
use crate::window::app::{Command, Scene};
use crate::window::cell_text;
use crate::window::dialogs::Dialog;
use crate::window::grid::{Cursor, Face, Grid, Happened};
use crate::window::theme::{self, palette};

/// Characters of a row's name at the left of its row, and of a next row in a cell.
const LABEL: usize = 24;
/// See [`LABEL`].
const NEXT: usize = 17;
/// Findings listed at most; the rest is counted.
const LISTED: usize = 200;

/// State of the table: the cursor and what is being typed.
#[derive(Default)]
pub struct TableView {
    cursor: Cursor,
    typing: Option<Typing>,
    marks: Option<(Arc<Design>, HashMap<(String, String), Level>)>,
    columns: Option<(Layout, usize, Arc<Project>, Vec<String>)>,
    grab: bool,
}

struct Typing {
    text: String,
    opened: bool,
}

/// The columns shown, as bit strings: counting or Gray order, all or those that some cell uses.
pub fn columns(project: &Project) -> Vec<String> {
    let n = project.inputs.len().min(crate::project::limits::INPUTS);
    let layout = &project.layout;
    let text = |i: usize| -> String {
        let bits = if layout.gray { i ^ i >> 1 } else { i };
        (0..n).map(|b| if bits >> (n - 1 - b) & 1 == 1 { '1' } else { '0' }).collect()
    };
    let all = (0..1usize << n).map(text);
    if !layout.used_only {
        return all.collect();
    }
    let used: std::collections::HashSet<&str> =
        project.rows.iter().flat_map(|r| r.cells.keys().map(String::as_str)).collect();
    let shown: Vec<String> = all.filter(|c| used.contains(c.as_str())).collect();
    // A table without a cell would have no column to type in.
    if shown.is_empty() { (0..1usize << n).map(text).collect() } else { shown }
}

impl TableView {
    /// Whether a cell is being typed.
    pub fn typing(&self) -> bool {
        self.typing.is_some()
    }

    /// Lets the table have the keyboard in the next frame.
    pub fn take_keyboard(&mut self) {
        self.grab = true;
    }

    /// Puts the cursor on a row, and on a column if one is given.
    pub fn go(&mut self, project: &Arc<Project>, row: Row, column: Option<Column>) {
        let columns = self.columns(project);
        let place = column.and_then(|c| {
            let text = c.text(project.inputs.len());
            columns.iter().position(|t| *t == text)
        });
        self.cursor.go(row.at(), place.unwrap_or(self.cursor.at.1));
        self.grab = true;
    }

    fn columns(&mut self, project: &Arc<Project>) -> Vec<String> {
        let fresh = self.columns.as_ref().is_some_and(|(layout, n, of, _)| {
            *layout == project.layout
                && *n == project.inputs.len()
                && (!layout.used_only || Arc::ptr_eq(of, project))
        });
        if !fresh {
            let list = columns(project);
            self.columns = Some((project.layout.clone(), project.inputs.len(), Arc::clone(project), list));
        }
        self.columns.as_ref().map(|c| c.3.clone()).unwrap_or_default()
    }

    /// What a command of the Edit menu means for the cursor.
    pub fn act(&mut self, project: &Arc<Project>, action: Action) -> Vec<Command> {
        let columns = self.columns(project);
        let (row, column) = self.cursor.at;
        let edit = |e: Edit| vec![Command::Edit(e)];
        if action == Action::InsertRow {
            let at = if project.rows.is_empty() { 0 } else { (row + 1).min(project.rows.len()) };
            self.cursor.go(at, column);
            self.grab = true;
            return edit(Edit::InsertRow {
                at,
                row: RowEntry { name: fresh_name(project), ..RowEntry::default() },
            });
        }
        let Some(entry) = project.rows.get(row) else { return Vec::new() };
        match action {
            Action::DuplicateRow => {
                self.cursor.go(row + 1, column);
                edit(Edit::DuplicateRow { row, name: copy_name(project, &entry.name) })
            }
            Action::DeleteRow => {
                let (rows, _) = self.cursor.range();
                let rows: Vec<usize> = rows.filter(|&r| r < project.rows.len()).collect();
                self.cursor.go(rows.first().copied().unwrap_or(0), column);
                let edits: Vec<Edit> = rows.into_iter().rev().map(|row| Edit::DeleteRow { row }).collect();
                vec![if edits.len() == 1 {
                    Command::Edit(Edit::DeleteRow { row })
                } else {
                    Command::Edits(edits, "Delete rows")
                }]
            }
            Action::RowUp if row > 0 => {
                self.cursor.go(row - 1, column);
                edit(Edit::MoveRow { row, to: row - 1 })
            }
            Action::RowDown if row + 1 < project.rows.len() => {
                self.cursor.go(row + 1, column);
                edit(Edit::MoveRow { row, to: row + 1 })
            }
            Action::RenameRow => vec![Command::Ask(Dialog::RenameRow { row, name: entry.name.clone() })],
            Action::FillDown => {
                let (rows, cols) = self.cursor.range();
                let source = &project.rows[*rows.start()];
                let cells = rows.clone().skip(1).flat_map(|r| {
                    let columns = &columns;
                    cols.clone().map(move |c| {
                        let cell = source.cells.get(&columns[c]).cloned();
                        (r, columns[c].clone(), cell)
                    })
                });
                edit(Edit::SetCells(cells.collect()))
            }
            Action::MakeStable => edit(Edit::SetCells(self.each(&columns, |r, c| {
                let row = project.rows.get(r)?;
                let outputs =
                    row.cells.get(c).map_or_else(|| "-".repeat(project.outputs.len()), |x| x.outputs.clone());
                Some(CellEntry { next: row.name.clone(), outputs })
            }))),
            Action::Clear => edit(Edit::SetCells(self.each(&columns, |_, _| None))),
            Action::SetInitial => match columns.get(column) {
                Some(c) => edit(Edit::SetInitial(Some((entry.name.clone(), c.clone())))),
                None => Vec::new(),
            },
            _ => Vec::new(),
        }
    }

    fn each(
        &self,
        columns: &[String],
        cell: impl Fn(usize, &str) -> Option<CellEntry>,
    ) -> Vec<(usize, String, Option<CellEntry>)> {
        let (rows, cols) = self.cursor.range();
        let mut out = Vec::new();
        for r in rows {
            for c in cols.clone().filter_map(|c| columns.get(c)) {
                out.push((r, c.clone(), cell(r, c)));
            }
        }
        out
    }
}

/// Shows the station.
pub fn show(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut TableView) {
    toolbar(ui, scene, view);
    let room = ui.available_height();
    let below = (room * 0.34).clamp(90.0, 260.0);
    egui::Panel::bottom("questions")
        .frame(theme::pane(0, 0, 6, 0))
        .resizable(true)
        .default_size(below)
        .size_range(60.0..=(room * 0.7).max(80.0))
        .show(ui, |ui| questions(ui, scene));
    table(ui, scene, view);
}

fn toolbar(ui: &mut Ui, scene: &mut Scene<'_>, view: &TableView) {
    ui.horizontal_wrapped(|ui| {
        let title = if scene.project.title.is_empty() { "Untitled" } else { &scene.project.title };
        let title: String = title.chars().take(60).collect();
        ui.label(RichText::new(title).heading());
        ui.add_space(8.0);
        for action in [Action::InsertRow, Action::Signals] {
            if ui.button(action.words()).clicked() {
                scene.send(Command::Do(action));
            }
        }
        let mut discipline = scene.project.discipline;
        let before = discipline;
        ui.label("Inputs change");
        ui.radio_value(&mut discipline, Discipline::Single, "one at a time");
        ui.radio_value(&mut discipline, Discipline::Burst, "in bursts");
        if discipline != before {
            scene.send(Command::Edit(Edit::SetDiscipline(discipline)));
        }
        let mut layout = scene.project.layout.clone();
        ui.checkbox(&mut layout.gray, "Gray order");
        ui.checkbox(&mut layout.used_only, "in use only");
        if layout != scene.project.layout {
            scene.send(Command::Layout(layout));
        }
        let (rows, columns) = view.cursor.range();
        let count = rows.count() * columns.count();
        if count > 1 {
            ui.weak(format!("{count} cells selected"));
        }
    });
    ui.add_space(2.0);
}

fn marks(view: &mut TableView, design: &Arc<Design>) {
    if view.marks.as_ref().is_some_and(|(of, _)| Arc::ptr_eq(of, design)) {
        return;
    }
    let mut at: HashMap<(String, String), Level> = HashMap::new();
    for f in &design.findings {
        if let (Some(row), Some(column)) = (&f.at.row, &f.at.column) {
            let level = at.entry((row.clone(), column.clone())).or_insert(f.level);
            *level = (*level).min(f.level);
        }
    }
    view.marks = Some((Arc::clone(design), at));
}

fn table(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut TableView) {
    marks(view, scene.design);
    let project = Arc::clone(scene.project);
    let columns = view.columns(&project);
    let signs = view.marks.as_ref().map(|m| &m.1);
    let longest = project.rows.iter().map(|r| r.name.chars().count()).max().unwrap_or(4).max(4) as f32;
    let label = longest.min(LABEL as f32) * 8.2 + 26.0;
    let cell = (longest.min(NEXT as f32) * 7.4 + project.outputs.len() as f32 * 8.0 + 48.0).max(72.0);
    let initial = project.initial.clone().unwrap_or_default();
    let inputs = project.inputs.len();
    let picks = scene.marks;
    let parsed: Vec<Option<Column>> = columns.iter().map(|c| Column::parse(c, inputs)).collect();
    let face = |r: usize, c: usize| -> Face {
        let (row, column) = (&project.rows[r], &columns[c]);
        let entry = row.cells.get(column);
        let key = (row.name.clone(), column.clone());
        let mark = signs.and_then(|s| s.get(&key)).map(|level| match level {
            Level::Error => (Ink::Bad, "!"),
            Level::Warning => (Ink::Warn, "!"),
            Level::Question => (Ink::Warn, "?"),
            Level::Note => (Ink::Faint, "i"),
        });
        let ring = entry.is_some_and(|e| e.next == row.name);
        let start = initial.0 == row.name && initial.1 == *column;
        let next = entry.map_or("", |e| e.next.as_str());
        let shown = if next == "-" { "–".to_owned() } else { elide(next, NEXT) };
        Face {
            text: if start { format!("{shown}  ▸") } else { shown },
            aside: entry.map_or_else(String::new, |e| e.outputs.clone()),
            ring,
            mark,
            dim: entry.is_none(),
            linked: parsed[c].is_some_and(|column| picks.holds(Pick::Cell(Row::new(r), column))),
            mono: false,
        }
    };
    let corner = project.inputs.join(" ");
    let corner = elide(&corner, (label / 7.6) as usize);
    let names = |r: usize| elide(&project.rows[r].name, LABEL);
    let grid = Grid {
        name: "Primitive flow table",
        corner: &corner,
        columns: &columns,
        rows: &names,
        len: project.rows.len(),
        face: &face,
        size: (cell, label, 26.0),
    };
    let place = ui.available_size() - vec2(0.0, 4.0);
    let happened = grid.show(ui, "primitive", &mut view.cursor, place);
    if project.rows.is_empty() {
        ui.put(
            egui::Rect::from_min_size(ui.min_rect().left_top() + vec2(24.0, 80.0), vec2(420.0, 40.0)),
            egui::Label::new("No rows yet. Press Ctrl+I, or Insert row, for the first one."),
        );
    }
    if std::mem::take(&mut view.grab)
        && let Some(id) = happened.id
    {
        ui.memory_mut(|m| m.request_focus(id));
    }
    if happened.moved
        && let (Some(Some(column)), true) =
            (parsed.get(view.cursor.at.1), view.cursor.at.0 < project.rows.len())
    {
        scene.send(Command::Pick(Some(Pick::Cell(Row::new(view.cursor.at.0), *column))));
    }
    if let Some(row) = happened.label {
        scene.send(Command::Pick(Some(Pick::Row(Row::new(row)))));
    }
    keyboard(ui, scene, view, &project, &columns, &happened);
    typing(ui, scene, view, &project, &columns, &happened);
}

/// Keys that change cells while the table has the keyboard.
fn keyboard(
    ui: &mut Ui,
    scene: &mut Scene<'_>,
    view: &mut TableView,
    project: &Arc<Project>,
    columns: &[String],
    happened: &Happened,
) {
    if happened.double_clicked && view.typing.is_none() {
        open(view, project, columns, None);
        return;
    }
    if !happened.focused || view.typing.is_some() || project.rows.is_empty() {
        return;
    }
    let mut acts = Vec::new();
    let mut typed = None;
    let mut clip = None;
    ui.input_mut(|i| {
        for action in [Action::MakeStable, Action::RowUp, Action::RowDown, Action::Clear] {
            if action.keys().is_some_and(|k| i.consume_shortcut(&k)) {
                acts.push(action);
            }
        }
        if i.consume_key(Modifiers::NONE, Key::Backspace) {
            acts.push(Action::Clear);
        }
        if i.consume_key(Modifiers::NONE, Key::F2) || i.consume_key(Modifiers::NONE, Key::Enter) {
            typed = Some(None);
        }
        if i.consume_key(Modifiers::NONE, Key::Space) {
            acts.push(Action::MakeStable);
            i.events.retain(|e| !matches!(e, egui::Event::Text(t) if t == " "));
        }
        let mut text = String::new();
        i.events.retain(|e| match e {
            egui::Event::Text(t) => {
                text.push_str(t);
                false
            }
            egui::Event::Copy | egui::Event::Cut | egui::Event::Paste(_) => {
                clip = Some(e.clone());
                false
            }
            _ => true,
        });
        if !text.is_empty() {
            typed = Some(Some(text));
        }
    });
    for action in acts {
        let commands = view.act(project, action);
        commands.into_iter().for_each(|c| scene.send(c));
    }
    if let Some(start) = typed {
        open(view, project, columns, start);
    }
    match clip {
        Some(egui::Event::Paste(text)) => paste(scene, view, project, columns, &text),
        Some(event) => {
            scene.send(Command::Copy(copied(view, project, columns)));
            if event == egui::Event::Cut {
                view.act(project, Action::Clear).into_iter().for_each(|c| scene.send(c));
            }
        }
        None => {}
    }
}

fn open(view: &mut TableView, project: &Project, columns: &[String], start: Option<String>) {
    let (r, c) = view.cursor.at;
    let (Some(row), Some(column)) = (project.rows.get(r), columns.get(c)) else { return };
    let text = start.unwrap_or_else(|| cell_text::show(row.cells.get(column)));
    view.typing = Some(Typing { text, opened: false });
}

/// The text field over the cursor's cell.
fn typing(
    ui: &mut Ui,
    scene: &mut Scene<'_>,
    view: &mut TableView,
    project: &Arc<Project>,
    columns: &[String],
    happened: &Happened,
) {
    let Some(typing) = &mut view.typing else { return };
    let (r, c) = view.cursor.at;
    let (Some(row), Some(column), Some(place)) = (project.rows.get(r), columns.get(c), happened.cell) else {
        view.typing = None;
        return;
    };
    let id = Id::unique("cell editor");
    let wide = place.with_max_x(place.left() + place.width().max(150.0));
    // Tab would give the keyboard to whatever comes next in the window; it goes to the next cell.
    let field = TextEdit::singleline(&mut typing.text).id(id).lock_focus(true);
    let field = field.margin(egui::Margin::symmetric(8, 3));
    let response = ui.put(wide, field.desired_width(wide.width()));
    let response = response.accessible_name(format!("Cell {} {column}", row.name));
    if !typing.opened {
        typing.opened = true;
        response.request_focus();
        let mut state = egui::text_edit::TextEditState::load(ui.ctx(), id).unwrap_or_default();
        let end = egui::text::CCursor::new(typing.text.chars().count());
        state.cursor.set_char_range(Some(egui::text::CCursorRange::one(end)));
        state.store(ui.ctx(), id);
        return;
    }
    let (escape, enter, tab, shift) = ui.input(|i| {
        (i.key_pressed(Key::Escape), i.key_pressed(Key::Enter), i.key_pressed(Key::Tab), i.modifiers.shift)
    });
    if !(response.lost_focus() || tab && response.has_focus()) {
        return;
    }
    let text = std::mem::take(&mut typing.text);
    view.typing = None;
    // At once, not in the next frame: the next key may be there already.
    if let Some(id) = happened.id.filter(|_| escape || enter || tab) {
        ui.memory_mut(|m| m.request_focus(id));
    }
    if escape {
        return;
    }
    match cell_text::parse(&text, &row.name, row.cells.get(column), project.outputs.len()) {
        Ok(cell) => {
            if cell.as_ref() != row.cells.get(column) {
                scene.send(Command::Edit(Edit::SetCell { row: r, column: column.clone(), cell }));
            }
            let (rows, last) = (project.rows.len(), columns.len().saturating_sub(1));
            match (enter, tab, shift) {
                (true, ..) => view.cursor.go((r + 1).min(rows - 1), c),
                (_, true, false) => view.cursor.go(r, (c + 1).min(last)),
                (_, true, true) => view.cursor.go(r, c.saturating_sub(1)),
                _ => {}
            }
        }
        Err(why) => {
            scene.send(Command::Say(why));
            view.typing = Some(Typing { text, opened: false });
        }
    }
}

/// The range as tab-separated text.
fn copied(view: &TableView, project: &Project, columns: &[String]) -> String {
    let (rows, cols) = view.cursor.range();
    let line = |r: usize| {
        let cell = |c: usize| project.rows[r].cells.get(&columns[c]);
        cols.clone().map(|c| cell_text::show(cell(c))).collect::<Vec<_>>().join("\t")
    };
    rows.filter(|&r| r < project.rows.len()).map(line).collect::<Vec<_>>().join("\n")
}

/// Pastes tab-separated text from the cursor on; what lies outside the table is left out, and said.
fn paste(scene: &mut Scene<'_>, view: &mut TableView, project: &Project, columns: &[String], text: &str) {
    let (rows, cols) = view.cursor.range();
    let (r0, c0) = (*rows.start(), *cols.start());
    let mut cells = Vec::new();
    let mut outside = 0;
    for (i, line) in text.lines().enumerate() {
        for (j, word) in line.split('\t').enumerate() {
            let (Some(row), Some(column)) = (project.rows.get(r0 + i), columns.get(c0 + j)) else {
                outside += 1;
                continue;
            };
            match cell_text::parse(word, &row.name, None, project.outputs.len()) {
                Ok(cell) => cells.push((r0 + i, column.clone(), cell)),
                Err(why) => {
                    let place = format!("line {}, field {}", i + 1, j + 1);
                    scene.send(Command::Say(format!("Nothing was pasted: {place}: {why}")));
                    return;
                }
            }
        }
    }
    let n = cells.len();
    if n > 0 {
        scene.send(Command::Edit(Edit::SetCells(cells)));
    }
    let rest = if outside > 0 { format!("; {outside} lay outside the table") } else { String::new() };
    scene.send(Command::Say(format!("{} pasted{rest}", counted(n, "cell"))));
}

/// Open questions and findings, each with a link to its cell; questions with their answers.
fn questions(ui: &mut Ui, scene: &mut Scene<'_>) {
    let design = Arc::clone(scene.design);
    let project = Arc::clone(scene.project);
    if design.findings.is_empty() {
        ui.weak("No open question, no finding.");
        return;
    }
    let p = palette(ui.visuals());
    egui::ScrollArea::vertical().id_salt("findings").auto_shrink(false).show(ui, |ui| {
        for (i, finding) in design.findings.iter().take(LISTED).enumerate() {
            ui.push_id(i, |ui| {
                ui.horizontal_wrapped(|ui| {
                    let (sign, ink) = match finding.level {
                        Level::Error => ("!", p.bad),
                        Level::Warning => ("!", p.warn),
                        Level::Question => ("?", p.warn),
                        Level::Note => ("i", p.faint),
                    };
                    ui.label(RichText::new(format!("{sign} {}", finding.level.word())).color(ink).strong());
                    match place(finding, &project) {
                        Some(pick) => {
                            if ui.link(RichText::new(&finding.text).color(p.ink)).clicked() {
                                scene.send(Command::Show(pick));
                            }
                        }
                        None => {
                            ui.label(&finding.text);
                        }
                    }
                    if finding.level == Level::Question {
                        answers(ui, scene, finding, &project);
                    }
                });
            });
        }
        if design.findings.len() > LISTED {
            ui.weak(format!("and {} more", design.findings.len() - LISTED));
        }
    });
}

fn place(finding: &Finding, project: &Project) -> Option<Pick> {
    let name = finding.at.row.as_ref()?;
    let row = Row::new(project.rows.iter().position(|r| r.name == *name)?);
    let column = finding.at.column.as_ref().and_then(|c| Column::parse(c, project.inputs.len()));
    Some(column.map_or(Pick::Row(row), |c| Pick::Cell(row, c)))
}

fn answers(ui: &mut Ui, scene: &mut Scene<'_>, finding: &Finding, project: &Project) {
    let Some(Pick::Cell(row, column)) = place(finding, project) else { return };
    let text = column.text(project.inputs.len());
    let entry = &project.rows[row.at()];
    let open = "-".repeat(project.outputs.len());
    let set = |next: &str, outputs: &str| Edit::SetCell {
        row: row.at(),
        column: text.clone(),
        cell: Some(CellEntry { next: next.into(), outputs: outputs.into() }),
    };
    if ui.small_button("never happens").clicked() {
        scene.send(Command::Edit(set("-", &open)));
    }
    if ui.small_button("stay").clicked() {
        let held =
            entry.cells.values().find(|c| c.next == entry.name).map_or(open.as_str(), |c| c.outputs.as_str());
        scene.send(Command::Edit(set(&entry.name, held)));
    }
    ui.menu_button("go to row…", |ui| {
        egui::ScrollArea::vertical().max_height(260.0).show(ui, |ui| {
            for target in project.rows.iter().filter(|r| r.cells.get(&text).is_some_and(|c| c.next == r.name))
            {
                if ui.button(&target.name).clicked() {
                    scene.send(Command::Edit(set(&target.name, &open)));
                    ui.close();
                }
            }
        });
    });
}

fn fresh_name(project: &Project) -> String {
    let taken = |name: &str| project.rows.iter().any(|r| r.name.eq_ignore_ascii_case(name));
    let letter = ('a'..='z').map(String::from).find(|n| !taken(n));
    letter.unwrap_or_else(|| (1..).map(|i| format!("row{i}")).find(|n| !taken(n)).unwrap_or_default())
}

fn copy_name(project: &Project, name: &str) -> String {
    let taken = |name: &str| project.rows.iter().any(|r| r.name.eq_ignore_ascii_case(name));
    let base: String = name.chars().take(56).collect();
    (2..).map(|i| format!("{base}{i}")).find(|n| !taken(n)).unwrap_or_default()
}
