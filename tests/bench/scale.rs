//! Growth with netlist size: time per gate and memory per gate at a hundred
//! thousand and at a million gates, and on one path a million gates long.
//!
//! `cargo bench --bench scale` prints a table first, then what divan measures.
//! Each row of the table is the best of three runs of this very program on a
//! file, as a process of its own, so that its peak resident memory (`VmHWM` of
//! `/proc/self/status`, less that of the same process on a one-gate netlist) is
//! what the stages need and not what generating the netlist needed. `per gate`
//! counts the gates of the file: `.names` of BLIF, ANDs of AIGER. [`stages`] is
//! the place where a further stage is plugged in.

#[path = "../generators/mod.rs"]
mod generators;

use carrywise::audit::{Options, Origin, audit};
use carrywise::chain::{self, Found};
use carrywise::format::{self, Parsed, ReadOptions};
use carrywise::netlist::Topology;
use carrywise::source::Source;
use divan::Bencher;
use divan::counter::ItemsCount;
use generators::{Aig, replicated, series};
use std::path::Path;
use std::process::Command;
use std::time::{Duration, Instant};

const CHILD: &str = "CARRYWISE_SCALE_FILE";
const SMALL: usize = 100_000;
const LARGE: usize = 1_000_000;

fn main() {
    if let Some(path) = std::env::var_os(CHILD) {
        return measure(Path::new(&path));
    }
    if std::env::args().any(|argument| argument == "--bench") {
        table();
    }
    divan::main();
}

fn parse(source: &Source) -> Parsed {
    format::read(source, &ReadOptions::default()).expect("the generators write valid netlists")
}

fn search(parsed: &Parsed) -> Found {
    let topology = Topology::of(&parsed.netlist);
    chain::find(&parsed.netlist, &topology, chain::Options::default())
}

/// What one run did: gates, chains, and the time of each stage.
struct Run {
    gates: usize,
    chains: usize,
    read: Duration,
    audit: Duration,
}

/// Every stage once, in order; the text is let go after reading, as the command
/// does. The audit is the whole of it: measures, chains, proofs, dry runs.
fn stages(source: Source) -> Run {
    let start = Instant::now();
    let parsed = parse(&source);
    let read = start.elapsed();
    drop(source);
    let origin = Origin {
        file: "scale".to_owned(),
        format: parsed.format,
        sha256: String::new(),
    };
    let start = Instant::now();
    let audited = audit(&parsed.netlist, &origin, &Options::default());
    let audited = audited.expect("the default limits fit every netlist");
    Run {
        gates: parsed.netlist.gate_count(),
        chains: audited.chains.len(),
        read,
        audit: start.elapsed(),
    }
}

/// The child: one file, one line of numbers.
fn measure(path: &Path) {
    let bytes = std::fs::read(path).expect("the file the parent wrote");
    let source = Source {
        name: "scale".to_owned(),
        bytes,
    };
    let run = stages(source);
    let (read, audit) = (run.read.as_nanos(), run.audit.as_nanos());
    println!("{} {} {read} {audit} {}", run.gates, run.chains, peak());
}

/// Peak resident memory of this process in bytes; 0 where the system does not say.
fn peak() -> u64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find_map(|line| line.strip_prefix("VmHWM:"));
    let kilobytes = line.and_then(|rest| rest.trim().trim_end_matches(" kB").parse().ok());
    kilobytes.map_or(0, |kilobytes: u64| kilobytes * 1024)
}

/// Runs a child on a file: gates, chains, nanoseconds of reading and auditing
/// (the best of `runs`), peak bytes.
fn child(path: &Path, runs: usize) -> [u64; 5] {
    let program = std::env::current_exe().expect("this program");
    let mut best = [u64::MAX; 5];
    for _ in 0..runs {
        let output = Command::new(&program).env(CHILD, path).output();
        let output = output.expect("this program starts again");
        let text = String::from_utf8_lossy(&output.stdout);
        assert!(
            output.status.success(),
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
        for (best, word) in best.iter_mut().zip(text.split_whitespace()) {
            *best = (*best).min(word.parse().expect("a number"));
        }
    }
    best
}

fn table() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let file = |name: &str, bytes: Vec<u8>| {
        let path = folder.path().join(name);
        std::fs::write(&path, bytes).expect("room for the netlist");
        path
    };
    let idle = child(&file("one.blif", series(1).blif().into_bytes()), 1)[4];
    println!(
        "{:<24} {:>9} {:>7} {:>9} {:>9} {:>9} {:>9}",
        "netlist", "gates", "chains", "read ns", "audit ns", "all ns", "bytes"
    );
    let row = |name: &str, bytes: Vec<u8>| {
        let path = file(name, bytes);
        let [gates, chains, read, audit, peak] = child(&path, 3);
        let per_gate = |count: u64| count as f64 / gates as f64;
        println!(
            "{name:<24} {gates:>9} {chains:>7} {:>9.1} {:>9.1} {:>9.1} {:>9.1}",
            per_gate(read),
            per_gate(audit),
            per_gate(read + audit),
            per_gate(peak.saturating_sub(idle)),
        );
        per_gate(read + audit)
    };
    let (small, large) = (replicated(SMALL, 1), replicated(LARGE, 1));
    let [a, b] = [&small, &large].map(|c| c.blif().into_bytes());
    let blif = (row("small.blif", a), row("large.blif", b));
    let [a, b] = [&small, &large].map(|c| Aig::of(c).aig());
    let aiger = (row("small.aig", a), row("large.aig", b));
    let long = series(LARGE);
    row("series.blif", long.blif().into_bytes());
    row("series.aig", Aig::of(&long).aig());
    println!(
        "time per gate, large over small: {:.2} BLIF, {:.2} AIGER",
        blif.1 / blif.0,
        aiger.1 / aiger.0
    );
}

#[divan::bench(args = [SMALL, LARGE], sample_count = 3, sample_size = 1)]
fn read_blif(bencher: Bencher, gates: usize) {
    let source = Source {
        name: "scale".to_owned(),
        bytes: replicated(gates, 1).blif().into_bytes(),
    };
    let items = ItemsCount::new(parse(&source).netlist.gate_count());
    bencher.counter(items).bench(|| parse(&source));
}

#[divan::bench(args = [SMALL, LARGE], sample_count = 3, sample_size = 1)]
fn read_binary_aiger(bencher: Bencher, gates: usize) {
    let source = Source {
        name: "scale".to_owned(),
        bytes: Aig::of(&replicated(gates, 1)).aig(),
    };
    let items = ItemsCount::new(parse(&source).netlist.gate_count());
    bencher.counter(items).bench(|| parse(&source));
}

#[divan::bench(args = [SMALL, LARGE], sample_count = 3, sample_size = 1)]
fn find_chains(bencher: Bencher, gates: usize) {
    let source = Source {
        name: "scale".to_owned(),
        bytes: replicated(gates, 1).blif().into_bytes(),
    };
    let parsed = parse(&source);
    let items = ItemsCount::new(parsed.netlist.gate_count());
    bencher.counter(items).bench(|| search(&parsed));
}
