//! The map forth and back is where it started, over the whole section and into its corners; the number of threads does
//! not show in any bit of an answer.

use std::f64::consts::PI;

use num_complex::Complex64;
use sc_core::answers::{Gradient, Solution};
use sc_core::map::{HalfPlaneMap, HalfPlanePoint, MapOptions};
use sc_core::outline::Outline;
use sc_tests::generate::{IrregularCase, irregular};
use sc_tests::held_section::finite;
use sc_tests::reference::load_irregular;

/// Sections looked at by each check.
const SECTIONS: u32 = 40;

/// Distance by which a point of a section of size 10 may be missed when it is held from a corner across the section.
const ACROSS: f64 = 1e-13;

/// Irregular sections and their maps.
fn maps() -> impl Iterator<Item = (IrregularCase, HalfPlaneMap)> {
    (0..SECTIONS).map(|number| {
        let case = irregular(60_000 + number);
        let map = map_of(&case.vertices);
        (case, map)
    })
}

fn map_of(vertices: &[Complex64]) -> HalfPlaneMap {
    let outline = Outline::new(&finite(vertices)).expect("a sound outline").value;
    HalfPlaneMap::solve(&outline, &MapOptions::default()).expect("a map")
}

#[test]
fn forward_of_inverse_is_the_same_point_all_over_the_section() {
    let mut seen = 0;
    for (case, map) in maps() {
        for z in case.interior_points(100, 0.0) {
            let found = map.inverse(z).unwrap_or_else(|why| panic!("{}: {why}", case.name));
            let miss = (map.forward(found.at) - z).norm();
            assert!(miss <= ACROSS, "{}: {miss:.1e} away from {z}", case.name);
            seen += 1;
        }
    }
    assert_eq!(seen, 100 * SECTIONS);
}

#[test]
fn forward_of_inverse_is_the_same_point_down_to_1e_9_from_every_corner() {
    let mut seen = 0;
    for (case, _) in maps() {
        for given in 0..case.vertices.len() {
            // With the vertex at the origin the offset has all its digits.
            let origin = case.vertices[given];
            let vertices: Vec<Complex64> = case.vertices.iter().map(|z| z - origin).collect();
            let map = map_of(&vertices);
            let along = map.outline().side_direction(given);
            let angle = map.outline().alpha()[given] * PI;
            for r in [1e-1, 1e-3, 1e-6, 1e-9] {
                for part in [0.01, 0.3, 0.5, 0.9] {
                    let z = along * Complex64::from_polar(r, part * angle);
                    // Far from the vertex another side may come between.
                    let found = match map.inverse(z) {
                        Ok(found) => found,
                        Err(_) if r > 0.05 => continue,
                        Err(why) => panic!("{}: {why}", case.name),
                    };
                    let miss = (map.forward(found.at) - z).norm();
                    // Toward the vertex sent to infinity offsets are held from other corners, across the section: the
                    // promise is that of any point inside. Worst seen 8.2e-14, in a section of size 13.
                    let across = if given == map.at_infinity() { ACROSS } else { 0.0 };
                    assert!(miss <= 1e-11 * r + across, "{}: {miss:.1e} away from {z}", case.name);
                    seen += 1;
                }
            }
        }
    }
    assert!(seen >= 12 * 4 * SECTIONS, "only {seen} points were mapped");
}

#[test]
fn inverse_of_forward_is_the_same_place_in_the_half_plane() {
    let mut seen = 0;
    for (case, map) in maps() {
        for anchor in 0..map.line().n_points() {
            for ln_size in [-6.0, -2.0, -0.8] {
                for part in [0.1, 0.5, 0.8] {
                    let at = HalfPlanePoint { anchor, ln_offset: Complex64::new(ln_size, part * PI) };
                    let z = map.forward(at);
                    let again = map.inverse(z).unwrap_or_else(|why| panic!("{}: {why}", case.name)).at;
                    let difference = if again.anchor == anchor {
                        (again.ln_offset - at.ln_offset).norm()
                    } else {
                        // Held from another point: its image decides.
                        (map.forward(again) - z).norm()
                    };
                    // dz = f′ dζ: how far rounding of z moves ln ζ.
                    let slack = 1e-14 * (1.0 + z.norm() / map.log_derivative(at).norm());
                    assert!(difference <= 100.0 * slack, "{}: {difference:.1e} at {at:?}", case.name);
                    seen += 1;
                }
            }
        }
    }
    assert!(seen >= 27 * SECTIONS, "only {seen} points were mapped");
}

#[test]
fn places_on_sides_map_to_the_points_of_the_sides() {
    let mut seen = 0;
    for (case, map) in maps() {
        for side in 0..map.outline().n() {
            let (start, length) =
                (map.outline().point(side).unwrap(), map.outline().side_length(side).unwrap());
            for part in [0.0, 1e-9, 1e-3, 0.25, 0.5, 0.9, 1.0 - 1e-9, 1.0] {
                let s = part * length;
                let Some(at) = map.on_side(side, s) else {
                    // Only the vertex at infinity has no place on the line.
                    let vertex = if part < 0.5 { side } else { (side + 1) % map.outline().n() };
                    assert_eq!(vertex, map.at_infinity(), "{}: side {side} at {part}", case.name);
                    continue;
                };
                assert!(at.is_real(), "{}: {at:?} is off the axis", case.name);
                let miss = (map.forward(at) - start - map.outline().side_direction(side) * s).norm();
                assert!(miss <= 1e-13, "{}: {miss:.1e} away on side {side} at {part}", case.name);
                seen += 1;
            }
        }
    }
    assert!(seen >= 20 * SECTIONS, "only {seen} places were mapped");
}

/// Every number of an answer, bit by bit.
fn bits(solution: &Solution, points: &[Complex64]) -> Vec<u64> {
    let mut numbers: Vec<f64> = solution.matrix().values.concat();
    numbers.extend([solution.matrix().error, solution.residual(), solution.relative_error()]);
    numbers.extend(solution.reciprocity());
    numbers.extend(solution.shape_factor().into_iter().flat_map(|g| [g.value, g.error]));
    for probe in solution.probe_many(points).into_iter().flatten() {
        numbers.extend([
            probe.potential.value,
            probe.potential.error,
            probe.stream.value,
            probe.stream.error,
        ]);
        if let Gradient::Finite { components: [x, y], error } = probe.gradient {
            numbers.extend([x, y, error]);
        }
    }
    numbers.into_iter().map(f64::to_bits).collect()
}

#[test]
fn one_thread_and_two_give_the_same_bits() {
    let mut sections: Vec<IrregularCase> = (0..5).map(|number| irregular(70_000 + number)).collect();
    // Thirty sides, so that the work on the sides is really shared out.
    let large =
        load_irregular().into_iter().find(|section| section.name == "random_30").expect("it is listed");
    sections.push(IrregularCase {
        name: large.name.clone(),
        vertices: large.outer.iter().map(|&[x, y]| Complex64::new(x, y)).collect(),
        held: large
            .sides
            .iter()
            .map(|side| match side {
                sc_tests::reference::IrregularSide::Value(value) => Some(*value),
                _ => None,
            })
            .collect(),
    });
    let mut seen = 0;
    for case in sections {
        let points = case.interior_points(3000, 0.0);
        let with = |threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            pool.install(|| bits(&case.section().solve().unwrap(), &points))
        };
        let (one, two) = (with(1), with(2));
        assert!(one.len() > 4 * points.len(), "{}: probes failed", case.name);
        assert_eq!(one, two, "{}", case.name);
        seen += 1;
    }
    assert_eq!(seen, 6);
}
