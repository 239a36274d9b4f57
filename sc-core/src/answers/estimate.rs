//! How good the answers are.
//!
//! Nothing that follows from one map by algebra says anything of that map: `K(√λ)/K(√(1−λ))` times its reciprocal is
//! 1 for a wrong `λ` too, and a residual taken with the quadrature that produced it is silent about the quadrature.
//! So the section is solved a second time in another way: another vertex at infinity, other cuts of the sides for the
//! start, another quadrature order, side lengths disturbed by a few units of their rounding, and the conductance from
//! the quadrature of the conjugate problem's `W'` where the first takes the arithmetic–geometric mean. The difference
//! of the two solutions, with a factor and a floor, is the bound.

/// Factor on the difference of the two solutions.
const SAFETY: f64 = 4.0;
/// Floor of a relative bound per side: rounding in the angles and directions that both solutions share.
const FLOOR_PER_SIDE: f64 = 0.5 * f64::EPSILON;
/// Floor of a relative bound.
const FLOOR: f64 = 48.0 * f64::EPSILON;
/// With a second solution the side residual enters with this factor, times the root of the number of sides.
const RESIDUAL: f64 = 2.0;
/// Without a second solution: the side residual enters with this factor, times the number of sides.
const UNCHECKED: f64 = 4.0;

/// What the bounds are made of.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Evidence {
    pub(crate) sides: usize,
    /// Largest side residual with another quadrature rule than the solution's.
    pub(crate) residual: f64,
    /// Largest relative rounding of a side length by the rounding of its ends.
    pub(crate) rounding: f64,
    /// Natural logarithm of the ratio of the largest to the smallest gap.
    pub(crate) ln_spread: f64,
    /// Whether there is a second solution.
    pub(crate) checked: bool,
}

impl Evidence {
    /// Floor of a relative bound. An exponent off by ε changes an integral over gaps of ratio `r` by `ε ln r`.
    pub(crate) fn floor(&self) -> f64 {
        FLOOR + self.sides as f64 * FLOOR_PER_SIDE + 0.5 * f64::EPSILON * self.ln_spread
    }

    /// Relative bound from the relative difference of two solutions.
    pub(crate) fn relative(&self, difference: f64) -> f64 {
        // Two solutions that stopped at one loose tolerance may agree better than they are right.
        let left_over = if self.checked {
            RESIDUAL * (self.sides as f64).sqrt() * self.residual
        } else {
            UNCHECKED * self.sides as f64 * (self.residual + self.rounding)
        };
        SAFETY * difference + left_over + self.floor()
    }
}
