//! The text form: every input, latch and AND names its own literal, in any order
//! and with any gaps.
//!
//! All sections are read first, since a literal may be used before it is
//! defined; then variables are mapped to nets, then everything is built. Line
//! numbers need no storage: every object has a line of its own, in the order of
//! the sections. A loop of ANDs is found on the finished netlist with the
//! model's own topological order.

use super::binary::reset;
use super::header::Header;
use super::tokens::Cursor;
use super::{Watched, initial, products, same_number, symbols, too_large};
use crate::netlist::{
    Driver, NetId, Netlist, NetlistBuilder, Register, ScopeId, Signal, Topology, Trigger,
};
use crate::source::{Diagnostic, Place};
use fixedbitset::FixedBitSet;

/// Line of the first object.
const FIRST: usize = 2;
/// Most members of a loop that a message names.
const SHOWN: usize = 8;

struct Latch {
    own: u32,
    next: u32,
    reset: u32,
}

/// Everything the file lists, as literals.
struct Listed {
    inputs: Vec<u32>,
    latches: Vec<Latch>,
    watched: Watched,
    ands: Vec<[u32; 3]>,
}

pub(super) fn read(cursor: &mut Cursor<'_>, header: &Header) -> Result<Netlist, Diagnostic> {
    let listed = Listed::read(cursor, header)?;
    let variables = Variables::of(&listed, header, cursor)?;
    let mut builder = NetlistBuilder::new();
    builder.set_inverted_edges();
    listed.build(cursor, &variables, &mut builder)?;
    symbols::read(cursor, header, &mut builder, &listed.watched.justice_sizes)?;
    let netlist = builder.finish();
    match loop_fault(cursor, &netlist) {
        Some(fault) => Err(fault),
        None => Ok(netlist),
    }
}

impl Listed {
    fn read(cursor: &mut Cursor<'_>, header: &Header) -> Result<Self, Diagnostic> {
        let mut inputs = Vec::new();
        for _ in 0..header.inputs {
            inputs.push(cursor.definition("an input literal", header)?);
            cursor.line_end()?;
        }
        let mut latches = Vec::new();
        for _ in 0..header.latches {
            let own = cursor.definition("a latch literal", header)?;
            cursor.blank("a latch's next literal")?;
            let next = cursor.literal("a latch's next literal", header)?;
            let reset = reset(cursor, own)?;
            cursor.line_end()?;
            latches.push(Latch { own, next, reset });
        }
        let watched = Watched::read(cursor, header)?;
        let mut ands = Vec::new();
        for _ in 0..header.ands {
            let own = cursor.definition("an AND literal", header)?;
            cursor.blank("an AND's first operand")?;
            let first = cursor.literal("an AND's first operand", header)?;
            cursor.blank("an AND's second operand")?;
            let second = cursor.literal("an AND's second operand", header)?;
            cursor.line_end()?;
            ands.push([own, first, second]);
        }
        Ok(Self {
            inputs,
            latches,
            watched,
            ands,
        })
    }

    /// Line of AND 0.
    fn first_and_line(&self) -> usize {
        FIRST + self.inputs.len() + self.latches.len() + self.watched.lines()
    }

    /// Every defined variable with its line.
    fn definitions(&self) -> impl Iterator<Item = (u32, usize)> + '_ {
        let latches = self.latches.iter().map(|latch| latch.own);
        let leaves = self.inputs.iter().copied().chain(latches);
        let ands = self.ands.iter().map(|and| and[0]);
        let first_and = self.first_and_line();
        leaves
            .enumerate()
            .map(|(i, literal)| (literal >> 1, FIRST + i))
            .chain(
                ands.enumerate()
                    .map(move |(i, literal)| (literal >> 1, first_and + i)),
            )
    }

    /// Every used literal with its line.
    fn uses(&self) -> impl Iterator<Item = (u32, usize)> + '_ {
        let latches = FIRST + self.inputs.len();
        let watched = latches + self.latches.len();
        let ands = self.first_and_line();
        let next = self.latches.iter().map(|latch| latch.next).enumerate();
        let operands = self.ands.iter().enumerate();
        next.map(move |(i, literal)| (literal, latches + i))
            .chain(
                self.watched
                    .literals_with_lines()
                    .map(move |(i, literal)| (literal, watched + i)),
            )
            .chain(operands.flat_map(move |(i, and)| [(and[1], ands + i), (and[2], ands + i)]))
    }

    fn build(
        &self,
        cursor: &Cursor<'_>,
        variables: &Variables,
        builder: &mut NetlistBuilder,
    ) -> Result<(), Diagnostic> {
        let top = ScopeId::new(0);
        let large = |fault| too_large(cursor, fault);
        builder.constant(false).map_err(large)?;
        for _ in 0..self.inputs.len() + self.latches.len() + self.ands.len() {
            builder.add_net(None, top).map_err(large)?;
        }
        variables.name_moved(builder);
        let net = |literal| variables.signal(literal).net;
        for (i, &input) in self.inputs.iter().enumerate() {
            builder.add_input(net(input), (FIRST + i) as u32);
        }
        for (i, latch) in self.latches.iter().enumerate() {
            builder.add_register(Register {
                input: variables.signal(latch.next),
                output: net(latch.own),
                trigger: Trigger::Unstated,
                control: None,
                initial: initial(latch.reset),
                line: (FIRST + self.inputs.len() + i) as u32,
            });
        }
        let functions = products(builder);
        let first_and = self.first_and_line();
        for (i, &[own, first, second]) in self.ands.iter().enumerate() {
            let function = functions[(first & 1 | (second & 1) << 1) as usize];
            let fan_ins = [net(first), net(second)];
            let line = (first_and + i) as u32;
            builder
                .add_gate(function, &fan_ins, net(own), top, line)
                .map_err(large)?;
        }
        let outputs = (FIRST + self.inputs.len() + self.latches.len()) as u32;
        self.watched
            .build(builder, outputs, |literal| variables.signal(literal));
        Ok(())
    }
}

/// The map from variables to nets.
enum Variables {
    /// Without gaps a variable is its net.
    Same,
    /// With gaps the defined variables in order; the net of entry `i` is `i + 1`.
    Moved(Vec<u32>),
}

impl Variables {
    /// Checks that every variable is defined once and every used one is defined.
    fn of(listed: &Listed, header: &Header, cursor: &Cursor<'_>) -> Result<Self, Diagnostic> {
        let twice = |variable| Err(defined_twice(cursor, listed, variable));
        if header.defined() == u64::from(header.largest) {
            let mut seen = FixedBitSet::with_capacity(header.largest as usize + 1);
            for (variable, _) in listed.definitions() {
                if seen.put(variable as usize) {
                    return twice(variable);
                }
            }
            // As many different definitions as variables: none is missing.
            return Ok(Self::Same);
        }
        let mut defined: Vec<u32> = listed.definitions().map(|(v, _)| v).collect();
        defined.sort_unstable();
        if let Some(pair) = defined.windows(2).find(|pair| pair[0] == pair[1]) {
            return twice(pair[0]);
        }
        let missing = listed
            .uses()
            .find(|(literal, _)| *literal > 1 && defined.binary_search(&(literal >> 1)).is_err());
        match missing {
            Some((literal, line)) => Err(Diagnostic::error(
                cursor.file(),
                Place::line(line as u32),
                format!(
                    "expected a literal of a defined variable, found {literal}, and nothing \
                     defines variable {}",
                    literal >> 1
                ),
                "define it as an input, a latch or an AND",
            )),
            None => Ok(Self::Moved(defined)),
        }
    }

    fn signal(&self, literal: u32) -> Signal {
        let Self::Moved(defined) = self else {
            return same_number(literal);
        };
        // The constant lies before every variable; all others were checked.
        let net = match defined.binary_search(&(literal >> 1)) {
            Ok(index) => index + 1,
            Err(_) => 0,
        };
        Signal {
            net: NetId::new(net),
            inverted: literal & 1 == 1,
        }
    }

    /// Nets whose number is not their variable's get the variable as a name.
    fn name_moved(&self, builder: &mut NetlistBuilder) {
        let Self::Moved(defined) = self else { return };
        for (i, &variable) in defined.iter().enumerate() {
            if variable as usize != i + 1 {
                let name = builder.name(format!("v{variable}").as_bytes());
                builder.set_net_name(NetId::new(i + 1), name);
            }
        }
    }
}

#[cold]
fn defined_twice(cursor: &Cursor<'_>, listed: &Listed, variable: u32) -> Diagnostic {
    let mut lines = listed
        .definitions()
        .filter(|&(other, _)| other == variable)
        .map(|(_, line)| line as u32);
    let first = lines.next().unwrap_or(0);
    let second = lines.next().unwrap_or(0);
    Diagnostic::error(
        cursor.file(),
        Place::line(second),
        format!("expected one definition of variable {variable}, found a second"),
        "give each input, latch and AND a literal of its own",
    )
    .and(first, "first defined here")
}

/// Names one loop of ANDs, when there is one.
fn loop_fault(cursor: &Cursor<'_>, netlist: &Netlist) -> Option<Diagnostic> {
    let topology = Topology::of(netlist);
    let members = topology.loops.first()?;
    // From any member some fan-in lies in the same component; walking such
    // fan-ins comes round.
    let inside = |net: NetId| members.binary_search(&net).is_ok();
    let gate_of = |net| match netlist.driver(net) {
        Driver::Gate(gate) => Some(gate),
        _ => None,
    };
    let mut walk = Vec::new();
    let mut seen = FixedBitSet::with_capacity(netlist.net_count());
    let mut net = members[0];
    while !seen.put(net.index()) {
        walk.push(net);
        let fan_ins = netlist.fan_ins(gate_of(net)?);
        net = fan_ins.iter().copied().find(|&n| inside(n))?;
    }
    let start = walk.iter().position(|&n| n == net)?;
    // Walked from readers to what they read; told in the direction of signals.
    let mut cycle: Vec<NetId> = walk.split_off(start);
    cycle.reverse();
    let line = |net| gate_of(net).map_or(0, |gate| netlist.gate_line(gate));
    let mut told: Vec<String> = cycle
        .iter()
        .take(SHOWN)
        .map(|&net| format!("{} (line {})", netlist.net_name(net), line(net)))
        .collect();
    if cycle.len() > SHOWN {
        told.push(format!("{} more", cycle.len() - SHOWN));
    }
    told.push(netlist.net_name(cycle[0]));
    Some(Diagnostic::error(
        cursor.file(),
        Place::line(line(cycle[0])),
        format!(
            "expected ANDs without loops, found the loop {}",
            told.join(" -> ")
        ),
        "every loop has to pass through a latch",
    ))
}
