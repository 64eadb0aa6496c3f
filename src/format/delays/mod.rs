//! What a user gives with `--delay PATH`: a YAML table of delays, or a Liberty
//! library whose delay tables are read at a fixed input slew.
//!
//! The content decides: a first word `library` is Liberty. Either becomes a
//! [`DelayTable`]. Clauses in `grammar-notes/delays.md`.

mod groups;
mod library;
mod table;

use super::cells::is_liberty;
use crate::netlist::DelayTable;
use crate::source::{Diagnostic, Source};

/// Reads a file of delays.
///
/// # Errors
/// The first fault of the text, located.
pub fn read(source: &Source) -> Result<DelayTable, Box<Diagnostic>> {
    if is_liberty(&source.bytes) {
        library::read(source)
    } else {
        table::read(source)
    }
}

/// Whether the text is a Liberty library, which also gives functions.
pub fn is_library(source: &Source) -> bool {
    is_liberty(&source.bytes)
}
