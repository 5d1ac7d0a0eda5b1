//! What a frame of the window costs without a display (layout and tessellation), and how long it takes from a key to
//! all six figures.
//!
//!     cargo bench --bench frame             medians of many frames, against the goals
//!     cargo bench --bench frame -- --quick  a few frames of each, without a judgement on time
//!
//! Painting the triangles is the graphics driver's work and is not measured here.

use std::fmt::Write as _;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, Instant};

use eframe::App as _;
use eframe::egui::{self, Event, Key, Modifiers, MouseWheelUnit, Pos2, RawInput, Rect, vec2};
use stillgate::project::{CellEntry, Project, RowEntry, read, write};
use stillgate::window::actions::Station;
use stillgate::window::app::{App, Start};

const SIZE: egui::Vec2 = vec2(1280.0, 720.0);

fn main() {
    let quick = std::env::args().any(|a| a == "--quick");
    let frames = if quick { 5 } else { 300 };
    let folder = tempfile::tempdir().expect("a temporary folder");
    let mut missed = false;
    let mut report = |name: &str, goal_ms: f64, mut times: Vec<Duration>| {
        times.sort();
        let ms = |d: Duration| d.as_secs_f64() * 1e3;
        let (median, high) = (ms(times[times.len() / 2]), ms(times[times.len() * 95 / 100]));
        let met = median < goal_ms;
        missed |= !met;
        let word = if met { "met" } else { "MISSED" };
        println!("{name:<44} {median:7.2} ms   95 %: {high:7.2} ms   goal {goal_ms} ms {word}");
    };

    let large = folder.path().join("large.ron");
    std::fs::write(&large, write(&table(60, 4))).expect("the table is written");
    let mut screen = Screen::open(&large);
    for station in Station::ALL {
        screen.go(station);
        report(&format!("60 rows, 16 columns: {}", station.name()), 4.0, screen.frames(frames, still));
    }
    screen.go(Station::Behaviour);
    report("60 rows, 16 columns: scrolling", 4.0, screen.frames(frames, scroll));
    drop(screen);

    let huge = folder.path().join("huge.ron");
    std::fs::write(&huge, write(&table(500, 4))).expect("the table is written");
    let mut screen = Screen::open(&huge);
    screen.go(Station::Behaviour);
    report("500 rows: Behaviour", 8.0, screen.frames(frames, still));
    report("500 rows: scrolling", 8.0, screen.frames(frames, scroll));
    screen.go(Station::Merging);
    report("500 rows: Merging", 8.0, screen.frames(frames, still));
    drop(screen);

    let mut samples: Vec<PathBuf> = std::fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("projects"))
        .expect("the samples")
        .map(|entry| entry.expect("a sample").path())
        .collect();
    samples.retain(|f| f.extension().is_some_and(|e| e == "ron"));
    samples.sort();
    for sample in &samples {
        let mut screen = Screen::open(sample);
        screen.go(Station::Behaviour);
        let name = sample.file_stem().map(|s| s.to_string_lossy().into_owned()).unwrap_or_default();
        report(&format!("key to six figures: {name}"), 16.0, screen.keystrokes(if quick { 2 } else { 40 }));
    }
    if missed && !quick {
        std::process::exit(1);
    }
}

fn still(_: usize) -> Vec<Event> {
    Vec::new()
}

/// A turn of the wheel over the middle of the window, down for a while and then up.
fn scroll(frame: usize) -> Vec<Event> {
    let way = if frame / 40 % 2 == 0 { -3.0 } else { 3.0 };
    vec![
        Event::PointerMoved(Pos2::new(400.0, 300.0)),
        Event::MouseWheel {
            unit: MouseWheelUnit::Line,
            delta: vec2(0.0, way),
            phase: egui::TouchPhase::Move,
            source: egui::MouseWheelSource::Wheel,
            modifiers: Modifiers::NONE,
        },
    ]
}

struct Screen {
    ctx: egui::Context,
    app: App,
    frame: eframe::Frame,
    time: f64,
    /// Set when somebody asks for a frame.
    woken: Arc<AtomicBool>,
}

impl Screen {
    fn open(file: &Path) -> Screen {
        let ctx = egui::Context::default();
        let woken = Arc::new(AtomicBool::new(false));
        let bell = Arc::clone(&woken);
        ctx.set_request_repaint_callback(move |_| bell.store(true, Ordering::SeqCst));
        let cc = eframe::CreationContext::_new_kittest(ctx.clone());
        let app = App::new(&cc, Start { file: Some(file.to_path_buf()), data: None }).expect("a window");
        let mut screen = Screen { ctx, app, frame: eframe::Frame::_new_kittest(), time: 0.0, woken };
        screen.settle();
        screen
    }

    fn settle(&mut self) {
        self.once(Vec::new());
        while self.app.working() {
            std::thread::sleep(Duration::from_millis(1));
            self.once(Vec::new());
        }
        (0..3).for_each(|_| self.once(Vec::new()));
    }

    /// One frame: what the program does, and the triangles of it.
    fn once(&mut self, events: Vec<Event>) {
        self.time += 1.0 / 60.0;
        let input = RawInput {
            screen_rect: Some(Rect::from_min_size(Pos2::ZERO, SIZE)),
            time: Some(self.time),
            events,
            ..RawInput::default()
        };
        let (app, frame) = (&mut self.app, &mut self.frame);
        let mut output = self.ctx.run_ui(input, |ui| {
            app.logic(ui, frame);
            app.ui(ui, frame);
        });
        let shapes = std::mem::take(&mut output.shapes);
        let meshes = self.ctx.tessellate(shapes, 1.0);
        std::hint::black_box(&meshes);
        output.drop_without_applying_deltas();
    }

    fn frames(&mut self, n: usize, events: fn(usize) -> Vec<Event>) -> Vec<Duration> {
        // The first frames of a station lay out text that is then kept.
        (0..5).for_each(|i| self.once(events(i)));
        (0..n)
            .map(|i| {
                let events = events(i);
                let start = Instant::now();
                self.once(events);
                start.elapsed()
            })
            .collect()
    }

    fn go(&mut self, station: Station) {
        self.app.station = station;
        self.settle();
    }

    /// From the key that ends the typing of a cell to the frame that shows the new figures.
    fn keystrokes(&mut self, n: usize) -> Vec<Duration> {
        let key =
            |key, modifiers| Event::Key { key, physical_key: None, pressed: true, repeat: false, modifiers };
        // The middle of the first cell gets the keyboard.
        let at = Pos2::new(400.0, 210.0);
        let button = |pressed| Event::PointerButton {
            pos: at,
            button: egui::PointerButton::Primary,
            pressed,
            modifiers: Modifiers::NONE,
        };
        for event in [Event::PointerMoved(at), button(true), button(false)] {
            self.once(vec![event]);
        }
        let before = self.app.history.project().clone();
        let mut times = Vec::new();
        for _ in 0..n {
            for delete in [true, false] {
                let event =
                    if delete { key(Key::Delete, Modifiers::NONE) } else { key(Key::Z, Modifiers::COMMAND) };
                let start = Instant::now();
                self.once(vec![event]);
                // As the window system does: a new frame as soon as the worker asks for one.
                while self.app.working() {
                    while !self.woken.swap(false, Ordering::SeqCst) {
                        std::thread::sleep(Duration::from_micros(20));
                    }
                    self.once(Vec::new());
                }
                times.push(start.elapsed());
                let changed = *self.app.history.project() != before;
                assert_eq!(changed, delete, "the key did not reach the table");
            }
        }
        times
    }
}

/// A table in normal mode with `rows` rows on `inputs` inputs and two outputs, the same at every run: each row rests in one
/// column and leads to a resting row in every column next to it.
fn table(rows: usize, inputs: usize) -> Project {
    let columns = 1 << inputs;
    let mut seed = 0x9e37_79b9_7f4a_7c15_u64;
    let mut draw = move |n: usize| {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (seed >> 33) as usize % n
    };
    let home: Vec<usize> = (0..rows).map(|r| if r < columns { r } else { draw(columns) }).collect();
    let text = |column: usize| {
        (0..inputs).fold(String::new(), |mut out, bit| {
            let _ = write!(out, "{}", column >> (inputs - 1 - bit) & 1);
            out
        })
    };
    let mut project =
        Project::new((0..inputs).map(|i| format!("x{i}")).collect(), vec!["p".to_owned(), "q".to_owned()]);
    for r in 0..rows {
        let mut row = RowEntry { name: format!("s{r}"), ..RowEntry::default() };
        let outputs = format!("{}{}", draw(2), draw(2));
        row.cells.insert(text(home[r]), CellEntry { next: row.name.clone(), outputs });
        for bit in 0..inputs {
            let column = home[r] ^ 1 << bit;
            let there: Vec<usize> = (0..rows).filter(|&t| home[t] == column).collect();
            if !there.is_empty() {
                let next = format!("s{}", there[draw(there.len())]);
                row.cells.insert(text(column), CellEntry { next, outputs: "--".to_owned() });
            }
        }
        project.rows.push(row);
    }
    project.initial = Some(("s0".to_owned(), text(home[0])));
    let written = write(&project);
    read(written.as_bytes()).expect("the table is within the limits")
}
