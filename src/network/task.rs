//! What the schemes that fit arrivals are asked: leaves and when they are ready,
//! what steps cost, and which carries and sums are needed by when.
//!
//! Required times are relative: if one of them cannot be met, all are put off
//! alike until they can, so "as early as possible" is all of them at 0. Where
//! there is time to spare it is left, and gates are saved.

use super::arrival_aware::{Leaves, Steps};
use super::demand::Way;
use super::demand::{Manner, Recipe, fewest};
use super::form::{Form, Signal, SignalId};
use super::sum_end::{Carries, Ends, SumTerm, Sums};
use rustc_hash::FxHashMap;

/// See the head of the module.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Task {
    /// The leaves, the carry-in first if there is one.
    pub leaves: Leaves,
    /// When `a ⊕ b` of each item is ready; of a carry-in it is never read.
    pub halves: Vec<i32>,
    /// Whether the lowest item is the carry-in.
    pub has_carry_in: bool,
    /// What ANDs and ORs cost.
    pub steps: Steps,
    /// What the ends of sums cost.
    pub ends: Ends,
    /// By position, when the carry out of it is needed, if it is.
    pub carries_by: Vec<Option<i32>>,
    /// By position, when its sum is needed, if it is.
    pub sums_by: Vec<Option<i32>>,
}

/// How a scheme turns its own terms into signals.
pub(super) trait Emit: Carries {
    /// The signals of a leaf.
    fn leaf(&self, term: Self::Term) -> Signal;
    /// The signals a term consists of: one, or a list that whoever reads it takes
    /// apart. `of` gives those of its parts.
    fn emit(
        &self,
        term: Self::Term,
        parts: &[(Self::Term, &[SignalId])],
        form: &mut Form,
    ) -> Vec<SignalId>;
}

/// Positions from which only the first manner is tried, for time's sake.
const MANY: usize = 128;

/// No toll finds serial stretches, the others find shared ones.
const MANNERS: [Manner; 3] = [
    Manner {
        toll: 0.0,
        guess: 0.7,
    },
    Manner {
        toll: 2.0,
        guess: 0.3,
    },
    Manner {
        toll: 0.5,
        guess: 0.7,
    },
];

/// The form that serves a task with given carries, and how much later than asked
/// everything is.
pub(super) fn fulfil<C: Emit>(task: &Task, carries: &C) -> (Form, i32) {
    let sums = Sums::of(carries, &task.halves, task.ends);
    let positions = task.sums_by.len();
    let first = usize::from(task.has_carry_in);
    let mut demands: Vec<(SumTerm<C::Term>, i32)> = Vec::new();
    for position in 0..positions {
        let item = position + first;
        if let Some(by) = task.carries_by[position] {
            demands.push((SumTerm::Carry(carries.carry(item, 0)), by));
        }
        if let (Some(by), true) = (task.sums_by[position], item > 0) {
            demands.push((Sums::<C>::sum(item), by));
        }
    }
    let late = demands.iter().map(|&(term, by)| sums.earliest(term) - by);
    let late = late.max().unwrap_or(0).max(0);
    for (_, by) in &mut demands {
        *by += late;
    }
    let manners = if positions < MANY {
        &MANNERS[..]
    } else {
        &MANNERS[..1]
    };
    let chosen = fewest(&sums, &demands, manners);
    let mut form = Form::default();
    let mut made: FxHashMap<SumTerm<C::Term>, Vec<SignalId>> = FxHashMap::default();
    let mut halves: Vec<Option<SignalId>> = vec![None; task.halves.len()];
    for each in chosen {
        let signals = match (each.term, each.way) {
            (SumTerm::Carry(term), None) => vec![form.add(carries.leaf(term))],
            (SumTerm::Carry(term), Some(way)) => {
                let parts: Vec<(C::Term, &[SignalId])> = way
                    .parts()
                    .filter_map(|(part, _)| match part {
                        SumTerm::Carry(inner) => Some((inner, &made[&part][..])),
                        SumTerm::Sum { .. } => None,
                    })
                    .collect();
                carries.emit(term, &parts, &mut form)
            }
            (SumTerm::Sum { item, .. }, way) => {
                let way = way.expect("a sum is never given");
                vec![sum(item as usize, &way, &made, &mut halves, &mut form)]
            }
        };
        made.insert(each.term, signals);
    }
    for position in 0..positions {
        let item = position + first;
        let carry = task.carries_by[position].map(|_| SumTerm::Carry(carries.carry(item, 0)));
        form.carries.push(carry.map(|term| made[&term][0]));
        let sum = task.sums_by[position].map(|_| match item {
            0 => half(0, &mut halves, &mut form),
            _ => made[&Sums::<C>::sum(item)][0],
        });
        form.sums.push(sum);
    }
    (form, late)
}

fn half(item: usize, halves: &mut [Option<SignalId>], form: &mut Form) -> SignalId {
    *halves[item].get_or_insert_with(|| form.add(Signal::Half(item)))
}

fn sum<T: Copy + Eq + std::hash::Hash>(
    item: usize,
    way: &Way<SumTerm<T>>,
    made: &FxHashMap<SumTerm<T>, Vec<SignalId>>,
    halves: &mut [Option<SignalId>],
    form: &mut Form,
) -> SignalId {
    let parts: Vec<SignalId> = way.parts().map(|(part, _)| made[&part][0]).collect();
    match parts[..] {
        [by, if_none, if_one] => form.add(Signal::Select {
            by,
            if_one,
            if_none,
        }),
        _ => {
            let half = half(item, halves, form);
            form.add(Signal::Xor(half, parts[0]))
        }
    }
}
