//! The grammar of compound units.
//!
//! ```text
//! unit   = factor { [ "/" | "*" | "·" | blank ] factor }     "/" divides by the next factor alone
//! factor = name [power] | "1" | "(" unit ")" [power]
//! power  = [ "^" ] [ "-" ] digits | "²" | "³"
//! ```
//! So `m3/s/m` is m³ s⁻¹ m⁻¹ and `m2 K/W` is m² K W⁻¹. `a/b c` reads differently to different people;
//! a product after a `/` therefore has to be bracketed.

use super::table::known_units;
use super::{Dimension, Unit};
use thiserror::Error;

/// Why a text is not a unit. `at` and `len` are bytes of the text.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum UnitFault {
    /// The name is in no table.
    #[error("`{name}` is not a known unit")]
    UnknownUnit {
        /// The name as written.
        name: String,
        /// First byte.
        at: usize,
        /// The nearest known unit, if one is near.
        nearest: Option<String>,
    },
    /// The text breaks the grammar.
    #[error("a unit cannot go on with {found}")]
    Unexpected {
        /// What stands there.
        found: String,
        /// First byte.
        at: usize,
        /// Length in bytes.
        len: usize,
    },
    /// `a/b c`: which of the two readings is meant cannot be told.
    #[error("`{text}` can be read in two ways")]
    Ambiguous {
        /// The whole unit.
        text: String,
        /// First byte of the factor in doubt.
        at: usize,
    },
    /// An exponent or a size beyond what numbers hold.
    #[error("the unit `{text}` is too large or too small for a number")]
    OutOfRange {
        /// The whole unit.
        text: String,
    },
}

impl UnitFault {
    /// The bytes of the unit's text the fault is about.
    pub fn bytes(&self) -> std::ops::Range<usize> {
        match self {
            Self::UnknownUnit { name, at, .. } => *at..*at + name.len(),
            Self::Unexpected { at, len, .. } => *at..*at + *len,
            Self::Ambiguous { text, at } => *at..text.len(),
            Self::OutOfRange { text } => 0..text.len(),
        }
    }
}

/// Brackets nest no deeper than this; no unit of any trade needs two levels.
const MAX_DEPTH: usize = 8;

/// Reads a unit such as `m`, `W/(m2 K)` or `l/min/m`.
///
/// # Errors
/// [`UnitFault`] names the place in the text and what is wrong there.
pub fn parse_unit(text: &str) -> Result<Unit, UnitFault> {
    let mut parser = Parser { text, at: 0 };
    let mut unit = parser.product(0)?;
    if parser.at < text.len() {
        return Err(parser.unexpected());
    }
    // The user's own spelling reads best in a message; a lone scale keeps its zero.
    unit.name = text.trim().to_owned();
    let alone = known_units().iter().find(|u| u.name == unit.name);
    unit.zero = alone.and_then(|u| u.zero);
    Ok(unit)
}

struct Parser<'t> {
    text: &'t str,
    at: usize,
}

impl Parser<'_> {
    fn rest(&self) -> &str {
        &self.text[self.at..]
    }

    fn peek(&self) -> Option<char> {
        self.rest().chars().next()
    }

    fn skip_blanks(&mut self) {
        self.at = self.text.len() - self.rest().trim_start().len();
    }

    fn unexpected(&self) -> UnitFault {
        match self.peek() {
            Some(c) => UnitFault::Unexpected { found: format!("`{c}`"), at: self.at, len: c.len_utf8() },
            None => UnitFault::Unexpected { found: "its end".to_owned(), at: self.at, len: 0 },
        }
    }

    fn out_of_range(&self) -> UnitFault {
        UnitFault::OutOfRange { text: self.text.to_owned() }
    }

    fn product(&mut self, depth: usize) -> Result<Unit, UnitFault> {
        self.skip_blanks();
        let mut unit = self.factor(depth)?;
        let mut divided = false;
        loop {
            self.skip_blanks();
            match self.peek() {
                None | Some(')') => return Ok(unit),
                Some('/') => {
                    self.at += 1;
                    self.skip_blanks();
                    let next = self.factor(depth)?;
                    unit = unit.over(&next).ok_or_else(|| self.out_of_range())?;
                    divided = true;
                }
                Some(c) => {
                    if c == '*' || c == '·' {
                        self.at += c.len_utf8();
                        self.skip_blanks();
                    }
                    let at = self.at;
                    let next = self.factor(depth)?;
                    if divided {
                        return Err(UnitFault::Ambiguous { text: self.text.to_owned(), at });
                    }
                    unit = unit.times(&next).ok_or_else(|| self.out_of_range())?;
                }
            }
        }
    }

    fn factor(&mut self, depth: usize) -> Result<Unit, UnitFault> {
        let base = match self.peek() {
            Some('(') if depth < MAX_DEPTH => {
                self.at += 1;
                let unit = self.product(depth + 1)?;
                if self.peek() != Some(')') {
                    return Err(self.unexpected());
                }
                self.at += 1;
                unit
            }
            Some('1') => {
                self.at += 1;
                return Ok(Unit::plain());
            }
            Some(c) if c.is_alphabetic() || c == '°' => self.name()?,
            _ => return Err(self.unexpected()),
        };
        match self.power()? {
            Some(n) => base.power(n).ok_or_else(|| self.out_of_range()),
            None => Ok(base),
        }
    }

    fn name(&mut self) -> Result<Unit, UnitFault> {
        let len = self.rest().find(|c: char| !(c.is_alphabetic() || c == '°')).unwrap_or(self.rest().len());
        let (at, name) = (self.at, &self.text[self.at..self.at + len]);
        let Some(known) = known_units().iter().find(|u| u.name == name) else {
            let nearest = crate::input::nearest::nearest(name, known_units().iter().map(|u| u.name));
            return Err(UnitFault::UnknownUnit { name: name.to_owned(), at, nearest });
        };
        self.at += len;
        let dimension: Dimension = known.dimension;
        Ok(Unit { name: name.to_owned(), dimension, factor: known.factor(), zero: None })
    }

    fn power(&mut self) -> Result<Option<i32>, UnitFault> {
        let superscript = match self.peek() {
            Some('²') => Some(2),
            Some('³') => Some(3),
            _ => None,
        };
        if superscript.is_some() {
            self.at += '²'.len_utf8();
            return Ok(superscript);
        }
        let caret = self.peek() == Some('^');
        if caret {
            self.at += 1;
        }
        let negative = self.peek() == Some('-');
        let digits_at = self.at + usize::from(negative);
        let digits = &self.text[digits_at..];
        let len = digits.find(|c: char| !c.is_ascii_digit()).unwrap_or(digits.len());
        if len == 0 {
            return if caret || negative { Err(self.unexpected()) } else { Ok(None) };
        }
        let n: i32 = digits[..len].parse().map_err(|_| self.out_of_range())?;
        self.at = digits_at + len;
        Ok(Some(if negative { -n } else { n }))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn dimension(text: &str) -> Dimension {
        parse_unit(text).unwrap().dimension
    }

    #[test]
    fn compound_units_of_the_trades_are_read() {
        assert_eq!(dimension("m3/s/m"), Dimension::new(2, -1, 0, 0, 0, 0));
        assert_eq!(dimension("l/min/m"), dimension("m2/s"));
        assert_eq!(dimension("m2 K/W"), Dimension::new(0, 3, -1, 1, 0, 0));
        assert_eq!(dimension("m²·K/W"), dimension("m2 K/W"));
        assert_eq!(dimension("W/(m K)"), dimension("W/m/K"));
        assert_eq!(dimension("W m^-1 K-1"), dimension("W/(m K)"));
        assert_eq!(dimension("W/(m degC)"), dimension("W/(m K)"));
        assert_eq!(dimension("1/s"), dimension("m/(s m)"));
        assert_eq!(dimension("(m/s)2"), dimension("m2/s2"));
        assert_eq!(dimension("m0"), Dimension::NONE);
    }

    #[test]
    fn only_a_lone_scale_is_a_level() {
        assert_eq!(parse_unit("degC").unwrap().zero, Some(0.0));
        assert_eq!(parse_unit(" degF ").unwrap().zero, Some(32.0));
        assert!(!parse_unit("W/(m2 degF)").unwrap().is_level());
        assert!(!parse_unit("K").unwrap().is_level());
        assert!(!parse_unit("(degC)").unwrap().is_level());
    }

    #[test]
    fn a_product_after_a_division_is_refused() {
        let fault = parse_unit("W/m K").unwrap_err();
        assert_eq!(fault, UnitFault::Ambiguous { text: "W/m K".to_owned(), at: 4 });
    }

    #[test]
    fn unknown_units_name_the_nearest() {
        let fault = parse_unit("kPA/m").unwrap_err();
        let UnitFault::UnknownUnit { name, at, nearest } = fault else { panic!("{fault}") };
        assert_eq!((name.as_str(), at, nearest.as_deref()), ("kPA", 0, Some("kPa")));
    }

    #[test]
    fn broken_units_say_where() {
        for (text, at) in
            [("m/", 2), ("m + 2", 2), ("(m", 2), ("m)", 1), ("", 0), ("m^", 2), ("m^x", 2), ("2 m", 0)]
        {
            assert_eq!(parse_unit(text).unwrap_err().bytes().start, at, "{text}");
        }
        assert!(matches!(parse_unit("m99999999999"), Err(UnitFault::OutOfRange { .. })));
        assert!(parse_unit(&"(".repeat(10_000)).is_err());
    }

    proptest! {
        #[test]
        fn no_text_makes_the_unit_parser_panic(text in "[mWKsdegCF/()^ 0-9*²³·µ°+-]{0,24}") {
            if let Err(fault) = parse_unit(&text) {
                let bytes = fault.bytes();
                prop_assert!(bytes.end <= text.len() && text.is_char_boundary(bytes.start));
            }
        }
    }
}
