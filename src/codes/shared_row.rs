//! One code a row, one bit a step, with spare codes that moves may pass through [Huffman 1954].
//!
//! A spare code may serve several moves: in one column it belongs to one basin, in different columns to different ones.
//! Fewest bits first: with all codes of k bits at hand, rows or spare, a proof that nothing fits in k bits is a proof for
//! every number of spare codes. Then the fewest spare codes, one more at a time; then the shortest longest way.
//!
//! Exact within the effort; for more than [`POINTS`] codes not all of them are offered as spare, and then fewer bits are
//! not excluded. When the effort runs out before anything is found, single-step codes serve: all codes that a move of
//! several bits may pass belong to one basin, so bits may as well change one at a time there. (One-hot codes, with outputs
//! per row.)
//!
//! Cost: see the [search](crate::codes::search).

use std::collections::{BTreeMap, VecDeque};

use crate::base::{Bound, Code, Column, Effort, Finding, Halted, Level, Progress, Row};
use crate::codes::adjacency::in_turn;
use crate::codes::fit::{bits_for, room, too_many};
use crate::codes::net::Net;
use crate::codes::one_hot;
use crate::codes::search::{Placement, place, ways};
use crate::codes::single_step;
use crate::codes::table::{Draft, finish, normalise, span};
use crate::codes::values::{Coded, Step, Way};
use crate::merge::values::Reduced;
use crate::project::choices::{Method, OutputStyle};

/// Codes, of rows and spare together, that the search works with at most.
pub(super) const POINTS: usize = 64;

/// Codes with shared rows.
///
/// # Errors
/// `too-many-variables`; `shared-row-not-found` if the effort ran out.
pub(super) fn assign(reduced: &Reduced, effort: &Effort) -> Result<Coded, Vec<Finding>> {
    let rows = reduced.table.len();
    let room = room(reduced);
    // Everything below is refuted.
    let mut lower = bits_for(rows);
    for bits in bits_for(rows)..=room.min(rows) {
        effort.report(&Progress { task: "codes with spare rows", best: None, bound: lower });
        match in_turn(effort, bits == room.min(rows), |effort| fewest_spares(reduced, bits, effort)) {
            Ok(Some(found)) => {
                let bound = if lower == bits { Bound::Proved } else { Bound::Stopped { lower } };
                return Ok(draft(reduced, bits, found, bound));
            }
            Ok(None) if all_offered(rows, bits) => lower = bits + 1,
            Ok(None) | Err(Halted) => {
                if let Some(coded) = fallback(reduced, lower).filter(|coded| coded.bits <= bits) {
                    return Ok(coded);
                }
            }
        }
    }
    if lower > room {
        return Err(vec![too_many(reduced, "shared row", lower, " or more")]);
    }
    fallback(reduced, lower).ok_or_else(|| {
        vec![Finding::new(
            Level::Error,
            "shared-row-not-found",
            format!(
                "The search for codes with shared rows was halted before it found any; fewer than {lower} bits are \
                 excluded. Give it a larger budget, or use the single-step method."
            ),
        )]
    })
}

/// A placement, and whether fewer spare codes are excluded.
struct Found {
    net: Net,
    placement: Placement,
    fewest: bool,
}

fn all_offered(rows: usize, bits: usize) -> bool {
    1 << bits <= POINTS.max(rows)
}

/// Codes of `bits` bits with the fewest spare codes. Few spare codes are tried first, because few mostly do; then all of
/// them at once, because that settles a hopeless number of bits.
fn fewest_spares(reduced: &Reduced, bits: usize, effort: &Effort) -> Result<Option<Found>, Halted> {
    let rows = reduced.table.len();
    let most = (1usize << bits).min(POINTS.max(rows)) - rows;
    let few = most.min(2);
    let mut halted = false;
    let mut incumbent: Option<Found> = None;
    let order = (0..=few).chain((most > few).then_some(most)).chain(few + 1..most);
    for spare in order {
        if incumbent.as_ref().is_some_and(|found| spare >= spares(&found.placement)) {
            break;
        }
        let net = Net::of(reduced, spare);
        match in_turn(effort, spare == most, |effort| place(&net, bits, effort)) {
            Ok(Some(placement)) if spare < most || most == few => {
                return Ok(Some(Found { net, placement, fewest: !halted }));
            }
            Ok(Some(placement)) => incumbent = Some(Found { net, placement, fewest: false }),
            // With more spare codes nothing is lost: no need to try fewer.
            Ok(None) if spare == most => return Ok(None),
            Ok(None) => {}
            Err(Halted) => halted = true,
        }
    }
    match incumbent {
        Some(found) => Ok(Some(Found { fewest: !halted, ..found })),
        None if halted => Err(Halted),
        None => Ok(None),
    }
}

fn spares(placement: &Placement) -> usize {
    placement.used.iter().filter(|&&used| used).count()
}

fn draft(reduced: &Reduced, bits: usize, found: Found, bound: Bound) -> Coded {
    let Found { net, mut placement, fewest } = found;
    normalise(&mut placement.codes, reduced.initial.row.at(), bits);
    let ways = ways(&net, &placement);
    let tidy = if fewest && placement.shortest { Bound::Proved } else { Bound::Stopped { lower: 0 } };
    let codes = placement.codes[..reduced.table.len()].iter().map(|&code| vec![code]).collect();
    finish(reduced, Draft { method: Method::SharedRow, bits, codes, ways, bound, tidy })
}

/// Codes without a search. Ways of one bit a step inside the subcubes of single-step codes; where outputs belong to rows
/// nothing is promised of the codes inside, and one-hot codes serve, if they fit.
fn fallback(reduced: &Reduced, lower: usize) -> Option<Coded> {
    if reduced.outputs == OutputStyle::PerRow {
        let coded = one_hot::assign(reduced).ok()?;
        let bound = if coded.bits == lower { Bound::Proved } else { Bound::Stopped { lower } };
        return Some(Coded { method: Method::SharedRow, bound, tidy: Bound::Stopped { lower: 0 }, ..coded });
    }
    let effort = Effort::of(10_000_000);
    let (bits, mut codes) = single_step::quick(reduced, &effort).ok()?;
    if bits > room(reduced) {
        return None;
    }
    normalise(&mut codes, reduced.initial.row.at(), bits);
    let table = &reduced.table;
    let mut ways = Vec::new();
    for column in table.columns() {
        for goal in table.rows() {
            let sources: Vec<Row> =
                table.rows().filter(|&r| r != goal && table.next(r, column) == Some(goal)).collect();
            inside(&codes, &sources, goal, column, bits, &mut ways);
        }
    }
    let codes = codes.into_iter().map(|code| vec![code]).collect();
    let bound = if bits == lower { Bound::Proved } else { Bound::Stopped { lower } };
    let tidy = Bound::Stopped { lower: 0 };
    Some(finish(reduced, Draft { method: Method::SharedRow, bits, codes, ways, bound, tidy }))
}

/// The ways of one basin, breadth first through the union of its subcubes.
fn inside(codes: &[Code], sources: &[Row], goal: Row, column: Column, bits: usize, ways: &mut Vec<Way>) {
    let end = codes[goal.at()];
    // Every code of the union, with the next one once it is known.
    let mut next: BTreeMap<Code, Option<Code>> =
        sources.iter().flat_map(|row| span(codes[row.at()], end)).map(|code| (code, None)).collect();
    let mut queue = VecDeque::from([end]);
    while let Some(at) = queue.pop_front() {
        for bit in 0..bits {
            let before = Code(at.0 ^ 1 << bit);
            if before == end {
                continue;
            }
            if let Some(slot @ None) = next.get_mut(&before) {
                *slot = Some(at);
                queue.push_back(before);
            }
        }
    }
    for &from in sources {
        let mut path = vec![codes[from.at()]];
        while let Some(&Some(code)) = path.last().and_then(|code| next.get(code)) {
            path.push(code);
        }
        ways.push(Way { from, column, to: goal, path, step: Step::OneBit });
    }
}
