//! What the numbers do not say, by trade.

use crate::input::Trade;

/// The limits of every answer.
const MODEL: &str = "The section is taken as plane, steady and of one uniform material with the boundary as drawn; \
    there is no free surface, no layering of materials and nothing that changes along the run. The error bounds are \
    those of the computation and say nothing of these assumptions.";

/// What a layered fabric adds.
const FABRIC: &str = "Layered fabric: the field depends on the ratio of the conductivities along and across the layers, \
    which is seldom measured and often known no better than each of them. Vary it, and the dip, before relying on a \
    number.";

/// The cautions of a trade: what can hurt someone first, then the limits.
pub fn cautions(trade: Trade, layered: bool) -> Vec<&'static str> {
    let own: &[&str] = match trade {
        Trade::Seepage => &[
            "Piping and heave: a computed gradient does not show a structure to be safe. Grading, filters, layers, \
             uplift of a soil block, erosion along the structure and defects are not in the section; follow the local \
             code, and let a licensed engineer judge the result.",
            "Hydraulic conductivity is often known no better than to a factor of ten (common practice): the fluxes are \
             as uncertain as that, however small their error bounds. Heads and gradients do not depend on its size.",
        ],
        Trade::Heat => &[
            "Mould, condensation and frost: temperatures computed here hold no moisture, no moving air and no change \
             of weather. Surface resistances and limits are those of the local code; let a licensed professional \
             judge what depends on them.",
            "Thermal conductivity varies with moisture, age and make, often by far more than the error bounds; the \
             heat flow is as uncertain as that.",
        ],
        Trade::Conductor => &[
            "Breakdown and shock: no strength of an insulation follows from a computed field. At a sharp edge the \
             field has no finite maximum; rounding, surface state, pollution and frequency decide. Follow the \
             applicable standards, and let a licensed engineer judge what carries a dangerous voltage.",
            "Permittivity and sheet resistance vary with batch, temperature and frequency, often by far more than the \
             error bounds.",
        ],
        Trade::Plain => &[],
    };
    own.iter().copied().chain(layered.then_some(FABRIC)).chain([MODEL]).collect()
}
