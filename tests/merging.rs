//! Merging: published examples, and everything small against code that follows the definitions word by word.

use std::collections::{BTreeSet, VecDeque};

use proptest::prelude::*;
use stillgate::base::{Bound, Column, Effort, Outputs, Row, Stop, TotalState};
use stillgate::merge::{CoverFault, MergeChoice, Merged, RowSet, Verdict, merge};
use stillgate::project::{Discipline, OutputStyle};
use stillgate::spec::{FlowTable, Move, Signals, Spec};

// ---- Tables ----

/// A table from lines "name: cell cell ..", one cell for each column in the order of column numbers. A cell is "next/outputs",
/// "." where it is unspecified, with a leading "*" where it is inner.
fn table(inputs: usize, outputs: usize, lines: &[&str]) -> FlowTable {
    let split: Vec<(&str, Vec<&str>)> = lines
        .iter()
        .map(|line| {
            let (name, cells) = line.split_once(':').expect("a colon");
            (name.trim(), cells.split_whitespace().collect())
        })
        .collect();
    let names: Vec<String> = split.iter().map(|(name, _)| (*name).to_string()).collect();
    let mut table = FlowTable::new(inputs, outputs, names.clone());
    for (r, (_, cells)) in split.iter().enumerate() {
        assert_eq!(cells.len(), 1 << inputs);
        for (c, text) in cells.iter().enumerate().filter(|(_, text)| **text != ".") {
            let (inner, text) = text.strip_prefix('*').map_or((false, *text), |rest| (true, rest));
            let (next, word) = text.split_once('/').unwrap_or((text, ""));
            let cell = table.cell_mut(Row::new(r), Column(c as u16));
            cell.inner = inner;
            cell.next = names.iter().position(|n| n == next).map(Row::new);
            cell.outputs = if word.is_empty() {
                Outputs::default()
            } else {
                Outputs::parse(word, outputs).expect("outputs")
            };
        }
    }
    table
}

/// The specification of a table in normal mode that starts in the first stable cell of the first row.
fn spec(table: FlowTable, discipline: Discipline) -> Spec {
    let column = table.columns().find(|&c| table.stable(Row(0), c)).expect("a stable cell");
    let initial = TotalState { row: Row(0), column };
    let allowed = |a: Column, b: Column| a != b && (discipline == Discipline::Burst || a.distance(b) == 1);
    let (mut moves, mut reachable) = (Vec::new(), vec![(initial, 0)]);
    let mut queue = VecDeque::from([(initial, 0)]);
    while let Some((from, distance)) = queue.pop_front() {
        for column in table.columns().filter(|&c| allowed(from.column, c)) {
            let cell = table.cell(from.row, column);
            let Some(to) = cell.next.filter(|_| !cell.inner) else { continue };
            moves.push(Move { from, column, to });
            let reached = TotalState { row: to, column };
            if !reachable.iter().any(|&(state, _)| state == reached) {
                reachable.push((reached, distance + 1));
                queue.push_back((reached, distance + 1));
            }
        }
    }
    let names = |letter: char, count: usize| (1..=count).map(|i| format!("{letter}{i}")).collect();
    Spec {
        signals: Signals { inputs: names('x', table.inputs), outputs: names('z', table.outputs) },
        discipline,
        given: table.clone(),
        table,
        initial,
        moves,
        reachable,
        questions: Vec::new(),
    }
}

fn merged(spec: &Spec) -> Merged {
    merge(spec, &MergeChoice { covers: 1, ..MergeChoice::default() }, &Effort::of(50_000_000))
        .expect("merges")
}

fn lists(sets: &[RowSet]) -> Vec<Vec<usize>> {
    sets.iter().map(|set| set.ones().collect()).collect()
}

/// A small random table in normal mode. `inner` of 8 unspecified cells become inner cells.
fn random_table(seed: u64, rows: usize, inputs: usize, outputs: usize, inner: u64) -> FlowTable {
    let mut state = seed.wrapping_mul(0x9e37_79b9_7f4a_7c15) ^ 0x2545_f491_4f6c_dd1d;
    let mut draw = |below: u64| {
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        (state >> 20) % below
    };
    let names = (0..rows).map(|r| format!("r{r}")).collect();
    let mut table = FlowTable::new(inputs, outputs, names);
    let columns = 1u64 << inputs;
    for row in table.rows() {
        for _ in 0..=draw(4) / 3 {
            let column = Column(draw(columns) as u16);
            table.cell_mut(row, column).next = Some(row);
        }
    }
    let open = 2 + draw(5);
    let known = 1 + draw(4);
    for row in table.rows() {
        for column in table.columns() {
            let stable: Vec<Row> = table.rows().filter(|&k| table.stable(k, column)).collect();
            let cell = table.cell_mut(row, column);
            if cell.next.is_none() && !stable.is_empty() && draw(8) >= open {
                cell.next = Some(stable[draw(stable.len() as u64) as usize]);
            }
            if cell.next.is_some() {
                for output in 0..outputs {
                    cell.outputs = cell.outputs.with(output, (draw(6) < known).then(|| draw(3) == 0));
                }
            } else if draw(8) < inner {
                cell.next = Some(row);
                cell.inner = true;
            }
        }
    }
    table
}

// ---- The definitions, word by word ----

/// Whether two rows have different values of an output in some column.
fn contradict(table: &FlowTable, a: usize, b: usize) -> bool {
    table
        .columns()
        .any(|c| table.cell(Row::new(a), c).outputs.conflicts(table.cell(Row::new(b), c).outputs) != 0)
}

/// The largest relation without a conflict that holds what it implies: strike one pair at a time.
fn compatible_by_definition(table: &FlowTable) -> Vec<Vec<bool>> {
    let n = table.len();
    let mut fits: Vec<Vec<bool>> =
        (0..n).map(|a| (0..n).map(|b| a == b || !contradict(table, a, b)).collect()).collect();
    loop {
        let strike = (0..n).flat_map(|a| (0..n).map(move |b| (a, b))).find(|&(a, b)| {
            fits[a][b]
                && table.columns().any(|c| match (table.next(Row::new(a), c), table.next(Row::new(b), c)) {
                    (Some(p), Some(q)) => !fits[p.at()][q.at()],
                    _ => false,
                })
        });
        let Some((a, b)) = strike else { return fits };
        fits[a][b] = false;
        fits[b][a] = false;
    }
}

/// Whether sets of rows are a closed cover that leaves no burst in the middle.
fn closed_cover_by_definition(table: &FlowTable, sets: &[Vec<usize>]) -> bool {
    let covers = (0..table.len()).all(|r| sets.iter().any(|s| s.contains(&r)));
    let consistent = sets.iter().all(|s| s.iter().all(|&a| s.iter().all(|&b| !contradict(table, a, b))));
    let closed = sets.iter().all(|s| {
        table.columns().all(|c| {
            let next: Vec<usize> =
                s.iter().filter_map(|&r| table.next(Row::new(r), c)).map(Row::at).collect();
            let inside = s.iter().any(|&r| table.cell(Row::new(r), c).inner);
            if inside {
                next.iter().all(|r| s.contains(r))
            } else {
                sets.iter().any(|t| next.iter().all(|r| t.contains(r)))
            }
        })
    });
    covers && consistent && closed
}

/// All smallest closed covers: fewest sets, then fewest members, then as sorted lists of lists. Looks at every family of sets.
fn smallest_covers_by_definition(table: &FlowTable) -> Vec<Vec<Vec<usize>>> {
    let n = table.len();
    let mut sets: Vec<Vec<usize>> = (1..1usize << n)
        .map(|bits| (0..n).filter(|r| bits >> r & 1 == 1).collect::<Vec<usize>>())
        .filter(|s| s.iter().all(|&a| s.iter().all(|&b| !contradict(table, a, b))))
        .collect();
    sets.sort();
    for size in 1..=n {
        let mut found = Vec::new();
        families(&sets, size, &mut Vec::new(), &mut |family| {
            if closed_cover_by_definition(table, family) {
                found.push(family.to_vec());
            }
        });
        if !found.is_empty() {
            found.sort_by_key(|family| family.iter().map(Vec::len).sum::<usize>());
            return found;
        }
    }
    unreachable!("all rows alone are a closed cover")
}

fn families(
    sets: &[Vec<usize>],
    size: usize,
    chosen: &mut Vec<Vec<usize>>,
    visit: &mut dyn FnMut(&[Vec<usize>]),
) {
    if size == 0 {
        return visit(chosen);
    }
    for (i, set) in sets.iter().enumerate() {
        chosen.push(set.clone());
        families(&sets[i + 1..], size - 1, chosen, visit);
        chosen.pop();
    }
}

/// What the reduced table must be: in normal mode, saying all that its members say, and keeping step with the primitive table.
fn check_reduced(spec: &Spec, merged: &Merged) {
    let reduced = merged.reduced.as_ref().expect("reduced");
    let (small, large) = (&reduced.table, &spec.table);
    for s in small.rows() {
        let holds = |r: Row| reduced.members[s.at()].contains(&r);
        for c in small.columns() {
            let cell = small.cell(s, c);
            let mut asked = BTreeSet::new();
            for &r in &reduced.members[s.at()] {
                let from = large.cell(r, c);
                asked.extend(from.next);
                if reduced.outputs == OutputStyle::PerCell {
                    assert_eq!(from.outputs.conflicts(cell.outputs), 0);
                    assert_eq!(from.outputs.care & !cell.outputs.care, 0);
                }
                assert!(!from.inner || cell.next == Some(s), "a burst is left");
            }
            assert_eq!(cell.next.is_some(), !asked.is_empty());
            if let Some(t) = cell.next {
                assert!(small.stable(t, c), "normal mode");
                assert!(asked.iter().all(|r| reduced.members[t.at()].contains(r)));
                assert!(t == s || !asked.iter().all(|&r| holds(r)) || cell.next == Some(s));
            }
        }
    }
    assert!(small.stable(reduced.initial.row, reduced.initial.column));
    assert!(reduced.members[reduced.initial.row.at()].contains(&spec.initial.row));
    let unique: BTreeSet<_> = reduced.moves.iter().collect();
    assert_eq!(unique.len(), reduced.moves.len());
    // Every primitive move, followed from the start, has its move in the reduced table.
    let mut reached = BTreeSet::from([(spec.initial, reduced.initial.row)]);
    let mut todo = vec![(spec.initial, reduced.initial.row)];
    let mut used = BTreeSet::new();
    while let Some((state, row)) = todo.pop() {
        for step in spec.moves.iter().filter(|m| m.from == state) {
            let to = small.next(row, step.column).expect("specified");
            let taken = Move { from: TotalState { row, column: state.column }, column: step.column, to };
            assert!(unique.contains(&taken));
            used.insert(taken);
            let after = (TotalState { row: step.to, column: step.column }, to);
            if reached.insert(after) {
                todo.push(after);
            }
        }
    }
    assert_eq!(used.len(), reduced.moves.len());
}

fn check_pairs(spec: &Spec, merged: &Merged) {
    let table = &spec.table;
    let fits = compatible_by_definition(table);
    let mut last = 0;
    for pair in merged.pairs.iter() {
        assert_eq!(pair.verdict == Verdict::Compatible, fits[pair.a.at()][pair.b.at()]);
        match pair.verdict {
            Verdict::Compatible => {
                assert!(pair.implies.iter().all(|&((p, q), _)| fits[p.at()][q.at()]));
            }
            Verdict::Conflict(conflict) => {
                let column = conflict.column.expect("a column");
                let at = |c: Column| table.cell(pair.a, c).outputs.conflicts(table.cell(pair.b, c).outputs);
                assert_eq!(at(column).trailing_zeros() as usize, conflict.output);
                let earlier = |c: &Column| table.column_text(*c) < table.column_text(column);
                assert!(table.columns().filter(earlier).all(|c| at(c) == 0));
            }
            Verdict::Struck { by, pass } => {
                assert!(pair.implies.iter().any(|&(implied, _)| implied == by));
                // It fell in the round after the first of what it implies.
                let fell = |&((p, q), _): &((Row, Row), Column)| match merged.pairs.verdict(p, q) {
                    Verdict::Compatible => None,
                    Verdict::Conflict(_) => Some(0),
                    Verdict::Struck { pass, .. } => Some(pass),
                };
                assert_eq!(pair.implies.iter().filter_map(fell).min(), Some(pass - 1));
                last = last.max(pass);
            }
        }
    }
    assert_eq!(merged.pairs.passes, last);
}

// ---- Published examples ----

/// Digital design textbooks (from memory): rows a..e, pairs (a,b)(a,d)(b,c)(c,d)(c,e)(d,e) compatible; (a,b) implies (b,c),
/// (a,d) implies (b,c), (b,c) implies (d,e), and c, d, e together imply (a,d) and (b,c). {a,d} {b,c} {c,d,e} is closed.
fn published() -> Spec {
    // Columns 0 to 4 carry one implication each; 6 and 7 keep (a,c) (a,e) and (b,d) (b,e) apart by their outputs.
    let lines = [
        "a: c/- b/- .   a/- .   . a/0 .",
        "b: b/- b/- d/- .   b/- . .   b/0",
        "c: c/- c/- e/- a/- c/- . c/1 .",
        "d: .   c/- d/- d/- .   . .   d/1",
        "e: .   .   e/- .   b/- . e/1 e/1",
    ];
    spec(table(3, 1, &lines), Discipline::Single)
}

#[test]
fn the_published_closed_cover_is_found() {
    let spec = published();
    let merged = merged(&spec);
    let compatible: Vec<(u16, u16)> =
        merged.pairs.iter().filter(|p| p.verdict == Verdict::Compatible).map(|p| (p.a.0, p.b.0)).collect();
    assert_eq!(compatible, [(0, 1), (1, 2), (0, 3), (2, 3), (2, 4), (3, 4)]);
    let pair = |a, b| (Row(a), Row(b));
    assert_eq!(merged.pairs.implies(Row(1), Row(0)), [(pair(1, 2), Column(0))]);
    assert_eq!(merged.pairs.implies(Row(0), Row(3)), [(pair(1, 2), Column(1))]);
    assert_eq!(merged.pairs.implies(Row(1), Row(2)), [(pair(3, 4), Column(2))]);
    assert_eq!(lists(&merged.maximal), [vec![0, 1], vec![0, 3], vec![1, 2], vec![2, 3, 4]]);
    assert_eq!(lists(&merged.class_sets[3]), [vec![0, 3], vec![1, 2]]);
    assert_eq!(merged.cover.len(), 3);
    assert!(merged.bound.proved() && merged.tie_proved);
    assert_eq!(lists(&merged.cover), smallest_covers_by_definition(&spec.table)[0]);
    check_pairs(&spec, &merged);

    let by_hand = |sets: &[&[u16]]| {
        let sets = sets.iter().map(|s| s.iter().map(|&r| Row(r)).collect()).collect();
        let choice = MergeChoice { by_hand: Some(sets), covers: 1, ..MergeChoice::default() };
        merge(&spec, &choice, &Effort::of(1_000_000)).expect("merges")
    };
    let closed = by_hand(&[&[0, 3], &[1, 2], &[2, 3, 4]]);
    assert_eq!((closed.faults.as_slice(), closed.bound), (&[][..], Bound::Proved));
    let open = by_hand(&[&[0, 1], &[2, 3, 4]]);
    assert!(open.reduced.is_none());
    let needs = |set, column, needs: &[u16]| CoverFault::Open {
        set,
        column: Column(column),
        needs: needs.iter().map(|&r| Row(r)).collect(),
    };
    // In text order of the columns.
    assert_eq!(open.faults, [needs(0, 0, &[1, 2]), needs(1, 4, &[1, 2]), needs(1, 3, &[0, 3])]);
}

#[test]
fn the_gated_latch_merges_six_rows_into_two() {
    // Columns by number: D is bit 0, G bit 1. Digital design textbooks.
    let lines = [
        "shut0:  shut0/0 wait0/-  open0/-  .",
        "wait0:  shut0/- wait0/0  .        open1/-",
        "open0:  shut0/- .        open0/0  open1/-",
        "open1:  .       shut1/-  open0/-  open1/1",
        "shut1:  wait1/- shut1/1  .        open1/-",
        "wait1:  wait1/1 shut1/-  open0/-  .",
    ];
    let spec = spec(table(2, 1, &lines), Discipline::Single);
    let merged = merged(&spec);
    assert_eq!(lists(&merged.cover), [vec![0, 1, 2], vec![3, 4, 5]]);
    assert!(merged.bound.proved() && merged.tie_proved);
    assert_eq!((merged.lower_bound, merged.clique.len()), (2, 2));
    let reduced = merged.reduced.as_ref().expect("reduced");
    assert_eq!(reduced.table.names, ["A", "B"]);
    let next =
        |r| reduced.table.columns().map(|c| reduced.table.next(Row(r), c).map(|t| t.0)).collect::<Vec<_>>();
    assert_eq!(next(0), [Some(0), Some(0), Some(0), Some(1)]);
    assert_eq!(next(1), [Some(1), Some(1), Some(0), Some(1)]);
    assert_eq!(reduced.initial, TotalState { row: Row(0), column: Column(0) });
    assert_eq!(reduced.moves.len(), 12, "six stable total states, two changes each");
    check_reduced(&spec, &merged);
}

#[test]
fn a_member_that_is_stable_does_not_make_the_merged_row_stable() {
    // {a, b} with b stable in column 1 and a going to d: the merged row must go on to a set that holds b and d.
    let lines = ["b: . b/-", "a: a/0 d/-", "d: . d/-"];
    let spec = spec(table(1, 1, &lines), Discipline::Single);
    let sets = vec![vec![Row(0), Row(1)], vec![Row(0), Row(2)]];
    let choice = MergeChoice { by_hand: Some(sets), covers: 1, ..MergeChoice::default() };
    let merged = merge(&spec, &choice, &Effort::of(1_000_000)).expect("merges");
    let reduced = merged.reduced.as_ref().expect("reduced");
    assert_eq!(reduced.table.next(Row(0), Column(1)), Some(Row(1)));
    // The initial state (b, 1) lives in the second merged row, though the first holds b too.
    assert_eq!(reduced.initial, TotalState { row: Row(1), column: Column(1) });
    check_reduced(&spec, &merged);
}

#[test]
fn moon_and_moser_compatibles_are_counted_or_given_up() {
    // Three rows of a group conflict in their own output: rows of different groups are compatible.
    let tables = |groups: usize| {
        let mut table = FlowTable::new(1, 2 * groups, (0..3 * groups).map(|r| format!("r{r}")).collect());
        for row in table.rows() {
            let (group, which) = (row.at() / 3, row.at() % 3);
            let word =
                Outputs::default().with(2 * group, Some(which == 1)).with(2 * group + 1, Some(which == 2));
            *table.cell_mut(row, Column(0)) =
                stillgate::spec::Cell { next: Some(row), outputs: word, inner: false };
        }
        table
    };
    for (groups, count) in [(1, 3), (2, 9), (5, 243), (7, 2187)] {
        let merged = merged(&spec(tables(groups), Discipline::Single));
        assert!(merged.maximal_complete);
        assert_eq!(merged.maximal.len(), count);
    }
    let merged = merged(&spec(tables(12), Discipline::Single));
    assert!(!merged.maximal_complete && merged.maximal.is_empty());
    assert_eq!(merged.cover.len(), 3);
    assert!(merged.bound.proved());
}

// ---- Covers by hand ----

#[test]
fn every_fault_of_a_cover_by_hand_is_named() {
    let lines = ["a: a/0 *a/- b/-  .", "b: .   c/-  b/1 .", "c: .   c/0  .   .", "d: d/1 .    .   d/0"];
    let spec = spec(table(2, 1, &lines), Discipline::Burst);
    let sets = vec![vec![Row(0), Row(1)], vec![], vec![Row(0), Row(3)]];
    let choice = MergeChoice { by_hand: Some(sets), covers: 1, ..MergeChoice::default() };
    let merged = merge(&spec, &choice, &Effort::of(1_000_000)).expect("merges");
    let expected = [
        CoverFault::LeavesBurst { set: 0, column: Column(1), needs: vec![Row(0), Row(2)] },
        CoverFault::Empty(1),
        CoverFault::Incompatible { set: 2, rows: (Row(0), Row(3)) },
        CoverFault::Uncovered(Row(2)),
    ];
    assert_eq!(merged.faults, expected);
    assert!(merged.reduced.is_none() && !merged.bound.proved());
    assert_eq!(merged.lower_bound, merged.clique.len());
}

#[test]
fn a_cover_by_hand_that_is_larger_than_needed_says_so() {
    let spec = published();
    let sets: Vec<Vec<Row>> = spec.table.rows().map(|r| vec![r]).collect();
    let names = ["low".to_string(), String::new(), "B".to_string()].to_vec();
    let choice = MergeChoice { by_hand: Some(sets), names, covers: 1, ..MergeChoice::default() };
    let merged = merge(&spec, &choice, &Effort::of(1_000_000)).expect("merges");
    assert!(merged.faults.is_empty());
    assert_eq!(merged.bound, Bound::Stopped { lower: 3 });
    let reduced = merged.reduced.as_ref().expect("reduced");
    assert_eq!(reduced.table.names, ["low", "C", "B", "D", "E"]);
    check_reduced(&spec, &merged);
}

// ---- Outputs that belong to rows ----

fn per_row(spec: &Spec) -> Result<Merged, Vec<stillgate::base::Finding>> {
    let choice = MergeChoice { outputs: OutputStyle::PerRow, covers: 1, ..MergeChoice::default() };
    merge(spec, &choice, &Effort::of(10_000_000))
}

#[test]
fn outputs_per_row_conflict_whatever_the_columns() {
    let lines = ["a: a/0 b/-", "b: c/- b/1", "c: c/- d/1", "d: a/- d/1"];
    let spec = spec(table(1, 1, &lines), Discipline::Single);
    let merged = per_row(&spec).expect("merges");
    let Verdict::Conflict(conflict) = merged.pairs.verdict(Row(0), Row(1)) else { panic!("no conflict") };
    assert_eq!((conflict.column, conflict.output), (None, 0));
    let reduced = merged.reduced.as_ref().expect("reduced");
    for s in reduced.table.rows() {
        let words: BTreeSet<_> = reduced.table.row_cells(s).iter().map(|cell| cell.outputs).collect();
        assert_eq!(words.len(), 1);
    }
    check_reduced(&spec, &merged);
}

#[test]
fn a_row_that_contradicts_itself_is_an_error_with_its_columns() {
    let lines = ["a: a/0 a/1 b/- .", "b: a/- . b/1 ."];
    let findings = per_row(&spec(table(2, 1, &lines), Discipline::Single)).expect_err("contradiction");
    assert_eq!(findings.len(), 1);
    assert_eq!(findings[0].code, "row-outputs-contradict");
    assert_eq!((findings[0].at.row.as_deref(), findings[0].at.column.as_deref()), (Some("a"), Some("10")));
    assert!(findings[0].text.contains("00") && findings[0].text.contains("z1"));
}

#[test]
fn an_output_that_neither_end_has_is_an_error_with_its_cell() {
    let lines = ["a: a/0 b/1", "b: a/- b/0"];
    let findings = per_row(&spec(table(1, 1, &lines), Discipline::Single)).expect_err("unmet");
    assert_eq!(findings[0].code, "row-output-unmet");
    assert_eq!((findings[0].at.row.as_deref(), findings[0].at.column.as_deref()), (Some("a"), Some("1")));
}

#[test]
fn an_open_end_is_bound_by_the_output_on_the_way() {
    // a goes to b with 1; a has 0, so b must have 1, and then cannot merge with c.
    let lines = ["a: a/0 b/1 . .", "b: a/- b/- . .", "c: . d/- c/0 .", "d: a/- d/- . ."];
    let merged = per_row(&spec(table(2, 1, &lines), Discipline::Single)).expect("merges");
    assert!(matches!(merged.pairs.verdict(Row(1), Row(2)), Verdict::Conflict(_)));
}

// ---- Effort ----

#[test]
fn a_spent_effort_still_gives_a_closed_cover_and_an_honest_bound() {
    for seed in 0..20 {
        let spec = spec(random_table(seed, 12, 2, 1, 0), Discipline::Single);
        for steps in [0, 1, 10, 100, 1000] {
            let choice = MergeChoice { covers: 1, ..MergeChoice::default() };
            let halted = merge(&spec, &choice, &Effort::of(steps)).expect("merges");
            assert!(closed_cover_by_definition(&spec.table, &lists(&halted.cover)));
            let proved = merged(&spec).cover.len();
            assert!(halted.lower_bound <= proved && proved <= halted.cover.len());
            assert!(!halted.bound.proved() || halted.cover.len() == proved);
            check_reduced(&spec, &halted);
        }
    }
    let stop = Stop::default();
    stop.raise();
    let effort = Effort::new(1_000_000, stop, &|_| {});
    let choice = MergeChoice { covers: 1, ..MergeChoice::default() };
    let stopped = merge(&published(), &choice, &effort).expect("merges");
    assert!(closed_cover_by_definition(&published().table, &lists(&stopped.cover)));
}

// ---- Everything small, and at random ----

/// All tables of three rows and one input in normal mode, with one output in the stable cells.
#[test]
fn all_tables_of_three_rows_and_one_input() {
    let mut count = 0;
    let mut cells = [0usize; 6];
    loop {
        // A cell: open, or one of three next rows; outputs by a further digit.
        let mut table = FlowTable::new(1, 1, ["a", "b", "c"].map(String::from).to_vec());
        for (i, &kind) in cells.iter().enumerate() {
            let (row, column) = (Row::new(i / 2), Column((i % 2) as u16));
            let cell = table.cell_mut(row, column);
            cell.next = (kind > 0).then(|| Row::new((kind - 1) % 3));
            if cell.next == Some(row) {
                cell.outputs = cell.outputs.with(0, Some(row.at() == 2));
            }
        }
        let normal = table.rows().all(|r| {
            table.columns().any(|c| table.stable(r, c))
                && table.columns().all(|c| table.next(r, c).is_none_or(|t| table.stable(t, c)))
        });
        if normal {
            count += 1;
            let spec = spec(table, Discipline::Single);
            let merged = merged(&spec);
            assert_eq!(lists(&merged.cover), smallest_covers_by_definition(&spec.table)[0]);
            check_pairs(&spec, &merged);
            check_reduced(&spec, &merged);
        }
        let Some(i) = (0..6).find(|&i| cells[i] < 3) else { break };
        cells[i] += 1;
        cells[..i].fill(0);
    }
    assert_eq!(count, 171);
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 600, ..ProptestConfig::default() })]

    #[test]
    fn the_cover_is_the_first_of_all_smallest(seed: u64, rows in 2usize..6, inputs in 1usize..4, outputs in 1usize..3) {
        let spec = spec(random_table(seed, rows, inputs, outputs, 0), Discipline::Single);
        let merged = merged(&spec);
        prop_assert!(merged.bound.proved() && merged.tie_proved);
        prop_assert_eq!(lists(&merged.cover), smallest_covers_by_definition(&spec.table)[0].clone());
        check_pairs(&spec, &merged);
        check_reduced(&spec, &merged);
    }

    #[test]
    fn no_burst_is_left_in_the_middle(seed: u64, rows in 2usize..6, inputs in 2usize..4, inner in 1u64..5) {
        let spec = spec(random_table(seed, rows, inputs, 1, inner), Discipline::Burst);
        let merged = merged(&spec);
        prop_assert!(merged.bound.proved() && merged.tie_proved);
        prop_assert_eq!(lists(&merged.cover), smallest_covers_by_definition(&spec.table)[0].clone());
        check_reduced(&spec, &merged);
    }

    #[test]
    fn further_covers_follow_in_order(seed: u64, rows in 2usize..5, inner in 0u64..3) {
        let spec = spec(random_table(seed, rows, 2, 1, inner), Discipline::Burst);
        let all = smallest_covers_by_definition(&spec.table);
        let choice = MergeChoice { covers: 6, ..MergeChoice::default() };
        let merged = merge(&spec, &choice, &Effort::of(10_000_000)).expect("merges");
        let found: Vec<_> = std::iter::once(&merged.cover).chain(&merged.further).map(|c| lists(c)).collect();
        prop_assert_eq!(&found[..], &all[..all.len().min(6)]);
    }

    #[test]
    fn larger_tables_are_closed_and_covered(seed: u64, rows in 6usize..24, inner in 0u64..3) {
        let discipline = if inner > 0 { Discipline::Burst } else { Discipline::Single };
        let spec = spec(random_table(seed, rows, 3, 2, inner), discipline);
        let merged = merged(&spec);
        prop_assert!(merged.bound.proved() && merged.tie_proved);
        prop_assert!(closed_cover_by_definition(&spec.table, &lists(&merged.cover)));
        prop_assert!(merged.cover.len() >= merged.clique.len());
        check_pairs(&spec, &merged);
        check_reduced(&spec, &merged);
    }
}
