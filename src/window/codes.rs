//! The Codes station: the methods compared, the code map with the moves of a column, races, the encoded table.

use std::collections::BTreeMap;
use std::sync::Arc;

use eframe::egui::{self, RichText, Ui, vec2};

use crate::base::{Code, Column, Row};
use crate::codes::values::Coded;
use crate::design::Alternative;
use crate::design::values::Pick;
use crate::drawing::codes::code_map;
use crate::drawing::svg;
use crate::explain::figures::counted;
use crate::explain::why;
use crate::merge::values::Reduced;
use crate::project::Edit;
use crate::project::choices::Method;
use crate::window::app::{Command, Scene};
use crate::window::dialogs::Purpose;
use crate::window::grid::Cursor;
use crate::window::paint::{View, show as show_picture};
use crate::window::tables;
use crate::window::theme::{palette, pane};

/// State of the station.
#[derive(Default)]
pub struct CodesView {
    column: Option<usize>,
    view: View,
    cursor: Cursor,
    /// All methods side by side, as far as computed.
    pub alternatives: Option<Arc<Vec<Alternative>>>,
}

/// Shows the station.
pub fn show(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut CodesView) {
    let design = Arc::clone(scene.design);
    let Some(reduced) = design.merged.as_ref().and_then(|m| m.reduced.as_ref()) else {
        ui.weak("There is no reduced table yet: see Behaviour and Merging.");
        return;
    };
    methods(ui, scene, view);
    ui.separator();
    let (Some(coded), Some(races)) = (&design.coded, &design.races) else {
        let p = palette(ui.visuals());
        for f in &design.findings {
            if f.level == crate::base::Level::Error {
                ui.label(RichText::new(format!("! {}", f.text)).color(p.bad));
            }
        }
        return;
    };
    let room = ui.available_height();
    let below = egui::Panel::bottom("encoded").frame(pane(0, 0, 6, 0)).resizable(true);
    below.default_size((room * 0.45).clamp(90.0, 420.0)).show(ui, |ui| {
        ui.label(RichText::new("Encoded table").heading());
        let place = ui.available_size();
        tables::encoded(ui, scene, reduced, coded, &mut view.cursor, place);
    });
    let right = egui::Panel::right("races").frame(pane(10, 0, 0, 0)).resizable(true);
    right.default_size(270.0).size_range(160.0..=460.0).show(ui, |ui| {
        egui::ScrollArea::vertical()
            .id_salt("races")
            .auto_shrink(false)
            .show(ui, |ui| verdict(ui, scene, reduced, coded));
    });
    let columns = tables::columns(&reduced.table);
    let ways = |c: &Column| coded.ways.iter().filter(|w| w.column == *c).count();
    // At first the column where most happens; of several, the first.
    let first = || (0..columns.len()).max_by_key(|&i| (ways(&columns[i]), std::cmp::Reverse(i))).unwrap_or(0);
    let mut chosen = view.column.unwrap_or_else(first).min(columns.len().saturating_sub(1));
    if let Some(Pick::Entry(_, c) | Pick::MergedCell(_, c)) = scene.marks.picked
        && let Some(i) = columns.iter().position(|x| *x == c)
    {
        chosen = i;
    }
    view.column = Some(chosen);
    let column = columns[chosen];
    let picture = code_map(reduced, coded, races, column);
    ui.horizontal(|ui| {
        let label = ui.label("Moves of column");
        let list = egui::ComboBox::from_id_salt("column").selected_text(reduced.table.column_text(column));
        let shown = list.show_ui(ui, |ui| {
            for (i, c) in columns.iter().enumerate() {
                let words = format!("{}  ({})", reduced.table.column_text(*c), counted(ways(c), "move"));
                if ui.selectable_label(i == chosen, words).clicked() {
                    view.column = Some(i);
                    scene.send(Command::Pick(None));
                }
            }
        });
        shown.response.labelled_by(label.id);
        move_menu(ui, scene, reduced, coded);
        if ui.button("Save picture…").clicked() {
            scene.send(Command::Write(Purpose::Picture, svg::svg(&picture)));
        }
    });
    let size = ui.available_size() - vec2(0.0, 4.0);
    let carries = |pick: Pick| matches!(pick, Pick::Code(code) if coded.row_of(code).is_some());
    let gesture = show_picture(ui, &picture, &mut view.view, scene.marks, size, &carries);
    if let Some(Pick::Code(code)) = gesture.picked {
        scene.send(Command::Pick(Some(Pick::Entry(code, column))));
    }
    if let Some((Pick::Code(from), Pick::Code(to))) = gesture.dropped {
        scene.send(Command::Edit(by_hand(reduced, coded, from, to)));
    }
}

/// Codes by hand in which the row at `from` has moved to `to`; a row that was there takes its place.
fn by_hand(reduced: &Reduced, coded: &Coded, from: Code, to: Code) -> Edit {
    let swap = |code: Code| match code {
        c if c == from => to,
        c if c == to => from,
        c => c,
    };
    let codes: BTreeMap<String, Vec<String>> = reduced
        .table
        .rows()
        .map(|r| {
            let list = coded.codes[r.at()].iter().map(|&c| swap(c).text(coded.bits)).collect();
            (reduced.table.name(r).to_owned(), list)
        })
        .collect();
    Edit::SetMethod(Method::ByHand(codes))
}

/// The same as dragging, by keyboard: the selected row to another code.
fn move_menu(ui: &mut Ui, scene: &mut Scene<'_>, reduced: &Reduced, coded: &Coded) {
    let selected = match scene.marks.picked {
        Some(Pick::Entry(code, _) | Pick::Code(code)) => coded.row_of(code).map(|row| (row, code)),
        Some(Pick::Merged(row) | Pick::MergedCell(row, _)) => {
            coded.codes.get(row.at()).and_then(|c| c.first()).map(|&code| (row, code))
        }
        _ => None,
    };
    let Some((row, from)) = selected else { return };
    if coded.bits == 0 || coded.bits > 6 {
        return;
    }
    ui.menu_button(format!("Move {} to code…", reduced.table.name(row)), |ui| {
        for to in (0..1u32 << coded.bits).map(Code).filter(|c| *c != from) {
            let owner =
                coded.row_of(to).map_or(String::new(), |r| format!("  swaps with {}", reduced.table.name(r)));
            if ui.button(format!("{}{owner}", to.text(coded.bits))).clicked() {
                scene.send(Command::Edit(by_hand(reduced, coded, from, to)));
                ui.close();
            }
        }
    });
}

fn methods(ui: &mut Ui, scene: &mut Scene<'_>, view: &CodesView) {
    let chosen = scene.project.choices.codes.method.clone();
    let logic = &scene.project.choices.logic;
    let (form, shape) = (logic.form, logic.shape);
    egui::Grid::new("methods").num_columns(8).striped(true).spacing([18.0, 3.0]).show(ui, |ui| {
        for head in ["Method", "Bits", "Spare", "Steps", "Terms", "Literals", "Essential hazards", "Verdict"]
        {
            ui.label(RichText::new(head).weak());
        }
        ui.end_row();
        let mut list: Vec<Method> = Method::ALL.to_vec();
        if matches!(chosen, Method::ByHand(_)) {
            list.push(chosen.clone());
        }
        for method in list {
            let name = method.word().replace('_', " ");
            if ui.radio(method == chosen, capital(&name)).clicked() && method != chosen {
                scene.send(Command::Edit(Edit::SetMethod(method.clone())));
            }
            let found = view.alternatives.as_ref().and_then(|all| {
                all.iter().find(|a| a.method == method && a.form == form && a.shape == shape)
            });
            match found {
                None => {
                    ui.weak("…");
                }
                Some(alternative) => line(ui, alternative),
            }
            ui.end_row();
        }
    });
}

fn line(ui: &mut Ui, alternative: &Alternative) {
    let design = &alternative.design;
    let p = palette(ui.visuals());
    let mut figure = |n: Option<usize>| {
        ui.label(RichText::new(n.map_or("–".to_owned(), |n| n.to_string())).monospace());
    };
    let coded = design.coded.as_ref();
    figure(coded.map(|c| c.bits));
    figure(coded.map(|c| c.spare.len()));
    figure(coded.map(|c| c.longest_path));
    let equations = design.equations.as_ref().filter(|e| e.clashes.is_empty());
    figure(equations.map(|e| e.functions.iter().map(|f| f.products.len()).sum()));
    figure(equations.map(|e| e.functions.iter().map(|f| f.literals()).sum()));
    figure(equations.map(|e| e.essential.len() + e.burst_essential.len()));
    if design.proved() {
        ui.label(RichText::new("✓ proved").color(p.accent));
    } else {
        let reason = design.findings.iter().find(|f| f.level == crate::base::Level::Error);
        let text = reason.map_or("not proved", |f| f.text.as_str());
        let short: String = text.chars().take(70).collect();
        ui.label(RichText::new(format!("! {short}")).color(p.bad)).on_hover_text(text);
    }
}

fn verdict(ui: &mut Ui, scene: &mut Scene<'_>, reduced: &Reduced, coded: &Coded) {
    let p = palette(ui.visuals());
    let design = Arc::clone(scene.design);
    let Some(races) = &design.races else { return };
    ui.label(RichText::new("Races").heading());
    if races.critical.is_empty() {
        ui.label(RichText::new("✓ no critical race, in any order of changes").color(p.accent));
    }
    let mut seen: Vec<(Row, Column)> = Vec::new();
    for race in &races.critical {
        if seen.contains(&(race.from, race.column)) {
            continue;
        }
        seen.push((race.from, race.column));
        let name = format!(
            "! {} to {} in column {}",
            reduced.table.name(race.from),
            reduced.table.name(race.to),
            reduced.table.column_text(race.column)
        );
        let start = race.path.first().copied().unwrap_or(coded.initial);
        let pick = Pick::Entry(start, race.column);
        if ui.link(RichText::new(name).color(p.bad)).clicked() {
            scene.send(Command::Pick(Some(pick)));
        }
        if let Some(text) = why(&design, pick).map(|w| w.plain()) {
            ui.label(RichText::new(text).weak());
        }
    }
    ui.label(counted(races.noncritical, "non-critical race"));
    ui.label(format!("longest way: {}", counted(races.longest, "step")));
    for (row, column, steps) in races.cycles.iter().take(40) {
        let words = format!(
            "{} in column {}: {steps} steps",
            reduced.table.name(*row),
            reduced.table.column_text(*column)
        );
        if ui.link(RichText::new(words).color(p.ink)).clicked() {
            scene.send(Command::Pick(Some(Pick::MergedCell(*row, *column))));
        }
    }
}

fn capital(word: &str) -> String {
    let mut chars = word.chars();
    chars.next().map(|c| c.to_uppercase().collect::<String>() + chars.as_str()).unwrap_or_default()
}
