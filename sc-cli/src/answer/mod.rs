//! The answers about a section, in the trade's units.

mod cautions;
mod collect;
mod document;
mod number;
mod units;

pub use cautions::cautions;
pub use collect::document_of;
pub use document::{
    Corner, Document, Gradient, Held, Map, Matrix, Measured, Probe, ProbeErrors, Side, Units, Value,
};
pub use number::Number;
pub use units::{Scales, VACUUM_PERMITTIVITY};
