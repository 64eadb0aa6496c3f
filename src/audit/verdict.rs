//! The verdict: does carry limit this block?
//!
//! Carry is the limit when the block would be shallower if the carries of the
//! proven chains were free (see [`super::free_carry`]), for then no path as long
//! as the longest avoids them. Otherwise no proven chain is the limit. Where something
//! could hide a longer path or a chain (see [`super::sight`]) the verdict is
//! unknown, and says what hid it and what holds for the rest.

use super::assumed::Without;
use super::free_carry;
use super::goals::Standing;
use super::measures::ChainMap;
use super::rebuilds::{MEMBERS_TOLD, more_chains, scheme_phrase};
use super::record::{ChainRecord, Limit, PathKindFacts, ProposalRecord, RecommendedSet, Verdict};
use super::sight::Sight;
use super::words::{counted, depth_in, grouped, listed};
use crate::chain::Chain;
use crate::netlist::{NetId, Netlist, Topology};
use crate::timing::{
    KindTiming, NEVER, PathKind, PathStep, Time, Timing, end_arrival, end_net, grouped_ends,
};
use std::cmp::Reverse;
use std::collections::BTreeMap;

/// What the verdict is made from.
pub struct Evidence<'a> {
    /// The netlist.
    pub netlist: &'a Netlist,
    /// Its order and cuts.
    pub topology: &'a Topology,
    /// Its timing.
    pub timing: &'a Timing,
    /// The proven chains.
    pub chains: &'a [Chain],
    /// Their records.
    pub records: &'a [ChainRecord],
    /// Their gates and nets.
    pub map: ChainMap<'a>,
    /// What could hide part of the answer.
    pub sight: Sight<'a>,
    /// Chains below this width were left out.
    pub min_bits: usize,
    /// The longest path of the block.
    pub longest: Option<(&'a KindTiming, &'a [PathStep])>,
    /// What is recommended.
    pub set: &'a RecommendedSet,
    /// Unit of depths.
    pub unit: &'a str,
    /// The figures without assumptions, when there are some.
    pub without: Option<&'a Without>,
    /// How the ends stand against what is asked of them, when something is.
    pub goals: Option<&'a Standing>,
}

impl Evidence<'_> {
    /// The verdict.
    pub fn verdict(&self) -> Verdict {
        let by_path_kind = self.kinds();
        let longest = self.timing.time(self.timing.longest());
        let free = by_path_kind
            .iter()
            .map(|kind| kind.depth_if_carry_were_free);
        let free = free.max().unwrap_or(Time::ZERO);
        let carry = free < longest;
        let hidden = self.sight.hidden(carry);
        let (chain, seen) = if carry {
            self.carry_sentence(longest, free)
        } else {
            (None, self.elsewhere_sentence(longest))
        };
        let (limit, mut sentence) = match hidden {
            None if carry => (Limit::Carry, seen),
            None => (Limit::Elsewhere, seen),
            Some(hidden) => (
                Limit::Unknown,
                format!(
                    "Unknown, because {hidden}. As far as can be seen, {}",
                    lower(&seen)
                ),
            ),
        };
        if let Some(blind) = self.sight.blind() {
            sentence = blind;
        }
        if let Some(goals) = self.goals {
            sentence.push_str(&goals.sentence(self.unit));
        }
        if let Some(without) = self.without {
            sentence.push_str(&self.without_sentence(without, longest));
        }
        Verdict {
            limit,
            chain,
            sentence,
            by_path_kind,
        }
    }

    fn without_sentence(&self, without: &Without, longest: Time) -> String {
        if without.longest == longest {
            return " This holds under the assumptions listed; without them the longest path is \
                    as long."
                .to_owned();
        }
        format!(
            " This holds under the assumptions listed; without them the longest path is {} long.",
            depth_in(without.longest, self.unit)
        )
    }

    fn kinds(&self) -> Vec<PathKindFacts> {
        let (netlist, topology, timing) = (self.netlist, self.topology, self.timing);
        let mut free: BTreeMap<_, i32> = BTreeMap::new();
        for (start, _) in timing.by_start() {
            let by_net = free_carry::arrivals(
                netlist,
                topology,
                &timing.delays,
                start,
                self.chains,
                self.map.carried,
            );
            for (end, group) in grouped_ends(netlist, topology) {
                let kind = PathKind::from_to(start, group);
                if timing.kind(kind).is_some() {
                    let at = end_arrival(netlist, &timing.delays, &by_net, end);
                    let deepest = free.entry(kind.classes()).or_insert(NEVER);
                    *deepest = (*deepest).max(at);
                }
            }
        }
        let mut kinds = timing.kinds_by_class(netlist, topology);
        kinds.sort_by_key(|kind| Reverse(kind.longest));
        let near = timing.near(netlist, topology, &kinds);
        kinds
            .iter()
            .zip(near)
            .map(|(of_class, near)| {
                let path = timing.path_of(netlist, topology, of_class);
                let levels = self.levels_by_chain(&path);
                let longest = timing.time(of_class.longest);
                let free = free
                    .get(&of_class.kind.classes())
                    .map_or(Time::ZERO, |&at| timing.time(at));
                let main = levels
                    .iter()
                    .max_by_key(|&(&chain, &n)| (n, Reverse(chain)));
                PathKindFacts {
                    path_kind: of_class.kind.to_string(),
                    limit: if free < longest {
                        Limit::Carry
                    } else {
                        Limit::Elsewhere
                    },
                    chain: main
                        .filter(|_| free < longest)
                        .map(|(&chain, _)| self.records[chain as usize].id.clone()),
                    longest,
                    longest_without_assumptions: self
                        .without
                        .map(|without| without.of_kind(of_class.kind)),
                    levels_in_carries: levels.values().copied().sum(),
                    depth_if_carry_were_free: free,
                    ends_at_longest: of_class.ends_at_longest as u64,
                    next_below: of_class.next_below.map(|at| timing.time(at)),
                    paths_at_longest: near.paths_at_longest,
                    ends_within_one: near.ends_within_one as u64,
                    paths_within_one: near.paths_within_one,
                }
            })
            .collect()
    }

    fn carry_sentence(&self, longest: Time, free: Time) -> (Option<String>, String) {
        let Some((kind, path)) = self.longest else {
            return (None, String::new());
        };
        let levels = self.levels_by_chain(path);
        let Some((&main, &own)) = levels
            .iter()
            .max_by_key(|&(&chain, &n)| (n, Reverse(chain)))
        else {
            let text = format!(
                "Carry limits this block: with free carries it would be {free} instead of {} deep.",
                depth_in(longest, self.unit)
            );
            return (None, text);
        };
        let record = &self.records[main as usize];
        let others = levels.len() - 1;
        let rest = levels.values().copied().sum::<Time>() - own;
        let share = if own == longest {
            format!("all {} of the longest path", depth_in(longest, self.unit))
        } else {
            format!(
                "{own} of the {} of the longest path",
                depth_in(longest, self.unit)
            )
        };
        let together = match others {
            0 => String::new(),
            1 => format!(", another chain {rest} of them"),
            n => format!(
                ", {} {rest} of them",
                counted(n as u64, "more chain", "more chains"),
            ),
        };
        let text = format!(
            "Carry limits this block: {} takes {share} ({}){together}; {}.",
            chain_phrase(record),
            kind.kind,
            self.rebuild_clause(longest),
        );
        (Some(record.id.clone()), text)
    }

    fn rebuild_clause(&self, longest: Time) -> String {
        let RecommendedSet {
            proposals,
            block_depth,
            gates_added,
            gates_removed,
            largest_fan_in,
            ..
        } = self.set;
        if proposals.is_empty() {
            return if self.records.iter().all(|chain| chain.proposals.is_empty()) {
                "no rebuild was tried".to_owned()
            } else {
                "no rebuild that was tried makes the block shallower".to_owned()
            };
        }
        let chosen = self.records.iter().flat_map(|chain| {
            let chosen = |proposal: &&ProposalRecord| {
                proposals.contains(&format!("{}/{}", chain.id, proposal.id))
            };
            let found = chain.proposals.iter().filter(chosen);
            found.map(move |proposal| (chain, proposal))
        });
        let how: Vec<String> = chosen
            .take(MEMBERS_TOLD)
            .map(|(chain, proposal)| format!("{} rebuilt as {}", chain.id, scheme_phrase(proposal)))
            .chain(more_chains(proposals.len()))
            .collect();
        if block_depth.after >= longest {
            return "no rebuild that was tried makes the block shallower".to_owned();
        }
        let cost = match *gates_added as i64 - *gates_removed as i64 {
            0 => "as many gates as now".to_owned(),
            n if n > 0 => counted(n as u64, "gate more", "gates more"),
            n => counted(n.unsigned_abs(), "gate fewer", "gates fewer"),
        };
        format!(
            "with {} the block is {} deep instead of {}, for {cost}, no new gate wider than {}",
            listed(&how),
            depth_in(block_depth.after, self.unit),
            longest,
            counted(*largest_fan_in, "input", "inputs"),
        )
    }

    fn elsewhere_sentence(&self, longest: Time) -> String {
        let Some((kind, path)) = self.longest.filter(|_| longest > Time::ZERO) else {
            return "No proven carry chain limits this block: no path passes a gate that takes \
                    time."
                .to_owned();
        };
        let from = path.first().map(|step| self.netlist.net_name(step.net));
        let (from, to) = (from.unwrap_or_default(), kind.end.describe(self.netlist));
        let deep = depth_in(longest, self.unit);
        let kind = kind.kind;
        let through: Time = self.levels_by_chain(path).values().copied().sum();
        if self.records.is_empty() {
            format!(
                "No proven carry chain limits this block: none of {} or more was found; the \
                 longest path ({kind}, {deep}) runs from {from} to {to}.",
                counted(self.min_bits as u64, "bit", "bits")
            )
        } else if through == Time::ZERO {
            format!(
                "No proven carry chain limits this block: the longest path ({kind}, {deep}, from \
                 {from} to {to}) runs beside every one."
            )
        } else {
            format!(
                "No proven carry chain limits this block: the longest path ({kind}, {deep}, from \
                 {from} to {to}) spends {} in carries, but with all carries free the block would \
                 be as deep.",
                self.levels(through)
            )
        }
    }

    /// How much of a path lies in each chain's gates.
    fn levels_by_chain(&self, path: &[PathStep]) -> BTreeMap<u32, Time> {
        let mut levels = BTreeMap::new();
        for pair in path.windows(2) {
            let [before, step] = pair else { continue };
            if let Some(chain) = step.gate.and_then(|gate| self.map.cones.chain_of(gate)) {
                let own = self.timing.time(step.arrival - before.arrival);
                let sum = levels.entry(chain).or_insert(Time::ZERO);
                *sum = *sum + own;
            }
        }
        levels.retain(|_, n| *n > Time::ZERO);
        levels
    }

    /// Levels where gates are counted, else the unit of the model.
    fn levels(&self, depth: Time) -> String {
        match self.timing.delays.model().ticks_per_unit() {
            1 => depth_in(depth, "levels"),
            _ => depth_in(depth, self.unit),
        }
    }
}

/// A chain in a sentence: what it computes, its id, width, kind and build.
pub fn chain_phrase(record: &ChainRecord) -> String {
    let width = grouped(record.bits);
    let article = match width.as_str() {
        "11" | "18" => "an",
        text if text.starts_with('8') => "an",
        _ => "a",
    };
    let built = match record.built_as.name.as_str() {
        "mixed" => "of mixed build".to_owned(),
        name => format!("built as {name}"),
    };
    format!(
        "{} ({}, {article} {width}-bit {} {built})",
        record.formula(),
        record.id,
        record.kind
    )
}

/// The nets a path may be cut at: its start, or the gate its end names.
pub fn cut_on(
    netlist: &Netlist,
    topology: &Topology,
    kind: &KindTiming,
    path: &[PathStep],
) -> Option<NetId> {
    let start = path.first().map(|step| step.net);
    if let Some(net) = start.filter(|&net| topology.is_cut(net)) {
        return Some(net);
    }
    let last = path.last().map(|step| step.net);
    end_net(netlist, kind.end)
        .or(last)
        .filter(|&net| topology.is_cut(net))
}

fn lower(sentence: &str) -> String {
    let mut letters = sentence.chars();
    letters.next().map_or_else(String::new, |first| {
        first.to_lowercase().chain(letters).collect()
    })
}
