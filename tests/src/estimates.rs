//! Error estimates against true errors, on sections whose answers are known.

use num_complex::Complex64;
use sc_core::answers::{Bounded, Gradient};

use crate::held_section::Refused;
use crate::known::{Family, KnownSection};

/// True errors below this share of the value count as this much when an estimate is called wasteful.
pub const FLOOR: f64 = 1e-14;
/// Largest median of estimate over true error.
pub const MEDIAN_RATIO: f64 = 100.0;

/// One answer with its estimate and its true error, both in parts of the value or of the range of levels.
#[derive(Debug, Clone, Copy)]
pub struct Comparison {
    /// Kind of section.
    pub family: Family,
    /// True error.
    pub error: f64,
    /// The program's estimate.
    pub estimate: f64,
    /// What the rounding of the coordinates may contribute to the true error.
    pub rounding: f64,
}

impl Comparison {
    fn of(family: Family, found: Bounded, expected: f64, scale: f64, rounding: f64) -> Comparison {
        // Half a unit in the last place: the expected value itself is rounded.
        let rounding = rounding + 0.5 * f64::EPSILON;
        let error = (found.value - expected).abs() / scale;
        Comparison { family, error, estimate: found.error / scale, rounding }
    }

    /// Whether the estimate is at least the true error; a NaN is not.
    #[must_use]
    pub fn is_covered(&self) -> bool {
        self.error <= self.estimate + self.rounding
    }

    /// Estimate over true error, the latter at least [`FLOOR`].
    #[must_use]
    pub fn ratio(&self) -> f64 {
        self.estimate / self.error.max(FLOOR)
    }
}

/// Solves a section and compares everything about it that is known: the conductance, both electrode fluxes and, where
/// the potential is linear, potentials and gradients inside.
///
/// # Errors
/// [`Refused`] if there is no solution.
pub fn compare(known: &KnownSection) -> Result<Vec<Comparison>, Refused> {
    let solution = known.section.solve()?;
    let (family, g, rounding) = (known.family, known.conductance, known.rounding);
    let missing = Bounded::new(f64::NAN, 0.0);
    let mut all = vec![Comparison::of(family, solution.shape_factor().unwrap_or(missing), g, g, rounding)];
    // Electrodes in the order of their levels: 0, then 1.
    all.push(Comparison::of(family, solution.electrode_flux(0), -g, g, rounding));
    all.push(Comparison::of(family, solution.electrode_flux(1), g, g, rounding));
    let Some((constant, slope)) = known.linear else { return Ok(all) };
    let outline = solution.section().outline();
    let corners: Vec<Complex64> = (0..outline.n()).filter_map(|k| outline.point(k)).collect();
    // A rectangle is convex: means of its vertices with uneven weights are inside.
    for i in 0..6 {
        let weight = |k: usize| 1.0 + ((7 * i + 3) * (k + 1) % 11) as f64;
        let total: f64 = (0..corners.len()).map(weight).sum();
        let z = corners.iter().enumerate().map(|(k, z)| z * (weight(k) / total)).sum::<Complex64>();
        let expected = constant + (slope * z).re;
        // Coordinates of size |z| are rounded, and so is the sum of two terms of size |slope z|.
        let terms = 4.0 * f64::EPSILON * (slope * z).norm().max(1.0);
        let Ok(probe) = solution.probe(z) else {
            all.push(Comparison::of(family, missing, expected, 1.0, terms));
            continue;
        };
        all.push(Comparison::of(family, probe.potential, expected, 1.0, terms));
        let (difference, error) = match probe.gradient {
            Gradient::Finite { components: [x, y], error } => {
                ((Complex64::new(x, y) - slope.conj()).norm(), error)
            }
            Gradient::Infinite => (f64::NAN, 0.0),
        };
        let size = slope.norm();
        all.push(Comparison::of(family, Bounded { value: difference, error }, 0.0, size, 4.0 * f64::EPSILON));
    }
    Ok(all)
}
