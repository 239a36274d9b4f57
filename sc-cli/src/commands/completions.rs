//! `completions`: completions for a shell, from the definitions of the command line.

use crate::arguments::{Arguments, CompletionsArguments};
use crate::outcome::{Outcome, Status};
use clap::CommandFactory;

/// Runs the command.
pub fn run(arguments: &CompletionsArguments) -> Outcome {
    let mut script = Vec::new();
    clap_complete::generate(arguments.shell, &mut Arguments::command(), "prevertex", &mut script);
    match String::from_utf8(script) {
        Ok(script) => Outcome::done(script),
        Err(e) => Outcome::failed(Status::Unanswered, format!("error: the script is not text: {e}\n")),
    }
}
