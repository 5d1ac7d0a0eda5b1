//! Depth-first search for codes of few bits, with the whole cube in one machine word.
//!
//! Points are put on the corners of the cube one after the other, those that have most to do with the ones already
//! there first. After each, every basin whose stable row is placed must still be able to reach its placed points:
//! through placed points that it may use, and through empty corners, but no more of these than points that are still to
//! come and could serve. A breadth-first step is a few shifts of the word. What survives to the end is tried out with the
//! real trees.
//!
//! Symmetry: the first point gets code 0, and each further one uses new bits from the lowest up.
//!
//! Exact unless it gives up. Cost: exponential in the points; a node costs about the number of basins in all columns.
//! It is meant for the usual ten rows and gives up on more, where learning from conflicts pays: see
//! [search](crate::codes::search).

use crate::base::{Code, Effort, Halted};
use crate::codes::net::{Net, Part};
use crate::codes::search::{Placement, settle};

/// The most bits: the corners are the bits of a word.
pub(super) const BITS: usize = 6;

/// What came of a search.
pub(super) enum Outcome {
    /// Codes.
    Found(Placement),
    /// A proof that there are none.
    Nothing,
    /// Too many nodes.
    GaveUp,
}

/// A point's part in a basin, as flags.
const PASSES: u8 = 1;
const SOURCE: u8 = 2;
const SINK: u8 = 4;

/// Empty corners that a way is allowed one by one; beyond, any number.
const COUNTED: usize = 3;

/// Codes of `bits` bits in which no way is longer than `limit`, within `nodes` nodes.
///
/// # Errors
/// The effort ran out.
pub(super) fn place(
    net: &Net,
    bits: usize,
    limit: usize,
    nodes: u64,
    effort: &Effort,
) -> Result<Outcome, Halted> {
    let mut search = Search::new(net, bits, limit, nodes, effort);
    let found = search.put(0, 0)?;
    Ok(match found {
        Some(placement) => Outcome::Found(placement),
        None if search.nodes == 0 => Outcome::GaveUp,
        None => Outcome::Nothing,
    })
}

/// One basin of one column, and where its points stand.
#[derive(Clone, Default)]
struct Demand {
    /// Corners of placed points that ways may pass.
    passes: u64,
    /// Corners of placed sources.
    sources: u64,
    /// Corner of the stable row, once it is placed.
    sink: u64,
    /// Points still to come that ways might pass.
    to_come: usize,
}

struct Search<'a> {
    net: &'a Net,
    bits: usize,
    limit: usize,
    nodes: u64,
    effort: &'a Effort<'a>,
    /// Points in the order in which they are placed.
    order: Vec<usize>,
    /// For each point, its part in every demand.
    parts: Vec<Vec<u8>>,
    demands: Vec<Demand>,
    /// How much two points have to do with one another.
    ties: Vec<u32>,
    codes: Vec<Code>,
    cube: u64,
    occupied: u64,
}

impl<'a> Search<'a> {
    fn new(net: &'a Net, bits: usize, limit: usize, nodes: u64, effort: &'a Effort<'a>) -> Self {
        let points = net.len();
        let mut parts = vec![Vec::new(); points];
        let mut demands = Vec::new();
        let mut ties = vec![0; points * points];
        for field in &net.fields {
            for (b, basin) in field.basins.iter().enumerate() {
                let mut demand = Demand::default();
                for (p, list) in parts.iter_mut().enumerate() {
                    let mine = match field.parts[p] {
                        Part::Basin(own) => usize::from(own) == b,
                        Part::Free => true,
                        Part::Taken => false,
                    };
                    let is = |points: &[u16]| points.contains(&(p as u16));
                    let mut part = if mine && !basin.barred[p] { PASSES } else { 0 };
                    part |= if is(&basin.sources) { SOURCE } else { 0 };
                    part |= if is(&basin.sinks) { SINK } else { 0 };
                    demand.to_come += usize::from(part & PASSES != 0);
                    list.push(part);
                }
                for (&sink, &source) in
                    basin.sinks.iter().flat_map(|a| basin.sources.iter().map(move |b| (a, b)))
                {
                    let (a, b) = (usize::from(sink), usize::from(source));
                    // The fewer detours there are, the more a direct step is needed.
                    let weight = 12 / demand.to_come.clamp(1, 12) as u32 + 1;
                    ties[a * points + b] += weight;
                    ties[b * points + a] += weight;
                }
                demands.push(demand);
            }
        }
        let order = order(net, &ties);
        let cube = if bits == BITS { u64::MAX } else { (1 << (1u64 << bits)) - 1 };
        let codes = vec![Code(0); points];
        Search { net, bits, limit, nodes, effort, order, parts, demands, ties, codes, cube, occupied: 0 }
    }

    /// Places the points from `depth` on; `used` bits are in use so far.
    fn put(&mut self, depth: usize, used: usize) -> Result<Option<Placement>, Halted> {
        let Some(&point) = self.order.get(depth) else {
            return settle(self.net, &self.codes, self.bits, self.limit, self.effort);
        };
        for (code, bits) in self.candidates(point, depth, used) {
            if self.nodes == 0 {
                return Ok(None);
            }
            self.nodes -= 1;
            self.effort.spend(self.demands.len() as u64 / 16 + 1)?;
            self.set(point, code, true);
            if self.hopeful()
                && let Some(found) = self.put(depth + 1, bits)?
            {
                return Ok(Some(found));
            }
            self.set(point, code, false);
        }
        Ok(None)
    }

    /// Corners for a point, the nearest to what it must reach first, with the number of bits then in use.
    fn candidates(&self, point: usize, depth: usize, used: usize) -> Vec<(u32, usize)> {
        if depth == 0 {
            return vec![(0, 0)];
        }
        let placed = &self.order[..depth];
        // Spare codes are alike: they ascend.
        let before =
            placed.last().filter(|&&p| self.net.owner[p].is_none() && self.net.owner[point].is_none());
        let floor = before.map_or(0, |&p| self.codes[p].0 + 1);
        let mut list: Vec<(u32, u32, usize)> = Vec::new();
        for code in floor..1 << self.bits {
            let fresh = code >> used;
            // New bits from the lowest up: all ones.
            let lowest_up = fresh & (fresh + 1) == 0 || before.is_some();
            if self.occupied >> code & 1 == 1 || !lowest_up {
                continue;
            }
            let cost = placed
                .iter()
                .map(|&p| self.ties[point * self.net.len() + p] * self.codes[p].distance(Code(code)))
                .sum();
            let bits = used.max((u32::BITS - code.leading_zeros()) as usize);
            list.push((cost, code, bits));
        }
        list.sort_unstable();
        list.into_iter().map(|(_, code, bits)| (code, bits)).collect()
    }

    fn set(&mut self, point: usize, code: u32, on: bool) {
        let corner = 1u64 << code;
        self.codes[point] = Code(code);
        self.occupied ^= corner;
        for (demand, &part) in self.demands.iter_mut().zip(&self.parts[point]) {
            if part & PASSES != 0 {
                demand.passes ^= corner;
                demand.to_come = if on { demand.to_come - 1 } else { demand.to_come + 1 };
            }
            if part & SOURCE != 0 {
                demand.sources ^= corner;
            }
            if part & SINK != 0 {
                demand.sink ^= corner;
            }
        }
    }

    fn hopeful(&self) -> bool {
        let empty = self.cube & !self.occupied;
        self.demands
            .iter()
            .all(|demand| demand.sink == 0 || demand.sources == 0 || self.reaches(demand, empty))
    }

    /// Whether the stable row of a demand can be reached from all its placed sources.
    fn reaches(&self, demand: &Demand, empty: u64) -> bool {
        if demand.to_come == 0 || demand.to_come > COUNTED {
            let open = if demand.to_come == 0 { demand.passes } else { demand.passes | empty };
            let (mut reached, mut got) = (demand.sink, 0);
            for _ in 0..self.limit {
                let next = self.spread(reached);
                got |= next & demand.sources;
                if got == demand.sources {
                    return true;
                }
                let grown = reached | (next & open);
                if grown == reached {
                    return false;
                }
                reached = grown;
            }
            return false;
        }
        // Reached with at most j empty corners on the way.
        let mut reached = [demand.sink; COUNTED + 1];
        let mut got = 0;
        for _ in 0..self.limit {
            let next = reached.map(|corners| self.spread(corners));
            got |= next[demand.to_come] & demand.sources;
            if got == demand.sources {
                return true;
            }
            let mut grown = reached;
            for j in 0..=demand.to_come {
                grown[j] |= next[j] & demand.passes;
                if j > 0 {
                    grown[j] |= grown[j - 1] | (next[j - 1] & empty);
                }
            }
            if grown == reached {
                return false;
            }
            reached = grown;
        }
        false
    }

    /// All corners one bit away from some of the given ones.
    fn spread(&self, corners: u64) -> u64 {
        const LOW: [u64; BITS] = [
            0x5555_5555_5555_5555,
            0x3333_3333_3333_3333,
            0x0f0f_0f0f_0f0f_0f0f,
            0x00ff_00ff_00ff_00ff,
            0x0000_ffff_0000_ffff,
            0x0000_0000_ffff_ffff,
        ];
        let mut next = 0;
        for (bit, low) in LOW.iter().enumerate().take(self.bits) {
            next |= (corners & low) << (1 << bit) | (corners >> (1 << bit)) & low;
        }
        next
    }
}

/// Rows by their ties to the ones before, the one with most ties first; spare codes last.
fn order(net: &Net, ties: &[u32]) -> Vec<usize> {
    let points = net.len();
    let mut order: Vec<usize> = Vec::with_capacity(points);
    let mut rest: Vec<usize> = (0..points).filter(|&p| net.owner[p].is_some()).collect();
    let total = |p: usize| -> u32 { ties[p * points..(p + 1) * points].iter().sum() };
    while !rest.is_empty() {
        let bound = |p: usize| -> u32 { order.iter().map(|&o| ties[p * points + o]).sum() };
        let best = (0..rest.len()).rev().max_by_key(|&i| (bound(rest[i]), total(rest[i]))).unwrap_or(0);
        let point = rest.remove(best);
        order.push(point);
    }
    order.extend((0..points).filter(|&p| net.owner[p].is_none()));
    order
}
