//! The two-input form that prices a function with more than one operator.
//!
//! Deterministic, in this order:
//! 1. A table is first brought to the least value among its complement and all
//!    inversions of its pins, so that polarity never changes the price.
//! 2. A pin in which the function is linear becomes one two-input XOR in front
//!    of the rest (lowest pin first).
//! 3. What is left becomes an irredundant sum of products (Minato 1992, after
//!    Morreale 1970), of it and of its complement; the shallower form is kept.
//!    A cover beyond six inputs keeps the rows it was written with.
//! 4. Rows are factored by the literal that occurs most (ties: lowest pin, plain
//!    first) until none occurs twice: `l·(quotient) + remainder` (the literal
//!    factoring of Brayton 1987). Above [`MAX_LITERALS`] rows stay two-level.
//! 5. Every AND and OR of several terms joins the two shallowest terms first.
//!
//! A pin's depth is that of its deepest literal; a pin without literal costs 0.

use crate::netlist::function::PIN;
use crate::netlist::{Cover, Function, TruthTable};
use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// Rows with more literals than this are not factored: the steps are quadratic.
const MAX_LITERALS: usize = 1024;

/// A literal as `pin << 1 | inverted`.
pub(super) type Literal = u32;
pub(super) type Cubes = Vec<Vec<Literal>>;

/// Depth of each pin of `function` in its two-input form.
pub(super) fn pin_depths(function: &Function) -> Vec<i32> {
    match function {
        Function::Table(table) => table_depths(least_polarity(*table)),
        Function::Cover(cover) => cube_depths(cover.inputs(), &rows_of(cover)),
    }
}

/// The rows of a cover as written.
pub(super) fn rows_of(cover: &Cover) -> Cubes {
    cover
        .cubes()
        .map(|cube| {
            cube.map(|(pin, inverted)| (pin as u32) << 1 | u32::from(inverted))
                .collect()
        })
        .collect()
}

fn least_polarity(table: TruthTable) -> TruthTable {
    let mut best = table;
    for flips in 0..1usize << table.inputs() {
        let mut turned = table;
        for pin in (0..table.inputs()).filter(|pin| flips >> pin & 1 == 1) {
            turned = turned.flip(pin);
        }
        for candidate in [turned, turned.complement()] {
            if candidate.bits() < best.bits() {
                best = candidate;
            }
        }
    }
    best
}

fn table_depths(table: TruthTable) -> Vec<i32> {
    let n = table.inputs();
    let linear = (0..n).find(|&pin| table.is_linear_in(pin));
    if let Some(pin) = linear {
        // One level of recursion per pin: at most six.
        let rest = table.cofactor(pin, false);
        let mut depths = table_depths(least_polarity(rest));
        for (other, depth) in depths.iter_mut().enumerate() {
            if rest.depends_on(other) {
                *depth += 1;
            }
        }
        depths[pin] = 1;
        return depths;
    }
    let on = cube_depths(n, &sum_of_products(table));
    let off = cube_depths(n, &sum_of_products(table.complement()));
    let key = |depths: &Vec<i32>| (depths.iter().copied().max(), depths.iter().sum::<i32>());
    if key(&off) < key(&on) { off } else { on }
}

/// An irredundant sum of products of a table.
pub(super) fn sum_of_products(table: TruthTable) -> Cubes {
    irredundant(table.bits(), table.bits(), table.inputs())
}

/// An irredundant sum of products between `lower` and `upper` over the first
/// `pins` pins (Minato 1992). At most six levels of recursion.
fn irredundant(lower: u64, upper: u64, pins: usize) -> Cubes {
    if lower == 0 {
        return Vec::new();
    }
    let full = TruthTable::new(pins, !0).bits();
    if upper & full == full {
        return vec![Vec::new()];
    }
    let pin = pins - 1;
    let half = TruthTable::new(pin, !0).bits();
    let shift = 1 << pin;
    let (l0, l1) = (lower & half, lower >> shift & half);
    let (u0, u1) = (upper & half, upper >> shift & half);
    let mut cubes = Vec::new();
    let mut add = |part: &Cubes, literal: Option<Literal>| {
        for cube in part {
            let mut cube = cube.clone();
            cube.extend(literal);
            cubes.push(cube);
        }
    };
    let low = irredundant(l0 & !u1, u0, pin);
    let high = irredundant(l1 & !u0, u1, pin);
    let rest = (l0 & !value(&low, pin)) | (l1 & !value(&high, pin));
    let both = irredundant(rest, u0 & u1, pin);
    add(&low, Some((pin as u32) << 1 | 1));
    add(&high, Some((pin as u32) << 1));
    add(&both, None);
    cubes
}

fn value(cubes: &Cubes, pins: usize) -> u64 {
    let table = cubes.iter().fold(0, |sum, cube| {
        sum | cube.iter().fold(!0u64, |product, &literal| {
            let pin = PIN[(literal >> 1) as usize];
            product & if literal & 1 == 1 { !pin } else { pin }
        })
    });
    TruthTable::new(pins, table).bits()
}

/// A tree of two-input nodes, children before parents.
#[derive(Default)]
struct Tree {
    nodes: Vec<Node>,
}

enum Node {
    Leaf(Literal),
    Pair(u32, u32),
}

impl Tree {
    fn leaf(&mut self, literal: Literal) -> (i32, u32) {
        self.nodes.push(Node::Leaf(literal));
        (0, self.nodes.len() as u32 - 1)
    }

    /// Joins terms, each a height and a node, the two shallowest first.
    fn join(&mut self, terms: Vec<(i32, u32)>) -> Option<(i32, u32)> {
        let mut heap: BinaryHeap<_> = terms.into_iter().map(Reverse).collect();
        loop {
            let Reverse(first) = heap.pop()?;
            let Some(Reverse(second)) = heap.pop() else {
                return Some(first);
            };
            self.nodes.push(Node::Pair(first.1, second.1));
            heap.push(Reverse((second.0 + 1, self.nodes.len() as u32 - 1)));
        }
    }

    fn product(&mut self, cube: &[Literal]) -> Option<(i32, u32)> {
        let leaves = cube.iter().map(|&literal| self.leaf(literal)).collect();
        self.join(leaves)
    }

    /// The factored form of `cubes`; the depth of recursion is bounded by
    /// [`MAX_LITERALS`], since every quotient is smaller by two literals.
    fn factor(&mut self, mut cubes: Cubes) -> Option<(i32, u32)> {
        let mut terms = Vec::new();
        while let Some(literal) = most_frequent(&cubes) {
            let (with, without): (Cubes, Cubes) =
                cubes.into_iter().partition(|cube| cube.contains(&literal));
            let quotient: Cubes = with
                .into_iter()
                .map(|cube| cube.into_iter().filter(|&l| l != literal).collect())
                .collect();
            let leaf = self.leaf(literal);
            // An empty row in the quotient makes it constant one.
            let inner = if quotient.iter().any(Vec::is_empty) {
                None
            } else {
                self.factor(quotient)
            };
            terms.extend(self.join(inner.into_iter().chain([leaf]).collect()));
            cubes = without;
        }
        for cube in &cubes {
            terms.extend(self.product(cube));
        }
        self.join(terms)
    }
}

fn most_frequent(cubes: &Cubes) -> Option<Literal> {
    let mut all: Vec<Literal> = cubes.iter().flatten().copied().collect();
    all.sort_unstable();
    let mut best: Option<(usize, Literal)> = None;
    for run in all.chunk_by(|a, b| a == b) {
        if run.len() > 1 && best.is_none_or(|(count, _)| run.len() > count) {
            best = Some((run.len(), run[0]));
        }
    }
    best.map(|(_, literal)| literal)
}

fn cube_depths(pins: usize, cubes: &Cubes) -> Vec<i32> {
    let mut tree = Tree::default();
    let literals: usize = cubes.iter().map(Vec::len).sum();
    let root = if literals <= MAX_LITERALS {
        let mut cubes = cubes.clone();
        for cube in &mut cubes {
            cube.sort_unstable();
            cube.dedup();
        }
        tree.factor(cubes)
    } else {
        let terms = cubes.iter().filter_map(|cube| tree.product(cube)).collect();
        tree.join(terms)
    };
    let mut depths = vec![0; pins];
    let Some((_, root)) = root else {
        return depths;
    };
    let mut from_root = vec![-1; tree.nodes.len()];
    from_root[root as usize] = 0;
    for (i, node) in tree.nodes.iter().enumerate().rev() {
        let depth = from_root[i];
        if depth < 0 {
            continue;
        }
        match *node {
            Node::Leaf(literal) => {
                let slot = &mut depths[(literal >> 1) as usize];
                *slot = depth.max(*slot);
            }
            Node::Pair(left, right) => {
                from_root[left as usize] = depth + 1;
                from_root[right as usize] = depth + 1;
            }
        }
    }
    depths
}
