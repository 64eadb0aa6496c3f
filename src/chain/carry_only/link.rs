//! Links majorities into paths: the result of one is the carry into the next.
//!
//! Which of three leaves is the carry is decided by where the longest path comes
//! from; the other two must not depend on it. A leaf on no deeper level than the
//! carry cannot; of a deeper one a bounded walk has to reach its end without
//! meeting the carry. Paths are taken longest first and share no link.

use super::majority::Majority;
use crate::chain::label::Labels;
use crate::subject::{Literal, NodeId, NodeKind, Subject};
use fixedbitset::FixedBitSet;
use rustc_hash::{FxHashMap, FxHashSet};

/// Nodes one dependence test may visit.
const DEPENDENCE_NODES: usize = 256;

/// A path, least significant position first.
#[derive(Clone, Debug)]
pub(super) struct Path {
    /// The two operands of each position, in the polarity of the majority.
    pub(super) bits: Vec<(Literal, Literal)>,
    /// The carry out of each position.
    pub(super) carries: Vec<Literal>,
    /// The carry into the first.
    pub(super) carry_in: Literal,
}

impl Path {
    /// What is left above the position `at`, which is dropped.
    pub(super) fn above(&self, at: usize) -> Option<Self> {
        (at + 1 < self.bits.len()).then(|| Self {
            bits: self.bits[at + 1..].to_vec(),
            carries: self.carries[at + 1..].to_vec(),
            carry_in: self.carries[at],
        })
    }
}

/// What is known of a majority node: the triple and the leaf its longest path
/// comes from.
#[derive(Clone, Copy)]
struct Step {
    triple: u32,
    carry: u8,
    length: u32,
}

/// Levels of all nodes above the free ones.
pub(super) fn levels(subject: &Subject) -> Vec<u32> {
    let mut levels = vec![0u32; subject.node_count()];
    for node in subject.nodes() {
        let (x, y) = match subject.kind(node) {
            NodeKind::And(x, y) => (x.node(), y.node()),
            NodeKind::Xor(x, y) => (x, y),
            NodeKind::False | NodeKind::Free(_) => continue,
        };
        levels[node.index()] = 1 + levels[x.index()].max(levels[y.index()]);
    }
    levels
}

/// Whether `node` may depend on `on`.
fn may_depend(subject: &Subject, levels: &[u32], node: NodeId, on: NodeId) -> bool {
    let lowest = levels[on.index()];
    let mut seen: FxHashSet<NodeId> = FxHashSet::default();
    let mut stack = vec![node];
    while let Some(node) = stack.pop() {
        if node == on {
            return true;
        }
        if node < on || levels[node.index()] <= lowest || !seen.insert(node) {
            continue;
        }
        if seen.len() > DEPENDENCE_NODES {
            return true;
        }
        match subject.kind(node) {
            NodeKind::And(x, y) => stack.extend([x.node(), y.node()]),
            NodeKind::Xor(x, y) => stack.extend([x, y]),
            NodeKind::False | NodeKind::Free(_) => {}
        }
    }
    false
}

/// The two literals of which a node is the product. Where a sum of two bits was
/// made as `p·q + (p ⊕ q)` its complement is `~p·~q` all the same.
fn two_bits(subject: &Subject, node: NodeId) -> Option<(Literal, Literal)> {
    let NodeKind::And(p, q) = subject.kind(node) else {
        return None;
    };
    for (product, other) in [(p, q), (q, p)] {
        if let (NodeKind::And(x, y), NodeKind::Xor(u, v)) =
            (subject.kind(product.node()), subject.kind(other.node()))
            && product.is_inverted()
        {
            let same = (x.node(), y.node()) == (u, v) || (x.node(), y.node()) == (v, u);
            let differ = !other.is_inverted() ^ x.is_inverted() ^ y.is_inverted();
            if same && !differ {
                return Some((!x, !y));
            }
        }
    }
    Some((p, q))
}

/// What paths are made from.
pub(super) struct Linker<'a> {
    pub(super) subject: &'a Subject,
    pub(super) labels: &'a Labels<'a>,
    pub(super) on_net: &'a FixedBitSet,
    pub(super) majorities: &'a [Majority],
}

impl Linker<'_> {
    fn is_named(&self, literal: Literal) -> bool {
        self.on_net.contains(literal.node().index())
    }

    fn steps(&self) -> FxHashMap<NodeId, Step> {
        let levels = levels(self.subject);
        let mut steps: FxHashMap<NodeId, Step> = FxHashMap::default();
        for (triple, each) in self.majorities.iter().enumerate() {
            let mut best = steps.get(&each.node).copied();
            let mut best_level = 0;
            for carry in 0..3 {
                let from = each.leaves[carry].node();
                let length = 1 + steps.get(&from).map_or(0, |step| step.length);
                let level = levels[from.index()];
                let known = best.map_or(0, |step| step.length);
                if length < known || (length == known && level <= best_level) {
                    continue;
                }
                let operands = (0..3).filter(|&i| i != carry).map(|i| each.leaves[i]);
                let fits = operands.into_iter().all(|operand| {
                    self.is_named(operand)
                        && !may_depend(self.subject, &levels, operand.node(), from)
                });
                if fits {
                    best_level = level;
                    best = Some(Step {
                        triple: triple as u32,
                        carry: carry as u8,
                        length,
                    });
                }
            }
            if let Some(best) = best {
                steps.insert(each.node, best);
            }
        }
        steps
    }

    /// All paths of at least `shortest` positions.
    pub(super) fn paths(&self, shortest: usize) -> Vec<Path> {
        let steps = self.steps();
        let mut order: Vec<(u32, NodeId)> = Vec::new();
        let mut last = NodeId::FALSE;
        for each in self.majorities {
            if each.node != last
                && let Some(step) = steps.get(&each.node)
            {
                order.push((step.length, each.node));
                last = each.node;
            }
        }
        // Longest first; of equals the lower node.
        order.sort_by_key(|&(length, node)| (std::cmp::Reverse(length), node));
        let mut used: FxHashSet<NodeId> = FxHashSet::default();
        let mut paths = Vec::new();
        for (_, top) in order {
            if used.contains(&top) {
                continue;
            }
            if let Some(path) = self.trace(&steps, &used, top)
                && path.bits.len() >= shortest
            {
                used.extend(path.carries.iter().map(|carry| carry.node()));
                paths.push(path);
            }
        }
        paths
    }

    fn trace(
        &self,
        steps: &FxHashMap<NodeId, Step>,
        used: &FxHashSet<NodeId>,
        top: NodeId,
    ) -> Option<Path> {
        let mut path = Path {
            bits: Vec::new(),
            carries: Vec::new(),
            carry_in: Literal::FALSE,
        };
        let mut carry = top.literal();
        while let Some(step) = steps.get(&carry.node())
            && !used.contains(&carry.node())
        {
            let leaves = self.majorities[step.triple as usize]
                .leaves
                .map(|leaf| leaf.xor(carry.is_inverted()));
            let mut rest = (0..3).filter(|&i| i != step.carry as usize);
            let (x, y) = (rest.next()?, rest.next()?);
            path.bits.push((leaves[x], leaves[y]));
            path.carries.push(carry);
            carry = leaves[step.carry as usize];
        }
        path.bits.reverse();
        path.carries.reverse();
        path.carry_in = carry;
        // What leaves has to be on a net.
        while path.carries.last().is_some_and(|&top| !self.is_named(top)) {
            path.carries.pop();
            path.bits.pop();
        }
        if path.bits.is_empty() {
            return None;
        }
        self.settle_start(&mut path);
        // A carry-in on no net: begin where one is.
        while !self.is_named(path.carry_in) && !path.bits.is_empty() {
            path.carry_in = path.carries.remove(0);
            path.bits.remove(0);
        }
        (!path.bits.is_empty()).then_some(path)
    }

    fn follows(&self, lower: Literal, upper: (Literal, Literal)) -> u32 {
        let one = self.labels.follows(lower.node(), upper.0.node());
        one.max(self.labels.follows(lower.node(), upper.1.node()))
    }

    /// Decides what enters the first position. A majority is symmetric, so any
    /// leaf of the lowest could be the carry: names decide. Below it, an AND or
    /// OR of two bits is one more position with a constant carry-in.
    fn settle_start(&self, path: &mut Path) {
        if let [(x, y), above, ..] = path.bits[..] {
            let score = |a, b| self.follows(a, above) + self.follows(b, above);
            let carry = path.carry_in;
            let readings = [(x, y, carry), (x, carry, y), (y, carry, x)];
            let named = readings
                .into_iter()
                .filter(|&(a, b, _)| self.is_named(a) && self.is_named(b))
                .enumerate()
                .max_by_key(|&(at, (a, b, _))| (score(a, b), std::cmp::Reverse(at)));
            if let Some((_, (a, b, carry))) = named {
                path.bits[0] = (a, b);
                path.carry_in = carry;
            }
        }
        let Some((p, q)) = two_bits(self.subject, path.carry_in.node()) else {
            return;
        };
        let is_or = path.carry_in.is_inverted();
        let (p, q) = (p.xor(is_or), q.xor(is_or));
        if !self.is_named(p) || !self.is_named(q) {
            return;
        }
        // Where the bits above have bus names, the ones below continue them.
        let above = path.bits[0];
        let both = self.follows(p, above) > 0 && self.follows(q, above) > 0;
        let (x, y) = above;
        let are_named = path
            .bits
            .get(1)
            .is_some_and(|&next| self.follows(x, next) > 0 && self.follows(y, next) > 0);
        if both || !are_named {
            path.bits.insert(0, (p, q));
            path.carries.insert(0, path.carry_in);
            path.carry_in = Literal::constant(is_or);
        }
    }
}
