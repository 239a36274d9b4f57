//! The outline of a section: vertices, interior angles, sides.
//!
//! An outline is walked with the section on its left. Side `k` runs from vertex `k` to vertex `k + 1`; indices
//! are taken modulo the number of vertices. A bounded outline that was given with the section on its right is
//! walked the other way round, from the same first vertex; [`Outline::given_vertex`] and
//! [`Outline::given_side`] lead back to the numbers of the user's list.
//!
//! A *wall of no thickness* is a stretch that is run over twice, once in each direction, with the section on both
//! faces; its tip has the interior angle `2π`. Its faces may be cut by flat vertices in different ways.

mod angles;
mod arrangement;
mod fabric;
mod faults;
mod heading;
mod locate;
mod numbering;
mod validate;
mod walk;

#[cfg(test)]
mod tests;

use num_complex::Complex64;
use robust::{Coord, orient2d};

pub use fabric::{Fabric, FabricFault, MAX_CONTRAST, Stretch};
pub use faults::{OutlineFault, OutlineFaults, OutlineWarning, SideIdx, VertexIdx, Warned};
pub use locate::{Containment, Nearest};
pub use validate::{COINCIDENCE, MAX_COORDINATE, MAX_HEADING, MAX_REMOTENESS, MIN_SIZE};

use numbering::Numbering;
use walk::{Course, Walk};

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
        /// Heading from which the leaving side comes back; `arriving + 360` for a full turn.
        leaving: f64,
    },
}

impl Vertex {
    /// A finite vertex at `(x, y)`.
    pub fn at(x: f64, y: f64) -> Self {
        Self::At(Point::new(x, y))
    }

    /// A vertex at infinity where both sides run off toward one heading: the end of a straight channel.
    pub fn away(heading: f64) -> Self {
        Self::Away { arriving: heading, leaving: heading }
    }

    /// The point, if the vertex is finite.
    pub fn point(&self) -> Option<Point> {
        match *self {
            Self::At(p) => Some(p),
            Self::Away { .. } => None,
        }
    }
}

/// How a side runs.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Side {
    /// From one point to another.
    Between(Point, Point),
    /// From a point toward infinity along a unit vector.
    Outward(Point, Point),
    /// From infinity to a point; the unit vector points from there toward infinity.
    Inward(Point, Point),
}

/// A validated outline, walked with the section on its left.
#[derive(Debug, Clone)]
pub struct Outline {
    vertices: Vec<Vertex>,
    alpha: Vec<f64>,
    sides: Vec<Side>,
    numbering: Numbering,
    size: f64,
    bounded: bool,
}

impl Outline {
    /// Checks a list of vertices and makes an outline of it.
    ///
    /// Coincident points (closer than [`COINCIDENCE`] of the size) become one point, a bounded outline walked with
    /// the section on its right is turned round with a warning, and the interior angles are made to add up.
    ///
    /// # Errors
    /// Everything that is wrong with the list, in its own numbering; a gross fault can hide finer ones.
    ///
    /// # Examples
    /// ```
    /// use sc_core::outline::{Outline, Vertex};
    ///
    /// // A layer of depth 1 with a sheet pile of depth 1/2.
    /// let layer = Outline::new(&[
    ///     Vertex::away(0.0),
    ///     Vertex::at(0.0, 0.0),
    ///     Vertex::at(0.0, -0.5),
    ///     Vertex::at(0.0, 0.0),
    ///     Vertex::away(180.0),
    ///     Vertex::at(0.0, -1.0),
    /// ])?;
    /// assert_eq!(layer.value.alpha(), [0.0, 0.5, 2.0, 0.5, 0.0, 1.0]);
    /// # Ok::<(), sc_core::outline::OutlineFaults>(())
    /// ```
    pub fn new(vertices: &[Vertex]) -> Result<Warned<Self>, OutlineFaults> {
        validate::validate(vertices)
    }

    fn assemble(
        vertices: Vec<Vertex>,
        alpha: Vec<f64>,
        walk: &Walk,
        numbering: Numbering,
        size: f64,
    ) -> Self {
        let sides = (walk.courses.iter())
            .filter_map(|&course| match course {
                Course::Between { from, to } => Some(Side::Between(walk.nodes[from], walk.nodes[to])),
                Course::Outward { from, heading } => {
                    Some(Side::Outward(walk.nodes[from], walk.units[heading]))
                }
                Course::Inward { to, heading } => Some(Side::Inward(walk.nodes[to], walk.units[heading])),
                // Reported as a fault before an outline is put together.
                Course::Nowhere => None,
            })
            .collect();
        let bounded = vertices.iter().all(|v| v.point().is_some());
        Self { vertices, alpha, sides, numbering, size, bounded }
    }

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

    /// Whether every vertex is finite.
    pub fn is_bounded(&self) -> bool {
        self.bounded
    }

    /// Diameter of the bounding box of the finite vertices; 1 if there is but one finite vertex, because then the
    /// section has no length of its own and any unit serves.
    pub fn size(&self) -> f64 {
        if self.size > 0.0 { self.size } else { 1.0 }
    }

    /// Whether the user's list was walked with the section on its right, so that this walk runs the other way.
    pub fn reversed(&self) -> bool {
        self.numbering.reversed
    }

    /// The number, in the user's list, of vertex `k` of the walk.
    pub fn given_vertex(&self, k: usize) -> VertexIdx {
        self.numbering.vertex(k)
    }

    /// The number, in the user's list, of side `k` of the walk: the listed vertex that it left there.
    pub fn given_side(&self, k: usize) -> SideIdx {
        self.numbering.side(k)
    }

    /// Vertex `k`, if it is finite.
    pub fn point(&self, k: usize) -> Option<Point> {
        self.vertices[k % self.n()].point()
    }

    /// Side `k` from its start to its end, if both are finite.
    pub fn side_vector(&self, k: usize) -> Option<Point> {
        match self.side(k) {
            Side::Between(a, b) => Some(b - a),
            Side::Outward(..) | Side::Inward(..) => None,
        }
    }

    /// Length of side `k`, if both its ends are finite.
    pub fn side_length(&self, k: usize) -> Option<f64> {
        self.side_vector(k).map(Point::norm)
    }

    /// Unit vector along side `k` in walking order.
    pub fn side_direction(&self, k: usize) -> Point {
        match self.side(k) {
            Side::Between(a, b) => (b - a) / (b - a).norm(),
            Side::Outward(_, d) => d,
            Side::Inward(_, d) => -d,
        }
    }

    /// The first and last distance `s` along a side: `(0, length)`, `(0, ∞)`, or `(−∞, 0)` on a side from infinity.
    pub fn side_range(&self, k: usize) -> (f64, f64) {
        match self.side(k) {
            Side::Between(a, b) => (0.0, (b - a).norm()),
            Side::Outward(..) => (0.0, f64::INFINITY),
            Side::Inward(..) => (f64::NEG_INFINITY, 0.0),
        }
    }

    /// The point at distance `s` along a side.
    pub fn place(&self, k: usize, s: f64) -> Point {
        match self.side(k) {
            Side::Between(a, b) => {
                let length = (b - a).norm();
                if s >= length { b } else { a + (b - a) * (s / length) }
            }
            Side::Outward(a, heading) => a + heading * s,
            // The heading points toward infinity, where s is negative.
            Side::Inward(b, heading) => b - heading * s,
        }
    }

    /// How side `k` runs.
    pub(crate) fn side(&self, k: usize) -> Side {
        self.sides[k % self.n()]
    }
}

/// `a × b`, positive if `b` is to the left of `a`.
fn cross(a: Point, b: Point) -> f64 {
    a.re * b.im - a.im * b.re
}

fn dot(a: Point, b: Point) -> f64 {
    a.re * b.re + a.im * b.im
}

/// Positive if `c` is on the left of the line from `a` to `b`, zero if on it; the sign is exact.
fn turn(a: Point, b: Point, c: Point) -> f64 {
    let coord = |p: Point| Coord { x: p.re, y: p.im };
    orient2d(coord(a), coord(b), coord(c))
}
