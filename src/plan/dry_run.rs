//! One proposal tried on one chain: its gates made in the overlay and measured.
//!
//! No figure here is a formula. The gates are those the writer would make: a
//! new gate that nothing reaches is not counted, every real net is a gate of its
//! own in BLIF (in either polarity; a net equal to an operand or a constant is a
//! buffer, inverter or constant) and no gate in AIGER, where readers are
//! redirected. Depth comes from the new arrivals at the replaced nets, the fixed
//! tails behind them and the longest paths beside the chain, which together are
//! every path there is, since no operand depends on a replaced net.

use super::made::Made;
use super::overlay::{GateStyle, Literal, Node, Overlay};
use super::retime::Retimed;
use super::site::Site;
use crate::netlist::{GateId, NetId};
use crate::network::{CarryNetwork, Propagate, build};
use crate::timing::{End, EndGroup, NEVER, PathKind};
use rustc_hash::FxHashMap;

/// What becomes of the longest path of one kind.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct KindChange {
    /// The kind.
    pub kind: PathKind,
    /// Its longest path today.
    pub before: i32,
    /// Its longest path with the proposal.
    pub after: i32,
    /// The longest path through the chain's new results, if one leads through.
    pub through: Option<i32>,
}

impl KindChange {
    /// Whether the chain is on a longest path of the kind afterwards.
    pub fn chain_is_on_it(&self) -> bool {
        self.through == Some(self.after)
    }
}

/// The figures of one proposal.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Estimate {
    /// Latest result of the chain today.
    pub chain_before: i32,
    /// Latest result of the chain with the proposal.
    pub chain_after: i32,
    /// Longest path of the block today.
    pub block_before: i32,
    /// Longest path of the block with the proposal.
    pub block_after: i32,
    /// Every path kind that occurs today.
    pub kinds: Vec<KindChange>,
    /// New gates.
    pub gates_added: usize,
    /// Gates that go; `gates_after = gates_before + added − removed`.
    pub gates_removed: usize,
    /// New gates, a k-input gate counted k − 1.
    pub gate_equivalents_added: usize,
    /// Removed gates, counted the same.
    pub gate_equivalents_removed: usize,
    /// Most inputs of a new gate.
    pub largest_fan_in: usize,
    /// Most readers of a new gate.
    pub largest_fan_out: usize,
}

/// The path that is longest with a proposal.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct TakesOver {
    /// Its kind.
    pub kind: PathKind,
    /// Where it ends.
    pub end: End,
    /// Whether it still leads through the chain.
    pub through_chain: bool,
}

/// A proposal as made in the overlay.
pub struct DryRun<'s, 'a> {
    pub(super) site: &'s Site<'a>,
    pub(super) overlay: Overlay,
    /// What each needed net of the site becomes.
    pub(super) literals: Vec<Literal>,
    pub(super) made: Made,
    /// Gates removed beyond the site's.
    pub(super) swept: Vec<GateId>,
    pub(super) carries: Vec<Literal>,
    /// The times under load, where the model asks for them.
    retimed: Option<Retimed>,
    estimate: Estimate,
}

impl<'s, 'a> DryRun<'s, 'a> {
    /// Makes `network` for the chain of `site`.
    pub fn of(site: &'s Site<'a>, network: &CarryNetwork, propagate: Propagate) -> Self {
        let mut run = Self::sketch(site, network, propagate);
        run.retime();
        run
    }

    /// The same without timing again what changes its load: where delay depends on
    /// load, everything that stays keeps the delay it has today and new gates have
    /// that of an assumed load. Good for telling apart what to look at.
    pub(super) fn sketch(site: &'s Site<'a>, network: &CarryNetwork, propagate: Propagate) -> Self {
        let mut overlay = site.base.clone();
        let limits = site.ground.settings.limits();
        let built = build(network, &site.addends, limits, propagate, &mut overlay);
        let literals: Vec<Literal> = site
            .needed
            .iter()
            .map(|needed| {
                let role = needed.role;
                let list = if role.carry {
                    &built.carries
                } else {
                    &built.sums
                };
                list[role.position].invert_if(site.negated != role.inverted)
            })
            .collect();
        let carries = built.carries;
        let carries = carries.iter().map(|c| c.invert_if(site.negated)).collect();
        let made = Made::of(&overlay, &literals);
        let reads = made.reads(&overlay, &literals);
        let swept = site.sweep_unread(|net| reads.binary_search(&net).is_ok());
        let mut run = Self {
            site,
            overlay,
            literals,
            made,
            swept,
            carries,
            retimed: None,
            estimate: Estimate {
                chain_before: NEVER,
                chain_after: NEVER,
                block_before: site.ground.timing.longest(),
                block_after: 0,
                kinds: Vec::new(),
                gates_added: 0,
                gates_removed: 0,
                gate_equivalents_added: 0,
                gate_equivalents_removed: 0,
                largest_fan_in: 0,
                largest_fan_out: 0,
            },
        };
        run.count_gates();
        run.measure_depth();
        run
    }

    fn retime(&mut self) {
        let Some(retimed) = Retimed::of(self) else {
            return;
        };
        self.estimate.chain_after = retimed.chain_after;
        self.estimate.kinds = retimed.changes(self);
        let after = self.estimate.kinds.iter().map(|change| change.after);
        self.estimate.block_after = after.max().unwrap_or(0);
        self.retimed = Some(retimed);
    }

    /// By node that needed nets are gates of: the first of them, by its place in
    /// the site's list, and whether it shows the node inverted. None in AIGER,
    /// where readers are redirected.
    pub(super) fn first_nets(&self) -> FxHashMap<Node, (usize, bool)> {
        let mut first: FxHashMap<Node, (usize, bool)> = FxHashMap::default();
        if self.overlay.style() != GateStyle::AndInverter {
            for (index, literal) in self.literals.iter().enumerate() {
                let entry = first.entry(literal.node());
                entry.or_insert((index, literal.is_inverted()));
            }
        }
        first
    }

    /// The figures.
    pub fn estimate(&self) -> &Estimate {
        &self.estimate
    }

    /// When the carry out of each position is ready; `None` for constants.
    pub fn carry_arrivals(&self) -> Vec<Option<i32>> {
        use crate::network::GateSink;
        if let Some(retimed) = &self.retimed {
            return retimed.carries.clone();
        }
        let times = self.carries.iter().map(|&c| self.overlay.arrival(c));
        times.map(|time| (time != NEVER).then_some(time)).collect()
    }

    fn count_gates(&mut self) {
        let netlist = self.site.ground.netlist;
        let count = self.made.count(&self.overlay, &self.literals);
        let equivalents = |gate: GateId| netlist.fan_ins(gate).len().saturating_sub(1);
        // A sum does not depend on the order of the set.
        #[allow(clippy::iter_over_hash_type)]
        for &gate in &self.site.removed {
            self.estimate.gate_equivalents_removed += equivalents(gate);
        }
        for &gate in &self.swept {
            self.estimate.gate_equivalents_removed += equivalents(gate);
        }
        self.estimate.gates_removed = self.site.removed.len() + self.swept.len();
        self.estimate.gates_added = count.gates;
        self.estimate.gate_equivalents_added = count.equivalents;
        self.estimate.largest_fan_in = count.largest_fan_in;
        let uses = self.site.needed.iter().map(|needed| needed.uses);
        let shown: Vec<(Literal, u32)> = self.literals.iter().copied().zip(uses).collect();
        self.estimate.largest_fan_out = self.made.largest_fan_out(&self.overlay, &shown);
    }

    /// When each needed net is ready if the existing nets are as `by_net` says.
    fn needed_arrivals(&self, by_net: &[i32]) -> Vec<i32> {
        let times = self.overlay.arrivals(|net| by_net[net.index()]);
        let at = |&literal: &Literal| self.overlay.shown_arrival(literal, &times);
        self.literals.iter().map(at).collect()
    }

    fn measure_depth(&mut self) {
        let site = self.site;
        let before = site.needed.iter().map(|needed| site.arrival(needed.net));
        self.estimate.chain_before = before.max().unwrap_or(NEVER);
        let after = self.needed_arrivals(&site.ground.timing.arrivals.by_net);
        self.estimate.chain_after = after.into_iter().max().unwrap_or(NEVER);
        for (start, by_net) in site.starts() {
            let times = self.needed_arrivals(by_net);
            for &(end, ref tails) in &site.tails {
                let kind = PathKind { start, end };
                let Some(today) = site.ground.timing.kind(kind) else {
                    continue;
                };
                let through = site
                    .needed
                    .iter()
                    .zip(&times)
                    .filter(|&(_, &time)| time != NEVER)
                    .filter_map(|(needed, time)| Some(time + tails.get(&needed.net)?))
                    .max();
                let beside = site.beside.iter().find(|each| each.kind == kind);
                let beside = beside.and_then(|each| each.longest);
                let after = through.max(beside.map(|(time, _)| time));
                self.estimate.kinds.push(KindChange {
                    kind,
                    before: today.longest,
                    after: after.unwrap_or(0),
                    through,
                });
            }
        }
        self.estimate
            .kinds
            .sort_unstable_by_key(|change| change.kind);
        let after = self.estimate.kinds.iter().map(|change| change.after);
        self.estimate.block_after = after.max().unwrap_or(0);
    }

    /// The path of `kind` that is longest with the proposal: one beside the
    /// chain where it is as long.
    pub fn takes_over(&self, kind: PathKind) -> Option<TakesOver> {
        let change = self.estimate.kinds.iter().find(|each| each.kind == kind)?;
        if let Some(retimed) = &self.retimed {
            let paths = retimed.kinds.iter().find(|each| each.kind == kind)?;
            let beside = paths.beside.filter(|&(time, _)| time == change.after);
            let (_, end) = beside.or(paths.through)?;
            return Some(TakesOver {
                kind,
                end,
                through_chain: beside.is_none(),
            });
        }
        let beside = self.site.beside.iter().find(|each| each.kind == kind)?;
        if let Some((time, end)) = beside.longest
            && time == change.after
        {
            return Some(TakesOver {
                kind,
                end,
                through_chain: false,
            });
        }
        let (_, by_net) = self.site.starts().find(|&(start, _)| start == kind.start)?;
        let times = self.needed_arrivals(by_net);
        let net = self.latest_through(&times, kind.end, change.through?)?;
        Some(TakesOver {
            kind,
            end: self.site.end_behind(net, kind.end)?,
            through_chain: true,
        })
    }

    fn latest_through(&self, times: &[i32], group: EndGroup, length: i32) -> Option<NetId> {
        let (_, tails) = self.site.tails.iter().find(|(each, _)| *each == group)?;
        let nets = self.site.needed.iter().zip(times);
        nets.filter(|&(_, &time)| time != NEVER)
            .find(|(needed, time)| tails.get(&needed.net).is_some_and(|t| *time + t == length))
            .map(|(needed, _)| needed.net)
    }
}
