//! The lower bound a proposal is held against.
//!
//! A result that depends on m inputs needs a tree of gates with m leaves, so
//! with at most F inputs a gate it is never ready before ⌈log_F m⌉ levels; with
//! leaves that arrive at different times, not before the least t with
//! Σ F^arrival ≤ F^t (Kraft 1949, counted level by level in whole trees). Where a
//! gate of k inputs costs c_k, the same sum with the base that satisfies
//! k·x^(−c_k) ≤ 1 for every k bounds any tree from below, by induction over it.

/// The earliest a function of inputs with these arrivals can be ready when a
/// gate of `gate_inputs` inputs costs one tick; 0 without inputs.
pub fn earliest(arrivals: &[i32], gate_inputs: usize) -> i32 {
    let mut sorted = arrivals.to_vec();
    sorted.sort_unstable();
    let Some(&first) = sorted.first() else {
        return 0;
    };
    let mut level = first;
    let (mut next, mut trees) = (0, 0usize);
    loop {
        while next < sorted.len() && sorted[next] == level {
            trees += 1;
            next += 1;
        }
        if trees == 1 {
            match sorted.get(next) {
                None => return level,
                // A lone tree waits for the next leaf without a gate.
                Some(&later) => level = later,
            }
        } else {
            trees = trees.div_ceil(gate_inputs.max(2));
            level += 1;
        }
    }
}

/// The same when a gate of k inputs costs at least `cost(k)` ticks, for gates of 2
/// to `gate_inputs` inputs.
pub fn earliest_at_cost(arrivals: &[i32], gate_inputs: usize, cost: impl Fn(usize) -> i32) -> i32 {
    let Some(&latest) = arrivals.iter().max() else {
        return 0;
    };
    if arrivals.len() == 1 {
        return latest;
    }
    let costs = || (2..=gate_inputs.max(2)).map(|inputs| (inputs, cost(inputs).max(1)));
    let least = costs().map(|(_, cost)| cost).min().unwrap_or(1);
    let rate = costs()
        .map(|(inputs, cost)| (inputs as f64).ln() / f64::from(cost))
        .fold(0.0, f64::max);
    let sum: f64 = arrivals
        .iter()
        .map(|&at| (rate * (f64::from(at) - f64::from(latest))).exp())
        .sum();
    // A tick less than the sum says, so that its rounding never claims too much.
    let above = (sum.ln() / rate).floor() as i32 - 1;
    latest.saturating_add(above.max(least))
}
