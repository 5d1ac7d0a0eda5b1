//! Why for codes, entries of the encoded table, and moves.

use crate::base::{Code, Column};
use crate::codes::values::{Role, Step};
use crate::design::values::{Design, Pick};
use crate::explain::{Why, link, text};
use crate::proof::values::RaceKind;

/// A code: whose it is, or which ways pass through it.
pub(crate) fn code(design: &Design, code: Code) -> Option<Why> {
    let (merged, coded) = (design.merged.as_ref()?, design.coded.as_ref()?);
    let table = &merged.reduced.as_ref()?.table;
    let mut why = Why::titled(format!("Code {}", code.text(coded.bits)));
    if let Some(row) = coded.row_of(code) {
        let start = if code == coded.initial { "; the code after power-up" } else { "" };
        why.sentences.push(vec![
            text("Belongs to "),
            link(table.name(row), Pick::Merged(row)),
            text(format!("{start}. ")),
        ]);
    } else if let Some(spare) = coded.spare.iter().find(|s| s.code == code) {
        why.sentences
            .push(vec![text(format!("Spare code {}: no row rests here, ways pass through. ", spare.name))]);
    } else {
        why.sentences.push(vec![text("No row owns it. ")]);
    }
    for way in coded.ways.iter().filter(|w| w.path[1..w.path.len() - 1].contains(&code)) {
        why.sentences.push(vec![
            text(format!("In column {} the way from ", table.column_text(way.column))),
            link(table.name(way.from), Pick::MergedCell(way.from, way.column)),
            text(" to "),
            link(table.name(way.to), Pick::MergedCell(way.to, way.column)),
            text(" passes here. "),
        ]);
    }
    Some(why)
}

/// An entry of the encoded table.
pub(crate) fn entry(design: &Design, code: Code, column: Column) -> Option<Why> {
    let (merged, coded) = (design.merged.as_ref()?, design.coded.as_ref()?);
    let table = &merged.reduced.as_ref()?.table;
    let mut why =
        Why::titled(format!("Code {}, column {}", code.text(coded.bits), table.column_text(column)));
    let Some(entry) = coded.encoded.get(code, column) else {
        why.sentences.push(vec![text("Unspecified: no way leads here, the functions are free. ")]);
        return Some(why);
    };
    let goal = link(table.name(entry.goal), Pick::MergedCell(entry.goal, column));
    let next = link(entry.next.text(coded.bits), Pick::Code(entry.next));
    why.sentences.push(match entry.role {
        Role::Row(row) if entry.next == code => {
            vec![link(table.name(row), Pick::MergedCell(row, column)), text(" rests here. ")]
        }
        Role::Row(row) => vec![
            link(table.name(row), Pick::MergedCell(row, column)),
            text(" goes on to "),
            goal,
            text(", next code "),
            next,
            text(". "),
        ],
        Role::Lent(row) => vec![
            text("Lent by "),
            link(table.name(row), Pick::MergedCell(row, column)),
            text(", whose cell is unspecified here, as a step on the way to "),
            goal,
            text(", next code "),
            next,
            text(". "),
        ],
        Role::Spare => vec![text("Spare, a step on the way to "), goal, text(", next code "), next, text(". ")],
        Role::OnTheWay => vec![
            text("Inside the subcube of a move that changes several bits at once; from here too the circuit goes to "),
            goal,
            text(". "),
        ],
    });
    if let Some(races) = &design.races {
        for race in races.critical.iter().filter(|r| r.column == column && r.path.first() == Some(&code)) {
            let order: Vec<String> = race.path.iter().map(|c| c.text(coded.bits)).collect();
            let end = match race.kind {
                RaceKind::Critical => "and settles in the wrong row",
                RaceKind::Oscillation => "and can go round for ever",
                RaceKind::Stray => "and reaches a code that nothing specifies here",
            };
            why.sentences
                .push(vec![text(format!("Critical race: the order {} loses {end}. ", order.join(" → ")))]);
        }
    }
    Some(why)
}

/// A move of the reduced table that can happen.
pub(crate) fn moved(design: &Design, index: usize) -> Option<Why> {
    let (merged, coded) = (design.merged.as_ref()?, design.coded.as_ref()?);
    let reduced = merged.reduced.as_ref()?;
    let m = *reduced.moves.get(index)?;
    let table = &reduced.table;
    let mut why = Why::titled(format!("Move {} of {}", index + 1, reduced.moves.len()));
    why.sentences.push(vec![
        text("From "),
        link(
            format!("{}, {}", table.name(m.from.row), table.column_text(m.from.column)),
            Pick::MergedCell(m.from.row, m.from.column),
        ),
        text(" the inputs change to "),
        link(table.column_text(m.column), Pick::MergedCell(m.from.row, m.column)),
        text(if m.to == m.from.row { "; the row stays. " } else { "; the controller goes to " }),
    ]);
    if m.to != m.from.row
        && let Some(last) = why.sentences.last_mut()
    {
        last.push(link(table.name(m.to), Pick::MergedCell(m.to, m.column)));
        last.push(text(". "));
    }
    for way in coded.ways.iter().filter(|w| w.from == m.from.row && w.column == m.column) {
        let codes: Vec<String> = way.path.iter().map(|c| c.text(coded.bits)).collect();
        let how = match way.step {
            Step::OneBit => "one bit a step",
            Step::Together => "all bits at once, in any order",
        };
        why.sentences.push(vec![text(format!("State {}: {how}. ", codes.join(" → ")))]);
    }
    Some(why)
}
