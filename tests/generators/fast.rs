//! Adders whose carries do not ripple: lookahead in groups (Weinberger and
//! Smith 1958), Kogge and Stone 1973, select (Bedrij 1962), skip (Lehman and
//! Burla 1961). Built from g = a·b and p = a ⊕ b with AND, OR, XOR and
//! multiplexer gates.

use super::cells::{Addend, Carry, Cell};
use super::circuit::{Circuit, Function, Net};
use super::words::Architecture;

/// Adds two words; the carry-in may be constant.
pub fn add(
    c: &mut Circuit,
    architecture: Architecture,
    a: &[Net],
    b: &[Net],
    start: Carry,
) -> (Vec<Net>, Carry) {
    match architecture {
        Architecture::Ripple(cell) => ripple(c, cell, a, b, start),
        Architecture::CarrySelect(block) => select(c, block, a, b, start),
        Architecture::CarrySkip(block) => skip(c, block, a, b, start),
        Architecture::GroupLookahead(_) | Architecture::KoggeStone => {
            // Position 0 takes the carry-in into its generate, so that the
            // carry network proper starts without one.
            let (sum, first) = Cell::PropagateXor.step(c, a[0], Addend::Net(b[0]), start);
            let Carry::Net(first) = first else {
                unreachable!("the carry of two nets is a net")
            };
            let (mut g, mut p) = (vec![first], vec![None]);
            for i in 1..a.len() {
                g.push(c.and(a[i], b[i]));
                p.push(Some(c.xor(a[i], b[i])));
            }
            let carries = match architecture {
                Architecture::KoggeStone => kogge_stone(c, &g, &p),
                Architecture::GroupLookahead(size) => lookahead(c, size, &g, &p),
                _ => unreachable!("matched above"),
            };
            let mut sums = vec![sum];
            for i in 1..a.len() {
                let p = p[i].expect("every position but the first");
                sums.push(c.xor(p, carries[i - 1]));
            }
            (sums, Carry::Net(carries[a.len() - 1]))
        }
    }
}

fn ripple(c: &mut Circuit, cell: Cell, a: &[Net], b: &[Net], start: Carry) -> (Vec<Net>, Carry) {
    let mut carry = start;
    let mut sums = Vec::new();
    for (&a, &b) in a.iter().zip(b) {
        let (sum, next) = cell.step(c, a, Addend::Net(b), carry);
        sums.push(sum);
        carry = next;
    }
    (sums, carry)
}

/// Generates of the spans [i:0]; a propagate of `None` is 0.
fn kogge_stone(c: &mut Circuit, g: &[Net], p: &[Option<Net>]) -> Vec<Net> {
    let (mut g, mut p) = (g.to_vec(), p.to_vec());
    let mut distance = 1;
    while distance < g.len() {
        let (lower_g, lower_p) = (g.clone(), p.clone());
        for i in distance..g.len() {
            if let Some(high) = p[i] {
                let passed = c.and(high, lower_g[i - distance]);
                g[i] = c.or(g[i], passed);
                p[i] = lower_p[i - distance].map(|low| c.and(high, low));
            }
        }
        distance *= 2;
    }
    g
}

/// Carries by two-level terms inside groups, group terms handled alike above.
fn lookahead(c: &mut Circuit, size: usize, g: &[Net], p: &[Option<Net>]) -> Vec<Net> {
    if g.len() == 1 {
        return g.to_vec();
    }
    // The carry out of position `high`, started at `low`; what lies below is a
    // carry that is put in last.
    let reach = |c: &mut Circuit, low: usize, high: usize, below: Option<Net>| {
        let mut terms = vec![g[high]];
        let starts = (low..high).rev().map(|i| (i + 1, g[i]));
        for (from, source) in starts.chain(below.map(|net| (low, net))) {
            let mut product: Vec<Net> = p[from..=high].iter().flatten().copied().collect();
            product.push(source);
            terms.push(c.gate(Function::And, &product));
        }
        match terms.as_slice() {
            [only] => *only,
            many => c.gate(Function::Or, many),
        }
    };
    let groups: Vec<(usize, usize)> = (0..g.len())
        .step_by(size)
        .map(|low| (low, (low + size).min(g.len()) - 1))
        .collect();
    let (mut group_g, mut group_p) = (Vec::new(), Vec::new());
    for &(low, high) in &groups {
        group_g.push(reach(c, low, high, None));
        let all: Option<Vec<Net>> = p[low..=high].iter().copied().collect();
        group_p.push(all.map(|all| match all.as_slice() {
            [only] => *only,
            many => c.gate(Function::And, many),
        }));
    }
    let ends = lookahead(c, size, &group_g, &group_p);
    let mut carries = Vec::new();
    for (index, &(low, high)) in groups.iter().enumerate() {
        let below = (index > 0).then(|| ends[index - 1]);
        for i in low..high {
            carries.push(reach(c, low, i, below));
        }
        carries.push(ends[index]);
    }
    carries
}

fn select(c: &mut Circuit, block: usize, a: &[Net], b: &[Net], start: Carry) -> (Vec<Net>, Carry) {
    let first = block.min(a.len());
    let cell = Cell::PropagateXor;
    let (mut sums, mut carry) = ripple(c, cell, &a[..first], &b[..first], start);
    for low in (first..a.len()).step_by(block) {
        let high = (low + block).min(a.len());
        let (s0, c0) = ripple(c, cell, &a[low..high], &b[low..high], Carry::Zero);
        let (s1, c1) = ripple(c, cell, &a[low..high], &b[low..high], Carry::One);
        let (Carry::Net(choice), Carry::Net(c0), Carry::Net(c1)) = (carry, c0, c1) else {
            unreachable!("carries behind the first position are nets")
        };
        for (s0, s1) in s0.into_iter().zip(s1) {
            sums.push(c.mux(choice, s1, s0));
        }
        carry = Carry::Net(c.mux(choice, c1, c0));
    }
    (sums, carry)
}

fn skip(c: &mut Circuit, block: usize, a: &[Net], b: &[Net], start: Carry) -> (Vec<Net>, Carry) {
    let (mut sums, mut carry) = (Vec::new(), start);
    for low in (0..a.len()).step_by(block) {
        let high = (low + block).min(a.len());
        let (s, out) = ripple(c, Cell::PropagateXor, &a[low..high], &b[low..high], carry);
        sums.extend(s);
        carry = match (carry, out) {
            (Carry::Net(into), Carry::Net(out)) => {
                let p: Vec<Net> = (low..high).map(|i| c.xor(a[i], b[i])).collect();
                let all = c.gate(Function::And, &p);
                Carry::Net(c.mux(all, into, out))
            }
            (_, out) => out,
        };
    }
    (sums, carry)
}
