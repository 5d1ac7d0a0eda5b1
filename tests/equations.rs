//! Equations: published results, and an independent judge of values, hazards and size.
//!
//! The judge states the conditions from their definitions, point by point, and finds smallest covers by trying all cubes; it
//! shares nothing with the program but the plain values.

use std::collections::{BTreeMap, BTreeSet};

use stillgate::base::{Bound, Code, Column, Effort, Outputs, Row, TotalState};
use stillgate::codes::values::{Coded, Encoded, Entry, Role, Step, Way};
use stillgate::logic::values::{Cube, mask, point};
use stillgate::logic::{Equations, Function, Target, equations};
use stillgate::merge::Reduced;
use stillgate::project::choices::{Discipline, Form, LogicChoice, Method, OutputStyle, Shape};
use stillgate::spec::{FlowTable, Move, Signals, Spec};

/// A design with codes by hand: rows of (name, code, cells `column next outputs` separated by commas).
struct Design {
    spec: Spec,
    reduced: Reduced,
    coded: Coded,
}

fn design(
    inputs: &[&str],
    outputs: &[&str],
    discipline: Discipline,
    initial: (&str, &str),
    rows: &[(&str, &str, &str)],
) -> Design {
    let names: Vec<String> = rows.iter().map(|r| r.0.to_owned()).collect();
    let row = |name: &str| Row::new(names.iter().position(|n| n == name).expect("known row"));
    let mut table = FlowTable::new(inputs.len(), outputs.len(), names.clone());
    for (name, _, cells) in rows {
        for cell in cells.split(',').map(str::trim).filter(|c| !c.is_empty()) {
            let mut words = cell.split_whitespace();
            let column = Column::parse(words.next().expect("column"), inputs.len()).expect("bits");
            let next = words.next().expect("next");
            let at = table.cell_mut(row(name), column);
            at.next = (next != "-").then(|| row(next));
            at.outputs = Outputs::parse(words.next().unwrap_or(""), outputs.len()).expect("outputs");
        }
    }
    let initial =
        TotalState { row: row(initial.0), column: Column::parse(initial.1, inputs.len()).expect("bits") };
    let codes: Vec<Code> = rows.iter().map(|r| Code::parse(r.1, r.1.len()).expect("bits")).collect();
    let signals = Signals {
        inputs: inputs.iter().map(|s| (*s).to_owned()).collect(),
        outputs: outputs.iter().map(|s| (*s).to_owned()).collect(),
    };
    assemble(table, signals, discipline, initial, &codes, rows[0].1.len(), OutputStyle::PerCell)
}

/// Codes, ways (all bits at once where more than one changes) and encoded table for one code a row.
fn assemble(
    table: FlowTable,
    signals: Signals,
    discipline: Discipline,
    initial: TotalState,
    codes: &[Code],
    bits: usize,
    style: OutputStyle,
) -> Design {
    let moves = moves(&table, discipline, initial);
    let mut encoded = Encoded { bits, inputs: table.inputs, entries: BTreeMap::new() };
    let mut ways = Vec::new();
    for row in table.rows() {
        for column in table.columns() {
            let Some(next) = table.next(row, column) else { continue };
            let (from, to) = (codes[row.at()], codes[next.at()]);
            let entry = |role| Entry { next: to, goal: next, role };
            encoded.entries.insert((from, column), entry(Role::Row(row)));
            if next != row {
                let step = if from.distance(to) == 1 { Step::OneBit } else { Step::Together };
                ways.push(Way { from: row, column, to: next, path: vec![from, to], step });
                for code in subcube(from.0, to.0) {
                    let role = Role::OnTheWay;
                    encoded.entries.entry((Code(code), column)).or_insert(entry(role));
                }
            }
        }
    }
    let members = table.rows().map(|r| vec![r]).collect();
    let spec = Spec {
        signals,
        discipline,
        given: table.clone(),
        table: table.clone(),
        initial,
        moves: moves.clone(),
        reachable: Vec::new(),
        questions: Vec::new(),
    };
    let coded = Coded {
        method: Method::SingleStep,
        bits,
        codes: codes.iter().map(|&c| vec![c]).collect(),
        spare: Vec::new(),
        ways,
        encoded,
        initial: codes[initial.row.at()],
        bound: Bound::Proved,
        tidy: Bound::Proved,
        longest_path: 1,
    };
    Design { spec, reduced: Reduced { table, members, initial, moves, outputs: style }, coded }
}

fn moves(table: &FlowTable, discipline: Discipline, initial: TotalState) -> Vec<Move> {
    let mut states = vec![initial];
    let mut moves = Vec::new();
    let mut at = 0;
    while at < states.len() {
        let from = states[at];
        at += 1;
        for column in table.columns() {
            let Some(to) = table.next(from.row, column) else { continue };
            let distance = from.column.distance(column);
            let inner = |c: Column| table.next(from.row, c).is_none_or(|n| n == from.row);
            let clean = from.column.between(column).filter(|&c| c != from.column && c != column).all(inner);
            if distance == 1 || distance > 1 && discipline == Discipline::Burst && clean {
                moves.push(Move { from, column, to });
                let state = TotalState { row: to, column };
                if !states.contains(&state) {
                    states.push(state);
                }
            }
        }
    }
    moves
}

fn subcube(a: u32, b: u32) -> impl Iterator<Item = u32> {
    (0..=(a ^ b)).filter(move |s| s & !(a ^ b) == 0).map(move |s| a ^ s)
}

fn derive(design: &Design, form: Form, shape: Shape) -> Equations {
    let choice = LogicChoice { form, shape, ..LogicChoice::default() };
    equations(&design.spec, &design.reduced, &design.coded, &choice, &Effort::of(5_000_000))
}

fn texts(equations: &Equations, name: &str) -> Vec<String> {
    let f = equations.functions.iter().find(|f| f.name == name).expect("function");
    f.products.iter().map(|p| p.cube.text(equations.variables.len())).collect()
}

fn function<'e>(equations: &'e Equations, name: &str) -> &'e Function {
    equations.functions.iter().find(|f| f.name == name).expect("function")
}

// ---------------------------------------------------------------------------------------------------------------------
// Published results

/// Digital design textbooks (from memory, recomputed by hand): next state D·G + G'·y, free of static hazards with D·y.
fn gated_latch() -> Design {
    design(
        &["D", "G"],
        &["Q"],
        Discipline::Single,
        ("A", "00"),
        &[("A", "0", "00 A 0, 10 A 0, 01 A 0, 11 B -"), ("B", "1", "00 B 1, 10 B 1, 11 B 1, 01 A -")],
    )
}

#[test]
fn the_gated_latch_needs_the_product_that_is_there_for_hazards_alone() {
    let found = derive(&gated_latch(), Form::Feedback, Shape::SumOfProducts);
    assert_eq!(found.variables, ["D", "G", "y1"]);
    assert_eq!(texts(&found, "Y1"), ["-01", "1-1", "11-"]);
    let y = function(&found, "Y1");
    assert_eq!(y.products.iter().map(|p| p.hazard_only).collect::<Vec<_>>(), [false, true, false]);
    assert!(y.products.iter().all(|p| !p.alone.is_empty()));
    assert_eq!(y.bound, Bound::Proved);
    // The output may change with the state: a wire.
    assert_eq!(texts(&found, "Q"), ["--1"]);
    assert_eq!((found.clashes.len(), found.essential.len()), (0, 0));
}

#[test]
fn the_gated_latch_as_product_of_sums_and_with_a_latch() {
    // The dual of the above: (D + G')(G + y)(D + y).
    let found = derive(&gated_latch(), Form::Feedback, Shape::ProductOfSums);
    assert_eq!(texts(&found, "Y1"), ["-11", "1-1", "10-"]);
    let found = derive(&gated_latch(), Form::SetReset, Shape::SumOfProducts);
    assert_eq!(texts(&found, "S1"), ["11-"]);
    assert_eq!(texts(&found, "R1"), ["01-"]);
}

/// D. A. Huffman, "The design and use of hazard-free switching networks", 1957 (from memory).
#[test]
fn ab_or_not_a_c_needs_bc() {
    let cells: Vec<String> = (0..8u16)
        .map(|c| {
            let (a, b, k) = (c & 1 == 1, c >> 1 & 1 == 1, c >> 2 & 1 == 1);
            format!("{} A {}", Column(c).text(3), u8::from(a && b || !a && k))
        })
        .collect();
    let design =
        design(&["a", "b", "c"], &["f"], Discipline::Single, ("A", "000"), &[("A", "", &cells.join(","))]);
    let found = derive(&design, Form::Feedback, Shape::SumOfProducts);
    assert_eq!(texts(&found, "f"), ["-11", "0-1", "11-"]);
    assert_eq!(function(&found, "f").products.iter().filter(|p| p.hazard_only).count(), 1);
}

/// D. E. Muller and W. S. Bartky, 1959 (from memory): all inputs up, or y and any input up.
#[test]
fn the_rendezvous_is_ab_or_y_and_a_or_b() {
    for discipline in [Discipline::Single, Discipline::Burst] {
        let design = design(
            &["a", "b"],
            &["c"],
            discipline,
            ("A", "00"),
            &[("A", "0", "00 A 0, 10 A 0, 01 A 0, 11 B -"), ("B", "1", "11 B 1, 10 B 1, 01 B 1, 00 A -")],
        );
        let found = derive(&design, Form::Feedback, Shape::SumOfProducts);
        assert_eq!(texts(&found, "Y1"), ["-11", "1-1", "11-"]);
        let found = derive(&design, Form::CElement, Shape::SumOfProducts);
        assert_eq!(texts(&found, "S1"), ["11-"]);
        assert_eq!(texts(&found, "R1"), ["00-"]);
    }
}

/// The textbooks' cyclic example for Quine-McCluskey: on-set 0, 1, 2, 5, 6, 7 has six primes in a ring and two minimum covers
/// of three. Nothing moves here, so hazards ask for nothing.
#[test]
fn the_ring_of_six_primes_takes_three() {
    let cells: Vec<String> = (0..8u16)
        .map(|c| {
            format!(
                "{} {} {}",
                Column(c).text(3),
                if c == 0 { "A" } else { "-" },
                u8::from(![3, 4].contains(&c))
            )
        })
        .collect();
    let design =
        design(&["a", "b", "c"], &["f"], Discipline::Single, ("A", "000"), &[("A", "", &cells.join(","))]);
    let found = derive(&design, Form::Feedback, Shape::SumOfProducts);
    let f = function(&found, "f");
    assert_eq!((f.products.len(), f.literals(), f.bound), (3, 6, Bound::Proved));
}

/// S. H. Unger, "Hazards and delays in asynchronous sequential switching circuits", 1959 (from memory).
#[test]
fn a_divide_by_two_has_an_essential_hazard_everywhere() {
    let design = design(
        &["x"],
        &["q"],
        Discipline::Single,
        ("A", "0"),
        &[
            ("A", "00", "0 A 0, 1 B -"),
            ("B", "10", "1 B 1, 0 C -"),
            ("C", "11", "0 C 1, 1 D -"),
            ("D", "01", "1 D 0, 0 A -"),
        ],
    );
    let found = derive(&design, Form::Feedback, Shape::SumOfProducts);
    assert_eq!(found.essential.len(), 4);
    assert!(found.burst_essential.is_empty());
}

#[test]
fn constants_are_no_product_or_one_without_literals() {
    let design =
        design(&["x"], &["never", "always"], Discipline::Single, ("A", "0"), &[("A", "", "0 A 01, 1 A 01")]);
    let found = derive(&design, Form::Feedback, Shape::SumOfProducts);
    assert_eq!((texts(&found, "never"), texts(&found, "always")), (vec![], vec!["-".to_owned()]));
    let found = derive(&design, Form::Feedback, Shape::ProductOfSums);
    assert_eq!((texts(&found, "never"), texts(&found, "always")), (vec!["-".to_owned()], vec![]));
}

// ---------------------------------------------------------------------------------------------------------------------
// The judge

/// What a function has to do, for the wanted polarity: ones for sum-of-products, zeros for product-of-sums.
#[derive(Debug, Clone, Default)]
struct Conditions {
    hold: BTreeSet<u32>,
    miss: BTreeSet<u32>,
    /// Cubes to be held by one product.
    whole: BTreeSet<Cube>,
    /// Cube, and the point that a product meeting it must hold.
    fenced: BTreeSet<(Cube, u32)>,
}

/// The conditions of a function given by its values on all cubes that moves pass; `None` at a point: free.
fn conditions(design: &Design, target: Target, shape: Shape, outputs: &BTreeMap<u32, Outputs>) -> Conditions {
    let n = design.reduced.table.inputs;
    let variables = n + design.coded.bits;
    let entry = |p: u32| design.coded.encoded.get(Code(p >> n), Column((p & mask(n)) as u16));
    let value = |p: u32| -> Option<bool> {
        let bit = |q: u32, i: usize| q >> i & 1 == 1;
        match target {
            Target::Output(j) => outputs.get(&p).and_then(|o| o.get(j)),
            Target::Next(i) => entry(p).map(|e| bit(e.next.0, i)),
            Target::Set(i) => match (bit(p >> n, i), entry(p).map(|e| bit(e.next.0, i))) {
                (_, Some(false)) => Some(false),
                (false, Some(true)) => Some(true),
                _ => None,
            },
            Target::Reset(i) => match (bit(p >> n, i), entry(p).map(|e| bit(e.next.0, i))) {
                (_, Some(true)) => Some(false),
                (true, Some(false)) => Some(true),
                _ => None,
            },
        }
    };
    let wanted = shape == Shape::SumOfProducts;
    let mut all = Conditions::default();
    for p in 0..1u32 << variables {
        match value(p) {
            Some(v) if v == wanted => drop(all.hold.insert(p)),
            Some(_) => drop(all.miss.insert(p)),
            None => {}
        }
    }
    for mv in &design.reduced.moves {
        let code = design.coded.codes[mv.from.row.at()][0];
        let goal = design.coded.codes[mv.to.at()][0];
        let start = point(mv.from.column, code, n);
        let turn = point(mv.column, code, n);
        let end = point(mv.column, goal, n);
        if let Target::Output(j) = target {
            let both = [start, end].map(|p| outputs.get(&p).and_then(|o| o.get(j)));
            if both.contains(&None) {
                continue;
            }
        }
        for (a, b) in [(start, turn), (turn, end)] {
            if a == b {
                continue;
            }
            let (mut b, mut free) = (b, a ^ b);
            if let Target::Set(i) | Target::Reset(i) = target
                && free >> (n + i) & 1 == 1
                && value(a) == Some(true)
            {
                free &= !(1 << (n + i));
                b = a ^ free;
            }
            let cube = Cube::spanned(a, b, variables);
            match (value(a), value(b)) {
                (Some(x), Some(y)) => {
                    // From an end with the wanted value, every stretch up to a point with that value lies in one product.
                    for (anchor, v, far) in [(a, x, y), (b, y, x)] {
                        if v == wanted {
                            for p in subcube(a, b).filter(|&p| value(p) == Some(wanted)) {
                                all.whole.insert(Cube::spanned(anchor, p, variables));
                            }
                            if far != wanted {
                                all.fenced.insert((cube, anchor));
                            }
                        }
                    }
                }
                (None, Some(false)) if a & mask(n) != b & mask(n) => {
                    all.fenced.insert((cube, if wanted { a } else { b }));
                }
                _ => {}
            }
        }
    }
    all
}

fn products(function: &Function, shape: Shape) -> Vec<Cube> {
    let zeros = |c: Cube| Cube { care: c.care, ones: c.care & !c.ones };
    let shown = function.products.iter().map(|p| p.cube);
    shown.map(|c| if shape == Shape::SumOfProducts { c } else { zeros(c) }).collect()
}

/// Whether a set of products does what it has to; the first fault otherwise.
fn judge(conditions: &Conditions, products: &[Cube]) -> Result<(), String> {
    for p in &conditions.miss {
        if products.iter().any(|c| c.holds(*p)) {
            return Err(format!("wrong at {p:b}"));
        }
    }
    for p in &conditions.hold {
        if !products.iter().any(|c| c.holds(*p)) {
            return Err(format!("not held: {p:b}"));
        }
    }
    for w in &conditions.whole {
        if !products.iter().any(|c| c.contains(*w)) {
            return Err(format!("no product holds {w:?}"));
        }
    }
    for (cube, start) in &conditions.fenced {
        if products.iter().any(|c| c.meets(*cube) && !c.holds(*start)) {
            return Err(format!("{cube:?} is met without {start:b}"));
        }
    }
    Ok(())
}

/// Fewest products, then fewest literals, over all sets of cubes.
fn smallest(conditions: &Conditions, variables: usize) -> Option<(usize, u32)> {
    let mut cubes = Vec::new();
    for care in 0..1u32 << variables {
        for ones in (0..=care).filter(|o| o & !care == 0) {
            let cube = Cube { care, ones };
            let legal = !conditions.miss.iter().any(|&p| cube.holds(p))
                && conditions.fenced.iter().all(|(c, s)| !cube.meets(*c) || cube.holds(*s));
            if legal {
                cubes.push(cube);
            }
        }
    }
    let mut rows: Vec<Cube> = conditions.hold.iter().map(|&p| Cube::at(p, variables)).collect();
    rows.extend(&conditions.whole);
    let sets: Vec<Vec<usize>> =
        rows.iter().map(|r| (0..cubes.len()).filter(|&c| cubes[c].contains(*r)).collect()).collect();
    if sets.iter().any(Vec::is_empty) {
        return None;
    }
    (0..=rows.len()).find_map(|k| {
        let mut best = None;
        pick(&rows, &cubes, &sets, k, &mut Vec::new(), &mut best);
        best.map(|literals| (k, literals))
    })
}

fn pick(
    rows: &[Cube],
    cubes: &[Cube],
    sets: &[Vec<usize>],
    left: usize,
    chosen: &mut Vec<Cube>,
    best: &mut Option<u32>,
) {
    let open = (0..rows.len())
        .filter(|&r| !chosen.iter().any(|c| c.contains(rows[r])))
        .min_by_key(|&r| sets[r].len());
    let Some(row) = open else {
        let literals = chosen.iter().map(|c| c.literals()).sum();
        *best = Some(best.map_or(literals, |b| b.min(literals)));
        return;
    };
    if left == 0 {
        return;
    }
    for &c in &sets[row] {
        chosen.push(cubes[c]);
        pick(rows, cubes, sets, left - 1, chosen, best);
        chosen.pop();
    }
}

/// Outputs with every point on the way given: early, but for the points of `late`, which keep the old value.
fn outputs_with(design: &Design, late: &BTreeSet<u32>) -> BTreeMap<u32, Outputs> {
    let n = design.reduced.table.inputs;
    let mut words = BTreeMap::new();
    for row in design.reduced.table.rows() {
        for column in design.reduced.table.columns() {
            let cell = design.reduced.table.cell(row, column);
            words.insert(point(column, design.coded.codes[row.at()][0], n), cell.outputs);
        }
    }
    let given = words.clone();
    for mv in &design.reduced.moves {
        let before = design.reduced.table.cell(mv.from.row, mv.from.column).outputs;
        let after = design.reduced.table.cell(mv.to, mv.column).outputs;
        let bound = before.care & after.care;
        let code = design.coded.codes[mv.from.row.at()][0].0;
        let goal = design.coded.codes[mv.to.at()][0].0;
        for c in mv.from.column.between(mv.column).filter(|&c| c != mv.from.column && c != mv.column) {
            let p = point(c, Code(code), n);
            let add = Outputs { care: bound, ones: before.ones & bound };
            let word = words.entry(p).or_default();
            *word = word.or(add);
        }
        for q in subcube(code, goal).filter(|&q| q != goal) {
            let p = point(mv.column, Code(q), n);
            let from = if late.contains(&p) { before } else { after };
            let add = Outputs { care: bound, ones: from.ones & bound };
            let word = words.entry(p).or_default();
            *word = given.get(&p).copied().unwrap_or_default().or(word.or(add));
        }
    }
    words
}

/// Points where output `j` may be early or late.
fn choices(design: &Design, j: usize) -> Vec<u32> {
    let n = design.reduced.table.inputs;
    let mut soft = BTreeSet::new();
    let mut hard = BTreeSet::new();
    for mv in &design.reduced.moves {
        let table = &design.reduced.table;
        let before = table.cell(mv.from.row, mv.from.column).outputs.get(j);
        let after = table.cell(mv.to, mv.column).outputs.get(j);
        let (Some(before), Some(after)) = (before, after) else { continue };
        let code = design.coded.codes[mv.from.row.at()][0];
        let goal = design.coded.codes[mv.to.at()][0];
        let open = table.cell(mv.from.row, mv.column).outputs.get(j).is_none();
        let single = mv.from.column.distance(mv.column) == 1 && code.distance(goal) == 1;
        for q in subcube(code.0, goal.0).filter(|&q| q != goal.0) {
            let p = point(mv.column, Code(q), n);
            if single && open && before != after {
                soft.insert(p)
            } else {
                hard.insert(p)
            };
        }
        for c in mv.from.column.between(mv.column).filter(|&c| c != mv.from.column && c != mv.column) {
            hard.insert(point(c, code, n));
        }
    }
    soft.difference(&hard).copied().collect()
}

struct Dice(u64);

impl Dice {
    fn roll(&mut self, n: u32) -> u32 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        (self.0 >> 11) as u32 % n
    }
}

/// A random reduced table in normal mode with codes free of critical races.
fn random(
    dice: &mut Dice,
    discipline: Discipline,
    inputs: usize,
    rows: usize,
    bits: usize,
) -> Option<Design> {
    let names: Vec<String> = (0..rows).map(|r| ["A", "B", "C", "D", "E"][r].to_owned()).collect();
    let mut table = FlowTable::new(inputs, 1, names);
    let open = 1 + dice.roll(4);
    for column in table.columns() {
        let stable: Vec<Row> = table.rows().filter(|_| dice.roll(2) == 0).collect();
        for row in table.rows() {
            if stable.contains(&row) {
                let value = Some(dice.roll(2) == 0).filter(|_| dice.roll(8) != 0);
                *table.cell_mut(row, column) = stillgate::spec::Cell {
                    next: Some(row),
                    outputs: Outputs::default().with(0, value),
                    inner: false,
                };
            } else if !stable.is_empty() && dice.roll(4) >= open - 1 {
                let next = stable[dice.roll(stable.len() as u32) as usize];
                table.cell_mut(row, column).next = Some(next);
            }
        }
    }
    let initial = table
        .rows()
        .flat_map(|row| table.columns().map(move |column| TotalState { row, column }))
        .find(|s| table.stable(s.row, s.column))?;
    let mut codes: Vec<Code> = Vec::new();
    while codes.len() < rows {
        let code = Code(dice.roll(1 << bits));
        if !codes.contains(&code) {
            codes.push(code);
        }
    }
    // Subcubes of different goals in one column must not meet.
    for column in table.columns() {
        for a in table.rows() {
            for b in table.rows() {
                let (Some(i), Some(j)) = (table.next(a, column), table.next(b, column)) else { continue };
                let cube = |r: Row, k: Row| Cube::spanned(codes[r.at()].0, codes[k.at()].0, bits);
                if i != j && cube(a, i).meets(cube(b, j)) {
                    return None;
                }
            }
        }
    }
    let signals = Signals {
        inputs: ["p", "q", "r"][..inputs].iter().map(|s| (*s).to_owned()).collect(),
        outputs: vec!["z".into()],
    };
    // In a burst the stable cells passed on the way hold the outputs.
    if discipline == Discipline::Burst {
        for mv in moves(&table, discipline, initial) {
            let held = table.cell(mv.from.row, mv.from.column).outputs;
            for c in mv.from.column.between(mv.column).filter(|&c| c != mv.from.column && c != mv.column) {
                let cell = table.cell(mv.from.row, c);
                if cell.next != Some(mv.from.row) || cell.outputs != held {
                    return None;
                }
            }
        }
    }
    Some(assemble(table, signals, discipline, initial, &codes, bits, OutputStyle::PerCell))
}

#[test]
fn random_designs_are_right_free_of_hazards_and_smallest() {
    let mut dice = Dice(0x1234_5678_9abc_def1);
    let mut judged = BTreeMap::new();
    let mut chosen_late = 0;
    let mut clashes = 0;
    let mut tried = 0;
    while tried < 1500 {
        let discipline = if dice.roll(2) == 0 { Discipline::Single } else { Discipline::Burst };
        let (inputs, rows, bits) =
            [(1, 2, 1), (1, 4, 3), (2, 2, 1), (2, 3, 2), (2, 4, 2), (2, 4, 3), (3, 2, 1)]
                [dice.roll(7) as usize];
        let Some(design) = random(&mut dice, discipline, inputs, rows, bits) else { continue };
        tried += 1;
        let variables = inputs + bits;
        for (form, shape) in Form::ALL.into_iter().flat_map(|f| Shape::ALL.map(|s| (f, s))) {
            let found = derive(&design, form, shape);
            let early = outputs_with(&design, &BTreeSet::new());
            let targets: Vec<Target> = (0..bits)
                .flat_map(|i| match form {
                    Form::Feedback => vec![Target::Next(i)],
                    _ => vec![Target::Set(i), Target::Reset(i)],
                })
                .chain([Target::Output(0)])
                .collect();
            for target in targets {
                let function = found.functions.iter().find(|f| f.target == target);
                let mut fewest = None;
                let points = match target {
                    Target::Output(j) => choices(&design, j),
                    _ => Vec::new(),
                };
                let mut fits = Err("nothing".to_owned());
                for pick in 0..1u32 << points.len().min(5) {
                    let late: BTreeSet<u32> = points
                        .iter()
                        .enumerate()
                        .filter(|(k, _)| pick >> k & 1 == 1)
                        .map(|(_, &p)| p)
                        .collect();
                    let words = if late.is_empty() { early.clone() } else { outputs_with(&design, &late) };
                    let rules = conditions(&design, target, shape, &words);
                    if let Some(function) = function
                        && fits.is_err()
                    {
                        fits = judge(&rules, &products(function, shape));
                        chosen_late += usize::from(fits.is_ok() && pick != 0);
                    }
                    if variables <= 4 {
                        fewest = [fewest, smallest(&rules, variables)].into_iter().flatten().min();
                    }
                }
                let Some(function) = function else {
                    clashes += 1;
                    assert_eq!(discipline, Discipline::Burst, "{target:?} {:?}", found.clashes);
                    assert!(variables > 4 || fewest.is_none(), "{target:?} {form:?} {shape:?}");
                    let clash = found.clashes.iter().find(|c| c.function == name_of(target));
                    assert!(clash.is_some_and(|c| c.transitions.len() > 1), "{:?}", found.clashes);
                    continue;
                };
                assert_eq!(fits, Ok(()), "{target:?} {form:?} {shape:?}\n{:?}", function);
                assert_eq!(function.bound, Bound::Proved);
                if variables <= 4 && points.len() <= 5 {
                    let size = (function.products.len(), function.literals() as u32);
                    assert_eq!(
                        Some(size),
                        fewest,
                        "{target:?} {form:?} {shape:?} choices {points:?} {function:?} {:?} {:?}",
                        design.reduced,
                        design.coded.codes
                    );
                    *judged
                        .entry((discipline == Discipline::Burst, shape == Shape::SumOfProducts))
                        .or_insert(0) += 1;
                }
            }
        }
    }
    assert!(judged.values().all(|&n| n > 1000), "{judged:?}");
    assert!(chosen_late > 100 && clashes > 0, "{chosen_late} {clashes}");
}

fn name_of(target: Target) -> String {
    match target {
        Target::Next(i) => format!("Y{}", i + 1),
        Target::Set(i) => format!("S{}", i + 1),
        Target::Reset(i) => format!("R{}", i + 1),
        Target::Output(_) => "z".into(),
    }
}

#[test]
fn shared_products_are_fewest_over_all_functions() {
    let mut dice = Dice(0x0dd_ba11_5eed_0001);
    let (mut tried, mut cheaper) = (0, 0);
    while tried < 400 {
        let discipline = if dice.roll(2) == 0 { Discipline::Single } else { Discipline::Burst };
        let (inputs, rows, bits) = [(2, 2, 1), (1, 3, 2), (1, 4, 2), (2, 4, 2)][dice.roll(4) as usize];
        let Some(design) = random(&mut dice, discipline, inputs, rows, bits) else { continue };
        if !choices(&design, 0).is_empty() {
            continue;
        }
        tried += 1;
        for (form, shape) in Form::ALL.into_iter().flat_map(|f| Shape::ALL.map(|s| (f, s))) {
            let alone = derive(&design, form, shape);
            let choice = LogicChoice { form, shape, share: true, ..LogicChoice::default() };
            let found =
                equations(&design.spec, &design.reduced, &design.coded, &choice, &Effort::of(5_000_000));
            let words = outputs_with(&design, &BTreeSet::new());
            let mut rules = Vec::new();
            for function in &found.functions {
                let conditions = conditions(&design, function.target, shape, &words);
                assert_eq!(judge(&conditions, &products(function, shape)), Ok(()));
                assert_eq!(function.bound, Bound::Proved);
                rules.push(conditions);
            }
            let size = |e: &Equations| {
                let all: BTreeSet<Cube> =
                    e.functions.iter().flat_map(|f| f.products.iter().map(|p| p.cube)).collect();
                (all.len(), all.iter().map(|c| c.literals()).sum::<u32>())
            };
            cheaper += usize::from(size(&found) < size(&alone));
            if inputs + bits <= 3 {
                assert_eq!(size(&found), smallest_together(&rules, inputs + bits), "{form:?} {shape:?}");
            } else {
                assert!(size(&found) <= size(&alone));
            }
        }
    }
    assert!(cheaper > 100, "{cheaper}");
}

/// Fewest different products for all functions, then fewest literals, over all sets of cubes.
fn smallest_together(rules: &[Conditions], variables: usize) -> (usize, u32) {
    let mut cubes = Vec::new();
    for care in 0..1u32 << variables {
        cubes.extend((0..=care).filter(|o| o & !care == 0).map(|ones| Cube { care, ones }));
    }
    let legal = |c: &Conditions, cube: Cube| {
        !c.miss.iter().any(|&p| cube.holds(p))
            && c.fenced.iter().all(|(f, s)| !cube.meets(*f) || cube.holds(*s))
    };
    let mut rows: Vec<Vec<usize>> = Vec::new();
    for c in rules {
        let wanted = c.hold.iter().map(|&p| Cube::at(p, variables)).chain(c.whole.iter().copied());
        rows.extend(wanted.map(|w| {
            (0..cubes.len()).filter(|&k| cubes[k].contains(w) && legal(c, cubes[k])).collect::<Vec<_>>()
        }));
    }
    let weights: Vec<u32> = cubes.iter().map(|c| c.literals()).collect();
    (0..)
        .find_map(|k| {
            let mut best = None;
            pick_rows(&rows, &weights, k, &mut Vec::new(), &mut best);
            best.map(|literals| (k, literals))
        })
        .expect("every function has a cover")
}

fn pick_rows(
    rows: &[Vec<usize>],
    weights: &[u32],
    left: usize,
    chosen: &mut Vec<usize>,
    best: &mut Option<u32>,
) {
    let open = rows.iter().filter(|r| !r.iter().any(|c| chosen.contains(c))).min_by_key(|r| r.len());
    let Some(row) = open else {
        let literals = chosen.iter().map(|&c| weights[c]).sum();
        *best = Some(best.map_or(literals, |b| b.min(literals)));
        return;
    };
    if left == 0 {
        return;
    }
    for &c in row {
        chosen.push(c);
        pick_rows(rows, weights, left - 1, chosen, best);
        chosen.pop();
    }
}

#[test]
fn without_effort_the_equations_are_right_but_not_claimed_to_be_small() {
    let mut dice = Dice(0x5eed_0f0f_1234_0003);
    let mut tried = 0;
    let mut larger = 0;
    while tried < 200 {
        let discipline = if dice.roll(2) == 0 { Discipline::Single } else { Discipline::Burst };
        let Some(design) = random(&mut dice, discipline, 2, 4, 3) else { continue };
        tried += 1;
        for (share, shape) in [false, true].into_iter().flat_map(|f| Shape::ALL.map(|s| (f, s))) {
            let choice = LogicChoice { shape, share, ..LogicChoice::default() };
            let found = equations(&design.spec, &design.reduced, &design.coded, &choice, &Effort::of(0));
            let best = derive(&design, Form::Feedback, shape);
            for function in found.functions.iter().filter(|f| matches!(f.target, Target::Next(_))) {
                let rules = conditions(&design, function.target, shape, &BTreeMap::new());
                assert_eq!(judge(&rules, &products(function, shape)), Ok(()));
                let least = best.functions.iter().find(|f| f.target == function.target).expect("derived");
                assert!(function.products.len() >= least.products.len());
                larger += usize::from(function.products.len() > least.products.len());
                match function.bound {
                    Bound::Proved => assert!(function.products.is_empty()),
                    Bound::Stopped { lower } => assert!(lower <= least.products.len()),
                }
            }
        }
    }
    assert!(larger > 0);
}

// ---------------------------------------------------------------------------------------------------------------------
// Outputs

#[test]
fn a_late_output_keeps_its_old_value_and_two_old_values_clash() {
    let choice = LogicChoice { late: vec!["z".into()], ..LogicChoice::default() };
    let one = design(
        &["a", "b"],
        &["z"],
        Discipline::Single,
        ("A", "00"),
        &[("A", "0", "00 A 0, 10 B -, 01 A 0"), ("B", "1", "10 B 1, 00 A -")],
    );
    let found = equations(&one.spec, &one.reduced, &one.coded, &choice, &Effort::of(100_000));
    assert_eq!(texts(&found, "z"), ["--1"]);
    let two = design(
        &["a", "b"],
        &["z"],
        Discipline::Single,
        ("A", "00"),
        &[("A", "0", "00 A 0, 10 B -, 01 A 0, 11 A 1"), ("B", "1", "10 B 1, 00 A -, 11 B 0")],
    );
    let found = equations(&two.spec, &two.reduced, &two.coded, &choice, &Effort::of(100_000));
    assert!(found.functions.iter().all(|f| f.name != "z"));
    let clash = found.clashes.iter().find(|c| c.function == "z").expect("both old values cannot be kept");
    assert_eq!(clash.transitions, ["row A, 00 -> 10", "row A, 11 -> 10"]);
    // Early, both moves agree on the destination's value.
    let found = derive(&two, Form::Feedback, Shape::SumOfProducts);
    assert!(found.clashes.is_empty());
}

/// Rows, with outputs of rows, and codes free of critical races.
fn random_per_row(dice: &mut Dice, rows: usize, bits: usize) -> Option<Design> {
    let Design { spec, reduced, coded } = random(dice, Discipline::Single, 2, rows, bits)?;
    let mut table = reduced.table;
    for row in table.rows() {
        let word = Outputs::default().with(0, Some(dice.roll(2) == 0));
        for column in table.columns() {
            table.cell_mut(row, column).outputs = word;
        }
    }
    let codes: Vec<Code> = coded.codes.iter().map(|c| c[0]).collect();
    Some(assemble(table, spec.signals, Discipline::Single, spec.initial, &codes, bits, OutputStyle::PerRow))
}

#[test]
fn outputs_of_rows_depend_on_the_state_alone_and_change_once() {
    let mut dice = Dice(0x00ab_cdef_0123_4770);
    let (mut functions, mut clashes) = (0, 0);
    while functions < 400 {
        let Some(design) = random_per_row(&mut dice, 4, 3) else { continue };
        for shape in Shape::ALL {
            let found = derive(&design, Form::Feedback, shape);
            let Some(z) = found.functions.iter().find(|f| f.name == "z") else {
                clashes += 1;
                assert!(found.clashes.iter().any(|c| c.function == "z" && !c.transitions.is_empty()));
                continue;
            };
            functions += 1;
            assert!(z.products.iter().all(|p| p.cube.care & mask(2) == 0));
            assert_eq!(z.bound, Bound::Proved);
            let value = |code: u32| z.value(shape, code << 2);
            for row in design.reduced.table.rows() {
                let word = design.reduced.table.cell(row, Column(0)).outputs;
                assert_eq!(Some(value(design.coded.codes[row.at()][0].0)), word.get(0));
            }
            // With the values that the function gives to the codes between, it must not glitch.
            let mut words = BTreeMap::new();
            for &(code, column) in design.coded.encoded.entries.keys() {
                words.insert(point(column, code, 2), Outputs::default().with(0, Some(value(code.0))));
            }
            let rules = conditions(&design, z.target, shape, &words);
            assert_eq!(judge(&rules, &products(z, shape)), Ok(()));
            for mv in &design.reduced.moves {
                let [a, b] = [mv.from.row, mv.to].map(|r| design.coded.codes[r.at()][0].0);
                for p in subcube(a, b).filter(|&p| value(p) == value(b)) {
                    assert!(subcube(p, b).all(|q| value(q) == value(b)), "changes once on every way");
                }
            }
        }
    }
    assert!(clashes < 200, "{clashes}");
}
