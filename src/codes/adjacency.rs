//! One code a row, one bit a step, no spare codes [Huffman 1954].
//!
//! Fewest bits: the [search](crate::codes::search) is asked for 1, 2, .. bits from a lower bound on. If codes exist for
//! n rows they exist in n-1 bits, so a proof that there are none in n-1 bits is a proof that there are none at all;
//! that question is put second, right after the smallest number of bits, because it settles most hopeless tables.
//! Among codes of the fewest bits, those with the shortest longest way.
//!
//! Exact within the effort. Cost: see the search.

use std::collections::VecDeque;

use crate::base::{Bound, Effort, Finding, Halted, Level, Progress, Row};
use crate::codes::fit::{bits_for, room, too_many};
use crate::codes::net::Net;
use crate::codes::search::{Placement, compress, place, required, ways};
use crate::codes::table::{Draft, finish, normalise};
use crate::codes::values::Coded;
use crate::merge::values::Reduced;
use crate::project::choices::Method;

/// Codes by adjacency.
///
/// # Errors
/// `adjacency-impossible` if there are none, `adjacency-not-found` if the effort ran out first, `too-many-variables`.
pub(super) fn assign(reduced: &Reduced, effort: &Effort) -> Result<Coded, Vec<Finding>> {
    let net = Net::of(reduced, 0);
    let pairs = required(&net);
    if let Some(ring) = odd_ring(net.len(), &pairs) {
        return Err(vec![impossible(reduced, &ring)]);
    }
    let rows = net.len();
    let least = bits_for(rows).max(most_neighbours(rows, &pairs));
    let room = room(reduced);
    if least > room {
        return Err(vec![too_many(reduced, "adjacency", least, " or more")]);
    }
    let most = (rows - 1).max(least);
    let Some((bits, placement, bound)) = climb(&net, least, most.min(room), effort)? else {
        return Err(vec![if most <= room {
            impossible(reduced, &[])
        } else {
            too_many(reduced, "adjacency", room + 1, " or more")
        }]);
    };
    Ok(draft(reduced, &net, bits, placement, bound))
}

/// The fewest bits from `least` to `most`, with what is known of that number. `None` is a proof that there are none.
fn climb(
    net: &Net,
    least: usize,
    most: usize,
    effort: &Effort,
) -> Result<Option<(usize, Placement, Bound)>, Vec<Finding>> {
    let mut best: Option<(usize, Placement)> = None;
    // Everything below is refuted.
    let mut lower = least;
    let mut halted = false;
    let mut order = vec![least];
    order.extend((most > least).then_some(most));
    order.extend(least + 1..most);
    for bits in order {
        if best.as_ref().is_some_and(|&(found, _)| bits >= found) {
            break;
        }
        effort.report(&Progress { task: "adjacent codes", best: best.as_ref().map(|b| b.0), bound: lower });
        let last = bits + 1 >= best.as_ref().map_or(most, |b| b.0);
        match in_turn(effort, last, |effort| place(net, bits, effort)) {
            Ok(Some(found)) => {
                let (bits, found) = compress(bits, found);
                best = Some((bits, found));
                if bits == lower {
                    break;
                }
            }
            Ok(None) if bits == most => return Ok(None),
            Ok(None) => lower = if halted { lower } else { bits + 1 },
            Err(Halted) => halted = true,
        }
    }
    match best {
        Some((bits, placement)) if lower >= bits => Ok(Some((bits, placement, Bound::Proved))),
        Some((bits, placement)) => Ok(Some((bits, placement, Bound::Stopped { lower }))),
        None => Err(vec![Finding::new(
            Level::Error,
            "adjacency-not-found",
            format!(
                "The search for adjacent codes was halted: neither codes of up to {most} bits nor a proof that there \
                 are none has been found. Give it a larger budget, or use the shared-row or the single-step method."
            ),
        )]),
    }
}

/// Runs one question of several with half of what is left of the effort, the last one with all of it.
pub(super) fn in_turn<T>(
    effort: &Effort,
    last: bool,
    question: impl FnOnce(&Effort) -> Result<T, Halted>,
) -> Result<T, Halted> {
    if last {
        return question(effort);
    }
    let share = effort.left() / 2;
    let part = Effort::new(share, effort.stop(), &|_| {});
    let answer = question(&part);
    effort.spend(share - part.left().min(share))?;
    answer
}

fn draft(reduced: &Reduced, net: &Net, bits: usize, mut placement: Placement, bound: Bound) -> Coded {
    normalise(&mut placement.codes, reduced.initial.row.at(), bits);
    let ways = ways(net, &placement);
    let tidy = if placement.shortest { Bound::Proved } else { Bound::Stopped { lower: 1 } };
    let codes = placement.codes.iter().map(|&code| vec![code]).collect();
    finish(reduced, Draft { method: Method::Adjacency, bits, codes, ways, bound, tidy })
}

fn most_neighbours(rows: usize, pairs: &[(u16, u16, usize)]) -> usize {
    let mut degree = vec![0; rows];
    for &(a, b, _) in pairs {
        degree[usize::from(a)] += 1;
        degree[usize::from(b)] += 1;
    }
    degree.into_iter().max().unwrap_or(0)
}

/// A shortest ring of an odd number of rows in which neighbours must be adjacent: no cube holds one.
fn odd_ring(rows: usize, pairs: &[(u16, u16, usize)]) -> Option<Vec<Row>> {
    let mut near = vec![Vec::new(); rows];
    for &(a, b, _) in pairs {
        near[usize::from(a)].push(usize::from(b));
        near[usize::from(b)].push(usize::from(a));
    }
    (0..rows).filter_map(|start| ring_through(&near, start)).min_by_key(Vec::len)
}

/// A shortest odd closed walk from `start`: from two neighbours on the same level of a breadth-first search.
fn ring_through(near: &[Vec<usize>], start: usize) -> Option<Vec<Row>> {
    let mut from: Vec<Option<(usize, usize)>> = vec![None; near.len()];
    from[start] = Some((start, 0));
    let mut queue = VecDeque::from([start]);
    while let Some(at) = queue.pop_front() {
        let level = from[at]?.1;
        for &next in &near[at] {
            match from[next] {
                None => {
                    from[next] = Some((at, level + 1));
                    queue.push_back(next);
                }
                Some((_, other)) if other == level => return Some(join(&from, at, next)),
                Some(_) => {}
            }
        }
    }
    None
}

/// The ring closed by an edge between two vertices of one level: up from both to where they meet.
fn join(from: &[Option<(usize, usize)>], a: usize, b: usize) -> Vec<Row> {
    let up = |v: usize| from[v].map_or(v, |entry| entry.0);
    let (mut left, mut right) = (vec![a], vec![b]);
    let (mut a, mut b) = (a, b);
    while a != b {
        (a, b) = (up(a), up(b));
        left.push(a);
        if a != b {
            right.push(b);
        }
    }
    left.extend(right.into_iter().rev());
    left.into_iter().map(Row::new).collect()
}

fn impossible(reduced: &Reduced, ring: &[Row]) -> Finding {
    let rows = reduced.table.len();
    let why = if ring.is_empty() {
        format!(
            "The search tried all codes of {} bits, and if there were any for {rows} rows, {} bits would do.",
            rows - 1,
            rows - 1
        )
    } else {
        let names: Vec<&str> = ring.iter().map(|&row| reduced.table.name(row)).collect();
        format!(
            "Rows {} move to one another directly, each to the next and the last to the first; along such a ring the \
             codes change one bit a step, so its length would have to be even, and it is {}.",
            names.join(", "),
            ring.len()
        )
    };
    Finding::new(
        Level::Error,
        "adjacency-impossible",
        format!(
            "No codes let every move change one bit a step. {why} Use the shared-row method, which adds spare codes, or the \
             single-step or one-hot method."
        ),
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_shortest_odd_ring_is_found() {
        let pairs = [(0, 1, 0), (1, 2, 0), (2, 3, 0), (3, 4, 0), (0, 4, 0), (0, 3, 0)];
        assert_eq!(odd_ring(5, &pairs).map(|ring| ring.len()), Some(3));
        assert_eq!(odd_ring(5, &pairs[..5]).map(|ring| ring.len()), Some(5));
        assert_eq!(odd_ring(5, &pairs[..4]), None);
    }
}
