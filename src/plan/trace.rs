//! What the longest paths pass once a set of proposals is applied.
//!
//! From the latest ends of a path kind the walk goes back over every pin that
//! decides an arrival: gates as read, gates behind the set, new gates. Each net and
//! node is visited once. What is counted tells which chains still limit the kind:
//! those of the set by their new gates, all others by their sums and carries.

use super::overlay::{Node, Operator};
use super::set_run::{SetRun, Times};
use crate::netlist::NetId;
use crate::timing::{NEVER, PathKind};
use fixedbitset::FixedBitSet;
use rustc_hash::FxHashSet;
use std::collections::BTreeMap;

/// Which chains a net is a sum or carry of: pairs of net and chain, ascending.
pub(super) struct Results(Vec<(NetId, usize)>);

impl Results {
    /// Those of all `chains`.
    pub(super) fn of(chains: &[crate::chain::Chain]) -> Self {
        let mut list: Vec<(NetId, usize)> = Vec::new();
        for (i, chain) in chains.iter().enumerate() {
            for position in &chain.positions {
                let signals = position.sums.iter().chain(&position.carries);
                list.extend(signals.map(|signal| (signal.net, i)));
            }
        }
        list.sort_unstable();
        list.dedup();
        Self(list)
    }

    fn at(&self, net: NetId) -> impl Iterator<Item = usize> + '_ {
        let from = self.0.partition_point(|&(each, _)| each < net);
        let list = self.0[from..].iter().take_while(move |&&(n, _)| n == net);
        list.map(|&(_, chain)| chain)
    }
}

/// Where a walk stands.
enum Place {
    /// A net or gate of the set's region.
    Slot(usize),
    /// A new gate.
    Node(Node),
    /// A net that nothing of the set reaches.
    Net(NetId),
}

/// How many nets of each chain lie on a longest path of `kind`. Chains of the set
/// are called by `members`, in the order they were given to its site.
pub(super) fn chains_on_longest(
    run: &SetRun<'_, '_>,
    kind: PathKind,
    members: &[usize],
    results: &Results,
) -> BTreeMap<usize, usize> {
    let mut found = BTreeMap::new();
    let Some((change, _)) = run.estimate().of_kind(kind) else {
        return found;
    };
    let site = run.site;
    let (ground, netlist) = (site.ground, site.ground.netlist);
    let by_net = site.starts().find(|(start, _)| *start == kind.start);
    let (Some((_, by_net)), Some(times)) = (by_net, run.times_from(kind.start)) else {
        return found;
    };
    let mut stack: Vec<Place> = run
        .ends_at(kind, change.after)
        .map(|(slot, _)| Place::Slot(slot))
        .collect();
    let outside = ground.ends_at_time(kind, change.after);
    for end in outside.filter(|&end| !site.is_behind(end)) {
        match crate::timing::end_net(netlist, end) {
            Some(net) => stack.push(Place::Net(net)),
            None => stack.extend(gate_pins(run, end, change.after, by_net)),
        }
    }
    let mut slots = FixedBitSet::with_capacity(times.slots.len());
    let mut nodes = FixedBitSet::with_capacity(run.overlay.len());
    let mut nets: FxHashSet<NetId> = FxHashSet::default();
    let mut count = |chain: usize| *found.entry(chain).or_insert(0) += 1;
    while let Some(place) = stack.pop() {
        match place {
            Place::Slot(slot) if !slots.put(slot) => match slot.checked_sub(site.results.len()) {
                None => {
                    let member = site.members.iter().find(|m| m.results.contains(&slot));
                    count(members[member.expect("every result has a member").given]);
                    stack.push(Place::Node(run.results[slot].node()));
                }
                Some(gate) => {
                    results
                        .at(netlist.gate_output(site.region[gate]))
                        .filter(|chain| !members.contains(chain))
                        .for_each(&mut count);
                    for pin in site.pins(gate) {
                        let at = match pin.slot {
                            Some(slot) => times.slots[slot as usize],
                            None => by_net[pin.net.index()],
                        };
                        if at != NEVER && at + pin.delay == times.slots[slot] {
                            stack.push(match pin.slot {
                                Some(slot) => Place::Slot(slot as usize),
                                None => Place::Net(pin.net),
                            });
                        }
                    }
                }
            },
            Place::Node(node) if !nodes.put(node.index()) => {
                step_node(run, node, times, &mut stack);
            }
            Place::Net(net) if nets.insert(net) => {
                results
                    .at(net)
                    .filter(|chain| !members.contains(chain))
                    .for_each(&mut count);
                let Some(gate) = ground.gate_of(net) else {
                    continue;
                };
                let delays = ground.timing.delays.of_gate(netlist, gate);
                for (&pin, delay) in netlist.fan_ins(gate).iter().zip(delays) {
                    let at = by_net[pin.index()];
                    if at != NEVER && at + delay == by_net[net.index()] {
                        stack.push(Place::Net(pin));
                    }
                }
            }
            Place::Slot(_) | Place::Node(_) | Place::Net(_) => {}
        }
    }
    found
}

/// The deciding pins of a gate outside the region that drives a cut net.
fn gate_pins(
    run: &SetRun<'_, '_>,
    end: crate::timing::End,
    time: i32,
    by_net: &[i32],
) -> Vec<Place> {
    let crate::timing::End::Cut(gate) = end else {
        return Vec::new();
    };
    let ground = run.site.ground;
    let netlist = ground.netlist;
    let delays = ground.timing.delays.of_gate(netlist, gate);
    let pins = netlist.fan_ins(gate).iter().zip(delays);
    pins.filter(|&(pin, delay)| by_net[pin.index()] != NEVER && by_net[pin.index()] + delay == time)
        .map(|(&pin, _)| Place::Net(pin))
        .collect()
}

/// From a node to what decides when it is ready.
fn step_node(run: &SetRun<'_, '_>, node: Node, times: &Times, stack: &mut Vec<Place>) {
    let of_net = |net: NetId| match run.site.slot(net) {
        Some(slot) => Place::Slot(slot),
        None => Place::Net(net),
    };
    match (run.overlay.existing(node), run.overlay.operator(node)) {
        (Some(shown), _) => stack.push(of_net(shown.net)),
        (None, Operator::Constant) => {}
        (None, Operator::Net(net)) => stack.push(of_net(net)),
        (None, _) => {
            let inputs = run.overlay.latest_inputs(node, &times.nodes);
            stack.extend(inputs.into_iter().map(Place::Node));
        }
    }
}
