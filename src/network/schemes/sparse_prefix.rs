//! Sparse prefix: a prefix network of the carries into groups only, and inside a
//! group ripple, or both sums and a select.
//!
//! Invariant: the network above has a position in `group` of them, so cells and
//! wires shrink by about that. With ripple inside, a group adds its length in
//! combinations; with select inside, one choice, for two sums a position.
//!
//! The idea is Han and Carlson's (8th IEEE Symposium on Computer Arithmetic,
//! 1987) at sparseness two; with selects inside, T. Lynch and E. E. Swartzlander,
//! "A Spanning Tree Carry Lookahead Adder", IEEE Transactions on Computers 41,
//! 1992. The network above is Kogge and Stone's.

use super::carry_select::select_sum;
use super::{
    CarryNetwork, Growth, NOTHING, NodeId, Scheme, Settings, Takes, blocks, join, kogge_stone,
    sklansky,
};

pub(super) const SCHEME: Scheme = Scheme {
    name: "sparse-prefix",
    source: "Lynch and Swartzlander 1992",
    growth: Growth::LogLinear,
    takes: Takes {
        valency: true,
        group: true,
        select_inside: true,
        select_end: false,
        ..NOTHING
    },
    shape: |network, settings, _| shape(network, settings),
};

fn shape(network: &mut CarryNetwork, settings: Settings) {
    let carry_in = network.carry_in();
    let groups = blocks::uniform(network.positions(), settings.group);
    // By group: the spans from its lowest position up to each.
    let mut inner: Vec<Vec<NodeId>> = Vec::with_capacity(groups.len());
    for group in &groups {
        let leaves: Vec<NodeId> = group.clone().map(|i| network.leaf(i)).collect();
        inner.push(sklansky::prefixes(network, &leaves, settings.valency));
    }
    let tops = inner.iter().map(|spans| spans[spans.len() - 1]);
    let items: Vec<NodeId> = carry_in.into_iter().chain(tops).collect();
    let above = kogge_stone::prefixes(network, &items, settings.valency);
    let first = usize::from(carry_in.is_some());
    for (number, group) in groups.into_iter().enumerate() {
        let entry = (number + first).checked_sub(1).map(|at| above[at]);
        let spans = &inner[number];
        let mut below = entry;
        for (i, position) in group.clone().enumerate() {
            let span = if settings.select_inside || entry.is_none() {
                let carry = entry.into_iter().chain([spans[i]]);
                join(network, carry)
            } else {
                let leaf = network.leaf(position);
                join(network, below.into_iter().chain([leaf]))
            };
            below = Some(span);
            network.set_carry(position, span);
        }
        network.set_carry(group.end - 1, above[number + first]);
        if let Some(entry) = entry.filter(|_| settings.select_inside) {
            let entry = network.generate_of(entry);
            for (i, position) in group.enumerate().skip(1) {
                let zero = network.generate_of(spans[i - 1]);
                let one = network.either_of(spans[i - 1]);
                select_sum(network, position, entry, one, zero);
            }
        }
    }
}
