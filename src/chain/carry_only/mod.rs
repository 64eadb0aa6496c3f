//! Carries without sums: comparators, and rows whose sums are gated away.
//!
//! In comes what the search for chains with sums left over; out come more
//! chains, each proven as those are: the carries are the stated majorities of
//! their operands for every value of the free nets, and the last one is the
//! comparison told. A run of majorities whose sums are there too is no
//! comparator but an adder that was read elsewhere, or not at all; it is counted
//! and not listed.
//!
//! `majority` nominates, `link` makes paths, `prove` decides, `compare` reads.

mod compare;
mod link;
mod majority;
mod prove;

use super::collect::Nets;
use super::find::Options;
use super::label::Labels;
use super::model::Chain;
use super::trim::independent_positions;
use super::verify::Theorem;
use crate::netlist::Netlist;
use crate::subject::{Hash, Literal, NodeId, NodeKind, Patterns, Signatures, Subject};
use compare::Reader;
use fixedbitset::FixedBitSet;
use link::{Linker, Path};
use rustc_hash::FxHashSet;

/// What the search for chains with sums hands on.
pub(super) struct Ground<'a> {
    pub(super) netlist: &'a Netlist,
    pub(super) subject: &'a Subject,
    pub(super) signatures: &'a Signatures,
    pub(super) patterns: &'a Patterns,
    pub(super) on_net: &'a FixedBitSet,
    pub(super) labels: &'a Labels<'a>,
    pub(super) options: Options,
    /// Subject nodes one proof may encode.
    pub(super) proof_nodes: usize,
}

/// A candidate left open: its operand literals, and the conflicts spent.
pub(super) struct Open {
    pub(super) bits: Vec<(Literal, Literal)>,
    pub(super) conflicts: u64,
}

/// What was found.
#[derive(Default)]
pub(super) struct CarryOnly {
    pub(super) chains: Vec<Chain>,
    pub(super) open: Vec<Open>,
    /// Recurrences that are true and not worth a line.
    pub(super) not_listed: u64,
}

/// Nodes between the operands and the results of chains already found.
fn owned(subject: &Subject, theorems: &[Theorem]) -> FixedBitSet {
    let mut owned = FixedBitSet::with_capacity(subject.node_count());
    let mut stack: Vec<NodeId> = Vec::new();
    for theorem in theorems {
        let operands: FxHashSet<NodeId> = theorem
            .bits
            .iter()
            .flat_map(|bits| [bits.a.node(), bits.b.node()])
            .chain([theorem.carry_in.node()])
            .collect();
        let results = theorem.sums.iter().chain(&theorem.carries).flatten();
        stack.extend(results.map(|literal| literal.node()));
        while let Some(node) = stack.pop() {
            if operands.contains(&node) || owned.put(node.index()) {
                continue;
            }
            match subject.kind(node) {
                NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
                NodeKind::Xor(x, y) => stack.extend([x, y]),
                NodeKind::False | NodeKind::Free(_) => {}
            }
        }
    }
    owned
}

/// Finds and proves the chains without sums.
pub(super) fn find(ground: &Ground<'_>, theorems: &[Theorem]) -> CarryOnly {
    let mut found = CarryOnly::default();
    let owned = owned(ground.subject, theorems);
    let majorities = majority::majorities(
        ground.subject,
        ground.signatures,
        ground.patterns,
        ground.on_net,
        &owned,
    );
    let linker = Linker {
        subject: ground.subject,
        labels: ground.labels,
        on_net: ground.on_net,
        majorities: &majorities,
    };
    let mut paths = linker.paths(ground.options.min_bits.max(2));
    let before = paths.len();
    drop_with_sums(ground, &mut paths);
    found.not_listed += (before - paths.len()) as u64;
    let proven = settle(ground, paths, &mut found);
    let reader = Reader {
        netlist: ground.netlist,
        subject: ground.subject,
        labels: ground.labels,
        nets: Nets::of(ground.netlist, ground.subject, &proven),
    };
    for theorem in proven {
        match reader.chain(theorem) {
            Some(chain) => found.chains.push(chain),
            None => found.not_listed += 1,
        }
    }
    found
}

/// Drops paths of which more than half the positions show their sum on a net.
fn drop_with_sums(ground: &Ground<'_>, paths: &mut Vec<Path>) {
    let hash = |literal: Literal| ground.signatures.hash(literal.node());
    let sums = |path: &Path| -> Vec<Hash> {
        let below = [path.carry_in]
            .into_iter()
            .chain(path.carries.iter().copied());
        let each = path.bits.iter().zip(below);
        each.map(|(&(x, y), carry)| hash(x) ^ hash(y) ^ hash(carry))
            .collect()
    };
    let wanted: FxHashSet<Hash> = paths.iter().flat_map(&sums).collect();
    let mut present: FxHashSet<Hash> = FxHashSet::default();
    if !wanted.is_empty() {
        for node in ground.subject.nodes() {
            let hash = ground.signatures.hash(node);
            if ground.on_net.contains(node.index()) && wanted.contains(&hash) {
                present.insert(hash);
            }
        }
    }
    paths.retain(|path| {
        // The lowest sum of two bits is their exclusive or, and means nothing.
        let sums = &sums(path)[1..];
        let shown = sums.iter().filter(|sum| present.contains(sum)).count();
        2 * shown <= sums.len()
    });
}

/// Proves every path; keeps what is long enough and does not feed itself.
fn settle(ground: &Ground<'_>, paths: Vec<Path>, found: &mut CarryOnly) -> Vec<Theorem> {
    let shortest = ground.options.min_bits.max(2);
    let mut proven = Vec::new();
    for path in paths {
        let (mut open, mut conflicts) = (Vec::new(), 0);
        let mut waiting = Some(path);
        while let Some(path) = waiting.take() {
            let outcome = prove::prove(ground, &path);
            let positions = outcome.theorem.bits.len();
            if outcome.undecided {
                open.push(path.bits[positions]);
                conflicts += outcome.conflicts;
            }
            // Above a position that does not hold the rest is tried on its own.
            let is_named = |carry: Literal| ground.on_net.contains(carry.node().index());
            waiting = path
                .above(positions)
                .filter(|rest| rest.bits.len() >= shortest && is_named(rest.carry_in));
            proven.extend(usable(ground, outcome.theorem));
        }
        if open.len() >= shortest {
            found.open.push(Open {
                bits: open,
                conflicts,
            });
        }
    }
    proven
}

/// The part of a theorem that is a chain: it does not feed itself, and its last
/// carry is on a net.
fn usable(ground: &Ground<'_>, mut theorem: Theorem) -> Option<Theorem> {
    if theorem.bits.is_empty() {
        return None;
    }
    theorem.truncate(independent_positions(ground.subject, &theorem));
    let is_named = |carry: &Literal| ground.on_net.contains(carry.node().index());
    while let Some(top) = theorem.carries.last() {
        if top.iter().any(is_named) {
            break;
        }
        theorem.truncate(theorem.bits.len() - 1);
    }
    (theorem.bits.len() >= ground.options.min_bits.max(2)).then_some(theorem)
}
