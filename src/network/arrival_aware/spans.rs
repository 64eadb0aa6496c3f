//! Spans as a recipe: the ways to make G and P of each from smaller spans in time.

use super::times::{Made, Times};
use crate::network::carry_network::CarryNetwork;
use crate::network::demand::{Asked, Recipe, Way, few, in_time};
use crate::network::fulfil::{Emit, LeafSignal};
use crate::network::signals::SignalId;
use crate::network::sum_end::Carries;

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
                let propagate = Term {
                    made: Made::PROPAGATE,
                    ..term
                };
                for &terms in self.times.or_arities() {
                    let above = Term {
                        made: Made::Terms(terms as u8 - 1),
                        ..term
                    };
                    let or = steps.or[terms];
                    if self.earliest(above).max(self.earliest(propagate)) + or <= by {
                        let parts = [Some((above, or)), Some((propagate, or)), None];
                        found.push(Way { parts, gates: 1 });
                    }
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
        let made = Made::Parts(parts as u8 - 1);
        let above = |split: usize| Term {
            made,
            low: split as u32,
            ..term
        };
        let below = |split: usize| Term {
            made: Made::PROPAGATE,
            high: split as u32 - 1,
            ..term
        };
        let (from, to) = in_time(
            term.low as usize,
            term.high as usize,
            |split| self.earliest(above(split)) + delay <= by,
            |split| self.earliest(below(split)) + delay <= by,
        );
        found.extend(few(from, to).map(|split| Way {
            parts: [
                Some((above(split), delay)),
                Some((below(split), delay)),
                None,
            ],
            gates: 1,
        }));
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
            let both = self.times.steps().and[inputs] + or;
            let upper = |made: Made, split: usize| Term {
                made,
                low: split as u32,
                ..term
            };
            let below = |split: usize| Term {
                made: carry,
                high: split as u32 - 1,
                ..term
            };
            let (from, to) = in_time(
                term.low as usize,
                term.high as usize,
                |split| {
                    let above = self.earliest(upper(first, split)) + or;
                    above.max(self.earliest(upper(through, split)) + both) <= by
                },
                |split| self.earliest(below(split)) + both <= by,
            );
            found.extend(few(from, to).map(|split| Way {
                parts: [
                    Some((upper(first, split), or)),
                    Some((upper(through, split), both)),
                    Some((below(split), both)),
                ],
                gates: 2,
            }));
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
    fn leaf(&self, term: Term) -> LeafSignal {
        let item = term.high as usize;
        match term.made {
            Made::Parts(_) => LeafSignal::Propagate(item),
            Made::Terms(_) => LeafSignal::Generate(item),
            Made::IfOne => LeafSignal::Either(item),
        }
    }

    fn emit(
        &self,
        term: Term,
        parts: &[(Term, &[SignalId])],
        network: &mut CarryNetwork,
    ) -> Vec<SignalId> {
        let signals = match *parts {
            [(_, single)] => return single.to_vec(),
            // Parts of a P, or the two terms of a `G + P`.
            [(_, above), (_, below)] => [above, below].concat(),
            [(_, above), (_, over), (_, below)] => {
                let mut signals = above.to_vec();
                signals.push(network.and(&[over, below].concat()));
                signals
            }
            _ => unreachable!("a way has one part to three"),
        };
        match term.made {
            Made::PROPAGATE => vec![network.and(&signals)],
            Made::GENERATE | Made::IfOne => vec![network.or(&signals)],
            Made::Parts(_) | Made::Terms(_) => signals,
        }
    }
}
