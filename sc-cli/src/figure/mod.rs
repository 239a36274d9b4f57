//! Figures: a section with its conditions, and its flow net, as pages that are written as SVG or PNG.
//!
//! ```text
//! Section, names, units ──conditions / net──▶ Drawing (marks on a page) ──render──▶ SVG, PNG
//! ```
//! One scale for both directions. Everything is black and grey: weight, dashes and hatching carry the meaning, so a
//! copy says what the original says. Lines are cut at the window here, because the back ends would bend them along it.

mod clip;
mod conditions;
mod drawing;
mod fabric;
mod label;
mod net;
mod number;
mod page;
mod render;

#[cfg(test)]
mod tests;

pub use clip::Window;
pub use conditions::section_figure;
pub use drawing::{Align, Drawing, Lettering, Mark, PagePoint, Pen};
pub use fabric::FabricView;
pub use net::{net_figure, round_drops};
pub use render::RenderError;

use crate::input::Trade;
use sc_core::outline::{Outline, Point};
use sc_core::potential::Section;

/// What is drawn, in the user's words and units.
#[derive(Debug, Clone)]
pub struct Subject<'a> {
    /// The section: what is held, and at what.
    pub section: &'a Section,
    /// Its outline in the coordinates that are drawn.
    pub outline: &'a Outline,
    /// Its layered fabric, if it has one.
    pub fabric: Option<FabricView>,
    /// Its title.
    pub title: Option<&'a str>,
    /// Unit of the coordinates; empty if they have none.
    pub length_unit: &'a str,
    /// The words of the trade.
    pub words: Words,
    /// Names of the electrodes.
    pub electrodes: &'a [String],
    /// Marked points with their names.
    pub probes: Vec<(Option<&'a str>, Point)>,
}

impl Subject<'_> {
    /// The unit at the scale bar.
    fn scale_unit(&self) -> String {
        match self.fabric {
            Some(FabricView { stretched: true, .. }) => {
                format!("{} stretched", self.length_unit).trim().to_owned()
            }
            _ => self.length_unit.to_owned(),
        }
    }
}

/// The words of a trade in captions and keys.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Words {
    /// What the level is.
    pub level: &'static str,
    /// Its unit; empty if it has none.
    pub level_unit: &'static str,
    /// Unit of a difference of levels.
    pub difference_unit: &'static str,
    /// A line of constant level.
    pub equipotential: &'static str,
    /// A line along the flow.
    pub flow_line: &'static str,
}

impl Words {
    /// The words of a trade.
    pub fn of(trade: Trade) -> Words {
        let plain = Words {
            level: "potential",
            level_unit: "",
            difference_unit: "",
            equipotential: "equipotential",
            flow_line: "flow line",
        };
        match trade {
            Trade::Seepage => Words { level: "total head", level_unit: "m", difference_unit: "m", ..plain },
            Trade::Heat => Words {
                level: "temperature",
                level_unit: "°C",
                difference_unit: "K",
                equipotential: "isotherm",
                flow_line: "heat flow line",
            },
            Trade::Conductor => Words {
                level: "voltage",
                level_unit: "V",
                difference_unit: "V",
                flow_line: "field line",
                ..plain
            },
            Trade::Plain => plain,
        }
    }
}

/// How a figure is laid out.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sheet {
    /// Width in pixels, at least 200; the height follows.
    pub width: u32,
    /// Whether vertices bear the numbers of the user's list.
    pub vertex_numbers: bool,
    /// What part of the plane is drawn; if none is given, all of a bounded section.
    pub window: Option<Window>,
}

impl Default for Sheet {
    fn default() -> Self {
        Sheet { width: 1000, vertex_numbers: false, window: None }
    }
}

/// Narrowest page on which the caption can be read.
const MIN_WIDTH: u32 = 200;

impl Sheet {
    fn page_width(&self) -> u32 {
        self.width.clamp(MIN_WIDTH, render::MAX_EDGE)
    }
}

/// A number with its unit, if it has one.
fn with_unit(number: &str, unit: &str) -> String {
    if unit.is_empty() { number.to_owned() } else { format!("{number} {unit}") }
}
