//! Logical lines to models.
//!
//! One pass over the lines. This file knows which section of the file a line
//! stands in and whether rows may follow; what a statement adds to its model is in
//! `fill`. A faulty line is told and left out, and reading goes on, up to a bound;
//! nothing is built when there was an error.
//!
//! The default rules of the format are kept here: `.model`, `.end` are optional,
//! `.end` is implied by the next `.model` and by the end of the file. Ports that
//! are not listed at all are inferred later, when directions are known.

use super::constraint::Constraint;
use super::cover::{Remembered, Rows};
use super::grammar::{self, Fault, Statement, Words};
use super::kiss::Table;
use super::lines::Lines;
use super::model::{Local, Model};
use super::search;
use super::tally::{Oddity, Tally};
use crate::format::files::FileAccess;
use crate::netlist::{NameId, NetlistBuilder};
use crate::source::{Diagnostic, Place, Source, quote};
use rustc_hash::FxHashMap;

/// Errors after which reading stops.
const MOST_ERRORS: usize = 20;
/// Most distinct names.
const MOST_NAMES: usize = 1 << 31;

/// What a file and the files it names hold.
pub(super) struct Contents {
    pub(super) models: Vec<Model>,
    /// Names of the files, the one that was asked for first.
    pub(super) files: Vec<String>,
    /// The names and functions interned so far; no net yet.
    pub(super) builder: NetlistBuilder,
    pub(super) tally: Tally,
}

/// Which part of the file the lines belong to.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Section {
    /// No model has begun.
    Start,
    Logic,
    DontCares,
    StateTable,
    AfterEnd,
}

/// Whether rows may follow.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Block {
    Closed,
    /// Rows of a `.names` on this line.
    Open(u32),
    /// The `.names` was faulty; its rows are passed over.
    Faulty,
}

// Marks of a model's nets in its port lists.
pub(super) const INPUT: u8 = 1;
pub(super) const OUTPUT: u8 = 2;
pub(super) const CLOCK: u8 = 4;

/// A `.search` line.
pub(super) struct Search {
    pub(super) wanted: Vec<u8>,
    pub(super) place: Place,
}

/// The state of reading one file after another.
pub(super) struct Reader {
    pub(super) files: Vec<String>,
    /// The name of a model without a name, in the file being read.
    stem: Vec<u8>,
    /// Whether further files can be had.
    searching: bool,
    /// What the file being read asks for.
    pub(super) searches: Vec<Search>,
    /// Lines about times and loads that stand before the first model.
    early: Vec<(u32, Constraint<NameId>)>,
    pub(super) table: Table,
    pub(super) builder: NetlistBuilder,
    pub(super) models: Vec<Model>,
    by_name: FxHashMap<NameId, usize>,
    /// By name: number of models begun when it was last seen, and its net there.
    pub(super) locals: Vec<(u32, Local)>,
    /// By net of the open model: the port lists it is in.
    pub(super) marks: Vec<u8>,
    pub(super) section: Section,
    pub(super) block: Block,
    pub(super) rows: Rows,
    pub(super) remembered: Remembered,
    pub(super) errors: Vec<Diagnostic>,
    pub(super) tally: Tally,
}

/// Reads all models of a file and of the files it names.
pub(super) fn parse(
    source: &Source,
    access: Option<&dyn FileAccess>,
) -> Result<Contents, Vec<Diagnostic>> {
    let mut reader = Reader {
        files: Vec::new(),
        stem: Vec::new(),
        searching: access.is_some(),
        searches: Vec::new(),
        early: Vec::new(),
        table: Table::default(),
        builder: NetlistBuilder::new(),
        models: Vec::new(),
        by_name: FxHashMap::default(),
        locals: Vec::new(),
        marks: Vec::new(),
        section: Section::Start,
        block: Block::Closed,
        rows: Rows::default(),
        remembered: Remembered::default(),
        errors: Vec::new(),
        tally: Tally::default(),
    };
    reader.file(source);
    if let Some(access) = access {
        search::read_all(&mut reader, access);
    }
    if reader.errors.is_empty() {
        Ok(Contents {
            models: reader.models,
            files: reader.files,
            builder: reader.builder,
            tally: reader.tally,
        })
    } else {
        Err(reader.errors)
    }
}

impl Reader {
    /// Reads one file whole.
    pub(super) fn file(&mut self, source: &Source) {
        self.tally.file = self.files.len();
        self.files.push(source.name.clone());
        self.stem = source.stem().as_bytes().to_vec();
        self.section = Section::Start;
        let models = self.models.len();
        let mut lines = Lines::new(source);
        loop {
            match lines.advance() {
                Ok(true) => self.line(&lines),
                Ok(false) => break,
                Err(error) => {
                    self.close_block();
                    // What should have been continued follows: not a fault of its own.
                    self.block = Block::Faulty;
                    self.errors.push(error);
                }
            }
            if self.errors.len() >= MOST_ERRORS || self.too_many_names(&lines) {
                break;
            }
        }
        self.close_model();
        if let Some((line, count)) = lines.glued_comments {
            let place = || Place::line(line);
            self.tally.count(Oddity::GluedComment, b"", count, place);
        }
        let searches = self.tally.file > 0 || !self.searches.is_empty();
        if self.errors.is_empty() && self.models.len() == models && !searches {
            self.errors.push(Diagnostic::error(
                &source.name,
                Place::File,
                "expected a model, found only words that are not read",
                "check that this is the file that was meant",
            ));
        }
    }

    /// Whether so many errors were found that reading stops.
    pub(super) fn has_enough_errors(&self) -> bool {
        self.errors.len() >= MOST_ERRORS
    }

    /// The name of the file being read.
    pub(super) fn file_name(&self) -> &str {
        &self.files[self.tally.file]
    }

    fn too_many_names(&mut self, lines: &Lines<'_>) -> bool {
        let many = self.builder.names().len() > MOST_NAMES;
        if many {
            self.errors.push(Diagnostic::error(
                self.file_name(),
                Place::line(lines.line()),
                format!("expected at most {MOST_NAMES} different names, found more"),
                "netlists beyond this size are not read",
            ));
        }
        many
    }

    fn line(&mut self, lines: &Lines<'_>) {
        let text = lines.text();
        let is_statement = grammar::is_statement(text);
        match self.section {
            Section::Start | Section::Logic => {}
            Section::StateTable => return self.state_table_line(lines),
            Section::DontCares | Section::AfterEnd if !is_statement => {
                return self.passed_over(lines);
            }
            Section::DontCares | Section::AfterEnd => {}
        }
        if !is_statement {
            return self.row(lines, text);
        }
        match grammar::statement(text) {
            Ok(statement) if self.section == Section::Start || self.section == Section::Logic => {
                self.statement(lines, text, statement);
            }
            Ok(statement) => self.outside(lines, statement),
            Err(_) if self.section == Section::AfterEnd => self.passed_over(lines),
            Err(fault) => {
                self.close_block();
                self.block = Block::Faulty;
                self.fault(lines, fault);
            }
        }
    }

    #[cold]
    pub(super) fn fault(&mut self, lines: &Lines<'_>, fault: Fault) {
        self.errors.push(Diagnostic::error(
            self.file_name(),
            lines.place(fault.at, fault.length),
            fault.message,
            fault.help,
        ));
    }

    /// A line of a section that is not read, other than a statement.
    fn passed_over(&mut self, lines: &Lines<'_>) {
        if self.section == Section::AfterEnd {
            let place = || Place::line(lines.line());
            self.tally.count(Oddity::AfterEnd, b"", 1, place);
        }
    }

    /// A statement after `.exdc` or after `.end`.
    fn outside(&mut self, lines: &Lines<'_>, statement: Statement<'_>) {
        match statement {
            Statement::Model(name) => self.begin_model(lines, name),
            // Between models and in them alike.
            Statement::Search(file) => self.search(lines, file),
            _ if self.section == Section::AfterEnd => self.passed_over(lines),
            Statement::End(rest) => self.end(lines, rest),
            Statement::Latch(_) | Statement::Instance { .. } => {
                self.errors.push(Diagnostic::error(
                    self.file_name(),
                    Place::line(lines.line()),
                    "expected only `.inputs`, `.outputs` and `.names` in a section of \
                     don't-cares, found a latch or an instance",
                    "put `.exdc` last in its model, or end the model before this line",
                ));
            }
            _ => {}
        }
    }

    /// Ends the open model: what its end implies is settled.
    fn close_model(&mut self) {
        self.close_block();
        match self.section {
            Section::Start => return,
            Section::StateTable => {
                self.section = Section::Logic;
                let error = Diagnostic::error(
                    self.file_name(),
                    Place::line(self.table.line),
                    "expected `.end_kiss` after `.start_kiss`, found the end of the model",
                    "close the state table, or check whether the file is cut short",
                );
                return self.errors.push(error);
            }
            Section::Logic | Section::DontCares | Section::AfterEnd => {}
        }
        self.settle_table();
    }

    fn row(&mut self, lines: &Lines<'_>, text: &[u8]) {
        match self.block {
            Block::Open(_) => {}
            Block::Faulty => return,
            Block::Closed => {
                let start = text.trim_ascii_start();
                let end = start.iter().position(u8::is_ascii_whitespace);
                let word = &start[..end.unwrap_or(start.len())];
                self.errors.push(Diagnostic::error(
                    self.file_name(),
                    lines.place(grammar::offset(text, word), word.len()),
                    format!(
                        "expected a word that begins with a dot, found {}",
                        quote(word)
                    ),
                    "cover rows stand right after their `.names`; a list goes on in the next line \
                     only after a backslash",
                ));
                // One message for a whole run of such lines.
                self.block = Block::Faulty;
                return;
            }
        }
        let (plane, column) = match grammar::row(text, self.rows.inputs()) {
            Ok(row) => row,
            Err(fault) => return self.fault(lines, fault),
        };
        if let Err(first) = self.rows.add(plane, column, lines.line()) {
            let at = text.iter().rposition(|b| matches!(b, b'0' | b'1'));
            let (now, before) = (u8::from(column), u8::from(!column));
            self.errors.push(
                Diagnostic::error(
                    self.file_name(),
                    lines.place(at.unwrap_or(0), 1),
                    format!(
                        "expected output column {before} in every row of this cover, found {now}"
                    ),
                    "a cover lists either where its output is 1 or where it is 0, not both",
                )
                .and(first, format!("the first row has {before}")),
            );
            self.block = Block::Faulty;
        }
    }

    /// The open model; begins the unnamed one where there is none.
    pub(super) fn model(&mut self, line: u32) -> &mut Model {
        if self.section == Section::Start {
            let name = self.builder.name(&self.stem);
            self.push_model(name, line);
        }
        let last = self.models.len() - 1;
        &mut self.models[last]
    }

    fn push_model(&mut self, name: NameId, line: u32) {
        self.by_name.insert(name, self.models.len());
        let mut model = Model::new(name, self.tally.file, line);
        model.constraints.append(&mut self.early);
        self.models.push(model);
        self.marks.clear();
        self.section = Section::Logic;
    }

    pub(super) fn begin_model(&mut self, lines: &Lines<'_>, name: &[u8]) {
        self.close_model();
        let id = self.builder.name(name);
        if let Some(&other) = self.by_name.get(&id) {
            self.second_model(lines.line(), name, other);
        }
        self.push_model(id, lines.line());
    }

    #[cold]
    fn second_model(&mut self, line: u32, name: &[u8], first: usize) {
        let help = "give each model a name of its own";
        let message = format!("expected one model {}, found a second", quote(name));
        let Model { file, line: at, .. } = self.models[first];
        let error = if file == self.tally.file {
            Diagnostic::error(self.file_name(), Place::line(line), message, help)
                .and(at, "the first begins here")
        } else {
            let message = format!(
                "{message}; the first is on line {at} of {}",
                self.files[file]
            );
            Diagnostic::error(self.file_name(), Place::line(line), message, help)
        };
        self.errors.push(error);
    }

    fn end(&mut self, lines: &Lines<'_>, mut rest: Words<'_>) {
        self.close_block();
        self.model(lines.line());
        self.section = Section::AfterEnd;
        if rest.next().is_some() {
            self.passed_over(lines);
        }
    }

    fn statement(&mut self, lines: &Lines<'_>, text: &[u8], statement: Statement<'_>) {
        self.close_block();
        let line = lines.line();
        match statement {
            Statement::Model(name) => self.begin_model(lines, name),
            Statement::Names(words) => self.names(lines, text, words),
            Statement::Latch(latch) => self.latch(line, &latch),
            Statement::Instance {
                called,
                model,
                bindings,
            } => self.instance(lines, text, called, model, bindings),
            Statement::Inputs(words, singular) => {
                if singular {
                    self.singular(lines, b".input");
                }
                self.model(line).ports_given = true;
                self.ports(lines, words, INPUT);
            }
            Statement::Outputs(words, singular) => {
                if singular {
                    self.singular(lines, b".output");
                }
                self.model(line).ports_given = true;
                self.ports(lines, words, OUTPUT);
            }
            Statement::Clock(words) => self.ports(lines, words, CLOCK),
            Statement::Exdc => {
                self.model(line);
                self.section = Section::DontCares;
                let place = || Place::line(line);
                self.tally.count(Oddity::DontCares, b"", 1, place);
            }
            Statement::End(rest) => self.end(lines, rest),
            Statement::StartKiss => self.open_table(line),
            Statement::EndKiss => self.without_table(lines, "`.end_kiss`"),
            Statement::AfterKiss => {
                let has_table = self
                    .models
                    .last()
                    .is_some_and(|model| model.table.is_some());
                if self.section == Section::Start || !has_table {
                    self.without_table(lines, "a line that belongs to one");
                }
            }
            Statement::Search(file) => self.search(lines, file),
            Statement::Constraint(constraint) => {
                let constraint = constraint.map(|name| self.builder.name(name));
                if self.section == Section::Start {
                    self.early.push((line, constraint));
                } else {
                    self.model(line).constraints.push((line, constraint));
                }
            }
            Statement::Unknown(word) => self.unknown(lines, word),
        }
    }

    /// Counts the word; it begins no model, so that it may stand before the first.
    fn unknown(&mut self, lines: &Lines<'_>, word: &[u8]) {
        let place = || Place::line(lines.line());
        self.tally.count(Oddity::Word, word, 1, place);
    }

    fn singular(&mut self, lines: &Lines<'_>, word: &[u8]) {
        let place = || Place::line(lines.line());
        self.tally.count(Oddity::Singular, word, 1, place);
    }

    fn search(&mut self, lines: &Lines<'_>, file: &[u8]) {
        self.close_block();
        if self.searching {
            self.searches.push(Search {
                wanted: file.to_vec(),
                place: lines.place(grammar::offset(lines.text(), file), file.len()),
            });
        } else {
            self.unknown(lines, b".search");
        }
    }
}
