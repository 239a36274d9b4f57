//! Plane potential fields on polygonal sections by Schwarz–Christoffel mapping.

pub mod outline;
