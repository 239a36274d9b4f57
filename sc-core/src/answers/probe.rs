//! Potential, stream function and gradient at a point.

use super::bounded::Bounded;
use crate::map::InverseError;
use crate::outline::Point;
use thiserror::Error;

/// The gradient at a point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Gradient {
    /// `∇φ`, and a bound on the error of its length.
    Finite {
        /// Components along x and y.
        components: [f64; 2],
        /// Bound on the error of either.
        error: f64,
    },
    /// The point is a vertex toward which the gradient grows without bound.
    Infinite,
}

/// The answer at a point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Probe {
    /// Where.
    pub at: Point,
    /// The side (walking index) it lies on, if any.
    pub side: Option<usize>,
    /// Distance along that side from its start.
    pub s: Option<f64>,
    /// `φ`.
    pub potential: Bounded,
    /// `ψ`; infinite where different levels touch.
    pub stream: Bounded,
    /// `∇φ`.
    pub gradient: Gradient,
}

/// Why there is no answer at a point.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum ProbeError {
    /// The point has no preimage.
    #[error(transparent)]
    Place(#[from] InverseError),
    /// The point is at infinity or not a number.
    #[error("the point ({x}, {y}) is not a finite point")]
    NotFinite {
        /// Its coordinates.
        x: f64,
        /// Its coordinates.
        y: f64,
    },
    /// There is no such side, or no such place on it.
    #[error("side {side} has no place at distance {s}")]
    NoSuchPlace {
        /// Walking index of the side.
        side: usize,
        /// Distance asked for.
        s: f64,
    },
}
