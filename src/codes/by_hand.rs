//! The user's codes, checked, with the best ways that they allow.
//!
//! In a column, all bits of each move change at once if the subcubes of moves to different codes do not meet. Otherwise
//! the moves are [routed](crate::codes::search::route) one bit a step through free codes and rows that have no cell
//! there; that question is answered exactly for up to [`CORRIDOR`] codes. In a column where neither works, each move gets
//! what can be had after the shorter ones: at once, a detour, or, in the end, the direct move, whose critical race the
//! race check then shows.
//!
//! Cost: the codes in use, spare ones included, times the columns; routing as in the search.

use std::collections::{BTreeMap, BTreeSet, VecDeque};

use crate::base::{Bound, Code, Effort, Finding, Level, Row};
use crate::codes::fit::{room, too_many};
use crate::codes::net::{Field, Net, Part};
use crate::codes::search::{Placement, route, ways};
use crate::codes::table::{Draft, finish, span};
use crate::codes::values::{Coded, Step, Way};
use crate::merge::values::Reduced;
use crate::project::choices::Method;

/// Codes, of rows and spare together, that routing looks at.
const CORRIDOR: usize = 1024;

/// Bits in which the two ends of a move may differ at most.
const FAR: u32 = 16;

/// Ways for codes by hand: strings of equal length for each merged row, by name.
///
/// # Errors
/// Every fault of the codes as a finding: `code-unknown-row`, `code-missing`, `code-character`, `code-length`,
/// `code-duplicate`, `code-distance`, `too-many-variables`.
pub(super) fn assign(
    reduced: &Reduced,
    given: &BTreeMap<String, Vec<String>>,
    effort: &Effort,
) -> Result<Coded, Vec<Finding>> {
    let (bits, codes) = read(reduced, given)?;
    let points: Vec<(Code, Row)> = codes
        .iter()
        .enumerate()
        .flat_map(|(row, own)| own.iter().map(move |&code| (code, Row::new(row))))
        .collect();
    let mut all: Vec<Code> = points.iter().map(|point| point.0).collect();
    let mut owner: Vec<Option<Row>> = points.iter().map(|point| Some(point.1)).collect();
    let bare = Net::over(reduced, owner.clone());
    distances(reduced, &bare, &all)?;
    all.extend(corridor(&bare, &all, bits));
    owner.resize(all.len(), None);
    let net = Net::over(reduced, owner);
    let method = Method::ByHand(given.clone());
    let ways = all_ways(&net, &all, bits, effort);
    Ok(finish(reduced, Draft { method, bits, codes, ways, bound: Bound::Proved, tidy: Bound::Proved }))
}

/// The codes of each row, or everything that is wrong with them.
fn read(
    reduced: &Reduced,
    given: &BTreeMap<String, Vec<String>>,
) -> Result<(usize, Vec<Vec<Code>>), Vec<Finding>> {
    let table = &reduced.table;
    let mut faults = Vec::new();
    let mut fault = |code: &'static str, text: String| faults.push(Finding::new(Level::Error, code, text));
    for name in given.keys().filter(|name| !table.names.contains(name)) {
        let names = table.names.join(", ");
        fault("code-unknown-row", format!("There is no merged row {name:?}. The rows are {names}."));
    }
    // The first code, in row order, sets the length.
    let strings = |row: Row| given.get(table.name(row)).map_or(&[] as &[String], Vec::as_slice);
    let bits = table.rows().find_map(|row| strings(row).first()).map_or(0, String::len);
    let mut holder: BTreeMap<&str, Row> = BTreeMap::new();
    let mut codes = Vec::with_capacity(table.len());
    for row in table.rows() {
        let name = table.name(row);
        let own = strings(row);
        if own.is_empty() && table.len() > 1 {
            fault("code-missing", format!("Row {name} has no code. Give it one of {bits} bits."));
        }
        let mut read = Vec::new();
        for text in own {
            if !text.bytes().all(|b| matches!(b, b'0' | b'1')) {
                let text = format!("Code {text:?} of row {name} may hold only 0 and 1.");
                fault("code-character", text);
            } else if text.len() != bits {
                let text = format!(
                    "Code {text} of row {name} has {} bits, but the first code has {bits}: all codes must be of one \
                     length.",
                    text.len()
                );
                fault("code-length", text);
            } else if let Some(&other) = holder.get(text.as_str()) {
                let text = format!(
                    "Code {text} is given to row {} and again to row {name}: no two rows may share a code.",
                    table.name(other)
                );
                fault("code-duplicate", text);
            } else {
                holder.insert(text, row);
                read.extend(Code::parse(text, bits));
            }
        }
        codes.push(read);
    }
    if table.len() == 1 && faults.is_empty() {
        // One row needs no state variable, whatever the user wrote.
        return Ok((0, vec![vec![Code(0)]]));
    }
    if bits > room(reduced) {
        faults.push(too_many(reduced, "by hand", bits, ""));
    }
    if faults.is_empty() { Ok((bits, codes)) } else { Err(faults) }
}

/// The code of the destination that is nearest to a point.
fn nearest(field: &Field, b: usize, all: &[Code], from: u16) -> Code {
    let code = all[usize::from(from)];
    let ends = field.basins[b].sinks.iter().map(|&sink| all[usize::from(sink)]);
    ends.min_by_key(|end| end.distance(code)).unwrap_or(code)
}

fn distances(reduced: &Reduced, net: &Net, all: &[Code]) -> Result<(), Vec<Finding>> {
    let mut faults = Vec::new();
    for field in &net.fields {
        for (b, basin) in field.basins.iter().enumerate() {
            for &source in &basin.sources {
                let far = nearest(field, b, all, source).distance(all[usize::from(source)]);
                let Some(row) = net.owner[usize::from(source)].filter(|_| far > FAR) else { continue };
                faults.push(Finding::new(
                    Level::Error,
                    "code-distance",
                    format!(
                        "The move from row {} to row {} in column {} would change {far} bits; at most {FAR} may change \
                         at once. Choose codes that lie closer together.",
                        reduced.table.name(row),
                        reduced.table.name(basin.goal),
                        reduced.table.column_text(field.column),
                    ),
                ));
            }
        }
    }
    if faults.is_empty() { Ok(()) } else { Err(faults) }
}

/// The spare codes that routing may use: all, or as many as fit of those around the rows' codes, nearest first.
fn corridor(net: &Net, all: &[Code], bits: usize) -> Vec<Code> {
    let own: BTreeSet<Code> = all.iter().copied().collect();
    if bits < 32 && 1usize << bits <= CORRIDOR {
        return (0..1u32 << bits).map(Code).filter(|code| !own.contains(code)).collect();
    }
    let mut seen = own.clone();
    let mut list = Vec::new();
    // The inside of the moves' own subcubes first, small ones before large ones.
    let mut spans: Vec<(Code, Code)> = Vec::new();
    for field in &net.fields {
        for (b, basin) in field.basins.iter().enumerate() {
            spans.extend(basin.sources.iter().map(|&s| (all[usize::from(s)], nearest(field, b, all, s))));
        }
    }
    spans.sort_by_key(|&(a, b)| (a.distance(b), a, b));
    let inside = spans.into_iter().flat_map(|(a, b)| span(a, b));
    let around = all.iter().flat_map(|code| (0..bits).map(|bit| Code(code.0 ^ 1 << bit)));
    for code in inside.chain(around) {
        if list.len() + own.len() >= CORRIDOR {
            break;
        }
        if seen.insert(code) {
            list.push(code);
        }
    }
    list
}

fn all_ways(net: &Net, all: &[Code], bits: usize, effort: &Effort) -> Vec<Way> {
    let mut found = Vec::new();
    let mut rest = Vec::new();
    for field in &net.fields {
        match together(net, field, all) {
            Some(list) => found.extend(list),
            None => rest.push(field.clone()),
        }
    }
    let part = |fields: Vec<Field>| Net { fields, ..net.clone() };
    let ask = |net: &Net| -> Option<Placement> { route(net, all, bits, effort).ok().flatten() };
    // Columns depend on one another only through outputs that belong to codes.
    if net.watched != 0 && rest.len() > 1 {
        let whole = part(rest.clone());
        if let Some(placement) = ask(&whole) {
            found.extend(ways(&whole, &placement));
            return found;
        }
    }
    for field in rest {
        let single = part(vec![field]);
        match ask(&single) {
            Some(placement) => found.extend(ways(&single, &placement)),
            None => found.extend(one_by_one(net, &single.fields[0], all, bits)),
        }
    }
    found
}

/// The code in which everything that passes a code of the column ends.
type Claims = BTreeMap<Code, Code>;

/// What is settled before any move is laid: stable rows end where they are, moving ones at their nearest destination.
fn claims(field: &Field, all: &[Code]) -> Claims {
    let mut claims = Claims::new();
    for (p, part) in field.parts.iter().enumerate() {
        let code = all[p];
        match *part {
            Part::Free => {}
            Part::Taken => {
                claims.insert(code, code);
            }
            Part::Basin(b) => {
                claims.insert(code, nearest(field, usize::from(b), all, p as u16));
            }
        }
    }
    claims
}

/// Whether all codes between two lead to the end or nowhere, and none is barred.
fn clear(net: &Net, field: &Field, b: usize, all: &[Code], claims: &Claims, start: Code, end: Code) -> bool {
    let barred: BTreeSet<Code> = field.basins[b].barred.ones().map(|p| all[p]).collect();
    debug_assert!(net.len() == all.len());
    span(start, end).all(|code| {
        claims.get(&code).is_none_or(|&goal| goal == end) && (code == start || !barred.contains(&code))
    })
}

/// The moves of a column, in order of distance: basin, point, start, end.
fn moves(field: &Field, all: &[Code]) -> Vec<(usize, u16, Code, Code)> {
    let mut list = Vec::new();
    for (b, basin) in field.basins.iter().enumerate() {
        for &source in &basin.sources {
            list.push((b, source, all[usize::from(source)], nearest(field, b, all, source)));
        }
    }
    list.sort_by_key(|&(_, source, start, end)| (start.distance(end), source));
    list
}

fn direct(net: &Net, field: &Field, b: usize, source: u16, start: Code, end: Code) -> Option<Way> {
    let from = net.owner[usize::from(source)]?;
    let step = if start.distance(end) == 1 { Step::OneBit } else { Step::Together };
    Some(Way { from, column: field.column, to: field.basins[b].goal, path: vec![start, end], step })
}

/// All moves of the column at once, if they do not disturb one another.
fn together(net: &Net, field: &Field, all: &[Code]) -> Option<Vec<Way>> {
    let mut claims = claims(field, all);
    let mut list = Vec::new();
    for (b, source, start, end) in moves(field, all) {
        if !clear(net, field, b, all, &claims, start, end) {
            return None;
        }
        claims.extend(span(start, end).map(|code| (code, end)));
        list.extend(direct(net, field, b, source, start, end));
    }
    Some(list)
}

/// What can be had, short moves first: at once, else a detour through unclaimed codes, else the direct move.
fn one_by_one(net: &Net, field: &Field, all: &[Code], bits: usize) -> Vec<Way> {
    let mut claims = claims(field, all);
    let mut list = Vec::new();
    for (b, source, start, end) in moves(field, all) {
        if clear(net, field, b, all, &claims, start, end) {
            claims.extend(span(start, end).map(|code| (code, end)));
            list.extend(direct(net, field, b, source, start, end));
        } else if let Some(path) = detour(field, b, all, bits, &claims, start, end) {
            claims.extend(path.iter().map(|&code| (code, end)));
            let way = direct(net, field, b, source, start, end);
            list.extend(way.map(|way| Way { path, step: Step::OneBit, ..way }));
        } else {
            list.extend(direct(net, field, b, source, start, end));
        }
    }
    list
}

/// A shortest path of single bits through codes that nothing claims.
fn detour(
    field: &Field,
    b: usize,
    all: &[Code],
    bits: usize,
    claims: &Claims,
    start: Code,
    end: Code,
) -> Option<Vec<Code>> {
    let barred = &field.basins[b].barred;
    let open: BTreeSet<Code> = (0..all.len())
        .filter(|&p| !barred.contains(p))
        .map(|p| all[p])
        .filter(|c| !claims.contains_key(c))
        .collect();
    let mut next: BTreeMap<Code, Code> = BTreeMap::new();
    let mut queue = VecDeque::from([end]);
    while let Some(at) = queue.pop_front() {
        for bit in 0..bits {
            let before = Code(at.0 ^ 1 << bit);
            if before == start {
                next.insert(before, at);
                let mut path = vec![start];
                let mut code = start;
                while let Some(&after) = next.get(&code) {
                    path.push(after);
                    code = after;
                }
                return Some(path);
            }
            if open.contains(&before) && !next.contains_key(&before) {
                next.insert(before, at);
                queue.push_back(before);
            }
        }
    }
    None
}
