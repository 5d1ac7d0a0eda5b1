//! All bits of a move change at once, in any order, without a critical race [Liu 1963; Tracey 1966].
//!
//! In a column, two moves to different rows must never meet, whatever order the bits change in: some bit has one value on
//! both rows of the one move and the other value on both rows of the other. Such a condition is a *dichotomy*. Different
//! codes for different rows are dichotomies too, and so are the rules for late outputs and for outputs per row: what
//! holds an output at 0 all the way stays apart from what holds it at 1.
//!
//! A quick construction packs dichotomies into bits one after the other and gives an upper bound; dichotomies of which no
//! two fit into one bit give a lower bound. Between them the [search](crate::codes::dichotomy) decides. Exact within the
//! effort. With outputs per row the fewest bits are those of the conditions above; whether an output that changes on one
//! way disturbs another is seen when the equations are made.
//!
//! Cost: up to (moves in a column)² dichotomies a column.

use crate::base::{Bound, Code, Column, Effort, Finding, Halted, Level, Progress, Row};
use crate::codes::adjacency::in_turn;
use crate::codes::dichotomy::{Dichotomy, apart, pack, solve};
use crate::codes::fit::{bits_for, room, too_many};
use crate::codes::net::{late, row_outputs};
use crate::codes::table::{Draft, finish, normalise};
use crate::codes::values::{Coded, Step, Way};
use crate::merge::values::Reduced;
use crate::project::choices::{Method, OutputStyle};

/// Codes for moves in a single step.
///
/// # Errors
/// `too-many-variables`; `single-step-not-found` if the effort did not even last for the conditions.
pub(super) fn assign(reduced: &Reduced, effort: &Effort) -> Result<Coded, Vec<Finding>> {
    let (bits, mut codes, bound) = fewest(reduced, effort).map_err(|Halted| {
        vec![Finding::new(
            Level::Error,
            "single-step-not-found",
            "The effort ran out before all conditions of single-step codes were listed. Give the search a larger \
             budget, or use the one-hot method.",
        )]
    })?;
    if bits > room(reduced) {
        // Beyond the room nothing was searched: only the lower bound is certain.
        let least = match bound {
            Bound::Proved => bits,
            Bound::Stopped { lower } => lower.max(room(reduced) + 1),
        };
        return Err(vec![too_many(reduced, "single step", least, " or more")]);
    }
    normalise(&mut codes, reduced.initial.row.at(), bits);
    let table = &reduced.table;
    let mut ways = Vec::new();
    for (from, column, to) in moves(reduced) {
        let path = vec![codes[from.at()], codes[to.at()]];
        ways.push(Way { from, column, to, path, step: Step::Together });
    }
    debug_assert_eq!(codes.len(), table.len());
    let codes = codes.into_iter().map(|code| vec![code]).collect();
    Ok(finish(reduced, Draft { method: Method::SingleStep, bits, codes, ways, bound, tidy: Bound::Proved }))
}

/// Codes by the quick construction alone: they are single-step codes, but perhaps not the shortest.
pub(super) fn quick(reduced: &Reduced, effort: &Effort) -> Result<(usize, Vec<Code>), Halted> {
    let list = dichotomies(reduced, effort)?;
    pack(&list, reduced.table.len(), effort)
}

/// Bits that single-step codes need at most, if the effort allows to tell.
pub(super) fn upper_bound(reduced: &Reduced, effort: &Effort) -> Option<usize> {
    quick(reduced, effort).ok().map(|(bits, _)| bits)
}

fn fewest(reduced: &Reduced, effort: &Effort) -> Result<(usize, Vec<Code>, Bound), Halted> {
    let rows = reduced.table.len();
    let list = dichotomies(reduced, effort)?;
    let (most, packed) = pack(&list, rows, effort)?;
    let separate = apart(&list);
    let least = bits_for(rows).max(separate.len());
    let mut lower = least;
    for bits in least..most.min(room(reduced) + 1) {
        effort.report(&Progress { task: "single-step codes", best: Some(most), bound: lower });
        let found = in_turn(effort, bits + 1 == most, |effort| solve(&list, &separate, rows, bits, effort));
        match found {
            Ok(Some(codes)) if lower == bits => return Ok((bits, codes, Bound::Proved)),
            Ok(Some(codes)) => return Ok((bits, codes, Bound::Stopped { lower })),
            Ok(None) => lower = bits + 1,
            Err(Halted) => {}
        }
    }
    let bound = if lower == most { Bound::Proved } else { Bound::Stopped { lower } };
    Ok((most, packed, bound))
}

/// All unstable specified cells with their next rows, by row, then column.
fn moves(reduced: &Reduced) -> Vec<(Row, Column, Row)> {
    let table = &reduced.table;
    let cells = table.rows().flat_map(|row| table.columns().map(move |column| (row, column)));
    cells
        .filter_map(|(row, column)| {
            table.next(row, column).filter(|&to| to != row).map(|to| (row, column, to))
        })
        .collect()
}

/// All conditions on the codes, without repeats, those on more rows first.
fn dichotomies(reduced: &Reduced, effort: &Effort) -> Result<Vec<Dichotomy>, Halted> {
    let table = &reduced.table;
    let mut list = Vec::new();
    for column in table.columns() {
        let mut pairs: Vec<(Row, Row)> = Vec::new();
        for goal in table.rows().filter(|&row| table.stable(row, column)) {
            let before = pairs.len();
            pairs.extend(
                table.rows().filter(|&r| r != goal && table.next(r, column) == Some(goal)).map(|r| (r, goal)),
            );
            if pairs.len() == before {
                pairs.push((goal, goal));
            }
        }
        effort.spend((pairs.len() * pairs.len()) as u64 / 50)?;
        for (at, &(i, k)) in pairs.iter().enumerate() {
            for &(j, l) in pairs[..at].iter().filter(|pair| pair.1 != k) {
                list.push(Dichotomy::new([i, k], [j, l]));
            }
            for r in table.rows().filter(|&r| r != i && r != k && i != k) {
                let open = table.next(r, column).is_none_or(|next| next == k);
                if open && late(reduced, r, k, column) {
                    list.push(Dichotomy::new([i, k], [r, r]));
                }
            }
        }
    }
    if reduced.outputs == OutputStyle::PerRow {
        held_outputs(reduced, &mut list, effort)?;
    }
    list.sort_unstable();
    list.dedup();
    distinct(table.len(), &mut list);
    list.sort_by_key(|dichotomy| std::cmp::Reverse(dichotomy.size()));
    Ok(list)
}

/// Where outputs belong to rows: a way that holds an output at 0 shares no code with one that holds it at 1.
fn held_outputs(reduced: &Reduced, list: &mut Vec<Dichotomy>, effort: &Effort) -> Result<(), Halted> {
    let table = &reduced.table;
    let words: Vec<_> = table.rows().map(|row| row_outputs(reduced, row)).collect();
    let mut pairs: Vec<(Row, Row)> =
        moves(reduced).into_iter().map(|(from, _, to)| (from.min(to), from.max(to))).collect();
    pairs.extend(table.rows().map(|row| (row, row)));
    pairs.sort_unstable();
    pairs.dedup();
    for j in 0..table.outputs {
        let value = |row: Row| words[row.at()].get(j);
        let holding = |wanted: bool| -> Vec<(Row, Row)> {
            let held = |pair: &&(Row, Row)| value(pair.0) == Some(wanted) && value(pair.1) == Some(wanted);
            pairs.iter().filter(held).copied().collect()
        };
        let (zeros, ones) = (holding(false), holding(true));
        effort.spend((zeros.len() * ones.len()) as u64 / 50)?;
        for &(a, b) in &zeros {
            list.extend(ones.iter().map(|&(c, d)| Dichotomy::new([a, b], [c, d])));
        }
    }
    Ok(())
}

/// Adds "different codes" for the pairs of rows that no other condition keeps apart.
fn distinct(rows: usize, list: &mut Vec<Dichotomy>) {
    let mut separated = vec![false; rows * rows];
    for dichotomy in list.iter() {
        for a in dichotomy.left {
            for b in dichotomy.right {
                separated[a.at() * rows + b.at()] = true;
                separated[b.at() * rows + a.at()] = true;
            }
        }
    }
    for a in 0..rows {
        for b in a + 1..rows {
            if !separated[a * rows + b] {
                list.push(Dichotomy::new([Row::new(a); 2], [Row::new(b); 2]));
            }
        }
    }
}
