//! Chains whose carries are joined from spans that meet: prefix networks, and
//! trees that make the last carry only.
//!
//! A scheme is named when its spans are those of the chain, or nearly; a network
//! like no scheme is still a prefix network when its spans meet and its levels are
//! few (at most twice the logarithm, which is what Brent and Kung, 1982, need).

use super::super::model::{BuiltAs, Construction};
use super::classify::{mostly, named};
use super::made_from::{Ends, MadeFrom, Parts};
use super::nearest::{Likeness, NAMED};
use super::rows;
use std::fmt::Write;

/// The spans that are joined of others, with what they are joined from.
fn joined(made: &MadeFrom) -> impl Iterator<Item = (Ends, &Parts)> {
    let spans = made.generates.iter().map(|(&ends, parts)| (ends, parts));
    let carries = made.carry_nets();
    spans.chain(carries.map(|(at, parts)| ((at, made.lowest), parts)))
}

/// The most spans any net is joined from; 2 at the least.
pub(super) fn valency(made: &MadeFrom) -> usize {
    let joined = joined(made).filter_map(|(ends, parts)| pieces(made, ends, parts));
    joined.map(|pieces| pieces.len()).max().unwrap_or(2).max(2)
}

/// A prefix network whose spans are exactly those of a scheme.
pub(super) fn same_spans(
    made: &MadeFrom,
    likest: Option<Likeness>,
) -> Option<(BuiltAs, Construction)> {
    let same = likest.filter(|likest| likest.index == 1.0);
    let found = like(made, same)?;
    (found.0 == BuiltAs::Prefix).then_some(found)
}

/// A network whose spans are mostly those of a scheme.
pub(super) fn like(made: &MadeFrom, likest: Option<Likeness>) -> Option<(BuiltAs, Construction)> {
    let best = likest.filter(|likest| likest.index >= NAMED)?;
    let same = if best.index == 1.0 {
        "are"
    } else {
        "are nearly"
    };
    let detail = format!("its spans {same} those of {}", best.scheme);
    let construction = Construction {
        group: best.group,
        ..named(best.scheme, detail)
    };
    match best.scheme {
        "ripple" | "flat-lookahead" => None,
        "group-lookahead" => Some((BuiltAs::Lookahead, construction)),
        "carry-increment" => Some((BuiltAs::Increment, construction)),
        "carry-select" => Some((BuiltAs::Select, construction)),
        "conditional-sum" => Some((BuiltAs::ConditionalSum, construction)),
        _ => Some((BuiltAs::Prefix, placed(made, construction))),
    }
}

/// With the place in the taxonomy, where it has one.
fn placed(made: &MadeFrom, mut construction: Construction) -> Construction {
    construction.taxonomy = rows::place(made);
    if let Some(place) = construction.taxonomy {
        let _ = write!(
            construction.detail,
            ", with l = {}, f = {}, t = {} in Harris' taxonomy",
            place.extra_levels, place.fan_out, place.tracks
        );
    }
    construction
}

/// A network of spans that meet, in few levels.
pub(super) fn network(
    made: &MadeFrom,
    likest: Option<Likeness>,
) -> Option<(BuiltAs, Construction)> {
    let (mut all, mut meet) = (0, 0);
    for (ends, parts) in joined(made) {
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
    let likest = likest.map(|best| {
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
    Some((BuiltAs::Prefix, placed(made, construction)))
}

/// The spans a net is joined from, highest first; `None` when they do not meet.
/// They may overlap, as in the networks of S. Knowles (1999): a position that takes
/// part twice changes nothing.
pub(super) fn pieces(made: &MadeFrom, (high, low): Ends, parts: &Parts) -> Option<Vec<Ends>> {
    let mut pieces = Vec::new();
    let mut top = high;
    while top >= low {
        let carry = parts
            .carries
            .iter()
            .copied()
            .find(|&c| c >= top && c < high);
        let carry = carry.filter(|_| low == made.lowest).map(|c| (c, low));
        let spans = parts.generates.iter().copied();
        let widest = spans.filter(|&(h, l)| h >= top && l <= top && l >= low);
        let widest = widest.min_by_key(|&(h, l)| (l, h));
        let leaf = parts.leaves.contains(&top).then_some((top, top));
        let own = carry.or(widest).or(leaf)?;
        pieces.push(own);
        top = own.1 - 1;
    }
    (pieces.len() > 1).then_some(pieces)
}
