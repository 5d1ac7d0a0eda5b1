//! Exact unate set covering: the fewest columns that cover every row, and among those the least total weight.
//!
//! Each column holds a set of rows and has a weight. Exact: branch and bound over the cyclic core that is left when
//! essential columns, dominated rows and dominated columns are gone; cores that fall apart are solved apart. The lower
//! bound is a feasible solution of the dual (a price for each row such that no column's rows cost more than the column),
//! which contains the classical bound by independent rows. Halted: the best cover so far with a proved bound.
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
//! - E. Balas and A. Ho, "Set covering algorithms using cutting planes, heuristics, and subgradient optimization",
//!   Mathematical Programming Study 12, 1980 (dual bounds).

use crate::base::{Bound, Effort, Halted, Progress};

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
        let heaviest = self.weights.iter().copied().max().unwrap_or(0);
        let unit = u64::from(heaviest) * self.rows as u64 + 1;
        let matrix = Matrix::of(self, unit);
        if !matrix.coverable() {
            return None;
        }
        let mut search = Search { effort, keep, unit, halted: false };
        let mut chosen = Vec::new();
        let lower = search.solve(matrix, &mut chosen);
        chosen.sort_unstable();
        let bound =
            if search.halted { Bound::Stopped { lower: lower.min(chosen.len()) } } else { Bound::Proved };
        effort.report(&Progress {
            task: "fewest products",
            best: Some(chosen.len()),
            bound: lower.min(chosen.len()),
        });
        Some(Cover { columns: chosen, bound })
    }
}

/// A bit matrix kept both ways round, with the columns' numbers in the problem.
#[derive(Debug, Clone)]
struct Matrix {
    rows: usize,
    columns: usize,
    /// Words of a column's row set, and of a row's column set.
    row_words: usize,
    column_words: usize,
    /// Row set of each column.
    of_column: Vec<u64>,
    /// Column set of each row.
    of_row: Vec<u64>,
    /// Number of each column in the problem, and its cost.
    name: Vec<usize>,
    cost: Vec<u64>,
}

impl Matrix {
    /// The whole problem; of columns with equal rows only the cheapest, first one.
    fn of(problem: &Covering, unit: u64) -> Matrix {
        let words = problem.words;
        let set = |j: usize| &problem.sets[j * words..(j + 1) * words];
        let mut order: Vec<usize> = (0..problem.len()).collect();
        order.sort_unstable_by(|&a, &b| {
            set(a).cmp(set(b)).then(problem.weights[a].cmp(&problem.weights[b])).then(a.cmp(&b))
        });
        order.dedup_by(|later, kept| set(*later) == set(*kept));
        order.retain(|&j| set(j).iter().any(|&w| w != 0));
        order.sort_unstable();
        let rows: Vec<usize> = (0..problem.rows).collect();
        Matrix::gather(
            &rows,
            order.iter().map(|&j| (j, unit + u64::from(problem.weights[j]), set(j))),
            order.len(),
        )
    }

    /// A matrix of the listed rows (ascending) of some columns, given as (name, cost, row set).
    fn gather<'m>(
        rows: &[usize],
        columns: impl Iterator<Item = (usize, u64, &'m [u64])>,
        count: usize,
    ) -> Matrix {
        let (row_words, column_words) = (rows.len().div_ceil(64).max(1), count.div_ceil(64).max(1));
        let mut matrix = Matrix {
            rows: rows.len(),
            columns: 0,
            row_words,
            column_words,
            of_column: Vec::with_capacity(count * row_words),
            of_row: vec![0; rows.len() * column_words],
            name: Vec::with_capacity(count),
            cost: Vec::with_capacity(count),
        };
        for (name, cost, set) in columns {
            let j = matrix.columns;
            let start = matrix.of_column.len();
            matrix.of_column.resize(start + row_words, 0);
            for (i, &row) in rows.iter().enumerate() {
                if set[row / 64] >> (row % 64) & 1 == 1 {
                    matrix.of_column[start + i / 64] |= 1 << (i % 64);
                    matrix.of_row[i * column_words + j / 64] |= 1 << (j % 64);
                }
            }
            matrix.name.push(name);
            matrix.cost.push(cost);
            matrix.columns += 1;
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

    /// The part that the given live rows and columns leave.
    fn restrict(&self, rows: &[u64], columns: &[u64]) -> Matrix {
        let list: Vec<usize> = ones(rows).collect();
        let count = size(columns);
        Matrix::gather(&list, ones(columns).map(|j| (self.name[j], self.cost[j], self.column(j))), count)
    }
}

/// Live rows and columns of a matrix while it is being reduced.
struct Live {
    rows: Vec<u64>,
    columns: Vec<u64>,
}

impl Live {
    fn all(matrix: &Matrix) -> Live {
        Live { rows: full(matrix.rows, matrix.row_words), columns: full(matrix.columns, matrix.column_words) }
    }
}

struct Search<'s, 'e> {
    effort: &'s Effort<'e>,
    keep: u64,
    unit: u64,
    halted: bool,
}

impl Search<'_, '_> {
    /// Appends the names of a cheapest cover to `chosen`; returns a lower bound on the number of columns, which is exact
    /// unless the search was halted.
    fn solve(&mut self, matrix: Matrix, chosen: &mut Vec<usize>) -> usize {
        let before = chosen.len();
        let (core, _) = self.reduce(matrix, chosen);
        let mut lower = chosen.len() - before;
        for part in components(core) {
            lower += self.branch(part, chosen);
        }
        lower
    }

    /// A connected cyclic core.
    fn branch(&mut self, core: Matrix, chosen: &mut Vec<usize>) -> usize {
        let mut best = greedy(&core);
        let root = self.count(&core, dual(&core).0);
        let mut taken = Vec::new();
        let mut price = cost_of(&core, &best);
        let mut names: Vec<usize> = best.drain(..).map(|j| core.name[j]).collect();
        let size = names.len();
        self.descend(core, 0, &mut taken, &mut price, &mut names);
        let exact = if self.halted { root.min(size) } else { names.len() };
        chosen.extend(names);
        exact
    }

    /// Looks below the current choice (`taken`, costing `spent`) for covers cheaper than `price`.
    fn descend(
        &mut self,
        matrix: Matrix,
        spent: u64,
        taken: &mut Vec<usize>,
        price: &mut u64,
        best: &mut Vec<usize>,
    ) {
        let work = 1 + (matrix.rows * matrix.columns) as u64 / 1024;
        if self.effort.left() <= self.keep || self.effort.spend(work) == Err(Halted) {
            self.halted = true;
            return;
        }
        let mark = taken.len();
        let (matrix, added) = self.reduce(matrix, taken);
        let spent = spent + added;
        if spent < *price {
            if matrix.rows == 0 {
                *price = spent;
                best.clone_from(taken);
            } else {
                self.split(matrix, spent, taken, price, best);
            }
        }
        taken.truncate(mark);
    }

    /// Bounds a reduced matrix and branches on it.
    fn split(
        &mut self,
        matrix: Matrix,
        spent: u64,
        taken: &mut Vec<usize>,
        price: &mut u64,
        best: &mut Vec<usize>,
    ) {
        let (value, slack) = dual(&matrix);
        if spent + self.whole(&matrix, value) >= *price {
            return;
        }
        let mut parts = components_if_many(&matrix);
        if parts.len() > 1 {
            // Parts do not meet, so each is solved for itself; the sum is exact.
            let mark = taken.len();
            let mut total = spent;
            parts.sort_by_key(|part| part.rows);
            for part in parts {
                let costs: Vec<(usize, u64)> =
                    part.name.iter().copied().zip(part.cost.iter().copied()).collect();
                let from = taken.len();
                self.branch(part, taken);
                total += taken[from..]
                    .iter()
                    .map(|n| costs.iter().find(|(name, _)| name == n).map_or(0, |&(_, cost)| cost))
                    .sum::<u64>();
            }
            if total < *price {
                *price = total;
                best.clone_from(taken);
            }
            taken.truncate(mark);
            return;
        }
        // A column whose slack alone lifts the bound to the best price is in no cheaper cover.
        let mut live = Live::all(&matrix);
        for (j, &slack) in slack.iter().enumerate() {
            if spent + value + slack >= *price {
                clear(&mut live.columns, j);
            }
        }
        let Some(row) = (0..matrix.rows).min_by_key(|&i| (common_size(matrix.row(i), &live.columns), i))
        else {
            return;
        };
        let mut order: Vec<usize> = ones_common(matrix.row(row), &live.columns).collect();
        order.sort_by_key(|&j| (slack[j], usize::MAX - size(matrix.column(j)), j));
        for j in order {
            let mut rows = live.rows.clone();
            subtract(&mut rows, matrix.column(j));
            clear(&mut live.columns, j);
            taken.push(matrix.name[j]);
            let rest = matrix.restrict(&rows, &live.columns);
            // A row may have lost its last column to an earlier branch.
            if rest.coverable() {
                self.descend(rest, spent + matrix.cost[j], taken, price, best);
            }
            taken.pop();
            if self.halted {
                return;
            }
        }
    }

    /// Takes essential columns (their names go to `taken`, their cost is returned) and drops dominated rows and columns
    /// until nothing changes.
    fn reduce(&mut self, matrix: Matrix, taken: &mut Vec<usize>) -> (Matrix, u64) {
        let mut live = Live::all(&matrix);
        let mut added = 0;
        loop {
            let mut changed = false;
            for i in 0..matrix.rows {
                if !has(&live.rows, i) {
                    continue;
                }
                if let Some(j) = only_common(matrix.row(i), &live.columns) {
                    taken.push(matrix.name[j]);
                    added += matrix.cost[j];
                    subtract(&mut live.rows, matrix.column(j));
                    clear(&mut live.columns, j);
                    changed = true;
                }
            }
            if live.rows.iter().all(|&w| w == 0) {
                break;
            }
            changed |= drop_rows(&matrix, &mut live);
            changed |= drop_columns(&matrix, &mut live);
            if !changed {
                break;
            }
        }
        (matrix.restrict(&live.rows, &live.columns), added)
    }

    /// A lower bound on the cost, made whole: the number of columns is an integer.
    fn whole(&self, matrix: &Matrix, value: u64) -> u64 {
        let count = self.count(matrix, value) as u64;
        let lightest = matrix.cost.iter().copied().min().unwrap_or(0);
        value.max(count * lightest)
    }

    /// The number of columns that a lower bound on the cost asks for.
    fn count(&self, matrix: &Matrix, value: u64) -> usize {
        let heaviest = matrix.cost.iter().copied().max().unwrap_or(self.unit);
        value.div_ceil(heaviest) as usize
    }
}

/// Drops rows whose live columns hold all those of another live row.
fn drop_rows(matrix: &Matrix, live: &mut Live) -> bool {
    let mut changed = false;
    for k in 0..matrix.rows {
        if !has(&live.rows, k) {
            continue;
        }
        let rarest = ones_common(matrix.row(k), &live.columns)
            .min_by_key(|&j| common_size(matrix.column(j), &live.rows));
        let Some(rarest) = rarest else { continue };
        for w in 0..matrix.row_words {
            let mut word = matrix.column(rarest)[w] & live.rows[w];
            while word != 0 {
                let i = w * 64 + word.trailing_zeros() as usize;
                word &= word - 1;
                if i != k && inside(matrix.row(k), matrix.row(i), &live.columns) {
                    clear(&mut live.rows, i);
                    changed = true;
                }
            }
        }
    }
    changed
}

/// Drops columns whose live rows another live column holds at no higher cost.
fn drop_columns(matrix: &Matrix, live: &mut Live) -> bool {
    let mut changed = false;
    for j in 0..matrix.columns {
        if !has(&live.columns, j) {
            continue;
        }
        let rarest = ones_common(matrix.column(j), &live.rows)
            .min_by_key(|&i| common_size(matrix.row(i), &live.columns));
        let dominated = match rarest {
            None => true,
            Some(i) => ones_common(matrix.row(i), &live.columns).any(|k| {
                k != j
                    && matrix.cost[k] <= matrix.cost[j]
                    && inside(matrix.column(j), matrix.column(k), &live.rows)
                    && (k < j
                        || matrix.cost[k] < matrix.cost[j]
                        || !inside(matrix.column(k), matrix.column(j), &live.rows))
            }),
        };
        if dominated {
            clear(&mut live.columns, j);
            changed = true;
        }
    }
    changed
}

/// A feasible dual solution: its value, and what each column's cost exceeds the prices of its rows by.
fn dual(matrix: &Matrix) -> (u64, Vec<u64>) {
    let mut order: Vec<usize> = (0..matrix.rows).collect();
    order.sort_by_key(|&i| size(matrix.row(i)));
    let (mut value, mut slack, mut price) = ascend(matrix, &order);
    // Prices of rows in many columns are given back and handed out again to the rows that then gain most.
    for _ in 0..3 {
        let mut lowered = price.clone();
        let mut room = slack.clone();
        for &i in order.iter().rev() {
            let tight = ones(matrix.row(i)).filter(|&j| room[j] == 0).count();
            if lowered[i] > 0 && tight > 1 {
                ones(matrix.row(i)).for_each(|j| room[j] += lowered[i]);
                lowered[i] = 0;
                break;
            }
        }
        for &i in &order {
            let gain = ones(matrix.row(i)).map(|j| room[j]).min().unwrap_or(0);
            if gain > 0 {
                ones(matrix.row(i)).for_each(|j| room[j] -= gain);
                lowered[i] += gain;
            }
        }
        let total = lowered.iter().sum();
        if total <= value {
            break;
        }
        (value, slack, price) = (total, room, lowered);
    }
    (value, slack)
}

/// Raises the price of each row in turn as far as the columns allow.
fn ascend(matrix: &Matrix, order: &[usize]) -> (u64, Vec<u64>, Vec<u64>) {
    let mut slack = matrix.cost.clone();
    let mut price = vec![0; matrix.rows];
    let mut value = 0;
    for &i in order {
        let gain = ones(matrix.row(i)).map(|j| slack[j]).min().unwrap_or(0);
        if gain > 0 {
            ones(matrix.row(i)).for_each(|j| slack[j] -= gain);
            price[i] = gain;
            value += gain;
        }
    }
    (value, slack, price)
}

/// A cover by taking the column with the least cost for each new row, then dropping what is not needed.
fn greedy(matrix: &Matrix) -> Vec<usize> {
    let mut left = full(matrix.rows, matrix.row_words);
    let mut chosen = Vec::new();
    while left.iter().any(|&w| w != 0) {
        let next = (0..matrix.columns)
            .map(|j| (j, common_size(matrix.column(j), &left) as u64))
            .filter(|&(_, gain)| gain > 0)
            .min_by(|&(a, ga), &(b, gb)| {
                (u128::from(matrix.cost[a]) * u128::from(gb))
                    .cmp(&(u128::from(matrix.cost[b]) * u128::from(ga)))
                    .then(a.cmp(&b))
            });
        let Some((j, _)) = next else { break };
        subtract(&mut left, matrix.column(j));
        chosen.push(j);
    }
    for at in (0..chosen.len()).rev() {
        let mut rest = full(matrix.rows, matrix.row_words);
        for (other, &j) in chosen.iter().enumerate() {
            if other != at {
                subtract(&mut rest, matrix.column(j));
            }
        }
        if rest.iter().all(|&w| w == 0) {
            chosen.remove(at);
        }
    }
    chosen
}

fn cost_of(matrix: &Matrix, columns: &[usize]) -> u64 {
    columns.iter().map(|&j| matrix.cost[j]).sum()
}

/// The parts that share neither row nor column; the matrix itself if there is one only.
fn components(matrix: Matrix) -> Vec<Matrix> {
    if matrix.rows == 0 {
        return Vec::new();
    }
    let parts = components_if_many(&matrix);
    if parts.is_empty() { vec![matrix] } else { parts }
}

/// The parts that share neither row nor column; nothing if there is one only.
fn components_if_many(matrix: &Matrix) -> Vec<Matrix> {
    let mut open = full(matrix.rows, matrix.row_words);
    let mut parts = Vec::new();
    loop {
        let seed = ones(&open).next();
        let Some(seed) = seed else { break };
        let mut rows = vec![0; matrix.row_words];
        let mut columns = vec![0; matrix.column_words];
        rows[seed / 64] |= 1 << (seed % 64);
        let mut stack = vec![seed];
        while let Some(i) = stack.pop() {
            for j in ones(matrix.row(i)) {
                if has(&columns, j) {
                    continue;
                }
                columns[j / 64] |= 1 << (j % 64);
                for k in ones(matrix.column(j)) {
                    if !has(&rows, k) {
                        rows[k / 64] |= 1 << (k % 64);
                        stack.push(k);
                    }
                }
            }
        }
        subtract(&mut open, &rows);
        if parts.is_empty() && open.iter().all(|&w| w == 0) {
            return Vec::new();
        }
        parts.push(matrix.restrict(&rows, &columns));
    }
    parts
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

fn size(set: &[u64]) -> usize {
    set.iter().map(|w| w.count_ones() as usize).sum()
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

struct Bits(u64);

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
