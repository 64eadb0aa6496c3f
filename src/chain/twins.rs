//! One theorem, built more than once.
//!
//! A theorem is about functions: when a netlist adds the same two words twice,
//! both results are proven equal to the same sums. They are chains of their own
//! when no gate is common to them. The gates between operands and results are put
//! into groups that share a gate or feed one another; a group with a net for every
//! sum is one copy. Nets of other groups (a repeated carry, say) stay with the
//! first copy. With one copy, as nearly always, nothing is walked.

use super::verify::Theorem;
use crate::netlist::{Driver, NetId, Netlist};
use crate::subject::{Literal, NodeId, Subject};
use rustc_hash::{FxHashMap, FxHashSet};

/// Gates walked per position of a theorem.
const GATES_PER_POSITION: usize = 512;

/// Which copy each result net belongs to; `None` when there is only one.
pub(super) fn twins(
    netlist: &Netlist,
    subject: &Subject,
    theorem: &Theorem,
    nets: impl Fn(NodeId) -> Vec<NetId>,
) -> Option<(usize, FxHashMap<NetId, usize>)> {
    let operands: FxHashSet<NodeId> = theorem
        .bits
        .iter()
        .flat_map(|bits| [bits.a.node(), bits.b.node()])
        .chain([theorem.carry_in.node()])
        .collect();
    let results = |literals: &[Literal]| -> Vec<NetId> {
        let all = literals.iter().flat_map(|literal| nets(literal.node()));
        let driven = |net: &NetId| matches!(netlist.driver(*net), Driver::Gate(_));
        all.filter(driven).collect()
    };
    let sums: Vec<Vec<NetId>> = theorem.sums.iter().map(|own| results(own)).collect();
    if sums.iter().any(|own| own.len() < 2) {
        return None;
    }
    let carries: Vec<NetId> = theorem
        .carries
        .iter()
        .flat_map(|own| results(own))
        .collect();
    let mut groups = Groups::default();
    let mut left = GATES_PER_POSITION * sums.len();
    let mut stack: Vec<NetId> = sums.iter().flatten().chain(&carries).copied().collect();
    let mut seen: FxHashSet<NetId> = stack.iter().copied().collect();
    while let Some(net) = stack.pop() {
        let Driver::Gate(gate) = netlist.driver(net) else {
            continue;
        };
        left = left.checked_sub(1)?;
        for &pin in netlist.fan_ins(gate) {
            let is_end = operands.contains(&subject.of_net(pin).node());
            if is_end || !matches!(netlist.driver(pin), Driver::Gate(_)) {
                continue;
            }
            groups.join(net, pin);
            if seen.insert(pin) {
                stack.push(pin);
            }
        }
    }
    // A sum from the middle stands for its copy: the lowest may be made from operands
    // alone, and then belongs to no group.
    let mut number: FxHashMap<NetId, usize> = FxHashMap::default();
    for &net in &sums[sums.len() / 2] {
        let next = number.len();
        number.entry(groups.of(net)).or_insert(next);
    }
    if number.len() < 2 {
        return None;
    }
    let mut copy: FxHashMap<NetId, usize> = FxHashMap::default();
    for own in &sums {
        let mut has_sum = vec![false; number.len()];
        let mut bare = Vec::new();
        for &net in own {
            match number.get(&groups.of(net)) {
                Some(&at) => {
                    has_sum[at] = true;
                    copy.insert(net, at);
                }
                None => bare.push(net),
            }
        }
        let mut bare = bare.into_iter();
        for at in (0..number.len()).filter(|&at| !has_sum[at]) {
            copy.insert(bare.next()?, at);
        }
        copy.extend(bare.map(|net| (net, 0)));
    }
    for &net in &carries {
        let at = number.get(&groups.of(net)).copied().unwrap_or(0);
        copy.entry(net).or_insert(at);
    }
    Some((number.len(), copy))
}

/// Disjoint sets of nets (R. E. Tarjan 1975), paths halved.
#[derive(Default)]
struct Groups(FxHashMap<NetId, NetId>);

impl Groups {
    fn of(&mut self, mut net: NetId) -> NetId {
        while let Some(&up) = self.0.get(&net) {
            if let Some(&further) = self.0.get(&up) {
                self.0.insert(net, further);
            }
            net = up;
        }
        net
    }

    fn join(&mut self, one: NetId, other: NetId) {
        let (one, other) = (self.of(one), self.of(other));
        if one != other {
            self.0.insert(one.max(other), one.min(other));
        }
    }
}
