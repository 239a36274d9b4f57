//! The names under `let`: any order, no circles, each evaluated once.

use super::Reader;
use super::number::Measured;
use crate::input::expression::{Expr, ExprKind, Formula, Lookup, parse_value, reserved};
use crate::input::fault::{Fault, FaultKind};
use crate::input::model::NamedNumber;
use crate::input::nearest::nearest;
use crate::input::place::{Placed, StringPlaces};
use crate::input::units::{Dimension, Unit};
use std::collections::BTreeMap;
use toml::Spanned;
use toml::de::DeValue;

/// A name and what its expression needs.
struct Definition<'a, 'i> {
    name: Placed<&'a str>,
    value: &'a Spanned<DeValue<'i>>,
    needs: Vec<String>,
}

impl Reader<'_> {
    /// Reads the table `let`. `set` gives other values to some of its names: a plain number in place of the
    /// expression, before the unit that is written in the file, if one is.
    pub(super) fn read_names(
        &mut self,
        value: Option<&Spanned<DeValue<'_>>>,
        set: &[(String, f64)],
    ) -> Vec<NamedNumber> {
        let table = value.and_then(|v| self.table_of("`let`", v, "a table of named numbers"));
        let entries = table.map(|t| t.entries()).unwrap_or_default();
        self.names = entries.iter().map(|(k, _)| k.value.to_owned()).collect();
        self.check_set(set);
        let mut waiting: Vec<Definition<'_, '_>> = Vec::new();
        for (name, value) in &entries {
            let bad = self.check_name(name);
            let other = set.iter().rev().find(|(n, _)| n == name.value);
            if bad {
                self.values.insert(name.value.to_owned(), Lookup::Faulty);
                continue;
            }
            let needs = if other.is_some() { Vec::new() } else { self.needs_of(value) };
            waiting.push(Definition { name: *name, value, needs });
        }
        self.evaluate_in_order(waiting, set);
        self.named_numbers(&entries)
    }

    fn named_numbers(&self, entries: &[(Placed<&str>, &Spanned<DeValue<'_>>)]) -> Vec<NamedNumber> {
        let known = |name: &Placed<&str>| match self.values.get(name.value) {
            Some(Lookup::Known { value, unit, .. }) => Some(NamedNumber {
                name: Placed::new(name.value.to_owned(), name.span),
                value: *value,
                unit: unit.as_ref().map(|u| u.name.clone()),
            }),
            _ => None,
        };
        entries.iter().filter_map(|(name, _)| known(name)).collect()
    }

    fn check_set(&mut self, set: &[(String, f64)]) {
        for (name, value) in set {
            let fault = if !self.names.contains(name) {
                let near = nearest(name, self.names.iter().map(String::as_str));
                let hint = near.map_or("a value can be given to names under `let`".to_owned(), |n| {
                    format!("did you mean `{n}`?")
                });
                Fault::new(FaultKind::UnknownName { name: name.clone() }, None).hint(hint)
            } else if !value.is_finite() {
                let what = format!("the value given to `{name}`");
                Fault::new(
                    FaultKind::OutOfRange { what, value: value.to_string(), rule: "a finite number" },
                    None,
                )
            } else {
                continue;
            };
            self.faults.push(fault);
        }
    }

    /// Reports a name that an expression cannot hold.
    fn check_name(&mut self, name: &Placed<&str>) -> bool {
        let word = name.value;
        let kind = if let Some(taken) = reserved(word) {
            FaultKind::ReservedName { name: word.to_owned(), taken }
        } else if !word.starts_with(|c: char| c.is_ascii_alphabetic() || c == '_')
            || !word.chars().all(|c| c.is_ascii_alphanumeric() || c == '_')
        {
            FaultKind::BadName { name: word.to_owned() }
        } else {
            return false;
        };
        self.hinted(kind, name.span, "choose another name");
        true
    }

    /// The names under `let` that an expression uses. A fault in it is left to the evaluation.
    fn needs_of(&self, value: &Spanned<DeValue<'_>>) -> Vec<String> {
        let DeValue::String(text) = value.get_ref() else { return Vec::new() };
        let places = StringPlaces::new("", 0, "");
        let Ok((expr, _)) = parse_value(text, &places) else { return Vec::new() };
        let mut needs = Vec::new();
        collect_names(&expr, &mut needs);
        needs.retain(|n| self.names.contains(n));
        needs.sort();
        needs.dedup();
        needs
    }

    /// Evaluates what can be evaluated until nothing is left, or only circles and what hangs on them.
    fn evaluate_in_order(&mut self, mut waiting: Vec<Definition<'_, '_>>, set: &[(String, f64)]) {
        while !waiting.is_empty() {
            let (ready, blocked): (Vec<_>, Vec<_>) =
                waiting.into_iter().partition(|d| d.needs.iter().all(|n| self.values.contains_key(n)));
            if ready.is_empty() {
                self.report_circles(&blocked);
                return;
            }
            for definition in ready {
                let other = set.iter().rev().find(|(n, _)| n == definition.name.value).map(|(_, v)| *v);
                let lookup = self.evaluate(&definition, other).unwrap_or(Lookup::Faulty);
                self.values.insert(definition.name.value.to_owned(), lookup);
            }
            waiting = blocked;
        }
    }

    fn evaluate(&mut self, definition: &Definition<'_, '_>, other: Option<f64>) -> Option<Lookup> {
        let what = format!("`{}`", definition.name.value);
        let measured = match other {
            None => self.measured(definition.value, &what, false)?,
            Some(value) => {
                let unit = self.unit_written(definition.value);
                let span = definition.value.span().into();
                Measured { formula: Formula::number(value, span), unit, radians: false }
            }
        };
        let Measured { formula, unit, radians } = measured;
        let value = formula.constant()?;
        Some(match unit {
            // A unit such as m/cm is a number.
            Some(u) if u.dimension == Dimension::NONE => {
                Lookup::Known { value: u.factor.apply(value), unit: None, radians: false }
            }
            unit => Lookup::Known { value, unit, radians },
        })
    }

    /// The unit at the end of a definition.
    fn unit_written(&self, value: &Spanned<DeValue<'_>>) -> Option<Unit> {
        let DeValue::String(text) = value.get_ref() else { return None };
        let (_, range) = parse_value(text, &StringPlaces::new("", 0, "")).ok()?;
        crate::input::units::parse_unit(&text[range?]).ok()
    }

    fn report_circles(&mut self, blocked: &[Definition<'_, '_>]) {
        let by_name: BTreeMap<&str, &Definition<'_, '_>> =
            blocked.iter().map(|d| (d.name.value, d)).collect();
        for definition in blocked {
            if self.values.contains_key(definition.name.value) {
                continue;
            }
            // Every blocked name needs a blocked name, so the walk can only end where it has been before.
            let mut walk = vec![definition.name.value];
            let start = loop {
                let here = walk[walk.len() - 1];
                let next = by_name
                    .get(here)
                    .and_then(|d| d.needs.iter().map(String::as_str).find(|n| by_name.contains_key(n)));
                let Some(next) = next else { break walk.len() };
                match walk.iter().position(|n| *n == next) {
                    Some(start) => break start,
                    None => walk.push(next),
                }
            };
            let circle = &walk[start.min(walk.len() - 1)..];
            let already = circle.iter().any(|n| self.values.contains_key(*n));
            if let (false, Some(first)) = (already, circle.first().and_then(|n| by_name.get(n))) {
                let mut chain = circle.join(" -> ");
                chain.push_str(&format!(" -> {}", first.name.value));
                let mut fault = Fault::new(FaultKind::Cycle { chain }, first.name.span);
                for other in circle.iter().skip(1).filter_map(|n| by_name.get(n)) {
                    fault = fault.related(other.name.span, "part of the circle");
                }
                self.faults.push(fault.hint("give one of them a number"));
            }
            for name in walk {
                self.values.insert(name.to_owned(), Lookup::Faulty);
            }
        }
    }
}

fn collect_names(expr: &Expr, names: &mut Vec<String>) {
    match &expr.kind {
        ExprKind::Number(_) | ExprKind::Pi | ExprKind::Variable(_) => {}
        ExprKind::Name(name) => names.push(name.clone()),
        ExprKind::Negate(a) => collect_names(a, names),
        ExprKind::Binary(_, a, b) => {
            collect_names(a, names);
            collect_names(b, names);
        }
        ExprKind::Call(_, arguments) => arguments.iter().for_each(|a| collect_names(a, names)),
    }
}
