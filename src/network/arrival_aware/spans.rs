//! Spans as a recipe: the ways to make G and P of each from smaller spans in time.

use super::times::{Made, Times};
use crate::network::demand::{Asked, Recipe, Way};
use crate::network::form::{Form, Signal, SignalId};
use crate::network::sum_end::Carries;
use crate::network::task::Emit;

/// Something made of a span.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(crate) struct Term {
    pub(crate) made: Made,
    pub(crate) high: u32,
    pub(crate) low: u32,
}

impl Term {
    fn is_several(self) -> bool {
        matches!(self.made, Made::Parts(2..) | Made::Terms(2..))
    }
}

/// See the head of the module.
pub(crate) struct Spans<'a> {
    pub(crate) times: &'a Times,
}

impl Recipe for Spans<'_> {
    type Term = Term;

    fn rank(&self, term: Term) -> u32 {
        let above = match term.made {
            Made::PROPAGATE | Made::GENERATE => 0,
            Made::Parts(_) | Made::Terms(_) => 1,
            Made::IfOne => 2,
        };
        3 * (term.high - term.low) + above
    }

    fn is_given(&self, term: Term) -> bool {
        term.high == term.low && !term.is_several()
    }

    fn earliest(&self, term: Term) -> i32 {
        self.times
            .earliest(term.made, term.high as usize, term.low as usize)
    }

    fn ways(&self, term: Term, by: i32, found: &mut Vec<Way<Term>>) {
        let steps = self.times.steps();
        match term.made {
            Made::PROPAGATE => {
                for &parts in self.times.and_arities() {
                    self.split_propagate(term, parts, by, steps.and[parts], found);
                }
            }
            Made::Parts(parts) => {
                self.single(term, Made::PROPAGATE, by, found);
                for parts in 2..=usize::from(parts) {
                    self.split_propagate(term, parts, by, 0, found);
                }
            }
            Made::GENERATE => {
                for &terms in self.times.or_arities() {
                    self.split_generate(term, terms, by, steps.or[terms], found);
                }
            }
            Made::Terms(terms) => {
                self.single(term, Made::GENERATE, by, found);
                for terms in 2..=usize::from(terms) {
                    self.split_generate(term, terms, by, 0, found);
                }
            }
            Made::IfOne => {
                let [generate, propagate] =
                    [Made::GENERATE, Made::PROPAGATE].map(|made| Term { made, ..term });
                let or = steps.or[2];
                if self.earliest(generate).max(self.earliest(propagate)) + or <= by {
                    let parts = [Some((generate, or)), Some((propagate, or)), None];
                    found.push(Way { parts, gates: 1 });
                }
                for &terms in self.times.or_arities() {
                    self.split_generate(term, terms, by, steps.or[terms], found);
                }
            }
        }
    }

    fn estimate(&self, term: Term, asked: &Asked) -> f32 {
        let (family, each) = match term.made {
            Made::Parts(_) => (0, 1.0),
            Made::Terms(_) => (1, 2.0),
            Made::IfOne => (2, 2.0),
        };
        each * asked.gates(family, term.high, term.low)
    }

    fn remember(&self, term: Term, asked: &mut Asked) {
        match term.made {
            Made::PROPAGATE => asked.remember(0, term.high, term.low),
            Made::GENERATE => asked.remember(1, term.high, term.low),
            Made::IfOne => asked.remember(2, term.high, term.low),
            _ => {}
        }
    }
}

impl Spans<'_> {
    fn single(&self, term: Term, made: Made, by: i32, found: &mut Vec<Way<Term>>) {
        let one = Term { made, ..term };
        if self.earliest(one) <= by {
            found.push(Way {
                parts: [Some((one, 0)), None, None],
                gates: 0,
            });
        }
    }

    fn split_propagate(
        &self,
        term: Term,
        parts: usize,
        by: i32,
        delay: i32,
        found: &mut Vec<Way<Term>>,
    ) {
        let upper = Made::Parts(parts as u8 - 1);
        for split in term.low + 1..=term.high {
            let above = Term {
                made: upper,
                low: split,
                ..term
            };
            let below = Term {
                made: Made::PROPAGATE,
                high: split - 1,
                ..term
            };
            if self.earliest(above).max(self.earliest(below)) + delay <= by {
                let parts = [Some((above, delay)), Some((below, delay)), None];
                found.push(Way { parts, gates: 1 });
            }
        }
    }

    /// G, or the carry out if a one comes in, with the lowest of its terms split
    /// off.
    fn split_generate(
        &self,
        term: Term,
        terms: usize,
        by: i32,
        or: i32,
        found: &mut Vec<Way<Term>>,
    ) {
        let first = Made::Terms(terms as u8 - 1);
        let carry = match term.made {
            Made::IfOne => Made::IfOne,
            _ => Made::GENERATE,
        };
        for &inputs in self.times.and_arities() {
            let through = Made::Parts(inputs as u8 - 1);
            let and = self.times.steps().and[inputs];
            for split in term.low + 1..=term.high {
                let above = Term {
                    made: first,
                    low: split,
                    ..term
                };
                let over = Term {
                    made: through,
                    low: split,
                    ..term
                };
                let below = Term {
                    made: carry,
                    high: split - 1,
                    ..term
                };
                let late = self.earliest(over).max(self.earliest(below)) + and;
                if late.max(self.earliest(above)) + or <= by {
                    let parts = [
                        Some((above, or)),
                        Some((over, or + and)),
                        Some((below, or + and)),
                    ];
                    found.push(Way { parts, gates: 2 });
                }
            }
        }
    }
}

impl Carries for Spans<'_> {
    fn items(&self) -> usize {
        self.times.items()
    }

    fn carry(&self, high: usize, low: usize) -> Term {
        Term {
            made: Made::GENERATE,
            high: high as u32,
            low: low as u32,
        }
    }

    fn carry_if_one(&self, high: usize, low: usize) -> Term {
        Term {
            made: Made::IfOne,
            ..self.carry(high, low)
        }
    }
}

impl Emit for Spans<'_> {
    fn leaf(&self, term: Term) -> Signal {
        let item = term.high as usize;
        match term.made {
            Made::Parts(_) => Signal::Propagate(item),
            Made::Terms(_) => Signal::Generate(item),
            Made::IfOne => Signal::Either(item),
        }
    }

    fn emit(&self, term: Term, parts: &[(Term, &[SignalId])], form: &mut Form) -> Vec<SignalId> {
        let signals = match *parts {
            [(_, single)] => return single.to_vec(),
            // Parts of a P, or the two terms of a `G + P`.
            [(_, above), (_, below)] => [above, below].concat(),
            [(_, above), (_, over), (_, below)] => {
                let mut signals = above.to_vec();
                signals.push(form.and([over, below].concat()));
                signals
            }
            _ => unreachable!("a way has one part to three"),
        };
        match term.made {
            Made::PROPAGATE => vec![form.and(signals)],
            Made::GENERATE | Made::IfOne => vec![form.or(signals)],
            Made::Parts(_) | Made::Terms(_) => signals,
        }
    }
}
