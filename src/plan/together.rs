//! The choice over chains in parallel and in series.
//!
//! Chains in parallel must all get faster before a block does, and of chains in
//! series one may be enough, so what single plans say does not add up. Progress is
//! ordered by depth, then by the number of ends at that depth: of two equal chains
//! in parallel the first rebuild lowers only the second figure, and is a step all
//! the same. Recommended is the cheapest set found that takes carry off the longest
//! path; else the cheapest within one level of the best depth found; none when no
//! set gains. Every set is a dry run of all its gates ([`super::set_run`]).
//!
//! The search is greedy and bounded by a fixed amount of work, never by time: all
//! chains on a longest path at once, round by round; then one at a time, each the
//! best step; then cheaper proposals, and leaving chains out, while the goal holds.
//! A chain may take the best of every scheme, also what gains nothing on the
//! netlist as read: behind a chain that gets faster it may.

use super::choose::rank;
use super::dry_run::TakesOver;
use super::ground::Ground;
use super::propose::{ChainPlan, Proposal};
use super::saving::added;
use super::set_run::{SetEstimate, SetRun, depth_by_itself};
use super::set_site::{MOST_TOGETHER, SetSite};
use super::trace::{Results, chains_on_longest};
use crate::chain::Chain;
use crate::timing::PathKind;
use std::cmp::Reverse;
use std::collections::BTreeMap;

/// Rounds in which all chains on a longest path join the set.
const ROUNDS: usize = 8;
/// Single steps.
const STEPS: usize = 32;
/// Chains tried at one single step.
const TRIED_AT_A_STEP: usize = 4;
/// Rounds of making the set cheaper.
const CHEAPER_ROUNDS: usize = 3;
/// Work allowed, in pins and nodes passed, beside [`WORK_PER_GATE`].
const WORK: usize = 40_000_000;
/// Work allowed for each gate of the netlist.
const WORK_PER_GATE: usize = 100;
/// What looking at a set costs in terms of one pass over it.
const SITE_PASSES: usize = 12;

/// Which proposal of its pool is taken for which chain.
type Choice = BTreeMap<usize, usize>;

/// What a chain may take.
struct Pool {
    proposals: Vec<Proposal>,
    /// The fastest on the netlist as read.
    first: usize,
    /// The fastest if all operands were ready together.
    fastest: usize,
    /// That of the fewest gates.
    cheapest: usize,
}

impl Pool {
    fn of(ground: &Ground<'_>, chain: &Chain, plan: &ChainPlan) -> Option<Self> {
        let mut proposals = plan.proposals.clone();
        for best in &plan.best_of_scheme {
            if proposals.iter().all(|known| known.number != best.number) {
                proposals.push(best.clone());
            }
        }
        let order = || 0..proposals.len();
        let first = order().min_by_key(|&i| rank(&proposals[i]))?;
        let alone = |i: &usize| {
            let proposal = &proposals[*i];
            let depth =
                depth_by_itself(ground, chain, &proposal.fitted.network, proposal.propagate);
            (depth, added(proposal))
        };
        let fastest = order().map(|i| (alone(&i), i)).min()?.1;
        let cheapest = order().min_by_key(|&i| added(&proposals[i]))?;
        Some(Self {
            proposals,
            first,
            fastest,
            cheapest,
        })
    }

    /// What is tried at a single step.
    fn tried(&self) -> Vec<usize> {
        let mut list = vec![self.first];
        for option in [self.fastest, self.cheapest] {
            if !list.contains(&option) {
                list.push(option);
            }
        }
        list
    }
}

/// A recommended set.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Together {
    /// The kind of path that it shortens; of several of one length the first.
    pub kind: PathKind,
    /// Chain and proposal of each member, as indices, by chain.
    pub members: Vec<(usize, usize)>,
    /// Its figures.
    pub estimate: SetEstimate,
    /// By member, when the carry out of each position is ready then.
    pub carries: Vec<Vec<Option<i32>>>,
    /// The longest path of the kinds in question today.
    pub before: i32,
    /// And with the set.
    pub after: i32,
    /// What that path is then.
    pub takes_over: Option<TakesOver>,
    /// Chains that lie on it still.
    pub chains_left: Vec<usize>,
    /// Whether no member gains anything by itself.
    pub none_alone: bool,
    /// Why this set, as a clause.
    pub reason: String,
    /// Whether the search ended because its work was spent.
    pub stopped: bool,
}

/// Chooses the set for the planned chains; `None` when none gains. Plans and
/// chains are in the same order. The plans are told: what is recommended is in the
/// set, or shortens another kind of path.
pub fn choose_together(
    ground: &Ground<'_>,
    chains: &[Chain],
    plans: &mut [ChainPlan],
) -> Option<Together> {
    let pools: Vec<Option<Pool>> = chains
        .iter()
        .zip(plans.iter())
        .map(|(chain, plan)| Pool::of(ground, chain, plan))
        .collect();
    if pools.iter().all(Option::is_none) {
        return None;
    }
    let mut search = Search {
        ground,
        chains,
        pools,
        own: plans.iter().map(|plan| plan.recommended).collect(),
        results: Results::of(chains),
        target: Vec::new(),
        site: None,
        known: BTreeMap::new(),
        work: WORK.saturating_add(WORK_PER_GATE.saturating_mul(ground.netlist.gate_count())),
        stopped: false,
    };
    let mut found = search.targets().into_iter().find_map(|target| {
        search.target = target;
        search.known.clear();
        search.find()
    })?;
    let kinds = search.target.clone();
    for (chain, option) in &mut found.members {
        let taken = search.proposal((chain, option));
        let listed = &mut plans[*chain].proposals;
        let known = listed.iter().position(|each| each.number == taken.number);
        *option = known.unwrap_or(listed.len());
        if known.is_none() {
            listed.push(taken.clone());
        }
    }
    tell(plans, &found, &kinds);
    Some(found)
}

/// Marks the set in the plans.
fn tell(plans: &mut [ChainPlan], found: &Together, kinds: &[PathKind]) {
    for (chain, plan) in plans.iter_mut().enumerate() {
        let member = found.members.iter().position(|(each, _)| *each == chain);
        if let Some(member) = member {
            let (_, proposal) = found.members[member];
            plan.proposals[proposal]
                .carries
                .clone_from(&found.carries[member]);
            if plan.recommended != Some(proposal) {
                plan.recommended = Some(proposal);
                plan.reason.clone_from(&found.reason);
            }
        } else if plan.recommended.is_some()
            && plan.slack.is_some_and(|slack| kinds.contains(&slack.kind))
        {
            plan.recommended = None;
            plan.reason = "the recommended set does not need it".to_owned();
        }
    }
}

/// A choice tried.
#[derive(Clone)]
struct Outcome {
    choice: Choice,
    estimate: SetEstimate,
    /// The longest path of the target kinds, and the ends there.
    after: i32,
    ends: usize,
    /// By chain: its nets on a longest path.
    on: BTreeMap<usize, usize>,
    takes_over: Option<TakesOver>,
    carries: Vec<Vec<Option<i32>>>,
}

impl Outcome {
    fn progress(&self) -> (i32, usize, i32) {
        (self.after, self.ends, self.estimate.whole.block_after)
    }
}

struct Search<'g, 'p> {
    ground: &'g Ground<'g>,
    chains: &'p [Chain],
    /// By chain: what it may take; none where it is not planned.
    pools: Vec<Option<Pool>>,
    /// By chain: what its own plan recommends.
    own: Vec<Option<usize>>,
    results: Results,
    target: Vec<PathKind>,
    /// The site of the last set of chains; most choices in a row share it.
    site: Option<(Vec<usize>, SetSite<'g>)>,
    known: BTreeMap<Choice, Option<Outcome>>,
    work: usize,
    stopped: bool,
}

impl Search<'_, '_> {
    /// What to shorten: all kinds as long as the block; else one kind, the longest
    /// first.
    fn targets(&self) -> Vec<Vec<PathKind>> {
        let mut kinds = self.ground.timing.kinds.clone();
        kinds.sort_by_key(|kind| (Reverse(kind.longest), kind.kind));
        let block = self.ground.timing.longest();
        let all: Vec<PathKind> = kinds
            .iter()
            .filter(|kind| kind.longest == block)
            .map(|kind| kind.kind)
            .collect();
        let mut targets = vec![all];
        for kind in kinds {
            let alone = vec![kind.kind];
            if !targets.contains(&alone) {
                targets.push(alone);
            }
        }
        targets
    }

    fn proposal(&self, (&chain, &option): (&usize, &usize)) -> &Proposal {
        let pool = self.pools[chain].as_ref();
        &pool.expect("only planned chains are in a set").proposals[option]
    }

    fn pool(&self, chain: usize) -> &Pool {
        self.pools[chain]
            .as_ref()
            .expect("only planned chains are in a set")
    }

    fn before(&self) -> i32 {
        let longest = |&kind| self.ground.timing.kind(kind).map(|kind| kind.longest);
        self.target.iter().filter_map(longest).max().unwrap_or(0)
    }

    /// Tries a choice; `None` when its chains do not go together or no work is left.
    fn attempt(&mut self, choice: &Choice) -> Option<Outcome> {
        if let Some(known) = self.known.get(choice) {
            return known.clone();
        }
        if self.work == 0 {
            self.stopped = true;
            return None;
        }
        let outcome = self.try_out(choice);
        self.known.insert(choice.clone(), outcome.clone());
        outcome
    }

    fn try_out(&mut self, choice: &Choice) -> Option<Outcome> {
        let members: Vec<usize> = choice.keys().copied().collect();
        if members.len() > MOST_TOGETHER {
            return None;
        }
        if self.site.as_ref().is_none_or(|(of, _)| *of != members) {
            let chains: Vec<&Chain> = members.iter().map(|&i| &self.chains[i]).collect();
            let site = SetSite::of(self.ground, &chains);
            let size = site.as_ref().map_or(0, SetSite::size);
            self.work = self.work.saturating_sub(SITE_PASSES * size + 1);
            self.site = Some((members.clone(), site.ok()?));
        }
        let (_, site) = self.site.as_ref()?;
        let networks: Vec<_> = choice
            .iter()
            .map(|each| {
                let proposal = self.proposal(each);
                (&proposal.fitted.network, proposal.propagate)
            })
            .collect();
        let run = SetRun::of(site, &networks);
        let estimate = run.estimate().clone();
        let figures = self.target.iter().filter_map(|&kind| {
            let (change, ends) = estimate.of_kind(kind)?;
            Some((kind, change.after, ends))
        });
        let figures: Vec<(PathKind, i32, usize)> = figures.collect();
        let after = figures.iter().map(|&(_, after, _)| after).max()?;
        let longest = figures.iter().filter(|&&(_, each, _)| each == after);
        let (mut ends, mut on) = (0, BTreeMap::new());
        let mut takes_over = None;
        for &(kind, _, its_ends) in longest {
            ends += its_ends;
            for (chain, nets) in chains_on_longest(&run, kind, &members, &self.results) {
                *on.entry(chain).or_insert(0) += nets;
            }
            takes_over = takes_over.or_else(|| run.takes_over(kind));
        }
        self.work = self.work.saturating_sub(2 * run.work() + 1);
        Some(Outcome {
            choice: choice.clone(),
            estimate,
            after,
            ends,
            on,
            takes_over,
            carries: run.carry_arrivals(),
        })
    }

    fn can_join(&self, chain: usize) -> bool {
        self.pools[chain].is_some()
    }

    fn find(&mut self) -> Option<Together> {
        let today = self.attempt(&Choice::new())?;
        if !today.on.keys().any(|&chain| self.can_join(chain)) {
            return None;
        }
        let (before, block) = (self.before(), self.ground.timing.longest());
        let gains = |outcome: &Outcome| {
            outcome.after < before && outcome.estimate.whole.block_after <= block
        };
        let reached = self.all_at_once(&today, |pool| pool.first);
        if !(gains(&reached) && reached.on.is_empty()) {
            let other = self.all_at_once(&today, |pool| pool.fastest);
            if !(gains(&other) && other.on.is_empty()) {
                self.one_at_a_time(today);
                let better = if other.progress() < reached.progress() {
                    other
                } else {
                    reached
                };
                self.one_at_a_time(better);
            }
        }
        let tried: Vec<Outcome> = self.known.values().flatten().cloned().collect();
        let gaining = || tried.iter().filter(|outcome| gains(outcome));
        let best = gaining().map(|outcome| outcome.after).min()?;
        let cost = |outcome: &&Outcome| (outcome.estimate.cost(), outcome.progress());
        let level = self.ground.settings.model.level();
        let off = gaining().any(|outcome| outcome.on.is_empty());
        let holds = |outcome: &Outcome| {
            gains(outcome)
                && if off {
                    outcome.on.is_empty()
                } else {
                    outcome.after <= best + level
                }
        };
        // From the cheapest and from the fastest; what is cheaper in the end counts.
        let good = || tried.iter().filter(|outcome| holds(outcome));
        let starts = [
            good().min_by_key(cost),
            good().min_by_key(|outcome| (outcome.progress(), outcome.estimate.cost())),
        ];
        let ended = starts
            .into_iter()
            .flatten()
            .map(|start| self.cheaper(start.clone(), &holds));
        let chosen = ended.min_by_key(|outcome| cost(&outcome))?;
        let chosen = self.as_planned_alone(chosen, &holds);
        Some(self.together(chosen, (best, off)))
    }

    /// Every chain on a longest path joins with the proposal `take` says, until no
    /// more can; gives the best on the way.
    fn all_at_once(&mut self, today: &Outcome, take: impl Fn(&Pool) -> usize) -> Outcome {
        let (mut now, mut best) = (today.clone(), today.clone());
        for _ in 0..ROUNDS {
            let mut choice = now.choice.clone();
            for &chain in now.on.keys() {
                if self.can_join(chain) && choice.len() < MOST_TOGETHER {
                    choice.entry(chain).or_insert(take(self.pool(chain)));
                }
            }
            if choice == now.choice {
                break;
            }
            let Some(next) = self.attempt(&choice) else {
                break;
            };
            if next.progress() < best.progress() {
                best = next.clone();
            }
            now = next;
        }
        best
    }

    /// The best single step again and again: a chain joins, or a member takes
    /// another of its fast proposals.
    fn one_at_a_time(&mut self, mut now: Outcome) {
        for _ in 0..STEPS {
            let mut on: Vec<(usize, usize)> = now.on.iter().map(|(&c, &n)| (c, n)).collect();
            on.sort_by_key(|&(chain, nets)| (Reverse(nets), chain));
            on.retain(|&(chain, _)| self.can_join(chain));
            let mut best = now.clone();
            for &(chain, _) in on.iter().take(TRIED_AT_A_STEP) {
                for option in self.pool(chain).tried() {
                    let mut choice = now.choice.clone();
                    choice.insert(chain, option);
                    let Some(next) = self.attempt(&choice) else {
                        continue;
                    };
                    let rank = |each: &Outcome| (each.progress(), each.estimate.cost());
                    if next.progress() < now.progress() && rank(&next) < rank(&best) {
                        best = next;
                    }
                }
            }
            if best.choice == now.choice {
                return;
            }
            now = best;
        }
    }

    /// Leaves members out and takes cheaper proposals while the goal holds.
    fn cheaper(&mut self, mut now: Outcome, holds: &dyn Fn(&Outcome) -> bool) -> Outcome {
        for _ in 0..CHEAPER_ROUNDS {
            let before = now.estimate.cost();
            let mut members: Vec<(i64, usize)> = now
                .choice
                .iter()
                .map(|each| (-added(self.proposal(each)), *each.0))
                .collect();
            members.sort_unstable();
            for (_, chain) in members {
                let pool = &self.pool(chain).proposals;
                let mut options: Vec<usize> = (0..pool.len()).collect();
                options.sort_by_key(|&option| added(&pool[option]));
                let taken = now.choice[&chain];
                let dearest = options.iter().position(|&option| option == taken);
                options.truncate(dearest.unwrap_or(0));
                for option in [None].into_iter().chain(options.into_iter().map(Some)) {
                    let mut choice = now.choice.clone();
                    match option {
                        None => choice.remove(&chain),
                        Some(option) => choice.insert(chain, option),
                    };
                    if let Some(next) = self.attempt(&choice)
                        && holds(&next)
                        && next.estimate.cost() < now.estimate.cost()
                    {
                        now = next;
                        break;
                    }
                }
            }
            if now.estimate.cost() == before {
                break;
            }
        }
        now
    }

    /// A set of one is the proposal its own plan recommends, if that is as good.
    fn as_planned_alone(&mut self, chosen: Outcome, holds: &dyn Fn(&Outcome) -> bool) -> Outcome {
        let mut members = chosen.choice.keys();
        let (Some(&only), None) = (members.next(), members.next()) else {
            return chosen;
        };
        let Some(own) = self.own[only] else {
            return chosen;
        };
        match self.attempt(&Choice::from([(only, own)])) {
            Some(alone) if holds(&alone) && alone.estimate.cost() <= chosen.estimate.cost() => {
                alone
            }
            _ => chosen,
        }
    }

    fn together(&mut self, chosen: Outcome, (best, off): (i32, bool)) -> Together {
        let unit = self.ground.settings.model.unit_word();
        let alone: Vec<bool> = chosen
            .choice
            .iter()
            .map(|each| self.proposal(each).gains())
            .collect();
        let time = |ticks: i32| self.ground.timing.time(ticks);
        let (after, reached) = (time(chosen.after), time(best));
        let reason = if off {
            format!(
                "the cheapest found that takes carry off the longest path, which is {after} {unit} then"
            )
        } else if chosen.after == best {
            format!("the cheapest found at the best depth reached, {reached} {unit}")
        } else {
            format!(
                "the cheapest found within one level of the best depth reached: {after} {unit}, the best is {reached}"
            )
        };
        Together {
            kind: self.target[0],
            members: chosen.choice.into_iter().collect(),
            before: self.before(),
            after: chosen.after,
            takes_over: chosen.takes_over,
            carries: chosen.carries,
            chains_left: chosen.on.into_keys().collect(),
            none_alone: !alone.contains(&true),
            estimate: chosen.estimate,
            reason,
            stopped: self.stopped,
        }
    }
}
