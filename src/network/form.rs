//! Carries and sums as signals: ANDs, ORs, XORs and choices over the leaves.
//!
//! What the schemes that fit arrivals choose is not always a tree of spans with
//! both G and P, so they state signals one by one. Invariant: a signal reads only
//! earlier ones.

/// One signal of a [`Form`].
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct SignalId(u32);

impl SignalId {
    /// The id as an array index.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// What a signal is. Items are counted as in [`super::arrival_aware::Leaves`].
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Signal {
    /// g of an item; of the carry-in, itself.
    Generate(usize),
    /// p of an item.
    Propagate(usize),
    /// `g + p` of an item.
    Either(usize),
    /// `a ⊕ b` of an item.
    Half(usize),
    /// AND of two or more.
    And(Vec<SignalId>),
    /// OR of two or more.
    Or(Vec<SignalId>),
    /// XOR of two.
    Xor(SignalId, SignalId),
    /// A choice.
    Select {
        /// What chooses.
        by: SignalId,
        /// The result where it is one.
        if_one: SignalId,
        /// The result where it is not.
        if_none: SignalId,
    },
}

/// See the head of the module.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Form {
    signals: Vec<Signal>,
    /// The carry out of each position, where it is asked for.
    pub carries: Vec<Option<SignalId>>,
    /// The sum of each position, where it is asked for.
    pub sums: Vec<Option<SignalId>>,
}

impl Form {
    /// All signals, each after those it reads.
    pub fn signals(&self) -> &[Signal] {
        &self.signals
    }

    /// Adds a signal.
    pub(super) fn add(&mut self, signal: Signal) -> SignalId {
        let id = SignalId(u32::try_from(self.signals.len()).expect("fewer than 2^32 signals"));
        self.signals.push(signal);
        id
    }

    /// AND of the signals; of one, itself.
    pub(super) fn and(&mut self, inputs: Vec<SignalId>) -> SignalId {
        match inputs[..] {
            [only] => only,
            _ => self.add(Signal::And(inputs)),
        }
    }

    /// OR of the signals; of one, itself.
    pub(super) fn or(&mut self, inputs: Vec<SignalId>) -> SignalId {
        match inputs[..] {
            [only] => only,
            _ => self.add(Signal::Or(inputs)),
        }
    }
}
