//! Rational least squares on a bounded polygon: an independent way to potentials, fluxes and conductances.
//!
//! The complex potential `f = φ + iψ` is sought as a sum of a polynomial, simple poles clustered exponentially
//! toward the corners outside the section, a few powers `((z − v)/(z − p))^s` of each corner `v` with their cut
//! outside, and simple poles beside the sides; the boundary conditions on clustered samples are met by least
//! squares. No conformal map is involved and nothing is shared with it. The powers take the leading terms off the
//! clusters, which can then be short; the poles beside the sides serve arms and slots, where polynomials fail.
//!
//! - A held side gives rows `Re f = value`.
//! - An insulated side gives rows `Im f = κ`, one unknown constant κ to a run of such sides. The flux through an
//!   electrode is a difference of two κ and needs no derivative.
//! - A film `∂φ/∂n + hφ = h·ambient` and a given inflow are the row `a φ + b ∂φ/∂n = c`, divided by
//!   `|a| + |b|/s` (`s` = distance to the nearer end), so that it stays of order one at a corner.
//!
//! Conventions: vertices counter-clockwise, side `k` leaves vertex `k`, conductivity one, `n` outward,
//! fluxes positive into the section, `side flux = ∫ ∂φ/∂n ds = ψ(end) − ψ(start)`.
//!
//! # Accuracy
//! The bounds come from the misfits on points between the samples: `e` of `φ` on held sides, `η` of `ψ` on insulated
//! ones, `ρ` of `∂φ/∂n + hφ` on films. Let `w` be the potential with one on electrode `i` and zero on all other
//! held sides, or the Green's function of a point. Green's identity, with the insulated sides integrated by parts,
//! gives the error of the flux of electrode `i`, or of the potential at the point, up to sign as
//!
//! ```text
//! ∫_insulated η dw + ∫_held e ∂w/∂n ds + ∫_films w ρ ds,
//! ```
//! and the sum of the three integrals with absolute values everywhere is the bound. `w` is solved for together
//! with the data, by the same factorisation; its own misfit enters at second order only. With held sides alone the
//! bound at a point is sharper than the maximum principle, `max|e|`, and never beyond it.
//!
//! # Source
//! Gopal and Trefethen, *Solving Laplace problems with corner singularities via rational functions*, SIAM J.
//! Numer. Anal. 57 (2019) 2074-2094. The powers and the poles beside the sides are additions made here.

mod basis;
mod corners;
mod geometry;
mod least_squares;
mod problem;
mod sampling;
mod solution;

use num_complex::Complex64;
use rayon::prelude::*;

use basis::{Basis, CornerPowers};
use geometry::{LocalPoint, Polygon};
use least_squares::Columns;
pub use problem::{BoundaryValues, Electrode, RationalError, RationalProblem, SideData};
use sampling::Sample;
use solution::Field;
pub use solution::{Bounded, Misfit, RationalSolution};

/// Numbers of poles and samples.
#[derive(Debug, Clone)]
pub struct RationalOptions {
    /// The clusters reach to `tolerance^(1/λ)` of their length at a corner where `φ ~ r^λ`.
    pub tolerance: f64,
    /// Poles in a cluster, as a share of what the trapezoidal rule would need for `tolerance`.
    pub pole_share: f64,
    /// Most poles in one cluster.
    pub max_poles: usize,
    /// Degree of the polynomial.
    pub degree: usize,
    /// Poles beside the sides, all together.
    pub side_poles: usize,
    /// Boundary samples for each pole on each of the two sides at its corner.
    pub samples_per_pole: usize,
    /// Corner powers `r^s` are used up to this exponent.
    pub power_limit: f64,
    /// Exponent that the poles provide for at films and varying data, where there are terms besides powers.
    pub film_exponent: f64,
    /// Trial functions that are dependent to this tolerance are left out.
    pub rank_tolerance: f64,
}

impl Default for RationalOptions {
    fn default() -> RationalOptions {
        RationalOptions {
            tolerance: 1e-14,
            pole_share: 0.9,
            max_poles: 90,
            degree: 50,
            side_poles: 100,
            samples_per_pole: 3,
            power_limit: 5.0,
            film_exponent: 1.0,
            rank_tolerance: 1e-15,
        }
    }
}

/// `arg(z − probe)` at the samples of insulated sides, continuous along each run; entry `[probe][sample]`.
fn turned_arguments(
    polygon: &Polygon,
    samples: &[Sample],
    runs: &[Vec<usize>],
    probes: &[Complex64],
) -> Vec<Vec<f64>> {
    let mut by_side: Vec<Vec<usize>> = vec![Vec::new(); polygon.len()];
    for (index, sample) in samples.iter().enumerate() {
        by_side[sample.side].push(index);
    }
    let turned = |probe: &Complex64| {
        let mut arguments = vec![0.0; samples.len()];
        for run in runs {
            let mut last: Option<(Complex64, f64)> = None;
            for &index in run.iter().flat_map(|&side| &by_side[side]) {
                let offset = polygon.position(samples[index].point) - probe;
                let argument = last.map_or(offset.arg(), |(before, turned)| turned + (offset / before).arg());
                arguments[index] = argument;
                last = Some((offset, argument));
            }
        }
        arguments
    };
    probes.iter().map(turned).collect()
}

impl RationalProblem {
    /// Solves the problem, and with the same factorisation that of each electrode alone at one.
    ///
    /// # Errors
    /// [`RationalError`] when the outline is not a simple counter-clockwise polygon, a datum is out of range, or
    /// nothing fixes the level.
    pub fn solve(&self, options: &RationalOptions) -> Result<RationalSolution, RationalError> {
        self.solve_with_probes(options, &[])
    }

    /// Solves the problem, and for each probe also its Green's function, which bounds the error there.
    ///
    /// # Errors
    /// As [`solve`](Self::solve), and [`RationalError::Probe`] for a probe that is not inside the section.
    pub fn solve_with_probes(
        &self,
        options: &RationalOptions,
        probes: &[Complex64],
    ) -> Result<RationalSolution, RationalError> {
        let polygon = self.validate()?;
        if let Some(index) = probes.iter().position(|&z| !polygon.contains(z) || polygon.distance(z) == 0.0) {
            return Err(RationalError::Probe { index, x: probes[index].re, y: probes[index].im });
        }
        let n = polygon.len();
        let clusters = corners::clusters(&polygon, &self.sides, options);
        let mut poles: Vec<(LocalPoint, f64)> = Vec::new();
        for cluster in &clusters {
            poles.extend(cluster.distances.iter().map(|&distance| {
                (LocalPoint { corner: cluster.corner, offset: cluster.direction * distance }, distance)
            }));
        }
        poles.extend(corners::beside_sides(&polygon, options.side_poles));
        let powers = clusters.iter().map(|cluster| CornerPowers {
            corner: cluster.corner,
            end: cluster.direction * cluster.length,
            exponents: cluster.exponents.clone(),
        });
        let powers: Vec<CornerPowers> = powers.collect();
        let places: Vec<LocalPoint> = poles.iter().map(|&(pole, _)| pole).collect();
        let widest = polygon.perimeter() / (4.0 * (options.degree.max(4) as f64));
        let samples_by_side = sampling::samples(&polygon, &clusters, &places, widest);
        let samples: Vec<Sample> = samples_by_side.iter().flatten().copied().collect();
        let points: Vec<Complex64> = samples.iter().map(|sample| polygon.position(sample.point)).collect();
        let shares: Vec<f64> = samples.iter().map(|sample| sample.share).collect();
        let basis = Basis::new(&points, &shares, options.degree, poles, powers);

        let runs = self.insulated_runs();
        let run_of: Vec<Option<usize>> =
            (0..n).map(|k| runs.iter().position(|run| run.contains(&k))).collect();
        let electrodes = self.electrodes();
        let jumps = solution::jumps(&polygon, &self.sides);
        let touching = self.electrodes_touch();

        let turned = turned_arguments(&polygon, &samples, &runs, probes);
        // Right-hand sides: the data, then each electrode alone. Electrodes that touch have no finite matrix.
        let units = if touching { 0 } else { electrodes.len() };
        let functions = basis.len();
        let unknowns = 2 * functions - 1 + runs.len();
        let rows: Vec<(Vec<f64>, Vec<f64>)> = samples
            .par_iter()
            .enumerate()
            .map(|(index, sample)| {
                let (values, slopes) = basis.eval(&polygon, sample.point);
                let z = polygon.position(sample.point);
                let (part, part_slope) = solution::jump_part(&polygon, &jumps, sample.point);
                let mut row = vec![0.0; unknowns];
                let mut right = vec![0.0; 1 + units + probes.len()];
                // The unknown coefficient c = x + iy multiplies g: Re(cg) = x Re g − y Im g, Im(cg) = x Im g + y Re g.
                // The imaginary part of the constant is left out: ψ is measured by the κ.
                let side = &self.sides[sample.side];
                if let Some(value) = side.held_value(z) {
                    for (j, g) in values.iter().enumerate() {
                        row[j] = g.re;
                        if j > 0 {
                            row[functions + j - 1] = -g.im;
                        }
                    }
                    right[0] = value - part.re;
                    let electrode = electrodes.iter().position(|e| e.sides.contains(&sample.side));
                    if let Some(i) = electrode.filter(|_| units > 0) {
                        right[1 + i] = 1.0;
                    }
                    for (i, &probe) in probes.iter().enumerate() {
                        right[1 + units + i] = -solution::source_part(z, probe).0.re;
                    }
                } else if let Some((a, b, c)) = side.mixed_row() {
                    let normal = polygon.normal(sample.side);
                    let weight = 1.0 / (a.abs() + b.abs() / sample.from_end);
                    for (j, (g, slope)) in values.iter().zip(&slopes).enumerate() {
                        let combined = (a * g, b * slope * normal);
                        row[j] = weight * (combined.0.re + combined.1.re);
                        if j > 0 {
                            row[functions + j - 1] = -weight * (combined.0.im + combined.1.im);
                        }
                    }
                    right[0] = weight * (c - a * part.re - b * (part_slope * normal).re);
                    for (i, &probe) in probes.iter().enumerate() {
                        let (source, rate) = solution::source_part(z, probe);
                        right[1 + units + i] = -weight * (a * source.re + b * (rate * normal).re);
                    }
                } else {
                    for (j, g) in values.iter().enumerate() {
                        row[j] = g.im;
                        if j > 0 {
                            row[functions + j - 1] = g.re;
                        }
                    }
                    if let Some(run) = run_of[sample.side] {
                        row[2 * functions - 1 + run] = -1.0;
                    }
                    right[0] = -part.im;
                    for i in 0..probes.len() {
                        right[1 + units + i] = 0.5 * std::f64::consts::FRAC_1_PI * turned[i][index];
                    }
                }
                (row, right)
            })
            .collect();

        let m = rows.len().max(unknowns);
        let mut matrix = Columns::zeros(m, unknowns);
        for j in 0..unknowns {
            matrix.column_mut(j).iter_mut().zip(&rows).for_each(|(entry, (row, _))| *entry = row[j]);
        }
        let mut right = Columns::zeros(m, 1 + units + probes.len());
        for j in 0..1 + units + probes.len() {
            right.column_mut(j).iter_mut().zip(&rows).for_each(|(entry, (_, values))| *entry = values[j]);
        }
        drop(rows);
        let fields: Vec<Field> = least_squares::solve(matrix, right, options.rank_tolerance)
            .into_iter()
            .enumerate()
            .map(|(i, x)| {
                let coefficients = (0..functions)
                    .map(|j| Complex64::new(x[j], if j > 0 { x[functions + j - 1] } else { 0.0 }))
                    .collect();
                let levels = x[2 * functions - 1..].to_vec();
                let jumps = if i == 0 { jumps.clone() } else { Vec::new() };
                let source = if i > units { Some(probes[i - 1 - units]) } else { None };
                Field { coefficients, levels, jumps, source }
            })
            .collect();
        let checks: Vec<Vec<Sample>> = samples_by_side
            .iter()
            .enumerate()
            .map(|(k, samples)| sampling::check_points(samples, polygon.side(k).norm()))
            .collect();
        Ok(RationalSolution::new(
            self.clone(),
            polygon,
            basis,
            fields,
            electrodes,
            run_of,
            &samples_by_side,
            &checks,
        ))
    }
}
