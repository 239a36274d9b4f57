//! The question of a reference case put to the program.

use num_complex::Complex64;
use sc_core::answers::{ArmFlow, Bounded, ChannelError, ProbeError, Solution, channel_excess};
use sc_core::map::{HalfPlaneMap, InverseError, MapError, MapOptions};
use sc_core::outline::{Outline, Vertex as CoreVertex};
use thiserror::Error;

use crate::held_section::{HeldSection, Refused, walking_side, walking_vertex};
use crate::prevertices::Prevertices;
use crate::reference::{Arm, Ask, Case, Condition, ExcessOf, Place, Value, Vertex};

/// What the program answers: one number, or the entries of a matrix row by row.
#[derive(Debug, Clone, PartialEq)]
pub struct Found {
    /// The numbers.
    pub values: Vec<f64>,
    /// The program's bound on the error of each; `None` where the question is put to the bare map, which has none.
    pub error: Option<f64>,
}

impl Found {
    fn bounded(found: Bounded) -> Found {
        Found { values: vec![found.value], error: Some(found.error) }
    }

    fn bare(value: f64) -> Found {
        Found { values: vec![value], error: None }
    }

    /// Largest difference from the expected value.
    ///
    /// # Panics
    /// If there are not as many numbers as expected.
    #[must_use]
    pub fn difference(&self, expected: &Value) -> f64 {
        let expected: Vec<f64> = match expected {
            Value::Number(value) => vec![*value],
            Value::Matrix(rows) => rows.concat(),
        };
        assert_eq!(self.values.len(), expected.len(), "numbers found and numbers expected");
        // Not f64::max, which would pass over a NaN.
        let worse = |worst: f64, error: f64| if error <= worst { worst } else { error };
        self.values.iter().zip(expected).map(|(a, b)| (a - b).abs()).fold(0.0, worse)
    }
}

/// Why a case waits.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Waiting {
    /// The potential is given along a side.
    GivenData,
    /// The question is one that the program does not answer yet.
    Question,
}

/// Why a case that should be answered is not.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum NotAnswered {
    /// By the program, for the section.
    #[error(transparent)]
    Refused(#[from] Refused),
    /// By the bare map.
    #[error(transparent)]
    Map(#[from] MapError),
    /// By a place.
    #[error(transparent)]
    Probe(#[from] ProbeError),
    /// By a place, in the bare map.
    #[error(transparent)]
    Inverse(#[from] InverseError),
    /// There is no shape factor, the conditions being others than two levels.
    #[error("no shape factor")]
    NoShapeFactor,
    /// By the channels of the section.
    #[error(transparent)]
    Channel(#[from] ChannelError),
    /// The gradient asked for is not finite and not zero.
    #[error("the gradient at vertex {vertex} goes as the distance to the power {exponent}")]
    NotRegular {
        /// The vertex.
        vertex: usize,
        /// The power.
        exponent: f64,
    },
    /// A question that nothing in the program answers yet.
    #[error("no way to answer this kind of question")]
    NoWay,
}

/// A case with what the program answers.
#[derive(Debug, Clone)]
pub struct Row {
    /// The case.
    pub case: Case,
    /// Error left after the rounding of the decimal inputs is taken off.
    pub error: f64,
    /// The program's own bound, if it gives one.
    pub estimate: Option<f64>,
}

impl Row {
    /// Puts a case to the program.
    ///
    /// # Errors
    /// As [`answer`].
    pub fn of(case: Case) -> Result<Row, NotAnswered> {
        let found = answer(&case)?;
        let rounding = case.input_sensitivity.unwrap_or(0.0);
        let difference = found.difference(&case.value);
        // A NaN must stay one.
        let error = if difference <= rounding { 0.0 } else { difference - rounding };
        Ok(Row { case, error, estimate: found.error })
    }

    /// The error in parts of the value, of the largest entry if it is a matrix.
    #[must_use]
    pub fn relative(&self) -> f64 {
        self.error / self.case.value.scale()
    }

    /// Whether the relative error is at most this; a NaN is not.
    #[must_use]
    pub fn is_within(&self, rtol: f64) -> bool {
        self.relative() <= rtol
    }

    /// Whether the estimate, if there is one, covers the error and the rounding of the reference value to binary64.
    #[must_use]
    pub fn is_covered(&self) -> bool {
        let rounded = 0.5 * f64::EPSILON * self.case.value.scale();
        self.estimate.is_none_or(|estimate| self.error <= estimate + rounded)
    }
}

/// Whether a case waits for something that the program does not do yet. This is the only filter.
#[must_use]
pub fn waiting(case: &Case) -> Option<Waiting> {
    if case.sides.iter().any(|side| matches!(side, Condition::Function(_))) {
        Some(Waiting::GivenData)
    } else if matches!(case.ask, Ask::PotentialIntegral { .. })
        || is_excess_from_a_held_side(case)
        || case.vertices.is_empty()
    {
        Some(Waiting::Question)
    } else {
        None
    }
}

/// A resistance from a held side to the end of an arm, which is asked of neither kind of excess.
fn is_excess_from_a_held_side(case: &Case) -> bool {
    matches!(&case.ask, Ask::Excess { of: ExcessOf::Resistance, source, .. } if source.is_empty())
}

/// The program's answer to a case.
///
/// # Errors
/// [`NotAnswered`], if the program refuses the section or the place, or has no such answer.
pub fn answer(case: &Case) -> Result<Found, NotAnswered> {
    if case.sides.iter().any(|side| matches!(side, Condition::Held(_))) {
        let held: Vec<Option<f64>> = case.sides.iter().map(held).collect();
        let mut section = HeldSection::by_level(vertices(case), &held);
        if let Ask::ConductanceMatrix { electrodes } = &case.ask {
            for (electrode, sides) in electrodes.iter().enumerate() {
                sides.iter().for_each(|&side| section.electrodes[side] = Some(electrode));
            }
            section.levels = electrodes.iter().map(|sides| held[sides[0]].unwrap_or(0.0)).collect();
        }
        of_field(case, &section.solve()?)
    } else {
        let outline = Outline::new(&vertices(case)).map_err(Refused::Outline)?.value;
        if let Ask::Excess { arms, multiplier, source, .. } = &case.ask {
            let flow = |arm: &Arm| {
                // One current 1 enters; what leaves is shared by the arms as the squares of their shares say.
                let current = if source.contains(&arm.vertex) { 1.0 } else { -arm.share.sqrt() };
                ArmFlow { end: walking_vertex(&outline, arm.vertex), current, from: arm.from }
            };
            let flows: Vec<ArmFlow> = arms.iter().map(flow).collect();
            return Ok(Found::bounded(channel_excess(&outline, &flows)?.scaled(*multiplier)));
        }
        of_map(case, &HalfPlaneMap::solve(&outline, &MapOptions::default())?)
    }
}

fn vertices(case: &Case) -> Vec<CoreVertex> {
    let vertex = |vertex: &Vertex| match *vertex {
        Vertex::Finite(point) => CoreVertex::At(point),
        Vertex::Away { arriving, leaving } => CoreVertex::Away { arriving, leaving },
    };
    case.vertices.iter().map(vertex).collect()
}

fn held(condition: &Condition) -> Option<f64> {
    match *condition {
        Condition::Held(value) => Some(value),
        Condition::Insulated | Condition::Function(_) => None,
    }
}

fn of_field(case: &Case, solution: &Solution) -> Result<Found, NotAnswered> {
    let outline = solution.section().outline();
    let shape_factor = || solution.shape_factor().ok_or(NotAnswered::NoShapeFactor);
    match &case.ask {
        Ask::Conductance { multiplier } => Ok(Found::bounded(shape_factor()?.scaled(*multiplier))),
        Ask::Resistance { multiplier } => {
            let found = shape_factor()?;
            let value = multiplier / found.value;
            Ok(Found::bounded(Bounded::new(value, value.abs() * found.relative())))
        }
        Ask::Flux { sides, multiplier } => {
            let fluxes = sides.iter().map(|&side| solution.side_flux(walking_side(outline, side)));
            let (value, error) =
                fluxes.fold((0.0, 0.0), |sum, flux| (sum.0 + flux.value, sum.1 + flux.error));
            Ok(Found::bounded(Bounded::new(value.abs(), error).scaled(*multiplier)))
        }
        Ask::Potential { place: Place::At(point) } => Ok(Found::bounded(solution.probe(*point)?.potential)),
        Ask::Potential { place: Place::Vertex(vertex) } => {
            let side = walking_vertex(outline, *vertex);
            Ok(Found::bounded(solution.probe_on_side(side, 0.0)?.potential))
        }
        Ask::GradientMagnitude { vertex, multiplier } => {
            let corner = solution.corner(walking_vertex(outline, *vertex));
            if !corner.is_regular() {
                return Err(NotAnswered::NotRegular { vertex: *vertex, exponent: corner.exponent });
            }
            Ok(Found::bounded(corner.coefficient.scaled(*multiplier)))
        }
        Ask::ConductanceMatrix { .. } => {
            let matrix = solution.matrix();
            Ok(Found { values: matrix.values.concat(), error: Some(matrix.error) })
        }
        Ask::Excess { arms, multiplier, .. } => {
            Ok(Found::bounded(excess_between_faces(solution, arms)?.scaled(*multiplier)))
        }
        _ => of_map(case, solution.map()),
    }
}

/// Widths of an arm after which its flow is straight to all digits.
const STRAIGHT_AFTER: f64 = 20.0;

/// The flux between the faces of a section with infinite arms less that of the straight arms: the flux through the parts
/// of the sides at the high level up to a cut through each arm, less its length over its width.
fn excess_between_faces(solution: &Solution, arms: &[Arm]) -> Result<Bounded, NotAnswered> {
    let outline = solution.section().outline();
    let n = outline.n();
    let high = solution.section().levels().iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let is_high = |k: usize| solution.section().level_of_side(k).is_some_and(|v| v >= high);
    let cut = |vertex: usize| {
        let arm = arms.iter().find(|arm| walking_vertex(outline, arm.vertex) == vertex);
        arm.map(|arm| (arm, outline.side_direction(vertex + n - 1)))
    };
    // Distance along a side from its finite end `corner` to the cut through the arm.
    let reach = |vertex: usize, corner: Complex64| {
        cut(vertex).map_or(f64::INFINITY, |(arm, heading)| {
            STRAIGHT_AFTER * arm.width - ((corner - arm.from) * heading.conj()).re
        })
    };
    let mut sum = Bounded::new(0.0, 0.0);
    for side in (0..n).filter(|&k| is_high(k)) {
        let flux = match (outline.point(side), outline.point(side + 1)) {
            (Some(corner), None) => solution.part_flux(side, 0.0, reach((side + 1) % n, corner))?,
            (None, Some(corner)) => solution.part_flux(side, -reach(side, corner), 0.0)?,
            _ => solution.side_flux(side),
        };
        sum = Bounded::new(sum.value + flux.value, sum.error + flux.error);
    }
    Ok(Bounded::new(sum.value - STRAIGHT_AFTER * arms.len() as f64, sum.error))
}

fn of_map(case: &Case, map: &HalfPlaneMap) -> Result<Found, NotAnswered> {
    let prevertices = Prevertices::of(map);
    Ok(Found::bare(match case.ask {
        Ask::CrossRatio { vertices, complement } => prevertices.cross_ratio(vertices, complement),
        Ask::EllipticModulus { vertices } => prevertices.elliptic_modulus(vertices),
        Ask::ConformalRadius { at } => prevertices.conformal_radius(at)?,
        Ask::HarmonicMeasure { at, from, to } => prevertices.harmonic_measure(at, from, to)?,
        Ask::MapConstant { zero, one, infinity } => prevertices.map_constant(zero, one, infinity),
        Ask::TransferResistance { contacts } => prevertices.transfer_resistance(contacts),
        Ask::PrevertexRatio { numerator, denominator, zero, infinity } => {
            prevertices.ratio(numerator, denominator, zero, infinity)
        }
        Ask::LogarithmicCapacity { ref image_sides, .. } => {
            prevertices.logarithmic_capacity(image_sides).ok_or(NotAnswered::NoWay)?
        }
        _ => return Err(NotAnswered::NoWay),
    }))
}
