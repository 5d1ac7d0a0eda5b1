//! The window, driven by keys and names as a person or a screen reader drives it, with no display.

#[path = "window/actions.rs"]
mod actions;
#[path = "window/behaviour.rs"]
mod behaviour;
#[path = "window/cpu.rs"]
mod cpu;
#[path = "window/derived.rs"]
mod derived;
#[path = "window/drive.rs"]
mod drive;
#[path = "window/files.rs"]
mod files;
#[path = "window/history.rs"]
mod history;
#[path = "window/job.rs"]
mod job;
#[path = "window/links.rs"]
mod links;
#[path = "window/look.rs"]
mod look;
#[path = "window/tables.rs"]
mod tables;
