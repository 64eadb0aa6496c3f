//! BLIF, as the format document of 28 July 1992 has it, and the dialects of real
//! files; clauses B1 and following of `grammar-notes/blif.md`.
//!
//! Four steps, each a file: physical lines to logical lines (`lines`), a logical
//! line to a statement (`grammar`), statements to models (`parse`, `fill`), models to a
//! linked design whose size is known (`link`), the design to a flat netlist
//! (`elaborate`).
//!
//! Invariant: nothing that drives a net is left out without a word. What is not
//! read is either an instance kept as a black box or is told in a warning.

mod cover;
mod elaborate;
mod fill;
mod grammar;
mod lines;
mod link;
mod model;
mod parse;
mod tally;

pub(super) use lines::first_word;

use super::ReadOptions;
use crate::netlist::Netlist;
use crate::source::{Diagnostic, Source};

/// Reads a file and flattens its top model.
pub(super) fn read(
    source: &Source,
    options: &ReadOptions,
) -> Result<(Netlist, Vec<Diagnostic>), Vec<Diagnostic>> {
    let contents = parse::parse(source)?;
    let mut tally = contents.tally;
    let builder = contents.builder;
    let top = options.top.as_deref();
    let design = link::link(source, contents.models, builder.names(), top, &mut tally)?;
    let netlist = elaborate::elaborate(source, &design, builder, options.max_gates)
        .map_err(|error| vec![error])?;
    Ok((netlist, tally.into_warnings(&source.name)))
}
