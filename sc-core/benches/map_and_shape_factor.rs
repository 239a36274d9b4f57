//! How long does it take to solve a section to 1e-12, on one core, with and without the independent check?
//!
//! The degenerate case is a rectangle 200 times as long as wide: 272 decades between the gaps of its prevertices.

mod sections;

use criterion::{Criterion, criterion_group, criterion_main};
use sc_core::answers::{Solution, SolveOptions};
use sc_core::potential::Section;
use std::hint::black_box;
use std::time::Duration;

fn solve(c: &mut Criterion, name: &str, section: &Section) {
    let pool = sections::pool(1);
    let mut group = c.benchmark_group(name);
    for (label, check) in [("alone", false), ("checked", true)] {
        let options = SolveOptions { tolerance: 1e-12, check, ..SolveOptions::default() };
        let run = || Solution::solve(black_box(section).clone(), &options).expect("the section is solved");
        group.bench_function(label, |b| pool.install(|| b.iter(run)));
    }
    group.finish();
}

fn map_and_shape_factor(c: &mut Criterion) {
    solve(c, "ell_6_sides", &sections::ell());
    solve(c, "comb_20_sides", &sections::comb(5));
    for (name, section) in sections::forty() {
        solve(c, &name, &section);
    }
    solve(c, "rectangle_200_to_1", &sections::rectangle(200.0));
}

criterion_group! {
    name = benches;
    config = Criterion::default()
        .warm_up_time(Duration::from_millis(500))
        .measurement_time(Duration::from_secs(2))
        .sample_size(20);
    targets = map_and_shape_factor
}
criterion_main!(benches);
