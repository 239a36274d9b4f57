//! The conformal map from the upper half-plane to the section.

mod gap_line;
mod half_plane;
mod parameter_problem;
mod side_integrals;
mod start;

pub use gap_line::GapLine;
pub use half_plane::{Effort, MapError, trial};
pub use parameter_problem::{IterationObserver, StopReason};
pub use start::StartError;
