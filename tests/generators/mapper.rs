//! A small technology mapper, so that netlists can be had as synthesis leaves
//! them: covers of 2 to 6 inputs, or and-or-invert cells, chosen over the
//! AND/inverter graph of a circuit. Ports and registers keep their names and
//! order; everything between is made anew.
//!
//! Cuts are enumerated bottom up, a few kept per node, by arrival and then by
//! area flow; later passes spend what the required time allows on area (Cong and
//! Ding 1994 for depth; Mishchenko, Cho, Chatterjee and Brayton 2007 for
//! keeping few cuts). With four inputs and more a cover takes in operand XORs
//! and one or two positions of an adder.

use super::aig::Aig;
use super::circuit::{Circuit, Function, Net, Register};
use super::table::{INPUTS, filled, halves};
use std::collections::HashMap;

/// What one gate of the result may be.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Cells {
    /// Any function of up to so many inputs, 2 to 6.
    Covers(usize),
    /// Inverters, NAND and NOR up to four inputs, XOR, and-or-invert and
    /// or-and-invert cells.
    AndOrInvert,
}

/// The circuit made of such cells.
pub fn mapped(circuit: &Circuit, cells: Cells) -> Circuit {
    let graph = Aig::of(circuit);
    let library = (cells == Cells::AndOrInvert).then(library);
    let width = match cells {
        Cells::Covers(width) => width,
        Cells::AndOrInvert => 4,
    };
    let mut mapper = Mapper::new(&graph, width, library.as_ref());
    for pass in 0..3 {
        mapper.choose(pass);
    }
    mapper.build(circuit)
}

/// Cuts kept per node besides the node itself.
const KEPT: usize = 8;

#[derive(Clone, Copy)]
struct Cut {
    leaves: [u32; 6],
    size: u8,
    table: u64,
    arrival: u32,
    flow: f32,
}

impl Cut {
    fn leaves(&self) -> &[u32] {
        &self.leaves[..self.size as usize]
    }

    fn of_node(node: u32) -> Self {
        let mut leaves = [0; 6];
        leaves[0] = node;
        Self {
            leaves,
            size: 1,
            table: INPUTS[0],
            arrival: 0,
            flow: 0.0,
        }
    }
}

struct Mapper<'a> {
    graph: &'a Aig,
    first: usize,
    width: usize,
    library: Option<&'a HashMap<(usize, u64), Match>>,
    cuts: Vec<Vec<Cut>>,
    best: Vec<Option<Cut>>,
    readers: Vec<f32>,
    required: Vec<u32>,
}

impl<'a> Mapper<'a> {
    fn new(
        graph: &'a Aig,
        width: usize,
        library: Option<&'a HashMap<(usize, u64), Match>>,
    ) -> Self {
        let first = graph.first_and();
        let nodes = first + graph.ands.len();
        let mut readers = vec![0.0; nodes];
        for &literal in graph.ands.iter().flatten() {
            readers[(literal / 2) as usize] += 1.0;
        }
        Self {
            graph,
            first,
            width,
            library,
            cuts: vec![Vec::new(); nodes],
            best: vec![None; nodes],
            readers,
            required: vec![u32::MAX; nodes],
        }
    }

    /// The variables that outputs and registers read.
    fn ends(&self) -> Vec<u32> {
        let outputs = self.graph.outputs.iter().map(|(_, literal)| *literal);
        let next = self.graph.registers.iter().map(|(_, next, _)| *next);
        outputs.chain(next).map(|literal| literal / 2).collect()
    }

    /// One pass: the first for depth alone, later ones for area where the
    /// required time allows it.
    fn choose(&mut self, pass: usize) {
        for node in 0..self.first as u32 {
            self.cuts[node as usize] = vec![Cut::of_node(node)];
        }
        for (k, &[high, low]) in self.graph.ands.iter().enumerate() {
            let node = self.first + k;
            let mut found: Vec<Cut> = Vec::new();
            let (p, q) = ((high / 2) as usize, (low / 2) as usize);
            for x in &self.cuts[p] {
                for y in &self.cuts[q] {
                    let Some(cut) = self.join(x, high & 1 == 1, y, low & 1 == 1, node) else {
                        continue;
                    };
                    let known = |f: &Cut| f.leaves() == cut.leaves();
                    if !found.iter().any(known) {
                        found.push(cut);
                    }
                }
            }
            let limit = self.required[node];
            let by_area = pass > 0 && limit < u32::MAX;
            found.sort_by(|x, y| {
                let late = |cut: &Cut| by_area && cut.arrival > limit;
                let first = late(x).cmp(&late(y));
                let flow = x.flow.total_cmp(&y.flow);
                let arrival = x.arrival.cmp(&y.arrival);
                let rest = match by_area {
                    true => flow.then(arrival),
                    false => arrival.then(flow),
                };
                first.then(rest).then(x.size.cmp(&y.size))
            });
            found.truncate(KEPT);
            self.best[node] = Some(found[0]);
            let mut own = Cut::of_node(node as u32);
            own.arrival = found[0].arrival;
            own.flow = found[0].flow;
            found.push(own);
            self.cuts[node] = found;
        }
        self.require();
    }

    /// Required times and readers in the cover chosen.
    fn require(&mut self) {
        let nodes = self.best.len();
        let arrival = |m: &Self, n: usize| m.best[n].map_or(0, |cut| cut.arrival);
        let ends = self.ends();
        let latest = ends.iter().map(|&n| arrival(self, n as usize)).max();
        let mut required = vec![u32::MAX; nodes];
        let mut readers = vec![0.0f32; nodes];
        for &end in &ends {
            required[end as usize] = latest.unwrap_or(0);
            readers[end as usize] += 1.0;
        }
        for node in (self.first..nodes).rev() {
            if readers[node] == 0.0 {
                continue;
            }
            let cut = self.best[node].expect("every AND has a cut");
            for &leaf in cut.leaves() {
                let leaf = leaf as usize;
                required[leaf] = required[leaf].min(required[node].saturating_sub(1));
                readers[leaf] += 1.0;
            }
        }
        // A node the cover passes over may be used next time, at its price.
        for (old, new) in self.readers.iter_mut().zip(readers) {
            *old = (*old + 2.0 * new.max(0.5)) / 3.0;
        }
        self.required = required;
    }

    fn join(&self, x: &Cut, not_x: bool, y: &Cut, not_y: bool, node: usize) -> Option<Cut> {
        let (mut leaves, mut size) = ([0u32; 6], 0);
        let (mut i, mut j) = (0, 0);
        let (xs, ys) = (x.leaves(), y.leaves());
        while i < xs.len() || j < ys.len() {
            let next = match (xs.get(i), ys.get(j)) {
                (Some(&a), Some(&b)) => a.min(b),
                (a, b) => *a.or(b).expect("one of them is there"),
            };
            i += usize::from(xs.get(i) == Some(&next));
            j += usize::from(ys.get(j) == Some(&next));
            if size == self.width {
                return None;
            }
            leaves[size] = next;
            size += 1;
        }
        let leaves_now = &leaves[..size];
        let flip = |word: u64, not: bool| if not { !word } else { word };
        let mut table =
            flip(stretched(x, leaves_now), not_x) & flip(stretched(y, leaves_now), not_y);
        // Leaves that do not matter are dropped.
        let mut kept = 0;
        for i in 0..size {
            let (low, high) = halves(table, kept);
            if low == high {
                table = removed(table, kept);
            } else {
                leaves[kept] = leaves[i];
                kept += 1;
            }
        }
        if kept == 0 {
            return None;
        }
        if let Some(library) = self.library
            && !library.contains_key(&(kept, table))
        {
            return None;
        }
        let mut cut = Cut {
            leaves,
            size: kept as u8,
            table,
            arrival: 0,
            flow: 1.0,
        };
        cut.leaves[kept..].fill(0);
        for &leaf in &leaves[..kept] {
            let below = &self.best[leaf as usize];
            cut.arrival = cut.arrival.max(below.map_or(0, |b| b.arrival));
            cut.flow += below.map_or(0.0, |b| b.flow);
        }
        cut.arrival += 1;
        cut.flow /= self.readers[node].max(1.0);
        Some(cut)
    }

    fn build(&self, like: &Circuit) -> Circuit {
        let mut c = Circuit::new(&like.name);
        let mut maker = Maker {
            nets: vec![None; self.best.len()],
            inverted: HashMap::new(),
            inverted_nodes: HashMap::new(),
            library: self.library,
        };
        for (i, name) in self.graph.inputs.iter().enumerate() {
            maker.nets[1 + i] = Some(c.input(name));
        }
        for (i, (name, _, initial)) in self.graph.registers.iter().enumerate() {
            maker.nets[1 + self.graph.inputs.len() + i] = Some(c.register(name, *initial));
        }
        // A node read inverted at an end becomes a cover of its own there.
        let mut used = vec![false; self.best.len()];
        let mut used_inverted = vec![false; self.best.len()];
        let outputs = self.graph.outputs.iter().map(|(_, literal)| *literal);
        let next = self.graph.registers.iter().map(|(_, next, _)| *next);
        for literal in outputs.chain(next) {
            let node = (literal / 2) as usize;
            let own = self.library.is_none() && literal & 1 == 1 && node >= self.first;
            match own {
                true => used_inverted[node] = true,
                false => used[node] = true,
            }
        }
        for node in (self.first..used.len()).rev() {
            if used[node] || used_inverted[node] {
                let cut = self.best[node].expect("every AND has a cut");
                cut.leaves()
                    .iter()
                    .for_each(|&leaf| used[leaf as usize] = true);
            }
        }
        for node in self.first..used.len() {
            if used[node] || used_inverted[node] {
                let cut = self.best[node].expect("every AND has a cut");
                let pins = cut.leaves().iter().map(|&leaf| maker.net(&mut c, leaf));
                let pins: Vec<Net> = pins.collect();
                if used[node] {
                    maker.nets[node] = Some(maker.gate(&mut c, cut.table, &pins));
                }
                if used_inverted[node] {
                    let net = maker.gate(&mut c, !cut.table, &pins);
                    maker.inverted_nodes.insert(node as u32, net);
                }
            }
        }
        for (name, literal) in &self.graph.outputs {
            let net = maker.literal(&mut c, *literal);
            // An output that is an input or has a name already gets a buffer.
            c.output(net, name);
        }
        let next = self.graph.registers.iter();
        let next: Vec<Net> = next
            .map(|(_, next, _)| maker.literal(&mut c, *next))
            .collect();
        for (register, next) in c.registers.iter_mut().zip(next) {
            *register = Register { next, ..*register };
        }
        c
    }
}

/// The gates of the result.
struct Maker<'a> {
    nets: Vec<Option<Net>>,
    inverted: HashMap<Net, Net>,
    inverted_nodes: HashMap<u32, Net>,
    library: Option<&'a HashMap<(usize, u64), Match>>,
}

impl Maker<'_> {
    fn net(&mut self, c: &mut Circuit, node: u32) -> Net {
        if let Some(net) = self.nets[node as usize] {
            return net;
        }
        assert_eq!(node, 0, "leaves come before their readers");
        let zero = c.gate(Function::Zero, &[]);
        self.nets[0] = Some(zero);
        zero
    }

    fn not(&mut self, c: &mut Circuit, net: Net) -> Net {
        *self.inverted.entry(net).or_insert_with(|| c.not(net))
    }

    fn literal(&mut self, c: &mut Circuit, literal: u32) -> Net {
        if let (1, Some(&net)) = (literal & 1, self.inverted_nodes.get(&(literal / 2))) {
            return net;
        }
        let net = self.net(c, literal / 2);
        match literal & 1 {
            0 => net,
            _ => self.not(c, net),
        }
    }

    fn gate(&mut self, c: &mut Circuit, table: u64, pins: &[Net]) -> Net {
        let Some(library) = self.library else {
            return c.gate(Function::Table(table), pins);
        };
        let cell = library[&(pins.len(), table)];
        let order = &cell.order[..pins.len()];
        let pins = order.iter().map(|&(pin, not)| match not {
            true => self.not(c, pins[pin as usize]),
            false => pins[pin as usize],
        });
        let pins: Vec<Net> = pins.collect();
        let net = c.gate(cell.function, &pins);
        match cell.inverted {
            true => self.not(c, net),
            false => net,
        }
    }
}

/// A cell that gives a function: which leaf its pins take and in which polarity.
#[derive(Clone, Copy)]
struct Match {
    function: Function,
    order: [(u8, bool); 4],
    inverted: bool,
    inverters: u32,
}

/// Every function the cells give with inverters around them, the cheapest first.
fn library() -> HashMap<(usize, u64), Match> {
    let cells = [
        (Function::Not, 1),
        (Function::Nand, 2),
        (Function::Nor, 2),
        (Function::Xor, 2),
        (Function::Nand, 3),
        (Function::Nor, 3),
        (Function::Cover(&["0-0", "-00"]), 3),
        (Function::Cover(&["00-", "--0"]), 3),
        (Function::Nand, 4),
        (Function::Nor, 4),
        (Function::Cover(&["0-0-", "0--0", "-00-", "-0-0"]), 4),
        (Function::Cover(&["00--", "--00"]), 4),
    ];
    let mut library: HashMap<(usize, u64), Match> = HashMap::new();
    for (function, pins) in cells {
        for order in orders(pins) {
            for choice in 0..2u32 << pins {
                let not = |pin: usize| choice >> pin & 1 == 1;
                let mut words = [0u64; 4];
                let mut placed = [(0, false); 4];
                for (pin, &leaf) in order.iter().enumerate() {
                    placed[pin] = (leaf as u8, not(pin));
                    words[pin] = INPUTS[leaf] ^ if not(pin) { !0 } else { 0 };
                }
                let inverted = not(pins);
                let value = function.evaluate(&words[..pins]) ^ if inverted { !0 } else { 0 };
                let cell = Match {
                    function,
                    order: placed,
                    inverted,
                    inverters: choice.count_ones(),
                };
                let entry = library.entry((pins, filled(value, pins))).or_insert(cell);
                if cell.inverters < entry.inverters {
                    *entry = cell;
                }
            }
        }
    }
    library
}

/// Every order of the numbers below `n`.
fn orders(n: usize) -> Vec<Vec<usize>> {
    let mut all = vec![Vec::new()];
    for next in 0..n {
        all = all
            .into_iter()
            .flat_map(|order: Vec<usize>| {
                (0..=order.len()).map(move |at| {
                    let mut longer = order.clone();
                    longer.insert(at, next);
                    longer
                })
            })
            .collect();
    }
    all
}

/// The table of a cut over a longer list of leaves that holds its own.
fn stretched(cut: &Cut, leaves: &[u32]) -> u64 {
    let mut table = cut.table;
    // From the top, so that no input lands on one still to be moved.
    for (from, leaf) in cut.leaves().iter().enumerate().rev() {
        let to = leaves
            .iter()
            .position(|l| l == leaf)
            .expect("a longer list");
        if from != to {
            let (low, high) = halves(table, from);
            table = low & !INPUTS[to] | high & INPUTS[to];
        }
    }
    table
}

/// The table without input `i`, on which it does not depend; those above move
/// down.
fn removed(mut table: u64, i: usize) -> u64 {
    for above in i + 1..6 {
        let (low, high) = halves(table, above);
        table = low & !INPUTS[above - 1] | high & INPUTS[above - 1];
    }
    table
}
