//! The same for gates of any function: spans of a few parts a cover.
//!
//! A cover joins up to ⌈F/2⌉ spans, each by its G and P; positions that stand
//! alone are read by their operands, a span of ⌊F/2⌋ positions is one cover of
//! them, and a sum takes in what its carry is joined of, as the builder does. G and
//! P of a span come from the same parts: a cover is as early as the latest of its
//! parts whichever of both it is, so nothing is lost where g and p of a position
//! are ready together. Exact in that class where all covers cost the same;
//! otherwise a cover counts by its latest pin.

use super::times::{cell, crossing};
use crate::network::CarryNetwork;
use crate::network::carry_network::NodeId;
use crate::network::demand::{Asked, Recipe, Way, fewest, manners};
use crate::network::fulfil::{Wishes, node};
use crate::network::profile::{LONG_BEFORE, Profile};
use crate::network::signals::Carry;
use rustc_hash::FxHashMap;

/// Shapes the network of a chain whose gates are covers.
pub(super) fn shape(network: &mut CarryNetwork, profile: &Profile, valency: usize, spare: i32) {
    let covers = Covers::of(profile, valency);
    let wishes = Wishes::of(profile);
    let first = usize::from(profile.has_carry_in());
    let mut demands: Vec<(Term, i32)> = Vec::new();
    for position in 0..profile.positions() {
        let item = (position + first) as u32;
        if let Some(by) = wishes.carries[position] {
            demands.push((Term::Carry(item), by));
        }
        if let (Some(by), Some(below)) = (wishes.sums[position], item.checked_sub(1)) {
            demands.push((Term::End(below), by));
        }
    }
    Wishes::put_off(&covers, &mut demands, spare);
    let chosen = fewest(&covers, &demands, manners(profile.positions()));
    let mut made: FxHashMap<Term, Vec<NodeId>> = FxHashMap::default();
    for each in chosen {
        let nodes: Vec<NodeId> = match (each.term, each.way) {
            (Term::Span(high, _) | Term::Carry(high), None) => vec![node(network, high as usize)],
            (Term::Span(high, low), Some(way)) if way.parts().next().is_none() => {
                vec![of_operands(network, high, low)]
            }
            (Term::Carry(high) | Term::End(high), Some(way)) if way.parts().next().is_none() => {
                vec![of_operands(network, high, 0)]
            }
            (term, way) => {
                let way = way.expect("only spans and carries are given");
                let parts = way.parts().flat_map(|(part, _)| &made[&part]);
                let parts: Vec<NodeId> = parts.copied().collect();
                match (term, &parts[..]) {
                    (Term::Pair(..), _) | (_, [_]) => parts,
                    _ => vec![network.combine(&parts)],
                }
            }
        };
        made.insert(each.term, nodes);
    }
    for position in 0..profile.positions() {
        let at = (position + first) as u32;
        let known = [Term::End(at), Term::Carry(at)];
        let known = known.iter().find_map(|term| made.get(term));
        let carry = match (known, network.carry_into(position)) {
            (Some(nodes), _) => nodes[0],
            (None, Some(Carry::Span(below))) => {
                let leaf = network.leaf(position);
                network.combine(&[leaf, below])
            }
            (None, _) => network.leaf(position),
        };
        network.set_carry(position, carry);
    }
}

/// The span of items that one cover of operands is.
fn of_operands(network: &mut CarryNetwork, high: u32, low: u32) -> NodeId {
    let parts: Vec<NodeId> = (low..=high)
        .rev()
        .map(|at| node(network, at as usize))
        .collect();
    network.combine(&parts)
}

/// What is made of items, counted from the lowest, perhaps the carry-in.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
enum Term {
    /// G and P.
    Span(u32, u32),
    /// Two spans side by side, for a cover to read.
    Pair(u32, u32),
    /// G down to the lowest item.
    Carry(u32),
    /// What a sum takes in of the carry below it.
    End(u32),
}

/// The earliest times of spans and pairs.
struct Covers {
    /// Of each item when it is read by its operands.
    operands: Vec<i32>,
    has_carry_in: bool,
    /// Inputs of a cover.
    width: usize,
    /// What a cover of operands costs.
    lift: i32,
    /// Whether a cover costs the same whatever it is.
    is_even: bool,
    /// What a cover of two and of three spans costs, if it is possible.
    joins: [Option<i32>; 2],
    spans: Vec<i32>,
    pairs: Vec<i32>,
}

impl Covers {
    fn of(profile: &Profile, valency: usize) -> Self {
        let costs = &profile.costs;
        let width = costs.limits().gate_inputs.min(6);
        let most = valency.min(width.div_ceil(2));
        let has_carry_in = profile.has_carry_in();
        let lift = costs.and(2);
        let own = profile.generate.iter().zip(&profile.propagate);
        let own = own.map(|(&g, &p)| g.max(p));
        let own: Vec<i32> = profile.carry_in.into_iter().chain(own).collect();
        let lowered = own.iter().enumerate();
        let operands = lowered.map(|(i, &ready)| {
            let lift = if i == 0 && has_carry_in { 0 } else { lift };
            (ready - lift).max(LONG_BEFORE)
        });
        let join = |parts: usize| (most >= parts).then(|| costs.from_lower(parts));
        let items = own.len();
        let cells = items * (items + 1) / 2;
        let is_even = costs.from_lower(2) == costs.and(2);
        let mut covers = Self {
            operands: operands.collect(),
            has_carry_in,
            width,
            lift,
            is_even,
            joins: [join(2), join(3)],
            spans: vec![0; cells],
            pairs: vec![0; cells],
        };
        for high in 0..items {
            covers.fill(&own, high);
        }
        covers
    }

    fn fill(&mut self, own: &[i32], high: usize) {
        self.spans[cell(high, high)] = own[high];
        self.pairs[cell(high, high)] = i32::MAX;
        let (mut single, mut double) = (high, high.saturating_sub(1));
        let mut latest = own[high];
        for low in (0..high).rev() {
            let carry_in = low == 0 && self.has_carry_in;
            latest = latest.max(own[low] + if carry_in { self.lift } else { 0 });
            let lower = |split: usize| self.part(split - 1, low);
            let upper = |split: usize| self.part(high, split);
            let two = crossing(&mut single, low, upper, lower);
            let mut best = i32::MAX;
            if let Some(join) = self.joins[0] {
                best = best.min(two + join);
            }
            if let (Some(join), true) = (self.joins[1], low + 2 <= high) {
                let upper = |split: usize| self.pairs[cell(high, split)];
                best = best.min(crossing(&mut double, low, upper, lower) + join);
            }
            if self.is_direct(high, low) {
                best = best.min(latest);
            }
            self.spans[cell(high, low)] = best;
            self.pairs[cell(high, low)] = two;
        }
    }

    /// Whether one cover of operands is the whole span.
    fn is_direct(&self, high: usize, low: usize) -> bool {
        let carry_in = usize::from(low == 0 && self.has_carry_in);
        self.is_even && 2 * (high + 1 - low) - carry_in <= self.width
    }

    /// A span as a cover reads it.
    fn part(&self, high: usize, low: usize) -> i32 {
        if high == low {
            self.operands[high]
        } else {
            self.spans[cell(high, low)]
        }
    }

    fn splits(&self, high: u32, low: u32, gates: u32, by: i32, found: &mut Vec<Way<Term>>) {
        let span = |high: u32, low: u32| {
            if low == 0 {
                Term::Carry(high)
            } else {
                Term::Span(high, low)
            }
        };
        for split in low + 1..=high {
            let rest = span(split - 1, low);
            let uppers = [Term::Span(high, split), Term::Pair(high, split)];
            for (upper, join) in uppers.into_iter().zip(self.joins) {
                let Some(join) = join else {
                    continue;
                };
                if self.earliest(upper).max(self.earliest(rest)) <= by.saturating_sub(join) {
                    let parts = [Some((upper, join)), Some((rest, join)), None];
                    found.push(Way { parts, gates });
                }
            }
        }
        if self.is_direct(high as usize, low as usize) {
            found.push(Way {
                parts: [None; 3],
                gates,
            });
        }
    }
}

impl Recipe for Covers {
    type Term = Term;

    fn rank(&self, term: Term) -> u32 {
        match term {
            Term::Span(high, low) => 3 * (high - low),
            Term::Pair(high, low) => 3 * (high - low) + 1,
            Term::Carry(high) => 3 * high + 2,
            Term::End(high) => (1 << 31) + high,
        }
    }

    fn is_given(&self, term: Term) -> bool {
        match term {
            Term::Span(high, low) => high == low,
            Term::Carry(high) => high == 0,
            Term::Pair(..) | Term::End(_) => false,
        }
    }

    fn earliest(&self, term: Term) -> i32 {
        match term {
            Term::Span(high, low) => self.part(high as usize, low as usize),
            Term::Pair(high, low) => self.pairs[cell(high as usize, low as usize)],
            Term::Carry(high) => self.part(high as usize, 0),
            Term::End(high) => self.spans[cell(high as usize, 0)],
        }
    }

    fn ways(&self, term: Term, by: i32, found: &mut Vec<Way<Term>>) {
        match term {
            Term::Span(high, low) => self.splits(high, low, 2, by, found),
            Term::Carry(high) => self.splits(high, 0, 1, by, found),
            Term::End(0) => found.push(Way {
                parts: [Some((Term::Carry(0), 0)), None, None],
                gates: 0,
            }),
            Term::End(high) => self.splits(high, 0, 0, by, found),
            Term::Pair(high, low) => {
                for split in low + 1..=high {
                    let [upper, lower] = [Term::Span(high, split), Term::Span(split - 1, low)];
                    if self.earliest(upper).max(self.earliest(lower)) <= by {
                        let parts = [Some((upper, 0)), Some((lower, 0)), None];
                        found.push(Way { parts, gates: 0 });
                    }
                }
            }
        }
    }

    fn estimate(&self, term: Term, asked: &Asked) -> f32 {
        match term {
            Term::Span(high, low) => 2.0 * asked.gates(0, high, low),
            Term::Pair(high, low) => 2.0 * (asked.gates(0, high, low) - 1.0),
            Term::Carry(high) => asked.gates(1, high, 0).min(2.0),
            Term::End(_) => 0.0,
        }
    }

    fn remember(&self, term: Term, asked: &mut Asked) {
        match term {
            Term::Span(high, low) => asked.remember(0, high, low),
            Term::Carry(high) => asked.remember(1, high, 0),
            Term::Pair(..) | Term::End(_) => {}
        }
    }
}
