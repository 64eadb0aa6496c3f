//! A model as written: what one `.model … .end` lists, names resolved to the
//! model's own net numbers, instances not yet looked up.
//!
//! This is the compact form between the text and the flat netlist. Everything
//! that can be many is a flat array with end positions; a model knows nothing of
//! the others.

use super::constraint::Constraint;
use super::grammar::Called;
use super::kiss::Table;
use crate::netlist::{FunctionId, Initial, NameId, Trigger};
use rustc_hash::FxHashMap;

/// A net of a model: a position in [`Model::nets`].
pub(super) type Local = u32;

/// A port and the line that lists it.
#[derive(Clone, Copy)]
pub(super) struct Port {
    pub(super) net: Local,
    pub(super) line: u32,
}

/// A `.names` block. Its pins end at `end` in [`Model::pins`]; the output comes
/// last.
pub(super) struct Gate {
    pub(super) function: FunctionId,
    pub(super) end: u32,
    pub(super) line: u32,
}

/// A `.latch`.
pub(super) struct Latch {
    pub(super) input: Local,
    pub(super) output: Local,
    pub(super) trigger: Trigger,
    pub(super) control: Option<Local>,
    pub(super) initial: Initial,
    pub(super) line: u32,
}

/// One connection of an instance.
pub(super) struct Binding {
    pub(super) formal: NameId,
    pub(super) actual: Local,
}

/// A `.subckt`, `.gate` or `.mlatch`. Its bindings end at `end` in
/// [`Model::bindings`].
pub(super) struct Instance {
    pub(super) called: Called,
    pub(super) model: NameId,
    /// The instance's own name within this model.
    pub(super) name: NameId,
    pub(super) line: u32,
    /// Gates of this model that come before it in the text.
    pub(super) gates_before: u32,
    pub(super) end: u32,
    /// Initial value of a latch cell.
    pub(super) initial: Initial,
}

/// One model.
pub(super) struct Model {
    pub(super) name: NameId,
    /// The file it stands in: 0 is the one that was asked for.
    pub(super) file: usize,
    /// Line of `.model`, or where the unnamed model begins.
    pub(super) line: u32,
    pub(super) nets: Vec<NameId>,
    pub(super) inputs: Vec<Port>,
    pub(super) outputs: Vec<Port>,
    /// Whether `.inputs` or `.outputs` occurs at all.
    pub(super) ports_given: bool,
    pub(super) gates: Vec<Gate>,
    pub(super) pins: Vec<Local>,
    pub(super) latches: Vec<Latch>,
    pub(super) instances: Vec<Instance>,
    pub(super) bindings: Vec<Binding>,
    /// How often each model has been instantiated here, for instance names.
    pub(super) ordinals: FxHashMap<NameId, u32>,
    /// Nets listed in `.clock`.
    pub(super) clocks: Vec<Local>,
    /// What is said about times, loads and areas, each with its line.
    pub(super) constraints: Vec<(u32, Constraint<NameId>)>,
    pub(super) table: Option<Table>,
}

impl Model {
    pub(super) fn new(name: NameId, file: usize, line: u32) -> Self {
        Self {
            name,
            file,
            line,
            nets: Vec::new(),
            inputs: Vec::new(),
            outputs: Vec::new(),
            ports_given: false,
            gates: Vec::new(),
            pins: Vec::new(),
            latches: Vec::new(),
            instances: Vec::new(),
            bindings: Vec::new(),
            ordinals: FxHashMap::default(),
            clocks: Vec::new(),
            constraints: Vec::new(),
            table: None,
        }
    }

    /// Whether it holds anything that computes.
    pub(super) fn has_logic(&self) -> bool {
        !(self.gates.is_empty() && self.latches.is_empty() && self.instances.is_empty())
    }

    /// Fan-ins and output of gate `i`.
    pub(super) fn gate_pins(&self, i: usize) -> (&[Local], Local) {
        let start = if i == 0 { 0 } else { self.gates[i - 1].end };
        let pins = &self.pins[start as usize..self.gates[i].end as usize];
        match pins.split_last() {
            Some((&output, fan_ins)) => (fan_ins, output),
            // Every gate has an output; the reader refuses one without.
            None => unreachable!("a gate has at least its output pin"),
        }
    }

    /// Positions of instance `i`'s connections in [`Model::bindings`].
    pub(super) fn binding_range(&self, i: usize) -> std::ops::Range<usize> {
        let start = if i == 0 { 0 } else { self.instances[i - 1].end };
        start as usize..self.instances[i].end as usize
    }
}
