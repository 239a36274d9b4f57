//! Irregular sections without a closed form, and simple polygons for robustness.
//!
//! The values of the irregular sections come from two general-purpose methods, high-order finite elements
//! with bounds from both sides and rational least squares; `abs_err` is what can be defended.

use std::collections::BTreeMap;

use serde::Deserialize;

use super::{BoundaryFunction, read_json};

/// A section with values computed by independent methods.
#[derive(Debug, Clone, Deserialize)]
pub struct IrregularSection {
    /// Name, unique in the file.
    pub name: String,
    /// Kind of section.
    pub family: String,
    /// Remark.
    pub note: String,
    /// Outer boundary, anticlockwise.
    pub outer: Vec<[f64; 2]>,
    /// Condition on each outer side; side `k` leaves vertex `k`.
    pub sides: Vec<IrregularSide>,
    /// Boundary of the hole, **anticlockwise**.
    pub hole: Option<Vec<[f64; 2]>>,
    /// Condition on each side of the hole.
    pub hole_sides: Option<Vec<IrregularSide>>,
    /// Held values in ascending order, one for each electrode; an electrode is all sides at its value.
    pub electrode_values: Option<Vec<f64>>,
    /// Flux per unit drop between two electrodes.
    pub conductance: Option<Bracketed>,
    /// Flux into the section at electrode i for unit potential on electrode j, all others at 0.
    pub matrix: Option<MatrixRecord>,
    /// Flux into the section at each electrode.
    pub flux: Option<TotalFluxes>,
    /// Flux into the section through each side that is not insulated.
    pub side_flux: Option<SideFluxes>,
    /// Flux into the section through named groups of sides.
    #[serde(default)]
    pub part_flux: BTreeMap<String, PartFlux>,
    /// ½ ∫ |∇φ|² + ½ Σ ∫ h (φ − ambient)², from above and below.
    pub functional: Option<Balance>,
    /// Potentials.
    #[serde(default)]
    pub points: Vec<PointRecord>,
    /// Closed form where there is one: the conductance as decimal text, or an object.
    pub exact: Option<serde_json::Value>,
}

/// Condition on a side of an irregular section.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum IrregularSide {
    /// No flux.
    Insulated,
    /// Potential held at a value.
    Value(f64),
    /// Potential given along the side.
    Function(BoundaryFunction),
    /// Surface film, with n outward and unit conductivity: ∂φ/∂n = h (ambient − φ).
    Film {
        /// Film coefficient.
        h: f64,
        /// Potential beyond the film.
        ambient: f64,
    },
}

/// A value with bounds from both sides.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
pub struct Bracketed {
    /// Best value.
    pub value: f64,
    /// Lower bound, from the stream function.
    pub lower: f64,
    /// Upper bound, from the potential.
    pub upper: f64,
    /// Defensible absolute error.
    pub abs_err: f64,
}

/// A conductance matrix.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct MatrixRecord {
    /// Rows.
    pub value: Vec<Vec<f64>>,
    /// Defensible absolute error of each entry.
    pub abs_err: Vec<Vec<f64>>,
}

/// Fluxes at the electrodes.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct TotalFluxes {
    /// In the order of the electrode values.
    pub value: Vec<f64>,
    /// Defensible absolute error of each.
    pub abs_err: f64,
}

/// Fluxes through single sides, `None` where insulated or not computed.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct SideFluxes {
    /// In the order of the sides.
    pub value: Vec<Option<f64>>,
    /// Defensible absolute errors.
    pub abs_err: Vec<Option<f64>>,
}

/// Flux through a group of sides.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct PartFlux {
    /// The sides.
    pub sides: Vec<usize>,
    /// Their flux into the section.
    pub value: f64,
    /// Defensible absolute error.
    pub abs_err: f64,
}

/// An energy with bounds from both sides.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
pub struct Balance {
    /// Upper bound.
    pub upper: f64,
    /// Lower bound.
    pub lower: f64,
}

/// A potential at a point.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
pub struct PointRecord {
    /// Abscissa.
    pub x: f64,
    /// Ordinate.
    pub y: f64,
    /// Potential.
    pub potential: f64,
    /// Defensible absolute error.
    pub abs_err: f64,
    /// The side it lies on, if it lies on one.
    pub side: Option<usize>,
    /// How far along that side, 0 to 1.
    pub fraction: Option<f64>,
}

/// A simple bounded polygon with two held sides, the others insulated. There is no value to match.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct TwoSidedSection {
    /// Name, unique in the file.
    pub id: String,
    /// Kind of polygon.
    pub family: String,
    /// Outline, anticlockwise.
    pub vertices: Vec<[f64; 2]>,
    /// The side held at 1 and the side held at 0, by the vertex they leave.
    pub held: [usize; 2],
}

/// The irregular sections.
///
/// # Panics
///
/// If the file is missing or malformed.
#[must_use]
pub fn load_irregular() -> Vec<IrregularSection> {
    read_json("irregular.json")
}

/// The 300 simple polygons.
///
/// # Panics
///
/// If the file is missing or malformed.
#[must_use]
pub fn load_simple_300() -> Vec<TwoSidedSection> {
    read_json("simple-300.json")
}
