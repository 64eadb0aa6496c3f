//! Conditional sum: every sum and carry for both carries into its block, blocks
//! doubled level by level, the lower half's carries choosing in the upper half.
//!
//! Invariant: ⌈log2 n⌉ levels, the carry-in being one more item at the low end,
//! and the XOR comes first, not last. The lowest block knows its carry, so it
//! has one of each only.
//!
//! J. Sklansky, "Conditional-Sum Addition Logic", IRE Transactions on Electronic
//! Computers EC-9, 1960.

use super::{CarryNetwork, Growth, NOTHING, Scheme, SignalId, Takes, items};

pub(super) const SCHEME: Scheme = Scheme {
    name: "conditional-sum",
    source: "Sklansky 1960",
    growth: Growth::LogLinear,
    takes: Takes {
        select_end: false,
        ..NOTHING
    },
    shape: |network, _, _| shape(network),
};

/// What one position has of a block, as if no carry came in and as if one did;
/// the second is not there in the lowest block.
#[derive(Clone, Copy)]
struct Both {
    zero: SignalId,
    one: Option<SignalId>,
}

fn shape(network: &mut CarryNetwork) {
    let items = items(network);
    let first = usize::from(network.carry_in().is_some());
    let mut carries = Vec::with_capacity(items.len());
    for (i, &item) in items.iter().enumerate() {
        carries.push(Both {
            zero: network.generate_of(item),
            one: (i > 0).then(|| network.either_of(item)),
        });
    }
    // Sums of blocks of one are the half sum and its complement.
    let mut sums: Vec<Option<Both>> = vec![None; items.len()];
    let mut size = 1;
    while size < items.len() {
        let below = carries.clone();
        for i in (0..items.len()).filter(|i| i / size % 2 == 1) {
            let lower = below[i / size * size - 1];
            if let Some(position) = i.checked_sub(first) {
                sums[i] = Some(chosen_sum(network, position, sums[i], lower));
            }
            carries[i] = chosen_carry(network, below[i], lower);
        }
        size *= 2;
    }
    for i in first..items.len() {
        let position = i - first;
        network.set_carry_signal(position, carries[i].zero);
        if let Some(sum) = sums[i] {
            network.set_sum(position, sum.zero);
        }
    }
}

fn chosen_carry(network: &mut CarryNetwork, own: Both, lower: Both) -> Both {
    let mut after = |entry: SignalId| match own.one {
        // With a carry in it is never less than without.
        Some(one) => {
            let passed = network.and(&[entry, one]);
            network.or(&[own.zero, passed])
        }
        None => own.zero,
    };
    Both {
        zero: after(lower.zero),
        one: lower.one.map(after),
    }
}

fn chosen_sum(network: &mut CarryNetwork, position: usize, own: Option<Both>, lower: Both) -> Both {
    let half = network.half_sum(position);
    let mut after = |entry: SignalId| match own {
        Some(Both {
            zero,
            one: Some(one),
        }) => network.select(entry, one, zero),
        Some(Both { zero, one: None }) => zero,
        None => network.xor(half, entry),
    };
    Both {
        zero: after(lower.zero),
        one: lower.one.map(after),
    }
}
