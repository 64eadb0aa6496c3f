//! Untrusted bytes made fit to be shown: escaped, and trimmed around the place
//! that matters.
//!
//! Letters, digits, ASCII punctuation and blanks stand as they are; everything
//! else (control characters, bidirectional marks, bytes that are not UTF-8) is
//! written `\u{..}` or `\x..`. A netlist line can be megabytes long, so an
//! excerpt is cut to a window of bytes before anything is decoded.

use std::fmt::Write;
use std::ops::Range;

/// Bytes shown of a long line, and how many of them stand before the place.
const WINDOW: usize = 100;
const BEFORE: usize = 40;
/// Most bytes of a name in a message.
const NAME: usize = 60;

/// `bytes` with everything escaped that is not plainly printable.
pub fn escape(bytes: &[u8]) -> String {
    let mut text = String::with_capacity(bytes.len());
    for chunk in bytes.utf8_chunks() {
        for c in chunk.valid().chars() {
            if c == '\t' {
                text.push(' ');
            } else if c == ' ' || c.is_ascii_graphic() || c.is_alphanumeric() {
                text.push(c);
            } else {
                text.extend(c.escape_unicode());
            }
        }
        for byte in chunk.invalid() {
            let _ = write!(text, "\\x{byte:02x}");
        }
    }
    text
}

/// A name for a message: escaped, cut to sixty bytes, in backquotes.
pub fn quote(bytes: &[u8]) -> String {
    if bytes.len() > NAME {
        format!("`{}...`", escape(&bytes[..NAME]))
    } else {
        format!("`{}`", escape(bytes))
    }
}

/// A printable stretch of a line and the part of it that is meant.
pub(super) struct Excerpt {
    pub(super) text: String,
    pub(super) span: Range<usize>,
}

/// The stretch of `line` around the 1-based byte column, or its beginning.
pub(super) fn of_line(line: &[u8], column: Option<u32>, length: u32) -> Excerpt {
    let at = column.map_or(0, |c| (c as usize).saturating_sub(1).min(line.len()));
    let (mut from, mut to) = (0, line.len());
    if line.len() > WINDOW {
        from = at.saturating_sub(BEFORE).min(line.len() - WINDOW);
        to = from + WINDOW;
    }
    // Not inside a character: a cut one would be shown as broken bytes.
    while from > 0 && from < at && line[from] & 0xC0 == 0x80 {
        from += 1;
    }
    let meant = match column {
        None => to,
        Some(_) => (at + (length as usize).max(1)).clamp(at, to),
    };
    let mut text = String::new();
    if from > 0 {
        text.push_str("...");
    }
    text.push_str(&escape(&line[from..at]));
    let start = text.len();
    text.push_str(&escape(&line[at..meant]));
    let end = text.len();
    text.push_str(&escape(&line[meant..to]));
    if to < line.len() {
        text.push_str("...");
    }
    Excerpt {
        text,
        span: start..end,
    }
}
