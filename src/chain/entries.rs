//! Entries: the bit positions a netlist could be read as having.
//!
//! An entry `(s; a, b)` says that `s = a ⊕ b ⊕ c` for some carry `c`, whether or
//! not a net carries it: the signature of `c` is `hash(s) ⊕ hash(a) ⊕ hash(b)`,
//! the entry's key. `b` is constant in incrementers. A second pass over the same
//! patterns computes the signature of `majority(a, b, c)`; the three variants
//! with one of `a`, `b`, `c` inverted follow by linearity:
//! `majority(¬a, b, c) = majority(a, b, c) ⊕ b ⊕ c`, and so on.

use crate::subject::{
    Hash, Linear, LinearSet, NodeId, NodeKind, Patterns, Running, Signatures, Simulation, Subject,
    linear_sets,
};
use fixedbitset::FixedBitSet;

/// An entry's index.
pub(super) type EntryId = u32;

/// Which one of `a`, `b`, `c` is inverted relative to the positive nodes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Variant {
    Plain,
    A,
    B,
    Carry,
}

impl Variant {
    pub(super) const ALL: [Self; 4] = [Self::Plain, Self::A, Self::B, Self::Carry];

    /// Whether `a`, `b`, `c` are inverted.
    pub(super) fn inverted(self) -> (bool, bool, bool) {
        (self == Self::A, self == Self::B, self == Self::Carry)
    }
}

/// Leaves of one sum that are paired with each other, and free ones of them
/// that are always among them.
const LEAVES: usize = 6;
const FREE_LEAVES: usize = 4;

/// The pairs of the first sum.
fn own_pairs(pairs: &[Linear]) -> Option<&[Linear]> {
    let first = pairs.first()?;
    let end = pairs.iter().position(|pair| pair.sum != first.sum);
    Some(&pairs[..end.unwrap_or(pairs.len())])
}

/// All entries; those of one sum are neighbours.
pub(super) struct Entries {
    pub(super) sum: Vec<NodeId>,
    pub(super) a: Vec<NodeId>,
    /// [`NodeId::FALSE`] when the entry has one operand.
    pub(super) b: Vec<NodeId>,
    majority: Vec<Hash>,
}

impl Entries {
    /// Nominates entries from linear sets and hashes their carries.
    pub(super) fn of(
        subject: &Subject,
        signatures: &Signatures,
        patterns: &Patterns,
        on_net: &FixedBitSet,
        pairs: &[Linear],
        moded: &[(NodeId, NodeId, NodeId)],
    ) -> Self {
        let mut entries = Self {
            sum: Vec::new(),
            a: Vec::new(),
            b: Vec::new(),
            majority: Vec::new(),
        };
        let mut rest = pairs;
        linear_sets(subject, |set| {
            if on_net.contains(set.sum.index()) {
                while let Some(own) = own_pairs(rest)
                    && own[0].sum < set.sum
                {
                    entries.nominate_flips(subject, signatures, own, pairs, moded);
                    rest = &rest[own.len()..];
                }
                entries.nominate(set, on_net);
            }
        });
        while let Some(own) = own_pairs(rest) {
            entries.nominate_flips(subject, signatures, own, pairs, moded);
            rest = &rest[own.len()..];
        }
        entries.sum.shrink_to_fit();
        entries.a.shrink_to_fit();
        entries.b.shrink_to_fit();
        entries.hash_majorities(subject, signatures, patterns);
        entries
    }

    /// Adds an entry, unless it is there among those of the same sum, which are
    /// the last ones.
    fn offer(&mut self, sum: NodeId, a: NodeId, b: NodeId) {
        let (a, b) = if a == NodeId::FALSE { (b, a) } else { (a, b) };
        let own = (0..self.sum.len()).rev();
        let mut own = own.take_while(|&i| self.sum[i] == sum);
        if a == NodeId::FALSE || own.any(|i| self.a[i] == a && self.b[i] == b) {
            return;
        }
        self.sum.push(sum);
        self.a.push(a);
        self.b.push(b);
    }

    /// Nominates from the leaves in which one sum was found to be linear.
    fn nominate_flips(
        &mut self,
        subject: &Subject,
        signatures: &Signatures,
        own: &[Linear],
        all: &[Linear],
        moded: &[(NodeId, NodeId, NodeId)],
    ) {
        let sum = own[0].sum;
        let is_free = |leaf: NodeId| matches!(subject.kind(leaf), NodeKind::Free(_));
        let free = own.iter().filter(|pair| is_free(pair.leaf)).count();
        // A node linear in many inputs is a parity; its near leaves may matter.
        let mut leaves: Vec<NodeId> = own
            .iter()
            .rev()
            .map(|pair| pair.leaf)
            .filter(|&leaf| free <= FREE_LEAVES || !is_free(leaf))
            .take(LEAVES)
            .collect();
        if free <= FREE_LEAVES {
            leaves.extend(own.iter().map(|pair| pair.leaf).filter(|&l| is_free(l)));
            leaves.sort_unstable();
            leaves.dedup();
        }
        let depends = |sum, leaf| all.binary_search(&Linear { sum, leaf }).is_ok();
        let hash = |node| signatures.hash(node);
        for (i, &x) in leaves.iter().enumerate() {
            for &y in &leaves[i + 1..] {
                // Both are to enter the sum, not one through the other.
                let carry = hash(sum) ^ hash(x) ^ hash(y);
                if carry != 0 && !depends(x, y) && !depends(y, x) {
                    self.offer(sum, x, y);
                }
            }
        }
        let start = moded.partition_point(|&(other, _, _)| other < sum);
        let moded = moded[start..].iter().take_while(|each| each.0 == sum);
        for &(_, plain, other) in moded {
            self.offer(sum, plain, other);
        }
        if leaves.len() <= 2 {
            for &x in leaves.iter().filter(|&&x| is_free(x)) {
                self.offer(sum, x, NodeId::FALSE);
            }
        }
    }

    fn nominate(&mut self, set: LinearSet, on_net: &FixedBitSet) {
        let mut offer = |a: NodeId, b: NodeId| {
            if on_net.contains(a.index()) && on_net.contains(b.index()) {
                self.offer(set.sum, a, b);
            }
        };
        match *set.leaves() {
            [x] => offer(x, NodeId::FALSE),
            [x, y] => {
                offer(x, y);
                offer(x, NodeId::FALSE);
                offer(y, NodeId::FALSE);
            }
            [x, y, z] => {
                offer(x, y);
                offer(x, z);
                offer(y, z);
            }
            _ => {}
        }
    }

    fn hash_majorities(&mut self, subject: &Subject, signatures: &Signatures, patterns: &Patterns) {
        let mut running = vec![Running::default(); self.len()];
        let mut first = FixedBitSet::with_capacity(self.len());
        let mut simulation = Simulation::new(subject, patterns);
        let mut is_first = true;
        while let Some(words) = simulation.advance() {
            for (i, hash) in running.iter_mut().enumerate() {
                let a = words[self.a[i].index()];
                let b = words[self.b[i].index()];
                let c = words[self.sum[i].index()] ^ a ^ b;
                let majority = (a & b) ^ (c & (a ^ b));
                hash.feed(majority);
                if is_first {
                    first.set(i, majority & 1 == 1);
                }
            }
            is_first = false;
        }
        let ones = signatures.ones();
        self.majority = running
            .into_iter()
            .enumerate()
            .map(|(i, hash)| hash.normalised(first.contains(i), ones))
            .collect();
    }

    /// Number of entries.
    pub(super) fn len(&self) -> usize {
        self.sum.len()
    }

    /// The signature of the carry into the position; 0 when it is constant.
    pub(super) fn key(&self, entry: EntryId, signatures: &Signatures) -> Hash {
        let i = entry as usize;
        signatures.hash(self.sum[i]) ^ signatures.hash(self.a[i]) ^ signatures.hash(self.b[i])
    }

    /// The signature of the carry out of the position.
    pub(super) fn carry_out(
        &self,
        entry: EntryId,
        variant: Variant,
        signatures: &Signatures,
    ) -> Hash {
        let i = entry as usize;
        let (a, b) = (signatures.hash(self.a[i]), signatures.hash(self.b[i]));
        let majority = self.majority[i];
        match variant {
            Variant::Plain => majority,
            Variant::A => majority ^ b ^ self.key(entry, signatures),
            Variant::B => majority ^ a ^ self.key(entry, signatures),
            Variant::Carry => majority ^ a ^ b,
        }
    }

    /// Whether the entry has two operands.
    pub(super) fn has_two(&self, entry: EntryId) -> bool {
        self.b[entry as usize] != NodeId::FALSE
    }

    /// The entries that share `entry`'s sum, itself among them.
    pub(super) fn siblings(&self, entry: EntryId) -> std::ops::Range<EntryId> {
        let sum = self.sum[entry as usize];
        let (mut start, mut end) = (entry, entry + 1);
        while start > 0 && self.sum[start as usize - 1] == sum {
            start -= 1;
        }
        while (end as usize) < self.len() && self.sum[end as usize] == sum {
            end += 1;
        }
        start..end
    }
}
