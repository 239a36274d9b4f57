//! Solving for the half-plane map of a bounded outline.

use super::gap_line::GapLine;
use super::parameter_problem::{Fit, FitOptions, IterationObserver, SideLengths, StopReason, fit};
use super::side_integrals::RuleSet;
use super::start::{CrossRatioStart, StartError, split_sides};
use crate::outline::Point;
use crate::quadrature::RuleError;
use thiserror::Error;

/// Nodes a panel while the residual is still large, and in the end.
const COARSE_NODES: usize = 6;
const FINE_NODES: usize = 12;

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

pub(crate) fn solve_parameters(outline: &[Point], alpha: &[f64], plan: &Plan) -> Result<Solved, MapError> {
    let n = outline.len();
    let split = split_sides(outline, alpha, plan.parts)?;
    let pieces = split.corners.len();
    let at_infinity =
        split.original.iter().position(|&o| o == Some(plan.at_infinity)).unwrap_or(pieces - 1);
    let mut start = CrossRatioStart::new(&split, at_infinity);
    let coarse = RuleSet::new(start.exponents(), COARSE_NODES)?;
    for _ in 0..4 {
        if start.sweep(&coarse) < 0.3 {
            break;
        }
    }
    let split_lengths = start.ln_lengths();
    let order = |k: usize| (plan.at_infinity + 1 + k) % n;
    let exponents: Vec<f64> = (0..n - 1).map(|k| alpha[order(k)] - 1.0).collect();
    let lengths: Vec<f64> =
        (0..n).map(|k| (outline[order(k + 1)] - outline[order(k)]).norm().ln()).collect();
    let fine = RuleSet::new(&exponents, FINE_NODES)?;
    let keep =
        |j: usize| split.original[(at_infinity + 1 + j) % pieces].is_some();
    let mut iterations = 0;
    let mut line = start.line();
    let mut best: Option<Fit> = None;
    // Stage by stage the split system is solved further before the added vertices are dropped.
    for (coarse_target, coarse_limit, fine_limit) in [(3e-2, 30, 12), (1e-6, 60, 40)] {
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
        let options = FitOptions {
            target_rms: plan.target_rms,
            max_iterations: fine_limit,
            observer: plan.observer.clone(),
        };
        let done = fit(SideLengths { rules: &fine, ln_lengths: &lengths }, &line.merged(keep), &options);
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
        Some(done) if done.rms <= ACCEPT_RMS => Ok(Solved {
            line: done.line,
            ln_scale: done.ln_scale,
            rms: done.rms,
            effort: Effort { pieces, iterations, stop: done.stop },
        }),
        other => Err(MapError::NotConverged {
            stop: other.as_ref().map_or(StopReason::NoDescent, |b| b.stop),
            iterations,
            rms: other.map_or(f64::INFINITY, |b| b.rms),
        }),
    }
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

/// TEMPORARY trial
#[doc(hidden)]
pub fn trial(outline: &[Point], alpha: &[f64], rank: usize, parts: f64) -> Result<(Vec<f64>, f64, Effort), MapError> {
    let plan = Plan { at_infinity: choose_infinity(outline, alpha, rank), parts, target_rms: 3e-14, observer: std::env::var("OBS").ok().map(|_| IterationObserver::new(|i,r| eprintln!("  {i} {r:.3e}"))) };
    solve_parameters(outline, alpha, &plan).map(|s| (s.line.log_gaps().to_vec(), s.rms, s.effort))
}
