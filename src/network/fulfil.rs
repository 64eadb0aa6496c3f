//! Which carries and sums of a chain are needed by when, and the network that
//! serves them.
//!
//! Required times are relative: if one of them cannot be met, all are put off
//! alike until they can, so "as early as possible" is all of them at 0. Where there
//! is time to spare it is left, and gates are saved. What nothing waits for is made
//! from the carry below.

use super::carry_network::{CarryNetwork, NodeId};
use super::demand::{Recipe, Way, fewest, manners};
use super::profile::Profile;
use super::signals::{SignalId, SignalNode};
use super::sum_end::{Carries, Ends, SumTerm, Sums};
use rustc_hash::FxHashMap;

/// Required times by position, `None` where nothing waits.
pub(super) struct Wishes {
    /// Of the carry out of each position.
    pub(super) carries: Vec<Option<i32>>,
    /// Of each sum.
    pub(super) sums: Vec<Option<i32>>,
}

impl Wishes {
    /// Those of a profile; without any, everything at once.
    pub(super) fn of(profile: &Profile) -> Self {
        match &profile.required {
            Some(required) => Self {
                carries: required.carries.clone(),
                sums: required.sums.clone(),
            },
            None => Self {
                carries: vec![Some(0); profile.positions()],
                sums: vec![Some(0); profile.positions()],
            },
        }
    }

    /// Puts demands off until they can be met, and `spare` ticks more where that
    /// has to be done.
    pub(super) fn put_off<R: Recipe>(recipe: &R, demands: &mut [(R::Term, i32)], spare: i32) {
        let late = demands.iter().map(|&(term, by)| recipe.earliest(term) - by);
        let late = late.max().unwrap_or(0);
        let more = (late + spare).max(0);
        for (_, by) in demands {
            *by += more;
        }
    }
}

/// A leaf's signal.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum LeafSignal {
    /// g of an item; of the carry-in, itself.
    Generate(usize),
    /// p of an item.
    Propagate(usize),
    /// `g + p` of an item.
    Either(usize),
}

/// How a scheme states its own terms as signals.
pub(super) trait Emit: Carries {
    /// The signal of a leaf.
    fn leaf(&self, term: Self::Term) -> LeafSignal;
    /// The signals a term consists of: one, or a list that whoever reads it takes
    /// apart. `parts` come with those they consist of.
    fn emit(
        &self,
        term: Self::Term,
        parts: &[(Self::Term, &[SignalId])],
        network: &mut CarryNetwork,
    ) -> Vec<SignalId>;
}

/// Items, counted from the lowest, perhaps the carry-in, as nodes.
pub(super) fn node(network: &CarryNetwork, item: usize) -> NodeId {
    match (network.carry_in(), item) {
        (Some(carry_in), 0) => carry_in,
        (Some(_), _) => network.leaf(item - 1),
        (None, _) => network.leaf(item),
    }
}

type Made<T> = FxHashMap<SumTerm<T>, Vec<SignalId>>;

/// Shapes the network that serves a chain with the given carries, `spare` ticks
/// later than it could.
pub(super) fn fulfil<C: Emit>(
    network: &mut CarryNetwork,
    profile: &Profile,
    carries: &C,
    ends: Ends,
    spare: i32,
) {
    let wishes = Wishes::of(profile);
    let first = usize::from(profile.has_carry_in());
    let halves = profile.half_sum.iter().copied();
    let halves: Vec<i32> = profile.carry_in.into_iter().chain(halves).collect();
    let sums = Sums::of(carries, &halves, ends);
    let mut demands: Vec<(SumTerm<C::Term>, i32)> = Vec::new();
    for position in 0..profile.positions() {
        let item = position + first;
        if let Some(by) = wishes.carries[position] {
            demands.push((SumTerm::Carry(carries.carry(item, 0)), by));
        }
        if let (Some(by), true) = (wishes.sums[position], item > 0) {
            demands.push((Sums::<C>::sum(item), by));
        }
    }
    Wishes::put_off(&sums, &mut demands, spare);
    let mut made: Made<C::Term> = FxHashMap::default();
    for each in fewest(&sums, &demands, manners(profile.positions())) {
        let signals = match (each.term, each.way) {
            (SumTerm::Carry(term), None) => vec![leaf(network, carries.leaf(term))],
            (SumTerm::Carry(term), Some(way)) => {
                let parts: Vec<(C::Term, &[SignalId])> = way
                    .parts()
                    .filter_map(|(part, _)| match part {
                        SumTerm::Carry(inner) => Some((inner, &made[&part][..])),
                        SumTerm::Sum { .. } => None,
                    })
                    .collect();
                carries.emit(term, &parts, network)
            }
            (SumTerm::Sum { item, .. }, way) => {
                let way = way.expect("a sum is never given");
                vec![sum(network, item as usize - first, &way, &made)]
            }
        };
        made.insert(each.term, signals);
    }
    for position in 0..profile.positions() {
        let item = position + first;
        let carry = match made.get(&SumTerm::Carry(carries.carry(item, 0))) {
            Some(signals) => signals[0],
            None => from_below(network, position),
        };
        network.set_carry_signal(position, carry);
        if item > 0
            && let Some(signals) = made.get(&Sums::<C>::sum(item))
            && matches!(network.signal(signals[0]), SignalNode::Select { .. })
        {
            // An XOR with the carry is what a sum is anyway.
            network.set_sum(position, signals[0]);
        }
    }
}

fn leaf(network: &mut CarryNetwork, signal: LeafSignal) -> SignalId {
    match signal {
        LeafSignal::Generate(item) => network.generate_of(node(network, item)),
        LeafSignal::Propagate(item) => network.propagate_of(node(network, item)),
        LeafSignal::Either(item) => {
            let node = node(network, item);
            let both = [network.generate_of(node), network.propagate_of(node)];
            network.or(&both)
        }
    }
}

/// The carry out of a position from that into it, which is stated already.
fn from_below(network: &mut CarryNetwork, position: usize) -> SignalId {
    let leaf = network.leaf(position);
    let generate = network.generate_of(leaf);
    let below = match position.checked_sub(1) {
        Some(below) => Some(network.carry_signal(below)),
        None => network.carry_in().map(|node| network.generate_of(node)),
    };
    match below {
        None => generate,
        Some(below) => {
            let propagate = network.propagate_of(leaf);
            let through = network.and(&[propagate, below]);
            network.or(&[generate, through])
        }
    }
}

fn sum<T: Copy + Eq + std::hash::Hash>(
    network: &mut CarryNetwork,
    position: usize,
    way: &Way<SumTerm<T>>,
    made: &Made<T>,
) -> SignalId {
    let parts: Vec<SignalId> = way.parts().map(|(part, _)| made[&part][0]).collect();
    match parts[..] {
        [choose, if_zero, if_one] => network.select(choose, if_one, if_zero),
        _ => {
            let half = network.half_sum(position);
            network.xor(half, parts[0])
        }
    }
}
