//! Blocks of positions, for the schemes that work block by block.
//!
//! Invariant: blocks are adjacent, lowest first, and cover every position once.

use std::ops::Range;

/// Blocks of `size`; the last may be shorter.
pub(super) fn uniform(positions: usize, size: usize) -> Vec<Range<usize>> {
    let starts = (0..positions).step_by(size);
    starts.map(|low| low..(low + size).min(positions)).collect()
}

/// Blocks of 1, 2, 3 …, one longer each, so that a block is through with itself
/// just when the carry comes; without a carry-in one position leads. They end
/// after about √(2n) of them (common practice; the count is that of triangular
/// numbers).
pub(super) fn growing(positions: usize, has_carry_in: bool) -> Vec<Range<usize>> {
    let mut blocks = Vec::new();
    let (mut low, mut size) = (0, usize::from(has_carry_in));
    while low < positions {
        let high = (low + size.max(1)).min(positions);
        blocks.push(low..high);
        low = high;
        size += 1;
    }
    blocks
}

/// The blocks of a scheme's settings.
pub(super) fn of(
    positions: usize,
    has_carry_in: bool,
    size: usize,
    growing_ones: bool,
) -> Vec<Range<usize>> {
    if growing_ones {
        growing(positions, has_carry_in)
    } else {
        uniform(positions, size)
    }
}
