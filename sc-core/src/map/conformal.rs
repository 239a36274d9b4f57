//! The map itself: `f(ζ) = w_k + C ∫_{x_k}^{ζ} ∏ (ζ − x_j)^{α_j − 1} dζ`, its derivative, and places on the sides.

use super::gap_line::GapLine;
use super::half_plane::{Effort, MapError, Plan, Solved, choose_infinity, rotation, solve_parameters};
use super::parameter_problem::IterationObserver;
use super::power_product::{HalfPlanePoint, PowerProduct, Scaled};
use super::side_integrals::{RuleSet, side_integrals};
use crate::outline::{Outline, Point};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Nodes a panel in evaluation.
const EVALUATION_NODES: usize = 14;
/// Newton steps for a place on a side: the unknown is `ln t` against `ln s`, which the local power law makes nearly
/// linear; 9 were the most seen, the rest is bisection.
const MAX_PLACE_STEPS: usize = 80;
/// Offsets beyond this (in the logarithm) have lost the digits of a width.
const MAX_LN_OFFSET: f64 = 1e9;

/// How a map is solved for. The default is good; the second choice of everything gives an independent solution.
#[derive(Debug, Clone)]
pub struct MapOptions {
    /// Rank of the vertex sent to infinity among those that suit: 0 the best, 1 the next.
    pub infinity_rank: usize,
    /// Long sides are cut at `1/split` from either end for the start.
    pub split: f64,
    /// Root mean square of the logarithmic side-length residuals to stop at.
    pub tolerance: f64,
    /// Quadrature nodes a panel in the final iteration.
    pub nodes: usize,
    /// Relative size of a reproducible disturbance of the side lengths, in units of the rounding of the coordinates.
    /// Zero but in the independent check, where it makes the rounding of the input visible.
    pub disturbance: f64,
    /// Gaps of a neighbouring section to start from, as returned by [`HalfPlaneMap::line`] for the same vertex at
    /// infinity.
    pub warm_start: Option<(usize, GapLine)>,
    /// Called after every iteration.
    pub observer: Option<IterationObserver>,
}

impl Default for MapOptions {
    fn default() -> Self {
        MapOptions {
            infinity_rank: 0,
            split: 3.0,
            tolerance: 1e-14,
            nodes: 12,
            disturbance: 0.0,
            warm_start: None,
            observer: None,
        }
    }
}

/// The conformal map of the upper half-plane onto the inside of an outline.
#[derive(Debug, Clone)]
pub struct HalfPlaneMap {
    outline: Outline,
    at_infinity: usize,
    line: GapLine,
    exponents: Vec<f64>,
    product: PowerProduct,
    /// `C = e^ln_scale · rotation`
    ln_scale: f64,
    rotation: Complex64,
    /// Image of the reference of each prevertex.
    bases: Vec<Point>,
    /// Distance along each side (in line order) from its start, or its end if it comes from infinity, to the image of
    /// the middle of its gap.
    half_lengths: Vec<f64>,
    rms: f64,
    effort: Effort,
}

impl HalfPlaneMap {
    /// Solves the parameter problem of an outline.
    ///
    /// # Errors
    /// [`MapError`] if no start can be made or the iteration does not end in a map that fits.
    ///
    /// # Accuracy
    /// Side lengths fit to a relative 1e-13 or better; 300 of 300 polygons of the robustness set with up to 50
    /// sides and 230 decades of crowding converged, to 4e-14 at worst.
    pub fn solve(outline: &Outline, options: &MapOptions) -> Result<HalfPlaneMap, MapError> {
        let warm = options.warm_start.as_ref();
        let at_infinity = warm.map_or_else(|| choose_infinity(outline, options.infinity_rank), |w| w.0);
        let plan = Plan {
            at_infinity,
            parts: options.split,
            target_rms: options.tolerance,
            nodes: options.nodes,
            disturbance: options.disturbance,
            warm_start: warm.map(|w| w.1.clone()),
            observer: options.observer.clone(),
        };
        let solved = solve_parameters(outline, &plan)?;
        Self::from_parameters(outline, at_infinity, solved)
    }

    fn from_parameters(outline: &Outline, at_infinity: usize, solved: Solved) -> Result<Self, MapError> {
        let n = outline.n();
        let exponents: Vec<f64> =
            (0..n - 1).map(|k| outline.alpha()[(at_infinity + 1 + k) % n] - 1.0).collect();
        let rules = RuleSet::new(&exponents, EVALUATION_NODES)?;
        let product = PowerProduct::new(&solved.line, rules);
        let mut map = HalfPlaneMap {
            outline: outline.clone(),
            at_infinity,
            line: solved.line,
            exponents,
            product,
            ln_scale: solved.ln_scale,
            rotation: rotation(outline, at_infinity),
            half_lengths: Vec::new(),
            bases: Vec::new(),
            rms: solved.rms,
            effort: solved.effort,
        };
        map.bases = (0..n - 1)
            .map(|k| {
                if map.is_end(k) {
                    map.base_beside(k)
                } else {
                    outline.point(map.vertex_of(k)).unwrap_or_default()
                }
            })
            .collect();
        map.half_lengths = (0..n)
            .map(|k| {
                if k + 2 < n && map.is_end(k) {
                    let ln_offset =
                        map.line.log_gaps()[k] - map.product.ln_unit(k + 1) - std::f64::consts::LN_2;
                    map.travelled(on_axis(k + 1, ln_offset, false))
                } else if k + 2 < n {
                    let ln_offset = map.line.log_gaps()[k] - map.product.ln_unit(k) - std::f64::consts::LN_2;
                    map.travelled(on_axis(k, ln_offset, true))
                } else {
                    f64::INFINITY
                }
            })
            .collect();
        Ok(map)
    }

    /// The outline that is mapped onto.
    pub fn outline(&self) -> &Outline {
        &self.outline
    }

    /// Index (in walking order) of the vertex whose prevertex is infinity.
    pub fn at_infinity(&self) -> usize {
        self.at_infinity
    }

    /// The finite prevertices, from the vertex after the one at infinity onward.
    pub fn line(&self) -> &GapLine {
        &self.line
    }

    /// `α − 1` at the finite prevertices.
    pub fn exponents(&self) -> &[f64] {
        &self.exponents
    }

    /// `ln |C|` of the multiplier, for the line's own unit.
    pub fn ln_scale(&self) -> f64 {
        self.ln_scale
    }

    /// Root mean square of the logarithmic side-length residuals at the end of the iteration.
    pub fn rms(&self) -> f64 {
        self.rms
    }

    /// What the solution took.
    pub fn effort(&self) -> &Effort {
        &self.effort
    }

    /// Largest `|ln |C| I_k − ln side_k|`, with a quadrature rule of `nodes` nodes a panel: another rule than the one
    /// the map was solved with makes it a statement about the map.
    ///
    /// # Errors
    /// [`MapError::Rule`] if `nodes` is zero.
    pub fn residual(&self, nodes: usize) -> Result<f64, MapError> {
        let rules = RuleSet::new(&self.exponents, nodes)?;
        let ln = side_integrals(&self.line, &rules, false).ln;
        Ok(ln
            .iter()
            .enumerate()
            .filter(|(k, _)| self.length(*k).is_finite())
            .map(|(k, i)| (self.ln_scale + i - self.length(k).ln()).abs())
            .fold(0.0, f64::max))
    }

    /// Walking index of the vertex with a given line index; the side of that index leaves it.
    pub fn vertex_of(&self, line_index: usize) -> usize {
        (self.at_infinity + 1 + line_index) % self.outline.n()
    }

    /// Line index of a vertex; `n − 1` is the one at infinity.
    pub fn line_index_of(&self, vertex: usize) -> usize {
        let n = self.outline.n();
        (vertex + n - self.at_infinity - 1) % n
    }

    fn length(&self, line_index: usize) -> f64 {
        self.outline.side_length(self.vertex_of(line_index)).unwrap_or(f64::INFINITY)
    }

    /// Whether a line point is the prevertex of a vertex at infinity.
    pub(crate) fn is_end(&self, line_index: usize) -> bool {
        self.exponents[line_index] <= -1.0
    }

    /// Where the integral from an anchor starts: the anchor itself, or half a unit above the prevertex of a vertex at
    /// infinity.
    fn reference_offset(&self, anchor: usize) -> Complex64 {
        Complex64::new(0.0, if self.is_end(anchor) { 0.5 } else { 0.0 })
    }

    /// The image of the reference of an anchor: the corner, if it is finite.
    pub(crate) fn base(&self, anchor: usize) -> Point {
        self.bases[anchor]
    }

    /// The image of the reference of the prevertex `p` of a vertex at infinity, from the corner before it.
    fn base_beside(&self, p: usize) -> Point {
        let gap = self.line.log_gaps()[p - 1];
        let half = (gap - self.product.ln_unit(p)).exp() * 0.5;
        let way = Complex64::from_polar(half, 0.75 * PI);
        let before = p - 1;
        let ratio = (self.product.ln_unit(p) - self.product.ln_unit(before)).exp();
        let offset = Complex64::new((way.re + 2.0 * half) * ratio, way.im * ratio);
        let first = self.product.integral(HalfPlanePoint::new(before, offset));
        let second = self.product.segment(p, way, self.reference_offset(p));
        let corner = self.outline.point(self.vertex_of(before)).unwrap_or_default();
        corner + [first, second].map(|w| w.times(self.ln_scale, self.rotation).value()).iter().sum::<Point>()
    }

    /// `f(ζ)`.
    pub fn forward(&self, p: HalfPlanePoint) -> Point {
        self.base(p.anchor) + self.from_anchor(p)
    }

    /// `f(ζ) − w_anchor`, which keeps its digits near the corner; from the prevertex of a vertex at infinity, the
    /// image less that of a fixed point above it.
    pub fn from_anchor(&self, p: HalfPlanePoint) -> Point {
        let w = if self.is_end(p.anchor) {
            self.product.integral_from(self.reference_offset(p.anchor), p)
        } else {
            self.product.integral(p)
        };
        w.times(self.ln_scale, self.rotation).value()
    }

    /// The derivative of `f` in the logarithm of the offset: `f'(ζ) (ζ − x_anchor)`.
    pub fn log_derivative(&self, p: HalfPlanePoint) -> Point {
        let unit = self.product.ln_unit(p.anchor);
        self.scaled_derivative(p)
            .times(unit + p.ln_offset.re, Complex64::from_polar(1.0, p.ln_offset.im))
            .value()
    }

    /// `f'(ζ)` in the line's unit.
    pub(crate) fn scaled_derivative(&self, p: HalfPlanePoint) -> Scaled {
        self.product.value(p).times(self.ln_scale, self.rotation)
    }

    /// `ln |F|` of the leading term `f(ζ) − w_k ≈ F t^α/α` at a finite prevertex.
    pub(crate) fn ln_leading(&self, line_index: usize) -> f64 {
        let c = self.product.coefficient(line_index);
        self.ln_scale + c.ln_scale + c.mantissa.norm().ln()
    }

    pub(crate) fn product(&self) -> &PowerProduct {
        &self.product
    }

    /// The same point held from the prevertex nearest to it.
    pub fn nearest_anchor(&self, p: HalfPlanePoint) -> HalfPlanePoint {
        self.product.nearest_anchor(p)
    }

    /// Distance along the side from the anchor's corner to the image of a point of the axis.
    fn travelled(&self, p: HalfPlanePoint) -> f64 {
        self.from_anchor(p).norm()
    }

    /// The preimage of the point at distance `s` along a side (walking index): `0 ≤ s ≤ length`; on a side from
    /// infinity `s ≤ 0` is measured from its finite end.
    ///
    /// Returns `None` for the vertex that lies at `ζ = ∞`, for a vertex at infinity, and for places so far out that
    /// numbers do not reach (beyond 1e8 widths in a channel).
    pub fn on_side(&self, side: usize, s: f64) -> Option<HalfPlanePoint> {
        if !s.is_finite() {
            return None;
        }
        let n = self.outline.n();
        let k = self.line_index_of(side);
        let length = self.length(k);
        let from_infinity = self.outline.point(side).is_none();
        let to_infinity = self.outline.point(side + 1).is_none();
        let (from_start, from_end) = match (from_infinity, to_infinity) {
            (true, _) => (f64::INFINITY, (-s).max(0.0)),
            (_, true) => (s.max(0.0), f64::INFINITY),
            _ => (s.max(0.0), (length - s).max(0.0)),
        };
        // Sides that meet ζ = ∞ are anchored at their other end, the rest at the end that is nearer on the axis.
        let at_start = match k {
            k if k == n - 2 => true,
            k if k == n - 1 => false,
            _ if from_infinity => from_end > self.half_lengths[k],
            _ => from_start <= self.half_lengths[k],
        };
        let (anchor, distance) = if at_start { (k, from_start) } else { ((k + 1) % n, from_end) };
        // Up to the middle of the gap, or on a side to ζ = ∞ as far as numbers reach.
        let limit = if k + 2 < n {
            self.line.log_gaps()[k] - self.product.ln_unit(anchor) - std::f64::consts::LN_2
        } else if distance >= length {
            return None;
        } else {
            MAX_LN_OFFSET
        };
        let ln_offset = if self.is_end(anchor) {
            let corner = self.base(if at_start { k + 1 } else { k });
            self.ln_offset_far_out(anchor, at_start, corner, from_start.min(from_end), limit)?
        } else {
            self.ln_offset_at(anchor, at_start, distance, limit)?
        };
        Some(self.nearest_anchor(on_axis(anchor, ln_offset, at_start)))
    }

    /// The `ln` offset, at most `limit`, from the prevertex of a vertex at infinity at which the image is at `distance`
    /// from a corner.
    fn ln_offset_far_out(
        &self,
        anchor: usize,
        rightward: bool,
        corner: Point,
        distance: f64,
        limit: f64,
    ) -> Option<f64> {
        let is_channel = self.outline.alpha()[self.vertex_of(anchor)] >= 0.0;
        let mut lambda = limit;
        for _ in 0..MAX_PLACE_STEPS {
            let here = on_axis(anchor, lambda, rightward);
            let reached = (self.forward(here) - corner).norm();
            let rate = self.log_derivative(here).norm();
            // Far out the distance is linear in ln offset (channel) or a power of the offset.
            let change = if is_channel {
                (reached - distance) / rate
            } else {
                (reached / distance).ln() * reached / rate
            };
            let next = (lambda + change.clamp(-60.0, 60.0)).min(limit);
            if !(next.is_finite() && next > -MAX_LN_OFFSET) {
                return None;
            }
            if (next - lambda).abs() <= 2.0 * f64::EPSILON * lambda.abs().max(0.5) {
                return Some(next);
            }
            lambda = next;
        }
        Some(lambda)
    }

    /// The `ln` offset, at most `limit`, at which the image has moved by `distance` along a side.
    fn ln_offset_at(&self, anchor: usize, rightward: bool, distance: f64, limit: f64) -> Option<f64> {
        if distance == 0.0 {
            return Some(f64::NEG_INFINITY);
        }
        // Toward a channel end at ζ = ∞ the distance is linear in ln offset, elsewhere its logarithm nearly is.
        let is_channel = limit == MAX_LN_OFFSET && self.outline.alpha()[self.at_infinity] == 0.0;
        let alpha = self.exponents[anchor] + 1.0;
        let ln_speed = self.ln_leading(anchor) + alpha * self.product.ln_unit(anchor);
        let first_guess = if limit == MAX_LN_OFFSET { self.ln_span(anchor) + 1.0 } else { limit };
        let mut lambda = (((distance * alpha).ln() - ln_speed) / alpha).min(first_guess);
        let (mut low, mut high) = (f64::NEG_INFINITY, limit);
        let (mut stride, mut previous) = (2.0, f64::INFINITY);
        for _ in 0..MAX_PLACE_STEPS {
            let here = on_axis(anchor, lambda, rightward);
            let travelled = self.travelled(here);
            if travelled > distance {
                high = lambda
            } else {
                low = lambda
            }
            let error = (travelled / distance).ln();
            if error.abs() <= 2.0 * f64::EPSILON {
                break;
            }
            let excess = if is_channel && travelled > 0.5 * distance {
                travelled - distance
            } else {
                error * travelled
            };
            let newton = lambda - excess / self.log_derivative(here).norm();
            // Newton may swing between two places of the bracket for ever: it must gain a factor two, or is halved.
            let gains = error.abs() < 0.5 * previous;
            previous = error.abs();
            let next = if newton > low && newton <= high && (gains || high == MAX_LN_OFFSET) {
                newton
            } else if low.is_finite() && high.is_finite() {
                0.5 * (low + high)
            } else {
                stride *= 2.0;
                high - stride
            };
            if (next - lambda).abs() <= f64::EPSILON * lambda.abs().max(0.1) {
                break;
            }
            lambda = next;
        }
        // A place beyond what numbers reach.
        let reached = self.travelled(on_axis(anchor, lambda, rightward));
        ((reached / distance).ln().abs() < 1e-6).then_some(lambda)
    }

    /// `ln` of the distance from an anchor to the farthest other point, in anchor units.
    fn ln_span(&self, anchor: usize) -> f64 {
        let last = self.line.n_points() - 1;
        let far = self.line.ln_distance(0, anchor).max(self.line.ln_distance(anchor, last));
        (far - self.product.ln_unit(anchor)).max(0.0)
    }
}

/// A point of the real axis at `e^ln_offset` right or left of the anchor.
fn on_axis(anchor: usize, ln_offset: f64, rightward: bool) -> HalfPlanePoint {
    let angle = if rightward { 0.0 } else { PI };
    HalfPlanePoint { anchor, ln_offset: Complex64::new(ln_offset, angle) }
}
