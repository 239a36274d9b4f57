//! What every potential must satisfy: it takes no maximum inside, passes to the sides without a step, and has the
//! gradient and the corner singularities that go with it.

use num_complex::Complex64;
use sc_core::answers::{CornerKind, Gradient, Solution};
use sc_tests::generate::{IrregularCase, irregular};

/// Sections looked at by each check.
const SECTIONS: u32 = 40;

fn solved() -> impl Iterator<Item = (IrregularCase, Solution)> {
    (0..SECTIONS).map(|number| {
        let case = irregular(40_000 + number);
        let solution = case.section().solve().unwrap_or_else(|why| panic!("{}: {why}", case.name));
        (case, solution)
    })
}

/// The gradient and the bound on its error.
fn gradient(solution: &Solution, z: Complex64) -> (Complex64, f64) {
    match solution.probe(z).unwrap_or_else(|why| panic!("{why}")).gradient {
        Gradient::Finite { components: [x, y], error } => (Complex64::new(x, y), error),
        Gradient::Infinite => panic!("infinite gradient at {z}"),
    }
}

#[test]
fn potentials_inside_lie_strictly_between_the_extreme_levels() {
    let mut seen = 0;
    for (case, solution) in solved() {
        let levels = solution.section().levels();
        let low = levels.iter().copied().fold(f64::INFINITY, f64::min);
        let high = levels.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        let points = case.interior_points(50, 1e-6);
        for (z, probe) in points.iter().zip(solution.probe_many(&points)) {
            let found = probe.unwrap_or_else(|why| panic!("{}: {why}", case.name)).potential;
            let inside = found.value > low - found.error && found.value < high + found.error;
            assert!(inside, "{}: {} at {z}, levels {low} to {high}", case.name, found.value);
            seen += 1;
        }
    }
    assert_eq!(seen, 50 * SECTIONS);
}

#[test]
fn potential_at_a_centre_is_the_mean_over_a_circle() {
    let mut seen = 0;
    for (case, solution) in solved() {
        for z in case.interior_points(3, 0.2) {
            // The mean over m equidistant points is off by (r/clearance)^m ~ 1e-16 at m = 52 and half the clearance.
            let (radius, m) = (0.5 * case.clearance(z), 52);
            let at =
                |i: usize| z + Complex64::from_polar(radius, std::f64::consts::TAU * i as f64 / m as f64);
            let circle: Vec<Complex64> = (0..m).map(at).collect();
            let mean: f64 =
                solution.probe_many(&circle).into_iter().map(|p| p.unwrap().potential.value).sum();
            let mean = mean / m as f64;
            let centre = solution.probe(z).unwrap().potential;
            let difference = (centre.value - mean).abs();
            assert!(difference <= 1e-13 + 2.0 * centre.error, "{}: {difference:.1e} at {z}", case.name);
            seen += 1;
        }
    }
    assert_eq!(seen, 3 * SECTIONS);
}

#[test]
fn potential_passes_from_the_inside_to_every_side_without_a_step() {
    let (mut held, mut insulated) = (0, 0);
    for (case, solution) in solved() {
        let outline = solution.section().outline();
        for side in 0..outline.n() {
            let (start, length) = (outline.point(side).unwrap(), outline.side_length(side).unwrap());
            let along = outline.side_direction(side);
            for fraction in [0.2, 0.5, 0.8] {
                let s = fraction * length;
                let step = 1e-6 * length;
                let on_side = solution.probe_on_side(side, s).unwrap().potential;
                let inside = solution.probe(start + along * s + along * Complex64::i() * step).unwrap();
                let Gradient::Finite { components, .. } = inside.gradient else {
                    panic!("{}: infinite gradient inside", case.name)
                };
                let normal =
                    (Complex64::new(components[0], components[1]) * (along * Complex64::i()).conj()).re;
                let level = solution.section().level_of_side(side);
                // Beyond the linear part, which on an insulated side is of second order itself, (step/length)² is left.
                let expected = on_side.value + normal * step;
                let difference = (inside.potential.value - expected).abs();
                assert!(difference <= 1e-10, "{}: a step of {difference:.1e} at side {side}", case.name);
                match level {
                    Some(level) => {
                        assert!((on_side.value - level).abs() <= 0.0, "{}: {}", case.name, on_side.value);
                        held += 1;
                    }
                    None => {
                        assert!((normal * length).abs() <= 1e-4, "{}: flux through side {side}", case.name);
                        insulated += 1;
                    }
                }
            }
        }
    }
    assert!(
        held >= 6 * SECTIONS && insulated >= 6 * SECTIONS,
        "{held} held and {insulated} insulated places"
    );
}

#[test]
fn gradient_is_the_limit_of_differences_of_the_potential() {
    let mut seen = 0;
    for (case, solution) in solved() {
        let range = solution.section().range();
        for z in case.interior_points(10, 0.05) {
            let clearance = case.clearance(z);
            // Fourth order: (h/clearance)⁴ = 1e-12, and rounding of 1e-15/(h/clearance).
            let h = 1e-3 * clearance;
            let slope = |direction: Complex64| {
                let at = |step: f64| solution.probe(z + direction * (step * h)).unwrap().potential.value;
                (8.0 * (at(1.0) - at(-1.0)) - (at(2.0) - at(-2.0))) / (12.0 * h)
            };
            let (found, bound) = gradient(&solution, z);
            let expected = Complex64::new(slope(Complex64::new(1.0, 0.0)), slope(Complex64::i()));
            let difference = (found - expected).norm();
            assert!(
                difference <= bound + 1e-10 * range / clearance,
                "{}: {difference:.1e} at {z}",
                case.name
            );
            seen += 1;
        }
    }
    assert_eq!(seen, 10 * SECTIONS);
}

/// Mean of `ln(|∇φ| / r^exponent)` on the arc of radius `r` about a vertex, and the mean of its bounds.
///
/// With `u = (z − w)^(1/α)` the arc is half a circle, and `∇φ / (z − w)^exponent` has the modulus of a function of `u`
/// that is analytic, does not vanish near 0 and, by reflection in both sides, extends to the whole circle. So the mean
/// of its logarithm over the circle is the value at the vertex, the logarithm of the corner coefficient, exactly.
fn mean_on_arc(solution: &Solution, vertex: usize, r: f64, exponent: f64) -> (f64, f64) {
    let outline = solution.section().outline();
    let (corner, angle) =
        (outline.point(vertex).expect("bounded"), outline.alpha()[vertex] * std::f64::consts::PI);
    let m = 12;
    let (total, bound) = (0..m)
        .map(|j| {
            let theta = angle * (j as f64 + 0.5) / m as f64;
            let offset = outline.side_direction(vertex) * Complex64::from_polar(r, theta);
            let (found, bound) = gradient(solution, corner + offset);
            (found.norm().ln() - exponent * r.ln(), bound / found.norm())
        })
        .fold((0.0, 0.0), |sum, one| (sum.0 + one.0, sum.1 + one.1));
    (total / m as f64, bound / m as f64)
}

#[test]
fn corner_coefficients_are_the_limit_of_the_gradient_at_every_vertex() {
    let (mut alike, mut mixed) = (0, 0);
    for (case, _) in solved() {
        // With the vertex at the origin, offsets of 1e-6 keep all their digits.
        for given in 0..case.vertices.len() {
            let mut moved = case.clone();
            let origin = case.vertices[given];
            moved.vertices.iter_mut().for_each(|z| *z -= origin);
            let solution = moved.section().solve().unwrap();
            let corner = solution.corner(given);
            let found = corner.coefficient;
            assert!(found.value > 0.0 && found.error <= 1e-9 * found.value, "{}: {found:?}", case.name);
            for r in [1e-4, 1e-6] {
                let (ln_expected, bound) = mean_on_arc(&solution, given, r, corner.exponent);
                let expected = ln_expected.exp();
                let difference = (found.value / expected - 1.0).abs();
                // Toward the vertex that one of the maps sends to infinity offsets are held across the section.
                assert!(bound <= 1e-12 / r, "{}: vertex {given} at {r}: bound {bound:.1e}", case.name);
                assert!(
                    difference <= 1e-11 + bound + found.relative(),
                    "{}: vertex {given} at {r}: {} against {expected}",
                    case.name,
                    found.value
                );
            }
            match corner.kind {
                CornerKind::HeldMeetsInsulated => mixed += 1,
                _ => alike += 1,
            }
        }
    }
    assert!(alike >= SECTIONS && mixed >= 4 * SECTIONS, "{alike} and {mixed} corners were looked at");
}
