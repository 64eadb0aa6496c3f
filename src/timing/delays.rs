//! The delay of every pin of every gate of one netlist under one model.
//!
//! Functions are interned, so each is priced once. Where delay does not depend on
//! load, a gate's delays are those of its function. Where it does, the loads of
//! all nets are added up in one pass over the gates and every pin gets a delay of
//! its own, in the layout of the netlist's fan-ins: four bytes a pin, and the
//! passes over the gates look the same.

use super::model::DelayModel;
use crate::netlist::{FunctionId, GateId, Netlist, PinPrice, Shape};

/// See the head of the module.
pub struct PinDelays {
    model: DelayModel,
    starts: Vec<u32>,
    /// By pin of a function; empty where delay depends on load.
    ticks: Vec<i32>,
    loaded: Option<Loaded>,
}

/// What is known where delay depends on load.
pub struct Loaded {
    /// By pin of a function, in the order of the functions.
    prices: Vec<PinPrice>,
    /// By net.
    loads: Vec<i32>,
    /// By fan-in of the netlist.
    by_pin: Vec<i32>,
}

impl PinDelays {
    /// The delays of `netlist`.
    pub fn of(netlist: &Netlist, model: DelayModel) -> Self {
        if model.depends_on_load() {
            return Self::under_load(netlist, model);
        }
        let (mut starts, mut ticks) = (vec![0], Vec::new());
        for id in 0..netlist.function_count() {
            let id = FunctionId::new(id);
            match netlist.declared_delays(id) {
                Some(own) => ticks.extend(
                    own.iter()
                        .map(|own| own.saturating_mul(model.ticks_per_unit())),
                ),
                None => ticks.extend(model.pin_delays(netlist.function_of(id))),
            }
            starts.push(ticks.len() as u32);
        }
        Self {
            model,
            starts,
            ticks,
            loaded: None,
        }
    }

    /// As `unit`, but buffers and inverters cost nothing.
    pub fn free_buffers(netlist: &Netlist) -> Self {
        let (mut starts, mut ticks) = (vec![0], Vec::new());
        for id in 0..netlist.function_count() {
            let id = FunctionId::new(id);
            let function = netlist.function_of(id);
            let free = matches!(function.shape(), Shape::Buffer | Shape::Inverter);
            match netlist.declared_delays(id) {
                Some(own) => ticks.extend(own),
                None => ticks.resize(ticks.len() + function.inputs(), i32::from(!free)),
            }
            starts.push(ticks.len() as u32);
        }
        Self {
            model: DelayModel::Unit,
            starts,
            ticks,
            loaded: None,
        }
    }

    fn under_load(netlist: &Netlist, model: DelayModel) -> Self {
        let free_inversions = netlist.has_inverted_edges();
        let (mut starts, mut prices) = (vec![0], Vec::new());
        for id in 0..netlist.function_count() {
            let id = FunctionId::new(id);
            match netlist.declared_delays(id) {
                Some(own) => prices.extend(own.iter().map(|&own| model.declared_price(own))),
                None => prices.extend(model.prices_in(netlist, id, free_inversions)),
            }
            starts.push(prices.len() as u32);
        }
        let mut delays = Self {
            model,
            starts,
            ticks: Vec::new(),
            loaded: None,
        };
        let mut loads = vec![0_i32; netlist.net_count()];
        for gate in netlist.gates() {
            // What only passes the delay of a box on is the box, counted below.
            let passage = netlist.declared().and_then(|own| own.passage(gate));
            if passage.is_some() {
                continue;
            }
            let own = &prices[delays.range(netlist, gate)];
            for (net, price) in netlist.fan_ins(gate).iter().zip(own) {
                let load = &mut loads[net.index()];
                *load = load.saturating_add(price.load);
            }
        }
        let outputs = netlist.outputs().iter().map(|output| output.signal.net);
        let registers = netlist.registers().iter();
        let registers = registers.flat_map(|each| [Some(each.input.net), each.control]);
        let boxes = netlist.boxes().iter().flat_map(|each| &each.inputs);
        for net in outputs.chain(registers.flatten()).chain(boxes.copied()) {
            let load = &mut loads[net.index()];
            *load = load.saturating_add(model.end_load());
        }
        let mut by_pin = Vec::with_capacity(netlist.fan_in_count());
        for gate in netlist.gates() {
            let load = loads[netlist.gate_output(gate).index()];
            let own = &prices[delays.range(netlist, gate)];
            by_pin.extend(own.iter().map(|price| price.delay.at(load)));
        }
        delays.loaded = Some(Loaded {
            prices,
            loads,
            by_pin,
        });
        delays
    }

    #[inline]
    fn range(&self, netlist: &Netlist, gate: GateId) -> std::ops::Range<usize> {
        let i = netlist.function_id(gate).index();
        self.starts[i] as usize..self.starts[i + 1] as usize
    }

    /// The model the delays come from.
    pub fn model(&self) -> DelayModel {
        self.model
    }

    /// The delays of one gate, pin 0 first.
    #[inline]
    pub fn of_gate(&self, netlist: &Netlist, gate: GateId) -> &[i32] {
        match &self.loaded {
            None => &self.ticks[self.range(netlist, gate)],
            Some(loaded) => &loaded.by_pin[netlist.fan_in_range(gate)],
        }
    }

    /// What is known of loads, where delay depends on them.
    pub fn loaded(&self) -> Option<&Loaded> {
        self.loaded.as_ref()
    }

    /// The prices of one gate's pins, where delay depends on load.
    pub fn prices_of(&self, netlist: &Netlist, gate: GateId) -> &[PinPrice] {
        match &self.loaded {
            None => &[],
            Some(loaded) => &loaded.prices[self.range(netlist, gate)],
        }
    }
}

impl Loaded {
    /// The load on every net.
    pub fn loads(&self) -> &[i32] {
        &self.loads
    }
}
