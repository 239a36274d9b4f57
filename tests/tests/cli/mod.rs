//! Running the program as a user does.

#![allow(dead_code, reason = "each target uses a part of it")]

use serde_json::Value;
use std::io::Write;
use std::process::{Command, Output, Stdio};

/// What a run left behind.
#[derive(Debug)]
pub(crate) struct Run {
    /// The exit status.
    pub(crate) status: i32,
    /// Standard output.
    pub(crate) results: String,
    /// Standard error.
    pub(crate) messages: String,
}

impl Run {
    fn new(output: Output) -> Run {
        Run {
            status: output.status.code().expect("the program was not killed"),
            results: String::from_utf8(output.stdout).expect("results are UTF-8"),
            messages: String::from_utf8(output.stderr).expect("messages are UTF-8"),
        }
    }

    /// The JSON document.
    pub(crate) fn document(&self) -> Value {
        serde_json::from_str(&self.results)
            .unwrap_or_else(|e| panic!("{e}\n{}\n{}", self.results, self.messages))
    }
}

/// Runs the program with a text on standard input.
pub(crate) fn run_on(text: &str, arguments: &[&str]) -> Run {
    let mut child = Command::new(env!("CARGO_BIN_EXE_prevertex"))
        .args(arguments)
        .env("NO_COLOR", "1")
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    // A run that never reads its input closes the pipe; that is its right.
    let _ = child.stdin.take().expect("standard input is piped").write_all(text.as_bytes());
    Run::new(child.wait_with_output().expect("the program ends"))
}

/// The document of a section.
pub(crate) fn solved(text: &str) -> Value {
    let run = run_on(text, &["solve", "-", "--json"]);
    assert_eq!(run.status, 0, "{}", run.messages);
    assert_eq!(run.messages, "");
    run.document()
}

/// A number at a JSON pointer.
pub(crate) fn number(document: &Value, pointer: &str) -> f64 {
    let value = document.pointer(pointer);
    value.and_then(Value::as_f64).unwrap_or_else(|| panic!("{pointer} is {value:?}"))
}

/// Asserts that two numbers agree to a relative error.
pub(crate) fn assert_rel(label: &str, computed: f64, expected: f64, rtol: f64) {
    let error = (computed - expected).abs();
    assert!(error <= rtol * expected.abs(), "{label}: {computed:e}, expected {expected:e}, off by {error:e}");
}

/// A rectangle of width 2 and height 1, held on the left and on the right, with lines of the file before it.
pub(crate) fn rectangle(head: &str, left: &str, right: &str) -> String {
    format!(
        "{head}
outline = [
  {{ at = [0, 0], side = \"lower\" }},
  {{ at = [2, 0], side = \"right\" }},
  {{ at = [2, 1], side = \"upper\" }},
  {{ at = [0, 1], side = \"left\" }},
]
[sides]
left  = {{ held = {left} }}
right = {{ held = {right} }}
[[probe]]
name = \"inside\"
at = [0.5, 0.25]
"
    )
}
