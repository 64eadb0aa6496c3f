//! The subject graph, its signatures and the prover against exhaustive
//! evaluation of the netlist itself.

mod generators;

use carrywise::format::{ReadOptions, read};
use carrywise::netlist::{Netlist, Topology};
use carrywise::prove::{Answer, Effort, Prover};
use carrywise::source::Source;
use carrywise::subject::{Literal, NodeId, NodeKind, Patterns, Signatures, Simulation, Subject};
use generators::{Cell, Kind, Random, Word, negatives};

const EFFORT: Effort = Effort {
    conflicts: 100_000,
    nodes: 1_000_000,
};

fn parse(text: &str) -> Netlist {
    let source = Source {
        name: "proofs".into(),
        bytes: text.as_bytes().to_vec(),
    };
    match read(&source, &ReadOptions::default()) {
        Ok(parsed) => parsed.netlist,
        Err(errors) => panic!("{errors:?}"),
    }
}

fn subject(netlist: &Netlist) -> Subject {
    Subject::of(netlist, &Topology::of(netlist))
}

/// The value of every net for every input vector, 64 vectors a word.
fn exhausted(netlist: &Netlist) -> Vec<Vec<u64>> {
    let inputs = netlist.inputs().len();
    assert!((6..=16).contains(&inputs));
    let topology = Topology::of(netlist);
    let mut values = vec![vec![0; 1 << (inputs - 6)]; netlist.net_count()];
    let words = 1usize << (inputs - 6);
    let mut now = vec![0; netlist.net_count()];
    for word in 0..words {
        for (i, net) in netlist.inputs().iter().enumerate() {
            now[net.index()] = match i {
                0..6 => carrywise::netlist::function::PIN[i],
                _ if word >> (i - 6) & 1 == 1 => !0,
                _ => 0,
            };
        }
        for &gate in &topology.order {
            let pins: Vec<u64> = netlist
                .fan_ins(gate)
                .iter()
                .map(|net| now[net.index()])
                .collect();
            now[netlist.gate_output(gate).index()] = netlist.function(gate).evaluate(&pins);
        }
        for (values, &value) in values.iter_mut().zip(&now) {
            values[word] = value;
        }
    }
    values
}

fn small_circuits() -> Vec<Netlist> {
    let mut circuits: Vec<Netlist> = Cell::ALL
        .map(|cell| parse(&Word::new(Kind::Adder, 4, cell).generate().circuit.blif()))
        .into();
    circuits.extend((0..6).map(|seed| parse(&negatives::random_logic(9, 120, seed).blif())));
    circuits
}

#[test]
fn nets_of_one_node_have_one_function() {
    for netlist in small_circuits() {
        let (subject, values) = (subject(&netlist), exhausted(&netlist));
        for left in netlist.nets() {
            for right in netlist.nets() {
                let (l, r) = (subject.of_net(left), subject.of_net(right));
                if l == r {
                    assert_eq!(values[left.index()], values[right.index()]);
                }
                if l == !r {
                    assert!(
                        values[left.index()]
                            .iter()
                            .zip(&values[right.index()])
                            .all(|(a, b)| *a == !b)
                    );
                }
            }
        }
    }
}

#[test]
fn proves_exactly_what_exhaustion_shows_and_refutes_with_a_witness() {
    for netlist in small_circuits() {
        let (subject, values) = (subject(&netlist), exhausted(&netlist));
        let topology = Topology::of(&netlist);
        let mut prover = Prover::new(&subject, EFFORT, []);
        let mut random = Random::new(3);
        let nets: Vec<_> = netlist.nets().collect();
        for _ in 0..150 {
            let (left, right) = (
                nets[random.below(nets.len())],
                nets[random.below(nets.len())],
            );
            let (l, r) = (subject.of_net(left), subject.of_net(right));
            let (x, y) = (prover.literal(l), prover.literal(r));
            let equal = values[left.index()] == values[right.index()];
            match prover.equal(x, y) {
                Answer::Proven => assert!(equal),
                Answer::Undecided => panic!("nothing here is hard"),
                Answer::Refuted(witness) => {
                    assert!(!equal);
                    let mut words = vec![0u64; netlist.net_count()];
                    for (node, value) in witness {
                        let NodeKind::Free(net) = subject.kind(node) else {
                            panic!("a witness names free nets")
                        };
                        words[net.index()] = u64::from(value);
                    }
                    for &gate in &topology.order {
                        let pins: Vec<u64> = netlist
                            .fan_ins(gate)
                            .iter()
                            .map(|net| words[net.index()])
                            .collect();
                        words[netlist.gate_output(gate).index()] =
                            netlist.function(gate).evaluate(&pins);
                    }
                    assert_ne!(words[left.index()] & 1, words[right.index()] & 1);
                }
            }
        }
    }
}

/// Under stops a cone is freer than it is; what is proven there still holds,
/// and what is refuted there is asked again further down.
#[test]
fn stops_change_no_answer() {
    for netlist in small_circuits() {
        let (subject, values) = (subject(&netlist), exhausted(&netlist));
        let mut random = Random::new(5);
        let nets: Vec<_> = netlist.nets().collect();
        for _ in 0..60 {
            let stops: Vec<NodeId> = (0..6)
                .map(|_| subject.of_net(nets[random.below(nets.len())]).node())
                .collect();
            let mut prover = Prover::new(&subject, EFFORT, stops);
            for _ in 0..6 {
                let (left, right) = (
                    nets[random.below(nets.len())],
                    nets[random.below(nets.len())],
                );
                let (l, r) = (subject.of_net(left), subject.of_net(right));
                let (x, y) = (prover.literal(l), prover.literal(r));
                let equal = values[left.index()] == values[right.index()];
                assert_eq!(prover.equal(x, y) == Answer::Proven, equal);
            }
        }
    }
}

#[test]
fn stops_at_the_effort_and_says_so() {
    // Multiplication is commutative, and hard to see bit by bit (common
    // practice, no source): 8×8 partial products summed in two orders.
    let mut text = String::from(".model m\n.inputs");
    for i in 0..8 {
        text.push_str(&format!(" a{i} b{i}"));
    }
    text.push_str("\n.outputs l r\n");
    for (side, x, y) in [("l", "a", "b"), ("r", "b", "a")] {
        for i in 0..8 {
            for j in 0..8 {
                text.push_str(&format!(".names {x}{i} {y}{j} {side}p{i}_{j}\n11 1\n"));
            }
        }
        let mut row: Vec<String> = (0..16)
            .map(|k| {
                if k < 8 {
                    format!("{side}p0_{k}")
                } else {
                    format!("{side}zero")
                }
            })
            .collect();
        text.push_str(&format!(".names {side}zero\n"));
        for i in 1..8 {
            let mut carry = format!("{side}zero");
            for (k, r) in row.iter_mut().enumerate().skip(i) {
                let p = if k - i < 8 {
                    format!("{side}p{i}_{}", k - i)
                } else {
                    format!("{side}zero")
                };
                let (s, c) = (format!("{side}s{i}_{k}"), format!("{side}c{i}_{k}"));
                text.push_str(&format!(
                    ".names {p} {r} {carry} {s}\n100 1\n010 1\n001 1\n111 1\n"
                ));
                text.push_str(&format!(
                    ".names {p} {r} {carry} {c}\n11- 1\n1-1 1\n-11 1\n"
                ));
                (*r, carry) = (s, c);
            }
        }
        text.push_str(&format!(".names {} {side}\n1 1\n", row[12]));
    }
    let netlist = parse(&text);
    let subject = subject(&netlist);
    let ask = |effort: Effort| {
        let mut prover = Prover::new(&subject, effort, []);
        let outputs = netlist.outputs();
        let (l, r) = (
            subject.of_signal(outputs[0].signal),
            subject.of_signal(outputs[1].signal),
        );
        let (x, y) = (prover.literal(l), prover.literal(r));
        prover.equal(x, y)
    };
    assert_eq!(
        ask(Effort {
            conflicts: 20,
            nodes: 1_000_000
        }),
        Answer::Undecided
    );
    assert_eq!(
        ask(Effort {
            conflicts: 1_000_000,
            nodes: 50
        }),
        Answer::Undecided
    );
}

#[test]
fn signatures_are_linear_and_blind_to_complement() {
    let netlist = parse(&negatives::random_logic(40, 600, 2).blif());
    let mut subject = subject(&netlist);
    let nodes: Vec<NodeId> = subject.nodes().collect();
    let mut random = Random::new(9);
    let mut xors: Vec<(NodeId, NodeId, Literal)> = Vec::new();
    for _ in 0..200 {
        let (a, b) = (
            nodes[random.below(nodes.len())],
            nodes[random.below(nodes.len())],
        );
        let c = subject.xor(a.literal(), !b.literal());
        xors.push((a, b, c));
    }
    let patterns = Patterns::new(4, 24);
    let signatures = Signatures::of(&subject, &patterns);
    for (a, b, c) in xors {
        assert_eq!(
            signatures.hash(a) ^ signatures.hash(b),
            signatures.hash(c.node())
        );
    }
    assert_eq!(signatures.hash(NodeId::FALSE), 0);
    // Nodes with one signature agree on every pattern, up to complement.
    let mut simulation = Simulation::new(&subject, &patterns);
    while let Some(words) = simulation.advance() {
        for pair in nodes.windows(2) {
            if signatures.hash(pair[0]) == signatures.hash(pair[1]) {
                let flip = signatures.first(pair[0]) != signatures.first(pair[1]);
                let other = words[pair[1].index()] ^ if flip { !0 } else { 0 };
                assert_eq!(words[pair[0].index()], other);
            }
        }
    }
}

#[test]
fn directed_patterns_reach_what_random_ones_do_not() {
    // A 40-input AND is 1 under one pattern in a million million.
    let mut text = String::from(".model m\n.inputs");
    let mut rest = String::new();
    for i in 0..40 {
        text.push_str(&format!(" x{i}"));
        let below = if i == 0 {
            "x0".to_owned()
        } else {
            format!("c{}", i - 1)
        };
        rest.push_str(&format!(".names x{i} {below} c{i}\n11 1\n"));
    }
    text.push_str(&format!("\n.outputs c39\n{rest}"));
    let netlist = parse(&text);
    let subject = subject(&netlist);
    let top = subject.of_signal(netlist.outputs()[0].signal);
    let reached = |patterns: &Patterns| {
        let mut simulation = Simulation::new(&subject, patterns);
        let mut ones = 0;
        while let Some(words) = simulation.advance() {
            ones += words[top.node().index()].count_ones();
        }
        ones
    };
    let mut patterns = Patterns::new(1, 2);
    assert_eq!(reached(&patterns), 0);
    let targets: Vec<Literal> = carrywise::subject::rare_values(&subject, &patterns, 8);
    patterns.direct(&subject, &targets, 8);
    assert!(reached(&patterns) > 0);
}

/// A ripple adder's claims, by hand: `a + b` of four bits.
const FOUR_BITS: &str = ".model four\n.inputs a0 b0 a1 b1 a2 b2 a3 b3\n.outputs s0 s1 s2 s3 c4\n\
    .names a0 b0 s0\n10 1\n01 1\n.names a0 b0 c1\n11 1\n\
    .names a1 b1 c1 s1\n100 1\n010 1\n001 1\n111 1\n.names a1 b1 c1 c2\n11- 1\n1-1 1\n-11 1\n\
    .names a2 b2 c2 s2\n100 1\n010 1\n001 1\n111 1\n.names a2 b2 c2 c3\n11- 1\n1-1 1\n-11 1\n\
    .names a3 b3 c3 s3\n100 1\n010 1\n001 1\n111 1\n.names a3 b3 c3 c4\n11- 1\n1-1 1\n-11 1\n.end\n";

#[test]
fn decision_diagrams_confirm_true_claims_and_contradict_false_ones() {
    use carrywise::prove::{Claim, Witness, witness};
    let netlist = parse(FOUR_BITS);
    let topology = Topology::of(&netlist);
    let subject = Subject::of(&netlist, &topology);
    let literal = |name: &str| {
        let net = netlist.nets().find(|&net| netlist.net_name(net) == name);
        subject.of_net(net.expect("it is in the text"))
    };
    let told = |third_sum: &str, third_carry: &str| {
        let results: Vec<_> = (0..4)
            .map(|i| {
                let (sum, carry) = (format!("s{i}"), format!("c{}", i + 1));
                let sum = if i == 2 { third_sum } else { &sum };
                let carry = if i == 2 { third_carry } else { &carry };
                ([literal(sum)], [literal(carry)])
            })
            .collect();
        let claims: Vec<Claim<'_>> = results
            .iter()
            .enumerate()
            .map(|(i, (sum, carry))| Claim {
                a: literal(&format!("a{i}")),
                b: literal(&format!("b{i}")),
                sums: sum,
                carries: carry,
            })
            .collect();
        witness(&subject, Literal::FALSE, &claims)
    };
    assert_eq!(told("s2", "c3"), Witness::Agrees);
    assert_eq!(told("s3", "c3"), Witness::Contradicts);
    assert_eq!(told("s2", "c4"), Witness::Contradicts);
}
