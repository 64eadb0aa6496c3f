//! The YAML form: the record as one document per netlist.
//!
//! The only place that writes YAML, so that another library would be a change
//! to this file: the author of the one used has declared it finished.

use serde::Serialize;
use std::io::{self, Write};

/// Writes `record` as one document, its opening mark included.
///
/// # Errors
/// When `out` cannot be written; the error keeps its kind.
pub fn write(record: &impl Serialize, out: &mut dyn Write) -> io::Result<()> {
    out.write_all(b"---\n")?;
    let mut sink = Sink { out, failed: None };
    match serde_yaml::to_writer(&mut sink, record) {
        Ok(()) => Ok(()),
        Err(error) => Err(sink.failed.unwrap_or_else(|| io::Error::other(error))),
    }
}

/// Keeps the error of the writer below, of which the library tells the text only.
struct Sink<'a> {
    out: &'a mut dyn Write,
    failed: Option<io::Error>,
}

impl Write for Sink<'_> {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        self.out.write(bytes).map_err(|error| {
            let kind = error.kind();
            self.failed = Some(error);
            kind.into()
        })
    }

    fn flush(&mut self) -> io::Result<()> {
        self.out.flush()
    }
}
