//! How a chain is built today.
//!
//! A ripple is seen from the carries alone (`ripple`). For anything else the
//! cone between operands and results is labelled (`spans`): which of its nets
//! carry a group generate G[i:j], a group propagate P[i:j] in either convention,
//! the carry out of [i:j] for a carry of 1 into it, a sum, or a sum for either
//! carry. Then it is told what each labelled net is made from (`made_from`), and
//! the whole is compared with what the published ways to build an adder look
//! like (`classify`), scheme by scheme (`nearest`).
//!
//! Labels are found by simulating the cone with its operands free, on patterns
//! rich in long propagate runs; they describe, and no theorem rests on them. A
//! cone that is not accounted for is `mixed`, and that is said.

mod classify;
mod cone;
mod made_from;
mod nearest;
mod network;
mod ripple;
mod rows;
mod spans;
mod written;

use super::model::{BuiltAs, Construction};
use super::verify::Theorem;
use crate::subject::{NodeId, Subject};

/// Classifies a proven chain; `on_net` says which nodes some net carries.
pub(super) fn built_as(
    subject: &Subject,
    theorem: &Theorem,
    on_net: impl Fn(NodeId) -> bool,
) -> (BuiltAs, Construction) {
    if ripple::is_ripple(subject, theorem) {
        return plain_ripple(theorem);
    }
    let Some(cone) = cone::Cone::of(subject, theorem) else {
        return mixed("its cone is too large, or not enclosed by its operands");
    };
    let labels = spans::labels(&cone, theorem);
    let Some(made) = made_from::MadeFrom::of(subject, &cone, &labels, theorem, on_net) else {
        return mixed("its nets are too entangled to follow");
    };
    classify::classify(&made)
}

fn mixed(why: &str) -> (BuiltAs, Construction) {
    let construction = Construction {
        detail: why.to_owned(),
        ..Construction::default()
    };
    (BuiltAs::Mixed, construction)
}

fn plain_ripple(theorem: &Theorem) -> (BuiltAs, Construction) {
    let has_carry_in = theorem.carry_in.node() != NodeId::FALSE;
    // The carry out of position 0 is a generate, unless a carry comes in.
    let first = usize::from(!has_carry_in);
    let steps = theorem.carries.iter().skip(first);
    let steps = steps.filter(|carries| !carries.is_empty()).count();
    let construction = Construction {
        nearest: Some("ripple"),
        group: None,
        levels: Some(steps),
        cells: Some(steps),
        taxonomy: None,
        detail: "every carry is made from the carry just below it".to_owned(),
    };
    (BuiltAs::Ripple, construction)
}
