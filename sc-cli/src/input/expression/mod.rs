//! Expressions: what stands between the quotes of a number.
//!
//! ```text
//! value   = sum [ blank unit ]                 "2*t m", "b/2", "2e-5 m/s"
//! sum     = product { ("+" | "-") product }
//! product = sign { ("*" | "/") sign }
//! sign    = [ "-" | "+" ] power                so -a^2 is -(a^2)
//! power   = atom [ "^" sign ]                  to the right: a^b^c is a^(b^c); 2^-1 is allowed
//! atom    = number | "pi" | "x" | "y" | "s" | name | function "(" sum { "," sum } ")" | "(" sum ")"
//! ```
//!
//! # How units combine
//! A plain number has no unit until it meets one. A name under `let` may carry a unit, and then:
//! * `*` and `/` join the units; a quotient of two lengths is a plain number.
//! * `+`, `-`, `min`, `max`, `atan2` need both sides in the same kind of unit. A plain number beside a quantity takes
//!   the unit that a plain number of that kind has in this section (a length: the section's `length`). Where that is
//!   not settled, or the trade has no default for the kind, the sum is refused.
//! * `sqrt` halves the exponents; `^` needs a plain exponent, known when the file is read and whole or half for a
//!   base with a unit; all other functions take plain numbers.
//! * `sin`, `cos`, `tan` take radians or a quantity with a unit of angle; `asin`, `acos`, `atan`, `atan2` give plain
//!   numbers, radians. A plain heading is in degrees; one that comes from these functions or from `pi` is therefore
//!   refused until it says what it is: `away = "atan2(1, 2) rad"`.
//! * A temperature level may be moved by a difference (`T + 5`), and two levels have a difference; nothing else.
//!   `K` is a difference, `degC` and `degF` are levels.
//! * A unit at the end belongs to the whole expression, which then has to be plain.

mod compile;
mod formula;
mod parser;
mod words;

pub(super) use compile::{Compiled, Compiler, Lookup, convert};
pub use formula::{Formula, Operator, Sample, UndefinedValue};
pub(super) use parser::{Expr, ExprKind, parse_value};
pub(super) use words::reserved;
pub use words::{FUNCTION_NAMES, Variable};

#[cfg(test)]
pub(super) mod tests_support {
    use super::*;
    use crate::input::place::StringPlaces;

    /// Parses and evaluates a plain expression with no names.
    pub(in crate::input) fn evaluate(text: &str) -> Result<f64, String> {
        let raw = format!("'{text}'");
        let places = StringPlaces::new(&raw, 0, text);
        let (expr, _) = parse_value(text, &places).map_err(|f| f.to_string())?;
        let mut faults = Vec::new();
        let mut compiler = Compiler {
            what: "a test",
            varying: true,
            lookup: &mut |_| Lookup::Unknown,
            default_unit: &|_| None,
            names: &[],
            faults: &mut faults,
        };
        let compiled = compiler.compile(&expr);
        match compiled {
            Some(c) => c.formula.evaluate(Sample { x: 2.0, y: 3.0, s: 5.0 }).map_err(|u| u.what),
            None => Err(faults.iter().map(ToString::to_string).collect::<Vec<_>>().join("\n")),
        }
    }
}
