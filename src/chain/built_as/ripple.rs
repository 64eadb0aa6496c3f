//! Whether every carry net is made from the carry one position below and from no
//! other: the quick test, by structure alone, that most chains end at.

use super::super::verify::Theorem;
use crate::subject::{NodeId, NodeKind, Subject};
use rustc_hash::{FxHashMap, FxHashSet};

/// A carry's own logic in a ripple is a handful of nodes; more is not followed.
const NEAR: usize = 64;

/// See the head of the module.
pub(super) fn is_ripple(subject: &Subject, theorem: &Theorem) -> bool {
    let mut position_of: FxHashMap<NodeId, usize> = FxHashMap::default();
    for (i, carries) in theorem.carries.iter().enumerate() {
        for literal in carries {
            position_of.insert(literal.node(), i + 1);
        }
    }
    let has_carry_in = theorem.carry_in.node() != NodeId::FALSE;
    if has_carry_in {
        position_of.insert(theorem.carry_in.node(), 0);
    }
    let operands: FxHashSet<NodeId> = theorem
        .bits
        .iter()
        .flat_map(|bits| [bits.a.node(), bits.b.node()])
        .collect();
    // The carry out of the top position may be on no net.
    let last = theorem.bits.len() - 1;
    for (i, carries) in theorem.carries.iter().enumerate() {
        if carries.is_empty() && i != last {
            return false;
        }
        // Without carry-in the carry out of position 0 is made from operands.
        let from_below = i > 0 || has_carry_in;
        for carry in carries {
            let Some(found) = nearest_carries(subject, carry.node(), &position_of, &operands)
            else {
                return false;
            };
            // A second net of the same carry may be made from the first, or from
            // sums above it.
            let is_next = found.iter().all(|&at| at >= i);
            // An incrementer's lowest carries may be operands themselves.
            let may_be_first = !from_below || i <= 1;
            if !is_next || (found.is_empty() && !may_be_first) {
                return false;
            }
        }
    }
    true
}

/// Positions of the carries met first when walking back from `carry`; `None`
/// past the limit.
fn nearest_carries(
    subject: &Subject,
    carry: NodeId,
    position_of: &FxHashMap<NodeId, usize>,
    operands: &FxHashSet<NodeId>,
) -> Option<Vec<usize>> {
    let mut found = Vec::new();
    let mut seen = FxHashSet::default();
    let mut stack = vec![carry];
    while let Some(node) = stack.pop() {
        if !seen.insert(node) || node == NodeId::FALSE {
            continue;
        }
        if node != carry {
            if let Some(&at) = position_of.get(&node) {
                found.push(at);
                continue;
            }
            if operands.contains(&node) {
                continue;
            }
        }
        if seen.len() > NEAR {
            return None;
        }
        match subject.kind(node) {
            NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
            NodeKind::Xor(x, y) => stack.extend([x, y]),
            NodeKind::False | NodeKind::Free(_) => {}
        }
    }
    Some(found)
}
