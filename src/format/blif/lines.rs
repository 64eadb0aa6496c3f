//! Physical lines to logical lines: comments cut off, continued lines joined.
//!
//! A comment runs from `#` to the end of its line and ends the logical line, so a
//! backslash inside a comment continues nothing. A backslash as the very last
//! character joins the next line to what stands before it, with nothing put in
//! between. Blanks are space, tab and carriage return, so files with CR LF line
//! ends need nothing special.
//!
//! A line that is not continued is a slice of the source; only joined lines are
//! copied, into one buffer that is used again. [`Lines::place`] leads from a byte
//! of a logical line back to its physical line and column, on the cold path.

use crate::source::{Diagnostic, Place, Source, quote};

/// The bytes of a mark some editors put first; it is no part of the text.
const BYTE_ORDER_MARK: &[u8] = b"\xef\xbb\xbf";

/// Whether `byte` parts words.
#[inline]
pub(super) fn is_blank(byte: u8) -> bool {
    matches!(byte, b' ' | b'\t' | b'\r')
}

/// The first word outside comments: its line, its column and its bytes.
pub(in crate::format) fn first_word(bytes: &[u8]) -> Option<(u32, u32, &[u8])> {
    let mark = if bytes.starts_with(BYTE_ORDER_MARK) {
        BYTE_ORDER_MARK.len()
    } else {
        0
    };
    for (i, line) in bytes.split(|&b| b == b'\n').enumerate() {
        let skipped = if i == 0 { mark } else { 0 };
        let line = &line[skipped..];
        let Some(start) = line.iter().position(|&b| !is_blank(b)) else {
            continue;
        };
        if line[start] == b'#' {
            continue;
        }
        let word = &line[start..];
        let end = word.iter().position(|&b| is_blank(b));
        let word = &word[..end.unwrap_or(word.len())];
        return Some((i as u32 + 1, (start + skipped) as u32 + 1, word));
    }
    None
}

/// Where a stretch of a joined line comes from.
#[derive(Clone, Copy)]
struct Piece {
    /// Offset in the logical line.
    at: usize,
    line: u32,
    /// Offset in the source.
    offset: usize,
}

/// The logical lines of a source.
pub(super) struct Lines<'a> {
    source: &'a Source,
    next: usize,
    next_line: u32,
    /// Range of the current line in the source, when it is not joined.
    range: (usize, usize),
    first_line: u32,
    joined: Vec<u8>,
    pieces: Vec<Piece>,
    /// First comment that begins right after a character of a word, and how many.
    pub(super) glued_comments: Option<(u32, u64)>,
}

impl<'a> Lines<'a> {
    pub(super) fn new(source: &'a Source) -> Self {
        let next = if source.bytes.starts_with(BYTE_ORDER_MARK) {
            BYTE_ORDER_MARK.len()
        } else {
            0
        };
        Self {
            source,
            next,
            next_line: 1,
            range: (next, next),
            first_line: 1,
            joined: Vec::new(),
            pieces: Vec::new(),
            glued_comments: None,
        }
    }

    /// Steps to the next logical line that holds a word.
    ///
    /// # Errors
    /// A continuation that continues into nothing, or blanks after a backslash.
    pub(super) fn advance(&mut self) -> Result<bool, Diagnostic> {
        loop {
            if self.next >= self.source.bytes.len() {
                return Ok(false);
            }
            self.first_line = self.next_line;
            self.pieces.clear();
            let (start, mut end, mut continued) = self.physical()?;
            self.range = (start, end);
            if continued {
                self.joined.clear();
                let mut from = start;
                loop {
                    self.pieces.push(Piece {
                        at: self.joined.len(),
                        line: self.next_line - 1,
                        offset: from,
                    });
                    self.joined.extend_from_slice(&self.source.bytes[from..end]);
                    if !continued {
                        break;
                    }
                    if self.next >= self.source.bytes.len() {
                        return Err(self.continued_into_nothing(end));
                    }
                    (from, end, continued) = self.physical()?;
                }
            }
            if self.text().iter().any(|&b| !is_blank(b)) {
                return Ok(true);
            }
        }
    }

    /// The current logical line.
    #[inline]
    pub(super) fn text(&self) -> &[u8] {
        if self.pieces.is_empty() {
            &self.source.bytes[self.range.0..self.range.1]
        } else {
            &self.joined
        }
    }

    /// Physical line on which the current logical line begins.
    #[inline]
    pub(super) fn line(&self) -> u32 {
        self.first_line
    }

    /// The place of `length` bytes from `at` on in the current logical line.
    #[cold]
    pub(super) fn place(&self, at: usize, length: usize) -> Place {
        let piece = self
            .pieces
            .iter()
            .rev()
            .find(|piece| piece.at <= at)
            .copied()
            .unwrap_or(Piece {
                at: 0,
                line: self.first_line,
                offset: self.range.0,
            });
        let offset = piece.offset + (at - piece.at);
        let before = &self.source.bytes[..offset.min(self.source.bytes.len())];
        let line_start = before
            .iter()
            .rposition(|&b| b == b'\n')
            .map_or(0, |i| i + 1);
        Place::Line {
            line: piece.line,
            column: u32::try_from(offset - line_start + 1).ok(),
            length: u32::try_from(length).unwrap_or(u32::MAX),
        }
    }

    /// Takes one physical line: start and end in the source without comment, line
    /// end and backslash, and whether a backslash was there.
    fn physical(&mut self) -> Result<(usize, usize, bool), Diagnostic> {
        let bytes = &self.source.bytes[self.next..];
        let length = bytes.iter().position(|&b| b == b'\n');
        let line = &bytes[..length.unwrap_or(bytes.len())];
        let start = self.next;
        let number = self.next_line;
        self.next += length.map_or(bytes.len(), |n| n + 1);
        self.next_line = self.next_line.saturating_add(1);

        let comment = line.iter().position(|&b| b == b'#');
        let mut end = comment.unwrap_or(line.len());
        if let Some(at) = comment
            && at > 0
            && !is_blank(line[at - 1])
        {
            let (_, count) = self.glued_comments.get_or_insert((number, 0));
            *count += 1;
        }
        if comment.is_none() && line.ends_with(b"\r") {
            end -= 1;
        }
        if comment.is_none() && line[..end].ends_with(b"\\") {
            return Ok((start, start + end - 1, true));
        }
        let last = line[..end].iter().rposition(|&b| !is_blank(b));
        if let Some(last) = last
            && line[last] == b'\\'
        {
            return Err(self.blank_after_backslash(number, last, &line[last + 1..]));
        }
        Ok((start, start + end, false))
    }

    #[cold]
    fn blank_after_backslash(&self, line: u32, at: usize, rest: &[u8]) -> Diagnostic {
        let place = Place::Line {
            line,
            column: u32::try_from(at + 1).ok(),
            length: 1,
        };
        let found = match rest.iter().find(|&&b| !is_blank(b)) {
            Some(b'#') => "a comment".to_owned(),
            Some(_) => quote(rest),
            None => "blanks".to_owned(),
        };
        Diagnostic::error(
            &self.source.name,
            place,
            format!("expected the end of the line after `\\`, found {found}"),
            "a backslash joins the next line only as the very last character of its own",
        )
    }

    #[cold]
    fn continued_into_nothing(&self, end: usize) -> Diagnostic {
        let before = &self.source.bytes[..end];
        let line_start = before
            .iter()
            .rposition(|&b| b == b'\n')
            .map_or(0, |i| i + 1);
        let place = Place::Line {
            line: self.next_line - 1,
            column: u32::try_from(end - line_start + 1).ok(),
            length: 1,
        };
        Diagnostic::error(
            &self.source.name,
            place,
            "expected another line after `\\`, found the end of the file",
            "take the backslash out, or check whether the file is cut short",
        )
    }
}
