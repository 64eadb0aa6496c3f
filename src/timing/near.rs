//! How many paths are as long as the longest of their kind, or nearly.
//!
//! One forward sweep per group of starts counts, for every net, the paths that
//! arrive as late as any and those that arrive one unit earlier (the recurrence of
//! the longest path, with sums in the place of the maximum). Two gates joined by
//! two pins are joined by two paths. Counts stop at [`MANY`].

use super::ends::{EndClass, PathKind, StartClass, StartGroup, end_net, grouped_ends};
use super::passes::{NEVER, end_arrival};
use super::report::{KindTiming, Timing};
use crate::netlist::{GateId, Netlist, Topology};

/// As far as paths are counted; past it there are at least so many.
pub const MANY: u64 = 1_000_000_000_000_000;

/// What comes close to the longest path of a kind.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct Near {
    /// Paths as long as the longest.
    pub paths_at_longest: u64,
    /// Ends that are reached at most one unit earlier than the longest.
    pub ends_within_one: usize,
    /// Paths at most one unit shorter than the longest; `None` where the delay
    /// model counts finer than whole units.
    pub paths_within_one: Option<u64>,
}

/// Paths by how much earlier than the latest they arrive: not at all, one tick.
type Counts = [u64; 2];

impl Timing {
    /// What comes close to the longest path of each of `kinds`, which stand for
    /// their classes (see [`Self::kinds_by_class`]).
    pub fn near(&self, netlist: &Netlist, topology: &Topology, kinds: &[KindTiming]) -> Vec<Near> {
        let unit = self.delays.model().ticks_per_unit();
        let ends: Vec<_> = grouped_ends(netlist, topology).collect();
        let of = |classes: (StartClass, EndClass)| {
            kinds.iter().position(|kind| kind.kind.classes() == classes)
        };
        let mut near = vec![
            Near {
                paths_within_one: (unit == 1).then_some(0),
                ..Near::default()
            };
            kinds.len()
        ];
        // By kind and end, the latest arrival from any start.
        let mut latest = vec![vec![NEVER; ends.len()]; kinds.len()];
        for (start, by_net) in self.by_start() {
            let counts = self.counts(netlist, topology, start, by_net);
            for (i, &(end, group)) in ends.iter().enumerate() {
                let kind = PathKind::from_to(start, group);
                let at = end_arrival(netlist, &self.delays, by_net, end);
                let (Some(n), true) = (of(kind.classes()), self.kind(kind).is_some()) else {
                    continue;
                };
                if at == NEVER {
                    continue;
                }
                latest[n][i] = at.max(latest[n][i]);
                let [here, before] = match (end, end_net(netlist, end)) {
                    (super::End::Cut(gate), _) => self.through(netlist, by_net, &counts, gate, at),
                    (_, Some(net)) => counts[net.index()],
                    (_, None) => continue,
                };
                let (own, spare) = (&mut near[n], kinds[n].longest - at);
                if spare == 0 {
                    own.paths_at_longest = MANY.min(own.paths_at_longest.saturating_add(here));
                }
                if let Some(within) = &mut own.paths_within_one {
                    let more = match spare {
                        0 => here.saturating_add(before),
                        1 => here,
                        _ => 0,
                    };
                    *within = MANY.min(within.saturating_add(more));
                }
            }
        }
        for ((near, kind), latest) in near.iter_mut().zip(kinds).zip(latest) {
            let close = |&&at: &&i32| at != NEVER && kind.longest - at <= unit;
            near.ends_within_one = latest.iter().filter(close).count();
        }
        near
    }

    fn counts(
        &self,
        netlist: &Netlist,
        topology: &Topology,
        start: StartGroup,
        by_net: &[i32],
    ) -> Vec<Counts> {
        let mut counts: Vec<Counts> = vec![[0; 2]; by_net.len()];
        for net in netlist.nets() {
            let own = super::start_group(netlist, topology, net);
            if own.is_some_and(|own| start.holds(own)) && by_net[net.index()] != NEVER {
                counts[net.index()] = [1, 0];
            }
        }
        for &gate in &topology.order {
            let output = netlist.gate_output(gate);
            let at = by_net[output.index()];
            if !topology.is_cut(output) && at != NEVER {
                counts[output.index()] = self.through(netlist, by_net, &counts, gate, at);
            }
        }
        counts
    }

    /// The paths that arrive through a gate at `at`, and one tick earlier.
    fn through(
        &self,
        netlist: &Netlist,
        by_net: &[i32],
        counts: &[Counts],
        gate: GateId,
        at: i32,
    ) -> Counts {
        let mut sum: Counts = [0; 2];
        let delays = self.delays.of_gate(netlist, gate);
        for (net, delay) in netlist.fan_ins(gate).iter().zip(delays) {
            let own = by_net[net.index()];
            if own == NEVER {
                continue;
            }
            let [here, before] = counts[net.index()];
            let add = |slot: &mut u64, more: u64| *slot = MANY.min(slot.saturating_add(more));
            match at - (own + delay) {
                0 => {
                    add(&mut sum[0], here);
                    add(&mut sum[1], before);
                }
                1 => add(&mut sum[1], here),
                _ => {}
            }
        }
        sum
    }
}
