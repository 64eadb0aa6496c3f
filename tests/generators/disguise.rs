//! Disguises: the same circuit under meaningless names, its gates and ports in
//! another order. Net numbers stay, so a [`Truth`](super::Truth) stays true.

use super::circuit::{Circuit, Net};
use super::random::Random;

/// Gives every net a meaningless name; no two nets share one.
pub fn rename(circuit: &mut Circuit, seed: u64) {
    let mut numbers: Vec<usize> = (0..circuit.net_count()).collect();
    Random::new(seed).shuffle(&mut numbers);
    for (net, number) in numbers.into_iter().enumerate() {
        circuit.set_name(Net(net as u32), &format!("w_{number}_"));
    }
}

/// Puts the gates in a random order, readers before drivers too.
pub fn shuffle_gates(circuit: &mut Circuit, seed: u64) {
    let mut gates: Vec<u32> = (0..circuit.gate_count() as u32).collect();
    Random::new(seed).shuffle(&mut gates);
    circuit.keep_gates(&gates);
}

/// Puts inputs, outputs and registers in a random order.
pub fn shuffle_ports(circuit: &mut Circuit, seed: u64) {
    let mut random = Random::new(seed);
    random.shuffle(&mut circuit.inputs);
    random.shuffle(&mut circuit.outputs);
    random.shuffle(&mut circuit.registers);
}

/// All three.
pub fn disguise(circuit: &mut Circuit, seed: u64) {
    rename(circuit, seed);
    shuffle_gates(circuit, seed + 1);
    shuffle_ports(circuit, seed + 2);
}
