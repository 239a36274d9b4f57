//! A section as its file describes it: plain values, each with its place in the file.

use super::expression::Formula;
use super::place::{Placed, Span};
use super::trade::Trade;
use sc_core::outline::{Fabric, Point, Vertex};

/// Everything a section file says.
///
/// Coordinates and distances are in the section's `length` unit, with the very bits of a number that was written in
/// that unit; all else is in the units of the table in [`trade`](super::trade).
#[derive(Debug, Clone, PartialEq)]
pub struct SectionFile {
    /// The title, if there is one.
    pub title: Option<Placed<String>>,
    /// What the section is about.
    pub trade: Trade,
    /// The unit of every coordinate.
    pub length: LengthUnit,
    /// Which side of the outline is the section.
    pub region: Placed<Region>,
    /// The names under `let` in the order of the file.
    pub names: Vec<NamedNumber>,
    /// The material, if one is given.
    pub material: Option<Placed<Material>>,
    /// The outline in walking order: side `k` leaves vertex `k`.
    pub outline: Vec<OutlineVertex>,
    /// The inner polygon of a ring section, empty if there is none.
    pub within: Vec<OutlineVertex>,
    /// The conditions, one per name under `[sides]`, in the order of the file.
    pub sides: Vec<NamedSide>,
    /// The probes in the order of the file.
    pub probes: Vec<Probe>,
}

/// The unit of the coordinates.
#[derive(Debug, Clone, PartialEq)]
pub struct LengthUnit {
    /// How the file writes it.
    pub name: String,
    /// Its size in metres.
    pub metres: f64,
}

/// Which side of the outline is the section.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Region {
    /// The inside.
    #[default]
    Inside,
    /// The plane outside the outline.
    Outside,
}

/// A name under `let`.
#[derive(Debug, Clone, PartialEq)]
pub struct NamedNumber {
    /// The name, placed at its key.
    pub name: Placed<String>,
    /// The value, in its unit.
    pub value: f64,
    /// The unit; `None` for a plain number.
    pub unit: Option<String>,
}

/// The material of the section.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Material {
    /// Hydraulic or thermal conductivity (in the trade `plain`: a number), above zero.
    Conductivity(f64),
    /// A layered fabric.
    Layered(LayeredFabric),
    /// Relative permittivity, above zero.
    Permittivity(f64),
    /// Resistance of a square of film in ohm, above zero.
    SheetResistance(f64),
}

/// A conductivity that differs along and across the layers.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LayeredFabric {
    /// Along the layers, above zero.
    pub along: f64,
    /// Across the layers, above zero.
    pub across: f64,
    /// Direction of the layers, degrees counter-clockwise from the x axis.
    pub dip: f64,
}

impl LayeredFabric {
    /// The fabric as the core takes it.
    pub fn fabric(&self) -> Fabric {
        Fabric { along: self.along, across: self.across, dip: self.dip }
    }

    /// The conductivity of the stretched section, `√(along · across)`.
    pub fn conductivity(&self) -> f64 {
        self.fabric().conductivity()
    }
}

/// A vertex of the outline, and the name of the side that leaves it.
#[derive(Debug, Clone, PartialEq)]
pub struct OutlineVertex {
    /// The vertex; headings in degrees as the file gives them.
    pub vertex: Vertex,
    /// The name of the side that leaves it, placed at the text of the name.
    pub side: Option<Placed<String>>,
    /// The whole entry.
    pub span: Span,
}

/// A name under `[sides]` and the condition on the sides of that name.
#[derive(Debug, Clone, PartialEq)]
pub struct NamedSide {
    /// The name, placed at its key.
    pub name: Placed<String>,
    /// The condition, placed at its value.
    pub condition: Placed<Condition>,
}

/// What is known on a side.
#[derive(Debug, Clone, PartialEq)]
pub enum Condition {
    /// The potential.
    Held(Placed<Datum>),
    /// The flux density into the section.
    Inflow(Placed<Datum>),
    /// A film between the section and surroundings of a given level.
    Surface(Surface),
    /// No flux.
    Insulated,
}

/// A surface film.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Surface {
    /// The film.
    pub film: Placed<Film>,
    /// The level of the surroundings.
    pub facing: Placed<f64>,
}

/// How a film is described.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Film {
    /// Flux density per difference of level, above zero.
    Transfer(f64),
    /// Difference of level per flux density, above zero.
    Resistance(f64),
}

/// A value given along a side.
#[derive(Debug, Clone, PartialEq)]
pub enum Datum {
    /// The same everywhere.
    Constant(f64),
    /// A formula in `x`, `y` and `s`.
    Varying(Formula),
    /// Pairs of `s` and a value, `s` rising; straight between them.
    Table(Vec<[f64; 2]>),
}

/// A place where values are wanted.
#[derive(Debug, Clone, PartialEq)]
pub struct Probe {
    /// Its name, if it has one.
    pub name: Option<Placed<String>>,
    /// The place.
    pub place: ProbePlace,
    /// The whole entry.
    pub span: Span,
}

/// The place of a probe.
#[derive(Debug, Clone, PartialEq)]
pub enum ProbePlace {
    /// A point.
    Point {
        /// Where.
        at: Placed<Point>,
        /// The side it lies on, which tells the faces of a wall apart.
        side: Option<Placed<String>>,
    },
    /// Points spread evenly over the sides of a name.
    Along {
        /// The name.
        side: Placed<String>,
        /// How many points on each side of that name, ends included.
        count: usize,
        /// Distance at which they begin, if not at the start.
        from: Option<Placed<f64>>,
        /// Distance at which they end, if not at the end.
        to: Option<Placed<f64>>,
    },
}

impl SectionFile {
    /// The condition on the sides of a name; a name not listed is insulated.
    pub fn condition(&self, side: &str) -> &Condition {
        self.sides.iter().find(|s| s.name.value == side).map_or(&Condition::Insulated, |s| &s.condition.value)
    }

    /// Where vertex `k` stands in the file, the vertices of `within` counted after those of the outline.
    pub fn vertex_span(&self, k: usize) -> Option<Span> {
        self.outline.iter().chain(&self.within).nth(k).map(|v| v.span)
    }

    /// Where side `k` stands in the file: its name, or the vertex it leaves if it has none.
    pub fn side_span(&self, k: usize) -> Option<Span> {
        let vertex = self.outline.iter().chain(&self.within).nth(k)?;
        Some(vertex.side.as_ref().map_or(vertex.span, |s| s.span))
    }

    /// Where the condition of a name stands in the file, if it is listed.
    pub fn condition_span(&self, side: &str) -> Option<Span> {
        self.sides.iter().find(|s| s.name.value == side).map(|s| s.name.span.join(s.condition.span))
    }

    /// The names of the sides, each once, in walking order.
    pub fn side_names(&self) -> Vec<&str> {
        let mut names: Vec<&str> = Vec::new();
        for side in self.outline.iter().chain(&self.within).filter_map(|v| v.side.as_ref()) {
            if !names.contains(&side.value.as_str()) {
                names.push(&side.value);
            }
        }
        names
    }
}
