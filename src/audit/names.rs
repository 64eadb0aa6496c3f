//! Names of operands: many nets told as one bus.
//!
//! A bus is read from the spelling of its bits (see `netlist::bus`) and told as
//! `a[15:0]`, most significant bit first, only when every bit agrees and the
//! indices run up or down by one; up to three gaps are told, `a[15:8,6:0]`.
//! Anything else is told by its highest and lowest bit, in that order too, so
//! that no name claims indices the netlist does not have.

use super::record::{Operand, Wire};
use crate::netlist::bus::{bus_bit, difference};
use crate::netlist::{Bit, NetId, Netlist, Signal};

/// A bit as it is written in a record.
pub fn wire(netlist: &Netlist, bit: Bit) -> Wire {
    match bit {
        Bit::Constant(value) => Wire::Constant(u8::from(value)),
        Bit::Signal(signal) => Wire::Net(netlist.signal_name(signal)),
    }
}

/// An operand, least significant bit first.
pub fn operand(netlist: &Netlist, bits: &[Bit]) -> Operand {
    Operand {
        name: word_name(netlist, bits),
        nets: bits.iter().map(|&bit| wire(netlist, bit)).collect(),
    }
}

/// The name of a word. Zeros below a bus are told as a shift, its top bit
/// repeated as sign extension; other constant bits do not take part in the name.
fn word_name(netlist: &Netlist, bits: &[Bit]) -> String {
    let zeros = bits
        .iter()
        .take_while(|&&bit| bit == Bit::Constant(false))
        .count();
    let signals: Vec<Signal> = bits.iter().filter_map(|bit| bit.signal()).collect();
    let (Some(&first), Some(&last)) = (signals.first(), signals.last()) else {
        return constant_name(bits);
    };
    let repeated = signals
        .iter()
        .rev()
        .take_while(|&&signal| signal == last)
        .count();
    let distinct = &signals[..signals.len() + 1 - repeated];
    // Constants in between would make the shift or the extension a lie.
    let solid = bits[zeros..]
        .iter()
        .take_while(|bit| bit.signal().is_some())
        .count();
    let solid = solid == signals.len();
    let name = if distinct.len() == 1 {
        netlist.signal_name(first)
    } else {
        let bus = bus_name(netlist, distinct);
        bus.unwrap_or_else(|| {
            format!(
                "{}…{}",
                netlist.signal_name(last),
                netlist.signal_name(first)
            )
        })
    };
    let extended = if repeated > 1 && distinct.len() > 1 && solid {
        " sign-extended"
    } else {
        ""
    };
    match zeros {
        1.. if solid && distinct.len() > 1 => format!("({name}{extended} << {zeros})"),
        _ if !extended.is_empty() => format!("({name}{extended})"),
        _ => name,
    }
}

fn constant_name(bits: &[Bit]) -> String {
    let digit = |bit: &Bit| {
        if *bit == Bit::Constant(true) {
            '1'
        } else {
            '0'
        }
    };
    let digits: String = bits.iter().rev().map(digit).collect();
    format!("0b{digits}")
}

fn bus_name(netlist: &Netlist, signals: &[Signal]) -> Option<String> {
    let inverted = signals[0].inverted;
    if signals.iter().any(|signal| signal.inverted != inverted) {
        return None;
    }
    let names = signals.iter().map(|signal| named(netlist, signal.net));
    let names: Vec<String> = names.collect::<Option<_>>()?;
    let mark = if inverted { "~" } else { "" };
    let (base, indices, tail) = by_last_index(&names).or_else(|| by_difference(&names))?;
    Some(format!("{mark}{base}[{}]{tail}", ranges(&indices)?))
}

/// The base, the indices and what follows them.
type Indexed<'a> = (&'a str, Vec<i64>, &'a str);

fn by_last_index(names: &[String]) -> Option<Indexed<'_>> {
    let (base, _) = split(&names[0])?;
    let indices = names.iter().map(|name| {
        let (stem, index) = split(name)?;
        (stem == base).then_some(index)
    });
    Some((base, indices.collect::<Option<_>>()?, ""))
}

fn by_difference(names: &[String]) -> Option<Indexed<'_>> {
    let bus = difference(&names[0], &names[1])?;
    let indices = names.iter().map(|name| bus.index_of(name).map(i64::from));
    Some((bus.base, indices.collect::<Option<_>>()?, bus.tail))
}

/// Ranges of a bus told at most.
const RANGES: usize = 4;

/// Indices given from the least significant bit as ranges from the most
/// significant: `15:0`, or `15:8,6:0` with a gap. They run one way.
fn ranges(indices: &[i64]) -> Option<String> {
    let step = (indices[1] - indices[0]).signum();
    let runs_one_way = |pair: &[i64]| (pair[1] - pair[0]).signum() == step && step != 0;
    if !indices.windows(2).all(runs_one_way) {
        return None;
    }
    let runs = indices.chunk_by(|low, high| high - low == step);
    let mut told: Vec<String> = runs
        .map(|run| match run {
            [only] => only.to_string(),
            _ => format!("{}:{}", run[run.len() - 1], run[0]),
        })
        .collect();
    told.reverse();
    // Single bits far apart are no bus.
    (told.len() <= RANGES && 2 * told.len() <= indices.len()).then(|| told.join(","))
}

/// The net's name, unless it is only its number.
fn named(netlist: &Netlist, net: NetId) -> Option<String> {
    netlist.local_name(net).map(|_| netlist.net_name(net))
}

/// `a[3]` and its other spellings as `a` and 3.
fn split(name: &str) -> Option<(&str, i64)> {
    let bit = bus_bit(name)?;
    // `u_total/3` is a net called 3, not bit 3 of anything.
    (!bit.base.ends_with('/')).then(|| (bit.base, i64::from(bit.index)))
}

/// Ports grouped into buses in the order they are listed: the name of each bus
/// and the indices of its ports. A bus is a run of neighbours.
pub fn port_buses(names: &[String]) -> Vec<(String, std::ops::Range<usize>)> {
    let mut buses: Vec<(String, std::ops::Range<usize>)> = Vec::new();
    let mut start = 0;
    while start < names.len() {
        let mut end = start + 1;
        let mut name = names[start].clone();
        if let Some((stem, first)) = split(&names[start]) {
            let mut step = 0;
            let mut last = first;
            while let Some((next, index)) = names.get(end).and_then(|name| split(name)) {
                let by = index - last;
                if next != stem || by.abs() != 1 || (step != 0 && by != step) {
                    break;
                }
                (step, last) = (by, index);
                end += 1;
            }
            if end > start + 1 {
                let (low, high) = (first.min(last), first.max(last));
                name = format!("{stem}[{high}:{low}]");
            }
        }
        buses.push((name, start..end));
        start = end;
    }
    buses
}
