//! The JSON form: the record as one line per netlist (JSON lines).

use crate::audit::record::Audit;
use std::io::{self, Write};

/// Writes `audit` as one line.
///
/// # Errors
/// When `out` cannot be written; the error keeps its kind.
pub fn write(audit: &Audit, out: &mut dyn Write) -> io::Result<()> {
    serde_json::to_writer(&mut *out, audit).map_err(io::Error::from)?;
    out.write_all(b"\n")
}
