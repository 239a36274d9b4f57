//! Interior angles in units of π.

use std::f64::consts::PI;

use super::walk::{Corner, Course, Walk};
use super::{Point, Vertex, cross, dot, heading};

/// What passes for a straight corner.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Straight {
    /// A turn that rounding of the coordinates explains: 4 ε × (coordinate / adjacent side).
    WithinCoordinates,
    /// A turn of a few ε.
    WithinEpsilon,
}

/// Interior angles of a walk, made to add up if that takes no more than rounding; `tips` are the vertices that
/// turn straight back.
pub(super) fn interior_angles(vertices: &[Vertex], walk: &Walk, tips: &[bool]) -> Vec<f64> {
    let finite: Vec<bool> = vertices.iter().map(|v| v.point().is_some()).collect();
    let mut alpha = raw_angles(vertices, walk, tips, Straight::WithinCoordinates);
    // Rounding stays far below the first bound; a turn taken for rounding goes far above it.
    if !close(&mut alpha, &finite, 1e-6) {
        // Short sides far from the origin can make corners pass for straight whose turning the others need.
        alpha = raw_angles(vertices, walk, tips, Straight::WithinEpsilon);
        close(&mut alpha, &finite, 0.1);
    }
    alpha
}

fn raw_angles(vertices: &[Vertex], walk: &Walk, tips: &[bool], straight: Straight) -> Vec<f64> {
    let n = walk.corners.len();
    (0..n)
        .map(|k| match (vertices[k], walk.corners[k]) {
            (Vertex::Away { arriving, leaving }, _) => heading::alpha_at_infinity(arriving, leaving),
            (Vertex::At(_), _) if tips[k] => 2.0,
            (Vertex::At(_), Corner::Node(node)) => {
                at_node(walk, node, walk.courses[(k + n - 1) % n], walk.courses[k], straight)
            }
            // A finite vertex always has a node.
            (Vertex::At(_), Corner::Away { .. }) => 0.0,
        })
        .collect()
}

fn at_node(walk: &Walk, node: usize, arriving: Course, leaving: Course, straight: Straight) -> f64 {
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
    let blur = match straight {
        Straight::WithinEpsilon => 1.0,
        Straight::WithinCoordinates => [(back, back_end), (out, out_end)]
            .iter()
            .filter_map(|&(v, end)| end.map(|m| largest(here).max(largest(walk.nodes[m])) / v.norm()))
            .fold(1.0, f64::max),
    };
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

/// Makes the angles add up to `n − 2` by sharing what rounding left, in proportion, among those that are no
/// multiple of 1/2, so that flat corners, right angles and tips stay exact; `false`, and nothing done, if they
/// would change by more than `unfelt` of themselves.
fn close(alpha: &mut [f64], finite: &[bool], unfelt: f64) -> bool {
    let needed = alpha.len() as f64 - 2.0;
    let free: Vec<usize> = (0..alpha.len())
        .filter(|&k| finite[k] && (2.0 * alpha[k] - (2.0 * alpha[k]).round()).abs() > 0.0)
        .collect();
    // The second round takes up the rounding of the first.
    for _ in 0..2 {
        let left = needed - compensated_sum(alpha);
        let share = left / free.iter().map(|&k| alpha[k]).sum::<f64>();
        if left.abs() <= 0.0 {
            return true;
        }
        if share.is_nan() || share.abs() > unfelt {
            return false;
        }
        for &k in &free {
            alpha[k] += share * alpha[k];
        }
    }
    true
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
