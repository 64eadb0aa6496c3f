//! Times that the netlist's own file states for its ports and its cycle.
//!
//! They are in whatever unit the file's author meant, so they count only under a
//! delay model that measures time and not levels (one that counts finer than whole
//! units), and are then taken in its unit. A time that a user asserts goes before.
//!
//! Invariant: times are thousandths of a unit, within [`MOST`] of zero, so that a
//! path's delays can be added to them.

use super::id::NetId;
use super::model::Netlist;
use rustc_hash::FxHashMap;

/// The furthest from zero a time is kept.
pub const MOST: i32 = 1_000_000_000;

/// See the head of the module.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct FileTimes {
    /// When inputs are ready, by net.
    pub arrival: FxHashMap<NetId, i32>,
    /// When output ports have to be, by index.
    pub required: FxHashMap<u32, i32>,
    /// The cycle.
    pub cycle: Option<i32>,
}

impl FileTimes {
    /// A time in thousandths, from one in units.
    pub fn thousandths(units: f64) -> i32 {
        let most = f64::from(MOST);
        (units * 1000.0).round().clamp(-most, most) as i32
    }
}

impl Netlist {
    /// The netlist with the times its file states.
    #[must_use]
    pub fn with_times(mut self, times: FileTimes) -> Self {
        self.times = (times != FileTimes::default()).then(|| Box::new(times));
        self
    }

    /// The times its file states, when it states any.
    pub fn times(&self) -> Option<&FileTimes> {
        self.times.as_deref()
    }
}
