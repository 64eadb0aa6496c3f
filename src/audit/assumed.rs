//! Assumptions into the record: what was asserted, why, and what came of it.

use super::record::{AssumedRecord, RecommendedSet};
use super::words::{counted, depth_in, listed};
use crate::netlist::assume::{Assumed, Cycles, Item, Paths, Tied};
use crate::netlist::carry_cell::{CarryCell, PinPair};
use crate::netlist::{Assumptions, Netlist, Pattern, Topology, histogram};
use crate::timing::{DelayModel, End, EndClass, NEVER, PathKind, StartClass, Time, Timing};

/// Ties told of one recommendation.
const TIES: usize = 4;
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
    pub longest: Time,
    kinds: Vec<((StartClass, EndClass), Time)>,
}

impl Without {
    /// Times the netlist as read.
    pub fn of(netlist: &Netlist, topology: &Topology, model: DelayModel) -> Self {
        let timing = Timing::of(netlist, topology, model);
        let kind =
            |kind: &crate::timing::KindTiming| (kind.kind.classes(), timing.time(kind.longest));
        Self {
            longest: timing.time(timing.longest()),
            kinds: timing.kinds.iter().map(kind).collect(),
        }
    }

    /// The longest path of a kind; 0 when there was none.
    pub fn of_kind(&self, kind: PathKind) -> Time {
        let found = self.kinds.iter().find(|(each, _)| *each == kind.classes());
        found.map_or(Time::ZERO, |&(_, longest)| longest)
    }
}

/// An output that is ready too late.
pub struct Late {
    /// The port.
    pub output: u32,
    /// When it is ready.
    pub at: Time,
    /// When it must be.
    pub required: Time,
}

/// The outputs that miss their required times, each against its tightest.
pub fn late_ports(assumptions: &Assumptions, under: &Assumed, timing: &Timing) -> Vec<Late> {
    let mut late: Vec<Late> = Vec::new();
    for (time, ports) in assumptions.required.iter().zip(&under.required) {
        for &output in ports {
            let at = timing.end_time(&under.netlist, End::Output(output));
            let (at, required) = (timing.time(at), Time::whole(time.at.into()));
            if at > required {
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
            Paths::Part { from, through, to } => (
                format!(
                    "nothing {} is a path where it passes {}",
                    between(from.as_ref(), to.as_ref()),
                    through.text()
                ),
                places(&[Item::NotFrom(i), Item::NotThrough(i), Item::NotTo(i)]),
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
            let each_cycle = timing.time(per_cycle(longest, each.cycles));
            format!(
                "the longest of them takes {}: {each_cycle} a cycle",
                depth_in(timing.time(longest), unit)
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
            let latest = timing.time(latest);
            let spare = Time::whole(each.at.into()) - latest;
            let word = if spare < 0 { "over" } else { "to spare" };
            let spare = match spare.abs() {
                Time::ZERO => format!("no {unit}"),
                some => depth_in(some, unit),
            };
            format!("the latest is ready at {latest}: {spare} {word}")
        });
        add(text, &each.why, places(&[Item::Required(i)]), effect);
    }
    for (i, each) in assumptions.box_delay.iter().enumerate() {
        let text = format!(
            "{} takes {} from {} to {}",
            each.name.text(),
            depth_in(Time::whole(each.delay.into()), unit),
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

/// Says of a recommendation that it rests on the ties: with other values of those
/// nets the rebuilt netlist would do something else.
pub fn hold_under_ties(assumptions: &Assumptions, set: &mut RecommendedSet) {
    if assumptions.tied.is_empty() || set.proposals.is_empty() {
        return;
    }
    let mut ties: Vec<String> = assumptions.tied.iter().take(TIES).map(tie_words).collect();
    if let Some(more @ 1..) = assumptions.tied.len().checked_sub(TIES) {
        ties.push(counted(more as u64, "more tie", "more ties"));
    }
    let ties = listed(&ties);
    let said = format!(
        " The chain was proven, and the rebuild does the same, only while {ties}, as assumed."
    );
    set.sentence.push_str(&said);
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

/// The share of one cycle, in ticks, rounded up.
pub fn per_cycle(longest: i32, cycles: u32) -> i32 {
    let share = longest.max(0).unsigned_abs().div_ceil(cycles);
    i32::try_from(share).unwrap_or(i32::MAX)
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
