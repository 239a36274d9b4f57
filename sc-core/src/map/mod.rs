//! The conformal map from the upper half-plane to the section.

mod conformal;
mod gap_line;
mod half_plane;
mod inverse;
mod parameter_problem;
mod power_product;
mod side_integrals;
mod start;

pub use conformal::{HalfPlaneMap, MapOptions};
pub use gap_line::GapLine;
pub use inverse::{InverseError, Preimage};
pub use half_plane::{Effort, MapError};
pub use parameter_problem::{IterationObserver, StopReason};
pub use power_product::HalfPlanePoint;
pub use start::StartError;
