//! Quadrature on the unit interval, with and without a power weight at its start.
//!
//! Nothing here knows of polygons, prevertices or potentials.

mod elementary;
mod gauss_jacobi;

pub(crate) use elementary::{argument_upper, ln_positive};
pub use gauss_jacobi::{Rule, RuleError};
