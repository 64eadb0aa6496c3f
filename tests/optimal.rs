//! The schemes that fit arrivals: their times against enumeration and published
//! numbers, their functions against integer addition, their speed and size against
//! the fixed schemes.

use carrywise::network::and_or_path::{PathTimes, and_or_path};
use carrywise::network::arrival_aware::{Leaves, Steps, Times, arrival_aware};
use carrywise::network::form::{Form, Signal};
use carrywise::network::schemes::{Settings, all};
use carrywise::network::sum_end::Ends;
use carrywise::network::task::Task;
use carrywise::network::{CarryNetwork, Node};

/// Ends in two-input levels of ANDs, an XOR or a choice being two of them.
fn ends(select: bool) -> Ends {
    Ends {
        xor: 2,
        xor_gates: 3,
        select: select.then_some(2),
        select_gates: 3,
    }
}

/// A task with g and p of each item ready as given, everything needed at once.
fn task(ready: &[i32], has_carry_in: bool, inputs: usize, select: bool) -> Task {
    let positions = ready.len() - usize::from(has_carry_in);
    Task {
        leaves: Leaves {
            generate: ready.to_vec(),
            propagate: ready.to_vec(),
            either: ready.to_vec(),
        },
        halves: ready.iter().map(|time| time + 1).collect(),
        has_carry_in,
        steps: Steps::uniform(inputs, 1),
        ends: ends(select),
        carries_by: vec![Some(0); positions],
        sums_by: vec![Some(0); positions],
    }
}

/// When each signal is ready, and the gates of all, counted in two-input ones.
fn measured(form: &Form, task: &Task) -> (Vec<i32>, usize) {
    let mut times: Vec<i32> = Vec::new();
    let mut gates = 0;
    for signal in form.signals() {
        let time = match signal {
            Signal::Generate(item) => task.leaves.generate[*item],
            Signal::Propagate(item) => task.leaves.propagate[*item],
            Signal::Either(item) => task.leaves.either[*item],
            Signal::Half(item) => task.halves[*item],
            Signal::And(inputs) | Signal::Or(inputs) => {
                assert!(inputs.len() >= 2 && inputs.len() < task.steps.and.len());
                gates += inputs.len() - 1;
                let latest = inputs.iter().map(|input| times[input.index()]).max();
                let steps = match signal {
                    Signal::And(_) => &task.steps.and,
                    _ => &task.steps.or,
                };
                latest.unwrap() + steps[inputs.len()]
            }
            Signal::Xor(left, right) => {
                gates += task.ends.xor_gates as usize;
                times[left.index()].max(times[right.index()]) + task.ends.xor
            }
            Signal::Select {
                by,
                if_one,
                if_none,
            } => {
                gates += task.ends.select_gates as usize;
                let latest = [by, if_one, if_none].map(|each| times[each.index()]);
                latest.into_iter().max().unwrap() + task.ends.select.unwrap()
            }
        };
        times.push(time);
    }
    (times, gates)
}

/// Latest of the carries and sums.
fn latest(form: &Form, task: &Task) -> i32 {
    let (times, _) = measured(form, task);
    let results = form.carries.iter().chain(&form.sums).flatten();
    results.map(|each| times[each.index()]).max().unwrap()
}

/// Values of all signals on 64 operand pairs at once.
fn evaluate(form: &Form, first: usize, a: &[u64], b: &[u64], carry_in: u64) -> Vec<u64> {
    let mut values: Vec<u64> = Vec::new();
    let at = |item: usize| item.checked_sub(first);
    for signal in form.signals() {
        let value = match signal {
            Signal::Generate(item) => at(*item).map_or(carry_in, |i| a[i] & b[i]),
            Signal::Propagate(item) => at(*item).map(|i| a[i] ^ b[i]).unwrap(),
            Signal::Either(item) => at(*item).map(|i| a[i] | b[i]).unwrap(),
            Signal::Half(item) => at(*item).map(|i| a[i] ^ b[i]).unwrap(),
            Signal::And(inputs) => inputs
                .iter()
                .fold(!0, |all, each| all & values[each.index()]),
            Signal::Or(inputs) => inputs
                .iter()
                .fold(0, |any, each| any | values[each.index()]),
            Signal::Xor(left, right) => values[left.index()] ^ values[right.index()],
            Signal::Select {
                by,
                if_one,
                if_none,
            } => {
                let [by, one, none] = [by, if_one, if_none].map(|each| values[each.index()]);
                by & one | !by & none
            }
        };
        values.push(value);
    }
    values
}

/// Compares a form with addition bit by bit (the definition of binary addition).
fn adds(form: &Form, has_carry_in: bool, random: &mut fastrand::Rng) {
    let positions = form.sums.len();
    for round in 0..8 {
        // Long runs of propagates, or a deep carry never shows.
        let mut a: Vec<u64> = (0..positions).map(|_| random.u64(..)).collect();
        let mut b: Vec<u64> = (0..positions).map(|_| random.u64(..)).collect();
        for i in 0..positions {
            let run = if round % 2 == 0 {
                0
            } else {
                random.u64(..) | random.u64(..)
            };
            b[i] = b[i] & !run | !a[i] & run;
            a[i] = a[i] & !run | !b[i] & run;
        }
        let carry_in = if has_carry_in { random.u64(..) } else { 0 };
        let first = usize::from(has_carry_in);
        let values = evaluate(form, first, &a, &b, carry_in);
        let mut carry = carry_in;
        for i in 0..positions {
            let sum = a[i] ^ b[i] ^ carry;
            carry = a[i] & b[i] | (a[i] | b[i]) & carry;
            assert_eq!(values[form.sums[i].unwrap().index()], sum, "sum {i}");
            assert_eq!(values[form.carries[i].unwrap().index()], carry, "carry {i}");
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
    for (select, prefix, path) in [(false, 14, 13), (true, 13, 12)] {
        let task = task(&[1; 128], false, 2, select);
        for (levels, (form, late)) in [(prefix, arrival_aware(&task)), (path, and_or_path(&task))] {
            assert_eq!(late, levels);
            assert_eq!(latest(&form, &task), levels);
            adds(&form, false, &mut random);
        }
    }
}

/// Every width to 20, with and without carry-in, gates of two to four inputs,
/// arrivals at random: the forms add, and are as early as they say.
#[test]
fn forms_add_and_keep_their_times() {
    let mut random = fastrand::Rng::with_seed(20);
    for positions in 1..=20 {
        for case in 0..12 {
            let has_carry_in = case % 2 == 1;
            let inputs = 2 + case / 2 % 3;
            let spread = if case < 6 { 0 } else { 12 };
            let items = positions + usize::from(has_carry_in);
            let ready: Vec<i32> = (0..items).map(|_| random.i32(0..=spread)).collect();
            let mut task = task(&ready, has_carry_in, inputs, random.bool());
            for by in &mut task.sums_by {
                *by = Some(random.i32(0..20));
            }
            let mut forms = vec![arrival_aware(&task)];
            if inputs == 2 {
                forms.push(and_or_path(&task));
            }
            for (form, late) in forms {
                adds(&form, has_carry_in, &mut random);
                let (times, _) = measured(&form, &task);
                let demands = form.carries.iter().zip(&task.carries_by);
                let demands = demands.chain(form.sums.iter().zip(&task.sums_by));
                for (result, by) in demands {
                    assert!(times[result.unwrap().index()] <= by.unwrap() + late || positions == 1);
                }
            }
        }
    }
}

/// When the carries of a prefix network are ready in two-input levels, and its
/// gates.
fn prefix_times(network: &CarryNetwork, ready: &[i32]) -> (i32, usize) {
    let count = network.nodes().len();
    let mut needs = vec![(false, false); count];
    for position in 0..network.positions() {
        needs[network.carry(position).index()].0 = true;
    }
    let mut gates = 0;
    for node in network.nodes().rev() {
        if let Node::Combine(parts) = network.node(node) {
            let (generate, propagate) = needs[node.index()];
            gates += 2 * usize::from(generate) + usize::from(propagate);
            for (i, part) in parts.iter().enumerate() {
                let last = i + 1 == parts.len();
                needs[part.index()].0 |= generate;
                needs[part.index()].1 |= propagate || generate && !last;
            }
        }
    }
    let mut times = vec![(0, 0); count];
    for node in network.nodes() {
        times[node.index()] = match network.node(node) {
            Node::CarryIn => (ready[0], ready[0]),
            Node::Leaf(i) => (ready[i], ready[i]),
            Node::Combine(parts) => {
                let [upper, lower] = [parts[0], parts[1]].map(|part| times[part.index()]);
                let generate = (upper.0 + 1).max(upper.1 + 2).max(lower.0 + 2);
                (generate, upper.1.max(lower.1) + 1)
            }
        };
    }
    let carries = (0..network.positions()).map(|i| times[network.carry(i).index()].0);
    (carries.max().unwrap(), gates)
}

/// Ramps, humps and late single bits at 64 bits: never slower than a fixed scheme
/// of two-part spans, and what that costs in gates.
#[test]
fn no_fixed_scheme_is_faster_on_uneven_arrivals() {
    let n = 64;
    let fixed: Vec<CarryNetwork> = all()
        .iter()
        .map(|scheme| scheme.network(n, false, Settings::default()))
        .filter(|network| network.largest_valency() == 2)
        .collect();
    assert!(fixed.len() >= 6);
    let mut random = fastrand::Rng::with_seed(64);
    let (mut shares, mut equal, mut gained) = (Vec::new(), Vec::new(), 0);
    for case in 0..500 {
        let slope = random.i32(0..=6);
        let middle = random.usize(0..n) as i32;
        let ready: Vec<i32> = (0..n as i32)
            .map(|i| match case % 4 {
                0 => i * slope / 4,
                1 => (n as i32 - 1 - i) * slope / 4,
                2 => (n as i32 - (i - middle).abs()) * slope / 4,
                _ if i == middle => 2 * slope,
                _ => 0,
            })
            .collect();
        let mut task = task(&ready, false, 2, false);
        task.sums_by = vec![None; n];
        let (form, late) = arrival_aware(&task);
        let (_, gates) = measured(&form, &task);
        let rivals = fixed.iter().map(|network| prefix_times(network, &ready));
        let (levels, rival_gates) = rivals.min().unwrap();
        assert!(late <= levels, "case {case}: {late} against {levels}");
        gained += levels - late;
        shares.push(gates as f64 / rival_gates as f64);
        // No faster than the rival: what is saved off the critical spans.
        task.carries_by = vec![Some(levels); n];
        let (form, late) = arrival_aware(&task);
        assert_eq!(late, 0);
        let (_, gates) = measured(&form, &task);
        equal.push(gates as f64 / rival_gates as f64);
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
    assert!(mean(&equal) < 1.0 && worst(&equal) < 1.25);
    assert!(gained > 0);
}
