//! The problem: outline, conditions on the sides, and what is checked before solving.

use std::sync::Arc;

use num_complex::Complex64;
use thiserror::Error;

use super::geometry::Polygon;
use crate::reference::{IrregularSection, IrregularSide};

/// Values along a side, as a function of the point.
#[derive(Clone)]
pub struct BoundaryValues(Arc<dyn Fn(Complex64) -> f64 + Send + Sync>);

impl BoundaryValues {
    /// Wraps a function of the point.
    pub fn new(values: impl Fn(Complex64) -> f64 + Send + Sync + 'static) -> BoundaryValues {
        BoundaryValues(Arc::new(values))
    }

    /// The value at `z`.
    pub fn at(&self, z: Complex64) -> f64 {
        (self.0)(z)
    }
}

impl std::fmt::Debug for BoundaryValues {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str("BoundaryValues")
    }
}

/// Condition on one side.
#[derive(Debug, Clone)]
pub enum SideData {
    /// `φ` is this constant.
    Held(f64),
    /// `φ` varies along the side.
    HeldAlong(BoundaryValues),
    /// `∂φ/∂n = 0`.
    Insulated,
    /// `∂φ/∂n = coefficient · (ambient − φ)`.
    Film {
        /// Transfer coefficient divided by the conductivity, positive.
        coefficient: f64,
        /// Potential beyond the film.
        ambient: f64,
    },
    /// `∂φ/∂n` is this constant.
    Inflow(f64),
}

impl SideData {
    /// `(a, b, c)` of `a φ + b ∂φ/∂n = c`; `None` for a held or insulated side, whose rows have no derivative.
    pub(super) fn mixed_row(&self) -> Option<(f64, f64, f64)> {
        match *self {
            SideData::Film { coefficient, ambient } => Some((coefficient, 1.0, coefficient * ambient)),
            SideData::Inflow(flux) => Some((0.0, 1.0, flux)),
            _ => None,
        }
    }

    pub(super) fn held_value(&self, z: Complex64) -> Option<f64> {
        match self {
            SideData::Held(value) => Some(*value),
            SideData::HeldAlong(values) => Some(values.at(z)),
            _ => None,
        }
    }
}

/// Laplace's equation on a bounded simple polygon.
#[derive(Debug, Clone)]
pub struct RationalProblem {
    /// Vertices, counter-clockwise; end points of electrodes that are no corners are vertices too.
    pub vertices: Vec<Complex64>,
    /// Condition on each side; side `k` leaves vertex `k`.
    pub sides: Vec<SideData>,
}

/// Why a problem cannot be solved.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum RationalError {
    /// Fewer than three vertices, or not one condition to a side.
    #[error(
        "{vertices} vertices with {sides} conditions: at least three are needed, and one condition to a side"
    )]
    Counts {
        /// Vertices given.
        vertices: usize,
        /// Conditions given.
        sides: usize,
    },
    /// A coordinate or a datum that is not finite, a film coefficient that is not positive, a side of no length.
    #[error(
        "vertex or side {index} has a value that is not finite, a film that is not positive, or no length"
    )]
    Datum {
        /// Vertex and side.
        index: usize,
    },
    /// Vertices are clockwise or enclose nothing.
    #[error("the outline encloses the area {area}; it must run counter-clockwise")]
    Orientation {
        /// Signed area.
        area: f64,
    },
    /// Two sides meet away from a shared vertex.
    #[error("sides {first} and {second} touch or cross; the outline must be simple")]
    NotSimple {
        /// One side.
        first: usize,
        /// The other side.
        second: usize,
    },
    /// A probe on the outline or outside.
    #[error("probe {index} at ({x}, {y}) is not inside the section")]
    Probe {
        /// Number of the probe.
        index: usize,
        /// Abscissa.
        x: f64,
        /// Ordinate.
        y: f64,
    },
    /// Neither a held side nor a film: the potential is not determined.
    #[error("no side is held and none has a film, so the potential is free by a constant")]
    NothingHeld,
}

/// One electrode: neighbouring sides held at one constant.
#[derive(Debug, Clone, PartialEq)]
pub struct Electrode {
    /// Its sides in order.
    pub sides: Vec<usize>,
    /// The constant.
    pub value: f64,
}

/// Maximal groups of neighbouring sides for which `joined(previous, next)` holds, starting from `member`s.
fn groups(
    n: usize,
    member: impl Fn(usize) -> bool,
    joined: impl Fn(usize, usize) -> bool,
) -> Vec<Vec<usize>> {
    let continues = |k: usize| member(k) && member((k + n - 1) % n) && joined((k + n - 1) % n, k);
    let start = (0..n).find(|&k| !continues(k)).unwrap_or(0);
    let mut result: Vec<Vec<usize>> = Vec::new();
    for k in (0..n).map(|i| (start + i) % n).filter(|&k| member(k)) {
        match result.last_mut() {
            Some(last) if continues(k) => last.push(k),
            _ => result.push(vec![k]),
        }
    }
    result
}

impl RationalProblem {
    /// The electrodes, in the order in which the conductance matrix has them (that of their first side).
    pub fn electrodes(&self) -> Vec<Electrode> {
        let value = |k: usize| match self.sides[k] {
            SideData::Held(value) => Some(value),
            _ => None,
        };
        let mut electrodes: Vec<Electrode> =
            groups(self.sides.len(), |k| value(k).is_some(), |a, b| value(a) == value(b))
                .into_iter()
                .map(|sides| Electrode { value: value(sides[0]).unwrap_or(0.0), sides })
                .collect();
        electrodes.sort_by_key(|electrode| electrode.sides.iter().min().copied());
        electrodes
    }

    /// Whether a held side meets one outside its electrode: then electrodes alone at one would jump there.
    pub(super) fn electrodes_touch(&self) -> bool {
        let n = self.sides.len();
        let held = |k: usize| matches!(self.sides[k], SideData::Held(_) | SideData::HeldAlong(_));
        let electrodes = self.electrodes();
        let together = |a: usize, b: usize| {
            electrodes.iter().any(|electrode| electrode.sides.contains(&a) && electrode.sides.contains(&b))
        };
        (0..n).any(|k| held(k) && held((k + 1) % n) && !together(k, (k + 1) % n))
    }

    pub(super) fn insulated_runs(&self) -> Vec<Vec<usize>> {
        groups(self.sides.len(), |k| matches!(self.sides[k], SideData::Insulated), |_, _| true)
    }

    pub(super) fn validate(&self) -> Result<Polygon, RationalError> {
        let (n, given) = (self.vertices.len(), self.sides.len());
        if n < 3 || n != given {
            return Err(RationalError::Counts { vertices: n, sides: given });
        }
        let polygon = Polygon { vertices: self.vertices.clone() };
        for (index, side) in self.sides.iter().enumerate() {
            let sound = match side {
                SideData::Held(value) | SideData::Inflow(value) => value.is_finite(),
                SideData::Film { coefficient, ambient } => {
                    coefficient.is_finite() && *coefficient > 0.0 && ambient.is_finite()
                }
                SideData::HeldAlong(values) => {
                    let (a, b) = (polygon.vertex(index), polygon.vertex(index + 1));
                    [a, 0.5 * (a + b), b].iter().all(|&z| values.at(z).is_finite())
                }
                SideData::Insulated => true,
            };
            let vertex = self.vertices[index];
            if !sound
                || !vertex.re.is_finite()
                || !vertex.im.is_finite()
                || !(polygon.side(index).norm().is_normal())
            {
                return Err(RationalError::Datum { index });
            }
        }
        if let Some((first, second)) = polygon.crossing() {
            return Err(RationalError::NotSimple { first, second });
        }
        let area = polygon.area();
        if area.is_nan() || area <= 0.0 {
            return Err(RationalError::Orientation { area });
        }
        let free = |side: &SideData| matches!(side, SideData::Insulated | SideData::Inflow(_));
        if self.sides.iter().all(free) {
            return Err(RationalError::NothingHeld);
        }
        Ok(polygon)
    }

    /// The problem of a reference section; `None` if it has a hole.
    #[must_use]
    pub fn from_irregular(section: &IrregularSection) -> Option<RationalProblem> {
        if section.hole.is_some() {
            return None;
        }
        let side = |side: &IrregularSide| match *side {
            IrregularSide::Insulated => SideData::Insulated,
            IrregularSide::Value(value) => SideData::Held(value),
            IrregularSide::Function(function) => {
                SideData::HeldAlong(BoundaryValues::new(move |z| function.value(z)))
            }
            IrregularSide::Film { h, ambient } => SideData::Film { coefficient: h, ambient },
        };
        Some(RationalProblem {
            vertices: section.outer.iter().map(|&[x, y]| Complex64::new(x, y)).collect(),
            sides: section.sides.iter().map(side).collect(),
        })
    }
}
