//! Reads a theorem about carries as a comparison.
//!
//! The carry out of `a + ~b + c` says `a > b` when `c` is 0 and `a >= b` when it
//! is 1; a signed comparison is the unsigned one with the sign bits exchanged
//! (two's complement, common practice, no source). The dual theorem swaps the
//! operands. Told is the reading that shows inputs and register outputs in
//! positive form, and the result in the polarity a port or register shows.

use crate::chain::built_as::built_as;
use crate::chain::collect::{Nets, bit};
use crate::chain::kinds::order_operands;
use crate::chain::label::Labels;
use crate::chain::model::{CarryForm, Chain, Comparison, Kind, Position, Relation};
use crate::chain::verify::Theorem;
use crate::netlist::{Bit, Driver, Netlist, Signal};
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use rustc_hash::FxHashSet;

/// What theorems are read with.
pub(super) struct Reader<'a> {
    pub(super) netlist: &'a Netlist,
    pub(super) subject: &'a Subject,
    pub(super) labels: &'a Labels<'a>,
    pub(super) nets: Nets,
}

fn dual(theorem: &mut Theorem) {
    theorem.carry_in = !theorem.carry_in;
    for bits in &mut theorem.bits {
        (bits.a, bits.b) = (!bits.a, !bits.b);
    }
    for carry in theorem.carries.iter_mut().flatten() {
        *carry = !*carry;
    }
}

/// How many operand bits of fixed polarity read as `a` plain and `b` inverted,
/// and how many the other way round.
fn readings<'b>(
    subject: &Subject,
    bits: impl Iterator<Item = &'b crate::chain::candidate::Bits>,
) -> (usize, usize) {
    let is_fixed = |l: Literal| matches!(subject.kind(l.node()), NodeKind::Free(_));
    let (mut fits, mut against) = (0, 0);
    for bits in bits {
        for (literal, plain) in [(bits.a, true), (bits.b, false)] {
            if is_fixed(literal) {
                if literal.is_inverted() == plain {
                    against += 1;
                } else {
                    fits += 1;
                }
            }
        }
    }
    (fits, against)
}

/// Positions from which on a run of carries is told whatever its operands are
/// called. Lookahead logic is full of short ones.
const SHORTEST_UNNAMED: usize = 8;

impl Reader<'_> {
    /// Whether both operands look like words: bits of one bus each, or nets at
    /// even distances.
    fn are_words(&self, theorem: &Theorem) -> bool {
        let free = |l: Literal| matches!(self.subject.kind(l.node()), NodeKind::Free(_));
        let operands: [Vec<NodeId>; 2] = [
            theorem.bits.iter().map(|bits| bits.a.node()).collect(),
            theorem.bits.iter().map(|bits| bits.b.node()).collect(),
        ];
        let all_free = (theorem.bits.iter()).all(|bits| free(bits.a) && free(bits.b));
        operands.iter().all(|nodes| {
            let named = nodes
                .windows(2)
                .all(|pair| self.labels.follows(pair[0], pair[1]) == 3);
            let spaced = || {
                nodes
                    .windows(3)
                    .all(|three| (self.labels).evenly_spaced(three[0], three[1], three[2]))
            };
            named || (all_free && spaced())
        })
    }

    /// The chain a theorem without sums is; `None` for one that means nothing.
    pub(super) fn chain(&self, mut theorem: Theorem) -> Option<Chain> {
        order_operands(self.labels, &mut theorem);
        if theorem.bits.len() < SHORTEST_UNNAMED && !self.are_words(&theorem) {
            return None;
        }
        let top = theorem.bits.len() - 1;
        let (fits, against) = readings(self.subject, theorem.bits[..top].iter());
        if against > fits {
            dual(&mut theorem);
        }
        let (fits, against) = readings(self.subject, theorem.bits[top..].iter());
        let below = readings(self.subject, theorem.bits[..top].iter());
        let signed = against == 2 && fits == 0 && below.0 > below.1;
        let carry = *theorem.carries.last()?.first()?;
        let (_, on_net) = self.labels.net(carry.node())?;
        let shown = match self.labels.port(carry.node()) {
            Some(inverted) => carry.node().literal().xor(inverted),
            None => on_net,
        };
        let result = self.labels.signal(shown)?;
        // The carry itself says `>` or `>=`, its complement the opposite.
        let is_carry = carry == shown;
        let with_equal = theorem.carry_in == Literal::TRUE;
        let relation = match (is_carry, with_equal) {
            (true, false) => Relation::Greater,
            (true, true) => Relation::GreaterOrEqual,
            (false, false) => Relation::LessOrEqual,
            (false, true) => Relation::Less,
        };
        let operands: FxHashSet<NodeId> = theorem
            .bits
            .iter()
            .flat_map(|bits| [bits.a.node(), bits.b.node()])
            .collect();
        let positions = theorem
            .bits
            .iter()
            .zip(&theorem.carries)
            .map(|(bits, carries)| Position {
                a: bit(self.labels, bits.a),
                b: bit(self.labels, bits.b),
                sums: Vec::new(),
                carries: self.signals(carries, &operands),
            })
            .collect();
        let is_named = |node| self.labels.net(node).is_some();
        let (built_as, construction) = built_as(self.subject, &theorem, is_named);
        Some(Chain {
            kind: Kind::Comparator,
            positions,
            carry_in: self.carry_in(theorem.carry_in)?,
            has_carry_out: true,
            carry_form: CarryForm::Carry,
            built_as,
            construction,
            mode: None,
            comparison: Some(Comparison {
                result,
                relation,
                signed,
            }),
        })
    }

    fn carry_in(&self, literal: Literal) -> Option<Bit> {
        let is_named = literal.node() == NodeId::FALSE || self.labels.net(literal.node()).is_some();
        is_named.then(|| bit(self.labels, literal))
    }

    fn signals(&self, literals: &[Literal], operands: &FxHashSet<NodeId>) -> Vec<Signal> {
        let mut signals = Vec::new();
        for literal in literals {
            if operands.contains(&literal.node()) {
                continue;
            }
            for net in self.nets.of_node(literal.node()) {
                if matches!(self.netlist.driver(net), Driver::Gate(_)) {
                    let inverted = self.subject.of_net(net) != *literal;
                    signals.push(Signal { net, inverted });
                }
            }
        }
        signals.sort_by_key(|s| std::cmp::Reverse(self.labels.preference(s.net)));
        signals.shrink_to_fit();
        signals
    }
}
