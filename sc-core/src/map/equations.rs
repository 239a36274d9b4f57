//! The equations of the parameter problem.
//!
//! * finite side `k`: `ln |C| + ln I_k − ln |side_k| = 0`
//! * vertex at infinity `p` with a finite prevertex: the step from the vertex before to the vertex after,
//!   `ln (C Δ_p) − ln (w_{p+1} − w_{p−1}) = 0` (real and imaginary part)
//! * channel end (`α_p = 0`): instead, its width in closed form, `ln (π |C| ∏_{j≠p} |x_p − x_j|^{a_j}) − ln h = 0`, and
//!   the component of the step along the channel, in widths
//!
//! Sides are in line order: `k` leaves point `k`, `n − 2` runs to infinity and `n − 1` comes back.

use super::gap_line::GapLine;
use super::power_product::PowerProduct;
use super::side_integrals::{RuleSet, side_integrals};
use super::step::step;
use nalgebra::DMatrix;
use num_complex::Complex64;
use std::f64::consts::PI;

/// What is known of a vertex at infinity with a finite prevertex.
#[derive(Debug, Clone, Copy)]
pub(crate) struct End {
    /// Line index.
    pub(crate) point: usize,
    /// `w_{p+1} − w_{p−1}`
    pub(crate) step: Complex64,
    /// Heading and width, if it is the end of a channel.
    pub(crate) channel: Option<(Complex64, f64)>,
}

/// The outline's demands on a line of prevertices.
#[derive(Debug)]
pub(crate) struct Equations<'a> {
    pub(crate) rules: &'a RuleSet,
    /// `ln` length of each side in line order; `None` for sides that touch infinity.
    pub(crate) ln_lengths: &'a [Option<f64>],
    pub(crate) ends: &'a [End],
    /// `C/|C|`
    pub(crate) rotation: Complex64,
}

/// Residuals and, if asked for, their derivatives in `(y, ln |C|)`.
pub(crate) struct Evaluation {
    pub(crate) residuals: Vec<f64>,
    pub(crate) jacobian: Option<DMatrix<f64>>,
}

impl Equations<'_> {
    /// The direction in `(y, ln |C|)` that changes nothing.
    pub(crate) fn null_direction(&self) -> Vec<f64> {
        let exponents = self.rules.exponents();
        let mut null = vec![1.0; exponents.len()];
        // All lengths scale with the power 1 + Σa of the gaps.
        null[exponents.len() - 1] = -(1.0 + exponents.iter().sum::<f64>());
        null
    }

    /// `ln |C|` that fits the finite sides in the mean.
    pub(crate) fn matching_scale(&self, line: &GapLine) -> f64 {
        let ln = side_integrals(line, self.rules, false).ln;
        let (mut sum, mut count) = (0.0, 0.0);
        for (integral, length) in ln.iter().zip(self.ln_lengths) {
            if let Some(length) = length {
                sum += length - integral;
                count += 1.0;
            }
        }
        if count > 0.0 { sum / count } else { 0.0 }
    }

    pub(crate) fn evaluate(&self, unknowns: &[f64], want_jacobian: bool) -> Evaluation {
        let m = unknowns.len() - 1;
        let (gaps, ln_scale) = (&unknowns[..m], unknowns[m]);
        let line = GapLine::new(gaps.to_vec());
        let integrals = side_integrals(&line, self.rules, want_jacobian);
        let mut residuals = Vec::with_capacity(self.ln_lengths.len() + 2 * self.ends.len());
        let mut rows = Vec::new();
        for (k, length) in self.ln_lengths.iter().enumerate() {
            if let Some(length) = length {
                residuals.push(ln_scale + integrals.ln[k] - length);
                rows.push(k);
            }
        }
        let mut end_rows: Vec<Vec<f64>> = Vec::new();
        if !self.ends.is_empty() {
            let product = PowerProduct::new(&line, self.rules.clone());
            for end in self.ends {
                self.end_rows(end, &line, ln_scale, &product, &mut residuals, &mut end_rows);
            }
        }
        let jacobian = integrals.jacobian.map(|j| {
            let n_sides = rows.len();
            DMatrix::from_fn(residuals.len(), m + 1, |r, c| match r {
                r if r >= n_sides => end_rows[r - n_sides][c],
                r if c < m => j[(rows[r], c)],
                _ => 1.0,
            })
        });
        Evaluation { residuals, jacobian }
    }

    fn end_rows(
        &self,
        end: &End,
        line: &GapLine,
        ln_scale: f64,
        product: &PowerProduct,
        residuals: &mut Vec<f64>,
        rows: &mut Vec<Vec<f64>>,
    ) {
        let m = line.log_gaps().len();
        let s = step(line, product, end.point);
        match end.channel {
            None => {
                let ln_delta = s.delta.ln() + s.ln_scale + ln_scale + self.rotation.ln();
                let difference = ln_delta - end.step.ln();
                // The argument is known mod 2π.
                let turn = (difference.im / (2.0 * PI)).round() * 2.0 * PI;
                residuals.extend([difference.re, difference.im - turn]);
                let relative: Vec<Complex64> = s.derivatives.iter().map(|d| d / s.delta).collect();
                rows.push(relative.iter().map(|d| d.re).chain([1.0]).collect());
                rows.push(relative.iter().map(|d| d.im).chain([0.0]).collect());
            }
            Some((heading, width)) => {
                let exponents = self.rules.exponents();
                let ln_distance = line.ln_distances(end.point);
                let mut ln_width = PI.ln() + ln_scale;
                let mut row = vec![0.0; m + 1];
                row[m] = 1.0;
                for (j, &a) in exponents.iter().enumerate() {
                    if j == end.point || a == 0.0 {
                        continue;
                    }
                    ln_width += a * ln_distance[j];
                    for gap in j.min(end.point)..j.max(end.point) {
                        row[gap] += a * (line.log_gaps()[gap] - ln_distance[j]).exp();
                    }
                }
                residuals.push(ln_width - width.ln());
                rows.push(row);
                let factor = self.rotation * heading.conj() * ((s.ln_scale + ln_scale).exp() / width);
                let along = (s.delta * factor).re;
                residuals.push(along - (end.step * heading.conj()).re / width);
                rows.push(s.derivatives.iter().map(|d| (d * factor).re).chain([along]).collect());
            }
        }
    }
}
