//! The values of the five case files of `reference-data/` that the program can answer. Each case states its source.

use std::sync::LazyLock;

use sc_tests::question::{NotAnswered, Row, Waiting, waiting};
use sc_tests::reference::load_cases;

/// Relative error that no case may exceed.
const ALWAYS: f64 = 1e-10;
/// Relative error that is typical.
const TYPICAL: f64 = 1e-12;

static ROWS: LazyLock<Vec<Result<Row, (String, NotAnswered)>>> = LazyLock::new(|| {
    let cases = load_cases().into_iter().filter(|case| waiting(case).is_none());
    cases
        .map(|case| {
            let id = case.id.clone();
            Row::of(case).map_err(|why| (id, why))
        })
        .collect()
});

fn rows() -> impl Iterator<Item = &'static Row> {
    ROWS.iter().filter_map(|row| row.as_ref().ok())
}

#[test]
fn every_case_that_does_not_wait_is_answered() {
    let refused: Vec<_> = ROWS.iter().filter_map(|row| row.as_ref().err()).collect();
    for (id, why) in &refused {
        println!("{id}: {why}");
    }
    assert!(refused.is_empty(), "{} cases are not answered", refused.len());
}

#[test]
fn cases_that_wait_are_counted() {
    let cases = load_cases();
    let count = |reason: Option<Waiting>| cases.iter().filter(|case| waiting(case) == reason).count();
    let (answered, data, question) =
        (count(None), count(Some(Waiting::GivenData)), count(Some(Waiting::Question)));
    println!("{answered} cases answered; {data} wait for given data, {question} for an answer of their kind");
    // 3 excesses from a held side, 4 integrals, the capacity of a body without an axis.
    assert_eq!([answered, data, question], [315, 29, 8]);
    assert_eq!(ROWS.len(), answered);
}

#[test]
fn every_answer_is_right_to_ten_digits_and_nearly_all_to_twelve() {
    let (mut seen, mut above, mut wrong) = (0, 0, 0);
    for row in rows() {
        seen += 1;
        if !row.is_within(TYPICAL) {
            above += 1;
            println!("{}: relative error {:.1e}, estimate {:?}", row.case.id, row.relative(), row.estimate);
        }
        if !row.is_within(ALWAYS) {
            wrong += 1;
        }
    }
    assert_eq!(wrong, 0, "of {seen} cases, {wrong} are off by more than {ALWAYS:.0e}");
    assert!(20 * above <= seen, "of {seen} cases, {above} are off by more than {TYPICAL:.0e}");
    assert!(seen >= 287, "only {seen} cases were compared");
}

#[test]
fn no_error_estimate_is_below_the_true_error() {
    let (mut seen, mut short) = (0, 0);
    let mut ratios: Vec<f64> = Vec::new();
    for row in rows() {
        let Some(estimate) = row.estimate else { continue };
        seen += 1;
        if !row.is_covered() {
            short += 1;
            println!("{}: error {:.2e} beyond the estimate {estimate:.2e}", row.case.id, row.error);
        }
        ratios.push(estimate / row.error.max(1e-14 * row.case.value.scale()));
    }
    ratios.sort_by(f64::total_cmp);
    println!("{seen} estimates; estimate over error (or 1e-14): median {:.1}", ratios[seen / 2]);
    assert_eq!(short, 0, "of {seen} estimates, {short} are too small");
    assert!(seen >= 248, "only {seen} estimates were compared");
}
