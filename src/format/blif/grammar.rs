//! The grammar of one logical BLIF line, with nom.
//!
//! BLIF is line oriented: a statement is a dot-word and blank-separated words, a
//! cover row is a plane of `0 1 -` and an output column. This file knows no
//! context but the number of columns a row must have; which statement may stand
//! where is for the reader above. Source of the grammar: the BLIF document of
//! 28 July 1992; what is accepted beyond it is said in `grammar-notes/blif.md`.
//!
//! A [`Fault`] points into the line; it becomes a located message on the cold
//! path.

use super::constraint::{self, Constraint};
use super::kiss;
use super::lines::is_blank;
use crate::netlist::{Initial, Trigger};
use crate::source::quote;
use nom::branch::alt;
use nom::bytes::complete::{tag, take_till1, take_while, take_while1};
use nom::character::complete::{char, one_of};
use nom::combinator::{eof, rest, verify};
use nom::sequence::{delimited, preceded, separated_pair, terminated};
use nom::{IResult, Parser};

/// What is wrong with a line, and where in it.
pub(super) struct Fault {
    /// Byte of the line.
    pub(super) at: usize,
    pub(super) length: usize,
    pub(super) message: String,
    pub(super) help: &'static str,
}

/// The words after a dot-word, one by one.
#[derive(Clone, Copy)]
pub(super) struct Words<'a>(&'a [u8]);

impl<'a> Words<'a> {
    /// The words of a line.
    pub(super) fn new(line: &'a [u8]) -> Self {
        Self(line)
    }
}

impl<'a> Iterator for Words<'a> {
    type Item = &'a [u8];

    #[inline]
    fn next(&mut self) -> Option<&'a [u8]> {
        let (rest, word) = preceded(blanks, word).parse_complete(self.0).ok()?;
        self.0 = rest;
        Some(word)
    }
}

/// What an instance is an instance of.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(super) enum Called {
    /// `.subckt`: a model.
    Model,
    /// `.gate`: a cell of a library.
    Cell,
    /// `.mlatch`: a latch cell of a library.
    LatchCell,
    /// A model that gives its machine as a state table only.
    StateTable,
}

/// A `.latch` line.
pub(super) struct LatchLine<'a> {
    pub(super) input: &'a [u8],
    pub(super) output: &'a [u8],
    pub(super) trigger: Trigger,
    pub(super) control: Option<&'a [u8]>,
    pub(super) initial: Initial,
}

/// A line that begins with a dot.
pub(super) enum Statement<'a> {
    Model(&'a [u8]),
    /// Names, and whether the singular `.input` stood there.
    Inputs(Words<'a>, bool),
    /// Names, and whether the singular `.output` stood there.
    Outputs(Words<'a>, bool),
    Clock(Words<'a>),
    Names(Words<'a>),
    Latch(LatchLine<'a>),
    Instance {
        called: Called,
        model: &'a [u8],
        bindings: Words<'a>,
    },
    Exdc,
    End(Words<'a>),
    StartKiss,
    EndKiss,
    /// `.latch_order` or `.code`, which follow a state table.
    AfterKiss,
    /// `.search`: another file to take models from.
    Search(&'a [u8]),
    /// A line about clocks, times, loads, delays or areas.
    Constraint(Constraint<&'a [u8]>),
    /// Any other dot-word.
    Unknown(&'a [u8]),
}

fn blanks(input: &[u8]) -> IResult<&[u8], &[u8]> {
    take_while(is_blank).parse_complete(input)
}

fn word(input: &[u8]) -> IResult<&[u8], &[u8]> {
    take_while1(|b| !is_blank(b)).parse_complete(input)
}

/// `formal=actual`; the formal ends at the first `=`.
fn pair(input: &[u8]) -> IResult<&[u8], (&[u8], &[u8])> {
    separated_pair(
        take_till1(|b| b == b'='),
        char('='),
        verify(rest, |actual: &[u8]| !actual.is_empty()),
    )
    .parse_complete(input)
}

fn plane(input: &[u8]) -> IResult<&[u8], &[u8]> {
    take_while1(|b| matches!(b, b'0' | b'1' | b'-')).parse_complete(input)
}

fn output_column(input: &[u8]) -> IResult<&[u8], char> {
    terminated(one_of("01"), (blanks, eof)).parse_complete(input)
}

fn trigger(input: &[u8]) -> IResult<&[u8], Trigger> {
    let kinds = alt((
        tag("re").map(|_| Trigger::RisingEdge),
        tag("fe").map(|_| Trigger::FallingEdge),
        tag("ah").map(|_| Trigger::ActiveHigh),
        tag("al").map(|_| Trigger::ActiveLow),
        tag("as").map(|_| Trigger::Asynchronous),
    ));
    terminated(kinds, eof).parse_complete(input)
}

fn initial(input: &[u8]) -> IResult<&[u8], Initial> {
    let values = one_of("0123").map(|c| match c {
        '0' => Initial::Zero,
        '1' => Initial::One,
        '2' => Initial::Any,
        _ => Initial::Unknown,
    });
    terminated(values, eof).parse_complete(input)
}

/// Offset of `part`, a slice of `line`.
pub(super) fn offset(line: &[u8], part: &[u8]) -> usize {
    (part.as_ptr() as usize).saturating_sub(line.as_ptr() as usize)
}

/// A fault of `part`, a slice of the line.
#[cold]
pub(super) fn fault(line: &[u8], part: &[u8], message: String, help: &'static str) -> Fault {
    Fault {
        at: offset(line, part).min(line.len()),
        length: part.len(),
        message,
        help,
    }
}

/// A fault at the end of the line.
#[cold]
pub(super) fn missing(line: &[u8], expected: &str, help: &'static str) -> Fault {
    Fault {
        at: line
            .iter()
            .rposition(|&b| !is_blank(b))
            .map_or(0, |i| i + 1),
        length: 0,
        message: format!("expected {expected}, found the end of the line"),
        help,
    }
}

/// Whether the line is a statement and not a cover row.
pub(super) fn is_statement(line: &[u8]) -> bool {
    line.iter().find(|&&b| !is_blank(b)) == Some(&b'.')
}

/// A line that begins with a dot.
pub(super) fn statement(line: &[u8]) -> Result<Statement<'_>, Fault> {
    let mut words = Words::new(line);
    let keyword = words.next().unwrap_or_default();
    let parsed = match keyword {
        b".names" => Statement::Names(words),
        b".subckt" => return instance(line, Called::Model, words),
        b".gate" => return instance(line, Called::Cell, words),
        b".mlatch" => return instance(line, Called::LatchCell, words),
        b".latch" => Statement::Latch(latch(line, words)?),
        b".inputs" => Statement::Inputs(words, false),
        b".input" => Statement::Inputs(words, true),
        b".outputs" => Statement::Outputs(words, false),
        b".output" => Statement::Outputs(words, true),
        b".clock" => Statement::Clock(words),
        b".model" => {
            let name = words
                .next()
                .ok_or_else(|| missing(line, "a model name", "write `.model` and one name"))?;
            nothing_more(line, words, "a model has one name, without blanks")?;
            Statement::Model(name)
        }
        b".end" => Statement::End(words),
        b".exdc" => {
            nothing_more(
                line,
                words,
                "the section's lists stand on lines of their own",
            )?;
            Statement::Exdc
        }
        b".start_kiss" => {
            nothing_more(line, words, "the table begins in the next line")?;
            Statement::StartKiss
        }
        b".end_kiss" => {
            nothing_more(
                line,
                words,
                "what follows the table begins in the next line",
            )?;
            Statement::EndKiss
        }
        b".latch_order" => Statement::AfterKiss,
        b".code" => {
            kiss::code(line, words)?;
            Statement::AfterKiss
        }
        b".search" => {
            let help = "write `.search` and the name of one file, without blanks";
            let file = words
                .next()
                .ok_or_else(|| missing(line, "the name of a file", help))?;
            nothing_more(line, words, help)?;
            Statement::Search(file)
        }
        other => match constraint::constraint(line, other, words)? {
            Some(constraint) => Statement::Constraint(constraint),
            None => Statement::Unknown(other),
        },
    };
    Ok(parsed)
}

/// Refuses a word where the line should end.
pub(super) fn nothing_more(
    line: &[u8],
    mut words: Words<'_>,
    help: &'static str,
) -> Result<(), Fault> {
    match words.next() {
        None => Ok(()),
        Some(word) => Err(fault(
            line,
            word,
            format!("expected the end of the line, found {}", quote(word)),
            help,
        )),
    }
}

fn instance<'a>(
    line: &'a [u8],
    called: Called,
    mut words: Words<'a>,
) -> Result<Statement<'a>, Fault> {
    let Some(model) = words.next() else {
        let help = "write the name, then `formal=actual` for each connection";
        let expected = match called {
            Called::Model => "the name of a model",
            _ => "the name of a cell",
        };
        return Err(missing(line, expected, help));
    };
    Ok(Statement::Instance {
        called,
        model,
        bindings: words,
    })
}

/// One `formal=actual` of an instance.
pub(super) fn binding<'a>(line: &[u8], word: &'a [u8]) -> Result<(&'a [u8], &'a [u8]), Fault> {
    match pair(word) {
        Ok((_, bound)) => Ok(bound),
        Err(_) => Err(fault(
            line,
            word,
            format!("expected `formal=actual`, found {}", quote(word)),
            "name the model's port, `=` and the net it is connected to, without blanks; leave \
             out a port that is not connected",
        )),
    }
}

/// The initial value of a latch cell.
pub(super) fn initial_value(line: &[u8], word: &[u8]) -> Result<Initial, Fault> {
    match initial(word) {
        Ok((_, value)) => Ok(value),
        Err(_) => Err(fault(
            line,
            word,
            format!(
                "expected an initial value (`0`, `1`, `2` or `3`), found {}",
                quote(word)
            ),
            "the initial value comes last",
        )),
    }
}

fn latch<'a>(line: &'a [u8], mut words: Words<'a>) -> Result<LatchLine<'a>, Fault> {
    const FORM: &str = "write `.latch input output`, then type and control, then the initial \
                        value; the last two parts may be left out";
    let input = words
        .next()
        .ok_or_else(|| missing(line, "the latch's input", FORM))?;
    let output = words
        .next()
        .ok_or_else(|| missing(line, "the latch's output", FORM))?;
    let tail: [Option<&[u8]>; 3] = [words.next(), words.next(), words.next()];
    nothing_more(line, words, FORM)?;
    let mut parsed = LatchLine {
        input,
        output,
        trigger: Trigger::Unstated,
        control: None,
        initial: Initial::Unknown,
    };
    // The number of words decides which parts are there.
    let (timing, value) = match tail {
        [Some(kind), Some(control), value] => (Some((kind, control)), value),
        [value, ..] => (None, value),
    };
    if let Some((kind, control)) = timing {
        let Ok((_, found)) = trigger(kind) else {
            return Err(fault(
                line,
                kind,
                format!(
                    "expected a latch type (`re`, `fe`, `ah`, `al` or `as`), found {}",
                    quote(kind)
                ),
                FORM,
            ));
        };
        parsed.trigger = found;
        parsed.control = (control != b"NIL").then_some(control);
    }
    if let Some(value) = value {
        let Ok((_, found)) = initial(value) else {
            if timing.is_none() && trigger(value).is_ok() {
                return Err(missing(line, "a control net after the latch type", FORM));
            }
            return Err(fault(
                line,
                value,
                format!(
                    "expected an initial value (`0`, `1`, `2` or `3`), found {}",
                    quote(value)
                ),
                FORM,
            ));
        };
        parsed.initial = found;
    }
    Ok(parsed)
}

/// A cover row of `inputs` columns: the plane and the output column.
pub(super) fn row(line: &[u8], inputs: usize) -> Result<(&[u8], bool), Fault> {
    let parsed: IResult<&[u8], (&[u8], char)> = if inputs == 0 {
        preceded(blanks, output_column)
            .map(|column| (&line[..0], column))
            .parse_complete(line)
    } else {
        let plane = verify(plane, |plane: &[u8]| plane.len() == inputs);
        (
            delimited(blanks, plane, take_while1(is_blank)),
            output_column,
        )
            .parse_complete(line)
    };
    match parsed {
        Ok((_, (plane, column))) => Ok((plane, column == '1')),
        Err(_) => Err(row_fault(line, inputs)),
    }
}

/// Finds what keeps a line from being a row.
#[cold]
fn row_fault(line: &[u8], inputs: usize) -> Fault {
    const COLUMNS: &str = "a row has one column for each input, a blank, and the output column";
    let mut words = Words::new(line);
    let first = words.next().unwrap_or_default();
    if inputs > 0 {
        if let Some(at) = first.iter().position(|b| !matches!(b, b'0' | b'1' | b'-')) {
            return fault(
                line,
                &first[at..=at],
                format!(
                    "expected `0`, `1` or `-` in a cover row, found {}",
                    quote(&first[at..=at])
                ),
                "rows list inputs as 0, 1 or - (absent); names and other text do not belong here",
            );
        }
        let second = words.clone().next();
        if second.is_none() && first.len() == inputs + 1 {
            return missing(
                line,
                "a blank and the output column",
                "part the output column from the inputs with a blank",
            );
        }
        if first.len() != inputs {
            return fault(
                line,
                first,
                format!("expected {inputs} input columns, found {}", first.len()),
                COLUMNS,
            );
        }
    }
    let column = if inputs == 0 {
        Some(first)
    } else {
        words.next()
    };
    match column {
        None => missing(line, "the output column", COLUMNS),
        Some(b"0" | b"1") => {
            let extra = words.next().unwrap_or_default();
            fault(
                line,
                extra,
                format!(
                    "expected the end of the row after the output column, found {}",
                    quote(extra)
                ),
                if inputs == 0 {
                    "a cover without inputs has rows of the output column alone"
                } else {
                    COLUMNS
                },
            )
        }
        Some(other) => fault(
            line,
            other,
            format!(
                "expected `0` or `1` in the output column, found {}",
                quote(other)
            ),
            if inputs == 0 {
                "a cover without inputs has rows of the output column alone"
            } else {
                "each row says for which value of the output it is listed"
            },
        ),
    }
}
