//! Files of the window: reading, atomic saving, the recovery copy, dialogs of the system.

use std::fs;
use std::io::{self, Read as _, Write as _};
use std::path::{Path, PathBuf};
use std::sync::mpsc::{Receiver, channel};
use std::time::SystemTime;

use eframe::egui;

use crate::project::{self, Project, limits};

/// What a file looked like when it was read or written, to notice that somebody else changed it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Stamp {
    modified: SystemTime,
    len: u64,
}

/// The stamp of a file, if it is there.
pub fn stamp(path: &Path) -> Option<Stamp> {
    let meta = fs::metadata(path).ok()?;
    Some(Stamp { modified: meta.modified().ok()?, len: meta.len() })
}

/// Reads a project.
///
/// # Errors
/// A sentence that names the file, the line and the column, and what to do.
pub fn read(path: &Path) -> Result<Project, String> {
    let name = path.display();
    let meta = fs::metadata(path).map_err(|e| format!("{name} cannot be opened: {e}."))?;
    if !meta.is_file() {
        return Err(format!("{name} is not a file. Choose a project file that ends in .ron."));
    }
    let mut bytes = Vec::new();
    fs::File::open(path)
        .and_then(|f| f.take(limits::FILE_BYTES as u64 + 1).read_to_end(&mut bytes))
        .map_err(|e| format!("{name} cannot be read: {e}."))?;
    project::read(&bytes).map_err(|e| format!("{name}: {e}"))
}

/// Writes a file so that a crash leaves either the old content or the new. A symbolic link stays a link.
///
/// # Errors
/// A sentence that names the file.
pub fn save(path: &Path, text: &str) -> Result<(), String> {
    let target = fs::canonicalize(path).unwrap_or_else(|_| path.to_path_buf());
    let write = || -> io::Result<()> {
        let mut file = atomic_write_file::AtomicWriteFile::open(&target)?;
        file.write_all(text.as_bytes())?;
        file.commit()
    };
    write().map_err(|e| {
        format!("{} cannot be written: {e}. Nothing was changed; choose another place.", path.display())
    })
}

/// The recovery copy of one running window: a locked slot in the data folder. The lock falls with the process, so a copy
/// whose lock is free belongs to a window that crashed.
pub struct Recovery {
    folder: PathBuf,
    slot: usize,
    _lock: fs::File,
}

/// A copy that a crashed window left.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Found {
    /// The copy.
    pub copy: PathBuf,
    /// The file that was being edited, if it had one.
    pub of: Option<PathBuf>,
}

const SLOTS: usize = 32;

impl Recovery {
    /// Takes a free slot in `folder` and lists what crashed windows left. `None` if the folder cannot be used; then there is no
    /// recovery copy, and the caller says so.
    pub fn open(folder: &Path) -> Option<(Recovery, Vec<Found>)> {
        fs::create_dir_all(folder).ok()?;
        let mut mine = None;
        let mut found = Vec::new();
        for slot in 0..SLOTS {
            let lock = fs::File::create(folder.join(format!("{slot}.lock"))).ok()?;
            if lock.try_lock().is_err() {
                continue;
            }
            let copy = folder.join(format!("{slot}.ron"));
            if copy.exists() {
                let of = fs::read_to_string(folder.join(format!("{slot}.path"))).ok();
                found.push(Found { copy, of: of.filter(|p| !p.is_empty()).map(PathBuf::from) });
            } else if mine.is_none() {
                mine = Some((slot, lock));
            }
        }
        let (slot, lock) = mine?;
        Some((Recovery { folder: folder.to_path_buf(), slot, _lock: lock }, found))
    }

    /// Writes the copy.
    ///
    /// # Errors
    /// A sentence for the status line.
    pub fn keep(&self, text: &str, of: Option<&Path>) -> Result<(), String> {
        let name = of.map(|p| p.display().to_string()).unwrap_or_default();
        save(&self.file("path"), &name)?;
        save(&self.file("ron"), text)
    }

    /// Forgets the copy: the project is saved or was given up.
    pub fn forget(&self) {
        // Not being there is what is wanted.
        let _ = fs::remove_file(self.file("ron"));
        let _ = fs::remove_file(self.file("path"));
    }

    fn file(&self, ending: &str) -> PathBuf {
        self.folder.join(format!("{}.{ending}", self.slot))
    }
}

/// Removes a copy that was looked at and not wanted, or taken over.
pub fn discard(found: &Found) {
    // Not being there is what is wanted.
    let _ = fs::remove_file(&found.copy);
    let _ = fs::remove_file(found.copy.with_extension("path"));
}

/// Where the window keeps its own files.
pub fn data_folder() -> Option<PathBuf> {
    eframe::storage_dir(crate::window::APP_ID)
}

/// Asks the system for a file to open or a place to save; the answer comes through the channel, `None` if the user gave up or the
/// system has no such dialog.
pub fn ask(ctx: &egui::Context, frame: &eframe::Frame, save_as: Option<String>) -> Receiver<Option<PathBuf>> {
    let (tx, rx) = channel();
    let dialog = rfd::AsyncFileDialog::new().set_parent(frame);
    let ctx = ctx.clone();
    let answer: std::pin::Pin<Box<dyn Future<Output = Option<rfd::FileHandle>> + Send>> = match save_as {
        None => Box::pin(dialog.add_filter("Stillgate project", &["ron"]).pick_file()),
        Some(name) => Box::pin(dialog.set_file_name(name).save_file()),
    };
    // Without a thread there is no dialog; the sender is dropped and the typed path remains.
    let _ = std::thread::Builder::new().name("file dialog".into()).spawn(move || {
        let path = pollster::block_on(answer).map(|h| h.path().to_path_buf());
        let _ = tx.send(path);
        ctx.request_repaint();
    });
    rx
}
