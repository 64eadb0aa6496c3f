//! What statements put into the open model: ports, gates, latches, instances.
//!
//! Names are interned straight from the bytes of the line and become net numbers
//! of the open model at once: each name remembers in which model it was last seen
//! and which net it was there, so no model needs a map of its own.

use super::grammar::{self, Called, LatchLine, Words};
use super::lines::Lines;
use super::model::{Binding, Gate, Instance, Latch, Local, Port};
use super::parse::{Block, CLOCK, INPUT, OUTPUT, Reader};
use super::tally::Oddity;
use crate::netlist::{Initial, NameId};
use crate::source::{Diagnostic, Place};

impl Reader {
    /// The net of a name in the open model.
    #[inline]
    fn net(&mut self, name: &[u8]) -> Local {
        let id = self.builder.name(name);
        let index = id.index() as usize;
        if index >= self.locals.len() {
            self.locals.resize(self.builder.names().len(), (0, 0));
        }
        let epoch = self.models.len() as u32;
        let slot = &mut self.locals[index];
        if slot.0 != epoch {
            let model = &mut self.models[epoch as usize - 1];
            *slot = (epoch, model.nets.len() as Local);
            model.nets.push(id);
        }
        slot.1
    }

    pub(super) fn ports(&mut self, lines: &Lines<'_>, words: Words<'_>, list: u8) {
        let line = lines.line();
        self.model(line);
        for word in words {
            let net = self.net(word);
            let index = net as usize;
            if index >= self.marks.len() {
                self.marks.resize(index + 1, 0);
            }
            let mark = self.marks[index];
            self.marks[index] |= list;
            if list == CLOCK && mark & CLOCK == 0 {
                self.model(line).clocks.push(net);
            }
            // A clock is an input port, listed a second time or not.
            let same = if list == OUTPUT {
                OUTPUT
            } else {
                INPUT | CLOCK
            };
            if mark & same == 0 {
                let model = self.model(line);
                let port = Port { net, line };
                if list == OUTPUT {
                    model.outputs.push(port);
                } else {
                    model.inputs.push(port);
                }
            } else if mark & list != 0 && list != CLOCK {
                let place = || lines.place(grammar::offset(lines.text(), word), word.len());
                self.tally.count(Oddity::RepeatedPort, word, 1, place);
            }
        }
    }

    pub(super) fn names(&mut self, lines: &Lines<'_>, text: &[u8], words: Words<'_>) {
        self.model(lines.line());
        let mut count = 0;
        for word in words {
            let net = self.net(word);
            self.model(lines.line()).pins.push(net);
            count += 1;
        }
        if count == 0 {
            self.block = Block::Faulty;
            let help = "write `.names`, the inputs, and the output last";
            return self.fault(lines, grammar::missing(text, "the gate's output", help));
        }
        self.rows.open(count - 1);
        self.block = Block::Open(lines.line());
    }

    /// Ends the rows of the open `.names`, if there is one.
    pub(super) fn close_block(&mut self) {
        let block = std::mem::replace(&mut self.block, Block::Closed);
        let Block::Open(line) = block else { return };
        if self.rows.is_empty() && self.rows.inputs() > 0 {
            let place = || Place::line(line);
            self.tally.count(Oddity::NoRows, b"", 1, place);
        }
        let function = self.remembered.function(&self.rows, &mut self.builder);
        let model = self.model(line);
        let end = model.pins.len();
        match u32::try_from(end) {
            Ok(end) => model.gates.push(Gate {
                function,
                end,
                line,
            }),
            Err(_) => self.too_long(line, "gate pins"),
        }
    }

    #[cold]
    fn too_long(&mut self, line: u32, what: &str) {
        self.errors.push(Diagnostic::error(
            self.file_name(),
            Place::line(line),
            format!("expected fewer than {} {what} in one model", u32::MAX),
            "netlists beyond this size are not read",
        ));
    }

    pub(super) fn latch(&mut self, line: u32, latch: &LatchLine<'_>) {
        self.model(line);
        let latch = Latch {
            input: self.net(latch.input),
            output: self.net(latch.output),
            trigger: latch.trigger,
            control: latch.control.map(|name| self.net(name)),
            initial: latch.initial,
            line,
        };
        self.model(line).latches.push(latch);
    }

    pub(super) fn instance(
        &mut self,
        lines: &Lines<'_>,
        text: &[u8],
        called: Called,
        model_name: &[u8],
        words: Words<'_>,
    ) {
        let line = lines.line();
        self.model(line);
        let model = self.builder.name(model_name);
        let mut bare = 0;
        let mut initial = Initial::Unknown;
        for word in words {
            // A latch cell names its control and initial value without `=`.
            if called == Called::LatchCell && !word.contains(&b'=') && bare < 2 {
                bare += 1;
                if bare == 2 {
                    match grammar::initial_value(text, word) {
                        Ok(value) => initial = value,
                        Err(fault) => return self.fault(lines, fault),
                    }
                } else if word != b"NIL" {
                    let formal = self.builder.name(b"");
                    let actual = self.net(word);
                    self.model(line).bindings.push(Binding { formal, actual });
                }
                continue;
            }
            match grammar::binding(text, word) {
                Ok((formal, actual)) => {
                    let formal = self.builder.name(formal);
                    let actual = self.net(actual);
                    self.model(line).bindings.push(Binding { formal, actual });
                }
                // The words after a faulty one belong to it as a rule.
                Err(fault) => return self.fault(lines, fault),
            }
        }
        if called == Called::LatchCell && bare == 0 {
            let help = "write `.mlatch` cell, the connections, the control net or `NIL`, and the \
                        initial value, which may be left out";
            return self.fault(
                lines,
                grammar::missing(text, "the control net or `NIL`", help),
            );
        }
        self.add_instance(line, called, model, initial);
    }

    /// Closes an instance whose connections have been added.
    pub(super) fn add_instance(
        &mut self,
        line: u32,
        called: Called,
        model: NameId,
        initial: Initial,
    ) {
        let ordinals = &mut self.model(line).ordinals;
        let ordinal = ordinals.entry(model).or_insert(0);
        *ordinal += 1;
        let suffix = format!("_{ordinal}");
        let full = [self.builder.names().bytes(model), suffix.as_bytes()].concat();
        let name = self.builder.name(&full);
        let open = self.model(line);
        let gates_before = open.gates.len() as u32;
        match u32::try_from(open.bindings.len()) {
            Ok(end) => open.instances.push(Instance {
                called,
                model,
                name,
                line,
                gates_before,
                end,
                initial,
            }),
            Err(_) => self.too_long(line, "connections"),
        }
    }
}
