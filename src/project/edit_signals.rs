//! Edits of inputs and outputs, with every column and output string that follows. Each is linear in the project.
//!
//! A string of the wrong length is changed at the same place, as far as it reaches there, so that what is wrong
//! with it before stays as visible after.

use std::collections::BTreeMap;

use crate::project::edit::{EditError, existing, shift};
use crate::project::{CellEntry, Project};

pub(super) fn add_input(project: &mut Project, at: usize, name: &str) -> Result<(), EditError> {
    let at = existing(at, project.inputs.len() + 1, "place for an input,")?;
    free_name(project, name)?;
    project.inputs.insert(at, name.to_owned());
    each_column(project, |column| put(column, at, '0'));
    Ok(())
}

pub(super) fn rename_input(project: &mut Project, input: usize, name: &str) -> Result<(), EditError> {
    let input = existing(input, project.inputs.len(), "input")?;
    if project.inputs[input] != name {
        free_name(project, name)?;
        name.clone_into(&mut project.inputs[input]);
    }
    Ok(())
}

pub(super) fn move_input(project: &mut Project, input: usize, to: usize) -> Result<(), EditError> {
    shift(&mut project.inputs, input, to, "input")?;
    each_column(project, |column| carry(column, input, to));
    Ok(())
}

pub(super) fn remove_input(project: &mut Project, input: usize) -> Result<(), EditError> {
    let input = existing(input, project.inputs.len(), "input")?;
    project.inputs.remove(input);
    let low = |column: &str| matches!(column.chars().nth(input), None | Some('0'));
    for row in &mut project.rows {
        row.cells.retain(|column, _| low(column));
    }
    project.initial.take_if(|(_, column)| !low(column));
    each_column(project, |column| take(column, input));
    Ok(())
}

pub(super) fn add_output(project: &mut Project, at: usize, name: &str) -> Result<(), EditError> {
    let at = existing(at, project.outputs.len() + 1, "place for an output,")?;
    free_name(project, name)?;
    project.outputs.insert(at, name.to_owned());
    each_output_string(project, |outputs| put(outputs, at, '-'));
    Ok(())
}

pub(super) fn rename_output(project: &mut Project, output: usize, name: &str) -> Result<(), EditError> {
    let output = existing(output, project.outputs.len(), "output")?;
    if project.outputs[output] == name {
        return Ok(());
    }
    free_name(project, name)?;
    let meant = means_one(project, output);
    let old = std::mem::replace(&mut project.outputs[output], name.to_owned());
    if meant {
        for late in project.choices.logic.late.iter_mut().filter(|late| **late == old) {
            name.clone_into(late);
        }
    }
    Ok(())
}

pub(super) fn move_output(project: &mut Project, output: usize, to: usize) -> Result<(), EditError> {
    shift(&mut project.outputs, output, to, "output")?;
    each_output_string(project, |outputs| carry(outputs, output, to));
    Ok(())
}

pub(super) fn remove_output(project: &mut Project, output: usize) -> Result<(), EditError> {
    let output = existing(output, project.outputs.len(), "output")?;
    let meant = means_one(project, output);
    let name = project.outputs.remove(output);
    if meant {
        project.choices.logic.late.retain(|late| *late != name);
    }
    each_output_string(project, |outputs| take(outputs, output));
    Ok(())
}

fn means_one(project: &Project, output: usize) -> bool {
    project.outputs.iter().filter(|name| **name == project.outputs[output]).count() == 1
}

fn free_name(project: &Project, name: &str) -> Result<(), EditError> {
    if name.is_empty() {
        return Err(EditError::new("a signal needs a name: type one"));
    }
    if project.inputs.iter().chain(&project.outputs).any(|taken| taken == name) {
        return Err(EditError::new(format!("another signal is named {name:?}: choose another name")));
    }
    Ok(())
}

/// Changes every column: of cells, of the initial state, of scenarios. Where two columns of a row become one, which only
/// columns of different lengths can, the one of the right length stays.
fn each_column(project: &mut Project, change: impl Fn(&str) -> String) {
    let inputs = project.inputs.len();
    for row in &mut project.rows {
        let mut cells: BTreeMap<String, CellEntry> = BTreeMap::new();
        for (column, cell) in std::mem::take(&mut row.cells) {
            let changed = change(&column);
            // A column that was too short and now fits by chance gives way to the one that was right.
            let by_chance = changed == column && column.chars().count() == inputs;
            match cells.get(&changed) {
                Some(_) if by_chance => {}
                _ => drop(cells.insert(changed, cell)),
            }
        }
        row.cells = cells;
    }
    if let Some((_, column)) = &mut project.initial {
        *column = change(column);
    }
    for step in project.scenarios.iter_mut().flat_map(|scenario| &mut scenario.steps) {
        step.inputs = change(&step.inputs);
    }
}

fn each_output_string(project: &mut Project, change: impl Fn(&str) -> String) {
    for cell in project.rows.iter_mut().flat_map(|row| row.cells.values_mut()) {
        cell.outputs = change(&cell.outputs);
    }
    for step in project.scenarios.iter_mut().flat_map(|scenario| &mut scenario.steps) {
        step.outputs = change(&step.outputs);
    }
}

fn put(text: &str, at: usize, new: char) -> String {
    let mut characters: Vec<char> = text.chars().collect();
    characters.insert(at.min(characters.len()), new);
    characters.into_iter().collect()
}

fn take(text: &str, at: usize) -> String {
    text.chars().enumerate().filter(|(i, _)| *i != at).map(|(_, c)| c).collect()
}

fn carry(text: &str, from: usize, to: usize) -> String {
    let mut characters: Vec<char> = text.chars().collect();
    if from.max(to) < characters.len() {
        let moved = characters.remove(from);
        characters.insert(to, moved);
    }
    characters.into_iter().collect()
}
