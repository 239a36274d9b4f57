//! `check`: read and validate a section, and show what was understood.

use super::read::colour;
use super::{refused, source};
use crate::arguments::CheckArguments;
use crate::input::render_warnings;
use crate::outcome::{Outcome, Status};
use crate::report::overview;
use crate::section::prepare;

/// Runs the command.
pub fn run(arguments: &CheckArguments) -> Outcome {
    match source(&arguments.section.file) {
        Ok((name, text)) => check_text(&name, &text, &arguments.section.set),
        Err(outcome) => outcome,
    }
}

/// Checks the section that a text describes.
pub fn check_text(name: &str, text: &str, set: &[(String, f64)]) -> Outcome {
    match prepare(text, set) {
        Ok(prepared) => Outcome {
            results: overview(&prepared),
            messages: render_warnings(name, text, &prepared.remarks, colour()),
            status: Status::Done,
        },
        Err(faults) => refused(name, text, &faults),
    }
}
