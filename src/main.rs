//! The carrywise command; everything it does is in [`carrywise::cli`].

use std::process::ExitCode;

fn main() -> ExitCode {
    carrywise::cli::run()
}
