//! The record of a trade-off: what `tradeoff` tells, for every form of it.
//!
//! Schema `carrywise/tradeoff/1`; fields may be added. Nothing is computed here
//! but words; the figures are those of [`crate::plan::tradeoff`].

use super::words::{depth_in, grouped};
use crate::plan::tradeoff::{Point, Question, Tradeoff, terms_of_two_gates};
use crate::timing::{DelayModel, Time};
use serde::{Deserialize, Serialize};

/// The schema of this record.
pub const SCHEMA: &str = "carrywise/tradeoff/1";

/// A trade-off; see the head of the module.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct TradeoffRecord {
    /// Schema and version.
    pub schema: String,
    /// Positions added.
    pub bits: u64,
    /// Whether there is a carry-in.
    pub carry_in: bool,
    /// The earliest and the latest input.
    pub arrivals: [Time; 2],
    /// The delay model.
    pub delay_model: String,
    /// What it counts in.
    pub unit: String,
    /// What one gate may be.
    pub new_gates: String,
    /// The limits on gate inputs that were tried.
    pub gate_inputs: Vec<u64>,
    /// The best of every scheme under each of them.
    pub schemes: Vec<SchemeRow>,
    /// The least delay, then the fewest gates, then the smallest fan-in.
    pub sweet_spot: Option<PointRecord>,
    /// The sweet spot, told.
    pub sentence: String,
    /// The carry-out as one sum of products.
    pub two_gates: TwoGates,
    /// Variations measured.
    pub measured: u64,
    /// What was left out.
    pub left_out: Option<String>,
}

/// One scheme.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct SchemeRow {
    /// The scheme.
    pub scheme: String,
    /// Its best under each limit; null where it has none.
    pub points: Vec<Option<PointRecord>>,
}

/// One measured adder.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct PointRecord {
    /// The scheme.
    pub scheme: String,
    /// Members of a group or block.
    pub group: Option<u64>,
    /// What else sets the variation apart.
    pub variant: Option<String>,
    /// Most spans joined by one node.
    pub valency: u64,
    /// Whether some sum ends in a select.
    pub select_end: bool,
    /// When the last result is ready.
    pub delay: Time,
    /// When the last sum is ready.
    pub sum: Time,
    /// When the carry-out is ready.
    pub carry_out: Time,
    /// Gates.
    pub gates: u64,
    /// Gates, one of k inputs counted k - 1.
    pub gate_equivalents: u64,
    /// Inputs of the largest gate.
    pub largest_fan_in: u64,
    /// Most readers of one net.
    pub largest_fan_out: u64,
    /// Wiring tracks, of prefix networks.
    pub wire_tracks: Option<u64>,
}

/// The carry-out as one AND level and one OR.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct TwoGates {
    /// Product terms, a number in decimal; null where it has more than 38 digits.
    pub terms: Option<String>,
    /// The same as a formula.
    pub formula: String,
    /// Inputs of the widest AND.
    pub widest_term: u64,
    /// The same, told.
    pub sentence: String,
}

/// The record of an answer.
pub fn record(
    question: &Question,
    answer: &Tradeoff,
    model: DelayModel,
    new_gates: &str,
) -> TradeoffRecord {
    let bits = question.a.len();
    let inputs = || {
        question
            .a
            .iter()
            .chain(&question.b)
            .chain(&question.carry_in)
    };
    let time = |ticks: i32| model.time(ticks);
    let row = |(scheme, points): &(&str, Vec<Option<Point>>)| SchemeRow {
        scheme: (*scheme).to_owned(),
        points: points
            .iter()
            .map(|point| point.as_ref().map(|point| point_record(point, model)))
            .collect(),
    };
    let sweet_spot = answer.sweet_spot.as_ref();
    TradeoffRecord {
        schema: SCHEMA.to_owned(),
        bits: bits as u64,
        carry_in: question.carry_in.is_some(),
        arrivals: [
            time(inputs().copied().min().unwrap_or(0)),
            time(inputs().copied().max().unwrap_or(0)),
        ],
        delay_model: model.name().to_owned(),
        unit: model.unit_word().to_owned(),
        new_gates: new_gates.to_owned(),
        gate_inputs: answer.limits.iter().map(|&limit| limit as u64).collect(),
        schemes: answer.schemes.iter().map(row).collect(),
        sweet_spot: sweet_spot.map(|point| point_record(point, model)),
        sentence: sweet_spot.map_or_else(String::new, |point| sentence(point, model)),
        two_gates: two_gates(bits, question.carry_in.is_some()),
        measured: answer.measured as u64,
        left_out: answer.left_out.clone(),
    }
}

fn point_record(point: &Point, model: DelayModel) -> PointRecord {
    PointRecord {
        scheme: point.scheme.to_owned(),
        group: point.group.map(|group| group as u64),
        variant: point.variant.clone(),
        valency: point.valency as u64,
        select_end: point.select_end,
        delay: model.time(point.delay),
        sum: model.time(point.sum),
        carry_out: model.time(point.carry_out),
        gates: point.gates as u64,
        gate_equivalents: point.gate_equivalents as u64,
        largest_fan_in: point.largest_fan_in as u64,
        largest_fan_out: point.largest_fan_out as u64,
        wire_tracks: point.wire_tracks.map(|tracks| tracks as u64),
    }
}

/// The scheme and its variation, in words.
fn phrase(point: &Point) -> String {
    let mut text = point.scheme.to_owned();
    if let Some(group) = point.group {
        text.push_str(&format!(" in groups of {group}"));
    }
    if point.valency > 2 && point.group.is_none() && point.scheme != "flat-lookahead" {
        text.push_str(&format!(" of valency {}", point.valency));
    }
    if let Some(variant) = &point.variant {
        text.push_str(&format!(", {variant}"));
    }
    if point.select_end {
        text.push_str(", with a select end");
    }
    text
}

fn sentence(point: &Point, model: DelayModel) -> String {
    format!(
        "The sweet spot is {}: {} to the last result (sum {}, carry-out {}) with {} gates, none of \
         more than {} inputs.",
        phrase(point),
        depth_in(model.time(point.delay), model.unit_word()),
        model.time(point.sum),
        model.time(point.carry_out),
        grouped(point.gates as u64),
        point.largest_fan_in,
    )
}

fn two_gates(bits: usize, has_carry_in: bool) -> TwoGates {
    let exponent = bits + usize::from(has_carry_in);
    let formula = format!("2^{exponent} - 1");
    let terms = terms_of_two_gates(bits, has_carry_in);
    let widest_term = bits + usize::from(has_carry_in);
    let told = match terms.map(u64::try_from) {
        Some(Ok(terms)) => format!("{} terms ({formula})", grouped(terms)),
        _ => format!("{formula} terms"),
    };
    TwoGates {
        terms: terms.map(|terms| terms.to_string()),
        formula,
        widest_term: widest_term as u64,
        sentence: format!(
            "For scale: as one sum of products the carry-out would be two gates deep and have \
             {told}, the widest of {widest_term} inputs."
        ),
    }
}
