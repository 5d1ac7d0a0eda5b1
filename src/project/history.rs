//! Undo and redo by snapshots: exact by construction. A step costs the copy that the edit made; undo, redo and a look at
//! the present cost next to nothing.
//!
//! What the window remembers of its layout is carried along but is no part of the history: undoing a cell does not
//! turn the columns around, and a project whose layout alone has changed need not be saved.

use std::collections::VecDeque;
use std::sync::Arc;

use crate::project::{Edit, EditError, Layout, Project};

/// Entries that are kept at most.
const ENTRIES: usize = 1000;
/// Cells and steps of all snapshots that are kept at most; beyond, the oldest are dropped. A bound on memory for huge tables.
const WEIGHT: usize = 1 << 19;

/// The present project, and the ways back and forth.
#[derive(Debug, Clone)]
pub struct History {
    present: Arc<Project>,
    /// Oldest first; each with the project before the edit.
    past: VecDeque<Entry>,
    /// Nearest last; each with the project after the edit.
    future: Vec<Entry>,
    /// `None` when nothing is saved.
    saved: Option<Arc<Project>>,
    dirty: bool,
    /// Of the past.
    weight: usize,
}

#[derive(Debug, Clone)]
struct Entry {
    name: String,
    project: Arc<Project>,
}

impl History {
    /// The history of a project as it was opened or made: nothing to undo, nothing to save.
    pub fn new(project: Project) -> Self {
        let present = Arc::new(project);
        let saved = Some(Arc::clone(&present));
        History { present, past: VecDeque::new(), future: Vec::new(), saved, dirty: false, weight: 0 }
    }

    /// The project as it is now.
    pub fn project(&self) -> &Arc<Project> {
        &self.present
    }

    /// Makes an edit. An edit that changes nothing leaves no entry.
    ///
    /// # Errors
    ///
    /// As [`Edit::apply`]; then nothing has changed.
    pub fn apply(&mut self, edit: &Edit) -> Result<(), EditError> {
        let next = edit.apply(&self.present)?;
        self.advance(next, edit.name());
        Ok(())
    }

    /// Makes several edits in one go, with one name and one entry: what a dialog changed, or what a command does to each row of
    /// a range. Either all are made or none.
    ///
    /// # Errors
    ///
    /// As [`Edit::apply`]; then nothing has changed.
    pub fn apply_all(&mut self, edits: &[Edit], name: &str) -> Result<(), EditError> {
        let mut next = Project::clone(&self.present);
        for edit in edits {
            next = edit.apply(&next)?;
        }
        self.advance(next, name.to_owned());
        Ok(())
    }

    /// Makes an edit that goes on with the last one: both are undone together. For typing and dragging. After an undo, or
    /// when the last entry has another name, it is an edit of its own.
    ///
    /// # Errors
    ///
    /// As [`Edit::apply`]; then nothing has changed.
    pub fn apply_joined(&mut self, edit: &Edit) -> Result<(), EditError> {
        let joins = self.future.is_empty() && self.past.back().is_some_and(|entry| entry.name == edit.name());
        if !joins {
            return self.apply(edit);
        }
        self.present = Arc::new(edit.apply(&self.present)?);
        // Back where the gesture began: there is nothing left to undo.
        if self.past.back().is_some_and(|entry| same_work(&entry.project, &self.present)) {
            self.forget_last();
        }
        self.compare();
        Ok(())
    }

    /// Takes back the last edit. Says its name, or `None` when there is none.
    pub fn undo(&mut self) -> Option<String> {
        let Entry { name, project } = self.forget_last()?;
        let after = self.turn_to(project);
        self.future.push(Entry { name: name.clone(), project: after });
        Some(name)
    }

    /// Makes the edit again that was taken back last. Says its name, or `None` when there is none.
    pub fn redo(&mut self) -> Option<String> {
        let Entry { name, project } = self.future.pop()?;
        let before = self.turn_to(project);
        self.remember(Entry { name: name.clone(), project: before });
        Some(name)
    }

    /// Names of the edits that can be taken back, the last one first.
    pub fn undo_names(&self) -> impl Iterator<Item = &str> {
        self.past.iter().rev().map(|entry| entry.name.as_str())
    }

    /// Names of the edits that can be made again, the next one first.
    pub fn redo_names(&self) -> impl Iterator<Item = &str> {
        self.future.iter().rev().map(|entry| entry.name.as_str())
    }

    /// Whether the project differs from what was saved last.
    pub fn dirty(&self) -> bool {
        self.dirty
    }

    /// The present project is now on the disk.
    pub fn mark_saved(&mut self) {
        self.saved = Some(Arc::clone(&self.present));
        self.dirty = false;
    }

    /// The present project is nowhere on the disk: a new one, or a recovered one.
    pub fn mark_unsaved(&mut self) {
        self.saved = None;
        self.dirty = true;
    }

    /// Changes what the window remembers, without an entry.
    pub fn set_layout(&mut self, layout: Layout) {
        if self.present.layout != layout {
            Arc::make_mut(&mut self.present).layout = layout;
        }
    }

    /// Makes a snapshot the present, with the layout of now, and gives the former present.
    fn turn_to(&mut self, mut project: Arc<Project>) -> Arc<Project> {
        if project.layout != self.present.layout {
            Arc::make_mut(&mut project).layout = self.present.layout.clone();
        }
        let former = std::mem::replace(&mut self.present, project);
        self.compare();
        former
    }

    fn advance(&mut self, next: Project, name: String) {
        if next != *self.present {
            let before = std::mem::replace(&mut self.present, Arc::new(next));
            self.remember(Entry { name, project: before });
            self.future.clear();
            self.compare();
        }
    }

    fn remember(&mut self, entry: Entry) {
        self.weight += weight(&entry.project);
        self.past.push_back(entry);
        while self.past.len() > ENTRIES || self.weight > WEIGHT && self.past.len() > 1 {
            if let Some(oldest) = self.past.pop_front() {
                self.weight -= weight(&oldest.project);
            }
        }
    }

    fn forget_last(&mut self) -> Option<Entry> {
        let entry = self.past.pop_back()?;
        self.weight -= weight(&entry.project);
        Some(entry)
    }

    fn compare(&mut self) {
        self.dirty = self.saved.as_ref().is_none_or(|saved| !same_work(&self.present, saved));
    }
}

fn weight(project: &Project) -> usize {
    let cells: usize = project.rows.iter().map(|row| 1 + row.cells.len()).sum();
    let steps: usize = project.scenarios.iter().map(|scenario| 1 + scenario.steps.len()).sum();
    16 + cells + steps + project.notes.len() / 64
}

/// Whether two projects are equal but for the layout.
fn same_work(a: &Arc<Project>, b: &Arc<Project>) -> bool {
    let Project { title, notes, inputs, outputs, discipline, initial, rows, scenarios, choices, layout: _ } =
        &**a;
    Arc::ptr_eq(a, b)
        || *title == b.title
            && *notes == b.notes
            && *inputs == b.inputs
            && *outputs == b.outputs
            && *discipline == b.discipline
            && *initial == b.initial
            && *rows == b.rows
            && *scenarios == b.scenarios
            && *choices == b.choices
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::project::arbitrary::{edit, raw_edits, tidy_project};
    use crate::project::{CellEntry, RowEntry, fits, read, write};

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(300))]

        #[test]
        fn undo_to_the_start_and_redo_to_the_end(start in tidy_project(), raws in raw_edits()) {
            let mut history = History::new(start.clone());
            let mut states = vec![start];
            let mut names = Vec::new();
            for raw in raws {
                let edit = edit(history.project(), raw);
                let before = history.project().clone();
                match history.apply(&edit) {
                    Ok(()) if *before != **history.project() => {
                        names.push(edit.name());
                        states.push((**history.project()).clone());
                    }
                    _ => prop_assert_eq!(&before, history.project()),
                }
                prop_assert!(fits(history.project()).is_ok());
                let text = write(history.project());
                prop_assert_eq!(&read(text.as_bytes()).expect("what fits is read"), &**history.project());
            }
            prop_assert!(history.undo_names().eq(names.iter().rev()));
            prop_assert_eq!(history.dirty(), states.first() != states.last());
            for (state, name) in states.iter().zip(&names).rev() {
                prop_assert_eq!(history.undo(), Some(name.clone()));
                prop_assert_eq!(state, &**history.project());
            }
            prop_assert_eq!(history.undo(), None);
            prop_assert!(!history.dirty());
            prop_assert!(history.redo_names().eq(&names));
            for (state, name) in states[1..].iter().zip(&names) {
                prop_assert_eq!(history.redo(), Some(name.clone()));
                prop_assert_eq!(state, &**history.project());
            }
            prop_assert_eq!(history.redo(), None);
        }
    }

    fn titled(title: &str) -> Edit {
        Edit::SetTitle(title.into())
    }

    #[test]
    fn a_new_edit_ends_the_way_forward() {
        let mut history = History::new(Project::new(vec!["a".into()], vec!["q".into()]));
        history.apply(&titled("one")).expect("short");
        history.apply(&Edit::SetNotes("two".into())).expect("short");
        history.undo();
        history.apply(&titled("three")).expect("short");
        assert_eq!(history.redo(), None);
        assert_eq!(history.undo_names().collect::<Vec<_>>(), ["Change title", "Change title"]);
    }

    #[test]
    fn joined_edits_are_undone_together() {
        let mut history = History::new(Project::new(vec!["a".into()], vec!["q".into()]));
        for title in ["p", "pu", "pum", "pump"] {
            history.apply_joined(&titled(title)).expect("short");
        }
        assert_eq!(history.undo_names().count(), 1);
        assert!(history.dirty());
        history.apply_joined(&titled("")).expect("short");
        assert_eq!((history.undo_names().count(), history.dirty()), (0, false));
        history.apply_joined(&titled("x")).expect("short");
        history.undo();
        assert_eq!(history.project().title, "");
    }

    #[test]
    fn saving_moves_the_clean_state() {
        let mut history = History::new(Project::new(vec!["a".into()], vec!["q".into()]));
        history.apply(&titled("one")).expect("short");
        history.mark_saved();
        assert!(!history.dirty());
        history.undo();
        assert!(history.dirty());
        history.apply(&titled("one")).expect("short");
        assert!(!history.dirty());
        history.mark_unsaved();
        assert!(history.dirty());
    }

    #[test]
    fn the_layout_is_carried_along() {
        let mut history = History::new(Project::new(vec!["a".into()], vec!["q".into()]));
        let layout = Layout { station: "Codes".into(), gray: true, used_only: false };
        history.apply(&titled("one")).expect("short");
        history.set_layout(layout.clone());
        history.undo();
        assert_eq!((&history.project().layout, history.dirty()), (&layout, false));
        history.redo();
        assert_eq!((&history.project().layout, history.project().title.as_str()), (&layout, "one"));
    }

    #[test]
    fn several_edits_in_one_go_are_one_entry_and_all_or_nothing() {
        let mut history = History::new(Project::new(vec!["a".into()], vec!["q".into()]));
        let start = Arc::clone(history.project());
        let row = |name: &str| RowEntry { name: name.into(), ..RowEntry::default() };
        let both = [Edit::InsertRow { at: 0, row: row("s") }, Edit::InsertRow { at: 1, row: row("t") }];
        history.apply_all(&both, "Two rows").expect("both can be made");
        assert_eq!(history.project().rows.len(), 2);
        assert_eq!(history.undo().as_deref(), Some("Two rows"));
        assert_eq!(history.project(), &start);
        let bad = [Edit::InsertRow { at: 0, row: row("s") }, Edit::DeleteRow { row: 7 }];
        assert!(history.apply_all(&bad, "Half").is_err());
        assert_eq!(history.project(), &start);
        assert_eq!(history.undo_names().count(), 0);
    }

    #[test]
    fn what_is_kept_is_bounded() {
        let mut history = History::new(Project::new(vec!["a".into()], vec!["q".into()]));
        for i in 0..ENTRIES + 10 {
            history.apply(&titled(&i.to_string())).expect("short");
        }
        assert_eq!(history.undo_names().count(), ENTRIES);
        let cells = (0..1 << 10).map(|c| (format!("{c:010b}"), CellEntry::default())).collect();
        let row = RowEntry { name: "wide".into(), cells };
        for i in 0..60 {
            let row = RowEntry { name: format!("r{i}"), ..row.clone() };
            history.apply(&Edit::InsertRow { at: 0, row }).expect("fits");
        }
        assert!(history.weight <= WEIGHT);
        let kept = history.undo_names().count();
        assert!((1..60).contains(&kept), "{kept}");
    }
}
