//! `and-or-path`: carries from alternating and-or paths, faster than every prefix
//! adder.
//!
//! A prefix carry waits for a group's G; an and-or path also joins the generates
//! of a group by OR alone, ahead of the rest. [`PathTimes`] has the splits and
//! their sources. The gates are two-input ones; the number of sets and paths grows
//! with the third power of the positions, so this is for [`MOST_POSITIONS`] at
//! most.

mod paths;
mod times;

pub use times::PathTimes;

use super::form::Form;
use super::task::{Task, fulfil};
use paths::Paths;

/// The widest chain whose paths are all looked at.
pub const MOST_POSITIONS: usize = 128;

/// The carries and sums of a task, and how much later than asked they are. Panics
/// above [`MOST_POSITIONS`].
pub fn and_or_path(task: &Task) -> (Form, i32) {
    assert!(task.sums_by.len() <= MOST_POSITIONS, "too many positions");
    let items = task.leaves.generate.len();
    let mut inputs = Vec::with_capacity(2 * items);
    for item in (0..items).rev() {
        inputs.push(task.leaves.generate[item]);
        inputs.push(task.leaves.propagate[item]);
    }
    let times = PathTimes::of(&inputs, task.steps.and[2], task.steps.or[2]);
    fulfil(task, &Paths { times: &times })
}
