//! One chain bit by bit: operands, arrivals, today's carries and what each is made
//! from, the best of every scheme.
//!
//! The chain is planned whatever it has to spare. "Best" is by depth of the block,
//! of the chain, gates, fan-in, then the order of the schemes. What a carry is made
//! from is read off the netlist: the carries of lower bits met first on the way back
//! from it.

use super::carried::Cones;
use super::names::wire;
use super::record::{
    BitRecord, ChainRecord, Change, Closeup, SchemeBest, Settings as SettingsRecord, Tool,
};
use super::{
    Asserting, AuditError, CAUTION, Options, Origin, chains, goals, model_fit, netlist_facts,
    settings_record,
};
use crate::chain::{self, Chain};
use crate::netlist::{Bit, NetId, Netlist, Topology};
use crate::plan::{self, ChainPlan, Ground, Settings};
use crate::timing::{Spares, Timing};
use rustc_hash::{FxHashMap, FxHashSet};

/// The record's schema.
const SCHEMA: &str = "carrywise/closeup/1";
/// Gates looked through for what one carry is made from.
const GATES_BEHIND_A_CARRY: usize = 4096;
/// Chains named when none of them was meant.
const CHAINS_NAMED: usize = 8;

/// Why there is no closeup.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
pub enum CloseupError {
    /// As for an audit.
    #[error(transparent)]
    Audit(#[from] AuditError),
    /// No chain goes by that name.
    #[error("no proven chain is called `{asked}` or has a net of that name; {known}")]
    Unknown {
        /// What was asked for.
        asked: String,
        /// What there is, as a clause.
        known: String,
    },
}

/// Looks closely at the chain that `which` names: its id, its fingerprint, or any
/// of its nets.
///
/// # Errors
/// As [`super::audit_under`], and when there is no such chain.
pub fn closeup(
    read: &Netlist,
    origin: &Origin,
    options: &Options,
    asserting: Option<&Asserting<'_>>,
    which: &str,
) -> Result<Closeup, CloseupError> {
    let settings = Settings::resolve(options.request, read).map_err(AuditError::from)?;
    let model = settings.model;
    let applied = match asserting {
        None => None,
        Some(asserting) => Some((
            asserting,
            asserting
                .assumptions
                .apply(read)
                .map_err(AuditError::from)?,
        )),
    };
    let netlist = applied.as_ref().map_or(read, |(_, under)| &under.netlist);
    let topology = Topology::of(netlist);
    let found = chain::find(netlist, &topology, options.chains);
    let chains = chains::ordered(found.chains);
    let timing = Timing::of(netlist, &topology, model);
    let settings = Settings {
        margin: Some(i32::MAX),
        ..settings
    };
    let ground = Ground::of(netlist, &topology, &timing, &settings);
    let mut plans: Vec<ChainPlan> = chains
        .iter()
        .map(|chain| plan::as_it_is(&ground, chain))
        .collect();
    let cones = Cones::of(netlist, &topology, &chains);
    let asserted = applied
        .as_ref()
        .map(|(asserting, under)| (asserting.assumptions, under));
    let asked = goals::asked(netlist, asserted, options.target_depth, model);
    let spares = Spares::of(netlist, &topology, &timing, &asked);
    let sources = chains::Sources::of(netlist, &topology, &timing, &cones, &chains, &spares);
    let named = sources.records(&chains, &plans);
    let index = find(&named, netlist, &chains, which)?;
    let chain = &chains[index];
    plans[index] = plan::plan(&ground, chain);
    let mut records = sources.records(&chains, &plans);
    let record = records.swap_remove(index);
    let plan = &plans[index];
    let schemes = schemes(&timing, plan);
    Ok(Closeup {
        schema: SCHEMA.to_owned(),
        tool: Tool {
            name: env!("CARGO_PKG_NAME").to_owned(),
            version: env!("CARGO_PKG_VERSION").to_owned(),
        },
        netlist: netlist_facts(netlist, origin),
        settings: SettingsRecord {
            assumptions_sha256: asserting.map(|asserting| asserting.sha256.clone()),
            ..settings_record(&settings, options, model_fit::misfit(read, model))
        },
        block_depth: timing.time(timing.longest()),
        unit: model.unit_word().to_owned(),
        bits: bits(netlist, &topology, &timing, chain, plan),
        chain: record,
        schemes,
        reason: plan.reason.clone(),
        caution: CAUTION.to_owned(),
    })
}

/// The chain meant.
fn find(
    records: &[ChainRecord],
    netlist: &Netlist,
    chains: &[Chain],
    which: &str,
) -> Result<usize, CloseupError> {
    let exact = records
        .iter()
        .position(|record| record.id == which || record.fingerprint == which);
    let of_net = || {
        let is_it = |net: NetId| netlist.net_name(net) == which;
        chains.iter().position(|chain| nets(chain).any(is_it))
    };
    exact.or_else(of_net).ok_or_else(|| CloseupError::Unknown {
        asked: which.to_owned(),
        known: match records.len() {
            0 => "no chain was proven".to_owned(),
            n => {
                let ids = records.iter().take(CHAINS_NAMED).map(|r| r.id.clone());
                let mut ids: Vec<String> = ids.collect();
                if n > ids.len() {
                    ids.push(format!("{} more", n - ids.len()));
                }
                format!("there are {}", super::words::listed(&ids))
            }
        },
    })
}

/// Results first, so that a net between two chains names the one that makes it.
fn nets(chain: &Chain) -> impl Iterator<Item = NetId> + '_ {
    let positions = || chain.positions.iter();
    let results = positions().flat_map(|p| p.sums.iter().chain(&p.carries).copied());
    let operands = positions().flat_map(|p| [p.a, p.b]);
    let operands = operands.chain([chain.carry_in]).filter_map(Bit::signal);
    results.chain(operands).map(|signal| signal.net)
}

fn bits(
    netlist: &Netlist,
    topology: &Topology,
    timing: &Timing,
    chain: &Chain,
    plan: &ChainPlan,
) -> Vec<BitRecord> {
    let arrives = |bit: Bit| timing.arrivals.at(bit.signal()?.net);
    let time = |at: Option<i32>| at.map(|at| timing.time(at));
    let best = plan.recommended.map(|index| &plan.proposals[index]);
    let best = best.or(plan.best_of_scheme.first());
    let mut level_of: FxHashMap<NetId, usize> = FxHashMap::default();
    for (bit, position) in chain.positions.iter().enumerate() {
        for carry in &position.carries {
            level_of.entry(carry.net).or_insert(bit);
        }
    }
    let sources = |bit: usize| made_from(netlist, topology, chain, &level_of, bit);
    chain
        .positions
        .iter()
        .enumerate()
        .map(|(i, position)| {
            let earliest = |signals: &[crate::netlist::Signal]| {
                let times = signals.iter().map(|s| timing.arrivals.at(s.net));
                times.flatten().min()
            };
            let name = |signals: &[crate::netlist::Signal]| {
                signals.first().map(|&s| wire(netlist, Bit::Signal(s)))
            };
            BitRecord {
                bit: i as u64,
                operands: [position.a, position.b]
                    .iter()
                    .map(|&bit| wire(netlist, bit))
                    .collect(),
                arrive: time(arrives(position.a).max(arrives(position.b))),
                sum: name(&position.sums),
                sum_arrives: time(earliest(&position.sums)),
                carry: name(&position.carries),
                carry_arrives: time(earliest(&position.carries)),
                made_from: sources(i),
                carry_then: best.and_then(|best| time(best.carries.get(i).copied().flatten())),
            }
        })
        .collect()
}

/// The lower carries met first on the way back from the carry out of `bit`, lowest
/// first; `None` where no net shows the carry or the way is too long to walk.
fn made_from(
    netlist: &Netlist,
    topology: &Topology,
    chain: &Chain,
    level_of: &FxHashMap<NetId, usize>,
    bit: usize,
) -> Option<Vec<i64>> {
    let start = chain.positions[bit].carries.first()?.net;
    let below = chain.carry_in.signal().map(|signal| signal.net);
    let operands: FxHashSet<NetId> = chain.positions[..=bit]
        .iter()
        .flat_map(|p| [p.a, p.b])
        .filter_map(|bit| Some(bit.signal()?.net))
        .collect();
    let mut seen = FxHashSet::default();
    let mut found = Vec::new();
    let mut stack = vec![start];
    while let Some(net) = stack.pop() {
        if !seen.insert(net) || operands.contains(&net) {
            continue;
        }
        if seen.len() > GATES_BEHIND_A_CARRY {
            return None;
        }
        if net != start {
            if Some(net) == below {
                found.push(-1);
                continue;
            }
            if let Some(&lower) = level_of.get(&net)
                && lower < bit
            {
                found.push(lower as i64);
                continue;
            }
        }
        if topology.is_cut(net) {
            continue;
        }
        if let crate::netlist::Driver::Gate(gate) = netlist.driver(net) {
            stack.extend(netlist.fan_ins(gate));
        }
    }
    found.sort_unstable();
    found.dedup();
    Some(found)
}

fn schemes(timing: &Timing, plan: &ChainPlan) -> Vec<SchemeBest> {
    let change = |before: i32, after: i32| Change {
        before: timing.time(before),
        after: timing.time(after),
    };
    let mut best: Vec<&plan::Proposal> = plan.best_of_scheme.iter().collect();
    // The recommended one is told too, where its scheme has a faster one.
    if let Some(index) = plan.recommended {
        let own = &plan.proposals[index];
        let depths = |each: &plan::Proposal| (each.estimate.block_after, each.estimate.chain_after);
        if best.iter().all(|each| each.number != own.number) {
            let at = best.iter().position(|each| depths(each) > depths(own));
            best.insert(at.unwrap_or(best.len()), own);
        }
    }
    let rows = best.into_iter().map(|best| {
        let estimate = &best.estimate;
        let listed = plan.proposals.iter().position(|p| p.number == best.number);
        SchemeBest {
            proposal: listed.map(|index| format!("P{}", index + 1)),
            recommended: listed.is_some() && listed == plan.recommended,
            scheme: best.fitted.scheme.to_owned(),
            group: best.fitted.group.map(|group| group as u64),
            levels: best.fitted.levels as u64,
            valency: best.fitted.valency as u64,
            chain_depth: change(estimate.chain_before, estimate.chain_after),
            block_depth: change(estimate.block_before, estimate.block_after),
            gates_added: estimate.gates_added as u64,
            gates_removed: estimate.gates_removed as u64,
            gate_equivalents_added: estimate.gate_equivalents_added as i64
                - estimate.gate_equivalents_removed as i64,
            largest_fan_in: estimate.largest_fan_in as u64,
            largest_fan_out: estimate.largest_fan_out as u64,
            above_bound: timing.time(best.above_bound),
        }
    });
    rows.collect()
}
