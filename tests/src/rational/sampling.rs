//! Boundary points: clustered toward the corners like the poles, and nowhere sparser than the poles need.

use num_complex::Complex64;

use super::corners::Cluster;
use super::geometry::{LocalPoint, Polygon};

/// A point on the boundary with what its row needs.
#[derive(Debug, Clone, Copy)]
pub(super) struct Sample {
    pub(super) side: usize,
    pub(super) point: LocalPoint,
    /// Distance to the nearer end of the side.
    pub(super) from_end: f64,
    /// Length of boundary the point stands for.
    pub(super) share: f64,
}

/// Distances from one end of a half side: the cluster's own and a refinement of the gaps between them.
fn half_side(
    polygon: &Polygon,
    corner: usize,
    direction: Complex64,
    half: f64,
    clusters: &[Cluster],
    poles: &[LocalPoint],
    widest: f64,
) -> Vec<f64> {
    let own = clusters.iter().find(|cluster| cluster.corner == corner);
    let mut distances: Vec<f64> = match own {
        Some(cluster) => cluster.sample_distances.iter().copied().filter(|&d| d < 0.98 * half).collect(),
        None => (1..=8).rev().map(|j| half * 0.5_f64.powi(j)).collect(),
    };
    distances.push(half);
    let mut refined = Vec::with_capacity(2 * distances.len());
    let mut start = 0.0;
    for &end in &distances {
        // Marching with the distance to the nearest pole keeps every pole resolved, whichever corner owns it.
        // A step is a fixed part of that distance, so the march is short; the cap is for safety only.
        for _ in 0..100_000 {
            let point = LocalPoint { corner, offset: direction * start };
            let near =
                poles.iter().map(|&pole| polygon.difference(point, pole).norm()).fold(f64::MAX, f64::min);
            let step = (0.12 * near).min(widest);
            if start + 1.4 * step >= end || step <= 0.0 || start == 0.0 {
                break;
            }
            start += step;
            refined.push(start);
        }
        refined.push(end);
        start = end;
    }
    refined
}

/// Boundary samples, side by side.
pub(super) fn samples(
    polygon: &Polygon,
    clusters: &[Cluster],
    poles: &[LocalPoint],
    widest: f64,
) -> Vec<Vec<Sample>> {
    (0..polygon.len())
        .map(|side| {
            let along = polygon.side(side);
            let half = 0.5 * along.norm();
            let direction = along / along.norm();
            let next = (side + 1) % polygon.len();
            let left = half_side(polygon, side, direction, half, clusters, poles, widest);
            let mut right = half_side(polygon, next, -direction, half, clusters, poles, widest);
            right.pop();
            let make = |corner: usize, direction: Complex64, d: f64| Sample {
                side,
                point: LocalPoint { corner, offset: direction * d },
                from_end: d,
                share: 0.0,
            };
            let mut points: Vec<Sample> = left.iter().map(|&d| make(side, direction, d)).collect();
            points.extend(right.iter().rev().map(|&d| make(next, -direction, d)));
            set_shares(&mut points, side, 2.0 * half);
            points
        })
        .collect()
}

/// Gives each point of a side the stretch of boundary nearer to it than to its neighbours.
fn set_shares(points: &mut [Sample], side: usize, length: f64) {
    let gap = |a: &Sample, b: &Sample| {
        let place = |p: &Sample| if p.point.corner == side { p.from_end } else { length - p.from_end };
        if a.point.corner == b.point.corner { (a.from_end - b.from_end).abs() } else { place(b) - place(a) }
    };
    for i in 0..points.len() {
        let before = if i == 0 { 2.0 * points[i].from_end } else { gap(&points[i - 1], &points[i]) };
        let after =
            if i + 1 == points.len() { 2.0 * points[i].from_end } else { gap(&points[i], &points[i + 1]) };
        points[i].share = 0.5 * (before + after);
    }
}

/// Points between the samples of a side, and beyond the last one next to each end: there the misfit is checked.
/// The shares add up to the side.
pub(super) fn check_points(samples: &[Sample], length: f64) -> Vec<Sample> {
    let mut checks = Vec::with_capacity(2 * samples.len() + 6);
    let (Some(first), Some(last)) = (samples.first(), samples.last()) else { return checks };
    let at = |sample: &Sample, from_end: f64, share: f64| Sample {
        side: sample.side,
        point: LocalPoint {
            corner: sample.point.corner,
            offset: sample.point.offset * (from_end / sample.from_end),
        },
        from_end: from_end.min(length - from_end),
        share,
    };
    let beyond =
        |sample: &Sample| [0.01, 0.5].map(|part| at(sample, part * sample.from_end, 0.5 * sample.from_end));
    checks.extend(beyond(first));
    for pair in samples.windows(2) {
        // Both points are written from the corner of the first sample, unless the pair belongs to the far end.
        let (a, b) = (&pair[0], &pair[1]);
        let end = if a.point.corner == b.point.corner { b.from_end } else { length - b.from_end };
        let gap = end - a.from_end;
        checks.extend([0.27, 0.73].map(|part| at(a, a.from_end + part * gap, 0.5 * gap.abs())));
    }
    checks.extend(beyond(last));
    checks
}
