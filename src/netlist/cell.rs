//! Cells of a library put in the place of instances without a function.
//!
//! A cell is itself a small netlist whose ports are the cell's pins. Its gates and
//! registers take the place of the instance, in the instance's scope and at its
//! line; pins of the cell become the nets they are connected to. Without a library
//! the directions of an instance's pins are guesses, so every driver is settled
//! anew: known cells first, then the guess for what is left, in the order read.
//!
//! Invariant: nets keep their ids; gates and registers keep theirs and new ones
//! come after them.

use super::builder::{NetlistBuilder, TooLarge};
use super::function::CellPins;
use super::id::{FunctionId, GateId, NetId};
use super::model::{BlackBox, BoxKind, Driver, Initial, Netlist, Register, Signal};
use rustc_hash::{FxHashMap, FxHashSet};

/// Cells by name.
#[derive(Clone, Default)]
pub struct Cells {
    by_name: FxHashMap<Vec<u8>, Netlist>,
}

/// What binding did.
pub struct Bound {
    /// The netlist with the cells in place.
    pub netlist: Netlist,
    /// Instances that got a function.
    pub instances: usize,
}

/// Why cells do not fit.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
pub enum Unbound {
    /// An instance names a pin its cell does not have.
    #[error("expected a pin of the cell {cell}, found `{pin}`")]
    NoPin {
        /// The cell.
        cell: String,
        /// The pin.
        pin: String,
        /// Line of the instance.
        line: u32,
    },
    /// An instance connects a pin twice.
    #[error("expected the pin {pin} of the cell {cell} connected once, found it connected twice")]
    Twice {
        /// The cell.
        cell: String,
        /// The pin.
        pin: String,
        /// Line of the instance.
        line: u32,
    },
    /// More than a netlist holds, or than was allowed.
    #[error("expected at most {limit} {what} with the cells in place, found more")]
    TooLarge {
        /// What there is too much of.
        what: &'static str,
        /// The most.
        limit: u64,
    },
}

impl From<TooLarge> for Unbound {
    fn from(fault: TooLarge) -> Self {
        Self::TooLarge {
            what: fault.what,
            limit: fault.limit,
        }
    }
}

impl Cells {
    /// Adds a cell; false when one of that name is there already.
    pub fn add(&mut self, name: &[u8], body: Netlist) -> bool {
        let entry = self.by_name.entry(name.to_owned());
        match entry {
            std::collections::hash_map::Entry::Occupied(_) => false,
            std::collections::hash_map::Entry::Vacant(slot) => {
                slot.insert(body);
                true
            }
        }
    }

    /// The names of all cells, in no order.
    pub(super) fn names(&self) -> impl Iterator<Item = &[u8]> {
        self.by_name.keys().map(Vec::as_slice)
    }

    /// The body of a cell.
    pub(super) fn get(&self, name: &[u8]) -> Option<&Netlist> {
        self.by_name.get(name)
    }

    /// Puts another body in the place of a cell's.
    pub(super) fn replace(&mut self, name: &[u8], body: Netlist) {
        self.by_name.insert(name.to_owned(), body);
    }

    /// Number of cells.
    pub fn len(&self) -> usize {
        self.by_name.len()
    }

    /// Whether there are none.
    pub fn is_empty(&self) -> bool {
        self.by_name.is_empty()
    }

    fn of<'c>(&'c self, netlist: &Netlist, each: &BlackBox) -> Option<&'c Netlist> {
        if each.kind == BoxKind::StateTable {
            return None;
        }
        self.by_name.get(netlist.names().bytes(each.model))
    }

    /// Puts the cells in the place of the instances that name them.
    ///
    /// # Errors
    /// When an instance does not fit its cell, or the result has more than
    /// `max_gates` gates.
    pub fn bind(&self, netlist: Netlist, max_gates: u64) -> Result<Bound, Unbound> {
        let known = |each: &BlackBox| self.of(&netlist, each).is_some();
        let instances = netlist.boxes().iter().filter(|each| known(each)).count();
        if instances == 0 {
            return Ok(Bound { netlist, instances });
        }
        let added = netlist
            .boxes()
            .iter()
            .filter_map(|each| self.of(&netlist, each));
        let added: u64 = added.map(|cell| cell.gate_count() as u64 + 2).sum();
        if netlist.gate_count() as u64 + added > max_gates {
            return Err(Unbound::TooLarge {
                what: "gates",
                limit: max_gates,
            });
        }
        let (mut builder, boxes) = NetlistBuilder::reopen(netlist);
        let mut left = Vec::new();
        for each in boxes {
            let name = builder.names().bytes(each.model);
            match self.by_name.get(name) {
                Some(cell) if each.kind != BoxKind::StateTable => place(&mut builder, &each, cell)?,
                _ => left.push(each),
            }
        }
        for each in left {
            let guessed = guess(&builder, each);
            builder.add_box(guessed);
        }
        Ok(Bound {
            netlist: builder.finish(),
            instances,
        })
    }
}

/// An instance that stays: what nothing else drives is taken as driven by it.
fn guess(builder: &NetlistBuilder, mut each: BlackBox) -> BlackBox {
    let nets = each.inputs.iter().chain(&each.outputs).copied();
    let pins: Vec<_> = nets.zip(each.pins.iter().copied()).collect();
    let mut own = FxHashSet::default();
    let (driven, read): (Vec<_>, Vec<_>) = pins
        .into_iter()
        .partition(|&(net, _)| builder.driver(net) == Driver::None && own.insert(net));
    each.inputs = read.iter().map(|&(net, _)| net).collect();
    each.outputs = driven.iter().map(|&(net, _)| net).collect();
    each.pins = read.iter().chain(&driven).map(|&(_, pin)| pin).collect();
    each
}

/// The function of a gate of a cell, with the pins it stands between. What is
/// declared about its delays goes before.
fn cell_function(
    builder: &mut NetlistBuilder,
    each: &BlackBox,
    cell: &Netlist,
    gate: GateId,
) -> FunctionId {
    let id = cell.function_id(gate);
    if cell.declared_delays(id).is_some() {
        return builder.function_from(cell, id);
    }
    let name = |net: NetId| match cell.local_name(net) {
        Some(name) => cell.names().bytes(name).to_vec(),
        None => Vec::new(),
    };
    let pins = CellPins {
        cell: builder.names().bytes(each.model).to_vec(),
        output: name(cell.gate_output(gate)),
        inputs: cell.fan_ins(gate).iter().map(|&net| name(net)).collect(),
    };
    builder.function_of_cell(cell.function_of(id).clone(), pins)
}

fn place(builder: &mut NetlistBuilder, each: &BlackBox, cell: &Netlist) -> Result<(), Unbound> {
    let mut nets: Vec<Option<NetId>> = vec![None; cell.net_count()];
    let mut copies: Vec<(NetId, NetId)> = Vec::new();
    let control = cell
        .registers()
        .iter()
        .find_map(|register| register.control);
    let mut bound = FxHashSet::default();
    let actuals = each.inputs.iter().chain(&each.outputs);
    for (&actual, &pin) in actuals.zip(&each.pins) {
        let text = |name: &[u8]| String::from_utf8_lossy(name).into_owned();
        let formal = builder.names().bytes(pin);
        let told = || (text(builder.names().bytes(each.model)), text(formal));
        if !bound.insert(pin) {
            let (cell, pin) = told();
            let line = each.line;
            return Err(Unbound::Twice { cell, pin, line });
        }
        // A latch cell names its control without a pin.
        let nameless = formal.is_empty() && matches!(each.kind, BoxKind::LatchCell(_));
        let input = cell.inputs().iter().copied().find(|&net| {
            let name = cell.local_name(net).map(|name| cell.names().bytes(name));
            if nameless {
                control == Some(net)
            } else {
                name == Some(formal)
            }
        });
        let output = cell.outputs().iter().find(|output| {
            let name = output.name.or_else(|| cell.local_name(output.signal.net));
            name.is_some_and(|name| cell.names().bytes(name) == formal)
        });
        match (input, output) {
            (Some(net), _) => nets[net.index()] = Some(actual),
            (None, Some(output)) => {
                let slot = &mut nets[output.signal.net.index()];
                let free = matches!(
                    cell.driver(output.signal.net),
                    Driver::Gate(_) | Driver::Register(_)
                );
                if slot.is_none() && free {
                    *slot = Some(actual);
                } else {
                    copies.push((output.signal.net, actual));
                }
            }
            (None, None) if nameless => {}
            (None, None) => {
                let (cell, pin) = told();
                let line = each.line;
                return Err(Unbound::NoPin { cell, pin, line });
            }
        }
    }
    let mut placed = Vec::with_capacity(nets.len());
    for net in nets {
        placed.push(match net {
            Some(net) => net,
            None => builder.add_net(None, each.scope)?,
        });
    }
    let first = builder.next_gate();
    for gate in cell.gates() {
        let function = cell_function(builder, each, cell, gate);
        let fan_ins: Vec<NetId> = cell
            .fan_ins(gate)
            .iter()
            .map(|n| placed[n.index()])
            .collect();
        let output = placed[cell.gate_output(gate).index()];
        builder.add_gate(function, &fan_ins, output, each.scope, each.line)?;
    }
    if let Some(declared) = cell.declared() {
        let end = builder.next_gate();
        let own = builder.declared();
        let barred = declared.barred.iter();
        own.barred.extend(barred.map(|net| placed[net.index()]));
        let cells = declared.carry_cells.iter();
        own.carry_cells
            .extend(cells.map(|&(.., entry)| (first, end, entry)));
    }
    for register in cell.registers() {
        let initial = match each.kind {
            BoxKind::LatchCell(initial) if initial != Initial::Unknown => initial,
            _ => register.initial,
        };
        builder.add_register(Register {
            input: Signal {
                net: placed[register.input.net.index()],
                ..register.input
            },
            output: placed[register.output.index()],
            trigger: register.trigger,
            control: register.control.map(|net| placed[net.index()]),
            initial,
            line: each.line,
        });
    }
    for (from, to) in copies {
        let function = builder.function(super::function::Function::buffer(false));
        let from = placed[from.index()];
        builder.add_gate(function, &[from], to, each.scope, each.line)?;
    }
    Ok(())
}
