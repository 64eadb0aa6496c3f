//! Sklansky: blocks doubled level by level, the top of the lower half read by
//! the whole upper half.
//!
//! Invariant: the fewest levels there can be, ⌈log_r n⌉, at a fan-out that
//! doubles each level. At valency r a block of `r` sub-blocks is joined at once.
//!
//! J. Sklansky, "Conditional-Sum Addition Logic", IRE Transactions on Electronic
//! Computers EC-9, 1960; its carry network alone.

use super::{CarryNetwork, Growth, NodeId, Scheme, VALENCY, items, join, set_carries};

pub(super) const SCHEME: Scheme = Scheme {
    name: "sklansky",
    source: "Sklansky 1960",
    growth: Growth::LogLinear,
    takes: VALENCY,
    shape: |network, settings, _| {
        let items = items(network);
        let prefixes = prefixes(network, &items, settings.valency);
        set_carries(network, &prefixes);
    },
};

/// The prefixes of adjacent spans, lowest first.
pub(super) fn prefixes(
    network: &mut CarryNetwork,
    items: &[NodeId],
    valency: usize,
) -> Vec<NodeId> {
    let mut row = items.to_vec();
    let mut size = 1;
    while size < row.len() {
        let above = row.clone();
        network.begin_row();
        for (i, slot) in row.iter_mut().enumerate() {
            let block = i - i % (size * valency);
            let lower = (i - block) / size;
            if lower > 0 {
                let tops = (1..=lower).map(|j| above[block + j * size - 1]);
                *slot = join(network, tops.chain([above[i]]));
            }
        }
        size *= valency;
    }
    row
}
