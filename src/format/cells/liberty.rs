//! The part of a Liberty library that says what cells do.
//!
//! A library is groups `kind(names) { … }` of attributes `name : value;` and
//! `name(values);`. Of these are used `library`, `cell`, `pin`, `ff` and `latch`,
//! and in them `direction`, `function`, `three_state`, `next_state`, `clocked_on`,
//! `data_in` and `enable`; `clear` and `preset` of registers are folded into what
//! is stored. Everything else is passed over by its shape. From memory of the open
//! Liberty description; clauses in `grammar-notes/cells.md`.
//!
//! Tokens are nom parsers; groups are followed on an explicit stack.

use super::Library;
use super::expression::{self, Expressed};
use crate::netlist::cell::Cells;
use crate::netlist::{
    Function, Initial, NetId, Netlist, NetlistBuilder, Register, ScopeId, Signal, Trigger,
};
use crate::source::{Diagnostic, Place, Source, quote};
use nom::branch::alt;
use nom::bytes::complete::{tag, take_until, take_while1};
use nom::character::complete::{char, multispace1};
use nom::combinator::{opt, recognize, value};
use nom::multi::many0_count;
use nom::sequence::{delimited, preceded};
use nom::{IResult, Parser};
use std::collections::BTreeMap;

/// Most groups inside each other.
const DEEPEST: usize = 256;

/// Whether the text is a Liberty library.
pub(in crate::format) fn is_liberty(bytes: &[u8]) -> bool {
    let text = String::from_utf8_lossy(&bytes[..bytes.len().min(1 << 16)]);
    let Ok((rest, _)) = blank(&text) else {
        return false;
    };
    rest.strip_prefix("library")
        .is_some_and(|rest| rest.trim_start().starts_with('('))
}

/// Blanks, comments and continued lines.
pub(in crate::format) fn blank(text: &str) -> IResult<&str, ()> {
    let comment = delimited(tag("/*"), take_until("*/"), tag("*/"));
    let continued = preceded(char('\\'), multispace1);
    value(
        (),
        many0_count(alt((multispace1, recognize(comment), recognize(continued)))),
    )
    .parse(text)
}

/// A word, or a text in quotes.
pub(in crate::format) fn word(text: &str) -> IResult<&str, &str> {
    let quoted = delimited(char('"'), opt(take_until("\"")), char('"'));
    let bare = take_while1(|c: char| !c.is_whitespace() && !"(){};:,\"\\".contains(c));
    alt((quoted.map(Option::unwrap_or_default), bare)).parse(text)
}

/// What one cell says.
#[derive(Default)]
struct Cell {
    name: String,
    line: u32,
    pins: Vec<Pin>,
    stores: Vec<Stored>,
    /// It holds what is not read here, such as a state table.
    other: bool,
}

#[derive(Default)]
struct Pin {
    name: String,
    said: BTreeMap<String, (String, u32)>,
}

#[derive(Default)]
struct Stored {
    latch: bool,
    states: Vec<String>,
    said: BTreeMap<String, (String, u32)>,
}

enum Group {
    Library,
    Cell,
    Pin,
    Stored,
    Other,
}

/// Reads a library.
pub(super) fn read(source: &Source) -> Result<Library, Diagnostic> {
    let whole = String::from_utf8_lossy(&source.bytes);
    let mut scanner = Scanner {
        source,
        rest: &whole,
        line: 1,
        seen: &whole,
    };
    let mut library = Library {
        cells: Cells::default(),
        warnings: Vec::new(),
    };
    let mut stack: Vec<Group> = Vec::new();
    let mut cell = Cell::default();
    loop {
        scanner.skip()?;
        if scanner.rest.is_empty() {
            return if stack.is_empty() {
                Ok(library)
            } else {
                Err(scanner.expected("`}`"))
            };
        }
        if scanner.rest.starts_with('}') {
            match stack.pop() {
                Some(Group::Cell) => finish(source, &mut library, std::mem::take(&mut cell))?,
                Some(_) => {}
                None => return Err(scanner.expected("a group, `kind(name) {`")),
            }
            scanner.take('}');
            continue;
        }
        if scanner.take(';') {
            continue;
        }
        scanner.statement(&mut stack, &mut cell)?;
    }
}

struct Scanner<'s, 't> {
    source: &'s Source,
    rest: &'t str,
    line: u32,
    /// The text from where lines were counted last.
    seen: &'t str,
}

impl<'t> Scanner<'_, 't> {
    #[cold]
    fn expected(&mut self, what: &str) -> Diagnostic {
        let line = self.line();
        let mut found: String = self.rest.chars().take(20).collect();
        if let Some(end) = found.find('\n') {
            found.truncate(end);
        }
        let found = if found.is_empty() {
            "the end of the line or file".to_owned()
        } else {
            quote(found.as_bytes())
        };
        Diagnostic::error(
            &self.source.name,
            Place::line(line),
            format!("expected {what}, found {found}"),
            "a Liberty library is groups `kind(name) { ... }` of attributes `name : value;`",
        )
    }

    fn line(&mut self) -> u32 {
        let passed = &self.seen.as_bytes()[..self.seen.len() - self.rest.len()];
        self.line += passed.iter().filter(|&&b| b == b'\n').count() as u32;
        self.seen = self.rest;
        self.line
    }

    fn skip(&mut self) -> Result<(), Diagnostic> {
        match blank(self.rest) {
            Ok((rest, ())) => {
                self.rest = rest;
                if rest.starts_with("/*") {
                    return Err(self.expected("`*/` at the end of a comment"));
                }
                Ok(())
            }
            Err(_) => Ok(()),
        }
    }

    fn take(&mut self, sign: char) -> bool {
        let found = self.rest.strip_prefix(sign);
        self.rest = found.unwrap_or(self.rest);
        found.is_some()
    }

    fn word(&mut self, what: &str) -> Result<&'t str, Diagnostic> {
        self.skip()?;
        match word(self.rest) {
            Ok((rest, word)) => {
                self.rest = rest;
                Ok(word)
            }
            Err(_) => Err(self.expected(what)),
        }
    }

    fn statement(&mut self, stack: &mut Vec<Group>, cell: &mut Cell) -> Result<(), Diagnostic> {
        let line = self.line();
        let name = self.word("an attribute or a group")?;
        self.skip()?;
        if self.take(':') {
            // A value may be several words, as `VDD + 0.5`.
            let mut said = self.word("a value")?.to_owned();
            loop {
                self.skip()?;
                if self.take(';') || self.rest.starts_with('}') {
                    break;
                }
                let next = self.line();
                // The closing semicolon is often left out at the end of a line.
                if next != line && !said.is_empty() {
                    break;
                }
                said.push_str(self.word("`;`")?);
            }
            self.note(stack, cell, name, said, line);
            return Ok(());
        }
        if !self.take('(') {
            return Err(self.expected("`:` or `(`"));
        }
        let mut names = Vec::new();
        loop {
            self.skip()?;
            if self.take(')') {
                break;
            }
            if !self.take(',') && !self.take(':') {
                names.push(self.word("a name or `)`")?.to_owned());
            }
        }
        self.skip()?;
        if !self.take('{') {
            self.take(';');
            return Ok(());
        }
        if stack.len() == DEEPEST {
            return Err(self.expected(&format!("at most {DEEPEST} groups inside each other")));
        }
        let group = match (stack.last(), name) {
            (None, "library") => Group::Library,
            (Some(Group::Library), "cell") => {
                *cell = Cell {
                    name: names.first().cloned().unwrap_or_default(),
                    line,
                    ..Cell::default()
                };
                Group::Cell
            }
            (Some(Group::Cell), "pin") => {
                for name in &names {
                    cell.pins.push(Pin {
                        name: name.clone(),
                        said: BTreeMap::new(),
                    });
                }
                cell.other |= names.len() != 1;
                Group::Pin
            }
            (Some(Group::Cell), "ff" | "latch") => {
                cell.stores.push(Stored {
                    latch: name == "latch",
                    states: names,
                    said: BTreeMap::new(),
                });
                Group::Stored
            }
            (Some(Group::Cell), "statetable" | "ff_bank" | "latch_bank" | "bus" | "bundle") => {
                cell.other = true;
                Group::Other
            }
            _ => Group::Other,
        };
        stack.push(group);
        Ok(())
    }

    fn note(&self, stack: &[Group], cell: &mut Cell, name: &str, said: String, line: u32) {
        let slot = match stack.last() {
            Some(Group::Pin) => cell.pins.last_mut().map(|pin| &mut pin.said),
            Some(Group::Stored) => cell.stores.last_mut().map(|stored| &mut stored.said),
            _ => None,
        };
        if let Some(slot) = slot {
            slot.insert(name.to_owned(), (said, line));
        }
    }
}

/// Takes a cell over when all it does is known.
fn finish(source: &Source, library: &mut Library, cell: Cell) -> Result<(), Diagnostic> {
    let line = cell.line;
    let fault = |line, message: String, help: &str| {
        Diagnostic::error(&source.name, Place::line(line), message, help)
    };
    if cell.name.is_empty() {
        return Err(fault(
            line,
            "expected the name of a cell, found none".into(),
            "",
        ));
    }
    match body(&cell) {
        Ok(Some(netlist)) => {
            if !library.cells.add(cell.name.as_bytes(), netlist) {
                let message = format!("expected one cell {}, found a second", cell.name);
                return Err(fault(line, message, "leave one of them out"));
            }
            Ok(())
        }
        Ok(None) => {
            library.warnings.push(Diagnostic::warning(
                &source.name,
                Place::line(line),
                format!(
                    "the function of the cell {} is not given",
                    quote(cell.name.as_bytes())
                ),
                "its instances stay without a known function",
            ));
            Ok(())
        }
        Err((line, expected)) => Err(fault(
            line,
            format!("expected {expected}"),
            "operators are `!`, `'`, `^`, `&`, `*`, `+`, `|` and parentheses; operands are pins",
        )),
    }
}

type Wrong = (u32, String);

/// The cell as a netlist; none when a part of what it does is not given.
fn body(cell: &Cell) -> Result<Option<Netlist>, Wrong> {
    let direction = |pin: &Pin| pin.said.get("direction").map(|(said, _)| said.clone());
    let mut states = cell.stores.iter().flat_map(|stored| &stored.states);
    let clash = states.any(|state| cell.pins.iter().any(|pin| pin.name == *state));
    if cell.other || cell.stores.len() > 1 || clash {
        return Ok(None);
    }
    let mut builder = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let mut nets: BTreeMap<&str, NetId> = BTreeMap::new();
    let too_many = |_| (cell.line, "a smaller cell".to_owned());
    let model = builder.name(cell.name.as_bytes());
    builder.set_model(model);
    for pin in &cell.pins {
        let name = builder.name(pin.name.as_bytes());
        let net = builder.add_net(Some(name), top).map_err(too_many)?;
        nets.insert(&pin.name, net);
        match direction(pin).as_deref() {
            Some("input") => builder.add_input(net, 0),
            Some("output") => builder.add_output(Signal::plain(net), None, 0),
            // Power pins and the like carry nothing; a two-way pin is not followed.
            Some("internal") => {}
            _ => return Ok(None),
        }
    }
    for state in cell.stores.iter().flat_map(|stored| &stored.states) {
        if !nets.contains_key(state.as_str()) {
            let net = builder.add_net(None, top).map_err(too_many)?;
            nets.insert(state, net);
        }
    }
    for stored in &cell.stores {
        if !store(&mut builder, cell, stored, &nets)? {
            return Ok(None);
        }
    }
    for pin in &cell.pins {
        if direction(pin).as_deref() != Some("output") {
            continue;
        }
        let (Some((said, line)), false) = (
            pin.said.get("function"),
            pin.said.contains_key("three_state"),
        ) else {
            return Ok(None);
        };
        let net = nets[pin.name.as_str()];
        gate(&mut builder, said, *line, &nets, net)?;
    }
    Ok(Some(builder.finish()))
}

fn gate(
    builder: &mut NetlistBuilder,
    said: &str,
    line: u32,
    nets: &BTreeMap<&str, NetId>,
    output: NetId,
) -> Result<(), Wrong> {
    let Expressed { function, pins } = expression::read(said).map_err(|what| (line, what))?;
    let mut fan_ins = Vec::new();
    for pin in &pins {
        let Some(&net) = nets.get(pin.as_str()) else {
            return Err((
                line,
                format!("a pin of the cell, found {}", quote(pin.as_bytes())),
            ));
        };
        fan_ins.push(net);
    }
    let function = builder.function(function);
    builder
        .add_gate(function, &fan_ins, output, ScopeId::new(0), line)
        .map_err(|_| (line, "a smaller cell".to_owned()))?;
    Ok(())
}

/// A gate without delay from what would be stored to what is, when an expression
/// makes it `value` instead.
fn override_gate(
    builder: &mut NetlistBuilder,
    (when, line): (&str, u32),
    value: bool,
    nets: &BTreeMap<&str, NetId>,
    (input, output): (NetId, NetId),
) -> Result<(), Wrong> {
    let (top, too_many) = (ScopeId::new(0), |_| (line, "a smaller cell".to_owned()));
    let Expressed { function, pins } = expression::read(when).map_err(|what| (line, what))?;
    let mut fan_ins = Vec::new();
    for pin in &pins {
        let Some(&net) = nets.get(pin.as_str()) else {
            let found = quote(pin.as_bytes());
            return Err((line, format!("a pin of the cell, found {found}")));
        };
        fan_ins.push(net);
    }
    let inverted = function == Function::buffer(true);
    let when = if inverted || function == Function::buffer(false) {
        fan_ins[0]
    } else {
        let net = builder.add_net(None, top).map_err(too_many)?;
        let function = builder.function_with_delays(function, &vec![0; pins.len()]);
        builder
            .add_gate(function, &fan_ins, net, top, line)
            .map_err(too_many)?;
        net
    };
    // OR is the complement of a product of complements.
    let function = Function::product(&[value, !inverted], value);
    let function = builder.function_with_delays(function, &[0, 0]);
    builder
        .add_gate(function, &[input, when], output, top, line)
        .map_err(too_many)?;
    Ok(())
}

/// Adds the register of a cell; false when what it stores is not given.
fn store(
    builder: &mut NetlistBuilder,
    cell: &Cell,
    stored: &Stored,
    nets: &BTreeMap<&str, NetId>,
) -> Result<bool, Wrong> {
    let top = ScopeId::new(0);
    let too_many = |_| (cell.line, "a smaller cell".to_owned());
    let said = |key: &str| stored.said.get(key);
    let (data, control) = if stored.latch {
        (said("data_in"), said("enable"))
    } else {
        (said("next_state"), said("clocked_on"))
    };
    let (Some((data, data_line)), Some((control, control_line))) = (data, control) else {
        return Ok(false);
    };
    let mut input = match nets.get(data.trim()) {
        Some(&net) => net,
        None => {
            let net = builder.add_net(None, top).map_err(too_many)?;
            gate(builder, data, *data_line, nets, net)?;
            net
        }
    };
    // What clears or sets is folded into what is stored. It happens inside the
    // register, so it takes no time of its own.
    for (key, value) in [("clear", false), ("preset", true)] {
        if let Some((when, line)) = said(key) {
            let stored = builder.add_net(None, top).map_err(too_many)?;
            override_gate(builder, (when, *line), value, nets, (input, stored))?;
            input = stored;
        }
    }
    let Expressed { function, pins } =
        expression::read(control).map_err(|what| (*control_line, what))?;
    let single = match pins.as_slice() {
        [pin] => nets.get(pin.as_str()).copied(),
        _ => None,
    };
    let inverted = function == Function::buffer(true);
    let (control, inverted) = match single {
        Some(net) if inverted || function == Function::buffer(false) => (net, inverted),
        _ => {
            let net = builder.add_net(None, top).map_err(too_many)?;
            gate(builder, control, *control_line, nets, net)?;
            (net, false)
        }
    };
    let trigger = match (stored.latch, inverted) {
        (false, false) => Trigger::RisingEdge,
        (false, true) => Trigger::FallingEdge,
        (true, false) => Trigger::ActiveHigh,
        (true, true) => Trigger::ActiveLow,
    };
    let [state, rest @ ..] = stored.states.as_slice() else {
        return Ok(false);
    };
    builder.add_register(Register {
        input: Signal::plain(input),
        output: nets[state.as_str()],
        trigger,
        control: Some(control),
        initial: Initial::Unknown,
        line: 0,
    });
    if let Some(complement) = rest.first() {
        let state = nets[state.as_str()];
        let function = builder.function(Function::buffer(true));
        let output = nets[complement.as_str()];
        builder
            .add_gate(function, &[state], output, top, 0)
            .map_err(too_many)?;
    }
    Ok(true)
}
