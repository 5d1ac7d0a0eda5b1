//! The hard questions of the chain as integer programs, solved by HiGHS.
//!
//! Source of the second opinion: HiGHS, a general branch-and-cut solver (Huangfu & Hall 2018), through the crate `highs`.
//! The programs below are written from the definitions of closed cover, state assignment and hazard-free cover; they take
//! plain values and call nothing of the stages. [`Answer::seconds`] is the time inside the solver alone.

use std::ops::RangeBounds;
use std::time::Instant;

use highs::{Col, HighsModelStatus, RowProblem, Sense};
use stillgate::base::{Column, Row};
use stillgate::logic::values::{Cube, Equations, Function};
use stillgate::spec::FlowTable;

use crate::common::naive;

/// What the solver found.
#[derive(Debug, Clone, PartialEq)]
pub struct Answer {
    /// The result.
    pub found: Found,
    /// Seconds inside the solver.
    pub seconds: f64,
}

/// The result of one integer program.
#[derive(Debug, Clone, PartialEq)]
pub enum Found {
    /// The optimum.
    Optimum(u64),
    /// There is no solution.
    Nothing,
    /// The time was up.
    TimedOut,
}

impl Answer {
    /// The optimum; panics if there is none or the time was up.
    pub fn optimum(&self) -> u64 {
        match self.found {
            Found::Optimum(value) => value,
            ref other => panic!("the solver says {other:?}"),
        }
    }

    /// Whether there is a solution at all; panics if the time was up.
    pub fn feasible(&self) -> bool {
        match self.found {
            Found::Optimum(_) => true,
            Found::Nothing => false,
            Found::TimedOut => panic!("the solver ran out of time"),
        }
    }
}

/// An integer program in the making.
#[derive(Default)]
struct Program {
    rows: RowProblem,
    columns: usize,
}

impl Program {
    fn binary(&mut self, cost: f64) -> Col {
        self.columns += 1;
        self.rows.add_integer_column(cost, 0..=1)
    }

    fn continuous(&mut self, most: f64) -> Col {
        self.columns += 1;
        self.rows.add_column(0.0, 0.0..=most)
    }

    fn require(&mut self, bounds: impl RangeBounds<f64>, terms: &[(Col, f64)]) {
        // A variable may be named several times, or with weight zero: the solver wants each once.
        let mut merged: Vec<(Col, f64)> = Vec::with_capacity(terms.len());
        let mut sorted = terms.to_vec();
        sorted.sort_by_key(|(col, _)| col.index());
        for (col, weight) in sorted {
            match merged.last_mut() {
                Some((last, sum)) if *last == col => *sum += weight,
                _ => merged.push((col, weight)),
            }
        }
        merged.retain(|(_, weight)| *weight != 0.0);
        self.rows.add_row(bounds, &merged);
    }

    fn minimise(self, seconds: f64) -> Answer {
        if self.columns == 0 {
            return Answer { found: Found::Optimum(0), seconds: 0.0 };
        }
        let mut model = self.rows.optimise(Sense::Minimise);
        model.make_quiet();
        model.set_option("time_limit", seconds);
        model.set_option("mip_rel_gap", 0.0);
        model.set_option("threads", 1);
        let start = Instant::now();
        let solved = model.solve();
        let seconds = start.elapsed().as_secs_f64();
        let found = match solved.status() {
            HighsModelStatus::Optimal => Found::Optimum(solved.objective_value().round() as u64),
            HighsModelStatus::Infeasible | HighsModelStatus::UnboundedOrInfeasible => Found::Nothing,
            HighsModelStatus::ReachedTimeLimit => Found::TimedOut,
            other => panic!("HiGHS: {other:?}"),
        };
        Answer { found, seconds }
    }
}

/// The fewest sets of a closed cover of `table` (outputs per cell), at most `sets`.
///
/// in(s, r): row r is in set s; to(s, c, t): set t receives what set s needs in column c. Every row is in a set; rows that are
/// incompatible are never together; all next rows of a set in a column are in the set that receives them; a set with an inner
/// cell receives itself there. Sets in use come first, and pairwise incompatible rows are fixed in different sets.
pub fn smallest_cover(table: &FlowTable, sets: usize, seconds: f64) -> Answer {
    let incompatible = naive::incompatible(table);
    let mut program = Program::default();
    let used: Vec<Col> = (0..sets).map(|_| program.binary(1.0)).collect();
    let member: Vec<Vec<Col>> =
        (0..sets).map(|_| table.rows().map(|_| program.binary(0.0)).collect()).collect();
    for s in 1..sets {
        program.require(0.0.., &[(used[s - 1], 1.0), (used[s], -1.0)]);
    }
    for r in table.rows() {
        let holders: Vec<(Col, f64)> = member.iter().map(|m| (m[r.at()], 1.0)).collect();
        program.require(1.0.., &holders);
    }
    for (s, rows) in member.iter().enumerate() {
        for &m in rows {
            program.require(..=0.0, &[(m, 1.0), (used[s], -1.0)]);
        }
        for a in 0..rows.len() {
            for b in 0..a {
                if incompatible[a][b] {
                    program.require(..=0.0, &[(rows[a], 1.0), (rows[b], 1.0), (used[s], -1.0)]);
                }
            }
        }
    }
    for (s, r) in naive::clique(&incompatible).into_iter().enumerate().take(sets) {
        program.require(1.0.., &[(member[s][r], 1.0)]);
    }
    for c in table.columns() {
        let next: Vec<(Row, Row)> = table.rows().filter_map(|r| Some((r, table.next(r, c)?))).collect();
        let inner: Vec<Row> = table.rows().filter(|&r| table.cell(r, c).inner).collect();
        for s in 0..sets {
            for &i in &inner {
                for &(r, n) in &next {
                    let rows = &member[s];
                    program
                        .require(..=1.0, &[(rows[i.at()], 1.0), (rows[r.at()], 1.0), (rows[n.at()], -1.0)]);
                }
            }
            if next.iter().all(|&(_, n)| n == next[0].1) {
                continue; // one next row: some set covers it
            }
            let to: Vec<Col> = (0..sets).map(|_| program.binary(0.0)).collect();
            let all: Vec<(Col, f64)> = to.iter().map(|&p| (p, 1.0)).collect();
            program.require(1.0..=1.0, &all);
            for (t, &p) in to.iter().enumerate() {
                for &(r, n) in &next {
                    program.require(..=1.0, &[(p, 1.0), (member[s][r.at()], 1.0), (member[t][n.at()], -1.0)]);
                }
            }
        }
    }
    program.minimise(seconds)
}

/// In a column of a reduced table, the rows that go to one stable row, with what may be passed on the way.
struct Basin {
    goal: Row,
    /// Rows that go to the goal, itself left out.
    starts: Vec<Row>,
    /// Rows that others may pass: of the basin or unspecified here, and not with an output that speaks against the goal.
    passable: Vec<Row>,
    /// Rows of the basin and open rows that no other move may touch.
    shut: Vec<Row>,
}

fn basins(table: &FlowTable, column: Column) -> Vec<Basin> {
    let mut found = Vec::new();
    for goal in table.rows().filter(|&k| table.stable(k, column)) {
        let starts: Vec<Row> =
            table.rows().filter(|&r| r != goal && table.next(r, column) == Some(goal)).collect();
        let (mut passable, mut shut) = (Vec::new(), Vec::new());
        for r in table.rows().filter(|&r| r != goal) {
            let next = table.next(r, column);
            let late = table.cell(r, column).outputs.conflicts(table.cell(goal, column).outputs) != 0;
            match (next == Some(goal) || next.is_none(), late) {
                (true, false) => passable.push(r),
                (true, true) => shut.push(r),
                (false, _) => {}
            }
        }
        found.push(Basin { goal, starts, passable, shut });
    }
    found
}

/// Whether the rows of a reduced table have codes of `bits` bits such that every move goes by steps of one bit: through rows of
/// its basin, rows that are open in the column, and, with `spare`, codes of no row. The optimum is the fewest spare codes.
///
/// is(r, v): row r has code v. For each basin that has a start: own(v): code v leads to its goal; a flow from every start to
/// the goal along edges of the cube, through codes that it owns.
pub fn one_bit_steps(table: &FlowTable, bits: usize, spare: bool, seconds: f64) -> Answer {
    let codes = 1usize << bits;
    let n = table.len();
    if n > codes {
        return Answer { found: Found::Nothing, seconds: 0.0 };
    }
    let mut program = Program::default();
    let is: Vec<Vec<Col>> = (0..n).map(|_| (0..codes).map(|_| program.binary(0.0)).collect()).collect();
    for row in &is {
        let all: Vec<(Col, f64)> = row.iter().map(|&x| (x, 1.0)).collect();
        program.require(1.0..=1.0, &all);
    }
    for v in 0..codes {
        let all: Vec<(Col, f64)> = is.iter().map(|row| (row[v], 1.0)).collect();
        program.require(..=1.0, &all);
    }
    // The cube looks the same from every corner.
    program.require(1.0.., &[(is[0][0], 1.0)]);
    let spares: Vec<Col> = if spare { (0..codes).map(|_| program.binary(1.0)).collect() } else { Vec::new() };
    for column in table.columns() {
        let basins: Vec<Basin> = basins(table, column).into_iter().filter(|b| !b.starts.is_empty()).collect();
        let own: Vec<Vec<Col>> =
            basins.iter().map(|_| (0..codes).map(|_| program.binary(0.0)).collect()).collect();
        for v in 0..codes {
            let all: Vec<(Col, f64)> = own.iter().map(|o| (o[v], 1.0)).collect();
            program.require(..=1.0, &all);
        }
        for (basin, own) in basins.iter().zip(&own) {
            for v in 0..codes {
                // Only codes of the basin, of open rows, and spare ones can be owned.
                let mut terms = vec![(own[v], 1.0)];
                let rows: Vec<Row> =
                    basin.passable.iter().chain(&basin.starts).copied().chain([basin.goal]).collect();
                let mut seen = vec![false; n];
                for r in rows {
                    if !std::mem::replace(&mut seen[r.at()], true) {
                        terms.push((is[r.at()][v], -1.0));
                    }
                }
                if spare {
                    terms.push((spares[v], -1.0));
                    let mut free: Vec<(Col, f64)> = is.iter().map(|row| (row[v], 1.0)).collect();
                    free.push((spares[v], 1.0));
                    program.require(..=1.0, &free);
                }
                program.require(..=0.0, &terms);
                for r in basin.starts.iter().chain([&basin.goal]) {
                    program.require(0.0.., &[(own[v], 1.0), (is[r.at()][v], -1.0)]);
                }
            }
            flow(&mut program, &is, own, basin, bits);
        }
    }
    program.minimise(seconds)
}

fn flow(program: &mut Program, is: &[Vec<Col>], own: &[Col], basin: &Basin, bits: usize) {
    let codes = 1usize << bits;
    let most = basin.starts.len() as f64;
    let mut balance: Vec<Vec<(Col, f64)>> = vec![Vec::new(); codes];
    let mut into: Vec<Vec<(Col, f64)>> = vec![Vec::new(); codes];
    for v in 0..codes {
        for bit in 0..bits {
            let w = v ^ 1 << bit;
            let f = program.continuous(most);
            program.require(..=0.0, &[(f, 1.0), (own[v], -most)]);
            program.require(..=0.0, &[(f, 1.0), (own[w], -most)]);
            balance[v].push((f, 1.0));
            balance[w].push((f, -1.0));
            into[w].push((f, 1.0));
        }
    }
    for v in 0..codes {
        let mut terms = std::mem::take(&mut balance[v]);
        terms.extend(basin.starts.iter().map(|r| (is[r.at()][v], -1.0)));
        terms.push((is[basin.goal.at()][v], most));
        program.require(0.0..=0.0, &terms);
        for r in &basin.shut {
            // Nothing flows into the code of a row that must not be passed.
            let mut terms = into[v].clone();
            terms.push((is[r.at()][v], most));
            program.require(..=most, &terms);
        }
    }
}

/// Whether the rows of a reduced table have codes of `bits` bits such that all bits of a move may change at once.
///
/// Tracey's condition: for two moves of a column to different goals some bit has one value on one and the other on the
/// other; all rows differ; a row that no other move may touch is told apart from every other move to its goal.
pub fn single_step(table: &FlowTable, bits: usize, seconds: f64) -> Answer {
    let mut apart: Vec<(Vec<Row>, Vec<Row>)> = Vec::new();
    for a in table.rows() {
        for b in table.rows().filter(|&b| b < a) {
            apart.push((vec![b], vec![a]));
        }
    }
    for column in table.columns() {
        let basins = basins(table, column);
        let ways = |b: &Basin| -> Vec<Vec<Row>> {
            let mut all = vec![vec![b.goal]];
            all.extend(b.starts.iter().map(|&r| vec![r.min(b.goal), r.max(b.goal)]));
            all
        };
        for (i, a) in basins.iter().enumerate() {
            for b in &basins[..i] {
                for one in ways(a) {
                    apart.extend(ways(b).into_iter().map(|other| (one.clone(), other)));
                }
            }
            for &r in &a.shut {
                for one in ways(a).into_iter().filter(|way| !way.contains(&r)) {
                    apart.push((one, vec![r]));
                }
            }
        }
    }
    apart.sort();
    apart.dedup();
    let mut program = Program::default();
    // The value of each bit on each row.
    let values: Vec<Vec<Col>> =
        (0..bits).map(|_| table.rows().map(|_| program.binary(0.0)).collect()).collect();
    for value in &values {
        program.require(..=0.0, &[(value[0], 1.0)]);
    }
    for (low, high) in &apart {
        let mut some = Vec::new();
        for value in &values {
            for (zeros, ones) in [(low, high), (high, low)] {
                let by = program.binary(0.0);
                some.push((by, 1.0));
                for r in zeros {
                    program.require(..=1.0, &[(by, 1.0), (value[r.at()], 1.0)]);
                }
                for r in ones {
                    program.require(..=0.0, &[(by, 1.0), (value[r.at()], -1.0)]);
                }
            }
        }
        program.require(1.0.., &some);
    }
    program.minimise(seconds)
}

/// Weight of a product against one literal in [`fewest_products`].
pub const PRODUCT: u64 = 1000;

/// The cheapest hazard-free cover of a function, as `PRODUCT * products + literals`, from its on-set, off-set and transitions
/// alone.
pub fn fewest_products(function: &Function, equations: &Equations, seconds: f64) -> Answer {
    let variables = equations.variables.len();
    let question = naive::Covering::of(function, equations);
    let candidates = question.candidates();
    let mut program = Program::default();
    let chosen: Vec<Col> =
        candidates.iter().map(|c| program.binary((PRODUCT + u64::from(c.literals())) as f64)).collect();
    let mut asked: Vec<Cube> = question.required.clone();
    asked.extend(question.on_points().map(|p| Cube::at(p, variables)));
    asked.sort_unstable();
    asked.dedup();
    for cube in asked {
        let holders: Vec<(Col, f64)> = candidates
            .iter()
            .zip(&chosen)
            .filter(|(candidate, _)| candidate.contains(cube))
            .map(|(_, &x)| (x, 1.0))
            .collect();
        if holders.is_empty() {
            return Answer { found: Found::Nothing, seconds: 0.0 };
        }
        program.require(1.0.., &holders);
    }
    program.minimise(seconds)
}
