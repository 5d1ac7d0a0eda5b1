//! Selection is one for all views: what is picked in one place is marked in every other that it touches.

use eframe::egui::Key;
use stillgate::base::{Column, Row};
use stillgate::design::values::Pick;
use stillgate::window::actions::Station;

use crate::drive::{NONE, Window};

fn linked(w: &Window, what: impl Fn(&Pick) -> bool) -> bool {
    w.app().marks.linked.iter().any(what)
}

#[test]
fn a_primitive_cell_marks_its_merged_cell_its_code_its_points_and_its_moves() {
    let mut w = Window::sample("sump_pump");
    w.cell(2, 2);
    let column = Column::parse("10", 2).unwrap();
    let reduced = w.app().design.merged.as_ref().unwrap().reduced.clone().unwrap();
    let homes: Vec<Row> =
        reduced.table.rows().filter(|r| reduced.members[r.at()].contains(&Row::new(2))).collect();
    assert!(!homes.is_empty());
    let coded = w.app().design.coded.clone().unwrap();
    for home in homes {
        assert!(w.app().marks.holds(Pick::MergedCell(home, column)));
        for code in &coded.codes[home.at()] {
            assert!(w.app().marks.holds(Pick::Entry(*code, column)));
        }
    }
    assert!(linked(&w, |p| matches!(p, Pick::Point(..))));
    assert!(linked(&w, |p| matches!(p, Pick::Row(_))));
}

#[test]
fn whatever_is_picked_touches_the_table_that_the_designer_wrote() {
    let mut w = Window::sample("sump_pump");
    for (station, view) in [
        (Station::Merging, "Implication table"),
        (Station::Merging, "Merger diagram"),
        (Station::Merging, "Reduced flow table"),
        (Station::Codes, "Encoded table"),
        (Station::Proof, "Moves"),
    ] {
        w.go(station);
        w.focus(view);
        w.press(NONE, Key::ArrowRight);
        w.press(NONE, Key::ArrowDown);
        assert!(w.app().marks.picked.is_some(), "{view}: nothing picked");
        assert!(
            linked(&w, |p| matches!(p, Pick::Row(_) | Pick::Cell(..))),
            "{view}: {:?} touches no row of the table",
            w.app().marks.picked
        );
    }
    // A code that no row has still touches its entries.
    w.go(Station::Equations);
    w.focus("Karnaugh map of Y1");
    w.press(NONE, Key::ArrowRight);
    assert!(linked(&w, |p| matches!(p, Pick::Entry(..))), "{:?}", w.app().marks);
}

#[test]
fn the_why_pane_leads_back_to_the_cells_that_are_the_cause() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Merging);
    w.focus("Implication table");
    // The pair of rising and falling, which conflict in column 10.
    w.press(NONE, Key::ArrowRight);
    for _ in 0..12 {
        if w.app().marks.picked == Some(Pick::Pair(Row::new(1), Row::new(3))) {
            break;
        }
        let down = w.app().marks.picked.is_some_and(|p| match p {
            Pick::Pair(_, b) => b.at() < 3,
            _ => false,
        });
        w.press(NONE, if down { Key::ArrowDown } else { Key::ArrowRight });
    }
    assert_eq!(w.app().marks.picked, Some(Pick::Pair(Row::new(1), Row::new(3))));
    use egui_kittest::kittest::Queryable as _;
    let links: Vec<String> = w
        .harness()
        .query_all_by_role(eframe::egui::Role::Link)
        .filter_map(|n| {
            use egui_kittest::kittest::NodeT as _;
            n.accesskit_node().label().or_else(|| n.value())
        })
        .collect();
    assert!(!links.is_empty(), "{:?}", w.names());
    w.click_first(&links[0]);
    assert_eq!(w.app().station, Station::Behaviour);
    assert!(matches!(w.app().marks.picked, Some(Pick::Cell(..) | Pick::Row(_))));
}

#[test]
fn a_selection_survives_an_edit_or_is_dropped_with_its_item() {
    let mut w = Window::sample("sump_pump");
    w.cell(3, 2);
    let picked = w.app().marks.picked;
    w.enter("falling 1");
    w.cell(3, 2);
    assert_eq!(w.app().marks.picked, picked);
    // The row goes; nothing may point behind the end of the table.
    w.press(crate::drive::CTRL, Key::Delete);
    for station in Station::ALL {
        w.go(station);
    }
    assert_eq!(w.project().rows.len(), 3);
}
