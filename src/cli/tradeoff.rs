//! Runs `tradeoff`: reads the arrivals where a file gives them, measures, prints.

use super::Status;
use super::audit::{delay_model, load_or_say};
use super::options::{NewGatesWord, TradeoffArguments};
use super::terminal::{colour_on_stderr, complain, page, say};
use crate::audit::tradeoff::record;
use crate::format::arrivals::{self, InputTimes};
use crate::plan::NewGates;
use crate::plan::tradeoff::{Question, tradeoff};
use crate::report::write_tradeoff;
use crate::source::Limits;
use crate::timing::DelayModel;
use std::io::{ErrorKind, Write};
use std::rc::Rc;

/// Runs the command.
pub fn run(arguments: &TradeoffArguments) -> Status {
    let model = match delay_model(&arguments.delay) {
        Ok((model, _)) => model,
        Err(worse) => return worse,
    };
    let new_gates = match arguments.new_gates {
        NewGatesWord::SingleOperator => NewGates::SingleOperator,
        NewGatesWord::Cover => NewGates::Cover,
    };
    let covers = new_gates == NewGates::Cover;
    if covers && arguments.gate_inputs.is_some_and(|inputs| inputs > 6) {
        complain("a cover has at most 6 inputs; ask for fewer, or for single-operator gates");
        return Status::Unusable;
    }
    let bits = usize::try_from(arguments.bits).unwrap_or(usize::MAX);
    let times = match times(arguments, bits, model) {
        Ok(times) => times,
        Err(worse) => return worse,
    };
    let whole = |n: u64| usize::try_from(n).unwrap_or(usize::MAX);
    let question = Question {
        carry_in: times.carry_in.or(arguments.carry_in.then_some(0)),
        a: times.a,
        b: times.b,
        gate_inputs: arguments.gate_inputs.map(whole),
        covers,
        price: Rc::new(move |function| model.pin_delays(function)),
    };
    let answer = tradeoff(&question);
    let record = record(&question, &answer, model, new_gates.word());
    let mut stdout = std::io::stdout().lock();
    let written = write_tradeoff(&record, arguments.form.form(), page(), &mut stdout);
    match written.and_then(|()| stdout.flush()) {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => {
            complain(&format!("cannot write to standard output: {error}"));
            Status::Unusable
        }
        _ => Status::Done,
    }
}

/// When the inputs are ready, in ticks.
fn times(
    arguments: &TradeoffArguments,
    bits: usize,
    model: DelayModel,
) -> Result<InputTimes, Status> {
    let Some(file) = &arguments.arrivals else {
        return Ok(InputTimes::at_once(bits));
    };
    let name = file.to_string_lossy().into_owned();
    let source = load_or_say(file, &name, Limits::for_gates(0))?;
    arrivals::read(&source, bits, model.ticks_per_unit()).map_err(|error| {
        say(&error.render(&source, colour_on_stderr()));
        Status::Unusable
    })
}
