//! The published ways to build a carry network, one file each and one list.
//!
//! A scheme sets the carry of every position of an empty [`CarryNetwork`], for
//! any number of positions, with and without carry-in. Prefix schemes take the
//! carry-in as one more item at the low end: that needs ⌈log2(n+1)⌉ levels at
//! the least, where folding it into position 0 first, or into every carry last,
//! always needs one more than without (equal only when n is a power of two).
//! Group lookahead hands it to the top group, as the textbooks do.
//!
//! Schemes that shape themselves to their chain read its [`Profile`]; the others
//! ignore it. A select end is added to what a scheme has shaped, for any of them.
//!
//! A new scheme is one file and one line in [`all`].

mod and_or_path;
mod arrival_aware;
mod blocks;
mod brent_kung;
mod carry_increment;
mod carry_select;
mod conditional_sum;
mod fit;
mod flat_lookahead;
mod fold;
mod group_lookahead;
mod han_carlson;
mod knowles;
mod kogge_stone;
mod ladner_fischer;
mod ripple;
mod select_end;
mod sklansky;
mod sparse_prefix;

pub use fit::{
    Fitted, MOST_LOG_LINEAR, candidates, candidates_for, every_variation, fits, left_out,
    variations,
};
pub use knowles::FanOuts;

use super::build::Limits;
use super::carry_network::{CarryNetwork, NodeId};
use super::profile::Profile;
use super::signals::SignalId;

/// How the number of gates grows with the number of positions.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Growth {
    /// In proportion.
    Linear,
    /// Positions times their logarithm.
    LogLinear,
    /// With the third power, counted in gate inputs.
    Cubic,
    /// Positions times their logarithm, but the work to find them with the square.
    Quadratic,
    /// About with the square, and the work to find them with the fourth power.
    Quartic,
}

/// What a scheme may be varied in. A scheme ignores what it does not take.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Settings {
    /// Most spans one combine node joins; at least 2.
    pub valency: usize,
    /// Members of one lookahead group, or positions of one block; at least 2.
    pub group: usize,
    /// Levels spent beyond the fewest possible to save cells.
    pub extra_levels: usize,
    /// Neighbours joined so many times around a network of fewest levels, each
    /// for a level more and half the wires.
    pub folds: usize,
    /// The fan-out of each level.
    pub fan_outs: FanOuts,
    /// Whether blocks grow, one longer each, in place of being equal.
    pub growing: bool,
    /// Whether a group selects between two sums inside, in place of rippling.
    pub select_inside: bool,
    /// Whether late sums end in a select between the two sums, which saves a
    /// level.
    pub select_end: bool,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            valency: 2,
            group: 4,
            extra_levels: 1,
            folds: 0,
            fan_outs: FanOuts::default(),
            growing: false,
            select_inside: false,
            select_end: false,
        }
    }
}

/// Which of the [`Settings`] a scheme takes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Takes {
    /// The valency.
    pub valency: bool,
    /// The group size.
    pub group: bool,
    /// The extra levels.
    pub extra_levels: bool,
    /// The folds.
    pub folds: bool,
    /// The fan-outs.
    pub fan_outs: bool,
    /// Growing blocks.
    pub growing: bool,
    /// Selects inside a group.
    pub select_inside: bool,
    /// The select end.
    pub select_end: bool,
}

/// A published way to build the carry network.
pub struct Scheme {
    /// The scheme's word in reports and options.
    pub name: &'static str,
    /// Where it was published.
    pub source: &'static str,
    /// How its size grows.
    pub growth: Growth,
    /// What it may be varied in.
    pub takes: Takes,
    shape: fn(&mut CarryNetwork, Settings, &Profile),
}

impl Scheme {
    /// The scheme's carry network for arrivals all alike. Panics when there is
    /// no position, or a valency or group below 2.
    pub fn network(
        &self,
        positions: usize,
        has_carry_in: bool,
        settings: Settings,
    ) -> CarryNetwork {
        let limits = Limits {
            gate_inputs: settings.valency,
            covers: false,
        };
        let profile = Profile::even(positions, has_carry_in, limits);
        self.network_for(&profile, settings)
    }

    /// The scheme's carry network for a chain. Panics when there is no position,
    /// a valency or group below 2, or a fault in the scheme: its signals are
    /// checked against addition.
    pub fn network_for(&self, profile: &Profile, settings: Settings) -> CarryNetwork {
        assert!(settings.valency >= 2, "a combine node joins at least two");
        assert!(settings.group >= 2, "a group has at least two members");
        let mut network = CarryNetwork::new(profile.positions(), profile.has_carry_in());
        (self.shape)(&mut network, settings, profile);
        // Schemes that fit themselves to arrivals choose their own ends.
        let chosen = matches!(self.growth, Growth::Quadratic | Growth::Quartic);
        if settings.select_end && self.takes.select_end && !chosen {
            select_end::select_late_sums(&mut network, profile);
        }
        if !network.is_prefix() {
            let wrong = network.first_wrong();
            assert!(wrong.is_none(), "{} at position {wrong:?}", self.name);
        }
        network
    }
}

/// Every scheme, in the order proposals are listed.
pub fn all() -> &'static [Scheme] {
    &ALL
}

/// The scheme of that name.
pub fn by_name(name: &str) -> Option<&'static Scheme> {
    ALL.iter().find(|scheme| scheme.name == name)
}

static ALL: [Scheme; 15] = [
    ripple::SCHEME,
    sklansky::SCHEME,
    kogge_stone::SCHEME,
    brent_kung::SCHEME,
    ladner_fischer::SCHEME,
    han_carlson::SCHEME,
    knowles::SCHEME,
    sparse_prefix::SCHEME,
    carry_increment::SCHEME,
    carry_select::SCHEME,
    conditional_sum::SCHEME,
    flat_lookahead::SCHEME,
    group_lookahead::SCHEME,
    arrival_aware::SCHEME,
    and_or_path::SCHEME,
];

const NOTHING: Takes = Takes {
    valency: false,
    group: false,
    extra_levels: false,
    folds: false,
    fan_outs: false,
    growing: false,
    select_inside: false,
    select_end: true,
};
/// Schemes of blocks. A select end is left to those that have no choice of
/// their own in every block.
const BLOCKS: Takes = Takes {
    group: true,
    growing: true,
    select_end: false,
    ..NOTHING
};
const VALENCY: Takes = Takes {
    valency: true,
    ..NOTHING
};

/// The carry-in, if there is one, and the leaves, lowest first.
fn items(network: &CarryNetwork) -> Vec<NodeId> {
    let leaves = (0..network.positions()).map(|position| network.leaf(position));
    network.carry_in().into_iter().chain(leaves).collect()
}

/// Sets the carries from the prefixes of [`items`].
fn set_carries(network: &mut CarryNetwork, prefixes: &[NodeId]) {
    let first = usize::from(network.carry_in().is_some());
    for (position, &prefix) in prefixes[first..].iter().enumerate() {
        network.set_carry(position, prefix);
    }
}

/// Joins adjacent spans given lowest first; a single one is itself.
fn join(network: &mut CarryNetwork, lowest_first: impl IntoIterator<Item = NodeId>) -> NodeId {
    let mut parts: Vec<NodeId> = lowest_first.into_iter().collect();
    if let [only] = parts[..] {
        return only;
    }
    parts.reverse();
    network.combine(&parts)
}
