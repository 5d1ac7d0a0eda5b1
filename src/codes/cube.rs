//! Depth-first search for codes of few bits, with the whole cube in one machine word.
//!
//! Points are put on the corners of the cube one after the other. Before each, every basin says what is still possible:
//! its stable row must be able to reach its placed points through placed points that it may use and through empty
//! corners, but no more of these than there are points still to come that could serve; and what is still to come must
//! fall where it can be reached. So every row has a set of corners left, and the row with the fewest comes next. A
//! breadth-first step is a few shifts of the word. What survives to the end is tried out with the real trees.
//!
//! Symmetry: the first point gets code 0, each further one uses new bits from the lowest up, and spare codes ascend.
//!
//! Exact unless it gives up. Cost: exponential in the points; a node costs about the number of basins in all columns,
//! a microsecond or so. It is meant for the usual ten rows and gives up on many more, where learning from conflicts pays:
//! see [search](crate::codes::search).

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
    let found = search.put(0)?;
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
    /// All sources, and whether each may also be passed.
    starts: Vec<(usize, bool)>,
    /// The stable row.
    goal: usize,
}

struct Search<'a> {
    net: &'a Net,
    bits: usize,
    limit: usize,
    nodes: u64,
    effort: &'a Effort<'a>,
    /// For each point, its part in every demand.
    parts: Vec<Vec<u8>>,
    demands: Vec<Demand>,
    /// How much two points have to do with one another.
    ties: Vec<u32>,
    codes: Vec<Code>,
    placed: Vec<bool>,
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
                let mut demand = Demand { goal: basin.goal.at(), ..Demand::default() };
                for (p, list) in parts.iter_mut().enumerate() {
                    let mine = match field.parts[p] {
                        Part::Basin(own) => usize::from(own) == b,
                        Part::Free => true,
                        Part::Taken => false,
                    };
                    let mut part = if mine && !basin.barred[p] { PASSES } else { 0 };
                    if basin.sources.contains(&(p as u16)) {
                        part |= SOURCE;
                        demand.starts.push((p, part & PASSES != 0));
                    }
                    part |= if p == demand.goal { SINK } else { 0 };
                    demand.to_come += usize::from(part & PASSES != 0);
                    list.push(part);
                }
                for &(source, _) in &demand.starts {
                    // The fewer detours there are, the more a direct step is needed.
                    let weight = 12 / demand.to_come.clamp(1, 12) as u32 + 1;
                    ties[demand.goal * points + source] += weight;
                    ties[source * points + demand.goal] += weight;
                }
                demands.push(demand);
            }
        }
        let cube = if bits == BITS { u64::MAX } else { (1 << (1u64 << bits)) - 1 };
        let (codes, placed) = (vec![Code(0); points], vec![false; points]);
        Search { net, bits, limit, nodes, effort, parts, demands, ties, codes, placed, cube, occupied: 0 }
    }

    /// Places what is not placed yet; `used` bits are in use so far.
    fn put(&mut self, used: usize) -> Result<Option<Placement>, Halted> {
        self.effort.spend(self.demands.len() as u64 / 16 + 1)?;
        let Some(domains) = self.domains() else { return Ok(None) };
        let Some(point) = self.next(&domains) else {
            return settle(self.net, &self.codes, self.bits, self.limit, self.effort);
        };
        for (code, bits) in self.candidates(point, domains[point], used) {
            if self.nodes == 0 {
                return Ok(None);
            }
            self.nodes -= 1;
            self.set(point, code, true);
            let found = self.put(bits)?;
            self.set(point, code, false);
            if found.is_some() {
                return Ok(found);
            }
        }
        Ok(None)
    }

    /// The point to place next: the one with the fewest corners left, of these the one with the strongest ties to placed
    /// ones. Spare codes come last.
    fn next(&self, domains: &[u64]) -> Option<usize> {
        let points = self.net.len();
        let bound = |p: usize| -> u32 {
            let ties = &self.ties[p * points..(p + 1) * points];
            ties.iter()
                .zip(&self.placed)
                .filter(|&(_, &placed)| placed || self.occupied == 0)
                .map(|(t, _)| t)
                .sum()
        };
        let rows = (0..points).filter(|&p| !self.placed[p] && self.net.owner[p].is_some());
        rows.min_by_key(|&p| (domains[p].count_ones(), std::cmp::Reverse(bound(p))))
            .or_else(|| (0..points).find(|&p| !self.placed[p]))
    }

    /// Corners for a point, the nearest to what it must reach first, with the number of bits then in use.
    fn candidates(&self, point: usize, domain: u64, used: usize) -> Vec<(u32, usize)> {
        if self.occupied == 0 {
            return vec![(0, 0)];
        }
        // Spare codes are alike: they ascend.
        let spare = self.net.owner[point].is_none();
        let before = point.checked_sub(1).filter(|&p| spare && self.net.owner[p].is_none());
        let floor = before.map_or(0, |p| self.codes[p].0 + 1);
        let points = self.net.len();
        let mut list: Vec<(u32, u32, usize)> = Vec::new();
        for code in floor..1 << self.bits {
            let fresh = code >> used;
            // New bits from the lowest up: all ones.
            let lowest_up = fresh & (fresh + 1) == 0 || before.is_some();
            if domain >> code & 1 == 0 || !lowest_up {
                continue;
            }
            let cost = (0..points)
                .filter(|&p| self.placed[p])
                .map(|p| self.ties[point * points + p] * self.codes[p].distance(Code(code)))
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
        self.placed[point] = on;
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

    /// The corners that each point may still take, as far as single basins can tell; `None` if that is none for some
    /// point, or if a placed point is cut off.
    fn domains(&self) -> Option<Vec<u64>> {
        let empty = self.cube & !self.occupied;
        let mut domains = vec![empty; self.net.len()];
        for demand in &self.demands {
            if demand.sink != 0 {
                let [all, fewer] = self.flood(demand, demand.sink, empty);
                if demand.sources & !all != 0 {
                    return None;
                }
                for &(start, passes) in &demand.starts {
                    // A point that is to come is no help to itself.
                    domains[start] &= if passes { fewer } else { all };
                }
            } else if demand.sources != 0 {
                let one = demand.sources & demand.sources.wrapping_neg();
                domains[demand.goal] &= self.flood(demand, one, empty)[1];
            }
        }
        let lost = |p: usize| !self.placed[p] && domains[p] == 0;
        if (0..self.net.len()).any(lost) { None } else { Some(domains) }
    }

    /// All corners at the end of a way from `start` within the limit: with as many empty corners on the way as there are
    /// points to come, and with one fewer.
    fn flood(&self, demand: &Demand, start: u64, empty: u64) -> [u64; 2] {
        let budget = demand.to_come;
        if budget == 0 || budget > COUNTED {
            let open = if budget == 0 { demand.passes } else { demand.passes | empty };
            let (mut reached, mut got) = (start, 0);
            for _ in 0..self.limit {
                let next = self.spread(reached);
                got |= next;
                let grown = reached | (next & open);
                if grown == reached {
                    break;
                }
                reached = grown;
            }
            return [got; 2];
        }
        // Reached with at most j empty corners on the way.
        let mut reached = [start; COUNTED + 1];
        let mut got = [0; 2];
        for _ in 0..self.limit {
            let mut grown = reached;
            let mut next = 0;
            for j in 0..=budget {
                let through = next & empty;
                next = self.spread(reached[j]);
                grown[j] |= next & demand.passes | through;
                if j + 1 == budget {
                    got[1] |= next;
                }
            }
            got[0] |= next;
            if grown == reached {
                break;
            }
            reached = grown;
        }
        got
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
