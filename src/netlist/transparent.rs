//! The netlist in which level-sensitive registers are looked through.
//!
//! While such a register is open, what arrives at its input runs on behind it, so
//! a path need not end there. Each becomes a gate that shows its input and waits
//! for its control; the registers stay listed, and what they store still ends
//! paths. Loops through open registers show as loops and are cut.

use super::function::{Function, TruthTable};
use super::id::{FunctionId, GateId, RegisterId};
use super::model::{Driver, Netlist, Register, Trigger};

impl Register {
    /// Whether the register passes its input on while its control says so.
    pub fn is_transparent(&self) -> bool {
        match self.trigger {
            Trigger::ActiveHigh | Trigger::ActiveLow | Trigger::Asynchronous => true,
            Trigger::RisingEdge | Trigger::FallingEdge | Trigger::Unstated => false,
        }
    }
}

impl Netlist {
    /// The registers that are transparent while their control says so.
    pub fn transparent_registers(&self) -> impl Iterator<Item = RegisterId> + '_ {
        let registers = self.registers.iter().enumerate();
        registers
            .filter(|(_, register)| register.is_transparent())
            .map(|(i, _)| RegisterId::new(i))
    }

    /// The netlist with every transparent register open, when there is one.
    pub fn looked_through(&self) -> Option<Self> {
        self.transparent_registers().next()?;
        let mut open = self.clone();
        for id in self.transparent_registers() {
            let register = self.registers[id.index()];
            if self.driver(register.output) != Driver::Register(id) {
                continue;
            }
            // Pin 0 is stored; a control, when named, only makes it wait.
            let inverted = register.input.inverted;
            let function = match register.control {
                None => Function::buffer(inverted),
                Some(_) => {
                    Function::Table(TruthTable::new(2, if inverted { 0b0101 } else { 0b1010 }))
                }
            };
            let gate = GateId::new(open.gate_outputs.len());
            open.fan_ins.push(register.input.net);
            open.fan_ins.extend(register.control);
            open.fan_in_starts.push(open.fan_ins.len() as u32);
            open.gate_outputs.push(register.output);
            open.gate_functions
                .push(FunctionId(open.functions.intern(function)));
            open.gate_lines.push(register.line);
            if !open.gate_scopes.is_empty() {
                open.gate_scopes.push(open.net_scope(register.output));
            }
            open.drivers[register.output.index()] = Driver::Gate(gate);
        }
        Some(open)
    }
}
