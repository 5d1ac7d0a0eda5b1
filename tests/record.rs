//! The record: every field of schema 1 is there, has its type and its length, and names only what exists.

use std::collections::BTreeSet;

use serde_json::Value;
use stillgate::design::{self, Design, Settings};
use stillgate::handoff;
use stillgate::project::{self, Discipline, Form, Method, OutputStyle, Project, Shape};

/// The gated latch of the textbooks, in its six primitive rows.
const LATCH: &str = r#"(
    format: 1,
    title: "Gated latch",
    notes: "",
    inputs: ["D", "G"],
    outputs: ["Q"],
    discipline: Single,
    initial: ("shut0", "00"),
    rows: [
        (name: "track0", cells: {"01": ("track0", "0"), "11": ("track1", "-"), "00": ("shut0", "-")}),
        (name: "track1", cells: {"11": ("track1", "1"), "01": ("track0", "-"), "10": ("held1", "-")}),
        (name: "shut0", cells: {"00": ("shut0", "0"), "01": ("track0", "-"), "10": ("held0", "-")}),
        (name: "held0", cells: {"10": ("held0", "0"), "00": ("shut0", "-"), "11": ("track1", "-")}),
        (name: "held1", cells: {"10": ("held1", "1"), "11": ("track1", "-"), "00": ("shut1", "-")}),
        (name: "shut1", cells: {"00": ("shut1", "1"), "10": ("held1", "-"), "01": ("track0", "-")}),
    ],
)"#;

/// Divides by two: an essential hazard in every stable total state.
const DIVIDER: &str = r#"(
    format: 1,
    title: "Divide by two",
    inputs: ["x"],
    outputs: ["z"],
    discipline: Single,
    initial: ("low_even", "0"),
    rows: [
        (name: "low_even", cells: {"0": ("low_even", "0"), "1": ("high_odd", "-")}),
        (name: "high_odd", cells: {"1": ("high_odd", "1"), "0": ("low_odd", "-")}),
        (name: "low_odd", cells: {"0": ("low_odd", "1"), "1": ("high_even", "-")}),
        (name: "high_even", cells: {"1": ("high_even", "0"), "0": ("low_even", "-")}),
    ],
)"#;

/// Two inputs that meet in a burst (a C-element).
const RENDEZVOUS: &str = r#"(
    format: 1,
    title: "Rendezvous",
    inputs: ["a", "b"],
    outputs: ["c"],
    discipline: Burst,
    initial: ("idle", "00"),
    rows: [
        (name: "idle", cells: {"00": ("idle", "0"), "11": ("met", "-")}),
        (name: "met", cells: {"11": ("met", "1"), "00": ("idle", "-")}),
    ],
)"#;

fn project(text: &str) -> Project {
    project::read(text.as_bytes()).expect("the sample reads")
}

fn derived(project: &Project) -> (Design, Value) {
    let design = design::derive(project, &Settings::default());
    let text = handoff::record(project, &design);
    assert!(text.ends_with("}\n") && !text.ends_with("\n\n"));
    assert_eq!(text, handoff::record(project, &design), "the same design gives the same bytes");
    (design, serde_json::from_str(&text).expect("the record is JSON"))
}

fn list<'v>(value: &'v Value, what: &str) -> &'v Vec<Value> {
    value[what].as_array().unwrap_or_else(|| panic!("{what} is no list: {value}"))
}

fn strings(value: &Value) -> Vec<&str> {
    let items = value.as_array().unwrap_or_else(|| panic!("no list: {value}"));
    items.iter().map(|v| v.as_str().unwrap_or_else(|| panic!("no string: {v}"))).collect()
}

fn string<'v>(value: &'v Value, what: &str) -> &'v str {
    value[what].as_str().unwrap_or_else(|| panic!("{what} is no string: {value}"))
}

fn number(value: &Value, what: &str) -> usize {
    value[what].as_u64().unwrap_or_else(|| panic!("{what} is no number: {value}")) as usize
}

fn truth(value: &Value, what: &str) -> bool {
    value[what].as_bool().unwrap_or_else(|| panic!("{what} is no truth value: {value}"))
}

fn of(text: &str, width: usize, letters: &str) {
    assert!(text.len() == width && text.chars().all(|c| letters.contains(c)), "{text:?}, width {width}");
}

/// Holds a record against its own names and lengths.
fn check(project: &Project, design: &Design, record: &Value) {
    let fields: Vec<&str> = record.as_object().expect("an object").keys().map(String::as_str).collect();
    assert_eq!(
        fields,
        [
            "schema",
            "title",
            "inputs",
            "outputs",
            "discipline",
            "findings",
            "merging",
            "codes",
            "equations",
            "proof",
            "cost"
        ]
    );
    assert_eq!(record["schema"], 1);
    assert_eq!(string(record, "title"), project.title);
    assert_eq!(strings(&record["inputs"]), project.inputs);
    assert_eq!(strings(&record["outputs"]), project.outputs);
    assert!(["single", "burst"].contains(&string(record, "discipline")));
    for finding in list(record, "findings") {
        assert!(["error", "warning", "question", "note"].contains(&string(finding, "level")));
        assert!(!string(finding, "code").is_empty() && !string(finding, "text").is_empty());
        assert!(finding["at"].is_object());
    }
    if record["merging"].is_null() {
        assert!(record["codes"].is_null());
        return;
    }
    let rows = check_merging(project, record);
    if record["codes"].is_null() {
        assert!(record["equations"].is_null());
        return;
    }
    let bits = check_codes(project, record, &rows);
    if record["equations"].is_null() {
        assert!(record["proof"].is_null());
        return;
    }
    check_equations(project, record, &rows, bits);
    if !record["proof"].is_null() {
        check_proof(project, record, &rows, bits);
        assert_eq!(design.proof.as_ref().map(|p| p.conforms()), Some(truth(&record["proof"], "conforms")));
    }
}

fn check_merging(project: &Project, record: &Value) -> BTreeSet<String> {
    let merging = &record["merging"];
    let primitive: Vec<&str> = project.rows.iter().map(|r| r.name.as_str()).collect();
    let known = |names: &[&str]| assert!(names.iter().all(|n| primitive.contains(n)), "{names:?}");
    let inputs = project.inputs.len();
    let pairs = list(merging, "pairs");
    assert_eq!(pairs.len(), primitive.len() * (primitive.len() - 1) / 2);
    let mut struck = BTreeSet::new();
    for pair in pairs {
        let rows = strings(&pair["rows"]);
        assert_eq!(rows.len(), 2);
        known(&rows);
        match string(pair, "verdict") {
            "compatible" => assert!(pair.get("conflict").is_none() && pair.get("pass").is_none()),
            "conflict" => {
                let conflict = &pair["conflict"];
                assert!(strings(&record["outputs"]).contains(&string(conflict, "output")));
                if !conflict["column"].is_null() {
                    of(string(conflict, "column"), inputs, "01");
                }
                struck.insert(rows.clone());
            }
            "struck" => {
                known(&strings(&pair["struck_by"]));
                assert!(number(pair, "pass") >= 1);
                assert!(list(pair, "implies").contains(&pair["struck_by"]));
                struck.insert(rows.clone());
            }
            other => panic!("verdict {other}"),
        }
        if string(pair, "verdict") != "conflict" {
            list(pair, "implies").iter().for_each(|p| known(&strings(p)));
        }
    }
    for pair in pairs.iter().filter(|p| p["verdict"] == "struck") {
        let by: Vec<&str> = strings(&pair["struck_by"]);
        assert!(struck.contains(&by), "{by:?} struck {pair}, but stands itself");
    }
    list(merging, "maximal_compatibles").iter().for_each(|set| known(&strings(set)));
    let cover = list(merging, "cover");
    let covered: BTreeSet<&str> = cover.iter().flat_map(strings).collect();
    assert_eq!(covered.len(), primitive.len(), "every row is in the cover");
    if truth(merging, "proved") {
        assert_eq!(number(merging, "lower_bound"), cover.len());
    }
    let rows = list(merging, "rows");
    assert_eq!(rows.len(), cover.len());
    let names: BTreeSet<String> = rows.iter().map(|r| string(r, "name").to_owned()).collect();
    assert_eq!(names.len(), rows.len());
    for (row, set) in rows.iter().zip(cover) {
        assert_eq!(row["members"], *set);
        for (column, cell) in row["cells"].as_object().expect("cells are an object") {
            of(column, inputs, "01");
            let next = string(cell, "next");
            assert!(next == "-" || names.contains(next), "{next}");
            of(string(cell, "outputs"), project.outputs.len(), "01-");
        }
    }
    assert!(names.contains(string(&merging["initial"], "row")));
    of(string(&merging["initial"], "column"), inputs, "01");
    names
}

/// Returns the number of state variables.
fn check_codes(project: &Project, record: &Value, rows: &BTreeSet<String>) -> usize {
    let codes = &record["codes"];
    let bits = strings(&codes["bits"]);
    assert!(bits.iter().enumerate().all(|(i, name)| *name == format!("y{}", i + 1)));
    let width = bits.len();
    let by_row = codes["codes"].as_object().expect("codes are an object");
    assert_eq!(by_row.keys().cloned().collect::<BTreeSet<_>>(), *rows);
    let mut used = BTreeSet::new();
    for code in by_row.values().flat_map(strings) {
        of(code, width, "01");
        assert!(used.insert(code), "{code} has two owners");
    }
    for (name, code) in codes["spare"].as_object().expect("spare is an object") {
        assert!(name.starts_with('P'));
        let code = code.as_str().expect("a code");
        of(code, width, "01");
        assert!(used.insert(code), "spare {code} has two owners");
    }
    truth(codes, "proved");
    for moved in list(codes, "moves") {
        let path = strings(&moved["path"]);
        of(string(moved, "column"), project.inputs.len(), "01");
        path.iter().for_each(|c| of(c, width, "01"));
        let owner = |row: &str, code: &str| strings(&by_row[row]).contains(&code);
        assert!(owner(string(moved, "from"), path[0]), "{moved}");
        assert!(owner(string(moved, "to"), path[path.len() - 1]), "{moved}");
    }
    assert!(list(codes, "critical_races").is_empty());
    number(codes, "noncritical_races");
    assert!(list(codes, "moves").iter().all(|m| list(m, "path").len() <= number(codes, "longest_path") + 1));
    let initial = string(&record["merging"]["initial"], "row");
    assert!(strings(&by_row[initial]).contains(&string(codes, "initial")));
    width
}

fn check_equations(project: &Project, record: &Value, rows: &BTreeSet<String>, bits: usize) {
    let equations = &record["equations"];
    let variables = strings(&equations["variables"]);
    assert_eq!(variables.len(), project.inputs.len() + bits);
    assert_eq!(variables[..project.inputs.len()], project.inputs);
    let functions = list(equations, "functions");
    let names: Vec<&str> = functions.iter().map(|f| string(f, "name")).collect();
    let form = string(equations, "form");
    for i in 1..=bits {
        let excitations: &[String] = &match form {
            "feedback" => vec![format!("Y{i}")],
            _ => vec![format!("S{i}"), format!("R{i}")],
        };
        assert!(excitations.iter().all(|n| names.contains(&n.as_str())), "{names:?}");
    }
    assert!(project.outputs.iter().all(|z| names.contains(&z.as_str())), "{names:?}");
    for function in functions {
        let products = strings(&function["products"]);
        products.iter().for_each(|p| of(p, variables.len(), "01-"));
        let literals = products.iter().flat_map(|p| p.chars()).filter(|&c| c != '-').count();
        assert_eq!(number(function, "literals"), literals);
        truth(function, "proved");
        let reasons = list(function, "reasons");
        assert_eq!(reasons.len(), products.len());
        assert!(reasons.iter().all(|r| !list(r, "texts").is_empty()));
    }
    for kind in ["essential_hazards", "burst_essential_hazards", "implementation_hazards"] {
        for hazard in list(equations, kind) {
            assert!(rows.contains(string(hazard, "row")));
            of(string(hazard, "column"), project.inputs.len(), "01");
            if kind == "essential_hazards" {
                assert!(project.inputs.iter().any(|x| x == string(hazard, "input")));
            }
        }
    }
    list(equations, "clashes");
}

fn check_proof(project: &Project, record: &Value, rows: &BTreeSet<String>, bits: usize) {
    let proof = &record["proof"];
    assert!(number(proof, "moves_checked") > 0 || rows.len() == 1);
    for hazard in list(proof, "hazards") {
        assert!(rows.contains(string(hazard, "row")));
    }
    let variables = strings(&record["codes"]["bits"]);
    assert!(strings(&proof["needs_slow_feedback"]).iter().all(|y| variables.contains(y)));
    for trap in list(proof, "power_up_traps") {
        of(string(trap, "code"), bits, "01");
        of(string(trap, "column"), project.inputs.len(), "01");
    }
    for figure in ["literals", "gates", "transistors", "levels"] {
        number(&record["cost"], figure);
    }
}

#[test]
fn every_method_form_and_shape_fills_the_record() {
    for text in [LATCH, DIVIDER, RENDEZVOUS] {
        for method in Method::ALL {
            for form in Form::ALL {
                for shape in Shape::ALL {
                    let mut project = project(text);
                    project.choices.codes.method = method.clone();
                    project.choices.logic.form = form;
                    project.choices.logic.shape = shape;
                    let (design, record) = derived(&project);
                    check(&project, &design, &record);
                    if !record["codes"].is_null() {
                        assert_eq!(string(&record["codes"], "method"), method.word());
                    }
                    if !record["equations"].is_null() {
                        assert_eq!(string(&record["equations"], "form"), form.word());
                        assert_eq!(string(&record["equations"], "shape"), shape.word());
                    }
                }
            }
        }
    }
}

#[test]
fn the_latch_in_figures() {
    let (design, record) = derived(&project(LATCH));
    assert!(design.proved());
    assert_eq!(list(&record["merging"], "cover").len(), 2);
    assert_eq!(number(&record["merging"], "lower_bound"), 2);
    let next = &record["equations"]["functions"][0];
    assert_eq!(string(next, "name"), "Y1");
    let products: BTreeSet<&str> = strings(&next["products"]).into_iter().collect();
    let dual: BTreeSet<&str> = ["11-", "1-1", "-01"].into();
    let complement: BTreeSet<&str> = ["01-", "0-1", "-01"].into();
    assert!(products == dual || products == complement, "{products:?}");
    let reasons = list(next, "reasons");
    assert_eq!(reasons.iter().filter(|r| truth(r, "hazard_only")).count(), 1);
}

#[test]
fn the_divider_has_essential_hazards_and_a_remedy() {
    let mut project = project(DIVIDER);
    project.choices.codes.method = Method::SharedRow;
    let (_, record) = derived(&project);
    assert_eq!(list(&record["equations"], "essential_hazards").len(), 4);
    assert!(!list(&record["proof"], "needs_slow_feedback").is_empty());
    assert!(list(&record, "findings").iter().any(|f| f["code"] == "essential-hazard"));
}

#[test]
fn outputs_that_belong_to_rows_conflict_without_a_column() {
    let mut project = project(LATCH);
    project.choices.merging.outputs = OutputStyle::PerRow;
    let (design, record) = derived(&project);
    check(&project, &design, &record);
    let pairs = list(&record["merging"], "pairs");
    assert!(pairs.iter().any(|p| p["verdict"] == "conflict" && p["conflict"]["column"].is_null()));
}

#[test]
fn a_stage_that_cannot_run_is_null() {
    let mut project = project(LATCH);
    project.initial = None;
    let (design, record) = derived(&project);
    check(&project, &design, &record);
    assert!(!design.proved());
    for stage in ["merging", "codes", "equations", "proof", "cost"] {
        assert!(record[stage].is_null(), "{stage}");
    }
    assert!(list(&record, "findings").iter().any(|f| f["level"] == "error"));
}

#[test]
fn a_design_of_one_row_has_an_empty_code() {
    let text = r#"(format: 1, title: "Gate", inputs: ["a"], outputs: ["z"], discipline: Single, initial: ("off", "0"), rows: [
        (name: "off", cells: {"0": ("off", "0"), "1": ("on", "-")}),
        (name: "on", cells: {"1": ("on", "1"), "0": ("off", "-")}),
    ])"#;
    let project = project(text);
    let (design, record) = derived(&project);
    check(&project, &design, &record);
    assert!(design.proved());
    assert!(list(&record["codes"], "bits").is_empty());
    assert_eq!(record["codes"]["codes"]["A"], serde_json::json!([""]));
    assert_eq!(record["codes"]["initial"], "");
    assert_eq!(strings(&record["equations"]["functions"][0]["products"]), ["1"]);
}

#[test]
fn hostile_text_is_escaped_and_changes_no_line() {
    let mut project = project(LATCH);
    project.title = "\"},\n{\"schema\": 2 <script>\u{202e}\\".to_owned();
    project.rows[0].name = "a\"\n/../<b>".to_owned();
    let (design, record) = derived(&project);
    assert_eq!(string(&record, "title"), project.title);
    assert!(record["merging"].is_null(), "such a row name is refused");
    check(&project, &design, &record);
    let plain_title = { Project { title: "t".to_owned(), ..project.clone() } };
    let lines = |p: &Project| handoff::record(p, &design).lines().count();
    assert_eq!(lines(&project), lines(&plain_title));
}

#[test]
fn the_samples_fill_the_record() {
    let samples =
        std::fs::read_dir(concat!(env!("CARGO_MANIFEST_DIR"), "/projects")).expect("projects/ is there");
    let mut seen = 0;
    for entry in
        samples.map(|e| e.expect("readable").path()).filter(|p| p.extension().is_some_and(|e| e == "ron"))
    {
        let project = project::read(&std::fs::read(&entry).expect("readable")).expect("the sample reads");
        let (design, record) = derived(&project);
        check(&project, &design, &record);
        let refused = record["codes"].is_null() && design.has_error();
        assert!(design.proved() || refused, "{}: {:?}", entry.display(), design.findings);
        assert_eq!(string(&record, "discipline") == "burst", project.discipline == Discipline::Burst);
        seen += 1;
    }
    assert!(seen > 0, "no sample was found");
}
