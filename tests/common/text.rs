//! A short notation for tables in tests, and where failing seeds are kept.

use std::collections::BTreeMap;
use std::fs;
use std::path::PathBuf;

use stillgate::project::{CellEntry, Discipline, Project, RowEntry};

/// A project from lines, one a row: the row's name, then `column>next/outputs` for each cell. It starts in the first
/// cell of the first line.
pub fn table(inputs: &[&str], outputs: &[&str], discipline: Discipline, lines: &[&str]) -> Project {
    let owned = |names: &[&str]| names.iter().map(|n| n.to_string()).collect();
    let mut project = Project::new(owned(inputs), owned(outputs));
    project.discipline = discipline;
    for line in lines {
        let mut words = line.split_whitespace();
        let name = words.next().expect("a row name").to_string();
        let mut cells = BTreeMap::new();
        for word in words {
            let (column, rest) = word.split_once('>').expect("column>next/outputs");
            let (next, outputs) = rest.split_once('/').expect("next/outputs");
            project.initial.get_or_insert_with(|| (name.clone(), column.to_string()));
            cells.insert(column.to_string(), CellEntry { next: next.into(), outputs: outputs.into() });
        }
        project.rows.push(RowEntry { name, cells });
    }
    project
}

/// Seeds that failed once under this name, from `tests/data/seeds/NAME.txt`: one a line, `#` starts a comment. They are
/// tried first.
pub fn kept_seeds(name: &str) -> Vec<u64> {
    let path =
        PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/data/seeds").join(name).with_extension("txt");
    let text = fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    text.lines()
        .map(|l| l.split('#').next().unwrap_or("").trim())
        .filter(|l| !l.is_empty())
        .map(|l| l.parse().expect("a seed"))
        .collect()
}

/// Runs `check` on the kept seeds and then on `0..count`. A panic inside names the seed and the file to keep it in.
pub fn for_seeds(name: &str, count: u64, check: impl Fn(u64) + std::panic::RefUnwindSafe) {
    for seed in kept_seeds(name).into_iter().chain(0..count) {
        if std::panic::catch_unwind(|| check(seed)).is_err() {
            panic!("seed {seed} fails (see above): keep it in tests/data/seeds/{name}.txt");
        }
    }
}
