//! Solves all 300 polygons of `reference-data/simple-300.json` and prints a line for each, then a summary.
//!
//! `cargo run --release -p sc-tests --bin robustness_table`; the exit status is 1 if a polygon fails.

#![allow(clippy::print_stdout, reason = "printing the table is what this command is for")]

use std::process::ExitCode;

use sc_tests::reference::load_simple_300;
use sc_tests::robustness::{Failure, Outcome, RESIDUAL_IN_THE_MEDIAN, examine, median};

fn main() -> ExitCode {
    println!(
        "{:<18} {:>5} {:>6} {:>5} {:>9} {:>10} {:>12} {:>9} {:>9} {:>9}",
        "polygon",
        "sides",
        "pieces",
        "iter.",
        "decades",
        "residual",
        "conductance",
        "G·G'−1",
        "estimate",
        "ms"
    );
    let outcomes: Vec<Outcome> = load_simple_300()
        .iter()
        .map(|polygon| {
            let outcome = examine(polygon);
            print_line(&outcome);
            outcome
        })
        .collect();
    let residual = print_summary(&outcomes);
    let failures = outcomes.iter().filter(|outcome| outcome.failure().is_some()).count();
    if failures == 0 && residual <= RESIDUAL_IN_THE_MEDIAN { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}

fn print_line(outcome: &Outcome) {
    let ms = outcome.time.as_secs_f64() * 1e3;
    match &outcome.result {
        Ok(f) => println!(
            "{:<18} {:>5} {:>6} {:>5} {:>9.1} {:>10.1e} {:>12.6e} {:>9.1e} {:>9.1e} {:>9.2}{}",
            outcome.id,
            outcome.sides,
            f.pieces,
            f.iterations,
            f.ln_crowding / std::f64::consts::LN_10,
            f.residual,
            f.conductance,
            f.reciprocity,
            f.estimate,
            ms,
            outcome.failure().map_or(String::new(), |kind| format!("  fails: {kind:?}"))
        ),
        Err(why) => println!("{:<18} {:>5} {ms:>75.2}  fails: {why}", outcome.id, outcome.sides),
    }
}

/// One line for each family and one for all; returns the median residual of all.
fn print_summary(outcomes: &[Outcome]) -> f64 {
    println!();
    println!(
        "{:<12} {:>5} {:>7} {:>8} {:>8} {:>11} {:>8} {:>9} {:>9} {:>9} {:>9} {:>9}",
        "family",
        "all",
        "refused",
        "residual",
        "G·G'−1",
        "no number",
        "",
        "residual",
        "worst",
        "G·G'−1",
        "estimate",
        "ms"
    );
    let mut families: Vec<&str> = Vec::new();
    for outcome in outcomes {
        if !families.contains(&outcome.family.as_str()) {
            families.push(&outcome.family);
        }
    }
    for family in families {
        let members: Vec<&Outcome> = outcomes.iter().filter(|outcome| outcome.family == family).collect();
        print_group(family, &members);
    }
    print_group("all", &outcomes.iter().collect::<Vec<_>>())
}

fn print_group(name: &str, members: &[&Outcome]) -> f64 {
    let failed = |kind: Failure| members.iter().filter(|outcome| outcome.failure() == Some(kind)).count();
    let figures: Vec<_> = members.iter().filter_map(|outcome| outcome.result.as_ref().ok()).collect();
    let worst = |of: &dyn Fn(usize) -> f64| (0..figures.len()).map(of).fold(0.0, f64::max);
    let residual = median(figures.iter().map(|f| f.residual).collect()).unwrap_or(f64::INFINITY);
    println!(
        "{name:<12} {:>5} {:>7} {:>8} {:>8} {:>11} {:>8} {residual:>9.1e} {:>9.1e} {:>9.1e} {:>9.1e} {:>9.2}",
        members.len(),
        failed(Failure::Refused),
        failed(Failure::Residual),
        failed(Failure::Reciprocity),
        failed(Failure::NotANumber),
        "median",
        worst(&|i| figures[i].residual),
        worst(&|i| figures[i].reciprocity),
        worst(&|i| figures[i].estimate),
        median(members.iter().map(|outcome| outcome.time.as_secs_f64() * 1e3).collect()).unwrap_or(0.0)
    );
    residual
}
