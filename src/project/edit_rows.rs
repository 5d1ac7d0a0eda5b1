//! Edits of rows and cells, with every reference that follows: initial state, next rows, cover, scenarios.
//! Each is linear in the project.

use crate::project::edit::{EditError, existing};
use crate::project::{CellEntry, Choices, CoverChoice, Method, Project, RowEntry, limits};

/// What a next row says where it is unspecified.
const OPEN: &str = "-";

pub(super) fn set_cell(
    project: &mut Project,
    row: usize,
    column: &str,
    cell: Option<&CellEntry>,
) -> Result<(), EditError> {
    let row = existing(row, project.rows.len(), "row")?;
    let cells = &mut project.rows[row].cells;
    match cell {
        // A column that the inputs do not have can be cleared, but not filled.
        None => drop(cells.remove(column)),
        Some(_)
            if column.len() != project.inputs.len()
                || !column.bytes().all(|bit| matches!(bit, b'0' | b'1')) =>
        {
            let inputs = project.inputs.len();
            let column: String = column.chars().take(64).collect();
            return Err(EditError::new(format!(
                "there is no column {column:?}: give a 0 or 1 for each of the {inputs} inputs"
            )));
        }
        Some(cell) => drop(cells.insert(column.to_owned(), cell.clone())),
    }
    Ok(())
}

pub(super) fn insert(project: &mut Project, at: usize, row: RowEntry) -> Result<(), EditError> {
    let at = existing(at, project.rows.len() + 1, "place for a row,")?;
    free_name(project, &row.name)?;
    project.rows.insert(at, row);
    Ok(())
}

pub(super) fn delete(project: &mut Project, row: usize) -> Result<(), EditError> {
    let row = existing(row, project.rows.len(), "row")?;
    let meant = means_one(project, row);
    let name = project.rows.remove(row).name;
    if meant {
        forget(project, &name);
    }
    Ok(())
}

pub(super) fn duplicate(project: &mut Project, row: usize, name: &str) -> Result<(), EditError> {
    let row = existing(row, project.rows.len(), "row")?;
    free_name(project, name)?;
    let meant = means_one(project, row);
    let mut copy = project.rows[row].clone();
    let original = std::mem::replace(&mut copy.name, name.to_owned());
    if meant {
        for cell in copy.cells.values_mut().filter(|cell| cell.next == original) {
            name.clone_into(&mut cell.next);
        }
        for set in sets(&mut project.choices) {
            if let Some(place) = set.iter().position(|member| *member == original) {
                set.insert(place + 1, name.to_owned());
            }
        }
    }
    project.rows.insert(row + 1, copy);
    Ok(())
}

pub(super) fn rename(project: &mut Project, row: usize, name: &str) -> Result<(), EditError> {
    let row = existing(row, project.rows.len(), "row")?;
    if project.rows[row].name == name {
        return Ok(());
    }
    free_name(project, name)?;
    let meant = means_one(project, row);
    let old = std::mem::replace(&mut project.rows[row].name, name.to_owned());
    if meant {
        for reference in references(project).filter(|reference| **reference == old) {
            name.clone_into(reference);
        }
    }
    Ok(())
}

/// Names a merged row by its place in the cover. Those before it keep the names that they have without being named.
pub(super) fn name_merged(choices: &mut Choices, index: usize, name: &str) -> Result<(), EditError> {
    let names = &mut choices.merging.names;
    existing(index, limits::ROWS, "merged row")?;
    if name.is_empty() {
        return Err(EditError::new("a merged row needs a name: type one"));
    }
    let old = names.get(index).cloned().unwrap_or_else(|| letters(index));
    if old == name {
        return Ok(());
    }
    let coded = match &choices.codes.method {
        Method::ByHand(codes) => codes.contains_key(name),
        _ => false,
    };
    if coded || names.iter().any(|taken| taken == name) {
        return Err(EditError::new(format!("another merged row is named {name:?}: choose another name")));
    }
    names.extend((names.len()..=index).map(letters));
    name.clone_into(&mut names[index]);
    if let Method::ByHand(codes) = &mut choices.codes.method
        && let Some(own) = codes.remove(&old)
    {
        codes.insert(name.to_owned(), own);
    }
    Ok(())
}

/// The name of a merged row that nobody named: A, B, .., Z, AA, AB, ..
fn letters(index: usize) -> String {
    let (mut left, mut name) = (index + 1, String::new());
    while left > 0 {
        left -= 1;
        name.insert(0, char::from(b'A' + (left % 26) as u8));
        left /= 26;
    }
    name
}

/// Whether a reference with this row's name means this row and no other.
fn means_one(project: &Project, row: usize) -> bool {
    let name = &project.rows[row].name;
    !name.is_empty() && name != OPEN && project.rows.iter().filter(|other| other.name == *name).count() == 1
}

fn free_name(project: &Project, name: &str) -> Result<(), EditError> {
    if name.is_empty() {
        return Err(EditError::new("a row needs a name: type one"));
    }
    if name == OPEN {
        return Err(EditError::new("`-` means that the next row is open: choose another name for the row"));
    }
    if project.rows.iter().any(|row| row.name == name) {
        return Err(EditError::new(format!("another row is named {name:?}: choose another name")));
    }
    Ok(())
}

/// Every place that names a row, the rows themselves apart.
fn references(project: &mut Project) -> impl Iterator<Item = &mut String> {
    let next = project.rows.iter_mut().flat_map(|row| row.cells.values_mut()).map(|cell| &mut cell.next);
    let initial = project.initial.iter_mut().map(|(row, _)| row);
    let steps = project.scenarios.iter_mut().flat_map(|scenario| &mut scenario.steps);
    let members = sets(&mut project.choices).iter_mut().flatten();
    next.chain(initial).chain(steps.filter_map(|step| step.row.as_mut())).chain(members)
}

fn sets(choices: &mut Choices) -> &mut [Vec<String>] {
    match &mut choices.merging.cover {
        CoverChoice::Smallest => &mut [],
        CoverChoice::ByHand(sets) => sets,
    }
}

/// Takes back every mention of a row that is gone.
fn forget(project: &mut Project, name: &str) {
    for row in &mut project.rows {
        row.cells.retain(|_, cell| {
            if cell.next == name {
                OPEN.clone_into(&mut cell.next);
                // With the next row gone, a cell without outputs says nothing any more.
                return cell.outputs.chars().any(|output| output != '-');
            }
            true
        });
    }
    project.initial.take_if(|(row, _)| row == name);
    for step in project.scenarios.iter_mut().flat_map(|scenario| &mut scenario.steps) {
        step.row.take_if(|row| row == name);
    }
    let merging = &mut project.choices.merging;
    if let CoverChoice::ByHand(sets) = &mut merging.cover {
        let mut place = 0;
        sets.retain_mut(|set| {
            let before = set.len();
            set.retain(|member| member != name);
            let emptied = set.is_empty() && before > 0;
            if emptied && place < merging.names.len() {
                // Names go by place: that of the set goes with it.
                merging.names.remove(place);
            } else if !emptied {
                place += 1;
            }
            !emptied
        });
    }
}
