//! Second operands that no net carries: `b ⊕ mode` inside the covers of a mapped
//! adder-subtractor.
//!
//! There a sum flips with `a` and with `b`, and the gates that read `b` read one
//! and the same other free net all along the chain. For each such net the
//! exclusive or with the operand is added to the subject graph, and the entries
//! it makes are nominated beside the others. Links and proof decide as ever.

use crate::netlist::Netlist;
use crate::subject::{Linear, NodeId, NodeKind, Subject};
use fixedbitset::FixedBitSet;
use rustc_hash::FxHashMap;

/// Operands beside which a net must be read to be tried as their mode.
const FEWEST: u32 = 4;
/// Nets tried per sum.
const TRIED: usize = 2;
/// Wider gates are no part of a mapped adder.
const MOST_PINS: usize = 8;

/// A sum, its operand as it is, and its operand to be combined with the mode.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Moded {
    sum: NodeId,
    plain: NodeId,
    other: NodeId,
    mode: NodeId,
}

/// Sums with two or three free leaves and the modes to try for them.
pub(super) fn moded(netlist: &Netlist, subject: &Subject, pairs: &[Linear]) -> Vec<Moded> {
    let is_free = |node: NodeId| matches!(subject.kind(node), NodeKind::Free(_));
    let mut sums: Vec<(NodeId, [NodeId; 2])> = Vec::new();
    for own in pairs.chunk_by(|x, y| x.sum == y.sum) {
        let free = own.iter().map(|pair| pair.leaf).filter(|&l| is_free(l));
        let free: Vec<NodeId> = free.take(4).collect();
        match free[..] {
            [x, y] => sums.push((own[0].sum, [x, y])),
            // High up the mode itself seems to flip the sum.
            [x, y, z] => {
                let pairs = [[x, y], [x, z], [y, z]];
                sums.extend(pairs.map(|pair| (own[0].sum, pair)));
            }
            _ => {}
        }
    }
    if sums.len() < FEWEST as usize {
        return Vec::new();
    }
    let mut is_leaf = FixedBitSet::with_capacity(subject.node_count());
    for leaf in sums.iter().flat_map(|(_, leaves)| *leaves) {
        is_leaf.insert(leaf.index());
    }
    // Every leaf with the free nets that some gate reads beside it.
    let mut beside: Vec<(NodeId, NodeId)> = Vec::new();
    for gate in netlist.gates() {
        let pins = netlist.fan_ins(gate);
        if pins.len() > MOST_PINS {
            continue;
        }
        let free = pins.iter().map(|&net| subject.of_net(net).node());
        let free: Vec<NodeId> = free.filter(|&node| is_free(node)).collect();
        for &leaf in free.iter().filter(|leaf| is_leaf.contains(leaf.index())) {
            let others = free.iter().filter(|&&other| other != leaf);
            beside.extend(others.map(|&other| (leaf, other)));
        }
    }
    beside.sort_unstable();
    beside.dedup();
    let mut counts: FxHashMap<NodeId, u32> = FxHashMap::default();
    for &(_, mode) in &beside {
        *counts.entry(mode).or_insert(0) += 1;
    }
    let mut found = Vec::new();
    for (sum, leaves) in sums {
        for (at, &other) in leaves.iter().enumerate() {
            let start = beside.partition_point(|&(leaf, _)| leaf < other);
            let own = beside[start..]
                .iter()
                .take_while(|(leaf, _)| *leaf == other);
            let mut modes: Vec<NodeId> = own.map(|&(_, mode)| mode).collect();
            modes.retain(|mode| counts[mode] >= FEWEST && !leaves.contains(mode));
            modes.sort_by_key(|mode| (std::cmp::Reverse(counts[mode]), *mode));
            let plain = leaves[1 - at];
            found.extend(modes.iter().take(TRIED).map(|&mode| Moded {
                sum,
                plain,
                other,
                mode,
            }));
        }
    }
    found
}

/// Adds the exclusive ors to the subject graph. Returns the sum and the operands
/// of every new entry, by sum.
pub(super) fn add(subject: &mut Subject, moded: &[Moded]) -> Vec<(NodeId, NodeId, NodeId)> {
    let mut made: FxHashMap<(NodeId, NodeId), NodeId> = FxHashMap::default();
    moded
        .iter()
        .map(|each| {
            let node = *made.entry((each.other, each.mode)).or_insert_with(|| {
                let (other, mode) = (each.other.literal(), each.mode.literal());
                subject.xor(other, mode).node()
            });
            (each.sum, each.plain, node)
        })
        .collect()
}
