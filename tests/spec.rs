//! What the checks of the specification find, and what table they make of a project without errors.

use std::collections::{BTreeMap, BTreeSet};
use std::time::{Duration, Instant};

use stillgate::base::{Column, Finding, Level, Row, TotalState};
use stillgate::project::{
    self, CellEntry, CoverChoice, Discipline, Project, RowEntry, Scenario, Step, limits,
};
use stillgate::spec::{self, Checked, FlowTable, Spec};

#[path = "spec/random.rs"]
mod random;

/// A project from a few lines: `name | column=next/outputs ..`, the first line being `inputs | outputs | row column`.
fn project(text: &str) -> Project {
    let mut lines = text.lines().map(str::trim).filter(|line| !line.is_empty());
    let head: Vec<&str> = lines.next().expect("a head").split('|').collect();
    let words = |text: &str| text.split_whitespace().map(str::to_owned).collect::<Vec<_>>();
    let mut project = Project::new(words(head[0]), words(head[1]));
    let initial = words(head[2]);
    project.initial = Some((initial[0].clone(), initial[1].clone()));
    for line in lines {
        let (name, cells) = line.split_once('|').expect("a row");
        let cells = cells.split_whitespace().map(|cell| {
            let (column, content) = cell.split_once('=').expect("a cell");
            let (next, outputs) = content.split_once('/').expect("next/outputs");
            (column.to_owned(), CellEntry { next: next.to_owned(), outputs: outputs.to_owned() })
        });
        project.rows.push(RowEntry { name: name.trim().to_owned(), cells: cells.collect() });
    }
    project
}

fn burst(text: &str) -> Project {
    Project { discipline: Discipline::Burst, ..project(text) }
}

/// A transparent latch: q follows d while g is high.
fn latch() -> Project {
    project(
        "d g | q | low0 00
         low0  | 00=low0/0 10=high0/- 01=pass0/-
         high0 | 10=high0/0 00=low0/- 11=pass1/-
         pass0 | 01=pass0/0 00=low0/- 11=pass1/-
         pass1 | 11=pass1/1 01=pass0/- 10=high1/-
         high1 | 10=high1/1 11=pass1/- 00=low1/-
         low1  | 00=low1/1 10=high1/- 01=pass0/-",
    )
}

fn found<'a>(checked: &'a Checked, code: &str) -> Vec<&'a Finding> {
    checked.findings.iter().filter(|finding| finding.code == code).collect()
}

/// The one finding with this code.
fn only<'a>(checked: &'a Checked, code: &str) -> &'a Finding {
    let found = found(checked, code);
    assert_eq!(found.len(), 1, "{code}: {:#?}", checked.findings);
    found[0]
}

fn place(finding: &Finding) -> (Option<&str>, Option<&str>) {
    (finding.at.row.as_deref(), finding.at.column.as_deref())
}

fn spec_of(project: &Project) -> Spec {
    let checked = spec::check(project);
    checked.spec.unwrap_or_else(|| panic!("{:#?}", checked.findings))
}

fn row(table: &FlowTable, name: &str) -> Row {
    table.rows().find(|&row| table.name(row) == name).expect("a row of that name")
}

fn cell(table: &FlowTable, name: &str, column: &str) -> (String, String, bool) {
    let cell = table.cell(row(table, name), Column::parse(column, table.inputs).expect("a column"));
    let next = cell.next.map_or("-".to_owned(), |next| table.name(next).to_owned());
    (next, cell.outputs.text(table.outputs), cell.inner)
}

#[test]
fn a_complete_table_has_nothing_to_complain_about() {
    let checked = spec::check(&latch());
    assert_eq!(checked.findings, []);
    let spec = checked.spec.expect("no error");
    assert_eq!(spec.moves.len(), 12);
    let distances: Vec<(&str, usize)> =
        spec.reachable.iter().map(|(at, distance)| (spec.table.name(at.row), *distance)).collect();
    assert_eq!(distances, [("low0", 0), ("high0", 1), ("pass0", 1), ("pass1", 2), ("high1", 3), ("low1", 4)]);
    assert_eq!(spec.initial, TotalState { row: Row(0), column: Column(0) });
}

type Spoil = fn(&mut Project);

/// Each way to spoil the latch, the code that tells of it, and where.
const SPOILT: &[(&str, Option<&str>, Option<&str>, Spoil)] = &[
    ("no-inputs", None, None, |p| p.inputs.clear()),
    ("no-rows", None, None, |p| p.rows.clear()),
    ("limit-inputs", None, None, |p| p.inputs = (0..30).map(|i| format!("i{i}")).collect()),
    ("limit-outputs", None, None, |p| p.outputs = (0..33).map(|i| format!("o{i}")).collect()),
    ("limit-rows", None, None, |p| p.rows = vec![p.rows[0].clone(); 100_000]),
    ("limit-scenarios", None, None, |p| p.scenarios = vec![Scenario::default(); limits::SCENARIOS + 1]),
    ("limit-steps", None, None, |p| {
        p.scenarios = vec![Scenario { steps: vec![Step::default(); 2000], ..Scenario::default() }];
    }),
    ("bad-signal-name", None, None, |p| p.inputs[0] = "d-in".into()),
    ("bad-signal-name", None, None, |p| p.outputs[0] = String::new()),
    ("reserved-signal-name", None, None, |p| p.inputs[0] = "y1".into()),
    ("reserved-signal-name", None, None, |p| p.outputs[0] = "r12".into()),
    ("duplicate-signal-name", None, None, |p| p.outputs[0] = "D".into()),
    ("bad-row-name", Some("\"<b>\""), None, |p| p.rows[1].name = "<b>".into()),
    ("duplicate-row-name", Some("low0"), None, |p| p.rows[1].name = "low0".into()),
    ("duplicate-row-name", Some("LOW0"), None, |p| p.rows[1].name = "LOW0".into()),
    ("bad-column", Some("low0"), Some("000"), |p| copy_cell(p, 0, "00", "000")),
    ("bad-column", Some("low0"), Some("\"0 \""), |p| copy_cell(p, 0, "00", "0 ")),
    ("bad-outputs", Some("low0"), Some("00"), |p| outputs_of(p, 0, "00", "x")),
    ("bad-outputs", Some("low0"), Some("00"), |p| outputs_of(p, 0, "00", "00")),
    ("bad-outputs", Some("low0"), Some("00"), |p| outputs_of(p, 0, "00", "")),
    ("unknown-next-row", Some("low0"), Some("10"), |p| next_of(p, 0, "10", "nowhere")),
    ("no-initial", None, None, |p| p.initial = None),
    ("unknown-initial-row", None, None, |p| p.initial = Some(("x".into(), "00".into()))),
    ("bad-initial-column", None, None, |p| p.initial = Some(("low0".into(), "0".into()))),
    ("initial-not-stable", Some("low0"), Some("10"), |p| p.initial = Some(("low0".into(), "10".into()))),
    ("initial-not-stable", Some("low0"), Some("11"), |p| p.initial = Some(("low0".into(), "11".into()))),
    ("no-stable-cell", Some("low1"), None, |p| {
        p.rows[5].cells.remove("00");
    }),
    ("dead-end", Some("high1"), Some("00"), |p| {
        p.rows[5].cells.remove("00");
    }),
    ("oscillation", Some("low0"), Some("10"), |p| next_of(p, 1, "10", "low0")),
    ("unknown-late-output", None, None, |p| p.choices.logic.late = vec!["nothing".into()]),
    ("unknown-cover-row", None, None, |p| {
        p.choices.merging.cover = CoverChoice::ByHand(vec![vec!["low0".into(), "nobody".into()]]);
    }),
    ("bad-merged-name", None, None, |p| p.choices.merging.names = vec!["not one".into()]),
    ("bad-merged-name", None, None, |p| p.choices.merging.names = vec!["on".into(), "ON".into()]),
    ("bad-reset-name", None, None, |p| p.choices.gates.reset = Some("G".into())),
    ("bad-reset-name", None, None, |p| p.choices.gates.reset = Some("rst!".into())),
    ("bad-gates", None, None, |p| p.choices.gates.fan_in = 1),
    ("bad-gates", None, None, |p| p.choices.gates.delay = (2.0, 1.0)),
    ("bad-gates", None, None, |p| p.choices.gates.delay = (f64::NAN, 1.0)),
];

fn copy_cell(project: &mut Project, row: usize, from: &str, to: &str) {
    let cell = project.rows[row].cells[from].clone();
    project.rows[row].cells.insert(to.into(), cell);
}

fn outputs_of(project: &mut Project, row: usize, column: &str, outputs: &str) {
    project.rows[row].cells.get_mut(column).expect("a cell").outputs = outputs.into();
}

fn next_of(project: &mut Project, row: usize, column: &str, next: &str) {
    project.rows[row].cells.get_mut(column).expect("a cell").next = next.into();
}

#[test]
fn every_mistake_is_an_error_at_its_place() {
    for (i, &(code, row, column, spoil)) in SPOILT.iter().enumerate() {
        let mut project = latch();
        spoil(&mut project);
        let begun = Instant::now();
        let checked = spec::check(&project);
        assert!(begun.elapsed() < Duration::from_secs(20), "{code} takes too long");
        assert_eq!(checked.spec, None, "{code}");
        let finding = checked.findings.iter().find(|finding| finding.code == code);
        let finding = finding.unwrap_or_else(|| panic!("case {i}, {code}: {:#?}", checked.findings));
        assert_eq!(finding.level, Level::Error, "{code}");
        assert_eq!(place(finding), (row, column), "case {i}, {code}");
    }
}

#[test]
fn several_mistakes_are_reported_together() {
    let mut project = latch();
    project.inputs[0] = "1d".into();
    next_of(&mut project, 0, "10", "nowhere");
    outputs_of(&mut project, 3, "11", "2");
    let checked = spec::check(&project);
    let codes: Vec<&str> = checked.findings.iter().map(|finding| finding.code).collect();
    assert_eq!(codes, ["bad-signal-name", "unknown-next-row", "bad-outputs"]);
}

#[test]
fn a_wrong_case_is_recognised_as_a_slip() {
    let mut project = latch();
    next_of(&mut project, 0, "10", "High0");
    let checked = spec::check(&project);
    assert!(only(&checked, "unknown-next-row").text.ends_with("Did you mean high0?"));
}

#[test]
fn hostile_names_are_escaped_and_shortened() {
    let evil = format!("\u{1b}[2J\n</script>\"{}", "A".repeat(5000));
    let mut project = latch();
    project.inputs[0] = evil.clone();
    project.outputs[0] = evil.clone();
    project.rows[2].name = evil.clone();
    project.rows[3].cells.insert(evil.clone(), CellEntry { next: evil.clone(), outputs: evil.clone() });
    next_of(&mut project, 0, "10", &evil);
    outputs_of(&mut project, 0, "00", &evil);
    project.initial = Some((evil.clone(), evil.clone()));
    project.choices.logic.late = vec![evil.clone()];
    project.choices.gates.reset = Some(evil.clone());
    project.choices.merging.names = vec![evil];
    let checked = spec::check(&project);
    assert!(checked.findings.len() >= 9, "{:#?}", checked.findings);
    for finding in &checked.findings {
        let places = format!("{:?}{:?}", finding.at.row, finding.at.column);
        assert!(finding.text.len() < 400 && places.len() < 200, "{finding:?}");
        for text in
            [Some(&finding.text), finding.at.row.as_ref(), finding.at.column.as_ref()].into_iter().flatten()
        {
            assert!(!text.chars().any(char::is_control), "{text:?}");
        }
    }
}

#[test]
fn an_oscillation_names_its_cycle_once() {
    let checked = spec::check(&project(
        "x | q | a 0
         a | 0=a/0 1=b/-
         b | 0=b/0 1=c/-
         c | 0=c/1 1=d/-
         d | 0=d/1 1=b/-",
    ));
    let finding = only(&checked, "oscillation");
    assert!(finding.text.contains("b -> c -> d -> b"), "{}", finding.text);
    assert_eq!(checked.findings.len(), 1);
}

#[test]
fn chains_are_folded_to_their_last_row() {
    let project = project(
        "x | q | a 0
         a | 0=a/0 1=b/-
         b | 1=c/- 0=b/0
         c | 1=d/- 0=c/1
         d | 1=d/1 0=a/-",
    );
    let checked = spec::check(&project);
    let folded: Vec<_> = found(&checked, "chain-folded").into_iter().map(place).collect();
    assert_eq!(folded, [(Some("a"), Some("1")), (Some("b"), Some("1"))]);
    let spec = checked.spec.expect("no error");
    assert_eq!(cell(&spec.table, "a", "1").0, "d");
    assert_eq!(cell(&spec.given, "a", "1").0, "b");
    assert_eq!(spec.moves.len(), 2);
}

#[test]
fn a_chain_into_the_void_is_one_error_at_its_last_link() {
    let checked = spec::check(&project(
        "x | q | a 0
         a | 0=a/0 1=b/-
         b | 0=b/1 1=c/-
         c | 0=c/1",
    ));
    assert_eq!(place(only(&checked, "dead-end")), (Some("b"), Some("1")));
    assert_eq!(checked.findings.len(), 1);
}

#[test]
fn outputs_that_are_equal_on_both_sides_of_a_move_are_held() {
    let spec = spec_of(&project(
        "x | p q r | a 0
         a | 0=a/011 1=b/---
         b | 1=b/010 0=a/1--",
    ));
    assert_eq!(cell(&spec.table, "a", "1").1, "01-");
    assert_eq!(cell(&spec.table, "b", "0").1, "11-");
    assert_eq!(cell(&spec.given, "b", "0").1, "1--");
}

#[test]
fn an_output_given_against_both_sides_is_a_pulse() {
    let checked = spec::check(&project(
        "x | p q | a 0
         a | 0=a/01 1=b/11
         b | 1=b/00 0=a/--",
    ));
    let finding = only(&checked, "pulse-asked-for");
    assert_eq!(place(finding), (Some("a"), Some("1")));
    assert!(finding.text.contains(": p changes"), "{}", finding.text);
    assert_eq!(checked.findings.len(), 1);
}

#[test]
fn warnings_of_a_single_change_table() {
    let checked = spec::check(&project(
        "x z | q | a 00
         a | 00=a/0 10=b/- 11=b/- 01=-/-
         b | 10=b/- 00=a/- 11=b/1
         c | 00=c/0 11=-/1
         d | 10=d/0 00=d/1 01=d/0",
    ));
    assert!(checked.spec.is_some(), "{:#?}", checked.findings);
    let places = |code| found(&checked, code).into_iter().map(place).collect::<Vec<_>>();
    assert_eq!(places("unreachable-row"), [(Some("c"), None), (Some("d"), None)]);
    assert_eq!(places("cell-never-entered"), [(Some("a"), Some("11")), (Some("c"), Some("11"))]);
    assert_eq!(places("open-stable-output"), [(Some("b"), Some("10"))]);
    assert_eq!(places("row-never-left"), [(Some("c"), None), (Some("d"), None)]);
    assert_eq!(places("open-question"), [(Some("b"), Some("01"))]);
    let levels: Vec<Level> = checked.findings.iter().map(|finding| finding.level).collect();
    assert!(levels.is_sorted());
}

#[test]
fn no_outputs_is_worth_a_warning_only() {
    let checked = spec::check(&project("x | | a 0\n a | 0=a/ 1=b/\n b | 1=b/ 0=a/"));
    assert_eq!(checked.findings.len(), 1);
    assert_eq!(only(&checked, "no-outputs").level, Level::Warning);
    assert!(checked.spec.is_some());
}

#[test]
fn one_row_is_a_table() {
    let checked = spec::check(&project("x | q | a 0\n a | 0=a/0 1=a/1"));
    assert_eq!(checked.findings, []);
    assert_eq!(checked.spec.expect("no error").moves.len(), 2);
    let alone = spec::check(&project("x | q | a 0\n a | 0=a/0"));
    assert_eq!(place(only(&alone, "open-question")), (Some("a"), Some("1")));
    assert_eq!(alone.spec.expect("no error").moves, []);
}

#[test]
fn questions_stand_at_open_cells_and_the_soonest_comes_first() {
    let mut project = project(
        "x z | q | a 00
         far | 11=far/1 01=a/-
         a | 00=a/0 10=b/- 01=a/-
         b | 10=b/1 11=far/-
         void | 10=void/0",
    );
    let checked = spec::check(&project);
    let questions: Vec<_> = found(&checked, "open-question").into_iter().map(place).collect();
    assert_eq!(
        questions,
        [(Some("b"), Some("00")), (Some("a"), Some("11")), (Some("far"), Some("10"))],
        "a rests in 01 too; the row that is never reached is not asked about"
    );
    let spec = checked.spec.as_ref().expect("no error");
    assert_eq!(spec.questions.iter().map(|question| question.distance).collect::<Vec<_>>(), [1, 1, 2]);
    assert!(found(&checked, "open-question")[0].text.contains("what if x falls?"));

    // "Never happens" is written down as a cell with everything open; outputs alone are no answer.
    project.rows[2].cells.insert("00".into(), CellEntry { next: "-".into(), outputs: "-".into() });
    project.rows[0].cells.insert("10".into(), CellEntry { next: "-".into(), outputs: "1".into() });
    let spec = spec_of(&project);
    let asked: Vec<&str> = spec.questions.iter().map(|question| spec.table.name(question.from.row)).collect();
    assert_eq!(asked, ["a", "far"]);
}

#[test]
fn bursts_fill_what_is_on_the_way() {
    let spec = spec_of(&burst(
        "p q r | z w | a 000
         a | 000=a/0- 110=b/-- 011=c/-- 010=-/-1
         b | 110=b/11 000=a/--
         c | 011=c/10 000=a/--",
    ));
    assert_eq!(cell(&spec.table, "a", "100"), ("a".into(), "0-".into(), true));
    assert_eq!(cell(&spec.table, "a", "010"), ("a".into(), "01".into(), true));
    assert_eq!(cell(&spec.table, "a", "001"), ("a".into(), "0-".into(), true));
    assert_eq!(cell(&spec.table, "b", "010"), ("b".into(), "11".into(), true));
    assert_eq!(cell(&spec.table, "a", "101"), ("-".into(), "--".into(), false));
    assert_eq!(cell(&spec.given, "a", "100"), ("-".into(), "--".into(), false));
    assert_eq!(spec.moves.len(), 4);
    assert_eq!(spec.reachable.len(), 3, "the cells on the way are no states");
    let asked: Vec<(String, String)> = spec
        .questions
        .iter()
        .map(|q| (spec.table.name(q.from.row).to_owned(), spec.table.column_text(q.column)))
        .collect();
    let of = |row: &str| -> Vec<&str> {
        asked.iter().filter(|(name, _)| name == row).map(|(_, column)| column.as_str()).collect()
    };
    assert_eq!(of("a"), ["101"], "111 lies beyond both bursts");
    assert_eq!(of("b"), ["111", "101", "011"], "001 lies beyond the burst to 000");
}

#[test]
fn a_burst_past_another_one_is_ambiguous() {
    let text = "p q | z | a 00
         a | 00=a/0 10=b/- 11=c/-
         b | 10=b/0 00=a/-
         c | 11=c/1 00=a/-";
    let checked = spec::check(&burst(text));
    let finding = only(&checked, "ambiguous-burst");
    assert_eq!(place(finding), (Some("a"), Some("11")));
    assert!(
        finding.text.contains("to column 11") && finding.text.contains("pass column 10"),
        "{}",
        finding.text
    );
    // Nothing is ambiguous where one input changes at a time; the cell just cannot be entered.
    let single = spec::check(&project(text));
    assert!(
        found(&single, "cell-never-entered").into_iter().map(place).any(|p| p == (Some("a"), Some("11")))
    );
}

#[test]
fn a_burst_past_another_output_is_ambiguous() {
    let checked = spec::check(&burst(
        "p q | z | a 00
         a | 00=a/0 01=-/1 11=c/-
         c | 11=c/1 00=a/-",
    ));
    assert!(only(&checked, "ambiguous-burst").text.contains("pass column 01, whose outputs differ"));
}

#[test]
fn an_unclean_way_is_no_error_where_a_nearer_start_is_clean() {
    let spec = spec_of(&burst(
        "p q | z | a 00
         a | 00=a/0 01=a/1 11=c/-
         c | 11=c/1 00=a/-",
    ));
    let from: Vec<String> = spec
        .moves
        .iter()
        .filter(|m| spec.table.name(m.to) == "c")
        .map(|m| spec.table.column_text(m.from.column))
        .collect();
    assert_eq!(from, ["01"]);
}

#[test]
fn stable_cells_inside_a_burst_are_inner_and_still_starts() {
    let spec = spec_of(&burst(
        "p q | z | a 00
         a | 00=a/0 01=a/- 11=c/-
         c | 11=c/1 00=a/-",
    ));
    assert_eq!(cell(&spec.table, "a", "01"), ("a".into(), "0".into(), true));
    let starts = spec.moves.iter().filter(|m| spec.table.name(m.to) == "c").count();
    assert_eq!(starts, 2);
}

#[test]
fn two_bursts_that_need_different_outputs_on_the_way_are_ambiguous() {
    let checked = spec::check(&burst(
        "p q | z | a 00
         a | 00=a/0 11=a/1",
    ));
    let places: Vec<_> = found(&checked, "ambiguous-burst").into_iter().map(place).collect();
    assert!(places.contains(&(Some("a"), Some("01"))) && places.contains(&(Some("a"), Some("10"))));
    assert_eq!(checked.spec, None);
}

fn steps(text: &str) -> Vec<Step> {
    let step = |word: &str| {
        let mut parts = word.split('/').map(str::to_owned);
        Step {
            inputs: parts.next().unwrap_or_default(),
            outputs: parts.next().unwrap_or_default(),
            row: parts.next(),
        }
    };
    text.split_whitespace().map(step).collect()
}

fn played(text: &str, loops: bool) -> Checked {
    let scenario = Scenario { name: "fill".into(), loops, steps: steps(text) };
    spec::check(&Project { scenarios: vec![Scenario::default(), scenario], ..latch() })
}

#[test]
fn scenarios_that_the_table_follows_are_silent() {
    for (text, loops) in [
        ("00/0 10/0 11/1 10/1 00/1 01/0", true),
        ("00/0/low0 01/0/pass0 11/1/pass1", false),
        ("00/1/low1 10/1 00/1/low1", true),
        ("10/-/high1", true),
    ] {
        let checked = played(text, loops);
        assert_eq!(checked.findings, [], "{text}");
    }
}

#[test]
fn scenarios_that_part_from_the_table_name_the_step() {
    for (text, loops, code, says) in [
        ("00/1", false, "scenario-disagrees", "step 1: outputs 1 are expected, but the table gives 0"),
        ("10/0", false, "scenario-disagrees", "step 1: it starts in row low0, column 10"),
        ("00/0 10/0 11/0", false, "scenario-disagrees", "step 3: outputs 0 are expected"),
        ("00/0 10/0/low0", false, "scenario-disagrees", "step 2: row low0 is expected"),
        (
            "00/0 10/0 11/1 10/1",
            true,
            "scenario-disagrees",
            "step 4: the scenario is to lead back to row low0",
        ),
        ("00/0 11/1", false, "scenario-malformed", "step 2: the inputs change from 00 to 11"),
        ("00/0 00/0", false, "scenario-malformed", "step 2: the inputs stay 00"),
        ("00/0 2/0", false, "scenario-malformed", "step 2: the inputs 2 are not"),
        ("00/0 10/q", false, "scenario-malformed", "step 2: the outputs q are not"),
        ("00/0 10/0/nobody", false, "scenario-malformed", "step 2: there is no row nobody"),
    ] {
        let checked = played(text, loops);
        assert_eq!(checked.spec, None, "{text}");
        let finding = only(&checked, code);
        assert!(
            finding.text.contains("Scenario fill") && finding.text.contains(says),
            "{text}: {}",
            finding.text
        );
    }
}

#[test]
fn scenarios_may_hold_bursts_and_meet_open_cells() {
    let text = "p q | z | a 00
         a | 00=a/0 11=c/-
         c | 11=c/1 00=a/-";
    let play = |text: &str, steps_text: &str| {
        let scenario = Scenario { steps: steps(steps_text), ..Scenario::default() };
        spec::check(&Project { scenarios: vec![scenario], ..burst(text) })
    };
    assert!(found(&play(text, "00/0 11/1 00/0"), "scenario-disagrees").is_empty());
    let half = play(text, "00/0 10/0");
    assert!(only(&half, "scenario-disagrees").text.contains("in the middle of a burst"));
    let open = play(&text.replace("11=c/- ", "").replace("11=c/-", "10=a/0"), "00/0 11/1");
    assert!(only(&open, "scenario-disagrees").text.contains("which the table leaves open"));
}

#[test]
fn findings_of_one_kind_are_counted_beyond_the_first_ten_thousand() {
    let mut project = project("a | q | r0 0");
    for i in 0..1000 {
        let cells = (0..20).map(|j| (format!("{j:02}"), CellEntry { next: "-".into(), outputs: "-".into() }));
        project.rows.push(RowEntry { name: format!("r{i}"), cells: cells.collect() });
    }
    let checked = spec::check(&project);
    assert_eq!(found(&checked, "bad-column").len(), 10_000);
    assert!(only(&checked, "findings-cut").text.starts_with("10000 more findings of the kind bad-column"));
}

/// A ring of `rows` rows over `inputs` inputs, whose columns walk through all input combinations.
fn ring(rows: usize, inputs: usize, discipline: Discipline) -> Project {
    let names: Vec<String> = (0..inputs).map(|i| format!("in{i}")).collect();
    let mut project = Project::new(names, vec!["q".into(), "w".into()]);
    project.discipline = discipline;
    let gray = |i: usize| Column((i ^ i >> 1) as u16 & ((1 << inputs) - 1));
    let column = |i: usize| gray(i).text(inputs);
    for i in 0..rows {
        let mut cells = BTreeMap::new();
        cells.insert(column(i), CellEntry { next: format!("row{i}"), outputs: format!("{}1", i & 1) });
        let next = (i + 1) % rows;
        cells.insert(column(next), CellEntry { next: format!("row{next}"), outputs: "--".into() });
        project.rows.push(RowEntry { name: format!("row{i}"), cells });
    }
    project.initial = Some(("row0".into(), column(0)));
    project
}

#[test]
fn checking_a_large_table_does_not_explode() {
    for discipline in [Discipline::Single, Discipline::Burst] {
        let project = ring(512, 10, discipline);
        let begun = Instant::now();
        let checked = spec::check(&project);
        let took = begun.elapsed();
        assert!(took < Duration::from_secs(20), "{discipline:?}: {took:?}");
        let spec = checked.spec.expect("no error");
        assert_eq!((spec.moves.len(), spec.reachable.len()), (512, 512));
    }
}

#[test]
fn too_many_moves_are_refused_quickly() {
    let mut project = Project::new((0..10).map(|i| format!("in{i}")).collect(), vec![]);
    project.discipline = Discipline::Burst;
    let cells = |name: &str| {
        let stay = CellEntry { next: name.to_owned(), outputs: String::new() };
        (0..1024u16).map(|c| (Column(c).text(10), stay.clone())).collect::<BTreeMap<_, _>>()
    };
    for i in 0..600 {
        let name = format!("row{i}");
        project.rows.push(RowEntry { cells: cells(&name), name });
    }
    project.initial = Some(("row0".into(), "0".repeat(10)));
    let begun = Instant::now();
    let checked = spec::check(&project);
    assert!(begun.elapsed() < Duration::from_secs(20));
    only(&checked, "limit-moves");
    assert_eq!(checked.spec, None);
}

#[test]
fn every_code_is_documented_and_every_documented_code_is_used() {
    let room = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("src/spec");
    let mut used = BTreeSet::new();
    let mut documented = BTreeSet::new();
    for entry in std::fs::read_dir(room).expect("the room") {
        let source = std::fs::read_to_string(entry.expect("a file").path()).expect("text");
        for line in source.lines().filter(|line| line.starts_with("//! | `")) {
            let codes = line.split('|').nth(1).expect("a first column");
            documented.extend(codes.split('`').skip(1).step_by(2).map(str::to_owned));
        }
        let code = source.lines().take_while(|line| !line.contains("cfg(test)"));
        used.extend(
            code.filter(|line| !line.trim_start().starts_with("//")).flat_map(quoted).map(str::to_owned),
        );
    }
    assert!(documented.len() > 30);
    assert_eq!(documented, used);
}

/// Every string in a line that looks like a code: lower-case words joined by hyphens, or the one without a hyphen.
fn quoted(line: &str) -> impl Iterator<Item = &str> {
    let word = |part: &str| !part.is_empty() && part.bytes().all(|b| b.is_ascii_lowercase());
    let code = move |text: &&str| *text == "oscillation" || text.contains('-') && text.split('-').all(word);
    line.split('"').skip(1).step_by(2).filter(code)
}

#[test]
fn the_samples_have_no_error_no_warning_and_hardly_a_question() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("projects");
    let mut samples: Vec<_> =
        std::fs::read_dir(folder).expect("samples").flatten().map(|entry| entry.path()).collect();
    samples.sort();
    assert!(samples.len() >= 11);
    let mut played = 0;
    for path in samples {
        let bytes = std::fs::read(&path).expect("a file");
        let project = project::read(&bytes).unwrap_or_else(|error| panic!("{path:?}: {error:?}"));
        assert_eq!(project::write(&project).as_bytes(), bytes, "{path:?} is not as the program writes it");
        assert!(project.notes.len() > 200 && !project.title.is_empty(), "{path:?} tells no story");
        played += usize::from(!project.scenarios.is_empty());
        let checked = spec::check(&project);
        let questions = found(&checked, "open-question").len();
        assert!(questions <= 1 && checked.findings.len() == questions, "{path:?}: {:#?}", checked.findings);
    }
    assert!(played >= 3);
}
