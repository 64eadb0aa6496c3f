//! The JSON form: the record as one line per netlist (JSON lines).

use serde::Serialize;
use std::io::{self, Write};

/// Writes `record` as one line.
///
/// # Errors
/// When `out` cannot be written; the error keeps its kind.
pub fn write(record: &impl Serialize, out: &mut dyn Write) -> io::Result<()> {
    serde_json::to_writer(&mut *out, record).map_err(io::Error::from)?;
    out.write_all(b"\n")
}
