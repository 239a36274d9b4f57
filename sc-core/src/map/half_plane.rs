//! From an outline to the gaps of its half-plane map: start, coarse iteration, final iteration.

use super::equations::{End, Equations};
use super::gap_line::GapLine;
use super::parameter_problem::{Fit, FitOptions, IterationObserver, StopReason, fit};
use super::side_integrals::RuleSet;
use super::start::{CrossRatioStart, Source, StartError, split_sides, truncate};
use crate::outline::{Outline, Point};
use crate::quadrature::RuleError;
use num_complex::Complex64;
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
const MAX_SWEEPS: usize = 8;
const SWEEP_ENOUGH: f64 = 0.3;
/// (root mean square to reach on the split system, its iterations, iterations on the true outline). The first stage goes
/// straight to the true outline, which was enough for all 300 polygons of the robustness set; the others are there in
/// case it is not.
const STAGES: [(f64, u64, u64); 3] = [(1.0, 0, 25), (3e-2, 30, 12), (1e-6, 60, 40)];

pub(crate) fn solve_parameters(outline: &Outline, plan: &Plan) -> Result<Solved, MapError> {
    let n = outline.n();
    let order = |k: usize| (plan.at_infinity + 1 + k) % n;
    let exponents: Vec<f64> = (0..n - 1).map(|k| outline.alpha()[order(k)] - 1.0).collect();
    if n == 2 {
        // A half-plane or a wedge: nothing is to be found but a scale, which is free.
        return Ok(Solved::trivial());
    }
    let lengths: Vec<Option<f64>> = (0..n)
        .map(|k| {
            let (a, b) = (outline.point(order(k))?, outline.point(order(k + 1))?);
            Some((b - a).norm().ln() + plan.disturbance * disturbance(k) * rounding(a, b))
        })
        .collect();
    // A looser residual that was asked for is accepted too.
    let accepted = ACCEPT_RMS.max(plan.target_rms);
    let ends = ends(outline, plan.at_infinity);
    let rotation = rotation(outline, plan.at_infinity);
    let fine = RuleSet::new(&exponents, plan.nodes)?;
    let finish = |start: &GapLine, ln_scale: Option<f64>, limit: u64| {
        let options = FitOptions {
            target_rms: plan.target_rms,
            max_iterations: limit,
            observer: plan.observer.clone(),
        };
        let equations = Equations { rules: &fine, ln_lengths: &lengths, ends: &ends, rotation };
        fit(equations, start, ln_scale, &options)
    };
    if let Some(line) = plan.warm_start.as_ref().filter(|line| line.n_points() == n - 1) {
        let done = finish(line, None, 12);
        if done.rms <= accepted {
            let iterations = done.iterations;
            return Ok(Solved::new(done, n, iterations));
        }
    }
    let cut = truncate(outline);
    let split = split_sides(&cut.corners, &cut.alpha, plan.parts)?;
    let pieces = split.corners.len();
    // What each corner of the split outline stands for.
    let source: Vec<Option<Source>> = split.original.iter().map(|o| o.map(|o| cut.source[o])).collect();
    let is_infinity = |s: &Option<Source>| {
        *s == Some(Source::Vertex(plan.at_infinity)) || *s == Some(Source::Cut(plan.at_infinity))
    };
    let at_infinity = source.iter().position(is_infinity).unwrap_or(pieces - 1);
    let mut start = CrossRatioStart::new(&split, at_infinity);
    let coarse = RuleSet::new(start.exponents(), COARSE_NODES)?;
    for _ in 0..MAX_SWEEPS {
        if start.sweep(&coarse) < SWEEP_ENOUGH {
            break;
        }
    }
    let split_lengths: Vec<Option<f64>> = start.ln_lengths().into_iter().map(Some).collect();
    // Line indices of the split outline for each vertex but the one at infinity: one, or those of a cut.
    let places: Vec<Vec<usize>> = (0..n - 1)
        .map(|k| {
            let vertex = order(k);
            let stands =
                |s: &Option<Source>| *s == Some(Source::Vertex(vertex)) || *s == Some(Source::Cut(vertex));
            (0..pieces - 1).filter(|j| stands(&source[(at_infinity + 1 + j) % pieces])).collect()
        })
        .collect();
    let mut iterations = 0;
    let mut line = start.line();
    let mut best: Option<Fit> = None;
    // Stage by stage the split system is solved further before the added vertices are dropped.
    for (coarse_target, coarse_limit, fine_limit) in STAGES {
        let split_equations = || Equations {
            rules: &coarse,
            ln_lengths: &split_lengths,
            ends: &[],
            rotation: Complex64::new(1.0, 0.0),
        };
        // With few finite sides the scale has to come from the cut outline.
        let mut ln_scale = (!outline.is_bounded()).then(|| split_equations().matching_scale(&line));
        if coarse_limit > 0 && (pieces > n || !ends.is_empty()) {
            let options = FitOptions {
                target_rms: coarse_target,
                max_iterations: coarse_limit,
                observer: plan.observer.clone(),
            };
            let rough = fit(split_equations(), &line, None, &options);
            iterations += rough.iterations;
            line = rough.line;
            ln_scale = ln_scale.map(|_| rough.ln_scale);
        }
        let done = finish(&line.gathered(&places), ln_scale, fine_limit);
        iterations += done.iterations;
        let good = done.rms <= accepted;
        if best.as_ref().is_none_or(|b| done.rms < b.rms) {
            best = Some(done);
        }
        if good {
            break;
        }
    }
    match best {
        Some(done) if done.rms <= accepted => Ok(Solved::new(done, pieces, iterations)),
        other => Err(MapError::NotConverged {
            stop: other.as_ref().map_or(StopReason::NoDescent, |b| b.stop),
            iterations,
            rms: other.map_or(f64::INFINITY, |b| b.rms),
        }),
    }
}

/// The equations' view of the vertices at infinity other than the one at `ζ = ∞`.
fn ends(outline: &Outline, at_infinity: usize) -> Vec<End> {
    let n = outline.n();
    (0..n - 1)
        .filter_map(|point| {
            let vertex = (at_infinity + 1 + point) % n;
            if outline.point(vertex).is_some() {
                return None;
            }
            let step = outline.point(vertex + 1)? - outline.point(vertex + n - 1)?;
            let heading = outline.side_direction(vertex + n - 1);
            let width = (step * heading.conj()).im.abs();
            let is_channel = outline.alpha()[vertex] == 0.0;
            Some(End { point, step, channel: is_channel.then_some((heading, width)) })
        })
        .collect()
}

/// `C/|C|`, from the longest side: on side `k` the product has the phase `π Σ_{j>k} (α_j − 1)`.
pub(crate) fn rotation(outline: &Outline, at_infinity: usize) -> Complex64 {
    let n = outline.n();
    let order = |k: usize| (at_infinity + 1 + k) % n;
    let length = |k: usize| outline.side_length(order(k)).unwrap_or(f64::INFINITY);
    let longest = (0..n).max_by(|&a, &b| length(a).total_cmp(&length(b)).then(b.cmp(&a))).unwrap_or(0);
    // Side n − 1 comes from −∞, left of all points.
    let first = if longest == n - 1 { 0 } else { longest + 1 };
    let phase: f64 = (first..n - 1).map(|k| outline.alpha()[order(k)] - 1.0).sum();
    outline.side_direction(order(longest)) * Complex64::from_polar(1.0, -std::f64::consts::PI * phase)
}

impl Solved {
    fn trivial() -> Solved {
        Solved {
            line: GapLine::new(Vec::new()),
            ln_scale: 0.0,
            rms: 0.0,
            effort: Effort { pieces: 2, iterations: 0, stop: StopReason::ToleranceReached },
        }
    }

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

/// The vertex that is best sent to infinity. In a bounded outline: neither flat nor a tip, angle near a right or
/// re-entrant right angle, with long sides beside it. In an unbounded one: the vertex at infinity with the most
/// negative angle. `rank` 0 is the best, 1 the next, for an independent second solution.
pub(crate) fn choose_infinity(outline: &Outline, rank: usize) -> usize {
    let n = outline.n();
    let alpha = outline.alpha();
    let order: Vec<usize> = if outline.is_bounded() {
        let length = |k: usize| outline.side_length(k).unwrap_or(f64::INFINITY);
        let size = (0..n).map(length).fold(0.0, f64::max);
        let score = |k: usize| {
            let turning = (alpha[k] - 1.0).abs().min(1.0 - (alpha[k] - 1.0).abs()).max(0.0);
            turning * (length(k).min(length(k + n - 1)) / size).powf(0.25)
        };
        let mut usable: Vec<usize> =
            (0..n).filter(|&k| (alpha[k] - 1.0).abs() > 0.05 && alpha[k] < 1.95).collect();
        if usable.is_empty() {
            usable = (0..n).collect();
        }
        usable.sort_by(|&a, &b| score(b).total_cmp(&score(a)).then(a.cmp(&b)));
        usable
    } else {
        let mut ends: Vec<usize> = (0..n).filter(|&k| outline.point(k).is_none()).collect();
        ends.sort_by(|&a, &b| alpha[a].total_cmp(&alpha[b]).then(a.cmp(&b)));
        // Another end serves as a second choice only if it is as wide.
        let widest = ends.first().map_or(0.0, |&k| alpha[k]);
        ends.retain(|&k| alpha[k] <= widest + 1e-12);
        ends
    };
    order[rank.min(order.len() - 1)]
}
