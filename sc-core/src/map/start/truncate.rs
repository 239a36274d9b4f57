//! A bounded outline in place of an unbounded one, for the start only.
//!
//! A channel end is cut straight across, beyond everything else; a wider end along chords of a large circle. The map
//! of the cut outline has the prevertices of each cut close together (or around infinity); merged into one they start
//! the true problem. Nothing of the cut remains in any answer.

use crate::outline::{Outline, Point, Vertex};
use std::f64::consts::{FRAC_PI_4, PI, TAU};

/// A channel is cut this many widths beyond the last finite vertex.
const WIDTHS: f64 = 2.0;
/// Radius of the circle, in sizes of the finite part.
const RADIUS: f64 = 4.0;

/// A corner of the cut outline.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Source {
    /// The finite vertex with this walking index.
    Vertex(usize),
    /// One of the corners that stand for the vertex at infinity with this walking index.
    Cut(usize),
}

/// A bounded outline for the start.
#[derive(Debug, Clone)]
pub(crate) struct Truncated {
    pub(crate) corners: Vec<Point>,
    pub(crate) alpha: Vec<f64>,
    pub(crate) source: Vec<Source>,
}

/// Cuts off all vertices at infinity.
pub(crate) fn truncate(outline: &Outline) -> Truncated {
    let n = outline.n();
    let finite: Vec<Point> = (0..n).filter_map(|k| outline.point(k)).collect();
    let centre = middle(&finite);
    let radius = RADIUS * outline.size();
    let mut out = Truncated { corners: Vec::new(), alpha: Vec::new(), source: Vec::new() };
    for (k, vertex) in outline.vertices().iter().enumerate() {
        match *vertex {
            Vertex::At(p) => {
                out.corners.push(p);
                out.alpha.push(outline.alpha()[k]);
                out.source.push(Source::Vertex(k));
            }
            Vertex::Away { .. } => {
                // Between two vertices at infinity there is a finite one: both neighbours are points.
                let (Some(p), Some(q)) = (outline.point(k + n - 1), outline.point(k + 1)) else { continue };
                let (out_of, into) = (outline.side_direction(k + n - 1), -outline.side_direction(k));
                let cut = if outline.alpha()[k] == 0.0 {
                    across(p, q, out_of, &finite)
                } else {
                    around(p, q, out_of, into, -outline.alpha()[k] * PI, centre, radius)
                };
                out.source.extend(cut.iter().map(|_| Source::Cut(k)));
                out.alpha.extend(cut.iter().map(|_| f64::NAN));
                out.corners.extend(cut);
            }
        }
    }
    let m = out.corners.len();
    for k in 0..m {
        if out.alpha[k].is_nan() {
            let arriving = out.corners[k] - out.corners[(k + m - 1) % m];
            let turned = (out.corners[(k + 1) % m] - out.corners[k]) / arriving;
            out.alpha[k] = 1.0 - turned.arg() / PI;
        }
    }
    out
}

fn middle(points: &[Point]) -> Point {
    let (mut low, mut high) = (points[0], points[0]);
    for p in points {
        low = Point::new(low.re.min(p.re), low.im.min(p.im));
        high = Point::new(high.re.max(p.re), high.im.max(p.im));
    }
    (low + high) * 0.5
}

/// The two corners of a straight cut through a channel whose sides leave `p` and return to `q`.
fn across(p: Point, q: Point, heading: Point, finite: &[Point]) -> Vec<Point> {
    let along = |z: Point| (z * heading.conj()).re;
    let width = ((q - p) * heading.conj()).im.abs();
    let last = finite.iter().map(|&z| along(z)).fold(f64::NEG_INFINITY, f64::max);
    let at = last + WIDTHS * width;
    vec![p + heading * (at - along(p)), q + heading * (at - along(q))]
}

/// Corners on a circle from the arriving ray to the leaving one, counter-clockwise.
fn around(
    p: Point,
    q: Point,
    out_of: Point,
    into: Point,
    opening: f64,
    centre: Point,
    radius: f64,
) -> Vec<Point> {
    let on_circle = |start: Point, heading: Point| {
        let d = start - centre;
        let b = (d * heading.conj()).re;
        let s = -b + (b * b + radius * radius - d.norm_sqr()).max(0.0).sqrt();
        start + heading * s
    };
    let (a, b) = (on_circle(p, out_of), on_circle(q, into));
    let from = (a - centre).arg();
    // The leaving ray is met near `opening` further on.
    let raw = (b - centre).arg() - from;
    let turned = raw + TAU * ((opening - raw) / TAU).round();
    let pieces = (turned / FRAC_PI_4).ceil().max(1.0) as usize;
    let mut out = vec![a];
    for i in 1..pieces {
        let angle = from + turned * i as f64 / pieces as f64;
        out.push(centre + Point::from_polar(radius, angle));
    }
    out.push(b);
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cut(vertices: &[Vertex]) -> Truncated {
        truncate(&Outline::new(vertices).unwrap().value)
    }

    #[test]
    fn angles_of_a_cut_outline_add_up() {
        let layer = [
            Vertex::away(0.0),
            Vertex::at(0.0, 0.0),
            Vertex::at(0.0, -0.5),
            Vertex::at(0.0, 0.0),
            Vertex::away(180.0),
            Vertex::at(0.0, -1.0),
        ];
        let half_plane = [Vertex::Away { arriving: 180.0, leaving: 0.0 }, Vertex::at(0.0, 0.0)];
        for outline in [&layer[..], &half_plane[..]] {
            let t = cut(outline);
            let sum: f64 = t.alpha.iter().sum();
            assert!((sum - (t.corners.len() as f64 - 2.0)).abs() < 1e-12, "{t:?}");
        }
    }
}
