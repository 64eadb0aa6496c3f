//! The generators, checked before anything relies on them: every word against
//! integer arithmetic (u128), every written text against the circuit it came
//! from, by readers that see the text only. Gate counts named here are the
//! known ones: nine NAND2 per full adder, seven ANDs per full adder and three
//! per half adder in an AND/inverter graph (textbook, from memory).

mod generators;

use generators::{
    Addend, Aig, Architecture, Carry, Cell, Cells, Circuit, Comparator, Extension, Generated, Kind,
    Random, Reduction, Word, accumulator, adder_hierarchy, adder_subtractor, corpus, counter,
    disguise, divider, gated_operands, mapped, multiplier, negatives, replicated, selected_sums,
    series, series_adders, square_root, squarer, with_overflow, witness,
};

fn must_hold(generated: &Generated) {
    if let Err(fault) = generated.check(12) {
        panic!("{fault}");
    }
}

/// Outputs and next states by the circuit's own evaluation.
fn outcome(circuit: &Circuit, inputs: &[u64], state: &[u64]) -> witness::Outcome {
    let values = circuit.evaluate(inputs, state);
    let outputs = circuit.outputs.iter().map(|net| values[net.index()]);
    let next = circuit.registers.iter().map(|r| values[r.next.index()]);
    (outputs.collect(), next.collect())
}

/// The three written forms must mean what the circuit means.
fn texts_agree(circuit: &Circuit) {
    let mut random = Random::new(3);
    let inputs: Vec<u64> = circuit.inputs.iter().map(|_| random.word()).collect();
    let state: Vec<u64> = circuit.registers.iter().map(|_| random.word()).collect();
    let expected = outcome(circuit, &inputs, &state);
    let name = &circuit.name;
    let blif = witness::blif(&circuit.blif(), &inputs, &state);
    assert_eq!(blif, expected, "BLIF of {name}");
    let graph = Aig::of(circuit);
    let ascii = witness::aiger(graph.aag().as_bytes(), &inputs, &state);
    assert_eq!(ascii, expected, "ASCII AIGER of {name}");
    let binary = witness::aiger(&graph.aig(), &inputs, &state);
    assert_eq!(binary, expected, "binary AIGER of {name}");
}

#[test]
fn ripple_words_compute_what_they_say_for_every_operand() {
    for bits in 1..=4 {
        for word in Word::every_ripple(bits) {
            must_hold(&word.generate());
        }
    }
}

#[test]
fn wide_ripple_words_compute_what_they_say() {
    for bits in [7, 32, 65, 120, 128] {
        for word in Word::every_ripple(bits) {
            must_hold(&word.generate());
        }
    }
}

#[test]
fn other_architectures_compute_what_they_say() {
    for bits in [1, 2, 3, 4, 5, 9, 16, 64, 101] {
        for word in Word::every_fast(bits) {
            must_hold(&word.generate());
        }
    }
}

#[test]
fn a_wrong_truth_is_noticed() {
    let mut wrong = Word::new(Kind::Adder, 8, Cell::PropagateXor).generate();
    wrong.truths[0].kind = Kind::Subtractor;
    assert!(wrong.check(1).is_err());
    let mut swapped = Word::new(Kind::Adder, 8, Cell::Nand).generate();
    swapped.truths[0].sums.swap(2, 3);
    assert!(swapped.check(1).is_err());
    let mut carry = Word::new(Kind::Subtractor, 8, Cell::Nor).generate();
    carry.truths[0].carry_out = Some(carry.truths[0].sums[7]);
    assert!(carry.check(4).is_err());
}

#[test]
fn embedded_words_compute_what_they_say() {
    for cell in Cell::ALL {
        for kind in [
            Kind::Adder,
            Kind::Subtractor,
            Kind::Incrementer,
            Kind::Decrementer,
        ] {
            let word = Word::new(kind, 11, cell);
            must_hold(&gated_operands(word));
            must_hold(&selected_sums(word));
        }
        must_hold(&adder_subtractor(12, cell));
        must_hold(&with_overflow(10, cell));
        must_hold(&counter(9, false, cell));
        must_hold(&counter(9, true, cell));
        must_hold(&series_adders(8, 4, cell));
        for extension in [Extension::Zero, Extension::Sign] {
            must_hold(&accumulator(14, 8, extension, cell));
        }
        must_hold(&accumulator(9, 9, Extension::Zero, cell));
    }
}

#[test]
fn disguised_words_compute_the_same_and_keep_no_name() {
    for (seed, word) in Word::every_ripple(6).into_iter().enumerate() {
        let mut generated = word.generate();
        disguise(&mut generated.circuit, seed as u64);
        must_hold(&generated);
        texts_agree(&generated.circuit);
        assert!(!generated.circuit.blif().contains("a[0]"));
    }
}

#[test]
fn written_texts_mean_what_the_circuit_means() {
    for bits in [1, 5] {
        for word in Word::every_ripple(bits)
            .into_iter()
            .chain(Word::every_fast(bits))
        {
            texts_agree(&word.generate().circuit);
        }
    }
    for cell in Cell::ALL {
        texts_agree(&accumulator(10, 6, Extension::Sign, cell).circuit);
        texts_agree(&counter(10, true, cell).circuit);
    }
    for circuit in negatives::all() {
        texts_agree(&circuit);
    }
    texts_agree(&replicated(3_000, 5));
    texts_agree(&series(500));
}

#[test]
fn instances_of_full_adders_are_the_flat_adder() {
    for cell in Cell::ALL {
        if cell == Cell::InvertedCarries {
            continue;
        }
        let hierarchy = adder_hierarchy(9, cell);
        let word = Word::new(Kind::Adder, 9, cell).generate();
        let mut random = Random::new(8);
        let inputs: Vec<u64> = (0..18).map(|_| random.word()).collect();
        let expected = outcome(&word.circuit, &inputs, &[]);
        assert_eq!(witness::blif(&hierarchy.blif(), &inputs, &[]), expected);
        assert_eq!(outcome(&hierarchy.flatten(), &inputs, &[]), expected);
        assert_eq!(hierarchy.flatten().gate_count(), word.circuit.gate_count());
    }
}

#[test]
fn cells_cost_what_the_textbook_says() {
    let gates = |cell: Cell| {
        let mut c = Circuit::new("cell");
        let (a, b, x) = (c.input("a"), c.input("b"), c.input("c"));
        cell.step(&mut c, a, Addend::Net(b), Carry::Net(x));
        c
    };
    assert_eq!(gates(Cell::Nand).gate_count(), 9);
    assert_eq!(gates(Cell::Nor).gate_count(), 9);
    assert_eq!(gates(Cell::PropagateXor).gate_count(), 5);
    assert_eq!(gates(Cell::MajorityCover).gate_count(), 2);
    assert_eq!(Aig::of(&gates(Cell::PropagateXor)).ands.len(), 7);
    assert_eq!(Aig::of(&gates(Cell::AndInverter)).ands.len(), 7);
    // n full adders less one half adder, 7 and 3 ANDs; two levels a bit.
    let ripple = Word::new(Kind::Adder, 128, Cell::PropagateXor).generate();
    let graph = Aig::of(&ripple.circuit);
    assert_eq!(graph.ands.len(), 127 * 7 + 3);
    assert_eq!(ripple.circuit.depth(), 2 * 128 - 1);
}

#[test]
fn fast_architectures_are_as_shallow_as_published() {
    // Hamacher, Vranesic and Zaky's table (from memory): the sum of a 16-bit
    // adder with two-level lookahead in groups of four is ready after 8 gate
    // delays with carry-in, that of a 64-bit one after 12.
    let depth = |architecture, bits| {
        let word = Word {
            architecture,
            carry_in: false,
            ..Word::new(Kind::Adder, bits, Cell::PropagateXor)
        };
        word.generate().circuit.depth()
    };
    assert_eq!(depth(Architecture::GroupLookahead(4), 16), 8);
    assert_eq!(depth(Architecture::GroupLookahead(4), 64), 12);
    // g and p, then log2 n cells of an AND and an OR to the carry-out; the top
    // sum reads a carry over one position less, which is an OR earlier.
    assert_eq!(depth(Architecture::KoggeStone, 64), 1 + 2 * 6);
}

#[test]
fn large_netlists_have_the_size_asked_for_and_no_growing_depth() {
    let small = replicated(10_000, 1);
    let large = replicated(100_000, 1);
    assert_eq!(small.gate_count(), 10_000);
    assert_eq!(large.gate_count(), 100_000);
    assert!(
        large.depth() <= small.depth() + 40,
        "{} {}",
        large.depth(),
        small.depth()
    );
    assert_eq!(series(100_000).depth(), 100_000);
    assert_eq!(Aig::of(&series(100_000)).ands.len(), 100_000);
}

#[test]
fn generation_is_repeatable() {
    let text = || replicated(5_000, 9).blif();
    assert_eq!(text(), text());
    assert_ne!(text(), replicated(5_000, 10).blif());
}

fn fast_word(architecture: Architecture, bits: usize, carry_in: bool) -> Word {
    Word {
        architecture,
        carry_in,
        ..Word::new(Kind::Adder, bits, Cell::PropagateXor)
    }
}

#[test]
fn every_architecture_adds_at_every_width() {
    for architecture in Architecture::every_fast() {
        for bits in (1..=20).chain([31, 32, 48, 64, 100, 128]) {
            for carry_in in [false, true] {
                must_hold(&fast_word(architecture, bits, carry_in).generate());
            }
        }
    }
    for spare in 0..5 {
        must_hold(&fast_word(Architecture::LadnerFischer(spare), 37, true).generate());
        must_hold(&fast_word(Architecture::Knowles(1 << spare), 37, true).generate());
        must_hold(&fast_word(Architecture::SparsePrefix(2 + spare), 37, true).generate());
    }
}

#[test]
fn prefix_networks_cost_what_the_papers_say() {
    // Nodes of networks over n = 2^m positions: Sklansky n/2·m; Brent and Kung
    // 2n - 2 - m; Kogge and Stone n·m - n + 1 (the papers' formulas; from
    // memory). A node whose span reaches position 0 is an AND and an OR, any
    // other one AND more; n-1 nodes reach position 0. Plus g, p and sums.
    let gates = |architecture, bits| {
        let word = fast_word(architecture, bits, false).generate();
        word.circuit.gate_count()
    };
    for m in 2..7 {
        let n = 1usize << m;
        let ends = 2 * n + n - 1;
        let cost = |nodes: usize| ends + 3 * nodes - (n - 1);
        assert_eq!(gates(Architecture::Sklansky, n), cost(n / 2 * m));
        assert_eq!(gates(Architecture::BrentKung, n), cost(2 * n - 2 - m));
        assert_eq!(gates(Architecture::KoggeStone, n), cost(n * m - n + 1));
    }
}

#[test]
fn comparators_tell_the_order_of_integers() {
    for bits in [1, 2, 3, 4, 5, 12, 33, 64, 128] {
        for comparator in Comparator::every(bits) {
            must_hold(&comparator.generate());
        }
    }
}

#[test]
fn products_are_products() {
    for way in Reduction::ALL {
        for (rows, columns) in [
            (1, 1),
            (2, 2),
            (2, 5),
            (5, 3),
            (4, 4),
            (5, 5),
            (8, 8),
            (16, 16),
        ] {
            must_hold(&multiplier(rows, columns, way, Cell::PropagateXor));
        }
        for bits in [1, 2, 5, 9, 10, 20] {
            must_hold(&squarer(bits, way, Cell::AndInverter));
        }
    }
    // An n × n array has n·(n-2) full and n half adders (textbook, from memory).
    for n in [4, 8, 16] {
        let array = multiplier(n, n, Reduction::Array, Cell::PropagateXor);
        let told = &array.products[0];
        assert_eq!((told.full, told.half), (n * (n - 2), n));
    }
}

#[test]
fn mapped_circuits_compute_the_same_in_the_cells_allowed() {
    let mut circuits: Vec<Circuit> = Architecture::every_fast()
        .into_iter()
        .map(|architecture| fast_word(architecture, 13, true).generate().circuit)
        .collect();
    circuits.extend(Cell::ALL.map(|cell| Word::new(Kind::Subtractor, 9, cell).generate().circuit));
    circuits.push(accumulator(10, 6, Extension::Sign, Cell::Nand).circuit);
    circuits.push(multiplier(6, 6, Reduction::Dadda, Cell::Mirror).circuit);
    circuits.push(negatives::random_logic(12, 200, 3));
    let ways = [2, 3, 4, 5, 6].map(Cells::Covers);
    for circuit in &circuits {
        let mut random = Random::new(3);
        let inputs: Vec<u64> = circuit.inputs.iter().map(|_| random.word()).collect();
        let state: Vec<u64> = circuit.registers.iter().map(|_| random.word()).collect();
        for way in ways.into_iter().chain([Cells::AndOrInvert]) {
            let other = mapped(circuit, way);
            assert_eq!(
                outcome(&other, &inputs, &state),
                outcome(circuit, &inputs, &state),
                "{} as {way:?}",
                circuit.name
            );
            texts_agree(&other);
            let widest = (0..other.gate_count()).map(|gate| other.gate_at(gate).1.len());
            let limit = match way {
                Cells::Covers(limit) => limit,
                Cells::AndOrInvert => 4,
            };
            assert!(widest.max().unwrap_or(0) <= limit);
        }
    }
}

#[test]
fn wide_covers_swallow_positions() {
    // Two bits to a five- or six-input cover is what look-up tables do to a
    // ripple adder (common practice, no source): half as many levels as bits.
    let ripple = Word::new(Kind::Adder, 32, Cell::PropagateXor).generate();
    let levels = [3, 4, 5, 6].map(|k| mapped(&ripple.circuit, Cells::Covers(k)).depth());
    assert_eq!(levels[0], 32, "one position a cover of three");
    assert!(levels[2] <= 17, "{levels:?}");
    assert!(levels[3] <= levels[2] && levels[2] <= levels[1] && levels[1] <= levels[0]);
}

/// The number an output bus shows in one lane.
fn shown(circuit: &Circuit, values: &[u64], bus: &str, lane: usize) -> u64 {
    let mut number = 0;
    for &net in circuit.inputs.iter().chain(&circuit.outputs) {
        let name = circuit.name_of(net);
        if let Some(rest) = name.strip_prefix(bus).and_then(|r| r.strip_prefix('[')) {
            let bit: u32 = rest.trim_end_matches(']').parse().expect("an index");
            number |= (values[net.index()] >> lane & 1) << bit;
        }
    }
    number
}

#[test]
fn dividers_divide_and_square_roots_are_roots() {
    for gated in [false, true] {
        for bits in [3, 8, 13] {
            let mut random = Random::new(bits as u64);
            let division = divider(bits, gated, Cell::PropagateXor);
            must_hold(&division);
            let root = square_root(bits, gated, Cell::MajorityCover);
            must_hold(&root);
            for circuit in [&division.circuit, &root.circuit] {
                let inputs: Vec<u64> = circuit.inputs.iter().map(|_| random.word()).collect();
                let values = circuit.evaluate(&inputs, &[]);
                for lane in 0..64 {
                    let [x, y, q, r] =
                        ["x", "y", "q", "r"].map(|bus| shown(circuit, &values, bus, lane));
                    if circuit.name == "root" {
                        assert_eq!((q, r), (x.isqrt(), x - x.isqrt() * x.isqrt()));
                    } else if let (Some(quotient), Some(rest)) =
                        (x.checked_div(y), x.checked_rem(y))
                    {
                        assert_eq!((q, r), (quotient, rest));
                    }
                }
            }
        }
    }
}

#[test]
fn every_case_of_the_corpus_means_its_truth_in_every_form() {
    let mut count = 0;
    for case in corpus::cases(7, 3, 64) {
        must_hold(&case.reference);
        let circuit = &case.reference.circuit;
        let mut random = Random::new(5);
        let inputs: Vec<u64> = circuit.inputs.iter().map(|_| random.word()).collect();
        let state: Vec<u64> = circuit.registers.iter().map(|_| random.word()).collect();
        let file = match &case.form {
            corpus::Form::Graph(graph) => witness::aiger(&graph.aig(), &inputs, &state),
            form => {
                let text = String::from_utf8(form.bytes()).expect("plain text");
                witness::blif(&text, &inputs, &state)
            }
        };
        assert_eq!(file, outcome(circuit, &inputs, &state), "{}", case.label());
        count += 1;
    }
    assert!(count > 700, "{count} cases");
    assert!(corpus::recipes().len() * corpus::Disguise::ALL.len() >= 1_500);
}
