//! Proves a path: from the least significant end, each carry equal to the
//! majority of its operands and the carry below. What is proven helps the next
//! position; a refuted position ends the theorem below it.

use super::Ground;
use super::link::Path;
use crate::chain::candidate::Bits;
use crate::chain::verify::Theorem;
use crate::prove::{Answer, Effort, Prover};
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use rustc_hash::FxHashSet;

/// What became of a path.
pub(super) struct Outcome {
    /// The positions proven from the low end; it has no sums.
    pub(super) theorem: Theorem,
    /// Whether the position above the theorem stayed open.
    pub(super) undecided: bool,
    pub(super) conflicts: u64,
}

/// Levels encoded below every carry before the first question.
const AROUND: usize = 8;
/// Levels below those that a question may reach.
const BELOW: usize = 4;

/// Where encoding pauses: at the operands, and some levels below each carry, so
/// that a carry whose logic reaches around its operands does not draw in
/// everything before them.
fn stops(subject: &Subject, path: &Path) -> FxHashSet<NodeId> {
    let operands = path.bits.iter().flat_map(|&(x, y)| [x.node(), y.node()]);
    let mut stops: FxHashSet<NodeId> = operands
        .chain([path.carry_in.node()])
        .filter(|&node| node != NodeId::FALSE)
        .collect();
    let carries: FxHashSet<NodeId> = path.carries.iter().map(|carry| carry.node()).collect();
    let mut inside: FxHashSet<NodeId> = carries.clone();
    let mut front: Vec<NodeId> = path.carries.iter().map(|carry| carry.node()).collect();
    for _ in 0..AROUND {
        for node in std::mem::take(&mut front) {
            let (x, y) = match subject.kind(node) {
                NodeKind::And(x, y) => (x.node(), y.node()),
                NodeKind::Xor(x, y) => (x, y),
                NodeKind::False | NodeKind::Free(_) => continue,
            };
            for below in [x, y] {
                if !stops.contains(&below) && inside.insert(below) {
                    front.push(below);
                }
            }
        }
    }
    stops.extend(front);
    stops
}

/// Proves `path` as far as it holds.
pub(super) fn prove(ground: &Ground<'_>, path: &Path) -> Outcome {
    let effort = Effort {
        conflicts: ground.options.effort,
        nodes: ground.proof_nodes,
    };
    let mut prover = Prover::new(ground.subject, effort, stops(ground.subject, path));
    let mut outcome = Outcome {
        theorem: Theorem {
            bits: Vec::new(),
            carry_in: path.carry_in,
            sums: Vec::new(),
            carries: Vec::new(),
        },
        undecided: false,
        conflicts: 0,
    };
    let mut carry = prover.literal(path.carry_in);
    for (&(a, b), &out) in path.bits.iter().zip(&path.carries) {
        let (x, y) = (prover.literal(a), prover.literal(b));
        let majority = prover.majority(x, y, carry);
        let own = prover.literal(out);
        // An equality that holds only for values the operands happen to have is
        // not this chain's: what is looked at stays near the operands.
        match prover.equal_within(own, majority, BELOW) {
            Answer::Proven => {}
            Answer::Refuted(_) => break,
            Answer::Undecided => {
                outcome.undecided = true;
                break;
            }
        }
        carry = own;
        outcome.theorem.bits.push(Bits {
            sum: Literal::FALSE,
            a,
            b,
        });
        outcome.theorem.sums.push(Vec::new());
        outcome.theorem.carries.push(vec![out]);
    }
    outcome.conflicts = prover.conflicts();
    outcome
}
