//! Carry-increment: blocks that ripple as if no carry came, and one combination
//! a position with the carry that does.
//!
//! Invariant: a block's carry-out is one combination after the carry into it, so
//! the carry passes a block in one level; all positions of a block read that
//! carry. With blocks one longer each, about √(2n) levels; about 2n cells.
//!
//! A. Tyagi, "A Reduced-Area Scheme for Carry-Select Adders", IEEE Transactions
//! on Computers 42, 1993; R. Zimmermann's thesis, ETH Zürich 1997, has the name.

use super::{BLOCKS, Growth, Scheme, blocks, join};

pub(super) const SCHEME: Scheme = Scheme {
    name: "carry-increment",
    source: "Tyagi 1993",
    growth: Growth::Linear,
    takes: BLOCKS,
    shape: |network, settings, _| {
        let mut entry = network.carry_in();
        let (positions, has_carry_in) = (network.positions(), entry.is_some());
        for block in blocks::of(positions, has_carry_in, settings.group, settings.growing) {
            let mut span = None;
            let mut carry = entry;
            for position in block {
                let leaf = network.leaf(position);
                let own = join(network, span.into_iter().chain([leaf]));
                span = Some(own);
                let out = join(network, entry.into_iter().chain([own]));
                network.set_carry(position, out);
                carry = Some(out);
            }
            entry = carry;
        }
    },
};
