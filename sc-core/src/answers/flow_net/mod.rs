//! The flow net: equipotentials at equal drops and flow lines at equal fluxes, as polylines in the section.
//!
//! ```text
//! Δφ = (highest − lowest level) / n_d,    Δψ = Δφ,    n_f = total flux / Δψ = S n_d
//! ```
//! With equal increments of `φ` and `ψ` the cells are squares in the small. `n_d` is a whole number and `n_f` what
//! the shape factor makes of it, so the last channel is in general a fraction of one. Lines begin on the boundary,
//! where their value is found by bracketing, and are followed in the half-plane; no point is mapped backward.

mod boundary;
mod trace;

#[cfg(test)]
mod tests;

use super::probe::{Probe, ProbeError};
use super::solution::Solution;
use crate::map::HalfPlanePoint;
use crate::outline::Point;
use boundary::{Constant, Piece};
use num_complex::Complex64;
use rayon::prelude::*;
use std::f64::consts::PI;
use trace::{Arrival, Traced, Tracer};

/// Lines keep their value to this part of the range of levels (of one channel's flux for flow lines).
const CLOSE: f64 = 1e-11;
/// Flow lines begun on one held side, for where different levels touch the flux has no end.
const MAX_FLOW_LINES: usize = 400;
/// Part of a channel that is rounding.
const WHOLE: f64 = 1e-6;
/// Places this near (part of the size) on one side are one place; roots of one value are farther apart, or a line
/// between them would not be seen.
const SAME_PLACE: f64 = 1e-5;

/// How a net is drawn.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FlowNetOptions {
    /// Number of drops `n_d` between the highest and the lowest level; zero counts as one.
    pub drops: usize,
    /// Largest distance of a polyline from its curve, as a part of the section's size.
    pub flatness: f64,
    /// Lines end where they are this many sizes away from the middle of the section.
    pub reach: f64,
}

impl Default for FlowNetOptions {
    fn default() -> Self {
        FlowNetOptions { drops: 10, flatness: 1e-4, reach: 20.0 }
    }
}

/// Where a line of a net begins or ends.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Terminus {
    /// On a side (walking index).
    Side(usize),
    /// At a vertex (walking index).
    Vertex(usize),
    /// Where the gradient vanishes and lines of one value meet.
    Stagnation,
    /// Too far away to be drawn.
    Remote,
    /// Nowhere in particular: the bound on the steps was reached.
    StepLimit,
}

/// An equipotential or a flow line.
#[derive(Debug, Clone, PartialEq)]
pub struct NetLine {
    /// `φ`, or `ψ` for unit conductivity.
    pub value: f64,
    /// Points of the line, the ends included: dense where it bends.
    pub points: Vec<Point>,
    /// Where it begins.
    pub start: Terminus,
    /// Where it ends.
    pub end: Terminus,
    /// Whether the channel on one side of this flow line is only part of one.
    pub beside_part_channel: bool,
}

/// A flow net with equal drops.
#[derive(Debug, Clone, PartialEq)]
pub struct FlowNet {
    /// Lines of equal `φ` between the levels.
    pub equipotentials: Vec<NetLine>,
    /// Lines of equal `ψ`, from where the flow enters (or leaves, if it leaves through fewer stretches).
    pub flow_lines: Vec<NetLine>,
    /// Number of drops between the highest and the lowest level.
    pub n_drops: usize,
    /// Number of channels, `S n_d` with two levels; in general total flux over `Δψ`. Infinite where levels touch.
    pub n_channels: f64,
    /// Drop of `φ` from one equipotential to the next, and flux of a channel for unit conductivity.
    pub increment: f64,
}

/// A round number of drops that gives some sixty squares.
///
/// ```
/// assert_eq!(sc_core::answers::suitable_drops(1.0), 8);
/// assert_eq!(sc_core::answers::suitable_drops(0.05), 40);
/// ```
pub fn suitable_drops(shape_factor: f64) -> usize {
    const ROUND: [usize; 15] = [4, 5, 6, 8, 10, 12, 15, 16, 20, 25, 30, 40, 50, 60, 80];
    let ideal = if shape_factor > 0.0 { (60.0 / shape_factor).sqrt() } else { 10.0 };
    let distance = |d: usize| (d as f64 / ideal).ln().abs();
    ROUND.into_iter().min_by(|&a, &b| distance(a).total_cmp(&distance(b))).unwrap_or(10)
}

/// A place where a line may begin or end.
#[derive(Debug, Clone, Copy)]
struct Place {
    at: HalfPlanePoint,
    terminus: Terminus,
    image: Point,
    heading: Complex64,
}

impl Solution {
    /// The flow net with the given number of drops.
    ///
    /// # Accuracy
    /// Points of an equipotential have its `φ` to 1e-11 of the range, and flow lines their `ψ` to 1e-11 of a channel,
    /// before the error of the solution itself.
    pub fn flow_net(&self, options: &FlowNetOptions) -> FlowNet {
        let n_drops = options.drops.max(1);
        let range = self.section().range();
        let increment = range / n_drops as f64;
        if range.is_nan() || range <= 0.0 {
            let (equipotentials, flow_lines) = (Vec::new(), Vec::new());
            return FlowNet { equipotentials, flow_lines, n_drops, n_channels: 0.0, increment: 0.0 };
        }
        let lowest = self.section().levels().iter().copied().fold(f64::INFINITY, f64::min);
        let levels: Vec<f64> = (1..n_drops).map(|i| lowest + increment * i as f64).collect();
        let equipotentials = self.equipotentials(&levels, options);
        let (flow_lines, through) = self.flow_lines(increment, options);
        let touching = (0..self.section().outline().n()).any(|j| boundary::jumps(self, j));
        let n_channels = match self.shape_factor() {
            Some(s) => s.value * n_drops as f64,
            None if touching => f64::INFINITY,
            None => through / increment,
        };
        FlowNet { equipotentials, flow_lines, n_drops, n_channels, increment }
    }

    /// The lines on which `φ` has the given values; a value may have several lines, or none.
    pub fn equipotentials(&self, values: &[f64], options: &FlowNetOptions) -> Vec<NetLine> {
        let pieces = boundary::pieces(self, Constant::Potential);
        let close = CLOSE * self.section().range();
        let lines = values.par_iter().map(|&value| {
            let mut places = self.places(&pieces, Constant::Potential, value, close);
            places.extend(self.corner_places(value));
            let tracer = self.tracer(Constant::Potential, value, close, options);
            let mut lines = Vec::new();
            let mut used = vec![false; places.len()];
            for i in 0..places.len() {
                if used[i] || !tracer.reaches(places[i].image) {
                    continue;
                }
                used[i] = true;
                let line = self.line(&tracer, &places[i]);
                if let Some(other) = self.arrived_at(&line, &places, &used) {
                    used[other] = true;
                }
                lines.push(line);
            }
            lines
        });
        lines.collect::<Vec<_>>().into_iter().flatten().collect()
    }

    /// `φ` and `∇φ` at equally spaced places of a side (walking index), its ends included.
    ///
    /// # Errors
    /// [`ProbeError::NoSuchPlace`] if there is no such side, or it has no length.
    pub fn along_side(&self, side: usize, count: usize) -> Result<Vec<Probe>, ProbeError> {
        let outline = self.section().outline();
        let length = if side < outline.n() { outline.side_length(side) } else { None };
        let length = length.ok_or(ProbeError::NoSuchPlace { side, s: 0.0 })?;
        let last = count.saturating_sub(1).max(1) as f64;
        (0..count).map(|i| self.probe_on_side(side, length * (i as f64 / last))).collect()
    }

    fn tracer(&self, constant: Constant, value: f64, close: f64, options: &FlowNetOptions) -> Tracer<'_> {
        let outline = self.section().outline();
        let corners: Vec<Point> = (0..outline.n()).filter_map(|k| outline.point(k)).collect();
        let middle = corners.iter().sum::<Point>() / corners.len().max(1) as f64;
        Tracer {
            solution: self,
            constant,
            value,
            close,
            flatness: options.flatness.max(1e-7) * outline.size(),
            reach: (middle, options.reach.max(1.0) * outline.size()),
        }
    }

    /// Where the boundary takes the value.
    fn places(&self, pieces: &[Piece], constant: Constant, value: f64, close: f64) -> Vec<Place> {
        let found = pieces.iter().filter_map(|piece| {
            let at = piece.place_of(self, constant, value, close)?;
            let heading = Complex64::new(0.0, if at.ln_offset.im < 0.5 * PI { 1.0 } else { -1.0 });
            let terminus = Terminus::Side(self.map().vertex_of(piece.side));
            Some(Place { at, terminus, image: self.map().forward(at), heading })
        });
        found.filter(|place| place.image.is_finite()).collect()
    }

    /// The vertices where different levels touch and the value lies between them.
    fn corner_places(&self, value: f64) -> Vec<Place> {
        let n = self.section().outline().n();
        let found = (0..n).filter(|&j| boundary::jumps(self, j)).filter_map(|j| {
            let left = boundary::level(self, (j + n - 1) % n)?;
            let right = boundary::level(self, j)?;
            // φ changes in proportion to the angle; at infinity the side that arrives lies at the angle 0.
            let part = (value - right) / (left - right);
            if !(part > 0.0 && part < 1.0) {
                return None;
            }
            let vertex = self.map().vertex_of(j);
            let (anchor, angle, away) =
                if j < n - 1 { (j, PI * part, 1.0) } else { (n - 2, PI * (1.0 - part), -1.0) };
            let ln = boundary::depth(self, j, anchor);
            let at = HalfPlanePoint { anchor, ln_offset: Complex64::new(ln, angle) };
            let image = self.section().outline().point(vertex).unwrap_or_else(|| self.map().forward(at));
            let heading = Complex64::new(away, 0.0);
            Some(Place { at, terminus: Terminus::Vertex(vertex), image, heading })
        });
        found.collect()
    }

    fn line(&self, tracer: &Tracer<'_>, from: &Place) -> NetLine {
        let Traced { mut points, arrival } = tracer.trace(from.at, from.heading);
        if let (Terminus::Vertex(_), Some(first)) = (from.terminus, points.first_mut()) {
            *first = from.image;
        }
        let vertex_of = |j: usize| self.map().vertex_of(j);
        let end = match arrival {
            Arrival::Side(j) => Terminus::Side(vertex_of(j)),
            Arrival::Vertex(j) => Terminus::Vertex(vertex_of(j)),
            Arrival::Stagnation => Terminus::Stagnation,
            Arrival::Remote => Terminus::Remote,
            Arrival::StepLimit => Terminus::StepLimit,
        };
        NetLine { value: tracer.value, points, start: from.terminus, end, beside_part_channel: false }
    }

    /// The place, not yet used, at which a line has ended.
    fn arrived_at(&self, line: &NetLine, places: &[Place], used: &[bool]) -> Option<usize> {
        let outline = self.section().outline();
        let n = outline.n();
        let end = *line.points.last()?;
        let tolerance = SAME_PLACE * outline.size();
        let at_vertex = |k: usize| outline.point(k).is_some_and(|w| (w - end).norm() <= tolerance);
        let shares = |side: usize, vertex: usize| vertex == side || vertex == (side + 1) % n;
        // Beside a vertex a line may end on the one side and its place be on the other.
        let beside = |terminus: Terminus| match (line.end, terminus) {
            (Terminus::Vertex(a), Terminus::Vertex(b)) => a == b,
            (Terminus::Vertex(v), Terminus::Side(side)) | (Terminus::Side(side), Terminus::Vertex(v)) => {
                shares(side, v)
            }
            (Terminus::Side(a), Terminus::Side(b)) => {
                a == b || (0..2).any(|i| shares(b, (a + i) % n) && at_vertex((a + i) % n))
            }
            _ => false,
        };
        // From a vertex at infinity a value has but one line.
        let at_infinity = |t: Terminus| matches!(t, Terminus::Vertex(v) if outline.point(v).is_none());
        (0..places.len())
            .filter(|&i| !used[i] && beside(places[i].terminus))
            .map(|i| (i, if at_infinity(line.end) { 0.0 } else { (places[i].image - end).norm() }))
            .filter(|&(_, distance)| distance <= tolerance)
            .min_by(|a, b| a.1.total_cmp(&b.1))
            .map(|(i, _)| i)
    }

    /// Flow lines, and the total flux.
    fn flow_lines(&self, increment: f64, options: &FlowNetOptions) -> (Vec<NetLine>, f64) {
        let pieces = boundary::pieces(self, Constant::Stream);
        // A stretch whose flux is rounding, as deep in a dead end, counts for nothing.
        let stretches = |sense: f64| -> Vec<Stretch> {
            let all = self.stretches(&pieces, sense).into_iter();
            all.filter(|s| s.flux.abs() > WHOLE * increment).collect()
        };
        let (entering, leaving) = (stretches(1.0), stretches(-1.0));
        let total = |s: &[Stretch]| s.iter().map(|s| s.flux.abs()).sum::<f64>();
        let through = total(&entering).max(total(&leaving));
        let stretches = if leaving.len() < entering.len() { leaving } else { entering };
        let close = CLOSE * increment;
        let wanted: Vec<(Place, f64, bool)> =
            stretches.iter().flat_map(|s| self.begun_on(s, increment, close)).collect();
        let lines = wanted.par_iter().filter_map(|(place, value, beside_part_channel)| {
            let tracer = self.tracer(Constant::Stream, *value, close, options);
            tracer
                .reaches(place.image)
                .then(|| NetLine { beside_part_channel: *beside_part_channel, ..self.line(&tracer, place) })
        });
        (lines.collect(), through)
    }

    /// Stretches of one level through which the flow enters (`sense` 1) or leaves (−1), in walking order.
    fn stretches(&self, pieces: &[Piece], sense: f64) -> Vec<Stretch> {
        let n = self.section().outline().n();
        let follows = |a: &Piece, b: &Piece| {
            let joined = b.side == a.side || (b.side == (a.side + 1) % n && !boundary::jumps(self, b.side));
            joined && (b.values[0] - a.values[1]).abs() <= 1e-9 * (1.0 + a.values[1].abs())
        };
        let flows = |p: &Piece| sense * (p.values[1] - p.values[0]) > 0.0;
        // Begin where a stretch begins, so that none is cut in two by the start of the list.
        let count = pieces.len();
        let first = (0..count)
            .find(|&i| {
                let (before, here) = (&pieces[(i + count - 1) % count], &pieces[i]);
                !(flows(before) && flows(here) && follows(before, here))
            })
            .unwrap_or(0);
        let mut out: Vec<Stretch> = Vec::new();
        let mut last: Option<&Piece> = None;
        for i in 0..count {
            let piece = &pieces[(first + i) % count];
            if flows(piece) {
                let flux = piece.values[1] - piece.values[0];
                match (out.last_mut(), last) {
                    (Some(stretch), Some(before)) if flows(before) && follows(before, piece) => {
                        stretch.pieces.push(*piece);
                        stretch.flux += flux;
                    }
                    _ => out.push(Stretch { pieces: vec![*piece], flux }),
                }
            }
            last = Some(piece);
        }
        out
    }

    /// Where flow lines begin on a stretch: at whole channels from its start, or from its end if the start is a corner
    /// where the flux has no bound.
    fn begun_on(&self, stretch: &Stretch, increment: f64, close: f64) -> Vec<(Place, f64, bool)> {
        let (Some(first), Some(last)) = (stretch.pieces.first(), stretch.pieces.last()) else {
            return Vec::new();
        };
        let unbounded = [first.kept_off[0], last.kept_off[1]];
        let from_end = unbounded[0] && !unbounded[1];
        let (origin, step) = if from_end {
            (last.values[1], -increment.copysign(stretch.flux))
        } else {
            (first.values[0], increment.copysign(stretch.flux))
        };
        let channels = stretch.flux.abs() / increment;
        let fraction = channels - (channels + WHOLE).floor();
        let whole = fraction < WHOLE;
        let count =
            if whole { (channels.round() as usize).saturating_sub(1) } else { channels.floor() as usize };
        let count = count.min(MAX_FLOW_LINES);
        let last_is_beside_part = !(whole || unbounded[0] || unbounded[1]);
        let mut out = Vec::new();
        for m in 1..=count {
            let value = origin + step * m as f64;
            let places = self.places(&stretch.pieces, Constant::Stream, value, close);
            out.extend(places.into_iter().map(|p| (p, value, last_is_beside_part && m == count)));
        }
        out
    }
}

/// Neighbouring pieces of held sides with the flow in one direction.
#[derive(Debug, Clone)]
struct Stretch {
    pieces: Vec<Piece>,
    flux: f64,
}
