//! Arrival-aware: the earliest prefix network for the chain's own arrivals, with
//! gates saved where there is time. The method is in [`crate::network`]'s folder
//! of that name.
//!
//! Above [`MOST_POSITIONS`] its tables would be too large, and Brent–Kung's network
//! stands in; the planner does not offer it there.
//!
//! S. Held and S. T. Spirkl, "Fast Prefix Adders for Non-uniform Input Arrival
//! Times", Algorithmica 77, 2017.

use super::{Growth, NOTHING, Scheme, Takes, brent_kung};
use crate::network::arrival_aware::{MOST_POSITIONS, shape};

pub(super) const SCHEME: Scheme = Scheme {
    name: "arrival-aware",
    source: "Held and Spirkl 2017",
    growth: Growth::Quadratic,
    takes: Takes {
        valency: true,
        extra_levels: true,
        ..NOTHING
    },
    shape: |network, settings, profile| {
        if network.positions() <= MOST_POSITIONS {
            shape(network, settings, profile);
        } else {
            (brent_kung::SCHEME.shape)(network, settings, profile);
        }
    },
};
