//! A set of proposals tried together: all their gates made in one overlay and
//! measured.
//!
//! As [`super::dry_run`] does for one chain, no figure is a formula. A member that
//! reads another's sums reads the new gates that make them, at the time they are
//! ready then; so in series a ripple chain behind a ripple chain costs about one
//! level, and behind a fast one its whole length. Depth is one pass over members
//! and stretches for each group of starts, beside the ends that nothing of the set
//! reaches.
//!
//! Where delay depends on load the figures of a set are a sketch: what stays keeps
//! the delay it has today and new gates have that of an assumed load. Only the dry
//! run of one chain is timed again with the loads of its rebuild.

use super::cone::{Rooted, sweep_unread};
use super::dry_run::{Estimate, KindChange, TakesOver};
use super::ground::Ground;
use super::made::Made;
use super::materialise::Stretch;
use super::overlay::{Literal, Overlay};
use super::set_site::SetSite;
use crate::chain::Chain;
use crate::netlist::{GateId, NetId};
use crate::network::{CarryNetwork, GateSink, Propagate, build};
use crate::timing::{NEVER, PathKind, StartGroup};

/// The figures of a set.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct SetEstimate {
    /// Depths and gates of all members together.
    pub whole: Estimate,
    /// By kind of `whole`, how many ends are as late as the latest.
    pub ends: Vec<usize>,
}

impl SetEstimate {
    /// What becomes of one kind, and how many ends are as late as the latest.
    pub fn of_kind(&self, kind: PathKind) -> Option<(KindChange, usize)> {
        let at = self.whole.kinds.iter().position(|each| each.kind == kind)?;
        Some((self.whole.kinds[at], self.ends[at]))
    }

    /// Gate equivalents added less those removed.
    pub fn cost(&self) -> i64 {
        self.whole.gate_equivalents_added as i64 - self.whole.gate_equivalents_removed as i64
    }
}

/// Times of nodes and slots, and of the paths that pass a result.
#[derive(Default)]
pub(super) struct Times {
    pub(super) nodes: Vec<i32>,
    pub(super) slots: Vec<i32>,
    pub(super) through: Vec<i32>,
}

/// See the head of the module.
pub struct SetRun<'s, 'a> {
    pub(super) site: &'s SetSite<'a>,
    pub(super) overlay: Overlay,
    /// What each result of the site becomes.
    pub(super) results: Vec<Literal>,
    /// What each needed net of the site becomes.
    pub(super) literals: Vec<Literal>,
    pub(super) made: Made,
    /// Gates removed beyond the site's.
    pub(super) swept: Vec<GateId>,
    /// By member: the carries out of its positions.
    carries: Vec<Vec<Literal>>,
    /// By member: the nodes up to and with its own.
    pub(super) node_ends: Vec<usize>,
    /// The times from each group of starts.
    pub(super) times: Vec<(StartGroup, Times)>,
    estimate: SetEstimate,
}

impl<'s, 'a> SetRun<'s, 'a> {
    /// Makes one network for every chain of `site`, in the order the chains were
    /// given.
    ///
    /// # Panics
    /// When a chain has no network, or one that does not fit.
    pub fn of(site: &'s SetSite<'a>, choices: &[(&CarryNetwork, Propagate)]) -> Self {
        let ground = site.ground;
        let limits = ground.settings.limits();
        let mut overlay = site.base.clone();
        let mut results: Vec<Literal> = Vec::with_capacity(site.results.len());
        let (mut node_ends, mut carries_of) = (Vec::new(), Vec::new());
        let all = &ground.timing.arrivals.by_net;
        let mut times = Times::default();
        for (place, member) in site.members.iter().enumerate() {
            let (network, propagate) = choices[member.given];
            let operands = &member.operands;
            let addends = operands.literals(&mut overlay, |overlay, net| match site.slot(net) {
                Some(slot) if slot < results.len() => results[slot],
                Some(slot) => overlay.net(net, times.slots[slot]),
                None => overlay.net(net, all[net.index()]),
            });
            let negated = operands.negated;
            let built = build(network, &addends, limits, propagate, &mut overlay);
            for (_, role) in &site.results[member.results.clone()] {
                let list = if role.carry {
                    &built.carries
                } else {
                    &built.sums
                };
                results.push(list[role.position].invert_if(negated != role.inverted));
            }
            let carries = built.carries.into_iter();
            carries_of.push(carries.map(|c| c.invert_if(negated)).collect());
            node_ends.push(overlay.len());
            advance(
                site,
                &overlay,
                &results,
                (place, overlay.len()),
                all,
                &mut times,
            );
        }
        let needed = site.members.iter().flat_map(|member| {
            let nets = &site.needed[member.needed.clone()];
            nets.iter().map(|needed| needed.net)
        });
        let shows = |net: NetId| results[site.slot(net).expect("a result has a slot")];
        let literals: Vec<Literal> = needed.map(shows).collect();
        let made = Made::of(&overlay, &literals);
        let reads = made.reads(&overlay, &literals);
        let swept = sweep_unread(ground, &site.outside, &site.uses_left, |net| {
            reads.binary_search(&net).is_ok()
        });
        let mut run = Self {
            site,
            overlay,
            results,
            literals,
            made,
            swept,
            carries: carries_of,
            node_ends,
            times: Vec::new(),
            estimate: SetEstimate {
                whole: Estimate {
                    chain_before: NEVER,
                    chain_after: NEVER,
                    block_before: ground.timing.longest(),
                    block_after: 0,
                    kinds: Vec::new(),
                    gates_added: 0,
                    gates_removed: 0,
                    gate_equivalents_added: 0,
                    gate_equivalents_removed: 0,
                    largest_fan_in: 0,
                    largest_fan_out: 0,
                },
                ends: Vec::new(),
            },
        };
        run.measure_chains(&times);
        run.measure_times(times);
        run.count_gates();
        run.measure_depth();
        run
    }

    /// The figures.
    pub fn estimate(&self) -> &SetEstimate {
        &self.estimate
    }

    /// When the carry out of each position of each chain is ready, `None` for
    /// constants; in the order the chains were given.
    pub fn carry_arrivals(&self) -> Vec<Vec<Option<i32>>> {
        let mut list = vec![Vec::new(); self.site.members.len()];
        for (member, carries) in self.site.members.iter().zip(&self.carries) {
            let times = carries.iter().map(|&c| self.overlay.arrival(c));
            let times = times.map(|time| (time != NEVER).then_some(time));
            list[member.given] = times.collect();
        }
        list
    }

    /// A measure of the work this run was.
    pub fn work(&self) -> usize {
        (self.site.size() + 8 * self.overlay.len()) * (1 + self.times.len())
    }

    /// The new gates and what follows them, member by member.
    pub(super) fn stretches(&self) -> impl Iterator<Item = Stretch<'_>> {
        let mut start = 0;
        self.site
            .members
            .iter()
            .zip(&self.node_ends)
            .map(move |(member, &end)| {
                let nodes = start..end;
                start = end;
                Stretch {
                    nodes,
                    needed: member.needed.clone(),
                    behind: &self.site.region[member.behind.clone()],
                }
            })
    }

    fn measure_chains(&mut self, times: &Times) {
        let site = self.site;
        let latest = |now: &dyn Fn(NetId) -> i32| {
            let needed = site.needed.iter().map(|needed| now(needed.net));
            needed.max().unwrap_or(NEVER)
        };
        let before = &site.ground.timing.arrivals.by_net;
        let whole = &mut self.estimate.whole;
        whole.chain_before = latest(&|net| before[net.index()]);
        whole.chain_after = latest(&|net| site.slot(net).map_or(NEVER, |slot| times.slots[slot]));
    }

    /// The times from each group of starts; `all` are those from any.
    fn measure_times(&mut self, all: Times) {
        let site = self.site;
        if site.starts().count() == 1 {
            let only = site.starts().map(|(start, _)| start);
            self.times = only.zip([all]).collect();
            return;
        }
        for (start, by_net) in site.starts() {
            let mut times = Times::default();
            for (place, &end) in self.node_ends.iter().enumerate() {
                advance(
                    site,
                    &self.overlay,
                    &self.results,
                    (place, end),
                    by_net,
                    &mut times,
                );
            }
            self.times.push((start, times));
        }
    }

    fn count_gates(&mut self) {
        let site = self.site;
        let netlist = site.ground.netlist;
        let count = self.made.count(&self.overlay, &self.literals);
        let equivalents = |gate: GateId| netlist.fan_ins(gate).len().saturating_sub(1);
        let whole = &mut self.estimate.whole;
        // A sum does not depend on the order of the set.
        #[allow(clippy::iter_over_hash_type)]
        for &gate in &site.removed {
            whole.gate_equivalents_removed += equivalents(gate);
        }
        for &gate in &self.swept {
            whole.gate_equivalents_removed += equivalents(gate);
        }
        whole.gates_removed = site.removed.len() + self.swept.len();
        whole.gates_added = count.gates;
        whole.gate_equivalents_added = count.equivalents;
        whole.largest_fan_in = count.largest_fan_in;
        let uses = site.needed.iter().map(|needed| needed.uses);
        let shown: Vec<(Literal, u32)> = self.literals.iter().copied().zip(uses).collect();
        whole.largest_fan_out = self.made.largest_fan_out(&self.overlay, &shown);
    }

    fn measure_depth(&mut self) {
        let site = self.site;
        for today in &site.ground.timing.kinds {
            let kind = today.kind;
            let latest = |list: &dyn Fn(&Times) -> &Vec<i32>| {
                let (_, times) = self.times.iter().find(|(start, _)| *start == kind.start)?;
                let ends = site.ends.iter().filter(|(group, ..)| *group == kind.end);
                let at = ends.map(|&(_, slot, _)| list(times)[slot as usize]);
                at.filter(|&time| time != NEVER).max()
            };
            let behind = latest(&|times| &times.slots);
            let through = latest(&|times| &times.through);
            let outside = site.latest_outside(kind).map(|(time, _)| time);
            let after = behind.max(outside).unwrap_or(0);
            let mut ends = site.count_outside(kind, after);
            if behind == Some(after) {
                ends += self.ends_at(kind, after).count();
            }
            self.estimate.whole.kinds.push(KindChange {
                kind,
                before: today.longest,
                after,
                through,
            });
            self.estimate.ends.push(ends);
        }
        let after = self.estimate.whole.kinds.iter().map(|change| change.after);
        self.estimate.whole.block_after = after.max().unwrap_or(0);
    }

    /// The slots of the ends behind the set at which paths of `kind` arrive at
    /// `time`, and those ends.
    pub(super) fn ends_at(
        &self,
        kind: PathKind,
        time: i32,
    ) -> impl Iterator<Item = (usize, crate::timing::End)> {
        let times = self.times_from(kind.start);
        let ends = self.site.ends.iter();
        ends.filter(move |&&(group, slot, _)| {
            group == kind.end && times.is_some_and(|times| times.slots[slot as usize] == time)
        })
        .map(|&(_, slot, end)| (slot as usize, end))
    }

    pub(super) fn times_from(&self, start: StartGroup) -> Option<&Times> {
        let found = self.times.iter().find(|(each, _)| *each == start);
        found.map(|(_, times)| times)
    }

    /// The path of `kind` that is longest with the set: one that passes no result
    /// of it where there is such a one.
    pub fn takes_over(&self, kind: PathKind) -> Option<TakesOver> {
        let (change, _) = self.estimate.of_kind(kind)?;
        let beside = |end| TakesOver {
            kind,
            end,
            through_chain: false,
        };
        if let Some((time, end)) = self.site.latest_outside(kind)
            && time == change.after
        {
            return Some(beside(end));
        }
        let times = self.times_from(kind.start)?;
        let mut at = self.ends_at(kind, change.after).peekable();
        let &(_, first) = at.peek()?;
        let found = at.find(|&(slot, _)| times.through[slot] < change.after);
        Some(match found {
            Some((_, end)) => beside(end),
            None => TakesOver {
                kind,
                end: first,
                through_chain: true,
            },
        })
    }
}

/// Goes on with `times` over the nodes up to `end` of the member at `place`, its
/// results and what follows them.
fn advance(
    site: &SetSite<'_>,
    overlay: &Overlay,
    results: &[Literal],
    (place, end): (usize, usize),
    by_net: &[i32],
    times: &mut Times,
) {
    let netlist = site.ground.netlist;
    let member = &site.members[place];
    if times.slots.is_empty() {
        let slots = site.results.len() + site.region.len();
        times.slots = vec![NEVER; slots];
        times.through = vec![NEVER; slots];
    }
    let Times {
        nodes,
        slots,
        through,
    } = times;
    overlay.continue_arrivals(nodes, end, |net| match site.slot(net) {
        Some(slot) => slots[slot],
        None => by_net[net.index()],
    });
    for result in member.results.clone() {
        if !netlist.is_barred(site.results[result].0) {
            slots[result] = overlay.shown_arrival(results[result], nodes);
            through[result] = slots[result];
        }
    }
    for gate in member.behind.clone() {
        if netlist.is_barred(netlist.gate_output(site.region[gate])) {
            continue;
        }
        let (mut latest, mut passing) = (NEVER, NEVER);
        for pin in site.pins(gate) {
            let at = match pin.slot {
                Some(slot) => slots[slot as usize],
                None => by_net[pin.net.index()],
            };
            if at != NEVER {
                latest = latest.max(at + pin.delay);
            }
            if let Some(slot) = pin.slot
                && through[slot as usize] != NEVER
            {
                passing = passing.max(through[slot as usize] + pin.delay);
            }
        }
        slots[site.results.len() + gate] = latest;
        through[site.results.len() + gate] = passing;
    }
}

/// When the latest sum or the last carry of a chain would be ready if all operands
/// were at 0.
pub(super) fn depth_by_itself(
    ground: &Ground<'_>,
    chain: &Chain,
    network: &CarryNetwork,
    propagate: Propagate,
) -> i32 {
    let mut overlay = Overlay::new(ground.settings.style, ground.settings.model);
    let operands = Rooted::of(ground, chain);
    let addends = operands.literals(&mut overlay, |overlay, net| overlay.net(net, 0));
    let limits = ground.settings.limits();
    let built = build(network, &addends, limits, propagate, &mut overlay);
    let results = built.sums.iter().chain(built.carries.last());
    let times = results.map(|&literal| overlay.arrival(literal));
    times.max().unwrap_or(NEVER)
}
