//! Random tables, held against the definitions taken literally.

use std::collections::{BTreeMap, BTreeSet};

use proptest::prelude::*;
use proptest::test_runner::FileFailurePersistence;
use stillgate::base::{Column, Level, Outputs, Row, TotalState};
use stillgate::project::{CellEntry, Discipline, Project, RowEntry};
use stillgate::spec::{self, FlowTable, Spec};

/// A random table of up to five rows, three inputs and two outputs. Every third cell is stable; most of the others lead
/// to a row that is stable in their column, so that tables without a mistake are common, and some lead anywhere.
fn any_project() -> impl Strategy<Value = Project> {
    (1usize..=5, 1usize..=3, 0usize..=2, any::<bool>()).prop_flat_map(|(rows, inputs, outputs, single)| {
        let cell = (0u32..100, 0usize..60, 0u32..9);
        proptest::collection::vec(proptest::option::weighted(0.6, cell), rows << inputs).prop_map(
            move |cells| {
                let discipline = if single { Discipline::Single } else { Discipline::Burst };
                let at = |row: usize, column: usize| cells[(row << inputs) + column];
                let rests = |row: usize, column: usize| at(row, column).is_some_and(|(kind, ..)| kind < 40);
                let signals = |letters: &str, n: usize| letters.chars().take(n).map(String::from).collect();
                let mut project = Project::new(signals("abc", inputs), signals("vw", outputs));
                project.discipline = discipline;
                for row in 0..rows {
                    let mut entry = RowEntry { name: format!("r{row}"), ..RowEntry::default() };
                    for column in 0..1usize << inputs {
                        let Some((kind, pick, word)) = at(row, column) else { continue };
                        let resting: Vec<usize> = (0..rows).filter(|&other| rests(other, column)).collect();
                        let next = match kind {
                            0..40 => format!("r{row}"),
                            40..92 if !resting.is_empty() => format!("r{}", resting[pick % resting.len()]),
                            92..95 => format!("r{}", pick % rows),
                            _ => "-".to_owned(),
                        };
                        let values = [word % 3, word / 3];
                        let outputs = values
                            .iter()
                            .take(outputs)
                            .map(|&value| ['-', '0', '1'][value as usize])
                            .collect();
                        entry.cells.insert(Column(column as u16).text(inputs), CellEntry { next, outputs });
                    }
                    project.rows.push(entry);
                }
                let rest = (0..1 << inputs).find(|&column| rests(0, column));
                project.initial = rest.map(|column| ("r0".to_owned(), Column(column as u16).text(inputs)));
                project
            },
        )
    })
}

/// The definitions, word for word, without any of the program's short cuts.
mod naive {
    use super::*;

    pub fn starts(given: &FlowTable) -> Vec<TotalState> {
        let all = given.rows().flat_map(|row| given.columns().map(move |column| TotalState { row, column }));
        all.filter(|at| given.stable(at.row, at.column)).collect()
    }

    fn inside(start: Column, end: Column) -> Vec<Column> {
        start.between(end).filter(|&c| c != start && c != end).collect()
    }

    fn clean(given: &FlowTable, start: TotalState, end: Column) -> bool {
        let held = given.cell(start.row, start.column).outputs;
        inside(start.column, end).into_iter().all(|c| {
            let cell = given.cell(start.row, c);
            (cell.next.is_none() || cell.next == Some(start.row)) && cell.outputs.conflicts(held) == 0
        })
    }

    pub fn may_change(given: &FlowTable, discipline: Discipline, start: TotalState, end: Column) -> bool {
        let distance = start.column.distance(end);
        match discipline {
            Discipline::Single => distance == 1,
            Discipline::Burst => distance > 0 && clean(given, start, end),
        }
    }

    pub fn ambiguous(given: &FlowTable) -> bool {
        starts(given).into_iter().any(|start| {
            given.columns().any(|end| {
                given.next(start.row, end).is_some()
                    && end != start.column
                    && !clean(given, start, end)
                    && !starts(given).into_iter().any(|near| {
                        near.row == start.row
                            && near.column.distance(end) < start.column.distance(end)
                            && (near.column == end || clean(given, near, end))
                    })
            })
        })
    }

    pub fn inner(given: &FlowTable, row: Row, column: Column) -> bool {
        starts(given).into_iter().filter(|start| start.row == row).any(|start| {
            given.columns().any(|end| {
                given.next(row, end).is_some()
                    && may_change(given, Discipline::Burst, start, end)
                    && inside(start.column, end).contains(&column)
            })
        })
    }

    pub fn beyond(given: &FlowTable, start: TotalState, column: Column) -> bool {
        inside(start.column, column).into_iter().any(|c| given.next(start.row, c).is_some())
    }

    /// Where a row comes to rest in a column, by brute force.
    pub fn end(given: &FlowTable, row: Row, column: Column) -> Option<Row> {
        let mut at = row;
        for _ in 0..=given.len() {
            match given.next(at, column) {
                Some(next) if next == at => return Some(at),
                Some(next) => at = next,
                None => return None,
            }
        }
        None
    }
}

/// What every checked table promises to the stages behind it.
fn holds_its_promises(project: &Project, spec: &Spec) -> Result<(), TestCaseError> {
    let (given, table) = (&spec.given, &spec.table);
    let burst = project.discipline == Discipline::Burst;
    prop_assert!(!burst || !naive::ambiguous(given));
    for row in table.rows() {
        for column in table.columns() {
            let (was, is) = (given.cell(row, column), table.cell(row, column));
            prop_assert!(is.next.is_none_or(|next| table.stable(next, column)), "normal mode");
            prop_assert_eq!(is.inner, burst && naive::inner(given, row, column));
            let expected = if is.inner { Some(row) } else { naive::end(given, row, column) };
            prop_assert_eq!(is.next, expected);
            prop_assert_eq!(is.outputs.care & was.outputs.care, was.outputs.care, "nothing given is lost");
            prop_assert_eq!(is.outputs.ones & was.outputs.care, was.outputs.ones);
        }
    }
    let mut seen = BTreeMap::from([(spec.initial, 0)]);
    let mut todo = vec![spec.initial];
    let mut moves = BTreeSet::new();
    let mut questions = BTreeSet::new();
    while !todo.is_empty() {
        let mut later = Vec::new();
        for from in todo {
            for column in given.columns().filter(|&column| column != from.column) {
                let allowed = naive::may_change(given, project.discipline, from, column);
                let next = naive::end(given, from.row, column);
                if let Some(to) = next.filter(|_| allowed) {
                    moves.insert((from, column, to));
                    let at = TotalState { row: to, column };
                    let distance = seen[&from] + 1;
                    seen.entry(at).or_insert_with(|| {
                        later.push(at);
                        distance
                    });
                }
                let text = table.column_text(column);
                let written = project.rows[from.row.at()].cells.get(&text);
                let promised = written.is_some_and(|c| c.next == "-" && !c.outputs.contains(['0', '1']));
                let open = next.is_none() && !promised && !table.cell(from.row, column).inner;
                let asked = match project.discipline {
                    Discipline::Single => allowed,
                    Discipline::Burst => !naive::beyond(given, from, column),
                };
                if open && asked {
                    questions.insert((from.row, column));
                }
            }
        }
        todo = later;
    }
    prop_assert_eq!(&spec.reachable.iter().copied().collect::<BTreeMap<_, _>>(), &seen);
    prop_assert_eq!(spec.reachable.len(), seen.len());
    prop_assert!(spec.reachable.is_sorted_by_key(|(_, distance)| *distance));
    prop_assert_eq!(&spec.moves.iter().map(|m| (m.from, m.column, m.to)).collect::<BTreeSet<_>>(), &moves);
    prop_assert_eq!(spec.moves.len(), moves.len());
    prop_assert_eq!(
        &spec.questions.iter().map(|q| (q.from.row, q.column)).collect::<BTreeSet<_>>(),
        &questions
    );
    prop_assert!(spec.questions.is_sorted_by_key(|q| q.distance));
    prop_assert!(spec.questions.iter().all(|q| seen[&q.from] == q.distance));
    // Held: what is equal on both sides of a move is no longer open in between.
    for start in naive::starts(given) {
        let from = table.cell(start.row, start.column).outputs;
        for column in given.columns() {
            if let Some(next) = table.next(start.row, column)
                && naive::may_change(given, project.discipline, start, column)
            {
                let (to, through) = (table.cell(next, column).outputs, table.cell(start.row, column).outputs);
                let same = Outputs { care: from.care & to.care & !from.conflicts(to), ..from };
                prop_assert_eq!(through.care & same.care, same.care);
            }
        }
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 4000,
        failure_persistence: Some(Box::new(FileFailurePersistence::Direct("tests/data/seeds/spec.txt"))),
        ..ProptestConfig::default()
    })]

    #[test]
    fn random_tables_are_refused_for_a_reason_or_keep_the_promises(project in any_project()) {
        let checked = spec::check(&project);
        let errors = checked.findings.iter().any(|finding| finding.level == Level::Error);
        prop_assert_eq!(checked.spec.is_none(), errors, "{:#?}", checked.findings);
        prop_assert_eq!(&spec::check(&project), &checked);
        if let Some(spec) = &checked.spec {
            holds_its_promises(&project, spec)?;
            let asked = checked.findings.iter().filter(|finding| finding.level == Level::Question).count();
            prop_assert_eq!(asked, spec.questions.len());
        }
    }
}
