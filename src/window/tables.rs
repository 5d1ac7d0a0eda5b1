//! Read-only tables: the reduced table and the encoded table, in the same grid as the primitive one.

use eframe::egui::{Ui, Vec2};

use crate::base::{Code, Column, Row};
use crate::codes::values::{Coded, Role};
use crate::design::values::Pick;
use crate::merge::values::{Reduced, columns_in_text_order};
use crate::spec::values::FlowTable;
use crate::window::app::{Command, Scene};
use crate::window::grid::{Cursor, Face, Grid};

/// Width that a cell needs for texts of so many characters.
fn width(chars: usize) -> f32 {
    (chars as f32 * 7.8 + 34.0).clamp(54.0, 260.0)
}

/// The columns of a table in counting order.
pub fn columns(table: &FlowTable) -> Vec<Column> {
    columns_in_text_order(table.inputs).collect()
}

/// The reduced table. Selecting a cell selects it everywhere.
pub fn reduced(ui: &mut Ui, scene: &mut Scene<'_>, reduced: &Reduced, cursor: &mut Cursor, place: Vec2) {
    let table = &reduced.table;
    let columns = columns(table);
    let heads: Vec<String> = columns.iter().map(|c| table.column_text(*c)).collect();
    let marks = scene.marks;
    let longest = table.names.iter().map(|n| n.chars().count()).max().unwrap_or(1);
    let face = |r: usize, c: usize| {
        let (row, column) = (Row::new(r), columns[c]);
        let cell = table.cell(row, column);
        let specified = cell.next.is_some() || cell.outputs.care != 0;
        Face {
            text: cell
                .next
                .map_or_else(|| if specified { "–".into() } else { String::new() }, |n| table.name(n).into()),
            aside: if specified { cell.outputs.text(table.outputs) } else { String::new() },
            ring: cell.next == Some(row),
            dim: !specified,
            linked: marks.holds(Pick::MergedCell(row, column)),
            ..Face::default()
        }
    };
    let names = |r: usize| table.names[r].clone();
    let grid = Grid {
        name: "Reduced flow table",
        corner: "",
        columns: &heads,
        rows: &names,
        len: table.len(),
        face: &face,
        size: (width(longest + table.outputs + 1), longest as f32 * 8.4 + 24.0, 24.0),
    };
    let happened = grid.show(ui, "reduced", cursor, place);
    if happened.moved && !columns.is_empty() {
        let pick = Pick::MergedCell(Row::new(cursor.at.0), columns[cursor.at.1]);
        scene.send(Command::Pick(Some(pick)));
    }
    if let Some(row) = happened.label {
        scene.send(Command::Pick(Some(Pick::Merged(Row::new(row)))));
    }
}

/// The encoded table: a line for each code in use.
pub fn encoded(
    ui: &mut Ui,
    scene: &mut Scene<'_>,
    reduced: &Reduced,
    coded: &Coded,
    cursor: &mut Cursor,
    place: Vec2,
) {
    let table = &reduced.table;
    let columns = columns(table);
    let heads: Vec<String> = columns.iter().map(|c| table.column_text(*c)).collect();
    let mut codes: Vec<Code> = coded.encoded.entries.keys().map(|k| k.0).collect();
    codes.dedup();
    let owner = |code: Code| -> String {
        match coded.row_of(code) {
            Some(row) => table.name(row).to_owned(),
            None => {
                coded.spare.iter().find(|s| s.code == code).map_or_else(|| "–".into(), |s| s.name.clone())
            }
        }
    };
    // Rows of the reduced table first, then spare codes, then codes passed on the way.
    codes.sort_by_key(|&c| (coded.row_of(c).map_or(usize::MAX, Row::at), owner(c) == "–", c));
    let marks = scene.marks;
    let face = |r: usize, c: usize| {
        let (code, column) = (codes[r], columns[c]);
        let entry = coded.encoded.get(code, column);
        Face {
            text: entry.map_or_else(String::new, |e| e.next.text(coded.bits)),
            aside: entry.map_or_else(String::new, |e| match e.role {
                Role::Row(_) => String::new(),
                Role::Lent(_) => "lent".into(),
                Role::Spare => "spare".into(),
                Role::OnTheWay => "on the way".into(),
            }),
            ring: entry.is_some_and(|e| e.next == code),
            dim: entry.is_none(),
            linked: marks.holds(Pick::Entry(code, column)),
            mono: true,
            mark: None,
        }
    };
    let longest = codes.iter().map(|&c| owner(c).chars().count()).max().unwrap_or(1);
    let names = |r: usize| format!("{}  {}", owner(codes[r]), codes[r].text(coded.bits));
    let grid = Grid {
        name: "Encoded table",
        corner: "code",
        columns: &heads,
        rows: &names,
        len: codes.len(),
        face: &face,
        size: (width(coded.bits + 8), (longest + coded.bits + 2) as f32 * 8.2 + 20.0, 24.0),
    };
    let happened = grid.show(ui, "encoded", cursor, place);
    if happened.moved && !columns.is_empty() && !codes.is_empty() {
        let pick = Pick::Entry(codes[cursor.at.0], columns[cursor.at.1]);
        scene.send(Command::Pick(Some(pick)));
    }
    if let Some(row) = happened.label {
        scene.send(Command::Pick(Some(Pick::Code(codes[row]))));
    }
}
