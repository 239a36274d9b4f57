//! The material: one property, and one that belongs to the trade.

use super::Reader;
use crate::input::fault::FaultKind;
use crate::input::model::{LayeredFabric, Material};
use crate::input::place::Placed;
use crate::input::trade::{Quantity, Trade};
use toml::Spanned;
use toml::de::DeValue;

const KEYS: [&str; 3] = ["conductivity", "permittivity", "sheet_resistance"];

/// The properties of a trade.
fn fitting(trade: Trade) -> &'static [&'static str] {
    if trade == Trade::Conductor { &KEYS[1..] } else { &KEYS[..1] }
}

impl Reader<'_> {
    pub(super) fn read_material(&mut self, value: &Spanned<DeValue<'_>>) -> Option<Placed<Material>> {
        let table = self.table_of("`material`", value, "a table, as in material.conductivity = ...")?;
        self.check_keys(&table, &KEYS);
        let given: Vec<_> = table.entries().into_iter().filter(|(k, _)| KEYS.contains(&k.value)).collect();
        let Some((first, value)) = given.first() else {
            if table.entries().is_empty() {
                let kind =
                    FaultKind::MissingKey { key: fitting(self.trade)[0], table: "`material`".to_owned() };
                self.fault(kind, table.span);
            }
            return None;
        };
        for (second, _) in &given[1..] {
            self.exclude(&table, first.value, second.value);
        }
        if self.trade_known && !fitting(self.trade).contains(&first.value) {
            let kind = FaultKind::MaterialMismatch { key: first.value.to_owned(), trade: self.trade.word() };
            let hint = format!("its material is given by {}", fitting(self.trade).join(" or "));
            self.hinted(kind, first.span, hint);
            return None;
        }
        let material = match first.value {
            "permittivity" => {
                let place = self.quantity("the permittivity", Quantity::Permittivity);
                Material::Permittivity(self.positive(value, &place)?.value)
            }
            "sheet_resistance" => {
                // Set before the value is read: the sides take their units from it even if the value is faulty.
                self.sheet = true;
                let place = self.quantity("the sheet resistance", Quantity::SheetResistance);
                Material::SheetResistance(self.positive(value, &place)?.value)
            }
            _ => self.read_conductivity(value)?,
        };
        Some(Placed::new(material, value.span()))
    }

    fn read_conductivity(&mut self, value: &Spanned<DeValue<'_>>) -> Option<Material> {
        if !value.get_ref().is_table() {
            let place = self.quantity("the conductivity", Quantity::Conductivity);
            return Some(Material::Conductivity(self.positive(value, &place)?.value));
        }
        let table = self.table_of("`material.conductivity`", value, "a number or a table")?;
        self.check_keys(&table, &["along", "across", "dip"]);
        let mut principal = |key: &'static str, what: &str| {
            let place = self.quantity(what, Quantity::Conductivity);
            match table.get(key) {
                Some(value) => self.positive(value, &place),
                None => {
                    self.fault(FaultKind::MissingKey { key, table: table.name.clone() }, table.span);
                    None
                }
            }
        };
        let along = principal("along", "the conductivity along the layers");
        let across = principal("across", "the conductivity across the layers");
        let dip = match table.get("dip") {
            Some(value) => {
                let place = self.heading("the dip of the layers");
                self.number(value, &place)?.value
            }
            None => 0.0,
        };
        Some(Material::Layered(LayeredFabric { along: along?.value, across: across?.value, dip }))
    }
}
