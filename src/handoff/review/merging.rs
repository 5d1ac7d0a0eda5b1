//! Section Merging: implication table, maximal compatibles, the closed cover, the reduced table.

use std::collections::BTreeMap;

use crate::base::{Bound, Row};
use crate::handoff::plain::{align, counted, listed, wrap};
use crate::handoff::review::Page;
use crate::handoff::review::behaviour::{table_lines, table_lines_per_row, used_columns};
use crate::merge::values::{Merged, Pair, PairTable, Reduced, RowSet, Verdict};
use crate::project::choices::OutputStyle;
use crate::spec::values::{FlowTable, Spec};

/// Up to this many rows the implication table is drawn as a triangle.
const TRIANGLE: usize = 20;
/// Longest list of sets that is written out.
const LIST: usize = 40;
/// Widest text of a pair that gets a column of its own.
const SHORT: usize = 24;

pub fn write(page: &mut Page, spec: &Spec, merged: &Merged) {
    page.section("Merging");
    implication_table(page, spec, &merged.pairs);
    maximal_compatibles(page, &spec.table, merged);
    cover(page, &spec.table, merged);
    if let Some(reduced) = &merged.reduced {
        reduced_table(page, &spec.table, reduced);
    }
}

fn implication_table(page: &mut Page, spec: &Spec, pairs: &PairTable) {
    if pairs.rows < 2 {
        page.text("One row: nothing to merge.");
        return;
    }
    let mut counts = [0; 3];
    for pair in table_pairs(&spec.table) {
        counts[match pairs.verdict(pair.0, pair.1) {
            Verdict::Compatible => 0,
            Verdict::Conflict(_) => 1,
            Verdict::Struck { .. } => 2,
        }] += 1;
    }
    page.text(&format!(
        "Implication table: {}, {} compatible, {} with contradicting outputs, {} struck in {}.",
        counted(counts.iter().sum(), "pair", "pairs"),
        counts[0],
        counts[1],
        counts[2],
        counted(pairs.passes, "pass", "passes"),
    ));
    if pairs.rows <= TRIANGLE {
        page.gap();
        triangle(page, &spec.table, pairs);
        page.gap();
        reasons(page, spec, pairs);
    } else {
        page.gap();
        partners(page, &spec.table, pairs);
        page.gap();
        conditions(page, &spec.table, pairs);
    }
}

fn table_pairs(table: &FlowTable) -> impl Iterator<Item = (Row, Row)> + use<> {
    let rows = table.len();
    (1..rows).flat_map(|b| (0..b).map(move |a| (Row::new(a), Row::new(b))))
}

/// One character for each pair, rows numbered.
fn triangle(page: &mut Page, table: &FlowTable, pairs: &PairTable) {
    let last = pairs.rows - 1;
    let mut lines: Vec<Vec<String>> = Vec::new();
    for b in 1..pairs.rows {
        let row = Row::new(b);
        let marks = (0..b).map(|a| mark(&pairs.get(Row::new(a), row)).to_owned());
        lines.push([(b + 1).to_string(), table.name(row).to_owned()].into_iter().chain(marks).collect());
    }
    let numbers = (0..last).map(|a| (a + 1).to_string());
    lines.push([String::new(), String::new()].into_iter().chain(numbers).collect());
    page.lines(align(&lines, "  ", &[0]));
    page.line(format!("  (1 is {})", table.name(Row::new(0))));
    page.line(
        "  + compatible   ? compatible if what it implies is merged too   x outputs contradict   / struck",
    );
}

fn mark(pair: &Pair) -> &'static str {
    match pair.verdict {
        Verdict::Compatible if pair.implies.is_empty() => "+",
        Verdict::Compatible => "?",
        Verdict::Conflict(_) => "x",
        Verdict::Struck { .. } => "/",
    }
}

/// What stands behind the marks that are no plain `+`.
fn reasons(page: &mut Page, spec: &Spec, pairs: &PairTable) {
    let table = &spec.table;
    let mut lines: Vec<(String, String)> = Vec::new();
    for pair in pairs.iter() {
        let text = match pair.verdict {
            Verdict::Compatible if !pair.implies.is_empty() => {
                format!("? implies {}", implied(table, &pair, None))
            }
            Verdict::Struck { by, pass } => {
                let column = pair.implies.iter().find(|(p, _)| *p == by).map(|&(_, c)| table.column_text(c));
                let column = column.map_or(String::new(), |c| format!(" (column {c})"));
                let others = implied(table, &pair, Some(by));
                let others = if others.is_empty() { others } else { format!("; implies {others} too") };
                format!("/ in pass {pass}, by {}{column}{others}", pair_text(table, by))
            }
            _ => continue,
        };
        lines.push((pair_text(table, (pair.a, pair.b)), text));
    }
    let widest = lines.iter().map(|(p, _)| p.chars().count()).max().unwrap_or(0);
    // Long names are not worth a column of their own.
    let width = if widest <= SHORT { widest } else { 0 };
    let rest = " ".repeat(width + 6);
    for (pair, text) in lines {
        let pad = width.saturating_sub(pair.chars().count());
        page.lines(wrap(&format!("  {pair}{}  ", " ".repeat(pad)), &rest, &text));
    }
    conflicts(page, spec, pairs);
}

/// The contradictions, gathered by output and column.
fn conflicts(page: &mut Page, spec: &Spec, pairs: &PairTable) {
    let number = pairs.iter().filter(|p| matches!(p.verdict, Verdict::Conflict(_))).count();
    if number > LIST {
        page.line(format!(
            "  x {number} pairs with contradicting outputs; which output and where is in the record"
        ));
        return;
    }
    let mut places: BTreeMap<(usize, Option<String>), Vec<String>> = BTreeMap::new();
    for pair in pairs.iter() {
        if let Verdict::Conflict(conflict) = pair.verdict {
            let place = (conflict.output, conflict.column.map(|c| spec.table.column_text(c)));
            places.entry(place).or_default().push(pair_text(&spec.table, (pair.a, pair.b)));
        }
    }
    for ((output, column), rows) in places {
        let output = spec.signals.outputs.get(output).map_or("?", String::as_str);
        let place = column.map_or("of their rows".to_owned(), |c| format!("in column {c}"));
        page.lines(wrap("  ", "      ", &format!("x {output} {place} contradicts: {}", rows.join(" "))));
    }
}

/// What a pair implies, without the pair that is named already.
fn implied(table: &FlowTable, pair: &Pair, named: Option<(Row, Row)>) -> String {
    let texts: Vec<String> = pair
        .implies
        .iter()
        .filter(|(p, _)| Some(*p) != named)
        .map(|(p, column)| format!("{} (column {})", pair_text(table, *p), table.column_text(*column)))
        .collect();
    listed(&texts)
}

fn pair_text(table: &FlowTable, (a, b): (Row, Row)) -> String {
    format!("{{{}, {}}}", table.name(a), table.name(b))
}

/// For each row the later rows that it is compatible with.
fn partners(page: &mut Page, table: &FlowTable, pairs: &PairTable) {
    page.line("Compatible with later rows (? only if what the pair implies is merged too):");
    for a in table.rows() {
        let texts: Vec<String> = table
            .rows()
            .skip(a.at() + 1)
            .filter(|&b| pairs.compatible(a, b))
            .map(|b| format!("{}{}", table.name(b), if pairs.implies(a, b).is_empty() { "" } else { "?" }))
            .collect();
        if !texts.is_empty() {
            page.lines(wrap(&format!("  {}: ", table.name(a)), "      ", &texts.join(", ")));
        }
    }
}

/// What the compatible pairs of a large table imply.
fn conditions(page: &mut Page, table: &FlowTable, pairs: &PairTable) {
    let bound: Vec<Pair> = table_pairs(table)
        .filter(|&(a, b)| pairs.compatible(a, b))
        .map(|(a, b)| pairs.get(a, b))
        .filter(|p| !p.implies.is_empty())
        .collect();
    if bound.is_empty() {
        return;
    }
    page.line("What compatible pairs imply:");
    for pair in bound.iter().take(LIST) {
        let texts: Vec<String> = pair.implies.iter().map(|(p, _)| pair_text(table, *p)).collect();
        page.lines(wrap(
            &format!("  {} implies ", pair_text(table, (pair.a, pair.b))),
            "      ",
            &listed(&texts),
        ));
    }
    more(page, bound.len());
}

fn more(page: &mut Page, all: usize) {
    if all > LIST {
        page.line(format!("  and {} more, in the record", all - LIST));
    }
}

fn set_text(table: &FlowTable, set: &RowSet) -> String {
    let names: Vec<&str> = set.ones().map(|i| table.name(Row::new(i))).collect();
    format!("{{{}}}", names.join(", "))
}

fn maximal_compatibles(page: &mut Page, table: &FlowTable, merged: &Merged) {
    page.gap();
    if !merged.maximal_complete {
        page.text("Maximal compatibles: more than can be listed.");
        return;
    }
    page.line(format!("Maximal compatibles: {}", merged.maximal.len()));
    for (i, set) in merged.maximal.iter().take(LIST).enumerate() {
        let needs: Vec<String> =
            merged.class_sets.get(i).into_iter().flatten().map(|s| set_text(table, s)).collect();
        let tail = if needs.is_empty() { String::new() } else { format!("  needs {}", listed(&needs)) };
        page.lines(wrap("  ", "      ", &format!("{}{tail}", set_text(table, set))));
    }
    more(page, merged.maximal.len());
}

fn cover(page: &mut Page, table: &FlowTable, merged: &Merged) {
    page.gap();
    let size = merged.cover.len();
    let standing = match merged.bound {
        Bound::Proved => "smallest, proved".to_owned(),
        Bound::Stopped { lower } => {
            format!("not proved smallest: between {} and {size} are needed", lower.max(merged.lower_bound))
        }
    };
    page.line(format!("Closed cover: {}, {standing}", counted(size, "set", "sets")));
    if merged.clique.len() == size && size > 1 {
        let names: Vec<&str> = merged.clique.iter().map(|&r| table.name(r)).collect();
        page.lines(wrap("  ", "  ", &format!("no two of the rows {} can be merged", listed(&names))));
    }
    if !merged.further.is_empty() {
        page.line(format!("Further covers of this size: {}", merged.further.len()));
        for cover in &merged.further {
            let sets: Vec<String> = cover.iter().map(|s| set_text(table, s)).collect();
            page.lines(wrap("  ", "      ", &sets.join(" ")));
        }
    }
    if merged.reduced.is_none() {
        for set in &merged.cover {
            page.lines(wrap("  ", "      ", &set_text(table, set)));
        }
        page.text("The cover cannot be used; the findings say why.");
    }
}

fn reduced_table(page: &mut Page, primitive: &FlowTable, reduced: &Reduced) {
    let table = &reduced.table;
    let origins: Vec<(String, String)> = table
        .rows()
        .map(|r| {
            let names: Vec<&str> = reduced.members[r.at()].iter().map(|&m| primitive.name(m)).collect();
            (table.name(r).to_owned(), format!("{{{}}}", names.join(", ")))
        })
        .collect();
    let width = origins.iter().map(|(n, _)| n.chars().count()).max().unwrap_or(0);
    for (name, members) in origins {
        let pad = " ".repeat(width - name.chars().count());
        page.lines(wrap(&format!("  {name}{pad} = "), &" ".repeat(width + 6), &members));
    }
    page.gap();
    page.text(&format!(
        "Reduced flow table: {}, starts in row {}, column {}{}.",
        counted(table.len(), "row", "rows"),
        table.name(reduced.initial.row),
        table.column_text(reduced.initial.column),
        if reduced.outputs == OutputStyle::PerRow { ", outputs belong to rows" } else { "" }
    ));
    page.gap();
    let columns = used_columns(table, false);
    page.lines(match reduced.outputs {
        OutputStyle::PerCell => table_lines(table, &columns, |_, _| ""),
        OutputStyle::PerRow => table_lines_per_row(table, &columns),
    });
}
