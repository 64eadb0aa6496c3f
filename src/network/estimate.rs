//! When the nodes and signals of a network would be ready, under a profile.
//!
//! A reckoning for schemes that choose between shapes, not a figure anybody is
//! told: what is reported comes from building. Ends absorbed into covers, shared
//! gates and trees by arrival are left out, so it may say too late and never by
//! more than they save.

use super::carry_network::{CarryNetwork, Node, NodeId};
use super::profile::{LONG_BEFORE, Profile};
use super::signals::{Carry, SignalId, SignalNode};

/// Arrivals of all nodes and signals of one network.
pub struct Estimate<'a> {
    profile: &'a Profile,
    generates: Vec<i32>,
    propagates: Vec<i32>,
    signals: Vec<i32>,
}

impl<'a> Estimate<'a> {
    /// Reckons `network`, which must have the profile's positions.
    pub fn of(network: &CarryNetwork, profile: &'a Profile) -> Self {
        let mut estimate = Self {
            profile,
            generates: Vec::with_capacity(network.nodes().len()),
            propagates: Vec::with_capacity(network.nodes().len()),
            signals: Vec::with_capacity(network.signal_ids().len()),
        };
        for node in network.nodes() {
            estimate.add_node(network.node(node));
        }
        for signal in network.signal_ids() {
            let time = estimate.of_signal(network, signal);
            estimate.signals.push(time);
        }
        estimate
    }

    fn add_node(&mut self, node: Node<'_>) {
        let profile = self.profile;
        let (generate, propagate) = match node {
            Node::CarryIn => (profile.carry_in.unwrap_or(LONG_BEFORE), LONG_BEFORE),
            Node::Leaf(i) => (profile.generate[i], profile.propagate[i]),
            Node::Combine(parts) => self.joined(parts),
        };
        self.generates.push(generate);
        self.propagates.push(propagate);
    }

    /// G and P of adjacent spans joined in one node.
    pub fn joined(&self, parts: &[NodeId]) -> (i32, i32) {
        let costs = &self.profile.costs;
        let (upper, lower) = (costs.from_upper(parts.len()), costs.from_lower(parts.len()));
        let mut generate = self.generate(parts[0]) + upper;
        let mut propagate = LONG_BEFORE;
        for (i, &part) in parts.iter().enumerate() {
            propagate = propagate.max(self.propagate(part));
            if i > 0 {
                generate = generate.max(self.generate(part) + lower);
            }
            if i + 1 < parts.len() {
                generate = generate.max(self.propagate(part) + lower);
            }
        }
        (generate, propagate + costs.and(parts.len()))
    }

    /// When G of a span is ready.
    pub fn generate(&self, node: NodeId) -> i32 {
        self.generates[node.index()]
    }

    /// When P of a span is ready.
    pub fn propagate(&self, node: NodeId) -> i32 {
        self.propagates[node.index()]
    }

    /// When a signal is ready.
    pub fn signal(&self, signal: SignalId) -> i32 {
        self.signals[signal.index()]
    }

    /// When a carry is ready.
    pub fn carry(&self, carry: Carry) -> i32 {
        match carry {
            Carry::Span(node) => self.generate(node),
            Carry::Signal(signal) => self.signal(signal),
        }
    }

    /// When the sum of a position is ready.
    pub fn sum(&self, network: &CarryNetwork, position: usize) -> i32 {
        if let Some(signal) = network.sum(position) {
            return self.signal(signal);
        }
        let half = self.profile.half_sum[position];
        network.carry_into(position).map_or(half, |carry| {
            half.max(self.carry(carry)) + self.profile.costs.xor
        })
    }

    fn of_signal(&self, network: &CarryNetwork, signal: SignalId) -> i32 {
        let costs = &self.profile.costs;
        let latest = |list: &[SignalId]| {
            let times = list.iter().map(|&id| self.signal(id));
            times.max().unwrap_or(LONG_BEFORE)
        };
        match network.signal(signal) {
            SignalNode::Generate(node) => self.generate(node),
            SignalNode::Propagate(node) => self.propagate(node),
            SignalNode::HalfSum(position) => self.profile.half_sum[position],
            SignalNode::And(list) => latest(list) + costs.and(list.len()),
            SignalNode::Or(list) => latest(list) + costs.or(list.len()),
            SignalNode::Xor(left, right) => latest(&[left, right]) + costs.xor,
            SignalNode::Select {
                choose,
                if_one,
                if_zero,
            } => {
                let values = latest(&[if_one, if_zero]) + costs.select_value;
                values.max(self.signal(choose) + costs.select_choose)
            }
        }
    }
}
