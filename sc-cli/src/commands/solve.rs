//! `solve`: answer a section.

use super::{directed, refused, source};
use crate::answer::document_of;
use crate::arguments::SolveArguments;
use crate::outcome::{Outcome, Status};
use crate::report::{digits, report};
use crate::section::prepare;
use sc_core::answers::{Solution, SolveOptions};

/// How a section is to be answered.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// The JSON document instead of the report.
    pub json: bool,
    /// Relative error asked for.
    pub tolerance: f64,
    /// Whether to solve a second time in an independent way.
    pub check: bool,
    /// Other values for names under `let`.
    pub set: Vec<(String, f64)>,
}

impl Default for Request {
    fn default() -> Self {
        Self { json: false, tolerance: 1e-10, check: true, set: Vec::new() }
    }
}

/// The tolerance of the solver is at most this: one more iteration costs little and gains all digits.
const SOLVER_TOLERANCE: f64 = 1e-12;

/// Runs the command.
pub fn run(arguments: &SolveArguments) -> Outcome {
    let (name, text) = match source(&arguments.section.file) {
        Ok(read) => read,
        Err(outcome) => return outcome,
    };
    let request = Request {
        json: arguments.json,
        tolerance: arguments.tolerance,
        check: !arguments.no_check,
        set: arguments.section.set.clone(),
    };
    let work = || solve_text(&name, &text, &request);
    let outcome = match arguments.threads {
        None => work(),
        Some(n) => match rayon::ThreadPoolBuilder::new().num_threads(n).build() {
            Ok(pool) => pool.install(work),
            Err(e) => Outcome::failed(Status::Wrong, format!("error: {n} threads cannot be started: {e}\n")),
        },
    };
    directed(outcome, &arguments.destination)
}

/// Answers the section that a text describes; `name` is the file's name in messages.
pub fn solve_text(name: &str, text: &str, request: &Request) -> Outcome {
    let prepared = match prepare(text, &request.set) {
        Ok(prepared) => prepared,
        Err(faults) => return refused(name, text, &faults),
    };
    let options = SolveOptions {
        tolerance: request.tolerance.min(SOLVER_TOLERANCE),
        check: request.check,
        ..SolveOptions::default()
    };
    let unanswered = |why: String| {
        Outcome::failed(
            Status::Unanswered,
            format!("error: {name} was understood and cannot be answered: {why}\n"),
        )
    };
    let solution = match Solution::solve(prepared.section.clone(), &options) {
        Ok(solution) => solution,
        Err(e) => return unanswered(e.to_string()),
    };
    let document = match document_of(&prepared, &solution, request.check) {
        Ok(document) => document,
        Err(e) => return unanswered(e.to_string()),
    };
    let results = if request.json {
        match document.to_json() {
            Ok(text) => text,
            Err(e) => return unanswered(e.to_string()),
        }
    } else {
        report(&prepared, &document)
    };
    let mut outcome = Outcome::done(results);
    let error = document.error.0;
    if error > request.tolerance || error.is_nan() {
        outcome.status = Status::Inexact;
        outcome.messages = format!(
            "error: the relative error is at most {}, above the tolerance {:e} asked for; the answer is given all the same\n",
            digits::short(error),
            request.tolerance
        );
    }
    outcome
}
