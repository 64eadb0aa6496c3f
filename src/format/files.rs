//! How a reader comes to the further files that a netlist names.
//!
//! Readers never touch files. Whoever calls them may hand in a [`FileAccess`],
//! which decides what may be opened at all; without one, no further file is read
//! and that is said.
//!
//! Invariant: a file has one path, however it was named; so a file is read once
//! and a cycle of files is found.

use crate::source::Source;
use std::fmt;
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// Why a file is not to be had.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Refusal {
    /// What was found in place of a file that may be read.
    pub found: String,
    /// What to do.
    pub help: String,
}

/// Access to the files a netlist names.
pub trait FileAccess: fmt::Debug + Send + Sync {
    /// The path of the first input, that all others are found from.
    fn main(&self) -> PathBuf;

    /// The path of the file that the file `from` calls `wanted`, links resolved.
    ///
    /// # Errors
    /// When there is no such file or it may not be read.
    fn locate(&self, from: &Path, wanted: &[u8]) -> Result<PathBuf, Refusal>;

    /// The text of a file that was located.
    ///
    /// # Errors
    /// When it cannot be read.
    fn open(&self, path: &Path) -> Result<Arc<Source>, Refusal>;
}
