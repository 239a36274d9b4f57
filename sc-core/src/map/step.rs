//! The complex step past a vertex at infinity whose prevertex is finite, with its derivatives.
//!
//! ```text
//! Δ = ∫_{x_{p−1}}^{x_{p+1}} ∏ (ζ − x_j)^{a_j} dζ     over an arc above x_p,  a_p ≤ −1
//! ```
//! For a point `j` off the ends `∂Δ/∂x_j = −a_j ∫ f'/(ζ − x_j) dζ`; the two ends follow from the invariance of `Δ`
//! under a common shift (`Σ ∂Δ/∂x_j = 0`) and its homogeneity (`Σ x_j ∂Δ/∂x_j = (1 + Σa) Δ`).

use super::gap_line::GapLine;
use super::power_product::{HalfPlanePoint, PowerProduct, Scaled};
use num_complex::Complex64;
use std::f64::consts::FRAC_PI_4;

/// The step and its derivatives, all times `e^{−ln_scale}`.
#[derive(Debug, Clone)]
pub(crate) struct Step {
    pub(crate) ln_scale: f64,
    pub(crate) delta: Complex64,
    /// `∂Δ/∂y_m`.
    pub(crate) derivatives: Vec<Complex64>,
}

/// One quadrature node: the weighted value and, for every other point, `(x_j − x_p)/(ζ − x_j)`
/// (`unit_p/(ζ − x_p)` for `p` itself).
struct Sums {
    scale: f64,
    delta: Complex64,
    /// `E_j = ∫ f' (x_j − x_p)/(ζ − x_j) dζ`
    nearness: Vec<Complex64>,
}

/// Computes the step past point `p` of the line; `p − 1` and `p + 1` must be points with integrable exponents.
pub(crate) fn step(line: &GapLine, product: &PowerProduct, p: usize) -> Step {
    let n = line.n_points();
    let ln_from_p = line.ln_distances(p);
    let ln_unit_p = product.ln_unit(p);
    let place = |j: usize| (ln_from_p[j] - ln_unit_p).exp().min(1e300) * if j < p { -1.0 } else { 1.0 };
    let (left, right) = (place(p - 1).abs(), place(p + 1).abs());
    // Way points above p, half a gap from either end, in p's frame.
    let from = Complex64::from_polar(0.5 * left, 3.0 * FRAC_PI_4);
    let to = Complex64::from_polar(0.5 * right, FRAC_PI_4);
    let mut sums = Sums {
        scale: f64::NEG_INFINITY,
        delta: Complex64::new(0.0, 0.0),
        nearness: vec![Complex64::new(0.0, 0.0); n],
    };
    for (end, way, sign) in [(p - 1, from, 1.0), (p + 1, to, -1.0)] {
        // From the end to the way point, in the end's own frame.
        let ratio = (ln_unit_p - product.ln_unit(end)).exp();
        let offset = Complex64::new((way.re - place(end)) * ratio, way.im * ratio);
        let mut nodes = Vec::new();
        let factor = product.along_ray(HalfPlanePoint::new(end, offset), |at, value, weight, ln| {
            nodes.push((at, value, weight, ln));
        });
        // ζ − x_p there, in p's units, from the end's frame.
        let to_p = |at: Complex64| at / ratio + place(end);
        sums.add(product, end, &nodes, (factor.0, factor.1 * sign), &ln_from_p, p, to_p);
    }
    let mut nodes = Vec::new();
    let factor =
        product.along_segment(p, from, to, |at, value, weight, ln| nodes.push((at, value, weight, ln)));
    sums.add(product, p, &nodes, factor, &ln_from_p, p, |at| at);
    sums.finish(line, product, p, &ln_from_p, ln_unit_p)
}

type Node = (Complex64, Scaled, f64, f64);

impl Sums {
    #[allow(clippy::too_many_arguments, reason = "one private call site per stretch of the path")]
    fn add(
        &mut self,
        product: &PowerProduct,
        frame: usize,
        nodes: &[Node],
        factor: (f64, Complex64),
        ln_from_p: &[f64],
        p: usize,
        to_p: impl Fn(Complex64) -> Complex64,
    ) {
        let ln_frame = product.ln_unit(frame);
        let mut shift = vec![f64::NAN; self.nearness.len()];
        shift[frame] = 0.0;
        for (j, s) in product.shifts(frame) {
            shift[j] = s;
        }
        for &(at, value, weight, ln) in nodes {
            let ln = ln + value.ln_scale + factor.0;
            if ln > self.scale {
                let shrink = (self.scale - ln).exp();
                self.delta *= shrink;
                self.nearness.iter_mut().for_each(|e| *e *= shrink);
                self.scale = ln;
            }
            let f = value.mantissa * factor.1 * (weight * (ln - self.scale).exp());
            self.delta += f;
            for (j, e) in self.nearness.iter_mut().enumerate() {
                if product.exponent(j) == 0.0 {
                    continue;
                }
                let quotient = if j == p {
                    1.0 / to_p(at)
                } else if shift[j].is_nan() {
                    Complex64::new(-1.0, 0.0)
                } else {
                    let distance = (ln_from_p[j] - ln_frame).exp() * if j < p { -1.0 } else { 1.0 };
                    distance / (at + shift[j])
                };
                *e += f * quotient;
            }
        }
    }

    fn finish(
        self,
        line: &GapLine,
        product: &PowerProduct,
        p: usize,
        ln_from_p: &[f64],
        ln_unit_p: f64,
    ) -> Step {
        let n = line.n_points();
        let zero = Complex64::new(0.0, 0.0);
        let ends = [p - 1, p + 1];
        // (x_j − x_p) ∂Δ/∂x_j, and unit_p ∂Δ/∂x_j.
        let moment = |j: usize| {
            if j == p || ends.contains(&j) { zero } else { -self.nearness[j] * product.exponent(j) }
        };
        let place = |j: usize| (ln_from_p[j] - ln_unit_p).exp() * if j < p { -1.0 } else { 1.0 };
        let (mut s0, mut s1, mut exponents) = (-self.nearness[p] * product.exponent(p), zero, 0.0);
        for j in 0..n {
            exponents += product.exponent(j);
            if j != p && !ends.contains(&j) {
                s0 += moment(j) / place(j);
                s1 += moment(j);
            }
        }
        let rest = self.delta * (1.0 + exponents) - s1;
        let (left, right) = (-place(p - 1), place(p + 1));
        let a = (rest - s0 * left) / (left + right);
        let b = -(rest + s0 * right) / (left + right);
        let mut derivatives = vec![zero; n - 1];
        // From the far ends inward; the sum is kept times the distance of its last point, so no factor exceeds 1.
        let mut run = |order: &mut dyn Iterator<Item = usize>, end: Complex64, toward_right: bool| {
            let mut sum = zero;
            let mut unit = f64::NEG_INFINITY;
            for j in order {
                let here = ln_from_p[j];
                sum = if unit == f64::NEG_INFINITY { zero } else { sum * (here - unit).exp() };
                let own = if ends.contains(&j) { end * place(j) } else { moment(j) };
                sum += own * if toward_right { 1.0 } else { -1.0 };
                unit = here;
                let gap = if toward_right { j - 1 } else { j };
                // Σ D_j g with D_j = moment/(x_j − x_p): signed distances.
                derivatives[gap] =
                    sum * (line.log_gaps()[gap] - here).exp() * if toward_right { 1.0 } else { -1.0 };
            }
        };
        run(&mut (p + 1..n).rev(), a, true);
        run(&mut (0..p), b, false);
        Step { ln_scale: self.scale, delta: self.delta, derivatives }
    }
}

#[cfg(test)]
mod tests {
    use super::super::side_integrals::RuleSet;
    use super::*;

    #[test]
    fn derivatives_agree_with_central_differences() {
        let x: [f64; 6] = [0.0, 0.3, 1.0, 1.4, 5.0, 5.5];
        for a in [[-0.5, 0.5, -1.0, -0.3, -1.0, -0.4], [-0.5, 1.0, -1.5, 0.0, -1.0, -0.4]] {
            let base: Vec<f64> = x.windows(2).map(|w| (w[1] - w[0]).ln()).collect();
            let of = |y: &[f64]| {
                let line = GapLine::new(y.to_vec());
                let s = step(&line, &PowerProduct::new(&line, RuleSet::new(&a, 16).unwrap()), 2);
                let scale = s.ln_scale.exp();
                (s.delta * scale, s.derivatives.iter().map(|d| d * scale).collect::<Vec<_>>())
            };
            let (delta, derivatives) = of(&base);
            for m in 0..5 {
                let shifted = |h: f64| {
                    let mut y = base.clone();
                    y[m] += h;
                    of(&y).0
                };
                let numeric = (shifted(1e-5) - shifted(-1e-5)) / 2e-5;
                let error = (numeric - derivatives[m]).norm();
                assert!(error < 1e-8 * delta.norm(), "gap {m}: {numeric} {}", derivatives[m]);
            }
        }
    }
}
