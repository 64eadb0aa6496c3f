//! From theorems about nodes to chains of nets.
//!
//! The nets of all sums and carries are gathered in one pass over the netlist.
//! A net that no gate drives, and a copy of an operand, is no result of a chain.

use super::built_as::built_as;
use super::carry_cells::in_carry_cells;
use super::kinds::{mode_of, order_operands, read};
use super::label::Labels;
use super::model::{BuiltAs, CarryForm, Chain, Construction, Kind, Position};
use super::twins::twins;
use super::verify::Theorem;
use crate::netlist::{Bit, Driver, NetId, Netlist, Signal};
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use fixedbitset::FixedBitSet;
use rustc_hash::FxHashSet;

/// The signal or constant that carries a literal. Panics when no net does:
/// entries are only made of nodes on nets.
pub(super) fn bit(labels: &Labels<'_>, literal: Literal) -> Bit {
    if literal.node() == NodeId::FALSE {
        return Bit::Constant(literal == Literal::TRUE);
    }
    Bit::Signal(labels.signal(literal).expect("entries are made of nets"))
}

/// As [`bit`], for a literal that may be an exclusive or on no net: then the
/// operand in it.
pub(super) fn nearest_bit(labels: &Labels<'_>, subject: &Subject, literal: Literal) -> Bit {
    match (labels.net(literal.node()), subject.kind(literal.node())) {
        (None, NodeKind::Xor(x, y)) => bit(labels, x.max(y).literal()),
        _ => bit(labels, literal),
    }
}

/// The nets of some nodes, sorted by node.
pub(super) struct Nets(Vec<(NodeId, NetId)>);

impl Nets {
    pub(super) fn of(netlist: &Netlist, subject: &Subject, theorems: &[Theorem]) -> Self {
        let mut wanted = FixedBitSet::with_capacity(subject.node_count());
        for theorem in theorems {
            for literal in theorem.sums.iter().chain(&theorem.carries).flatten() {
                wanted.insert(literal.node().index());
            }
        }
        let with_node = netlist.nets().map(|net| (subject.of_net(net).node(), net));
        let mut nets: Vec<_> = with_node
            .filter(|(node, _)| wanted.contains(node.index()))
            .collect();
        nets.sort_unstable();
        Self(nets)
    }

    pub(super) fn of_node(&self, node: NodeId) -> impl Iterator<Item = NetId> + '_ {
        let start = self.0.partition_point(|&(n, _)| n < node);
        self.0[start..]
            .iter()
            .take_while(move |&&(n, _)| n == node)
            .map(|&(_, net)| net)
    }
}

/// Reads every theorem as a chain; the widest chain comes first.
pub(super) fn collect(
    netlist: &Netlist,
    subject: &Subject,
    labels: &Labels<'_>,
    theorems: Vec<Theorem>,
) -> Vec<Chain> {
    let nets = Nets::of(netlist, subject, &theorems);
    let collector = Collector {
        netlist,
        subject,
        labels,
        nets,
    };
    // Each theorem is given up as its chain is made: both at once are large.
    let mut chains: Vec<Chain> = theorems
        .into_iter()
        .flat_map(|theorem| {
            let (kind, mut theorem) = read(subject, labels, theorem);
            if kind != Kind::Subtractor {
                order_operands(labels, &mut theorem);
            }
            collector.twins(kind, &theorem)
        })
        .collect();
    sort(&mut chains);
    drop_repeated(&mut chains);
    chains
}

/// Widest first, then by the lowest net of a sum or, without sums, of a carry.
pub(super) fn sort(chains: &mut [Chain]) {
    chains.sort_by_cached_key(|chain| {
        let sums = chain.positions.iter().flat_map(|p| &p.sums);
        let carries = chain.positions.iter().flat_map(|p| &p.carries);
        let lowest = sums.map(|s| s.net).min();
        let lowest = lowest.or_else(|| carries.map(|s| s.net).min());
        (std::cmp::Reverse(chain.positions.len()), lowest)
    });
}

/// Each copy of a theorem, or a stretch of it, may have been found as one of its
/// own: a chain goes when every sum of it is a wider chain's sum of the same two
/// operands.
fn drop_repeated(chains: &mut Vec<Chain>) {
    let net = |bit: Bit| bit.signal().map(|signal| signal.net);
    let mut known: FxHashSet<(NetId, [Option<NetId>; 2])> = FxHashSet::default();
    chains.retain(|chain| {
        let mut is_new = false;
        for position in &chain.positions {
            let mut operands = [net(position.a), net(position.b)];
            operands.sort_unstable();
            for sum in &position.sums {
                is_new |= known.insert((sum.net, operands));
            }
        }
        is_new
    });
}

struct Collector<'a> {
    netlist: &'a Netlist,
    subject: &'a Subject,
    labels: &'a Labels<'a>,
    nets: Nets,
}

impl Collector<'_> {
    /// The chain of a theorem, or one for each time it is built.
    fn twins(&self, kind: Kind, theorem: &Theorem) -> Vec<Chain> {
        let nets = |node| self.nets.of_node(node).collect();
        let Some((count, copy)) = twins(self.netlist, self.subject, theorem, nets) else {
            return self.chain(kind, theorem, &|_| true).into_iter().collect();
        };
        let one = |at: usize| {
            let own = |net: NetId| copy.get(&net).is_none_or(|&copy| copy == at);
            let has_own = |literal: &Literal| self.nets.of_node(literal.node()).any(own);
            let mut theorem = theorem.clone();
            for literals in theorem.sums.iter_mut().chain(&mut theorem.carries) {
                literals.retain(has_own);
            }
            for (bits, sums) in theorem.bits.iter_mut().zip(&theorem.sums) {
                bits.sum = sums.first().copied().unwrap_or(bits.sum);
            }
            self.chain(kind, &theorem, &own)
        };
        (0..count).filter_map(one).collect()
    }

    /// `None` for a theorem about operands that no net carries and no mode
    /// explains. `own` says which nets are the chain's.
    fn chain(&self, kind: Kind, theorem: &Theorem, own: &dyn Fn(NetId) -> bool) -> Option<Chain> {
        let operands: FxHashSet<NodeId> = theorem
            .bits
            .iter()
            .flat_map(|bits| [bits.a.node(), bits.b.node()])
            .collect();
        let signals = |literals: &[Literal]| {
            let mut signals: Vec<Signal> = Vec::new();
            for literal in literals {
                for net in self.nets.of_node(literal.node()) {
                    let inverted = self.subject.of_net(net) != *literal;
                    let copy = operands.contains(&literal.node()) && inverted;
                    let driven = matches!(self.netlist.driver(net), Driver::Gate(_));
                    if driven && !copy && own(net) {
                        signals.push(Signal { net, inverted });
                    }
                }
            }
            signals.sort_by_key(|s| std::cmp::Reverse(self.labels.preference(s.net)));
            signals.shrink_to_fit();
            signals
        };
        let mode = match kind {
            Kind::Adder | Kind::Subtractor => mode_of(self.subject, self.labels, theorem),
            _ => None,
        };
        let (kind, carry_in, addends): (_, _, Vec<_>) = match &mode {
            Some(moded) => (Kind::AdderSubtractor, moded.carry_in, moded.addends.clone()),
            None => {
                let addends = theorem.bits.iter().map(|bits| (bits.a, bits.b));
                (kind, theorem.carry_in, addends.collect())
            }
        };
        let mode = mode.map(|moded| moded.mode);
        let named = |l: Literal| l.node() == NodeId::FALSE || self.labels.net(l.node()).is_some();
        if !addends.iter().all(|&(a, b)| named(a) && named(b)) {
            return None;
        }
        let positions: Vec<Position> = theorem
            .bits
            .iter()
            .zip(addends)
            .zip(theorem.sums.iter().zip(&theorem.carries))
            .map(|((bits, (a, b)), (sums, carries))| {
                let mut sums = signals(sums);
                if sums.is_empty() {
                    sums.extend(self.labels.signal(bits.sum));
                }
                let outside: Vec<Literal> = carries
                    .iter()
                    .copied()
                    .filter(|literal| !operands.contains(&literal.node()))
                    .collect();
                Position {
                    a: bit(self.labels, a),
                    b: bit(self.labels, b),
                    sums,
                    carries: signals(&outside),
                }
            })
            .collect();
        let has_carry_out = positions.last().is_some_and(|top| !top.carries.is_empty());
        let carry_form = match (kind, theorem.carries.last().and_then(|c| c.first())) {
            (Kind::Subtractor, Some(carry))
                if self.labels.port(carry.node()) == Some(!carry.is_inverted()) =>
            {
                CarryForm::Borrow
            }
            _ => CarryForm::Carry,
        };
        let on_net = |node| self.labels.net(node).is_some();
        let (built_as, construction) = if in_carry_cells(self.netlist, &positions) {
            (BuiltAs::CarryCell, Construction::of_carry_cells())
        } else {
            built_as(self.subject, theorem, on_net)
        };
        Some(Chain {
            kind,
            carry_in: bit(self.labels, carry_in),
            has_carry_out,
            carry_form,
            built_as,
            construction,
            mode: mode.and_then(|mode| self.labels.signal(mode)),
            positions,
            comparison: None,
        })
    }
}
