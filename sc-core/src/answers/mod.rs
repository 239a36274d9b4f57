//! Answers: conductances, fluxes, potentials, gradients and corner coefficients of a section, each with an error bound.

mod bounded;
mod corner;
mod estimate;
mod probe;
mod solution;

pub use bounded::Bounded;
pub use corner::{Corner, CornerKind};
pub use probe::{Gradient, Probe, ProbeError};
pub use solution::{Matrix, Solution, SolveError, SolveOptions};
