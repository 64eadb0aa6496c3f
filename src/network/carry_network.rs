//! The carry network: a DAG of span nodes over the positions of a chain, and of
//! signals over the spans ([`super::signals`]).
//!
//! A node stands for the group generate G and group propagate P of its span;
//! position -1 is the carry-in, whose G is the carry-in itself. A combine node
//! joins adjacent spans, most significant first:
//! `G = G1 + P1·G2 + P1·P2·G3 …`, `P = P1·P2·P3 …` (the group terms of
//! carry-lookahead; Weinberger and Smith 1958). Adjacent spans may overlap: G and
//! P are idempotent, so what two parts share counts once. The carry out of
//! position `i` is the G of a node that spans from `i` down to the lowest
//! position, or a signal.

use super::signals::{Carry, SignalNode, Signals};

/// One node of a [`CarryNetwork`].
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct NodeId(u32);

impl NodeId {
    /// The id as an array index.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// An interval of positions, both ends included; -1 is the carry-in.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Span {
    /// Most significant position.
    pub high: i32,
    /// Least significant position.
    pub low: i32,
}

/// What a node is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Node<'a> {
    /// The carry-in; it has a generate only.
    CarryIn,
    /// g and p of one position.
    Leaf(usize),
    /// Adjacent spans joined, most significant first; at least two.
    Combine(&'a [NodeId]),
}

/// A carry network; see the head of the module.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct CarryNetwork {
    positions: usize,
    has_carry_in: bool,
    spans: Vec<Span>,
    part_starts: Vec<u32>,
    parts: Vec<NodeId>,
    /// Rows a scheme draws its network in: of each combine node, where rows are
    /// stated, and whether the next one begins another.
    rows: Vec<u32>,
    row_begins: bool,
    carries: Vec<NodeId>,
    pub(super) signals: Signals,
}

impl CarryNetwork {
    /// A network of leaves only. Its carries are still the bare leaves, which
    /// is true of position 0 without carry-in and wrong elsewhere: a scheme
    /// sets each with [`Self::set_carry`].
    pub fn new(positions: usize, has_carry_in: bool) -> Self {
        assert!(positions > 0 && positions < i32::MAX as usize);
        let lowest = -i32::from(has_carry_in);
        let spans: Vec<Span> = (lowest..positions as i32)
            .map(|at| Span { high: at, low: at })
            .collect();
        let part_starts = vec![0; spans.len() + 1];
        let first = u32::from(has_carry_in);
        let carries = (0..positions as u32).map(|i| NodeId(i + first)).collect();
        Self {
            positions,
            has_carry_in,
            spans,
            part_starts,
            parts: Vec::new(),
            rows: Vec::new(),
            row_begins: false,
            carries,
            signals: Signals::default(),
        }
    }

    /// Number of positions, the carry-in not counted.
    pub fn positions(&self) -> usize {
        self.positions
    }

    /// The carry-in's node.
    pub fn carry_in(&self) -> Option<NodeId> {
        self.has_carry_in.then_some(NodeId(0))
    }

    /// The leaf of a position.
    pub fn leaf(&self, position: usize) -> NodeId {
        assert!(position < self.positions);
        NodeId(position as u32 + u32::from(self.has_carry_in))
    }

    /// The lowest position a carry depends on: -1 with a carry-in, else 0.
    pub fn lowest(&self) -> i32 {
        -i32::from(self.has_carry_in)
    }

    /// The span of a node.
    pub fn span(&self, node: NodeId) -> Span {
        self.spans[node.index()]
    }

    /// What a node is.
    pub fn node(&self, node: NodeId) -> Node<'_> {
        let i = node.index();
        if i >= self.leaf_count() {
            Node::Combine(self.parts_at(i))
        } else if self.has_carry_in && i == 0 {
            Node::CarryIn
        } else {
            Node::Leaf(i - usize::from(self.has_carry_in))
        }
    }

    /// All nodes; parts come before what is combined from them.
    pub fn nodes(&self) -> impl DoubleEndedIterator<Item = NodeId> + ExactSizeIterator + use<> {
        (0..self.spans.len() as u32).map(NodeId)
    }

    /// Lets the combine nodes that follow stand in a row of their own, as the
    /// scheme's publication draws them. Nothing is built differently by it.
    pub fn begin_row(&mut self) {
        self.row_begins = true;
    }

    /// The row of a combine node, from 1; its level where no rows are stated.
    pub(super) fn row(&self, node: NodeId, levels: &[u32]) -> u32 {
        let stated = self.rows.last().is_some_and(|&last| last > 0);
        if stated {
            self.rows[node.index() - self.leaf_count()]
        } else {
            levels[node.index()]
        }
    }

    /// Joins spans, most significant first. Panics unless there are at least
    /// two and each meets or overlaps the next, which reaches further down.
    pub fn combine(&mut self, parts: &[NodeId]) -> NodeId {
        assert!(parts.len() >= 2, "a combine node joins at least two spans");
        for pair in parts.windows(2) {
            let (upper, lower) = (self.span(pair[0]), self.span(pair[1]));
            assert!(
                upper.low <= lower.high + 1 && lower.high < upper.high && lower.low < upper.low,
                "spans {upper:?} and {lower:?} do not meet"
            );
        }
        let span = Span {
            high: self.span(parts[0]).high,
            low: self.span(parts[parts.len() - 1]).low,
        };
        let id = NodeId(u32::try_from(self.spans.len()).expect("fewer than 2^32 nodes"));
        let row = self.rows.last().copied().unwrap_or(0);
        self.rows
            .push(row + u32::from(std::mem::take(&mut self.row_begins)));
        self.spans.push(span);
        self.parts.extend_from_slice(parts);
        let end = u32::try_from(self.parts.len()).expect("fewer than 2^32 parts");
        self.part_starts.push(end);
        id
    }

    /// States the node whose G is the carry out of `position`. Panics unless it
    /// spans from there down to the lowest position.
    pub fn set_carry(&mut self, position: usize, node: NodeId) {
        let span = self.span(node);
        assert!(
            span.high == position as i32 && span.low == self.lowest(),
            "span {span:?} is not the carry out of {position}"
        );
        self.carries[position] = node;
        self.forget_carry_signal(position);
    }

    /// The carry out of `position`.
    pub fn carry(&self, position: usize) -> Carry {
        match self.carry_as_signal(position) {
            Some(signal) => Carry::Signal(signal),
            None => Carry::Span(self.carries[position]),
        }
    }

    /// The span whose G is the carry out of `position`, unless it is a signal.
    pub fn carry_span(&self, position: usize) -> Option<NodeId> {
        match self.carry(position) {
            Carry::Span(node) => Some(node),
            Carry::Signal(_) => None,
        }
    }

    /// Whether every carry is a signal or spans down to the lowest position, so
    /// that a scheme has left none as [`Self::new`] put it.
    pub fn is_complete(&self) -> bool {
        (0..self.positions).all(|position| {
            if self.carry_as_signal(position).is_some() {
                return true;
            }
            let span = self.span(self.carries[position]);
            span.high == position as i32 && span.low == self.lowest()
        })
    }

    /// For each node, whether some carry or sum is made from it.
    pub fn used(&self) -> Vec<bool> {
        let mut used = vec![false; self.spans.len()];
        for carry in (0..self.positions).filter_map(|i| self.carry_span(i)) {
            used[carry.index()] = true;
        }
        let used_signals = self.used_signals();
        for signal in self.signal_ids().filter(|id| used_signals[id.index()]) {
            if let SignalNode::Generate(node) | SignalNode::Propagate(node) = self.signal(signal) {
                used[node.index()] = true;
            }
        }
        for i in (self.leaf_count()..used.len()).rev() {
            if used[i] {
                for part in self.parts_at(i) {
                    used[part.index()] = true;
                }
            }
        }
        used
    }

    pub(super) fn leaf_count(&self) -> usize {
        self.positions + usize::from(self.has_carry_in)
    }

    pub(super) fn parts_at(&self, node: usize) -> &[NodeId] {
        let (start, end) = (self.part_starts[node], self.part_starts[node + 1]);
        &self.parts[start as usize..end as usize]
    }
}
