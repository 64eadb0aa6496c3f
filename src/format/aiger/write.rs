//! A netlist to AIGER, text or binary form.
//!
//! Variables are numbered without gaps: inputs, registers, then ANDs, in the order
//! of the netlist when that is topological and in a topological order otherwise. A
//! gate that is a product of two pins becomes one AND, so what was read from an
//! AIGER file comes out with its ANDs; others are taken apart (`synthesis`).
//!
//! AIGER has no black boxes, one implied clock and one driver for each net. A
//! netlist that needs more is refused with the name of what does not fit, rather
//! than written as something else. A net without driver becomes one more input,
//! after the others, under its own name.

use super::synthesis::{Ands, Literal};
use crate::format::names::{Taken, full_name};
use crate::netlist::{
    Driver, Initial, NetId, Netlist, PropertyKind, Register, Signal, Topology, Trigger,
};
use std::io::{self, Write};

/// The two forms of the format.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Form {
    /// Text (`aag`).
    Ascii,
    /// Binary (`aig`).
    Binary,
}

/// Why a netlist could not be written.
#[derive(Debug, thiserror::Error)]
pub enum WriteError {
    /// The target failed.
    #[error(transparent)]
    Io(#[from] io::Error),
    /// The format cannot hold it.
    #[error("AIGER cannot hold {what}")]
    Unfit {
        /// What does not fit, with its name and line.
        what: String,
    },
}

/// Writes `netlist` in one of the two forms.
///
/// # Errors
/// When the format cannot hold the netlist, or `out` fails.
pub fn write(netlist: &Netlist, form: Form, out: &mut dyn Write) -> Result<(), WriteError> {
    let topology = fitting(netlist)?;
    let plan = Plan::of(netlist, &topology)?;
    plan.head(form, out)?;
    plan.watched(out)?;
    match form {
        Form::Ascii => plan.ands_as_text(out)?,
        Form::Binary => plan.ands_as_bytes(out)?,
    }
    plan.symbols(out)?;
    Ok(())
}

#[cold]
fn unfit(what: String) -> WriteError {
    WriteError::Unfit { what }
}

/// Checks that the format can hold the netlist.
fn fitting(netlist: &Netlist) -> Result<Topology, WriteError> {
    let named = |net: NetId, line: u32| match line {
        0 => netlist.net_name(net),
        line => format!("{} (line {line})", netlist.net_name(net)),
    };
    if let Some(each) = netlist.boxes().first() {
        let model = netlist.names().text(each.model);
        return Err(unfit(format!("black box {model} (line {})", each.line)));
    }
    if let Some(each) = netlist.contended().first() {
        let line = each.drivers.first().map_or(0, |driver| driver.1);
        let what = format!("net {}, which has several drivers", named(each.net, line));
        return Err(unfit(what));
    }
    let topology = Topology::of(netlist);
    if let Some(nets) = topology.loops.first() {
        let what = format!(
            "the loop without register through net {}",
            named(nets[0], 0)
        );
        return Err(unfit(what));
    }
    let mut clock: Option<&Register> = None;
    for register in netlist.registers() {
        let name = named(register.output, register.line);
        let is_edge = matches!(
            register.trigger,
            Trigger::RisingEdge | Trigger::FallingEdge | Trigger::Unstated
        );
        if !is_edge {
            return Err(unfit(format!("register {name}, which no clock edge sets")));
        }
        let first = clock.get_or_insert(register);
        if first.trigger != register.trigger || first.control != register.control {
            return Err(unfit(format!(
                "register {name}, which is on a second clock"
            )));
        }
        let from_port = |net: NetId| matches!(netlist.driver(net), Driver::Input(_) | Driver::None);
        if !register.control.is_none_or(from_port) {
            let what = format!("register {name}, whose clock comes from logic");
            return Err(unfit(what));
        }
    }
    Ok(topology)
}

/// Everything as literals.
struct Plan<'a> {
    netlist: &'a Netlist,
    /// The nets that become inputs.
    inputs: Vec<NetId>,
    literals: Vec<Literal>,
    ands: Ands,
}

const NONE: Literal = u32::MAX;

impl<'a> Plan<'a> {
    fn of(netlist: &'a Netlist, topology: &Topology) -> Result<Self, WriteError> {
        let mut inputs = netlist.inputs().to_vec();
        let undriven = |net: &NetId| netlist.driver(*net) == Driver::None;
        inputs.extend(netlist.nets().filter(undriven));
        let leaves = inputs.len() + netlist.registers().len();
        let large = || unfit("more than 2147483647 variables".to_owned());
        let leaves = u32::try_from(leaves).map_err(|_| large())?;
        let mut literals = vec![NONE; netlist.net_count()];
        let stored = netlist.registers().iter().map(|register| register.output);
        for (net, variable) in inputs.iter().copied().chain(stored).zip(1..) {
            literals[net.index()] = variable << 1;
        }
        for net in netlist.nets() {
            if let Driver::Constant(value) = netlist.driver(net) {
                literals[net.index()] = u32::from(value);
            }
        }
        let mut plan = Self {
            netlist,
            inputs,
            literals,
            ands: Ands::new(leaves.saturating_add(1)),
        };
        let mut pins = Vec::new();
        if plan.is_in_order() {
            for gate in netlist.gates() {
                plan.gate(gate, &mut pins);
            }
        } else {
            for &gate in &topology.order {
                plan.gate(gate, &mut pins);
            }
        }
        if plan.ands.overflow || leaves >= 1 << 31 {
            return Err(large());
        }
        Ok(plan)
    }

    /// Whether every gate reads only what comes before it.
    fn is_in_order(&self) -> bool {
        let netlist = self.netlist;
        let earlier = |net: &NetId, gate| match netlist.driver(*net) {
            Driver::Gate(driver) => driver < gate,
            _ => true,
        };
        let mut gates = netlist.gates();
        gates.all(|gate| netlist.fan_ins(gate).iter().all(|net| earlier(net, gate)))
    }

    fn gate(&mut self, gate: crate::netlist::GateId, pins: &mut Vec<Literal>) {
        let netlist = self.netlist;
        pins.clear();
        let fan_ins = netlist.fan_ins(gate).iter();
        pins.extend(fan_ins.map(|net| self.literals[net.index()]));
        let literal = self.ands.gate(netlist.function(gate), pins);
        self.literals[netlist.gate_output(gate).index()] = literal;
    }

    fn literal(&self, signal: Signal) -> Literal {
        self.literals[signal.net.index()] ^ u32::from(signal.inverted)
    }

    fn properties(&self, kind: fn(&PropertyKind) -> bool) -> Vec<Literal> {
        let all = self.netlist.properties().iter();
        all.filter(|property| kind(&property.kind))
            .map(|property| self.literal(property.signal))
            .collect()
    }

    /// Sizes of the justice sets; literals of a set stand together.
    fn justice(&self) -> Vec<usize> {
        let mut sizes = Vec::new();
        for property in self.netlist.properties() {
            if let PropertyKind::Justice(set) = property.kind {
                let set = set as usize;
                if sizes.len() <= set {
                    sizes.resize(set + 1, 0);
                }
                sizes[set] += 1;
            }
        }
        sizes
    }

    fn head(&self, form: Form, out: &mut dyn Write) -> io::Result<()> {
        let netlist = self.netlist;
        let (inputs, latches) = (self.inputs.len(), netlist.registers().len());
        let ands = self.ands.list.len();
        let magic = match form {
            Form::Ascii => "aag",
            Form::Binary => "aig",
        };
        let outputs = netlist.outputs().len();
        write!(
            out,
            "{magic} {} {inputs} {latches} {outputs} {ands}",
            inputs + latches + ands
        )?;
        let mut more = vec![
            self.properties(|kind| *kind == PropertyKind::Bad).len(),
            self.properties(|kind| *kind == PropertyKind::Constraint)
                .len(),
            self.justice().len(),
            self.properties(|kind| *kind == PropertyKind::Fairness)
                .len(),
        ];
        while more.last() == Some(&0) {
            more.pop();
        }
        for count in more {
            write!(out, " {count}")?;
        }
        writeln!(out)?;
        if form == Form::Ascii {
            for variable in 1..=inputs {
                writeln!(out, "{}", variable * 2)?;
            }
        }
        for register in netlist.registers() {
            let own = self.literals[register.output.index()];
            if form == Form::Ascii {
                write!(out, "{own} ")?;
            }
            write!(out, "{}", self.literal(register.input))?;
            match register.initial {
                Initial::Zero => writeln!(out)?,
                Initial::One => writeln!(out, " 1")?,
                Initial::Any | Initial::Unknown => writeln!(out, " {own}")?,
            }
        }
        Ok(())
    }

    fn watched(&self, out: &mut dyn Write) -> io::Result<()> {
        for output in self.netlist.outputs() {
            writeln!(out, "{}", self.literal(output.signal))?;
        }
        let bad = self.properties(|kind| *kind == PropertyKind::Bad);
        let constraints = self.properties(|kind| *kind == PropertyKind::Constraint);
        for literal in bad.into_iter().chain(constraints) {
            writeln!(out, "{literal}")?;
        }
        for size in self.justice() {
            writeln!(out, "{size}")?;
        }
        let mut justice: Vec<(u32, Literal)> = Vec::new();
        for property in self.netlist.properties() {
            if let PropertyKind::Justice(set) = property.kind {
                justice.push((set, self.literal(property.signal)));
            }
        }
        justice.sort_by_key(|&(set, _)| set);
        let fairness = self.properties(|kind| *kind == PropertyKind::Fairness);
        for literal in justice.into_iter().map(|(_, l)| l).chain(fairness) {
            writeln!(out, "{literal}")?;
        }
        Ok(())
    }

    /// The ANDs with the larger operand first.
    fn ands(&self) -> impl Iterator<Item = [Literal; 3]> + '_ {
        let first = (self.inputs.len() + self.netlist.registers().len() + 1) as u32;
        let list = self.ands.list.iter().zip(first..);
        list.map(|(&[a, b], variable)| [variable << 1, a.max(b), a.min(b)])
    }

    fn ands_as_text(&self, out: &mut dyn Write) -> io::Result<()> {
        for [own, first, second] in self.ands() {
            writeln!(out, "{own} {first} {second}")?;
        }
        Ok(())
    }

    fn ands_as_bytes(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut bytes = Vec::with_capacity(1 << 16);
        for [own, first, second] in self.ands() {
            difference(&mut bytes, own - first);
            difference(&mut bytes, first - second);
            if bytes.len() + 16 > 1 << 16 {
                out.write_all(&bytes)?;
                bytes.clear();
            }
        }
        out.write_all(&bytes)
    }

    /// A symbol for every port, register and property that has a name; one that is
    /// what a reader would call it anyway is left out.
    fn symbols(&self, out: &mut dyn Write) -> io::Result<()> {
        let netlist = self.netlist;
        let mut taken = Taken::default();
        for (i, &net) in self.inputs.iter().enumerate() {
            symbol(out, 'i', i, full_name(netlist, net), &mut taken)?;
        }
        let mut taken = Taken::default();
        for (i, register) in netlist.registers().iter().enumerate() {
            let name = full_name(netlist, register.output);
            symbol(out, 'l', i, name, &mut taken)?;
        }
        let mut taken = Taken::default();
        for (i, output) in netlist.outputs().iter().enumerate() {
            let own = output.name.map(|name| netlist.names().bytes(name).to_vec());
            let name = own.or_else(|| full_name(netlist, output.signal.net));
            symbol(out, 'o', i, name, &mut taken)?;
        }
        let mut counts = [0; 3];
        let mut last_set = None;
        for property in netlist.properties() {
            let (letter, index) = match property.kind {
                PropertyKind::Bad => ('b', next(&mut counts[0])),
                PropertyKind::Constraint => ('c', next(&mut counts[1])),
                PropertyKind::Fairness => ('f', next(&mut counts[2])),
                PropertyKind::Justice(set) => {
                    // All literals of a set share the set's name.
                    if last_set.replace(set) == Some(set) {
                        continue;
                    }
                    ('j', set as usize)
                }
            };
            if let Some(name) = property.name {
                let name = netlist.names().bytes(name).to_vec();
                symbol(out, letter, index, Some(name), &mut Taken::default())?;
            }
        }
        Ok(())
    }
}

fn next(count: &mut usize) -> usize {
    *count += 1;
    *count - 1
}

fn symbol(
    out: &mut dyn Write,
    letter: char,
    index: usize,
    name: Option<Vec<u8>>,
    taken: &mut Taken,
) -> io::Result<()> {
    let Some(mut name) = name else { return Ok(()) };
    for byte in &mut name {
        if *byte == b'\n' {
            *byte = b'_';
        }
    }
    let name = taken.give(&name);
    let name = taken.bytes(name);
    if name.is_empty() || name == format!("{letter}{index}").as_bytes() {
        return Ok(());
    }
    write!(out, "{letter}{index} ")?;
    out.write_all(name)?;
    out.write_all(b"\n")
}

/// Seven bits a byte, the least significant first, the top bit saying that more
/// follow.
fn difference(bytes: &mut Vec<u8>, mut value: u32) {
    while value >= 0x80 {
        bytes.push(value as u8 | 0x80);
        value >>= 7;
    }
    bytes.push(value as u8);
}
