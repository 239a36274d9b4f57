//! Splitting of sides until each is comparable with its distance to what it faces.

use super::triangulate::{StartError, Triangles, triangulate};
use crate::outline::Point;
use std::collections::HashMap;

/// A corner sharper than this (in units of π) first loses an isosceles piece whose sides are never split again.
const SHARP: f64 = 0.3;
/// A side is cut in three when the apex of its triangle is nearer than this part of its length.
const NEARNESS: f64 = 1.0 / 3.0;
/// Relative distance within which a vertex lies on a side.
const ON_WALL: f64 = 1e-11;
/// Rounds of splitting: each cuts lengths by three, so 60 rounds span 28 decades of detail.
const MAX_ROUNDS: usize = 60;
/// More pieces than this are refused.
const MAX_PIECES: usize = 20_000;

/// An outline with flat vertices added on its sides.
#[derive(Debug, Clone)]
pub(crate) struct SplitOutline {
    pub(crate) corners: Vec<Point>,
    /// Interior angles over π; 1 at added corners.
    pub(crate) alpha: Vec<f64>,
    /// The vertex of the outline that a corner is, if it was not added.
    pub(crate) original: Vec<Option<usize>>,
    /// The side of the outline that the piece leaving a corner is part of.
    pub(crate) side: Vec<usize>,
    pub(crate) triangles: Triangles,
}

#[derive(Clone, Copy)]
struct Corner {
    at: Point,
    alpha: f64,
    original: Option<usize>,
    /// The outline's side that leaves here, or that an added corner lies on.
    side: usize,
    /// The side leaving this corner is not to be split any more.
    settled: bool,
}

/// Splits the sides of a bounded outline. `parts` is where a side is cut: at `1/parts` from either end
/// (3 is usual; another value gives an independent start).
pub(crate) fn split_sides(outline: &[Point], alpha: &[f64], parts: f64) -> Result<SplitOutline, StartError> {
    let mut corners = match_wall_faces(&cut_sharp_corners(outline, alpha));
    let mut triangles = triangulate(&points(&corners))?;
    for _ in 0..MAX_ROUNDS {
        let long = long_sides(&corners, &triangles);
        if !long.iter().any(|l| *l) {
            break;
        }
        corners = cut(&corners, &long, parts);
        if corners.len() > MAX_PIECES {
            return Err(StartError::TooManyPieces { limit: MAX_PIECES });
        }
        triangles = triangulate(&points(&corners))?;
    }
    Ok(SplitOutline {
        alpha: corners.iter().map(|c| c.alpha).collect(),
        original: corners.iter().map(|c| c.original).collect(),
        side: corners.iter().map(|c| c.side).collect(),
        corners: points(&corners),
        triangles,
    })
}

fn points(corners: &[Corner]) -> Vec<Point> {
    corners.iter().map(|c| c.at).collect()
}

fn cut_sharp_corners(outline: &[Point], alpha: &[f64]) -> Vec<Corner> {
    let n = outline.len();
    let length = |k: usize| (outline[(k + 1) % n] - outline[k]).norm();
    // What is cut off at each end of a side: a third of the shorter side at a sharp corner.
    let cut_at = |k: usize| {
        if alpha[k] < SHARP { length(k).min(length((k + n - 1) % n)) / 3.0 } else { 0.0 }
    };
    let mut out = Vec::with_capacity(2 * n);
    for k in 0..n {
        let (a, b) = (outline[k], outline[(k + 1) % n]);
        let direction = (b - a) / length(k);
        let (start, end) = (cut_at(k), cut_at((k + 1) % n));
        out.push(Corner { at: a, alpha: alpha[k], original: Some(k), side: k, settled: start > 0.0 });
        if start > 0.0 {
            out.push(Corner {
                at: a + direction * start,
                alpha: 1.0,
                original: None,
                side: k,
                settled: false,
            });
        }
        if end > 0.0 {
            out.push(Corner { at: b - direction * end, alpha: 1.0, original: None, side: k, settled: true });
        }
    }
    out
}

/// A vertex on one face of a wall of no thickness is given a flat partner on the other face, so that both faces have
/// the same pieces. In a valid outline nothing else lies on a side.
fn match_wall_faces(corners: &[Corner]) -> Vec<Corner> {
    let n = corners.len();
    let mut out = Vec::with_capacity(n);
    for k in 0..n {
        out.push(corners[k]);
        let (a, b) = (corners[k].at, corners[(k + 1) % n].at);
        let side = b - a;
        let mut on_it: Vec<(f64, Point)> = corners
            .iter()
            .filter_map(|c| {
                let z = (c.at - a) / side;
                let inside = z.re > ON_WALL && z.re < 1.0 - ON_WALL && z.im.abs() < ON_WALL;
                inside.then_some((z.re, c.at))
            })
            .collect();
        on_it.sort_by(|p, q| p.0.total_cmp(&q.0));
        on_it.dedup_by(|p, q| p.1 == q.1);
        out.extend(on_it.into_iter().map(|(_, at)| Corner {
            at,
            alpha: 1.0,
            original: None,
            side: corners[k].side,
            settled: corners[k].settled,
        }));
    }
    out
}

/// Which sides face something nearer than a third of their length; both faces of a wall are split alike. A piece in a
/// long empty channel, with no corner nearer than its own length, need not be split: see the channel guess of the
/// cross-ratios. Pieces then grow geometrically with the distance from the channel's ends.
fn long_sides(corners: &[Corner], triangles: &Triangles) -> Vec<bool> {
    let n = corners.len();
    let mut long: Vec<bool> = (0..n)
        .map(|k| {
            if corners[k].settled {
                return false;
            }
            let (t, i) = triangles.on_side[k];
            let apex = corners[triangles.corners[t][(i + 2) % 3]].at;
            let (a, b) = (corners[k].at, corners[(k + 1) % n].at);
            let side = b - a;
            let along = (((apex - a) * side.conj()).re / side.norm_sqr()).clamp(0.0, 1.0);
            let faces_near = (apex - (a + side * along)).norm() < NEARNESS * side.norm();
            faces_near && nearest_bend(corners, a, b) < side.norm() * (1.0 - 1e-9)
        })
        .collect();
    let key = |p: Point, q: Point| [p.re, p.im, q.re, q.im].map(|v| (v + 0.0).to_bits());
    let sides: HashMap<_, _> = (0..n).map(|k| (key(corners[k].at, corners[(k + 1) % n].at), k)).collect();
    for k in 0..n {
        if long[k]
            && let Some(&twin) = sides.get(&key(corners[(k + 1) % n].at, corners[k].at))
        {
            long[twin] = true;
        }
    }
    long
}

/// Distance from a piece of a side to the nearest corner that is not flat.
fn nearest_bend(corners: &[Corner], a: Point, b: Point) -> f64 {
    let side = b - a;
    corners
        .iter()
        .filter(|c| (c.alpha - 1.0).abs() > 0.0)
        .map(|c| {
            let along = (((c.at - a) * side.conj()).re / side.norm_sqr()).clamp(0.0, 1.0);
            (c.at - (a + side * along)).norm()
        })
        .fold(f64::INFINITY, f64::min)
}

fn cut(corners: &[Corner], long: &[bool], parts: f64) -> Vec<Corner> {
    let n = corners.len();
    let mut out = Vec::with_capacity(2 * n);
    for k in 0..n {
        out.push(corners[k]);
        if long[k] {
            let (a, b) = (corners[k].at, corners[(k + 1) % n].at);
            for at in [a + (b - a) / parts, b - (b - a) / parts] {
                out.push(Corner { at, alpha: 1.0, original: None, side: corners[k].side, settled: false });
            }
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_square_is_not_split_and_a_long_rectangle_is() {
        let rectangle =
            |a: f64| [(0.0, 0.0), (a, 0.0), (a, 1.0), (0.0, 1.0)].map(|(x, y)| Point::new(x, y)).to_vec();
        assert_eq!(split_sides(&rectangle(1.0), &[0.5; 4], 3.0).unwrap().corners.len(), 4);
        let long = split_sides(&rectangle(20.0), &[0.5; 4], 3.0).unwrap();
        assert!(long.corners.len() > 10 && long.corners.len() < 60, "{}", long.corners.len());
        assert_eq!(long.original.iter().flatten().count(), 4);
        assert!((long.alpha.iter().sum::<f64>() - (long.corners.len() as f64 - 2.0)).abs() < 1e-12);
    }
}
