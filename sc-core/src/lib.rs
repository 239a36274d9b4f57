//! Plane potential fields on polygonal sections by Schwarz–Christoffel mapping.

pub mod answers;
pub mod map;
pub mod outline;
pub mod potential;
pub mod quadrature;
