//! The scratch overlay: new gates over existing nets, made and never written.
//!
//! A node is the constant, an existing net, or a gate; a [`Literal`] reads one
//! inverted or not. Gates are hashed by structure, so equal gates are one, and
//! folded as they are made ([`super::fold`]). What one gate may be follows the
//! [`GateStyle`] of the netlist's format: AIGER has two-input ANDs with free
//! inversion and an XOR of three; BLIF has one product of any polarities or one
//! XOR per gate, or any cover.
//!
//! Invariant: the inputs of a gate come before it, its inputs are distinct
//! nodes in ascending order, none of them constant; an XOR and a cover read
//! plain nodes only, and a cover is 0 where all its inputs are.

use super::tables::{ascending, drop_unread};
use crate::netlist::{Function, NetId, Shape, TruthTable};
use crate::network::GateSink;
use crate::timing::{DelayModel, NEVER};
use rustc_hash::FxHashMap;

/// What one new gate may be, by the format it will be written in.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum GateStyle {
    /// Two-input ANDs with inversion free on every edge (AIGER).
    AndInverter,
    /// One product of any input polarities or its complement, or one XOR.
    SingleOperator,
    /// Any function of up to six inputs.
    Cover,
}

/// A node of an overlay.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(super) struct Node(u32);

impl Node {
    pub(super) const CONSTANT: Self = Self(0);

    pub(super) fn index(self) -> usize {
        self.0 as usize
    }
}

/// A node, read inverted or not.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Literal(u32);

impl Literal {
    /// The constant 0.
    pub(super) const FALSE: Self = Self(0);
    /// The constant 1.
    pub(super) const TRUE: Self = Self(1);

    pub(super) fn new(node: Node, inverted: bool) -> Self {
        Self(node.0 << 1 | u32::from(inverted))
    }

    pub(super) fn node(self) -> Node {
        Node(self.0 >> 1)
    }

    pub(super) fn is_inverted(self) -> bool {
        self.0 & 1 == 1
    }

    #[must_use]
    pub(super) fn invert_if(self, inverted: bool) -> Self {
        Self(self.0 ^ u32::from(inverted))
    }
}

impl std::ops::Not for Literal {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

/// What a node is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(super) enum Operator {
    /// The constant 0.
    Constant,
    /// An existing net.
    Net(NetId),
    /// AND of the inputs.
    And,
    /// XOR of the inputs.
    Xor,
    /// Any function of the inputs.
    Cover(TruthTable),
}

impl Operator {
    /// The function of a gate of this operator whose inputs are read inverted where
    /// `flags` says so, its output complemented when `inverted` is set.
    pub(super) fn written(self, flags: &[bool], inverted: bool) -> Function {
        match self {
            Self::And => Function::product(flags, inverted),
            Self::Xor => {
                let odd = flags.iter().fold(inverted, |odd, &flag| odd != flag);
                Function::parity(flags.len(), odd)
            }
            Self::Cover(table) => {
                let mut table = table;
                for (pin, _) in flags.iter().enumerate().filter(|&(_, &flag)| flag) {
                    table = table.flip(pin);
                }
                Function::Table(if inverted { table.complement() } else { table })
            }
            Self::Constant | Self::Net(_) => unreachable!("only gates are written"),
        }
    }
}

/// An existing net that shows a node, read inverted or not.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Shown {
    pub(super) net: NetId,
    pub(super) inverted: bool,
}

#[derive(Clone, Copy)]
struct Entry {
    operator: Operator,
    start: u32,
    end: u32,
    arrival: i32,
    existing: Option<Shown>,
}

/// See the head of the module.
#[derive(Clone)]
pub struct Overlay {
    style: GateStyle,
    model: DelayModel,
    entries: Vec<Entry>,
    inputs: Vec<Literal>,
    index: FxHashMap<(Operator, Vec<Literal>), Node>,
    nets: FxHashMap<NetId, Node>,
    product_delays: Vec<Option<i32>>,
    /// Of every pin alike: the latest of them.
    parity_delays: Vec<Option<i32>>,
    cover_delays: FxHashMap<TruthTable, Vec<i32>>,
}

impl Overlay {
    /// An empty overlay.
    pub fn new(style: GateStyle, model: DelayModel) -> Self {
        Self {
            style,
            model,
            entries: vec![Entry {
                operator: Operator::Constant,
                start: 0,
                end: 0,
                arrival: NEVER,
                existing: None,
            }],
            inputs: Vec::new(),
            index: FxHashMap::default(),
            nets: FxHashMap::default(),
            product_delays: Vec::new(),
            parity_delays: Vec::new(),
            cover_delays: FxHashMap::default(),
        }
    }

    /// What its gates may be.
    pub fn style(&self) -> GateStyle {
        self.style
    }

    /// Number of nodes.
    pub(super) fn len(&self) -> usize {
        self.entries.len()
    }

    /// All nodes, inputs before what reads them.
    pub(super) fn nodes(&self) -> impl DoubleEndedIterator<Item = Node> + use<> {
        (0..self.entries.len() as u32).map(Node)
    }

    pub(super) fn operator(&self, node: Node) -> Operator {
        self.entries[node.index()].operator
    }

    /// Whether the node is a gate, of this overlay or existing.
    pub(super) fn is_gate(&self, node: Node) -> bool {
        !matches!(self.operator(node), Operator::Constant | Operator::Net(_))
    }

    pub(super) fn inputs(&self, node: Node) -> &[Literal] {
        let entry = &self.entries[node.index()];
        &self.inputs[entry.start as usize..entry.end as usize]
    }

    /// The existing net that shows a gate node, if there is one.
    pub(super) fn existing(&self, node: Node) -> Option<Shown> {
        self.entries[node.index()].existing
    }

    /// The literal of an existing net that is ready at `arrival`.
    pub fn net(&mut self, net: NetId, arrival: i32) -> Literal {
        if let Some(&node) = self.nets.get(&net) {
            return Literal::new(node, false);
        }
        let node = self.push(Operator::Net(net), &[], arrival);
        self.nets.insert(net, node);
        Literal::new(node, false)
    }

    /// The existing net a literal reads, unless it is a gate or a constant.
    pub(super) fn net_of(&self, literal: Literal) -> Option<NetId> {
        match self.operator(literal.node()) {
            Operator::Net(net) => Some(net),
            _ => None,
        }
    }

    /// The gate that an existing gate with these inputs would be, in the
    /// overlay's own form; `None` when that form has no such single gate.
    pub(super) fn gate(&mut self, function: &Function, inputs: &[Literal]) -> Option<Literal> {
        let before = self.entries.len();
        let result = match function.shape() {
            Shape::Product => {
                let (inverted, complemented) = function.product_polarities()?;
                let pins: Vec<Literal> = inputs
                    .iter()
                    .zip(inverted)
                    .map(|(&input, inverted)| input.invert_if(inverted))
                    .collect();
                self.and(&pins).invert_if(complemented)
            }
            Shape::Parity if inputs.len() == 2 && self.style != GateStyle::AndInverter => {
                let odd = function.evaluate(&[0, 0]) & 1 == 1;
                self.xor(inputs[0], inputs[1]).invert_if(odd)
            }
            Shape::Other if self.style == GateStyle::Cover => self.cover(function, inputs),
            _ => return None,
        };
        // Several new nodes would mean gates that do not exist.
        (self.entries.len() <= before + 1).then_some(result)
    }

    /// States that an existing net shows `literal`, provided it is a gate and
    /// the net is ready no later than the gate would be. The first net wins.
    pub(super) fn set_existing(&mut self, literal: Literal, net: NetId, arrival: i32) -> bool {
        let gate = self.is_gate(literal.node());
        let entry = &mut self.entries[literal.node().index()];
        let useful = gate && entry.existing.is_none() && arrival <= entry.arrival;
        if useful {
            entry.arrival = arrival;
            entry.existing = Some(Shown {
                net,
                inverted: literal.is_inverted(),
            });
        }
        useful
    }

    fn push(&mut self, operator: Operator, inputs: &[Literal], arrival: i32) -> Node {
        let node = Node(u32::try_from(self.entries.len()).expect("fewer than 2^31 nodes"));
        let start = self.inputs.len() as u32;
        self.inputs.extend_from_slice(inputs);
        self.entries.push(Entry {
            operator,
            start,
            end: self.inputs.len() as u32,
            arrival,
            existing: None,
        });
        node
    }

    fn hashed(&mut self, operator: Operator, inputs: Vec<Literal>) -> Node {
        if let Some(&node) = self.index.get(&(operator, inputs.clone())) {
            return node;
        }
        let arrival =
            self.gate_arrival(operator, &inputs, |o, node| o.entries[node.index()].arrival);
        let node = self.push(operator, &inputs, arrival);
        self.index.insert((operator, inputs), node);
        node
    }

    fn find_and(&self, left: Literal, right: Literal) -> bool {
        let inputs = vec![left.min(right), left.max(right)];
        self.index.contains_key(&(Operator::And, inputs))
    }

    /// When a gate is ready, from the arrivals `at` its inputs.
    fn gate_arrival(
        &mut self,
        operator: Operator,
        inputs: &[Literal],
        at: impl Fn(&Self, Node) -> i32,
    ) -> i32 {
        self.price(operator, inputs.len());
        self.priced_arrival(operator, inputs, |node| at(self, node))
    }

    /// Makes sure the delays of such a gate are known.
    fn price(&mut self, operator: Operator, inputs: usize) {
        match operator {
            Operator::Constant | Operator::Net(_) => {}
            Operator::And | Operator::Xor => {
                let (model, parity) = (self.model, operator == Operator::Xor);
                let known = if parity {
                    &mut self.parity_delays
                } else {
                    &mut self.product_delays
                };
                if known.len() <= inputs {
                    known.resize(inputs + 1, None);
                }
                known[inputs].get_or_insert_with(|| {
                    let function = if parity {
                        Function::parity(inputs, false)
                    } else {
                        Function::product(&vec![false; inputs], false)
                    };
                    model.pin_delays(&function).into_iter().max().unwrap_or(0)
                });
            }
            Operator::Cover(table) => {
                let model = self.model;
                self.cover_delays
                    .entry(table)
                    .or_insert_with(|| model.pin_delays(&Function::Table(table)));
            }
        }
    }

    fn priced_arrival(
        &self,
        operator: Operator,
        inputs: &[Literal],
        at: impl Fn(Node) -> i32,
    ) -> i32 {
        let arrivals = inputs.iter().map(|input| at(input.node()));
        let delayed = |arrival: i32, delay: i32| {
            if arrival == NEVER {
                NEVER
            } else {
                arrival + delay
            }
        };
        match operator {
            Operator::Cover(table) => {
                let delays = self.cover_delays[&table].iter();
                let pairs = arrivals.zip(delays);
                pairs.map(|(at, &delay)| delayed(at, delay)).max()
            }
            _ => {
                let known = match operator {
                    Operator::Xor => &self.parity_delays,
                    _ => &self.product_delays,
                };
                let delay = known[inputs.len()].unwrap_or(0);
                arrivals.max().map(|at| delayed(at, delay))
            }
        }
        .unwrap_or(NEVER)
    }

    /// Arrivals of all nodes when the existing nets are ready at `of_net`.
    pub(super) fn arrivals(&self, of_net: impl Fn(NetId) -> i32) -> Vec<i32> {
        let mut times: Vec<i32> = Vec::with_capacity(self.entries.len());
        self.continue_arrivals(&mut times, self.entries.len(), of_net);
        times
    }

    /// As [`Self::arrivals`], going on from the nodes `times` holds to the node
    /// before `end`.
    pub(super) fn continue_arrivals(
        &self,
        times: &mut Vec<i32>,
        end: usize,
        of_net: impl Fn(NetId) -> i32,
    ) {
        for i in times.len()..end {
            let node = Node(i as u32);
            let entry = &self.entries[i];
            let time = match (entry.existing, entry.operator) {
                (Some(shown), _) => of_net(shown.net),
                (None, Operator::Constant) => NEVER,
                (None, Operator::Net(net)) => of_net(net),
                (None, operator) => {
                    self.priced_arrival(operator, self.inputs(node), |at| times[at.index()])
                }
            };
            times.push(time);
        }
    }

    /// When a net of its own that shows `literal` is ready.
    pub(super) fn shown_arrival(&self, literal: Literal, times: &[i32]) -> i32 {
        let node = literal.node();
        let time = times[node.index()];
        match self.operator(node) {
            Operator::Constant => NEVER,
            Operator::Net(_) if time == NEVER => NEVER,
            Operator::Net(_) => time + self.buffer_delay(),
            // A real net in BLIF is a gate of its own even where an existing net
            // shows the same.
            _ if self.style == GateStyle::AndInverter => time,
            _ => self.own_arrival(node, times),
        }
    }

    /// The inputs of a gate node that decide when it is ready.
    pub(super) fn latest_inputs(&self, node: Node, times: &[i32]) -> Vec<Node> {
        let inputs = self.inputs(node);
        let whole = self.own_arrival(node, times);
        let decides = |input: &Node| {
            let at = times[input.index()];
            let only = |each: Node| if each == *input { at } else { NEVER };
            at != NEVER && self.priced_arrival(self.operator(node), inputs, only) == whole
        };
        inputs
            .iter()
            .map(|input| input.node())
            .filter(decides)
            .collect()
    }

    /// When a gate node would be ready as a gate of its own.
    pub(super) fn own_arrival(&self, node: Node, times: &[i32]) -> i32 {
        let inputs = self.inputs(node);
        self.priced_arrival(self.operator(node), inputs, |at| times[at.index()])
    }

    /// Delay of the gate a real net needs where it equals another net.
    pub(super) fn buffer_delay(&self) -> i32 {
        match self.style {
            GateStyle::AndInverter => 0,
            _ => self.model.pin_delay(&Function::buffer(false), 0),
        }
    }

    /// One AND gate of folded, sorted inputs.
    pub(super) fn make_and(&mut self, mut inputs: Vec<Literal>) -> Literal {
        inputs.sort_unstable();
        Literal::new(self.hashed(Operator::And, inputs), false)
    }

    fn make_cover(&mut self, table: TruthTable, inputs: &[Literal]) -> Literal {
        // Inverted inputs go into the function.
        let mut table = table;
        for (pin, input) in inputs.iter().enumerate() {
            if input.is_inverted() {
                table = table.flip(pin);
            }
        }
        let (table, pins) = ascending(table, inputs);
        let (table, pins) = drop_unread(table, pins);
        let function = Function::Table(table);
        match function.shape() {
            Shape::Constant(value) => Literal::FALSE.invert_if(value),
            Shape::Buffer => pins[0],
            Shape::Inverter => !pins[0],
            Shape::Product => {
                let (inverted, complemented) = function
                    .product_polarities()
                    .expect("a table that is a product");
                let pins: Vec<Literal> = pins
                    .iter()
                    .zip(inverted)
                    .map(|(&pin, inverted)| pin.invert_if(inverted))
                    .collect();
                self.and(&pins).invert_if(complemented)
            }
            Shape::Parity if pins.len() == 2 => {
                let odd = table.bits() & 1 == 1;
                self.xor(pins[0], pins[1]).invert_if(odd)
            }
            Shape::Parity | Shape::Other => {
                let odd = table.bits() & 1 == 1;
                let table = if odd { table.complement() } else { table };
                Literal::new(self.hashed(Operator::Cover(table), pins), odd)
            }
        }
    }
}

impl GateSink for Overlay {
    type Signal = Literal;

    fn constant(&mut self, value: bool) -> Literal {
        Literal::FALSE.invert_if(value)
    }

    fn and(&mut self, inputs: &[Literal]) -> Literal {
        match super::fold::product(self, inputs) {
            None => Literal::FALSE,
            Some(kept) => match kept[..] {
                [] => Literal::TRUE,
                [only] => only,
                _ => self.make_and(kept),
            },
        }
    }

    fn xor(&mut self, left: Literal, right: Literal) -> Literal {
        let odd = left.is_inverted() != right.is_inverted();
        let (l, r) = (left.node(), right.node());
        if l == r {
            return Literal::FALSE.invert_if(odd);
        }
        if l == Node::CONSTANT {
            return Literal::new(r, odd);
        }
        if r == Node::CONSTANT {
            return Literal::new(l, odd);
        }
        let (a, b) = (Literal::new(l.min(r), false), Literal::new(l.max(r), false));
        if self.style != GateStyle::AndInverter {
            return Literal::new(self.hashed(Operator::Xor, vec![a, b]), odd);
        }
        // Both forms are three ANDs; that of which more is there already wins.
        let there = |x, y| u32::from(self.find_and(x, y));
        let joint = there(a, b) + there(!a, !b);
        let mixed = there(a, !b) + there(!a, b) > joint;
        let (x, y) = if mixed {
            (self.and(&[a, !b]), self.and(&[!a, b]))
        } else {
            (self.and(&[a, b]), self.and(&[!a, !b]))
        };
        // ~x·~y is a XNOR b in the mixed form and a XOR b in the other.
        self.and(&[!x, !y]).invert_if(odd != mixed)
    }

    fn cover(&mut self, function: &Function, inputs: &[Literal]) -> Literal {
        match function {
            Function::Table(table) if self.style == GateStyle::Cover => {
                self.make_cover(*table, inputs)
            }
            // Not asked for in the other styles; sums of minterms are right in
            // any of them, if large.
            _ => self.minterms(function, inputs),
        }
    }

    fn arrival(&self, signal: Literal) -> i32 {
        self.entries[signal.node().index()].arrival
    }
}

impl Overlay {
    fn minterms(&mut self, function: &Function, inputs: &[Literal]) -> Literal {
        let mut sum = Literal::FALSE;
        for minterm in 0..1usize << inputs.len() {
            let bits: Vec<u64> = (0..inputs.len())
                .map(|pin| (minterm >> pin & 1) as u64)
                .collect();
            if function.evaluate(&bits) & 1 == 0 {
                continue;
            }
            let mut product = Literal::TRUE;
            for (pin, &input) in inputs.iter().enumerate() {
                product = self.and(&[product, input.invert_if(minterm >> pin & 1 == 0)]);
            }
            sum = !self.and(&[!sum, !product]);
        }
        sum
    }
}
