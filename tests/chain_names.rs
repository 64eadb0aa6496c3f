//! Names and fingerprints of chains: buses in their usual spellings (common
//! practice, no source), the same fingerprint for the same chain, duplicates.

mod generators;
#[path = "support/published.rs"]
mod published;

use carrywise::audit::record::{Audit, ChainRecord};
use carrywise::audit::{Options, Origin, audit, digest};
use carrywise::format::{ReadOptions, read};
use carrywise::source::Source;
use generators::{Cell, Circuit, Kind, Net, Word, rename, shuffle_gates};
use published::Published;

fn audited(text: &str) -> Audit {
    let source = Source {
        name: "names.blif".into(),
        bytes: text.as_bytes().to_vec(),
    };
    let parsed = read(&source, &ReadOptions::default()).expect("readable");
    let origin = Origin {
        file: "names.blif".into(),
        format: parsed.format,
        sha256: digest(text.as_bytes()),
    };
    audit(&parsed.netlist, &origin, &Options::default()).expect("audited")
}

fn adder(c: &mut Circuit, built: Published, a: &[Net], b: &[Net]) -> Vec<Net> {
    built.add(c, a, b, None).0
}

/// The one chain of an eight-bit ripple adder whose ports are named so.
fn named(a: impl Fn(usize) -> String, b: impl Fn(usize) -> String) -> ChainRecord {
    let mut c = Circuit::new("names");
    let a: Vec<Net> = (0..8).map(|i| c.input(&a(i))).collect();
    let b: Vec<Net> = (0..8).map(|i| c.input(&b(i))).collect();
    let sums = adder(&mut c, Published::Ripple, &a, &b);
    c.output_bus(&sums, "s");
    let mut chains = audited(&c.blif()).chains;
    assert_eq!(chains.len(), 1);
    chains.remove(0)
}

#[test]
fn buses_are_told_in_every_spelling() {
    type Spelling = (fn(usize) -> String, &'static str);
    let spellings: [Spelling; 14] = [
        (|i| format!("level[{i}]"), "level[7:0]"),
        (|i| format!("level<{i}>"), "level[7:0]"),
        (|i| format!("level({i})"), "level[7:0]"),
        (|i| format!("level_{i}"), "level[7:0]"),
        (|i| format!("level_{i}_"), "level[7:0]"),
        (|i| format!("level{i}"), "level[7:0]"),
        (|i| format!("level_reg[{i}]"), "level_reg[7:0]"),
        (|i| format!("level[{i}]_q"), "level[7:0]_q"),
        // Two dimensions, counted by either.
        (|i| format!("gauge[2][{i}]"), "gauge[2][7:0]"),
        (|i| format!("gauge[{i}][2]"), "gauge[7:0][2]"),
        // Ascending, and from another base.
        (|i| format!("level[{}]", 7 - i), "level[0:7]"),
        (|i| format!("level[{}]", i + 12), "level[19:12]"),
        // A gap, and no order at all.
        (
            |i| format!("level[{}]", if i < 4 { i } else { i + 2 }),
            "level[9:6,3:0]",
        ),
        (|i| format!("level[{}]", i * 3 % 8), "level[5]…level[0]"),
    ];
    for (spelling, name) in spellings {
        let chain = named(spelling, |i| format!("offset[{i}]"));
        let names: Vec<&str> = chain.operands.iter().map(|o| o.name.as_str()).collect();
        assert_eq!(names, [name, "offset[7:0]"]);
    }
}

#[test]
fn a_fingerprint_outlives_a_revision() {
    let make = |built, seed: u64| {
        let mut c = Circuit::new("logger");
        let level = c.input_bus("level", 12);
        let offset = c.input_bus("offset", 12);
        let enable = c.input("enable");
        let gated: Vec<Net> = level.iter().map(|&net| c.and(net, enable)).collect();
        // Two chains in series; the second adds inner nets only on one side.
        let first = adder(&mut c, built, &gated, &offset);
        let second = adder(&mut c, built, &first, &level);
        for (i, &net) in second.iter().enumerate() {
            c.output(net, &format!("total[{i}]"));
        }
        if seed > 0 {
            let kept: Vec<(Net, String)> = (c.inputs.iter().chain(&c.outputs))
                .map(|&net| (net, c.name_of(net)))
                .collect();
            rename(&mut c, seed);
            for (net, name) in kept {
                c.set_name(net, &name);
            }
            shuffle_gates(&mut c, seed);
        }
        let mut prints: Vec<String> = audited(&c.blif())
            .chains
            .into_iter()
            .map(|chain| chain.fingerprint)
            .collect();
        prints.sort_unstable();
        prints
    };
    let prints = make(Published::Ripple, 0);
    assert_eq!(prints.len(), 2);
    assert_ne!(prints[0], prints[1]);
    assert_eq!(make(Published::Ripple, 5), prints, "renamed and shuffled");
    assert_eq!(make(Published::BrentKung, 0), prints, "built another way");
    assert_eq!(make(Published::KoggeStone, 9), prints, "all of it");
}

#[test]
fn a_second_adder_of_the_same_words_is_a_duplicate() {
    for (one, other) in [
        (Published::Ripple, Published::Ripple),
        (Published::Ripple, Published::KoggeStone),
        (Published::BrentKung, Published::BrentKung),
    ] {
        let mut c = Circuit::new("logger");
        let (a, b) = (c.input_bus("level", 8), c.input_bus("offset", 8));
        for (built, name) in [(one, "shown"), (other, "alarm")] {
            let sums = adder(&mut c, built, &a, &b);
            c.output_bus(&sums, name);
        }
        let audit = audited(&c.blif());
        let told: Vec<(u64, Option<&str>)> = (audit.chains.iter())
            .map(|chain| (chain.bits, chain.duplicates.as_deref()))
            .collect();
        assert_eq!(told, [(8, None), (8, Some("C1"))], "{one:?}, {other:?}");
        let (first, second) = (&audit.chains[0], &audit.chains[1]);
        assert_ne!(first.fingerprint, second.fingerprint);
        let mut words = [&first.built_as.name, &second.built_as.name];
        words.sort_unstable();
        let mut wanted = [one.word(), other.word()];
        wanted.sort_unstable();
        assert_eq!(words, wanted);
        let found = audit
            .findings
            .iter()
            .filter(|f| f.rule == "duplicate-chain");
        let chains: Vec<Option<&str>> = found.map(|f| f.chain.as_deref()).collect();
        assert_eq!(chains, [Some("C2")]);
    }
}

#[test]
fn sums_with_another_carry_in_are_no_duplicate() {
    let mut c = Circuit::new("logger");
    let (a, b) = (c.input_bus("level", 8), c.input_bus("offset", 8));
    let sums = adder(&mut c, Published::Ripple, &a, &b);
    c.output_bus(&sums, "s");
    let word = Word {
        carry_in: true,
        ..Word::new(Kind::Adder, 8, Cell::PropagateXor)
    };
    let cin = c.input("extra");
    let truth = word.place(&mut c, &a, &b, Some(cin));
    c.output_bus(&truth.sums, "t");
    let audit = audited(&c.blif());
    assert_eq!(audit.chains.len(), 2);
    assert!(audit.chains.iter().all(|chain| chain.duplicates.is_none()));
}

#[test]
fn feedback_and_taps_are_told() {
    let mut c = Circuit::new("logger");
    let level = c.input_bus("level", 8);
    let total: Vec<Net> = (0..8)
        .map(|i| c.register(&format!("total[{i}]"), None))
        .collect();
    let built = Word::new(Kind::Adder, 8, Cell::PropagateXor);
    let truth = built.place(&mut c, &total, &level, None);
    c.set_next(&total, &truth.sums);
    c.output_bus(&total, "shown");
    let audit = audited(&c.blif());
    let chain = &audit.chains[0];
    let feedback = chain.feedback.as_ref().expect("it accumulates");
    assert_eq!(feedback.role, "accumulator");
    assert_eq!(feedback.registers.len(), 8);
    assert!(chain.carry_taps.is_empty());
}
