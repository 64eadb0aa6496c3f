//! Words that other arithmetic is made of: the rows of restoring dividers and
//! square roots, the larger of two words, both results a + b and a + b + 1, and
//! words whose operands or results are cut short, constant, shared or inverted.
//!
//! Restoring rows subtract, and keep the difference where nothing was borrowed
//! (any textbook on computer arithmetic; common practice).

use super::cells::{Carry, Cell};
use super::circuit::{Circuit, Function, Net};
use super::comparators::{Comparator, Comparison, Relation, Shape};
use super::fast;
use super::random::Random;
use super::truth::{Generated, Kind, Truth};
use super::words::{Architecture, Word};

/// One row: `r - y` where it does not borrow, else `r`; and whether it did not.
/// Where sums are gated away, no net carries the difference.
fn restore(
    c: &mut Circuit,
    r: &[Net],
    y: &[Net],
    gated: bool,
    cell: Cell,
    told: &mut (Vec<Truth>, Vec<Comparison>),
) -> (Vec<Net>, Net) {
    if gated {
        let less = Function::Cover(&["01-", "0-1", "-11"]);
        let mut borrows: Vec<Option<Net>> = vec![None];
        for (&r, &y) in r.iter().zip(y) {
            let next = match borrows[borrows.len() - 1] {
                None => c.gate(Function::Cover(&["01"]), &[r, y]),
                Some(borrow) => c.gate(less, &[r, y, borrow]),
            };
            borrows.push(Some(next));
        }
        let borrow = borrows[r.len()].expect("the rows are not empty");
        told.1.push(Comparison {
            relation: Relation::Less,
            signed: false,
            a: r.to_vec(),
            b: y.to_vec(),
            result: borrow,
        });
        let fits = c.not(borrow);
        let kept = (0..r.len()).map(|i| {
            let change = match borrows[i] {
                None => y[i],
                Some(borrow) => c.xor(y[i], borrow),
            };
            let change = c.and(fits, change);
            c.xor(r[i], change)
        });
        return (kept.collect(), fits);
    }
    let word = Word {
        borrow: true,
        ..Word::new(Kind::Subtractor, r.len(), cell)
    };
    let truth = word.place(c, r, y, None);
    let borrow = truth.carry_out.expect("asked for");
    let pairs = r.iter().zip(&truth.sums);
    let kept: Vec<Net> = pairs
        .map(|(&r, &difference)| c.mux(borrow, r, difference))
        .collect();
    let fits = c.not(borrow);
    told.0.push(truth);
    (kept, fits)
}

/// A row's highest difference is 0 where it is kept, and nothing reads it.
fn keep_low(truth: Option<&mut Truth>, bits: usize) {
    if let Some(truth) = truth
        && truth.sums.len() > bits
    {
        truth.a.truncate(bits);
        truth.b.truncate(bits);
        truth.sums.truncate(bits);
        truth.carry_out = None;
    }
}

/// `x / y` and `x % y` for `y > 0`: a row per bit of `x`. Each row is told as a
/// subtractor, or as a comparison where its sums are gated away.
pub fn divider(bits: usize, gated: bool, cell: Cell) -> Generated {
    let mut c = Circuit::new("divider");
    let (x, y) = (c.input_bus("x", bits), c.input_bus("y", bits));
    let mut told = (Vec::new(), Vec::new());
    let zero = c.gate(Function::Zero, &[]);
    let mut rest = vec![zero; bits];
    let (mut divisor, mut quotient) = (y, Vec::new());
    divisor.push(zero);
    for &x in x.iter().rev() {
        let row: Vec<Net> = std::iter::once(x).chain(rest).collect();
        let (mut kept, fits) = restore(&mut c, &row, &divisor, gated, cell, &mut told);
        kept.pop();
        rest = kept;
        keep_low(told.0.last_mut(), bits);
        quotient.push(fits);
    }
    quotient.reverse();
    c.output_bus(&quotient, "q");
    c.output_bus(&rest, "r");
    let label = format!("divider of {bits}, gated {gated}, {cell:?}");
    Generated::new(label, c, told.0).with_comparisons(told.1)
}

/// The integer square root of `2 * bits` bits and its remainder.
pub fn square_root(bits: usize, gated: bool, cell: Cell) -> Generated {
    let mut c = Circuit::new("root");
    let x = c.input_bus("x", 2 * bits);
    let mut told = (Vec::new(), Vec::new());
    let (zero, one) = (c.gate(Function::Zero, &[]), c.gate(Function::One, &[]));
    let (mut rest, mut root): (Vec<Net>, Vec<Net>) = (Vec::new(), Vec::new());
    for step in (0..bits).rev() {
        let mut row = vec![x[2 * step], x[2 * step + 1]];
        row.extend(&rest);
        // Root so far, then 01; the remainder has one bit more than the root.
        let mut taken = vec![one, zero];
        taken.extend(&root);
        let width = row.len().max(taken.len());
        row.resize(width, zero);
        taken.resize(width, zero);
        let (kept, fits) = restore(&mut c, &row, &taken, gated, cell, &mut told);
        rest = kept;
        rest.truncate(bits - step + 1);
        keep_low(told.0.last_mut(), rest.len());
        root.insert(0, fits);
    }
    c.output_bus(&root, "q");
    c.output_bus(&rest, "r");
    let label = format!("square root of {}, gated {gated}, {cell:?}", 2 * bits);
    Generated::new(label, c, told.0).with_comparisons(told.1)
}

/// The larger of two words.
pub fn maximum(bits: usize, shape: Shape) -> Generated {
    let mut c = Circuit::new("maximum");
    let (a, b) = (c.input_bus("a", bits), c.input_bus("b", bits));
    let comparator = Comparator {
        relation: Relation::Less,
        signed: false,
        bits,
        shape,
    };
    let told = comparator.place(&mut c, &a, &b);
    let pairs = a.iter().zip(&b);
    let larger: Vec<Net> = pairs.map(|(&a, &b)| c.mux(told.result, b, a)).collect();
    c.output_bus(&larger, "y");
    Generated::new(format!("maximum of {bits}, {shape:?}"), c, Vec::new())
        .with_comparisons(vec![told])
}

/// `a + b` and `a + b + 1`, each of its own carries.
pub fn both_sums(bits: usize, architecture: Architecture) -> Generated {
    let mut c = Circuit::new("both");
    let (a, b) = (c.input_bus("a", bits), c.input_bus("b", bits));
    let word = Word {
        architecture,
        ..Word::new(Kind::Adder, bits, Cell::PropagateXor)
    };
    let plain = word.place(&mut c, &a, &b, None);
    let (sums, carry) = fast::add(&mut c, architecture, &a, &b, Carry::One);
    let Carry::Net(carry) = carry else {
        unreachable!("the carry of two nets is a net")
    };
    let more = Truth {
        sums,
        carry_out: Some(carry),
        plus_one: true,
        ..plain.clone()
    };
    c.output_bus(&plain.sums, "s");
    c.output_bus(&more.sums, "t");
    c.output(plain.carry_out.expect("asked for"), "cs");
    c.output(carry, "ct");
    Generated::new(format!("both: {}", word.label()), c, vec![plain, more])
}

/// A word without its lowest sums (the upper ones add to a carry from below) and
/// without its highest.
pub fn cut_short(word: Word, low: usize, high: usize) -> Generated {
    let mut c = Circuit::new("cut_short");
    let (a, b) = (c.input_bus("a", word.bits), c.input_bus("b", word.bits));
    let lower = Word {
        bits: low,
        carry_in: false,
        carry_out: true,
        ..word
    };
    let upper = Word {
        bits: word.bits - low,
        carry_in: low > 0,
        carry_out: false,
        ..word
    };
    let carry = (low > 0)
        .then(|| lower.place(&mut c, &a[..low], &b[..low], None))
        .and_then(|truth| truth.carry_out);
    let whole = upper.place(&mut c, &a[low..], &b[low..], carry);
    let bits = word.bits - low - high;
    let truth = Truth {
        a: whole.a[..bits].to_vec(),
        b: whole.b[..bits].to_vec(),
        sums: whole.sums[..bits].to_vec(),
        ..whole
    };
    c.output_bus(&truth.sums, "s");
    Generated::new(
        format!("cut short by {low} and {high}: {}", word.label()),
        c,
        vec![truth],
    )
}

/// What is odd about the operands or results of a word.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Oddity {
    /// A third of the bits of b are constants.
    PartlyConstant,
    /// b is a, rotated.
    Shared,
    /// Only inverted sums and carry-out are read.
    InvertedResults,
    /// Both operands are nets inside random logic, and sums feed more of it.
    Embedded,
}

impl Oddity {
    /// Every oddity.
    pub const ALL: [Self; 4] = [
        Self::PartlyConstant,
        Self::Shared,
        Self::InvertedResults,
        Self::Embedded,
    ];
}

/// An adder or subtractor with one oddity.
pub fn odd_word(word: Word, oddity: Oddity, seed: u64) -> Generated {
    let mut c = Circuit::new("odd");
    let mut random = Random::new(seed);
    let n = word.bits;
    let mut a = c.input_bus("a", n);
    let mut b = match oddity {
        Oddity::Shared => (0..n).map(|i| a[(i + n - 1) % n]).collect(),
        _ => c.input_bus("b", n),
    };
    let carry_in = word.carry_in.then(|| c.input("cin"));
    if oddity == Oddity::PartlyConstant {
        for bit in &mut b[1..] {
            if random.below(3) == 0 {
                let value = [Function::Zero, Function::One][random.below(2)];
                *bit = c.gate(value, &[]);
            }
        }
    }
    if oddity == Oddity::Embedded {
        let more = c.input_bus("z", 8);
        for (i, bit) in a.iter_mut().chain(&mut b).enumerate() {
            let other = more[i % 8];
            *bit = match random.below(3) {
                0 => c.and(*bit, other),
                1 => c.gate(Function::Nor, &[*bit, other]),
                _ => c.mux(other, *bit, more[(i + 3) % 8]),
            };
        }
    }
    let truth = word.place(&mut c, &a, &b, carry_in);
    match oddity {
        Oddity::InvertedResults => {
            let inverted: Vec<Net> = truth.sums.iter().map(|&sum| c.not(sum)).collect();
            c.output_bus(&inverted, "ns");
            if let Some(carry) = truth.carry_out {
                let inverted = c.not(carry);
                c.output(inverted, "ncout");
            }
        }
        Oddity::Embedded => {
            for (i, &sum) in truth.sums.iter().enumerate() {
                let used = c.gate(Function::Nand, &[sum, a[(i + 1) % n]]);
                c.output(used, &format!("y[{i}]"));
            }
            let sums = super::negatives::scatter(&mut c, &truth.sums, 4 * n, &mut random);
            for (i, &net) in sums[sums.len() - 4..].iter().enumerate() {
                c.output(net, &format!("w[{i}]"));
            }
            if let Some(carry) = truth.carry_out {
                c.output(carry, "cout");
            }
        }
        _ => {
            c.output_bus(&truth.sums, "s");
            if let Some(carry) = truth.carry_out {
                c.output(carry, "cout");
            }
        }
    }
    Generated::new(format!("{oddity:?}: {}", word.label()), c, vec![truth])
}
