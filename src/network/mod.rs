//! Carry networks: their structure, the published schemes that shape them, and
//! the builder that turns one into gates.
//!
//! This room knows positions and spans, and no netlist: gates are made through
//! the [`GateSink`] a caller hands in, so that an estimate and a rebuild make
//! the very same gates. [`CountingSink`] is the sink for when there is no
//! netlist at all.

mod and_or_path;
mod arrival_aware;
mod build;
mod carry_network;
mod counting;
mod cover;
mod cover_signals;
mod demand;
mod estimate;
mod fulfil;
mod gates;
mod measures;
pub mod profile;
pub mod schemes;
mod signals;
mod sum_end;
mod table;

pub use and_or_path::PathTimes;
pub use arrival_aware::{Leaves, Steps, Times};
pub use build::{Addends, Built, GateSink, Limits, Propagate, build};
pub use carry_network::{CarryNetwork, Node, NodeId, Span};
pub use counting::{CountedSignal, CountingSink, Price, XorForm};
pub use estimate::Estimate;
pub use profile::{Costs, Profile, Required};
pub use signals::{Carry, SignalId, SignalNode};
