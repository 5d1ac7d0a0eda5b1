//! The search for codes whose ways change one bit a step.
//!
//! Points get codes of a given number of bits, all different, such that in every column the basins of the
//! [net](crate::codes::net) have disjoint trees. The codes are a satisfiability problem; the trees are not written into
//! it. Each model is tried out on the table, and what is missing goes back as *cuts* (see
//! [routes](crate::codes::routes)) until nothing is missing or no model is left. Only pairs of points that some cut
//! names ever get a variable "differ in one bit"; who may use a free point is a variable only in columns where sharing
//! greedily failed.
//!
//! Symmetry: the point with the most neighbours that it must have gets code 0 and those neighbours one bit each; the
//! remaining bits are put in the order in which rows first use them, spare codes in ascending order. A free parity
//! variable for each point lets the solver see odd rings at once.
//!
//! Exact: `Ok(None)` is a proof that there are no such codes.
//!
//! # Complexity
//!
//! NP-complete (it embeds graphs in a cube). With p points and k bits the fixed part has O(p² k) clauses, each cut at most
//! O(p²) literals. Tables of ten rows take well under a millisecond; what is long is the proof that no codes of k bits
//! exist when k is just too small and rows are many.
//!
//! # References
//!
//! - D. A. Huffman, "The synthesis of sequential switching circuits", J. Franklin Institute 257, 1954: one bit a step,
//!   and rows that others may pass through.
//! - C. J. Tan, "State assignments for asynchronous sequential machines", IEEE Trans. Computers C-20, 1971: spare rows.
//! - I. Havel and J. Morávek, "B-valuations of graphs", Czechoslovak Math. J. 22, 1972: which graphs lie in a cube.

use crate::base::{Code, Effort, Halted};
use crate::codes::cube::{self, Outcome};
use crate::codes::net::{Net, Part};
use crate::codes::routes::{self, NONE, Need, Stand};
use crate::codes::values::{Step, Way};
use crate::search::sat::{Lit, Sat};

/// Nodes of the depth-first search before the solver takes over.
const NODES: u64 = 100_000;

/// Codes with the ways through them.
#[derive(Debug, Clone)]
pub(super) struct Placement {
    /// The code of each point.
    pub codes: Vec<Code>,
    /// For each field of the net, the next point of each point that is on a way; `NONE` elsewhere.
    pub hops: Vec<Vec<u16>>,
    /// Steps of the longest way.
    pub longest: usize,
    /// Spare points that some way passes.
    pub used: Vec<bool>,
    /// Whether the longest way was proved shortest.
    pub shortest: bool,
}

/// Codes of `bits` bits for the points of the net, with the shortest longest way. `Ok(None)`: there are none.
///
/// # Errors
/// The effort ran out before the first solution.
pub(super) fn place(net: &Net, bits: usize, effort: &Effort) -> Result<Option<Placement>, Halted> {
    if bits < usize::BITS as usize && net.len() > 1 << bits {
        return Ok(None);
    }
    let start = match in_small_cube(net, bits, effort)? {
        Start::Settled(answer) => return Ok(answer),
        Start::Best(placement) => Some(placement),
        Start::Unknown => None,
    };
    match (Placer::free(net, bits, effort), start) {
        (Ok(Some(mut placer)), Some(best)) => Ok(Some(placer.shorten(best, effort))),
        (Ok(Some(placer)), None) => placer.shortest(effort),
        (_, Some(best)) => Ok(Some(best)),
        (answer, None) => answer.map(|_| None),
    }
}

/// What the depth-first search found out.
enum Start {
    /// Codes with the shortest longest way, or that there are none.
    Settled(Option<Placement>),
    /// Codes.
    Best(Placement),
    /// Nothing.
    Unknown,
}

/// Tries the depth-first search: first for any codes, then for ways of 1, 2, .. steps.
fn in_small_cube(net: &Net, bits: usize, effort: &Effort) -> Result<Start, Halted> {
    if bits > cube::BITS {
        return Ok(Start::Unknown);
    }
    let mut best = match cube::place(net, bits, usize::from(NONE), NODES, effort)? {
        Outcome::Found(placement) => placement,
        Outcome::Nothing => return Ok(Start::Settled(None)),
        Outcome::GaveUp => return Ok(Start::Unknown),
    };
    best.shortest = false;
    for limit in 1..best.longest {
        match cube::place(net, bits, limit, NODES, effort) {
            Ok(Outcome::Found(mut better)) => {
                better.shortest = true;
                return Ok(Start::Settled(Some(better)));
            }
            Ok(Outcome::Nothing) => {}
            Ok(Outcome::GaveUp) => return Ok(Start::Best(best)),
            Err(Halted) => return Ok(Start::Settled(Some(best))),
        }
    }
    best.shortest = true;
    Ok(Start::Settled(Some(best)))
}

/// Ways through given codes, none longer than `limit`, if there are any.
///
/// # Errors
/// The effort ran out.
pub(super) fn settle(
    net: &Net,
    codes: &[Code],
    bits: usize,
    limit: usize,
    effort: &Effort,
) -> Result<Option<Placement>, Halted> {
    let near = neighbours(codes, bits);
    let values: Vec<u32> = net.values.iter().map(|word| word.ones).collect();
    let stand = Stand { near: &near, values: &values };
    // Open outputs tie the columns together: then only the solver can tell.
    let open = (0..net.len()).any(|p| net.open(p) != 0);
    let mut hops = Vec::with_capacity(net.fields.len());
    if !open {
        for field in &net.fields {
            if field
                .basins
                .iter()
                .enumerate()
                .any(|(b, basin)| !routes::within(basin, &routes::tree(net, field, b, &stand, None), limit))
            {
                return Ok(None);
            }
            hops.extend(routes::share(net, field, &stand, limit));
        }
        if hops.len() == net.fields.len() {
            return Ok(Some(placement(net, codes.to_vec(), hops)));
        }
    }
    let mut placer = Placer::fixed(net, codes, bits);
    let tight = placer.sat.variable();
    placer.solve(limit, Some(tight), effort)
}

/// Ways through given codes, with the shortest longest way. `Ok(None)`: there are none.
///
/// # Errors
/// The effort ran out before the first solution.
pub(super) fn route(
    net: &Net,
    codes: &[Code],
    bits: usize,
    effort: &Effort,
) -> Result<Option<Placement>, Halted> {
    Placer::fixed(net, codes, bits).shortest(effort)
}

/// The pairs of points that must be adjacent, whatever the codes, with the index of the field that asks for it first.
pub(super) fn required(net: &Net) -> Vec<(u16, u16, usize)> {
    let mut pairs: Vec<(u16, u16, usize)> = seeds(net)
        .into_iter()
        .filter_map(|(f, cut)| match cut.as_slice() {
            [Need::Near(a, b)] => Some((*a, *b, f)),
            _ => None,
        })
        .collect();
    pairs.sort_unstable();
    pairs.dedup_by_key(|pair| (pair.0, pair.1));
    pairs
}

/// What every point needs to have a first, and every stable row a last step.
fn seeds(net: &Net) -> Vec<(usize, Vec<Need>)> {
    let near = vec![Vec::new(); net.len()];
    let values: Vec<u32> = net.values.iter().map(|word| word.ones).collect();
    let stand = Stand { near: &near, values: &values };
    let mut list = Vec::new();
    for (f, field) in net.fields.iter().enumerate() {
        for b in 0..field.basins.len() {
            let cuts = routes::cuts(net, field, b, &stand, None, usize::from(NONE));
            list.extend(cuts.into_iter().map(|(cut, _)| (f, cut)));
        }
    }
    list
}

/// The point with the most required neighbours, and these.
fn hub(net: &Net, pairs: &[(u16, u16, usize)]) -> (usize, Vec<u16>) {
    let mut near: Vec<Vec<u16>> = vec![Vec::new(); net.len()];
    for &(a, b, _) in pairs {
        near[usize::from(a)].push(b);
        near[usize::from(b)].push(a);
    }
    let best = (0..net.len()).rev().max_by_key(|&p| near[p].len()).unwrap_or(0);
    (best, near.swap_remove(best))
}

/// The ways of a placement.
pub(super) fn ways(net: &Net, placement: &Placement) -> Vec<Way> {
    let mut ways = Vec::new();
    for (field, hop) in net.fields.iter().zip(&placement.hops) {
        for basin in &field.basins {
            for &source in &basin.sources {
                let Some(from) = net.owner[usize::from(source)] else { continue };
                let points = routes::way(hop, source);
                let path = points.iter().map(|&p| placement.codes[usize::from(p)]).collect();
                ways.push(Way { from, column: field.column, to: basin.goal, path, step: Step::OneBit });
            }
        }
    }
    ways
}

/// Drops bits that are the same in all codes.
pub(super) fn compress(bits: usize, mut placement: Placement) -> (usize, Placement) {
    let first = placement.codes[0].0;
    let varied = placement.codes.iter().fold(0, |varied, code| varied | (code.0 ^ first));
    let kept: Vec<usize> = (0..bits).filter(|&bit| varied >> bit & 1 == 1).collect();
    for code in &mut placement.codes {
        code.0 = kept.iter().enumerate().fold(0, |new, (to, &from)| new | (code.0 >> from & 1) << to);
    }
    (kept.len(), placement)
}

struct Placer<'a> {
    net: &'a Net,
    bits: usize,
    sat: Sat,
    /// Bits of the codes, point by point; empty if the codes are given.
    code: Vec<Lit>,
    given: Option<Vec<Code>>,
    /// "Differ in one bit", for pairs that a cut has named.
    near: Vec<Option<Lit>>,
    parity: Vec<Lit>,
    /// Field by field, where free points are shared by the solver: a literal for each point and basin.
    lend: Vec<Option<Vec<Option<Lit>>>>,
    /// The outputs that are open, point by point.
    output: Vec<Vec<Option<Lit>>>,
}

impl<'a> Placer<'a> {
    fn bare(net: &'a Net, bits: usize) -> Self {
        let mut sat = Sat::new();
        let outputs = (u32::BITS - net.watched.leading_zeros()) as usize;
        let output = (0..net.len())
            .map(|p| (0..outputs).map(|j| (net.open(p) >> j & 1 == 1).then(|| sat.variable())).collect())
            .collect();
        let near = vec![None; net.len() * net.len()];
        let lend = vec![None; net.fields.len()];
        Placer { net, bits, sat, code: Vec::new(), given: None, near, parity: Vec::new(), lend, output }
    }

    fn fixed(net: &'a Net, codes: &[Code], bits: usize) -> Self {
        Placer { given: Some(codes.to_vec()), ..Placer::bare(net, bits) }
    }

    /// A placer in which codes are to be found; `None` if there are none for a plain reason.
    fn free(net: &'a Net, bits: usize, effort: &Effort) -> Result<Option<Self>, Halted> {
        let points = net.len();
        effort.spend((points * points * bits / 20) as u64 + 1)?;
        let pairs = required(net);
        let (hub, around) = hub(net, &pairs);
        if around.len() > bits {
            return Ok(None);
        }
        let mut placer = Placer::bare(net, bits);
        placer.code = (0..points * bits).map(|_| placer.sat.variable()).collect();
        placer.parity = (0..points).map(|_| placer.sat.variable()).collect();
        placer.anchor(hub, &around);
        placer.order_bits(around.len());
        placer.all_different();
        placer.order_spares();
        for (f, cut) in seeds(net) {
            placer.add_cut(f, &cut, None);
        }
        Ok(Some(placer))
    }

    fn bit(&self, point: usize, bit: usize) -> Lit {
        self.code[point * self.bits + bit]
    }

    fn set(&mut self, point: usize, code: u32) {
        for bit in 0..self.bits {
            let lit = self.bit(point, bit);
            self.sat.clause(&[if code >> bit & 1 == 1 { lit } else { !lit }]);
        }
    }

    fn anchor(&mut self, hub: usize, around: &[u16]) {
        self.set(hub, 0);
        self.sat.clause(&[!self.parity[hub]]);
        for (bit, &p) in around.iter().enumerate() {
            self.set(usize::from(p), 1 << bit);
        }
    }

    /// A row may use a bit only if it or an earlier row uses the bit before; the first `named` bits are spoken for.
    fn order_bits(&mut self, named: usize) {
        let rows = self.net.owner.iter().take_while(|row| row.is_some()).count();
        let mut clause = Vec::with_capacity(rows + 1);
        for bit in named + 1..self.bits {
            for row in 0..rows {
                clause.clear();
                clause.push(!self.bit(row, bit));
                clause.extend((0..=row).map(|earlier| self.bit(earlier, bit - 1)));
                self.sat.clause(&clause);
            }
        }
    }

    fn all_different(&mut self) {
        let mut clause = Vec::with_capacity(self.bits);
        for a in 0..self.net.len() {
            for b in a + 1..self.net.len() {
                clause.clear();
                for bit in 0..self.bits {
                    let differ = self.sat.variable();
                    let (x, y) = (self.bit(a, bit), self.bit(b, bit));
                    self.sat.clause(&[!differ, x, y]);
                    self.sat.clause(&[!differ, !x, !y]);
                    clause.push(differ);
                }
                self.sat.clause(&clause);
            }
        }
    }

    /// Spare codes ascend, the last bit counting most.
    fn order_spares(&mut self) {
        let first = self.net.owner.iter().take_while(|row| row.is_some()).count();
        for lower in first..self.net.len().saturating_sub(1) {
            // `same` holds where all higher bits agree; the codes differ, so the order is strict.
            let mut same: Option<Lit> = None;
            for bit in (0..self.bits).rev() {
                let (x, y) = (self.bit(lower, bit), self.bit(lower + 1, bit));
                let guard = same.map(|lit| !lit);
                self.sat.clause(&guard.into_iter().chain([!x, y]).collect::<Vec<_>>());
                let next = self.sat.variable();
                self.sat.clause(&guard.into_iter().chain([x, y, next]).collect::<Vec<_>>());
                self.sat.clause(&guard.into_iter().chain([!x, !y, next]).collect::<Vec<_>>());
                same = Some(next);
            }
        }
    }

    /// The literal "the two points differ in one bit"; `None` if the codes are given and do not.
    fn near_lit(&mut self, a: u16, b: u16) -> Option<Lit> {
        if self.given.is_some() {
            return None;
        }
        let (a, b) = (usize::from(a), usize::from(b));
        let slot = a * self.net.len() + b;
        if let Some(lit) = self.near[slot] {
            return Some(lit);
        }
        let lit = self.sat.variable();
        self.near[slot] = Some(lit);
        let flips: Vec<Lit> = (0..self.bits).map(|_| self.sat.variable()).collect();
        self.sat.clause(&flips.iter().copied().chain([!lit]).collect::<Vec<_>>());
        for (bit, &flip) in flips.iter().enumerate() {
            let (x, y) = (self.bit(a, bit), self.bit(b, bit));
            self.sat.clause(&[!flip, x, y]);
            self.sat.clause(&[!flip, !x, !y]);
            self.sat.clause(&[!lit, flip, !x, y]);
            self.sat.clause(&[!lit, flip, x, !y]);
            for &other in &flips[..bit] {
                self.sat.clause(&[!flip, !other]);
            }
        }
        let (p, q) = (self.parity[a], self.parity[b]);
        self.sat.clause(&[!lit, p, q]);
        self.sat.clause(&[!lit, !p, !q]);
        Some(lit)
    }

    /// Lets the solver share out the free points of a field.
    fn take_over(&mut self, f: usize) {
        let field = &self.net.fields[f];
        let count = field.basins.len();
        let mut lits = vec![None; self.net.len() * count];
        for p in (0..self.net.len()).filter(|&p| field.parts[p] == Part::Free) {
            let own: Vec<usize> = (0..count).filter(|&b| !field.basins[b].barred[p]).collect();
            for (i, &b) in own.iter().enumerate() {
                let lit = self.sat.variable();
                lits[p * count + b] = Some(lit);
                for &other in &own[..i] {
                    if let Some(other) = lits[p * count + other] {
                        self.sat.clause(&[!lit, !other]);
                    }
                }
            }
        }
        self.lend[f] = Some(lits);
    }

    /// Adds a cut, weakened by `unless`.
    fn add_cut(&mut self, f: usize, cut: &[Need], unless: Option<Lit>) {
        let count = self.net.fields[f].basins.len();
        let mut clause: Vec<Lit> = unless.into_iter().collect();
        for need in cut {
            clause.extend(match *need {
                Need::Near(a, b) => self.near_lit(a, b),
                Need::Lend(p, b) => {
                    self.lend[f].as_ref().and_then(|lits| lits[usize::from(p) * count + usize::from(b)])
                }
                Need::Output(p, j, value) => {
                    self.output[usize::from(p)][usize::from(j)].map(|lit| if value { lit } else { !lit })
                }
            });
        }
        self.sat.clause(&clause);
    }

    fn shortest(mut self, effort: &Effort) -> Result<Option<Placement>, Halted> {
        let Some(best) = self.solve(usize::from(NONE), None, effort)? else { return Ok(None) };
        Ok(Some(self.shorten(best, effort)))
    }

    /// Ways as short as the effort allows, from a first solution on.
    fn shorten(&mut self, mut best: Placement, effort: &Effort) -> Placement {
        best.shortest = true;
        while best.longest > 1 {
            let tight = self.sat.variable();
            match self.solve(best.longest - 1, Some(tight), effort) {
                Ok(Some(better)) => {
                    best = better;
                    self.sat.clause(&[tight]);
                }
                Ok(None) => break,
                Err(Halted) => {
                    best.shortest = false;
                    break;
                }
            }
        }
        best
    }

    /// A placement in which no way is longer than `limit`; cuts that hold for the limit alone are made under `tight`.
    fn solve(
        &mut self,
        limit: usize,
        tight: Option<Lit>,
        effort: &Effort,
    ) -> Result<Option<Placement>, Halted> {
        loop {
            effort.spend((self.net.len() * self.net.fields.len()) as u64 / 20 + 1)?;
            if !self.sat.solve(tight.as_slice(), effort)? {
                return Ok(None);
            }
            let codes = self.codes();
            let near = neighbours(&codes, self.bits);
            let values = self.values();
            let stand = Stand { near: &near, values: &values };
            let mut hops = Vec::with_capacity(self.net.fields.len());
            for f in 0..self.net.fields.len() {
                hops.extend(self.serve(f, &stand, limit, tight));
            }
            if hops.len() == self.net.fields.len() {
                return Ok(Some(placement(self.net, codes, hops)));
            }
        }
    }

    /// The ways of a field, or cuts for what is missing.
    fn serve(&mut self, f: usize, stand: &Stand, limit: usize, tight: Option<Lit>) -> Option<Vec<u16>> {
        let (net, field) = (self.net, &self.net.fields[f]);
        let lent = self.lent(f);
        let lent = lent.as_deref();
        let mut hop = vec![NONE; net.len()];
        let mut missing = false;
        for (b, basin) in field.basins.iter().enumerate() {
            let tree = routes::tree(net, field, b, stand, lent);
            if routes::within(basin, &tree, limit) {
                routes::adopt(basin, &tree, &mut hop);
                continue;
            }
            missing = true;
            for (cut, limited) in routes::cuts(net, field, b, stand, lent, limit) {
                self.add_cut(f, &cut, tight.filter(|_| limited).map(|lit| !lit));
            }
        }
        if missing {
            return None;
        }
        if lent.is_some() || field.basins.len() == 1 || !field.any_free {
            return Some(hop);
        }
        let shared = routes::share(net, field, stand, limit);
        if shared.is_none() {
            self.take_over(f);
        }
        shared
    }

    fn lent(&self, f: usize) -> Option<Vec<u16>> {
        let lits = self.lend[f].as_ref()?;
        let count = self.net.fields[f].basins.len();
        let holder =
            |p: usize| (0..count).find(|&b| lits[p * count + b].is_some_and(|lit| self.sat.value(lit)));
        Some((0..self.net.len()).map(|p| holder(p).map_or(NONE, |b| b as u16)).collect())
    }

    fn codes(&self) -> Vec<Code> {
        if let Some(codes) = &self.given {
            return codes.clone();
        }
        let code =
            |p: usize| (0..self.bits).fold(0, |c, i| c | u32::from(self.sat.value(self.bit(p, i))) << i);
        (0..self.net.len()).map(|p| Code(code(p))).collect()
    }

    fn values(&self) -> Vec<u32> {
        let chosen = |p: usize| {
            self.output[p]
                .iter()
                .enumerate()
                .filter_map(|(j, lit)| lit.filter(|&lit| self.sat.value(lit)).map(|_| 1 << j))
                .fold(0, |word, bit: u32| word | bit)
        };
        (0..self.net.len()).map(|p| self.net.values[p].ones | chosen(p)).collect()
    }
}

/// Points at distance one, for each point, by bits.
pub(super) fn neighbours(codes: &[Code], bits: usize) -> Vec<Vec<u16>> {
    let mut by_code: Vec<(Code, u16)> = codes.iter().enumerate().map(|(p, &code)| (code, p as u16)).collect();
    by_code.sort_unstable();
    let find = |code: Code| by_code.binary_search_by_key(&code, |entry| entry.0).ok().map(|at| by_code[at].1);
    codes.iter().map(|code| (0..bits).filter_map(|bit| find(Code(code.0 ^ 1 << bit))).collect()).collect()
}

fn placement(net: &Net, codes: Vec<Code>, hops: Vec<Vec<u16>>) -> Placement {
    let mut used = vec![false; net.len()];
    let mut longest = 0;
    for (field, hop) in net.fields.iter().zip(&hops) {
        for &source in field.basins.iter().flat_map(|basin| &basin.sources) {
            let way = routes::way(hop, source);
            longest = longest.max(way.len() - 1);
            for &p in &way {
                used[usize::from(p)] |= net.owner[usize::from(p)].is_none();
            }
        }
    }
    Placement { codes, hops, longest, used, shortest: true }
}
