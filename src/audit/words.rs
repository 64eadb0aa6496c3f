//! Numbers in sentences: thousands apart, one of a thing in the singular.
//!
//! Every count in a record's sentences and in a report passes here, so that a
//! reader never meets `1 gates` or a million without its commas.

use crate::timing::Time;

/// A number with a comma between thousands.
pub fn grouped(number: u64) -> String {
    let digits = number.to_string();
    let mut text = String::with_capacity(digits.len() + digits.len() / 3);
    for (i, digit) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            text.push(',');
        }
        text.push(digit);
    }
    text
}

/// The same for a number that may be below zero.
pub fn grouped_signed(number: i64) -> String {
    let sign = if number < 0 { "-" } else { "" };
    format!("{sign}{}", grouped(number.unsigned_abs()))
}

/// `1 gate`, `2 gates`, `no gates`.
pub fn counted(number: u64, one: &str, many: &str) -> String {
    match number {
        0 => format!("no {many}"),
        1 => format!("1 {one}"),
        _ => format!("{} {many}", grouped(number)),
    }
}

/// A depth in the unit of the delay model, whose name is in the plural.
pub fn depth_in(depth: Time, unit: &str) -> String {
    let unit = if depth == Time::whole(1) {
        unit.trim_end_matches('s')
    } else {
        unit
    };
    format!("{depth} {unit}")
}

/// `a`, `a and b`, `a, b and c`.
pub fn listed(items: &[String]) -> String {
    match items {
        [] => String::new(),
        [only] => only.clone(),
        [front @ .., last] => format!("{} and {last}", front.join(", ")),
    }
}
