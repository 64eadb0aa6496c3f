//! What the audit says when it could not see, and of registers that do not stop
//! a path.
//!
//! Sources outside the project: BLIF's register types (`re`, `ah`, `al`, `as`) as
//! published; a level-sensitive register passes its input while open (common
//! practice, no source); levels of a Kogge–Stone network (Kogge and Stone 1973).

#[path = "support/reading.rs"]
mod reading;

use carrywise::audit::record::{Audit, Finding, Limit, Severity};
use carrywise::audit::{self, Options, Origin};
use carrywise::netlist::{Initial, Trigger};
use carrywise::timing::Time;
use reading::accept;
use std::fmt::Write;

fn audited(blif: &str) -> Audit {
    let parsed = accept("test.blif", blif);
    let origin = Origin {
        file: "test.blif".to_owned(),
        format: parsed.format,
        sha256: String::new(),
    };
    audit::audit(&parsed.netlist, &origin, &Options::default()).expect("the defaults fit")
}

fn of_rule<'a>(audit: &'a Audit, rule: &str) -> Vec<&'a str> {
    let findings = audit.findings.iter().filter(|f| f.rule == rule);
    findings.map(|f| f.message.as_str()).collect()
}

/// A ripple adder of `bits` bits, its gates only.
fn adder(bits: usize) -> String {
    let mut text = String::new();
    for i in 0..bits {
        let _ = writeln!(
            text,
            ".names a[{i}] b[{i}] c{i} s[{i}]\n100 1\n010 1\n001 1\n111 1\n\
             .names a[{i}] b[{i}] c{i} c{}\n11- 1\n1-1 1\n-11 1",
            i + 1
        );
    }
    text
}

fn bus(name: &str, bits: usize) -> String {
    (0..bits).fold(String::new(), |mut text, i| {
        let _ = write!(text, " {name}[{i}]");
        text
    })
}

#[test]
fn a_netlist_only_of_unknown_cells_is_unknown_and_says_so() {
    // An eight-bit ripple adder of full-adder cells nobody gave a function, and a
    // buffer cell at its end.
    let mut blif = format!(
        ".model adder8\n.inputs{}{} c0\n.outputs{} co\n",
        bus("a", 8),
        bus("b", 8),
        bus("s", 8)
    );
    for i in 0..8 {
        let _ = writeln!(
            blif,
            ".gate sum_cell A=a[{i}] B=b[{i}] CI=c{i} S=s[{i}] CO=c{}",
            i + 1
        );
    }
    blif.push_str(".gate BUF2 A=c8 Z=co\n.end\n");
    let audit = audited(&blif);
    assert_eq!(audit.verdict.limit, Limit::Unknown);
    assert_eq!(
        audit.verdict.sentence,
        "Unknown, because not one of the 9 instances has a known function (8 sum_cell and 1 BUF2): \
         no path could be followed and no chain looked for."
    );
    assert_eq!(audit.seen.gates_with_function, 0);
    assert_eq!(audit.seen.gates_without_function, 9);
    assert_eq!(of_rule(&audit, "cell-without-function").len(), 9);
}

#[test]
fn one_unknown_cell_in_any_place_leaves_the_verdict_unknown() {
    for extra in [
        // On a way from an input to an output.
        ".subckt gauge_filter in=s[3] out=tap\n",
        // A source and a sink: what is inside nobody knows.
        ".subckt noise_source out=tap\n",
        ".names a[0] tap\n1 1\n.subckt probe in=s[5]\n",
    ] {
        let blif = format!(
            ".model m\n.inputs{}{} c0\n.outputs{} tap\n{}{extra}.end\n",
            bus("a", 6),
            bus("b", 6),
            bus("s", 6),
            adder(6)
        );
        let audit = audited(&blif);
        assert_eq!(audit.verdict.limit, Limit::Unknown, "{extra}");
        let named = extra
            .split_whitespace()
            .skip_while(|word| *word != ".subckt");
        let model = named.clone().nth(1).expect("a model");
        let sentence = &audit.verdict.sentence;
        assert!(sentence.contains(&format!("({model})")), "{sentence}");
        assert!(sentence.contains("carry limits this block"), "{sentence}");
    }
}

#[test]
fn a_net_without_driver_that_reaches_an_end_leaves_it_unknown() {
    let text = |ghost: &str| {
        format!(
            ".model m\n.inputs{}{} c0\n.outputs{} tap\n{}.names a[0] {ghost} tap\n11 1\n.end\n",
            bus("a", 6),
            bus("b", 6),
            bus("s", 6),
            adder(6)
        )
    };
    let audit = audited(&text("ghost"));
    assert_eq!(audit.verdict.limit, Limit::Unknown);
    let sentence = &audit.verdict.sentence;
    assert!(
        sentence.contains(
            "a net with no driver is cut (ghost; it matters if settled after 5 gate delays)"
        ),
        "{sentence}"
    );
    assert_eq!(audited(&text("b[0]")).verdict.limit, Limit::Carry);
}

#[test]
fn an_output_that_nothing_drives_is_a_finding_and_hides_no_path() {
    // No gate stands behind it, so no path of the file is told too short.
    let text = format!(
        ".model m\n.inputs{}{} c0\n.outputs{} lost kept\n{}.latch gone kept 0\n.end\n",
        bus("a", 6),
        bus("b", 6),
        bus("s", 6),
        adder(6)
    );
    let audit = audited(&text);
    assert_eq!(
        audit.verdict.limit,
        Limit::Carry,
        "{}",
        audit.verdict.sentence
    );
    assert_eq!(audit.seen.nets_cut, 2);
    assert_eq!(
        of_rule(&audit, "net-without-driver"),
        [
            "lost is read, and nothing drives it",
            "gone is read, and nothing drives it"
        ]
    );
}

/// An eight-bit Kogge–Stone adder of instances whose outputs are wired back onto
/// the nets they read, as when a generator forgot to number its levels.
fn redriven_prefix_adder() -> String {
    let mut blif = format!(
        ".model adder\n.inputs{}{}\n.outputs{}\n",
        bus("a", 8),
        bus("b", 8),
        bus("s", 8)
    );
    for i in 0..8 {
        let _ = writeln!(
            blif,
            ".names a[{i}] b[{i}] g[{i}]\n11 1\n.names a[{i}] b[{i}] p[{i}]\n10 1\n01 1\n\
             .names a[{i}] b[{i}] x[{i}]\n10 1\n01 1"
        );
    }
    for step in [1, 2, 4] {
        for i in (step..8).rev() {
            let low = i - step;
            let _ = writeln!(
                blif,
                ".subckt span gh=g[{i}] ph=p[{i}] gl=g[{low}] pl=p[{low}] g=g[{i}] p=p[{i}]"
            );
        }
    }
    blif.push_str(".names x[0] s[0]\n1 1\n");
    for i in 1..8 {
        let _ = writeln!(blif, ".names x[{i}] g[{}] s[{i}]\n10 1\n01 1", i - 1);
    }
    blif.push_str(
        ".end\n.model span\n.inputs gh ph gl pl\n.outputs g p\n.names gh ph gl g\n1-- 1\n-11 1\n\
         .names ph pl p\n11 1\n.end\n",
    );
    blif
}

#[test]
fn a_prefix_adder_whose_cells_drive_their_own_inputs_is_unknown() {
    let audit = audited(&redriven_prefix_adder());
    assert_eq!(audit.verdict.limit, Limit::Unknown);
    let sentence = &audit.verdict.sentence;
    assert!(
        sentence.starts_with("Unknown, because 14 nets with several drivers are cut"),
        "{sentence}"
    );
    assert!(sentence.contains("g[1]"), "{sentence}");
    // g[1] is made by one gate and one instance, g[4] by three instances besides.
    let twice = of_rule(&audit, "net-driven-twice");
    assert!(
        twice.contains(&"g[1] has 2 drivers, at lines 12 and 112 in span_7"),
        "{twice:?}"
    );
    assert!(
        twice
            .iter()
            .any(|message| message.starts_with("g[4] has 4 drivers"))
    );
    // All of g and p but the lowest bits.
    assert_eq!(twice.len(), 14);
    let severe = |f: &&Finding| f.severity == Severity::Error;
    assert!(audit.findings.iter().filter(severe).count() >= 14);
    assert_eq!(audit.seen.nets_cut, 14);
    assert!(
        audit.chains.is_empty(),
        "nothing is claimed of what was cut"
    );
    // The same with its levels numbered is an adder, and the verdict is certain.
    let whole = audited(&numbered());
    assert_eq!(
        whole.verdict.limit,
        Limit::Carry,
        "{}",
        whole.verdict.sentence
    );
    assert_eq!(
        (whole.chains[0].kind.as_str(), whole.chains[0].bits),
        ("adder", 8)
    );
}

/// The same adder as it was meant.
fn numbered() -> String {
    let mut level = [0; 8];
    redriven_prefix_adder()
        .lines()
        .map(|line| {
            let mut line = line.to_owned();
            if line.starts_with(".subckt") {
                let bit = |line: &str, key: &str| -> usize {
                    let at = line.find(key).expect("the pin") + key.len();
                    line[at..]
                        .chars()
                        .take_while(char::is_ascii_digit)
                        .collect::<String>()
                        .parse()
                        .expect("a bit")
                };
                let (high, low) = (bit(&line, "gh=g["), bit(&line, "gl=g["));
                let own = |i: usize, level: usize| format!("[{i}]_{level}");
                line = format!(
                    ".subckt span gh=g{h} ph=p{h} gl=g{l} pl=p{l} g=g{o} p=p{o}",
                    h = own(high, level[high]),
                    l = own(low, level[low]),
                    o = own(high, level[high] + 1)
                );
                level[high] += 1;
            } else if line.starts_with(".names a[") {
                line = line.replace(" g[", " g@[").replace(" p[", " p@[");
                if line.contains('@') {
                    line = format!("{}_0", line.replace('@', ""));
                }
            } else if line.starts_with(".names x[") && line.contains(" g[") {
                let start = line.find(" g[").expect("the carry");
                let end = start + line[start..].find(']').expect("its bit");
                let bit: usize = line[start + 3..end].parse().expect("a bit");
                line.insert_str(end + 1, &format!("_{}", level[bit]));
            }
            line + "\n"
        })
        .collect()
}

#[test]
fn open_registers_are_told_and_their_paths_noted() {
    // Two halves of a chain of gates with a register between them.
    let text = |kind: &str| {
        let mut blif = String::from(".model m\n.inputs d en\n.outputs y\n.names d n0\n0 1\n");
        for i in 1..6 {
            let _ = writeln!(blif, ".names n{} n{i}\n0 1", i - 1);
        }
        let _ = writeln!(blif, ".latch n5 q {kind} 0\n.names q m0\n0 1");
        for i in 1..4 {
            let _ = writeln!(blif, ".names m{} m{i}\n0 1", i - 1);
        }
        blif.push_str(".names m3 y\n1 1\n.end\n");
        blif
    };
    let edge = audited(&text("re en"));
    assert_eq!(edge.verdict.limit, Limit::Elsewhere);
    assert_eq!(
        (edge.depth.longest, edge.depth.longest_through_transparent),
        (Time::whole(6), None)
    );
    assert!(of_rule(&edge, "transparent-register").is_empty());
    for (kind, told) in [
        ("ah en", "the register q passes its input on while en is 1"),
        ("al en", "the register q passes its input on while en is 0"),
        ("as NIL", "the register q passes its input on at any time"),
    ] {
        let open = audited(&text(kind));
        assert_eq!(open.verdict.limit, Limit::Unknown, "{kind}");
        // Six gates, the open register, five gates.
        assert_eq!(
            open.depth.longest_through_transparent,
            Some(Time::whole(12))
        );
        assert_eq!(open.depth.longest, 6);
        let sentence = &open.verdict.sentence;
        let hint = "paths may run on through 1 transparent register (q), and then take up to 12 \
                    gate delays";
        assert!(sentence.contains(hint), "{sentence}");
        assert_eq!(of_rule(&open, "transparent-register"), [told]);
    }
}

#[test]
fn open_registers_that_lengthen_nothing_leave_the_verdict_certain() {
    // A held operand: the register stands at the inputs of the adder.
    let mut blif = format!(
        ".model m\n.inputs{} en c0{}\n.outputs{}\n",
        bus("d", 6),
        bus("b", 6),
        bus("s", 6)
    );
    for i in 0..6 {
        let _ = writeln!(blif, ".latch d[{i}] a[{i}] re en 0");
    }
    let certain = audited(&format!("{blif}{}.end\n", adder(6)));
    assert_eq!(certain.verdict.limit, Limit::Carry);
    // Open, each adds one gate before the adder.
    let open = audited(&format!("{blif}{}.end\n", adder(6)).replace(" re en", " ah en"));
    assert_eq!(open.verdict.limit, Limit::Unknown);
    assert_eq!(
        open.depth.longest_through_transparent,
        Some(open.depth.longest + Time::whole(1))
    );
    // At the outputs they add nothing to any path.
    let mut late = format!(
        ".model m\n.inputs{}{} c0 en\n.outputs q{}\n",
        bus("a", 6),
        bus("b", 6),
        bus("s", 6)
    );
    late.push_str(&adder(6));
    late.push_str(".latch s[0] q ah en 0\n.end\n");
    let audit = audited(&late);
    assert_eq!(
        audit.verdict.limit,
        Limit::Carry,
        "{}",
        audit.verdict.sentence
    );
}

#[test]
fn a_loop_through_open_registers_does_not_stop_the_audit() {
    let blif = ".model m\n.inputs en\n.outputs q\n.names q d\n0 1\n.latch d q ah en 0\n.end\n";
    let audit = audited(blif);
    assert_eq!(audit.depth.longest, 1);
    assert!(audit.depth.longest_through_transparent.is_some());
}

#[test]
fn register_types_clocks_and_initial_values_are_kept() {
    let blif = ".model m\n.inputs d clk en\n.outputs a b c\n.latch d a re clk 1\n\
                .latch d b al en 2\n.latch d c 0\n.end\n";
    let netlist = accept("m.blif", blif).netlist;
    let kept: Vec<_> = netlist
        .registers()
        .iter()
        .map(|r| {
            (
                r.trigger,
                r.control.map(|net| netlist.net_name(net)),
                r.initial,
            )
        })
        .collect();
    assert_eq!(
        kept,
        [
            (Trigger::RisingEdge, Some("clk".to_owned()), Initial::One),
            (Trigger::ActiveLow, Some("en".to_owned()), Initial::Any),
            (Trigger::Unstated, None, Initial::Zero),
        ]
    );
}

#[test]
fn controls_of_registers_are_ends_of_paths() {
    let blif = ".model m\n.inputs d x y z\n.outputs q\n.names x y n1\n11 1\n.names n1 z n2\n11 1\n\
                .names n2 gated\n0 1\n.latch d q re gated 0\n.end\n";
    let audit = audited(blif);
    assert_eq!(audit.depth.longest, 3);
    assert_eq!(audit.verdict.by_path_kind[0].path_kind, "input→register");
    let last = audit.depth.longest_path.last().expect("a path");
    assert_eq!(last.gate, "controls register");
}

#[test]
fn every_kind_of_path_has_its_own_limit() {
    // Inputs reach the sums through the adder, the register through a few gates.
    let mut blif = format!(
        ".model m\n.inputs{}{} c0 d\n.outputs{} y\n",
        bus("a", 6),
        bus("b", 6),
        bus("s", 6)
    );
    blif.push_str(&adder(6));
    blif.push_str(".names d n\n0 1\n.latch n q re NIL 0\n.names q y\n0 1\n.end\n");
    let audit = audited(&blif);
    let kinds: Vec<_> = audit
        .verdict
        .by_path_kind
        .iter()
        .map(|kind| (kind.path_kind.as_str(), kind.limit, kind.chain.as_deref()))
        .collect();
    assert_eq!(
        kinds,
        [
            ("input→output", Limit::Carry, Some("C1")),
            ("input→register", Limit::Elsewhere, None),
            ("register→output", Limit::Elsewhere, None),
        ]
    );
}
