//! Plane potential fields on polygonal sections by Schwarz–Christoffel mapping.

pub mod map;
pub mod outline;
pub mod quadrature;
