//! The longest path, told from its start: a stretch inside one chain is one
//! row, since bit after bit of the same says nothing new.

use super::Block;
use crate::audit::record::{Depth, PathStep};
use crate::report::number::{counted, grouped, lines as lines_of, or_dash, range, span};
use crate::report::outline::{Caps, Grid, Section};
use crate::report::text::clipped;

/// The longest path.
pub fn longest_path(depth: &Depth, caps: Caps) -> Option<Section> {
    let steps = &depth.longest_path;
    let (first, last) = (steps.first()?, steps.last()?);
    let mut rows = folded(steps, depth.longest_path_left_out, caps);
    let mut blocks = vec![Block::Text(format!(
        "From {} to {}.",
        clipped(&first.net, caps.name),
        clipped(&last.net, caps.name)
    ))];
    if rows.len() > caps.rows.max(2) {
        let (front, back) = (caps.rows.max(2).div_ceil(2), caps.rows.max(2) / 2);
        let hidden = rows.len() - front - back;
        let gap = gap_row(&counted(hidden as u64, "row", "rows"));
        let tail = rows.split_off(rows.len() - back);
        rows.truncate(front);
        rows.push(gap);
        rows.extend(tail);
    }
    blocks.push(Block::Grid(Grid {
        columns: vec![
            ("at", true),
            ("net", false),
            ("gate", false),
            ("inputs", true),
            ("line", true),
        ],
        rows,
    }));
    Some(Section {
        heading: "Longest path",
        aside: true,
        blocks,
    })
}

fn folded(steps: &[PathStep], left_out: u64, caps: Caps) -> Vec<Vec<String>> {
    let mut rows = Vec::new();
    let gap_after = (left_out > 0).then_some(steps.len() / 2);
    let mut at = 0;
    while at < steps.len() {
        if gap_after == Some(at) {
            rows.push(gap_row(&counted(left_out, "step", "steps")));
        }
        let chain = &steps[at].chain;
        let length = steps[at..].iter().take_while(|s| s.chain == *chain).count();
        match chain {
            Some(chain) if length > 2 => {
                rows.push(stretch_row(&steps[at..at + length], chain, caps));
                at += length;
            }
            _ => {
                rows.push(step_row(&steps[at], caps));
                at += 1;
            }
        }
    }
    rows
}

fn step_row(step: &PathStep, caps: Caps) -> Vec<String> {
    let PathStep {
        net,
        gate,
        line,
        fan_in,
        arrival,
        chain,
        bit,
    } = step;
    let mut name = clipped(net, caps.name);
    if let Some(chain) = chain {
        let bit = bit.map_or(String::new(), |bit| format!(", bit {bit}"));
        name.push_str(&format!(" ({}{bit})", clipped(chain, caps.name)));
    }
    vec![
        arrival.to_string(),
        name,
        clipped(gate, caps.name),
        or_dash(fan_in.map(grouped)),
        or_dash(line.map(|line| lines_of(line, line))),
    ]
}

fn stretch_row(steps: &[PathStep], chain: &str, caps: Caps) -> Vec<String> {
    let bits = || steps.iter().filter_map(|step| step.bit);
    let place = match (bits().min(), bits().max()) {
        (Some(low), Some(high)) if low < high => format!(", bits {low}–{high}"),
        (Some(only), _) => format!(", bit {only}"),
        _ => String::new(),
    };
    let lines = || steps.iter().filter_map(|step| step.line);
    let fan_ins = || steps.iter().filter_map(|step| step.fan_in);
    let most = |low: Option<u64>, high: Option<u64>| match (low, high) {
        (Some(low), Some(high)) => range(low as i64, high as i64),
        _ => "-".to_owned(),
    };
    let (first, last) = (&steps[0], &steps[steps.len() - 1]);
    vec![
        span(first.arrival, last.arrival),
        format!("{}{place}", clipped(chain, caps.name)),
        counted(steps.len() as u64, "gate", "gates"),
        most(fan_ins().min(), fan_ins().max()),
        match (lines().min(), lines().max()) {
            (Some(low), Some(high)) => lines_of(low, high),
            _ => "-".to_owned(),
        },
    ]
}

fn gap_row(what: &str) -> Vec<String> {
    vec![
        "…".to_owned(),
        format!("{what} not shown"),
        String::new(),
        String::new(),
        String::new(),
    ]
}
