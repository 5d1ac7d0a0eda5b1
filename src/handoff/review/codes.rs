//! Section Codes: codes, ways, what the race check says, the encoded table.

use crate::base::{Bound, Code};
use crate::codes::values::{Coded, Role, Step, Way};
use crate::handoff::plain::{align, blocks, counted, listed, wrap};
use crate::handoff::review::Page;
use crate::handoff::review::behaviour::used_columns;
use crate::handoff::words::method_name;
use crate::merge::values::Reduced;
use crate::project::choices::Method;
use crate::proof::values::{RaceKind, Races};

pub fn write(page: &mut Page, reduced: &Reduced, coded: &Coded, races: Option<&Races>) {
    page.section("Codes");
    page.text(&format!("Method: {}. {}.", method_name(&coded.method), standing(coded)));
    if coded.bits == 0 {
        page.text("One row needs no state variable: the design is combinational.");
        return;
    }
    page.gap();
    page.lines(align(&code_rows(reduced, coded), "  ", &[]));
    ways(page, reduced, coded);
    if let Some(races) = races {
        verdict(page, reduced, coded, races);
    }
    encoded_table(page, reduced, coded);
}

fn standing(coded: &Coded) -> String {
    let bits = counted(coded.bits, "state variable", "state variables");
    match (&coded.method, coded.bound) {
        (Method::OneHot, Bound::Proved) => format!("{bits}, one for each row"),
        (Method::MultipleRow, Bound::Proved) => format!("{bits}, as the construction gives them"),
        (Method::ByHand(_), Bound::Proved) => format!("{bits}, as given"),
        (_, Bound::Proved) => format!("{bits}, fewest for this method, proved"),
        (_, Bound::Stopped { lower }) => {
            format!("{bits}, not proved fewest: between {lower} and {} are needed", coded.bits)
        }
    }
}

fn code_rows(reduced: &Reduced, coded: &Coded) -> Vec<Vec<String>> {
    let names: Vec<String> = (1..=coded.bits).map(|i| format!("y{i}")).collect();
    let head = vec!["row".to_owned(), names.join(" ")];
    // The digits stand under the names of their variables.
    let spread = |code: Code| -> String {
        let digits = (0..coded.bits).map(|i| format!("{:<1$}", code.0 >> i & 1, names[i].len()));
        digits.collect::<Vec<_>>().join(" ")
    };
    let rows = reduced.table.rows().flat_map(|row| {
        coded.codes[row.at()]
            .iter()
            .enumerate()
            .map(move |(i, &code)| (if i == 0 { Some(row) } else { None }, code))
    });
    let rows = rows.map(|(row, code)| {
        vec![row.map_or(String::new(), |r| reduced.table.name(r).to_owned()), spread(code)]
    });
    let spare = coded.spare.iter().map(|s| vec![s.name.clone(), spread(s.code), "spare".to_owned()]);
    std::iter::once(head).chain(rows).chain(spare).collect()
}

fn ways(page: &mut Page, reduced: &Reduced, coded: &Coded) {
    if coded.ways.is_empty() {
        return;
    }
    page.gap();
    page.line("Ways from row to row:");
    let table = &reduced.table;
    let text = |way: &Way| {
        let codes: Vec<String> = way.path.iter().map(|c| c.text(coded.bits)).collect();
        let joint = match way.step {
            Step::OneBit => " > ",
            Step::Together => " => ",
        };
        codes.join(joint)
    };
    // The same way in several columns is one line.
    let mut rows: Vec<(String, String, Vec<String>)> = Vec::new();
    for way in &coded.ways {
        let (ends, path) = (format!("{} to {}", table.name(way.from), table.name(way.to)), text(way));
        let column = table.column_text(way.column);
        match rows.iter_mut().find(|(e, p, _)| *e == ends && *p == path) {
            Some((.., columns)) => columns.push(column),
            None => rows.push((ends, path, vec![column])),
        }
    }
    let rows: Vec<Vec<String>> = rows
        .into_iter()
        .map(|(ends, path, columns)| {
            let word = if columns.len() == 1 { "column" } else { "columns" };
            vec![ends, path, format!("{word} {}", listed(&columns))]
        })
        .collect();
    page.lines(align(&rows, "  ", &[]));
    if coded.ways.iter().any(|w| w.step == Step::Together && w.path[0].distance(w.path[w.path.len() - 1]) > 1)
    {
        page.line("  => all bits at once, in any order");
    }
    page.line(format!("  Longest way: {}.", counted(coded.longest_path, "step", "steps")));
}

fn verdict(page: &mut Page, reduced: &Reduced, coded: &Coded, races: &Races) {
    page.gap();
    let harmless = match races.noncritical {
        0 => "no other race either".to_owned(),
        n => format!("{} won in every order", counted(n, "race", "races")),
    };
    if races.critical.is_empty() {
        page.text(&format!(
            "Race check: free of critical races; {harmless}; {} of more than one step.",
            counted(races.cycles.len(), "way", "ways")
        ));
        return;
    }
    page.text(&format!(
        "Race check: {}.",
        counted(races.critical.len(), "race can be lost", "races can be lost")
    ));
    let table = &reduced.table;
    for race in &races.critical {
        let path: Vec<String> = race.path.iter().map(|c| c.text(coded.bits)).collect();
        let what = match race.kind {
            RaceKind::Critical => "settles elsewhere",
            RaceKind::Oscillation => "goes round for ever",
            RaceKind::Stray => "strays into an unspecified code",
        };
        let text = format!(
            "{} to {} in column {}: {what} by {}",
            table.name(race.from),
            table.name(race.to),
            table.column_text(race.column),
            path.join(" > ")
        );
        page.lines(wrap("  ", "      ", &text));
    }
}

/// A line for each code in use, next codes in the cells.
fn encoded_table(page: &mut Page, reduced: &Reduced, coded: &Coded) {
    let table = &reduced.table;
    let columns = used_columns(table, false);
    let mut codes: Vec<Code> = coded.encoded.entries.keys().map(|&(code, _)| code).collect();
    codes.extend(coded.codes.iter().flatten());
    codes.extend(coded.spare.iter().map(|s| s.code));
    codes.sort_by_key(|c| c.text(coded.bits));
    codes.dedup();
    let owner = |code: Code| -> String {
        if let Some(row) = coded.row_of(code) {
            return table.name(row).to_owned();
        }
        coded.spare.iter().find(|s| s.code == code).map_or(String::new(), |s| s.name.clone())
    };
    let mut lent = false;
    let mut rows = Vec::new();
    for &code in &codes {
        let mut row = vec![format!("{}  {}", code.text(coded.bits), owner(code))];
        for &column in &columns {
            row.push(match coded.encoded.get(code, column) {
                None => " .".to_owned(),
                Some(entry) if entry.next == code => format!("({})", entry.next.text(coded.bits)),
                Some(entry) => {
                    let passes = matches!(entry.role, Role::Lent(_) | Role::Spare | Role::OnTheWay);
                    lent |= passes;
                    format!(" {}{}", entry.next.text(coded.bits), if passes { "*" } else { "" })
                }
            });
        }
        rows.push(row);
    }
    page.gap();
    let names: Vec<String> = (1..=coded.bits).map(|i| format!("y{i}")).collect();
    page.text(&format!("Encoded table, codes as {}; (..) is stable, . is unspecified.", names.join(" ")));
    if lent {
        page.line("* Only passed on the way of a move.");
    }
    page.gap();
    let heads: Vec<String> = std::iter::once("code".to_owned())
        .chain(columns.iter().map(|c| format!(" {}", table.column_text(*c))))
        .collect();
    page.lines(blocks(&heads, &rows, "  "));
}
