//! Builds a [`Netlist`] piece by piece, in the order of the source.

use super::declared::Declared;
use super::function::{CellPins, Function, Functions};
use super::id::{BoxId, FunctionId, GateId, NetId, RegisterId, ScopeId};
use super::model::{
    BlackBox, Contention, Driver, Netlist, Output, Property, Register, Scope, Signal,
};
use super::names::{NameId, Names};

/// The netlist would need more ids than 32 bits hold.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[error("the netlist has more than {limit} {what}")]
pub struct TooLarge {
    /// What there is too much of.
    pub what: &'static str,
    /// The most that is held.
    pub limit: u64,
}

/// Builds a netlist. Nets may be used before they are driven; a second driver
/// makes the net contended and both drivers are kept.
pub struct NetlistBuilder {
    netlist: Netlist,
    constants: [Option<NetId>; 2],
}

impl Default for NetlistBuilder {
    fn default() -> Self {
        Self::new()
    }
}

impl NetlistBuilder {
    /// An empty netlist in which inversions need gates (BLIF).
    pub fn new() -> Self {
        let mut names = Names::new();
        let top = names.intern(b"");
        Self {
            netlist: Netlist {
                model: None,
                names,
                functions: Functions::default(),
                scopes: vec![Scope {
                    parent: ScopeId(0),
                    name: top,
                }],
                fan_in_starts: vec![0],
                fan_ins: Vec::new(),
                gate_outputs: Vec::new(),
                gate_functions: Vec::new(),
                gate_lines: Vec::new(),
                gate_scopes: Vec::new(),
                drivers: Vec::new(),
                net_names: Vec::new(),
                net_scopes: Vec::new(),
                inputs: Vec::new(),
                outputs: Vec::new(),
                registers: Vec::new(),
                boxes: Vec::new(),
                properties: Vec::new(),
                contended: Vec::new(),
                inverted_edges: false,
                asserted: None,
                declared: None,
                times: None,
            },
            constants: [None; 2],
        }
    }

    /// Opens a finished netlist again, with its boxes taken out of it: nets, gates,
    /// registers and ports stay and are driven anew. Names can be read, not added.
    pub(super) fn reopen(mut netlist: Netlist) -> (Self, Vec<BlackBox>) {
        let boxes = std::mem::take(&mut netlist.boxes);
        netlist.contended.clear();
        let mut constants = [None; 2];
        for (i, driver) in netlist.drivers.iter_mut().enumerate() {
            match *driver {
                Driver::Constant(value) => constants[usize::from(value)] = Some(NetId::new(i)),
                _ => *driver = Driver::None,
            }
        }
        let mut builder = Self { netlist, constants };
        for i in 0..builder.netlist.inputs.len() {
            let net = builder.netlist.inputs[i];
            builder.drive(net, Driver::Input(i as u32), 0);
        }
        for i in 0..builder.netlist.gate_outputs.len() {
            let (net, line) = (
                builder.netlist.gate_outputs[i],
                builder.netlist.gate_lines[i],
            );
            builder.drive(net, Driver::Gate(GateId::new(i)), line);
        }
        for i in 0..builder.netlist.registers.len() {
            let register = builder.netlist.registers[i];
            let driver = Driver::Register(RegisterId::new(i));
            builder.drive(register.output, driver, register.line);
        }
        (builder, boxes)
    }

    /// Says that inversions on edges are free (AIGER).
    pub fn set_inverted_edges(&mut self) {
        self.netlist.inverted_edges = true;
    }

    /// Names the top model.
    pub fn set_model(&mut self, name: NameId) {
        self.netlist.model = Some(name);
    }

    /// Interns a name.
    pub fn name(&mut self, bytes: &[u8]) -> NameId {
        self.netlist.names.intern(bytes)
    }

    /// The names interned so far.
    pub fn names(&self) -> &Names {
        &self.netlist.names
    }

    /// Opens an instance below `parent`; the top is `ScopeId::new(0)`.
    pub fn add_scope(&mut self, parent: ScopeId, name: NameId) -> ScopeId {
        self.netlist.scopes.push(Scope { parent, name });
        ScopeId::new(self.netlist.scopes.len() - 1)
    }

    /// A new net without driver.
    ///
    /// # Errors
    /// Past 2^29 nets (536 million).
    pub fn add_net(&mut self, name: Option<NameId>, scope: ScopeId) -> Result<NetId, TooLarge> {
        let n = &mut self.netlist;
        let id = n.drivers.len();
        if id >= 1 << 29 {
            return Err(TooLarge {
                what: "nets",
                limit: 1 << 29,
            });
        }
        n.drivers.push(Driver::None);
        // Both side tables stay empty (or short) while nothing needs them.
        if let Some(name) = name {
            n.net_names.resize(id, None);
            n.net_names.push(Some(name));
        }
        if scope.0 != 0 {
            n.net_scopes.resize(id, ScopeId(0));
            n.net_scopes.push(scope);
        }
        Ok(NetId(id as u32))
    }

    /// Gives a net a name after the fact (AIGER symbols come last).
    pub fn set_net_name(&mut self, net: NetId, name: NameId) {
        let names = &mut self.netlist.net_names;
        if names.len() <= net.index() {
            names.resize(net.index() + 1, None);
        }
        names[net.index()] = Some(name);
    }

    /// The net that carries a constant of the format.
    ///
    /// # Errors
    /// As [`Self::add_net`].
    pub fn constant(&mut self, value: bool) -> Result<NetId, TooLarge> {
        if let Some(net) = self.constants[usize::from(value)] {
            return Ok(net);
        }
        let net = self.add_net(None, ScopeId(0))?;
        self.netlist.drivers[net.index()] = Driver::Constant(value);
        self.constants[usize::from(value)] = Some(net);
        Ok(net)
    }

    /// What drives `net` so far.
    pub fn driver(&self, net: NetId) -> Driver {
        self.netlist.drivers[net.index()]
    }

    /// The net of input port `index`.
    pub fn input(&self, index: usize) -> NetId {
        self.netlist.inputs[index]
    }

    /// The net that register `index` drives.
    pub fn register_output(&self, index: usize) -> NetId {
        self.netlist.registers[index].output
    }

    fn drive(&mut self, net: NetId, driver: Driver, line: u32) {
        let slot = &mut self.netlist.drivers[net.index()];
        match *slot {
            Driver::None => *slot = driver,
            Driver::Many(i) => self.netlist.contended[i as usize]
                .drivers
                .push((driver, line)),
            first => {
                let index = self.netlist.contended.len() as u32;
                *slot = Driver::Many(index);
                let first_line = self.driver_line(first);
                self.netlist.contended.push(Contention {
                    net,
                    drivers: vec![(first, first_line), (driver, line)],
                });
            }
        }
    }

    fn driver_line(&self, driver: Driver) -> u32 {
        let n = &self.netlist;
        match driver {
            Driver::Gate(gate) => n.gate_lines[gate.index()],
            Driver::Register(register) => n.registers[register.index()].line,
            Driver::Box(id) => n.boxes[id.index()].line,
            Driver::None | Driver::Input(_) | Driver::Constant(_) | Driver::Many(_) => 0,
        }
    }

    /// Makes `net` an input port.
    pub fn add_input(&mut self, net: NetId, line: u32) {
        let index = self.netlist.inputs.len() as u32;
        self.netlist.inputs.push(net);
        self.drive(net, Driver::Input(index), line);
    }

    /// Adds an output port; `name` when it differs from the net's.
    pub fn add_output(&mut self, signal: Signal, name: Option<NameId>, line: u32) {
        self.netlist.outputs.push(Output { signal, name, line });
    }

    /// Names output port `index` (AIGER symbols come last).
    pub fn set_output_name(&mut self, index: usize, name: NameId) {
        self.netlist.outputs[index].name = Some(name);
    }

    /// Names property `index`.
    pub fn set_property_name(&mut self, index: usize, name: NameId) {
        self.netlist.properties[index].name = Some(name);
    }

    /// Interns a function, so that many gates can share it.
    pub fn function(&mut self, function: Function) -> FunctionId {
        FunctionId(self.netlist.functions.intern(function))
    }

    /// Interns a function whose pins take the times given, in whole units of the
    /// delay model, whatever the model says.
    pub fn function_with_delays(&mut self, function: Function, delays: &[i32]) -> FunctionId {
        debug_assert_eq!(function.inputs(), delays.len());
        let functions = &mut self.netlist.functions;
        FunctionId(functions.intern_with_delays(function, delays))
    }

    /// Interns a function of another netlist, with its delays where it has some of
    /// its own.
    pub fn function_from(&mut self, other: &Netlist, id: FunctionId) -> FunctionId {
        self.function_like(other, id, other.function_of(id).clone())
    }

    /// Interns `function` with what is kept of a function of another netlist: its
    /// declared delays, or the cell it belongs to.
    pub fn function_like(
        &mut self,
        other: &Netlist,
        id: FunctionId,
        function: Function,
    ) -> FunctionId {
        match (other.declared_delays(id), other.cell_pins(id)) {
            (Some(delays), _) => self.function_with_delays(function, delays),
            (None, Some(pins)) => self.function_of_cell(function, pins.clone()),
            (None, None) => self.function(function),
        }
    }

    /// Interns a function as an output of a cell.
    pub fn function_of_cell(&mut self, function: Function, pins: CellPins) -> FunctionId {
        FunctionId(self.netlist.functions.intern_of_cell(function, pins))
    }

    /// The gate that the next one will be.
    pub(super) fn next_gate(&self) -> GateId {
        GateId::new(self.netlist.gate_outputs.len())
    }

    /// What is declared about delays so far.
    pub(super) fn declared(&mut self) -> &mut Declared {
        self.netlist.declared.get_or_insert_default()
    }

    /// Adds a gate. Panics when `fan_ins` does not match the function.
    ///
    /// # Errors
    /// Past 2^29 gates or 2^32 fan-ins.
    pub fn add_gate(
        &mut self,
        function: FunctionId,
        fan_ins: &[NetId],
        output: NetId,
        scope: ScopeId,
        line: u32,
    ) -> Result<GateId, TooLarge> {
        let n = &mut self.netlist;
        debug_assert_eq!(n.functions.get(function.0).inputs(), fan_ins.len());
        let id = n.gate_outputs.len();
        if id >= 1 << 29 {
            return Err(TooLarge {
                what: "gates",
                limit: 1 << 29,
            });
        }
        let end = n.fan_ins.len() + fan_ins.len();
        let end = u32::try_from(end).map_err(|_| TooLarge {
            what: "gate inputs",
            limit: u64::from(u32::MAX),
        })?;
        n.fan_ins.extend_from_slice(fan_ins);
        n.fan_in_starts.push(end);
        n.gate_outputs.push(output);
        n.gate_functions.push(function);
        n.gate_lines.push(line);
        if scope.0 != 0 || !n.gate_scopes.is_empty() {
            n.gate_scopes.resize(id, ScopeId(0));
            n.gate_scopes.push(scope);
        }
        let gate = GateId(id as u32);
        self.drive(output, Driver::Gate(gate), line);
        Ok(gate)
    }

    /// Adds a register.
    pub fn add_register(&mut self, register: Register) -> RegisterId {
        let id = RegisterId::new(self.netlist.registers.len());
        self.netlist.registers.push(register);
        self.drive(register.output, Driver::Register(id), register.line);
        id
    }

    /// Adds a black box; every net of `outputs` is driven by it.
    pub fn add_box(&mut self, black_box: BlackBox) -> BoxId {
        let id = BoxId::new(self.netlist.boxes.len());
        let (outputs, line) = (black_box.outputs.clone(), black_box.line);
        self.netlist.boxes.push(black_box);
        for net in outputs {
            self.drive(net, Driver::Box(id), line);
        }
        id
    }

    /// Adds an AIGER 1.9 property.
    pub fn add_property(&mut self, property: Property) {
        self.netlist.properties.push(property);
    }

    /// The finished netlist.
    pub fn finish(self) -> Netlist {
        let mut n = self.netlist;
        n.names.seal();
        n.fan_ins.shrink_to_fit();
        n.fan_in_starts.shrink_to_fit();
        n.gate_outputs.shrink_to_fit();
        n.gate_functions.shrink_to_fit();
        n.gate_lines.shrink_to_fit();
        n.gate_scopes.shrink_to_fit();
        n.drivers.shrink_to_fit();
        n.net_names.shrink_to_fit();
        n.net_scopes.shrink_to_fit();
        n
    }
}
