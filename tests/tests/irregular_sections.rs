//! Irregular sections, for which nobody has a closed form, against methods that share no code with the map: the
//! table of `reference-data/irregular.json` (high-order finite elements and rational least squares, by general-purpose
//! code) and the rational least squares of `sc_tests::rational` on ten more sections.

use std::sync::LazyLock;

use num_complex::Complex64;
use rayon::prelude::*;
use sc_core::answers::{Bounded, Solution};
use sc_core::outline::Vertex;
use sc_tests::generate::irregular_ten;
use sc_tests::held_section::{HeldSection, finite, walking_side};
use sc_tests::rational::RationalOptions;
use sc_tests::reference::{IrregularSection, IrregularSide, load_irregular};

/// The sections of the table with constant held values and without a hole; walls of no thickness included.
static TABLE: LazyLock<Vec<(IrregularSection, Solution)>> = LazyLock::new(|| {
    let constant = |side: &IrregularSide| matches!(side, IrregularSide::Insulated | IrregularSide::Value(_));
    load_irregular()
        .into_iter()
        .filter(|section| section.hole.is_none() && section.sides.iter().all(constant))
        .map(|section| {
            let vertices: Vec<Vertex> = section.outer.iter().map(|&[x, y]| Vertex::at(x, y)).collect();
            let held: Vec<Option<f64>> = section.sides.iter().map(value).collect();
            let solved = HeldSection::by_level(vertices, &held).solve();
            let solution = solved.unwrap_or_else(|why| panic!("{}: {why}", section.name));
            (section, solution)
        })
        .collect()
});

fn value(side: &IrregularSide) -> Option<f64> {
    match *side {
        IrregularSide::Value(value) => Some(value),
        _ => None,
    }
}

/// The found value agrees with another method's within the bounds of both.
#[track_caller]
fn assert_within(label: &str, found: Bounded, expected: f64, its_error: f64) {
    let difference = (found.value - expected).abs();
    assert!(
        difference <= found.error + its_error,
        "{label}: {} against {expected}, difference {difference:.2e} beyond the bounds {:.1e} + {its_error:.1e}",
        found.value,
        found.error
    );
}

/// The program's own bound is no excuse: relative to `scale` it stays below this on every section here.
const SMALL: f64 = 1e-11;

#[test]
fn shape_factors_and_matrices_of_the_table_lie_within_both_bounds() {
    let (mut factors, mut entries) = (0, 0);
    for (section, solution) in TABLE.iter() {
        let name = &section.name;
        if let Some(expected) = section.conductance {
            let found = solution.shape_factor().unwrap_or_else(|| panic!("{name}: no shape factor"));
            assert_within(name, found, expected.value, expected.abs_err);
            assert!(found.relative() < SMALL, "{name}: bound {:.1e}", found.relative());
            // The bracket of the finite elements, wider than abs_err, is rigorous up to their rounding.
            let slack = 1e-12 * expected.value + found.error;
            assert!(found.value >= expected.lower - slack && found.value <= expected.upper + slack, "{name}");
            factors += 1;
        }
        if let Some(expected) = &section.matrix {
            let matrix = solution.matrix();
            assert_eq!(matrix.values.len(), expected.value.len(), "{name}");
            for (i, row) in expected.value.iter().enumerate() {
                for (j, &entry) in row.iter().enumerate() {
                    let found = Bounded::new(matrix.values[i][j], matrix.error);
                    assert_within(&format!("{name} ({i}, {j})"), found, entry, expected.abs_err[i][j]);
                    entries += 1;
                }
            }
        }
    }
    assert_eq!((TABLE.len(), factors, entries), (30, 24, 43));
}

#[test]
fn fluxes_of_the_table_lie_within_both_bounds() {
    let (mut electrodes, mut sides) = (0, 0);
    for (section, solution) in TABLE.iter() {
        if let Some(expected) = &section.flux {
            for (electrode, &flux) in expected.value.iter().enumerate() {
                let label = format!("{} electrode {electrode}", section.name);
                assert_within(&label, solution.electrode_flux(electrode), flux, expected.abs_err);
                electrodes += 1;
            }
        }
        if let Some(expected) = &section.side_flux {
            for (k, (flux, error)) in expected.value.iter().zip(&expected.abs_err).enumerate() {
                let (Some(flux), Some(error)) = (flux, error) else { continue };
                let found = solution.side_flux(walking_side(solution.section().outline(), k));
                assert_within(&format!("{} side {k}", section.name), found, *flux, *error);
                sides += 1;
            }
        }
    }
    assert_eq!((electrodes, sides), (61, 68));
}

#[test]
fn potentials_of_the_table_lie_within_both_bounds() {
    let mut seen = 0;
    for (section, solution) in TABLE.iter() {
        for (i, point) in section.points.iter().enumerate() {
            let label = format!("{} point {i}", section.name);
            let found = match (point.side, point.fraction) {
                (Some(side), Some(fraction)) => {
                    let outline = solution.section().outline();
                    let side = walking_side(outline, side);
                    let length = outline.side_length(side).unwrap_or(0.0);
                    solution.probe_on_side(side, fraction * length)
                }
                _ => solution.probe(Complex64::new(point.x, point.y)),
            };
            let found = found.unwrap_or_else(|why| panic!("{label}: {why}"));
            assert_within(&label, found.potential, point.potential, point.abs_err);
            assert!(found.potential.error < 10.0 * SMALL, "{label}: bound {:.1e}", found.potential.error);
            seen += 1;
        }
    }
    assert_eq!(seen, 94);
}

#[test]
fn ten_more_sections_agree_with_rational_least_squares_within_both_bounds() {
    let cases = irregular_ten();
    let compared: Vec<[usize; 3]> = cases
        .par_iter()
        .map(|case| {
            let name = &case.name;
            let probes = case.probes();
            let other = case.problem().solve_with_probes(&RationalOptions::default(), &probes).unwrap();
            let solution = HeldSection::by_run(finite(&case.vertices), &case.held).solve().unwrap();
            let rows = other.conductance_matrix().expect("electrodes do not touch");
            let matrix = solution.matrix();
            assert_eq!(matrix.values.len(), rows.len(), "{name}");
            for (i, row) in rows.iter().enumerate() {
                for (j, entry) in row.iter().enumerate() {
                    let found = Bounded::new(matrix.values[i][j], matrix.error);
                    assert_within(&format!("{name} ({i}, {j})"), found, entry.value, entry.error);
                }
                let flux = other.electrode_flux(i).expect("electrodes do not touch");
                assert_within(
                    &format!("{name} flux {i}"),
                    solution.electrode_flux(i),
                    flux.value,
                    flux.error,
                );
            }
            let scale = matrix.values.iter().flatten().fold(0.0_f64, |m, v| m.max(v.abs()));
            assert!(matrix.error < SMALL * scale, "{name}: bound {:.1e} of {scale:.1e}", matrix.error);
            for (i, &point) in probes.iter().enumerate() {
                let expected = other.probe(i).expect("the probe was asked for");
                let found = solution.probe(point).unwrap().potential;
                assert_within(&format!("{name} probe {i}"), found, expected.value, expected.error);
            }
            let mut factors = 0;
            if let Some(expected) = other.conductance() {
                assert_within(name, solution.shape_factor().unwrap(), expected.value, expected.error);
                factors += 1;
            }
            [rows.len() * rows.len(), probes.len(), factors]
        })
        .collect();
    let total = compared.iter().fold([0; 3], |sum, c| [sum[0] + c[0], sum[1] + c[1], sum[2] + c[2]]);
    // Seven sections with two electrodes, three with three; three probes in each.
    assert_eq!(total, [7 * 4 + 3 * 9, 30, 7]);
}
