//! The terminal form: headings, sentences wrapped, tables.
//!
//! It fits the width it is given (80 columns unless the terminal says less or
//! more), and is plain text unless it is told that colour is wanted: this room
//! asks no terminal.

use super::Page;
use super::outline::{Block, Caps, Grid, Outline};
use crate::audit::record::Audit;
use comfy_table::{CellAlignment, ColumnConstraint, ContentArrangement, Table, Width};

const CAPS: Caps = Caps {
    rows: 24,
    name: 48,
    sentence: 900,
};

/// Words up to this length are kept whole in a table.
const UNBROKEN: usize = 22;

/// What sets a table off from the sentences around it.
const INDENT: &str = "  ";

/// The terminal form of `audit`.
pub fn render(audit: &Audit, page: Page) -> String {
    let outline = Outline::of(audit, CAPS);
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
fn wrapped(sentence: &str, width: usize) -> Vec<String> {
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

/// The longest word of a column, as far as a column can be kept from breaking it.
fn longest_word(grid: &Grid, column: usize) -> u16 {
    let cells = grid.rows.iter().map(|row| row[column].as_str());
    let texts = cells.chain([grid.columns[column].0]);
    let words = texts.flat_map(|text| text.split(' '));
    let longest = words.map(|word| word.chars().count()).max().unwrap_or(0);
    longest.min(UNBROKEN) as u16
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
    for (i, (_, number)) in grid.columns.iter().enumerate() {
        if let Some(column) = table.column_mut(i) {
            column.set_padding((u16::from(i > 0), 1));
            column.set_constraint(ColumnConstraint::LowerBoundary(Width::Fixed(
                longest_word(grid, i) + 1 + u16::from(i > 0),
            )));
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
