//! Reads a project file, or says in one line why not.

use std::fs::{self, File};
use std::io::Read;
use std::path::Path;

use stillgate::handoff::plain;
use stillgate::project::{self, Project, limits};

/// The project in a file. `Err` is a line that begins with the file's name.
pub fn open(path: &Path) -> Result<Project, String> {
    let name = plain(&path.display().to_string());
    let bytes = bytes(path).map_err(|what| format!("{name}: {what}"))?;
    project::read(&bytes).map_err(|e| format!("{name}:{}:{}: {}", e.line, e.column, plain(&e.text)))
}

fn bytes(path: &Path) -> Result<Vec<u8>, String> {
    let refused = |e: std::io::Error| match e.kind() {
        std::io::ErrorKind::NotFound => "there is no such file".to_owned(),
        std::io::ErrorKind::PermissionDenied => "reading it is not permitted".to_owned(),
        _ => format!("cannot be read: {}", plain(&e.to_string())),
    };
    let metadata = fs::metadata(path).map_err(refused)?;
    if metadata.is_dir() {
        return Err("is a directory, not a project file".to_owned());
    }
    let too_large = || format!("is too large: a project file has at most {} MiB", limits::FILE_BYTES >> 20);
    let limit = limits::FILE_BYTES as u64;
    if metadata.len() > limit {
        return Err(too_large());
    }
    // A pipe has no length, and a file can grow: what is read is bounded too.
    let mut bytes = Vec::new();
    File::open(path).and_then(|f| f.take(limit + 1).read_to_end(&mut bytes)).map_err(refused)?;
    if bytes.len() as u64 > limit { Err(too_large()) } else { Ok(bytes) }
}
