//! Brent–Kung: a tree up to the top carry, and its branches filled in downwards.
//!
//! Invariant: fewer than 2n cells at valency 2, in about twice the fewest levels.
//!
//! R. P. Brent and H. T. Kung, "A Regular Layout for Parallel Adders", IEEE
//! Transactions on Computers C-31, 1982.

use super::fold::folded;
use super::{Growth, Scheme, VALENCY, items, set_carries};

pub(super) const SCHEME: Scheme = Scheme {
    name: "brent-kung",
    source: "Brent and Kung 1982",
    growth: Growth::Linear,
    takes: VALENCY,
    shape: |network, settings, _| {
        let items = items(network);
        let prefixes = folded(
            network,
            &items,
            settings.valency,
            usize::MAX,
            |_, top, _| top.to_vec(),
        );
        set_carries(network, &prefixes);
    },
};
