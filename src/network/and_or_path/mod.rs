//! `and-or-path`: carries from alternating and-or paths, faster than every prefix
//! adder.
//!
//! A prefix carry waits for a group's G; an and-or path also joins the generates
//! of a group by OR alone, ahead of the rest. [`PathTimes`] has the splits and
//! their sources. The gates are two-input ones; the number of sets and paths grows
//! with the third power of the positions, so this is for [`MOST_POSITIONS`] at
//! most.

mod paths;
mod times;

pub use times::PathTimes;

use super::arrival_aware::{Leaves, spare};
use super::carry_network::CarryNetwork;
use super::fulfil::fulfil;
use super::profile::Profile;
use super::schemes::Settings;
use super::sum_end::Ends;
use paths::Paths;

/// The widest chain whose paths are all looked at.
pub(super) const MOST_POSITIONS: usize = 128;

/// Shapes the network of a chain of at most [`MOST_POSITIONS`].
pub(super) fn shape(network: &mut CarryNetwork, settings: Settings, profile: &Profile) {
    let leaves = Leaves::of(profile);
    let mut inputs = Vec::with_capacity(2 * leaves.generate.len());
    let items = leaves.generate.iter().zip(&leaves.propagate);
    for (&generate, &propagate) in items.rev() {
        inputs.extend([generate, propagate]);
    }
    let costs = &profile.costs;
    let times = PathTimes::of(&inputs, costs.and(2), costs.or(2));
    let ends = Ends::of(costs, settings.select_end);
    let paths = Paths { times: &times };
    fulfil(network, profile, &paths, ends, spare(settings, profile));
}
