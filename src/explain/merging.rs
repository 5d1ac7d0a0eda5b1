//! Why for pairs, compatibles and merged rows.

use crate::base::{Column, Row};
use crate::design::values::{Design, Pick};
use crate::explain::{Piece, Why, link, listed, text};
use crate::merge::values::{Conflict, RowSet, Verdict};
use crate::spec::values::Spec;

/// Two rows: can they merge, and why not.
pub(crate) fn pair(design: &Design, a: Row, b: Row) -> Option<Why> {
    let (spec, merged) = (design.spec.as_ref()?, design.merged.as_ref()?);
    if a == b || a.at().max(b.at()) >= spec.table.len() {
        return None;
    }
    let pair = merged.pairs.get(a, b);
    let (a, b) = (pair.a, pair.b);
    let table = &spec.table;
    let mut why = Why::titled(format!("Rows {} and {}", table.name(a), table.name(b)));
    let both = |p: Row, q: Row| link(format!("{} and {}", table.name(p), table.name(q)), Pick::Pair(p, q));
    match pair.verdict {
        Verdict::Compatible if pair.implies.is_empty() => {
            why.sentences
                .push(vec![text("They can merge, whatever else is merged: no column contradicts. ")]);
        }
        Verdict::Compatible => {
            let mut sentence = vec![text("They can merge if these merge too: ")];
            sentence.extend(listed(pair.implies.iter().map(|&((p, q), _)| both(p, q)).collect()));
            sentence.push(text(". "));
            why.sentences.push(sentence);
        }
        Verdict::Conflict(Conflict { column, output }) => {
            why.sentences.push(conflict(spec, a, b, column, output));
        }
        Verdict::Struck { by: (p, q), pass } => {
            why.sentences.push(vec![
                text("They cannot merge: merging them asks for "),
                both(p, q),
                text(format!(", and those cannot merge. Found in pass {pass}. ")),
            ]);
        }
    }
    for &((p, q), column) in &pair.implies {
        why.sentences.push(vec![
            text(format!("Column {}: ", table.column_text(column))),
            link(table.name(a), Pick::Cell(a, column)),
            text(format!(" leads to {}, ", table.next(a, column).map_or("-", |r| table.name(r)))),
            link(table.name(b), Pick::Cell(b, column)),
            text(format!(" to {}; ", table.next(b, column).map_or("-", |r| table.name(r)))),
            both(p, q),
            text(" must go together. "),
        ]);
    }
    Some(why)
}

fn conflict(spec: &Spec, a: Row, b: Row, column: Option<Column>, output: usize) -> Vec<Piece> {
    let table = &spec.table;
    let signal = &spec.signals.outputs[output];
    let Some(column) = column else {
        return vec![text(format!(
            "They cannot merge: output {signal} differs between the rows, and outputs belong to rows. "
        ))];
    };
    let value = |r: Row| u8::from(table.cell(r, column).outputs.get(output) == Some(true));
    vec![
        text(format!(
            "They cannot merge: in column {} output {signal} is {} in ",
            table.column_text(column),
            value(a)
        )),
        link(table.name(a), Pick::Cell(a, column)),
        text(format!(" and {} in ", value(b))),
        link(table.name(b), Pick::Cell(b, column)),
        text(". "),
    ]
}

fn rows(spec: &Spec, set: &RowSet) -> Vec<Piece> {
    listed(set.ones().map(Row::new).map(|r| link(spec.table.name(r), Pick::Row(r))).collect())
}

/// A maximal compatible with its class set.
pub(crate) fn compatible(design: &Design, index: usize) -> Option<Why> {
    let (spec, merged) = (design.spec.as_ref()?, design.merged.as_ref()?);
    let set = merged.maximal.get(index)?;
    let mut why = Why::titled("Maximal compatible");
    let mut sentence = rows(spec, set);
    sentence.push(text(": every two of them are compatible, and no further row is with all. "));
    why.sentences.push(sentence);
    let implied = merged.class_sets.get(index).map_or(&[][..], Vec::as_slice);
    if implied.is_empty() {
        why.sentences.push(vec![text("It implies nothing: it can be chosen by itself. ")]);
    }
    for class in implied {
        let mut sentence = vec![text("If it is chosen, these must lie together in one chosen set: ")];
        sentence.extend(rows(spec, class));
        sentence.push(text(". "));
        why.sentences.push(sentence);
    }
    Some(why)
}

/// A merged row: what it came from, and whether fewer rows would do.
pub(crate) fn merged_row(design: &Design, row: Row) -> Option<Why> {
    let (spec, merged) = (design.spec.as_ref()?, design.merged.as_ref()?);
    let reduced = merged.reduced.as_ref()?;
    let members = reduced.members.get(row.at())?;
    let mut why = Why::titled(format!("Merged row {}", reduced.table.name(row)));
    let mut sentence = vec![text("Made of ")];
    sentence.extend(listed(members.iter().map(|&r| link(spec.table.name(r), Pick::Row(r))).collect()));
    sentence.push(text(". "));
    why.sentences.push(sentence);
    let sets = merged.cover.len();
    why.sentences.push(if merged.bound.proved() {
        let clique = &merged.clique;
        if clique.len() == sets && sets > 1 {
            let mut sentence = vec![text(format!("{sets} merged rows are the fewest possible: no two of "))];
            sentence.extend(listed(clique.iter().map(|&r| link(spec.table.name(r), Pick::Row(r))).collect()));
            sentence.push(text(" can share one. "));
            sentence
        } else {
            vec![text(format!("{sets} merged rows are the fewest possible: the search through smaller closed covers ended without one. "))]
        }
    } else {
        vec![text(format!(
            "{sets} merged rows are not proved smallest; at least {} are needed. ",
            merged.lower_bound
        ))]
    });
    Some(why)
}

/// A cell of the reduced table: the primitive cells that it was made of.
pub(crate) fn merged_cell(design: &Design, row: Row, column: Column) -> Option<Why> {
    let (spec, merged) = (design.spec.as_ref()?, design.merged.as_ref()?);
    let reduced = merged.reduced.as_ref()?;
    let members = reduced.members.get(row.at())?;
    let table = &reduced.table;
    if column.at() >= 1 << table.inputs {
        return None;
    }
    let mut why = Why::titled(format!("Cell {}, {}", table.name(row), table.column_text(column)));
    let cell = table.cell(row, column);
    let asking: Vec<_> = members
        .iter()
        .filter(|&&r| spec.table.next(r, column).is_some())
        .map(|&r| link(spec.table.name(r), Pick::Cell(r, column)))
        .collect();
    let Some(next) = cell.next else {
        why.sentences.push(vec![text("Unspecified in every member. ")]);
        return Some(why);
    };
    let mut sentence = vec![text(if next == row { "Stays, because of " } else { "Goes on, because of " })];
    sentence.extend(listed(asking));
    if next != row {
        sentence.push(text(" to "));
        sentence.push(link(table.name(next), Pick::MergedCell(next, column)));
        sentence.push(text(", the first merged row that holds all their next rows and rests in this column"));
    }
    sentence.push(text(format!(". Outputs {}. ", cell.outputs.text(table.outputs))));
    why.sentences.push(sentence);
    Some(why)
}
