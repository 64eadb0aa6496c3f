//! AIGER 1.0 (report 07/1, version 20071012) and 1.9 (report 11/2), text and
//! binary form, read strictly: what the reports do not allow is an error with a
//! line (text) or a byte offset (binary).
//!
//! Literals are turned into net plus inversion here and appear nowhere else. Net
//! 0 is the constant false; a variable's net has the variable's number, except in
//! text files whose numbering has gaps: there nets are numbered in the order of
//! the variables that exist, and each net whose number differs carries its
//! variable as a name (`v17`), so that nothing has to be said about variables
//! that nobody defined.
//!
//! Nothing is sized by a number of the header alone: every vector grows with the
//! bytes that fill it. Clauses A1 and following of `grammar-notes/aiger.md`.

mod ascii;
mod binary;
mod header;
mod symbols;
mod synthesis;
mod tokens;
mod write;

pub use write::{Form, WriteError, write};

use super::ReadOptions;
use crate::netlist::{
    Function, FunctionId, Initial, NetId, Netlist, NetlistBuilder, Property, PropertyKind, Signal,
    TooLarge,
};
use crate::source::{Diagnostic, Place, Source};
use header::Header;
use tokens::Cursor;

/// Reads either form.
pub(super) fn read(
    source: &Source,
    binary: bool,
    options: &ReadOptions,
) -> Result<(Netlist, Vec<Diagnostic>), Diagnostic> {
    let mut cursor = Cursor::new(source, binary);
    let header = Header::read(&mut cursor, binary)?;
    if u64::from(header.ands) > options.max_gates {
        return Err(Diagnostic::error(
            &source.name,
            cursor.header_place(),
            format!(
                "expected at most {} gates, found a header that announces {}",
                options.max_gates, header.ands
            ),
            "raise the limit on gates if a netlist of this size is meant",
        ));
    }
    let netlist = if binary {
        binary::read(&mut cursor, &header)?
    } else {
        ascii::read(&mut cursor, &header)?
    };
    let mut warnings = Vec::new();
    if options.top.is_some() {
        warnings.push(Diagnostic::warning(
            &source.name,
            Place::File,
            "a top model was asked for, but an AIGER file holds one netlist without models",
            "leave the top model out",
        ));
    }
    Ok((netlist, warnings))
}

/// The four two-input products an AND with inversions on its edges can be,
/// interned once; the index is the two sign bits, the first operand's low.
fn products(builder: &mut NetlistBuilder) -> [FunctionId; 4] {
    [0, 1, 2, 3].map(|signs: u8| {
        builder.function(Function::product(&[signs & 1 != 0, signs & 2 != 0], false))
    })
}

/// A latch's initial value from its reset literal.
fn initial(reset: u32) -> Initial {
    match reset {
        0 => Initial::Zero,
        1 => Initial::One,
        _ => Initial::Unknown,
    }
}

/// The literals between latches and ANDs, as the file lists them.
struct Watched {
    outputs: Vec<u32>,
    bad: Vec<u32>,
    constraints: Vec<u32>,
    justice_sizes: Vec<u32>,
    justice: Vec<u32>,
    fairness: Vec<u32>,
}

impl Watched {
    fn read(cursor: &mut Cursor<'_>, header: &Header) -> Result<Self, Diagnostic> {
        let outputs = literals(cursor, header, header.outputs, "an output literal")?;
        let bad = literals(cursor, header, header.bad, "a bad-state literal")?;
        let constraints = literals(cursor, header, header.constraints, "a constraint literal")?;
        let mut justice_sizes = Vec::new();
        let mut total = 0u64;
        for _ in 0..header.justice {
            let size = cursor.number("the size of a justice set")?;
            cursor.line_end()?;
            justice_sizes.push(size);
            total += u64::from(size);
        }
        let mut justice = Vec::new();
        for _ in 0..total {
            justice.push(literal_line(cursor, header, "a justice literal")?);
        }
        let fairness = literals(cursor, header, header.fairness, "a fairness literal")?;
        Ok(Self {
            outputs,
            bad,
            constraints,
            justice_sizes,
            justice,
            fairness,
        })
    }

    /// Every literal with its index among the lines of these sections.
    fn literals_with_lines(&self) -> impl Iterator<Item = (usize, u32)> + '_ {
        let sizes = self.justice_sizes.len();
        let plain = [&self.outputs, &self.bad, &self.constraints];
        let before: usize = plain.iter().map(|list| list.len()).sum();
        let plain = plain.into_iter().flatten().copied().enumerate();
        let tail = self.justice.iter().chain(&self.fairness).copied();
        plain.chain(tail.enumerate().map(move |(i, l)| (before + sizes + i, l)))
    }

    /// Number of lines these sections take.
    fn lines(&self) -> usize {
        self.outputs.len()
            + self.bad.len()
            + self.constraints.len()
            + self.justice_sizes.len()
            + self.justice.len()
            + self.fairness.len()
    }

    /// Adds ports and properties. `first_line` is that of the first output, 0 in
    /// binary files.
    fn build(&self, builder: &mut NetlistBuilder, first_line: u32, signal: impl Fn(u32) -> Signal) {
        for (i, &literal) in self.outputs.iter().enumerate() {
            let line = if first_line == 0 {
                0
            } else {
                first_line + i as u32
            };
            builder.add_output(signal(literal), None, line);
        }
        let mut add = |kind, literal| {
            builder.add_property(Property {
                kind,
                signal: signal(literal),
                name: None,
            });
        };
        for &literal in &self.bad {
            add(PropertyKind::Bad, literal);
        }
        for &literal in &self.constraints {
            add(PropertyKind::Constraint, literal);
        }
        let mut next = self.justice.iter();
        for (set, &size) in self.justice_sizes.iter().enumerate() {
            for &literal in next.by_ref().take(size as usize) {
                add(PropertyKind::Justice(set as u32), literal);
            }
        }
        for &literal in &self.fairness {
            add(PropertyKind::Fairness, literal);
        }
    }
}

fn literals(
    cursor: &mut Cursor<'_>,
    header: &Header,
    count: u32,
    what: &'static str,
) -> Result<Vec<u32>, Diagnostic> {
    let mut list = Vec::new();
    for _ in 0..count {
        list.push(literal_line(cursor, header, what)?);
    }
    Ok(list)
}

fn literal_line(
    cursor: &mut Cursor<'_>,
    header: &Header,
    what: &'static str,
) -> Result<u32, Diagnostic> {
    let literal = cursor.literal(what, header)?;
    cursor.line_end()?;
    Ok(literal)
}

/// The signal of a literal when variables are nets.
fn same_number(literal: u32) -> Signal {
    Signal {
        net: NetId::new((literal >> 1) as usize),
        inverted: literal & 1 == 1,
    }
}

#[cold]
fn too_large(cursor: &Cursor<'_>, fault: TooLarge) -> Diagnostic {
    Diagnostic::error(
        cursor.file(),
        cursor.header_place(),
        format!(
            "expected at most {} {}, found more",
            fault.limit, fault.what
        ),
        "netlists beyond this size are not read",
    )
}
