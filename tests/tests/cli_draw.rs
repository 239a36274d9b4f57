//! The command `draw`.

mod cli;

use cli::{rectangle, run_on};
use std::fs;
use std::path::PathBuf;

/// A name in the directory for temporary files that no other test uses.
fn fresh(name: &str) -> PathBuf {
    let path = std::env::temp_dir().join(format!("prevertex-draw-{}-{name}", std::process::id()));
    let _ = fs::remove_file(&path);
    path
}

#[test]
fn draw_writes_a_picture_and_keeps_one_that_is_there() {
    let section = rectangle("title = \"Plate < 1 & more\"", "1", "0");
    for (name, start) in [("net.svg", &b"<svg "[..]), ("net.png", b"\x89PNG\r\n")] {
        let out = fresh(name);
        let path = out.to_str().unwrap();
        for figure in ["net", "section"] {
            let run = run_on(&section, &["draw", "-", "--out", path, "--figure", figure, "--replace"]);
            assert_eq!((run.status, run.results.as_str(), run.messages.as_str()), (0, "", ""));
            let bytes = fs::read(&out).unwrap();
            assert!(bytes.starts_with(start), "{name} {figure}");
            if name == "net.svg" {
                let text = String::from_utf8(bytes).unwrap();
                assert!(text.contains("Plate &lt; 1 &amp; more"), "{text}");
                assert!(text.trim_end().ends_with("</svg>") && !text.contains("NaN"));
            }
        }
        let again = run_on(&section, &["draw", "-", "--out", path]);
        assert_eq!(again.status, 2);
        assert!(
            again.messages.contains("exists") && again.messages.contains("--replace"),
            "{}",
            again.messages
        );
        fs::remove_file(&out).unwrap();
    }
}

#[test]
fn draw_refuses_what_it_cannot_draw() {
    let section = rectangle("", "1", "0");
    let out = fresh("net.pdf");
    let run = run_on(&section, &["draw", "-", "--out", out.to_str().unwrap()]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains(".svg or .png"), "{}", run.messages);
    let run = run_on(&section, &["draw", "-", "--out", "/no/such/directory/net.svg"]);
    assert_eq!(run.status, 2);
    assert!(run.messages.contains("cannot be written"), "{}", run.messages);
    for (option, value) in [("--drops", "0"), ("--width", "10"), ("--figure", "film")] {
        let run = run_on(&section, &["draw", "-", "--out", "x.svg", option, value]);
        assert_eq!(run.status, 2, "{option} {value}");
    }
}

#[test]
fn the_caption_states_drops_channels_and_shape_factor() {
    // Conductance 1/2 with ten drops: five channels.
    let out = fresh("caption.svg");
    let section = "outline = [ { at = [0, 0] }, { at = [2, 0], side = \"b\" }, { at = [2, 1] }, { at = [0, 1], side = \"a\" } ]\n[sides]\na = { held = 10 }\nb = { held = 0 }\n";
    let run = run_on(section, &["draw", "-", "--drops", "10", "--out", out.to_str().unwrap()]);
    assert_eq!((run.status, run.messages.as_str()), (0, ""));
    let svg = fs::read_to_string(&out).unwrap();
    fs::remove_file(&out).unwrap();
    assert!(svg.contains("10 equal drops of 1, 5 channels"), "{svg}");
    assert!(svg.contains("= 5/10 = 0.5 ±"));
}
