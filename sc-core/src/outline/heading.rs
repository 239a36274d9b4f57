//! Headings of sides that run off to infinity, in degrees.

use std::f64::consts::FRAC_1_SQRT_2;

use super::Point;

/// A heading brought into `[0, 360)`, and onto an axis if rounding explains the difference.
pub(super) fn reduce(degrees: f64) -> f64 {
    let r = degrees.rem_euclid(360.0);
    let axis = 90.0 * (r / 90.0).round();
    let r = if (r - axis).abs() <= rounding(degrees) { axis } else { r };
    // rem_euclid rounds a tiny negative heading up to 360; adding zero makes −0 plain zero.
    if r < 360.0 { r + 0.0 } else { 0.0 }
}

/// Unit vector of a heading; exact at multiples of 90, and with equal components at odd multiples of 45.
pub(super) fn unit(degrees: f64) -> Point {
    let r = reduce(degrees);
    let quarter = (r / 90.0).round();
    let rest = r - 90.0 * quarter;
    let (sin, cos) = if (rest.abs() - 45.0).abs() <= 0.0 {
        (FRAC_1_SQRT_2.copysign(rest), FRAC_1_SQRT_2)
    } else {
        rest.to_radians().sin_cos()
    };
    match quarter as i32 {
        1 => Point::new(-sin, cos),
        2 => Point::new(-cos, -sin),
        3 => Point::new(sin, -cos),
        _ => Point::new(cos, sin),
    }
}

/// Distance of two reduced headings around the circle, in degrees.
pub(super) fn apart(a: f64, b: f64) -> f64 {
    let d = (a - b).abs();
    d.min(360.0 - d)
}

/// What rounding can do to a heading, in degrees.
pub(super) fn rounding(degrees: f64) -> f64 {
    8.0 * f64::EPSILON * degrees.abs().max(360.0)
}

/// Interior angle at infinity in units of π: `−((leaving − arriving) mod 360)/180`, and `−2` for a full turn.
pub(super) fn alpha_at_infinity(arriving: f64, leaving: f64) -> f64 {
    let tolerance = rounding(arriving).max(rounding(leaving));
    let turn = leaving - arriving;
    if (turn - 360.0).abs() <= tolerance {
        return -2.0;
    }
    let reduced = reduce(turn);
    if apart(reduced, 0.0) <= tolerance { 0.0 } else { -reduced / 180.0 }
}

#[cfg(test)]
mod tests {
    #![expect(clippy::float_cmp, reason = "axis headings promise exact angles")]

    use super::*;

    #[test]
    fn axis_headings_are_exact() {
        assert_eq!(unit(0.0), Point::new(1.0, 0.0));
        assert_eq!(unit(90.0), Point::new(0.0, 1.0));
        assert_eq!(unit(-180.0), Point::new(-1.0, 0.0));
        assert_eq!(unit(270.0), Point::new(0.0, -1.0));
        assert_eq!(unit(720.0), Point::new(1.0, 0.0));
        let d = unit(225.0);
        assert_eq!(d.re.to_bits(), d.im.to_bits());
    }

    #[test]
    fn a_full_turn_is_minus_two_and_no_turn_is_zero() {
        assert_eq!(alpha_at_infinity(30.0, 30.0), 0.0);
        assert_eq!(alpha_at_infinity(30.0, 390.0), -2.0);
        assert_eq!(alpha_at_infinity(0.1, 360.1), -2.0);
        assert_eq!(alpha_at_infinity(180.0, 0.0), -1.0);
        assert_eq!(alpha_at_infinity(270.0, 0.0), -0.5);
        assert_eq!(alpha_at_infinity(0.0, 270.0), -1.5);
    }

    #[test]
    fn huge_and_tiny_headings_stay_in_range() {
        for h in [1e300, -1e300, -1e-300, 360.0, -360.0, 359.999_999_999_999_94] {
            let r = reduce(h);
            assert!(0.0 <= r && r < 360.0, "{h} -> {r}");
            assert!((unit(h).norm() - 1.0).abs() < 1e-15);
        }
    }
}
