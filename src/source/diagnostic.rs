//! A located message about an input: what was expected, what was found, what to
//! do about it.
//!
//! Diagnostics are built on cold paths only; the state of a reader stays small
//! and columns are looked up again when a message needs them. [`Diagnostic`] is
//! plain data with a one-line form (`Display`) and a form with an excerpt
//! ([`Diagnostic::render`]).
//!
//! Invariant: every place names a line of the source as it was read, counted
//! from 1, or a byte counted from 0; a place never needs the source to be valid.

use super::Source;
use super::excerpt::{self, escape};
use annotate_snippets::{AnnotationKind, Group, Level, Origin, Renderer, Snippet};
use std::fmt;

/// How bad it is.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Severity {
    /// The input is read all the same.
    Warning,
    /// The input cannot be used.
    Error,
}

/// Where in an input.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Place {
    /// The input as a whole.
    File,
    /// A line of text.
    Line {
        /// 1-based line.
        line: u32,
        /// 1-based byte column, when it means something.
        column: Option<u32>,
        /// Number of bytes meant from the column on; at least 1 is shown.
        length: u32,
    },
    /// A byte of a binary input, from 0.
    Byte(u64),
}

impl Place {
    /// A whole line.
    pub fn line(line: u32) -> Self {
        Self::Line {
            line,
            column: None,
            length: 0,
        }
    }
}

/// One message about an input.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Diagnostic {
    /// How bad it is.
    pub severity: Severity,
    /// Name of the input.
    pub file: String,
    /// Where.
    pub place: Place,
    /// What was expected and what was found.
    pub message: String,
    /// What to do; may be empty in a warning that needs no action.
    pub help: String,
    /// A second line that matters, and what it is.
    pub second: Option<Box<(u32, String)>>,
}

impl Diagnostic {
    /// An error at `place` of the input named `file`.
    #[cold]
    pub fn error(
        file: &str,
        place: Place,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> Self {
        Self {
            severity: Severity::Error,
            file: file.to_owned(),
            place,
            message: message.into(),
            help: help.into(),
            second: None,
        }
    }

    /// A warning at `place` of the input named `file`.
    #[cold]
    pub fn warning(
        file: &str,
        place: Place,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> Self {
        Self {
            severity: Severity::Warning,
            ..Self::error(file, place, message, help)
        }
    }

    /// Adds the second place.
    #[must_use]
    pub fn and(mut self, line: u32, label: impl Into<String>) -> Self {
        self.second = Some(Box::new((line, label.into())));
        self
    }

    /// The 1-based line, in text.
    pub fn line(&self) -> Option<u32> {
        match self.place {
            Place::Line { line, .. } => Some(line),
            Place::File | Place::Byte(_) => None,
        }
    }

    /// The 1-based byte column, when it means something.
    pub fn column(&self) -> Option<u32> {
        match self.place {
            Place::Line { column, .. } => column,
            Place::File | Place::Byte(_) => None,
        }
    }

    /// The byte offset, in binary input.
    pub fn offset(&self) -> Option<u64> {
        match self.place {
            Place::Byte(offset) => Some(offset),
            Place::File | Place::Line { .. } => None,
        }
    }

    /// The message with an excerpt of the source, several lines long. `source`
    /// is the input the message is about; of another one no excerpt is shown.
    pub fn render(&self, source: &Source, color: bool) -> String {
        let level = match self.severity {
            Severity::Error => Level::ERROR,
            Severity::Warning => Level::WARNING,
        };
        let file = escape(self.file.as_bytes());
        let mut group = level
            .primary_title(self.message.as_str())
            .element(Origin::path(match self.place {
                Place::Byte(offset) => format!("{file}, byte {offset}"),
                Place::File => file.clone(),
                Place::Line {
                    line,
                    column: Some(column),
                    ..
                } => format!("{file}:{line}:{column}"),
                Place::Line { line, .. } => format!("{file}:{line}"),
            }));
        let is_own = self.file == source.name;
        if let Place::Line {
            line,
            column,
            length,
        } = self.place
            && is_own
        {
            group = with_excerpt(
                group,
                source,
                line,
                column,
                length,
                AnnotationKind::Primary,
                None,
            );
        }
        if let Some((line, label)) = self.second.as_deref() {
            group = group.element(Origin::path(format!("{file}:{line}")));
            if is_own {
                let kind = AnnotationKind::Context;
                group = with_excerpt(group, source, *line, None, 0, kind, Some(label));
            }
        }
        if !self.help.is_empty() {
            group = group.element(Level::HELP.message(self.help.as_str()));
        }
        let renderer = if color {
            Renderer::styled()
        } else {
            Renderer::plain()
        };
        without_empty_origins(&renderer.render(&[group]))
    }
}

/// An excerpt may begin inside its line, so its place is given apart from it, as
/// an origin of its own; the renderer then marks the excerpt itself with an origin
/// that is empty. Leaves those lines out.
fn without_empty_origins(rendered: &str) -> String {
    let is_empty_origin = |line: &str| {
        let styles = line.split('\u{1b}').enumerate();
        let text = styles.map(|(i, part)| match part.split_once('m') {
            Some((_, text)) if i > 0 => text,
            _ => part,
        });
        text.collect::<String>().trim() == ":::"
    };
    let kept: Vec<_> = rendered
        .split('\n')
        .filter(|l| !is_empty_origin(l))
        .collect();
    kept.join("\n")
}

fn with_excerpt<'a>(
    group: Group<'a>,
    source: &Source,
    line: u32,
    column: Option<u32>,
    length: u32,
    kind: AnnotationKind,
    label: Option<&'a str>,
) -> Group<'a> {
    let shown = excerpt::of_line(source.line(line), column, length);
    let annotation = kind.span(shown.span).label(label);
    group.element(
        Snippet::source(shown.text)
            .line_start(line as usize)
            .annotation(annotation),
    )
}

impl fmt::Display for Diagnostic {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&escape(self.file.as_bytes()))?;
        match self.place {
            Place::File => {}
            Place::Line { line, column, .. } => {
                write!(f, ":{line}")?;
                if let Some(column) = column {
                    write!(f, ":{column}")?;
                }
            }
            Place::Byte(offset) => write!(f, ", byte {offset}")?,
        }
        let severity = match self.severity {
            Severity::Error => "error",
            Severity::Warning => "warning",
        };
        write!(f, ": {severity}: {}", self.message)?;
        if let Some((line, label)) = self.second.as_deref() {
            write!(f, " (line {line}: {label})")?;
        }
        if !self.help.is_empty() {
            write!(f, "; {}", self.help)?;
        }
        Ok(())
    }
}

impl std::error::Error for Diagnostic {}
