//! From a netlist to its proven chains: nominate, link, resolve, prove, settle
//! the ends, and collect the nets.

use super::candidate::{Bits, Context, Lookup};
use super::carry_only::{self, Ground};
use super::collect::{bit, collect, nearest_bit, sort};
use super::copies::fold_copies;
use super::entries::{Entries, EntryId};
use super::label::{BusPreference, Labels};
use super::links::{Links, paths};
use super::model::Chain;
use super::modes::{add as add_moded, moded};
use super::trim::{Ends, independent_positions, live_bits};
use super::verify::{Theorem, verify};
use crate::netlist::{Bit, Netlist, Topology};
use crate::prove::{Claim, Effort, Witness, witness};
use crate::subject::{
    FLIP_WORDS, NodeId, Patterns, Signatures, Simulation, Subject, Words, linear_pairs, rare_values,
};
use fixedbitset::FixedBitSet;
use rustc_hash::FxHashSet;

/// What to look for, and how hard.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Options {
    /// Fewest positions with an operand bit that is not constant.
    pub min_bits: usize,
    /// Solver conflicts per question.
    pub effort: u64,
    /// Seed of the simulation patterns.
    pub seed: u64,
}

impl Default for Options {
    fn default() -> Self {
        Self {
            min_bits: 4,
            effort: 20_000,
            seed: 1,
        }
    }
}

/// Random words of 64 patterns each.
const RANDOM_WORDS: usize = 32;
/// A value is rare when no more uniform patterns than this reach it.
const RARE: u32 = 8;
/// Directed words, where some node needs them.
const DIRECTED_WORDS: usize = 16;
/// Positions the second witness is asked about.
const WITNESS_BITS: usize = 1024;
/// Subject nodes one proof may encode.
const PROOF_NODES: usize = 2_000_000;

/// A candidate that could be neither proven nor refuted within the effort.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Unproven {
    /// Positions of the candidate.
    pub bits: usize,
    /// Operand bits, least significant first, two per position.
    pub operands: Vec<(Bit, Bit)>,
    /// Why it stayed open.
    pub reason: &'static str,
    /// Conflicts spent.
    pub effort: u64,
}

/// What was found.
#[derive(Clone, Default, Debug)]
pub struct Found {
    /// Proven chains, widest first.
    pub chains: Vec<Chain>,
    /// Candidates left open.
    pub unproven: Vec<Unproven>,
    /// Chains that decision diagrams confirmed a second time.
    pub witnessed: usize,
    /// Recurrences that are there and not listed as chains.
    pub recurrences_not_listed: u64,
}

/// Finds and proves the carry chains of a netlist.
pub fn find(netlist: &Netlist, topology: &Topology, options: Options) -> Found {
    let mut subject = Subject::of(netlist, topology);
    let (patterns, mut signatures) = sign(&subject, options.seed);
    let on_net = on_net(netlist, &subject);
    let pairs = linear_pairs(&subject, &chosen_words(&subject, &patterns), &on_net);
    let moded = moded(netlist, &subject, &pairs);
    let moded = add_moded(&mut subject, &moded);
    signatures.extend(&subject);
    let subject = subject;
    let entries = Entries::of(&subject, &signatures, &patterns, &on_net, &pairs, &moded);
    drop((pairs, moded));
    let links = Links::of(&entries, &signatures);
    let labels = Labels::of(netlist, &subject);
    let context = Context {
        entries: &entries,
        links: &links,
        signatures: &signatures,
        labels: &labels,
    };
    let preference = BusPreference {
        labels: &labels,
        entries: &entries,
    };
    // An incrementer's lowest bit is an inverter and no entry.
    let shortest = options.min_bits.saturating_sub(1).max(2);
    let mut waiting = paths(
        &subject,
        &entries,
        &links,
        &signatures,
        &preference,
        shortest,
    );
    for path in &mut waiting {
        context.settle_start(path);
    }
    // Only a counter can still gain a bit below.
    waiting.retain(|path| {
        path.len() >= options.min_bits || path.iter().all(|&entry| !entries.has_two(entry))
    });
    let mut wanted = FxHashSet::default();
    for path in &waiting {
        context.wanted(path, &mut wanted);
    }
    let lookup = Lookup::of(&subject, &signatures, &on_net, &wanted);
    let mut search = Search {
        ends: Ends::new(netlist, &subject, &context),
        lookup: &lookup,
        options,
        theorems: Vec::new(),
        unproven: Vec::new(),
    };
    for path in &mut waiting {
        context.drop_unlikely_start(path, &lookup);
    }
    for path in waiting {
        search.settle(path);
    }
    let Search {
        ends,
        mut theorems,
        mut unproven,
        ..
    } = search;
    ends.trim_shared_tops(&mut theorems);
    theorems.retain(|theorem| live_bits(&theorem.bits) >= options.min_bits);
    let ground = Ground {
        netlist,
        subject: &subject,
        signatures: &signatures,
        patterns: &patterns,
        on_net: &on_net,
        labels: &labels,
        options,
        proof_nodes: PROOF_NODES,
    };
    // Before copies are folded: what they own is no comparator either.
    let carry_only = carry_only::find(&ground, &theorems);
    fold_copies(&subject, &labels, &mut theorems, options.min_bits);
    let witnessed = witness_all(&subject, &labels, &mut theorems, &mut unproven);
    let mut chains = collect(netlist, &subject, &labels, theorems);
    chains.extend(carry_only.chains);
    sort(&mut chains);
    let bit = |literal| bit(&labels, literal);
    unproven.extend(carry_only.open.into_iter().map(|open| Unproven {
        bits: open.bits.len(),
        operands: open.bits.iter().map(|&(a, b)| (bit(a), bit(b))).collect(),
        reason: "not settled within the effort",
        effort: open.conflicts,
    }));
    Found {
        chains,
        unproven,
        witnessed,
        recurrences_not_listed: carry_only.not_listed,
    }
}

/// Asks the second witness about every chain, widest first, as long as it is
/// quick. A theorem that it contradicts would be a fault of carrywise: it is
/// taken back and told. Returns how many it confirmed.
fn witness_all(
    subject: &Subject,
    labels: &Labels<'_>,
    theorems: &mut Vec<Theorem>,
    unproven: &mut Vec<Unproven>,
) -> usize {
    theorems.sort_by_key(|theorem| std::cmp::Reverse(theorem.bits.len()));
    let mut confirmed = 0;
    let mut budget = WITNESS_BITS;
    theorems.retain(|theorem| {
        if budget < theorem.bits.len() {
            return true;
        }
        budget -= theorem.bits.len();
        let claims: Vec<Claim<'_>> = theorem
            .bits
            .iter()
            .zip(theorem.sums.iter().zip(&theorem.carries))
            .map(|(bits, (sums, carries))| Claim {
                a: bits.a,
                b: bits.b,
                sums,
                carries,
            })
            .collect();
        let said = witness(subject, theorem.carry_in, &claims);
        confirmed += usize::from(said == Witness::Agrees);
        if said == Witness::Contradicts {
            let bit = |literal| nearest_bit(labels, subject, literal);
            let operands = theorem.bits.iter().map(|b| (bit(b.a), bit(b.b)));
            unproven.push(Unproven {
                bits: theorem.bits.len(),
                operands: operands.collect(),
                reason: "the two proofs contradict each other, a fault of carrywise",
                effort: 0,
            });
        }
        said != Witness::Contradicts
    });
    confirmed
}

/// The values that flips are looked for under: the first word, which is uniform,
/// and the last, which is directed where some value is rare.
fn chosen_words(subject: &Subject, patterns: &Patterns) -> Vec<Words> {
    let mut values = vec![[0; FLIP_WORDS]; subject.node_count()];
    let last = patterns.words() - 1;
    for (slot, word) in [0, last].into_iter().enumerate() {
        let mut simulation = Simulation::at(subject, patterns, word);
        let words = simulation.advance().unwrap_or_default();
        for (value, &word) in values.iter_mut().zip(words) {
            value[slot] = word;
        }
    }
    values
}

/// The nodes that some net carries. What lies inside one cover is no operand,
/// sum or carry that could be named or replaced.
fn on_net(netlist: &Netlist, subject: &Subject) -> FixedBitSet {
    let mut nodes = FixedBitSet::with_capacity(subject.node_count());
    nodes.insert(NodeId::FALSE.index());
    for net in netlist.nets() {
        nodes.insert(subject.of_net(net).node().index());
    }
    nodes
}

/// Random patterns, directed ones for the values they hardly reached, and the
/// signatures under both.
fn sign(subject: &Subject, seed: u64) -> (Patterns, Signatures) {
    let mut patterns = Patterns::new(seed, RANDOM_WORDS);
    let rare = rare_values(subject, &patterns, RARE);
    if !rare.is_empty() {
        patterns.direct(subject, &rare, DIRECTED_WORDS);
    }
    let signatures = Signatures::of(subject, &patterns);
    (patterns, signatures)
}

struct Search<'a> {
    ends: Ends<'a>,
    lookup: &'a Lookup,
    options: Options,
    theorems: Vec<Theorem>,
    unproven: Vec<Unproven>,
}

impl Search<'_> {
    /// Proves one path from its low end. Where a position is refuted or stays
    /// open, what is proven below it is kept and the rest is tried as a chain of
    /// its own; two open positions in a row end the attempt.
    fn settle(&mut self, mut path: Vec<EntryId>) {
        let (subject, context) = (self.ends.subject, self.ends.context);
        let effort = Effort {
            conflicts: self.options.effort,
            nodes: PROOF_NODES,
        };
        let mut open: Vec<Bits> = Vec::new();
        let mut conflicts = 0;
        let mut stalled = false;
        // An open position that is tried again as the start of the rest, unless
        // no net carries what comes into it.
        let mut pending: Option<Bits> = None;
        let whole = path.len();
        while let Some(candidate) = context.resolve(&path, self.lookup) {
            if candidate.path[0] != path[0] {
                open.extend(pending);
            }
            pending = None;
            let outcome = verify(subject, context, self.lookup, &candidate, effort);
            let mut theorem = outcome.theorem;
            let proven = theorem.bits.len();
            let free = independent_positions(subject, &theorem);
            theorem.truncate(free);
            self.accept(theorem);
            let undecided = outcome.undecided == Some(true) && free == proven;
            let mut next = free;
            if free == 0 {
                // The position itself is given up.
                next = 1;
                if undecided {
                    conflicts += outcome.conflicts;
                    open.push(candidate.bits[0]);
                }
            }
            let rest = &candidate.bits[next..];
            if outcome.undecided.is_none() && free == proven {
                break;
            }
            if rest.len() < 2 || (undecided && free == 0 && stalled) {
                if undecided {
                    open.extend_from_slice(rest);
                }
                break;
            }
            stalled = undecided && free == 0;
            if undecided && free > 0 {
                pending = Some(candidate.bits[next]);
            }
            path = candidate.path[next..].to_vec();
        }
        open.extend(pending);
        if !open.is_empty() && whole >= self.options.min_bits {
            let bit = |literal| nearest_bit(context.labels, subject, literal);
            self.unproven.push(Unproven {
                bits: open.len(),
                operands: open.iter().map(|b| (bit(b.a), bit(b.b))).collect(),
                reason: "not settled within the effort",
                effort: conflicts,
            });
        }
    }

    fn accept(&mut self, mut theorem: Theorem) {
        if theorem.bits.is_empty() {
            return;
        }
        self.ends.trim_top(&mut theorem);
        self.ends.extend_below(&mut theorem);
        if live_bits(&theorem.bits) < self.options.min_bits {
            return;
        }
        self.theorems.push(theorem);
    }
}
