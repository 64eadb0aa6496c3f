//! `arrival-aware`: the optimum of the prefix class for a chain's own arrivals.
//!
//! [`Times`] has the earliest time of every span, exactly; from them the needed
//! carries and sums are chosen with as few gates as the required times allow, all
//! of them sharing spans. What is off the critical spans is made as cheaply as a
//! heuristic finds. Invariant: no carry or sum is later than the optimum of the
//! class allows all of them to be.
//!
//! S. Held and S. T. Spirkl, "Fast Prefix Adders for Non-uniform Input Arrival
//! Times", Algorithmica 77, 2017, for the recurrence.

mod covers;
mod spans;
pub(super) mod times;

pub use times::{Leaves, Steps, Times};

use super::carry_network::CarryNetwork;
use super::fulfil::fulfil;
use super::profile::Profile;
use super::schemes::Settings;
use super::sum_end::Ends;
use spans::Spans;

/// The widest chain whose spans are all looked at.
pub(super) const MOST_POSITIONS: usize = 2048;

/// Shapes the network of a chain of at most [`MOST_POSITIONS`].
pub(super) fn shape(network: &mut CarryNetwork, settings: Settings, profile: &Profile) {
    let costs = &profile.costs;
    let spare = spare(settings, profile);
    if costs.limits().covers {
        covers::shape(network, profile, settings.valency, spare);
        return;
    }
    let leaves = Leaves::of(profile);
    let times = Times::of(&leaves, &Steps::of(costs, settings.valency));
    let ends = Ends::of(costs, settings.select_end);
    fulfil(network, profile, &Spans { times: &times }, ends, spare);
}

/// The time beyond the earliest that may be spent to save gates.
pub(super) fn spare(settings: Settings, profile: &Profile) -> i32 {
    let levels = i32::try_from(settings.extra_levels).unwrap_or(i32::MAX);
    levels.saturating_mul(profile.costs.or(2)).min(i32::MAX / 8)
}
