//! Han–Carlson: one fold around Kogge–Stone's network.
//!
//! Invariant: one level more than Kogge–Stone at half its cells and wires.
//!
//! T. Han and D. A. Carlson, "Fast Area-Efficient VLSI Adders", 8th IEEE
//! Symposium on Computer Arithmetic, 1987.

use super::fold::folded;
use super::{Growth, Scheme, VALENCY, items, kogge_stone, set_carries};

pub(super) const SCHEME: Scheme = Scheme {
    name: "han-carlson",
    source: "Han and Carlson 1987",
    growth: Growth::LogLinear,
    takes: VALENCY,
    shape: |network, settings, _| {
        let items = items(network);
        let prefixes = folded(network, &items, settings.valency, 1, kogge_stone::prefixes);
        set_carries(network, &prefixes);
    },
};
