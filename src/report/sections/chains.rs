//! The chains and what could be built in their place.

use super::{Block, cut};
use crate::audit::record::{
    ArrayRecord, BuiltAsRecord, ChainDepth, ChainRecord, NotPlanned, Place, ProposalRecord,
    RecommendedSet,
};
use crate::report::number::{
    change, counted, depth_in, grouped, lines as lines_of, listed, or_dash, signed, span,
};
use crate::report::outline::{Caps, Grid, Section};
use crate::report::text::clipped;
use crate::timing::{Basis, Time};

/// One row per chain, those on a longest path first.
pub fn chains(
    chains: &[ChainRecord],
    arrays: &[ArrayRecord],
    recurrences_not_listed: u64,
    caps: Caps,
) -> Option<Section> {
    if chains.is_empty() && arrays.is_empty() && recurrences_not_listed == 0 {
        return None;
    }
    let columns = vec![
        ("computes", false),
        ("chain", false),
        ("bits", true),
        ("built as", false),
        ("settles", true),
        ("to spare", true),
        ("lines", true),
    ];
    let rows = urgent_first(chains)
        .into_iter()
        .take(caps.rows)
        .map(|chain| chain_row(chain, caps))
        .collect();
    let mut blocks = cut(columns, rows, chains.len(), caps.rows, "chains");
    if let Some(totals) = totals(chains) {
        blocks.push(Block::Text(totals));
    }
    blocks.extend(constructions(chains, caps).map(Block::Text));
    for array in arrays.iter().take(caps.rows) {
        let ArrayRecord {
            id,
            kind,
            label,
            rows,
            columns,
            cells,
            chains,
        } = array;
        blocks.push(Block::Text(format!(
            "{} is a {kind} of {rows} rows and {columns} columns ({}): {} and {} in {}.",
            clipped(id, caps.name),
            clipped(label, caps.name),
            counted(cells.full, "full adder", "full adders"),
            counted(cells.half, "half adder", "half adders"),
            counted(chains.len() as u64, "chain", "chains"),
        )));
    }
    blocks.extend(exercised(chains, caps).map(Block::Text));
    blocks.extend(against(chains).map(Block::Text));
    if recurrences_not_listed > 0 {
        blocks.push(Block::Text(format!(
            "{} that compute no sum and compare nothing are counted and not listed.",
            counted(recurrences_not_listed, "recurrence", "recurrences"),
        )));
    }
    Some(Section {
        heading: "Chains",
        aside: false,
        blocks,
    })
}

/// Chains whose longest path no values exercise, or may not.
fn exercised(chains: &[ChainRecord], caps: Caps) -> Option<String> {
    let told = chains.iter().filter_map(|chain| {
        let found = chain.depth.exercised.as_ref()?;
        let id = clipped(&chain.id, caps.name);
        match (found.verdict.as_str(), found.depth) {
            ("impossible", Some(depth)) => Some(format!(
                "The longest path to the results of {id} ({}) is one that no values exercise: \
                 they have settled after {depth}.",
                chain.depth.leaves
            )),
            ("undecided", _) => Some(format!(
                "Whether values exercise the longest path to the results of {id} was not settled \
                 within the effort."
            )),
            _ => None,
        }
    });
    let told: Vec<String> = told.take(caps.rows).collect();
    (!told.is_empty()).then(|| told.join(" "))
}

/// What is to spare counts against, unless it is the longest path of the kind.
fn against(chains: &[ChainRecord]) -> Option<String> {
    let mut words: Vec<&str> = chains
        .iter()
        .filter_map(|chain| chain.slack_against.as_deref())
        .collect();
    words.sort_unstable();
    words.dedup();
    let longest = Basis::Longest.words();
    if words.iter().all(|&word| word == longest) {
        return None;
    }
    let words: Vec<String> = words.iter().map(|word| format!("the {word}")).collect();
    Some(format!(
        "What is to spare is counted against {}{}.",
        listed(&words),
        if words.len() > 1 {
            ", whichever an end has"
        } else {
            ""
        }
    ))
}

fn urgent_first(chains: &[ChainRecord]) -> Vec<&ChainRecord> {
    let mut order: Vec<&ChainRecord> = chains.iter().collect();
    order.sort_by_key(|chain| !chain.on_longest_path);
    order
}

fn chain_row(chain: &ChainRecord, caps: Caps) -> Vec<String> {
    // Operands, carry-in, relation and kind are told by the formula; nets, taps
    // and a fingerprint are for the data forms.
    let ChainRecord {
        id,
        fingerprint: _,
        array,
        kind,
        bits,
        operands: _,
        carry_in: _,
        carry_form: _,
        carry_out: _,
        carry_taps: _,
        sums: _,
        result: _,
        relation: _,
        signed,
        mode: _,
        feedback,
        duplicates,
        built_as,
        proven: _,
        place,
        depth: ChainDepth {
            arrives, leaves, ..
        },
        on_longest_path,
        slack,
        slack_against: _,
        not_planned: _,
        cheaper: _,
        proposals: _,
    } = chain;
    let signed = if *signed == Some(true) { "signed " } else { "" };
    let mut what = format!(
        "{} ({signed}{kind})",
        clipped(&chain.formula(), 2 * caps.name)
    );
    if let Some(feedback) = feedback {
        what.push_str(&format!(", {}", feedback.role));
    }
    if let Some(array) = array {
        what.push_str(&format!(", row of {}", clipped(array, caps.name)));
    }
    if let Some(twin) = duplicates {
        what.push_str(&format!(", repeats {}", clipped(twin, caps.name)));
    }
    let Place {
        instance,
        line_first,
        line_last,
    } = place;
    if !instance.is_empty() {
        what.push_str(&format!(", in {}", clipped(&instance.join("/"), caps.name)));
    }
    let lines = match (line_first, line_last) {
        (Some(first), Some(last)) => lines_of(*first, *last),
        _ => "-".to_owned(),
    };
    let spare = match slack {
        Some(Time::ZERO) if *on_longest_path => "none".to_owned(),
        Some(late) if *late < Time::ZERO => format!("{} over", late.abs()),
        _ => or_dash(slack.map(|slack| slack.to_string())),
    };
    vec![
        what,
        clipped(id, caps.name),
        grouped(*bits),
        built(built_as, caps),
        span(*arrives, *leaves),
        spare,
        lines,
    ]
}

/// The build in a word, with what tells it from others of the name.
fn built(built_as: &BuiltAsRecord, caps: Caps) -> String {
    let BuiltAsRecord {
        name,
        nearest,
        group,
        ..
    } = built_as;
    let name = clipped(name, caps.name);
    match (nearest, group) {
        (Some(scheme), None) if name == "prefix" => {
            format!("{name}, {}", clipped(scheme, caps.name))
        }
        (_, Some(group)) => format!("{name} by {}", grouped(*group)),
        _ => name,
    }
}

/// What is behind every build that is not a plain ripple; chains built alike are
/// told together.
fn constructions(chains: &[ChainRecord], caps: Caps) -> impl Iterator<Item = String> {
    let mut alike: Vec<(&BuiltAsRecord, Vec<&str>)> = Vec::new();
    for chain in urgent_first(chains) {
        let own = &chain.built_as;
        if own.name == "ripple" || own.detail.is_empty() {
            continue;
        }
        match alike.iter().position(|(known, _)| *known == own) {
            Some(at) => alike[at].1.push(&chain.id),
            None if alike.len() < caps.rows => alike.push((own, vec![&chain.id])),
            None => {}
        }
    }
    alike.into_iter().map(move |(built_as, ids)| {
        let BuiltAsRecord {
            name: _,
            nearest: _,
            group: _,
            levels,
            cells,
            largest_fan_out,
            taxonomy: _,
            detail,
        } = built_as;
        let mut names: Vec<String> = ids
            .iter()
            .take(4)
            .map(|id| clipped(id, caps.name))
            .collect();
        if ids.len() > names.len() {
            names.push(format!(
                "{} more",
                grouped((ids.len() - names.len()) as u64)
            ));
        }
        let mut parts = vec![clipped(detail, caps.sentence)];
        if let (Some(levels), Some(cells)) = (levels, cells) {
            parts.push(format!(
                "{} and {} in the carry network",
                counted(*levels, "level", "levels"),
                counted(*cells, "cell", "cells"),
            ));
        }
        if let Some(readers) = largest_fan_out {
            parts.push(format!(
                "at most {} of one net",
                counted(*readers, "reader", "readers")
            ));
        }
        format!("{}: {}.", listed(&names), parts.join("; "))
    })
}

fn totals(chains: &[ChainRecord]) -> Option<String> {
    if chains.len() < 2 {
        return None;
    }
    let bits: u64 = chains.iter().map(|chain| chain.bits).sum();
    let tally = |of: &dyn Fn(&ChainRecord) -> String| {
        let mut counts: Vec<(String, u64)> = Vec::new();
        for chain in chains {
            let word = of(chain);
            match counts.iter_mut().find(|(known, _)| *known == word) {
                Some((_, count)) => *count += 1,
                None => counts.push((word, 1)),
            }
        }
        counts
    };
    let kinds: Vec<String> = tally(&|chain| clipped(&chain.kind, 40))
        .into_iter()
        .map(|(kind, n)| counted(n, &kind, &format!("{kind}s")))
        .collect();
    let built = tally(&|chain| clipped(&chain.built_as.name, 40));
    let built = match built.as_slice() {
        [(only, _)] => format!("every one built as {only}"),
        _ => {
            let each: Vec<String> = built
                .iter()
                .map(|(name, n)| format!("{} built as {name}", grouped(*n)))
                .collect();
            listed(&each)
        }
    };
    let urgent = chains.iter().filter(|chain| chain.on_longest_path).count();
    let urgent = match urgent {
        0 => "none lies on a longest path".to_owned(),
        1 => "one lies on a longest path".to_owned(),
        n if n == chains.len() => "all lie on a longest path".to_owned(),
        n => format!("{} lie on a longest path", grouped(n as u64)),
    };
    Some(format!(
        "{} with {} in all: {}; {built}; {urgent}.",
        counted(chains.len() as u64, "chain", "chains"),
        counted(bits, "bit", "bits"),
        listed(&kinds),
    ))
}

/// The recommended set, and the other proposals it was chosen from.
pub fn rebuild(chains: &[ChainRecord], set: &RecommendedSet, caps: Caps) -> Option<Section> {
    if chains.is_empty() {
        return None;
    }
    let RecommendedSet {
        proposals: chosen,
        sentence,
        ..
    } = set;
    let mut blocks = vec![Block::Text(clipped(sentence, caps.sentence))];
    if chosen.len() > 1 {
        blocks.push(Block::Text(together(set, caps)));
    }
    let mut rows = Vec::new();
    let mut total = 0;
    let mut afterwards = Vec::new();
    let is_chosen = |chain: &ChainRecord, proposal: &ProposalRecord| {
        chosen.contains(&format!("{}/{}", chain.id, proposal.id))
    };
    let concerned = |chain: &ChainRecord| chain.proposals.iter().any(|p| is_chosen(chain, p));
    let mut order = urgent_first(chains);
    order.sort_by_cached_key(|chain| !concerned(chain));
    for chain in order {
        for proposal in &chain.proposals {
            // Of the other chains only what is recommended, if anything is.
            let wanted = proposal.recommended || chain.cheaper.as_ref() == Some(&proposal.id);
            if !chosen.is_empty() && !concerned(chain) && !wanted {
                continue;
            }
            total += 1;
            if rows.len() < caps.rows {
                rows.push(proposal_row(chain, proposal, caps));
            }
            if is_chosen(chain, proposal) && afterwards.len() < caps.rows {
                afterwards.push(aftermath(chain, proposal, caps));
            }
        }
    }
    let columns = vec![
        ("proposal", false),
        ("scheme", false),
        ("chain", true),
        ("block", true),
        ("gates", true),
        ("fan-in", true),
        ("fan-out", true),
    ];
    blocks.extend(cut(columns, rows, total, caps.rows, "proposals"));
    blocks.extend(afterwards.into_iter().map(Block::Text));
    blocks.extend(not_planned(chains, caps));
    Some(Section {
        heading: "Rebuild",
        aside: false,
        blocks,
    })
}

/// What the members of a set of several bring and cost together.
fn together(set: &RecommendedSet, caps: Caps) -> String {
    let RecommendedSet {
        proposals: _,
        block_depth: _,
        path_kind,
        kind_depth,
        gates_added: _,
        gates_removed: _,
        gate_equivalents_added,
        largest_fan_in,
        largest_fan_out,
        takes_over,
        chains_left,
        sentence: _,
    } = set;
    let mut parts = Vec::new();
    if let (Some(kind), Some(depth)) = (path_kind, kind_depth) {
        parts.push(format!(
            "the longest {} path {}",
            clipped(kind, caps.name),
            change(*depth)
        ));
    }
    parts.push(format!(
        "{} gate equivalents",
        signed(*gate_equivalents_added)
    ));
    parts.push(format!(
        "no new gate wider than {}",
        counted(*largest_fan_in, "input", "inputs")
    ));
    parts.push(format!(
        "no new net with more than {}",
        counted(*largest_fan_out, "reader", "readers")
    ));
    if let Some(path) = takes_over {
        parts.push(format!(
            "afterwards the longest path is {}",
            clipped(path, caps.sentence)
        ));
    }
    if !chains_left.is_empty() {
        let mut left: Vec<String> = chains_left
            .iter()
            .take(6)
            .map(|chain| clipped(chain, caps.name))
            .collect();
        if chains_left.len() > left.len() {
            left.push(format!("{} more", chains_left.len() - left.len()));
        }
        parts.push(format!("with {} on it", listed(&left)));
    }
    format!("Together: {}.", parts.join("; "))
}

fn proposal_row(chain: &ChainRecord, proposal: &ProposalRecord, caps: Caps) -> Vec<String> {
    let ProposalRecord {
        id,
        scheme,
        group,
        levels: _,
        valency,
        select_end,
        on_front: _,
        recommended,
        reason: _,
        holds_under: _,
        flips_under: _,
        chain_depth,
        block_depth,
        takes_over: _,
        gates_added,
        gates_removed,
        gate_equivalents_added: _,
        largest_fan_in,
        largest_fan_out,
        wire_tracks: _,
        above_bound: _,
        carries: _,
        network: _,
    } = proposal;
    let mut what = clipped(scheme, caps.name);
    if let Some(group) = group {
        what.push_str(&format!(", groups of {group}"));
    } else if *valency > 2 {
        what.push_str(&format!(", {valency} at a time"));
    }
    if *select_end {
        what.push_str(", select at the end");
    }
    if *recommended {
        what.push_str(" (recommended)");
    }
    if chain.cheaper.as_ref() == Some(id) {
        what.push_str(" (saves gates)");
    }
    vec![
        format!(
            "{}/{}",
            clipped(&chain.id, caps.name),
            clipped(id, caps.name)
        ),
        what,
        change(*chain_depth),
        change(*block_depth),
        format!("+{} -{}", grouped(*gates_added), grouped(*gates_removed)),
        grouped(*largest_fan_in),
        grouped(*largest_fan_out),
    ]
}

fn aftermath(chain: &ChainRecord, proposal: &ProposalRecord, caps: Caps) -> String {
    let mut text = format!(
        "{}/{}: ",
        clipped(&chain.id, caps.name),
        clipped(&proposal.id, caps.name)
    );
    let mut parts = Vec::new();
    if let Some(reason) = &proposal.reason {
        parts.push(clipped(reason, caps.sentence));
    }
    parts.push(format!(
        "{} gate equivalents",
        signed(proposal.gate_equivalents_added)
    ));
    if let Some(levels) = proposal.above_bound {
        let levels = match levels.as_whole() {
            Some(0) => "nothing".to_owned(),
            Some(_) => depth_in(levels, "levels"),
            None => levels.to_string(),
        };
        parts.push(format!("{levels} above the lower bound for such gates"));
    }
    if let Some(path) = &proposal.takes_over {
        parts.push(format!(
            "afterwards the longest path is {}",
            clipped(path, caps.sentence)
        ));
    }
    if !proposal.holds_under.is_empty() {
        let models: Vec<String> = proposal
            .holds_under
            .iter()
            .map(|model| clipped(model, caps.name))
            .collect();
        let mut text = format!("the choice holds under {}", listed(&models));
        if !proposal.flips_under.is_empty() {
            let flips: Vec<String> = proposal
                .flips_under
                .iter()
                .map(|model| clipped(model, caps.name))
                .collect();
            text.push_str(&format!(" and not under {}", listed(&flips)));
        }
        parts.push(text);
    }
    text.push_str(&parts.join("; "));
    text.push('.');
    text
}

fn not_planned(chains: &[ChainRecord], caps: Caps) -> Vec<Block> {
    let rows: Vec<Vec<String>> = urgent_first(chains)
        .into_iter()
        .filter_map(|chain| {
            let NotPlanned { why, slack } = chain.not_planned.as_ref()?;
            Some(vec![
                clipped(&chain.id, caps.name),
                clipped(why, caps.sentence),
                or_dash(slack.map(|slack| slack.to_string())),
            ])
        })
        .collect();
    let total = rows.len();
    if total == 0 {
        return Vec::new();
    }
    let columns = vec![
        ("chain", false),
        ("not planned, because", false),
        ("to spare", true),
    ];
    if total <= caps.rows {
        return vec![Block::Grid(Grid { columns, rows })];
    }
    cut(columns, rows, total, caps.rows, "chains without a plan")
}
