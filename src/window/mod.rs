//! The window: draws the stage values that [`design`](crate::design) derives, and sends commands. It holds no algorithm.
//!
//! `app` owns the state and is the one place that carries commands out; each station has a file that only draws and pushes commands;
//! `worker` derives beside the window's thread; `files` is the only file here that touches the disk.

pub mod actions;
pub mod app;
mod behaviour;
mod cell_text;
mod chain;
mod codes;
mod dialogs;
mod equations;
mod files;
mod grid;
mod handoff;
mod keys;
mod merging;
mod paint;
mod proof;
pub mod samples;
mod tables;
mod theme;
mod why_pane;
mod worker;

use std::path::PathBuf;

use eframe::egui;

/// Name of the program to the desktop: names the folder of its own files and the desktop entry.
pub const APP_ID: &str = "stillgate";

/// Opens the window on a file, or on a sample project.
///
/// # Errors
/// A sentence, where there is no display or no graphics.
pub fn run(file: Option<PathBuf>) -> Result<(), String> {
    let icon = eframe::icon_data::from_png_bytes(include_bytes!("../../assets/icon.png"));
    let mut viewport = egui::ViewportBuilder::default()
        .with_title("Stillgate")
        .with_app_id(APP_ID)
        .with_inner_size([1280.0, 760.0])
        .with_min_inner_size([760.0, 480.0]);
    if let Ok(icon) = icon {
        viewport = viewport.with_icon(icon);
    }
    let options = eframe::NativeOptions { viewport, ..Default::default() };
    let start = app::Start { file, data: files::data_folder() };
    eframe::run_native(APP_ID, options, Box::new(|cc| Ok(Box::new(app::App::new(cc, start)?)))).map_err(|e| {
        format!("the window cannot be opened: {e}. The batch commands work without one; see --help.")
    })
}
