//! The closeup of one chain for people: its bits with a staircase of arrivals, and
//! the best of every scheme.
//!
//! A bar shows when each carry is ready: `=` up to the rebuild's time, `-` from
//! there to today's. The table form fits 80 columns.

use super::number::{change, counted, depth_in, grouped, or_dash, signed, span};
use super::outline::{Block, Caps, Grid, Outline, Section, settings_sentence, without_blanks};
use super::text::clipped;
use crate::audit::record::{BitRecord, Closeup, SchemeBest, Wire};
use crate::timing::Time;

/// Characters of the longest bar.
const BAR: i64 = 22;

/// The outline of `closeup`.
pub fn outline(closeup: &Closeup, caps: Caps) -> Outline {
    let Closeup {
        schema: _,
        tool,
        netlist,
        settings,
        block_depth,
        unit,
        chain,
        bits,
        schemes,
        reason,
        caution,
    } = closeup;
    let read = format!(
        "{}, {}: {} ({}, built as {}, {})",
        clipped(&netlist.file, caps.name.max(60)),
        clipped(&chain.id, caps.name),
        clipped(&chain.formula(), 2 * caps.name),
        clipped(&chain.kind, caps.name),
        clipped(&chain.built_as.name, caps.name),
        counted(chain.bits, "bit", "bits"),
    );
    let spare = match chain.slack {
        Some(slack) if slack == Time::ZERO => "nothing to spare".to_owned(),
        Some(slack) => format!("{} to spare", depth_in(slack, unit)),
        None => "no path through it to an end".to_owned(),
    };
    let best = schemes.iter().find(|each| each.recommended);
    let outlook = match best {
        Some(best) => format!(
            "By itself best rebuilt as {}: its latest result goes from {} to {} and the block \
             from {} to {}.",
            phrase(best),
            best.chain_depth.before,
            depth_in(best.chain_depth.after, unit),
            best.block_depth.before,
            best.block_depth.after,
        ),
        None => format!(
            "By itself no rebuild is recommended: {}.",
            clipped(reason, caps.sentence)
        ),
    };
    let arrival = span(chain.depth.arrives, chain.depth.leaves);
    let seen = format!(
        "Operands and results settle at {arrival} of {}; {spare}; fingerprint {}.",
        depth_in(*block_depth, unit),
        clipped(&chain.fingerprint, 80),
    );
    let sections = [bit_section(bits, caps), scheme_section(schemes, caps)];
    Outline {
        read,
        verdict: outlook,
        seen,
        sections: sections.into_iter().map(without_blanks).collect(),
        settings: settings_sentence(settings, tool, netlist, caps),
        caution: clipped(caution, caps.sentence),
    }
}

fn phrase(best: &SchemeBest) -> String {
    let mut text = best.scheme.clone();
    if let Some(group) = best.group {
        text.push_str(&format!(", groups of {group}"));
    } else if best.valency > 2 {
        text.push_str(&format!(", {} at a time", best.valency));
    }
    text
}

fn bit_section(bits: &[BitRecord], caps: Caps) -> Section {
    let columns = vec![
        ("bit", true),
        ("adds", false),
        ("at", true),
        ("sum", false),
        ("sum at", true),
        ("from", true),
        ("now", true),
        ("then", true),
        ("carry out", false),
    ];
    let times = bits
        .iter()
        .flat_map(|bit| [bit.carry_arrives, bit.carry_then]);
    let latest = times.flatten().max().unwrap_or(Time::ZERO);
    let rows = bits
        .iter()
        .take(caps.rows)
        .map(|bit| row(bit, latest, caps));
    let mut blocks = vec![Block::Text(
        "A carry out is ready now at the end of its bar, and then, rebuilt, at the end of \
         its `=` part; `from` names the bits whose carries it is made from today, c being \
         the carry-in and a dash operands alone."
            .to_owned(),
    )];
    blocks.extend(super::sections::cut(
        columns,
        rows.collect(),
        bits.len(),
        caps.rows,
        "bits",
    ));
    Section {
        heading: "Bits",
        aside: false,
        blocks,
    }
}

fn row(record: &BitRecord, latest: Time, caps: Caps) -> Vec<String> {
    let BitRecord {
        bit,
        operands,
        arrive,
        sum,
        sum_arrives,
        carry: _,
        carry_arrives,
        made_from,
        carry_then,
    } = record;
    let time = |at: &Option<Time>| or_dash(at.map(|at| at.to_string()));
    let added: Vec<String> = operands
        .iter()
        .map(|wire| clipped(&shown(wire), caps.name))
        .collect();
    vec![
        bit.to_string(),
        added.join(" "),
        time(arrive),
        or_dash(sum.as_ref().map(|wire| clipped(&shown(wire), caps.name))),
        time(sum_arrives),
        or_dash(made_from.as_ref().and_then(|bits| lower(bits))),
        time(carry_arrives),
        time(carry_then),
        bar(*carry_arrives, *carry_then, latest),
    ]
}

fn shown(wire: &Wire) -> String {
    match wire {
        Wire::Net(name) => name.clone(),
        Wire::Constant(value) => value.to_string(),
    }
}

/// The lower carries, the last few of many.
fn lower(bits: &[i64]) -> Option<String> {
    let name = |bit: &i64| match bit {
        -1 => "c".to_owned(),
        bit => bit.to_string(),
    };
    match bits {
        [] => None,
        [one] => Some(name(one)),
        [first, .., last] if bits.len() > 3 => Some(format!("{}…{}", name(first), name(last))),
        some => Some(some.iter().map(name).collect::<Vec<_>>().join(" ")),
    }
}

fn bar(now: Option<Time>, then: Option<Time>, latest: Time) -> String {
    let whole = latest.in_thousandths().max(1);
    let length = |at: Option<Time>| {
        let at = at.map_or(0, Time::in_thousandths).max(0);
        usize::try_from((at * BAR + whole / 2) / whole).unwrap_or(0)
    };
    let (now, then) = (length(now), length(then));
    let text = format!(
        "{}{}",
        "=".repeat(then),
        "-".repeat(now.saturating_sub(then))
    );
    or_dash(Some(text).filter(|text| !text.is_empty()))
}

fn scheme_section(schemes: &[SchemeBest], caps: Caps) -> Section {
    let columns = vec![
        ("scheme", false),
        ("proposal", false),
        ("chain", true),
        ("block", true),
        ("gates", true),
        ("equivalents", true),
        ("fan-in", true),
        ("fan-out", true),
    ];
    let rows = schemes.iter().take(caps.rows).map(|each| {
        let SchemeBest {
            proposal,
            recommended,
            scheme: _,
            group: _,
            levels: _,
            valency: _,
            chain_depth,
            block_depth,
            gates_added,
            gates_removed,
            gate_equivalents_added,
            largest_fan_in,
            largest_fan_out,
            above_bound: _,
        } = each;
        let mark = if *recommended { " (recommended)" } else { "" };
        vec![
            format!("{}{mark}", clipped(&phrase(each), caps.name)),
            or_dash(proposal.clone()),
            change(*chain_depth),
            change(*block_depth),
            format!("+{} -{}", grouped(*gates_added), grouped(*gates_removed)),
            signed(*gate_equivalents_added),
            grouped(*largest_fan_in),
            grouped(*largest_fan_out),
        ]
    });
    let rows: Vec<_> = rows.collect();
    let mut blocks = Vec::new();
    if rows.is_empty() {
        blocks.push(Block::Text("No scheme could be tried.".to_owned()));
    } else {
        blocks.push(Block::Grid(Grid { columns, rows }));
    }
    Section {
        heading: "Best of every scheme",
        aside: false,
        blocks,
    }
}
