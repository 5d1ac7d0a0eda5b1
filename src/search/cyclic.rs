//! Branch and bound on a connected cyclic core of a covering problem.
//!
//! Row and column sets are fixed arrays of words, chosen for the size of the core, so that a node of the search copies two
//! small sets and allocates next to nothing. Each node is reduced (essential columns, dominance), bounded, and split on the
//! row with the fewest columns; a core that falls apart on the way is solved part by part. The bound is Lagrangian: a price
//! for each row gives (sum of prices) + (sum of negative reduced costs), raised by a few subgradient steps from the prices of
//! the node above. It is made whole, because the number of columns is an integer, and columns whose reduced cost alone
//! lifts it to the best known cover are dropped.
//!
//! Exact: floating point only proposes prices; the bound that they give is rounded down by more than its error before it
//! is used. Deterministic, for it uses nothing but additions, multiplications and divisions in a fixed order.
//!
//! # Complexity
//! Exponential in the core. A node costs about (rows · columns of a row) for each subgradient step.
//!
//! # References
//! - M. Held and R. M. Karp, "The traveling-salesman problem and minimum spanning trees: part II", Mathematical Programming
//!   1, 1971 (subgradient steps).
//! - E. Balas and A. Ho, "Set covering algorithms using cutting planes, heuristics, and subgradient optimization: a
//!   computational study", Mathematical Programming Study 12, 1980.

use crate::base::{Effort, Halted};
use crate::search::cover::Bits;

/// A connected part of a covering problem.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Part {
    /// Number of rows.
    pub(crate) rows: usize,
    /// The rows of each column, ascending.
    pub(crate) columns: Vec<Vec<usize>>,
    /// Cost of each column, above 0.
    pub(crate) cost: Vec<u64>,
    /// Number of each column in the problem.
    pub(crate) name: Vec<usize>,
}

/// A cheapest cover of a part, or the best one found.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Found {
    /// Numbers of the columns in the problem.
    pub(crate) columns: Vec<usize>,
    /// Proved lower bound on the number of columns of a cheapest cover.
    pub(crate) lower: usize,
}

/// The steps that a search may take.
pub(crate) struct Search<'s, 'e> {
    effort: &'s Effort<'e>,
    keep: u64,
    halted: bool,
}

impl<'s, 'e> Search<'s, 'e> {
    /// A search that stops when `effort` has no more than `keep` steps left.
    pub(crate) fn new(effort: &'s Effort<'e>, keep: u64) -> Self {
        Search { effort, keep, halted: false }
    }

    /// Whether it stopped before it was done.
    pub(crate) fn halted(&self) -> bool {
        self.halted
    }

    /// A cheapest cover of a part.
    pub(crate) fn solve(&mut self, part: &Part) -> Found {
        match part.rows.max(part.name.len()).div_ceil(64) {
            0..=1 => self.with::<1>(part),
            2 => self.with::<2>(part),
            3..=4 => self.with::<4>(part),
            5..=8 => self.with::<8>(part),
            9..=32 => self.with::<32>(part),
            33..=256 => self.with::<256>(part),
            _ => {
                self.halted = true;
                Found { columns: greedy_part(part), lower: 1 }
            }
        }
    }

    fn with<const W: usize>(&mut self, part: &Part) -> Found {
        let core = Core::<W>::new(part);
        let mut node = Node { live: core.all(), prices: vec![0.0; part.rows] };
        let mut best = core.greedy(&node.live, |j| part.cost[j] as f64);
        let mut price = core.price(&best);
        let bound = core.bound(&mut node, price, ROOT_STEPS);
        let other = core.greedy(&node.live, |j| bound.reduced[j].max(0.0));
        if core.price(&other) < price {
            price = core.price(&other);
            best = other;
        }
        let lower = core.count(bound.value);
        let mut found = Vec::new();
        if self.descend(&core, node, price, &mut found).is_some() {
            best = found;
        }
        let lower = if self.halted { lower.min(best.len()) } else { best.len() };
        Found { columns: best.into_iter().map(|j| part.name[j]).collect(), lower }
    }

    /// Appends a cheapest cover of the live rows that costs less than `limit` to `out` and returns its cost. `None`, and `out`
    /// as it was, if there is none or the search is halted before one is found.
    fn descend<const W: usize>(
        &mut self,
        core: &Core<W>,
        mut node: Node<W>,
        limit: u64,
        out: &mut Vec<usize>,
    ) -> Option<u64> {
        let work = 4 + (core.rows() * W) as u64 / 16;
        if self.effort.left() <= self.keep || self.effort.spend(work) == Err(Halted) {
            self.halted = true;
            return None;
        }
        let mark = out.len();
        let found = self.explore(core, &mut node, limit, out);
        if found.is_none() {
            out.truncate(mark);
        }
        found
    }

    fn explore<const W: usize>(
        &mut self,
        core: &Core<W>,
        node: &mut Node<W>,
        limit: u64,
        out: &mut Vec<usize>,
    ) -> Option<u64> {
        let mut spent = 0;
        let mut steps = NODE_STEPS;
        let bound = loop {
            spent += core.reduce(&mut node.live, out)?;
            if spent >= limit {
                return None;
            }
            if node.live.rows == [0; W] {
                return Some(spent);
            }
            let bound = core.bound(node, limit - spent, steps);
            if spent + bound.value >= limit {
                return None;
            }
            // A column whose reduced cost alone lifts the bound to the limit is in no cheaper cover.
            let mut dropped = false;
            for j in members(&node.live.columns) {
                if bound.raw + bound.reduced[j].max(0.0) - SAFE >= (limit - spent) as f64 - 1.0 + SAFE {
                    remove(&mut node.live.columns, j);
                    dropped = true;
                }
            }
            if !dropped {
                break bound;
            }
            steps = 4;
        };
        let apart = core.component(&node.live);
        if apart != node.live.rows {
            return self.apart(core, node, apart, spent, limit, out);
        }
        self.branch(core, node, &bound, spent, limit, out)
    }

    /// Solves a part of the rows that shares no column with the rest, then the rest.
    fn apart<const W: usize>(
        &mut self,
        core: &Core<W>,
        node: &Node<W>,
        apart: [u64; W],
        spent: u64,
        limit: u64,
        out: &mut Vec<usize>,
    ) -> Option<u64> {
        let mut first = node.clone();
        first.live.rows = apart;
        let mut rest = node.clone();
        rest.live.rows = minus(&node.live.rows, &apart);
        // The rest costs something too: what its bound says.
        let least = core.bound(&mut rest, u64::MAX / 4, 0).value;
        let room = (limit - spent).saturating_sub(least);
        let spent = spent + self.descend(core, first, room, out)?;
        Some(spent + self.descend(core, rest, limit.checked_sub(spent)?, out)?)
    }

    /// Tries each column of the row that has the fewest.
    fn branch<const W: usize>(
        &mut self,
        core: &Core<W>,
        node: &Node<W>,
        bound: &Bounded,
        spent: u64,
        limit: u64,
        out: &mut Vec<usize>,
    ) -> Option<u64> {
        let live = &node.live;
        let row = members(&live.rows).min_by_key(|&i| (common(&core.of_row[i], &live.columns), i))?;
        let mut order: Vec<usize> = members(&both(&core.of_row[row], &live.columns)).collect();
        order.sort_by(|&a, &b| {
            let gain = |j: usize| common(&core.of_column[j], &live.rows);
            bound.reduced[a].total_cmp(&bound.reduced[b]).then(gain(b).cmp(&gain(a))).then(a.cmp(&b))
        });
        let mut columns = live.columns;
        let mut best: Option<(u64, Vec<usize>)> = None;
        for j in order {
            remove(&mut columns, j);
            let room = best.as_ref().map_or(limit, |b| b.0).saturating_sub(spent + core.cost[j]);
            let child = Node {
                live: Live { rows: minus(&live.rows, &core.of_column[j]), columns },
                prices: node.prices.clone(),
            };
            let mut below = vec![j];
            if let Some(cost) = self.descend(core, child, room, &mut below) {
                best = Some((spent + core.cost[j] + cost, below));
            }
            if self.halted {
                break;
            }
        }
        let (cost, below) = best?;
        out.extend(below);
        Some(cost)
    }
}

/// Subgradient steps at the root of a core, and at each node below.
const ROOT_STEPS: usize = 120;
const NODE_STEPS: usize = 12;

/// More than the rounding error of any bound; costs are far below 2^40.
const SAFE: f64 = 1e-3;

/// A core with sets of `W` words.
struct Core<const W: usize> {
    of_row: Vec<[u64; W]>,
    of_column: Vec<[u64; W]>,
    cost: Vec<u64>,
    lightest: u64,
    heaviest: u64,
}

/// Live rows and columns.
#[derive(Clone, Copy)]
struct Live<const W: usize> {
    rows: [u64; W],
    columns: [u64; W],
}

/// A node of the search: what is live, and good prices for the rows.
#[derive(Clone)]
struct Node<const W: usize> {
    live: Live<W>,
    prices: Vec<f64>,
}

/// A lower bound on the cost of covering the live rows.
struct Bounded {
    /// As the prices give it.
    raw: f64,
    /// Made whole.
    value: u64,
    /// Reduced cost of each live column.
    reduced: Vec<f64>,
}

impl<const W: usize> Core<W> {
    fn new(part: &Part) -> Self {
        let mut core = Core {
            of_row: vec![[0; W]; part.rows],
            of_column: vec![[0; W]; part.name.len()],
            cost: part.cost.clone(),
            lightest: part.cost.iter().copied().min().unwrap_or(1),
            heaviest: part.cost.iter().copied().max().unwrap_or(1),
        };
        for (j, rows) in part.columns.iter().enumerate() {
            for &i in rows {
                core.of_column[j][i / 64] |= 1 << (i % 64);
                core.of_row[i][j / 64] |= 1 << (j % 64);
            }
        }
        core
    }

    fn rows(&self) -> usize {
        self.of_row.len()
    }

    fn all(&self) -> Live<W> {
        let full = |count: usize| {
            let mut set = [0; W];
            (0..count).for_each(|i| set[i / 64] |= 1 << (i % 64));
            set
        };
        Live { rows: full(self.of_row.len()), columns: full(self.of_column.len()) }
    }

    fn price(&self, columns: &[usize]) -> u64 {
        columns.iter().map(|&j| self.cost[j]).sum()
    }

    /// Takes essential columns and drops dominated rows and columns until nothing changes; returns the cost of what was taken.
    /// `None`: some row has no column left.
    fn reduce(&self, live: &mut Live<W>, taken: &mut Vec<usize>) -> Option<u64> {
        let mut cost = 0;
        loop {
            let mut changed = false;
            for i in members(&live.rows.clone()) {
                if !has(&live.rows, i) {
                    continue;
                }
                let columns = both(&self.of_row[i], &live.columns);
                match size(&columns) {
                    0 => return None,
                    1 => {
                        let j = members(&columns).next()?;
                        taken.push(j);
                        cost += self.cost[j];
                        live.rows = minus(&live.rows, &self.of_column[j]);
                        remove(&mut live.columns, j);
                        changed = true;
                    }
                    _ => {}
                }
            }
            if live.rows == [0; W] {
                return Some(cost);
            }
            changed |= self.drop_rows(live);
            changed |= self.drop_columns(live);
            if !changed {
                return Some(cost);
            }
        }
    }

    /// Drops rows whose live columns hold all those of another live row.
    fn drop_rows(&self, live: &mut Live<W>) -> bool {
        let before = live.rows;
        for k in members(&before) {
            if !has(&live.rows, k) {
                continue;
            }
            let columns = both(&self.of_row[k], &live.columns);
            // Rows that share every column of row k.
            let mut rows = live.rows;
            for j in members(&columns) {
                rows = both(&rows, &self.of_column[j]);
                if size(&rows) == 1 {
                    break;
                }
            }
            remove(&mut rows, k);
            live.rows = minus(&live.rows, &rows);
        }
        live.rows != before
    }

    /// Drops columns whose live rows another live column holds at no higher cost.
    fn drop_columns(&self, live: &mut Live<W>) -> bool {
        let before = live.columns;
        for j in members(&before) {
            let rows = both(&self.of_column[j], &live.rows);
            // Columns that hold every row of column j.
            let mut columns = live.columns;
            for i in members(&rows) {
                columns = both(&columns, &self.of_row[i]);
                if size(&columns) == 1 {
                    break;
                }
            }
            remove(&mut columns, j);
            let dominated = members(&columns).any(|k| {
                self.cost[k] < self.cost[j]
                    || self.cost[k] == self.cost[j]
                        && (k < j || size(&both(&self.of_column[k], &live.rows)) > size(&rows))
            });
            if dominated || rows == [0; W] {
                remove(&mut live.columns, j);
            }
        }
        live.columns != before
    }

    /// The rows that hang together with the first live one.
    fn component(&self, live: &Live<W>) -> [u64; W] {
        let mut rows = [0; W];
        let Some(seed) = members(&live.rows).next() else { return rows };
        rows[seed / 64] |= 1 << (seed % 64);
        let mut fresh = rows;
        while fresh != [0; W] {
            let mut columns = [0; W];
            for i in members(&fresh) {
                columns = either(&columns, &both(&self.of_row[i], &live.columns));
            }
            let mut reached = [0; W];
            for j in members(&columns) {
                reached = either(&reached, &both(&self.of_column[j], &live.rows));
            }
            fresh = minus(&reached, &rows);
            rows = either(&rows, &fresh);
        }
        rows
    }

    /// A lower bound on the cost of covering the live rows. Improves the prices of the node by up to `steps` subgradient
    /// steps, and stops as soon as the bound reaches `limit`.
    fn bound(&self, node: &mut Node<W>, limit: u64, steps: usize) -> Bounded {
        let mut reduced = vec![0.0; self.cost.len()];
        if steps == ROOT_STEPS {
            self.ascend(node);
        }
        let mut raw = self.evaluate(&node.live, &node.prices, &mut reduced);
        let mut prices = node.prices.clone();
        let mut slope = vec![0.0; self.rows()];
        let mut trial = reduced.clone();
        let mut scale = 1.0;
        let mut here = raw;
        let mut stale = 0;
        for _ in 0..steps {
            if self.whole(raw) >= limit {
                break;
            }
            let mut norm = 0.0;
            for i in members(&node.live.rows) {
                let cheap = members(&both(&self.of_row[i], &node.live.columns)).filter(|&j| trial[j] < 0.0);
                slope[i] = 1.0 - cheap.count() as f64;
                norm += slope[i] * slope[i];
            }
            if norm == 0.0 {
                break;
            }
            let step = scale * ((limit as f64 - here).max(1.0)) / norm;
            for i in members(&node.live.rows) {
                prices[i] = (prices[i] + step * slope[i]).max(0.0);
            }
            here = self.evaluate(&node.live, &prices, &mut trial);
            if here > raw {
                raw = here;
                node.prices.clone_from(&prices);
                reduced.clone_from(&trial);
                stale = 0;
            } else {
                stale += 1;
                if stale == 5 {
                    scale *= 0.5;
                    stale = 0;
                }
            }
        }
        Bounded { raw, value: self.whole(raw), reduced }
    }

    /// Raises the price of each row in turn as far as the columns allow, rows with few columns first.
    fn ascend(&self, node: &mut Node<W>) {
        let mut order: Vec<usize> = members(&node.live.rows).collect();
        order.sort_by_key(|&i| common(&self.of_row[i], &node.live.columns));
        let mut slack: Vec<u64> = self.cost.clone();
        for i in order {
            let columns = both(&self.of_row[i], &node.live.columns);
            let gain = members(&columns).map(|j| slack[j]).min().unwrap_or(0);
            members(&columns).for_each(|j| slack[j] -= gain);
            node.prices[i] = gain as f64;
        }
    }

    /// The bound that prices give, and the reduced costs.
    fn evaluate(&self, live: &Live<W>, prices: &[f64], reduced: &mut [f64]) -> f64 {
        let mut value: f64 = members(&live.rows).map(|i| prices[i]).sum();
        for j in members(&live.columns) {
            let paid: f64 = members(&both(&self.of_column[j], &live.rows)).map(|i| prices[i]).sum();
            reduced[j] = self.cost[j] as f64 - paid;
            value += reduced[j].min(0.0);
        }
        value
    }

    /// A bound made whole: costs and the number of columns are integers.
    fn whole(&self, raw: f64) -> u64 {
        let value = if raw > SAFE { (raw - SAFE).ceil() as u64 } else { 0 };
        value.max(self.count(value) as u64 * self.lightest)
    }

    /// The number of columns that a lower bound on the cost asks for.
    fn count(&self, value: u64) -> usize {
        value.div_ceil(self.heaviest) as usize
    }

    /// A cover of the live rows: the column with the least cost for each new row, again and again; then what is not needed
    /// is dropped.
    fn greedy(&self, live: &Live<W>, cost: impl Fn(usize) -> f64) -> Vec<usize> {
        let mut left = live.rows;
        let mut chosen = Vec::new();
        while left != [0; W] {
            let next = members(&live.columns)
                .map(|j| (j, common(&self.of_column[j], &left)))
                .filter(|&(_, gain)| gain > 0)
                .min_by(|&(a, x), &(b, y)| {
                    (cost(a) * y as f64).total_cmp(&(cost(b) * x as f64)).then(y.cmp(&x)).then(a.cmp(&b))
                });
            let Some((j, _)) = next else { break };
            left = minus(&left, &self.of_column[j]);
            chosen.push(j);
        }
        for at in (0..chosen.len()).rev() {
            let mut rest = live.rows;
            for (other, &j) in chosen.iter().enumerate() {
                if other != at {
                    rest = minus(&rest, &self.of_column[j]);
                }
            }
            if rest == [0; W] {
                chosen.remove(at);
            }
        }
        chosen
    }
}

/// A cover of a part that is too large to be searched; numbers in the problem.
fn greedy_part(part: &Part) -> Vec<usize> {
    let mut covered = vec![false; part.rows];
    let mut order: Vec<usize> = (0..part.name.len()).collect();
    order.sort_by_key(|&j| (usize::MAX - part.columns[j].len(), part.cost[j]));
    let mut chosen = Vec::new();
    for j in order {
        if part.columns[j].iter().any(|&i| !covered[i]) {
            part.columns[j].iter().for_each(|&i| covered[i] = true);
            chosen.push(part.name[j]);
        }
    }
    chosen
}

fn both<const W: usize>(a: &[u64; W], b: &[u64; W]) -> [u64; W] {
    std::array::from_fn(|w| a[w] & b[w])
}

fn either<const W: usize>(a: &[u64; W], b: &[u64; W]) -> [u64; W] {
    std::array::from_fn(|w| a[w] | b[w])
}

fn minus<const W: usize>(a: &[u64; W], b: &[u64; W]) -> [u64; W] {
    std::array::from_fn(|w| a[w] & !b[w])
}

fn size<const W: usize>(set: &[u64; W]) -> u32 {
    set.iter().map(|w| w.count_ones()).sum()
}

fn common<const W: usize>(a: &[u64; W], b: &[u64; W]) -> u32 {
    a.iter().zip(b).map(|(x, y)| (x & y).count_ones()).sum()
}

fn has<const W: usize>(set: &[u64; W], i: usize) -> bool {
    set[i / 64] >> (i % 64) & 1 == 1
}

fn remove<const W: usize>(set: &mut [u64; W], i: usize) {
    set[i / 64] &= !(1 << (i % 64));
}

fn members<const W: usize>(set: &[u64; W]) -> impl Iterator<Item = usize> + use<W> {
    let set = *set;
    (0..W).flat_map(move |w| Bits(set[w]).map(move |b| w * 64 + b))
}
