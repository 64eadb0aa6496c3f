//! The nodes between a chain's operands and its results, and their values.
//!
//! The operands are taken as free, so that the patterns can be what deep carries
//! need whatever computes the operands: in word `w` each position propagates but
//! for one pattern in 2^k, with k growing from word to word up to the logarithm
//! of the width, so that runs of every length occur. A node that the walk
//! reaches although no operand encloses it is *foreign*: it gets random values,
//! and nothing that depends on it can be mistaken for a term of the chain.

use super::super::verify::Theorem;
use crate::subject::{Hash, Literal, NodeId, NodeKind, Running, Subject};
use rustc_hash::FxHashMap;

/// Words of 64 patterns.
pub(super) const WORDS: usize = 16;
/// The values of one node.
pub(super) type Values = [u64; WORDS];

/// Most nodes of one cone: this many per position, and a base.
const NODES_PER_POSITION: usize = 512;
const NODES: usize = 4096;

/// Which positions a node depends on, by structure. Where one net is an operand
/// of several positions its lowest and its highest are told apart, so each end
/// lies between two bounds.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Reach {
    /// Between these lies the lowest position; -1 is the carry-in.
    pub(super) low: (i32, i32),
    /// Between these lies the highest.
    pub(super) high: (i32, i32),
    /// Whether something beside the operands is reached.
    pub(super) foreign: bool,
}

impl Reach {
    fn join(self, other: Self) -> Self {
        Self {
            low: self.low.min(other.low),
            high: (self.high.0.max(other.high.0), self.high.1.max(other.high.1)),
            foreign: self.foreign || other.foreign,
        }
    }
}

/// The cone of one theorem.
pub(super) struct Cone {
    /// Its nodes, fan-ins first; operands are not among them.
    pub(super) nodes: Vec<NodeId>,
    /// Where a node stands in `nodes`.
    pub(super) index: FxHashMap<NodeId, u32>,
    /// By operand node, the positions it is an operand of; -1 is the carry-in.
    pub(super) operands: FxHashMap<NodeId, (i32, i32)>,
    /// By position: the values of both operands, as they are added.
    pub(super) addends: Vec<(Values, Values)>,
    /// The values of the carry-in.
    pub(super) carry_in: Values,
    /// By node of `nodes`.
    pub(super) reach: Vec<Reach>,
    /// By node of `nodes`, normalised.
    pub(super) hashes: Vec<Hash>,
}

impl Cone {
    /// Gathers and simulates it; `None` when it is too large.
    pub(super) fn of(subject: &Subject, theorem: &Theorem) -> Option<Self> {
        let operands = operands(theorem);
        let nodes = gather(subject, theorem, &operands)?;
        let mut random = fastrand::Rng::with_seed(1);
        let mut values: FxHashMap<NodeId, Values> = FxHashMap::default();
        values.insert(NodeId::FALSE, [0; WORDS]);
        let carry_in = choose(&mut values, theorem.carry_in, None, &mut random);
        let most = usize::BITS - theorem.bits.len().leading_zeros();
        let rare: Vec<u32> = (0..WORDS as u32).map(|w| 1 + w % (most + 1)).collect();
        let addends: Vec<(Values, Values)> = theorem
            .bits
            .iter()
            .map(|bits| {
                let constant = |literal: Literal| literal.node() == NodeId::FALSE;
                let (first, second) = if constant(bits.b) {
                    (bits.b, bits.a)
                } else {
                    (bits.a, bits.b)
                };
                let one = choose(&mut values, first, None, &mut random);
                let opposite: Values =
                    std::array::from_fn(|w| !one[w] ^ seldom(rare[w], &mut random));
                let other = choose(&mut values, second, Some(opposite), &mut random);
                if constant(bits.b) {
                    (other, one)
                } else {
                    (one, other)
                }
            })
            .collect();
        let mut cone = Self {
            index: FxHashMap::default(),
            reach: Vec::with_capacity(nodes.len()),
            hashes: Vec::with_capacity(nodes.len()),
            nodes,
            operands,
            addends,
            carry_in,
        };
        cone.simulate(subject, &mut values, &mut random);
        Some(cone)
    }

    fn simulate(
        &mut self,
        subject: &Subject,
        operand_values: &mut FxHashMap<NodeId, Values>,
        random: &mut fastrand::Rng,
    ) {
        let mut own: Vec<Values> = Vec::with_capacity(self.nodes.len());
        for (at, &node) in self.nodes.iter().enumerate() {
            self.index.insert(node, at as u32);
            let read = |node: NodeId| match self.index.get(&node) {
                Some(&at) => own[at as usize],
                None => operand_values[&node],
            };
            let literal = |literal: Literal| {
                let mask = if literal.is_inverted() { !0 } else { 0 };
                read(literal.node()).map(|word| word ^ mask)
            };
            let value: Values = match subject.kind(node) {
                NodeKind::And(x, y) => zip(literal(x), literal(y), |x, y| x & y),
                NodeKind::Xor(x, y) => zip(read(x), read(y), |x, y| x ^ y),
                NodeKind::False => [0; WORDS],
                NodeKind::Free(_) => std::array::from_fn(|_| random.u64(..)),
            };
            let reach = self.reach_of(subject, node);
            self.reach.push(reach);
            self.hashes.push(hash(&value));
            own.push(value);
        }
    }

    fn reach_of(&self, subject: &Subject, node: NodeId) -> Reach {
        let foreign = Reach {
            low: (i32::MAX, i32::MAX),
            high: (i32::MIN, i32::MIN),
            foreign: true,
        };
        let of = |node: NodeId| {
            if node == NodeId::FALSE {
                return Reach {
                    foreign: false,
                    ..foreign
                };
            }
            match (self.index.get(&node), self.operands.get(&node)) {
                (Some(&at), _) => self.reach[at as usize],
                (None, Some(&ends)) => Reach {
                    low: ends,
                    high: ends,
                    foreign: false,
                },
                (None, None) => foreign,
            }
        };
        match subject.kind(node) {
            NodeKind::And(x, y) => of(x.node()).join(of(y.node())),
            NodeKind::Xor(x, y) => of(x).join(of(y)),
            NodeKind::False | NodeKind::Free(_) => foreign,
        }
    }
}

/// The positions each operand node belongs to.
fn operands(theorem: &Theorem) -> FxHashMap<NodeId, (i32, i32)> {
    let mut operands: FxHashMap<NodeId, (i32, i32)> = FxHashMap::default();
    let mut add = |literal: Literal, at: i32| {
        if literal.node() != NodeId::FALSE {
            let ends = operands.entry(literal.node()).or_insert((at, at));
            *ends = (ends.0.min(at), ends.1.max(at));
        }
    };
    add(theorem.carry_in, -1);
    for (at, bits) in theorem.bits.iter().enumerate() {
        add(bits.a, at as i32);
        add(bits.b, at as i32);
    }
    operands
}

fn gather(
    subject: &Subject,
    theorem: &Theorem,
    operands: &FxHashMap<NodeId, (i32, i32)>,
) -> Option<Vec<NodeId>> {
    let most = NODES + NODES_PER_POSITION * theorem.bits.len();
    let mut seen = rustc_hash::FxHashSet::default();
    let results = theorem.sums.iter().chain(&theorem.carries).flatten();
    let mut stack: Vec<NodeId> = results.map(|literal| literal.node()).collect();
    while let Some(node) = stack.pop() {
        if operands.contains_key(&node) || node == NodeId::FALSE || !seen.insert(node) {
            continue;
        }
        if seen.len() > most {
            return None;
        }
        match subject.kind(node) {
            NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
            NodeKind::Xor(x, y) => stack.extend([x, y]),
            NodeKind::False | NodeKind::Free(_) => {}
        }
    }
    let mut nodes: Vec<NodeId> = seen.into_iter().collect();
    // Ascending numbers are a topological order.
    nodes.sort_unstable();
    Some(nodes)
}

/// The values of a literal; where its node has none yet they become `wanted`, or
/// random.
fn choose(
    values: &mut FxHashMap<NodeId, Values>,
    literal: Literal,
    wanted: Option<Values>,
    random: &mut fastrand::Rng,
) -> Values {
    let mask = if literal.is_inverted() { !0 } else { 0 };
    let wanted = wanted.unwrap_or_else(|| std::array::from_fn(|_| random.u64(..)));
    let own = values
        .entry(literal.node())
        .or_insert_with(|| wanted.map(|word| word ^ mask));
    own.map(|word| word ^ mask)
}

/// A word whose bits are 1 once in 2^`rare`.
fn seldom(rare: u32, random: &mut fastrand::Rng) -> u64 {
    (0..rare).fold(!0, |word, _| word & random.u64(..))
}

/// Both, word by word.
#[inline]
pub(super) fn zip(x: Values, y: Values, with: impl Fn(u64, u64) -> u64) -> Values {
    std::array::from_fn(|w| with(x[w], y[w]))
}

/// The signature of a node with these values: the same for a complement, and
/// linear under exclusive or, as all signatures here.
pub(super) fn hash(values: &Values) -> Hash {
    let (mut own, mut ones) = (Running::default(), Running::default());
    for &word in values {
        own.feed(word);
        ones.feed(!0);
    }
    let ones = ones.normalised(false, 0);
    own.normalised(values[0] & 1 == 1, ones)
}
