//! One line of a net: the curve `Re(turn · W) = value` followed through the half-plane.
//!
//! The unknown is `λ = ln(offset)`, in which the power laws at the prevertices are straight lines. Along the curve
//! `dλ = ± i conj(G)/|G| ds` with `G = turn · dW/dλ`; each Runge–Kutta step is brought back to the value by Newton's
//! method on `W`, which is known in closed form up to quadrature, and then carried to the section by the forward map.

use super::boundary::{Constant, beyond, depth, jumps, settled};
use crate::answers::Solution;
use crate::map::HalfPlanePoint;
use crate::outline::Point;
use num_complex::Complex64;
use std::f64::consts::PI;

/// Steps of a line, refused ones included. A line through thirty prevertices with a tight bend at each takes about
/// 1500.
const MAX_STEPS: usize = 20_000;
/// Longest and shortest step in `λ`.
const MAX_STEP: f64 = 0.8;
const MIN_STEP: f64 = 1e-7;
/// A Newton correction longer than this part of the step might lead to another branch.
const MAX_CORRECTION: f64 = 0.08;
/// Newton steps after a Runge–Kutta step; one or two are usual.
const MAX_NEWTON: usize = 8;
/// A line is at a vertex, for drawing, when it is nearer than this part of the section's size.
const AT_VERTEX: f64 = 1e-9;
/// Points nearer than this part of the size are not told apart in the output.
const MIN_CHORD: f64 = 1e-4;

/// Where a traced line stopped.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Arrival {
    /// On a side, by its line index.
    Side(usize),
    /// At a vertex, by its line index.
    Vertex(usize),
    /// Where the field vanishes, and with it the direction.
    Stagnation,
    /// Out of reach.
    Remote,
    /// After too many steps.
    StepLimit,
}

pub(super) struct Traced {
    pub(super) points: Vec<Point>,
    pub(super) arrival: Arrival,
}

pub(super) struct Tracer<'a> {
    pub(super) solution: &'a Solution,
    pub(super) constant: Constant,
    pub(super) value: f64,
    /// Largest accepted difference from the value.
    pub(super) close: f64,
    /// Largest accepted distance of a chord from the curve.
    pub(super) flatness: f64,
    /// Middle and radius of the region of interest.
    pub(super) reach: (Point, f64),
}

/// A point of the line with its image and the direction of the line there.
#[derive(Clone, Copy)]
struct Station {
    at: HalfPlanePoint,
    image: Point,
    tangent: Complex64,
}

enum Step {
    On(Station),
    Ashore(Station, usize),
    Shorter,
}

impl Tracer<'_> {
    /// Follows the line from a point, first toward `heading` in the `λ` plane.
    pub(super) fn trace(&self, start: HalfPlanePoint, heading: Complex64) -> Traced {
        let size = self.solution.section().outline().size();
        let g = self.slope(start);
        let along = g.conj() * Complex64::i();
        // The sign of i conj(G) stays the same all the way: the conjugate function is monotone.
        let sign = if (along * heading.conj()).re < 0.0 { -1.0 } else { 1.0 };
        let mut here = self.station(start, sign);
        let mut points = vec![here.image];
        let mut step = 0.1;
        let mut arrival = Arrival::StepLimit;
        for _ in 0..MAX_STEPS {
            if step < MIN_STEP {
                arrival = Arrival::Stagnation;
                break;
            }
            match self.step(&here, sign, step) {
                Step::Shorter => step *= 0.5,
                Step::Ashore(end, side) => {
                    here = end;
                    arrival = Arrival::Side(side);
                    break;
                }
                Step::On(next) => {
                    here = next;
                    let from_last = points.last().map_or(f64::INFINITY, |p| (here.image - p).norm());
                    if from_last > MIN_CHORD * size {
                        points.push(here.image);
                    }
                    step = (step * 1.6).min(MAX_STEP);
                    if let Some(vertex) = self.vertex_reached(&here, sign) {
                        arrival = Arrival::Vertex(vertex);
                        break;
                    }
                    if !self.reaches(here.image) {
                        arrival = Arrival::Remote;
                        break;
                    }
                }
            }
        }
        if let Arrival::Vertex(j) = arrival
            && let Some(w) = self.solution.section().outline().point(self.solution.map().vertex_of(j))
        {
            here.image = w;
        }
        if here.image.is_finite() && points.last().is_some_and(|p| (here.image - p).norm() > 0.0) {
            if points.len() > 1 && (here.image - points[points.len() - 1]).norm() < 0.5 * MIN_CHORD * size {
                points.pop();
            }
            points.push(here.image);
        }
        Traced { points, arrival }
    }

    /// Whether a point is near enough to be drawn.
    pub(super) fn reaches(&self, z: Point) -> bool {
        z.is_finite() && (z - self.reach.0).norm() <= self.reach.1
    }

    /// `turn · dW/dλ`
    fn slope(&self, p: HalfPlanePoint) -> Complex64 {
        self.constant.turn() * self.solution.log_potential_derivative(p)
    }

    fn miss(&self, p: HalfPlanePoint) -> f64 {
        self.constant.of(self.solution.complex_potential(p)) - self.value
    }

    fn direction(&self, p: HalfPlanePoint, sign: f64) -> Option<Complex64> {
        let g = self.slope(p);
        let norm = g.norm();
        (norm > 0.0 && norm.is_finite()).then(|| g.conj() * Complex64::new(0.0, sign / norm))
    }

    fn station(&self, at: HalfPlanePoint, sign: f64) -> Station {
        let map = self.solution.map();
        let tangent =
            self.direction(at, sign).map_or(Complex64::new(0.0, 0.0), |d| d * map.log_derivative(at));
        let length = tangent.norm();
        let tangent =
            if length > 0.0 && length.is_finite() { tangent / length } else { Complex64::new(0.0, 0.0) };
        Station { at, image: map.forward(at), tangent }
    }

    /// Runge–Kutta step, correction, and the judgement whether the step was short enough.
    fn step(&self, here: &Station, sign: f64, h: f64) -> Step {
        let anchor = here.at.anchor;
        let lambda = here.at.ln_offset;
        let rate =
            |ln_offset: Complex64| self.direction(kept_above(HalfPlanePoint { anchor, ln_offset }), sign);
        let trial = || {
            let k1 = rate(lambda)?;
            let k2 = rate(lambda + k1 * (0.5 * h))?;
            let k3 = rate(lambda + k2 * (0.5 * h))?;
            let k4 = rate(lambda + k3 * h)?;
            let mean = (k1 + (k2 + k3) * 2.0 + k4) / 6.0;
            // Directions that disagree make a short mean: a zero of W' is near.
            (mean.norm() > 0.9).then_some(lambda + mean * h)
        };
        let Some(trial) = trial() else { return Step::Shorter };
        if trial.im <= 0.0 || trial.im >= PI {
            return self.ashore(here, trial, sign, h);
        }
        let Some(at) = self.projected(HalfPlanePoint { anchor, ln_offset: trial }, MAX_CORRECTION * h) else {
            return Step::Shorter;
        };
        let next = self.station(settled(self.solution, at), sign);
        if self.flat(here, &next) { Step::On(next) } else { Step::Shorter }
    }

    /// Newton steps to the value that leave the conjugate function alone.
    fn projected(&self, start: HalfPlanePoint, limit: f64) -> Option<HalfPlanePoint> {
        let mut at = start;
        for _ in 0..MAX_NEWTON {
            let miss = self.miss(at);
            if miss.abs() <= self.close {
                return Some(at);
            }
            let change = Complex64::new(-miss, 0.0) / self.slope(at);
            at.ln_offset += change;
            let inside = at.ln_offset.im >= 0.0 && at.ln_offset.im <= PI;
            if !(inside && (at.ln_offset - start.ln_offset).norm() <= limit) {
                return None;
            }
        }
        None
    }

    /// The end of a step that left the half-plane: on the boundary, at the value.
    fn ashore(&self, here: &Station, trial: Complex64, sign: f64, h: f64) -> Step {
        let lambda = here.at.ln_offset;
        let edge = if trial.im <= 0.0 { 0.0 } else { PI };
        let part = (edge - lambda.im) / (trial.im - lambda.im);
        if !(part >= 0.0 && part <= 1.0) {
            return Step::Shorter;
        }
        let mut at = HalfPlanePoint {
            anchor: here.at.anchor,
            ln_offset: Complex64::new(lambda.re + part * (trial.re - lambda.re), edge),
        };
        let start = at.ln_offset.re;
        let mut good = false;
        for _ in 0..MAX_NEWTON {
            let miss = self.miss(at);
            if miss.abs() <= self.close {
                good = true;
                break;
            }
            at.ln_offset.re -= miss / self.slope(at).re;
            let moved = (at.ln_offset.re - start).abs();
            if moved.is_nan() || moved > h {
                break;
            }
        }
        if !good {
            return Step::Shorter;
        }
        let n = self.solution.map().outline().n();
        let at = settled(self.solution, at);
        let side = if at.ln_offset.im < 0.5 * PI { at.anchor } else { (at.anchor + n - 1) % n };
        let end = self.station(at, sign);
        if self.flat(here, &end) { Step::Ashore(end, side) } else { Step::Shorter }
    }

    /// Whether the chord keeps near the curve.
    fn flat(&self, from: &Station, to: &Station) -> bool {
        let chord = (to.image - from.image).norm();
        let turn = (to.tangent * from.tangent.conj()).arg().abs();
        // An arc of a circle is off its chord by chord · turn/8.
        !(chord.is_finite() && chord * (turn + 0.02) > 8.0 * self.flatness)
    }

    /// The vertex that the line has come so near to that nothing more would be seen.
    fn vertex_reached(&self, here: &Station, sign: f64) -> Option<usize> {
        let map = self.solution.map();
        let n = map.outline().n();
        let heading = self.direction(here.at, sign)?.re;
        let near = |j: usize| {
            map.outline()
                .point(map.vertex_of(j))
                .is_some_and(|w| (here.image - w).norm() < AT_VERTEX * map.outline().size())
        };
        let (anchor, ln) = (here.at.anchor, here.at.ln_offset.re);
        let depth = |j: usize, else_at: f64| {
            if jumps(self.solution, j) { depth(self.solution, j, anchor) } else { else_at }
        };
        if heading < 0.0 && ln < -1.0 && (near(anchor) || ln < depth(anchor, -90.0)) {
            return Some(anchor);
        }
        let far = ln > depth(n - 1, beyond(self.solution, anchor) + 90.0);
        (heading > 0.0 && ln > 1.0 && (near(n - 1) || far)).then_some(n - 1)
    }
}

fn kept_above(p: HalfPlanePoint) -> HalfPlanePoint {
    HalfPlanePoint { ln_offset: Complex64::new(p.ln_offset.re, p.ln_offset.im.clamp(0.0, PI)), ..p }
}
