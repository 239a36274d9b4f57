//! Error estimates against true errors on sections whose answers follow from symmetry or are linear. A thousand others:
//! `cargo run --release -p sc-tests --bin estimate_table`.

use std::sync::LazyLock;

use rayon::prelude::*;
use sc_tests::estimates::{Comparison, MEDIAN_RATIO, compare};
use sc_tests::known::{Family, known};
use sc_tests::robustness::median;

const SECTIONS: u32 = 150;

/// Comparisons of all sections, with the number of the section.
static COMPARISONS: LazyLock<Vec<(u32, Comparison)>> = LazyLock::new(|| {
    let numbers = (0..SECTIONS).into_par_iter();
    numbers
        .flat_map_iter(|number| {
            let found = compare(&known(number)).unwrap_or_else(|why| panic!("section {number}: {why}"));
            found.into_iter().map(move |comparison| (number, comparison))
        })
        .collect()
});

#[test]
fn no_estimate_is_below_the_true_error() {
    for family in Family::ALL {
        let members = COMPARISONS.iter().filter(|(_, comparison)| comparison.family == family).count();
        // Three answers a section.
        assert!(members >= 3 * 150 / 6, "{members} comparisons for {family:?}");
    }
    let short: Vec<_> = COMPARISONS.iter().filter(|(_, comparison)| !comparison.is_covered()).collect();
    for (number, comparison) in &short {
        println!("section {number}: {comparison:?}");
    }
    assert!(short.is_empty(), "{} of {} estimates are too small", short.len(), COMPARISONS.len());
}

#[test]
fn estimates_are_within_a_factor_of_a_hundred_of_the_true_error_in_the_median() {
    let middle = median(COMPARISONS.iter().map(|(_, comparison)| comparison.ratio()).collect()).unwrap();
    println!("{} answers; estimate over true error (or 1e-14): median {middle:.1}", COMPARISONS.len());
    assert!(middle <= MEDIAN_RATIO, "median {middle:.1}");
}

#[test]
fn answers_themselves_are_right_to_twelve_digits() {
    let mut seen = 0;
    for (number, comparison) in COMPARISONS.iter() {
        assert!(comparison.error <= 1e-12, "section {number}: {comparison:?}");
        seen += 1;
    }
    assert!(seen >= 450, "only {seen} answers were looked at");
}
