//! Bytes of one input, and how faults in them are told.
//!
//! A [`Source`] is a name and the bytes read under it; nothing here opens files.
//! Readers point into a source with a line and a byte column (text) or a byte
//! offset (binary AIGER) and hand out [`Diagnostic`] values, which are plain data
//! until somebody renders them.
//!
//! Invariant: names and excerpts are untrusted. They pass through [`escape`]
//! before they reach a message, so no control character of an input ever comes
//! to a terminal.

mod diagnostic;
mod excerpt;
mod nearest;
mod unpack;
mod zstd_frames;

pub use diagnostic::{Diagnostic, Place, Severity};
pub use excerpt::{escape, quote};
pub use nearest::{distance, nearest};
pub use unpack::{Limits, ReadError, read_unpacked};

use std::io::{self, Read};

/// The bytes of one input and the name they go by in messages.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Source {
    /// File name as the user gave it; `-` is standard input.
    pub name: String,
    /// What was read, whole.
    pub bytes: Vec<u8>,
}

impl Source {
    /// The name without folders and without its last extension, that of a packing
    /// left aside.
    pub fn stem(&self) -> &str {
        let file = self.name.rsplit(['/', '\\']).next().unwrap_or(&self.name);
        let file = [".gz", ".zst", ".zstd"]
            .iter()
            .find_map(|packed| file.strip_suffix(packed).filter(|rest| !rest.is_empty()))
            .unwrap_or(file);
        let stem = match file.rsplit_once('.') {
            Some((stem, _)) if !stem.is_empty() => stem,
            _ => file,
        };
        if stem == "-" { "stdin" } else { stem }
    }

    /// The bytes of line `line` (1-based) without its line end; empty past the
    /// end. Walks the bytes from the start: for messages only.
    pub fn line(&self, line: u32) -> &[u8] {
        let mut lines = self.bytes.split(|&b| b == b'\n');
        let text = lines
            .nth((line as usize).saturating_sub(1))
            .unwrap_or_default();
        text.strip_suffix(b"\r").unwrap_or(text)
    }
}

/// Reads all of `reader` under the name `name`, as it is.
///
/// # Errors
/// Whatever the reader fails with.
pub fn read(name: impl Into<String>, mut reader: impl Read) -> io::Result<Source> {
    let mut bytes = Vec::new();
    reader.read_to_end(&mut bytes)?;
    Ok(Source {
        name: name.into(),
        bytes,
    })
}
