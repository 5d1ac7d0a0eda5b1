//! State assignment: every method on small tables against brute force, and a race walker of its own.

use std::collections::{BTreeMap, BTreeSet};

use stillgate::base::{Code, Column, Effort, Outputs, Row, TotalState};
use stillgate::codes::{self, Coded, Role, Step};
use stillgate::merge::values::Reduced;
use stillgate::project::{Method, OutputStyle};
use stillgate::spec::values::{Cell, FlowTable};

const BUDGET: u64 = 20_000_000;

/// A reduced table from one line a row: the next rows by column, `-` for unspecified.
fn table(lines: &[&str]) -> Reduced {
    let inputs = lines[0].len().ilog2() as usize;
    let names: Vec<String> = (0..lines.len()).map(|i| char::from(b'A' + i as u8).to_string()).collect();
    let mut table = FlowTable::new(inputs, 1, names.clone());
    for (r, line) in lines.iter().enumerate() {
        for (c, name) in line.chars().enumerate() {
            let next = names.iter().position(|known| known.starts_with(name)).map(Row::new);
            *table.cell_mut(Row::new(r), Column(c as u16)) = Cell { next, ..Cell::default() };
        }
    }
    reduced(table, OutputStyle::PerCell)
}

fn reduced(table: FlowTable, outputs: OutputStyle) -> Reduced {
    let row = Row(0);
    let column = table.columns().find(|&column| table.stable(row, column)).unwrap_or(Column(0));
    Reduced {
        members: table.rows().map(|row| vec![row]).collect(),
        initial: TotalState { row, column },
        moves: Vec::new(),
        outputs,
        table,
    }
}

fn assign(reduced: &Reduced, method: &Method) -> Result<Coded, Vec<stillgate::base::Finding>> {
    codes::assign(reduced, method, &Effort::of(BUDGET))
}

fn code_of(result: Result<Coded, Vec<stillgate::base::Finding>>) -> &'static str {
    result.expect_err("should be refused")[0].code
}

/// SplitMix64, so that the tables are the same on every run.
struct Dice(u64);

impl Dice {
    fn roll(&mut self, sides: usize) -> usize {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) % sides as u64) as usize
    }

    /// A table in normal mode in which every row is stable somewhere; some cells unspecified, some outputs given.
    fn table(&mut self, rows: usize, inputs: usize, style: OutputStyle) -> Reduced {
        let names = (0..rows).map(|i| format!("R{i}")).collect();
        let mut table = FlowTable::new(inputs, 1, names);
        let home: Vec<usize> = (0..rows).map(|_| self.roll(1 << inputs)).collect();
        let holes = self.roll(4);
        let crowd = 2 + self.roll(3);
        let fixed: Vec<usize> = (0..rows).map(|_| self.roll(3)).collect();
        let word = |value: usize| Outputs::default().with(0, [None, Some(false), Some(true)][value]);
        for column in table.columns() {
            let stable: Vec<usize> =
                (0..rows).filter(|&r| home[r] == column.at() || self.roll(crowd) == 0).collect();
            for (r, &held) in fixed.iter().enumerate() {
                let next = if stable.contains(&r) {
                    Some(r)
                } else if stable.is_empty() || self.roll(6) < holes {
                    None
                } else {
                    Some(stable[self.roll(stable.len())])
                };
                let value = match style {
                    OutputStyle::PerRow => held,
                    OutputStyle::PerCell if self.roll(3) == 0 => self.roll(3),
                    OutputStyle::PerCell => 0,
                };
                *table.cell_mut(Row::new(r), column) =
                    Cell { next: next.map(Row::new), outputs: word(value), inner: false };
            }
        }
        reduced(table, style)
    }
}

// A walker that knows nothing of methods.

/// Every code in which the circuit can come to rest from a code, whatever bits change first; an error if it can stray or
/// never rest.
fn rests(coded: &Coded, start: Code, column: Column) -> Result<BTreeSet<Code>, String> {
    fn visit(
        coded: &Coded,
        code: Code,
        column: Column,
        open: &mut Vec<Code>,
        done: &mut BTreeSet<Code>,
        ends: &mut BTreeSet<Code>,
    ) -> Result<(), String> {
        if open.contains(&code) {
            return Err(format!("oscillates at {code:?}"));
        }
        if !done.insert(code) {
            return Ok(());
        }
        let entry = coded.encoded.get(code, column).ok_or(format!("strays to {code:?}"))?;
        let excited = code.0 ^ entry.next.0;
        if excited == 0 {
            ends.insert(code);
            return Ok(());
        }
        open.push(code);
        for sub in (1..=excited).filter(|sub| sub & !excited == 0) {
            visit(coded, Code(code.0 ^ sub), column, open, done, ends)?;
        }
        open.pop();
        Ok(())
    }
    let mut ends = BTreeSet::new();
    visit(coded, start, column, &mut Vec::new(), &mut BTreeSet::new(), &mut ends)?;
    Ok(ends)
}

/// Everything that an assignment promises whatever the method.
fn check(reduced: &Reduced, coded: &Coded) {
    let table = &reduced.table;
    let all: Vec<Code> = coded.codes.iter().flatten().copied().collect();
    assert_eq!(all.iter().collect::<BTreeSet<_>>().len(), all.len(), "codes are different");
    assert!(all.iter().all(|code| coded.bits == 32 || code.0 >> coded.bits == 0));
    assert_eq!(coded.initial, coded.codes[reduced.initial.row.at()][0]);
    let mut ways = coded.ways.iter();
    for row in table.rows() {
        for column in table.columns() {
            let own: BTreeSet<Code> = coded.codes[row.at()].iter().copied().collect();
            let Some(next) = table.next(row, column) else { continue };
            for &code in &own {
                if next == row {
                    assert_eq!(coded.encoded.get(code, column).map(|entry| entry.next), Some(code));
                    continue;
                }
                let way = ways.next().expect("a way for each unstable cell and code, in order");
                assert_eq!((way.from, way.column, way.to), (row, column, next));
                assert_eq!(way.path[0], code);
                let end = *way.path.last().expect("not empty");
                assert!(coded.codes[next.at()].contains(&end));
                match way.step {
                    Step::OneBit => assert!(way.path.windows(2).all(|s| s[0].distance(s[1]) == 1)),
                    Step::Together => assert_eq!(way.path.len(), 2),
                }
                assert_eq!(rests(coded, code, column), Ok(BTreeSet::from([end])), "{way:?}");
            }
        }
    }
    assert_eq!(ways.next(), None);
    let longest = coded.ways.iter().map(|way| way.path.len() - 1).max().unwrap_or(0);
    assert_eq!(coded.longest_path, longest);
    for (&(code, column), entry) in &coded.encoded.entries {
        let owner = coded.row_of(code);
        match entry.role {
            Role::Row(row) => {
                assert_eq!(owner, Some(row));
                assert_eq!(table.next(row, column), Some(entry.goal));
            }
            Role::Lent(row) => {
                assert_eq!(owner, Some(row));
                assert_eq!(table.next(row, column), None);
            }
            Role::Spare => assert!(owner.is_none() && coded.spare.iter().any(|spare| spare.code == code)),
            Role::OnTheWay => assert_eq!(owner, None),
        }
    }
    late_cells_are_left_alone(reduced, coded);
    outputs_of_rows_change_once(reduced, coded);
}

fn late(reduced: &Reduced, row: Row, goal: Row, column: Column) -> bool {
    let (own, end) = (reduced.table.cell(row, column), reduced.table.cell(goal, column));
    reduced.outputs == OutputStyle::PerCell && row != goal && own.outputs.conflicts(end.outputs) != 0
}

fn late_cells_are_left_alone(reduced: &Reduced, coded: &Coded) {
    for way in &coded.ways {
        let passed: Vec<Code> = match way.step {
            Step::OneBit => way.path[1..].to_vec(),
            Step::Together => {
                cube(way.path[0], way.path[1]).into_iter().filter(|&c| c != way.path[0]).collect()
            }
        };
        for row in passed.into_iter().filter_map(|code| coded.row_of(code)) {
            assert!(!late(reduced, row, way.to, way.column), "{way:?} passes through row {row}");
        }
    }
}

/// Outputs per row: some value of each code lets every way change the output at most once. One output, so two values.
fn outputs_of_rows_change_once(reduced: &Reduced, coded: &Coded) {
    if reduced.outputs != OutputStyle::PerRow || coded.ways.iter().any(|way| way.step == Step::Together) {
        return;
    }
    let value_of = |row: Row| reduced.table.cell(row, Column(0)).outputs.get(0);
    let mut value: BTreeMap<Code, bool> = BTreeMap::new();
    for (row, own) in reduced.table.rows().zip(&coded.codes) {
        value.extend(value_of(row).into_iter().flat_map(|v| own.iter().map(move |&code| (code, v))));
    }
    // Along a way that changes the output, values ascend or descend: what is known spreads, and whatever stays unknown
    // may be 0 throughout.
    loop {
        let before = value.len();
        for way in &coded.ways {
            let (Some(old), Some(new)) = (value_of(way.from), value_of(way.to)) else { continue };
            let known = |code: &Code, value: &BTreeMap<Code, bool>| value.get(code).copied();
            let last_old = way.path.iter().rposition(|code| known(code, &value) == Some(old));
            for code in &way.path[..=last_old.expect("the start")] {
                assert_eq!(*value.entry(*code).or_insert(old), old, "{way:?}");
            }
            let first_new = way.path.iter().position(|code| known(code, &value) == Some(new));
            for code in &way.path[first_new.expect("the end")..] {
                assert_eq!(*value.entry(*code).or_insert(new), new, "{way:?}");
            }
        }
        if value.len() == before {
            return;
        }
    }
}

fn cube(a: Code, b: Code) -> Vec<Code> {
    let free = a.0 ^ b.0;
    (0..=free).filter(|sub| sub & !free == 0).map(|sub| Code(a.0 ^ sub)).collect()
}

// Brute force.

/// All ways to give `rows` rows different codes of `bits` bits, the first row code 0.
fn placements(rows: usize, bits: usize) -> Vec<Vec<Code>> {
    let mut list = vec![vec![Code(0)]];
    for _ in 1..rows {
        list = list
            .into_iter()
            .flat_map(|placed: Vec<Code>| {
                (0..1u32 << bits)
                    .map(Code)
                    .filter(|code| !placed.contains(code))
                    .map(|code| {
                        let mut longer = placed.clone();
                        longer.push(code);
                        longer
                    })
                    .collect::<Vec<_>>()
            })
            .collect();
    }
    list
}

/// Whether these codes, with these spare ones, let every move change one bit a step.
fn one_bit_works(reduced: &Reduced, rows: &[Code], spare: &[Code]) -> bool {
    let points: Vec<(Code, Option<Row>)> = rows
        .iter()
        .enumerate()
        .map(|(r, &code)| (code, Some(Row::new(r))))
        .chain(spare.iter().map(|&code| (code, None)))
        .collect();
    let style = reduced.outputs;
    let open: Vec<usize> = (0..points.len())
        .filter(|&p| {
            style == OutputStyle::PerRow
                && points[p].1.is_none_or(|row| reduced.table.cell(row, Column(0)).outputs.get(0).is_none())
        })
        .collect();
    (0..1u32 << open.len()).any(|choice| {
        let value = |p: usize| -> bool {
            match open.iter().position(|&o| o == p) {
                Some(at) => choice >> at & 1 == 1,
                None => {
                    points[p].1.and_then(|r| reduced.table.cell(r, Column(0)).outputs.get(0)).unwrap_or(false)
                }
            }
        };
        reduced.table.columns().all(|column| column_works(reduced, &points, column, &value))
    })
}

fn column_works(
    reduced: &Reduced,
    points: &[(Code, Option<Row>)],
    column: Column,
    value: &dyn Fn(usize) -> bool,
) -> bool {
    let table = &reduced.table;
    let next = |p: usize| points[p].1.and_then(|row| table.next(row, column));
    let goals: Vec<Row> = table
        .rows()
        .filter(|&goal| table.rows().any(|row| row != goal && table.next(row, column) == Some(goal)))
        .collect();
    let free: Vec<usize> = (0..points.len()).filter(|&p| next(p).is_none()).collect();
    let choices = goals.len().pow(free.len() as u32);
    (0..choices.max(1)).any(|mut choice| {
        let mut owner: Vec<Option<Row>> = (0..points.len()).map(next).collect();
        for &p in &free {
            owner[p] = goals.get(choice % goals.len().max(1)).copied();
            choice /= goals.len().max(1);
        }
        goals.iter().all(|&goal| {
            let aim = table.cell(goal, Column(0)).outputs.get(0);
            let reached = |start: usize| -> bool {
                let mut seen = vec![start];
                let mut at = 0;
                while at < seen.len() {
                    let u = seen[at];
                    at += 1;
                    for w in 0..points.len() {
                        let near = points[u].0.distance(points[w].0) == 1 && owner[w] == Some(goal);
                        let barred = points[w].1.is_some_and(|row| late(reduced, row, goal, column));
                        // Once an output has its final value it keeps it.
                        let settled = reduced.outputs == OutputStyle::PerCell
                            || aim.is_none_or(|aim| value(u) != aim || value(w) == aim);
                        if near && !barred && settled && !seen.contains(&w) {
                            seen.push(w);
                        }
                    }
                }
                seen.iter().any(|&p| points[p].1 == Some(goal))
            };
            (0..points.len()).filter(|&p| next(p) == Some(goal)).all(reached)
        })
    })
}

/// All sets of `size` codes that no row has.
fn spare_sets(rows: &[Code], bits: usize, size: usize) -> Vec<Vec<Code>> {
    let free: Vec<Code> = (0..1u32 << bits).map(Code).filter(|code| !rows.contains(code)).collect();
    (0..1u32 << free.len())
        .filter(|set| set.count_ones() as usize == size)
        .map(|set| (0..free.len()).filter(|i| set >> i & 1 == 1).map(|i| free[i]).collect())
        .collect()
}

fn shared_works(reduced: &Reduced, bits: usize, spare: usize) -> bool {
    placements(reduced.table.len(), bits)
        .iter()
        .any(|rows| spare_sets(rows, bits, spare).iter().any(|spare| one_bit_works(reduced, rows, spare)))
}

/// Whether moves of all bits at once never meet.
fn single_works(reduced: &Reduced, rows: &[Code]) -> bool {
    let table = &reduced.table;
    table.columns().all(|column| {
        let mut goal_at: BTreeMap<Code, Row> = BTreeMap::new();
        let pairs = table.rows().filter_map(|row| table.next(row, column).map(|goal| (row, goal)));
        pairs.into_iter().all(|(row, goal)| {
            cube(rows[row.at()], rows[goal.at()]).into_iter().all(|code| {
                let stranger = rows.iter().position(|&own| own == code).map(Row::new).filter(|&r| r != row);
                let open = |r: Row| table.next(r, column).is_none_or(|next| next == goal);
                let alone = stranger.is_none_or(|r| !open(r) || !late(reduced, r, goal, column));
                alone && *goal_at.entry(code).or_insert(goal) == goal
            })
        })
    })
}

// Tests.

#[test]
fn three_rows_that_all_move_to_one_another_need_a_spare_row() {
    // Each pair moves in a column of its own, in which the third row stays where it is.
    let reduced = table(&["ABAA", "BBCB", "CCCA"]);
    let findings = assign(&reduced, &Method::Adjacency).expect_err("an odd ring");
    assert_eq!(findings[0].code, "adjacency-impossible");
    assert!(findings[0].text.contains("A, ") && findings[0].text.contains("length"), "{}", findings[0].text);
    let coded = assign(&reduced, &Method::SharedRow).expect("one spare row does");
    assert_eq!((coded.bits, coded.spare.len(), coded.longest_path), (2, 1, 2));
    assert_eq!(coded.spare[0].name, "P1");
    assert!(coded.bound.proved() && coded.tidy.proved());
    check(&reduced, &coded);
}

#[test]
fn a_row_without_a_cell_is_lent() {
    // A and C are opposite corners whatever one does: B (or D) must be passed on the way from A to C.
    let reduced = table(&["BAAAC---", "BCBB----", "CCDCC---", "DDDAD---"]);
    let coded = assign(&reduced, &Method::Adjacency).expect("a ring of four, and a way across");
    assert_eq!((coded.bits, coded.longest_path), (2, 2));
    assert!(coded.encoded.entries.values().any(|entry| matches!(entry.role, Role::Lent(_))));
    check(&reduced, &coded);
}

#[test]
fn a_design_of_one_row_has_no_bits() {
    let reduced = table(&["AAAA"]);
    let by_hand = Method::ByHand(BTreeMap::from([("A".to_owned(), vec![String::new()])]));
    for method in Method::ALL.iter().chain([&by_hand]) {
        let coded = assign(&reduced, method).expect("nothing to do");
        assert_eq!((coded.bits, coded.codes.clone()), (0, vec![vec![Code(0)]]));
        assert_eq!(coded.initial.text(coded.bits), "");
        check(&reduced, &coded);
    }
}

#[test]
fn four_rows_get_complementary_pairs_of_three_bits() {
    let reduced = table(&["ABCD", "BBAA", "CACB", "DCBD"]);
    let reduced = Reduced { table: normal(reduced.table), ..reduced };
    let coded = assign(&reduced, &Method::MultipleRow).expect("fits");
    assert_eq!(coded.bits, 3);
    for own in &coded.codes {
        assert_eq!(own.len(), 2);
        assert_eq!(own[0].0 ^ own[1].0, 0b111);
    }
    for (a, b) in [(0, 1), (0, 2), (0, 3), (1, 2), (1, 3), (2, 3)] {
        for code in &coded.codes[a] {
            assert!(coded.codes[b].iter().any(|other| other.distance(*code) == 1));
        }
    }
    assert_eq!(coded.longest_path, 1);
    check(&reduced, &coded);
}

/// Drops cells that lead to a row that is not stable there.
fn normal(mut table: FlowTable) -> FlowTable {
    for row in table.rows() {
        for column in table.columns() {
            if table.next(row, column).is_some_and(|next| !table.stable(next, column)) {
                table.cell_mut(row, column).next = None;
            }
        }
    }
    table
}

#[test]
fn multiple_row_stops_beyond_eight_rows() {
    let mut dice = Dice(3);
    let reduced = dice.table(8, 2, OutputStyle::PerCell);
    let coded = assign(&reduced, &Method::MultipleRow).expect("seven bits");
    assert_eq!(coded.bits, 7);
    check(&reduced, &coded);
    let reduced = dice.table(9, 2, OutputStyle::PerCell);
    let findings = assign(&reduced, &Method::MultipleRow).expect_err("15 bits");
    assert_eq!(findings[0].code, "too-many-rows");
    assert!(findings[0].text.contains('9') && findings[0].text.contains("15"), "{}", findings[0].text);
    assert!(findings[0].text.contains("single-step"), "{}", findings[0].text);
}

#[test]
fn one_hot_sets_then_clears() {
    let mut dice = Dice(7);
    for _ in 0..100 {
        let (rows, inputs) = (2 + dice.roll(6), 1 + dice.roll(3));
        let reduced = dice.table(rows, inputs, OutputStyle::PerRow);
        let coded = assign(&reduced, &Method::OneHot).expect("fits");
        assert_eq!(coded.bits, rows);
        assert!(coded.spare.iter().all(|spare| spare.code.0.count_ones() == 2));
        check(&reduced, &coded);
    }
    let reduced = dice.table(23, 2, OutputStyle::PerCell);
    assert_eq!(code_of(assign(&reduced, &Method::OneHot)), "too-many-variables");
}

/// Runs `judge` on random tables of up to four rows in both output styles.
fn small_tables(seed: u64, count: usize, mut judge: impl FnMut(&Reduced)) {
    let mut dice = Dice(seed);
    for i in 0..count {
        let (rows, inputs) = (2 + dice.roll(3), 1 + dice.roll(4));
        let style = if i % 3 == 0 { OutputStyle::PerRow } else { OutputStyle::PerCell };
        judge(&dice.table(rows, inputs, style));
    }
}

#[test]
fn adjacency_has_the_fewest_bits_or_there_is_none() {
    let mut refused = 0;
    small_tables(11, 600, |reduced| {
        let rows = reduced.table.len();
        let fewest = (1..rows)
            .find(|&bits| placements(rows, bits).iter().any(|codes| one_bit_works(reduced, codes, &[])));
        match assign(reduced, &Method::Adjacency) {
            Ok(coded) => {
                assert_eq!(Some(coded.bits), fewest);
                assert!(coded.bound.proved() && coded.tidy.proved() && coded.spare.is_empty());
                check(reduced, &coded);
            }
            Err(findings) => {
                refused += 1;
                assert_eq!((findings[0].code, fewest), ("adjacency-impossible", None));
            }
        }
    });
    assert!(refused > 10, "{refused}");
}

#[test]
fn shared_row_has_the_fewest_bits_and_then_the_fewest_spares() {
    let mut with_spares = 0;
    small_tables(13, 250, |reduced| {
        let rows = reduced.table.len();
        let coded = assign(reduced, &Method::SharedRow).expect("always possible");
        assert!(coded.bound.proved() && coded.tidy.proved());
        check(reduced, &coded);
        let least = if rows == 2 { 1 } else { 2 };
        for bits in least..coded.bits {
            assert!(!shared_works(reduced, bits, (1 << bits) - rows), "{bits} bits are enough");
        }
        for spare in 0..coded.spare.len() {
            assert!(!shared_works(reduced, coded.bits, spare), "{spare} spare rows are enough");
        }
        with_spares += usize::from(!coded.spare.is_empty());
    });
    assert!(with_spares > 20, "{with_spares}");
}

#[test]
fn single_step_has_the_fewest_bits() {
    let mut three = 0;
    let mut dice = Dice(17);
    for _ in 0..1000 {
        let (rows, inputs) = (2 + dice.roll(3), 1 + dice.roll(2));
        let reduced = dice.table(rows, inputs, OutputStyle::PerCell);
        let coded = assign(&reduced, &Method::SingleStep).expect("always possible");
        check(&reduced, &coded);
        let least = if rows == 2 { 1 } else { 2 };
        let fewest =
            (least..5).find(|&bits| placements(rows, bits).iter().any(|codes| single_works(&reduced, codes)));
        assert_eq!(Some(coded.bits), fewest);
        assert!(coded.bound.proved());
        three += usize::from(coded.bits == 3);
    }
    assert!(three > 5, "{three}");
}

#[test]
fn every_method_is_free_of_races_on_larger_tables() {
    let mut dice = Dice(19);
    for i in 0..120 {
        let (rows, inputs) = (4 + dice.roll(5), 1 + dice.roll(3));
        let style = if i % 4 == 0 { OutputStyle::PerRow } else { OutputStyle::PerCell };
        let reduced = dice.table(rows, inputs, style);
        for method in &Method::ALL {
            match codes::assign(&reduced, method, &Effort::of(300_000)) {
                Ok(coded) => check(&reduced, &coded),
                Err(findings) => assert!(
                    matches!(
                        findings[0].code,
                        "adjacency-impossible" | "adjacency-not-found" | "too-many-variables"
                    ),
                    "{findings:?}"
                ),
            }
        }
    }
}

#[test]
fn the_same_input_gives_the_same_codes() {
    let mut dice = Dice(23);
    for _ in 0..20 {
        let reduced = dice.table(7, 2, OutputStyle::PerCell);
        for method in &Method::ALL {
            assert_eq!(assign(&reduced, method), assign(&reduced, method));
        }
    }
}

#[test]
fn a_tiny_budget_gives_valid_codes_or_an_honest_finding() {
    let mut dice = Dice(29);
    for budget in [0, 20, 200, 2000] {
        for _ in 0..20 {
            let reduced = dice.table(12, 2, OutputStyle::PerCell);
            for method in Method::ALL.iter().filter(|&method| *method != Method::MultipleRow) {
                match codes::assign(&reduced, method, &Effort::of(budget)) {
                    Ok(coded) => check(&reduced, &coded),
                    Err(findings) => assert!(
                        findings[0].code.ends_with("-not-found")
                            || findings[0].code == "adjacency-impossible",
                        "{findings:?}"
                    ),
                }
            }
        }
    }
}

fn by_hand(list: &[(&str, &[&str])]) -> Method {
    let strings = |codes: &[&str]| codes.iter().map(|code| (*code).to_owned()).collect();
    Method::ByHand(list.iter().map(|(name, codes)| ((*name).to_owned(), strings(codes))).collect())
}

#[test]
fn every_fault_of_codes_by_hand_is_named() {
    let reduced = table(&["AB", "BB", "CB", "DB"]);
    let reduced = Reduced { table: normal(reduced.table), ..reduced };
    let method = by_hand(&[("A", &["00"]), ("B", &["00", "0x"]), ("D", &["101"]), ("E", &["11"])]);
    let findings = assign(&reduced, &method).expect_err("five faults");
    let mut found: Vec<&str> = findings.iter().map(|finding| finding.code).collect();
    found.sort_unstable();
    assert_eq!(
        found,
        ["code-character", "code-duplicate", "code-length", "code-missing", "code-unknown-row"]
    );
    let long = "0".repeat(23) + "1";
    let zero = "0".repeat(24);
    let two = table(&["AB", "BB"]);
    let method = by_hand(&[("A", &[&zero]), ("B", &[&long])]);
    assert_eq!(code_of(assign(&two, &method)), "too-many-variables");
}

#[test]
fn codes_by_hand_find_the_ways_that_other_methods_found() {
    let mut dice = Dice(31);
    let mut checked = 0;
    for i in 0..150 {
        let rows = 3 + dice.roll(4);
        let style = if i % 3 == 0 { OutputStyle::PerRow } else { OutputStyle::PerCell };
        let reduced = dice.table(rows, 2, style);
        for method in &Method::ALL {
            let Ok(coded) = assign(&reduced, method) else { continue };
            if coded.codes.iter().any(|own| own.len() > 8) {
                continue;
            }
            let given = coded
                .codes
                .iter()
                .enumerate()
                .map(|(r, own)| {
                    let texts = own.iter().map(|code| code.text(coded.bits)).collect();
                    (reduced.table.names[r].clone(), texts)
                })
                .collect();
            let again = assign(&reduced, &Method::ByHand(given)).expect("valid codes");
            assert_eq!(again.codes, coded.codes);
            for way in &again.ways {
                let ends = rests(&again, way.path[0], way.column).expect("no stray, no oscillation");
                assert_eq!(ends.len(), 1, "{method:?} {way:?}");
                assert!(ends.iter().all(|end| again.codes[way.to.at()].contains(end)));
            }
            if style == OutputStyle::PerCell {
                late_cells_are_left_alone(&reduced, &again);
            }
            checked += 1;
        }
    }
    assert!(checked > 400, "{checked}");
}

#[test]
fn a_critical_race_by_hand_is_kept_for_the_race_check_to_find() {
    // A moves to D across two bits, and both codes between are stable there.
    let reduced = table(&["AD", "BB", "CC", "DD"]);
    let method = by_hand(&[("A", &["00"]), ("B", &["10"]), ("C", &["01"]), ("D", &["11"])]);
    let coded = assign(&reduced, &method).expect("codes are well formed");
    let way = coded.ways.first().expect("one way");
    assert_eq!((way.path.len(), way.step), (2, Step::Together));
    assert_eq!(rests(&coded, Code(0), Column(1)).map(|ends| ends.len()), Ok(3));
}
