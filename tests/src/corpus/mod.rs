//! Ten thousand sections made here, the same on every machine: named families of bounded simple polygons of 5 to
//! 200 sides, sections with walls of no thickness, and sections that reach infinity.
//!
//! Every shape is valid by the way it is made, and none is discarded. A case is found again by its family and number.

pub mod check;
mod draw;
mod electrodes;
mod elongated;
mod ground;
pub mod outcome;
mod rectilinear;
mod scattered;
pub mod table;
mod unbounded;

use num_complex::Complex64;
use sc_core::outline::Vertex;
use serde::{Deserialize, Serialize};

use crate::held_section::{HeldSection, finite};
use draw::Draw;

/// A kind of section.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
pub enum Family {
    /// Closed paths through random points, untangled.
    Random,
    /// Teeth as sharp as 0.01π on a regular polygon.
    Jagged,
    /// Cells grown on a grid of uneven lines.
    Rectilinear,
    /// Far and near corners in turn.
    Star,
    /// A bar with teeth.
    Comb,
    /// Wound channels.
    Spiral,
    /// Thin bodies with sharp tips.
    Needle,
    /// Channels up to 300 times as long as wide, straight, folded or zigzag.
    Channel,
    /// Surveyed beds under a flat top.
    Bed,
    /// Boxes with walls of no thickness.
    Walled,
    /// Sections with vertices at infinity.
    Unbounded,
}

impl Family {
    /// All families, with the number of their cases.
    pub const ALL: [(Family, usize); 11] = [
        (Family::Random, 1600),
        (Family::Jagged, 900),
        (Family::Rectilinear, 1100),
        (Family::Star, 800),
        (Family::Comb, 800),
        (Family::Spiral, 700),
        (Family::Needle, 700),
        (Family::Channel, 800),
        (Family::Bed, 900),
        (Family::Walled, 900),
        (Family::Unbounded, 800),
    ];

    /// The name in the table.
    #[must_use]
    pub fn name(self) -> &'static str {
        match self {
            Family::Random => "random",
            Family::Jagged => "jagged",
            Family::Rectilinear => "rectilinear",
            Family::Star => "star",
            Family::Comb => "comb",
            Family::Spiral => "spiral",
            Family::Needle => "needle",
            Family::Channel => "channel",
            Family::Bed => "bed",
            Family::Walled => "walled",
            Family::Unbounded => "unbounded",
        }
    }

    /// The family of a name.
    #[must_use]
    pub fn named(name: &str) -> Option<Family> {
        Family::ALL.iter().map(|&(family, _)| family).find(|family| family.name() == name)
    }

    /// The number of its cases.
    #[must_use]
    pub fn count(self) -> usize {
        Family::ALL.iter().find(|(family, _)| *family == self).map_or(0, |&(_, count)| count)
    }
}

/// A generated section.
#[derive(Debug, Clone)]
pub struct Case {
    /// Its kind.
    pub family: Family,
    /// Its number within the family.
    pub index: usize,
    /// Vertices, electrodes and levels.
    pub section: HeldSection,
}

impl Case {
    /// Family and number.
    #[must_use]
    pub fn name(&self) -> String {
        format!("{}/{}", self.family.name(), self.index)
    }

    /// Whether there are two held runs and nothing else is held.
    #[must_use]
    pub fn has_two_runs(&self) -> bool {
        self.section.levels.len() == 2
    }

    /// The points, if all vertices are finite and no two are the same: what methods for plain polygons can take.
    #[must_use]
    pub fn plain_polygon(&self) -> Option<Vec<Complex64>> {
        let points: Vec<Complex64> =
            self.section.vertices.iter().map(Vertex::point).collect::<Option<_>>()?;
        let twice = (0..points.len()).any(|k| points[..k].contains(&points[k]));
        (!twice).then_some(points)
    }
}

/// The case of a family and a number.
#[must_use]
pub fn case(family: Family, index: usize) -> Case {
    make(family, index, true)
}

/// The case as it was drawn, before it was turned, scaled and moved: a similar section with walls along the axes.
#[must_use]
pub fn case_as_drawn(family: Family, index: usize) -> Case {
    make(family, index, false)
}

fn make(family: Family, index: usize, placed: bool) -> Case {
    let number = Family::ALL.iter().position(|(other, _)| *other == family).unwrap_or(0);
    let mut draw = Draw::new(number, index);
    let n = draw.log_whole(5, 200);
    let mut vertices = match family {
        Family::Random => finite(&scattered::untangled(&mut draw, n)),
        Family::Jagged => finite(&scattered::jagged(&mut draw, n)),
        Family::Rectilinear => finite(&rectilinear::grown(&mut draw, n.min(196))),
        Family::Star => finite(&scattered::star(&mut draw, n)),
        Family::Comb => finite(&rectilinear::comb(&mut draw, n)),
        Family::Spiral => finite(&elongated::spiral(&mut draw, n)),
        Family::Needle => finite(&elongated::needle(&mut draw, n)),
        Family::Channel => finite(&elongated::channel(&mut draw, n)),
        Family::Bed => finite(&ground::bed(&mut draw, n)),
        Family::Walled => finite(&ground::walled(&mut draw, n)),
        Family::Unbounded => unbounded::unbounded(&mut draw, n),
    };
    let drawn = vertices.clone();
    place(&mut draw, &mut vertices);
    if !placed {
        vertices = drawn;
    }
    let start = draw.index(vertices.len());
    vertices.rotate_left(start);
    let (electrodes, levels) = electrodes::pick(&mut draw, vertices.len());
    Case { family, index, section: HeldSection { vertices, electrodes, levels } }
}

/// Half of the sections are turned, scaled and moved.
fn place(draw: &mut Draw, vertices: &mut [Vertex]) {
    if draw.chance(0.5) {
        return;
    }
    let degrees = draw.between(0.0, 360.0);
    let factor = Complex64::from_polar(draw.log_between(1e-3, 1e3), degrees.to_radians());
    let origin = Complex64::new(draw.between(-2.0, 2.0), draw.between(-2.0, 2.0));
    for vertex in vertices {
        *vertex = match *vertex {
            Vertex::At(point) => Vertex::At(factor * (point + origin)),
            Vertex::Away { arriving, leaving } => {
                Vertex::Away { arriving: arriving + degrees, leaving: leaving + degrees }
            }
        };
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use sc_core::outline::Outline;

    #[test]
    fn there_are_ten_thousand_cases() {
        assert_eq!(Family::ALL.iter().map(|&(_, count)| count).sum::<usize>(), 10_000);
    }

    #[test]
    fn every_shape_is_a_valid_outline_of_five_to_two_hundred_sides() {
        let mut seen = 0;
        for (family, count) in Family::ALL {
            for index in 0..count {
                let case = case(family, index);
                let n = case.section.vertices.len();
                assert!(5 <= n && n <= 200, "{}: {n} sides", case.name());
                if let Err(faults) = Outline::new(&case.section.vertices) {
                    panic!("{}: {faults}", case.name());
                }
                seen += 1;
            }
        }
        assert_eq!(seen, 10_000);
    }

    #[test]
    fn a_case_is_the_same_each_time_it_is_made() {
        for (family, count) in Family::ALL {
            let (first, again) = (case(family, count - 1), case(family, count - 1));
            assert_eq!(first.section.vertices, again.section.vertices);
            assert_eq!(first.section.electrodes, again.section.electrodes);
        }
    }
}
