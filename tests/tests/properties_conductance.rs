//! What every conductance matrix and every flux must satisfy, whatever the section.

use sc_core::answers::Solution;
use sc_tests::generate::{IrregularCase, irregular};
use sc_tests::held_section::{HeldSection, finite, walking_side};

/// Sections looked at by each check.
const SECTIONS: u32 = 60;

fn solved() -> impl Iterator<Item = (IrregularCase, HeldSection, Solution)> {
    (0..SECTIONS).map(|number| {
        let case = irregular(20_000 + number);
        let section = case.section();
        let solution = section.solve().unwrap_or_else(|why| panic!("{}: {why}", case.name));
        (case, section, solution)
    })
}

#[test]
fn matrices_are_symmetric_with_rows_that_sum_to_zero_and_only_the_diagonal_positive() {
    let (mut two, mut three) = (0, 0);
    for (case, section, solution) in solved() {
        let (name, matrix) = (&case.name, solution.matrix());
        let size = matrix.values.len();
        assert_eq!(size, section.levels.len(), "{name}");
        for (r, row) in matrix.values.iter().enumerate() {
            assert_eq!(row.len(), size, "{name}");
            let sum: f64 = row.iter().sum();
            assert!(sum.abs() <= size as f64 * matrix.error, "{name}: row {r} sums to {sum:.1e}");
            for (c, &entry) in row.iter().enumerate() {
                let other = matrix.values[c][r];
                assert!((entry - other).abs() <= 2.0 * matrix.error, "{name}: {entry} against {other}");
                let right_sign = if r == c { entry > 0.0 } else { entry <= matrix.error };
                assert!(right_sign, "{name}: entry ({r}, {c}) is {entry}");
            }
        }
        match size {
            2 => two += 1,
            _ => three += 1,
        }
    }
    assert_eq!(two + three, SECTIONS);
    assert!(two >= 15 && three >= 15, "{two} sections with two electrodes, {three} with three");
}

#[test]
fn conductance_times_that_of_the_conjugate_section_is_one() {
    let mut seen = 0;
    for (case, section, solution) in solved() {
        if section.levels.len() != 2 {
            assert!(solution.reciprocity().is_none(), "{}: three electrodes have no conjugate", case.name);
            continue;
        }
        let own = solution.reciprocity().unwrap_or_else(|| panic!("{}: no second way", case.name));
        assert!(own <= solution.relative_error(), "{}: {own:.1e} is not in the bound", case.name);
        // The same by an independent run: held and insulated sides exchanged.
        let n = case.held.len();
        let mut runs = 0;
        let mut held: Vec<Option<f64>> = vec![None; n];
        let first = (0..n).find(|&k| case.held[k].is_none() && case.held[(k + n - 1) % n].is_some()).unwrap();
        for k in (0..n).map(|i| (first + i) % n).filter(|&k| case.held[k].is_none()) {
            if case.held[(k + n - 1) % n].is_some() {
                runs += 1;
            }
            held[k] = Some(f64::from(runs));
        }
        assert_eq!(runs, 2, "{}", case.name);
        let conjugate = HeldSection::by_run(finite(&case.vertices), &held).solve().unwrap();
        let (g, h) = (solution.shape_factor().unwrap(), conjugate.shape_factor().unwrap());
        let product = g.value * h.value;
        let allowed = product * (g.relative() + h.relative());
        assert!((product - 1.0).abs() <= allowed, "{}: {product} off by more than {allowed:.1e}", case.name);
        seen += 1;
    }
    assert!(seen >= 15, "only {seen} sections have two electrodes");
}

#[test]
fn flux_in_equals_flux_out_and_electrodes_take_the_sum_of_their_sides() {
    let mut seen = 0;
    for (case, section, solution) in solved() {
        let fluxes: Vec<_> = (0..section.levels.len()).map(|e| solution.electrode_flux(e)).collect();
        let (sum, bound) = fluxes.iter().fold((0.0, 0.0), |s, f| (s.0 + f.value, s.1 + f.error));
        assert!(sum.abs() <= bound, "{}: {sum:.1e} is lost, bound {bound:.1e}", case.name);
        for (electrode, flux) in fluxes.iter().enumerate() {
            let own = (0..case.held.len()).filter(|&k| section.electrodes[k] == Some(electrode));
            let sides = own.map(|k| solution.side_flux(walking_side(solution.section().outline(), k)));
            let (sum, bound) = sides.fold((0.0, 0.0), |s, f| (s.0 + f.value, s.1 + f.error));
            let difference = (sum - flux.value).abs();
            assert!(
                difference <= bound + flux.error,
                "{}: electrode {electrode}: {difference:.1e}",
                case.name
            );
            seen += 1;
        }
    }
    assert!(seen >= 2 * SECTIONS, "only {seen} electrodes were looked at");
}

#[test]
fn electrode_fluxes_are_the_matrix_times_the_levels() {
    let mut seen = 0;
    for (case, section, solution) in solved() {
        let matrix = solution.matrix();
        for (r, row) in matrix.values.iter().enumerate() {
            let expected: f64 = row.iter().zip(&section.levels).map(|(g, level)| g * level).sum();
            let weight: f64 = section.levels.iter().map(|level| level.abs()).sum();
            let found = solution.electrode_flux(r);
            let difference = (found.value - expected).abs();
            assert!(difference <= found.error + weight * matrix.error, "{}: {difference:.1e}", case.name);
            seen += 1;
        }
    }
    assert!(seen >= 2 * SECTIONS, "only {seen} electrodes were looked at");
}

#[test]
fn fluxes_of_parts_add_up_to_the_flux_of_their_side() {
    let mut seen = 0;
    for (case, _, solution) in solved() {
        let outline = solution.section().outline();
        for side in 0..outline.n() {
            let length = outline.side_length(side).unwrap();
            let whole = solution.side_flux(side);
            // Parts from 1e-9 of the side up, at both of its ends, where the flux is singular.
            let places = [0.0, 1e-9, 1e-4, 0.1, 0.3, 0.7, 1.0 - 1e-4, 1.0 - 1e-9, 1.0];
            let parts =
                places.windows(2).map(|p| solution.part_flux(side, p[0] * length, p[1] * length).unwrap());
            let parts: Vec<_> = parts.collect();
            let (sum, bound) = parts.iter().fold((0.0, 0.0), |s, f| (s.0 + f.value, s.1 + f.error));
            let difference = (sum - whole.value).abs();
            assert!(
                difference <= bound + whole.error,
                "{}: side {side}: parts differ by {difference:.1e} from {:.3}, bound {bound:.1e}",
                case.name,
                whole.value
            );
            seen += 1;
        }
    }
    assert!(seen >= 5 * SECTIONS, "only {seen} sides were looked at");
}

#[test]
fn levels_enter_linearly_and_their_common_part_not_at_all() {
    let mut seen = 0;
    for (case, section, solution) in solved().take(20) {
        let mut other = section.clone();
        other.levels.iter_mut().for_each(|level| *level = 100.0 - 3.0 * *level);
        let other = other.solve().unwrap();
        let (a, b) = (solution.matrix(), other.matrix());
        for (x, y) in a.values.iter().flatten().zip(b.values.iter().flatten()) {
            assert!((x - y).abs() <= a.error + b.error, "{}: {x} and {y}", case.name);
        }
        for electrode in 0..section.levels.len() {
            let (one, two) = (solution.electrode_flux(electrode), other.electrode_flux(electrode));
            let difference = (two.value + 3.0 * one.value).abs();
            assert!(difference <= two.error + 3.0 * one.error, "{}: {difference:.1e}", case.name);
        }
        for z in case.interior_points(5, 0.05) {
            let (one, two) = (solution.probe(z).unwrap().potential, other.probe(z).unwrap().potential);
            let difference = (two.value - (100.0 - 3.0 * one.value)).abs();
            // The level 100 is rounded in itself.
            let rounding = 100.0 * f64::EPSILON;
            assert!(difference <= two.error + 3.0 * one.error + rounding, "{}: {difference:.1e}", case.name);
        }
        seen += 1;
    }
    assert_eq!(seen, 20);
}
