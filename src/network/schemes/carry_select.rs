//! Carry-select: blocks that ripple twice, as if no carry and as if one came, and
//! a choice between the two once it has.
//!
//! Invariant: the carry passes a block in one AND and one OR (of the two
//! carries the one with a carry-in is never less, so the choice needs no more),
//! and every sum above a block's lowest is a select. With blocks one longer each
//! the levels grow as √(2n).
//!
//! O. J. Bedrij, "Carry-Select Adder", IRE Transactions on Electronic Computers
//! EC-11, 1962.

use super::{BLOCKS, CarryNetwork, Growth, NodeId, Scheme, SignalId, blocks, join};

pub(super) const SCHEME: Scheme = Scheme {
    name: "carry-select",
    source: "Bedrij 1962",
    growth: Growth::Linear,
    takes: BLOCKS,
    shape: |network, settings, _| {
        let mut entry = network.carry_in().map(|node| network.generate_of(node));
        let (positions, has_carry_in) = (network.positions(), entry.is_some());
        for block in blocks::of(positions, has_carry_in, settings.group, settings.growing) {
            let mut span: Option<NodeId> = None;
            let mut with_carry: Option<SignalId> = None;
            let mut carry = entry;
            for position in block {
                if let (Some(entry), Some(span), Some(one)) = (entry, span, with_carry) {
                    let zero = network.generate_of(span);
                    select_sum(network, position, entry, one, zero);
                }
                let leaf = network.leaf(position);
                let own = join(network, span.into_iter().chain([leaf]));
                span = Some(own);
                let Some(entry) = entry else {
                    network.set_carry(position, own);
                    carry = Some(network.generate_of(own));
                    continue;
                };
                let one = carry_after_one(network, leaf, with_carry);
                with_carry = Some(one);
                let out = one_or_other(network, entry, one, own);
                network.set_carry_signal(position, out);
                carry = Some(out);
            }
            entry = carry;
        }
    },
};

/// The sum of a position, by the carry into its block.
pub(super) fn select_sum(
    network: &mut CarryNetwork,
    position: usize,
    entry: SignalId,
    one: SignalId,
    zero: SignalId,
) {
    let half = network.half_sum(position);
    let if_one = network.xor(half, one);
    let if_zero = network.xor(half, zero);
    let sum = network.select(entry, if_one, if_zero);
    network.set_sum(position, sum);
}

/// The carry out of a leaf when a carry has come into the block.
fn carry_after_one(network: &mut CarryNetwork, leaf: NodeId, below: Option<SignalId>) -> SignalId {
    let Some(below) = below else {
        return network.either_of(leaf);
    };
    let (generate, propagate) = (network.generate_of(leaf), network.propagate_of(leaf));
    let passed = network.and(&[propagate, below]);
    network.or(&[generate, passed])
}

/// The carry out of a block's span: its own, or the other once a carry came.
fn one_or_other(
    network: &mut CarryNetwork,
    entry: SignalId,
    one: SignalId,
    span: NodeId,
) -> SignalId {
    let zero = network.generate_of(span);
    let passed = network.and(&[entry, one]);
    network.or(&[zero, passed])
}
