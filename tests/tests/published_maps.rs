//! The published Schwarz-Christoffel examples on bounded sections: Trefethen, SIAM J. Sci. Stat. Comput. 1 (1980), and
//! Driscoll and Trefethen, *Schwarz-Christoffel Mapping* (2002), both cited from memory: triangles, rectangles and the
//! law of their crowding, regular polygons, L and plus shapes, polygonal resistors. The values are those of
//! `reference-data/published-maps.json`, from closed forms where there is one; the file says where each comes from.

use std::f64::consts::{PI, TAU};
use std::sync::LazyLock;

use sc_tests::held_section::{HeldSection, finite};
use sc_tests::question::{NotAnswered, Row, answer};
use sc_tests::reference::{Ask, load_published_maps};

/// Relative error to accept on each.
const TOLERANCE: f64 = 1e-12;

/// Each case by its name, with what the program answers.
static ROWS: LazyLock<Vec<(String, Result<Row, NotAnswered>)>> = LazyLock::new(|| {
    load_published_maps().into_iter().map(|case| (case.id.clone(), Row::of(case))).collect()
});

/// All rows whose names begin so agree; returns how many there are.
#[track_caller]
fn assert_agree(prefix: &str) -> usize {
    let rows = ROWS.iter().filter(|(id, _)| id.starts_with(prefix));
    rows.map(|(id, row)| {
        let row = row.as_ref().unwrap_or_else(|why| panic!("{id}: {why}"));
        let relative = row.relative();
        assert!(row.is_within(TOLERANCE), "{id}: relative error {relative:.1e}");
        assert!(row.is_covered(), "{id}: error {:.2e} beyond the estimate {:?}", row.error, row.estimate);
    })
    .count()
}

#[test]
fn every_published_map_is_in_one_of_the_groups() {
    let groups = ["triangle-", "rectangle-", "regular-", "l3-", "l-resistor-", "plus-"];
    let grouped = ROWS.iter().filter(|(id, _)| groups.iter().any(|group| id.starts_with(group))).count();
    assert_eq!((grouped, ROWS.len()), (53, 53));
}

#[test]
fn triangles_have_the_constant_radius_and_harmonic_measure_of_their_closed_forms() {
    assert_eq!(assert_agree("triangle-"), 18);
}

#[test]
fn rectangles_up_to_thirty_squares_long_have_the_exact_gap_between_the_prevertices_of_an_end() {
    assert_eq!(assert_agree("rectangle-"), 7);
}

#[test]
fn gap_of_a_long_rectangle_follows_the_law_eight_exp_minus_half_pi_a() {
    // The exact gap is below the law by a part of at most 2 exp(−πa), by the nome of the elliptic modulus.
    let mut seen = 0;
    for case in load_published_maps().iter().filter(|case| case.id.starts_with("rectangle-end-")) {
        let Ask::HarmonicMeasure { at, .. } = case.ask else { panic!("{}: another question", case.id) };
        let found = answer(case).unwrap().values[0];
        let length = 2.0 * at.re;
        let law = 8.0 * (-0.5 * PI * length).exp();
        let short = 1.0 - TAU * found / law;
        let allowed = 2.0 * (-PI * length).exp() + TOLERANCE;
        assert!(short.abs() <= allowed, "{}: {short:.2e} from the law, allowed {allowed:.2e}", case.id);
        seen += 1;
    }
    assert_eq!(seen, 7);
}

#[test]
fn regular_polygons_have_the_radius_and_the_resistance_of_their_closed_forms() {
    assert_eq!(assert_agree("regular-"), 10);
}

#[test]
fn l_of_three_squares_has_the_prevertices_of_its_closed_form() {
    assert_eq!(assert_agree("l3-"), 2);
}

#[test]
fn l_shaped_resistors_have_the_resistance_of_the_series_of_their_arms_and_corner() {
    assert_eq!(assert_agree("l-resistor-"), 4);
}

#[test]
fn plus_shapes_have_the_resistance_and_radius_published_for_them() {
    assert_eq!(assert_agree("plus-"), 12);
}

#[test]
fn harmonic_measure_is_the_potential_with_one_on_the_arc_and_zero_elsewhere() {
    let mut seen = 0;
    for case in load_published_maps() {
        let Ask::HarmonicMeasure { at, from, to } = case.ask else { continue };
        let points = case.finite_vertices().unwrap();
        let n = points.len();
        let on_arc = |k: usize| (k + n - from) % n < (to + n - from) % n;
        let held: Vec<Option<f64>> = (0..n).map(|k| Some(if on_arc(k) { 1.0 } else { 0.0 })).collect();
        let solution = HeldSection::by_level(finite(&points), &held).solve().unwrap();
        let found = solution.probe(at).unwrap().potential;
        let expected = case.value.number().unwrap();
        let error = (found.value - expected).abs();
        let (id, rounding) = (&case.id, case.input_sensitivity.unwrap_or(0.0));
        assert!(error <= found.error + rounding, "{id}: error {error:.1e}, bound {:.1e}", found.error);
        assert!(error <= TOLERANCE, "{id}: error {error:.1e}");
        seen += 1;
    }
    assert_eq!(seen, 16);
}
