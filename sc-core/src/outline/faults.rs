//! What can be wrong with an outline, and what was mended in one, in the user's own numbering.

use std::fmt;

use thiserror::Error;

/// A vertex in the order in which the user listed it, counted from zero.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct VertexIdx(pub usize);

/// A side by the listed vertex it leaves, counted from zero.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct SideIdx(pub usize);

impl fmt::Display for VertexIdx {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.0.fmt(f)
    }
}

impl fmt::Display for SideIdx {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.0.fmt(f)
    }
}

/// A value together with what was mended to get it.
#[derive(Debug, Clone, PartialEq)]
pub struct Warned<T> {
    /// The value.
    pub value: T,
    /// What the user should know about it.
    pub warnings: Vec<OutlineWarning>,
}

/// Something in an outline that was mended or is doubtful.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
#[non_exhaustive]
pub enum OutlineWarning {
    /// The outline was walked with the section on its right.
    #[error(
        "the outline was given with the section on its right and is walked the other way round; names stay on their sides"
    )]
    Reversed,
    /// A vertex was moved by more than rounding, onto another vertex.
    #[error("vertex {vertex} is {distance:e} from vertex {onto} and is taken to be the same point")]
    VertexMovedToVertex {
        /// The vertex that was moved.
        vertex: VertexIdx,
        /// Where it now lies.
        onto: VertexIdx,
        /// How far it was moved.
        distance: f64,
    },
    /// A vertex was moved by more than rounding, onto a side that it runs along.
    #[error(
        "vertex {vertex} is {distance:e} from side {onto}, along which it runs, and is taken to lie on it"
    )]
    VertexMovedToSide {
        /// The vertex that was moved.
        vertex: VertexIdx,
        /// The side on which it now lies.
        onto: SideIdx,
        /// How far it was moved.
        distance: f64,
    },
    /// The coordinates are so large that rounding is felt in the section.
    #[error(
        "coordinates as large as {magnitude:e} resolve a section of size {size:e} only to {resolution:e} of its size; \
         an origin nearer to it would be better"
    )]
    FarFromOrigin {
        /// Largest coordinate.
        magnitude: f64,
        /// Size of the section.
        size: f64,
        /// Rounding of a coordinate over the size.
        resolution: f64,
    },
}

/// One thing that is wrong with an outline.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
#[non_exhaustive]
pub enum OutlineFault {
    /// A coordinate is NaN or infinite.
    #[error("vertex {vertex} is at ({x}, {y}); coordinates must be finite")]
    CoordinateNotFinite {
        /// The vertex.
        vertex: VertexIdx,
        /// Its x.
        x: f64,
        /// Its y.
        y: f64,
    },
    /// A coordinate whose square overflows.
    #[error("vertex {vertex} is at ({x:e}, {y:e}); coordinates must be below {limit:e} in absolute value")]
    CoordinateTooLarge {
        /// The vertex.
        vertex: VertexIdx,
        /// Its x.
        x: f64,
        /// Its y.
        y: f64,
        /// The largest coordinate that can be dealt with.
        limit: f64,
    },
    /// A heading is NaN or infinite.
    #[error(
        "vertex {vertex} runs off toward {arriving} and comes back from {leaving}; headings must be finite degrees"
    )]
    HeadingNotFinite {
        /// The vertex at infinity.
        vertex: VertexIdx,
        /// Heading of the arriving side.
        arriving: f64,
        /// Heading of the leaving side.
        leaving: f64,
    },
    /// A heading so many turns away that its digits are lost.
    #[error(
        "vertex {vertex} runs off toward {arriving} and comes back from {leaving}; \
         headings must be within {limit} degrees either way"
    )]
    HeadingTooLarge {
        /// The vertex at infinity.
        vertex: VertexIdx,
        /// Heading of the arriving side.
        arriving: f64,
        /// Heading of the leaving side.
        leaving: f64,
        /// The largest heading in absolute value.
        limit: f64,
    },
    /// Not enough vertices to enclose anything.
    #[error("{given} vertices are given; an outline of this kind needs at least {needed}")]
    TooFewVertices {
        /// How many there are.
        given: usize,
        /// How many there must be.
        needed: usize,
    },
    /// No finite vertex, so nothing says where the section lies.
    #[error(
        "all {given} vertices are at infinity; at least one must be finite to say where the section lies"
    )]
    NoFiniteVertex {
        /// How many vertices there are.
        given: usize,
    },
    /// The finite vertices are so close together that squares of lengths underflow.
    #[error("the section's size is {size:e}; it must be above {limit:e}")]
    TooSmall {
        /// Diameter of the finite vertices' bounding box.
        size: f64,
        /// The smallest size that can be dealt with.
        limit: f64,
    },
    /// The section is so far from the origin that its coordinates do not resolve it.
    #[error(
        "coordinates as large as {magnitude:e} do not resolve a section of size {size:e}; choose an origin nearer to it"
    )]
    TooFarFromOrigin {
        /// Largest coordinate.
        magnitude: f64,
        /// Size of the section.
        size: f64,
    },
    /// A side without length.
    #[error(
        "vertices {first} and {second} follow one another and are {distance:e} apart; \
         vertices closer than {limit:e} (1e-9 of the section's size) are the same point"
    )]
    NeighboursCoincide {
        /// The earlier vertex.
        first: VertexIdx,
        /// The vertex after it.
        second: VertexIdx,
        /// Their distance.
        distance: f64,
        /// The distance below which vertices are one point.
        limit: f64,
    },
    /// Two vertices at infinity in sequence.
    #[error("side {side} runs from infinity to infinity; a flat vertex must say where it lies")]
    SideNowhere {
        /// The side.
        side: SideIdx,
    },
    /// Two sides cross.
    #[error("side {first} crosses side {second} near ({x:.6}, {y:.6})")]
    SidesCross {
        /// The earlier side.
        first: SideIdx,
        /// The later side.
        second: SideIdx,
        /// x of the crossing.
        x: f64,
        /// y of the crossing.
        y: f64,
    },
    /// Two sides run over the same stretch in the same direction.
    #[error("sides {first} and {second} run over one another in the same direction")]
    SidesOverlap {
        /// The earlier side.
        first: SideIdx,
        /// The later side.
        second: SideIdx,
    },
    /// Two sides retrace one another and the section would be between them.
    #[error(
        "sides {first} and {second} retrace one another with no section on their left; a wall of no thickness must stand inside the section"
    )]
    NoWidth {
        /// The earlier side.
        first: SideIdx,
        /// The later side.
        second: SideIdx,
    },
    /// The outline turns straight back and the section would be inside the spike.
    #[error(
        "the outline turns straight back at vertex {vertex}, where the section has no width; a wall of no thickness must stand inside the section"
    )]
    Spike {
        /// The tip.
        vertex: VertexIdx,
    },
    /// Two vertices lie at one point without a wall of no thickness between them.
    #[error(
        "vertices {first} and {second} are the same point; an outline may meet itself only along a wall of no thickness"
    )]
    VerticesTouch {
        /// The earlier vertex.
        first: VertexIdx,
        /// The later vertex.
        second: VertexIdx,
    },
    /// A vertex lies on a side that is not its own, without a wall of no thickness.
    #[error(
        "vertex {vertex} lies on side {side}; an outline may meet itself only along a wall of no thickness"
    )]
    VertexOnSide {
        /// The vertex.
        vertex: VertexIdx,
        /// The side on which it lies.
        side: SideIdx,
    },
    /// Other sides run off to infinity between the two sides of a vertex at infinity.
    #[error(
        "at vertex {vertex} the section should fill the headings from {arriving} to {leaving} degrees, but other sides run off between them; the section must be on the left of every side"
    )]
    CrowdedAtInfinity {
        /// The vertex at infinity.
        vertex: VertexIdx,
        /// Heading of the arriving side.
        arriving: f64,
        /// Heading of the leaving side.
        leaving: f64,
    },
    /// Equal headings with the section on the wrong side of them.
    #[error(
        "both sides of vertex {vertex} run off toward {heading} degrees, which makes its angle {alpha} π, but as the sides lie it is {needed} π; the section must be on the left of every side"
    )]
    WrongSideAtInfinity {
        /// The vertex at infinity.
        vertex: VertexIdx,
        /// The common heading.
        heading: f64,
        /// The angle that the headings say, in units of π.
        alpha: f64,
        /// The angle that the sides need, in units of π.
        needed: f64,
    },
    /// The interior angles do not close the outline.
    #[error(
        "the interior angles add up to {sum:.6} π and should add up to {needed} π; the section must be on the left of every side"
    )]
    AnglesDoNotAddUp {
        /// Their sum, in units of π.
        sum: f64,
        /// The sum of a closed outline, in units of π.
        needed: f64,
    },
    /// A finite vertex without an opening.
    #[error("the interior angle at vertex {vertex} is zero")]
    ZeroAngle {
        /// The vertex.
        vertex: VertexIdx,
    },
    /// Nothing is enclosed.
    #[error("the outline encloses an area of {area:e}, nothing beside the square of its size {size:e}")]
    ZeroArea {
        /// The enclosed area.
        area: f64,
        /// Size of the section.
        size: f64,
    },
}

/// Everything that was found wrong with an outline; never empty. A gross fault can hide finer ones.
#[derive(Debug, Clone, PartialEq, Error)]
pub struct OutlineFaults(pub Vec<OutlineFault>);

impl OutlineFaults {
    /// How many faults the message lists before it only counts them.
    const LISTED: usize = 20;
}

impl fmt::Display for OutlineFaults {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, fault) in self.0.iter().take(Self::LISTED).enumerate() {
            if i > 0 {
                f.write_str("; ")?;
            }
            fault.fmt(f)?;
        }
        match self.0.len().checked_sub(Self::LISTED) {
            None | Some(0) => Ok(()),
            Some(more) => write!(f, "; and {more} more"),
        }
    }
}
