//! Which node of a cone carries which term of carry lookahead.
//!
//! A node that depends on the positions j…i, and on no other, can only be a term
//! over that span (Weinberger and Smith 1958); the signatures of the terms are
//! computed in one sweep upwards per lowest position that occurs, and compared.
//! Hence no list of all spans is ever made, and a ripple of any width costs one
//! sweep. What a theorem proves to be a carry or a sum needs no signature.

use super::super::verify::Theorem;
use super::cone::{Cone, Values, WORDS, hash, zip};
use crate::subject::{Literal, NodeId};
use rustc_hash::FxHashMap;

/// Steps of all sweeps together; beyond, nodes stay without label.
const STEPS: usize = 1 << 22;

/// What a node carries, in either polarity; -1 is the position of the carry-in.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(super) enum Label {
    /// Depends on one position alone.
    Leaf(i32),
    /// The carry out of a position.
    Carry(i32),
    /// The sum of a position.
    Sum(i32),
    /// The generate of a span of two or more, given by its ends, highest first.
    Generate(i32, i32),
    /// Its carry out for a carry of 1 into it.
    Forced(i32, i32),
    /// Its propagate.
    Propagate(i32, i32),
    /// The sum at its top for a carry of 0 or 1 into it.
    SumFor(bool, i32, i32),
}

/// The labels of a cone's nodes.
pub(super) fn labels(cone: &Cone, theorem: &Theorem) -> Vec<Option<Label>> {
    let mut labels = vec![None; cone.nodes.len()];
    let mut open: Vec<(i32, i32, u32)> = Vec::new();
    for (at, reach) in cone.reach.iter().enumerate() {
        if reach.foreign || reach.high.0 < 0 {
            continue;
        }
        for low in both(reach.low) {
            for high in both(reach.high) {
                if low == high && reach.low.0 == reach.low.1 && reach.high.0 == reach.high.1 {
                    labels[at] = Some(Label::Leaf(low));
                } else if low <= high {
                    open.push((low, high, at as u32));
                }
            }
        }
    }
    open.sort_unstable();
    let terms = Terms::of(cone);
    let lowest = lowest(theorem);
    let mut steps = 0;
    for group in open.chunk_by(|x, y| x.0 == y.0) {
        let (low, top) = (group[0].0, group[group.len() - 1].1);
        steps += (top - low) as usize + 1;
        if steps > STEPS {
            break;
        }
        terms.sweep(cone, low, lowest, group, &mut labels);
    }
    let mut prove = |literals: &[Literal], label: Label| {
        for literal in literals {
            if let Some(&at) = cone.index.get(&literal.node()) {
                labels[at as usize] = Some(label);
            }
        }
    };
    for (at, carries) in theorem.carries.iter().enumerate() {
        prove(carries, Label::Carry(at as i32));
    }
    for (at, sums) in theorem.sums.iter().enumerate() {
        prove(sums, Label::Sum(at as i32));
    }
    labels
}

/// -1 where a net is the carry-in, else 0.
pub(super) fn lowest(theorem: &Theorem) -> i32 {
    if theorem.carry_in.node() == NodeId::FALSE {
        0
    } else {
        -1
    }
}

fn both((first, second): (i32, i32)) -> impl Iterator<Item = i32> {
    std::iter::once(first).chain((second != first).then_some(second))
}

/// Generate and both propagates of every position.
struct Terms {
    generate: Vec<Values>,
    either: Vec<Values>,
    differ: Vec<Values>,
}

impl Terms {
    fn of(cone: &Cone) -> Self {
        let each = |with: fn(u64, u64) -> u64| -> Vec<Values> {
            let addends = cone.addends.iter();
            addends.map(|&(a, b)| zip(a, b, with)).collect()
        };
        Self {
            generate: each(|a, b| a & b),
            either: each(|a, b| a | b),
            differ: each(|a, b| a ^ b),
        }
    }

    /// Labels the nodes of `group`, all of which reach down to `low`.
    fn sweep(
        &self,
        cone: &Cone,
        low: i32,
        lowest: i32,
        group: &[(i32, i32, u32)],
        labels: &mut [Option<Label>],
    ) {
        let top = group[group.len() - 1].1;
        // Without anything below: no carry, and a carry of 1.
        let (mut carry, mut forced) = ([0; WORDS], [!0; WORDS]);
        let mut real = cone.carry_in;
        let (mut all_either, mut all_differ) = ([!0; WORDS], [!0; WORDS]);
        let mut group = group.iter().peekable();
        for at in low.max(0)..=top {
            let i = at as usize;
            let (g, t, p) = (self.generate[i], self.either[i], self.differ[i]);
            let (carry_below, forced_below, real_below) = (carry, forced, real);
            let over = |below: Values| zip(g, zip(t, below, |t, c| t & c), |g, c| g | c);
            (carry, forced, real) = (over(carry), over(forced), over(real));
            all_either = zip(all_either, t, |x, y| x & y);
            all_differ = zip(all_differ, p, |x, y| x & y);
            if group.peek().is_none_or(|&&(_, high, _)| high != at) {
                continue;
            }
            let mut known: FxHashMap<u64, Label> = FxHashMap::default();
            let mut add = |values: Values, label: Label| {
                // A constant is no term of anything.
                let signature = hash(&values);
                if signature != 0 {
                    known.entry(signature).or_insert(label);
                }
            };
            if at == low {
                for values in [g, t, p] {
                    add(values, Label::Leaf(at));
                }
            } else if low == lowest {
                add(real, Label::Carry(at));
                add(zip(p, real_below, |p, c| p ^ c), Label::Sum(at));
            }
            if low >= 0 && at > low {
                add(carry, Label::Generate(at, low));
                add(forced, Label::Forced(at, low));
                add(all_differ, Label::Propagate(at, low));
                add(all_either, Label::Propagate(at, low));
                let sum = |below: Values| zip(p, below, |p, c| p ^ c);
                add(sum(carry_below), Label::SumFor(false, at, low));
                add(sum(forced_below), Label::SumFor(true, at, low));
            }
            while let Some(&(_, _, node)) = group.next_if(|&&(_, high, _)| high == at) {
                let label = known.get(&cone.hashes[node as usize]);
                if labels[node as usize].is_none() {
                    labels[node as usize] = label.copied();
                }
            }
        }
    }
}
