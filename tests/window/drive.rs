//! A window without a display: what a person does with keys and mouse, and what can be read off the screen.
//!
//! Keys go in as a keyboard sends them: the key and the text that it types in one frame, the release in the next.

use std::path::{Path, PathBuf};
use std::time::Duration;

use eframe::egui::{self, Event, Key, Modifiers, OutputCommand, Pos2, Role, ViewportCommand, ViewportId};
use egui_kittest::kittest::{NodeT as _, Queryable as _};
use egui_kittest::{Harness, HarnessBuilder};
use stillgate::project::{self, Project};
use stillgate::window::actions::Station;
use stillgate::window::app::{App, Start};

use crate::cpu::CpuRenderer;

pub const NONE: Modifiers = Modifiers::NONE;
pub const CTRL: Modifiers = Modifiers::COMMAND.plus(Modifiers::CTRL);
pub const SHIFT: Modifiers = Modifiers::SHIFT;
pub const BOTH: Modifiers = CTRL.plus(Modifiers::SHIFT);
pub const ALT: Modifiers = Modifiers::ALT;

/// The table of the Behaviour station, by its name.
pub const TABLE: &str = "Primitive flow table";
/// Pauses of 5 ms that a derivation may take before a test gives up: minutes, so that a busy machine fails no test.
const PATIENCE: usize = 60_000;

/// The window under test.
pub struct Window {
    h: Harness<'static, App>,
    /// Whether the window has asked to be closed.
    pub closed: bool,
}

/// A folder of the program's samples.
pub fn projects() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("projects")
}

/// The files of all samples, in order of name.
pub fn samples() -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> =
        std::fs::read_dir(projects()).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.retain(|f| f.extension().is_some_and(|e| e == "ron"));
    files.sort();
    files
}

fn builder() -> HarnessBuilder<App> {
    Harness::builder()
        .with_size([1280.0, 720.0])
        .with_step_dt(1.0 / 60.0)
        .with_theme(egui::Theme::Light)
        .renderer(CpuRenderer::default())
}

impl Window {
    /// A window of 1280x720 as it opens on a sample, without a place for its own files.
    pub fn sample(name: &str) -> Window {
        let mut w = Window::start(Start { file: Some(projects().join(format!("{name}.ron"))), data: None });
        w.h.state_mut().path = None;
        w.settle();
        w
    }

    /// A window on a file of the caller, without a place for its own files.
    pub fn file(path: &Path) -> Window {
        Window::start(Start { file: Some(path.to_path_buf()), data: None })
    }

    /// A window that starts as told.
    pub fn start(start: Start) -> Window {
        Window::sized(start, 1280.0, 720.0)
    }

    /// A window of a size in points.
    pub fn sized(start: Start, width: f32, height: f32) -> Window {
        let mut w = Window::built(builder().with_size([width, height]), start);
        w.settle();
        w
    }

    /// A window on a file, which is not waited for.
    pub fn start_only(path: &Path) -> Window {
        Window::built(builder(), Start { file: Some(path.to_path_buf()), data: None })
    }

    /// A window on a file whose texts hold signs that no font has.
    pub fn of_strangers(path: &Path) -> Window {
        let builder = builder().allow_missing_glyphs();
        let mut w = Window::built(builder, Start { file: Some(path.to_path_buf()), data: None });
        w.settle();
        w
    }

    fn built(builder: HarnessBuilder<App>, start: Start) -> Window {
        Window { h: builder.build_eframe(|cc| App::new(cc, start).unwrap()), closed: false }
    }

    pub fn app(&self) -> &App {
        self.h.state()
    }

    pub fn project(&self) -> &Project {
        self.h.state().history.project()
    }

    pub fn harness(&mut self) -> &mut Harness<'static, App> {
        &mut self.h
    }

    // ---- time ----

    /// One frame.
    pub fn frame(&mut self) {
        self.h.step();
        self.closed |= self.commands().contains(&ViewportCommand::Close);
    }

    /// Frames until nothing is being derived, and a few more for what follows from the result.
    pub fn settle(&mut self) {
        self.h.run_steps(2);
        for _ in 0..PATIENCE {
            if !self.h.state().working() {
                self.h.run_steps(3);
                return;
            }
            std::thread::sleep(Duration::from_millis(5));
            self.h.step();
        }
        panic!("the derivation does not end");
    }

    /// Frames for so many seconds of the window's own clock.
    pub fn wait(&mut self, seconds: f32) {
        self.h.run_steps((seconds * 60.0).ceil() as usize + 1);
    }

    // ---- keys ----

    /// Presses and releases a key; what it changed is derived when this returns.
    pub fn press(&mut self, modifiers: Modifiers, key: Key) {
        self.tap(modifiers, key);
        self.settle();
    }

    /// Presses and releases a key, and does not wait for what follows.
    pub fn tap(&mut self, modifiers: Modifiers, key: Key) {
        self.key(modifiers, key, None);
    }

    /// The same key several times.
    pub fn repeat(&mut self, times: usize, modifiers: Modifiers, key: Key) {
        (0..times).for_each(|_| self.tap(modifiers, key));
        self.settle();
    }

    /// Types text, one key after the other.
    pub fn type_text(&mut self, text: &str) {
        for c in text.chars() {
            let key = match c {
                ' ' => Some(Key::Space),
                '.' => Some(Key::Period),
                '-' => Some(Key::Minus),
                c => Key::from_name(&c.to_ascii_uppercase().to_string()),
            };
            match key {
                Some(key) => self.key(NONE, key, Some(c)),
                None => self.event(Event::Text(c.to_string())),
            }
        }
    }

    /// Replaces what stands in the text field that has the keyboard.
    pub fn retype(&mut self, text: &str) {
        self.tap(CTRL, Key::A);
        self.type_text(text);
    }

    fn key(&mut self, modifiers: Modifiers, key: Key, text: Option<char>) {
        let event = |pressed| Event::Key { key, physical_key: None, pressed, repeat: false, modifiers };
        let input = self.h.input_mut();
        input.events.extend([Event::ModifiersChanged(modifiers), event(true)]);
        input.events.extend(text.map(|c| Event::Text(c.to_string())));
        self.frame();
        let input = self.h.input_mut();
        input.events.extend([event(false), Event::ModifiersChanged(NONE)]);
        self.frame();
    }

    /// One event in a frame of its own.
    pub fn event(&mut self, event: Event) {
        self.h.input_mut().events.push(event);
        self.frame();
    }

    /// Ctrl+C or Ctrl+X, and the text that is then on the clipboard.
    pub fn copied(&mut self, event: Event) -> String {
        self.event(event);
        let text = self.clipboard();
        self.settle();
        text.expect("nothing was copied")
    }

    /// What the last frame put on the clipboard.
    pub fn clipboard(&self) -> Option<String> {
        self.h.output().platform_output.commands.iter().find_map(|c| match c {
            OutputCommand::CopyText(text) => Some(text.clone()),
            _ => None,
        })
    }

    /// Ctrl+V.
    pub fn paste(&mut self, text: &str) {
        self.event(Event::Paste(text.to_owned()));
        self.settle();
    }

    // ---- the mouse, and names ----

    /// Clicks the one control with this name.
    pub fn click(&mut self, label: &str) {
        self.h.get_by_label(label).click();
        self.h.step();
        self.settle();
    }

    /// Clicks the first control with this name from the top.
    pub fn click_first(&mut self, label: &str) {
        self.h.query_all_by_label(label).next().unwrap_or_else(|| panic!("no {label}")).click();
        self.h.step();
        self.settle();
    }

    /// Clicks the first control whose name contains this.
    pub fn click_with(&mut self, part: &str) {
        self.h.query_all_by_label_contains(part).next().unwrap_or_else(|| panic!("no {part}")).click();
        self.h.step();
        self.settle();
    }

    /// Clicks at a place.
    pub fn click_at(&mut self, at: Pos2) {
        self.h.hover_at(at);
        self.h.drag_at(at);
        self.h.drop_at(at);
        self.h.step();
        self.settle();
        // So that two clicks of a test are never one double click.
        self.wait(0.4);
    }

    /// Drags from one place to another.
    pub fn drag(&mut self, from: Pos2, to: Pos2) {
        self.h.hover_at(from);
        self.h.drag_at(from);
        for i in 1..=4 {
            self.h.hover_at(from + (to - from) * (i as f32 / 4.0));
        }
        self.h.drop_at(to);
        self.h.step();
        self.settle();
    }

    /// Opens a menu and clicks a line of it. Names of menu lines carry their keys too.
    pub fn menu(&mut self, title: &str, line: &str) {
        self.h.get_by_role_and_label(Role::Button, title).click();
        self.h.run_steps(4);
        // The name of a line carries its keys: of those that begin alike the shortest is meant.
        let all = self.h.query_all_by_role(Role::Button);
        let node = all
            .filter_map(|n| Some((name(&n)?, n)))
            .filter(|(name, _)| name == line || name.starts_with(&format!("{line} ")))
            .min_by_key(|(name, _)| name.len())
            .unwrap_or_else(|| panic!("no {line} in the menu {title}"))
            .1;
        let at = node.rect().center();
        self.press_at(at);
        self.settle();
    }

    /// The mouse button, pressed and released at a place, frame by frame; what the clipboard then holds.
    fn press_at(&mut self, at: Pos2) -> Option<String> {
        let button = |pressed| Event::PointerButton {
            pos: at,
            button: egui::PointerButton::Primary,
            pressed,
            modifiers: NONE,
        };
        let mut text = None;
        for event in [Event::PointerMoved(at), button(true), button(false)] {
            self.event(event);
            text = self.clipboard().or(text);
        }
        text
    }

    /// Whether something with this name is on the screen.
    pub fn sees(&self, label: &str) -> bool {
        self.h.query_all_by_label(label).next().is_some()
    }

    /// Whether something whose name contains this is on the screen.
    pub fn sees_with(&self, part: &str) -> bool {
        self.h.query_all_by_label_contains(part).next().is_some()
    }

    /// Names of everything on the screen.
    pub fn names(&self) -> Vec<String> {
        self.h.root().children_recursive().filter_map(|n| name(&n)).collect()
    }

    /// Where something is.
    pub fn place(&self, label: &str) -> egui::Rect {
        self.control(label).rect()
    }

    /// Whether the control with this name has the keyboard.
    pub fn has_keyboard(&self, label: &str) -> bool {
        self.h.query_all_by_label(label).any(|n| n.is_focused())
    }

    /// Names of the controls that have the keyboard: one, or none.
    pub fn focused(&self) -> Vec<String> {
        let nodes = self.h.root().children_recursive().filter(|n| n.is_focused());
        nodes.filter_map(|n| name(&n)).collect()
    }

    /// Gives the keyboard to the control with this name, as a screen reader does.
    pub fn focus(&mut self, label: &str) {
        self.control(label).focus();
        self.h.step();
        self.h.step();
    }

    /// The control with this name; a heading of the same words is none.
    fn control<'a>(&'a self, label: &'a str) -> egui_kittest::Node<'a> {
        let mut all = self.h.query_all_by_label(label);
        all.find(|n| n.accesskit_node().role() != Role::Label).unwrap_or_else(|| panic!("no control {label}"))
    }

    /// Tab until the control with this name has the keyboard.
    pub fn tab_to(&mut self, label: &str) {
        for _ in 0..200 {
            if self.has_keyboard(label) {
                return;
            }
            self.tap(NONE, Key::Tab);
        }
        panic!("Tab does not lead to {label}");
    }

    /// Goes to a station by its key.
    pub fn go(&mut self, station: Station) {
        let key = [Key::Num1, Key::Num2, Key::Num3, Key::Num4, Key::Num5, Key::Num6]
            [Station::ALL.iter().position(|s| *s == station).unwrap()];
        self.press(CTRL, key);
        assert_eq!(self.app().station, station);
        // This also looks for controls without a name.
        self.h.run_ok();
    }

    // ---- the table ----

    /// Puts the cursor of the table on a cell, by keys alone: row and column as shown, from zero.
    pub fn cell(&mut self, row: usize, column: usize) {
        if self.app().station != Station::Behaviour {
            self.go(Station::Behaviour);
        }
        if !self.has_keyboard(TABLE) {
            self.focus(TABLE);
        }
        self.tap(CTRL, Key::Home);
        (0..row).for_each(|_| self.tap(NONE, Key::ArrowDown));
        (0..column).for_each(|_| self.tap(NONE, Key::ArrowRight));
        self.settle();
    }

    /// Types a cell where the cursor is, and Enter.
    pub fn enter(&mut self, text: &str) {
        self.type_text(text);
        self.press(NONE, Key::Enter);
    }

    // ---- the outside ----

    /// A file dropped on the window.
    pub fn drop_file(&mut self, path: &Path) {
        self.h.input_mut().dropped_files.push(std::sync::Arc::new(Dropped(path.to_path_buf())));
        self.h.step();
        self.settle();
    }

    /// The close button of the window; the commands that answer it.
    pub fn close(&mut self) -> Vec<ViewportCommand> {
        let root = self.h.input_mut().viewports.get_mut(&ViewportId::ROOT).unwrap();
        root.events.push(egui::ViewportEvent::Close);
        self.h.step();
        let commands = self.commands();
        if let Some(root) = self.h.input_mut().viewports.get_mut(&ViewportId::ROOT) {
            root.events.clear();
        }
        self.h.run_steps(3);
        commands
    }

    /// What the last frame asked of the window system.
    pub fn commands(&self) -> Vec<ViewportCommand> {
        self.h.output().viewport_output[&ViewportId::ROOT].commands.clone()
    }

    /// The picture on the screen.
    pub fn picture(&mut self) -> image::RgbaImage {
        self.h.remove_cursor();
        self.h.step();
        self.h.render().unwrap()
    }
}

/// The name of a control, or the text of a label.
fn name(node: &egui_kittest::Node<'_>) -> Option<String> {
    node.accesskit_node().label().or_else(|| node.value())
}

/// Reads a project file.
pub fn read(path: &Path) -> Project {
    project::read(&std::fs::read(path).unwrap()).unwrap()
}

#[derive(Debug)]
struct Dropped(PathBuf);

impl egui::DroppedFile for Dropped {
    fn path(&self) -> &Path {
        &self.0
    }

    fn bytes(&self) -> Result<Vec<u8>, String> {
        std::fs::read(&self.0).map_err(|e| e.to_string())
    }
}

impl Window {
    /// Clicks the last control with this name: where a name is a heading too.
    pub fn click_last(&mut self, label: &str) {
        let all: Vec<_> = self.h.query_all_by_label(label).collect();
        all.last().unwrap_or_else(|| panic!("no {label}")).click();
        drop(all);
        self.h.step();
        self.settle();
    }

    /// Clicks a button that copies, and gives what it copied.
    pub fn copy(&mut self, label: &str) -> String {
        let at = self.place(label).center();
        let text = self.press_at(at);
        self.settle();
        text.unwrap_or_else(|| panic!("{label} copied nothing"))
    }
}
