//! All ways of coding and writing one controller side by side, for the command `compare`.

use crate::base::{Bound, Level};
use crate::design::values::{Alternative, Design};
use crate::handoff::plain::{align, plain, wrap};
use crate::handoff::words::{form_name, method_name, shape_name};
use crate::project::Project;

/// A table with a line for each alternative that applies, and the reason for each that does not; ends with a newline.
pub fn comparison(project: &Project, alternatives: &[Alternative]) -> String {
    let title = if project.title.trim().is_empty() {
        "Untitled controller".to_owned()
    } else {
        plain(&project.title)
    };
    let mut lines = vec![title.clone(), "=".repeat(title.chars().count()), String::new()];
    if let Some(merged) = alternatives.first().and_then(|a| a.design.merged.as_ref()) {
        let standing = if merged.bound.proved() { "smallest, proved" } else { "not proved smallest" };
        lines.push(format!(
            "{} primitive rows, {} merged rows ({standing})",
            merged.pairs.rows,
            merged.cover.len()
        ));
        lines.push(String::new());
    }
    let head = [
        "codes",
        "form",
        "shape",
        "bits",
        "spare",
        "path",
        "terms",
        "literals",
        "gates",
        "essential",
        "result",
    ];
    let mut rows = vec![head.map(str::to_owned).to_vec()];
    let mut reasons: Vec<(String, String)> = Vec::new();
    for alternative in alternatives {
        let (row, reason) = line(alternative);
        if row[3..10].iter().any(|cell| cell != "-") {
            rows.push(row);
        }
        if let Some(reason) = reason {
            reasons.push(reason);
        }
    }
    if rows.len() > 1 {
        lines.extend(align(&rows, "", &[3, 4, 5, 6, 7, 8, 9]));
        lines.push(String::new());
        lines.extend(legend());
    }
    if !reasons.is_empty() {
        lines.push(String::new());
        lines.push("Why not:".to_owned());
        for (what, why) in gathered(reasons) {
            lines.extend(wrap("  ", "      ", &format!("{what}: {why}")));
        }
    }
    while lines.last().is_some_and(String::is_empty) {
        lines.pop();
    }
    lines.join("\n") + "\n"
}

fn legend() -> Vec<String> {
    let text = "bits: state variables; spare: spare codes; path: steps of the longest way; terms: products or sums of all \
                functions; essential: essential hazards of single inputs and of bursts. proved: fewest rows, bits, terms and \
                literals, each for its method, and the proof holds.";
    wrap("", "", text)
}

/// The cells of an alternative, and what to say of it below the table.
fn line(alternative: &Alternative) -> (Vec<String>, Option<(String, String)>) {
    let Alternative { method, form, shape, design } = alternative;
    let cell = |number: Option<usize>| number.map_or("-".to_owned(), |n| n.to_string());
    let coded = design.coded.as_deref();
    let complete = design.equations.as_deref().filter(|e| e.clashes.is_empty());
    let row = vec![
        method_name(method).to_owned(),
        form_name(*form).to_owned(),
        shape_name(*shape).to_owned(),
        cell(coded.map(|c| c.bits)),
        cell(coded.map(|c| c.spare.len())),
        cell(coded.map(|c| c.longest_path)),
        cell(complete.map(|e| e.functions.iter().map(|f| f.products.len()).sum())),
        cell(design.cost.map(|c| c.literals)),
        cell(design.cost.map(|c| c.gates)),
        cell(complete.map(|e| e.essential.len() + e.burst_essential.len())),
        result(design).to_owned(),
    ];
    let reason = first_error(design).map(|text| {
        let what = if coded.is_none() {
            method_name(method).to_owned()
        } else {
            format!("{}, {}, {}", method_name(method), form_name(*form), shape_name(*shape))
        };
        (what, text)
    });
    (row, reason)
}

fn result(design: &Design) -> &'static str {
    if design.coded.is_none() {
        "does not apply"
    } else if !design.proved() {
        "fails"
    } else if smallest(design) {
        "proved"
    } else {
        "holds, not proved smallest"
    }
}

/// Whether every search of the design was finished.
fn smallest(design: &Design) -> bool {
    design.merged.as_ref().is_some_and(|m| m.bound == Bound::Proved)
        && design.coded.as_ref().is_some_and(|c| c.bound == Bound::Proved)
        && design.equations.as_ref().is_some_and(|e| e.functions.iter().all(|f| f.bound == Bound::Proved))
}

fn first_error(design: &Design) -> Option<String> {
    design.findings.iter().find(|f| f.level == Level::Error).map(|f| plain(&f.text))
}

/// The same reason once for all that it holds for, in order of first mention.
fn gathered(reasons: Vec<(String, String)>) -> Vec<(String, String)> {
    let mut out: Vec<(Vec<String>, String)> = Vec::new();
    for (what, why) in reasons {
        match out.iter_mut().find(|(_, w)| *w == why) {
            Some((whats, _)) if whats.contains(&what) => {}
            Some((whats, _)) => whats.push(what),
            None => out.push((vec![what], why)),
        }
    }
    out.into_iter().map(|(whats, why)| (whats.join("; "), why)).collect()
}
