//! From the tree of an expression to a formula: names replaced, units followed and settled.

use super::formula::{Formula, Operator, UndefinedValue};
use super::parser::{Expr, ExprKind};
use super::words::Function;
use crate::input::fault::{Fault, FaultKind};
use crate::input::nearest::nearest;
use crate::input::place::Span;
use crate::input::units::{Dimension, Factor, Unit};

/// What is known of a name under `let`.
#[derive(Debug, Clone, PartialEq)]
pub(in crate::input) enum Lookup {
    /// Its value and unit; no unit is a plain number, of radians perhaps.
    Known { value: f64, unit: Option<Unit>, radians: bool },
    /// It is there, and the fault in it has been reported.
    Faulty,
    /// There is no such name.
    Unknown,
}

/// A formula and the unit of its value; no unit is a plain number.
#[derive(Debug, Clone, PartialEq)]
pub(in crate::input) struct Compiled {
    pub(in crate::input) formula: Formula,
    pub(in crate::input) unit: Option<Unit>,
    /// Made with `pi` or an inverse function: a plain number that may well be an angle in radians.
    pub(in crate::input) radians: bool,
}

impl Compiled {
    fn plain(formula: Formula) -> Self {
        Self { formula, unit: None, radians: false }
    }
}

/// Compiles one expression. Faults are collected, not returned: both sides of a sum may have one.
pub(in crate::input) struct Compiler<'a> {
    /// Where the expression stands, for messages: "a coordinate".
    pub(in crate::input) what: &'a str,
    /// Whether `x`, `y` and `s` have a value here.
    pub(in crate::input) varying: bool,
    /// Finds a name.
    pub(in crate::input) lookup: &'a mut dyn FnMut(&str) -> Lookup,
    /// The unit a plain number takes beside a quantity of this dimension.
    pub(in crate::input) default_unit: &'a dyn Fn(Dimension) -> Option<Unit>,
    /// The names under `let`, for hints.
    pub(in crate::input) names: &'a [String],
    pub(in crate::input) faults: &'a mut Vec<Fault>,
}

/// `unit` and what it measures, for messages.
fn describe(unit: Option<&Unit>) -> String {
    match unit {
        None => "a plain number".to_owned(),
        Some(u) if u.is_level() => format!("{} (temperature level)", u.name),
        Some(u) => format!("{} ({})", u.name, u.dimension.measure()),
    }
}

const SUM_HINT: &str =
    "both sides of a sum need the same kind of unit; give the plain number a name with a unit under `let`";

impl Compiler<'_> {
    fn fail(&mut self, kind: FaultKind, span: Span) -> Option<Compiled> {
        self.faults.push(Fault::new(kind, span));
        None
    }

    fn fail_with(&mut self, kind: FaultKind, span: Span, hint: &str) -> Option<Compiled> {
        self.faults.push(Fault::new(kind, span).hint(hint));
        None
    }

    fn defined(&mut self, formula: Result<Formula, UndefinedValue>) -> Option<Formula> {
        formula.map_err(|u| self.faults.push(Fault::new(FaultKind::Undefined { what: u.what }, u.span))).ok()
    }

    fn finish(&mut self, formula: Result<Formula, UndefinedValue>, unit: Option<Unit>) -> Option<Compiled> {
        let formula = self.defined(formula)?;
        let Some(unit) = unit else { return Some(Compiled::plain(formula)) };
        if unit.dimension != Dimension::ANGLE && unit.dimension.is_plain() {
            // m/cm is a hundred, not a unit; a product of angles is a plain number as well.
            return Some(Compiled::plain(self.defined(scaled(formula, unit.factor))?));
        }
        Some(Compiled { formula, unit: Some(unit), radians: false })
    }

    /// Compiles the expression; `None` if it has a fault, which is then among the faults.
    pub(in crate::input) fn compile(&mut self, expr: &Expr) -> Option<Compiled> {
        match &expr.kind {
            ExprKind::Number(value) => Some(Compiled::plain(Formula::number(*value, expr.span))),
            ExprKind::Pi => {
                let pi = Formula::number(std::f64::consts::PI, expr.span);
                Some(Compiled { radians: true, ..Compiled::plain(pi) })
            }
            ExprKind::Variable(v) if !self.varying => {
                let kind = FaultKind::NothingVaries { name: v.name(), what: self.what.to_owned() };
                self.fail(kind, expr.span)
            }
            ExprKind::Variable(v) => Some(Compiled::plain(Formula::variable(*v, expr.span))),
            ExprKind::Name(name) => match (self.lookup)(name) {
                Lookup::Known { value, unit, radians } => {
                    Some(Compiled { formula: Formula::number(value, expr.span), unit, radians })
                }
                Lookup::Faulty => None,
                Lookup::Unknown => {
                    let hint = match nearest(name, self.names.iter().map(String::as_str)) {
                        Some(near) => format!("did you mean `{near}`?"),
                        None => format!("define it: let.{name} = ..."),
                    };
                    self.fail_with(FaultKind::UnknownName { name: name.clone() }, expr.span, &hint)
                }
            },
            ExprKind::Negate(of) => {
                let of = self.compile(of)?;
                if let Some(unit) = of.unit.as_ref().filter(|u| u.is_level()) {
                    let kind = FaultKind::LevelArithmetic { operation: "-", unit: unit.name.clone() };
                    return self.fail(kind, expr.span);
                }
                let negative = self.finish(Formula::negate(of.formula, expr.span), of.unit)?;
                Some(Compiled { radians: of.radians, ..negative })
            }
            ExprKind::Binary(op, a, b) => {
                let (a, b) = (self.compile(a), self.compile(b));
                let (a, b) = (a?, b?);
                let radians = a.radians || b.radians;
                Some(Compiled { radians, ..self.binary(*op, a, b, expr.span)? })
            }
            ExprKind::Call(function, arguments) => {
                // All of them before the first fault ends it, so that each argument's fault is reported.
                let compiled: Vec<_> = arguments.iter().map(|a| self.compile(a)).collect();
                let compiled: Vec<Compiled> = compiled.into_iter().collect::<Option<_>>()?;
                let radians = match function {
                    Function::Asin | Function::Acos | Function::Atan | Function::Atan2 => true,
                    Function::Abs | Function::Min | Function::Max => compiled.iter().any(|c| c.radians),
                    _ => false,
                };
                Some(Compiled { radians, ..self.call(*function, compiled, expr.span)? })
            }
        }
    }

    fn binary(&mut self, op: Operator, a: Compiled, b: Compiled, span: Span) -> Option<Compiled> {
        let level = [&a, &b].into_iter().find_map(|c| c.unit.clone().filter(Unit::is_level));
        match op {
            Operator::Add | Operator::Subtract => {
                let (a, b, unit) = match level {
                    Some(_) => self.level_sum(op, a, b, span)?,
                    None => self.aligned(op.symbol(), a, b, span)?,
                };
                self.finish(Formula::binary(op, a, b, span), unit)
            }
            _ if level.is_some() => {
                let unit = level.map(|u| u.name).unwrap_or_default();
                let kind = FaultKind::LevelArithmetic { operation: op.symbol(), unit };
                self.fail_with(kind, span, "a mean of two levels is written T1 + (T2 - T1)/2")
            }
            Operator::Multiply | Operator::Divide => {
                let one = Unit::plain();
                let unit = match (&a.unit, &b.unit) {
                    (None, None) => None,
                    (u, v) => {
                        let (u, v) = (u.as_ref().unwrap_or(&one), v.as_ref().unwrap_or(&one));
                        let joined = if op == Operator::Multiply { u.times(v) } else { u.over(v) };
                        let Some(joined) = joined else {
                            let kind = FaultKind::UnitPower {
                                unit: u.name.clone(),
                                exponent: "so high a power".to_owned(),
                            };
                            return self.fail(kind, span);
                        };
                        Some(joined)
                    }
                };
                self.finish(Formula::binary(op, a.formula, b.formula, span), unit)
            }
            Operator::Power => self.power(a, b, span),
        }
    }

    fn power(&mut self, a: Compiled, b: Compiled, span: Span) -> Option<Compiled> {
        let exponent = self.plain("^", b)?;
        let Some(unit) = a.unit else {
            return self.finish(Formula::binary(Operator::Power, a.formula, exponent, span), None);
        };
        let refused = |exponent: String| FaultKind::UnitPower { unit: unit.name.clone(), exponent };
        let Some(n) = exponent.constant() else {
            return self.fail(refused("an exponent that varies".to_owned()), span);
        };
        let twice = 2.0 * n;
        if twice.fract() != 0.0 || twice.abs() > 64.0 {
            return self.fail_with(
                refused(n.to_string()),
                span,
                "the exponent of a quantity is whole or half",
            );
        }
        // Exact: the test above leaves whole numbers up to 64.
        #[expect(clippy::cast_possible_truncation, reason = "a whole number of at most 64")]
        let twice = twice as i32;
        if twice % 2 == 0 {
            let raised = unit.power(twice / 2);
            let Some(raised) = raised else { return self.fail(refused(n.to_string()), span) };
            return self.finish(Formula::binary(Operator::Power, a.formula, exponent, span), Some(raised));
        }
        let Some(dimension) = unit.dimension.power(twice).and_then(Dimension::root) else {
            return self.fail(refused(n.to_string()), span);
        };
        let base = self.defined(scaled(a.formula, unit.factor))?;
        self.finish(Formula::binary(Operator::Power, base, exponent, span), Some(si_unit(dimension)))
    }

    fn call(&mut self, function: Function, arguments: Vec<Compiled>, span: Span) -> Option<Compiled> {
        let mut arguments = arguments.into_iter();
        let (first, second) = (arguments.next()?, arguments.next());
        let name = function.name();
        if let Some(second) = second {
            let (a, b, unit) = self.aligned(name, first, second, span)?;
            let unit = if function == Function::Atan2 { None } else { unit };
            return self.finish(Formula::call(function, vec![a, b], span), unit);
        }
        if let Some(unit) = first.unit.as_ref().filter(|u| u.is_level()) {
            let kind = FaultKind::LevelArithmetic { operation: name, unit: unit.name.clone() };
            return self.fail(kind, span);
        }
        match function {
            Function::Abs => self.finish(Formula::call(function, vec![first.formula], span), first.unit),
            Function::Sqrt if first.unit.is_some() => {
                let unit = first.unit?;
                let Some(dimension) = unit.dimension.root() else {
                    let kind = FaultKind::UnitPower { unit: unit.name, exponent: "1/2".to_owned() };
                    return self.fail(kind, span);
                };
                let base = self.defined(scaled(first.formula, unit.factor))?;
                self.finish(Formula::call(function, vec![base], span), Some(si_unit(dimension)))
            }
            _ => {
                let argument = self.plain(name, first)?;
                self.finish(Formula::call(function, vec![argument], span), None)
            }
        }
    }

    /// The value as a plain number; an angle in radians.
    fn plain(&mut self, operation: &str, value: Compiled) -> Option<Formula> {
        match value.unit {
            None => Some(value.formula),
            Some(unit) if unit.dimension.is_plain() => self.defined(scaled(value.formula, unit.factor)),
            Some(unit) => {
                let what = if operation == "^" {
                    "an exponent".to_owned()
                } else {
                    format!("the argument of {operation}")
                };
                let kind = FaultKind::PlainExpected {
                    what,
                    found_measure: if unit.is_level() {
                        "a temperature level".to_owned()
                    } else {
                        unit.dimension.measure()
                    },
                    found: unit.name,
                };
                self.fail(kind, value.formula.span());
                None
            }
        }
    }

    /// Both values in one unit, for sums and comparisons.
    fn aligned(
        &mut self,
        operation: &'static str,
        a: Compiled,
        b: Compiled,
        span: Span,
    ) -> Option<(Formula, Formula, Option<Unit>)> {
        let mixed = FaultKind::MixedUnits {
            operation,
            left: describe(a.unit.as_ref()),
            right: describe(b.unit.as_ref()),
        };
        let unit = match (&a.unit, &b.unit) {
            (None, None) => return Some((a.formula, b.formula, None)),
            (Some(u), Some(v)) if u.is_level() && v.is_level() => u.clone(),
            (Some(u), Some(v)) if u.dimension == v.dimension && u.is_level() == v.is_level() => u.clone(),
            (Some(u), None) | (None, Some(u)) => {
                // A plain number beside a level would be a level in the comparisons, and that is too easily
                // taken for a difference.
                let default = if u.is_level() { None } else { (self.default_unit)(u.dimension) };
                let Some(default) = default else {
                    self.fail_with(mixed, span, SUM_HINT);
                    return None;
                };
                default
            }
            _ => {
                self.fail(mixed, span);
                return None;
            }
        };
        let mut brought = |c: Compiled| match &c.unit {
            None => Some(c.formula),
            Some(from) => {
                let moved = convert(c.formula, from, &unit);
                self.defined(moved)
            }
        };
        let (a, b) = (brought(a)?, brought(b)?);
        Some((a, b, Some(unit)))
    }

    /// A level and a difference, or the difference of two levels.
    fn level_sum(
        &mut self,
        op: Operator,
        a: Compiled,
        b: Compiled,
        span: Span,
    ) -> Option<(Formula, Formula, Option<Unit>)> {
        let is_level = |c: &Compiled| c.unit.as_ref().is_some_and(Unit::is_level);
        if is_level(&a) && is_level(&b) && op == Operator::Subtract {
            let (a, b, unit) = self.aligned(op.symbol(), a, b, span)?;
            return Some((a, b, unit.map(|u| degrees_of(&u))));
        }
        let swapped = !is_level(&a);
        if (swapped && op == Operator::Subtract) || (is_level(&a) && is_level(&b)) {
            let unit = if swapped { &b.unit } else { &a.unit };
            let unit = unit.as_ref().map(|u| u.name.clone()).unwrap_or_default();
            let kind = FaultKind::LevelArithmetic { operation: op.symbol(), unit };
            self.fail_with(
                kind,
                span,
                "a level can be moved by a difference (T + 5), and T1 - T2 is a difference",
            );
            return None;
        }
        let (level, step) = if swapped { (b, a) } else { (a, b) };
        let scale = level.unit?;
        let degrees = degrees_of(&scale);
        let mixed = |step: Option<&Unit>| FaultKind::MixedUnits {
            operation: op.symbol(),
            left: describe(if swapped { step } else { Some(&scale) }),
            right: describe(if swapped { Some(&scale) } else { step }),
        };
        let step_unit = match &step.unit {
            Some(u) => Some(u.clone()),
            None => (self.default_unit)(Dimension::TEMPERATURE).filter(|u| u.factor == degrees.factor),
        };
        let Some(from) = step_unit.filter(|u| u.dimension == Dimension::TEMPERATURE) else {
            let kind = mixed(step.unit.as_ref());
            self.fail_with(kind, span, "a level is moved by a difference in K; give it a name under `let`");
            return None;
        };
        let moved = convert(step.formula, &from, &degrees);
        let step = self.defined(moved)?;
        let (a, b) = if swapped { (step, level.formula) } else { (level.formula, step) };
        Some((a, b, Some(scale)))
    }
}

/// The unit of a difference on a scale.
fn degrees_of(scale: &Unit) -> Unit {
    let name =
        if scale.factor == Factor::ONE { "K".to_owned() } else { format!("{} of difference", scale.name) };
    Unit { name, zero: None, ..scale.clone() }
}

fn si_unit(dimension: Dimension) -> Unit {
    Unit { name: dimension.to_string(), dimension, factor: Factor::ONE, zero: None }
}

/// The value times the factor; untouched when the factor is 1.
fn scaled(formula: Formula, factor: Factor) -> Result<Formula, UndefinedValue> {
    if factor == Factor::ONE {
        return Ok(formula);
    }
    let span = formula.span();
    let is_one = |number: f64| number.to_bits() == 1.0_f64.to_bits();
    let by = |op, formula, number: f64| {
        if is_one(number) {
            return Ok(formula);
        }
        Formula::binary(op, formula, Formula::number(number, span), span)
    };
    by(Operator::Divide, by(Operator::Multiply, formula, factor.numerator())?, factor.denominator())
}

/// The value in another unit of the same kind. Two scales of a level are moved against each other as well.
pub(in crate::input) fn convert(formula: Formula, from: &Unit, to: &Unit) -> Result<Formula, UndefinedValue> {
    let factor = from.factor_to(to);
    let (Some(from_zero), Some(to_zero)) = (from.zero, to.zero) else { return scaled(formula, factor) };
    let span = formula.span();
    let moved = |op, formula, by: f64| {
        if by == 0.0 { Ok(formula) } else { Formula::binary(op, formula, Formula::number(by, span), span) }
    };
    if factor == Factor::ONE {
        return moved(Operator::Subtract, formula, from_zero - to_zero);
    }
    moved(Operator::Add, scaled(moved(Operator::Subtract, formula, from_zero)?, factor)?, to_zero)
}
