//! The netlist value and its read-only views.

use super::asserted::Asserted;
use super::declared::Declared;
use super::function::{CellPins, Function, Functions};
use super::id::{BoxId, FunctionId, GateId, NetId, RegisterId, ScopeId};
use super::names::{NameId, Names};
use super::times::FileTimes;

/// What drives a net.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Driver {
    /// Nothing: the net is cut and treated as a free input.
    None,
    /// A port: index into [`Netlist::inputs`].
    Input(u32),
    /// A gate.
    Gate(GateId),
    /// A register's output.
    Register(RegisterId),
    /// A black box.
    Box(BoxId),
    /// A constant of the format itself (AIGER literals 0 and 1); constants
    /// written as gates are gates.
    Constant(bool),
    /// Several drivers: index into [`Netlist::contended`]; the net is cut.
    Many(u32),
}

/// A net, read inverted or not.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Signal {
    /// The net.
    pub net: NetId,
    /// Whether it is read inverted.
    pub inverted: bool,
}

impl Signal {
    /// The net as it is.
    pub fn plain(net: NetId) -> Self {
        Self {
            net,
            inverted: false,
        }
    }
}

impl std::ops::Not for Signal {
    type Output = Self;
    fn not(self) -> Self {
        Self {
            inverted: !self.inverted,
            ..self
        }
    }
}

/// One bit of a word: a constant or a signal.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Bit {
    /// A constant.
    Constant(bool),
    /// A net, read inverted or not.
    Signal(Signal),
}

impl Bit {
    /// The signal, unless the bit is constant.
    pub fn signal(self) -> Option<Signal> {
        match self {
            Self::Constant(_) => None,
            Self::Signal(signal) => Some(signal),
        }
    }
}

/// A port the netlist drives.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Output {
    /// What the port shows. In BLIF never inverted.
    pub signal: Signal,
    /// The port's own name, when it is not the net's (AIGER symbols).
    pub name: Option<NameId>,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// Which edge or level makes a register take its input.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Trigger {
    /// Rising edge (`re`).
    RisingEdge,
    /// Falling edge (`fe`).
    FallingEdge,
    /// Transparent while the control is high (`ah`).
    ActiveHigh,
    /// Transparent while the control is low (`al`).
    ActiveLow,
    /// Asynchronous (`as`).
    Asynchronous,
    /// The format's implied global clock.
    Unstated,
}

/// A register's initial value.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Initial {
    /// Starts at 0.
    Zero,
    /// Starts at 1.
    One,
    /// Don't care.
    Any,
    /// Unknown or uninitialised.
    Unknown,
}

/// A register.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Register {
    /// What is stored. In BLIF never inverted.
    pub input: Signal,
    /// The stored bit.
    pub output: NetId,
    /// Edge or level.
    pub trigger: Trigger,
    /// Clock or enable net, when one is named.
    pub control: Option<NetId>,
    /// Initial value.
    pub initial: Initial,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// What a black box is in its file.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum BoxKind {
    /// An instance of a model that is not there.
    Model,
    /// A cell of a library.
    Cell,
    /// A latch cell of a library; its control is the input whose pin has an empty
    /// name.
    LatchCell(Initial),
    /// A model that gives its machine as a state table only.
    StateTable,
}

/// An instance whose function is unknown.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct BlackBox {
    /// Name of the missing model.
    pub model: NameId,
    /// What it is in its file.
    pub kind: BoxKind,
    /// Nets the box reads.
    pub inputs: Vec<NetId>,
    /// Nets the box drives.
    pub outputs: Vec<NetId>,
    /// The box's own names for them: first of the inputs, then of the outputs.
    pub pins: Vec<NameId>,
    /// The instance it stands in.
    pub scope: ScopeId,
    /// Source line, 0 when unknown.
    pub line: u32,
}

/// What an AIGER 1.9 property literal is for.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum PropertyKind {
    /// A bad state.
    Bad,
    /// An invariant constraint.
    Constraint,
    /// One literal of justice set `n`.
    Justice(u32),
    /// A fairness constraint.
    Fairness,
}

/// A literal the file watches for verification; it reads its net but is no port.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Property {
    /// What it is for.
    pub kind: PropertyKind,
    /// What it reads.
    pub signal: Signal,
    /// Its symbol.
    pub name: Option<NameId>,
}

/// A net with several drivers.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Contention {
    /// The net.
    pub net: NetId,
    /// Every driver in the order read, with its source line.
    pub drivers: Vec<(Driver, u32)>,
}

/// One instance of a model.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Scope {
    pub(super) parent: ScopeId,
    pub(super) name: NameId,
}

/// A netlist. See the head of [`crate::netlist`] for its invariants.
#[derive(Clone)]
pub struct Netlist {
    pub(super) model: Option<NameId>,
    pub(super) names: Names,
    pub(super) functions: Functions,
    pub(super) scopes: Vec<Scope>,
    pub(super) fan_in_starts: Vec<u32>,
    pub(super) fan_ins: Vec<NetId>,
    pub(super) gate_outputs: Vec<NetId>,
    pub(super) gate_functions: Vec<FunctionId>,
    pub(super) gate_lines: Vec<u32>,
    pub(super) gate_scopes: Vec<ScopeId>,
    pub(super) drivers: Vec<Driver>,
    pub(super) net_names: Vec<Option<NameId>>,
    pub(super) net_scopes: Vec<ScopeId>,
    pub(super) inputs: Vec<NetId>,
    pub(super) outputs: Vec<Output>,
    pub(super) registers: Vec<Register>,
    pub(super) boxes: Vec<BlackBox>,
    pub(super) properties: Vec<Property>,
    pub(super) contended: Vec<Contention>,
    pub(super) inverted_edges: bool,
    pub(super) asserted: Option<Box<Asserted>>,
    pub(super) declared: Option<Box<Declared>>,
    pub(super) times: Option<Box<FileTimes>>,
}

impl Netlist {
    /// Name of the top model, when the file gives one.
    pub fn model(&self) -> Option<NameId> {
        self.model
    }

    /// The interned names.
    pub fn names(&self) -> &Names {
        &self.names
    }

    /// Number of nets.
    pub fn net_count(&self) -> usize {
        self.drivers.len()
    }

    /// Number of gates.
    pub fn gate_count(&self) -> usize {
        self.gate_outputs.len()
    }

    /// All nets.
    pub fn nets(&self) -> impl ExactSizeIterator<Item = NetId> + use<> {
        (0..self.drivers.len() as u32).map(NetId)
    }

    /// All gates in the order of the source.
    pub fn gates(&self) -> impl ExactSizeIterator<Item = GateId> + use<> {
        (0..self.gate_outputs.len() as u32).map(GateId)
    }

    /// What drives `net`.
    #[inline]
    pub fn driver(&self, net: NetId) -> Driver {
        self.drivers[net.index()]
    }

    /// The fan-ins of `gate`, one per pin; a net may occur more than once.
    #[inline]
    pub fn fan_ins(&self, gate: GateId) -> &[NetId] {
        &self.fan_ins[self.fan_in_range(gate)]
    }

    /// Number of fan-ins of all gates.
    pub fn fan_in_count(&self) -> usize {
        self.fan_ins.len()
    }

    /// Where the fan-ins of `gate` lie among those of all gates in order.
    #[inline]
    pub fn fan_in_range(&self, gate: GateId) -> std::ops::Range<usize> {
        let i = gate.index();
        self.fan_in_starts[i] as usize..self.fan_in_starts[i + 1] as usize
    }

    /// The net `gate` drives.
    #[inline]
    pub fn gate_output(&self, gate: GateId) -> NetId {
        self.gate_outputs[gate.index()]
    }

    /// The interned function of `gate`.
    #[inline]
    pub fn function_id(&self, gate: GateId) -> FunctionId {
        self.gate_functions[gate.index()]
    }

    /// The function of `gate`.
    #[inline]
    pub fn function(&self, gate: GateId) -> &Function {
        self.functions.get(self.gate_functions[gate.index()].0)
    }

    /// An interned function.
    pub fn function_of(&self, id: FunctionId) -> &Function {
        self.functions.get(id.0)
    }

    /// The delay of every pin of a function, where they were declared and not left
    /// to the delay model, in whole units of it.
    pub fn declared_delays(&self, id: FunctionId) -> Option<&[i32]> {
        self.functions.declared_delays(id.0)
    }

    /// Which cell's output a gate of an interned function is, when it is one.
    pub fn cell_pins(&self, id: FunctionId) -> Option<&CellPins> {
        self.functions.cell_pins(id.0)
    }

    /// Number of distinct functions; ids run from 0.
    pub fn function_count(&self) -> usize {
        self.functions.len()
    }

    /// Source line of `gate`, 0 when unknown.
    pub fn gate_line(&self, gate: GateId) -> u32 {
        self.gate_lines[gate.index()]
    }

    /// The instance `gate` belongs to.
    pub fn gate_scope(&self, gate: GateId) -> ScopeId {
        if self.gate_scopes.is_empty() {
            ScopeId(0)
        } else {
            self.gate_scopes[gate.index()]
        }
    }

    /// Instance names from the top down to `scope`; empty for the top.
    pub fn scope_path(&self, mut scope: ScopeId) -> Vec<NameId> {
        let mut path = Vec::new();
        while scope.0 != 0 {
            let entry = self.scopes[scope.index()];
            path.push(entry.name);
            scope = entry.parent;
        }
        path.reverse();
        path
    }

    /// The input ports, each the net it drives.
    pub fn inputs(&self) -> &[NetId] {
        &self.inputs
    }

    /// The output ports.
    pub fn outputs(&self) -> &[Output] {
        &self.outputs
    }

    /// The registers.
    pub fn registers(&self) -> &[Register] {
        &self.registers
    }

    /// The black boxes.
    pub fn boxes(&self) -> &[BlackBox] {
        &self.boxes
    }

    /// AIGER 1.9 properties.
    pub fn properties(&self) -> &[Property] {
        &self.properties
    }

    /// Nets with more than one driver.
    pub fn contended(&self) -> &[Contention] {
        &self.contended
    }

    /// What a user asserted about paths, when anything was.
    #[inline]
    pub fn asserted(&self) -> Option<&Asserted> {
        self.asserted.as_deref()
    }

    /// What was declared about delays inside cells and boxes, when anything was.
    #[inline]
    pub fn declared(&self) -> Option<&Declared> {
        self.declared.as_deref()
    }

    /// Whether no path through `net` counts, because a user asserted it or because
    /// it lies inside a cell whose delays are declared from pin to pin.
    #[inline]
    pub fn is_barred(&self, net: NetId) -> bool {
        let asserted = self.asserted.as_deref();
        asserted.is_some_and(|asserted| asserted.is_barred(net))
            || self.declared().is_some_and(|declared| declared.bars(net))
    }

    /// Whether no path of a way counts through `net`; see [`Asserted`].
    #[inline]
    pub fn is_barred_on(&self, way: u8, net: NetId) -> bool {
        self.is_barred(net)
            || (way > 0
                && self
                    .asserted()
                    .is_some_and(|asserted| asserted.avoids(way, net)))
    }

    /// Whether `net` is there for what a cell or a box does inside, and shown
    /// outside by another.
    #[inline]
    pub fn is_inner(&self, net: NetId) -> bool {
        self.declared()
            .is_some_and(|declared| declared.is_inner(net))
    }

    /// Whether an inversion on an edge is free (AIGER) or needs a gate (BLIF).
    pub fn has_inverted_edges(&self) -> bool {
        self.inverted_edges
    }

    /// The net's own name without its instance path.
    pub fn local_name(&self, net: NetId) -> Option<NameId> {
        self.net_names.get(net.index()).copied().flatten()
    }

    /// The instance a net was first named in.
    pub fn net_scope(&self, net: NetId) -> ScopeId {
        self.net_scopes
            .get(net.index())
            .copied()
            .unwrap_or(ScopeId(0))
    }

    /// The net's full name: instance path, `/`, own name. Nets without a name
    /// are written `v` and their number, constants without one `0` and `1`.
    pub fn net_name(&self, net: NetId) -> String {
        let Some(name) = self.local_name(net) else {
            return match self.driver(net) {
                Driver::Constant(value) => u8::from(value).to_string(),
                _ => format!("v{}", net.0),
            };
        };
        let mut text = String::new();
        for part in self.scope_path(self.net_scope(net)) {
            text.push_str(&self.names.text(part));
            text.push('/');
        }
        text.push_str(&self.names.text(name));
        text
    }

    /// A signal's name: [`Self::net_name`], with `~` before it when inverted. A
    /// name that itself begins with `~` gets a backslash first.
    pub fn signal_name(&self, signal: Signal) -> String {
        let name = self.net_name(signal.net);
        let escape = if name.starts_with('~') { "\\" } else { "" };
        let sign = if signal.inverted { "~" } else { "" };
        format!("{sign}{escape}{name}")
    }

    /// The name of an output port.
    pub fn output_name(&self, output: &Output) -> String {
        match output.name {
            Some(name) => self.names.text(name).into_owned(),
            None => self.net_name(output.signal.net),
        }
    }
}
