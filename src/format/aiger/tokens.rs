//! The token layer of both AIGER forms: decimal numbers, single blanks, line
//! ends, each with the human name of what the grammar wants there.
//!
//! [`Cursor`] owns the position. In text files a fault is told by line and
//! column, in binary files by byte offset throughout, because lines mean nothing
//! there once the AND section has begun. Numbers are recognised with nom.

use super::header::Header;
use crate::source::{Diagnostic, Place, Source, quote};
use nom::character::complete::digit1;
use nom::combinator::recognize;
use nom::{IResult, Parser};

/// Most digits a number of the format can need (below 2^32).
const DIGITS: usize = 10;

pub(super) struct Cursor<'a> {
    source: &'a Source,
    rest: &'a [u8],
    line: u32,
    line_start: usize,
    binary: bool,
}

impl<'a> Cursor<'a> {
    pub(super) fn new(source: &'a Source, binary: bool) -> Self {
        Self {
            source,
            rest: &source.bytes,
            line: 1,
            line_start: 0,
            binary,
        }
    }

    pub(super) fn file(&self) -> &'a str {
        &self.source.name
    }

    pub(super) fn rest(&self) -> &'a [u8] {
        self.rest
    }

    pub(super) fn size(&self) -> usize {
        self.source.bytes.len()
    }

    pub(super) fn offset(&self) -> usize {
        self.source.bytes.len() - self.rest.len()
    }

    /// Steps over `n` bytes that hold no line end that counts.
    pub(super) fn skip(&mut self, n: usize) {
        self.rest = &self.rest[n..];
    }

    /// The place of the byte at `offset`, which lies on the current line.
    pub(super) fn place(&self, offset: usize, length: usize) -> Place {
        if self.binary {
            return Place::Byte(offset as u64);
        }
        let column = offset.saturating_sub(self.line_start) + 1;
        Place::Line {
            line: self.line,
            column: u32::try_from(column).ok(),
            length: u32::try_from(length).unwrap_or(u32::MAX),
        }
    }

    /// The header, for faults that its numbers are to blame for.
    pub(super) fn header_place(&self) -> Place {
        if self.binary {
            Place::Byte(0)
        } else {
            Place::line(1)
        }
    }

    /// An error at the current position: `expected` against what stands there.
    #[cold]
    pub(super) fn fault(&self, expected: &str, help: &str) -> Diagnostic {
        let (found, length) = self.found();
        Diagnostic::error(
            self.file(),
            self.place(self.offset(), length),
            format!("expected {expected}, found {found}"),
            help,
        )
    }

    /// An error about the token that began at `offset`.
    #[cold]
    pub(super) fn fault_at(&self, offset: usize, message: String, help: &str) -> Diagnostic {
        let length = self.offset().saturating_sub(offset);
        Diagnostic::error(self.file(), self.place(offset, length), message, help)
    }

    fn found(&self) -> (String, usize) {
        match self.rest.first() {
            None => ("the end of the file".to_owned(), 0),
            Some(b'\n') => ("the end of the line".to_owned(), 0),
            Some(b' ') => ("a blank".to_owned(), 1),
            Some(b'\r') => ("a carriage return".to_owned(), 1),
            Some(b'\t') => ("a tab".to_owned(), 1),
            Some(_) => {
                let end = self
                    .rest
                    .iter()
                    .position(|b| b.is_ascii_whitespace())
                    .unwrap_or(self.rest.len());
                (quote(&self.rest[..end]), end)
            }
        }
    }

    /// A decimal number: no sign, no leading zero.
    pub(super) fn number(&mut self, what: &'static str) -> Result<u32, Diagnostic> {
        match decimal(self.rest) {
            Ok((rest, value)) => {
                self.rest = rest;
                Ok(value)
            }
            Err(_) => Err(self.number_fault(what)),
        }
    }

    #[cold]
    fn number_fault(&self, what: &str) -> Diagnostic {
        let digits = self.rest.iter().take_while(|b| b.is_ascii_digit()).count();
        let help = match self.rest.first() {
            Some(b'0') if digits > 1 => "numbers are written without leading zeros",
            Some(b'+' | b'-') => "numbers are written without a sign",
            Some(b' ') => "exactly one blank stands between two numbers",
            Some(b'\r') => "end lines with a line feed alone",
            None => "the file is cut short, or its header announces too much",
            _ if digits > 0 => "numbers in this format stay below 4294967296",
            _ => "numbers are written as decimal digits",
        };
        self.fault(what, help)
    }

    /// A literal: a number up to twice the largest variable and one.
    pub(super) fn literal(
        &mut self,
        what: &'static str,
        header: &Header,
    ) -> Result<u32, Diagnostic> {
        let start = self.offset();
        let literal = self.number(what)?;
        if literal > header.largest_literal() {
            return Err(self.fault_at(
                start,
                format!(
                    "expected {what} of at most {}, found {literal}",
                    header.largest_literal()
                ),
                "the header's first number bounds every variable; a literal is at most twice \
                 that and one",
            ));
        }
        Ok(literal)
    }

    /// A left-hand side: an even literal that is not 0.
    pub(super) fn definition(
        &mut self,
        what: &'static str,
        header: &Header,
    ) -> Result<u32, Diagnostic> {
        let start = self.offset();
        let literal = self.literal(what, header)?;
        if literal < 2 || literal & 1 == 1 {
            return Err(self.fault_at(
                start,
                format!("expected {what} that is even and not 0, found {literal}"),
                "only a variable itself can be defined, not a constant or an inversion",
            ));
        }
        Ok(literal)
    }

    /// Exactly one blank, with a number to follow.
    pub(super) fn blank(&mut self, before: &'static str) -> Result<(), Diagnostic> {
        if self.rest.first() == Some(&b' ') {
            self.skip(1);
            Ok(())
        } else {
            let help = match self.rest.first() {
                None | Some(b'\n') => "the line is cut short",
                _ => "exactly one blank stands between two numbers",
            };
            Err(self.fault(&format!("one blank and {before}"), help))
        }
    }

    /// Whether a blank stands here.
    pub(super) fn at_blank(&self) -> bool {
        self.rest.first() == Some(&b' ')
    }

    /// The end of a line.
    pub(super) fn line_end(&mut self) -> Result<(), Diagnostic> {
        if self.rest.first() == Some(&b'\n') {
            self.next_line(1);
            return Ok(());
        }
        let help = match self.rest.first() {
            Some(b'\r') => "end lines with a line feed alone",
            Some(b' ') => "nothing follows the last number of a line",
            None => "the file is cut short: its last line has no line feed",
            _ => "numbers are decimal digits, parted by one blank",
        };
        Err(self.fault("the end of the line", help))
    }

    /// Steps over `n` bytes, the last of which ends a line.
    pub(super) fn next_line(&mut self, n: usize) {
        self.skip(n);
        self.line = self.line.saturating_add(1);
        self.line_start = self.offset();
    }
}

/// Decimal digits without a leading zero, below 2^32.
fn decimal(input: &[u8]) -> IResult<&[u8], u32> {
    let (rest, digits) = recognize(digit1).parse_complete(input)?;
    let value = if digits.len() > DIGITS || (digits.len() > 1 && digits[0] == b'0') {
        None
    } else {
        let value = digits
            .iter()
            .fold(0u64, |acc, &d| acc * 10 + u64::from(d - b'0'));
        u32::try_from(value).ok()
    };
    match value {
        Some(value) => Ok((rest, value)),
        None => Err(nom::Err::Error(nom::error::Error::new(
            input,
            nom::error::ErrorKind::Digit,
        ))),
    }
}
