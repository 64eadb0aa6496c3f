//! Kogge–Stone: every position doubles its own span, level by level.
//!
//! Invariant: ⌈log_r n⌉ levels, and a node is read at most `r` times a level, at
//! the price of a cell per position and level. At valency r each level joins
//! `r` spans of equal length.
//!
//! P. M. Kogge and H. S. Stone, "A Parallel Algorithm for the Efficient Solution
//! of a General Class of Recurrence Equations", IEEE Transactions on Computers
//! C-22, 1973.

use super::{CarryNetwork, Growth, NodeId, Scheme, VALENCY, items, join, set_carries};

pub(super) const SCHEME: Scheme = Scheme {
    name: "kogge-stone",
    source: "Kogge and Stone 1973",
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
    let mut length = 1;
    while length < row.len() {
        let above = row.clone();
        network.begin_row();
        for (i, slot) in row.iter_mut().enumerate().skip(length) {
            let reach = (i / length).min(valency - 1);
            let spans = (0..=reach).rev().map(|k| above[i - k * length]);
            *slot = join(network, spans);
        }
        length *= valency;
    }
    row
}
