//! A dry run made real: the netlist with the proposal applied.
//!
//! Nets keep their names, gates their lines, functions and order; what goes is
//! left out, what is new stands where the format wants it. In BLIF the new gates
//! drive the replaced nets; in AIGER readers of a replaced net are redirected
//! and the inversion goes into them. Invariant: the gate count and every depth
//! of the result equal the dry run's estimate.

use super::dry_run::DryRun;
use super::made::Made;
use super::overlay::{GateStyle, Literal, Node, Operator, Overlay};
use super::set_run::SetRun;
use crate::netlist::{
    BlackBox, Driver, Function, GateId, NameId, NetId, Netlist, NetlistBuilder, Output, Property,
    Register, ScopeId, Signal, TooLarge,
};
use fixedbitset::FixedBitSet;
use rustc_hash::{FxHashMap, FxHashSet};
use std::ops::Range;

/// The netlist with a proposal applied.
pub struct Rebuilt {
    /// The new netlist.
    pub netlist: Netlist,
    /// By net of the old netlist: the net that stands for it, if it stays. A
    /// redirected net of AIGER stays as the signal its readers now read.
    pub nets: Vec<Option<Signal>>,
}

/// Builds the netlist of a dry run; new nets are named `prefix` and a number in
/// BLIF and have no name in AIGER.
///
/// # Errors
/// When the result would need more ids than 32 bits hold.
pub fn materialise(run: &DryRun<'_, '_>, prefix: &str) -> Result<Rebuilt, TooLarge> {
    let site = run.site;
    let needed = site.needed.iter().map(|needed| needed.net);
    let needed: Vec<(NetId, Literal)> = needed.zip(run.literals.iter().copied()).collect();
    let patch = Patch {
        netlist: site.ground.netlist,
        overlay: &run.overlay,
        made: &run.made,
        removed: &site.removed,
        swept: &run.swept,
        stretches: vec![Stretch {
            nodes: 0..run.overlay.len(),
            needed: 0..needed.len(),
            behind: &site.region,
        }],
        needed,
    };
    write(&patch, prefix)
}

/// As [`materialise`], with a whole set of proposals applied.
///
/// # Errors
/// When the result would need more ids than 32 bits hold.
pub fn materialise_set(run: &SetRun<'_, '_>, prefix: &str) -> Result<Rebuilt, TooLarge> {
    let site = run.site;
    let needed = site.needed.iter().map(|needed| needed.net);
    let patch = Patch {
        netlist: site.ground.netlist,
        overlay: &run.overlay,
        made: &run.made,
        removed: &site.removed,
        swept: &run.swept,
        stretches: run.stretches().collect(),
        needed: needed.zip(run.literals.iter().copied()).collect(),
    };
    write(&patch, prefix)
}

/// What changes in a netlist.
struct Patch<'p> {
    netlist: &'p Netlist,
    overlay: &'p Overlay,
    made: &'p Made,
    removed: &'p FxHashSet<GateId>,
    swept: &'p [GateId],
    /// Existing nets to show something new, and what.
    needed: Vec<(NetId, Literal)>,
    /// The new gates and the gates behind them, in an order in which nothing is
    /// read before it is made.
    stretches: Vec<Stretch<'p>>,
}

/// New gates, the nets they are made for, and the gates behind those nets.
pub(super) struct Stretch<'p> {
    pub(super) nodes: Range<usize>,
    pub(super) needed: Range<usize>,
    pub(super) behind: &'p [GateId],
}

fn write(patch: &Patch<'_>, prefix: &str) -> Result<Rebuilt, TooLarge> {
    let mut writer = Writer::new(patch, prefix);
    writer.copy_nets()?;
    writer.copy_inputs();
    let old = writer.old;
    if patch.overlay.style() == GateStyle::AndInverter {
        // Gates before what reads them.
        let mut behind = FixedBitSet::with_capacity(old.gate_count());
        let late = patch.stretches.iter().flat_map(|each| each.behind);
        behind.extend(late.map(|gate| gate.index()));
        for gate in old.gates().filter(|gate| !behind.contains(gate.index())) {
            writer.copy_gate(gate)?;
        }
        for stretch in &patch.stretches {
            writer.make_gates(stretch.nodes.clone())?;
            writer.redirect(stretch.needed.clone())?;
            for &gate in stretch.behind {
                writer.copy_gate(gate)?;
            }
        }
    } else {
        for gate in old.gates() {
            writer.copy_gate(gate)?;
        }
        writer.make_gates(0..patch.overlay.len())?;
        writer.drive_real_nets()?;
    }
    writer.copy_rest();
    Ok(Rebuilt {
        netlist: writer.builder.finish(),
        nets: writer.nets,
    })
}

struct Writer<'p> {
    patch: &'p Patch<'p>,
    old: &'p Netlist,
    builder: NetlistBuilder,
    /// No old name begins with it.
    prefix: String,
    made: usize,
    nets: Vec<Option<Signal>>,
    scopes: FxHashMap<ScopeId, ScopeId>,
    /// By node of the overlay: the net that shows it.
    shown: Vec<Option<Signal>>,
}

impl<'p> Writer<'p> {
    fn new(patch: &'p Patch<'p>, prefix: &str) -> Self {
        let old = patch.netlist;
        let mut prefix = prefix.to_owned();
        while old.names().any_begins_with(prefix.as_bytes()) {
            prefix.push('_');
        }
        let mut builder = NetlistBuilder::new();
        if old.has_inverted_edges() {
            builder.set_inverted_edges();
        }
        if let Some(model) = old.model() {
            let name = builder.name(old.names().bytes(model));
            builder.set_model(name);
        }
        Self {
            patch,
            old,
            builder,
            prefix,
            made: 0,
            nets: vec![None; old.net_count()],
            scopes: FxHashMap::from_iter([(ScopeId::new(0), ScopeId::new(0))]),
            shown: vec![None; patch.overlay.len()],
        }
    }

    fn name(&mut self, name: NameId) -> NameId {
        let bytes = self.old.names().bytes(name);
        self.builder.name(bytes)
    }

    /// The new scope of an old one. Parents have lower ids and the same path
    /// but its last name, so a loop over the path makes what is missing.
    fn scope(&mut self, scope: ScopeId) -> ScopeId {
        if let Some(&known) = self.scopes.get(&scope) {
            return known;
        }
        let mut at = ScopeId::new(0);
        for name in self.old.scope_path(scope) {
            let name = self.name(name);
            at = self.builder.add_scope(at, name);
        }
        self.scopes.insert(scope, at);
        at
    }

    fn is_removed(&self, gate: GateId) -> bool {
        self.patch.removed.contains(&gate) || self.patch.swept.binary_search(&gate).is_ok()
    }

    fn copy_nets(&mut self) -> Result<(), TooLarge> {
        let mut needed: Vec<NetId> = self.patch.needed.iter().map(|&(net, _)| net).collect();
        needed.sort_unstable();
        let redirects = self.patch.overlay.style() == GateStyle::AndInverter;
        for net in self.old.nets() {
            let gone = match self.old.driver(net) {
                Driver::Gate(gate) => {
                    self.is_removed(gate) && (redirects || needed.binary_search(&net).is_err())
                }
                _ => false,
            };
            if gone {
                continue;
            }
            let copy = if let Driver::Constant(value) = self.old.driver(net) {
                self.builder.constant(value)?
            } else {
                let name = self.old.local_name(net).map(|name| self.name(name));
                let scope = self.scope(self.old.net_scope(net));
                self.builder.add_net(name, scope)?
            };
            self.nets[net.index()] = Some(Signal::plain(copy));
        }
        Ok(())
    }

    /// What stands for an old net that stays.
    fn now(&self, net: NetId) -> Signal {
        self.nets[net.index()].expect("what is read stays")
    }

    /// As [`Self::now`] where inversions cannot occur.
    fn net_now(&self, net: NetId) -> NetId {
        self.now(net).net
    }

    fn signal_now(&self, signal: Signal) -> Signal {
        let now = self.now(signal.net);
        Signal {
            inverted: now.inverted != signal.inverted,
            ..now
        }
    }

    fn copy_inputs(&mut self) {
        for &net in self.old.inputs() {
            let net = self.net_now(net);
            self.builder.add_input(net, 0);
        }
    }

    fn copy_gate(&mut self, gate: GateId) -> Result<(), TooLarge> {
        if self.is_removed(gate) {
            return Ok(());
        }
        let mut function = self.old.function(gate).clone();
        let mut pins = Vec::with_capacity(self.old.fan_ins(gate).len());
        for (pin, &net) in self.old.fan_ins(gate).iter().enumerate() {
            let now = self.now(net);
            if now.inverted {
                function = function.flip(pin);
            }
            pins.push(now.net);
        }
        let output = self.net_now(self.old.gate_output(gate));
        let scope = self.scope(self.old.gate_scope(gate));
        let own = self.old.function_id(gate);
        let id = self.builder.function_like(self.old, own, function);
        let line = self.old.gate_line(gate);
        self.builder.add_gate(id, &pins, output, scope, line)?;
        Ok(())
    }

    /// The net and polarity that shows a literal.
    fn show(&mut self, literal: Literal) -> Result<Signal, TooLarge> {
        let node = literal.node();
        let signal = match self.patch.overlay.operator(node) {
            Operator::Constant => {
                let value = literal.is_inverted();
                return Ok(Signal::plain(self.builder.constant(value)?));
            }
            Operator::Net(net) => self.now(net),
            _ => self.shown[node.index()].expect("inputs are made first"),
        };
        Ok(Signal {
            inverted: signal.inverted != literal.is_inverted(),
            ..signal
        })
    }

    /// Makes the gates of the overlay, each driving the first real net that
    /// shows it, else a new net.
    fn make_gates(&mut self, nodes: Range<usize>) -> Result<(), TooLarge> {
        let Patch {
            overlay, needed, ..
        } = self.patch;
        let mut first: FxHashMap<Node, (NetId, bool)> = FxHashMap::default();
        if overlay.style() != GateStyle::AndInverter {
            for &(net, literal) in needed {
                let entry = first.entry(literal.node());
                entry.or_insert((net, literal.is_inverted()));
            }
        }
        let nodes = overlay.nodes().skip(nodes.start).take(nodes.len());
        for node in nodes.filter(|&node| overlay.is_gate(node)) {
            if let Some(existing) = overlay.existing(node) {
                self.shown[node.index()] = self.nets[existing.net.index()].map(|now| Signal {
                    inverted: now.inverted != existing.inverted,
                    ..now
                });
                continue;
            }
            if !self.patch.made.is_made[node.index()] {
                continue;
            }
            let (output, inverted) = match first.get(&node) {
                Some(&(net, inverted)) => (self.net_now(net), inverted),
                None => (self.new_net()?, false),
            };
            self.add_gate(node, output, inverted)?;
            self.shown[node.index()] = Some(Signal {
                net: output,
                inverted,
            });
        }
        Ok(())
    }

    fn new_net(&mut self) -> Result<NetId, TooLarge> {
        let top = ScopeId::new(0);
        if self.patch.overlay.style() == GateStyle::AndInverter {
            return self.builder.add_net(None, top);
        }
        self.made += 1;
        let text = format!("{}{}", self.prefix, self.made);
        let name = self.builder.name(text.as_bytes());
        self.builder.add_net(Some(name), top)
    }

    /// One gate of `node`, its output complemented when `inverted` is set.
    fn add_gate(&mut self, node: Node, output: NetId, inverted: bool) -> Result<(), TooLarge> {
        let overlay = &self.patch.overlay;
        let inputs = overlay.inputs(node).to_vec();
        let mut pins = Vec::with_capacity(inputs.len());
        for &input in &inputs {
            pins.push(self.show(input)?);
        }
        let flags: Vec<bool> = pins.iter().map(|pin| pin.inverted).collect();
        let function = overlay.operator(node).written(&flags, inverted);
        let nets: Vec<NetId> = pins.iter().map(|pin| pin.net).collect();
        let id = self.builder.function(function);
        self.builder
            .add_gate(id, &nets, output, ScopeId::new(0), 0)?;
        Ok(())
    }

    /// Drives the real nets that [`Self::make_gates`] has not.
    fn drive_real_nets(&mut self) -> Result<(), TooLarge> {
        let patch = self.patch;
        for &(net, literal) in &patch.needed {
            let output = self.net_now(net);
            if self.builder.driver(output) != Driver::None {
                continue;
            }
            let node = literal.node();
            if patch.overlay.is_gate(node) {
                self.add_gate(node, output, literal.is_inverted())?;
                continue;
            }
            let (function, pins) = match patch.overlay.operator(node) {
                Operator::Constant => (Function::constant(literal.is_inverted()), Vec::new()),
                _ => {
                    let from = self.show(literal)?;
                    (Function::buffer(from.inverted), vec![from.net])
                }
            };
            let id = self.builder.function(function);
            self.builder
                .add_gate(id, &pins, output, ScopeId::new(0), 0)?;
        }
        Ok(())
    }

    /// Lets the readers of the replaced nets read the new gates.
    fn redirect(&mut self, needed: Range<usize>) -> Result<(), TooLarge> {
        let patch = self.patch;
        for &(net, literal) in &patch.needed[needed] {
            let signal = self.show(literal)?;
            self.nets[net.index()] = Some(signal);
        }
        Ok(())
    }

    fn copy_rest(&mut self) {
        for &Output { signal, name, line } in self.old.outputs() {
            let name = name.map(|name| self.name(name));
            let signal = self.signal_now(signal);
            self.builder.add_output(signal, name, line);
        }
        for register in self.old.registers() {
            let copy = Register {
                input: self.signal_now(register.input),
                output: self.net_now(register.output),
                control: register.control.map(|net| self.net_now(net)),
                ..*register
            };
            self.builder.add_register(copy);
        }
        for each in self.old.boxes() {
            let copy = BlackBox {
                model: self.name(each.model),
                kind: each.kind,
                inputs: each.inputs.iter().map(|&net| self.net_now(net)).collect(),
                outputs: each.outputs.iter().map(|&net| self.net_now(net)).collect(),
                pins: each.pins.iter().map(|&pin| self.name(pin)).collect(),
                scope: self.scope(each.scope),
                line: each.line,
            };
            self.builder.add_box(copy);
        }
        for property in self.old.properties() {
            let copy = Property {
                kind: property.kind,
                signal: self.signal_now(property.signal),
                name: property.name.map(|name| self.name(name)),
            };
            self.builder.add_property(copy);
        }
    }
}
