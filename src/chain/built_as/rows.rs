//! The place of a prefix network in Harris' taxonomy, read off the network as it
//! is built.
//!
//! D. Harris, "A Taxonomy of Parallel Prefix Networks", Asilomar 2003: a network
//! has log2 n + l levels of nodes, no node feeds more than 2^f nodes of the next
//! row beside its own column, and no more than 2^t wires run side by side between
//! two rows; the known networks lie on the plane l + f + t = log2 n - 1. A netlist
//! has no rows: every node is put into the first row its parts allow, or
//! the last its readers allow, or the first that has room, and the place is the one
//! nearest to the plane. Only networks of valency 2 have a place.

use super::super::model::Taxonomy;
use super::made_from::{Ends, MadeFrom};
use super::network::pieces;
use std::cmp::Reverse;
use std::collections::{BTreeMap, BTreeSet};

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
    widest.sort_by_key(|&(high, low)| (Reverse(high - low), high));
    let mut depth: BTreeMap<Ends, usize> = BTreeMap::new();
    for &ends in widest.iter().rev() {
        let below = |part: &Ends| depth.get(part).copied().unwrap_or(0);
        let level = 1 + nodes[&ends].iter().map(below).max().unwrap_or(0);
        depth.insert(ends, level);
    }
    let levels = depth.values().copied().max()?;
    let mut latest: BTreeMap<Ends, usize> = BTreeMap::new();
    for &ends in &widest {
        let own = *latest.entry(ends).or_insert(levels);
        for part in nodes[&ends] {
            if nodes.contains_key(&part) {
                let row = latest.entry(part).or_insert(levels);
                *row = (*row).min(own - 1);
            }
        }
    }
    let items = made.positions as usize + usize::from(made.lowest < 0 && !folded);
    // What joins a neighbour for a sum alone is drawn in the last row.
    let mut settled = depth.clone();
    let read: BTreeSet<Ends> = nodes.values().flatten().copied().collect();
    for (ends, row) in &mut settled {
        if !read.contains(ends) && ends.0 - nodes[ends][1].0 == 1 {
            *row = levels;
        }
    }
    let mut ways = vec![latest, settled];
    if items <= MOST_SPREAD {
        ways.extend(spread(&nodes, &depth, 2 * levels));
    }
    ways.insert(0, depth);
    let places = ways.iter().map(|rows| {
        let (fan_out, tracks) = crowding(&nodes, rows);
        let last = rows.values().copied().max().unwrap_or(0);
        Taxonomy {
            extra_levels: last.saturating_sub(logarithm(items)),
            fan_out,
            tracks,
        }
    });
    places.min_by_key(|place| {
        let sum = place.extra_levels + place.fan_out + place.tracks;
        (sum, place.extra_levels, place.fan_out)
    })
}

/// The widest network whose nodes are spread over rows one by one.
const MOST_SPREAD: usize = 256;

/// Rows in which no node has two readers and no two wires lie side by side, when
/// no more than `most` are needed: each node in the first that has room for its
/// wire, of those with equal parts the longest wire first.
fn spread(
    nodes: &BTreeMap<Ends, [Ends; 2]>,
    depth: &BTreeMap<Ends, usize>,
    most: usize,
) -> Option<BTreeMap<Ends, usize>> {
    let mut order: Vec<Ends> = nodes.keys().copied().collect();
    order.sort_by_key(|ends| (depth[ends], Reverse(ends.0 - nodes[ends][1].0)));
    let mut wires: Vec<Vec<(i32, i32)>> = vec![Vec::new(); most + 1];
    let mut rows: BTreeMap<Ends, usize> = BTreeMap::new();
    for ends in order {
        let parts = nodes[&ends];
        let below = parts.iter().filter_map(|part| rows.get(part)).max();
        let (from, to) = (parts[1].0, ends.0);
        let room = |row: &usize| wires[*row].iter().all(|&(f, t)| t <= from || to <= f);
        let row = (below.map_or(1, |row| row + 1)..=most).find(room)?;
        wires[row].push((from, to));
        rows.insert(ends, row);
    }
    Some(rows)
}

/// The logarithms of the most readers of one node in one row beside its own
/// column, and of the most wires side by side in one row.
fn crowding(nodes: &BTreeMap<Ends, [Ends; 2]>, rows: &BTreeMap<Ends, usize>) -> (usize, usize) {
    // By row and source: its readers, and the farthest of them.
    let mut wires: BTreeMap<(usize, i32), (usize, i32)> = BTreeMap::new();
    for (ends, parts) in nodes {
        let source = parts[1].0;
        let wire = wires.entry((rows[ends], source)).or_insert((0, source));
        wire.0 += 1;
        wire.1 = wire.1.max(ends.0);
    }
    let fan_out = wires.values().map(|&(readers, _)| readers).max();
    // By row, where wires begin and end; at one column they end first.
    let mut turns: Vec<(usize, i32, i32)> = Vec::new();
    for (&(row, source), &(_, farthest)) in &wires {
        turns.extend([(row, source, 1), (row, farthest, -1)]);
    }
    turns.sort_unstable();
    let (mut open, mut most) = (0usize, 0);
    for (_, _, change) in turns {
        open = open.wrapping_add_signed(change as isize);
        most = open.max(most);
    }
    (logarithm(fan_out.unwrap_or(0)), logarithm(most))
}

/// The logarithm to the base 2, rounded up.
fn logarithm(n: usize) -> usize {
    n.max(1).next_power_of_two().trailing_zeros() as usize
}
