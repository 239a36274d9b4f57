//! Numbers as a figure letters them.

/// A number with at most `digits` significant digits, no more than it needs, and a true minus sign.
pub(super) fn tidy(value: f64, digits: usize) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    if !value.is_finite() {
        return if value > 0.0 { "∞" } else { "−∞" }.to_owned();
    }
    let digits = digits.clamp(1, 17);
    let decade = value.abs().log10().floor();
    let text = if (-4.0..6.0).contains(&decade) || decade < digits as f64 && decade >= 0.0 {
        let decimals = (digits as f64 - 1.0 - decade).max(0.0) as usize;
        let plain = format!("{value:.decimals$}");
        if plain.contains('.') { plain.trim_end_matches('0').trim_end_matches('.').to_owned() } else { plain }
    } else {
        return power_of_ten(value, digits);
    };
    text.replace('-', "−")
}

/// `m·10ⁿ` with a raised exponent.
pub(super) fn power_of_ten(value: f64, digits: usize) -> String {
    let scientific = format!("{value:.*e}", digits.saturating_sub(1));
    let Some((mantissa, exponent)) = scientific.split_once('e') else { return scientific };
    let mantissa =
        if mantissa.contains('.') { mantissa.trim_end_matches('0').trim_end_matches('.') } else { mantissa };
    let raised: String = exponent.chars().map(raised).collect();
    format!("{}·10{raised}", mantissa.replace('-', "−"))
}

fn raised(c: char) -> char {
    match c {
        '-' => '⁻',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        '0' | '4'..='9' => char::from_u32(0x2070 + (u32::from(c) - u32::from('0'))).unwrap_or(c),
        c => c,
    }
}

/// Decimals that tell multiples of a step from a start apart: those that write them exactly if six do, else two
/// digits of the step.
pub(super) fn decimals_of_step(start: f64, step: f64) -> usize {
    let exact = |d: i32| {
        let whole = |v: f64| {
            let scaled = v * 10_f64.powi(d);
            (scaled - scaled.round()).abs() < 1e-6
        };
        whole(start) && whole(step)
    };
    let needed = (1.0 - step.abs().log10().floor()).max(0.0);
    let needed = if needed.is_finite() { (needed as usize).min(12) } else { 6 };
    (0..=6).find(|&d| exact(d)).map_or(needed, |d| (d as usize).min(needed.max(3)))
}

/// A number with a fixed number of decimals and a true minus sign.
pub(super) fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    let zero = text.chars().all(|c| matches!(c, '-' | '0' | '.'));
    if zero { text.trim_start_matches('-').to_owned() } else { text.replace('-', "−") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_have_the_digits_they_need() {
        for (value, digits, want) in [
            (12.0, 6, "12"),
            (0.390_816_03, 6, "0.390816"),
            (-5.25, 4, "−5.25"),
            (2.5e-9, 3, "2.5·10⁻⁹"),
            (1e21, 3, "1·10²¹"),
            (150_000.0, 3, "150000"),
            (0.0, 3, "0"),
            (f64::INFINITY, 3, "∞"),
        ] {
            assert_eq!(tidy(value, digits), want);
        }
        assert_eq!(decimals_of_step(12.0, 0.25), 2);
        assert_eq!(decimals_of_step(0.0, 1.0 / 3.0), 2);
        assert_eq!(fixed(-1e-9, 2), "0.00");
    }
}
