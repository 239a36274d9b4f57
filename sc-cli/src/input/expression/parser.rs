//! From the text of an expression to its tree.

use super::formula::Operator;
use super::words::{FUNCTION_NAMES, Function, Variable, function_named};
use crate::input::fault::{Fault, FaultKind};
use crate::input::nearest::nearest;
use crate::input::place::{Span, StringPlaces};
use std::ops::Range;

/// An expression, each part with its place in the file.
#[derive(Debug, Clone, PartialEq)]
pub(in crate::input) struct Expr {
    pub(in crate::input) kind: ExprKind,
    pub(in crate::input) span: Span,
}

#[derive(Debug, Clone, PartialEq)]
pub(in crate::input) enum ExprKind {
    Number(f64),
    Pi,
    Variable(Variable),
    Name(String),
    Negate(Box<Expr>),
    Binary(Operator, Box<Expr>, Box<Expr>),
    Call(Function, Vec<Expr>),
}

/// Symbols in one expression, and levels of brackets and powers: they bound the recursion over the tree.
const MAX_SYMBOLS: usize = 400;
const MAX_LEVELS: usize = 50;

/// Reads an expression and the unit after it, given as a range of `text`.
pub(in crate::input) fn parse_value(
    text: &str,
    places: &StringPlaces,
) -> Result<(Expr, Option<Range<usize>>), Box<Fault>> {
    let mut parser = Parser { text, places, symbols: 0, token: Token::end(0), after: 0 };
    parser.advance()?;
    let expr = parser.sum(0)?;
    if matches!(parser.token.kind, TokenKind::End) {
        return Ok((expr, None));
    }
    let rest = &text[parser.token.range.start..];
    let unit_like = rest.starts_with(|c: char| c.is_alphabetic() || c == '°') || rest.starts_with("1/");
    if !unit_like {
        return Err(parser.unexpected("an operator, a unit or the end"));
    }
    if parser.token.range.start == parser.after {
        let fault = parser.unexpected("an operator or a blank");
        return Err(Box::new(
            fault.hint("a blank stands between a number and its unit, `*` between factors"),
        ));
    }
    let start = parser.token.range.start;
    Ok((expr, Some(start..start + rest.trim_end().len())))
}

#[derive(Debug, Clone, PartialEq)]
enum TokenKind {
    Number(f64),
    Name,
    Symbol(char),
    End,
}

#[derive(Debug, Clone, PartialEq)]
struct Token {
    kind: TokenKind,
    range: Range<usize>,
}

impl Token {
    fn end(at: usize) -> Self {
        Self { kind: TokenKind::End, range: at..at }
    }
}

struct Parser<'t> {
    text: &'t str,
    places: &'t StringPlaces,
    symbols: usize,
    /// The next token.
    token: Token,
    /// End of the token before it.
    after: usize,
}

impl Parser<'_> {
    fn span(&self, range: &Range<usize>) -> Span {
        self.places.span(range.clone())
    }

    fn word(&self) -> &str {
        &self.text[self.token.range.clone()]
    }

    fn unexpected(&self, expected: &'static str) -> Box<Fault> {
        let found = match self.token.kind {
            TokenKind::End => "the end".to_owned(),
            _ => format!("`{}`", self.word()),
        };
        Box::new(Fault::new(FaultKind::Unexpected { expected, found }, self.span(&self.token.range)))
    }

    fn too_complex(&self, what: &'static str, limit: usize) -> Box<Fault> {
        let kind = FaultKind::TooComplex { what, limit };
        Box::new(Fault::new(kind, self.span(&self.token.range)).hint("give parts of it names under `let`"))
    }

    fn at_symbol(&self, c: char) -> bool {
        self.token.kind == TokenKind::Symbol(c)
    }

    fn advance(&mut self) -> Result<(), Box<Fault>> {
        self.after = self.token.range.end;
        self.symbols += 1;
        if self.symbols > MAX_SYMBOLS {
            return Err(self.too_complex("symbols", MAX_SYMBOLS));
        }
        let rest = self.text[self.after..].trim_start();
        let at = self.text.len() - rest.len();
        let Some(first) = rest.chars().next() else {
            self.token = Token::end(self.text.trim_end().len().max(self.after));
            return Ok(());
        };
        let number_len = number_length(rest);
        let (kind, len) = if number_len > 0 {
            let digits = &rest[..number_len];
            let value: f64 = digits.parse().unwrap_or(f64::INFINITY);
            if !value.is_finite() {
                let what = format!("{digits} is too large for a number");
                let span = self.span(&(at..at + number_len));
                return Err(Box::new(Fault::new(FaultKind::Undefined { what }, span)));
            }
            (TokenKind::Number(value), number_len)
        } else if first.is_ascii_alphabetic() || first == '_' {
            let end = |c: char| !(c.is_ascii_alphanumeric() || c == '_');
            (TokenKind::Name, rest.find(end).unwrap_or(rest.len()))
        } else {
            (TokenKind::Symbol(first), first.len_utf8())
        };
        self.token = Token { kind, range: at..at + len };
        Ok(())
    }

    fn sum(&mut self, level: usize) -> Result<Expr, Box<Fault>> {
        let mut left = self.product(level)?;
        loop {
            let op = match self.token.kind {
                TokenKind::Symbol('+') => Operator::Add,
                TokenKind::Symbol('-') => Operator::Subtract,
                _ => return Ok(left),
            };
            self.advance()?;
            left = binary(op, left, self.product(level)?);
        }
    }

    fn product(&mut self, level: usize) -> Result<Expr, Box<Fault>> {
        let mut left = self.sign(level)?;
        loop {
            let op = match self.token.kind {
                TokenKind::Symbol('*') => Operator::Multiply,
                TokenKind::Symbol('/') => Operator::Divide,
                _ => return Ok(left),
            };
            self.advance()?;
            if self.at_symbol('*') && op == Operator::Multiply {
                return Err(Box::new(self.unexpected("a value").hint("a power is written `^`")));
            }
            left = binary(op, left, self.sign(level)?);
        }
    }

    fn sign(&mut self, level: usize) -> Result<Expr, Box<Fault>> {
        if level > MAX_LEVELS {
            return Err(self.too_complex("levels", MAX_LEVELS));
        }
        let start = self.span(&self.token.range);
        if self.at_symbol('-') {
            self.advance()?;
            let of = self.sign(level + 1)?;
            let span = start.join(of.span);
            return Ok(Expr { kind: ExprKind::Negate(Box::new(of)), span });
        }
        if self.at_symbol('+') {
            self.advance()?;
            return self.sign(level + 1);
        }
        let base = self.atom(level)?;
        if !self.at_symbol('^') {
            return Ok(base);
        }
        self.advance()?;
        Ok(binary(Operator::Power, base, self.sign(level + 1)?))
    }

    fn atom(&mut self, level: usize) -> Result<Expr, Box<Fault>> {
        let span = self.span(&self.token.range);
        match self.token.kind {
            TokenKind::Number(value) => {
                self.advance()?;
                Ok(Expr { kind: ExprKind::Number(value), span })
            }
            TokenKind::Symbol('(') => {
                self.advance()?;
                let mut inner = self.sum(level + 1)?;
                inner.span = span.join(self.span(&self.token.range));
                self.close()?;
                Ok(inner)
            }
            TokenKind::Name => {
                let name = self.word().to_owned();
                self.advance()?;
                self.named(&name, span, level)
            }
            TokenKind::Symbol(_) | TokenKind::End => Err(self.unexpected("a value")),
        }
    }

    fn named(&mut self, name: &str, span: Span, level: usize) -> Result<Expr, Box<Fault>> {
        let kind = match name {
            "x" => ExprKind::Variable(Variable::X),
            "y" => ExprKind::Variable(Variable::Y),
            "s" => ExprKind::Variable(Variable::S),
            "pi" => ExprKind::Pi,
            _ => match function_named(name) {
                Some(function) => return self.call(function, span, level),
                None if self.at_symbol('(') => {
                    let hint = match nearest(name, FUNCTION_NAMES) {
                        Some(near) => format!("did you mean `{near}`?"),
                        None => format!("the functions are {}", FUNCTION_NAMES.join(", ")),
                    };
                    let kind = FaultKind::UnknownFunction { name: name.to_owned() };
                    return Err(Box::new(Fault::new(kind, span).hint(hint)));
                }
                None => ExprKind::Name(name.to_owned()),
            },
        };
        Ok(Expr { kind, span })
    }

    fn call(&mut self, function: Function, span: Span, level: usize) -> Result<Expr, Box<Fault>> {
        if !self.at_symbol('(') {
            return Err(self.unexpected("`(` after a function"));
        }
        let mut arguments = Vec::new();
        loop {
            self.advance()?;
            if arguments.is_empty() && self.at_symbol(')') {
                break;
            }
            arguments.push(self.sum(level + 1)?);
            if !self.at_symbol(',') {
                break;
            }
        }
        let span = span.join(self.span(&self.token.range));
        self.close()?;
        if arguments.len() != function.arity() {
            let takes = if function.arity() == 1 { "one argument" } else { "two arguments" };
            let kind = FaultKind::ArgumentCount { function: function.name(), takes, given: arguments.len() };
            return Err(Box::new(Fault::new(kind, span)));
        }
        Ok(Expr { kind: ExprKind::Call(function, arguments), span })
    }

    fn close(&mut self) -> Result<(), Box<Fault>> {
        if !self.at_symbol(')') {
            let fault = self.unexpected("an operator or `)`");
            let named = self.token.kind == TokenKind::Name;
            let hint =
                "a unit stands at the end of the whole value; give a part with a unit a name under `let`";
            return Err(if named { Box::new(fault.hint(hint)) } else { fault });
        }
        self.advance()
    }
}

fn binary(op: Operator, left: Expr, right: Expr) -> Expr {
    let span = left.span.join(right.span);
    Expr { kind: ExprKind::Binary(op, Box::new(left), Box::new(right)), span }
}

/// Bytes of the number a text starts with, 0 if it starts with none.
fn number_length(text: &str) -> usize {
    let b = text.as_bytes();
    let digits = |from: usize| b[from..].iter().take_while(|c| c.is_ascii_digit()).count();
    let whole = digits(0);
    let mut end = whole;
    if b.get(end) == Some(&b'.') {
        let fraction = digits(end + 1);
        if whole + fraction == 0 {
            return 0;
        }
        end += 1 + fraction;
    }
    if end > 0 && matches!(b.get(end), Some(b'e' | b'E')) {
        let signed = end + 1 + usize::from(matches!(b.get(end + 1), Some(b'+' | b'-')));
        if signed < b.len() && digits(signed) > 0 {
            end = signed + digits(signed);
        }
    }
    end
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn parse(text: &str) -> Result<(Expr, Option<Range<usize>>), Box<Fault>> {
        let raw = format!("'{text}'");
        parse_value(text, &StringPlaces::new(&raw, 0, text))
    }

    /// The fault and the text it points at.
    fn fault(text: &str) -> (String, String) {
        let fault = parse(text).unwrap_err();
        let span = fault.span.unwrap();
        (fault.kind.to_string(), format!("'{text}'")[span.start..span.end].to_owned())
    }

    #[test]
    fn a_unit_stands_after_a_blank() {
        for (text, unit) in [
            ("15 m", Some("m")),
            ("2*t m", Some("m")),
            ("2e-5 m/s ", Some("m/s")),
            ("3 1/s", Some("1/s")),
            ("20 °C", Some("°C")),
            ("(1 + 2)  W/(m K)", Some("W/(m K)")),
            ("b/2", None),
            ("2 * cutoff + 3", None),
        ] {
            let (_, range) = parse(text).unwrap();
            assert_eq!(range.map(|r| &text[r]), unit, "{text}");
        }
    }

    #[test]
    fn faults_point_at_the_symbol_that_breaks_the_grammar() {
        let rows = [
            ("2*", "expected a value, found the end", ""),
            ("", "expected a value, found the end", ""),
            ("2 * ) 3", "expected a value, found `)`", ")"),
            ("(2 + 3", "expected an operator or `)`, found the end", ""),
            ("15m", "expected an operator or a blank, found `m`", "m"),
            ("2 3", "expected an operator, a unit or the end, found `3`", "3"),
            ("2 $ 3", "expected an operator, a unit or the end, found `$`", "$"),
            ("b**2", "expected a value, found `*`", "*"),
            ("(2 m) + 1", "expected an operator or `)`, found `m`", "m"),
            ("sin 3", "expected `(` after a function, found `3`", "3"),
            ("sine(3)", "unknown function `sine`", "sine"),
            ("max(3)", "`max` takes two arguments, and has 1", "max(3)"),
            ("sin()", "`sin` takes one argument, and has 0", "sin()"),
            ("1 + 1e999", "1e999 is too large for a number", "1e999"),
        ];
        for (text, kind, place) in rows {
            assert_eq!(fault(text), (kind.to_owned(), place.to_owned()), "{text}");
        }
    }

    #[test]
    fn long_and_deep_expressions_are_refused_without_harm() {
        for text in ["(".repeat(100_000), "-".repeat(100_000), "1+".repeat(100_000), "2^".repeat(100_000)] {
            assert!(matches!(parse(&text).unwrap_err().kind, FaultKind::TooComplex { .. }));
        }
    }

    proptest! {
        #[test]
        fn no_text_makes_the_parser_panic(text in "[0-9a-ex-z.+*/^(), °µsinpi-]{0,40}") {
            if let Err(fault) = parse(&text) {
                prop_assert!(fault.span.unwrap().end <= text.len() + 2);
            }
        }
    }
}
