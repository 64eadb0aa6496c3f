//! The grammar of the lines about clocks, times, loads, delays and areas, with
//! nom.
//!
//! Each line is a dot-word and fields parted by blanks; the human name of every
//! field is an argument of the field's parser, so that each message says which
//! one was expected. Source: the BLIF document of 28 July 1992, from memory;
//! clauses B60 and following of `grammar-notes/blif.md`.
//!
//! Names stay bytes of the line here; [`Constraint::map`] turns them into whatever
//! the reader keeps.

use super::grammar::{Fault, Words, fault, missing, nothing_more, offset};
use super::lines::is_blank;
use crate::format::constraints::{ClockEdge, Phase, PinDelay, Reference, RiseFall, TimedEdge};
use crate::source::quote;
use nom::branch::alt;
use nom::bytes::complete::{tag, take_while, take_while1};
use nom::character::complete::{char, one_of};
use nom::combinator::{all_consuming, verify};
use nom::number::complete::recognize_float;
use nom::sequence::{preceded, separated_pair};
use nom::{IResult, Parser};

/// What one line says.
#[derive(Clone, Debug)]
pub(super) enum Constraint<N> {
    Area(f64),
    Delay(PinDelay<N>),
    WireLoadSlope(f64),
    WireLoads(Vec<f64>),
    InputArrival(N, RiseFall, Option<Reference<N>>),
    DefaultInputArrival(RiseFall),
    OutputRequired(N, RiseFall, Option<Reference<N>>),
    DefaultOutputRequired(RiseFall),
    InputDrive(N, RiseFall),
    DefaultInputDrive(RiseFall),
    OutputLoad(N, f64),
    DefaultOutputLoad(f64),
    MaxInputLoad(N, f64),
    DefaultMaxInputLoad(f64),
    Cycle(f64),
    ClockEvent(f64, Vec<TimedEdge<N>>),
}

impl<N> Constraint<N> {
    /// The same with every name passed through `name`.
    pub(super) fn map<M>(self, mut name: impl FnMut(N) -> M) -> Constraint<M> {
        let edge = |edge: ClockEdge<N>, name: &mut dyn FnMut(N) -> M| ClockEdge {
            clock: name(edge.clock),
            rising: edge.rising,
        };
        let reference = |r: Option<Reference<N>>, name: &mut dyn FnMut(N) -> M| {
            r.map(|r| Reference {
                before: r.before,
                edge: edge(r.edge, name),
            })
        };
        match self {
            Self::Area(area) => Constraint::Area(area),
            Self::Delay(delay) => Constraint::Delay(PinDelay {
                pin: name(delay.pin),
                phase: delay.phase,
                load: delay.load,
                most_load: delay.most_load,
                block: delay.block,
                drive: delay.drive,
            }),
            Self::WireLoadSlope(slope) => Constraint::WireLoadSlope(slope),
            Self::WireLoads(loads) => Constraint::WireLoads(loads),
            Self::InputArrival(port, at, from) => {
                Constraint::InputArrival(name(port), at, reference(from, &mut name))
            }
            Self::DefaultInputArrival(at) => Constraint::DefaultInputArrival(at),
            Self::OutputRequired(port, at, from) => {
                Constraint::OutputRequired(name(port), at, reference(from, &mut name))
            }
            Self::DefaultOutputRequired(at) => Constraint::DefaultOutputRequired(at),
            Self::InputDrive(port, drive) => Constraint::InputDrive(name(port), drive),
            Self::DefaultInputDrive(drive) => Constraint::DefaultInputDrive(drive),
            Self::OutputLoad(port, load) => Constraint::OutputLoad(name(port), load),
            Self::DefaultOutputLoad(load) => Constraint::DefaultOutputLoad(load),
            Self::MaxInputLoad(port, load) => Constraint::MaxInputLoad(name(port), load),
            Self::DefaultMaxInputLoad(load) => Constraint::DefaultMaxInputLoad(load),
            Self::Cycle(time) => Constraint::Cycle(time),
            Self::ClockEvent(percent, events) => {
                let events = events.into_iter();
                let events = events.map(|event| TimedEdge {
                    edge: edge(event.edge, &mut name),
                    slack: event.slack,
                });
                Constraint::ClockEvent(percent, events.collect())
            }
        }
    }

    /// Whether it describes a model as a cell rather than the design's ports.
    pub(super) fn is_of_a_cell(&self) -> bool {
        matches!(self, Self::Area(_) | Self::Delay(_))
    }
}

/// A number as written: digits, point, exponent; no infinity and no `nan`.
fn real(input: &[u8]) -> IResult<&[u8], f64> {
    all_consuming(recognize_float)
        .map_opt(|digits: &[u8]| std::str::from_utf8(digits).ok()?.parse::<f64>().ok())
        .parse_complete(input)
}

/// `r'clk` or `f'clk`.
fn edge(input: &[u8]) -> IResult<&[u8], ClockEdge<&[u8]>> {
    let name = take_while1(|b| !is_blank(b) && b != b')' && b != b'(');
    separated_pair(one_of("rf"), char('\''), name)
        .map(|(kind, clock)| ClockEdge {
            clock,
            rising: kind == 'r',
        })
        .parse_complete(input)
}

fn blanks(input: &[u8]) -> IResult<&[u8], &[u8]> {
    take_while(is_blank).parse_complete(input)
}

/// A number between blanks, inside brackets.
fn bracketed_real(input: &[u8]) -> IResult<&[u8], f64> {
    let digits = take_while1(|b| !is_blank(b) && b != b')');
    preceded(blanks, digits.and_then(real)).parse_complete(input)
}

/// An edge, or an edge in brackets with its slack before and after.
fn event(input: &[u8]) -> IResult<&[u8], TimedEdge<&[u8]>> {
    let slack = (bracketed_real, bracketed_real);
    let bracketed = (
        char('('),
        preceded(blanks, edge),
        nom::combinator::opt(slack),
        blanks,
        char(')'),
    );
    let bracketed = bracketed.map(|(_, edge, slack, _, _)| TimedEdge { edge, slack });
    let plain = edge.map(|edge| TimedEdge { edge, slack: None });
    preceded(blanks, alt((bracketed, plain))).parse_complete(input)
}

fn phase(input: &[u8]) -> IResult<&[u8], Phase> {
    all_consuming(alt((
        tag("INV").map(|_| Phase::Inverting),
        tag("NONINV").map(|_| Phase::NonInverting),
        tag("UNKNOWN").map(|_| Phase::Unknown),
    )))
    .parse_complete(input)
}

/// The fields of a line, one by one.
struct Fields<'a> {
    line: &'a [u8],
    words: Words<'a>,
    /// The line's form, for whoever wrote it otherwise.
    form: &'static str,
}

impl<'a> Fields<'a> {
    fn name(&mut self, what: &str) -> Result<&'a [u8], Fault> {
        let next = self.words.next();
        next.ok_or_else(|| missing(self.line, what, self.form))
    }

    fn number(&mut self, word: &'a [u8], what: &str) -> Result<f64, Fault> {
        match verify(real, |value: &f64| value.is_finite()).parse_complete(word) {
            Ok((_, value)) => Ok(value),
            Err(_) => Err(fault(
                self.line,
                word,
                format!("expected {what} (a number), found {}", quote(word)),
                self.form,
            )),
        }
    }

    fn real(&mut self, what: &str) -> Result<f64, Fault> {
        let word = self.name(what)?;
        self.number(word, what)
    }

    fn rise_fall(&mut self, rise: &str, fall: &str) -> Result<RiseFall, Fault> {
        Ok(RiseFall {
            rise: self.real(rise)?,
            fall: self.real(fall)?,
        })
    }

    /// `b` or `a` and an edge, or nothing.
    fn reference(&mut self) -> Result<Option<Reference<&'a [u8]>>, Fault> {
        let Some(side) = self.words.next() else {
            return Ok(None);
        };
        let before = match side {
            b"b" => true,
            b"a" => false,
            other => {
                let expected = "`b` (before) or `a` (after) a clock edge";
                return Err(self.unexpected(other, expected));
            }
        };
        let word = self.name("a clock edge")?;
        match all_consuming(edge).parse_complete(word) {
            Ok((_, edge)) => Ok(Some(Reference { before, edge })),
            Err(_) => {
                Err(self.unexpected(word, "a clock edge (`r'` or `f'` and the clock's name)"))
            }
        }
    }

    fn unexpected(&self, word: &[u8], expected: &str) -> Fault {
        let found = quote(word);
        fault(
            self.line,
            word,
            format!("expected {expected}, found {found}"),
            self.form,
        )
    }

    fn end(self) -> Result<(), Fault> {
        nothing_more(self.line, self.words, self.form)
    }
}

/// A line about clocks, times, loads, delays or areas; `None` when its dot-word is
/// another.
pub(super) fn constraint<'a>(
    line: &'a [u8],
    keyword: &[u8],
    words: Words<'a>,
) -> Result<Option<Constraint<&'a [u8]>>, Fault> {
    let Some(form) = form(keyword) else {
        return Ok(None);
    };
    let mut f = Fields { line, words, form };
    let times = ["the rise time", "the fall time"];
    let drives = ["the rise drive", "the fall drive"];
    let (input, output) = ["an input port", "an output port"].into();
    let parsed = match keyword {
        b".area" => Constraint::Area(f.real("an area")?),
        b".delay" => Constraint::Delay(delay(&mut f)?),
        b".wire_load_slope" => Constraint::WireLoadSlope(f.real("a load for each reader")?),
        b".wire" => {
            let mut loads = vec![f.real("a load")?];
            while let Some(word) = f.words.next() {
                loads.push(f.number(word, "a load")?);
            }
            Constraint::WireLoads(loads)
        }
        b".input_arrival" => {
            let port = f.name(input)?;
            let at = f.rise_fall(times[0], times[1])?;
            Constraint::InputArrival(port, at, f.reference()?)
        }
        b".default_input_arrival" => {
            Constraint::DefaultInputArrival(f.rise_fall(times[0], times[1])?)
        }
        b".output_required" => {
            let port = f.name(output)?;
            let at = f.rise_fall(times[0], times[1])?;
            Constraint::OutputRequired(port, at, f.reference()?)
        }
        b".default_output_required" => {
            Constraint::DefaultOutputRequired(f.rise_fall(times[0], times[1])?)
        }
        b".input_drive" => {
            Constraint::InputDrive(f.name(input)?, f.rise_fall(drives[0], drives[1])?)
        }
        b".default_input_drive" => {
            Constraint::DefaultInputDrive(f.rise_fall(drives[0], drives[1])?)
        }
        b".output_load" => Constraint::OutputLoad(f.name(output)?, f.real("a load")?),
        b".default_output_load" => Constraint::DefaultOutputLoad(f.real("a load")?),
        b".max_input_load" => Constraint::MaxInputLoad(f.name(input)?, f.real("a load")?),
        b".default_max_input_load" => Constraint::DefaultMaxInputLoad(f.real("a load")?),
        b".cycle" => {
            let word = f.name("a cycle time")?;
            let time = f.number(word, "a cycle time")?;
            if time <= 0.0 {
                return Err(f.unexpected(word, "a cycle time above 0"));
            }
            Constraint::Cycle(time)
        }
        _ => return clock_event(f).map(Some),
    };
    f.end()?;
    Ok(Some(parsed))
}

/// How the line of a word is written; `None` for other words.
fn form(keyword: &[u8]) -> Option<&'static str> {
    Some(match keyword {
        b".area" => "write `.area` and one number",
        b".delay" => {
            "write `.delay` input phase load most-load block-rise drive-rise block-fall drive-fall"
        }
        b".wire_load_slope" => "write `.wire_load_slope` and one number",
        b".wire" => "write `.wire` and one load for each number of readers",
        b".input_arrival" => "write `.input_arrival` input rise fall, and `b` or `a` with an edge",
        b".output_required" => {
            "write `.output_required` output rise fall, and `b` or `a` with an edge"
        }
        b".default_input_arrival" => "write `.default_input_arrival` rise fall",
        b".default_output_required" => "write `.default_output_required` rise fall",
        b".input_drive" => "write `.input_drive` input rise fall",
        b".default_input_drive" => "write `.default_input_drive` rise fall",
        b".output_load" => "write `.output_load` output load",
        b".default_output_load" => "write `.default_output_load` and one number",
        b".max_input_load" => "write `.max_input_load` input load",
        b".default_max_input_load" => "write `.default_max_input_load` and one number",
        b".cycle" => "write `.cycle` and one number",
        b".clock_event" => {
            "write `.clock_event` percent, then edges such as `r'clk` or `(f'clk 1 2)`"
        }
        _ => return None,
    })
}

fn delay<'a>(f: &mut Fields<'a>) -> Result<PinDelay<&'a [u8]>, Fault> {
    let pin = f.name("an input port")?;
    let word = f.name("a phase")?;
    let Ok((_, phase)) = phase(word) else {
        return Err(f.unexpected(word, "a phase (`INV`, `NONINV` or `UNKNOWN`)"));
    };
    let load = f.real("the pin's load")?;
    let most_load = f.real("the most load")?;
    let mut block = RiseFall::default();
    let mut drive = RiseFall::default();
    block.rise = f.real("the block delay to rise")?;
    drive.rise = f.real("the drive to rise")?;
    block.fall = f.real("the block delay to fall")?;
    drive.fall = f.real("the drive to fall")?;
    Ok(PinDelay {
        pin,
        phase,
        load,
        most_load,
        block,
        drive,
    })
}

fn clock_event(mut f: Fields<'_>) -> Result<Constraint<&[u8]>, Fault> {
    let word = f.name("a position in the cycle, in percent")?;
    let percent = f.number(word, "a position in the cycle, in percent")?;
    if !(0.0..=100.0).contains(&percent) {
        return Err(f.unexpected(word, "a position from 0 to 100 percent"));
    }
    // Brackets may hold blanks, so the rest is read as bytes and not as words.
    let mut rest = &f.line[offset(f.line, word) + word.len()..];
    let mut events = Vec::new();
    while rest.iter().any(|&b| !is_blank(b)) {
        let Ok((after, found)) = event(rest) else {
            let word = Words::new(rest).next().unwrap_or_default();
            return Err(f.unexpected(word, "a clock edge such as `r'clk` or `(f'clk 1 2)`"));
        };
        if after.first().is_some_and(|&b| !is_blank(b) && b != b'(') {
            let word = Words::new(after).next().unwrap_or_default();
            return Err(f.unexpected(word, "a blank after a clock edge"));
        }
        events.push(found);
        rest = after;
    }
    if events.is_empty() {
        return Err(missing(f.line, "a clock edge", f.form));
    }
    Ok(Constraint::ClockEvent(percent, events))
}
