//! From the user's list of vertices to an outline, or to everything that is wrong with it.

use super::angles::{compensated_sum, interior_angles};
use super::arrangement::Arrangement;
use super::faults::{OutlineFault, OutlineFaults, OutlineWarning, VertexIdx, Warned};
use super::numbering::Numbering;
use super::walk::{Corner, Course, Move, Tolerances, Walk};
use super::{Outline, Point, Vertex, cross};

/// Points closer than this, as a share of the section's size, are the same point.
pub const COINCIDENCE: f64 = 1e-9;
/// Largest coordinate in absolute value: its square must stay far from overflow.
pub const MAX_COORDINATE: f64 = 1e140;
/// Smallest size of a section: the square of 1e-9 of it must stay far from underflow.
pub const MIN_SIZE: f64 = 1e-120;
/// Largest coordinate over the size of the section: nine digits are then lost to the position.
pub const MAX_REMOTENESS: f64 = 1e9;
/// Largest heading in degrees, either way: ten turns, beyond which only mistakes are expected.
pub const MAX_HEADING: f64 = 3600.0;
/// Remoteness beyond which rounding is felt and said.
const FELT_REMOTENESS: f64 = 1e5;

pub(super) fn validate(given: &[Vertex]) -> Result<Warned<Outline>, OutlineFaults> {
    let faults = faults_of_numbers(given);
    if !faults.is_empty() {
        return Err(OutlineFaults(faults));
    }
    let finite: Vec<Point> = given.iter().filter_map(Vertex::point).collect();
    let bounded = finite.len() == given.len();
    let (size, magnitude) = (diameter(&finite), magnitude(&finite));
    if size > 0.0 && size < MIN_SIZE {
        return Err(OutlineFaults(vec![OutlineFault::TooSmall { size, limit: MIN_SIZE }]));
    }
    if size > 0.0 && magnitude > MAX_REMOTENESS * size {
        return Err(OutlineFaults(vec![OutlineFault::TooFarFromOrigin { magnitude, size }]));
    }
    let rounding = 4.0 * f64::EPSILON * magnitude;
    let tolerances = Tolerances { same: (COINCIDENCE * size).max(rounding), rounding };

    let area = if bounded { signed_area(&finite) } else { 0.0 };
    let numbering = Numbering { n: given.len(), reversed: area < 0.0 };
    let mut vertices: Vec<Vertex> = (0..given.len()).map(|k| given[numbering.vertex(k).0]).collect();
    let walk = Walk::new(&vertices, tolerances);
    for (vertex, corner) in vertices.iter_mut().zip(&walk.corners) {
        if let Corner::Node(node) = *corner {
            *vertex = Vertex::At(walk.nodes[node]);
        }
    }

    let mut faults = faults_of_neighbours(given, &walk, numbering, tolerances.same);
    let arrangement = Arrangement::new(&walk, numbering);
    faults.extend(arrangement.crossings());
    faults.extend(arrangement.touches());
    let n = vertices.len();
    let tips: Vec<bool> = (0..n).map(|k| arrangement.turns_back(k)).collect();
    let alpha = interior_angles(&vertices, &walk, &tips);
    if faults.is_empty() {
        if bounded && (arrangement.is_tree() || area.abs() <= 8.0 * f64::EPSILON * n as f64 * size * size) {
            faults.push(OutlineFault::ZeroArea { area: area.abs(), size });
        } else {
            faults.extend(arrangement.faces());
            faults.extend(arrangement.faces_at_infinity(&alpha));
        }
    }
    if faults.is_empty() {
        faults.extend(faults_of_angles(&vertices, &alpha, numbering));
    }
    if !faults.is_empty() {
        return Err(OutlineFaults(faults));
    }
    let warnings = warnings(&walk, numbering, size, magnitude, tolerances.rounding);
    Ok(Warned { value: Outline::assemble(vertices, alpha, &walk, numbering, size), warnings })
}

/// Numbers that are none, and lists that are too short.
fn faults_of_numbers(given: &[Vertex]) -> Vec<OutlineFault> {
    let mut faults = Vec::new();
    for (k, vertex) in given.iter().enumerate() {
        let vertex_idx = VertexIdx(k);
        match *vertex {
            Vertex::At(Point { re: x, im: y }) => {
                if !(x.is_finite() && y.is_finite()) {
                    faults.push(OutlineFault::CoordinateNotFinite { vertex: vertex_idx, x, y });
                } else if x.abs().max(y.abs()) > MAX_COORDINATE {
                    faults.push(OutlineFault::CoordinateTooLarge {
                        vertex: vertex_idx,
                        x,
                        y,
                        limit: MAX_COORDINATE,
                    });
                }
            }
            Vertex::Away { arriving, leaving } => {
                if !(arriving.is_finite() && leaving.is_finite()) {
                    faults.push(OutlineFault::HeadingNotFinite { vertex: vertex_idx, arriving, leaving });
                } else if arriving.abs().max(leaving.abs()) > MAX_HEADING {
                    let limit = MAX_HEADING;
                    faults.push(OutlineFault::HeadingTooLarge {
                        vertex: vertex_idx,
                        arriving,
                        leaving,
                        limit,
                    });
                }
            }
        }
    }
    let away = given.iter().filter(|v| v.point().is_none()).count();
    let needed = if away > 0 { 2 } else { 3 };
    if given.len() < needed {
        faults.push(OutlineFault::TooFewVertices { given: given.len(), needed });
    } else if away == given.len() {
        faults.push(OutlineFault::NoFiniteVertex { given: away });
    }
    faults
}

/// Sides without length, and sides from infinity to infinity.
fn faults_of_neighbours(
    given: &[Vertex],
    walk: &Walk,
    numbering: Numbering,
    limit: f64,
) -> Vec<OutlineFault> {
    let n = given.len();
    let mut faults: Vec<OutlineFault> = (walk.courses.iter().enumerate())
        .filter(|&(_, &course)| course == Course::Nowhere)
        .map(|(k, _)| {
            let (a, b) = (numbering.vertex(k), numbering.vertex((k + 1) % n));
            let (first, second) = if numbering.reversed { (b, a) } else { (a, b) };
            match (given[first.0].point(), given[second.0].point()) {
                (Some(p), Some(q)) => {
                    OutlineFault::NeighboursCoincide { first, second, distance: (q - p).norm(), limit }
                }
                _ => OutlineFault::SideNowhere { side: numbering.side(k) },
            }
        })
        .collect();
    if numbering.reversed {
        faults.reverse();
    }
    faults
}

fn faults_of_angles(vertices: &[Vertex], alpha: &[f64], numbering: Numbering) -> Vec<OutlineFault> {
    let mut faults: Vec<OutlineFault> = (alpha.iter().enumerate())
        .filter(|&(k, &a)| vertices[k].point().is_some() && a <= 0.0)
        .map(|(k, _)| OutlineFault::ZeroAngle { vertex: numbering.vertex(k) })
        .collect();
    let (sum, needed) = (compensated_sum(alpha), alpha.len() as f64 - 2.0);
    // Around a face the sum is right or wrong by a whole number, beside rounding.
    if (sum - needed).abs() > 0.01 {
        faults.push(OutlineFault::AnglesDoNotAddUp { sum, needed });
    }
    faults
}

fn warnings(
    walk: &Walk,
    numbering: Numbering,
    size: f64,
    magnitude: f64,
    rounding: f64,
) -> Vec<OutlineWarning> {
    let mut warnings = Vec::new();
    if numbering.reversed {
        warnings.push(OutlineWarning::Reversed);
    }
    if magnitude > FELT_REMOTENESS * size && size > 0.0 {
        warnings.push(OutlineWarning::FarFromOrigin {
            magnitude,
            size,
            resolution: f64::EPSILON * magnitude / size,
        });
    }
    for &m in &walk.moves {
        match m {
            Move::ToVertex { vertex, onto, distance } if distance > rounding => {
                warnings.push(OutlineWarning::VertexMovedToVertex {
                    vertex: numbering.vertex(vertex),
                    onto: numbering.vertex(onto),
                    distance,
                });
            }
            Move::ToSide { vertex, onto, distance } if distance > rounding => {
                warnings.push(OutlineWarning::VertexMovedToSide {
                    vertex: numbering.vertex(vertex),
                    onto: numbering.side(onto),
                    distance,
                });
            }
            Move::ToVertex { .. } | Move::ToSide { .. } => {}
        }
    }
    warnings
}

/// Diameter of the bounding box.
fn diameter(points: &[Point]) -> f64 {
    let Some(&first) = points.first() else { return 0.0 };
    let (low, high) = points.iter().fold((first, first), |(low, high), p| {
        (Point::new(low.re.min(p.re), low.im.min(p.im)), Point::new(high.re.max(p.re), high.im.max(p.im)))
    });
    (high - low).norm()
}

fn magnitude(points: &[Point]) -> f64 {
    points.iter().fold(0.0, |m, p| m.max(p.re.abs()).max(p.im.abs()))
}

/// Area on the left of a closed walk, negative if it is on the right.
fn signed_area(points: &[Point]) -> f64 {
    let Some(&first) = points.first() else { return 0.0 };
    // Seen from a vertex, the position of the section costs no digits.
    points.windows(2).map(|w| 0.5 * cross(w[0] - first, w[1] - first)).sum()
}
