//! Folding of a product before it becomes a gate.
//!
//! Beyond constants and repeated or opposite inputs, one level below is looked
//! at (the absorption laws of Boolean algebra): a conjunct of an input that is
//! itself a product is implied, so `(a·b)·a = a·b`, `(a·b)·~a = 0`,
//! `~(a·b)·~a = ~a`, `~(a·b)·a = a·~b`. This is what makes a constant carry-in
//! or a constant operand bit cost nothing. Invariant: no rule makes a gate, and
//! none makes a signal later than what it replaces.

use super::overlay::{Literal, Node, Operator, Overlay};

/// The inputs that are left of a product, distinct and not constant; `None` for
/// the constant 0, an empty list for the constant 1.
pub(super) fn product(overlay: &Overlay, inputs: &[Literal]) -> Option<Vec<Literal>> {
    let mut kept = inputs.to_vec();
    loop {
        kept.sort_unstable();
        kept.dedup();
        kept.retain(|&input| input != Literal::TRUE);
        if kept.contains(&Literal::FALSE) || has_opposites(&kept) {
            return None;
        }
        if !simplify(overlay, &mut kept)? {
            return Some(kept);
        }
    }
}

fn has_opposites(sorted: &[Literal]) -> bool {
    sorted
        .windows(2)
        .any(|pair| pair[0].node() == pair[1].node())
}

/// The conjuncts of an input that is a plain product.
fn conjuncts(overlay: &Overlay, input: Literal) -> &[Literal] {
    if input.is_inverted() {
        return &[];
    }
    below(overlay, input.node())
}

fn below(overlay: &Overlay, node: Node) -> &[Literal] {
    match overlay.operator(node) {
        Operator::And => overlay.inputs(node),
        _ => &[],
    }
}

/// Applies one rule; says whether one applied, `None` for the constant 0.
fn simplify(overlay: &Overlay, kept: &mut Vec<Literal>) -> Option<bool> {
    // True wherever the product is: the inputs and their conjuncts.
    let mut implied: Vec<Literal> = kept
        .iter()
        .flat_map(|&input| conjuncts(overlay, input))
        .chain(kept.iter())
        .copied()
        .collect();
    implied.sort_unstable();
    implied.dedup();
    if has_opposites(&implied) {
        return None;
    }
    let holds = |literal: Literal| implied.binary_search(&literal).is_ok();
    for at in 0..kept.len() {
        let input = kept[at];
        if kept
            .iter()
            .any(|&other| conjuncts(overlay, other).contains(&input))
        {
            kept.remove(at);
            return Some(true);
        }
        if !input.is_inverted() {
            continue;
        }
        let inner = below(overlay, input.node());
        if inner.is_empty() {
            continue;
        }
        if inner.iter().any(|&literal| holds(!literal)) {
            kept.remove(at);
            return Some(true);
        }
        let mut open = inner.iter().copied().filter(|&literal| !holds(literal));
        match (open.next(), open.next()) {
            (None, _) => return None,
            (Some(last), None) => {
                kept[at] = !last;
                return Some(true);
            }
            (Some(_), Some(_)) => {}
        }
    }
    Some(false)
}
