//! Section Equations: every function with the reason for each of its terms, and the essential hazards.

use crate::base::Bound;
use crate::codes::values::Coded;
use crate::handoff::notation::{Notation, joint, term, terms};
use crate::handoff::plain::{WIDTH, counted, listed, wrap};
use crate::handoff::review::Page;
use crate::handoff::words::{form_name, gathered, hazard_words, racing_variables, reasons, shape_name};
use crate::logic::values::{Equations, EssentialHazard, Function};
use crate::merge::values::Reduced;
use crate::project::choices::Shape;

/// Most places that are written out for what a term does.
const REASONS: usize = 3;

pub fn write(page: &mut Page, reduced: &Reduced, coded: &Coded, equations: &Equations, notation: Notation) {
    page.section("Equations");
    page.text(&format!(
        "Form: {}. Shape: {}{}.",
        form_name(equations.form),
        shape_name(equations.shape),
        if equations.shared { ", terms shared between functions" } else { "" }
    ));
    page.gap();
    let name_width = equations.functions.iter().map(|f| f.name.chars().count()).max().unwrap_or(0);
    for function in &equations.functions {
        equation(page, equations, function, notation, name_width);
    }
    for function in &equations.functions {
        terms_with_reasons(page, reduced, equations, function, notation);
    }
    for clash in &equations.clashes {
        page.gap();
        page.text(&format!("{} has no hazard-free form: {}", clash.function, clash.text));
        for transition in &clash.transitions {
            page.lines(wrap("  ", "      ", transition));
        }
    }
    for note in &equations.notes {
        page.gap();
        page.text(&format!("Note: {note}."));
    }
    essential(page, reduced, coded, equations);
}

/// `Y1 = ..`, broken between terms where it is too long.
fn equation(
    page: &mut Page,
    equations: &Equations,
    function: &Function,
    notation: Notation,
    name_width: usize,
) {
    let pad = " ".repeat(name_width - function.name.chars().count());
    let mut line = format!("  {}{pad} =", function.name);
    let indent = " ".repeat(name_width + 4);
    let joint = joint(notation, equations.shape);
    // A joint without blanks (the textbook's dot) still may end a line.
    let (tight, sign) = (joint.trim() == joint, joint.trim());
    for (i, text) in terms(notation, equations, function).iter().enumerate() {
        let piece = match (i, tight) {
            (0, _) => format!(" {text}"),
            (_, true) => format!("{sign}{text}"),
            (_, false) => format!(" {sign} {text}"),
        };
        if i > 0 && line.chars().count() + piece.chars().count() > WIDTH {
            page.line(std::mem::replace(&mut line, indent.clone()));
            line.push_str(&format!("{sign} {text}"));
        } else {
            line.push_str(&piece);
        }
    }
    page.line(line);
}

fn terms_with_reasons(
    page: &mut Page,
    reduced: &Reduced,
    equations: &Equations,
    function: &Function,
    notation: Notation,
) {
    page.gap();
    let (one, many) = match equations.shape {
        Shape::SumOfProducts => ("product", "products"),
        Shape::ProductOfSums => ("sum", "sums"),
    };
    let number = function.products.len();
    let standing = match function.bound {
        Bound::Proved => "fewest, proved".to_owned(),
        Bound::Stopped { lower } if lower < number => {
            format!("not proved fewest: between {lower} and {number} are needed")
        }
        Bound::Stopped { .. } => "fewest; that no fewer literals do is not proved".to_owned(),
    };
    page.line(format!(
        "{}: {}, {}; {standing}",
        function.name,
        counted(number, one, many),
        counted(function.literals(), "literal", "literals"),
    ));
    let texts: Vec<String> = function.products.iter().map(|p| term(notation, equations, p.cube)).collect();
    let width = texts.iter().map(|t| t.chars().count()).max().unwrap_or(0).min(40);
    for (product, text) in function.products.iter().zip(&texts) {
        let mut told = gathered(&reasons(equations, reduced, function, product), REASONS);
        if product.hazard_only {
            told = format!("for hazards alone: {told}");
        }
        let pad = " ".repeat(width.saturating_sub(text.chars().count()));
        page.lines(wrap(&format!("  {text}{pad}  "), &" ".repeat(width + 6), &told));
    }
}

fn essential(page: &mut Page, reduced: &Reduced, coded: &Coded, equations: &Equations) {
    page.gap();
    let kinds = [
        ("Essential hazards", &equations.essential),
        ("Essential hazards of bursts", &equations.burst_essential),
        (
            "Hazards of the same kind in the finished functions, where the table is open",
            &equations.implementation,
        ),
    ];
    if kinds.iter().all(|(_, list)| list.is_empty()) {
        page.text("Essential hazards: none.");
        return;
    }
    let inputs = &equations.variables[..equations.inputs];
    for (title, list) in kinds.iter().filter(|(_, list)| !list.is_empty()) {
        page.line(format!("{title}: {}", list.len()));
        for hazard in *list {
            page.lines(wrap("  ", "      ", &remedy(inputs, reduced, coded, hazard)));
        }
    }
}

fn remedy(inputs: &[String], reduced: &Reduced, coded: &Coded, hazard: &EssentialHazard) -> String {
    let place = hazard_words(inputs, reduced, hazard);
    let racing = racing_variables(coded, hazard);
    let changed: Vec<&str> = inputs
        .iter()
        .enumerate()
        .filter(|(i, _)| (hazard.column.0 ^ hazard.to.0) >> i & 1 == 1)
        .map(|(_, name)| name.as_str())
        .collect();
    if racing.is_empty() {
        return place;
    }
    format!(
        "{place}: the feedback of {} must be slower than every direct way of {}",
        listed(&racing),
        listed(&changed)
    )
}
