//! The earliest times of every span in the prefix class, with independent trees
//! for its generate and its propagate.
//!
//! `G[j:i]` is an OR of terms `P[j:k]·G[k-1:l]`, the first `G[j:k]` alone, and
//! `P[j:i]` an AND of `P`s; each gate has as many inputs as its price allows. With
//! two inputs and one level a gate this is
//! `t_G[j:i] = min_k max(t_G[j:k]+1, t_P[j:k]+2, t_G[k-1:i]+2)`, the recurrence of
//! S. Held and S. T. Spirkl, "Fast Prefix Adders for Non-uniform Input Arrival
//! Times", Algorithmica 77, 2017; `t_P` is an optimum alphabetic tree.
//!
//! Exact. Invariant: a span inside another is never later (a circuit for the
//! wider one becomes one for the narrower by leaving leaves out), so of the two
//! sides of a split one only falls and one only rises with the split point, and
//! the best point only moves down as the span grows: constant work a span.

use crate::network::profile::{Costs, LONG_BEFORE, Profile};

/// Prices of the steps by number of inputs; the entries 0 and 1 are 0, and none is
/// lower than the one before.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Steps {
    /// An AND.
    pub and: Vec<i32>,
    /// An OR.
    pub or: Vec<i32>,
}

impl Steps {
    /// The same price for every AND and OR of up to `inputs` inputs.
    pub fn uniform(inputs: usize, ticks: i32) -> Self {
        let mut and = vec![ticks; inputs + 1];
        and[0] = 0;
        and[1] = 0;
        Self {
            or: and.clone(),
            and,
        }
    }

    /// The prices of a chain's steps with up to `inputs` inputs, at least two.
    pub(super) fn of(costs: &Costs, inputs: usize) -> Self {
        let most = inputs.min(costs.limits().gate_inputs).max(2);
        // A wider gate that is priced lower is taken as no quicker.
        let rising = |price: &dyn Fn(usize) -> i32| {
            let prices = (0..=most).scan(0, |highest, inputs| {
                *highest = price(inputs).max(*highest);
                Some(*highest)
            });
            prices.collect()
        };
        Self {
            and: rising(&|inputs| costs.and(inputs)),
            or: rising(&|inputs| costs.or(inputs)),
        }
    }

    /// Numbers of inputs worth having: none where one more costs the same.
    fn arities(prices: &[i32]) -> Vec<usize> {
        let last = prices.len() - 1;
        (2..=last)
            .filter(|&inputs| inputs == last || prices[inputs + 1] > prices[inputs])
            .collect()
    }
}

/// When the leaves of each item are ready, the least significant first; an item is
/// a position or, lowest of all, the carry-in, of which only g is read.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Leaves {
    /// The generates.
    pub generate: Vec<i32>,
    /// The propagates.
    pub propagate: Vec<i32>,
    /// `g + p`, the carry out of the item alone if one comes in.
    pub either: Vec<i32>,
}

impl Leaves {
    /// The leaves of a chain.
    pub(in super::super) fn of(profile: &Profile) -> Self {
        let with = |below: Option<i32>, times: &[i32]| -> Vec<i32> {
            below.into_iter().chain(times.iter().copied()).collect()
        };
        let never_read = profile.carry_in.map(|_| LONG_BEFORE);
        let both = profile.generate.iter().zip(&profile.propagate);
        let either: Vec<i32> = both
            .map(|(&g, &p)| g.max(p).saturating_add(profile.costs.or(2)))
            .collect();
        Self {
            generate: with(profile.carry_in, &profile.generate),
            propagate: with(never_read, &profile.propagate),
            either: with(never_read, &either),
        }
    }
}

/// What is made of a span.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(crate) enum Made {
    /// P from at most so many signals, each the P of a part.
    Parts(u8),
    /// G from at most so many terms.
    Terms(u8),
    /// `G + P`: the carry out if a one comes in.
    IfOne,
}

impl Made {
    /// P as one signal.
    pub(crate) const PROPAGATE: Self = Self::Parts(1);
    /// G as one signal.
    pub(crate) const GENERATE: Self = Self::Terms(1);
}

/// See the head of the module.
pub struct Times {
    items: usize,
    steps: Steps,
    or_arities: Vec<usize>,
    and_arities: Vec<usize>,
    parts: Vec<Vec<i32>>,
    terms: Vec<Vec<i32>>,
    if_one: Vec<i32>,
}

/// Where the best split of a row stands, one for each pair of arities.
struct Cursor {
    terms: usize,
    parts: usize,
    at: usize,
}

impl Times {
    /// Computes all spans.
    pub fn of(leaves: &Leaves, steps: &Steps) -> Self {
        let items = leaves.generate.len();
        let cells = items * (items + 1) / 2;
        let (or_arities, and_arities) = (Steps::arities(&steps.or), Steps::arities(&steps.and));
        let mut times = Self {
            items,
            steps: steps.clone(),
            parts: vec![vec![0; cells]; steps.and.len() - 2],
            terms: vec![vec![0; cells]; steps.or.len() - 2],
            if_one: vec![0; cells],
            or_arities,
            and_arities,
        };
        for high in 0..items {
            times.fill_propagates(leaves, high);
            times.fill_generates(leaves, high);
            times.fill_if_one(leaves, high);
        }
        times
    }

    /// Number of items.
    pub fn items(&self) -> usize {
        self.items
    }

    /// The prices used.
    pub(crate) fn steps(&self) -> &Steps {
        &self.steps
    }

    /// The earliest G of a span.
    pub fn generate(&self, high: usize, low: usize) -> i32 {
        self.terms[0][cell(high, low)]
    }

    /// The earliest P of a span.
    pub fn propagate(&self, high: usize, low: usize) -> i32 {
        self.parts[0][cell(high, low)]
    }

    /// The earliest carry out of a span that a one comes into.
    pub fn if_one(&self, high: usize, low: usize) -> i32 {
        self.if_one[cell(high, low)]
    }

    /// The earliest of anything made of a span.
    pub(crate) fn earliest(&self, made: Made, high: usize, low: usize) -> i32 {
        match made {
            Made::Parts(most) => self.parts[usize::from(most) - 1][cell(high, low)],
            Made::Terms(most) => self.terms[usize::from(most) - 1][cell(high, low)],
            Made::IfOne => self.if_one(high, low),
        }
    }

    /// Terms an OR is worth having of.
    pub(crate) fn or_arities(&self) -> &[usize] {
        &self.or_arities
    }

    /// Inputs an AND is worth having of.
    pub(crate) fn and_arities(&self) -> &[usize] {
        &self.and_arities
    }

    fn fill_propagates(&mut self, leaves: &Leaves, high: usize) {
        let most = self.steps.and.len() - 1;
        for table in &mut self.parts {
            table[cell(high, high)] = leaves.propagate[high];
        }
        let mut cursors: Vec<usize> = vec![high; most + 1];
        for low in (0..high).rev() {
            let mut best = vec![i32::MAX; most + 1];
            for parts in 2..=most {
                let upper = |split: usize| self.parts[parts - 2][cell(high, split)];
                let lower = |split: usize| self.parts[0][cell(split - 1, low)];
                best[parts] = crossing(&mut cursors[parts], low, upper, lower);
            }
            let arities = self.and_arities.iter();
            let alone = arities.map(|&parts| best[parts] + self.steps.and[parts]);
            let mut least = alone.min().unwrap_or(i32::MAX);
            for (i, table) in self.parts.iter_mut().enumerate() {
                if i > 0 {
                    least = least.min(best[i + 1]);
                }
                table[cell(high, low)] = least;
            }
        }
    }

    fn fill_generates(&mut self, leaves: &Leaves, high: usize) {
        let most = self.steps.or.len() - 1;
        for table in &mut self.terms {
            table[cell(high, high)] = leaves.generate[high];
        }
        let mut cursors = self.cursors(high);
        for low in (0..high).rev() {
            let mut best = vec![i32::MAX; most + 1];
            for cursor in &mut cursors {
                let time = self.crossing(cursor, high, low, &self.terms[0]);
                best[cursor.terms] = best[cursor.terms].min(time);
            }
            let arities = self.or_arities.iter();
            let alone = arities.map(|&terms| best[terms] + self.steps.or[terms]);
            let mut least = alone.min().unwrap_or(i32::MAX);
            for (i, table) in self.terms.iter_mut().enumerate() {
                if i > 0 {
                    least = least.min(best[i + 1]);
                }
                table[cell(high, low)] = least;
            }
        }
    }

    fn fill_if_one(&mut self, leaves: &Leaves, high: usize) {
        self.if_one[cell(high, high)] = leaves.either[high];
        let mut cursors = self.cursors(high);
        for low in (0..high).rev() {
            // All of P is a term like the others.
            let through = self.propagate(high, low);
            let arities = self.or_arities.iter();
            let with = arities.map(|&terms| {
                let above = self.terms[terms - 2][cell(high, low)];
                above.max(through) + self.steps.or[terms]
            });
            let mut least = with.min().unwrap_or(i32::MAX);
            for cursor in &mut cursors {
                let time = self.crossing(cursor, high, low, &self.if_one);
                least = least.min(time + self.steps.or[cursor.terms]);
            }
            self.if_one[cell(high, low)] = least;
        }
    }

    fn cursors(&self, high: usize) -> Vec<Cursor> {
        let mut cursors = Vec::new();
        for terms in 2..self.steps.or.len() {
            let each = self.and_arities.iter().map(|&inputs| Cursor {
                terms,
                parts: inputs - 1,
                at: high,
            });
            cursors.extend(each);
        }
        cursors
    }

    /// The best last of several terms, over carries out of the lower part.
    fn crossing(&self, cursor: &mut Cursor, high: usize, low: usize, carries: &[i32]) -> i32 {
        let and = self.steps.and[cursor.parts + 1];
        let upper = |split: usize| {
            let at = cell(high, split);
            let terms = self.terms[cursor.terms - 2][at];
            terms.max(self.parts[cursor.parts - 1][at] + and)
        };
        let lower = |split: usize| carries[cell(split - 1, low)] + and;
        crossing(&mut cursor.at, low, upper, lower)
    }
}

/// The place of a span in a triangular table.
pub(crate) fn cell(high: usize, low: usize) -> usize {
    high * (high + 1) / 2 + low
}

/// The least `max(upper(k), lower(k))` for `low < k`: `upper` never rises with
/// `k`, `lower` never falls, and the crossing only moves down from call to call.
pub(crate) fn crossing(
    at: &mut usize,
    low: usize,
    upper: impl Fn(usize) -> i32,
    lower: impl Fn(usize) -> i32,
) -> i32 {
    while *at > low + 1 && lower(*at - 1) >= upper(*at - 1) {
        *at -= 1;
    }
    let here = upper(*at).max(lower(*at));
    if *at > low + 1 {
        here.min(upper(*at - 1).max(lower(*at - 1)))
    } else {
        here
    }
}
