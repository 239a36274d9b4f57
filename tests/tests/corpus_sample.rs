//! A hundred and fifty-four of the ten thousand generated sections, of every family, and some of them by methods that
//! share no code with the map. All of them: `cargo run --release -p sc-tests --bin corpus_table`.

use rayon::prelude::*;
use sc_tests::corpus::check::{Check, check, methods};
use sc_tests::corpus::outcome::{Outcome, examine};
use sc_tests::corpus::{Case, Family, case};

/// Most sides here, for time: the command solves the larger ones.
const MOST_SIDES: usize = 60;

/// The first sections of a family after a place in it, as many as wanted, that are small enough.
fn sample(family: Family, wanted: usize) -> Vec<Case> {
    let count = family.count();
    let cases = (0..count).map(|k| case(family, (k * 37 + 5) % count));
    cases.filter(|case| case.section.vertices.len() <= MOST_SIDES).take(wanted).collect()
}

#[test]
fn generated_sections_of_every_family_are_solved() {
    let cases: Vec<Case> = Family::ALL.iter().flat_map(|&(family, _)| sample(family, 14)).collect();
    assert_eq!(cases.len(), 14 * Family::ALL.len());
    let outcomes: Vec<Outcome> = cases.par_iter().map(|case| examine(case, true)).collect();
    let failed: Vec<String> = outcomes
        .iter()
        .filter_map(|outcome| Some(format!("{}: {}", outcome.name(), outcome.result.as_ref().err()?.message)))
        .collect();
    assert!(failed.is_empty(), "{failed:#?}");
}

#[test]
fn independent_methods_agree_on_a_section_of_every_family() {
    let checks: Vec<(String, Check)> = Family::ALL
        .par_iter()
        .flat_map_iter(|&(family, count)| {
            let small = |index: &usize| {
                case(family, *index).section.vertices.len() <= 30 && !methods(family, *index).is_empty()
            };
            let index = (0..count).find(small).expect("a small section that is to be checked");
            let outcome = examine(&case(family, index), true);
            let figures = outcome.result.as_ref().expect("the section is solved");
            let conductance = figures.conductance.expect("two held runs");
            let name = outcome.name();
            let run = move |method| (name.clone(), check(method, family, index, conductance));
            methods(family, index).into_iter().map(run).collect::<Vec<_>>()
        })
        .collect();
    assert!(checks.len() >= Family::ALL.len(), "{} checks", checks.len());
    for (name, check) in &checks {
        let verdict = check.verdict.as_ref().unwrap_or_else(|why| panic!("{name}: {why}"));
        assert!(verdict.agrees, "{name}: {check:?}");
        assert!(verdict.uncertainty < 0.02, "{name}: {check:?}");
    }
}
