//! Flat lookahead: every carry written out over all lower positions at once.
//!
//! Invariant: one level; the carry out of position i is one combine node of
//! i+1 parts, and one more with carry-in. Gate inputs grow with the third power
//! of the width, so it is proposed up to [`MOST_POSITIONS`] only.
//!
//! A. Weinberger and J. L. Smith, "A Logic for High-Speed Addition", National
//! Bureau of Standards Circular 591, 1958.

use super::{Growth, NOTHING, Scheme, items, join, set_carries};

/// The widest chain it is proposed for.
pub(super) const MOST_POSITIONS: usize = 64;

pub(super) const SCHEME: Scheme = Scheme {
    name: "flat-lookahead",
    source: "Weinberger and Smith 1958",
    growth: Growth::Cubic,
    takes: NOTHING,
    shape: |network, _, _| {
        let items = items(network);
        let prefixes = (1..=items.len()).map(|end| join(network, items[..end].iter().copied()));
        let prefixes: Vec<_> = prefixes.collect();
        set_carries(network, &prefixes);
    },
};
