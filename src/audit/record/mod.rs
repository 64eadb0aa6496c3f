//! The audit record: everything carrywise says about one netlist, as one plain
//! value that every report renders and every later run can read back.
//!
//! Schema `carrywise/audit/1`. Field names and their order are part of the
//! schema: fields may be added, never renamed. A fact that this version does
//! not work out is `null` or an empty list, never a guess. Depths, arrivals and
//! slacks count in the unit of the delay model, named beside them, whole where the
//! model counts whole units and else to a thousandth.
//!
//! Net names are written as in the netlist; an inverted net is `~name`, and a
//! name that itself begins with `~` carries a backslash. A constant bit is the
//! number 0 or 1, never a string, so that a net called `1` stays apart from it.

mod chain;
mod closeup;
mod time;

pub use chain::{
    BuiltAsRecord, ChainDepth, ChainRecord, Change, Exercised, Feedback, NotPlanned, Operand,
    Place, ProposalRecord, TaxonomyRecord,
};

use crate::timing::Time;
pub use closeup::{BitRecord, Closeup, SchemeBest};
use serde::{Deserialize, Serialize};

/// The schema this version writes.
pub const SCHEMA: &str = "carrywise/audit/1";

/// The audit of one netlist.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct Audit {
    /// [`SCHEMA`].
    pub schema: String,
    /// What wrote the record.
    pub tool: Tool,
    /// What was read.
    pub netlist: NetlistFacts,
    /// Under which settings it was judged.
    pub settings: Settings,
    /// How much of the netlist could be seen.
    pub seen: Seen,
    /// Whether carry limits the block.
    pub verdict: Verdict,
    /// Depth of the block.
    pub depth: Depth,
    /// How many inputs its gates have.
    pub fan_in: FanIn,
    /// How many readers its nets have.
    pub fan_out: FanOut,
    /// The proven chains.
    pub chains: Vec<ChainRecord>,
    /// The proposals to apply together; none of them when nothing is gained.
    pub recommended_set: RecommendedSet,
    /// Chains that form an array of adder rows.
    pub arrays: Vec<ArrayRecord>,
    /// Recurrences found and not worth a row.
    pub recurrences_not_listed: u64,
    /// Candidates that were neither proven nor refuted.
    pub unproven: Vec<UnprovenRecord>,
    /// What a reviewer should look at.
    pub findings: Vec<Finding>,
    /// Findings beyond the cap on the list.
    pub findings_left_out: u64,
    /// What the user asserted about the block.
    pub assumed: Vec<AssumedRecord>,
    /// What this record does not settle.
    pub caution: String,
}

/// One assertion.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct AssumedRecord {
    /// What is asserted, in words.
    pub assumption: String,
    /// Why, as the user wrote it.
    pub why: String,
    /// How many nets, ports or path ends its narrowest pattern matches.
    pub places: u64,
    /// What came of it, where it can be measured by itself.
    pub effect: Option<String>,
}

/// The program.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Tool {
    /// Its name.
    pub name: String,
    /// Its version.
    pub version: String,
}

/// What was read.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct NetlistFacts {
    /// File name as given.
    pub file: String,
    /// `blif`, `aiger-ascii` or `aiger-binary`.
    pub format: String,
    /// Name of the top model, when the file gives one.
    pub model: Option<String>,
    /// SHA-256 of the bytes read.
    pub sha256: String,
    /// Input ports.
    pub inputs: u64,
    /// Output ports.
    pub outputs: u64,
    /// Registers.
    pub registers: u64,
    /// Gates.
    pub gates: u64,
    /// Instances without a known function.
    pub black_boxes: u64,
}

/// What was asked for.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Settings {
    /// What a gate costs.
    pub delay_model: DelayModelFacts,
    /// What one new gate may be: `single-operator` or `cover`.
    pub new_gates: String,
    /// Why.
    pub new_gates_reason: String,
    /// Most inputs of one new gate.
    pub gate_inputs: u64,
    /// Why.
    pub gate_inputs_reason: String,
    /// Chains with more than this share of the longest path of their kind to spare are
    /// not planned; null when all are.
    pub plan_margin_percent: Option<u64>,
    /// Chains below this width are left out.
    pub min_bits: u64,
    /// Solver conflicts allowed per proof.
    pub effort: u64,
    /// Seed of the simulation patterns.
    pub patterns_seed: u64,
    /// What every path end was held against; null when nothing was asked for.
    pub target_depth: Option<u64>,
    /// SHA-256 of the assumptions file; null without one.
    pub assumptions_sha256: Option<String>,
}

/// The delay model.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct DelayModelFacts {
    /// `unit`, `pairs`, `logical-effort`, `delay-table` or `library`.
    pub name: String,
    /// What one step counts, in the plural: `gate delays`.
    pub unit: String,
    /// How the figures of a file came about; null without one.
    pub note: Option<String>,
    /// Why the model does not fit the netlist; null where it does.
    pub misfit: Option<String>,
}

/// How much could be seen.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Seen {
    /// Gates whose function is known.
    pub gates_with_function: u64,
    /// Instances whose function is not.
    pub gates_without_function: u64,
    /// Nets treated as free inputs because of a fault.
    pub nets_cut: u64,
    /// Chains proven.
    pub chains_proven: u64,
    /// Of these, chains that decision diagrams confirmed as a second witness.
    pub chains_witnessed: u64,
    /// Candidates left undecided.
    pub chains_unproven: u64,
}

/// What limits the block.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Limit {
    /// Free carries would shorten the longest path.
    Carry,
    /// They would not.
    Elsewhere,
    /// Something hid the answer.
    Unknown,
}

/// The verdict.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Verdict {
    /// What limits the block.
    pub limit: Limit,
    /// The chain it is about, when there is one.
    pub chain: Option<String>,
    /// The verdict in one sentence.
    pub sentence: String,
    /// The same question per kind of path, longest first.
    pub by_path_kind: Vec<PathKindFacts>,
}

/// One kind of path.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct PathKindFacts {
    /// In words: `register→register`.
    pub path_kind: String,
    /// What limits the paths of this kind that are seen: `carry` or `elsewhere`.
    pub limit: Limit,
    /// The chain that does, when it is carry.
    pub chain: Option<String>,
    /// Depth of the longest path of this kind.
    pub longest: Time,
    /// Of these, levels inside proven chains, between operands and results.
    pub levels_in_carries: Time,
    /// The longest path when nothing is assumed; null without assumptions.
    pub longest_without_assumptions: Option<Time>,
    /// The longest path if every proven carry were ready with its operands.
    pub depth_if_carry_were_free: Time,
    /// Ends at which a path of this length arrives.
    pub ends_at_longest: u64,
    /// Depth of the deepest end below those; null when there is none.
    pub next_below: Option<Time>,
    /// Paths of this length, counted pin by pin, up to a thousand million million.
    pub paths_at_longest: u64,
    /// Ends at which a path arrives at most one unit earlier.
    pub ends_within_one: u64,
    /// Paths at most one unit shorter; null where the delay model counts finer than
    /// whole units.
    pub paths_within_one: Option<u64>,
}

/// Depth of the block.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Depth {
    /// The longest path of any kind.
    pub longest: Time,
    /// The longest path when nothing is assumed; null without assumptions.
    pub longest_without_assumptions: Option<Time>,
    /// The longest path with every transparent register open; null when the
    /// netlist has none.
    pub longest_through_transparent: Option<Time>,
    /// Ends that are reached later than they have to be; null where nothing says
    /// when that is.
    pub late_ends: Option<u64>,
    /// What the end with the least to spare has, negative when it is late; null
    /// where nothing says when an end has to be reached.
    pub least_to_spare: Option<Time>,
    /// The unit of every depth in this record.
    pub unit: String,
    /// The longest path with buffers and inverters free; null when the model
    /// has them free already.
    pub longest_free_buffers: Option<Time>,
    /// The longest path in inverters that drive four like them (FO4); null
    /// unless the model is logical effort.
    pub longest_in_fo4: Option<Time>,
    /// Path ends by depth, ascending. An end is an output, a register input or
    /// a box input.
    pub histogram: Vec<DepthBar>,
    /// The longest path, from its start.
    pub longest_path: Vec<PathStep>,
    /// Steps left out of the middle of `longest_path`.
    pub longest_path_left_out: u64,
    /// Depth by port bus.
    pub ports: Vec<PortDepth>,
}

/// One bar of the depth histogram.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct DepthBar {
    /// The depth.
    pub depth: Time,
    /// Path ends at it.
    pub outputs: u64,
}

/// One step of a path.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct PathStep {
    /// The net.
    pub net: String,
    /// What drives it, in a word or two.
    pub gate: String,
    /// Line of the driver; null when the source has no lines.
    pub line: Option<u64>,
    /// Inputs of the gate; null at a start.
    pub fan_in: Option<u64>,
    /// When the net settles.
    pub arrival: Time,
    /// The chain the step lies in.
    pub chain: Option<String>,
    /// The chain's position whose carry or sum the net is.
    pub bit: Option<u64>,
}

/// Depth seen from one port bus. A value is null where no such path exists.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct PortDepth {
    /// The bus.
    pub bus: String,
    /// Longest path from this input bus to a register.
    pub deepest_in: Option<Time>,
    /// Longest path from a register to this output bus.
    pub deepest_out: Option<Time>,
    /// Longest path from an input to an output that has this bus at an end.
    pub deepest_through: Option<Time>,
}

/// Gate inputs.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct FanIn {
    /// The most.
    pub largest: u64,
    /// The mean over all gates.
    pub mean: f64,
    /// Gates by number of inputs, ascending.
    pub histogram: Vec<FanInBar>,
}

/// One bar of the fan-in histogram.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct FanInBar {
    /// Inputs.
    pub fan_in: u64,
    /// Gates with that many.
    pub gates: u64,
}

/// Net readers.
#[derive(Clone, PartialEq, Debug, Serialize, Deserialize)]
pub struct FanOut {
    /// The most.
    pub largest: u64,
    /// The mean over all nets.
    pub mean: f64,
    /// Nets by number of readers, ascending.
    pub histogram: Vec<FanOutBar>,
}

/// One bar of the fan-out histogram.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct FanOutBar {
    /// Readers.
    pub fan_out: u64,
    /// Nets with that many.
    pub nets: u64,
}

/// Proposals to apply together.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct RecommendedSet {
    /// As `C1/P3`.
    pub proposals: Vec<String>,
    /// Depth of the block without and with them.
    pub block_depth: Change,
    /// The kind of path they shorten; null when there are none.
    pub path_kind: Option<String>,
    /// Depth of that kind without and with them.
    pub kind_depth: Option<Change>,
    /// Gates built for all of them, dry-run together.
    pub gates_added: u64,
    /// Gates that lose their last use.
    pub gates_removed: u64,
    /// The difference when a gate of k inputs counts k - 1.
    pub gate_equivalents_added: i64,
    /// Most inputs of a new gate.
    pub largest_fan_in: u64,
    /// Most readers of a net of the rebuild.
    pub largest_fan_out: u64,
    /// The path of that kind that is longest afterwards.
    pub takes_over: Option<String>,
    /// Chains on it, as `C2`.
    pub chains_left: Vec<String>,
    /// Why this set, or why none.
    pub sentence: String,
}

/// Adder rows that belong together.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct ArrayRecord {
    /// Its id.
    pub id: String,
    /// `multiplier` or `carry-save`.
    pub kind: String,
    /// A few words.
    pub label: String,
    /// Width of the operand that has a row per bit.
    pub rows: u64,
    /// Width of the other operand.
    pub columns: u64,
    /// Its adder cells.
    pub cells: ArrayCells,
    /// Its chains.
    pub chains: Vec<String>,
}

/// Adder cells of an array.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct ArrayCells {
    /// With three operands.
    pub full: u64,
    /// With two.
    pub half: u64,
}

/// A candidate left undecided.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct UnprovenRecord {
    /// Its width.
    pub bits: u64,
    /// What it seems to add.
    pub operands: Vec<String>,
    /// Why it stayed open.
    pub reason: String,
    /// Solver conflicts spent.
    pub effort: u64,
}

/// How much a finding matters.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Severity {
    /// Good to know.
    Note,
    /// Look at it.
    Warning,
    /// The netlist is faulty.
    Error,
}

impl Severity {
    /// The word of the record and the reports.
    pub fn word(self) -> &'static str {
        match self {
            Self::Note => "note",
            Self::Warning => "warning",
            Self::Error => "error",
        }
    }
}

/// One thing a reviewer should look at.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Finding {
    /// Slug of the rule; `carrywise explain` knows it.
    pub rule: String,
    /// How much it matters.
    pub severity: Severity,
    /// The chain it is about.
    pub chain: Option<String>,
    /// The net it is about.
    pub net: Option<String>,
    /// The line it is about.
    pub line: Option<u64>,
    /// What was seen.
    pub message: String,
    /// What to do.
    pub advice: String,
    /// Whether the budget accepts it.
    pub accepted: bool,
}

/// One bit of an operand: a constant or a net.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(untagged)]
pub enum Wire {
    /// 0 or 1.
    Constant(u8),
    /// A net by name, `~` before it when inverted.
    Net(String),
}

impl Wire {
    /// The net's name or the constant's digit.
    pub fn text(&self) -> &str {
        match self {
            Self::Constant(0) => "0",
            Self::Constant(_) => "1",
            Self::Net(name) => name,
        }
    }
}
