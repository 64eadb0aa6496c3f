//! Proof of a candidate, bit by bit from the least significant end.
//!
//! Each proven equality helps the next. A carry that is on a net is proven
//! equal to the majority that defines it and stands for it from then on; a
//! carry on no net stays the majority itself. Nodes with the same hash as a sum
//! or carry are proven one by one: a hash nominates, it proves nothing.

use super::candidate::{Bits, Candidate, Context, Lookup};
use super::entries::Variant;
use crate::prove::{Answer, Effort, Fact, Prover};
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use rustc_hash::FxHashSet;

/// A proven stretch of positions.
#[derive(Clone, Debug)]
pub(super) struct Theorem {
    pub(super) bits: Vec<Bits>,
    pub(super) carry_in: Literal,
    /// By position: literals proven equal to the sum.
    pub(super) sums: Vec<Vec<Literal>>,
    /// By position: literals proven equal to the carry out.
    pub(super) carries: Vec<Vec<Literal>>,
}

impl Theorem {
    /// Keeps the lowest `positions` positions.
    pub(super) fn truncate(&mut self, positions: usize) {
        self.bits.truncate(positions);
        self.sums.truncate(positions);
        self.carries.truncate(positions);
    }
}

/// What became of a candidate.
pub(super) struct Outcome {
    /// The positions proven from the low end.
    pub(super) theorem: Theorem,
    /// Set when proof ended early: undecided, or refuted.
    pub(super) undecided: Option<bool>,
    pub(super) conflicts: u64,
}

struct Run<'a, 'b> {
    prover: Prover<'a>,
    context: &'b Context<'b>,
    lookup: &'b Lookup,
}

impl Run<'_, '_> {
    fn first(&self, literal: Literal) -> bool {
        self.context.signatures.first(literal.node()) ^ literal.is_inverted()
    }

    /// Literals of all nodes with `hash` that are proven equal to `fact`, whose
    /// value under the first pattern is `value`.
    fn equal_nodes(
        &mut self,
        hash: u64,
        value: bool,
        fact: Fact,
        skip: &FxHashSet<NodeId>,
    ) -> Vec<Literal> {
        let mut equal = Vec::new();
        if hash == 0 {
            return equal;
        }
        for &node in self.lookup.nodes(hash) {
            if skip.contains(&node) {
                continue;
            }
            let literal = node.literal();
            let literal = literal.xor(self.first(literal) != value);
            let own = self.prover.literal(literal);
            if self.prover.equal_nearby(own, fact) == Answer::Proven {
                equal.push(literal);
            }
        }
        equal
    }
}

/// Proves as many positions of `candidate` as hold, from the low end.
pub(super) fn verify(
    subject: &Subject,
    context: &Context<'_>,
    lookup: &Lookup,
    candidate: &Candidate,
    effort: Effort,
) -> Outcome {
    let operands: FxHashSet<NodeId> = candidate
        .bits
        .iter()
        .flat_map(|bits| [bits.a.node(), bits.b.node()])
        .chain([candidate.carry_in.node()])
        .filter(|&node| node != NodeId::FALSE)
        .collect();
    let prover = Prover::new(subject, effort, operands.iter().copied());
    let mut run = Run {
        prover,
        context,
        lookup,
    };
    let mut theorem = Theorem {
        bits: Vec::new(),
        carry_in: candidate.carry_in,
        sums: Vec::new(),
        carries: Vec::new(),
    };
    let mut undecided = None;
    let mut carry = run.prover.literal(candidate.carry_in);
    let mut value = run.first(candidate.carry_in);
    for (at, (&bits, &entry)) in candidate.bits.iter().zip(&candidate.path).enumerate() {
        let (a, b) = (run.prover.literal(bits.a), run.prover.literal(bits.b));
        let own = run.prover.literal(bits.sum);
        let partial = run.prover.xor(a, b);
        let sum = run.prover.xor(partial, carry);
        match run.prover.equal(own, sum) {
            Answer::Proven => {}
            answer => {
                undecided = Some(answer == Answer::Undecided);
                break;
            }
        }
        let sum_value = run.first(bits.sum);
        let hash = context.signatures.hash(bits.sum.node());
        let mut sums = run.equal_nodes(hash, sum_value, sum, &operands);
        if !sums.contains(&bits.sum) {
            sums.push(bits.sum);
        }
        theorem.sums.push(sums);
        let (x, y) = (run.first(bits.a), run.first(bits.b));
        let next_value = (x & y) | (value & (x | y));
        if let Some(&next) = candidate.path.get(at + 1) {
            let out = run.prover.majority(a, b, carry);
            let hash = context.entries.key(next, context.signatures);
            let carries = run.equal_nodes(hash, next_value, out, &operands);
            carry = match carries.first() {
                Some(&net) => run.prover.literal(net),
                None => out,
            };
            value = next_value;
            theorem.bits.push(bits);
            theorem.carries.push(carries);
        } else {
            let (read, carries) =
                carry_out(subject, &mut run, bits, entry, carry, value, &operands);
            // Another polarity of one operand inverts what the sum is.
            let flip = read.sum != bits.sum;
            for literal in theorem.sums.iter_mut().last().into_iter().flatten() {
                *literal = literal.xor(flip);
            }
            let bits = read;
            theorem.bits.push(bits);
            theorem.carries.push(carries);
        }
    }
    let conflicts = run.prover.conflicts();
    Outcome {
        theorem,
        undecided,
        conflicts,
    }
}

/// The carry out of the last position. Only it can tell the polarity of the
/// last operands; where they are inner nets any polarity is tried, the one of
/// the position below first.
fn carry_out(
    subject: &Subject,
    run: &mut Run<'_, '_>,
    bits: Bits,
    entry: super::entries::EntryId,
    carry: Fact,
    carry_value: bool,
    operands: &FxHashSet<NodeId>,
) -> (Bits, Vec<Literal>) {
    let inverted = bits.sum.is_inverted() ^ bits.a.is_inverted() ^ bits.b.is_inverted();
    let is_inner = |literal: Literal| {
        matches!(
            subject.kind(literal.node()),
            NodeKind::And(..) | NodeKind::Xor(..)
        )
    };
    let mut readings: Vec<(bool, Variant, Bits)> = Vec::new();
    for variant in Variant::ALL {
        let (a, b, c) = variant.inverted();
        let flip = inverted ^ c;
        let a = bits.a.node().literal().xor(a ^ flip);
        let b = bits.b.node().literal().xor(b ^ flip);
        let changed = (a != bits.a, b != bits.b);
        if (changed.0 && !is_inner(a)) || (changed.1 && !is_inner(b)) {
            continue;
        }
        let sum = bits.sum.xor(changed.0 ^ changed.1);
        readings.push((changed == (false, false), variant, Bits { sum, a, b }));
    }
    readings.sort_by_key(|&(same, _, _)| !same);
    for (_, variant, reading) in readings {
        let hash = run
            .context
            .entries
            .carry_out(entry, variant, run.context.signatures);
        if run.lookup.nodes(hash).is_empty() {
            continue;
        }
        let (a, b) = (run.prover.literal(reading.a), run.prover.literal(reading.b));
        let out = run.prover.majority(a, b, carry);
        let (x, y) = (run.first(reading.a), run.first(reading.b));
        let value = (x & y) | (carry_value & (x | y));
        let carries = run.equal_nodes(hash, value, out, operands);
        if !carries.is_empty() {
            return (reading, carries);
        }
    }
    (bits, Vec::new())
}
