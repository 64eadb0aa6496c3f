//! The forward and the backward pass.
//!
//! Arrival at a net is the longest path from a start to it; the tail behind a
//! net is the longest path from it to an end. Both are one loop over the gates
//! in topological order (the longest-path recurrence on an acyclic graph).

use super::delays::PinDelays;
use super::ends::{End, EndGroup, StartGroup, end_net, grouped_ends, start_group, start_time};
use super::model::DelayModel;
use crate::netlist::{GateId, NetId, Netlist, Topology};

/// The time of what no path reaches; below every real time.
pub const NEVER: i32 = i32::MIN;

/// Arrival times by net.
pub struct Arrivals {
    /// Arrival of each net in ticks, or [`NEVER`].
    pub by_net: Vec<i32>,
}

impl Arrivals {
    /// Arrivals from every start.
    pub fn of(netlist: &Netlist, topology: &Topology, delays: &PinDelays) -> Self {
        Self::from(netlist, topology, delays, None)
    }

    /// Arrivals from every start, or from those of one group.
    pub fn from(
        netlist: &Netlist,
        topology: &Topology,
        delays: &PinDelays,
        group: Option<StartGroup>,
    ) -> Self {
        let mut by_net = start_times(netlist, topology, delays.model(), group);
        let way = group.map_or(0, |group| group.way);
        for &gate in &topology.order {
            let output = netlist.gate_output(gate);
            if !topology.is_cut(output) && !netlist.is_barred_on(way, output) {
                by_net[output.index()] = gate_arrival(netlist, delays, &by_net, gate);
            }
        }
        Self { by_net }
    }

    /// Arrival at one net, when any path reaches it.
    #[inline]
    pub fn at(&self, net: NetId) -> Option<i32> {
        let time = self.by_net[net.index()];
        (time != NEVER).then_some(time)
    }
}

/// When every start is ready, or those of one group; [`NEVER`] at all other nets.
pub fn start_times(
    netlist: &Netlist,
    topology: &Topology,
    model: DelayModel,
    group: Option<StartGroup>,
) -> Vec<i32> {
    let mut by_net = vec![NEVER; netlist.net_count()];
    for net in netlist.nets() {
        let own = start_group(netlist, topology, net);
        let wanted = own.is_some_and(|own| group.is_none_or(|only| only.holds(own)));
        if wanted && group.is_none_or(|only| !netlist.is_barred_on(only.way, net)) {
            by_net[net.index()] = start_time(netlist, model, net);
        }
    }
    by_net
}

/// When the output of `gate` is ready, from the arrivals at its pins.
#[inline]
pub fn gate_arrival(netlist: &Netlist, delays: &PinDelays, by_net: &[i32], gate: GateId) -> i32 {
    let mut latest = NEVER;
    if netlist.is_barred(netlist.gate_output(gate)) {
        return latest;
    }
    let ticks = delays.of_gate(netlist, gate);
    for (net, delay) in netlist.fan_ins(gate).iter().zip(ticks) {
        let at = by_net[net.index()];
        if at != NEVER {
            latest = latest.max(at.saturating_add(*delay));
        }
    }
    latest
}

/// Arrival at an end, or [`NEVER`].
pub fn end_arrival(netlist: &Netlist, delays: &PinDelays, by_net: &[i32], end: End) -> i32 {
    match (end, end_net(netlist, end)) {
        (End::Cut(gate), _) => gate_arrival(netlist, delays, by_net, gate),
        (_, Some(net)) => by_net[net.index()],
        (_, None) => NEVER,
    }
}

/// The longest tail behind every net.
pub struct Tails {
    /// Tail of each net in ticks, or [`NEVER`] where no end is reached.
    pub by_net: Vec<i32>,
}

impl Tails {
    /// Tails to every end, or to those of one group.
    pub fn of(
        netlist: &Netlist,
        topology: &Topology,
        delays: &PinDelays,
        group: Option<EndGroup>,
    ) -> Self {
        let seed = |_: End, own: EndGroup| group.is_none_or(|only| only.holds(own)).then_some(0);
        let way = group.map_or(0, |group| group.way);
        Self::from_seeds(netlist, topology, delays, way, seed)
    }

    /// For every net the most of a path to an end and what `seed` gives for that
    /// end, over the ends for which it gives something and the paths of one way.
    pub fn from_seeds(
        netlist: &Netlist,
        topology: &Topology,
        delays: &PinDelays,
        way: u8,
        seed: impl Fn(End, EndGroup) -> Option<i32>,
    ) -> Self {
        let mut by_net = vec![NEVER; netlist.net_count()];
        for (end, own) in grouped_ends(netlist, topology) {
            if let (Some(own), Some(net)) = (seed(end, own), end_net(netlist, end)) {
                let slot = &mut by_net[net.index()];
                *slot = own.max(*slot);
            }
        }
        for &gate in topology.order.iter().rev() {
            let output = netlist.gate_output(gate);
            let tail = if topology.is_cut(output) {
                let end = End::Cut(gate);
                let own = end.group(netlist).and_then(|own| seed(end, own));
                own.unwrap_or(NEVER)
            } else {
                by_net[output.index()]
            };
            if tail == NEVER || netlist.is_barred_on(way, output) {
                continue;
            }
            let ticks = delays.of_gate(netlist, gate);
            for (net, delay) in netlist.fan_ins(gate).iter().zip(ticks) {
                let slot = &mut by_net[net.index()];
                *slot = (*slot).max(tail.saturating_add(*delay));
            }
        }
        Self { by_net }
    }
}
