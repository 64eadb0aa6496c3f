//! Nets tied to a constant: the netlist in which they are.
//!
//! A tied net that a gate drives keeps its gate, turned into a constant; any
//! other becomes a constant of the netlist. The constants are then followed
//! through the gates: a pin that no longer matters, because constants on other
//! pins decide, is put on a constant net. So paths through it vanish from every
//! pass, while functions, gates and prices stay what they were. Constants that
//! were in the netlist before are followed only where a tie meets them.

use super::function::{Cover, Function, TruthTable};
use super::graph::Topology;
use super::health::Known;
use super::id::{FunctionId, GateId, NetId};
use super::model::{Driver, Netlist};
use fixedbitset::FixedBitSet;

/// Passes over the gates when loops keep one pass from being enough.
const MOST_PASSES: usize = 8;

/// Ties nets; none of them may be contended.
pub(super) fn tie(netlist: &mut Netlist, ties: &[(NetId, bool)]) {
    if ties.is_empty() {
        return;
    }
    let zero = constant_net(netlist);
    let mut tainted = FixedBitSet::with_capacity(netlist.net_count());
    for &(net, value) in ties {
        tainted.insert(net.index());
        match netlist.driver(net) {
            Driver::Gate(gate) => make_constant(netlist, gate, value, zero),
            _ => netlist.drivers[net.index()] = Driver::Constant(value),
        }
    }
    let topology = Topology::of(netlist);
    let mut known = Known::new(netlist);
    let passes = if topology.loops.is_empty() {
        1
    } else {
        MOST_PASSES
    };
    for _ in 0..passes {
        let mut changed = false;
        for &gate in &topology.order {
            changed |= follow(netlist, gate, &mut known, &mut tainted, zero);
        }
        if !changed {
            break;
        }
    }
}

/// A net that carries 0.
fn constant_net(netlist: &mut Netlist) -> NetId {
    let found = netlist.nets().find(|&net| {
        let zero = matches!(netlist.driver(net), Driver::Constant(false));
        zero && netlist.local_name(net).is_none()
    });
    found.unwrap_or_else(|| {
        netlist.drivers.push(Driver::Constant(false));
        NetId::new(netlist.drivers.len() - 1)
    })
}

fn make_constant(netlist: &mut Netlist, gate: GateId, value: bool, zero: NetId) {
    let pins = netlist.fan_ins(gate).len();
    let function = if pins <= TruthTable::MAX_INPUTS {
        Function::Table(TruthTable::new(pins, if value { !0 } else { 0 }))
    } else {
        let none: [[(usize, bool); 0]; 0] = [];
        Function::Cover(Cover::new(pins, value, none))
    };
    let function = FunctionId(netlist.functions.intern(function));
    netlist.gate_functions[gate.index()] = function;
    for pin in 0..pins {
        set_pin(netlist, gate, pin, zero);
    }
}

fn set_pin(netlist: &mut Netlist, gate: GateId, pin: usize, net: NetId) {
    let start = netlist.fan_in_starts[gate.index()] as usize;
    netlist.fan_ins[start + pin] = net;
}

/// Follows constants through one gate; whether anything new became known.
fn follow(
    netlist: &mut Netlist,
    gate: GateId,
    known: &mut Known,
    tainted: &mut FixedBitSet,
    zero: NetId,
) -> bool {
    let output = netlist.gate_output(gate);
    let met = netlist
        .fan_ins(gate)
        .iter()
        .any(|net| tainted.contains(net.index()) && known.get(*net).is_some());
    let value = known.gate(netlist, gate);
    if met {
        let gone = match value {
            Some(_) => (0..netlist.fan_ins(gate).len()).collect(),
            // Delays declared from pin to pin hold whatever the other pins are.
            None if netlist.declared_delays(netlist.function_id(gate)).is_some() => Vec::new(),
            None => unneeded(netlist, gate, known),
        };
        for pin in gone {
            let net = netlist.fan_ins(gate)[pin];
            if known.get(net).is_none() {
                set_pin(netlist, gate, pin, zero);
            }
        }
    }
    // A contended net keeps its other drivers.
    let sole = netlist.driver(output) == Driver::Gate(gate);
    let Some(value) = value.filter(|_| sole) else {
        return false;
    };
    let was_tied = tainted.contains(output.index());
    if met {
        tainted.insert(output.index());
    }
    let new = known.get(output).is_none() || (met && !was_tied);
    known.set(output, value);
    new
}

/// The pins that decide nothing any more.
fn unneeded(netlist: &Netlist, gate: GateId, known: &Known) -> Vec<usize> {
    let fan_ins = netlist.fan_ins(gate);
    match netlist.function(gate) {
        Function::Table(table) => {
            let mut rest = *table;
            for (pin, &net) in fan_ins.iter().enumerate() {
                if let Some(value) = known.get(net) {
                    rest = rest.cofactor(pin, value);
                }
            }
            (0..fan_ins.len())
                .filter(|&pin| !rest.depends_on(pin))
                .collect()
        }
        Function::Cover(cover) => {
            // Rows that constants rule out need their pins no more.
            let mut needed = vec![false; fan_ins.len()];
            for cube in cover.cubes() {
                let pins: Vec<(usize, bool)> = cube.collect();
                let dead = pins
                    .iter()
                    .any(|&(pin, inverted)| known.get(fan_ins[pin]) == Some(inverted));
                if !dead {
                    for (pin, _) in pins {
                        needed[pin] = true;
                    }
                }
            }
            (0..fan_ins.len()).filter(|&pin| !needed[pin]).collect()
        }
    }
}
