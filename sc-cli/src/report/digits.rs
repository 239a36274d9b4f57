//! Numbers with the digits that their error bounds support.
//!
//! A report shows no digit that its bound does not support, and no more than a reader can use; the last digits, which
//! may differ from one machine to another, are left to the JSON document.

/// Decimal place of the last digit shown: 10 to that power. `scale` is the largest value of the column.
pub fn last_place(error: f64, scale: f64, digits: i32) -> i32 {
    let of_scale = if scale > 0.0 && scale.is_finite() { decade(scale) - digits + 1 } else { -digits };
    if error > 0.0 && error.is_finite() { of_scale.max(decade_above(error)) } else { of_scale }
}

/// Exponent of the leading digit.
#[expect(clippy::cast_possible_truncation, reason = "a logarithm of an f64 is below 400")]
fn decade(value: f64) -> i32 {
    value.abs().log10().floor() as i32
}

/// Exponent of the power of ten at or above a value.
#[expect(clippy::cast_possible_truncation, reason = "a logarithm of an f64 is below 400")]
fn decade_above(value: f64) -> i32 {
    value.abs().log10().ceil() as i32
}

/// Columns whose largest value is outside 10^this are written with an exponent.
const FIXED: std::ops::Range<i32> = -3..7;

/// A value down to the decimal place `last`, written as its column is.
pub fn rounded(value: f64, last: i32, scale: f64) -> String {
    if value.is_nan() {
        return "-".to_owned();
    }
    if value.is_infinite() {
        return if value > 0.0 { "infinite".to_owned() } else { "-infinite".to_owned() };
    }
    let scale = if scale.is_finite() { scale.max(value.abs()) } else { value.abs() };
    if scale <= 0.0 {
        return "0".to_owned();
    }
    let text = if FIXED.contains(&decade(scale)) {
        fixed(value, last)
    } else if value.abs() < 0.5 * 10_f64.powi(last) {
        "0".to_owned()
    } else {
        let digits = usize::try_from(decade(value) - last).unwrap_or(0);
        format!("{value:.digits$e}")
    };
    unsigned_zero(text)
}

fn fixed(value: f64, last: i32) -> String {
    match usize::try_from(-last) {
        Ok(places) => format!("{value:.places$}"),
        Err(_) => {
            let unit = 10_f64.powi(last);
            format!("{:.0}", (value / unit).round() * unit)
        }
    }
}

fn unsigned_zero(text: String) -> String {
    let is_zero = text.bytes().all(|b| matches!(b, b'-' | b'0' | b'.'));
    if is_zero { text.trim_start_matches('-').to_owned() } else { text }
}

/// A value with as many of `digits` digits as its bound supports.
pub fn supported(value: f64, error: f64, digits: i32) -> String {
    rounded(value, last_place(error, value.abs(), digits), value.abs())
}

/// A value with six digits at most and without trailing zeros, for messages and data of the file.
pub fn short(value: f64) -> String {
    let text = supported(value, 0.0, 6);
    let (mantissa, exponent) = text.split_once('e').map_or((text.as_str(), None), |(m, e)| (m, Some(e)));
    let mantissa =
        if mantissa.contains('.') { mantissa.trim_end_matches('0').trim_end_matches('.') } else { mantissa };
    exponent.map_or_else(|| mantissa.to_owned(), |e| format!("{mantissa}e{e}"))
}

/// Bounds below this are not told apart in a report: they are rounding, and differ between machines.
const FINEST: i32 = -12;

/// A relative bound as the power of ten above it, not below 1e-12.
pub fn bound(relative: f64) -> String {
    if relative.is_finite() {
        format!("1e{}", if relative > 0.0 { decade_above(relative).max(FINEST) } else { FINEST })
    } else {
        "unknown".to_owned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn only_supported_digits_are_shown() {
        assert_eq!(supported(std::f64::consts::PI, 1e-14, 10), "3.141592654");
        assert_eq!(supported(std::f64::consts::PI, 2e-4, 10), "3.142");
        assert_eq!(supported(8.123_456_789e-6, 1e-18, 6), "8.12346e-6");
        assert_eq!(supported(0.0, 1e-14, 6), "0");
        assert_eq!(supported(f64::NEG_INFINITY, 0.0, 6), "-infinite");
        assert_eq!(rounded(-1e-17, -6, 3.0), "0.000000");
        assert_eq!(rounded(1e-12, -16, 3e-10), "1.0000e-12");
        assert_eq!(rounded(1234.0, 2, 1234.0), "1200");
        assert_eq!(short(12.5), "12.5");
        assert_eq!(short(2e-5), "2e-5");
        assert_eq!(short(12.0), "12");
        assert_eq!(short(100.0), "100");
        assert_eq!((bound(3e-9), bound(4e-15), bound(0.0)), ("1e-8".into(), "1e-12".into(), "1e-12".into()));
    }

    proptest! {
        #[test]
        fn any_number_is_shown_within_its_last_place(
            value in prop::num::f64::ANY, error in prop::num::f64::ANY, digits in 1..12_i32
        ) {
            let text = supported(value, error, digits);
            prop_assert!(!text.is_empty() && !text.contains("NaN") && !text.contains("inf,"));
        }

        #[test]
        fn a_shown_number_reads_back_to_its_digits(value in -1e9..1e9_f64) {
            let back: f64 = supported(value, 0.0, 6).parse().unwrap();
            prop_assert!((back - value).abs() <= 0.51e-5 * value.abs(), "{} {}", back, value);
        }
    }
}
