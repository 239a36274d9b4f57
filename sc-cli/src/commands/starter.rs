//! `starter`: a commented section to start from.

use super::directed;
use crate::arguments::{StarterArguments, StarterTrade};
use crate::outcome::Outcome;

/// Runs the command.
pub fn run(arguments: &StarterArguments) -> Outcome {
    directed(Outcome::done(starter(arguments.trade)), &arguments.destination)
}

/// The starter section of a trade.
pub fn starter(trade: StarterTrade) -> &'static str {
    match trade {
        StarterTrade::Seepage => include_str!("../starters/seepage.toml"),
        StarterTrade::Heat => include_str!("../starters/heat.toml"),
        StarterTrade::Conductor => include_str!("../starters/conductor.toml"),
        StarterTrade::Plain => include_str!("../starters/plain.toml"),
    }
}
