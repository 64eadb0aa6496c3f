//! The select end: late sums end in a two-way choice between two sums.
//!
//! Where the carry into a position is `G + P·c`, with `c` the lowest of what its
//! last combination joins, the sum is `c ? h ⊕ (G + P) : h ⊕ G`: the choice
//! stands in for that combination and the XOR, which saves a level and costs two
//! sums. Where `G` is late itself the two sums are chosen in turn by the lowest
//! part of `G`, and so on. Only the sums that would else be later than the latest
//! need be end like this, and by the fewest choices that serve.
//!
//! Invariant: nothing but sums changes. Conditional sums (J. Sklansky,
//! "Conditional-Sum Addition Logic", 1960; O. J. Bedrij, "Carry-Select Adder",
//! 1962), position by position.

use super::{CarryNetwork, NodeId, SignalId};
use crate::network::carry_network::Node;
use crate::network::estimate::Estimate;
use crate::network::profile::Profile;
use crate::network::signals::Carry;

/// Most choices one above the other.
const MOST_CHOICES: usize = 16;

/// How a sum may end.
#[derive(Clone, Copy, PartialEq, Eq)]
struct End {
    choices: usize,
    /// Whether the carries after a one are made from the lowest position up,
    /// which is earlier than `G + P` and costs more.
    early: bool,
    ready: i32,
}

/// A span taken apart from its low end.
struct Pieces {
    /// What is left at the high end, most significant first.
    upper: Vec<NodeId>,
    /// What was taken off, the lowest first.
    lower: Vec<NodeId>,
}

impl Pieces {
    /// The span of a carry, taken apart `count` times, as far as it goes.
    fn of(network: &CarryNetwork, carry: NodeId, count: usize) -> Option<Self> {
        let mut pieces = Self {
            upper: vec![carry],
            lower: Vec::with_capacity(count),
        };
        for _ in 0..count {
            if let [only] = pieces.upper[..] {
                let Node::Combine(parts) = network.node(only) else {
                    return None;
                };
                pieces.upper = parts.to_vec();
            }
            pieces.lower.extend(pieces.upper.pop());
        }
        Some(pieces)
    }
}

/// Lets the late sums of `network` end in a select.
pub(super) fn select_late_sums(network: &mut CarryNetwork, profile: &Profile) {
    let estimate = Estimate::of(network, profile);
    let mut sums: Vec<(usize, i32, Vec<End>)> = Vec::new();
    for position in 1..network.positions() {
        let required = match &profile.required {
            Some(required) => required.sums[position],
            None => Some(0),
        };
        // A sum nobody waits for has no end to save.
        if let Some(required) = required {
            let plain = estimate.sum(network, position) - required;
            let mut ends = ends(network, &estimate, profile, position);
            for end in &mut ends {
                end.ready -= required;
            }
            sums.push((position, plain, ends));
        }
    }
    let best = |(_, plain, ends): &(usize, i32, Vec<End>)| {
        let ends = ends.iter().map(|end| end.ready);
        ends.min().map_or(*plain, |end| end.min(*plain))
    };
    let Some(reachable) = sums.iter().map(best).max() else {
        return;
    };
    for (position, plain, ends) in sums {
        let serves = ends.into_iter().find(|end| end.ready <= reachable);
        if let Some(end) = serves.filter(|_| plain > reachable) {
            end_in_select(network, position, end);
        }
    }
}

/// The span whose G is the carry into a position that has a plain sum.
fn carry_into(network: &CarryNetwork, position: usize) -> Option<NodeId> {
    match network.carry_into(position)? {
        Carry::Span(node) => network.sum(position).is_none().then_some(node),
        Carry::Signal(_) => None,
    }
}

/// The ways a sum may end, the cheapest first.
fn ends(
    network: &CarryNetwork,
    estimate: &Estimate<'_>,
    profile: &Profile,
    position: usize,
) -> Vec<End> {
    let mut list = Vec::new();
    let Some(carry) = carry_into(network, position) else {
        return list;
    };
    for choices in 1..=MOST_CHOICES {
        let Some(pieces) = Pieces::of(network, carry, choices) else {
            break;
        };
        for early in [false, true] {
            list.push(End {
                choices,
                early,
                ready: ready(estimate, profile, position, &pieces, early),
            });
        }
    }
    list
}

/// When such a sum is ready.
fn ready(
    estimate: &Estimate<'_>,
    profile: &Profile,
    position: usize,
    pieces: &Pieces,
    early: bool,
) -> i32 {
    let costs = &profile.costs;
    let half = profile.half_sum[position];
    let (generate, _) = estimate.span(&pieces.upper);
    let either = estimate.either(&pieces.upper, early);
    let mut zero = half.max(generate) + costs.xor;
    let mut one = half.max(either) + costs.xor;
    for (i, &lower) in pieces.lower.iter().enumerate().rev() {
        let values = zero.max(one) + costs.select_value;
        zero = values.max(estimate.generate(lower) + costs.select_choose);
        if i > 0 {
            one = values.max(estimate.either(&[lower], early) + costs.select_choose);
        }
    }
    zero
}

fn end_in_select(network: &mut CarryNetwork, position: usize, end: End) {
    let carry = carry_into(network, position);
    let pieces = carry.and_then(|carry| Pieces::of(network, carry, end.choices));
    let Some(Pieces { upper, lower }) = pieces else {
        return;
    };
    let upper = match upper[..] {
        [only] => only,
        _ => network.combine(&upper),
    };
    let either = |network: &mut CarryNetwork, node: NodeId| -> SignalId {
        if end.early {
            network.early_either_of(node)
        } else {
            network.either_of(node)
        }
    };
    let half = network.half_sum(position);
    let (generate, after_one) = (network.generate_of(upper), either(network, upper));
    let mut zero = network.xor(half, generate);
    let mut one = network.xor(half, after_one);
    for (i, &node) in lower.iter().enumerate().rev() {
        let (if_one, if_zero) = (one, zero);
        let choose = network.generate_of(node);
        zero = network.select(choose, if_one, if_zero);
        if i > 0 {
            let choose = either(network, node);
            one = network.select(choose, if_one, if_zero);
        }
    }
    network.set_sum(position, zero);
}
