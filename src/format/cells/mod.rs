//! Cell libraries: a BLIF file of one-cell models, or a Liberty library.
//!
//! The content decides: a first word `library` is Liberty. Either becomes
//! [`Cells`], small netlists by name. Clauses in `grammar-notes/cells.md`.
//!
//! Invariant: a cell is in the result only when the function of every output pin
//! is known; any other keeps its instances black boxes.

mod expression;
mod liberty;

pub(super) use liberty::{blank, is_liberty, word};

use super::{ReadOptions, blif};
use crate::netlist::Shape;
use crate::netlist::cell::Cells;
use crate::source::{Diagnostic, Place, Source};

/// A library as read.
pub struct Library {
    /// The cells with a function.
    pub cells: Cells,
    /// What was odd.
    pub warnings: Vec<Diagnostic>,
}

/// Reads a library.
///
/// # Errors
/// Located errors.
pub fn read(source: &Source) -> Result<Library, Vec<Diagnostic>> {
    let library = if is_liberty(&source.bytes) {
        liberty::read(source).map_err(|error| vec![error])?
    } else {
        read_blif(source)?
    };
    if library.cells.is_empty() {
        return Err(vec![Diagnostic::error(
            &source.name,
            Place::File,
            "expected cells with functions, found none",
            "give a BLIF file with a `.model` for every cell, or a Liberty library",
        )]);
    }
    Ok(library)
}

/// The shape of a function as a library writes it, and how many pins it reads.
pub(super) fn shape_of(function: &str) -> Option<(Shape, usize)> {
    let read = expression::read(function).ok()?;
    Some((read.function.shape(), read.pins.len()))
}

/// Every `.model` of the text is read by itself: a cell holds no instances.
fn read_blif(source: &Source) -> Result<Library, Vec<Diagnostic>> {
    let mut library = Library {
        cells: Cells::default(),
        warnings: Vec::new(),
    };
    for (first_line, text) in models(&source.bytes) {
        let part = Source {
            name: source.name.clone(),
            bytes: text.to_vec(),
        };
        let moved = |each: Diagnostic| moved(each, first_line);
        let parsed = blif::read(&part, &ReadOptions::default())
            .map_err(|errors| errors.into_iter().map(moved).collect::<Vec<_>>())?;
        library
            .warnings
            .extend(parsed.warnings.into_iter().map(moved));
        let cell = parsed.netlist;
        let fault = |message: String, help: &str| {
            let place = Place::line(first_line + 1);
            vec![Diagnostic::error(&source.name, place, message, help)]
        };
        let Some(name) = cell.model() else { continue };
        let shown = cell.names().text(name).into_owned();
        if !cell.boxes().is_empty() {
            return Err(fault(
                format!("expected gates and latches in the cell {shown}, found an instance"),
                "a cell stands for itself; write its function as `.names`",
            ));
        }
        let name = cell.names().bytes(name).to_vec();
        if !library.cells.add(&name, cell) {
            return Err(fault(
                format!("expected one cell {shown}, found a second"),
                "leave one of them out",
            ));
        }
    }
    Ok(library)
}

/// The texts from each `.model` line to the next, with the lines before each.
fn models(bytes: &[u8]) -> Vec<(u32, &[u8])> {
    let mut starts: Vec<(u32, usize)> = Vec::new();
    let (mut at, mut line) = (0, 0);
    for text in bytes.split_inclusive(|&b| b == b'\n') {
        let word = text.trim_ascii_start();
        if word.starts_with(b".model") && word.get(6).is_none_or(u8::is_ascii_whitespace) {
            starts.push((line, at));
        }
        at += text.len();
        line += 1;
    }
    let ends = starts
        .iter()
        .skip(1)
        .map(|&(_, at)| at)
        .chain([bytes.len()]);
    starts
        .iter()
        .zip(ends)
        .map(|(&(line, from), to)| (line, &bytes[from..to]))
        .collect()
}

fn moved(mut each: Diagnostic, lines: u32) -> Diagnostic {
    if let Place::Line { line, .. } = &mut each.place {
        *line += lines;
    }
    if let Some(second) = &mut each.second {
        second.0 += lines;
    }
    each
}
