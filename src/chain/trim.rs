//! The ends of a proven chain: true positions that mean nothing are dropped,
//! the lowest bit of a counter, which is only an inverter, is added, and a chain
//! that feeds itself is cut where it does.
//!
//! Everything here takes positions away or adds one that is true by definition,
//! so a theorem stays a theorem.

use super::candidate::{Bits, Context};
use super::verify::Theorem;
use crate::netlist::{Netlist, Signal};
use crate::subject::{Hash, Literal, NodeId, NodeKind, Subject};
use rustc_hash::{FxHashMap, FxHashSet};

/// What decides at the ends of a chain.
pub(super) struct Ends<'a> {
    pub(super) subject: &'a Subject,
    pub(super) context: &'a Context<'a>,
    has_inverted_edges: bool,
    inverted_copies: FxHashMap<NodeId, bool>,
}

/// Positions with an operand bit that is not constant.
pub(super) fn live_bits(bits: &[Bits]) -> usize {
    bits.iter()
        .filter(|b| b.a.node() != NodeId::FALSE || b.b.node() != NodeId::FALSE)
        .count()
}

/// Free nodes whose complement has a net, and whether a port or register shows
/// it.
fn inverted_copies(netlist: &Netlist, subject: &Subject) -> FxHashMap<NodeId, bool> {
    let mut copies = FxHashMap::default();
    let mut note = |signal: Signal, shown: bool| {
        let literal = subject.of_signal(signal);
        if literal.is_inverted() && matches!(subject.kind(literal.node()), NodeKind::Free(_)) {
            *copies.entry(literal.node()).or_insert(false) |= shown;
        }
    };
    for gate in netlist.gates() {
        note(Signal::plain(netlist.gate_output(gate)), false);
    }
    for output in netlist.outputs() {
        note(output.signal, true);
    }
    for register in netlist.registers() {
        note(register.input, true);
    }
    copies
}

impl<'a> Ends<'a> {
    pub(super) fn new(netlist: &Netlist, subject: &'a Subject, context: &'a Context<'a>) -> Self {
        Self {
            subject,
            context,
            has_inverted_edges: netlist.has_inverted_edges(),
            inverted_copies: inverted_copies(netlist, subject),
        }
    }

    /// Drops a top position that is true but means nothing: on top of a
    /// two-operand chain a single operand that continues no operand's bus and
    /// is no operand's repeated top bit (a carry-out combined with a control
    /// signal); or an operand that is an input where no other position has one
    /// and no carry leaves (the sign of a recoded multiplier row).
    pub(super) fn trim_top(&self, theorem: &mut Theorem) {
        let is_two = |bits: &Bits| bits.b.node() != NodeId::FALSE;
        let is_free = |l: Literal| matches!(self.subject.kind(l.node()), NodeKind::Free(_));
        let [rest @ .., below, top] = theorem.bits.as_slice() else {
            return;
        };
        if !is_two(below) {
            return;
        }
        let labels = self.context.labels;
        let follows = |upper: Literal| {
            let continues = |lower: Literal| {
                labels.follows(lower.node(), upper.node()) > 0 || lower.node() == upper.node()
            };
            continues(below.a) || continues(below.b)
        };
        let meaningless = if is_two(top) {
            let stray = |l: Literal| is_free(l) && !follows(l);
            let open = theorem.carries.last().is_some_and(Vec::is_empty);
            let inner = |bits: &Bits| !is_free(bits.a) && !is_free(bits.b);
            open && (stray(top.a) || stray(top.b)) && inner(below) && rest.iter().all(inner)
        } else {
            let fresh = is_free(top.a)
                && labels.port(top.sum.node()).is_some()
                && theorem.carry_in.node() != top.a.node()
                && below_uses(theorem, top.a.node()) == 0;
            !follows(top.a) && !fresh
        };
        if meaningless {
            theorem.truncate(theorem.bits.len() - 1);
        }
    }

    /// Adds the lowest bit of an incrementer or decrementer, whose sum is an
    /// inverter: the carry-in of the rest is that bit itself.
    pub(super) fn extend_below(&self, theorem: &mut Theorem) {
        let single = theorem
            .bits
            .iter()
            .all(|bits| bits.b.node() == NodeId::FALSE);
        let node = theorem.carry_in.node();
        let lowest = theorem.bits[0];
        // On an edge of an AND/inverter graph every complement is at hand.
        let shown = match self.inverted_copies.get(&node) {
            Some(&shown) => shown,
            None if self.has_inverted_edges => false,
            None => return,
        };
        // An inverter that no port shows may belong to the cells themselves.
        if !single || !(shown || self.context.labels.follows(node, lowest.a.node()) == 3) {
            return;
        }
        if lowest.a.is_inverted() != theorem.carry_in.is_inverted() {
            return;
        }
        // c1 = majority(a0, b, ¬b) = a0 and s0 = a0 ⊕ b ⊕ ¬b = ¬a0.
        let (a, b) = (theorem.carry_in, lowest.b);
        theorem.bits.insert(0, Bits { sum: !a, a, b });
        theorem.sums.insert(0, vec![!a]);
        theorem.carries.insert(0, vec![a]);
        theorem.carry_in = !b;
    }

    /// Drops a top position whose sum is only the first exclusive or of some
    /// other chain's position (two of its three inputs), as where the carry of
    /// one array row enters a cell of the next.
    pub(super) fn trim_shared_tops(&self, theorems: &mut [Theorem]) {
        let signatures = self.context.signatures;
        let hash = |literal: Literal| signatures.hash(literal.node());
        let mut partial: FxHashSet<Hash> = FxHashSet::default();
        for bits in theorems.iter().flat_map(|theorem| &theorem.bits) {
            let (sum, a, b) = (hash(bits.sum), hash(bits.a), hash(bits.b));
            // The exclusive or of two inputs is the sum's with the third.
            let carry = sum ^ a ^ b;
            if carry != 0 && a != 0 && b != 0 {
                partial.extend([a ^ b, sum ^ a, sum ^ b]);
            }
        }
        for theorem in theorems {
            while let [_, .., top] = theorem.bits[..] {
                let open = theorem.carries.last().is_some_and(Vec::is_empty);
                let shown = self.context.labels.port(top.sum.node()).is_some();
                if !open || shown || !partial.contains(&hash(top.sum)) {
                    break;
                }
                theorem.truncate(theorem.bits.len() - 1);
            }
        }
    }
}

/// Nodes looked at below the operands of one chain before they are taken as
/// independent; the planner checks again.
const DEPENDENCE_NODES: usize = 1 << 18;

/// How many positions, from the low end, have operands that depend on none of
/// the chain's own sums and carries below them. A chain that feeds itself is
/// true, but its positions cannot work side by side.
pub(super) fn independent_positions(subject: &Subject, theorem: &Theorem) -> usize {
    let mut own: FxHashMap<NodeId, usize> = FxHashMap::default();
    for (i, literals) in theorem.sums.iter().enumerate() {
        for literal in literals.iter().chain(&theorem.carries[i]) {
            own.entry(literal.node()).or_insert(i);
        }
    }
    let Some(lowest) = own.keys().min().copied() else {
        return 0;
    };
    let mut seen: FxHashSet<NodeId> = FxHashSet::default();
    let mut stack = Vec::new();
    for (i, bits) in theorem.bits.iter().enumerate() {
        stack.extend([bits.a.node(), bits.b.node()]);
        while let Some(node) = stack.pop() {
            // Fan-ins have lower numbers: nothing below `lowest` is the chain's.
            if node < lowest || !seen.insert(node) || seen.len() > DEPENDENCE_NODES {
                continue;
            }
            if own.contains_key(&node) {
                return i;
            }
            match subject.kind(node) {
                NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
                NodeKind::Xor(x, y) => stack.extend([x, y]),
                NodeKind::False | NodeKind::Free(_) => {}
            }
        }
    }
    theorem.bits.len()
}

/// How many lower positions use `operand` as an operand.
fn below_uses(theorem: &Theorem, operand: NodeId) -> usize {
    let lower = &theorem.bits[..theorem.bits.len() - 1];
    lower
        .iter()
        .filter(|b| b.a.node() == operand || b.b.node() == operand)
        .count()
}
