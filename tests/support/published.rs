//! Adders written down from their publications, for tests that ask how an adder
//! was built. Nothing here uses the crate under test.
//!
//! The prefix networks are given row by row, as drawn for 16 positions in D.
//! Harris, "A Taxonomy of Parallel Prefix Networks", Asilomar 2003, from which
//! their places in the taxonomy are taken too. Select follows O. J. Bedrij 1962,
//! conditional sum J. Sklansky 1960, increment A. Tyagi 1993 (blocks without a
//! carry, incremented), skip M. Lehman and N. Burla 1961, the written-out carries
//! A. Weinberger and J. L. Smith 1958; from memory of the usual textbook forms.

#![allow(dead_code)]

use crate::generators::{Circuit, Function, Net};

/// How an adder is built.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Published {
    Ripple,
    FlatLookahead,
    GroupLookahead(usize),
    Skip(usize),
    Select(usize),
    Increment(usize),
    ConditionalSum,
    Sklansky,
    KoggeStone,
    BrentKung,
    HanCarlson,
    LadnerFischer,
    Knowles2111,
}

impl Published {
    /// Every one.
    pub const ALL: [Self; 15] = [
        Self::Ripple,
        Self::FlatLookahead,
        Self::GroupLookahead(4),
        Self::GroupLookahead(3),
        Self::Skip(4),
        Self::Select(4),
        Self::Select(3),
        Self::Increment(4),
        Self::ConditionalSum,
        Self::Sklansky,
        Self::KoggeStone,
        Self::BrentKung,
        Self::HanCarlson,
        Self::LadnerFischer,
        Self::Knowles2111,
    ];

    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Self::Ripple => "ripple",
            Self::FlatLookahead | Self::GroupLookahead(_) => "lookahead",
            Self::Skip(_) => "skip",
            Self::Select(_) => "select",
            Self::Increment(_) => "increment",
            Self::ConditionalSum => "conditional-sum",
            _ => "prefix",
        }
    }

    /// The place (l, f, t) for 16 positions, as published.
    pub fn place(self) -> Option<(usize, usize, usize)> {
        Some(match self {
            Self::Sklansky => (0, 3, 0),
            Self::KoggeStone => (0, 0, 3),
            Self::BrentKung => (3, 0, 0),
            Self::HanCarlson => (1, 0, 2),
            Self::LadnerFischer => (1, 2, 0),
            Self::Knowles2111 => (0, 1, 2),
            _ => return None,
        })
    }

    /// Adds two words; the lowest position takes the carry-in into its generate.
    /// Gives the sums and the carry-out.
    pub fn add(self, c: &mut Circuit, a: &[Net], b: &[Net], cin: Option<Net>) -> (Vec<Net>, Net) {
        let p: Vec<Net> = a.iter().zip(b).map(|(&a, &b)| c.xor(a, b)).collect();
        let mut g: Vec<Net> = a.iter().zip(b).map(|(&a, &b)| c.and(a, b)).collect();
        if let Some(cin) = cin {
            let passed = c.and(p[0], cin);
            g[0] = c.or(g[0], passed);
        }
        let lowest = match cin {
            Some(cin) => c.xor(p[0], cin),
            None => p[0],
        };
        let n = a.len();
        let (mut sums, carries) = match self {
            Self::Select(block) => return select(c, block, &g, &p, lowest),
            Self::ConditionalSum => return conditional(c, &g, &p, lowest),
            Self::Ripple => (Vec::new(), blocks(c, n, &g, &p, Block::Ripple)),
            Self::Skip(block) => (Vec::new(), blocks(c, block, &g, &p, Block::Skip)),
            Self::Increment(block) => (Vec::new(), blocks(c, block, &g, &p, Block::Increment)),
            Self::FlatLookahead => (Vec::new(), written_out(c, n, &g, &p)),
            Self::GroupLookahead(size) => (Vec::new(), written_out(c, size, &g, &p)),
            _ => (Vec::new(), self.prefix(c, &g, &p)),
        };
        sums.push(lowest);
        for i in 1..n {
            sums.push(c.xor(p[i], carries[i - 1]));
        }
        (sums, carries[n - 1])
    }

    /// The rows of a prefix network: by row, the column each column reads.
    fn rows(self, n: usize) -> Vec<Vec<Option<usize>>> {
        let levels = n.next_power_of_two().trailing_zeros() as usize;
        let row = |source: &dyn Fn(usize) -> Option<usize>| (0..n).map(source).collect::<Vec<_>>();
        let odd = |i: usize| i % 2 == 1;
        let last = row(&|i| (!odd(i) && i >= 2).then(|| i - 1));
        let sklansky = |i: usize, k: usize| (i >> k & 1 == 1).then(|| (i >> k << k) - 1);
        let mut rows = Vec::new();
        match self {
            Self::Sklansky => rows.extend((0..levels).map(|k| row(&|i| sklansky(i, k)))),
            Self::KoggeStone => {
                rows.extend((0..levels).map(|k| row(&|i| i.checked_sub(1 << k))));
            }
            Self::BrentKung => {
                for k in 0..levels {
                    let up = 2usize << k;
                    rows.push(row(&|i| ((i + 1) % up == 0).then(|| i - up / 2)));
                }
                for k in (0..levels.saturating_sub(1)).rev() {
                    let (step, up) = (1usize << k, 2usize << k);
                    let down = |i: usize| ((i + 1) % up == step && i >= up).then(|| i - step);
                    rows.push(row(&down));
                }
            }
            Self::HanCarlson => {
                rows.push(row(&|i| odd(i).then(|| i - 1)));
                for k in 1..levels {
                    rows.push(row(&|i| if odd(i) { i.checked_sub(1 << k) } else { None }));
                }
                rows.push(last);
            }
            Self::LadnerFischer => {
                rows.push(row(&|i| odd(i).then(|| i - 1)));
                for k in 1..levels {
                    rows.push(row(&|i| if odd(i) { sklansky(i, k) } else { None }));
                }
                rows.push(last);
            }
            Self::Knowles2111 => {
                // Fan-out 2 in the last row: pairs of columns share a source.
                for k in 0..levels - 1 {
                    rows.push(row(&|i| i.checked_sub(1 << k)));
                }
                let half = 1usize << (levels - 1);
                rows.push(row(&|i| i.checked_sub(half).map(|source| source | 1)));
            }
            _ => unreachable!("no prefix network"),
        }
        rows
    }

    fn prefix(self, c: &mut Circuit, g: &[Net], p: &[Net]) -> Vec<Net> {
        let n = g.len();
        let (mut g, mut p) = (g.to_vec(), p.to_vec());
        // How far down each column reaches.
        let mut low: Vec<usize> = (0..n).collect();
        for row in self.rows(n) {
            let before = (g.clone(), p.clone(), low.clone());
            for (i, source) in row.into_iter().enumerate() {
                let Some(source) = source.filter(|_| before.2[i] > 0) else {
                    continue;
                };
                let passed = c.and(before.1[i], before.0[source]);
                g[i] = c.or(before.0[i], passed);
                low[i] = before.2[source];
                if low[i] > 0 {
                    p[i] = c.and(before.1[i], before.1[source]);
                }
            }
        }
        assert!(low.iter().all(|&low| low == 0), "{self:?} is complete");
        g
    }
}

enum Block {
    Ripple,
    Skip,
    Increment,
}

fn blocks(c: &mut Circuit, size: usize, g: &[Net], p: &[Net], how: Block) -> Vec<Net> {
    let mut carries: Vec<Net> = Vec::new();
    for low in (0..g.len()).step_by(size) {
        let high = (low + size).min(g.len());
        let into = carries.last().copied();
        let mut run = match (&how, into) {
            (Block::Ripple | Block::Skip, into) => into,
            (Block::Increment, _) => None,
        };
        let (mut own, mut all): (Vec<Net>, Vec<Net>) = (Vec::new(), Vec::new());
        for i in low..high {
            run = Some(match run {
                None => g[i],
                Some(below) => {
                    let passed = c.and(p[i], below);
                    c.or(g[i], passed)
                }
            });
            own.extend(run);
            all.push(match all.last() {
                None => p[i],
                Some(&below) => c.and(p[i], below),
            });
        }
        if let Some(into) = into {
            match how {
                Block::Ripple => {}
                Block::Skip => {
                    let through = c.gate(Function::And, &p[low..high]);
                    let top = own.len() - 1;
                    own[top] = c.mux(through, into, own[top]);
                }
                Block::Increment => {
                    for (own, all) in own.iter_mut().zip(all) {
                        let passed = c.and(all, into);
                        *own = c.or(*own, passed);
                    }
                }
            }
        }
        carries.extend(own);
    }
    carries
}

/// Carries written out inside groups; groups of groups alike.
fn written_out(c: &mut Circuit, size: usize, g: &[Net], p: &[Net]) -> Vec<Net> {
    if g.len() == 1 {
        return g.to_vec();
    }
    let reach = |c: &mut Circuit, low: usize, high: usize, below: Option<Net>| {
        let mut terms = vec![g[high]];
        let starts = (low..high).rev().map(|i| (i + 1, g[i]));
        for (from, source) in starts.chain(below.map(|net| (low, net))) {
            let mut product: Vec<Net> = p[from..=high].to_vec();
            product.push(source);
            terms.push(c.gate(Function::And, &product));
        }
        match terms[..] {
            [only] => only,
            _ => c.gate(Function::Or, &terms),
        }
    };
    let groups: Vec<(usize, usize)> = (0..g.len())
        .step_by(size)
        .map(|low| (low, (low + size).min(g.len()) - 1))
        .collect();
    let (mut group_g, mut group_p) = (Vec::new(), Vec::new());
    for &(low, high) in &groups {
        group_g.push(reach(c, low, high, None));
        group_p.push(if low == high {
            p[low]
        } else {
            c.gate(Function::And, &p[low..=high])
        });
    }
    let ends = written_out(c, size, &group_g, &group_p);
    let mut carries = Vec::new();
    for (at, &(low, high)) in groups.iter().enumerate() {
        let below = at.checked_sub(1).map(|at| ends[at]);
        carries.extend((low..high).map(|i| reach(c, low, i, below)));
        carries.push(ends[at]);
    }
    carries
}

/// Carries out of each position of a block for a carry of 0 or 1 into it.
fn for_both(c: &mut Circuit, g: &[Net], p: &[Net]) -> Vec<[Net; 2]> {
    let mut runs: Vec<[Net; 2]> = Vec::new();
    for i in 0..g.len() {
        runs.push(match runs.last().copied() {
            None => [g[i], c.or(g[i], p[i])],
            Some(below) => below.map(|below| {
                let passed = c.and(p[i], below);
                c.or(g[i], passed)
            }),
        });
    }
    runs
}

fn select(c: &mut Circuit, size: usize, g: &[Net], p: &[Net], lowest: Net) -> (Vec<Net>, Net) {
    let n = g.len();
    let first = size.min(n);
    let carries = blocks(c, first, &g[..first], &p[..first], Block::Ripple);
    let mut sums = vec![lowest];
    for i in 1..first {
        sums.push(c.xor(p[i], carries[i - 1]));
    }
    let mut carry = carries[first - 1];
    for low in (first..n).step_by(size) {
        let high = (low + size).min(n);
        let both = for_both(c, &g[low..high], &p[low..high]);
        for (k, &p) in p[low..high].iter().enumerate() {
            let [zero, one] = match k {
                0 => [p, c.not(p)],
                k => both[k - 1].map(|carry| c.xor(p, carry)),
            };
            sums.push(c.mux(carry, one, zero));
        }
        let [zero, one] = both[high - low - 1];
        carry = c.mux(carry, one, zero);
    }
    (sums, carry)
}

/// A block's sums and carry-out for a carry of 0 or 1 into it.
struct Both {
    sums: [Vec<Net>; 2],
    carry: [Net; 2],
}

fn conditional(c: &mut Circuit, g: &[Net], p: &[Net], lowest: Net) -> (Vec<Net>, Net) {
    let mut row: Vec<Both> = (0..g.len())
        .map(|i| Both {
            sums: [vec![if i == 0 { lowest } else { p[i] }], vec![c.not(p[i])]],
            carry: [g[i], c.or(g[i], p[i])],
        })
        .collect();
    while row.len() > 1 {
        let mut next = Vec::new();
        let mut blocks = row.into_iter().enumerate();
        while let Some((at, low)) = blocks.next() {
            let Some((_, high)) = blocks.next() else {
                next.push(low);
                break;
            };
            let [zero, one] = [0, 1].map(|way| {
                // The lowest block is entered by the real carry only.
                if at == 0 && way == 1 {
                    return (low.sums[1].clone(), low.carry[1]);
                }
                let by = low.carry[way];
                let mut sums = low.sums[way].clone();
                for (&zero, &one) in high.sums[0].iter().zip(&high.sums[1]) {
                    sums.push(c.mux(by, one, zero));
                }
                (sums, c.mux(by, high.carry[1], high.carry[0]))
            });
            next.push(Both {
                sums: [zero.0, one.0],
                carry: [zero.1, one.1],
            });
        }
        row = next;
    }
    let Both { sums, carry } = row.remove(0);
    let [sums, _] = sums;
    (sums, carry[0])
}
