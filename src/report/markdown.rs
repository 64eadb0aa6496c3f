//! The Markdown form: what a reviewer pastes into a code review.
//!
//! The title says what was read, the verdict follows at once. Everything that
//! Markdown, or a forge that extends it, gives a meaning to is escaped, so that
//! a net name can start no markup, link, reference or mention. The whole stays
//! under a bound in characters whatever the netlist: tables shrink until it
//! does, and say what they left out.

use super::closeup;
use super::outline::{Block, Caps, Grid, Outline};
use crate::audit::record::{Audit, Closeup};
use std::fmt::Write;

/// Most characters of one Markdown document. The tightest of the large forges
/// takes 65,536 in a comment (as measured by users in 2025, not documented).
pub const MOST_CHARACTERS: usize = 60_000;

/// The Markdown form of `audit` in fewer than `most` characters, as far as the
/// opening sentences allow.
pub fn render(audit: &Audit, most: usize) -> String {
    fitted(most, |caps| laid_out(&Outline::of(audit, caps)))
}

/// The Markdown form of `closeup`, in the same bounds.
pub fn render_closeup(closeup: &Closeup, most: usize) -> String {
    fitted(most, |caps| laid_out(&closeup::outline(closeup, caps)))
}

fn fitted(most: usize, make: impl Fn(Caps) -> String) -> String {
    let mut caps = Caps {
        rows: 64,
        name: 64,
        sentence: 900,
    };
    loop {
        let text = make(caps);
        if text.chars().count() < most || caps.rows == 0 {
            return text;
        }
        caps = Caps {
            rows: caps.rows / 2,
            name: (caps.name * 3 / 4).max(24),
            sentence: (caps.sentence * 3 / 4).max(300),
        };
    }
}

fn laid_out(outline: &Outline) -> String {
    let mut text = format!("### {}\n\n", escaped(&outline.read));
    let mut say = |line: &str| {
        text.push_str(line);
        text.push_str("\n\n");
    };
    say(&format!("**{}**", escaped(&outline.verdict)));
    say(&escaped(&outline.seen));
    for section in &outline.sections {
        if section.aside {
            say(&format!(
                "<details><summary>{}</summary>",
                escaped(section.heading)
            ));
        } else {
            say(&format!("#### {}", escaped(section.heading)));
        }
        for block in &section.blocks {
            match block {
                Block::Text(sentence) => say(&escaped(sentence)),
                Block::Grid(grid) => say(table(grid).trim_end()),
            }
        }
        if section.aside {
            say("</details>");
        }
    }
    say(&escaped(&outline.settings));
    say(&format!("> {}", escaped(&outline.caution)));
    text.truncate(text.trim_end().len());
    text.push('\n');
    text
}

fn table(grid: &Grid) -> String {
    let mut text = String::new();
    let mut row = |cells: &mut dyn Iterator<Item = String>| {
        for cell in cells {
            let _ = write!(text, "| {cell} ");
        }
        text.push_str("|\n");
    };
    row(&mut grid.columns.iter().map(|(title, _)| escaped(title)));
    row(&mut grid.columns.iter().map(|(_, number)| {
        let rule = if *number { "---:" } else { "---" };
        rule.to_owned()
    }));
    for cells in &grid.rows {
        row(&mut cells.iter().map(|cell| escaped(cell)));
    }
    text
}

/// Text in which no character starts Markdown, HTML, mathematics, a mention or
/// a reference; read back by a Markdown reader it is the text itself.
fn escaped(text: &str) -> String {
    let mut safe = String::with_capacity(text.len() + 8);
    let mut before = ' ';
    for c in text.chars() {
        match c {
            '\\' | '`' | '*' | '_' | '[' | ']' | '<' | '>' | '|' | '~' | '&' | '$' | '#' => {
                safe.push('\\');
                safe.push(c);
            }
            // Forges look for mentions and addresses after Markdown is done, so
            // a backslash does not stop them; an empty comment does.
            '@' => safe.push_str("@<!-- -->"),
            '/' if before == ':' => safe.push_str("<!-- -->/"),
            '.' if before.eq_ignore_ascii_case(&'w') => safe.push_str("<!-- -->."),
            _ => safe.push(c),
        }
        if c == '#' {
            safe.push_str("<!-- -->");
        }
        before = c;
    }
    safe
}
