//! Where the poles go: strength of the singularity at each corner, and clusters of poles outside it.

use num_complex::Complex64;

use super::geometry::{LocalPoint, Polygon};
use super::{RationalOptions, SideData};

/// Poles of the rational part that belong to one corner.
#[derive(Debug, Clone)]
pub(super) struct Cluster {
    /// Vertex the poles cluster at.
    pub(super) corner: usize,
    /// Unit direction of the bisector of the exterior angle.
    pub(super) direction: Complex64,
    /// Distance of the far end of the cut from the vertex.
    pub(super) length: f64,
    /// Exponents of the powers `((z − v)/(z − p))^s`.
    pub(super) exponents: Vec<f64>,
    /// Distances of the poles from the vertex, ascending.
    pub(super) distances: Vec<f64>,
    /// Distances for the boundary samples: three to a pole and a few below the last one.
    pub(super) sample_distances: Vec<f64>,
}

/// What the solution does at a corner.
#[derive(Debug, Clone, Copy)]
struct Singularity {
    /// Leading exponent λ of `r^λ`.
    leading: f64,
    /// Step between the exponents of the homogeneous solutions.
    step: f64,
    /// Whether films or varying data add terms that are no powers.
    other_terms: bool,
}

/// Behaviour at vertex `k`, or `None` where the solution is smooth.
///
/// Alike sides give the exponents `jπ/θ`, a held side next to an insulated one `(2j − 1)π/(2θ)`; integers are
/// polynomials, no singularity. Films and data that vary along a side bring logarithms as well.
fn singularity(polygon: &Polygon, sides: &[SideData], k: usize) -> Option<Singularity> {
    let n = polygon.len();
    let over = std::f64::consts::PI / polygon.interior_angle(k);
    let (before, after) = (&sides[(k + n - 1) % n], &sides[k]);
    let held = |side: &SideData| matches!(side, SideData::Held(_) | SideData::HeldAlong(_));
    let plain = |side: &SideData| matches!(side, SideData::Held(_) | SideData::Insulated);
    let leading = if held(before) == held(after) { over } else { 0.5 * over };
    // Smooth data bring polynomials, and with them a logarithm only where `z^m` cannot match them: when mθ is a
    // multiple of π (alike sides; an odd multiple of π/2 for unlike ones). Films bring both on all scales.
    let film = |side: &SideData| !held(side) && !plain(side);
    let resonant = (1..=6).any(|m| {
        let turns = f64::from(m) / over + if held(before) == held(after) { 0.0 } else { 0.5 };
        (turns - turns.round()).abs() < 1e-3
    });
    let other_terms = film(before) || film(after) || (resonant && !(plain(before) && plain(after)));
    let smooth = (leading - leading.round()).abs() < 1e-12;
    if smooth && !other_terms { None } else { Some(Singularity { leading, step: over, other_terms }) }
}

impl Singularity {
    /// Exponents `λ + j·step + m` below `limit` that are not integers.
    fn exponents(&self, limit: f64) -> Vec<f64> {
        let mut exponents: Vec<f64> = Vec::new();
        let mut base = self.leading;
        while base < limit {
            let mut exponent = base;
            while exponent < limit {
                let known = exponents.iter().any(|e| (e - exponent).abs() < 1e-6);
                if !known && (exponent - exponent.round()).abs() > 1e-6 {
                    exponents.push(exponent);
                }
                exponent += 1.0;
            }
            base += self.step;
        }
        exponents.sort_by(f64::total_cmp);
        exponents
    }
}

/// Places the poles of every corner.
///
/// The poles are tapered, `d_j = L exp(−σ(√n − √j))`. Writing `r^λ` as an integral over poles on the bisector
/// and applying the trapezoidal rule in `ln d`, whose strip of analyticity has half width `β = π − θ/2`,
/// gives `σ² = 4πβ/λ` and `√n = ln(1/tol)/(σλ)`; least squares needs about half of that many. With the powers
/// below `power_limit` among the trial functions, `λ` is the first exponent that they do not cover.
///
/// # Source
/// Gopal and Trefethen, SIAM J. Numer. Anal. 57 (2019) 2074-2094 (clustering, least squares); Trefethen,
/// Nakatsukasa and Weideman, Numer. Math. 147 (2021) (tapering); both from memory, the constants derived here.
pub(super) fn clusters(polygon: &Polygon, sides: &[SideData], options: &RationalOptions) -> Vec<Cluster> {
    // Beyond 20 the powers of a sharp corner would be far more than the poles they replace.
    let power_limit = options.power_limit.clamp(1.0, 20.0);
    (0..polygon.len())
        .filter_map(|k| {
            let singularity = singularity(polygon, sides, k)?;
            let exponents = singularity.exponents(power_limit);
            let beta = std::f64::consts::PI - 0.5 * polygon.interior_angle(k);
            let digits = -options.tolerance.clamp(1e-30, 1e-2).ln();
            let leading = singularity.leading;
            let covered = if exponents.is_empty() { leading } else { power_limit };
            let lambda = if singularity.other_terms { options.film_exponent.max(leading) } else { covered };
            let needed = options.pole_share * digits * digits / (4.0 * std::f64::consts::PI * beta * lambda);
            let n = (needed.ceil() as usize).clamp(6, options.max_poles.max(6));
            let root_n = (n as f64).sqrt();
            let sigma = digits / lambda / root_n;
            let direction = polygon.exterior_bisector(k);
            let length = polygon.clear_length(k, direction);
            let distances: Vec<f64> =
                (1..=n).map(|j| length * (-sigma * (root_n - (j as f64).sqrt())).exp()).collect();
            // Samples: some to a pole, then on down to where the leading power is below the tolerance.
            let per_pole = options.samples_per_pole.max(2);
            let mut sample_distances: Vec<f64> = (1..=n * per_pole)
                .map(|i| length * (-sigma * (root_n - (i as f64 / per_pole as f64).sqrt())).exp())
                .collect();
            let deepest = length * (-digits / leading.min(1.0)).exp();
            let mut next = 0.6 * sample_distances[0];
            while next > deepest {
                sample_distances.insert(0, next);
                // The samples thin out: only the leading powers live there.
                next *= 0.3;
            }
            Some(Cluster { corner: k, direction, length, exponents, distances, sample_distances })
        })
        .collect()
}

/// Simple poles beside the sides, outside: they carry the smooth part where a polynomial cannot follow the
/// outline (slots, arms). Their spacing follows the width of the section and of the gap outside it, and each
/// stands out by twice the spacing, or less where another side comes near.
pub(super) fn beside_sides(polygon: &Polygon, count: usize) -> Vec<(LocalPoint, f64)> {
    let mut poles = Vec::new();
    if count == 0 {
        return poles;
    }
    let widest = polygon.perimeter() / count as f64;
    for side in 0..polygon.len() {
        let (along, normal) = (polygon.side(side), polygon.normal(side));
        let length = along.norm();
        let spacing_at = |place: f64| {
            let foot = polygon.vertex(side) + along * (place / length);
            let inside = polygon.ray_length(foot, -normal, side);
            let outside = polygon.ray_length(foot, normal, side);
            widest.min(0.25 * inside).min(0.35 * outside).max(0.1 * widest)
        };
        let mut place = 0.0;
        while place < length {
            let start = spacing_at((place + 0.25 * widest).min(length));
            let spacing = spacing_at((place + 0.5 * start).min(length));
            let middle = place + 0.5 * spacing;
            place += spacing;
            if middle > length {
                break;
            }
            let foot = polygon.vertex(side) + along * (middle / length);
            let clear = |out: f64| {
                let z = foot + normal * out;
                !polygon.contains(z) && polygon.distance(z) > 0.7 * out
            };
            let mut out = 2.0 * spacing;
            while !clear(out) && out > 0.2 * spacing {
                out *= 0.8;
            }
            // Where even that is too near another side, the cluster of the corner between them does the work.
            if clear(out) {
                poles.push((polygon.local(foot + normal * out), out));
            }
        }
    }
    poles
}
