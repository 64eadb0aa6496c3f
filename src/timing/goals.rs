//! When paths have to arrive, and how much every net has to spare against that.
//!
//! An end may have a required time of its own, or fall under a target for the whole
//! block; an end with neither is held against the longest path of its kind, as in
//! [`Timing::slack`]. Required times run backwards through the gates as tails do,
//! each end beginning at what it is allowed and not at zero, so one pass for each
//! group of ends and each basis is enough.

use super::ends::{End, EndGroup, PathKind};
use super::passes::{NEVER, Tails};
use super::report::Timing;
use crate::netlist::{NetId, Netlist, Topology};
use rustc_hash::FxHashMap;

/// What a required time rests on.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Basis {
    /// A required time of the port itself.
    Required,
    /// The cycle.
    Cycle,
    /// The target for the whole block.
    Target,
    /// The longest path of the kind.
    Longest,
}

impl Basis {
    /// All of them, the most particular first.
    pub const ALL: [Self; 4] = [Self::Required, Self::Cycle, Self::Target, Self::Longest];

    /// The words used in records and reports.
    pub fn words(self) -> &'static str {
        match self {
            Self::Required => "required time",
            Self::Cycle => "cycle",
            Self::Target => "target depth",
            Self::Longest => "longest path of the kind",
        }
    }
}

/// When the ends of a netlist have to be reached, in ticks.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Goals {
    /// By output port.
    pub outputs: FxHashMap<u32, i32>,
    /// The cycle: every end without a time of its own.
    pub cycle: Option<i32>,
    /// The target: every end without a time of its own, and without a cycle.
    pub target: Option<i32>,
}

impl Goals {
    /// Whether no end has any.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// When paths have to arrive at `end`, and why; `None` where only the longest
    /// path of the kind says so.
    pub fn of(&self, end: End) -> Option<(i32, Basis)> {
        let own = match end {
            End::Output(i) => self.outputs.get(&i).copied(),
            _ => None,
        };
        let own = own.map(|at| (at, Basis::Required));
        let cycle = self.cycle.map(|at| (at, Basis::Cycle));
        let target = self.target.map(|at| (at, Basis::Target));
        own.or(cycle).or(target)
    }
}

/// What a net has to spare.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Spare {
    /// How much later the net may become; negative when it is late.
    pub ticks: i32,
    /// Against what.
    pub basis: Basis,
}

/// What every net has to spare against [`Goals`].
pub struct Spares<'t> {
    timing: &'t Timing,
    /// By group of ends and basis, the most of a path to an end less what the end
    /// allows; for [`Basis::Longest`], the path alone.
    over: Vec<(EndGroup, Basis, Tails)>,
}

impl<'t> Spares<'t> {
    /// Works them out for `goals`.
    pub fn of(netlist: &Netlist, topology: &Topology, timing: &'t Timing, goals: &Goals) -> Self {
        let mut over = Vec::new();
        if goals.is_empty() {
            return Self { timing, over };
        }
        for (group, _) in timing.by_end() {
            for basis in Basis::ALL {
                let seed = |end: End, own: EndGroup| {
                    let (at, of_end) = goals.of(end).unwrap_or((0, Basis::Longest));
                    (group.holds(own) && of_end == basis).then_some(-at)
                };
                let tails = Tails::from_seeds(netlist, topology, &timing.delays, group.way, seed);
                if tails.by_net.iter().any(|&tail| tail != NEVER) {
                    over.push((group, basis, tails));
                }
            }
        }
        Self { timing, over }
    }

    /// What a net has to spare; `None` when no path from a start to an end leads
    /// through it.
    pub fn at(&self, net: NetId) -> Option<Spare> {
        if self.over.is_empty() {
            return self.timing.slack(net).map(|slack| Spare {
                ticks: slack.ticks,
                basis: Basis::Longest,
            });
        }
        let mut least: Option<Spare> = None;
        for (start, arrivals) in self.timing.by_start() {
            let at = arrivals[net.index()];
            if at == NEVER {
                continue;
            }
            for &(end, basis, ref tails) in &self.over {
                let tail = tails.by_net[net.index()];
                let (true, Some(kind)) = (tail != NEVER, self.timing.kind(PathKind { start, end }))
                else {
                    continue;
                };
                let allowed = match basis {
                    Basis::Longest => kind.longest,
                    _ => 0,
                };
                let ticks = allowed - (at + tail);
                if least.is_none_or(|spare| ticks < spare.ticks) {
                    least = Some(Spare { ticks, basis });
                }
            }
        }
        least
    }

    /// When a net must be ready for every end behind it to be in time.
    pub fn required(&self, net: NetId) -> Option<i32> {
        Some(self.timing.arrivals.at(net)? + self.at(net)?.ticks)
    }
}
