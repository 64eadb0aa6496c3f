//! One chain on its netlist: what a rebuild replaces, what that sweeps away, and
//! what stays to be measured. Computed once per chain; every proposal reuses it.
//!
//! Every net proven equal to a sum or carry is replaced. Gates that lose their
//! last use by it are removed; gates dead beforehand stay. What remains in the
//! fan-out of the replaced nets is the *region*: with the replaced nets as
//! barriers it gives the longest paths beside the chain and the fixed tail
//! behind every replaced net, so a proposal costs its own gates and no pass over
//! the netlist. This rests on one invariant, checked here: no operand depends on
//! a replaced net.

use super::cone::{Operands, fan_out_of, replaced_nets, sweep, sweep_unread};
use super::ground::Ground;
use super::overlay::{GateStyle, Literal, Overlay};
use super::reuse::find_reusable;
use crate::chain::Chain;
use crate::netlist::{GateId, NetId};
use crate::network::Addends;
use crate::timing::{End, EndGroup, NEVER, PathKind, StartGroup, end_net};
use rustc_hash::{FxHashMap, FxHashSet};

/// Why a chain cannot be planned.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
pub enum Refused {
    /// An operand depends on a sum or carry of the chain itself.
    #[error("operand bit {position} depends on the chain's own results")]
    OperandDependsOnChain {
        /// The position.
        position: usize,
    },
    /// No net of the chain can be driven anew.
    #[error("none of its sums and carries is driven by a gate of its own")]
    NothingToReplace,
    /// Two chains of a set read each other.
    #[error("two chains of the set depend on each other")]
    DependOnEachOther,
}

/// What a replaced net shows.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(super) struct Role {
    pub(super) position: usize,
    pub(super) carry: bool,
    pub(super) inverted: bool,
}

/// A replaced net that something outside the removed gates still reads.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Needed {
    pub(super) net: NetId,
    pub(super) role: Role,
    pub(super) uses: u32,
}

/// The longest path of one kind that passes no replaced net.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Beside {
    pub(super) kind: PathKind,
    pub(super) longest: Option<(i32, End)>,
}

/// See the head of the module.
pub struct Site<'a> {
    pub(super) ground: &'a Ground<'a>,
    pub(super) replaced: FxHashMap<NetId, Role>,
    pub(super) needed: Vec<Needed>,
    /// Gates removed whatever the proposal.
    pub(super) removed: FxHashSet<GateId>,
    pub(super) uses_left: FxHashMap<NetId, u32>,
    pub(super) region: Vec<GateId>,
    pub(super) region_set: FxHashSet<GateId>,
    pub(super) beside: Vec<Beside>,
    pub(super) tails: Vec<(EndGroup, FxHashMap<NetId, i32>)>,
    pub(super) base: Overlay,
    pub(super) addends: Addends<Literal>,
    pub(super) negated: bool,
    /// Nets the addends read, ascending.
    pub(super) operands: Vec<NetId>,
}

impl<'a> Site<'a> {
    /// Looks at `chain` on its netlist.
    ///
    /// # Errors
    /// When the chain cannot be replaced as a whole.
    pub fn of(ground: &'a Ground<'a>, chain: &Chain) -> Result<Self, Refused> {
        let operands = Operands::of(ground, chain);
        let (order, replaced) = replaced_nets(ground, chain, &operands.on_the_way);
        if order.is_empty() {
            return Err(Refused::NothingToReplace);
        }
        let fan_out = fan_out_of(ground, &order);
        let fan_out_set: FxHashSet<GateId> = fan_out.iter().copied().collect();
        let depends = |net: NetId| {
            replaced.contains_key(&net)
                || ground
                    .gate_of(net)
                    .is_some_and(|gate| fan_out_set.contains(&gate))
        };
        for (position, bit) in operands.given.iter() {
            if bit.signal().is_some_and(|signal| depends(signal.net)) {
                return Err(Refused::OperandDependsOnChain {
                    position: *position,
                });
            }
        }
        let (removed, uses_left) = sweep(ground, &order, &replaced, &operands.roots);
        let style = ground.settings.style;
        let needed: Vec<Needed> = order
            .iter()
            .filter_map(|&net| {
                let before = ground.uses(net);
                let uses = uses_left.get(&net).copied().unwrap_or(before);
                let stays = uses > 0 || (before == 0 && style != GateStyle::AndInverter);
                stays.then(|| Needed {
                    net,
                    role: replaced[&net],
                    uses,
                })
            })
            .collect();
        let mut region: Vec<GateId> = fan_out
            .into_iter()
            .filter(|gate| !removed.contains(gate))
            .collect();
        region.sort_unstable_by_key(|&gate| ground.rank(gate));
        let region_set = region.iter().copied().collect();
        let mut base = Overlay::new(style, ground.settings.model);
        let (addends, negated) = operands.addends(ground, chain, &mut base);
        let mut site = Self {
            ground,
            replaced,
            needed,
            removed,
            uses_left,
            region,
            region_set,
            beside: Vec::new(),
            tails: Vec::new(),
            base,
            addends,
            negated,
            operands: operands.roots,
        };
        let stays = |gate: GateId| !site.removed.contains(&gate) && !fan_out_set.contains(&gate);
        find_reusable(ground, &mut site.base, &site.operands, stays);
        site.measure_beside();
        site.measure_tails();
        Ok(site)
    }

    /// The gates that are the chain's own: those of its results and what only
    /// serves them, ascending.
    pub fn own_gates(&self) -> Vec<GateId> {
        let mut gates: Vec<GateId> = self.removed.iter().copied().collect();
        gates.sort_unstable();
        gates
    }

    /// Arrival of an existing net the chain does not replace.
    pub(super) fn arrival(&self, net: NetId) -> i32 {
        self.ground.timing.arrivals.by_net[net.index()]
    }

    /// The longest paths that pass no replaced net.
    fn measure_beside(&mut self) {
        let ground = self.ground;
        let groups = ground.end_groups();
        for (start, by_net) in ground.timing.by_start() {
            let (times, cut_ends) = self.arrivals_beside(start.way, by_net);
            for &group in &groups {
                let kind = PathKind { start, end: group };
                let mut longest = ground.latest_end(kind, |end| !self.is_behind(end));
                let mut offer = |time: i32, end: End| {
                    if time != NEVER && longest.is_none_or(|(most, _)| time > most) {
                        longest = Some((time, end));
                    }
                };
                for &gate in &self.region {
                    let output = ground.netlist.gate_output(gate);
                    if let Some(&time) = times.get(&output) {
                        for end in ground.ends_at(output) {
                            if end.is_in(ground.netlist, group) {
                                offer(time, end);
                            }
                        }
                    }
                }
                for &(time, end) in &cut_ends {
                    if end.is_in(ground.netlist, group) {
                        offer(time, end);
                    }
                }
                self.beside.push(Beside { kind, longest });
            }
        }
    }

    /// Arrivals in the region with the replaced nets taken away, and at the gates
    /// in it that drive cut nets.
    fn arrivals_beside(&self, way: u8, by_net: &[i32]) -> (FxHashMap<NetId, i32>, Vec<(i32, End)>) {
        let ground = self.ground;
        let mut times: FxHashMap<NetId, i32> = FxHashMap::default();
        let mut cut_ends = Vec::new();
        for &gate in &self.region {
            let delays = ground.timing.delays.of_gate(ground.netlist, gate);
            let mut latest = NEVER;
            for (&net, delay) in ground.netlist.fan_ins(gate).iter().zip(delays) {
                let at = if self.replaced.contains_key(&net) {
                    NEVER
                } else {
                    times.get(&net).copied().unwrap_or(by_net[net.index()])
                };
                if at != NEVER {
                    latest = latest.max(at + delay);
                }
            }
            let output = ground.netlist.gate_output(gate);
            if ground.netlist.is_barred_on(way, output) {
                latest = NEVER;
            }
            if ground.gate_of(output) == Some(gate) {
                times.insert(output, latest);
            } else {
                cut_ends.push((latest, End::Cut(gate)));
            }
        }
        (times, cut_ends)
    }

    /// Whether paths to `end` may pass a replaced net.
    pub(super) fn is_behind(&self, end: End) -> bool {
        match (end, end_net(self.ground.netlist, end)) {
            (End::Cut(gate), _) => self.region_set.contains(&gate),
            (_, Some(net)) => {
                self.replaced.contains_key(&net)
                    || self
                        .ground
                        .gate_of(net)
                        .is_some_and(|gate| self.region_set.contains(&gate))
            }
            (_, None) => false,
        }
    }

    /// The longest tail behind every replaced net that passes no other.
    fn measure_tails(&mut self) {
        let ground = self.ground;
        for group in ground.end_groups() {
            let mut tails: FxHashMap<NetId, i32> = FxHashMap::default();
            let wanted = |end: End| end.is_in(ground.netlist, group);
            let ends_here = |net: NetId| ground.ends_at(net).any(wanted);
            let barred = |net: NetId| ground.netlist.is_barred_on(group.way, net);
            for needed in &self.needed {
                if ends_here(needed.net) && !barred(needed.net) {
                    tails.insert(needed.net, 0);
                }
            }
            for &gate in self.region.iter().rev() {
                let output = ground.netlist.gate_output(gate);
                let tail = if ground.gate_of(output) == Some(gate) {
                    let behind = tails.get(&output).copied();
                    behind.or_else(|| ends_here(output).then_some(0))
                } else {
                    wanted(End::Cut(gate)).then_some(0)
                };
                let Some(tail) = tail.filter(|_| !barred(output)) else {
                    continue;
                };
                tails.insert(output, tail);
                let delays = ground.timing.delays.of_gate(ground.netlist, gate);
                for (&net, delay) in ground.netlist.fan_ins(gate).iter().zip(delays) {
                    let inside = self.replaced.contains_key(&net) && !barred(net)
                        || ground
                            .gate_of(net)
                            .is_some_and(|gate| self.region_set.contains(&gate));
                    if inside {
                        let slot = tails.entry(net).or_insert(NEVER);
                        *slot = (*slot).max(tail + delay);
                    }
                }
            }
            self.tails.push((group, tails));
        }
    }

    /// The end that the longest tail behind a replaced net leads to.
    pub(super) fn end_behind(&self, mut net: NetId, group: EndGroup) -> Option<End> {
        let ground = self.ground;
        let wanted = |end: End| end.is_in(ground.netlist, group);
        let (_, tails) = self.tails.iter().find(|(each, _)| *each == group)?;
        loop {
            let tail = *tails.get(&net)?;
            if tail == 0
                && let Some(end) = ground.ends_at(net).find(|&end| wanted(end))
            {
                return Some(end);
            }
            let next = ground.readers.of_net(net).iter().find_map(|&gate| {
                let output = ground.netlist.gate_output(gate);
                let cut = ground.gate_of(output) != Some(gate);
                let behind = if cut {
                    wanted(End::Cut(gate)).then_some(0)
                } else {
                    tails.get(&output).copied()
                };
                let delays = ground.timing.delays.of_gate(ground.netlist, gate);
                let pins = ground.netlist.fan_ins(gate).iter().zip(delays);
                let fits = self.region_set.contains(&gate)
                    && pins.into_iter().any(|(&pin, delay)| {
                        pin == net && behind.is_some_and(|b| b + delay == tail)
                    });
                fits.then_some((gate, output, cut))
            });
            match next? {
                (gate, _, true) => return Some(End::Cut(gate)),
                (_, output, false) => net = output,
            }
        }
    }

    /// Gates removed beyond those of every proposal, because the new gates of
    /// this one do not read some operand.
    pub(super) fn sweep_unread(&self, is_read: impl Fn(NetId) -> bool) -> Vec<GateId> {
        sweep_unread(self.ground, &self.operands, &self.uses_left, is_read)
    }

    /// Arrivals from each group of starts by net, as the timing has them.
    pub(super) fn starts(&self) -> impl Iterator<Item = (StartGroup, &'a [i32])> {
        self.ground.timing.by_start()
    }
}
