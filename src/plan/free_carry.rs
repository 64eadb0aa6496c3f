//! How deep the block would be if its carries cost nothing.
//!
//! One forward pass per class of start in which the carries of the chains are
//! ready before anything else: what is left is the depth that no carry network
//! can take away.

use super::ground::Ground;
use crate::chain::Chain;
use crate::timing::{NEVER, PathKind, end_arrival, gate_arrival, grouped_ends, start_times};
use fixedbitset::FixedBitSet;
use std::collections::BTreeMap;

/// The longest path of every kind with the carries of `chains` free; kinds of
/// which no path is left are not listed.
pub fn depth_with_free_carry(ground: &Ground<'_>, chains: &[Chain]) -> BTreeMap<PathKind, i32> {
    let (netlist, topology) = (ground.netlist, ground.topology);
    let delays = &ground.timing.delays;
    let mut free = FixedBitSet::with_capacity(netlist.net_count());
    let positions = chains.iter().flat_map(|chain| &chain.positions);
    for signal in positions.flat_map(|position| &position.carries) {
        if ground.gate_of(signal.net).is_some() {
            free.insert(signal.net.index());
        }
    }
    let mut longest = BTreeMap::new();
    for (start, _) in ground.timing.by_start() {
        let mut times = start_times(netlist, topology, delays.model(), Some(start));
        for &gate in &topology.order {
            let output = netlist.gate_output(gate);
            let barred = netlist.is_barred_on(start.way, output);
            if !topology.is_cut(output) && !free.contains(output.index()) && !barred {
                times[output.index()] = gate_arrival(netlist, delays, &times, gate);
            }
        }
        for (end, group) in grouped_ends(netlist, topology) {
            let time = end_arrival(netlist, delays, &times, end);
            let kind = PathKind::from_to(start, group);
            if time != NEVER && ground.timing.kind(kind).is_some() {
                let slot = longest.entry(kind).or_insert(time);
                *slot = time.max(*slot);
            }
        }
    }
    longest
}
