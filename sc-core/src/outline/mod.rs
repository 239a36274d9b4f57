//! The outline of a section: vertices, interior angles, sides.

use num_complex::Complex64;

/// A point of the plane, `x + i y`, in the length unit of the section (the core itself is dimensionless).
pub type Point = Complex64;

/// One vertex of an outline, as the user lists it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Vertex {
    /// A finite vertex.
    At(Point),
    /// A vertex at infinity. Headings in degrees, counter-clockwise from the x axis.
    Away {
        /// Heading toward which the arriving side runs off.
        arriving: f64,
        /// Heading from which the leaving side comes back.
        leaving: f64,
    },
}

/// A validated outline, walked with the section on its left.
#[derive(Debug, Clone)]
pub struct Outline {
    vertices: Vec<Vertex>,
    alpha: Vec<f64>,
}

impl Outline {
    /// Number of vertices, and of sides: side `k` leaves vertex `k`.
    pub fn n(&self) -> usize {
        self.vertices.len()
    }
    /// The vertices in walking order.
    pub fn vertices(&self) -> &[Vertex] {
        &self.vertices
    }
    /// Interior angles in units of π: `0 < α ≤ 2` at a finite vertex, `−2 ≤ α ≤ 0` at infinity; `Σ α = n − 2`.
    pub fn alpha(&self) -> &[f64] {
        &self.alpha
    }
}
