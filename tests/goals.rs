//! Required times, targets, what is to spare, and how much comes near the longest.
//!
//! Sources outside the project: an example worked by hand in its test; petgraph's
//! enumeration of simple paths, for counts and for what every net has to spare.

#[path = "support/reading.rs"]
mod reading;

use carrywise::audit::record::Severity;
use carrywise::audit::{self, Asserting, Options, Origin};
use carrywise::format::assumptions;
use carrywise::netlist::{NetGraph, NetId, Netlist, Readers, Topology};
use carrywise::source::Source;
use carrywise::timing::{Basis, DelayModel, Goals, Spares, Time, Timing};
use reading::{accept, fixture};
use rustc_hash::FxHashMap;
use std::collections::BTreeMap;
use std::collections::hash_map::RandomState;
use std::fmt::Write;

fn net(netlist: &Netlist, name: &str) -> NetId {
    let mut nets = netlist.nets();
    nets.find(|&net| netlist.net_name(net) == name)
        .unwrap_or_else(|| panic!("no net {name}"))
}

fn origin() -> Origin {
    Origin {
        file: "test.blif".to_owned(),
        format: carrywise::format::Format::Blif,
        sha256: String::new(),
    }
}

/// `n1 = a·b`, `y = n1 + c`, `z = ~n1`.
const SMALL: &str = ".model m\n.inputs a b c\n.outputs y z\n.names a b n1\n11 1\n\
                     .names n1 c y\n1- 1\n-1 1\n.names n1 z\n0 1\n.end\n";

#[test]
fn arrival_and_required_times_of_a_small_block_are_those_worked_by_hand() {
    // a is ready at 3; y must be at 9, z at 5. Forwards: n1 = max(3, 0) + 1 = 4,
    // y = max(4, 0) + 1 = 5, z = 4 + 1 = 5. Backwards: n1 = min(9 - 1, 5 - 1) = 4,
    // a = b = 4 - 1 = 3, c = 9 - 1 = 8.
    let netlist = accept("m.blif", SMALL).netlist;
    let yaml = "arrival: [{ports: a, at: 3, why: late}]\n\
                required: [{ports: y, at: 9, why: read then}, {ports: z, at: 5, why: read then}]\n";
    let source = Source {
        name: "assume.yaml".to_owned(),
        bytes: yaml.into(),
    };
    let file = assumptions::read(source).unwrap_or_else(|error| panic!("{error}"));
    let under = file.assumptions.apply(&netlist).expect("it fits");
    let topology = Topology::of(&under.netlist);
    let timing = Timing::of(&under.netlist, &topology, DelayModel::Unit);
    let goals = Goals {
        outputs: FxHashMap::from_iter([(0, 9), (1, 5)]),
        ..Goals::default()
    };
    let spares = Spares::of(&under.netlist, &topology, &timing, &goals);
    for (name, arrival, required) in [
        ("a", 3, 3),
        ("b", 0, 3),
        ("c", 0, 8),
        ("n1", 4, 4),
        ("y", 5, 9),
        ("z", 5, 5),
    ] {
        let net = net(&netlist, name);
        assert_eq!(timing.arrivals.at(net), Some(arrival), "{name}");
        let spare = spares.at(net).expect("on a path");
        let seen = timing.arrivals.at(net).map(|at| at + spare.ticks);
        assert_eq!(seen, Some(required), "{name}");
        assert_eq!(spare.basis, Basis::Required, "{name}");
    }
    // The record: both are in time, z just so.
    let asserting = Asserting {
        assumptions: &file.assumptions,
        sha256: String::new(),
    };
    let audit = audit::audit_under(&netlist, &origin(), &Options::default(), Some(&asserting));
    let audit = audit.expect("it fits");
    assert_eq!(audit.depth.late_ends, Some(0));
    assert_eq!(audit.depth.least_to_spare, Some(Time::ZERO));
}

#[test]
fn a_target_is_held_against_every_end() {
    let netlist = accept("m.blif", SMALL).netlist;
    let at = |target| {
        let options = Options {
            target_depth: target,
            ..Options::default()
        };
        audit::audit(&netlist, &origin(), &options).expect("the defaults fit")
    };
    let none = at(None);
    assert_eq!(
        (none.depth.late_ends, none.depth.least_to_spare),
        (None, None)
    );
    let met = at(Some(5));
    assert_eq!(met.settings.target_depth, Some(5));
    assert_eq!(
        (met.depth.late_ends, met.depth.least_to_spare),
        (Some(0), Some(Time::whole(3)))
    );
    let said = "The target of 5 gate delays is met with 3 gate delays to spare.";
    assert!(
        met.verdict.sentence.ends_with(said),
        "{}",
        met.verdict.sentence
    );
    assert!(
        met.findings
            .iter()
            .all(|finding| finding.rule != "too-deep")
    );
    let missed = at(Some(1));
    assert_eq!(
        (missed.depth.late_ends, missed.depth.least_to_spare),
        (Some(2), Some(Time::whole(-1)))
    );
    let said = "The target of 1 gate delay is missed at 2 ends, by up to 1 gate delay.";
    assert!(
        missed.verdict.sentence.ends_with(said),
        "{}",
        missed.verdict.sentence
    );
    let late: Vec<_> = missed
        .findings
        .iter()
        .filter(|f| f.rule == "too-deep")
        .collect();
    assert_eq!(late.len(), 1);
    assert_eq!(late[0].severity, Severity::Warning);
    assert_eq!(
        late[0].message,
        "2 ends are reached after the target of 1 gate delay, the latest, y, 1 gate delay after it"
    );
}

#[test]
fn slack_of_a_chain_says_what_it_is_against() {
    let netlist = fixture("adder_4bit.blif").netlist;
    let of = |target| {
        let options = Options {
            target_depth: target,
            ..Options::default()
        };
        let audit = audit::audit(&netlist, &origin(), &options).expect("the defaults fit");
        let chain = &audit.chains[0];
        (
            audit.depth.longest,
            chain.slack,
            chain.slack_against.clone(),
        )
    };
    let (longest, slack, against) = of(None);
    assert_eq!(slack, Some(Time::ZERO));
    assert_eq!(against.as_deref(), Some("longest path of the kind"));
    let (_, slack, against) = of(Some(3));
    assert_eq!(slack, Some(Time::whole(3) - longest));
    assert_eq!(against.as_deref(), Some("target depth"));
}

/// A random netlist of two-input gates, four inputs and three outputs.
fn random(seed: u64) -> Netlist {
    let mut random = fastrand::Rng::with_seed(seed);
    let mut blif = String::from(".model r\n.inputs i0 i1 i2 i3\n.outputs o0 o1 o2\n");
    let mut names: Vec<String> = (0..4).map(|i| format!("i{i}")).collect();
    for i in 0..14 {
        let near = names.len().saturating_sub(6);
        let x = names[random.usize(near..names.len())].clone();
        let mut y = names[random.usize(near..names.len())].clone();
        if x == y {
            y = names[near].clone();
        }
        if x == y {
            y = names[near + 1].clone();
        }
        let name = match i {
            ..11 => format!("n{i}"),
            _ => format!("o{}", i - 11),
        };
        let _ = writeln!(blif, ".names {x} {y} {name}\n11 1");
        if i < 11 {
            names.push(name);
        }
    }
    accept("r.blif", blif).netlist
}

/// Every path from an input to an output, as its nets and the output.
fn all_paths(netlist: &Netlist) -> Vec<(Vec<NetId>, u32)> {
    let readers = Readers::of(netlist);
    let graph = NetGraph::new(netlist, &readers);
    let mut paths = Vec::new();
    for &from in netlist.inputs() {
        for (i, output) in netlist.outputs().iter().enumerate() {
            let to = output.signal.net;
            let found = petgraph::algo::all_simple_paths::<Vec<NetId>, _, RandomState>(
                graph, from, to, 0, None,
            );
            paths.extend(found.map(|path| (path, i as u32)));
        }
    }
    paths
}

#[test]
fn paths_near_the_longest_are_as_many_as_listing_them_gives() {
    let mut several = 0;
    for seed in 0..100 {
        let netlist = random(seed);
        let topology = Topology::of(&netlist);
        let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
        let kinds = timing.kinds_by_class(&netlist, &topology);
        let near = timing.near(&netlist, &topology, &kinds);
        let paths = all_paths(&netlist);
        let length = |path: &[NetId]| path.len() - 1;
        let longest = paths
            .iter()
            .map(|(path, _)| length(path))
            .max()
            .expect("paths");
        assert_eq!(kinds[0].longest, longest as i32);
        let count = |least: usize| paths.iter().filter(|(p, _)| length(p) >= least).count() as u64;
        let seen = (near[0].paths_at_longest, near[0].paths_within_one);
        assert_eq!(
            seen,
            (count(longest), Some(count(longest - 1))),
            "seed {seed}"
        );
        let ends: std::collections::BTreeSet<u32> = paths
            .iter()
            .filter(|(path, _)| length(path) + 1 >= longest)
            .map(|&(_, end)| end)
            .collect();
        assert_eq!(near[0].ends_within_one, ends.len(), "seed {seed}");
        several += u32::from(count(longest - 1) > 2);
    }
    assert!(several > 30, "{several}");
}

#[test]
fn a_hundred_diamonds_in_series_are_more_paths_than_are_counted() {
    let mut blif = String::from(".model d\n.inputs n0\n.outputs n100\n");
    for i in 0..100 {
        let _ = writeln!(
            blif,
            ".names n{i} x{i}\n0 1\n.names n{i} y{i}\n1 1\n.names x{i} y{i} n{}\n11 1",
            i + 1
        );
    }
    let netlist = accept("d.blif", blif + ".end\n").netlist;
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let kinds = timing.kinds_by_class(&netlist, &topology);
    let near = timing.near(&netlist, &topology, &kinds);
    assert_eq!(near[0].paths_at_longest, carrywise::timing::MANY);
    assert_eq!(near[0].paths_within_one, Some(carrywise::timing::MANY));
}

#[test]
fn what_nets_have_to_spare_is_what_listing_all_paths_gives() {
    for seed in 0..60 {
        let netlist = random(seed);
        let topology = Topology::of(&netlist);
        let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
        let mut random = fastrand::Rng::with_seed(seed + 77);
        let mut required = FxHashMap::default();
        for output in 0..3 {
            if random.bool() {
                required.insert(output, random.i32(0..15));
            }
        }
        let goals = Goals {
            outputs: required,
            cycle: (random.u32(..3) == 0).then_some(9),
            target: random.bool().then_some(6),
        };
        let spares = Spares::of(&netlist, &topology, &timing, &goals);
        let mut least: BTreeMap<NetId, i32> = BTreeMap::new();
        for (path, output) in all_paths(&netlist) {
            let own = goals.outputs.get(&output).copied();
            let allowed = own.or(goals.cycle).or(goals.target);
            let spare = allowed.unwrap_or(timing.longest()) - (path.len() as i32 - 1);
            for net in path {
                let slot = least.entry(net).or_insert(spare);
                *slot = spare.min(*slot);
            }
        }
        for net in netlist.nets() {
            let seen = spares.at(net).map(|spare| spare.ticks);
            assert_eq!(seen, least.get(&net).copied(), "seed {seed}, {goals:?}");
        }
    }
}

/// Times on the ports of `n1 = a·b`, `y = n1 + c`.
const STATED: &str = ".model m\n.inputs a b c\n.outputs y z\n.input_arrival a 2.5 3.25\n\
    .input_arrival b 7 7 a r'clk\n.default_input_arrival 1 1\n.output_required y 20 18\n\
    .cycle 25\n.names a b n1\n11 1\n.names n1 c y\n1- 1\n-1 1\n.names n1 z\n0 1\n.end\n";

#[test]
fn times_that_a_file_states_count_where_a_model_measures_time() {
    let parsed = accept("m.blif", STATED);
    let times = parsed.constraints.times(&parsed.netlist);
    let netlist = parsed.netlist.with_times(times.clone());
    // The later of rise and fall at an input; b counts from an edge of a clock that
    // no path follows, so its time is left out.
    let at = |name: &str| times.arrival.get(&net(&netlist, name)).copied();
    assert_eq!((at("a"), at("b"), at("c")), (Some(3250), None, Some(1000)));
    // The earlier at an output.
    assert_eq!(times.required, FxHashMap::from_iter([(0, 18_000)]));
    assert_eq!(times.cycle, Some(25_000));
    let topology = Topology::of(&netlist);
    for model in DelayModel::ALL {
        let timing = Timing::of(&netlist, &topology, model);
        let seen = |name: &str| {
            let ticks = timing.arrivals.at(net(&netlist, name)).expect("reached");
            timing.time(ticks).in_thousandths()
        };
        let wanted = match model.counts_time() {
            true => (3250, 0, 1000),
            false => (0, 0, 0),
        };
        assert_eq!(
            (seen("a"), seen("b"), seen("c")),
            wanted,
            "{}",
            model.name()
        );
        // The record holds y against its time and z against the cycle.
        let mut options = Options::default();
        options.request.model = model;
        let audit = audit::audit(&netlist, &origin(), &options).expect("the defaults fit");
        assert_eq!(audit.depth.late_ends, model.counts_time().then_some(0));
        if model.counts_time() {
            let end = |name: &str| {
                let ticks = timing.arrivals.at(net(&netlist, name)).expect("reached");
                timing.time(ticks)
            };
            let y = Time::whole(18) - end("y");
            let z = Time::whole(25) - end("z");
            assert_eq!(audit.depth.least_to_spare, Some(y.min(z)));
        }
        // What a user asserts of a port goes before.
        let source = Source {
            name: "assume.yaml".to_owned(),
            bytes: "arrival: [{ports: a, at: 5, why: late}]".into(),
        };
        let file = assumptions::read(source).unwrap_or_else(|error| panic!("{error}"));
        let under = file.assumptions.apply(&netlist).expect("it fits").netlist;
        let timing = Timing::of(&under, &topology, model);
        let ticks = timing.arrivals.at(net(&under, "a")).expect("a start");
        assert_eq!(timing.time(ticks), Time::whole(5));
    }
}
