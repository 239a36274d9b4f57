//! From an outline to the gaps of its half-plane map: start, coarse iteration, final iteration.

use super::gap_line::GapLine;
use super::parameter_problem::{Fit, FitOptions, IterationObserver, SideLengths, StopReason, fit};
use super::side_integrals::RuleSet;
use super::start::{CrossRatioStart, StartError, split_sides};
use crate::outline::Point;
use crate::quadrature::RuleError;
use thiserror::Error;

/// Nodes a panel while the residual is still large.
const COARSE_NODES: usize = 6;

/// Why there is no map.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum MapError {
    /// No start could be made.
    #[error(transparent)]
    Start(#[from] StartError),
    /// An interior angle leaves no integrable power.
    #[error(transparent)]
    Rule(#[from] RuleError),
    /// The outline reaches infinity, which is not yet answered.
    #[error("the outline reaches infinity; only bounded sections are mapped")]
    Unbounded,
    /// The iteration ended without a map that fits.
    #[error("the map did not converge: {stop} after {iterations} iterations, side lengths off by {rms:.1e}")]
    NotConverged {
        /// Why it stopped.
        stop: StopReason,
        /// Iterations made in all stages.
        iterations: u64,
        /// Root mean square of the logarithmic side-length residuals.
        rms: f64,
    },
}

/// How to solve for a map.
#[derive(Debug, Clone)]
pub(crate) struct Plan {
    /// Vertex sent to infinity.
    pub(crate) at_infinity: usize,
    /// Where long sides are cut for the start: at `1/parts` from either end.
    pub(crate) parts: f64,
    /// Root mean square residual asked for.
    pub(crate) target_rms: f64,
    /// Nodes a panel in the final iteration.
    pub(crate) nodes: usize,
    /// See `MapOptions::disturbance`.
    pub(crate) disturbance: f64,
    pub(crate) warm_start: Option<GapLine>,
    pub(crate) observer: Option<IterationObserver>,
}

/// What the solution took.
#[derive(Debug, Clone, PartialEq)]
pub struct Effort {
    /// Sides after splitting, for the start.
    pub pieces: usize,
    /// Gauss–Newton iterations in all stages.
    pub iterations: u64,
    /// Why the last stage stopped.
    pub stop: StopReason,
}

/// Gaps and scale of a converged map.
#[derive(Debug, Clone)]
pub(crate) struct Solved {
    pub(crate) line: GapLine,
    pub(crate) ln_scale: f64,
    pub(crate) rms: f64,
    pub(crate) effort: Effort,
}

/// Residual above which a map is not accepted.
const ACCEPT_RMS: f64 = 1e-9;
/// Sweeps of the cross-ratio iteration, and the change of a log cross-ratio at which they may end earlier.
const MAX_SWEEPS: usize = 4;
const SWEEP_ENOUGH: f64 = 0.3;
/// (root mean square to reach on the split system, its iterations, iterations on the true outline): on the
/// robustness set the first stage has always been enough.
const STAGES: [(f64, u64, u64); 2] = [(3e-2, 30, 12), (1e-6, 60, 40)];

pub(crate) fn solve_parameters(outline: &[Point], alpha: &[f64], plan: &Plan) -> Result<Solved, MapError> {
    let n = outline.len();
    let order = |k: usize| (plan.at_infinity + 1 + k) % n;
    let exponents: Vec<f64> = (0..n - 1).map(|k| alpha[order(k)] - 1.0).collect();
    let lengths: Vec<f64> = (0..n)
        .map(|k| {
            let (a, b) = (outline[order(k)], outline[order(k + 1)]);
            (b - a).norm().ln() + plan.disturbance * disturbance(k) * rounding(a, b)
        })
        .collect();
    let fine = RuleSet::new(&exponents, plan.nodes)?;
    let finish = |start: &GapLine, limit: u64| {
        let options = FitOptions {
            target_rms: plan.target_rms,
            max_iterations: limit,
            observer: plan.observer.clone(),
        };
        fit(SideLengths { rules: &fine, ln_lengths: &lengths }, start, &options)
    };
    if let Some(line) = plan.warm_start.as_ref().filter(|line| line.n_points() == n - 1) {
        let done = finish(line, 12);
        if done.rms <= ACCEPT_RMS {
            let iterations = done.iterations;
            return Ok(Solved::new(done, n, iterations));
        }
    }
    let split = split_sides(outline, alpha, plan.parts)?;
    let pieces = split.corners.len();
    let at_infinity = split.original.iter().position(|&o| o == Some(plan.at_infinity)).unwrap_or(pieces - 1);
    let mut start = CrossRatioStart::new(&split, at_infinity);
    let coarse = RuleSet::new(start.exponents(), COARSE_NODES)?;
    for _ in 0..MAX_SWEEPS {
        if start.sweep(&coarse) < SWEEP_ENOUGH {
            break;
        }
    }
    let split_lengths = start.ln_lengths();
    let keep = |j: usize| split.original[(at_infinity + 1 + j) % pieces].is_some();
    let mut iterations = 0;
    let mut line = start.line();
    let mut best: Option<Fit> = None;
    // Stage by stage the split system is solved further before the added vertices are dropped.
    for (coarse_target, coarse_limit, fine_limit) in STAGES {
        if pieces > n {
            let options = FitOptions {
                target_rms: coarse_target,
                max_iterations: coarse_limit,
                observer: plan.observer.clone(),
            };
            let rough = fit(SideLengths { rules: &coarse, ln_lengths: &split_lengths }, &line, &options);
            iterations += rough.iterations;
            line = rough.line;
        }
        let done = finish(&line.merged(keep), fine_limit);
        iterations += done.iterations;
        let good = done.rms <= ACCEPT_RMS;
        if best.as_ref().is_none_or(|b| done.rms < b.rms) {
            best = Some(done);
        }
        if good {
            break;
        }
    }
    match best {
        Some(done) if done.rms <= ACCEPT_RMS => Ok(Solved::new(done, pieces, iterations)),
        other => Err(MapError::NotConverged {
            stop: other.as_ref().map_or(StopReason::NoDescent, |b| b.stop),
            iterations,
            rms: other.map_or(f64::INFINITY, |b| b.rms),
        }),
    }
}

impl Solved {
    fn new(done: Fit, pieces: usize, iterations: u64) -> Solved {
        Solved {
            line: done.line,
            ln_scale: done.ln_scale,
            rms: done.rms,
            effort: Effort { pieces, iterations, stop: done.stop },
        }
    }
}

/// Relative rounding of a side's length by the rounding of its end points.
fn rounding(a: Point, b: Point) -> f64 {
    f64::EPSILON * (a.norm() + b.norm()) / (b - a).norm()
}

/// A reproducible number in [−1, 1] for side `k` (the fractional parts of multiples of the golden ratio).
fn disturbance(k: usize) -> f64 {
    2.0 * ((k as f64 + 1.0) * 0.618_033_988_749_894_9).fract() - 1.0
}

/// The vertex that is best sent to infinity: neither flat nor a tip, angle near a right or re-entrant right angle,
/// with long sides beside it. `rank` 0 is the best, 1 the next, for an independent second solution.
pub(crate) fn choose_infinity(outline: &[Point], alpha: &[f64], rank: usize) -> usize {
    let n = outline.len();
    let size = (0..n).map(|k| (outline[(k + 1) % n] - outline[k]).norm()).fold(0.0, f64::max);
    let mut order: Vec<usize> = (0..n).collect();
    let score = |k: usize| {
        let a = alpha[k];
        let turning = (a - 1.0).abs().min(1.0 - (a - 1.0).abs()).max(0.0);
        let beside =
            (outline[(k + 1) % n] - outline[k]).norm().min((outline[k] - outline[(k + n - 1) % n]).norm());
        turning * (beside / size).powf(0.25)
    };
    order.sort_by(|&a, &b| score(b).total_cmp(&score(a)).then(a.cmp(&b)));
    let usable = order.iter().filter(|&&k| (alpha[k] - 1.0).abs() > 0.05 && alpha[k] < 1.95).count().max(1);
    order[rank.min(usable - 1)]
}
