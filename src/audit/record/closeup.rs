//! The record of one chain bit by bit (`schema: carrywise/closeup/1`).
//!
//! It shares the facts about netlist and settings with the audit's record, and the
//! chain's own part of it. Bits run from the least significant up.

use super::{ChainRecord, Change, NetlistFacts, Settings, Tool, Wire};
use crate::timing::Time;
use serde::{Deserialize, Serialize};

/// One chain, looked at closely.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Closeup {
    /// The schema of this record.
    pub schema: String,
    /// What made it.
    pub tool: Tool,
    /// What was read.
    pub netlist: NetlistFacts,
    /// Under which settings.
    pub settings: Settings,
    /// Depth of the block.
    pub block_depth: Time,
    /// Unit of times.
    pub unit: String,
    /// The chain as an audit tells it.
    pub chain: ChainRecord,
    /// Its bits.
    pub bits: Vec<BitRecord>,
    /// The best of every scheme, best first, and the recommended one among them.
    pub schemes: Vec<SchemeBest>,
    /// Why one is recommended, or none.
    pub reason: String,
    /// What this record does not settle.
    pub caution: String,
}

/// One bit of a chain.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct BitRecord {
    /// Which, from 0.
    pub bit: u64,
    /// What is added.
    pub operands: Vec<Wire>,
    /// When the later of them is ready.
    pub arrive: Option<Time>,
    /// The sum's first name.
    pub sum: Option<Wire>,
    /// When it is ready.
    pub sum_arrives: Option<Time>,
    /// The first name of the carry out of the bit; null where no net shows it.
    pub carry: Option<Wire>,
    /// When it is ready.
    pub carry_arrives: Option<Time>,
    /// The carries it is made from, by bit, -1 being the carry-in; empty when from
    /// operands alone, null when not known.
    pub made_from: Option<Vec<i64>>,
    /// When it would be ready with the recommended rebuild, else with the fastest.
    pub carry_then: Option<Time>,
}

/// The best of one scheme.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct SchemeBest {
    /// Its id among the chain's proposals, when it is listed there.
    pub proposal: Option<String>,
    /// Whether it is the one to take.
    pub recommended: bool,
    /// The scheme.
    pub scheme: String,
    /// Group size, where the scheme has one.
    pub group: Option<u64>,
    /// Levels of the carry network.
    pub levels: u64,
    /// Most spans joined by one node.
    pub valency: u64,
    /// Depth at the chain's latest result.
    pub chain_depth: Change,
    /// Depth of the block.
    pub block_depth: Change,
    /// Gates built.
    pub gates_added: u64,
    /// Gates that lose their last use.
    pub gates_removed: u64,
    /// The difference when a gate of k inputs counts k - 1.
    pub gate_equivalents_added: i64,
    /// Most inputs of a new gate.
    pub largest_fan_in: u64,
    /// Most readers of a net of the rebuild.
    pub largest_fan_out: u64,
    /// Above what any network could reach.
    pub above_bound: Time,
}
