//! The Merging station: implication table and merger diagram, sets, the cover, the reduced table.

use std::sync::Arc;

use eframe::egui::{self, RichText, Ui, vec2};

use crate::base::Row;
use crate::design::Design;
use crate::design::values::Pick;
use crate::drawing::implication::implication_table;
use crate::drawing::merger::merger_diagram;
use crate::drawing::{Picture, svg};
use crate::merge::values::{CoverFault, Merged, RowSet};
use crate::project::choices::OutputStyle;
use crate::project::{CoverChoice, Edit};
use crate::spec::values::Spec;
use crate::window::app::{Command, Scene};
use crate::window::dialogs::{Dialog, Purpose};
use crate::window::grid::Cursor;
use crate::window::paint::{View, picture};
use crate::window::tables;
use crate::window::theme::{palette, pane};

/// Beyond this many rows the pictures are drawn only when asked for: half a million squares help nobody.
const ROWS_DRAWN: usize = 150;

/// State of the station.
#[derive(Default)]
pub struct MergingView {
    pass: Option<usize>,
    table_view: View,
    diagram_view: View,
    cursor: Cursor,
    drawn: Option<Drawn>,
}

struct Drawn {
    of: Arc<Design>,
    pass: Option<usize>,
    outlined: Option<usize>,
    table: Picture,
    diagram: Picture,
}

/// Shows the station.
pub fn show(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut MergingView) {
    let design = Arc::clone(scene.design);
    let (Some(spec), Some(merged)) = (&design.spec, &design.merged) else {
        ui.weak("The table must be free of errors first: see Behaviour.");
        return;
    };
    draw(scene, view, spec, merged);
    let room = ui.available_height();
    let below = egui::Panel::bottom("reduced").frame(pane(0, 0, 6, 0)).resizable(true);
    below.default_size((room * 0.36).clamp(110.0, 300.0)).show(ui, |ui| reduced(ui, scene, view, merged));
    let right = egui::Panel::right("sets").frame(pane(10, 0, 0, 0)).resizable(true);
    right.default_size(270.0).size_range(180.0..=460.0).show(ui, |ui| {
        egui::ScrollArea::vertical().id_salt("sets").auto_shrink(false).show(ui, |ui| {
            cover(ui, scene, spec, merged);
            ui.separator();
            compatibles(ui, scene, spec, merged);
        });
    });
    passes(ui, scene, view, merged);
    let Some(drawn) = &view.drawn else {
        ui.weak(format!("{} rows: the pictures are left out beyond {ROWS_DRAWN}.", spec.table.len()));
        return;
    };
    let size = ui.available_size();
    // Each gets room by its own width, so that neither is tiny beside the other.
    let (table, diagram) = (drawn.table.size.0, drawn.diagram.size.0);
    let share = (table / (table + diagram)).clamp(0.35, 0.65);
    let part = |share: f32| vec2(((size.x - 8.0) * share).max(60.0), (size.y - 4.0).max(60.0));
    ui.horizontal(|ui| {
        let left = picture(ui, &drawn.table, &mut view.table_view, scene.marks, part(share));
        let right = picture(ui, &drawn.diagram, &mut view.diagram_view, scene.marks, part(1.0 - share));
        if let Some(pick) = left.or(right) {
            scene.send(Command::Pick(Some(pick)));
        }
    });
}

fn draw(scene: &Scene<'_>, view: &mut MergingView, spec: &Spec, merged: &Merged) {
    let outlined = match scene.marks.picked {
        Some(Pick::Compatible(i)) => Some(i),
        _ => None,
    };
    let current = view
        .drawn
        .as_ref()
        .is_some_and(|d| Arc::ptr_eq(&d.of, scene.design) && d.pass == view.pass && d.outlined == outlined);
    if current {
        return;
    }
    if spec.table.len() > ROWS_DRAWN {
        view.drawn = None;
        return;
    }
    let one: Vec<RowSet> = outlined.and_then(|i| merged.maximal.get(i)).cloned().into_iter().collect();
    let sets = if one.is_empty() { &merged.cover } else { &one };
    view.drawn = Some(Drawn {
        of: Arc::clone(scene.design),
        pass: view.pass,
        outlined,
        table: implication_table(&spec.table, &merged.pairs, view.pass),
        diagram: merger_diagram(&spec.table, &merged.pairs, sets),
    });
}

fn passes(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut MergingView, merged: &Merged) {
    ui.horizontal_wrapped(|ui| {
        let last = merged.pairs.passes;
        let now = view.pass.unwrap_or(last).min(last);
        ui.label("Passes");
        if ui.add_enabled(now > 0, egui::Button::new("◀").small()).on_hover_text("Pass before").clicked() {
            view.pass = Some(now - 1);
        }
        ui.label(RichText::new(format!("{now} of {last}")).monospace());
        if ui.add_enabled(now < last, egui::Button::new("▶").small()).on_hover_text("Next pass").clicked() {
            view.pass = (now + 1 < last).then_some(now + 1);
        }
        ui.separator();
        let mut style = scene.project.choices.merging.outputs;
        ui.label("Outputs");
        ui.radio_value(&mut style, OutputStyle::PerCell, "per cell");
        ui.radio_value(&mut style, OutputStyle::PerRow, "per row");
        if style != scene.project.choices.merging.outputs {
            scene.send(Command::Edit(Edit::SetOutputStyle(style)));
        }
        if let Some(drawn) = &view.drawn {
            ui.separator();
            ui.menu_button("Save picture", |ui| {
                for (name, picture) in
                    [("Implication table…", &drawn.table), ("Merger diagram…", &drawn.diagram)]
                {
                    if ui.button(name).clicked() {
                        scene.send(Command::Write(Purpose::Picture, svg::svg(picture)));
                    }
                }
            });
        }
    });
}

fn names(spec: &Spec, set: &RowSet) -> String {
    let names: Vec<&str> = set.ones().map(|r| spec.table.name(Row::new(r))).collect();
    names.join(", ")
}

/// A set as a line that can be selected, wrapped where it is long.
fn set_button(ui: &mut Ui, selected: bool, text: String) -> bool {
    ui.add(egui::Button::selectable(selected, text).wrap()).clicked()
}

fn row_names(spec: &Spec, rows: &[Row]) -> String {
    rows.iter().map(|&r| spec.table.name(r)).collect::<Vec<_>>().join(", ")
}

fn cover(ui: &mut Ui, scene: &mut Scene<'_>, spec: &Spec, merged: &Merged) {
    let p = palette(ui.visuals());
    ui.label(RichText::new("Closed cover").heading());
    let by_hand = matches!(scene.project.choices.merging.cover, CoverChoice::ByHand(_));
    let verdict = if !merged.faults.is_empty() {
        RichText::new("! not a closed cover").color(p.bad)
    } else if merged.bound.proved() {
        RichText::new("✓ smallest, proved").color(p.accent)
    } else {
        RichText::new(format!("? at least {} sets", merged.lower_bound)).color(p.warn)
    };
    ui.label(verdict);
    for (i, set) in merged.cover.iter().enumerate() {
        ui.horizontal_top(|ui| {
            let name =
                merged.reduced.as_ref().map_or_else(|| format!("{}", i + 1), |r| r.table.names[i].clone());
            ui.label(RichText::new(name).strong().color(p.hues[i % 8]));
            let selected = scene.marks.holds(Pick::Merged(Row::new(i)));
            if set_button(ui, selected, names(spec, set)) {
                scene.send(Command::Pick(Some(Pick::Merged(Row::new(i)))));
            }
        });
    }
    for fault in &merged.faults {
        ui.label(RichText::new(fault_text(spec, fault)).color(p.bad));
    }
    ui.horizontal(|ui| {
        if by_hand {
            if ui.button("Find the smallest").clicked() {
                scene.send(Command::Edit(Edit::SetCover(CoverChoice::Smallest)));
            }
        } else if ui.button("Take over by hand").clicked() {
            scene.send(Command::Edit(Edit::SetCover(CoverChoice::ByHand(as_names(spec, &merged.cover)))));
        }
    });
    if by_hand {
        hand(ui, scene, spec, merged);
    }
    if !merged.further.is_empty() {
        ui.label("Other smallest covers");
        for other in &merged.further {
            let text = other.iter().map(|s| format!("{{{}}}", names(spec, s))).collect::<Vec<_>>().join(" ");
            if ui.button(text).clicked() {
                scene.send(Command::Edit(Edit::SetCover(CoverChoice::ByHand(as_names(spec, other)))));
            }
        }
    }
}

fn as_names(spec: &Spec, cover: &[RowSet]) -> Vec<Vec<String>> {
    cover.iter().map(|s| s.ones().map(|r| spec.table.names[r].clone()).collect()).collect()
}

/// The cover by hand: each set a line of names that can be changed, its verdict live above.
fn hand(ui: &mut Ui, scene: &mut Scene<'_>, spec: &Spec, merged: &Merged) {
    let CoverChoice::ByHand(sets) = scene.project.choices.merging.cover.clone() else { return };
    let mut change: Option<Vec<Vec<String>>> = None;
    for (i, set) in sets.iter().enumerate() {
        ui.horizontal(|ui| {
            ui.menu_button(format!("Set {}", i + 1), |ui| {
                egui::ScrollArea::vertical().max_height(300.0).show(ui, |ui| {
                    for name in &spec.table.names {
                        let mut inside = set.contains(name);
                        if ui.checkbox(&mut inside, name).changed() {
                            let mut next = sets.clone();
                            if inside {
                                next[i] = spec
                                    .table
                                    .names
                                    .iter()
                                    .filter(|n| *n == name || set.contains(n))
                                    .cloned()
                                    .collect();
                            } else {
                                next[i].retain(|n| n != name);
                            }
                            change = Some(next);
                        }
                    }
                });
            });
            ui.label(set.join(" "));
            let remove = ui.small_button("×").on_hover_text("Remove this set");
            if remove.clicked() {
                let mut next = sets.clone();
                next.remove(i);
                change = Some(next);
            }
        });
    }
    if ui.button("Add a set").clicked() {
        let mut next = sets.clone();
        let missing = (0..spec.table.len()).find(|&r| !merged.cover.iter().any(|s| s.contains(r)));
        next.push(vec![spec.table.names[missing.unwrap_or(0)].clone()]);
        change = Some(next);
    }
    if let Some(next) = change {
        scene.send(Command::Edit(Edit::SetCover(CoverChoice::ByHand(next))));
    }
}

fn fault_text(spec: &Spec, fault: &CoverFault) -> String {
    let name = |r: Row| spec.table.name(r);
    match fault {
        CoverFault::Uncovered(row) => format!("Row {} is in no set.", name(*row)),
        CoverFault::Incompatible { set, rows: (a, b) } => {
            format!("Set {}: {} and {} are not compatible.", set + 1, name(*a), name(*b))
        }
        CoverFault::Open { set, column, needs } => format!(
            "Set {} in column {} needs {} together in one set.",
            set + 1,
            spec.table.column_text(*column),
            row_names(spec, needs)
        ),
        CoverFault::LeavesBurst { set, column, needs } => format!(
            "Set {} lies inside a burst in column {}: it must hold {} itself.",
            set + 1,
            spec.table.column_text(*column),
            row_names(spec, needs)
        ),
        CoverFault::Empty(set) => format!("Set {} is empty.", set + 1),
    }
}

fn compatibles(ui: &mut Ui, scene: &mut Scene<'_>, spec: &Spec, merged: &Merged) {
    ui.label(RichText::new("Maximal compatibles").heading());
    if !merged.maximal_complete {
        ui.weak("There are more than can be listed.");
    }
    for (i, set) in merged.maximal.iter().enumerate().take(300) {
        let selected = scene.marks.holds(Pick::Compatible(i));
        if set_button(ui, selected, names(spec, set)) {
            scene.send(Command::Pick(Some(Pick::Compatible(i))));
        }
        let classes = merged.class_sets.get(i).map_or(&[][..], Vec::as_slice);
        if !classes.is_empty() {
            let text =
                classes.iter().map(|c| format!("{{{}}}", names(spec, c))).collect::<Vec<_>>().join(" ");
            ui.label(RichText::new(format!("    implies {text}")).weak());
        }
    }
}

fn reduced(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut MergingView, merged: &Merged) {
    ui.horizontal(|ui| {
        ui.label(RichText::new("Reduced table").heading());
        if let Some(Pick::Merged(row) | Pick::MergedCell(row, _)) = scene.marks.picked
            && let Some(name) = merged.reduced.as_ref().and_then(|r| r.table.names.get(row.at()))
            && ui.button(format!("Name row {name}…")).clicked()
        {
            scene.send(Command::Ask(Dialog::NameMerged { index: row.at(), name: name.clone() }));
        }
    });
    match &merged.reduced {
        None => {
            ui.weak("The cover has faults: there is no reduced table.");
        }
        Some(reduced) => {
            let place = ui.available_size();
            tables::reduced(ui, scene, reduced, &mut view.cursor, place);
        }
    }
}
