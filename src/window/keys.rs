//! Keys of the commands.

use eframe::egui::{Modifiers, Ui};

use crate::window::actions::Action;

/// The commands whose keys were pressed in this frame. While a cell is being typed (`typing`), keys that edit text stay with the
/// text.
pub fn pressed(ui: &mut Ui, typing: bool) -> Vec<Action> {
    let mut actions: Vec<Action> = Action::all().collect();
    // A chord without Shift would also take the one with Shift: the longer ones first.
    let weight = |m: Modifiers| usize::from(m.shift) + usize::from(m.alt) + usize::from(m.command);
    actions.sort_by_key(|a| std::cmp::Reverse(a.keys().map_or(0, |k| weight(k.modifiers))));
    ui.input_mut(|input| {
        actions
            .into_iter()
            .filter(|action| {
                let Some(keys) = action.keys() else { return false };
                let edits_text = matches!(action, Action::Undo | Action::Redo | Action::Clear);
                // The table takes its own keys while it has the keyboard.
                !(action.in_table() || typing && edits_text) && input.consume_shortcut(&keys)
            })
            .collect()
    })
}
