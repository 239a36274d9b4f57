//! Numbers as a JSON document holds them.

use serde::{Serialize, Serializer};

/// A number that may be infinite, and is then a string; what is not a number is `null`.
///
/// Finite numbers are written with the fewest digits that read back to the same `f64`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Number(pub f64);

impl Serialize for Number {
    fn serialize<S: Serializer>(&self, to: S) -> Result<S::Ok, S::Error> {
        let Self(value) = *self;
        if value.is_finite() {
            // No negative zero: it is a zero with an accident of sign.
            to.serialize_f64(value + 0.0)
        } else if value.is_nan() {
            to.serialize_none()
        } else if value > 0.0 {
            to.serialize_str("infinite")
        } else {
            to.serialize_str("-infinite")
        }
    }
}

impl From<f64> for Number {
    fn from(value: f64) -> Self {
        Self(value)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn infinite_values_are_words_and_there_is_no_nan() {
        let values = [f64::INFINITY, f64::NEG_INFINITY, f64::NAN, -0.0].map(Number);
        assert_eq!(serde_json::to_string(&values).unwrap(), r#"["infinite","-infinite",null,0.0]"#);
    }

    proptest! {
        #[test]
        fn finite_numbers_read_back_to_the_same_bits(value in prop::num::f64::NORMAL | prop::num::f64::SUBNORMAL) {
            let text = serde_json::to_string(&Number(value)).unwrap();
            prop_assert_eq!(serde_json::from_str::<f64>(&text).unwrap().to_bits(), value.to_bits());
        }
    }
}
