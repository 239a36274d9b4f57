//! Support for the checks: reference tables, independent methods that share no code with the map, and the program
//! under test in the terms of the checks.

pub mod corpus;
pub mod estimates;
pub mod generate;
pub mod held_section;
pub mod known;
pub mod prevertices;
pub mod question;
pub mod rational;
pub mod reference;
pub mod robustness;
pub mod two_sided;
