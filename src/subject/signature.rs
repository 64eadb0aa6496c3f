//! Signatures that are linear over GF(2).
//!
//! A node's signature is a running hash `h = step(h) ⊕ word` over its simulated
//! words, with a linear `step` (the xorshift generator of Marsaglia, "Xorshift
//! RNGs", Journal of Statistical Software 8, 2003, whose step is an invertible
//! matrix of full period). Hence `hash(a ⊕ b) = hash(a) ⊕ hash(b)`: the
//! signature of any exclusive or is had without its patterns, and memory does
//! not grow with their number. A node and its complement share one hash, since
//! every hash is normalised by the node's value under the first pattern.

use super::graph::{Literal, NodeId, NodeKind, Subject};
use super::patterns::Patterns;
use fixedbitset::FixedBitSet;

/// A normalised signature. Equal functions have equal hashes, up to
/// complement; a constant has hash 0.
pub type Hash = u64;

#[inline]
fn step(mut h: Hash) -> Hash {
    h ^= h << 13;
    h ^= h >> 7;
    h ^= h << 17;
    h
}

/// The running hash of one bit stream.
#[derive(Clone, Copy, Default, Debug)]
pub(crate) struct Running(Hash);

impl Running {
    #[inline]
    pub(crate) fn feed(&mut self, word: u64) {
        self.0 = step(self.0) ^ word;
    }

    #[inline]
    pub(crate) fn normalised(self, first: bool, ones: Hash) -> Hash {
        if first { self.0 ^ ones } else { self.0 }
    }
}

/// One pass over the patterns: the current word of every node.
pub struct Simulation<'a> {
    subject: &'a Subject,
    patterns: &'a Patterns,
    next: usize,
    words: Vec<u64>,
}

impl<'a> Simulation<'a> {
    /// Starts before the first word.
    pub fn new(subject: &'a Subject, patterns: &'a Patterns) -> Self {
        Self::at(subject, patterns, 0)
    }

    /// Starts before word `next`.
    pub fn at(subject: &'a Subject, patterns: &'a Patterns, next: usize) -> Self {
        Self {
            subject,
            patterns,
            next,
            words: vec![0; subject.node_count()],
        }
    }

    /// Simulates the next word; `None` after the last.
    pub fn advance(&mut self) -> Option<&[u64]> {
        if self.next == self.patterns.words() {
            return None;
        }
        let mut input = self.patterns.word(self.next);
        self.next += 1;
        for node in self.subject.nodes() {
            let value = match self.subject.kind(node) {
                NodeKind::False => 0,
                NodeKind::Free(_) => input(),
                NodeKind::And(x, y) => {
                    let value = |literal: Literal| {
                        let mask = if literal.is_inverted() { !0 } else { 0 };
                        self.words[literal.node().index()] ^ mask
                    };
                    value(x) & value(y)
                }
                NodeKind::Xor(x, y) => self.words[x.index()] ^ self.words[y.index()],
            };
            self.words[node.index()] = value;
        }
        Some(&self.words)
    }
}

/// The literals that the uniform random patterns make true at most `most`
/// times: what a signature could hardly tell from a constant or a neighbour.
pub fn rare_values(subject: &Subject, patterns: &Patterns, most: u32) -> Vec<Literal> {
    let mut ones = vec![0u32; subject.node_count()];
    let mut simulation = Simulation::new(subject, patterns);
    let mut all = 0;
    for word in 0..patterns.words() {
        let Some(words) = simulation.advance() else {
            break;
        };
        if !patterns.is_uniform(word) {
            continue;
        }
        all += 64;
        for (count, word) in ones.iter_mut().zip(words) {
            *count += word.count_ones();
        }
    }
    let gates = subject
        .nodes()
        .filter(|&node| matches!(subject.kind(node), NodeKind::And(..) | NodeKind::Xor(..)));
    gates
        .filter_map(|node| {
            let count = ones[node.index()];
            (count <= most || all - count <= most).then(|| node.literal().xor(count > most))
        })
        .collect()
}

/// The signatures of all nodes.
pub struct Signatures {
    hashes: Vec<Hash>,
    first: FixedBitSet,
    ones: Hash,
}

impl Signatures {
    /// Simulates all patterns once.
    pub fn of(subject: &Subject, patterns: &Patterns) -> Self {
        let mut running = vec![Running::default(); subject.node_count()];
        let mut first = FixedBitSet::with_capacity(subject.node_count());
        let mut ones = Running::default();
        let mut simulation = Simulation::new(subject, patterns);
        let mut is_first = true;
        while let Some(words) = simulation.advance() {
            for (hash, &word) in running.iter_mut().zip(words) {
                hash.feed(word);
            }
            if is_first {
                for (i, &word) in words.iter().enumerate() {
                    first.set(i, word & 1 == 1);
                }
                is_first = false;
            }
            ones.feed(!0);
        }
        let ones = ones.0;
        let hashes = running
            .into_iter()
            .enumerate()
            .map(|(i, hash)| hash.normalised(first.contains(i), ones))
            .collect();
        Self {
            hashes,
            first,
            ones,
        }
    }

    /// Signs nodes that were added to the graph since: exclusive ors, whose
    /// signatures follow from those of their fan-ins.
    pub fn extend(&mut self, subject: &Subject) {
        for node in subject.nodes().skip(self.hashes.len()) {
            let NodeKind::Xor(x, y) = subject.kind(node) else {
                unreachable!("only exclusive ors are added");
            };
            self.hashes.push(self.hash(x) ^ self.hash(y));
            self.first.grow(subject.node_count());
            self.first.set(node.index(), self.first(x) ^ self.first(y));
        }
    }

    /// The normalised hash of a node.
    #[inline]
    pub fn hash(&self, node: NodeId) -> Hash {
        self.hashes[node.index()]
    }

    /// The node's value under the first pattern.
    #[inline]
    pub fn first(&self, node: NodeId) -> bool {
        self.first.contains(node.index())
    }

    /// The hash of the constant 1 before normalising.
    pub(crate) fn ones(&self) -> Hash {
        self.ones
    }
}
