//! The place of a prefix network in Harris' taxonomy, read off the network as it
//! is built.
//!
//! D. Harris, "A Taxonomy of Parallel Prefix Networks", Asilomar 2003: a network
//! has log2 n + l levels of nodes, no node feeds more than 2^f nodes of the next
//! row beside its own column, and no more than 2^t wires run side by side between
//! two rows; the known networks lie on the plane l + f + t = log2 n - 1. A netlist
//! has no rows: every node is put into the latest row its readers allow, where
//! the drawn networks have theirs. Only networks of valency 2 have a place.

use super::super::model::Taxonomy;
use super::classify::pieces;
use super::made_from::{Ends, MadeFrom};
use std::collections::BTreeMap;

/// The place, when every node joins two spans that meet.
pub(super) fn place(made: &MadeFrom) -> Option<Taxonomy> {
    let mut nodes: BTreeMap<Ends, [Ends; 2]> = BTreeMap::new();
    let carries = made
        .carry_nets()
        .map(|(at, parts)| ((at, made.lowest), parts));
    let spans = made.generates.iter().map(|(&ends, parts)| (ends, parts));
    for (ends, parts) in spans.chain(carries) {
        let own: [Ends; 2] = pieces(made, ends, parts)?.try_into().ok()?;
        nodes.entry(ends).or_insert(own);
    }
    // A carry-in folded into position 0 comes before the network.
    let start = (-1, -1);
    let reads_start = nodes.values().filter(|parts| parts.contains(&start));
    let folded = made.lowest < 0 && reads_start.count() == 1 && nodes.contains_key(&(0, -1));
    if folded {
        nodes.remove(&(0, -1));
    }
    // A part is narrower than what is made from it.
    let mut widest: Vec<Ends> = nodes.keys().copied().collect();
    widest.sort_by_key(|&(high, low)| (std::cmp::Reverse(high - low), high));
    let mut depth: BTreeMap<Ends, usize> = BTreeMap::new();
    for &ends in widest.iter().rev() {
        let below = |part: &Ends| depth.get(part).copied().unwrap_or(0);
        let level = 1 + nodes[&ends].iter().map(below).max().unwrap_or(0);
        depth.insert(ends, level);
    }
    let levels = depth.values().copied().max()?;
    let mut row: BTreeMap<Ends, usize> = BTreeMap::new();
    for &ends in &widest {
        let own = *row.entry(ends).or_insert(levels);
        for part in nodes[&ends] {
            if nodes.contains_key(&part) {
                let row = row.entry(part).or_insert(levels);
                *row = (*row).min(own - 1);
            }
        }
    }
    // By row and source: readers beside its column, and the farthest of them.
    let mut wires: BTreeMap<(usize, i32), (usize, i32)> = BTreeMap::new();
    for (ends, parts) in &nodes {
        let source = parts[1].0;
        let wire = wires.entry((row[ends], source)).or_insert((0, source));
        wire.0 += 1;
        wire.1 = wire.1.max(ends.0);
    }
    let fan_out = wires.values().map(|&(readers, _)| readers).max()?;
    let mut tracks = 0;
    for level in 1..=levels {
        let mut ends: Vec<(i32, i32)> = Vec::new();
        for (&(_, source), &(_, farthest)) in wires.range((level, i32::MIN)..=(level, i32::MAX)) {
            // Ends sort before beginnings at the same column.
            ends.push((source, 1));
            ends.push((farthest, -1));
        }
        ends.sort_unstable();
        let mut open = 0;
        for (_, change) in ends {
            open += change;
            tracks = tracks.max(open);
        }
    }
    let items = made.positions as usize + usize::from(made.lowest < 0 && !folded);
    Some(Taxonomy {
        extra_levels: levels.saturating_sub(logarithm(items)),
        fan_out: logarithm(fan_out),
        tracks: logarithm(tracks as usize),
    })
}

/// The logarithm to the base 2, rounded up.
fn logarithm(n: usize) -> usize {
    n.max(1).next_power_of_two().trailing_zeros() as usize
}
