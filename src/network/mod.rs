//! Carry networks: their structure, the published schemes that shape them, and
//! the builder that turns one into gates.
//!
//! This room knows positions and spans, and no netlist: gates are made through
//! the [`GateSink`] a caller hands in, so that an estimate and a rebuild make
//! the very same gates.

mod build;
mod carry_network;

pub use build::{Addends, Built, GateSink, Limits, Propagate, build};
pub use carry_network::{CarryNetwork, Node, NodeId, Span};
