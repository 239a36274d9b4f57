//! Every example section gives the answer that is stored beside it.

use sc_cli::commands::solve::{Request, solve_text};
use sc_cli::outcome::Status;
use std::fs;
use std::path::Path;

#[test]
fn every_example_gives_its_stored_answer() {
    let directory = Path::new(env!("CARGO_MANIFEST_DIR")).join("../examples");
    let mut seen = 0;
    for entry in fs::read_dir(&directory).unwrap() {
        let path = entry.unwrap().path();
        if path.extension().is_none_or(|e| e != "toml") {
            continue;
        }
        seen += 1;
        let name = path.file_stem().unwrap().to_str().unwrap();
        let outcome = solve_text(name, &fs::read_to_string(&path).unwrap(), &Request::default());
        assert_eq!(outcome.status, Status::Done, "{name}: {}", outcome.messages);
        let stored = directory.join("expected").join(format!("{name}.txt"));
        let expected = fs::read_to_string(&stored).unwrap_or_else(|e| panic!("{}: {e}", stored.display()));
        assert_eq!(outcome.results, expected, "{name}");
    }
    assert!(seen >= 4, "{seen} examples");
}
