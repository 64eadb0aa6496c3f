//! Wide AND and OR from gates within the limit, and the folding of constants.
//!
//! A gate too wide is a tree made by arrival: the inputs ready first are merged
//! first, again and again. For one associative and commutative operator that is
//! the earliest root there is, with two-input gates at ⌈log2 Σ 2^t⌉ for whole
//! arrivals t (M. C. Golumbic, "Combinatorial Merging", IEEE Transactions on
//! Computers C-25, 1976: Huffman's tree with a maximum in place of the sum).
//! The first merge takes as many inputs as leaves every later gate full. Ties go
//! to the input named first, so that equal lists give equal trees.

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use super::build::GateSink;

/// A sink, and what its gates may be.
pub(super) struct Gates<'a, K: GateSink> {
    pub(super) sink: &'a mut K,
    zero: K::Signal,
    width: usize,
}

impl<'a, K: GateSink> Gates<'a, K> {
    pub(super) fn new(sink: &'a mut K, width: usize) -> Self {
        assert!(width >= 2, "a gate has at least two inputs");
        let zero = sink.constant(false);
        Self { sink, zero, width }
    }

    pub(super) fn zero(&self) -> K::Signal {
        self.zero
    }

    /// AND of any number of signals.
    pub(super) fn and(&mut self, inputs: &[K::Signal]) -> K::Signal {
        let (zero, one) = (self.zero, !self.zero);
        if inputs.contains(&zero) {
            return zero;
        }
        let inputs: Vec<_> = inputs.iter().copied().filter(|&s| s != one).collect();
        match inputs[..] {
            [] => one,
            [only] => only,
            _ if inputs.len() <= self.width => self.sink.and(&inputs),
            _ => self.and_by_arrival(&inputs),
        }
    }

    /// OR of any number of signals.
    pub(super) fn or(&mut self, inputs: &[K::Signal]) -> K::Signal {
        let inverted: Vec<_> = inputs.iter().map(|&s| !s).collect();
        !self.and(&inverted)
    }

    /// XOR of two signals.
    pub(super) fn xor(&mut self, left: K::Signal, right: K::Signal) -> K::Signal {
        let (zero, one) = (self.zero, !self.zero);
        match (left, right) {
            (other, constant) | (constant, other) if constant == zero => other,
            (other, constant) | (constant, other) if constant == one => !other,
            _ if left == right => zero,
            _ if left == !right => one,
            _ => self.sink.xor(left, right),
        }
    }

    /// `choose ? one : zero`, as an OR of two ANDs.
    pub(super) fn select(
        &mut self,
        choose: K::Signal,
        one: K::Signal,
        zero: K::Signal,
    ) -> K::Signal {
        if one == zero {
            return one;
        }
        if one == !zero {
            return self.xor(choose, zero);
        }
        let (upper, lower) = (self.and(&[choose, one]), self.and(&[!choose, zero]));
        self.or(&[upper, lower])
    }

    fn and_by_arrival(&mut self, inputs: &[K::Signal]) -> K::Signal {
        let mut signals = inputs.to_vec();
        let mut waiting: BinaryHeap<Reverse<(i32, usize)>> = BinaryHeap::new();
        for (i, &signal) in signals.iter().enumerate() {
            waiting.push(Reverse((self.sink.arrival(signal), i)));
        }
        let mut take = first_merge(waiting.len(), self.width);
        while waiting.len() > 1 {
            let mut merged = Vec::with_capacity(take);
            while merged.len() < take {
                let Some(Reverse((_, i))) = waiting.pop() else {
                    break;
                };
                merged.push(signals[i]);
            }
            let signal = self.sink.and(&merged);
            waiting.push(Reverse((self.sink.arrival(signal), signals.len())));
            signals.push(signal);
            take = self.width;
        }
        signals[signals.len() - 1]
    }
}

/// How many of `count` to merge first so that each later merge takes `width`.
pub(super) fn first_merge(count: usize, width: usize) -> usize {
    2 + (count - 2) % (width - 1)
}
