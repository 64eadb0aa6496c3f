//! Carry networks: one suite that every scheme must pass, and what the contract
//! promises of signals, selects and profiles.
//!
//! Source of the sums: the integer addition of the machine.

#[path = "support/adders.rs"]
mod adders;

use adders::{Adder, PAIRS, network, scheme};
use carrywise::network::schemes::{self, FanOuts, Scheme, Settings};
use carrywise::network::{
    Addends, Built, CarryNetwork, CountedSignal, CountingSink, GateSink, Limits, Node, Profile,
    Propagate, XorForm, build,
};

/// Every way a scheme may be varied that the suite tries.
fn variations() -> Vec<(&'static Scheme, Settings)> {
    let mut list = Vec::new();
    for scheme in schemes::all() {
        let takes = scheme.takes;
        let mut settings = vec![Settings::default()];
        let mut vary = |takes: bool, set: &[&dyn Fn(&mut Settings)]| {
            if takes {
                let each = settings.iter().flat_map(|&settings| {
                    set.iter().map(move |set| {
                        let mut varied = settings;
                        set(&mut varied);
                        varied
                    })
                });
                settings = each.collect();
            }
        };
        vary(
            takes.valency,
            &[&|s| s.valency = 2, &|s| s.valency = 3, &|s| s.valency = 4],
        );
        vary(
            takes.group,
            &[&|s| s.group = 2, &|s| s.group = 3, &|s| s.group = 5],
        );
        vary(
            takes.extra_levels,
            &[&|s| s.extra_levels = 0, &|s| s.extra_levels = 2],
        );
        vary(takes.folds, &[&|s| s.folds = 0, &|s| s.folds = 1]);
        vary(
            takes.fan_outs,
            &[&|s| s.fan_outs = FanOuts::default(), &|s| {
                s.fan_outs = FanOuts::new(&[4, 2, 2])
            }],
        );
        vary(
            takes.growing,
            &[&|s| s.growing = false, &|s| s.growing = true],
        );
        vary(
            takes.select_inside,
            &[&|s| s.select_inside = false, &|s| s.select_inside = true],
        );
        vary(
            takes.select_end,
            &[&|s| s.select_end = false, &|s| s.select_end = true],
        );
        list.extend(settings.into_iter().map(|settings| (scheme, settings)));
    }
    list
}

fn every_limit() -> Vec<Limits> {
    let widths = [2, 3, 4, 6, 64];
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
    for width in [8, 13, 33, 64] {
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
    let of_groups = |f: &&schemes::Fitted| f.scheme == "group-lookahead" && f.group == Some(4);
    let groups = fitted.iter().find(of_groups);
    assert_eq!(groups.map(|f| f.levels), Some(2));
}

/// The choice between two sums stands in for the last combination and the XOR:
/// two delays for three, as the textbooks count, where the last combination
/// joins a short span to a late carry. Ripple of 16 bits: 2·15 - 1 to the carry
/// and the XOR, 30; with the select one less (worked by hand).
#[test]
fn a_select_end_saves_a_level() {
    let settings = Settings {
        select_end: true,
        ..Settings::default()
    };
    let plain = Adder::textbook(&network("ripple", 16, false));
    assert_eq!(plain.sum_delay(), 2 * 15 - 1 + 1);
    let selected = scheme("ripple").network(16, false, settings);
    assert_eq!(Adder::textbook(&selected).sum_delay(), 2 * 14 - 1 + 2);
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
