//! What came of a case.

use std::panic::{AssertUnwindSafe, catch_unwind};
use std::time::{Duration, Instant};

use sc_core::answers::{Solution, SolveError, SolveOptions};
use sc_core::map::MapError;
use serde::{Deserialize, Serialize};

use super::check::Check;
use super::{Case, Family};
use crate::held_section::Refused;
use crate::robustness::{RECIPROCITY, RESIDUAL_AT_WORST};

/// The figures of a solved case.
#[derive(Debug, Clone, Copy, Serialize, Deserialize)]
pub struct Figures {
    /// Iterations of the parameter problem.
    pub iterations: u64,
    /// Largest relative side residual, by another quadrature than the solution's.
    pub residual: f64,
    /// Relative error that the program states.
    pub estimate: f64,
    /// Conductance between the two levels with its stated error, if there are two.
    pub conductance: Option<(f64, f64)>,
    /// `|G·G′ − 1|`, the two from independent maps and by different formulas; with two held runs only.
    pub reciprocity: Option<f64>,
    /// Decades between the largest and the smallest gap of the prevertices.
    pub decades: f64,
}

/// Why a case does not count as solved.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
pub struct Failure {
    /// The rule, for counting.
    pub rule: String,
    /// What happened.
    pub message: String,
}

impl Failure {
    fn new(rule: &str, message: String) -> Failure {
        Failure { rule: rule.to_owned(), message }
    }

    fn refused(refused: &Refused) -> Failure {
        let rule = match refused {
            Refused::Outline(_) => "outline refused",
            Refused::Conditions(_) => "conditions refused",
            Refused::Solution(SolveError::Map(MapError::Start(_))) => "no start",
            Refused::Solution(SolveError::Map(MapError::Rule(_))) => "no quadrature rule",
            Refused::Solution(SolveError::Map(MapError::NotConverged { .. })) => "not converged",
            Refused::Solution(SolveError::Field(_)) => "no field",
            Refused::Solution(_) => "no solution",
        };
        Failure::new(rule, refused.to_string())
    }
}

/// A case and what came of it.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct Outcome {
    /// Its family.
    pub family: Family,
    /// Its number.
    pub index: usize,
    /// Number of sides.
    pub sides: usize,
    /// Processor time of the solution, with the second solution if there was one.
    pub time: Duration,
    /// The figures, or why there are none.
    pub result: Result<Figures, Failure>,
    /// What independent methods say of it.
    pub checks: Vec<Check>,
}

impl Outcome {
    /// Family and number.
    #[must_use]
    pub fn name(&self) -> String {
        format!("{}/{}", self.family.name(), self.index)
    }

    /// Whether an independent method does not agree.
    #[must_use]
    pub fn is_contradicted(&self) -> bool {
        self.checks.iter().any(|check| check.verdict.as_ref().is_ok_and(|verdict| !verdict.agrees))
    }
}

/// Solves a case. Call it where one thread does all of its work: the time is that of the calling thread.
#[must_use]
pub fn examine(case: &Case, check: bool) -> Outcome {
    let options = SolveOptions { check, ..SolveOptions::default() };
    let start = Clock::start();
    let solved = catch_unwind(AssertUnwindSafe(|| case.section.solve_with(&options)));
    let time = start.elapsed();
    let result = match solved {
        Err(payload) => {
            let text = payload.downcast_ref::<String>().cloned();
            let text = text.or_else(|| payload.downcast_ref::<&str>().map(|s| (*s).to_owned()));
            Err(Failure::new("panic", text.unwrap_or_default()))
        }
        Ok(Err(refused)) => Err(Failure::refused(&refused)),
        Ok(Ok(solution)) => figures(&solution),
    };
    let sides = case.section.vertices.len();
    Outcome { family: case.family, index: case.index, sides, time, result, checks: Vec::new() }
}

fn figures(solution: &Solution) -> Result<Figures, Failure> {
    let (low, high) = solution.map().line().spread();
    let figures = Figures {
        iterations: solution.map().effort().iterations,
        residual: solution.residual(),
        estimate: solution.relative_error(),
        conductance: solution.shape_factor().map(|g| (g.value, g.error)),
        reciprocity: solution.reciprocity(),
        decades: (high - low) / std::f64::consts::LN_10,
    };
    // No electrodes of a case touch, so all of its conductances are finite.
    let matrix = solution.matrix();
    if !matrix.values.iter().flatten().all(|g| g.is_finite()) {
        return Err(Failure::new("not a number", "an entry of the conductance matrix is not finite".into()));
    }
    let named = [
        ("residual", Some(figures.residual)),
        ("estimate", Some(figures.estimate)),
        ("conductance", figures.conductance.map(|g| g.0)),
        ("G·G′", figures.reciprocity),
    ];
    if let Some((name, _)) = named.iter().find(|(_, x)| x.is_some_and(|x| !x.is_finite())) {
        return Err(Failure::new("not a number", format!("{name} is not finite")));
    }
    if figures.residual > RESIDUAL_AT_WORST {
        let message = format!("side lengths are off by {:.1e}", figures.residual);
        return Err(Failure::new("residual", message));
    }
    match figures.reciprocity {
        Some(found) if found > RECIPROCITY => {
            let message = format!("G·G′ − 1 = {found:.1e}, with a stated error of {:.1e}", figures.estimate);
            Err(Failure::new("G·G′", message))
        }
        _ => Ok(figures),
    }
}

/// Processor time of this thread where the system tells it, else the time on the wall.
struct Clock {
    wall: Instant,
    processor: Option<u64>,
}

impl Clock {
    fn start() -> Clock {
        Clock { wall: Instant::now(), processor: processor_time() }
    }

    fn elapsed(&self) -> Duration {
        match (self.processor, processor_time()) {
            (Some(before), Some(now)) => Duration::from_nanos(now - before),
            _ => self.wall.elapsed(),
        }
    }
}

/// Nanoseconds that this thread has run, from the Linux scheduler, which brings its account up to date on a yield.
fn processor_time() -> Option<u64> {
    std::thread::yield_now();
    let text = std::fs::read_to_string("/proc/thread-self/schedstat").ok()?;
    text.split_whitespace().next()?.parse().ok()
}
