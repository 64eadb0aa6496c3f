//! From a netlist to its proven chains: nominate, link, resolve, prove, trim,
//! read, and collect the nets.

use super::built_as::built_as;
use super::candidate::{Bits, Context, Lookup};
use super::entries::{Entries, EntryId};
use super::kinds::{order_operands, read};
use super::label::{BusPreference, Labels};
use super::links::{Links, paths};
use super::model::{CarryForm, Chain, Kind, Position};
use super::verify::{Theorem, verify};
use crate::netlist::{Bit, Driver, NetId, Netlist, Signal, Topology};
use crate::prove::Effort;
use crate::subject::{Hash, Literal, NodeId, NodeKind, Patterns, Signatures, Subject, rare_values};
use rustc_hash::{FxHashMap, FxHashSet};

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
            effort: 10_000,
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
}

/// Finds and proves the carry chains of a netlist.
pub fn find(netlist: &Netlist, topology: &Topology, options: Options) -> Found {
    let subject = Subject::of(netlist, topology);
    let (patterns, signatures) = sign(&subject, options.seed);
    let entries = Entries::of(&subject, &signatures, &patterns);
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
    let mut wanted = FxHashSet::default();
    for path in &waiting {
        context.wanted(path, &mut wanted);
    }
    let lookup = Lookup::of(&subject, &signatures, &wanted);
    let mut search = Search {
        netlist,
        subject: &subject,
        context: &context,
        lookup: &lookup,
        options,
        inverted_copies: inverted_copies(netlist, &subject),
        theorems: Vec::new(),
        unproven: Vec::new(),
    };
    for path in &mut waiting {
        context.drop_unlikely_start(path, &lookup);
    }
    waiting.reverse();
    while let Some(path) = waiting.pop() {
        if let Some(rest) = search.settle(&path) {
            waiting.push(rest);
        }
    }
    search.trim_shared_tops();
    search.collect()
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

/// Free nodes whose complement has a net, and whether a port or register shows
/// it.
fn inverted_copies(netlist: &Netlist, subject: &Subject) -> FxHashMap<NodeId, bool> {
    let mut copies = FxHashMap::default();
    let mut note = |signal: Signal, shown: bool| {
        let literal = subject.of_signal(signal);
        if literal.is_inverted() && matches!(subject.kind(literal.node()), NodeKind::Free(_)) {
            *copies.entry(literal.node()).or_insert(false) |= shown;
        }
    };
    for gate in netlist.gates() {
        note(Signal::plain(netlist.gate_output(gate)), false);
    }
    for output in netlist.outputs() {
        note(output.signal, true);
    }
    for register in netlist.registers() {
        note(register.input, true);
    }
    copies
}

struct Search<'a> {
    netlist: &'a Netlist,
    subject: &'a Subject,
    context: &'a Context<'a>,
    lookup: &'a Lookup,
    options: Options,
    inverted_copies: FxHashMap<NodeId, bool>,
    theorems: Vec<Theorem>,
    unproven: Vec<Unproven>,
}

fn live_bits(bits: &[Bits]) -> usize {
    bits.iter()
        .filter(|b| b.a.node() != NodeId::FALSE || b.b.node() != NodeId::FALSE)
        .count()
}

impl Search<'_> {
    /// Proves one path; returns what is left of it above a refuted position.
    fn settle(&mut self, path: &[EntryId]) -> Option<Vec<EntryId>> {
        let candidate = self.context.resolve(path, self.lookup)?;
        let effort = Effort {
            conflicts: self.options.effort,
            nodes: PROOF_NODES,
        };
        let outcome = verify(self.subject, self.context, self.lookup, &candidate, effort);
        let proven = outcome.theorem.bits.len();
        if outcome.undecided == Some(true) {
            let open = &candidate.bits[proven..];
            if live_bits(open) >= self.options.min_bits {
                self.unproven.push(Unproven {
                    bits: open.len(),
                    operands: open
                        .iter()
                        .map(|b| (self.bit(b.a), self.bit(b.b)))
                        .collect(),
                    reason: "not settled within the effort",
                    effort: outcome.conflicts,
                });
            }
        }
        let mut theorem = outcome.theorem;
        let free = independent_positions(self.subject, &theorem);
        theorem.truncate(free);
        let settled = if free < proven { free.max(1) } else { proven };
        self.accept(theorem);
        let open = outcome.undecided.is_some() || free < proven;
        let rest = candidate.path.get(settled + usize::from(settled == 0)..)?;
        (open && rest.len() >= 2).then(|| rest.to_vec())
    }

    fn accept(&mut self, mut theorem: Theorem) {
        if theorem.bits.is_empty() {
            return;
        }
        self.trim_top(&mut theorem);
        self.extend_below(&mut theorem);
        if live_bits(&theorem.bits) < self.options.min_bits {
            return;
        }
        self.theorems.push(theorem);
    }

    /// Drops a top position that is true but means nothing: on top of a
    /// two-operand chain a single operand that continues no operand's bus and
    /// is no operand's repeated top bit (a carry-out combined with a control
    /// signal); or an operand that is an input where no other position has one
    /// and no carry leaves (the sign of a recoded multiplier row).
    fn trim_top(&self, theorem: &mut Theorem) {
        let is_two = |bits: &Bits| bits.b.node() != NodeId::FALSE;
        let is_free = |l: Literal| matches!(self.subject.kind(l.node()), NodeKind::Free(_));
        let [rest @ .., below, top] = theorem.bits.as_slice() else {
            return;
        };
        if !is_two(below) {
            return;
        }
        let labels = self.context.labels;
        let follows = |upper: Literal| {
            let continues = |lower: Literal| {
                labels.follows(lower.node(), upper.node()) > 0 || lower.node() == upper.node()
            };
            continues(below.a) || continues(below.b)
        };
        let meaningless = if is_two(top) {
            let stray = |l: Literal| is_free(l) && !follows(l);
            let open = theorem.carries.last().is_some_and(Vec::is_empty);
            let inner = |bits: &Bits| !is_free(bits.a) && !is_free(bits.b);
            open && (stray(top.a) || stray(top.b)) && inner(below) && rest.iter().all(inner)
        } else {
            let fresh = is_free(top.a)
                && labels.port(top.sum.node()).is_some()
                && theorem.carry_in.node() != top.a.node()
                && below_uses(theorem, top.a.node()) == 0;
            !follows(top.a) && !fresh
        };
        if meaningless {
            theorem.truncate(theorem.bits.len() - 1);
        }
    }

    /// Drops a top position whose sum is only the first exclusive or of some
    /// other chain's position (two of its three inputs), as where the carry of
    /// one array row enters a cell of the next.
    fn trim_shared_tops(&mut self) {
        let signatures = self.context.signatures;
        let hash = |literal: Literal| signatures.hash(literal.node());
        let mut partial: FxHashSet<Hash> = FxHashSet::default();
        for bits in self.theorems.iter().flat_map(|theorem| &theorem.bits) {
            let (sum, a, b) = (hash(bits.sum), hash(bits.a), hash(bits.b));
            // The exclusive or of two inputs is the sum's with the third.
            let carry = sum ^ a ^ b;
            if carry != 0 && a != 0 && b != 0 {
                partial.extend([a ^ b, sum ^ a, sum ^ b]);
            }
        }
        for theorem in &mut self.theorems {
            while let [_, .., top] = theorem.bits[..] {
                let open = theorem.carries.last().is_some_and(Vec::is_empty);
                let shown = self.context.labels.port(top.sum.node()).is_some();
                if !open || shown || !partial.contains(&hash(top.sum)) {
                    break;
                }
                theorem.truncate(theorem.bits.len() - 1);
            }
        }
        let min_bits = self.options.min_bits;
        self.theorems
            .retain(|theorem| live_bits(&theorem.bits) >= min_bits);
    }

    /// Adds the lowest bit of an incrementer or decrementer, whose sum is an
    /// inverter: the carry-in of the rest is that bit itself.
    fn extend_below(&self, theorem: &mut Theorem) {
        let single = theorem
            .bits
            .iter()
            .all(|bits| bits.b.node() == NodeId::FALSE);
        let node = theorem.carry_in.node();
        let lowest = theorem.bits[0];
        // On an edge of an AND/inverter graph every complement is at hand.
        let shown = match self.inverted_copies.get(&node) {
            Some(&shown) => shown,
            None if self.netlist.has_inverted_edges() => false,
            None => return,
        };
        // An inverter that no port shows may belong to the cells themselves.
        if !single || !(shown || self.context.labels.follows(node, lowest.a.node()) == 3) {
            return;
        }
        if lowest.a.is_inverted() != theorem.carry_in.is_inverted() {
            return;
        }
        // c1 = majority(a0, b, ¬b) = a0 and s0 = a0 ⊕ b ⊕ ¬b = ¬a0.
        let (a, b) = (theorem.carry_in, lowest.b);
        theorem.bits.insert(0, Bits { sum: !a, a, b });
        theorem.sums.insert(0, vec![!a]);
        theorem.carries.insert(0, vec![a]);
        theorem.carry_in = !b;
    }

    fn bit(&self, literal: Literal) -> Bit {
        if literal.node() == NodeId::FALSE {
            return Bit::Constant(literal == Literal::TRUE);
        }
        let signal = self.context.labels.signal(literal);
        Bit::Signal(signal.expect("every operand is on a net"))
    }

    /// Collects the nets of all theorems in one pass over the netlist.
    fn collect(mut self) -> Found {
        let theorems: Vec<(Kind, Theorem)> = std::mem::take(&mut self.theorems)
            .into_iter()
            .map(|theorem| {
                let (kind, mut theorem) = read(self.subject, self.context.labels, theorem);
                if kind != Kind::Subtractor {
                    order_operands(self.context.labels, &mut theorem);
                }
                (kind, theorem)
            })
            .collect();
        let mut nets: FxHashMap<NodeId, Vec<NetId>> = FxHashMap::default();
        for (_, theorem) in &theorems {
            for literal in theorem.sums.iter().chain(&theorem.carries).flatten() {
                nets.entry(literal.node()).or_default();
            }
        }
        for net in self.netlist.nets() {
            if let Some(list) = nets.get_mut(&self.subject.of_net(net).node()) {
                list.push(net);
            }
        }
        let mut chains: Vec<Chain> = theorems
            .iter()
            .map(|(kind, theorem)| self.chain(*kind, theorem, &nets))
            .collect();
        chains.sort_by_key(|chain| {
            let lowest = chain
                .positions
                .iter()
                .flat_map(|p| &p.sums)
                .map(|s| s.net)
                .min();
            (std::cmp::Reverse(chain.positions.len()), lowest)
        });
        Found {
            chains,
            unproven: self.unproven,
        }
    }

    fn chain(&self, kind: Kind, theorem: &Theorem, nets: &FxHashMap<NodeId, Vec<NetId>>) -> Chain {
        let operands: FxHashSet<NodeId> = theorem
            .bits
            .iter()
            .flat_map(|bits| [bits.a.node(), bits.b.node()])
            .collect();
        let signals = |literals: &[Literal]| {
            let mut signals: Vec<Signal> = Vec::new();
            for literal in literals {
                for &net in &nets[&literal.node()] {
                    let inverted = self.subject.of_net(net) != *literal;
                    let copy = operands.contains(&literal.node()) && inverted;
                    let driven = matches!(self.netlist.driver(net), Driver::Gate(_));
                    if driven && !copy {
                        signals.push(Signal { net, inverted });
                    }
                }
            }
            let labels = self.context.labels;
            signals.sort_by_key(|signal| std::cmp::Reverse(labels.preference(signal.net)));
            signals
        };
        let positions: Vec<Position> = theorem
            .bits
            .iter()
            .zip(theorem.sums.iter().zip(&theorem.carries))
            .map(|(bits, (sums, carries))| {
                let mut sums = signals(sums);
                if sums.is_empty() {
                    sums.extend(self.context.labels.signal(bits.sum));
                }
                let outside: Vec<Literal> = carries
                    .iter()
                    .copied()
                    .filter(|literal| !operands.contains(&literal.node()))
                    .collect();
                Position {
                    a: self.bit(bits.a),
                    b: self.bit(bits.b),
                    sums,
                    carries: signals(&outside),
                }
            })
            .collect();
        let has_carry_out = positions.last().is_some_and(|top| !top.carries.is_empty());
        let carry_form = match (kind, theorem.carries.last().and_then(|c| c.first())) {
            (Kind::Subtractor, Some(carry))
                if self.context.labels.port(carry.node()) == Some(!carry.is_inverted()) =>
            {
                CarryForm::Borrow
            }
            _ => CarryForm::Carry,
        };
        Chain {
            kind,
            positions,
            carry_in: self.bit(theorem.carry_in),
            has_carry_out,
            carry_form,
            built_as: built_as(self.subject, theorem),
        }
    }
}

/// Nodes looked at below the operands of one chain before they are taken as
/// independent; the planner checks again.
const DEPENDENCE_NODES: usize = 1 << 18;

/// How many positions, from the low end, have operands that depend on none of
/// the chain's own sums and carries below them. A chain that feeds itself is
/// true, but its positions cannot work side by side.
fn independent_positions(subject: &Subject, theorem: &Theorem) -> usize {
    let mut own: FxHashMap<NodeId, usize> = FxHashMap::default();
    for (i, literals) in theorem.sums.iter().enumerate() {
        for literal in literals.iter().chain(&theorem.carries[i]) {
            own.entry(literal.node()).or_insert(i);
        }
    }
    let Some(lowest) = own.keys().min().copied() else {
        return 0;
    };
    let mut seen: FxHashSet<NodeId> = FxHashSet::default();
    let mut stack = Vec::new();
    for (i, bits) in theorem.bits.iter().enumerate() {
        stack.extend([bits.a.node(), bits.b.node()]);
        while let Some(node) = stack.pop() {
            // Fan-ins have lower numbers: nothing below `lowest` is the chain's.
            if node < lowest || !seen.insert(node) || seen.len() > DEPENDENCE_NODES {
                continue;
            }
            if own.contains_key(&node) {
                return i;
            }
            match subject.kind(node) {
                NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
                NodeKind::Xor(x, y) => stack.extend([x, y]),
                NodeKind::False | NodeKind::Free(_) => {}
            }
        }
    }
    theorem.bits.len()
}

/// How many lower positions use `operand` as an operand.
fn below_uses(theorem: &Theorem, operand: NodeId) -> usize {
    let lower = &theorem.bits[..theorem.bits.len() - 1];
    lower
        .iter()
        .filter(|b| b.a.node() == operand || b.b.node() == operand)
        .count()
}
