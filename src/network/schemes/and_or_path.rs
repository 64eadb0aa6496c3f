//! And-or paths: carries earlier than any prefix network's. The method is in
//! [`crate::network`]'s folder of that name.
//!
//! Above [`MOST_POSITIONS`], and where gates are covers, the earliest prefix
//! network stands in; the planner does not offer it there.
//!
//! M. I. Grinchuk, "Sharpening an Upper Bound on the Adder and Comparator Depths",
//! Journal of Applied and Industrial Mathematics 3, 2009; with arrivals U. Brenner
//! and A. Hermann 2019.

use super::{Growth, NOTHING, Scheme, Takes, arrival_aware};
use crate::network::and_or_path::{MOST_POSITIONS, shape};

pub(super) const SCHEME: Scheme = Scheme {
    name: "and-or-path",
    source: "Grinchuk 2009, Brenner and Hermann 2019",
    growth: Growth::Quartic,
    takes: Takes {
        extra_levels: true,
        ..NOTHING
    },
    shape: |network, settings, profile| {
        if network.positions() <= MOST_POSITIONS && !profile.costs.limits().covers {
            shape(network, settings, profile);
        } else {
            (arrival_aware::SCHEME.shape)(network, settings, profile);
        }
    },
};
