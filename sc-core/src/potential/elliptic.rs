//! Complete elliptic integrals by the arithmetic–geometric mean, and the conductance of a quadrilateral.

use std::f64::consts::{FRAC_PI_2, LN_2};
use thiserror::Error;

/// Bound on the mean's iteration: it converges quadratically, and a ratio of 1e-300 takes 13 steps.
const MAX_AGM_STEPS: usize = 40;
/// Below `e^−600` a modulus is replaced by its leading logarithm, which is then exact to all digits.
const TINY_LN: f64 = -600.0;

/// What is wrong with a modulus.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum EllipticError {
    /// The modulus is not in `0 ≤ k < 1`.
    #[error("the elliptic modulus {modulus} is not in 0 <= k < 1")]
    ModulusOutOfRange {
        /// The modulus given.
        modulus: f64,
    },
}

/// Computes the complete elliptic integral of the first kind.
///
/// ```text
/// K(k) = ∫₀^{π/2} dθ / √(1 − k² sin²θ) = π / (2 agm(1, k')),   k' = √(1 − k²)
/// ```
/// # Errors
/// [`EllipticError::ModulusOutOfRange`] if `k` is NaN, negative, or 1 and above.
/// # Accuracy
/// Relative error below 4 ε at moduli away from 1; near 1 the modulus itself carries the error.
/// # Examples
/// ```
/// // K(1/√2) = Γ(1/4)²/(4√π)
/// let k = sc_core::potential::complete_k(0.5_f64.sqrt())?;
/// assert!((k - 1.854_074_677_301_371_9).abs() < 2e-15);
/// # Ok::<(), sc_core::potential::EllipticError>(())
/// ```
/// # Source
/// DLMF 19.2.8 (definition), 19.8.5 (mean); numbers from memory.
pub fn complete_k(k: f64) -> Result<f64, EllipticError> {
    if !(0.0..1.0).contains(&k) {
        return Err(EllipticError::ModulusOutOfRange { modulus: k });
    }
    // (1 − k)(1 + k) keeps the digits that 1 − k² would lose.
    Ok(FRAC_PI_2 / agm_with_one(((1.0 - k) * (1.0 + k)).sqrt()))
}

/// `agm(1, b)`
fn agm_with_one(b: f64) -> f64 {
    let (mut a, mut b) = (1.0_f64, b);
    for _ in 0..MAX_AGM_STEPS {
        if (a - b).abs() <= 2.0 * f64::EPSILON * a {
            break;
        }
        (a, b) = (0.5 * (a + b), (a * b).sqrt());
    }
    0.5 * (a + b)
}

/// `1/K(√(1−m))` up to the factor `2/π`, that is `agm(1, √m)`, from `ln m`.
fn agm_of_root(ln_m: f64) -> f64 {
    if ln_m < TINY_LN {
        // K(k') → ln(4/k) as k → 0; the next term is of order k² ln k.
        FRAC_PI_2 / (2.0 * LN_2 - 0.5 * ln_m)
    } else {
        agm_with_one((0.5 * ln_m).exp())
    }
}

/// The conductance between two opposite sides of a quadrilateral with cross-ratio `λ`.
///
/// ```text
/// λ = (b−a)(d−c)/((c−a)(d−b)),  electrodes [a,b] and [c,d],   G = K(√λ)/K(√(1−λ)) = agm(1, √λ)/agm(1, √(1−λ))
/// ```
/// Both `ln λ` and `ln(1−λ)` are given, so that `G` keeps its digits when either is 1e-130, or `e^−10000`.
///
/// # Accuracy
/// Relative error below 5 ε plus what the logarithms carry.
pub fn conductance_of_cross_ratio(ln_lambda: f64, ln_rest: f64) -> f64 {
    agm_of_root(ln_lambda) / agm_of_root(ln_rest)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn equal_halves_conduct_one() {
        let half = 0.5_f64.ln();
        assert!((conductance_of_cross_ratio(half, half) - 1.0).abs() < 1e-15);
    }

    #[test]
    fn conductance_and_its_conjugate_are_reciprocal() {
        for ln_lambda in [-1e-3, -1.0, -50.0, -590.0, -610.0, -1e5] {
            let ln_rest = (-f64::exp_m1(ln_lambda)).ln();
            let product = conductance_of_cross_ratio(ln_lambda, ln_rest)
                * conductance_of_cross_ratio(ln_rest, ln_lambda);
            assert!((product - 1.0).abs() < 1e-15);
        }
    }

    #[test]
    fn long_rectangles_follow_the_crowding_law() {
        // K'/K at k = 4 e^{−πa/2}: G of a 100:1 rectangle between its short ends is 1/100.
        // λ of the long sides' prevertices: ln λ ≈ ln 16 − π a (Driscoll and Trefethen 2002, from memory).
        let a = 100.0;
        let ln_lambda = 16.0_f64.ln() - std::f64::consts::PI * a;
        let g = conductance_of_cross_ratio(ln_lambda, -ln_lambda.exp());
        assert!((g * a - 1.0).abs() < 1e-14, "{g}");
    }

    #[test]
    fn complete_k_rejects_a_modulus_of_one() {
        for k in [1.0, -0.1, f64::NAN, 2.0] {
            assert!(complete_k(k).is_err());
        }
    }
}
