//! From a path of entries to a candidate: operands with polarities, a carry-in
//! that exists, a first position that makes sense.
//!
//! Within a candidate every carry has one definite polarity: `carry` of
//! position `i + 1` is the majority of the (possibly inverted) operands and the
//! carry of position `i`. A reading and its dual (everything inverted) are the
//! same theorem; which one is told is decided later.

use super::entries::{Entries, EntryId, Variant};
use super::label::Labels;
use super::links::Links;
use crate::subject::{Hash, Literal, NodeId, Signatures, Subject};
use fixedbitset::FixedBitSet;
use rustc_hash::{FxHashMap, FxHashSet};

/// One position: `sum = a ⊕ b ⊕ carry`, all with their polarity.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Bits {
    pub(super) sum: Literal,
    pub(super) a: Literal,
    pub(super) b: Literal,
}

/// A path made definite.
#[derive(Clone, Debug)]
pub(super) struct Candidate {
    pub(super) path: Vec<EntryId>,
    pub(super) bits: Vec<Bits>,
    pub(super) carry_in: Literal,
}

/// Nodes by hash, for the hashes somebody asked for.
pub(super) struct Lookup(FxHashMap<Hash, Vec<NodeId>>);

impl Lookup {
    /// One pass over the nodes, ascending.
    pub(super) fn of(
        subject: &Subject,
        signatures: &Signatures,
        on_net: &FixedBitSet,
        wanted: &FxHashSet<Hash>,
    ) -> Self {
        let mut map: FxHashMap<Hash, Vec<NodeId>> = FxHashMap::default();
        for node in subject.nodes() {
            let hash = signatures.hash(node);
            if on_net.contains(node.index()) && wanted.contains(&hash) {
                map.entry(hash).or_default().push(node);
            }
        }
        Self(map)
    }

    /// The nodes with that hash.
    pub(super) fn nodes(&self, hash: Hash) -> &[NodeId] {
        self.0.get(&hash).map_or(&[], Vec::as_slice)
    }
}

/// What candidates are resolved against.
pub(super) struct Context<'a> {
    pub(super) entries: &'a Entries,
    pub(super) links: &'a Links,
    pub(super) signatures: &'a Signatures,
    pub(super) labels: &'a Labels<'a>,
}

impl Context<'_> {
    fn is_single(&self, entry: EntryId) -> bool {
        !self.entries.has_two(entry)
    }

    /// Chooses among the entries that share the first position's sum.
    ///
    /// A full adder is symmetric, so its carry-in could be any of its three
    /// inputs; a half adder could also be one bit of an incrementer whose
    /// carry-in is the other operand. Buses decide, then even spacing of net
    /// numbers, then the fewest inputs taken for carries.
    pub(super) fn settle_start(&self, path: &mut [EntryId]) {
        let [first, second, ..] = *path else { return };
        let third = path.get(2).copied();
        let all_single = path[1..].iter().all(|&entry| self.is_single(entry));
        let best = self
            .entries
            .siblings(first)
            .filter(|&entry| self.links.between(entry, second).is_some())
            .filter(|&entry| !all_single || self.is_single(entry))
            .max_by_key(|&entry| {
                let score = self.start_score(entry, second, third, all_single);
                (score, std::cmp::Reverse(entry))
            });
        if let Some(best) = best {
            path[0] = best;
        }
    }

    fn start_score(
        &self,
        entry: EntryId,
        second: EntryId,
        third: Option<EntryId>,
        all_single: bool,
    ) -> (bool, u32, bool, u32) {
        let operands = |entry: EntryId| {
            let i = entry as usize;
            [self.entries.a[i], self.entries.b[i]]
                .into_iter()
                .filter(|&n| n != NodeId::FALSE)
        };
        let mut bus = 0;
        let mut spaced = 0;
        for low in operands(entry) {
            let named = operands(second)
                .map(|mid| self.labels.follows(low, mid))
                .max();
            bus += named.unwrap_or(0);
            let even = third.is_some_and(|third| {
                operands(second).any(|mid| {
                    operands(third).any(|high| self.labels.evenly_spaced(low, mid, high))
                })
            });
            spaced += u32::from(even);
        }
        let constant = self.entries.key(entry, self.signatures) == 0;
        let natural = if all_single {
            self.is_counter_bit(entry)
        } else {
            constant
        };
        // Operands combined with a mode inside covers are on no net: all or none.
        let unnamed = |entry| operands(entry).any(|node| self.labels.net(node).is_none());
        let alike = unnamed(entry) == unnamed(second);
        (alike, bus, natural, spaced)
    }

    /// Whether the entry's sum is stored in the register that holds its operand
    /// (the bit of a counter, whose other operand is an enable).
    fn is_counter_bit(&self, entry: EntryId) -> bool {
        let i = entry as usize;
        self.labels.port(self.entries.sum[i]).is_some()
            && self.labels.port(self.entries.a[i]).is_none()
    }

    /// Hashes that proving the path will look up.
    pub(super) fn wanted(&self, path: &[EntryId], wanted: &mut FxHashSet<Hash>) {
        for &entry in path {
            wanted.insert(self.entries.key(entry, self.signatures));
            wanted.insert(self.signatures.hash(self.entries.sum[entry as usize]));
        }
        if let Some(&second) = path.get(1) {
            let siblings = self.entries.siblings(second);
            wanted.extend(siblings.map(|entry| self.entries.key(entry, self.signatures)));
        }
        if let Some(&last) = path.last() {
            for variant in Variant::ALL {
                wanted.insert(self.entries.carry_out(last, variant, self.signatures));
            }
        }
        wanted.remove(&0);
    }

    /// Drops a first position whose carry out is on no net, when the second
    /// can begin the chain in another reading: the lower one was a coincidence
    /// of signatures, true but no part of what was built.
    pub(super) fn drop_unlikely_start(&self, path: &mut Vec<EntryId>, lookup: &Lookup) {
        let is_on_net = |entry| {
            let key = self.entries.key(entry, self.signatures);
            key == 0 || !lookup.nodes(key).is_empty()
        };
        while let [_, second, third, ..] = path[..] {
            if is_on_net(second) {
                return;
            }
            let better = self
                .entries
                .siblings(second)
                .find(|&entry| is_on_net(entry) && self.links.between(entry, third).is_some());
            let Some(better) = better else { return };
            path.remove(0);
            path[0] = better;
            self.settle_start(path);
        }
    }

    /// Makes a path definite. First positions whose carry-in is on no net are
    /// dropped; `None` when nothing is left.
    pub(super) fn resolve(&self, path: &[EntryId], lookup: &Lookup) -> Option<Candidate> {
        let start = path.iter().position(|&entry| {
            let key = self.entries.key(entry, self.signatures);
            key == 0 || !lookup.nodes(key).is_empty()
        })?;
        let path = &path[start..];
        let key = self.entries.key(path[0], self.signatures);
        let first = |node: NodeId| self.signatures.first(node);
        let virtual_carry = |entry: EntryId| {
            let i = entry as usize;
            let (a, b) = (first(self.entries.a[i]), first(self.entries.b[i]));
            first(self.entries.sum[i]) ^ a ^ b
        };
        // The polarity of `sum ⊕ a ⊕ b` relative to the carry, and the value
        // of the carry under the first pattern.
        let mut inverted = false;
        let mut value = virtual_carry(path[0]);
        let carry_in = if key == 0 {
            Literal::constant(value)
        } else {
            let node = lookup.nodes(key)[0];
            node.literal().xor(first(node) != value)
        };
        let mut bits = Vec::with_capacity(path.len());
        let mut polarity = (false, false);
        for (at, &entry) in path.iter().enumerate() {
            let i = entry as usize;
            let next = path.get(at + 1).copied();
            let variant = next.and_then(|next| self.links.between(entry, next));
            if let Some(variant) = variant {
                let (a, b, c) = variant.inverted();
                let flip = inverted ^ c;
                polarity = (a ^ flip, b ^ flip);
            }
            let (a, b) = (self.entries.a[i], self.entries.b[i]);
            let (a, b) = (a.literal().xor(polarity.0), b.literal().xor(polarity.1));
            let sum_inverted = inverted ^ polarity.0 ^ polarity.1;
            bits.push(Bits {
                sum: self.entries.sum[i].literal().xor(sum_inverted),
                a,
                b,
            });
            let value_of = |literal: Literal| first(literal.node()) ^ literal.is_inverted();
            let (x, y) = (value_of(a), value_of(b));
            value = (x & y) | (value & (x | y));
            if let Some(next) = next {
                inverted = value != virtual_carry(next);
            }
        }
        Some(Candidate {
            path: path.to_vec(),
            bits,
            carry_in,
        })
    }
}
