//! Carries written out over operands, at once or group by group.
//!
//! In lookahead (A. Weinberger and J. L. Smith 1958) a carry is one sum of products
//! over the members of its group and the carry into the group. As gates of two
//! inputs that sum passes through spans ending at its own position, which nobody
//! meant as such: they are taken apart before it is asked what a carry is made
//! from.

use super::super::model::{BuiltAs, Construction};
use super::classify::{Evidence, mostly, named};
use super::made_from::{Ends, MadeFrom, Parts};

/// Group sizes told apart. Of two members, a group is a step of a prefix network.
const GROUPS: std::ops::RangeInclusive<i32> = 3..=16;

/// Carries written out over operands: over all of them, or group by group.
pub(super) fn written_out(
    made: &MadeFrom,
    evidence: &[Evidence],
) -> Option<(BuiltAs, Construction)> {
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
            // The top group may have fewer members.
            let top = made.positions - 1;
            let ends = |high: i32| (high + 1) % group == 0 || high == top;
            let aligned = |&(high, low): &Ends| low % group == 0 && ends(high);
            if !ends(*at) {
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
