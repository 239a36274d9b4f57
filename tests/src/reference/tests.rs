use super::*;

/// The cases of all files, the published maps included.
fn all_cases() -> Vec<Case> {
    let mut cases = load_cases();
    cases.extend(load_published_maps());
    cases
}

#[test]
fn every_file_has_all_its_rows() {
    let rows = CASE_FILES.map(|file| load_case_file(file).len());
    assert_eq!(rows, [87, 68, 68, 61, 68]);
    assert_eq!(load_published_maps().len(), 53);
    assert_eq!(load_irregular().len(), 42);
    assert_eq!(load_simple_300().len(), 300);
}

#[test]
fn bounded_rows_are_counted() {
    let bounded = CASE_FILES.map(|file| load_case_file(file).iter().filter(|case| case.bounded).count());
    assert_eq!(bounded, [0, 35, 19, 41, 52]);
}

#[test]
fn ids_are_unique_and_stand_in_their_file() {
    let mut ids = std::collections::BTreeSet::new();
    for file in CASE_FILES {
        assert!(load_case_file(file).iter().all(|case| case.discipline == file), "{file}");
    }
    for case in all_cases() {
        assert!(ids.insert(case.id.clone()), "{} twice", case.id);
    }
}

#[test]
fn angles_sum_to_n_minus_two_and_agree_with_the_outline() {
    for case in all_cases().iter().filter(|case| !case.vertices.is_empty()) {
        let n = case.vertices.len();
        assert_eq!(case.angles_over_pi.len(), n, "{}", case.id);
        let sum: f64 = case.angles_over_pi.iter().sum();
        assert_abs(&case.id, sum, n as f64 - 2.0, 1e-13 * n as f64);
        for k in 0..n {
            let expected = match case.vertices[k] {
                Vertex::Away { arriving, leaving } => (arriving - leaving) / 180.0,
                Vertex::Finite(_) => finite_angle(case, k),
            };
            // a full turn, at a slit, reads 0 or 2 by rounding
            let difference = (case.angles_over_pi[k] - expected).rem_euclid(2.0);
            assert!(difference.min(2.0 - difference) < 1e-13, "{} vertex {k}: {expected}", case.id);
        }
        let flat: Vec<usize> = (0..n).filter(|&k| (case.angles_over_pi[k] - 1.0).abs() < 1e-15).collect();
        assert_eq!(case.flat_vertices, flat, "{}", case.id);
    }
}

/// Interior angle over π at a finite vertex, modulo 2.
fn finite_angle(case: &Case, k: usize) -> f64 {
    let n = case.vertices.len();
    let Vertex::Finite(here) = case.vertices[k] else { panic!("vertex {k} lies at infinity") };
    let direction = |vertex: Vertex, outgoing: bool| match vertex {
        Vertex::Finite(z) => (z - here).arg().to_degrees(),
        Vertex::Away { arriving, leaving } => {
            if outgoing {
                arriving
            } else {
                leaving
            }
        }
    };
    let outgoing = direction(case.vertices[(k + 1) % n], true);
    let incoming = direction(case.vertices[(k + n - 1) % n], false);
    (incoming - outgoing) / 180.0
}

#[test]
fn every_case_has_a_condition_on_each_side_or_asks_for_the_map_alone() {
    for case in all_cases() {
        assert_eq!(
            case.bounded,
            !case.vertices.is_empty() && case.finite_vertices().is_some(),
            "{}",
            case.id
        );
        let map_alone = matches!(
            case.ask,
            Ask::CrossRatio { .. }
                | Ask::EllipticModulus { .. }
                | Ask::ConformalRadius { .. }
                | Ask::HarmonicMeasure { .. }
                | Ask::MapConstant { .. }
                | Ask::LogarithmicCapacity { .. }
                | Ask::PrevertexRatio { .. }
        );
        let expected = if map_alone { 0 } else { case.vertices.len() };
        assert_eq!(case.sides.len(), expected, "{}", case.id);
    }
}

#[test]
fn questions_refer_to_sides_and_vertices_that_exist() {
    for case in all_cases() {
        let (n, id) = (case.vertices.len(), &case.id);
        let indices: Vec<usize> = match &case.ask {
            Ask::Flux { sides, .. } | Ask::PotentialIntegral { sides, .. } => sides.clone(),
            Ask::Potential { place: Place::Vertex(vertex) } => {
                assert_eq!(case.sides[*vertex], Condition::Insulated, "{id}");
                assert_eq!(case.sides[(vertex + n - 1) % n], Condition::Insulated, "{id}");
                vec![*vertex]
            }
            Ask::GradientMagnitude { vertex, .. } => {
                assert_abs(id, case.angles_over_pi[*vertex], 0.5, 0.0);
                vec![*vertex]
            }
            Ask::ConductanceMatrix { electrodes } => {
                let Value::Matrix(rows) = &case.value else { panic!("{id}: one number for a matrix") };
                assert!(rows.iter().all(|row| row.len() == electrodes.len()), "{id}");
                assert_eq!(rows.len(), electrodes.len(), "{id}");
                electrodes.concat()
            }
            Ask::CrossRatio { vertices, .. }
            | Ask::EllipticModulus { vertices }
            | Ask::TransferResistance { contacts: vertices } => {
                assert!(vertices.is_sorted(), "{id}");
                vertices.to_vec()
            }
            Ask::Excess { arms, source, sink, .. } => {
                let ends: Vec<usize> = arms.iter().map(|arm| arm.vertex).collect();
                assert!(source.iter().chain(sink).all(|end| ends.contains(end)), "{id}");
                assert!(ends.iter().all(|&k| matches!(case.vertices[k], Vertex::Away { .. })), "{id}");
                ends
            }
            Ask::LogarithmicCapacity { image_sides, outline } => {
                assert_ne!(image_sides.is_empty(), outline.is_empty(), "{id}");
                image_sides.clone()
            }
            Ask::PrevertexRatio { numerator, denominator, zero, infinity } => {
                vec![*numerator, *denominator, *zero, *infinity]
            }
            Ask::HarmonicMeasure { from, to, .. } => vec![*from, *to],
            Ask::MapConstant { zero, one, infinity } => vec![*zero, *one, *infinity],
            _ => Vec::new(),
        };
        assert!(indices.iter().all(|&k| k < n), "{id}: {indices:?} of {n}");
    }
}

#[test]
fn conductances_lie_between_exactly_two_held_values() {
    let mut seen = 0;
    for case in load_cases() {
        if !matches!(case.ask, Ask::Conductance { .. } | Ask::Resistance { .. }) {
            continue;
        }
        seen += 1;
        let mut held: Vec<f64> = case
            .sides
            .iter()
            .filter_map(|side| match *side {
                Condition::Held(value) => Some(value),
                _ => None,
            })
            .collect();
        held.sort_by(f64::total_cmp);
        held.dedup();
        assert_eq!(held.len(), 2, "{}", case.id);
    }
    assert_eq!(seen, 129);
}

#[test]
fn bounded_cases_bound_the_rounding_of_their_inputs() {
    for case in all_cases().iter().filter(|case| case.bounded) {
        let sensitivity = case.input_sensitivity.unwrap_or(f64::INFINITY);
        // a case that moves by more than this is of no use at double precision
        assert!(sensitivity <= 1e-13 * case.value.scale().max(1.0), "{}: {sensitivity:e}", case.id);
        assert_eq!(case.value_at == ValueAt::ExactBinary, sensitivity <= 0.0, "{}", case.id);
    }
}

#[test]
fn data_that_are_harmonic_give_the_value_of_the_case() {
    // here the boundary function is the solution: it checks the functions and the readings of the points
    let mut seen = 0;
    for case in load_cases() {
        let known = ["harmonic-", "L-singular", "slit-square-singular"];
        let (Ask::Potential { place: Place::At(z) }, Some(value)) = (&case.ask, case.value.number()) else {
            continue;
        };
        let Some(Condition::Function(function)) = case.sides.first() else { continue };
        if known.iter().any(|prefix| case.id.starts_with(prefix)) {
            seen += 1;
            assert_abs(&case.id, function.value(*z), value, 1e-14 * value.abs() + case.allowance(0.0));
        }
    }
    assert_eq!(seen, 13);
}

#[test]
fn irregular_sections_have_one_condition_for_each_side() {
    for section in load_irregular() {
        let name = &section.name;
        assert_eq!(section.outer.len(), section.sides.len(), "{name}");
        let holes = section.hole.map(|hole| hole.len());
        assert_eq!(holes, section.hole_sides.map(|sides| sides.len()), "{name}");
        assert!(!section.points.is_empty(), "{name}");
        if let Some(conductance) = section.conductance {
            assert!(conductance.abs_err > 0.0 && conductance.lower <= conductance.upper, "{name}");
        }
    }
}

#[test]
fn simple_polygons_run_anticlockwise_and_hold_two_sides() {
    for section in load_simple_300() {
        let v = &section.vertices;
        let n = v.len();
        assert!((5..=50).contains(&n), "{}", section.id);
        let doubled_area: f64 =
            (0..n).map(|k| v[k][0] * v[(k + 1) % n][1] - v[(k + 1) % n][0] * v[k][1]).sum();
        assert!(doubled_area > 0.0, "{}", section.id);
        let [one, zero] = section.held;
        assert!(one < n && zero < n && one != zero, "{}", section.id);
    }
}

#[test]
fn a_mismatch_is_reported_with_both_numbers_and_the_allowance() {
    let failure = std::panic::catch_unwind(|| assert_rel("edge factor", 0.54, 0.5587287996946968, 1e-10))
        .expect_err("0.54 is 3 % off");
    let message = failure.downcast_ref::<String>().expect("a formatted message");
    for part in ["edge factor", "5.4", "5.5872879969469", "1.873e-2", "1.0e-10"] {
        assert!(message.contains(part), "{part} not in: {message}");
    }
    assert!(std::panic::catch_unwind(|| assert_rel("not a number", f64::NAN, 1.0, 1.0)).is_err());
}
