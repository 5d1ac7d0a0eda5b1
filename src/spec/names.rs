//! Names: what may be one, how a hostile one is shown, and the choices that speak of names.
//!
//! Exact; cost `O(m log m)` in the number of names.

use std::collections::{BTreeMap, BTreeSet};

use crate::project::choices::CoverChoice;
use crate::project::{Project, limits};
use crate::spec::report::{Report, Spot};

/// Characters of a name or text from the user that a finding repeats at most.
const SHOWN: usize = 40;

/// Whether `name` can be written as it is into every hand-off file: letters, digits and underscore, a letter first, no
/// double or trailing underscore, at most [`limits::NAME`] characters.
pub fn identifier(name: &str) -> bool {
    name.len() <= limits::NAME
        && name.starts_with(|c: char| c.is_ascii_alphabetic())
        && name.bytes().all(|b| b.is_ascii_alphanumeric() || b == b'_')
        && !name.contains("__")
        && !name.ends_with('_')
}

/// The name as it may stand in a sentence: itself if it is harmless, otherwise in quotes, shortened, with everything
/// unprintable escaped.
pub fn shown(name: &str) -> String {
    let harmless = |b: u8| b.is_ascii_alphanumeric() || b == b'_' || b == b'-';
    if !name.is_empty() && name.len() <= limits::NAME && name.bytes().all(harmless) {
        return name.to_owned();
    }
    let mut text: String = String::from("\"");
    text.extend(name.chars().take(SHOWN).flat_map(char::escape_debug));
    text.push_str(if name.chars().nth(SHOWN).is_some() { "...\"" } else { "\"" });
    text
}

/// Several names in one sentence: `a`, `a and b`, `a, b and c`.
pub fn listed<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    let names: Vec<String> = names.into_iter().map(shown).collect();
    match names.split_last() {
        None => String::new(),
        Some((last, [])) => last.clone(),
        Some((last, head)) => format!("{} and {last}", head.join(", ")),
    }
}

/// Names of the outputs in a bit mask.
pub fn outputs_in(mask: u32, outputs: &[String]) -> String {
    let named = outputs.iter().enumerate().filter(|(j, _)| mask >> j & 1 == 1);
    listed(named.map(|(_, name)| name.as_str()))
}

/// Checks the names of inputs and outputs, and their number.
pub fn check_signals(project: &Project, report: &mut Report) {
    let (inputs, outputs) = (project.inputs.len(), project.outputs.len());
    if inputs == 0 {
        report.error("no-inputs", Spot::NOWHERE, || {
            "The controller has no input, so nothing can ever happen. Add at least one input.".into()
        });
    }
    if inputs > limits::INPUTS {
        report.error("limit-inputs", Spot::NOWHERE, || {
            let most = limits::INPUTS;
            format!("The controller has {inputs} inputs; at most {most} are possible. Split the controller.")
        });
    }
    if outputs > limits::OUTPUTS {
        report.error("limit-outputs", Spot::NOWHERE, || {
            let most = limits::OUTPUTS;
            format!(
                "The controller has {outputs} outputs; at most {most} are possible. Split the controller."
            )
        });
    }
    if outputs == 0 {
        report.warning("no-outputs", Spot::NOWHERE, || {
            "The controller has no output: only its state shows what it does. Add an output if that was forgotten."
                .into()
        });
    }
    if inputs > limits::INPUTS || outputs > limits::OUTPUTS {
        return;
    }
    let mut seen = BTreeMap::new();
    let named = project.inputs.iter().map(|name| ("input", name));
    for (kind, name) in named.chain(project.outputs.iter().map(|name| ("output", name))) {
        if !identifier(name) {
            report.error("bad-signal-name", Spot::NOWHERE, || not_an_identifier(kind, name));
            continue;
        }
        if reserved(name) {
            report.error("reserved-signal-name", Spot::NOWHERE, || {
                format!(
                    "The {kind} {name} is named like a generated signal (y, Y, S, R or P with a number, in either \
                     case). Choose another name."
                )
            });
        }
        if let Some((other_kind, other)) = seen.insert(name.to_ascii_lowercase(), (kind, name)) {
            report.error("duplicate-signal-name", Spot::NOWHERE, || {
                format!(
                    "The {kind} {name} has the same name as the {other_kind} {other}; upper and lower case count as \
                     the same. Rename one of them."
                )
            });
        }
    }
}

/// Checks row names. Rows have their own name space.
pub fn check_rows(project: &Project, report: &mut Report) {
    let mut seen = BTreeMap::new();
    for (i, row) in project.rows.iter().enumerate() {
        if !identifier(&row.name) {
            report.error("bad-row-name", Spot::row(&row.name), || {
                format!("Row number {}: {}", i + 1, not_an_identifier("row name", &row.name))
            });
        } else if let Some(first) = seen.insert(row.name.to_ascii_lowercase(), i) {
            report.error("duplicate-row-name", Spot::row(&row.name), || {
                format!(
                    "Rows number {} and {} are both named {}; upper and lower case count as the same. Rename one of \
                     them.",
                    first + 1,
                    i + 1,
                    row.name
                )
            });
        }
    }
}

/// Checks the choices as far as they speak of names that are known before anything is merged.
pub fn check_choices(project: &Project, report: &mut Report) {
    let choices = &project.choices;
    for late in &choices.logic.late {
        if !project.outputs.contains(late) {
            report.error("unknown-late-output", Spot::NOWHERE, || {
                format!(
                    "{} is to change late, but there is no such output. Take it from the list.",
                    shown(late)
                )
            });
        }
    }
    if let CoverChoice::ByHand(sets) = &choices.merging.cover {
        let rows: BTreeSet<&str> = project.rows.iter().map(|row| row.name.as_str()).collect();
        for (i, set) in sets.iter().enumerate() {
            for name in set.iter().filter(|name| !rows.contains(name.as_str())) {
                report.error("unknown-cover-row", Spot::NOWHERE, || {
                    let name = shown(name);
                    format!("Set {} of the cover by hand names {name}, but there is no such row.", i + 1)
                });
            }
        }
    }
    let mut merged = BTreeSet::new();
    for name in choices.merging.names.iter().filter(|name| !name.is_empty()) {
        if !identifier(name) {
            report
                .error("bad-merged-name", Spot::NOWHERE, || not_an_identifier("name of a merged row", name));
        } else if !merged.insert(name.to_ascii_lowercase()) {
            report.error("bad-merged-name", Spot::NOWHERE, || {
                format!("Two merged rows are to be named {name}. Give one of them another name.")
            });
        }
    }
    check_gates(project, report);
}

fn check_gates(project: &Project, report: &mut Report) {
    let gates = &project.choices.gates;
    if let Some(reset) = &gates.reset {
        let taken =
            project.inputs.iter().chain(&project.outputs).any(|name| name.eq_ignore_ascii_case(reset));
        if !identifier(reset) {
            report.error("bad-reset-name", Spot::NOWHERE, || not_an_identifier("reset input", reset));
        } else if reserved(reset) || taken {
            report.error("bad-reset-name", Spot::NOWHERE, || {
                format!("The reset input is named {reset}, like another signal. Choose another name.")
            });
        }
    }
    if gates.fan_in < 2 {
        report.error("bad-gates", Spot::NOWHERE, || {
            format!("The largest fan-in of a gate is {}; it must be at least 2.", gates.fan_in)
        });
    }
    let (least, most) = gates.delay;
    if !(least.is_finite() && most.is_finite() && 0.0 <= least && least <= most) {
        report.error("bad-gates", Spot::NOWHERE, || {
            format!("Gate delays from {least} to {most} make no sense. Give 0 <= smallest <= largest.")
        });
    }
}

/// Names that the equations, latches and spare codes get. The hand-off knows languages without case, so neither case
/// is free for the user.
fn reserved(name: &str) -> bool {
    let digits = name.trim_start_matches(|c: char| "ysrp".contains(c.to_ascii_lowercase()));
    digits.len() + 1 == name.len() && !digits.is_empty() && digits.bytes().all(|b| b.is_ascii_digit())
}

fn not_an_identifier(kind: &str, name: &str) -> String {
    if name.is_empty() {
        return format!("A {kind} is empty. Give it a name.");
    }
    if name.len() > limits::NAME {
        return format!(
            "The {kind} {} is too long: {} bytes, at most {} characters. Shorten it.",
            shown(name),
            name.len(),
            limits::NAME
        );
    }
    format!(
        "The {kind} {} cannot be used: letters, digits and single underscores only, a letter first, no underscore at \
         the end.",
        shown(name)
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn identifiers() {
        for good in ["a", "A1", "low_level", "y", "entity", &"x".repeat(64)] {
            assert!(identifier(good), "{good}");
        }
        for bad in ["", "1a", "_a", "a_", "a__b", "a b", "ä", "a-b", "a\n", "../a", "<b>", &"x".repeat(65)] {
            assert!(!identifier(bad), "{bad}");
        }
    }

    #[test]
    fn generated_names_are_reserved_in_either_case() {
        for name in ["y1", "Y12", "S1", "r2", "P1", "p10"] {
            assert!(reserved(name), "{name}");
        }
        for name in ["y", "S", "y1a", "sr1", "x1", "pump1", "yy1"] {
            assert!(!reserved(name), "{name}");
        }
    }

    #[test]
    fn hostile_names_are_tamed() {
        assert_eq!(shown("low"), "low");
        assert_eq!(shown("a\nb\u{1b}[31m"), "\"a\\nb\\u{1b}[31m\"");
        assert_eq!(shown("\u{202e}x"), "\"\\u{202e}x\"");
        assert_eq!(shown(""), "\"\"");
        assert!(shown(&"x".repeat(1 << 20)).len() < 50);
        assert_eq!(listed(["a", "b", "c"]), "a, b and c");
    }
}
