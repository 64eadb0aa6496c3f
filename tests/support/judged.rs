//! Recognition held against the truth of a generated case: which words were
//! found at full width, and whether every chain told is a theorem.
//!
//! Nets are compared by their values, up to complement, on patterns that make
//! carries run far. All values come from the generators' own evaluation, by net
//! name; the crate only says which nets it means. A theorem is checked by
//! integer addition, lane by lane.

#![allow(dead_code)]

use crate::generators::corpus::Case;
use crate::generators::{Comparison, Net, Random, Truth};
use carrywise::chain::{Chain, Found};
use carrywise::netlist::{Bit, Netlist, Signal};
use std::collections::{HashMap, HashSet};

/// Rounds of 64 patterns.
const ROUNDS: usize = 12;

/// The values of one net on all patterns.
type Values = [u64; ROUNDS];

const ZERO: Values = [0; ROUNDS];

fn normal(values: Values) -> Values {
    match values[0] & 1 {
        1 => values.map(|word| !word),
        _ => values,
    }
}

/// What a case is known to do, on patterns of its own.
pub struct Witness {
    /// By name, of the file's nets.
    file: HashMap<String, Values>,
    /// By net, of the reference circuit.
    reference: Vec<Values>,
    /// Of all nets of the file, up to complement.
    on_nets: HashSet<Values>,
}

impl Witness {
    pub fn of(case: &Case, seed: u64) -> Self {
        let circuit = &case.reference.circuit;
        let mut random = Random::new(seed);
        let mut file: HashMap<String, Values> = HashMap::new();
        let mut reference = vec![ZERO; circuit.net_count()];
        for round in 0..ROUNDS {
            let mut words: HashMap<Net, u64> = HashMap::new();
            let states = circuit.registers.iter().map(|register| register.output);
            let free: Vec<Net> = circuit.inputs.iter().copied().chain(states).collect();
            for &net in &free {
                words.insert(net, random.word());
            }
            steer(case, round, &mut words, &mut random);
            let words: Vec<u64> = free.iter().map(|net| words[net]).collect();
            let (inputs, state) = words.split_at(circuit.inputs.len());
            let values = circuit.evaluate(inputs, state);
            for (all, word) in reference.iter_mut().zip(values) {
                all[round] = word;
            }
            for (name, word) in case.form.values(inputs, state) {
                file.entry(name).or_insert(ZERO)[round] = word;
            }
        }
        let on_nets = file.values().copied().map(normal).collect();
        Self {
            file,
            reference,
            on_nets,
        }
    }

    /// The values of a net of the file; inner nets of a hierarchy go by their
    /// last name.
    fn of_signal(&self, netlist: &Netlist, signal: Signal) -> Values {
        let name = netlist.net_name(signal.net);
        let last = name.rsplit('/').next().unwrap_or(&name);
        let values = self.file.get(&name).or_else(|| self.file.get(last));
        let values = *values.unwrap_or_else(|| panic!("no net {name} in the file"));
        match signal.inverted {
            true => values.map(|word| !word),
            false => values,
        }
    }

    fn of_bit(&self, netlist: &Netlist, bit: Bit) -> Values {
        match bit {
            Bit::Constant(value) => [if value { !0 } else { 0 }; ROUNDS],
            Bit::Signal(signal) => self.of_signal(netlist, signal),
        }
    }

    fn known(&self, net: Net) -> Values {
        self.reference[net.index()]
    }

    fn is_on_net(&self, values: Values) -> bool {
        let values = normal(values);
        values == ZERO || self.on_nets.contains(&values)
    }
}

/// Every third round leaves the words random; the others make the operands of
/// one truth nearly opposite or nearly equal, or nearly all 1 or 0.
fn steer(case: &Case, round: usize, words: &mut HashMap<Net, u64>, random: &mut Random) {
    let rare = |random: &mut Random| random.word() & random.word() & random.word() & random.word();
    let truths = case.reference.truths.iter().map(|t| (&t.a, &t.b));
    let comparisons = case.reference.comparisons.iter().map(|t| (&t.a, &t.b));
    let pairs: Vec<_> = truths.chain(comparisons).collect();
    if pairs.is_empty() || round.is_multiple_of(3) {
        return;
    }
    let (a, b) = pairs[round % pairs.len()];
    for (i, net) in a.iter().enumerate() {
        let base = match (b.is_empty(), round % 3) {
            (true, 1) => !rare(random),
            (true, _) => rare(random),
            _ => words.get(net).copied().unwrap_or(0),
        };
        if b.is_empty() {
            words.entry(*net).and_modify(|word| *word = base);
        } else if let Some(other) = b.get(i).filter(|other| *other != net) {
            let flip = if round % 3 == 1 { !0 } else { 0 };
            let value = base ^ flip ^ rare(random);
            words.entry(*other).and_modify(|word| *word = value);
        }
    }
}

/// How a word of the truth fared.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Outcome {
    /// Every position, in one chain, of the operands known.
    Full,
    /// Every position in one chain, of other operands.
    OtherOperands,
    /// So many of so many positions in one chain.
    Part(usize, usize),
}

/// What a word of the truth is.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Family {
    /// A word with sums.
    Sums,
    /// A comparison without sums.
    Order,
    /// A row of a divider or square root.
    Row,
    /// Any of them, of which an operand bit or a sum is on no net of the file.
    Swallowed,
}

/// One word of the truth.
pub struct Fate {
    pub family: Family,
    pub outcome: Outcome,
    /// Words the kind may be told by.
    pub kinds: &'static [&'static str],
    /// The kind told, where the word was found whole.
    pub kind: Option<&'static str>,
    /// How it is said to be built.
    pub built_as: Option<String>,
}

/// A case after recognition.
pub struct Judged {
    pub fates: Vec<Fate>,
    /// Chains that integer addition refutes.
    pub false_chains: Vec<String>,
    /// Chains that hold but that no truth asked for, with their positions.
    pub unasked: Vec<String>,
}

pub fn judge(case: &Case, netlist: &Netlist, found: &Found, witness: &Witness) -> Judged {
    let mut asked = vec![false; found.chains.len()];
    let mut fates = Vec::new();
    for truth in &case.reference.truths {
        fates.extend(word_fate(case, truth, netlist, found, witness, &mut asked));
    }
    for comparison in &case.reference.comparisons {
        fates.extend(order_fate(
            case, comparison, netlist, found, witness, &mut asked,
        ));
    }
    let mut false_chains = Vec::new();
    let mut unasked = Vec::new();
    for (chain, asked) in found.chains.iter().zip(asked) {
        let label = format!(
            "{}: {} of {}",
            case.label(),
            chain.kind.word(),
            chain.positions.len()
        );
        if let Err(fault) = theorem(chain, netlist, witness) {
            false_chains.push(format!("{label}: {fault}"));
        } else if !asked {
            unasked.push(label);
        }
    }
    Judged {
        fates,
        false_chains,
        unasked,
    }
}

fn word_fate(
    case: &Case,
    truth: &Truth,
    netlist: &Netlist,
    found: &Found,
    witness: &Witness,
    asked: &mut [bool],
) -> Option<Fate> {
    let known = |nets: &[Net], i: usize| nets.get(i).map_or(ZERO, |&net| witness.known(net));
    // A sum that is an operand bit or a constant is no position to be found.
    let wanted: Vec<usize> = (0..truth.bits())
        .filter(|&i| {
            let sum = normal(known(&truth.sums, i));
            let plain = [known(&truth.a, i), known(&truth.b, i), ZERO].map(normal);
            !plain.contains(&sum)
        })
        .collect();
    let mut best: (usize, Option<usize>, bool) = (0, None, false);
    for (at, chain) in found.chains.iter().enumerate() {
        let places: HashMap<Values, usize> = chain
            .positions
            .iter()
            .enumerate()
            .filter_map(|(at, p)| p.sums.first().map(|&sum| (at, sum)))
            .map(|(at, sum)| (normal(witness.of_signal(netlist, sum)), at))
            .collect();
        let placed: Vec<Option<usize>> = wanted
            .iter()
            .map(|&i| places.get(&normal(known(&truth.sums, i))).copied())
            .collect();
        let count = placed.iter().flatten().count();
        if count < 2 {
            continue;
        }
        let in_order = placed.windows(2).all(|pair| match *pair {
            [Some(low), Some(high)] => low + 1 == high,
            _ => true,
        });
        let whole = count == wanted.len() && in_order;
        let told = wanted.iter().zip(&placed).enumerate();
        let fits = whole
            && told.clone().all(|(nth, (&i, place))| {
                let place = place.expect("the word is whole");
                operands_fit(truth, chain, place, i, nth == 0, netlist, witness)
            });
        asked[at] = true;
        if (count, fits) > (best.0, best.2) {
            best = (count, whole.then_some(at), fits);
        }
    }
    if wanted.len() < 4 {
        return None;
    }
    let mode = truth.mode.map_or(ZERO, |net| witness.known(net));
    let is_on_nets = wanted.iter().all(|&i| {
        let b = known(&truth.b, i);
        let before_mode: Values = std::array::from_fn(|round| b[round] ^ mode[round]);
        let has_b = [b, before_mode].into_iter().any(|b| witness.is_on_net(b));
        let others = [known(&truth.a, i), known(&truth.sums, i)];
        has_b && others.into_iter().all(|values| witness.is_on_net(values))
    });
    let chain = best.1.map(|at| &found.chains[at]);
    Some(Fate {
        family: family(case, is_on_nets, Family::Sums),
        outcome: match best {
            (_, Some(_), true) => Outcome::Full,
            (_, Some(_), false) => Outcome::OtherOperands,
            (count, None, _) => Outcome::Part(count, wanted.len()),
        },
        kinds: kinds(case, truth),
        kind: chain.map(|chain| chain.kind.word()),
        built_as: chain.map(|chain| format!("{:?}", chain.built_as).to_lowercase()),
    })
}

fn family(case: &Case, is_on_nets: bool, usual: Family) -> Family {
    match case.kind {
        _ if !is_on_nets => Family::Swallowed,
        "divider row" | "square root row" => Family::Row,
        _ => usual,
    }
}

/// The operand bits told at a position are the known ones. At the lowest the
/// carry-in is an operand bit like the others: the three are interchangeable.
fn operands_fit(
    truth: &Truth,
    chain: &Chain,
    place: usize,
    i: usize,
    lowest: bool,
    netlist: &Netlist,
    witness: &Witness,
) -> bool {
    let known = |nets: &[Net]| nets.get(i).map_or(ZERO, |&net| witness.known(net));
    let mode = chain
        .mode
        .map_or(ZERO, |mode| witness.of_signal(netlist, mode));
    let position = &chain.positions[place];
    let mut b = witness.of_bit(netlist, position.b);
    for (word, mode) in b.iter_mut().zip(mode) {
        *word ^= mode;
    }
    let mut told = vec![normal(witness.of_bit(netlist, position.a)), normal(b)];
    let mut meant = vec![normal(known(&truth.a)), normal(known(&truth.b))];
    told.sort_unstable();
    meant.sort_unstable();
    if told == meant || !lowest {
        return told == meant;
    }
    let carry = truth
        .carry_in
        .map_or(ZERO, |net| normal(witness.known(net)));
    if place == 0 {
        told.push(normal(witness.of_bit(netlist, chain.carry_in)));
        meant.push(carry);
    }
    told.sort_unstable();
    meant.sort_unstable();
    told == meant
}

/// The kinds a word may rightly be told as.
fn kinds(case: &Case, truth: &Truth) -> &'static [&'static str] {
    use crate::generators::Kind;
    if truth.mode.is_some() {
        return &["adder-subtractor"];
    }
    // With constants among the operand bits a + k, a - (-k) and their like are
    // one function.
    if case.kind == "partly constant" {
        return &["adder", "subtractor", "incrementer", "decrementer"];
    }
    match truth.kind {
        Kind::Adder => &["adder"],
        Kind::Subtractor => &["subtractor"],
        Kind::Incrementer => &["incrementer"],
        Kind::Decrementer => &["decrementer"],
    }
}

fn order_fate(
    case: &Case,
    truth: &Comparison,
    netlist: &Netlist,
    found: &Found,
    witness: &Witness,
    asked: &mut [bool],
) -> Option<Fate> {
    // Bits that are constant on both sides are no position.
    let pair = |i: usize| {
        let mut pair = [truth.a[i], truth.b[i]].map(|net| normal(witness.known(net)));
        pair.sort_unstable();
        pair
    };
    let meant: Vec<_> = (0..truth.a.len())
        .map(pair)
        .filter(|p| *p != [ZERO; 2])
        .collect();
    let result = normal(witness.known(truth.result));
    let mut best: (usize, Option<usize>) = (0, None);
    for (at, chain) in found.chains.iter().enumerate() {
        let told: Vec<[Values; 2]> = chain
            .positions
            .iter()
            .map(|position| {
                let bits = [position.a, position.b];
                let mut pair = bits.map(|bit| normal(witness.of_bit(netlist, bit)));
                pair.sort_unstable();
                pair
            })
            .collect();
        let count = meant.iter().filter(|pair| told.contains(pair)).count();
        let carries = chain.positions.iter().flat_map(|p| &p.carries);
        let tells = carries
            .map(|&carry| normal(witness.of_signal(netlist, carry)))
            .any(|values| values == result);
        if count < 2 {
            continue;
        }
        asked[at] = true;
        let whole = count == meant.len() && tells;
        if (whole, count) > (best.1.is_some(), best.0) {
            best = (count, whole.then_some(at));
        }
    }
    if meant.len() < 4 {
        return None;
    }
    let mut nets = meant.iter().flatten().copied().chain([result]);
    let is_on_nets = nets.all(|values| witness.is_on_net(values));
    let chain = best.1.map(|at| &found.chains[at]);
    Some(Fate {
        family: family(case, is_on_nets, Family::Order),
        outcome: match best {
            (_, Some(_)) => Outcome::Full,
            (count, None) => Outcome::Part(count, meant.len()),
        },
        // The borrow of a subtraction tells the order as well.
        kinds: &["comparator", "subtractor"],
        kind: chain.map(|chain| chain.kind.word()),
        built_as: chain.map(|chain| format!("{:?}", chain.built_as).to_lowercase()),
    })
}

/// Checks a chain's claim by integer addition, in every lane.
pub fn theorem(chain: &Chain, netlist: &Netlist, witness: &Witness) -> Result<(), String> {
    let of_bit = |bit: Bit| witness.of_bit(netlist, bit);
    let of_signals = |signals: &[Signal]| -> Vec<Values> {
        let all = signals.iter();
        all.map(|&signal| witness.of_signal(netlist, signal))
            .collect()
    };
    let mode = chain
        .mode
        .map_or(ZERO, |mode| witness.of_signal(netlist, mode));
    let a: Vec<Values> = chain.positions.iter().map(|p| of_bit(p.a)).collect();
    let b: Vec<Values> = chain.positions.iter().map(|p| of_bit(p.b)).collect();
    let sums: Vec<_> = chain
        .positions
        .iter()
        .map(|p| of_signals(&p.sums))
        .collect();
    let carries: Vec<_> = chain
        .positions
        .iter()
        .map(|p| of_signals(&p.carries))
        .collect();
    let carry_in = of_bit(chain.carry_in);
    for round in 0..ROUNDS {
        for lane in 0..64 {
            let bit = |values: &Values| u64::from(values[round] >> lane & 1 == 1);
            let complement = bit(&mode);
            let mut carry = bit(&carry_in);
            // Thirty positions at a time are added as integers; the carries into
            // each position follow from the sum, a and b.
            for low in (0..a.len()).step_by(30) {
                let high = (low + 30).min(a.len());
                let number = |bits: &[Values], flip: u64| {
                    let bits = bits.iter().enumerate();
                    bits.fold(0u64, |word, (i, values)| word | (bit(values) ^ flip) << i)
                };
                let (x, y) = (number(&a[low..high], 0), number(&b[low..high], complement));
                let total = x + y + carry;
                let into = total ^ x ^ y;
                for i in low..high {
                    let at = i - low;
                    if sums[i].iter().any(|sum| bit(sum) != total >> at & 1) {
                        return Err(format!("the sum of position {i} is not a + b + c"));
                    }
                    if carries[i]
                        .iter()
                        .any(|net| bit(net) != into >> (at + 1) & 1)
                    {
                        return Err(format!("the carry out of position {i} is wrong"));
                    }
                }
                carry = into >> (high - low) & 1;
            }
        }
    }
    Ok(())
}
