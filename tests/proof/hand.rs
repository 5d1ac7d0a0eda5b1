//! Designs written down by hand, as plain values, without any stage.

use std::collections::BTreeMap;

use stillgate::base::{Bound, Code, Column, Outputs, Row, TotalState};
use stillgate::codes::{Coded, Encoded, Entry, Role, Spare, Step, Way};
use stillgate::logic::values::{Cube, Equations, Function, Product, Target};
use stillgate::merge::Reduced;
use stillgate::project::choices::{Discipline, Form, Method, OutputStyle, Shape};
use stillgate::spec::{Cell, FlowTable, Signals, Spec};

pub struct Hand {
    signals: Signals,
    discipline: Discipline,
    rows: Vec<(String, String)>,
    start: (String, String),
    merged: Vec<(String, String, String)>,
    codes: String,
    spare: Vec<(String, String)>,
    ways: Vec<(String, String)>,
}

/// A whole design, still to be given functions.
#[derive(Clone)]
pub struct Built {
    pub spec: Spec,
    pub reduced: Reduced,
    pub coded: Coded,
    pub equations: Equations,
}

fn words(text: &str) -> Vec<String> {
    text.split_whitespace().map(str::to_string).collect()
}

impl Hand {
    pub fn new(inputs: &str, outputs: &str, discipline: Discipline) -> Self {
        Hand {
            signals: Signals { inputs: words(inputs), outputs: words(outputs) },
            discipline,
            rows: Vec::new(),
            start: Default::default(),
            merged: Vec::new(),
            codes: String::new(),
            spare: Vec::new(),
            ways: Vec::new(),
        }
    }

    /// A primitive row: cells as `column:next/outputs`.
    pub fn row(mut self, name: &str, cells: &str) -> Self {
        self.rows.push((name.into(), cells.into()));
        self
    }

    pub fn start(mut self, row: &str, column: &str) -> Self {
        self.start = (row.into(), column.into());
        self
    }

    /// A merged row with its members.
    pub fn merged(mut self, name: &str, members: &str, cells: &str) -> Self {
        self.merged.push((name.into(), members.into(), cells.into()));
        self
    }

    /// Nothing merges.
    pub fn same(mut self) -> Self {
        self.merged = self.rows.iter().map(|(n, c)| (n.clone(), n.clone(), c.clone())).collect();
        self
    }

    /// `row=code` for each merged row.
    pub fn codes(mut self, codes: &str) -> Self {
        self.codes = codes.into();
        self
    }

    pub fn spare(mut self, name: &str, code: &str) -> Self {
        self.spare.push((name.into(), code.into()));
        self
    }

    /// `from column to` and the codes passed.
    pub fn way(mut self, ends: &str, path: &str) -> Self {
        self.ways.push((ends.into(), path.into()));
        self
    }

    fn table(&self, rows: &[(String, String)]) -> FlowTable {
        let names: Vec<String> = rows.iter().map(|r| r.0.clone()).collect();
        let (n, m) = (self.signals.inputs.len(), self.signals.outputs.len());
        let mut table = FlowTable::new(n, m, names.clone());
        for (i, (_, cells)) in rows.iter().enumerate() {
            for cell in cells.split_whitespace() {
                let (column, rest) = cell.split_once(':').expect("column");
                let (next, outputs) = rest.split_once('/').expect("outputs");
                *table.cell_mut(Row::new(i), Column::parse(column, n).expect("column")) = Cell {
                    next: names.iter().position(|n| n == next).map(Row::new),
                    outputs: Outputs::parse(outputs, m).expect("outputs"),
                    inner: false,
                };
            }
        }
        table
    }

    pub fn build(&self) -> Built {
        let n = self.signals.inputs.len();
        let given = self.table(&self.rows);
        let rows: Vec<(String, String)> = self.merged.iter().map(|m| (m.0.clone(), m.2.clone())).collect();
        let table = self.table(&rows);
        let index =
            |t: &FlowTable, name: &str| Row::new(t.names.iter().position(|x| x == name).expect("row"));
        let members: Vec<Vec<Row>> =
            self.merged.iter().map(|m| m.1.split_whitespace().map(|r| index(&given, r)).collect()).collect();
        let column = Column::parse(&self.start.1, n).expect("column");
        let initial = TotalState { row: index(&given, &self.start.0), column };
        let merged = table
            .rows()
            .find(|&r| members[r.at()].contains(&initial.row) && table.stable(r, column))
            .expect("initial row");
        let bits =
            self.codes.split_once('=').map_or(0, |(_, c)| c.split_whitespace().next().map_or(0, str::len));
        let mut codes = vec![Vec::new(); table.len()];
        for pair in self.codes.split_whitespace() {
            let (row, code) = pair.split_once('=').expect("code");
            codes[index(&table, row).at()].push(Code::parse(code, bits).expect("code"));
        }
        let mut encoded = Encoded { bits, inputs: n, entries: BTreeMap::new() };
        for row in table.rows() {
            for column in table.columns().filter(|&c| table.stable(row, c)) {
                for &code in &codes[row.at()] {
                    encoded
                        .entries
                        .insert((code, column), Entry { next: code, goal: row, role: Role::Row(row) });
                }
            }
        }
        let mut ways = Vec::new();
        for (ends, path) in &self.ways {
            let ends = words(ends);
            let (from, to) = (index(&table, &ends[0]), index(&table, &ends[2]));
            let column = Column::parse(&ends[1], n).expect("column");
            let path: Vec<Code> =
                path.split_whitespace().map(|c| Code::parse(c, bits).expect("code")).collect();
            for (k, pair) in path.windows(2).enumerate() {
                let role = if k == 0 { Role::Row(from) } else { Role::Spare };
                encoded.entries.insert((pair[0], column), Entry { next: pair[1], goal: to, role });
            }
            ways.push(Way { from, column, to, path, step: Step::OneBit });
        }
        let spare = self
            .spare
            .iter()
            .map(|(name, code)| Spare { name: name.clone(), code: Code::parse(code, bits).expect("code") })
            .collect();
        let variables =
            self.signals.inputs.iter().cloned().chain((1..=bits).map(|i| format!("y{i}"))).collect();
        Built {
            spec: Spec {
                signals: self.signals.clone(),
                discipline: self.discipline,
                table: given.clone(),
                given,
                initial,
                moves: Vec::new(),
                reachable: Vec::new(),
                questions: Vec::new(),
            },
            coded: Coded {
                method: Method::SharedRow,
                bits,
                initial: codes[merged.at()][0],
                longest_path: ways.iter().map(|w| w.path.len() - 1).max().unwrap_or(0),
                codes,
                spare,
                ways,
                encoded,
                bound: Bound::Proved,
                tidy: Bound::Proved,
            },
            reduced: Reduced {
                table,
                members,
                initial: TotalState { row: merged, column },
                moves: Vec::new(),
                outputs: OutputStyle::PerCell,
            },
            equations: Equations {
                form: Form::Feedback,
                shape: Shape::SumOfProducts,
                inputs: n,
                variables,
                functions: Vec::new(),
                shared: false,
                essential: Vec::new(),
                burst_essential: Vec::new(),
                implementation: Vec::new(),
                clashes: Vec::new(),
                notes: Vec::new(),
            },
        }
    }
}

impl Built {
    pub fn shape(mut self, shape: Shape) -> Self {
        self.equations.shape = shape;
        self
    }

    /// Adds a function, products or sums as in the record.
    pub fn function(mut self, name: &str, products: &str) -> Self {
        let number = |text: &str| text[1..].parse::<usize>().expect("number") - 1;
        let target = match name.as_bytes()[0] {
            b'Y' => Target::Next(number(name)),
            b'S' => Target::Set(number(name)),
            b'R' => Target::Reset(number(name)),
            _ => Target::Output(self.spec.signals.outputs.iter().position(|o| o == name).expect("output")),
        };
        let products = products
            .split_whitespace()
            .map(|text| {
                let mut cube = Cube::default();
                for (i, c) in text.bytes().enumerate().filter(|(_, c)| *c != b'-') {
                    cube.care |= 1 << i;
                    cube.ones |= u32::from(c == b'1') << i;
                }
                Product { cube, alone: Vec::new(), hazard_only: false }
            })
            .collect();
        self.equations.functions.push(Function {
            name: name.into(),
            target,
            on: Vec::new(),
            off: Vec::new(),
            transitions: Vec::new(),
            required: Vec::new(),
            privileged: Vec::new(),
            products,
            bound: Bound::Proved,
        });
        self
    }
}

/// All prime implicants of the function that is 1 at the given points, as text.
pub fn primes(variables: usize, on: &[u32]) -> String {
    let implicants: Vec<Cube> = (0..1u32 << variables)
        .flat_map(|care| {
            (0..1u32 << variables).filter(move |ones| ones & !care == 0).map(move |ones| Cube { care, ones })
        })
        .filter(|c| (0..1u32 << variables).all(|p| p & c.care != c.ones || on.contains(&p)))
        .collect();
    let prime = |c: &&Cube| {
        !implicants.iter().any(|d| d != *c && d.care & c.care == d.care && c.ones & d.care == d.ones)
    };
    implicants.iter().filter(prime).map(|c| c.text(variables)).collect::<Vec<_>>().join(" ")
}

/// Whether two designs that differ in one function differ where the encoded table or the reduced table binds a value, or where an
/// output must keep still on the way of a move.
pub fn values_differ(right: &Built, other: &Built) -> bool {
    let n = right.equations.inputs;
    right.coded.encoded.entries.keys().any(|&(code, column)| {
        let p = u32::from(column.0) | code.0 << n;
        right.equations.functions.iter().zip(&other.equations.functions).any(|(f, g)| {
            let free = match f.target {
                Target::Output(j) => right
                    .coded
                    .row_of(code)
                    .is_some_and(|r| right.reduced.table.cell(r, column).outputs.get(j).is_none()),
                _ => false,
            };
            !free && f.value(Shape::SumOfProducts, p) != g.value(Shape::SumOfProducts, p)
        })
    })
}
