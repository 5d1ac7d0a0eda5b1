//! Questions to Python packages that tests/run installs: networkx and sympy.

use std::io::Write;
use std::path::PathBuf;
use std::process::{Command, Stdio};

use serde_json::Value;

/// Sends `cases` as JSON to `tests/outside/SCRIPT` and returns what it prints as JSON.
///
/// The interpreter is the one of tests/.venv, or `python3` where that was not set up. A package that is missing fails the
/// test: a check that did not run has not passed.
pub fn ask(script: &str, cases: &Value) -> Value {
    let tests = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests");
    let venv = tests.join(".venv/bin/python");
    let python = if venv.exists() { venv } else { PathBuf::from("python3") };
    let mut child = Command::new(&python)
        .arg(tests.join("outside").join(script))
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .spawn()
        .unwrap_or_else(|e| panic!("{}: {e}; tests/run sets it up", python.display()));
    let mut stdin = child.stdin.take().expect("piped");
    // Both scripts read everything before they answer, so one write cannot block for ever.
    stdin.write_all(cases.to_string().as_bytes()).expect("the script reads its cases");
    drop(stdin);
    let output = child.wait_with_output().expect("the script ends");
    assert!(output.status.success(), "{script} failed; tests/run installs what it needs");
    serde_json::from_slice(&output.stdout).expect("the script answers in JSON")
}
