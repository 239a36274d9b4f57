//! `answers`: every key of the JSON document with its meaning and unit.

use crate::outcome::Outcome;
use crate::report::Table;

/// Key (a list's entries after `[]`), unit, meaning.
pub const ANSWERS: &[(&str, &str, &str)] = &[
    ("title", "", "the title of the file, or null"),
    ("trade", "", "seepage, heat, conductor or plain"),
    (
        "shape_factor.value",
        "1",
        "flux / (conductivity x difference); null unless there are exactly two held values",
    ),
    ("shape_factor.error", "1", "bound of its absolute error"),
    (
        "conductance.value",
        "its unit",
        "conductivity x shape factor, per unit of run; null without a material",
    ),
    ("conductance.error", "its unit", "bound of its absolute error"),
    ("conductance.unit", "", "m/s, W/(m K), F/m, 1/ohm or 1"),
    (
        "resistance.value",
        "ohm",
        "reciprocal of the conductance of a film; null unless sheet_resistance is given",
    ),
    ("resistance.error", "ohm", "bound of its absolute error"),
    ("resistance.unit", "", "ohm"),
    ("held[].side", "", "a held name, in the order of [sides]"),
    ("held[].value", "units.level", "what it is held at"),
    ("held[].flux", "units.flux", "flux into the section through all sides of the name"),
    ("held[].error", "units.flux", "bound of the absolute error of flux"),
    (
        "matrix.order[]",
        "",
        "one name for each row; names that touch at one value are a group, joined by \" + \"",
    ),
    ("matrix.groups[][]", "", "the names of each row one by one"),
    (
        "matrix.values[][]",
        "1",
        "flux into the row's sides with the column's at 1, the others at 0, conductivity 1",
    ),
    ("matrix.error", "1", "bound of the absolute error of every finite entry"),
    ("sides[].side", "", "a name of the outline, in walking order"),
    ("sides[].flux", "units.flux", "flux into the section through all sides of the name"),
    ("sides[].error", "units.flux", "bound of the absolute error of flux"),
    ("sides[].length", "units.length", "length of all sides of the name together"),
    ("probes[].name", "", "the name of the probe, or null"),
    ("probes[].at[]", "units.length", "where: x, y"),
    ("probes[].side", "", "the name of the side it lies on, or null"),
    ("probes[].s", "units.length", "distance along that side from its start, or null"),
    ("probes[].potential", "units.level", "head, temperature, voltage"),
    (
        "probes[].gradient[]",
        "units.gradient",
        "its gradient along x and y; the string infinite at a singular corner",
    ),
    (
        "probes[].stream",
        "units.stream",
        "stream function, conductivity 1; zero at the start of the first held side",
    ),
    ("probes[].error", "", "the largest of the three bounds below, whatever their units"),
    ("probes[].errors.potential", "units.level", "bound of the absolute error of potential"),
    (
        "probes[].errors.gradient",
        "units.gradient",
        "bound of the absolute error of either component of gradient",
    ),
    ("probes[].errors.stream", "units.stream", "bound of the absolute error of stream"),
    ("corners[].vertex", "", "index into the outline, from 0"),
    ("corners[].at[]", "units.length", "where: x, y"),
    ("corners[].sides[]", "", "the names of the sides that meet there, or null"),
    ("corners[].angle", "degrees", "interior angle"),
    ("corners[].exponent", "1", "e in |gradient| = c r^e close to the corner"),
    (
        "corners[].coefficient",
        "its unit",
        "c, with r in the length unit of units.gradient; in a layered fabric along the side that leaves the vertex",
    ),
    ("corners[].error", "its unit", "bound of the absolute error of coefficient"),
    ("corners[].unit", "", "the unit of coefficient"),
    ("corners[].infinite", "", "whether the gradient is infinite there"),
    ("map.canonical", "", "half-plane"),
    ("map.vertices", "", "number of vertices"),
    ("map.at_infinity", "", "the vertex whose prevertex is infinity, an index into the outline"),
    (
        "map.gaps_log[]",
        "1",
        "natural logs of the gaps between prevertices, from the vertex after at_infinity onward",
    ),
    ("map.residual", "1", "largest |ln (computed / given side length)|"),
    ("map.iterations", "", "iterations of the parameter problem"),
    ("units.length", "", "unit of coordinates and lengths"),
    ("units.level", "", "unit of levels"),
    ("units.stream", "", "unit of the stream function"),
    ("units.gradient", "", "unit of gradients"),
    ("units.flux", "", "unit of fluxes, per unit of run; without a material for conductivity 1"),
    ("error", "1", "bound of the relative error of the headline numbers"),
    ("bound", "", "how the bounds were obtained"),
    ("warnings[]", "", "what looks unintended, and why a value is infinite"),
    ("cautions[]", "", "what the numbers do not say"),
];

/// Runs the command.
pub fn run() -> Outcome {
    let mut table = Table::new(["key", "unit", "meaning"]);
    for &(key, unit, meaning) in ANSWERS {
        table.row([key, unit, meaning].map(str::to_owned));
    }
    let mut out =
        "The document of `prevertex solve FILE --json`; [] stands for the entries of a list\n".to_owned();
    out.push_str(&table.render());
    out.push_str("\nNumbers read back to the same 64-bit number. An infinite one is the string \"infinite\" or \"-infinite\".\n");
    Outcome::done(out)
}
