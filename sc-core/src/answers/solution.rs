//! A solved section.

use super::bounded::Bounded;
use super::corner::{Corner, CornerKind};
use super::estimate::Evidence;
use super::probe::{Gradient, Probe, ProbeError};
use crate::map::{
    HalfPlaneMap, HalfPlanePoint, InverseError, IterationObserver, MapError, MapOptions, Preimage,
};
use crate::outline::Point;
use crate::potential::{Arcs, Field, FieldBasis, FieldError, Section, conductance_of_cross_ratio};
use num_complex::Complex64;
use rayon::prelude::*;
use std::f64::consts::PI;
use thiserror::Error;

/// Why a section has no solution.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum SolveError {
    /// There is no map.
    #[error(transparent)]
    Map(#[from] MapError),
    /// There is no field.
    #[error(transparent)]
    Field(#[from] FieldError),
}

/// How a section is solved.
#[derive(Debug, Clone)]
pub struct SolveOptions {
    /// Relative error asked for. The iteration stops a hundred times below it, or at rounding.
    pub tolerance: f64,
    /// Whether to solve a second time in an independent way; without it the bounds rest on residuals alone.
    pub check: bool,
    /// Gaps of a neighbouring section to start from, with the index of its vertex at infinity.
    pub warm_start: Option<(usize, crate::map::GapLine)>,
    /// Called after every iteration of the parameter problem.
    pub observer: Option<IterationObserver>,
}

impl Default for SolveOptions {
    fn default() -> Self {
        SolveOptions { tolerance: 1e-12, check: true, warm_start: None, observer: None }
    }
}

/// The conductance matrix between groups of electrodes, for unit conductivity.
///
/// Entry `(r, c)` is the flux into the section through the sides of group `r` with group `c` at 1 and all others at 0.
#[derive(Debug, Clone, PartialEq)]
pub struct Matrix {
    /// Rows; `±∞` between groups that touch.
    pub values: Vec<Vec<f64>>,
    /// Bound on the absolute error of every finite entry.
    pub error: f64,
}

/// One of the two solutions: a map with its fields.
#[derive(Debug, Clone)]
struct Half {
    map: HalfPlaneMap,
    basis: FieldBasis,
    /// Field of the section's own levels.
    field: Field,
    /// Stream function at the start of the first held side (or as near as it is finite).
    stream_zero: f64,
}

/// A section with its map, its field and what is known of their errors.
#[derive(Debug, Clone)]
pub struct Solution {
    section: Section,
    first: Half,
    second: Option<Half>,
    evidence: Evidence,
    matrix: Matrix,
    shape_factor: Option<Bounded>,
    relative_error: f64,
}

/// Quadrature nodes of the second solution.
const SECOND_NODES: usize = 15;
/// Nodes for the residual that is reported: no solution uses this number.
const RESIDUAL_NODES: usize = 18;
/// Nodes of the field integrals, first and second solution.
const FIELD_NODES: [usize; 2] = [14, 17];

impl Half {
    fn solve(section: &Section, options: &MapOptions, nodes: usize) -> Result<Half, SolveError> {
        let map = HalfPlaneMap::solve(section.outline(), options)?;
        let arcs = Arcs::new(section, &map);
        let n = section.outline().n();
        let basis = FieldBasis::new(arcs, &map, nodes)?;
        let values = (0..n).map(|k| section.level_of_side(map.vertex_of(k))).collect();
        let field = basis.field(values)?;
        let mut half = Half { map, basis, field, stream_zero: 0.0 };
        half.stream_zero = half.stream_at_first_held(section);
        Ok(half)
    }

    fn stream_at_first_held(&self, section: &Section) -> f64 {
        let n = section.outline().n();
        let given_first = (0..n)
            .filter(|&k| section.electrode_of_side(k).is_some())
            .min_by_key(|&k| section.outline().given_side(k).0)
            .unwrap_or(0);
        let j = self.map.line_index_of(given_first);
        if j < n - 1 {
            self.field.at_prevertex(&self.basis, j).im
        } else {
            // The side comes from infinity: its flux separates its start from its end.
            let flux = self.basis.along_side(&self.field, j).im;
            self.field.at_prevertex(&self.basis, 0).im - if flux.is_finite() { flux } else { 0.0 }
        }
    }

    /// The field with group `g` at 1 and all others at 0.
    fn unit_field(&self, section: &Section, group: usize) -> Result<Field, FieldError> {
        let values = self.basis.arcs().electrode.iter();
        let values =
            values.map(|e| e.map(|e| if section.group_of(e) == group { 1.0 } else { 0.0 })).collect();
        self.basis.field(values)
    }

    /// Flux into the section through the sides that `through` picks by their electrode.
    fn flux_through(&self, field: &Field, through: impl Fn(usize) -> bool) -> f64 {
        let electrode = &self.basis.arcs().electrode;
        (0..electrode.len())
            .filter(|&k| electrode[k].is_some_and(&through))
            .map(|k| self.basis.along_side(field, k).im)
            .sum()
    }

    fn matrix(&self, section: &Section) -> Result<Vec<Vec<f64>>, FieldError> {
        let groups = section.n_groups();
        let mut rows = vec![vec![0.0; groups]; groups];
        for c in 0..groups {
            let field = self.unit_field(section, c)?;
            for (r, row) in rows.iter_mut().enumerate() {
                row[c] = self.flux_through(&field, |e| section.group_of(e) == r);
            }
        }
        Ok(rows)
    }

    /// `(ln λ, ln(1−λ))` of the two held arcs, if there are just two.
    fn cross_ratio(&self) -> Option<(f64, f64)> {
        let arcs = self.basis.arcs();
        let [first, second] = arcs.gaps[..] else { return None };
        let n = arcs.n;
        // Electrodes [a, b] and [c, d] in walking order; gap `first` runs from b to c, gap `second` from d to a.
        let (b, c) = (first.0, (first.1 + 1) % n);
        let (d, a) = (second.0, (second.1 + 1) % n);
        let line = self.map.line();
        let ln = |p: usize, q: usize| if p == n - 1 || q == n - 1 { 0.0 } else { line.ln_distance(p, q) };
        let whole = ln(c, a) + ln(d, b);
        Some((ln(b, a) + ln(d, c) - whole, ln(c, b) + ln(d, a) - whole))
    }

    /// Conductance of the conjugate problem (held and insulated exchanged) by quadrature of its field.
    fn conjugate_conductance(&self, nodes: usize) -> Result<Option<f64>, FieldError> {
        if self.basis.arcs().gaps.len() != 2 {
            return Ok(None);
        }
        let mut gap = 0;
        let n = self.basis.arcs().n;
        let mut exchanged = self.basis.arcs().clone();
        let was = exchanged.electrode.clone();
        for k in 0..n {
            if was[k].is_none() && was[(k + n - 1) % n].is_some() {
                gap += 1;
            }
            exchanged.electrode[k] = if was[k].is_some() { None } else { Some(gap % 2) };
        }
        let exchanged = exchanged.with_gaps();
        let basis = FieldBasis::new(exchanged, &self.map, nodes)?;
        let values: Vec<Option<f64>> =
            basis.arcs().electrode.iter().map(|e| e.map(|e| if e == 0 { 0.0 } else { 1.0 })).collect();
        let field = basis.field(values)?;
        let electrode = &basis.arcs().electrode;
        let flux: f64 =
            (0..n).filter(|&k| electrode[k] == Some(1)).map(|k| basis.along_side(&field, k).im).sum();
        Ok(Some(flux))
    }

    fn potential(&self, p: HalfPlanePoint) -> Complex64 {
        self.basis.potential(&self.field, p) - Complex64::new(0.0, self.stream_zero)
    }

    /// `∇φ = conj(W'/f')`
    fn gradient(&self, p: HalfPlanePoint) -> Complex64 {
        let w = self.basis.derivative(&self.field, p);
        let f = self.map.scaled_derivative(p);
        w.times(-f.ln_scale, 1.0 / f.mantissa).value().conj()
    }

    /// Exponent and factor of the gradient's power law at a vertex.
    fn corner(&self, vertex: usize) -> (CornerKind, f64, f64) {
        let arcs = self.basis.arcs();
        let j = self.map.line_index_of(vertex);
        let alpha = self.map.outline().alpha()[vertex];
        if self.map.outline().point(vertex).is_none() {
            return (CornerKind::AtInfinity, 1.0, 0.0);
        }
        let before = (j + arcs.n - 1) % arcs.n;
        let (kind, b) = if arcs.is_end(j) {
            (CornerKind::HeldMeetsInsulated, -0.5)
        } else if let (Some(u), Some(v)) = (self.field.level(before), self.field.level(j))
            && u.total_cmp(&v).is_ne()
        {
            return (CornerKind::Jump, -1.0, (u - v).abs() / (alpha * PI));
        } else {
            (CornerKind::Alike, 0.0)
        };
        let exponent = (b + 1.0) / alpha - 1.0;
        // |∇φ| = |B/F| t^{b−α+1} with r = F t^α/α; at infinity the same with t = 1/|ζ|.
        let (ln_b, ln_f) = if j < arcs.n - 1 {
            (self.basis.coefficient(&self.field, j).ln_norm(), self.map.ln_leading(j))
        } else {
            (self.basis.coefficient_at_infinity(&self.field).ln_norm(), self.map.ln_scale())
        };
        if ln_b == f64::NEG_INFINITY {
            return (kind, exponent, 0.0);
        }
        (kind, exponent, (ln_b - ln_f + exponent * (alpha.ln() - ln_f)).exp())
    }
}

impl Solution {
    /// Solves a section.
    ///
    /// # Errors
    /// [`SolveError`] if the map or the field cannot be found.
    pub fn solve(section: Section, options: &SolveOptions) -> Result<Solution, SolveError> {
        let target = (options.tolerance * 1e-2).clamp(1e-14, 1e-4);
        let first_options = MapOptions {
            tolerance: target,
            warm_start: options.warm_start.clone(),
            observer: options.observer.clone(),
            ..MapOptions::default()
        };
        let first = Half::solve(&section, &first_options, FIELD_NODES[0])?;
        let second = if options.check {
            let other = MapOptions {
                infinity_rank: 1,
                split: 2.7,
                nodes: SECOND_NODES,
                disturbance: 4.0,
                tolerance: target,
                ..MapOptions::default()
            };
            Some(Half::solve(&section, &other, FIELD_NODES[1])?)
        } else {
            None
        };
        let (low, high) = first.map.line().spread();
        let evidence = Evidence {
            sides: section.outline().n(),
            residual: first.map.residual(RESIDUAL_NODES)?,
            rounding: side_rounding(&section),
            ln_spread: high - low,
            checked: second.is_some(),
        };
        let mut solution = Solution {
            section,
            first,
            second,
            evidence,
            matrix: Matrix { values: Vec::new(), error: 0.0 },
            shape_factor: None,
            relative_error: 0.0,
        };
        let difference = solution.fill_matrix()?;
        solution.fill_shape_factor(difference)?;
        Ok(solution)
    }

    /// Relative difference of the two matrices.
    fn fill_matrix(&mut self) -> Result<f64, FieldError> {
        let values = self.first.matrix(&self.section)?;
        let finite = |m: &Vec<Vec<f64>>| {
            m.iter().flatten().copied().filter(|v| v.is_finite()).fold(0.0_f64, |a, v| a.max(v.abs()))
        };
        let scale = finite(&values);
        let difference = match &self.second {
            Some(second) => {
                let other = second.matrix(&self.section)?;
                let pairs = values.iter().flatten().zip(other.iter().flatten());
                let worst = pairs
                    .filter(|(a, b)| a.is_finite() && b.is_finite())
                    .fold(0.0_f64, |m, (a, b)| m.max((a - b).abs()));
                if scale > 0.0 { worst / scale } else { 0.0 }
            }
            None => 0.0,
        };
        let relative = self.evidence.relative(difference);
        self.matrix = Matrix { values, error: relative * scale };
        self.relative_error = relative;
        Ok(difference)
    }

    fn fill_shape_factor(&mut self, matrix_difference: f64) -> Result<(), FieldError> {
        let Some((_, high)) = self.section.two_levels() else { return Ok(()) };
        let is_high = |g: usize| self.section.level_of_group(g).total_cmp(&high).is_eq();
        let groups = self.section.n_groups();
        let from_matrix: f64 = (0..groups)
            .filter(|&r| is_high(r))
            .flat_map(|r| (0..groups).filter(|&c| is_high(c)).map(move |c| (r, c)))
            .map(|(r, c)| self.matrix.values[r][c])
            .sum();
        let touching = (0..groups)
            .any(|r| (0..groups).any(|c| is_high(r) != is_high(c) && !self.matrix.values[r][c].is_finite()));
        if touching {
            self.shape_factor = Some(Bounded::new(f64::INFINITY, 0.0));
            return Ok(());
        }
        // Two arcs: the mean on the first map against the conjugate's quadrature on the second.
        let (value, difference) = match self.first.cross_ratio() {
            Some((ln_lambda, ln_rest)) => {
                let value = conductance_of_cross_ratio(ln_lambda, ln_rest);
                let own = (from_matrix / value - 1.0).abs();
                let other = match &self.second {
                    Some(second) => second
                        .conjugate_conductance(FIELD_NODES[1])?
                        .map_or(0.0, |conjugate| (value * conjugate - 1.0).abs()),
                    None => 0.0,
                };
                (value, own.max(other))
            }
            None => (from_matrix, matrix_difference),
        };
        let relative = self.evidence.relative(difference);
        self.shape_factor = Some(Bounded::new(value, relative * value));
        self.relative_error = self.relative_error.max(relative);
        Ok(())
    }

    /// The section solved.
    pub fn section(&self) -> &Section {
        &self.section
    }

    /// The map.
    pub fn map(&self) -> &HalfPlaneMap {
        &self.first.map
    }

    /// Largest `|ln |C| I_k − ln side_k|`, by another quadrature rule than the solution's.
    pub fn residual(&self) -> f64 {
        self.evidence.residual
    }

    /// Relative bound for the headline numbers: shape factor, matrix, fluxes.
    pub fn relative_error(&self) -> f64 {
        self.relative_error
    }

    /// `|G·G' − 1|`: conductance by the mean on the first map times the conjugate's by quadrature on the second map;
    /// `None` without a second map or with other than two held arcs.
    pub fn reciprocity(&self) -> Option<f64> {
        let (ln_lambda, ln_rest) = self.first.cross_ratio()?;
        let conjugate = self.second.as_ref()?.conjugate_conductance(FIELD_NODES[1]).ok()??;
        Some((conductance_of_cross_ratio(ln_lambda, ln_rest) * conjugate - 1.0).abs())
    }

    /// Flux / (k · difference) between the two levels, dimensionless; `None` unless there are exactly two levels;
    /// infinite if they touch.
    pub fn shape_factor(&self) -> Option<Bounded> {
        self.shape_factor
    }

    /// The conductance matrix between groups.
    pub fn matrix(&self) -> &Matrix {
        &self.matrix
    }

    /// Flux into the section through a whole side (walking index), for unit conductivity; zero on insulated sides.
    pub fn side_flux(&self, side: usize) -> Bounded {
        if self.section.electrode_of_side(side).is_none() {
            return Bounded::new(0.0, 0.0);
        }
        let of = |half: &Half| half.basis.along_side(&half.field, half.map.line_index_of(side)).im;
        let value = of(&self.first);
        Bounded::new(value, self.flux_error(value, self.second.as_ref().map(of)))
    }

    /// Flux into the section through all sides of an electrode.
    pub fn electrode_flux(&self, electrode: usize) -> Bounded {
        let of = |half: &Half| half.flux_through(&half.field, |e| e == electrode);
        let value = of(&self.first);
        Bounded::new(value, self.flux_error(value, self.second.as_ref().map(of)))
    }

    fn flux_error(&self, value: f64, other: Option<f64>) -> f64 {
        let difference = other.map_or(0.0, |o| if o.is_finite() { (o - value).abs() } else { 0.0 });
        // The matrix' error is for unit levels.
        4.0 * difference
            + self.evidence.floor() * value.abs()
            + if self.evidence.checked { 0.0 } else { self.matrix.error * self.section.range() }
    }

    /// Flux into the section through the part of a side between two places, `from ≤ to` in walking order, as distances
    /// from its start (on a side from infinity: from its finite end, not positive; `±∞` is its end at infinity).
    ///
    /// # Errors
    /// [`ProbeError::NoSuchPlace`] if a distance is not on the side.
    pub fn part_flux(&self, side: usize, from: f64, to: f64) -> Result<Bounded, ProbeError> {
        if self.section.electrode_of_side(side).is_none() {
            return Ok(Bounded::new(0.0, 0.0));
        }
        let outline = self.section.outline();
        let (first, last) = outline.side_range(side);
        for s in [from, to] {
            if !(s >= first && s <= last) {
                return Err(ProbeError::NoSuchPlace { side, s });
            }
        }
        let at = |s: f64, end: f64| s.total_cmp(&end).is_eq();
        let of = |half: &Half| -> Result<f64, ProbeError> {
            let whole = || half.basis.along_side(&half.field, half.map.line_index_of(side)).im;
            let between = |from: f64, to: f64| -> Result<f64, ProbeError> {
                let place = |s: f64| half.map.on_side(side, s).ok_or(ProbeError::NoSuchPlace { side, s });
                Ok(half.basis.between(&half.field, place(from)?, place(to)?).im)
            };
            // A part that ends at infinity, or in the vertex that the map sends there, is the whole less the rest.
            match (at(from, first), at(to, last)) {
                (true, true) => Ok(whole()),
                (true, _) if half.map.on_side(side, first).is_none() => Ok(whole() - between(to, last)?),
                (_, true) if half.map.on_side(side, last).is_none() => Ok(whole() - between(first, from)?),
                _ => between(from, to),
            }
        };
        let value = of(&self.first)?;
        let other = match &self.second {
            Some(second) => Some(of(second)?),
            None => None,
        };
        Ok(Bounded::new(value, self.flux_error(value, other)))
    }

    /// Potential, stream function and gradient at a point of the closed section.
    ///
    /// # Errors
    /// [`ProbeError`] if the point is not finite or not in the section.
    pub fn probe(&self, z: Point) -> Result<Probe, ProbeError> {
        self.many(&[z]).pop().unwrap_or(Err(ProbeError::NotFinite { x: z.re, y: z.im }))
    }

    /// The same at many points, in parallel; results in the order of the points, the same for any number of threads.
    pub fn probe_many(&self, points: &[Point]) -> Vec<Result<Probe, ProbeError>> {
        self.many(points)
    }

    fn many(&self, points: &[Point]) -> Vec<Result<Probe, ProbeError>> {
        let first = self.first.map.inverse_many(points);
        let second = self.second.as_ref().map(|half| half.map.inverse_many(points));
        (0..points.len())
            .into_par_iter()
            .with_min_len(256)
            .map(|i| {
                let z = points[i];
                if !(z.re.is_finite() && z.im.is_finite()) {
                    return Err(ProbeError::NotFinite { x: z.re, y: z.im });
                }
                match &first[i] {
                    Err(InverseError::AtInfinity { .. }) => {
                        let nearest = self.section.outline().nearest_boundary(z);
                        self.probe_on_side(nearest.side, nearest.s)
                    }
                    Err(e) => Err(e.clone().into()),
                    Ok(p) => {
                        let other = second.as_ref().and_then(|s| s[i].as_ref().ok());
                        Ok(self.assemble(z, *p, other.copied()))
                    }
                }
            })
            .collect()
    }

    /// The same at a distance along a side (walking index); tells the two faces of a wall apart.
    ///
    /// # Errors
    /// [`ProbeError::NoSuchPlace`] if there is no such side or place.
    pub fn probe_on_side(&self, side: usize, s: f64) -> Result<Probe, ProbeError> {
        let outline = self.section.outline();
        let (first, last) = if side < outline.n() { outline.side_range(side) } else { (0.0, -1.0) };
        let slack = 4.0 * f64::EPSILON * outline.size();
        if !(s.is_finite() && s >= first - slack && s <= last + slack) {
            return Err(ProbeError::NoSuchPlace { side, s });
        }
        let s = s.clamp(first, last);
        let z = outline.place(side, s);
        let of = |half: &Half| {
            let at = half.map.on_side(side, s)?;
            Some(Preimage { at, miss: 0.0, on_side: Some((side, s)), clearance: 0.0 })
        };
        match of(&self.first) {
            Some(p) => Ok(self.assemble(z, p, self.second.as_ref().and_then(of))),
            None if outline.point(self.first.map.at_infinity()) == Some(z) => {
                Ok(self.at_infinity(z, side, s))
            }
            None => Err(ProbeError::NoSuchPlace { side, s }),
        }
    }

    fn assemble(&self, z: Point, p: Preimage, other: Option<Preimage>) -> Probe {
        let (side, s) = p.on_side.unzip();
        let range = self.section.range();
        let w = self.first.potential(p.at);
        let v = match (&self.second, other) {
            (Some(half), Some(q)) => half.potential(q.at),
            _ => w,
        };
        let vertex = p.on_side.and_then(|(k, s)| self.vertex_at(k, s));
        let (gradient, slope) = self.gradient_at(p, other, vertex);
        let floor = self.evidence.relative(0.0) * range;
        // At a needle's tip the slope may be beyond all numbers; then nothing better than the range is promised.
        let moved = slope * (p.miss + 2.0 * f64::EPSILON * z.norm());
        let moved = if moved.is_finite() { moved } else { range };
        let level = side.and_then(|k| self.section.level_of_side(k));
        let potential = match level {
            // On a held side the level is the datum itself.
            Some(level) => Bounded::new(level, 0.0),
            None => Bounded::new(w.re, 4.0 * (w.re - v.re).abs() + floor + moved),
        };
        let is_jump = vertex.is_some_and(|k| self.first.corner(k).0 == CornerKind::Jump);
        let stream = if is_jump {
            Bounded::new(f64::INFINITY, 0.0)
        } else {
            let scale = self.matrix_scale() * range;
            let flow_floor = self.evidence.relative(0.0) * scale.max(w.im.abs());
            Bounded::new(w.im, 4.0 * (w.im - v.im).abs() + flow_floor + moved)
        };
        Probe { at: z, side, s, potential, stream, gradient }
    }

    fn matrix_scale(&self) -> f64 {
        self.matrix.values.iter().flatten().filter(|v| v.is_finite()).fold(0.0, |a: f64, v| a.max(v.abs()))
    }

    /// The vertex at a place of a side, if it is one.
    fn vertex_at(&self, side: usize, s: f64) -> Option<usize> {
        let outline = self.section.outline();
        let (first, last) = outline.side_range(side);
        let close = 4.0 * f64::EPSILON * outline.size();
        if (s - first).abs() <= close {
            Some(side)
        } else if (last - s).abs() <= close {
            Some((side + 1) % outline.n())
        } else {
            None
        }
    }

    /// The gradient and its length as far as it matters for the effect of a displaced point.
    fn gradient_at(&self, p: Preimage, other: Option<Preimage>, vertex: Option<usize>) -> (Gradient, f64) {
        if let Some(vertex) = vertex {
            let corner = self.corner(vertex);
            if corner.is_singular() {
                return (Gradient::Infinite, 0.0);
            }
            if !corner.is_regular() {
                return (Gradient::Finite { components: [0.0, 0.0], error: 0.0 }, 0.0);
            }
            return self.gradient_beside(&corner);
        }
        let g = self.first.gradient(p.at);
        let h = match (&self.second, other) {
            (Some(half), Some(q)) => half.gradient(q.at),
            _ => g,
        };
        let error = 4.0 * (g - h).norm() + self.evidence.relative(0.0) * g.norm();
        (Gradient::Finite { components: [g.re, g.im], error }, g.norm())
    }

    /// At a vertex with a finite gradient: just inside, the length from the corner coefficient.
    fn gradient_beside(&self, corner: &Corner) -> (Gradient, f64) {
        let vertex = corner.vertex;
        let outline = self.section.outline();
        // The direction from a place near the vertex on the leaving side; the gradient is continuous there.
        let n = outline.n();
        let tiny = 1e-7 * outline.size();
        let small = |k: usize| outline.side_length(k).map_or(tiny, |l| 1e-7 * l);
        let near = self.first.map.on_side(vertex, small(vertex)).or_else(|| {
            let before = (vertex + n - 1) % n;
            self.first.map.on_side(before, outline.side_range(before).1 - small(before))
        });
        let direction = near.map_or(Complex64::new(0.0, 0.0), |p| {
            let g = self.first.gradient(p);
            g / g.norm().max(f64::MIN_POSITIVE)
        });
        // On a side the gradient is normal (held) or tangential (insulated): exact directions.
        let along = outline.side_direction(vertex);
        let exact =
            if self.section.electrode_of_side(vertex).is_some() { along * Complex64::i() } else { along };
        let sign = if (direction * exact.conj()).re < 0.0 { -1.0 } else { 1.0 };
        let g = exact * (sign * corner.coefficient.value);
        (Gradient::Finite { components: [g.re, g.im], error: corner.coefficient.error }, g.norm())
    }

    /// The answer at the vertex whose prevertex is infinity.
    fn at_infinity(&self, z: Point, side: usize, s: f64) -> Probe {
        let n = self.section.outline().n();
        let vertex = self.first.map.at_infinity();
        let last = self.first.field.at_prevertex(&self.first.basis, n - 2)
            + self.first.basis.along_side(&self.first.field, n - 2);
        let held = self.section.level_of_side(side);
        let floor = self.evidence.relative(0.0) * self.section.range();
        let corner = self.corner(vertex);
        let gradient = if corner.is_singular() {
            Gradient::Infinite
        } else if corner.is_regular() {
            self.gradient_beside(&corner).0
        } else {
            Gradient::Finite { components: [0.0, 0.0], error: 0.0 }
        };
        let stream = last.im - self.first.stream_zero;
        Probe {
            at: z,
            side: Some(side),
            s: Some(s),
            potential: held.map_or(Bounded::new(last.re, 4.0 * floor), |v| Bounded::new(v, 0.0)),
            stream: Bounded::new(
                stream,
                4.0 * self.evidence.relative(0.0) * self.matrix_scale().max(stream.abs()),
            ),
            gradient,
        }
    }

    /// The leading singularity of the gradient at a vertex (walking index); of the kind [`CornerKind::AtInfinity`], and
    /// without a coefficient, at a vertex at infinity.
    pub fn corner(&self, vertex: usize) -> Corner {
        let (kind, exponent, value) = self.first.corner(vertex);
        let other = self.second.as_ref().map_or(value, |half| half.corner(vertex).2);
        let error =
            4.0 * (value - other).abs() + self.evidence.relative(0.0) * value * (1.0 + exponent.abs());
        Corner {
            vertex,
            alpha: self.section.outline().alpha()[vertex],
            kind,
            exponent,
            coefficient: Bounded::new(value, error),
        }
    }

    /// `W = φ + iψ` at a point of the half-plane, for drawing.
    pub fn complex_potential(&self, p: HalfPlanePoint) -> Complex64 {
        self.first.potential(p)
    }

    /// `dW/d ln(offset)` at a point of the half-plane, for tracing lines.
    pub fn log_potential_derivative(&self, p: HalfPlanePoint) -> Complex64 {
        let unit = self.first.map.product().ln_unit(p.anchor);
        self.first
            .basis
            .derivative(&self.first.field, p)
            .times(unit + p.ln_offset.re, Complex64::from_polar(1.0, p.ln_offset.im))
            .value()
    }
}

fn side_rounding(section: &Section) -> f64 {
    let outline = section.outline();
    (0..outline.n())
        .filter_map(|k| {
            let (a, b) = (outline.point(k)?, outline.point(k + 1)?);
            Some(f64::EPSILON * (a.norm() + b.norm()) / (b - a).norm())
        })
        .fold(0.0, f64::max)
}
