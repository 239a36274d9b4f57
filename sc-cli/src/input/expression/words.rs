//! The words an expression knows: functions and variables.

/// A function that an expression may call.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(in crate::input) enum Function {
    Sin,
    Cos,
    Tan,
    Asin,
    Acos,
    Atan,
    Atan2,
    Sinh,
    Cosh,
    Tanh,
    Exp,
    Ln,
    Log10,
    Sqrt,
    Abs,
    Min,
    Max,
}

const FUNCTIONS: [(&str, Function); 17] = [
    ("sin", Function::Sin),
    ("cos", Function::Cos),
    ("tan", Function::Tan),
    ("asin", Function::Asin),
    ("acos", Function::Acos),
    ("atan", Function::Atan),
    ("atan2", Function::Atan2),
    ("sinh", Function::Sinh),
    ("cosh", Function::Cosh),
    ("tanh", Function::Tanh),
    ("exp", Function::Exp),
    ("ln", Function::Ln),
    ("log10", Function::Log10),
    ("sqrt", Function::Sqrt),
    ("abs", Function::Abs),
    ("min", Function::Min),
    ("max", Function::Max),
];

/// The functions an expression may call, by name.
pub const FUNCTION_NAMES: [&str; 17] = {
    let mut names = [""; 17];
    let mut i = 0;
    while i < 17 {
        names[i] = FUNCTIONS[i].0;
        i += 1;
    }
    names
};

impl Function {
    /// How it is written.
    pub(in crate::input) fn name(self) -> &'static str {
        FUNCTIONS.iter().find(|(_, f)| *f == self).map_or("", |(n, _)| n)
    }

    /// How many arguments it takes.
    pub(super) fn arity(self) -> usize {
        if matches!(self, Self::Atan2 | Self::Min | Self::Max) { 2 } else { 1 }
    }
}

/// The function of a name.
pub(super) fn function_named(name: &str) -> Option<Function> {
    FUNCTIONS.iter().find(|(n, _)| *n == name).map(|(_, f)| *f)
}

/// What varies along a side: the coordinates and the distance along it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[expect(missing_docs, reason = "each is named after the variable")]
pub enum Variable {
    X,
    Y,
    S,
}

impl Variable {
    /// How it is written.
    pub fn name(self) -> &'static str {
        match self {
            Self::X => "x",
            Self::Y => "y",
            Self::S => "s",
        }
    }
}

/// Says by what a word is taken, if it cannot be a name under `let`.
pub(in crate::input) fn reserved(name: &str) -> Option<&'static str> {
    match name {
        "x" | "y" => Some("is the coordinate of a point"),
        "s" => Some("is the distance along a side"),
        "pi" => Some("is the number pi"),
        _ if FUNCTION_NAMES.contains(&name) => Some("is a function"),
        _ => None,
    }
}
