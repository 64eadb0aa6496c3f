//! The terminal form: headings, sentences wrapped, tables.
//!
//! It fits the width it is given (80 columns unless the terminal says less or
//! more), and is plain text unless it is told that colour is wanted: this room
//! asks no terminal.

use super::Page;
use super::closeup;
use super::outline::{Block, Caps, Grid, Outline};
use crate::audit::record::{Audit, Closeup};
use comfy_table::{CellAlignment, ColumnConstraint, ContentArrangement, Table, Width};

const CAPS: Caps = Caps {
    rows: 24,
    name: 48,
    sentence: 900,
};

/// Blanks between two columns.
const GAP: usize = 2;

/// Words up to this length are kept whole in a table.
const UNBROKEN: usize = 22;

/// What sets a table off from the sentences around it.
const INDENT: &str = "  ";

/// The terminal form of `audit`.
pub fn render(audit: &Audit, page: Page) -> String {
    laid_out(&Outline::of(audit, CAPS), page)
}

/// The terminal form of `closeup`, every bit of it.
pub fn render_closeup(closeup: &Closeup, page: Page) -> String {
    let caps = Caps {
        rows: usize::MAX,
        name: 24,
        ..CAPS
    };
    laid_out(&closeup::outline(closeup, caps), page)
}

fn laid_out(outline: &Outline, page: Page) -> String {
    let width = usize::from(page.width.max(40));
    let mut text = String::new();
    paragraph(&mut text, &outline.read, width);
    text.push('\n');
    let verdict = wrapped(&outline.verdict, width);
    for line in verdict {
        text.push_str(&emphasis(&line, page));
        text.push('\n');
    }
    text.push('\n');
    paragraph(&mut text, &outline.seen, width);
    for section in &outline.sections {
        text.push('\n');
        text.push_str(&emphasis(section.heading, page));
        text.push('\n');
        for block in &section.blocks {
            match block {
                Block::Text(sentence) => paragraph(&mut text, sentence, width),
                Block::Grid(grid) => table(&mut text, grid, width),
            }
        }
    }
    text.push('\n');
    paragraph(&mut text, &outline.settings, width);
    text.push('\n');
    paragraph(&mut text, &outline.caution, width);
    text
}

fn emphasis(line: &str, page: Page) -> String {
    if page.colour {
        format!("\u{1b}[1m{line}\u{1b}[0m")
    } else {
        line.to_owned()
    }
}

fn paragraph(text: &mut String, sentence: &str, width: usize) {
    for line in wrapped(sentence, width) {
        text.push_str(&line);
        text.push('\n');
    }
}

/// Lines of at most `width` characters, broken at blanks, and inside a word
/// only when it is longer than a line.
pub(super) fn wrapped(sentence: &str, width: usize) -> Vec<String> {
    let mut lines = Vec::new();
    let mut line = String::new();
    let mut used = 0;
    for word in sentence.split(' ') {
        let mut rest: Vec<char> = word.chars().collect();
        if used > 0 && used + 1 + rest.len() > width {
            lines.push(std::mem::take(&mut line));
            used = 0;
        }
        while rest.len() > width {
            let tail = rest.split_off(width);
            lines.push(rest.into_iter().collect());
            rest = tail;
        }
        if used > 0 {
            line.push(' ');
            used += 1;
        }
        used += rest.len();
        line.extend(rest);
    }
    if !line.is_empty() || lines.is_empty() {
        lines.push(line);
    }
    lines
}

/// What every column gets of `room` characters: its widest text where all fit.
/// Else titles over numbers are broken into words, then the widest texts shrink
/// evenly, words up to [`UNBROKEN`] kept whole while that is possible.
fn widths(grid: &Grid, room: usize) -> Vec<usize> {
    let length = |text: &str| text.chars().count();
    let word = |text: &str| text.split(' ').map(length).max().unwrap_or(0);
    let widest = |column: usize, measure: &dyn Fn(&str) -> usize| {
        let cells = grid.rows.iter().map(|row| measure(&row[column]));
        cells.max().unwrap_or(0)
    };
    let columns = || grid.columns.iter().enumerate();
    let mut widths: Vec<usize> = columns()
        .map(|(i, (title, _))| widest(i, &length).max(length(title)))
        .collect();
    let total = |widths: &[usize]| widths.iter().sum::<usize>();
    if total(&widths) > room {
        for (i, (title, number)) in columns() {
            if *number {
                widths[i] = widest(i, &length).max(word(title));
            }
        }
    }
    let mut least: Vec<usize> = columns()
        .map(|(i, (title, number))| {
            let whole = if *number {
                widest(i, &length)
            } else {
                widest(i, &word)
            };
            whole.max(word(title)).min(UNBROKEN)
        })
        .collect();
    while total(&widths) > room {
        let shrinkable = (0..widths.len()).filter(|&i| widths[i] > least[i]);
        if let Some(i) = shrinkable.max_by_key(|&i| (widths[i], usize::MAX - i)) {
            widths[i] -= 1;
        } else if least.iter().any(|&least| least > 1) {
            least.fill(1);
        } else {
            break;
        }
    }
    widths
}

fn table(text: &mut String, grid: &Grid, width: usize) {
    let mut table = Table::new();
    table
        .load_style(comfy_table::presets::NOTHING)
        .set_content_arrangement(ContentArrangement::Dynamic)
        .set_width(u16::try_from(width - INDENT.len()).unwrap_or(u16::MAX))
        .force_no_tty()
        .set_header(grid.columns.iter().map(|(title, _)| *title));
    table.add_rows(grid.rows.iter());
    let gaps = GAP * grid.columns.len().saturating_sub(1);
    let widths = widths(grid, (width - INDENT.len()).saturating_sub(gaps));
    for (i, (_, number)) in grid.columns.iter().enumerate() {
        if let Some(column) = table.column_mut(i) {
            let gap = if i > 0 { GAP as u16 } else { 0 };
            column.set_padding((gap, 0));
            let width = u16::try_from(widths[i]).unwrap_or(u16::MAX);
            column.set_constraint(ColumnConstraint::Absolute(Width::Fixed(width + gap)));
            if *number {
                column.set_cell_alignment(CellAlignment::Right);
            }
        }
    }
    for line in table.lines() {
        text.push_str(INDENT);
        text.push_str(line.trim_end());
        text.push('\n');
    }
}
