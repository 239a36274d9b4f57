//! The document of `solve --json`. The keys are a promise to scripts: they are added to and never changed.

use super::number::Number;
use serde::Serialize;

/// A value with a bound on its absolute error, in the value's unit.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Value {
    /// The value.
    pub value: Number,
    /// Upper bound of its error; 0 if it is infinite, which is exact.
    pub error: Number,
}

/// A value with a bound and a unit.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Measured {
    /// The value.
    pub value: Number,
    /// Upper bound of its error.
    pub error: Number,
    /// The unit of both.
    pub unit: &'static str,
}

/// The units of the numbers that carry none of their own.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Units {
    /// Of coordinates, distances and lengths.
    pub length: String,
    /// Of levels: `held[].value` and `probes[].potential`.
    pub level: &'static str,
    /// Of `probes[].stream`.
    pub stream: &'static str,
    /// Of `probes[].gradient`.
    pub gradient: String,
    /// Of `held[].flux` and `sides[].flux`.
    pub flux: &'static str,
}

/// A held name.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Held {
    /// The name.
    pub side: String,
    /// Its level.
    pub value: Number,
    /// Flux into the section through all sides of the name.
    pub flux: Number,
    /// Upper bound of the error of `flux`.
    pub error: Number,
}

/// The conductance matrix.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Matrix {
    /// One name for each row; the names of a group are joined by ` + `.
    pub order: Vec<String>,
    /// The names of each row one by one.
    pub groups: Vec<Vec<String>>,
    /// The rows.
    pub values: Vec<Vec<Number>>,
    /// Upper bound of the error of every finite entry.
    pub error: Number,
}

/// A name of the outline.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Side {
    /// The name.
    pub side: String,
    /// Flux into the section through all sides of the name.
    pub flux: Number,
    /// Upper bound of the error of `flux`.
    pub error: Number,
    /// Their length together.
    pub length: Number,
}

/// The gradient at a probe.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
#[serde(untagged)]
pub enum Gradient {
    /// Components along x and y.
    Finite([Number; 2]),
    /// The string `infinite`.
    Infinite(Number),
}

/// Bounds of the errors of one probe.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct ProbeErrors {
    /// Of `potential`.
    pub potential: Number,
    /// Of the components of `gradient`.
    pub gradient: Number,
    /// Of `stream`.
    pub stream: Number,
}

/// Values at a place.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Probe {
    /// The name of the probe.
    pub name: Option<String>,
    /// Where.
    pub at: [Number; 2],
    /// The name of the side it lies on.
    pub side: Option<String>,
    /// Distance along that side from its start.
    pub s: Option<Number>,
    /// `φ`.
    pub potential: Number,
    /// `∇φ`.
    pub gradient: Gradient,
    /// `ψ`.
    pub stream: Number,
    /// The largest of `errors`.
    pub error: Number,
    /// One by one.
    pub errors: ProbeErrors,
}

/// The gradient near a vertex: `|∇φ| ≈ coefficient · r^exponent`.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Corner {
    /// Index into the outline.
    pub vertex: usize,
    /// Where.
    pub at: [Number; 2],
    /// The sides that meet there, in walking order.
    pub sides: [Option<String>; 2],
    /// Interior angle in degrees.
    pub angle: Number,
    /// Power of the distance.
    pub exponent: Number,
    /// Its factor.
    pub coefficient: Number,
    /// Upper bound of the error of `coefficient`.
    pub error: Number,
    /// The unit of `coefficient`.
    pub unit: String,
    /// Whether the gradient is infinite there.
    pub infinite: bool,
}

/// The map.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Map {
    /// The domain it starts from.
    pub canonical: &'static str,
    /// Number of vertices.
    pub vertices: usize,
    /// The vertex whose prevertex is infinity, an index into the outline.
    pub at_infinity: usize,
    /// Natural logarithms of the gaps between prevertices, from the vertex after `at_infinity` onward.
    pub gaps_log: Vec<Number>,
    /// Largest `|ln C I_k − ln side_k|`.
    pub residual: Number,
    /// Iterations of the parameter problem.
    pub iterations: u64,
}

/// Everything that is answered about a section.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Document {
    /// The title.
    pub title: Option<String>,
    /// The trade.
    pub trade: &'static str,
    /// Flux over conductivity and difference.
    pub shape_factor: Option<Value>,
    /// Shape factor times conductivity.
    pub conductance: Option<Measured>,
    /// Reciprocal of the conductance of a film with `sheet_resistance`.
    pub resistance: Option<Measured>,
    /// The held names.
    pub held: Vec<Held>,
    /// The conductance matrix.
    pub matrix: Matrix,
    /// The named sides.
    pub sides: Vec<Side>,
    /// The probes.
    pub probes: Vec<Probe>,
    /// The finite vertices.
    pub corners: Vec<Corner>,
    /// The map.
    pub map: Map,
    /// The units of the numbers that carry none.
    pub units: Units,
    /// Relative bound for the headline numbers.
    pub error: Number,
    /// How the bounds were obtained.
    pub bound: &'static str,
    /// What looks unintended, and why a value is infinite.
    pub warnings: Vec<String>,
    /// What the numbers do not say.
    pub cautions: Vec<&'static str>,
}

impl Document {
    /// The document as text, ending with a line break.
    ///
    /// # Errors
    /// None that is known: every key is a string and every number finite or a word.
    pub fn to_json(&self) -> Result<String, serde_json::Error> {
        let mut text = serde_json::to_string_pretty(self)?;
        text.push('\n');
        Ok(text)
    }
}
