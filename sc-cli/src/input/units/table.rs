//! The units known, each with its size in SI.

use super::{Dimension, Factor};

/// One unit that a section file may use, alone or inside a compound unit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct KnownUnit {
    /// How it is written.
    pub name: &'static str,
    /// What it measures, in words.
    pub measures: &'static str,
    /// Its dimension.
    pub dimension: Dimension,
    /// Numerator of its size in SI.
    pub numerator: f64,
    /// Denominator of its size in SI.
    pub denominator: f64,
    /// Reading of the scale at 0 degC, for the units of a temperature level.
    pub zero: Option<f64>,
}

impl KnownUnit {
    /// Size of the unit in SI.
    pub fn factor(&self) -> Factor {
        Factor::new(self.numerator, self.denominator)
    }
}

const fn unit(
    name: &'static str,
    measures: &'static str,
    dimension: Dimension,
    numerator: f64,
    denominator: f64,
) -> KnownUnit {
    KnownUnit { name, measures, dimension, numerator, denominator, zero: None }
}

const fn scale(name: &'static str, numerator: f64, denominator: f64, zero: f64) -> KnownUnit {
    KnownUnit {
        name,
        measures: "temperature level (in a compound unit: difference)",
        dimension: Dimension::TEMPERATURE,
        numerator,
        denominator,
        zero: Some(zero),
    }
}

const LENGTH: Dimension = Dimension::LENGTH;
const TIME: Dimension = Dimension::new(0, 1, 0, 0, 0, 0);
const MASS: Dimension = Dimension::new(0, 0, 1, 0, 0, 0);
const CURRENT: Dimension = Dimension::new(0, 0, 0, 0, 1, 0);
const VOLUME: Dimension = Dimension::new(3, 0, 0, 0, 0, 0);
const FORCE: Dimension = Dimension::new(1, -2, 1, 0, 0, 0);
const PRESSURE: Dimension = Dimension::new(-1, -2, 1, 0, 0, 0);
const ENERGY: Dimension = Dimension::new(2, -2, 1, 0, 0, 0);
const POWER: Dimension = Dimension::new(2, -3, 1, 0, 0, 0);
const VOLTAGE: Dimension = Dimension::new(2, -3, 1, 0, -1, 0);
const RESISTANCE: Dimension = Dimension::new(2, -3, 1, 0, -2, 0);
const CONDUCTANCE: Dimension = Dimension::new(-2, 3, -1, 0, 2, 0);
const CAPACITANCE: Dimension = Dimension::new(-2, 4, -1, 0, 2, 0);
const CHARGE: Dimension = Dimension::new(0, 1, 0, 0, 1, 0);

/// Sizes are exact by definition, except the degree of angle (π/180, to the last bit of `f64`).
///
/// Source: BIPM, The International System of Units, 9th edition (2019), tables 4 and 8; customary units from the
/// 1959 yard and pound agreement (yard 0.9144 m, pound 0.45359237 kg), the International Table Btu of
/// 1055.05585262 J (ISO 31-4, from memory) and standard gravity 9.80665 m/s2.
const TABLE: &[KnownUnit] = &[
    unit("m", "length", LENGTH, 1.0, 1.0),
    unit("mm", "length", LENGTH, 1.0, 1e3),
    unit("cm", "length", LENGTH, 1.0, 1e2),
    unit("km", "length", LENGTH, 1e3, 1.0),
    unit("um", "length", LENGTH, 1.0, 1e6),
    unit("µm", "length", LENGTH, 1.0, 1e6),
    unit("nm", "length", LENGTH, 1.0, 1e9),
    unit("in", "length", LENGTH, 254.0, 1e4),
    unit("mil", "length", LENGTH, 254.0, 1e7),
    unit("ft", "length", LENGTH, 3048.0, 1e4),
    unit("yd", "length", LENGTH, 9144.0, 1e4),
    unit("s", "time", TIME, 1.0, 1.0),
    unit("min", "time", TIME, 60.0, 1.0),
    unit("h", "time", TIME, 3600.0, 1.0),
    unit("day", "time", TIME, 86400.0, 1.0),
    unit("g", "mass", MASS, 1.0, 1e3),
    unit("kg", "mass", MASS, 1.0, 1.0),
    unit("lb", "mass", MASS, 45_359_237.0, 1e8),
    unit("l", "volume", VOLUME, 1.0, 1e3),
    unit("gal", "volume (US gallon)", VOLUME, 3_785_411_784.0, 1e12),
    unit("N", "force", FORCE, 1.0, 1.0),
    unit("kN", "force", FORCE, 1e3, 1.0),
    unit("lbf", "force", FORCE, 44_482_216_152_605.0, 1e13),
    unit("Pa", "pressure", PRESSURE, 1.0, 1.0),
    unit("kPa", "pressure", PRESSURE, 1e3, 1.0),
    unit("MPa", "pressure", PRESSURE, 1e6, 1.0),
    unit("bar", "pressure", PRESSURE, 1e5, 1.0),
    unit("psi", "pressure", PRESSURE, 44_482_216_152_605.0, 6_451_600_000.0),
    unit("J", "energy", ENERGY, 1.0, 1.0),
    unit("kJ", "energy", ENERGY, 1e3, 1.0),
    unit("Btu", "energy (International Table)", ENERGY, 105_505_585_262.0, 1e8),
    unit("W", "power", POWER, 1.0, 1.0),
    unit("mW", "power", POWER, 1.0, 1e3),
    unit("kW", "power", POWER, 1e3, 1.0),
    unit("K", "temperature difference", Dimension::TEMPERATURE, 1.0, 1.0),
    scale("degC", 1.0, 1.0, 0.0),
    scale("°C", 1.0, 1.0, 0.0),
    scale("degF", 5.0, 9.0, 32.0),
    scale("°F", 5.0, 9.0, 32.0),
    unit("A", "current", CURRENT, 1.0, 1.0),
    unit("mA", "current", CURRENT, 1.0, 1e3),
    unit("C", "charge", CHARGE, 1.0, 1.0),
    unit("V", "voltage", VOLTAGE, 1.0, 1.0),
    unit("mV", "voltage", VOLTAGE, 1.0, 1e3),
    unit("kV", "voltage", VOLTAGE, 1e3, 1.0),
    unit("ohm", "resistance", RESISTANCE, 1.0, 1.0),
    unit("Ω", "resistance", RESISTANCE, 1.0, 1.0),
    unit("mohm", "resistance", RESISTANCE, 1.0, 1e3),
    unit("kohm", "resistance", RESISTANCE, 1e3, 1.0),
    unit("S", "conductance", CONDUCTANCE, 1.0, 1.0),
    unit("F", "capacitance", CAPACITANCE, 1.0, 1.0),
    unit("uF", "capacitance", CAPACITANCE, 1.0, 1e6),
    unit("nF", "capacitance", CAPACITANCE, 1.0, 1e9),
    unit("pF", "capacitance", CAPACITANCE, 1.0, 1e12),
    unit("rad", "angle", Dimension::ANGLE, 1.0, 1.0),
    unit("deg", "angle", Dimension::ANGLE, std::f64::consts::PI, 180.0),
];

/// Every unit a section file may use, by what it measures.
///
/// Compound units are products and quotients of these with whole powers, as in `W/(m2 K)` or `m3/s/m`.
pub fn known_units() -> &'static [KnownUnit] {
    TABLE
}

/// The words for a dimension, empty when the trades have none.
pub(super) fn measure(dimension: Dimension) -> &'static str {
    let named: &[(Dimension, &str)] = &[
        (Dimension::NONE, "plain number"),
        (Dimension::TEMPERATURE, "temperature difference"),
        (Dimension::new(2, 0, 0, 0, 0, 0), "area"),
        (Dimension::new(1, -1, 0, 0, 0, 0), "speed (hydraulic conductivity)"),
        (Dimension::new(2, -1, 0, 0, 0, 0), "discharge per unit of run"),
        (Dimension::new(3, -1, 0, 0, 0, 0), "discharge"),
        (Dimension::new(0, -1, 0, 0, 0, 0), "rate"),
        (Dimension::new(1, -3, 1, -1, 0, 0), "heat conductivity"),
        (Dimension::new(0, -3, 1, -1, 0, 0), "heat transfer coefficient"),
        (Dimension::new(0, 3, -1, 1, 0, 0), "surface resistance to heat"),
        (Dimension::new(0, -3, 1, 0, 0, 0), "heat flux"),
        (Dimension::new(-3, 4, -1, 0, 2, 0), "permittivity"),
        (Dimension::new(-2, -2, 1, 0, 0, 0), "unit weight"),
    ];
    let simple = || {
        TABLE
            .iter()
            .find(|u| u.dimension == dimension && u.zero.is_none())
            .map(|u| u.measures.split(" (").next().unwrap_or(u.measures))
    };
    named.iter().find(|(d, _)| *d == dimension).map(|(_, w)| *w).or_else(simple).unwrap_or("")
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeSet;

    #[test]
    fn every_unit_has_one_entry_and_a_positive_size() {
        let names: BTreeSet<_> = known_units().iter().map(|u| u.name).collect();
        assert_eq!(names.len(), known_units().len());
        assert!(known_units().iter().all(|u| u.factor().is_usable()));
    }

    #[test]
    fn derived_si_units_agree_with_their_definitions() {
        // Definitions of the derived units: BIPM, SI brochure, table 4.
        let rows = [
            ("N", "kg m/s2"),
            ("Pa", "N/m2"),
            ("J", "N m"),
            ("W", "J/s"),
            ("C", "A s"),
            ("V", "W/A"),
            ("ohm", "V/A"),
            ("S", "A/V"),
            ("F", "C/V"),
            ("psi", "lbf/in2"),
        ];
        for (name, definition) in rows {
            let (a, b) =
                (super::super::parse_unit(name).unwrap(), super::super::parse_unit(definition).unwrap());
            assert_eq!(a.dimension, b.dimension, "{name}");
            assert!((a.factor.value() / b.factor.value() - 1.0).abs() < 4.0 * f64::EPSILON, "{name}");
        }
    }
}
