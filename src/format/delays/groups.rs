//! A Liberty text as a tree of the groups that say something about delay.
//!
//! Groups are followed on an explicit stack, and those of other kinds are passed
//! over by their shape, as in the reader of functions; both share their tokens.

use crate::format::cells::{blank, word};
use crate::source::{Diagnostic, Place, Source, quote};

/// Most groups inside each other.
const DEEPEST: usize = 256;
/// Kinds of group that are kept.
const KEPT: &[&str] = &[
    "library",
    "lu_table_template",
    "cell",
    "pin",
    "timing",
    "cell_rise",
    "cell_fall",
];

/// A group.
#[derive(Default)]
pub(super) struct Group {
    pub(super) kind: String,
    pub(super) names: Vec<String>,
    pub(super) line: u32,
    attributes: Vec<(String, Vec<String>, u32)>,
    pub(super) groups: Vec<Group>,
}

impl Group {
    /// The values of an attribute and their line.
    pub(super) fn values(&self, name: &str) -> Option<(&[String], u32)> {
        let found = self.attributes.iter().find(|(known, ..)| known == name)?;
        Some((&found.1, found.2))
    }

    /// The only value of an attribute.
    pub(super) fn value(&self, name: &str) -> Option<&str> {
        self.values(name)?.0.first().map(String::as_str)
    }

    /// The groups of one kind inside.
    pub(super) fn of_kind<'g>(&'g self, kind: &'g str) -> impl Iterator<Item = &'g Group> {
        self.groups.iter().filter(move |group| group.kind == kind)
    }

    /// The first name.
    pub(super) fn name(&self) -> &str {
        self.names.first().map_or("", String::as_str)
    }
}

/// Reads the only group of a text.
pub(super) fn read(source: &Source) -> Result<Group, Box<Diagnostic>> {
    let whole = String::from_utf8_lossy(&source.bytes);
    let mut scanner = Scanner {
        source,
        rest: &whole,
        seen: &whole,
        line: 1,
    };
    let mut stack: Vec<Group> = Vec::new();
    let mut top: Option<Group> = None;
    loop {
        scanner.skip();
        if scanner.rest.is_empty() {
            return match (stack.is_empty(), top) {
                (true, Some(group)) => Ok(group),
                _ => Err(scanner.expected("`}`")),
            };
        }
        if scanner.take(';') {
            continue;
        }
        if scanner.take('}') {
            let Some(group) = stack.pop() else {
                return Err(scanner.expected("a group, `kind(name) {`"));
            };
            match stack.last_mut() {
                Some(parent) if KEPT.contains(&group.kind.as_str()) => parent.groups.push(group),
                Some(_) => {}
                None => top = top.or(Some(group)),
            }
            continue;
        }
        scanner.statement(&mut stack)?;
    }
}

struct Scanner<'s, 't> {
    source: &'s Source,
    rest: &'t str,
    /// The text from where lines were counted last.
    seen: &'t str,
    line: u32,
}

impl<'t> Scanner<'_, 't> {
    #[cold]
    fn expected(&mut self, what: &str) -> Box<Diagnostic> {
        let line = self.line();
        let found: String = self
            .rest
            .chars()
            .take_while(|&c| c != '\n')
            .take(20)
            .collect();
        let found = match found.as_str() {
            "" => "the end of the line or file".to_owned(),
            text => quote(text.as_bytes()),
        };
        Box::new(Diagnostic::error(
            &self.source.name,
            Place::line(line),
            format!("expected {what}, found {found}"),
            "a Liberty library is groups `kind(name) { ... }` of attributes `name : value;`",
        ))
    }

    fn line(&mut self) -> u32 {
        let passed = &self.seen.as_bytes()[..self.seen.len() - self.rest.len()];
        self.line += passed.iter().filter(|&&b| b == b'\n').count() as u32;
        self.seen = self.rest;
        self.line
    }

    fn skip(&mut self) {
        if let Ok((rest, ())) = blank(self.rest) {
            self.rest = rest;
        }
    }

    fn take(&mut self, sign: char) -> bool {
        let found = self.rest.strip_prefix(sign);
        self.rest = found.unwrap_or(self.rest);
        found.is_some()
    }

    fn word(&mut self, what: &str) -> Result<&'t str, Box<Diagnostic>> {
        self.skip();
        match word(self.rest) {
            Ok((rest, word)) => {
                self.rest = rest;
                Ok(word)
            }
            Err(_) => Err(self.expected(what)),
        }
    }

    fn statement(&mut self, stack: &mut Vec<Group>) -> Result<(), Box<Diagnostic>> {
        let name = self.word("an attribute or a group")?.to_owned();
        self.skip();
        let line = self.line();
        if self.take(':') {
            let mut said = self.word("a value")?.to_owned();
            loop {
                self.skip();
                if self.take(';') || self.rest.starts_with('}') || self.line() != line {
                    break;
                }
                said.push_str(self.word("`;`")?);
            }
            if let Some(group) = stack.last_mut() {
                group.attributes.push((name, vec![said], line));
            }
            return Ok(());
        }
        if !self.take('(') {
            return Err(self.expected("`:` or `(`"));
        }
        let mut names = Vec::new();
        loop {
            self.skip();
            if self.take(')') {
                break;
            }
            if !self.take(',') && !self.take(':') {
                names.push(self.word("a name or `)`")?.to_owned());
            }
        }
        self.skip();
        if !self.take('{') {
            self.take(';');
            if let Some(group) = stack.last_mut() {
                group.attributes.push((name, names, line));
            }
            return Ok(());
        }
        if stack.len() == DEEPEST {
            return Err(self.expected(&format!("at most {DEEPEST} groups inside each other")));
        }
        stack.push(Group {
            kind: name,
            names,
            line,
            ..Group::default()
        });
        Ok(())
    }
}
