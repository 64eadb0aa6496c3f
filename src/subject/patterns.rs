//! Input patterns: seeded random words, biased words, and directed ones.
//!
//! Uniform random words never reach the upper carries of a counter, which
//! toggle only when every lower bit is 1. Every other word is therefore biased:
//! its bits are 1 with probability `1 - 2^-b` (or `2^-b`). Nodes that stay
//! constant even so are given patterns of their own: a value is justified
//! backwards to the free nodes (as in test generation; Roth, IBM Journal of
//! Research and Development 10, 1966), a few nodes in each pattern, in changing
//! selections so that neighbouring carries do not always move together.
//!
//! Random words are a function of seed, word and input, so that a second pass
//! sees the same ones without anything being stored; directed words are stored.

use super::graph::{Literal, NodeId, NodeKind, Subject};

/// A reproducible sequence of 64-pattern words.
#[derive(Clone, Debug)]
pub struct Patterns {
    seed: u64,
    random: usize,
    /// Directed words, word by word, one entry per free node.
    directed: Vec<Vec<u64>>,
}

impl Patterns {
    /// `words` random words of 64 patterns each, every other one biased.
    pub fn new(seed: u64, words: usize) -> Self {
        Self {
            seed,
            random: words,
            directed: Vec::new(),
        }
    }

    /// Number of words.
    pub fn words(&self) -> usize {
        self.random + self.directed.len()
    }

    /// The values of word `word`, free node by free node in ascending order.
    pub fn word(&self, word: usize) -> impl FnMut() -> u64 + '_ {
        let mut random = self.generator(word);
        // Word 0 fixes every signal's normal polarity and stays uniform.
        let bias = if self.is_uniform(word) {
            0
        } else {
            1 + word / 4 % 7
        };
        let high = word % 4 == 2;
        let mut directed = word
            .checked_sub(self.random)
            .map(|i| self.directed[i].iter());
        move || {
            if let Some(words) = &mut directed {
                return words.next().copied().unwrap_or(0);
            }
            let mut value = random.u64(..);
            for _ in 0..bias {
                value &= random.u64(..);
            }
            if high { !value } else { value }
        }
    }

    /// Whether the bits of a random word are 0 and 1 alike.
    pub fn is_uniform(&self, word: usize) -> bool {
        word < self.random && word % 4 < 2
    }

    fn generator(&self, word: usize) -> fastrand::Rng {
        let spread = (word as u64 + 1).wrapping_mul(0x9E37_79B9_7F4A_7C15);
        fastrand::Rng::with_seed(self.seed ^ spread)
    }

    /// Appends `words` words in which the `targets` are driven to the given
    /// literals as far as they agree with each other.
    pub fn direct(&mut self, subject: &Subject, targets: &[Literal], words: usize) {
        let free = subject
            .nodes()
            .filter(|&n| matches!(subject.kind(n), NodeKind::Free(_)));
        let free: Vec<NodeId> = free.collect();
        let mut justifier = Justifier::new(subject);
        let lanes = 64 * words;
        // Every target has its turn several times, in a new order each time.
        let turns = (TURNS * targets.len()).max(lanes);
        let mut order: Vec<Literal> = Vec::new();
        for word in 0..words {
            let mut random = self.generator(self.words());
            let mut values: Vec<u64> = free.iter().map(|_| random.u64(..)).collect();
            for lane in 0..64 {
                justifier.clear();
                let turn = |lane: usize| lane * turns / lanes;
                let at = 64 * word + lane;
                let mut budget = STEPS / lanes;
                for _ in turn(at)..turn(at + 1) {
                    if order.is_empty() {
                        order.extend_from_slice(targets);
                        random.shuffle(&mut order);
                    }
                    let Some(target) = order.pop() else { break };
                    for _ in 0..ATTEMPTS {
                        let (done, steps) = justifier.justify(target, &mut random);
                        budget = budget.saturating_sub(steps);
                        if done || budget == 0 {
                            break;
                        }
                    }
                    if budget == 0 {
                        break;
                    }
                }
                for (value, &node) in values.iter_mut().zip(&free) {
                    if let Some(wanted) = justifier.required(node) {
                        *value = *value & !(1 << lane) | u64::from(wanted) << lane;
                    }
                }
            }
            self.directed.push(values);
        }
    }
}

/// How often each target has its turn.
const TURNS: usize = 4;
/// Steps of justification over all patterns of one netlist.
const STEPS: usize = 100_000_000;
/// Free choices are random and never revised, so a failure is tried again.
const ATTEMPTS: usize = 4;
/// Steps one target may take.
const TARGET_STEPS: usize = 4096;

/// Backward justification within one pattern.
struct Justifier<'a> {
    subject: &'a Subject,
    /// By node: 0 free, 2 required 0, 3 required 1.
    required: Vec<u8>,
    trail: Vec<NodeId>,
    stack: Vec<Literal>,
    /// ANDs to be 0 through either input.
    zeros: Vec<(Literal, Literal)>,
    /// Pairs to be equal, through exclusive ors.
    splits: Vec<(Literal, Literal)>,
}

impl<'a> Justifier<'a> {
    fn new(subject: &'a Subject) -> Self {
        let required = vec![0; subject.node_count()];
        Self {
            subject,
            required,
            trail: Vec::new(),
            stack: Vec::new(),
            zeros: Vec::new(),
            splits: Vec::new(),
        }
    }

    fn required(&self, node: NodeId) -> Option<bool> {
        match self.required[node.index()] {
            0 => None,
            state => Some(state == 3),
        }
    }

    fn clear(&mut self) {
        self.undo(0);
    }

    fn undo(&mut self, mark: usize) {
        for node in self.trail.drain(mark..) {
            self.required[node.index()] = 0;
        }
    }

    /// Requires a literal to be true, or changes nothing when that contradicts
    /// what is required already. Returns whether it is required now, and the
    /// steps taken.
    ///
    /// What follows is drawn first, then zeros of ANDs are placed, exclusive
    /// ors are split last: by then one side is usually known.
    fn justify(&mut self, target: Literal, random: &mut fastrand::Rng) -> (bool, usize) {
        let mark = self.trail.len();
        self.stack.clear();
        self.zeros.clear();
        self.splits.clear();
        self.stack.push(target);
        let mut steps = 0;
        loop {
            steps += 1;
            if steps > TARGET_STEPS {
                self.undo(mark);
                return (false, steps);
            }
            if let Some(literal) = self.stack.pop() {
                let (node, value) = (literal.node(), !literal.is_inverted());
                match self.value(node.literal()) {
                    Some(known) if known == value => continue,
                    Some(_) => {
                        self.undo(mark);
                        return (false, steps);
                    }
                    None => {}
                }
                self.required[node.index()] = if value { 3 } else { 2 };
                self.trail.push(node);
                match self.subject.kind(node) {
                    NodeKind::False | NodeKind::Free(_) => {}
                    NodeKind::And(x, y) if value => self.stack.extend([x, y]),
                    NodeKind::And(x, y) => self.zeros.push((x, y)),
                    NodeKind::Xor(x, y) => {
                        self.splits.push((x.literal(), y.literal().xor(value)));
                    }
                }
            } else if let Some((x, y)) = self.zeros.pop() {
                match (self.value(x), self.value(y)) {
                    (Some(false), _) | (_, Some(false)) => {}
                    (Some(true), _) => self.stack.push(!y),
                    (_, Some(true)) => self.stack.push(!x),
                    _ => self.stack.push(if random.bool() { !x } else { !y }),
                }
            } else if let Some((x, y)) = self.splits.pop() {
                // `x` and `y` are to be equal.
                let equal = self
                    .value(x)
                    .or(self.value(y))
                    .unwrap_or_else(|| random.bool());
                self.stack.extend([x.xor(!equal), y.xor(!equal)]);
            } else {
                return (true, steps);
            }
        }
    }

    fn value(&self, literal: Literal) -> Option<bool> {
        let node = literal.node();
        let known = if node == NodeId::FALSE {
            Some(false)
        } else {
            self.required(node)
        };
        known.map(|value| value ^ literal.is_inverted())
    }
}
