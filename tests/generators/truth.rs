//! What a generated circuit is known to compute, in nets of the circuit, and
//! the check of that knowledge against plain integer arithmetic.

use super::arrays::Product;
use super::circuit::{Circuit, Net};
use super::comparators::Comparison;
use super::random::Random;
use super::words::Architecture;

/// What a word computes. `c` is the carry-in net where there is one.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Kind {
    /// `a + b + c`; `c` is 0 without a carry-in.
    Adder,
    /// `a + ~b + c`, `c` is 1 without a carry-in; in borrow form `a - b - c`,
    /// `c` is 0 without.
    Subtractor,
    /// `a + c`; `c` is 1 without a carry-in (the enable of a counter).
    Incrementer,
    /// `a + 11…1 + c`, `c` is 0 without a carry-in; in borrow form `a - c`,
    /// `c` is 1 without.
    Decrementer,
}

/// One arithmetic word of a circuit. Buses are least significant first.
#[derive(Clone, Debug)]
pub struct Truth {
    /// What it computes.
    pub kind: Kind,
    /// First operand.
    pub a: Vec<Net>,
    /// Second operand, of a subtractor the subtrahend; empty where there is none.
    pub b: Vec<Net>,
    /// The carry-in, or the borrow-in.
    pub carry_in: Option<Net>,
    /// The result.
    pub sums: Vec<Net>,
    /// The carry-out, or the borrow-out; read by something when present.
    pub carry_out: Option<Net>,
    /// Whether carry-in and carry-out are borrows.
    pub borrow: bool,
    /// Of an adder without carry-in net: whether the carry-in is 1.
    pub plus_one: bool,
    /// What complements every `b` of an adder-subtractor; `b` lists the nets
    /// behind the XORs.
    pub mode: Option<Net>,
    /// How it is built.
    pub architecture: Architecture,
}

/// A circuit and what is known about it.
#[derive(Clone, Debug)]
pub struct Generated {
    /// A name for messages.
    pub label: String,
    /// The circuit.
    pub circuit: Circuit,
    /// Every arithmetic word in it.
    pub truths: Vec<Truth>,
    /// Every comparison in it that is no word.
    pub comparisons: Vec<Comparison>,
    /// Every product in it.
    pub products: Vec<Product>,
}

impl Truth {
    /// Number of positions.
    pub fn bits(&self) -> usize {
        self.sums.len()
    }

    /// The result and the carry-out that arithmetic gives for one pattern.
    fn expected(&self, a: u128, b: u128, c: Option<bool>) -> (u128, bool) {
        let n = self.bits();
        let mask = u128::MAX >> (128 - n);
        let carry = |default: bool| c.unwrap_or(default);
        let (other, carry) = match (self.kind, self.borrow) {
            (Kind::Adder, _) => (b, carry(self.plus_one)),
            (Kind::Subtractor, false) => (!b & mask, carry(true)),
            (Kind::Incrementer, _) => (0, carry(true)),
            (Kind::Decrementer, false) => (mask, carry(false)),
            (Kind::Subtractor, true) => return borrowed(a, b, carry(false), mask),
            (Kind::Decrementer, true) => return borrowed(a, 0, carry(true), mask),
        };
        let (sum, over) = a.overflowing_add(other);
        let (sum, over_again) = sum.overflowing_add(u128::from(carry));
        (sum & mask, over || over_again || sum > mask)
    }

    /// Compares the values of 64 patterns with integer arithmetic; up to 128 bits.
    pub fn check(&self, values: &[u64]) -> Result<(), String> {
        let read = |nets: &[Net], lane: usize| read(values, nets, lane);
        for lane in 0..64 {
            let (a, b) = (read(&self.a, lane), read(&self.b, lane));
            let bit = |net: Net| values[net.index()] >> lane & 1 == 1;
            let (sum, carry) = self.expected(a, b, self.carry_in.map(bit));
            let found = read(&self.sums, lane);
            if found != sum {
                return Err(format!("{a:x} with {b:x} gives {found:x}, not {sum:x}"));
            }
            if self.carry_out.is_some_and(|net| bit(net) != carry) {
                return Err(format!("{a:x} with {b:x}: the carry-out is not {carry}"));
            }
        }
        Ok(())
    }
}

/// The number on a bus in one of 64 patterns.
pub(super) fn read(values: &[u64], nets: &[Net], lane: usize) -> u128 {
    nets.iter().enumerate().fold(0u128, |word, (i, net)| {
        word | u128::from(values[net.index()] >> lane & 1) << i
    })
}

/// `a - b - borrow`, and whether it is below 0.
fn borrowed(a: u128, b: u128, borrow: bool, mask: u128) -> (u128, bool) {
    let difference = a.wrapping_sub(b).wrapping_sub(u128::from(borrow));
    (difference & mask, a < b || borrow && a == b)
}

impl Generated {
    /// A circuit with its truths; gates that nothing reads are dropped.
    pub fn new(label: String, mut circuit: Circuit, truths: Vec<Truth>) -> Self {
        circuit.drop_unread();
        Self {
            label,
            circuit,
            truths,
            comparisons: Vec::new(),
            products: Vec::new(),
        }
    }

    /// The same with comparisons known of it.
    #[must_use]
    pub fn with_comparisons(mut self, comparisons: Vec<Comparison>) -> Self {
        self.comparisons = comparisons;
        self
    }

    /// The names of nets.
    pub fn names(&self, nets: &[Net]) -> Vec<String> {
        nets.iter().map(|&net| self.circuit.name_of(net)).collect()
    }

    /// Evaluates the circuit and compares every truth with integer arithmetic:
    /// all patterns when inputs and registers number at most 10, else `rounds`
    /// times 64 patterns, random mixed with long propagate runs.
    pub fn check(&self, rounds: usize) -> Result<(), String> {
        let (inputs, registers) = (self.circuit.inputs.len(), self.circuit.registers.len());
        let free = inputs + registers;
        let mut random = Random::new(1);
        let rounds = if free <= 10 {
            1 << free.saturating_sub(6)
        } else {
            rounds
        };
        for round in 0..rounds {
            let words: Vec<u64> = if free <= 10 {
                (0..free).map(|i| counting(i, round as u64)).collect()
            } else {
                patterns(free, round, &mut random)
            };
            let values = self.circuit.evaluate(&words[..inputs], &words[inputs..]);
            for truth in &self.truths {
                truth
                    .check(&values)
                    .map_err(|fault| format!("{}: {fault}", self.label))?;
            }
            let comparisons = self.comparisons.iter().map(|c| c.check(&values));
            let products = self.products.iter().map(|p| p.check(&values));
            for outcome in comparisons.chain(products) {
                outcome.map_err(|fault| format!("{}: {fault}", self.label))?;
            }
        }
        Ok(())
    }
}

/// The word of input `i` when 64 consecutive numbers are applied from `64 * block`.
fn counting(i: usize, block: u64) -> u64 {
    match i {
        0..6 => (0..64).fold(0, |word, lane| word | (lane >> i & 1) << lane),
        _ => (block >> (i - 6) & 1).wrapping_neg(),
    }
}

/// Random words; every other round neighbouring inputs are mostly opposite or
/// mostly equal in alternation, which makes carries run far in either case.
pub fn patterns(count: usize, round: usize, random: &mut Random) -> Vec<u64> {
    let rare = |random: &mut Random| random.word() & random.word() & random.word();
    let (base, other) = (random.word(), random.word());
    (0..count)
        .map(|i| match round % 4 {
            0 => random.word(),
            1 => (if i < count / 2 { base } else { !base }) ^ rare(random),
            2 => (if i % 2 == 0 { base } else { other }) ^ rare(random),
            _ => base ^ rare(random) & rare(random),
        })
        .collect()
}
