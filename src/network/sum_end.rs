//! How sums end: an XOR with the carry, or a choice between two sums.
//!
//! The sum of an item is `h ⊕ c` with `c` the carry into it. Where the carry into
//! a lower item `k` comes late, both sums over the items from `k` up are made, for
//! no carry into `k` and for one, and that carry chooses: the way from it is a
//! choice instead of a combination and an XOR, which saves a level. The two sums
//! may end in a choice again. Conditional sums: J. Sklansky, "Conditional-Sum
//! Addition Logic", IRE Transactions on Electronic Computers EC-9, 1960.
//!
//! Exact for the carries it is given. Invariant: as for carries, a span inside
//! another is never later, so the best place to choose only moves down.

use super::arrival_aware::times::{cell, crossing};
use super::demand::{Asked, Recipe, Way, few, in_time};
use super::profile::Costs;

/// A recipe for carries over spans of items.
pub(super) trait Carries: Recipe {
    /// Number of items, the lowest perhaps the carry-in.
    fn items(&self) -> usize;
    /// The carry out of a span that nothing comes into.
    fn carry(&self, high: usize, low: usize) -> Self::Term;
    /// The carry out of a span that a one comes into.
    fn carry_if_one(&self, high: usize, low: usize) -> Self::Term;
}

/// What the ends of sums cost, in ticks and in two-input gates.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Ends {
    xor: i32,
    xor_gates: u32,
    select: Option<Select>,
}

/// A choice, in ticks from what chooses and from what is chosen.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Select {
    choose: i32,
    value: i32,
}

/// Two-input gates of a choice.
const SELECT_GATES: u32 = 3;

impl Ends {
    /// The ends of a chain's sums, with choices or without.
    pub(super) fn of(costs: &Costs, select: bool) -> Self {
        Self {
            xor: costs.xor,
            // An XOR of two levels is made of three ANDs.
            xor_gates: if costs.xor > costs.and(2) { 3 } else { 1 },
            select: select.then_some(Select {
                choose: costs.select_choose,
                value: costs.select_value,
            }),
        }
    }
}

/// A term of [`Sums`].
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(super) enum SumTerm<T> {
    /// A term of the carries.
    Carry(T),
    /// The sum of an item, over the items below it down to `low`, if a one comes
    /// into that or nothing.
    Sum {
        /// The item; above `low`.
        item: u32,
        /// The lowest item looked at.
        low: u32,
        /// Whether a one comes in.
        one: bool,
    },
}

/// Carries and sums as one recipe.
pub(super) struct Sums<'a, C> {
    carries: &'a C,
    halves: &'a [i32],
    ends: Ends,
    /// By item below the sum and lowest item.
    if_none: Vec<i32>,
    if_one: Vec<i32>,
}

impl<'a, C: Carries> Sums<'a, C> {
    /// `halves` are the arrivals of `a ⊕ b` of each item.
    pub(super) fn of(carries: &'a C, halves: &'a [i32], ends: Ends) -> Self {
        let items = carries.items();
        let mut sums = Self {
            carries,
            halves,
            ends,
            if_none: Vec::new(),
            if_one: Vec::new(),
        };
        let Some(select) = ends.select else {
            return sums;
        };
        let cells = items * items.saturating_sub(1) / 2;
        sums.if_none = vec![0; cells];
        sums.if_one = vec![0; cells];
        for below in 0..items.saturating_sub(1) {
            let mut cursors = [below; 2];
            for low in (0..=below).rev() {
                let upper = |split: usize| {
                    let at = cell(below, split);
                    sums.if_none[at].max(sums.if_one[at]) + select.value
                };
                let mut found = [0; 2];
                for (one, cursor) in cursors.iter_mut().enumerate() {
                    let lower =
                        |split: usize| sums.carry_into(split - 1, low, one == 1) + select.choose;
                    found[one] = sums.by_xor(below, low, one == 1);
                    if low < below {
                        found[one] = found[one].min(crossing(cursor, low, upper, lower));
                    }
                }
                [
                    sums.if_none[cell(below, low)],
                    sums.if_one[cell(below, low)],
                ] = found;
            }
        }
        sums
    }

    /// The term of an item's sum.
    pub(super) fn sum(item: usize) -> SumTerm<C::Term> {
        SumTerm::Sum {
            item: item as u32,
            low: 0,
            one: false,
        }
    }

    /// The earliest carry out of a span.
    fn carry_into(&self, high: usize, low: usize, one: bool) -> i32 {
        self.carries.earliest(self.carry(high, low, one))
    }

    fn carry(&self, high: usize, low: usize, one: bool) -> C::Term {
        if one {
            self.carries.carry_if_one(high, low)
        } else {
            self.carries.carry(high, low)
        }
    }

    fn by_xor(&self, below: usize, low: usize, one: bool) -> i32 {
        let carry = self.carry_into(below, low, one);
        carry.max(self.halves[below + 1]) + self.ends.xor
    }
}

impl<C: Carries> Recipe for Sums<'_, C> {
    type Term = SumTerm<C::Term>;

    fn rank(&self, term: Self::Term) -> u32 {
        match term {
            SumTerm::Carry(term) => self.carries.rank(term),
            SumTerm::Sum { item, low, .. } => (1 << 31) + (item - low),
        }
    }

    fn is_given(&self, term: Self::Term) -> bool {
        matches!(term, SumTerm::Carry(term) if self.carries.is_given(term))
    }

    fn earliest(&self, term: Self::Term) -> i32 {
        match term {
            SumTerm::Carry(term) => self.carries.earliest(term),
            SumTerm::Sum { item, low, one } => {
                let (below, low) = (item as usize - 1, low as usize);
                match (self.ends.select, one) {
                    (None, _) => self.by_xor(below, low, one),
                    (Some(_), false) => self.if_none[cell(below, low)],
                    (Some(_), true) => self.if_one[cell(below, low)],
                }
            }
        }
    }

    fn ways(&self, term: Self::Term, by: i32, found: &mut Vec<Way<Self::Term>>) {
        match term {
            SumTerm::Carry(term) => {
                let mut ways = Vec::new();
                self.carries.ways(term, by, &mut ways);
                found.extend(ways.into_iter().map(|way| {
                    Way {
                        parts: way
                            .parts
                            .map(|part| part.map(|(term, delay)| (SumTerm::Carry(term), delay))),
                        gates: way.gates,
                    }
                }));
            }
            SumTerm::Sum { item, low, one } => {
                let (below, lowest) = (item as usize - 1, low as usize);
                if self.by_xor(below, lowest, one) <= by {
                    let carry = SumTerm::Carry(self.carry(below, lowest, one));
                    found.push(Way {
                        parts: [Some((carry, self.ends.xor)), None, None],
                        gates: self.ends.xor_gates,
                    });
                }
                let Some(select) = self.ends.select else {
                    return;
                };
                let (from, to) = in_time(
                    lowest,
                    below,
                    |split| {
                        let at = cell(below, split);
                        self.if_none[at].max(self.if_one[at]) + select.value <= by
                    },
                    |split| self.carry_into(split - 1, lowest, one) + select.choose <= by,
                );
                found.extend(few(from, to).map(|split| {
                    let carry = SumTerm::Carry(self.carry(split - 1, lowest, one));
                    let sum = |one| SumTerm::Sum {
                        item,
                        low: split as u32,
                        one,
                    };
                    Way {
                        parts: [
                            Some((carry, select.choose)),
                            Some((sum(false), select.value)),
                            Some((sum(true), select.value)),
                        ],
                        gates: SELECT_GATES,
                    }
                }));
            }
        }
    }

    fn estimate(&self, term: Self::Term, asked: &Asked) -> f32 {
        match term {
            SumTerm::Carry(term) => self.carries.estimate(term, asked),
            SumTerm::Sum { item, low, one } => {
                let carry = self.carry(item as usize - 1, low as usize, one);
                self.ends.xor_gates as f32 + self.carries.estimate(carry, asked)
            }
        }
    }

    fn remember(&self, term: Self::Term, asked: &mut Asked) {
        if let SumTerm::Carry(term) = term {
            self.carries.remember(term, asked);
        }
    }
}
