//! Recognition against circuits of known content: every kind of word, cell and
//! embedding, at gate level and as AND/inverter graphs.
//!
//! The truth comes from the generators, which check it against integer
//! arithmetic and know nothing of the crate. What is reported is checked again
//! by simulating the netlist as read: a chain is a theorem, so one pattern that
//! breaks it is a fault.

mod generators;
mod support;

use carrywise::chain::{BuiltAs, Chain, Found, Kind, Options, find};
use carrywise::format::{ReadOptions, read};
use carrywise::netlist::{Bit, Netlist, Signal, Topology};
use carrywise::source::Source;
use generators::{
    Aig, Architecture, Cell, Extension, Generated, Random, Truth, Word, accumulator,
    adder_subtractor, counter, disguise, gated_operands, negatives, selected_sums, series_adders,
    with_overflow,
};
use std::collections::BTreeSet;

fn parse(name: &str, bytes: Vec<u8>) -> Netlist {
    let source = Source {
        name: name.into(),
        bytes,
    };
    match read(&source, &ReadOptions::default()) {
        Ok(parsed) => parsed.netlist,
        Err(errors) => panic!("{name}: {errors:?}"),
    }
}

fn recognise(netlist: &Netlist) -> Found {
    find(netlist, &Topology::of(netlist), Options::default())
}

/// Simulates the netlist on random words and holds every chain to its claim.
fn check_theorems(label: &str, netlist: &Netlist, chains: &[Chain]) {
    let topology = Topology::of(netlist);
    let mut random = Random::new(7);
    for _ in 0..8 {
        let mut words: Vec<u64> = (0..netlist.net_count()).map(|_| random.word()).collect();
        for net in netlist.nets() {
            if let carrywise::netlist::Driver::Constant(value) = netlist.driver(net) {
                words[net.index()] = if value { !0 } else { 0 };
            }
        }
        for &gate in &topology.order {
            let pins: Vec<u64> = netlist
                .fan_ins(gate)
                .iter()
                .map(|net| words[net.index()])
                .collect();
            words[netlist.gate_output(gate).index()] = netlist.function(gate).evaluate(&pins);
        }
        let signal = |s: Signal| words[s.net.index()] ^ if s.inverted { !0 } else { 0 };
        let bit = |b: Bit| match b {
            Bit::Constant(value) => {
                if value {
                    !0
                } else {
                    0
                }
            }
            Bit::Signal(s) => signal(s),
        };
        for chain in chains {
            let mut carry = bit(chain.carry_in);
            for (i, position) in chain.positions.iter().enumerate() {
                let (a, b) = (bit(position.a), bit(position.b));
                assert!(
                    !position.sums.is_empty(),
                    "{label}: position {i} has no sum"
                );
                for &sum in &position.sums {
                    assert_eq!(signal(sum), a ^ b ^ carry, "{label}: sum {i}");
                }
                carry = (a & b) | (carry & (a | b));
                for &net in &position.carries {
                    assert_eq!(signal(net), carry, "{label}: carry {i}");
                }
            }
        }
    }
}

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
    if chain.kind.word() != kind_word(truth.kind) {
        return Some(format!("told as {}", chain.kind.word()));
    }
    let operands =
        |chain: &Chain, pick: fn(&carrywise::chain::Position) -> Bit| -> Vec<Option<String>> {
            chain
                .positions
                .iter()
                .map(|p| pick(p).signal().map(|s| netlist.net_name(s.net)))
                .collect()
        };
    let names = |nets: &[generators::Net]| -> Vec<Option<String>> {
        let mut names: Vec<_> = generated.names(nets).into_iter().map(Some).collect();
        names.resize(wanted.len(), None);
        names
    };
    let (a, b) = (operands(chain, |p| p.a), operands(chain, |p| p.b));
    let (x, y) = (names(&truth.a), names(&truth.b));
    let is_swapped = chain.kind == Kind::Adder && a == y && b == x;
    if !(a == x && b == y || is_swapped) {
        return Some(format!("operands {a:?} and {b:?}"));
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
        let wanted = (kind_word(truth.kind), truth.bits());
        match open.iter().position(|&seen| seen == wanted) {
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
