//! `draw`: the section with its conditions, or its flow net, as a picture.

use super::{refused, source};
use crate::arguments::{DrawArguments, FigureKind};
use crate::destination::write_file;
use crate::figure::{
    Drawing, FabricView, RenderError, Sheet, Subject, Words, net_figure, round_drops, section_figure,
};
use crate::input::{Material, Placed};
use crate::outcome::{Outcome, Status};
use crate::section::{Place, Prepared, prepare};
use sc_core::answers::{FlowNetOptions, Solution, SolveError, SolveOptions};
use std::path::Path;

/// A kind of picture file.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Format {
    /// Scalable, with texts as texts.
    Svg,
    /// A bitmap in shades of grey.
    Png,
}

impl Format {
    /// The format of a file by the end of its name.
    pub fn of(path: &Path) -> Option<Format> {
        match path.extension()?.to_str()?.to_ascii_lowercase().as_str() {
            "svg" => Some(Format::Svg),
            "png" => Some(Format::Png),
            _ => None,
        }
    }

    fn written(self, drawing: &Drawing) -> Result<Vec<u8>, RenderError> {
        match self {
            Format::Svg => drawing.to_svg().map(String::into_bytes),
            Format::Png => drawing.to_png(),
        }
    }
}

/// Runs the command.
pub fn run(arguments: &DrawArguments) -> Outcome {
    let wrong = |why: String| Outcome::failed(Status::Wrong, format!("error: {why}\n"));
    let Some(format) = Format::of(&arguments.out) else {
        let out = arguments.out.display();
        return wrong(format!("{out} names no kind of picture: end it in .svg or .png"));
    };
    let (name, text) = match source(&arguments.section.file) {
        Ok(read) => read,
        Err(outcome) => return outcome,
    };
    let prepared = match prepare(&text, &arguments.section.set) {
        Ok(prepared) => prepared,
        Err(faults) => return refused(&name, &text, &faults),
    };
    if arguments.stretched && prepared.stretch.is_none() {
        return wrong(format!("--stretched: {name} has no layered fabric, so nothing is stretched"));
    }
    let view = if arguments.stretched { Coordinates::Stretched } else { Coordinates::True };
    let sheet =
        Sheet { width: arguments.width, vertex_numbers: arguments.vertex_numbers, ..Sheet::default() };
    let drawn = match arguments.figure {
        FigureKind::Section => Ok(section_figure(&subject(&prepared, view), &sheet)),
        FigureKind::Net => net_of(&prepared, view, arguments.drops, &sheet),
    };
    let drawing = match drawn {
        Ok(drawing) => drawing,
        Err(e) => {
            let message = format!("error: {name} was understood and cannot be answered: {e}\n");
            return Outcome::failed(Status::Unanswered, message);
        }
    };
    let written = format
        .written(&drawing)
        .map_err(|e| e.to_string())
        .and_then(|bytes| write_file(&arguments.out, &bytes, arguments.replace).map_err(|e| e.to_string()));
    match written {
        Ok(()) => Outcome::done(""),
        Err(why) => wrong(why),
    }
}

/// In which coordinates a section with a layered fabric is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Coordinates {
    /// As it is in the ground.
    True,
    /// Stretched so that it conducts alike in all directions.
    Stretched,
}

/// The figure of the flow net of a section; without a number of drops, a round one for its shape.
///
/// # Errors
/// [`SolveError`] if the section has no solution.
pub fn net_of(
    prepared: &Prepared,
    view: Coordinates,
    drops: Option<usize>,
    sheet: &Sheet,
) -> Result<Drawing, SolveError> {
    let solution = Solution::solve(prepared.section.clone(), &SolveOptions::default())?;
    let shape_factor = solution.shape_factor();
    let finite = shape_factor.filter(|s| s.value.is_finite()).map(|s| s.value);
    let drops = drops.unwrap_or_else(|| round_drops(finite, prepared.section.range()));
    let mut options = FlowNetOptions { drops, ..FlowNetOptions::default() };
    if view == Coordinates::True {
        // What is near in true coordinates can be far in stretched ones.
        options.reach *= prepared.stretch.largest_factor().powi(2);
    }
    let mut net = solution.flow_net(&options);
    if view == Coordinates::True {
        for line in net.equipotentials.iter_mut().chain(&mut net.flow_lines) {
            line.points.iter_mut().for_each(|z| *z = prepared.stretch.to_true(*z));
        }
    }
    Ok(net_figure(&subject(prepared, view), &net, shape_factor, sheet))
}

/// What a prepared section gives a figure.
pub fn subject(prepared: &Prepared, view: Coordinates) -> Subject<'_> {
    let stretched = view == Coordinates::Stretched;
    let outline = if stretched { prepared.section.outline() } else { &prepared.outline };
    let point = |&place: &Place| {
        let z = prepared.point_of(place);
        if stretched { prepared.stretch.to_stretched(z) } else { z }
    };
    let probes = prepared.probes.iter().flat_map(|probe| {
        // A row of places has its name at the first.
        let places = probe.places.iter().enumerate();
        places.map(move |(i, place)| (probe.name.as_deref().filter(|_| i == 0), point(place)))
    });
    let mut words = Words::of(prepared.file.trade);
    if let Some(Placed { value: Material::SheetResistance(_), .. }) = prepared.file.material {
        words.flow_line = "current line";
    }
    let fabric = match prepared.file.material {
        Some(Placed { value: Material::Layered(layered), .. }) if !prepared.stretch.is_none() => {
            let factors = prepared.stretch.factors();
            Some(FabricView { fabric: layered.fabric(), factors, stretched })
        }
        _ => None,
    };
    let unit = prepared.file.length.name.as_str();
    Subject {
        section: &prepared.section,
        outline,
        fabric,
        title: prepared.file.title.as_ref().map(|t| t.value.as_str()),
        length_unit: if unit == "1" { "" } else { unit },
        words,
        electrodes: &prepared.electrodes,
        probes: probes.collect(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_end_of_the_name_tells_the_format() {
        assert_eq!(Format::of(Path::new("a/net.SVG")), Some(Format::Svg));
        assert_eq!(Format::of(Path::new("net.png")), Some(Format::Png));
        assert_eq!(Format::of(Path::new("net.pdf")), None);
        assert_eq!(Format::of(Path::new("net")), None);
    }
}
