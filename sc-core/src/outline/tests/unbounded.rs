//! Outlines with vertices at infinity.

use super::super::{OutlineFault as Fault, Point, SideIdx, Vertex, VertexIdx};
use super::{assert_angles, clean, faults};

fn at(x: f64, y: f64) -> Vertex {
    Vertex::at(x, y)
}

fn turn(arriving: f64, leaving: f64) -> Vertex {
    Vertex::Away { arriving, leaving }
}

#[test]
fn a_half_plane_needs_two_vertices() {
    let lower = clean(&[turn(180.0, 0.0), at(0.0, 0.0)]);
    assert_angles(&lower, &[-1.0, 1.0], 0.0);
    assert!(!lower.is_bounded());
    assert_eq!(lower.size(), 1.0);
    assert_eq!(lower.side_length(0), None);
    assert_eq!(lower.side_direction(0), Point::new(-1.0, 0.0));
    assert_eq!(lower.side_direction(1), Point::new(-1.0, 0.0));
    // The other way round it is the upper one.
    assert_angles(&clean(&[turn(0.0, 180.0), at(0.0, 0.0)]), &[-1.0, 1.0], 0.0);
}

#[test]
fn wedges_of_any_opening_close() {
    assert_angles(&clean(&[turn(90.0, 0.0), at(0.0, 0.0)]), &[-1.5, 1.5], 0.0);
    assert_angles(&clean(&[turn(0.0, 90.0), at(1.0, 1.0)]), &[-0.5, 0.5], 0.0);
    assert_angles(&clean(&[turn(0.0, 30.0), at(1.0, 1.0)]), &[-1.0 / 6.0, 1.0 / 6.0], 1e-16);
    assert_angles(&clean(&[turn(-12.5, 7.5), at(1.0, 1.0)]), &[-1.0 / 9.0, 1.0 / 9.0], 1e-16);
    // The plane outside a half-line of no thickness.
    assert_angles(&clean(&[turn(0.0, 360.0), at(0.0, 0.0)]), &[-2.0, 2.0], 0.0);
}

#[test]
fn strips_and_junctions_have_ends_of_zero() {
    let strip = [Vertex::away(0.0), at(0.0, 1.0), Vertex::away(180.0), at(0.0, 0.0)];
    assert_angles(&clean(&strip), &[0.0, 1.0, 0.0, 1.0], 0.0);
    let tee = [
        Vertex::away(0.0),
        at(0.0, 1.0),
        Vertex::away(180.0),
        at(-0.5, 0.0),
        Vertex::away(270.0),
        at(0.5, 0.0),
    ];
    assert_angles(&clean(&tee), &[0.0, 1.0, 0.0, 1.5, 0.0, 1.5], 0.0);
    let closed_end = [at(0.0, 0.0), at(1.0, 0.0), Vertex::away(90.0)];
    assert_angles(&clean(&closed_end), &[0.5, 0.5, 0.0], 0.0);
    let bend = [Vertex::away(90.0), at(0.0, 0.0), Vertex::away(0.0), at(0.1, 1.0)];
    assert_angles(&clean(&bend), &[0.0, 0.5, 0.0, 1.5], 0.0);
}

#[test]
fn a_slanted_strip_closes() {
    for heading in [17.0, 123.456, -59.0, 301.25] {
        let (sin, cos) = f64::to_radians(heading).sin_cos();
        let strip = [Vertex::away(heading), at(-sin, cos), Vertex::away(heading + 180.0), at(0.0, 0.0)];
        assert_angles(&clean(&strip), &[0.0, 1.0, 0.0, 1.0], 0.0);
    }
}

#[test]
fn a_half_plane_with_a_pit() {
    let pit = [turn(180.0, 0.0), at(1.0, 0.0), at(1.0, -0.25), at(-1.0, -0.25), at(-1.0, 0.0)];
    assert_angles(&clean(&pit), &[-1.0, 0.5, 1.5, 1.5, 0.5], 0.0);
}

#[test]
fn a_layer_with_a_sheet_pile() {
    let layer =
        [Vertex::away(0.0), at(0.0, 0.0), at(0.0, -0.1), at(0.0, 0.0), Vertex::away(180.0), at(0.0, -1.0)];
    assert_angles(&clean(&layer), &[0.0, 0.5, 2.0, 0.5, 0.0, 1.0], 0.0);
    // Levels that differ on the two sides of the pile: its foot is listed once.
    let step =
        [Vertex::away(0.0), at(0.0, -0.2), at(0.0, -0.6), at(0.0, 0.0), Vertex::away(180.0), at(0.0, -1.0)];
    assert_angles(&clean(&step), &[0.0, 0.5, 2.0, 0.5, 0.0, 1.0], 0.0);
    let deep = [turn(180.0, 0.0), at(0.0, -2.0), at(0.0, -3.0), at(0.0, 0.0)];
    assert_angles(&clean(&deep), &[-1.0, 0.5, 2.0, 0.5], 0.0);
}

#[test]
fn walls_may_run_to_infinity() {
    // A channel with a half-line of no thickness in it, from (0, 0.5) toward +x.
    let split =
        [Vertex::away(0.0), at(0.0, 0.5), Vertex::away(0.0), at(0.0, 1.0), Vertex::away(180.0), at(0.0, 0.0)];
    assert_angles(&clean(&split), &[0.0, 2.0, 0.0, 1.0, 0.0, 1.0], 0.0);
    // Its faces cut differently.
    let cut = [
        Vertex::away(0.0),
        at(7.0, 0.5),
        at(0.0, 0.5),
        at(3.0, 0.5),
        Vertex::away(0.0),
        at(0.0, 1.0),
        Vertex::away(180.0),
        at(0.0, 0.0),
    ];
    assert_angles(&clean(&cut), &[0.0, 1.0, 2.0, 1.0, 0.0, 1.0, 0.0, 1.0], 0.0);
}

#[test]
fn the_plane_outside_a_half_strip_turns_all_the_way_round() {
    assert_angles(&clean(&[turn(0.0, 360.0), at(0.0, -1.0), at(0.0, 1.0)]), &[-2.0, 1.5, 1.5], 0.0);
    // Without the full turn, or walked the other way round, headings and sides disagree.
    let found = faults(&[Vertex::away(0.0), at(0.0, -1.0), at(0.0, 1.0)]);
    assert!(
        matches!(found[..], [Fault::WrongSideAtInfinity { vertex: VertexIdx(0), needed: -2.0, .. }]),
        "{found:?}"
    );
    let found = faults(&[turn(0.0, 360.0), at(0.0, 1.0), at(0.0, -1.0)]);
    assert!(
        matches!(found[..], [Fault::WrongSideAtInfinity { vertex: VertexIdx(0), needed: 0.0, .. }]),
        "{found:?}"
    );
}

#[test]
fn a_strip_walked_the_wrong_way_round_is_refused_at_its_ends() {
    let strip = [Vertex::away(0.0), at(0.0, 0.0), Vertex::away(180.0), at(0.0, 1.0)];
    let found = faults(&strip);
    assert_eq!(found.len(), 2);
    assert!(
        matches!(found[0], Fault::WrongSideAtInfinity { vertex: VertexIdx(0), alpha: 0.0, needed: -2.0, .. }),
        "{found:?}"
    );
}

#[test]
fn two_vertices_at_infinity_in_sequence_are_refused() {
    let nowhere = [Vertex::away(0.0), Vertex::away(180.0), at(0.0, 0.0)];
    assert!(faults(&nowhere).contains(&Fault::SideNowhere { side: SideIdx(0) }));
    let last = [Vertex::away(0.0), at(0.0, 0.0), Vertex::away(180.0)];
    assert!(faults(&last).contains(&Fault::SideNowhere { side: SideIdx(2) }));
}

#[test]
fn sides_to_infinity_that_cross_are_refused() {
    // Half-lines at right angles, a half-line through a segment, and half-lines that meet a million sizes away.
    let found = faults(&[turn(90.0, 180.0), at(1.0, 1.0), at(2.0, 0.0), at(0.0, 0.0)]);
    assert!(found.iter().any(|f| matches!(f, Fault::SidesCross { .. })), "{found:?}");
    let met = faults(&[Vertex::away(0.0), at(0.0, 1.0), turn(180.0, 180.0 - 1e-4), at(0.0, 0.0)]);
    let [Fault::SidesCross { first: SideIdx(1), second: SideIdx(2), x, y }] = met[..] else {
        panic!("{met:?}")
    };
    assert!((y - 1.0).abs() < 1e-9 && (x * 1e-4_f64.to_radians().tan() + 1.0).abs() < 1e-9, "({x}, {y})");
}

#[test]
fn a_wall_across_a_strip_is_refused() {
    let across =
        [Vertex::away(0.0), at(0.0, 1.0), at(0.0, 0.0), at(0.0, 1.0), Vertex::away(180.0), at(2.0, 0.0)];
    assert_eq!(faults(&across), [Fault::VertexOnSide { vertex: VertexIdx(2), side: SideIdx(4) }]);
}

#[test]
fn headings_that_differ_by_rounding_are_equal() {
    let third = 0.1 + 0.2;
    let strip = [turn(third, 0.3), at(0.0, 1.0), turn(180.3, 180.0 + third), at(0.0, 0.0)];
    assert_angles(&clean(&strip), &[0.0, 1.0, 0.0, 1.0], 0.0);
}
