//! The command line, run as a user runs it: exit codes, streams, hostile files, Ctrl-C, a reader that goes away.

use std::fs;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::thread;
use std::time::{Duration, Instant};

const LATCH: &str = r#"(
    format: 1,
    title: "Gated latch",
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

const METHODS: [&str; 5] = ["adjacency", "shared-row", "single-step", "one-hot", "multiple-row"];
const FORMS: [&str; 3] = ["feedback", "set-reset", "c-element"];
const SHAPES: [&str; 2] = ["sum-of-products", "product-of-sums"];

/// A folder that is removed again.
struct Folder(PathBuf);

impl Folder {
    fn new(name: &str) -> Folder {
        let path = std::env::temp_dir().join(format!("stillgate_cli_{}_{name}", std::process::id()));
        fs::create_dir_all(&path).expect("a temporary folder");
        Folder(path)
    }

    fn file(&self, name: &str, content: impl AsRef<[u8]>) -> PathBuf {
        let path = self.0.join(name);
        fs::write(&path, content).expect("a temporary file");
        path
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(&self.0);
    }
}

fn program() -> Command {
    Command::new(env!("CARGO_BIN_EXE_stillgate"))
}

fn run<S: AsRef<std::ffi::OsStr>>(arguments: impl IntoIterator<Item = S>) -> Output {
    program().args(arguments).stdin(Stdio::null()).output().expect("the program runs")
}

fn command(verb: &str, file: &Path, options: &[&str]) -> Output {
    run([verb.as_ref(), file.as_os_str()].into_iter().chain(options.iter().map(AsRef::as_ref)))
}

fn out(output: &Output) -> &str {
    std::str::from_utf8(&output.stdout).expect("standard output is UTF-8")
}

fn err(output: &Output) -> &str {
    std::str::from_utf8(&output.stderr).expect("standard error is UTF-8")
}

fn json(output: &Output) -> serde_json::Value {
    serde_json::from_slice(&output.stdout).expect("the record is JSON")
}

/// One line on standard error, nothing on standard output, exit 2.
fn refused(output: &Output, part: &str) {
    assert_eq!(output.status.code(), Some(2), "{}", err(output));
    assert_eq!(out(output), "");
    assert!(err(output).contains(part), "{:?} lacks {part:?}", err(output));
    assert_eq!(err(output).lines().count(), 1, "{:?}", err(output));
}

#[test]
fn help_and_version_go_to_standard_output() {
    let help = run(["--help"]);
    assert_eq!((help.status.code(), err(&help)), (Some(0), ""));
    for word in METHODS.iter().chain(&FORMS).chain(&SHAPES).chain(&["--budget", "--json", "compare", "check"])
    {
        assert!(out(&help).contains(word), "{word}");
    }
    let version = run(["--version"]);
    assert_eq!(out(&version), concat!("stillgate ", env!("CARGO_PKG_VERSION"), "\n"));
    assert_eq!(out(&run(["derive", "--help"])), out(&help));
}

#[test]
fn wrong_usage_is_told_in_one_line() {
    refused(&run(["pump.ron", "derive"]), "one too many");
    refused(&run(["export", "pump.ron", "--to", "out"]), "cannot export yet");
    refused(&run(["drive"]), "unknown command drive");
    refused(&run(["--fast"]), "unknown option --fast");
    refused(&run(["derive", "pump.ron", "--fast"]), "unknown option --fast");
    refused(&run(["derive"]), "needs a project file");
    refused(&run(["derive", "a.ron", "--codes", "gray"]), "adjacency, shared-row");
    refused(&run(["derive", "a.ron", "--budget", "soon"]), "seconds");
    refused(&run(["drive\n\u{1b}[2J"]), "unknown command drive\\n\\u{1b}[2J");
}

#[test]
fn files_that_cannot_be_read() {
    let folder = Folder::new("unreadable");
    refused(&command("check", &folder.0.join("none.ron"), &[]), "none.ron: there is no such file");
    refused(&command("derive", &folder.0, &[]), "is a directory");
    refused(&command("compare", &folder.file("not.ron", "(format: 1,\n  title: 7)"), &[]), "not.ron:2:");
    refused(&command("derive", &folder.file("empty.ron", ""), &[]), "empty.ron:1:");
    refused(&command("derive", &folder.file("bytes.ron", b"(title: \"\xff\xfe\")"), &[]), "bytes.ron:1:");
    refused(&command("derive", &folder.file("cut.ron", &LATCH[..400]), &[]), "cut.ron:");
    refused(&command("derive", &folder.file("deep.ron", "[".repeat(100_000)), &[]), "deep.ron:1:");
    let hostile = folder.file("line\nbreak \u{1b}[2J\".ron", "(");
    refused(&command("derive", &hostile, &[]), "line\\nbreak \\u{1b}[2J\".ron:1:");
    let large = folder.0.join("large.ron");
    fs::File::create(&large).and_then(|f| f.set_len(1 << 40)).expect("a sparse file");
    let start = Instant::now();
    refused(&command("derive", &large, &[]), "too large");
    assert!(start.elapsed() < Duration::from_secs(20));
    // A file without end and without a length.
    if Path::new("/dev/zero").exists() {
        refused(&command("derive", Path::new("/dev/zero"), &[]), "too large");
    }
}

#[cfg(unix)]
#[test]
fn a_file_name_that_is_no_text() {
    use std::os::unix::ffi::OsStrExt;
    let name = std::ffi::OsStr::from_bytes(b"\xff.ron");
    refused(&run(["check".as_ref(), name]), "there is no such file");
}

#[test]
fn check_derive_and_compare_a_sound_file() {
    let folder = Folder::new("sound");
    let file = folder.file("latch.ron", LATCH);
    let check = command("check", &file, &[]);
    assert_eq!((check.status.code(), err(&check)), (Some(0), ""));
    assert!(out(&check).ends_with("latch.ron: nothing found\n"));
    let derive = command("derive", &file, &[]);
    assert_eq!(derive.status.code(), Some(0), "{}", err(&derive));
    for part in
        ["Gated latch\n=====", "smallest, proved", "Y1 = ", "for hazards alone", "free of critical races"]
    {
        assert!(out(&derive).contains(part), "{part}");
    }
    let long = out(&derive).lines().find(|l| l.chars().count() > 110);
    assert_eq!(long, None);
    let again = command("derive", &file, &[]);
    assert_eq!(derive.stdout, again.stdout, "the same file gives the same text");
    let record = command("derive", &file, &["--json"]);
    assert_eq!(json(&record)["proof"]["conforms"], true);
    let compare = command("compare", &file, &[]);
    assert_eq!(compare.status.code(), Some(0), "{}", err(&compare));
    let lines = |word: &str| out(&compare).lines().filter(|l| l.ends_with(word)).count();
    assert_eq!(lines("  proved"), 30, "{}", out(&compare));
}

#[test]
fn notations() {
    let folder = Folder::new("notations");
    let file = folder.file("latch.ron", LATCH);
    let text = |notation: &str| {
        let output = command("derive", &file, &["--notation", notation, "--codes", "adjacency"]);
        let find = out(&output).lines().find(|l| l.trim_start().starts_with("Y1 = ")).map(str::to_owned);
        find.expect("an equation for Y1")
    };
    let (book, verilog, vhdl) = (text("textbook"), text("ieee1364"), text("ieee1076"));
    assert!(book.contains('·') && book.contains('+') && book.contains("G'"), "{book}");
    assert!(verilog.contains(" & ") && verilog.contains(" | ") && verilog.contains("~G"), "{verilog}");
    assert!(vhdl.contains(" and ") && vhdl.contains(" or ") && vhdl.contains("not G"), "{vhdl}");
}

#[test]
fn an_error_in_the_design_exits_1_and_still_prints_the_record() {
    let folder = Folder::new("faulty");
    let file = folder.file("lost.ron", LATCH.replace(r#""00": ("shut1", "1")"#, r#""00": ("nowhere", "1")"#));
    for verb in ["check", "derive", "compare"] {
        let output = command(verb, &file, &[]);
        assert_eq!(output.status.code(), Some(1), "{verb}");
        let line = err(&output).lines().find(|l| l.starts_with("error: ")).expect("an error is told");
        assert!(line.contains("nowhere") && line.ends_with("(row shut1, column 00)"), "{line}");
    }
    let record = command("derive", &file, &["--json"]);
    assert_eq!(record.status.code(), Some(1));
    assert!(json(&record)["merging"].is_null() && json(&record)["proof"].is_null());
}

#[test]
fn hostile_names_break_no_line() {
    let folder = Folder::new("hostile");
    for (i, name) in [
        "a\\\"b",
        "a\\nb",
        "../../etc/x",
        "<script>alert(1)</script>",
        "\\u{1b}[2J",
        "\\u{202e}x",
        "",
        "é",
        " ",
    ]
    .iter()
    .enumerate()
    {
        for place in ["shut1", "D", "Q", "Gated latch"] {
            let text = LATCH.replace(&format!("\"{place}\""), &format!("\"{name}\""));
            let file = folder.file(&format!("hostile{i}.ron"), text);
            for options in [&[][..], &["--json"]] {
                let output = command("derive", &file, options);
                let expected = if place == "Gated latch" { 0 } else { 1 };
                assert_eq!(output.status.code(), Some(expected), "{name} for {place}: {}", err(&output));
                for text in [out(&output), err(&output)] {
                    let hidden =
                        |c: char| (c.is_control() && c != '\n') || ('\u{202a}'..='\u{202e}').contains(&c);
                    let json = !options.is_empty() && text.starts_with('{');
                    assert!(json || !text.contains(hidden), "{name} for {place}: {text:?}");
                }
                for line in err(&output).lines() {
                    let word = line.split(": ").next().unwrap_or_default();
                    assert!(["error", "warning", "question", "note"].contains(&word), "{line}");
                }
                if !options.is_empty() {
                    json(&output);
                }
            }
        }
    }
}

#[test]
fn every_option_on_every_sample() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("projects");
    let mut samples: Vec<PathBuf> =
        fs::read_dir(folder).expect("projects/ is there").map(|e| e.expect("readable").path()).collect();
    samples.retain(|p| p.extension().is_some_and(|e| e == "ron"));
    samples.sort();
    assert!(!samples.is_empty());
    for sample in &samples {
        let plain = command("derive", sample, &["--json"]);
        let refused = json(&plain)["codes"].is_null() && err(&plain).contains("error: ");
        assert!(plain.status.success() || refused, "{}: {}", sample.display(), err(&plain));
        for codes in METHODS {
            for form in FORMS {
                for shape in SHAPES {
                    let options = ["--json", "--codes", codes, "--form", form, "--shape", shape];
                    let output = command("derive", sample, &options);
                    let record = json(&output);
                    let what = format!("{}: {codes} {form} {shape}: {}", sample.display(), err(&output));
                    match output.status.code() {
                        Some(0) => {
                            assert_eq!(record["codes"]["method"], codes.replace('-', "_"), "{what}");
                            assert_eq!(record["equations"]["form"], form.replace('-', "_"), "{what}");
                            assert_eq!(record["equations"]["shape"], shape.replace('-', "_"), "{what}");
                            assert_eq!(record["proof"]["conforms"], true, "{what}");
                        }
                        Some(1) => assert!(err(&output).contains("error: "), "{what}"),
                        other => panic!("{other:?} {what}"),
                    }
                }
            }
        }
        let per_row = command("derive", sample, &["--outputs", "per-row"]);
        assert!(matches!(per_row.status.code(), Some(0 | 1)), "{}", err(&per_row));
        assert!(per_row.status.success() || err(&per_row).contains("error: "), "{}", err(&per_row));
        let compare = command("compare", sample, &[]);
        assert_eq!(compare.status.code(), Some(0), "{}: {}", sample.display(), out(&compare));
    }
}

/// A table whose smallest cover is a long search: two outputs rarely given, next rows scattered.
fn hard_table(rows: usize) -> String {
    let mut text = String::from(
        "(format: 1, title: \"Scattered\", inputs: [\"a\", \"b\", \"c\", \"d\"], outputs: [\"p\", \"q\"], discipline: Burst, \
         initial: (\"r0\", \"0000\"), rows: [\n",
    );
    let mut seed = 7u64;
    let mut random = |n: usize| {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (seed >> 33) as usize % n
    };
    let column = |c: usize| -> String { (0..4).map(|i| if c >> i & 1 == 1 { '1' } else { '0' }).collect() };
    // Row r rests in column r mod 16; single-bit neighbours lead to rows that rest there.
    for r in 0..rows {
        let home = r % 16;
        let outputs = ["0-", "-0", "1-", "-1", "--"][random(5)];
        text += &format!("(name: \"r{r}\", cells: {{\"{}\": (\"r{r}\", \"{outputs}\")", column(home));
        for bit in 0..4 {
            let to = home ^ 1 << bit;
            let choices = rows / 16;
            text += &format!(", \"{}\": (\"r{}\", \"--\")", column(to), to + 16 * random(choices));
        }
        text += "}),\n";
    }
    text + "])"
}

#[cfg(unix)]
#[test]
fn ctrl_c_prints_the_best_so_far() {
    let folder = Folder::new("interrupt");
    let file = folder.file("scattered.ron", hard_table(240));
    let start = Instant::now();
    let mut child = program()
        .args(["derive".as_ref(), file.as_os_str(), "--json".as_ref(), "--budget".as_ref(), "3000".as_ref()])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program runs");
    let (mut stdout, mut stderr) = (child.stdout.take().expect("piped"), child.stderr.take().expect("piped"));
    let reader = thread::spawn(move || {
        let mut text = String::new();
        stdout.read_to_string(&mut text).map(|_| text)
    });
    thread::sleep(Duration::from_millis(1500));
    assert!(child.try_wait().expect("a child").is_none(), "the search was too short to be stopped");
    let kill = Command::new("kill").args(["-INT", &child.id().to_string()]).status().expect("kill is there");
    assert!(kill.success());
    let status = child.wait().expect("a child");
    let text = reader.join().expect("no panic").expect("read");
    let mut told = String::new();
    stderr.read_to_string(&mut told).expect("read");
    assert!(matches!(status.code(), Some(0 | 1)), "{status}: {told}");
    assert!(start.elapsed() < Duration::from_secs(30));
    let record: serde_json::Value = serde_json::from_str(&text).expect("the record is whole");
    assert_eq!(record["merging"]["proved"], false);
    assert!(record["merging"]["cover"].as_array().is_some_and(|c| !c.is_empty()));
    assert!(told.contains("Not proved: stopped") && told.contains("by hand"), "{told}");
}

#[test]
fn a_budget_of_nothing_still_gives_a_design() {
    let folder = Folder::new("budget");
    let file = folder.file("latch.ron", LATCH);
    let output = command("derive", &file, &["--budget", "0", "--json"]);
    assert_eq!(output.status.code(), Some(0), "{}", err(&output));
    assert_eq!(json(&output)["proof"]["conforms"], true);
    assert!(err(&output).contains("depends on the machine"), "{}", err(&output));
    let ample = command("derive", &file, &["--budget", "60", "--json"]);
    assert_eq!((ample.status.code(), err(&ample)), (Some(0), ""));
    assert_eq!(json(&ample)["merging"]["proved"], true);
}

#[cfg(unix)]
#[test]
fn a_reader_that_goes_away_is_no_failure() {
    let folder = Folder::new("pipe");
    let file = folder.file("scattered.ron", hard_table(16));
    let mut child = program()
        .args(["derive".as_ref(), file.as_os_str(), "--json".as_ref()])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program runs");
    drop(child.stdout.take());
    let output = child.wait_with_output().expect("a child");
    assert!(!err(&output).contains("panicked"), "{}", err(&output));
    assert!(matches!(output.status.code(), Some(0 | 1)), "{}: {}", output.status, err(&output));
}
