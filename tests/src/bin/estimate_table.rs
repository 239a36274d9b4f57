//! Compares error estimates with true errors on 1000 sections whose answers are known.
//!
//! `cargo run --release -p sc-tests --bin estimate_table`; the exit status is 1 if an estimate is below the true error,
//! a section is not solved or the estimates are wasteful.

#![allow(clippy::print_stdout, reason = "printing the table is what this command is for")]

use std::process::ExitCode;

use rayon::prelude::*;
use sc_tests::estimates::{Comparison, MEDIAN_RATIO, compare};
use sc_tests::known::{Family, known};
use sc_tests::robustness::median;

/// Sections of the suite come first; these are others.
const FIRST: u32 = 10_000;
const SECTIONS: u32 = 1000;

fn main() -> ExitCode {
    let results: Vec<_> =
        (FIRST..FIRST + SECTIONS).into_par_iter().map(|number| (number, compare(&known(number)))).collect();
    let mut all: Vec<Comparison> = Vec::new();
    let mut bad = 0;
    for (number, result) in results {
        match result {
            Err(why) => {
                println!("section {number}, {:?}: {why}", known(number).family);
                bad += 1;
            }
            Ok(comparisons) => {
                for comparison in comparisons.iter().filter(|c| !c.is_covered()) {
                    println!(
                        "section {number}, {:?}: error {:.2e} beyond the estimate {:.2e}",
                        comparison.family, comparison.error, comparison.estimate
                    );
                    bad += 1;
                }
                all.extend(comparisons);
            }
        }
    }
    println!(
        "{:<10} {:>7} {:>6} {:>11} {:>11} {:>13} {:>13} {:>14}",
        "family",
        "answers",
        "short",
        "med. error",
        "max. error",
        "med. estimate",
        "max. estimate",
        "med. est./err."
    );
    for family in Family::ALL {
        let members: Vec<Comparison> = all.iter().copied().filter(|c| c.family == family).collect();
        print_line(&format!("{family:?}"), &members);
    }
    let ratio = print_line("all", &all);
    if bad == 0 && ratio <= MEDIAN_RATIO { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}

fn print_line(name: &str, members: &[Comparison]) -> f64 {
    let of = |pick: fn(&Comparison) -> f64| members.iter().map(pick).collect::<Vec<f64>>();
    let largest = |numbers: Vec<f64>| numbers.into_iter().fold(0.0, f64::max);
    let middle = |numbers: Vec<f64>| median(numbers).unwrap_or(f64::NAN);
    let ratio = middle(of(Comparison::ratio));
    println!(
        "{name:<10} {:>7} {:>6} {:>11.1e} {:>11.1e} {:>13.1e} {:>13.1e} {ratio:>14.1}",
        members.len(),
        members.iter().filter(|c| !c.is_covered()).count(),
        middle(of(|c| c.error)),
        largest(of(|c| c.error)),
        middle(of(|c| c.estimate)),
        largest(of(|c| c.estimate)),
    );
    ratio
}
