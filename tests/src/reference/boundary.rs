//! The functions that give boundary values in the reference files.

use std::f64::consts::{FRAC_PI_2, TAU};

use num_complex::Complex64;
use serde::Deserialize;

/// A function along a side, named by its formula in the files.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
pub enum BoundaryFunction {
    /// x²
    #[serde(rename = "x^2")]
    XSquared,
    /// y² − x
    #[serde(rename = "y^2-x")]
    YSquaredLessX,
    /// x³ + xy
    #[serde(rename = "x^3+x*y")]
    Cubic,
    /// x(1 − x)
    #[serde(rename = "x*(1-x)")]
    Parabola,
    /// x − x³
    #[serde(rename = "x-x^3")]
    XLessXCubed,
    /// 1 + x
    #[serde(rename = "1+x")]
    OnePlusX,
    /// 1 − x
    #[serde(rename = "1-x")]
    OneLessX,
    /// x² − y²
    #[serde(rename = "x^2-y^2")]
    SquareRealPart,
    /// Re (x + iy)⁵
    #[serde(rename = "Re (x+iy)^5")]
    FifthPowerRealPart,
    /// eˣ sin y
    #[serde(rename = "exp(x) sin(y)")]
    ExpSine,
    /// ln |z − (20 + 7i)|
    #[serde(rename = "ln|z-(20+7i)|")]
    LogDistance,
    /// r^(2/3) sin(2θ/3), r and θ about (1, 1), θ from the direction of +y, 0 to 3π/2
    #[serde(rename = "r^(2/3)*sin(2*theta/3)")]
    ReentrantCorner,
    /// r^(1/2) sin(θ/2), r and θ about the origin, θ from the direction of +x, 0 to 2π
    #[serde(rename = "r^(1/2)*sin(theta/2)")]
    SlitTip,
    /// eˣ
    #[serde(rename = "exp(x)")]
    Exp,
    /// y cos x
    #[serde(rename = "cos(x)*y")]
    CosineTimesY,
}

impl BoundaryFunction {
    /// The value at a point of the boundary.
    #[must_use]
    pub fn value(self, z: Complex64) -> f64 {
        let (x, y) = (z.re, z.im);
        match self {
            Self::XSquared => x * x,
            Self::YSquaredLessX => y * y - x,
            Self::Cubic => x * x * x + x * y,
            Self::Parabola => x * (1.0 - x),
            // x(1 − x)(1 + x) keeps the digits that x − x³ loses near 1
            Self::XLessXCubed => x * (1.0 - x) * (1.0 + x),
            Self::OnePlusX => 1.0 + x,
            Self::OneLessX => 1.0 - x,
            Self::SquareRealPart => (x - y) * (x + y),
            Self::FifthPowerRealPart => z.powi(5).re,
            Self::ExpSine => x.exp() * y.sin(),
            Self::LogDistance => (z - Complex64::new(20.0, 7.0)).norm().ln(),
            Self::ReentrantCorner => {
                let from_corner = z - Complex64::new(1.0, 1.0);
                let theta = angle_from(FRAC_PI_2, from_corner);
                from_corner.norm().powf(2.0 / 3.0) * (2.0 / 3.0 * theta).sin()
            }
            Self::SlitTip => z.norm().sqrt() * (0.5 * angle_from(0.0, z)).sin(),
            Self::Exp => x.exp(),
            Self::CosineTimesY => x.cos() * y,
        }
    }
}

/// Angle of `z` from a direction, in 0 to 2π.
fn angle_from(direction: f64, z: Complex64) -> f64 {
    // + 0.0 turns −0 into 0, so that a point on the cut itself is at angle 0, not 2π
    let angle = (z.im + 0.0).atan2(z.re) - direction;
    if angle < 0.0 { angle + TAU } else { angle }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(x: f64, y: f64) -> Complex64 {
        Complex64::new(x, y)
    }

    #[test]
    fn corner_function_vanishes_on_both_sides_of_its_corner() {
        for distance in [0.0, 0.25, 1.0] {
            let up = BoundaryFunction::ReentrantCorner.value(at(1.0, 1.0 + distance));
            let right = BoundaryFunction::ReentrantCorner.value(at(1.0 + distance, 1.0));
            assert!(up.abs() < 1e-15 && right.abs() < 1e-15, "{up:e} {right:e}");
        }
        // straight down: θ = π, r = 1, sin(2π/3)
        let below = BoundaryFunction::ReentrantCorner.value(at(1.0, 0.0));
        assert!((below - 0.75_f64.sqrt()).abs() < 1e-15, "{below}");
    }

    #[test]
    fn slit_function_vanishes_on_the_slit_and_peaks_opposite() {
        assert!(BoundaryFunction::SlitTip.value(at(0.5, 0.0)).abs() < 1e-15);
        assert!(BoundaryFunction::SlitTip.value(at(0.5, -0.0)).abs() < 1e-15);
        assert!((BoundaryFunction::SlitTip.value(at(-4.0, 0.0)) - 2.0).abs() < 1e-15);
    }

    #[test]
    fn fifth_power_matches_its_expansion() {
        let (x, y) = (0.75, -0.5);
        let expanded = x * x * x * x * x - 10.0 * x * x * x * y * y + 5.0 * x * y * y * y * y;
        assert!((BoundaryFunction::FifthPowerRealPart.value(at(x, y)) - expanded).abs() < 1e-15);
    }
}
