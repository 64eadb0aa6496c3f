//! The timing of a whole netlist: arrivals, tails, every path kind, slack.
//!
//! Arrivals and tails are kept by class of start and end only where more than
//! one class occurs; a purely combinational netlist pays for one of each.
//! Slack is counted against the longest path of the same kind.

use super::ends::{End, EndClass, PathKind, StartClass, end_net, ends, start_class};
use super::model::{DelayModel, PinDelays};
use super::passes::{Arrivals, NEVER, StartSet, Tails, end_arrival};
use super::path::{PathStep, longest_path};
use crate::netlist::{NetId, Netlist, Topology};
use std::collections::BTreeMap;

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
    starts: Vec<(StartClass, Option<Arrivals>)>,
    ends: Vec<(EndClass, Option<Tails>)>,
}

impl Timing {
    /// Times `netlist` under `model`.
    pub fn of(netlist: &Netlist, topology: &Topology, model: DelayModel) -> Self {
        let delays = PinDelays::of(netlist, model);
        let arrivals = Arrivals::of(netlist, topology, &delays);
        let tails = Tails::of(netlist, topology, &delays, None);
        let starts = classes_of_starts(netlist, topology);
        let several = starts.len() > 1;
        let starts: Vec<_> = starts
            .into_iter()
            .map(|class| {
                let set = StartSet::only(class);
                let own = several.then(|| Arrivals::from(netlist, topology, &delays, set));
                (class, own)
            })
            .collect();
        let present: Vec<EndClass> = EndClass::ALL
            .into_iter()
            .filter(|&class| ends(netlist, topology).any(|end| end.class() == class))
            .collect();
        let several = present.len() > 1;
        let end_tails = present
            .into_iter()
            .map(|class| {
                let own = several.then(|| Tails::of(netlist, topology, &delays, Some(class)));
                (class, own)
            })
            .collect();
        let mut timing = Self {
            delays,
            arrivals,
            tails,
            kinds: Vec::new(),
            starts,
            ends: end_tails,
        };
        timing.kinds = timing.measure_kinds(netlist, topology);
        timing
    }

    /// The classes of start that occur, each with its arrivals by net.
    pub fn by_start(&self) -> impl Iterator<Item = (StartClass, &[i32])> {
        self.starts
            .iter()
            .map(|(class, own)| (*class, &own.as_ref().unwrap_or(&self.arrivals).by_net[..]))
    }

    /// The classes of end that occur, each with its tails by net.
    pub fn by_end(&self) -> impl Iterator<Item = (EndClass, &[i32])> {
        self.ends
            .iter()
            .map(|(class, own)| (*class, &own.as_ref().unwrap_or(&self.tails).by_net[..]))
    }

    fn measure_kinds(&self, netlist: &Netlist, topology: &Topology) -> Vec<KindTiming> {
        let mut kinds: BTreeMap<PathKind, KindTiming> = BTreeMap::new();
        for (start, by_net) in self.by_start() {
            for end in ends(netlist, topology) {
                let arrival = end_arrival(netlist, &self.delays, by_net, end);
                if arrival == NEVER {
                    continue;
                }
                let kind = PathKind {
                    start,
                    end: end.class(),
                };
                let entry = kinds.entry(kind).or_insert(KindTiming {
                    kind,
                    longest: arrival,
                    ends_at_longest: 0,
                    next_below: None,
                    end,
                });
                entry.count(arrival, end);
            }
        }
        kinds.into_values().collect()
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
                let ticks = timing.longest - (at + tail);
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

fn classes_of_starts(netlist: &Netlist, topology: &Topology) -> Vec<StartClass> {
    let mut present = [false; 3];
    for net in netlist.nets() {
        if let Some(class) = start_class(netlist, topology, net) {
            present[class as usize] = true;
        }
    }
    StartClass::ALL
        .into_iter()
        .filter(|&class| present[class as usize])
        .collect()
}

/// The longest path under `unit` when buffers and inverters cost nothing.
pub fn longest_free_buffers(netlist: &Netlist, topology: &Topology) -> i32 {
    let delays = PinDelays::free_buffers(netlist);
    let arrivals = Arrivals::of(netlist, topology, &delays);
    ends(netlist, topology)
        .map(|end| end_arrival(netlist, &delays, &arrivals.by_net, end))
        .max()
        .unwrap_or(0)
        .max(0)
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
