//! Two-sided bounds of a conductance from trial functions, for any section with two held runs: with walls of no
//! thickness and with vertices at infinity too. No conformal map is involved.
//!
//! The field between the held runs minimises the energy `∫|∇φ|²`, so the energy `U` of any continuous function with
//! the right values on them is not below the conductance `G` (Dirichlet's principle). With held and insulated sides
//! exchanged the conductance is `1/G`, so the energy `V` of any function with 0 on the one insulated run and 1 on the
//! other gives `1/V ≤ G` (Thomson's principle). Here the trial functions are piecewise linear on triangles; solving
//! for the best one only approximately, or on poor triangles, widens the bounds and does not spoil them.
//!
//! An end at infinity is cut off far out and closed by a side on which the trial function is constant: continued by
//! that constant it is a trial function of the whole section with the same energy. The constant is the value of the
//! side that runs off there if it is held, and free if not; an end lies beside two sides at most, of which in a
//! problem of finite conductance only one value can be held.
//!
//! # Accuracy
//! The bounds hold up to rounding, some 1e-12. Their difference is `∫|∇φ − J∇ψ|²` of the two trial functions scaled to
//! one flux (Prager and Synge, *Quarterly of Applied Mathematics* 5 (1947) 241-269), so it tells triangle by triangle
//! where to refine.

mod cut;
mod energy;
mod mesh;

use thiserror::Error;

use crate::held_section::HeldSection;
use cut::Closed;
use energy::{Trial, Values};
use mesh::Mesh;

/// What bounds a conductance from both sides.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TwoSided {
    /// The conductance is not below this.
    pub lower: f64,
    /// The conductance is not above this.
    pub upper: f64,
    /// Triangles of the finest mesh.
    pub triangles: usize,
}

impl TwoSided {
    /// Whether a value lies within the bounds, up to rounding.
    #[must_use]
    pub fn admits(&self, conductance: f64) -> bool {
        self.lower * (1.0 - ROUNDING) <= conductance && conductance <= self.upper * (1.0 + ROUNDING)
    }

    /// Difference of the bounds in parts of the upper one.
    #[must_use]
    pub fn width(&self) -> f64 {
        1.0 - self.lower / self.upper
    }
}

/// Why there are no bounds.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum NoBounds {
    /// The section has other than two held runs.
    #[error("{runs} held runs; two are needed")]
    Runs {
        /// How many there are.
        runs: usize,
    },
    /// The triangles do not make up the section.
    #[error("the triangles cover an area of {covered:e} where the section has {area:e}")]
    Area {
        /// Area of the triangles.
        covered: f64,
        /// Area of the section.
        area: f64,
    },
    /// The outline cannot be triangulated.
    #[error("the outline cannot be triangulated")]
    Triangulation,
}

/// Rounding in energies.
const ROUNDING: f64 = 1e-9;
/// Share of the bounds' difference that is refined in one round.
const BULK: f64 = 0.6;
/// Rounds of refinement; the triangles run out before.
const ROUNDS: usize = 40;

/// Bounds of the conductance, refined until they are within `width` of each other or there are `most` triangles.
///
/// # Errors
/// [`NoBounds`] when the section has other than two held runs or cannot be triangulated.
pub fn conductance(section: &HeldSection, width: f64, most: usize) -> Result<TwoSided, NoBounds> {
    let closed = Closed::new(section)?;
    let mut mesh = Mesh::new(&closed)?;
    let mut potential = Trial::new();
    let mut stream = Trial::new();
    let mut bounds = TwoSided { lower: 0.0, upper: f64::INFINITY, triangles: 0 };
    for _ in 0..ROUNDS {
        let upper = potential.minimise(&mesh, &Values::potential(&closed, &mesh));
        let lower = 1.0 / stream.minimise(&mesh, &Values::stream(&closed, &mesh));
        let triangles = mesh.triangles().len();
        // Every round's bounds hold.
        bounds = TwoSided { lower: lower.max(bounds.lower), upper: upper.min(bounds.upper), triangles };
        if bounds.width() <= width || triangles >= most {
            break;
        }
        let misfit = energy::misfit(&mesh, &potential, &stream, lower);
        let marked = bulk(&misfit, most - triangles);
        let parents = mesh.refine(&marked);
        potential.carry_over(&parents);
        stream.carry_over(&parents);
    }
    Ok(bounds)
}

/// The triangles with the largest misfits, which make up a share of the whole.
fn bulk(misfit: &[f64], most: usize) -> Vec<usize> {
    let whole: f64 = misfit.iter().sum();
    let mut order: Vec<usize> = (0..misfit.len()).collect();
    order.sort_by(|&a, &b| misfit[b].total_cmp(&misfit[a]));
    let mut sum = 0.0;
    let enough = order.iter().position(|&t| {
        sum += misfit[t];
        sum >= BULK * whole
    });
    order.truncate(enough.map_or(misfit.len(), |last| last + 1).min(most.max(1)));
    order
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::held_section::finite;
    use num_complex::Complex64;
    use sc_core::outline::Vertex;

    fn assert_bounds(label: &str, section: &HeldSection, expected: f64, width: f64) {
        let bounds = conductance(section, width, 40_000).unwrap();
        assert!(bounds.admits(expected), "{label}: {expected} is not within {bounds:?}");
        assert!(bounds.width() <= width, "{label}: {bounds:?}");
    }

    #[test]
    fn linear_fields_are_bounded_sharply() {
        let points = [(0.0, 0.0), (3.0, 0.0), (3.0, 2.0), (0.0, 2.0)].map(|(x, y)| Complex64::new(x, y));
        assert_bounds("rectangle", &HeldSection::between(&points, 1, 3), 2.0 / 3.0, 1e-9);
    }

    #[test]
    fn three_square_l_has_conductance_one_over_root_three() {
        // Gaier (1972), from memory: threefold reflection of the square gives λ = sin² 15°.
        let points = [(1.0, 2.0), (0.0, 2.0), (0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)];
        let points = points.map(|(x, y)| Complex64::new(x, y));
        assert_bounds("L", &HeldSection::between(&points, 0, 2), 1.0 / 3.0_f64.sqrt(), 2e-3);
    }

    #[test]
    fn a_sheet_pile_halfway_down_a_layer_has_conductance_one_half() {
        // K'/2K at the modulus sin(π/4), where K' = K (Polubarinova-Kochina 1962, from memory).
        let section = HeldSection {
            vertices: vec![
                Vertex::away(0.0),
                Vertex::at(0.0, 0.0),
                Vertex::at(0.0, -0.5),
                Vertex::at(0.0, 0.0),
                Vertex::away(180.0),
                Vertex::at(0.0, -1.0),
            ],
            electrodes: vec![Some(0), None, None, Some(1), None, None],
            levels: vec![1.0, 0.0],
        };
        assert_bounds("pile", &section, 0.5, 5e-3);
    }

    #[test]
    fn equal_strips_apart_by_their_width_on_a_half_plane_are_bounded() {
        // The elliptic sine of modulus k = 1/3 maps a rectangle 2K by K', its ends to the strips, so G = K'/2K;
        // K'/K = agm(1, k')/agm(1, k).
        let mut vertices: Vec<Vertex> =
            finite(&[1.0, 1.0 / 3.0, -1.0 / 3.0, -1.0].map(|x| Complex64::new(x, 0.0)));
        vertices.insert(0, Vertex::Away { arriving: 180.0, leaving: 0.0 });
        let electrodes = vec![None, Some(0), None, Some(1), None];
        let section = HeldSection { vertices, electrodes, levels: vec![1.0, 0.0] };
        let agm = |mut b: f64| {
            let mut a = 1.0;
            for _ in 0..8 {
                (a, b) = (0.5 * (a + b), f64::sqrt(a * b));
            }
            a
        };
        let expected = 0.5 * agm((8.0_f64 / 9.0).sqrt()) / agm(1.0 / 3.0);
        assert_bounds("strips", &section, expected, 1e-2);
    }

    #[test]
    fn three_conductors_are_not_bounded() {
        let points: Vec<Complex64> =
            (0..6).map(|k| Complex64::from_polar(1.0, std::f64::consts::FRAC_PI_3 * f64::from(k))).collect();
        let section = HeldSection {
            vertices: finite(&points),
            electrodes: vec![Some(0), None, Some(1), None, Some(2), None],
            levels: vec![0.0, 1.0, 2.0],
        };
        assert_eq!(conductance(&section, 0.1, 100), Err(NoBounds::Runs { runs: 3 }));
    }
}
