//! The trades, and the unit a plain number has in each.
//!
//! | trade | level | material | `inflow` | `transfer` | `resistance` |
//! |---|---|---|---|---|---|
//! | `seepage` | m of head | `conductivity` m/s | m/s | 1/s | s |
//! | `heat` | degC | `conductivity` W/(m K) | W/m2 | W/(m2 K) | m2 K/W |
//! | `conductor` | V | `permittivity` relative (1) | C/m2 | F/m2 | m2/F |
//! | `conductor` | V | `sheet_resistance` ohm | A/m | S/m | ohm m |
//! | `plain` | 1 | `conductivity` 1 | 1 | 1 | 1 |
//!
//! A coordinate, and `s`, is in the section's `length` unit; a heading, and `dip`, in degrees. Whatever the unit in
//! the file, these are the units in the model.

use super::units::{Dimension, Factor, Unit, parse_unit};

/// What the section is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Trade {
    /// Groundwater under and through structures: the level is total head.
    Seepage,
    /// Steady heat flow: the level is temperature.
    Heat,
    /// Conductor sections and resistive films: the level is voltage.
    Conductor,
    /// Numbers without units.
    #[default]
    Plain,
}

impl Trade {
    /// The words of the key `trade`.
    pub const WORDS: [&'static str; 4] = ["seepage", "heat", "conductor", "plain"];

    /// How it is written in the file.
    pub fn word(self) -> &'static str {
        match self {
            Self::Seepage => "seepage",
            Self::Heat => "heat",
            Self::Conductor => "conductor",
            Self::Plain => "plain",
        }
    }

    /// The trade of a word.
    pub fn from_word(word: &str) -> Option<Self> {
        [Self::Seepage, Self::Heat, Self::Conductor, Self::Plain].into_iter().find(|t| t.word() == word)
    }

    /// The unit of a plain number, and of the model, for a quantity of this trade.
    pub fn unit(self, quantity: Quantity) -> Unit {
        let name = self.unit_name(quantity);
        // Every name in the table is a unit, which the tests see to.
        parse_unit(name).unwrap_or_else(|_| Unit::plain())
    }

    fn unit_name(self, quantity: Quantity) -> &'static str {
        use Quantity::{
            Conductivity, CurrentIn, FilmResistance, FilmTransfer, Inflow, Level, Permittivity, Resistance,
            SheetResistance, Transfer,
        };
        match (self, quantity) {
            (Self::Seepage, Level) => "m",
            (Self::Seepage, Conductivity | Inflow) => "m/s",
            (Self::Seepage, Transfer) => "1/s",
            (Self::Seepage, Resistance) => "s",
            (Self::Heat, Level) => "degC",
            (Self::Heat, Conductivity) => "W/(m K)",
            (Self::Heat, Inflow) => "W/m2",
            (Self::Heat, Transfer) => "W/(m2 K)",
            (Self::Heat, Resistance) => "m2 K/W",
            (Self::Conductor, Level) => "V",
            (Self::Conductor, SheetResistance) => "ohm",
            (Self::Conductor, Inflow) => "C/m2",
            (Self::Conductor, Transfer) => "F/m2",
            (Self::Conductor, Resistance) => "m2/F",
            (Self::Conductor, CurrentIn) => "A/m",
            (Self::Conductor, FilmTransfer) => "S/m",
            (Self::Conductor, FilmResistance) => "ohm m",
            (
                _,
                Permittivity | Conductivity | SheetResistance | CurrentIn | FilmTransfer | FilmResistance,
            )
            | (Self::Plain, _) => "1",
        }
    }

    /// The unit a plain number takes in a sum with a quantity of some dimension, one per dimension.
    ///
    /// In seepage a length can be a coordinate or a head. If those have different units, a plain number beside a
    /// length has none, rather than one of the two.
    pub(super) fn units_beside(self, length: &Unit) -> Vec<Unit> {
        let mut units: Vec<Unit> = Quantity::ALL
            .into_iter()
            .map(|q| self.unit(q))
            .filter(|u| u.dimension != Dimension::NONE)
            .map(|u| if u.is_level() { Unit { name: "K".to_owned(), zero: None, ..u } } else { u })
            .collect();
        units.retain(|u| u.dimension != Dimension::LENGTH);
        if self != Self::Seepage || length.factor == Factor::ONE {
            units.push(length.clone());
        }
        units
    }
}

/// A quantity that a section file gives.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Quantity {
    /// A value of the potential.
    Level,
    /// Hydraulic or thermal conductivity.
    Conductivity,
    /// Relative permittivity.
    Permittivity,
    /// Resistance of a square of film.
    SheetResistance,
    /// Prescribed flux density; a conductor with `permittivity` has a surface charge.
    Inflow,
    /// Coefficient of a surface film.
    Transfer,
    /// Resistance of a surface film.
    Resistance,
    /// Prescribed current per unit length of edge, with `sheet_resistance`.
    CurrentIn,
    /// Coefficient of a contact, with `sheet_resistance`.
    FilmTransfer,
    /// Resistance of a contact, with `sheet_resistance`.
    FilmResistance,
}

impl Quantity {
    /// All of them.
    pub const ALL: [Self; 10] = [
        Self::Level,
        Self::Conductivity,
        Self::Permittivity,
        Self::SheetResistance,
        Self::Inflow,
        Self::Transfer,
        Self::Resistance,
        Self::CurrentIn,
        Self::FilmTransfer,
        Self::FilmResistance,
    ];
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_default_unit_is_si_and_fits_its_neighbours() {
        for word in Trade::WORDS {
            let trade = Trade::from_word(word).unwrap();
            for quantity in Quantity::ALL {
                let name = trade.unit_name(quantity);
                let unit = parse_unit(name).unwrap_or_else(|e| panic!("{word} {quantity:?}: {e}"));
                assert_eq!(unit.factor, Factor::ONE, "{word} {quantity:?}");
            }
            // transfer * level = inflow, and resistance is its reciprocal.
            for (transfer, resistance, inflow) in [
                (Quantity::Transfer, Quantity::Resistance, Quantity::Inflow),
                (Quantity::FilmTransfer, Quantity::FilmResistance, Quantity::CurrentIn),
            ] {
                if trade != Trade::Conductor && transfer == Quantity::FilmTransfer {
                    continue;
                }
                let transfer = trade.unit(transfer);
                assert_eq!(
                    transfer.times(&trade.unit(Quantity::Level)).unwrap().dimension,
                    trade.unit(inflow).dimension
                );
                assert!(transfer.times(&trade.unit(resistance)).unwrap().dimension.is_plain());
            }
        }
    }

    #[test]
    fn a_plain_number_beside_a_quantity_has_one_unit_at_most() {
        let length = parse_unit("ft").unwrap();
        for word in Trade::WORDS {
            let trade = Trade::from_word(word).unwrap();
            let units = trade.units_beside(&length);
            for u in &units {
                assert!(
                    units.iter().all(|v| v.dimension != u.dimension || v.factor == u.factor),
                    "{word} {u:?}"
                );
            }
            let has_length = units.iter().any(|u| u.dimension == Dimension::LENGTH);
            assert_eq!(has_length, trade != Trade::Seepage, "{word}");
        }
    }
}
