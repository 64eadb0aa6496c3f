//! How reports write numbers: counts, means, steps from one depth to another,
//! and long histograms folded into few bars.
//!
//! Folding loses no gate: the counts of the bars add up to those of the record,
//! and a bar that stands for several values says which.

pub use crate::audit::words::{counted, depth_in, grouped, grouped_signed, listed};

use crate::audit::record::Change;
use crate::timing::Time;

/// A mean, to two places.
pub fn mean(value: f64) -> String {
    format!("{value:.2}")
}

/// `33 → 11`, or the figure alone when nothing changes.
pub fn change(change: Change) -> String {
    let Change { before, after } = change;
    if before == after {
        before.to_string()
    } else {
        format!("{before} → {after}")
    }
}

/// A number with its sign, `0` without one.
pub fn signed(value: i64) -> String {
    if value > 0 {
        format!("+{}", grouped_signed(value))
    } else {
        grouped_signed(value)
    }
}

/// An optional number, `-` when there is none.
pub fn or_dash(value: Option<String>) -> String {
    value.unwrap_or_else(|| "-".to_owned())
}

/// `7`, or `7–9`.
pub fn range(first: i64, last: i64) -> String {
    if first == last {
        grouped_signed(first)
    } else {
        format!("{}–{}", grouped_signed(first), grouped_signed(last))
    }
}

/// `41`, or `41–120`: line numbers, which people search for, without commas.
pub fn lines(first: u64, last: u64) -> String {
    if first == last {
        first.to_string()
    } else {
        format!("{first}–{last}")
    }
}

/// `7`, or `7–9`, of times.
pub fn span(first: Time, last: Time) -> String {
    if first == last {
        first.to_string()
    } else {
        format!("{first}–{last}")
    }
}

/// As [`equal_bars`] over times. Where they are not all whole a bar holds what
/// lies from its first figure up to but not at its second.
pub fn time_bars(values: &[(Time, u64)], bars: usize) -> Vec<(String, u64)> {
    let whole: Option<Vec<(i64, u64)>> = values
        .iter()
        .map(|&(time, count)| Some((time.as_whole()?, count)))
        .collect();
    if let Some(whole) = whole {
        return equal_bars(&whole, bars);
    }
    let (Some(&(first, _)), Some(&(last, _))) = (values.first(), values.last()) else {
        return Vec::new();
    };
    let room = (last - first).in_thousandths() / bars.max(1) as i64 + 1;
    // The least of 1, 2, 5, 10, … that leaves no more bars than there is room for.
    let steps = (0..16).flat_map(|power| [1, 2, 5].map(|digit| digit * 10_i64.pow(power)));
    let width = steps.into_iter().find(|&step| step >= room);
    let width = width.unwrap_or(room);
    let mut rows: Vec<(i64, u64)> = Vec::new();
    for &(time, count) in values {
        let low = time.in_thousandths().div_euclid(width) * width;
        match rows.last_mut() {
            Some((known, total)) if *known == low => *total += count,
            _ => rows.push((low, count)),
        }
    }
    let told = |(low, count)| {
        let edges = (Time::thousandths(low), Time::thousandths(low + width));
        (span(edges.0, edges.1), count)
    };
    rows.into_iter().map(told).collect()
}

/// At most `bars` bars of equal width over the values, each `(values, count)`;
/// one bar per value where they are few. `values` ascend.
pub fn equal_bars(values: &[(i64, u64)], bars: usize) -> Vec<(String, u64)> {
    let (Some(&(first, _)), Some(&(last, _))) = (values.first(), values.last()) else {
        return Vec::new();
    };
    if values.len() <= bars {
        let one = |&(value, count)| (grouped_signed(value), count);
        return values.iter().map(one).collect();
    }
    let width = (last - first) / bars as i64 + 1;
    gathered(values, |value| {
        let low = first + (value - first) / width * width;
        (low, (low + width - 1).min(last))
    })
}

/// Bars that double in width, `1`, `2`, `3–4`, `5–8`, …; one bar per value where
/// they are few. `values` ascend and are not negative.
pub fn doubling_bars(values: &[(i64, u64)], bars: usize) -> Vec<(String, u64)> {
    if values.len() <= bars {
        return equal_bars(values, bars);
    }
    gathered(values, |value| match value {
        ..=1 => (value, value),
        _ => {
            let high = (value as u64).next_power_of_two() as i64;
            (high / 2 + 1, high)
        }
    })
}

fn gathered(values: &[(i64, u64)], bar_of: impl Fn(i64) -> (i64, i64)) -> Vec<(String, u64)> {
    let mut bars: Vec<((i64, i64), u64)> = Vec::new();
    for &(value, count) in values {
        let bar = bar_of(value);
        match bars.last_mut() {
            Some((last, total)) if *last == bar => *total += count,
            _ => bars.push((bar, count)),
        }
    }
    let told = |((low, high), count)| (range(low, high), count);
    bars.into_iter().map(told).collect()
}
