//! Section files that were good once: whatever is changed in them, they are answered or refused.

use proptest::prelude::*;
use sc_cli::arguments::StarterTrade;
use sc_cli::commands::check::check_text;
use sc_cli::commands::solve::{Request, solve_text};
use sc_cli::commands::starter::starter;
use sc_cli::outcome::Status;

/// A section that reaches infinity.
const ENDLESS: &str = r#"
let.d = 0.5
outline = [
  { away = 0, side = "low" },
  { at = [0, 0], side = "face" },
  { at = [0, "-d"] },
  { at = [0, 0], side = "high" },
  { away = 180, side = "rock" },
  { at = [0, -1], side = "rock" },
]
[sides]
high = { held = 1 }
low  = { held = 0 }
[[probe]]
at = [3, -0.25]
[[probe]]
along = "low"
from = -2
to = 0
count = 5
"#;

fn base(which: usize) -> &'static str {
    use StarterTrade as T;
    [T::Seepage, T::Heat, T::Conductor, T::Plain].get(which).map_or(ENDLESS, |&trade| starter(trade))
}

/// No number of the results is written as a float's own word for what is no number.
fn assert_sound(text: &str) {
    for word in text.split(|c: char| !c.is_ascii_alphanumeric()) {
        assert!(!matches!(word, "NaN" | "nan" | "inf" | "Infinity"), "{text}");
    }
}

fn assert_answered_or_refused(text: &str) {
    let checked = check_text("any.toml", text, &[]);
    for json in [false, true] {
        let outcome = solve_text("any.toml", text, &Request { json, ..Request::default() });
        match outcome.status {
            Status::Done => assert!(outcome.messages.is_empty() && !outcome.results.is_empty()),
            Status::Inexact => assert!(!outcome.messages.is_empty() && !outcome.results.is_empty()),
            Status::Unanswered | Status::Wrong => {
                assert!(!outcome.messages.is_empty() && outcome.results.is_empty());
            }
        }
        assert_eq!(checked.status == Status::Wrong, outcome.status == Status::Wrong, "{text}");
        assert_sound(&outcome.results);
        if json && !outcome.results.is_empty() {
            serde_json::from_str::<serde_json::Value>(&outcome.results).expect("the document is JSON");
        }
    }
}

/// Where the numbers of a text stand.
fn numbers(text: &str) -> Vec<std::ops::Range<usize>> {
    let mut out = Vec::new();
    let mut start = None;
    for (i, b) in text.bytes().chain([b' ']).enumerate() {
        match (b.is_ascii_digit() || b == b'.', start) {
            (true, None) => start = Some(i),
            (false, Some(s)) => {
                out.push(s..i);
                start = None;
            }
            _ => {}
        }
    }
    out
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(150) })]

    #[test]
    fn a_file_with_other_characters_is_answered_or_refused(
        which in 0..5_usize,
        edits in prop::collection::vec(
            (any::<prop::sample::Index>(), 0..6_usize, "[\\[\\]{}\"'=.,\\\\#\n a-z0-9µ+*^/()-]{0,4}"), 1..4,
        ),
    ) {
        let mut text = base(which).to_owned();
        for (index, removed, added) in edits {
            let chars: Vec<usize> = text.char_indices().map(|c| c.0).collect();
            let start = index.index(chars.len());
            let byte = |i: usize| chars.get(i).copied().unwrap_or(text.len());
            text = format!("{}{added}{}", &text[..byte(start)], &text[byte(start + removed)..]);
        }
        assert_answered_or_refused(&text);
    }

    #[test]
    fn a_file_with_other_numbers_is_answered_or_refused(
        which in 0..5_usize,
        edits in prop::collection::vec(
            (any::<prop::sample::Index>(), prop_oneof![
                Just(0.0), Just(1e-300), Just(1e300), -5.0..5.0_f64, -100.0..100.0_f64,
            ]), 1..4,
        ),
    ) {
        let mut text = base(which).to_owned();
        for (index, value) in edits {
            let places = numbers(&text);
            let place = places[index.index(places.len())].clone();
            text.replace_range(place, &format!("{value:?}"));
        }
        assert_answered_or_refused(&text);
    }
}
