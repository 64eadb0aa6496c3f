//! A sink that only counts: for comparing networks where there is no netlist.
//!
//! Every gate costs one delay; an XOR is one gate, or three two-input ANDs in two
//! levels as in an AND/inverter graph. Inversion is free. Gates are hashed, so
//! equal ones are one; figures are taken over what given outputs need, so gates
//! nobody reads do not count. Gates evaluate on 64 input vectors at once.

use hashbrown::HashMap;
use rustc_hash::FxBuildHasher;

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

#[derive(Clone, PartialEq, Eq, Hash)]
enum Kind {
    /// The constant 0, or an input.
    Source,
    And,
    Xor,
    Cover(Function),
}

/// Counts gates and delays; see the head of the module.
pub struct CountingSink {
    xor_form: XorForm,
    gates: Vec<(Kind, Box<[CountedSignal]>)>,
    arrivals: Vec<i32>,
    inputs: Vec<u32>,
    shared: HashMap<(Kind, Box<[CountedSignal]>), u32, FxBuildHasher>,
}

const FALSE: CountedSignal = CountedSignal(0);

impl CountingSink {
    /// An empty sink.
    pub fn new(xor_form: XorForm) -> Self {
        Self {
            xor_form,
            gates: vec![(Kind::Source, Box::default())],
            arrivals: vec![i32::MIN],
            inputs: Vec::new(),
            shared: HashMap::default(),
        }
    }

    /// A new input, ready at `arrival`.
    pub fn input(&mut self, arrival: i32) -> CountedSignal {
        let net = self.gates.len() as u32;
        self.inputs.push(net);
        self.gates.push((Kind::Source, Box::default()));
        self.arrivals.push(arrival);
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
        self.gates.len() - 1 - self.inputs.len()
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
        let mut readers = vec![0usize; self.gates.len()];
        let pins = self.needed(outputs).flatten();
        for signal in pins.chain(outputs).filter(|s| s.net() != 0) {
            readers[signal.net()] += 1;
        }
        readers.into_iter().max().unwrap_or(0)
    }

    /// The signals' values where `inputs[i]` holds 64 values of the `i`th input.
    pub fn evaluate(&self, inputs: &[u64], signals: &[CountedSignal]) -> Vec<u64> {
        assert_eq!(inputs.len(), self.inputs.len(), "one word for each input");
        let mut values = vec![0u64; self.gates.len()];
        for (&net, &word) in self.inputs.iter().zip(inputs) {
            values[net as usize] = word;
        }
        let mut words = Vec::new();
        for (net, (kind, pins)) in self.gates.iter().enumerate() {
            words.clear();
            words.extend(pins.iter().map(|&pin| value(&values, pin)));
            values[net] = match kind {
                Kind::Source => continue,
                Kind::And => words.iter().fold(!0, |all, word| all & word),
                Kind::Xor => words.iter().fold(0, |sum, word| sum ^ word),
                Kind::Cover(function) => function.evaluate(&words),
            };
        }
        signals.iter().map(|&s| value(&values, s)).collect()
    }

    /// The pins of each gate the outputs need.
    fn needed(&self, outputs: &[CountedSignal]) -> impl Iterator<Item = &[CountedSignal]> {
        let mut needed = vec![false; self.gates.len()];
        for output in outputs {
            needed[output.net()] = true;
        }
        for net in (0..needed.len()).rev() {
            if needed[net] {
                for pin in &self.gates[net].1 {
                    needed[pin.net()] = true;
                }
            }
        }
        let gates = self.gates.iter().zip(needed);
        gates
            .filter(|((kind, _), needed)| *needed && *kind != Kind::Source)
            .map(|((_, pins), _)| &pins[..])
    }

    fn gate(&mut self, kind: Kind, pins: Vec<CountedSignal>) -> CountedSignal {
        let gate = (kind, pins.into_boxed_slice());
        if let Some(&net) = self.shared.get(&gate) {
            return CountedSignal(net << 1);
        }
        let net = self.gates.len() as u32;
        let latest = gate.1.iter().map(|&pin| self.arrival(pin)).max();
        self.arrivals
            .push(latest.unwrap_or(i32::MIN).saturating_add(1));
        self.shared.insert(gate.clone(), net);
        self.gates.push(gate);
        CountedSignal(net << 1)
    }
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
            _ => self.gate(Kind::And, pins),
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
            (low, high) => self.gate(Kind::Xor, vec![low, high]),
        };
        if inverted { !signal } else { signal }
    }

    fn cover(&mut self, function: &Function, inputs: &[CountedSignal]) -> CountedSignal {
        let mut function = function.clone();
        for (i, _) in inputs.iter().enumerate().filter(|(_, s)| s.is_inverted()) {
            function = function.flip(i);
        }
        let pins = inputs.iter().map(|s| s.positive()).collect();
        self.gate(Kind::Cover(function), pins)
    }

    fn arrival(&self, signal: CountedSignal) -> i32 {
        self.arrivals[signal.net()]
    }
}
