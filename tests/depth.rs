//! Depth, path kinds, slack, structure faults and histograms, each against
//! something outside: petgraph's algorithms on the same graph, published
//! circuits, or a count by hand.

mod support;

use carrywise::netlist::health::{FaultKind, Health, MAX_LOOP_NETS};
use carrywise::netlist::histogram;
use carrywise::netlist::{
    BlackBox, BoxKind, Function, Initial, NetGraph, NetId, Netlist, NetlistBuilder, Readers,
    Register, ScopeId, Signal, Topology, Trigger,
};
use carrywise::timing::{
    DelayModel, End, EndClass, PathKind, PinDelays, StartClass, Timing, depth_histogram, end_net,
    ends, longest_free_buffers,
};
use petgraph::algo::{bellman_ford, toposort};
use petgraph::graph::DiGraph;

fn top() -> ScopeId {
    ScopeId::new(0)
}

/// Builds netlists by net names.
struct Sketch {
    builder: NetlistBuilder,
    nets: std::collections::BTreeMap<String, NetId>,
    line: u32,
}

impl Sketch {
    fn new() -> Self {
        Self {
            builder: NetlistBuilder::new(),
            nets: std::collections::BTreeMap::new(),
            line: 0,
        }
    }

    fn net(&mut self, name: &str) -> NetId {
        if let Some(&net) = self.nets.get(name) {
            return net;
        }
        let id = self.builder.name(name.as_bytes());
        let net = self.builder.add_net(Some(id), top()).unwrap();
        self.nets.insert(name.to_owned(), net);
        net
    }

    fn input(&mut self, name: &str) -> NetId {
        let net = self.net(name);
        self.builder.add_input(net, 0);
        net
    }

    fn output(&mut self, name: &str) {
        let net = self.net(name);
        self.builder.add_output(Signal::plain(net), None, 0);
    }

    fn gate(&mut self, function: Function, fan_ins: &[&str], output: &str) -> NetId {
        self.line += 1;
        let pins: Vec<NetId> = fan_ins.iter().map(|name| self.net(name)).collect();
        let out = self.net(output);
        let function = self.builder.function(function);
        self.builder
            .add_gate(function, &pins, out, top(), self.line)
            .unwrap();
        out
    }

    fn nand(&mut self, left: &str, right: &str, output: &str) {
        self.gate(Function::product(&[false; 2], true), &[left, right], output);
    }

    fn register(&mut self, input: &str, output: &str, control: Option<&str>) {
        let input = Signal::plain(self.net(input));
        let output = self.net(output);
        let control = control.map(|name| self.net(name));
        self.builder.add_register(Register {
            input,
            output,
            trigger: Trigger::RisingEdge,
            control,
            initial: Initial::Zero,
            line: 0,
        });
    }

    fn finish(self) -> (Netlist, std::collections::BTreeMap<String, NetId>) {
        (self.builder.finish(), self.nets)
    }
}

fn timed(netlist: &Netlist, model: DelayModel) -> (Topology, Timing) {
    let topology = Topology::of(netlist);
    let timing = Timing::of(netlist, &topology, model);
    (topology, timing)
}

fn kind(start: StartClass, end: EndClass) -> PathKind {
    PathKind::between(start, end)
}

/// c17 of ISCAS'85 (Brglez and Fujiwara 1985): six two-input NANDs, depth 3.
#[test]
fn c17_is_three_gate_delays_deep() {
    let mut s = Sketch::new();
    for name in ["1", "2", "3", "6", "7"] {
        s.input(name);
    }
    // Last gates first: the order of the source must not matter.
    s.nand("16", "19", "23");
    s.nand("10", "16", "22");
    s.nand("11", "7", "19");
    s.nand("2", "11", "16");
    s.nand("3", "6", "11");
    s.nand("1", "3", "10");
    s.output("22");
    s.output("23");
    let (netlist, nets) = s.finish();
    let (topology, timing) = timed(&netlist, DelayModel::Unit);
    assert_eq!(timing.longest(), 3);
    assert_eq!(depth_histogram(&netlist, &timing.arrivals), [(3, 2)]);
    let longest = timing.longest_kind().unwrap();
    assert_eq!(longest.ends_at_longest, 2);
    assert_eq!(longest.next_below, None);
    let path = timing.path_of(&netlist, &topology, longest);
    let names: Vec<String> = path.iter().map(|step| netlist.net_name(step.net)).collect();
    // Of the two fan-ins of 22 only 16 is at two; then first pins win.
    assert_eq!(names, ["3", "11", "16", "22"]);
    let lines: Vec<u32> = path.iter().map(|step| step.line).collect();
    assert_eq!(lines, [0, 5, 4, 2]);
    assert_eq!(timing.slack(nets["10"]).unwrap().ticks, 1);
    assert_eq!(timing.required(nets["10"]), Some(2));
    assert_eq!(timing.slack(nets["16"]).unwrap().ticks, 0);
    let fan_in = histogram::fan_in(&netlist);
    assert_eq!(fan_in.bins, [(2, 6)]);
    // Counted by hand from the netlist above: 3, 11 and 16 have two readers.
    let fan_out = histogram::fan_out(&netlist);
    assert_eq!(fan_out.bins, [(1, 8), (2, 3)]);
    assert_eq!(fan_out.largest, 2);
}

fn random_netlist(seed: u64, gates: usize) -> Netlist {
    let mut random = fastrand::Rng::with_seed(seed);
    let mut s = Sketch::new();
    let mut names: Vec<String> = (0..8).map(|i| format!("i{i}")).collect();
    for name in &names {
        s.input(name);
    }
    s.gate(Function::constant(true), &[], "one");
    names.push("one".to_owned());
    for i in 0..gates {
        let pins = random.usize(1..=5);
        let fan_ins: Vec<String> = (0..pins)
            .map(|_| names[random.usize(names.len().saturating_sub(20)..names.len())].clone())
            .collect();
        let fan_ins: Vec<&str> = fan_ins.iter().map(String::as_str).collect();
        let bits = random.u64(..);
        let table = carrywise::netlist::TruthTable::new(pins, bits);
        let name = format!("n{i}");
        s.gate(Function::Table(table), &fan_ins, &name);
        names.push(name);
    }
    for name in names.iter().rev().take(10) {
        s.output(name);
    }
    s.finish().0
}

/// Arrivals against petgraph's Bellman–Ford with negated delays, which finds
/// longest paths on an acyclic graph.
#[test]
fn arrivals_agree_with_petgraph() {
    for seed in 0..20 {
        let netlist = random_netlist(seed, 200);
        for model in DelayModel::ALL {
            let (topology, timing) = timed(&netlist, model);
            let delays = PinDelays::of(&netlist, model);
            let mut graph = DiGraph::<(), f64>::new();
            let nodes: Vec<_> = netlist.nets().map(|_| graph.add_node(())).collect();
            let source = graph.add_node(());
            for &net in netlist.inputs() {
                graph.add_edge(source, nodes[net.index()], 0.0);
            }
            for gate in netlist.gates() {
                let out = nodes[netlist.gate_output(gate).index()];
                for (pin, net) in netlist.fan_ins(gate).iter().enumerate() {
                    let delay = delays.of_gate(&netlist, gate)[pin];
                    graph.add_edge(nodes[net.index()], out, -f64::from(delay));
                }
            }
            let paths = bellman_ford(&graph, source).unwrap();
            for net in netlist.nets() {
                let far = paths.distances[nodes[net.index()].index()];
                let expected = far.is_finite().then_some(-far as i32);
                assert_eq!(
                    timing.arrivals.at(net),
                    expected,
                    "{}",
                    netlist.net_name(net)
                );
            }
            // The path really steps up by its gates' delays.
            for kind in &timing.kinds {
                let path = timing.path_of(&netlist, &topology, kind);
                assert_eq!(path.last().unwrap().arrival, kind.longest);
                assert_eq!(path[0].gate, None);
                for pair in path.windows(2) {
                    let gate = pair[1].gate.unwrap();
                    let reads = netlist.fan_ins(gate).iter().enumerate();
                    let delays = delays.of_gate(&netlist, gate);
                    assert!(reads.into_iter().any(|(pin, &net)| {
                        net == pair[0].net && pair[0].arrival + delays[pin] == pair[1].arrival
                    }));
                }
            }
        }
        let readers = Readers::of(&netlist);
        assert!(toposort(NetGraph::new(&netlist, &readers), None).is_ok());
    }
}

/// Arrival plus tail is the longest path through a net, so its maximum is the
/// longest path of all, and every net on that path has it.
#[test]
fn tails_meet_arrivals_on_the_longest_path() {
    for seed in 0..20 {
        let netlist = random_netlist(seed, 300);
        let (topology, timing) = timed(&netlist, DelayModel::Pairs);
        let through = |net: NetId| {
            let (at, tail) = (timing.arrivals.at(net)?, timing.tails.by_net[net.index()]);
            (tail != carrywise::timing::NEVER).then_some(at + tail)
        };
        let longest = netlist.nets().filter_map(through).max();
        assert_eq!(longest, Some(timing.longest()));
        let kind = timing.longest_kind().unwrap();
        for step in timing.path_of(&netlist, &topology, kind) {
            assert_eq!(through(step.net), longest);
            assert_eq!(timing.slack(step.net).unwrap().ticks, 0);
        }
    }
}

#[test]
fn paths_start_never_at_constants() {
    let mut s = Sketch::new();
    s.gate(Function::constant(true), &[], "one");
    s.gate(Function::buffer(true), &["one"], "zero");
    s.input("a");
    s.gate(Function::product(&[false; 2], false), &["zero", "a"], "y");
    s.output("y");
    s.output("zero");
    let (netlist, nets) = s.finish();
    let (topology, timing) = timed(&netlist, DelayModel::Unit);
    assert_eq!(timing.arrivals.at(nets["zero"]), None);
    assert_eq!(timing.arrivals.at(nets["y"]), Some(1));
    assert_eq!(
        depth_histogram(&netlist, &timing.arrivals),
        [(0, 1), (1, 1)]
    );
    let health = Health::of(&netlist, &topology);
    assert_eq!(health.count(FaultKind::AlwaysConstant), 2);
    let values: Vec<_> = health.faults.iter().map(|fault| fault.value).collect();
    assert_eq!(values, [Some(false), Some(false)]);
    // "one" is a constant on purpose: it has no inputs.
    assert_eq!(histogram::fan_in(&netlist).bins, [(0, 1), (1, 1), (2, 1)]);
}

/// Levels counted by hand: an 8-input gate is three two-input levels.
#[test]
fn pairs_counts_two_input_levels() {
    let levels = |function: &Function| DelayModel::Pairs.pin_delays(function);
    for (pins, expected) in [(1, 0), (2, 1), (3, 2), (4, 2), (5, 3), (8, 3), (9, 4)] {
        let and = Function::product(&vec![false; pins], pins % 2 == 0);
        assert_eq!(levels(&and), vec![expected; pins]);
    }
    assert_eq!(levels(&Function::parity(3, true)), [2, 2, 2]);
    let of = |n: usize, f: &dyn Fn(usize) -> bool| {
        let bits = (0..1usize << n).fold(0, |bits, m| bits | u64::from(f(m)) << m);
        Function::Table(carrywise::netlist::TruthTable::new(n, bits))
    };
    // Multiplexer: s·a + ~s·b.
    let mux = of(3, &|m| if m & 1 == 1 { m & 2 != 0 } else { m & 4 != 0 });
    assert_eq!(levels(&mux), [2, 2, 2]);
    // Majority: a·(b + c) + b·c.
    let majority = of(3, &|m| m.count_ones() >= 2);
    assert_eq!(levels(&majority), [2, 3, 3]);
    // and-or: a·b + c.
    let and_or = of(3, &|m| m & 3 == 3 || m & 4 != 0);
    assert_eq!(levels(&and_or), [2, 2, 1]);
    // x ⊕ b·c: the linear pin is one XOR before the rest.
    let sum = of(3, &|m| (m & 1 == 1) != (m & 6 == 6));
    assert_eq!(levels(&sum), [1, 2, 2]);
}

/// Polarity is free, so it must not change the price of any function of four
/// pins drawn at random.
#[test]
fn price_does_not_depend_on_polarity() {
    let mut random = fastrand::Rng::with_seed(7);
    for _ in 0..200 {
        let table = carrywise::netlist::TruthTable::new(4, random.u64(..));
        let price = |t| DelayModel::Pairs.pin_delays(&Function::Table(t));
        let base = price(table);
        assert_eq!(base, price(table.complement()));
        for pin in 0..4 {
            assert_eq!(base, price(table.flip(pin)));
        }
    }
}

#[test]
fn buffers_are_free_in_the_second_figure() {
    let mut s = Sketch::new();
    s.input("a");
    s.gate(Function::buffer(false), &["a"], "b");
    s.gate(Function::buffer(true), &["b"], "c");
    s.nand("a", "c", "y");
    s.output("y");
    let (netlist, _) = s.finish();
    let (topology, timing) = timed(&netlist, DelayModel::Unit);
    assert_eq!(timing.longest(), 3);
    assert_eq!(longest_free_buffers(&netlist, &topology), 1);
}

#[test]
fn path_kinds_are_kept_apart() {
    let mut s = Sketch::new();
    s.input("a");
    s.input("clock");
    s.nand("a", "q", "d");
    s.register("d", "q", Some("clock"));
    s.nand("q", "q2", "y1");
    s.nand("y1", "q2", "y");
    s.output("y");
    s.register("q", "q2", None);
    let model = s.builder.name(b"depot");
    let (from, to) = (s.net("y1"), s.net("boxed"));
    s.builder.add_box(BlackBox {
        model,
        kind: BoxKind::Model,
        inputs: vec![from],
        outputs: vec![to],
        pins: vec![],
        scope: ScopeId::new(0),
        line: 9,
    });
    s.nand("boxed", "a", "z1");
    s.nand("z1", "a", "z2");
    s.nand("z2", "a", "z");
    s.output("z");
    let (netlist, nets) = s.finish();
    let (_, timing) = timed(&netlist, DelayModel::Unit);
    use {EndClass as E, StartClass as S};
    let found: Vec<_> = timing
        .kinds
        .iter()
        .map(|k| (k.kind, k.longest, k.ends_at_longest, k.next_below))
        .collect();
    let expected = [
        (kind(S::Input, E::Output), 3, 1, None),
        // d, and the clock straight into the control.
        (kind(S::Input, E::Register), 1, 1, Some(0)),
        (kind(S::Register, E::Output), 2, 1, None),
        (kind(S::Register, E::Register), 1, 1, Some(0)),
        (kind(S::Register, E::Box), 1, 1, None),
        (kind(S::Box, E::Output), 3, 1, None),
    ];
    assert_eq!(found, expected);
    assert_eq!(expected[3].0.to_string(), "register→register");
    // y1 is early for nothing of its own kinds: register→box is one level.
    let slack = timing.slack(nets["y1"]).unwrap();
    assert_eq!(slack.ticks, 0);
    assert_eq!(timing.longest(), 3);
}

#[test]
fn cut_nets_start_and_end_paths() {
    let mut s = Sketch::new();
    s.input("a");
    // A loop of three with a tail, and a net driven twice.
    s.nand("a", "l3", "l1");
    s.nand("a", "l1", "l2");
    s.nand("a", "l2", "l3");
    s.nand("l3", "a", "y");
    s.output("y");
    s.nand("a", "y", "twice");
    s.nand("y", "a", "twice");
    s.nand("twice", "nobody", "z");
    s.output("z");
    let (netlist, nets) = s.finish();
    let (topology, timing) = timed(&netlist, DelayModel::Unit);
    assert_eq!(timing.arrivals.at(nets["l1"]), Some(0));
    assert_eq!(timing.arrivals.at(nets["y"]), Some(1));
    assert_eq!(timing.arrivals.at(nets["twice"]), Some(0));
    assert_eq!(timing.arrivals.at(nets["z"]), Some(1));
    // The gates that drive `twice` read y: two levels, the longest.
    assert_eq!(timing.longest(), 2);
    let path = timing.path_of(&netlist, &topology, timing.longest_kind().unwrap());
    assert_eq!(path.last().unwrap().net, nets["twice"]);
    assert_eq!(path.len(), 3);
    let health = Health::of(&netlist, &topology);
    let of = |kind| {
        health
            .faults
            .iter()
            .filter(move |fault| fault.kind == kind)
            .collect::<Vec<_>>()
    };
    let loops = of(FaultKind::Loop);
    assert_eq!(loops.len(), 1);
    let cycle: Vec<NetId> = ["l3", "l1", "l2"].map(|name| nets[name]).to_vec();
    assert_eq!(loops[0].nets, cycle);
    assert_eq!(loops[0].lines, [3, 1, 2]);
    let twice = of(FaultKind::DrivenTwice);
    assert_eq!(
        (&twice[0].nets, &twice[0].lines),
        (&vec![nets["twice"]], &vec![5, 6])
    );
    let bare = of(FaultKind::NoDriver);
    assert_eq!(
        (&bare[0].nets, &bare[0].lines),
        (&vec![nets["nobody"]], &vec![7])
    );
    assert_eq!(health.count(FaultKind::NoReader), 0);
}

#[test]
fn lists_a_net_without_reader() {
    let mut s = Sketch::new();
    s.input("a");
    s.nand("a", "a", "y");
    s.nand("a", "y", "loose");
    s.output("y");
    let (netlist, nets) = s.finish();
    let health = Health::of(&netlist, &Topology::of(&netlist));
    assert_eq!(health.faults.len(), 1);
    assert_eq!(health.faults[0].kind, FaultKind::NoReader);
    assert_eq!(health.faults[0].nets, [nets["loose"]]);
    assert_eq!(health.faults[0].lines, [2]);
}

#[test]
fn a_million_gates_in_series_pass_every_measure() {
    const GATES: usize = 1_000_000;
    let mut builder = NetlistBuilder::new();
    let inverter = builder.function(Function::buffer(true));
    let nets: Vec<NetId> = (0..=GATES)
        .map(|_| builder.add_net(None, top()).unwrap())
        .collect();
    builder.add_input(nets[0], 0);
    // Against the order of signals, so that the order must be searched.
    for i in (0..GATES).rev() {
        builder
            .add_gate(inverter, &nets[i..=i], nets[i + 1], top(), 0)
            .unwrap();
    }
    builder.add_output(Signal::plain(nets[GATES]), None, 0);
    let netlist = builder.finish();
    let (topology, timing) = timed(&netlist, DelayModel::Unit);
    assert_eq!(timing.longest(), GATES as i32);
    let path = timing.path_of(&netlist, &topology, timing.longest_kind().unwrap());
    assert_eq!(path.len(), GATES + 1);
    assert!(Health::of(&netlist, &topology).faults.is_empty());
}

#[test]
fn a_million_gates_in_a_ring_are_one_loop() {
    const GATES: usize = 1_000_000;
    let mut builder = NetlistBuilder::new();
    let inverter = builder.function(Function::buffer(true));
    let nets: Vec<NetId> = (0..GATES)
        .map(|_| builder.add_net(None, top()).unwrap())
        .collect();
    for i in 0..GATES {
        builder
            .add_gate(inverter, &nets[i..=i], nets[(i + 1) % GATES], top(), 0)
            .unwrap();
    }
    builder.add_output(Signal::plain(nets[0]), None, 0);
    let netlist = builder.finish();
    let (topology, timing) = timed(&netlist, DelayModel::Unit);
    assert_eq!(timing.longest(), 1);
    let health = Health::of(&netlist, &topology);
    assert_eq!(health.count(FaultKind::Loop), 1);
    assert_eq!(health.faults[0].nets.len(), MAX_LOOP_NETS);
    assert_eq!(health.faults[0].left_out, GATES - MAX_LOOP_NETS);
}

#[test]
fn every_end_reads_a_net_or_is_a_cut() {
    let netlist = random_netlist(3, 50);
    let topology = Topology::of(&netlist);
    for end in ends(&netlist, &topology) {
        assert!(end_net(&netlist, end).is_some() != matches!(end, End::Cut(_)));
    }
}

/// Every row of the data set's `facts.tsv`: depths computed by independent
/// programs, ISCAS'85 depths as published, gates as in the AIGER headers.
#[test]
fn every_open_circuit_has_its_published_measures() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let facts = std::fs::read_to_string(folder.join("facts.tsv")).unwrap();
    let mut rows = 0;
    for row in facts.lines().skip(1) {
        let cells: Vec<&str> = row.split('\t').collect();
        let file = std::fs::File::open(folder.join(cells[0])).unwrap();
        let source = carrywise::source::read(cells[0], file).unwrap();
        let options = carrywise::format::ReadOptions::default();
        let netlist = match carrywise::format::read(&source, &options) {
            Ok(parsed) => parsed.netlist,
            Err(errors) => panic!("{}: {errors:?}", cells[0]),
        };
        let topology = Topology::of(&netlist);
        let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
        let found = [
            netlist.inputs().len(),
            netlist.outputs().len(),
            netlist.gate_count(),
            timing.longest() as usize,
            histogram::fan_in(&netlist).largest,
        ];
        let expected: Vec<usize> = cells[1..]
            .iter()
            .map(|cell| cell.parse().unwrap())
            .collect();
        assert_eq!(found[..], expected[..], "{}", cells[0]);
        rows += 1;
    }
    assert_eq!(rows, 21);
}
