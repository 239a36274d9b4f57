//! One in fifty, by methods that share no code with the map.
//!
//! Of every fifty cases of a family, the first with two held runs is put between bounds by trial functions
//! ([`crate::two_sided`]), and the first with two held runs and a plain outline of at most eight sides is solved by
//! rational least squares ([`crate::rational`]).

use super::{Case, Family, case, case_as_drawn};
use crate::held_section::HeldSection;
use crate::rational::{RationalOptions, RationalProblem, SideData};
use crate::two_sided;
use serde::{Deserialize, Serialize};

/// Cases to one check.
const EVERY: usize = 50;
/// Most sides for rational least squares.
const MOST_SIDES: usize = 8;
/// Distance of the bounds in parts of the conductance at which the trial functions are good enough.
const WIDTH: f64 = 0.01;
/// Most triangles.
const TRIANGLES: usize = 60_000;

/// A method that checks.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
pub enum Method {
    /// Bounds from trial functions.
    TwoSided,
    /// Rational least squares.
    Rational,
}

/// What a method says of a conductance.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Check {
    /// The method.
    pub method: Method,
    /// Whether it agrees with the program, or why it says nothing.
    pub verdict: Result<Verdict, String>,
}

/// An independent conductance and whether the program's agrees.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Verdict {
    /// Whether the two agree within both bounds.
    pub agrees: bool,
    /// Conductance by the independent method.
    pub conductance: f64,
    /// Its uncertainty in parts of itself.
    pub uncertainty: f64,
}

/// The methods that this case is to be checked by.
#[must_use]
pub fn methods(family: Family, index: usize) -> Vec<Method> {
    let block = index - index % EVERY..index;
    let first = |fits: &dyn Fn(&Case) -> bool| {
        fits(&case(family, index)) && !block.clone().any(|before| fits(&case(family, before)))
    };
    let mut methods = Vec::new();
    if first(&Case::has_two_runs) {
        methods.push(Method::TwoSided);
    }
    if first(&|case| {
        let small = case.section.vertices.len() <= MOST_SIDES;
        small && case.has_two_runs() && case.plain_polygon().is_some()
    }) {
        methods.push(Method::Rational);
    }
    methods
}

/// Checks the program's conductance of a case, given with its stated error.
#[must_use]
pub fn check(method: Method, family: Family, index: usize, found: (f64, f64)) -> Check {
    // A similar section, with the same conductance and with its walls exactly along the axes.
    let drawn = case_as_drawn(family, index);
    let verdict = match method {
        Method::TwoSided => between_bounds(&drawn.section, found),
        Method::Rational => by_rational(&drawn, found),
    };
    Check { method, verdict }
}

fn between_bounds(section: &HeldSection, found: (f64, f64)) -> Result<Verdict, String> {
    let bounds = two_sided::conductance(section, WIDTH, TRIANGLES).map_err(|why| why.to_string())?;
    Ok(Verdict {
        agrees: bounds.admits(found.0),
        conductance: 0.5 * (bounds.lower + bounds.upper),
        uncertainty: 0.5 * bounds.width(),
    })
}

fn by_rational(drawn: &Case, found: (f64, f64)) -> Result<Verdict, String> {
    let vertices = drawn.plain_polygon().ok_or("not a plain polygon")?;
    let sides =
        drawn.section.held().into_iter().map(|level| level.map_or(SideData::Insulated, SideData::Held));
    let problem = RationalProblem { vertices, sides: sides.collect() };
    let solution = problem.solve(&RationalOptions::default()).map_err(|why| why.to_string())?;
    let own = solution.conductance().ok_or("no conductance")?;
    Ok(Verdict {
        agrees: (own.value - found.0).abs() <= own.error + found.1,
        conductance: own.value,
        uncertainty: own.error / own.value,
    })
}
