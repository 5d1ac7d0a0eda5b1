//! Random projects and edits for the property tests of this room.

use std::collections::BTreeMap;

use proptest::collection::vec;
use proptest::prelude::*;
use proptest::sample::{Index, select};

use crate::project::{
    CellEntry, Choices, CodesChoice, CoverChoice, Discipline, Edit, Form, GatesChoice, Layout, LogicChoice,
    MergingChoice, Method, OutputStyle, Project, RowEntry, Scenario, Shape, Step, Style, limits,
};

/// Characters that a careless writer or reader would stumble over, and plain ones.
fn character() -> impl Strategy<Value = char> {
    const HOSTILE: &str = "\"\\'\n\r\t\0\u{1}\u{7f}\u{85}\u{2028}\u{200e}\u{202e}\u{feff}\u{e9}\u{6c34}\u{1f4a7} (){}[],:/*#r-<>&";
    prop_oneof![
        select(HOSTILE.chars().collect::<Vec<_>>()),
        any::<char>(),
        select(vec!['a', 'b', '0', '1', ' '])
    ]
}

fn text(most: usize) -> impl Strategy<Value = String> {
    vec(character(), 0..=most).prop_map(String::from_iter)
}

/// Any string that the file can hold in the place of a name.
fn hostile() -> impl Strategy<Value = String> {
    prop_oneof![4 => text(5), 1 => text(limits::NAME)]
}

fn flag() -> impl Strategy<Value = bool> {
    any::<bool>()
}

fn row() -> impl Strategy<Value = RowEntry> {
    let cell = (hostile(), hostile()).prop_map(|(next, outputs)| CellEntry { next, outputs });
    (hostile(), proptest::collection::btree_map(hostile(), cell, 0..8))
        .prop_map(|(name, cells)| RowEntry { name, cells })
}

fn step() -> impl Strategy<Value = Step> {
    (hostile(), hostile(), proptest::option::of(hostile())).prop_map(|(inputs, outputs, row)| Step {
        inputs,
        outputs,
        row,
    })
}

fn scenario() -> impl Strategy<Value = Scenario> {
    (hostile(), flag(), vec(step(), 0..9)).prop_map(|(name, loops, steps)| Scenario { name, loops, steps })
}

fn method() -> impl Strategy<Value = Method> {
    let by_hand = proptest::collection::btree_map(hostile(), vec(hostile(), 0..4), 0..5);
    prop_oneof![select(Method::ALL.to_vec()), by_hand.prop_map(Method::ByHand)]
}

fn choices() -> impl Strategy<Value = Choices> {
    let cover = prop_oneof![
        Just(CoverChoice::Smallest),
        vec(vec(hostile(), 0..5), 0..5).prop_map(CoverChoice::ByHand)
    ];
    let merging = (select(vec![OutputStyle::PerCell, OutputStyle::PerRow]), cover, vec(hostile(), 0..4))
        .prop_map(|(outputs, cover, names)| MergingChoice { outputs, cover, names });
    let codes = method().prop_map(|method| CodesChoice { method });
    let logic = (select(Form::ALL.to_vec()), select(Shape::ALL.to_vec()), flag(), vec(hostile(), 0..4))
        .prop_map(|(form, shape, share, late)| LogicChoice { form, shape, share, late });
    let delay = prop_oneof![Just((0.5, 1.5)), (0.0..1.0, 1.0..1e9), (0.0..1e-300, 1e-300..1e-7)];
    let styles = select(vec![Style::AndOr, Style::NandOnly, Style::NorOnly]);
    let gates = (styles, 2..=limits::FAN_IN, delay, proptest::option::of(hostile()))
        .prop_map(|(style, fan_in, delay, reset)| GatesChoice { style, fan_in, delay, reset });
    prop_oneof![
        Just(Choices::default()),
        (merging, codes, logic, gates).prop_map(|(merging, codes, logic, gates)| Choices {
            merging,
            codes,
            logic,
            gates
        })
    ]
}

fn layout() -> impl Strategy<Value = Layout> {
    let any = (hostile(), flag(), flag()).prop_map(|(station, gray, used_only)| Layout {
        station,
        gray,
        used_only,
    });
    prop_oneof![Just(Layout::default()), any]
}

/// Any project that keeps the limits, whatever it may mean.
pub(super) fn wild_project() -> impl Strategy<Value = Project> {
    let words = (text(40), prop_oneof![text(40), text(600)]);
    let signals = (vec(hostile(), 0..=limits::INPUTS), vec(hostile(), 0..6));
    let initial = proptest::option::of((hostile(), hostile()));
    let disciplines = select(vec![Discipline::Single, Discipline::Burst]);
    (words, signals, (disciplines, initial), vec(row(), 0..6), vec(scenario(), 0..3), choices(), layout())
        .prop_map(
            |((title, notes), (inputs, outputs), (discipline, initial), rows, scenarios, choices, layout)| {
                Project {
                    title,
                    notes,
                    inputs,
                    outputs,
                    discipline,
                    initial,
                    rows,
                    scenarios,
                    choices,
                    layout,
                }
            },
        )
}

/// A project whose references all lead somewhere: 1 to 3 inputs, 1 to 3 outputs, 1 to 5 rows, something in every choice.
pub(super) fn tidy_project() -> impl Strategy<Value = Project> {
    (1..=3usize, 1..=3usize, 1..=5usize, vec(any::<Index>(), 200), flag()).prop_map(
        |(inputs, outputs, rows, luck, by_hand)| {
            let mut luck = luck.into_iter().cycle();
            let mut draw = |count: usize| luck.next().map_or(0, |index| index.index(count));
            let column = |value: usize| format!("{value:0inputs$b}");
            let mut project = Project::new(
                (1..=inputs).map(|i| format!("x{i}")).collect(),
                (1..=outputs).map(|i| format!("z{i}")).collect(),
            );
            let name = |row: usize| format!("row_{row}");
            for row in 0..rows {
                let mut cells = BTreeMap::new();
                for c in 0..1 << inputs {
                    if draw(3) > 0 {
                        let next = if draw(9) == 0 { "-".into() } else { name(draw(rows)) };
                        let outputs = (0..outputs).map(|_| ['0', '1', '-'][draw(3)]).collect();
                        cells.insert(column(c), CellEntry { next, outputs });
                    }
                }
                project.rows.push(RowEntry { name: name(row), cells });
            }
            project.initial = Some((name(draw(rows)), column(0)));
            let steps = (0..3).map(|c| Step {
                inputs: column(c % (1 << inputs)),
                outputs: "-".repeat(outputs),
                row: (c > 0).then(|| name(draw(rows))),
            });
            project.scenarios.push(Scenario { name: "first".into(), loops: true, steps: steps.collect() });
            project.choices.logic.late = vec![format!("z{}", 1 + draw(outputs))];
            if by_hand {
                project.choices.merging.cover = CoverChoice::ByHand(
                    (0..2).map(|set| (set..rows).step_by(2).map(name).collect()).collect(),
                );
                project.choices.merging.names = vec!["A".into(), "B".into()];
                let codes = [("A".to_owned(), vec!["0".to_owned()]), ("B".to_owned(), vec!["1".to_owned()])];
                project.choices.codes.method = Method::ByHand(codes.into());
            }
            project
        },
    )
}

/// What an edit is made of, before it is known what there is to edit.
pub(super) type Raw = (u8, Index, Index, String);

pub(super) fn raw_edits() -> impl Strategy<Value = Vec<Raw>> {
    let name =
        prop_oneof![select(vec!["p", "q", "r", "s", "row_0", "x1", "z1"]).prop_map(str::to_owned), text(70)];
    vec((0..35u8, any::<Index>(), any::<Index>(), name), 0..25)
}

/// An edit for this project; most of them can be made.
pub(super) fn edit(project: &Project, (kind, a, b, name): Raw) -> Edit {
    let any_row = |index: Index| index.index(project.rows.len().max(1));
    let (row, other) = (any_row(a), any_row(b));
    let any_input = |index: Index| index.index(project.inputs.len().max(1));
    let any_output = |index: Index| index.index(project.outputs.len().max(1));
    let (input, output) = (any_input(a), any_output(a));
    let bits = project.inputs.len();
    let column: String =
        (0..bits).map(|bit| if b.index(1 << 12) >> bit & 1 == 1 { '1' } else { '0' }).collect();
    let row_name = project.rows.get(other).map_or("-".into(), |row| row.name.clone());
    let cell = CellEntry { next: row_name.clone(), outputs: "1".repeat(project.outputs.len()) };
    let method = match a.index(Method::ALL.len() + 1) {
        m if m < Method::ALL.len() => Method::ALL[m].clone(),
        _ => Method::ByHand(BTreeMap::from([(name.clone(), vec!["0".into(), "11".into()])])),
    };
    match kind {
        0 => Edit::SetTitle(name),
        1 => Edit::SetNotes(format!("{name}\n {name}")),
        2 => Edit::SetDiscipline(if row == 0 { Discipline::Single } else { Discipline::Burst }),
        3 => Edit::SetInitial((row > 0).then_some((row_name, column))),
        4 | 5 => Edit::SetCell { row, column, cell: Some(cell) },
        6 => Edit::SetCell { row, column, cell: None },
        7 => Edit::SetCells(vec![(row, column.clone(), Some(cell)), (other, column, None)]),
        8 => Edit::InsertRow { at: row, row: RowEntry { name, cells: BTreeMap::from([(column, cell)]) } },
        9 => Edit::DeleteRow { row },
        10 | 11 => Edit::DuplicateRow { row, name },
        12 => Edit::MoveRow { row, to: other },
        13 | 14 => Edit::RenameRow { row, name },
        15 => Edit::AddInput { at: input, name },
        16 => Edit::RenameInput { input, name },
        17 => Edit::MoveInput { input, to: any_input(b) },
        18 => Edit::RemoveInput { input },
        19 => Edit::AddOutput { at: output, name },
        20 => Edit::RenameOutput { output, name },
        21 => Edit::MoveOutput { output, to: any_output(b) },
        22 => Edit::RemoveOutput { output },
        23 => Edit::SetScenarios(vec![Scenario { name, loops: row == 0, steps: vec![Step::default()] }]),
        24 => Edit::SetOutputStyle(if row == 0 { OutputStyle::PerRow } else { OutputStyle::PerCell }),
        25 => Edit::SetCover(CoverChoice::ByHand(vec![vec![row_name], vec![name]])),
        26 => Edit::SetMergedNames(vec![name]),
        27 => Edit::NameMergedRow { index: row, name },
        28 => Edit::SetMethod(method),
        29 => Edit::SetForm(Form::ALL[a.index(3)]),
        30 => Edit::SetShape(Shape::ALL[a.index(2)]),
        31 => Edit::SetShare(row == 0),
        32 => Edit::SetLate(vec![name]),
        33 => Edit::SetFanIn(a.index(70) as u8),
        _ => Edit::SetDelay(0.0, a.index(9) as f64),
    }
}
