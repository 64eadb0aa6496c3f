//! Functional linearity: the nodes that flip whenever one of their fan-ins, near
//! or far, flips.
//!
//! `s = x ⊕ rest` holds, with `x` a cut point, exactly when `s` changes under
//! every pattern once `x` is complemented. Complementing `x` and simulating what
//! it reaches therefore finds the operands of a sum whatever its gates are:
//! re-associated, merged into covers, or behind the multiplexers of select and
//! conditional-sum adders, which no cut of three leaves shows. A few words of 64
//! patterns nominate; signatures and proof decide.
//!
//! A change is followed as long as it is complete now and then: some levels
//! without a node that flips under all patterns end it, so a carry is followed
//! over a few positions only and the pass stays linear in the size of the graph.

use super::graph::{NodeId, NodeKind, Subject};
use fixedbitset::FixedBitSet;
use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// Levels a partial change is followed.
const PARTIAL_LEVELS: u8 = 12;
/// Nodes visited for one free net, and for one inner net.
const VISITS_FREE: usize = 4096;
const VISITS_INNER: usize = 256;

/// A node and a leaf in which it is linear.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Linear {
    /// The node that flips.
    pub sum: NodeId,
    /// What was complemented.
    pub leaf: NodeId,
}

/// Readers of every node, in one array.
struct Readers {
    starts: Vec<u32>,
    readers: Vec<u32>,
}

impl Readers {
    fn of(subject: &Subject) -> Self {
        let mut starts = vec![0u32; subject.node_count() + 1];
        let fan_ins = |node| match subject.kind(node) {
            NodeKind::And(x, y) => Some((x.node(), y.node())),
            NodeKind::Xor(x, y) => Some((x, y)),
            NodeKind::False | NodeKind::Free(_) => None,
        };
        for (x, y) in subject.nodes().filter_map(fan_ins) {
            starts[x.index() + 1] += 1;
            starts[y.index() + 1] += 1;
        }
        for i in 1..starts.len() {
            starts[i] += starts[i - 1];
        }
        let mut readers = vec![0u32; starts[starts.len() - 1] as usize];
        let mut next = starts.clone();
        for node in subject.nodes() {
            let Some((x, y)) = fan_ins(node) else {
                continue;
            };
            for fan_in in [x, y] {
                let at = &mut next[fan_in.index()];
                readers[*at as usize] = node.0;
                *at += 1;
            }
        }
        Self { starts, readers }
    }

    fn of_node(&self, node: u32) -> &[u32] {
        let i = node as usize;
        &self.readers[self.starts[i] as usize..self.starts[i + 1] as usize]
    }
}

/// What is known of a node while one leaf is complemented.
#[derive(Clone, Copy, Default)]
struct Change {
    /// The leaf this entry belongs to, plus one.
    leaf: u32,
    /// Levels since the last complete change.
    partial: u8,
    /// Patterns under which the node changes.
    words: Words,
}

/// How many words of 64 patterns nominate.
pub const FLIP_WORDS: usize = 2;

/// A node's values.
pub type Words = [u64; FLIP_WORDS];

const EVERY: Words = [!0; FLIP_WORDS];
const NONE: Words = [0; FLIP_WORDS];

/// The pairs `(sum, leaf)` among `named` nodes whose sum flips under all
/// patterns of `values` (some words per node) once the leaf is complemented, sorted.
/// Leaves are free nodes, and inner nodes with two readers or more.
pub fn linear_pairs(subject: &Subject, values: &[Words], named: &FixedBitSet) -> Vec<Linear> {
    let readers = Readers::of(subject);
    let mut changes = vec![Change::default(); subject.node_count()];
    let mut queue: BinaryHeap<Reverse<u32>> = BinaryHeap::new();
    let mut pairs = Vec::new();
    for leaf in subject.nodes().skip(1) {
        let is_free = matches!(subject.kind(leaf), NodeKind::Free(_));
        if !named.contains(leaf.index()) || !is_free && readers.of_node(leaf.0).len() < 2 {
            continue;
        }
        let mut visits = if is_free { VISITS_FREE } else { VISITS_INNER };
        let mark = leaf.0 + 1;
        changes[leaf.index()] = Change {
            leaf: mark,
            partial: 0,
            words: EVERY,
        };
        queue.clear();
        queue.extend(readers.of_node(leaf.0).iter().copied().map(Reverse));
        let mut last = leaf.0;
        while let Some(Reverse(node)) = queue.pop() {
            if node == last {
                continue;
            }
            last = node;
            visits -= 1;
            let id = NodeId(node);
            let change_of = |fan_in: NodeId| {
                let change = changes[fan_in.index()];
                if change.leaf == mark {
                    change
                } else {
                    Change::default()
                }
            };
            let (words, partial) = match subject.kind(id) {
                NodeKind::And(x, y) => {
                    let (cx, cy) = (change_of(x.node()), change_of(y.node()));
                    let mask = |inverted: bool| if inverted { !0 } else { 0 };
                    let (mx, my) = (mask(x.is_inverted()), mask(y.is_inverted()));
                    let (vx, vy) = (&values[x.node().index()], &values[y.node().index()]);
                    let mut words = values[id.index()];
                    for i in 0..FLIP_WORDS {
                        words[i] ^= (vx[i] ^ cx.words[i] ^ mx) & (vy[i] ^ cy.words[i] ^ my);
                    }
                    (words, cx.partial.max(cy.partial))
                }
                NodeKind::Xor(x, y) => {
                    let (cx, cy) = (change_of(x), change_of(y));
                    let words = std::array::from_fn(|i| cx.words[i] ^ cy.words[i]);
                    (words, cx.partial.max(cy.partial))
                }
                NodeKind::False | NodeKind::Free(_) => continue,
            };
            if words == NONE {
                continue;
            }
            let partial = if words == EVERY { 0 } else { partial + 1 };
            changes[id.index()] = Change {
                leaf: mark,
                partial,
                words,
            };
            if words == EVERY && named.contains(id.index()) {
                pairs.push(Linear { sum: id, leaf });
            }
            if visits == 0 {
                break;
            }
            if partial < PARTIAL_LEVELS {
                queue.extend(readers.of_node(node).iter().copied().map(Reverse));
            }
        }
    }
    pairs.sort_unstable();
    pairs
}
