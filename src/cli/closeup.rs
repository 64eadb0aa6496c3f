//! Runs `closeup`: one netlist read, one chain of it looked at bit by bit.

use super::Status;
use super::audit::{Inputs, with_netlist};
use super::options::CloseupArguments;
use super::terminal::{complain, page};
use crate::audit::closeup::{CloseupError, closeup};
use crate::report;
use std::io::{self, BufWriter, ErrorKind, Write};
use std::panic::{AssertUnwindSafe, catch_unwind};

/// Runs the command.
pub fn run(arguments: &CloseupArguments) -> Status {
    let inputs = match Inputs::of(&arguments.shared) {
        Ok(inputs) => inputs,
        Err(worse) => return worse,
    };
    let file = &arguments.file;
    let made = catch_unwind(AssertUnwindSafe(|| {
        with_netlist(
            file,
            &arguments.shared,
            &inputs,
            |netlist, origin, asserting| {
                let options = arguments.shared.auditing(inputs.model);
                match closeup(netlist, origin, &options, asserting, &arguments.chain) {
                    Ok(closeup) => Ok(Ok(closeup)),
                    Err(CloseupError::Audit(error)) => Err(error),
                    Err(error) => Ok(Err(error)),
                }
            },
        )
    }));
    let made = match made {
        Ok(Ok(made)) => made,
        Ok(Err(worse)) => return worse,
        Err(_) => {
            complain("a fault of carrywise itself, told above; the netlist is not to blame");
            return Status::Fault;
        }
    };
    let closeup = match made {
        Ok(closeup) => closeup,
        Err(error) => {
            complain(&error.to_string());
            return Status::Unusable;
        }
    };
    let mut out = BufWriter::new(io::stdout());
    let form = arguments.shared.form.form();
    let written = report::write_closeup(&closeup, form, page(), &mut out);
    match written.and_then(|()| out.flush()) {
        Ok(()) => Status::Done,
        Err(error) if error.kind() == ErrorKind::BrokenPipe => Status::Done,
        Err(error) => {
            complain(&format!("cannot write to standard output: {error}"));
            Status::Unusable
        }
    }
}
