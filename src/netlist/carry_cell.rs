//! Library cells declared carry cells, with their own delays from pin to pin.
//!
//! Such a cell does what its library says and takes the times that were declared,
//! whatever the delay model says of its gates. The cell's body is rewritten once,
//! before it is put in place: an output that reads pins only keeps its gate and
//! gets the delays; any other is worked out on nets inside, which no path may pass,
//! and shown by a gate that reads the result and, for the time they take, the input
//! pins it depends on.
//!
//! Invariant: every input an output depends on has a delay; a pair left out is
//! refused, since a guess there would be a guess on the carry path itself.

use super::assume::{Item, Misfit};
use super::builder::{NetlistBuilder, TooLarge};
use super::cell::Cells;
use super::function::{Cover, Function, TruthTable};
use super::graph::Topology;
use super::id::{GateId, NetId, ScopeId};
use super::model::{Driver, Netlist, Signal};
use super::pattern::Pattern;
use rustc_hash::FxHashMap;
use std::collections::BTreeSet;

/// Cells declared carry cells.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct CarryCell {
    /// Which cells of the library.
    pub cell: Pattern,
    /// Their delays; where several name a pair of pins the last holds.
    pub delays: Vec<PinPair>,
    /// Why.
    pub why: String,
}

/// A delay from pins to pins.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct PinPair {
    /// From these input pins.
    pub from: Pattern,
    /// To these output pins.
    pub to: Pattern,
    /// How long, in whole units of the delay model.
    pub delay: i32,
}

impl Cells {
    /// Declares cells carry cells.
    ///
    /// # Errors
    /// When an entry names no cell or pin of the library, leaves a pair out, or
    /// names a cell that stores something.
    pub fn declare_carry(&mut self, entries: &[CarryCell]) -> Result<(), Misfit> {
        for (entry, declared) in entries.iter().enumerate() {
            let mut names: Vec<Vec<u8>> = self
                .names()
                .filter(|name| declared.cell.matches(&String::from_utf8_lossy(name)))
                .map(<[u8]>::to_vec)
                .collect();
            names.sort_unstable();
            if names.is_empty() {
                return Err(Misfit::NoMatch {
                    item: Item::CarryCell(entry),
                    pattern: declared.cell.text().to_owned(),
                    what: "a cell of the library with a function",
                });
            }
            let mut used = vec![[false; 2]; declared.delays.len()];
            for name in names {
                let Some(cell) = self.get(&name) else {
                    continue;
                };
                let body = rewrite(cell, declared, entry, &mut used)?;
                self.replace(&name, body);
            }
            for (pair, used) in used.iter().enumerate() {
                let each = &declared.delays[pair];
                let missing = match used {
                    [false, _] => (Item::CarryFrom(entry, pair), &each.from, "an input pin"),
                    [_, false] => (Item::CarryTo(entry, pair), &each.to, "an output pin"),
                    _ => continue,
                };
                let (item, pattern, what) = missing;
                return Err(Misfit::NoMatch {
                    item,
                    pattern: pattern.text().to_owned(),
                    what,
                });
            }
        }
        Ok(())
    }
}

fn pin_name(cell: &Netlist, net: NetId) -> String {
    let name = cell.local_name(net);
    name.map_or_else(String::new, |name| cell.names().text(name).into_owned())
}

/// The input nets that every net of a cell depends on.
fn supports(cell: &Netlist, topology: &Topology) -> Vec<BTreeSet<NetId>> {
    let mut supports = vec![BTreeSet::new(); cell.net_count()];
    for &input in cell.inputs() {
        supports[input.index()].insert(input);
    }
    for &gate in &topology.order {
        let mut all = BTreeSet::new();
        for net in cell.fan_ins(gate) {
            all.extend(supports[net.index()].iter().copied());
        }
        supports[cell.gate_output(gate).index()].extend(all);
    }
    supports
}

/// The body of `cell` with the declared delays.
fn rewrite(
    cell: &Netlist,
    declared: &CarryCell,
    entry: usize,
    used: &mut [[bool; 2]],
) -> Result<Netlist, Misfit> {
    let shown = || {
        let name = cell.model().map(|name| cell.names().text(name));
        name.unwrap_or_default().into_owned()
    };
    let topology = Topology::of(cell);
    if !cell.registers().is_empty() || topology.cut.count_ones(..) > 0 {
        return Err(Misfit::NotPlain {
            item: Item::CarryCell(entry),
            cell: shown(),
        });
    }
    let supports = supports(cell, &topology);
    let mut delays: FxHashMap<(NetId, NetId), i32> = FxHashMap::default();
    for output in cell.outputs() {
        let net = output.signal.net;
        if !matches!(cell.driver(net), Driver::Gate(_)) {
            continue;
        }
        let to = pin_name(cell, net);
        for &input in &supports[net.index()] {
            let from = pin_name(cell, input);
            for (pair, each) in declared.delays.iter().enumerate() {
                if each.from.matches(&from) && each.to.matches(&to) {
                    delays.insert((input, net), each.delay);
                    used[pair] = [true; 2];
                }
            }
            if !delays.contains_key(&(input, net)) {
                return Err(Misfit::NoDelay {
                    item: Item::CarryCell(entry),
                    cell: shown(),
                    from,
                    to,
                });
            }
        }
    }
    note_names(cell, declared, used);
    Rewriter::new(cell, entry, &delays)
        .and_then(|rewriter| rewriter.run(&topology, &supports))
        .map_err(|_| Misfit::NotPlain {
            item: Item::CarryCell(entry),
            cell: shown(),
        })
}

/// Notes which patterns name a pin at all, so that the message about one that does
/// nothing is about the right side.
fn note_names(cell: &Netlist, declared: &CarryCell, used: &mut [[bool; 2]]) {
    for (each, used) in declared.delays.iter().zip(used) {
        let mut inputs = cell.inputs().iter();
        used[0] |= inputs.any(|&net| each.from.matches(&pin_name(cell, net)));
        let mut outputs = cell.outputs().iter();
        used[1] |= outputs.any(|output| each.to.matches(&pin_name(cell, output.signal.net)));
    }
}

struct Rewriter<'a> {
    cell: &'a Netlist,
    entry: usize,
    delays: &'a FxHashMap<(NetId, NetId), i32>,
    builder: NetlistBuilder,
    /// Where a pin of the cell is shown.
    outside: Vec<NetId>,
    /// What the gates inside read.
    inside: Vec<NetId>,
    first: Option<GateId>,
}

impl<'a> Rewriter<'a> {
    fn new(
        cell: &'a Netlist,
        entry: usize,
        delays: &'a FxHashMap<(NetId, NetId), i32>,
    ) -> Result<Self, TooLarge> {
        let mut builder = NetlistBuilder::new();
        if let Some(model) = cell.model() {
            let name = builder.name(cell.names().bytes(model));
            builder.set_model(name);
        }
        let mut outside = Vec::with_capacity(cell.net_count());
        for net in cell.nets() {
            let name = cell
                .local_name(net)
                .map(|name| builder.name(cell.names().bytes(name)));
            outside.push(match cell.driver(net) {
                Driver::Constant(value) => builder.constant(value)?,
                _ => builder.add_net(name, ScopeId::new(0))?,
            });
        }
        for &net in cell.inputs() {
            builder.add_input(outside[net.index()], 0);
        }
        for output in cell.outputs() {
            let name = output
                .name
                .map(|name| builder.name(cell.names().bytes(name)));
            let signal = Signal {
                net: outside[output.signal.net.index()],
                ..output.signal
            };
            builder.add_output(signal, name, output.line);
        }
        Ok(Self {
            cell,
            entry,
            delays,
            builder,
            inside: outside.clone(),
            outside,
            first: None,
        })
    }

    fn run(
        mut self,
        topology: &Topology,
        supports: &[BTreeSet<NetId>],
    ) -> Result<Netlist, TooLarge> {
        let cell = self.cell;
        let mut read_inside = vec![false; cell.net_count()];
        for gate in cell.gates() {
            for net in cell.fan_ins(gate) {
                read_inside[net.index()] = true;
            }
        }
        let is_output = |net: NetId| cell.outputs().iter().any(|out| out.signal.net == net);
        for &gate in &topology.order {
            let net = cell.gate_output(gate);
            let from_pins = cell
                .fan_ins(gate)
                .iter()
                .all(|&pin| !matches!(cell.driver(pin), Driver::Gate(_)));
            let shown = is_output(net);
            if shown && from_pins && !read_inside[net.index()] {
                let pins = cell.fan_ins(gate).iter();
                let delays: Vec<i32> = pins.map(|&pin| self.delay(pin, net)).collect();
                let function = cell.function(gate).clone();
                let id = self.builder.function_with_delays(function, &delays);
                self.add(id, cell.fan_ins(gate), self.outside[net.index()])?;
                continue;
            }
            let inner = match shown {
                true => self.builder.add_net(None, ScopeId::new(0))?,
                false => self.outside[net.index()],
            };
            self.inside[net.index()] = inner;
            self.builder.declared().barred.insert(inner);
            let id = self.builder.function(cell.function(gate).clone());
            self.add(id, cell.fan_ins(gate), inner)?;
            if shown {
                let support: Vec<NetId> = supports[net.index()].iter().copied().collect();
                let delays: Vec<i32> = std::iter::once(0)
                    .chain(support.iter().map(|&pin| self.delay(pin, net)))
                    .collect();
                let function = shows_first(delays.len());
                let id = self.builder.function_with_delays(function, &delays);
                let mut pins = vec![net];
                pins.extend(support);
                self.add(id, &pins, self.outside[net.index()])?;
            }
        }
        let end = self.builder.next_gate();
        if let Some(first) = self.first {
            let entry = u32::try_from(self.entry).unwrap_or(u32::MAX);
            let cells = &mut self.builder.declared().carry_cells;
            cells.push((first, end, entry));
        }
        Ok(self.builder.finish())
    }

    fn delay(&self, from: NetId, to: NetId) -> i32 {
        self.delays.get(&(from, to)).copied().unwrap_or(0)
    }

    fn add(
        &mut self,
        function: super::id::FunctionId,
        pins: &[NetId],
        output: NetId,
    ) -> Result<(), TooLarge> {
        let pins: Vec<NetId> = pins.iter().map(|pin| self.inside[pin.index()]).collect();
        let top = ScopeId::new(0);
        let gate = self.builder.add_gate(function, &pins, output, top, 0)?;
        self.first.get_or_insert(gate);
        Ok(())
    }
}

/// Pin 0 of `pins` pins.
pub(super) fn shows_first(pins: usize) -> Function {
    if pins <= TruthTable::MAX_INPUTS {
        Function::Table(TruthTable::new(pins, super::function::PIN[0]))
    } else {
        Function::Cover(Cover::new(pins, false, [[(0, false)]]))
    }
}
