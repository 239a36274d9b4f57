//! What must hold for any list, and for whole families of outlines.

use proptest::collection::vec;
use proptest::prelude::*;

use super::super::{Containment, Outline, Point, Vertex};
use super::{assert_closed, cases, clean};

/// Any double at all.
fn wild() -> impl Strategy<Value = Vertex> {
    prop_oneof![
        (any::<f64>(), any::<f64>()).prop_map(|(x, y)| Vertex::at(x, y)),
        (any::<f64>(), any::<f64>()).prop_map(|(arriving, leaving)| Vertex::Away { arriving, leaving }),
        (-1e3..1e3, -1e3..1e3).prop_map(|(x, y)| Vertex::at(x, y)),
    ]
}

/// Points of a small grid, some of them moved by next to nothing: walls, touches and coincidences abound.
fn near_grid(away: bool) -> impl Strategy<Value = Vertex> {
    let off =
        prop_oneof![4 => Just(0.0), 1 => Just(1e-16), 1 => Just(-1e-12), 1 => Just(3e-10), 1 => Just(1e-8)];
    let point = (0..4_i32, 0..4_i32, off.clone(), off)
        .prop_map(|(i, j, dx, dy)| Vertex::at(f64::from(i) + dx, f64::from(j) + dy));
    let far = (0..5_i32, 0..5_i32)
        .prop_map(|(a, b)| Vertex::Away { arriving: 90.0 * f64::from(a), leaving: 90.0 * f64::from(b) });
    prop_oneof![6 => point, u32::from(away) => far]
}

/// Points of a small grid and vertices at infinity.
fn on_grid() -> impl Strategy<Value = Vertex> {
    near_grid(true).prop_map(|vertex| match vertex {
        Vertex::At(p) => Vertex::at(p.re.round(), p.im.round()),
        away @ Vertex::Away { .. } => away,
    })
}

/// Outlines with one vertex on each of `n` rays from a point inside, so that they are simple.
fn star(n: std::ops::Range<usize>) -> impl Strategy<Value = Vec<Point>> {
    vec((0.05_f64..1.0, 0.1_f64..1.0), n).prop_map(|steps| {
        let total: f64 = steps.iter().map(|s| s.1).sum();
        let mut angle = 0.0;
        steps
            .iter()
            .map(|&(radius, step)| {
                angle += step / total;
                Point::from_polar(radius, std::f64::consts::TAU * angle)
            })
            .collect()
    })
}

fn at(points: &[Point]) -> Vec<Vertex> {
    points.iter().map(|&p| Vertex::At(p)).collect()
}

/// What an accepted outline promises, checked by a winding number that knows nothing of the plane graph.
fn check_accepted(outline: &Outline) {
    assert_closed(outline);
    for i in -2..20 {
        for j in -2..20 {
            let z = Point::new(f64::from(i) * 0.25 + 0.1, f64::from(j) * 0.25 + 0.13);
            let winding = outline.winding(z);
            assert!(winding == 0 || winding == 1, "winding {winding} around {z} in {outline:?}");
            let nearest = outline.nearest_boundary(z);
            assert!(nearest.distance > 0.0);
            // Next to the open face of a side the section is on its left.
            if (nearest.foot - z).norm() > 1e-6 && winding == 0 {
                assert_eq!(outline.contains(z), Containment::Outside);
            }
        }
    }
}

proptest! {
    #![proptest_config(cases(2000))]

    #[test]
    fn any_list_is_accepted_or_refused_with_reasons(list in vec(wild(), 0..9)) {
        match Outline::new(&list) {
            Ok(warned) => assert_closed(&warned.value),
            Err(faults) => {
                prop_assert!(!faults.0.is_empty());
                prop_assert!(!faults.to_string().is_empty());
            }
        }
    }

    #[test]
    fn what_is_accepted_on_a_grid_goes_round_its_section_once(list in vec(near_grid(false), 3..9)) {
        if let Ok(warned) = Outline::new(&list) {
            check_accepted(&warned.value);
        }
    }

    #[test]
    fn what_is_accepted_with_vertices_at_infinity_goes_round_its_section_once(list in vec(near_grid(true), 2..8)) {
        if let Ok(warned) = Outline::new(&list) {
            check_accepted(&warned.value);
        }
    }

    #[test]
    fn the_first_vertex_is_of_no_account(list in vec(on_grid(), 3..9), start in 0..9_usize) {
        let mut turned = list.clone();
        turned.rotate_left(start % list.len());
        prop_assert_eq!(Outline::new(&list).is_ok(), Outline::new(&turned).is_ok());
    }
}

proptest! {
    #![proptest_config(cases(300))]

    #[test]
    fn star_shaped_outlines_are_accepted_either_way_round(points in star(8..40)) {
        let outline = clean(&at(&points));
        assert_closed(&outline);
        let back: Vec<Point> = points.iter().rev().copied().collect();
        let reversed = Outline::new(&at(&back)).unwrap().value;
        prop_assert!(reversed.reversed());
        for k in 0..reversed.n() {
            let given = points.len() - 1 - reversed.given_vertex(k).0;
            prop_assert!((reversed.alpha()[k] - outline.alpha()[given]).abs() <= 4.0 * f64::EPSILON);
        }
    }

    #[test]
    fn angles_do_not_feel_place_direction_or_scale(
        points in star(8..20),
        turn in 0.0..std::f64::consts::TAU,
        scale in -80_i32..80,
        shift in (-3.0..3.0, -3.0..3.0),
    ) {
        let outline = clean(&at(&points));
        let factor = Point::from_polar(10.0_f64.powi(scale), turn);
        let moved: Vec<Point> = points.iter().map(|p| (p + Point::new(shift.0, shift.1)) * factor).collect();
        let moved = clean(&at(&moved));
        for k in 0..outline.n() {
            // Coordinates up to 4 are rounded, sides may be as short as 0.02.
            prop_assert!((moved.alpha()[k] - outline.alpha()[k]).abs() <= 1000.0 * f64::EPSILON);
        }
    }

    #[test]
    fn a_wall_on_any_side_of_a_star_is_accepted_however_it_is_cut(
        points in star(8..20),
        side in 0..8_usize,
        cuts in vec(0.01_f64..0.99, 0..4),
        reach in 0.05_f64..0.9,
    ) {
        // From a corner toward the centre, which the star sees from everywhere.
        let foot = points[side];
        let tip = foot * (1.0 - reach);
        let mut cuts = cuts;
        cuts.sort_by(f64::total_cmp);
        cuts.dedup_by(|a, b| (*a - *b).abs() < 1e-6);
        let mut list = points[..=side].to_vec();
        list.extend(cuts.iter().map(|&t| foot + (tip - foot) * t));
        list.extend([tip, foot]);
        list.extend(&points[side + 1..]);
        let outline = clean(&at(&list));
        assert_closed(&outline);
        prop_assert!((outline.alpha()[side + cuts.len() + 1] - 2.0).abs() <= 0.0);
    }

    #[test]
    fn winding_agrees_with_the_nearest_side_on_stars(points in star(8..20), x in -1.0..1.0_f64, y in -1.0..1.0_f64) {
        let outline = clean(&at(&points));
        let z = Point::new(x, y);
        let nearest = outline.nearest_boundary(z);
        let length = outline.side_length(nearest.side).unwrap();
        // At a corner the nearest side alone does not tell.
        if 1e-9 < nearest.s && nearest.s < length - 1e-9 && nearest.distance > 1e-12 {
            let left = super::super::cross(outline.side_direction(nearest.side), z - nearest.foot) > 0.0;
            prop_assert_eq!(outline.contains(z) == Containment::Inside, left);
        }
    }
}
