//! From a solution to the document.

use super::document::{
    Corner, Document, Gradient, Held, Map, Matrix, Measured, Probe, ProbeErrors, Side, Value,
};
use super::number::Number;
use super::units::Scales;
use super::{cautions, document};
use crate::section::{Place, PlacedProbe, Prepared};
use rayon::prelude::*;
use sc_core::answers::{self, Bounded, ProbeError, Solution};
use sc_core::outline::Point;

/// The bounds rest on a second solution.
const TWO_SOLUTIONS: &str = "two independent solutions: another vertex at infinity, another start, another quadrature, \
                             side lengths disturbed by their rounding; the bound is four times their difference, and a floor \
                             for rounding";
/// They do not.
const ONE_SOLUTION: &str =
    "residuals of a single solution (--no-check); without a second solution the bound is less certain";
/// Lists in warnings end after so many entries.
const LISTED: usize = 8;

/// Everything that is answered about a section.
///
/// # Errors
/// The first place at which there is no value. The places were checked before, so this is an iteration that failed.
pub fn document_of(prepared: &Prepared, solution: &Solution, checked: bool) -> Result<Document, ProbeError> {
    let collect = Collect { prepared, solution, scales: Scales::new(&prepared.file) };
    let (probes, endless) = collect.probes()?;
    let matrix = collect.matrix();
    let held = collect.held();
    let sides = collect.sides();
    let corners = collect.corners();
    let mut warnings: Vec<String> = prepared.remarks.iter().map(ToString::to_string).collect();
    warnings.extend(infinite_values(&held, &matrix, solution.shape_factor()));
    warnings.extend(endless);
    warnings.extend(
        sides
            .iter()
            .filter(|s| s.length.0.is_infinite())
            .map(|s| format!("the length of \"{}\" is infinite: it goes to a vertex at infinity", s.side)),
    );
    let shape_factor = solution.shape_factor();
    let scales = &collect.scales;
    let conductance = shape_factor
        .zip(scales.conductance_unit)
        .map(|(s, unit)| measured(s.scaled(scales.conductivity), unit));
    let resistance = conductance.as_ref().filter(|c| c.unit == "1/ohm").and_then(|c| reciprocal(c, "ohm"));
    Ok(Document {
        title: prepared.file.title.as_ref().map(|t| t.value.clone()),
        trade: prepared.file.trade.word(),
        shape_factor: shape_factor.map(|s| Value { value: Number(s.value), error: Number(s.error) }),
        conductance,
        resistance,
        held,
        matrix,
        sides,
        probes,
        corners,
        map: collect.map(),
        units: collect.scales.units.clone(),
        error: Number(solution.relative_error()),
        bound: if checked { TWO_SOLUTIONS } else { ONE_SOLUTION },
        warnings,
        cautions: cautions(prepared.file.trade, !prepared.stretch.is_none()),
    })
}

fn measured(value: Bounded, unit: &'static str) -> Measured {
    Measured { value: Number(value.value), error: Number(value.error), unit }
}

/// `1/c`; the bound grows by the second order of the error.
fn reciprocal(c: &Measured, unit: &'static str) -> Option<Measured> {
    let (value, error) = (c.value.0, c.error.0);
    if value <= error {
        return None;
    }
    Some(measured(Bounded::new(1.0 / value, error / (value * (value - error))), unit))
}

/// Why values of the whole section are infinite.
fn infinite_values(held: &[Held], matrix: &Matrix, shape_factor: Option<Bounded>) -> Vec<String> {
    let mut out = Vec::new();
    let cause = "held sides of different values touch, so the flux between them is infinite";
    let names: Vec<&str> = held.iter().filter(|h| h.flux.0.is_infinite()).map(|h| h.side.as_str()).collect();
    if !names.is_empty() {
        out.push(format!("the flux through {} is infinite: {cause}", quoted(&names)));
    }
    let names: Vec<&str> = held.iter().filter(|h| h.flux.0.is_nan()).map(|h| h.side.as_str()).collect();
    if !names.is_empty() {
        let names = quoted(&names);
        out.push(format!(
            "the flux through {names} has no value: a held side of a higher and one of a lower value touch, so an \
             infinite flux comes in and goes out"
        ));
    }
    if matrix.values.iter().flatten().any(|v| v.0.is_infinite()) {
        out.push("entries of the matrix are infinite: the names of their row and column touch".to_owned());
    }
    if shape_factor.is_some_and(|s| s.value.is_infinite()) {
        out.push(format!("the shape factor is infinite: {cause}"));
    }
    out
}

fn quoted(names: &[&str]) -> String {
    let mut words: Vec<String> = names.iter().take(LISTED).map(|n| format!("\"{n}\"")).collect();
    if names.len() > LISTED {
        words.push(format!("{} more", names.len() - LISTED));
    }
    words.join(", ")
}

struct Collect<'a> {
    prepared: &'a Prepared,
    solution: &'a Solution,
    scales: Scales,
}

impl Collect<'_> {
    fn held(&self) -> Vec<Held> {
        let levels = self.prepared.section.levels();
        (self.prepared.electrodes.iter().enumerate())
            .map(|(electrode, name)| {
                let flux = self.flux(electrode);
                Held {
                    side: name.clone(),
                    value: Number(levels[electrode]),
                    flux: Number(flux.value),
                    error: Number(flux.error),
                }
            })
            .collect()
    }

    /// Flux through an electrode. Between one of a higher and one of a lower level that touch it, an infinite flux
    /// comes in and goes out, and their difference is no number.
    fn flux(&self, electrode: usize) -> Bounded {
        let section = &self.prepared.section;
        let n = section.outline().n();
        let level = section.levels()[electrode];
        let (mut higher, mut lower) = (false, false);
        for k in 0..n {
            for (own, other) in [(k, (k + 1) % n), ((k + 1) % n, k)] {
                if section.electrode_of_side(own) == Some(electrode)
                    && let Some(beside) = section.level_of_side(other)
                {
                    higher |= beside > level;
                    lower |= beside < level;
                }
            }
        }
        if higher && lower {
            return Bounded { value: f64::NAN, error: 0.0 };
        }
        self.solution.electrode_flux(electrode).scaled(self.scales.conductivity)
    }

    fn matrix(&self) -> Matrix {
        let matrix = self.solution.matrix();
        let groups = self.prepared.groups();
        Matrix {
            order: groups.iter().map(|names| names.join(" + ")).collect(),
            groups: groups.iter().map(|g| g.iter().map(|&n| n.to_owned()).collect()).collect(),
            values: matrix.values.iter().map(|row| row.iter().copied().map(Number).collect()).collect(),
            error: Number(matrix.error),
        }
    }

    fn sides(&self) -> Vec<Side> {
        let outline = &self.prepared.outline;
        (self.prepared.file.side_names().into_iter())
            .map(|name| {
                let electrode = self.prepared.electrodes.iter().position(|e| e == name);
                let flux = electrode.map_or(Bounded::new(0.0, 0.0), |e| self.flux(e));
                let length: f64 = self
                    .prepared
                    .sides_named(name)
                    .map(|k| outline.side_length(k).unwrap_or(f64::INFINITY))
                    .sum();
                Side {
                    side: name.to_owned(),
                    flux: Number(flux.value),
                    error: Number(flux.error),
                    length: Number(length),
                }
            })
            .collect()
    }

    /// The probes, and why values at some of them are infinite.
    fn probes(&self) -> Result<(Vec<Probe>, Vec<String>), ProbeError> {
        let probes = &self.prepared.probes;
        let places: Vec<(&PlacedProbe, Place)> =
            probes.iter().flat_map(|p| p.places.iter().map(move |&place| (p, place))).collect();
        let stretched: Vec<Place> =
            places.iter().map(|&(_, place)| self.prepared.stretched_place(place)).collect();
        let points: Vec<Point> = stretched
            .iter()
            .filter_map(|place| match place {
                Place::At(z) => Some(*z),
                Place::OnSide { .. } => None,
            })
            .collect();
        let mut inside = self.solution.probe_many(&points).into_iter();
        let on_sides: Vec<Option<Result<answers::Probe, ProbeError>>> = stretched
            .par_iter()
            .with_min_len(64)
            .map(|place| match *place {
                Place::At(_) => None,
                Place::OnSide { side, s } => Some(self.solution.probe_on_side(side, s)),
            })
            .collect();
        let mut out = Vec::with_capacity(places.len());
        for ((probe, place), on_side) in places.into_iter().zip(on_sides) {
            let found = on_side.or_else(|| inside.next());
            let not_finite = || match place {
                Place::At(z) => ProbeError::NotFinite { x: z.re, y: z.im },
                Place::OnSide { side, s } => ProbeError::NoSuchPlace { side, s },
            };
            out.push(self.probe(probe, place, found.unwrap_or_else(|| Err(not_finite()))?));
        }
        let warnings = infinite_probes(&out);
        Ok((out, warnings))
    }

    fn probe(&self, placed: &PlacedProbe, place: Place, found: answers::Probe) -> Probe {
        let stretch = &self.prepared.stretch;
        // Gradients of the core are those of the stretched section, per length unit.
        let (gradient, gradient_error) = match found.gradient {
            answers::Gradient::Finite { components, error } => {
                let gradient = stretch.gradient_to_true(Point::new(components[0], components[1]));
                let per = |v: f64| Number(v / self.scales.per_length);
                let error = error * stretch.largest_factor();
                (Gradient::Finite([gradient.re, gradient.im].map(per)), error / self.scales.per_length)
            }
            answers::Gradient::Infinite => (Gradient::Infinite(Number(f64::INFINITY)), 0.0),
        };
        let side = found.side.and_then(|k| self.prepared.side_name(k)).map(str::to_owned);
        let s = match place {
            Place::OnSide { s, .. } => Some(s),
            Place::At(_) => found.side.zip(found.s).map(|(k, s)| self.prepared.true_distance(k, s)),
        };
        let s = s.filter(|_| side.is_some()).map(Number);
        let at = self.prepared.point_of(place);
        Probe {
            name: placed.name.clone(),
            at: [Number(at.re), Number(at.im)],
            side,
            s,
            potential: Number(found.potential.value),
            gradient,
            stream: Number(found.stream.value),
            error: Number(found.potential.error.max(found.stream.error).max(gradient_error)),
            errors: ProbeErrors {
                potential: Number(found.potential.error),
                gradient: Number(gradient_error),
                stream: Number(found.stream.error),
            },
        }
    }

    fn corners(&self) -> Vec<Corner> {
        let outline = &self.prepared.outline;
        let n = outline.n();
        let mut corners: Vec<Corner> = (0..n)
            .filter_map(|k| {
                let at = outline.point(k)?;
                let corner = self.solution.corner(k);
                // |∇φ| = c r^e with lengths in the length unit u: in metres c u^−(1+e).
                let power = 1.0 + corner.exponent;
                let factor = self.scales.per_length.powf(-power);
                let coefficient =
                    corner.coefficient.scaled(factor * self.coefficient_to_true(k, corner.exponent));
                let name = |side: usize| self.prepared.side_name(side).map(str::to_owned);
                Some(Corner {
                    vertex: outline.given_vertex(k).0,
                    at: [Number(at.re), Number(at.im)],
                    sides: [name((k + n - 1) % n), name(k)],
                    angle: Number(180.0 * outline.alpha()[k]),
                    exponent: Number(corner.exponent),
                    coefficient: Number(coefficient.value),
                    error: Number(coefficient.error),
                    unit: coefficient_unit(&self.scales, power),
                    infinite: corner.is_singular(),
                })
            })
            .collect();
        corners.sort_by_key(|c| c.vertex);
        corners
    }

    /// The factor from the coefficient of a vertex in the stretched section to that in the true one. There
    /// `|∇φ| = c r^e` has a coefficient for each direction; this is the one along the side that leaves the vertex.
    fn coefficient_to_true(&self, vertex: usize, exponent: f64) -> f64 {
        let prepared = self.prepared;
        if prepared.stretch.is_none() {
            return 1.0;
        }
        // Along a held side the gradient is normal to it, along an insulated one it runs with it.
        let along = prepared.section.outline().side_direction(vertex);
        let held = prepared.section.electrode_of_side(vertex).is_some();
        let gradient = if held { along * Point::new(0.0, 1.0) } else { along };
        prepared.stretch.gradient_to_true(gradient).norm() * prepared.lengthening(vertex).powf(exponent)
    }

    fn map(&self) -> Map {
        let map = self.solution.map();
        Map {
            canonical: "half-plane",
            vertices: map.outline().n(),
            at_infinity: map.outline().given_vertex(map.at_infinity()).0,
            gaps_log: map.line().log_gaps().iter().copied().map(Number).collect(),
            residual: Number(self.solution.residual()),
            iterations: map.effort().iterations,
        }
    }
}

/// `K m^-0.667`
fn coefficient_unit(scales: &Scales, power: f64) -> String {
    let length = &scales.gradient_length;
    let level = scales.difference();
    if power.abs() < 5e-4 {
        return level.to_owned();
    }
    if (power - 1.0).abs() < 5e-4 {
        return format!("{level}/{length}");
    }
    let exponent = format!("{:.3}", -power);
    format!("{level} {length}^{}", exponent.trim_end_matches('0').trim_end_matches('.'))
}

fn infinite_probes(probes: &[Probe]) -> Vec<String> {
    let place = |p: &document::Probe| {
        let [x, y] = p.at;
        let name = p.name.as_ref().map_or_else(String::new, |n| format!("\"{n}\" "));
        format!("{name}({}, {})", x.0 + 0.0, y.0 + 0.0)
    };
    let list = |of: Vec<String>| {
        let more = of.len().saturating_sub(LISTED);
        let shown = of.into_iter().take(LISTED).collect::<Vec<_>>().join(", ");
        if more > 0 { format!("{shown} and {more} more") } else { shown }
    };
    let mut out = Vec::new();
    let gradients: Vec<String> =
        probes.iter().filter(|p| matches!(p.gradient, Gradient::Infinite(_))).map(place).collect();
    if !gradients.is_empty() {
        let places = list(gradients);
        out.push(format!(
            "the gradient is infinite at {places}: toward such a corner it grows without bound, by the law that \
             is given with the corners"
        ));
    }
    let streams: Vec<String> = probes.iter().filter(|p| p.stream.0.is_infinite()).map(place).collect();
    if !streams.is_empty() {
        let places = list(streams);
        out.push(format!(
            "the stream function is infinite at {places}: sides of different levels touch there"
        ));
    }
    out
}
