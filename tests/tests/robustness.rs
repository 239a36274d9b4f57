//! Thirty of the 300 simple polygons of `reference-data/simple-300.json`, of every family. All of them:
//! `cargo run --release -p sc-tests --bin robustness_table`.

use std::collections::BTreeSet;

use rayon::prelude::*;
use sc_tests::reference::load_simple_300;
use sc_tests::robustness::{Outcome, RESIDUAL_IN_THE_MEDIAN, examine, median};

#[test]
fn every_polygon_is_solved_and_its_independent_conductances_agree() {
    let mut polygons = load_simple_300();
    polygons.sort_by(|a, b| a.family.cmp(&b.family));
    let families: BTreeSet<&str> = polygons.iter().map(|polygon| polygon.family.as_str()).collect();
    let sample: Vec<_> = polygons.iter().step_by(10).collect();
    let outcomes: Vec<Outcome> = sample.into_par_iter().map(examine).collect();
    assert_eq!(outcomes.len(), 30);
    let seen: BTreeSet<&str> = outcomes.iter().map(|outcome| outcome.family.as_str()).collect();
    assert_eq!(seen, families, "families in the sample");
    let failed: Vec<&Outcome> = outcomes.iter().filter(|outcome| outcome.failure().is_some()).collect();
    for outcome in &failed {
        println!("{}: {:?} {:?}", outcome.id, outcome.failure(), outcome.result);
    }
    assert!(failed.is_empty(), "{} of {} polygons fail", failed.len(), outcomes.len());
    let residuals = outcomes.iter().filter_map(|outcome| outcome.result.as_ref().ok()).map(|f| f.residual);
    let middle = median(residuals.collect()).unwrap();
    assert!(middle <= RESIDUAL_IN_THE_MEDIAN, "median residual {middle:.1e}");
}
