//! `arrival-aware`: the optimum of the prefix class for a chain's own arrivals.
//!
//! [`Times`] has the earliest time of every span, exactly; from them the needed
//! carries and sums are chosen with as few gates as the required times allow, all
//! of them sharing spans. What is off the critical spans is made as cheaply as a
//! heuristic finds.
//!
//! S. Held and S. T. Spirkl, "Fast Prefix Adders for Non-uniform Input Arrival
//! Times", Algorithmica 77, 2017, for the recurrence.

pub(super) mod spans;
pub(super) mod times;

pub use times::{Leaves, Steps, Times};

use super::form::Form;
use super::task::{Task, fulfil};
use spans::Spans;

/// The carries and sums of a task, and how much later than asked they are.
pub fn arrival_aware(task: &Task) -> (Form, i32) {
    let times = Times::of(&task.leaves, &task.steps);
    fulfil(task, &Spans { times: &times })
}
