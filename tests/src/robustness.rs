//! Three hundred simple polygons with two held sides: each must be solved, and three independent ways must agree.

use std::time::{Duration, Instant};

use num_complex::Complex64;
use sc_core::answers::SolveOptions;

use crate::held_section::{HeldSection, Refused};
use crate::reference::TwoSidedSection;

/// Largest relative side residual to accept on any polygon.
pub const RESIDUAL_AT_WORST: f64 = 1e-10;
/// Largest relative side residual to accept in the median.
pub const RESIDUAL_IN_THE_MEDIAN: f64 = 1e-12;
/// Largest `|G·G′ − 1|` to accept on any polygon.
pub const RECIPROCITY: f64 = 1e-9;

/// What came of one polygon.
#[derive(Debug, Clone)]
pub struct Outcome {
    /// Its name.
    pub id: String,
    /// Its family.
    pub family: String,
    /// Number of sides.
    pub sides: usize,
    /// Time for solution and check together.
    pub time: Duration,
    /// The figures, or why there are none.
    pub result: Result<Figures, Refused>,
}

/// The figures of a solved polygon.
#[derive(Debug, Clone, Copy)]
pub struct Figures {
    /// Sides after splitting, for the start.
    pub pieces: usize,
    /// Iterations of the parameter problem.
    pub iterations: u64,
    /// Conductance between the two held sides.
    pub conductance: f64,
    /// Relative error estimate of the conductance.
    pub estimate: f64,
    /// Largest relative side residual, by another quadrature than the solution's.
    pub residual: f64,
    /// `|G·G′ − 1|`, the two from independent maps and by different formulas.
    pub reciprocity: f64,
    /// Natural logarithm of the ratio of the largest to the smallest gap between prevertices.
    pub ln_crowding: f64,
}

/// What a polygon can fail in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Failure {
    /// There is no solution.
    Refused,
    /// The map's sides do not agree with the outline.
    Residual,
    /// The independent ways do not agree.
    Reciprocity,
    /// A figure is missing or not a finite number.
    NotANumber,
}

impl Outcome {
    /// What the polygon fails in, if it does.
    #[must_use]
    pub fn failure(&self) -> Option<Failure> {
        match &self.result {
            Err(_) => Some(Failure::Refused),
            Ok(f) => {
                let all = [f.conductance, f.estimate, f.residual, f.reciprocity];
                if all.iter().any(|x| !x.is_finite()) {
                    Some(Failure::NotANumber)
                } else if f.residual > RESIDUAL_AT_WORST {
                    Some(Failure::Residual)
                } else if f.reciprocity > RECIPROCITY {
                    Some(Failure::Reciprocity)
                } else {
                    None
                }
            }
        }
    }
}

/// Solves one polygon with its independent check.
#[must_use]
pub fn examine(polygon: &TwoSidedSection) -> Outcome {
    let points: Vec<Complex64> = polygon.vertices.iter().map(|&[x, y]| Complex64::new(x, y)).collect();
    let section = HeldSection::between(&points, polygon.held[0], polygon.held[1]);
    let start = Instant::now();
    let solved = section.solve_with(&SolveOptions::default());
    let time = start.elapsed();
    let result = solved.map(|solution| {
        let (low, high) = solution.map().line().spread();
        let shape_factor = solution.shape_factor();
        Figures {
            pieces: solution.map().effort().pieces,
            iterations: solution.map().effort().iterations,
            conductance: shape_factor.map_or(f64::NAN, |g| g.value),
            estimate: shape_factor.map_or(f64::NAN, sc_core::answers::Bounded::relative),
            residual: solution.residual(),
            reciprocity: solution.reciprocity().unwrap_or(f64::NAN),
            ln_crowding: high - low,
        }
    });
    Outcome { id: polygon.id.clone(), family: polygon.family.clone(), sides: points.len(), time, result }
}

/// The middle one of some numbers, `None` of none.
#[must_use]
pub fn median(mut numbers: Vec<f64>) -> Option<f64> {
    numbers.sort_by(f64::total_cmp);
    numbers.get(numbers.len() / 2).copied()
}
