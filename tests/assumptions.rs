//! Assumptions: the file, and the netlist and figures under it.
//!
//! Sources outside the project: petgraph's enumeration of simple paths, for what
//! excluded paths leave; the truth table of a two-way multiplexer (common
//! practice, no source); YAML 1.2 for the text of the file.

#[path = "support/reading.rs"]
mod reading;

use carrywise::audit::record::{Audit, Limit};
use carrywise::audit::{self, Asserting, AuditError, Options, Origin};
use carrywise::format::assumptions::{self, AssumptionsFile};
use carrywise::netlist::assume::{Cycles, Misfit, NotAPath, Paths, PortTime, Tied};
use carrywise::netlist::{
    Assumptions, Driver, NetGraph, NetId, Netlist, Pattern, Readers, Topology,
};
use carrywise::source::Source;
use carrywise::timing::{DelayModel, Time, Timing};
use reading::accept;
use std::collections::hash_map::RandomState;
use std::fmt::Write;

fn text(yaml: &str) -> Source {
    Source {
        name: "assume.yaml".to_owned(),
        bytes: yaml.as_bytes().to_vec(),
    }
}

fn file(yaml: &str) -> AssumptionsFile {
    assumptions::read(text(yaml)).unwrap_or_else(|error| panic!("{error}"))
}

fn refused(yaml: &str) -> String {
    match assumptions::read(text(yaml)) {
        Ok(_) => panic!("read: {yaml}"),
        Err(error) => error.to_string(),
    }
}

fn under(netlist: &Netlist, yaml: &str) -> Result<Audit, String> {
    let file = file(yaml);
    let origin = Origin {
        file: "test.blif".to_owned(),
        format: carrywise::format::Format::Blif,
        sha256: String::new(),
    };
    let asserting = Asserting {
        assumptions: &file.assumptions,
        sha256: audit::digest(&file.source().bytes),
    };
    audit::audit_under(netlist, &origin, &Options::default(), Some(&asserting)).map_err(|error| {
        match error {
            AuditError::Misfit(misfit) => file.misfit(&misfit, "test.blif").to_string(),
            AuditError::Settings(other) => panic!("{other}"),
        }
    })
}

/// An 8-bit ripple adder whose operand `b` passes a multiplexer: the level, or in
/// test mode a pattern at the end of `steps` inverters.
fn with_test_mode(steps: usize) -> Netlist {
    let mut blif = String::from(".model logger\n.inputs test_mode seed");
    for i in 0..8 {
        let _ = write!(blif, " a[{i}] b[{i}]");
    }
    blif.push_str("\n.outputs");
    for i in 0..8 {
        let _ = write!(blif, " s[{i}]");
    }
    blif.push_str(" co\n.names seed t0\n0 1\n");
    for i in 1..steps {
        let _ = writeln!(blif, ".names t{} t{i}\n0 1", i - 1);
    }
    for i in 0..8 {
        let _ = writeln!(
            blif,
            ".names test_mode b[{i}] t{} m{i}\n01- 1\n1-1 1",
            steps - 1
        );
    }
    blif.push_str(".names c0\n");
    for i in 0..8 {
        let _ = writeln!(
            blif,
            ".names a[{i}] m{i} p{i}\n10 1\n01 1\n.names p{i} c{i} s[{i}]\n10 1\n01 1\n\
             .names a[{i}] m{i} c{i} c{}\n11- 1\n1-1 1\n-11 1",
            i + 1
        );
    }
    blif.push_str(".names c8 co\n1 1\n.end\n");
    accept("test.blif", blif).netlist
}

const OFF: &str = "tied: {test_mode: {value: 0, why: off in the field}}\n";

#[test]
fn a_tied_test_mode_takes_its_multiplexer_leg_off_the_longest_path() {
    let netlist = with_test_mode(30);
    // 30 inverters, the multiplexer, the propagate or the first majority, and on.
    let plain = Timing::of(&netlist, &Topology::of(&netlist), DelayModel::Unit).longest();
    assert!(plain > 38, "{plain}");
    let audit = under(&netlist, OFF).expect("it fits");
    // Multiplexer, eight majorities, buffer.
    assert_eq!(audit.depth.longest, 10);
    assert_eq!(
        audit.depth.longest_without_assumptions,
        Some(Time::whole(plain.into()))
    );
    assert_eq!(audit.verdict.limit, Limit::Carry);
    let without = format!("without them the longest path is {plain} gate delays long");
    assert!(
        audit.verdict.sentence.contains(&without),
        "{}",
        audit.verdict.sentence
    );
    assert_eq!(audit.assumed.len(), 1);
    assert_eq!(audit.assumed[0].assumption, "test_mode is 0");
    assert_eq!(audit.assumed[0].why, "off in the field");
    assert!(audit.settings.assumptions_sha256.is_some());
    // Structure is told as read.
    assert_eq!(audit.netlist.gates, netlist.gate_count() as u64);
    assert_eq!(audit.fan_in.largest, 3);
    let test_leg = audit
        .depth
        .longest_path
        .iter()
        .find(|step| step.net.starts_with('t'));
    assert!(test_leg.is_none(), "{test_leg:?}");
}

#[test]
fn the_other_value_selects_the_other_leg() {
    let netlist = with_test_mode(30);
    let audit = under(&netlist, &OFF.replace("value: 0", "value: 1")).expect("it fits");
    let plain = audit.depth.longest_without_assumptions;
    assert_eq!(
        Some(audit.depth.longest),
        plain,
        "the long leg is the one selected"
    );
    let b = audit
        .depth
        .ports
        .iter()
        .find(|port| port.bus.starts_with('b'));
    assert_eq!(
        b.and_then(|port| port.deepest_through),
        None,
        "b leads nowhere"
    );
}

#[test]
fn ties_are_followed_before_recognition() {
    // b is complemented by `mode`: tied to 0 an adder, to 1 a subtractor's carry-in
    // is still free, so that it is a + ~b + c.
    let mut blif = String::from(".model unit\n.inputs mode");
    for i in 0..6 {
        let _ = write!(blif, " a[{i}] b[{i}]");
    }
    blif.push_str("\n.outputs s[0] s[1] s[2] s[3] s[4] s[5]\n.names mode c0\n1 1\n");
    for i in 0..6 {
        let _ = writeln!(
            blif,
            ".names b[{i}] mode x{i}\n10 1\n01 1\n.names a[{i}] x{i} c{i} s[{i}]\n100 1\n010 1\n\
             001 1\n111 1\n.names a[{i}] x{i} c{i} c{}\n11- 1\n1-1 1\n-11 1",
            i + 1
        );
    }
    let netlist = accept("unit.blif", blif).netlist;
    let kind = |value: u8| {
        let yaml = format!("tied:\n  mode: {{value: {value}, why: one use only}}\n");
        let audit = under(&netlist, &yaml).expect("it fits");
        let chain = &audit.chains[0];
        (chain.kind.clone(), chain.bits, chain.formula())
    };
    assert_eq!(kind(0), ("adder".into(), 6, "a[5:0] + b[5:0]".into()));
    assert_eq!(kind(1), ("subtractor".into(), 6, "a[5:0] - b[5:0]".into()));
}

#[test]
fn a_tied_netlist_does_what_the_netlist_does_with_those_values() {
    // Every input vector of 60 random netlists, with two to four nets held at
    // random values by the test's own evaluation of the netlist as read.
    for seed in 0..60 {
        let netlist = random_covers(seed);
        let mut random = fastrand::Rng::with_seed(seed + 500);
        let mut assumptions = Assumptions::default();
        let mut held = std::collections::BTreeMap::new();
        for _ in 0..random.usize(2..5) {
            let net = NetId::new(random.usize(..netlist.net_count()));
            let value = random.bool();
            if let std::collections::btree_map::Entry::Vacant(slot) = held.entry(net) {
                slot.insert(value);
                assumptions.tied.push(Tied {
                    nets: Pattern::new(&netlist.net_name(net)),
                    value,
                    why: "drawn".to_owned(),
                });
            }
        }
        let tied = assumptions.apply(&netlist).expect("it fits").netlist;
        assert_eq!(tied.gate_count(), netlist.gate_count());
        let wanted = evaluate(&netlist, &held);
        let seen = evaluate(&tied, &std::collections::BTreeMap::new());
        for output in netlist.outputs() {
            let i = output.signal.net.index();
            assert_eq!(
                seen[i],
                wanted[i],
                "seed {seed}: {}",
                netlist.output_name(output)
            );
        }
        // Nor is any path left to a net that the values alone decide.
        let timing = Timing::of(&tied, &Topology::of(&tied), DelayModel::Unit);
        for net in held.keys() {
            assert_eq!(timing.arrivals.at(*net), None, "seed {seed}");
        }
    }
}

/// A random netlist of gates of up to four inputs, any function, over six inputs.
fn random_covers(seed: u64) -> Netlist {
    let mut random = fastrand::Rng::with_seed(seed);
    let mut blif = String::from(".model r\n.inputs i0 i1 i2 i3 i4 i5\n.outputs o0 o1 o2\n");
    let mut names: Vec<String> = (0..6).map(|i| format!("i{i}")).collect();
    for n in 0..16 {
        let name = if n < 13 {
            format!("n{n}")
        } else {
            format!("o{}", n - 13)
        };
        let pins = random.usize(1..5);
        blif.push_str(".names");
        for _ in 0..pins {
            let near = names.len().saturating_sub(8);
            let _ = write!(blif, " {}", names[random.usize(near..names.len())]);
        }
        let _ = writeln!(blif, " {name}");
        for row in 0..1u32 << pins {
            if random.bool() {
                let _ = writeln!(blif, "{row:0pins$b} 1");
            }
        }
        names.push(name);
    }
    accept("r.blif", blif).netlist
}

/// All nets over the 64 vectors of six inputs, some nets held at a value. The
/// functions are evaluated row by row from their tables.
fn evaluate(netlist: &Netlist, held: &std::collections::BTreeMap<NetId, bool>) -> Vec<u64> {
    let value = |held: bool| if held { !0 } else { 0 };
    let mut values = vec![0u64; netlist.net_count()];
    for net in netlist.nets() {
        values[net.index()] = match netlist.driver(net) {
            Driver::Input(i) => reading::VARIABLE[i as usize],
            Driver::Constant(constant) => value(constant),
            _ => 0,
        };
    }
    for (net, &held) in held {
        values[net.index()] = value(held);
    }
    for gate in Topology::of(netlist).order {
        let output = netlist.gate_output(gate);
        if held.contains_key(&output) {
            continue;
        }
        let carrywise::netlist::Function::Table(table) = netlist.function(gate) else {
            panic!("a gate of at most four inputs has a table");
        };
        let mut result = 0;
        for vector in 0..64 {
            let pins = netlist.fan_ins(gate).iter().enumerate();
            let row = pins.fold(0, |row, (pin, net)| {
                row | (values[net.index()] >> vector & 1) << pin
            });
            result |= (table.bits() >> row & 1) << vector;
        }
        values[output.index()] = result;
    }
    values
}

#[test]
fn a_rebuild_under_a_tie_says_that_it_holds_under_it_only() {
    let netlist = with_test_mode(30);
    let audit = under(&netlist, OFF).expect("it fits");
    assert!(!audit.recommended_set.proposals.is_empty());
    let said = "only while test_mode is 0";
    assert!(
        audit.recommended_set.sentence.contains(said),
        "{}",
        audit.recommended_set.sentence
    );
    let yaml = "arrival: [{ports: \"a[0]\", at: 0, why: none}]";
    let audit = under(&netlist, yaml).expect("it fits");
    assert!(!audit.recommended_set.sentence.contains("only while"));
}

#[test]
fn a_tied_net_inside_a_loop_opens_it() {
    let blif = ".model m\n.inputs a\n.outputs y\n.names hold y x\n11 1\n.names x a y\n1- 1\n-1 1\n\
                .names hold\n1\n.end\n";
    let netlist = accept("m.blif", blif).netlist;
    assert_eq!(Topology::of(&netlist).loops.len(), 1);
    let yaml = "tied: {hold: {value: 0, why: never held}}";
    let applied = file(yaml).assumptions.apply(&netlist).expect("it fits");
    assert!(Topology::of(&applied.netlist).loops.is_empty());
}

#[test]
fn arrival_and_required_times_are_told_with_what_is_to_spare() {
    let netlist = with_test_mode(2);
    let yaml = "\
tied: {test_mode: {value: 0, why: off}}
arrival: [{ports: 'a[*]', at: 5, why: the gauge is slow}]
required:
  - {ports: 's[*]', at: 40, why: display}
  - {ports: co, at: 9, why: alarm}
";
    let audit = under(&netlist, yaml).expect("it fits");
    // a at 5, eight majorities, a buffer; for the sum seven and one exclusive-or.
    assert_eq!(audit.depth.longest, 5 + 8 + 1);
    let effect = |n: usize| audit.assumed[n].effect.clone().unwrap_or_default();
    assert_eq!(
        effect(2),
        "the latest is ready at 13: 27 gate delays to spare"
    );
    assert_eq!(effect(3), "the latest is ready at 14: 5 gate delays over");
    let late: Vec<_> = audit
        .findings
        .iter()
        .filter(|f| f.rule == "too-deep")
        .collect();
    assert_eq!(late.len(), 1);
    assert_eq!(
        late[0].message,
        "co is ready at 14, and must be at 9: 5 gate delays over"
    );
}

#[test]
fn paths_of_several_cycles_are_told_apart() {
    let netlist = with_test_mode(30);
    let yaml = "cycles: [{from: seed, to: '*', n: 3, why: the tester waits}]";
    let audit = under(&netlist, yaml).expect("it fits");
    assert_eq!(audit.depth.longest, 10);
    let effect = audit.assumed[0].effect.as_deref();
    assert_eq!(
        effect,
        Some("the longest of them takes 40 gate delays: 14 a cycle")
    );
    let message = "paths that may take 3 cycles need 14 gate delays a cycle, more than the \
                   longest path of one";
    assert!(
        audit
            .findings
            .iter()
            .any(|finding| finding.message == message)
    );
}

/// A random netlist of two-input gates, four inputs and three outputs.
fn random(seed: u64) -> Netlist {
    let mut random = fastrand::Rng::with_seed(seed);
    let mut blif = String::from(".model r\n.inputs i0 i1 i2 i3\n.outputs o0 o1 o2\n");
    let mut names: Vec<String> = (0..4).map(|i| format!("i{i}")).collect();
    for i in 0..14 {
        let pick = |random: &mut fastrand::Rng| {
            let near = names.len().saturating_sub(6);
            names[random.usize(near..names.len())].clone()
        };
        let (x, y) = (pick(&mut random), pick(&mut random));
        let name = if i < 11 {
            format!("n{i}")
        } else {
            format!("o{}", i - 11)
        };
        let _ = writeln!(blif, ".names {x} {y} {name}\n11 1");
        if i < 11 {
            names.push(name);
        }
    }
    accept("r.blif", blif).netlist
}

fn net(netlist: &Netlist, name: &str) -> NetId {
    netlist
        .nets()
        .find(|&net| netlist.net_name(net) == name)
        .expect("the net is there")
}

/// Gates on the longest path that counts, by listing every path there is.
fn longest_by_listing(netlist: &Netlist, counts: impl Fn(&[String]) -> bool) -> i32 {
    let readers = Readers::of(netlist);
    let graph = NetGraph::new(netlist, &readers);
    let mut longest = 0;
    for &from in netlist.inputs() {
        for output in 0..3 {
            let to = net(netlist, &format!("o{output}"));
            let paths = petgraph::algo::all_simple_paths::<Vec<NetId>, _, RandomState>(
                graph, from, to, 0, None,
            );
            for path in paths {
                let names: Vec<String> = path.iter().map(|&net| netlist.net_name(net)).collect();
                if counts(&names) {
                    longest = longest.max(path.len() as i32 - 1);
                }
            }
        }
    }
    longest
}

#[test]
fn excluded_paths_leave_what_listing_all_paths_leaves() {
    let mut differing = 0;
    for seed in 0..200 {
        let netlist = random(seed);
        let topology = Topology::of(&netlist);
        let all = longest_by_listing(&netlist, |_| true);
        let mut random = fastrand::Rng::with_seed(seed + 1000);
        let pick = |random: &mut fastrand::Rng, letter: char, n: u32| {
            Pattern::new(&format!("{letter}{}", random.u32(..n)))
        };
        let mut assumptions = Assumptions::default();
        for _ in 0..3 {
            let from = random.bool().then(|| pick(&mut random, 'i', 4));
            let to = (from.is_none() || random.bool()).then(|| pick(&mut random, 'o', 3));
            let paths = match random.u32(..4) {
                0 => Paths::Through(pick(&mut random, 'n', 11)),
                1 => Paths::Between { from, to },
                _ => Paths::Part {
                    from,
                    through: pick(&mut random, 'n', 11),
                    to,
                },
            };
            assumptions.not_a_path.push(NotAPath {
                paths,
                why: "drawn".to_owned(),
            });
        }
        assumptions.cycles.push(Cycles {
            from: Some(pick(&mut random, 'i', 4)),
            to: Some(pick(&mut random, 'o', 3)),
            cycles: 2,
            why: "drawn".to_owned(),
        });
        let excluded = |path: &[String]| {
            let (first, last) = (&path[0], &path[path.len() - 1]);
            let fits = |side: &Option<Pattern>, name: &str| {
                side.as_ref().is_none_or(|side| side.matches(name))
            };
            let relaxed = &assumptions.cycles[0];
            let never = assumptions.not_a_path.iter().any(|each| match &each.paths {
                Paths::Through(through) => path.iter().any(|name| through.matches(name)),
                Paths::Between { from, to } => fits(from, first) && fits(to, last),
                Paths::Part { from, through, to } => {
                    let passes = path.iter().any(|name| through.matches(name));
                    passes && fits(from, first) && fits(to, last)
                }
            });
            never || (fits(&relaxed.from, first) && fits(&relaxed.to, last))
        };
        let expected = longest_by_listing(&netlist, |path| !excluded(path));
        let applied = assumptions.apply(&netlist).expect("every name is there");
        let timing = Timing::of(&applied.netlist, &topology, DelayModel::Unit);
        assert_eq!(timing.longest(), expected, "seed {seed}: {assumptions:?}");
        // The tail and the arrival of every net agree with it.
        let on_it = applied
            .netlist
            .nets()
            .filter(|&net| timing.is_on_longest_path(net))
            .count();
        assert_eq!(on_it > 0, !timing.kinds.is_empty(), "seed {seed}");
        differing += u32::from(expected != all);
    }
    assert!(differing > 50, "the draws must matter: {differing}");
}

#[test]
fn brackets_are_plain_and_stars_cross_slashes() {
    for (pattern, name, fits) in [
        ("a[*]", "a[12]", true),
        ("a[*]", "a12", false),
        ("*/acc[?]", "u_top/u_total/acc[3]", true),
        ("*/acc[?]", "acc[3]", false),
        ("*", "", true),
        ("a\\*", "a*", true),
        ("a\\*", "ab", false),
        ("*b*b", "abcb", true),
        ("*b*b", "abc", false),
        ("?", "", false),
    ] {
        assert_eq!(
            Pattern::new(pattern).matches(name),
            fits,
            "{pattern} on {name}"
        );
    }
    // Going back to the last star only keeps this quick.
    let hard = Pattern::new(&"*a".repeat(200));
    assert!(!hard.matches(&"ab".repeat(5_000)));
}

#[test]
fn what_does_not_fit_the_netlist_is_told_at_its_line() {
    let netlist = with_test_mode(2);
    let told = |yaml: &str| {
        under(&netlist, yaml)
            .map(|_| ())
            .expect_err("it does not fit")
    };
    let tied =
        "# the field\ntied:\n  test_mode: {value: 0, why: off}\n  probe*: {value: 1, why: off}\n";
    assert_eq!(
        told(tied),
        "assume.yaml:4:3: error: expected a net, found none that `probe*` matches in \
         `test.blif`; compare the names with those of a report; `*` stands for any characters, \
         `?` for one"
    );
    let both = "tied:\n  test_mode: {value: 0, why: off}\n  test_*: {value: 1, why: on}\n";
    assert!(
        told(both).starts_with("assume.yaml:3:3: error: expected one value for the net test_mode")
    );
    let path = "not_a_path:\n- from: cfg_*\n  why: static\n";
    assert!(told(path).starts_with("assume.yaml:2:9: error: expected a start of paths"));
    let ports = "required: [{ports: 'q[*]', at: 3, why: x}]";
    assert!(told(ports).starts_with("assume.yaml:1:20: error: expected an output port"));
    let ports = "arrival: [{ports: 's[*]', at: 3, why: x}]";
    assert!(told(ports).starts_with("assume.yaml:1:19: error: expected an input port"));
}

#[test]
fn a_net_with_several_drivers_is_not_tied() {
    let blif = ".model m\n.inputs a b\n.outputs y\n.names a y\n1 1\n.names b y\n1 1\n.end\n";
    let netlist = accept("m.blif", blif).netlist;
    let told = under(&netlist, "tied: {y: {value: 0, why: x}}").map(|_| ());
    assert!(
        told.expect_err("refused")
            .contains("expected a net with one driver, found y")
    );
}

#[test]
fn too_many_sets_are_refused() {
    let netlist = with_test_mode(2);
    let mut yaml = String::from("not_a_path:\n");
    for i in 0..8 {
        let _ = writeln!(yaml, "- {{from: 'a[{i}]', to: 's[{i}]', why: x}}");
        let _ = writeln!(yaml, "- {{from: 'b[{i}]', to: 's[{i}]', why: x}}");
    }
    let told = under(&netlist, &yaml).map(|_| ()).expect_err("refused");
    assert!(told.contains("at most 16 sets of starts apart"), "{told}");
}

#[test]
fn faults_of_the_file_are_told_where_they_are() {
    let all = [
        "",
        "tied",
        "tide: {}",
        "tied: {test_mode: {value: 0}}",
        "tied: {test_mode: {value: 0, why: ' '}}",
        "tied: {test_mode: {value: 2, why: x}}",
        "tied: {test_mode: {valeu: 0, why: x}}",
        "tied: {test_mode: 0}",
        "tied: {test_mode: {value: 0, value: 1, why: x}}",
        "not_a_path: {from: a, why: x}",
        "not_a_path:\n- from: a\n  thru: b\n  why: x\n",
        "not_a_path:\n- from: '*'\n  to: null\n  why: x\n",
        "not_a_path:\n- through: [b]\n  why: x\n",
        "not_a_path:\n- from: *\n  why: x\n",
        "cycles: [{from: a, to: b, n: 1, why: x}]",
        "cycles: [{from: a, to: b, why: x}]",
        "arrival: [{ports: a, at: -1, why: x}]",
        "arrival: [{at: 1, why: x}]",
        "required: [{ports: [a], at: 1, why: x}]",
        "box_delay: [{box: M, from: A, to: Q, delay: -1, why: x}]",
        "box_delay: [{box: M, from: A, delay: 4, why: x}]",
        "box_delay: [{model: M, from: A, to: Q, delay: 4, why: x}]",
        "carry_cells: [{cell: C, why: x}]",
        "carry_cells:\n- cell: C\n  delays: [{frm: A, to: Q, delay: 1}]\n  why: x\n",
        "tied: {a: {value: 0, why: x}\nb",
    ];
    let mut told = String::new();
    for yaml in all {
        let _ = writeln!(
            told,
            "{}\n  {}",
            yaml.replace('\n', "\u{23ce}"),
            refused(yaml)
        );
    }
    insta::assert_snapshot!(told);
}

#[test]
fn deep_and_huge_texts_are_refused_quickly() {
    assert!(refused(&"[".repeat(100_000)).contains("expected YAML"));
    let mut bomb = String::from("a0: &a0 [x, x, x, x, x, x, x, x, x, x]\n");
    for i in 1..12 {
        let each = format!("*a{}, ", i - 1).repeat(10);
        let _ = writeln!(bomb, "a{i}: &a{i} [{each}]");
    }
    refused(&bomb);
}

#[test]
fn empty_assumptions_change_nothing() {
    let netlist = with_test_mode(3);
    let applied = Assumptions::default()
        .apply(&netlist)
        .expect("nothing to fit");
    assert_eq!(applied.netlist.net_count(), netlist.net_count());
    assert!(applied.netlist.asserted().is_none());
    let one = Assumptions {
        tied: vec![Tied {
            nets: Pattern::new("test_mode"),
            value: false,
            why: "off".to_owned(),
        }],
        arrival: vec![PortTime {
            ports: Pattern::new("a*"),
            at: 1,
            why: "slow".to_owned(),
        }],
        ..Assumptions::default()
    };
    let applied = one.apply(&netlist).expect("it fits");
    let test_mode = net(&applied.netlist, "test_mode");
    assert_eq!(applied.netlist.driver(test_mode), Driver::Constant(false));
    assert_eq!(applied.netlist.gate_count(), netlist.gate_count());
    let misfit = Assumptions {
        arrival: vec![PortTime {
            ports: Pattern::new("z"),
            at: 1,
            why: "slow".to_owned(),
        }],
        ..Assumptions::default()
    };
    assert!(matches!(
        misfit.apply(&netlist).err(),
        Some(Misfit::NoMatch { .. })
    ));
}

#[test]
fn an_assumption_that_changes_nothing_is_a_finding() {
    let netlist = with_test_mode(2);
    let messages = |yaml: &str| {
        let audit = under(&netlist, yaml).expect("it fits");
        let unused = audit.findings.into_iter();
        unused
            .filter(|finding| finding.rule == "assumption-unused")
            .map(|finding| finding.message)
            .collect::<Vec<_>>()
    };
    // co is read by no gate but leaves by a port; nothing runs from a[7] to s[0].
    let yaml = "tied: {test_mode: {value: 0, why: off}}\n\
                cycles: [{from: 'a[7]', to: 's[0]', n: 2, why: slow}]\n";
    assert_eq!(
        messages(yaml),
        ["assuming that paths from a[7] to s[0] may take 2 cycles changes nothing"]
    );
    assert!(messages(OFF).is_empty());
}
