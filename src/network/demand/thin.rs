//! Taking out what can be done without.
//!
//! With every term's arrival and required time known, a term goes when each of
//! its readers has another way in time among what is there, at no higher cost; and
//! a term's way is exchanged when that frees more gates than it costs. This is the
//! depth-increasing half of R. Zimmermann, "Non-Heuristic Optimization and
//! Synthesis of Parallel-Prefix Adders", IFIP Workshop on Logic and Architecture
//! Synthesis 1996 (from memory), carried over to terms of any kind. Invariant: no
//! demand gets later than it is needed, and the gates never grow.

use rustc_hash::FxHashMap;

use super::{Chosen, Recipe, Way};

/// Terms with more readers than this are kept.
const MOST_READERS: usize = 8;
/// Passes over all terms, and over many.
const PASSES: [usize; 2] = [4, 1];
/// Terms that are many.
const MANY: usize = 20_000;

/// Thins out what [`super::serve`] chose for the same demands.
pub(in super::super) fn thin<R: Recipe>(
    recipe: &R,
    demands: &[(R::Term, i32)],
    chosen: Vec<Chosen<R::Term>>,
) -> Vec<Chosen<R::Term>> {
    let passes = PASSES[usize::from(chosen.len() >= MANY)];
    let mut stock = Stock::of(recipe, demands, chosen);
    for _ in 0..passes {
        if !stock.pass() {
            break;
        }
    }
    let kept = stock.chosen.into_iter().zip(stock.alive);
    kept.filter(|&(_, alive)| alive)
        .map(|(chosen, _)| chosen)
        .collect()
}

/// The chosen terms with their readers and times.
struct Stock<'a, R: Recipe> {
    recipe: &'a R,
    chosen: Vec<Chosen<R::Term>>,
    place: FxHashMap<R::Term, u32>,
    readers: Vec<Vec<u32>>,
    alive: Vec<bool>,
    arrival: Vec<i32>,
    required: Vec<i32>,
    /// When a demand needs it itself.
    demanded: Vec<Option<i32>>,
    ways: Vec<Way<R::Term>>,
}

impl<'a, R: Recipe> Stock<'a, R> {
    fn of(recipe: &'a R, demands: &[(R::Term, i32)], chosen: Vec<Chosen<R::Term>>) -> Self {
        let n = chosen.len();
        let places = chosen.iter().enumerate();
        let mut stock = Self {
            recipe,
            place: places.map(|(i, each)| (each.term, i as u32)).collect(),
            readers: vec![Vec::new(); n],
            alive: vec![true; n],
            arrival: vec![0; n],
            required: vec![i32::MAX; n],
            demanded: vec![None; n],
            ways: Vec::new(),
            chosen,
        };
        for &(term, by) in demands {
            let at = stock.at(term);
            let by = by.max(recipe.earliest(term));
            stock.demanded[at] = Some(stock.demanded[at].map_or(by, |known| known.min(by)));
        }
        for i in 0..n {
            for (part, _) in stock.chosen[i].way.iter().flat_map(Way::parts) {
                let at = stock.at(part);
                stock.readers[at].push(i as u32);
            }
            stock.arrival[i] = stock.ready(i);
        }
        for i in (0..n).rev() {
            stock.required[i] = stock.needed_by(i);
        }
        stock
    }

    fn at(&self, term: R::Term) -> usize {
        self.place[&term] as usize
    }

    /// When a term is ready; one without parts, at its earliest.
    fn ready(&self, i: usize) -> i32 {
        let parts = self.chosen[i].way.iter().flat_map(Way::parts);
        let times = parts.map(|(part, delay)| self.arrival[self.at(part)] + delay);
        let earliest = || self.recipe.earliest(self.chosen[i].term);
        times.max().unwrap_or_else(earliest)
    }

    /// When its demand and its readers need a term.
    fn needed_by(&self, i: usize) -> i32 {
        let mut by = self.demanded[i].unwrap_or(i32::MAX);
        for &reader in &self.readers[i] {
            let reader = reader as usize;
            if let Some(way) = self.chosen[reader].way {
                for (part, delay) in way.parts() {
                    if part == self.chosen[i].term {
                        by = by.min(self.required[reader] - delay);
                    }
                }
            }
        }
        by
    }

    /// One pass over all terms, the largest first; says whether it saved gates.
    fn pass(&mut self) -> bool {
        let mut saved = false;
        for i in (0..self.chosen.len()).rev() {
            if self.alive[i] && self.demanded[i].is_none() && self.chosen[i].way.is_some() {
                saved |= self.drop_term(i);
            }
        }
        for i in (0..self.chosen.len()).rev() {
            if self.alive[i] && self.chosen[i].way.is_some() {
                saved |= self.cheapen(i);
            }
        }
        saved
    }

    /// Gives every reader of a term another way, so that it goes.
    fn drop_term(&mut self, i: usize) -> bool {
        let readers = self.readers[i].clone();
        let term = self.chosen[i].term;
        let all = readers.len() <= MOST_READERS
            && readers
                .iter()
                .all(|&reader| self.way_without(reader as usize, term).is_some());
        if !all {
            return false;
        }
        for reader in readers {
            // Looked for again: the exchange before may have made something later.
            let Some(way) = self.way_without(reader as usize, term) else {
                return false;
            };
            self.exchange(reader as usize, way);
        }
        true
    }

    /// The cheapest way of a term that does not read `without`, among what is
    /// there, in time and at no higher cost than now.
    fn way_without(&mut self, reader: usize, without: R::Term) -> Option<Way<R::Term>> {
        self.list_ways(reader);
        let now = self.chosen[reader].way?.gates;
        let there = self.ways.iter().filter(|way| {
            let mut parts = way.parts();
            way.gates <= now && parts.all(|(part, _)| part != without)
        });
        there.min_by_key(|way| way.gates).copied()
    }

    /// Lists the ways of a term among what is there, in time.
    fn list_ways(&mut self, i: usize) {
        let by = self.required[i];
        let mut ways = std::mem::take(&mut self.ways);
        ways.clear();
        self.recipe.ways(self.chosen[i].term, by, &mut ways);
        ways.retain(|way| {
            way.parts().all(|(part, delay)| {
                self.place.get(&part).is_some_and(|&at| {
                    let at = at as usize;
                    self.alive[at] && self.arrival[at] + delay <= by
                })
            })
        });
        self.ways = ways;
    }

    /// Exchanges a term's way for one that frees more gates than it costs.
    fn cheapen(&mut self, i: usize) -> bool {
        let Some(now) = self.chosen[i].way else {
            return false;
        };
        let nothing_kept = self.freed(&now, &[]);
        if nothing_kept == Some(0) {
            return false;
        }
        self.list_ways(i);
        for at in 0..self.ways.len() {
            let way = self.ways[at];
            let kept: Vec<R::Term> = way.parts().map(|(part, _)| part).collect();
            let Some(freed) = self.freed(&now, &kept) else {
                continue;
            };
            if freed + i64::from(now.gates) > i64::from(way.gates) {
                self.exchange(i, way);
                return true;
            }
        }
        false
    }

    /// Gates that go with a way's parts when its term no longer reads them, beside
    /// those `kept`; `None` when something kept hangs on what goes.
    fn freed(&self, now: &Way<R::Term>, kept: &[R::Term]) -> Option<i64> {
        let mut lost: FxHashMap<usize, usize> = FxHashMap::default();
        let mut freed = 0;
        let parts = now.parts().map(|(part, _)| part);
        let mut stack: Vec<R::Term> = parts.filter(|part| !kept.contains(part)).collect();
        while let Some(term) = stack.pop() {
            let at = self.at(term);
            let count = lost.entry(at).or_insert(0);
            *count += 1;
            if *count < self.readers[at].len() || self.demanded[at].is_some() {
                continue;
            }
            if kept.contains(&term) {
                return None;
            }
            if let Some(way) = self.chosen[at].way {
                freed += i64::from(way.gates);
                stack.extend(way.parts().map(|(part, _)| part));
            }
        }
        Some(freed)
    }

    /// Exchanges a way, takes out what nobody reads any more, and brings the
    /// times up to date.
    fn exchange(&mut self, i: usize, way: Way<R::Term>) {
        let old = self.chosen[i].way.replace(way);
        let mut touched: Vec<usize> = Vec::new();
        for (part, _) in way.parts() {
            let at = self.at(part);
            self.readers[at].push(i as u32);
            touched.push(at);
        }
        let mut stack: Vec<(usize, usize)> = Vec::new();
        for (part, _) in old.iter().flat_map(Way::parts) {
            stack.push((i, self.at(part)));
        }
        while let Some((reader, at)) = stack.pop() {
            let list = &mut self.readers[at];
            if let Some(found) = list.iter().position(|&each| each as usize == reader) {
                list.swap_remove(found);
            }
            touched.push(at);
            if list.is_empty() && self.demanded[at].is_none() && self.alive[at] {
                self.alive[at] = false;
                if let Some(way) = self.chosen[at].way {
                    let parts = way.parts().map(|(part, _)| (at, self.at(part)));
                    stack.extend(parts);
                }
            }
        }
        self.update_arrivals(i);
        self.update_required(touched);
    }

    fn update_arrivals(&mut self, from: usize) {
        let mut stack = vec![from];
        while let Some(i) = stack.pop() {
            let arrival = self.ready(i);
            if arrival != self.arrival[i] {
                self.arrival[i] = arrival;
                stack.extend(self.readers[i].iter().map(|&reader| reader as usize));
            }
        }
    }

    fn update_required(&mut self, mut stack: Vec<usize>) {
        while let Some(i) = stack.pop() {
            let by = self.needed_by(i);
            if by != self.required[i] {
                self.required[i] = by;
                if let Some(way) = self.chosen[i].way {
                    stack.extend(way.parts().map(|(part, _)| self.at(part)));
                }
            }
        }
    }
}
