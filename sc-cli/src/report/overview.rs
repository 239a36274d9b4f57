//! What was understood of a section file, before anything is solved.

use super::digits::short;
use super::table::Table;
use crate::input::{Condition, Datum, Film, Material, Trade};
use crate::section::Prepared;

/// Vertices with their angles, sides with their conditions, groups of electrodes, probes.
pub fn overview(prepared: &Prepared) -> String {
    let mut out = heading(prepared);
    out.push_str("\nOutline, walked with the section on the left\n");
    out.push_str(&outline_table(prepared));
    out.push_str("\nHeld together (rows of the conductance matrix)\n");
    let mut groups = Table::new(["group", "value", "names"]);
    for (g, names) in prepared.groups().iter().enumerate() {
        let level = prepared.section.level_of_group(g);
        groups.row([g.to_string(), short(level), names.join(" + ")]);
    }
    out.push_str(&groups.render());
    let places: usize = prepared.probes.iter().map(|p| p.places.len()).sum();
    out.push_str(&format!("\nProbes: {} with {places} points\n", prepared.probes.len()));
    out
}

/// Title, trade, units and material.
pub(super) fn heading(prepared: &Prepared) -> String {
    let file = &prepared.file;
    let title = file.title.as_ref().map_or("Untitled section", |t| t.value.as_str());
    let mut out = format!("{title}\n");
    let n = prepared.outline.n();
    out.push_str(&format!(
        "Trade {}, lengths in {}, {n} vertices, {}\n",
        file.trade.word(),
        file.length.name,
        material_words(prepared)
    ));
    out
}

fn material_words(prepared: &Prepared) -> String {
    let file = &prepared.file;
    let unit = match file.trade {
        Trade::Seepage => " m/s",
        Trade::Heat => " W/(m K)",
        Trade::Conductor | Trade::Plain => "",
    };
    match file.material.map(|m| m.value) {
        None => "no material given".to_owned(),
        Some(Material::Conductivity(k)) => format!("conductivity {}{unit}", short(k)),
        Some(Material::Layered(f)) => format!(
            "conductivity {}{unit} along and {}{unit} across layers dipping {} degrees",
            short(f.along),
            short(f.across),
            short(f.dip)
        ),
        Some(Material::Permittivity(e)) => format!("relative permittivity {}", short(e)),
        Some(Material::SheetResistance(r)) => format!("sheet resistance {} ohm", short(r)),
    }
}

fn outline_table(prepared: &Prepared) -> String {
    let outline = &prepared.outline;
    let mut table = Table::new(["vertex", "x", "y", "angle", "leaving side", "length", "condition"]);
    for k in 0..outline.n() {
        let coordinate = |of: fn(sc_core::outline::Point) -> f64| {
            outline.point(k).map_or_else(|| "infinite".to_owned(), |p| short(of(p)))
        };
        table.row([
            outline.given_vertex(k).0.to_string(),
            coordinate(|p| p.re),
            coordinate(|p| p.im),
            short(180.0 * outline.alpha()[k]),
            prepared.side_name(k).unwrap_or("").to_owned(),
            outline.side_length(k).map_or_else(|| "infinite".to_owned(), short),
            condition_words(prepared, k),
        ]);
    }
    table.render()
}

fn condition_words(prepared: &Prepared, side: usize) -> String {
    let Some(name) = prepared.side_name(side) else { return "insulated".to_owned() };
    let datum = |d: &Datum| match d {
        Datum::Constant(v) => short(*v),
        Datum::Varying(_) => "a formula".to_owned(),
        Datum::Table(rows) => format!("a table of {} rows", rows.len()),
    };
    match prepared.file.condition(name) {
        Condition::Held(d) => format!("held at {}", datum(&d.value)),
        Condition::Inflow(d) => format!("inflow {}", datum(&d.value)),
        Condition::Surface(s) => {
            let film = match s.film.value {
                Film::Transfer(v) => format!("transfer {}", short(v)),
                Film::Resistance(v) => format!("resistance {}", short(v)),
            };
            format!("film of {film}, facing {}", short(s.facing.value))
        }
        Condition::Insulated => "insulated".to_owned(),
    }
}
