//! The units of the answers, by trade and material.

use super::document::Units;
use crate::input::{Material, Placed, SectionFile, Trade};

/// Permittivity of vacuum in F/m.
///
/// Source: CODATA recommended values 2022, 8.8541878188(14)e-12 F/m (from memory). It is taken as exact; its
/// uncertainty of 1.6e-10 is no part of the error bounds.
pub const VACUUM_PERMITTIVITY: f64 = 8.854_187_818_8e-12;

/// How numbers of the core become numbers of the trade.
#[derive(Debug, Clone, PartialEq)]
pub struct Scales {
    /// Factor on a flux: the conductivity, or 1 without a material.
    pub conductivity: f64,
    /// The unit of a conductance; `None` without a material.
    pub conductance_unit: Option<&'static str>,
    /// Length unit in the unit of length of a gradient.
    pub per_length: f64,
    /// That unit of length.
    pub gradient_length: String,
    /// The units.
    pub units: Units,
}

impl Scales {
    /// The scales of a section file.
    pub fn new(file: &SectionFile) -> Self {
        let material = file.material.as_ref().map(|Placed { value, .. }| *value);
        let plain = file.trade == Trade::Plain;
        let conductivity = match material {
            None => 1.0,
            Some(Material::Conductivity(k)) => k,
            Some(Material::Layered(fabric)) => fabric.conductivity(),
            Some(Material::Permittivity(relative)) => VACUUM_PERMITTIVITY * relative,
            Some(Material::SheetResistance(ohm)) => 1.0 / ohm,
        };
        let conductance_unit = material.map(|m| match (file.trade, m) {
            (_, Material::Permittivity(_)) => "F/m",
            (_, Material::SheetResistance(_)) => "1/ohm",
            (Trade::Seepage, _) => "m/s",
            (Trade::Heat, _) => "W/(m K)",
            (Trade::Conductor | Trade::Plain, _) => "1",
        });
        let (level, difference) = match file.trade {
            Trade::Seepage => ("m", "m"),
            Trade::Heat => ("degC", "K"),
            Trade::Conductor => ("V", "V"),
            Trade::Plain => ("1", "1"),
        };
        let flux = match (file.trade, material) {
            (_, None) => difference,
            (_, Some(Material::Permittivity(_))) => "C/m",
            (_, Some(Material::SheetResistance(_))) => "A",
            (Trade::Seepage, _) => "m3/s per m",
            (Trade::Heat, _) => "W/m",
            (Trade::Conductor | Trade::Plain, _) => "1",
        };
        // The trade `plain` knows no metre: there a gradient is per unit of the coordinates.
        let gradient_length = if plain { file.length.name.clone() } else { "m".to_owned() };
        let gradient = format!("{difference}/{gradient_length}");
        Self {
            conductivity,
            conductance_unit,
            per_length: if plain { 1.0 } else { file.length.metres },
            gradient_length,
            units: Units { length: file.length.name.clone(), level, stream: difference, gradient, flux },
        }
    }

    /// The unit of a level's difference.
    pub fn difference(&self) -> &'static str {
        self.units.stream
    }
}
