//! The section file: from the text a person writes to a checked [`SectionFile`].
//!
//! [`read_section`] reads the whole file before it answers, so that all faults are reported at once, each with the
//! rule that is broken, its line and column, and what to change. [`render_faults`] shows them with the lines they are
//! about.
//!
//! ```
//! use sc_cli::input::{read_section, render_faults};
//!
//! let text = r#"
//! let.b = 4
//! outline = [
//!   { at = [0, 0],       side = "left" },
//!   { at = [0, -1] },
//!   { at = ["b", -1],    side = "right" },
//!   { at = ["b + q", 0] },
//! ]
//! [sides]
//! left  = { held = 1 }
//! rigth = { held = 0 }
//! "#;
//! let faults = read_section(text).unwrap_err();
//! assert_eq!(faults.len(), 2);
//! let shown = render_faults("plate.toml", text, &faults, false);
//! assert!(shown.contains("unknown name `q`"));
//! assert!(shown.contains("did you mean \"right\"?"));
//! ```

mod consistency;
mod expression;
mod fault;
mod model;
mod nearest;
mod not_yet;
mod place;
mod reader;
mod render;
pub mod trade;
pub mod units;

pub use expression::{FUNCTION_NAMES, Formula, Operator, Sample, UndefinedValue, Variable};
pub use fault::{Fault, FaultKind, Warned, Warning};
pub use model::{
    Condition, Datum, Film, LayeredFabric, LengthUnit, Material, NamedNumber, NamedSide, OutlineVertex,
    Probe, ProbePlace, Region, SectionFile, Surface,
};
pub use nearest::nearest;
pub use place::{Placed, Position, Span, position};
pub use reader::{DEFAULT_COUNT, MAX_COUNT};
pub use render::{render_faults, render_warnings};
pub use trade::{Quantity, Trade};

use reader::Reading;
#[cfg(test)]
mod tests;

/// Reads a section file.
///
/// # Errors
/// Every fault of the file, in the order of the text. A file that is not TOML is reported as that alone.
pub fn read_section(text: &str) -> Result<Warned<SectionFile>, Vec<Fault>> {
    read_section_with(text, &[])
}

/// Reads a section file with other values for some of its names under `let`, for studies of one dimension.
///
/// A value takes the place of the number or the expression in the file; a unit that is written after it stays.
///
/// # Errors
/// As [`read_section`]; also a name that the file does not have, and a value that is not finite.
pub fn read_section_with(text: &str, set: &[(String, f64)]) -> Result<Warned<SectionFile>, Vec<Fault>> {
    let (reading, mut faults) = reader::read(text, set);
    if let Some(reading) = &reading {
        faults.extend(consistency::check(reading));
        faults.extend(not_yet::check(&reading.section.value));
    }
    faults.sort_by_key(|f| f.span.map_or((0, 0), |s| (s.start, s.end)));
    for fault in &mut faults {
        fault.locate(text);
    }
    match reading {
        Some(Reading { mut section, .. }) if faults.is_empty() => {
            section.warnings.iter_mut().for_each(|w| w.locate(text));
            Ok(section)
        }
        _ => Err(faults),
    }
}
