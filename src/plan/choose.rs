//! Which proposals are listed and which one is recommended.
//!
//! Listed is the trade-off front: what nothing else equals or beats in block
//! depth, depth of the chain's own path kind, chain depth, gate equivalents
//! added and largest fan-in at once. Recommended is the cheapest that takes
//! carry off the longest path of its kind; else the cheapest within one level of
//! the best reachable depth; none when nothing is gained.

use super::ground::Ground;
use super::propose::{ChainPlan, Proposal};
use crate::timing::PathKind;

/// The order of "best": block depth, depth of the kind, chain depth, gates,
/// fan-in, number.
pub(super) fn rank(proposal: &Proposal) -> (i32, i32, i32, usize, usize, usize) {
    let estimate = &proposal.estimate;
    (
        estimate.block_after,
        proposal.kind.after,
        estimate.chain_after,
        estimate.gates_added,
        estimate.largest_fan_in,
        proposal.number,
    )
}

/// The order of "cheapest": gate equivalents, then as [`rank`].
fn cost(proposal: &Proposal) -> (usize, (i32, i32, i32, usize, usize, usize)) {
    (proposal.estimate.gate_equivalents_added, rank(proposal))
}

/// Fills in the proposals of `plan` from all that were tried.
pub(super) fn choose(
    ground: &Ground<'_>,
    plan: &mut ChainPlan,
    mut tried: Vec<Proposal>,
    kind: PathKind,
) {
    tried.sort_by_key(rank);
    mark_front(&mut tried);
    for proposal in &tried {
        let scheme = proposal.fitted.scheme;
        let known = |best: &Proposal| best.fitted.scheme == scheme;
        if !plan.best_of_scheme.iter().any(known) {
            plan.best_of_scheme.push(proposal.clone());
        }
    }
    let (chosen, reason) = recommend(ground, &tried, kind);
    plan.reason = reason;
    for (i, proposal) in tried.into_iter().enumerate() {
        let recommended = chosen == Some(i);
        if recommended {
            plan.recommended = Some(plan.proposals.len());
        }
        if proposal.on_front || recommended {
            plan.proposals.push(proposal);
        }
    }
}

/// Marks the front among proposals in the order of [`rank`].
fn mark_front(tried: &mut [Proposal]) {
    let measures: Vec<[i64; 5]> = tried
        .iter()
        .map(|proposal| {
            let estimate = &proposal.estimate;
            [
                i64::from(estimate.block_after),
                i64::from(proposal.kind.after),
                i64::from(estimate.chain_after),
                estimate.gate_equivalents_added as i64,
                estimate.largest_fan_in as i64,
            ]
        })
        .collect();
    for (i, proposal) in tried.iter_mut().enumerate() {
        let mine = measures[i];
        let beaten = measures.iter().enumerate().any(|(j, other)| {
            let no_worse = other.iter().zip(mine).all(|(&theirs, own)| theirs <= own);
            j != i && no_worse && (*other != mine || j < i)
        });
        proposal.on_front = !beaten && improves(proposal);
    }
}

/// Whether a proposal is better than today in anything: depth or cost.
fn improves(proposal: &Proposal) -> bool {
    let estimate = &proposal.estimate;
    proposal.gains()
        || estimate.chain_after < estimate.chain_before
        || estimate.gate_equivalents_added < estimate.gate_equivalents_removed
}

fn recommend(ground: &Ground<'_>, tried: &[Proposal], kind: PathKind) -> (Option<usize>, String) {
    let unit = ground.settings.model.unit_word();
    let gaining: Vec<usize> = (0..tried.len()).filter(|&i| tried[i].gains()).collect();
    let cheapest = |list: &[usize]| list.iter().copied().min_by_key(|&i| cost(&tried[i]));
    let off: Vec<usize> = gaining
        .iter()
        .copied()
        .filter(|&i| !tried[i].kind.chain_is_on_it())
        .collect();
    if let Some(i) = cheapest(&off) {
        let after = ground.settings.model.time(tried[i].kind.after);
        let reason = format!(
            "the cheapest that takes carry off the longest {kind} path, which is {after} {unit} then"
        );
        return (Some(i), reason);
    }
    let depth = |i: &usize| (tried[*i].estimate.block_after, tried[*i].kind.after);
    let Some((block, own)) = gaining.iter().map(depth).min() else {
        return (None, nothing_gained(ground, tried, kind));
    };
    let level = ground.settings.model.level();
    let near: Vec<usize> = gaining
        .iter()
        .copied()
        .filter(|i| {
            let (its_block, its_own) = depth(i);
            its_block <= block + level && its_own <= own + level
        })
        .collect();
    let chosen = cheapest(&near);
    let reason = chosen.map_or_else(String::new, |i| {
        let model = ground.settings.model;
        let (after, own) = (model.time(tried[i].kind.after), model.time(own));
        if after == own {
            format!("the cheapest at the best reachable {kind} depth, {own} {unit}")
        } else {
            format!(
                "the cheapest within one level of the best reachable {kind} depth: {after} {unit}, the best is {own}"
            )
        }
    });
    (chosen, reason)
}

fn nothing_gained(ground: &Ground<'_>, tried: &[Proposal], kind: PathKind) -> String {
    let unit = ground.settings.model.unit_word();
    let longest = ground.timing.kind(kind).map_or(0, |kind| kind.longest);
    let shorter = tried
        .iter()
        .any(|proposal| proposal.kind.through < Some(longest));
    let longest = ground.timing.time(longest);
    if shorter {
        format!("another {kind} path of {longest} {unit} stays, whatever this chain is built as")
    } else {
        format!("no scheme shortens the {longest} {unit} of the longest {kind} path")
    }
}
