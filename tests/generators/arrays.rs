//! Products: arrays of rows, carry-save trees, squares. The product is checked
//! by integer arithmetic, what lies between is not told.
//!
//! Sources: the array of full and half adder rows (Braun 1963), trees of Wallace
//! 1964 and Dadda 1965; cell counts n·(n-2) full and n half adders of an n × n
//! array are the textbook's.

use super::cells::{Addend, Carry, Cell};
use super::circuit::{Circuit, Function, Net};
use super::truth::{Generated, read};

/// A product known to be in a circuit; buses least significant first.
#[derive(Clone, Debug)]
pub struct Product {
    /// First factor.
    pub a: Vec<Net>,
    /// Second factor; equals `a` in a square.
    pub b: Vec<Net>,
    /// `a · b`.
    pub product: Vec<Net>,
    /// Full adder cells it is made of, a last carry-propagating row included.
    pub full: usize,
    /// Half adder cells.
    pub half: usize,
}

impl Product {
    /// Compares the values of 64 patterns with integer arithmetic.
    pub fn check(&self, values: &[u64]) -> Result<(), String> {
        assert!(
            self.product.len() <= 128,
            "integers of 128 bits hold no more"
        );
        for lane in 0..64 {
            let (a, b) = (read(values, &self.a, lane), read(values, &self.b, lane));
            let found = read(values, &self.product, lane);
            if found != a * b {
                return Err(format!("{a:x} times {b:x} gives {found:x}"));
            }
        }
        Ok(())
    }
}

/// How a product's columns are added.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Reduction {
    /// Row by row, each row rippling.
    Array,
    /// Row by row, carries saved to the next row.
    CarrySave,
    /// All threes of a column at once (Wallace).
    Wallace,
    /// As few as the next height asks for (Dadda).
    Dadda,
}

impl Reduction {
    /// Every way.
    pub const ALL: [Self; 4] = [Self::Array, Self::CarrySave, Self::Wallace, Self::Dadda];
}

#[derive(Default)]
struct Count {
    full: usize,
    half: usize,
}

/// Full or half adder; the sum and the carry.
fn add(c: &mut Circuit, cell: Cell, nets: &[Net], count: &mut Count) -> (Net, Net) {
    let (sum, carry) = match *nets {
        [x, y] => {
            count.half += 1;
            cell.step(c, x, Addend::Net(y), Carry::Zero)
        }
        [x, y, z] => {
            count.full += 1;
            cell.step(c, x, Addend::Net(y), Carry::Net(z))
        }
        _ => unreachable!("two or three nets"),
    };
    match carry {
        Carry::Net(carry) => (sum, carry),
        Carry::Inverted(carry) => (sum, c.not(carry)),
        _ => unreachable!("nets make nets"),
    }
}

/// A multiplier of ports `a[…]`, `b[…]`, `p[…]`.
pub fn multiplier(rows: usize, columns: usize, way: Reduction, cell: Cell) -> Generated {
    let mut c = Circuit::new("multiplier");
    let (a, b) = (c.input_bus("a", columns), c.input_bus("b", rows));
    let told = place(&mut c, &a, &b, way, cell);
    finish(c, format!("{way:?} {columns}x{rows}, {cell:?}"), told)
}

/// A square of ports `a[…]`, `p[…]`: equal products are one, twice.
pub fn squarer(bits: usize, way: Reduction, cell: Cell) -> Generated {
    let mut c = Circuit::new("squarer");
    let a = c.input_bus("a", bits);
    let mut heap: Vec<Vec<Net>> = vec![Vec::new(); 2 * bits];
    for i in 0..bits {
        heap[2 * i].push(a[i]);
        for j in i + 1..bits {
            let both = c.and(a[i], a[j]);
            heap[i + j + 1].push(both);
        }
    }
    let mut count = Count::default();
    let product = reduce(&mut c, heap, way, cell, &mut count);
    let told = Product {
        b: a.clone(),
        a,
        product,
        full: count.full,
        half: count.half,
    };
    finish(c, format!("square of {bits}, {way:?}, {cell:?}"), told)
}

fn finish(mut c: Circuit, label: String, told: Product) -> Generated {
    c.output_bus(&told.product, "p");
    let mut generated = Generated::new(label, c, Vec::new());
    generated.products = vec![told];
    generated
}

fn place(c: &mut Circuit, a: &[Net], b: &[Net], way: Reduction, cell: Cell) -> Product {
    let mut count = Count::default();
    let product = match way {
        Reduction::Array => array(c, a, b, cell, &mut count),
        _ => {
            let mut heap: Vec<Vec<Net>> = vec![Vec::new(); a.len() + b.len()];
            for (j, &b) in b.iter().enumerate() {
                for (i, &a) in a.iter().enumerate() {
                    heap[i + j].push(c.and(a, b));
                }
            }
            reduce(c, heap, way, cell, &mut count)
        }
    };
    Product {
        a: a.to_vec(),
        b: b.to_vec(),
        product,
        full: count.full,
        half: count.half,
    }
}

/// Each row of products is added to the upper bits of the running sum.
fn array(c: &mut Circuit, a: &[Net], b: &[Net], cell: Cell, count: &mut Count) -> Vec<Net> {
    let mut row: Vec<Net> = a.iter().map(|&a| c.and(a, b[0])).collect();
    let mut product = vec![row.remove(0)];
    for &b in &b[1..] {
        let (mut next, mut carry) = (Vec::new(), None);
        for (i, &a) in a.iter().enumerate() {
            let own = c.and(a, b);
            let nets: Vec<Net> = [Some(own), row.get(i).copied(), carry]
                .into_iter()
                .flatten()
                .collect();
            if let [only] = nets[..] {
                next.push(only);
                continue;
            }
            let (sum, out) = add(c, cell, &nets, count);
            next.push(sum);
            carry = Some(out);
        }
        next.extend(carry);
        product.push(next.remove(0));
        row = next;
    }
    product.extend(row);
    product.resize_with(a.len() + b.len(), || c.gate(Function::Zero, &[]));
    product
}

fn reduce(
    c: &mut Circuit,
    mut heap: Vec<Vec<Net>>,
    way: Reduction,
    cell: Cell,
    count: &mut Count,
) -> Vec<Net> {
    let tallest = |heap: &[Vec<Net>]| heap.iter().map(Vec::len).max().unwrap_or(0);
    while tallest(&heap) > 2 {
        let mut next: Vec<Vec<Net>> = vec![Vec::new(); heap.len()];
        let aim = dadda_height(tallest(&heap));
        for at in 0..heap.len() {
            let column = std::mem::take(&mut heap[at]);
            let mut rest = column.as_slice();
            let groups: Vec<usize> = match way {
                Reduction::Dadda => {
                    let (mut height, mut groups) = (rest.len() + next[at].len(), Vec::new());
                    while height > aim {
                        let size = if height == aim + 1 { 2 } else { 3 };
                        groups.push(size);
                        height -= size - 1;
                    }
                    groups
                }
                Reduction::CarrySave => vec![3; usize::from(rest.len() > 2)],
                _ => {
                    let mut groups = vec![3; rest.len() / 3];
                    if rest.len() % 3 == 2 && rest.len() > 3 {
                        groups.push(2);
                    }
                    groups
                }
            };
            for size in groups {
                // Saved sums and carries of this round are joined in the next.
                let (now, later) = rest.split_at(size.min(rest.len()));
                rest = later;
                if now.len() < 2 {
                    next[at].extend(now);
                    continue;
                }
                let (sum, carry) = add(c, cell, now, count);
                next[at].push(sum);
                if at + 1 < next.len() {
                    next[at + 1].push(carry);
                }
            }
            next[at].extend(rest);
        }
        heap = next;
    }
    let mut carry = None;
    let mut product = Vec::new();
    for column in heap {
        let nets: Vec<Net> = column.into_iter().chain(carry.take()).collect();
        match nets.as_slice() {
            [] => product.push(c.gate(Function::Zero, &[])),
            [only] => product.push(*only),
            nets => {
                let (sum, out) = add(c, cell, nets, count);
                product.push(sum);
                carry = Some(out);
            }
        }
    }
    product
}

/// The largest of 2, 3, 4, 6, 9, 13, … below a height.
fn dadda_height(height: usize) -> usize {
    let mut aim = 2;
    while aim * 3 / 2 < height {
        aim = aim * 3 / 2;
    }
    aim
}
