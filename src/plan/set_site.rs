//! Several chains on one netlist: what rebuilding them together replaces, what
//! that sweeps away, and the gates behind them.
//!
//! The single chain of [`super::site`] may not depend on its own results; here one
//! chain may read another's. The members are put into an order in which none reads
//! a later one, and every gate in the fan-out into the *stretch* behind the last
//! member it depends on. So one pass over member, stretch, member, stretch, … makes
//! and times everything, which [`super::set_run`] does once per choice of proposals.
//!
//! The dependences are found in one pass that carries a set of members per gate, a
//! word of bits, which is why a set is bounded.

use super::cone::{Operands, Rooted, fan_out_of, replaced_nets, sweep};
use super::ground::Ground;
use super::overlay::{GateStyle, Overlay};
use super::reuse::find_reusable;
use super::site::{Needed, Refused, Role};
use crate::chain::Chain;
use crate::netlist::{GateId, NetId};
use crate::timing::{End, EndGroup, PathKind, StartGroup, end_net};
use rustc_hash::{FxHashMap, FxHashSet};
use std::ops::Range;

/// Most chains of one set.
pub const MOST_TOGETHER: usize = u128::BITS as usize;

/// One chain of the set.
pub(super) struct Member {
    /// Which of the chains given it is.
    pub(super) given: usize,
    pub(super) operands: Rooted,
    /// Its results among those of the site.
    pub(super) results: Range<usize>,
    /// Its needed nets among those of the site.
    pub(super) needed: Range<usize>,
    /// The gates that follow it among those of the region.
    pub(super) behind: Range<usize>,
}

/// A pin of a gate behind the chains.
#[derive(Clone, Copy)]
pub(super) struct Pin {
    pub(super) net: NetId,
    /// The slot of the net, if it is a result or made behind one.
    pub(super) slot: Option<u32>,
    pub(super) delay: i32,
}

/// See the head of the module. A *slot* is the place of a result of the set, or
/// behind those of a gate of the region.
pub struct SetSite<'a> {
    pub(super) ground: &'a Ground<'a>,
    pub(super) members: Vec<Member>,
    pub(super) results: Vec<(NetId, Role)>,
    pub(super) needed: Vec<Needed>,
    pub(super) removed: FxHashSet<GateId>,
    pub(super) uses_left: FxHashMap<NetId, u32>,
    pub(super) region: Vec<GateId>,
    pub(super) base: Overlay,
    /// Operands that no member's result reaches, ascending.
    pub(super) outside: Vec<NetId>,
    pins: Vec<Pin>,
    /// By gate of the region: where its pins begin.
    pin_starts: Vec<u32>,
    slots: FxHashMap<NetId, u32>,
    /// The ends that read a slot.
    pub(super) ends: Vec<(EndGroup, u32, End)>,
}

impl<'a> SetSite<'a> {
    /// Looks at `chains` on their netlist; without any it is the netlist as read.
    ///
    /// # Errors
    /// When one of them cannot be replaced, or two depend on each other.
    ///
    /// # Panics
    /// With more than [`MOST_TOGETHER`] chains.
    pub fn of(ground: &'a Ground<'a>, chains: &[&Chain]) -> Result<Self, Refused> {
        assert!(chains.len() <= MOST_TOGETHER, "the set is too large");
        let netlist = ground.netlist;
        let operands: Vec<Operands> = chains
            .iter()
            .map(|chain| Operands::of(ground, chain))
            .collect();
        let mut owners: FxHashMap<NetId, (usize, Role)> = FxHashMap::default();
        let mut orders: Vec<Vec<NetId>> = Vec::new();
        for (i, chain) in chains.iter().enumerate() {
            let (mut order, roles) = replaced_nets(ground, chain, &operands[i].on_the_way);
            order.retain(|net| !owners.contains_key(net));
            for net in &order {
                owners.insert(*net, (i, roles[net]));
            }
            if order.is_empty() {
                return Err(Refused::NothingToReplace);
            }
            orders.push(order);
        }
        let order = in_order(ground, &operands, &owners, &orders)?;

        let mut results: Vec<(NetId, Role)> = Vec::with_capacity(owners.len());
        let mut ranges = Vec::new();
        for &i in &order {
            let start = results.len();
            results.extend(orders[i].iter().map(|&net| (net, owners[&net].1)));
            ranges.push(start..results.len());
        }
        let nets: Vec<NetId> = results.iter().map(|&(net, _)| net).collect();
        let roles: FxHashMap<NetId, Role> = results.iter().copied().collect();
        let mut roots: Vec<NetId> = operands.iter().flat_map(|o| &o.roots).copied().collect();
        roots.sort_unstable();
        roots.dedup();
        let (removed, uses_left) = sweep(ground, &nets, &roles, &roots);
        let fan_out = fan_out_of(ground, &nets);
        let fan_out_set: FxHashSet<GateId> = fan_out.iter().copied().collect();
        let mut region: Vec<GateId> = fan_out
            .into_iter()
            .filter(|gate| !removed.contains(gate))
            .collect();
        region.sort_unstable_by_key(|&gate| ground.rank(gate));
        let stretch_of = stretches(ground, &region, &ranges, &results);
        let mut numbered: Vec<(u32, GateId)> = stretch_of.into_iter().zip(region).collect();
        numbered.sort_by_key(|&(stretch, _)| stretch);

        let mut slots: FxHashMap<NetId, u32> = FxHashMap::default();
        for (slot, &(net, _)) in results.iter().enumerate() {
            slots.insert(net, slot as u32);
        }
        for (i, &(_, gate)) in numbered.iter().enumerate() {
            let output = netlist.gate_output(gate);
            if ground.gate_of(output) == Some(gate) {
                slots.insert(output, (results.len() + i) as u32);
            }
        }
        let mut members = Vec::new();
        let mut needed: Vec<Needed> = Vec::new();
        let style = ground.settings.style;
        for (place, &i) in order.iter().enumerate() {
            let start = needed.len();
            for &(net, role) in &results[ranges[place].clone()] {
                let before = ground.uses(net);
                let uses = uses_left.get(&net).copied().unwrap_or(before);
                if uses > 0 || (before == 0 && style != GateStyle::AndInverter) {
                    needed.push(Needed { net, role, uses });
                }
            }
            let behind = numbered.partition_point(|&(s, _)| s < place as u32)
                ..numbered.partition_point(|&(s, _)| s <= place as u32);
            members.push(Member {
                given: i,
                operands: Rooted::of(ground, chains[i]),
                results: ranges[place].clone(),
                needed: start..needed.len(),
                behind,
            });
        }
        let outside: Vec<NetId> = roots
            .into_iter()
            .filter(|net| !slots.contains_key(net))
            .collect();
        let mut base = Overlay::new(style, ground.settings.model);
        let stays = |gate: GateId| !removed.contains(&gate) && !fan_out_set.contains(&gate);
        find_reusable(ground, &mut base, &outside, stays);
        let mut site = Self {
            ground,
            members,
            results,
            needed,
            removed,
            uses_left,
            region: numbered.into_iter().map(|(_, gate)| gate).collect(),
            base,
            outside,
            pins: Vec::new(),
            pin_starts: vec![0],
            slots,
            ends: Vec::new(),
        };
        site.list_pins();
        site.list_ends();
        Ok(site)
    }

    fn list_pins(&mut self) {
        let (ground, netlist) = (self.ground, self.ground.netlist);
        for &gate in &self.region {
            let delays = ground.timing.delays.of_gate(netlist, gate);
            let pins = netlist.fan_ins(gate).iter().zip(delays);
            self.pins.extend(pins.map(|(&net, &delay)| Pin {
                net,
                slot: self.slots.get(&net).copied(),
                delay,
            }));
            self.pin_starts.push(self.pins.len() as u32);
        }
    }

    fn list_ends(&mut self) {
        let (ground, netlist) = (self.ground, self.ground.netlist);
        let mut ends = Vec::new();
        let mut offer = |slot: usize, end: End| {
            if let Some(group) = end.group(netlist) {
                ends.push((group, slot as u32, end));
            }
        };
        for (slot, &(net, _)) in self.results.iter().enumerate() {
            ground.ends_at(net).for_each(|end| offer(slot, end));
        }
        for (i, &gate) in self.region.iter().enumerate() {
            let slot = self.results.len() + i;
            let output = netlist.gate_output(gate);
            if ground.gate_of(output) == Some(gate) {
                ground.ends_at(output).for_each(|end| offer(slot, end));
            } else {
                offer(slot, End::Cut(gate));
            }
        }
        ends.sort_unstable_by_key(|&(group, _, end)| (group, end));
        self.ends = ends;
    }

    /// The pins of a gate of the region.
    pub(super) fn pins(&self, gate: usize) -> &[Pin] {
        &self.pins[self.pin_starts[gate] as usize..self.pin_starts[gate + 1] as usize]
    }

    /// The slot of a net, if it has one.
    pub(super) fn slot(&self, net: NetId) -> Option<usize> {
        self.slots.get(&net).map(|&slot| slot as usize)
    }

    /// Whether what arrives at `end` may change.
    pub(super) fn is_behind(&self, end: End) -> bool {
        match end {
            End::Cut(gate) => {
                let rank = self.ground.rank(gate);
                let found = |range: &Range<usize>| {
                    let stretch = &self.region[range.clone()];
                    let at = stretch.partition_point(|&each| self.ground.rank(each) < rank);
                    stretch.get(at) == Some(&gate)
                };
                self.members.iter().any(|member| found(&member.behind))
            }
            _ => end_net(self.ground.netlist, end).is_some_and(|net| self.slots.contains_key(&net)),
        }
    }

    /// The latest end of a kind that no result reaches.
    pub(super) fn latest_outside(&self, kind: PathKind) -> Option<(i32, End)> {
        self.ground.latest_end(kind, |end| !self.is_behind(end))
    }

    /// How many ends of a kind that no result reaches have this arrival.
    pub(super) fn count_outside(&self, kind: PathKind, time: i32) -> usize {
        let at = self.ground.ends_at_time(kind, time);
        at.filter(|&end| !self.is_behind(end)).count()
    }

    /// A measure of the work of one run.
    pub fn size(&self) -> usize {
        self.pins.len() + self.results.len()
    }

    /// Arrivals from each group of starts by net, as the timing has them.
    pub(super) fn starts(&self) -> impl Iterator<Item = (StartGroup, &'a [i32])> {
        self.ground.timing.by_start()
    }
}

/// The chains in an order in which none reads a later one; of those that could
/// come next the first given.
fn in_order(
    ground: &Ground<'_>,
    operands: &[Operands],
    owners: &FxHashMap<NetId, (usize, Role)>,
    orders: &[Vec<NetId>],
) -> Result<Vec<usize>, Refused> {
    let nets: Vec<NetId> = orders.iter().flatten().copied().collect();
    let mut gates = fan_out_of(ground, &nets);
    gates.sort_unstable_by_key(|&gate| ground.rank(gate));
    // The members whose results a net depends on, not looking behind results.
    let mut reached: FxHashMap<NetId, u128> = FxHashMap::default();
    for (i, order) in orders.iter().enumerate() {
        reached.extend(order.iter().map(|&net| (net, 1 << i)));
    }
    for gate in gates {
        let output = ground.netlist.gate_output(gate);
        if owners.contains_key(&output) || ground.gate_of(output) != Some(gate) {
            continue;
        }
        let pins = ground.netlist.fan_ins(gate).iter();
        let of_pins = pins.filter_map(|net| reached.get(net));
        let all = of_pins.fold(0, |all, set| all | set);
        reached.insert(output, all);
    }
    let mut reads = vec![0u128; orders.len()];
    for (i, own) in operands.iter().enumerate() {
        for (position, bit) in &own.given {
            if let Some(net) = bit.signal().map(|signal| signal.net) {
                let set = reached.get(&net).copied().unwrap_or(0);
                if set >> i & 1 == 1 {
                    return Err(Refused::OperandDependsOnChain {
                        position: *position,
                    });
                }
                reads[i] |= set;
            }
        }
        // A result whose paths do not count hides paths from who reads it.
        let barred = |net: &NetId| owners.contains_key(net) && ground.netlist.is_barred(*net);
        if own.roots.iter().any(barred) {
            return Err(Refused::DependOnEachOther);
        }
    }
    let mut order = Vec::with_capacity(orders.len());
    let mut placed = 0u128;
    while order.len() < orders.len() {
        let ready = |&i: &usize| placed >> i & 1 == 0 && reads[i] & !placed == 0;
        let next = (0..orders.len()).find(ready);
        let next = next.ok_or(Refused::DependOnEachOther)?;
        placed |= 1 << next;
        order.push(next);
    }
    Ok(order)
}

/// For each gate of the region, given by rank, the last member it depends on.
fn stretches(
    ground: &Ground<'_>,
    region: &[GateId],
    ranges: &[Range<usize>],
    results: &[(NetId, Role)],
) -> Vec<u32> {
    let mut after: FxHashMap<NetId, u32> = FxHashMap::default();
    for (place, range) in ranges.iter().enumerate() {
        for &(net, _) in &results[range.clone()] {
            after.insert(net, place as u32);
        }
    }
    region
        .iter()
        .map(|&gate| {
            let pins = ground.netlist.fan_ins(gate).iter();
            let last = pins.filter_map(|net| after.get(net)).max();
            let last = last.copied().unwrap_or(0);
            let output = ground.netlist.gate_output(gate);
            if ground.gate_of(output) == Some(gate) {
                after.insert(output, last);
            }
            last
        })
        .collect()
}
