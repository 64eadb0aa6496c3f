//! The other direction: chains that are faster than anything needs them to be, and
//! what a cheaper build would save.
//!
//! Looked at are chains with time to spare that are not built as ripple. A saving
//! is a proposal, dry-run as any other, that takes fewer gate equivalents and makes
//! no kind of path longer than it is on the netlist as read. At most
//! [`MOST_SAVINGS`] chains are looked at, those with the most to spare first, for
//! each costs a pass over its fan-out.

use super::choose::rank;
use super::ground::Ground;
use super::propose::{ChainPlan, Proposal, complete, try_all};
use super::site::Site;
use crate::chain::{BuiltAs, Chain};
use std::cmp::Reverse;

/// Most chains looked at.
pub const MOST_SAVINGS: usize = 64;

/// Gate equivalents added less those removed.
pub(super) fn added(proposal: &Proposal) -> i64 {
    let estimate = &proposal.estimate;
    estimate.gate_equivalents_added as i64 - estimate.gate_equivalents_removed as i64
}

fn saves(proposal: &Proposal) -> bool {
    let estimate = &proposal.estimate;
    let kept = |change: &super::KindChange| change.after <= change.before;
    added(proposal) < 0
        && estimate.chain_after >= estimate.chain_before
        && estimate.kinds.iter().all(kept)
}

/// Notes in the plans which proposal saves gates, where one does. Chains with a
/// recommendation are left alone.
pub fn note_savings(ground: &Ground<'_>, chains: &[Chain], plans: &mut [ChainPlan]) {
    let spare = |plan: &ChainPlan| plan.slack.map_or(0, |slack| slack.ticks);
    let mut idle: Vec<usize> = (0..chains.len())
        .filter(|&i| {
            let cells = matches!(chains[i].built_as, BuiltAs::Ripple | BuiltAs::CarryCell);
            !cells && spare(&plans[i]) > 0 && plans[i].recommended.is_none()
        })
        .collect();
    idle.sort_by_key(|&i| (Reverse(spare(&plans[i])), i));
    for i in idle.into_iter().take(MOST_SAVINGS) {
        let Some(slack) = plans[i].slack else {
            continue;
        };
        let Ok(site) = Site::of(ground, &chains[i]) else {
            continue;
        };
        let tried = try_all(&site, slack.kind);
        let saving = tried.into_iter().filter(saves);
        let Some(mut best) = saving.min_by_key(|proposal| (added(proposal), rank(proposal))) else {
            continue;
        };
        let plan = &mut plans[i];
        let known = plan.proposals.iter().position(|p| p.number == best.number);
        plan.cheaper = Some(known.unwrap_or(plan.proposals.len()));
        if known.is_none() {
            complete(&site, &mut best);
            plan.proposals.push(best);
        }
    }
}
