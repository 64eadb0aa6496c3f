//! Recognition over the whole corpus: recall at gate level, as AND/inverters and
//! mapped, kinds, what is said of how chains are built, false chains, mutants,
//! and time and memory per gate.
//!
//! `cargo bench --bench recognition` prints the figures; words behind `--` that
//! are numbers set the stride (every n-th case, default 1), the widest word
//! (default 128) and the mutants per chain (default 1). Time and memory by size are taken in processes of their own on
//! many 64-bit adders side by side, as in the `scale` bench.

#[path = "../generators/mod.rs"]
mod generators;
#[path = "../support/judged.rs"]
mod judged;
#[path = "../support/measured.rs"]
mod measured;
#[path = "../support/mutants.rs"]
mod mutants;
#[path = "../support/recognition.rs"]
mod recognition;

use carrywise::chain;
use carrywise::netlist::Topology;
use generators::corpus::{cases, negative_cases};
use generators::{Architecture, Cell, Circuit, Kind, Word};
use measured::Figures;
use mutants::Mutants;
use std::process::Command;

const CHILD: &str = "CARRYWISE_RECOGNITION_ADDERS";
const SEED: u64 = 20;

fn main() {
    if let Ok(adders) = std::env::var(CHILD) {
        return measure(adders.parse().expect("a number"));
    }
    let arguments: Vec<String> = std::env::args().collect();
    if arguments.iter().any(|argument| argument == "--test") {
        return;
    }
    let numbers: Vec<usize> = arguments.iter().filter_map(|a| a.parse().ok()).collect();
    let stride = numbers.first().copied().unwrap_or(1);
    let widest = numbers.get(1).copied().unwrap_or(128);
    let each = numbers.get(2).copied().unwrap_or(1);
    let (mut figures, mut mutants) = (Figures::default(), Mutants::default());
    for (at, case) in cases(SEED, stride, widest).enumerate() {
        let (netlist, found, _) = figures.take(&case);
        if case.form.gates() < 1_000 {
            mutants.take(&case, &netlist, &found, each, at as u64);
        }
    }
    for case in negative_cases(SEED) {
        figures.take(&case);
    }
    println!("{}", figures.report());
    let (different, alike) = (mutants.different, mutants.alike);
    println!("mutants: {different} differ, {alike} do not (counted apart)");
    println!("  told as the same chain: {:?}", mutants.kept);
    println!("  false chains told of them: {:?}", mutants.false_chains);
    sizes();
}

/// 64-bit adders side by side, of four architectures in turn.
fn adders(count: usize) -> Circuit {
    let mut c = Circuit::new("adders");
    let architectures = [
        Architecture::Ripple(Cell::PropagateXor),
        Architecture::Sklansky,
        Architecture::GroupLookahead(4),
        Architecture::Ripple(Cell::Nand),
    ];
    for k in 0..count {
        let [a, b] = ["a", "b"].map(|name| c.input_bus(&format!("{name}{k}"), 64));
        let word = Word {
            architecture: architectures[k % architectures.len()],
            ..Word::new(Kind::Adder, 64, Cell::PropagateXor)
        };
        let truth = word.place(&mut c, &a, &b, None);
        c.output_bus(&truth.sums, &format!("s{k}"));
        c.output(truth.carry_out.expect("asked for"), &format!("co{k}"));
    }
    c.drop_unread();
    c
}

/// The child: reads and searches, and prints gates, chains, time and memory.
/// Writing the netlist takes memory too, which is taken off: the peak before.
fn measure(count: usize) {
    let bytes = adders(count).blif().into_bytes();
    let netlist = recognition::parse("adders", bytes);
    let before = resident("VmRSS:");
    let start = measured::processor_time();
    let topology = Topology::of(&netlist);
    let found = chain::find(&netlist, &topology, chain::Options::default());
    let time = measured::processor_time().saturating_sub(start).as_nanos();
    let used = resident("VmHWM:").saturating_sub(before);
    println!(
        "{} {} {time} {used}",
        netlist.gate_count(),
        found.chains.len()
    );
}

/// A figure of `/proc/self/status` in bytes; 0 where the system does not say.
fn resident(word: &str) -> u64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find_map(|line| line.strip_prefix(word));
    let kilobytes = line.and_then(|rest| rest.trim().trim_end_matches(" kB").parse().ok());
    kilobytes.map_or(0, |kilobytes: u64| kilobytes * 1024)
}

fn sizes() {
    println!("adders of 64 bits side by side: search, time and peak memory beyond the netlist");
    let program = std::env::current_exe().expect("this program");
    let mut points: Vec<(f64, f64)> = Vec::new();
    for count in [4, 16, 64, 256, 1_024] {
        let output = Command::new(&program)
            .env(CHILD, count.to_string())
            .output();
        let output = output.expect("this program starts again");
        assert!(
            output.status.success(),
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
        let text = String::from_utf8_lossy(&output.stdout);
        let numbers = text
            .split_whitespace()
            .map(|word| word.parse().expect("a number"));
        let numbers: Vec<f64> = numbers.collect();
        let [gates, chains, nanoseconds, bytes] = numbers[..] else {
            panic!("four numbers, not {text}");
        };
        println!(
            "  {gates:>9} gates {chains:>6} chains {:>7.2} µs a gate {:>7.0} bytes a gate",
            nanoseconds / 1e3 / gates,
            bytes / gates
        );
        points.push((gates.ln(), nanoseconds.ln()));
    }
    let n = points.len() as f64;
    let mean = points
        .iter()
        .fold((0.0, 0.0), |m, p| (m.0 + p.0 / n, m.1 + p.1 / n));
    let (mut above, mut below) = (0.0, 0.0);
    for (x, y) in points {
        above += (x - mean.0) * (y - mean.1);
        below += (x - mean.0) * (x - mean.0);
    }
    println!("  time grows as gates to the power {:.2}", above / below);
}
