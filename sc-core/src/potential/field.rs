//! The complex field `W'` on the half-plane for piecewise constant held values.
//!
//! ```text
//! W'(ζ) = Σ_m c_m ∏_{l≠m} (ζ − z_l) / ∏_j √(ζ − e_j)  +  Σ_c κ_c ∏_l (ζ − z_l) / ((ζ − c) ∏_j √(ζ − e_j))
//! ```
//! `e_j`: where held meets insulated. `z_l`: one point in every insulated gap but one, so that basis function `m` has
//! its zeros in the other gaps and the system for the potential differences is nearly diagonal. `c`: where two
//! different levels touch; `κ_c` follows from the jump. With no insulated side `W' = Σ (jump/iπ)/(ζ − c)`.

use super::arcs::Arcs;
use crate::map::{GapLine, HalfPlaneMap, HalfPlanePoint, PowerProduct, RuleSet, Scaled, side_integrals};
use crate::quadrature::RuleError;
use nalgebra::{DMatrix, DVector};
use num_complex::Complex64;
use std::f64::consts::{LN_2, PI};
use thiserror::Error;

/// Why there is no field.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum FieldError {
    /// A quadrature rule could not be made.
    #[error(transparent)]
    Rule(#[from] RuleError),
    /// The system for the potential differences is singular.
    #[error(
        "the potential differences between {electrodes} held parts do not determine the flow between them"
    )]
    Singular {
        /// Number of separate held parts.
        electrodes: usize,
    },
}

/// One basis function, normalised, with its integrals along the axis.
#[derive(Debug, Clone)]
struct Term {
    product: PowerProduct,
    /// `e^{−ln_norm}` and the phase `i^quarter` multiply the product.
    ln_norm: f64,
    quarter: i64,
    /// `ln |∫|` over the gaps of the fine line, then to `+∞` and from `−∞`; `+∞` beside a pole.
    ln: Vec<f64>,
    /// Phase of the product on those gaps, in quarter turns.
    turns: Vec<i64>,
}

impl Term {
    /// `∫ W' dx` over gap `i` of the fine line, walking to the right.
    fn over_gap(&self, i: usize) -> Complex64 {
        quarter_turns(self.quarter + self.turns[i]) * (self.ln[i] - self.ln_norm).exp()
    }
}

/// `i^q`, exact.
fn quarter_turns(q: i64) -> Complex64 {
    match q.rem_euclid(4) {
        0 => Complex64::new(1.0, 0.0),
        1 => Complex64::new(0.0, 1.0),
        2 => Complex64::new(-1.0, 0.0),
        _ => Complex64::new(0.0, -1.0),
    }
}

/// Everything about the fields of a section that does not depend on the levels.
#[derive(Debug, Clone)]
pub(crate) struct FieldBasis {
    arcs: Arcs,
    /// The prevertices and the points `z_l`.
    fine: GapLine,
    /// Fine index of each prevertex.
    fine_of: Vec<usize>,
    /// `ln` of a prevertex' unit on the coarse line less that on the fine line.
    unit_ratio: Vec<f64>,
    /// One per gap but one: unit potential difference over its own gap.
    flow: Vec<Term>,
    /// The gap (index into `arcs.gaps`) that each flow term stands for.
    gap_of_flow: Vec<usize>,
    /// One per point where different electrodes touch; `n − 1` is infinity.
    poles: Vec<(usize, Term)>,
    /// Differences over the gaps (rows) of the flow terms.
    differences: DMatrix<f64>,
}

/// The field for one set of held values.
#[derive(Debug, Clone)]
pub(crate) struct Field {
    flow: Vec<f64>,
    poles: Vec<f64>,
    /// Held value of each side in line order.
    values: Vec<Option<f64>>,
    /// `W` at the reference point of each fine point: itself, or half a unit above a pole.
    reference: Vec<Complex64>,
}

impl FieldBasis {
    pub(crate) fn new(arcs: Arcs, map: &HalfPlaneMap, nodes: usize) -> Result<FieldBasis, FieldError> {
        let n = arcs.n;
        let all_held = arcs.gaps.is_empty();
        // The gap left out: the one that meets infinity, or the last.
        let left_out = arcs
            .gaps
            .iter()
            .position(|&g| arcs.meets_infinity(g))
            .unwrap_or(arcs.gaps.len().saturating_sub(1));
        let gap_of_flow: Vec<usize> = (0..arcs.gaps.len()).filter(|&g| g != left_out).collect();
        // A point in the widest part of each remaining gap.
        let coarse = map.line().log_gaps();
        let split: Vec<usize> = gap_of_flow
            .iter()
            .map(|&g| {
                let (first, last) = arcs.gaps[g];
                (first..=last).max_by(|&a, &b| coarse[a].total_cmp(&coarse[b])).unwrap_or(first)
            })
            .collect();
        let mut log_gaps = Vec::new();
        let mut fine_of = vec![0];
        let mut zeros = vec![0; split.len()];
        for (k, &y) in coarse.iter().enumerate() {
            if let Some(m) = split.iter().position(|&s| s == k) {
                log_gaps.extend([y - LN_2, y - LN_2]);
                zeros[m] = log_gaps.len() - 1;
            } else {
                log_gaps.push(y);
            }
            fine_of.push(log_gaps.len());
        }
        let fine = GapLine::new(log_gaps);
        let mut base = vec![0.0; fine.n_points()];
        for j in 0..n - 1 {
            if arcs.is_end(j) {
                base[fine_of[j]] = -0.5;
            }
        }
        // With every side held the jump at infinity is what the finite ones leave over, and needs no term.
        let last_pole = if all_held { n - 1 } else { n };
        let junctions: Vec<usize> = (0..last_pole).filter(|&j| arcs.is_junction(j)).collect();
        // On insulated sides W' must be real: the phase there decides the common factor.
        let insulated = (0..n).find(|&k| arcs.electrode[k].is_none());
        let fine_gap = |k: usize| match k {
            k if k == n - 2 => fine.n_points() - 1,
            k if k == n - 1 => fine.n_points(),
            k => fine_of[k],
        };
        let term = |exponents: Vec<f64>| -> Result<Term, RuleError> {
            let rules = RuleSet::new(&exponents, nodes)?;
            let ln = side_integrals(&fine, &rules, false).ln;
            let turns: Vec<i64> = (0..=fine.n_points())
                .map(|i| {
                    let right = if i == fine.n_points() { 0 } else { i + 1 };
                    exponents.iter().skip(right).map(|a| (2.0 * a).round() as i64).sum()
                })
                .collect();
            // ∏ (…)^{−1/2} to the left of its points has the phase e^{−iπ/2} for each.
            let quarter = match insulated {
                Some(k) => turns[fine_gap(k)].rem_euclid(2),
                None => -1,
            };
            let product = PowerProduct::new(&fine, rules);
            Ok(Term { product, ln_norm: 0.0, quarter, ln, turns })
        };
        let mut flow = Vec::new();
        for (m, &gap) in gap_of_flow.iter().enumerate() {
            let mut exponents = base.clone();
            for (l, &z) in zeros.iter().enumerate() {
                if l != m {
                    exponents[z] = 1.0;
                }
            }
            let mut t = term(exponents)?;
            let (first, last) = arcs.gaps[gap];
            let drops: Vec<f64> = (fine_of[first]..fine_of[last + 1]).map(|i| t.ln[i]).collect();
            t.ln_norm = crate::map::ln_sum(&drops);
            flow.push(t);
        }
        let mut poles = Vec::new();
        for &c in &junctions {
            let mut exponents = base.clone();
            zeros.iter().for_each(|&z| exponents[z] = 1.0);
            if c < n - 1 {
                exponents[fine_of[c]] = -1.0;
            }
            let mut t = term(exponents)?;
            if !all_held {
                let residue = if c < n - 1 { t.product.coefficient(fine_of[c]).ln_norm() } else { 0.0 };
                t.ln_norm = residue;
            }
            poles.push((c, t));
        }
        let unit_ratio = (0..n - 1)
            .map(|j| crate::map::unit(map.line(), j) - crate::map::unit(&fine, fine_of[j]))
            .collect();
        let mut basis = FieldBasis {
            arcs,
            fine,
            fine_of,
            unit_ratio,
            flow,
            gap_of_flow,
            poles,
            differences: DMatrix::zeros(0, 0),
        };
        let size = basis.flow.len();
        basis.differences =
            DMatrix::from_fn(size, size, |g, m| basis.difference(&basis.flow[m], basis.gap_of_flow[g]));
        Ok(basis)
    }

    pub(crate) fn arcs(&self) -> &Arcs {
        &self.arcs
    }

    /// Potential difference of a term over a finite insulated gap.
    fn difference(&self, term: &Term, gap: usize) -> f64 {
        let (first, last) = self.arcs.gaps[gap];
        (self.fine_of[first]..self.fine_of[last + 1]).map(|i| term.over_gap(i).re).sum()
    }

    /// The field with the given held values (line order; `None` on insulated sides).
    pub(crate) fn field(&self, values: Vec<Option<f64>>) -> Result<Field, FieldError> {
        let n = self.arcs.n;
        let value = |k: usize| values[(k + n) % n].unwrap_or(0.0);
        let poles: Vec<f64> = self
            .poles
            .iter()
            .map(|(c, term)| {
                // φ = (jump/π) arg(ζ − c): the value on the left less that on the right; at infinity the other way
                // round, for there the side that leaves comes from −∞.
                let jump =
                    if *c < n - 1 { value(c + n - 1) - value(*c) } else { value(*c) - value(c + n - 1) };
                if self.arcs.gaps.is_empty() {
                    return jump / PI;
                }
                let residue = if *c < n - 1 {
                    term.product
                        .coefficient(self.fine_of[*c])
                        .times(-term.ln_norm, Complex64::new(1.0, 0.0))
                        .value()
                } else {
                    Complex64::new((-term.ln_norm).exp(), 0.0)
                };
                (Complex64::new(0.0, -jump / PI) / (residue * quarter_turns(term.quarter))).re
            })
            .collect();
        let wanted = DVector::from_fn(self.flow.len(), |g, _| {
            let (first, last) = self.arcs.gaps[self.gap_of_flow[g]];
            let drop = value(last + 1) - value(first + n - 1);
            let from_poles: f64 = self
                .poles
                .iter()
                .zip(&poles)
                .map(|((_, t), k)| if *k == 0.0 { 0.0 } else { k * self.difference(t, self.gap_of_flow[g]) })
                .sum();
            drop - from_poles
        });
        let flow = if self.flow.is_empty() {
            Vec::new()
        } else {
            let solved = self.differences.clone().lu().solve(&wanted);
            let electrodes = self.flow.len() + 1;
            solved.ok_or(FieldError::Singular { electrodes })?.as_slice().to_vec()
        };
        let mut field = Field { flow, poles, values, reference: Vec::new() };
        field.reference = self.references(&field);
        Ok(field)
    }

    /// Active terms with their coefficients.
    fn terms<'a>(&'a self, field: &'a Field) -> impl Iterator<Item = (f64, &'a Term)> + 'a {
        let flow = field.flow.iter().copied().zip(&self.flow);
        let poles = field.poles.iter().copied().zip(self.poles.iter().map(|p| &p.1));
        flow.chain(poles).filter(|(c, _)| *c != 0.0)
    }

    /// `∫ W' dx` along a side to the right, in line order: potential difference + i flux into the section.
    /// Infinite beside a jump.
    pub(crate) fn along_side(&self, field: &Field, side: usize) -> Complex64 {
        let n = self.arcs.n;
        let m = self.fine.n_points();
        let range = match side {
            k if k == n - 2 => m - 1..m,
            k if k == n - 1 => m..m + 1,
            k => self.fine_of[k]..self.fine_of[k + 1],
        };
        // The flux diverges beside a jump, toward the higher level.
        let value = |k: usize| field.values[(k + n) % n];
        for other in [value(side + n - 1), value(side + 1)] {
            if let (Some(own), Some(other)) = (value(side), other)
                && own.total_cmp(&other).is_ne()
            {
                return Complex64::new(0.0, if own > other { f64::INFINITY } else { f64::NEG_INFINITY });
            }
        }
        if self.arcs.gaps.is_empty() && side >= n - 2 {
            // Each term alone diverges at infinity, their sum does not: ∫ κ dx/(x − c) in closed form.
            let end = self.fine_of[if side == n - 2 { n - 2 } else { 0 }];
            let ln = self.fine.ln_distances(end);
            let flux: f64 = self
                .poles
                .iter()
                .zip(&field.poles)
                .filter(|(_, k)| **k != 0.0)
                .map(|((c, _), k)| k * ln[self.fine_of[*c]])
                .sum();
            return Complex64::new(0.0, if side == n - 2 { flux } else { -flux });
        }
        let mut sum = Complex64::new(0.0, 0.0);
        for i in range {
            for (c, t) in self.terms(field) {
                sum += t.over_gap(i) * c;
            }
        }
        sum
    }

    /// `W` at the fine points, contiguous from a held side outward.
    fn references(&self, field: &Field) -> Vec<Complex64> {
        let n = self.arcs.n;
        let m = self.fine.n_points();
        if self.arcs.gaps.is_empty() {
            return (0..m)
                .map(|i| self.all_held(field, HalfPlanePoint::new(i, self.reference_offset(i))))
                .collect();
        }
        // Start at a line point with a known potential: the end of the first held side that has a finite end.
        let base = (0..n).find(|&k| self.arcs.electrode[k].is_some()).unwrap_or(0);
        let (start, value) = {
            let v = field.values[base].unwrap_or(0.0);
            // Side n − 1 has its finite end at point 0, every other at its own index.
            (if base == n - 1 { 0 } else { self.fine_of[base] }, v)
        };
        let mut reference = vec![Complex64::new(0.0, 0.0); m];
        let steps: Vec<Complex64> = (0..m - 1).map(|i| self.step(field, i)).collect();
        // The value at the start: a pole's reference point lies above it, so step to it from a regular place.
        reference[start] = Complex64::new(value, 0.0);
        if self.is_pole(start) {
            // Between two poles or beside one: the middle of the gap to the right is on the held side.
            reference[start] -= self.to_middle(field, start);
        }
        for i in start + 1..m {
            reference[i] = reference[i - 1] + steps[i - 1];
        }
        for i in (0..start).rev() {
            reference[i] = reference[i + 1] - steps[i];
        }
        // On held sides the level is known; only the stream function is accumulated.
        for j in 0..n - 1 {
            if !self.is_pole(self.fine_of[j])
                && let Some(v) = field.values[j].or(field.values[(j + n - 1) % n])
            {
                reference[self.fine_of[j]].re = v;
            }
        }
        reference
    }

    fn is_pole(&self, fine: usize) -> bool {
        self.poles.iter().any(|(c, _)| *c < self.arcs.n - 1 && self.fine_of[*c] == fine)
    }

    /// Place of the reference of a fine point, as an offset in its unit.
    fn reference_offset(&self, fine: usize) -> Complex64 {
        Complex64::new(0.0, if self.is_pole(fine) { 0.5 } else { 0.0 })
    }

    /// From a pole's reference point to the middle of the gap on its right (left, at the last point).
    fn to_middle(&self, field: &Field, fine: usize) -> Complex64 {
        let right = fine + 1 < self.fine.n_points() || self.fine.n_points() == 1;
        let gap = if self.fine.n_points() == 1 {
            None
        } else if right {
            Some(fine)
        } else {
            fine.checked_sub(1)
        };
        // A line of one point has no gaps: any distance will do.
        let half =
            gap.map_or(1.0, |i| 0.5 * (self.fine.log_gaps()[i] - crate::map::unit(&self.fine, fine)).exp());
        let middle = Complex64::new(if right { half } else { -half }, 0.0);
        self.terms(field).map(|(c, t)| c * self.term_integral_to(t, fine, middle)).sum()
    }

    /// `∫ W' dζ` from the reference of fine point `i` to that of `i + 1`.
    fn step(&self, field: &Field, i: usize) -> Complex64 {
        if !self.is_pole(i) && !self.is_pole(i + 1) {
            return self.terms(field).map(|(c, t)| c * t.over_gap(i)).sum();
        }
        // Over the pole: through a point above the middle of the gap.
        let gap = self.fine.log_gaps()[i];
        let above = |fine: usize, sign: f64| {
            let half = 0.5 * (gap - crate::map::unit(&self.fine, fine)).exp();
            Complex64::new(sign * half, half)
        };
        let (from_left, from_right) = (above(i, 1.0), above(i + 1, -1.0));
        self.terms(field)
            .map(|(c, t)| {
                let w = self.term_integral_to(t, i, from_left) - self.term_integral_to(t, i + 1, from_right);
                c * w
            })
            .sum()
    }

    /// One term's integral from the reference of a fine point to an offset.
    fn term_integral_to(&self, term: &Term, fine: usize, offset: Complex64) -> Complex64 {
        self.term_integral(term, HalfPlanePoint::new(fine, offset))
    }

    fn term_integral(&self, term: &Term, p: HalfPlanePoint) -> Complex64 {
        let integral = if self.is_pole(p.anchor) {
            term.product.integral_from(self.reference_offset(p.anchor), p)
        } else {
            term.product.integral(p)
        };
        integral.times(-term.ln_norm, quarter_turns(term.quarter)).value()
    }

    /// A point of the map's line on the fine line.
    fn on_fine(&self, p: HalfPlanePoint) -> HalfPlanePoint {
        HalfPlanePoint { anchor: self.fine_of[p.anchor], ln_offset: p.ln_offset + self.unit_ratio[p.anchor] }
    }

    /// `W = φ + iψ` at a point of the half-plane.
    pub(crate) fn potential(&self, field: &Field, p: HalfPlanePoint) -> Complex64 {
        self.potential_at(field, self.on_fine(p))
    }

    fn potential_at(&self, field: &Field, at: HalfPlanePoint) -> Complex64 {
        if self.arcs.gaps.is_empty() {
            return self.all_held(field, at);
        }
        let terms: Complex64 = self.terms(field).map(|(c, t)| c * self.term_integral(t, at)).sum();
        field.reference[at.anchor] + terms
    }

    /// With every side held: `φ = φ(+∞) + Σ (jump/π) arg(ζ − c)`, `ψ = −Σ (jump/π) ln |ζ − c|`.
    fn all_held(&self, field: &Field, at: HalfPlanePoint) -> Complex64 {
        let base = field.values[self.arcs.n - 2].unwrap_or(0.0);
        let jumps = self.poles.iter().zip(&field.poles).filter(|(_, k)| **k != 0.0);
        let turned = jumps.map(|((c, term), k)| {
            let ln = term.product.ln_from(self.fine_of[*c], at);
            Complex64::new(k * ln.im, -k * ln.re)
        });
        turned.sum::<Complex64>() + base
    }

    /// `W'(ζ)` in the line's unit.
    pub(crate) fn derivative(&self, field: &Field, p: HalfPlanePoint) -> Scaled {
        let at = self.on_fine(p);
        let parts = self
            .terms(field)
            .map(|(c, t)| t.product.value(at).times(-t.ln_norm, quarter_turns(t.quarter) * c));
        Scaled::sum(parts)
    }

    /// `∫ W' dζ` between two points of the real axis on one side, keeping the digits of a short piece.
    pub(crate) fn between(&self, field: &Field, from: HalfPlanePoint, to: HalfPlanePoint) -> Complex64 {
        let (p, q) = (self.on_fine(from), self.on_fine(to));
        let pole = |p: HalfPlanePoint| self.is_pole(p.anchor) && p.ln_offset.re == f64::NEG_INFINITY;
        if pole(p) || pole(q) {
            let at = if pole(p) { p.anchor } else { q.anchor };
            let sign: f64 =
                self.terms(field).filter(|(_, t)| t.product.exponent(at) <= -1.0).map(|(c, _)| c).sum();
            return Complex64::new(0.0, if sign < 0.0 { f64::INFINITY } else { f64::NEG_INFINITY });
        }
        if p.anchor == q.anchor {
            // A direct segment keeps the digits of a short piece, but only within the range of plain offsets.
            let plain = |p: HalfPlanePoint| p.ln_offset.re > -700.0 && p.ln_offset.re < 250.0;
            if !(plain(p) && plain(q)) {
                return self.potential_at(field, q) - self.potential_at(field, p);
            }
            return self
                .terms(field)
                .map(|(c, t)| {
                    let w = t.product.segment(p.anchor, p.offset(), q.offset());
                    c * w.times(-t.ln_norm, quarter_turns(t.quarter)).value()
                })
                .sum();
        }
        self.potential_at(field, q) - self.potential_at(field, p)
    }

    /// Coefficient of `W'` at infinity, `W' ≈ B ζ^p`: every product has the coefficient 1 there.
    pub(crate) fn coefficient_at_infinity(&self, field: &Field) -> Scaled {
        Scaled::sum(
            self.terms(field)
                .map(|(c, t)| Scaled { ln_scale: -t.ln_norm, mantissa: quarter_turns(t.quarter) * c }),
        )
    }

    /// Coefficient of the leading power of `W'` at a prevertex: `W' ≈ B (ζ − x_j)^b`.
    pub(crate) fn coefficient(&self, field: &Field, j: usize) -> Scaled {
        let parts = self.terms(field).map(|(c, t)| {
            t.product.coefficient(self.fine_of[j]).times(-t.ln_norm, quarter_turns(t.quarter) * c)
        });
        Scaled::sum(parts)
    }
}

impl Field {
    /// Held value of a side in line order.
    pub(crate) fn level(&self, side: usize) -> Option<f64> {
        self.values[side]
    }

    /// `W` at a prevertex; the stream function is infinite at a jump.
    pub(crate) fn at_prevertex(&self, basis: &FieldBasis, j: usize) -> Complex64 {
        self.reference[basis.fine_of[j]]
    }
}
