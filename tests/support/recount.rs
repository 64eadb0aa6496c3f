//! A dry run against the netlist made from it: built, measured from nothing, and
//! its function compared with the original's by simulation. Files that use this
//! declare `mod generators;` too.

#![allow(dead_code)]

use crate::generators::{Aig, Circuit, Generated};
use carrywise::chain::{self, Chain, Position};
use carrywise::format::{ReadOptions, read};
use carrywise::netlist::{Driver, Netlist, Signal, Topology, histogram};
use carrywise::network::Propagate;
use carrywise::network::schemes::candidates_for;
use carrywise::plan::{
    DryRun, Estimate, Ground, NewGates, Rebuilt, Request, Settings, Site, materialise,
};
use carrywise::timing::{DelayModel, Timing};

pub fn parse(name: &str, bytes: &[u8]) -> Netlist {
    let source = carrywise::source::read(name, bytes).unwrap();
    match read(&source, &ReadOptions::default()) {
        Ok(parsed) => parsed.netlist,
        Err(errors) => panic!("{name}: {errors:?}"),
    }
}

pub fn chains_of(netlist: &Netlist) -> Vec<Chain> {
    let options = chain::Options {
        min_bits: 3,
        ..chain::Options::default()
    };
    chain::find(netlist, &Topology::of(netlist), options).chains
}

/// Values of all nets on 64 patterns: inputs and then register outputs take the
/// words given, cut nets and box outputs one made from their name.
pub fn simulate(netlist: &Netlist, words: &[u64]) -> Vec<u64> {
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
pub fn results(netlist: &Netlist, words: &[u64]) -> Vec<u64> {
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

pub fn words(netlist: &Netlist, random: &mut fastrand::Rng, round: usize) -> Vec<u64> {
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

pub fn equivalents(netlist: &Netlist) -> usize {
    let pins = netlist.gates().map(|gate| netlist.fan_ins(gate).len());
    pins.map(|k| k.saturating_sub(1)).sum()
}

/// Compares one dry run with the netlist made from it.
pub fn compare(ground: &Ground<'_>, run: &DryRun<'_, '_>, chain: &Chain, what: &str) {
    let rebuilt = materialise(run, "cw_").unwrap();
    compare_rebuilt(ground, &rebuilt, run.estimate(), &[chain], what);
}

/// Compares an estimate for some chains with the netlist made from it.
pub fn compare_rebuilt(
    ground: &Ground<'_>,
    rebuilt: &Rebuilt,
    estimate: &Estimate,
    chains: &[&Chain],
    what: &str,
) {
    let old = ground.netlist;
    let new = &rebuilt.netlist;
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
    // Only new gates have no source line; in binary files none has one, and
    // what is said of the new gates alone is left to the text form.
    let has_lines = old.gates().any(|gate| old.gate_line(gate) != 0);
    let made: Vec<_> = new
        .gates()
        .filter(|&gate| new.gate_line(gate) == 0)
        .collect();
    if has_lines {
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
    }
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
    let positions = chains.iter().flat_map(|chain| &chain.positions);
    let signals = positions.flat_map(results_of).flatten();
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
pub fn compare_all(netlist: &Netlist, request: Request, what: &str) -> usize {
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
        for (fitted, propagate) in options(&site) {
            let what = format!(
                "{what}: {number} {} {:?} {propagate:?} F={}",
                fitted.scheme, fitted.settings, settings.gate_inputs
            );
            let run = DryRun::of(&site, &fitted.network, propagate);
            compare(&ground, &run, chain, &what);
            compared += 1;
        }
    }
    compared
}

pub fn options(
    site: &Site<'_>,
) -> impl Iterator<Item = (carrywise::network::schemes::Fitted, Propagate)> {
    candidates_for(&site.profile())
        .into_iter()
        .flat_map(|fitted| {
            [Propagate::Or, Propagate::Xor].map(|propagate| (fitted.clone(), propagate))
        })
}

pub fn request(model: DelayModel, new_gates: NewGates, gate_inputs: usize) -> Request {
    Request {
        new_gates: Some(new_gates),
        gate_inputs: Some(gate_inputs),
        ..Request::new(model)
    }
}

pub fn blif(circuit: &Circuit) -> Netlist {
    parse("generated.blif", circuit.blif().as_bytes())
}

pub fn aiger(circuit: &Circuit) -> Netlist {
    parse("generated.aag", Aig::of(circuit).aag().as_bytes())
}

/// All the ways a small word is checked.
pub fn compare_word(generated: &Generated) -> usize {
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
