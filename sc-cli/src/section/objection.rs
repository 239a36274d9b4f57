//! What the core objects to, at its place in the file and with what to change.

use crate::input::{Fault, FaultKind, Placed, SectionFile, Span, Warning};
use crate::outcome::Status;
use sc_core::outline::{FabricFault, OutlineFault, OutlineWarning, SideIdx, VertexIdx};
use sc_core::potential::{SectionFault, SectionWarning};
use thiserror::Error;

/// Why a section file gives no section.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum Objection {
    /// A rule of the section file.
    #[error(transparent)]
    Reading(#[from] FaultKind),
    /// A rule of the outline.
    #[error(transparent)]
    Outline(#[from] OutlineFault),
    /// A rule of the conditions.
    #[error(transparent)]
    Conditions(#[from] SectionFault),
    /// A layered fabric that cannot be answered.
    #[error(transparent)]
    Fabric(#[from] FabricFault),
    /// A place where no value can be given.
    #[error(transparent)]
    Probe(#[from] ProbeFault),
}

impl Objection {
    /// The exit status it leads to: a file that is wrong, or one that asks for what cannot be answered.
    pub fn status(&self) -> Status {
        match self {
            Self::Probe(_) | Self::Fabric(_) => Status::Unanswered,
            _ => Status::Wrong,
        }
    }
}

/// Why there is no value at a probe.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum ProbeFault {
    /// The point is not in the closed section.
    #[error("{probe} is at ({x}, {y}), outside the section and {distance} from it")]
    Outside {
        /// The probe in words.
        probe: String,
        /// Its x.
        x: f64,
        /// Its y.
        y: f64,
        /// How far outside, with the unit.
        distance: String,
    },
    /// The point is not on the side it names.
    #[error("{probe} is at ({x}, {y}), {distance} from the side \"{side}\"")]
    OffSide {
        /// The probe in words.
        probe: String,
        /// Its x.
        x: f64,
        /// Its y.
        y: f64,
        /// The side it names.
        side: String,
        /// How far from it, with the unit.
        distance: String,
    },
    /// The point lies on a wall of no thickness, where the faces have different answers.
    #[error("{probe} is at ({x}, {y}), on a wall of no thickness, whose faces have different answers")]
    TwoFaces {
        /// The probe in words.
        probe: String,
        /// Its x.
        x: f64,
        /// Its y.
        y: f64,
    },
    /// A distance that is not on the side.
    #[error("{probe} runs from {from} to {to}, and {side} from {low} to {high}")]
    OffEnd {
        /// The probe in words.
        probe: String,
        /// Where it begins.
        from: f64,
        /// Where it ends.
        to: f64,
        /// The side in words.
        side: String,
        /// The least distance on the side.
        low: f64,
        /// The largest distance on the side.
        high: f64,
    },
    /// More points than can be meant.
    #[error("with {probe} the file asks for more than {limit} points")]
    TooMany {
        /// The probe in words.
        probe: String,
        /// How many are allowed.
        limit: usize,
    },
    /// A side to infinity without the stretch that is wanted.
    #[error("{probe} runs along {side}, which goes to infinity, and does not say how far")]
    Endless {
        /// The probe in words.
        probe: String,
        /// The side in words.
        side: String,
    },
}

/// A remark on a section that can be answered.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum Remark {
    /// On the file.
    #[error(transparent)]
    Reading(Warning),
    /// On the outline.
    #[error(transparent)]
    Outline(OutlineWarning),
    /// On the conditions.
    #[error(transparent)]
    Conditions(SectionWarning),
}

/// The place and the hint of an outline fault.
pub(super) fn at_outline(fault: OutlineFault, file: &SectionFile) -> Fault<Objection> {
    use OutlineFault as F;
    let place = |vertex: VertexIdx| file.vertex_span(vertex.0);
    let (vertex, side): (Option<Span>, _) = (None, |s: SideIdx| file.side_span(s.0));
    let (span, other, hint) = match fault {
        F::CoordinateNotFinite { vertex, .. } | F::CoordinateTooLarge { vertex, .. } => {
            (place(vertex), None, "check the number and the unit in `length`")
        }
        F::HeadingNotFinite { vertex, .. } | F::HeadingTooLarge { vertex, .. } => {
            (place(vertex), None, "write a heading in degrees between -360 and 720")
        }
        F::TooFewVertices { .. } => (first(file), None, "add the missing vertices"),
        F::NoFiniteVertex { .. } => (first(file), None, "add a vertex with `at = [x, y]`"),
        F::TooSmall { .. } => (first(file), None, "choose a smaller unit in `length` and larger numbers"),
        F::TooFarFromOrigin { .. } => (first(file), None, "subtract a common offset from the coordinates"),
        F::NeighboursCoincide { first, second, .. } => {
            (place(second), place(first), "take one of the two vertices out")
        }
        F::SideNowhere { side: s } => (side(s), None, "put a vertex with `at = [x, y]` between the two"),
        F::SidesCross { first, second, .. } => (
            side(second),
            side(first),
            "list the vertices in order around the section, and correct the one that is out of place",
        ),
        F::SidesOverlap { first, second } => {
            (side(second), side(first), "move a vertex so that the sides part")
        }
        F::NoWidth { first, second } => {
            (side(second), side(first), "give the stretch between the two sides a width")
        }
        F::Spike { vertex } => (place(vertex), None, "take the tip out of the list"),
        F::VerticesTouch { first, second } => (place(second), place(first), "move one of the two vertices"),
        F::VertexOnSide { vertex, side: s } => (place(vertex), side(s), "move the vertex off the side"),
        F::CrowdedAtInfinity { vertex, .. } | F::WrongSideAtInfinity { vertex, .. } => {
            (place(vertex), None, "check the headings, and that the list runs with the section on its left")
        }
        F::AnglesDoNotAddUp { .. } => {
            (first(file), None, "list the vertices in order with the section on the left")
        }
        F::ZeroAngle { vertex } => (place(vertex), None, "move the vertex so that its two sides part"),
        F::ZeroArea { .. } => (first(file), None, "check the coordinates: the section has no inside"),
        _ => (vertex, None, "check the list of vertices"),
    };
    let mut placed = Fault::new(Objection::from(fault), span.or_else(|| first(file))).hint(hint);
    if let Some(other) = other {
        placed = placed.related(other, "the other");
    }
    placed
}

/// The place of a fault of the fabric: the material.
pub(super) fn at_fabric(fault: FabricFault, material: Span) -> Fault<Objection> {
    let hint = match fault {
        FabricFault::Dip { .. } => "write the dip in degrees between -360 and 360",
        _ => "check the units of `along` and `across`",
    };
    Fault::new(Objection::from(fault), material).hint(hint)
}

/// The place of a fault in the conditions.
pub(super) fn at_conditions(
    fault: SectionFault,
    file: &SectionFile,
    electrodes: &[Placed<String>],
) -> Fault<Objection> {
    let name = |e: usize| electrodes.get(e).and_then(|n| file.condition_span(&n.value));
    let (span, hint) = match fault {
        SectionFault::UnknownElectrode { side, .. } => (file.side_span(side.0), "hold the side at a number"),
        SectionFault::Level { electrode } => (name(electrode), "hold it at a finite number"),
        SectionFault::NoSide { electrode } => {
            (name(electrode), "give the name to a side of the outline with `side`")
        }
        _ => (first(file), "hold a side: [sides] \"name\" = { held = ... }"),
    };
    Fault::new(Objection::from(fault), span).hint(hint)
}

/// The place of a remark on the outline.
pub(super) fn remark_on_outline(warning: OutlineWarning, file: &SectionFile) -> Fault<Remark> {
    let (span, other) = match warning {
        OutlineWarning::VertexMovedToVertex { vertex, onto, .. } => {
            (file.vertex_span(vertex.0), file.vertex_span(onto.0))
        }
        OutlineWarning::VertexMovedToSide { vertex, onto, .. } => {
            (file.vertex_span(vertex.0), file.side_span(onto.0))
        }
        _ => (first(file), None),
    };
    let remark = Fault::new(Remark::Outline(warning), span);
    match other {
        Some(other) => remark.related(other, "onto this"),
        None => remark,
    }
}

/// The place of a remark on the conditions.
pub(super) fn remark_on_conditions(warning: SectionWarning, file: &SectionFile) -> Fault<Remark> {
    let (span, other) = match warning {
        SectionWarning::TouchingLevels { first, second } => {
            (file.side_span(second.0), file.side_span(first.0))
        }
        _ => (file.sides.first().map(|s| s.name.span.join(s.condition.span)), None),
    };
    let remark = Fault::new(Remark::Conditions(warning), span);
    match other {
        Some(other) => remark.related(other, "the other"),
        None => remark,
    }
}

fn first(file: &SectionFile) -> Option<Span> {
    file.outline.first().map(|v| v.span)
}
