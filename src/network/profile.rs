//! What a chain asks of its network: arrivals, required times and what steps
//! cost.
//!
//! Times are ticks of the caller's delay model. Plain schemes ignore all of it;
//! a scheme that shapes itself to its chain reads nothing else, so it is a list
//! entry like any other. Invariant: arrivals are at least [`LONG_BEFORE`], so
//! that sums of times and costs never overflow.

use super::build::Limits;
use crate::netlist::{Function, TruthTable};

/// The arrival of what is always there, a constant for one.
pub const LONG_BEFORE: i32 = i32::MIN / 4;

/// Times and costs for one chain; see the head of the module.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Profile {
    /// When g of each position is ready.
    pub generate: Vec<i32>,
    /// When p of each position is ready.
    pub propagate: Vec<i32>,
    /// When `a ⊕ b` of each position is ready.
    pub half_sum: Vec<i32>,
    /// When the carry-in is ready, where there is one.
    pub carry_in: Option<i32>,
    /// When the results have to be ready, where it is known.
    pub required: Option<Required>,
    /// What steps cost.
    pub costs: Costs,
}

/// Required times by position, `None` where nothing waits. Only differences
/// count where they cannot be met.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Required {
    /// Of each sum.
    pub sums: Vec<Option<i32>>,
    /// Of the carry out of each position.
    pub carries: Vec<Option<i32>>,
}

impl Profile {
    /// Everything ready at once and every gate of `limits` one tick.
    pub fn even(positions: usize, has_carry_in: bool, limits: Limits) -> Self {
        Self {
            generate: vec![0; positions],
            propagate: vec![0; positions],
            half_sum: vec![0; positions],
            carry_in: has_carry_in.then_some(0),
            required: None,
            costs: Costs::even(limits),
        }
    }

    /// Number of positions, the carry-in not counted.
    pub fn positions(&self) -> usize {
        self.generate.len()
    }

    /// Whether there is a carry-in.
    pub fn has_carry_in(&self) -> bool {
        self.carry_in.is_some()
    }
}

/// What one step costs, in ticks.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Costs {
    limits: Limits,
    /// By inputs, from 2 up to the limit; wider gates are trees.
    and: Vec<i32>,
    or: Vec<i32>,
    /// A two-input XOR.
    pub xor: i32,
    /// `choose ? x : y`, from what decides.
    pub select_choose: i32,
    /// `choose ? x : y`, from either value.
    pub select_value: i32,
    /// With covers, one cover of k spans' G by k, from its latest pin.
    spans: Option<Vec<i32>>,
}

/// Widest gate that is priced by itself.
const WIDEST: usize = 64;

impl Costs {
    /// Every gate one tick, an XOR and a select with covers too.
    pub fn even(limits: Limits) -> Self {
        Self::of(limits, false, |function| vec![1; function.inputs()])
    }

    /// Costs by the pin delays of functions. With `ands_only` an XOR and a
    /// select are two levels of AND, as in an AND/inverter graph.
    pub fn of(
        limits: Limits,
        ands_only: bool,
        mut price: impl FnMut(&Function) -> Vec<i32>,
    ) -> Self {
        let most = limits.gate_inputs.clamp(2, WIDEST);
        let mut latest = |function: &Function| price(function).into_iter().max().unwrap_or(0);
        let (mut and, mut or) = (Vec::new(), Vec::new());
        for inputs in 2..=most {
            and.push(latest(&Function::product(&vec![false; inputs], false)));
            or.push(latest(&Function::product(&vec![true; inputs], true)));
        }
        let xor = if ands_only {
            and[0] + or[0]
        } else {
            latest(&Function::parity(2, false))
        };
        let width = limits.gate_inputs.min(TruthTable::MAX_INPUTS);
        let covers = limits.covers && width >= 3;
        let (mut select_choose, mut select_value) = (and[0] + or[0], and[0] + or[0]);
        let mut spans = None;
        if covers {
            // Pins: choose, value at 1, value at 0.
            let select = TruthTable::new(3, 0b1101_1000);
            let pins = price(&Function::Table(select));
            select_choose = pins[0];
            select_value = pins[1].max(pins[2]);
            let joined = (2..=width.div_ceil(2)).map(|parts| {
                let table = joined_generate(parts);
                price(&Function::Table(table))
                    .into_iter()
                    .max()
                    .unwrap_or(0)
            });
            spans = Some(joined.collect());
        }
        Self {
            limits,
            and,
            or,
            xor,
            select_choose,
            select_value,
            spans,
        }
    }

    /// What one new gate may be.
    pub fn limits(&self) -> Limits {
        self.limits
    }

    /// AND of so many inputs that are ready together, a tree past the limit;
    /// 0 for one.
    pub fn and(&self, inputs: usize) -> i32 {
        tree(&self.and, inputs)
    }

    /// OR of so many inputs that are ready together, a tree past the limit;
    /// 0 for one.
    pub fn or(&self, inputs: usize) -> i32 {
        tree(&self.or, inputs)
    }

    /// G of so many joined spans, from the G of the uppermost.
    pub fn from_upper(&self, spans: usize) -> i32 {
        self.one_cover(spans).unwrap_or_else(|| self.or(spans))
    }

    /// G of so many joined spans, from any G or P below the uppermost G.
    pub fn from_lower(&self, spans: usize) -> i32 {
        let two_levels = || self.and(spans) + self.or(spans);
        self.one_cover(spans).unwrap_or_else(two_levels)
    }

    fn one_cover(&self, spans: usize) -> Option<i32> {
        let list = self.spans.as_ref()?;
        list.get(spans.checked_sub(2)?).copied()
    }
}

/// Levels of a tree of priced gates, all inputs ready together.
fn tree(prices: &[i32], inputs: usize) -> i32 {
    let widest = prices.len() + 1;
    let (mut left, mut cost) = (inputs, 0);
    while left > 1 {
        let width = left.min(widest);
        cost += prices[width - 2];
        left = left.div_ceil(width);
    }
    cost
}

/// `G1 + P1·(G2 + P2·…)` of so many spans: pins G1, P1, G2, P2, …, the lowest
/// by its G alone.
fn joined_generate(spans: usize) -> TruthTable {
    let inputs = 2 * spans - 1;
    let mut bits = 0u64;
    for minterm in 0..1u64 << inputs {
        let pin = |i: usize| minterm >> i & 1 == 1;
        let mut value = pin(inputs - 1);
        for upper in (0..spans - 1).rev() {
            value = pin(2 * upper) || pin(2 * upper + 1) && value;
        }
        bits |= u64::from(value) << minterm;
    }
    TruthTable::new(inputs, bits)
}
