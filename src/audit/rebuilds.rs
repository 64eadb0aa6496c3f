//! Plans into the record: proposals, and the set to take.
//!
//! The set holds one proposal, the one that brings the block lowest (then the
//! cheapest): each estimate is a dry run of one chain on the netlist as read,
//! and what two of them do together is not the sum of what each does. Further
//! chains with a recommendation of their own are named, without a figure.

use super::chains::id;
use super::record::{ChainRecord, Change, NotPlanned, ProposalRecord, RecommendedSet};
use super::shape;
use super::words::{counted, depth_in, grouped};
use crate::chain::Chain;
use crate::netlist::{Netlist, Topology};
use crate::plan::{self, ChainPlan, Ground, KindChange, Proposal, Settings};
use crate::timing::{DelayModel, Timing};

/// Chains whose recommendation is tried under the other delay models.
const CHAINS_UNDER_OTHER_MODELS: usize = 16;

/// Why a chain was not planned.
pub fn not_planned(timing: &Timing, plan: &ChainPlan) -> Option<NotPlanned> {
    plan.not_planned.as_ref().map(|reason| NotPlanned {
        why: reason.why.clone(),
        slack: reason.slack.map(|slack| timing.time(slack)),
    })
}

/// The proposals of one chain.
pub fn proposals(netlist: &Netlist, timing: &Timing, plan: &ChainPlan) -> Vec<ProposalRecord> {
    let chosen = |index| plan.recommended == Some(index);
    plan.proposals
        .iter()
        .enumerate()
        .map(|(index, proposal)| {
            let reason = chosen(index).then(|| plan.reason.clone());
            proposal_record(netlist, timing, index, proposal, reason)
        })
        .collect()
}

fn proposal_record(
    netlist: &Netlist,
    timing: &Timing,
    index: usize,
    proposal: &Proposal,
    reason: Option<String>,
) -> ProposalRecord {
    let estimate = &proposal.estimate;
    let fitted = &proposal.fitted;
    let recommended = reason.is_some();
    let change = |before: i32, after: i32| Change {
        before: timing.time(before),
        after: timing.time(after),
    };
    let takes_over = proposal.takes_over.map(|path| {
        let way = if path.through_chain {
            "through the chain still"
        } else {
            "beside the chain"
        };
        let end = path.end.describe(netlist);
        format!("{} to {end}, {way}", path.kind)
    });
    let arrivals = proposal
        .carries
        .iter()
        .map(|at| at.map(|at| timing.time(at)));
    ProposalRecord {
        id: format!("P{}", index + 1),
        scheme: fitted.scheme.to_owned(),
        group: fitted.group.map(|group| group as u64),
        levels: fitted.levels as u64,
        valency: fitted.valency as u64,
        select_end: fitted.select_end,
        on_front: proposal.on_front,
        recommended,
        reason,
        holds_under: Vec::new(),
        chain_depth: change(estimate.chain_before, estimate.chain_after),
        block_depth: change(estimate.block_before, estimate.block_after),
        takes_over,
        gates_added: estimate.gates_added as u64,
        gates_removed: estimate.gates_removed as u64,
        gate_equivalents_added: estimate.gate_equivalents_added as i64
            - estimate.gate_equivalents_removed as i64,
        largest_fan_in: estimate.largest_fan_in as u64,
        largest_fan_out: estimate.largest_fan_out as u64,
        wire_tracks: fitted
            .network
            .is_prefix()
            .then(|| fitted.network.wire_tracks() as u64),
        above_bound: Some(timing.time(proposal.above_bound)),
        carries: recommended.then(|| arrivals.collect()),
        network: recommended.then(|| shape::lines(&fitted.network)),
    }
}

/// The set to take, from the records of all chains.
pub fn recommended_set(
    records: &[ChainRecord],
    plans: &[ChainPlan],
    timing: &Timing,
    unit: &str,
) -> RecommendedSet {
    let chosen: Vec<(&ChainRecord, &ProposalRecord, Option<KindChange>)> = records
        .iter()
        .zip(plans)
        .filter_map(|(chain, plan)| {
            let proposal = chain.proposals.iter().find(|p| p.recommended)?;
            let own = plan.recommended.map(|index| plan.proposals[index].kind);
            Some((chain, proposal, own))
        })
        .collect();
    let best = chosen.iter().min_by_key(|(_, proposal, own)| {
        let own = own.map_or(0, |kind| kind.after - kind.before);
        let cost = proposal.gate_equivalents_added;
        (proposal.block_depth.after, own, cost)
    });
    let Some(&(chain, proposal, own)) = best else {
        return RecommendedSet {
            proposals: Vec::new(),
            block_depth: Change {
                before: timing.time(timing.longest()),
                after: timing.time(timing.longest()),
            },
            sentence: no_set_sentence(records, plans),
        };
    };
    let name =
        |chain: &ChainRecord, proposal: &ProposalRecord| format!("{}/{}", chain.id, proposal.id);
    let Change { before, after } = proposal.block_depth;
    let block = match own {
        Some(kind) if after >= before && kind.after < kind.before => format!(
            "the longest {} path goes from {} to {}, while the block stays as deep as it is",
            kind.kind,
            timing.time(kind.before),
            depth_in(timing.time(kind.after), unit)
        ),
        _ => format!("the block goes from {before} to {}", depth_in(after, unit)),
    };
    let others: Vec<_> = chosen
        .iter()
        .filter(|(other, ..)| other.id != chain.id)
        .collect();
    let others = match others.len() {
        0 => String::new(),
        1 => format!(
            " {} has a gain of its own; what both bring together is not estimated.",
            name(others[0].0, others[0].1)
        ),
        n => format!(
            " {} have a gain of their own; what they bring together is not estimated.",
            counted(n as u64, "more chain", "more chains")
        ),
    };
    RecommendedSet {
        proposals: vec![name(chain, proposal)],
        block_depth: proposal.block_depth,
        sentence: format!(
            "Rebuild {} as {} ({}): {block}, for {} built and {} removed.{others}",
            chain.id,
            scheme_phrase(proposal),
            name(chain, proposal),
            counted(proposal.gates_added, "gate", "gates"),
            grouped(proposal.gates_removed),
        ),
    }
}

/// The scheme with its group size, for a sentence.
pub fn scheme_phrase(proposal: &ProposalRecord) -> String {
    match proposal.group {
        Some(group) => format!("{} in groups of {group}", proposal.scheme),
        None => proposal.scheme.clone(),
    }
}

fn no_set_sentence(records: &[ChainRecord], plans: &[ChainPlan]) -> String {
    let Some(first) = records.first() else {
        return "There is no proven chain to rebuild.".to_owned();
    };
    let planned = plans.iter().position(|plan| plan.not_planned.is_none());
    match planned {
        None if records.len() == 1 => {
            format!("No rebuild is recommended; {} was not planned.", first.id)
        }
        None => "No rebuild is recommended; no chain was planned.".to_owned(),
        Some(index) => format!(
            "No rebuild is recommended. {}: {}.",
            id(index),
            plans[index].reason
        ),
    }
}

/// Notes for each recommended proposal under which delay models the same scheme
/// is chosen.
pub fn note_models(
    netlist: &Netlist,
    topology: &Topology,
    settings: &Settings,
    chains: &[Chain],
    records: &mut [ChainRecord],
) {
    let mut chosen: Vec<(usize, usize)> = Vec::new();
    for (index, chain) in records.iter_mut().enumerate() {
        if let Some(at) = chain.proposals.iter().position(|p| p.recommended) {
            chain.proposals[at]
                .holds_under
                .push(settings.model.name().to_owned());
            chosen.push((index, at));
        }
    }
    chosen.truncate(CHAINS_UNDER_OTHER_MODELS);
    if chosen.is_empty() {
        return;
    }
    for model in DelayModel::ALL {
        if model == settings.model {
            continue;
        }
        let timing = Timing::of(netlist, topology, model);
        let settings = Settings {
            model,
            ..settings.clone()
        };
        let ground = Ground::of(netlist, topology, &timing, &settings);
        for &(index, at) in &chosen {
            let other = plan::plan(&ground, &chains[index]);
            let Some(choice) = other.recommended.map(|i| &other.proposals[i].fitted) else {
                continue;
            };
            let proposal = &mut records[index].proposals[at];
            let group = choice.group.map(|group| group as u64);
            if proposal.scheme == choice.scheme && proposal.group == group {
                proposal.holds_under.push(model.name().to_owned());
            }
        }
    }
}
