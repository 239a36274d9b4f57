//! Moving, turning, scaling, mirroring a section, listing it from another vertex or cutting its sides changes nothing
//! that should not change, within the error bounds of both answers.

use num_complex::Complex64;
use proptest::prelude::*;
use sc_core::answers::{Gradient, Solution};
use sc_tests::generate::{IrregularCase, irregular};
use sc_tests::held_section::{HeldSection, finite, walking_side};

/// `count` sections, the same in every run, without files of failures beside the source.
fn config(count: u32) -> ProptestConfig {
    ProptestConfig { cases: count, failure_persistence: None, ..ProptestConfig::default() }
}

/// The section with its vertices put elsewhere.
fn put(section: &HeldSection, points: &[Complex64]) -> HeldSection {
    HeldSection { vertices: finite(points), ..section.clone() }
}

/// Both solutions have the same matrix, the same shape factor if any and, at the points, the same potential; the
/// gradient of the second is the first's over `scale`.
fn assert_alike(one: &Solution, points: &[Complex64], other: &Solution, images: &[Complex64], scale: f64) {
    let (a, b) = (one.matrix(), other.matrix());
    assert_eq!(a.values.len(), b.values.len());
    for (x, y) in a.values.iter().flatten().zip(b.values.iter().flatten()) {
        assert!((x - y).abs() <= a.error + b.error, "{x} and {y}, bounds {:.1e} {:.1e}", a.error, b.error);
    }
    assert_eq!(one.shape_factor().is_some(), other.shape_factor().is_some());
    if let (Some(x), Some(y)) = (one.shape_factor(), other.shape_factor()) {
        assert!((x.value - y.value).abs() <= x.error + y.error, "{x:?} and {y:?}");
    }
    for (&z, &w) in points.iter().zip(images) {
        let (p, q) = (one.probe(z).expect("inside"), other.probe(w).expect("inside"));
        let (x, y) = (p.potential, q.potential);
        assert!((x.value - y.value).abs() <= x.error + y.error, "potential at {z}: {x:?} and {y:?}");
        let (g, h) = (length(p.gradient), length(q.gradient) * scale);
        assert!((g - h).abs() <= 1e-9 * g.abs().max(1e-3), "gradient at {z}: {g} and {h}");
    }
}

fn length(gradient: Gradient) -> f64 {
    match gradient {
        Gradient::Finite { components: [x, y], .. } => x.hypot(y),
        Gradient::Infinite => f64::INFINITY,
    }
}

fn mirror(z: Complex64) -> Complex64 {
    Complex64::new(-z.re, z.im)
}

fn original(number: u32) -> (IrregularCase, HeldSection, Solution, Vec<Complex64>) {
    let case = irregular(number);
    let section = case.section();
    let solution = section.solve().unwrap_or_else(|why| panic!("{}: {why}", case.name));
    let points = case.interior_points(5, 0.05);
    (case, section, solution, points)
}

proptest! {
    #![proptest_config(config(40))]

    #[test]
    fn moved_turned_and_scaled_sections_have_the_same_answers(
        number in 0..10_000_u32,
        turn in 0.0..std::f64::consts::TAU,
        decades in -6.0..6.0_f64,
        shift in (-20.0..20.0, -20.0..20.0),
    ) {
        let (case, section, solution, points) = original(number);
        let scale = 10.0_f64.powf(decades);
        let factor = Complex64::from_polar(scale, turn);
        let shift = Complex64::new(shift.0, shift.1);
        let image = |z: &Complex64| (z + shift) * factor;
        let vertices: Vec<Complex64> = case.vertices.iter().map(image).collect();
        let images: Vec<Complex64> = points.iter().map(image).collect();
        let other = put(&section, &vertices).solve().unwrap();
        assert_alike(&solution, &points, &other, &images, scale);
    }

    #[test]
    fn mirrored_sections_have_the_same_answers_listed_either_way_round(number in 0..10_000_u32) {
        let (case, section, solution, points) = original(number);
        let images: Vec<Complex64> = points.iter().copied().map(mirror).collect();
        // In the same order the mirror image is walked with the section on the right; the program turns it round.
        let same_order: Vec<Complex64> = case.vertices.iter().copied().map(mirror).collect();
        let other = put(&section, &same_order).solve().unwrap();
        assert_alike(&solution, &points, &other, &images, 1.0);
        // Walked the other way, side k runs from the image of vertex n − k to that of vertex n − k − 1.
        let n = case.vertices.len();
        let reversed = HeldSection {
            vertices: finite(&(0..n).map(|k| same_order[(n - k) % n]).collect::<Vec<_>>()),
            electrodes: (0..n).map(|k| section.electrodes[n - 1 - k]).collect(),
            levels: section.levels.clone(),
        };
        assert_alike(&solution, &points, &reversed.solve().unwrap(), &images, 1.0);
    }

    #[test]
    fn the_vertex_the_list_starts_from_is_of_no_account(number in 0..10_000_u32, start in 1..12_usize) {
        let (case, section, solution, points) = original(number);
        let start = start % case.vertices.len();
        let mut other = section.clone();
        other.vertices.rotate_left(start);
        other.electrodes.rotate_left(start);
        assert_alike(&solution, &points, &other.solve().unwrap(), &points, 1.0);
    }

    #[test]
    fn flat_vertices_cut_sides_and_fluxes_but_change_nothing_else(
        number in 0..10_000_u32,
        cuts in proptest::collection::vec((0..12_usize, 0.02..0.98_f64), 1..6),
    ) {
        let (case, section, solution, points) = original(number);
        let n = case.vertices.len();
        let (mut vertices, mut electrodes, mut parent) = (Vec::new(), Vec::new(), Vec::new());
        for k in 0..n {
            let (a, b) = (case.vertices[k], case.vertices[(k + 1) % n]);
            let mut parts: Vec<f64> = cuts.iter().filter(|c| c.0 % n == k).map(|c| c.1).collect();
            parts.sort_by(f64::total_cmp);
            parts.dedup_by(|s, t| (*s - *t).abs() < 1e-3);
            vertices.push(a);
            vertices.extend(parts.iter().map(|t| a + (b - a) * t));
            electrodes.extend(std::iter::repeat_n(section.electrodes[k], parts.len() + 1));
            parent.extend(std::iter::repeat_n(k, parts.len() + 1));
        }
        let cut = HeldSection { vertices: finite(&vertices), electrodes, levels: section.levels.clone() };
        let other = cut.solve().unwrap();
        assert_alike(&solution, &points, &other, &points, 1.0);
        for k in 0..n {
            let whole = solution.side_flux(walking_side(solution.section().outline(), k));
            let parts = (0..parent.len()).filter(|&p| parent[p] == k);
            let parts: Vec<_> = parts.map(|p| other.side_flux(walking_side(other.section().outline(), p))).collect();
            let (sum, error) = parts.iter().fold((0.0, 0.0), |s, f| (s.0 + f.value, s.1 + f.error));
            let difference = (whole.value - sum).abs();
            prop_assert!(difference <= whole.error + error, "side {k}: {difference:.1e} of {:.3}", whole.value);
        }
    }
}
