//! Dry runs against reality: every estimate is compared with a netlist made
//! from it and measured from nothing, and that netlist's function with the
//! original's by simulation. The circuits come from the generators, which know
//! nothing of the crate.

mod generators;
mod support;

use carrywise::chain::{self, Chain, Position};
use carrywise::format::{ReadOptions, read};
use carrywise::netlist::{
    Bit, Driver, Function, NetId, Netlist, NetlistBuilder, ScopeId, Signal, Topology, histogram,
};
use carrywise::network::Propagate;
use carrywise::network::schemes::candidates;
use carrywise::plan::{
    DryRun, GateStyle, Ground, NewGates, Request, Settings, SettingsError, Site,
    depth_with_free_carry, earliest, materialise, plan,
};
use carrywise::timing::{DelayModel, Timing};
use generators::{Aig, Cell, Circuit, Generated, Word};

fn parse(name: &str, bytes: &[u8]) -> Netlist {
    let source = carrywise::source::read(name, bytes).unwrap();
    match read(&source, &ReadOptions::default()) {
        Ok(parsed) => parsed.netlist,
        Err(errors) => panic!("{name}: {errors:?}"),
    }
}

fn chains_of(netlist: &Netlist) -> Vec<Chain> {
    let options = chain::Options {
        min_bits: 3,
        ..chain::Options::default()
    };
    chain::find(netlist, &Topology::of(netlist), options).chains
}

/// Values of all nets on 64 patterns: inputs and then register outputs take the
/// words given, cut nets and box outputs one made from their name.
fn simulate(netlist: &Netlist, words: &[u64]) -> Vec<u64> {
    let mut values = vec![0; netlist.net_count()];
    let registers = netlist.registers().iter().map(|register| register.output);
    for (net, word) in netlist.inputs().iter().copied().chain(registers).zip(words) {
        values[net.index()] = *word;
    }
    for net in netlist.nets() {
        if netlist.driver(net) == Driver::Constant(true) {
            values[net.index()] = !0;
        }
    }
    let topology = Topology::of(netlist);
    for net in netlist.nets() {
        if topology.is_cut(net) || matches!(netlist.driver(net), Driver::Box(_)) {
            let name = netlist.net_name(net);
            let seed = name
                .bytes()
                .fold(1, |seed: u64, byte| seed * 257 + u64::from(byte));
            values[net.index()] = fastrand::Rng::with_seed(seed).u64(..);
        }
    }
    for gate in topology.order.iter().copied() {
        if topology.is_cut(netlist.gate_output(gate)) {
            continue;
        }
        let pins: Vec<u64> = netlist
            .fan_ins(gate)
            .iter()
            .map(|net| values[net.index()])
            .collect();
        values[netlist.gate_output(gate).index()] = netlist.function(gate).evaluate(&pins);
    }
    values
}

/// What leaves the netlist: output ports and register inputs.
fn results(netlist: &Netlist, words: &[u64]) -> Vec<u64> {
    let values = simulate(netlist, words);
    let read = |signal: Signal| {
        let word = values[signal.net.index()];
        if signal.inverted { !word } else { word }
    };
    let outputs = netlist.outputs().iter().map(|output| read(output.signal));
    let registers = netlist
        .registers()
        .iter()
        .map(|register| read(register.input));
    outputs.chain(registers).collect()
}

fn words(netlist: &Netlist, random: &mut fastrand::Rng, round: usize) -> Vec<u64> {
    let free = netlist.inputs().len() + netlist.registers().len();
    let base = random.u64(..);
    let rare = |random: &mut fastrand::Rng| random.u64(..) & random.u64(..) & random.u64(..);
    (0..free)
        .map(|i| match round % 3 {
            0 => random.u64(..),
            // Long runs of propagate: neighbours and halves mostly opposite.
            1 => (if i < free / 2 { base } else { !base }) ^ rare(random),
            _ => (if i % 2 == 0 { base } else { !base }) ^ rare(random),
        })
        .collect()
}

fn equivalents(netlist: &Netlist) -> usize {
    let pins = netlist.gates().map(|gate| netlist.fan_ins(gate).len());
    pins.map(|k| k.saturating_sub(1)).sum()
}

/// Compares one dry run with the netlist made from it.
fn compare(ground: &Ground<'_>, run: &DryRun<'_, '_>, chain: &Chain, what: &str) {
    let old = ground.netlist;
    let rebuilt = materialise(run, "cw_").unwrap();
    let new = &rebuilt.netlist;
    let estimate = run.estimate();
    let topology = Topology::of(new);
    assert_eq!(topology.loops.len(), ground.topology.loops.len(), "{what}");
    // Gates.
    assert_eq!(
        new.gate_count(),
        old.gate_count() + estimate.gates_added - estimate.gates_removed,
        "{what}: gates"
    );
    assert_eq!(
        equivalents(new) + estimate.gate_equivalents_removed,
        equivalents(old) + estimate.gate_equivalents_added,
        "{what}: equivalents"
    );
    // Only new gates have no source line.
    let made: Vec<_> = new
        .gates()
        .filter(|&gate| new.gate_line(gate) == 0)
        .collect();
    assert_eq!(made.len(), estimate.gates_added, "{what}: added");
    let widest = made.iter().map(|&gate| new.fan_ins(gate).len()).max();
    assert_eq!(
        widest.unwrap_or(0),
        estimate.largest_fan_in,
        "{what}: fan-in"
    );
    let readers = histogram::reader_counts(new);
    let most = made
        .iter()
        .map(|&gate| readers[new.gate_output(gate).index()] as usize)
        .max();
    assert_eq!(
        most.unwrap_or(0),
        estimate.largest_fan_out,
        "{what}: fan-out"
    );
    for &gate in &made {
        let inputs = new.fan_ins(gate).len();
        assert!(inputs <= ground.settings.gate_inputs, "{what}: too wide");
    }
    // Nothing new is unread that was not unread before.
    let unread = |netlist: &Netlist| {
        let readers = histogram::reader_counts(netlist);
        netlist
            .gates()
            .filter(|&gate| readers[netlist.gate_output(gate).index()] == 0)
            .count()
    };
    assert!(unread(new) <= unread(old), "{what}: unread gates");
    // Depth.
    let timing = Timing::of(new, &topology, ground.settings.model);
    assert_eq!(
        timing.longest(),
        estimate.block_after,
        "{what}: block depth"
    );
    for change in &estimate.kinds {
        let found = timing.kind(change.kind).map_or(0, |kind| kind.longest);
        assert_eq!(found, change.after, "{what}: {}", change.kind);
    }
    let results_of = |position: &Position| [position.sums.clone(), position.carries.clone()];
    let arrival = |signal: Signal| {
        // Gone where nothing reads it, or unread beforehand.
        let now = rebuilt.nets[signal.net.index()]?;
        timing.arrivals.at(now.net)
    };
    let signals = chain.positions.iter().flat_map(results_of).flatten();
    // Operands that equal a result are not replaced and no later than it.
    let latest = signals.filter_map(arrival).max();
    assert_eq!(latest, Some(estimate.chain_after), "{what}: chain depth");
    // Function, also of every inner net that stays.
    let mut random = fastrand::Rng::with_seed(3);
    for round in 0..6 {
        let words = words(old, &mut random, round);
        assert_eq!(results(old, &words), results(new, &words), "{what}");
        let (before, after) = (simulate(old, &words), simulate(new, &words));
        for net in old.nets() {
            if let Some(now) = rebuilt.nets[net.index()] {
                let value = after[now.net.index()];
                let value = if now.inverted { !value } else { value };
                assert_eq!(before[net.index()], value, "{what}: {}", old.net_name(net));
            }
        }
    }
    // A BLIF net that was unread beforehand stays.
    if !old.has_inverted_edges() {
        let readers = histogram::reader_counts(old);
        for net in old.nets().filter(|net| readers[net.index()] == 0) {
            let now = rebuilt.nets[net.index()];
            assert!(now.is_some(), "{what}: {}", old.net_name(net));
        }
    }
}

/// Every candidate and propagate of every chain of a netlist, compared; gives
/// the number of comparisons.
fn compare_all(netlist: &Netlist, request: Request, what: &str) -> usize {
    let chains = chains_of(netlist);
    let settings = Settings::resolve(request, netlist).unwrap();
    let topology = Topology::of(netlist);
    let timing = Timing::of(netlist, &topology, settings.model);
    let ground = Ground::of(netlist, &topology, &timing, &settings);
    let mut compared = 0;
    for (number, chain) in chains.iter().enumerate() {
        let site = match Site::of(&ground, chain) {
            Ok(site) => site,
            Err(refused) => panic!("{what}: chain {number}: {refused}"),
        };
        for (fitted, propagate) in options(chain, settings.gate_inputs) {
            let what = format!(
                "{what}: {number} {} {:?} {propagate:?} F={}",
                fitted.scheme, fitted.group, settings.gate_inputs
            );
            let run = DryRun::of(&site, &fitted.network, propagate);
            compare(&ground, &run, chain, &what);
            compared += 1;
        }
    }
    compared
}

fn options(
    chain: &Chain,
    gate_inputs: usize,
) -> impl Iterator<Item = (carrywise::network::schemes::Fitted, Propagate)> {
    let has_carry_in = chain.carry_in.signal().is_some();
    candidates(chain.positions.len(), has_carry_in, gate_inputs)
        .into_iter()
        .flat_map(|fitted| {
            [Propagate::Or, Propagate::Xor].map(|propagate| (fitted.clone(), propagate))
        })
}

fn request(model: DelayModel, new_gates: NewGates, gate_inputs: usize) -> Request {
    Request {
        new_gates: Some(new_gates),
        gate_inputs: Some(gate_inputs),
        ..Request::new(model)
    }
}

fn blif(circuit: &Circuit) -> Netlist {
    parse("generated.blif", circuit.blif().as_bytes())
}

fn aiger(circuit: &Circuit) -> Netlist {
    parse("generated.aag", Aig::of(circuit).aag().as_bytes())
}

/// All the ways a small word is checked.
fn compare_word(generated: &Generated) -> usize {
    let label = &generated.label;
    let text = blif(&generated.circuit);
    let graph = aiger(&generated.circuit);
    let mut compared = 0;
    for model in DelayModel::ALL {
        compared += compare_all(&graph, Request::new(model), &format!("{label}, aiger"));
        for inputs in [2, 3, 5] {
            let request = request(model, NewGates::SingleOperator, inputs);
            compared += compare_all(&text, request, &format!("{label}, single operator"));
        }
        for inputs in [3, 6] {
            let request = request(model, NewGates::Cover, inputs);
            compared += compare_all(&text, request, &format!("{label}, cover"));
        }
    }
    compared
}

#[test]
fn every_estimate_of_ripple_words_is_what_is_built() {
    let mut compared = 0;
    for word in Word::every_ripple(5) {
        compared += compare_word(&word.generate());
    }
    assert!(compared > 10_000, "{compared}");
}

#[test]
fn every_estimate_of_fast_words_is_what_is_built() {
    let mut compared = 0;
    for word in Word::every_fast(6) {
        compared += compare_word(&word.generate());
    }
    assert!(compared > 1_000, "{compared}");
}

#[test]
fn every_estimate_among_other_logic_is_what_is_built() {
    use generators::{Extension, Kind};
    let word = Word {
        carry_in: true,
        ..Word::new(Kind::Adder, 7, Cell::PropagateXor)
    };
    let circuits = [
        generators::gated_operands(word),
        generators::adder_subtractor(6, Cell::PropagateXor),
        generators::selected_sums(word),
        generators::with_overflow(6, Cell::PropagateXor),
        generators::accumulator(8, 5, Extension::Sign, Cell::PropagateXor),
        generators::counter(6, true, Cell::PropagateXor),
        generators::series_adders(6, 4, Cell::PropagateXor),
    ];
    for generated in circuits {
        let compared = compare_word(&generated);
        assert!(compared > 0, "no chain in {}", generated.label);
    }
}

/// Operands, sums and inner nets read by loops, nets driven twice, boxes, random
/// gates and registers, and results that nothing reads.
#[test]
fn every_estimate_in_hostile_surroundings_is_what_is_built() {
    let mut compared = 0;
    for seed in 0..30 {
        let mut random = fastrand::Rng::with_seed(seed);
        let cell = Cell::ALL[seed as usize % Cell::ALL.len()];
        let word = Word {
            carry_in: seed % 2 == 0,
            carry_out: seed % 3 == 0,
            ..Word::new(generators::Kind::Adder, 6, cell)
        };
        let generated = word.generate();
        let text = generated.circuit.blif();
        let netlist = parse("word.blif", text.as_bytes());
        let mut names: Vec<String> = netlist.nets().map(|net| netlist.net_name(net)).collect();
        let mut more = String::new();
        for i in 0..40 {
            let pick = |random: &mut fastrand::Rng| names[random.usize(..names.len())].clone();
            let (x, y) = (pick(&mut random), pick(&mut random));
            let line = match random.usize(..8) {
                // A loop of two gates.
                0 => format!(".names {x} u{i} w{i}\n11 1\n.names w{i} {y} u{i}\n01 1\n"),
                1 => format!(".names {x} u{i}\n1 1\n.names {y} u{i}\n0 1\n"),
                2 => format!(".latch {x} u{i} re {y} 0\n"),
                3 => format!(".subckt depot in={x} out=u{i}\n"),
                4 => format!(".names {x} nobody{i} u{i}\n10 1\n"),
                _ => format!(".names {x} {y} u{i}\n10 1\n01 1\n"),
            };
            more.push_str(&line);
            names.push(format!("u{i}"));
        }
        let end = text.rfind(".end").unwrap();
        let ports = text.find(".outputs").unwrap();
        let text = format!(
            "{}.outputs u39 u38 u37\n{}{more}.end\n",
            &text[..ports],
            &text[ports..end]
        );
        let netlist = parse("surrounded.blif", text.as_bytes());
        for model in DelayModel::ALL {
            let request = request(model, NewGates::SingleOperator, 3);
            compared += compare_all(&netlist, request, &format!("seed {seed}"));
        }
    }
    assert!(compared > 500, "{compared}");
}

#[test]
fn every_estimate_on_the_fixtures_is_what_is_built() {
    let mut compared = 0;
    for (name, bytes) in generators::gauge::files() {
        if name.ends_with(".aig") {
            // Gates of binary files have no lines to tell new ones by.
            continue;
        }
        let netlist = parse(name, &bytes);
        for model in DelayModel::ALL {
            compared += compare_all(&netlist, Request::new(model), name);
        }
    }
    assert!(compared > 100, "{compared}");
}

/// Open circuits as they are: whatever was proven in them can be planned, and is
/// what is built.
#[test]
fn every_estimate_on_open_circuits_is_what_is_built() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let names = [
        "mcnc/my_adder",
        "mcnc/z4ml",
        "mcnc/count",
        "iscas85/c880",
        "iscas85/c5315",
    ];
    for name in names.into_iter().chain(["iscas85/c6288", "iscas85/c7552"]) {
        let file = format!("{name}.blif");
        let netlist = parse(&file, &std::fs::read(folder.join(&file)).unwrap());
        let compared = compare_all(&netlist, Request::new(DelayModel::Unit), name);
        eprintln!("{name}: {compared} dry runs");
        if name == "mcnc/my_adder" || name == "iscas85/c6288" {
            assert!(compared > 10, "{name}: {compared}");
        }
    }
}

/// The 128-bit ripple adder without carry-in has 255 AND levels and comes down
/// to 17 as Sklansky or Kogge–Stone (computed independently, facts §2.7; the
/// depth of the public circuit is in `facts.tsv`).
#[test]
fn a_128_bit_graph_comes_from_255_levels_to_17() {
    let word = Word::new(generators::Kind::Adder, 128, Cell::ALL[0]);
    let mut netlists = vec![("generated", aiger(&word.generate().circuit))];
    if let Some(folder) = support::datasets() {
        let bytes = std::fs::read(folder.join("epfl/adder.aig")).unwrap();
        netlists.push(("adder.aig", parse("adder.aig", &bytes)));
    }
    for (name, netlist) in netlists {
        let chains = chains_of(&netlist);
        assert_eq!(chains.len(), 1, "{name}");
        let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
        let topology = Topology::of(&netlist);
        let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
        let ground = Ground::of(&netlist, &topology, &timing, &settings);
        let plan = plan(&ground, &chains[0]);
        if name == "adder.aig" {
            assert_eq!(timing.longest(), 255);
            assert_eq!(plan.leaves, 255);
        }
        assert!(plan.on_longest_path);
        // Kogge–Stone is a level earlier than published levels say, since its
        // last-but-one position joins a lower span that is ready a level sooner.
        for (scheme, levels) in [("sklansky", 17), ("kogge-stone", 16)] {
            let best = plan
                .best_of_scheme
                .iter()
                .find(|proposal| proposal.fitted.scheme == scheme)
                .unwrap();
            assert_eq!(best.estimate.block_after, levels, "{name} {scheme}");
        }
        let recommended = &plan.proposals[plan.recommended.unwrap()];
        assert_eq!(recommended.estimate.block_after, 17, "{}", plan.reason);
        let over = recommended.takes_over.unwrap();
        assert!(over.through_chain);
        let site = Site::of(&ground, &chains[0]).unwrap();
        let run = DryRun::of(&site, &recommended.fitted.network, recommended.propagate);
        assert_eq!(run.estimate(), &recommended.estimate);
        let rebuilt = materialise(&run, "cw_").unwrap().netlist;
        let topology = Topology::of(&rebuilt);
        let again = Timing::of(&rebuilt, &topology, DelayModel::Unit);
        assert_eq!(again.longest(), recommended.estimate.block_after);
        let mut random = fastrand::Rng::with_seed(5);
        for round in 0..6 {
            let words = words(&netlist, &mut random, round);
            assert_eq!(results(&netlist, &words), results(&rebuilt, &words));
        }
    }
}

/// A hand-made netlist: two-bit adder among gates that a rebuild may reuse or
/// must keep, every count by hand.
#[test]
fn reuses_what_stays_and_removes_what_loses_its_last_use() {
    let mut b = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let net = |b: &mut NetlistBuilder, name: &str| {
        let id = b.name(name.as_bytes());
        b.add_net(Some(id), top).unwrap()
    };
    let [a0, a1, b0, b1] = ["a0", "a1", "b0", "b1"].map(|name| {
        let input = net(&mut b, name);
        b.add_input(input, 0);
        input
    });
    let mut line = 0;
    let mut gate = |b: &mut NetlistBuilder, function: Function, pins: &[NetId], name: &str| {
        let output = net(b, name);
        let id = b.function(function);
        line += 1;
        b.add_gate(id, pins, output, top, line).unwrap();
        output
    };
    let and = || Function::product(&[false; 2], false);
    let nor = || Function::product(&[true; 2], false);
    let or = || Function::product(&[true; 2], true);
    let xor = || Function::parity(2, false);
    let s0 = gate(&mut b, xor(), &[a0, b0], "s0");
    let g0 = gate(&mut b, and(), &[a0, b0], "c1");
    let p1 = gate(&mut b, xor(), &[a1, b1], "p1");
    let s1 = gate(&mut b, xor(), &[p1, g0], "s1");
    let t = gate(&mut b, and(), &[p1, g0], "t");
    // g1 is read from outside and stays; n1 is ~(a1 + b1) and stays.
    let g1 = gate(&mut b, and(), &[a1, b1], "g1");
    let n1 = gate(&mut b, nor(), &[a1, b1], "n1");
    let c2 = gate(&mut b, or(), &[g1, t], "c2");
    let out = gate(&mut b, and(), &[c2, n1], "out");
    let other = gate(&mut b, or(), &[g1, out], "other");
    for output in [s0, s1, c2, other] {
        b.add_output(Signal::plain(output), None, 0);
    }
    let netlist = b.finish();
    let bit = |net| Bit::Signal(Signal::plain(net));
    let chain = Chain {
        kind: chain::Kind::Adder,
        positions: vec![
            Position {
                a: bit(a0),
                b: bit(b0),
                sums: vec![Signal::plain(s0)],
                carries: vec![Signal::plain(g0)],
            },
            Position {
                a: bit(a1),
                b: bit(b1),
                sums: vec![Signal::plain(s1)],
                carries: vec![Signal::plain(c2)],
            },
        ],
        carry_in: Bit::Constant(false),
        has_carry_out: true,
        carry_form: chain::CarryForm::Carry,
        built_as: chain::BuiltAs::Ripple,
    };
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    assert_eq!(
        (settings.gate_inputs, settings.style),
        (2, GateStyle::SingleOperator)
    );
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chain).unwrap();
    let network = candidates(2, false, 2)[0].network.clone();
    let run = DryRun::of(&site, &network, Propagate::Or);
    compare(&ground, &run, &chain, "by hand");
    let estimate = run.estimate();
    // Removed: s0, c1, p1, s1, t, c2. Added: s0, g0 inside, half sum, s1, p·g0,
    // c2; g1 and p1 = ~n1 are reused.
    assert_eq!(estimate.gates_removed, 6);
    assert_eq!(estimate.gates_added, 6);
    assert_eq!((estimate.block_before, estimate.block_after), (5, 5));
    let with_xor = DryRun::of(&site, &network, Propagate::Xor);
    compare(&ground, &with_xor, &chain, "by hand");
    assert_eq!(with_xor.estimate().gates_added, 6);
}

/// A carry that nothing reads keeps its net in BLIF; the rest of the block is
/// the textbook ripple adder.
#[test]
fn a_result_that_nothing_reads_stays() {
    let text = ".model t\n.inputs a0 b0 a1 b1 a2 b2\n.outputs s0 s1 s2\n\
        .names a0 b0 s0\n10 1\n01 1\n.names a0 b0 c1\n11 1\n\
        .names a1 b1 c1 s1\n100 1\n010 1\n001 1\n111 1\n\
        .names a1 b1 c1 c2\n11- 1\n1-1 1\n-11 1\n\
        .names a2 b2 c2 s2\n100 1\n010 1\n001 1\n111 1\n\
        .names a2 b2 c2 unread\n11- 1\n1-1 1\n-11 1\n.end\n";
    let netlist = parse("t.blif", text.as_bytes());
    let mut chain = chains_of(&netlist).remove(0);
    let unread = netlist
        .nets()
        .find(|&net| netlist.net_name(net) == "unread")
        .unwrap();
    // Stated whether or not recognition lists what nothing reads.
    chain.positions[2].carries = vec![Signal::plain(unread)];
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    assert_eq!(settings.style, GateStyle::Cover);
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chain).unwrap();
    for (fitted, propagate) in options(&chain, settings.gate_inputs) {
        let run = DryRun::of(&site, &fitted.network, propagate);
        assert_eq!(run.estimate().gates_removed, 6);
        compare(&ground, &run, &chain, fitted.scheme);
    }
}

/// AND/inverter graph by hand: the second sum feeds only its own carry, which
/// nothing reads, so its operand, an AND of two inputs, loses its last use too.
#[test]
fn an_operand_that_no_new_gate_reads_is_swept() {
    // 2 a0, 4 b0, 6 x, 8 y; 10 = x·y; 12, 14 half sum and 16 = s0 of a0, b0;
    // 12 = c1; 18, 20, 22 = ~(c1 ⊕ 10); 24 = 10·~s1, the second carry.
    let text = "aag 12 4 0 1 8\n2\n4\n6\n8\n16\n10 6 8\n12 2 4\n14 3 5\n16 13 15\n\
        18 12 10\n20 13 11\n22 19 21\n24 10 23\n";
    let netlist = parse("t.aag", text.as_bytes());
    let by_variable = |variable: usize| {
        let ports = netlist.inputs();
        match variable {
            1..=4 => ports[variable - 1],
            _ => netlist.gate_output(netlist.gates().nth(variable - 5).unwrap()),
        }
    };
    let bit = |variable| Bit::Signal(Signal::plain(by_variable(variable)));
    let position = |a, b, sum, carry| Position {
        a,
        b,
        sums: vec![Signal::plain(by_variable(sum))],
        carries: vec![Signal::plain(by_variable(carry))],
    };
    let chain = Chain {
        kind: chain::Kind::Adder,
        positions: vec![
            position(bit(1), bit(2), 8, 6),
            // The second operand of the second position is 0.
            position(bit(5), Bit::Constant(false), 11, 12),
        ],
        carry_in: Bit::Constant(false),
        has_carry_out: false,
        carry_form: chain::CarryForm::Carry,
        built_as: chain::BuiltAs::Ripple,
    };
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chain).unwrap();
    for (fitted, propagate) in options(&chain, 2) {
        let run = DryRun::of(&site, &fitted.network, propagate);
        compare(&ground, &run, &chain, fitted.scheme);
        // All but 14, which s0 reads anew.
        assert_eq!(run.estimate().gates_removed, 8);
        assert_eq!(run.estimate().gates_added, 3);
    }
}

#[test]
fn refuses_a_chain_whose_operand_depends_on_it() {
    let mut b = NetlistBuilder::new();
    let top = ScopeId::new(0);
    let nets: Vec<NetId> = (0..6).map(|_| b.add_net(None, top).unwrap()).collect();
    for &net in &nets[..3] {
        b.add_input(net, 0);
    }
    let xor = b.function(Function::parity(2, false));
    b.add_gate(xor, &[nets[0], nets[1]], nets[3], top, 0)
        .unwrap();
    b.add_gate(xor, &[nets[3], nets[2]], nets[4], top, 0)
        .unwrap();
    b.add_gate(xor, &[nets[4], nets[2]], nets[5], top, 0)
        .unwrap();
    b.add_output(Signal::plain(nets[5]), None, 0);
    let netlist = b.finish();
    let position = |a: NetId, b: NetId, sum: NetId| Position {
        a: Bit::Signal(Signal::plain(a)),
        b: Bit::Signal(Signal::plain(b)),
        sums: vec![Signal::plain(sum)],
        carries: Vec::new(),
    };
    let chain = Chain {
        kind: chain::Kind::Adder,
        positions: vec![
            position(nets[0], nets[1], nets[3]),
            position(nets[4], nets[2], nets[5]),
        ],
        carry_in: Bit::Constant(false),
        has_carry_out: false,
        carry_form: chain::CarryForm::Carry,
        built_as: chain::BuiltAs::Mixed,
    };
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let plan = plan(&ground, &chain);
    let not_planned = plan.not_planned.unwrap();
    assert_eq!(
        not_planned.why,
        "operand bit 1 depends on the chain's own results"
    );
    assert_eq!(not_planned.slack, Some(0));
}

#[test]
fn a_chain_with_slack_is_not_planned() {
    let word = Word::new(generators::Kind::Adder, 4, Cell::PropagateXor);
    let mut circuit = word.generate().circuit;
    let mut at = circuit.input("slow");
    for _ in 0..100 {
        at = circuit.not(at);
    }
    circuit.output(at, "late");
    let netlist = blif(&circuit);
    let chains = chains_of(&netlist);
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    let not_planned = planned.not_planned.unwrap();
    let slack = not_planned.slack.unwrap();
    assert_eq!(slack, 100 - planned.leaves);
    assert!(
        not_planned.why.contains("more than the margin of 10"),
        "{}",
        not_planned.why
    );
    assert!(planned.proposals.is_empty());
    // With a margin as wide it is planned, and nothing is gained by it.
    let settings = Settings {
        margin: Some(slack),
        ..settings
    };
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    assert_eq!(planned.not_planned, None);
    assert_eq!(planned.recommended, None);
    assert!(
        planned
            .reason
            .starts_with("another input→output path of 100"),
        "{}",
        planned.reason
    );
}

/// What takes over is measured on the rebuilt netlist: its end is the latest.
#[test]
fn says_which_path_takes_over() {
    let word = Word::new(generators::Kind::Adder, 16, Cell::PropagateXor);
    let mut circuit = word.generate().circuit;
    let mut at = circuit.input("slow");
    for _ in 0..20 {
        at = circuit.not(at);
    }
    circuit.output(at, "late");
    let netlist = blif(&circuit);
    let chains = chains_of(&netlist);
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    let recommended = &planned.proposals[planned.recommended.unwrap()];
    assert_eq!(recommended.estimate.block_after, 20, "{}", planned.reason);
    assert!(
        planned
            .reason
            .starts_with("the cheapest that takes carry off")
    );
    let over = recommended.takes_over.unwrap();
    assert!(!over.through_chain);
    assert_eq!(over.end.describe(&netlist), "late");
    // No cheaper proposal of the front does the same.
    for proposal in &planned.proposals {
        let cheaper =
            proposal.estimate.gate_equivalents_added < recommended.estimate.gate_equivalents_added;
        assert!(!cheaper || proposal.kind.chain_is_on_it());
    }
}

/// The front by its definition, over the proposals themselves.
#[test]
fn no_listed_proposal_beats_another() {
    let word = Word::new(generators::Kind::Adder, 24, Cell::PropagateXor);
    let netlist = blif(&word.generate().circuit);
    let chains = chains_of(&netlist);
    let request = request(DelayModel::Unit, NewGates::SingleOperator, 4);
    let settings = Settings::resolve(request, &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let planned = plan(&ground, &chains[0]);
    assert!(planned.proposals.len() > 2);
    let measures = planned.proposals.iter().map(|proposal| {
        let e = &proposal.estimate;
        [
            e.block_after as usize,
            e.chain_after as usize,
            e.gate_equivalents_added,
            e.largest_fan_in,
        ]
    });
    let measures: Vec<_> = measures.collect();
    for (i, one) in measures.iter().enumerate() {
        for (j, other) in measures.iter().enumerate() {
            assert!(i == j || one.iter().zip(other).any(|(a, b)| a > b) || one == other);
        }
    }
    for proposal in planned.proposals.iter().chain(&planned.best_of_scheme) {
        assert!(proposal.above_bound >= 0);
    }
}

/// ⌈log_F m⌉ by its definition for equal arrivals; for others a worked case.
#[test]
fn the_bound_is_the_depth_of_the_best_tree() {
    for inputs in 1..200usize {
        for width in 2..6usize {
            let levels = (0..).find(|&level| width.pow(level) >= inputs).unwrap();
            assert_eq!(earliest(&vec![0; inputs], width), levels as i32);
        }
    }
    assert_eq!(earliest(&[7], 2), 7);
    // Four at 0 make one at 2; with one at 2 that is 3, with one at 5 it is 6.
    assert_eq!(earliest(&[0, 0, 0, 0, 2], 2), 3);
    assert_eq!(earliest(&[0, 0, 0, 0, 5], 2), 6);
    assert_eq!(earliest(&[], 2), 0);
}

#[test]
fn settings_follow_the_netlist_and_refuse_what_it_cannot_have() {
    let word = Word::new(generators::Kind::Adder, 4, Cell::PropagateXor);
    let graph = aiger(&word.generate().circuit);
    let ask = |netlist: &Netlist, new_gates, gate_inputs| {
        let request = Request {
            new_gates,
            gate_inputs,
            ..Request::new(DelayModel::Unit)
        };
        Settings::resolve(request, netlist)
    };
    assert_eq!(ask(&graph, None, None).unwrap().gate_inputs, 2);
    assert_eq!(
        ask(&graph, None, Some(3)),
        Err(SettingsError::TooWideForAiger(3))
    );
    let cover = Some(NewGates::Cover);
    assert_eq!(ask(&graph, cover, None), Err(SettingsError::CoverInAiger));
    let with = |text: &str| parse("t.blif", text.as_bytes());
    let narrow = with(".model t\n.inputs a b\n.outputs y\n.names a b y\n11 1\n.end\n");
    assert_eq!(ask(&narrow, None, None).unwrap().gate_inputs, 2);
    assert_eq!(
        ask(&narrow, None, Some(1)),
        Err(SettingsError::TooFewInputs(1))
    );
    assert_eq!(
        ask(&narrow, cover, Some(7)),
        Err(SettingsError::TooWideForCover(7))
    );
    let wide = with(".model t\n.inputs a b c d e\n.outputs y\n.names a b c d e y\n11111 1\n.end\n");
    let settings = ask(&wide, None, None).unwrap();
    assert_eq!(
        (settings.gate_inputs, settings.new_gates),
        (4, NewGates::SingleOperator)
    );
    assert!(settings.gate_inputs_reason.contains("has 5"));
    let table = with(".model t\n.inputs a b c\n.outputs y\n.names a b c y\n11- 1\n--1 1\n.end\n");
    let settings = ask(&table, None, None).unwrap();
    assert_eq!(
        (settings.gate_inputs, settings.new_gates),
        (3, NewGates::Cover)
    );
}

/// A ripple adder of XOR/AND/OR cells: with free carries a sum is two gates.
#[test]
fn free_carries_leave_the_depth_of_the_cells() {
    let word = Word::new(generators::Kind::Adder, 16, Cell::PropagateXor);
    let netlist = blif(&word.generate().circuit);
    let chains = chains_of(&netlist);
    let settings = Settings::resolve(Request::new(DelayModel::Unit), &netlist).unwrap();
    let topology = Topology::of(&netlist);
    let timing = Timing::of(&netlist, &topology, DelayModel::Unit);
    let ground = Ground::of(&netlist, &topology, &timing, &settings);
    let site = Site::of(&ground, &chains[0]).unwrap();
    assert_eq!(site.own_gates().len(), netlist.gate_count());
    let free = depth_with_free_carry(&ground, &chains);
    assert!(timing.longest() > 30);
    assert_eq!(free.into_values().collect::<Vec<_>>(), [2]);
}
