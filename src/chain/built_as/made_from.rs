//! What each labelled net of a cone is made from: the labelled nets and operands
//! met first when walking back from it.
//!
//! Only nodes that a net carries count. What lies inside one gate is not built
//! as anything: the two-input nodes of a wide gate would pass for spans that
//! nobody made.

use super::super::verify::Theorem;
use super::cone::Cone;
use super::spans::{Label, lowest};
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use rustc_hash::{FxHashMap, FxHashSet};
use std::collections::{BTreeMap, BTreeSet};

/// Nodes of one walk.
const WALK: usize = 4096;
/// Nodes of all walks, per node of the cone, and a base.
const WALKS_PER_NODE: usize = 64;
const WALKS: usize = 1 << 16;

/// A span by its ends, highest first.
pub(super) type Ends = (i32, i32);

/// What one net is made from. Lists ascend.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub(super) struct Parts {
    /// Positions whose carry out it reads; -1 is the carry-in.
    pub(super) carries: Vec<i32>,
    /// Spans whose generate it reads.
    pub(super) generates: Vec<Ends>,
    /// Spans whose carry for a carry of 1 it reads.
    pub(super) forced: Vec<Ends>,
    /// Spans whose propagate it reads.
    pub(super) propagates: Vec<Ends>,
    /// Spans whose sum for one carry or the other it reads.
    pub(super) sums_for: Vec<Ends>,
    /// Positions whose operands, or terms of them alone, it reads.
    pub(super) leaves: Vec<i32>,
    /// Whether it reads another net of the same label.
    pub(super) same: bool,
    /// Whether it reads what is no part of the chain, or too much to follow.
    pub(super) foreign: bool,
}

/// See the head of the module.
pub(super) struct MadeFrom {
    /// Number of positions.
    pub(super) positions: i32,
    /// -1 with a net as carry-in, else 0.
    pub(super) lowest: i32,
    /// By position, each net of its carry out.
    pub(super) carries: Vec<Vec<Parts>>,
    /// By position, each net of its sum.
    pub(super) sums: Vec<Vec<Parts>>,
    /// Spans whose generate some net carries, and the first such net's parts.
    pub(super) generates: BTreeMap<Ends, Parts>,
    /// The same for the carry out for a carry of 1.
    pub(super) forced: BTreeMap<Ends, Parts>,
    /// Spans whose propagate some net carries, and the first such net's parts.
    pub(super) propagates: BTreeMap<Ends, Parts>,
    /// Spans with a net for the sum at the top without the carry.
    pub(super) sums_for: BTreeSet<Ends>,
    /// Nodes of the carry network on the longest way to a result.
    pub(super) levels: usize,
    /// Nodes of the carry network.
    pub(super) cells: usize,
    products: Products,
}

/// Where no position of a span can generate, as in counters, its propagate is all
/// there is to it and counts as its generate.
struct Products {
    /// By position, how many below it can generate.
    generating: Vec<usize>,
}

impl Products {
    fn of(theorem: &Theorem) -> Self {
        let mut generating = vec![0];
        for bits in &theorem.bits {
            let never = bits.a == Literal::FALSE || bits.b == Literal::FALSE;
            generating.push(generating[generating.len() - 1] + usize::from(!never));
        }
        Self { generating }
    }

    fn read(&self, label: Label) -> Label {
        match label {
            Label::Propagate(high, low)
                if self.generating[high as usize + 1] == self.generating[low as usize] =>
            {
                Label::Generate(high, low)
            }
            label => label,
        }
    }
}

impl MadeFrom {
    /// Walks back from every labelled net; `None` when that is too much.
    pub(super) fn of(
        subject: &Subject,
        cone: &Cone,
        labels: &[Option<Label>],
        theorem: &Theorem,
        on_net: impl Fn(NodeId) -> bool,
    ) -> Option<Self> {
        let positions = theorem.bits.len();
        let mut made = Self {
            positions: positions as i32,
            lowest: lowest(theorem),
            carries: vec![Vec::new(); positions],
            sums: vec![Vec::new(); positions],
            generates: BTreeMap::new(),
            forced: BTreeMap::new(),
            propagates: BTreeMap::new(),
            sums_for: BTreeSet::new(),
            levels: 0,
            cells: 0,
            products: Products::of(theorem),
        };
        let mut walker = Walker {
            subject,
            cone,
            labels,
            on_net: &on_net,
            left: WALKS + WALKS_PER_NODE * cone.nodes.len(),
        };
        let mut level_of: FxHashMap<Label, usize> = FxHashMap::default();
        for (at, &node) in cone.nodes.iter().enumerate() {
            let Some(label) = labels[at] else { continue };
            let label = made.products.read(label);
            if !on_net(node) || matches!(label, Label::Leaf(_)) {
                continue;
            }
            let parts = walker.walk(node, label, &made.products)?;
            let level = made.level(&parts, label, &level_of);
            let known = level_of.entry(label).or_default();
            *known = (*known).max(level);
            made.keep(label, parts);
        }
        let network = level_of.iter().filter(|(label, level)| {
            **level > 0
                && matches!(
                    label,
                    Label::Carry(_) | Label::Generate(..) | Label::Forced(..)
                )
        });
        made.cells = network.count();
        let results = level_of.iter();
        let results = results.filter(|(l, _)| matches!(l, Label::Carry(_) | Label::Sum(_)));
        made.levels = results.map(|(_, &level)| level).max().unwrap_or(0);
        Some(made)
    }

    fn keep(&mut self, label: Label, parts: Parts) {
        let spans = match label {
            Label::Carry(at) => return self.carries[at as usize].push(parts),
            Label::Sum(at) => return self.sums[at as usize].push(parts),
            Label::SumFor(_, high, low) => {
                self.sums_for.insert((high, low));
                return;
            }
            Label::Generate(high, low) => self.generates.entry((high, low)),
            Label::Forced(high, low) => self.forced.entry((high, low)),
            Label::Propagate(high, low) => self.propagates.entry((high, low)),
            Label::Leaf(_) => return,
        };
        spans.or_insert(parts);
    }

    /// Nodes of the carry network on the longest way to a net. A sum adds none,
    /// unless it is chosen.
    fn level(&self, parts: &Parts, label: Label, level_of: &FxHashMap<Label, usize>) -> usize {
        let below = |label: Label| level_of.get(&label).copied().unwrap_or(0);
        let spans = |ends: &[Ends], make: fn(i32, i32) -> Label| {
            let levels = ends.iter().map(|&(high, low)| below(make(high, low)));
            levels.max().unwrap_or(0)
        };
        let either_sum = |high, low| {
            let zero = below(Label::SumFor(false, high, low));
            zero.max(below(Label::SumFor(true, high, low)))
        };
        let sums_for = parts.sums_for.iter().map(|&(h, l)| either_sum(h, l));
        let deepest = parts
            .carries
            .iter()
            .map(|&at| below(Label::Carry(at)))
            .chain(sums_for)
            .chain([
                spans(&parts.generates, Label::Generate),
                spans(&parts.forced, Label::Forced),
                if parts.same { below(label) } else { 0 },
            ])
            .max()
            .unwrap_or(0);
        let reads = parts.carries.len()
            + parts.generates.len()
            + parts.forced.len()
            + parts.leaves.len()
            + usize::from(parts.same);
        match label {
            Label::Sum(_) | Label::SumFor(..) => deepest + usize::from(!parts.sums_for.is_empty()),
            Label::Propagate(..) => 0,
            // A term of one position is not yet a node.
            _ if reads < 2 => deepest,
            _ => deepest + 1,
        }
    }

    /// Every net of a carry that is not the start.
    pub(super) fn carry_nets(&self) -> impl Iterator<Item = (i32, &Parts)> {
        let all = self.carries.iter().enumerate();
        let all = all.flat_map(|(at, nets)| nets.iter().map(move |parts| (at as i32, parts)));
        let start = self.lowest;
        all.filter(move |&(at, _)| at > start)
    }

    /// Every net of a sum above the start.
    pub(super) fn sum_nets(&self) -> impl Iterator<Item = (i32, &Parts)> {
        let all = self.sums.iter().enumerate();
        let all = all.flat_map(|(at, nets)| nets.iter().map(move |parts| (at as i32, parts)));
        let start = self.lowest;
        all.filter(move |&(at, _)| at > start)
    }
}

struct Walker<'a, F> {
    subject: &'a Subject,
    cone: &'a Cone,
    labels: &'a [Option<Label>],
    on_net: &'a F,
    left: usize,
}

impl<F: Fn(NodeId) -> bool> Walker<'_, F> {
    /// The parts of one net; `None` when the walks together are too long.
    fn walk(&mut self, from: NodeId, own: Label, products: &Products) -> Option<Parts> {
        let mut parts = Parts::default();
        let mut seen = FxHashSet::default();
        let mut stack = vec![from];
        while let Some(node) = stack.pop() {
            if node == NodeId::FALSE || !seen.insert(node) {
                continue;
            }
            self.left = self.left.checked_sub(1)?;
            if seen.len() > WALK {
                parts.foreign = true;
                break;
            }
            if node != from && self.meet(node, own, products, &mut parts) {
                continue;
            }
            match self.subject.kind(node) {
                NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
                NodeKind::Xor(x, y) => stack.extend([x, y]),
                NodeKind::False => {}
                NodeKind::Free(_) => parts.foreign = true,
            }
        }
        parts.leaves.sort_unstable();
        parts.leaves.dedup();
        parts.carries.sort_unstable();
        parts.carries.dedup();
        for list in [
            &mut parts.generates,
            &mut parts.forced,
            &mut parts.propagates,
            &mut parts.sums_for,
        ] {
            list.sort_unstable();
            list.dedup();
        }
        Some(parts)
    }

    /// Notes a node that the walk ends at; false when it goes on.
    fn meet(&self, node: NodeId, own: Label, products: &Products, parts: &mut Parts) -> bool {
        let Some(&at) = self.cone.index.get(&node) else {
            let ends = self.cone.operands.get(&node);
            let Some(&(first, last)) = ends else {
                return false;
            };
            for position in first..=last {
                match position {
                    -1 => parts.carries.push(-1),
                    _ => parts.leaves.push(position),
                }
            }
            return true;
        };
        match self.labels[at as usize].map(|label| products.read(label)) {
            Some(Label::Leaf(at)) => parts.leaves.push(at),
            Some(label) if (self.on_net)(node) => match label {
                _ if label == own => parts.same = true,
                Label::Carry(at) => parts.carries.push(at),
                Label::Generate(high, low) => parts.generates.push((high, low)),
                Label::Forced(high, low) => parts.forced.push((high, low)),
                Label::Propagate(high, low) => parts.propagates.push((high, low)),
                Label::SumFor(_, high, low) => parts.sums_for.push((high, low)),
                // Another form of the carry may be made from the sum.
                Label::Sum(at) => parts.leaves.push(at),
                Label::Leaf(_) => unreachable!("matched above"),
            },
            _ => return false,
        }
        true
    }
}
