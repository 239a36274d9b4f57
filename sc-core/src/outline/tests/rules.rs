//! What is refused, what is mended, and the angles of plain bounded outlines.

use super::super::{
    COINCIDENCE, Outline, OutlineFault as Fault, OutlineWarning, Point, SideIdx, Vertex, VertexIdx,
};
use super::{accepted, assert_angles, clean, corners, faults};

const L: [(f64, f64); 6] = [(0.0, 0.0), (4.0, 0.0), (4.0, 1.0), (1.0, 1.0), (1.0, 3.0), (0.0, 3.0)];

#[test]
fn axis_aligned_angles_are_exact() {
    assert_angles(&clean(&corners(&L)), &[0.5, 0.5, 0.5, 1.5, 0.5, 0.5], 0.0);
}

#[test]
fn equilateral_angles_are_a_third() {
    let h = 0.75_f64.sqrt();
    assert_angles(&clean(&corners(&[(0.0, 0.0), (1.0, 0.0), (0.5, h)])), &[1.0 / 3.0; 3], 4.0 * f64::EPSILON);
}

#[test]
fn a_corner_straight_within_rounding_is_flat() {
    // (0.1, 0.3), (0.2, 0.6), (0.3, 0.9) are not collinear in binary.
    let outline = clean(&corners(&[(0.0, 0.0), (0.1, 0.3), (0.2, 0.6), (0.3, 0.9), (-1.0, 0.9)]));
    assert_eq!(outline.alpha()[1..3], [1.0, 1.0]);
    super::assert_closed(&outline);
}

#[test]
fn a_corner_that_turns_by_more_than_rounding_is_not_flat() {
    let bend = 1e-12;
    let outline = clean(&corners(&[(0.0, 0.0), (1.0, -bend), (2.0, 0.0), (1.0, 1.0)]));
    let expected = 1.0 - 2.0 * bend / std::f64::consts::PI;
    assert!((outline.alpha()[1] - expected).abs() < 1e-15, "{}", outline.alpha()[1]);
}

#[test]
fn short_sides_do_not_make_a_needle_flat() {
    // Near (1, 2) a turn of 5e-9 passes for rounding, but the needle's ends have nothing else to open them.
    let needle =
        [(2.0, 0.999_999_999_999), (3e-10, 3.000_000_000_3), (1.0, 2.000_000_01), (1.000_000_01, 2.0)];
    let outline = accepted(&corners(&needle)).value;
    super::assert_closed(&outline);
    assert!(outline.alpha()[0] > 1e-9 && outline.alpha()[3] > 1e-9, "{:?}", outline.alpha());
}

#[test]
fn a_clockwise_outline_is_walked_the_other_way_round_and_keeps_its_numbers() {
    let mut given = corners(&L);
    given.reverse();
    let warned = accepted(&given);
    assert_eq!(warned.warnings, [OutlineWarning::Reversed]);
    let outline = warned.value;
    assert!(outline.reversed());
    for k in 0..outline.n() {
        assert_eq!(outline.vertices()[k], given[outline.given_vertex(k).0]);
        // The same segment: the listed side leaves the listed vertex at which this side ends.
        let SideIdx(side) = outline.given_side(k);
        assert_eq!(outline.point(k + 1), given[side].point());
        assert_eq!(outline.point(k), given[(side + 1) % 6].point());
    }
    assert!(!clean(&corners(&L)).reversed());
    assert_eq!(clean(&corners(&L)).given_side(3), SideIdx(3));
}

#[test]
fn sides_know_their_length_and_direction() {
    let outline = clean(&corners(&L));
    assert_eq!(outline.side_vector(0), Some(Point::new(4.0, 0.0)));
    assert_eq!(outline.side_length(5), Some(3.0));
    assert_eq!(outline.side_direction(5), Point::new(0.0, -1.0));
    assert_eq!(outline.size(), 5.0);
    assert!(outline.is_bounded());
    // Indices go around.
    assert_eq!(outline.side_vector(6), outline.side_vector(0));
}

#[test]
fn numbers_that_are_none_are_all_reported() {
    let given = [
        Vertex::at(f64::NAN, 0.0),
        Vertex::at(1.0, f64::INFINITY),
        Vertex::away(f64::NAN),
        Vertex::at(1e200, 0.0),
        Vertex::at(0.0, 1.0),
    ];
    let found = faults(&given);
    assert_eq!(found.len(), 4);
    assert!(matches!(found[0], Fault::CoordinateNotFinite { vertex: VertexIdx(0), .. }));
    assert!(matches!(found[1], Fault::CoordinateNotFinite { vertex: VertexIdx(1), .. }));
    assert!(matches!(found[2], Fault::HeadingNotFinite { vertex: VertexIdx(2), .. }));
    assert!(matches!(found[3], Fault::CoordinateTooLarge { vertex: VertexIdx(3), .. }));
}

#[test]
fn headings_many_turns_away_are_refused() {
    let given = [Vertex::Away { arriving: 1e6, leaving: 0.0 }, Vertex::at(0.0, 0.0)];
    assert!(matches!(
        faults(&given)[..],
        [Fault::HeadingTooLarge { vertex: VertexIdx(0), arriving: 1e6, .. }]
    ));
}

#[test]
fn too_few_vertices_depend_on_the_kind_of_region() {
    assert_eq!(faults(&[]), [Fault::TooFewVertices { given: 0, needed: 3 }]);
    assert_eq!(faults(&corners(&[(0.0, 0.0), (1.0, 0.0)])), [Fault::TooFewVertices { given: 2, needed: 3 }]);
    assert_eq!(faults(&[Vertex::away(0.0)]), [Fault::TooFewVertices { given: 1, needed: 2 }]);
    assert_eq!(faults(&[Vertex::away(0.0), Vertex::away(90.0)]), [Fault::NoFiniteVertex { given: 2 }]);
}

#[test]
fn neighbours_closer_than_the_limit_are_one_point() {
    let mut given = L;
    given[1] = (1e-10, 0.0);
    assert!(matches!(
        faults(&corners(&given))[0],
        Fault::NeighboursCoincide { first: VertexIdx(0), second: VertexIdx(1), distance, .. } if distance == 1e-10
    ));
    // The last and the first vertex are neighbours too: a ring closed by hand is a fault.
    let closed = [(0.0, 0.0), (1.0, 0.0), (0.0, 1.0), (0.0, 0.0)];
    assert!(matches!(
        faults(&corners(&closed))[0],
        Fault::NeighboursCoincide { first: VertexIdx(3), second: VertexIdx(0), .. }
    ));
    // Above the limit they are two.
    let thin = 2.0 * COINCIDENCE;
    clean(&corners(&[(0.0, 0.0), (1.0, 0.0), (1.0, thin), (0.0, thin)]));
}

#[test]
fn crossing_sides_are_named_with_the_place() {
    let bow_tie = [(0.0, 0.0), (2.0, 2.0), (2.0, 0.0), (0.0, 1.0)];
    let found = faults(&corners(&bow_tie));
    let [Fault::SidesCross { first: SideIdx(0), second: SideIdx(2), x, y }] = found[..] else {
        panic!("{found:?}")
    };
    assert!((x - 2.0 / 3.0).abs() < 1e-15 && (y - 2.0 / 3.0).abs() < 1e-15);
    assert_eq!(
        Outline::new(&corners(&bow_tie)).unwrap_err().to_string(),
        "side 0 crosses side 2 near (0.666667, 0.666667)"
    );
}

#[test]
fn faults_of_a_clockwise_outline_are_in_the_users_numbers() {
    // Walked with the section on its right; sides 1 and 3 of the list cross.
    let given =
        [(0.0, 0.0), (0.0, 4.0), (3.0, 4.0), (3.0, 5.0), (-1.0, 3.0), (-1.0, 6.0), (4.0, 6.0), (4.0, 0.0)];
    let found = faults(&corners(&given));
    assert!(
        found.iter().any(|f| matches!(f, Fault::SidesCross { first: SideIdx(0), second: SideIdx(3), .. }))
    );
    assert!(
        found.iter().any(|f| matches!(f, Fault::SidesCross { first: SideIdx(1), second: SideIdx(3), .. }))
    );
    assert_eq!(found.len(), 2);
}

#[test]
fn several_faults_are_reported_at_once() {
    // Two coincident neighbours, a crossing, and a vertex on a side.
    let given =
        [(0.0, 0.0), (4.0, 0.0), (4.0, 0.0), (4.0, 4.0), (2.0, 0.0), (1.0, 4.0), (-1.0, 1.0), (1.0, 0.5)];
    let found = faults(&corners(&given));
    assert!(
        found.iter().any(|f| matches!(
            f,
            Fault::NeighboursCoincide { first: VertexIdx(1), second: VertexIdx(2), .. }
        ))
    );
    assert!(found.contains(&Fault::VertexOnSide { vertex: VertexIdx(4), side: SideIdx(0) }));
    let mut crossed = given;
    crossed[5] = (1.5, -1.0);
    let found = faults(&corners(&crossed));
    assert!(found.iter().any(|f| matches!(f, Fault::SidesCross { .. })));
    assert!(found.iter().any(|f| matches!(f, Fault::NeighboursCoincide { .. })));
}

#[test]
fn a_vertex_on_a_side_or_on_another_vertex_is_refused() {
    let on_side = [(0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (2.0, 0.0), (0.0, 3.0)];
    assert_eq!(faults(&corners(&on_side)), [Fault::VertexOnSide { vertex: VertexIdx(3), side: SideIdx(0) }]);
    let on_vertex = [(0.0, 0.0), (2.0, 0.0), (4.0, 0.0), (4.0, 3.0), (2.0, 0.0), (0.0, 3.0)];
    assert_eq!(
        faults(&corners(&on_vertex)),
        [Fault::VerticesTouch { first: VertexIdx(1), second: VertexIdx(4) }]
    );
    // A ring bent until its ends touch in a point.
    let bent =
        [(0.0, 0.0), (3.0, 0.0), (3.0, 3.0), (1.5, 2.0), (2.0, 1.0), (1.0, 1.0), (1.5, 2.0), (0.0, 3.0)];
    assert_eq!(faults(&corners(&bent)), [Fault::VerticesTouch { first: VertexIdx(3), second: VertexIdx(6) }]);
}

#[test]
fn a_lobe_joined_by_a_point_is_refused() {
    let eight = [(0.0, 0.0), (1.0, -1.0), (1.0, 1.0), (0.0, 0.0), (-1.0, 1.0), (-1.0, -1.0)];
    assert_eq!(
        faults(&corners(&eight)),
        [Fault::VerticesTouch { first: VertexIdx(0), second: VertexIdx(3) }]
    );
}

#[test]
fn nothing_enclosed_is_refused() {
    for flat in [
        vec![(0.0, 0.0), (1.0, 0.0), (2.0, 0.0)],
        vec![(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (1.0, 0.0)],
        vec![(0.0, 0.0), (0.3, 0.1), (0.9, 0.3), (0.6, 0.2)],
        vec![(0.0, 0.0), (1.0, 0.0), (0.5, 1e-10)],
    ] {
        let found = faults(&corners(&flat));
        assert!(matches!(found[..], [Fault::ZeroArea { .. }]), "{flat:?}: {found:?}");
    }
}

#[test]
fn a_section_that_its_coordinates_do_not_resolve_is_refused_and_a_doubtful_one_warned_of() {
    let at = |shift: f64| corners(&L.map(|(x, y)| (x + shift, y)));
    assert!(matches!(faults(&at(1e12))[..], [Fault::TooFarFromOrigin { .. }]));
    assert!(matches!(accepted(&at(1e7)).warnings[..], [OutlineWarning::FarFromOrigin { .. }]));
    assert_eq!(accepted(&at(1e7)).value.alpha(), clean(&corners(&L)).alpha());
    clean(&at(1e4));
}

#[test]
fn sections_too_small_to_square_are_refused() {
    assert!(matches!(
        faults(&corners(&L.map(|(x, y)| (x * 1e-150, y * 1e-150))))[..],
        [Fault::TooSmall { .. }]
    ));
    clean(&corners(&L.map(|(x, y)| (x * 1e-100, y * 1e-100))));
    clean(&corners(&L.map(|(x, y)| (x * 1e100, y * 1e100))));
}

#[test]
fn a_long_list_of_faults_is_cut_short_in_words_only() {
    let given: Vec<Vertex> = (0..50).map(|k| Vertex::at(f64::NAN, f64::from(k))).collect();
    let all = Outline::new(&given).unwrap_err();
    assert_eq!(all.0.len(), 50);
    assert!(all.to_string().ends_with("; and 30 more"), "{all}");
}
