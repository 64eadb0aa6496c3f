//! Logical effort: d = g·h + p in units of τ (Sutherland, Sproull, Harris 1999).
//!
//! [`cell`](self) holds the published values, [`path`](self) the delay of a path
//! whose gates may be sized, and `form` prices the gates of a netlist, whose sizes
//! nobody has said. For those every gate is taken at unit drive, that of the
//! smallest inverter: pin capacitance is then g, the electrical effort is the sum
//! of the readers' pin capacitances over g, and effort delay g·h is that sum.

mod cell;
mod form;
mod path;

pub use cell::EffortCell;
pub use form::is_common_cell;
pub(super) use form::prices;
pub use path::{FO4, PathEffort, Stage, best_stage_effort};
