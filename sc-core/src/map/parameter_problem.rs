//! The parameter problem: gaps whose map has sides of the given lengths.
//!
//! Unknowns are the log gaps `y`; residuals `r_k = ln I_k(y) − ln |side_k|`, less their mean (the mean is `−ln |C|`),
//! over *all* sides. The system is overdetermined but consistent, with the one null direction of scaling the gaps.
//! Solved by Gauss–Newton steps with Levenberg–Marquardt damping on the normal equations: the residual vanishes at
//! the solution, so what the normal equations lose in digits they only lose in speed.

use super::gap_line::GapLine;
use super::side_integrals::{RuleSet, side_integrals};
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

/// Lengths to be met; sides in the order of [`side_integrals`].
pub(crate) struct SideLengths<'a> {
    pub(crate) rules: &'a RuleSet,
    pub(crate) ln_lengths: &'a [f64],
}

/// Residuals (mean removed), the mean, and the centred Jacobian if asked for.
struct Evaluation {
    residuals: Vec<f64>,
    mean: f64,
    jacobian: Option<DMatrix<f64>>,
}

impl SideLengths<'_> {
    fn evaluate(&self, y: &[f64], want_jacobian: bool) -> Evaluation {
        let line = GapLine::new(y.to_vec());
        let integrals = side_integrals(&line, self.rules, want_jacobian);
        let n = self.ln_lengths.len() as f64;
        let mut residuals: Vec<f64> = integrals.ln.iter().zip(self.ln_lengths).map(|(i, l)| i - l).collect();
        let mean = residuals.iter().sum::<f64>() / n;
        residuals.iter_mut().for_each(|r| *r -= mean);
        let jacobian = integrals.jacobian.map(|mut j| {
            for mut column in j.column_iter_mut() {
                let mean = column.sum() / n;
                column.add_scalar_mut(-mean);
            }
            j
        });
        Evaluation { residuals, mean, jacobian }
    }
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
    fn new(jacobian: DMatrix<f64>) -> NormalEquations {
        let mut normal = jacobian.transpose() * &jacobian;
        let n = normal.nrows();
        let scale = (normal.trace() / n as f64).max(1e-300);
        // Scaling all gaps alike changes nothing: hold the sum of the changes at zero.
        normal.add_scalar_mut(scale / n as f64);
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
    mean: f64,
    stop: Option<StopReason>,
}

type LineState = IterState<Vec<f64>, (), (), (), Vec<f64>, f64>;

impl<'a> Solver<SideLengths<'a>, LineState> for DampedGaussNewton {
    fn name(&self) -> &str {
        "damped Gauss-Newton on log side lengths"
    }

    fn init(
        &mut self,
        problem: &mut Problem<SideLengths<'a>>,
        mut state: LineState,
    ) -> Result<(LineState, Option<KV>), Error> {
        let y = state.take_param().ok_or_else(|| Error::msg("no starting gaps"))?;
        let first = problem.problem("evaluations", |p| Ok(p.evaluate(&y, true)))?;
        self.mean = first.mean;
        self.equations = first.jacobian.map(NormalEquations::new);
        let rms = root_mean_square(&first.residuals);
        Ok((state.param(y).cost(rms).residuals(first.residuals), None))
    }

    fn next_iter(
        &mut self,
        problem: &mut Problem<SideLengths<'a>>,
        mut state: LineState,
    ) -> Result<(LineState, Option<KV>), Error> {
        let y = state.take_param().ok_or_else(|| Error::msg("no gaps"))?;
        let residuals = state.take_residuals().ok_or_else(|| Error::msg("no residuals"))?;
        let rms = state.get_cost();
        if self.equations.is_none() {
            let here = problem.problem("evaluations", |p| Ok(p.evaluate(&y, true)))?;
            self.equations = here.jacobian.map(NormalEquations::new);
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
                self.mean = next.mean;
                let gain = next_rms / rms;
                // The damping has to sink below the smallest eigenvalue (1e-6 of the mean is usual) to be of no account.
                self.damping *= 0.03;
                if next.jacobian.is_some() {
                    self.equations = next.jacobian.map(NormalEquations::new);
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

/// Finds the gaps from a start.
pub(crate) fn fit(problem: SideLengths<'_>, start: &GapLine, options: &FitOptions) -> Fit {
    let solver =
        DampedGaussNewton { damping: FIRST_DAMPING, equations: None, factor: None, mean: 0.0, stop: None };
    let first = start.log_gaps().to_vec();
    let mut executor = Executor::new(problem, solver).configure(|state: LineState| {
        state.param(first).max_iters(options.max_iterations).target_cost(options.target_rms)
    });
    if let Some(observer) = &options.observer {
        executor = executor.add_observer(observer.clone(), ObserverMode::Always);
    }
    match executor.timer(false).run() {
        Ok(done) => {
            let reason = done.state.get_termination_reason().cloned();
            let stop = match (done.solver.stop, reason) {
                (Some(stop), _) => stop,
                (None, Some(TerminationReason::TargetCostReached)) => StopReason::ToleranceReached,
                _ => StopReason::IterationLimit,
            };
            let y = done.state.get_param().cloned().unwrap_or_else(|| start.log_gaps().to_vec());
            Fit {
                line: GapLine::new(y),
                ln_scale: -done.solver.mean,
                rms: done.state.get_cost(),
                iterations: done.state.get_iter(),
                stop,
            }
        }
        // The executor fails only on its own bookkeeping (no parameter set); say so as "no descent".
        Err(_) => Fit {
            line: start.clone(),
            ln_scale: 0.0,
            rms: f64::INFINITY,
            iterations: 0,
            stop: StopReason::NoDescent,
        },
    }
}
