//! A design to a flat netlist.
//!
//! Instances are expanded where they stand in the text, on an explicit stack, so
//! the gates of a bit come in the order of the bits and no depth of hierarchy is
//! too deep. A net that is connected to a port of its model is the net outside;
//! so it goes by the name of the outermost model it reaches. Other nets belong to
//! the scope of their instance.
//!
//! The size of the result is known and bounded before the first net is made.

use super::grammar::Called;
use super::link::{Callee, Design};
use super::model::{Instance, Model};
use crate::netlist::{
    BlackBox, BoxKind, NetId, Netlist, NetlistBuilder, Register, ScopeId, Signal, TooLarge,
};
use crate::source::{Diagnostic, Place, quote};

/// What each gate that is allowed may bring of other things, on average, before
/// a hierarchy is refused; a hierarchy can repeat those without a single gate.
const OTHERS_PER_GATE: u64 = 4;
const PINS_PER_GATE: u64 = 16;
/// So many of each are always allowed.
const ALWAYS: u64 = 1 << 20;
/// Most registers, boxes and instances, whatever the limit on gates.
const MOST_IDS: u64 = 1 << 31;

/// A net not connected from outside.
const OPEN: u32 = u32::MAX;

/// One instance being expanded.
struct Frame {
    model: usize,
    scope: ScopeId,
    /// For models of another file: the line that stands for all of them, that of
    /// the instance in the file that was asked for.
    stand_in: Option<u32>,
    /// By net of the model: the net of the netlist.
    nets: Vec<u32>,
    next_gate: usize,
    next_instance: usize,
}

/// Builds the flat netlist.
pub(super) fn elaborate(
    file: &str,
    design: &Design,
    builder: NetlistBuilder,
    max_gates: u64,
) -> Result<Netlist, Diagnostic> {
    check_size(file, design, &builder, max_gates)?;
    let line = design.models[design.top].line;
    build(design, builder).map_err(|fault| {
        Diagnostic::error(
            file,
            Place::line(line),
            format!(
                "expected at most {} {}, found more",
                fault.limit, fault.what
            ),
            "netlists beyond this size are not read",
        )
    })
}

fn check_size(
    file: &str,
    design: &Design,
    builder: &NetlistBuilder,
    max_gates: u64,
) -> Result<(), Diagnostic> {
    let size = design.size;
    // What stands in the file as it is never trips the derived limits.
    let written = |count: fn(&Model) -> usize| -> u64 {
        design.models.iter().map(|model| count(model) as u64).sum()
    };
    let limit = |per_gate: u64, written: u64| {
        let derived = max_gates.saturating_mul(per_gate).max(ALWAYS);
        derived.max(written)
    };
    let nets = limit(OTHERS_PER_GATE, written(|m| m.nets.len()));
    let pins = written(|m| m.pins.len() + m.bindings.len());
    let latches = limit(OTHERS_PER_GATE, written(|m| m.latches.len()));
    let instances = limit(OTHERS_PER_GATE, written(|m| m.instances.len()));
    let limits = [
        ("gates", size.gates, max_gates),
        ("registers", size.registers, latches.min(MOST_IDS)),
        ("black boxes", size.boxes, instances.min(MOST_IDS)),
        ("instances", size.instances, instances.min(MOST_IDS)),
        ("nets", size.nets, nets),
        ("gate inputs", size.pins, limit(PINS_PER_GATE, pins)),
    ];
    let top = &design.models[design.top];
    for (what, count, limit) in limits {
        if count > limit {
            let count = if count == u64::MAX {
                format!("{count} or more")
            } else {
                count.to_string()
            };
            return Err(Diagnostic::error(
                file,
                Place::line(top.line),
                format!(
                    "expected at most {limit} {what}, found a model {} that expands to {count}",
                    quote(builder.names().bytes(top.name))
                ),
                "raise the limit on gates if a netlist of this size is meant",
            ));
        }
    }
    Ok(())
}

fn build(design: &Design, mut builder: NetlistBuilder) -> Result<Netlist, TooLarge> {
    let top = &design.models[design.top];
    builder.set_model(top.name);
    let mut frame = Frame {
        model: design.top,
        scope: ScopeId::new(0),
        stand_in: (top.file != 0).then_some(0),
        nets: vec![OPEN; top.nets.len()],
        next_gate: 0,
        next_instance: 0,
    };
    open(&mut builder, top, &mut frame)?;
    for port in &top.inputs {
        builder.add_input(net(&frame, port.net), frame.line(port.line));
    }
    for port in &top.outputs {
        let signal = Signal::plain(net(&frame, port.net));
        builder.add_output(signal, None, frame.line(port.line));
    }
    registers(&mut builder, top, &frame);
    let mut stack = vec![frame];
    let mut spare: Vec<Vec<u32>> = Vec::new();
    while let Some(frame) = stack.last_mut() {
        let model = &design.models[frame.model];
        let linked = &design.linked[frame.model];
        let instance = model.instances.get(frame.next_instance);
        let until = instance.map_or(model.gates.len(), |i| i.gates_before as usize);
        gates(&mut builder, model, frame, until)?;
        let Some(instance) = instance else {
            if let Some(done) = stack.pop() {
                spare.push(done.nets);
            }
            continue;
        };
        let index = frame.next_instance;
        frame.next_instance += 1;
        match linked.callees[index] {
            Callee::Box => {
                let drives = &linked.bound;
                black_box(&mut builder, model, frame, instance, index, drives);
            }
            Callee::Model(callee) => {
                let inner = &design.models[callee];
                let mut nets = spare.pop().unwrap_or_default();
                nets.clear();
                nets.resize(inner.nets.len(), OPEN);
                for at in model.binding_range(index) {
                    let actual = model.bindings[at].actual as usize;
                    nets[linked.bound[at] as usize] = frame.nets[actual];
                }
                let mut frame = Frame {
                    model: callee,
                    scope: builder.add_scope(frame.scope, instance.name),
                    stand_in: frame
                        .stand_in
                        .or_else(|| (inner.file != 0).then_some(instance.line)),
                    nets,
                    next_gate: 0,
                    next_instance: 0,
                };
                open(&mut builder, inner, &mut frame)?;
                registers(&mut builder, inner, &frame);
                stack.push(frame);
            }
        }
    }
    Ok(builder.finish())
}

impl Frame {
    /// The line to tell of something on line `line` of its model.
    #[inline]
    fn line(&self, line: u32) -> u32 {
        self.stand_in.unwrap_or(line)
    }
}

#[inline]
fn net(frame: &Frame, local: u32) -> NetId {
    NetId::new(frame.nets[local as usize] as usize)
}

/// Makes the nets of an instance that are not connected from outside.
fn open(builder: &mut NetlistBuilder, model: &Model, frame: &mut Frame) -> Result<(), TooLarge> {
    for (slot, &name) in frame.nets.iter_mut().zip(&model.nets) {
        if *slot == OPEN {
            *slot = builder.add_net(Some(name), frame.scope)?.0;
        }
    }
    Ok(())
}

fn registers(builder: &mut NetlistBuilder, model: &Model, frame: &Frame) {
    for latch in &model.latches {
        builder.add_register(Register {
            input: Signal::plain(net(frame, latch.input)),
            output: net(frame, latch.output),
            trigger: latch.trigger,
            control: latch.control.map(|control| net(frame, control)),
            initial: latch.initial,
            line: frame.line(latch.line),
        });
    }
}

/// Adds the gates that stand before gate `until`.
fn gates(
    builder: &mut NetlistBuilder,
    model: &Model,
    frame: &mut Frame,
    until: usize,
) -> Result<(), TooLarge> {
    let mut fan_ins: Vec<NetId> = Vec::new();
    for i in frame.next_gate..until {
        let (pins, output) = model.gate_pins(i);
        fan_ins.clear();
        fan_ins.extend(pins.iter().map(|&pin| net(frame, pin)));
        let gate = &model.gates[i];
        let output = net(frame, output);
        let line = frame.line(gate.line);
        builder.add_gate(gate.function, &fan_ins, output, frame.scope, line)?;
    }
    frame.next_gate = until;
    Ok(())
}

fn black_box(
    builder: &mut NetlistBuilder,
    model: &Model,
    frame: &Frame,
    instance: &Instance,
    index: usize,
    drives: &[u32],
) {
    let (mut inputs, mut outputs) = (Vec::new(), Vec::new());
    let (mut pins, mut driven) = (Vec::new(), Vec::new());
    for at in model.binding_range(index) {
        let actual = net(frame, model.bindings[at].actual);
        let formal = model.bindings[at].formal;
        if drives[at] == 1 {
            outputs.push(actual);
            driven.push(formal);
        } else {
            inputs.push(actual);
            pins.push(formal);
        }
    }
    pins.append(&mut driven);
    builder.add_box(BlackBox {
        model: instance.model,
        kind: match instance.called {
            Called::Model => BoxKind::Model,
            Called::Cell => BoxKind::Cell,
            Called::LatchCell => BoxKind::LatchCell(instance.initial),
            Called::StateTable => BoxKind::StateTable,
        },
        inputs,
        outputs,
        pins,
        scope: frame.scope,
        line: frame.line(instance.line),
    });
}
