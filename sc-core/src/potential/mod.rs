//! The potential problem on the half-plane: held and insulated sides, fluxes, conductances.

mod arcs;
mod elliptic;
mod field;
mod section;

pub(crate) use arcs::Arcs;
pub use elliptic::{EllipticError, complete_k, conductance_of_cross_ratio};
pub(crate) use field::{Field, FieldBasis, FieldError};
pub use section::{Section, SectionFault, SectionWarning};
