//! Promised keys that are read but not answered yet, refused by name.
//!
//! The reader puts all of them into the model. When one of them is answered, its lines here go.

use super::fault::{Fault, FaultKind};
use super::model::{Condition, Datum, Region, SectionFile};
use super::place::{Placed, Span};

/// One fault for each use of what is not supported yet.
pub(super) fn check(section: &SectionFile) -> Vec<Fault> {
    let mut faults = Vec::new();
    let mut refuse = |feature, span: Span| faults.push(Fault::new(FaultKind::NotYet { feature }, span));

    if let Some(first) = section.within.first() {
        let last = section.within.last().map_or(first.span, |v| v.span);
        refuse("an inner polygon (`within`)", first.span.join(last));
    }
    if section.region.value == Region::Outside {
        refuse("the plane outside the outline (`region = \"outside\"`)", section.region.span);
    }
    for side in &section.sides {
        match &side.condition.value {
            Condition::Held(Placed { value: Datum::Varying(_), span }) => {
                refuse("a held value that varies", *span);
            }
            Condition::Held(Placed { value: Datum::Table(_), span }) => {
                refuse("a held value from a table", *span);
            }
            Condition::Inflow(datum) => refuse("a prescribed `inflow`", datum.span),
            Condition::Surface(_) => refuse("a film (`surface`)", side.condition.span),
            Condition::Held(Placed { value: Datum::Constant(_), .. }) | Condition::Insulated => {}
        }
    }
    faults
}
