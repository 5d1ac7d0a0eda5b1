//! Exact unate set covering: the fewest columns that cover every row, and among those the least total weight.
//!
//! Each column holds a set of rows and has a weight. Essential columns, dominated rows and dominated columns are taken out
//! until nothing changes; what is left (the cyclic core) falls into parts that share nothing, and each part is searched by
//! branch and bound, see [`cyclic`](crate::search::cyclic). Exact. Halted: the best cover so far with a proved bound.
//!
//! Ties go to the column that was pushed first, so equal input gives an equal answer.
//!
//! # Complexity
//! The problem is NP-hard; the search is exponential in the size of the cyclic core. One round of reductions takes
//! O(R·C·(R + C)/64) at worst for R rows and C columns, and far less on sparse ones, since only the columns of a column's
//! rarest row can dominate it.
//!
//! # References
//! - E. J. McCluskey, "Minimization of Boolean functions", Bell System Technical Journal, 1956 (essential columns,
//!   dominance).
//! - See [`cyclic`](crate::search::cyclic) for the bounds.

use crate::base::{Bound, Effort, Progress};
use crate::search::cyclic::{Part, Search};

/// A covering problem: rows `0..rows`, and the columns pushed so far.
#[derive(Debug, Clone)]
pub struct Covering {
    rows: usize,
    words: usize,
    sets: Vec<u64>,
    weights: Vec<u32>,
}

/// A cover of all rows.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Cover {
    /// Chosen columns, ascending.
    pub columns: Vec<usize>,
    /// Whether fewer columns, and with as many columns less weight, are impossible. `lower` bounds the number of columns.
    pub bound: Bound,
}

impl Covering {
    /// A problem without columns.
    pub fn new(rows: usize) -> Self {
        Covering { rows, words: rows.div_ceil(64).max(1), sets: Vec::new(), weights: Vec::new() }
    }

    /// Adds a column of the given weight that covers the given rows (each below `rows`); returns its number.
    pub fn push(&mut self, weight: u32, rows: impl IntoIterator<Item = usize>) -> usize {
        let start = self.sets.len();
        self.sets.resize(start + self.words, 0);
        for row in rows {
            debug_assert!(row < self.rows);
            self.sets[start + row / 64] |= 1 << (row % 64);
        }
        self.weights.push(weight);
        self.weights.len() - 1
    }

    /// Number of columns.
    pub fn len(&self) -> usize {
        self.weights.len()
    }

    /// Whether there is no column.
    pub fn is_empty(&self) -> bool {
        self.weights.is_empty()
    }

    /// The cheapest cover. Stops when `effort` has no more than `keep` steps left, and then returns the best cover found
    /// with an honest bound. `None`: some row is in no column.
    pub fn solve(&self, effort: &Effort<'_>, keep: u64) -> Option<Cover> {
        let matrix = Matrix::of(self);
        if !matrix.coverable() {
            return None;
        }
        // Dear enough that one column more always weighs more than all weights of an irredundant cover.
        let heaviest = self.weights.iter().copied().max().unwrap_or(0);
        let unit = u64::from(heaviest) * self.rows as u64 + 1;
        let mut chosen = Vec::new();
        let live = matrix.reduce(&mut chosen);
        let mut lower = chosen.len();
        let mut search = Search::new(effort, keep);
        for part in matrix.parts(&live, unit) {
            let found = search.solve(&part);
            lower += found.lower;
            chosen.extend(found.columns);
        }
        chosen.sort_unstable();
        let lower = lower.min(chosen.len());
        let bound = if search.halted() { Bound::Stopped { lower } } else { Bound::Proved };
        effort.report(&Progress { task: "fewest products", best: Some(chosen.len()), bound: lower });
        Some(Cover { columns: chosen, bound })
    }
}

/// A bit matrix kept both ways round.
struct Matrix {
    rows: usize,
    /// Words of a column's row set, and of a row's column set.
    row_words: usize,
    column_words: usize,
    /// Row set of each column.
    of_column: Vec<u64>,
    /// Column set of each row.
    of_row: Vec<u64>,
    /// Number of each column in the problem, and its weight.
    name: Vec<usize>,
    weight: Vec<u32>,
}

/// Live rows and columns of a matrix while it is being reduced.
struct Live {
    rows: Vec<u64>,
    columns: Vec<u64>,
}

impl Matrix {
    /// The whole problem; of columns with equal rows only the lightest, first one.
    fn of(problem: &Covering) -> Matrix {
        let words = problem.words;
        let set = |j: usize| &problem.sets[j * words..(j + 1) * words];
        let mut order: Vec<usize> = (0..problem.len()).filter(|&j| set(j).iter().any(|&w| w != 0)).collect();
        order.sort_unstable_by(|&a, &b| {
            set(a).cmp(set(b)).then(problem.weights[a].cmp(&problem.weights[b])).then(a.cmp(&b))
        });
        order.dedup_by(|later, kept| set(*later) == set(*kept));
        order.sort_unstable();
        let column_words = order.len().div_ceil(64).max(1);
        let mut matrix = Matrix {
            rows: problem.rows,
            row_words: words,
            column_words,
            of_column: Vec::with_capacity(order.len() * words),
            of_row: vec![0; problem.rows * column_words],
            weight: order.iter().map(|&j| problem.weights[j]).collect(),
            name: order,
        };
        for (j, &name) in matrix.name.iter().enumerate() {
            matrix.of_column.extend_from_slice(set(name));
            for i in ones(set(name)) {
                matrix.of_row[i * column_words + j / 64] |= 1 << (j % 64);
            }
        }
        matrix
    }

    fn column(&self, j: usize) -> &[u64] {
        &self.of_column[j * self.row_words..(j + 1) * self.row_words]
    }

    fn row(&self, i: usize) -> &[u64] {
        &self.of_row[i * self.column_words..(i + 1) * self.column_words]
    }

    fn coverable(&self) -> bool {
        (0..self.rows).all(|i| self.row(i).iter().any(|&w| w != 0))
    }

    /// Takes essential columns (their names go to `taken`) and drops dominated rows and columns until nothing changes.
    fn reduce(&self, taken: &mut Vec<usize>) -> Live {
        let mut live =
            Live { rows: full(self.rows, self.row_words), columns: full(self.name.len(), self.column_words) };
        loop {
            let mut changed = false;
            for i in 0..self.rows {
                if has(&live.rows, i)
                    && let Some(j) = only_common(self.row(i), &live.columns)
                {
                    taken.push(self.name[j]);
                    subtract(&mut live.rows, self.column(j));
                    clear(&mut live.columns, j);
                    changed = true;
                }
            }
            if live.rows.iter().all(|&w| w == 0) {
                return live;
            }
            changed |= self.drop_rows(&mut live);
            changed |= self.drop_columns(&mut live);
            if !changed {
                return live;
            }
        }
    }

    /// Drops rows whose live columns hold all those of another live row.
    fn drop_rows(&self, live: &mut Live) -> bool {
        let mut changed = false;
        for k in 0..self.rows {
            if !has(&live.rows, k) {
                continue;
            }
            let rarest = ones_common(self.row(k), &live.columns)
                .min_by_key(|&j| common_size(self.column(j), &live.rows));
            let Some(rarest) = rarest else { continue };
            for w in 0..self.row_words {
                for i in Bits(self.column(rarest)[w] & live.rows[w]).map(|b| w * 64 + b) {
                    if i != k && inside(self.row(k), self.row(i), &live.columns) {
                        clear(&mut live.rows, i);
                        changed = true;
                    }
                }
            }
        }
        changed
    }

    /// Drops columns whose live rows another live column holds at no higher weight.
    fn drop_columns(&self, live: &mut Live) -> bool {
        let mut changed = false;
        for j in 0..self.name.len() {
            if !has(&live.columns, j) {
                continue;
            }
            let rarest = ones_common(self.column(j), &live.rows)
                .min_by_key(|&i| common_size(self.row(i), &live.columns));
            let dominated = rarest.is_none_or(|i| {
                ones_common(self.row(i), &live.columns).any(|k| {
                    k != j
                        && self.weight[k] <= self.weight[j]
                        && inside(self.column(j), self.column(k), &live.rows)
                        && (k < j
                            || self.weight[k] < self.weight[j]
                            || !inside(self.column(k), self.column(j), &live.rows))
                })
            });
            if dominated {
                clear(&mut live.columns, j);
                changed = true;
            }
        }
        changed
    }

    /// The parts of what is live that share neither row nor column.
    fn parts(&self, live: &Live, unit: u64) -> Vec<Part> {
        let mut open = live.rows.clone();
        let mut parts = Vec::new();
        loop {
            let seed = ones(&open).next();
            let Some(seed) = seed else { return parts };
            clear(&mut open, seed);
            let mut rows = vec![seed];
            let mut columns = Vec::new();
            let mut seen = live.columns.clone();
            let mut at = 0;
            while at < rows.len() {
                for j in ones_common(self.row(rows[at]), &live.columns) {
                    if has(&seen, j) {
                        clear(&mut seen, j);
                        columns.push(j);
                        for k in ones_common(self.column(j), &live.rows) {
                            if has(&open, k) {
                                clear(&mut open, k);
                                rows.push(k);
                            }
                        }
                    }
                }
                at += 1;
            }
            rows.sort_unstable();
            columns.sort_unstable();
            let mut place = vec![usize::MAX; self.rows];
            rows.iter().enumerate().for_each(|(i, &row)| place[row] = i);
            parts.push(Part {
                rows: rows.len(),
                columns: columns
                    .iter()
                    .map(|&j| ones_common(self.column(j), &live.rows).map(|i| place[i]).collect())
                    .collect(),
                cost: columns.iter().map(|&j| unit + u64::from(self.weight[j])).collect(),
                name: columns.iter().map(|&j| self.name[j]).collect(),
            });
        }
    }
}

fn full(count: usize, words: usize) -> Vec<u64> {
    (0..words)
        .map(|w| match count.saturating_sub(w * 64) {
            0 => 0,
            n if n >= 64 => u64::MAX,
            n => (1 << n) - 1,
        })
        .collect()
}

fn has(set: &[u64], i: usize) -> bool {
    set[i / 64] >> (i % 64) & 1 == 1
}

fn clear(set: &mut [u64], i: usize) {
    set[i / 64] &= !(1 << (i % 64));
}

fn subtract(set: &mut [u64], other: &[u64]) {
    set.iter_mut().zip(other).for_each(|(a, b)| *a &= !b);
}

fn common_size(a: &[u64], b: &[u64]) -> usize {
    a.iter().zip(b).map(|(x, y)| (x & y).count_ones() as usize).sum()
}

/// Whether `a` lies in `b` as far as `live` goes.
fn inside(a: &[u64], b: &[u64], live: &[u64]) -> bool {
    a.iter().zip(b).zip(live).all(|((x, y), l)| x & !y & l == 0)
}

/// The only common member, if there is exactly one.
fn only_common(a: &[u64], b: &[u64]) -> Option<usize> {
    let mut all = ones_common(a, b);
    let first = all.next()?;
    all.next().is_none().then_some(first)
}

fn ones(set: &[u64]) -> impl Iterator<Item = usize> + '_ {
    set.iter().enumerate().flat_map(|(w, &word)| Bits(word).map(move |b| w * 64 + b))
}

fn ones_common<'s>(a: &'s [u64], b: &'s [u64]) -> impl Iterator<Item = usize> + 's {
    a.iter().zip(b).enumerate().flat_map(|(w, (&x, &y))| Bits(x & y).map(move |b| w * 64 + b))
}

/// The members of a word, ascending.
pub(crate) struct Bits(pub(crate) u64);

impl Iterator for Bits {
    type Item = usize;

    fn next(&mut self) -> Option<usize> {
        if self.0 == 0 {
            return None;
        }
        let bit = self.0.trailing_zeros() as usize;
        self.0 &= self.0 - 1;
        Some(bit)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn problem(rows: usize, columns: &[(&[usize], u32)]) -> Covering {
        let mut covering = Covering::new(rows);
        for (set, weight) in columns {
            covering.push(*weight, set.iter().copied());
        }
        covering
    }

    /// Least (columns, weight) over all subsets of the columns.
    fn by_exhaustion(rows: usize, columns: &[(Vec<usize>, u32)]) -> Option<(usize, u32)> {
        let sets: Vec<u64> =
            columns.iter().map(|(set, _)| set.iter().fold(0, |acc, r| acc | 1 << r)).collect();
        (0..1u32 << columns.len())
            .filter(|pick| {
                let covered =
                    (0..columns.len()).filter(|j| pick >> j & 1 == 1).fold(0, |acc, j| acc | sets[j]);
                covered == (1 << rows) - 1
            })
            .map(|pick| {
                let weight = (0..columns.len()).filter(|j| pick >> j & 1 == 1).map(|j| columns[j].1).sum();
                (pick.count_ones() as usize, weight)
            })
            .min()
    }

    #[test]
    fn fewer_columns_come_before_less_weight() {
        let covering = problem(3, &[(&[0], 1), (&[1], 1), (&[2], 1), (&[0, 1, 2], 100)]);
        let cover = covering.solve(&Effort::of(1000), 0).expect("coverable");
        assert_eq!(cover, Cover { columns: vec![3], bound: Bound::Proved });
    }

    #[test]
    fn a_row_in_no_column_is_refused() {
        assert_eq!(problem(2, &[(&[0], 1)]).solve(&Effort::of(1000), 0), None);
        assert_eq!(problem(0, &[]).solve(&Effort::of(1000), 0).map(|c| c.columns), Some(vec![]));
    }

    #[test]
    fn a_ring_of_six_needs_three() {
        let ring: Vec<Vec<usize>> = (0..6).map(|i| vec![i, (i + 1) % 6]).collect();
        let mut covering = Covering::new(6);
        for set in &ring {
            covering.push(2, set.iter().copied());
        }
        let cover = covering.solve(&Effort::of(1000), 0).expect("coverable");
        assert_eq!(cover.columns.len(), 3);
        assert_eq!(cover.bound, Bound::Proved);
    }

    #[test]
    fn agrees_with_exhaustion_on_random_problems() {
        let mut seed = 0x2545_f491_4f6c_dd1d_u64;
        let mut next = move |n: u64| {
            seed ^= seed << 13;
            seed ^= seed >> 7;
            seed ^= seed << 17;
            seed % n
        };
        for _ in 0..600 {
            let rows = 1 + next(10) as usize;
            let count = 1 + next(12) as usize;
            let density = 2 + next(3);
            let columns: Vec<(Vec<usize>, u32)> = (0..count)
                .map(|_| ((0..rows).filter(|_| next(density) == 0).collect(), next(5) as u32))
                .collect();
            let mut covering = Covering::new(rows);
            for (set, weight) in &columns {
                covering.push(*weight, set.iter().copied());
            }
            let cover = covering.solve(&Effort::of(1_000_000), 0);
            let found = cover.map(|c| {
                assert_eq!(c.bound, Bound::Proved);
                (c.columns.len(), c.columns.iter().map(|&j| columns[j].1).sum())
            });
            assert_eq!(found, by_exhaustion(rows, &columns));
        }
    }

    #[test]
    fn halted_it_still_covers_and_says_so() {
        let mut covering = Covering::new(9);
        for i in 0..9 {
            covering.push(1, [i, (i + 1) % 9, (i + 4) % 9]);
        }
        let cover = covering.solve(&Effort::of(0), 0).expect("coverable");
        let mut covered = [false; 9];
        for j in cover.columns.iter().flat_map(|&i| [i, (i + 1) % 9, (i + 4) % 9]) {
            covered[j] = true;
        }
        assert_eq!(covered, [true; 9]);
        assert!(matches!(cover.bound, Bound::Stopped { lower } if lower <= cover.columns.len()));
    }
}
