//! The commands beside `solve`.

mod cli;

use cli::{assert_rel, number, rectangle, run_on, solved};

const TRADES: [&str; 4] = ["seepage", "heat", "conductor", "plain"];

#[test]
fn every_starter_solves_as_printed() {
    for trade in TRADES {
        let starter = run_on("", &["starter", trade]);
        assert_eq!(starter.status, 0);
        let document = solved(&starter.results);
        assert_eq!(document["trade"], trade);
        assert!(number(&document, "/shape_factor/value") > 0.0);
        assert!(number(&document, "/error") < 1e-12);
        assert!(document["probes"].as_array().unwrap().len() > 3);
        for warning in document["warnings"].as_array().unwrap() {
            assert!(warning.as_str().unwrap().contains("infinite"), "{trade}: {warning}");
        }
    }
}

#[test]
fn the_help_holds_a_first_section_that_solves() {
    let help = run_on("", &["--help"]).results;
    let section: String = help
        .lines()
        .skip_while(|l| !l.contains("trade ="))
        .take_while(|l| !l.starts_with("and run"))
        .map(|l| format!("{}\n", l.trim()))
        .collect();
    let document = solved(&section);
    assert!(number(&document, "/conductance/value") > 0.0);
    for line in help.lines() {
        assert!(line.chars().count() <= 100, "{line}");
    }
}

#[test]
fn check_shows_vertices_angles_conditions_and_groups() {
    let run = run_on(&rectangle("title = \"Plate\"", "1", "0"), &["check", "-"]);
    assert_eq!((run.status, run.messages.as_str()), (0, ""));
    for words in ["Plate", "4 vertices", "held at 1", "insulated", "90", "Probes: 1 with 1 points"] {
        assert!(run.results.contains(words), "{words} in\n{}", run.results);
    }
}

#[test]
fn units_and_answers_are_listed() {
    let units = run_on("", &["units"]);
    assert_eq!(units.status, 0);
    for unit in ["ft", "degC", "W/(m K)", "sheet_resistance"] {
        assert!(units.results.contains(unit), "{unit}");
    }
    let lengths = run_on("", &["units", "length"]).results;
    assert!(lengths.contains("yd") && !lengths.contains("kPa"));
    let unknown = run_on("", &["units", "lenght"]);
    assert_eq!(unknown.status, 2);
    assert!(unknown.messages.contains("did you mean length?"), "{}", unknown.messages);
    let answers = run_on("", &["answers"]).results;
    assert!(answers.contains("shape_factor.value") && answers.contains("probes[].gradient[]"));
}

#[cfg(all(feature = "completions", feature = "manual"))]
#[test]
fn completions_and_manual_know_every_command_and_option() {
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        let run = run_on("", &["completions", shell]);
        assert_eq!(run.status, 0);
        assert!(run.results.contains("starter") && run.results.contains("tolerance"), "{shell}");
    }
    let page = run_on("", &["man"]).results;
    assert!(page.contains(".TH prevertex 1") && page.contains("A first section"), "{page}");
    assert!(run_on("", &["man", "solve"]).results.contains("\\-\\-tolerance"));
    let unknown = run_on("", &["man", "slove"]);
    assert_eq!(unknown.status, 2);
    assert!(unknown.messages.contains("did you mean `solve`?"));
}

#[test]
fn the_answers_do_not_depend_on_how_the_file_reaches_the_program() {
    let path = std::env::temp_dir().join(format!("prevertex-{}-way.toml", std::process::id()));
    let text = rectangle("", "1", "0");
    std::fs::write(&path, &text).unwrap();
    let from_file = run_on("", &["solve", path.to_str().unwrap(), "--json"]).document();
    std::fs::remove_file(&path).unwrap();
    assert_rel("value", number(&from_file, "/shape_factor/value"), 0.5, 1e-13);
    assert_eq!(from_file, solved(&text));
}
