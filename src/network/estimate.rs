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
    /// The carry after a one, made from the lowest position up.
    eithers: Vec<i32>,
    leaf: Vec<bool>,
    signals: Vec<i32>,
}

impl<'a> Estimate<'a> {
    /// Reckons `network`, which must have the profile's positions.
    pub fn of(network: &CarryNetwork, profile: &'a Profile) -> Self {
        let mut estimate = Self {
            profile,
            generates: Vec::with_capacity(network.nodes().len()),
            propagates: Vec::with_capacity(network.nodes().len()),
            eithers: Vec::with_capacity(network.nodes().len()),
            leaf: Vec::with_capacity(network.nodes().len()),
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
        let ((generate, propagate), either) = match node {
            Node::CarryIn => {
                let carry_in = profile.carry_in.unwrap_or(LONG_BEFORE);
                ((carry_in, LONG_BEFORE), LONG_BEFORE)
            }
            Node::Leaf(i) => {
                let (g, p) = (profile.generate[i], profile.propagate[i]);
                ((g, p), p)
            }
            Node::Combine(parts) => {
                let lowest = parts[parts.len() - 1];
                let both = self.joined(parts);
                (both, self.with_lowest(parts, self.eithers[lowest.index()]))
            }
        };
        self.generates.push(generate);
        self.propagates.push(propagate);
        self.eithers.push(either);
        self.leaf.push(matches!(node, Node::Leaf(_)));
    }

    /// G and P of adjacent spans joined in one node.
    fn joined(&self, parts: &[NodeId]) -> (i32, i32) {
        let lowest = parts[parts.len() - 1];
        let propagates = parts.iter().map(|&part| self.propagate(part));
        let propagate = propagates.max().unwrap_or(LONG_BEFORE);
        let costs = &self.profile.costs;
        (
            self.with_lowest(parts, self.generate(lowest)),
            propagate + costs.and(parts.len()),
        )
    }

    /// G of adjacent spans joined, with what stands for the lowest's G.
    fn with_lowest(&self, parts: &[NodeId], lowest: i32) -> i32 {
        let costs = &self.profile.costs;
        let (upper, lower) = (costs.from_upper(parts.len()), costs.from_lower(parts.len()));
        let mut generate = (self.generate(parts[0]) + upper).max(lowest + lower);
        for (i, &part) in parts[..parts.len() - 1].iter().enumerate() {
            generate = generate.max(self.propagate(part) + lower);
            if i > 0 {
                generate = generate.max(self.generate(part) + lower);
            }
        }
        generate
    }

    /// G and P of adjacent spans, joined where there are several.
    pub fn span(&self, parts: &[NodeId]) -> (i32, i32) {
        match *parts {
            [only] => (self.generate(only), self.propagate(only)),
            _ => self.joined(parts),
        }
    }

    /// The carry out of adjacent spans after a one, as `G + P` or, `early`, made
    /// from the lowest position up.
    pub fn either(&self, parts: &[NodeId], early: bool) -> i32 {
        let (generate, propagate) = self.span(parts);
        let lowest = parts[parts.len() - 1];
        let one = |node: NodeId| self.eithers[node.index()];
        match *parts {
            [only] if early || self.leaf[only.index()] => one(only),
            _ if early => self.with_lowest(parts, one(lowest)),
            _ => generate.max(propagate) + self.profile.costs.or(2),
        }
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
            SignalNode::Either(position) => self.profile.propagate[position],
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
