//! Timing: delay models, arrival times, longest paths and slack.
//!
//! Paths start at inputs, register outputs, box outputs and cut nets, never at
//! constants; they end at output ports, register inputs and controls, box
//! inputs and gates that drive cut nets. Everything is one forward or backward
//! pass over the gates in topological order, so the time is linear and the
//! stack does not grow with the depth of the netlist.
//!
//! Invariant: times are ticks of the delay model in `i32`; [`NEVER`] marks what
//! no path reaches.

mod delays;
pub mod effort;
mod ends;
mod factored;
mod goals;
mod model;
mod near;
mod passes;
mod path;
mod report;
mod time;

pub use delays::{Loaded, PinDelays};
pub use ends::{
    End, EndClass, EndGroup, PathKind, StartClass, StartGroup, end_net, ends, grouped_ends,
    start_group, start_time,
};
pub use goals::{Basis, Goals, Spare, Spares};
pub use model::{DelayModel, TableModel};
pub use near::{MANY, Near};
pub use passes::{Arrivals, NEVER, Tails, end_arrival, gate_arrival, start_times};
pub use path::{PathStep, longest_path};
pub use report::{KindTiming, Slack, Timing, depth_histogram, longest_free_buffers};
pub use time::Time;
