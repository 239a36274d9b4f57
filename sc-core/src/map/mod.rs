//! The conformal map from the upper half-plane to the section.

mod conformal;
mod equations;
mod gap_line;
mod half_plane;
mod inverse;
mod parameter_problem;
mod power_product;
mod side_integrals;
mod start;
mod step;

pub use conformal::{HalfPlaneMap, MapOptions};
pub use gap_line::GapLine;
pub use half_plane::{Effort, MapError};
pub use inverse::{InverseError, Preimage};
pub use parameter_problem::{IterationObserver, StopReason};
pub use power_product::HalfPlanePoint;
pub use start::StartError;

pub(crate) use gap_line::ln_sum;
pub(crate) use power_product::{PowerProduct, Scaled, unit};
pub(crate) use side_integrals::{RuleSet, side_integrals};
