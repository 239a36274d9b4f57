//! Tables, texts and lists of the TOML tree, with the faults of their form.

use super::Reader;
use crate::input::fault::{Fault, FaultKind};
use crate::input::nearest::nearest;
use crate::input::place::{Placed, Span};
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A table of the file under the name that messages give it.
pub(super) struct Table<'a, 'i> {
    table: &'a DeTable<'i>,
    pub(super) span: Span,
    pub(super) name: String,
}

impl<'a, 'i> Table<'a, 'i> {
    pub(super) fn new(table: &'a DeTable<'i>, span: Span, name: impl Into<String>) -> Self {
        Self { table, span, name: name.into() }
    }

    pub(super) fn get(&self, key: &str) -> Option<&'a Spanned<DeValue<'i>>> {
        self.table.get(key)
    }

    /// Where a key stands.
    pub(super) fn key_span(&self, key: &str) -> Option<Span> {
        self.table.get_key_value(key).map(|(k, _)| k.span().into())
    }

    /// The entries in the order of the file.
    pub(super) fn entries(&self) -> Vec<(Placed<&'a str>, &'a Spanned<DeValue<'i>>)> {
        let mut entries: Vec<_> =
            self.table.iter().map(|(k, v)| (Placed::new(k.get_ref().as_ref(), k.span()), v)).collect();
        entries.sort_by_key(|(k, _)| k.span);
        entries
    }
}

impl Reader<'_> {
    /// Reports every key of the table that is not among `known`.
    pub(super) fn check_keys(&mut self, table: &Table<'_, '_>, known: &[&str]) {
        for (key, _) in table.entries() {
            if known.contains(&key.value) {
                continue;
            }
            let hint = match nearest(key.value, known.iter().copied()) {
                Some(near) => format!("did you mean `{near}`?"),
                None => format!("the keys of {} are {}", table.name, known.join(", ")),
            };
            let kind = FaultKind::UnknownKey { key: key.value.to_owned(), table: table.name.clone() };
            self.hinted(kind, key.span, hint);
        }
    }

    /// The value as a table.
    pub(super) fn table_of<'a, 'i>(
        &mut self,
        name: impl Into<String>,
        value: &'a Spanned<DeValue<'i>>,
        expected: &'static str,
    ) -> Option<Table<'a, 'i>> {
        let name = name.into();
        match value.get_ref() {
            DeValue::Table(table) => Some(Table::new(table, value.span().into(), name)),
            _ => {
                self.wrong_type(name, expected, value);
                None
            }
        }
    }

    /// The value as a list.
    pub(super) fn list_of<'a, 'i>(
        &mut self,
        what: &str,
        value: &'a Spanned<DeValue<'i>>,
        expected: &'static str,
    ) -> Option<&'a [Spanned<DeValue<'i>>]> {
        match value.get_ref() {
            DeValue::Array(array) => Some(array),
            _ => {
                self.wrong_type(what, expected, value);
                None
            }
        }
    }

    /// The value as a text.
    pub(super) fn text_of(&mut self, what: &str, value: &Spanned<DeValue<'_>>) -> Option<Placed<String>> {
        match value.get_ref() {
            DeValue::String(text) => Some(Placed::new(text.to_string(), value.span())),
            _ => {
                self.wrong_type(what, "a text in quotes", value);
                None
            }
        }
    }

    pub(super) fn wrong_type(
        &mut self,
        what: impl Into<String>,
        expected: &'static str,
        value: &Spanned<DeValue<'_>>,
    ) {
        let found = match value.get_ref() {
            DeValue::String(text) => format!("the text \"{}\"", shortened(text)),
            DeValue::Integer(_) | DeValue::Float(_) => "a number".to_owned(),
            DeValue::Boolean(b) => b.to_string(),
            DeValue::Datetime(_) => "a date or time".to_owned(),
            DeValue::Array(list) => format!("a list of {}", list.len()),
            DeValue::Table(_) => "a table".to_owned(),
        };
        self.fault(FaultKind::WrongType { what: what.into(), expected, found }, value.span().into());
    }

    pub(super) fn unknown_word(
        &mut self,
        what: &'static str,
        word: &Placed<String>,
        expected: &'static str,
        words: &[&str],
    ) {
        let kind = FaultKind::UnknownWord { what, found: shortened(&word.value), expected };
        let fault = Fault::new(kind, word.span);
        let near = nearest(&word.value, words.iter().copied());
        self.faults.push(match near {
            Some(near) => fault.hint(format!("did you mean \"{near}\"?")),
            None => fault,
        });
    }

    /// Reports the second of two keys that exclude each other.
    pub(super) fn exclude(&mut self, table: &Table<'_, '_>, first: &str, second: &str) {
        let kind = FaultKind::KeysExclude {
            first: first.to_owned(),
            second: second.to_owned(),
            table: table.name.clone(),
        };
        let span = table.key_span(second).unwrap_or(table.span);
        let fault = Fault::new(kind, span);
        self.faults.push(match table.key_span(first) {
            Some(other) => fault.related(other, "the other"),
            None => fault,
        });
    }
}

/// A text short enough for a message.
fn shortened(text: &str) -> String {
    const LONGEST: usize = 40;
    let mut short: String = text.chars().take(LONGEST).collect();
    if short.len() < text.len() {
        short.push_str("...");
    }
    short
}
