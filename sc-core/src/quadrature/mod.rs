//! Quadrature on the unit interval, with and without a power weight at its start.
//!
//! Nothing here knows of polygons, prevertices or potentials.

mod gauss_jacobi;
mod logarithm;

pub use gauss_jacobi::{Rule, RuleError};
pub(crate) use logarithm::ln_positive;
