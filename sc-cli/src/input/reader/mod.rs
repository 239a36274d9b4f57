//! From the TOML tree to the model, one file per part.

mod material;
mod names;
mod number;
mod outline;
mod probes;
mod sides;
mod tree;

use super::expression::Lookup;
use super::fault::{Fault, FaultKind, Warned, Warning};
use super::model::{LengthUnit, Region, SectionFile};
use super::nearest::nearest;
use super::place::{Placed, Span};
use super::trade::Trade;
use super::units::{Dimension, Unit, parse_unit};
pub use probes::{DEFAULT_COUNT, MAX_COUNT};
use std::collections::{BTreeMap, BTreeSet};
use toml::Spanned;
use toml::de::{DeTable, DeValue};
use tree::Table;

/// The keys of the file as a whole.
const ROOT_KEYS: [&str; 10] =
    ["title", "trade", "length", "region", "let", "material", "outline", "within", "sides", "probe"];

/// What the reading of one file knows so far.
pub(super) struct Reader<'t> {
    text: &'t str,
    faults: Vec<Fault>,
    trade: Trade,
    /// False when the file names no trade there is: nothing is then said about units that depend on it.
    trade_known: bool,
    length: Unit,
    /// Units of a plain number in a sum with a quantity.
    beside: Vec<Unit>,
    /// The names under `let`.
    names: Vec<String>,
    values: BTreeMap<String, Lookup>,
    used: BTreeSet<String>,
    /// With `sheet_resistance` the flux is a current.
    sheet: bool,
    /// The names of the sides, those of vertices with a fault included.
    side_names: Vec<String>,
    /// False when a list of vertices, or a name in it, could not be read.
    side_names_known: bool,
    /// False when a condition could not be read.
    conditions_known: bool,
}

/// What was made out of a file, faults or not.
pub(super) struct Reading {
    /// The section; what has a fault is left out of it.
    pub(super) section: Warned<SectionFile>,
    /// The names of the sides, if all could be read.
    pub(super) side_names: Option<Vec<String>>,
    /// Whether all conditions could be read.
    pub(super) conditions_known: bool,
}

/// Reads the text; `set` gives other values to names under `let`.
///
/// The section comes back even when there are faults, as far as it could be made out, so that the passes after this
/// one can add theirs; only a text that is not TOML gives none.
pub(super) fn read(text: &str, set: &[(String, f64)]) -> (Option<Reading>, Vec<Fault>) {
    let (root, syntax) = DeTable::parse_recoverable(text);
    if !syntax.is_empty() {
        // What the tree holds after a slip of syntax is a guess; faults found in it would mislead.
        let fault = |e: toml::de::Error| {
            let message = e.message().lines().collect::<Vec<_>>().join(", ");
            Fault::new(FaultKind::Syntax { message }, e.span().map(Span::from))
        };
        return (None, syntax.into_iter().map(fault).collect());
    }
    let length = Unit { name: "m".to_owned(), dimension: Dimension::LENGTH, ..Unit::plain() };
    let mut reader = Reader {
        text,
        faults: Vec::new(),
        trade: Trade::Plain,
        trade_known: true,
        length,
        beside: Vec::new(),
        names: Vec::new(),
        values: BTreeMap::new(),
        used: BTreeSet::new(),
        sheet: false,
        side_names: Vec::new(),
        side_names_known: true,
        conditions_known: true,
    };
    let section = reader.section(&root, set);
    let side_names = reader.side_names_known.then_some(reader.side_names);
    (Some(Reading { section, side_names, conditions_known: reader.conditions_known }), reader.faults)
}

impl Reader<'_> {
    fn fault(&mut self, kind: FaultKind, span: Span) {
        self.faults.push(Fault::new(kind, span));
    }

    fn hinted(&mut self, kind: FaultKind, span: Span, hint: impl Into<String>) {
        self.faults.push(Fault::new(kind, span).hint(hint));
    }

    fn section(&mut self, root: &Spanned<DeTable<'_>>, set: &[(String, f64)]) -> Warned<SectionFile> {
        let root = Table::new(root.get_ref(), root.span().into(), "the section file");
        self.check_keys(&root, &ROOT_KEYS);
        let title = root.get("title").and_then(|v| self.text_of("`title`", v));
        // A mistyped `trade` is one fault, and not one for each unit of the trade meant.
        let mistyped = |k: &str| !ROOT_KEYS.contains(&k) && nearest(k, ROOT_KEYS).as_deref() == Some("trade");
        self.trade_known =
            root.get("trade").is_some() || !root.entries().iter().any(|(k, _)| mistyped(k.value));
        self.read_trade(root.get("trade"));
        self.read_length(root.get("length"));
        let region = self.read_region(root.get("region"));
        self.beside = self.trade.units_beside(&self.length);
        let names = self.read_names(root.get("let"), set);
        let material = root.get("material").and_then(|v| self.read_material(v));
        let outline = match root.get("outline") {
            Some(value) => self.read_outline("outline", value),
            None => {
                self.side_names_known = false;
                let kind = FaultKind::MissingKey { key: "outline", table: "the section file".to_owned() };
                self.faults.push(
                    Fault::new(kind, None)
                        .hint("outline = [ { at = [0, 0], side = \"...\" }, ... ] lists the vertices"),
                );
                Vec::new()
            }
        };
        let within = root.get("within").map(|v| self.read_outline("within", v)).unwrap_or_default();
        let sides = root.get("sides").map(|v| self.read_sides(v)).unwrap_or_default();
        let probes = root.get("probe").map(|v| self.read_probes(v)).unwrap_or_default();
        let warnings = self.unused_names(&names);
        let section = SectionFile {
            title,
            trade: self.trade,
            length: LengthUnit { name: self.length.name.clone(), metres: self.length.factor.value() },
            region,
            names,
            material,
            outline,
            within,
            sides,
            probes,
        };
        Warned { value: section, warnings }
    }

    fn unused_names(&self, names: &[super::model::NamedNumber]) -> Vec<Fault<Warning>> {
        names
            .iter()
            .filter(|n| !self.used.contains(&n.name.value))
            .map(|n| Fault::new(Warning::UnusedName { name: n.name.value.clone() }, n.name.span))
            .collect()
    }

    fn read_trade(&mut self, value: Option<&Spanned<DeValue<'_>>>) {
        let Some(value) = value else { return };
        self.trade_known = false;
        let Some(word) = self.text_of("`trade`", value) else { return };
        match Trade::from_word(&word.value) {
            Some(trade) => {
                self.trade = trade;
                self.trade_known = true;
            }
            None => {
                self.unknown_word("`trade`", &word, "one of seepage, heat, conductor, plain", &Trade::WORDS)
            }
        }
    }

    fn read_length(&mut self, value: Option<&Spanned<DeValue<'_>>>) {
        let Some(value) = value else { return };
        let Some(word) = self.text_of("`length`", value) else { return };
        match parse_unit(&word.value) {
            Ok(unit) if unit.dimension == Dimension::LENGTH => self.length = unit,
            Ok(unit) => {
                let kind = FaultKind::UnitMismatch {
                    what: "a coordinate".to_owned(),
                    expected: "m".to_owned(),
                    expected_measure: "length".to_owned(),
                    found_measure: unit.dimension.measure(),
                    found: unit.name,
                };
                self.hinted(kind, word.span, "`length` is a unit of length: m, mm, ft, in, ...");
            }
            Err(fault) => self.unit_fault(fault, word.span),
        }
    }

    fn read_region(&mut self, value: Option<&Spanned<DeValue<'_>>>) -> Placed<Region> {
        let Some(value) = value else { return Placed::default() };
        let Some(word) = self.text_of("`region`", value) else { return Placed::default() };
        let region = match word.value.as_str() {
            "inside" => Region::Inside,
            "outside" => Region::Outside,
            _ => {
                self.unknown_word("`region`", &word, "inside or outside", &["inside", "outside"]);
                Region::Inside
            }
        };
        Placed::new(region, word.span)
    }
}
