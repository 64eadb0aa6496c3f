//! Findings, candidates left undecided, and what the user asserted.

use super::{Block, cut};
use crate::audit::record::{AssumedRecord, Finding, UnprovenRecord};
use crate::report::number::{grouped, lines, listed, or_dash};
use crate::report::outline::{Caps, Section};
use crate::report::text::clipped;

/// What a reviewer should look at, worst first, and what to do about it.
pub fn findings(findings: &[Finding], left_out: u64, caps: Caps) -> Option<Section> {
    if findings.is_empty() {
        return None;
    }
    let columns = vec![
        ("finding", false),
        ("rule", false),
        ("line", true),
        ("seen", false),
    ];
    let mut advice: Vec<(&str, &str)> = Vec::new();
    let mut rows = Vec::new();
    for finding in findings {
        let Finding {
            rule,
            severity,
            chain,
            net: _,
            line,
            message,
            advice: what_to_do,
            accepted,
        } = finding;
        if advice.iter().all(|(told, _)| told != rule) {
            advice.push((rule, what_to_do));
        }
        if rows.len() == caps.rows {
            continue;
        }
        let accepted = if *accepted { ", accepted" } else { "" };
        let chain = match chain {
            Some(chain) => format!("{}: ", clipped(chain, caps.name)),
            None => String::new(),
        };
        rows.push(vec![
            format!("{}{accepted}", severity.word()),
            clipped(rule, caps.name),
            or_dash(line.map(|line| lines(line, line))),
            format!("{chain}{}", clipped(message, caps.sentence)),
        ]);
    }
    let total = findings.len() + left_out as usize;
    let mut blocks = cut(columns, rows, total, caps.rows, "findings");
    for (rule, what_to_do) in advice.into_iter().take(caps.rows.max(3)) {
        let (rule, what) = (clipped(rule, caps.name), clipped(what_to_do, caps.sentence));
        blocks.push(Block::Text(format!("{rule}: {what}")));
    }
    blocks.push(Block::Text(
        "More about a rule: carrywise explain RULE.".to_owned(),
    ));
    Some(Section {
        heading: "Findings",
        aside: false,
        blocks,
    })
}

/// Candidates left undecided.
pub fn undecided(unproven: &[UnprovenRecord], caps: Caps) -> Option<Section> {
    if unproven.is_empty() {
        return None;
    }
    let columns = vec![
        ("seems to add", false),
        ("bits", true),
        ("why it stayed open", false),
        ("conflicts spent", true),
    ];
    let row = |candidate: &UnprovenRecord| {
        let UnprovenRecord {
            bits,
            operands,
            reason,
            effort,
        } = candidate;
        let operands: Vec<String> = operands.iter().map(|o| clipped(o, caps.name)).collect();
        vec![
            listed(&operands),
            grouped(*bits),
            clipped(reason, caps.sentence),
            grouped(*effort),
        ]
    };
    let rows = unproven.iter().take(caps.rows).map(row).collect();
    Some(Section {
        heading: "Left undecided",
        aside: false,
        blocks: cut(columns, rows, unproven.len(), caps.rows, "candidates"),
    })
}

/// What the user asserted.
pub fn assumed(assumed: &[AssumedRecord], caps: Caps) -> Option<Section> {
    if assumed.is_empty() {
        return None;
    }
    let row = |each: &AssumedRecord| {
        let AssumedRecord {
            assumption,
            why,
            places,
            effect,
        } = each;
        vec![
            clipped(assumption, caps.sentence),
            clipped(why, caps.sentence),
            grouped(*places),
            effect
                .as_deref()
                .map_or_else(|| "-".to_owned(), |effect| clipped(effect, caps.sentence)),
        ]
    };
    let rows = assumed.iter().take(caps.rows).map(row).collect();
    Some(Section {
        heading: "Assumed",
        aside: false,
        blocks: cut(
            vec![
                ("assumption", false),
                ("why", false),
                ("places", true),
                ("effect", false),
            ],
            rows,
            assumed.len(),
            caps.rows,
            "assumptions",
        ),
    })
}
