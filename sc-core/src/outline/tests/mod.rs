//! Claims about outlines, by subject.

#![expect(clippy::float_cmp, reason = "axis-aligned outlines promise exact angles and distances")]

mod grid_faces;
mod locating;
mod properties;
mod rules;
mod unbounded;
mod walls;

use proptest::prelude::ProptestConfig;

use super::{Outline, OutlineFault, OutlineWarning, Vertex, Warned};

/// Many cases, of which most may not apply, and no files left behind.
fn cases(n: u32) -> ProptestConfig {
    ProptestConfig {
        cases: n,
        max_global_rejects: 100 * n,
        failure_persistence: None,
        ..ProptestConfig::default()
    }
}

/// Finite vertices from pairs of coordinates.
fn corners(points: &[(f64, f64)]) -> Vec<Vertex> {
    points.iter().map(|&(x, y)| Vertex::at(x, y)).collect()
}

fn accepted(vertices: &[Vertex]) -> Warned<Outline> {
    Outline::new(vertices).unwrap_or_else(|faults| panic!("{vertices:?}: {faults}"))
}

/// An accepted outline without warnings.
fn clean(vertices: &[Vertex]) -> Outline {
    let warned = accepted(vertices);
    assert_eq!(warned.warnings, Vec::<OutlineWarning>::new(), "{vertices:?}");
    warned.value
}

fn faults(vertices: &[Vertex]) -> Vec<OutlineFault> {
    match Outline::new(vertices) {
        Ok(warned) => panic!("{vertices:?} was accepted as {:?}", warned.value),
        Err(faults) => faults.0,
    }
}

/// Asserts that the angles are as expected to within `tolerance`, and that they close the outline.
fn assert_angles(outline: &Outline, expected: &[f64], tolerance: f64) {
    assert_eq!(outline.alpha().len(), expected.len());
    for (k, (&a, &e)) in outline.alpha().iter().zip(expected).enumerate() {
        assert!((a - e).abs() <= tolerance, "α_{k} is {a}, expected {e} in {:?}", outline.alpha());
    }
    assert_closed(outline);
}

fn assert_closed(outline: &Outline) {
    let n = outline.n() as f64;
    let sum = super::angles::compensated_sum(outline.alpha());
    assert!((sum - (n - 2.0)).abs() <= 2.0 * f64::EPSILON * n, "Σα is {sum}, n − 2 is {}", n - 2.0);
    for (vertex, &a) in outline.vertices().iter().zip(outline.alpha()) {
        match vertex {
            Vertex::At(_) => assert!(0.0 < a && a <= 2.0, "{a}"),
            Vertex::Away { .. } => assert!(-2.0 <= a && a <= 0.0, "{a}"),
        }
    }
}
