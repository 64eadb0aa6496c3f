//! Delay models: what a gate costs.
//!
//! A model prices a *function*, pin by pin, in whole ticks. `unit` and `pairs`
//! look at nothing else; their prices do not depend on polarity either. Under the
//! others delay grows with the load on a gate's output: the price of a pin is then
//! a curve over that load and the pin is a load itself (see [`PinPrice`]).
//!
//! Method: `unit` is common practice; `pairs` counts the levels of a two-input
//! form, the published way to compare wide with narrow gates; `logical-effort` is
//! that of Sutherland, Sproull and Harris (1999), see [`super::effort`].

use super::effort;
use super::factored;
use super::time::Time;
use crate::netlist::{DelayTable, Function, FunctionId, Netlist, PinPrice, Shape, TruthTable};

/// How gates are priced.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum DelayModel {
    /// Every gate 1, buffers and inverters too.
    Unit,
    /// Two-input levels: a product or parity of k inputs ⌈log2 k⌉, a one-input
    /// gate 0, any other function the depth of its factored two-input form.
    Pairs,
    /// d = g·h + p in τ, every gate at unit drive and h from what reads it.
    LogicalEffort,
    /// What a file says.
    Table(TableModel),
}

/// A table as a model. It is kept for as long as the program runs, so that a model
/// stays a plain copy; a run reads one.
#[derive(Clone, Copy, Debug)]
pub struct TableModel(&'static DelayTable);

impl PartialEq for TableModel {
    fn eq(&self, other: &Self) -> bool {
        std::ptr::eq(self.0, other.0)
    }
}

impl Eq for TableModel {}

impl std::hash::Hash for TableModel {
    fn hash<H: std::hash::Hasher>(&self, state: &mut H) {
        std::ptr::hash(self.0, state);
    }
}

impl DelayModel {
    /// Every model that needs no file, in the order they are offered.
    pub const ALL: [Self; 3] = [Self::Unit, Self::Pairs, Self::LogicalEffort];

    /// The model of a table.
    pub fn table(table: DelayTable) -> Self {
        Self::Table(TableModel(Box::leak(Box::new(table))))
    }

    /// The table of the model, when it is one.
    pub fn as_table(self) -> Option<&'static DelayTable> {
        match self {
            Self::Table(TableModel(table)) => Some(table),
            _ => None,
        }
    }

    /// The word used on the command line and in records.
    pub fn name(self) -> &'static str {
        match self {
            Self::Unit => "unit",
            Self::Pairs => "pairs",
            Self::LogicalEffort => "logical-effort",
            Self::Table(TableModel(table)) => table.kind,
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
            Self::LogicalEffort => "τ",
            Self::Table(TableModel(table)) => &table.unit,
        }
    }

    /// Ticks in one unit: 1 where whole units are counted, else 1000.
    pub fn ticks_per_unit(self) -> i32 {
        match self {
            Self::Unit | Self::Pairs => 1,
            Self::LogicalEffort | Self::Table(_) => 1000,
        }
    }

    /// Whether delay depends on what reads a gate.
    pub fn depends_on_load(self) -> bool {
        match self {
            Self::Unit | Self::Pairs => false,
            Self::LogicalEffort | Self::Table(_) => true,
        }
    }

    /// What an output port, a register or a box loads its net with.
    pub(super) fn end_load(self) -> i32 {
        match self {
            Self::Unit | Self::Pairs => 0,
            // One inverter; common practice, no source.
            Self::LogicalEffort => 1000,
            Self::Table(TableModel(table)) => table.end_load,
        }
    }

    /// The load assumed of a gate whose readers are not known yet: two pins of
    /// two-input NANDs.
    fn assumed_load(self) -> i32 {
        match self {
            Self::Unit | Self::Pairs => 0,
            Self::LogicalEffort => 2667,
            Self::Table(TableModel(table)) => table.pin_load.saturating_mul(2),
        }
    }

    /// What counts as one level, in ticks: a gate where gates are counted, an inverter
    /// that drives four under logical effort, and a two-input gate under the load
    /// assumed where a file says what it takes.
    pub fn level(self) -> i32 {
        match self {
            Self::Unit | Self::Pairs => 1,
            Self::LogicalEffort => effort::FO4 as i32 * self.ticks_per_unit(),
            Self::Table(_) => self.pin_delay(&Function::product(&[false; 2], true), 0),
        }
    }

    /// The least that a new gate of `inputs` inputs can delay any of them.
    pub fn least_delay(self, inputs: usize) -> i32 {
        let product = Function::product(&vec![false; inputs], true);
        let parity = (2..=TruthTable::MAX_INPUTS)
            .contains(&inputs)
            .then(|| Function::parity(inputs, false));
        let least = [Some(product), parity]
            .into_iter()
            .flatten()
            .flat_map(|function| {
                let prices = self.prices(&function, true);
                prices
                    .into_iter()
                    .map(|price| price.delay.at(self.end_load()))
            });
        least.min().unwrap_or(0)
    }

    /// The least that a two-input exclusive-or can delay.
    pub fn least_parity_delay(self) -> i32 {
        let prices = self.prices(&Function::parity(2, false), true);
        let delays = prices.iter().map(|price| price.delay.at(self.end_load()));
        delays.min().unwrap_or(0)
    }

    /// Whether it measures time and does not count levels: then times that a file
    /// states mean something.
    pub fn counts_time(self) -> bool {
        self.ticks_per_unit() > 1
    }

    /// Ticks as a time in the unit of the model.
    pub fn time(self, ticks: i32) -> Time {
        Time::of_ticks(ticks, self.ticks_per_unit())
    }

    /// The price of every pin of `function`, pin 0 first, where delay depends on
    /// load. `free_inversions` is that of the netlist, see
    /// [`Netlist::has_inverted_edges`](crate::netlist::Netlist::has_inverted_edges).
    pub fn prices(self, function: &Function, free_inversions: bool) -> Vec<PinPrice> {
        match self {
            Self::Unit | Self::Pairs => self
                .pin_delays(function)
                .into_iter()
                .map(PinPrice::without_load)
                .collect(),
            Self::LogicalEffort => effort::prices(function, free_inversions),
            Self::Table(TableModel(table)) => table.of_function(function),
        }
    }

    /// The same for an interned function, which may be that of a cell.
    pub(super) fn prices_in(
        self,
        netlist: &Netlist,
        id: FunctionId,
        free_inversions: bool,
    ) -> Vec<PinPrice> {
        let function = netlist.function_of(id);
        match (self, netlist.cell_pins(id)) {
            (Self::Table(TableModel(table)), Some(pins)) => {
                table.of_cell(function, &pins.cell, &pins.output, &pins.inputs)
            }
            _ => self.prices(function, free_inversions),
        }
    }

    /// The price of a pin whose delay was declared, in whole units: it loads what an
    /// end of a path does.
    pub(super) fn declared_price(self, delay: i32) -> PinPrice {
        PinPrice {
            load: self.end_load(),
            ..PinPrice::without_load(delay.saturating_mul(self.ticks_per_unit()))
        }
    }

    /// The delay from each pin of `function` to its output, in ticks; where delay
    /// depends on load, under an assumed one, for what is not placed yet.
    pub fn pin_delays(self, function: &Function) -> Vec<i32> {
        let pins = function.inputs();
        match self {
            Self::Unit => vec![1; pins],
            Self::Pairs => match function.shape() {
                Shape::Constant(_) | Shape::Buffer | Shape::Inverter => vec![0; pins],
                Shape::Product | Shape::Parity => vec![levels(pins); pins],
                Shape::Other => factored::pin_depths(function),
            },
            // Polarities are not settled either, so inversions count as free.
            Self::LogicalEffort | Self::Table(_) => self
                .prices(function, true)
                .iter()
                .map(|price| price.delay.at(self.assumed_load()))
                .collect(),
        }
    }

    /// The delay from one pin, see [`Self::pin_delays`];
    /// [`PinDelays`](super::PinDelays) is for many.
    pub fn pin_delay(self, function: &Function, pin: usize) -> i32 {
        self.pin_delays(function)[pin]
    }
}

/// ⌈log2 k⌉ for k ≥ 1.
fn levels(inputs: usize) -> i32 {
    (usize::BITS - (inputs.max(1) - 1).leading_zeros()) as i32
}
