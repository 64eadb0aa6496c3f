//! Carry networks: sizes and levels against published figures, delays against
//! the textbooks, and one suite that every scheme must pass.
//!
//! Sources. Exact cells and levels of prefix networks: the closed forms that
//! follow from the constructions cited in each scheme's file, tabulated from
//! independently built and span-checked networks. Gate delays of lookahead:
//! V. C. Hamacher, Z. G. Vranesic and S. G. Zaky, "Computer Organization", the
//! gate-delay convention (unlimited fan-in, XOR one delay); quoted from memory
//! where marked. Sums: the integer addition of the machine.

use carrywise::network::schemes::{self, Scheme, Settings};
use carrywise::network::{
    Addends, Built, CarryNetwork, CountedSignal, CountingSink, GateSink, Limits, Node, Profile,
    Propagate, XorForm, build,
};

const NO_LIMIT: Limits = Limits {
    gate_inputs: usize::MAX,
    covers: false,
};
const PAIRS: Limits = Limits {
    gate_inputs: 2,
    covers: false,
};

fn scheme(name: &str) -> &'static Scheme {
    schemes::by_name(name).expect("a scheme of that name")
}

fn network(name: &str, positions: usize, has_carry_in: bool) -> CarryNetwork {
    scheme(name).network(positions, has_carry_in, Settings::default())
}

/// An adder built into a counting sink, inputs in the order a, b, carry-in.
struct Adder {
    sink: CountingSink,
    built: Built<CountedSignal>,
}

impl Adder {
    fn new(network: &CarryNetwork, limits: Limits, propagate: Propagate, xor: XorForm) -> Self {
        let mut sink = CountingSink::new(xor);
        let a = (0..network.positions()).map(|_| sink.input(0)).collect();
        let b = (0..network.positions()).map(|_| sink.input(0)).collect();
        let carry_in = network.carry_in().map(|_| sink.input(0));
        let addends = Addends { a, b, carry_in };
        let built = build(network, &addends, limits, propagate, &mut sink);
        Self { sink, built }
    }

    /// As the textbooks count: unlimited fan-in, XOR one gate and one delay.
    fn textbook(network: &CarryNetwork) -> Self {
        Self::new(network, NO_LIMIT, Propagate::Or, XorForm::Gate)
    }

    /// As an AND/inverter graph.
    fn ands(network: &CarryNetwork) -> Self {
        Self::new(network, PAIRS, Propagate::Or, XorForm::Ands)
    }

    fn carry_delay(&self, position: usize) -> i32 {
        self.sink.arrival(self.built.carries[position])
    }

    fn last_carry_delay(&self) -> i32 {
        self.carry_delay(self.built.carries.len() - 1)
    }

    fn sum_delay(&self) -> i32 {
        self.sink.depth(&self.built.sums)
    }

    fn outputs(&self) -> Vec<CountedSignal> {
        [&self.built.sums[..], &self.built.carries[..]].concat()
    }

    fn largest_gate(&self) -> usize {
        self.sink.largest_fan_in(&self.outputs())
    }
}

/// (scheme, cells at N = 8, 16, 32, 64, 128, levels as a function of L = log2 N).
type Published = (&'static str, [usize; 5], fn(usize) -> usize);

/// Prefix cells without a carry-in column, buffers not counted. Closed forms:
/// serial N-1; Brent-Kung 2N-2-L; Sklansky and Han-Carlson (N/2)L; Kogge-Stone
/// NL-N+1; Ladner-Fischer with one extra level (N/4)L+3N/4-1.
const PUBLISHED: [Published; 6] = [
    ("ripple", [7, 15, 31, 63, 127], |l| (1 << l) - 1),
    ("brent-kung", [11, 26, 57, 120, 247], |l| 2 * l - 2),
    ("sklansky", [12, 32, 80, 192, 448], |l| l),
    ("kogge-stone", [17, 49, 129, 321, 769], |l| l),
    ("han-carlson", [12, 32, 80, 192, 448], |l| l + 1),
    ("ladner-fischer", [11, 27, 63, 143, 319], |l| l + 1),
];

#[test]
fn prefix_networks_have_the_published_cells_and_levels() {
    for (name, cells, levels) in PUBLISHED {
        for (i, cells) in cells.into_iter().enumerate() {
            let l = i + 3;
            let network = network(name, 1 << l, false);
            assert_eq!(network.cells(), cells, "cells of {name} at N = 2^{l}");
            assert_eq!(network.levels(), levels(l), "levels of {name} at N = 2^{l}");
        }
    }
}

/// M. Snir, "Depth-Size Trade-Offs for Parallel Prefix Computation", Journal of
/// Algorithms 7, 1986: size + depth >= 2N - 2, for every N. Serial meets it.
#[test]
fn no_prefix_network_beats_snirs_bound() {
    for (name, _, _) in PUBLISHED {
        for n in 2..=130 {
            for extra_levels in 0..4 {
                let settings = Settings {
                    extra_levels,
                    ..Settings::default()
                };
                let network = scheme(name).network(n, false, settings);
                let (size, depth) = (network.cells(), network.levels());
                assert!(size + depth >= 2 * n - 2, "{name} at {n}: {size} + {depth}");
                if name == "ripple" {
                    assert_eq!(size + depth, 2 * n - 2);
                }
            }
        }
    }
}

/// The ends of the family in D. Harris, "A Taxonomy of Parallel Prefix
/// Networks", Asilomar 2003: L + l levels, l = 0 Sklansky, l = L - 1 Brent-Kung.
#[test]
fn ladner_fischer_runs_from_sklansky_to_brent_kung() {
    let (n, l) = (64, 6);
    let with = |extra_levels| {
        let settings = Settings {
            extra_levels,
            ..Settings::default()
        };
        scheme("ladner-fischer").network(n, false, settings)
    };
    for extra_levels in 0..l - 1 {
        assert_eq!(with(extra_levels).levels(), l + extra_levels);
    }
    assert_eq!(with(0), network("sklansky", n, false));
    assert_eq!(with(l - 1), network("brent-kung", n, false));
}

/// Harris 2003: Sklansky's fan-out is N/2 + 1 (f = L - 1).
#[test]
fn sklansky_has_the_published_fan_out() {
    for n in [8, 16, 32, 64, 128] {
        assert_eq!(network("sklansky", n, false).largest_fan_out(), n / 2 + 1);
    }
}

/// Joining r spans at once takes ⌈log_r n⌉ levels (common practice, no source).
#[test]
fn higher_valency_takes_fewer_levels() {
    for name in ["sklansky", "kogge-stone"] {
        for valency in 2..=6 {
            let settings = Settings {
                valency,
                ..Settings::default()
            };
            for n in 1..=100usize {
                let network = scheme(name).network(n, false, settings);
                let least = (0..).find(|&l| valency.pow(l) >= n).unwrap_or(0);
                assert_eq!(network.levels(), least as usize, "{name} {valency} {n}");
                assert!(network.largest_valency() <= valency);
            }
        }
    }
}

/// The carry-in as one more item: ⌈log2(n+1)⌉ levels, so that it costs one only
/// where n is a power of two (arithmetic).
#[test]
fn a_carry_in_costs_a_level_only_at_powers_of_two() {
    for name in ["sklansky", "kogge-stone"] {
        for n in 2..=130usize {
            let without = network(name, n, false).levels();
            let with = network(name, n, true).levels();
            let extra = usize::from(n.is_power_of_two());
            assert_eq!(with, without + extra, "{name} {n}");
        }
    }
}

/// c_n and s_{n-1} of lookahead in groups of four with carry-in: carry 1 + 2L,
/// sum 4L with L levels. The pair 7 and 12 at 64 bits stands in a public course
/// text; the others are from memory of the same textbook, and recomputed.
#[test]
fn group_lookahead_has_the_textbook_delays() {
    for (n, carry, sum) in [
        (4, 3, 4),
        (16, 5, 8),
        (32, 7, 10),
        (64, 7, 12),
        (256, 9, 16),
    ] {
        let adder = Adder::textbook(&network("group-lookahead", n, true));
        assert_eq!(adder.last_carry_delay(), carry, "carry at {n} bits");
        assert_eq!(adder.sum_delay(), sum, "sum at {n} bits");
        assert!(adder.largest_gate() <= 5, "largest gate at {n} bits");
    }
}

/// The 16-bit carry-lookahead adder of four four-bit groups: all group carries
/// after five gate delays, no gate over five inputs, the sum after eight.
#[test]
fn two_level_lookahead_at_16_bits_is_the_textbook_adder() {
    let adder = Adder::textbook(&network("group-lookahead", 16, true));
    for position in [7, 11, 15] {
        assert_eq!(adder.carry_delay(position), 5, "carry out of {position}");
    }
    // G0 + P0·c0: the AND is ready no later than G0, so one delay less.
    assert_eq!(adder.carry_delay(3), 4);
    assert_eq!(adder.largest_gate(), 5);
    assert_eq!(adder.sum_delay(), 8);
}

/// Without carry-in the first group's carry is its G alone (recomputed).
#[test]
fn without_carry_in_the_first_group_carry_comes_after_three() {
    let adder = Adder::textbook(&network("group-lookahead", 16, false));
    assert_eq!(adder.carry_delay(3), 3);
}

/// Flat lookahead: 1 delay for g and p, 2 for every carry, 1 for the sum; the
/// largest gates take all lower g and p (common practice).
#[test]
fn flat_lookahead_is_three_delays_whatever_the_width() {
    for (has_carry_in, largest) in [(true, 33), (false, 32)] {
        let adder = Adder::textbook(&network("flat-lookahead", 32, has_carry_in));
        assert_eq!(adder.last_carry_delay(), 3);
        assert_eq!(adder.sum_delay(), 4);
        assert_eq!(adder.largest_gate(), largest);
    }
}

/// Flat lookahead with carry-in: n(n+1)/2 AND terms and n ORs for the carries,
/// beside n of each for g and p (Hamacher, from memory; recomputed).
#[test]
fn flat_lookahead_has_the_textbook_gates() {
    for n in [4, 8, 16] {
        let adder = Adder::textbook(&network("flat-lookahead", n, true));
        let carries = n * (n + 1) / 2 + n;
        assert_eq!(adder.sink.gates(&adder.built.carries), 2 * n + carries);
    }
}

/// Two levels a bit after g and p: 2n + 1 with carry-in, 2n - 1 without (the
/// public 128-bit adder netlist is 255 levels deep).
#[test]
fn ripple_takes_two_delays_a_bit() {
    for n in [1, 2, 4, 16, 64, 128] {
        let with = Adder::textbook(&network("ripple", n, true));
        assert_eq!(with.last_carry_delay(), 2 * n as i32 + 1);
        let without = Adder::textbook(&network("ripple", n, false));
        assert_eq!(without.last_carry_delay(), 2 * n as i32 - 1);
    }
}

/// A 128-bit adder without carry-in as an AND/inverter graph, levels to the last
/// sum: 255 is the public netlist's depth; 17 was computed independently for both
/// prefix schemes. With p = a + b Kogge-Stone saves one of them: its lowest
/// spans are short, and an early P waits for nothing.
#[test]
fn and_inverter_depths_at_128_bits() {
    let depth = |name, propagate| {
        let network = network(name, 128, false);
        let adder = Adder::new(&network, PAIRS, propagate, XorForm::Ands);
        adder.sum_delay()
    };
    assert_eq!(depth("ripple", Propagate::Or), 255);
    assert_eq!(depth("sklansky", Propagate::Or), 17);
    assert_eq!(depth("kogge-stone", Propagate::Xor), 17);
    assert_eq!(depth("kogge-stone", Propagate::Or), 16);
}

/// A full adder is seven ANDs, a half adder three: two XORs of three ANDs each,
/// whose halves a·b and (a⊕b)·c the carry reads, and one OR (recomputed
/// independently).
#[test]
fn ripple_as_ands_is_seven_a_bit() {
    for (has_carry_in, gates) in [(true, 7 * 16), (false, 7 * 15 + 3)] {
        let network = network("ripple", 16, has_carry_in);
        let adder = Adder::new(&network, PAIRS, Propagate::Xor, XorForm::Ands);
        assert_eq!(adder.sink.gates(&adder.outputs()), gates);
    }
}

/// M. C. Golumbic, "Combinatorial Merging", 1976: merging the earliest first
/// reaches ⌈log2 Σ 2^t⌉. The carry of a counter is one wide AND.
#[test]
fn wide_gates_are_trees_by_arrival() {
    let mut random = fastrand::Rng::with_seed(76);
    for n in [3usize, 7, 16, 40] {
        for _ in 0..20 {
            let network = network("flat-lookahead", n, true);
            let mut sink = CountingSink::new(XorForm::Ands);
            let times: Vec<u32> = (0..=n).map(|_| random.u32(0..12)).collect();
            let zero = sink.constant(false);
            let addends = Addends {
                a: (0..n).map(|i| sink.input(times[i] as i32)).collect(),
                b: vec![zero; n],
                carry_in: Some(sink.input(times[n] as i32)),
            };
            let built = build(&network, &addends, PAIRS, Propagate::Or, &mut sink);
            let weight: u64 = times.iter().map(|&t| 1 << t).sum();
            let least = weight.next_power_of_two().trailing_zeros();
            assert_eq!(sink.arrival(built.carries[n - 1]), least as i32);
        }
    }
}

/// Three inputs a gate, arrivals 0, 0, 1, 1: the pair first, then all three at 1,
/// is ready at 2; a full gate first would end at 3 (worked by hand; the bound is
/// ⌈log3 Σ 3^t⌉ = 2, Parker 1979).
#[test]
fn the_first_merge_leaves_later_gates_full() {
    let network = network("flat-lookahead", 3, true);
    let mut sink = CountingSink::new(XorForm::Gate);
    let zero = sink.constant(false);
    let addends = Addends {
        a: [0, 0, 1].map(|at| sink.input(at)).to_vec(),
        b: vec![zero; 3],
        carry_in: Some(sink.input(1)),
    };
    let limits = Limits {
        gate_inputs: 3,
        covers: false,
    };
    let built = build(&network, &addends, limits, Propagate::Or, &mut sink);
    assert_eq!(sink.arrival(built.carries[2]), 2);
}

/// With six-input covers three spans join a level and both ends are absorbed: the
/// carry out of 27 positions takes three levels, and so does the sum above them.
/// No fewer can do: they read 54 and 56 operand bits, more than 6².
#[test]
fn six_input_covers_absorb_both_ends() {
    let limits = Limits {
        gate_inputs: 6,
        covers: true,
    };
    let settings = Settings {
        valency: 3,
        ..Settings::default()
    };
    let network = scheme("sklansky").network(28, false, settings);
    let adder = Adder::new(&network, limits, Propagate::Xor, XorForm::Gate);
    assert_eq!(adder.carry_delay(26), 3);
    assert_eq!(adder.sink.arrival(adder.built.sums[27]), 3);
}

/// A constant operand leaves a chain of ANDs: an incrementer as the trade builds
/// it, n half adders (common practice, no source).
#[test]
fn a_constant_operand_folds_away() {
    for covers in [false, true] {
        let network = network("ripple", 8, true);
        let mut sink = CountingSink::new(XorForm::Gate);
        let zero = sink.constant(false);
        let addends = Addends {
            a: (0..8).map(|_| sink.input(0)).collect(),
            b: vec![zero; 8],
            carry_in: Some(sink.input(0)),
        };
        let limits = Limits {
            gate_inputs: 4,
            covers,
        };
        let built = build(&network, &addends, limits, Propagate::Or, &mut sink);
        let outputs = [built.sums, built.carries].concat();
        assert_eq!(sink.gates(&outputs), 16, "covers: {covers}");
    }
}

/// Every way a scheme may be varied that the suite tries.
fn variations() -> Vec<(&'static Scheme, Settings)> {
    let mut list = Vec::new();
    for scheme in schemes::all() {
        let valencies = if scheme.takes.valency { 2..=4 } else { 2..=2 };
        for valency in valencies {
            let groups = if scheme.takes.group { 2..=5 } else { 4..=4 };
            for group in groups {
                let extra = if scheme.takes.extra_levels {
                    0..=3
                } else {
                    1..=1
                };
                for extra_levels in extra {
                    for select_end in [false, true] {
                        let settings = Settings {
                            valency,
                            group,
                            extra_levels,
                            select_end,
                        };
                        list.push((scheme, settings));
                    }
                }
            }
        }
    }
    list
}

fn every_limit() -> Vec<Limits> {
    let widths = [2, 3, 4, 5, 6, 64];
    let narrow = widths.into_iter().map(|gate_inputs| Limits {
        gate_inputs,
        covers: false,
    });
    let covers = widths.into_iter().map(|gate_inputs| Limits {
        gate_inputs,
        covers: true,
    });
    narrow.chain(covers).collect()
}

/// Runs `check` over every scheme, variation, carry-in, limit and propagate; as
/// ANDs where two inputs are the limit.
fn for_every_adder(width: usize, mut check: impl FnMut(&Adder, bool, &str)) {
    for (scheme, settings) in variations() {
        for has_carry_in in [false, true] {
            let network = scheme.network(width, has_carry_in, settings);
            for limits in every_limit() {
                for propagate in [Propagate::Or, Propagate::Xor] {
                    let form = match limits.gate_inputs {
                        2 => XorForm::Ands,
                        _ => XorForm::Gate,
                    };
                    let adder = Adder::new(&network, limits, propagate, form);
                    let name = format!(
                        "{} {settings:?} at {width}, carry-in {has_carry_in}, {limits:?}, \
                         {propagate:?}",
                        scheme.name
                    );
                    assert!(adder.largest_gate() <= limits.gate_inputs, "{name}");
                    check(&adder, has_carry_in, &name);
                }
            }
        }
    }
}

/// One vector of operands, and what integer addition makes of it.
#[derive(Clone, Copy)]
struct Case {
    a: u128,
    b: u128,
    carry_in: bool,
}

impl Case {
    fn low(value: u128, bits: usize) -> u128 {
        value & ((1 << bits) - 1)
    }

    fn sum(self) -> u128 {
        self.a + self.b + u128::from(self.carry_in)
    }

    /// Carry out of a position: what the bits up to it overflow by.
    fn carry(self, position: usize) -> bool {
        let bits = position + 1;
        let (a, b) = (Self::low(self.a, bits), Self::low(self.b, bits));
        (a + b + u128::from(self.carry_in)) >> bits & 1 == 1
    }
}

/// Compares an adder with integer addition on up to 64 cases.
fn check_cases(adder: &Adder, width: usize, has_carry_in: bool, cases: &[Case], name: &str) {
    let word = |bit: &dyn Fn(Case) -> bool| {
        let bits = cases.iter().enumerate();
        bits.fold(0u64, |word, (i, &case)| word | u64::from(bit(case)) << i)
    };
    let mut inputs = Vec::new();
    inputs.extend((0..width).map(|i| word(&|case| case.a >> i & 1 == 1)));
    inputs.extend((0..width).map(|i| word(&|case| case.b >> i & 1 == 1)));
    if has_carry_in {
        inputs.push(word(&|case| case.carry_in));
    }
    let mask = !0 >> (64 - cases.len());
    let values = adder.sink.evaluate(&inputs, &adder.outputs());
    for i in 0..width {
        let sum = word(&|case| case.sum() >> i & 1 == 1);
        assert_eq!(values[i] & mask, sum, "sum {i} of {name}");
        let carry = word(&|case| case.carry(i));
        assert_eq!(values[width + i] & mask, carry, "carry {i} of {name}");
    }
}

#[test]
fn every_scheme_adds_all_small_numbers() {
    for width in 1..=6 {
        let mut with = Vec::new();
        for a in 0..1u128 << width {
            for b in 0..1u128 << width {
                with.extend([false, true].map(|carry_in| Case { a, b, carry_in }));
            }
        }
        let without: Vec<Case> = with.iter().copied().filter(|c| !c.carry_in).collect();
        for_every_adder(width, |adder, has_carry_in, name| {
            let cases = if has_carry_in { &with } else { &without };
            for chunk in cases.chunks(64) {
                check_cases(adder, width, has_carry_in, chunk, name);
            }
        });
    }
}

/// Half the cases propagate over long runs, where random operands seldom do.
fn random_cases(random: &mut fastrand::Rng, width: usize, has_carry_in: bool) -> Vec<Case> {
    let case = |i: usize| {
        let a = Case::low(random.u128(..), width);
        let b = if i.is_multiple_of(2) {
            Case::low(random.u128(..), width)
        } else {
            Case::low(!a ^ 1 << random.usize(0..width), width)
        };
        let carry_in = has_carry_in && random.bool();
        Case { a, b, carry_in }
    };
    (0..64).map(case).collect()
}

#[test]
fn every_scheme_adds_wide_numbers() {
    let mut random = fastrand::Rng::with_seed(1958);
    for width in [8, 13, 16, 32, 33, 64] {
        for_every_adder(width, |adder, has_carry_in, name| {
            let cases = random_cases(&mut random, width, has_carry_in);
            check_cases(adder, width, has_carry_in, &cases, name);
        });
    }
}

/// Operands that are constants, one another, or one another's complement: gates
/// fold, and the sums are still those of integer addition.
#[test]
fn every_scheme_adds_repeated_and_constant_operands() {
    let mut random = fastrand::Rng::with_seed(181);
    let width = 7;
    for (scheme, settings) in variations() {
        for has_carry_in in [false, true] {
            let network = scheme.network(width, has_carry_in, settings);
            for limits in every_limit() {
                let mut sink = CountingSink::new(XorForm::Gate);
                let inputs = [0; 6].map(|_| sink.input(0));
                let zero = sink.constant(false);
                let mut pick = |_| {
                    let signal = *random.choice(&inputs).unwrap_or(&zero);
                    let signal = if random.u8(0..4) == 0 { zero } else { signal };
                    if random.bool() { !signal } else { signal }
                };
                let a: Vec<_> = (0..width).map(&mut pick).collect();
                let b: Vec<_> = (0..width).map(&mut pick).collect();
                let addends = Addends {
                    carry_in: has_carry_in.then(|| pick(0)),
                    a,
                    b,
                };
                let rule = random.choice([Propagate::Or, Propagate::Xor]);
                let rule = rule.unwrap_or(Propagate::Or);
                let built = build(&network, &addends, limits, rule, &mut sink);
                check_folded(&sink, &addends, &built, scheme.name, limits);
            }
        }
    }
}

/// Compares the sums with integer addition over all values of six inputs.
fn check_folded(
    sink: &CountingSink,
    addends: &Addends<CountedSignal>,
    built: &Built<CountedSignal>,
    name: &str,
    limits: Limits,
) {
    let all: Vec<u64> = (0..6)
        .map(|i| (0..64u64).fold(0, |word, row| word | (row >> i & 1) << row))
        .collect();
    let words = |signals: &[CountedSignal]| sink.evaluate(&all, signals);
    let (a, b) = (words(&addends.a), words(&addends.b));
    let carry_in = words(addends.carry_in.as_slice());
    let (sums, carries) = (words(&built.sums), words(&built.carries));
    let number = |words: &[u64], row: usize| {
        let bits = words.iter().enumerate();
        bits.fold(0u64, |n, (i, word)| n | (word >> row & 1) << i)
    };
    for row in 0..64 {
        let total = number(&a, row) + number(&b, row) + number(&carry_in, row);
        let top = [&sums[..], &carries[carries.len() - 1..]].concat();
        assert_eq!(number(&top, row), total, "{name} {limits:?}");
    }
    let outputs = [&built.sums[..], &built.carries[..]].concat();
    assert!(sink.largest_fan_in(&outputs) <= limits.gate_inputs);
}

/// Nodes meet and reach down to the lowest position, whatever the width.
#[test]
fn every_scheme_states_every_carry() {
    for (scheme, settings) in variations() {
        for has_carry_in in [false, true] {
            for n in 1..=70 {
                let network = scheme.network(n, has_carry_in, settings);
                assert!(network.is_complete(), "{} at {n}", scheme.name);
            }
        }
    }
}

#[test]
fn candidates_are_distinct_ordered_and_bounded() {
    for n in [1, 2, 3, 4, 16, 64, 65, 4096, 4097, 20_000] {
        let list = schemes::candidates(n, true, 4);
        assert_eq!(list[0].scheme, "ripple");
        assert_eq!(list, schemes::candidates(n, true, 4));
        for (i, fitted) in list.iter().enumerate() {
            assert!(
                list[..i]
                    .iter()
                    .all(|other| other.network != fitted.network)
            );
        }
        let offers = |name| list.iter().any(|fitted| fitted.scheme == name);
        if n >= 16 {
            assert_eq!(offers("kogge-stone"), n <= 4096, "{n}");
            assert_eq!(offers("flat-lookahead"), n <= 64, "{n}");
            assert!(offers("group-lookahead") && offers("brent-kung"), "{n}");
        }
    }
    let fitted = schemes::candidates(16, true, 4);
    let groups = fitted.iter().find(|f| f.group == Some(4));
    assert_eq!(groups.map(|f| f.levels), Some(2));
}

/// The choice between two sums stands in for the last combination and the XOR:
/// two delays for three, as the textbooks count, where the last combination
/// joins a short span to a late carry. Ripple of 16 bits: 30 by the count of two
/// a bit, 29 with the select (worked by hand).
#[test]
fn a_select_end_saves_a_level() {
    let settings = Settings {
        select_end: true,
        ..Settings::default()
    };
    let plain = Adder::textbook(&network("ripple", 16, false));
    assert_eq!(plain.sum_delay(), 1 + 2 * 14 + 1);
    let selected = scheme("ripple").network(16, false, settings);
    assert_eq!(Adder::textbook(&selected).sum_delay(), 1 + 2 * 13 + 2);
}

/// With late positions in the middle only their sums are selected.
#[test]
fn a_select_end_follows_the_arrivals() {
    let mut profile = Profile::even(16, false, PAIRS);
    profile.generate[9] = 20;
    profile.propagate[9] = 20;
    profile.half_sum[9] = 20;
    let settings = Settings {
        select_end: true,
        ..Settings::default()
    };
    let network = scheme("ripple").network_for(&profile, settings);
    let selected: Vec<usize> = (0..16).filter(|&i| network.sum(i).is_some()).collect();
    assert_eq!(selected, [15]);
}

/// `g + p·c`, `g + p·~c` and a choice between carries, against addition: only the
/// right ones pass.
#[test]
fn signals_are_checked_against_addition() {
    for (right, negate) in [(true, false), (false, true)] {
        let mut network = CarryNetwork::new(2, true);
        let carry_in = network.carry_in().expect("it has one");
        let (low, high) = (network.leaf(0), network.leaf(1));
        let carry = network.combine(&[low, carry_in]);
        network.set_carry(0, carry);
        let (g, p) = (network.generate_of(high), network.propagate_of(high));
        let (below, either) = (network.generate_of(carry), network.or(&[g, p]));
        let (one, zero) = if negate { (g, either) } else { (either, g) };
        let top = network.select(below, one, zero);
        network.set_carry_signal(1, top);
        assert!(network.is_complete() && !network.is_prefix());
        assert_eq!(network.first_wrong(), (!right).then_some(1));
    }
}

/// One six-input cover takes both sums and the choice between them: the second
/// sum of two positions with carry-in reads five operand bits.
#[test]
fn a_selected_sum_is_one_cover_where_it_fits() {
    let limits = Limits {
        gate_inputs: 6,
        covers: true,
    };
    let mut network = CarryNetwork::new(2, true);
    let carry_in = network.carry_in().expect("it has one");
    let (low, high) = (network.leaf(0), network.leaf(1));
    let first = network.combine(&[low, carry_in]);
    network.set_carry(0, first);
    let second = network.combine(&[high, low, carry_in]);
    network.set_carry(1, second);
    let (g, p) = (network.generate_of(low), network.propagate_of(low));
    let half = network.half_sum(1);
    let zero = network.xor(half, g);
    let either = network.or(&[g, p]);
    let one = network.xor(half, either);
    let choose = network.generate_of(carry_in);
    let sum = network.select(choose, one, zero);
    network.set_sum(1, sum);
    assert_eq!(network.first_wrong(), None);
    let adder = Adder::new(&network, limits, Propagate::Or, XorForm::Gate);
    assert_eq!(adder.sink.gates(&adder.built.sums[1..]), 1);
    assert_eq!(adder.sink.arrival(adder.built.sums[1]), 1);
}

/// A path of a million gates is walked by loops, not by calls.
#[test]
fn a_million_gates_in_series_do_not_overflow_the_stack() {
    let n = 500_000;
    let adder = Adder::ands(&network("ripple", n, true));
    assert_eq!(adder.last_carry_delay(), 2 * n as i32 + 1);
}

#[test]
#[should_panic(expected = "do not meet")]
fn spans_that_do_not_meet_are_refused() {
    let mut network = CarryNetwork::new(4, false);
    let parts = [network.leaf(3), network.leaf(1)];
    network.combine(&parts);
}

#[test]
#[should_panic(expected = "not stated")]
fn a_network_with_a_carry_missing_is_refused() {
    let mut network = CarryNetwork::new(2, false);
    assert_eq!(network.node(network.leaf(1)), Node::Leaf(1));
    let parts = [network.leaf(1), network.leaf(0)];
    network.combine(&parts);
    Adder::textbook(&network);
}
