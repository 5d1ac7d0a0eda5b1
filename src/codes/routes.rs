//! Ways through given codes, and what is missing where there are none.
//!
//! In each column the basins want trees that share no point: breadth first from the stable row, so that every way is
//! shortest among the points that the basin may use. Where a point cannot reach its stable row, a *cut* lists everything
//! of which at least one must come true in any better assignment: two points become adjacent, a free point is lent to
//! the basin, an open output takes the other value. The search for codes adds such cuts until nothing is missing.
//!
//! Exact for one basin alone; how free points are shared between basins is first tried greedily, and left to the
//! caller's search where that fails.
//!
//! Cost: a tree takes time linear in points times bits, a cut at most quadratic in the points.

use std::collections::VecDeque;

use crate::codes::net::{Basin, Field, Net, Part};

/// No hop, or out of reach.
pub(super) const NONE: u16 = u16::MAX;

/// How the points stand for now.
pub(super) struct Stand<'a> {
    /// Points one bit away, for each point.
    pub near: &'a [Vec<u16>],
    /// Outputs of each point, all of them settled. Only watched ones count.
    pub values: &'a [u32],
}

/// Something that would help a point on its way.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Need {
    /// Two points (lower, higher) differ in one bit.
    Near(u16, u16),
    /// A free point is lent to a basin of the field.
    Lend(u16, u16),
    /// An open output of a point takes this value.
    Output(u16, u8, bool),
}

/// Shortest ways from the points of one basin to its stable row.
#[derive(Debug, Clone, Default)]
pub(super) struct Tree {
    /// Steps to the stable row; `NONE` if there is no way.
    pub steps: Vec<u16>,
    /// The next point.
    pub hop: Vec<u16>,
}

/// Who may use the free points of a field: `lent[point]` is the index of the basin, or `NONE`.
pub(super) type Lent = [u16];

/// Grows the tree of basin `b`; without `lent` every free point may be used.
pub(super) fn tree(net: &Net, field: &Field, b: usize, stand: &Stand, lent: Option<&Lent>) -> Tree {
    let basin = &field.basins[b];
    let mut tree = Tree { steps: vec![NONE; net.len()], hop: vec![NONE; net.len()] };
    let mut queue: VecDeque<u16> = VecDeque::with_capacity(net.len());
    for &sink in &basin.sinks {
        tree.steps[usize::from(sink)] = 0;
        queue.push_back(sink);
    }
    while let Some(v) = queue.pop_front() {
        let at = usize::from(v);
        if basin.barred[at] {
            continue;
        }
        for &u in &stand.near[at] {
            let from = usize::from(u);
            if tree.steps[from] == NONE
                && usable(field, b, from, lent)
                && basin.spoilt(stand.values[from], stand.values[at]) == 0
            {
                tree.steps[from] = tree.steps[at] + 1;
                tree.hop[from] = v;
                queue.push_back(u);
            }
        }
    }
    tree
}

/// The way from a point, itself first, its stable row last. The point must be in the tree.
pub(super) fn way(tree: &[u16], from: u16) -> Vec<u16> {
    let mut way = vec![from];
    let mut at = from;
    while tree[usize::from(at)] != NONE {
        at = tree[usize::from(at)];
        way.push(at);
    }
    way
}

/// Next points for all ways of a field, none longer than `limit` steps, the free points shared out greedily. `None` if
/// this finds no solution, which proves nothing.
pub(super) fn share(net: &Net, field: &Field, stand: &Stand, limit: usize) -> Option<Vec<u16>> {
    let count = field.basins.len();
    let backward: Vec<usize> = (0..count).rev().collect();
    let forward: Vec<usize> = (0..count).collect();
    let mut orders = vec![forward.clone(), backward];
    // Each basin once as the first one; enough for the few basins that a column has.
    orders.extend((1..count.saturating_sub(1)).map(|first| {
        let mut order = forward.clone();
        order.rotate_left(first);
        order
    }));
    orders.truncate(count.max(1));
    orders.iter().find_map(|order| share_in(net, field, stand, limit, order))
}

fn share_in(net: &Net, field: &Field, stand: &Stand, limit: usize, order: &[usize]) -> Option<Vec<u16>> {
    let mut hop = vec![NONE; net.len()];
    let mut lent = vec![NONE; net.len()];
    for &b in order {
        for (slot, used) in lent.iter_mut().zip(&hop) {
            if *slot == NONE && *used == NONE {
                *slot = b as u16;
            }
        }
        let tree = tree(net, field, b, stand, Some(&lent));
        if !within(&field.basins[b], &tree, limit) {
            return None;
        }
        adopt(&field.basins[b], &tree, &mut hop);
        for (slot, used) in lent.iter_mut().zip(&hop) {
            if *used == NONE && *slot == b as u16 {
                *slot = NONE;
            }
        }
    }
    Some(hop)
}

/// Whether every source of the basin has a way of at most `limit` steps.
pub(super) fn within(basin: &Basin, tree: &Tree, limit: usize) -> bool {
    basin.sources.iter().all(|&t| {
        let steps = tree.steps[usize::from(t)];
        steps != NONE && usize::from(steps) <= limit
    })
}

/// Copies the hops that ways of the basin use.
pub(super) fn adopt(basin: &Basin, tree: &Tree, hop: &mut [u16]) {
    for &source in &basin.sources {
        let mut at = usize::from(source);
        while hop[at] == NONE && tree.hop[at] != NONE {
            hop[at] = tree.hop[at];
            at = usize::from(hop[at]);
        }
    }
}

/// What is missing for basin `b`: each list holds at least one thing that comes true in every assignment in which all
/// sources have a way (the flag is false), or one of at most `limit` steps (the flag is true). Empty if all have one.
pub(super) fn cuts(
    net: &Net,
    field: &Field,
    b: usize,
    stand: &Stand,
    lent: Option<&Lent>,
    limit: usize,
) -> Vec<(Vec<Need>, bool)> {
    let basin = &field.basins[b];
    let tree = tree(net, field, b, stand, lent);
    let mut list = Vec::new();
    let steps = |t: u16| tree.steps[usize::from(t)];
    let lost: Vec<u16> = basin.sources.iter().copied().filter(|&t| steps(t) == NONE).collect();
    let far = basin.sources.iter().copied().filter(|&t| usize::from(steps(t)) > limit);
    let (late, tight): (Vec<u16>, bool) = if lost.is_empty() { (far.collect(), true) } else { (lost, false) };
    if late.is_empty() {
        return list;
    }
    let reach = if tight { limit } else { usize::from(NONE) };
    list.push((cut(net, field, b, stand, lent, &tree.steps, reach, Side::Goal), tight));
    for t in late {
        let ahead = ahead(net, field, b, stand, lent, t);
        list.push((cut(net, field, b, stand, lent, &ahead, reach, Side::Start(t)), tight));
    }
    list
}

/// Whether a point may stand in the tree of basin `b`.
fn usable(field: &Field, b: usize, point: usize, lent: Option<&Lent>) -> bool {
    match field.parts[point] {
        Part::Basin(own) => usize::from(own) == b,
        Part::Free => !field.basins[b].barred[point] && lent.is_none_or(|lent| usize::from(lent[point]) == b),
        Part::Taken => false,
    }
}

/// Steps from a source to each point, forward.
fn ahead(net: &Net, field: &Field, b: usize, stand: &Stand, lent: Option<&Lent>, from: u16) -> Vec<u16> {
    let basin = &field.basins[b];
    let mut steps = vec![NONE; net.len()];
    let mut queue = VecDeque::from([from]);
    steps[usize::from(from)] = 0;
    while let Some(u) = queue.pop_front() {
        let at = usize::from(u);
        for &w in &stand.near[at] {
            let to = usize::from(w);
            if steps[to] == NONE
                && !basin.barred[to]
                && usable(field, b, to, lent)
                && basin.spoilt(stand.values[at], stand.values[to]) == 0
            {
                steps[to] = steps[at] + 1;
                queue.push_back(w);
            }
        }
    }
    steps
}

/// From which end the steps of a cut are counted.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Side {
    Goal,
    Start(u16),
}

/// Everything that would let a way gain on `steps`: any way of at most `reach` steps to a point that is further off now
/// has a first step that skips a level, and that step is not possible now.
#[expect(clippy::too_many_arguments, reason = "the state of the search, and a side")]
fn cut(
    net: &Net,
    field: &Field,
    b: usize,
    stand: &Stand,
    lent: Option<&Lent>,
    steps: &[u16],
    reach: usize,
    side: Side,
) -> Vec<Need> {
    let basin = &field.basins[b];
    let may_stand = |p: usize| match field.parts[p] {
        Part::Basin(own) => usize::from(own) == b,
        Part::Free => !basin.barred[p],
        Part::Taken => false,
    };
    let passes = |p: usize| !basin.barred[p] || side == Side::Start(p as u16);
    let mut needs = Vec::new();
    for near in (0..net.len()).filter(|&p| steps[p] != NONE && usize::from(steps[p]) < reach && passes(p)) {
        for beyond in (0..net.len()).filter(|&p| may_stand(p)) {
            let skips = steps[beyond] == NONE
                || (reach != usize::from(NONE) && steps[beyond] >= steps[near].saturating_add(2));
            if !skips || (side != Side::Goal && basin.barred[beyond]) {
                continue;
            }
            let (from, to) = if side == Side::Goal { (beyond, near) } else { (near, beyond) };
            step_needs(net, field, b, stand, lent, from, to, &mut needs);
        }
    }
    needs.sort_unstable();
    needs.dedup();
    needs
}

/// What would make the step possible that is impossible now: the literals of one condition that it misses.
#[expect(clippy::too_many_arguments, reason = "the state of the search, and a step")]
fn step_needs(
    net: &Net,
    field: &Field,
    b: usize,
    stand: &Stand,
    lent: Option<&Lent>,
    from: usize,
    to: usize,
    needs: &mut Vec<Need>,
) {
    let basin = &field.basins[b];
    let fixed = |p: usize| net.watched & net.values[p].care;
    let spoilt = basin.spoilt(stand.values[from], stand.values[to]);
    if spoilt & fixed(from) & fixed(to) != 0 {
        return;
    }
    for p in [from, to] {
        if field.parts[p] == Part::Free && !usable(field, b, p, lent) {
            needs.push(Need::Lend(p as u16, b as u16));
            return;
        }
    }
    if spoilt != 0 {
        let j = spoilt.trailing_zeros();
        for p in [from, to] {
            if fixed(p) >> j & 1 == 0 {
                let now = stand.values[p] >> j & 1 == 1;
                needs.push(Need::Output(p as u16, j as u8, !now));
            }
        }
        return;
    }
    needs.push(Need::Near(from.min(to) as u16, from.max(to) as u16));
}
