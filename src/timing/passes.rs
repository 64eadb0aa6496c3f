//! The forward and the backward pass.
//!
//! Arrival at a net is the longest path from a start to it; the tail behind a
//! net is the longest path from it to an end. Both are one loop over the gates
//! in topological order (the longest-path recurrence on an acyclic graph).

use super::ends::{End, EndClass, StartClass, end_net, ends, start_class};
use super::model::PinDelays;
use crate::netlist::{GateId, NetId, Netlist, Topology};

/// The time of what no path reaches; below every real time.
pub const NEVER: i32 = i32::MIN;

/// Which starts a pass begins at.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct StartSet([bool; 3]);

impl StartSet {
    /// Every start.
    pub const ALL: Self = Self([true; 3]);

    /// The starts of one class.
    pub fn only(class: StartClass) -> Self {
        let mut set = [false; 3];
        set[class as usize] = true;
        Self(set)
    }

    /// Whether the class is in the set.
    pub fn contains(self, class: StartClass) -> bool {
        self.0[class as usize]
    }
}

/// Arrival times by net.
pub struct Arrivals {
    /// Arrival of each net in ticks, or [`NEVER`].
    pub by_net: Vec<i32>,
}

impl Arrivals {
    /// Arrivals from every start.
    pub fn of(netlist: &Netlist, topology: &Topology, delays: &PinDelays) -> Self {
        Self::from(netlist, topology, delays, StartSet::ALL)
    }

    /// Arrivals from some starts only.
    pub fn from(
        netlist: &Netlist,
        topology: &Topology,
        delays: &PinDelays,
        starts: StartSet,
    ) -> Self {
        let mut by_net = vec![NEVER; netlist.net_count()];
        for net in netlist.nets() {
            if start_class(netlist, topology, net).is_some_and(|class| starts.contains(class)) {
                by_net[net.index()] = 0;
            }
        }
        for &gate in &topology.order {
            let output = netlist.gate_output(gate);
            if !topology.is_cut(output) {
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

/// When the output of `gate` is ready, from the arrivals at its pins.
#[inline]
pub fn gate_arrival(netlist: &Netlist, delays: &PinDelays, by_net: &[i32], gate: GateId) -> i32 {
    let ticks = delays.of_function(netlist.function_id(gate));
    let mut latest = NEVER;
    for (net, delay) in netlist.fan_ins(gate).iter().zip(ticks) {
        let at = by_net[net.index()];
        if at != NEVER {
            latest = latest.max(at + delay);
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
    /// Tails to every end, or to those of one class.
    pub fn of(
        netlist: &Netlist,
        topology: &Topology,
        delays: &PinDelays,
        class: Option<EndClass>,
    ) -> Self {
        let wanted = |end: EndClass| class.is_none_or(|only| only == end);
        let mut by_net = vec![NEVER; netlist.net_count()];
        for end in ends(netlist, topology) {
            if let (true, Some(net)) = (wanted(end.class()), end_net(netlist, end)) {
                by_net[net.index()] = 0;
            }
        }
        let cut_tail = if wanted(EndClass::Output) { 0 } else { NEVER };
        for &gate in topology.order.iter().rev() {
            let output = netlist.gate_output(gate);
            let tail = if topology.is_cut(output) {
                cut_tail
            } else {
                by_net[output.index()]
            };
            if tail == NEVER {
                continue;
            }
            let ticks = delays.of_function(netlist.function_id(gate));
            for (net, delay) in netlist.fan_ins(gate).iter().zip(ticks) {
                let slot = &mut by_net[net.index()];
                *slot = (*slot).max(tail + delay);
            }
        }
        Self { by_net }
    }
}
