//! The answers about a section, for a reader.

use super::digits::{bound, last_place, rounded, short, supported};
use super::overview::heading;
use super::table::Table;
use super::wrap::{bullets, wrapped};
use crate::answer::{Document, Gradient, Number, Probe};
use crate::input::Material;
use crate::section::Prepared;

/// Digits of a headline number, and of a number in a table.
const HEADLINE: i32 = 10;
const IN_TABLE: i32 = 6;

/// The report; it shows no digit that differs between machines.
pub fn report(prepared: &Prepared, document: &Document) -> String {
    let mut out = heading(prepared);
    out.push('\n');
    out.push_str(&headline(document));
    out.push_str(&fluxes(document));
    out.push_str(&matrix(document));
    out.push_str(&probes(document));
    out.push_str(&corners(prepared, document));
    out.push_str(&computation(prepared, document));
    if !document.warnings.is_empty() {
        out.push_str("\nWarnings\n");
        out.push_str(&bullets(&document.warnings));
    }
    out.push_str("\nCautions\n");
    out.push_str(&bullets(&document.cautions));
    out
}

fn headline(document: &Document) -> String {
    let mut lines: Vec<(&str, String)> = Vec::new();
    let line = |value: Number, error: Number, unit: &str| {
        if value.0.is_infinite() {
            return "infinite".to_owned();
        }
        let relative = if value.0 > 0.0 { error.0 / value.0 } else { 0.0 };
        let unit = if unit == "1" { String::new() } else { format!(" {unit}") };
        let number = supported(value.0, error.0, HEADLINE);
        format!("{number}{unit}   (relative error at most {})", bound(relative))
    };
    match document.shape_factor {
        Some(s) => lines.push(("Shape factor", line(s.value, s.error, "1"))),
        None => {
            let why = "none: it needs exactly two distinct held values";
            lines.push(("Shape factor", why.to_owned()));
        }
    }
    if let Some(c) = &document.conductance {
        lines.push(("Conductance", line(c.value, c.error, c.unit)));
    }
    if let Some(r) = &document.resistance {
        lines.push(("Resistance", line(r.value, r.error, r.unit)));
    }
    lines.into_iter().map(|(name, text)| format!("{name:<14}{text}\n")).collect()
}

/// The largest finite value, for the digits of a column.
fn scale(values: impl IntoIterator<Item = f64>) -> f64 {
    values.into_iter().filter(|v| v.is_finite()).fold(0.0, |m, v| m.max(v.abs()))
}

fn fluxes(document: &Document) -> String {
    let units = &document.units;
    let size = scale(document.sides.iter().map(|s| s.flux.0));
    let flux = |value: Number, error: Number| rounded(value.0, last_place(error.0, size, IN_TABLE), size);
    let mut out = format!("\nFlux into the section, {}\n", flux_words(document));
    let value = if units.level == "1" { "held at".to_owned() } else { format!("held at, {}", units.level) };
    let length = format!("length, {}", units.length);
    let mut table = Table::new(["side", &value, "flux", &length]);
    for side in &document.sides {
        let held = document.held.iter().find(|h| h.side == side.side);
        table.row([
            side.side.clone(),
            held.map_or_else(|| "-".to_owned(), |h| short(h.value.0)),
            flux(side.flux, side.error),
            short(side.length.0),
        ]);
    }
    out.push_str(&table.render());
    out
}

fn flux_words(document: &Document) -> String {
    let unit = document.units.flux;
    match (&document.trade, unit) {
        (&"plain", _) => "per unit of run".to_owned(),
        (_, "m" | "K" | "V") => format!("for a conductivity of 1, in {unit}"),
        (_, "A") => "in A".to_owned(),
        (_, unit) if unit.contains("per m") => format!("in {unit} of run"),
        (_, unit) => format!("in {unit} of run"),
    }
}

fn matrix(document: &Document) -> String {
    let matrix = &document.matrix;
    if matrix.order.len() < 2 {
        return String::new();
    }
    let size = scale(matrix.values.iter().flatten().map(|v| v.0));
    let last = last_place(matrix.error.0, size, IN_TABLE);
    let mut out =
        "\nConductance matrix (flux into the row's sides, column at 1, others at 0; conductivity 1)\n"
            .to_owned();
    let number = |k: usize| format!("[{k}]");
    let mut heading = vec!["row".to_owned(), String::new()];
    heading.extend((0..matrix.order.len()).map(number));
    let mut table = Table::with_heading(heading);
    for (r, (name, row)) in matrix.order.iter().zip(&matrix.values).enumerate() {
        let cells = row.iter().map(|v| rounded(v.0, last, size));
        table.row([number(r), name.clone()].into_iter().chain(cells));
    }
    out.push_str(&table.render());
    out
}

fn probes(document: &Document) -> String {
    if document.probes.is_empty() {
        return String::new();
    }
    let units = &document.units;
    let component = |p: &Probe, i: usize| match p.gradient {
        Gradient::Finite(g) => g[i].0,
        Gradient::Infinite(v) => v.0,
    };
    let all = |of: &dyn Fn(&Probe) -> f64| scale(document.probes.iter().map(of));
    let (level, stream) = (all(&|p| p.potential.0), all(&|p| p.stream.0));
    // Toward a corner gradients grow without bound: each has the digits of its own length.
    let length = |p: &Probe| component(p, 0).hypot(component(p, 1));
    let cell = |v: f64, e: Number, size: f64| rounded(v, last_place(e.0, size, IN_TABLE), size);
    let unit = |unit: &str| if unit == "1" { String::new() } else { format!(" in {unit}") };
    let mut out = format!(
        "\nProbes: potential{}, gradient{}, stream function{} (for a conductivity of 1)\n",
        unit(units.level),
        unit(&units.gradient),
        unit(units.stream)
    );
    let mut table =
        Table::new(["probe", "x", "y", "side", "s", "potential", "gradient x", "gradient y", "stream"]);
    for p in &document.probes {
        let gradient = |i: usize| {
            if component(p, i).is_infinite() {
                "infinite".to_owned()
            } else {
                cell(component(p, i), p.errors.gradient, length(p))
            }
        };
        table.row([
            p.name.clone().unwrap_or_default(),
            short(p.at[0].0),
            short(p.at[1].0),
            p.side.clone().unwrap_or_default(),
            p.s.map_or_else(String::new, |s| short(s.0)),
            cell(p.potential.0, p.errors.potential, level),
            gradient(0),
            gradient(1),
            cell(p.stream.0, p.errors.stream, stream),
        ]);
    }
    out.push_str(&table.render());
    out
}

fn corners(prepared: &Prepared, document: &Document) -> String {
    if !document.corners.iter().any(|c| c.infinite) {
        return String::new();
    }
    let gradient = &document.units.gradient;
    let length = gradient.rsplit('/').next().unwrap_or("m");
    let place =
        if prepared.stretch.is_none() { "from the corner" } else { "along the side that leaves the corner" };
    let mut out = format!(
        "\nCorners where the gradient is infinite: about c r^e at a small distance r ({length}) {place}, in {gradient}\n"
    );
    let mut table = Table::new(["vertex", "x", "y", "angle", "c", "e", "between"]);
    for c in document.corners.iter().filter(|c| c.infinite) {
        let name = |s: &Option<String>| s.clone().unwrap_or_else(|| "an unnamed side".to_owned());
        table.row([
            c.vertex.to_string(),
            short(c.at[0].0),
            short(c.at[1].0),
            short(c.angle.0),
            supported(c.coefficient.0, c.error.0, IN_TABLE),
            short(c.exponent.0),
            format!("{} and {}", name(&c.sides[0]), name(&c.sides[1])),
        ]);
    }
    out.push_str(&table.render());
    out
}

/// How a layered fabric was dealt with.
fn stretch_words(prepared: &Prepared) -> String {
    let Some(Material::Layered(fabric)) = prepared.file.material.map(|m| m.value) else {
        return String::new();
    };
    if prepared.stretch.is_none() {
        return String::new();
    }
    let (along, across) = prepared.stretch.factors();
    format!(
        "Solved in stretched coordinates, where the layered fabric conducts alike in all directions: lengths along the \
         layers times {}, across them times {}, conductivity {}, the root of along times across. The shape factor refers to that \
         conductivity; positions, lengths and gradients are true ones. ",
        short(along),
        short(across),
        short(fabric.conductivity())
    )
}

fn computation(prepared: &Prepared, document: &Document) -> String {
    let gaps = document.map.gaps_log.iter().map(|g| g.0);
    let (low, high) = gaps.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), g| (l.min(g), h.max(g)));
    let decades = if low <= high { (high - low) / std::f64::consts::LN_10 } else { 0.0 };
    let onto = if prepared.stretch.is_none() { "section" } else { "stretched section" };
    let text = format!(
        "{}Map of a {} onto the {onto}; the prevertex of vertex {} lies at infinity, and of the gaps between \
         the others the largest is 10^{decades:.1} times the smallest. Side lengths are met to a relative {}. Headline numbers have a relative \
         error of at most {}. The bounds come from {}.",
        stretch_words(prepared),
        document.map.canonical,
        document.map.at_infinity,
        bound(document.map.residual.0),
        bound(document.error.0),
        document.bound
    );
    format!("\nComputation\n{}", wrapped("  ", &text))
}
