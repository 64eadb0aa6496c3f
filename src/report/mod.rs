//! Reports: the record in the form somebody asked for.
//!
//! Nothing is worked out here and nothing is read: a report says what the
//! record holds. The set of forms is closed, one file per form; the two forms
//! for people print one [outline](outline::Outline), the two for programs print
//! every field.

mod closeup;
mod json;
mod markdown;
pub mod number;
mod outline;
mod sections;
mod table;
mod text;
mod tradeoff;
mod yaml;

pub use markdown::MOST_CHARACTERS;
pub use tradeoff::{TradeoffForm, write_tradeoff};

use crate::audit::record::{Audit, Closeup};
use std::io::{self, Write};

/// The forms of a report.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Form {
    /// For a terminal.
    Table,
    /// For a code review.
    Markdown,
    /// The record, one document per netlist.
    Yaml,
    /// The record, one line per netlist.
    Json,
}

/// What the page is like. The caller knows the terminal; this room does not.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Page {
    /// Columns of the terminal form.
    pub width: u16,
    /// Whether the terminal form may use bold type.
    pub colour: bool,
    /// Most characters of the Markdown form of one netlist.
    pub characters: usize,
}

impl Default for Page {
    fn default() -> Self {
        Self {
            width: 80,
            colour: false,
            characters: MOST_CHARACTERS,
        }
    }
}

/// Writes the report of one netlist.
///
/// # Errors
/// When `out` cannot be written; the error keeps its kind.
pub fn write(audit: &Audit, form: Form, page: Page, out: &mut dyn Write) -> io::Result<()> {
    match form {
        Form::Table => out.write_all(table::render(audit, page).as_bytes()),
        Form::Markdown => out.write_all(markdown::render(audit, page.characters).as_bytes()),
        Form::Yaml => yaml::write(audit, out),
        Form::Json => json::write(audit, out),
    }
}

/// Writes the closeup of one chain.
///
/// # Errors
/// When `out` cannot be written; the error keeps its kind.
pub fn write_closeup(
    closeup: &Closeup,
    form: Form,
    page: Page,
    out: &mut dyn Write,
) -> io::Result<()> {
    match form {
        Form::Table => out.write_all(table::render_closeup(closeup, page).as_bytes()),
        Form::Markdown => {
            out.write_all(markdown::render_closeup(closeup, page.characters).as_bytes())
        }
        Form::Yaml => yaml::write(closeup, out),
        Form::Json => json::write(closeup, out),
    }
}
