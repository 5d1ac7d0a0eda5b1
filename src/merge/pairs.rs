//! The implication table: which rows may be merged at all, and for every pair that may not, why.
//!
//! Two rows conflict where an output is 0 in one and 1 in the other. A pair implies the pairs of next rows that merging
//! would force together; whatever implies an incompatible pair is struck, round after round, until nothing changes. The
//! result is exact: the largest relation that is closed under implication.
//!
//! # Complexity
//!
//! With n rows, c columns and m outputs, conflicts take O(c·m·n²/64) word operations and striking O(c·n²/64 + c·t²) with
//! t different next rows in a column (few where each row is stable in one column only), plus a constant for each of the
//! n²/2 verdicts. Rounds do not multiply the cost: a pair is looked at again only when what it implies has just fallen.
//!
//! # References
//!
//! - M. C. Paull and S. H. Unger, "Minimizing the number of states in incompletely specified sequential switching
//!   functions", IRE Trans. on Electronic Computers EC-8, 1959.

use crate::base::{Column, Outputs, Row};
use crate::merge::values::{Conflict, PairTable, Verdict, columns_in_text_order};
use crate::search::clique::Graph;
use crate::spec::values::FlowTable;

/// The implication table of a flow table. `row_outputs`: one word for each row where outputs belong to rows; they alone
/// decide on conflicts then.
pub(super) fn pair_table(table: &FlowTable, row_outputs: Option<&[Outputs]>) -> PairTable {
    let n = table.len();
    let mut found = Found {
        verdicts: vec![Verdict::Compatible; n * n.saturating_sub(1) / 2],
        open: Graph::new(n).complement(),
        fallen: Vec::new(),
    };
    match row_outputs {
        Some(words) => conflicts(words, None, table.outputs, &mut found),
        None => {
            for column in columns_in_text_order(table.inputs) {
                let words: Vec<Outputs> = table.rows().map(|r| table.cell(r, column).outputs).collect();
                conflicts(&words, Some(column), table.outputs, &mut found);
            }
        }
    }
    let passes = strike(table, &mut found);
    PairTable::new(table, found.verdicts, passes)
}

/// The merger diagram: rows joined where they are compatible.
pub(super) fn merger_diagram(pairs: &PairTable) -> Graph {
    let mut graph = Graph::new(pairs.rows);
    for b in 1..pairs.rows {
        for a in 0..b {
            if pairs.compatible(Row::new(a), Row::new(b)) {
                graph.join(a, b);
            }
        }
    }
    graph
}

/// What is known so far.
struct Found {
    verdicts: Vec<Verdict>,
    /// Pairs that nothing speaks against yet.
    open: Graph,
    /// Pairs that have fallen in this round.
    fallen: Vec<(u32, u32)>,
}

impl Found {
    /// Marks the open pairs of `row` with a member of `others`.
    fn fell(&mut self, row: usize, others: &[u64], verdict: impl Fn(usize) -> Verdict) {
        for (w, &word) in others.iter().enumerate() {
            let mut hit = word & self.open.row(row)[w];
            while hit != 0 {
                let other = w * 64 + hit.trailing_zeros() as usize;
                hit &= hit - 1;
                self.open.part(row, other);
                self.fallen.push((row as u32, other as u32));
                self.verdicts[PairTable::index(Row::new(row), Row::new(other))] = verdict(other);
            }
        }
    }
}

/// Marks the open pairs that have different values of an output in one column, lowest output first.
fn conflicts(words: &[Outputs], column: Option<Column>, outputs: usize, found: &mut Found) {
    let mut ones = vec![0; found.open.words()];
    let mut zeros = Vec::with_capacity(words.len());
    for output in 0..outputs {
        ones.fill(0);
        zeros.clear();
        for (row, word) in words.iter().enumerate() {
            match word.get(output) {
                Some(true) => ones[row / 64] |= 1 << (row % 64),
                Some(false) => zeros.push(row),
                None => {}
            }
        }
        for &row in &zeros {
            found.fell(row, &ones, |_| Verdict::Conflict(Conflict { column, output }));
        }
    }
}

/// Strikes in rounds; returns their number.
fn strike(table: &FlowTable, found: &mut Found) -> usize {
    let columns: Vec<Arrivals> = columns_in_text_order(table.inputs)
        .map(|c| Arrivals::of(table, c))
        .filter(|arrivals| arrivals.goals.len() > 1)
        .collect();
    // Rows joined where their pair fell in the last round.
    let mut fresh = Graph::new(table.len());
    let mut bad = vec![0; fresh.words()];
    let mut pass = 0;
    loop {
        fresh.clear();
        for (a, b) in std::mem::take(&mut found.fallen) {
            fresh.join(a as usize, b as usize);
        }
        for arrivals in &columns {
            for &goal in &arrivals.goals {
                arrivals.leading_apart(goal, &fresh, &mut bad);
                for &row in &arrivals.from[goal] {
                    found.fell(row, &bad, |other| {
                        let next = arrivals.goal_of[other];
                        let by = (Row::new(goal.min(next)), Row::new(goal.max(next)));
                        Verdict::Struck { by, pass: pass + 1 }
                    });
                }
            }
        }
        if found.fallen.is_empty() {
            return pass;
        }
        pass += 1;
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

    /// Fills `bad` with the rows whose next row is joined to `goal` in `fresh`.
    fn leading_apart(&self, goal: usize, fresh: &Graph, bad: &mut [u64]) {
        bad.fill(0);
        for (w, (&near, &goals)) in fresh.row(goal).iter().zip(&self.goal_set).enumerate() {
            let mut others = near & goals;
            while others != 0 {
                let other = w * 64 + others.trailing_zeros() as usize;
                others &= others - 1;
                for &row in &self.from[other] {
                    bad[row / 64] |= 1 << (row % 64);
                }
            }
        }
    }
}
