//! Text and bytes to netlist: BLIF, AIGER ASCII and AIGER binary; and the user's
//! own files about one.
//!
//! The content decides the format, never the file's extension. Each reader turns
//! a [`Source`] into a [`Netlist`] plus warnings, or into located errors; there
//! is no third outcome, whatever the bytes. The grammars are written down as
//! numbered clauses in `grammar-notes/`.
//!
//! Invariants: a reader never recurses over the depth of a netlist or of its
//! hierarchy, allocates nothing that the bytes present do not justify, and counts
//! what a hierarchy expands to before it builds any of it.

pub mod aiger;
pub mod arrivals;
pub mod assumptions;
pub mod blif;
pub mod cells;
pub mod constraints;
pub mod delays;
pub mod files;
mod names;
mod yaml;

use constraints::Constraints;
use files::FileAccess;
use std::sync::Arc;

use crate::netlist::Netlist;
use crate::source::{Diagnostic, Place, Source, quote};

/// A netlist format.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Format {
    /// Berkeley Logic Interchange Format.
    Blif,
    /// AIGER, text form (`aag`).
    AigerAscii,
    /// AIGER, binary form (`aig`).
    AigerBinary,
}

impl Format {
    /// The word reports use.
    pub fn word(self) -> &'static str {
        match self {
            Self::Blif => "blif",
            Self::AigerAscii => "aiger-ascii",
            Self::AigerBinary => "aiger-binary",
        }
    }
}

/// What to read and how much of it at most.
#[derive(Clone, Debug)]
pub struct ReadOptions {
    /// The model that is the design; the first of the file when not given.
    pub top: Option<String>,
    /// Most gates the netlist may have once its hierarchy is flat.
    pub max_gates: u64,
    /// Access to the files that `.search` lines name; without it none is read.
    pub files: Option<Arc<dyn FileAccess>>,
}

impl Default for ReadOptions {
    fn default() -> Self {
        Self {
            top: None,
            max_gates: 100_000_000,
            files: None,
        }
    }
}

/// A netlist as read.
pub struct Parsed {
    /// The netlist.
    pub netlist: Netlist,
    /// The format it was in.
    pub format: Format,
    /// What it says about time, load and area.
    pub constraints: Constraints,
    /// What was odd, in the order of the text.
    pub warnings: Vec<Diagnostic>,
}

/// The format of a source, by its first bytes.
///
/// # Errors
/// When it is empty, packed, or neither BLIF nor AIGER; the place is the first
/// text that fits neither.
pub fn detect(source: &Source) -> Result<Format, Diagnostic> {
    let bytes = source.bytes.as_slice();
    let fault = |place, message: &str, help: &str| {
        Err(Diagnostic::error(&source.name, place, message, help))
    };
    if bytes.is_empty() {
        return fault(
            Place::File,
            "expected a BLIF or AIGER netlist, found an empty file",
            "check that whatever writes the file has finished",
        );
    }
    for (magic, what) in [
        (&b"\x1f\x8b"[..], "gzip data"),
        (b"\x28\xb5\x2f\xfd", "zstd data"),
    ] {
        if bytes.starts_with(magic) {
            return fault(
                Place::Byte(0),
                &format!("expected a BLIF or AIGER netlist, found {what}"),
                "unpack the file first",
            );
        }
    }
    for (magic, format) in [(b"aag", Format::AigerAscii), (b"aig", Format::AigerBinary)] {
        // A blank must follow; without one the header's own check says where.
        if bytes.starts_with(magic) && bytes.get(3).is_none_or(|b| !b.is_ascii_graphic()) {
            return Ok(format);
        }
    }
    match blif::first_word(bytes) {
        Some((_, _, word)) if word.starts_with(b".") => Ok(Format::Blif),
        Some((line, column, word)) => {
            let place = Place::Line {
                line,
                column: Some(column),
                length: u32::try_from(word.len()).unwrap_or(u32::MAX),
            };
            fault(
                place,
                &format!(
                    "expected a BLIF word such as `.model`, or an AIGER header (`aag` or `aig`), \
                     found {}",
                    quote(word)
                ),
                "only BLIF and AIGER netlists are read",
            )
        }
        None => fault(
            Place::File,
            "expected a BLIF or AIGER netlist, found only comments and blank lines",
            "check that this is the file that was meant",
        ),
    }
}

/// Reads a netlist.
///
/// # Errors
/// Located errors, the first ones of a BLIF file or the first of an AIGER file.
pub fn read(source: &Source, options: &ReadOptions) -> Result<Parsed, Vec<Diagnostic>> {
    let format = detect(source).map_err(|error| vec![error])?;
    match format {
        Format::Blif => blif::read(source, options),
        Format::AigerAscii | Format::AigerBinary => {
            let binary = format == Format::AigerBinary;
            let read = aiger::read(source, binary, options);
            let (netlist, warnings) = read.map_err(|error| vec![error])?;
            Ok(Parsed {
                netlist,
                format,
                constraints: Constraints::default(),
                warnings,
            })
        }
    }
}
