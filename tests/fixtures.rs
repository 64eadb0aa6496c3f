//! The committed fixtures are what their generator writes, and do what
//! `fixtures/README.md` says: the logger is compared, clock by clock, with a
//! model of it in integer arithmetic that knows nothing of gates.
//!
//! To write the files anew after a change of the generator, run
//! `cargo test --release --test fixtures -- --ignored write_fixtures`.

mod generators;

use generators::{Circuit, Net, Random, gauge, witness};
use std::collections::HashMap;
use std::path::{Path, PathBuf};

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures")
}

#[test]
fn committed_files_are_what_the_generator_writes() {
    for (name, bytes) in gauge::files() {
        let found = std::fs::read(folder().join(name)).unwrap_or_else(|e| panic!("{name}: {e}"));
        assert!(
            found == bytes,
            "{name} differs from what the generator writes"
        );
    }
}

#[test]
#[ignore = "writes into fixtures/"]
fn write_fixtures() {
    for (name, bytes) in gauge::files() {
        std::fs::write(folder().join(name), bytes).unwrap();
    }
}

#[test]
fn every_form_of_the_logger_computes_the_same() {
    let flat = gauge::tide_logger().flatten();
    let mut random = Random::new(11);
    for _ in 0..8 {
        let inputs: Vec<u64> = flat.inputs.iter().map(|_| random.word()).collect();
        let state: Vec<u64> = flat.registers.iter().map(|_| random.word()).collect();
        let values = flat.evaluate(&inputs, &state);
        let read = |net: Net| values[net.index()];
        let outputs: Vec<u64> = flat.outputs.iter().map(|&net| read(net)).collect();
        let next: Vec<u64> = flat.registers.iter().map(|r| read(r.next)).collect();
        for (name, bytes) in gauge::files() {
            let Some(form) = name.strip_prefix("tide_logger") else {
                continue;
            };
            let found = if form.ends_with(".blif") {
                witness::blif(&String::from_utf8(bytes).unwrap(), &inputs, &state)
            } else {
                witness::aiger(&bytes, &inputs, &state)
            };
            assert_eq!(found, (outputs.clone(), next.clone()), "{name}");
        }
    }
}

/// The logger as its README tells it, in integers.
#[derive(Clone, Default, PartialEq, Debug)]
struct Logger {
    busy: bool,
    done: bool,
    take: bool,
    divider: u32,
    samples: u32,
    total: i32,
    overflow: bool,
    high_last: bool,
    high_before: bool,
    alarm: bool,
}

/// One clock's inputs.
#[derive(Clone, Copy)]
struct Clock {
    restart: bool,
    arm: bool,
    tick: bool,
    window: u32,
    level: i16,
    alarm_at: i16,
}

impl Logger {
    fn clock(&self, now: Clock) -> Self {
        if now.restart {
            return Self::default();
        }
        let mut next = self.clone();
        let full = self.samples >> 8 == now.window;
        next.busy = self.busy && !full || !self.busy && !self.done && now.arm;
        next.done = self.done || self.busy && full;
        let counted = self.busy && now.tick;
        next.take = counted && self.divider == 63;
        next.divider = (self.divider + u32::from(counted)) % 64;
        if self.take {
            let sum = self.total + i32::from(now.level);
            // 24 bits of two's complement.
            next.total = sum << 8 >> 8;
            next.overflow |= next.total != sum;
            next.samples = (self.samples + 1) % 4096;
            let high = now.level > now.alarm_at;
            next.alarm |= high && self.high_last && self.high_before;
            (next.high_last, next.high_before) = (high, self.high_last);
        }
        next
    }
}

struct Ports<'a> {
    circuit: &'a Circuit,
    by_name: HashMap<String, Net>,
}

impl<'a> Ports<'a> {
    fn of(circuit: &'a Circuit) -> Self {
        let nets = (0..circuit.net_count() as u32).map(Net);
        Self {
            circuit,
            by_name: nets.map(|net| (circuit.name_of(net), net)).collect(),
        }
    }

    fn bus(&self, name: &str, width: usize) -> Vec<usize> {
        let bits = (0..width).map(|i| self.by_name[&format!("{name}[{i}]")].index());
        bits.collect()
    }

    fn bit(&self, name: &str) -> usize {
        self.by_name[name].index()
    }

    /// Splits net values into those of inputs and those of register outputs.
    fn free(&self, values: &[u64]) -> (Vec<u64>, Vec<u64>) {
        let inputs = self.circuit.inputs.iter().map(|net| values[net.index()]);
        let registers = self.circuit.registers.iter();
        let state = registers.map(|r| values[r.output.index()]);
        (inputs.collect(), state.collect())
    }
}

fn put(values: &mut [u64], nets: &[usize], lane: usize, word: u32) {
    for (i, &net) in nets.iter().enumerate() {
        values[net] = values[net] & !(1 << lane) | u64::from(word >> i & 1) << lane;
    }
}

fn get(values: &[u64], nets: &[usize], lane: usize) -> u32 {
    let bits = nets.iter().enumerate();
    bits.fold(0, |word, (i, &net)| {
        word | ((values[net] >> lane & 1) as u32) << i
    })
}

/// A level near the threshold, near an end of the range, or anywhere.
fn level(random: &mut Random, alarm_at: i16) -> i16 {
    match random.below(4) {
        0 => random.word() as i16,
        1 => alarm_at.saturating_add(random.below(3) as i16 - 1),
        2 => i16::MAX - random.below(9) as i16,
        _ => alarm_at.saturating_add(random.below(2000) as i16 - 500),
    }
}

#[test]
fn the_logger_does_what_its_description_says() {
    let circuit = gauge::tide_logger().flatten();
    let ports = Ports::of(&circuit);
    let (total, samples) = (ports.bus("total", 24), ports.bus("samples", 12));
    let divider = ports.bus("divider", 6);
    let controls = ["reset", "clear", "arm", "sample_tick"].map(|name| ports.bit(name));
    let (window, show) = (ports.bus("window", 4), ports.bus("show", 2));
    let (level_in, alarm_at) = (ports.bus("level", 16), ports.bus("alarm_at", 16));
    let byte_out = ports.bus("byte_out", 8);
    let flags = [
        "ready",
        "busy",
        "done",
        "alarm",
        "overflow",
        "take",
        "byte_parity",
    ];
    let flags = flags.map(|name| ports.bit(name));

    let mut random = Random::new(23);
    let mut loggers = vec![Logger::default(); 64];
    let mut values = vec![0u64; circuit.net_count()];
    let thresholds: Vec<i16> = (0..64).map(|_| random.word() as i16).collect();
    // Totals near the ends of the range let a few samples overflow.
    for (lane, logger) in loggers.iter_mut().enumerate() {
        logger.total = [0, 0x7F_0000, -0x7F_F000, 0x7F_FFFF][lane % 4];
        put(&mut values, &total, lane, logger.total as u32);
    }
    let mut seen = [0u32; 4];
    for clock in 0..20_000 {
        for (lane, logger) in loggers.iter_mut().enumerate() {
            // Half of the gauges are left to run until their window is full.
            let disturbed = lane % 2 == 0 && random.below(900) == 0;
            let now = Clock {
                restart: disturbed,
                arm: random.below(4) == 0,
                tick: lane % 8 != 3 || random.below(2) == 0,
                window: 1 + lane as u32 / 32,
                level: level(&mut random, thresholds[lane]),
                alarm_at: thresholds[lane],
            };
            let by_reset = disturbed && random.below(2) == 0;
            let pins = [by_reset, disturbed && !by_reset, now.arm, now.tick];
            for (net, pin) in controls.into_iter().zip(pins) {
                put(&mut values, &[net], lane, u32::from(pin));
            }
            let shown = random.below(4) as u32;
            put(&mut values, &show, lane, shown);
            put(&mut values, &window, lane, now.window);
            put(&mut values, &level_in, lane, u32::from(now.level as u16));
            put(&mut values, &alarm_at, lane, u32::from(now.alarm_at as u16));
            // What the ports show before the clock edge is checked below.
            *logger = {
                let next = logger.clock(now);
                seen[0] += u32::from(next.alarm && !logger.alarm);
                seen[1] += u32::from(next.overflow && !logger.overflow);
                seen[2] += u32::from(next.done && !logger.done);
                seen[3] += u32::from(next.take);
                next
            };
        }
        let (inputs, state) = ports.free(&values);
        let settled = circuit.evaluate(&inputs, &state);
        for register in &circuit.registers {
            values[register.output.index()] = settled[register.next.index()];
        }
        // Only now are the new values of the registers and what follows from
        // them alone to be seen.
        let (inputs, state) = ports.free(&values);
        let shown = circuit.evaluate(&inputs, &state);
        for (lane, logger) in loggers.iter().enumerate() {
            let at = format!("gauge {lane}, clock {clock}");
            let word = logger.total as u32 & 0xFF_FFFF;
            assert_eq!(get(&shown, &total, lane), word, "total, {at}");
            assert_eq!(get(&shown, &samples, lane), logger.samples, "samples, {at}");
            assert_eq!(get(&shown, &divider, lane), logger.divider, "divider, {at}");
            let byte = match get(&shown, &show, lane) {
                3 => logger.samples & 0xFF,
                k => word >> (8 * k) & 0xFF,
            };
            assert_eq!(get(&shown, &byte_out, lane), byte, "byte, {at}");
            let ready = !logger.busy && !logger.done;
            let expected = [
                ready,
                logger.busy,
                logger.done,
                logger.alarm,
                logger.overflow,
                logger.take,
                byte.count_ones() % 2 == 1,
            ];
            let found = flags.map(|net| get(&shown, &[net], lane) == 1);
            assert_eq!(found, expected, "flags, {at}");
        }
    }
    assert!(
        seen.iter().all(|&count| count >= 8),
        "too little happened: {seen:?}"
    );
}

#[test]
fn the_accumulator_is_the_longest_path_of_the_logger() {
    let circuit = gauge::tide_logger().flatten();
    // level to addend, 24 bits of carry, overflow, its register: 1 + 1 + 23·2 + 3.
    assert_eq!(circuit.depth(), 51);
    let path = circuit.longest_path();
    let carries = path
        .iter()
        .filter(|&&net| circuit.name_of(net).starts_with("u_total/"));
    assert_eq!(carries.count(), 1 + 23 * 2);
    assert!(
        (300..=700).contains(&circuit.gate_count()),
        "{}",
        circuit.gate_count()
    );
}

#[test]
fn carry_is_not_the_limit_of_the_surge_filter() {
    let circuit = gauge::surge_filter();
    let path: Vec<String> = circuit
        .longest_path()
        .iter()
        .map(|&n| circuit.name_of(n))
        .collect();
    // 28 frame bits in series, then sound, accept, reject and the held value.
    assert_eq!(circuit.depth(), 27 + 5);
    assert!(path[0].starts_with("frame["), "{path:?}");
    assert!(
        path.iter().all(|name| !name.starts_with("sum[")),
        "{path:?}"
    );
}

#[test]
fn the_difference_is_level_less_previous_level() {
    let circuit = gauge::tide_delta();
    assert_eq!((circuit.gate_count(), circuit.depth()), (16, 8));
    let ports = Ports::of(&circuit);
    let (level, previous) = (ports.bus("level", 8), ports.bus("previous", 8));
    let (change, falling) = (ports.bus("change", 8), ports.bit("falling"));
    let mut values = vec![0u64; circuit.net_count()];
    for first in 0..=255u8 {
        for block in (0..256u32).step_by(64) {
            for lane in 0..64 {
                put(&mut values, &level, lane, u32::from(first));
                put(&mut values, &previous, lane, block + lane as u32);
            }
            let (inputs, state) = ports.free(&values);
            let shown = circuit.evaluate(&inputs, &state);
            for lane in 0..64 {
                let second = (block + lane as u32) as u8;
                let expected = first.wrapping_sub(second);
                assert_eq!(get(&shown, &change, lane), u32::from(expected));
                assert_eq!(get(&shown, &[falling], lane) == 1, first < second);
            }
        }
    }
    for register in &circuit.registers {
        let (next, output) = (
            circuit.name_of(register.next),
            circuit.name_of(register.output),
        );
        assert_eq!(next.replace("level", "previous"), output);
    }
}
