//! Recognised chains with one gate changed. A change differs when simulation
//! shows a sum or carry that is no longer what the operands, as they are now, add
//! up to; then the chain may not be told as before. The others (equivalent
//! mutants) are counted apart.

#![allow(dead_code)]

use super::judged::{Witness, theorem};
use super::measured::searched;
use crate::generators::corpus::{Case, Form};
use crate::generators::{Circuit, Function, Random};
use carrywise::chain::{Chain, Found};
use carrywise::netlist::{Bit, Netlist, Signal};
use std::collections::BTreeSet;

/// What became of the mutants.
#[derive(Default, Debug)]
pub struct Mutants {
    /// Changes that simulation shows in a sum or carry.
    pub different: usize,
    /// Changes that it does not show.
    pub alike: usize,
    /// Different, yet told as the same chain.
    pub kept: Vec<String>,
    /// Chains told of mutants that integer addition refutes.
    pub false_chains: Vec<String>,
}

/// Names of all nets a chain speaks of, with polarity, position by position.
type Claim = Vec<[BTreeSet<String>; 3]>;

fn claim(chain: &Chain, netlist: &Netlist) -> Claim {
    let bit = |bit: Bit| match bit {
        Bit::Constant(value) => u8::from(value).to_string(),
        Bit::Signal(signal) => netlist.signal_name(signal),
    };
    let names = |signals: &[Signal]| signals.iter().map(|&s| netlist.signal_name(s)).collect();
    let positions = chain.positions.iter();
    positions
        .map(|p| {
            [
                BTreeSet::from([bit(p.a), bit(p.b)]),
                names(&p.sums),
                names(&p.carries),
            ]
        })
        .collect()
}

/// Whether a claim is a part of another: the same operands at as many positions
/// in a row, and every sum and carry.
fn holds(all: &Claim, part: &Claim) -> bool {
    all.windows(part.len().max(1)).any(|window| {
        window.iter().zip(part).all(|(told, meant)| {
            told[0] == meant[0] && meant[1].is_subset(&told[1]) && meant[2].is_subset(&told[2])
        })
    })
}

/// Gates between the operands of a chain and its sums and carries.
fn inside(chain: &Chain, netlist: &Netlist, circuit: &Circuit) -> Vec<usize> {
    let name = |signal: Signal| netlist.net_name(signal.net);
    let mut stop: BTreeSet<String> = BTreeSet::new();
    let mut open: Vec<String> = Vec::new();
    for position in &chain.positions {
        stop.extend(
            [position.a, position.b]
                .iter()
                .filter_map(|b| b.signal())
                .map(name),
        );
        open.extend(
            position
                .sums
                .iter()
                .chain(&position.carries)
                .map(|&s| name(s)),
        );
    }
    let driver: std::collections::HashMap<String, usize> = (0..circuit.gate_count())
        .map(|gate| (circuit.name_of(circuit.gate_at(gate).2), gate))
        .collect();
    let mut gates = BTreeSet::new();
    let below = chain.carry_in.signal().into_iter().chain(chain.mode);
    stop.extend(below.map(name));
    while let Some(net) = open.pop() {
        if stop.contains(&net) {
            continue;
        }
        if let Some(&gate) = driver.get(&net)
            && gates.insert(gate)
        {
            open.extend(
                circuit
                    .gate_at(gate)
                    .1
                    .iter()
                    .map(|&net| circuit.name_of(net)),
            );
        }
    }
    gates.into_iter().collect()
}

/// Another function of the same inputs: one row of the table flipped, or all.
fn changed(function: Function, inputs: usize, random: &mut Random) -> Function {
    if inputs > 6 {
        return match function {
            Function::And => Function::Or,
            Function::Nand => Function::Nor,
            Function::Nor => Function::Nand,
            _ => Function::And,
        };
    }
    let words: Vec<u64> = (0..inputs)
        .map(|i| (0..64).fold(0, |word, m: u64| word | (m >> i & 1) << m))
        .collect();
    let table = function.evaluate(&words);
    match random.below(3) {
        0 => Function::Table(!table),
        _ => Function::Table(table ^ 1 << random.below(1 << inputs)),
    }
}

impl Mutants {
    /// Makes up to `each` mutants per chain of a case written as flat BLIF.
    pub fn take(&mut self, case: &Case, netlist: &Netlist, found: &Found, each: usize, seed: u64) {
        let Form::Flat(circuit) = &case.form else {
            return;
        };
        let mut random = Random::new(seed);
        for chain in &found.chains {
            let gates = inside(chain, netlist, circuit);
            if gates.is_empty() {
                continue;
            }
            for _ in 0..each {
                let gate = gates[random.below(gates.len())];
                let (function, pins, _) = circuit.gate_at(gate);
                let mut other = circuit.clone();
                other.set_function(gate, changed(function, pins.len(), &mut random));
                let mutant = Case {
                    form: Form::Flat(other),
                    ..case.clone()
                };
                self.judge(&mutant, netlist, chain);
            }
        }
    }

    fn judge(&mut self, mutant: &Case, netlist: &Netlist, chain: &Chain) {
        let after = Witness::of(mutant, 9);
        // A change that also moves the operands alike leaves the claim true.
        if theorem(chain, netlist, &after).is_ok() {
            self.alike += 1;
            return;
        }
        self.different += 1;
        let (changed, found, _) = searched(mutant);
        let meant = claim(chain, netlist);
        let label = || {
            format!(
                "{}: {} of {}",
                mutant.label(),
                chain.kind.word(),
                meant.len()
            )
        };
        for told in &found.chains {
            if holds(&claim(told, &changed), &meant) {
                self.kept.push(label());
            }
            if let Err(fault) = theorem(told, &changed, &after) {
                self.false_chains.push(format!("{}: {fault}", label()));
            }
        }
    }
}
