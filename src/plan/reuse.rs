//! Gates that are there already and stay, so that a new gate equal to one of them
//! is that one.
//!
//! Looked at are the readers of the operands, a few levels up. Invariant: only
//! gates that nothing replaced can reach and that no rebuild removes are put into
//! the overlay, so that reading them can close no loop.

use super::ground::Ground;
use super::overlay::{Literal, Overlay};
use crate::netlist::{GateId, NetId, Shape};
use rustc_hash::FxHashMap;

/// Readers of one operand looked at.
const MOST_READERS: usize = 256;
/// Levels of gates over the operands looked at.
const LEVELS: usize = 3;

/// Puts the gates over `operands` for which `stays` holds into the overlay.
pub(super) fn find_reusable(
    ground: &Ground<'_>,
    overlay: &mut Overlay,
    operands: &[NetId],
    stays: impl Fn(GateId) -> bool,
) {
    let netlist = ground.netlist;
    let arrival = |net: NetId| ground.timing.arrivals.by_net[net.index()];
    let mut known: FxHashMap<NetId, Literal> = FxHashMap::default();
    let mut front = operands.to_vec();
    for &net in &front {
        known.insert(net, overlay.net(net, arrival(net)));
    }
    for _ in 0..LEVELS {
        let mut gates: Vec<GateId> = front
            .iter()
            .flat_map(|&net| ground.readers.of_net(net).iter().take(MOST_READERS))
            .copied()
            .filter(|&gate| stays(gate))
            .collect();
        gates.sort_unstable_by_key(|&gate| ground.rank(gate));
        gates.dedup();
        front.clear();
        for gate in gates {
            let output = netlist.gate_output(gate);
            if known.contains_key(&output) || ground.gate_of(output) != Some(gate) {
                continue;
            }
            let pins = netlist.fan_ins(gate).iter();
            let Some(inputs) = pins.map(|net| known.get(net).copied()).collect() else {
                continue;
            };
            let inputs: Vec<Literal> = inputs;
            let function = netlist.function(gate);
            let literal = match function.shape() {
                Shape::Buffer => Some(inputs[0]),
                Shape::Inverter => Some(!inputs[0]),
                _ => overlay.gate(function, &inputs),
            };
            if let Some(literal) = literal {
                overlay.set_existing(literal, output, arrival(output));
                known.insert(output, literal);
                front.push(output);
            }
        }
    }
}
