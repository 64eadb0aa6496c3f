//! Reading a netlist, finding its chains, and holding them to their claims by
//! simulation. Files that use this declare `mod generators;` too.

#![allow(dead_code)]

use crate::generators::Random;
use carrywise::chain::{Chain, Found, Options, Relation, find};
use carrywise::format::{ReadOptions, read};
use carrywise::netlist::{Bit, Driver, Netlist, Signal, Topology};
use carrywise::source::Source;

pub fn parse(name: &str, bytes: Vec<u8>) -> Netlist {
    let source = Source {
        name: name.into(),
        bytes,
    };
    match read(&source, &ReadOptions::default()) {
        Ok(parsed) => parsed.netlist,
        Err(errors) => panic!("{name}: {errors:?}"),
    }
}

pub fn recognise(netlist: &Netlist) -> Found {
    find(netlist, &Topology::of(netlist), Options::default())
}

/// One word of random patterns through the netlist, by net.
pub fn simulated(netlist: &Netlist, seed: u64) -> Vec<u64> {
    let topology = Topology::of(netlist);
    let mut random = Random::new(seed);
    let mut words: Vec<u64> = (0..netlist.net_count()).map(|_| random.word()).collect();
    for net in netlist.nets() {
        if let Driver::Constant(value) = netlist.driver(net) {
            words[net.index()] = if value { !0 } else { 0 };
        }
    }
    for &gate in &topology.order {
        let pins: Vec<u64> = netlist
            .fan_ins(gate)
            .iter()
            .map(|net| words[net.index()])
            .collect();
        words[netlist.gate_output(gate).index()] = netlist.function(gate).evaluate(&pins);
    }
    words
}

/// Holds every chain to its claim under random patterns.
pub fn check_theorems(label: &str, netlist: &Netlist, chains: &[Chain]) {
    for seed in 0..8 {
        let words = simulated(netlist, seed);
        let signal = |s: Signal| words[s.net.index()] ^ if s.inverted { !0 } else { 0 };
        let bit = |b: Bit| match b {
            Bit::Constant(true) => !0,
            Bit::Constant(false) => 0,
            Bit::Signal(s) => signal(s),
        };
        for chain in chains {
            let mut carry = bit(chain.carry_in);
            for (i, position) in chain.positions.iter().enumerate() {
                let mode = chain.mode.map_or(0, signal);
                let (a, b) = (bit(position.a), bit(position.b) ^ mode);
                assert!(
                    chain.comparison.is_some() || !position.sums.is_empty(),
                    "{label}: position {i} has no sum"
                );
                for &sum in &position.sums {
                    assert_eq!(signal(sum), a ^ b ^ carry, "{label}: sum {i}");
                }
                carry = (a & b) | (carry & (a | b));
                for &net in &position.carries {
                    assert_eq!(signal(net), carry, "{label}: carry {i}");
                }
            }
            check_comparison(label, chain, carry, signal);
        }
    }
}

/// Holds a comparator's result to the carry it is said to be: the relation says
/// in which polarity.
fn check_comparison(label: &str, chain: &Chain, carry: u64, signal: impl Fn(Signal) -> u64) {
    if let Some(compared) = chain.comparison {
        let is_carry = matches!(
            compared.relation,
            Relation::Greater | Relation::GreaterOrEqual
        );
        let told = signal(compared.result) ^ if is_carry { 0 } else { !0 };
        assert_eq!(told, carry, "{label}: result");
    }
}
