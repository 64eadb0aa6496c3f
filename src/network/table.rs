//! One cover in the making: a function of at most six signals, worked out on
//! words of projections (bit `m` of a word is the value at minterm `m`).
//!
//! Constants, repeated signals and complements fold as they are named; pins the
//! function turns out not to depend on are dropped. Invariant: what remains is
//! made as the simplest gate it is, a constant, a literal, a product, a
//! two-input XOR, and only otherwise a cover.

use super::build::GateSink;
use super::gates::Gates;
use crate::netlist::function::PIN;
use crate::netlist::{Function, TruthTable};

/// A function of at most six signals in the making.
pub(super) struct Table<S> {
    zero: S,
    pins: Vec<S>,
}

impl<S: Copy + PartialEq + std::ops::Not<Output = S>> Table<S> {
    /// The constant 0 over no signals; `zero` is the caller's.
    pub(super) fn new(zero: S) -> Self {
        let pins = Vec::with_capacity(TruthTable::MAX_INPUTS);
        Self { zero, pins }
    }

    /// The word of a signal: a projection, its complement, or a constant.
    pub(super) fn pin(&mut self, signal: S) -> u64 {
        if signal == self.zero {
            return 0;
        }
        if signal == !self.zero {
            return !0;
        }
        for (i, &pin) in self.pins.iter().enumerate() {
            if pin == signal {
                return PIN[i];
            }
            if pin == !signal {
                return !PIN[i];
            }
        }
        self.pins.push(signal);
        PIN[self.pins.len() - 1]
    }

    /// The gate whose function is `word`, over the pins it depends on.
    pub(super) fn into_gate<K>(mut self, word: u64, gates: &mut Gates<'_, K>) -> S
    where
        K: GateSink<Signal = S>,
    {
        let mut table = TruthTable::new(self.pins.len(), word);
        for pin in (0..self.pins.len()).rev() {
            if !table.depends_on(pin) {
                self.pins.remove(pin);
                table = without(table, pin);
            }
        }
        let ones = table.bits().count_ones();
        let all = 1u32 << self.pins.len();
        match self.pins[..] {
            [] if ones == 0 => self.zero,
            [] => !self.zero,
            [only] if table.bits() == 0b10 => only,
            [only] => !only,
            _ if ones == 1 => self.product(table, gates),
            _ if ones == all - 1 => !self.product(table.complement(), gates),
            [left, right] if table.bits() == 0b0110 => gates.xor(left, right),
            [left, right] => !gates.xor(left, right),
            _ => gates.sink.cover(&Function::Table(table), &self.pins),
        }
    }

    /// The AND that is true at the table's only minterm.
    fn product<K>(&self, table: TruthTable, gates: &mut Gates<'_, K>) -> S
    where
        K: GateSink<Signal = S>,
    {
        let minterm = table.bits().trailing_zeros();
        let pins = self.pins.iter().enumerate();
        let literals: Vec<S> = pins
            .map(|(i, &pin)| if minterm >> i & 1 == 1 { pin } else { !pin })
            .collect();
        gates.and(&literals)
    }
}

/// The table over one pin less, where it does not depend on `pin`.
fn without(table: TruthTable, pin: usize) -> TruthTable {
    let inputs = table.inputs() - 1;
    let low = (1u64 << pin) - 1;
    let kept = (0..1u64 << inputs).filter(|minterm| {
        let spread = (minterm & !low) << 1 | minterm & low;
        table.bits() >> spread & 1 == 1
    });
    TruthTable::new(inputs, kept.fold(0, |bits, minterm| bits | 1 << minterm))
}
