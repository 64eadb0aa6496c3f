//! A dry run timed again where delay depends on load.
//!
//! Under such a model a rebuild also changes what stays: nets that lose readers
//! or gain some make their drivers faster or slower, and with them everything
//! behind. So once all gates of a dry run are known their loads are added up, and
//! three passes give the times of the rebuilt netlist exactly: over the gates that
//! stay and do not depend on the chain, following only what changes; over the new
//! gates; and over what the chain's results reach, once by way of them and once
//! beside them.
//!
//! Invariant: every figure equals that of a netlist made from the dry run and
//! measured from nothing (`tests/plans_recounted.rs`).

use super::dry_run::{DryRun, KindChange};
use super::new_gates::{NewGates, Place};
use super::site::Site;
use crate::netlist::{GateId, NetId, PinPrice};
use crate::timing::{End, EndGroup, NEVER, PathKind, StartGroup, end_net};
use rustc_hash::{FxHashMap, FxHashSet};
use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// The longest paths of one kind in the rebuilt netlist.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct KindPaths {
    pub(super) kind: PathKind,
    /// Past every result of the chain.
    pub(super) beside: Option<(i32, End)>,
    /// Through one of them.
    pub(super) through: Option<(i32, End)>,
}

/// The times of a dry run under load.
pub(super) struct Retimed {
    pub(super) chain_after: i32,
    pub(super) kinds: Vec<KindPaths>,
    /// When the carry out of each position is ready, where a gate makes it.
    pub(super) carries: Vec<Option<i32>>,
}

/// A longest path so far.
type Longest = Option<(i32, End)>;

/// A time beside the chain's results, and one through them.
type Sides = [i32; 2];

/// What the chain's results reach: nets, and ends that are no net's.
#[derive(Default)]
struct Behind {
    nets: Vec<(NetId, Sides)>,
    cuts: Vec<(End, Sides)>,
}

fn offer(longest: &mut Longest, time: i32, end: End) {
    if time != NEVER && longest.is_none_or(|(most, _)| time > most) {
        *longest = Some((time, end));
    }
}

fn later(at: i32, delay: i32) -> i32 {
    if at == NEVER {
        NEVER
    } else {
        at.saturating_add(delay)
    }
}

impl Retimed {
    /// Times `run`; `None` where delay does not depend on load.
    pub(super) fn of(run: &DryRun<'_, '_>) -> Option<Self> {
        let delays = &run.site.ground.timing.delays;
        let loads = delays.loaded()?.loads();
        let gates = NewGates::of(run, loads);
        let work = Work {
            site: run.site,
            swept: &run.swept,
            gates: &gates,
        };
        let timing = run.site.ground.timing;
        let by_net = &timing.arrivals.by_net;
        let (changed, _) = work.before_the_chain(0, by_net);
        let slots = work.new_times(by_net, &changed);
        let at = |place| work.at(place, by_net, &changed, &slots);
        let needed = gates.needed.iter().map(|&place| at(place));
        let chain_after = needed.max().unwrap_or(NEVER);
        let carries = run.carries.iter().map(|literal| {
            let place = gates.shown[literal.node().index()];
            let time = at(place.map_or(Place::Constant, |(place, _)| place));
            (time != NEVER).then_some(time)
        });
        let carries = carries.collect();
        let mut kinds = Vec::new();
        for (start, by_net) in run.site.starts() {
            for (end, [beside, through]) in work.paths(start, by_net) {
                let kind = PathKind { start, end };
                if timing.kind(kind).is_some() {
                    kinds.push(KindPaths {
                        kind,
                        beside,
                        through,
                    });
                }
            }
        }
        kinds.sort_unstable_by_key(|each| each.kind);
        Some(Self {
            chain_after,
            kinds,
            carries,
        })
    }

    /// What becomes of every kind.
    pub(super) fn changes(&self, run: &DryRun<'_, '_>) -> Vec<KindChange> {
        let change = |paths: &KindPaths| {
            let today = run.site.ground.timing.kind(paths.kind)?;
            let after = paths.beside.max(paths.through);
            Some(KindChange {
                kind: paths.kind,
                before: today.longest,
                after: after.map_or(0, |(time, _)| time),
                through: paths.through.map(|(time, _)| time),
            })
        };
        self.kinds.iter().filter_map(change).collect()
    }
}

struct Work<'w, 's, 'a> {
    site: &'s Site<'a>,
    swept: &'w [GateId],
    gates: &'w NewGates,
}

impl Work<'_, '_, '_> {
    fn stays(&self, gate: GateId) -> bool {
        !self.site.removed.contains(&gate) && self.swept.binary_search(&gate).is_err()
    }

    /// When the output of a gate that stays is ready by paths of a way.
    fn arrival(&self, way: u8, gate: GateId, mut at: impl FnMut(NetId) -> i32) -> i32 {
        let ground = self.site.ground;
        let (netlist, delays) = (ground.netlist, &ground.timing.delays);
        let output = netlist.gate_output(gate);
        if netlist.is_barred_on(way, output) {
            return NEVER;
        }
        let pins = netlist.fan_ins(gate).iter();
        let latest = match self.gates.loads.get(&output) {
            None => pins
                .zip(delays.of_gate(netlist, gate))
                .map(|(&net, &delay)| later(at(net), delay))
                .max(),
            Some(&load) => pins
                .zip(delays.prices_of(netlist, gate))
                .map(|(&net, price)| later(at(net), price.delay.at(load)))
                .max(),
        };
        latest.unwrap_or(NEVER)
    }

    /// The gates that stay and do not depend on the chain: arrivals that change,
    /// and those of gates that drive cut nets.
    fn before_the_chain(
        &self,
        way: u8,
        by_net: &[i32],
    ) -> (FxHashMap<NetId, i32>, Vec<(GateId, i32)>) {
        let site = self.site;
        let ground = site.ground;
        let concerns = |gate: GateId| self.stays(gate) && !site.region_set.contains(&gate);
        let mut seen: FxHashSet<GateId> = FxHashSet::default();
        let mut waiting: BinaryHeap<Reverse<(u32, GateId)>> = BinaryHeap::new();
        for gate in self.gates.reloaded_drivers(site) {
            if concerns(gate) && seen.insert(gate) {
                waiting.push(Reverse((ground.rank(gate), gate)));
            }
        }
        let mut changed: FxHashMap<NetId, i32> = FxHashMap::default();
        let mut cuts = Vec::new();
        while let Some(Reverse((_, gate))) = waiting.pop() {
            let at = |net: NetId| known(&changed, by_net, net);
            let time = self.arrival(way, gate, at);
            let output = ground.netlist.gate_output(gate);
            if ground.gate_of(output) != Some(gate) {
                cuts.push((gate, time));
                continue;
            }
            if time == by_net[output.index()] {
                continue;
            }
            changed.insert(output, time);
            for &reader in ground.readers.of_net(output) {
                if concerns(reader) && seen.insert(reader) {
                    waiting.push(Reverse((ground.rank(reader), reader)));
                }
            }
        }
        (changed, cuts)
    }

    fn at(
        &self,
        place: Place,
        by_net: &[i32],
        changed: &FxHashMap<NetId, i32>,
        slots: &[i32],
    ) -> i32 {
        match place {
            Place::Constant => NEVER,
            Place::Net(net) => known(changed, by_net, net),
            Place::Slot(slot) => slots[slot as usize],
        }
    }

    /// When the nets of the new gates are ready.
    fn new_times(&self, by_net: &[i32], changed: &FxHashMap<NetId, i32>) -> Vec<i32> {
        let mut slots = vec![NEVER; self.gates.slot_loads.len()];
        for gate in &self.gates.list {
            let load = self.gates.slot_loads[gate.slot as usize];
            let pins = gate.inputs.iter().zip(gate.prices.iter());
            let pin = |(&place, price): (&Place, &PinPrice)| {
                let at = self.at(place, by_net, changed, &slots);
                later(at, price.delay.at(load))
            };
            slots[gate.slot as usize] = pins.map(pin).max().unwrap_or(NEVER);
        }
        slots
    }

    /// By group of ends: the longest path beside the chain's results and through
    /// them.
    fn paths(&self, start: StartGroup, by_net: &[i32]) -> Vec<(EndGroup, [Longest; 2])> {
        let site = self.site;
        let ground = site.ground;
        let (changed, cuts) = self.before_the_chain(start.way, by_net);
        let slots = self.new_times(by_net, &changed);
        let mut results: FxHashMap<NetId, i32> = FxHashMap::default();
        for (needed, &place) in site.needed.iter().zip(&self.gates.needed) {
            let barred = ground.netlist.is_barred_on(start.way, needed.net);
            let time = if barred {
                NEVER
            } else {
                self.at(place, by_net, &changed, &slots)
            };
            results.insert(needed.net, time);
        }
        let behind = self.behind_the_chain(start.way, by_net, &changed, &results);
        let groups = ground.end_groups();
        let mut paths: Vec<(EndGroup, [Longest; 2])> =
            groups.iter().map(|&group| (group, [None, None])).collect();
        let mut add = |end: End, [beside, through]: Sides| {
            for (group, longest) in &mut paths {
                if end.is_in(ground.netlist, *group) {
                    offer(&mut longest[0], beside, end);
                    offer(&mut longest[1], through, end);
                }
            }
        };
        let moved_cuts: FxHashSet<GateId> = cuts.iter().map(|&(gate, _)| gate).collect();
        let is_moved = |end: End| match (end, end_net(ground.netlist, end)) {
            (End::Cut(gate), _) => moved_cuts.contains(&gate),
            (_, Some(net)) => changed.contains_key(&net),
            (_, None) => false,
        };
        for &end in &groups {
            let still = |end: End| !site.is_behind(end) && !is_moved(end);
            if let Some((time, end)) = ground.latest_end(PathKind { start, end }, still) {
                add(end, [time, NEVER]);
            }
        }
        for (gate, time) in cuts {
            add(End::Cut(gate), [time, NEVER]);
        }
        let mut moved: Vec<(NetId, i32)> = changed.iter().map(|(&net, &at)| (net, at)).collect();
        moved.sort_unstable();
        for (net, time) in moved {
            ground.ends_at(net).for_each(|end| add(end, [time, NEVER]));
        }
        for needed in &site.needed {
            let time = results[&needed.net];
            let ends = ground.ends_at(needed.net);
            ends.for_each(|end| add(end, [NEVER, time]));
        }
        for (net, times) in behind.nets {
            ground.ends_at(net).for_each(|end| add(end, times));
        }
        for (end, times) in behind.cuts {
            add(end, times);
        }
        paths
    }

    /// What the chain's results reach, in the order of the region: the latest
    /// beside them and through them, by net and at gates that drive cut nets.
    fn behind_the_chain(
        &self,
        way: u8,
        by_net: &[i32],
        changed: &FxHashMap<NetId, i32>,
        results: &FxHashMap<NetId, i32>,
    ) -> Behind {
        let site = self.site;
        let ground = site.ground;
        let mut times: FxHashMap<NetId, Sides> = FxHashMap::default();
        let mut found = Behind::default();
        for &gate in &site.region {
            let side = |through: bool| {
                self.arrival(way, gate, |net| {
                    if let Some(times) = times.get(&net) {
                        return times[usize::from(through)];
                    }
                    match (results.get(&net), through) {
                        (Some(&time), true) => time,
                        (None, false) if !site.replaced.contains_key(&net) => {
                            known(changed, by_net, net)
                        }
                        _ => NEVER,
                    }
                })
            };
            let own = [side(false), side(true)];
            let output = ground.netlist.gate_output(gate);
            if ground.gate_of(output) == Some(gate) {
                times.insert(output, own);
                found.nets.push((output, own));
            } else {
                found.cuts.push((End::Cut(gate), own));
            }
        }
        found
    }
}

fn known(changed: &FxHashMap<NetId, i32>, by_net: &[i32], net: NetId) -> i32 {
    changed.get(&net).copied().unwrap_or(by_net[net.index()])
}
