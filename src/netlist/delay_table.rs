//! What a file says about delays: prices by number of inputs, and of the cells of
//! a library by name and pin.
//!
//! Plain data, made by a reader of such files and used by whoever prices gates. A
//! gate that no cell is named for is priced by its number of inputs, so that every
//! gate of every netlist has a price, and so have gates that are only planned.
//!
//! Invariant: there is at least one entry by number of inputs, and entries ascend.

use super::function::{Function, Shape};
use super::price::{Curve, PinPrice};
use std::collections::BTreeMap;

/// What one cell costs.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct CellDelays {
    /// By output and input pin.
    pub arcs: BTreeMap<(Vec<u8>, Vec<u8>), Curve>,
    /// What an input pin loads its net with; a pin not listed loads as any does.
    pub loads: BTreeMap<Vec<u8>, i32>,
}

/// A price for gates of so many inputs.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Entry {
    /// How many inputs.
    pub inputs: usize,
    /// What each of them costs.
    pub price: PinPrice,
}

/// See the head of the module.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct DelayTable {
    /// `delay-table` or `library`.
    pub kind: &'static str,
    /// What times are counted in.
    pub unit: String,
    /// How the figures came about, as a clause for a report.
    pub note: String,
    /// Any gate, by number of inputs.
    pub gates: Vec<Entry>,
    /// Exclusive-ors and their complements; empty where they cost what any does.
    pub parities: Vec<Entry>,
    /// Functions of more than one operator; empty where they cost what any does.
    pub covers: Vec<Entry>,
    /// Cells by name.
    pub cells: BTreeMap<Vec<u8>, CellDelays>,
    /// What a pin loads its net with when nothing else is said.
    pub pin_load: i32,
    /// What an output port, a register or a box loads its net with.
    pub end_load: i32,
}

impl DelayTable {
    /// The price of every pin of a gate that is no cell.
    pub fn of_function(&self, function: &Function) -> Vec<PinPrice> {
        let inputs = function.inputs();
        let own = match function.shape() {
            Shape::Constant(_) => return vec![PinPrice::without_load(0); inputs],
            Shape::Parity => &self.parities,
            Shape::Other => &self.covers,
            Shape::Buffer | Shape::Inverter | Shape::Product => &self.gates,
        };
        let entries = if own.is_empty() { &self.gates } else { own };
        vec![of_inputs(entries, inputs); inputs]
    }

    /// The price of every pin of a cell's gate; a pair of pins that is not listed
    /// costs what a gate of as many inputs does.
    pub fn of_cell(
        &self,
        function: &Function,
        cell: &[u8],
        output: &[u8],
        inputs: &[Vec<u8>],
    ) -> Vec<PinPrice> {
        let mut prices = self.of_function(function);
        let Some(known) = self.cells.get(cell) else {
            return prices;
        };
        for (price, input) in prices.iter_mut().zip(inputs) {
            if let Some(curve) = known.arcs.get(&(output.to_owned(), input.clone())) {
                price.delay = curve.clone();
            }
            if let Some(&load) = known.loads.get(input) {
                price.load = load;
            }
        }
        prices
    }

    /// Whether a pair of pins of a cell is listed.
    pub fn lists(&self, cell: &[u8]) -> bool {
        self.cells.contains_key(cell)
    }
}

/// The entry for as many inputs or the next more; past the widest a tree of it, of
/// as many levels as are needed.
fn of_inputs(entries: &[Entry], inputs: usize) -> PinPrice {
    let Some(widest) = entries.last() else {
        return PinPrice::without_load(0);
    };
    if let Some(entry) = entries.iter().find(|entry| entry.inputs >= inputs) {
        return entry.price.clone();
    }
    let (mut levels, mut reach) = (1_i32, widest.inputs.max(2));
    while reach < inputs {
        reach = reach.saturating_mul(widest.inputs.max(2));
        levels += 1;
    }
    let inner = widest.price.delay.at(widest.price.load);
    PinPrice {
        delay: widest.price.delay.later(inner.saturating_mul(levels - 1)),
        load: widest.price.load,
    }
}
