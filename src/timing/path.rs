//! The longest path to an end, step by step.
//!
//! Walked backwards from the end over pins whose arrival and delay add up to
//! the gate's arrival; of several the first pin is taken, so equal netlists
//! give equal paths.

use super::delays::PinDelays;
use super::ends::{End, end_net};
use super::passes::{NEVER, gate_arrival};
use crate::netlist::{Driver, GateId, NetId, Netlist, Topology};

/// One net on a path, from the start to the end.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct PathStep {
    /// The net.
    pub net: NetId,
    /// The gate that drives it; `None` at the start.
    pub gate: Option<GateId>,
    /// Number of pins of that gate, 0 at the start.
    pub fan_in: usize,
    /// Its source line, 0 at the start or when unknown.
    pub line: u32,
    /// Arrival at the net.
    pub arrival: i32,
}

/// The longest path to `end` under `by_net`, start first; empty when no path
/// reaches it.
pub fn longest_path(
    netlist: &Netlist,
    topology: &Topology,
    delays: &PinDelays,
    by_net: &[i32],
    end: End,
) -> Vec<PathStep> {
    let mut steps = Vec::new();
    let mut next = match (end, end_net(netlist, end)) {
        (End::Cut(gate), _) => {
            let arrival = gate_arrival(netlist, delays, by_net, gate);
            if arrival == NEVER {
                return steps;
            }
            steps.push(step(netlist, gate, arrival));
            latest_pin(netlist, delays, by_net, gate, arrival)
        }
        (_, net) => net.filter(|net| by_net[net.index()] != NEVER),
    };
    while let Some(net) = next {
        let arrival = by_net[net.index()];
        next = match netlist.driver(net) {
            Driver::Gate(gate) if !topology.is_cut(net) => {
                steps.push(step(netlist, gate, arrival));
                latest_pin(netlist, delays, by_net, gate, arrival)
            }
            _ => {
                steps.push(PathStep {
                    net,
                    gate: None,
                    fan_in: 0,
                    line: 0,
                    arrival,
                });
                None
            }
        };
    }
    steps.reverse();
    steps
}

fn step(netlist: &Netlist, gate: GateId, arrival: i32) -> PathStep {
    PathStep {
        net: netlist.gate_output(gate),
        gate: Some(gate),
        fan_in: netlist.fan_ins(gate).len(),
        line: netlist.gate_line(gate),
        arrival,
    }
}

fn latest_pin(
    netlist: &Netlist,
    delays: &PinDelays,
    by_net: &[i32],
    gate: GateId,
    arrival: i32,
) -> Option<NetId> {
    let ticks = delays.of_gate(netlist, gate);
    let pins = netlist.fan_ins(gate).iter().zip(ticks);
    pins.into_iter()
        .find(|(net, delay)| {
            let at = by_net[net.index()];
            at != NEVER && at.saturating_add(**delay) == arrival
        })
        .map(|(&net, _)| net)
}
