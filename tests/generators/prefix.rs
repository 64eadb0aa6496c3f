//! Carries by prefix networks of valency 2. A network is a list of rows; a row
//! joins position `i` with position `k`, both as they stood before the row.
//!
//! Sources: Sklansky 1960; Kogge and Stone 1973; Ladner and Fischer 1980; Brent
//! and Kung 1982; Han and Carlson 1987; Knowles 1999. Constructions written from
//! the papers' definitions as the field retells them.

use super::circuit::{Circuit, Net};
use super::words::Architecture;

type Row = Vec<(usize, usize)>;

/// Generates of the spans [i:0]; a propagate of `None` is 0.
pub fn carries(c: &mut Circuit, network: Architecture, g: &[Net], p: &[Option<Net>]) -> Vec<Net> {
    let (mut g, mut p) = (g.to_vec(), p.to_vec());
    for row in rows(network, g.len()) {
        let (old_g, old_p) = (g.clone(), p.clone());
        for (i, k) in row {
            // A span that already reaches position 0 stays as it is.
            if let Some(high) = old_p[i] {
                let passed = c.and(high, old_g[k]);
                g[i] = c.or(old_g[i], passed);
                p[i] = old_p[k].map(|low| c.and(high, low));
            }
        }
    }
    g
}

fn rows(network: Architecture, n: usize) -> Vec<Row> {
    let all: Vec<usize> = (0..n).collect();
    match network {
        Architecture::KoggeStone => knowles(&all, 1),
        Architecture::Knowles(most) => knowles(&all, most),
        Architecture::Sklansky => sklansky(n),
        Architecture::BrentKung => brent_kung(n),
        Architecture::HanCarlson => {
            let odd: Vec<usize> = (1..n).step_by(2).collect();
            let mut rows = vec![odd.iter().map(|&i| (i, i - 1)).collect()];
            rows.extend(knowles(&odd, 1));
            rows.push((2..n).step_by(2).map(|i| (i, i - 1)).collect());
            rows
        }
        Architecture::LadnerFischer(spare) => {
            let mut rows = Vec::new();
            ladner_fischer(&all, spare, &mut rows);
            rows
        }
        Architecture::SparsePrefix(size) => {
            let ends: Vec<usize> = (0..n)
                .step_by(size)
                .map(|low| (low + size).min(n) - 1)
                .collect();
            let mut rows: Vec<Row> = Vec::new();
            // Whole groups first, in series, on their last position only.
            for step in 1..size {
                let joined = ends.iter().filter(|&&end| end % size >= step);
                rows.push(joined.map(|&end| (end, end - step)).collect());
            }
            rows.extend(knowles(&ends, 1));
            for step in 0..size - 1 {
                let inside = (step..n).step_by(size).filter(|&i| i > 0);
                rows.push(
                    inside
                        .filter(|i| !ends.contains(i))
                        .map(|i| (i, i - 1))
                        .collect(),
                );
            }
            rows
        }
        other => unreachable!("{other:?} is no prefix network"),
    }
}

/// Rows over a list of positions: neighbours at distance 1, 2, 4, …; in each row
/// up to `most` positions share the lower node, which lets spans overlap.
fn knowles(at: &[usize], most: usize) -> Vec<Row> {
    let mut rows = Vec::new();
    let mut distance = 1;
    while distance < at.len() {
        let shared = most.min(distance);
        let low = |i: usize| (i - distance) / shared * shared + shared - 1;
        rows.push((distance..at.len()).map(|i| (at[i], at[low(i)])).collect());
        distance *= 2;
    }
    rows
}

fn sklansky(n: usize) -> Vec<Row> {
    let mut rows = Vec::new();
    let mut distance = 1;
    while distance < n {
        let upper = (0..n).filter(|i| i / distance % 2 == 1);
        rows.push(upper.map(|i| (i, i / distance * distance - 1)).collect());
        distance *= 2;
    }
    rows
}

fn brent_kung(n: usize) -> Vec<Row> {
    let mut rows = Vec::new();
    let mut distance = 1;
    while distance < n {
        let ends = (2 * distance - 1..n).step_by(2 * distance);
        rows.push(ends.map(|i| (i, i - distance)).collect());
        distance *= 2;
    }
    while distance > 1 {
        distance /= 2;
        let middles = (3 * distance - 1..n).step_by(2 * distance);
        rows.push(middles.map(|i| (i, i - distance)).collect());
    }
    rows
}

/// P_k of the paper: P_0 splits in halves, the lower P_1, the upper P_0; P_k
/// joins neighbours, solves every second position by P_(k-1), and then the rest.
/// The recursion is as deep as the logarithm of the width.
fn ladner_fischer(at: &[usize], spare: usize, rows: &mut Vec<Row>) {
    if at.len() < 2 {
        return;
    }
    if spare == 0 {
        let (low, high) = at.split_at(at.len().div_ceil(2));
        ladner_fischer(low, 1, rows);
        ladner_fischer(high, 0, rows);
        let top = low[low.len() - 1];
        rows.push(high.iter().map(|&i| (i, top)).collect());
        return;
    }
    rows.push(at.chunks_exact(2).map(|pair| (pair[1], pair[0])).collect());
    let second: Vec<usize> = at.iter().copied().skip(1).step_by(2).collect();
    ladner_fischer(&second, spare - 1, rows);
    let between = (2..at.len()).step_by(2);
    rows.push(between.map(|j| (at[j], at[j - 1])).collect());
}
