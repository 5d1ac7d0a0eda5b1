//! What is on the screen must be readable: no text on another, none over the window's edge, nothing blank.

use std::path::Path;

use eframe::egui::{Key, Rect, Shape, ThemePreference};
use stillgate::window::actions::Station;
use stillgate::window::app::Start;

use crate::drive::{CTRL, NONE, Window, projects, samples};

/// A text on the screen: what it says, where its ink is, and what is seen of that.
struct Seen {
    text: String,
    ink: Rect,
    seen: Rect,
}

fn texts(window: &mut Window) -> Vec<Seen> {
    fn walk(shape: &Shape, clip: Rect, out: &mut Vec<Seen>) {
        match shape {
            Shape::Vec(shapes) => shapes.iter().for_each(|s| walk(s, clip, out)),
            Shape::Text(t) => {
                // Line by line: the first line of a wrapped text may begin behind another text.
                for row in &t.galley.rows {
                    let ink = row.visuals.mesh_bounds.translate(t.pos.to_vec2() + row.pos.to_vec2());
                    let seen = ink.intersect(clip);
                    if seen.is_positive() {
                        out.push(Seen { text: row.text(), ink, seen });
                    }
                }
            }
            _ => {}
        }
    }
    let mut out = Vec::new();
    for clipped in &window.harness().output().shapes {
        walk(&clipped.shape, clipped.clip_rect, &mut out);
    }
    out
}

/// Pairs of texts whose ink lies on each other.
fn collisions(texts: &[Seen]) -> Vec<String> {
    let mut order: Vec<&Seen> = texts.iter().collect();
    order.sort_by(|a, b| a.seen.top().total_cmp(&b.seen.top()));
    let mut found = Vec::new();
    for (i, a) in order.iter().enumerate() {
        for b in order[i + 1..].iter().take_while(|b| b.seen.top() < a.seen.bottom()) {
            let common = a.seen.intersect(b.seen);
            if common.width() > 1.5 && common.height() > 1.5 {
                found.push(format!("{:?} on {:?} at {:?}", a.text, b.text, common.min));
            }
        }
    }
    found
}

fn open(file: &Path, size: (f32, f32)) -> Window {
    Window::sized(Start { file: Some(file.to_path_buf()), data: None }, size.0, size.1)
}

#[test]
fn no_text_lies_on_another_or_leaves_the_window() {
    let mut faults = Vec::new();
    for file in samples() {
        for size in [(1280.0, 720.0), (1920.0, 1080.0)] {
            let mut w = open(&file, size);
            for station in Station::ALL {
                w.go(station);
                let name = file.file_stem().unwrap().to_string_lossy().into_owned();
                let place = format!("{name}, {}, {} wide", station.name(), size.0);
                let texts = texts(&mut w);
                assert!(texts.len() > 20, "{place}: only {} texts", texts.len());
                let screen = Rect::from_min_size(Default::default(), size.into());
                for t in texts.iter().filter(|t| !screen.expand(0.5).contains_rect(t.seen)) {
                    faults.push(format!("{place}: {:?} leaves the window at {:?}", t.text, t.ink));
                }
                faults.extend(collisions(&texts).into_iter().map(|c| format!("{place}: {c}")));
            }
        }
    }
    assert!(faults.is_empty(), "{} faults:\n{}", faults.len(), faults.join("\n"));
}

/// Brightness of a colour as WCAG 2 defines it.
fn luminance(c: [u8; 4]) -> f64 {
    let linear = |v: u8| {
        let v = f64::from(v) / 255.0;
        if v <= 0.04045 { v / 12.92 } else { ((v + 0.055) / 1.055).powf(2.4) }
    };
    0.2126 * linear(c[0]) + 0.7152 * linear(c[1]) + 0.0722 * linear(c[2])
}

#[test]
fn both_themes_paint_every_station_with_strong_contrast() {
    for theme in [ThemePreference::Light, ThemePreference::Dark] {
        let mut w = open(&projects().join("sump_pump.ron"), (1280.0, 720.0));
        for _ in 0..2 {
            if w.app().prefs.theme != theme {
                w.press(NONE, Key::F10);
            }
        }
        assert_eq!(w.app().prefs.theme, theme);
        for station in Station::ALL {
            w.go(station);
            let picture = w.picture();
            if let Some(folder) = std::env::var_os("STILLGATE_PICTURES") {
                let name = format!("{}-{theme:?}.png", station.name().to_lowercase());
                picture.save(Path::new(&folder).join(name)).unwrap();
            }
            let mut counts = std::collections::HashMap::new();
            for p in picture.pixels() {
                *counts.entry(p.0).or_insert(0_usize) += 1;
            }
            assert!(counts.len() > 60, "{theme:?} {}: {} colours", station.name(), counts.len());
            let common = counts.iter().max_by_key(|c| c.1).unwrap();
            let (light, dark) = counts
                .keys()
                .fold((0.0_f64, 1.0_f64), |(high, low), c| (high.max(luminance(*c)), low.min(luminance(*c))));
            assert!((light + 0.05) / (dark + 0.05) > 12.0, "{theme:?} {}", station.name());
            let is_light = luminance(*common.0) > 0.5;
            assert_eq!(is_light, theme == ThemePreference::Light, "{theme:?} {}", station.name());
        }
    }
}

#[test]
fn larger_text_still_fits() {
    let mut w = open(&projects().join("sump_pump.ron"), (1280.0, 720.0));
    w.repeat(3, CTRL, Key::Plus);
    assert!((w.app().prefs.zoom - 1.3).abs() < 1e-6);
    let mut faults = Vec::new();
    for station in Station::ALL {
        w.go(station);
        let found = collisions(&texts(&mut w));
        faults.extend(found.into_iter().map(|c| format!("{}: {c}", station.name())));
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
    w.repeat(3, CTRL, Key::Minus);
    assert!((w.app().prefs.zoom - 1.0).abs() < 1e-6);
}
