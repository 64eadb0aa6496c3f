//! From a carry network to gates, through a caller's [`GateSink`].

use super::carry_network::CarryNetwork;
use crate::netlist::Function;

/// Where the builder's gates go. Inversion of a signal is free: a sink whose
/// format needs a gate for it makes one only where an inverted net is read
/// from outside.
pub trait GateSink {
    /// A literal: some gate's output or an existing net, inverted or not.
    type Signal: Copy + PartialEq + std::ops::Not<Output = Self::Signal>;

    /// A constant.
    fn constant(&mut self, value: bool) -> Self::Signal;
    /// AND of two signals or more, within the limit on gate inputs. The sink
    /// folds constants, repeated and opposite inputs, and shares equal gates.
    fn and(&mut self, inputs: &[Self::Signal]) -> Self::Signal;
    /// XOR of two signals.
    fn xor(&mut self, left: Self::Signal, right: Self::Signal) -> Self::Signal;
    /// One gate of any function, pin 0 first; only asked for with
    /// [`Limits::covers`].
    fn cover(&mut self, function: &Function, inputs: &[Self::Signal]) -> Self::Signal;
    /// When the signal is ready, in ticks of the caller's delay model.
    fn arrival(&self, signal: Self::Signal) -> i32;
}

/// What one new gate may be.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Limits {
    /// Most inputs of one gate; at least 2.
    pub gate_inputs: usize,
    /// Whether a gate may have any function (`cover`) or is one product or one
    /// XOR (`single-operator`).
    pub covers: bool,
}

/// Which propagate the leaves use.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Propagate {
    /// `a + b`.
    Or,
    /// `a ⊕ b`.
    Xor,
}

/// What is added, least significant first.
#[derive(Clone, Debug)]
pub struct Addends<S> {
    /// First addend.
    pub a: Vec<S>,
    /// Second addend.
    pub b: Vec<S>,
    /// Carry-in, when the network has one.
    pub carry_in: Option<S>,
}

/// What was built, by position.
#[derive(Clone, Debug)]
pub struct Built<S> {
    /// Sum of each position.
    pub sums: Vec<S>,
    /// Carry out of each position.
    pub carries: Vec<S>,
}

/// Builds every sum and carry of `network`.
pub fn build<K: GateSink>(
    _network: &CarryNetwork,
    _addends: &Addends<K::Signal>,
    _limits: Limits,
    _propagate: Propagate,
    _sink: &mut K,
) -> Built<K::Signal> {
    unimplemented!("written next")
}
