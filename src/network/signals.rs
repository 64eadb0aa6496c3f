//! Signals of a carry network: what lies beyond spans.
//!
//! A signal is the G or P of a span, the half sum `a ⊕ b` of a position, or an
//! AND, OR, XOR or two-way choice of earlier signals. A carry or a sum may be
//! any signal, so networks that are no prefix network can be stated: selected
//! carries and sums (J. Sklansky 1960; O. J. Bedrij, "Carry-Select Adder", IRE
//! Transactions on Electronic Computers EC-11, 1962) and and-or paths.
//!
//! Invariant: arguments come before the signal that reads them, and spans never
//! read signals. A span states its function by itself; a signal does not, so
//! [`CarryNetwork::first_wrong`] compares carries and sums with addition on
//! patterns of which most propagate far.

use super::carry_network::{CarryNetwork, Node, NodeId};

/// One signal of a [`CarryNetwork`].
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct SignalId(u32);

impl SignalId {
    /// The id as an array index.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// What a signal is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum SignalNode<'a> {
    /// G of a span; of the carry-in, the carry-in itself.
    Generate(NodeId),
    /// P of a span that does not hold the carry-in.
    Propagate(NodeId),
    /// `a + b` of a position, whichever propagate the leaves use: the carry out
    /// of it when one comes in.
    Either(usize),
    /// `a ⊕ b` of a position, whichever propagate the leaves use.
    HalfSum(usize),
    /// AND of at least two signals.
    And(&'a [SignalId]),
    /// OR of at least two signals.
    Or(&'a [SignalId]),
    /// XOR of two signals.
    Xor(SignalId, SignalId),
    /// `choose ? if_one : if_zero`.
    Select {
        /// What decides.
        choose: SignalId,
        /// The value where it is 1.
        if_one: SignalId,
        /// The value where it is 0.
        if_zero: SignalId,
    },
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Kind {
    Generate(NodeId),
    Propagate(NodeId),
    Either(u32),
    HalfSum(u32),
    And,
    Or,
    Xor,
    Select,
}

/// The carry out of a position.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Carry {
    /// G of a span that reaches down to the lowest position.
    Span(NodeId),
    /// A signal.
    Signal(SignalId),
}

/// The signals, and which carries and sums are some of them.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Signals {
    kinds: Vec<Kind>,
    argument_ends: Vec<u32>,
    arguments: Vec<SignalId>,
    /// By span: its G and its P as signals, where stated.
    generates: Vec<Option<SignalId>>,
    propagates: Vec<Option<SignalId>>,
    half_sums: Vec<Option<SignalId>>,
    /// By span: the carry out of it when one comes in, as `G + P` and as made
    /// from its lowest position up.
    eithers: Vec<Option<SignalId>>,
    early_eithers: Vec<Option<SignalId>>,
    /// By position: the carry and the sum where they are signals; empty where
    /// none is.
    carries: Vec<Option<SignalId>>,
    sums: Vec<Option<SignalId>>,
}

impl Signals {
    fn push(&mut self, kind: Kind, arguments: &[SignalId]) -> SignalId {
        let id = u32::try_from(self.kinds.len()).expect("fewer than 2^32 signals");
        self.kinds.push(kind);
        self.arguments.extend_from_slice(arguments);
        let end = u32::try_from(self.arguments.len()).expect("fewer than 2^32 arguments");
        self.argument_ends.push(end);
        SignalId(id)
    }

    fn arguments(&self, signal: SignalId) -> &[SignalId] {
        let i = signal.index();
        let start = i.checked_sub(1).map_or(0, |i| self.argument_ends[i]);
        &self.arguments[start as usize..self.argument_ends[i] as usize]
    }
}

/// The entry of a list that grows as it is written.
fn slot(list: &mut Vec<Option<SignalId>>, at: usize) -> &mut Option<SignalId> {
    if list.len() <= at {
        list.resize(at + 1, None);
    }
    &mut list[at]
}

impl CarryNetwork {
    /// G of a span as a signal; the same one when asked again.
    pub fn generate_of(&mut self, node: NodeId) -> SignalId {
        let known = *slot(&mut self.signals.generates, node.index());
        known.unwrap_or_else(|| {
            let id = self.signals.push(Kind::Generate(node), &[]);
            self.signals.generates[node.index()] = Some(id);
            id
        })
    }

    /// P of a span as a signal; the same one when asked again. Panics where the
    /// span holds the carry-in, which has no propagate.
    pub fn propagate_of(&mut self, node: NodeId) -> SignalId {
        assert!(self.span(node).low >= 0, "the carry-in has no propagate");
        let known = *slot(&mut self.signals.propagates, node.index());
        known.unwrap_or_else(|| {
            let id = self.signals.push(Kind::Propagate(node), &[]);
            self.signals.propagates[node.index()] = Some(id);
            id
        })
    }

    /// `a ⊕ b` of a position as a signal; the same one when asked again.
    pub fn half_sum(&mut self, position: usize) -> SignalId {
        assert!(position < self.positions());
        let known = *slot(&mut self.signals.half_sums, position);
        known.unwrap_or_else(|| {
            let id = self.signals.push(Kind::HalfSum(position as u32), &[]);
            self.signals.half_sums[position] = Some(id);
            id
        })
    }

    /// The carry out of a span when one comes in, `G + P`; of a leaf `a + b`,
    /// whichever propagate the leaves use.
    pub fn either_of(&mut self, node: NodeId) -> SignalId {
        if let Some(known) = *slot(&mut self.signals.eithers, node.index()) {
            return known;
        }
        let id = match self.node(node) {
            Node::Leaf(position) => self.signals.push(Kind::Either(position as u32), &[]),
            _ => {
                let (generate, propagate) = (self.generate_of(node), self.propagate_of(node));
                self.or(&[generate, propagate])
            }
        };
        self.signals.eithers[node.index()] = Some(id);
        id
    }

    /// As [`Self::either_of`], made anew from the lowest position up: no later
    /// than G itself, for a chain of its own.
    pub fn early_either_of(&mut self, node: NodeId) -> SignalId {
        // Down the lowest parts to what is known, and back up.
        let mut way = vec![node];
        let mut known = loop {
            let lowest = way[way.len() - 1];
            if let Some(known) = *slot(&mut self.signals.early_eithers, lowest.index()) {
                break known;
            }
            match self.node(lowest) {
                Node::Combine(parts) => way.push(parts[parts.len() - 1]),
                _ => break self.either_of(lowest),
            }
        };
        for &node in way.iter().rev() {
            if let Node::Combine(parts) = self.node(node)
                && self.signals.early_eithers[node.index()].is_none()
            {
                let parts = parts.to_vec();
                known = self.joined_either(&parts, known);
            }
            *slot(&mut self.signals.early_eithers, node.index()) = Some(known);
        }
        known
    }

    /// `G1 + P1·G2 + … + P1·P2·…·below` of parts, most significant first, the
    /// lowest of which has `below` as its carry.
    fn joined_either(&mut self, parts: &[NodeId], below: SignalId) -> SignalId {
        let (mut terms, mut above) = (Vec::new(), Vec::new());
        for (i, &part) in parts.iter().enumerate() {
            let carry = if i + 1 < parts.len() {
                self.generate_of(part)
            } else {
                below
            };
            above.push(carry);
            terms.push(self.and(&above));
            above.pop();
            if i + 1 < parts.len() {
                above.push(self.propagate_of(part));
            }
        }
        self.or(&terms)
    }

    /// AND of signals; a single one is itself. Panics when there is none.
    pub fn and(&mut self, arguments: &[SignalId]) -> SignalId {
        self.operation(Kind::And, arguments)
    }

    /// OR of signals; a single one is itself. Panics when there is none.
    pub fn or(&mut self, arguments: &[SignalId]) -> SignalId {
        self.operation(Kind::Or, arguments)
    }

    /// XOR of two signals.
    pub fn xor(&mut self, left: SignalId, right: SignalId) -> SignalId {
        self.operation(Kind::Xor, &[left, right])
    }

    /// `choose ? if_one : if_zero`.
    pub fn select(&mut self, choose: SignalId, if_one: SignalId, if_zero: SignalId) -> SignalId {
        self.operation(Kind::Select, &[choose, if_one, if_zero])
    }

    fn operation(&mut self, kind: Kind, arguments: &[SignalId]) -> SignalId {
        let known = self.signals.kinds.len();
        assert!(arguments.iter().all(|each| each.index() < known));
        match arguments {
            [] => panic!("an operation has arguments"),
            &[only] => only,
            _ => self.signals.push(kind, arguments),
        }
    }

    /// What a signal is.
    pub fn signal(&self, signal: SignalId) -> SignalNode<'_> {
        let arguments = self.signals.arguments(signal);
        match self.signals.kinds[signal.index()] {
            Kind::Generate(node) => SignalNode::Generate(node),
            Kind::Propagate(node) => SignalNode::Propagate(node),
            Kind::Either(position) => SignalNode::Either(position as usize),
            Kind::HalfSum(position) => SignalNode::HalfSum(position as usize),
            Kind::And => SignalNode::And(arguments),
            Kind::Or => SignalNode::Or(arguments),
            Kind::Xor => SignalNode::Xor(arguments[0], arguments[1]),
            Kind::Select => SignalNode::Select {
                choose: arguments[0],
                if_one: arguments[1],
                if_zero: arguments[2],
            },
        }
    }

    /// The signals a signal reads.
    pub fn arguments(&self, signal: SignalId) -> &[SignalId] {
        self.signals.arguments(signal)
    }

    /// All signals; arguments come before what reads them.
    pub fn signal_ids(
        &self,
    ) -> impl DoubleEndedIterator<Item = SignalId> + ExactSizeIterator + use<> {
        (0..self.signals.kinds.len() as u32).map(SignalId)
    }

    /// States the signal that is the carry out of `position`.
    pub fn set_carry_signal(&mut self, position: usize, signal: SignalId) {
        assert!(position < self.positions());
        match self.signal(signal) {
            SignalNode::Generate(node) => self.set_carry(position, node),
            _ => *slot(&mut self.signals.carries, position) = Some(signal),
        }
    }

    /// States the signal that is the sum of `position`; where none is stated
    /// the sum is `a ⊕ b` and the carry into the position, by XOR.
    pub fn set_sum(&mut self, position: usize, signal: SignalId) {
        assert!(position < self.positions());
        *slot(&mut self.signals.sums, position) = Some(signal);
    }

    pub(super) fn forget_carry_signal(&mut self, position: usize) {
        if let Some(known) = self.signals.carries.get_mut(position) {
            *known = None;
        }
    }

    /// The carry out of `position` where it is a signal and no span's G.
    pub(super) fn carry_as_signal(&self, position: usize) -> Option<SignalId> {
        self.signals.carries.get(position).copied().flatten()
    }

    /// The signal stated as the sum of `position`, if one is.
    pub fn sum(&self, position: usize) -> Option<SignalId> {
        self.signals.sums.get(position).copied().flatten()
    }

    /// The carry out of `position` as a signal.
    pub fn carry_signal(&mut self, position: usize) -> SignalId {
        match self.carry(position) {
            Carry::Span(node) => self.generate_of(node),
            Carry::Signal(signal) => signal,
        }
    }

    /// The carry into `position`, if there is one.
    pub fn carry_into(&self, position: usize) -> Option<Carry> {
        match position.checked_sub(1) {
            Some(below) => Some(self.carry(below)),
            None => self.carry_in().map(Carry::Span),
        }
    }

    /// For each signal, whether some carry or sum is made from it.
    pub fn used_signals(&self) -> Vec<bool> {
        let mut used = vec![false; self.signals.kinds.len()];
        let stated = self.signals.carries.iter().chain(&self.signals.sums);
        for signal in stated.flatten() {
            used[signal.index()] = true;
        }
        for signal in self.signal_ids().rev() {
            if used[signal.index()] {
                for argument in self.signals.arguments(signal) {
                    used[argument.index()] = true;
                }
            }
        }
        used
    }

    /// Whether everything is spans and XORs of half sums: a prefix network.
    pub fn is_prefix(&self) -> bool {
        let stated = self.signals.carries.iter().chain(&self.signals.sums);
        stated.flatten().next().is_none()
    }

    /// The first position whose carry or sum differs from addition on seeded
    /// patterns, under either propagate of the leaves; `None` where all agree.
    /// Positions that propagate are the rule in most patterns, so that carries
    /// run far. Spans alone cannot differ.
    pub fn first_wrong(&self) -> Option<usize> {
        let mut random = fastrand::Rng::with_seed(1960);
        for rarity in [0, 1, 3, 5] {
            let rare = |random: &mut fastrand::Rng| {
                (0..rarity).fold(random.u64(..), |word, _| word & random.u64(..))
            };
            let mut a = Vec::with_capacity(self.positions());
            let mut b = Vec::with_capacity(self.positions());
            for _ in 0..self.positions() {
                let word = random.u64(..);
                let same = rare(&mut random);
                a.push(word);
                b.push(if rarity == 0 { same } else { !word ^ same });
            }
            let carry_in = self.carry_in().map(|_| random.u64(..));
            for either in [true, false] {
                let wrong = self.first_wrong_on(&a, &b, carry_in, either);
                if wrong.is_some() {
                    return wrong;
                }
            }
        }
        None
    }

    fn first_wrong_on(
        &self,
        a: &[u64],
        b: &[u64],
        carry_in: Option<u64>,
        either: bool,
    ) -> Option<usize> {
        let spans = self.span_words(a, b, carry_in, either);
        let values = self.signal_words(a, b, &spans);
        let mut carry = carry_in.unwrap_or(0);
        for i in 0..self.positions() {
            let half = a[i] ^ b[i];
            let sum = self.sum(i).map_or_else(
                || half ^ self.carry_into(i).map_or(0, |c| word(c, &spans, &values)),
                |signal| values[signal.index()],
            );
            let right = half ^ carry;
            carry = a[i] & b[i] | half & carry;
            if sum != right || word(self.carry(i), &spans, &values) != carry {
                return Some(i);
            }
        }
        None
    }

    /// G and P of every span.
    fn span_words(
        &self,
        a: &[u64],
        b: &[u64],
        carry_in: Option<u64>,
        either: bool,
    ) -> Vec<(u64, u64)> {
        let mut words: Vec<(u64, u64)> = Vec::with_capacity(self.nodes().len());
        for node in self.nodes() {
            words.push(match self.node(node) {
                Node::CarryIn => (carry_in.unwrap_or(0), 0),
                Node::Leaf(i) if either => (a[i] & b[i], a[i] | b[i]),
                Node::Leaf(i) => (a[i] & b[i], a[i] ^ b[i]),
                Node::Combine(parts) => {
                    let parts = parts.iter().map(|part| words[part.index()]);
                    parts.fold((0, !0), |(g, p), (generate, propagate)| {
                        (g | p & generate, p & propagate)
                    })
                }
            });
        }
        words
    }

    fn signal_words(&self, a: &[u64], b: &[u64], spans: &[(u64, u64)]) -> Vec<u64> {
        let mut values: Vec<u64> = Vec::with_capacity(self.signals.kinds.len());
        for signal in self.signal_ids() {
            let at = |id: SignalId| values[id.index()];
            let value = match self.signal(signal) {
                SignalNode::Generate(node) => spans[node.index()].0,
                SignalNode::Propagate(node) => spans[node.index()].1,
                SignalNode::Either(i) => a[i] | b[i],
                SignalNode::HalfSum(i) => a[i] ^ b[i],
                SignalNode::And(list) => list.iter().fold(!0, |word, &id| word & at(id)),
                SignalNode::Or(list) => list.iter().fold(0, |word, &id| word | at(id)),
                SignalNode::Xor(left, right) => at(left) ^ at(right),
                SignalNode::Select {
                    choose,
                    if_one,
                    if_zero,
                } => at(choose) & at(if_one) | !at(choose) & at(if_zero),
            };
            values.push(value);
        }
        values
    }
}

fn word(carry: Carry, spans: &[(u64, u64)], values: &[u64]) -> u64 {
    match carry {
        Carry::Span(node) => spans[node.index()].0,
        Carry::Signal(signal) => values[signal.index()],
    }
}
