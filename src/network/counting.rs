//! A sink that only counts: for comparing networks where there is no netlist.
//!
//! Every gate costs one delay, or what a caller's price says; an XOR is one gate,
//! or three two-input ANDs in two levels as in an AND/inverter graph. Inversion is
//! free. Gates are hashed, so
//! equal ones are one; figures are taken over what given outputs need, so gates
//! nobody reads do not count. Gates evaluate on 64 input vectors at once.
//! Invariant: a gate comes after the gates it reads.

use std::hash::{Hash, Hasher};
use std::rc::Rc;

use hashbrown::HashTable;
use rustc_hash::FxHasher;

use super::build::GateSink;
use crate::netlist::Function;

/// A net of a [`CountingSink`], inverted or not.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct CountedSignal(u32);

impl CountedSignal {
    fn net(self) -> usize {
        (self.0 >> 1) as usize
    }

    fn is_inverted(self) -> bool {
        self.0 & 1 == 1
    }

    fn positive(self) -> Self {
        Self(self.0 & !1)
    }
}

impl std::ops::Not for CountedSignal {
    type Output = Self;

    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

/// What an XOR is made of.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum XorForm {
    /// One gate.
    Gate,
    /// Three two-input ANDs in two levels.
    Ands,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash)]
enum Kind {
    /// The constant 0, or an input.
    Source,
    And,
    Xor,
    /// A function, by its place in the list.
    Cover(u32),
}

/// Counts gates and delays; see the head of the module.
pub struct CountingSink {
    xor_form: XorForm,
    /// Net 0 is the constant 0; every other net is an input or a gate.
    kinds: Vec<Kind>,
    pin_ends: Vec<u32>,
    pins: Vec<CountedSignal>,
    arrivals: Vec<i32>,
    inputs: Vec<u32>,
    functions: Vec<Function>,
    shared: HashTable<u32>,
    prices: Option<Prices>,
}

/// Prices a function, pin by pin, in ticks.
pub type Price = Rc<dyn Fn(&Function) -> Vec<i32>>;

/// Pin delays by kind of gate, asked of the caller once each.
struct Prices {
    price: Price,
    /// By number of inputs, from its latest pin.
    ands: Vec<Option<i32>>,
    xor: i32,
    /// By place in the list of functions, pin by pin.
    covers: Vec<Vec<i32>>,
}

impl Prices {
    fn and(&mut self, inputs: usize) -> i32 {
        if self.ands.len() <= inputs {
            self.ands.resize(inputs + 1, None);
        }
        let price = &self.price;
        *self.ands[inputs].get_or_insert_with(|| {
            let pins = price(&Function::product(&vec![false; inputs], false));
            pins.into_iter().max().unwrap_or(0)
        })
    }
}

const FALSE: CountedSignal = CountedSignal(0);

impl CountingSink {
    /// An empty sink.
    pub fn new(xor_form: XorForm) -> Self {
        let mut sink = Self {
            xor_form,
            kinds: Vec::new(),
            pin_ends: Vec::new(),
            pins: Vec::new(),
            arrivals: Vec::new(),
            inputs: Vec::new(),
            functions: Vec::new(),
            shared: HashTable::new(),
            prices: None,
        };
        sink.push(Kind::Source, &[], i32::MIN);
        sink
    }

    /// An empty sink whose gates cost what `price` says, pin by pin, in ticks.
    pub fn priced(xor_form: XorForm, price: Price) -> Self {
        let xor = price(&Function::parity(2, false));
        Self {
            prices: Some(Prices {
                xor: xor.into_iter().max().unwrap_or(0),
                price,
                ands: Vec::new(),
                covers: Vec::new(),
            }),
            ..Self::new(xor_form)
        }
    }

    /// A new input, ready at `arrival`.
    pub fn input(&mut self, arrival: i32) -> CountedSignal {
        let net = self.push(Kind::Source, &[], arrival);
        self.inputs.push(net);
        CountedSignal(net << 1)
    }

    /// When the last of the signals is ready; 0 at the least.
    pub fn depth(&self, outputs: &[CountedSignal]) -> i32 {
        let arrivals = outputs.iter().map(|&s| self.arrival(s));
        arrivals.fold(0, i32::max)
    }

    /// Gates the outputs need.
    pub fn gates(&self, outputs: &[CountedSignal]) -> usize {
        self.needed(outputs).count()
    }

    /// Gates in all, needed or not.
    pub fn gates_made(&self) -> usize {
        self.kinds.len() - 1 - self.inputs.len()
    }

    /// Gates the outputs need, a gate of k inputs counted k-1.
    pub fn gate_equivalents(&self, outputs: &[CountedSignal]) -> usize {
        self.needed(outputs).map(|pins| pins.len() - 1).sum()
    }

    /// Inputs of the largest gate the outputs need.
    pub fn largest_fan_in(&self, outputs: &[CountedSignal]) -> usize {
        let widths = self.needed(outputs).map(<[CountedSignal]>::len);
        widths.max().unwrap_or(0)
    }

    /// Most gate pins reading one net, among the gates the outputs need; an
    /// output is a reader too.
    pub fn largest_fan_out(&self, outputs: &[CountedSignal]) -> usize {
        let mut readers = vec![0usize; self.kinds.len()];
        let pins = self.needed(outputs).flatten();
        for signal in pins.chain(outputs).filter(|s| s.net() != 0) {
            readers[signal.net()] += 1;
        }
        readers.into_iter().max().unwrap_or(0)
    }

    /// The signals' values where `inputs[i]` holds 64 values of the `i`th input.
    pub fn evaluate(&self, inputs: &[u64], signals: &[CountedSignal]) -> Vec<u64> {
        assert_eq!(inputs.len(), self.inputs.len(), "one word for each input");
        let mut values = vec![0u64; self.kinds.len()];
        for (&net, &word) in self.inputs.iter().zip(inputs) {
            values[net as usize] = word;
        }
        let mut words = Vec::new();
        for (net, &kind) in self.kinds.iter().enumerate() {
            words.clear();
            words.extend(self.pins_of(net).iter().map(|&pin| value(&values, pin)));
            values[net] = match kind {
                Kind::Source => continue,
                Kind::And => words.iter().fold(!0, |all, word| all & word),
                Kind::Xor => words.iter().fold(0, |sum, word| sum ^ word),
                Kind::Cover(function) => self.functions[function as usize].evaluate(&words),
            };
        }
        signals.iter().map(|&s| value(&values, s)).collect()
    }

    /// The pins of each gate the outputs need.
    fn needed(&self, outputs: &[CountedSignal]) -> impl Iterator<Item = &[CountedSignal]> {
        let mut needed = vec![false; self.kinds.len()];
        for output in outputs {
            needed[output.net()] = true;
        }
        for net in (0..needed.len()).rev() {
            if needed[net] {
                for pin in self.pins_of(net) {
                    needed[pin.net()] = true;
                }
            }
        }
        let gates = (0..needed.len()).filter(|&net| self.kinds[net] != Kind::Source);
        gates
            .filter(move |&net| needed[net])
            .map(|net| self.pins_of(net))
    }

    /// The function's place; a handful occur, so a search will do.
    fn function(&mut self, function: Function) -> u32 {
        let known = self.functions.iter().position(|f| *f == function);
        let place = known.unwrap_or(self.functions.len());
        if known.is_none() {
            self.functions.push(function);
        }
        place as u32
    }

    fn pins_of(&self, net: usize) -> &[CountedSignal] {
        pins_between(&self.pin_ends, &self.pins, net)
    }

    /// The gate of that kind and pins, made when there is none yet.
    fn gate(&mut self, kind: Kind, pins: &[CountedSignal]) -> CountedSignal {
        let (kinds, ends, all) = (&self.kinds, &self.pin_ends, &self.pins);
        let hash = hash_of(kind, pins);
        let equal = |&net: &u32| {
            kinds[net as usize] == kind && pins_between(ends, all, net as usize) == pins
        };
        if let Some(&net) = self.shared.find(hash, equal) {
            return CountedSignal(net << 1);
        }
        let ready = self.ready(kind, pins);
        let net = self.push(kind, pins, ready);
        let (kinds, ends, all) = (&self.kinds, &self.pin_ends, &self.pins);
        self.shared.insert_unique(hash, net, |&net| {
            let net = net as usize;
            hash_of(kinds[net], pins_between(ends, all, net))
        });
        CountedSignal(net << 1)
    }

    /// When a gate is ready.
    fn ready(&mut self, kind: Kind, pins: &[CountedSignal]) -> i32 {
        let times = pins.iter().map(|pin| self.arrivals[pin.net()]);
        let latest = || times.clone().max().unwrap_or(i32::MIN);
        let Some(prices) = &mut self.prices else {
            return latest().saturating_add(1);
        };
        match kind {
            Kind::Source => latest(),
            Kind::And => latest().saturating_add(prices.and(pins.len())),
            Kind::Xor => latest().saturating_add(prices.xor),
            Kind::Cover(function) => {
                for known in prices.covers.len()..=function as usize {
                    let delays = (prices.price)(&self.functions[known]);
                    prices.covers.push(delays);
                }
                let delays = &prices.covers[function as usize];
                let delayed = times
                    .zip(delays)
                    .map(|(at, &delay)| at.saturating_add(delay));
                delayed.max().unwrap_or(i32::MIN)
            }
        }
    }

    fn push(&mut self, kind: Kind, pins: &[CountedSignal], arrival: i32) -> u32 {
        let net = u32::try_from(self.kinds.len())
            .ok()
            .filter(|n| n >> 31 == 0);
        let net = net.expect("fewer than 2^31 nets");
        self.kinds.push(kind);
        self.pins.extend_from_slice(pins);
        let end = u32::try_from(self.pins.len()).expect("fewer than 2^32 pins");
        self.pin_ends.push(end);
        self.arrivals.push(arrival);
        net
    }
}

fn pins_between<'a>(ends: &[u32], pins: &'a [CountedSignal], net: usize) -> &'a [CountedSignal] {
    let start = net.checked_sub(1).map_or(0, |before| ends[before]);
    &pins[start as usize..ends[net] as usize]
}

fn hash_of(kind: Kind, pins: &[CountedSignal]) -> u64 {
    let mut hasher = FxHasher::default();
    kind.hash(&mut hasher);
    pins.hash(&mut hasher);
    hasher.finish()
}

fn value(values: &[u64], signal: CountedSignal) -> u64 {
    let word = values[signal.net()];
    if signal.is_inverted() { !word } else { word }
}

impl GateSink for CountingSink {
    type Signal = CountedSignal;

    fn constant(&mut self, value: bool) -> CountedSignal {
        if value { !FALSE } else { FALSE }
    }

    fn and(&mut self, inputs: &[CountedSignal]) -> CountedSignal {
        let mut pins = inputs.to_vec();
        pins.sort_unstable();
        pins.dedup();
        pins.retain(|&pin| pin != !FALSE);
        let opposite = pins.windows(2).any(|pair| pair[0] == !pair[1]);
        match pins[..] {
            _ if opposite || pins.contains(&FALSE) => FALSE,
            [] => !FALSE,
            [only] => only,
            _ => self.gate(Kind::And, &pins),
        }
    }

    fn xor(&mut self, left: CountedSignal, right: CountedSignal) -> CountedSignal {
        if self.xor_form == XorForm::Ands {
            let both = self.and(&[left, right]);
            let neither = self.and(&[!left, !right]);
            return self.and(&[!both, !neither]);
        }
        let inverted = left.is_inverted() != right.is_inverted();
        let (left, right) = (left.positive(), right.positive());
        let signal = match (left.min(right), left.max(right)) {
            (low, high) if low == high => FALSE,
            (FALSE, high) => high,
            (low, high) => self.gate(Kind::Xor, &[low, high]),
        };
        if inverted { !signal } else { signal }
    }

    fn cover(&mut self, function: &Function, inputs: &[CountedSignal]) -> CountedSignal {
        assert!((3..=6).contains(&inputs.len()), "a cover has 3 to 6 inputs");
        let mut function = function.clone();
        for (i, _) in inputs.iter().enumerate().filter(|(_, s)| s.is_inverted()) {
            function = function.flip(i);
        }
        let pins: Vec<_> = inputs.iter().map(|s| s.positive()).collect();
        let kind = Kind::Cover(self.function(function));
        self.gate(kind, &pins)
    }

    fn arrival(&self, signal: CountedSignal) -> i32 {
        self.arrivals[signal.net()]
    }
}
