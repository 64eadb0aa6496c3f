//! Plans into the record: proposals, and the set to take.
//!
//! The figures of the set are those of all its members dry-run together; what two
//! rebuilds do together is not the sum of what each does. Chains with a
//! recommendation for a path of another kind are named besides.

use super::chains::id;
use super::record::{ChainRecord, Change, NotPlanned, ProposalRecord, RecommendedSet};
use super::shape;
use super::words::{counted, depth_in, grouped, listed};
use crate::chain::Chain;
use crate::netlist::{Netlist, Topology};
use crate::plan::{self, ChainPlan, Proposal, Settings, TakesOver, Together};
use crate::timing::Timing;

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
    let takes_over = proposal
        .takes_over
        .map(|path| path_taking_over(netlist, path));
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
        flips_under: Vec::new(),
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
    netlist: &Netlist,
    records: &[ChainRecord],
    plans: &[ChainPlan],
    together: Option<&Together>,
    timing: &Timing,
    unit: &str,
) -> RecommendedSet {
    let change = |before: i32, after: i32| Change {
        before: timing.time(before),
        after: timing.time(after),
    };
    let Some(set) = together else {
        return RecommendedSet {
            proposals: Vec::new(),
            block_depth: change(timing.longest(), timing.longest()),
            path_kind: None,
            kind_depth: None,
            gates_added: 0,
            gates_removed: 0,
            gate_equivalents_added: 0,
            largest_fan_in: 0,
            largest_fan_out: 0,
            takes_over: None,
            chains_left: Vec::new(),
            sentence: no_set_sentence(records, plans),
        };
    };
    let whole = &set.estimate.whole;
    let mut set_record = RecommendedSet {
        proposals: Vec::new(),
        block_depth: change(whole.block_before, whole.block_after),
        path_kind: Some(set.kind.to_string()),
        kind_depth: Some(change(set.before, set.after)),
        gates_added: whole.gates_added as u64,
        gates_removed: whole.gates_removed as u64,
        gate_equivalents_added: set.estimate.cost(),
        largest_fan_in: whole.largest_fan_in as u64,
        largest_fan_out: whole.largest_fan_out as u64,
        takes_over: set.takes_over.map(|path| path_taking_over(netlist, path)),
        chains_left: set.chains_left.iter().map(|&chain| id(chain)).collect(),
        sentence: String::new(),
    };
    let members: Vec<_> = set
        .members
        .iter()
        .map(|&(chain, proposal)| (&records[chain], &records[chain].proposals[proposal]))
        .collect();
    let name =
        |chain: &ChainRecord, proposal: &ProposalRecord| format!("{}/{}", chain.id, proposal.id);
    set_record.proposals = members.iter().map(|(c, p)| name(c, p)).collect();
    let block = if whole.block_after < whole.block_before {
        let Change { before, after } = set_record.block_depth;
        format!("the block goes from {before} to {}", depth_in(after, unit))
    } else {
        format!(
            "the longest {} path goes from {} to {}, while the block stays as deep as it is",
            set.kind,
            timing.time(set.before),
            depth_in(timing.time(set.after), unit)
        )
    };
    let how: Vec<String> = members
        .iter()
        .take(MEMBERS_TOLD)
        .map(|(c, p)| format!("{} as {} ({})", c.id, scheme_phrase(p), name(c, p)))
        .chain(more_chains(members.len()))
        .collect();
    let (as_one, alone) = match members.len() {
        1 => ("", ""),
        2 if set.none_alone => (" together", " Neither gains anything alone."),
        _ if set.none_alone => (" together", " None of them gains anything alone."),
        _ => (" together", ""),
    };
    let others: Vec<String> = records
        .iter()
        .enumerate()
        .filter(|(chain, _)| set.members.iter().all(|(member, _)| member != chain))
        .filter_map(|(_, chain)| {
            let own = chain.proposals.iter().find(|p| p.recommended)?;
            Some(name(chain, own))
        })
        .collect();
    let others = match others.len() {
        0 => String::new(),
        1 => format!(
            " Besides, {} shortens the longest path of another kind.",
            others[0]
        ),
        n => format!(
            " Besides, {} could be rebuilt to shorten the longest paths of other kinds.",
            counted(n as u64, "more chain", "more chains")
        ),
    };
    let stopped = if set.stopped {
        " The search for a cheaper or faster set ended at its limit of work."
    } else {
        ""
    };
    set_record.sentence = format!(
        "Rebuild {}{as_one}: {block}, for {} built and {} removed.{alone}{others}{stopped}",
        listed(&how),
        counted(set_record.gates_added, "gate", "gates"),
        grouped(set_record.gates_removed),
    );
    set_record
}

/// Members of a set that are told one by one in a sentence.
pub const MEMBERS_TOLD: usize = 6;

/// The members that are not.
pub fn more_chains(members: usize) -> Option<String> {
    let more = members.checked_sub(MEMBERS_TOLD).filter(|&more| more > 0)?;
    Some(counted(more as u64, "more chain", "more chains"))
}

fn path_taking_over(netlist: &Netlist, path: TakesOver) -> String {
    let way = if path.through_chain {
        "through the chain still"
    } else {
        "beside the chain"
    };
    let end = path.end.describe(netlist);
    format!("{} to {end}, {way}", path.kind)
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

/// Notes for each recommended proposal under which delay models it stays the choice.
pub fn note_models(
    netlist: &Netlist,
    topology: &Topology,
    settings: &Settings,
    chains: &[Chain],
    plans: &[ChainPlan],
    records: &mut [ChainRecord],
) {
    let answers = plan::holds_under(netlist, topology, settings, chains, plans);
    for (chain, answer) in records.iter_mut().zip(answers) {
        let proposal = chain.proposals.iter_mut().find(|p| p.recommended);
        if let (Some(proposal), Some(answer)) = (proposal, answer) {
            let words = |models: Vec<&str>| models.into_iter().map(str::to_owned).collect();
            proposal.holds_under = words(answer.holds);
            proposal.flips_under = words(answer.flips);
        }
    }
}
