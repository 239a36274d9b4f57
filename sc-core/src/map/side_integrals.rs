//! Integrals of a product of powers over the gaps between points of the real axis, with exact derivatives.
//!
//! ```text
//! I_k = ∫_{x_k}^{x_{k+1}} ∏_j |x − x_j|^{a_j} dx,    I_∞ = ∫_{x_{m−1}}^{∞}, ∫_{−∞}^{x_0}
//! ```
//!
//! A gap is integrated from both ends to a meeting point half way between the nearest singularities. The first
//! panel at a point with `a_j ≠ 0` carries the weight `t^{a_j}` (Gauss–Jacobi); every later panel ends at most 2.5
//! distances further out (Gauss–Legendre), so no singularity is nearer than two thirds of a panel's length.
//! Points with `a_j = 0` (flat vertices) are no singularities and cost nothing.
//!
//! All distances are logarithms in, all integrals logarithms out; a panel works in units of its own end, so the
//! range of `f64` is never in question. The derivatives need, beside the integral, only one quotient per node and
//! point: with the *mean nearness* `B_j = (1/I_k) ∫ f D_j/|x − x_j| dx`, `D_j` the distance of `x_j` from the near
//! end of gap `k`,
//!
//! ```text
//! ∂ ln I_k/∂ ln g_m = g_m Σ_{j≤m} a_j B_j/D_j            (m < k; mirrored for m > k)
//! ∂ ln I_k/∂ ln g_k = 1 + Σ_j a_j (1 − B_j)
//! ```
//!
//! Source: Trefethen, SIAM J. Sci. Stat. Comput. 1 (1980) 82–102 (compound Gauss–Jacobi); gap derivatives are ours.

use super::gap_line::{GapLine, ln_add};
use crate::quadrature::{Rule, RuleError, ln_positive};
use nalgebra::DMatrix;
use rayon::prelude::*;
use std::sync::Arc;

/// A panel that starts at distance `d` from the nearest singularity is `GROWTH × d` long.
const GROWTH: f64 = 1.5;
/// Distances that differ by `e^40` from a panel's scale are constants (or zero) on it, to all digits.
const FAR: f64 = 40.0;
/// Sums are kept in this many lanes.
const LANES: usize = 4;
/// Points at more than this many panel units are lumped.
const LUMP_RATIO: f64 = 5.0;
/// Terms of a lump that bring its tail below 1e-17, and below 1e-8 for rules of few nodes.
const MAX_TERMS: usize = 24;
const COARSE_TERMS: usize = 11;
/// Lumping pays from so many points on.
const LUMP_FROM: usize = 4;
/// A stretch of one power is taken in closed form if it spans more than this many e-folds.
const WORTH_IT: f64 = 5.0;
/// Work (sides × points) from which the sides are shared out over threads.
const PARALLEL_WORK: usize = 6_000;

/// The Gauss rules that a set of exponents needs, all with the same number of nodes.
#[derive(Debug, Clone)]
pub(crate) struct RuleSet {
    legendre: Arc<Rule>,
    /// One rule per point; shared between points of equal exponent. A pole, whose integral diverges, has none and
    /// stands as the Legendre rule.
    at_point: Vec<Arc<Rule>>,
    /// Weight `v^{−2 − Σ a}` in `v = 1/t`, for the sides that meet infinity.
    at_infinity: Option<Arc<Rule>>,
    exponents: Vec<f64>,
}

impl RuleSet {
    /// Rules of `n_nodes` nodes for `∏ |x − x_j|^{exponents[j]}`.
    pub(crate) fn new(exponents: &[f64], n_nodes: usize) -> Result<RuleSet, RuleError> {
        let legendre = Arc::new(Rule::legendre(n_nodes)?);
        let mut known: Vec<Arc<Rule>> = vec![legendre.clone()];
        let mut rule = |a: f64| -> Result<Arc<Rule>, RuleError> {
            if let Some(found) = known.iter().find(|r| r.exponent().to_bits() == a.to_bits()) {
                return Ok(found.clone());
            }
            let made = Arc::new(Rule::jacobi(a, n_nodes)?);
            known.push(made.clone());
            Ok(made)
        };
        let at_point = exponents
            .iter()
            .map(|&a| if a <= -1.0 { Ok(legendre.clone()) } else { rule(a) })
            .collect::<Result<_, _>>()?;
        let at_infinity = rule(-2.0 - exponents.iter().sum::<f64>()).ok();
        Ok(RuleSet { legendre, at_point, at_infinity, exponents: exponents.to_vec() })
    }

    pub(crate) fn exponents(&self) -> &[f64] {
        &self.exponents
    }

    pub(crate) fn legendre(&self) -> &Rule {
        &self.legendre
    }

    /// The rule for the weight at a point.
    pub(crate) fn at_point(&self, j: usize) -> &Rule {
        &self.at_point[j]
    }
}

/// Logarithms of the integrals over all gaps and both ends, and their derivatives.
#[derive(Debug, Clone)]
pub(crate) struct SideIntegrals {
    /// `ln I` over gap `k` (`k < m − 1`), from the last point to `+∞` (`k = m − 1`), from `−∞` to the first (`k = m`).
    /// An integral that does not converge at infinity is `+∞`.
    pub(crate) ln: Vec<f64>,
    /// `∂ ln I_k / ∂ y_i`, one row per side, if asked for.
    pub(crate) jacobian: Option<DMatrix<f64>>,
}

/// A singular point seen from the anchor of a half gap.
#[derive(Clone, Copy)]
struct Seen {
    exponent: f64,
    /// `ln` of the distance from the anchor.
    ln_distance: f64,
    /// `ln D`, the distance from the near end of the gap, which normalises `B`.
    ln_reference: f64,
}

/// The integral over a stretch that starts at an anchor: `e^scale (total, B·total)`.
struct Stretch {
    scale: f64,
    total: f64,
    behind: Vec<f64>,
    ahead: Vec<f64>,
}

/// Workspace of the panels of one stretch: the factors that vary over the panel.
struct Active {
    exponents: Vec<f64>,
    offsets: Vec<f64>,
    signs: Vec<f64>,
    references: Vec<f64>,
    nearness: Vec<f64>,
    /// Index into `behind` (`i`) or `ahead` (`n_behind + i`).
    source: Vec<usize>,
}

impl Stretch {
    fn new(n_behind: usize, n_ahead: usize) -> Stretch {
        Stretch {
            scale: f64::NEG_INFINITY,
            total: 0.0,
            behind: vec![0.0; n_behind],
            ahead: vec![0.0; n_ahead],
        }
    }

    /// Makes room for a panel of magnitude `e^scale`; returns the factor that panel's numbers carry.
    fn rescale(&mut self, scale: f64) -> f64 {
        if scale > self.scale {
            let shrink = (self.scale - scale).exp();
            self.total *= shrink;
            self.behind.iter_mut().for_each(|b| *b *= shrink);
            self.ahead.iter_mut().for_each(|b| *b *= shrink);
            self.scale = scale;
        }
        (scale - self.scale).exp()
    }

    fn ln(&self) -> f64 {
        if self.total > 0.0 { self.scale + self.total.ln() } else { f64::NEG_INFINITY }
    }
}

/// Workspace of the panels of one stretch.
struct Work {
    active: Active,
    lump: Lump,
}

/// What one panel is: its end `e^ln_end` in the line's units and its start as a fraction of the end.
struct Panel<'a> {
    ln_end: f64,
    start: f64,
    rule: &'a Rule,
    /// Exponent of `t` not carried by the rule.
    self_exponent: f64,
}

fn add_panel(
    out: &mut Stretch,
    panel: &Panel<'_>,
    behind: &[Seen],
    ahead: &[Seen],
    work: &mut Work,
    want_derivatives: bool,
) {
    let Work { active, lump } = work;
    active.clear();
    lump.clear();
    let lumping = behind.len() + ahead.len() > LUMP_FROM;
    let mut constant = 0.0;
    let mut power_of_t = panel.self_exponent;
    let mut power_of_unit = 1.0 + panel.self_exponent;
    if panel.self_exponent == 0.0 {
        power_of_unit += panel.rule.exponent();
    }
    for (i, p) in behind.iter().enumerate() {
        let d = p.ln_distance - panel.ln_end;
        if d > FAR {
            constant += p.exponent * p.ln_distance;
        } else if d < -FAR {
            power_of_t += p.exponent;
            power_of_unit += p.exponent;
        } else {
            power_of_unit += p.exponent;
            let offset = d.exp();
            if lumping && offset > LUMP_RATIO {
                constant += p.exponent * d;
                lump.push(p.exponent, 1.0 / offset, (p.ln_reference - p.ln_distance).exp(), i);
            } else {
                active.push(p, offset, 1.0, (p.ln_reference - panel.ln_end).exp(), i);
            }
        }
    }
    for (i, p) in ahead.iter().enumerate() {
        let d = p.ln_distance - panel.ln_end;
        if d > FAR {
            constant += p.exponent * p.ln_distance;
        } else {
            power_of_unit += p.exponent;
            let offset = d.exp();
            if lumping && offset > LUMP_RATIO {
                constant += p.exponent * d;
                lump.push(
                    p.exponent,
                    -1.0 / offset,
                    (p.ln_reference - p.ln_distance).exp(),
                    behind.len() + i,
                );
            } else {
                active.push(p, offset, -1.0, (p.ln_reference - panel.ln_end).exp(), behind.len() + i);
            }
        }
    }
    lump.gather();
    let width = 1.0 - panel.start;
    let mut total = 0.0;
    let mut f_moments = [0.0; MAX_TERMS];
    for (x, w) in panel.rule.points() {
        let tau = panel.start + width * x;
        let mut ln_f = if power_of_t == 0.0 { 0.0 } else { power_of_t * ln_positive(tau) };
        ln_f += active.ln_product(tau) + lump.ln_product(tau);
        let f = w * ln_f.exp();
        total += f;
        if want_derivatives {
            active.add_nearness(tau, f);
            if !lump.u.is_empty() {
                let mut power = f;
                for m in &mut f_moments[..lump.terms] {
                    *m += power;
                    power *= tau;
                }
            }
        }
    }
    let factor = out.rescale(constant + power_of_unit * panel.ln_end);
    let factor = if panel.start > 0.0 { factor * width } else { factor };
    out.total += factor * total;
    if want_derivatives {
        let mut add = |source: usize, b: f64| {
            if source < behind.len() {
                out.behind[source] += b;
            } else {
                out.ahead[source - behind.len()] += b;
            }
        };
        for (k, &source) in active.source.iter().enumerate() {
            add(source, factor * active.references[k] * active.nearness[k]);
        }
        let lumped = lump.nearness(&f_moments[..lump.terms]);
        for ((&source, reference), nearness) in lump.source.iter().zip(&lump.references).zip(lumped) {
            add(source, factor * reference * nearness);
        }
        for (b, p) in out.behind.iter_mut().zip(behind) {
            if p.ln_distance - panel.ln_end > FAR {
                *b += factor * total * (p.ln_reference - p.ln_distance).exp();
            }
        }
        for (b, p) in out.ahead.iter_mut().zip(ahead) {
            if p.ln_distance - panel.ln_end > FAR {
                *b += factor * total * (p.ln_reference - p.ln_distance).exp();
            }
        }
    }
}

impl Active {
    fn with_capacity(n: usize) -> Active {
        let v = || Vec::with_capacity(n);
        Active {
            exponents: v(),
            offsets: v(),
            signs: v(),
            references: v(),
            nearness: v(),
            source: Vec::with_capacity(n),
        }
    }

    fn clear(&mut self) {
        self.exponents.clear();
        self.offsets.clear();
        self.signs.clear();
        self.references.clear();
        self.nearness.clear();
        self.source.clear();
    }

    fn push(&mut self, p: &Seen, offset: f64, sign: f64, reference: f64, source: usize) {
        self.exponents.push(p.exponent);
        self.offsets.push(offset);
        self.signs.push(sign);
        self.references.push(reference);
        self.nearness.push(0.0);
        self.source.push(source);
    }

    /// `Σ_j a_j ln(δ_j ± τ)`, in four lanes so that the compiler may vectorise the sum.
    #[inline]
    fn ln_product(&self, tau: f64) -> f64 {
        let mut lanes = [0.0; LANES];
        let (a, d, s) = (
            self.exponents.chunks_exact(LANES),
            self.offsets.chunks_exact(LANES),
            self.signs.chunks_exact(LANES),
        );
        let rest = a.remainder().iter().zip(d.remainder()).zip(s.remainder());
        let rest: f64 = rest.map(|((a, d), s)| a * ln_positive(d + s * tau)).sum();
        for ((a, d), s) in a.zip(d).zip(s) {
            for i in 0..LANES {
                lanes[i] += a[i] * ln_positive(d[i] + s[i] * tau);
            }
        }
        lanes.iter().sum::<f64>() + rest
    }

    /// `nearness_j += f/(δ_j ± τ)`
    #[inline]
    fn add_nearness(&mut self, tau: f64, f: f64) {
        for ((b, d), s) in self.nearness.iter_mut().zip(&self.offsets).zip(&self.signs) {
            *b += f / (d + s * tau);
        }
    }
}

/// Points far from a panel, lumped: with `u_j = ±1/δ_j` small,
///
/// ```text
/// Σ a_j ln(1 + u_j τ) = Σ_p (−1)^{p+1} M_p τ^p/p,   M_p = Σ a_j u_j^p
/// ∫ f/(δ_j ± τ) = (1/δ_j) Σ_p (−u_j)^p F_p,         F_p = ∫ f τ^p
/// ```
/// A point then costs as many products as there are terms, whatever the number of nodes.
struct Lump {
    exponents: Vec<f64>,
    u: Vec<f64>,
    powers: Vec<f64>,
    references: Vec<f64>,
    source: Vec<usize>,
    /// `(−1)^{p+1} M_p/p`, `p = 1 …`
    moments: [f64; MAX_TERMS],
    terms: usize,
}

impl Lump {
    fn with_capacity(n: usize, terms: usize) -> Lump {
        let v = || Vec::with_capacity(n);
        Lump {
            exponents: v(),
            u: v(),
            powers: v(),
            references: v(),
            source: Vec::with_capacity(n),
            moments: [0.0; MAX_TERMS],
            terms,
        }
    }

    fn clear(&mut self) {
        self.exponents.clear();
        self.u.clear();
        self.references.clear();
        self.source.clear();
    }

    fn push(&mut self, exponent: f64, u: f64, reference: f64, source: usize) {
        self.exponents.push(exponent);
        self.u.push(u);
        self.references.push(reference);
        self.source.push(source);
    }

    fn gather(&mut self) {
        self.powers.clear();
        self.powers.extend_from_slice(&self.exponents);
        for p in 1..=self.terms {
            let mut lanes = [0.0; LANES];
            let mut powers = self.powers.chunks_exact_mut(LANES);
            let u = self.u.chunks_exact(LANES);
            let mut sum = 0.0;
            let tail = u.remainder();
            for (w, u) in powers.by_ref().zip(u) {
                for i in 0..LANES {
                    w[i] *= u[i];
                    lanes[i] += w[i];
                }
            }
            for (w, u) in powers.into_remainder().iter_mut().zip(tail) {
                *w *= u;
                sum += *w;
            }
            let moment = sum + lanes.iter().sum::<f64>();
            self.moments[p - 1] = if p % 2 == 1 { moment } else { -moment } / p as f64;
        }
    }

    /// `Σ a_j ln(1 + u_j τ)`
    #[inline]
    fn ln_product(&self, tau: f64) -> f64 {
        self.moments[..self.terms].iter().rev().fold(0.0, |sum, m| (sum + m) * tau)
    }

    /// `∫ f/(1 + u_j τ)` for each point, from the moments of `f`.
    fn nearness(&self, f_moments: &[f64]) -> Vec<f64> {
        self.u.iter().map(|u| f_moments.iter().rev().fold(0.0, |sum, f| f - u * sum)).collect()
    }
}

/// Integrates from an anchor outward to distance `e^ln_end`.
///
/// `nearest_behind` is `ln` of the distance of the nearest singularity behind the anchor, `−∞` if the anchor
/// is one itself.
fn outward(
    line_rules: &RuleSet,
    anchor: usize,
    behind: &[Seen],
    ahead: &[Seen],
    nearest_behind: f64,
    ln_end: f64,
    want_derivatives: bool,
) -> Stretch {
    let mut out = Stretch::new(behind.len(), ahead.len());
    let terms = if line_rules.legendre.len() < 8 { COARSE_TERMS } else { MAX_TERMS };
    let mut work = Work {
        active: Active::with_capacity(behind.len() + ahead.len()),
        lump: Lump::with_capacity(behind.len() + ahead.len(), terms),
    };
    let a = line_rules.exponents[anchor];
    let singular = a != 0.0;
    let closest = if singular {
        behind.iter().map(|p| p.ln_distance).fold(f64::INFINITY, f64::min)
    } else {
        nearest_behind
    };
    let growth_ln = GROWTH.ln();
    let mut end = (closest + growth_ln).min(ln_end);
    let first = Panel { ln_end: end, start: 0.0, rule: &line_rules.at_point[anchor], self_exponent: 0.0 };
    add_panel(&mut out, &first, behind, ahead, &mut work, want_derivatives);
    while end < ln_end {
        if let Some(reached) = add_power_stretch(&mut out, a, behind, ahead, end, ln_end, want_derivatives) {
            end = reached;
            continue;
        }
        let start = end;
        let distance = if singular { start } else { ln_add(start, nearest_behind) };
        let grown = ln_add(start, distance + growth_ln);
        // Not a sliver at the end: a last panel a quarter longer than the rule allows costs no digit.
        end = if grown + 0.2 > ln_end { ln_end } else { grown };
        let panel =
            Panel { ln_end: end, start: (start - end).exp(), rule: &line_rules.legendre, self_exponent: a };
        add_panel(&mut out, &panel, behind, ahead, &mut work, want_derivatives);
    }
    out
}

/// Where all points behind are either nearer than `e^−40` of the distance or farther than `e^40` of it, the integrand is
/// one power and its integral is in closed form: a channel of any length costs one addition. Returns the (logarithmic)
/// distance reached, or nothing if there is no such stretch from `ln_start` on that is worth it.
fn add_power_stretch(
    out: &mut Stretch,
    self_exponent: f64,
    behind: &[Seen],
    ahead: &[Seen],
    ln_start: f64,
    ln_end: f64,
    want_derivatives: bool,
) -> Option<f64> {
    let mut limit = ln_end;
    let mut power = self_exponent;
    let mut constant = 0.0;
    for p in behind {
        if p.ln_distance < ln_start - FAR {
            power += p.exponent;
        } else if p.ln_distance > ln_start + FAR {
            limit = limit.min(p.ln_distance - FAR);
            constant += p.exponent * p.ln_distance;
        } else {
            return None;
        }
    }
    for p in ahead {
        limit = limit.min(p.ln_distance - FAR);
        constant += p.exponent * p.ln_distance;
    }
    if limit < ln_start + WORTH_IT {
        return None;
    }
    // ∫ t^power dt from e^ln_start to e^limit, as e^scale · total.
    let q = 1.0 + power;
    let length = limit - ln_start;
    let (scale, total) = if (q * length).abs() < 1e-8 {
        (q * ln_start, length * (1.0 + 0.5 * q * length))
    } else if q > 0.0 {
        (q * limit, -f64::exp_m1(-q * length) / q)
    } else {
        (q * ln_start, f64::exp_m1(q * length) / q)
    };
    let factor = out.rescale(constant + scale);
    out.total += factor * total;
    if want_derivatives {
        for (b, p) in out.behind.iter_mut().zip(behind).filter(|(_, p)| p.ln_distance > ln_start) {
            *b += factor * total * (p.ln_reference - p.ln_distance).exp();
        }
        for (b, p) in out.ahead.iter_mut().zip(ahead) {
            *b += factor * total * (p.ln_reference - p.ln_distance).exp();
        }
    }
    Some(limit)
}

/// The stretch from distance `e^ln_start` to infinity, in `v = 1/t`.
fn to_infinity(
    rule: &Rule,
    anchor_exponent: f64,
    behind: &[Seen],
    ln_start: f64,
    out: &mut Stretch,
    want_derivatives: bool,
) {
    let mut work = Active::with_capacity(behind.len());
    let mut total = 0.0;
    let mut power_of_unit = 1.0 + anchor_exponent;
    for (i, p) in behind.iter().enumerate() {
        power_of_unit += p.exponent;
        let d = p.ln_distance - ln_start;
        if d > -FAR {
            work.push(p, d.exp(), 1.0, d.exp(), i);
        }
    }
    for (nu, w) in rule.points() {
        let mut ln_f = 0.0;
        for (a, d) in work.exponents.iter().zip(&work.offsets) {
            ln_f += a * ln_positive(1.0 + d * nu);
        }
        let f = w * ln_f.exp();
        total += f;
        if want_derivatives {
            for (b, d) in work.nearness.iter_mut().zip(&work.offsets) {
                *b += f * nu / (1.0 + d * nu);
            }
        }
    }
    let factor = out.rescale(power_of_unit * ln_start);
    out.total += factor * total;
    for (k, &i) in work.source.iter().enumerate() {
        out.behind[i] += factor * work.references[k] * work.nearness[k];
    }
}

/// Which points are singular, seen from the two ends of one gap.
struct Surroundings {
    /// Indices of the singular points left of the gap, nearest first, without the left end itself.
    left: Vec<usize>,
    /// The same to the right.
    right: Vec<usize>,
}

/// One row of results: `ln I` and the derivative row.
fn one_side(line: &GapLine, rules: &RuleSet, side: usize, want_derivatives: bool) -> (f64, Vec<f64>) {
    let m = line.n_points();
    let ends = if side < m - 1 { [side, side + 1] } else { [if side == m { 0 } else { m - 1 }; 2] };
    if ends.iter().any(|&j| rules.exponents[j] <= -1.0) {
        return (f64::INFINITY, if want_derivatives { vec![0.0; m - 1] } else { Vec::new() });
    }
    let singular = |j: &usize| rules.exponents[*j] != 0.0;
    let mut row = if want_derivatives { vec![0.0; m - 1] } else { Vec::new() };
    if side >= m - 1 {
        // From the last point to +∞, or (mirrored) from −∞ to the first.
        let anchor = if side == m - 1 { m - 1 } else { 0 };
        let Some(rule) = &rules.at_infinity else { return (f64::INFINITY, row) };
        let mut distances = vec![f64::NEG_INFINITY; m];
        line.ln_distances_where(anchor, |j| singular(&j), &mut distances);
        let order: Vec<usize> = if anchor == 0 {
            (1..m).filter(singular).collect()
        } else {
            (0..m - 1).rev().filter(singular).collect()
        };
        let behind: Vec<Seen> = order.iter().map(|&j| seen(rules, j, distances[j], distances[j])).collect();
        let nearest = if rules.exponents[anchor] != 0.0 {
            f64::NEG_INFINITY
        } else {
            behind.first().map_or(f64::INFINITY, |p| p.ln_distance)
        };
        // From twice the farthest distance on, one rule in 1/t does all the rest.
        let farthest = behind.last().map_or(line.spread().1, |p| p.ln_distance) - GROWTH.ln();
        let mut out = outward(rules, anchor, &behind, &[], nearest, farthest, want_derivatives);
        to_infinity(rule, rules.exponents[anchor], &behind, farthest, &mut out, want_derivatives);
        if want_derivatives {
            let total = out.total;
            let nearness: Vec<f64> = out.behind.iter().map(|b| b / total).collect();
            outer_derivatives(line, rules, &order, &distances, &nearness, anchor, &mut row);
        }
        return (out.ln(), row);
    }
    let mut from_left = vec![f64::NEG_INFINITY; m];
    let mut from_right = from_left.clone();
    line.ln_distances_where(side, |j| singular(&j), &mut from_left);
    line.ln_distances_where(side + 1, |j| singular(&j), &mut from_right);
    let around = Surroundings {
        left: (0..side).rev().filter(singular).collect(),
        right: (side + 2..m).filter(singular).collect(),
    };
    let y = line.log_gaps()[side];
    let near = |end_singular: bool, list: &[usize], d: &[f64]| {
        if end_singular { f64::NEG_INFINITY } else { list.first().map_or(f64::INFINITY, |&j| d[j]) }
    };
    let (left_end, right_end) = (rules.exponents[side] != 0.0, rules.exponents[side + 1] != 0.0);
    let (near_left, near_right) =
        (near(left_end, &around.left, &from_left), near(right_end, &around.right, &from_right));
    let meeting = {
        let (l, r) = ((near_left - y).exp(), (near_right - y).exp());
        if l.is_infinite() && r.is_infinite() { 1.0 } else { (0.5 * (1.0 + (r - l))).clamp(0.0, 1.0) }
    };
    let half =
        |near_end: usize, far_end: usize, behind: &[usize], ahead: &[usize], nearest: f64, part: f64| {
            let (d_near, d_far) =
                if near_end == side { (&from_left, &from_right) } else { (&from_right, &from_left) };
            let behind: Vec<Seen> = behind.iter().map(|&j| seen(rules, j, d_near[j], d_near[j])).collect();
            let mut beyond: Vec<Seen> = ahead.iter().map(|&j| seen(rules, j, d_near[j], d_far[j])).collect();
            if rules.exponents[far_end] != 0.0 {
                beyond.push(seen(rules, far_end, y, f64::NEG_INFINITY));
            }
            outward(rules, near_end, &behind, &beyond, nearest, y + part.ln(), want_derivatives)
        };
    let left = (meeting > 0.0).then(|| half(side, side + 1, &around.left, &around.right, near_left, meeting));
    let right =
        (meeting < 1.0).then(|| half(side + 1, side, &around.right, &around.left, near_right, 1.0 - meeting));
    let parts: Vec<f64> = [&left, &right].iter().filter_map(|s| s.as_ref().map(Stretch::ln)).collect();
    let ln_total = super::gap_line::ln_sum(&parts);
    if want_derivatives {
        let nearness = |mine: &Option<Stretch>, other: &Option<Stretch>, n: usize| -> Vec<f64> {
            (0..n)
                .map(|i| {
                    let own = mine.as_ref().map_or(0.0, |s| s.behind[i] * (s.scale - ln_total).exp());
                    own + other.as_ref().map_or(0.0, |s| s.ahead[i] * (s.scale - ln_total).exp())
                })
                .collect()
        };
        let b_left = nearness(&left, &right, around.left.len());
        let b_right = nearness(&right, &left, around.right.len());
        outer_derivatives(line, rules, &around.left, &from_left, &b_left, side, &mut row);
        outer_derivatives(line, rules, &around.right, &from_right, &b_right, side + 1, &mut row);
        let mut own = 1.0 + rules.exponents[side] + rules.exponents[side + 1];
        for (&j, b) in around.left.iter().zip(&b_left).chain(around.right.iter().zip(&b_right)) {
            own += rules.exponents[j] * (1.0 - b);
        }
        row[side] = own;
    }
    (ln_total, row)
}

fn seen(rules: &RuleSet, j: usize, ln_distance: f64, ln_reference: f64) -> Seen {
    Seen { exponent: rules.exponents[j], ln_distance, ln_reference }
}

/// `g_m Σ a_j B_j/D_j` for the gaps `m` between `end` and the farthest singular point in `order` (nearest first).
///
/// The running sum is kept times the distance of its last point, so that no factor exceeds 1.
fn outer_derivatives(
    line: &GapLine,
    rules: &RuleSet,
    order: &[usize],
    ln_distance: &[f64],
    nearness: &[f64],
    end: usize,
    row: &mut [f64],
) {
    let mut sum = 0.0;
    let mut unit = f64::NAN;
    for (i, &j) in order.iter().enumerate().rev() {
        let d = ln_distance[j];
        sum = if unit.is_nan() { 0.0 } else { sum * (d - unit).exp() };
        sum += rules.exponents[j] * nearness[i];
        unit = d;
        // Gaps from point j up to the next nearer singular point, or to the end of the gap integrated.
        let next = if i == 0 { end } else { order[i - 1] };
        for m in j.min(next)..j.max(next) {
            row[m] = sum * (line.log_gaps()[m] - d).exp();
        }
    }
}

/// All side integrals of a line.
pub(crate) fn side_integrals(line: &GapLine, rules: &RuleSet, want_derivatives: bool) -> SideIntegrals {
    let m = line.n_points();
    let n_singular = rules.exponents.iter().filter(|a| **a != 0.0).count();
    let rows: Vec<(f64, Vec<f64>)> = if m * n_singular > PARALLEL_WORK {
        (0..=m).into_par_iter().map(|k| one_side(line, rules, k, want_derivatives)).collect()
    } else {
        (0..=m).map(|k| one_side(line, rules, k, want_derivatives)).collect()
    };
    let ln = rows.iter().map(|r| r.0).collect();
    let jacobian = want_derivatives.then(|| DMatrix::from_fn(m + 1, m - 1, |i, j| rows[i].1[j]));
    SideIntegrals { ln, jacobian }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn line(x: &[f64]) -> GapLine {
        GapLine::new(x.windows(2).map(|w| (w[1] - w[0]).ln()).collect())
    }

    /// Beta function for the exponents used here, through the closed forms of a rectangle and a right triangle.
    #[test]
    fn equal_exponents_of_a_triangle_give_equal_sides() {
        // 0, 1, ∞ with α = 1/3: all three sides are B(1/3, 1/3).
        let rules = RuleSet::new(&[-2.0 / 3.0, -2.0 / 3.0], 12).unwrap();
        let i = side_integrals(&line(&[0.0, 1.0]), &rules, false).ln;
        let beta = 5.299_916_250_856_349_9_f64; // B(1/3,1/3) = Γ(1/3)²/Γ(2/3), computed with mpmath
        for v in i {
            assert!((v - beta.ln()).abs() < 4e-15, "{v} {}", beta.ln());
        }
    }

    #[test]
    fn derivatives_agree_with_central_differences() {
        let x = [0.0, 0.3, 1.0, 1.1, 5.0, 5.5, 9.0];
        let a = [-0.5, 0.5, 0.0, -0.3, -0.7, 0.0, -0.9];
        let rules = RuleSet::new(&a, 14).unwrap();
        let base = line(&x);
        let exact = side_integrals(&base, &rules, true).jacobian.unwrap();
        let mut seen = 0;
        for m in 0..6 {
            let h = 1e-5;
            let shifted = |s: f64| {
                let mut y = base.log_gaps().to_vec();
                y[m] += s * h;
                side_integrals(&GapLine::new(y), &rules, false).ln
            };
            let (p, q) = (shifted(1.0), shifted(-1.0));
            for k in 0..8 {
                let numeric = (p[k] - q[k]) / (2.0 * h);
                assert!(
                    (numeric - exact[(k, m)]).abs() < 2e-9,
                    "side {k}, gap {m}: {numeric} {}",
                    exact[(k, m)]
                );
                seen += 1;
            }
        }
        assert_eq!(seen, 48);
    }

    #[test]
    fn twelve_nodes_reach_rounding_and_more_nodes_change_nothing() {
        let x = [0.0, 1e-3, 1.0, 1.000_001, 3.0, 1e4];
        let a = [-0.5, 0.5, -0.25, -0.75, 0.9, -0.95];
        let run = |n| side_integrals(&line(&x), &RuleSet::new(&a, n).unwrap(), false).ln;
        let (coarse, fine, finest) = (run(6), run(12), run(20));
        for k in 0..coarse.len() {
            assert!((coarse[k] - finest[k]).abs() < 1e-6);
            assert!((fine[k] - finest[k]).abs() < 1e-13, "side {k}: {} {}", fine[k], finest[k]);
        }
    }

    #[test]
    fn scaling_all_gaps_scales_all_sides_alike() {
        let a = [-0.5, -0.5, 0.5, -0.75];
        let rules = RuleSet::new(&a, 12).unwrap();
        let base = line(&[0.0, 1.0, 1.5, 7.0]);
        let moved = GapLine::new(base.log_gaps().iter().map(|y| y + 700.0).collect());
        let (i, j) = (side_integrals(&base, &rules, false).ln, side_integrals(&moved, &rules, false).ln);
        let factor = 700.0 * (1.0 + a.iter().sum::<f64>());
        for k in 0..i.len() {
            assert!((j[k] - i[k] - factor).abs() < 1e-12);
        }
    }
}
