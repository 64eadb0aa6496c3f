//! What drives a net, in a word a designer uses.

use crate::netlist::{Driver, Function, GateId, NetId, Netlist, Shape, Topology};

/// The word for what drives `net`.
pub fn driver(netlist: &Netlist, topology: &Topology, net: NetId) -> String {
    let word = match netlist.driver(net) {
        Driver::Gate(_) if topology.is_cut(net) => "loop, cut",
        Driver::Gate(id) => return gate(netlist, id),
        Driver::None => "no driver, cut",
        Driver::Many(_) => "several drivers, cut",
        Driver::Input(_) => "input",
        Driver::Register(_) => "register",
        Driver::Box(_) => "unknown instance",
        Driver::Constant(_) => "constant",
    };
    word.to_owned()
}

/// The word for a gate.
pub fn gate(netlist: &Netlist, gate: GateId) -> String {
    let function = netlist.function(gate);
    if let Some(declared) = netlist.declared() {
        if declared.passage(gate).is_some() {
            return "through a box".to_owned();
        }
        if declared.is_in_carry_cell(gate) {
            return "carry cell".to_owned();
        }
    }
    let word = match function.shape() {
        // On inverted edges every gate is an AND, whatever its table says.
        Shape::Product if netlist.has_inverted_edges() => "AND",
        Shape::Constant(_) => "constant",
        Shape::Buffer => "buffer",
        Shape::Inverter => "inverter",
        Shape::Product => product(function),
        Shape::Parity => parity(function),
        Shape::Other => other(function),
    };
    word.to_owned()
}

/// By which value it takes once only, and for which inputs.
fn product(function: &Function) -> &'static str {
    let n = function.inputs();
    let all = |value: bool| evaluate(function, &vec![value; n]);
    match (all(false), all(true)) {
        (true, false) => {
            // NAND and NOR agree at the ends; one input low tells them apart.
            let mut inputs = vec![true; n];
            inputs[0] = false;
            if evaluate(function, &inputs) {
                "NAND"
            } else {
                "NOR"
            }
        }
        (false, true) => {
            let mut inputs = vec![false; n];
            inputs[0] = true;
            if evaluate(function, &inputs) {
                "OR"
            } else {
                "AND"
            }
        }
        // Mixed input polarities: one product is 0, its complement 1, at both ends.
        (false, false) => "AND",
        (true, true) => "OR",
    }
}

fn parity(function: &Function) -> &'static str {
    if evaluate(function, &vec![false; function.inputs()]) {
        "XNOR"
    } else {
        "XOR"
    }
}

/// The majority of three, truth table 1110 1000.
const MAJORITY: u64 = 0xE8;

fn other(function: &Function) -> &'static str {
    match function {
        Function::Table(table) if table.inputs() == 3 && table.bits() == MAJORITY => "majority",
        _ => "cover",
    }
}

fn evaluate(function: &Function, inputs: &[bool]) -> bool {
    let pins: Vec<u64> = inputs.iter().map(|&v| if v { !0 } else { 0 }).collect();
    function.evaluate(&pins) & 1 == 1
}
