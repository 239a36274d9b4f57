//! How long do 100 000 potentials and gradients take in a section of twelve sides, and what does a second core give?
//!
//! The degenerate case has every point a billionth of a side away from a corner. The ratio of one thread to two is
//! taken over the 100 000 points from runs that alternate, so that a change of the machine's load falls on both; the
//! other figures are for a tenth of the points.

mod sections;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use sc_core::answers::{Solution, SolveOptions};
use sc_core::outline::Point;
use std::hint::black_box;
use std::time::{Duration, Instant};

const COUNT: usize = 100_000;
/// Points of a timed run.
const FEW: usize = COUNT / 10;
/// Rounds of the ratio; the fastest run of each kind counts.
const ROUNDS: usize = 5;

fn answer(solution: &Solution, points: &[Point]) -> usize {
    let answers = black_box(solution).probe_many(points);
    answers.iter().filter(|a| a.is_ok()).count()
}

#[expect(clippy::print_stderr, reason = "criterion has no place for a ratio")]
fn ratio(label: &str, solution: &Solution, points: &[Point]) {
    let pools = [sections::pool(1), sections::pool(2)];
    let mut fastest = [Duration::MAX; 2];
    for _ in 0..ROUNDS {
        for (pool, fastest) in pools.iter().zip(&mut fastest) {
            let start = Instant::now();
            let answered = pool.install(|| answer(solution, points));
            assert_eq!(answered, points.len(), "every point is answered");
            *fastest = start.elapsed().min(*fastest);
        }
    }
    let ratio = fastest[0].as_secs_f64() / fastest[1].as_secs_f64();
    eprintln!("{label}: one thread {:?}, two threads {:?}, ratio {ratio:.2}", fastest[0], fastest[1]);
}

fn bulk_points(c: &mut Criterion) {
    let section = sections::twelve_sides();
    let inside = sections::points_inside(section.outline(), COUNT);
    let at_corners = sections::points_at_corners(section.outline(), COUNT);
    let solve = |check| {
        let options = SolveOptions { tolerance: 1e-10, check, ..SolveOptions::default() };
        Solution::solve(section.clone(), &options).expect("the section is solved")
    };
    let (alone, checked) = (solve(false), solve(true));
    let of = [
        ("inside_alone", &alone, &inside),
        ("inside_checked", &checked, &inside),
        ("at_corners_alone", &alone, &at_corners),
    ];
    for (name, solution, points) in of {
        ratio(name, solution, points);
        // Every tenth, so that they lie everywhere.
        let few: Vec<Point> = points.iter().copied().step_by(COUNT / FEW).collect();
        let mut group = c.benchmark_group(name);
        group.throughput(Throughput::Elements(few.len() as u64));
        for (label, threads) in [("one_thread", 1), ("two_threads", 2)] {
            let pool = sections::pool(threads);
            group.bench_function(label, |b| pool.install(|| b.iter(|| answer(solution, &few))));
        }
        group.finish();
    }
}

criterion_group! {
    name = benches;
    config = Criterion::default()
        .warm_up_time(Duration::from_millis(500))
        .measurement_time(Duration::from_secs(3))
        .sample_size(10);
    targets = bulk_points
}
criterion_main!(benches);
