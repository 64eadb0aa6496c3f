//! Adders built into a counting sink, for the tests of carry networks.

#![allow(dead_code)]

use carrywise::network::GateSink;
use carrywise::network::schemes::{self, Scheme, Settings};
use carrywise::network::{
    Addends, Built, CarryNetwork, CountedSignal, CountingSink, Limits, Propagate, XorForm, build,
};

pub const NO_LIMIT: Limits = Limits {
    gate_inputs: usize::MAX,
    covers: false,
};
pub const PAIRS: Limits = Limits {
    gate_inputs: 2,
    covers: false,
};

pub fn scheme(name: &str) -> &'static Scheme {
    schemes::by_name(name).expect("a scheme of that name")
}

pub fn network(name: &str, positions: usize, has_carry_in: bool) -> CarryNetwork {
    scheme(name).network(positions, has_carry_in, Settings::default())
}

/// An adder built into a counting sink, inputs in the order a, b, carry-in.
pub struct Adder {
    pub sink: CountingSink,
    pub built: Built<CountedSignal>,
}

impl Adder {
    pub fn new(network: &CarryNetwork, limits: Limits, propagate: Propagate, xor: XorForm) -> Self {
        let mut sink = CountingSink::new(xor);
        let a = (0..network.positions()).map(|_| sink.input(0)).collect();
        let b = (0..network.positions()).map(|_| sink.input(0)).collect();
        let carry_in = network.carry_in().map(|_| sink.input(0));
        let addends = Addends { a, b, carry_in };
        let built = build(network, &addends, limits, propagate, &mut sink);
        Self { sink, built }
    }

    /// As the textbooks count: unlimited fan-in, XOR one gate and one delay.
    pub fn textbook(network: &CarryNetwork) -> Self {
        Self::new(network, NO_LIMIT, Propagate::Or, XorForm::Gate)
    }

    /// As an AND/inverter graph.
    pub fn ands(network: &CarryNetwork) -> Self {
        Self::new(network, PAIRS, Propagate::Or, XorForm::Ands)
    }

    pub fn carry_delay(&self, position: usize) -> i32 {
        self.sink.arrival(self.built.carries[position])
    }

    pub fn last_carry_delay(&self) -> i32 {
        self.carry_delay(self.built.carries.len() - 1)
    }

    pub fn sum_delay(&self) -> i32 {
        self.sink.depth(&self.built.sums)
    }

    pub fn outputs(&self) -> Vec<CountedSignal> {
        [&self.built.sums[..], &self.built.carries[..]].concat()
    }

    pub fn largest_gate(&self) -> usize {
        self.sink.largest_fan_in(&self.outputs())
    }
}
