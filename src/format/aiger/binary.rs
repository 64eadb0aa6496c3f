//! The binary form: inputs implied, latches and outputs as text lines, then one
//! pair of variable-length differences per AND.
//!
//! An AND's left side is implied (the next even literal); its operands come as
//! `lhs - rhs0` and `rhs0 - rhs1`, seven bits a byte, least significant group
//! first, the top bit saying that more follows. Since `lhs > rhs0 >= rhs1` a
//! binary file cannot hold a loop and its ANDs stand in topological order. The
//! section is decoded by a plain loop, which does in half the time what parser
//! combinators take.

use super::header::Header;
use super::tokens::Cursor;
use super::{Watched, initial, products, same_number, symbols, too_large};
use crate::netlist::{NetId, Netlist, NetlistBuilder, Register, ScopeId, Trigger};
use crate::source::{Diagnostic, Place};

pub(super) fn read(cursor: &mut Cursor<'_>, header: &Header) -> Result<Netlist, Diagnostic> {
    let top = ScopeId::new(0);
    let mut builder = NetlistBuilder::new();
    builder.set_inverted_edges();
    let mut failed = builder.constant(false).err();
    for _ in 0..header.inputs {
        match builder.add_net(None, top) {
            Ok(net) => builder.add_input(net, 0),
            Err(fault) => failed = failed.or(Some(fault)),
        }
    }
    if let Some(fault) = failed {
        return Err(too_large(cursor, fault));
    }
    for _ in 0..header.latches {
        let output = builder
            .add_net(None, top)
            .map_err(|fault| too_large(cursor, fault))?;
        let own = output.index() as u32 * 2;
        let next = cursor.literal("a latch's next literal", header)?;
        let reset = reset(cursor, own)?;
        cursor.line_end()?;
        builder.add_register(Register {
            input: same_number(next),
            output,
            trigger: Trigger::Unstated,
            control: None,
            initial: initial(reset),
            line: 0,
        });
    }
    let watched = Watched::read(cursor, header)?;
    ands(cursor, header, &mut builder)?;
    watched.build(&mut builder, 0, same_number);
    symbols::read(cursor, header, &mut builder, &watched.justice_sizes)?;
    Ok(builder.finish())
}

/// The optional reset literal: 0, 1 or the latch's own.
pub(super) fn reset(cursor: &mut Cursor<'_>, own: u32) -> Result<u32, Diagnostic> {
    if !cursor.at_blank() {
        return Ok(0);
    }
    cursor.blank("a reset literal")?;
    let start = cursor.offset();
    let reset = cursor.number("a reset literal")?;
    if reset > 1 && reset != own {
        return Err(cursor.fault_at(
            start,
            format!("expected a reset literal of 0, 1 or {own}, found {reset}"),
            "a latch starts at 0, at 1, or uninitialised, which its own literal says",
        ));
    }
    Ok(reset)
}

fn ands(
    cursor: &mut Cursor<'_>,
    header: &Header,
    builder: &mut NetlistBuilder,
) -> Result<(), Diagnostic> {
    let top = ScopeId::new(0);
    let functions = products(builder);
    let bytes = cursor.rest();
    let base = cursor.offset();
    let mut at = 0;
    let mut lhs = (header.inputs + header.latches + 1).wrapping_mul(2);
    for _ in 0..header.ands {
        let start = at;
        let Ok(delta) = difference(bytes, &mut at) else {
            return Err(number_fault(cursor, bytes, base, start, lhs));
        };
        if delta == 0 || delta > lhs {
            return Err(order_fault(cursor, base + start, lhs, delta, None));
        }
        let first = lhs - delta;
        let start = at;
        let Ok(delta) = difference(bytes, &mut at) else {
            return Err(number_fault(cursor, bytes, base, start, lhs));
        };
        if delta > first {
            return Err(order_fault(cursor, base + start, lhs, delta, Some(first)));
        }
        let second = first - delta;
        let added = builder.add_net(None, top).and_then(|output| {
            let function = functions[(first & 1 | (second & 1) << 1) as usize];
            let fan_ins = [first, second].map(|literal| NetId::new((literal >> 1) as usize));
            builder.add_gate(function, &fan_ins, output, top, 0)
        });
        if let Err(fault) = added {
            return Err(too_large(cursor, fault));
        }
        lhs = lhs.wrapping_add(2);
    }
    cursor.skip(at);
    Ok(())
}

/// What is wrong with a difference.
enum Malformed {
    CutShort,
    TooLong,
    Padded,
}

/// One difference; `at` moves past it.
#[inline]
fn difference(bytes: &[u8], at: &mut usize) -> Result<u32, Malformed> {
    // Nearly all differences of real files take one or two bytes.
    let Some(&byte) = bytes.get(*at) else {
        return Err(Malformed::CutShort);
    };
    *at += 1;
    if byte < 0x80 {
        return Ok(u32::from(byte));
    }
    let mut value = u64::from(byte & 0x7F);
    let mut shift = 7;
    loop {
        let Some(&byte) = bytes.get(*at) else {
            return Err(Malformed::CutShort);
        };
        *at += 1;
        value |= u64::from(byte & 0x7F) << shift;
        if byte < 0x80 {
            return match u32::try_from(value) {
                Ok(_) if byte == 0 => Err(Malformed::Padded),
                Ok(value) => Ok(value),
                Err(_) => Err(Malformed::TooLong),
            };
        }
        shift += 7;
        if shift > 28 {
            return Err(Malformed::TooLong);
        }
    }
}

#[cold]
fn number_fault(
    cursor: &Cursor<'_>,
    bytes: &[u8],
    base: usize,
    start: usize,
    lhs: u32,
) -> Diagnostic {
    let mut at = start;
    let (found, help) = match difference(bytes, &mut at) {
        Err(Malformed::TooLong) => (
            "one of more than 32 bits",
            "a difference takes at most five bytes and stays below 4294967296",
        ),
        Err(Malformed::Padded) => (
            "one whose last byte adds nothing",
            "a difference is written in as few bytes as it needs",
        ),
        _ => (
            "the end of the file",
            "the file is cut short, or its header announces too much",
        ),
    };
    Diagnostic::error(
        cursor.file(),
        Place::Byte((base + start) as u64),
        format!("expected a difference of AND {lhs}, found {found}"),
        help,
    )
}

#[cold]
fn order_fault(
    cursor: &Cursor<'_>,
    offset: usize,
    lhs: u32,
    delta: u32,
    first: Option<u32>,
) -> Diagnostic {
    let message = match first {
        None => format!("expected a first difference of AND {lhs} from 1 to {lhs}, found {delta}"),
        Some(first) => format!(
            "expected a second difference of AND {lhs} of at most its first operand {first}, \
             found {delta}"
        ),
    };
    Diagnostic::error(
        cursor.file(),
        Place::Byte(offset as u64),
        message,
        "the operands of an AND come in falling order, below the AND itself",
    )
}
