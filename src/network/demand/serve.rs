//! Choosing a way for everything that is needed.
//!
//! Terms are taken the largest first, so that when a term's way is chosen all its
//! readers have said when they need it. A way is priced by the gates it adds:
//! nothing for what is asked for anyway, an estimate for what would be new, a
//! toll for leaving a shared term less time to spare. Ties go to the way
//! named first.

use std::collections::BinaryHeap;

use rustc_hash::FxHashMap;

use super::{Asked, Chosen, Manner, Recipe, Way};

/// How much it tells on the gates that a term has only so many ticks to spare:
/// half as much every four ticks.
fn scarcity(to_spare: i32) -> f32 {
    0.5f32.powf(to_spare as f32 / 4.0)
}

/// Serves demands, each a term and when it is needed; a term that cannot be had by
/// then is made as early as it can be.
pub(in super::super) fn serve<R: Recipe>(
    recipe: &R,
    demands: &[(R::Term, i32)],
    manner: Manner,
) -> Vec<Chosen<R::Term>> {
    let mut wants = Wants {
        recipe,
        by: FxHashMap::default(),
        queue: BinaryHeap::new(),
        asked: Asked::default(),
    };
    for &(term, by) in demands {
        wants.ask(term, by.max(recipe.earliest(term)));
    }
    let mut chosen = Vec::new();
    let mut ways = Vec::new();
    while let Some((_, term)) = wants.queue.pop() {
        if recipe.is_given(term) {
            chosen.push(Chosen { term, way: None });
            continue;
        }
        let by = wants.by[&term];
        ways.clear();
        recipe.ways(term, by, &mut ways);
        if ways.is_empty() {
            // Prices the recipe's times do not hold for; late is better than none.
            recipe.ways(term, i32::MAX, &mut ways);
        }
        let mut best: Option<(f32, Way<R::Term>)> = None;
        for way in &ways {
            let price = wants.price(way, by, manner);
            if best.is_none_or(|(least, _)| price < least) {
                best = Some((price, *way));
            }
        }
        let (_, way) = best.expect("a term has a way when time does not matter");
        for (part, delay) in way.parts() {
            wants.ask(part, by - delay);
        }
        chosen.push(Chosen {
            term,
            way: Some(way),
        });
    }
    chosen.reverse();
    chosen
}

/// What is wanted so far.
struct Wants<'a, R: Recipe> {
    recipe: &'a R,
    by: FxHashMap<R::Term, i32>,
    queue: BinaryHeap<(u32, R::Term)>,
    asked: Asked,
}

impl<R: Recipe> Wants<'_, R> {
    fn ask(&mut self, term: R::Term, by: i32) {
        if let Some(known) = self.by.get_mut(&term) {
            *known = by.min(*known);
            return;
        }
        self.by.insert(term, by);
        self.queue.push((self.recipe.rank(term), term));
        self.recipe.remember(term, &mut self.asked);
    }

    fn price(&self, way: &Way<R::Term>, by: i32, manner: Manner) -> f32 {
        let mut price = way.gates as f32;
        for (part, delay) in way.parts() {
            if self.recipe.is_given(part) {
                continue;
            }
            match self.by.get(&part) {
                Some(&known) => {
                    let to_spare = by - delay - self.recipe.earliest(part);
                    let before = known - self.recipe.earliest(part);
                    if to_spare < before {
                        price += manner.toll * (scarcity(to_spare) - scarcity(before));
                    }
                }
                None => price += manner.guess * self.recipe.estimate(part, &self.asked),
            }
        }
        price
    }
}
