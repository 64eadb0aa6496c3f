//! From a chain to its proposals: every candidate scheme dry-run, and the choice.
//!
//! Only chains within the margin of the longest path of their kind are planned;
//! of the others it is said why not. Both propagate conventions are tried and
//! the better kept. Deterministic: candidates in the order of the schemes.

use super::bound::{earliest, earliest_at_cost};
use super::choose::{choose, rank};
use super::dry_run::{DryRun, Estimate, KindChange, TakesOver};
use super::ground::Ground;
use super::site::Site;
use crate::chain::Chain;
use crate::netlist::Signal;
use crate::network::Propagate;
use crate::network::schemes::{Fitted, candidates_for, left_out};
use crate::timing::{DelayModel, NEVER, PathKind, Slack};

/// A scheme fitted to a chain and dry-run on its netlist.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Proposal {
    /// Number among the chain's candidates, from 1.
    pub number: usize,
    /// The scheme, its settings and its carry network.
    pub fitted: Fitted,
    /// The propagate of its leaves.
    pub propagate: Propagate,
    /// The figures.
    pub estimate: Estimate,
    /// What becomes of the longest path of the chain's kind.
    pub kind: KindChange,
    /// The path of that kind that is longest then.
    pub takes_over: Option<TakesOver>,
    /// When the carry out of each position is ready, `None` for constants.
    pub carries: Vec<Option<i32>>,
    /// Ticks above the lower bound of the chain's depth.
    pub above_bound: i32,
    /// Whether nothing else is at least as good in depth, cost and fan-in.
    pub on_front: bool,
}

impl Proposal {
    /// Whether the block or the chain's own path kind gets shorter.
    pub fn gains(&self) -> bool {
        self.kind.after < self.kind.before || self.estimate.block_after < self.estimate.block_before
    }
}

/// Why a chain was not planned.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct NotPlanned {
    /// The reason, as a clause.
    pub why: String,
    /// Its slack, where it has one.
    pub slack: Option<i32>,
}

/// What is planned for one chain.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct ChainPlan {
    /// Arrival of the latest operand bit.
    pub arrives: i32,
    /// Arrival of the latest sum or carry.
    pub leaves: i32,
    /// Arrival of the carry out of each position; `None` where no net shows it.
    pub carries: Vec<Option<i32>>,
    /// The least slack of its results, against the longest path of the kind.
    pub slack: Option<Slack>,
    /// Whether it lies on a longest path of its kind.
    pub on_longest_path: bool,
    /// Why it was not planned, if it was not.
    pub not_planned: Option<NotPlanned>,
    /// The trade-off front, least depth first.
    pub proposals: Vec<Proposal>,
    /// The best of every scheme, best first.
    pub best_of_scheme: Vec<Proposal>,
    /// The recommended one, as an index into `proposals`.
    pub recommended: Option<usize>,
    /// Why that one, or why none.
    pub reason: String,
    /// The one that saves gates while nothing needs the chain to be so fast, as an
    /// index into `proposals`.
    pub cheaper: Option<usize>,
}

/// Most chains that are planned in one netlist, the most critical first: past
/// these nobody reads the proposals one by one, and dry runs of thousands of
/// equal chains would take longer than everything else.
pub const MOST_PLANNED: usize = 256;

/// Plans the chains of a netlist, in their order.
pub fn plan_all(ground: &Ground<'_>, chains: &[Chain]) -> Vec<ChainPlan> {
    let mut plans: Vec<ChainPlan> = chains.iter().map(|chain| as_it_is(ground, chain)).collect();
    let mut order: Vec<usize> = (0..plans.len()).collect();
    order.sort_by_key(|&i| (plans[i].slack.map_or(i32::MAX, |slack| slack.ticks), i));
    for (rank, i) in order.into_iter().enumerate() {
        let now = plans[i].clone();
        plans[i] = if rank < MOST_PLANNED || ground.settings.plans_all() {
            plan_from(ground, &chains[i], now)
        } else {
            let why = format!("the {MOST_PLANNED} chains nearest to a longest path were planned");
            refuse(now, why)
        };
    }
    plans
}

/// Plans one chain.
pub fn plan(ground: &Ground<'_>, chain: &Chain) -> ChainPlan {
    plan_from(ground, chain, as_it_is(ground, chain))
}

fn refuse(mut plan: ChainPlan, why: String) -> ChainPlan {
    let slack = plan.slack.map(|slack| slack.ticks);
    plan.reason.clone_from(&why);
    plan.not_planned = Some(NotPlanned { why, slack });
    plan
}

fn plan_from(ground: &Ground<'_>, chain: &Chain, mut plan: ChainPlan) -> ChainPlan {
    let Some(slack) = plan.slack else {
        return refuse(plan, "no path leads through it to an end".to_owned());
    };
    let longest = ground
        .timing
        .kind(slack.kind)
        .map_or(0, |kind| kind.longest);
    let margin = ground.settings.margin_at(longest);
    if slack.ticks > margin {
        let (spare, kind) = (ground.timing.time(slack.ticks), slack.kind);
        let margin = ground.timing.time(margin);
        let why = format!(
            "{spare} to spare against the longest {kind} path, more than the margin of {margin}"
        );
        return refuse(plan, why);
    }
    match Site::of(ground, chain) {
        Err(refused) => refuse(plan, refused.to_string()),
        Ok(site) => {
            let tried = try_all(&site, slack.kind);
            choose(ground, &mut plan, tried, slack.kind);
            if let Some(left_out) = left_out(site.addends.a.len()) {
                plan.reason = format!("{}; {left_out}", plan.reason);
            }
            for proposal in plan.proposals.iter_mut().chain(&mut plan.best_of_scheme) {
                complete(&site, proposal);
            }
            plan
        }
    }
}

/// The chain as it is, with no plan for it.
pub fn as_it_is(ground: &Ground<'_>, chain: &Chain) -> ChainPlan {
    let at = |signal: &Signal| ground.timing.arrivals.at(signal.net);
    let bits = chain.positions.iter().flat_map(|p| [p.a, p.b]);
    let operands = bits.chain([chain.carry_in]).filter_map(|bit| bit.signal());
    let arrives = operands.filter_map(|signal| at(&signal)).max().unwrap_or(0);
    let results = || {
        chain
            .positions
            .iter()
            .flat_map(|position| position.sums.iter().chain(&position.carries))
    };
    let carries = chain
        .positions
        .iter()
        .map(|position| position.carries.iter().filter_map(at).min());
    let mut slack: Option<Slack> = None;
    for signal in results() {
        if let Some(found) = ground.timing.slack(signal.net)
            && slack.is_none_or(|least| found.ticks < least.ticks)
        {
            slack = Some(found);
        }
    }
    ChainPlan {
        arrives,
        leaves: results().filter_map(at).max().unwrap_or(0),
        carries: carries.collect(),
        slack,
        on_longest_path: slack.is_some_and(|slack| slack.ticks == 0),
        not_planned: None,
        proposals: Vec::new(),
        best_of_scheme: Vec::new(),
        recommended: None,
        reason: String::new(),
        cheaper: None,
    }
}

/// Every candidate with the better of the two propagates, in order.
pub(super) fn try_all(site: &Site<'_>, kind: PathKind) -> Vec<Proposal> {
    let fitted = candidates_for(&site.profile());
    let bound = lower_bound(site);
    let mut proposals = Vec::with_capacity(fitted.len());
    for (i, fitted) in fitted.into_iter().enumerate() {
        let number = i + 1;
        let best = [Propagate::Or, Propagate::Xor]
            .into_iter()
            .filter_map(|propagate| {
                let run = DryRun::of(site, &fitted.network, propagate);
                let estimate = run.estimate().clone();
                let kind = estimate.kinds.iter().find(|each| each.kind == kind)?;
                Some(Proposal {
                    number,
                    kind: *kind,
                    above_bound: estimate.chain_after - bound,
                    propagate,
                    estimate,
                    fitted: fitted.clone(),
                    takes_over: None,
                    carries: Vec::new(),
                    on_front: false,
                })
            })
            .min_by_key(rank);
        proposals.extend(best);
    }
    proposals
}

/// What only listed proposals need.
pub(super) fn complete(site: &Site<'_>, proposal: &mut Proposal) {
    let run = DryRun::of(site, &proposal.fitted.network, proposal.propagate);
    proposal.takes_over = run.takes_over(proposal.kind.kind);
    proposal.carries = run.carry_arrivals();
}

/// The lower bound of the chain's depth: its highest needed result depends on
/// every operand bit up to there.
fn lower_bound(site: &Site<'_>) -> i32 {
    let highest = site.needed.iter().map(|needed| needed.role.position).max();
    let upto = highest.map_or(0, |position| position + 1);
    let mut nets: Vec<_> = site.addends.a[..upto]
        .iter()
        .chain(&site.addends.b[..upto])
        .chain(&site.addends.carry_in)
        .filter_map(|&literal| site.base.net_of(literal))
        .collect();
    nets.sort_unstable();
    nets.dedup();
    let arrivals: Vec<i32> = nets
        .into_iter()
        .map(|net| site.arrival(net))
        .filter(|&time| time != NEVER)
        .collect();
    let (model, widest) = (site.ground.settings.model, site.ground.settings.gate_inputs);
    match model {
        DelayModel::Unit => earliest(&arrivals, widest),
        DelayModel::Pairs => earliest(&arrivals, 2),
        _ => earliest_at_cost(&arrivals, widest, |inputs| model.least_delay(inputs)),
    }
}
