//! A section with its ends at infinity cut off.

use std::f64::consts::PI;

use num_complex::Complex64;
use sc_core::outline::Vertex;

use super::NoBounds;
use crate::held_section::HeldSection;

/// Channels are cut this many widths beyond the last vertex, where fields differ from their limit by `exp(−4π)`.
const WIDTHS: f64 = 4.0;
/// Wider ends are cut along an arc at this many sizes of the finite part.
const SIZES: f64 = 60.0;
/// Length of the arc's sides, in radians.
const ARC: f64 = PI / 12.0;

/// What holds on a side of the closed polygon.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Kind {
    /// Held, by run 0 or 1.
    Held(usize),
    /// Insulated, in gap 0 or 1.
    Insulated(usize),
    /// Cut through an end: between what holds on the sides that ran off there. Ends are numbered.
    Cut { end: usize, between: [Side; 2] },
}

/// A side that is not a cut.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Side {
    Held(usize),
    Insulated(usize),
}

/// A bounded polygon, walked with the section on the left, that may touch itself along walls.
#[derive(Debug)]
pub(super) struct Closed {
    pub(super) points: Vec<Complex64>,
    pub(super) kinds: Vec<Kind>,
}

impl Closed {
    pub(super) fn new(section: &HeldSection) -> Result<Closed, NoBounds> {
        let n = section.vertices.len();
        let sides = sides(section)?;
        let finite: Vec<Complex64> = section.vertices.iter().filter_map(Vertex::point).collect();
        let centre = finite.iter().sum::<Complex64>() / finite.len() as f64;
        let size = finite.iter().map(|z| (z - centre).norm()).fold(0.0, f64::max);
        let (mut points, mut kinds) = (Vec::new(), Vec::new());
        for k in 0..n {
            let (before, after) = ((k + n - 1) % n, (k + 1) % n);
            let of = |side: Side| match side {
                Side::Held(run) => Kind::Held(run),
                Side::Insulated(gap) => Kind::Insulated(gap),
            };
            match section.vertices[k] {
                Vertex::At(z) => {
                    points.push(z);
                    kinds.push(of(sides[k]));
                }
                Vertex::Away { arriving, leaving } => {
                    let end = |v: usize| section.vertices[v].point().unwrap_or_default();
                    let arc =
                        far_points(&finite, centre, size, [end(before), end(after)], [arriving, leaving]);
                    let cut = Kind::Cut { end: k, between: [sides[before], sides[k]] };
                    kinds.extend(std::iter::repeat_n(cut, arc.len() - 1));
                    kinds.push(of(sides[k]));
                    points.extend(arc);
                }
            }
        }
        Ok(Closed { points, kinds })
    }

    pub(super) fn area(&self) -> f64 {
        let n = self.points.len();
        let from = |k: usize| self.points[k % n] - self.points[0];
        (0..n).map(|k| 0.5 * (from(k).conj() * from(k + 1)).im).sum()
    }
}

/// The run or gap of each side, if there are two of each.
fn sides(section: &HeldSection) -> Result<Vec<Side>, NoBounds> {
    let n = section.electrodes.len();
    let held = |k: usize| section.electrodes[k % n];
    let starts: Vec<usize> = (0..n).filter(|&k| held(k).is_some() && held(k + n - 1).is_none()).collect();
    let changes = (0..n).filter(|&k| held(k).is_some() && held(k + 1).is_some() && held(k) != held(k + 1));
    let runs = starts.len() + changes.count();
    if starts.len() != 2 || runs != 2 || held(starts[0]) == held(starts[1]) {
        return Err(NoBounds::Runs { runs });
    }
    let mut sides = vec![Side::Insulated(0); n];
    let mut run = 0;
    for k in starts[0]..starts[0] + n {
        run = if k % n == starts[1] { 1 } else { run };
        sides[k % n] = if held(k).is_some() { Side::Held(run) } else { Side::Insulated(run) };
    }
    Ok(sides)
}

/// The points where an end is cut, from the side that arrives there to the side that leaves.
fn far_points(
    finite: &[Complex64],
    centre: Complex64,
    size: f64,
    ends: [Complex64; 2],
    headings: [f64; 2],
) -> Vec<Complex64> {
    let [out, back] = headings.map(|degrees| {
        let (sin, cos) = degrees.to_radians().sin_cos();
        // Headings along the axes are exact.
        let tidy = |x: f64| if x.abs() < 1e-14 { 0.0 } else { x };
        Complex64::new(tidy(cos), tidy(sin))
    });
    let turn = headings[1] - headings[0];
    if (turn.rem_euclid(360.0) + 1e-9) % 360.0 < 2e-9 && turn.abs() < 180.0 {
        let along = |z: Complex64| (z * out.conj()).re;
        let width = ((ends[1] - ends[0]) * out.conj()).im.abs();
        let last = finite.iter().map(|&z| along(z)).fold(f64::NEG_INFINITY, f64::max);
        return ends.map(|z| z + out * (last + WIDTHS * width - along(z))).to_vec();
    }
    let radius = SIZES * if size > 0.0 { size } else { 1.0 };
    // Where the half-lines leave the circle about the centre.
    let [first, last] = [(ends[0], out), (ends[1], back)].map(|(z, heading)| {
        let offset = (z - centre) * heading.conj();
        z + heading * ((radius * radius - offset.im * offset.im).sqrt() - offset.re)
    });
    // From the one to the other with the section on the left: the section turns counter-clockwise in between.
    let whole = ((last - centre) / (first - centre)).arg().rem_euclid(2.0 * PI);
    let whole = if turn > 350.0 && whole < PI { whole + 2.0 * PI } else { whole };
    let parts = (whole / ARC).ceil().max(1.0);
    let inner = (1..parts as usize)
        .map(|k| centre + (first - centre) * Complex64::from_polar(1.0, whole * k as f64 / parts));
    std::iter::once(first).chain(inner).chain([last]).collect()
}
