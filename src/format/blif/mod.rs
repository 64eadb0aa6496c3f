//! BLIF.
use super::ReadOptions;
use crate::netlist::Netlist;
use crate::source::{Diagnostic, Place, Source};

mod lines;
pub(super) use lines::first_word;

/// Reads.
pub(super) fn read(
    source: &Source,
    _options: &ReadOptions,
) -> Result<(Netlist, Vec<Diagnostic>), Vec<Diagnostic>> {
    Err(vec![Diagnostic::error(&source.name, Place::File, "BLIF is not read yet", "use AIGER")])
}
