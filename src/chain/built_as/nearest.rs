//! The published scheme whose spans are most like those of a chain.
//!
//! Two networks are compared by the spans of two or more positions that they
//! make, as a Jaccard index: spans of both over spans of either (P. Jaccard,
//! "The distribution of the flora in the alpine zone", New Phytologist 11, 1912).
//! The carry-in may be an item of the network, folded into position 0 before it,
//! or put in behind it; the top carry may be missing. All of these are tried.

use super::made_from::{Ends, MadeFrom};
use crate::network::schemes::{Growth, Scheme, Settings, all};
use crate::network::{CarryNetwork, Node};
use std::collections::BTreeSet;

/// From this likeness on a scheme is named.
pub(super) const NAMED: f64 = 0.9;

/// Above so many positions only schemes of linear size are compared.
const MOST_POSITIONS: i32 = 1024;
/// The highest valency tried.
const MOST_VALENCY: usize = 4;
/// Above so many, none of cubic size.
const MOST_CUBIC: i32 = 48;

/// The scheme most like a chain.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Likeness {
    pub(super) scheme: &'static str,
    pub(super) group: Option<usize>,
    pub(super) index: f64,
}

/// Compares with every scheme in every variation up to a valency; the first of
/// equals counts.
pub(super) fn nearest(made: &MadeFrom, valency: usize) -> Option<Likeness> {
    let own = Spans::of(made);
    let mut best: Option<Likeness> = None;
    for scheme in all() {
        let fits = match scheme.growth {
            Growth::Linear => true,
            Growth::LogLinear => made.positions <= MOST_POSITIONS,
            Growth::Cubic => made.positions <= MOST_CUBIC,
            // Fitted to arrivals, and mostly no spans: nothing to compare with.
            Growth::Quadratic | Growth::Quartic => false,
        };
        if !fits {
            continue;
        }
        for settings in variations(scheme, made.positions, valency) {
            let index = own.likeness(scheme, settings);
            if best.is_none_or(|best| index > best.index) {
                best = Some(Likeness {
                    scheme: scheme.name,
                    group: scheme.takes.group.then_some(settings.group),
                    index,
                });
            }
        }
    }
    best
}

fn variations(scheme: &Scheme, positions: i32, valency: usize) -> Vec<Settings> {
    let most = if positions <= MOST_POSITIONS {
        MOST_VALENCY
    } else {
        2
    };
    let most = valency.clamp(2, most);
    let levels = (i32::BITS - positions.leading_zeros()) as usize;
    let range = |takes: bool, usual: usize, all: std::ops::RangeInclusive<usize>| {
        if takes { all } else { usual..=usual }
    };
    let usual = Settings::default();
    let mut list = Vec::new();
    for valency in range(scheme.takes.valency, usual.valency, 2..=most) {
        for extra_levels in range(scheme.takes.extra_levels, usual.extra_levels, 1..=levels) {
            for group in range(scheme.takes.group, usual.group, 2..=8) {
                list.push(Settings {
                    valency,
                    group,
                    extra_levels,
                    ..usual
                });
            }
        }
    }
    list
}

/// The spans of a chain, lowest position first counted from 0, for one way in
/// which the carry-in may be put in.
struct Spans {
    positions: usize,
    carry_in: bool,
    has_top: bool,
    ways: Vec<Way>,
}

struct Way {
    spans: BTreeSet<Ends>,
    /// Whether the scheme is asked for with a carry-in.
    as_item: bool,
    /// How far the scheme's positions lie below the chain's.
    lowest: i32,
}

impl Spans {
    fn of(made: &MadeFrom) -> Self {
        let top = made.positions - 1;
        let has_top = !made.carries[top as usize].is_empty();
        let mut spans: BTreeSet<Ends> = made.generates.keys().copied().collect();
        let carries = made.lowest.max(0)..top + i32::from(has_top);
        spans.extend(carries.map(|at| (at, made.lowest)));
        spans.retain(|&(high, low)| high > low);
        let carry_in = made.lowest < 0;
        let mut ways = vec![Way {
            spans: spans.clone(),
            as_item: false,
            lowest: made.lowest,
        }];
        // Folded into position 0, the carry out of that is a leaf.
        ways[0].spans.retain(|&(high, low)| high > 0 || low >= 0);
        if carry_in {
            ways.push(Way {
                spans: spans.clone(),
                as_item: true,
                lowest: -1,
            });
            let without: BTreeSet<Ends> =
                spans.iter().copied().filter(|&(_, low)| low >= 0).collect();
            ways.push(Way {
                spans: without,
                as_item: false,
                lowest: 0,
            });
        } else {
            // A constant carry-in may have been an item that was simplified.
            ways.push(Way {
                spans,
                as_item: true,
                lowest: 0,
            });
        }
        Self {
            positions: made.positions as usize,
            carry_in,
            has_top,
            ways,
        }
    }

    fn likeness(&self, scheme: &Scheme, settings: Settings) -> f64 {
        let mut best = 0.0f64;
        for as_item in [false, true] {
            if self.ways.iter().all(|way| way.as_item != as_item) {
                continue;
            }
            let network = scheme.network(self.positions, as_item, settings);
            let whole = made_by(&network, self.positions);
            let mut networks = vec![whole];
            if !self.has_top && self.positions > 1 {
                networks.push(made_by(&network, self.positions - 1));
                let smaller = scheme.network(self.positions - 1, as_item, settings);
                networks.push(made_by(&smaller, self.positions - 1));
            }
            for way in self.ways.iter().filter(|way| way.as_item == as_item) {
                for network in &networks {
                    best = best.max(way.index(network, self.carry_in));
                }
            }
        }
        best
    }
}

impl Way {
    fn index(&self, network: &BTreeSet<Ends>, carry_in: bool) -> f64 {
        let moved = network.iter().filter_map(|&(high, low)| {
            let low = match low {
                -1 if !carry_in => 0,
                0 if !self.as_item && self.lowest < 0 => -1,
                low => low,
            };
            (high > low.max(if self.as_item { -1 } else { 0 })).then_some((high, low))
        });
        let moved: BTreeSet<Ends> = moved.collect();
        let both = moved.intersection(&self.spans).count();
        let either = moved.len() + self.spans.len() - both;
        if either == 0 {
            return 0.0;
        }
        both as f64 / either as f64
    }
}

/// The spans a network makes for its lowest `carries` carries.
fn made_by(network: &CarryNetwork, carries: usize) -> BTreeSet<Ends> {
    let nodes: Vec<_> = network.nodes().collect();
    let mut used = vec![false; nodes.len()];
    // A carry that is no span has none to compare.
    for carry in (0..carries).filter_map(|position| network.carry_span(position)) {
        used[carry.index()] = true;
    }
    let mut spans = BTreeSet::new();
    for &id in nodes.iter().rev() {
        if let Node::Combine(parts) = network.node(id)
            && used[id.index()]
        {
            for part in parts {
                used[part.index()] = true;
            }
            let span = network.span(id);
            spans.insert((span.high, span.low));
        }
    }
    spans
}
