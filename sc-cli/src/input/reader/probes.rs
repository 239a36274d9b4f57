//! The list `[[probe]]`: points and sides where values are wanted.

use super::Reader;
use super::tree::Table;
use crate::input::fault::FaultKind;
use crate::input::model::{Probe, ProbePlace};
use crate::input::place::Placed;
use toml::Spanned;
use toml::de::DeValue;

/// Points on each side of a probe `along` that names no `count`.
pub const DEFAULT_COUNT: usize = 11;
/// More points than this on one side are taken for a slip.
pub const MAX_COUNT: usize = 100_000;

impl Reader<'_> {
    pub(super) fn read_probes(&mut self, value: &Spanned<DeValue<'_>>) -> Vec<Probe> {
        let entries = self.list_of("`probe`", value, "a list, each entry under [[probe]]").unwrap_or(&[]);
        let mut probes = Vec::new();
        for (k, entry) in entries.iter().enumerate() {
            let table = self.table_of(format!("`probe[{k}]`"), entry, "a table with `at` or `along`");
            if let Some(probe) = table.and_then(|t| self.read_probe(&t)) {
                probes.push(probe);
            }
        }
        probes
    }

    fn read_probe(&mut self, table: &Table<'_, '_>) -> Option<Probe> {
        self.check_keys(table, &["name", "at", "side", "along", "count", "from", "to"]);
        let name = table.get("name").map(|v| self.text_of("`name`", v));
        let place = match (table.get("at"), table.get("along")) {
            (Some(at), None) => {
                for key in ["count", "from", "to"] {
                    if table.get(key).is_some() {
                        self.exclude(table, "at", key);
                    }
                }
                let side = self.read_side_name(table, "side");
                let at = self.read_point("a coordinate", at);
                ProbePlace::Point { at: at?, side: side.ok()? }
            }
            (None, Some(_)) => {
                if table.get("side").is_some() {
                    self.exclude(table, "along", "side");
                }
                self.read_along(table)?
            }
            (Some(_), Some(_)) => {
                self.exclude(table, "at", "along");
                return None;
            }
            (None, None) => {
                let kind = FaultKind::MissingKey { key: "at", table: table.name.clone() };
                self.hinted(kind, table.span, "at = [x, y] for a point, along = \"...\" for a side");
                return None;
            }
        };
        let name = match name {
            Some(name) => Some(name?),
            None => None,
        };
        Some(Probe { name, place, span: table.span })
    }

    fn read_along(&mut self, table: &Table<'_, '_>) -> Option<ProbePlace> {
        let side = self.read_side_name(table, "along");
        let count = match table.get("count") {
            Some(value) => self.read_count(value),
            None => Some(DEFAULT_COUNT),
        };
        let place = self.coordinate("a distance along a side");
        let mut distance = |key: &str| match table.get(key) {
            Some(value) => self.number(value, &place).map(Some).ok_or(()),
            None => Ok(None),
        };
        let (from, to) = (distance("from"), distance("to"));
        Some(ProbePlace::Along { side: side.ok()??, count: count?, from: from.ok()?, to: to.ok()? })
    }

    fn read_count(&mut self, value: &Spanned<DeValue<'_>>) -> Option<usize> {
        let place = super::number::Use::new("`count`", crate::input::units::Unit::plain());
        let Placed { value: count, span } = self.number(value, &place)?;
        #[expect(clippy::cast_precision_loss, reason = "a small whole number")]
        let most = MAX_COUNT as f64;
        if count.fract() == 0.0 && 2.0 <= count && count <= most {
            #[expect(
                clippy::cast_possible_truncation,
                clippy::cast_sign_loss,
                reason = "whole and in range"
            )]
            return Some(count as usize);
        }
        let kind = FaultKind::OutOfRange {
            what: "`count`".to_owned(),
            value: count.to_string(),
            rule: "a whole number from 2 to 100000",
        };
        self.fault(kind, span);
        None
    }
}
