//! Warnings that would repeat: each kind of oddity is told once, with its number
//! of occurrences and the first place.
//!
//! A file can hold as many different unknown words as it has lines, so the list
//! itself is bounded; what was left out is counted in a last warning.

use super::grammar::Called;
use crate::source::{Diagnostic, Place, escape, quote};
use rustc_hash::FxHashMap;

/// Most warnings of one file.
const SHOWN: usize = 100;

/// What was odd.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(super) enum Oddity {
    /// A dot-word that is not read.
    Word,
    /// `.input` or `.output`.
    Singular,
    /// A cover with inputs and without rows.
    NoRows,
    /// A don't-care section.
    DontCares,
    /// Text between `.end` and the next model.
    AfterEnd,
    /// A state table whose logic follows.
    StateTable,
    /// A state table without logic.
    StateTableAlone,
    /// A state table with another number of rows than it announces.
    TableRows,
    /// A second line that says the same about the same port, or of the model.
    SaidTwice,
    /// A line about a port that the model does not have.
    NoSuchPort,
    /// Lines about ports of a model that is not the top.
    BelowTop,
    /// A comment right after a character of a word.
    GluedComment,
    /// A name twice in one list of ports.
    RepeatedPort,
    /// An instance whose function is not in the file.
    Missing(Called),
}

struct Entry {
    oddity: Oddity,
    file: usize,
    subject: Vec<u8>,
    place: Place,
    count: u64,
}

/// The oddities met so far, in the order they were first met.
#[derive(Default)]
pub(super) struct Tally {
    /// The file that is being read, and that counts go to.
    pub(super) file: usize,
    entries: Vec<Entry>,
    index: FxHashMap<(Oddity, usize, Vec<u8>), usize>,
}

impl Tally {
    /// Counts one occurrence; `subject` tells those of one kind apart, `place`
    /// is asked for the first only.
    pub(super) fn count(
        &mut self,
        oddity: Oddity,
        subject: &[u8],
        times: u64,
        place: impl FnOnce() -> Place,
    ) {
        let key = (oddity, self.file, subject.to_vec());
        if let Some(&at) = self.index.get(&key) {
            self.entries[at].count += times;
            return;
        }
        self.index.insert(key, self.entries.len());
        self.entries.push(Entry {
            oddity,
            file: self.file,
            subject: subject.to_vec(),
            place: place(),
            count: times,
        });
    }

    /// The warnings, by file and line; `files` holds the files' names.
    pub(super) fn into_warnings(mut self, files: &[String]) -> Vec<Diagnostic> {
        let line = |entry: &Entry| match entry.place {
            Place::Line { line, .. } => (entry.file, line),
            Place::File | Place::Byte(_) => (entry.file, 0),
        };
        self.entries.sort_by_key(line);
        let mut warnings: Vec<_> = self
            .entries
            .iter()
            .take(SHOWN)
            .map(|entry| entry.warning(&files[entry.file]))
            .collect();
        if let Some(next) = self.entries.get(SHOWN) {
            warnings.push(Diagnostic::warning(
                &files[next.file],
                next.place,
                format!(
                    "{} more warnings, from here on, are not shown",
                    self.entries.len() - SHOWN
                ),
                "check that this is the file that was meant",
            ));
        }
        warnings
    }
}

fn plural(count: u64, one: &str, many: &str) -> String {
    format!("{count} {}", if count == 1 { one } else { many })
}

impl Entry {
    fn warning(&self, file: &str) -> Diagnostic {
        let subject = quote(&self.subject);
        let n = self.count;
        let (message, help) = match self.oddity {
            Oddity::Word => (
                format!(
                    "{subject} is not a word that is read here: {} skipped",
                    plural(n, "line", "lines")
                ),
                if self.subject == b".search" {
                    "no further file is read here; copy the models it names into this one"
                } else {
                    "the rest of the file is read as if the lines were not there"
                },
            ),
            Oddity::Singular => (
                format!(
                    "expected `{}s`, found {subject} on {}; read as the plural",
                    escape(&self.subject),
                    plural(n, "line", "lines")
                ),
                "write the plural, which is what the format document defines",
            ),
            Oddity::NoRows => (
                format!(
                    "expected rows after `.names` with inputs, found none for {}; read as \
                     constant 0",
                    plural(n, "gate", "gates")
                ),
                "check that the file is not cut short; write a constant without inputs",
            ),
            Oddity::DontCares => (
                format!(
                    "{} of don't-cares (`.exdc`) skipped",
                    plural(n, "section", "sections")
                ),
                "the logic is read as its covers state it",
            ),
            Oddity::AfterEnd => (
                format!(
                    "expected `.model` after `.end`, found other text: {} skipped",
                    plural(n, "line", "lines")
                ),
                "begin another model with `.model`, or take the text out",
            ),
            Oddity::StateTable => (
                format!(
                    "{} (`.start_kiss`) skipped; the logic beside it is read",
                    plural(n, "state table", "state tables")
                ),
                "whether the two agree is not checked",
            ),
            Oddity::StateTableAlone => (
                format!("the state table of model {subject} has no logic: kept as a black box"),
                "put the gates and latches of the state machine after the table to see inside",
            ),
            Oddity::TableRows => (
                format!(
                    "expected as many rows as `.p` announces, found another number in {}",
                    plural(n, "state table", "state tables")
                ),
                "check that the file is not cut short",
            ),
            Oddity::SaidTwice => (
                format!(
                    "expected {subject} once for each port or model, found it repeated ({}); the \
                     last one counts",
                    plural(n, "time", "times")
                ),
                "leave the others out",
            ),
            Oddity::NoSuchPort => (
                format!(
                    "expected a port of the model, found {subject} on {}, left out",
                    plural(n, "line", "lines")
                ),
                "arrival, drive and load of inputs name an input, required time and load of \
                 outputs an output",
            ),
            Oddity::BelowTop => (
                format!(
                    "{} about clocks and ports of models below the top left out",
                    plural(n, "line", "lines")
                ),
                "such lines count in the top model only, as the format document has it",
            ),
            Oddity::GluedComment => (
                format!(
                    "a comment begins right after a character on {}",
                    plural(n, "line", "lines")
                ),
                "`#` cannot be part of a name; put a blank before a comment",
            ),
            Oddity::RepeatedPort => (
                format!(
                    "expected each port once in its list, found {subject} repeated ({}); it \
                     counts once",
                    plural(n, "time", "times")
                ),
                "leave the repetition out",
            ),
            Oddity::Missing(called) => {
                let (what, help) = match called {
                    Called::Model => (
                        "model",
                        "a net that nothing else drives is taken as driven by it; put the \
                         model into the file to see inside",
                    ),
                    _ => (
                        "cell",
                        "a net that nothing else drives is taken as driven by it; state the \
                         function as `.names` or as a model to see inside",
                    ),
                };
                (
                    format!(
                        "{what} {subject} is not in the file: {} kept as a black box",
                        plural(n, "instance", "instances")
                    ),
                    help,
                )
            }
        };
        Diagnostic::warning(file, self.place, message, help)
    }
}
