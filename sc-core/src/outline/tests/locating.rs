//! Containment and the nearest boundary.

use super::super::{Containment, Outline, Point, Vertex};
use super::{clean, corners};

fn p(x: f64, y: f64) -> Point {
    Point::new(x, y)
}

fn wall() -> Outline {
    clean(&corners(&[(0.0, 0.0), (5.0, 0.0), (5.0, 2.0), (2.0, 2.0), (2.0, 1.0), (2.0, 2.0), (0.0, 2.0)]))
}

#[test]
fn points_are_inside_on_or_outside() {
    let outline = wall();
    assert_eq!(outline.contains(p(1.0, 1.5)), Containment::Inside);
    assert_eq!(outline.contains(p(2.0, 0.5)), Containment::Inside);
    assert_eq!(outline.contains(p(6.0, 1.0)), Containment::Outside);
    assert_eq!(outline.contains(p(1.0, -1e-9)), Containment::Outside);
    assert_eq!(outline.contains(p(1.0, 1e-9)), Containment::Inside);
    assert_eq!(outline.contains(p(3.3, 0.0)), Containment::OnSide(0));
    assert!(matches!(outline.contains(p(2.0, 1.2)), Containment::OnSide(3 | 4)));
    assert_eq!(outline.contains(p(f64::NAN, 0.0)), Containment::Outside);
    assert_eq!(outline.contains(p(f64::INFINITY, 0.0)), Containment::Outside);
}

#[test]
fn the_nearest_face_of_a_wall_is_the_one_that_sees_the_point() {
    let outline = wall();
    // Side 3 runs down the right face, side 4 up the left one.
    let right = outline.nearest_boundary(p(2.25, 1.5));
    assert_eq!((right.side, right.s, right.distance, right.foot), (3, 0.5, 0.25, p(2.0, 1.5)));
    let left = outline.nearest_boundary(p(1.75, 1.5));
    assert_eq!((left.side, left.s, left.distance, left.foot), (4, 0.5, 0.25, p(2.0, 1.5)));
}

#[test]
fn distance_along_a_side_from_infinity_is_negative() {
    let lower = clean(&[Vertex::Away { arriving: 180.0, leaving: 0.0 }, Vertex::at(1.0, 0.0)]);
    let right = lower.nearest_boundary(p(4.0, -2.0));
    assert_eq!((right.side, right.s, right.distance, right.foot), (0, -3.0, 2.0, p(4.0, 0.0)));
    let left = lower.nearest_boundary(p(-4.0, 2.0));
    assert_eq!((left.side, left.s, left.distance, left.foot), (1, 5.0, 2.0, p(-4.0, 0.0)));
}

/// Checks `inside` against the outline on a grid that avoids the boundary.
fn check(vertices: &[Vertex], inside: impl Fn(f64, f64) -> bool) {
    let outline = clean(vertices);
    let mut seen = 0;
    for i in -40..40 {
        for j in -40..40 {
            // Odd multiples of 1/16 miss the boundary; multiples of 1/8 hit heights of vertices on purpose.
            let (x, y) = (f64::from(i) / 8.0 + 0.0625, f64::from(j) / 8.0 + 0.0625);
            for y in [y, y - 0.0625] {
                let expected = if outline.nearest_boundary(p(x, y)).distance > 0.0 {
                    if inside(x, y) { Containment::Inside } else { Containment::Outside }
                } else {
                    continue;
                };
                assert_eq!(outline.contains(p(x, y)), expected, "({x}, {y}) in {vertices:?}");
                seen += 1;
            }
        }
    }
    assert!(seen > 9_000, "{seen}");
}

#[test]
fn unbounded_sections_know_what_they_contain() {
    let turn = |arriving, leaving| Vertex::Away { arriving, leaving };
    check(&[turn(180.0, 0.0), Vertex::at(0.0, 0.0)], |_, y| y < 0.0);
    check(&[turn(0.0, 180.0), Vertex::at(0.0, 0.0)], |_, y| y > 0.0);
    check(&[turn(90.0, 270.0), Vertex::at(0.0, 0.0)], |x, _| x < 0.0);
    check(&[turn(270.0, 90.0), Vertex::at(0.0, 0.0)], |x, _| x > 0.0);
    check(&[turn(0.0, 90.0), Vertex::at(0.0, 0.0)], |x, y| x > 0.0 && y > 0.0);
    check(&[turn(90.0, 0.0), Vertex::at(0.0, 0.0)], |x, y| !(x > 0.0 && y > 0.0));
    check(&[turn(270.0, 0.0), Vertex::at(0.0, 0.0)], |x, y| x > 0.0 && y < 0.0);
    check(&[turn(0.0, 360.0), Vertex::at(0.0, 0.0)], |_, _| true);
    check(&[turn(90.0, 450.0), Vertex::at(0.0, 0.0)], |_, _| true);
    check(&[turn(0.0, 360.0), Vertex::at(0.0, -1.0), Vertex::at(0.0, 1.0)], |x, y| {
        !(x > 0.0 && y.abs() < 1.0)
    });
    check(&[turn(180.0, 540.0), Vertex::at(0.0, 1.0), Vertex::at(0.0, -1.0)], |x, y| {
        !(x < 0.0 && y.abs() < 1.0)
    });
    check(&[turn(90.0, 450.0), Vertex::at(1.0, 0.0), Vertex::at(-1.0, 0.0)], |x, y| {
        !(y > 0.0 && x.abs() < 1.0)
    });
    check(&[Vertex::away(0.0), Vertex::at(0.0, 1.0), Vertex::away(180.0), Vertex::at(0.0, 0.0)], |_, y| {
        0.0 < y && y < 1.0
    });
    check(&[Vertex::away(90.0), Vertex::at(0.0, 0.0), Vertex::away(270.0), Vertex::at(1.0, 0.0)], |x, _| {
        0.0 < x && x < 1.0
    });
    check(
        &[
            Vertex::away(0.0),
            Vertex::at(0.0, 1.0),
            Vertex::away(180.0),
            Vertex::at(-0.5, 0.0),
            Vertex::away(270.0),
            Vertex::at(0.5, 0.0),
        ],
        |x, y| (0.0 < y && y < 1.0) || (y <= 0.0 && x.abs() < 0.5),
    );
    check(
        &[
            Vertex::away(0.0),
            Vertex::at(0.0, 0.0),
            Vertex::at(0.0, -0.5),
            Vertex::at(0.0, 0.0),
            Vertex::away(180.0),
            Vertex::at(0.0, -1.0),
        ],
        |_, y| -1.0 < y && y < 0.0,
    );
    check(
        &[
            turn(180.0, 0.0),
            Vertex::at(1.0, 0.0),
            Vertex::at(1.0, -2.0),
            Vertex::at(-1.0, -2.0),
            Vertex::at(-1.0, 0.0),
        ],
        |x, y| y < 0.0 && !(x.abs() < 1.0 && y > -2.0),
    );
}
