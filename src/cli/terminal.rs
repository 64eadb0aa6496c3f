//! What the terminal is like, asked once and handed down as plain facts.

use crate::report::Page;
use std::io::{IsTerminal, Write};

/// Widths a table is laid out for.
const WIDTHS: std::ops::RangeInclusive<u16> = 60..=120;

/// The page on standard output: 80 columns and plain unless it is a terminal.
pub fn page() -> Page {
    let is_terminal = std::io::stdout().is_terminal();
    let width = comfy_table::Table::new().width().filter(|_| is_terminal);
    let width = width.map_or(80, |width| width.clamp(*WIDTHS.start(), *WIDTHS.end()));
    Page {
        width,
        colour: is_terminal && wants_colour(),
        ..Page::default()
    }
}

/// Whether messages on standard error may be coloured.
pub fn colour_on_stderr() -> bool {
    std::io::stderr().is_terminal() && wants_colour()
}

/// `NO_COLOR` set to anything, or a terminal that cannot, says no.
fn wants_colour() -> bool {
    let set = |name| std::env::var_os(name).filter(|value| !value.is_empty());
    set("NO_COLOR").is_none() && set("TERM").is_none_or(|term| term != "dumb")
}

/// Says something on standard error. Nobody can be told when that fails.
pub fn say(message: &str) {
    let _ = writeln!(std::io::stderr().lock(), "{message}");
}

/// Says that something could not be done, and why.
pub fn complain(message: &str) {
    say(&format!("carrywise: error: {message}"));
}
