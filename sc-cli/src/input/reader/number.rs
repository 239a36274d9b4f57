//! Numbers: bare, or an expression in quotes with or without a unit, brought into the unit of their place of use.

use super::Reader;
use crate::input::expression::{Compiled, Compiler, Formula, Lookup, convert, parse_value};
use crate::input::fault::{Fault, FaultKind};
use crate::input::nearest::nearest;
use crate::input::place::{Placed, Span, StringPlaces};
use crate::input::trade::Quantity;
use crate::input::units::{Dimension, Unit, UnitFault, known_units, parse_unit};
use std::ops::Range;
use toml::Spanned;
use toml::de::DeValue;

/// Where a number is used, which settles its unit.
#[derive(Debug, Clone)]
pub(super) struct Use {
    /// For messages: "a coordinate".
    pub(super) what: String,
    /// The unit of a plain number, and of the result.
    pub(super) unit: Unit,
    /// Whether `x`, `y` and `s` may occur.
    pub(super) varying: bool,
    /// False when the unit is not known, because the trade is not.
    pub(super) checked: bool,
}

impl Use {
    pub(super) fn new(what: impl Into<String>, unit: Unit) -> Self {
        Self { what: what.into(), unit, varying: false, checked: true }
    }
}

/// A value before its unit is settled.
pub(super) struct Measured {
    pub(super) formula: Formula,
    pub(super) unit: Option<Unit>,
    /// A plain number that may well be an angle in radians.
    pub(super) radians: bool,
}

impl Reader<'_> {
    /// The place of use of a coordinate or of a distance along a side.
    pub(super) fn coordinate(&self, what: impl Into<String>) -> Use {
        Use::new(what, self.length.clone())
    }

    /// The place of use of a quantity of the trade.
    pub(super) fn quantity(&self, what: impl Into<String>, quantity: Quantity) -> Use {
        Use { checked: self.trade_known, ..Use::new(what, self.trade.unit(quantity)) }
    }

    /// The place of use of an angle in degrees.
    pub(super) fn heading(&self, what: impl Into<String>) -> Use {
        Use::new(what, parse_unit("deg").unwrap_or_else(|_| Unit::plain()))
    }

    /// A number that does not vary, in the unit of its use.
    pub(super) fn number(&mut self, value: &Spanned<DeValue<'_>>, place: &Use) -> Option<Placed<f64>> {
        let formula = self.formula(value, place)?;
        Some(Placed::new(formula.value.constant()?, formula.span))
    }

    /// A number above zero.
    pub(super) fn positive(&mut self, value: &Spanned<DeValue<'_>>, place: &Use) -> Option<Placed<f64>> {
        let number = self.number(value, place)?;
        if number.value > 0.0 {
            return Some(number);
        }
        let value = format!("{} {}", number.value, place.unit.name);
        let value = value.strip_suffix(" 1").unwrap_or(&value).to_owned();
        self.fault(
            FaultKind::OutOfRange { what: place.what.clone(), value, rule: "above zero" },
            number.span,
        );
        None
    }

    /// A number in the unit of its use, which may vary if the use lets it.
    pub(super) fn formula(&mut self, value: &Spanned<DeValue<'_>>, place: &Use) -> Option<Placed<Formula>> {
        let span: Span = value.span().into();
        let measured = self.measured(value, &place.what, place.varying)?;
        Some(Placed::new(self.settled(measured, place, span)?, span))
    }

    /// A number as written, its unit not settled.
    pub(super) fn measured(
        &mut self,
        value: &Spanned<DeValue<'_>>,
        what: &str,
        varying: bool,
    ) -> Option<Measured> {
        let span: Span = value.span().into();
        let plain = match value.get_ref() {
            DeValue::String(text) => return self.expression(text, span, what, varying),
            DeValue::Integer(i) => {
                let digits = i.as_str().replace('_', "");
                match i.radix() {
                    10 => digits.parse::<f64>().ok(),
                    #[expect(clippy::cast_precision_loss, reason = "any f64 is a rounded decimal as well")]
                    radix => i128::from_str_radix(&digits, radix).ok().map(|v| v as f64),
                }
            }
            DeValue::Float(f) => f.as_str().replace('_', "").parse::<f64>().ok(),
            _ => {
                self.wrong_type(what, "a number, or an expression in quotes", value);
                return None;
            }
        };
        match plain.filter(|v| v.is_finite()) {
            Some(v) => Some(Measured { formula: Formula::number(v, span), unit: None, radians: false }),
            None => {
                let written = self.text.get(span.start..span.end).unwrap_or("not finite").to_owned();
                self.fault(
                    FaultKind::OutOfRange { what: what.to_owned(), value: written, rule: "a finite number" },
                    span,
                );
                None
            }
        }
    }

    fn expression(&mut self, text: &str, span: Span, what: &str, varying: bool) -> Option<Measured> {
        let places = StringPlaces::new(self.text.get(span.start..span.end).unwrap_or(""), span.start, text);
        let (expr, unit_range) = match parse_value(text, &places) {
            Ok(parsed) => parsed,
            Err(fault) => {
                self.faults.push(*fault);
                return None;
            }
        };
        let unit = unit_range.as_ref().map(|range| self.trailing_unit(text, range, &places));
        let Self { values, used, faults, names, beside, .. } = self;
        let mut lookup = |name: &str| {
            used.insert(name.to_owned());
            values.get(name).cloned().unwrap_or(Lookup::Unknown)
        };
        let default_unit = |d: Dimension| beside.iter().find(|u| u.dimension == d).cloned();
        let compiled =
            Compiler { what, varying, lookup: &mut lookup, default_unit: &default_unit, names, faults }
                .compile(&expr)?;
        let Some(unit) = unit else {
            let Compiled { formula, unit, radians } = compiled;
            return Some(Measured { formula, unit, radians });
        };
        let unit = unit?;
        if let Some(has) = compiled.unit {
            let range = unit_range.unwrap_or_default();
            let kind = FaultKind::UnitTwice { unit: has.name, again: unit.name };
            self.hinted(kind, places.span(range), "leave the unit at the end out");
            return None;
        }
        Some(Measured { formula: compiled.formula, unit: Some(unit), radians: false })
    }

    fn trailing_unit(&mut self, text: &str, range: &Range<usize>, places: &StringPlaces) -> Option<Unit> {
        let written = &text[range.clone()];
        let fault = match parse_unit(written) {
            Ok(unit) => return Some(unit),
            Err(fault) => fault,
        };
        let bytes = fault.bytes();
        let span = places.span(range.start + bytes.start..range.start + bytes.end);
        match &fault {
            UnitFault::UnknownUnit { name, .. } if self.names.contains(name) => {
                let hint = format!(
                    "`{name}` is a name under `let`; a product is written with `*`, a unit stands at the end"
                );
                self.hinted(FaultKind::Unit(fault), span, hint);
            }
            _ => self.unit_fault(fault, span),
        }
        None
    }

    /// Reports a text that is no unit.
    pub(super) fn unit_fault(&mut self, fault: UnitFault, span: Span) {
        let hint = match &fault {
            UnitFault::UnknownUnit { nearest: Some(near), .. } => format!("did you mean `{near}`?"),
            UnitFault::UnknownUnit { name, .. } => {
                let folded = nearest(&name.to_lowercase(), known_units().iter().map(|u| u.name));
                match folded {
                    Some(near) => format!("did you mean `{near}`?"),
                    None => "a unit is written like m, kPa, m3/s/m or W/(m2 K)".to_owned(),
                }
            }
            UnitFault::Ambiguous { .. } => "put what follows the `/` in brackets, as in W/(m K)".to_owned(),
            _ => "a unit is written like m, kPa, m3/s/m or W/(m2 K), after the whole expression".to_owned(),
        };
        self.hinted(FaultKind::Unit(fault), span, hint);
    }

    /// Brings a value into the unit of its use.
    fn settled(&mut self, value: Measured, place: &Use, span: Span) -> Option<Formula> {
        let target = &place.unit;
        let Some(unit) = value.unit else {
            if value.radians && target.dimension == Dimension::ANGLE {
                let hint = "say what it is, with `rad` or `deg` after the expression";
                self.hinted(FaultKind::RadiansOrDegrees { what: place.what.clone() }, span, hint);
                return None;
            }
            return Some(value.formula);
        };
        if !place.checked {
            return Some(value.formula);
        }
        // The radian is 1, so that radius times angle is a length; an angle alone is no plain number.
        let alone = unit.dimension == Dimension::ANGLE || target.dimension == Dimension::ANGLE;
        let same = if alone {
            unit.dimension == target.dimension
        } else {
            unit.dimension.without_angle() == target.dimension
        };
        if same && unit.is_level() == target.is_level() {
            return match convert(value.formula, &unit, target) {
                Ok(formula) => Some(formula),
                Err(undefined) => {
                    self.fault(FaultKind::Undefined { what: undefined.what }, undefined.span);
                    None
                }
            };
        }
        let what = place.what.clone();
        let found_measure =
            if unit.is_level() { "temperature level".to_owned() } else { unit.dimension.measure() };
        let fault = if same && target.is_level() {
            let hint = "a level is written in degC or degF; 20 degC is 293.15 K above absolute zero";
            Fault::new(FaultKind::DifferenceForLevel { what, found: unit.name }, span).hint(hint)
        } else if target.dimension == Dimension::NONE {
            Fault::new(FaultKind::PlainExpected { what, found: unit.name, found_measure }, span)
                .hint("leave the unit out")
        } else {
            let is_pressure_for_head = target.dimension == Dimension::LENGTH && found_measure == "pressure";
            let kind = FaultKind::UnitMismatch {
                what,
                expected: target.name.clone(),
                expected_measure: if target.is_level() {
                    "temperature level".to_owned()
                } else {
                    target.dimension.measure()
                },
                found: unit.name,
                found_measure,
            };
            let fault = Fault::new(kind, span);
            if is_pressure_for_head && self.trade == crate::input::trade::Trade::Seepage {
                fault.hint("a head is the pressure over the unit weight of water, plus the elevation")
            } else {
                fault
            }
        };
        self.faults.push(fault);
        None
    }
}
