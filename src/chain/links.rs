//! Links between entries, and the longest paths over them.
//!
//! Entry `i` links to entry `j` when the signature of a carry out of `i` is the
//! key of `j`. Links are candidates: a path of them becomes a chain only when it
//! is proven. A depth-first search gives the longest path from every entry (a
//! link back onto the search path is ignored); paths are then taken longest
//! first, so that no two share a sum. A first position without carry-in may be
//! shared, since an adder and a subtractor of the same operands share it.

use super::entries::{Entries, EntryId, Variant};
use crate::subject::{Hash, NodeId, Signatures, Subject};
use fixedbitset::FixedBitSet;
use rustc_hash::FxHashSet;
use std::collections::BinaryHeap;

/// More links than this from one entry and variant are not followed.
const FAN: usize = 32;

/// The links of all entries, grouped by where they start.
pub(super) struct Links {
    starts: Vec<u32>,
    to: Vec<(EntryId, Variant)>,
}

/// Entries by key, found through a table of buckets over the sorted keys.
struct KeyIndex {
    sorted: Vec<(Hash, EntryId)>,
    buckets: Vec<u32>,
    shift: u32,
}

impl KeyIndex {
    fn new(entries: &Entries, signatures: &Signatures) -> Self {
        let mut sorted: Vec<(Hash, EntryId)> = (0..entries.len() as EntryId)
            .map(|entry| (entries.key(entry, signatures), entry))
            .filter(|&(key, _)| key != 0)
            .collect();
        sorted.sort_unstable();
        let bits = sorted.len().max(1).ilog2() + 1;
        let shift = 64 - bits;
        let mut buckets = vec![0u32; (1 << bits) + 1];
        for &(key, _) in &sorted {
            buckets[(key >> shift) as usize + 1] += 1;
        }
        for i in 1..buckets.len() {
            buckets[i] += buckets[i - 1];
        }
        Self {
            sorted,
            buckets,
            shift,
        }
    }

    fn find(&self, key: Hash) -> impl Iterator<Item = EntryId> + '_ {
        let bucket = (key >> self.shift) as usize;
        let range = self.buckets[bucket] as usize..self.buckets[bucket + 1] as usize;
        self.sorted[range]
            .iter()
            .filter(move |&&(k, _)| k == key)
            .map(|&(_, entry)| entry)
    }
}

impl Links {
    /// Looks every carry out up among the keys.
    pub(super) fn of(entries: &Entries, signatures: &Signatures) -> Self {
        let index = KeyIndex::new(entries, signatures);
        let (mut starts, mut to) = (vec![0], Vec::new());
        for entry in 0..entries.len() as EntryId {
            let sum = entries.sum[entry as usize];
            for variant in Variant::ALL {
                let key = entries.carry_out(entry, variant, signatures);
                // A carry equal to one of its own inputs is no majority of
                // independent bits, only a coincidence that goes on.
                let i = entry as usize;
                let inputs = [
                    signatures.hash(entries.a[i]),
                    signatures.hash(entries.b[i]),
                    entries.key(entry, signatures),
                ];
                if key == 0 || inputs.contains(&key) {
                    continue;
                }
                let found = index
                    .find(key)
                    .filter(|&next| entries.sum[next as usize] != sum)
                    .take(FAN)
                    .map(|next| (next, variant));
                to.extend(found);
            }
            starts.push(to.len() as u32);
        }
        Self { starts, to }
    }

    pub(super) fn from(&self, entry: EntryId) -> &[(EntryId, Variant)] {
        let i = entry as usize;
        &self.to[self.starts[i] as usize..self.starts[i + 1] as usize]
    }

    /// The variant that links `from` to `to`.
    pub(super) fn between(&self, from: EntryId, to: EntryId) -> Option<Variant> {
        self.from(from)
            .iter()
            .find(|&&(next, _)| next == to)
            .map(|&(_, variant)| variant)
    }
}

/// Length of the longest path that starts at each entry, and how many of its
/// positions have two operands.
struct Reach(Vec<(u32, u32)>);

impl Reach {
    fn of(entries: &Entries, links: &Links) -> Self {
        let mut reach = vec![(0, 0); entries.len()];
        let mut on_path = FixedBitSet::with_capacity(entries.len());
        let mut stack: Vec<(EntryId, usize)> = Vec::new();
        for start in 0..entries.len() as EntryId {
            if reach[start as usize].0 != 0 {
                continue;
            }
            stack.push((start, 0));
            on_path.insert(start as usize);
            while let Some((entry, at)) = stack.last_mut() {
                let (entry, next) = (*entry, links.from(*entry).get(*at));
                *at += 1;
                if let Some(&(next, _)) = next {
                    if reach[next as usize].0 == 0 && !on_path.put(next as usize) {
                        stack.push((next, 0));
                    }
                    continue;
                }
                let best = links
                    .from(entry)
                    .iter()
                    .map(|&(n, _)| reach[n as usize])
                    .max();
                let (length, two) = best.unwrap_or((0, 0));
                let own = u32::from(entries.has_two(entry));
                reach[entry as usize] = (length + 1, two + own);
                on_path.set(entry as usize, false);
                stack.pop();
            }
        }
        Self(reach)
    }
}

/// Ranks the ways to go on from a path; larger is better.
pub(super) trait Preference {
    /// How well `next` continues `current`.
    fn continues(&self, current: EntryId, next: EntryId) -> u32;
}

/// Candidate paths, longest first, sharing no sum; each at least `shortest`
/// positions long.
pub(super) fn paths(
    subject: &Subject,
    entries: &Entries,
    links: &Links,
    signatures: &Signatures,
    preference: &impl Preference,
    shortest: usize,
) -> Vec<Vec<EntryId>> {
    let reach = Reach::of(entries, links);
    let mut heap: BinaryHeap<((u32, u32), std::cmp::Reverse<EntryId>)> = (0..entries.len())
        .filter(|&i| reach.0[i].0 as usize >= shortest)
        .map(|i| (reach.0[i], std::cmp::Reverse(i as EntryId)))
        .collect();
    let mut used = FixedBitSet::with_capacity(subject.node_count());
    let mut found = Vec::new();
    while let Some((claimed, std::cmp::Reverse(start))) = heap.pop() {
        let path = trace(entries, links, &reach, signatures, preference, &used, start);
        if path.len() < shortest {
            continue;
        }
        let two = path.iter().filter(|&&entry| entries.has_two(entry)).count() as u32;
        let real = (path.len() as u32, two);
        if real < claimed && path.len() < claimed.0 as usize {
            heap.push((real, std::cmp::Reverse(start)));
            continue;
        }
        for (i, &entry) in path.iter().enumerate() {
            if i > 0 || entries.key(entry, signatures) != 0 {
                used.insert(entries.sum[entry as usize].index());
            }
        }
        found.push(path);
    }
    found
}

fn trace(
    entries: &Entries,
    links: &Links,
    reach: &Reach,
    signatures: &Signatures,
    preference: &impl Preference,
    used: &FixedBitSet,
    start: EntryId,
) -> Vec<EntryId> {
    let mut path: Vec<EntryId> = Vec::new();
    if used.contains(entries.sum[start as usize].index()) {
        return path;
    }
    // A chain's operand is none of its own sums or carries.
    let mut sums: FxHashSet<NodeId> = FxHashSet::default();
    let mut carries: FxHashSet<Hash> = FxHashSet::default();
    let mut operands: FxHashSet<NodeId> = FxHashSet::default();
    let mut current = start;
    loop {
        let i = current as usize;
        path.push(current);
        sums.insert(entries.sum[i]);
        operands.insert(entries.a[i]);
        operands.insert(entries.b[i]);
        let key = entries.key(current, signatures);
        if key != 0 {
            carries.insert(key);
        }
        let fits = |next: EntryId| {
            let n = next as usize;
            let key = entries.key(next, signatures);
            let sum = entries.sum[n];
            let clean = |operand: NodeId| {
                let hash = signatures.hash(operand);
                operand == NodeId::FALSE
                    || (!sums.contains(&operand) && !carries.contains(&hash) && hash != key)
            };
            !used.contains(sum.index())
                && !sums.contains(&sum)
                && !operands.contains(&sum)
                && !carries.contains(&key)
                && clean(entries.a[n])
                && clean(entries.b[n])
        };
        let next = links
            .from(current)
            .iter()
            .map(|&(next, _)| next)
            .filter(|&next| fits(next))
            .max_by_key(|&next| {
                let (length, two) = reach.0[next as usize];
                let preferred = preference.continues(current, next);
                (length, two, preferred, std::cmp::Reverse(next))
            });
        match next {
            Some(next) => current = next,
            None => return path,
        }
    }
}
