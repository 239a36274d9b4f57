//! Rational least squares against closed forms and against sections computed by high-order finite elements:
//! values agree and the bounds that come with them hold. The conformal map plays no part here.

use num_complex::Complex64;
use sc_tests::generate::irregular_ten;
use sc_tests::rational::{
    BoundaryValues, Bounded, RationalError, RationalOptions, RationalProblem, RationalSolution, SideData,
};
use sc_tests::reference::{BoundaryFunction, IrregularSection, load_irregular};

fn z(x: f64, y: f64) -> Complex64 {
    Complex64::new(x, y)
}

/// A section with some sides held and the others insulated.
fn section(vertices: &[(f64, f64)], held: &[(usize, f64)]) -> RationalProblem {
    let mut sides = vec![SideData::Insulated; vertices.len()];
    for &(side, value) in held {
        sides[side] = SideData::Held(value);
    }
    RationalProblem { vertices: vertices.iter().map(|&(x, y)| z(x, y)).collect(), sides }
}

fn solve(problem: &RationalProblem) -> RationalSolution {
    problem.solve(&RationalOptions::default()).expect("the problem is sound")
}

/// The value lies within its bound of the expected one (which may be uncertain itself), and the bound is small.
fn assert_within(label: &str, found: Bounded, expected: f64, expected_error: f64, largest_bound: f64) {
    let error = (found.value - expected).abs();
    assert!(
        error <= found.error + expected_error,
        "{label}: {} against {expected}, error {error:.2e} beyond the bound {:.2e} + {expected_error:.1e}",
        found.value,
        found.error
    );
    assert!(found.error <= largest_bound, "{label}: bound {:.2e} above {largest_bound:.0e}", found.error);
}

#[test]
fn square_between_opposite_sides_has_conductance_one() {
    let square = section(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)], &[(0, 1.0), (2, 0.0)]);
    let solution = solve(&square);
    assert_within("square", solution.conductance().unwrap(), 1.0, 0.0, 1e-12);
    let middle = z(0.3, 0.4);
    assert!((solution.potential(middle) - 0.6).abs() < 1e-12);
    assert!((solution.gradient(middle) - z(0.0, -1.0)).norm() < 1e-11);
}

#[test]
fn kite_that_its_mirror_image_turns_into_the_conjugate_problem_has_conductance_one() {
    // Reflection in the axis swaps held and insulated sides, so G = 1/G.
    let kite = section(&[(0.0, 0.0), (2.0, -1.0), (5.0, 0.0), (2.0, 1.0)], &[(0, 1.0), (2, 0.0)]);
    assert_within("kite", solve(&kite).conductance().unwrap(), 1.0, 0.0, 1e-11);
}

#[test]
fn three_square_l_between_an_end_and_the_far_outer_side_has_conductance_one_over_root_three() {
    // Prevertices −1, −√3/2, 0, √3/2, 1, ∞ (Gaier 1972, by threefold reflection of the square; from memory), so
    // λ = (1 − √3/2)/2 = sin² 15°, the modulus for which K'/K = √3 (third singular value).
    let l = section(
        &[(1.0, 2.0), (0.0, 2.0), (0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)],
        &[(0, 1.0), (2, 0.0)],
    );
    assert_within("L", solve(&l).conductance().unwrap(), 1.0 / 3.0_f64.sqrt(), 0.0, 1e-11);
}

#[test]
fn solution_singular_at_a_re_entrant_corner_is_recovered_from_its_boundary_values() {
    // r^(2/3) sin(2θ/3) about (1, 1) is harmonic, and zero on the two sides that meet there.
    let exact = |point: Complex64| BoundaryFunction::ReentrantCorner.value(point);
    let along = SideData::HeldAlong(BoundaryValues::new(exact));
    let problem = RationalProblem {
        vertices: vec![z(0.0, 0.0), z(2.0, 0.0), z(2.0, 1.0), z(1.0, 1.0), z(1.0, 2.0), z(0.0, 2.0)],
        sides: vec![along; 6],
    };
    let probes = [z(0.5, 0.7), z(1.6, 0.4), z(0.97, 0.98)];
    let solution = problem.solve_with_probes(&RationalOptions::default(), &probes).unwrap();
    for (i, &point) in probes.iter().enumerate() {
        assert_within("re-entrant corner", solution.probe(i).unwrap(), exact(point), 1e-15, 1e-10);
    }
}

#[test]
fn prescribed_inflow_and_film_in_series_with_a_slab_give_the_exact_profile() {
    // One-dimensional: flux 2 enters at the left, so ∂φ/∂x = −2, and at the film (h = 4, ambient 1) φ = 1 + 2/4.
    let mut problem = section(&[(0.0, 0.0), (3.0, 0.0), (3.0, 1.0), (0.0, 1.0)], &[]);
    problem.sides[3] = SideData::Inflow(2.0);
    problem.sides[1] = SideData::Film { coefficient: 4.0, ambient: 1.0 };
    let solution = problem.solve_with_probes(&RationalOptions::default(), &[z(1.0, 0.5)]).unwrap();
    assert_within("slab", solution.probe(0).unwrap(), 1.5 + 2.0 * 2.0, 0.0, 1e-10);
    assert_within("film", solution.side_flux(1).unwrap(), -2.0, 0.0, 1e-10);
}

/// Sections of the reference table that this method is made for: no hole, no wall of no thickness, at most
/// twelve sides, no crack.
fn reference_sections() -> Vec<(IrregularSection, RationalProblem)> {
    let wall = |section: &IrregularSection| {
        let n = section.outer.len();
        (0..n).any(|i| section.outer[..i].contains(&section.outer[i]))
    };
    load_irregular()
        .into_iter()
        .filter(|section| section.outer.len() <= 12 && !wall(section) && section.name != "notch_crack")
        .filter_map(|section| RationalProblem::from_irregular(&section).map(|problem| (section, problem)))
        .collect()
}

/// Largest bound to accept on conductances, in parts of the largest matrix entry. Deep slots and a needle-like
/// corner (its exterior angle is 0.05π) cost digits; the rest reaches 1e-11.
fn allowed_bound(name: &str) -> f64 {
    match name {
        "comb3" => 1e-5,
        "u_bend" | "random_8" | "channel_notch_50" => 1e-6,
        _ => 1e-10,
    }
}

#[test]
fn conductances_of_irregular_sections_agree_with_finite_elements_within_the_bounds() {
    let mut seen = 0;
    for (section, problem) in reference_sections() {
        let solution = if section.conductance.is_some() || section.matrix.is_some() {
            solve(&problem)
        } else {
            continue;
        };
        let matrix = solution.conductance_matrix().expect("electrodes do not touch");
        let largest = matrix
            .iter()
            .map(|row| row.iter().map(|g| g.value.abs()).fold(0.0, f64::max))
            .fold(0.0, f64::max);
        let bound = allowed_bound(&section.name) * largest;
        // The table orders electrodes by value.
        let mut order: Vec<usize> = (0..matrix.len()).collect();
        order.sort_by(|&a, &b| solution.electrodes()[a].value.total_cmp(&solution.electrodes()[b].value));
        if let Some(expected) = &section.conductance {
            assert_within(
                &section.name,
                solution.conductance().unwrap(),
                expected.value,
                expected.abs_err,
                bound,
            );
            seen += 1;
        }
        if let Some(expected) = &section.matrix {
            for (i, &a) in order.iter().enumerate() {
                for (j, &b) in order.iter().enumerate() {
                    let label = format!("{} ({i}, {j})", section.name);
                    assert_within(&label, matrix[a][b], expected.value[i][j], expected.abs_err[i][j], bound);
                    seen += 1;
                }
            }
        }
    }
    assert!(seen >= 45, "only {seen} conductances were compared");
}

#[test]
fn potentials_and_side_fluxes_agree_with_the_reference_within_the_bounds() {
    let (mut points, mut fluxes) = (0, 0);
    for (section, problem) in reference_sections() {
        let inside: Vec<_> = section.points.iter().filter(|point| point.side.is_none()).collect();
        let places: Vec<Complex64> = inside.iter().map(|point| z(point.x, point.y)).collect();
        let solution = problem.solve_with_probes(&RationalOptions::default(), &places).unwrap();
        let size = inside.iter().map(|point| point.potential.abs()).fold(1.0, f64::max);
        for (i, point) in inside.iter().enumerate() {
            let bound = 10.0 * allowed_bound(&section.name) * size;
            assert_within(&section.name, solution.probe(i).unwrap(), point.potential, point.abs_err, bound);
            points += 1;
        }
        let Some(expected) = &section.side_flux else { continue };
        for (k, (value, error)) in expected.value.iter().zip(&expected.abs_err).enumerate() {
            if let (Some(value), Some(error), Some(found)) = (value, error, solution.side_flux(k)) {
                let label = format!("{} side {k}", section.name);
                assert_within(&label, found, *value, *error, 1e-3 * value.abs().max(1.0));
                fluxes += 1;
            }
        }
    }
    assert!(points >= 60 && fluxes >= 60, "only {points} points and {fluxes} fluxes were compared");
}

#[test]
fn ten_generated_sections_have_small_bounds_and_two_sets_of_parameters_agree_within_them() {
    let cases = irregular_ten();
    assert_eq!(cases.len(), 10);
    let finer = RationalOptions {
        degree: 36,
        side_poles: 130,
        pole_share: 1.1,
        power_limit: 4.0,
        ..RationalOptions::default()
    };
    for case in cases {
        let problem = case.problem();
        let probes = case.probes();
        let one = problem.solve_with_probes(&RationalOptions::default(), &probes).unwrap();
        let other = problem.solve_with_probes(&finer, &probes).unwrap();
        // The third has a notch of 0.16π beside a narrow arm; the others come to about 1e-13, two of them 1e-12.
        let bound = if case.name.starts_with("irregular_2_") { 3e-8 } else { 1e-11 };
        let (a, b) = (one.conductance_matrix().unwrap(), other.conductance_matrix().unwrap());
        for i in 0..a.len() {
            for j in 0..a.len() {
                let label = format!("{} ({i}, {j})", case.name);
                assert_within(&label, a[i][j], b[i][j].value, b[i][j].error, bound);
                // Reciprocity, and no net flux at equal potentials.
                assert_within(&label, a[i][j], a[j][i].value, a[j][i].error, bound);
            }
            let sum: f64 = a[i].iter().map(|entry| entry.value).sum();
            let error: f64 = a[i].iter().map(|entry| entry.error).sum();
            assert!(sum.abs() <= error, "{}: row {i} sums to {sum:.2e}, bound {error:.2e}", case.name);
        }
        for i in 0..probes.len() {
            let (found, again) = (one.probe(i).unwrap(), other.probe(i).unwrap());
            assert_within(&format!("{} probe {i}", case.name), found, again.value, again.error, bound);
        }
    }
}

#[test]
fn touching_electrodes_have_a_potential_but_no_conductance() {
    // By symmetry the centre of a square with one side at 1 and three at 0 is at 1/4.
    let square =
        section(&[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)], &[(0, 1.0), (1, 0.0), (2, 0.0), (3, 0.0)]);
    let solution = square.solve_with_probes(&RationalOptions::default(), &[z(0.5, 0.5)]).unwrap();
    assert_within("centre", solution.probe(0).unwrap(), 0.25, 0.0, 1e-11);
    assert!(solution.conductance_matrix().is_none());
    assert!(solution.side_flux(0).is_none() && solution.side_flux(2).is_some());
}

#[test]
fn odd_options_give_a_coarse_answer_that_knows_it_is_coarse() {
    let l = section(
        &[(1.0, 2.0), (0.0, 2.0), (0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)],
        &[(0, 1.0), (2, 0.0)],
    );
    let options = RationalOptions {
        tolerance: 0.0,
        pole_share: 0.0,
        max_poles: 0,
        degree: 2,
        side_poles: 0,
        samples_per_pole: 0,
        power_limit: 0.0,
        ..RationalOptions::default()
    };
    let found = l.solve(&options).unwrap().conductance().unwrap();
    assert_within("coarse L", found, 1.0 / 3.0_f64.sqrt(), 0.0, f64::INFINITY);
    assert!(found.error > 1e-4, "bound {:.1e}", found.error);
}

#[test]
fn bad_problems_are_refused_with_the_place() {
    let square = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)];
    let options = RationalOptions::default();
    let refused = |problem: RationalProblem| problem.solve(&options).expect_err("the problem is not sound");
    assert_eq!(refused(section(&square, &[])), RationalError::NothingHeld);
    assert_eq!(refused(section(&square, &[(1, f64::NAN)])), RationalError::Datum { index: 1 });
    let clockwise: Vec<_> = square.iter().rev().copied().collect();
    assert_eq!(refused(section(&clockwise, &[(0, 1.0)])), RationalError::Orientation { area: -1.0 });
    let crossed = [(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)];
    assert_eq!(refused(section(&crossed, &[(0, 1.0)])), RationalError::NotSimple { first: 0, second: 2 });
    let folded = [(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 0.5), (1.0, 1.0), (0.0, 1.0)];
    assert_eq!(refused(section(&folded, &[(0, 1.0)])), RationalError::NotSimple { first: 2, second: 4 });
    let few = section(&square[..2], &[(0, 1.0)]);
    assert_eq!(refused(few), RationalError::Counts { vertices: 2, sides: 2 });
    let probe = section(&square, &[(0, 1.0)]).solve_with_probes(&options, &[z(2.0, 0.5)]);
    assert_eq!(probe.unwrap_err(), RationalError::Probe { index: 0, x: 2.0, y: 0.5 });
}
