//! What do the lengths of all sides of a solved map cost, by the number of quadrature nodes a panel?
//!
//! The degenerate case is a rectangle 200 times as long as wide, whose panels follow one another over 272 decades.

mod sections;

use criterion::{BenchmarkId, Criterion, criterion_group, criterion_main};
use sc_core::map::{HalfPlaneMap, MapOptions};
use std::hint::black_box;
use std::time::Duration;

fn side_integrals(c: &mut Criterion) {
    let (name, forty) = sections::forty().swap_remove(0);
    let of = [
        ("ell_6_sides", sections::ell()),
        ("comb_20_sides", sections::comb(5)),
        (name.as_str(), forty),
        ("rectangle_200_to_1", sections::rectangle(200.0)),
    ];
    let pool = sections::pool(1);
    for (name, section) in of {
        let map = HalfPlaneMap::solve(section.outline(), &MapOptions::default()).expect("the map is found");
        let mut group = c.benchmark_group(name);
        for nodes in [6, 12, 18] {
            group.bench_function(BenchmarkId::from_parameter(nodes), |b| {
                pool.install(|| b.iter(|| black_box(&map).residual(nodes).expect("a rule exists")));
            });
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
    targets = side_integrals
}
criterion_main!(benches);
