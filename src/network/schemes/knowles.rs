//! Knowles: the family between Kogge–Stone and Sklansky, by the fan-out of each
//! level.
//!
//! At level j a position reads the span that ends 2^j below, or the topmost
//! position of the group of f_j that one lies in. All ones is Kogge–Stone, the
//! most there can be is Sklansky; the levels are the fewest throughout. Spans
//! that overlap count once, G and P being idempotent. With folds around it the
//! family reaches every point of the taxonomy of D. Harris ("A Taxonomy of
//! Parallel Prefix Networks", Asilomar 2003).
//!
//! S. Knowles, "A Family of Adders", 14th IEEE Symposium on Computer Arithmetic,
//! 1999.

use super::fold::folded;
use super::{CarryNetwork, Growth, NOTHING, NodeId, Scheme, Takes, items, join, set_carries};

pub(super) const SCHEME: Scheme = Scheme {
    name: "knowles",
    source: "Knowles 1999",
    growth: Growth::LogLinear,
    takes: Takes {
        fan_outs: true,
        folds: true,
        ..NOTHING
    },
    shape: |network, settings, _| {
        let items = items(network);
        let inner = |network: &mut CarryNetwork, row: &[NodeId], _| {
            prefixes(network, row, settings.fan_outs)
        };
        let prefixes = folded(network, &items, 2, settings.folds, inner);
        set_carries(network, &prefixes);
    },
};

/// The fan-out of each level, as powers of two, the last level first: the
/// published way to name a member of the family. A level past the list has 1.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct FanOuts(u64);

impl FanOuts {
    /// Levels a list holds: enough for 2^16 positions.
    const MOST_LEVELS: u32 = 16;

    /// Fan-outs, the last level first, each a power of two. A fan-out is cut
    /// down to what its level and the level below it allow. Panics where one is
    /// no power of two or there are more than 16.
    pub fn new(last_first: &[usize]) -> Self {
        assert!(last_first.len() <= Self::MOST_LEVELS as usize);
        let packed = last_first
            .iter()
            .enumerate()
            .fold(0, |packed, (i, fan_out)| {
                assert!(fan_out.is_power_of_two(), "a fan-out is a power of two");
                packed | u64::from(fan_out.trailing_zeros().min(15)) << (4 * i)
            });
        Self(packed)
    }

    /// The member with at most 2^t tracks and, in its last level, the fan-out
    /// that leaves: f + t = L - 1 in the taxonomy of prefix networks.
    pub fn with_tracks(levels: u32, t: u32) -> Self {
        let from_last = (0..levels).map(|i| 1 << (levels - 1 - i).saturating_sub(t));
        Self::new(&from_last.collect::<Vec<usize>>())
    }

    /// Every member of the family for so many levels: exponents that never fall
    /// from one level to the next, that of level j at most j.
    pub fn every(levels: u32) -> Vec<Self> {
        // First level first while they are made.
        let mut members: Vec<Vec<u32>> = vec![Vec::new()];
        for level in 0..levels {
            let mut longer = Vec::new();
            for member in &members {
                let least = member.last().copied().unwrap_or(0);
                for exponent in least..=level {
                    let mut next = member.clone();
                    next.push(exponent);
                    longer.push(next);
                }
            }
            members = longer;
        }
        let fan_outs = |member: Vec<u32>| {
            let last_first = member.iter().rev().map(|&exponent| 1 << exponent);
            Self::new(&last_first.collect::<Vec<usize>>())
        };
        members.into_iter().map(fan_outs).collect()
    }

    /// The exponent of level `level` of `levels`, from 0.
    fn exponent(self, level: u32, levels: u32) -> u32 {
        let from_last = levels - 1 - level;
        if from_last >= Self::MOST_LEVELS {
            return 0;
        }
        (self.0 >> (4 * from_last) & 15) as u32
    }

    /// The exponents of so many levels, first level first, cut down to what each
    /// level allows.
    fn exponents(self, levels: u32) -> Vec<u32> {
        let mut exponents: Vec<u32> = (0..levels)
            .map(|level| self.exponent(level, levels).min(level))
            .collect();
        // A level never has less than the one before it.
        for i in (1..exponents.len()).rev() {
            exponents[i - 1] = exponents[i - 1].min(exponents[i]);
        }
        exponents
    }

    /// The fan-outs of so many levels, the last first.
    pub fn list(self, levels: u32) -> Vec<usize> {
        let exponents = self.exponents(levels);
        exponents.into_iter().rev().map(|e| 1 << e).collect()
    }
}

impl Default for FanOuts {
    /// Two in the last level, one in all others.
    fn default() -> Self {
        Self::new(&[2])
    }
}

/// The prefixes of adjacent spans, lowest first. A cell stands only where some
/// prefix reads through it, so that the most fan-out is Sklansky's network and
/// not a larger one.
fn prefixes(network: &mut CarryNetwork, items: &[NodeId], fan_outs: FanOuts) -> Vec<NodeId> {
    let levels = items.len().next_power_of_two().trailing_zeros();
    let exponents = fan_outs.exponents(levels);
    let lower_of = |item: usize, level: usize| {
        let lower = item.checked_sub(1 << level)?;
        Some(lower | ((1 << exponents[level]) - 1))
    };
    // How far down each item has to reach after each level, the last first.
    let mut reach: Vec<usize> = vec![0; items.len()];
    let mut read: Vec<Vec<Option<usize>>> = Vec::new();
    for level in (0..exponents.len()).rev() {
        let mut before: Vec<usize> = (0..items.len()).collect();
        let mut reads = vec![None; items.len()];
        for (item, &low) in reach.iter().enumerate() {
            match lower_of(item, level).filter(|&lower| low <= lower) {
                Some(lower) => {
                    before[item] = before[item].min(lower + 1);
                    before[lower] = before[lower].min(low);
                    reads[item] = Some(lower);
                }
                None => before[item] = before[item].min(low),
            }
        }
        reach = before;
        read.push(reads);
    }
    let mut row = items.to_vec();
    for reads in read.into_iter().rev() {
        let above = row.clone();
        network.begin_row();
        for (item, lower) in reads.into_iter().enumerate() {
            let meets =
                |lower: &usize| network.span(above[*lower]).low < network.span(above[item]).low;
            if let Some(lower) = lower.filter(meets) {
                row[item] = join(network, [above[lower], above[item]]);
            }
        }
    }
    row
}
