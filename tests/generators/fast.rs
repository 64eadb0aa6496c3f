//! Adders whose carries do not ripple: lookahead, flat and in groups (Weinberger
//! and Smith 1958), select (Bedrij 1962), skip (Lehman and Burla 1961),
//! increment (Tyagi 1993), conditional sum (Sklansky 1960); the prefix networks
//! are in `prefix`. Built from g = a·b and p = a ⊕ b with AND, OR, XOR and
//! multiplexer gates.

use super::cells::{Addend, Carry, Cell};
use super::circuit::{Circuit, Function, Net};
use super::prefix;
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
        Architecture::CarrySelect(block) => {
            let lows: Vec<usize> = (0..a.len()).step_by(block).collect();
            select(c, &lows, a, b, start)
        }
        Architecture::CarrySelectGrowing => {
            let sizes = (2..).scan(0, |low, size| {
                let this = *low;
                *low += size;
                Some(this)
            });
            let lows: Vec<usize> = sizes.take_while(|&low| low < a.len()).collect();
            select(c, &lows, a, b, start)
        }
        Architecture::Increment(block) => increment(c, block, a, b, start),
        Architecture::ConditionalSum => conditional_sum(c, a, b, start),
        Architecture::CarrySkip(block) => skip(c, block, a, b, start),
        _ => {
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
                Architecture::GroupLookahead(size) => lookahead(c, size, &g, &p),
                Architecture::FlatLookahead => lookahead(c, g.len(), &g, &p),
                network => prefix::carries(c, network, &g, &p),
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

fn net(carry: Carry) -> Net {
    let Carry::Net(net) = carry else {
        unreachable!("carries behind the first position are nets")
    };
    net
}

/// Blocks from each of `lows` to the next.
fn select(
    c: &mut Circuit,
    lows: &[usize],
    a: &[Net],
    b: &[Net],
    start: Carry,
) -> (Vec<Net>, Carry) {
    let cell = Cell::PropagateXor;
    let (mut sums, mut carry) = (Vec::new(), start);
    for (block, &low) in lows.iter().enumerate() {
        let high = lows.get(block + 1).copied().unwrap_or(a.len());
        let (a, b) = (&a[low..high], &b[low..high]);
        if block == 0 {
            (sums, carry) = ripple(c, cell, a, b, start);
            continue;
        }
        let (s0, c0) = ripple(c, cell, a, b, Carry::Zero);
        let (s1, c1) = ripple(c, cell, a, b, Carry::One);
        let choice = net(carry);
        for (s0, s1) in s0.into_iter().zip(s1) {
            sums.push(c.mux(choice, s1, s0));
        }
        carry = Carry::Net(c.mux(choice, net(c1), net(c0)));
    }
    (sums, carry)
}

/// Blocks are added with carry 0; behind the first the real carry is then added
/// to the block's sum, which passes it on while the sum bits are 1.
fn increment(
    c: &mut Circuit,
    block: usize,
    a: &[Net],
    b: &[Net],
    start: Carry,
) -> (Vec<Net>, Carry) {
    let first = block.min(a.len());
    let cell = Cell::PropagateXor;
    let (mut sums, mut carry) = ripple(c, cell, &a[..first], &b[..first], start);
    for low in (first..a.len()).step_by(block) {
        let high = (low + block).min(a.len());
        let (local, out) = ripple(c, cell, &a[low..high], &b[low..high], Carry::Zero);
        let mut passing = net(carry);
        for sum in local {
            sums.push(c.xor(sum, passing));
            passing = c.and(sum, passing);
        }
        carry = Carry::Net(c.or(net(out), passing));
    }
    (sums, carry)
}

/// Both results of each half; the upper ones chosen by the carries of the lower.
fn conditional_sum(c: &mut Circuit, a: &[Net], b: &[Net], start: Carry) -> (Vec<Net>, Carry) {
    let cell = Cell::PropagateXor;
    // One block per position: sums for carry 0 and 1, carries for 0 and 1.
    let mut blocks: Vec<[Vec<Net>; 2]> = Vec::new();
    let mut outs: Vec<[Net; 2]> = Vec::new();
    for (&a, &b) in a.iter().zip(b) {
        let (s0, c0) = cell.step(c, a, Addend::Net(b), Carry::Zero);
        let (s1, c1) = cell.step(c, a, Addend::Net(b), Carry::One);
        blocks.push([vec![s0], vec![s1]]);
        outs.push([net(c0), net(c1)]);
    }
    while blocks.len() > 1 {
        let (mut joined, mut joined_outs) = (Vec::new(), Vec::new());
        for (pair, out) in blocks.chunks(2).zip(outs.chunks(2)) {
            let [low, high] = pair else {
                joined.push(pair[0].clone());
                joined_outs.push(out[0]);
                continue;
            };
            let both = [0, 1].map(|start| {
                let choice = out[0][start];
                let upper = high[0].iter().zip(&high[1]);
                let chosen: Vec<Net> = upper.map(|(&s0, &s1)| c.mux(choice, s1, s0)).collect();
                let sums: Vec<Net> = low[start].iter().copied().chain(chosen).collect();
                (sums, c.mux(choice, out[1][1], out[1][0]))
            });
            let [(sums0, out0), (sums1, out1)] = both;
            joined.push([sums0, sums1]);
            joined_outs.push([out0, out1]);
        }
        (blocks, outs) = (joined, joined_outs);
    }
    let [sums0, sums1] = blocks.remove(0);
    let [out0, out1] = outs[0];
    match start {
        Carry::Zero => (sums0, Carry::Net(out0)),
        Carry::One => (sums1, Carry::Net(out1)),
        Carry::Net(choice) => {
            let pairs = sums0.into_iter().zip(sums1);
            let sums = pairs.map(|(s0, s1)| c.mux(choice, s1, s0)).collect();
            (sums, Carry::Net(c.mux(choice, out1, out0)))
        }
        Carry::Inverted(_) => unreachable!("words start with a carry"),
    }
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
