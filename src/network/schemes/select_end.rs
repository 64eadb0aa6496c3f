//! The select end: late sums end in a two-way choice between two sums.
//!
//! Where the carry into a position is `G + P·c`, with `c` the lowest of what its
//! last combination joins, the sum is `c ? h ⊕ (G + P) : h ⊕ G`: the choice
//! stands in for that combination and the XOR, which saves a level and costs two
//! sums. It is taken only where the plain sum would be later than the latest
//! sum need be. Conditional sums, at the last step only (Sklansky 1960; Bedrij
//! 1962).

use super::CarryNetwork;
use crate::network::carry_network::{Node, NodeId};
use crate::network::estimate::Estimate;
use crate::network::profile::Profile;
use crate::network::signals::Carry;

/// One sum that may end in a select.
struct Late {
    position: usize,
    plain: i32,
    /// As selected, where the carry is joined of parts.
    selected: Option<i32>,
}

/// Lets the late sums of `network` end in a select.
pub(super) fn select_late_sums(network: &mut CarryNetwork, profile: &Profile) {
    let estimate = Estimate::of(network, profile);
    let slack = |position: usize| match &profile.required {
        Some(required) => required.sums[position],
        None => Some(0),
    };
    let mut sums = Vec::new();
    for position in 1..network.positions() {
        // A sum nobody waits for has no end to save.
        let Some(required) = slack(position) else {
            continue;
        };
        let plain = estimate.sum(network, position) - required;
        let parts = parts(network, position);
        let selected = parts.map(|parts| selected(&estimate, profile, position, &parts) - required);
        sums.push(Late {
            position,
            plain,
            selected,
        });
    }
    let best = |sum: &Late| sum.selected.map_or(sum.plain, |time| time.min(sum.plain));
    let Some(reachable) = sums.iter().map(best).max() else {
        return;
    };
    for sum in sums {
        if sum.plain > reachable
            && let Some(parts) = parts(network, sum.position)
        {
            end_in_select(network, sum.position, &parts);
        }
    }
}

/// What the carry into a position is joined of.
fn parts(network: &CarryNetwork, position: usize) -> Option<Vec<NodeId>> {
    if network.sum(position).is_some() {
        return None;
    }
    match network.carry_into(position)? {
        Carry::Span(node) => match network.node(node) {
            Node::Combine(parts) => Some(parts.to_vec()),
            Node::CarryIn | Node::Leaf(_) => None,
        },
        Carry::Signal(_) => None,
    }
}

/// When the sum is ready that ends in a select by the lowest part's G.
fn selected(estimate: &Estimate<'_>, profile: &Profile, position: usize, parts: &[NodeId]) -> i32 {
    let costs = &profile.costs;
    let (upper, lowest) = (&parts[..parts.len() - 1], parts[parts.len() - 1]);
    let (generate, propagate) = match upper {
        &[only] => (estimate.generate(only), estimate.propagate(only)),
        _ => estimate.joined(upper),
    };
    let carries = generate.max(propagate) + costs.or(2);
    let values = carries.max(profile.half_sum[position]) + costs.xor;
    (values + costs.select_value).max(estimate.generate(lowest) + costs.select_choose)
}

fn end_in_select(network: &mut CarryNetwork, position: usize, parts: &[NodeId]) {
    let (upper, lowest) = (&parts[..parts.len() - 1], parts[parts.len() - 1]);
    let upper = match upper {
        &[only] => only,
        _ => network.combine(upper),
    };
    let choose = network.generate_of(lowest);
    let (generate, propagate) = (network.generate_of(upper), network.propagate_of(upper));
    let half = network.half_sum(position);
    let if_zero = network.xor(half, generate);
    let carry = network.or(&[generate, propagate]);
    let if_one = network.xor(half, carry);
    let sum = network.select(choose, if_one, if_zero);
    network.set_sum(position, sum);
}
