//! Reference values: the tables of `reference-data/`, read into types a check can walk through.
//!
//! Every case states its section, its conditions and one question ([`Ask`]) with the answer, so one
//! piece of code per kind of question serves all cases. Side `k` leaves vertex `k`, vertices run
//! anticlockwise. `reference-data/README.md` says where each value comes from.

mod boundary;
mod irregular;

use std::fs;
use std::path::PathBuf;

use num_complex::Complex64;
use serde::de::{DeserializeOwned, Error};
use serde::{Deserialize, Deserializer};

pub use boundary::BoundaryFunction;
pub use irregular::{
    Balance, Bracketed, IrregularSection, IrregularSide, MatrixRecord, PartFlux, PointRecord, SideFluxes,
    TotalFluxes, TwoSidedSection, load_irregular, load_simple_300,
};

/// The case files, one for each trade.
pub const CASE_FILES: [&str; 5] = ["seepage", "heat", "conductors", "maps", "dirichlet"];

/// One reference case.
#[derive(Debug, Clone, Deserialize)]
pub struct Case {
    /// Name, unique among all files.
    pub id: String,
    /// What is computed, in a sentence.
    pub title: String,
    /// The file the case stands in: one of [`CASE_FILES`].
    pub discipline: String,
    /// The section in words.
    pub section: String,
    /// True if no vertex lies at infinity.
    pub bounded: bool,
    /// Outline; empty only when [`Ask::LogarithmicCapacity`] gives an `outline`.
    pub vertices: Vec<Vertex>,
    /// Interior angles over π.
    #[serde(deserialize_with = "decimals")]
    pub angles_over_pi: Vec<f64>,
    /// Vertices with a straight angle.
    pub flat_vertices: Vec<usize>,
    /// Condition on each side; empty when the question concerns the map alone.
    pub sides: Vec<Condition>,
    /// The conditions in words.
    pub conditions: String,
    /// The question in words.
    pub asked: String,
    /// The question for a program.
    pub ask: Ask,
    /// The answer.
    pub value: Value,
    /// Whether the inputs of this case are binary numbers, so that the value holds for what is read.
    pub value_at: ValueAt,
    /// Bound on the change of the value when the decimal inputs are rounded to `f64`, if it was worked out.
    #[serde(deserialize_with = "optional_decimal")]
    pub input_sensitivity: Option<f64>,
    /// Relative error a good program should not exceed.
    pub tolerance: f64,
    /// Closed form.
    pub formula: String,
    /// Who published it.
    pub source: String,
    /// How the digits were computed.
    pub how: String,
    /// How the digits were checked.
    pub cross_check: String,
}

impl Case {
    /// Largest error to accept at the relative tolerance `rtol`, the rounding of the inputs included.
    #[must_use]
    pub fn allowance(&self, rtol: f64) -> f64 {
        rtol * self.value.scale() + self.input_sensitivity.unwrap_or(0.0)
    }

    /// The vertices of a bounded case, `None` if one lies at infinity.
    #[must_use]
    pub fn finite_vertices(&self) -> Option<Vec<Complex64>> {
        self.vertices
            .iter()
            .map(|vertex| match *vertex {
                Vertex::Finite(z) => Some(z),
                Vertex::Away { .. } => None,
            })
            .collect()
    }
}

/// A vertex of a section.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
#[serde(try_from = "RawVertex")]
pub enum Vertex {
    /// A corner, or a flat vertex.
    Finite(Complex64),
    /// A vertex at infinity. Both headings are in degrees and point outwards; their difference, 0 to 360,
    /// is the opening of the section there, and the interior angle is minus the opening.
    Away {
        /// Heading of the side that runs out to infinity.
        arriving: f64,
        /// Heading, outwards, of the side that comes back.
        leaving: f64,
    },
}

/// Condition on one side.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Condition {
    /// No flux.
    Insulated,
    /// Potential held at a value.
    #[serde(deserialize_with = "decimal")]
    Held(f64),
    /// Potential given along the side.
    Function(BoundaryFunction),
}

/// What a case asks for.
#[derive(Debug, Clone, PartialEq, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case")]
pub enum Ask {
    /// Flux from the sides at the higher held value to those at the lower, over the drop, times `multiplier`.
    Conductance {
        /// Number of mirror images that make up the full section, and other constant factors.
        #[serde(deserialize_with = "decimal")]
        multiplier: f64,
    },
    /// `multiplier` over the conductance.
    Resistance {
        /// Constant factor.
        #[serde(deserialize_with = "decimal")]
        multiplier: f64,
    },
    /// Magnitude of the total flux through the listed sides, times `multiplier`.
    Flux {
        /// Sides whose fluxes are added.
        sides: Vec<usize>,
        /// Constant factor.
        #[serde(deserialize_with = "decimal")]
        multiplier: f64,
    },
    /// Potential.
    Potential {
        /// Where.
        #[serde(flatten)]
        place: Place,
    },
    /// Magnitude of the gradient of the potential at a vertex, times `multiplier`.
    GradientMagnitude {
        /// The vertex, a right angle between a held and an insulated side.
        vertex: usize,
        /// Constant factor.
        #[serde(deserialize_with = "decimal")]
        multiplier: f64,
    },
    /// Flux into the section at electrode i for unit potential on electrode j and zero on all others.
    ConductanceMatrix {
        /// Sides of each electrode, in the order of the rows.
        electrodes: Vec<Vec<usize>>,
    },
    /// λ = (x₂ − x₁)(x₄ − x₃) / ((x₃ − x₁)(x₄ − x₂)) of four prevertices on the line, or 1 − λ.
    CrossRatio {
        /// The vertices whose prevertices are x₁ … x₄.
        vertices: [usize; 4],
        /// True for 1 − λ.
        complement: bool,
    },
    /// The elliptic modulus k with the four prevertices at −1, 1, 1/k, −1/k: λ = 4k / (1 + k)².
    EllipticModulus {
        /// The vertices in that order.
        vertices: [usize; 4],
    },
    /// |f′(0)| of the map of the unit disc that takes 0 to this point.
    ConformalRadius {
        /// The point.
        #[serde(deserialize_with = "point")]
        at: Complex64,
    },
    /// Harmonic measure, seen from a point, of the boundary from one vertex anticlockwise to another: the
    /// fraction of the circle between their prevertices when the point is the image of the centre.
    HarmonicMeasure {
        /// The point.
        #[serde(deserialize_with = "point")]
        at: Complex64,
        /// First vertex.
        from: usize,
        /// Last vertex.
        to: usize,
    },
    /// |C| in `f′(t) = C ∏ (t − t_k)^(α_k − 1)`, the product over all vertices but `infinity`, with the
    /// half-plane as domain and three prevertices at 0, 1 and infinity.
    MapConstant {
        /// Vertex with its prevertex at 0.
        zero: usize,
        /// Vertex with its prevertex at 1.
        one: usize,
        /// Vertex with its prevertex at infinity.
        infinity: usize,
    },
    /// `(V_D − V_C) / I` for a current I in at A and out at B, point contacts on an insulated boundary:
    /// (1/π) ln[(AC·BD) / (AD·BC)] in the prevertices.
    TransferResistance {
        /// The vertices A, B, C, D.
        contacts: [usize; 4],
    },
    /// Limit, for long arms, of a conductance or resistance less that of the straight arms.
    Excess {
        /// What is in excess.
        of: ExcessOf,
        /// The arms, which the limit removes: Σ `share` · L / `width`.
        arms: Vec<Arm>,
        /// Constant factor of the whole.
        #[serde(deserialize_with = "decimal")]
        multiplier: f64,
        /// Vertices at infinity where the current comes from; none when a held side is the source.
        #[serde(default)]
        source: Vec<usize>,
        /// Vertices at infinity where the current goes, all at one potential.
        #[serde(default)]
        sink: Vec<usize>,
    },
    /// Integral of the potential along sides, with respect to length.
    PotentialIntegral {
        /// The sides.
        sides: Vec<usize>,
        /// If given, the potential is multiplied by the distance from this point.
        #[serde(default, deserialize_with = "optional_point")]
        moment_about: Option<Complex64>,
    },
    /// Logarithmic capacity of a body, from the map of half its exterior: a quarter of the length of the
    /// image of the sides under the map to the half-plane that is z + O(1) at infinity.
    LogarithmicCapacity {
        /// Sides that belong to the body.
        #[serde(default)]
        image_sides: Vec<usize>,
        /// The whole body, where it has no axis of symmetry and no half exterior is listed.
        #[serde(default, deserialize_with = "optional_points")]
        outline: Vec<Complex64>,
    },
    /// Ratio `|t_numerator / t_denominator|` of prevertices, with the vertex `zero` at 0 and the vertex `infinity` at infinity.
    PrevertexRatio {
        /// Vertex above.
        numerator: usize,
        /// Vertex below.
        denominator: usize,
        /// Vertex with its prevertex at 0.
        zero: usize,
        /// Vertex with its prevertex at infinity.
        infinity: usize,
    },
}

/// Where a potential is asked for.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Place {
    /// A point inside, or on a side that no other side touches there.
    #[serde(deserialize_with = "point")]
    At(Complex64),
    /// A vertex between two insulated sides.
    Vertex(usize),
}

/// What an excess is measured in.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum ExcessOf {
    /// Across the arms.
    Conductance,
    /// Along the arms.
    Resistance,
}

/// A straight arm that runs to infinity.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
pub struct Arm {
    /// The vertex at infinity.
    pub vertex: usize,
    /// The point the length L is measured from, along the arm.
    #[serde(deserialize_with = "point")]
    pub from: Complex64,
    /// Width of the arm.
    #[serde(deserialize_with = "decimal")]
    pub width: f64,
    /// Weight of this arm: the square of the fraction of the current in it.
    #[serde(deserialize_with = "decimal")]
    pub share: f64,
}

/// The answer to a case.
#[derive(Debug, Clone, PartialEq, Deserialize)]
#[serde(try_from = "RawValue")]
pub enum Value {
    /// One number.
    Number(f64),
    /// Rows of a matrix.
    Matrix(Vec<Vec<f64>>),
}

impl Value {
    /// The number, `None` for a matrix.
    #[must_use]
    pub fn number(&self) -> Option<f64> {
        match *self {
            Self::Number(value) => Some(value),
            Self::Matrix(_) => None,
        }
    }

    /// Largest magnitude among the entries.
    #[must_use]
    pub fn scale(&self) -> f64 {
        match self {
            Self::Number(value) => value.abs(),
            Self::Matrix(rows) => rows.iter().flatten().fold(0.0, |max, entry| entry.abs().max(max)),
        }
    }
}

/// Which inputs a value holds for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
pub enum ValueAt {
    /// The numbers as they are read: the inputs are binary numbers.
    #[serde(rename = "exact binary")]
    ExactBinary,
    /// The decimal inputs, of which at least one is not a binary number.
    #[serde(rename = "exact decimal")]
    ExactDecimal,
}

/// All cases of all files, in the order of [`CASE_FILES`].
///
/// # Panics
///
/// If a file is missing or malformed: a check without its reference must not pass.
#[must_use]
pub fn load_cases() -> Vec<Case> {
    CASE_FILES.iter().flat_map(|file| load_case_file(file)).collect()
}

/// Published Schwarz-Christoffel examples: triangles, rectangles, regular polygons, plus and L shapes.
///
/// # Panics
///
/// As [`load_cases`].
#[must_use]
pub fn load_published_maps() -> Vec<Case> {
    load_case_file("published-maps")
}

/// The cases of one of the [`CASE_FILES`].
///
/// # Panics
///
/// As [`load_cases`].
#[must_use]
pub fn load_case_file(name: &str) -> Vec<Case> {
    #[derive(Deserialize)]
    struct Document {
        cases: Vec<Case>,
    }
    read_json::<Document>(&format!("{name}.json")).cases
}

/// Asserts `|computed - expected| <= rtol * |expected|`.
///
/// # Panics
///
/// If the error is larger or not a number; the message gives both numbers, the error and the allowance.
#[track_caller]
pub fn assert_rel(label: &str, computed: f64, expected: f64, rtol: f64) {
    let (error, allowed) = ((computed - expected).abs(), rtol * expected.abs());
    assert!(
        error <= allowed,
        "{label}: computed {computed:.17e}, expected {expected:.17e}, error {error:.3e} \
         (relative {:.3e}), allowed {allowed:.3e} (relative {rtol:.1e})",
        error / expected.abs()
    );
}

/// Asserts `|computed - expected| <= allowed`, for values near zero; the label should name the scale.
///
/// # Panics
///
/// If the error is larger or not a number; the message gives both numbers, the error and the allowance.
#[track_caller]
pub fn assert_abs(label: &str, computed: f64, expected: f64, allowed: f64) {
    let error = (computed - expected).abs();
    assert!(
        error <= allowed,
        "{label}: computed {computed:.17e}, expected {expected:.17e}, error {error:.3e}, allowed {allowed:.3e}"
    );
}

/// Reads a file of `reference-data/`.
fn read_json<T: DeserializeOwned>(name: &str) -> T {
    let path = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("../reference-data").join(name);
    let text = fs::read_to_string(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()));
    serde_json::from_str(&text).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

#[derive(Deserialize)]
#[serde(untagged)]
enum RawVertex {
    Finite([String; 2]),
    Away { away: [f64; 2] },
}

impl TryFrom<RawVertex> for Vertex {
    type Error = String;

    fn try_from(raw: RawVertex) -> Result<Self, String> {
        match raw {
            RawVertex::Finite(pair) => parse_point(&pair).map(Self::Finite),
            RawVertex::Away { away: [arriving, leaving] } => Ok(Self::Away { arriving, leaving }),
        }
    }
}

#[derive(Deserialize)]
#[serde(untagged)]
enum RawValue {
    Number(String),
    Matrix(Vec<Vec<String>>),
}

impl TryFrom<RawValue> for Value {
    type Error = String;

    fn try_from(raw: RawValue) -> Result<Self, String> {
        match raw {
            RawValue::Number(text) => parse_decimal(&text).map(Self::Number),
            RawValue::Matrix(rows) => rows
                .iter()
                .map(|row| row.iter().map(|text| parse_decimal(text)).collect())
                .collect::<Result<_, _>>()
                .map(Self::Matrix),
        }
    }
}

fn parse_decimal(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok(value),
        _ => Err(format!("'{text}' is not a finite decimal number")),
    }
}

fn parse_point([x, y]: &[String; 2]) -> Result<Complex64, String> {
    Ok(Complex64::new(parse_decimal(x)?, parse_decimal(y)?))
}

fn decimal<'de, D: Deserializer<'de>>(source: D) -> Result<f64, D::Error> {
    parse_decimal(&String::deserialize(source)?).map_err(D::Error::custom)
}

fn optional_decimal<'de, D: Deserializer<'de>>(source: D) -> Result<Option<f64>, D::Error> {
    let text = Option::<String>::deserialize(source)?;
    text.map(|text| parse_decimal(&text)).transpose().map_err(D::Error::custom)
}

fn decimals<'de, D: Deserializer<'de>>(source: D) -> Result<Vec<f64>, D::Error> {
    let texts = Vec::<String>::deserialize(source)?;
    texts.iter().map(|text| parse_decimal(text)).collect::<Result<_, _>>().map_err(D::Error::custom)
}

fn point<'de, D: Deserializer<'de>>(source: D) -> Result<Complex64, D::Error> {
    parse_point(&<[String; 2]>::deserialize(source)?).map_err(D::Error::custom)
}

fn optional_point<'de, D: Deserializer<'de>>(source: D) -> Result<Option<Complex64>, D::Error> {
    point(source).map(Some)
}

fn optional_points<'de, D: Deserializer<'de>>(source: D) -> Result<Vec<Complex64>, D::Error> {
    let pairs = Vec::<[String; 2]>::deserialize(source)?;
    pairs.iter().map(parse_point).collect::<Result<_, _>>().map_err(D::Error::custom)
}

#[cfg(test)]
mod tests;
