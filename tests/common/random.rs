//! Seeded random controllers in normal mode.
//!
//! Every generator takes a seed and gives the same project for it on any machine. A test that fails prints the seed and
//! keeps it in `tests/data/seeds`; see [`crate::common::text`].

use std::collections::BTreeMap;

use stillgate::project::{CellEntry, Discipline, Project, RowEntry};

/// A small generator of the xorshift family [Marsaglia 2003; Vigna 2016], seeded through a mixer so that neighbouring
/// seeds give unrelated streams.
pub struct Rng(u64);

impl Rng {
    /// The stream of a seed.
    pub fn new(seed: u64) -> Self {
        let mut z = seed.wrapping_add(0x9E37_79B9_7F4A_7C15);
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        Rng((z ^ (z >> 31)) | 1)
    }

    /// 64 random bits.
    pub fn next(&mut self) -> u64 {
        self.0 ^= self.0 >> 12;
        self.0 ^= self.0 << 25;
        self.0 ^= self.0 >> 27;
        self.0.wrapping_mul(0x2545_F491_4F6C_DD1D)
    }

    /// A number below `n` (`n > 0`).
    pub fn below(&mut self, n: usize) -> usize {
        ((u128::from(self.next()) * n as u128) >> 64) as usize
    }

    /// A number from `low` to `high`, both included.
    pub fn within(&mut self, low: usize, high: usize) -> usize {
        low + self.below(high - low + 1)
    }

    /// True with the given probability.
    pub fn chance(&mut self, probability: f64) -> bool {
        ((self.next() >> 11) as f64) < probability * (1u64 << 53) as f64
    }

    /// One of a slice that is not empty.
    pub fn pick<'s, T>(&mut self, from: &'s [T]) -> &'s T {
        &from[self.below(from.len())]
    }
}

/// What a random primitive table is made of.
#[derive(Debug, Clone, Copy)]
pub struct Shape {
    /// Rows.
    pub rows: usize,
    /// Inputs.
    pub inputs: usize,
    /// Outputs.
    pub outputs: usize,
    /// Probability that a cell that could be entered is left open.
    pub open: f64,
    /// How the inputs change.
    pub discipline: Discipline,
}

/// The shape that a seed stands for: small tables of every kind, both disciplines.
pub fn shape_of(seed: u64) -> Shape {
    let mut rng = Rng::new(seed ^ 0x5EED);
    let inputs = rng.within(1, 3);
    Shape {
        rows: rng.within(2, if inputs == 1 { 5 } else { 8 }),
        inputs,
        outputs: rng.within(1, 2),
        open: *rng.pick(&[0.0, 0.2, 0.5]),
        discipline: if inputs > 1 && rng.chance(0.4) { Discipline::Burst } else { Discipline::Single },
    }
}

/// A random primitive table of a shape: one stable cell a row, every unstable cell leads to a row that is stable there.
///
/// Stable outputs are given (now and then open), unstable ones mostly open. In burst tables no specified column lies on
/// the way to another one of the same row, so that no burst is ambiguous.
pub fn primitive(seed: u64, shape: Shape) -> Project {
    let rng = &mut Rng::new(seed);
    let columns = 1u32 << shape.inputs;
    let stable: Vec<u32> = (0..shape.rows).map(|_| rng.below(columns as usize) as u32).collect();
    let rows = (0..shape.rows)
        .map(|row| {
            let mut cells = BTreeMap::new();
            cells.insert(bits(stable[row], shape.inputs), cell(&name(row), word(rng, shape.outputs, 0.05)));
            for column in targets(rng, stable[row], shape) {
                let there: Vec<usize> = (0..shape.rows).filter(|&k| stable[k] == column).collect();
                if there.is_empty() {
                    continue;
                }
                let next = name(*rng.pick(&there));
                cells.insert(bits(column, shape.inputs), cell(&next, word(rng, shape.outputs, 0.85)));
            }
            RowEntry { name: name(row), cells }
        })
        .collect();
    project(format!("Random table {seed}"), shape.inputs, shape.outputs, shape.discipline, stable[0], rows)
}

/// The columns in which a row of a random table gets an unstable cell.
fn targets(rng: &mut Rng, from: u32, shape: Shape) -> Vec<u32> {
    match shape.discipline {
        Discipline::Single => {
            (0..shape.inputs).map(|i| from ^ 1 << i).filter(|_| !rng.chance(shape.open)).collect()
        }
        Discipline::Burst => {
            let mut chosen: Vec<u32> = Vec::new();
            for _ in 0..1 << shape.inputs {
                let change = rng.below(1 << shape.inputs) as u32;
                let on_the_way = |a: u32, b: u32| a & b == a || a & b == b;
                if change != 0
                    && !rng.chance(shape.open)
                    && chosen.iter().all(|&c| !on_the_way(c ^ from, change))
                {
                    chosen.push(from ^ change);
                }
            }
            chosen
        }
    }
}

/// What is unrolled into a larger primitive table.
#[derive(Debug, Clone, Copy)]
pub struct Unrolled {
    /// Fewest and most states of the machine.
    pub states: (usize, usize),
    /// Inputs.
    pub inputs: usize,
    /// Outputs.
    pub outputs: usize,
    /// Fewest and most rows of the primitive table.
    pub rows: (usize, usize),
    /// Probability that a cell is left open.
    pub open: f64,
}

/// Primitive tables as a designer writes them before merging: 40 to 60 rows over four inputs.
pub const UNROLLED: Unrolled = Unrolled { states: (4, 8), inputs: 4, outputs: 2, rows: (40, 60), open: 0.3 };

/// Machines whose reduced tables have three to seven rows and few open cells: work for the state assignment.
pub const CROWDED: Unrolled = Unrolled { states: (4, 7), inputs: 3, outputs: 3, rows: (14, 30), open: 0.1 };

/// A random machine in normal mode, written out with one row for each stable total state that can be reached.
///
/// The machine is drawn again until the number of rows fits; cells are left open afterwards, so that a few rows may then
/// be out of reach.
pub fn unrolled(seed: u64, of: Unrolled) -> Project {
    let rng = &mut Rng::new(seed ^ 0x0BAD_CAFE);
    loop {
        if let Some(project) = unroll_once(rng, seed, of) {
            return project;
        }
    }
}

fn unroll_once(rng: &mut Rng, seed: u64, of: Unrolled) -> Option<Project> {
    let columns = 1usize << of.inputs;
    let states = rng.within(of.states.0, of.states.1);
    let density = (of.rows.0 + of.rows.1) as f64 / 2.0 / (states * columns) as f64;
    // next[s][c]: some state that is stable in c.
    let mut next = vec![vec![0usize; columns]; states];
    for c in 0..columns {
        let mut stable: Vec<usize> = (0..states).filter(|_| rng.chance(density.min(0.9))).collect();
        if stable.is_empty() {
            stable.push(rng.below(states));
        }
        for (s, row) in next.iter_mut().enumerate() {
            row[c] = if stable.contains(&s) { s } else { *rng.pick(&stable) };
        }
    }
    let outputs: Vec<Vec<String>> =
        (0..states).map(|_| (0..columns).map(|_| word(rng, of.outputs, 0.0)).collect()).collect();
    // Walk the stable total states from the first one.
    let start = (0..states * columns).map(|t| (t % states, t / states)).find(|&(s, c)| next[s][c] == s)?;
    let mut order = vec![start];
    let mut at = 0;
    while at < order.len() {
        let (s, c) = order[at];
        for i in 0..of.inputs {
            let to = c ^ 1 << i;
            let found = (next[s][to], to);
            if !order.contains(&found) {
                order.push(found);
            }
        }
        at += 1;
    }
    if order.len() < of.rows.0 || order.len() > of.rows.1 {
        return None;
    }
    let rows = order
        .iter()
        .enumerate()
        .map(|(row, &(s, c))| {
            let mut cells = BTreeMap::new();
            cells.insert(bits(c as u32, of.inputs), cell(&name(row), outputs[s][c].clone()));
            for i in 0..of.inputs {
                let to = c ^ 1 << i;
                if rng.chance(of.open) {
                    continue;
                }
                let goal = order.iter().position(|&o| o == (next[s][to], to)).expect("walked");
                cells.insert(bits(to as u32, of.inputs), cell(&name(goal), "-".repeat(of.outputs)));
            }
            RowEntry { name: name(row), cells }
        })
        .collect();
    let first = start.1 as u32;
    Some(project(format!("Unrolled machine {seed}"), of.inputs, of.outputs, Discipline::Single, first, rows))
}

/// A project of random rows, started in its first row.
pub fn project(
    title: String,
    inputs: usize,
    outputs: usize,
    discipline: Discipline,
    first_column: u32,
    rows: Vec<RowEntry>,
) -> Project {
    let mut project = Project::new(
        (0..inputs).map(|i| format!("x{}", i + 1)).collect(),
        (0..outputs).map(|j| format!("z{}", j + 1)).collect(),
    );
    project.title = title;
    project.discipline = discipline;
    project.initial = Some((rows[0].name.clone(), bits(first_column, inputs)));
    project.rows = rows;
    project
}

/// Name of row `row` of a random table.
pub fn name(row: usize) -> String {
    format!("r{}", row + 1)
}

/// A column as text, bit 0 first.
pub fn bits(column: u32, inputs: usize) -> String {
    stillgate::base::index::bits_text(column, inputs)
}

/// A cell entry.
pub fn cell(next: &str, outputs: impl Into<String>) -> CellEntry {
    CellEntry { next: next.to_string(), outputs: outputs.into() }
}

fn word(rng: &mut Rng, outputs: usize, open: f64) -> String {
    (0..outputs)
        .map(|_| {
            if rng.chance(open) {
                '-'
            } else if rng.chance(0.5) {
                '1'
            } else {
                '0'
            }
        })
        .collect()
}
