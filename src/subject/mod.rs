//! The subject graph: the netlist as two-input AND and XOR nodes with free
//! inversion, for looking only. It is never written back, and nothing in the
//! netlist is merged because it is merged here.
//!
//! Per node the graph keeps two 32-bit fan-ins; signatures add a running hash;
//! cuts are streamed and leave only what they nominated.

mod cuts;
mod decompose;
mod flips;
mod graph;
mod patterns;
mod signature;

pub use cuts::{LinearSet, linear_sets};
pub use flips::{FLIP_WORDS, Linear, Words, linear_pairs};
pub use graph::{Literal, NodeId, NodeKind, Subject};
pub use patterns::Patterns;
pub(crate) use signature::Running;
pub use signature::{Hash, Signatures, Simulation, rare_values};
