//! The inverse map: from a point of the section to the half-plane.
//!
//! `f` is one-to-one, so whatever way leads to `f(ζ) = z` inside the half-plane gives the right `ζ`. The way here
//! starts at the nearest point of the boundary, which the section always lets one reach in a straight line, follows
//! `dζ/dz = 1/f'(ζ)` inward with steps that grow with the distance from the start, and ends with Newton steps. Many
//! points are sorted along a curve and each is first tried from its neighbour.

use super::conformal::HalfPlaneMap;
use super::power_product::HalfPlanePoint;
use crate::outline::{Containment, Nearest, Point};
use num_complex::Complex64;
use rayon::prelude::*;
use std::f64::consts::PI;
use thiserror::Error;

/// Newton steps at the end; from the path's end 2 or 3 are usual.
const MAX_NEWTON: usize = 24;
/// Steps of the path: each multiplies the distance from the start by up to 1.8, so 400 span 100 decades.
const MAX_PATH_STEPS: usize = 400;
/// Largest change of `ln offset` in one step of the path.
const MAX_TURN: f64 = 0.35;
/// Newton steps change the logarithm of the offset by no more than this.
const MAX_CHANGE: f64 = 0.7;
/// Below this `ln` offset (0.8 of the distance to the next prevertex) the power law of the corner leads.
const CLOSE: f64 = -0.22;
/// A neighbour is tried as a start if it is no farther than this part of the distance to the boundary.
const NEIGHBOUR_REACH: f64 = 0.6;
/// Points per unit of parallel work: fixed, so results do not depend on the number of threads.
const CHUNK: usize = 512;

/// Why a point has no preimage.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum InverseError {
    /// The point is not in the closed section.
    #[error("the point ({x}, {y}) is outside the section, {distance:.3e} from it")]
    Outside {
        /// Its coordinates.
        x: f64,
        /// Its coordinates.
        y: f64,
        /// Distance to the boundary.
        distance: f64,
    },
    /// The point is the vertex whose prevertex is infinity, or too near to it to be told apart.
    #[error("the point ({x}, {y}) is the vertex that the map sends to infinity")]
    AtInfinity {
        /// Its coordinates.
        x: f64,
        /// Its coordinates.
        y: f64,
    },
    /// The Newton iteration did not reach the point.
    #[error("the inverse map did not reach ({x}, {y}): {miss:.1e} away after {steps} steps")]
    NotReached {
        /// Its coordinates.
        x: f64,
        /// Its coordinates.
        y: f64,
        /// How far the last image is off.
        miss: f64,
        /// Newton steps made.
        steps: usize,
    },
}

/// A preimage and how well its image hits the point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Preimage {
    /// The point of the half-plane.
    pub at: HalfPlanePoint,
    /// `|f(ζ) − z|`, estimated from the last Newton step.
    pub miss: f64,
    /// The side (walking index) and the distance along it, if the point is on the boundary.
    pub on_side: Option<(usize, f64)>,
    /// No point of the boundary is nearer than this.
    pub clearance: f64,
}

impl HalfPlaneMap {
    /// The preimage of a point of the closed section. A point on the boundary is taken on the side that
    /// [`crate::outline::Outline::nearest_boundary`] names.
    ///
    /// # Errors
    /// [`InverseError`] if the point is outside, is the vertex at infinity, or is not reached.
    pub fn inverse(&self, z: Point) -> Result<Preimage, InverseError> {
        let nearest = self.outline().nearest_boundary(z);
        match self.outline().contains(z) {
            Containment::Outside => {
                Err(InverseError::Outside { x: z.re, y: z.im, distance: nearest.distance })
            }
            Containment::OnSide(side) => {
                let s = if side == nearest.side { nearest.s } else { self.outline().distance_along(side, z) };
                self.on_side(side, s)
                    .map(|at| Preimage {
                        at,
                        miss: nearest.distance,
                        on_side: Some((side, s)),
                        clearance: 0.0,
                    })
                    .ok_or(InverseError::AtInfinity { x: z.re, y: z.im })
            }
            Containment::Inside => self.reached_from_boundary(z, &nearest),
        }
    }

    /// The preimages of many points; each result stands at its point's place.
    pub fn inverse_many(&self, points: &[Point]) -> Vec<Result<Preimage, InverseError>> {
        let order = along_a_curve(points);
        let found: Vec<(usize, Result<Preimage, InverseError>)> = order
            .par_chunks(CHUNK)
            .flat_map_iter(|chunk| {
                let mut last: Option<(Point, Preimage)> = None;
                chunk.iter().map(move |&i| {
                    let z = points[i];
                    let done = self.near_or_anew(z, last);
                    if let Ok(p) = &done {
                        last = Some((z, *p));
                    }
                    (i, done)
                })
            })
            .collect();
        let mut out: Vec<Option<Result<Preimage, InverseError>>> = vec![None; points.len()];
        for (i, result) in found {
            out[i] = Some(result);
        }
        // Every index occurs once in `order`.
        out.into_iter().flatten().collect()
    }

    fn near_or_anew(&self, z: Point, neighbour: Option<(Point, Preimage)>) -> Result<Preimage, InverseError> {
        if let Some((z0, p)) = neighbour {
            // The neighbour is inside; so is all within its distance to the boundary.
            let distance = (z - z0).norm();
            if distance < NEIGHBOUR_REACH * p.clearance
                && let Some(start) = self.one_step(p.at, z - z0)
                && let Some(done) = self.newton(start, z).ok().filter(|p| !p.at.is_real())
            {
                return Ok(Preimage { clearance: p.clearance - distance, ..done });
            }
        }
        self.inverse(z)
    }

    /// One Runge–Kutta step of `d ln(offset)/dz = 1/(f' · offset)`.
    fn one_step(&self, from: HalfPlanePoint, dz: Complex64) -> Option<HalfPlanePoint> {
        let rate = |ln_offset: Complex64| {
            let inside = ln_offset.im >= 0.0 && ln_offset.im <= PI;
            inside.then(|| dz / self.log_derivative(HalfPlanePoint { anchor: from.anchor, ln_offset }))
        };
        let k1 = rate(from.ln_offset)?;
        let k2 = rate(from.ln_offset + k1 * 0.5)?;
        let k3 = rate(from.ln_offset + k2 * 0.5)?;
        let k4 = rate(from.ln_offset + k3)?;
        let ln_offset = from.ln_offset + (k1 + (k2 + k3) * 2.0 + k4) / 6.0;
        let good = ln_offset.re.is_finite() && ln_offset.im >= 0.0 && ln_offset.im <= PI;
        good.then(|| self.nearest_anchor(HalfPlanePoint { anchor: from.anchor, ln_offset }))
    }

    fn reached_from_boundary(&self, z: Point, nearest: &Nearest) -> Result<Preimage, InverseError> {
        let mut last = InverseError::NotReached { x: z.re, y: z.im, miss: f64::INFINITY, steps: 0 };
        for turn in [MAX_TURN, MAX_TURN / 4.0, MAX_TURN / 16.0] {
            let Some(end) = self.path(z, nearest, turn) else { continue };
            match self.newton(end, z) {
                Ok(p) => return Ok(Preimage { clearance: nearest.distance, ..p }),
                Err(e) => last = e,
            }
        }
        Err(last)
    }

    /// Follows the straight line from the nearest boundary point to `z`.
    fn path(&self, z: Point, nearest: &Nearest, turn: f64) -> Option<HalfPlanePoint> {
        let n = self.outline().n();
        let side = nearest.side;
        let length = self.outline().side_length(side);
        let from_end = length.map_or(nearest.s.abs(), |l| (l - nearest.s).min(nearest.s));
        let at_start = match length {
            Some(length) => nearest.s < 0.5 * length,
            None => self.outline().point(side).is_some(),
        };
        let reach = (z - nearest.foot).norm();
        let inward = (z - nearest.foot) / reach;
        // The distance at which the start's own power law is good: a tenth of the way to the next corner.
        let (mut here, mut rho) = if from_end > 1e-12 * length.unwrap_or_else(|| self.outline().size()) {
            let foot = self.on_side(side, nearest.s)?;
            let per_length = inward / self.log_derivative(foot);
            let rho = (0.1 * from_end).min(0.25 * reach).min(0.2 / per_length.norm());
            let step = per_length * rho;
            (HalfPlanePoint { anchor: foot.anchor, ln_offset: foot.ln_offset + step }, rho)
        } else {
            let vertex = if at_start { side } else { (side + 1) % n };
            let k = self.line_index_of(vertex);
            if k == n - 1 {
                self.start_near_infinity(vertex, inward, reach)?
            } else {
                self.start_at_corner(k, vertex, inward, reach)
            }
        };
        here = self.nearest_anchor(kept_above(here));
        for _ in 0..MAX_PATH_STEPS {
            if rho >= reach {
                return Some(here);
            }
            // u = ln ρ; d ln(offset)/du = ρ e^{iφ}/(f' · offset)
            let rate = |ln_offset: Complex64, u: f64| {
                let at = kept_above(HalfPlanePoint { anchor: here.anchor, ln_offset });
                inward * u.exp() / self.log_derivative(at)
            };
            let u = rho.ln();
            let lambda = here.ln_offset;
            let k1 = rate(lambda, u);
            let h = (turn / k1.norm()).min(0.6).min(reach.ln() - u);
            let k2 = rate(lambda + k1 * (0.5 * h), u + 0.5 * h);
            let k3 = rate(lambda + k2 * (0.5 * h), u + 0.5 * h);
            let k4 = rate(lambda + k3 * h, u + h);
            let ln_offset = lambda + (k1 + (k2 + k3) * 2.0 + k4) * (h / 6.0);
            if !(ln_offset.re.is_finite() && ln_offset.im.is_finite()) {
                return None;
            }
            here = self.nearest_anchor(kept_above(HalfPlanePoint { anchor: here.anchor, ln_offset }));
            rho = if u + h >= reach.ln() - 1e-12 { reach } else { (u + h).exp() };
        }
        None
    }

    /// `f − w_k ≈ F t^α/α` turned round, at a distance where it is good.
    fn start_at_corner(&self, k: usize, vertex: usize, inward: Point, reach: f64) -> (HalfPlanePoint, f64) {
        let alpha = self.outline().alpha()[vertex];
        let ln_speed = self.ln_leading(k) + alpha * self.product().ln_unit(k) - alpha.ln();
        // The direction from the side that leaves the vertex: between 0 and α π.
        let relative = inward / self.outline().side_direction(vertex);
        let angle = turn_left(relative, alpha);
        // |offset| = 0.05 of the distance to the next prevertex.
        let rho = (ln_speed + alpha * 0.05_f64.ln()).exp().min(reach);
        let ln_offset = (rho.ln() - ln_speed) / alpha;
        (HalfPlanePoint { anchor: k, ln_offset: Complex64::new(ln_offset, angle / alpha) }, rho)
    }

    /// The same at the vertex whose prevertex is infinity: `f − w_n ≈ −C t^{−α}/α` for large `t`.
    fn start_near_infinity(&self, vertex: usize, inward: Point, reach: f64) -> Option<(HalfPlanePoint, f64)> {
        let alpha = self.outline().alpha()[vertex];
        let anchor = self.line().n_points() - 1;
        let ln_span = self.line().ln_distance(0, anchor) - self.product().ln_unit(anchor);
        // In the line's unit: |f − w_n| = e^ln_scale |t|^{−α}/α.
        let unit = self.product().ln_unit(anchor);
        let ln_speed = self.ln_scale() - alpha.ln();
        let rho = (ln_speed - alpha * (3.0 + ln_span + unit)).exp().min(reach);
        if rho <= 0.0 {
            return None;
        }
        let ln_t = (ln_speed - rho.ln()) / alpha - unit;
        // From the side that leaves the vertex (from −∞, arg t = π) turning left means arg t falling to 0.
        let relative = inward / self.outline().side_direction(vertex);
        let angle = PI - turn_left(relative, alpha) / alpha;
        ln_t.is_finite().then(|| (HalfPlanePoint { anchor, ln_offset: Complex64::new(ln_t, angle) }, rho))
    }

    /// Newton's method on `f(ζ) = z` in the logarithm of the offset; near a corner also in the logarithm of the image,
    /// where the power law is a straight line.
    fn newton(&self, start: HalfPlanePoint, z: Point) -> Result<Preimage, InverseError> {
        let mut here = start;
        let size = self.outline().size().max(z.norm());
        let mut miss = f64::INFINITY;
        for _ in 0..MAX_NEWTON {
            let target = z - self.base(here.anchor);
            let image = self.from_anchor(here);
            let d = self.log_derivative(here);
            let error = target - image;
            let in_power_law = match self.exponents()[here.anchor] + 1.0 {
                alpha if alpha > 0.0 => here.ln_offset.re < CLOSE,
                // Toward infinity the power law leads farther in, past the reference point; a channel is linear.
                alpha => alpha < 0.0 && here.ln_offset.re < CLOSE - 2.0,
            };
            let change = if in_power_law { (target / image).ln() * image / d } else { error / d };
            if !(change.re.is_finite() && change.im.is_finite()) {
                break;
            }
            let last = miss;
            miss = error.norm();
            let relative = change.norm();
            let change = if relative > MAX_CHANGE { change * (MAX_CHANGE / relative) } else { change };
            let ln_offset = here.ln_offset + change;
            let next = self.nearest_anchor(kept_above(HalfPlanePoint { anchor: here.anchor, ln_offset }));
            // A new anchor at much less distance has cost digits: then one more step. (Between two equally near ones
            // the iteration may swing for ever.)
            let distance = |p: HalfPlanePoint| p.ln_offset.re + self.product().ln_unit(p.anchor);
            let settled = next.anchor == here.anchor || distance(next) > distance(here) - 1.0;
            here = next;
            let rounding = 8.0 * f64::EPSILON * (target.norm() + f64::EPSILON * size);
            // After a step of relative size ε the error is of the order ε² of the image's scale.
            if settled && relative < 1e-7 {
                return Ok(inside(here, (relative * miss).max(rounding)));
            }
            if settled && miss <= 64.0 * f64::EPSILON * size && miss >= 0.25 * last {
                return Ok(inside(here, miss.max(rounding)));
            }
        }
        Err(InverseError::NotReached { x: z.re, y: z.im, miss, steps: MAX_NEWTON })
    }
}

fn inside(at: HalfPlanePoint, miss: f64) -> Preimage {
    Preimage { at, miss, on_side: None, clearance: 0.0 }
}

/// The same point, on the real axis if it is below.
fn kept_above(p: HalfPlanePoint) -> HalfPlanePoint {
    HalfPlanePoint { ln_offset: Complex64::new(p.ln_offset.re, p.ln_offset.im.clamp(0.0, PI)), ..p }
}

/// The angle of a direction that lies between 0 and `α π`, chosen on the branch nearest to the middle.
fn turn_left(direction: Complex64, alpha: f64) -> f64 {
    let middle = 0.5 * alpha * PI;
    let around = (direction * Complex64::from_polar(1.0, -middle)).arg();
    (around + middle).clamp(0.0, alpha * PI)
}

/// Indices of the points along a space-filling curve (bits of x and y interleaved, every other row of cells turned).
fn along_a_curve(points: &[Point]) -> Vec<usize> {
    let finite = || points.iter().filter(|p| p.re.is_finite() && p.im.is_finite());
    let low = finite().fold((f64::INFINITY, f64::INFINITY), |m, p| (m.0.min(p.re), m.1.min(p.im)));
    let high = finite().fold((f64::NEG_INFINITY, f64::NEG_INFINITY), |m, p| (m.0.max(p.re), m.1.max(p.im)));
    let size = (high.0 - low.0).max(high.1 - low.1).max(f64::MIN_POSITIVE);
    let mut keyed: Vec<(u64, usize)> = points
        .iter()
        .enumerate()
        .map(|(i, p)| {
            let cell = |v: f64, low: f64| (((v - low) / size) * 65_535.0) as u32;
            (hilbert(cell(p.re, low.0), cell(p.im, low.1)), i)
        })
        .collect();
    keyed.sort_unstable();
    keyed.into_iter().map(|(_, i)| i).collect()
}

/// Position of a cell of a 2¹⁶ × 2¹⁶ grid on Hilbert's curve.
fn hilbert(x: u32, y: u32) -> u64 {
    let (mut x, mut y) = (x & 0xffff, y & 0xffff);
    let mut d = 0u64;
    let mut s = 1u32 << 15;
    while s > 0 {
        let rx = u32::from(x & s > 0);
        let ry = u32::from(y & s > 0);
        d += u64::from(s) * u64::from(s) * u64::from((3 * rx) ^ ry);
        if ry == 0 {
            if rx == 1 {
                x = 0xffff - x;
                y = 0xffff - y;
            }
            std::mem::swap(&mut x, &mut y);
        }
        s >>= 1;
    }
    d
}
