//! How late nets really settle, against a floating-mode simulation of every input
//! vector that shares nothing with the solver but the netlist.
//!
//! The witness follows the definition (McGeer, Saldanha, Brayton and
//! Sangiovanni-Vincentelli, 1993): under one vector a gate settles at the earliest
//! time at which the pins settled by then already decide its value.

mod generators;
#[path = "support/recognition.rs"]
mod recognition;

use carrywise::netlist::{Driver, NetId, Netlist, Topology};
use carrywise::prove::{Effort, Settles, Timed};
use carrywise::timing::{DelayModel, Timing};
use generators::{Architecture, Cell, Generated, Kind, Word};
use recognition::parse;

const EFFORT: Effort = Effort {
    conflicts: 200_000,
    nodes: 100_000,
};

/// Latest settling of any output, by exhaustion.
fn witnessed(netlist: &Netlist, topology: &Topology, timing: &Timing) -> i32 {
    let inputs = netlist.inputs();
    let mut latest = 0;
    for vector in 0..1u64 << inputs.len() {
        let mut values = vec![false; netlist.net_count()];
        let mut settled = vec![i32::MIN; netlist.net_count()];
        for (i, &input) in inputs.iter().enumerate() {
            values[input.index()] = vector >> i & 1 == 1;
            settled[input.index()] = 0;
        }
        for net in netlist.nets() {
            if let Driver::Constant(value) = netlist.driver(net) {
                values[net.index()] = value;
            }
        }
        for &gate in &topology.order {
            let (pins, function) = (netlist.fan_ins(gate), netlist.function(gate));
            let delays = timing.delays.of_gate(netlist, gate);
            let times = pins.iter().zip(delays);
            let times: Vec<i32> = times
                .map(|(pin, delay)| settled[pin.index()].saturating_add(*delay))
                .collect();
            let own: Vec<bool> = pins.iter().map(|pin| values[pin.index()]).collect();
            let word = |values: &[bool]| -> Vec<u64> {
                values.iter().map(|&v| if v { !0 } else { 0 }).collect()
            };
            let value = function.evaluate(&word(&own)) & 1 == 1;
            // The pins settled by `time` decide when no values of the others
            // change the result.
            let decided = |time: i32| {
                let open: Vec<usize> = (0..pins.len()).filter(|&i| times[i] > time).collect();
                (0..1u32 << open.len()).all(|choice| {
                    let mut tried = own.clone();
                    for (at, &pin) in open.iter().enumerate() {
                        tried[pin] = choice >> at & 1 == 1;
                    }
                    (function.evaluate(&word(&tried)) & 1 == 1) == value
                })
            };
            let mut candidates = times.clone();
            candidates.push(i32::MIN);
            candidates.sort_unstable();
            let output = netlist.gate_output(gate).index();
            values[output] = value;
            settled[output] = candidates
                .into_iter()
                .find(|&time| decided(time))
                .expect("all pins settled decide");
        }
        let outputs = netlist.outputs().iter();
        let times = outputs.map(|output| settled[output.signal.net.index()]);
        latest = latest.max(times.max().unwrap_or(0));
    }
    latest
}

fn settles(netlist: &Netlist, topology: &Topology, timing: &Timing) -> Settles {
    let outputs = netlist.outputs().iter();
    let nets: Vec<NetId> = outputs.map(|output| output.signal.net).collect();
    Timed {
        netlist,
        topology,
        delays: |gate| timing.delays.of_gate(netlist, gate),
        arrivals: &timing.arrivals.by_net,
        effort: EFFORT,
    }
    .settles(&nets)
}

fn word(bits: usize, architecture: Architecture) -> Generated {
    Word {
        architecture,
        carry_in: true,
        ..Word::new(Kind::Adder, bits, Cell::PropagateXor)
    }
    .generate()
}

#[test]
fn settles_when_exhaustion_says_so() {
    let mut shorter = 0;
    for model in [DelayModel::Unit, DelayModel::Pairs] {
        for architecture in [
            Architecture::Ripple(Cell::PropagateXor),
            Architecture::Ripple(Cell::Nand),
            Architecture::CarrySkip(2),
            Architecture::CarrySkip(3),
            Architecture::CarrySelect(2),
            Architecture::KoggeStone,
        ] {
            let generated = word(6, architecture);
            let netlist = parse(&generated.label, generated.circuit.blif().into_bytes());
            let topology = Topology::of(&netlist);
            let timing = Timing::of(&netlist, &topology, model);
            let found = settles(&netlist, &topology, &timing);
            let witness = witnessed(&netlist, &topology, &timing);
            assert_eq!(
                found.exercised,
                Some(witness),
                "{} {model:?}",
                generated.label
            );
            shorter += usize::from(witness < found.longest);
            if matches!(architecture, Architecture::Ripple(_)) {
                assert_eq!(witness, found.longest, "{}", generated.label);
            }
        }
    }
    assert!(shorter > 0, "no longest path was found to be false");
}

#[test]
fn the_longest_path_of_a_wide_skip_adder_is_false() {
    let generated = word(32, Architecture::CarrySkip(4));
    let netlist = parse(&generated.label, generated.circuit.blif().into_bytes());
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let found = settles(&netlist, &topology, &timing);
    // A carry that passes a whole block takes its bypass, so no values make it
    // ripple through more than two blocks (common practice, no source).
    let exercised = found.exercised.expect("small enough to settle");
    assert!(
        exercised * 3 < found.longest * 2,
        "{exercised} of {}",
        found.longest
    );
    println!(
        "32-bit skip adder: longest path {}, exercised {exercised}",
        found.longest
    );
}
