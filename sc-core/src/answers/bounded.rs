//! A number with a bound on its error.

/// A value and an upper bound on its absolute error, in the value's own unit.
///
/// An infinite value (the flux between touching sides at different levels) has the bound zero: it is exact.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Bounded {
    /// The value.
    pub value: f64,
    /// Upper bound of its absolute error.
    pub error: f64,
}

impl Bounded {
    /// A value with a bound; an infinite value is exact.
    pub fn new(value: f64, error: f64) -> Bounded {
        Bounded { value, error: if value.is_infinite() { 0.0 } else { error } }
    }

    /// The value and its bound times a factor.
    pub fn scaled(self, factor: f64) -> Bounded {
        Bounded::new(self.value * factor, self.error * factor.abs())
    }

    /// Bound relative to the value.
    pub fn relative(self) -> f64 {
        if self.error == 0.0 { 0.0 } else { self.error / self.value.abs() }
    }
}
