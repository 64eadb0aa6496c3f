//! The invented harbour tide-gauge logger of `fixtures/`: one legacy block with
//! a ripple accumulator, and two small ones beside it. [`files`] gives every
//! committed file byte for byte.
//!
//! The logger, once armed, takes one level out of 64 ticks, adds it to a 24-bit
//! total, counts it, and raises an alarm at the third level in a row above the
//! threshold. Levels are two's complement millimetres. All gates of the logger
//! are single products, sums or parities, as in a netlist of discrete cells.

use super::aig::Aig;
use super::circuit::{Circuit, Function, Net};
use super::hierarchy::{Hierarchy, Model, bus, ripple_instances};
use super::words::{Architecture, Word};
use super::{Cell, Kind};

use Function::{And, Nor, Not, Or, Xnor, Xor};

/// Bits of the running total.
pub const TOTAL: usize = 24;
/// Bits of a level and of the threshold.
pub const LEVEL: usize = 16;
/// Bits of the sample counter.
pub const SAMPLES: usize = 12;
/// Bits of the tick divider.
pub const DIVIDER: usize = 6;

/// Every file of `fixtures/` that is written by a generator: name and bytes.
pub fn files() -> Vec<(&'static str, Vec<u8>)> {
    let logger = tide_logger();
    let flat = logger.flatten();
    let graph = Aig::of(&flat);
    let comment = "c\nTide-gauge logger, see README.md.\n";
    let about = |what: &str, text: String| format!("# {what}; see README.md.\n{text}").into_bytes();
    vec![
        (
            "tide_logger_hier.blif",
            about("Tide-gauge logger, in models", logger.blif()),
        ),
        (
            "tide_logger.blif",
            about("Tide-gauge logger, flat", flat.blif()),
        ),
        ("tide_logger.aag", (graph.aag() + comment).into_bytes()),
        (
            "tide_logger.aig",
            [graph.aig().as_slice(), comment.as_bytes()].concat(),
        ),
        (
            "surge_filter.blif",
            about("Surge filter", surge_filter().blif()),
        ),
        (
            "tide_delta.blif",
            about("Change of level", tide_delta().blif()),
        ),
    ]
}

/// The logger in models: accumulator, comparator, counters, sequencer, readout.
pub fn tide_logger() -> Hierarchy {
    let mut top = Model::new("tide_logger");
    top.inputs = ["reset", "clear", "arm", "sample_tick"]
        .map(str::to_owned)
        .to_vec();
    top.inputs.extend(bus("window", 4));
    top.inputs.extend(bus("level", LEVEL));
    top.inputs.extend(bus("alarm_at", LEVEL));
    top.inputs.extend(bus("show", 2));
    top.outputs = ["ready", "busy", "done", "alarm", "overflow"]
        .map(str::to_owned)
        .to_vec();
    top.outputs.extend(bus("total", TOTAL));
    top.outputs.extend(bus("samples", SAMPLES));
    top.outputs.extend(bus("byte_out", 8));
    top.outputs.push("byte_parity".to_owned());

    top.gate(Nor, &["reset", "clear"], "keep");
    top.instance(
        "u_sequencer",
        "sequencer",
        ["arm", "keep", "window_full", "ready", "busy", "done"].map(|pin| (pin, pin)),
    );
    top.gate(And, &["busy", "sample_tick"], "count_tick");
    let mut divider = vec![
        ("enable", "count_tick"),
        ("keep", "keep"),
        ("last", "divider_last"),
    ];
    let divided = bus("divider", DIVIDER);
    let divider_q = bus("q", DIVIDER);
    divider.extend(pairs(&divider_q, &divided));
    top.instance("u_divider", "counter6", divider);
    top.gate(And, &["divider_last", "keep"], "take_next");
    top.register("take_next", "take");

    for i in 0..TOTAL {
        let source = format!("level[{}]", i.min(LEVEL - 1));
        top.gate(And, &["take", &source], &format!("addend[{i}]"));
    }
    let mut total: Vec<(String, String)> = Vec::new();
    for name in ["addend", "total", "sum"] {
        total.extend(bus(name, TOTAL).into_iter().map(|net| (net.clone(), net)));
    }
    total.push(("overflow".to_owned(), "overflow_now".to_owned()));
    top.instance("u_total", "accumulator24", total);
    for i in 0..TOTAL {
        let next = top.gate(
            And,
            &[&format!("sum[{i}]"), "keep"],
            &format!("total_next[{i}]"),
        );
        top.register(&next, &format!("total[{i}]"));
    }
    top.gate(Or, &["overflow", "overflow_now"], "overflow_seen");
    top.gate(And, &["overflow_seen", "keep"], "overflow_next");
    top.register("overflow_next", "overflow");

    let mut count = vec![("enable", "take"), ("keep", "keep")];
    let (counted, counter_q) = (bus("samples", SAMPLES), bus("q", SAMPLES));
    count.extend(pairs(&counter_q, &counted));
    top.instance("u_samples", "counter12", count);
    let mut equal = Vec::new();
    for i in 0..4 {
        let (count, limit) = (format!("samples[{}]", i + 8), format!("window[{i}]"));
        equal.push(top.gate(Xnor, &[&count, &limit], &format!("window_same[{i}]")));
    }
    let equal: Vec<&str> = equal.iter().map(String::as_str).collect();
    top.gate(And, &equal, "window_full");

    // Signed comparison is unsigned comparison with the sign bits exchanged.
    let mut compared = vec![("greater".to_owned(), "too_high".to_owned())];
    for i in 0..LEVEL {
        let (a, b) = if i + 1 == LEVEL {
            ("alarm_at", "level")
        } else {
            ("level", "alarm_at")
        };
        compared.push((format!("a[{i}]"), format!("{a}[{i}]")));
        compared.push((format!("b[{i}]"), format!("{b}[{i}]")));
    }
    top.instance("u_threshold", "comparator16", compared);
    alarm(&mut top);
    readout(&mut top);

    Hierarchy {
        models: vec![
            top,
            accumulator(),
            comparator(),
            compare_bit(),
            counter("counter6", DIVIDER, true),
            counter("counter12", SAMPLES, false),
            sequencer(),
            full_adder(),
            half_adder(),
        ],
    }
}

fn pairs<'a>(
    formal: &'a [String],
    actual: &'a [String],
) -> impl Iterator<Item = (&'a str, &'a str)> {
    let names = formal.iter().zip(actual);
    names.map(|(formal, actual)| (formal.as_str(), actual.as_str()))
}

/// The third high level in a row sets the alarm; it stays until cleared.
fn alarm(top: &mut Model) {
    top.gate(Not, &["take"], "no_take");
    top.gate(And, &["take", "too_high"], "high_now");
    for (name, source) in [("high_last", "too_high"), ("high_before", "high_last")] {
        let loaded = top.gate(And, &["take", source], &format!("{name}_load"));
        let held = top.gate(And, &["no_take", name], &format!("{name}_hold"));
        let chosen = top.gate(Or, &[&loaded, &held], &format!("{name}_pick"));
        let next = top.gate(And, &[&chosen, "keep"], &format!("{name}_next"));
        top.register(&next, name);
    }
    top.gate(And, &["high_now", "high_last", "high_before"], "alarm_set");
    top.gate(Or, &["alarm", "alarm_set"], "alarm_pick");
    top.gate(And, &["alarm_pick", "keep"], "alarm_next");
    top.register("alarm_next", "alarm");
}

/// One byte of the total, or the low byte of the sample count, with its parity.
fn readout(top: &mut Model) {
    for i in 0..2 {
        top.gate(Not, &[&format!("show[{i}]")], &format!("show_not[{i}]"));
    }
    for word in 0..4 {
        let pin = |i: usize| format!("show{}[{i}]", if word >> i & 1 == 1 { "" } else { "_not" });
        top.gate(And, &[&pin(1), &pin(0)], &format!("show_is[{word}]"));
    }
    for i in 0..8 {
        let mut parts = Vec::new();
        for word in 0..4 {
            let source = if word == 3 {
                format!("samples[{i}]")
            } else {
                format!("total[{}]", 8 * word + i)
            };
            let select = format!("show_is[{word}]");
            parts.push(top.gate(And, &[&select, &source], &format!("byte_{word}[{i}]")));
        }
        let parts: Vec<&str> = parts.iter().map(String::as_str).collect();
        top.gate(Or, &parts, &format!("byte_out[{i}]"));
    }
    let mut row = bus("byte_out", 8);
    for level in 0..3 {
        let joined = row.chunks(2).enumerate().map(|(k, pair)| {
            let name = if level == 2 {
                "byte_parity".into()
            } else {
                format!("odd_{level}[{k}]")
            };
            top.gate(Xor, &[&pair[0], &pair[1]], &name)
        });
        row = joined.collect();
    }
}

/// 24 bits of ripple carry; overflow when the top two carries differ.
fn accumulator() -> Model {
    let mut model = Model::new("accumulator24");
    model.inputs = bus("addend", TOTAL)
        .into_iter()
        .chain(bus("total", TOTAL))
        .collect();
    model.outputs = bus("sum", TOTAL);
    model.outputs.push("overflow".to_owned());
    ripple_instances(
        &mut model,
        ["total", "addend", "sum"],
        TOTAL,
        &format!("c[{TOTAL}]"),
    );
    let (top, below) = (format!("c[{TOTAL}]"), format!("c[{}]", TOTAL - 1));
    model.gate(Xor, &[&top, &below], "overflow");
    model
}

fn full_adder() -> Model {
    let mut model = Model::new("full_adder");
    model.inputs = ["a", "b", "cin"].map(str::to_owned).to_vec();
    model.outputs = ["s", "cout"].map(str::to_owned).to_vec();
    model.gate(Xor, &["a", "b"], "p");
    model.gate(Xor, &["p", "cin"], "s");
    model.gate(And, &["a", "b"], "g");
    model.gate(And, &["p", "cin"], "t");
    model.gate(Or, &["g", "t"], "cout");
    model
}

fn half_adder() -> Model {
    let mut model = Model::new("half_adder");
    model.inputs = ["a", "b"].map(str::to_owned).to_vec();
    model.outputs = ["s", "cout"].map(str::to_owned).to_vec();
    model.gate(Xor, &["a", "b"], "s");
    model.gate(And, &["a", "b"], "cout");
    model
}

/// `a > b`, decided from the least significant bit up.
fn comparator() -> Model {
    let mut model = Model::new("comparator16");
    model.inputs = bus("a", LEVEL).into_iter().chain(bus("b", LEVEL)).collect();
    model.outputs = vec!["greater".to_owned()];
    model.gate(Function::Cover(&["10"]), &["a[0]", "b[0]"], "gt[1]");
    for i in 1..LEVEL {
        let out = if i + 1 == LEVEL {
            "greater".to_owned()
        } else {
            format!("gt[{}]", i + 1)
        };
        let pins = [
            ("a", format!("a[{i}]")),
            ("b", format!("b[{i}]")),
            ("gt_in", format!("gt[{i}]")),
            ("gt_out", out),
        ];
        model.instance(&format!("bit_{i}"), "compare_bit", pins);
    }
    model
}

fn compare_bit() -> Model {
    let mut model = Model::new("compare_bit");
    model.inputs = ["a", "b", "gt_in"].map(str::to_owned).to_vec();
    model.outputs = vec!["gt_out".to_owned()];
    model.gate(Not, &["b"], "b_not");
    model.gate(And, &["a", "b_not"], "g");
    model.gate(Or, &["a", "b_not"], "p");
    model.gate(And, &["p", "gt_in"], "t");
    model.gate(Or, &["g", "t"], "gt_out");
    model
}

/// Counts while `enable`, is zeroed without `keep`; `last` is the carry-out.
fn counter(name: &str, bits: usize, carry_out: bool) -> Model {
    let mut model = Model::new(name);
    model.inputs = ["enable", "keep"].map(str::to_owned).to_vec();
    model.outputs = bus("q", bits);
    if carry_out {
        model.outputs.push("last".to_owned());
    }
    for i in 0..bits {
        let carry = if i == 0 {
            "enable".to_owned()
        } else {
            format!("c[{i}]")
        };
        let (q, sum) = (format!("q[{i}]"), format!("count[{i}]"));
        if i + 1 == bits && !carry_out {
            model.gate(Xor, &[&q, &carry], &sum);
        } else {
            let next = if i + 1 == bits {
                "last".to_owned()
            } else {
                format!("c[{}]", i + 1)
            };
            let pins = [
                ("a", q.clone()),
                ("b", carry),
                ("s", sum.clone()),
                ("cout", next),
            ];
            model.instance(&format!("ha_{i}"), "half_adder", pins);
        }
        let next = model.gate(And, &[&sum, "keep"], &format!("q_next[{i}]"));
        model.register(&next, &q);
    }
    model
}

/// Idle, running, done: two state bits.
fn sequencer() -> Model {
    let mut model = Model::new("sequencer");
    model.inputs = ["arm", "keep", "window_full"].map(str::to_owned).to_vec();
    model.outputs = ["ready", "busy", "done"].map(str::to_owned).to_vec();
    model.gate(Not, &["state[1]"], "open");
    model.gate(Nor, &["state[0]", "state[1]"], "ready");
    model.gate(And, &["state[0]", "open"], "busy");
    model.gate(And, &["state[0]", "state[1]"], "done");
    model.gate(Or, &["state[0]", "arm"], "started");
    model.gate(And, &["busy", "window_full"], "finish");
    model.gate(Or, &["state[1]", "finish"], "finished");
    model.gate(And, &["started", "keep"], "state_next[0]");
    model.gate(And, &["finished", "keep"], "state_next[1]");
    model.register("state_next[0]", "state[0]");
    model.register("state_next[1]", "state[1]");
    model
}

/// Adds a level to the one before with a lookahead adder (the pair's mean is the
/// sum read one bit higher), but takes it only when a serially checked frame is
/// sound: the parity chain is the longest path.
pub fn surge_filter() -> Circuit {
    let mut c = Circuit::new("surge_filter");
    let level = c.input_bus("level", 8);
    let frame = c.input_bus("frame", 28);
    let enable = c.input_bus("enable", 4);
    let held = c.register_bus("held", 8);
    let pair = c.register_bus("pair", 9);

    let mut odd = c.xor(frame[0], frame[1]);
    for (i, &bit) in frame.iter().enumerate().skip(2) {
        c.set_name(odd, &format!("parity[{}]", i - 1));
        odd = c.xor(odd, bit);
    }
    let sound = c.not(odd);
    c.set_name(odd, "frame_odd");
    let ready = c.gate(And, &enable);
    let accept = c.and(sound, ready);
    c.set_name(accept, "accept");
    let reject = c.not(accept);
    c.set_name(reject, "reject");

    let word = Word {
        architecture: Architecture::GroupLookahead(4),
        ..Word::new(Kind::Adder, 8, Cell::PropagateXor)
    };
    let added = word.place(&mut c, &held, &level, None);
    for (i, &sum) in added.sums.iter().enumerate() {
        c.set_name(sum, &format!("sum[{i}]"));
    }
    let carry = added.carry_out.expect("asked for");
    c.set_name(carry, "sum[8]");
    let whole: Vec<Net> = added.sums.iter().copied().chain([carry]).collect();
    let hold = |c: &mut Circuit, registers: &[Net], fresh: &[Net], name: &str| {
        let mut next = Vec::new();
        for (i, (&q, &new)) in registers.iter().zip(fresh).enumerate() {
            let (loaded, kept) = (c.and(accept, new), c.and(reject, q));
            let net = c.or(loaded, kept);
            c.set_name(net, &format!("{name}_next[{i}]"));
            next.push(net);
        }
        c.set_next(registers, &next);
    };
    hold(&mut c, &held, &level, "held");
    hold(&mut c, &pair, &whole, "pair");
    c.outputs = pair;
    c.output(accept, "accepted");
    c.drop_unread();
    c
}

/// `change = level - previous level`, and whether the water falls (the borrow).
pub fn tide_delta() -> Circuit {
    let mut model = Model::new("tide_delta");
    model.inputs = bus("level", 8);
    model.outputs = bus("change", 8);
    model.outputs.push("falling".to_owned());
    for i in 0..8 {
        model.register(&format!("level[{i}]"), &format!("previous[{i}]"));
    }
    model.gate(Xor, &["level[0]", "previous[0]"], "change[0]");
    model.gate(
        Function::Cover(&["01"]),
        &["level[0]", "previous[0]"],
        "borrow[1]",
    );
    for i in 1..8 {
        let next = if i == 7 {
            "falling".to_owned()
        } else {
            format!("borrow[{}]", i + 1)
        };
        let pins = [
            format!("level[{i}]"),
            format!("previous[{i}]"),
            format!("borrow[{i}]"),
        ];
        let pins: Vec<&str> = pins.iter().map(String::as_str).collect();
        model.gate(Xor, &pins, &format!("change[{i}]"));
        model.gate(Function::Cover(&["01-", "0-1", "-11"]), &pins, &next);
    }
    let design = Hierarchy {
        models: vec![model],
    };
    design.flatten()
}
