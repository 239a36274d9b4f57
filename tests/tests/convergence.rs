//! The tolerance asked for is kept: errors and error estimates stay below it, from 1e-3 to 1e-12.

use num_complex::Complex64;
use sc_core::answers::SolveOptions;
use sc_tests::held_section::HeldSection;
use sc_tests::known::known;
use sc_tests::reference::{Ask, Case, Condition, load_case_file, load_published_maps};

/// Sections with a conductance in closed form: from the reference files and from symmetry.
fn sections() -> Vec<(String, HeldSection, f64)> {
    let wanted = [
        "l-resistor-4",
        "regular-5-resistor",
        "regular-20-resistor",
        "plus-2-opposite",
        "plus-3-adjacent",
        "trapezium-3",
        "parallelogram-1_6-3",
        "L3-modulus-0134",
        "square-in-square-1p1",
        "square-coax-50",
        "rect-offset-1-1-85",
        "septum-coax-3-1-w0p1",
    ];
    let mut cases: Vec<Case> = load_published_maps();
    cases.extend(["maps", "heat", "conductors"].into_iter().flat_map(load_case_file));
    let mut all: Vec<(String, HeldSection, f64)> = Vec::new();
    for case in cases.into_iter().filter(|case| wanted.contains(&case.id.as_str())) {
        let value = case.value.number().expect("one number");
        let conductance = match case.ask {
            Ask::Conductance { multiplier } => value / multiplier,
            Ask::Resistance { multiplier } => multiplier / value,
            _ => panic!("{}: another question", case.id),
        };
        let held: Vec<Option<f64>> = case
            .sides
            .iter()
            .map(|side| match *side {
                Condition::Held(level) => Some(level),
                _ => None,
            })
            .collect();
        let points: Vec<Complex64> = case.finite_vertices().expect("bounded");
        let vertices = sc_tests::held_section::finite(&points);
        all.push((case.id.clone(), HeldSection::by_level(vertices, &held), conductance));
    }
    assert_eq!(all.len(), wanted.len(), "sections in the files");
    for number in 0..12 {
        let known = known(500 + number);
        all.push((format!("{:?} {number}", known.family), known.section, known.conductance));
    }
    all
}

#[test]
fn error_and_estimate_are_at_most_the_tolerance_asked_for() {
    let (mut seen, mut loose, mut refused) = (0, 0, 0);
    for (name, section, expected) in sections() {
        for exponent in 3..=12 {
            let tolerance = 10.0_f64.powi(-exponent);
            let options = SolveOptions { tolerance, ..SolveOptions::default() };
            seen += 1;
            let solved = match section.solve_with(&options) {
                Ok(solved) => solved,
                Err(why) => {
                    println!("{name} at {tolerance:.0e}: {why}");
                    refused += 1;
                    continue;
                }
            };
            let found = solved.shape_factor().unwrap_or_else(|| panic!("{name}: no shape factor"));
            let error = (found.value / expected - 1.0).abs();
            assert!(error <= tolerance, "{name}: error {error:.1e} where {tolerance:.0e} was asked for");
            // What is reported is honest in any case.
            assert!(
                error <= found.relative() + 4.0 * f64::EPSILON,
                "{name}: error {error:.1e} at {tolerance:.0e}, estimate {:.1e}",
                found.relative()
            );
            if found.relative() > tolerance {
                println!("{name}: estimate {:.1e} where {tolerance:.0e} was asked for", found.relative());
                loose += 1;
            }
        }
    }
    assert_eq!(seen, 240);
    assert_eq!(refused, 0, "of {seen} solutions, {refused} were refused");
    assert_eq!(loose, 0, "of {seen} estimates, {loose} are above the tolerance asked for");
}

#[test]
fn a_tolerance_out_of_range_is_answered_as_well_as_can_be() {
    let known = known(3);
    let mut seen = 0;
    for tolerance in [0.0, -1.0, 1e-30, 1.0, 1e30, f64::INFINITY, f64::NAN] {
        let options = SolveOptions { tolerance, ..SolveOptions::default() };
        let Ok(solved) = known.section.solve_with(&options) else { panic!("refused at {tolerance}") };
        let found = solved.shape_factor().unwrap();
        let error = (found.value - known.conductance).abs();
        assert!(error <= found.error + 1e-15 && error <= 1e-2, "{tolerance}: {found:?}");
        seen += 1;
    }
    assert_eq!(seen, 7);
}
