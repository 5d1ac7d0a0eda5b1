//! The life of a project: unsaved changes, files that others change, crashes, drops, and files that mean harm.

use std::fs;
use std::path::Path;

use eframe::egui::{Key, ViewportCommand};
use stillgate::project::write;
use stillgate::window::app::Start;

use crate::drive::{BOTH, CTRL, NONE, Window, projects, read};

fn copy_of_a_sample(folder: &Path) -> std::path::PathBuf {
    let path = folder.join("pump.ron");
    fs::copy(projects().join("sump_pump.ron"), &path).unwrap();
    path
}

fn edit(w: &mut Window) {
    w.cell(0, 2);
    w.press(NONE, Key::Delete);
}

#[test]
fn closing_with_unsaved_changes_asks_first() {
    let folder = tempfile::tempdir().unwrap();
    let path = copy_of_a_sample(folder.path());
    let mut w = Window::file(&path);
    assert!(!w.close().contains(&ViewportCommand::CancelClose), "nothing to ask about");
    edit(&mut w);
    assert!(w.close().contains(&ViewportCommand::CancelClose));
    assert!(w.sees("Unsaved changes"));
    w.click("Keep editing");
    assert!(!w.sees("Unsaved changes"));
    // Escape keeps editing too.
    w.close();
    w.press(NONE, Key::Escape);
    assert!(w.app().dialog.is_none());
    // Save, then close.
    w.close();
    w.click("Save");
    assert!(!w.app().history.dirty());
    assert_eq!(read(&path).rows, w.project().rows);
    assert!(!w.close().contains(&ViewportCommand::CancelClose));
    // Discard, then close: the file stays as it is.
    let mut w = Window::file(&path);
    edit_other(&mut w);
    let on_disk = fs::read(&path).unwrap();
    assert!(w.close().contains(&ViewportCommand::CancelClose));
    w.click("Discard");
    assert!(!w.close().contains(&ViewportCommand::CancelClose));
    assert_eq!(fs::read(&path).unwrap(), on_disk);
}

fn edit_other(w: &mut Window) {
    w.cell(1, 2);
    w.press(NONE, Key::Delete);
}

#[test]
fn a_project_without_a_file_is_saved_before_it_is_left() {
    let folder = tempfile::tempdir().unwrap();
    let mut w = Window::sample("sump_pump");
    edit(&mut w);
    assert!(w.close().contains(&ViewportCommand::CancelClose));
    w.click("Save");
    let path = folder.path().join("mine.ron");
    w.tab_to("Path");
    w.retype(&path.display().to_string());
    w.press(NONE, Key::Enter);
    assert_eq!(read(&path).rows, w.project().rows);
    assert!(!w.close().contains(&ViewportCommand::CancelClose));
}

#[test]
fn new_and_open_ask_about_unsaved_changes_too() {
    let folder = tempfile::tempdir().unwrap();
    let path = copy_of_a_sample(folder.path());
    let mut w = Window::sample("conveyor_diverter");
    edit(&mut w);
    w.press(CTRL, Key::N);
    assert!(w.sees("Unsaved changes"));
    w.click("Keep editing");
    w.press(CTRL, Key::O);
    assert!(w.sees("Unsaved changes"));
    w.click("Discard");
    assert!(w.sees("Open a project"));
    w.tab_to("Path");
    w.retype(&path.display().to_string());
    w.press(NONE, Key::Enter);
    assert_eq!(w.project().rows.len(), 4);
    assert_eq!(w.app().path.as_deref(), Some(path.as_path()));
}

#[test]
fn a_dropped_file_opens() {
    let folder = tempfile::tempdir().unwrap();
    let path = copy_of_a_sample(folder.path());
    let mut w = Window::sample("conveyor_diverter");
    w.drop_file(&path);
    assert_eq!(w.app().path.as_deref(), Some(path.as_path()));
    assert_eq!(w.project().rows.len(), 4);
    edit(&mut w);
    w.drop_file(&projects().join("clock_gate.ron"));
    assert!(w.sees("Unsaved changes"));
    assert_eq!(w.project().rows.len(), 4);
}

#[test]
fn recent_files_and_samples_are_in_the_menu() {
    let folder = tempfile::tempdir().unwrap();
    let path = copy_of_a_sample(folder.path());
    let mut w = Window::file(&path);
    w.menu("File", "Open sample");
    w.harness().run_steps(3);
    w.click_with("conveyor diverter");
    assert_eq!(w.project().rows.len(), 9);
    w.menu("File", "Open recent");
    w.harness().run_steps(3);
    w.click(&path.display().to_string());
    assert_eq!(w.project().rows.len(), 4);
}

/// Writes other content of another length, as an editor does.
fn change_on_disk(path: &Path) {
    let mut other = read(path);
    other.title.push_str(", changed by another program");
    fs::write(path, write(&other)).unwrap();
}

#[test]
fn a_file_changed_on_the_disk_is_noticed() {
    let folder = tempfile::tempdir().unwrap();
    let path = copy_of_a_sample(folder.path());
    let mut w = Window::file(&path);
    w.wait(3.0);
    assert!(w.app().dialog.is_none());
    change_on_disk(&path);
    w.wait(3.0);
    assert!(w.sees("The file has changed on the disk"));
    w.click("Read it again");
    assert!(w.project().title.ends_with("changed by another program"));
    // Kept: it counts as unsaved, and the question does not come again.
    change_on_disk(&path);
    w.wait(3.0);
    w.click("Keep mine");
    assert!(w.app().history.dirty());
    w.wait(5.0);
    assert!(w.app().dialog.is_none());
}

#[test]
fn saving_over_a_change_of_another_program_asks() {
    let folder = tempfile::tempdir().unwrap();
    let path = copy_of_a_sample(folder.path());
    let mut w = Window::file(&path);
    edit(&mut w);
    change_on_disk(&path);
    w.press(CTRL, Key::S);
    assert!(w.sees("The file has changed on the disk"));
    assert!(read(&path).title.ends_with("changed by another program"));
    w.click("Write mine over it");
    assert_eq!(read(&path).rows, w.project().rows);
    assert!(!read(&path).title.ends_with("changed by another program"));
    assert!(!w.app().history.dirty());
}

#[test]
fn a_file_that_cannot_be_written_is_said_and_nothing_is_lost() {
    let folder = tempfile::tempdir().unwrap();
    let mut w = Window::sample("sump_pump");
    edit(&mut w);
    w.press(BOTH, Key::S);
    w.tab_to("Path");
    w.retype(&folder.path().join("no/such/folder/x.ron").display().to_string());
    w.press(NONE, Key::Enter);
    assert!(w.sees("The file was not saved"));
    assert!(w.sees_with("cannot be written"));
    assert!(w.app().history.dirty());
}

/// A window whose own files are in `data`.
fn window(file: &Path, data: &Path) -> Window {
    Window::start(Start { file: Some(file.to_path_buf()), data: Some(data.to_path_buf()) })
}

fn copies(data: &Path) -> Vec<std::path::PathBuf> {
    let Ok(entries) = fs::read_dir(data.join("recovery")) else { return Vec::new() };
    let mut files: Vec<_> = entries.map(|e| e.unwrap().path()).collect();
    files.retain(|f| f.extension().is_some_and(|e| e == "ron"));
    files
}

#[test]
fn two_seconds_after_an_edit_a_crash_loses_nothing() {
    let folder = tempfile::tempdir().unwrap();
    let data = folder.path().join("data");
    let path = copy_of_a_sample(folder.path());
    let mut w = window(&path, &data);
    w.wait(3.0);
    assert!(copies(&data).is_empty(), "a copy without an edit");
    edit(&mut w);
    let edited = w.project().clone();
    w.wait(1.9);
    assert_eq!(copies(&data).len(), 1, "no copy within two seconds");
    // Edits that go on do not put the copy off.
    for _ in 0..8 {
        edit_other(&mut w);
        w.wait(0.2);
        w.press(CTRL, Key::Z);
        w.wait(0.2);
    }
    edit_other(&mut w);
    let last = w.project().clone();
    w.wait(1.9);
    assert_eq!(read(&copies(&data)[0]), last);
    assert_ne!(edited, last);

    // The window is gone without a word, as after kill -9. The next one offers the copy.
    drop(w);
    let mut w = window(&path, &data);
    assert!(w.sees("Unsaved work was found"));
    assert!(w.sees_with("pump.ron"));
    w.click("Open the copy");
    assert_eq!(*w.project(), last);
    assert_eq!(w.app().path.as_deref(), Some(path.as_path()));
    assert!(w.app().history.dirty(), "recovered work is not saved yet");
    w.press(CTRL, Key::S);
    assert_eq!(read(&path).rows, last.rows);
    assert!(copies(&data).is_empty());
    drop(w);
    assert!(!window(&path, &data).sees("Unsaved work was found"));
}

#[test]
fn recovered_work_survives_a_second_crash() {
    let folder = tempfile::tempdir().unwrap();
    let data = folder.path().join("data");
    let path = copy_of_a_sample(folder.path());
    let mut w = window(&path, &data);
    edit(&mut w);
    let edited = w.project().clone();
    w.wait(1.9);
    drop(w);
    let mut w = window(&path, &data);
    w.click("Open the copy");
    w.wait(1.9);
    drop(w);
    let mut w = window(&path, &data);
    w.click("Open the copy");
    assert_eq!(*w.project(), edited);
}

#[test]
fn a_copy_that_is_not_wanted_now_stays_and_one_deleted_is_gone() {
    let folder = tempfile::tempdir().unwrap();
    let data = folder.path().join("data");
    let path = copy_of_a_sample(folder.path());
    let mut w = window(&path, &data);
    edit(&mut w);
    w.wait(1.9);
    drop(w);
    let mut w = window(&path, &data);
    w.click("Later");
    // Work in the meantime must not overwrite it.
    edit_other(&mut w);
    w.wait(1.9);
    w.press(CTRL, Key::S);
    drop(w);
    let mut w = window(&path, &data);
    assert!(w.sees("Unsaved work was found"));
    w.click("Delete it");
    drop(w);
    assert!(!window(&path, &data).sees("Unsaved work was found"));
}

#[test]
fn two_windows_keep_two_copies() {
    let folder = tempfile::tempdir().unwrap();
    let data = folder.path().join("data");
    let path = copy_of_a_sample(folder.path());
    let mut first = window(&path, &data);
    edit(&mut first);
    first.wait(1.9);
    let mut second = window(&path, &data);
    assert!(!second.sees("Unsaved work was found"), "the first window is alive");
    edit_other(&mut second);
    second.wait(1.9);
    assert_eq!(copies(&data).len(), 2);
}

#[test]
fn files_that_mean_harm_are_refused_in_a_dialog() {
    let folder = tempfile::tempdir().unwrap();
    let deep = "(".repeat(200_000);
    let hostile: [(&str, Vec<u8>); 7] = [
        ("empty.ron", Vec::new()),
        ("binary.ron", (0..=255).cycle().take(5000).collect()),
        ("deep.ron", deep.into_bytes()),
        ("newer.ron", b"(format: 99, inputs: [\"a\"], outputs: [\"q\"], rows: [])".to_vec()),
        ("unknown.ron", b"(format: 1, surprise: 1, inputs: [\"a\"], outputs: [\"q\"], rows: [])".to_vec()),
        (
            "many.ron",
            format!("(format: 1, inputs: [{}], outputs: [\"q\"], rows: [])", "\"a\", ".repeat(4000))
                .into_bytes(),
        ),
        ("huge.ron", vec![b' '; (16 << 20) + 10]),
    ];
    let mut w = Window::sample("sump_pump");
    let before = w.project().clone();
    for (name, bytes) in hostile {
        let path = folder.path().join(name);
        fs::write(&path, bytes).unwrap();
        w.drop_file(&path);
        assert!(w.sees("The file was not opened"), "{name}");
        assert!(w.sees_with(name), "the message names the file");
        w.press(NONE, Key::Escape);
        assert_eq!(*w.project(), before, "{name}");
        // From the command line the same, on an otherwise usable window.
        let mut other = Window::file(&path);
        assert!(other.sees("The file was not opened"), "{name}");
        other.press(NONE, Key::Escape);
        assert!(other.app().dialog.is_none());
    }
    w.drop_file(folder.path());
    assert!(w.sees_with("is not a file"));
    w.press(NONE, Key::Escape);
    w.drop_file(&folder.path().join("not_there.ron"));
    assert!(w.sees_with("cannot be opened"));
}

#[test]
fn names_that_mean_harm_are_shown_and_break_nothing() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("odd.ron");
    // As long as the limits allow, with many rows and columns and no sensible table.
    let long = "n".repeat(64);
    let rows: String = (0..40)
        .map(|i| {
            format!("(name: \"{}{i}\", cells: {{\"0000000000\": (\"{long}\", \"0\")}}),", "r".repeat(60))
        })
        .collect();
    let inputs: String = (0..10).map(|i| format!("\"{}{i}\",", "i".repeat(63))).collect();
    let title = "\u{202E}{}%s<b>\\n\u{1F600}".repeat(8);
    let text = format!("(format: 1, title: {title:?}, inputs: [{inputs}], outputs: [\"q\"], rows: [{rows}])");
    fs::write(&path, text).unwrap();
    let mut w = Window::of_strangers(&path);
    if w.sees("The file was not opened") {
        // A control character in a title may be refused; then the message is what counts.
        assert!(w.sees_with("odd.ron"));
        return;
    }
    for station in stillgate::window::actions::Station::ALL {
        w.go(station);
    }
    assert_eq!(w.project().rows.len(), 40);
}
