//! The timing of a whole netlist: arrivals, tails, every path kind, slack.
//!
//! Arrivals and tails are kept by class of start and end only where more than
//! one class occurs; a purely combinational netlist pays for one of each.
//! Slack is counted against the longest path of the same kind.

use super::delays::PinDelays;
use super::ends::{End, EndGroup, PathKind, StartGroup, end_net, grouped_ends, start_group};
use super::model::DelayModel;
use super::passes::{Arrivals, NEVER, Tails, end_arrival};
use super::path::{PathStep, longest_path};
use super::time::Time;
use crate::netlist::{NetId, Netlist, Pairing, Topology};
use std::collections::{BTreeMap, BTreeSet};

/// What is known of one path kind.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct KindTiming {
    /// The kind.
    pub kind: PathKind,
    /// Its longest path.
    pub longest: i32,
    /// Number of ends at the longest.
    pub ends_at_longest: usize,
    /// The next lower arrival among the ends of this kind.
    pub next_below: Option<i32>,
    /// The first end at the longest.
    pub end: End,
}

/// Paths that may take several cycles.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Relaxed {
    /// Their timing, over all cycles.
    pub timing: KindTiming,
    /// How many cycles they may take.
    pub cycles: u32,
    /// The assumption that says so.
    pub entry: u32,
}

/// Slack of a net.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Slack {
    /// How much later the net may become before a path of `kind` through it is
    /// as long as the longest of that kind.
    pub ticks: i32,
    /// The kind with the least slack.
    pub kind: PathKind,
}

/// The timing of a netlist under one delay model.
pub struct Timing {
    /// The delays used.
    pub delays: PinDelays,
    /// Arrivals from every start.
    pub arrivals: Arrivals,
    /// Tails to every end.
    pub tails: Tails,
    /// The path kinds that occur, in the order of their classes.
    pub kinds: Vec<KindTiming>,
    /// Kinds of path that may take several cycles; none of them is in `kinds`.
    pub relaxed: Vec<Relaxed>,
    starts: Vec<(StartGroup, Option<Arrivals>)>,
    ends: Vec<(EndGroup, Option<Tails>)>,
}

impl Timing {
    /// Times `netlist` under `model`.
    pub fn of(netlist: &Netlist, topology: &Topology, model: DelayModel) -> Self {
        let delays = PinDelays::of(netlist, model);
        let arrivals = Arrivals::of(netlist, topology, &delays);
        let tails = Tails::of(netlist, topology, &delays, None);
        let starts = start_groups(netlist, topology);
        let several = starts.len() > 1;
        let starts = starts
            .into_iter()
            .map(|group| {
                let own = || Arrivals::from(netlist, topology, &delays, Some(group));
                (group, (several || group.way > 0).then(own))
            })
            .collect();
        let present: BTreeSet<EndGroup> = grouped_ends(netlist, topology)
            .map(|(_, group)| group)
            .collect();
        let present: Vec<EndGroup> = present
            .into_iter()
            .flat_map(|group| group.by_way(netlist))
            .collect();
        let several = present.len() > 1;
        let end_tails = present
            .into_iter()
            .map(|group| {
                let own = || Tails::of(netlist, topology, &delays, Some(group));
                (group, (several || group.way > 0).then(own))
            })
            .collect();
        let mut timing = Self {
            delays,
            arrivals,
            tails,
            kinds: Vec::new(),
            relaxed: Vec::new(),
            starts,
            ends: end_tails,
        };
        timing.measure_kinds(netlist, topology);
        timing
    }

    /// Ticks as a time in the unit of the model.
    pub fn time(&self, ticks: i32) -> Time {
        self.delays.model().time(ticks)
    }

    /// The groups of starts that occur, each with its arrivals by net.
    pub fn by_start(&self) -> impl Iterator<Item = (StartGroup, &[i32])> {
        self.starts
            .iter()
            .map(|(class, own)| (*class, &own.as_ref().unwrap_or(&self.arrivals).by_net[..]))
    }

    /// The groups of ends that occur, each with its tails by net.
    pub fn by_end(&self) -> impl Iterator<Item = (EndGroup, &[i32])> {
        self.ends
            .iter()
            .map(|(class, own)| (*class, &own.as_ref().unwrap_or(&self.tails).by_net[..]))
    }

    fn measure_kinds(&mut self, netlist: &Netlist, topology: &Topology) {
        let mut kinds: BTreeMap<PathKind, KindTiming> = BTreeMap::new();
        let mut relaxed = BTreeMap::new();
        for (start, by_net) in self.by_start() {
            for (end, group) in grouped_ends(netlist, topology) {
                let arrival = end_arrival(netlist, &self.delays, by_net, end);
                if arrival == NEVER {
                    continue;
                }
                let kind = PathKind::from_to(start, group);
                let counted = match pairing(netlist, kind) {
                    Pairing::Counts => &mut kinds,
                    Pairing::Cycles { .. } => &mut relaxed,
                    Pairing::Never => continue,
                };
                let entry = counted.entry(kind).or_insert(KindTiming {
                    kind,
                    longest: arrival,
                    ends_at_longest: 0,
                    next_below: None,
                    end,
                });
                entry.count(arrival, end);
            }
        }
        self.kinds = kinds.into_values().collect();
        self.relaxed = relaxed
            .into_values()
            .filter_map(|timing: KindTiming| match pairing(netlist, timing.kind) {
                Pairing::Cycles { cycles, entry } => Some(Relaxed {
                    timing,
                    cycles,
                    entry,
                }),
                Pairing::Counts | Pairing::Never => None,
            })
            .collect();
    }

    /// The path kinds with the groups of a class taken together; the `kind` of
    /// each is that of its longest path.
    pub fn kinds_by_class(&self, netlist: &Netlist, topology: &Topology) -> Vec<KindTiming> {
        let mut merged: Vec<KindTiming> = Vec::new();
        for kind in &self.kinds {
            let classes = kind.kind.classes();
            match merged.iter_mut().find(|m| m.kind.classes() == classes) {
                Some(known) if kind.longest > known.longest => *known = *kind,
                Some(_) => {}
                None => merged.push(*kind),
            }
        }
        if merged.len() == self.kinds.len() {
            return merged;
        }
        // Ends are counted anew: one may be reached from several groups.
        for kind in &mut merged {
            let (start_class, end_class) = kind.kind.classes();
            (kind.ends_at_longest, kind.next_below) = (0, None);
            for (end, group) in grouped_ends(netlist, topology) {
                if group.class != end_class {
                    continue;
                }
                let starts = self.by_start().filter(|&(start, _)| {
                    start.class == start_class
                        && self.kind(PathKind::from_to(start, group)).is_some()
                });
                let latest = starts
                    .map(|(_, by_net)| end_arrival(netlist, &self.delays, by_net, end))
                    .max();
                match latest.filter(|&at| at != NEVER) {
                    Some(at) if at == kind.longest => kind.ends_at_longest += 1,
                    below => kind.next_below = kind.next_below.max(below),
                }
            }
        }
        merged
    }

    /// When the latest path that counts arrives at an end, or [`NEVER`].
    pub fn end_time(&self, netlist: &Netlist, end: End) -> i32 {
        let Some(group) = end.group(netlist) else {
            return NEVER;
        };
        let starts = self
            .by_start()
            .filter(|&(start, _)| self.kind(PathKind::from_to(start, group)).is_some());
        starts
            .map(|(_, by_net)| end_arrival(netlist, &self.delays, by_net, end))
            .max()
            .unwrap_or(NEVER)
    }

    /// Whether a longest path of the block runs through `net`.
    pub fn is_on_longest_path(&self, net: NetId) -> bool {
        let longest = self.longest();
        self.kinds.iter().any(|timing| {
            let find = |(_, by_net): (_, &[i32])| by_net[net.index()];
            let at = self
                .by_start()
                .find(|&(group, _)| group == timing.kind.start);
            let tail = self.by_end().find(|&(group, _)| group == timing.kind.end);
            let (at, tail) = (
                at.map_or(NEVER, |(_, by_net)| by_net[net.index()]),
                tail.map_or(NEVER, find),
            );
            at != NEVER && tail != NEVER && at.saturating_add(tail) == longest
        })
    }

    /// The kind that holds the longest path of all; the first of equals.
    pub fn longest_kind(&self) -> Option<&KindTiming> {
        self.kinds.iter().reduce(|best, kind| {
            if kind.longest > best.longest {
                kind
            } else {
                best
            }
        })
    }

    /// The longest path of all in ticks; 0 when there is none.
    pub fn longest(&self) -> i32 {
        self.longest_kind().map_or(0, |kind| kind.longest)
    }

    /// What is known of one kind, when it occurs.
    pub fn kind(&self, kind: PathKind) -> Option<&KindTiming> {
        self.kinds.iter().find(|each| each.kind == kind)
    }

    /// The longest path of one kind, start first.
    pub fn path_of(
        &self,
        netlist: &Netlist,
        topology: &Topology,
        kind: &KindTiming,
    ) -> Vec<PathStep> {
        self.by_start()
            .find(|&(start, _)| start == kind.kind.start)
            .map_or_else(Vec::new, |(_, by_net)| {
                longest_path(netlist, topology, &self.delays, by_net, kind.end)
            })
    }

    /// The least slack of a net over all kinds; `None` when no path from a start
    /// to an end leads through it.
    pub fn slack(&self, net: NetId) -> Option<Slack> {
        let mut least: Option<Slack> = None;
        for (start, arrivals) in self.by_start() {
            let at = arrivals[net.index()];
            if at == NEVER {
                continue;
            }
            for (end, tails) in self.by_end() {
                let tail = tails[net.index()];
                let kind = PathKind { start, end };
                let (true, Some(timing)) = (tail != NEVER, self.kind(kind)) else {
                    continue;
                };
                let ticks = timing.longest - at.saturating_add(tail);
                if least.is_none_or(|slack| ticks < slack.ticks) {
                    least = Some(Slack { ticks, kind });
                }
            }
        }
        least
    }

    /// When a net must be ready for no path through it to exceed the longest of
    /// its kind.
    pub fn required(&self, net: NetId) -> Option<i32> {
        Some(self.arrivals.at(net)? + self.slack(net)?.ticks)
    }
}

impl KindTiming {
    fn count(&mut self, arrival: i32, end: End) {
        if arrival > self.longest {
            self.next_below = Some(self.longest);
            (self.longest, self.ends_at_longest, self.end) = (arrival, 1, end);
        } else if arrival == self.longest {
            self.ends_at_longest += 1;
        } else {
            self.next_below = self.next_below.max(Some(arrival));
        }
    }
}

fn pairing(netlist: &Netlist, kind: PathKind) -> Pairing {
    netlist.asserted().map_or(Pairing::Counts, |asserted| {
        let (start, end) = (kind.start, kind.end);
        if start.way != end.way || asserted.way(start.set, end.set) != start.way {
            return Pairing::Never;
        }
        asserted.pairing(start.set, end.set)
    })
}

/// The groups of starts that occur, once for each way.
fn start_groups(netlist: &Netlist, topology: &Topology) -> Vec<StartGroup> {
    let present: BTreeSet<StartGroup> = netlist
        .nets()
        .filter_map(|net| start_group(netlist, topology, net))
        .collect();
    let by_way = present.into_iter().flat_map(|own| own.by_way(netlist));
    by_way.collect()
}

/// The longest path under `unit` when buffers and inverters cost nothing.
pub fn longest_free_buffers(netlist: &Netlist, topology: &Topology) -> i32 {
    let delays = PinDelays::free_buffers(netlist);
    let starts = start_groups(netlist, topology);
    // One pass is enough while every pair of a start and an end counts.
    let together = netlist.asserted().is_none();
    let groups: Vec<Option<StartGroup>> = if together {
        vec![None]
    } else {
        starts.into_iter().map(Some).collect()
    };
    let mut longest = 0;
    for group in groups {
        let arrivals = Arrivals::from(netlist, topology, &delays, group);
        for (end, own) in grouped_ends(netlist, topology) {
            let counts = group.is_none_or(|start| {
                pairing(netlist, PathKind::from_to(start, own)) == Pairing::Counts
            });
            if counts {
                longest = longest.max(end_arrival(netlist, &delays, &arrivals.by_net, end));
            }
        }
    }
    longest
}

/// How many output ports lie at each depth, shallowest first; ports that show
/// only a constant lie at 0.
pub fn depth_histogram(netlist: &Netlist, arrivals: &Arrivals) -> Vec<(i32, usize)> {
    let mut counts = BTreeMap::new();
    for i in 0..netlist.outputs().len() as u32 {
        let net = end_net(netlist, End::Output(i));
        let depth = net.and_then(|net| arrivals.at(net)).unwrap_or(0);
        *counts.entry(depth).or_insert(0) += 1;
    }
    counts.into_iter().collect()
}
