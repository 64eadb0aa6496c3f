//! How the ends of paths stand against what is asked of them.
//!
//! What is asked may be required times of ports, and a target for the whole block;
//! what each end has to spare is counted against the most particular of them.

use super::words::{counted, depth_in};
use crate::netlist::assume::Assumed;
use crate::netlist::{Assumptions, Netlist, Topology};
use crate::timing::{Basis, DelayModel, End, Goals, NEVER, Time, Timing, ends};

/// What is asked of the ends, from the assumptions and from the command line.
pub fn asked(
    netlist: &Netlist,
    asserted: Option<(&Assumptions, &Assumed)>,
    target: Option<u64>,
    model: DelayModel,
) -> Goals {
    let ticks = |units: i32| units.saturating_mul(model.ticks_per_unit());
    let mut goals = Goals {
        target: target.map(|units| ticks(i32::try_from(units).unwrap_or(i32::MAX))),
        ..Goals::default()
    };
    if let Some(times) = netlist.times().filter(|_| model.counts_time()) {
        let ticks = |thousandths: i32| thousandths / (1000 / model.ticks_per_unit());
        goals.cycle = times.cycle.map(ticks);
        let required = times.required.iter();
        goals.outputs = required.map(|(&port, &at)| (port, ticks(at))).collect();
    }
    if let Some((assumptions, under)) = asserted {
        // What a user asserts of a port goes before what the file states.
        for port in under.required.iter().flatten() {
            goals.outputs.remove(port);
        }
        for (time, ports) in assumptions.required.iter().zip(&under.required) {
            for &port in ports {
                let at = goals.outputs.entry(port).or_insert(i32::MAX);
                *at = ticks(time.at).min(*at);
            }
        }
    }
    goals
}

/// How the ends stand.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Standing {
    /// Ends that are late.
    pub late: u64,
    /// Those of them that miss the target for the block.
    pub late_for_target: u64,
    /// What the end with the least to spare has, and against what.
    pub least: Option<(Time, Basis, End)>,
    /// Of those that miss the target, the one that misses it most.
    pub latest_for_target: Option<(Time, End)>,
    /// The target.
    pub target: Option<Time>,
}

impl Standing {
    /// Holds every end against `goals`; `None` when nothing is asked.
    pub fn of(
        netlist: &Netlist,
        topology: &Topology,
        timing: &Timing,
        goals: &Goals,
    ) -> Option<Self> {
        if goals.is_empty() {
            return None;
        }
        let mut standing = Self {
            late: 0,
            late_for_target: 0,
            least: None,
            latest_for_target: None,
            target: goals.target.map(|at| timing.time(at)),
        };
        for end in ends(netlist, topology) {
            let (at, Some((allowed, basis))) = (timing.end_time(netlist, end), goals.of(end))
            else {
                continue;
            };
            if at == NEVER {
                continue;
            }
            let spare = timing.time(allowed) - timing.time(at);
            if standing.least.is_none_or(|(least, ..)| spare < least) {
                standing.least = Some((spare, basis, end));
            }
            if spare >= Time::ZERO {
                continue;
            }
            standing.late += 1;
            if basis == Basis::Target {
                standing.late_for_target += 1;
                if standing
                    .latest_for_target
                    .is_none_or(|(most, _)| spare < most)
                {
                    standing.latest_for_target = Some((spare, end));
                }
            }
        }
        Some(standing)
    }

    /// What the verdict says of the target.
    pub fn sentence(&self, unit: &str) -> String {
        let Some(target) = self.target else {
            return String::new();
        };
        let target = depth_in(target, unit);
        match (self.latest_for_target, self.least) {
            (Some((over, _)), _) => format!(
                " The target of {target} is missed at {}, by up to {}.",
                counted(self.late_for_target, "end", "ends"),
                depth_in(over.abs(), unit)
            ),
            (None, Some((spare, Basis::Target, _))) => format!(
                " The target of {target} is met with {} to spare.",
                depth_in(spare, unit)
            ),
            (None, _) => format!(" The target of {target} is met."),
        }
    }
}
