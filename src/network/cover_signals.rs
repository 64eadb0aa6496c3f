//! Signals as covers: which pins each one's cover has.
//!
//! A signal starts as a cover of its own arguments. What it reads latest is then
//! taken into it as far as the pins allow, every latest pin or none, for only so
//! does it get earlier; then what nothing else reads. Levels are estimates, from
//! the arrivals of the operands and one level a cover; covers are cut greedily,
//! not optimally, in the manner of depth-first covering of a network by look-up
//! tables (J. Cong and Y. Ding, "FlowMap", IEEE Transactions on Computer-Aided
//! Design 13, 1994, has the optimum).
//!
//! Invariant: loops only, in topological order; a cover has at most the width's
//! pins, and only what some carry or sum needs is made.

use super::build::{GateSink, Need, Propagate, Spans};
use super::carry_network::{CarryNetwork, Node, NodeId};
use super::signals::{SignalId, SignalNode};
use super::table::Table;

/// What a cover may read. The order is topological.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
enum Pin {
    A(usize),
    B(usize),
    CarryIn,
    Propagate(NodeId),
    Generate(NodeId),
    Signal(SignalId),
}

/// One signal's cover.
#[derive(Clone, Debug, Default)]
struct Cut {
    /// What it reads.
    pins: Vec<Pin>,
    /// What lies between, the signal itself included, ascending.
    inside: Vec<Pin>,
}

/// The covers of the signals some carry or sum needs.
pub(super) struct SignalCovers {
    cuts: Vec<Option<Cut>>,
    /// By signal: whether it is too wide for a cover and made by gates.
    wide: Vec<bool>,
    needed: Vec<bool>,
}

impl SignalCovers {
    /// Chooses the covers; `None` where covers are of no use or nothing is a
    /// signal.
    pub(super) fn of<K: GateSink>(spans: &Spans<'_, K>) -> Option<Self> {
        let width = spans.cover_width?;
        let network = spans.network;
        if network.is_prefix() {
            return None;
        }
        let used = network.used_signals();
        let readers = readers(network, &used);
        let mut cutter = Cutter {
            network,
            width,
            readers,
            direct: network.nodes().map(|node| spans.is_direct(node)).collect(),
            levels: Levels::of(spans),
        };
        let count = network.signal_ids().len();
        let mut covers = Self {
            cuts: vec![None; count],
            wide: vec![false; count],
            needed: vec![false; count],
        };
        for signal in network.signal_ids() {
            let cut = if used[signal.index()] {
                cutter.cut(signal)
            } else {
                Cut::default()
            };
            let latest = cut.pins.iter().map(|&pin| cutter.levels.at(pin)).max();
            let level = latest.unwrap_or(0).saturating_add(1);
            cutter.levels.signals.push(level);
            covers.wide[signal.index()] = cut.pins.len() > width;
            covers.cuts[signal.index()] = Some(cut);
        }
        covers.mark(network);
        Some(covers)
    }

    fn mark(&mut self, network: &CarryNetwork) {
        for position in 0..network.positions() {
            let stated = [network.carry_as_signal(position), network.sum(position)];
            for signal in stated.into_iter().flatten() {
                self.needed[signal.index()] = true;
            }
        }
        for signal in network.signal_ids().rev() {
            if !self.needed[signal.index()] {
                continue;
            }
            let cut = self.cuts[signal.index()].as_ref();
            for pin in cut.iter().flat_map(|cut| &cut.pins) {
                if let Pin::Signal(read) = *pin {
                    self.needed[read.index()] = true;
                }
            }
        }
    }

    /// Marks the spans whose G or P some cover reads.
    pub(super) fn mark_spans(&self, needs: &mut [Need]) {
        let cuts = self.cuts.iter().zip(&self.needed);
        for cut in cuts.filter_map(|(cut, &needed)| cut.as_ref().filter(|_| needed)) {
            for pin in &cut.pins {
                match *pin {
                    Pin::Generate(node) => needs[node.index()].generate = true,
                    Pin::Propagate(node) => needs[node.index()].propagate = true,
                    _ => {}
                }
            }
        }
    }
}

/// How many used signals, carries and sums read each signal.
fn readers(network: &CarryNetwork, used: &[bool]) -> Vec<u32> {
    let mut readers = vec![0; used.len()];
    for position in 0..network.positions() {
        let stated = [network.carry_as_signal(position), network.sum(position)];
        for signal in stated.into_iter().flatten() {
            readers[signal.index()] += 1;
        }
    }
    for signal in network.signal_ids().filter(|id| used[id.index()]) {
        for read in network.arguments(signal) {
            readers[read.index()] += 1;
        }
    }
    readers
}

/// Estimated levels.
struct Levels {
    a: Vec<i32>,
    b: Vec<i32>,
    carry_in: i32,
    generates: Vec<i32>,
    propagates: Vec<i32>,
    signals: Vec<i32>,
}

impl Levels {
    fn of<K: GateSink>(spans: &Spans<'_, K>) -> Self {
        let network = spans.network;
        let at = |signals: &[K::Signal]| {
            let times = signals.iter().map(|&s| spans.gates.sink.arrival(s));
            times.collect::<Vec<i32>>()
        };
        let (a, b) = (at(&spans.addends.a), at(&spans.addends.b));
        let carry_in = at(spans.addends.carry_in.as_slice());
        let mut levels = Self {
            a,
            b,
            carry_in: carry_in.first().copied().unwrap_or(i32::MIN),
            generates: Vec::new(),
            propagates: Vec::new(),
            signals: Vec::new(),
        };
        for node in network.nodes() {
            let (generate, propagate) = match network.node(node) {
                Node::CarryIn => (levels.carry_in, i32::MIN),
                Node::Leaf(i) => {
                    let level = levels.a[i].max(levels.b[i]).saturating_add(1);
                    (level, level)
                }
                Node::Combine(_) if spans.is_direct(node) => {
                    let span = network.span(node);
                    let positions = span.low.max(0) as usize..=span.high as usize;
                    let latest = positions.map(|i| levels.a[i].max(levels.b[i])).max();
                    let latest = latest.unwrap_or(0);
                    let below = if span.low < 0 {
                        levels.carry_in
                    } else {
                        latest
                    };
                    let level = latest.max(below).saturating_add(1);
                    (level, level)
                }
                Node::Combine(parts) => {
                    let g = parts.iter().map(|part| levels.generates[part.index()]);
                    let p = parts.iter().map(|part| levels.propagates[part.index()]);
                    let (g, p) = (g.max().unwrap_or(0), p.max().unwrap_or(0));
                    (g.max(p).saturating_add(1), p.saturating_add(1))
                }
            };
            levels.generates.push(generate);
            levels.propagates.push(propagate);
        }
        levels
    }

    fn at(&self, pin: Pin) -> i32 {
        match pin {
            Pin::A(i) => self.a[i],
            Pin::B(i) => self.b[i],
            Pin::CarryIn => self.carry_in,
            Pin::Generate(node) => self.generates[node.index()],
            Pin::Propagate(node) => self.propagates[node.index()],
            Pin::Signal(signal) => self.signals[signal.index()],
        }
    }
}

struct Cutter<'a> {
    network: &'a CarryNetwork,
    width: usize,
    readers: Vec<u32>,
    direct: Vec<bool>,
    levels: Levels,
}

impl Cutter<'_> {
    fn cut(&self, signal: SignalId) -> Cut {
        let root = Pin::Signal(signal);
        let mut cut = Cut {
            pins: self.reads(root).unwrap_or_default(),
            inside: vec![root],
        };
        if cut.pins.len() > self.width {
            return cut;
        }
        while let Some(earlier) = self.without_latest(&cut) {
            cut = earlier;
        }
        loop {
            let alone = cut.pins.iter().copied().filter(|&pin| self.is_alone(pin));
            let next = alone
                .map(|pin| self.taken_in(&cut, pin))
                .find(Option::is_some);
            match next.flatten() {
                Some(larger) => cut = larger,
                None => return cut,
            }
        }
    }

    /// The cover with all its latest pins taken in, where they fit.
    fn without_latest(&self, cut: &Cut) -> Option<Cut> {
        let latest = cut.pins.iter().map(|&pin| self.levels.at(pin)).max()?;
        let mut next = cut.clone();
        loop {
            let at = |pin: &Pin| self.levels.at(*pin) == latest;
            let Some(pin) = next.pins.iter().copied().find(at) else {
                return Some(next);
            };
            next = self.taken_in(&next, pin)?;
        }
    }

    /// The cover with one pin taken in, where it fits.
    fn taken_in(&self, cut: &Cut, pin: Pin) -> Option<Cut> {
        let mut next = cut.clone();
        next.pins.retain(|&other| other != pin);
        let at = next.inside.binary_search(&pin).unwrap_or_else(|at| at);
        next.inside.insert(at, pin);
        for read in self.reads(pin)? {
            if next.inside.binary_search(&read).is_err() && !next.pins.contains(&read) {
                next.pins.push(read);
            }
        }
        (next.pins.len() <= self.width).then_some(next)
    }

    fn is_alone(&self, pin: Pin) -> bool {
        match pin {
            Pin::Signal(signal) => self.readers[signal.index()] == 1,
            _ => false,
        }
    }

    /// What a pin is made of; `None` for operands.
    fn reads(&self, pin: Pin) -> Option<Vec<Pin>> {
        let mut list = Vec::new();
        match pin {
            Pin::A(_) | Pin::B(_) | Pin::CarryIn => return None,
            Pin::Generate(node) => match self.network.node(node) {
                Node::CarryIn => list.push(Pin::CarryIn),
                Node::Combine(parts) if !self.direct[node.index()] => {
                    for (i, &part) in parts.iter().enumerate() {
                        list.push(Pin::Generate(part));
                        if i + 1 < parts.len() {
                            list.push(Pin::Propagate(part));
                        }
                    }
                }
                _ => self.operands(node, &mut list),
            },
            Pin::Propagate(node) => match self.network.node(node) {
                Node::Combine(parts) if !self.direct[node.index()] => {
                    list.extend(parts.iter().map(|&part| Pin::Propagate(part)));
                }
                _ => self.operands(node, &mut list),
            },
            Pin::Signal(signal) => match self.network.signal(signal) {
                SignalNode::Generate(node) => list.push(Pin::Generate(node)),
                SignalNode::Propagate(node) => list.push(Pin::Propagate(node)),
                SignalNode::Either(i) | SignalNode::HalfSum(i) => {
                    list.extend([Pin::A(i), Pin::B(i)]);
                }
                _ => {
                    for &read in self.network.arguments(signal) {
                        // A span's G is read as such, not through its signal.
                        list.push(match self.network.signal(read) {
                            SignalNode::Generate(node) => Pin::Generate(node),
                            SignalNode::Propagate(node) => Pin::Propagate(node),
                            _ => Pin::Signal(read),
                        });
                    }
                }
            },
        }
        list.sort_unstable();
        list.dedup();
        Some(list)
    }

    /// The operands of a span.
    fn operands(&self, node: NodeId, list: &mut Vec<Pin>) {
        let span = self.network.span(node);
        for i in span.low.max(0) as usize..=span.high as usize {
            list.extend([Pin::A(i), Pin::B(i)]);
        }
        if span.low < 0 {
            list.push(Pin::CarryIn);
        }
    }
}

impl<K: GateSink> Spans<'_, K> {
    /// Makes the signals as chosen.
    pub(super) fn cover_signals(&mut self, covers: &SignalCovers) {
        for signal in self.network.signal_ids() {
            let i = signal.index();
            if !covers.needed[i] {
                continue;
            }
            let made = match &covers.cuts[i] {
                Some(cut) if !covers.wide[i] => self.cover_signal(cut),
                _ => self.wide_signal(signal),
            };
            self.signals[i] = Some(made);
        }
    }

    fn cover_signal(&mut self, cut: &Cut) -> K::Signal {
        let mut table = Table::new(self.gates.zero());
        let mut words: Vec<(Pin, u64)> = Vec::new();
        for &pin in &cut.pins {
            let signal = self.read(pin);
            words.push((pin, table.pin(signal)));
        }
        for &pin in &cut.inside {
            let word = self.word(pin, &words);
            words.push((pin, word));
        }
        let (_, root) = words[words.len() - 1];
        table.into_gate(root, &mut self.gates)
    }

    fn read(&mut self, pin: Pin) -> K::Signal {
        match pin {
            Pin::A(i) => self.addends.a[i],
            Pin::B(i) => self.addends.b[i],
            Pin::CarryIn => self.addends.carry_in.expect("checked when building began"),
            Pin::Generate(node) => self.generate(node),
            Pin::Propagate(node) => self.propagate(node),
            Pin::Signal(signal) => self.made(signal),
        }
    }

    /// An AND or OR of more arguments than a cover has pins.
    fn wide_signal(&mut self, signal: SignalId) -> K::Signal {
        let network = self.network;
        for &read in network.arguments(signal) {
            if self.signals[read.index()].is_none() {
                self.signals[read.index()] = Some(self.make_signal(read));
            }
        }
        self.make_signal(signal)
    }

    /// The word of what lies inside a cover.
    fn word(&self, pin: Pin, words: &[(Pin, u64)]) -> u64 {
        let at = |pin: Pin| {
            let known = words.iter().find(|&&(each, _)| each == pin);
            known.expect("pins come before what lies inside").1
        };
        let network = self.network;
        let p = |i: usize| match self.rule {
            Propagate::Or => at(Pin::A(i)) | at(Pin::B(i)),
            Propagate::Xor => at(Pin::A(i)) ^ at(Pin::B(i)),
        };
        let of_signal = |signal: SignalId| match network.signal(signal) {
            SignalNode::Generate(node) => at(Pin::Generate(node)),
            SignalNode::Propagate(node) => at(Pin::Propagate(node)),
            _ => at(Pin::Signal(signal)),
        };
        match pin {
            Pin::A(_) | Pin::B(_) | Pin::CarryIn => at(pin),
            Pin::Generate(node) => match network.node(node) {
                Node::CarryIn => at(Pin::CarryIn),
                Node::Combine(parts) if !self.is_direct(node) => {
                    let (upper, lowest) = (&parts[..parts.len() - 1], parts[parts.len() - 1]);
                    let above = upper.iter().rev();
                    above.fold(at(Pin::Generate(lowest)), |below, &part| {
                        at(Pin::Generate(part)) | at(Pin::Propagate(part)) & below
                    })
                }
                _ => {
                    let span = network.span(node);
                    let below = if span.low < 0 { at(Pin::CarryIn) } else { 0 };
                    let positions = span.low.max(0) as usize..=span.high as usize;
                    positions.fold(below, |below, i| {
                        let (a, b) = (at(Pin::A(i)), at(Pin::B(i)));
                        a & b | (a | b) & below
                    })
                }
            },
            Pin::Propagate(node) => match network.node(node) {
                Node::Combine(parts) if !self.is_direct(node) => {
                    let parts = parts.iter().map(|&part| at(Pin::Propagate(part)));
                    parts.fold(!0, |all, word| all & word)
                }
                _ => {
                    let span = network.span(node);
                    let positions = span.low.max(0) as usize..=span.high as usize;
                    positions.fold(!0, |all, i| all & p(i))
                }
            },
            Pin::Signal(signal) => match network.signal(signal) {
                SignalNode::Generate(node) => at(Pin::Generate(node)),
                SignalNode::Propagate(node) => at(Pin::Propagate(node)),
                SignalNode::Either(i) => at(Pin::A(i)) | at(Pin::B(i)),
                SignalNode::HalfSum(i) => at(Pin::A(i)) ^ at(Pin::B(i)),
                SignalNode::And(list) => list.iter().fold(!0, |word, &id| word & of_signal(id)),
                SignalNode::Or(list) => list.iter().fold(0, |word, &id| word | of_signal(id)),
                SignalNode::Xor(left, right) => of_signal(left) ^ of_signal(right),
                SignalNode::Select {
                    choose,
                    if_one,
                    if_zero,
                } => {
                    let choose = of_signal(choose);
                    choose & of_signal(if_one) | !choose & of_signal(if_zero)
                }
            },
        }
    }
}
