//! `units`: the units a section file may use, and those of a plain number.

use crate::arguments::UnitsArguments;
use crate::input::nearest;
use crate::input::units::known_units;
use crate::input::{Quantity, Trade};
use crate::outcome::{Outcome, Status};
use crate::report::{Table, digits};

/// Runs the command.
pub fn run(arguments: &UnitsArguments) -> Outcome {
    let wanted = arguments.measure.as_deref().map(str::to_lowercase);
    let mut table = Table::new(["unit", "measures", "size", "in"]);
    let mut found = false;
    for unit in known_units() {
        if wanted.as_ref().is_none_or(|w| unit.measures.to_lowercase().contains(w.as_str())) {
            found = true;
            let size = digits::short(unit.factor().value());
            table.row([unit.name.to_owned(), unit.measures.to_owned(), size, unit.dimension.to_string()]);
        }
    }
    if let Some(wanted) = wanted {
        if found {
            return Outcome::done(table.render());
        }
        let near = nearest(&wanted, known_units().iter().map(|u| u.measures));
        let hint = near.map_or_else(String::new, |n| format!("; did you mean {n}?"));
        return Outcome::failed(Status::Wrong, format!("error: no unit measures `{wanted}`{hint}\n"));
    }
    let mut out =
        "Units; compound ones are products, quotients and whole powers of these, as in W/(m2 K)\n".to_owned();
    out.push_str(&table.render());
    out.push_str(
        "\nWhat a plain number has, by trade; a coordinate has the unit in `length`, a heading degrees\n",
    );
    out.push_str(&defaults());
    Outcome::done(out)
}

fn defaults() -> String {
    use Quantity as Q;
    let rows: [(&str, Q); 10] = [
        ("held, facing", Q::Level),
        ("conductivity", Q::Conductivity),
        ("permittivity (relative)", Q::Permittivity),
        ("sheet_resistance", Q::SheetResistance),
        ("inflow", Q::Inflow),
        ("transfer", Q::Transfer),
        ("resistance", Q::Resistance),
        ("inflow, with sheet_resistance", Q::CurrentIn),
        ("transfer, with sheet_resistance", Q::FilmTransfer),
        ("resistance, with sheet_resistance", Q::FilmResistance),
    ];
    let mut heading = vec!["value".to_owned()];
    heading.extend(Trade::WORDS.map(str::to_owned));
    let mut table = Table::with_heading(heading);
    for (name, quantity) in rows {
        let cell = |word: &str| match Trade::from_word(word) {
            Some(trade) if belongs(trade, quantity) => trade.unit(quantity).name,
            _ => "-".to_owned(),
        };
        table.row([name.to_owned()].into_iter().chain(Trade::WORDS.map(cell)));
    }
    table.render()
}

/// Whether a trade has a quantity at all.
fn belongs(trade: Trade, quantity: Quantity) -> bool {
    use Quantity as Q;
    match quantity {
        Q::Level | Q::Inflow | Q::Transfer | Q::Resistance => true,
        Q::Conductivity => trade != Trade::Conductor,
        Q::Permittivity | Q::SheetResistance | Q::CurrentIn | Q::FilmTransfer | Q::FilmResistance => {
            trade == Trade::Conductor
        }
    }
}
