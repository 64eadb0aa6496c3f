//! Nodes, literals and structural hashing.
//!
//! New AND nodes pass through the local two-level simplification rules of
//! Brummayer and Biere ("Local two-level And-Inverter Graph minimization
//! without blowup", MEMICS 2006), which make NAND-only and NOR-only cells fall
//! into the same shape as AND/OR/XOR ones; the AND pair that forms an exclusive
//! or becomes an XOR node while it is hashed. Fan-ins have lower numbers than
//! their node, so ascending numbers are a topological order.

use super::decompose::Programs;
use crate::netlist::{Driver, NetId, Netlist, Signal, Topology};
use hashbrown::HashTable;

/// One node of the subject graph. Node 0 is constant false.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct NodeId(pub(crate) u32);

impl NodeId {
    /// The constant-false node.
    pub const FALSE: Self = Self(0);

    /// The id as an array index.
    #[inline]
    pub fn index(self) -> usize {
        self.0 as usize
    }

    /// The node's positive literal.
    #[inline]
    pub fn literal(self) -> Literal {
        Literal(self.0 << 1)
    }
}

/// A node, inverted or not.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Literal(pub(crate) u32);

impl Literal {
    /// Constant 0.
    pub const FALSE: Self = Self(0);
    /// Constant 1.
    pub const TRUE: Self = Self(1);

    /// The node.
    #[inline]
    pub fn node(self) -> NodeId {
        NodeId(self.0 >> 1)
    }

    /// Whether the node is read inverted.
    #[inline]
    pub fn is_inverted(self) -> bool {
        self.0 & 1 == 1
    }

    /// The literal, inverted when `invert` is set.
    #[inline]
    #[must_use]
    pub fn xor(self, invert: bool) -> Self {
        Self(self.0 ^ u32::from(invert))
    }

    /// The literal of a constant.
    #[inline]
    pub fn constant(value: bool) -> Self {
        Self(u32::from(value))
    }
}

impl std::ops::Not for Literal {
    type Output = Self;
    #[inline]
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

/// What a node is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum NodeKind {
    /// Node 0.
    False,
    /// A free net: input, register output, box output or cut net.
    Free(NetId),
    /// AND of two literals.
    And(Literal, Literal),
    /// XOR of two positive nodes.
    Xor(NodeId, NodeId),
}

/// Marks a free node in the first fan-in column; no literal reaches it.
const FREE: u32 = u32::MAX;

/// The subject graph of a netlist.
pub struct Subject {
    // An AND has first < second, an XOR first > second (both positive).
    first: Vec<u32>,
    second: Vec<u32>,
    index: HashTable<u32>,
    of_net: Vec<Literal>,
}

fn hash(first: u32, second: u32) -> u64 {
    let key = (u64::from(first) << 32) | u64::from(second);
    let mixed = key.wrapping_mul(0x9E37_79B9_7F4A_7C15);
    mixed ^ (mixed >> 29)
}

impl Subject {
    /// Decomposes every gate of `netlist` in topological order.
    pub fn of(netlist: &Netlist, topology: &Topology) -> Self {
        let mut subject = Self {
            first: vec![FREE],
            second: vec![FREE],
            index: HashTable::new(),
            of_net: vec![Literal::FALSE; netlist.net_count()],
        };
        for net in netlist.nets() {
            let literal = match netlist.driver(net) {
                Driver::Constant(value) => Literal::constant(value),
                Driver::Gate(_) if !topology.is_cut(net) => continue,
                _ => subject.free(net),
            };
            subject.of_net[net.index()] = literal;
        }
        let mut programs = Programs::new(netlist);
        let mut pins = Vec::new();
        for &gate in &topology.order {
            let output = netlist.gate_output(gate);
            if topology.is_cut(output) {
                continue;
            }
            pins.clear();
            pins.extend(
                netlist
                    .fan_ins(gate)
                    .iter()
                    .map(|net| subject.of_net[net.index()]),
            );
            let literal = programs.run(netlist.function_id(gate), &pins, &mut subject);
            subject.of_net[output.index()] = literal;
        }
        subject.index = HashTable::new();
        subject.first.shrink_to_fit();
        subject.second.shrink_to_fit();
        subject
    }

    fn free(&mut self, net: NetId) -> Literal {
        let id = self.first.len() as u32;
        self.first.push(FREE);
        self.second.push(net.0);
        Literal(id << 1)
    }

    /// Number of nodes, the constant included.
    pub fn node_count(&self) -> usize {
        self.first.len()
    }

    /// All nodes, fan-ins first.
    pub fn nodes(&self) -> impl ExactSizeIterator<Item = NodeId> + use<> {
        (0..self.first.len() as u32).map(NodeId)
    }

    /// What a node is.
    #[inline]
    pub fn kind(&self, node: NodeId) -> NodeKind {
        let (first, second) = (self.first[node.index()], self.second[node.index()]);
        if first == FREE {
            if node == NodeId::FALSE {
                NodeKind::False
            } else {
                NodeKind::Free(NetId(second))
            }
        } else if first < second {
            NodeKind::And(Literal(first), Literal(second))
        } else {
            NodeKind::Xor(NodeId(first >> 1), NodeId(second >> 1))
        }
    }

    /// The literal a net carries.
    #[inline]
    pub fn of_net(&self, net: NetId) -> Literal {
        self.of_net[net.index()]
    }

    /// The literal a signal carries.
    #[inline]
    pub fn of_signal(&self, signal: Signal) -> Literal {
        self.of_net(signal.net).xor(signal.inverted)
    }

    fn node(&mut self, first: u32, second: u32) -> Literal {
        let hashed = hash(first, second);
        let (firsts, seconds) = (&self.first, &self.second);
        let found = self.index.find(hashed, |&id| {
            firsts[id as usize] == first && seconds[id as usize] == second
        });
        if let Some(&id) = found {
            return Literal(id << 1);
        }
        let id = u32::try_from(self.first.len()).expect("fewer than 2^31 nodes");
        assert!(id < 1 << 31, "fewer than 2^31 nodes");
        self.first.push(first);
        self.second.push(second);
        let (firsts, seconds) = (&self.first, &self.second);
        self.index.insert_unique(hashed, id, |&id| {
            hash(firsts[id as usize], seconds[id as usize])
        });
        Literal(id << 1)
    }

    /// XOR of two literals.
    pub fn xor(&mut self, left: Literal, right: Literal) -> Literal {
        let invert = left.is_inverted() ^ right.is_inverted();
        let (a, b) = (left.node().literal(), right.node().literal());
        if a == b {
            return Literal::constant(invert);
        }
        if a == Literal::FALSE || b == Literal::FALSE {
            return (if a == Literal::FALSE { b } else { a }).xor(invert);
        }
        for (outer, inner) in [(a, b), (b, a)] {
            if let NodeKind::Xor(x, y) = self.kind(outer.node()) {
                if x == inner.node() {
                    return y.literal().xor(invert);
                }
                if y == inner.node() {
                    return x.literal().xor(invert);
                }
            }
        }
        self.node(a.0.max(b.0), a.0.min(b.0)).xor(invert)
    }

    /// OR of two literals.
    pub fn or(&mut self, left: Literal, right: Literal) -> Literal {
        !self.and(!left, !right)
    }

    /// AND of two literals, simplified within two levels.
    pub fn and(&mut self, left: Literal, right: Literal) -> Literal {
        let (mut a, mut b) = (left, right);
        // Substitution replaces one operand by one of its own fan-ins, so the
        // loop descends and ends.
        loop {
            if a == b {
                return a;
            }
            if a == !b || a == Literal::FALSE || b == Literal::FALSE {
                return Literal::FALSE;
            }
            if a == Literal::TRUE {
                return b;
            }
            if b == Literal::TRUE {
                return a;
            }
            match self.rewrite(a, b) {
                Step::Done(literal) => return literal,
                Step::Again(x, y) => (a, b) = (x, y),
                Step::Xor(x, y) => return self.xor(x, y),
                Step::Keep => break,
            }
        }
        self.node(a.0.min(b.0), a.0.max(b.0))
    }

    fn and_parts(&self, literal: Literal) -> Option<(Literal, Literal)> {
        match self.kind(literal.node()) {
            NodeKind::And(x, y) => Some((x, y)),
            _ => None,
        }
    }

    fn rewrite(&self, a: Literal, b: Literal) -> Step {
        for (outer, other) in [(a, b), (b, a)] {
            match self.kind(outer.node()) {
                NodeKind::And(x, y) if outer.is_inverted() => {
                    if x == !other || y == !other {
                        return Step::Done(other);
                    }
                    if x == other {
                        return Step::Again(other, !y);
                    }
                    if y == other {
                        return Step::Again(other, !x);
                    }
                }
                NodeKind::And(x, y) => {
                    if x == !other || y == !other {
                        return Step::Done(Literal::FALSE);
                    }
                    if x == other || y == other {
                        return Step::Done(outer);
                    }
                }
                // (x ⊕ y)·x = x·¬y, in every polarity.
                NodeKind::Xor(x, y) => {
                    let rest = match other.node() {
                        n if n == x => y,
                        n if n == y => x,
                        _ => continue,
                    };
                    let invert = !(outer.is_inverted() ^ other.is_inverted());
                    return Step::Again(other, rest.literal().xor(invert));
                }
                NodeKind::False | NodeKind::Free(_) => {}
            }
        }
        let (Some((x, y)), Some((u, v))) = (self.and_parts(a), self.and_parts(b)) else {
            return Step::Keep;
        };
        match (a.is_inverted(), b.is_inverted()) {
            (false, false) if x == !u || x == !v || y == !u || y == !v => {
                Step::Done(Literal::FALSE)
            }
            (false, false) => Step::Keep,
            (true, true) => {
                if (x == !u && y == !v) || (x == !v && y == !u) {
                    return Step::Xor(x, y);
                }
                for (p, q) in [(x, y), (y, x)] {
                    if (p == u && q == !v) || (p == v && q == !u) {
                        return Step::Done(!p);
                    }
                }
                Step::Keep
            }
            (true, false) => against_product((x, y), b, (u, v)),
            (false, true) => against_product((u, v), a, (x, y)),
        }
    }
}

enum Step {
    Done(Literal),
    Again(Literal, Literal),
    Xor(Literal, Literal),
    Keep,
}

/// `¬(x·y) · (u·v)` where `product` is the second factor.
fn against_product(
    (x, y): (Literal, Literal),
    product: Literal,
    (u, v): (Literal, Literal),
) -> Step {
    if x == !u || x == !v || y == !u || y == !v {
        return Step::Done(product);
    }
    if x == u || x == v {
        return Step::Again(product, !y);
    }
    if y == u || y == v {
        return Step::Again(product, !x);
    }
    Step::Keep
}
