//! The part of the record that describes one proven chain and what could be
//! built in its place.
//!
//! Everything here is in the polarity of the arithmetic, not of the wires: the
//! subtrahend of a subtractor is listed as it is subtracted, although the
//! netlist adds its complement. Lists over bits run from the least significant
//! bit up.

use super::Wire;
use crate::timing::Time;
use serde::{Deserialize, Serialize};

/// A proven chain.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct ChainRecord {
    /// `C1`, `C2`, …: widest first, then by first operand net.
    pub id: String,
    /// The same for the same chain in another revision: made from ports and
    /// registers, not from line numbers.
    pub fingerprint: String,
    /// The array it is a row of.
    pub array: Option<String>,
    /// `adder`, `subtractor`, `incrementer`, `decrementer` or `comparator`.
    pub kind: String,
    /// Positions with an operand bit that is not constant.
    pub bits: u64,
    /// What is added.
    pub operands: Vec<Operand>,
    /// Null, a net, or 0 or 1.
    pub carry_in: Option<Wire>,
    /// `carry` or `borrow`.
    pub carry_form: String,
    /// The net the last carry leaves by; null when it goes nowhere.
    pub carry_out: Option<String>,
    /// Carries below the last that something outside the chain reads.
    pub carry_taps: Vec<String>,
    /// The sums.
    pub sums: Vec<String>,
    /// A comparator's result.
    pub result: Option<String>,
    /// A comparator's relation.
    pub relation: Option<String>,
    /// Whether a comparator is signed.
    pub signed: Option<bool>,
    /// An adder-subtractor's net that complements the operand.
    pub mode: Option<String>,
    /// The registers through which the sums come back as an operand.
    pub feedback: Option<Feedback>,
    /// An earlier chain with the same operands and function.
    pub duplicates: Option<String>,
    /// How it is built today.
    pub built_as: BuiltAsRecord,
    /// Always true: what is not proven is listed elsewhere.
    pub proven: bool,
    /// Where it stands in the source.
    pub place: Place,
    /// When its nets settle.
    pub depth: ChainDepth,
    /// Whether a longest path of the block runs through a sum or carry of it.
    pub on_longest_path: bool,
    /// How much later its results could be without missing what `slack_against`
    /// names, negative where they do; null when no path leads through it.
    pub slack: Option<Time>,
    /// What slack is counted against: `required time`, `cycle`, `target depth`, or
    /// else the `longest path of the kind`; null when no path leads through it.
    pub slack_against: Option<String>,
    /// Why no rebuild was tried; null when some were.
    pub not_planned: Option<NotPlanned>,
    /// The rebuild that saves gates while nothing needs the chain to be so fast, as `P3`.
    pub cheaper: Option<String>,
    /// The rebuilds worth choosing between.
    pub proposals: Vec<ProposalRecord>,
}

impl ChainRecord {
    /// What is computed, written as arithmetic on the operands' names:
    /// `level[15:0] + offset[15:0]`, `count[7:0] + 1`, `a - b - 1 + borrow_in`,
    /// `a +/- b, minus when sub`, `level[15:0] > limit[15:0]`.
    pub fn formula(&self) -> String {
        let names: Vec<&str> = self.operands.iter().map(|o| o.name.as_str()).collect();
        if let ([a, b], Some(relation)) = (names.as_slice(), &self.relation) {
            let sign = match relation.as_str() {
                "less" => "<",
                "less-or-equal" => "<=",
                "greater" => ">",
                "greater-or-equal" => ">=",
                other => other,
            };
            return match &self.carry_in {
                Some(Wire::Net(net)) => format!("{a} + {net} {sign} {b}"),
                _ => format!("{a} {sign} {b}"),
            };
        }
        if let (Some(mode), [a, b]) = (&self.mode, &names[..]) {
            return match &self.carry_in {
                Some(Wire::Net(net)) if net == mode => format!("{a} +/- {b}, minus when {mode}"),
                Some(carry_in) => format!("{a} + ({b} xor {mode}) + {}", carry_in.text()),
                None => format!("{a} + ({b} xor {mode})"),
            };
        }
        let (first, constant) = match self.kind.as_str() {
            "subtractor" => (names.join(" - "), -1),
            "decrementer" => (names.join(" + "), -1),
            _ => (names.join(" + "), 0),
        };
        let (constant, net) = match &self.carry_in {
            Some(Wire::Constant(one)) => (constant + i32::from(*one), None),
            Some(Wire::Net(net)) => (constant, Some(net)),
            None => (constant, None),
        };
        let mut text = first;
        match constant {
            0 => {}
            1.. => text.push_str(" + 1"),
            _ => text.push_str(" - 1"),
        }
        if let Some(net) = net {
            text.push_str(" + ");
            text.push_str(net);
        }
        text
    }
}

/// One operand.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Operand {
    /// The bus, `level[15:0]`, or first and last net.
    pub name: String,
    /// Its bits.
    pub nets: Vec<Wire>,
}

/// Sums stored and added again.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Feedback {
    /// `accumulator` or `counter`.
    pub role: String,
    /// Outputs of the registers.
    pub registers: Vec<String>,
}

/// How a chain is built today.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct BuiltAsRecord {
    /// `ripple`, `lookahead`, `skip`, `select`, `increment`, `conditional-sum`,
    /// `prefix`, `tree` or `mixed`.
    pub name: String,
    /// The published scheme it is most like, when it is like one.
    pub nearest: Option<String>,
    /// Positions of one group or block.
    pub group: Option<u64>,
    /// Nodes of its carry network on the longest way to a result.
    pub levels: Option<u64>,
    /// Nodes of its carry network.
    pub cells: Option<u64>,
    /// Most readers of one net inside the chain.
    pub largest_fan_out: Option<u64>,
    /// Of a prefix network, its place in Harris' taxonomy.
    pub taxonomy: Option<TaxonomyRecord>,
    /// A few words more.
    pub detail: String,
}

/// The place of a prefix network in the taxonomy of D. Harris (2003).
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct TaxonomyRecord {
    /// Levels beyond the fewest possible.
    pub l: u64,
    /// The logarithm of the fan-out.
    pub f: u64,
    /// The logarithm of the wiring tracks.
    pub t: u64,
}

/// Where a chain stands in the source.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Place {
    /// Instance names from the top down; empty at the top.
    pub instance: Vec<String>,
    /// First line of its carries and sums; null when the source has no lines.
    pub line_first: Option<u64>,
    /// Last line.
    pub line_last: Option<u64>,
}

/// When a chain's nets settle.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct ChainDepth {
    /// Its latest operand bit, the carry-in included.
    pub arrives: Time,
    /// Its latest sum or carry.
    pub leaves: Time,
    /// The carry out of each bit; null where no net carries it.
    pub carries: Vec<Option<Time>>,
    /// Whether the longest path through it can be exercised.
    pub exercised: Option<Exercised>,
}

/// Whether a path can be exercised.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Exercised {
    /// `possible`, `impossible` or `undecided`.
    pub verdict: String,
    /// The longest depth that can be.
    pub depth: Option<Time>,
}

/// Why a chain was not planned.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct NotPlanned {
    /// The reason.
    pub why: String,
    /// Its slack, where a path leads through it.
    pub slack: Option<Time>,
}

/// A figure without and with a proposal.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Change {
    /// As read.
    pub before: Time,
    /// After.
    pub after: Time,
}

/// A rebuild of one chain, made gate by gate on a scratch copy and measured.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct ProposalRecord {
    /// `P1`, `P2`, … within the chain.
    pub id: String,
    /// A published scheme.
    pub scheme: String,
    /// Group size, where the scheme has one.
    pub group: Option<u64>,
    /// Levels of the carry network.
    pub levels: u64,
    /// Most spans joined by one node.
    pub valency: u64,
    /// Whether it ends in a choice between two sums.
    pub select_end: bool,
    /// Whether no other proposal is better in every respect.
    pub on_front: bool,
    /// Whether it is the one to take.
    pub recommended: bool,
    /// Why it is, or is not.
    pub reason: Option<String>,
    /// Delay models under which the recommendation is the same.
    pub holds_under: Vec<String>,
    /// Delay models under which another scheme is recommended, or none; models in
    /// neither list were not tried.
    pub flips_under: Vec<String>,
    /// Depth at the chain's latest result.
    pub chain_depth: Change,
    /// Depth of the block.
    pub block_depth: Change,
    /// The path that is longest afterwards.
    pub takes_over: Option<String>,
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
    /// Wiring tracks, where published.
    pub wire_tracks: Option<u64>,
    /// How far above what any network could reach.
    pub above_bound: Option<Time>,
    /// When each carry settles, null where it is constant; for the recommended
    /// one only.
    pub carries: Option<Vec<Option<Time>>>,
    /// Its span nodes, each `[7:4] = [7:6] [5:4]`, position -1 being the
    /// carry-in; for the recommended one only.
    pub network: Option<Vec<String>>,
}
