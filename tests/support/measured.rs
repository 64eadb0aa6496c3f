//! Figures over many judged cases: recall by kind, architecture and disguise,
//! kinds, how chains are said to be built, and what was told that should not be.

#![allow(dead_code)]

use super::judged::{Family, Judged, Outcome, Witness, judge};
use super::recognition::parse;
use crate::generators::corpus::Case;
use carrywise::chain::{self, Found};
use carrywise::netlist::{Netlist, Topology};
use std::collections::BTreeMap;
use std::fmt::Write;
use std::sync::LazyLock;
use std::time::{Duration, Instant};

/// Found of asked.
#[derive(Clone, Copy, Default, Debug)]
pub struct Share {
    pub of: usize,
    pub good: usize,
}

impl Share {
    fn add(&mut self, good: bool) {
        self.of += 1;
        self.good += usize::from(good);
    }

    /// The share; 1 of nothing.
    pub fn ratio(self) -> f64 {
        match self.of {
            0 => 1.0,
            of => self.good as f64 / of as f64,
        }
    }
}

impl std::fmt::Display for Share {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{:.4} ({} of {})", self.ratio(), self.good, self.of)
    }
}

/// Everything counted.
#[derive(Default)]
pub struct Figures {
    pub cases: usize,
    /// By family and group of disguises.
    pub recall: BTreeMap<(Family, &'static str), Share>,
    /// By kind, architecture and disguise.
    pub detail: BTreeMap<(&'static str, &'static str), BTreeMap<String, Share>>,
    pub kind: Share,
    pub built_as: Share,
    /// How many built so are said to be built so.
    pub confusion: BTreeMap<(&'static str, String), usize>,
    pub kinds_mistaken: BTreeMap<(&'static str, &'static str), usize>,
    pub false_chains: Vec<String>,
    pub unasked: Vec<String>,
    /// Chains told of negatives, true though they are.
    pub on_negatives: Vec<String>,
    /// Products searched, and chains told in them: rows, and parts of columns.
    pub products: usize,
    pub in_products: usize,
    pub unproven: usize,
    /// The smallest case of each kind, architecture and disguise that falls short.
    pub misses: BTreeMap<(&'static str, &'static str, String), (usize, String)>,
    /// Gates and time of each case.
    pub times: Vec<(usize, Duration)>,
}

/// A case read and searched; the time is that of the search.
pub fn searched(case: &Case) -> (Netlist, Found, Duration) {
    let netlist = parse(&case.label(), case.form.bytes());
    let start = processor_time();
    let topology = Topology::of(&netlist);
    let found = chain::find(&netlist, &topology, chain::Options::default());
    let time = processor_time().saturating_sub(start);
    (netlist, found, time)
}

/// Time this thread has had a processor, which other work on the machine does
/// not change; where the system does not say, time since some moment.
pub fn processor_time() -> Duration {
    static BEGIN: LazyLock<Instant> = LazyLock::new(Instant::now);
    let text = std::fs::read_to_string("/proc/thread-self/schedstat").unwrap_or_default();
    let first = text
        .split_whitespace()
        .next()
        .and_then(|word| word.parse().ok());
    first.map_or_else(|| BEGIN.elapsed(), Duration::from_nanos)
}

impl Figures {
    /// Searches and judges one case.
    pub fn take(&mut self, case: &Case) -> (Netlist, Found, Judged) {
        let (netlist, found, time) = searched(case);
        let witness = Witness::of(case, 5);
        let judged = judge(case, &netlist, &found, &witness);
        self.cases += 1;
        self.times.push((case.form.gates(), time));
        self.unproven += found.unproven.len();
        self.false_chains
            .extend(judged.false_chains.iter().cloned());
        match case.kind {
            "product" => {
                self.products += 1;
                self.in_products += judged.unasked.len();
            }
            "negative" => self.on_negatives.extend(judged.unasked.iter().cloned()),
            _ => self.unasked.extend(judged.unasked.iter().cloned()),
        }
        for fate in &judged.fates {
            let full = fate.outcome == Outcome::Full;
            let disguise = case.disguise.word();
            self.recall
                .entry((fate.family, case.disguise.group()))
                .or_default()
                .add(full);
            let rows = self
                .detail
                .entry((case.kind, case.architecture))
                .or_default();
            rows.entry(disguise.clone()).or_default().add(full);
            if !full {
                let text = format!("{}: {:?}", case.label(), fate.outcome);
                let key = (case.kind, case.architecture, disguise);
                let miss = self
                    .misses
                    .entry(key)
                    .or_insert((usize::MAX, String::new()));
                if case.bits < miss.0 {
                    *miss = (case.bits, text);
                }
                continue;
            }
            let Some(kind) = fate.kind else { continue };
            let right = fate.kinds.contains(&kind);
            self.kind.add(right);
            if !right {
                *self.kinds_mistaken.entry((case.kind, kind)).or_default() += 1;
            }
            if let Some(told) = &fate.built_as
                && case.disguise.keeps_architecture()
                && case.bits >= 11
                && kind != "comparator"
            {
                let meant = family(case.architecture);
                self.built_as.add(told == meant);
                let key = (case.architecture, told.clone());
                *self.confusion.entry(key).or_default() += 1;
            }
        }
        (netlist, found, judged)
    }

    /// Share of a group of disguises.
    pub fn recall_of(&self, family: Family, group: &'static str) -> Share {
        let share = self.recall.get(&(family, group));
        share.copied().unwrap_or_default()
    }

    /// Time per gate by size, and the exponent of time over gates.
    pub fn growth(&self) -> String {
        let mut text = String::new();
        let mut low = 0;
        for high in [100, 300, 1_000, 3_000, usize::MAX] {
            let within = self.times.iter().filter(|t| (low..high).contains(&t.0));
            let (gates, time) =
                within.fold((0, Duration::ZERO), |sum, t| (sum.0 + t.0, sum.1 + t.1));
            if gates > 0 {
                let each = time.as_secs_f64() * 1e6 / gates as f64;
                let limit = match high {
                    usize::MAX => "any".to_owned(),
                    high => high.to_string(),
                };
                writeln!(text, "  {low:>5} to {limit:<5} gates: {each:.1} µs a gate").unwrap();
            }
            low = high;
        }
        text
    }

    /// The whole of it as text.
    pub fn report(&self) -> String {
        let mut text = format!("{} cases\nfull-width recall\n", self.cases);
        for ((family, group), share) in &self.recall {
            let family = match family {
                Family::Sums => "words with sums",
                Family::Order => "comparisons",
                Family::Row => "restoring rows",
                Family::Swallowed => "operand or sum on no net",
            };
            writeln!(text, "  {family:<25} {group:<14} {share}").unwrap();
        }
        writeln!(text, "kind     {}", self.kind).unwrap();
        for ((kind, told), count) in &self.kinds_mistaken {
            writeln!(text, "  {kind} told as {told}: {count}").unwrap();
        }
        writeln!(text, "built as {}", self.built_as).unwrap();
        for ((built, told), count) in &self.confusion {
            writeln!(text, "  {built:<22} told as {told:<16} {count}").unwrap();
        }
        writeln!(text, "false chains: {}", self.false_chains.len()).unwrap();
        self.false_chains
            .iter()
            .for_each(|line| writeln!(text, "  {line}").unwrap());
        writeln!(
            text,
            "chains told of negatives, true: {}",
            self.on_negatives.len()
        )
        .unwrap();
        self.on_negatives
            .iter()
            .for_each(|line| writeln!(text, "  {line}").unwrap());
        let (products, rows) = (self.products, self.in_products);
        writeln!(text, "chains told in {products} products, true: {rows}").unwrap();
        writeln!(text, "left open: {}", self.unproven).unwrap();
        writeln!(text, "true but not asked for: {}", self.unasked.len()).unwrap();
        self.unasked
            .iter()
            .for_each(|line| writeln!(text, "  {line}").unwrap());
        text.push_str("recall by kind, architecture and disguise, where not whole\n");
        for ((kind, architecture), rows) in &self.detail {
            for (disguise, share) in rows {
                if share.good < share.of {
                    writeln!(
                        text,
                        "  {kind:<20} {architecture:<20} {disguise:<14} {share}"
                    )
                    .unwrap();
                }
            }
        }
        text.push_str("smallest case of each that falls short\n");
        for (_, line) in self.misses.values() {
            writeln!(text, "  {line}").unwrap();
        }
        text.push_str("time of the search\n");
        text + &self.growth()
    }
}

/// The word for how an architecture is built, as the crate's values print.
fn family(architecture: &str) -> &'static str {
    match architecture {
        "ripple" | "ripple-borrow" => "ripple",
        "flat-lookahead" | "group-lookahead" => "lookahead",
        "skip" => "skip",
        "carry-select" | "carry-select-growing" => "select",
        "carry-increment" => "increment",
        "conditional-sum" => "conditionalsum",
        "tree" => "tree",
        _ => "prefix",
    }
}
