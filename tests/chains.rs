//! Recognition against circuits of known content: every kind of word, cell and
//! embedding, at gate level and as AND/inverter graphs.
//!
//! The truth comes from the generators, which check it against integer
//! arithmetic and know nothing of the crate. What is reported is checked again
//! by simulating the netlist as read: a chain is a theorem, so one pattern that
//! breaks it is a fault.

mod generators;
#[path = "support/recognition.rs"]
mod recognition;

use carrywise::chain::{BuiltAs, Chain, Found, Kind, Options, Position, find};
use carrywise::netlist::{Bit, Netlist, Topology};
use generators::{
    Aig, Architecture, Cell, Extension, Generated, Random, Truth, Word, accumulator,
    adder_subtractor, counter, disguise, gated_operands, negatives, selected_sums, series_adders,
    with_overflow,
};
use recognition::*;
use std::collections::{BTreeMap, BTreeSet};

fn kind_word(kind: generators::Kind) -> &'static str {
    match kind {
        generators::Kind::Adder => "adder",
        generators::Kind::Subtractor => "subtractor",
        generators::Kind::Incrementer => "incrementer",
        generators::Kind::Decrementer => "decrementer",
    }
}

/// What recognition owes to one truth: the full width, the kind, the sums in
/// order, the operands, and `ripple` where it was built so.
fn shortfall(
    generated: &Generated,
    truth: &Truth,
    netlist: &Netlist,
    found: &Found,
) -> Option<String> {
    let wanted: Vec<String> = generated.names(&truth.sums);
    let sum_names = |chain: &Chain, i: usize| -> BTreeSet<String> {
        chain.positions[i]
            .sums
            .iter()
            .map(|s| netlist.net_name(s.net))
            .collect()
    };
    let covers = |chain: &&Chain| {
        chain.positions.len() == wanted.len()
            && (0..wanted.len()).all(|i| sum_names(chain, i).contains(&wanted[i]))
    };
    let Some(chain) = found.chains.iter().find(covers) else {
        let seen: Vec<String> = found
            .chains
            .iter()
            .map(|c| {
                format!(
                    "{} of {} bits, carry-in {:?}",
                    c.kind.word(),
                    c.positions.len(),
                    c.carry_in
                )
            })
            .collect();
        return Some(format!("not found at full width; found {seen:?}"));
    };
    if chain.kind.word() != expected_word(generated, truth) {
        return Some(format!("told as {}", chain.kind.word()));
    }
    // Operands are compared by function, up to complement: a net and its
    // inverter are equally good names.
    let values = simulated(netlist, 3);
    let normal = |word: u64| if word & 1 == 1 { !word } else { word };
    let told = |pick: fn(&Position) -> Bit, mode: u64| -> Vec<u64> {
        let bits = chain.positions.iter().map(|p| pick(p).signal());
        bits.map(|s| s.map_or(0, |s| normal(values[s.net.index()] ^ mode)))
            .collect()
    };
    let mode = chain.mode.map_or(0, |mode| values[mode.net.index()]);
    let by_name: BTreeMap<String, u64> = netlist
        .nets()
        .map(|net| (netlist.net_name(net), values[net.index()]))
        .collect();
    let known = |nets: &[generators::Net]| -> Vec<u64> {
        let mut words: Vec<u64> = generated
            .names(nets)
            .iter()
            .map(|name| normal(by_name[name]))
            .collect();
        words.resize(wanted.len(), 0);
        words
    };
    let (a, b) = (told(|p| p.a, 0), told(|p| p.b, mode));
    let (x, y) = (known(&truth.a), known(&truth.b));
    let is_swapped = chain.kind == Kind::Adder && a == y && b == x;
    if !(a == x && b == y || is_swapped) {
        return Some(format!("operands {:?}", chain.positions));
    }
    let ripple = matches!(truth.architecture, Architecture::Ripple(_));
    if ripple != (chain.built_as == BuiltAs::Ripple) {
        return Some(format!("told as built {:?}", chain.built_as));
    }
    if truth.carry_out.is_some() && !chain.has_carry_out {
        return Some("the carry-out is missing".into());
    }
    None
}

/// The word the chain of a truth is told as.
fn expected_word(generated: &Generated, truth: &Truth) -> &'static str {
    if generated.label.contains("adder-subtractor") {
        return "adder-subtractor";
    }
    kind_word(truth.kind)
}

/// Recognises `generated` in BLIF and returns what falls short.
fn shortfalls(generated: &Generated) -> Vec<String> {
    let netlist = parse(&generated.label, generated.circuit.blif().into_bytes());
    let found = recognise(&netlist);
    check_theorems(&generated.label, &netlist, &found.chains);
    generated
        .truths
        .iter()
        .filter_map(|truth| shortfall(generated, truth, &netlist, &found))
        .map(|fault| format!("{}: {fault}", generated.label))
        .collect()
}

/// Recognises `generated` as an AND/inverter graph. Inner nets have no names
/// there, so widths and kinds are compared.
fn shortfalls_as_graph(generated: &Generated) -> Vec<String> {
    let bytes = Aig::of(&generated.circuit).aig();
    let netlist = parse(&generated.label, bytes);
    let found = recognise(&netlist);
    check_theorems(&generated.label, &netlist, &found.chains);
    let mut open: Vec<(&str, usize)> = found
        .chains
        .iter()
        .map(|c| (c.kind.word(), c.positions.len()))
        .collect();
    let mut faults = Vec::new();
    for truth in &generated.truths {
        // The lowest sum of a counter is an inverter: on an edge of the graph it
        // is no net, and without names nothing tells the bit from an enable.
        let word = expected_word(generated, truth);
        let edge = truth.b.is_empty() && truth.carry_in.is_none();
        let fits = |&(kind, bits): &(&str, usize)| {
            kind == word && (bits == truth.bits() || edge && bits + 1 == truth.bits())
        };
        match open.iter().position(fits) {
            Some(at) => drop(open.remove(at)),
            None => faults.push(format!(
                "{} as AND/inverters: found {:?}",
                generated.label, open
            )),
        }
    }
    faults
}

fn report(faults: &[String], of: usize) {
    assert!(
        faults.is_empty(),
        "{} of {of} fall short:\n{}",
        faults.len(),
        faults.join("\n")
    );
}

#[test]
fn finds_every_ripple_word_in_every_cell() {
    let mut faults = Vec::new();
    let mut count = 0;
    for bits in [4, 5, 8, 16, 33] {
        for word in Word::every_ripple(bits) {
            let generated = word.generate();
            faults.extend(shortfalls(&generated));
            faults.extend(shortfalls_as_graph(&generated));
            count += 2;
        }
    }
    report(&faults, count);
}

/// Both forms of every circuit, and the first once more with meaningless names,
/// shuffled ports and shuffled gates.
fn check_all(circuits: Vec<Generated>) {
    let mut faults = Vec::new();
    let mut count = 0;
    for generated in circuits {
        faults.extend(shortfalls(&generated));
        faults.extend(shortfalls_as_graph(&generated));
        let mut hidden = generated.clone();
        disguise(&mut hidden.circuit, 11);
        hidden.label = format!("disguised {}", generated.label);
        faults.extend(shortfalls_as_graph(&hidden));
        count += 3;
    }
    report(&faults, count);
}

#[test]
fn finds_words_whose_operands_are_inner_nets() {
    let mut circuits = Vec::new();
    for cell in Cell::ALL {
        for kind in [generators::Kind::Adder, generators::Kind::Subtractor] {
            circuits.push(gated_operands(Word::new(kind, 12, cell)));
        }
        circuits.push(adder_subtractor(12, cell));
        circuits.push(series_adders(10, 4, cell));
    }
    check_all(circuits);
}

#[test]
fn finds_words_whose_sums_feed_other_logic() {
    let mut circuits = Vec::new();
    for cell in Cell::ALL {
        for kind in [
            generators::Kind::Adder,
            generators::Kind::Subtractor,
            generators::Kind::Incrementer,
            generators::Kind::Decrementer,
        ] {
            circuits.push(selected_sums(Word::new(kind, 12, cell)));
        }
        circuits.push(with_overflow(12, cell));
    }
    check_all(circuits);
}

#[test]
fn finds_accumulators_and_counters() {
    let mut circuits = Vec::new();
    for cell in Cell::ALL {
        circuits.push(accumulator(24, 16, Extension::Zero, cell));
        circuits.push(accumulator(24, 16, Extension::Sign, cell));
        circuits.push(counter(12, false, cell));
        circuits.push(counter(12, true, cell));
        circuits.push(counter(40, false, cell));
    }
    check_all(circuits);
}

#[test]
fn finds_words_whatever_their_names_and_order() {
    check_all(Word::every_ripple(16).iter().map(Word::generate).collect());
}

#[test]
fn finds_lookahead_prefix_skip_and_select_adders_and_does_not_call_them_ripple() {
    let mut circuits = Vec::new();
    // Of eight bits a skip adder without carry-in and carry-out has no block to
    // skip, and is a ripple.
    for bits in [12, 16, 32] {
        let fast = Word::every_fast(bits).into_iter();
        circuits.extend(fast.map(|word| word.generate()));
    }
    check_all(circuits);
}

#[test]
fn lists_what_the_effort_did_not_settle_once_and_as_unproven() {
    let generated = Word::new(generators::Kind::Adder, 16, Cell::Nand).generate();
    let netlist = parse(&generated.label, generated.circuit.blif().into_bytes());
    let options = Options {
        effort: 0,
        ..Options::default()
    };
    let found = find(&netlist, &Topology::of(&netlist), options);
    assert_eq!(found.chains, []);
    let [open] = &found.unproven[..] else {
        panic!("{:?}", found.unproven)
    };
    assert_eq!((open.bits, open.operands.len()), (16, 16));
}

#[test]
fn finds_nothing_where_no_word_is() {
    for circuit in negatives::all() {
        for seed in [None, Some(5)] {
            let mut circuit = circuit.clone();
            if let Some(seed) = seed {
                disguise(&mut circuit, seed);
            }
            for bytes in [circuit.blif().into_bytes(), Aig::of(&circuit).aig()] {
                let found = recognise(&parse("negative", bytes));
                assert_eq!(found.chains, [], "{}", circuit.blif());
                assert_eq!(found.unproven, []);
            }
        }
    }
}

#[test]
fn reports_every_fixture_the_same_in_all_its_forms() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures");
    let seen = |name: &str| -> Vec<(&'static str, usize, BuiltAs)> {
        let bytes = std::fs::read(folder.join(name)).expect("the fixture is there");
        let netlist = parse(name, bytes);
        let found = recognise(&netlist);
        check_theorems(name, &netlist, &found.chains);
        let mut seen: Vec<_> = found
            .chains
            .iter()
            .map(|c| (c.kind.word(), c.positions.len(), c.built_as))
            .collect();
        seen.sort_by_key(|&(kind, bits, _)| (kind, bits));
        seen
    };
    let flat = seen("tide_logger.blif");
    // What the generator of the fixture puts in (tests/generators/gauge.rs): the
    // running total, the alarm's threshold, the sample divider and the sample
    // counter.
    assert_eq!(
        flat,
        [
            ("adder", 24, BuiltAs::Ripple),
            ("comparator", 16, BuiltAs::Ripple),
            ("incrementer", 6, BuiltAs::Ripple),
            ("incrementer", 12, BuiltAs::Ripple),
        ]
    );
    for other in [
        "tide_logger_hier.blif",
        "tide_logger.aag",
        "tide_logger.aig",
    ] {
        assert_eq!(seen(other), flat, "{other}");
    }
    assert_eq!(
        seen("tide_delta.blif"),
        [("subtractor", 8, BuiltAs::Ripple)]
    );
    assert_eq!(
        seen("surge_filter.blif"),
        [("adder", 8, BuiltAs::Lookahead)]
    );
}

/// Gates that make accidental carries likely: exclusive ors and majorities of
/// recent nets, inverters, and covers of four inputs around one of them.
fn soup(seed: u64, gates: usize) -> String {
    let mut random = Random::new(seed);
    let mut text = String::from(".model soup\n.inputs");
    let mut nets: Vec<String> = (0..12).map(|i| format!("x{i}")).collect();
    for net in &nets {
        text.push_str(&format!(" {net}"));
    }
    text.push_str("\n.outputs y\n");
    for g in 0..gates {
        let mut pick = || {
            let recent = nets.len().min(20);
            nets[nets.len() - 1 - random.below(recent)].clone()
        };
        let (a, b, c, d) = (pick(), pick(), pick(), pick());
        let out = if g + 1 == gates {
            "y".to_owned()
        } else {
            format!("n{g}")
        };
        text.push_str(&match random.below(6) {
            0 | 1 => format!(".names {a} {b} {out}\n01 1\n10 1\n"),
            2 => format!(".names {a} {b} {c} {out}\n11- 1\n1-1 1\n-11 1\n"),
            3 => format!(".names {a} {b} {c} {out}\n100 1\n010 1\n001 1\n111 1\n"),
            4 => format!(".names {a} {b} {c} {d} {out}\n1-00 1\n01-1 1\n-011 1\n"),
            _ => format!(".names {a} {b} {out}\n11 1\n"),
        });
        nets.push(out);
    }
    text.push_str(".end\n");
    text
}

#[test]
fn reports_nothing_false_about_accidental_carries() {
    let mut reported = 0;
    for seed in 0..400 {
        let text = soup(seed, 150);
        let netlist = parse("soup", text.clone().into_bytes());
        let options = Options {
            min_bits: 2,
            ..Options::default()
        };
        let found = find(&netlist, &Topology::of(&netlist), options);
        check_theorems(&format!("soup {seed}"), &netlist, &found.chains);
        reported += found.chains.len();
    }
    // The soup is thick enough for the check to mean something.
    assert!(
        reported > 100,
        "only {reported} chains of two bits and more"
    );
}

#[test]
fn finds_an_adder_subtractor_whose_covers_swallow_the_mode() {
    // As four-input tables have it (common practice, no source): no net carries
    // `b ⊕ sub`, and the carry-in is the mode itself.
    let bits = 12;
    let mut text = String::from(".model mapped\n.inputs sub");
    (0..bits).for_each(|i| text += &format!(" a{i} b{i}"));
    text += "\n.outputs cout";
    (0..bits).for_each(|i| text += &format!(" s{i}"));
    let mut cover = |output: &str, pins: &str, function: fn(u32) -> bool| {
        text += &format!("\n.names {pins} {output}");
        for row in 0..16u32 {
            let [a, b, sub, carry] = [0, 1, 2, 3].map(|pin| row >> pin & 1);
            if function(a + (b ^ sub) + carry) {
                text += &format!("\n{a}{b}{sub}{carry} 1");
            }
        }
    };
    for i in 0..bits {
        let carry = if i == 0 {
            "sub".to_owned()
        } else {
            format!("c{i}")
        };
        let pins = format!("a{i} b{i} sub {carry}");
        let out = if i + 1 == bits {
            "cout".to_owned()
        } else {
            format!("c{}", i + 1)
        };
        cover(&format!("s{i}"), &pins, |total| total % 2 == 1);
        cover(&out, &pins, |total| total >= 2);
    }
    text += "\n.end\n";
    let netlist = parse("mapped", text.into_bytes());
    let found = recognise(&netlist);
    check_theorems("mapped", &netlist, &found.chains);
    let [chain] = &found.chains[..] else {
        panic!("{:?}", found.chains);
    };
    assert_eq!(
        (chain.kind, chain.positions.len()),
        (Kind::AdderSubtractor, bits)
    );
    let mode = chain.mode.expect("it has one");
    assert_eq!(netlist.signal_name(mode), "sub");
    assert_eq!(chain.carry_in, Bit::Signal(mode));
}
