//! Linear sets: for a node `s`, leaves with `s = x ⊕ y`, `s = x ⊕ y ⊕ z`, or
//! one leaf with `s = x ⊕ rest`.
//!
//! They come from the fan-ins of XOR nodes, from XOR of XOR, and from
//! three-leaf cuts (cut enumeration after Cong, Wu and Ding, FPGA 1999) whose
//! function is linear in a leaf, which finds sums written as AND/OR covers or
//! made from their own carry. Cuts are kept only while a later node can still
//! read them, so memory follows the width of the graph and not its size.

use super::graph::{Literal, NodeId, NodeKind, Subject};

/// Leaves whose exclusive or, together with a rest that is constant for two or
/// three leaves, is the node `sum`, up to complement.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct LinearSet {
    /// The node.
    pub sum: NodeId,
    leaves: [NodeId; 3],
    len: u8,
}

impl LinearSet {
    fn new(sum: NodeId, leaves: &[u32]) -> Self {
        let mut set = Self {
            sum,
            leaves: [NodeId::FALSE; 3],
            len: leaves.len() as u8,
        };
        for (slot, &leaf) in set.leaves.iter_mut().zip(leaves) {
            *slot = NodeId(leaf);
        }
        set.leaves[..leaves.len()].sort_unstable();
        set
    }

    /// The leaves, ascending; one leaf means that the rest is unknown.
    pub fn leaves(&self) -> &[NodeId] {
        &self.leaves[..self.len as usize]
    }
}

const LEAVES: usize = 3;
const CUTS: usize = 6;
const SETS: usize = 8;

/// A cut of at most three leaves and the node's function of them: bit `m` of
/// `table` is the value at minterm `m`, the first leaf least significant.
#[derive(Clone, Copy)]
struct Cut {
    leaves: [u32; LEAVES],
    len: u8,
    table: u8,
}

const PIN: [u8; LEAVES] = [0xAA, 0xCC, 0xF0];

impl Cut {
    const NONE: Self = Self {
        leaves: [0; LEAVES],
        len: 0,
        table: 0,
    };

    fn trivial(node: u32) -> Self {
        Self {
            leaves: [node, 0, 0],
            len: 1,
            table: PIN[0],
        }
    }

    fn leaves(&self) -> &[u32] {
        &self.leaves[..self.len as usize]
    }

    fn is_subset_of(&self, other: &Self) -> bool {
        self.leaves()
            .iter()
            .all(|leaf| other.leaves().contains(leaf))
    }

    /// The cut's table over `leaves`, a superset of its own.
    fn table_over(&self, leaves: &[u32]) -> u8 {
        if self.leaves() == leaves {
            return self.table;
        }
        let mut place = [0u8; LEAVES];
        for (i, leaf) in self.leaves().iter().enumerate() {
            let at = leaves.iter().position(|l| l == leaf);
            place[i] = PIN[at.expect("leaves are a superset")];
        }
        let mut table = 0;
        for minterm in 0..1u8 << self.len {
            if self.table >> minterm & 1 == 1 {
                let mut product = 0xFF;
                for (i, &pin) in place[..self.len as usize].iter().enumerate() {
                    product &= if minterm >> i & 1 == 1 { pin } else { !pin };
                }
                table |= product;
            }
        }
        table
    }

    /// The union of two sorted leaf lists, unless it has more than three.
    fn union(&self, other: &Self) -> Option<([u32; LEAVES], u8)> {
        let (a, b) = (self.leaves(), other.leaves());
        let (mut i, mut j, mut len) = (0, 0, 0);
        let mut leaves = [0; LEAVES];
        while i < a.len() || j < b.len() {
            let next = match (a.get(i), b.get(j)) {
                (Some(&x), Some(&y)) if x == y => {
                    i += 1;
                    j += 1;
                    x
                }
                (Some(&x), Some(&y)) if x < y => {
                    i += 1;
                    x
                }
                (Some(&x), None) => {
                    i += 1;
                    x
                }
                (_, Some(&y)) => {
                    j += 1;
                    y
                }
                (None, None) => unreachable!("the loop ends with both lists"),
            };
            if len == LEAVES {
                return None;
            }
            leaves[len] = next;
            len += 1;
        }
        Some((leaves, len as u8))
    }

    fn linear_leaves(&self) -> impl Iterator<Item = u32> + '_ {
        (0..self.len as usize).filter_map(|i| {
            let shift = 1 << i;
            let high = (self.table & PIN[i]) >> shift;
            let low = self.table & !PIN[i];
            (high == !low & !PIN[i]).then_some(self.leaves[i])
        })
    }
}

#[derive(Clone, Copy)]
struct CutList {
    cuts: [Cut; CUTS],
    len: u8,
}

impl CutList {
    const EMPTY: Self = Self {
        cuts: [Cut::NONE; CUTS],
        len: 0,
    };

    fn iter(&self) -> impl Iterator<Item = &Cut> {
        self.cuts[..self.len as usize].iter()
    }

    fn offer(&mut self, cut: Cut) {
        if self.iter().any(|kept| kept.is_subset_of(&cut)) {
            return;
        }
        let mut len = 0;
        for i in 0..self.len as usize {
            if !cut.is_subset_of(&self.cuts[i]) {
                self.cuts[len] = self.cuts[i];
                len += 1;
            }
        }
        if len < CUTS {
            self.cuts[len] = cut;
            len += 1;
        }
        self.len = len as u8;
    }
}

/// Cut lists of the nodes that are still to be read, in reused slots.
struct Window {
    last_reader: Vec<u32>,
    slot: Vec<u32>,
    lists: Vec<CutList>,
    free: Vec<u32>,
}

impl Window {
    fn new(subject: &Subject) -> Self {
        let mut last_reader = vec![0; subject.node_count()];
        for node in subject.nodes() {
            if let Some((x, y)) = fan_ins(subject, node) {
                last_reader[x.node().index()] = node.0;
                last_reader[y.node().index()] = node.0;
            }
        }
        let slot = vec![u32::MAX; subject.node_count()];
        Self {
            last_reader,
            slot,
            lists: Vec::new(),
            free: Vec::new(),
        }
    }

    fn list(&self, node: NodeId) -> Option<&CutList> {
        self.lists.get(self.slot[node.index()] as usize)
    }

    fn keep(&mut self, node: NodeId, list: &CutList) {
        if self.last_reader[node.index()] == 0 || list.len == 0 {
            return;
        }
        let slot = self.free.pop().unwrap_or_else(|| {
            self.lists.push(CutList::EMPTY);
            self.lists.len() as u32 - 1
        });
        self.lists[slot as usize] = *list;
        self.slot[node.index()] = slot;
    }

    fn release(&mut self, fan_in: NodeId, reader: NodeId) {
        let slot = &mut self.slot[fan_in.index()];
        if self.last_reader[fan_in.index()] == reader.0 && *slot != u32::MAX {
            self.free.push(*slot);
            *slot = u32::MAX;
        }
    }
}

fn fan_ins(subject: &Subject, node: NodeId) -> Option<(Literal, Literal)> {
    match subject.kind(node) {
        NodeKind::And(x, y) => Some((x, y)),
        NodeKind::Xor(x, y) => Some((x.literal(), y.literal())),
        NodeKind::False | NodeKind::Free(_) => None,
    }
}

fn node_cuts(window: &Window, x: Literal, y: Literal, is_xor: bool) -> CutList {
    let mut list = CutList::EMPTY;
    let (own_x, own_y) = (Cut::trivial(x.node().0), Cut::trivial(y.node().0));
    let cuts_x = window.list(x.node());
    let cuts_y = window.list(y.node());
    let with_own = |own, cuts: Option<&'_ CutList>| {
        let mut all = [own; CUTS + 1];
        let mut len = 1;
        for cut in cuts.into_iter().flat_map(CutList::iter) {
            all[len] = *cut;
            len += 1;
        }
        (all, len)
    };
    let (all_x, len_x) = with_own(own_x, cuts_x);
    let (all_y, len_y) = with_own(own_y, cuts_y);
    for cut_x in &all_x[..len_x] {
        for cut_y in &all_y[..len_y] {
            let Some((leaves, len)) = cut_x.union(cut_y) else {
                continue;
            };
            let over = &leaves[..len as usize];
            let (mut left, mut right) = (cut_x.table_over(over), cut_y.table_over(over));
            if x.is_inverted() {
                left = !left;
            }
            if y.is_inverted() {
                right = !right;
            }
            let table = if is_xor { left ^ right } else { left & right };
            list.offer(Cut { leaves, len, table });
        }
    }
    list
}

/// XOR readers from which a node counts as a mode that many bits share.
const MODE_READERS: u8 = 4;

/// By node: an XOR reader that combines it with a mode. In `a + (b ⊕ m) + m`
/// the lowest sum is `a ⊕ b` and shows neither `b ⊕ m` nor `m`; going up from
/// `b` finds them again.
fn mode_readers(subject: &Subject) -> Vec<u32> {
    let xors = || {
        subject.nodes().filter_map(|node| match subject.kind(node) {
            NodeKind::Xor(x, y) => Some((node, x, y)),
            _ => None,
        })
    };
    let mut readers = vec![0u8; subject.node_count()];
    for (_, x, y) in xors() {
        for fan_in in [x, y] {
            let count = &mut readers[fan_in.index()];
            *count = count.saturating_add(1);
        }
    }
    let mut found = vec![0; subject.node_count()];
    for (node, x, y) in xors() {
        for (bit, mode) in [(x, y), (y, x)] {
            if readers[mode.index()] >= MODE_READERS {
                found[bit.index()] = node.0;
            }
        }
    }
    found
}

/// Calls `emit` with every linear set, node by node, at most eight each.
pub fn linear_sets(subject: &Subject, mut emit: impl FnMut(LinearSet)) {
    let mut window = Window::new(subject);
    let mode_readers = mode_readers(subject);
    let mut sets: Vec<LinearSet> = Vec::with_capacity(SETS);
    for node in subject.nodes() {
        let Some((x, y)) = fan_ins(subject, node) else {
            continue;
        };
        let is_xor = matches!(subject.kind(node), NodeKind::Xor(..));
        sets.clear();
        let mut offer = |leaves: &[u32]| {
            let set = LinearSet::new(node, leaves);
            if sets.len() < SETS && !sets.contains(&set) {
                sets.push(set);
            }
        };
        if is_xor {
            let (x, y) = (x.node(), y.node());
            offer(&[x.0, y.0]);
            for (outer, inner) in [(x, y), (y, x)] {
                if let NodeKind::Xor(p, q) = subject.kind(outer) {
                    offer(&[p.0, q.0, inner.0]);
                }
            }
        }
        let list = node_cuts(&window, x, y, is_xor);
        for cut in list.iter() {
            let mut linear = [0; LEAVES];
            let mut count = 0;
            for leaf in cut.linear_leaves() {
                linear[count] = leaf;
                count += 1;
            }
            let linear = &linear[..count];
            match (linear.len(), cut.len) {
                (2, _) | (3, 3) => offer(linear),
                (1, 3) if !is_xor => offer(linear),
                _ => {}
            }
        }
        for at in 0..sets.len() {
            let [x, y] = *sets[at].leaves() else { continue };
            for (outer, inner) in [(x, y), (y, x)] {
                let reader = NodeId(mode_readers[outer.index()]);
                let NodeKind::Xor(p, q) = subject.kind(reader) else {
                    continue;
                };
                let mode = if p == outer { q } else { p };
                let set = LinearSet::new(node, &[reader.0, mode.0, inner.0]);
                if reader != node && mode != inner && sets.len() < SETS {
                    sets.push(set);
                }
            }
        }
        window.keep(node, &list);
        window.release(x.node(), node);
        window.release(y.node(), node);
        for &set in &sets {
            emit(set);
        }
    }
}
