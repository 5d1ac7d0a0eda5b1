//! Why for rows and cells of the primitive table.

use crate::base::{Column, Row};
use crate::design::values::{Design, Pick};
use crate::explain::{Why, findings_at, link, listed, text};

/// A row: where it rests, how it is reached, how it is left.
pub(crate) fn row(design: &Design, row: Row) -> Option<Why> {
    let spec = design.spec.as_ref()?;
    if row.at() >= spec.table.len() {
        return None;
    }
    let name = spec.table.name(row);
    let mut why = Why::titled(format!("Row {name}"));
    let stable: Vec<_> = spec
        .given
        .columns()
        .filter(|&c| spec.given.stable(row, c))
        .map(|c| link(spec.table.column_text(c), Pick::Cell(row, c)))
        .collect();
    let mut sentence = vec![text("Rests in column ")];
    sentence.extend(listed(stable));
    sentence.push(text(". "));
    why.sentences.push(sentence);
    let entered: Vec<_> = spec
        .moves
        .iter()
        .filter(|m| m.to == row && m.from.row != row)
        .map(|m| link(spec.table.name(m.from.row), Pick::Cell(m.from.row, m.column)))
        .collect();
    let mut sentence =
        vec![text(if entered.is_empty() { "Never entered from another row" } else { "Entered from " })];
    sentence.extend(listed(entered));
    if spec.initial.row == row {
        sentence.push(text("; here after power-up"));
    }
    sentence.push(text(". "));
    why.sentences.push(sentence);
    for finding in findings_at(design, name, None) {
        why.sentences.push(vec![text(format!("{}: {} ", finding.level.word(), finding.text))]);
    }
    if let Some(reduced) = design.merged.as_ref().and_then(|m| m.reduced.as_ref()) {
        let homes: Vec<_> = reduced
            .table
            .rows()
            .filter(|r| reduced.members[r.at()].contains(&row))
            .map(|r| link(reduced.table.name(r), Pick::Merged(r)))
            .collect();
        let mut sentence = vec![text("Lives in merged row ")];
        sentence.extend(listed(homes));
        sentence.push(text(". "));
        why.sentences.push(sentence);
    }
    Some(why)
}

/// A cell: what happens there, and when.
pub(crate) fn cell(design: &Design, row: Row, column: Column) -> Option<Why> {
    let spec = design.spec.as_ref()?;
    if row.at() >= spec.table.len() || column.at() >= 1 << spec.table.inputs {
        return None;
    }
    let (name, at) = (spec.table.name(row), spec.table.column_text(column));
    let mut why = Why::titled(format!("Cell {name}, {at}"));
    let given = spec.given.cell(row, column);
    let used = spec.table.cell(row, column);
    let outputs = used.outputs.text(spec.table.outputs);
    why.sentences.push(match (given.next, used.next) {
        (Some(next), _) if next == row => {
            vec![text(format!("Stable: the controller rests here with outputs {outputs}. "))]
        }
        (Some(next), Some(last)) if next != last => vec![
            text("Leads through "),
            link(spec.table.name(next), Pick::Row(next)),
            text(" on to "),
            link(spec.table.name(last), Pick::Cell(last, column)),
            text("; the chain is replaced by its last row. "),
        ],
        (Some(next), _) => vec![
            text("Unstable: the controller goes on to "),
            link(spec.table.name(next), Pick::Cell(next, column)),
            text(format!(", outputs on the way {outputs}. ")),
        ],
        (None, _) if used.inner => {
            vec![text("Passed in the middle of a burst: the row stays, its outputs hold. ")]
        }
        (None, _) => vec![text("Unspecified: a promise that this input change never happens here. ")],
    });
    if given.outputs != used.outputs && !used.inner {
        let given = given.outputs.text(spec.table.outputs);
        why.sentences.push(vec![text(format!(
            "Written as {given}; an open output that is the same before and after the move is held at that value. "
        ))]);
    }
    let starts: Vec<_> = spec
        .moves
        .iter()
        .filter(|m| m.from.row == row && m.column == column)
        .map(|m| link(spec.table.column_text(m.from.column), Pick::Cell(row, m.from.column)))
        .collect();
    if !starts.is_empty() {
        let mut sentence = vec![text("Entered by an input change from ")];
        sentence.extend(listed(starts));
        sentence.push(text(". "));
        why.sentences.push(sentence);
    }
    for finding in findings_at(design, name, Some(&at)) {
        why.sentences.push(vec![text(format!("{}: {} ", finding.level.word(), finding.text))]);
    }
    Some(why)
}
