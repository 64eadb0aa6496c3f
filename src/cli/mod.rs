//! The command line: the only room that touches files, the terminal, the
//! environment and the exit status.
//!
//! Standard output holds the result and nothing else; everything said besides
//! goes to standard error. One runner per command.

mod audit;
mod closeup;
mod explain;
mod options;
mod search;
mod targets;
mod terminal;
mod tradeoff;

use clap::Parser;
use options::{Command, CommandLine};
use std::process::ExitCode;

/// How a run ended, the worst last.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Status {
    /// Done.
    Done,
    /// What was asked to hold does not.
    NotHeld,
    /// An input or the command line could not be used.
    Unusable,
    /// A fault of carrywise itself.
    Fault,
}

impl Status {
    /// The exit status.
    pub fn code(self) -> u8 {
        match self {
            Self::Done => 0,
            Self::NotHeld => 1,
            Self::Unusable => 2,
            Self::Fault => 4,
        }
    }
}

/// Runs the command line of this process.
pub fn run() -> ExitCode {
    let status = match CommandLine::try_parse() {
        Ok(line) => match line.command {
            Command::Audit(arguments) => audit::run(&arguments),
            Command::Closeup(arguments) => closeup::run(&arguments),
            Command::Tradeoff(arguments) => tradeoff::run(&arguments),
            Command::Explain { rule } => explain::run(rule.as_deref()),
        },
        Err(answer) => {
            // Help and version are answers too; a closed pipe is no fault.
            let _ = answer.print();
            match answer.exit_code() {
                0 => Status::Done,
                _ => Status::Unusable,
            }
        }
    };
    ExitCode::from(status.code())
}
