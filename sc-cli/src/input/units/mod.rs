//! Units of the trades: a table by hand, the grammar of compound units, exact conversion factors.
//!
//! A unit is a [`Dimension`] and a [`Factor`] to SI. The factor is kept as a quotient of two numbers, so that `7 cm`
//! becomes `7 / 100` and not `7 * 0.01`, and a value written in the unit asked for keeps every bit.
//!
//! `degC` and `degF` are *levels*: zero of the scale is not zero of the quantity. Alone they may only stand
//! where a level is asked for. Inside a compound unit, as in `W/(m degC)`, the degree is a difference and the
//! scale has no zero to speak of; there `degC` is the same as `K`.

mod grammar;
mod table;

pub use grammar::{UnitFault, parse_unit};
pub use table::{KnownUnit, known_units};

use std::fmt;

/// Exponents of length, time, mass, temperature, current and angle.
///
/// The angle is carried along, although SI counts the radian as 1, because a heading in degrees and a
/// plain number have to be told apart.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct Dimension {
    /// Exponent of length (m).
    pub length: i8,
    /// Exponent of time (s).
    pub time: i8,
    /// Exponent of mass (kg).
    pub mass: i8,
    /// Exponent of temperature difference (K).
    pub temperature: i8,
    /// Exponent of electric current (A).
    pub current: i8,
    /// Exponent of angle (rad).
    pub angle: i8,
}

impl Dimension {
    /// A plain number.
    pub const NONE: Self = Self::new(0, 0, 0, 0, 0, 0);
    /// A length.
    pub const LENGTH: Self = Self::new(1, 0, 0, 0, 0, 0);
    /// A temperature difference.
    pub const TEMPERATURE: Self = Self::new(0, 0, 0, 1, 0, 0);
    /// An angle.
    pub const ANGLE: Self = Self::new(0, 0, 0, 0, 0, 1);

    /// Exponents in the order length, time, mass, temperature, current, angle.
    pub const fn new(length: i8, time: i8, mass: i8, temperature: i8, current: i8, angle: i8) -> Self {
        Self { length, time, mass, temperature, current, angle }
    }

    fn exponents(self) -> [i8; 6] {
        [self.length, self.time, self.mass, self.temperature, self.current, self.angle]
    }

    fn from_exponents(e: [i8; 6]) -> Self {
        Self::new(e[0], e[1], e[2], e[3], e[4], e[5])
    }

    fn combine(self, other: Self, sign: i8) -> Option<Self> {
        let (a, b) = (self.exponents(), other.exponents());
        let mut e = [0_i8; 6];
        for i in 0..6 {
            e[i] = a[i].checked_add(b[i].checked_mul(sign)?)?;
        }
        Some(Self::from_exponents(e))
    }

    /// Dimension of a power; `None` if an exponent leaves the range of `i8`.
    pub fn power(self, n: i32) -> Option<Self> {
        let mut e = [0_i8; 6];
        for (out, a) in e.iter_mut().zip(self.exponents()) {
            *out = i8::try_from(i32::from(a).checked_mul(n)?).ok()?;
        }
        Some(Self::from_exponents(e))
    }

    /// Dimension of a square root; `None` if an exponent is odd.
    pub fn root(self) -> Option<Self> {
        let e = self.exponents();
        e.iter().all(|a| a % 2 == 0).then(|| Self::from_exponents(e.map(|a| a / 2)))
    }

    /// The same with the angle left out: the radian is 1.
    pub fn without_angle(self) -> Self {
        Self { angle: 0, ..self }
    }

    /// True for a plain number, an angle counting as one.
    pub fn is_plain(self) -> bool {
        self.without_angle() == Self::NONE
    }

    /// What the dimension measures, in words, or its SI unit if the trades have no word for it.
    pub fn measure(self) -> String {
        let known = table::measure(self);
        if known.is_empty() { self.to_string() } else { known.to_owned() }
    }
}

impl fmt::Display for Dimension {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut blank = "";
        for (name, e) in ["m", "s", "kg", "K", "A", "rad"].into_iter().zip(self.exponents()) {
            if e == 1 {
                write!(f, "{blank}{name}")?;
            } else if e != 0 {
                write!(f, "{blank}{name}{e}")?;
            }
            if e != 0 {
                blank = " ";
            }
        }
        if blank.is_empty() { f.write_str("1") } else { Ok(()) }
    }
}

/// A conversion factor to SI, `numerator / denominator`, both positive and finite.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Factor {
    numerator: f64,
    denominator: f64,
}

/// Largest integer below which every integer is an `f64`: factors are reduced only there, where it is exact.
const EXACT: f64 = 9_007_199_254_740_992.0;

impl Factor {
    /// The factor of an SI unit.
    pub const ONE: Self = Self { numerator: 1.0, denominator: 1.0 };

    /// The quotient `numerator / denominator`, reduced when both are whole numbers.
    pub(crate) fn new(numerator: f64, denominator: f64) -> Self {
        let whole = |v: f64| v.fract() == 0.0 && 1.0 <= v && v < EXACT;
        if numerator.to_bits() == denominator.to_bits() {
            // Not whole, yet the same: `x * n / n` could move the last bit of x.
            return Self::ONE;
        }
        if !(whole(numerator) && whole(denominator)) {
            return Self { numerator, denominator };
        }
        let (mut a, mut b) = (numerator, denominator);
        // Euclid on whole numbers below 2^53: at most about 80 steps, each of them exact.
        while b > 0.0 {
            (a, b) = (b, a % b);
        }
        Self { numerator: numerator / a, denominator: denominator / a }
    }

    /// The factor as one number.
    pub fn value(self) -> f64 {
        self.numerator / self.denominator
    }

    /// What a value is multiplied by.
    pub fn numerator(self) -> f64 {
        self.numerator
    }

    /// What it is then divided by.
    pub fn denominator(self) -> f64 {
        self.denominator
    }

    /// Turns a value in this unit into SI.
    pub fn apply(self, value: f64) -> f64 {
        // A factor of exactly 1 must not touch the value, and `x * 1 / 1` does not.
        value * self.numerator / self.denominator
    }

    fn times(self, other: Self) -> Self {
        Self::new(self.numerator * other.numerator, self.denominator * other.denominator)
    }

    fn over(self, other: Self) -> Self {
        Self::new(self.numerator * other.denominator, self.denominator * other.numerator)
    }

    fn power(self, n: i32) -> Self {
        let one = if n < 0 { Self::ONE.over(self) } else { self };
        Self::new(one.numerator.powi(n.abs()), one.denominator.powi(n.abs()))
    }

    fn is_usable(self) -> bool {
        let v = self.value();
        let sound = |v: f64| v.is_finite() && v > 0.0;
        sound(self.numerator) && sound(self.denominator) && sound(v)
    }
}

/// A unit as written in a file: its text, what it measures, and its size.
#[derive(Debug, Clone, PartialEq)]
pub struct Unit {
    /// The unit as the user wrote it, for messages.
    pub name: String,
    /// What it measures.
    pub dimension: Dimension,
    /// Its size in SI.
    pub factor: Factor,
    /// For a temperature level: the reading of this scale at 0 degC (`degC`: 0, `degF`: 32).
    pub zero: Option<f64>,
}

impl Unit {
    /// The unit of a plain number.
    pub fn plain() -> Self {
        Self { name: "1".to_owned(), dimension: Dimension::NONE, factor: Factor::ONE, zero: None }
    }

    /// True for a scale with a zero of its own, which only a level can have.
    pub fn is_level(&self) -> bool {
        self.zero.is_some()
    }

    /// The product of two units, `None` if it leaves the range of numbers.
    pub fn times(&self, other: &Self) -> Option<Self> {
        self.joined(other, 1)
    }

    /// The quotient of two units, `None` if it leaves the range of numbers.
    pub fn over(&self, other: &Self) -> Option<Self> {
        self.joined(other, -1)
    }

    fn joined(&self, other: &Self, sign: i8) -> Option<Self> {
        let dimension = self.dimension.combine(other.dimension, sign)?;
        let factor = if sign > 0 { self.factor.times(other.factor) } else { self.factor.over(other.factor) };
        let bracketed = |name: &str| {
            if name.contains(['/', ' ']) { format!("({name})") } else { name.to_owned() }
        };
        let name = match (sign > 0, self.name.as_str(), other.name.as_str()) {
            (_, _, "1") => self.name.clone(),
            (true, "1", _) => other.name.clone(),
            (true, a, b) if b.contains('/') => format!("{a} ({b})"),
            (true, a, b) => format!("{a} {b}"),
            (false, a, b) => format!("{a}/{}", bracketed(b)),
        };
        factor.is_usable().then_some(Self { name, dimension, factor, zero: None })
    }

    /// A whole power of the unit, `None` if it leaves the range of numbers.
    pub fn power(&self, n: i32) -> Option<Self> {
        let name = if self.name.contains(['/', ' ']) {
            format!("({}){n}", self.name)
        } else {
            format!("{}{n}", self.name)
        };
        let name = if n == 1 || self.name == "1" { self.name.clone() } else { name };
        let (dimension, factor) = (self.dimension.power(n)?, self.factor.power(n));
        factor.is_usable().then_some(Self { name, dimension, factor, zero: None })
    }

    /// The factor that turns a value in this unit into `target`, both measuring the same thing.
    ///
    /// It is exactly 1 when the two units are of one size, whatever they are called.
    pub fn factor_to(&self, target: &Self) -> Factor {
        self.factor.over(target.factor)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn convert(value: f64, from: &str, to: &str) -> f64 {
        let (from, to) = (parse_unit(from).unwrap(), parse_unit(to).unwrap());
        assert_eq!(from.dimension, to.dimension);
        from.factor_to(&to).apply(value)
    }

    #[test]
    fn a_value_already_in_the_unit_asked_for_keeps_its_bits() {
        for unit in ["m", "ft", "in", "cm", "m/day", "W/(m K)", "Btu in/(h ft2 degF)", "psi"] {
            for value in [0.1, 1.0 / 3.0, 7.3e-11, 12.0, 1e300, f64::MIN_POSITIVE] {
                assert_eq!(convert(value, unit, unit).to_bits(), value.to_bits(), "{value} {unit}");
            }
        }
    }

    #[test]
    fn decimal_multiples_are_correctly_rounded() {
        // The literal on the right is the correctly rounded decimal; 7 * 0.01 would give 0.07000000000000001.
        assert_eq!(convert(7.0, "cm", "m").to_bits(), 0.07_f64.to_bits());
        assert_eq!(convert(29.0, "mm", "m").to_bits(), 0.029_f64.to_bits());
        assert_eq!(convert(0.3, "m", "mm").to_bits(), 300.0_f64.to_bits());
        assert_eq!(convert(1.0, "ft", "in").to_bits(), 12.0_f64.to_bits());
        assert_eq!(convert(10.0, "ft", "m").to_bits(), 3.048_f64.to_bits());
    }

    #[test]
    fn customary_heat_conductivity_agrees_with_the_handbook_factor() {
        // 1 Btu in/(h ft2 F) = 0.144228 W/(m K): ASHRAE Handbook, Fundamentals, conversion table (from memory);
        // it also follows from the exact definitions 1055.05585262 J, 0.3048 m, 3600 s, 5/9 K.
        let got = convert(1.0, "Btu in/(h ft2 degF)", "W/(m K)");
        assert!((got - 0.144_228).abs() < 5e-7, "{got}");
        let direct = 1055.05585262 * 0.0254 / (3600.0 * 0.3048 * 0.3048 * 5.0 / 9.0);
        assert!((got / direct - 1.0).abs() < 4.0 * f64::EPSILON);
    }

    #[test]
    fn names_of_derived_units_read_like_units() {
        let (m, s) = (parse_unit("m").unwrap(), parse_unit("s").unwrap());
        assert_eq!(m.over(&s).unwrap().name, "m/s");
        assert_eq!(m.times(&m.over(&s).unwrap()).unwrap().name, "m (m/s)");
        assert_eq!(m.power(3).unwrap().name, "m3");
        assert_eq!(Dimension::new(2, -3, 1, -1, 0, 0).to_string(), "m2 s-3 kg K-1");
        assert_eq!(Dimension::NONE.to_string(), "1");
    }

    #[test]
    fn exponents_out_of_range_are_refused_not_wrapped() {
        let m = parse_unit("m").unwrap();
        assert!(m.power(127).is_some());
        assert!(m.power(128).is_none());
        assert!(parse_unit("km").unwrap().power(120).is_none(), "1e360 is no number");
        assert!(m.power(127).unwrap().times(&m).is_none());
    }
}
