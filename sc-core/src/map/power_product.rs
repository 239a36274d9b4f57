//! A product of powers in the upper half-plane, its value and its integral from one of its points.
//!
//! ```text
//! P(ζ) = ∏_j (ζ − x_j)^{a_j},    0 ≤ arg(ζ − x_j) ≤ π
//! ```
//! Both the derivative of the map and the complex field on the half-plane are such products. Points are known by
//! their gaps only, so `ζ` is held as an anchor point and an offset in the anchor's own unit.

use super::gap_line::GapLine;
use super::side_integrals::RuleSet;
use crate::quadrature::{argument_upper, ln_positive};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Distances beyond this many anchor units are constants for every offset that the anchor serves.
const FINITE_DISTANCE: f64 = 1e140;
/// Offsets up to this may be squared.
const SQUARABLE: f64 = 1e140;
/// A panel starting at distance `d` from the nearest other singularity is at most `GROWTH × d` long.
const GROWTH: f64 = 1.5;
/// Below this `ln` offset the other points' factors are constant to all digits.
const NEAR_LN_OFFSET: f64 = -40.0;
/// Offsets up to this (in the logarithm) are handled as plain numbers, those beyond in logarithms.
const PLAIN_LN_OFFSET: f64 = 250.0;
/// Scales that differ by `e^40` do not see each other.
const REMOTE: f64 = 40.0;
/// A panel far out ends at 2.5 times its start.
const PANEL_E_FOLDS: f64 = 0.916;
/// Panels in one path. Each grows by 2.5, so 2000 span more than the range of `f64`.
const MAX_PANELS: usize = 2000;

/// A point of the closed upper half-plane: `ζ = x_anchor + unit_anchor · e^ln_offset`, `0 ≤ Im ln_offset ≤ π`.
///
/// The unit of an anchor is its distance to the nearest other point. The representation keeps full relative
/// accuracy of `ζ − x_j` for every `j` as long as the anchor is the nearest point, and reaches into corners so sharp
/// that the offset itself would underflow (a corner of 0.02 π turns 1e-9 of the side into `e^−1000`).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct HalfPlanePoint {
    /// Index of the anchor in the line.
    pub anchor: usize,
    /// Logarithm of the offset in anchor units; real part `−∞` at the anchor itself.
    pub ln_offset: Complex64,
}

impl HalfPlanePoint {
    /// The point at an offset in anchor units. An imaginary part below zero is taken as zero.
    pub fn new(anchor: usize, offset: Complex64) -> HalfPlanePoint {
        HalfPlanePoint { anchor, ln_offset: Complex64::new(offset.norm().ln(), argument(offset)) }
    }

    /// The offset in anchor units; it may underflow to zero.
    pub fn offset(&self) -> Complex64 {
        Complex64::from_polar(self.ln_offset.re.exp(), self.ln_offset.im)
    }

    /// Whether the point is on the real axis, that is on the boundary of the section.
    pub fn is_real(&self) -> bool {
        self.ln_offset.im <= 0.0 || self.ln_offset.im >= PI || self.ln_offset.re == f64::NEG_INFINITY
    }
}

/// A complex number `e^ln_scale · mantissa`, for values beyond the range of `f64`.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Scaled {
    pub(crate) ln_scale: f64,
    pub(crate) mantissa: Complex64,
}

impl Scaled {
    /// The plain number; it may overflow or vanish.
    pub(crate) fn value(self) -> Complex64 {
        self.mantissa * self.ln_scale.exp()
    }

    /// `ln` of the absolute value.
    pub(crate) fn ln_norm(self) -> f64 {
        self.ln_scale + self.mantissa.norm().ln()
    }

    /// The sum of values of different scales.
    pub(crate) fn sum(parts: impl Iterator<Item = Scaled>) -> Scaled {
        let mut sum = Sum::default();
        parts.for_each(|p| sum.add(p, 1.0, 0.0));
        sum.total()
    }

    pub(crate) fn times(self, ln_factor: f64, factor: Complex64) -> Scaled {
        Scaled { ln_scale: self.ln_scale + ln_factor, mantissa: self.mantissa * factor }
    }
}

/// How a power is taken: most corners of practice are right angles, and square roots are much cheaper than logarithms.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Kind {
    Root,
    InverseRoot,
    Whole,
    Inverse,
    General,
}

#[derive(Debug, Clone, Copy)]
struct Factor {
    exponent: f64,
    kind: Kind,
    /// Signed distance `x_anchor − x_j` in anchor units: positive for points to the left.
    shift: f64,
    ln_distance: f64,
}

#[derive(Debug, Clone, Default)]
struct Columns {
    shifts: Vec<f64>,
    exponents: Vec<f64>,
}

#[derive(Debug, Clone, Copy)]
struct Neighbour {
    index: usize,
    /// Position in anchor units; infinite if out of range.
    position: f64,
    ln_distance: f64,
    exponent: f64,
}

impl Neighbour {
    /// `(ζ − x_j)/t` for the offset `t e^{iθ}` with `ln t = ln_t` on the line; of unit size if the point is near to the
    /// anchor, and `None` if it is so far that only its distance counts.
    fn seen_from(&self, ln_t: f64, direction: Complex64) -> Option<Complex64> {
        let ratio = self.ln_distance - ln_t;
        let signed = ratio.exp() * if self.position > 0.0 { -1.0 } else { 1.0 };
        (ratio < REMOTE).then(|| direction + signed)
    }
}

/// The product seen from one of its points.
#[derive(Debug, Clone)]
struct View {
    /// `ln` of the anchor's unit.
    ln_unit: f64,
    self_exponent: f64,
    factors: Vec<Factor>,
    /// The factors without a cheap power, as plain columns for vectorised loops.
    general: Columns,
    /// `ln unit · Σ a_j` over `general`.
    general_ln_unit: f64,
    /// Every other point, for the choice of the nearest anchor and for offsets beyond the range of squares.
    neighbours: Vec<Neighbour>,
    /// `Σ a_j ln |x_j − x_anchor|` over points too far to vary.
    far_ln: f64,
    /// Phase `π Σ a_j` over far points on the right.
    far_phase: f64,
}

/// The product, prepared for evaluation near each of its points.
#[derive(Debug, Clone)]
pub(crate) struct PowerProduct {
    views: Vec<View>,
    rules: RuleSet,
}

impl PowerProduct {
    pub(crate) fn new(line: &GapLine, rules: RuleSet) -> PowerProduct {
        let exponents = rules.exponents();
        let views = (0..line.n_points())
            .map(|k| {
                let d = line.ln_distances(k);
                let ln_unit = unit(line, k);
                let mut view = View {
                    ln_unit,
                    self_exponent: exponents[k],
                    factors: Vec::new(),
                    general: Columns::default(),
                    general_ln_unit: 0.0,
                    neighbours: Vec::new(),
                    far_ln: 0.0,
                    far_phase: 0.0,
                };
                for (j, &a) in exponents.iter().enumerate() {
                    let distance = (d[j] - ln_unit).exp();
                    if j != k {
                        let position = if j < k { -distance } else { distance };
                        view.neighbours.push(Neighbour {
                            index: j,
                            position,
                            ln_distance: d[j],
                            exponent: a,
                        });
                    }
                    if j == k || a == 0.0 {
                        continue;
                    }
                    if distance > FINITE_DISTANCE {
                        view.far_ln += a * d[j];
                        if j > k {
                            view.far_phase += PI * a;
                        }
                    } else {
                        let shift = if j < k { distance } else { -distance };
                        if kind(a) == Kind::General {
                            view.general.shifts.push(shift);
                            view.general.exponents.push(a);
                            view.general_ln_unit += a * ln_unit;
                        }
                        view.factors.push(Factor { exponent: a, kind: kind(a), shift, ln_distance: d[j] });
                    }
                }
                view
            })
            .collect();
        PowerProduct { views, rules }
    }

    /// `ln` of the unit of an anchor.
    pub(crate) fn ln_unit(&self, anchor: usize) -> f64 {
        self.views[anchor].ln_unit
    }

    /// `ln(ζ − x_j)`, the imaginary part in `[0, π]`.
    pub(crate) fn ln_from(&self, j: usize, p: HalfPlanePoint) -> Complex64 {
        let view = &self.views[p.anchor];
        let ln_t = p.ln_offset.re + view.ln_unit;
        let direction = Complex64::from_polar(1.0, p.ln_offset.im);
        match view.neighbours.iter().find(|n| n.index == j) {
            None => Complex64::new(ln_t, p.ln_offset.im),
            // In the larger of the two scales nothing overflows.
            Some(n) if n.ln_distance > ln_t => {
                let sign = if n.position > 0.0 { -1.0 } else { 1.0 };
                let z = direction * (ln_t - n.ln_distance).exp() + sign;
                Complex64::new(n.ln_distance + z.norm().ln(), argument(z))
            }
            Some(n) => {
                let sign = if n.position > 0.0 { -1.0 } else { 1.0 };
                let z = direction + sign * (n.ln_distance - ln_t).exp();
                Complex64::new(ln_t + z.norm().ln(), argument(z))
            }
        }
    }

    /// Exponent of a point.
    pub(crate) fn exponent(&self, j: usize) -> f64 {
        self.views[j].self_exponent
    }

    /// The same point held from the point of the line nearest to it.
    pub(crate) fn nearest_anchor(&self, p: HalfPlanePoint) -> HalfPlanePoint {
        let mut here = p;
        // Each move at least halves the distance or goes to a direct neighbour of the right one.
        for _ in 0..8 {
            let view = &self.views[here.anchor];
            if here.ln_offset.re > PLAIN_LN_OFFSET {
                let Some(moved) = self.nearer_far_out(here) else { break };
                here = moved;
                continue;
            }
            let offset = here.offset();
            let own = offset.norm();
            if own < 0.5 {
                break;
            }
            let Some((best, distance)) = view
                .neighbours
                .iter()
                .map(|n| (n, (offset - n.position).norm()))
                .min_by(|a, b| a.1.total_cmp(&b.1))
            else {
                break;
            };
            if distance >= own {
                break;
            }
            let scale = (view.ln_unit - self.views[best.index].ln_unit).exp();
            here = HalfPlanePoint::new(
                best.index,
                Complex64::new((offset.re - best.position) * scale, offset.im.max(0.0) * scale),
            );
        }
        here
    }

    /// The value at a point that is not itself a singular point.
    pub(crate) fn value(&self, p: HalfPlanePoint) -> Scaled {
        let view = &self.views[p.anchor];
        if p.ln_offset.re > PLAIN_LN_OFFSET {
            return view.far_out(p.ln_offset);
        }
        let others = view.others(p.offset());
        if view.self_exponent == 0.0 {
            return others;
        }
        let own = Complex64::from_polar(1.0, view.self_exponent * p.ln_offset.im);
        others.times(view.self_exponent * (p.ln_offset.re + view.ln_unit), own)
    }

    /// The value without the anchor's own factor, at the anchor: the coefficient of the leading power there.
    pub(crate) fn coefficient(&self, anchor: usize) -> Scaled {
        self.views[anchor].others(Complex64::new(0.0, 0.0))
    }

    /// `∫ P dζ` from the anchor to the point, along the straight line. Needs the anchor's exponent above −1.
    pub(crate) fn integral(&self, p: HalfPlanePoint) -> Scaled {
        if p.ln_offset.re > PLAIN_LN_OFFSET {
            let turn = HalfPlanePoint { ln_offset: Complex64::new(0.0, p.ln_offset.im), ..p };
            return Scaled::sum([self.integral(turn), self.outward(p)].into_iter());
        }
        let mut sum = Sum::default();
        let (ln_factor, factor) = self.along_ray(p, |_, value, weight, ln| sum.add(value, weight, ln));
        sum.total().times(ln_factor, factor)
    }

    /// `∫ P dζ` along the straight segment between two offsets of one anchor; panels shrink as singular points near.
    pub(crate) fn segment(&self, anchor: usize, from: Complex64, to: Complex64) -> Scaled {
        let mut sum = Sum::default();
        let (ln_factor, factor) =
            self.along_segment(anchor, from, to, |_, value, weight, ln| sum.add(value, weight, ln));
        sum.total().times(ln_factor, factor)
    }

    /// `∫ P dζ` from an offset to a point of the same anchor. Close to an anchor with exponent −1 or below the
    /// product is its leading power, integrated in closed form.
    pub(crate) fn integral_from(&self, reference: Complex64, p: HalfPlanePoint) -> Scaled {
        if p.ln_offset.re > PLAIN_LN_OFFSET {
            let turn = Complex64::from_polar(1.0, p.ln_offset.im);
            return Scaled::sum([self.segment(p.anchor, reference, turn), self.outward(p)].into_iter());
        }
        if p.ln_offset.re >= NEAR_LN_OFFSET || self.views[p.anchor].self_exponent > -1.0 {
            return self.segment(p.anchor, reference, p.offset());
        }
        let turn = Complex64::new(NEAR_LN_OFFSET, p.ln_offset.im);
        let way = self.segment(p.anchor, reference, turn.exp());
        let view = &self.views[p.anchor];
        let alpha = 1.0 + view.self_exponent;
        let coefficient =
            view.others(Complex64::new(0.0, 0.0)).times(alpha * view.ln_unit, Complex64::new(1.0, 0.0));
        let rest = if alpha == 0.0 {
            coefficient.times(0.0, p.ln_offset - turn)
        } else {
            // (t^α − t_0^α)/α; with α < 0 and |t| < |t_0| the first leads.
            let ratio = 1.0 - ((turn - p.ln_offset) * alpha).exp();
            let power = Complex64::from_polar(1.0, alpha * p.ln_offset.im);
            coefficient.times(alpha * p.ln_offset.re, power * ratio / alpha)
        };
        Scaled::sum([way, rest].into_iter())
    }

    /// `∫ P dζ` along the ray from the offset 1 to an offset beyond the range of squares. Stretches without a point near
    /// their scale are one power and cost one term.
    fn outward(&self, p: HalfPlanePoint) -> Scaled {
        let view = &self.views[p.anchor];
        let direction = Complex64::from_polar(1.0, p.ln_offset.im);
        let target = p.ln_offset.re + view.ln_unit;
        let mut sum = Sum::default();
        let mut here = view.ln_unit;
        for _ in 0..MAX_PANELS {
            if here >= target {
                break;
            }
            if let Some((reached, part)) = view.power_stretch(here, target, p.ln_offset.im) {
                sum.add(part, 1.0, 0.0);
                here = reached;
                continue;
            }
            // A panel [t_0, t_1] in units of its end; points at its scale keep their distance or it is halved.
            let mut width = PANEL_E_FOLDS.min(target - here);
            for _ in 0..30 {
                let clear = |ln_t: f64, share: f64| {
                    let length = 1.0 - (-width).exp();
                    view.neighbours.iter().filter(|n| n.exponent != 0.0).all(|n| {
                        let scale = (ln_t - here - width).exp();
                        n.seen_from(ln_t, direction).is_none_or(|z| share * z.norm() * scale >= length)
                    })
                };
                if clear(here + width, 3.0) && clear(here + width + (0.5 + 0.5 * (-width).exp()).ln(), 1.25) {
                    break;
                }
                width *= 0.5;
            }
            let end = here + width;
            let start = (-width).exp();
            for (t, w) in self.rules.legendre().points() {
                let tau = start + (1.0 - start) * t;
                let ln_offset = Complex64::new(end + tau.ln() - view.ln_unit, p.ln_offset.im);
                sum.add(view.far_out(ln_offset), w * (1.0 - start), end);
            }
            here = end;
        }
        sum.total().times(0.0, direction)
    }

    /// One move to a nearer anchor from an offset beyond the range of squares.
    fn nearer_far_out(&self, p: HalfPlanePoint) -> Option<HalfPlanePoint> {
        let view = &self.views[p.anchor];
        let ln_t = p.ln_offset.re + view.ln_unit;
        let direction = Complex64::from_polar(1.0, p.ln_offset.im);
        let seen = view.neighbours.iter().filter_map(|n| Some((n.index, n.seen_from(ln_t, direction)?)));
        let (index, z) = seen.min_by(|a, b| a.1.norm_sqr().total_cmp(&b.1.norm_sqr()))?;
        // Points of the anchor's own neighbourhood are equally near: no move.
        (z.norm() < 1.0 - 1e-9).then(|| {
            let ln_offset = Complex64::new(ln_t + z.norm().ln() - self.views[index].ln_unit, argument(z));
            HalfPlanePoint { anchor: index, ln_offset }
        })
    }

    /// Visits the quadrature nodes of [`PowerProduct::integral`] with (offset, value, weight, `ln` of a factor);
    /// returns the (logarithmic and complex) factor of the sum.
    pub(crate) fn along_ray(
        &self,
        p: HalfPlanePoint,
        mut visit: impl FnMut(Complex64, Scaled, f64, f64),
    ) -> (f64, Complex64) {
        let view = &self.views[p.anchor];
        let ln_r = p.ln_offset.re;
        let a = view.self_exponent;
        let angle = p.ln_offset.im;
        let factor = ((1.0 + a) * view.ln_unit, Complex64::from_polar(1.0, (1.0 + a) * angle));
        if ln_r == f64::NEG_INFINITY {
            return factor;
        }
        let r = ln_r.exp();
        let direction = Complex64::from_polar(1.0, angle);
        let mut end = panel_end(view, direction, 0.0, r);
        let ln_end = if end < r { end.ln() } else { ln_r };
        let rule = self.rules.at_point(p.anchor);
        for (t, w) in rule.points() {
            let at = direction * (t * end);
            visit(at, view.others(at), w, (1.0 + a) * ln_end);
        }
        for _ in 0..MAX_PANELS {
            if end >= r {
                break;
            }
            let start = end;
            end = panel_end(view, direction, start, r);
            let width = end - start;
            for (t, w) in self.rules.legendre().points() {
                let at = start + width * t;
                let own = if a == 0.0 { 0.0 } else { a * ln_positive(at) };
                let at = direction * at;
                visit(at, view.others(at), w * width, own);
            }
        }
        factor
    }

    /// Visits the quadrature nodes of [`PowerProduct::segment`].
    pub(crate) fn along_segment(
        &self,
        anchor: usize,
        from: Complex64,
        to: Complex64,
        mut visit: impl FnMut(Complex64, Scaled, f64, f64),
    ) -> (f64, Complex64) {
        let view = &self.views[anchor];
        // Counted from the end that is nearer to the anchor: from a far end its digits would be lost.
        let backward = from.norm_sqr() > to.norm_sqr();
        let (from, to) = if backward { (to, from) } else { (from, to) };
        let (step, length) = (to - from, (to - from).norm());
        let own = view.self_exponent;
        let mut start = 0.0;
        for _ in 0..MAX_PANELS {
            if start >= 1.0 || length == 0.0 {
                break;
            }
            let here = from + step * start;
            let mut end = (start + GROWTH * view.nearest(here) / length).min(1.0);
            // Down to a part 2^−40 of the segment: nearer singular points lie on it, which callers avoid.
            for _ in 0..40 {
                let place = |t: f64| from + step * t;
                if view.resolves(place(start), place(end), |z| view.nearest(z)) {
                    break;
                }
                end = start + 0.5 * (end - start);
            }
            for (t, w) in self.rules.legendre().points() {
                let at = from + step * (start + (end - start) * t);
                let value = view.others(at);
                let value = if own == 0.0 {
                    value
                } else {
                    value.times(own * at.norm().ln(), Complex64::from_polar(1.0, own * argument(at)))
                };
                visit(at, value, w * (end - start), 0.0);
            }
            start = end;
        }
        ((1.0 + own) * view.ln_unit, if backward { -step } else { step })
    }

    /// Signed places of the points other than the anchor, as `(index, x_anchor − x_j)` in anchor units; points too far
    /// to be counted are left out.
    pub(crate) fn shifts(&self, anchor: usize) -> impl Iterator<Item = (usize, f64)> + '_ {
        let within = |n: &&Neighbour| n.position.abs() < FINITE_DISTANCE;
        self.views[anchor].neighbours.iter().filter(within).map(|n| (n.index, -n.position))
    }
}

/// `ln` of the distance from a point of the line to its nearest neighbour.
pub(crate) fn unit(line: &GapLine, k: usize) -> f64 {
    let gaps = line.log_gaps();
    let left = if k > 0 { gaps[k - 1] } else { f64::INFINITY };
    let right = gaps.get(k).copied().unwrap_or(f64::INFINITY);
    let unit = left.min(right);
    if unit.is_finite() { unit } else { 0.0 }
}

fn kind(a: f64) -> Kind {
    // Exact comparison is meant: these are exponents of exact right angles, ends and poles.
    #[allow(clippy::float_cmp, reason = "the cheap branch is right only for the exact exponent")]
    let is = |v: f64| a == v;
    if is(0.5) {
        Kind::Root
    } else if is(-0.5) {
        Kind::InverseRoot
    } else if is(1.0) {
        Kind::Whole
    } else if is(-1.0) {
        Kind::Inverse
    } else {
        Kind::General
    }
}

/// Argument in `[0, π]`; rounding below the real axis is taken as on it.
fn argument(z: Complex64) -> f64 {
    if z.im > 0.0 {
        z.im.atan2(z.re)
    } else if z.re >= 0.0 {
        0.0
    } else {
        PI
    }
}

/// Square root in the first quadrant of a number in the closed upper half-plane.
#[inline]
fn upper_sqrt(z: Complex64) -> Complex64 {
    let r = z.norm_sqr().sqrt();
    if z.re >= 0.0 {
        let re = (0.5 * (r + z.re)).sqrt();
        if re > 0.0 { Complex64::new(re, 0.5 * z.im / re) } else { Complex64::new(0.0, 0.0) }
    } else {
        let im = (0.5 * (r - z.re)).sqrt();
        Complex64::new(0.5 * z.im / im, im)
    }
}

impl View {
    /// `∏_{j ≠ anchor}` at an offset.
    fn others(&self, offset: Complex64) -> Scaled {
        let r = offset.norm_sqr().sqrt();
        let inverse_r = if r > 0.0 { 1.0 / r } else { 0.0 };
        let ln_r = if r > 0.0 { r.ln() + self.ln_unit } else { 0.0 };
        let y = offset.im.max(0.0);
        let mut ln_scale = self.far_ln;
        let mut phase = self.far_phase;
        let mut top = Complex64::new(1.0, 0.0);
        let mut bottom = Complex64::new(1.0, 0.0);
        let general = r < SQUARABLE;
        if general && !self.general.shifts.is_empty() {
            let (ln, turned) = self.general.ln_product(offset.re, y);
            ln_scale += ln + self.general_ln_unit;
            phase += turned;
        }
        for f in &self.factors {
            if general && f.kind == Kind::General {
                continue;
            }
            let distance = f.shift.abs();
            let scale = if distance >= r {
                ln_scale += f.exponent * f.ln_distance;
                1.0 / distance
            } else {
                ln_scale += f.exponent * ln_r;
                inverse_r
            };
            let z = Complex64::new((offset.re + f.shift) * scale, y * scale);
            match f.kind {
                Kind::Root => top *= upper_sqrt(z),
                Kind::InverseRoot => bottom *= upper_sqrt(z),
                Kind::Whole => top *= z,
                Kind::Inverse => bottom *= z,
                Kind::General => {
                    ln_scale += 0.5 * f.exponent * ln_positive(z.norm_sqr().max(1e-300));
                    phase += f.exponent * argument_upper(z.re, z.im);
                }
            }
        }
        let mut mantissa = top / bottom;
        if phase != 0.0 {
            mantissa *= Complex64::from_polar(1.0, phase);
        }
        Scaled { ln_scale, mantissa }
    }

    /// The whole product at an offset beyond the range of squares, in logarithms.
    fn far_out(&self, ln_offset: Complex64) -> Scaled {
        let ln_t = ln_offset.re + self.ln_unit;
        let direction = Complex64::from_polar(1.0, ln_offset.im);
        let mut ln_scale = self.self_exponent * ln_t;
        let mut phase = self.self_exponent * ln_offset.im;
        for n in self.neighbours.iter().filter(|n| n.exponent != 0.0) {
            match n.seen_from(ln_t, direction) {
                Some(z) => {
                    ln_scale += n.exponent * (ln_t + 0.5 * z.norm_sqr().max(1e-300).ln());
                    phase += n.exponent * argument(z);
                }
                None => {
                    ln_scale += n.exponent * n.ln_distance;
                    phase += if n.position > 0.0 { PI * n.exponent } else { 0.0 };
                }
            }
        }
        Scaled { ln_scale, mantissa: Complex64::from_polar(1.0, phase) }
    }

    /// `∫ P dt` (without the direction) from distance `e^ln_start` on, as far as it is one power; with the distance
    /// reached.
    fn power_stretch(&self, ln_start: f64, target: f64, angle: f64) -> Option<(f64, Scaled)> {
        let mut limit = target;
        let (mut power, mut ln_scale, mut phase) = (self.self_exponent, 0.0, self.self_exponent * angle);
        for n in self.neighbours.iter().filter(|n| n.exponent != 0.0) {
            if n.ln_distance < ln_start - REMOTE {
                power += n.exponent;
                phase += n.exponent * angle;
            } else if n.ln_distance > ln_start + REMOTE {
                limit = limit.min(n.ln_distance - REMOTE);
                ln_scale += n.exponent * n.ln_distance;
                phase += if n.position > 0.0 { PI * n.exponent } else { 0.0 };
            } else {
                return None;
            }
        }
        let length = limit - ln_start;
        if length < 1.0 {
            return None;
        }
        let q = 1.0 + power;
        let (scale, total) = if (q * length).abs() < 1e-8 {
            (q * ln_start, length * (1.0 + 0.5 * q * length))
        } else if q > 0.0 {
            (q * limit, -f64::exp_m1(-q * length) / q)
        } else {
            (q * ln_start, f64::exp_m1(q * length) / q)
        };
        let part = Scaled { ln_scale: ln_scale + scale, mantissa: Complex64::from_polar(total, phase) };
        Some((limit, part))
    }

    /// Distance of an offset from the nearest singular point, the anchor included if it is one.
    fn nearest(&self, offset: Complex64) -> f64 {
        let own = if self.self_exponent == 0.0 { f64::INFINITY } else { offset.norm() };
        self.singular().map(|f| (offset + f.shift).norm()).fold(own, f64::min)
    }

    /// Whether a panel keeps its distance from singular points: a third of its length at its far end, four fifths in the
    /// middle. Then the Bernstein ellipse has a parameter above 3.3, and 14 nodes give 1e-14.
    fn resolves(&self, start: Complex64, end: Complex64, distance: impl Fn(Complex64) -> f64) -> bool {
        let length = (end - start).norm();
        3.0 * distance(end) >= length && 1.25 * distance((start + end) * 0.5) >= length
    }

    /// The other points that limit a panel: not the zeros, where the product is a polynomial.
    fn singular(&self) -> impl Iterator<Item = &Factor> {
        self.factors.iter().filter(|f| f.kind != Kind::Whole)
    }
}

impl Columns {
    /// `Σ a_j ln |offset + shift_j|` and `Σ a_j arg(offset + shift_j)`.
    #[inline]
    fn ln_product(&self, x: f64, y: f64) -> (f64, f64) {
        let (mut ln, mut phase) = (0.0, 0.0);
        for (shift, a) in self.shifts.iter().zip(&self.exponents) {
            let re = x + shift;
            ln += a * ln_positive((re * re + y * y).max(1e-300));
            phase += a * argument_upper(re, y);
        }
        (0.5 * ln, phase)
    }
}

/// End of a panel on the ray from the anchor, that starts at distance `start` and aims at `target`.
fn panel_end(view: &View, direction: Complex64, start: f64, target: f64) -> f64 {
    let nearest = if start == 0.0 {
        view.singular().map(|f| f.shift.abs()).fold(f64::INFINITY, f64::min)
    } else {
        view.nearest(direction * start)
    };
    let mut end = (start + GROWTH * nearest).min(target);
    // The anchor's own power is in the weight, or behind: only the others limit.
    let others = |z: Complex64| view.singular().map(|f| (z + f.shift).norm()).fold(f64::INFINITY, f64::min);
    for _ in 0..60 {
        if view.resolves(direction * start, direction * end, others) {
            break;
        }
        end = start + 0.5 * (end - start);
    }
    end
}

/// A sum of scaled values that rescales itself.
#[derive(Default)]
struct Sum {
    scale: Option<f64>,
    total: Complex64,
}

impl Sum {
    fn add(&mut self, value: Scaled, weight: f64, ln_factor: f64) {
        let ln = value.ln_scale + ln_factor;
        let scale = match self.scale {
            Some(scale) if ln < scale + 300.0 => scale,
            Some(scale) => {
                self.total *= (scale - ln).exp();
                self.scale = Some(ln);
                ln
            }
            None => {
                self.scale = Some(ln);
                ln
            }
        };
        self.total += value.mantissa * (weight * (ln - scale).exp());
    }

    fn total(self) -> Scaled {
        Scaled { ln_scale: self.scale.unwrap_or(0.0), mantissa: self.total }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn product(x: &[f64], a: &[f64]) -> PowerProduct {
        let line = GapLine::new(x.windows(2).map(|w| (w[1] - w[0]).ln()).collect());
        PowerProduct::new(&line, RuleSet::new(a, 14).unwrap())
    }

    #[test]
    fn value_agrees_with_the_principal_powers() {
        let (x, a) = ([0.0, 1.0, 3.0, 3.5], [-0.5, 0.3, 0.5, -0.8]);
        let p = product(&x, &a);
        for (anchor, unit) in [(0, 1.0), (1, 1.0), (2, 0.5), (3, 0.5)] {
            for offset in [Complex64::new(0.3, 0.4), Complex64::new(-0.2, 1.7), Complex64::new(4.0, 1e-9)] {
                let z = offset * unit + x[anchor];
                let want: Complex64 = x.iter().zip(a).map(|(x, a)| (z - x).powf(a)).product();
                let got = p.value(HalfPlanePoint::new(anchor, offset)).value();
                assert!((got - want).norm() < 1e-14 * want.norm(), "{got} {want}");
            }
        }
    }

    #[test]
    fn integral_is_the_antiderivative_of_the_arcsine_kind() {
        // ∫_0^ζ dζ/√(ζ(ζ−1)) with the branch of the upper half-plane: from 0, 2·arcsin√ζ/(i)… checked by its square.
        let p = product(&[0.0, 1.0], &[-0.5, -0.5]);
        for offset in [Complex64::new(0.3, 0.2), Complex64::new(-2.0, 0.5), Complex64::new(0.4, 3.0)] {
            let got = p.integral(HalfPlanePoint::new(0, offset)).value();
            // sin²(i·got/2) = ζ, whichever sign the root has.
            let s = (Complex64::i() * got * 0.5).sin();
            assert!((s * s - offset).norm() < 1e-14 * offset.norm(), "{} {offset}", s * s);
        }
    }

    #[test]
    fn segment_is_the_difference_of_two_integrals() {
        let p = product(&[0.0, 1.0, 3.0, 3.5], &[-0.5, 0.3, 0.5, -0.8]);
        let (a, b) = (Complex64::new(0.2, 0.1), Complex64::new(-1.0, 2.0));
        let whole =
            p.integral(HalfPlanePoint::new(1, b)).value() - p.integral(HalfPlanePoint::new(1, a)).value();
        let direct = p.segment(1, a, b).value();
        assert!((whole - direct).norm() < 1e-13 * whole.norm(), "{whole} {direct}");
    }
}
