//! The grammar of state tables, with nom: the lines between `.start_kiss` and
//! `.end_kiss`, and the two kinds of line that may follow.
//!
//! A table has its numbers (`.i .o .p .s .r`) and rows of input columns, present
//! state, next state and output columns. It is checked and counted, not
//! interpreted: a model whose machine is given as a table only becomes a black
//! box. Source: the BLIF document of 28 July 1992, from memory; clauses B80 and
//! following of `grammar-notes/blif.md`.

use super::grammar::{Fault, Words, fault, missing, nothing_more};
use super::lines::is_blank;
use crate::source::quote;
use nom::character::complete::digit1;
use nom::combinator::all_consuming;
use nom::{IResult, Parser};

const FORM: &str = "a row is input columns, present state, next state, output columns";

/// A state table being read, then its sizes.
#[derive(Clone, Copy, Default, Debug)]
pub(super) struct Table {
    /// Line of `.start_kiss`.
    pub(super) line: u32,
    pub(super) inputs: Option<u32>,
    pub(super) outputs: Option<u32>,
    /// What `.p` announces, and its line.
    pub(super) products: Option<(u32, u32)>,
    pub(super) rows: u32,
}

fn count(input: &[u8]) -> IResult<&[u8], u32> {
    all_consuming(digit1)
        .map_opt(|digits: &[u8]| std::str::from_utf8(digits).ok()?.parse().ok())
        .parse_complete(input)
}

impl Table {
    /// Takes in one line of the table; `number` is the line's.
    pub(super) fn line(&mut self, line: &[u8], number: u32) -> Result<(), Fault> {
        let mut words = Words::new(line);
        let first = words.next().unwrap_or_default();
        match first {
            b".i" => self.inputs = Some(announced(line, words, "the number of inputs")?),
            b".o" => self.outputs = Some(announced(line, words, "the number of outputs")?),
            b".p" => {
                let rows = announced(line, words, "the number of rows")?;
                self.products = Some((rows, number));
            }
            b".s" => {
                announced(line, words, "the number of states")?;
            }
            b".r" => {
                let help = "write `.r` and the state the machine starts in";
                if words.next().is_none() {
                    return Err(missing(line, "the reset state", help));
                }
                nothing_more(line, words, help)?;
            }
            dotted if dotted.starts_with(b".") => {
                return Err(fault(
                    line,
                    dotted,
                    format!(
                        "expected `.i`, `.o`, `.p`, `.s`, `.r`, a row or `.end_kiss` in a state \
                         table, found {}",
                        quote(dotted)
                    ),
                    "close the state table with `.end_kiss` before anything else",
                ));
            }
            _ => {
                self.row(line)?;
                self.rows = self.rows.saturating_add(1);
            }
        }
        Ok(())
    }

    fn row(&self, line: &[u8]) -> Result<(), Fault> {
        let mut words = Words::new(line);
        let sizes = "state `.i` and `.o`, the numbers of inputs and outputs, before the rows";
        let start = words.clone().next().unwrap_or_default();
        let (Some(inputs), Some(outputs)) = (self.inputs, self.outputs) else {
            let found = quote(start);
            let message = format!("expected `.i` and `.o` before the first row, found {found}");
            return Err(fault(line, start, message, sizes));
        };
        if inputs > 0 {
            plane(line, words.next(), inputs, "input")?;
        }
        for what in ["the present state", "the next state"] {
            if words.next().is_none() {
                return Err(missing(line, what, FORM));
            }
        }
        if outputs > 0 {
            plane(line, words.next(), outputs, "output")?;
        }
        nothing_more(line, words, FORM)
    }
}

/// The columns of one side of a row.
fn plane(line: &[u8], word: Option<&[u8]>, width: u32, side: &str) -> Result<(), Fault> {
    let Some(word) = word else {
        return Err(missing(line, &format!("{width} {side} columns"), FORM));
    };
    if let Some(at) = word.iter().position(|b| !matches!(b, b'0' | b'1' | b'-')) {
        let found = quote(&word[at..=at]);
        let message = format!("expected `0`, `1` or `-` in {side} columns, found {found}");
        return Err(fault(line, &word[at..=at], message, FORM));
    }
    if word.len() as u64 != u64::from(width) {
        let found = word.len();
        let message = format!("expected {width} {side} columns, found {found}");
        return Err(fault(line, word, message, FORM));
    }
    Ok(())
}

fn announced(line: &[u8], mut words: Words<'_>, what: &str) -> Result<u32, Fault> {
    let help = "write the word and one whole number";
    let word = words.next().ok_or_else(|| missing(line, what, help))?;
    let Ok((_, number)) = count(word) else {
        let found = quote(word);
        return Err(fault(
            line,
            word,
            format!("expected {what}, found {found}"),
            help,
        ));
    };
    nothing_more(line, words, help)?;
    Ok(number)
}

/// `.code STATE BITS`.
pub(super) fn code(line: &[u8], mut words: Words<'_>) -> Result<(), Fault> {
    let help = "write `.code`, a state, and its code of `0` and `1`";
    if words.next().is_none() {
        return Err(missing(line, "a state", help));
    }
    let bits = words
        .next()
        .ok_or_else(|| missing(line, "the state's code", help))?;
    if let Some(at) = bits.iter().position(|b| !matches!(b, b'0' | b'1')) {
        let found = quote(&bits[at..=at]);
        let message = format!("expected `0` or `1` in a state's code, found {found}");
        return Err(fault(line, &bits[at..=at], message, help));
    }
    nothing_more(line, words, help)
}

/// Whether a line of a table ends it.
pub(super) fn ends(line: &[u8]) -> bool {
    line.trim_ascii_start().starts_with(b".end_kiss")
        && line.split(|&b| is_blank(b)).find(|w| !w.is_empty()) == Some(b".end_kiss")
}
