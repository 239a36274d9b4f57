//! The parameter problem: gaps whose map has sides of the given lengths.
//!
//! Unknowns are the log gaps `y` and `ln |C|`; the equations (see [`Equations`]) are those of all finite sides and of
//! all vertices at infinity. The system is overdetermined but consistent, with the one null direction of scaling the gaps.
//! Solved by Gauss–Newton steps with Levenberg–Marquardt damping on the normal equations: the residual vanishes at
//! the solution, so what the normal equations lose in digits they only lose in speed.

use super::equations::{Equations, Evaluation};
use super::gap_line::GapLine;
use argmin::core::observers::{Observe, ObserverMode};
use argmin::core::{
    Error, Executor, IterState, KV, Problem, Solver, State, TerminationReason, TerminationStatus,
};
use nalgebra::{Cholesky, DMatrix, DVector, Dyn};
use std::fmt;
use std::sync::Arc;

/// Largest change of a log gap in one step.
const MAX_STEP: f64 = 12.0;
/// Damping tried first, relative to the mean diagonal of the normal matrix.
const FIRST_DAMPING: f64 = 1e-10;
/// Damped retries within one iteration: each raises the damping tenfold, so fifteen reach pure descent.
const MAX_RETRIES: usize = 15;
/// Below this root mean square the old factorisation is used again while it still gains a factor ten a step.
const CHORD_BELOW: f64 = 1e-3;
/// Below this root mean square a step that gains less than half is rounding, not a failure.
const ROUNDING_BELOW: f64 = 1e-9;

/// Why an iteration ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum StopReason {
    /// The residual asked for was reached.
    ToleranceReached,
    /// The residual is as small as rounding lets it be.
    AtRounding,
    /// The bound on the number of iterations was reached first.
    IterationLimit,
    /// No damped step lowered the residual any more.
    NoDescent,
}

impl fmt::Display for StopReason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            StopReason::ToleranceReached => "tolerance reached",
            StopReason::AtRounding => "at rounding",
            StopReason::IterationLimit => "iteration limit",
            StopReason::NoDescent => "no descent",
        })
    }
}

/// Called after every iteration with its number and the root mean square residual.
#[derive(Clone)]
pub struct IterationObserver(Arc<dyn Fn(u64, f64) + Send + Sync>);

impl IterationObserver {
    /// Wraps a function of (iteration, root mean square residual).
    pub fn new(f: impl Fn(u64, f64) + Send + Sync + 'static) -> IterationObserver {
        IterationObserver(Arc::new(f))
    }
}

impl fmt::Debug for IterationObserver {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("IterationObserver")
    }
}

impl<I: State<Float = f64>> Observe<I> for IterationObserver {
    fn observe_iter(&mut self, state: &I, _kv: &KV) -> Result<(), Error> {
        (self.0)(state.get_iter(), state.get_cost());
        Ok(())
    }
}

/// When to stop, and who watches.
#[derive(Debug, Clone)]
pub(crate) struct FitOptions {
    pub(crate) target_rms: f64,
    pub(crate) max_iterations: u64,
    pub(crate) observer: Option<IterationObserver>,
}

/// The gaps found and how good they are.
#[derive(Debug, Clone)]
pub(crate) struct Fit {
    pub(crate) line: GapLine,
    /// `ln |C|`.
    pub(crate) ln_scale: f64,
    /// Root mean square residual.
    pub(crate) rms: f64,
    pub(crate) iterations: u64,
    pub(crate) stop: StopReason,
}

fn root_mean_square(r: &[f64]) -> f64 {
    (r.iter().map(|v| v * v).sum::<f64>() / r.len() as f64).sqrt()
}

/// The Jacobian at some point and the factor of its damped normal matrix.
pub(crate) struct NormalEquations {
    jacobian: DMatrix<f64>,
    normal: DMatrix<f64>,
    scale: f64,
}

impl NormalEquations {
    /// `null` is the direction in which nothing changes: scaling all gaps, with `C` taking it back.
    fn new(jacobian: DMatrix<f64>, null: &[f64]) -> NormalEquations {
        let mut normal = jacobian.transpose() * &jacobian;
        let n = normal.nrows();
        let scale = (normal.trace() / n as f64).max(1e-300);
        let null = DVector::from_column_slice(null);
        normal.ger(scale / null.norm_squared(), &null, &null, 1.0);
        NormalEquations { jacobian, normal, scale }
    }

    /// The factor for a relative damping; raised until it exists.
    fn factor(&self, damping: f64) -> Option<Cholesky<f64, Dyn>> {
        let mut damping = damping;
        for _ in 0..MAX_RETRIES {
            let mut damped = self.normal.clone();
            for i in 0..damped.nrows() {
                damped[(i, i)] += damping * self.scale;
            }
            if let Some(factor) = damped.cholesky() {
                return Some(factor);
            }
            damping = (damping * 10.0).max(1e-15);
        }
        None
    }

    fn step(&self, factor: &Cholesky<f64, Dyn>, residuals: &[f64]) -> Vec<f64> {
        let gradient = self.jacobian.tr_mul(&DVector::from_column_slice(residuals));
        factor.solve(&(-gradient)).as_slice().to_vec()
    }
}

/// Damped Gauss–Newton on the side lengths, with chord steps near the solution.
struct DampedGaussNewton {
    damping: f64,
    equations: Option<NormalEquations>,
    factor: Option<Cholesky<f64, Dyn>>,
    null: Vec<f64>,
    stop: Option<StopReason>,
}

impl DampedGaussNewton {
    fn normal_equations(&self, jacobian: Option<DMatrix<f64>>) -> Option<NormalEquations> {
        jacobian.map(|j| NormalEquations::new(j, &self.null))
    }
}

type LineState = IterState<Vec<f64>, (), (), (), Vec<f64>, f64>;

impl<'a> Solver<Equations<'a>, LineState> for DampedGaussNewton {
    fn name(&self) -> &str {
        "damped Gauss-Newton on log side lengths"
    }

    fn init(
        &mut self,
        problem: &mut Problem<Equations<'a>>,
        mut state: LineState,
    ) -> Result<(LineState, Option<KV>), Error> {
        let y = state.take_param().ok_or_else(|| Error::msg("no starting gaps"))?;
        let first: Evaluation = problem.problem("evaluations", |p| Ok(p.evaluate(&y, true)))?;
        self.equations = self.normal_equations(first.jacobian);
        let rms = root_mean_square(&first.residuals);
        Ok((state.param(y).cost(rms).residuals(first.residuals), None))
    }

    fn next_iter(
        &mut self,
        problem: &mut Problem<Equations<'a>>,
        mut state: LineState,
    ) -> Result<(LineState, Option<KV>), Error> {
        let y = state.take_param().ok_or_else(|| Error::msg("no gaps"))?;
        let residuals = state.take_residuals().ok_or_else(|| Error::msg("no residuals"))?;
        let rms = state.get_cost();
        if self.equations.is_none() {
            let here = problem.problem("evaluations", |p| Ok(p.evaluate(&y, true)))?;
            self.equations = self.normal_equations(here.jacobian);
            self.factor = None;
        }
        for _ in 0..MAX_RETRIES {
            let Some(equations) = &self.equations else { break };
            let Some(factor) = self.factor.take().or_else(|| equations.factor(self.damping)) else { break };
            let mut step = equations.step(&factor, &residuals);
            let largest = step.iter().fold(0.0_f64, |m, s| m.max(s.abs()));
            if largest > MAX_STEP {
                step.iter_mut().for_each(|s| *s *= MAX_STEP / largest);
            }
            let trial: Vec<f64> = y.iter().zip(&step).map(|(a, b)| a + b).collect();
            let chord = rms < CHORD_BELOW;
            let next = problem.problem("evaluations", |p| Ok(p.evaluate(&trial, !chord)))?;
            let next_rms = root_mean_square(&next.residuals);
            if next_rms < rms {
                let gain = next_rms / rms;
                // The damping has to sink below the smallest eigenvalue (1e-6 of the mean is usual) to be of no account.
                self.damping *= 0.03;
                if next.jacobian.is_some() {
                    self.equations = self.normal_equations(next.jacobian);
                } else if gain < 0.1 {
                    self.factor = Some(factor);
                } else {
                    self.equations = None;
                    if next_rms < ROUNDING_BELOW && gain > 0.5 {
                        self.stop = Some(StopReason::AtRounding);
                    }
                }
                return Ok((state.param(trial).cost(next_rms).residuals(next.residuals), None));
            }
            if rms < ROUNDING_BELOW {
                self.stop = Some(StopReason::AtRounding);
                return Ok((state.param(y).cost(rms).residuals(residuals), None));
            }
            self.damping = (self.damping * 10.0).max(1e-7);
        }
        self.stop = Some(StopReason::NoDescent);
        Ok((state.param(y).cost(rms).residuals(residuals), None))
    }

    fn terminate(&mut self, state: &LineState) -> TerminationStatus {
        match self.stop {
            Some(_) => TerminationStatus::Terminated(TerminationReason::SolverConverged),
            None if state.get_cost().is_nan() => {
                self.stop = Some(StopReason::NoDescent);
                TerminationStatus::Terminated(TerminationReason::SolverConverged)
            }
            None => TerminationStatus::NotTerminated,
        }
    }
}

/// Finds gaps and scale from a start.
pub(crate) fn fit(
    equations: Equations<'_>,
    start: &GapLine,
    ln_scale: Option<f64>,
    options: &FitOptions,
) -> Fit {
    let mut first = start.log_gaps().to_vec();
    let ln_scale = ln_scale.unwrap_or_else(|| equations.matching_scale(start));
    first.push(ln_scale);
    let null = equations.null_direction();
    let solver =
        DampedGaussNewton { damping: FIRST_DAMPING, equations: None, factor: None, null, stop: None };
    let initial = first.clone();
    let mut executor = Executor::new(equations, solver).configure(|state: LineState| {
        state.param(initial).max_iters(options.max_iterations).target_cost(options.target_rms)
    });
    if let Some(observer) = &options.observer {
        executor = executor.add_observer(observer.clone(), ObserverMode::Always);
    }
    // The executor fails only on its own bookkeeping (no parameter set); say so as "no descent".
    let failed = |_| (first.clone(), f64::INFINITY, 0, StopReason::NoDescent);
    let (mut found, rms, iterations, stop) = executor.timer(false).run().map_or_else(failed, |done| {
        let stop = match (done.solver.stop, done.state.get_termination_reason()) {
            (Some(stop), _) => stop,
            (None, Some(TerminationReason::TargetCostReached)) => StopReason::ToleranceReached,
            _ => StopReason::IterationLimit,
        };
        let found = done.state.get_param().cloned().unwrap_or_else(|| first.clone());
        (found, done.state.get_cost(), done.state.get_iter(), stop)
    });
    let ln_scale = found.pop().unwrap_or(ln_scale);
    Fit { line: GapLine::new(found), ln_scale, rms, iterations, stop }
}
