//! What a report for people says and in which order, before it is laid out.
//!
//! The terminal table and the Markdown form print the same outline, so that
//! they cannot drift apart. The record is taken to pieces field by field: a new
//! field does not compile until somebody decides where it is told.
//!
//! Invariant: every text in an outline has passed [`super::text`], so it is
//! bounded in length and holds no character that could mislead.

use super::number::{counted, depth_in, grouped};
use super::sections;
use super::text::clipped;
use crate::audit::record::{Audit, DelayModelFacts, NetlistFacts, Seen, Settings, Tool, Verdict};
use crate::timing::Time;

/// How much of a long list and a long name is shown.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Caps {
    /// Most rows of one table.
    pub rows: usize,
    /// Most characters of a name in a row.
    pub name: usize,
    /// Most characters of a sentence.
    pub sentence: usize,
}

/// One table of an outline.
#[derive(Debug)]
pub struct Grid {
    /// Titles; `true` where the column holds numbers.
    pub columns: Vec<(&'static str, bool)>,
    /// Rows, as wide as `columns`.
    pub rows: Vec<Vec<String>>,
}

/// One piece of a section.
#[derive(Debug)]
pub enum Block {
    /// A paragraph.
    Text(String),
    /// A table.
    Grid(Grid),
}

/// One section.
#[derive(Debug)]
pub struct Section {
    /// Its heading.
    pub heading: &'static str,
    /// Whether a reviewer needs it only on request.
    pub aside: bool,
    /// Its content.
    pub blocks: Vec<Block>,
}

/// A whole report.
#[derive(Debug)]
pub struct Outline {
    /// What was read, in a sentence.
    pub read: String,
    /// The verdict, in a sentence.
    pub verdict: String,
    /// What could be seen, in a sentence.
    pub seen: String,
    /// Everything else.
    pub sections: Vec<Section>,
    /// Under which settings it was judged.
    pub settings: String,
    /// What the report does not settle.
    pub caution: String,
}

impl Outline {
    /// The outline of `audit`.
    pub fn of(audit: &Audit, caps: Caps) -> Self {
        let Audit {
            schema: _,
            tool,
            netlist,
            settings,
            seen,
            verdict,
            depth,
            fan_in,
            fan_out,
            chains,
            recommended_set,
            arrays,
            recurrences_not_listed,
            unproven,
            findings,
            findings_left_out,
            assumed,
            caution,
        } = audit;
        let Verdict {
            limit: _,
            chain: _,
            sentence,
            by_path_kind,
        } = verdict;
        let sections = [
            sections::paths(by_path_kind, caps),
            sections::chains(chains, arrays, *recurrences_not_listed, caps),
            sections::undecided(unproven, caps),
            sections::rebuild(chains, recommended_set, caps),
            sections::measures(depth, fan_in, fan_out, caps),
            sections::ports(depth, caps),
            sections::longest_path(depth, caps),
            sections::findings(findings, *findings_left_out, caps),
            sections::assumed(assumed, caps),
        ];
        Self {
            read: read(netlist, depth.longest, &depth.unit, caps),
            verdict: clipped(sentence, caps.sentence),
            seen: seen_sentence(seen, netlist),
            sections: sections.into_iter().flatten().map(without_blanks).collect(),
            settings: settings_sentence(settings, tool, netlist, caps),
            caution: clipped(caution, caps.sentence),
        }
    }
}

/// Drops the columns of which every row says `-`.
pub(super) fn without_blanks(mut section: Section) -> Section {
    for block in &mut section.blocks {
        let Block::Grid(Grid { columns, rows }) = block else {
            continue;
        };
        for column in (0..columns.len()).rev() {
            if rows.iter().all(|row| row[column] == "-") {
                columns.remove(column);
                for row in rows.iter_mut() {
                    row.remove(column);
                }
            }
        }
    }
    section
}

fn read(netlist: &NetlistFacts, longest: Time, unit: &str, caps: Caps) -> String {
    let mut parts = vec![
        counted(netlist.inputs, "input", "inputs"),
        counted(netlist.outputs, "output", "outputs"),
        counted(netlist.gates, "gate", "gates"),
        counted(netlist.registers, "register", "registers"),
    ];
    if netlist.black_boxes > 0 {
        parts.push(counted(
            netlist.black_boxes,
            "instance without a function",
            "instances without a function",
        ));
    }
    format!(
        "{}: {}; {} deep",
        clipped(&netlist.file, caps.name.max(60)),
        parts.join(", "),
        depth_in(longest, unit)
    )
}

fn seen_sentence(seen: &Seen, netlist: &NetlistFacts) -> String {
    let Seen {
        gates_with_function,
        gates_without_function,
        nets_cut,
        chains_proven,
        chains_witnessed,
        chains_unproven,
    } = *seen;
    let gates = if netlist.gates == 0 && gates_without_function == 0 {
        "there is no gate to look into".to_owned()
    } else if gates_without_function == 0 {
        match netlist.gates {
            1 => "the only gate has a known function".to_owned(),
            _ => format!("all {} gates have a known function", grouped(netlist.gates)),
        }
    } else {
        format!(
            "{} a known function, {} not",
            match gates_with_function {
                1 => "1 gate has".to_owned(),
                _ => format!("{} have", counted(gates_with_function, "gate", "gates")),
            },
            match gates_without_function {
                1 => "1 instance has".to_owned(),
                n => format!("{} instances have", grouped(n)),
            }
        )
    };
    let cut = match nets_cut {
        0 => "no net is cut".to_owned(),
        1 => "1 net is cut and treated as a free input".to_owned(),
        n => format!("{} nets are cut and treated as free inputs", grouped(n)),
    };
    let open = match chains_unproven {
        0 => "none left undecided".to_owned(),
        n => format!("{} left undecided", grouped(n)),
    };
    let proven = match chains_proven {
        0 => "no chain proven".to_owned(),
        n => format!("{} proven", counted(n, "chain", "chains")),
    };
    let twice = match chains_witnessed {
        0 => "",
        n if n == chains_proven => " (by solver and by decision diagram)",
        n => &format!(" ({} by decision diagram too)", grouped(n)),
    };
    format!(
        "What could be seen: {gates}; {cut}; {proven}{twice}, {open}. Looked for are chains with \
         sums (adders, subtractors, incrementers, decrementers) and ripple comparators; \
         comparators built as trees are not."
    )
}

pub(super) fn settings_sentence(
    settings: &Settings,
    tool: &Tool,
    netlist: &NetlistFacts,
    caps: Caps,
) -> String {
    let Settings {
        delay_model:
            DelayModelFacts {
                name,
                unit,
                note,
                misfit,
            },
        new_gates,
        new_gates_reason,
        gate_inputs,
        gate_inputs_reason,
        plan_margin_percent,
        min_bits,
        effort,
        patterns_seed,
        target_depth,
        assumptions_sha256,
    } = settings;
    let NetlistFacts {
        format,
        model,
        sha256,
        ..
    } = netlist;
    let note = note.as_ref().map_or_else(String::new, |note| {
        format!(": {}", clipped(note, caps.sentence))
    });
    let misfit = misfit.as_ref().map_or_else(String::new, |why| {
        format!("; {}", clipped(why, caps.sentence))
    });
    let mut source = vec![format!("read as {}", format.replace('-', " "))];
    if let Some(model) = model {
        source.push(format!("model {}", clipped(model, caps.name)));
    }
    source.push(format!("SHA-256 {sha256}"));
    let target = match target_depth {
        None => String::new(),
        Some(depth) => format!("; target depth {}", grouped(*depth)),
    };
    let planned = match plan_margin_percent {
        None => "; every chain is planned".to_owned(),
        Some(percent) => format!(
            "; not planned with more than {percent} % of the longest path of its kind to spare"
        ),
    };
    let assumed = match assumptions_sha256 {
        None => String::new(),
        Some(hash) => format!("; assumptions SHA-256 {hash}"),
    };
    format!(
        "{} {}; {}. Depths in {unit} (delay model {name}{note}{misfit}). New gates are \
         {new_gates} ({}) with at most {gate_inputs} inputs ({}). Chains from {} up{planned}; {} per \
         proof; pattern seed {patterns_seed}{target}{assumed}.",
        tool.name,
        tool.version,
        source.join(", "),
        clipped(new_gates_reason, caps.sentence),
        clipped(gate_inputs_reason, caps.sentence),
        counted(*min_bits, "bit", "bits"),
        counted(*effort, "solver conflict", "solver conflicts"),
    )
}
