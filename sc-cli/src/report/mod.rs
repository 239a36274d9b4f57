//! The readable answer.

pub mod digits;
mod overview;
mod solved;
mod table;
mod wrap;

pub use overview::overview;
pub use solved::report;
pub use table::Table;
pub use wrap::{bullets, wrapped};
