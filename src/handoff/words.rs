//! Moves, changes and reasons in words.

use crate::base::{Column, Finding, Level};
use crate::codes::values::Coded;
use crate::handoff::plain::{listed, plain};
use crate::logic::values::{
    Cube, Equations, EssentialHazard, Function, Phase, Product, Required, Transition, mask,
};
use crate::merge::values::Reduced;
use crate::project::choices::{Form, Method, Shape};

/// A finding on one line: `error: text (row a, column 01)`.
pub fn finding_line(finding: &Finding) -> String {
    let mut place = Vec::new();
    if let Some(row) = &finding.at.row {
        place.push(format!("row {}", plain(row)));
    }
    if let Some(column) = &finding.at.column {
        place.push(format!("column {}", plain(column)));
    }
    let place = if place.is_empty() { String::new() } else { format!(" ({})", place.join(", ")) };
    format!("{}: {}{place}", finding.level.word(), plain(&finding.text))
}

/// How many findings there are of each level: `1 error, 2 open questions`; `nothing found` if there are none.
pub fn tally(findings: &[Finding]) -> String {
    let words = [
        (Level::Error, "error", "errors"),
        (Level::Warning, "warning", "warnings"),
        (Level::Question, "open question", "open questions"),
        (Level::Note, "note", "notes"),
    ];
    let parts: Vec<String> = words
        .iter()
        .map(|&(level, one, many)| (findings.iter().filter(|f| f.level == level).count(), one, many))
        .filter(|&(number, ..)| number > 0)
        .map(|(number, one, many)| format!("{number} {}", if number == 1 { one } else { many }))
        .collect();
    if parts.is_empty() { "nothing found".to_owned() } else { parts.join(", ") }
}

/// A method's name in running text.
pub fn method_name(method: &Method) -> &'static str {
    match method {
        Method::Adjacency => "adjacency",
        Method::SharedRow => "shared row",
        Method::SingleStep => "single step",
        Method::OneHot => "one hot",
        Method::MultipleRow => "multiple row",
        Method::ByHand(_) => "by hand",
    }
}

/// A form's name in running text.
pub fn form_name(form: Form) -> &'static str {
    match form {
        Form::Feedback => "feedback",
        Form::SetReset => "set/reset latch",
        Form::CElement => "C-element",
    }
}

/// A shape's name in running text.
pub fn shape_name(shape: Shape) -> &'static str {
    match shape {
        Shape::SumOfProducts => "sum of products",
        Shape::ProductOfSums => "product of sums",
    }
}

/// `D rises`, `D rises and G falls`: what changes between two points, in the names of the variables.
pub fn change(variables: &[String], start: u32, end: u32) -> String {
    let parts: Vec<String> = variables
        .iter()
        .enumerate()
        .filter(|(i, _)| (start ^ end) >> i & 1 == 1)
        .map(|(i, name)| format!("{name} {}", if end >> i & 1 == 1 { "rises" } else { "falls" }))
        .collect();
    listed(&parts)
}

/// `D falls`: an input change in words.
pub fn input_change(inputs: &[String], from: Column, to: Column) -> String {
    change(inputs, u32::from(from.0), u32::from(to.0))
}

/// `D = 1, y1 = 0`: the points of a cube.
pub fn cube_words(variables: &[String], cube: Cube) -> String {
    let parts: Vec<String> = variables
        .iter()
        .enumerate()
        .filter(|(i, _)| cube.care >> i & 1 == 1)
        .map(|(i, name)| format!("{name} = {}", cube.ones >> i & 1))
        .collect();
    if parts.is_empty() { "every point".to_owned() } else { parts.join(", ") }
}

/// A reason for a product: what it does, and in which change or at which points.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reason {
    /// `keeps Y1 at 1 while`, `makes Y1 1 at`.
    pub duty: String,
    /// `D falls (row A, column 10)`, `D = 1, y1 = 0`; empty where the duty says all.
    pub place: String,
}

impl Reason {
    /// Both parts on one line.
    pub fn text(&self) -> String {
        format!("{} {}", self.duty, self.place).trim_end().to_owned()
    }
}

/// Why a product or sum stands in its function: what it alone holds, without repeats.
pub fn reasons(
    equations: &Equations,
    reduced: &Reduced,
    function: &Function,
    product: &Product,
) -> Vec<Reason> {
    let mut all: Vec<Reason> = Vec::new();
    for required in product.alone.iter().filter_map(|&i| function.required.get(i)) {
        for reason in asked_by(equations, reduced, function, required) {
            if !all.contains(&reason) {
                all.push(reason);
            }
        }
    }
    if all.is_empty() {
        let duty = if equations.shared {
            "holds nothing alone here: taken over from another function"
        } else {
            "what it holds is held by others too, but not all of it by the same ones"
        };
        all.push(Reason { duty: duty.to_owned(), place: String::new() });
    }
    all
}

/// Reasons with the same duty said in one breath, `most` places of each: `keeps Y1 at 1 while a, b and 3 more`.
pub fn gathered(reasons: &[Reason], most: usize) -> String {
    let mut groups: Vec<(&str, Vec<&str>)> = Vec::new();
    for reason in reasons {
        match groups.iter_mut().find(|(duty, _)| *duty == reason.duty) {
            Some((_, places)) => places.push(&reason.place),
            None => groups.push((&reason.duty, vec![&reason.place])),
        }
    }
    let texts: Vec<String> = groups
        .iter()
        .map(|(duty, places)| {
            let more = places.len().saturating_sub(most);
            let mut told: Vec<String> = places.iter().take(most).map(|p| (*p).to_owned()).collect();
            if more > 0 {
                told.push(format!("{more} more"));
            }
            format!("{duty} {}", listed(&told)).trim_end().to_owned()
        })
        .collect();
    texts.join("; ")
}

/// What asks for a required cube.
fn asked_by(
    equations: &Equations,
    reduced: &Reduced,
    function: &Function,
    required: &Required,
) -> Vec<Reason> {
    if required.why.is_empty() {
        let value = u8::from(equations.shape == Shape::SumOfProducts);
        let duty = format!("makes {} {value} at", function.name);
        return vec![Reason { duty, place: cube_words(&equations.variables, required.cube) }];
    }
    required
        .why
        .iter()
        .filter_map(|&t| function.transitions.get(t))
        .map(|t| transition_words(equations, reduced, function, t))
        .collect()
}

/// What a function must do in a transition.
fn transition_words(equations: &Equations, reduced: &Reduced, function: &Function, t: &Transition) -> Reason {
    let name = &function.name;
    let duty = match t.values {
        (true, true) => format!("keeps {name} at 1 while"),
        (false, false) => format!("keeps {name} at 0 while"),
        (false, true) => format!("lets {name} rise once while"),
        (true, false) => format!("lets {name} fall once while"),
    };
    let what = change(&equations.variables, t.start, t.end);
    let Some(cause) = reduced.moves.get(t.cause) else {
        return Reason { duty, place: what };
    };
    let table = &reduced.table;
    let place = match t.phase {
        Phase::Input => {
            let column = Column((t.start & mask(equations.inputs)) as u16);
            format!("{what} (row {}, column {})", table.name(cause.from.row), table.column_text(column))
        }
        Phase::State(_) => format!(
            "{what} (row {} to {}, column {})",
            table.name(cause.from.row),
            table.name(cause.to),
            table.column_text(cause.column)
        ),
    };
    Reason { duty, place }
}

/// Where an essential hazard stands: `row A, column 00, D rises`, and for bursts what the far end may still see.
pub fn hazard_words(inputs: &[String], reduced: &Reduced, hazard: &EssentialHazard) -> String {
    let table = &reduced.table;
    let mut text = format!(
        "row {}, column {}, {}",
        table.name(hazard.row),
        table.column_text(hazard.column),
        input_change(inputs, hazard.column, hazard.to)
    );
    if hazard.seen != hazard.column {
        text.push_str(&format!(" (while {} is still seen)", table.column_text(hazard.seen)));
    }
    text
}

/// State variables that change after the input change of an essential hazard, as names: it is their feedback that races
/// the input.
pub fn racing_variables(coded: &Coded, hazard: &EssentialHazard) -> Vec<String> {
    let mut bits = 0;
    for way in coded.ways.iter().filter(|w| w.from == hazard.row && w.column == hazard.to) {
        for code in &way.path {
            bits |= code.0 ^ way.path[0].0;
        }
    }
    (0..coded.bits).filter(|i| bits >> i & 1 == 1).map(|i| format!("y{}", i + 1)).collect()
}
