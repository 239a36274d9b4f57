//! The outline: angles, bisectors, distances, and points written as an offset from a vertex.

use num_complex::Complex64;

/// A point written as `vertex + offset`.
///
/// Samples and poles sit as close as 1e-50 to a corner; only the offset keeps such a distance.
#[derive(Debug, Clone, Copy)]
pub(super) struct LocalPoint {
    pub(super) corner: usize,
    pub(super) offset: Complex64,
}

/// A simple polygon, counter-clockwise.
#[derive(Debug, Clone)]
pub(super) struct Polygon {
    pub(super) vertices: Vec<Complex64>,
}

fn cross(a: Complex64, b: Complex64) -> f64 {
    a.re * b.im - a.im * b.re
}

fn dot(a: Complex64, b: Complex64) -> f64 {
    a.re * b.re + a.im * b.im
}

/// Distance from `z` to the segment from `a` to `b`.
fn distance_to_segment(z: Complex64, a: Complex64, b: Complex64) -> f64 {
    let along = b - a;
    let t = (dot(z - a, along) / along.norm_sqr()).clamp(0.0, 1.0);
    (z - a - along * t).norm()
}

impl Polygon {
    pub(super) fn len(&self) -> usize {
        self.vertices.len()
    }

    pub(super) fn vertex(&self, k: usize) -> Complex64 {
        self.vertices[k % self.vertices.len()]
    }

    /// Vector along side `k`, from vertex `k` to the next.
    pub(super) fn side(&self, k: usize) -> Complex64 {
        self.vertex(k + 1) - self.vertex(k)
    }

    /// Outward unit normal of side `k`.
    pub(super) fn normal(&self, k: usize) -> Complex64 {
        let side = self.side(k);
        -Complex64::i() * side / side.norm()
    }

    /// Interior angle at vertex `k`, in `(0, 2π)`.
    pub(super) fn interior_angle(&self, k: usize) -> f64 {
        let back = -self.side(k + self.len() - 1);
        let angle = (back / self.side(k)).arg();
        if angle > 0.0 { angle } else { angle + 2.0 * std::f64::consts::PI }
    }

    /// Unit direction that halves the exterior angle at vertex `k`.
    pub(super) fn exterior_bisector(&self, k: usize) -> Complex64 {
        let side = self.side(k);
        let inward = Complex64::from_polar(1.0, 0.5 * self.interior_angle(k));
        -(side / side.norm()) * inward
    }

    /// Signed area, positive for a counter-clockwise outline.
    pub(super) fn area(&self) -> f64 {
        let origin = self.vertices[0];
        0.5 * (0..self.len())
            .map(|k| cross(self.vertex(k) - origin, self.vertex(k + 1) - origin))
            .sum::<f64>()
    }

    pub(super) fn perimeter(&self) -> f64 {
        (0..self.len()).map(|k| self.side(k).norm()).sum()
    }

    pub(super) fn diameter(&self) -> f64 {
        let farthest = |a: &Complex64| self.vertices.iter().map(|b| (a - b).norm()).fold(0.0, f64::max);
        self.vertices.iter().map(farthest).fold(0.0, f64::max)
    }

    /// Whether `z` lies strictly inside, by the parity of crossings.
    pub(super) fn contains(&self, z: Complex64) -> bool {
        let mut inside = false;
        for k in 0..self.len() {
            let (a, b) = (self.vertex(k), self.vertex(k + 1));
            if (a.im > z.im) != (b.im > z.im) && z.re < a.re + (z.im - a.im) / (b.im - a.im) * (b.re - a.re) {
                inside = !inside;
            }
        }
        inside
    }

    /// Distance from `z` to the outline.
    pub(super) fn distance(&self, z: Complex64) -> f64 {
        (0..self.len())
            .map(|k| distance_to_segment(z, self.vertex(k), self.vertex(k + 1)))
            .fold(f64::MAX, f64::min)
    }

    /// How far a ray from `start` on side `from` runs before it meets another side; infinite if it meets none.
    pub(super) fn ray_length(&self, start: Complex64, direction: Complex64, from: usize) -> f64 {
        let mut nearest = f64::INFINITY;
        for k in (0..self.len()).filter(|&k| k != from) {
            let (a, side) = (self.vertex(k) - start, self.side(k));
            let determinant = cross(direction, side);
            if determinant.abs() > 1e-14 * side.norm() {
                let (t, s) = (cross(a, side) / determinant, cross(a, direction) / determinant);
                if t > 0.0 && (0.0..=1.0).contains(&s) {
                    nearest = nearest.min(t);
                }
            }
        }
        nearest
    }

    /// Length of the pole cluster at vertex `k`: as far along `direction` as the sides of *other* corners
    /// stay at least half as far from each pole as the corner itself.
    pub(super) fn clear_length(&self, k: usize, direction: Complex64) -> f64 {
        let n = self.len();
        let vertex = self.vertex(k);
        let clear = |d: f64| {
            let z = vertex + direction * d;
            let others = (0..n).filter(|&j| j != k && (j + 1) % n != k);
            !self.contains(z)
                && others
                    .map(|j| distance_to_segment(z, self.vertex(j), self.vertex(j + 1)))
                    .fold(f64::MAX, f64::min)
                    > 0.5 * d
        };
        let longest = 0.6 * self.diameter();
        let mut length = longest;
        // A ray that leaves and returns must not pass: every shorter distance has to be clear as well.
        for step in 0..60 {
            let d = longest * 0.85_f64.powi(59 - step);
            if !clear(d) {
                length = d / 0.85 * 0.7;
                break;
            }
        }
        length
    }

    /// Whether two sides meet anywhere but at a shared vertex.
    pub(super) fn crossing(&self) -> Option<(usize, usize)> {
        let n = self.len();
        for i in 0..n {
            // A side that folds back on the one before it has no outside to put poles in.
            let (back, side) = (-self.side(i + n - 1), self.side(i));
            let size = back.norm() * side.norm();
            if dot(back, side) > 0.0 && cross(back, side).abs() <= 1e-9 * size {
                return Some(((i + n - 1) % n, i));
            }
            for j in i + 1..n {
                if j == i + 1 || (i == 0 && j == n - 1) {
                    continue;
                }
                let (a, b, c, d) = (self.vertex(i), self.vertex(i + 1), self.vertex(j), self.vertex(j + 1));
                let crossing = cross(b - a, c - a) * cross(b - a, d - a) < 0.0
                    && cross(d - c, a - c) * cross(d - c, b - c) < 0.0;
                let touch = [(c, a, b), (d, a, b), (a, c, d), (b, c, d)]
                    .iter()
                    .any(|&(z, p, q)| distance_to_segment(z, p, q) <= 1e-12 * self.diameter());
                if touch || crossing {
                    return Some((i, j));
                }
            }
        }
        None
    }

    /// `a − b` without loss when both belong to one corner.
    pub(super) fn difference(&self, a: LocalPoint, b: LocalPoint) -> Complex64 {
        if a.corner == b.corner {
            a.offset - b.offset
        } else {
            (self.vertices[a.corner] - self.vertices[b.corner]) + (a.offset - b.offset)
        }
    }

    /// Writes `z` as an offset from the nearest vertex.
    pub(super) fn local(&self, z: Complex64) -> LocalPoint {
        let nearest = (0..self.len())
            .min_by(|&i, &j| (z - self.vertices[i]).norm().total_cmp(&(z - self.vertices[j]).norm()))
            .unwrap_or(0);
        LocalPoint { corner: nearest, offset: z - self.vertices[nearest] }
    }

    pub(super) fn position(&self, point: LocalPoint) -> Complex64 {
        self.vertices[point.corner] + point.offset
    }
}
