//! BLIF, as the format document of 28 July 1992 has it, and the dialects of real
//! files; clauses B1 and following of `grammar-notes/blif.md`.
//!
//! Five steps: physical lines to logical lines (`lines`), a logical line to a
//! statement (`grammar`, `constraint`, `kiss`), statements to models (`parse`,
//! `fill`, `table`) and the same for the files they name (`search`), models to a linked
//! design whose size is known (`link`), the design to a flat netlist (`elaborate`)
//! and what it says about time (`settle`).
//!
//! Invariant: nothing that drives a net is left out without a word. What is not
//! read is either an instance kept as a black box or is told in a warning.

mod constraint;
mod cover;
mod elaborate;
mod fill;
mod grammar;
mod kiss;
mod lines;
mod link;
mod model;
mod parse;
mod rows;
mod search;
mod settle;
mod table;
mod tally;
mod write;

pub(super) use lines::first_word;
pub use write::write;

use super::{Parsed, ReadOptions};
use crate::source::{Diagnostic, Source};

/// Reads a file and flattens its top model.
pub(super) fn read(source: &Source, options: &ReadOptions) -> Result<Parsed, Vec<Diagnostic>> {
    let contents = parse::parse(source, options.files.as_deref())?;
    let mut tally = contents.tally;
    let builder = contents.builder;
    let files = contents.files;
    let top = options.top.as_deref();
    let design = link::link(&files, contents.models, builder.names(), top, &mut tally)?;
    let file = &files[design.models[design.top].file];
    let netlist = elaborate::elaborate(file, &design, builder, options.max_gates)
        .map_err(|error| vec![error])?;
    let constraints = settle::settle(&design, &netlist, &mut tally);
    Ok(Parsed {
        netlist,
        format: super::Format::Blif,
        constraints,
        warnings: tally.into_warnings(&files),
    })
}
