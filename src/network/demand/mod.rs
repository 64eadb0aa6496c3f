//! From required times to a set of shared terms: what is asked for is made once,
//! in a cheap way that is still in time.
//!
//! A [`Recipe`] knows terms, their earliest times and the ways to make each from
//! smaller ones. [`serve`] chooses a way for each term that is needed; [`thin`]
//! then takes out terms whose readers can do with others that are there. Both are
//! heuristics of our own in the number of gates. The times are exact: a term is
//! never later than asked, if it can be had by then.
//!
//! Invariant: a way's parts have a lower rank than the term, so loops suffice and
//! results are in order, parts first.

mod serve;
mod thin;

use rustc_hash::FxHashMap;

pub(super) use serve::serve;
pub(super) use thin::thin;

/// What can be made, and how.
pub(super) trait Recipe {
    /// A term; its order means nothing, it only makes results repeatable.
    type Term: Copy + Ord + std::hash::Hash + std::fmt::Debug;

    /// Higher than that of anything the term can be made from.
    fn rank(&self, term: Self::Term) -> u32;
    /// Whether it is there from the start.
    fn is_given(&self, term: Self::Term) -> bool;
    /// The earliest it can be had.
    fn earliest(&self, term: Self::Term) -> i32;
    /// Adds the ways that are ready by the given time; at least one if
    /// [`Self::earliest`] is no later.
    fn ways(&self, term: Self::Term, by: i32, found: &mut Vec<Way<Self::Term>>);
    /// About how many gates the term takes when only what `asked` remembers is
    /// there.
    fn estimate(&self, term: Self::Term, asked: &Asked) -> f32;
    /// Tells `asked` of a term that will be there.
    fn remember(&self, term: Self::Term, asked: &mut Asked);
}

/// One way to make a term.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Way<T> {
    /// The parts, and how long after each the term is ready.
    pub(super) parts: [Option<(T, i32)>; 3],
    /// Two-input gates it takes beyond its parts.
    pub(super) gates: u32,
}

impl<T: Copy> Way<T> {
    pub(super) fn parts(&self) -> impl Iterator<Item = (T, i32)> + use<T> {
        self.parts.into_iter().flatten()
    }
}

/// A term that is made.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Chosen<T> {
    pub(super) term: T,
    /// `None` where the term is given.
    pub(super) way: Option<Way<T>>,
}

/// Serves demands and thins the result out, in a few manners, and keeps what
/// takes the fewest gates.
pub(super) fn fewest<R: Recipe>(
    recipe: &R,
    demands: &[(R::Term, i32)],
    manners: &[Manner],
) -> Vec<Chosen<R::Term>> {
    let tried = manners.iter().map(|&manner| {
        let chosen = thin(recipe, demands, serve(recipe, demands, manner));
        (gates(&chosen), chosen)
    });
    let best = tried.min_by_key(|&(gates, _)| gates);
    best.map_or_else(Vec::new, |(_, chosen)| chosen)
}

/// Gates of all chosen ways.
fn gates<T: Copy>(chosen: &[Chosen<T>]) -> u64 {
    let ways = chosen.iter().filter_map(|each| each.way.as_ref());
    ways.map(|way| u64::from(way.gates)).sum()
}

/// Positions above which only the first manner is tried, for time's sake.
const MANY: usize = 48;

/// None is best on all chains: without toll serial stretches are found, with much
/// of it shared ones.
const MANNERS: [Manner; 3] = [
    Manner {
        toll: 4.0,
        guess: 0.7,
    },
    Manner {
        toll: 64.0,
        guess: 0.3,
    },
    Manner {
        toll: 0.0,
        guess: 0.7,
    },
];

/// The manners to try on a chain of so many positions.
pub(super) fn manners(positions: usize) -> &'static [Manner] {
    if positions <= MANY {
        &MANNERS
    } else {
        &MANNERS[..1]
    }
}

/// What is varied between attempts.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Manner {
    /// What leaving a shared term no time to spare counts, in gates.
    pub(super) toll: f32,
    /// What a gate that is only estimated counts.
    pub(super) guess: f32,
}

/// Which spans of each family are asked for, by either end.
#[derive(Default)]
pub(super) struct Asked {
    by_low: FxHashMap<(u8, u32), Vec<u32>>,
    by_high: FxHashMap<(u8, u32), Vec<u32>>,
}

impl Asked {
    pub(super) fn remember(&mut self, family: u8, high: u32, low: u32) {
        insert(self.by_low.entry((family, low)).or_default(), high);
        insert(self.by_high.entry((family, high)).or_default(), low);
    }

    /// About how many gates of one item each a span takes, given the largest part
    /// of it at its low or its high end that is asked for.
    pub(super) fn gates(&self, family: u8, high: u32, low: u32) -> f32 {
        let mut left = high - low;
        if left == 0 {
            return 0.0;
        }
        if let Some(highs) = self.by_low.get(&(family, low)) {
            let below = highs.partition_point(|&each| each <= high);
            if let Some(i) = below.checked_sub(1) {
                left = left.min(high - highs[i]);
            }
        }
        if let Some(lows) = self.by_high.get(&(family, high)) {
            let from = lows.partition_point(|&each| each < low);
            if let Some(&each) = lows.get(from) {
                left = left.min(each - low);
            }
        }
        // What is left is likely to be shared a little, too.
        1.0 + 0.9 * (left as f32 - 1.0).max(0.0)
    }
}

fn insert(sorted: &mut Vec<u32>, value: u32) {
    if let Err(at) = sorted.binary_search(&value) {
        sorted.insert(at, value);
    }
}

/// Splits of one span that are all looked at.
const MOST_SPLITS: usize = 128;

/// Splits of a span that are worth looking at: all of a few, else those next to
/// either end and a coarse raster between, the same for every span so that spans
/// are shared.
pub(super) fn few(from: usize, to: usize) -> impl Iterator<Item = usize> {
    let count = (to + 1).saturating_sub(from);
    let raster = (count / 16).next_power_of_two();
    (from..=to).filter(move |&at| {
        count <= MOST_SPLITS || at - from < 8 || to - at < 16 || at.is_multiple_of(raster)
    })
}

/// The places from `low + 1` to `high` at which both sides are in time, given that
/// `upper` holds from some place on and `lower` up to some place.
pub(super) fn in_time(
    low: usize,
    high: usize,
    upper: impl Fn(usize) -> bool,
    lower: impl Fn(usize) -> bool,
) -> (usize, usize) {
    let (mut from, mut end) = (low + 1, high + 1);
    while from < end {
        let middle = from.midpoint(end);
        if upper(middle) {
            end = middle;
        } else {
            from = middle + 1;
        }
    }
    let first = from;
    let (mut from, mut end) = (low + 1, high + 1);
    while from < end {
        let middle = from.midpoint(end);
        if lower(middle) {
            from = middle + 1;
        } else {
            end = middle;
        }
    }
    (first, from - 1)
}
