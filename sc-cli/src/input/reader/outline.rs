//! The lists of vertices: `outline` and `within`.

use super::Reader;
use super::tree::Table;
use crate::input::fault::FaultKind;
use crate::input::model::OutlineVertex;
use crate::input::place::{Placed, Span};
use sc_core::outline::{Point, Vertex};
use toml::Spanned;
use toml::de::DeValue;

impl Reader<'_> {
    /// Reads a list of vertices, without those that have a fault.
    pub(super) fn read_outline(
        &mut self,
        key: &'static str,
        value: &Spanned<DeValue<'_>>,
    ) -> Vec<OutlineVertex> {
        let Some(entries) = self.list_of(&format!("`{key}`"), value, "a list of vertices") else {
            self.side_names_known = false;
            return Vec::new();
        };
        if entries.is_empty() {
            let kind = FaultKind::OutOfRange {
                what: format!("the number of vertices of `{key}`"),
                value: "0".to_owned(),
                rule: "at least two",
            };
            self.side_names_known = false;
            self.fault(kind, value.span().into());
        }
        let mut vertices = Vec::with_capacity(entries.len());
        for (k, entry) in entries.iter().enumerate() {
            vertices.push(self.read_vertex(format!("`{key}[{k}]`"), entry));
        }
        vertices.into_iter().flatten().collect()
    }

    fn read_vertex(&mut self, name: String, entry: &Spanned<DeValue<'_>>) -> Option<OutlineVertex> {
        let form = "a table like { at = [x, y], side = \"...\" }";
        let Some(table) = self.table_of(name, entry, form) else {
            self.side_names_known = false;
            return None;
        };
        self.check_keys(&table, &["at", "away", "side"]);
        let side = self.read_side_name(&table, "side");
        match &side {
            Ok(name) => self.side_names.extend(name.iter().map(|n| n.value.clone())),
            Err(()) => self.side_names_known = false,
        }
        let vertex = match (table.get("at"), table.get("away")) {
            (Some(at), None) => self.read_point("a coordinate", at).map(|p| Vertex::At(p.value)),
            (None, Some(away)) => self.read_away(away),
            (Some(_), Some(_)) => {
                self.exclude(&table, "at", "away");
                None
            }
            (None, None) => {
                let kind = FaultKind::MissingKey { key: "at", table: table.name.clone() };
                self.hinted(kind, table.span, "at = [x, y], or away = degrees for a vertex at infinity");
                None
            }
        };
        Some(OutlineVertex { vertex: vertex?, side: side.ok()?, span: table.span })
    }

    /// The name of a side under `key`; an error if it is there and no name.
    pub(super) fn read_side_name(
        &mut self,
        table: &Table<'_, '_>,
        key: &str,
    ) -> Result<Option<Placed<String>>, ()> {
        let Some(value) = table.get(key) else { return Ok(None) };
        let name = self.text_of(&format!("`{key}`"), value).ok_or(())?;
        if name.value.trim().is_empty() {
            let kind = FaultKind::OutOfRange {
                what: format!("`{key}`"),
                value: "empty".to_owned(),
                rule: "the name of a side",
            };
            self.hinted(kind, name.span, "leave the key out for a side without a name");
            return Err(());
        }
        Ok(Some(name))
    }

    /// A pair of coordinates.
    pub(super) fn read_point(&mut self, what: &str, value: &Spanned<DeValue<'_>>) -> Option<Placed<Point>> {
        let pair = self.list_of("a point", value, "a pair [x, y]")?;
        let [x, y] = pair else {
            self.wrong_type("a point", "a pair [x, y]", value);
            return None;
        };
        let place = self.coordinate(what);
        let (x, y) = (self.number(x, &place), self.number(y, &place));
        Some(Placed::new(Point::new(x?.value, y?.value), Span::from(value.span())))
    }

    fn read_away(&mut self, value: &Spanned<DeValue<'_>>) -> Option<Vertex> {
        let place = self.heading("a heading");
        let DeValue::Array(pair) = value.get_ref() else {
            let heading = self.number(value, &place)?.value;
            return Some(Vertex::Away { arriving: heading, leaving: heading });
        };
        let [arriving, leaving] = pair.as_ref() else {
            self.wrong_type("`away`", "a heading, or a pair [arriving, leaving]", value);
            return None;
        };
        let (arriving, leaving) = (self.number(arriving, &place), self.number(leaving, &place));
        Some(Vertex::Away { arriving: arriving?.value, leaving: leaving?.value })
    }
}
