//! Assumptions into the record: what was asserted, why, and what came of it.

use super::record::AssumedRecord;
use super::words::{counted, depth_in, listed};
use crate::netlist::assume::{Assumed, Cycles, Item, Paths, Tied};
use crate::netlist::carry_cell::{CarryCell, PinPair};
use crate::netlist::{Assumptions, Netlist, Pattern, Topology, histogram};
use crate::timing::{DelayModel, End, EndClass, NEVER, PathKind, StartClass, Timing};

/// Delays told of one carry cell.
const PAIRS: usize = 4;

/// Assumptions to audit under.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Asserting<'a> {
    /// What is asserted.
    pub assumptions: &'a Assumptions,
    /// SHA-256 of the file; see [`super::digest`].
    pub sha256: String,
}

/// Figures of the netlist as read.
pub struct Without {
    /// The longest path.
    pub longest: i64,
    kinds: Vec<((StartClass, EndClass), i64)>,
}

impl Without {
    /// Times the netlist as read.
    pub fn of(netlist: &Netlist, topology: &Topology, model: DelayModel) -> Self {
        let timing = Timing::of(netlist, topology, model);
        let kind =
            |kind: &crate::timing::KindTiming| (kind.kind.classes(), i64::from(kind.longest));
        Self {
            longest: i64::from(timing.longest()),
            kinds: timing.kinds.iter().map(kind).collect(),
        }
    }

    /// The longest path of a kind; 0 when there was none.
    pub fn of_kind(&self, kind: PathKind) -> i64 {
        let found = self.kinds.iter().find(|(each, _)| *each == kind.classes());
        found.map_or(0, |&(_, longest)| longest)
    }
}

/// An output that is ready too late.
pub struct Late {
    /// The port.
    pub output: u32,
    /// When it is ready.
    pub at: u64,
    /// When it must be.
    pub required: u64,
}

/// The outputs that miss their required times, each against its tightest.
pub fn late_ports(assumptions: &Assumptions, under: &Assumed, timing: &Timing) -> Vec<Late> {
    let mut late: Vec<Late> = Vec::new();
    for (time, ports) in assumptions.required.iter().zip(&under.required) {
        for &output in ports {
            let at = timing.end_time(&under.netlist, End::Output(output));
            if at > time.at {
                let (at, required) = (at.unsigned_abs().into(), time.at.unsigned_abs().into());
                match late.iter_mut().find(|each| each.output == output) {
                    Some(known) => known.required = known.required.min(required),
                    None => late.push(Late {
                        output,
                        at,
                        required,
                    }),
                }
            }
        }
    }
    late
}

/// The assumptions that change nothing: ties of nets that nothing reads, and
/// cycles for paths that are not there.
pub fn unused(assumptions: &Assumptions, read: &Netlist, timing: &Timing) -> Vec<String> {
    let mut unused = Vec::new();
    if !assumptions.tied.is_empty() {
        let readers = histogram::reader_counts(read);
        let mut used = vec![false; assumptions.tied.len()];
        for net in read.nets().filter(|net| readers[net.index()] > 0) {
            let name = read.net_name(net);
            for (used, each) in used.iter_mut().zip(&assumptions.tied) {
                *used |= each.nets.matches(&name);
            }
        }
        let ties = assumptions.tied.iter().zip(used).filter(|(_, used)| !used);
        unused.extend(ties.map(|(each, _)| tie_words(each)));
    }
    for (i, each) in assumptions.carry_cells.iter().enumerate() {
        if read.declared().is_none_or(|own| own.carry_cells_of(i) == 0) {
            unused.push(format!("{} is a carry cell", each.cell.text()));
        }
    }
    for (i, each) in assumptions.cycles.iter().enumerate() {
        if !timing.relaxed.iter().any(|r| r.entry as usize == i) {
            unused.push(cycles_words(each));
        }
    }
    unused
}

fn tie_words(tied: &Tied) -> String {
    format!("{} is {}", tied.nets.text(), u8::from(tied.value))
}

fn cycles_words(cycles: &Cycles) -> String {
    format!(
        "paths {} may take {} cycles",
        between(cycles.from.as_ref(), cycles.to.as_ref()),
        cycles.cycles
    )
}

/// The assumptions as the record lists them, in the order of the design's list.
pub fn records(
    assumptions: &Assumptions,
    under: &Assumed,
    timing: &Timing,
    unit: &str,
) -> Vec<AssumedRecord> {
    let places = |items: &[Item]| {
        let counts = items.iter().filter_map(|item| under.matched.get(item));
        counts.min().map_or(0, |&count| count as u64)
    };
    let mut records = Vec::new();
    let mut add = |assumption: String, why: &str, places: u64, effect: Option<String>| {
        records.push(AssumedRecord {
            assumption,
            why: why.to_owned(),
            places,
            effect,
        });
    };
    for (i, each) in assumptions.tied.iter().enumerate() {
        add(tie_words(each), &each.why, places(&[Item::Tied(i)]), None);
    }
    for (i, each) in assumptions.not_a_path.iter().enumerate() {
        let (text, places) = match &each.paths {
            Paths::Through(through) => (
                format!("nothing through {} is a path", through.text()),
                places(&[Item::NotThrough(i)]),
            ),
            Paths::Between { from, to } => (
                format!("nothing {} is a path", between(from.as_ref(), to.as_ref())),
                places(&[Item::NotFrom(i), Item::NotTo(i)]),
            ),
        };
        add(text, &each.why, places, None);
    }
    for (i, each) in assumptions.cycles.iter().enumerate() {
        let own = timing.relaxed.iter().filter(|r| r.entry as usize == i);
        let longest = own.map(|relaxed| relaxed.timing.longest).max();
        let effect = longest.map(|longest| {
            let each_cycle = longest.max(0).unsigned_abs().div_ceil(each.cycles);
            format!(
                "the longest of them takes {}: {each_cycle} a cycle",
                depth_in(i64::from(longest), unit)
            )
        });
        let places = places(&[Item::CyclesFrom(i), Item::CyclesTo(i)]);
        add(cycles_words(each), &each.why, places, effect);
    }
    for (i, each) in assumptions.arrival.iter().enumerate() {
        let text = format!("{} ready at {}", each.ports.text(), each.at);
        add(text, &each.why, places(&[Item::Arrival(i)]), None);
    }
    for (i, each) in assumptions.required.iter().enumerate() {
        let text = format!("{} must be ready at {}", each.ports.text(), each.at);
        let times = under.required[i]
            .iter()
            .map(|&output| timing.end_time(&under.netlist, End::Output(output)));
        let latest = times.filter(|&at| at != NEVER).max();
        let effect = latest.map(|latest| {
            let spare = i64::from(each.at) - i64::from(latest);
            let (levels, word) = (
                spare.unsigned_abs(),
                if spare < 0 { "over" } else { "to spare" },
            );
            format!(
                "the latest is ready at {latest}: {} {word}",
                counted(levels, unit.trim_end_matches('s'), unit)
            )
        });
        add(text, &each.why, places(&[Item::Required(i)]), effect);
    }
    for (i, each) in assumptions.box_delay.iter().enumerate() {
        let text = format!(
            "{} takes {} from {} to {}",
            each.name.text(),
            depth_in(i64::from(each.delay), unit),
            each.from.text(),
            each.to.text()
        );
        add(text, &each.why, places(&[Item::BoxName(i)]), None);
    }
    for (i, each) in assumptions.carry_cells.iter().enumerate() {
        let declared = under.netlist.declared();
        let cells = declared.map_or(0, |declared| declared.carry_cells_of(i)) as u64;
        add(carry_cell_words(each), &each.why, cells, None);
    }
    records
}

/// A carry cell and its delays, a few of them when they are many.
fn carry_cell_words(each: &CarryCell) -> String {
    let pair = |pair: &PinPair| {
        let (from, to) = (pair.from.text(), pair.to.text());
        format!("{from} to {to} in {}", pair.delay)
    };
    let shown = each.delays.iter().take(PAIRS).map(pair);
    let mut words: Vec<String> = shown.collect();
    if let Some(more @ 1..) = each.delays.len().checked_sub(PAIRS) {
        words.push(counted(more as u64, "more pair", "more pairs"));
    }
    format!("{} is a carry cell: {}", each.cell.text(), listed(&words))
}

fn between(from: Option<&Pattern>, to: Option<&Pattern>) -> String {
    let named = |side: Option<&Pattern>| {
        let side = side.filter(|side| !side.is_everything());
        side.map(|side| side.text().to_owned())
    };
    match (named(from), named(to)) {
        (Some(from), Some(to)) => format!("from {from} to {to}"),
        (Some(from), None) => format!("from {from}"),
        (None, Some(to)) => format!("to {to}"),
        (None, None) => "anywhere".to_owned(),
    }
}
