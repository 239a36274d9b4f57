//! Interior angles in units of π.

use std::f64::consts::PI;

use super::walk::{Corner, Course, Walk};
use super::{Point, Vertex, cross, dot, heading};

/// Interior angles of a walk, before they are made to add up; `tips` are the vertices that turn straight back.
pub(super) fn interior_angles(vertices: &[Vertex], walk: &Walk, tips: &[bool]) -> Vec<f64> {
    let n = walk.corners.len();
    (0..n)
        .map(|k| match (vertices[k], walk.corners[k]) {
            (Vertex::Away { arriving, leaving }, _) => heading::alpha_at_infinity(arriving, leaving),
            (Vertex::At(_), _) if tips[k] => 2.0,
            (Vertex::At(_), Corner::Node(node)) => {
                at_node(walk, node, walk.courses[(k + n - 1) % n], walk.courses[k])
            }
            // A finite vertex always has a node.
            (Vertex::At(_), Corner::Away { .. }) => 0.0,
        })
        .collect()
}

fn at_node(walk: &Walk, node: usize, arriving: Course, leaving: Course) -> f64 {
    let here = walk.nodes[node];
    let look = |other: Option<usize>, heading: usize| match other {
        Some(m) => walk.nodes[m] - here,
        None => walk.units[heading],
    };
    let (back, back_end) = match arriving {
        Course::Between { from, .. } => (look(Some(from), 0), Some(from)),
        Course::Inward { heading, .. } => (look(None, heading), None),
        _ => return 0.0,
    };
    let (out, out_end) = match leaving {
        Course::Between { to, .. } => (look(Some(to), 0), Some(to)),
        Course::Outward { heading, .. } => (look(None, heading), None),
        _ => return 0.0,
    };
    let from_leaving = cross(out, back).atan2(dot(out, back)) / PI;
    let alpha = if from_leaving < 0.0 { from_leaving + 2.0 } else { from_leaving };
    // Coordinates are rounded: a direction is known to about ε × (coordinate / length).
    let blur = [(back, back_end), (out, out_end)]
        .iter()
        .filter_map(|&(v, end)| end.map(|m| largest(here).max(largest(walk.nodes[m])) / v.norm()))
        .fold(1.0, f64::max);
    snap(alpha, 4.0 * f64::EPSILON * blur / PI)
}

/// Flat within what rounding of the coordinates explains, and a right angle within a few ε.
fn snap(alpha: f64, blur: f64) -> f64 {
    if (alpha - 1.0).abs() <= blur {
        return 1.0;
    }
    let halves = (2.0 * alpha).round() / 2.0;
    if 0.0 < halves && halves < 2.0 && (alpha - halves).abs() <= 4.0 * f64::EPSILON { halves } else { alpha }
}

/// The larger coordinate in absolute value.
fn largest(p: Point) -> f64 {
    p.re.abs().max(p.im.abs())
}

/// Makes the angles add up to `needed` by sharing what rounding left among those that are no multiple of 1/2.
///
/// Flat corners, right angles and tips stay exact. The share of an angle is bounded by what is left, which is
/// itself no more than the rounding of the coordinates.
pub(super) fn close(alpha: &mut [f64], finite: &[bool], needed: f64) {
    let free = |a: f64| (2.0 * a - (2.0 * a).round()).abs() > 0.0;
    let count = alpha.iter().zip(finite).filter(|&(&a, &f)| f && free(a)).count();
    if count == 0 {
        return;
    }
    // A second round takes up the rounding of the first.
    for _ in 0..2 {
        let left = needed - compensated_sum(alpha);
        let share = left / count as f64;
        for (a, _) in alpha.iter_mut().zip(finite).filter(|(a, f)| **f && free(**a)) {
            *a += share;
        }
    }
}

/// Neumaier's sum: the error does not grow with the number of terms.
pub(super) fn compensated_sum(terms: &[f64]) -> f64 {
    let (mut sum, mut lost) = (0.0_f64, 0.0_f64);
    for &t in terms {
        let next = sum + t;
        lost += if sum.abs() >= t.abs() { (sum - next) + t } else { (t - next) + sum };
        sum = next;
    }
    sum + lost
}
