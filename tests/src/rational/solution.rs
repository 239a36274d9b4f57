//! What a solved problem answers: potentials, gradients, fluxes, conductances, and bounds on their errors.

use num_complex::Complex64;
use rayon::prelude::*;

use super::basis::Basis;
use super::geometry::{LocalPoint, Polygon};
use super::sampling::Sample;
use super::{Electrode, RationalProblem, SideData};

/// The misfit is seen on two points between neighbouring samples; this covers what lies between those.
const CHECK_FACTOR: f64 = 1.5;

/// Rounding in evaluating the trial functions, which the misfit may not show.
const ROUNDING: f64 = 128.0 * f64::EPSILON;

/// A value with a bound on its error.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Bounded {
    /// The value.
    pub value: f64,
    /// Bound on the error.
    pub error: f64,
}

/// Largest violation of the boundary conditions, on points between the samples.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Misfit {
    /// Of `φ` on held sides.
    pub held: f64,
    /// Of `ψ` from its constant on insulated runs.
    pub insulated: f64,
    /// Integral of `|a φ + b ∂φ/∂n − c|` over films and sides with a given inflow.
    pub film: f64,
}

/// A jump of the held value at a vertex, carried by a logarithm with a known coefficient.
#[derive(Debug, Clone, Copy)]
pub(super) struct Jump {
    corner: usize,
    /// Jump divided by the interior angle.
    rate: f64,
    /// Offset of the far end of the cut.
    end: Complex64,
}

/// The vertices where two different held values meet.
pub(super) fn jumps(polygon: &Polygon, sides: &[SideData]) -> Vec<Jump> {
    let n = polygon.len();
    (0..n)
        .filter_map(|k| {
            let z = polygon.vertex(k);
            let (before, after) = (sides[(k + n - 1) % n].held_value(z)?, sides[k].held_value(z)?);
            let size = before.abs().max(after.abs());
            if (before - after).abs() <= 8.0 * f64::EPSILON * size {
                return None;
            }
            let direction = polygon.exterior_bisector(k);
            let end = direction * polygon.clear_length(k, direction);
            Some(Jump { corner: k, rate: (before - after) / polygon.interior_angle(k), end })
        })
        .collect()
}

/// Value and derivative of `−i·rate·ln((z − v)/(z − p))`, whose cut is the segment from the vertex `v` to `p`
/// outside. At the vertex itself the logarithm is left out, which gives `φ` there the mean of the two values.
pub(super) fn jump_part(polygon: &Polygon, jumps: &[Jump], point: LocalPoint) -> (Complex64, Complex64) {
    let mut value = Complex64::default();
    let mut slope = Complex64::default();
    for jump in jumps {
        let from_vertex =
            polygon.difference(point, LocalPoint { corner: jump.corner, offset: Complex64::default() });
        let from_end = polygon.difference(point, LocalPoint { corner: jump.corner, offset: jump.end });
        if from_vertex.norm_sqr() > 0.0 {
            let factor = Complex64::new(0.0, -jump.rate);
            value += factor * (from_vertex / from_end).ln();
            slope += factor * (from_vertex.inv() - from_end.inv());
        }
    }
    (value, slope)
}

/// One complex potential.
#[derive(Debug, Clone)]
pub(super) struct Field {
    pub(super) coefficients: Vec<Complex64>,
    /// ψ on each insulated run.
    pub(super) levels: Vec<f64>,
    pub(super) jumps: Vec<Jump>,
    /// Point that a Green's function belongs to; its `−ln(z − z₀)/2π` comes on top of the trial functions.
    pub(super) source: Option<Complex64>,
}

/// Value and derivative of `−ln(z − z₀)/2π`.
pub(super) fn source_part(z: Complex64, source: Complex64) -> (Complex64, Complex64) {
    let rate = -0.5 * std::f64::consts::FRAC_1_PI;
    let offset = z - source;
    (rate * offset.ln(), rate * offset.inv())
}

/// What one boundary point adds: misfits of the fields with data, and their products with the dual fields.
struct Contribution {
    misfits: Vec<Misfit>,
    /// Entry `[field][dual]`.
    products: Vec<Vec<f64>>,
}

/// A solved problem.
#[derive(Debug, Clone)]
pub struct RationalSolution {
    problem: RationalProblem,
    polygon: Polygon,
    basis: Basis,
    /// The data first, then each electrode alone at one, then the Green's functions of the probes.
    fields: Vec<Field>,
    probes: Vec<Complex64>,
    /// Of all fields but the Green's functions.
    misfits: Vec<Misfit>,
    /// Entry `[field][dual]`: the integral of the misfit of a field against the dual field `1 + dual`.
    products: Vec<Vec<f64>>,
    electrodes: Vec<Electrode>,
    /// Insulated run of each side.
    run_of: Vec<Option<usize>>,
    runs: usize,
    smallest: f64,
}

impl RationalSolution {
    #[expect(clippy::too_many_arguments, reason = "called once, by the solver that has made all the parts")]
    pub(super) fn new(
        problem: RationalProblem,
        polygon: Polygon,
        basis: Basis,
        fields: Vec<Field>,
        electrodes: Vec<Electrode>,
        run_of: Vec<Option<usize>>,
        samples: &[Vec<Sample>],
        checks: &[Vec<Sample>],
    ) -> RationalSolution {
        let runs = fields.first().map_or(0, |field| field.levels.len());
        let smallest = samples.iter().flatten().map(|sample| sample.from_end).fold(f64::MAX, f64::min);
        let probes: Vec<Complex64> = fields.iter().filter_map(|field| field.source).collect();
        let with_data = fields.len() - probes.len();
        let duals = fields.len() - 1;
        let mut solution = RationalSolution {
            misfits: vec![Misfit::default(); with_data],
            products: vec![vec![0.0; duals]; with_data],
            problem,
            polygon,
            basis,
            fields,
            probes,
            electrodes,
            run_of,
            runs,
            smallest,
        };
        let points: Vec<Sample> = checks.iter().flatten().copied().collect();
        let found: Vec<Contribution> = points.par_iter().map(|point| solution.contribution(point)).collect();
        for contribution in found {
            for (total, misfit) in solution.misfits.iter_mut().zip(contribution.misfits) {
                total.held = total.held.max(CHECK_FACTOR * misfit.held);
                total.insulated = total.insulated.max(CHECK_FACTOR * misfit.insulated);
                total.film += CHECK_FACTOR * misfit.film;
            }
            for (totals, products) in solution.products.iter_mut().zip(contribution.products) {
                totals.iter_mut().zip(products).for_each(|(total, product)| *total += CHECK_FACTOR * product);
            }
        }
        solution
    }

    /// Misfit of every field at one boundary point, and its part in the error integrals.
    fn contribution(&self, sample: &Sample) -> Contribution {
        let (values, slopes) = self.basis.eval(&self.polygon, sample.point);
        let side = &self.problem.sides[sample.side];
        let z = self.polygon.position(sample.point);
        let normal = self.polygon.normal(sample.side);
        let here: Vec<(Complex64, Complex64)> =
            (0..self.fields.len()).map(|i| self.combine(i, &values, &slopes, sample.point)).collect();
        let mut misfits = vec![Misfit::default(); self.misfits.len()];
        let mut products = vec![vec![0.0; self.fields.len() - 1]; self.misfits.len()];
        for (i, (misfit, products)) in misfits.iter_mut().zip(&mut products).enumerate() {
            let (f, slope) = here[i];
            let duals = products.iter_mut().zip(&here[1..]);
            if let Some(value) = side.held_value(z) {
                let alone = |i: usize| self.electrodes[i - 1].sides.contains(&sample.side);
                let wanted = if i == 0 { value } else { f64::from(alone(i)) };
                misfit.held = (f.re - wanted).abs();
                duals.for_each(|(p, w)| *p = misfit.held * (w.1 * normal).re.abs() * sample.share);
            } else if let Some((a, b, c)) = side.mixed_row() {
                let wanted = if i == 0 { c } else { 0.0 };
                misfit.film = (a * f.re + b * (slope * normal).re - wanted).abs() * sample.share;
                duals.for_each(|(p, w)| *p = misfit.film * w.0.re.abs());
            } else if let Some(run) = self.run_of[sample.side] {
                misfit.insulated = (f.im - self.fields[i].levels[run]).abs();
                // Along a side the tangent is i times the outward normal.
                duals.for_each(|(p, w)| *p = misfit.insulated * (w.1 * normal).im.abs() * sample.share);
            }
        }
        Contribution { misfits, products }
    }

    fn combine(
        &self,
        field: usize,
        values: &[Complex64],
        slopes: &[Complex64],
        point: LocalPoint,
    ) -> (Complex64, Complex64) {
        let field = &self.fields[field];
        let (mut f, mut slope) = jump_part(&self.polygon, &field.jumps, point);
        for ((c, value), derivative) in field.coefficients.iter().zip(values).zip(slopes) {
            f += c * value;
            slope += c * derivative;
        }
        if let Some(source) = field.source {
            let (part, part_slope) = source_part(self.polygon.position(point), source);
            f += part;
            slope += part_slope;
        }
        (f, slope)
    }

    fn complex_potential(&self, field: usize, point: LocalPoint) -> (Complex64, Complex64) {
        let (values, slopes) = self.basis.eval(&self.polygon, point);
        self.combine(field, &values, &slopes, point)
    }

    /// Potential at a point of the section or its boundary.
    pub fn potential(&self, z: Complex64) -> f64 {
        self.complex_potential(0, self.polygon.local(z)).0.re
    }

    /// Stream function at a point; `ψ` grows along the boundary by the flux that enters.
    pub fn stream_function(&self, z: Complex64) -> f64 {
        self.complex_potential(0, self.polygon.local(z)).0.im
    }

    /// `∂φ/∂x + i ∂φ/∂y` at a point inside.
    pub fn gradient(&self, z: Complex64) -> Complex64 {
        self.complex_potential(0, self.polygon.local(z)).1.conj()
    }

    /// Misfit of the boundary conditions.
    pub fn misfit(&self) -> Misfit {
        self.misfits[0]
    }

    /// The electrodes, in the order of the conductance matrix.
    pub fn electrodes(&self) -> &[Electrode] {
        &self.electrodes
    }

    /// ψ at a vertex: the level of an insulated run that ends there, else the value of the trial function.
    fn stream_at_vertex(&self, field: usize, k: usize) -> f64 {
        let n = self.polygon.len();
        match (self.run_of[k % n], self.run_of[(k + n - 1) % n]) {
            (Some(run), _) | (None, Some(run)) => self.fields[field].levels[run],
            (None, None) => {
                let vertex = LocalPoint { corner: k % n, offset: Complex64::default() };
                self.complex_potential(field, vertex).0.im
            }
        }
    }

    /// Bound on the variation of a unit potential along the insulated sides.
    fn variation(&self) -> f64 {
        let only_electrodes =
            self.problem.sides.iter().all(|side| matches!(side, SideData::Held(_) | SideData::Insulated));
        let parts = if only_electrodes { self.runs.saturating_sub(1) } else { self.runs };
        2.0 * parts as f64
    }

    /// Flux into the section through electrode `i` of field `field`, without its error.
    fn electrode_flux_of(&self, field: usize, i: usize) -> f64 {
        let sides = &self.electrodes[i].sides;
        let (Some(&first), Some(&last)) = (sides.first(), sides.last()) else { return 0.0 };
        if sides.len() == self.polygon.len() {
            return 0.0;
        }
        self.stream_at_vertex(field, last + 1) - self.stream_at_vertex(field, first)
    }

    fn flux_error(&self, field: usize, electrode: usize) -> f64 {
        let scale = self.electrode_flux_of(1 + electrode, electrode).abs();
        self.products[field][electrode] + ROUNDING * scale * self.size_of(field)
    }

    /// Size of the potential of a field with data.
    fn size_of(&self, field: usize) -> f64 {
        if field > 0 {
            return 1.0;
        }
        let size = |(k, side): (usize, &SideData)| match side {
            SideData::Held(value) => value.abs(),
            SideData::HeldAlong(values) => values.at(self.polygon.vertex(k)).abs(),
            SideData::Film { ambient, .. } => ambient.abs(),
            SideData::Inflow(flux) => flux.abs() * self.polygon.diameter(),
            SideData::Insulated => 0.0,
        };
        self.problem.sides.iter().enumerate().map(size).fold(0.0, f64::max)
    }

    /// Factor from the misfit of φ to that of ψ at a vertex between held sides: the conjugate of a function
    /// bounded by `e` and smooth below the smallest sample distance `δ` is at most `(2/π) e ln(L/δ)` and a bit.
    fn logarithm(&self) -> f64 {
        2.0 * (1.0 + std::f64::consts::FRAC_2_PI * (self.polygon.diameter() / self.smallest).ln())
    }

    /// Whether no electrode was solved for alone: there is none, or some touch.
    fn without_units(&self) -> bool {
        self.fields.len() == 1 + self.probes.len()
    }

    /// Potential at probe `i` of [`RationalProblem::solve_with_probes`], with the bound from its Green's function.
    pub fn probe(&self, i: usize) -> Option<Bounded> {
        let &z = self.probes.get(i)?;
        let first = self.fields.len() - self.probes.len() - 1;
        let error = self.products[0][first + i] + ROUNDING * self.size_of(0);
        Some(Bounded { value: self.potential(z), error })
    }

    /// Flux into the section through electrode `i`; `None` where different held values touch, since it is infinite.
    pub fn electrode_flux(&self, i: usize) -> Option<Bounded> {
        if self.without_units() || i >= self.electrodes.len() {
            return None;
        }
        Some(Bounded { value: self.electrode_flux_of(0, i), error: self.flux_error(0, i) })
    }

    /// Flux into the section through side `k`; `None` at an end where different held values touch (infinite).
    pub fn side_flux(&self, k: usize) -> Option<Bounded> {
        let n = self.polygon.len();
        let (start, end) = (k % n, (k + 1) % n);
        if self.fields[0].jumps.iter().any(|jump| jump.corner == start || jump.corner == end) {
            return None;
        }
        if self.run_of[start].is_some() {
            return Some(Bounded { value: 0.0, error: 0.0 });
        }
        let alone = self.electrodes.iter().position(|electrode| electrode.sides == [start]);
        if let Some(flux) = alone.and_then(|i| self.electrode_flux(i)) {
            return Some(flux);
        }
        let value = self.stream_at_vertex(0, end) - self.stream_at_vertex(0, start);
        let misfit = self.misfits[0];
        let error = 2.0 * self.logarithm() * misfit.held
            + (self.variation() + 2.0) * misfit.insulated
            + 2.0 * misfit.film;
        Some(Bounded { value, error })
    }

    /// Conductance matrix: entry `(i, j)` is the flux into the section at electrode `i` with electrode `j` at one and
    /// everything else at zero. `None` where electrodes touch.
    pub fn conductance_matrix(&self) -> Option<Vec<Vec<Bounded>>> {
        if self.without_units() {
            return None;
        }
        let count = self.electrodes.len();
        let entry = |i: usize, j: usize| Bounded {
            value: self.electrode_flux_of(1 + j, i),
            error: self.flux_error(1 + j, i),
        };
        Some((0..count).map(|i| (0..count).map(|j| entry(i, j)).collect()).collect())
    }

    /// Conductance between the two electrodes of a section with exactly two.
    pub fn conductance(&self) -> Option<Bounded> {
        if self.electrodes.len() == 2 { Some(self.conductance_matrix()?[0][0]) } else { None }
    }

    /// Number of unknowns of the least-squares problem.
    pub fn unknowns(&self) -> usize {
        2 * self.basis.len() - 1 + self.runs
    }

    /// Bound on the error of [`potential`](Self::potential) farther than about a twentieth of the section's local
    /// width from insulated sides and films (nearer, the last two terms grow like the logarithm of the distance).
    ///
    /// With held sides only this is the maximum principle; otherwise the size of the Green's function is estimated
    /// from the conductances: `1/(4G)` is its largest value in a long channel, and `1` covers the logarithm.
    pub fn potential_error_bound(&self) -> f64 {
        let misfit = self.misfits[0];
        let outline = self.polygon.perimeter().powi(2) / (16.0 * self.polygon.area());
        let film_conductance: f64 = self
            .problem
            .sides
            .iter()
            .enumerate()
            .filter_map(|(k, side)| match side {
                SideData::Film { coefficient, .. } => Some(coefficient * self.polygon.side(k).norm()),
                _ => None,
            })
            .sum();
        let film_resistance = if film_conductance > 0.0 { 1.0 / film_conductance } else { 0.0 };
        let resistance = match self.conductance_matrix() {
            Some(matrix) if matrix.len() > 1 => {
                let weakest = (0..matrix.len()).map(|i| matrix[i][i].value.abs()).fold(f64::MAX, f64::min);
                if matrix.len() == 2 { 0.25 / weakest } else { 1.0 / weakest }
            }
            _ => outline + film_resistance,
        };
        let green = 1.0 + resistance;
        misfit.held + 2.0 * self.runs as f64 * green * misfit.insulated + green * misfit.film
    }
}
