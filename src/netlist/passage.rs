//! Delays of black boxes from pin to pin: paths that run on through a box.
//!
//! A box output that some input reaches with a declared delay is driven by a gate
//! that shows the box's own output, on a new net of the same name, and reads those
//! inputs for the time they take (see [`super::declared`]). A pair of pins without
//! a delay keeps what it was: the path ends at the input, and another starts at the
//! output.

use super::assume::{BoxDelay, Item, Misfit};
use super::carry_cell::shows_first;
use super::id::{BoxId, FunctionId, GateId, NetId, ScopeId};
use super::model::{Driver, Netlist};
use rustc_hash::FxHashMap;
use std::collections::BTreeMap;

/// Lets paths run through boxes; how many pin pairs each entry names goes to
/// `matched`.
pub(super) fn open_boxes(
    netlist: &mut Netlist,
    entries: &[BoxDelay],
    matched: &mut BTreeMap<Item, usize>,
) -> Result<(), Misfit> {
    let mut counts = vec![[0usize; 3]; entries.len()];
    for index in 0..netlist.boxes.len() {
        let delays = delays(netlist, index, entries, &mut counts);
        if !delays.is_empty() {
            open(netlist, BoxId::new(index), &delays);
        }
    }
    for (i, (each, [boxes, inputs, pairs])) in entries.iter().zip(counts).enumerate() {
        let missing = match (boxes, inputs, pairs) {
            (0, ..) => (Item::BoxName(i), &each.name, "a box"),
            (_, 0, _) => (Item::BoxFrom(i), &each.from, "an input of that box"),
            (.., 0) => (Item::BoxTo(i), &each.to, "an output of that box"),
            _ => {
                matched.insert(Item::BoxName(i), pairs);
                continue;
            }
        };
        let (item, pattern, what) = missing;
        return Err(Misfit::NoMatch {
            item,
            pattern: pattern.text().to_owned(),
            what,
        });
    }
    Ok(())
}

/// The delays of one box by input and output; the last entry that names a pair
/// holds.
fn delays(
    netlist: &Netlist,
    index: usize,
    entries: &[BoxDelay],
    counts: &mut [[usize; 3]],
) -> FxHashMap<(usize, usize), i32> {
    let each = &netlist.boxes[index];
    let model = netlist.names().text(each.model);
    let mut found = FxHashMap::default();
    for (entry, [boxes, inputs, pairs]) in entries.iter().zip(counts) {
        if !entry.name.matches(&model) {
            continue;
        }
        *boxes += 1;
        let pin = |n: usize| netlist.names().text(each.pins[n]);
        let (reads, drives) = (each.inputs.len(), each.outputs.len());
        let from: Vec<usize> = (0..reads)
            .filter(|&n| entry.from.matches(&pin(n)))
            .collect();
        *inputs += from.len();
        for output in (0..drives).filter(|&n| entry.to.matches(&pin(reads + n))) {
            *pairs += from.len();
            for &input in &from {
                found.insert((input, output), entry.delay);
            }
        }
    }
    found
}

fn open(netlist: &mut Netlist, id: BoxId, delays: &FxHashMap<(usize, usize), i32>) {
    let (inputs, outputs) = {
        let each = &netlist.boxes[id.index()];
        (each.inputs.clone(), each.outputs.clone())
    };
    for (n, &output) in outputs.iter().enumerate() {
        let from: Vec<usize> = (0..inputs.len())
            .filter(|&input| delays.contains_key(&(input, n)))
            .collect();
        // A net that is tied, or has other drivers, is not driven anew.
        if from.is_empty() || netlist.driver(output) != Driver::Box(id) {
            continue;
        }
        let own = copy_of(netlist, output);
        netlist.drivers[own.index()] = Driver::Box(id);
        netlist.boxes[id.index()].outputs[n] = own;
        let mut pins = vec![own];
        let mut times = vec![0];
        for &input in &from {
            pins.push(inputs[input]);
            times.push(delays[&(input, n)]);
        }
        let line = netlist.boxes[id.index()].line;
        let gate = add_gate(netlist, &pins, &times, output, line);
        let declared = netlist.declared.get_or_insert_default();
        declared.passages.insert(gate, id);
        if from.len() == inputs.len() {
            declared.barred.insert(own);
        } else {
            declared.open.insert(own);
        }
    }
    let declared = netlist.declared.get_or_insert_default();
    if delays.len() == inputs.len() * outputs.len() {
        declared.settled.insert(id);
    }
    for input in 0..inputs.len() {
        if (0..outputs.len()).all(|output| delays.contains_key(&(input, output))) {
            declared.passed.insert((id, input as u32));
        }
    }
}

/// A new net of the same name.
fn copy_of(netlist: &mut Netlist, net: NetId) -> NetId {
    let id = netlist.drivers.len();
    netlist.drivers.push(Driver::None);
    let (name, scope) = (netlist.local_name(net), netlist.net_scope(net));
    if name.is_some() {
        netlist.net_names.resize(id, None);
        netlist.net_names.push(name);
    }
    if scope != ScopeId(0) {
        netlist.net_scopes.resize(id, ScopeId(0));
        netlist.net_scopes.push(scope);
    }
    NetId::new(id)
}

fn add_gate(
    netlist: &mut Netlist,
    pins: &[NetId],
    delays: &[i32],
    output: NetId,
    line: u32,
) -> GateId {
    let gate = GateId::new(netlist.gate_outputs.len());
    let function = netlist
        .functions
        .intern_with_delays(shows_first(pins.len()), delays);
    netlist.fan_ins.extend_from_slice(pins);
    netlist.fan_in_starts.push(netlist.fan_ins.len() as u32);
    netlist.gate_outputs.push(output);
    netlist.gate_functions.push(FunctionId(function));
    netlist.gate_lines.push(line);
    if !netlist.gate_scopes.is_empty() {
        let scope = netlist.net_scope(output);
        netlist.gate_scopes.push(scope);
    }
    netlist.drivers[output.index()] = Driver::Gate(gate);
    gate
}
