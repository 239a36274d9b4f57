//! Support for the checks: reference tables and independent methods that share no code with the map.

pub mod generate;
pub mod rational;
pub mod reference;
