//! Delay models and the delay of every pin under one of them.
//!
//! A model prices a *function*, pin by pin, in whole ticks. Functions of a
//! netlist are interned, so [`PinDelays`] prices each once and a pass over the
//! gates only looks up. Invariant: a function, its complement and the same
//! function with pins read inverted cost the same, because a planned gate may
//! be written in any of these polarities.
//!
//! Method: `unit` is common practice; `pairs` counts the levels of a two-input
//! form, the published way to compare wide with narrow gates.

use super::factored;
use super::time::Time;
use crate::netlist::{Function, FunctionId, GateId, Netlist, Shape};

/// How gates are priced.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum DelayModel {
    /// Every gate 1, buffers and inverters too.
    Unit,
    /// Two-input levels: a product or parity of k inputs ⌈log2 k⌉, a one-input
    /// gate 0, any other function the depth of its factored two-input form.
    Pairs,
}

impl DelayModel {
    /// Every model, in the order they are offered.
    pub const ALL: [Self; 2] = [Self::Unit, Self::Pairs];

    /// The word used on the command line and in records.
    pub fn name(self) -> &'static str {
        match self {
            Self::Unit => "unit",
            Self::Pairs => "pairs",
        }
    }

    /// The model of that name.
    pub fn from_name(name: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|model| model.name() == name)
    }

    /// What a delay is counted in, plural.
    pub fn unit_word(self) -> &'static str {
        match self {
            Self::Unit => "gate delays",
            Self::Pairs => "two-input levels",
        }
    }

    /// Ticks in one unit: both models here count whole units.
    pub fn ticks_per_unit(self) -> i32 {
        1
    }

    /// Ticks as a time in the unit of the model.
    pub fn time(self, ticks: i32) -> Time {
        Time::of_ticks(ticks, self.ticks_per_unit())
    }

    /// The delay from each pin of `function` to its output, in ticks.
    pub fn pin_delays(self, function: &Function) -> Vec<i32> {
        let pins = function.inputs();
        match self {
            Self::Unit => vec![1; pins],
            Self::Pairs => match function.shape() {
                Shape::Constant(_) | Shape::Buffer | Shape::Inverter => vec![0; pins],
                Shape::Product | Shape::Parity => vec![levels(pins); pins],
                Shape::Other => factored::pin_depths(function),
            },
        }
    }

    /// The delay from one pin; [`PinDelays`] is for many.
    pub fn pin_delay(self, function: &Function, pin: usize) -> i32 {
        self.pin_delays(function)[pin]
    }
}

/// ⌈log2 k⌉ for k ≥ 1.
fn levels(inputs: usize) -> i32 {
    (usize::BITS - (inputs.max(1) - 1).leading_zeros()) as i32
}

/// The delay of every pin of every function of one netlist.
pub struct PinDelays {
    model: DelayModel,
    starts: Vec<u32>,
    ticks: Vec<i32>,
}

impl PinDelays {
    /// Prices the functions of `netlist`.
    pub fn of(netlist: &Netlist, model: DelayModel) -> Self {
        Self::priced(netlist, model, |function| model.pin_delays(function))
    }

    /// As `unit`, but buffers and inverters cost nothing.
    pub fn free_buffers(netlist: &Netlist) -> Self {
        Self::priced(netlist, DelayModel::Unit, |function| {
            let free = matches!(function.shape(), Shape::Buffer | Shape::Inverter);
            vec![i32::from(!free); function.inputs()]
        })
    }

    fn priced(netlist: &Netlist, model: DelayModel, price: impl Fn(&Function) -> Vec<i32>) -> Self {
        let (mut starts, mut ticks) = (vec![0], Vec::new());
        for id in 0..netlist.function_count() {
            let id = FunctionId::new(id);
            match netlist.declared_delays(id) {
                Some(own) => ticks.extend(own.iter().map(|own| own * model.ticks_per_unit())),
                None => ticks.extend(price(netlist.function_of(id))),
            }
            starts.push(ticks.len() as u32);
        }
        Self {
            model,
            starts,
            ticks,
        }
    }

    /// The model the delays come from.
    pub fn model(&self) -> DelayModel {
        self.model
    }

    /// The delays of one gate, pin 0 first.
    #[inline]
    pub fn of_gate(&self, netlist: &Netlist, gate: GateId) -> &[i32] {
        let i = netlist.function_id(gate).index();
        &self.ticks[self.starts[i] as usize..self.starts[i + 1] as usize]
    }
}
