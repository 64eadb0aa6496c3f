//! The sections of a report for people, one function each, in the order of
//! reading: what limits, what was found, what to build instead, what to look
//! at, and the measures behind it.
//!
//! A section without content is left out, and a list that is cut says by how
//! much and where the whole of it stands.

mod chains;
mod measures;
mod notes;
mod path;

pub use chains::{chains, rebuild};
pub use measures::{measures, paths, ports};
pub use notes::{assumed, findings, undecided};
pub use path::longest_path;

use super::number::grouped;
use super::outline::{Block, Grid};

/// A table cut to `most` rows, and the sentence that says so.
pub(super) fn cut(
    columns: Vec<(&'static str, bool)>,
    mut rows: Vec<Vec<String>>,
    total: usize,
    most: usize,
    what: &str,
) -> Vec<Block> {
    rows.truncate(most);
    let left_out = total - rows.len();
    let mut blocks = Vec::new();
    if !rows.is_empty() {
        blocks.push(Block::Grid(Grid { columns, rows }));
    }
    if left_out > 0 {
        blocks.push(Block::Text(format!(
            "{} more {what} not shown here; the YAML and JSON forms hold them.",
            grouped(left_out as u64)
        )));
    }
    blocks
}
