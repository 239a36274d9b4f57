//! What the program refuses: exit statuses, places and hints of faults, files it does not overwrite.

mod cli;

use cli::{rectangle, run_on};
use std::fs;
use std::path::PathBuf;
use std::process::{Command, Stdio};

/// An empty directory for one test.
fn scratch(test: &str) -> PathBuf {
    let directory = std::env::temp_dir().join(format!("prevertex-{}-{test}", std::process::id()));
    let _ = fs::remove_dir_all(&directory);
    fs::create_dir_all(&directory).expect("a scratch directory");
    directory
}

#[test]
fn several_faults_are_reported_at_once_each_at_its_line() {
    let text = "tilte = \"x\"
outline = [
  { at = [0, 0], side = \"a\" },
  { at = [1, 0], sied = \"b\" },
  { at = [1, \"1 kg\"] },
]
[sides]
a = { held = 1 }
c = { held = 0 }
";
    let run = run_on(text, &["solve", "-"]);
    assert_eq!((run.status, run.results.as_str()), (2, ""));
    for (place, word) in [(":1:1", "title"), (":4:18", "side"), (":5:", "kg"), (":9:1", "\"c\"")] {
        assert!(run.messages.contains(&format!("standard input{place}")), "{place} in\n{}", run.messages);
        assert!(run.messages.contains(word), "{word} in\n{}", run.messages);
    }
}

#[test]
fn a_fault_of_the_outline_is_shown_at_the_side_that_has_it() {
    let text = rectangle("", "1", "0").replace("[2, 1], side = \"upper\"", "[-1, 0.5], side = \"upper\"");
    let run = run_on(&text, &["solve", "-"]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains("side 1 crosses side 3"), "{}", run.messages);
    assert!(run.messages.contains("standard input:6:25"), "{}", run.messages);
    assert!(run.messages.contains("the other") && run.messages.contains("help"), "{}", run.messages);
}

#[test]
fn a_probe_outside_is_named_with_its_line_and_distance() {
    let text = rectangle("", "1", "0").replace("at = [0.5, 0.25]", "at = [0.5, -0.25]");
    for command in ["solve", "check"] {
        let run = run_on(&text, &[command, "-"]);
        assert_eq!((run.status, run.results.as_str()), (1, ""));
        let message = "the probe \"inside\" is at (0.5, -0.25), outside the section and 0.25 m from it";
        assert!(run.messages.contains(message), "{}", run.messages);
        assert!(run.messages.contains("standard input:13:6"), "{}", run.messages);
        assert!(run.messages.contains("(0.500000, 0.000000), on \"lower\""), "{}", run.messages);
    }
}

#[test]
fn a_probe_on_a_wall_has_to_name_its_face() {
    let text = r#"
outline = [
  { at = [-2, -2] }, { at = [2, -2] }, { at = [2, 0], side = "low" },
  { at = [0, 0], side = "right face" }, { at = [0, -1], side = "left face" },
  { at = [0, 0], side = "high" }, { at = [-2, 0] },
]
[sides]
high = { held = 1 }
low  = { held = 0 }
[[probe]]
at = [0, -0.5]
[[probe]]
at = [0, 0]
[[probe]]
at = [1, -1]
side = "left face"
[[probe]]
along = "left face"
from = 0.5
to = 1.5
"#;
    let run = run_on(text, &["solve", "-"]);
    assert_eq!(run.status, 1);
    assert_eq!(run.messages.matches("whose faces have different answers").count(), 2, "{}", run.messages);
    assert!(run.messages.contains("\"right face\" or \"left face\""), "{}", run.messages);
    assert!(run.messages.contains("1 m from the side \"left face\""), "{}", run.messages);
    assert!(run.messages.contains("probe 3 runs from 0.5 to 1.5"), "{}", run.messages);
}

#[test]
fn the_exit_status_tells_how_it_ended() {
    let good = rectangle("", "1", "0");
    let exit = |text: &str, arguments: &[&str]| run_on(text, arguments).status;
    assert_eq!(exit(&good, &["solve", "-"]), 0);
    assert_eq!(exit(&good, &["check", "-"]), 0);
    assert_eq!(exit(&good, &["solve", "-", "--help"]), 0);
    assert_eq!(exit(&good, &["solve", "no such file.toml"]), 2);
    assert_eq!(exit(&good, &["solve", "-", "--tolerance", "0"]), 2);
    assert_eq!(exit(&good, &["solve", "-", "--tolerance", "nan"]), 2);
    assert_eq!(exit(&good, &["solve", "-", "--threads", "0"]), 2);
    assert_eq!(exit(&good, &["solve", "-", "--set", "w"]), 2);
    assert_eq!(exit(&good, &["solve", "-", "--set", "w=inf"]), 2);
    assert_eq!(exit(&good, &["solve", "-", "--set", "w=1"]), 2);
    assert_eq!(exit(&good, &["solve"]), 2);
    assert_eq!(exit(&good, &["resolve", "-"]), 2);
    assert_eq!(exit("", &["solve", "-"]), 2);
    let inexact = run_on(&good, &["solve", "-", "--json", "--tolerance", "1e-16"]);
    assert_eq!(inexact.status, 3);
    assert!(inexact.document()["shape_factor"]["value"].is_number());
    assert!(inexact.messages.contains("above the tolerance 1e-16"), "{}", inexact.messages);
}

#[test]
fn nothing_held_and_nothing_left_to_read_are_faults_of_the_file() {
    let text = rectangle("", "1", "0")
        .replace("held = 1", "insulated = true")
        .replace("held = 0", "insulated = true");
    let run = run_on(&text, &["solve", "-"]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains("nothing fixes the level"), "{}", run.messages);
}

#[test]
fn a_file_that_is_not_text_is_refused() {
    let directory = scratch("bytes");
    let path = directory.join("bytes.toml");
    fs::write(&path, b"title = \"a\"\nb = \"\xff\xfe\"\n").unwrap();
    let run = run_on("", &["solve", path.to_str().unwrap()]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains("line 2"), "{}", run.messages);
    fs::remove_dir_all(directory).unwrap();
}

#[test]
fn a_file_that_exists_is_not_overwritten_unless_asked() {
    let directory = scratch("kept");
    let path = directory.join("kept.toml");
    let out = path.to_str().unwrap();
    fs::write(&path, "mine").unwrap();
    let run = run_on("", &["starter", "plain", "--out", out]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains("--replace"), "{}", run.messages);
    assert_eq!(fs::read_to_string(&path).unwrap(), "mine");
    let run = run_on("", &["starter", "plain", "--out", out, "--replace"]);
    assert_eq!((run.status, run.results.as_str()), (0, ""));
    assert!(fs::read_to_string(&path).unwrap().contains("outline"));
    let answer = directory.join("answer.json");
    let run = run_on("", &["solve", out, "--json", "--out", answer.to_str().unwrap()]);
    assert_eq!(run.status, 0, "{}", run.messages);
    assert!(fs::read_to_string(&answer).unwrap().starts_with("{\n"));
    fs::remove_dir_all(directory).unwrap();
}

#[test]
fn a_closed_pipe_is_no_error() {
    let mut child = Command::new(env!("CARGO_BIN_EXE_prevertex"))
        .arg("answers")
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let output = child.wait_with_output().unwrap();
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(output.stderr, b"");
}

#[test]
fn remarks_do_not_stop_the_answer() {
    let text = rectangle("let.spare = 3", "1", "0");
    let document = cli::solved(&text);
    assert_eq!(document["warnings"], serde_json::json!(["line 1, column 5: `spare` is never used"]));
    let run = run_on(&text, &["check", "-"]);
    assert_eq!(run.status, 0);
    assert!(run.messages.contains("warning: `spare` is never used"), "{}", run.messages);
}
