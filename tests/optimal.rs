//! The schemes that fit arrivals: their times against enumeration and published
//! numbers, their functions against integer addition, their speed and size against
//! the fixed schemes.

use carrywise::network::schemes::{Settings, all, by_name};
use carrywise::network::{
    Addends, Built, CarryNetwork, Costs, CountedSignal, CountingSink, Leaves, Limits, PathTimes,
    Profile, Propagate, Required, Steps, Times, XorForm, build,
};

/// Operands of each position ready as given, the carry-in too, in levels of ANDs
/// of at most so many inputs; g and p take one, the half sum two.
fn profile(ready: &[i32], carry_in: Option<i32>, gate_inputs: usize) -> Profile {
    let limits = Limits {
        gate_inputs,
        covers: false,
    };
    Profile {
        generate: ready.iter().map(|time| time + 1).collect(),
        propagate: ready.iter().map(|time| time + 1).collect(),
        half_sum: ready.iter().map(|time| time + 2).collect(),
        carry_in,
        required: None,
        costs: Costs::of(limits, true, |function| vec![1; function.inputs()]),
    }
}

/// The earliest a scheme makes, or so many levels later.
fn fitted(name: &str, profile: &Profile, select_end: bool, extra_levels: usize) -> CarryNetwork {
    let settings = Settings {
        valency: profile.costs.limits().gate_inputs,
        select_end,
        extra_levels,
        ..Settings::default()
    };
    by_name(name).unwrap().network_for(profile, settings)
}

/// A network built as ANDs.
struct Adder {
    sink: CountingSink,
    built: Built<CountedSignal>,
}

impl Adder {
    fn of(network: &CarryNetwork, ready: &[i32], carry_in: Option<i32>, limits: Limits) -> Self {
        let form = if limits.covers {
            XorForm::Gate
        } else {
            XorForm::Ands
        };
        let mut sink = CountingSink::new(form);
        let a = ready.iter().map(|&time| sink.input(time)).collect();
        let b = ready.iter().map(|&time| sink.input(time)).collect();
        let carry_in = carry_in.map(|time| sink.input(time));
        let addends = Addends { a, b, carry_in };
        let built = build(network, &addends, limits, Propagate::Or, &mut sink);
        Self { sink, built }
    }

    /// All sums and the carry out.
    fn outputs(&self) -> Vec<CountedSignal> {
        let last = self.built.carries.last();
        self.built.sums.iter().chain(last).copied().collect()
    }

    fn levels(&self) -> i32 {
        self.sink.depth(&self.outputs())
    }

    fn gates(&self) -> usize {
        self.sink.gate_equivalents(&self.outputs())
    }

    /// Compares sums and carries with addition bit by bit (its definition), on 64
    /// patterns at once, with long runs of propagates, or a deep carry never shows.
    fn adds(&self, has_carry_in: bool, random: &mut fastrand::Rng) {
        let positions = self.built.sums.len();
        for round in 0..8 {
            let mut inputs: Vec<u64> = (0..2 * positions).map(|_| random.u64(..)).collect();
            for i in 0..positions {
                let runs = if round % 2 == 0 {
                    0
                } else {
                    random.u64(..) | random.u64(..)
                };
                inputs[positions + i] = inputs[positions + i] & !runs | !inputs[i] & runs;
            }
            if has_carry_in {
                inputs.push(random.u64(..));
            }
            let sums = self.sink.evaluate(&inputs, &self.built.sums);
            let carries = self.sink.evaluate(&inputs, &self.built.carries);
            let mut carry = if has_carry_in {
                inputs[2 * positions]
            } else {
                0
            };
            for i in 0..positions {
                let (a, b) = (inputs[i], inputs[positions + i]);
                assert_eq!(sums[i], a ^ b ^ carry, "sum {i}");
                carry = a & b | (a | b) & carry;
                assert_eq!(carries[i], carry, "carry {i}");
            }
        }
    }
}

/// Every time a tree for G of a span can have, whatever its splits and whatever
/// the trees of the P it reads, and the same for P: no minimum is taken on the way.
fn enumerate(ready: &[(i32, i32)]) -> i32 {
    let n = ready.len();
    let mut generates = vec![vec![Vec::new(); n]; n];
    let mut propagates = vec![vec![Vec::new(); n]; n];
    let set = |mut times: Vec<i32>| {
        times.sort_unstable();
        times.dedup();
        times
    };
    for length in 0..n {
        for low in 0..n - length {
            let high = low + length;
            if length == 0 {
                generates[high][low] = vec![ready[high].0];
                propagates[high][low] = vec![ready[high].1];
                continue;
            }
            let (mut g, mut p) = (Vec::new(), Vec::new());
            for k in low + 1..=high {
                for &through in &propagates[high][k] {
                    for &below in &propagates[k - 1][low] {
                        p.push(through.max(below) + 1);
                    }
                    for &above in &generates[high][k] {
                        for &below in &generates[k - 1][low] {
                            g.push((above + 1).max(through + 2).max(below + 2));
                        }
                    }
                }
            }
            generates[high][low] = set(g);
            propagates[high][low] = set(p);
        }
    }
    generates[n - 1][0][0]
}

#[test]
fn no_tree_of_spans_is_earlier() {
    let mut random = fastrand::Rng::with_seed(0x7465_6964);
    for _ in 0..1000 {
        let n = random.usize(2..=9);
        let spread = random.i32(0..=8);
        let ready: Vec<(i32, i32)> = (0..n)
            .map(|_| (random.i32(0..=spread), random.i32(0..=spread)))
            .collect();
        let leaves = Leaves {
            generate: ready.iter().map(|each| each.0).collect(),
            propagate: ready.iter().map(|each| each.1).collect(),
            either: vec![0; n],
        };
        let times = Times::of(&leaves, &Steps::uniform(2, 1));
        assert_eq!(times.generate(n - 1, 0), enumerate(&ready), "{ready:?}");
    }
}

/// A prefix carry in d levels of two-input ANDs and ORs spans Fibonacci(d) many
/// positions at most: n(d) = n(d-1) + n(d-2), n(2) = 2, n(3) = 3 (the bound of
/// Held and Spirkl 2017 is its logarithm, log_phi n - 1).
#[test]
fn equal_arrivals_give_the_published_levels() {
    for (n, levels) in [(8, 5), (16, 7), (32, 8), (64, 10)] {
        let leaves = Leaves {
            generate: vec![0; n],
            propagate: vec![0; n],
            either: vec![0; n],
        };
        let times = Times::of(&leaves, &Steps::uniform(2, 1));
        assert_eq!(times.generate(n - 1, 0), levels, "prefix carry of {n} bits");
    }
    let (mut before, mut now) = (2, 3);
    let leaves = |n| Leaves {
        generate: vec![0; n],
        propagate: vec![0; n],
        either: vec![0; n],
    };
    for levels in 4..=12 {
        (before, now) = (now, before + now);
        let fits = Times::of(&leaves(now), &Steps::uniform(2, 1));
        let over = Times::of(&leaves(now + 1), &Steps::uniform(2, 1));
        assert_eq!(fits.generate(now - 1, 0), levels);
        assert_eq!(over.generate(now, 0), levels + 1);
    }
}

/// Levels from g, p to the carry that the split of Grinchuk 2009 reaches: 5, 6, 8,
/// 9 at 8 to 64 bits; with d levels 2, 3, 6, 10, 19, 33, 60, 109, 202 inputs
/// (recomputed from the split; its identity was checked exhaustively).
#[test]
fn and_or_paths_are_shallower_than_prefix_carries() {
    for (n, levels) in [(8, 5), (16, 6), (32, 8), (64, 9)] {
        let m = 2 * n - 1;
        let times = PathTimes::of(&vec![0; m], 1, 1);
        assert!(times.earliest(0, 0, m - 1) <= levels, "path of {n} bits");
    }
    let inputs = [2, 3, 6, 10, 19, 33, 60, 109, 202];
    let times = PathTimes::of(&[0; 202], 1, 1);
    for (i, &m) in inputs.iter().enumerate() {
        assert!(times.earliest(0, 0, m - 1) <= i as i32 + 1, "{m} inputs");
        // No function of m inputs is ready before ceil(log2 m).
        let least = usize::BITS - (m - 1usize).leading_zeros();
        assert!(times.earliest(0, 0, m - 1) >= least as i32);
    }
}

/// 128 bits without carry-in as two-input ANDs, g and p ready after one level: 14
/// to the last sum in the prefix class with an XOR at the end, 13 with a choice;
/// with and-or paths 13 and 12 (arithmetic on the two tables above).
#[test]
fn a_128_bit_adder_has_the_expected_levels() {
    let mut random = fastrand::Rng::with_seed(128);
    let ready = [0; 128];
    let profile = profile(&ready, None, 2);
    for (name, select_end, levels) in [
        ("arrival-aware", false, 14),
        ("arrival-aware", true, 13),
        ("and-or-path", false, 13),
        ("and-or-path", true, 12),
    ] {
        let network = fitted(name, &profile, select_end, 0);
        let adder = Adder::of(&network, &ready, None, profile.costs.limits());
        println!("{name}, select end {select_end}: {} ANDs", adder.gates());
        assert_eq!(adder.levels(), levels, "{name}");
        adder.adds(false, &mut random);
    }
}

/// As six-input covers 128 bits take five levels (the published record for the
/// open 128-bit adder: 5 levels, 347 covers).
#[test]
fn a_128_bit_adder_takes_five_levels_of_six_input_covers() {
    let mut random = fastrand::Rng::with_seed(6);
    let ready = [0; 128];
    let limits = Limits {
        gate_inputs: 6,
        covers: true,
    };
    let mut profile = profile(&ready, None, 2);
    profile.costs = Costs::even(limits);
    profile.half_sum = profile.generate.clone();
    let network = fitted("arrival-aware", &profile, false, 0);
    let adder = Adder::of(&network, &ready, None, limits);
    let covers = adder.sink.gates(&adder.outputs());
    println!("{covers} six-input covers in {} levels", adder.levels());
    assert_eq!(adder.levels(), 5);
    assert!(covers <= 560, "{covers}");
    adder.adds(false, &mut random);
}

/// Every width to 20, with and without carry-in, gates of two to four inputs,
/// covers of three to six, arrivals and required times at random: the networks
/// add, and required times never make the worst of them worse.
#[test]
fn networks_add_and_keep_required_times() {
    let mut random = fastrand::Rng::with_seed(20);
    for positions in 1..=20 {
        for case in 0..14 {
            let spread = if case < 6 { 0 } else { 12 };
            let ready: Vec<i32> = (0..positions).map(|_| random.i32(0..=spread)).collect();
            let carry_in = (case % 2 == 1).then(|| random.i32(0..=spread));
            let mut profile = profile(&ready, carry_in, 2 + case % 3);
            if case >= 10 {
                profile.costs = Costs::even(Limits {
                    gate_inputs: case - 7,
                    covers: true,
                });
            }
            let limits = profile.costs.limits();
            let by: Vec<i32> = (0..positions).map(|_| random.i32(0..20)).collect();
            let late = |adder: &Adder| {
                let times = adder.built.sums.iter().map(|&s| adder.sink.depth(&[s]));
                times.zip(&by).map(|(time, by)| time - by).max().unwrap()
            };
            let select_end = random.bool();
            for name in ["arrival-aware", "and-or-path"] {
                let network = fitted(name, &profile, select_end, 0);
                let soon = Adder::of(&network, &ready, carry_in, limits);
                soon.adds(carry_in.is_some(), &mut random);
                let mut with = profile.clone();
                with.required = Some(Required {
                    sums: by.iter().map(|&by| Some(by)).collect(),
                    carries: vec![None; positions],
                });
                let network = fitted(name, &with, select_end, 0);
                let timely = Adder::of(&network, &ready, carry_in, limits);
                timely.adds(carry_in.is_some(), &mut random);
                if !limits.covers {
                    assert!(
                        late(&timely) <= late(&soon).max(0),
                        "{name} {positions} {case}"
                    );
                }
            }
        }
    }
}

/// Ramps, humps and late single bits at 64 bits: never slower than a fixed scheme
/// of two-part spans, and what that costs in gates.
#[test]
fn no_fixed_scheme_is_faster_on_uneven_arrivals() {
    let n = 64;
    let names = ["arrival-aware", "and-or-path"];
    let fixed = all().iter().filter(|scheme| !names.contains(&scheme.name));
    let fixed: Vec<CarryNetwork> = fixed
        .map(|scheme| scheme.network(n, false, Settings::default()))
        .filter(|network| network.is_prefix() && network.largest_valency() == 2)
        .collect();
    assert!(fixed.len() >= 6);
    let mut random = fastrand::Rng::with_seed(64);
    let (mut shares, mut equal, mut gained) = (Vec::new(), Vec::new(), 0);
    for case in 0..500 {
        let slope = random.i32(0..=6);
        let middle = random.i32(0..n as i32);
        let ready: Vec<i32> = (0..n as i32)
            .map(|i| match case % 4 {
                0 => i * slope / 4,
                1 => (n as i32 - 1 - i) * slope / 4,
                2 => (n as i32 - (i - middle).abs()) * slope / 4,
                _ if i == middle => 2 * slope,
                _ => 0,
            })
            .collect();
        let mut profile = profile(&ready, None, 2);
        let limits = profile.costs.limits();
        let mut carries = vec![None; n];
        carries[n - 1] = Some(0);
        profile.required = Some(Required {
            sums: vec![Some(0); n],
            carries,
        });
        let built = |network: &CarryNetwork| Adder::of(network, &ready, None, limits);
        let ours = built(&fitted("arrival-aware", &profile, false, 0));
        let rivals = fixed.iter().map(&built);
        let (levels, gates) = rivals
            .map(|adder| (adder.levels(), adder.gates()))
            .min()
            .unwrap();
        assert!(ours.levels() <= levels, "case {case}");
        gained += levels - ours.levels();
        shares.push(ours.gates() as f64 / gates as f64);
        // No faster than the rival: what is saved off the critical spans.
        let later = (levels - ours.levels()) as usize;
        let ours = built(&fitted("arrival-aware", &profile, false, later));
        assert!(ours.levels() <= levels, "case {case}");
        equal.push(ours.gates() as f64 / gates as f64);
    }
    let mean = |list: &[f64]| list.iter().sum::<f64>() / list.len() as f64;
    let worst = |list: &[f64]| list.iter().copied().fold(0.0, f64::max);
    println!(
        "gates against the fastest fixed scheme: {:.3} on average, {:.3} at worst, \
         {:.2} levels earlier on average; as late as that scheme {:.3} and {:.3}",
        mean(&shares),
        worst(&shares),
        f64::from(gained) / 500.0,
        mean(&equal),
        worst(&equal)
    );
    assert!(mean(&equal) < 0.95 && worst(&equal) < 2.1);
    assert!(gained > 0);
}
