//! Resistance of a section between its channel ends: straight lengths plus a correction.
//!
//! All sides are insulated; currents enter through channel ends (vertices at infinity with `α = 0`). Far out in arm `i`
//! of width `h_i` the potential is linear, so that for arms of lengths `L_i`, measured from chosen points,
//!
//! ```text
//! R = Σ I_i φ_i = Σ I_i² L_i/h_i + excess,     φ(ζ) = −(1/π) Σ_j I_j ln |ζ − x_j|,     Σ I_i = 0
//! ```
//! (`R` is the dissipated power; for a current 1 from one end to another it is the resistance in squares.) The excess
//! is the limit for long arms, reached exactly: nothing is cut off.
//!
//! Source: the additive law of long quadrilaterals (Papamichael and Stylianopoulos); corners of films: Hall 1967.

use super::bounded::Bounded;
use crate::map::{HalfPlaneMap, HalfPlanePoint, MapError, MapOptions};
use crate::outline::{Outline, Point};
use num_complex::Complex64;
use std::f64::consts::PI;
use thiserror::Error;

/// How deep in an arm the straight flow is read off: `e^−36` of the distance to the next prevertex, where it is
/// disturbed by less than rounding.
const DEEP: f64 = 36.0;
/// Currents must balance to this part of the largest.
const BALANCE: f64 = 1e-12;

/// A current through a channel end.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ArmFlow {
    /// Walking index of the vertex at infinity.
    pub end: usize,
    /// Current into the section; negative where it leaves.
    pub current: f64,
    /// The arm's length is measured from the foot of this point, along the arm.
    pub from: Point,
}

/// Why there is no excess.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum ChannelError {
    /// There is no map.
    #[error(transparent)]
    Map(#[from] MapError),
    /// The vertex is no end of a straight channel.
    #[error(
        "vertex {vertex} is not the end of a straight channel (its two sides must run off in one direction)"
    )]
    NotAChannel {
        /// The vertex.
        vertex: usize,
    },
    /// What flows in does not flow out.
    #[error("the currents through the ends add up to {sum}, not to zero")]
    Unbalanced {
        /// Their sum.
        sum: f64,
    },
}

/// Computes the excess `R − Σ I_i² L_i/h_i` of a section with insulated sides.
///
/// # Errors
/// [`ChannelError`] if an end is no channel, the currents do not balance, or there is no map.
///
/// # Accuracy
/// The bound is four times the difference of two independent maps and a floor; the reference bends and junctions are
/// met to 1e-13.
///
/// # Examples
/// A right-angle bend of two equal arms: `1 − (2/π) ln 2` squares over the arms measured from the inner corner.
/// ```
/// use sc_core::answers::{ArmFlow, channel_excess};
/// use sc_core::outline::{Outline, Point, Vertex};
///
/// let bend = Outline::new(&[
///     Vertex::away(90.0), Vertex::at(0.0, 0.0), Vertex::away(0.0), Vertex::at(1.0, 1.0),
/// ])?.value;
/// let inner = Point::new(1.0, 1.0);
/// let flows = [
///     ArmFlow { end: 0, current: 1.0, from: inner },
///     ArmFlow { end: 2, current: -1.0, from: inner },
/// ];
/// let excess = channel_excess(&bend, &flows)?;
/// let exact = 1.0 - 2.0 / std::f64::consts::PI * 2.0_f64.ln();
/// assert!((excess.value - exact).abs() <= excess.error.min(1e-12));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
pub fn channel_excess(outline: &Outline, flows: &[ArmFlow]) -> Result<Bounded, ChannelError> {
    let n = outline.n();
    for flow in flows {
        let is_channel =
            flow.end < n && outline.point(flow.end).is_none() && outline.alpha()[flow.end].abs() <= 0.0;
        if !is_channel {
            return Err(ChannelError::NotAChannel { vertex: flow.end });
        }
    }
    let sum: f64 = flows.iter().map(|f| f.current).sum();
    let largest = flows.iter().fold(0.0_f64, |m, f| m.max(f.current.abs()));
    if sum.is_nan() || sum.abs() > BALANCE * largest {
        return Err(ChannelError::Unbalanced { sum });
    }
    let first = excess(&HalfPlaneMap::solve(outline, &MapOptions::default())?, flows);
    let other =
        MapOptions { infinity_rank: 1, split: 2.7, nodes: 15, disturbance: 4.0, ..MapOptions::default() };
    let second = excess(&HalfPlaneMap::solve(outline, &other)?, flows);
    // What is subtracted is about DEEP/π squares for each arm.
    let scale = largest * largest * (1.0 + flows.len() as f64 * DEEP / PI);
    let floor = (8.0 + n as f64) * f64::EPSILON * scale;
    Ok(Bounded::new(first, 4.0 * (first - second).abs() + floor))
}

fn excess(map: &HalfPlaneMap, flows: &[ArmFlow]) -> f64 {
    let outline = map.outline();
    let n = outline.n();
    let line_index: Vec<usize> = flows.iter().map(|f| map.line_index_of(f.end)).collect();
    flows
        .iter()
        .zip(&line_index)
        .map(|(flow, &j)| {
            // A point deep in the arm, on the side that arrives at its end.
            let deep = if j < n - 1 {
                HalfPlanePoint { anchor: j, ln_offset: Complex64::new(-DEEP, PI) }
            } else {
                let anchor = n - 2;
                let span = if n > 2 { map.line().ln_distance(0, anchor) } else { 0.0 };
                let ln_offset = (span - map.product().ln_unit(anchor)).max(0.0) + DEEP;
                HalfPlanePoint { anchor, ln_offset: Complex64::new(ln_offset, 0.0) }
            };
            let potential: f64 = flows
                .iter()
                .zip(&line_index)
                .filter(|(_, i)| **i < n - 1)
                .map(|(other, &i)| -other.current / PI * map.product().ln_from(i, deep).re)
                .sum();
            let heading = outline.side_direction(flow.end + n - 1);
            let (p, q) = (outline.point(flow.end + n - 1), outline.point(flow.end + 1));
            let width = match (p, q) {
                (Some(p), Some(q)) => ((q - p) * heading.conj()).im.abs(),
                // Between two vertices at infinity there is always a finite one.
                _ => f64::NAN,
            };
            let length = ((map.forward(deep) - flow.from) * heading.conj()).re;
            flow.current * (potential - flow.current * length / width)
        })
        .sum()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::outline::Vertex;

    #[test]
    fn a_straight_channel_has_no_excess() {
        let strip = [Vertex::away(0.0), Vertex::at(0.0, 2.0), Vertex::away(180.0), Vertex::at(3.0, 0.0)];
        let outline = Outline::new(&strip).unwrap().value;
        let flow = |end, current| ArmFlow { end, current, from: Point::new(0.0, 0.0) };
        let excess = channel_excess(&outline, &[flow(0, 1.0), flow(2, -1.0)]).unwrap();
        assert!(excess.value.abs() <= excess.error && excess.error < 1e-12, "{excess:?}");
    }

    #[test]
    fn ends_that_are_no_channels_and_currents_that_do_not_balance_are_refused() {
        let wedge = [Vertex::Away { arriving: 180.0, leaving: 0.0 }, Vertex::at(0.0, 0.0)];
        let outline = Outline::new(&wedge).unwrap().value;
        let flow = |end, current| ArmFlow { end, current, from: Point::new(0.0, 0.0) };
        assert!(matches!(
            channel_excess(&outline, &[flow(0, 1.0)]),
            Err(ChannelError::NotAChannel { vertex: 0 })
        ));
        let strip = [Vertex::away(0.0), Vertex::at(0.0, 2.0), Vertex::away(180.0), Vertex::at(3.0, 0.0)];
        let outline = Outline::new(&strip).unwrap().value;
        assert!(matches!(
            channel_excess(&outline, &[flow(0, 1.0), flow(2, -0.5)]),
            Err(ChannelError::Unbalanced { .. })
        ));
    }
}
