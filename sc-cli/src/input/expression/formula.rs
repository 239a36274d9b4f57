//! A compiled expression: numbers, `x`, `y`, `s` and operations, units settled and names replaced.

use super::words::{Function, Variable};
use crate::input::place::Span;
use thiserror::Error;

/// A binary operation.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Operator {
    /// `+`
    Add,
    /// `-`
    Subtract,
    /// `*`
    Multiply,
    /// `/`
    Divide,
    /// `^`
    Power,
}

impl Operator {
    /// How it is written.
    pub fn symbol(self) -> &'static str {
        match self {
            Self::Add => "+",
            Self::Subtract => "-",
            Self::Multiply => "*",
            Self::Divide => "/",
            Self::Power => "^",
        }
    }
}

/// Where a varying value is wanted: the point, and the distance along its side, in the section's `length` unit.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Sample {
    /// Abscissa.
    pub x: f64,
    /// Ordinate.
    pub y: f64,
    /// Distance along the side.
    pub s: f64,
}

/// An operation outside its domain, or a result no number can hold.
#[derive(Debug, Clone, PartialEq, Error)]
#[error("{what}")]
pub struct UndefinedValue {
    /// Operation and value.
    pub what: String,
    /// The part of the expression, in the file.
    pub span: Span,
}

/// A compiled expression in `x`, `y` and `s`.
///
/// Parts without a variable are evaluated when the formula is built, so a formula without variables is one number.
#[derive(Debug, Clone, PartialEq)]
pub struct Formula {
    node: Node,
    span: Span,
}

#[derive(Debug, Clone, PartialEq)]
enum Node {
    Number(f64),
    Variable(Variable),
    Negate(Box<Formula>),
    Binary(Operator, Box<Formula>, Box<Formula>),
    Call(Function, Vec<Formula>),
}

impl Formula {
    /// A constant.
    pub fn number(value: f64, span: Span) -> Self {
        Self { node: Node::Number(value), span }
    }

    pub(super) fn variable(variable: Variable, span: Span) -> Self {
        Self { node: Node::Variable(variable), span }
    }

    pub(super) fn negate(of: Self, span: Span) -> Result<Self, UndefinedValue> {
        Self { node: Node::Negate(Box::new(of)), span }.folded()
    }

    pub(super) fn binary(op: Operator, a: Self, b: Self, span: Span) -> Result<Self, UndefinedValue> {
        Self { node: Node::Binary(op, Box::new(a), Box::new(b)), span }.folded()
    }

    pub(super) fn call(function: Function, arguments: Vec<Self>, span: Span) -> Result<Self, UndefinedValue> {
        Self { node: Node::Call(function, arguments), span }.folded()
    }

    /// The value, if it does not vary.
    pub fn constant(&self) -> Option<f64> {
        match self.node {
            Node::Number(value) => Some(value),
            _ => None,
        }
    }

    /// The part of the file it was read from.
    pub fn span(&self) -> Span {
        self.span
    }

    /// True if the value depends on the variable.
    pub fn depends_on(&self, variable: Variable) -> bool {
        match &self.node {
            Node::Number(_) => false,
            Node::Variable(v) => *v == variable,
            Node::Negate(a) => a.depends_on(variable),
            Node::Binary(_, a, b) => a.depends_on(variable) || b.depends_on(variable),
            Node::Call(_, arguments) => arguments.iter().any(|a| a.depends_on(variable)),
        }
    }

    fn folded(self) -> Result<Self, UndefinedValue> {
        let known = match &self.node {
            Node::Number(_) | Node::Variable(_) => false,
            Node::Negate(a) => a.constant().is_some(),
            Node::Binary(_, a, b) => a.constant().is_some() && b.constant().is_some(),
            Node::Call(_, arguments) => arguments.iter().all(|a| a.constant().is_some()),
        };
        if known { Ok(Self::number(self.evaluate(Sample::default())?, self.span)) } else { Ok(self) }
    }

    /// The value at a place along a side. It is finite.
    ///
    /// # Errors
    /// [`UndefinedValue`] when an operation leaves its domain there, with the part of the file.
    pub fn evaluate(&self, at: Sample) -> Result<f64, UndefinedValue> {
        let value = match &self.node {
            Node::Number(value) => Ok(*value),
            Node::Variable(Variable::X) => Ok(at.x),
            Node::Variable(Variable::Y) => Ok(at.y),
            Node::Variable(Variable::S) => Ok(at.s),
            Node::Negate(a) => Ok(-a.evaluate(at)?),
            Node::Binary(op, a, b) => operate(*op, a.evaluate(at)?, b.evaluate(at)?),
            Node::Call(function, arguments) => {
                let mut values = [0.0; 2];
                for (value, argument) in values.iter_mut().zip(arguments) {
                    *value = argument.evaluate(at)?;
                }
                apply(*function, values)
            }
        };
        let value = match value {
            Ok(v) if v.is_finite() => return Ok(v),
            Ok(_) => "the result is too large for a number".to_owned(),
            Err(what) => what,
        };
        Err(UndefinedValue { what: value, span: self.span })
    }
}

fn operate(op: Operator, a: f64, b: f64) -> Result<f64, String> {
    match op {
        Operator::Add => Ok(a + b),
        Operator::Subtract => Ok(a - b),
        Operator::Multiply => Ok(a * b),
        Operator::Divide if b == 0.0 => Err(format!("{a} is divided by zero")),
        Operator::Divide => Ok(a / b),
        Operator::Power if a == 0.0 && b < 0.0 => Err(format!("zero has no power {b}")),
        Operator::Power if a < 0.0 && b.fract() != 0.0 => {
            Err(format!("a negative number, {a}, has no power {b}"))
        }
        Operator::Power => Ok(a.powf(b)),
    }
}

fn apply(function: Function, [a, b]: [f64; 2]) -> Result<f64, String> {
    let outside = |rule: &str| Err(format!("{} of {a} is not defined: it takes {rule}", function.name()));
    match function {
        Function::Sin => Ok(a.sin()),
        Function::Cos => Ok(a.cos()),
        Function::Tan => Ok(a.tan()),
        Function::Asin | Function::Acos if a.abs() > 1.0 => outside("a number from -1 to 1"),
        Function::Asin => Ok(a.asin()),
        Function::Acos => Ok(a.acos()),
        Function::Atan => Ok(a.atan()),
        Function::Atan2 if a == 0.0 && b == 0.0 => {
            Err("atan2 of 0, 0 is not defined: the point has no direction".to_owned())
        }
        Function::Atan2 => Ok(a.atan2(b)),
        Function::Sinh => Ok(a.sinh()),
        Function::Cosh => Ok(a.cosh()),
        Function::Tanh => Ok(a.tanh()),
        Function::Exp => Ok(a.exp()),
        Function::Ln | Function::Log10 if a <= 0.0 => outside("a number above zero"),
        Function::Ln => Ok(a.ln()),
        Function::Log10 => Ok(a.log10()),
        Function::Sqrt if a < 0.0 => outside("a number not below zero"),
        Function::Sqrt => Ok(a.sqrt()),
        Function::Abs => Ok(a.abs()),
        Function::Min => Ok(a.min(b)),
        Function::Max => Ok(a.max(b)),
    }
}

#[cfg(test)]
mod tests {
    use super::super::tests_support::evaluate;

    #[test]
    fn values_agree_with_closed_forms() {
        let rows = [
            ("2^3^2", 512.0),
            ("-2^2", -4.0),
            ("2^-1", 0.5),
            ("7 - 2 - 1", 4.0),
            ("12/3/2", 2.0),
            ("2 + 3*4", 14.0),
            ("-(1 + 2)*+3", -9.0),
            ("x + 10*y + 100*s", 532.0),
            ("min(3, 2) + max(3, 2)", 5.0),
            ("sqrt(16) + abs(-1)", 5.0),
            ("ln(exp(1))", 1.0),
            ("log10(1000)", 3.0),
            ("4*atan(1) - pi", 0.0),
            ("sin(pi/6)", 0.5),
            ("cosh(2)^2 - sinh(2)^2", 1.0),
            ("tanh(0) + cos(0) + tan(0)", 1.0),
            ("asin(1) + acos(1) - pi/2", 0.0),
            ("atan2(1, -1)/pi", 0.75),
            (".5 + 5. + 1e-3 + 2E+1", 25.501),
        ];
        for (text, expected) in rows {
            let got = evaluate(text).unwrap_or_else(|e| panic!("{text}: {e}"));
            let scale = if expected == 0.0 { 4.0 } else { expected };
            assert!((got - expected).abs() <= 16.0 * f64::EPSILON * scale.abs(), "{text}: {got}");
        }
    }

    #[test]
    fn operations_outside_their_domain_are_faults() {
        let rows = [
            ("sqrt(-1)", "sqrt of -1 is not defined"),
            ("1/0", "1 is divided by zero"),
            ("1/(x - 2)", "1 is divided by zero"),
            ("exp(1000)", "too large"),
            ("1e300*1e300", "too large"),
            ("ln(0)", "ln of 0"),
            ("asin(1.5)", "asin of 1.5"),
            ("(0-8)^(1/3)", "negative number, -8"),
            ("0^-1", "zero has no power"),
            ("atan2(0, 0)", "no direction"),
            ("1e999", "too large"),
        ];
        for (text, part) in rows {
            let got = evaluate(text).unwrap_err();
            assert!(got.contains(part), "{text}: {got}");
        }
    }
}
