//! The lower bound a proposal is held against.
//!
//! A result that depends on m inputs needs a tree of gates with m leaves, so
//! with at most F inputs a gate it is never ready before ⌈log_F m⌉ levels; with
//! leaves that arrive at different times, not before the least t with
//! Σ F^arrival ≤ F^t (Kraft 1949, counted level by level in whole trees).

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
