//! The house rules, held against the source text: who may import whom, what only the outermost rooms may touch, and what
//! every file must say about itself.
//!
//! The rules are functions over a path and a text. The tests at the end feed them bad lines, so that a rule that has
//! stopped seeing anything is noticed. A macro could still hide a path from a reader of text: review those.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

/// The rooms that a room may import, as paths below `crate`. A path stands for itself and everything below it.
const ROOMS: &[(&str, &[&str])] = &[
    ("base", &[]),
    ("search", &["base"]),
    ("project", &["base"]),
    ("spec", &["base", "project"]),
    ("merge", &["base", "search", "spec", CHOICES]),
    ("codes", &["base", "search", "spec", "merge", CHOICES, LIMITS]),
    ("logic", &["base", "search", "spec", "merge", "codes", CHOICES]),
    ("gates", &["base", "logic", "codes", CHOICES]),
    (
        "proof",
        &[
            "base",
            CHOICES,
            "spec::values",
            "merge::values",
            "codes::values",
            "logic::values",
            "gates::values",
        ],
    ),
    ("design", &["base", "project", "search", "spec", "merge", "codes", "logic", "gates", "proof"]),
    (
        "drawing",
        &[
            "base",
            "project",
            "spec::values",
            "merge::values",
            "codes::values",
            "logic::values",
            "gates::values",
            "proof::values",
            "design::values",
        ],
    ),
    (
        "explain",
        &[
            "base",
            "project",
            "spec::values",
            "merge::values",
            "codes::values",
            "logic::values",
            "gates::values",
            "proof::values",
            "design::values",
        ],
    ),
    (
        "handoff",
        &[
            "base",
            "project",
            "spec::values",
            "merge::values",
            "codes::values",
            "logic::values",
            "gates::values",
            "proof::values",
            "design::values",
        ],
    ),
    (
        "window",
        &[
            "base",
            "project",
            "design",
            "drawing",
            "explain",
            "handoff",
            "spec::values",
            "merge::values",
            "codes::values",
            "logic::values",
            "proof::values",
        ],
    ),
    ("main", &[]),
    ("lib", &[]),
];

/// The plain enums that every stage may read.
const CHOICES: &str = "project::choices";

/// The plain numbers that a stage needs to refuse what is too large.
const LIMITS: &str = "project::limits";

/// What only some rooms may name: the text that gives it away, and the rooms where it is at home.
const RESERVED: &[(&str, &[&str])] = &[
    ("egui", &["window", "main"]),
    ("eframe", &["window", "main"]),
    ("std::fs", &["window", "main"]),
    ("std::io", &["window", "main"]),
    ("std::env", &["window", "main"]),
    ("std::process", &["window", "main"]),
    ("std::time", &["window", "main"]),
    ("std::thread", &["design", "window", "main"]),
    ("std::net", &[]),
    ("println!", &["main"]),
    ("eprintln!", &["main"]),
    ("print!", &["main"]),
    ("eprint!", &["main"]),
    ("dbg!", &[]),
];

/// Texts that would let an import slip past a reader of lines.
const EVASIONS: &[&str] = &[
    "crate::{",
    "crate::*",
    "$crate",
    "super::super",
    "std::{",
    "std::*",
    "stillgate::",
    "extern crate",
    "include!",
    "#[path",
];

/// Everything that is at the top of the repository, dotfiles apart.
const TOP: &[&str] = &[
    "Cargo.lock",
    "Cargo.toml",
    "DEVELOPERS.md",
    "LICENSE",
    "README.md",
    "assets",
    "projects",
    "src",
    "tests",
];

/// The rules that one source file breaks, as `line: what`. `path` is relative to `src`, with `/`.
fn broken_rules(path: &str, text: &str) -> Vec<String> {
    let room = room_of(path);
    let Some(&(_, allowed)) = ROOMS.iter().find(|(name, _)| *name == room) else {
        return vec![format!("1: room {room} is not in the table")];
    };
    let mut broken = Vec::new();
    for (number, line) in code_lines(path, text) {
        let mut complain = |what: String| broken.push(format!("{number}: {what}"));
        if room != "main" {
            for &word in EVASIONS.iter().filter(|w| contains_word(line, w)) {
                complain(format!("`{word}` hides what is imported"));
            }
            for import in imports(line) {
                if !may_import(room, allowed, &import) {
                    complain(format!("{room} may not import crate::{import}"));
                }
            }
        }
        if path.ends_with("mod.rs") && contains_word(line, "super::") {
            complain("`super::` in mod.rs leaves the room".into());
        }
        for (word, homes) in RESERVED {
            if contains_word(line, word) && !homes.contains(&room) {
                complain(format!("`{word}` belongs to {homes:?}"));
            }
        }
    }
    broken
}

/// The headings that one source file lacks.
fn missing_headings(path: &str, text: &str) -> Vec<String> {
    let mut missing = Vec::new();
    if !text.starts_with("//! ") {
        missing.push("does not open with `//!`".into());
    }
    let file = path.rsplit('/').next().unwrap_or(path);
    let is_search = file == "search.rs"
        || (room_of(path) == "search" && file != "mod.rs" && file != "bitset.rs" && file != "tests.rs");
    if is_search {
        let docs: Vec<&str> = text.lines().take_while(|l| l.starts_with("//!")).collect();
        for heading in ["//! # Complexity", "//! # References"] {
            if !docs.contains(&heading) {
                missing.push(format!("its header lacks `{heading}`"));
            }
        }
    }
    missing
}

/// The room of a file: its folder, or its own name at the top of `src`.
fn room_of(path: &str) -> &str {
    path.split('/').next().unwrap_or(path).trim_end_matches(".rs")
}

/// The lines that are bound by the rules, with their numbers: neither comments nor tests.
///
/// A test module is found by its attribute and ends at the brace in the first column that rustfmt gives it. Tests may
/// build their cases with other rooms.
fn code_lines<'t>(path: &str, text: &'t str) -> Vec<(usize, &'t str)> {
    if path.ends_with("/tests.rs") || path.contains("/tests/") {
        return Vec::new();
    }
    let lines: Vec<&str> = text.lines().collect();
    let mut code = Vec::new();
    let mut at = 0;
    while at < lines.len() {
        let line = lines[at];
        let module_follows = lines.get(at + 1).is_some_and(|l| l.starts_with("mod ") && l.ends_with('{'));
        if line == "#[cfg(test)]" && module_follows {
            while at < lines.len() && lines[at] != "}" {
                at += 1;
            }
        } else if !line.trim_start().starts_with("//") {
            code.push((at + 1, line));
        }
        at += 1;
    }
    code
}

/// Every path below `crate::` that a line names.
fn imports(line: &str) -> Vec<String> {
    line.match_indices("crate::")
        .filter(|(at, _)| !line[..*at].ends_with(|c: char| c.is_alphanumeric() || c == '_'))
        .map(|(at, word)| {
            line[at + word.len()..].chars().take_while(|c| c.is_alphanumeric() || "_:".contains(*c)).collect()
        })
        .collect()
}

/// Whether a room may import a path: its own, or one that is listed.
fn may_import(room: &str, allowed: &[&str], import: &str) -> bool {
    let below =
        |root: &str| import.strip_prefix(root).is_some_and(|rest| rest.is_empty() || rest.starts_with("::"));
    below(room) || allowed.iter().any(|root| below(root))
}

/// Whether a word stands in a line, not as the tail of a longer name.
fn contains_word(line: &str, word: &str) -> bool {
    let starts_a_name = word.starts_with(|c: char| c.is_alphanumeric());
    line.match_indices(word).any(|(at, _)| {
        let glued = line[..at].ends_with(|c: char| c.is_alphanumeric() || c == '_');
        let ends_a_name = word.ends_with(|c: char| c.is_alphanumeric());
        let runs_on = line[at + word.len()..].starts_with(|c: char| c.is_alphanumeric());
        !(starts_a_name && glued || ends_a_name && runs_on)
    })
}

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// All source files, as paths relative to `src` with their texts.
fn sources() -> Vec<(String, String)> {
    let src = root().join("src");
    let mut files = Vec::new();
    collect(&src, &mut files);
    files.sort();
    files
        .into_iter()
        .map(|file| {
            let text = fs::read_to_string(&file).expect("source file is readable");
            let name =
                file.strip_prefix(&src).expect("file lies in src").to_string_lossy().replace('\\', "/");
            (name, text)
        })
        .collect()
}

fn collect(folder: &Path, files: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).expect("folder is readable") {
        let path = entry.expect("entry is readable").path();
        if path.is_dir() {
            collect(&path, files);
        } else if path.extension().is_some_and(|e| e == "rs") {
            files.push(path);
        }
    }
}

fn complain(of: impl Iterator<Item = (String, Vec<String>)>) {
    let all: Vec<String> =
        of.flat_map(|(path, broken)| broken.into_iter().map(move |b| format!("src/{path}:{b}"))).collect();
    assert!(all.is_empty(), "\n{}", all.join("\n"));
}

#[test]
fn every_import_is_in_the_room_table() {
    complain(sources().into_iter().map(|(path, text)| {
        let broken = broken_rules(&path, &text);
        (path, broken)
    }));
}

#[test]
fn every_file_says_what_it_computes() {
    complain(sources().into_iter().map(|(path, text)| {
        let missing = missing_headings(&path, &text);
        (path, missing)
    }));
}

#[test]
fn plain_values_live_apart_from_algorithms() {
    // Only what is public can be called from another room, so a room shows its values and its few functions; what finds
    // them stays private, and the compiler keeps the proof apart.
    for room in ["spec", "merge", "codes", "logic"] {
        let text =
            fs::read_to_string(root().join("src").join(room).join("mod.rs")).expect("room has a mod.rs");
        for line in text.lines().filter(|l| l.starts_with("pub mod ")) {
            assert_eq!(line, "pub mod values;", "src/{room}/mod.rs opens a module of algorithms");
        }
    }
}

#[test]
fn the_code_map_lists_every_room() {
    let map = fs::read_to_string(root().join("DEVELOPERS.md")).expect("DEVELOPERS.md is readable");
    let rooms: BTreeSet<String> = sources().iter().map(|(path, _)| room_of(path).to_string()).collect();
    for room in rooms {
        let as_folder = format!("src/{room}/");
        let as_file = format!("src/{room}.rs");
        assert!(
            map.contains(&as_folder) || map.contains(&as_file),
            "the code map of DEVELOPERS.md lacks {as_folder}"
        );
    }
}

#[test]
fn the_top_level_is_exact() {
    let listed = Command::new("git")
        .args(["-c", "safe.directory=*", "ls-files", "--cached", "--others", "--exclude-standard"])
        .current_dir(root())
        .output()
        .expect("git runs");
    assert!(listed.status.success(), "git ls-files: {}", String::from_utf8_lossy(&listed.stderr));
    let listed = String::from_utf8(listed.stdout).expect("git prints UTF-8");
    let top: BTreeSet<&str> = listed
        .lines()
        .filter_map(|l| l.split('/').next())
        .filter(|name| !name.starts_with('.') && root().join(name).exists())
        .collect();
    let agreed: BTreeSet<&str> = TOP.iter().copied().collect();
    assert_eq!(top, agreed);
}

#[test]
fn bad_lines_are_caught() {
    let bad = [
        ("spec/check.rs", "use crate::merge::Merged;"),
        ("merge/cover.rs", "use crate::project::Project;"),
        ("merge/cover.rs", "use crate::codes;"),
        ("merge/cover.rs", "fn f(t: &crate::design::Design) {}"),
        ("base/index.rs", "use crate::search::sat;"),
        ("search/sat.rs", "use crate::project::choices::Form;"),
        ("proof/walk.rs", "use crate::logic::equations;"),
        ("proof/walk.rs", "use crate::merge::Merged;"),
        ("proof/walk.rs", "use crate::search::cliques;"),
        ("handoff/record.rs", "use crate::design::derive;"),
        ("drawing/map.rs", "use crate::design::Deriver;"),
        ("window/app.rs", "use crate::merge::merge;"),
        ("spec/check.rs", "use crate::{base, merge};"),
        ("spec/check.rs", "use crate::*;"),
        ("spec/deep/check.rs", "use super::super::super::merge::merge;"),
        ("spec/mod.rs", "use super::merge::merge;"),
        ("spec/check.rs", "use stillgate::merge::merge;"),
        ("spec/check.rs", "use std::{fs, io};"),
        ("spec/check.rs", "    let text = std::fs::read_to_string(path);"),
        ("spec/check.rs", "use std::time::Instant;"),
        ("spec/check.rs", "use std::thread;"),
        ("merge/cover.rs", "    println!(\"{x}\");"),
        ("merge/cover.rs", "    eprintln!(\"{x}\");"),
        ("main.rs", "use std::net::TcpStream;"),
        ("handoff/svg.rs", "use egui::Color32;"),
        ("design/run.rs", "fn f(c: &eframe::CreationContext) {}"),
        ("extra/new.rs", "//! A room that nobody agreed to."),
        ("merge/cover.rs", "#[cfg(test)]\nmod tests {\n}\nuse crate::codes::assign;"),
        ("merge/cover.rs", "#[path = \"../codes/assign.rs\"]"),
        ("merge/cover.rs", "include!(\"../codes/assign.rs\");"),
    ];
    for (path, text) in bad {
        assert!(!broken_rules(path, text).is_empty(), "{path}: not seen: {text}");
    }
}

#[test]
fn good_lines_pass() {
    let good = [
        ("merge/cover.rs", "use crate::search::cliques::maximal;\nuse crate::merge::values::Merged;"),
        ("merge/cover.rs", "use crate::project::choices::OutputStyle;"),
        ("merge/cover.rs", "// use crate::codes::assign;\n//! [`x`](crate::codes)"),
        ("merge/cover.rs", "use super::pairs;\nlet fingerprint = reprint!(x);"),
        ("merge/cover.rs", "#[cfg(test)]\nmod tests {\n    use crate::codes::assign;\n}"),
        ("proof/walk.rs", "use crate::logic::values::Cube;\nuse crate::base::Row;"),
        ("handoff/record.rs", "use crate::design::values::Design;"),
        ("design/run.rs", "use std::thread;\nuse crate::proof::prove;"),
        ("window/app.rs", "use std::time::Instant;\nuse eframe::egui;"),
        ("main.rs", "use stillgate::project::Project;\nprintln!();"),
    ];
    for (path, text) in good {
        assert_eq!(broken_rules(path, text), Vec::<String>::new(), "{path}: {text}");
    }
}

#[test]
fn missing_headings_are_caught() {
    let cost = "//! Finds.\n//!\n//! # Complexity\n//!\n//! # References\n";
    assert!(missing_headings("search/sat.rs", cost).is_empty());
    assert!(missing_headings("merge/search.rs", cost).is_empty());
    assert!(missing_headings("search/mod.rs", "//! Finds.\n").is_empty());
    assert_eq!(missing_headings("merge/search.rs", "//! Finds.\n\n//! # Complexity\n").len(), 2);
    assert_eq!(missing_headings("search/sat.rs", "//! Finds.\n//! # References\n").len(), 1);
    assert_eq!(missing_headings("spec/check.rs", "use std::fmt;\n").len(), 1);
    assert_eq!(missing_headings("spec/check.rs", "/// Not a module comment.\n").len(), 1);
}
