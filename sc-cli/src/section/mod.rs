//! From a section file to a section of `sc-core`, with every fault of the core at its place in the file.

mod objection;
mod places;

pub use objection::{Objection, ProbeFault, Remark};
pub use places::{Place, PlacedProbe};

use crate::input::{
    Condition, Datum, Fault, FaultKind, Material, NamedSide, Placed, SectionFile, Span, read_section_with,
};
use objection::{at_conditions, at_fabric, at_outline, remark_on_conditions, remark_on_outline};
use sc_core::outline::{Containment, Outline, Point, Stretch};
use sc_core::potential::Section;

/// A section ready to be solved, with the file it came from.
#[derive(Debug, Clone)]
pub struct Prepared {
    /// What the file says.
    pub file: SectionFile,
    /// The outline as it is in the ground.
    pub outline: Outline,
    /// The stretch that makes a layered fabric conduct alike in all directions.
    pub stretch: Stretch,
    /// The section in stretched coordinates: one electrode for each held name, in the order of `[sides]`. Its outline
    /// has the walking indices of [`Prepared::outline`].
    pub section: Section,
    /// The names of the electrodes.
    pub electrodes: Vec<String>,
    /// The places where values are wanted.
    pub probes: Vec<PlacedProbe>,
    /// Remarks that do not stop the work.
    pub remarks: Vec<Fault<Remark>>,
}

impl Prepared {
    /// The name of a side (walking index).
    pub fn side_name(&self, side: usize) -> Option<&str> {
        let given = self.outline.given_side(side).0;
        self.file.outline.get(given)?.side.as_ref().map(|s| s.value.as_str())
    }

    /// A side in words: its name in quotes, or the vertex it leaves.
    pub fn side_words(&self, side: usize) -> String {
        side_words(&self.file, &self.outline, side)
    }

    /// The sides (walking indices) of a name.
    pub fn sides_named<'a>(&'a self, name: &'a str) -> impl Iterator<Item = usize> + 'a {
        (0..self.outline.n()).filter(move |&k| self.side_name(k) == Some(name))
    }

    /// The names of each group of electrodes, in the order of the conductance matrix.
    pub fn groups(&self) -> Vec<Vec<&str>> {
        let mut groups = vec![Vec::new(); self.section.n_groups()];
        for (electrode, name) in self.electrodes.iter().enumerate() {
            groups[self.section.group_of(electrode)].push(name.as_str());
        }
        groups
    }

    /// The distance along a side of the stretched outline, from that along the true one.
    pub fn stretched_distance(&self, side: usize, s: f64) -> f64 {
        converted_distance(&self.outline, self.section.outline(), side, s, self.lengthening(side))
    }

    /// The distance along a side of the true outline, from that along the stretched one.
    pub fn true_distance(&self, side: usize, s: f64) -> f64 {
        converted_distance(self.section.outline(), &self.outline, side, s, 1.0 / self.lengthening(side))
    }

    /// The factor of lengths along a side.
    pub fn lengthening(&self, side: usize) -> f64 {
        self.stretch.lengthening(self.outline.side_direction(side))
    }

    /// The place in the stretched section of one in the true section.
    pub fn stretched_place(&self, place: Place) -> Place {
        match place {
            Place::OnSide { side, s } => Place::OnSide { side, s: self.stretched_distance(side, s) },
            Place::At(z) if self.stretch.is_none() => Place::At(z),
            Place::At(z) => {
                let image = self.stretch.to_stretched(z);
                // Rounding of the stretch can carry a point just inside over the boundary.
                if self.section.outline().contains(image) == Containment::Outside {
                    let nearest = self.outline.nearest_boundary(z);
                    return Place::OnSide {
                        side: nearest.side,
                        s: self.stretched_distance(nearest.side, nearest.s),
                    };
                }
                Place::At(image)
            }
        }
    }

    /// The point of a place in the true section.
    pub fn point_of(&self, place: Place) -> Point {
        match place {
            Place::At(z) => z,
            Place::OnSide { side, s } => self.outline.place(side, s),
        }
    }
}

/// A distance along a side from one outline to another, in which lengths along it are multiplied by a factor; the ends
/// of the side stay its ends.
fn converted_distance(from: &Outline, to: &Outline, side: usize, s: f64, factor: f64) -> f64 {
    let ((low, high), (first, last)) = (from.side_range(side), to.side_range(side));
    if s <= low {
        first
    } else if s >= high {
        last
    } else {
        (s * factor).clamp(first, last)
    }
}

/// The stretch of a material.
fn stretch_of(file: &SectionFile) -> Result<Stretch, Vec<Fault<Objection>>> {
    match file.material {
        Some(Placed { value: Material::Layered(f), span }) => {
            f.fabric().stretch().map_err(|fault| vec![at_fabric(fault, span)])
        }
        _ => Ok(Stretch::NONE),
    }
}

fn side_words(file: &SectionFile, outline: &Outline, side: usize) -> String {
    let given = outline.given_side(side).0;
    match file.outline.get(given).and_then(|v| v.side.as_ref()) {
        Some(name) => format!("\"{}\"", name.value),
        None => format!("the side of vertex {given}"),
    }
}

/// Reads a section file and makes a section of it; `set` gives other values to names under `let`.
///
/// # Errors
/// Everything that is wrong with the file, in the order of its lines. What a later stage would find is hidden
/// by the faults of an earlier one: reading, outline, conditions, probes.
pub fn prepare(text: &str, set: &[(String, f64)]) -> Result<Prepared, Vec<Fault<Objection>>> {
    let read = read_section_with(text, set)
        .map_err(|faults| faults.into_iter().map(|f| f.mapped(Objection::from)).collect::<Vec<_>>())?;
    let mut remarks: Vec<Fault<Remark>> =
        read.warnings.into_iter().map(|w| w.mapped(Remark::Reading)).collect();
    let file = read.value;
    compose(file, &mut remarks)
        .map(|(file, composed)| {
            sort_and_locate(&mut remarks, text);
            let Composed { outline, stretch, section, electrodes, probes } = composed;
            Prepared { file, outline, stretch, section, electrodes, probes, remarks }
        })
        .map_err(|mut faults| {
            sort_and_locate(&mut faults, text);
            faults
        })
}

struct Composed {
    outline: Outline,
    stretch: Stretch,
    section: Section,
    electrodes: Vec<String>,
    probes: Vec<PlacedProbe>,
}

fn compose(
    file: SectionFile,
    remarks: &mut Vec<Fault<Remark>>,
) -> Result<(SectionFile, Composed), Vec<Fault<Objection>>> {
    let vertices: Vec<_> = file.outline.iter().map(|v| v.vertex).collect();
    let outline = match Outline::new(&vertices) {
        Ok(outline) => outline,
        Err(faults) => return Err(faults.0.into_iter().map(|f| at_outline(f, &file)).collect()),
    };
    remarks.extend(outline.warnings.iter().map(|&w| remark_on_outline(w, &file)));
    let outline = outline.value;
    let near = (0..outline.n()).find_map(|k| outline.point(k)).unwrap_or_default();
    let stretch = stretch_of(&file)?.about(near);
    let span = file.material.as_ref().map_or_else(Span::default, |m| m.span);
    let stretched = outline.stretched(&stretch).map_err(|fault| vec![at_fabric(fault, span)])?;
    let held = held_sides(&file)?;
    let electrode_of = |name: &Placed<String>| held.iter().position(|(s, _)| s.name.value == name.value);
    let electrodes: Vec<Option<usize>> =
        file.outline.iter().map(|v| v.side.as_ref().and_then(electrode_of)).collect();
    let names: Vec<Placed<String>> = held.iter().map(|(s, _)| s.name.clone()).collect();
    let levels: Vec<f64> = held.iter().map(|(_, level)| *level).collect();
    let (section, warnings) = Section::new(stretched, &electrodes, &levels)
        .map_err(|faults| faults.into_iter().map(|f| at_conditions(f, &file, &names)).collect::<Vec<_>>())?;
    remarks.extend(warnings.into_iter().map(|w| remark_on_conditions(w, &file)));
    let probes = places::place_probes(&file, &outline)?;
    let electrodes = names.into_iter().map(|n| n.value).collect();
    Ok((file, Composed { outline, stretch, section, electrodes, probes }))
}

/// The held names with their levels, in the order of `[sides]`.
fn held_sides(file: &SectionFile) -> Result<Vec<(&NamedSide, f64)>, Vec<Fault<Objection>>> {
    let mut faults = Vec::new();
    let mut refuse = |feature, span: Span| {
        faults.push(Fault::new(Objection::from(FaultKind::NotYet { feature }), span));
    };
    let mut held = Vec::new();
    for side in &file.sides {
        match &side.condition.value {
            Condition::Held(Placed { value: Datum::Constant(level), .. }) => held.push((side, *level)),
            Condition::Held(datum) => refuse("a held value that varies", datum.span),
            Condition::Inflow(datum) => refuse("a prescribed `inflow`", datum.span),
            Condition::Surface(_) => refuse("a film (`surface`)", side.condition.span),
            Condition::Insulated => {}
        }
    }
    if faults.is_empty() { Ok(held) } else { Err(faults) }
}

fn sort_and_locate<K: std::fmt::Display>(faults: &mut [Fault<K>], text: &str) {
    faults.sort_by_key(|f| f.span.map_or((0, 0), |s| (s.start, s.end)));
    faults.iter_mut().for_each(|f| f.locate(text));
}
