//! Which way of building an adder the nets of a chain were made in.
//!
//! Ripple and group lookahead have carries over the same spans, so the first
//! thing asked is what each carry is made from: the distance to the nearest lower
//! carry is always 1 in a ripple; 1, 2, 3, 4 in turn in lookahead by fours; 1 in
//! the first block and then up to a block in select (O. J. Bedrij 1962); 1, 2, 4,
//! 8 in conditional sum (J. Sklansky 1960); 1 with bypasses in skip (M. Lehman and
//! N. Burla 1961). Where a carry is on no net, the sum above it is asked instead.
//! Nearly all positions have to agree (`AGREE`), since a tool may have merged a
//! few gates; what agrees with nothing is `mixed`.

use super::super::model::{BuiltAs, Construction};
use super::made_from::{Ends, MadeFrom, Parts};
use super::mixed;
use super::nearest::nearest;
use super::network::{like, network, same_spans, valency};
use super::written::written_out;
use std::collections::{BTreeMap, BTreeSet};

/// Share of positions that have to agree.
const AGREE: f64 = 0.9;
/// Positions a step of a ripple may span: a six-input cover takes two.
const STEP: i32 = 2;

/// What is known about how one carry above the start is made.
pub(super) struct Evidence {
    pub(super) at: i32,
    pub(super) parts: Parts,
}

/// See the head of the module.
pub(super) fn classify(made: &MadeFrom) -> (BuiltAs, Construction) {
    let evidence = evidence(made);
    let foreign = evidence.iter().filter(|e| e.parts.foreign).count();
    if evidence.is_empty() || !mostly(evidence.len() - foreign, evidence.len()) {
        return mixed("its carries read nets that are no part of it");
    }
    let found = stepwise(made, &evidence).or_else(|| {
        let valency = valency(made);
        let likest = nearest(made, valency);
        // Joined of more, groups of lookahead have the spans of prefix networks.
        let twos = likest.filter(|_| valency == 2);
        chosen(made, &evidence)
            .or_else(|| same_spans(made, twos))
            .or_else(|| skip(made, &evidence))
            .or_else(|| passed_on(made, &evidence))
            .or_else(|| written_out(made, &evidence))
            .or_else(|| like(made, likest))
            .or_else(|| network(made, likest))
    });
    let Some((form, mut construction)) = found else {
        return mixed("its nets are spans that no published way to build it explains");
    };
    construction.levels = Some(made.levels);
    construction.cells = Some(made.cells);
    (form, construction)
}

pub(super) fn mostly(some: usize, all: usize) -> bool {
    some as f64 >= AGREE * all as f64
}

/// By carry above the start, every net of it, or the sum above where none is.
fn evidence(made: &MadeFrom) -> Vec<Evidence> {
    let mut evidence: Vec<Evidence> = made
        .carry_nets()
        .map(|(at, parts)| Evidence {
            at,
            parts: parts.clone(),
        })
        .collect();
    for (above, parts) in made.sum_nets() {
        let at = above - 1;
        if at > made.lowest && at >= 0 && made.carries[at as usize].is_empty() {
            let mut parts = parts.clone();
            parts.leaves.retain(|&leaf| leaf != above);
            evidence.push(Evidence { at, parts });
        }
    }
    evidence
}

pub(super) fn named(nearest: &'static str, detail: String) -> Construction {
    Construction {
        nearest: Some(nearest),
        detail,
        ..Construction::default()
    }
}

/// Every carry from the nearest lower one that is on a net.
fn stepwise(made: &MadeFrom, evidence: &[Evidence]) -> Option<(BuiltAs, Construction)> {
    let mut double = false;
    let steps = evidence.iter().filter(|Evidence { at, parts }| {
        if !parts.generates.is_empty() || !parts.forced.is_empty() || !parts.sums_for.is_empty() {
            return false;
        }
        let below = parts.carries.iter().copied().filter(|c| c < at);
        let nearest = below.clone().max().unwrap_or(made.lowest);
        let only = below.count() <= 1;
        double |= at - nearest > 1;
        only && at - nearest <= STEP && (at - nearest == 1 || parts.propagates.is_empty())
    });
    if steps.count() < evidence.len() {
        return None;
    }
    let detail = if double {
        "every carry is made from the carry one or two positions below"
    } else {
        "every carry is made from the carry just below it"
    };
    Some((BuiltAs::Ripple, named("ripple", detail.to_owned())))
}

/// Stepwise, with some carries passed over whole blocks where the block
/// propagates; what comes out of the block otherwise may have rippled through it
/// with the carry or without.
fn skip(made: &MadeFrom, evidence: &[Evidence]) -> Option<(BuiltAs, Construction)> {
    let (mut passed, mut without_carry) = (Vec::new(), Vec::new());
    let mut steps = BTreeSet::new();
    let rippled = |&(high, low): &Ends| {
        let own = &made.generates[&(high, low)].generates;
        high - low < 2 || own.contains(&(high - 1, low))
    };
    for Evidence { at, parts } in evidence {
        if !parts.forced.is_empty() || !parts.sums_for.is_empty() {
            return None;
        }
        let below: Vec<i32> = parts.carries.iter().copied().filter(|c| c < at).collect();
        let joins_two = below.len() > usize::from(!parts.same);
        match below.first() {
            Some(&far) if joins_two && parts.generates.is_empty() => passed.push(at - far),
            Some(&far) if !parts.generates.is_empty() => {
                let own = |ends: &Ends| ends.0 == *at && rippled(ends);
                if joins_two || !parts.generates.iter().all(own) {
                    return None;
                }
                without_carry.push((far, *at));
            }
            Some(&near) if at - near > STEP => return None,
            _ => {
                steps.insert(*at);
            }
        }
    }
    for &(far, at) in &without_carry {
        if (far + 1..at).any(|inside| !steps.contains(&inside)) {
            return None;
        }
        passed.push(at - far);
    }
    let covered: i32 = passed.iter().sum();
    let long = passed.iter().any(|&block| block > 2);
    if !long || 3 * covered < made.positions {
        return None;
    }
    let group = common(&passed)?;
    let detail = format!(
        "the carry ripples through blocks and may pass {} of them, most of {group} positions",
        passed.len()
    );
    let construction = Construction {
        group: Some(group as usize),
        detail,
        ..Construction::default()
    };
    Some((BuiltAs::Skip, construction))
}

/// Both results of a block computed, one of them chosen.
fn chosen(made: &MadeFrom, evidence: &[Evidence]) -> Option<(BuiltAs, Construction)> {
    if made.forced.is_empty() {
        return None;
    }
    // By position, how far below it the carry enters that chooses its sum.
    let mut distances: BTreeMap<i32, i32> = BTreeMap::new();
    let mut choices = 0;
    for (at, parts) in made.sum_nets() {
        let below = parts.carries.iter().copied().filter(|&c| c < at).max();
        let distance = at - below.unwrap_or(made.lowest.max(0));
        let known = distances.entry(at).or_insert(distance);
        *known = (*known).min(distance);
        let picks = !parts.sums_for.is_empty() || !parts.forced.is_empty();
        choices += usize::from(picks);
    }
    let by_carry = evidence.iter().filter(|e| !e.parts.forced.is_empty());
    if choices + by_carry.count() == 0 {
        return None;
    }
    // Inside the blocks: from the carry just below, or from two halves.
    let (mut stepped, mut joined) = (0, 0);
    for (&(high, low), parts) in made.forced.iter().chain(&made.generates) {
        if high - low < 2 {
            continue;
        }
        let reads = |ends: Ends| parts.forced.contains(&ends) || parts.generates.contains(&ends);
        if (1..=STEP).any(|step| reads((high - step, low))) {
            stepped += 1;
        } else {
            joined += 1;
        }
    }
    let entries: Vec<i32> = distances
        .iter()
        .filter(|&(at, _)| distances.get(&(at + 1)).is_none_or(|&next| next == 1))
        .map(|(_, &distance)| distance)
        .collect();
    let halves = distances
        .values()
        .max()
        .is_some_and(|&most| 2 * most >= made.positions - 1 && made.positions > 4 && joined > 0);
    if joined > stepped || halves {
        let detail = "both results of every block are chosen among those of its halves";
        let construction = named("conditional-sum", detail.to_owned());
        return Some((BuiltAs::ConditionalSum, construction));
    }
    let blocks: Vec<i32> = entries
        .into_iter()
        .filter(|&distance| distance > 1)
        .collect();
    let group = common(&blocks)?;
    let even = blocks.iter().filter(|&&block| block == group).count();
    let sizes = if mostly(even + 1, blocks.len()) {
        format!("of {group} positions")
    } else {
        "of changing size".to_owned()
    };
    let construction = Construction {
        group: Some(group as usize),
        ..named(
            "carry-select",
            format!("blocks {sizes} are computed for both carries, and the real one chooses"),
        )
    };
    Some((BuiltAs::Select, construction))
}

/// Blocks computed without a carry, into which the carry is passed on by the
/// propagates from their low end.
fn passed_on(made: &MadeFrom, evidence: &[Evidence]) -> Option<(BuiltAs, Construction)> {
    let (mut long, mut stepped) = (0, 0);
    for (&(high, low), parts) in made.generates.iter().filter(|((h, l), _)| h - l >= 2) {
        long += 1;
        stepped += usize::from(parts.generates.contains(&(high - 1, low)));
    }
    if long == 0 || !mostly(stepped, long) {
        return None;
    }
    let mut tops: BTreeMap<i32, i32> = BTreeMap::new();
    let mut passed = 0;
    for Evidence { at, parts } in evidence {
        let Some(&below) = parts.carries.iter().rfind(|c| *c < at) else {
            continue;
        };
        let low = below + 1;
        let own = parts.generates.contains(&(*at, low)) || parts.sums_for.contains(&(at + 1, low));
        if own && parts.generates.len() <= 1 {
            passed += 1;
            let top = tops.entry(low).or_insert(*at);
            *top = (*top).max(*at);
        }
    }
    // The first block is entered by the real carry.
    let first = tops.keys().next().map_or(0, |&low| low);
    let above = evidence.iter().filter(|e| e.at >= first).count();
    if 2 * passed < above {
        return None;
    }
    let blocks: Vec<i32> = tops.iter().map(|(low, top)| top - low + 1).collect();
    let group = common(&blocks)?;
    let construction = Construction {
        group: Some(group as usize),
        ..named(
            "carry-increment",
            format!(
                "blocks, most of {group} positions, are computed without a carry, which is \
                 passed on into them"
            ),
        )
    };
    Some((BuiltAs::Increment, construction))
}

/// The most frequent value; the smallest of equals.
fn common(values: &[i32]) -> Option<i32> {
    let mut counts: BTreeMap<i32, usize> = BTreeMap::new();
    for &value in values {
        *counts.entry(value).or_default() += 1;
    }
    let most = counts
        .into_iter()
        .max_by_key(|&(value, count)| (count, -value));
    most.map(|(value, _)| value)
}
