//! Ripple: each carry from the one below.
//!
//! Invariant: n-1 cells without carry-in, n with, all on one path; the fewest
//! cells there can be. The oldest form there is (common practice, no source).

use super::{Growth, NOTHING, Scheme, items, join, set_carries};

pub(super) const SCHEME: Scheme = Scheme {
    name: "ripple",
    source: "common practice",
    growth: Growth::Linear,
    takes: NOTHING,
    shape: |network, _, _| {
        let mut prefixes = items(network);
        for i in 1..prefixes.len() {
            prefixes[i] = join(network, [prefixes[i - 1], prefixes[i]]);
        }
        set_carries(network, &prefixes);
    },
};
