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
use super::nearest::{NAMED, nearest};
use super::{mixed, rows};
use std::collections::BTreeMap;

/// Share of positions that have to agree.
const AGREE: f64 = 0.9;
/// Positions a step of a ripple may span: a six-input cover takes two.
const STEP: i32 = 2;
/// Group sizes of lookahead that are told from distances.
const GROUPS: std::ops::RangeInclusive<i32> = 3..=16;

/// What is known about how one carry above the start is made.
struct Evidence {
    at: i32,
    parts: Parts,
}

/// See the head of the module.
pub(super) fn classify(made: &MadeFrom) -> (BuiltAs, Construction) {
    let evidence = evidence(made);
    let foreign = evidence.iter().filter(|e| e.parts.foreign).count();
    if evidence.is_empty() || !mostly(evidence.len() - foreign, evidence.len()) {
        return mixed("its carries read nets that are no part of it");
    }
    let found = stepwise(made, &evidence)
        .or_else(|| skip(made, &evidence))
        .or_else(|| chosen(made, &evidence))
        .or_else(|| passed_on(made, &evidence))
        .or_else(|| written_out(made, &evidence))
        .or_else(|| network(made));
    let Some((form, mut construction)) = found else {
        return mixed("its nets are spans that no published way to build it explains");
    };
    construction.levels = Some(made.levels);
    construction.cells = Some(made.cells);
    (form, construction)
}

fn mostly(some: usize, all: usize) -> bool {
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

fn named(nearest: &'static str, detail: String) -> Construction {
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
/// propagates.
fn skip(made: &MadeFrom, evidence: &[Evidence]) -> Option<(BuiltAs, Construction)> {
    let mut blocks = Vec::new();
    let mut steps = 0;
    let rippled = |&(high, low): &Ends| {
        high - low < 2
            || made.generates[&(high, low)]
                .generates
                .contains(&(high - 1, low))
    };
    for Evidence { at, parts } in evidence {
        if !parts.forced.is_empty() || !parts.sums_for.is_empty() {
            return None;
        }
        let below: Vec<i32> = parts.carries.iter().copied().filter(|c| c < at).collect();
        let (first, last) = (below.first().copied(), below.last().copied());
        let near = parts.same || last.is_some_and(|last| at - last <= STEP);
        let far = first.filter(|&first| at - first > 1);
        let own_block = parts.generates.iter().all(|&(high, _)| high == *at);
        match (near, far) {
            // What ripples through the block, or what passes it.
            (true, Some(far)) if !parts.propagates.is_empty() || parts.leaves.len() > 1 => {
                blocks.push(at - far);
            }
            (false, Some(far))
                if !parts.generates.is_empty()
                    && own_block
                    && parts.generates.iter().all(rippled) =>
            {
                blocks.push(at - far);
            }
            (_, None) if parts.generates.is_empty() => steps += 1,
            (true, Some(_)) if parts.generates.is_empty() => steps += 1,
            // The first block is entered at the start.
            _ if below.is_empty() => steps += 1,
            _ => return None,
        }
    }
    let passed: i32 = blocks.iter().sum();
    let long = blocks.iter().any(|&block| block > 2);
    let is_skip = long && steps >= blocks.len() && 3 * passed >= made.positions;
    let group = common(&blocks)?;
    is_skip.then(|| {
        let detail = format!(
            "the carry ripples through blocks and may pass {} of them, most of {group} positions",
            blocks.len()
        );
        let construction = Construction {
            group: Some(group as usize),
            nearest: None,
            detail,
            ..Construction::default()
        };
        (BuiltAs::Skip, construction)
    })
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
        let reads = |ends: &Ends| parts.forced.contains(ends) || parts.generates.contains(ends);
        if reads(&(high - 1, low)) {
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
    if 2 * passed < evidence.len() {
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

/// Carries written out over operands: over all of them, or group by group.
fn written_out(made: &MadeFrom, evidence: &[Evidence]) -> Option<(BuiltAs, Construction)> {
    let start = made.lowest.max(0);
    let flat: Vec<(i32, Parts)> = evidence
        .iter()
        .map(|e| (e.at, written(made, e.at, &e.parts)))
        .collect();
    let at_once = flat.iter().filter(|(at, parts)| {
        let below = parts.carries.iter().all(|&c| c <= start || c >= *at);
        below && parts.generates.is_empty() && parts.forced.is_empty()
    });
    if made.positions > 2 && mostly(at_once.count(), flat.len()) {
        let detail = "every carry is written out over all positions below it";
        let construction = named("flat-lookahead", detail.to_owned());
        return Some((BuiltAs::Lookahead, construction));
    }
    let agrees = |group: i32| {
        let agrees = |(at, parts): &&(i32, Parts)| {
            let inside = at % group;
            let entry = at - inside - 1;
            let mut below = parts.carries.iter().copied().filter(|c| c < at);
            if !parts.forced.is_empty() {
                return false;
            }
            let aligned = |&(high, low): &Ends| low % group == 0 && (high + 1) % group == 0;
            if inside + 1 < group {
                let first = entry <= start;
                let enters = |c: i32| c == entry || (first && c <= start);
                parts.generates.is_empty() && below.all(enters)
            } else {
                parts.generates.iter().all(aligned)
                    && below.all(|c| c <= start || (c + 1) % group == 0)
            }
        };
        let count = flat.iter().filter(agrees).count();
        mostly(count, flat.len())
    };
    let group = GROUPS
        .filter(|&group| group < made.positions)
        .find(|&g| agrees(g))?;
    let construction = Construction {
        group: Some(group as usize),
        ..named(
            "group-lookahead",
            format!("carries are written out over groups of {group} positions"),
        )
    };
    Some((BuiltAs::Lookahead, construction))
}

/// What a net is made from when spans that end at its own top are taken apart:
/// the products of a written-out carry, added up one by one, are such spans.
fn written(made: &MadeFrom, top: i32, parts: &Parts) -> Parts {
    let mut flat = parts.clone();
    let mut open: Vec<Ends> = Vec::new();
    flat.generates.retain(|&ends| {
        if ends.0 == top {
            open.push(ends);
        }
        ends.0 != top
    });
    let mut seen = Vec::new();
    while let Some(ends) = open.pop() {
        if seen.contains(&ends) {
            continue;
        }
        seen.push(ends);
        let Some(own) = made.generates.get(&ends) else {
            continue;
        };
        flat.leaves.extend(&own.leaves);
        flat.carries.extend(&own.carries);
        flat.forced.extend(&own.forced);
        for &part in &own.generates {
            if part.0 == top {
                open.push(part);
            } else {
                flat.generates.push(part);
            }
        }
    }
    flat
}

/// A network of spans that meet: by likeness to a scheme, or at least by levels.
fn network(made: &MadeFrom) -> Option<(BuiltAs, Construction)> {
    let taxonomy = rows::place(made);
    let place = |construction: Construction| {
        let place = taxonomy.map(|place| {
            format!(
                "; levels beyond the fewest {}, fan-out 2^{}, tracks 2^{}",
                place.extra_levels, place.fan_out, place.tracks
            )
        });
        Construction {
            detail: construction.detail + &place.unwrap_or_default(),
            taxonomy,
            ..construction
        }
    };
    let best = nearest(made);
    if let Some(best) = best.filter(|best| best.index >= NAMED) {
        let exactly = if best.index == 1.0 {
            "are"
        } else {
            "are nearly"
        };
        let detail = format!("its spans {exactly} those of {}", best.scheme);
        let construction = Construction {
            group: best.group,
            ..named(best.scheme, detail)
        };
        return match best.scheme {
            "ripple" | "flat-lookahead" => None,
            "group-lookahead" => Some((BuiltAs::Lookahead, construction)),
            "carry-increment" => Some((BuiltAs::Increment, construction)),
            "carry-select" => Some((BuiltAs::Select, construction)),
            "conditional-sum" => Some((BuiltAs::ConditionalSum, construction)),
            _ => Some((BuiltAs::Prefix, place(construction))),
        };
    }
    let spans = made.generates.iter().map(|(&ends, parts)| (ends, parts));
    let carries = made
        .carry_nets()
        .map(|(at, parts)| ((at, made.lowest), parts));
    let (mut all, mut meet) = (0, 0);
    for (ends, parts) in spans.chain(carries) {
        all += 1;
        meet += usize::from(pieces(made, ends, parts).is_some());
    }
    let width = made.positions.max(2) as usize;
    let few = made.levels <= 2 * width.next_power_of_two().trailing_zeros() as usize;
    if all == 0 || !mostly(meet, all) || !few {
        return None;
    }
    let no_sums = made.sums.iter().all(Vec::is_empty);
    let only_top = made.carry_nets().all(|(at, _)| at == made.positions - 1);
    if no_sums && only_top {
        let detail = "the last carry is made from spans joined in a tree".to_owned();
        let construction = Construction {
            detail,
            ..Construction::default()
        };
        return Some((BuiltAs::Tree, construction));
    }
    let likest = best.map(|best| {
        let percent = (100.0 * best.index).floor();
        format!(", most like {} ({percent} % of the spans)", best.scheme)
    });
    let detail = format!(
        "every carry is made from spans that meet{}",
        likest.unwrap_or_default()
    );
    let construction = Construction {
        detail,
        ..Construction::default()
    };
    Some((BuiltAs::Prefix, place(construction)))
}

/// The spans a net is joined from, highest first; `None` when they do not meet.
pub(super) fn pieces(made: &MadeFrom, (high, low): Ends, parts: &Parts) -> Option<Vec<Ends>> {
    let mut pieces = Vec::new();
    let mut top = high;
    while top >= low {
        let carry = parts.carries.contains(&top) && top < high && low == made.lowest;
        let span = parts.generates.iter().filter(|ends| ends.0 == top);
        let widest = span.map(|ends| ends.1).filter(|&l| l >= low).min();
        let own = match widest {
            _ if carry => low,
            Some(low) => low,
            None if parts.leaves.contains(&top) => top,
            None => return None,
        };
        pieces.push((top, own));
        top = own - 1;
    }
    (pieces.len() > 1).then_some(pieces)
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
