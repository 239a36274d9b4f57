//! Answers: conductances, fluxes, potentials, gradients and corner coefficients of a section, each with an error bound.

mod bounded;
mod channel;
mod corner;
mod estimate;
mod flow_net;
mod probe;
mod solution;

pub use bounded::Bounded;
pub use channel::{ArmFlow, ChannelError, channel_excess};
pub use corner::{Corner, CornerKind};
pub use flow_net::{FlowNet, FlowNetOptions, NetLine, Terminus, suitable_drops};
pub use probe::{Gradient, Probe, ProbeError};
pub use solution::{Matrix, Solution, SolveError, SolveOptions};
