//! A netlist to BLIF text, flat.
//!
//! Gates come in the order of the netlist, each one `.names`; so a file that was
//! read and written again has its gates, pins and ports where they were. Instances
//! are gone: a net inside one goes by its path. What BLIF cannot say is put in other
//! words: an inverted edge becomes an inverter, a port that shows another net a
//! buffer, a constant of the format a cover without inputs.
//!
//! Invariant: reading the text again gives the same function, ports and registers;
//! and the same netlist when the original came from a flat BLIF file. Properties of
//! AIGER files have no place in BLIF and are named in a comment.

use super::rows;
use crate::format::names::{Taken, full_name};
use crate::netlist::{BoxKind, Driver, Initial, NameId, NetId, Netlist, Output, Signal, Trigger};
use rustc_hash::{FxHashMap, FxHashSet};
use std::io::{self, Write};

/// Column after which a statement goes on in the next line.
const WIDTH: usize = 78;

/// Writes `netlist` as one flat BLIF model.
///
/// # Errors
/// Whatever `out` fails with.
pub fn write(netlist: &Netlist, out: &mut dyn Write) -> io::Result<()> {
    let mut writer = Writer::new(netlist, out);
    writer.head()?;
    writer.registers()?;
    writer.boxes()?;
    writer.gates()?;
    writer.ports()?;
    writer.rest()?;
    writer.out.write_all(b".end\n")
}

/// The name of a net or port as BLIF can hold it.
fn fit(name: Vec<u8>) -> Vec<u8> {
    let mut name = name;
    for byte in &mut name {
        if matches!(*byte, b' ' | b'\t' | b'\r' | b'\n' | b'#') {
            *byte = b'_';
        }
    }
    // At the end of a line a backslash would join the next one.
    if name.last() == Some(&b'\\') || name.is_empty() {
        name.push(b'_');
    }
    name
}

/// A statement being put together, folded at [`WIDTH`].
#[derive(Default)]
struct Line {
    text: Vec<u8>,
    column: usize,
}

impl Line {
    fn begin(&mut self, word: &str) {
        self.text.clear();
        self.text.extend_from_slice(word.as_bytes());
        self.column = word.len();
    }

    fn word(&mut self, word: &[u8]) {
        if self.column + 1 + word.len() > WIDTH && self.column > 1 {
            self.text.extend_from_slice(b" \\\n");
            self.column = 0;
        }
        self.text.push(b' ');
        self.text.extend_from_slice(word);
        self.column += 1 + word.len();
    }
}

struct Writer<'a> {
    netlist: &'a Netlist,
    out: &'a mut dyn Write,
    names: Vec<Option<NameId>>,
    taken: Taken,
    /// Names of the output ports.
    ports: Vec<NameId>,
    /// Nets whose own name stands in the list of outputs.
    shown: FxHashSet<NetId>,
    /// Inverters made so far, by net.
    inverted: FxHashMap<NetId, NameId>,
    /// Constants of the format that something reads.
    constants: Vec<NetId>,
    line: Line,
}

impl<'a> Writer<'a> {
    fn new(netlist: &'a Netlist, out: &'a mut dyn Write) -> Self {
        let mut writer = Self {
            netlist,
            out,
            names: vec![None; netlist.net_count()],
            taken: Taken::default(),
            ports: Vec::new(),
            shown: FxHashSet::default(),
            inverted: FxHashMap::default(),
            constants: Vec::new(),
            line: Line::default(),
        };
        writer.name_everything();
        writer
    }

    /// Inputs first, then outputs, then what is inside.
    fn name_everything(&mut self) {
        let netlist = self.netlist;
        for &net in netlist.inputs() {
            self.name(net);
        }
        for output in netlist.outputs() {
            let name = self.port_name(output);
            self.ports.push(name);
        }
        for net in netlist.nets() {
            if !matches!(netlist.driver(net), Driver::Constant(_)) {
                self.name(net);
            }
        }
    }

    fn name(&mut self, net: NetId) -> NameId {
        let index = net.index();
        if let Some(name) = self.names[index] {
            return name;
        }
        let wish = match self.netlist.driver(net) {
            Driver::Constant(value) => {
                self.constants.push(net);
                format!("constant_{}", u8::from(value)).into_bytes()
            }
            _ => full_name(self.netlist, net).unwrap_or_else(|| format!("v{index}").into_bytes()),
        };
        let name = self.taken.give(&fit(wish));
        self.names[index] = Some(name);
        name
    }

    /// A port that shows a net as it is goes by the net's name, and lends its own to
    /// a net that has none.
    fn port_name(&mut self, output: &Output) -> NameId {
        let net = output.signal.net;
        let is_constant = matches!(self.netlist.driver(net), Driver::Constant(_));
        let own = output
            .name
            .map(|name| self.netlist.names().bytes(name).to_vec());
        let wish = own.or_else(|| full_name(self.netlist, net));
        let wish = fit(wish.unwrap_or_else(|| format!("v{}", net.index()).into_bytes()));
        let plain = !output.signal.inverted && !is_constant;
        let net_name = full_name(self.netlist, net).map(fit);
        if plain && net_name.as_ref().is_none_or(|name| *name == wish) {
            match self.names[net.index()] {
                // An input that is an output too; no list names a port twice.
                Some(name) if self.taken.bytes(name) == wish => {
                    if self.shown.insert(net) {
                        return name;
                    }
                }
                Some(_) => {}
                None => {
                    let name = self.taken.give(&wish);
                    self.names[net.index()] = Some(name);
                    self.shown.insert(net);
                    return name;
                }
            }
        }
        self.taken.give(&wish)
    }

    fn begin(&mut self, word: &str) {
        self.line.begin(word);
    }

    fn word(&mut self, word: &[u8]) {
        self.line.word(word);
    }

    fn named(&mut self, name: NameId) {
        self.line.word(self.taken.bytes(name));
    }

    fn net(&mut self, net: NetId) {
        let name = self.name(net);
        self.named(name);
    }

    fn end(&mut self) -> io::Result<()> {
        self.line.text.push(b'\n');
        self.out.write_all(&self.line.text)
    }

    fn head(&mut self) -> io::Result<()> {
        let netlist = self.netlist;
        self.begin(".model");
        let name = netlist.model().map(|name| netlist.names().bytes(name));
        let name = fit(name.unwrap_or(b"netlist").to_vec());
        self.word(&name);
        self.end()?;
        // Both lists are there even when empty: nothing is inferred then.
        self.begin(".inputs");
        for &net in netlist.inputs() {
            self.net(net);
        }
        self.end()?;
        self.begin(".outputs");
        for &name in &self.ports {
            self.line.word(self.taken.bytes(name));
        }
        self.end()
    }

    /// The name of a signal; an inverter is written first where one is needed.
    fn signal(&mut self, signal: Signal) -> io::Result<NameId> {
        let name = self.name(signal.net);
        if !signal.inverted {
            return Ok(name);
        }
        if let Some(&known) = self.inverted.get(&signal.net) {
            return Ok(known);
        }
        let wish = [self.taken.bytes(name), b"_not"].concat();
        let inverse = self.taken.give(&wish);
        self.cover(Some(name), inverse, b"0 1\n")?;
        self.inverted.insert(signal.net, inverse);
        Ok(inverse)
    }

    /// A cover of at most one input.
    fn cover(&mut self, input: Option<NameId>, output: NameId, rows: &[u8]) -> io::Result<()> {
        self.begin(".names");
        if let Some(input) = input {
            self.named(input);
        }
        self.named(output);
        self.end()?;
        self.out.write_all(rows)
    }

    fn registers(&mut self) -> io::Result<()> {
        for register in self.netlist.registers() {
            let input = self.signal(register.input)?;
            self.begin(".latch");
            self.named(input);
            self.net(register.output);
            let kind: Option<&[u8]> = match register.trigger {
                Trigger::RisingEdge => Some(b"re"),
                Trigger::FallingEdge => Some(b"fe"),
                Trigger::ActiveHigh => Some(b"ah"),
                Trigger::ActiveLow => Some(b"al"),
                Trigger::Asynchronous => Some(b"as"),
                // A control net has to have a type; edges are the rule.
                Trigger::Unstated => register.control.map(|_| &b"re"[..]),
            };
            if let Some(kind) = kind {
                self.word(kind);
                match register.control {
                    Some(control) => self.net(control),
                    None => self.word(b"NIL"),
                }
            }
            if let Some(value) = initial(register.initial) {
                self.word(value);
            }
            self.end()?;
        }
        Ok(())
    }

    fn boxes(&mut self) -> io::Result<()> {
        for each in self.netlist.boxes() {
            let names = self.netlist.names();
            self.begin(match each.kind {
                BoxKind::Model | BoxKind::StateTable => ".subckt",
                BoxKind::Cell => ".gate",
                BoxKind::LatchCell(_) => ".mlatch",
            });
            let mut model = names.bytes(each.model).to_vec();
            if self.netlist.model() == Some(each.model) {
                // A state table of the top: the model may not contain itself.
                model.extend_from_slice(b"_table");
            }
            self.word(&fit(model));
            let mut control = None;
            for (i, &net) in each.inputs.iter().chain(&each.outputs).enumerate() {
                let pin = each.pins.get(i).map(|&pin| names.bytes(pin));
                let is_latch = matches!(each.kind, BoxKind::LatchCell(_));
                if is_latch && pin == Some(b"") {
                    control = Some(net);
                    continue;
                }
                let mut bound = match pin {
                    Some(pin) if !pin.is_empty() => pin.to_vec(),
                    _ => format!("pin{i}").into_bytes(),
                };
                bound.push(b'=');
                let name = self.name(net);
                bound.extend_from_slice(self.taken.bytes(name));
                self.word(&bound);
            }
            if let BoxKind::LatchCell(value) = each.kind {
                match control {
                    Some(net) => self.net(net),
                    None => self.word(b"NIL"),
                }
                if let Some(value) = initial(value) {
                    self.word(value);
                }
            }
            self.end()?;
        }
        Ok(())
    }

    fn gates(&mut self) -> io::Result<()> {
        let netlist = self.netlist;
        // Functions are shared by many gates; their rows are found once.
        let mut known: FxHashMap<u32, Vec<u8>> = FxHashMap::default();
        for gate in netlist.gates() {
            self.begin(".names");
            for &net in netlist.fan_ins(gate) {
                self.net(net);
            }
            self.net(netlist.gate_output(gate));
            self.end()?;
            let id = netlist.function_id(gate);
            let text = known
                .entry(id.0)
                .or_insert_with(|| rows_text(&rows::of(netlist.function_of(id))));
            self.out.write_all(text)?;
        }
        Ok(())
    }

    /// Ports that go by another name than what they show.
    fn ports(&mut self) -> io::Result<()> {
        for (i, output) in self.netlist.outputs().iter().enumerate() {
            let port = self.ports[i];
            let name = self.name(output.signal.net);
            if output.signal.inverted {
                self.cover(Some(name), port, b"0 1\n")?;
            } else if name != port {
                self.cover(Some(name), port, b"1 1\n")?;
            }
        }
        Ok(())
    }

    fn rest(&mut self) -> io::Result<()> {
        for net in std::mem::take(&mut self.constants) {
            let name = self.name(net);
            let is_one = self.netlist.driver(net) == Driver::Constant(true);
            let rows: &[u8] = if is_one { b"1\n" } else { b"" };
            self.cover(None, name, rows)?;
        }
        match self.netlist.properties().len() {
            0 => Ok(()),
            n => writeln!(
                self.out,
                "# {n} verification properties have no place in BLIF"
            ),
        }
    }
}

fn rows_text(rows: &rows::Rows) -> Vec<u8> {
    let mut text = Vec::new();
    for plane in &rows.planes {
        text.extend_from_slice(plane);
        if !plane.is_empty() {
            text.push(b' ');
        }
        text.push(rows.column);
        text.push(b'\n');
    }
    text
}

/// The digit of an initial value; an unknown one is the default.
fn initial(value: Initial) -> Option<&'static [u8]> {
    match value {
        Initial::Zero => Some(b"0"),
        Initial::One => Some(b"1"),
        Initial::Any => Some(b"2"),
        Initial::Unknown => None,
    }
}
