//! How deep the block would be if carries cost nothing.
//!
//! One forward pass per class of start, as for arrival times, with one change:
//! a net that is proven the carry out of position `i` of a chain is ready when
//! the latest of the chain's carry-in and operand bits `0..=i` is, and a net
//! that is proven the sum of position `i` one exclusive-or later (one gate
//! delay; two where every gate is a two-input AND). No net gets later than it
//! is today. Everything else costs what it costs, so the figure is a bound that
//! no rebuild of the proven chains alone can beat, not a promise.

use super::carried::{Carried, Role};
use crate::chain::Chain;
use crate::netlist::{Bit, Driver, NetId, Netlist, Topology};
use crate::timing::{DelayModel, NEVER, PinDelays, StartGroup, gate_arrival, start_times};
use fixedbitset::FixedBitSet;

/// The latest operand of each position of one chain, as far as known.
struct Latest {
    /// Whether the carry-in has been taken in.
    started: bool,
    so_far: i32,
    by_position: Vec<i32>,
}

/// Arrivals by net from the starts of `group` when carries are free.
pub fn arrivals(
    netlist: &Netlist,
    topology: &Topology,
    delays: &PinDelays,
    group: StartGroup,
    chains: &[Chain],
    carried: &Carried,
) -> Vec<i32> {
    let exclusive_or = exclusive_or(netlist, delays.model());
    let mut by_net = start_times(netlist, topology, delays.model(), Some(group));
    let mut known = FixedBitSet::with_capacity(netlist.net_count());
    for net in netlist.nets() {
        if topology.is_cut(net) || !matches!(netlist.driver(net), Driver::Gate(_)) {
            known.insert(net.index());
        }
    }
    let mut latest: Vec<Latest> = chains
        .iter()
        .map(|_| Latest {
            started: false,
            so_far: NEVER,
            by_position: Vec::new(),
        })
        .collect();
    for &gate in &topology.order {
        let output = netlist.gate_output(gate);
        if topology.is_cut(output) {
            continue;
        }
        let barred = netlist.is_barred_on(group.way, output);
        let mut at = match barred {
            true => NEVER,
            false => gate_arrival(netlist, delays, &by_net, gate),
        };
        for member in carried.of_net(output) {
            let chain = member.chain as usize;
            let position = member.position as usize;
            let ready = latest[chain].at(&chains[chain], position, &by_net, &known);
            if let Some(ready) = ready.filter(|&ready| ready != NEVER) {
                let own = match member.role {
                    Role::Carry => 0,
                    Role::Sum => exclusive_or,
                };
                at = at.min(ready + own);
            }
        }
        by_net[output.index()] = at;
        known.insert(output.index());
    }
    by_net
}

/// The least an exclusive-or costs, one gate or two in series.
fn exclusive_or(netlist: &Netlist, model: DelayModel) -> i32 {
    match (model, netlist.has_inverted_edges()) {
        (_, true) => 2 * model.least_delay(2),
        (DelayModel::Unit | DelayModel::Pairs, false) => 1,
        (_, false) => model.least_parity_delay(),
    }
}

impl Latest {
    /// When the latest of the carry-in and operands `0..=position` is ready;
    /// `None` while one of them has not been timed yet, which can be when a
    /// result does not depend on it through gates.
    fn at(
        &mut self,
        chain: &Chain,
        position: usize,
        by_net: &[i32],
        known: &FixedBitSet,
    ) -> Option<i32> {
        if !self.started {
            self.so_far = ready(chain.carry_in, by_net, known)?;
            self.started = true;
        }
        while self.by_position.len() <= position {
            let bits = &chain.positions[self.by_position.len()];
            let pair = ready(bits.a, by_net, known)?.max(ready(bits.b, by_net, known)?);
            self.so_far = self.so_far.max(pair);
            self.by_position.push(self.so_far);
        }
        Some(self.by_position[position])
    }
}

fn ready(bit: Bit, by_net: &[i32], known: &FixedBitSet) -> Option<i32> {
    let net: NetId = match bit {
        Bit::Constant(_) => return Some(NEVER),
        Bit::Signal(signal) => signal.net,
    };
    known.contains(net.index()).then(|| by_net[net.index()])
}
