//! From a carry network to gates, through a caller's [`GateSink`].
//!
//! Leaves are `g = a·b` and `p = a + b` or `a ⊕ b`; a sum is `(a ⊕ b) ⊕ c`, with
//! `c` the carry into its position, unless the network states another. Spans and
//! then signals are taken in the network's order, by loops alone, so equal calls
//! make equal gates in equal order whatever the depth.
//! Invariant: only what some carry needs is made, and no gate has more inputs
//! than the limit.
//!
//! The forms are those of carry-lookahead (A. Weinberger and J. L. Smith, "A
//! Logic for High-Speed Addition", National Bureau of Standards Circular 591,
//! 1958).

use super::carry_network::{CarryNetwork, Node, NodeId};
use super::cover_signals::SignalCovers;
use super::gates::Gates;
use super::signals::{Carry, SignalId, SignalNode};
use crate::netlist::{Function, TruthTable};

/// Where the builder's gates go. Inversion of a signal is free: a sink whose
/// format needs a gate for it makes one only where an inverted net is read
/// from outside.
pub trait GateSink {
    /// A literal: some gate's output or an existing net, inverted or not.
    type Signal: Copy + PartialEq + std::ops::Not<Output = Self::Signal>;

    /// A constant.
    fn constant(&mut self, value: bool) -> Self::Signal;
    /// AND of two signals or more, within the limit on gate inputs. The sink
    /// folds constants, repeated and opposite inputs, and shares equal gates.
    fn and(&mut self, inputs: &[Self::Signal]) -> Self::Signal;
    /// XOR of two signals. A sink that makes it from ANDs takes
    /// `(l + r)·~(l·r)`, which shares a position's g and p.
    fn xor(&mut self, left: Self::Signal, right: Self::Signal) -> Self::Signal;
    /// One gate of three to six inputs that is no product, pin 0 first; only
    /// asked for with [`Limits::covers`]. The inputs are no constants, differ
    /// from one another and from each other's complement, and all matter. The
    /// sink shares equal gates.
    fn cover(&mut self, function: &Function, inputs: &[Self::Signal]) -> Self::Signal;
    /// When the signal is ready, in ticks of the caller's delay model.
    fn arrival(&self, signal: Self::Signal) -> i32;
}

/// What one new gate may be.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Limits {
    /// Most inputs of one gate; at least 2.
    pub gate_inputs: usize,
    /// Whether a gate may have any function (`cover`) or is one product or one
    /// XOR (`single-operator`). Covers have at most six inputs, products may
    /// be wider.
    pub covers: bool,
}

/// Which propagate the leaves use.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Propagate {
    /// `a + b`.
    Or,
    /// `a ⊕ b`.
    Xor,
}

/// What is added, least significant first.
#[derive(Clone, Debug)]
pub struct Addends<S> {
    /// First addend.
    pub a: Vec<S>,
    /// Second addend.
    pub b: Vec<S>,
    /// Carry-in, when the network has one.
    pub carry_in: Option<S>,
}

/// What was built, by position.
#[derive(Clone, Debug)]
pub struct Built<S> {
    /// Sum of each position.
    pub sums: Vec<S>,
    /// Carry out of each position.
    pub carries: Vec<S>,
}

/// Builds every sum and carry of `network`.
///
/// With single-operator gates, `G` of a combine node of `k` parts is an OR of
/// `k` terms and `P` one AND; a gate wider than the limit is a tree by arrival.
/// With covers a node is one gate, and operands and sums are taken into it as
/// far as they fit. `P` is made only where some parent needs it. A carry no other
/// gate reads is made all the same: what ends up unread is the sink's to sweep.
///
/// Panics when the addends do not fit the network, or the network is not
/// complete.
pub fn build<K: GateSink>(
    network: &CarryNetwork,
    addends: &Addends<K::Signal>,
    limits: Limits,
    propagate: Propagate,
    sink: &mut K,
) -> Built<K::Signal> {
    let positions = network.positions();
    assert!(addends.a.len() == positions && addends.b.len() == positions);
    assert!(addends.carry_in.is_some() == network.carry_in().is_some());
    assert!(
        network.is_complete(),
        "a carry of the network is not stated"
    );
    let mut spans = Spans::new(network, addends, limits, propagate, sink);
    let covers = SignalCovers::of(&spans);
    let needs = spans.needs(covers.as_ref());
    for node in network.nodes() {
        if let Node::Combine(parts) = network.node(node) {
            let need = needs[node.index()];
            if need.generate {
                let signal = spans.make_generate(node, parts);
                spans.generate[node.index()] = Some(signal);
            }
            if need.propagate {
                let signal = spans.make_propagate(node, parts);
                spans.propagate[node.index()] = Some(signal);
            }
        }
    }
    match &covers {
        Some(covers) => spans.cover_signals(covers),
        None => spans.make_signals(),
    }
    let carries = (0..positions).map(|i| spans.carry(network.carry(i)));
    let carries: Vec<_> = carries.collect();
    let sums = (0..positions).map(|i| spans.make_sum(i)).collect();
    Built { sums, carries }
}

/// What of a combine node has to be made.
#[derive(Clone, Copy, Default)]
pub(super) struct Need {
    pub(super) generate: bool,
    pub(super) propagate: bool,
}

/// G and P of the spans and the signals, as far as they are made.
pub(super) struct Spans<'a, K: GateSink> {
    pub(super) network: &'a CarryNetwork,
    pub(super) addends: &'a Addends<K::Signal>,
    pub(super) gates: Gates<'a, K>,
    pub(super) rule: Propagate,
    /// Widest cover, where covers are of use.
    pub(super) cover_width: Option<usize>,
    generate: Vec<Option<K::Signal>>,
    propagate: Vec<Option<K::Signal>>,
    pub(super) signals: Vec<Option<K::Signal>>,
}

impl<'a, K: GateSink> Spans<'a, K> {
    fn new(
        network: &'a CarryNetwork,
        addends: &'a Addends<K::Signal>,
        limits: Limits,
        rule: Propagate,
        sink: &'a mut K,
    ) -> Self {
        let nodes = network.nodes().len();
        let width = limits.gate_inputs.min(TruthTable::MAX_INPUTS);
        Self {
            network,
            addends,
            gates: Gates::new(sink, limits.gate_inputs),
            rule,
            // `g + p·c` alone takes three inputs.
            cover_width: (limits.covers && width >= 3).then_some(width),
            generate: vec![None; nodes],
            propagate: vec![None; nodes],
            signals: vec![None; network.signal_ids().len()],
        }
    }

    /// A P is needed where the part is not the lowest of some combine node, and
    /// of all parts of a node whose P is needed: so never with the carry-in in.
    /// Beside that, what the signals read.
    fn needs(&self, covers: Option<&SignalCovers>) -> Vec<Need> {
        let network = self.network;
        let mut needs = vec![Need::default(); network.nodes().len()];
        for carry in (0..network.positions()).filter_map(|i| network.carry_span(i)) {
            needs[carry.index()].generate = true;
        }
        match covers {
            Some(covers) => covers.mark_spans(&mut needs),
            None => {
                let used = network.used_signals();
                for signal in network.signal_ids().filter(|id| used[id.index()]) {
                    match network.signal(signal) {
                        SignalNode::Generate(node) => needs[node.index()].generate = true,
                        SignalNode::Propagate(node) => needs[node.index()].propagate = true,
                        _ => {}
                    }
                }
            }
        }
        for node in self.network.nodes().rev() {
            let need = needs[node.index()];
            let Node::Combine(parts) = self.network.node(node) else {
                break;
            };
            if self.is_direct(node) {
                continue;
            }
            for (i, part) in parts.iter().enumerate() {
                let part = &mut needs[part.index()];
                part.generate |= need.generate;
                part.propagate |= need.propagate || need.generate && i + 1 < parts.len();
            }
        }
        needs
    }

    /// The G of a node made before; of a leaf, made now if need be.
    pub(super) fn generate(&mut self, node: NodeId) -> K::Signal {
        if let Some(signal) = self.generate[node.index()] {
            return signal;
        }
        let signal = match self.network.node(node) {
            Node::CarryIn => self.addends.carry_in.expect("checked when building began"),
            Node::Leaf(i) => self.gates.and(&[self.addends.a[i], self.addends.b[i]]),
            Node::Combine(_) => unreachable!("parts come before what reads them"),
        };
        self.generate[node.index()] = Some(signal);
        signal
    }

    /// The P of a node made before; of a leaf, made now if need be.
    pub(super) fn propagate(&mut self, node: NodeId) -> K::Signal {
        if let Some(signal) = self.propagate[node.index()] {
            return signal;
        }
        let Node::Leaf(i) = self.network.node(node) else {
            unreachable!("a P is made before it is read, and the carry-in has none");
        };
        let (a, b) = (self.addends.a[i], self.addends.b[i]);
        let signal = match self.rule {
            Propagate::Or => self.gates.or(&[a, b]),
            Propagate::Xor => self.gates.xor(a, b),
        };
        self.propagate[node.index()] = Some(signal);
        signal
    }

    fn make_generate(&mut self, node: NodeId, parts: &[NodeId]) -> K::Signal {
        if let Some(width) = self.cover_width {
            return self.cover_generate(node, width);
        }
        let mut terms = Vec::with_capacity(parts.len());
        let mut above = Vec::with_capacity(parts.len());
        for (i, &part) in parts.iter().enumerate() {
            above.push(self.generate(part));
            terms.push(self.gates.and(&above));
            above.pop();
            if i + 1 < parts.len() {
                above.push(self.propagate(part));
            }
        }
        self.gates.or(&terms)
    }

    fn make_propagate(&mut self, node: NodeId, parts: &[NodeId]) -> K::Signal {
        if let Some(width) = self.cover_width {
            return self.cover_propagate(node, width);
        }
        let signals: Vec<_> = parts.iter().map(|&part| self.propagate(part)).collect();
        self.gates.and(&signals)
    }

    /// Makes every signal that some carry or sum needs.
    fn make_signals(&mut self) {
        let network = self.network;
        let used = network.used_signals();
        for signal in network.signal_ids().filter(|id| used[id.index()]) {
            self.signals[signal.index()] = Some(self.make_signal(signal));
        }
    }

    /// One signal by single-operator gates.
    pub(super) fn make_signal(&mut self, signal: SignalId) -> K::Signal {
        match self.network.signal(signal) {
            SignalNode::Generate(node) => self.generate(node),
            SignalNode::Propagate(node) => self.propagate(node),
            SignalNode::Either(i) => self.gates.or(&[self.addends.a[i], self.addends.b[i]]),
            SignalNode::HalfSum(position) => self.half_sum(position),
            SignalNode::And(list) => {
                let list: Vec<_> = list.iter().map(|&id| self.made(id)).collect();
                self.gates.and(&list)
            }
            SignalNode::Or(list) => {
                let list: Vec<_> = list.iter().map(|&id| self.made(id)).collect();
                self.gates.or(&list)
            }
            SignalNode::Xor(left, right) => {
                let (left, right) = (self.made(left), self.made(right));
                self.gates.xor(left, right)
            }
            SignalNode::Select {
                choose,
                if_one,
                if_zero,
            } => {
                let choose = self.made(choose);
                let (one, zero) = (self.made(if_one), self.made(if_zero));
                self.gates.select(choose, one, zero)
            }
        }
    }

    /// A signal made before.
    pub(super) fn made(&self, signal: SignalId) -> K::Signal {
        self.signals[signal.index()].expect("what a signal reads is made first")
    }

    fn carry(&mut self, carry: Carry) -> K::Signal {
        match carry {
            Carry::Span(node) => self.generate(node),
            Carry::Signal(signal) => self.made(signal),
        }
    }

    fn make_sum(&mut self, position: usize) -> K::Signal {
        if let Some(signal) = self.network.sum(position) {
            return self.made(signal);
        }
        let into = self.network.carry_into(position);
        if let (Some(width), Some(Carry::Span(node))) = (self.cover_width, into) {
            return self.cover_sum(position, node, width);
        }
        let half = self.half_sum(position);
        match into {
            Some(carry) => {
                let carry = self.carry(carry);
                self.gates.xor(half, carry)
            }
            None => half,
        }
    }

    /// `a ⊕ b` of a position.
    pub(super) fn half_sum(&mut self, position: usize) -> K::Signal {
        let (a, b) = (self.addends.a[position], self.addends.b[position]);
        self.gates.xor(a, b)
    }
}
