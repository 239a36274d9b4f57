//! The commands, one file each. A command is a function from its arguments to an [`Outcome`].

pub mod answers;
pub mod check;
#[cfg(feature = "completions")]
pub mod completions;
pub mod draw;
#[cfg(feature = "manual")]
pub mod man;
mod read;
pub mod solve;
pub mod starter;
pub mod units;

pub use read::{refused, source};

use crate::arguments::{Arguments, Command, Destination};
use crate::destination::write_file;
use crate::outcome::{Outcome, Status};

/// Runs the command that was asked for.
pub fn run(arguments: &Arguments) -> Outcome {
    match &arguments.command {
        Command::Solve(a) => solve::run(a),
        Command::Check(a) => check::run(a),
        Command::Draw(a) => draw::run(a),
        Command::Starter(a) => starter::run(a),
        Command::Units(a) => units::run(a),
        Command::Answers => answers::run(),
        #[cfg(feature = "completions")]
        Command::Completions(a) => completions::run(a),
        #[cfg(feature = "manual")]
        Command::Man(a) => man::run(a),
    }
}

/// Sends the results of an outcome to a file if one is named.
pub(crate) fn directed(mut outcome: Outcome, to: &Destination) -> Outcome {
    let Some(path) = to.out.as_ref().filter(|_| !outcome.results.is_empty()) else { return outcome };
    match write_file(path, outcome.results.as_bytes(), to.replace) {
        Ok(()) => outcome.results.clear(),
        Err(e) => return Outcome::failed(Status::Wrong, format!("error: {e}\n")),
    }
    outcome
}
