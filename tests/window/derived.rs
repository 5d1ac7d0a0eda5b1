//! Gestures of the stations that show what was derived: Merging, Codes, Equations, Proof, Hand-off.

use eframe::egui::{Key, Pos2, vec2};
use stillgate::base::Row;
use stillgate::codes::values::Coded;
use stillgate::design::values::Pick;
use stillgate::drawing::codes::code_map;
use stillgate::handoff::Notation;
use stillgate::merge::values::columns_in_text_order;
use stillgate::project::CoverChoice;
use stillgate::project::choices::{Form, Method, OutputStyle, Shape};
use stillgate::window::actions::Station;

use crate::drive::{CTRL, NONE, Window, read};

#[test]
fn arrow_keys_walk_the_implication_table_and_the_pane_says_why() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Merging);
    w.focus("Implication table");
    w.press(NONE, Key::ArrowRight);
    assert_eq!(w.app().marks.picked, Some(Pick::Pair(Row::new(0), Row::new(1))));
    w.press(NONE, Key::ArrowDown);
    assert_eq!(w.app().marks.picked, Some(Pick::Pair(Row::new(0), Row::new(2))));
    w.press(NONE, Key::ArrowRight);
    assert_eq!(w.app().marks.picked, Some(Pick::Pair(Row::new(1), Row::new(2))));
    // rising and falling differ in column 10.
    w.press(NONE, Key::ArrowDown);
    assert_eq!(w.app().marks.picked, Some(Pick::Pair(Row::new(1), Row::new(3))));
    assert!(w.sees_with("10"), "{:?}", w.names());
    // The pair is marked in the merger diagram, and its rows in the table.
    assert!(w.app().marks.holds(Pick::Row(Row::new(1))) && w.app().marks.holds(Pick::Row(Row::new(3))));
    w.focus("Merger diagram");
    w.press(NONE, Key::ArrowLeft);
    assert!(w.app().marks.picked.is_some());
}

#[test]
fn the_passes_can_be_stepped_through() {
    // The table with the most passes of all samples.
    let mut best = None;
    for file in crate::drive::samples() {
        let w = Window::file(&file);
        let passes = w.app().design.merged.as_ref().map_or(0, |m| m.pairs.passes);
        if best.as_ref().is_none_or(|(most, _)| passes > *most) {
            best = Some((passes, file));
        }
    }
    let (passes, file) = best.unwrap();
    assert!(passes >= 2, "no sample has two passes");
    let mut w = Window::file(&file);
    w.go(Station::Merging);
    assert!(w.sees(&format!("{passes} of {passes}")));
    for now in (0..passes).rev() {
        w.click("◀");
        assert!(w.sees(&format!("{now} of {passes}")));
    }
    w.click("▶");
    assert!(w.sees(&format!("1 of {passes}")));
}

#[test]
fn a_cover_is_taken_over_by_hand_changed_and_given_back() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Merging);
    assert!(w.sees("✓ smallest, proved"));
    w.click("Take over by hand");
    let CoverChoice::ByHand(sets) = w.project().choices.merging.cover.clone() else {
        panic!("not by hand");
    };
    assert_eq!(sets.len(), w.app().design.merged.as_ref().unwrap().cover.len());
    // A row is taken out of the first set: it is in no set, and the verdict says so at once.
    let name = sets[0][0].clone();
    w.click("Set 1");
    w.harness().run_steps(3);
    w.harness().step();
    let checkbox = |w: &mut Window, name: &str| {
        use egui_kittest::kittest::Queryable as _;
        w.harness().get_by_role_and_label(eframe::egui::Role::CheckBox, name).click();
        w.frame();
        w.settle();
    };
    checkbox(&mut w, &name);
    assert!(w.sees("! not a closed cover"));
    assert!(w.sees(&format!("Row {name} is in no set.")));
    assert!(w.app().figures()[1].text.contains("fault"));
    assert!(w.app().figures()[2].text.contains("waits"));
    w.press(NONE, Key::Escape);
    // A further set takes the missing row.
    w.click("Add a set");
    assert!(w.sees_with("closed cover") || w.sees_with("at least"));
    assert!(w.app().design.merged.as_ref().unwrap().faults.is_empty());
    w.click("Find the smallest");
    assert_eq!(w.project().choices.merging.cover, CoverChoice::Smallest);
    assert!(w.sees("✓ smallest, proved"));
    // Outputs per row: another reduced table, with its own undo.
    w.click("per row");
    assert_eq!(w.project().choices.merging.outputs, OutputStyle::PerRow);
    w.press(CTRL, Key::Z);
    assert_eq!(w.project().choices.merging.outputs, OutputStyle::PerCell);
}

#[test]
fn a_set_and_a_merged_row_are_selected_and_named() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Merging);
    w.focus("Reduced flow table");
    w.press(NONE, Key::ArrowDown);
    let Some(Pick::MergedCell(row, _)) = w.app().marks.picked else {
        panic!("{:?}", w.app().marks.picked);
    };
    let old = w.app().design.merged.as_ref().unwrap().reduced.as_ref().unwrap().table.names[row.at()].clone();
    w.click(&format!("Name row {old}…"));
    w.tab_to("Name");
    w.retype("pumping");
    w.press(NONE, Key::Enter);
    let names = &w.app().design.merged.as_ref().unwrap().reduced.as_ref().unwrap().table.names;
    assert!(names.contains(&"pumping".to_owned()), "{names:?}");
}

#[test]
fn a_method_is_chosen_and_all_are_compared() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Codes);
    for (label, method) in [
        ("Shared row", Method::SharedRow),
        ("Single step", Method::SingleStep),
        ("One hot", Method::OneHot),
        ("Multiple row", Method::MultipleRow),
        ("Adjacency", Method::Adjacency),
    ] {
        w.click(label);
        assert_eq!(w.project().choices.codes.method, method);
        assert!(w.app().design.coded.is_some(), "{label}");
    }
    // The comparison is computed aside and then stands beside each method.
    for _ in 0..60_000 {
        if w.names().iter().filter(|n| n.starts_with("✓ proved") || n.starts_with("! ")).count() >= 5 {
            return;
        }
        std::thread::sleep(std::time::Duration::from_millis(5));
        w.frame();
    }
    panic!("the methods are not compared: {:?}", w.names());
}

/// Where the middle of a code's cell is on the screen. The picture is fitted into its place, at the top and centred.
fn spot(w: &Window, coded: &Coded, code: u32) -> Pos2 {
    let design = &w.app().design;
    let reduced = design.merged.as_ref().unwrap().reduced.as_ref().unwrap();
    let races = design.races.as_ref().unwrap();
    let column = columns_in_text_order(reduced.table.inputs).next().unwrap();
    let picture = code_map(reduced, coded, races, column);
    let place = w.place(&w.names().into_iter().find(|n| n.starts_with("Codes in column ")).unwrap());
    let zoom = (place.width() / picture.size.0).min(place.height() / picture.size.1).clamp(0.1, 1.25);
    let left = place.left() + ((place.width() - picture.size.0 * zoom) / 2.0).max(0.0);
    let hit = picture.hits.iter().find(|h| h.2 == Pick::Code(stillgate::base::Code(code))).unwrap();
    Pos2::new(left, place.top()) + vec2(hit.0.x + hit.1.x, hit.0.y + hit.1.y) * (zoom / 2.0)
}

#[test]
fn a_row_dragged_to_another_code_shows_its_races_with_the_losing_order() {
    // The first sample with two bits where some swap of two codes makes a critical race.
    let mut seen_a_race = false;
    for file in crate::drive::samples() {
        if seen_a_race {
            break;
        }
        let mut w = Window::file(&file);
        let Some(coded) = w.app().design.coded.clone() else { continue };
        if coded.bits != 2 {
            continue;
        }
        w.go(Station::Codes);
        for to in 1..4 {
            let before = w.project().clone();
            w.drag(spot(&w, &coded, 0), spot(&w, &coded, to));
            let Method::ByHand(codes) = &w.project().choices.codes.method else {
                panic!("{}: nothing was dragged", file.display());
            };
            let target = stillgate::base::Code(to).text(2);
            assert!(codes.values().any(|c| c.contains(&target)));
            let races = w.app().design.races.clone().unwrap();
            if !races.critical.is_empty() {
                seen_a_race = true;
                assert!(w.app().figures()[2].text.contains("critical race"));
                assert!(w.names().iter().any(|n| n.starts_with("! ") && n.contains(" in column ")));
                assert!(!w.app().design.proved());
            }
            w.press(CTRL, Key::Z);
            assert_eq!(*w.project(), before);
        }
    }
    assert!(seen_a_race, "no swap of codes makes a race");
}

#[test]
fn a_row_is_moved_to_another_code_by_keyboard() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Codes);
    w.focus("Encoded table");
    w.press(NONE, Key::ArrowRight);
    let coded = w.app().design.coded.clone().unwrap();
    w.click_with(" to code…");
    w.harness().run_steps(3);
    w.click_with("swaps with");
    assert!(matches!(w.project().choices.codes.method, Method::ByHand(_)));
    assert_ne!(w.app().design.coded.as_ref().unwrap().codes, coded.codes);
    assert!(w.app().design.proved(), "two rows on one bit may swap");
}

#[test]
fn the_column_of_the_code_map_is_chosen() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Codes);
    assert!(w.sees("Codes in column 00"));
    w.focus("Encoded table");
    w.repeat(3, NONE, Key::ArrowRight);
    assert!(w.sees("Codes in column 11"));
}

#[test]
fn form_shape_and_notation_change_the_equations() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Equations);
    let names = |w: &Window| -> Vec<String> {
        w.app().design.equations.as_ref().unwrap().functions.iter().map(|f| f.name.clone()).collect()
    };
    assert!(names(&w).contains(&"Y1".to_owned()), "{:?}", names(&w));
    w.click("set/reset latch");
    assert_eq!(w.project().choices.logic.form, Form::SetReset);
    assert!(names(&w).contains(&"S1".to_owned()));
    w.click("C-element");
    assert_eq!(w.project().choices.logic.form, Form::CElement);
    w.click("feedback");
    w.click("product of sums");
    assert_eq!(w.project().choices.logic.shape, Shape::ProductOfSums);
    assert!(w.app().figures()[3].text.contains("sum"));
    w.click("sum of products");
    w.click("share terms");
    assert!(w.project().choices.logic.share);
    assert!(w.app().design.proved());
    // The notation is of the program, not of the project.
    let dirty = w.app().history.undo_names().count();
    for (words, notation, sign) in [
        ("IEEE 1364", Notation::Ieee1364, "&"),
        ("IEEE 1076", Notation::Ieee1076, " and "),
        ("textbook", Notation::Textbook, "·"),
    ] {
        w.focus("Notation");
        w.press(NONE, Key::Space);
        w.harness().run_steps(2);
        let last = {
            use egui_kittest::kittest::Queryable as _;
            let all: Vec<_> = w.harness().query_all_by_label(words).collect();
            all.last().unwrap().click();
            all.len()
        };
        assert!(last >= 1);
        w.frame();
        w.settle();
        assert_eq!(w.app().prefs.notation, notation);
        let one = w.copy("Copy all");
        assert!(one.contains(sign), "{words}: {one}");
    }
    assert_eq!(w.app().history.undo_names().count(), dirty);
}

#[test]
fn a_product_is_selected_and_explained() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Equations);
    let equations = w.app().design.equations.clone().unwrap();
    let (f, p) = equations
        .functions
        .iter()
        .enumerate()
        .find_map(|(f, x)| x.products.iter().position(|p| p.cube.literals() > 1).map(|p| (f, p)))
        .unwrap();
    let text =
        stillgate::handoff::term(Notation::Textbook, &equations, equations.functions[f].products[p].cube);
    w.click_first(&text);
    assert!(matches!(w.app().marks.picked, Some(Pick::Product(..))), "{:?}", w.app().marks.picked);
    assert!(w.app().marks.linked.iter().any(|p| matches!(p, Pick::Move(_))), "{:?}", w.app().marks.linked);
    assert!(w.app().marks.linked.iter().any(|p| matches!(p, Pick::MergedCell(..))));
    // A point of the map by arrow keys.
    let map = format!("Karnaugh map of {}", equations.functions[f].name);
    w.focus(&map);
    w.press(NONE, Key::ArrowRight);
    w.press(NONE, Key::ArrowRight);
    assert!(matches!(w.app().marks.picked, Some(Pick::Point(..))), "{:?}", w.app().marks.picked);
}

#[test]
fn the_proof_lists_its_moves_and_power_up() {
    let mut w = Window::sample("sump_pump");
    w.go(Station::Proof);
    assert!(w.sees("Proved") && w.sees("Power-up"));
    w.focus("Moves");
    w.press(NONE, Key::ArrowDown);
    assert_eq!(w.app().marks.picked, Some(Pick::Move(1)));
    assert!(w.app().marks.linked.iter().any(|p| matches!(p, Pick::Cell(..))));
}

#[test]
fn every_preview_of_the_hand_off_is_copied_and_saved() {
    let folder = tempfile::tempdir().unwrap();
    let mut w = Window::sample("sump_pump");
    w.go(Station::HandOff);
    assert!(w.sees_with("Proved; ready to hand off"));
    for (kind, file, part) in [
        ("Design as text", "design.txt", "Sump pump"),
        ("Equations", "equations.txt", "pump ="),
        ("Record (JSON)", "record.json", "\"schema\""),
    ] {
        w.click_last(kind);
        let copied = w.copy("Copy");
        assert!(copied.contains(part), "{kind}: {copied}");
        let path = folder.path().join(file);
        w.click("Save…");
        w.tab_to("Path");
        w.retype(&path.display().to_string());
        w.press(NONE, Key::Enter);
        assert_eq!(std::fs::read_to_string(&path).unwrap(), copied, "{kind}");
    }
}

#[test]
fn pictures_are_saved_as_svg() {
    let folder = tempfile::tempdir().unwrap();
    let mut w = Window::sample("sump_pump");
    let save = |w: &mut Window, name: &str| {
        let path = folder.path().join(name);
        w.tab_to("Path");
        w.retype(&path.display().to_string());
        w.press(NONE, Key::Enter);
        let text = std::fs::read_to_string(&path).unwrap();
        assert!(text.contains("<svg") && text.contains("</svg>"), "{text}");
    };
    w.go(Station::Merging);
    for line in ["Implication table…", "Merger diagram…"] {
        w.click("Save picture");
        w.harness().run_steps(3);
        w.click(line);
        save(&mut w, line.trim_end_matches('…'));
    }
    for (station, name) in [(Station::Codes, "codes.svg"), (Station::Equations, "map.svg")] {
        w.go(station);
        w.click("Save picture…");
        save(&mut w, name);
    }
}

#[test]
fn a_design_that_is_not_proved_says_so_at_every_station() {
    let mut w = Window::sample("sump_pump");
    w.cell(0, 2);
    // A next row that is not there.
    w.enter("nowhere -");
    assert!(!w.app().design.proved());
    for station in Station::ALL {
        w.go(station);
        assert!(w.names().len() > 15, "{}", station.name());
    }
    assert!(w.sees_with("This design is not proved"));
    w.press(CTRL, Key::Z);
    assert!(w.app().design.proved());
}

#[test]
fn the_open_station_comes_back_with_the_file() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("pump.ron");
    std::fs::copy(crate::drive::projects().join("sump_pump.ron"), &path).unwrap();
    let mut w = Window::file(&path);
    w.cell(0, 0);
    w.enter("dry 0");
    w.enter("dry 0");
    w.go(Station::Equations);
    w.press(CTRL, Key::S);
    assert_eq!(read(&path).layout.station, "Equations");
    assert_eq!(Window::file(&path).app().station, Station::Equations);
}
