//! The table `[sides]`: what is known on the sides of each name.

use super::number::Use;
use super::tree::Table;
use super::{ROOT_KEYS, Reader};
use crate::input::fault::{Fault, FaultKind};
use crate::input::model::{Condition, Datum, Film, NamedSide, Surface};
use crate::input::place::{Placed, Span};
use crate::input::trade::Quantity;
use toml::Spanned;
use toml::de::DeValue;

const CONDITION_KEYS: [&str; 4] = ["held", "inflow", "surface", "insulated"];
const CONDITION_FORM: &str = "a table with one of held, inflow, surface, insulated";

impl Reader<'_> {
    pub(super) fn read_sides(&mut self, value: &Spanned<DeValue<'_>>) -> Vec<NamedSide> {
        let Some(table) = self.table_of("`sides`", value, "a table of conditions") else {
            self.conditions_known = false;
            return Vec::new();
        };
        let mut sides = Vec::new();
        for (name, value) in table.entries() {
            if !value.get_ref().is_table() && ROOT_KEYS.contains(&name.value) {
                let kind =
                    FaultKind::UnknownKey { key: name.value.to_owned(), table: "`[sides]`".to_owned() };
                self.hinted(kind, name.span, "a key of the whole file stands before the first [table]");
                continue;
            }
            let condition = self.read_condition(name.value, value);
            self.conditions_known &= condition.is_some();
            let condition = condition.unwrap_or(Condition::Insulated);
            sides.push(NamedSide {
                name: Placed::new(name.value.to_owned(), name.span),
                condition: Placed::new(condition, value.span()),
            });
        }
        sides
    }

    fn read_condition(&mut self, side: &str, value: &Spanned<DeValue<'_>>) -> Option<Condition> {
        let table = self.table_of(format!("the condition on \"{side}\""), value, CONDITION_FORM)?;
        self.check_keys(&table, &CONDITION_KEYS);
        let given: Vec<_> =
            table.entries().into_iter().filter(|(k, _)| CONDITION_KEYS.contains(&k.value)).collect();
        let Some((key, value)) = given.first() else {
            if table.entries().is_empty() {
                let kind = FaultKind::MissingKey { key: "held", table: table.name.clone() };
                self.hinted(kind, table.span, "or inflow, surface, insulated");
            }
            return None;
        };
        for (second, _) in &given[1..] {
            self.exclude(&table, key.value, second.value);
        }
        match key.value {
            "held" => {
                let place = self.quantity(format!("the level held on \"{side}\""), Quantity::Level);
                Some(Condition::Held(self.read_datum(value, place)?))
            }
            "inflow" => {
                let quantity = if self.sheet { Quantity::CurrentIn } else { Quantity::Inflow };
                let place = self.quantity(format!("the inflow on \"{side}\""), quantity);
                Some(Condition::Inflow(self.read_datum(value, place)?))
            }
            "surface" => {
                let table = self.table_of(
                    format!("the surface of \"{side}\""),
                    value,
                    "a table { transfer = ..., facing = ... }",
                )?;
                self.read_surface(&table)
            }
            _ => self.read_insulated(value),
        }
    }

    fn read_insulated(&mut self, value: &Spanned<DeValue<'_>>) -> Option<Condition> {
        if value.get_ref().as_bool() == Some(true) {
            return Some(Condition::Insulated);
        }
        let found = match value.get_ref() {
            DeValue::Boolean(_) => "false".to_owned(),
            other => format!("a value of type {}", other.type_str()),
        };
        let kind = FaultKind::WrongType { what: "`insulated`".to_owned(), expected: "true", found };
        self.hinted(kind, value.span().into(), "a side that is not insulated has held, inflow or surface");
        None
    }

    fn read_surface(&mut self, table: &Table<'_, '_>) -> Option<Condition> {
        self.check_keys(table, &["transfer", "resistance", "facing"]);
        let film = match (table.get("transfer"), table.get("resistance")) {
            (Some(value), None) => {
                let quantity = if self.sheet { Quantity::FilmTransfer } else { Quantity::Transfer };
                let place = self.quantity("the transfer of a surface", quantity);
                self.positive(value, &place).map(|v| Placed::new(Film::Transfer(v.value), v.span))
            }
            (None, Some(value)) => {
                let quantity = if self.sheet { Quantity::FilmResistance } else { Quantity::Resistance };
                let place = self.quantity("the resistance of a surface", quantity);
                self.positive(value, &place).map(|v| Placed::new(Film::Resistance(v.value), v.span))
            }
            (Some(_), Some(_)) => {
                self.exclude(table, "transfer", "resistance");
                None
            }
            (None, None) => {
                let kind = FaultKind::MissingKey { key: "transfer", table: table.name.clone() };
                self.hinted(kind, table.span, "or its reciprocal, `resistance`");
                None
            }
        };
        let facing = match table.get("facing") {
            Some(value) => {
                let place = self.quantity("the level a surface is facing", Quantity::Level);
                self.number(value, &place)
            }
            None => {
                self.fault(FaultKind::MissingKey { key: "facing", table: table.name.clone() }, table.span);
                None
            }
        };
        Some(Condition::Surface(Surface { film: film?, facing: facing? }))
    }

    /// A value along a side: a number, an expression, or a table in `s`.
    fn read_datum(&mut self, value: &Spanned<DeValue<'_>>, place: Use) -> Option<Placed<Datum>> {
        if !value.get_ref().is_table() {
            let place = Use { varying: true, ..place };
            let formula = self.formula(value, &place)?;
            let datum = match formula.value.constant() {
                Some(constant) => Datum::Constant(constant),
                None => Datum::Varying(formula.value),
            };
            return Some(Placed::new(datum, formula.span));
        }
        let table = self.table_of(place.what.clone(), value, "a number or { table = [[s, value], ...] }")?;
        self.check_keys(&table, &["table"]);
        let Some(rows) = table.get("table") else {
            if table.entries().is_empty() {
                self.fault(FaultKind::MissingKey { key: "table", table: table.name.clone() }, table.span);
            }
            return None;
        };
        Some(Placed::new(Datum::Table(self.read_rows(rows, &place)?), value.span()))
    }

    fn read_rows(&mut self, value: &Spanned<DeValue<'_>>, place: &Use) -> Option<Vec<[f64; 2]>> {
        let entries = self.list_of("`table`", value, "a list of pairs [s, value]")?;
        let distance = self.coordinate("a distance along a side");
        let mut rows = Vec::with_capacity(entries.len());
        let mut sound = true;
        let mut last: Option<Placed<f64>> = None;
        for entry in entries {
            let Some(pair) = self.list_of("a row of `table`", entry, "a pair [s, value]") else {
                sound = false;
                continue;
            };
            let [s, v] = pair else {
                self.wrong_type("a row of `table`", "a pair [s, value]", entry);
                sound = false;
                continue;
            };
            let (Some(s), Some(v)) = (self.number(s, &distance), self.number(v, place)) else {
                sound = false;
                continue;
            };
            if let Some(last) = last.filter(|l| s.value <= l.value) {
                self.not_rising(last, s);
                sound = false;
            }
            last = Some(s);
            rows.push([s.value, v.value]);
        }
        if sound && rows.len() < 2 {
            let kind = FaultKind::OutOfRange {
                what: "the number of rows of `table`".to_owned(),
                value: rows.len().to_string(),
                rule: "at least two",
            };
            self.fault(kind, Span::from(value.span()));
            return None;
        }
        sound.then_some(rows)
    }

    fn not_rising(&mut self, last: Placed<f64>, s: Placed<f64>) {
        let kind = FaultKind::OutOfRange {
            what: "a distance of `table`".to_owned(),
            value: s.value.to_string(),
            rule: "above the one before it",
        };
        self.faults.push(Fault::new(kind, s.span).related(last.span, "the one before it"));
    }
}
