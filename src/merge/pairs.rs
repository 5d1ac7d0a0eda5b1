//! The implication table: which rows may be merged at all, and for every pair that may not, why.
//!
//! Two rows conflict where an output is 0 in one and 1 in the other. A pair implies the pairs of next rows that merging
//! would force together; whatever implies an incompatible pair is struck, round after round, until nothing changes. The
//! result is exact: the largest relation that is closed under implication.
//!
//! # Complexity
//!
//! With n rows, c columns and m outputs, conflicts take O(c·m·n²/128) word operations and striking O(c·n²/64 + c·t²) with
//! t different next rows in a column (few where each row is stable in one column only), plus a constant for each of the
//! n²/2 verdicts. Rounds do not multiply the cost: a pair is looked at again only when what it implies has just fallen.
//!
//! # References
//!
//! - M. C. Paull and S. H. Unger, "Minimizing the number of states in incompletely specified sequential switching
//!   functions", IRE Trans. on Electronic Computers EC-8, 1959.

use crate::base::{Column, Outputs, Row};
use crate::merge::values::{Conflict, PackedVerdict, PairTable, Verdict, columns_in_text_order};
use crate::search::clique::Graph;
use crate::spec::values::FlowTable;

/// The implication table of a flow table. `row_outputs`: one word for each row where outputs belong to rows; they alone
/// decide on conflicts then.
pub(super) fn pair_table(table: &FlowTable, row_outputs: Option<&[Outputs]>) -> PairTable {
    let n = table.len();
    let stated = match row_outputs {
        Some(words) => vec![Stated::of(None, words, table.outputs)],
        None => columns_in_text_order(table.inputs)
            .map(|column| {
                let words: Vec<Outputs> = table.rows().map(|r| table.cell(r, column).outputs).collect();
                Stated::of(Some(column), &words, table.outputs)
            })
            .collect(),
    };
    let mut found =
        Found { verdicts: vec![PackedVerdict::default(); n * n.saturating_sub(1) / 2], open: Graph::new(n) };
    for row in 0..n {
        conflicts(&stated, row, &mut found);
    }
    let passes = strike(table, &mut found);
    PairTable::new(table, found.verdicts, passes)
}

/// The merger diagram: rows joined where they are compatible.
pub(super) fn merger_diagram(pairs: &PairTable) -> Graph {
    let mut graph = Graph::new(pairs.rows);
    for b in 1..pairs.rows {
        for a in (0..b).filter(|&a| pairs.compatible(Row::new(a), Row::new(b))) {
            graph.join(a, b);
        }
    }
    graph
}

/// What is known so far.
struct Found {
    verdicts: Vec<PackedVerdict>,
    /// Pairs that nothing speaks against yet.
    open: Graph,
}

/// The values that the rows state in one column: for each output that is 0 somewhere and 1 elsewhere, the rows with 0 and
/// the rows with 1.
struct Stated {
    column: Option<Column>,
    outputs: Vec<(usize, [Vec<u64>; 2])>,
}

impl Stated {
    fn of(column: Option<Column>, words: &[Outputs], outputs: usize) -> Self {
        let outputs = (0..outputs)
            .filter_map(|output| {
                let mut rows = [false, true].map(|_| vec![0u64; words.len().div_ceil(64)]);
                for (row, word) in words.iter().enumerate() {
                    if let Some(value) = word.get(output) {
                        rows[usize::from(value)][row / 64] |= 1 << (row % 64);
                    }
                }
                rows.iter().all(|set| set.iter().any(|&w| w != 0)).then_some((output, rows))
            })
            .collect();
        Stated { column, outputs }
    }
}

/// Settles the pairs of `row` with all rows before it: a conflict in the first column in text order, lowest output first, or
/// open.
fn conflicts(stated: &[Stated], row: usize, found: &mut Found) {
    let (word, bit) = (row / 64, row % 64);
    let mut open: Vec<u64> = vec![u64::MAX; word + 1];
    open[word] = (1 << bit) - 1;
    let verdicts = &mut found.verdicts[row * row.saturating_sub(1) / 2..][..row];
    for Stated { column, outputs } in stated {
        for &(output, ref rows) in outputs {
            let Some(own) = (0..2).find(|&value| rows[value][word] >> bit & 1 == 1) else { continue };
            let verdict = PackedVerdict::pack(Verdict::Conflict(Conflict { column: *column, output }));
            for (w, (open, other)) in open.iter_mut().zip(&rows[1 - own]).enumerate() {
                let hit = *open & other;
                *open ^= hit;
                for_each_bit(hit, w, |other| verdicts[other] = verdict);
            }
        }
    }
    for (w, &bits) in open.iter().enumerate() {
        for_each_bit(bits, w, |other| found.open.join(row, other));
    }
}

fn for_each_bit(mut bits: u64, word: usize, mut visit: impl FnMut(usize)) {
    while bits != 0 {
        visit(word * 64 + bits.trailing_zeros() as usize);
        bits &= bits - 1;
    }
}

/// Strikes in rounds; returns their number.
fn strike(table: &FlowTable, found: &mut Found) -> usize {
    let columns: Vec<Arrivals> = columns_in_text_order(table.inputs)
        .map(|c| Arrivals::of(table, c))
        .filter(|arrivals| arrivals.goals.len() > 1)
        .collect();
    // Rows joined where their pair fell in the last round: at first all that conflict.
    let mut fresh = found.open.complement();
    let mut bad = vec![0; fresh.words()];
    let mut passes = 0;
    loop {
        let before = found.open.clone();
        for arrivals in &columns {
            for &goal in &arrivals.goals {
                if arrivals.leading_apart(goal, &fresh, &mut bad) {
                    for &row in &arrivals.from[goal] {
                        strike_row(arrivals, row, &bad, passes + 1, found);
                    }
                }
            }
        }
        if found.open == before {
            return passes;
        }
        passes += 1;
        fresh = before.without(&found.open);
    }
}

/// Strikes the open pairs of `row` with a member of `bad`: their next rows in this column fell apart.
fn strike_row(arrivals: &Arrivals, row: usize, bad: &[u64], pass: usize, found: &mut Found) {
    for (w, &bad) in bad.iter().enumerate() {
        let hit = bad & found.open.row(row)[w];
        for_each_bit(hit, w, |other| {
            let (p, q) = (arrivals.goal_of[row], arrivals.goal_of[other]);
            let by = (Row::new(p.min(q)), Row::new(p.max(q)));
            found.open.part(row, other);
            found.verdicts[PairTable::index(Row::new(row), Row::new(other))] =
                PackedVerdict::pack(Verdict::Struck { by, pass });
        });
    }
}

/// One column, seen from its next rows.
struct Arrivals {
    /// The rows that some row goes to, as a list and as a set.
    goals: Vec<usize>,
    goal_set: Vec<u64>,
    /// For each row, the rows that go there.
    from: Vec<Vec<usize>>,
    /// Next row of each row that has one.
    goal_of: Vec<usize>,
}

impl Arrivals {
    fn of(table: &FlowTable, column: Column) -> Self {
        let n = table.len();
        let (mut from, mut goal_of, mut goal_set) =
            (vec![Vec::new(); n], vec![0; n], vec![0; n.div_ceil(64)]);
        for row in table.rows() {
            if let Some(next) = table.next(row, column) {
                from[next.at()].push(row.at());
                goal_of[row.at()] = next.at();
                goal_set[next.at() / 64] |= 1u64 << (next.at() % 64);
            }
        }
        let goals = (0..n).filter(|&r| !from[r].is_empty()).collect();
        Arrivals { goals, goal_set, from, goal_of }
    }

    /// Fills `bad` with the rows whose next row is joined to `goal` in `fresh`; whether there are any.
    fn leading_apart(&self, goal: usize, fresh: &Graph, bad: &mut [u64]) -> bool {
        bad.fill(0);
        let mut any = false;
        for (w, (&near, &goals)) in fresh.row(goal).iter().zip(&self.goal_set).enumerate() {
            for_each_bit(near & goals, w, |other| {
                any = true;
                self.from[other].iter().for_each(|&row| bad[row / 64] |= 1 << (row % 64));
            });
        }
        any
    }
}
