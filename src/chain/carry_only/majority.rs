//! Nominates majorities: nodes `n = majority(x, y, v)` of nearby literals.
//!
//! Re-association leaves no three-leaf cut around a carry, so leaves are
//! gathered by meaning: from an AND its factors, from an OR its terms, two
//! levels of each, exclusive ors also by what they combine. A triple of them is
//! nominated when it fits two words of patterns, and kept when the signature of
//! its majority over all patterns is the node's. Work per node is bounded; what
//! a chain with sums owns is not looked at.

use crate::subject::{
    Hash, Literal, NodeId, NodeKind, Patterns, Running, Signatures, Simulation, Subject,
};
use fixedbitset::FixedBitSet;

/// Literals looked at around one node.
const POOL: usize = 20;
/// Triples kept per node.
const KEPT: usize = 4;
/// Words of patterns a triple has to fit before its signature is computed.
const WORDS: usize = 2;

/// Triples of values, of eight, that three leaves take at least. Where one is
/// the exclusive or of the others there are four.
const TRIPLES: u32 = 6;

/// Whether leaves that take these triples of values are free of each other: no
/// one implies or makes up another.
fn are_free(triples: u8) -> bool {
    let takes = |mask: u8| triples & mask != 0;
    let leaf = [0xAA_u8, 0xCC, 0xF0];
    let pairs = [(0, 1), (0, 2), (1, 2)].into_iter().all(|(i, j)| {
        let (x, y): (u8, u8) = (leaf[i], leaf[j]);
        takes(x & y) && takes(x & !y) && takes(!x & y) && takes(!x & !y)
    });
    pairs && triples.count_ones() >= TRIPLES
}

/// A node and three literals of which it is the majority, as signatures say.
#[derive(Clone, Copy, Debug)]
pub(super) struct Majority {
    pub(super) node: NodeId,
    pub(super) leaves: [Literal; 3],
}

/// A few words of every node's values.
struct Words(Vec<[u64; WORDS]>);

impl Words {
    fn of(subject: &Subject, patterns: &Patterns) -> Self {
        let mut all = vec![[0; WORDS]; subject.node_count()];
        let mut simulation = Simulation::new(subject, patterns);
        for slot in 0..WORDS {
            let Some(words) = simulation.advance() else {
                break;
            };
            for (values, &word) in all.iter_mut().zip(words) {
                values[slot] = word;
            }
        }
        Self(all)
    }

    fn at(&self, literal: Literal) -> [u64; WORDS] {
        let mask = if literal.is_inverted() { !0 } else { 0 };
        self.0[literal.node().index()].map(|word| word ^ mask)
    }
}

/// Nearby literals of a node, without duplicates and constants.
struct Pool {
    literals: [Literal; POOL],
    len: usize,
}

impl Pool {
    fn add(&mut self, literal: Literal) {
        let known = &self.literals[..self.len];
        if self.len < POOL && literal.node() != NodeId::FALSE && !known.contains(&literal) {
            self.literals[self.len] = literal;
            self.len += 1;
        }
    }

    /// A literal, and what it combines when it is an exclusive or.
    fn add_with_parts(&mut self, subject: &Subject, literal: Literal) {
        self.add(literal);
        if let NodeKind::Xor(x, y) = subject.kind(literal.node()) {
            for part in [x, y] {
                self.add(part.literal());
                self.add(!part.literal());
            }
        }
    }

    /// The terms of an OR, their factors, and the terms of an OR among them.
    fn add_terms(&mut self, subject: &Subject, or: Literal) {
        let Some(terms) = parts(subject, !or) else {
            return;
        };
        for term in terms.map(|term| !term) {
            self.add_with_parts(subject, term);
            if let Some(factors) = parts(subject, term) {
                for factor in factors {
                    self.add_with_parts(subject, factor);
                }
            } else if let Some(terms) = parts(subject, !term) {
                for term in terms {
                    self.add(!term);
                }
            }
        }
    }

    fn around(subject: &Subject, node: NodeId) -> Self {
        let mut pool = Self {
            literals: [Literal::FALSE; POOL],
            len: 0,
        };
        for factor in parts(subject, node.literal()).into_iter().flatten() {
            pool.add_with_parts(subject, factor);
            pool.add_terms(subject, factor);
            for inner in parts(subject, factor).into_iter().flatten() {
                pool.add_with_parts(subject, inner);
                pool.add_terms(subject, inner);
            }
        }
        pool
    }
}

/// The two factors of an AND read in positive form.
fn parts(subject: &Subject, literal: Literal) -> Option<[Literal; 2]> {
    match subject.kind(literal.node()) {
        NodeKind::And(x, y) if !literal.is_inverted() => Some([x, y]),
        _ => None,
    }
}

/// All majorities, by ascending node.
pub(super) fn majorities(
    subject: &Subject,
    signatures: &Signatures,
    patterns: &Patterns,
    on_net: &FixedBitSet,
    owned: &FixedBitSet,
) -> Vec<Majority> {
    let words = Words::of(subject, patterns);
    let mut nominated = Vec::new();
    for node in subject.nodes() {
        if matches!(subject.kind(node), NodeKind::And(..)) && !owned.contains(node.index()) {
            nominate(subject, &words, on_net, node, &mut nominated);
        }
    }
    drop(words);
    confirm(subject, signatures, patterns, nominated)
}

fn nominate(
    subject: &Subject,
    words: &Words,
    on_net: &FixedBitSet,
    node: NodeId,
    nominated: &mut Vec<Majority>,
) {
    let own = words.at(node.literal());
    if own == [0; WORDS] || own == [!0; WORDS] {
        return;
    }
    let pool = Pool::around(subject, node);
    let literals = &pool.literals[..pool.len];
    let mut values = [[0; WORDS]; POOL];
    for (value, &literal) in values.iter_mut().zip(literals) {
        *value = words.at(literal);
    }
    let is_named = |at: usize| on_net.contains(literals[at].node().index());
    let fits = |i: usize, j: usize| {
        (0..WORDS).all(|w| {
            let (x, y) = (values[i][w], values[j][w]);
            x & y & !own[w] == 0 && own[w] & !(x | y) == 0
        })
    };
    let mut kept = 0;
    for i in 0..literals.len() {
        for j in i + 1..literals.len() {
            if literals[i].node() == literals[j].node() || !fits(i, j) {
                continue;
            }
            for k in j + 1..literals.len() {
                let distinct = literals[k].node() != literals[i].node()
                    && literals[k].node() != literals[j].node();
                let third = (0..WORDS).all(|w| {
                    let (x, y, v) = (values[i][w], values[j][w], values[k][w]);
                    (v ^ own[w]) & (x ^ y) == 0
                });
                // Each leaf decides for some pattern, or it is none.
                let decides = |i: usize, j: usize| values[i] != values[j];
                if !distinct || !third || !decides(i, j) || !decides(i, k) || !decides(j, k) {
                    continue;
                }
                if [i, j, k].into_iter().filter(|&at| is_named(at)).count() < 2 {
                    continue;
                }
                nominated.push(Majority {
                    node,
                    leaves: [literals[i], literals[j], literals[k]],
                });
                kept += 1;
                if kept == KEPT {
                    return;
                }
            }
        }
    }
}

/// Keeps the triples whose majority has the node's signature and of which every
/// two leaves take all four pairs of values. Where one leaf implies another the
/// majority is only `g + p·v`, which any alternation of AND and OR is.
fn confirm(
    subject: &Subject,
    signatures: &Signatures,
    patterns: &Patterns,
    mut nominated: Vec<Majority>,
) -> Vec<Majority> {
    if nominated.is_empty() {
        return nominated;
    }
    let mut running = vec![Running::default(); nominated.len()];
    let mut first = FixedBitSet::with_capacity(nominated.len());
    let mut triples_seen = vec![0u8; nominated.len()];
    let mut simulation = Simulation::new(subject, patterns);
    let mut is_first = true;
    while let Some(words) = simulation.advance() {
        let value = |literal: Literal| {
            let mask = if literal.is_inverted() { !0 } else { 0 };
            words[literal.node().index()] ^ mask
        };
        for (i, (hash, each)) in running.iter_mut().zip(&nominated).enumerate() {
            let [x, y, v] = each.leaves.map(value);
            let majority = (x & y) | (v & (x | y));
            hash.feed(majority);
            for triple in 0..8u8 {
                let side = |word: u64, bit: u8| word ^ if triple >> bit & 1 == 1 { 0 } else { !0 };
                let lanes = side(x, 0) & side(y, 1) & side(v, 2);
                triples_seen[i] |= u8::from(lanes != 0) << triple;
            }
            if is_first {
                first.set(i, majority & 1 == 1);
            }
        }
        is_first = false;
    }
    let ones = signatures.ones();
    let mut at = 0;
    nominated.retain(|each| {
        let hash: Hash = running[at].normalised(first.contains(at), ones);
        let are_free = are_free(triples_seen[at]);
        at += 1;
        are_free && hash == signatures.hash(each.node)
    });
    nominated
}
