//! Walls of no thickness.

use super::super::{OutlineFault as Fault, OutlineWarning, SideIdx, Vertex, VertexIdx};
use super::{accepted, assert_angles, clean, corners, faults};

#[test]
fn a_hanging_wall_has_a_tip_of_two() {
    let wall = [(0.0, 0.0), (5.0, 0.0), (5.0, 2.0), (2.0, 2.0), (2.0, 1.0), (2.0, 2.0), (0.0, 2.0)];
    assert_angles(&clean(&corners(&wall)), &[0.5, 0.5, 0.5, 0.5, 2.0, 0.5, 0.5], 0.0);
}

#[test]
fn a_wall_may_start_at_a_corner() {
    let wall = [(0.0, 0.0), (1.0, 1.0), (0.0, 0.0), (3.0, 0.0), (3.0, 3.0), (0.0, 3.0)];
    assert_angles(&clean(&corners(&wall)), &[0.25, 2.0, 0.25, 0.5, 0.5, 0.5], 2.0 * f64::EPSILON);
}

#[test]
fn an_inclined_wall_closes_within_rounding() {
    let foot = (0.1 + 0.2, 2.5);
    let wall = [(0.0, 0.0), (4.1, 0.0), (4.1, 2.5), foot, (0.7, 1.1), foot, (0.0, 2.5)];
    let tilt = (0.4_f64).atan2(1.4) / std::f64::consts::PI;
    assert_angles(&clean(&corners(&wall)), &[0.5, 0.5, 0.5, 0.5 - tilt, 2.0, 0.5 + tilt, 0.5], 1e-15);
}

#[test]
fn a_kinked_wall_has_both_angles_at_its_kink() {
    let wall = [
        (0.0, 0.0),
        (4.0, 0.0),
        (4.0, 3.0),
        (2.0, 3.0),
        (2.0, 2.0),
        (3.0, 2.0),
        (2.0, 2.0),
        (2.0, 3.0),
        (0.0, 3.0),
    ];
    assert_angles(&clean(&corners(&wall)), &[0.5, 0.5, 0.5, 0.5, 0.5, 2.0, 1.5, 0.5, 0.5], 0.0);
}

#[test]
fn two_walls_may_share_a_foot_and_a_wall_may_branch() {
    let shared = [
        (0.0, 0.0),
        (4.0, 0.0),
        (4.0, 4.0),
        (2.0, 4.0),
        (3.0, 3.0),
        (2.0, 4.0),
        (1.0, 3.0),
        (2.0, 4.0),
        (0.0, 4.0),
    ];
    assert_angles(
        &clean(&corners(&shared)),
        &[0.5, 0.5, 0.5, 0.25, 2.0, 0.5, 2.0, 0.25, 0.5],
        2.0 * f64::EPSILON,
    );
    // A T: stem down from (2, 4), bar from (1, 2) to (3, 2).
    let branched = [
        (0.0, 0.0),
        (4.0, 0.0),
        (4.0, 4.0),
        (2.0, 4.0),
        (2.0, 2.0),
        (3.0, 2.0),
        (1.0, 2.0),
        (2.0, 2.0),
        (2.0, 4.0),
        (0.0, 4.0),
    ];
    assert_angles(&clean(&corners(&branched)), &[0.5, 0.5, 0.5, 0.5, 0.5, 2.0, 2.0, 0.5, 0.5, 0.5], 0.0);
}

#[test]
fn several_walls_from_both_sides() {
    let baffles = [
        (0.0, 0.0),
        (1.0, 0.0),
        (1.0, 0.7),
        (1.0, 0.0),
        (2.2, 0.0),
        (2.2, 0.5),
        (2.2, 0.0),
        (3.0, 0.0),
        (3.0, 1.0),
        (1.6, 1.0),
        (1.6, 0.35),
        (1.6, 1.0),
        (0.0, 1.0),
    ];
    let expected = [0.5, 0.5, 2.0, 0.5, 0.5, 2.0, 0.5, 0.5, 0.5, 0.5, 2.0, 0.5, 0.5];
    assert_angles(&clean(&corners(&baffles)), &expected, 0.0);
}

#[test]
fn a_clockwise_outline_keeps_its_walls() {
    let mut wall = vec![(0.0, 0.0), (5.0, 0.0), (5.0, 2.0), (2.0, 2.0), (2.0, 1.0), (2.0, 2.0), (0.0, 2.0)];
    wall.reverse();
    let warned = accepted(&corners(&wall));
    assert_eq!(warned.warnings, [OutlineWarning::Reversed]);
    let tip = warned.value.alpha().iter().position(|&a| a == 2.0).unwrap();
    assert_eq!(warned.value.given_vertex(tip), VertexIdx(2));
}

#[test]
fn the_faces_may_be_cut_in_different_places() {
    // One face cut at thirds that are not on the line in binary, the other not at all.
    let (foot, tip) = ((2.3, 1.5), (2.2, 0.1));
    let cut = |t: f64| (foot.0 + (tip.0 - foot.0) * t, foot.1 + (tip.1 - foot.1) * t);
    let outline = clean(&corners(&[
        (0.0, 0.0),
        (4.0, 0.0),
        (4.0, 1.5),
        foot,
        cut(1.0 / 3.0),
        cut(2.0 / 3.0),
        tip,
        cut(0.1),
        foot,
        (0.0, 1.5),
    ]));
    assert_eq!([4, 5, 6, 7].map(|k| outline.alpha()[k]), [1.0, 1.0, 2.0, 1.0]);
    super::assert_closed(&outline);
}

#[test]
fn a_face_typed_with_ten_digits_is_brought_onto_the_wall() {
    let given = corners(&[
        (0.0, 0.0),
        (3.0, 0.0),
        (3.0, 3.0),
        (2.0, 3.0),
        (1.666_666_667, 2.0),
        (1.0, 0.0 + 1e-3),
        (2.0, 3.0),
        (0.0, 3.0),
    ]);
    // (5/3, 2) is a third of the way down a wall to (1, 0); here the tip is a little short of the floor.
    let mut exact = given.clone();
    exact[4] = Vertex::at(2.0 - 0.999 / 2.999, 3.0 - 0.999);
    exact[5] = Vertex::at(1.0, 1e-3);
    assert_eq!(clean(&exact).alpha()[4..6], [1.0, 2.0]);
    let mut typed = exact.clone();
    typed[4] = Vertex::at(2.0 - 0.999 / 2.999 + 3e-10, 3.0 - 0.999);
    let warned = accepted(&typed);
    assert!(
        matches!(
            warned.warnings[..],
            [OutlineWarning::VertexMovedToSide { vertex: VertexIdx(4), onto: SideIdx(5), distance }] if distance < 3e-10
        ),
        "{:?}",
        warned.warnings
    );
    assert_eq!(warned.value.alpha()[4..6], [1.0, 2.0]);
}

#[test]
fn a_wall_may_end_far_less_than_the_coincidence_limit_short_of_a_side() {
    for gap in [1e-3, 1e-9, 1e-12, 1e-14] {
        let wall = [(0.0, 0.0), (4.0, 0.0), (4.0, 1.0), (2.0, 1.0), (2.0, gap), (2.0, 1.0), (0.0, 1.0)];
        let outline = clean(&corners(&wall));
        assert_eq!(outline.alpha()[4], 2.0);
        assert_eq!(outline.point(4).unwrap().im, gap);
    }
}

#[test]
fn a_wall_that_reaches_a_side_or_a_corner_is_refused() {
    let to_side = [(0.0, 0.0), (4.0, 0.0), (4.0, 1.0), (2.0, 1.0), (2.0, 0.0), (2.0, 1.0), (0.0, 1.0)];
    assert_eq!(faults(&corners(&to_side)), [Fault::VertexOnSide { vertex: VertexIdx(4), side: SideIdx(0) }]);
    let to_corner = [(0.0, 0.0), (4.0, 0.0), (4.0, 1.0), (2.0, 1.0), (0.0, 0.0), (2.0, 1.0), (0.0, 1.0)];
    assert_eq!(
        faults(&corners(&to_corner)),
        [Fault::VerticesTouch { first: VertexIdx(0), second: VertexIdx(4) }]
    );
}

#[test]
fn a_wall_that_crosses_a_side_is_refused() {
    let through = [(0.0, 0.0), (4.0, 0.0), (4.0, 1.0), (2.0, 1.0), (2.0, -1.0), (2.0, 1.0), (0.0, 1.0)];
    let found = faults(&corners(&through));
    assert_eq!(found.len(), 2);
    assert!(found.iter().all(|f| matches!(f, Fault::SidesCross { first: SideIdx(0), .. })), "{found:?}");
}

#[test]
fn a_spike_outside_the_section_is_refused() {
    let spike = [(0.0, 0.0), (2.0, 0.0), (3.0, -1.0), (2.0, 0.0), (2.0, 2.0), (0.0, 2.0)];
    assert_eq!(faults(&corners(&spike)), [Fault::Spike { vertex: VertexIdx(2) }]);
    // Along a side: the outline overshoots a corner and comes back.
    let overshoot = [(0.0, 0.0), (3.0, 0.0), (2.0, 0.0), (2.0, 2.0), (0.0, 2.0)];
    assert_eq!(faults(&corners(&overshoot)), [Fault::Spike { vertex: VertexIdx(1) }]);
}

#[test]
fn a_corner_may_be_extended_into_the_section_as_a_wall() {
    // A step whose face runs on as a wall: the foot is listed once.
    let step = [(0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (2.0, 3.0), (2.0, 1.0), (2.0, 2.0), (0.0, 2.0)];
    assert_angles(&clean(&corners(&step)), &[0.5, 0.5, 0.5, 0.5, 2.0, 0.5, 0.5], 0.0);
}

#[test]
fn lobes_joined_by_a_channel_of_no_width_are_refused() {
    let dumbbell = [
        (0.0, 0.0),
        (1.0, 0.0),
        (1.0, 1.0),
        (2.0, 1.0),
        (2.0, 0.0),
        (3.0, 0.0),
        (3.0, 2.0),
        (2.0, 2.0),
        (2.0, 1.0),
        (1.0, 1.0),
        (1.0, 2.0),
        (0.0, 2.0),
    ];
    assert_eq!(faults(&corners(&dumbbell)), [Fault::NoWidth { first: SideIdx(2), second: SideIdx(8) }]);
    // The channel as wide as a coincidence allows to be seen, but nothing more.
    let mut narrow = dumbbell;
    narrow[2].1 -= 1e-10;
    narrow[3].1 -= 1e-10;
    assert_eq!(faults(&corners(&narrow)), [Fault::NoWidth { first: SideIdx(2), second: SideIdx(8) }]);
}

#[test]
fn sides_over_one_another_in_the_same_direction_are_refused() {
    let twice = [(0.0, 0.0), (4.0, 0.0), (2.0, 2.0), (1.0, 0.0), (3.0, 0.0), (0.0, 4.0)];
    assert!(
        faults(&corners(&twice)).contains(&Fault::SidesOverlap { first: SideIdx(0), second: SideIdx(3) })
    );
}

#[test]
fn an_island_may_hang_on_a_wall() {
    // A square island joined to the floor: the section is all around it.
    let island = [
        (0.0, 0.0),
        (2.5, 0.0),
        (2.5, 2.0),
        (2.0, 2.0),
        (2.0, 3.0),
        (3.0, 3.0),
        (3.0, 2.0),
        (2.5, 2.0),
        (2.5, 0.0),
        (5.0, 0.0),
        (5.0, 5.0),
        (0.0, 5.0),
    ];
    let expected = [0.5, 0.5, 0.5, 1.5, 1.5, 1.5, 1.5, 0.5, 0.5, 0.5, 0.5, 0.5];
    assert_angles(&clean(&corners(&island)), &expected, 0.0);
}

#[test]
fn feet_that_differ_by_rounding_are_the_same_point() {
    let b: f64 = 12.3;
    let (foot, foot_again) = (b / 3.0, b - 2.0 * b / 3.0);
    assert_ne!(foot, foot_again);
    let wall = [(0.0, -5.0), (b, -5.0), (b, 0.0), (foot, 0.0), (foot, -4.0), (foot_again, 0.0), (0.0, 0.0)];
    let outline = clean(&corners(&wall));
    assert_eq!(outline.point(3), outline.point(5));
    assert_angles(&outline, &[0.5, 0.5, 0.5, 0.5, 2.0, 0.5, 0.5], 0.0);
    let mut typed = wall;
    typed[5].0 += 1e-9;
    assert!(matches!(
        accepted(&corners(&typed)).warnings[..],
        [OutlineWarning::VertexMovedToVertex { vertex: VertexIdx(5), onto: VertexIdx(3), .. }]
    ));
}
