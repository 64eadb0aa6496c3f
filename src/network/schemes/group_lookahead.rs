//! Group lookahead: groups, groups of groups, as many levels as it takes until
//! one group spans all; the carries then run back down, each level's group
//! entries made from the level above.
//!
//! Invariant: no combine node joins more than a group and one carry. The carry
//! into a member is written over the lower members of its group and the carry
//! into the group. Where the top group has two members, the carry between them
//! is the lower one's own carry-out, which saves a level (two 16-bit adders under
//! a third level: the textbook's 32-bit adder).
//!
//! A. Weinberger and J. L. Smith, "A Logic for High-Speed Addition", National
//! Bureau of Standards Circular 591, 1958; in groups of four the lookahead of
//! Hamacher, Vranesic and Zaky, "Computer Organization".

use super::{CarryNetwork, Growth, NOTHING, NodeId, Scheme, Takes, join};

pub(super) const SCHEME: Scheme = Scheme {
    name: "group-lookahead",
    source: "Weinberger and Smith 1958",
    growth: Growth::Linear,
    takes: Takes {
        group: true,
        ..NOTHING
    },
    shape: |network, settings, _| shape(network, settings.group),
};

/// Levels of lookahead over `positions` in groups of `size`.
pub(super) fn lookahead_levels(positions: usize, size: usize) -> usize {
    let mut levels = 1;
    let mut members = positions;
    while members > size {
        members = members.div_ceil(size);
        levels += 1;
    }
    levels
}

fn shape(network: &mut CarryNetwork, size: usize) {
    let mut rows = vec![leaves(network)];
    while let Some(row) = rows.last().filter(|row| row.len() > size) {
        let groups = row.chunks(size);
        let groups = groups.map(|group| join(network, group.iter().copied()));
        let groups = groups.collect();
        rows.push(groups);
    }
    let carry_in = network.carry_in();
    let mut entries = enter_top(network, &rows, size, carry_in);
    rows.pop();
    while let Some(row) = rows.pop() {
        let mut inner = Vec::with_capacity(row.len());
        for (group, &entry) in row.chunks(size).zip(&entries) {
            inner.push(entry);
            for end in 1..group.len() {
                inner.push(Some(carry_over(network, entry, &group[..end])));
            }
        }
        entries = inner;
    }
}

fn leaves(network: &CarryNetwork) -> Vec<NodeId> {
    let positions = 0..network.positions();
    positions.map(|position| network.leaf(position)).collect()
}

/// The carry into each member of the top group; sets the carry-out too.
fn enter_top(
    network: &mut CarryNetwork,
    rows: &[Vec<NodeId>],
    size: usize,
    carry_in: Option<NodeId>,
) -> Vec<Option<NodeId>> {
    let top = &rows[rows.len() - 1];
    if let ([_, upper], Some(below)) = (&top[..], rows.len().checked_sub(2)) {
        let middle = carry_over(network, carry_in, &rows[below][..size]);
        carry_over(network, Some(middle), &[*upper]);
        return vec![carry_in, Some(middle)];
    }
    let mut entries = vec![carry_in];
    for end in 1..=top.len() {
        entries.push(Some(carry_over(network, carry_in, &top[..end])));
    }
    entries.pop();
    entries
}

/// The carry out of adjacent members, given the carry into the lowest.
fn carry_over(network: &mut CarryNetwork, entry: Option<NodeId>, members: &[NodeId]) -> NodeId {
    let high = network.span(members[members.len() - 1]).high;
    let carry = join(network, entry.into_iter().chain(members.iter().copied()));
    network.set_carry(high as usize, carry);
    carry
}
