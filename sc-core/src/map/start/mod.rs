//! A first guess of the prevertices: split sides, triangulate, read cross-ratios off the polygon itself.
//!
//! Source: Driscoll and Vavasis, SIAM J. Sci. Comput. 19 (1998) 1783–1803.

mod cross_ratio;
mod split;
mod triangulate;
mod truncate;

pub(crate) use cross_ratio::CrossRatioStart;
pub(crate) use split::split_sides;
pub use triangulate::StartError;
pub(crate) use truncate::{Source, truncate};
