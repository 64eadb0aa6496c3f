//! Speculative copies: stretches of a wider chain built a second time for one
//! value of their carry-in, as in select and conditional-sum adders and behind
//! group generates. They are true chains, and part of the wider one.

use super::label::Labels;
use super::trim::live_bits;
use super::verify::Theorem;
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use rustc_hash::{FxHashMap, FxHashSet};

/// Where a pair of operands stands, and whether inverted against its normal form.
struct Place {
    theorem: usize,
    position: usize,
    inverted: bool,
}

/// Operands up to their order and up to duality, and whether they were inverted
/// for that.
fn normal(a: Literal, b: Literal) -> ((Literal, Literal), bool) {
    let sorted = |x: Literal, y: Literal| (x.min(y), x.max(y));
    let (plain, dual) = (sorted(a, b), sorted(!a, !b));
    (plain.min(dual), dual < plain)
}

/// Drops every theorem that adds, from its low end on, the operands of a stretch
/// of a wider one to a constant carry, and whose own results serve the wider
/// one's; what goes on beyond the stretch counts when it is `min_bits` long.
pub(super) fn fold_copies(
    subject: &Subject,
    labels: &Labels<'_>,
    theorems: &mut Vec<Theorem>,
    min_bits: usize,
) {
    let mut places: FxHashMap<(Literal, Literal), Vec<Place>> = FxHashMap::default();
    for (index, theorem) in theorems.iter().enumerate() {
        for (at, bits) in theorem.bits.iter().enumerate() {
            let (key, inverted) = normal(bits.a, bits.b);
            let known = places.entry(key).or_default();
            if known.len() < MOST_PLACES {
                known.push(Place {
                    theorem: index,
                    position: at,
                    inverted,
                });
            }
        }
    }
    let widths: Vec<usize> = theorems.iter().map(|t| live_bits(&t.bits)).collect();
    let mut served: FxHashMap<usize, FxHashSet<NodeId>> = FxHashMap::default();
    let mut copies = vec![false; theorems.len()];
    for (index, theorem) in theorems.iter().enumerate() {
        if theorem.carry_in.node() != NodeId::FALSE {
            continue;
        }
        let keys: Vec<_> = theorem
            .bits
            .iter()
            .map(|bits| normal(bits.a, bits.b))
            .collect();
        let starts = places.get(&keys[0].0).map_or(&[][..], Vec::as_slice);
        copies[index] = starts.iter().any(|place| {
            let (wider, from, inverted) = (place.theorem, place.position, place.inverted);
            if wider == index || widths[wider] <= widths[index] {
                return false;
            }
            let same = keys
                .iter()
                .zip(&theorems[wider].bits[from..])
                .take_while(|&(&(key, own), bits)| {
                    let (other, flipped) = normal(bits.a, bits.b);
                    key == other && (own != flipped) == (keys[0].1 != inverted)
                })
                .count();
            let beyond = live_bits(&theorem.bits[same..]);
            if beyond >= min_bits || same == 0 {
                return false;
            }
            let cone = served
                .entry(wider)
                .or_insert_with(|| cone(subject, &theorems[wider]));
            theorem.sums[..same].iter().flatten().all(|literal| {
                let node = literal.node();
                cone.contains(&node) && labels.port(node).is_none()
                    || theorems[wider]
                        .sums
                        .iter()
                        .flatten()
                        .any(|own| own.node() == node)
            })
        });
    }
    let mut copy = copies.into_iter();
    theorems.retain(|_| !copy.next().unwrap_or(false));
}

/// Places of one operand pair looked at.
const MOST_PLACES: usize = 16;
/// Nodes looked at below the results of one chain.
const MOST_NODES: usize = 100_000;

/// What the results of a chain are made from, down to its operands.
fn cone(subject: &Subject, theorem: &Theorem) -> FxHashSet<NodeId> {
    let operands = theorem.bits.iter().flat_map(|bits| [bits.a, bits.b]);
    let operands: FxHashSet<NodeId> = operands.map(|literal| literal.node()).collect();
    let results = theorem.sums.iter().chain(&theorem.carries).flatten();
    let mut stack: Vec<NodeId> = results.map(|literal| literal.node()).collect();
    let mut seen = FxHashSet::default();
    while let Some(node) = stack.pop() {
        if operands.contains(&node) || seen.len() >= MOST_NODES || !seen.insert(node) {
            continue;
        }
        match subject.kind(node) {
            NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
            NodeKind::Xor(x, y) => stack.extend([x, y]),
            NodeKind::False | NodeKind::Free(_) => {}
        }
    }
    seen
}
