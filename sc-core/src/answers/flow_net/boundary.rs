//! The boundary cut into pieces on which the potential (insulated sides) or the stream function (held sides) is
//! monotone, and the places where it takes a value.

use crate::answers::Solution;
use crate::map::HalfPlanePoint;
use num_complex::Complex64;
use std::f64::consts::{LN_2, PI};

/// Nearest approach to a vertex in `ln offset`: at the weakest power, 1/2, `W` has then its value at the vertex to
/// `e^−40`.
const NEAREST: f64 = -80.0;
/// The same distance beyond the last prevertex stands for the prevertex at infinity.
const FARTHEST: f64 = 80.0;
/// The slope is looked at for a change of sign from here up; nearer to the vertex its power law holds.
const FIRST_SAMPLE: f64 = -8.0;
/// Distance of these looks in `ln offset`: at an offset between prevertices `W'` has few zeros, and far apart.
const SAMPLE_STEP: f64 = 0.6;
/// Where different levels touch, the stream function grows without bound: nearer than this part of the section's
/// size no flow line is begun.
const KEEP_OFF: f64 = 4e-3;
/// Depth, as `ln offset`, in a corner where levels touch at which equipotentials begin and end: `φ` is there a function
/// of the angle alone to `e^−8`, and nearer to the pole the integral of the field loses digits.
const DEEP: f64 = 8.0;
/// The same where they touch at infinity: farther out than this many sizes no line is begun.
const FAR_OFF: f64 = 3.0;
/// Safeguarded Newton steps: bisection alone takes 55 from the widest bracket to rounding.
const MAX_ROOT_STEPS: usize = 120;

/// What is constant along a line: `Re(turn · W)`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Constant {
    Potential,
    Stream,
}

impl Constant {
    pub(super) fn turn(self) -> Complex64 {
        match self {
            Constant::Potential => Complex64::new(1.0, 0.0),
            Constant::Stream => Complex64::new(0.0, -1.0),
        }
    }

    pub(super) fn of(self, w: Complex64) -> f64 {
        match self {
            Constant::Potential => w.re,
            Constant::Stream => w.im,
        }
    }
}

/// A stretch of one side, seen from one prevertex, in walking order.
#[derive(Debug, Clone, Copy)]
pub(super) struct Piece {
    /// Line index of the side.
    pub(super) side: usize,
    anchor: usize,
    /// 0 to the right of the anchor, π to its left.
    angle: f64,
    /// `Re ln offset` at the start and at the end.
    ends: [f64; 2],
    /// What is constant on lines that end here, at the start and at the end.
    pub(super) values: [f64; 2],
    /// Whether the start or the end is a vertex where held meets insulated.
    at_end: [bool; 2],
    /// Whether the start or the end was kept off a vertex where different levels touch.
    pub(super) kept_off: [bool; 2],
}

/// Pieces of all sides of one kind in walking order, from side 0 of the line.
pub(super) fn pieces(solution: &Solution, constant: Constant) -> Vec<Piece> {
    let n = solution.section().outline().n();
    let held = |k: usize| level(solution, k).is_some();
    let wanted = constant == Constant::Stream;
    let mut out = Vec::new();
    for side in (0..n).filter(|&k| held(k) == wanted) {
        let starts_at_end = held((side + n - 1) % n) != wanted;
        let stops_at_end = held((side + 1) % n) != wanted;
        let first = out.len();
        add_side(solution, constant, side, &mut out);
        if let Some(piece) = out.get_mut(first) {
            piece.at_end[0] = starts_at_end;
        }
        if let Some(piece) = out.last_mut() {
            piece.at_end[1] = stops_at_end;
        }
    }
    out
}

/// Level of a side by its line index.
pub(super) fn level(solution: &Solution, side: usize) -> Option<f64> {
    solution.section().level_of_side(solution.map().vertex_of(side))
}

/// Whether different levels touch at a line point (`n − 1` is infinity).
pub(super) fn jumps(solution: &Solution, j: usize) -> bool {
    let n = solution.section().outline().n();
    match (level(solution, (j + n - 1) % n), level(solution, j)) {
        (Some(a), Some(b)) => a.total_cmp(&b).is_ne(),
        _ => false,
    }
}

/// `Re ln offset` that stands for infinity, seen from an anchor.
pub(super) fn remote(solution: &Solution, anchor: usize) -> f64 {
    beyond(solution, anchor) + FARTHEST
}

/// `Re ln offset` of the span of all prevertices, seen from an anchor.
pub(super) fn beyond(solution: &Solution, anchor: usize) -> f64 {
    let line = solution.map().line();
    let last = line.n_points() - 1;
    let span =
        if last > 0 { line.ln_distance(0, last) - solution.map().product().ln_unit(anchor) } else { 0.0 };
    span.max(0.0)
}

/// `Re ln offset` at which an equipotential begins and ends where different levels touch.
pub(super) fn depth(solution: &Solution, j: usize, anchor: usize) -> f64 {
    let n = solution.section().outline().n();
    if solution.section().outline().point(solution.map().vertex_of(j)).is_none() {
        nearest(solution, j, anchor)
    } else if j < n - 1 {
        -DEEP
    } else {
        beyond(solution, anchor) + DEEP
    }
}

/// `Re ln offset` nearest to a vertex (line index; `n − 1` is infinity) that is used on the sides beside it.
fn nearest(solution: &Solution, j: usize, anchor: usize) -> f64 {
    let map = solution.map();
    let n = map.outline().n();
    if !jumps(solution, j) {
        return if j < n - 1 { NEAREST } else { remote(solution, anchor) };
    }
    let alpha = map.outline().alpha()[map.vertex_of(j)];
    // f ≈ F t^α/α beside a corner, F ln t in a channel; t falls toward a finite prevertex and grows toward infinity.
    let ln_f = if j < n - 1 { map.ln_leading(j) } else { map.ln_scale() };
    let size = map.outline().size();
    let ln_t = if alpha == 0.0 {
        -(FAR_OFF * size / ln_f.exp()).clamp(1.0, -NEAREST)
    } else {
        let distance = if alpha > 0.0 { KEEP_OFF } else { FAR_OFF };
        ((distance * size * alpha.abs()).ln() - ln_f) / alpha
    };
    let unit = map.product().ln_unit(anchor);
    if j < n - 1 {
        // In a channel the exponent is that of the logarithm: t counts in the anchor's unit.
        if alpha == 0.0 { ln_t } else { ln_t - unit }
    } else {
        (if alpha == 0.0 { beyond(solution, anchor) } else { -unit }) - ln_t
    }
}

/// The same point held from the prevertex nearest to it and, of several that are nearest to rounding, from the one
/// next to it on the axis: the straight way from there passes no other prevertex, and names the side.
pub(super) fn settled(solution: &Solution, p: HalfPlanePoint) -> HalfPlanePoint {
    let map = solution.map();
    let near = map.nearest_anchor(p);
    let (line, unit) = (map.line(), |k: usize| map.product().ln_unit(k));
    let HalfPlanePoint { anchor, ln_offset } = near;
    if !ln_offset.re.is_finite() {
        return near;
    }
    let leftward = ln_offset.im > 0.5 * PI;
    // ζ − x_j in units of ζ − x_anchor, for the points that ζ is beyond.
    let relative = |j: usize| {
        let ratio = (line.ln_distance(anchor.min(j), anchor.max(j)) - ln_offset.re - unit(anchor)).exp();
        let z = Complex64::from_polar(ratio, -ln_offset.im);
        if leftward { z } else { -z }
    };
    let beyond = |j: &usize| {
        let ratio = relative(*j).norm();
        ratio < ln_offset.im.cos().abs()
    };
    let next = if leftward {
        (0..anchor).rev().take_while(beyond).last()
    } else {
        (anchor + 1..line.n_points()).take_while(beyond).last()
    };
    let Some(j) = next else { return near };
    let z = relative(j);
    let ln = 0.5 * (2.0 * z.re + z.norm_sqr()).ln_1p();
    let on_axis = ln_offset.im <= 0.0 || ln_offset.im >= PI;
    let turn = if on_axis { 0.0 } else { z.im.atan2(1.0 + z.re) };
    let moved = ln_offset + Complex64::new(ln + unit(anchor) - unit(j), turn);
    HalfPlanePoint { anchor: j, ln_offset: Complex64::new(moved.re, moved.im.clamp(0.0, PI)) }
}

fn add_side(solution: &Solution, constant: Constant, side: usize, out: &mut Vec<Piece>) {
    let map = solution.map();
    let n = map.outline().n();
    let value_at = |anchor: usize, angle: f64, ln: f64| {
        let p = HalfPlanePoint { anchor, ln_offset: Complex64::new(ln, angle) };
        constant.of(solution.complex_potential(p))
    };
    // At a regular vertex the value itself, so that neighbouring pieces meet exactly.
    let at_vertex = |j: usize, angle: f64, ln: f64| {
        value_at(j, angle, if jumps(solution, j) { ln } else { f64::NEG_INFINITY })
    };
    let at_infinity = || {
        let anchor = n - 2;
        value_at(anchor, 0.0, remote(solution, anchor))
    };
    let kept = |j: usize| jumps(solution, j);
    let half = |k: usize, anchor: usize| map.line().log_gaps()[k] - map.product().ln_unit(anchor) - LN_2;
    if side + 2 < n {
        let (low, high) = (nearest(solution, side, side), nearest(solution, side + 1, side + 1));
        let (top_left, top_right) = (half(side, side), half(side, side + 1));
        let middle = value_at(side, 0.0, top_left);
        out.extend(monotone(
            solution,
            constant,
            Piece {
                side,
                anchor: side,
                angle: 0.0,
                ends: [low.min(top_left), top_left],
                values: [at_vertex(side, 0.0, low), middle],
                at_end: [false; 2],
                kept_off: [kept(side), false],
            },
        ));
        out.extend(monotone(
            solution,
            constant,
            Piece {
                side,
                anchor: side + 1,
                angle: PI,
                ends: [top_right, high.min(top_right)],
                values: [middle, at_vertex(side + 1, PI, high)],
                at_end: [false; 2],
                kept_off: [false, kept(side + 1)],
            },
        ));
        return;
    }
    let outward = side == n - 2;
    let (anchor, angle) = if outward { (n - 2, 0.0) } else { (0, PI) };
    let (near, far) = (nearest(solution, anchor, anchor), nearest(solution, n - 1, anchor));
    let far_value = if kept(n - 1) { value_at(anchor, angle, far) } else { at_infinity() };
    let (inner, outer) = ((near.min(far), at_vertex(anchor, angle, near)), (far, far_value));
    let (a, b) = if outward { (inner, outer) } else { (outer, inner) };
    let (first, last) = if outward { (anchor, n - 1) } else { (n - 1, anchor) };
    out.extend(monotone(
        solution,
        constant,
        Piece {
            side,
            anchor,
            angle,
            ends: [a.0, b.0],
            values: [a.1, b.1],
            at_end: [false; 2],
            kept_off: [kept(first), kept(last)],
        },
    ));
}

/// Cuts a piece where the slope changes its sign.
fn monotone(solution: &Solution, constant: Constant, whole: Piece) -> Vec<Piece> {
    let slope = |ln: f64| {
        let g = solution.log_potential_derivative(whole.at(ln));
        (constant.turn() * g).re
    };
    let (low, high) = (whole.ends[0].min(whole.ends[1]), whole.ends[0].max(whole.ends[1]));
    let from = low.max(FIRST_SAMPLE.min(high));
    let count = ((high - from) / SAMPLE_STEP).ceil().max(1.0) as usize;
    let mut cuts = Vec::new();
    let mut last = (from, slope(from));
    for i in 1..=count {
        let ln = from + (high - from) * i as f64 / count as f64;
        let s = slope(ln);
        if s * last.1 < 0.0 {
            let (mut a, mut b) = (last.0, ln);
            // Sixty halvings of a step of 0.6 reach rounding.
            for _ in 0..60 {
                let middle = 0.5 * (a + b);
                if slope(middle) * last.1 > 0.0 { a = middle } else { b = middle }
            }
            cuts.push(0.5 * (a + b));
        }
        if s != 0.0 {
            last = (ln, s);
        }
    }
    if whole.ends[0] > whole.ends[1] {
        cuts.reverse();
    }
    let mut out = Vec::new();
    let mut rest = whole;
    for cut in cuts {
        let value = constant.of(solution.complex_potential(whole.at(cut)));
        out.push(Piece {
            ends: [rest.ends[0], cut],
            values: [rest.values[0], value],
            kept_off: [rest.kept_off[0], false],
            ..rest
        });
        rest.ends[0] = cut;
        rest.values[0] = value;
        rest.kept_off[0] = false;
    }
    out.push(rest);
    out
}

impl Piece {
    fn at(&self, ln: f64) -> HalfPlanePoint {
        HalfPlanePoint { anchor: self.anchor, ln_offset: Complex64::new(ln, self.angle) }
    }

    /// The place of the piece where the value is taken, if it is. The value at one end counts, at the other not, so
    /// that a value taken where two pieces meet is found once. `close` is a difference that does not count where held
    /// meets insulated.
    pub(super) fn place_of(
        &self,
        solution: &Solution,
        constant: Constant,
        value: f64,
        close: f64,
    ) -> Option<HalfPlanePoint> {
        let above = self.values.map(|v| v >= value);
        if above[0] == above[1] {
            return None;
        }
        if (0..2).any(|i| self.at_end[i] && (self.values[i] - value).abs() <= close) {
            return None;
        }
        let rising = (self.values[1] > self.values[0]) == (self.ends[1] > self.ends[0]);
        let (mut low, mut high) = (self.ends[0].min(self.ends[1]), self.ends[0].max(self.ends[1]));
        let mut ln = (high - 1.0).max(0.5 * (low + high));
        for _ in 0..MAX_ROOT_STEPS {
            let p = self.at(ln);
            let miss = constant.of(solution.complex_potential(p)) - value;
            if miss == 0.0 {
                break;
            }
            if (miss > 0.0) == rising {
                high = ln
            } else {
                low = ln
            }
            let slope = (constant.turn() * solution.log_potential_derivative(p)).re;
            let newton = ln - miss / slope;
            let next = if newton > low && newton < high { newton } else { 0.5 * (low + high) };
            let moved = (next - ln).abs();
            ln = next;
            if moved <= 4.0 * f64::EPSILON * ln.abs().max(1.0) {
                break;
            }
        }
        Some(settled(solution, self.at(ln)))
    }
}
