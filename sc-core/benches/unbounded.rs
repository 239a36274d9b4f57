//! How long does it take to solve a layer that runs to infinity, on one core?
//!
//! The degenerate case is a sheet pile that leaves a thousandth of the layer open.

mod sections;

use criterion::{Criterion, criterion_group, criterion_main};
use sc_core::answers::{Solution, SolveOptions};
use std::hint::black_box;
use std::time::Duration;

fn unbounded(c: &mut Criterion) {
    let of = [
        ("sheet_pile_half_the_layer", sections::sheet_pile(0.5)),
        ("weir_with_two_cutoffs", sections::weir()),
        ("sheet_pile_nearly_to_the_rock", sections::sheet_pile(0.999)),
    ];
    let pool = sections::pool(1);
    for (name, section) in of {
        let mut group = c.benchmark_group(name);
        for (label, check) in [("alone", false), ("checked", true)] {
            let options = SolveOptions { check, ..SolveOptions::default() };
            let run =
                || Solution::solve(black_box(&section).clone(), &options).expect("the section is solved");
            group.bench_function(label, |b| pool.install(|| b.iter(run)));
        }
        group.finish();
    }
}

criterion_group! {
    name = benches;
    config = Criterion::default()
        .warm_up_time(Duration::from_millis(500))
        .measurement_time(Duration::from_secs(2))
        .sample_size(20);
    targets = unbounded
}
criterion_main!(benches);
