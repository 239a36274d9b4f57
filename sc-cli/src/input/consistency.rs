//! Rules that join several parts of a section: names that have to be used, a level that has to be fixed.

use super::fault::{Fault, FaultKind};
use super::model::{Condition, Probe, ProbePlace, SectionFile};
use super::nearest::nearest;
use super::place::Placed;
use super::reader::Reading;
use super::trade::Trade;

/// Reports what does not fit together, as far as the parts could be read.
pub(super) fn check(reading: &Reading) -> Vec<Fault> {
    let mut faults = Vec::new();
    let section = &reading.section.value;
    if let Some(names) = &reading.side_names {
        let mut distinct: Vec<&str> = Vec::new();
        for name in names {
            if !distinct.contains(&name.as_str()) {
                distinct.push(name);
            }
        }
        let used = section.sides.iter().map(|s| &s.name).chain(section.probes.iter().filter_map(probe_side));
        for name in used {
            unknown_side(name, &distinct, &mut faults);
        }
    }
    // With no outline at all there is nothing to hold yet.
    let outlined = !section.outline.is_empty();
    if reading.conditions_known && outlined {
        nothing_held(section, &mut faults);
        material_missing(section, &mut faults);
    }
    faults
}

fn probe_side(probe: &Probe) -> Option<&Placed<String>> {
    match &probe.place {
        ProbePlace::Point { side, .. } => side.as_ref(),
        ProbePlace::Along { side, .. } => Some(side),
    }
}

fn unknown_side(name: &Placed<String>, names: &[&str], faults: &mut Vec<Fault>) {
    if names.contains(&name.value.as_str()) {
        return;
    }
    let hint = match nearest(&name.value, names.iter().copied()) {
        Some(near) => format!("did you mean \"{near}\"?"),
        None if names.is_empty() => "the outline names its sides with `side`".to_owned(),
        None => format!("the sides are {}", quoted(names)),
    };
    faults.push(Fault::new(FaultKind::UnknownSide { name: name.value.clone() }, name.span).hint(hint));
}

fn quoted(names: &[&str]) -> String {
    names.iter().map(|n| format!("\"{n}\"")).collect::<Vec<_>>().join(", ")
}

fn nothing_held(section: &SectionFile, faults: &mut Vec<Fault>) {
    // A prescribed inflow does not fix a level: any constant may be added to the potential.
    let fixes = |c: &Condition| matches!(c, Condition::Held(_) | Condition::Surface(_));
    if section.sides.iter().any(|s| fixes(&s.condition.value)) {
        return;
    }
    let span = section.sides.first().map(|s| s.name.span.join(s.condition.span));
    let hint = "hold a side: [sides] \"name\" = { held = ... }";
    faults.push(Fault::new(FaultKind::NothingHeld, span).hint(hint));
}

fn material_missing(section: &SectionFile, faults: &mut Vec<Fault>) {
    if section.material.is_some() || section.trade == Trade::Plain {
        return;
    }
    let needs = match section.trade {
        Trade::Conductor => "material.permittivity or material.sheet_resistance",
        _ => "material.conductivity",
    };
    for side in &section.sides {
        let what = match side.condition.value {
            Condition::Inflow(_) => "an inflow",
            Condition::Surface(_) => "a surface",
            Condition::Held(_) | Condition::Insulated => continue,
        };
        faults.push(Fault::new(FaultKind::MaterialMissing { what, needs }, side.condition.span));
    }
}
