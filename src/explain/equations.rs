//! Why for functions, products and points of a map.

use crate::base::{Code, Column};
use crate::design::values::{Design, Pick};
use crate::explain::{Piece, Why, link, text};
use crate::logic::values::{Equations, Phase, Transition};
use crate::merge::values::Reduced;
use crate::project::choices::Shape;

fn parts(design: &Design) -> Option<(&Reduced, &Equations)> {
    Some((design.merged.as_ref()?.reduced.as_ref()?, design.equations.as_ref()?))
}

/// A function: its size and how sure that is.
pub(crate) fn function(design: &Design, index: usize) -> Option<Why> {
    let (_, equations) = parts(design)?;
    let f = equations.functions.get(index)?;
    let mut why = Why::titled(format!("Function {}", f.name));
    let kind = word(equations.shape);
    let hazard = f.products.iter().filter(|p| p.hazard_only).count();
    why.sentences.push(vec![text(format!(
        "{} {kind}{} with {} literals; {}. ",
        f.products.len(),
        if f.products.len() == 1 { "" } else { "s" },
        f.literals(),
        if f.bound.proved() { "no smaller form is free of hazards" } else { "not proved smallest" }
    ))]);
    if hazard > 0 {
        why.sentences.push(vec![text(format!(
            "{hazard} of them {} there for hazards alone: the values would be right without.",
            if hazard == 1 { "is" } else { "are" }
        ))]);
    }
    Some(why)
}

/// A product: the transitions that only it holds.
pub(crate) fn product(design: &Design, f: usize, p: usize) -> Option<Why> {
    let (reduced, equations) = parts(design)?;
    let function = equations.functions.get(f)?;
    let product = function.products.get(p)?;
    let kind = word(equations.shape);
    let mut why = Why::titled(format!("{} of {}", capital(kind), function.name));
    if product.hazard_only {
        why.sentences.push(vec![text(format!(
            "There for hazards alone: without this {kind} every value is right, but {} can glitch. ",
            function.name
        ))]);
    }
    let held = if equations.shape == Shape::SumOfProducts { 1 } else { 0 };
    let mut seen = Vec::new();
    for &required in &product.alone {
        for &t in &function.required[required].why {
            if !seen.contains(&t) {
                seen.push(t);
            }
        }
        if function.required[required].why.is_empty() {
            let cube = function.required[required].cube.text(equations.variables.len());
            why.sentences.push(vec![text(format!("It alone gives the value {held} at {cube}. "))]);
        }
    }
    const SHOWN: usize = 6;
    for &t in seen.iter().take(SHOWN) {
        let mut sentence = vec![text(format!("It alone keeps {} at {held} ", function.name))];
        sentence.extend(transition(reduced, equations, &function.transitions[t]));
        why.sentences.push(sentence);
    }
    if seen.len() > SHOWN {
        why.sentences.push(vec![text(format!("And in {} further transitions. ", seen.len() - SHOWN))]);
    }
    if product.alone.is_empty() {
        why.sentences.push(vec![text(format!(
            "Each transition that it holds is held by another {kind} too; together they are the fewest. "
        ))]);
    }
    Some(why)
}

/// A point of a map.
pub(crate) fn point(design: &Design, f: usize, point: u32) -> Option<Why> {
    let (_, equations) = parts(design)?;
    let function = equations.functions.get(f)?;
    let n = equations.variables.len();
    let column = Column((point & ((1 << equations.inputs) - 1)) as u16);
    let code = Code(point >> equations.inputs);
    let mut why = Why::titled(format!("{} at {}", function.name, crate::base::index::bits_text(point, n)));
    let on = function.on.iter().any(|c| c.holds(point));
    let off = function.off.iter().any(|c| c.holds(point));
    let entry = link("this entry of the encoded table", Pick::Entry(code, column));
    why.sentences.push(match (on, off) {
        (true, _) => vec![text("Must be 1, as "), entry, text(" says. ")],
        (_, true) => vec![text("Must be 0, as "), entry, text(" says. ")],
        _ => vec![
            text(format!(
                "Free; the chosen form makes it {}. See ",
                u8::from(function.value(equations.shape, point))
            )),
            entry,
            text(". "),
        ],
    });
    Some(why)
}

/// `while low falls in row B`, `while the state goes from A to B in column 01`.
pub(crate) fn transition(reduced: &Reduced, equations: &Equations, t: &Transition) -> Vec<Piece> {
    let Some(&m) = reduced.moves.get(t.cause) else { return vec![text(". ")] };
    let table = &reduced.table;
    match t.phase {
        Phase::Input => {
            let changed = (t.start ^ t.end) & ((1 << equations.inputs) - 1);
            let names: Vec<String> = (0..equations.inputs)
                .filter(|i| changed >> i & 1 == 1)
                .map(|i| {
                    let verb = if t.end >> i & 1 == 1 { "rises" } else { "falls" };
                    format!("{} {verb}", equations.variables[i])
                })
                .collect();
            vec![
                text(format!("while {} in row ", names.join(" and "))),
                link(table.name(m.from.row), Pick::MergedCell(m.from.row, m.column)),
                text(". "),
            ]
        }
        Phase::State(_) => vec![
            text("while the state goes from "),
            link(table.name(m.from.row), Pick::MergedCell(m.from.row, m.column)),
            text(" to "),
            link(table.name(m.to), Pick::MergedCell(m.to, m.column)),
            text(format!(" in column {}. ", table.column_text(m.column))),
        ],
    }
}

fn word(shape: Shape) -> &'static str {
    match shape {
        Shape::SumOfProducts => "product",
        Shape::ProductOfSums => "sum",
    }
}

fn capital(word: &str) -> String {
    word[..1].to_uppercase() + &word[1..]
}
