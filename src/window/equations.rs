//! The Equations station: functions in the chosen notation, the map or the cube table of the selected one, hazards.

use std::sync::Arc;

use eframe::egui::{self, RichText, Ui, vec2};

use crate::base::Row;
use crate::design::values::Pick;
use crate::drawing::karnaugh::karnaugh_map;
use crate::drawing::{Ink, elide, svg};
use crate::explain::figures::counted;
use crate::handoff::{Notation, equations_text, right_side};
use crate::logic::values::{Equations, EssentialHazard};
use crate::merge::values::Reduced;
use crate::project::Edit;
use crate::project::choices::{Form, Shape};
use crate::window::app::{Command, Scene};
use crate::window::dialogs::Purpose;
use crate::window::grid::{Cursor, Face, Grid};
use crate::window::paint::{View, picture};
use crate::window::theme::{palette, pane};

/// State of the station.
#[derive(Default)]
pub struct EquationsView {
    function: usize,
    view: View,
    cursor: Cursor,
}

/// Shows the station.
pub fn show(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut EquationsView) {
    choices(ui, scene);
    ui.separator();
    let design = Arc::clone(scene.design);
    let reduced = design.merged.as_ref().and_then(|m| m.reduced.as_ref());
    let (Some(equations), Some(reduced)) = (&design.equations, reduced) else {
        ui.weak("There are no codes yet: see the stations before.");
        return;
    };
    if let Some(Pick::Function(f) | Pick::Product(f, _) | Pick::Point(f, _)) = scene.marks.picked {
        view.function = f;
    }
    view.function = view.function.min(equations.functions.len().saturating_sub(1));
    let room = ui.available_height();
    let below = egui::Panel::bottom("hazards").frame(pane(0, 0, 6, 0)).resizable(true);
    below.default_size((room * 0.24).clamp(60.0, 200.0)).show(ui, |ui| {
        egui::ScrollArea::vertical().id_salt("hazards").auto_shrink(false).show(ui, |ui| {
            hazards(ui, scene, reduced, equations);
        });
    });
    let wide = ui.available_width();
    let left = egui::Panel::left("functions").frame(pane(0, 8, 0, 0)).resizable(true);
    left.default_size(wide * 0.5).size_range(200.0..=wide * 0.8).show(ui, |ui| {
        egui::ScrollArea::vertical().id_salt("functions").auto_shrink(false).show(ui, |ui| {
            functions(ui, scene, view, equations);
        });
    });
    if !equations.functions.is_empty() {
        let rest = egui::CentralPanel::default().frame(pane(10, 0, 0, 0));
        rest.show(ui, |ui| selected(ui, scene, view, equations));
    }
}

/// The map of the selected function, or its terms where there are too many variables for a map.
fn selected(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut EquationsView, equations: &Equations) {
    let chosen = match scene.marks.picked {
        Some(Pick::Product(f, p)) if f == view.function => Some(p),
        _ => None,
    };
    match karnaugh_map(equations, view.function, chosen) {
        Some(map) => {
            ui.horizontal(|ui| {
                ui.label(RichText::new(&map.title).heading());
                if ui.button("Save picture…").clicked() {
                    scene.send(Command::Write(Purpose::Picture, svg::svg(&map)));
                }
            });
            let size = (ui.available_size() - vec2(0.0, 4.0)).max(vec2(60.0, 60.0));
            if let Some(pick) = picture(ui, &map, &mut view.view, scene.marks, size) {
                scene.send(Command::Pick(Some(pick)));
            }
        }
        None => cube_table(ui, scene, view, equations),
    }
}

fn choices(ui: &mut Ui, scene: &mut Scene<'_>) {
    let logic = scene.project.choices.logic.clone();
    ui.horizontal_wrapped(|ui| {
        ui.label("Form");
        let forms = [
            (Form::Feedback, "feedback"),
            (Form::SetReset, "set/reset latch"),
            (Form::CElement, "C-element"),
        ];
        for (form, words) in forms {
            if ui.radio(logic.form == form, words).clicked() && logic.form != form {
                scene.send(Command::Edit(Edit::SetForm(form)));
            }
        }
        ui.separator();
        ui.label("Shape");
        for (shape, words) in
            [(Shape::SumOfProducts, "sum of products"), (Shape::ProductOfSums, "product of sums")]
        {
            if ui.radio(logic.shape == shape, words).clicked() && logic.shape != shape {
                scene.send(Command::Edit(Edit::SetShape(shape)));
            }
        }
        ui.separator();
        let mut share = logic.share;
        if ui.checkbox(&mut share, "share terms").changed() {
            scene.send(Command::Edit(Edit::SetShare(share)));
        }
        let outputs = scene.project.outputs.clone();
        ui.menu_button(format!("Late outputs ({})", logic.late.len()), |ui| {
            for name in &outputs {
                let mut late = logic.late.contains(name);
                if ui.checkbox(&mut late, name).changed() {
                    let list =
                        outputs.iter().filter(|o| if *o == name { late } else { logic.late.contains(o) });
                    scene.send(Command::Edit(Edit::SetLate(list.cloned().collect())));
                }
            }
        });
        ui.separator();
        let mut notation = scene.notation;
        let list = egui::ComboBox::from_id_salt("notation").selected_text(notation_words(notation));
        let shown = list.show_ui(ui, |ui| {
            for n in Notation::ALL {
                ui.selectable_value(&mut notation, n, notation_words(n));
            }
        });
        shown.response.on_hover_text("Notation").accessible_name("Notation");
        if notation != scene.notation {
            scene.send(Command::Notation(notation));
        }
    });
}

fn notation_words(notation: Notation) -> &'static str {
    match notation {
        Notation::Textbook => "textbook",
        Notation::Ieee1364 => "IEEE 1364",
        Notation::Ieee1076 => "IEEE 1076",
    }
}

fn functions(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut EquationsView, equations: &Equations) {
    let p = palette(ui.visuals());
    ui.horizontal(|ui| {
        ui.label(RichText::new("Functions").heading());
        if ui.button("Copy all").clicked() {
            scene.send(Command::Copy(equations_text(equations, scene.notation)));
        }
    });
    for clash in &equations.clashes {
        ui.label(RichText::new(format!("! {}: {}", clash.function, clash.text)).color(p.bad));
        for t in &clash.transitions {
            ui.label(RichText::new(format!("    {t}")).weak());
        }
    }
    for (f, function) in equations.functions.iter().enumerate() {
        ui.push_id(f, |ui| {
            ui.horizontal_wrapped(|ui| {
                let name = RichText::new(&function.name).strong();
                if ui.selectable_label(view.function == f, name).clicked() {
                    scene.send(Command::Pick(Some(Pick::Function(f))));
                }
                let right = right_side(scene.notation, equations, function);
                if ui.small_button("Copy").clicked() {
                    scene.send(Command::Copy(format!("{} = {right}", function.name)));
                }
                let proved = if function.bound.proved() { "fewest, proved" } else { "not proved fewest" };
                ui.weak(format!(
                    "{}, {}, {proved}",
                    counted(function.products.len(), "term"),
                    counted(function.literals(), "literal")
                ));
            });
            ui.indent("terms", |ui| {
                if function.products.is_empty() {
                    ui.label(RichText::new(right_side(scene.notation, equations, function)).monospace());
                }
                for (i, product) in function.products.iter().enumerate() {
                    let one = crate::handoff::term(scene.notation, equations, product.cube);
                    let pick = Pick::Product(f, i);
                    let mut text = RichText::new(one).monospace();
                    let words = if product.hazard_only { "  only against hazards" } else { "" };
                    if product.hazard_only {
                        text = text.color(p.warn);
                    }
                    ui.horizontal(|ui| {
                        if ui.selectable_label(scene.marks.holds(pick), text).clicked() {
                            scene.send(Command::Pick(Some(pick)));
                        }
                        ui.label(RichText::new(words).small().color(p.warn));
                    });
                }
            });
        });
    }
    for note in &equations.notes {
        ui.label(RichText::new(note).weak());
    }
}

/// The terms of a function with many variables: a line for each, a column for each variable.
fn cube_table(ui: &mut Ui, scene: &mut Scene<'_>, view: &mut EquationsView, equations: &Equations) {
    let f = view.function;
    let function = &equations.functions[f];
    ui.label(RichText::new(format!("Terms of {}", function.name)).heading());
    ui.weak("1 true, 0 complemented, empty: not in the term.");
    let longest = equations.variables.iter().map(|v| v.chars().count().min(10)).max().unwrap_or(1);
    let heads: Vec<String> = equations.variables.iter().map(|v| elide(v, 10)).collect();
    let n = equations.variables.len();
    let texts: Vec<Vec<char>> = function.products.iter().map(|p| p.cube.text(n).chars().collect()).collect();
    let marks = scene.marks;
    let face = |r: usize, c: usize| {
        let sign = texts[r].get(c).copied().filter(|s| *s != '-');
        let hazard = function.products[r].hazard_only && c == 0;
        Face {
            text: sign.map(String::from).unwrap_or_default(),
            dim: sign.is_none(),
            mono: true,
            mark: hazard.then_some((Ink::Warn, "!")),
            linked: marks.holds(Pick::Product(f, r)),
            ..Face::default()
        }
    };
    let number = |r: usize| (r + 1).to_string();
    let grid = Grid {
        name: "Terms",
        corner: "",
        columns: &heads,
        rows: &number,
        len: function.products.len(),
        face: &face,
        size: (longest as f32 * 7.4 + 16.0, 40.0, 22.0),
    };
    let place = ui.available_size();
    let happened = grid.show(ui, "terms", &mut view.cursor, place);
    let row = happened.label.or(happened.moved.then_some(view.cursor.at.0));
    if let Some(row) = row.filter(|&r| r < function.products.len()) {
        scene.send(Command::Pick(Some(Pick::Product(f, row))));
    }
}

fn hazards(ui: &mut Ui, scene: &mut Scene<'_>, reduced: &Reduced, equations: &Equations) {
    ui.label(RichText::new("Essential hazards").heading());
    let lists = [
        ("", &equations.essential),
        ("burst: ", &equations.burst_essential),
        ("finished functions: ", &equations.implementation),
    ];
    if lists.iter().all(|(_, l)| l.is_empty()) {
        ui.label("None: no input change can race its own feedback.");
        return;
    }
    ui.weak("Here the feedback of the bits that change must be slower than the direct logic.");
    for (kind, list) in lists {
        for hazard in list {
            let text = hazard_text(reduced, hazard);
            if ui.link(format!("{kind}{text}")).clicked() {
                scene.send(Command::Pick(Some(Pick::MergedCell(hazard.row, hazard.to))));
            }
        }
    }
}

/// `A, 00 -> 10`, with the column that the far end may still see if it is not the start.
pub fn hazard_text(reduced: &Reduced, hazard: &EssentialHazard) -> String {
    let table = &reduced.table;
    let name = |r: Row| table.names.get(r.at()).map_or("?", String::as_str);
    let seen = if hazard.seen == hazard.column {
        String::new()
    } else {
        format!(", seen as {}", table.column_text(hazard.seen))
    };
    format!(
        "{}, {} → {}{seen}",
        name(hazard.row),
        table.column_text(hazard.column),
        table.column_text(hazard.to)
    )
}
