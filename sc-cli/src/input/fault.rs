//! What can be wrong with a section file.

use super::place::{Position, Span, position};
use std::fmt;
use thiserror::Error;

/// A value read, with the remarks that came up while it was read.
#[derive(Debug, Clone, PartialEq)]
pub struct Warned<T> {
    /// What was read.
    pub value: T,
    /// Remarks: the file can be answered, but something in it looks unintended.
    pub warnings: Vec<Fault<Warning>>,
}

/// One fault: which rule is broken, where, and what to change.
#[derive(Debug, Clone, PartialEq)]
pub struct Fault<K = FaultKind> {
    /// The rule, with the value that breaks it.
    pub kind: K,
    /// The bytes it is about; `None` when it is about the file as a whole.
    pub span: Option<Span>,
    /// Line and column of the start of `span`.
    pub position: Option<Position>,
    /// What to change.
    pub hint: Option<String>,
    /// Other places that belong to it, each with a word about its part.
    pub related: Vec<(Span, String)>,
}

impl<K: fmt::Display> Fault<K> {
    /// A fault at `span`.
    pub fn new(kind: K, span: impl Into<Option<Span>>) -> Self {
        Self { kind, span: span.into(), position: None, hint: None, related: Vec::new() }
    }

    /// Adds what to change.
    pub fn hint(mut self, hint: impl Into<String>) -> Self {
        self.hint = Some(hint.into());
        self
    }

    /// Adds a second place.
    pub fn related(mut self, span: Span, label: impl Into<String>) -> Self {
        self.related.push((span, label.into()));
        self
    }

    /// The same fault under another set of rules.
    pub fn mapped<L>(self, into: impl FnOnce(K) -> L) -> Fault<L> {
        let Self { kind, span, position, hint, related } = self;
        Fault { kind: into(kind), span, position, hint, related }
    }

    /// Fills in line and column from the text the fault was found in.
    pub fn locate(&mut self, text: &str) {
        self.position = self.span.map(|s| position(text, s.start));
    }
}

impl<K: fmt::Display> fmt::Display for Fault<K> {
    /// `line 3, column 7: rule; hint`, the one-line form.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if let Some(Position { line, column }) = self.position {
            write!(f, "line {line}, column {column}: ")?;
        }
        write!(f, "{}", self.kind)?;
        match &self.hint {
            Some(hint) => write!(f, "; {hint}"),
            None => Ok(()),
        }
    }
}

impl<K: fmt::Display + fmt::Debug> std::error::Error for Fault<K> {}

/// A remark that does not stop the reading.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum Warning {
    /// A name under `let` that no expression uses.
    #[error("`{name}` is never used")]
    UnusedName {
        /// The name.
        name: String,
    },
}

/// The rules of the section file, one variant each.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum FaultKind {
    // --- the file as TOML, and its keys ---
    /// The text is not TOML.
    #[error("not TOML: {message}")]
    Syntax {
        /// What the TOML parser says.
        message: String,
    },
    /// A key that no rule knows.
    #[error("unknown key `{key}` in {table}")]
    UnknownKey {
        /// The key as written.
        key: String,
        /// The table it stands in.
        table: String,
    },
    /// A key that has to be there.
    #[error("{table} needs the key `{key}`")]
    MissingKey {
        /// The key.
        key: &'static str,
        /// The table it is missing from.
        table: String,
    },
    /// Two keys of which only one may be given.
    #[error("{table} has both `{first}` and `{second}`; they exclude each other")]
    KeysExclude {
        /// One key.
        first: String,
        /// The other.
        second: String,
        /// The table they stand in.
        table: String,
    },
    /// A value of the wrong sort.
    #[error("{what} is {expected}, not {found}")]
    WrongType {
        /// What is described.
        what: String,
        /// What it has to be.
        expected: &'static str,
        /// What stands there.
        found: String,
    },
    /// A word that is not in the list of words allowed.
    #[error("{what} cannot be `{found}`; it is {expected}")]
    UnknownWord {
        /// What is described.
        what: &'static str,
        /// The word.
        found: String,
        /// The words allowed.
        expected: &'static str,
    },
    /// A number outside the range the rule gives.
    #[error("{what} is {value}, and must be {rule}")]
    OutOfRange {
        /// What is described.
        what: String,
        /// The value found.
        value: String,
        /// The rule.
        rule: &'static str,
    },

    // --- expressions ---
    /// The expression breaks the grammar.
    #[error("expected {expected}, found {found}")]
    Unexpected {
        /// What may stand here.
        expected: &'static str,
        /// What does.
        found: String,
    },
    /// An expression too long or too deeply nested.
    #[error("the expression has more than {limit} {what}")]
    TooComplex {
        /// What there is too much of.
        what: &'static str,
        /// How many are allowed.
        limit: usize,
    },
    /// A name that is not under `let`.
    #[error("unknown name `{name}`")]
    UnknownName {
        /// The name.
        name: String,
    },
    /// A call of something that is not a function.
    #[error("unknown function `{name}`")]
    UnknownFunction {
        /// The name.
        name: String,
    },
    /// The wrong number of arguments.
    #[error("`{function}` takes {takes}, and has {given}")]
    ArgumentCount {
        /// The function.
        function: &'static str,
        /// How many it takes.
        takes: &'static str,
        /// How many it is given.
        given: usize,
    },
    /// `x`, `y` or `s` where nothing varies.
    #[error("`{name}` has no value in {what}: it varies along a side")]
    NothingVaries {
        /// The variable.
        name: &'static str,
        /// The place.
        what: String,
    },
    /// A name under `let` that is taken.
    #[error("`{name}` cannot be a name of your own: it {taken}")]
    ReservedName {
        /// The name.
        name: String,
        /// By what it is taken.
        taken: &'static str,
    },
    /// A name under `let` that an expression could not hold.
    #[error("`{name}` cannot be used in an expression: a name is letters, digits and `_`, a letter first")]
    BadName {
        /// The name.
        name: String,
    },
    /// Names defined by each other.
    #[error("these names are defined by each other: {chain}")]
    Cycle {
        /// The chain, `a -> b -> a`.
        chain: String,
    },
    /// An operation outside its domain, or a result no number can hold.
    #[error("{what}")]
    Undefined {
        /// Operation and value.
        what: String,
    },

    // --- units ---
    /// A text that is no unit.
    #[error("{0}")]
    Unit(#[from] super::units::UnitFault),
    /// A unit that measures something else than the place of use.
    #[error("{what} is in {expected} ({expected_measure}), and `{found}` is {found_measure}")]
    UnitMismatch {
        /// The place of use.
        what: String,
        /// Its default unit.
        expected: String,
        /// What that measures.
        expected_measure: String,
        /// The unit found.
        found: String,
        /// What that measures.
        found_measure: String,
    },
    /// A plain number is asked for.
    #[error("{what} is a plain number, and `{found}` is {found_measure}")]
    PlainExpected {
        /// The place of use.
        what: String,
        /// The unit found.
        found: String,
        /// What it measures.
        found_measure: String,
    },
    /// A sum (or a comparison) of things that differ in kind.
    #[error("`{operation}` joins {left} and {right}")]
    MixedUnits {
        /// The operation.
        operation: &'static str,
        /// Unit and kind of the left side.
        left: String,
        /// Unit and kind of the right side.
        right: String,
    },
    /// Arithmetic that has no meaning for a temperature level.
    #[error("`{operation}` has no meaning for a temperature level in {unit}")]
    LevelArithmetic {
        /// The operation.
        operation: &'static str,
        /// The unit of the level.
        unit: String,
    },
    /// A difference where a level is asked for, or the other way round.
    #[error("{what} is a temperature level, and `{found}` is a temperature difference")]
    DifferenceForLevel {
        /// The place of use.
        what: String,
        /// The unit found.
        found: String,
    },
    /// A heading made with `pi` or an inverse function, and without a unit.
    #[error("{what} without a unit is in degrees, and this one is made with `pi` or an inverse function")]
    RadiansOrDegrees {
        /// The place of use.
        what: String,
    },
    /// A unit after an expression that has one already.
    #[error("the expression is already in {unit}, and `{again}` is added to it")]
    UnitTwice {
        /// The unit it has.
        unit: String,
        /// The unit that follows.
        again: String,
    },
    /// An exponent the units cannot follow.
    #[error("{unit} cannot be raised to {exponent}")]
    UnitPower {
        /// The unit of the base.
        unit: String,
        /// The exponent in words.
        exponent: String,
    },

    // --- the section ---
    /// A side that nothing in the outline is called.
    #[error("no side of the outline is called \"{name}\"")]
    UnknownSide {
        /// The name.
        name: String,
    },
    /// A material property that does not belong to the trade.
    #[error("`{key}` does not belong to the trade `{trade}`")]
    MaterialMismatch {
        /// The property.
        key: String,
        /// The trade.
        trade: &'static str,
    },
    /// A condition that needs a material.
    #[error("{what} needs {needs}")]
    MaterialMissing {
        /// The condition.
        what: &'static str,
        /// The property that is needed.
        needs: &'static str,
    },
    /// No side holds the potential.
    #[error("nothing fixes the level: no side is held and none has a surface film")]
    NothingHeld,

    // --- to come ---
    /// A promised key that is not supported yet.
    #[error("{feature} is not supported yet")]
    NotYet {
        /// What is not supported.
        feature: &'static str,
    },
}
