//! The project file: what is saved is what was opened, and what cannot be opened says where, why, and what to do.

use std::time::{Duration, Instant};

use stillgate::project::{
    CellEntry, CoverChoice, Discipline, Method, Project, ReadError, RowEntry, fits, limits, read, write,
};

const PUMP: &str = include_str!("data/project/pump.ron");
const EVERYTHING: &str = include_str!("data/project/everything.ron");
const BY_HAND: &str = include_str!("data/project/by_hand.ron");

/// The error of a file that must be refused without a cost that explodes: the bound is no measurement, machines are shared.
fn refused(bytes: &[u8]) -> ReadError {
    let start = Instant::now();
    let error = read(bytes).expect_err("must be refused");
    assert!(start.elapsed() < Duration::from_secs(20), "took {:?}: {error}", start.elapsed());
    assert!(error.text.len() < 400, "too long to read: {error}");
    error
}

/// Stands in a text of these tests where the error is expected; it is no part of the file.
const HERE: char = '¶';

/// Checks that a file is refused at the mark, with each of these words.
#[track_caller]
fn refuse(marked: impl AsRef<str>, words: &[&str]) {
    let marked = marked.as_ref();
    let (before, after) = marked.split_once(HERE).expect("a mark");
    refuse_bytes(before, &[before.as_bytes(), after.as_bytes()].concat(), words);
}

/// The same for bytes that need not be text; `before` is what stands before the error.
#[track_caller]
fn refuse_bytes(before: &str, bytes: &[u8], words: &[&str]) {
    let error = refused(bytes);
    let line = 1 + before.matches('\n').count();
    let column = 1 + before.rsplit('\n').next().map_or(0, |last| last.chars().count());
    assert_eq!((error.line, error.column), (line, column), "{error}");
    for word in words {
        assert!(error.text.contains(word), "{word:?} is not in: {error}");
    }
}

/// A sound file with one part of it replaced.
#[track_caller]
fn pump_with(old: &str, new: &str) -> String {
    assert!(PUMP.contains(old), "{old}");
    PUMP.replacen(old, new, 1)
}

#[test]
fn saving_what_was_opened_gives_the_same_bytes() {
    for text in [PUMP, EVERYTHING] {
        let project = read(text.as_bytes()).expect("sound");
        assert_eq!(write(&project), text);
        assert_eq!(fits(&project), Ok(()));
    }
}

#[test]
fn every_value_of_the_file_arrives() {
    let project = read(EVERYTHING.as_bytes()).expect("sound");
    assert_eq!(project.title, "Every field \"set\" \\ used");
    assert!(project.notes.ends_with("lost when the file is read again.\n\n    A line that begins with blanks.\tAfter a tab. 水位 é\u{200e}.\n"));
    assert_eq!(project.discipline, Discipline::Burst);
    assert_eq!(project.initial, Some(("idle".into(), "000".into())));
    assert_eq!(project.rows[0].cells["100"].outputs, "0-");
    assert_eq!(project.scenarios[1].steps[3].row.as_deref(), Some("another_name_that_is_long"));
    assert!(project.scenarios[1].loops && !project.scenarios[0].loops);
    let CoverChoice::ByHand(sets) = &project.choices.merging.cover else { panic!("by hand") };
    assert_eq!(sets[2], ["idle", "a_name_that_is_long"]);
    let Method::ByHand(codes) = &project.choices.codes.method else { panic!("by hand") };
    assert_eq!(codes["Rest"], ["00", "11"]);
    assert_eq!(project.choices.gates.delay, (1e-7, 0.25));
    assert_eq!(project.choices.gates.reset.as_deref(), Some("clear"));
    assert_eq!(project.layout.station, "Codes");
}

#[test]
fn a_file_by_hand_may_be_loose() {
    // Comments, any order of fields and columns, names in front of brackets, defaults spelled out or left out.
    let project = read(BY_HAND.as_bytes()).expect("loose, but sound");
    assert_eq!(project.initial, None);
    assert_eq!(project.discipline, Discipline::Single);
    assert_eq!(project.rows[0].cells.keys().collect::<Vec<_>>(), ["0", "1"]);
    assert_eq!(project.choices, Project::new(vec![], vec![]).choices);
    let canonical = write(&project);
    assert_eq!(read(canonical.as_bytes()).as_ref(), Ok(&project));
    assert_eq!(write(&read(canonical.as_bytes()).expect("own text")), canonical);
    let marked = [b"\xef\xbb\xbf", BY_HAND.as_bytes()].concat();
    assert_eq!(read(&marked), Ok(project));
}

#[test]
fn what_is_merely_wrong_opens_so_that_it_can_be_mended() {
    for (old, new) in [
        ("(\"rising\", \"-\")", "(\"nowhere\", \"-\")"),
        ("\"10\": (\"rising\", \"-\")", "\"1012x\": (\"rising\", \"0101\")"),
        ("name: \"dry\"", "name: \"../<b>\\n\\\"\""),
        ("name: \"dry\"", "name: \"rising\""),
        ("name: \"dry\"", "name: \"\""),
        ("initial: (\"dry\", \"00\")", "initial: (\"gone\", \"x\")"),
        ("[\"low\", \"high\"]", "[\"low\", \"low\"]"),
    ] {
        let text = pump_with(old, new);
        let project = read(text.as_bytes()).expect("opens");
        assert_eq!(read(write(&project).as_bytes()), Ok(project));
    }
}

#[test]
fn a_text_that_is_cut_off_is_refused_at_its_end() {
    refuse("¶", &["ends here", "whole copy"]);
    let until = |place: &str| PUMP[..PUMP.find(place).expect("there")].to_owned();
    refuse(until("(name: \"full\"") + "¶", &["ends here", "close what is still open"]);
    refuse(until("discipline") + "¶", &["ends here"]);
    refuse(PUMP[..PUMP.len() - 2].to_owned() + "¶", &["ends here"]);
    refuse(until("pump with").replace("\"Sump", "\"¶Sump"), &["no end", "double quote"]);
    for cut in (0..PUMP.len() - 2).filter(|&cut| PUMP.is_char_boundary(cut)) {
        refused(&PUMP.as_bytes()[..cut]);
    }
}

#[test]
fn the_format_is_needed_and_must_be_known() {
    refuse(pump_with("format: 1,", "format: ¶2,"), &["format 2", "newer"]);
    refuse(pump_with("format: 1,", "format: ¶0,"), &["no format 0", "`format: 1`"]);
    refuse(pump_with("format: 1,", "format: ¶\"1\","), &["whole number"]);
    refuse(pump_with("format: 1,", "format: ¶99999999999999999999999,"), &["too large"]);
    refuse(
        pump_with("    format: 1,\n", "").replace("\n)", "\n¶)"),
        &["`format` is missing", "`format: 1,`"],
    );
    // The unknown field of a newer format is not what the user is told of.
    refuse(pump_with("format: 1,", "format: ¶7, colour: 3,"), &["newer"]);
}

#[test]
fn fields_that_do_not_exist_are_refused() {
    refuse(pump_with("notes: \"\"", "¶remarks: \"\""), &["no field `remarks`", "remove it", "`notes`"]);
    refuse(pump_with("logic: (form", "logic: (¶from"), &["no field `from`", "`form`", "`late`"]);
    refuse(pump_with("(name: \"dry\",", "(name: \"dry\", ¶colour: 3,"), &["no field `colour`", "`cells`"]);
    refuse(pump_with("form: SetReset", "form: ¶Reset"), &["`Reset` cannot be chosen", "`SetReset`"]);
    refuse(pump_with("discipline: Single", "discipline: ¶Double"), &["`Single` or `Burst`"]);
    refuse(pump_with("notes", &format!("¶{}", "n".repeat(1 << 20))), &["`nnnnnnnn", ".."]);
}

#[test]
fn nothing_is_lost_to_a_second_value() {
    let twice = pump_with("\"10\": (\"rising\", \"-\")", "\"¶00\": (\"rising\", \"-\")");
    refuse(twice, &["\"00\" stands twice", "keep one"]);
    refuse(EVERYTHING.replace("\"Work\": [", "\"¶Rest\": ["), &["\"Rest\" stands twice"]);
    refuse(pump_with("notes: \"\",", "notes: \"\", ¶title: \"\","), &["`title`", "second time"]);
    refuse(pump_with("    rows: [", "    ¶inputs: [], rows: ["), &["`inputs`", "second time"]);
}

#[test]
fn values_of_the_wrong_kind_are_refused_where_they_stand() {
    refuse(pump_with("title: \"Sump pump with two floats\"", "title: ¶12"), &["double quotes"]);
    refuse(pump_with("inputs: [", "inputs: ¶{"), &["`[`"]);
    refuse(pump_with("cells: {", "cells: ¶["), &["`{`"]);
    refuse(pump_with("(\"dry\", \"0\")", "(\"dry\"¶)"), &["missing", "next row"]);
    refuse(pump_with("(\"dry\", \"0\")", "(\"dry\", \"0\", ¶\"1\")"), &["`)`", "too many"]);
    refuse(pump_with("(\"dry\", \"0\")", "¶\"dry\""), &["`(`"]);
    refuse(pump_with("loops: true", "loops: ¶yes"), &["`true` or `false`"]);
    refuse(pump_with("late: [", "share: ¶1, late: ["), &["`true` or `false`"]);
    refuse(pump_with("[\"pump\"]", "[\"pump\" ¶\"fan\"]"), &["comma", "write one"]);
    refuse(pump_with("\"00\": (", "\"00\" ¶("), &["colon"]);
    refuse(pump_with("\"Sump", "\"Sump\\q¶"), &["no escape"]);
    refuse(format!("{PUMP}¶)"), &["has ended before"]);
    refuse("¶[]", &["`(`"]);
    refuse("¶\u{0}\u{0}", &["`(`"]);
}

#[test]
fn numbers_of_gates_must_be_sensible() {
    let gates =
        |text: &str| pump_with("        logic:", &format!("        gates: ({text}),\n        logic:"));
    for (text, word) in [
        ("fan_in: ¶1", "fan-in of 1"),
        ("fan_in: ¶65", "2 to 64"),
        ("fan_in: -¶2", "fan-in of -2"),
        ("fan_in: 4¶.5", "comma"),
        ("delay: (NaN, 1.0¶)", "range of delays"),
        ("delay: (0.5, inf¶)", "range of delays"),
        ("delay: (-1.0, 1.0¶)", "range of delays"),
        ("delay: (2.0, 1.0¶)", "range of delays"),
        ("delay: (0.0, 1e300¶)", "range of delays"),
        ("delay: (2.0¶)", "a delay is missing"),
        ("reset: ¶\"clear\"", "Some(\"name\")"),
    ] {
        refuse(gates(text), &[word]);
    }
    assert_eq!(
        read(gates("delay: (0, 3)").as_bytes()).map(|project| project.choices.gates.delay),
        Ok((0.0, 3.0))
    );
}

#[test]
fn more_than_the_limits_is_refused_while_it_is_read() {
    /// So many of an item, the mark before the one that is one too many.
    fn many(count: usize, most: usize, item: impl Fn(usize) -> String) -> String {
        (0..count).map(|i| if i == most { format!("¶{}", item(i)) } else { item(i) }).collect()
    }
    let rows =
        many(100_000, limits::ROWS, |i| format!("(name: \"r{i}\", cells: {{\"00\": (\"r\", \"0\")}}),\n"));
    refuse(pump_with("    rows: [\n", &format!("    rows: [\n{rows}")), &["more than 1024 rows", "split"]);
    let inputs = many(30, limits::INPUTS, |i| format!("\"x{i}\", "));
    refuse(pump_with("\"low\", \"high\"", &inputs), &["more than 10 inputs"]);
    let outputs = many(100, limits::OUTPUTS, |i| format!("\"z{i}\", "));
    refuse(pump_with("\"pump\"", &outputs), &["more than 32 outputs"]);
    let columns = many(100_000, limits::CELLS, |c| format!("\"{c:017b}\": (\"dry\", \"0\"), "));
    refuse(pump_with("\"00\": (\"dry\", \"0\"), ", &columns), &["more than 1024 columns"]);
    let scenarios = many(100_000, limits::SCENARIOS, |_| "(name: \"s\"),\n".into());
    refuse(pump_with("scenarios: [", &format!("scenarios: [{scenarios}")), &["more than 1024 scenarios"]);
    let steps = many(100_000, limits::SCENARIOS, |_| "(\"00\", \"0\"), ".into());
    refuse(pump_with("(\"00\", \"0\"), ", &steps), &["more than 1024 steps"]);
    let sets = many(100_000, limits::ROWS, |_| "[],".into());
    refuse(pump_with("[\"dry\", \"rising\"], ", &sets), &["more than 1024 sets"]);
    let members = many(100_000, limits::ROWS, |_| "\"dry\", ".into());
    refuse(pump_with("[\"dry\", \"rising\"]", &format!("[{members}]")), &["more than 1024 rows in one set"]);
    let late = many(100_000, limits::OUTPUTS, |_| "\"pump\", ".into());
    refuse(pump_with("late: [", &format!("late: [{late}")), &["more than 32 late outputs"]);
}

#[test]
fn the_limits_themselves_are_allowed() {
    let mut project =
        Project::new((0..10).map(|i| format!("x{i}")).collect(), (0..32).map(|i| format!("z{i}")).collect());
    project.title = "t".repeat(limits::TITLE);
    project.notes = "n o\n".repeat(limits::NOTES / 4);
    for r in 0..limits::ROWS {
        let mut row = RowEntry { name: format!("{r:a>64}"), ..Default::default() };
        for c in 0..10 {
            let cell = CellEntry { next: row.name.clone(), outputs: "1".repeat(32) };
            row.cells.insert(format!("{:010b}", 1 << c), cell);
        }
        project.rows.push(row);
    }
    assert_eq!(fits(&project), Ok(()));
    let start = Instant::now();
    assert_eq!(read(write(&project).as_bytes()), Ok(project));
    assert!(start.elapsed() < Duration::from_secs(20), "{:?}", start.elapsed());
}

#[test]
fn long_strings_are_refused() {
    refuse(pump_with("\"dry\",", &format!("\"¶{}\",", "n".repeat(65))), &["65 characters", "64"]);
    refuse(pump_with("Sump pump", &format!("¶{}", "é".repeat(300))), &["316 characters", "256", "title"]);
    let notes = format!("notes: \"¶{}\"", "n".repeat(10 << 20));
    refuse(pump_with("notes: \"\"", &notes), &["characters in the notes", "65536"]);
    let escaped = pump_with("notes: \"\"", &format!("notes: \"{}\"", "\\n".repeat(5 << 20)));
    assert!(refused(escaped.as_bytes()).text.contains("characters in the notes"));
}

#[test]
fn a_huge_file_is_refused_unread() {
    let error = refused(&vec![b'('; limits::FILE_BYTES + 1]);
    assert_eq!((error.line, error.column), (1, 1));
    assert!(error.text.contains("16777217 bytes") && error.text.contains("16777216"), "{error}");
}

#[test]
fn bytes_that_are_no_text_are_refused_where_they_stand() {
    let (before, after) = PUMP.split_once("two floats").expect("there");
    refuse_bytes(before, &[before.as_bytes(), b"\xff", after.as_bytes()].concat(), &["0xff", "UTF-8"]);
    refuse_bytes("", b"\xfe\xff", &["0xfe"]);
    // Half a character at the very end.
    refuse_bytes("(title: \"é\n", b"(title: \"\xc3\xa9\n\xe6\xb0", &["0xe6"]);
}

#[test]
fn deep_nesting_is_refused() {
    for bracket in ["(", "[", "{", "Some(", "((name:", "/*", "/* /*", "#![enable("] {
        refused(bracket.repeat((limits::FILE_BYTES - 1) / bracket.len()).as_bytes());
        let deep = refused(pump_with("late: [", &format!("late: {}", bracket.repeat(100_000))).as_bytes());
        assert!(deep.line >= 19, "{deep}");
    }
    refuse(pump_with("ByHand([[", &format!("ByHand([[¶{}", "[".repeat(100_000))), &["double quotes"]);
}

#[test]
fn an_error_reads_as_one_line() {
    let error = refused(pump_with("notes: \"\"", "notes: 3").as_bytes());
    assert_eq!(error.to_string(), "line 4, column 12: a string belongs here: put the text in double quotes");
}
