//! The end of both forms: symbols, then a comment.
//!
//! A symbol line is a letter (`i l o`, since 1.9 also `b c j f`), a position, one
//! blank and a name that reaches to the end of the line. A line that holds only
//! `c` opens the comment, which is free text; `c0 name` is the symbol of a
//! constraint. Ports and latches without a symbol are named by letter and
//! position, as the report names them.

use super::header::Header;
use super::tokens::Cursor;
use crate::netlist::NetlistBuilder;
use crate::source::Diagnostic;
use fixedbitset::FixedBitSet;
use nom::IResult;
use nom::Parser;
use nom::bytes::complete::{take_till, take_till1};
use nom::character::complete::{char, one_of};
use nom::sequence::{preceded, terminated};

const LETTERS: &str = "ilobcjf";

struct Symbols<'b> {
    builder: &'b mut NetlistBuilder,
    counts: [u32; 7],
    named: [FixedBitSet; 7],
    /// For each justice set, its first property and the one past its last.
    justice: Vec<(usize, usize)>,
}

pub(super) fn read(
    cursor: &mut Cursor<'_>,
    header: &Header,
    builder: &mut NetlistBuilder,
    justice_sizes: &[u32],
) -> Result<(), Diagnostic> {
    let mut at = (header.bad + header.constraints) as usize;
    let justice = justice_sizes
        .iter()
        .map(|&size| {
            let first = at;
            at += size as usize;
            (first, at)
        })
        .collect();
    let counts = [
        header.inputs,
        header.latches,
        header.outputs,
        header.bad,
        header.constraints,
        header.justice,
        header.fairness,
    ];
    let mut symbols = Symbols {
        builder,
        counts,
        named: counts.map(|count| FixedBitSet::with_capacity(count as usize)),
        justice,
    };
    while !cursor.rest().is_empty() {
        if comment(cursor.rest()).is_ok() {
            break;
        }
        symbols.line(cursor)?;
    }
    symbols.name_the_rest();
    Ok(())
}

/// A line that holds only `c`.
fn comment(input: &[u8]) -> IResult<&[u8], &[u8]> {
    let (rest, line) = preceded(char('c'), take_till(|b| b == b'\n')).parse_complete(input)?;
    if line.is_empty() {
        Ok((rest, line))
    } else {
        Err(nom::Err::Error(nom::error::Error::new(
            input,
            nom::error::ErrorKind::Char,
        )))
    }
}

/// The letter of a symbol, as a position in [`LETTERS`].
fn letter(input: &[u8]) -> IResult<&[u8], usize> {
    one_of(LETTERS)
        .map(|c| LETTERS.find(c).unwrap_or_default())
        .parse_complete(input)
}

/// A name up to the end of its line.
fn name(input: &[u8]) -> IResult<&[u8], &[u8]> {
    terminated(take_till1(|b| b == b'\n'), char('\n')).parse_complete(input)
}

impl Symbols<'_> {
    fn line(&mut self, cursor: &mut Cursor<'_>) -> Result<(), Diagnostic> {
        let start = cursor.offset();
        let Ok((_, kind)) = letter(cursor.rest()) else {
            return Err(cursor.fault(
                "a symbol (a letter of `ilobcjf` and a position) or a line `c`",
                "after the last AND come symbols, then a line `c` and free text",
            ));
        };
        cursor.skip(1);
        let position = cursor.number("a symbol's position")?;
        if position >= self.counts[kind] {
            return Err(cursor.fault_at(
                start,
                format!(
                    "expected a position below {} in symbol {}, found {position}",
                    self.counts[kind],
                    tag(kind, position)
                ),
                "positions count from 0 within their section",
            ));
        }
        if self.named[kind].put(position as usize) {
            return Err(cursor.fault_at(
                start,
                format!(
                    "expected one symbol {}, found a second",
                    tag(kind, position)
                ),
                "leave one of the two out",
            ));
        }
        cursor.blank("a name")?;
        match name(cursor.rest()) {
            Ok((rest, bytes)) => {
                cursor.next_line(cursor.rest().len() - rest.len());
                self.give(kind, position as usize, bytes);
                Ok(())
            }
            Err(_) if cursor.rest().first().is_none_or(|&b| b == b'\n') => Err(cursor.fault(
                "a name",
                "leave the whole line out if the object has no name",
            )),
            Err(_) => {
                cursor.skip(cursor.rest().len());
                Err(cursor.fault(
                    "the end of the line",
                    "the file is cut short: its last line has no line feed",
                ))
            }
        }
    }

    fn give(&mut self, kind: usize, position: usize, bytes: &[u8]) {
        let (bad, constraints) = (self.counts[3] as usize, self.counts[4] as usize);
        let name = self.builder.name(bytes);
        match kind {
            0 => {
                let net = self.builder.input(position);
                self.builder.set_net_name(net, name);
            }
            1 => {
                let net = self.builder.register_output(position);
                self.builder.set_net_name(net, name);
            }
            2 => self.builder.set_output_name(position, name),
            3 => self.builder.set_property_name(position, name),
            4 => self.builder.set_property_name(bad + position, name),
            5 => {
                let (first, last) = self.justice[position];
                for property in first..last {
                    self.builder.set_property_name(property, name);
                }
            }
            _ => {
                let before = self.justice.last().map_or(bad + constraints, |set| set.1);
                self.builder.set_property_name(before + position, name);
            }
        }
    }

    /// Ports and latches without a symbol; properties stay without a name.
    fn name_the_rest(&mut self) {
        for kind in 0..3 {
            for position in 0..self.counts[kind] {
                if !self.named[kind].contains(position as usize) {
                    self.give(kind, position as usize, tag(kind, position).as_bytes());
                }
            }
        }
    }
}

fn tag(kind: usize, position: u32) -> String {
    format!("{}{position}", &LETTERS[kind..=kind])
}
