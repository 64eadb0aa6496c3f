//! Other shapes of the same circuit: inner nets complemented, AND/inverter
//! graphs re-associated with other XOR and majority forms, gates spread over
//! models of a hierarchy. Ports and registers stay.

use super::aig::Aig;
use super::blif::{initial, list, rows};
use super::circuit::{Circuit, Function, Net};
use super::random::Random;
use super::table::{INPUTS, filled, halves};
use std::collections::HashMap;
use std::fmt::Write;

/// Half of the inner nets carry the opposite value; the gates at both ends take
/// the inversion in, a gate of more than six inputs by an inverter.
pub fn complemented(circuit: &Circuit, seed: u64) -> Circuit {
    let mut random = Random::new(seed);
    let mut flipped: Vec<bool> = (0..circuit.net_count())
        .map(|_| random.below(2) == 1)
        .collect();
    let registers = circuit.registers.iter().flat_map(|r| [r.output, r.next]);
    let ports = circuit.inputs.iter().chain(&circuit.outputs).copied();
    for net in ports.chain(registers) {
        flipped[net.index()] = false;
    }
    let mut other = circuit.clone();
    other.keep_gates(&[]);
    for gate in 0..circuit.gate_count() {
        let (function, inputs, output) = circuit.gate_at(gate);
        let out = flipped[output.index()];
        if inputs.len() > 6 {
            let straight: Vec<Net> = inputs
                .iter()
                .map(|&net| match flipped[net.index()] {
                    true => other.not(net),
                    false => net,
                })
                .collect();
            let opposite = match function {
                Function::And => Function::Nand,
                Function::Nand => Function::And,
                Function::Or => Function::Nor,
                Function::Nor => Function::Or,
                rest => rest,
            };
            let is_known = opposite != function;
            if out && !is_known {
                let straight_out = other.gate(function, &straight);
                other.drive(output, Function::Not, &[straight_out]);
            } else {
                other.drive(output, if out { opposite } else { function }, &straight);
            }
            continue;
        }
        let words: Vec<u64> = inputs
            .iter()
            .enumerate()
            .map(|(i, net)| INPUTS[i] ^ mask(flipped[net.index()]))
            .collect();
        let value = function.evaluate(&words) ^ mask(out);
        other.drive(output, Function::Table(filled(value, inputs.len())), inputs);
    }
    other
}

fn mask(on: bool) -> u64 {
    if on { !0 } else { 0 }
}

/// Literals of a graph under construction, as in AIGER.
struct Maker {
    first: u32,
    ands: Vec<[u32; 2]>,
    known: HashMap<[u32; 2], u32>,
    random: Random,
}

impl Maker {
    fn and(&mut self, a: u32, b: u32) -> u32 {
        let [high, low] = [a.max(b), a.min(b)];
        match (low, high) {
            (0, _) => 0,
            (1, other) => other,
            (a, b) if a == b => a,
            (a, b) if a == b ^ 1 => 0,
            _ => *self.known.entry([high, low]).or_insert_with(|| {
                self.ands.push([high, low]);
                (self.first + self.ands.len() as u32 - 1) * 2
            }),
        }
    }

    fn or(&mut self, a: u32, b: u32) -> u32 {
        self.and(a ^ 1, b ^ 1) ^ 1
    }

    fn choose(&mut self, select: u32, high: u32, low: u32) -> u32 {
        let (taken, kept) = (self.and(select, high), self.and(select ^ 1, low));
        self.or(taken, kept)
    }

    /// XOR in one of its three forms of three ANDs.
    fn xor(&mut self, a: u32, b: u32) -> u32 {
        match self.random.below(3) {
            0 => {
                let (both, neither) = (self.and(a, b), self.and(a ^ 1, b ^ 1));
                self.and(both ^ 1, neither ^ 1)
            }
            1 => {
                let (left, right) = (self.and(a, b ^ 1), self.and(a ^ 1, b));
                self.or(left, right)
            }
            // As four NANDs would have it.
            _ => {
                let both = self.and(a, b);
                let (left, right) = (self.and(a, both ^ 1), self.and(b, both ^ 1));
                self.or(left, right)
            }
        }
    }

    /// A product in a random association and order.
    fn all(&mut self, literals: &[u32]) -> u32 {
        let mut open = literals.to_vec();
        if open.is_empty() {
            return 1;
        }
        while open.len() > 1 {
            let a = open.swap_remove(self.random.below(open.len()));
            let b = open.swap_remove(self.random.below(open.len()));
            open.push(self.and(a, b));
        }
        open[0]
    }

    /// A table by Shannon's expansion on a random input; XORs and majorities
    /// take one of several forms. At most six deep.
    fn table(&mut self, table: u64, pins: &[u32]) -> u32 {
        match table {
            0 => return 0,
            u64::MAX => return 1,
            _ => {}
        }
        let support: Vec<usize> = (0..pins.len())
            .filter(|&i| halves(table, i).0 != halves(table, i).1)
            .collect();
        let i = support[self.random.below(support.len())];
        let (low, high) = halves(table, i);
        let pin = pins[i];
        if low == !high {
            let rest = self.table(low, pins);
            return self.xor(rest, pin);
        }
        match (low, high) {
            (0, _) => {
                let rest = self.table(high, pins);
                self.and(pin, rest)
            }
            (u64::MAX, _) => {
                let rest = self.table(high, pins);
                self.or(pin ^ 1, rest)
            }
            (_, 0) => {
                let rest = self.table(low, pins);
                self.and(pin ^ 1, rest)
            }
            (_, u64::MAX) => {
                let rest = self.table(low, pins);
                self.or(pin, rest)
            }
            _ => {
                let (low_net, high_net) = (self.table(low, pins), self.table(high, pins));
                if low & high == low {
                    // Grows with the pin: a majority falls apart like this.
                    let passed = self.and(pin, high_net);
                    return self.or(low_net, passed);
                }
                self.choose(pin, high_net, low_net)
            }
        }
    }

    fn gate(&mut self, function: Function, literals: &[u32]) -> u32 {
        let inverted: Vec<u32> = literals.iter().map(|literal| literal ^ 1).collect();
        match function {
            Function::And => self.all(literals),
            Function::Nand => self.all(literals) ^ 1,
            Function::Or => self.all(&inverted) ^ 1,
            Function::Nor => self.all(&inverted),
            _ => {
                assert!(literals.len() <= 6, "wide gates are products or sums");
                let words = &INPUTS[..literals.len()];
                self.table(function.evaluate(words), literals)
            }
        }
    }
}

/// The AND/inverter graph of a circuit in another form: XORs, majorities and
/// covers in random forms, then every tree of ANDs associated at random.
pub fn reassociated(circuit: &Circuit, seed: u64) -> Aig {
    let free = (circuit.inputs.len() + circuit.registers.len()) as u32;
    let mut maker = Maker {
        first: free + 1,
        ands: Vec::new(),
        known: HashMap::new(),
        random: Random::new(seed),
    };
    let mut literals = vec![u32::MAX; circuit.net_count()];
    let states = circuit.registers.iter().map(|register| register.output);
    for (i, net) in circuit.inputs.iter().copied().chain(states).enumerate() {
        literals[net.index()] = 2 * (i as u32 + 1);
    }
    for gate in circuit.order() {
        let (function, inputs, output) = circuit.gate_at(gate as usize);
        let pins: Vec<u32> = inputs.iter().map(|net| literals[net.index()]).collect();
        literals[output.index()] = maker.gate(function, &pins);
    }
    let ends: Vec<Net> = circuit.outputs.to_vec();
    let next = circuit.registers.iter().map(|r| r.next);
    let ends: Vec<u32> = ends
        .into_iter()
        .chain(next)
        .map(|net| literals[net.index()])
        .collect();
    let (ands, ends) = associated(maker, &ends);
    let (outputs, next) = ends.split_at(circuit.outputs.len());
    let name = |net: &Net| circuit.name_of(*net);
    Aig {
        inputs: circuit.inputs.iter().map(name).collect(),
        registers: circuit
            .registers
            .iter()
            .zip(next)
            .map(|(r, &next)| (name(&r.output), next, r.initial))
            .collect(),
        outputs: circuit
            .outputs
            .iter()
            .map(name)
            .zip(outputs.iter().copied())
            .collect(),
        ands,
        symbols: true,
    }
}

/// Every maximal tree of ANDs with one reader each, built again at random.
/// Returns the new ANDs and the ends in terms of them; what nothing reads goes.
fn associated(old: Maker, ends: &[u32]) -> (Vec<[u32; 2]>, Vec<u32>) {
    let first = old.first as usize;
    let mut readers = vec![0u32; first + old.ands.len()];
    // An end, or an inverted edge, ends a tree.
    let mut is_root = vec![false; readers.len()];
    for &end in ends {
        is_root[(end / 2) as usize] = true;
    }
    for &literal in old.ands.iter().flatten() {
        let node = (literal / 2) as usize;
        readers[node] += 1;
        is_root[node] |= literal & 1 == 1;
    }
    let mut needed = vec![false; readers.len()];
    let mut open: Vec<usize> = ends.iter().map(|end| (end / 2) as usize).collect();
    while let Some(node) = open.pop() {
        if !needed[node] {
            needed[node] = true;
            if node >= first {
                let fan_ins = old.ands[node - first].iter();
                open.extend(fan_ins.map(|literal| (literal / 2) as usize));
            }
        }
    }
    let mut new = Maker {
        ands: Vec::new(),
        known: HashMap::new(),
        ..old
    };
    let mut moved: Vec<u32> = (0..readers.len() as u32).map(|node| 2 * node).collect();
    for node in first..readers.len() {
        if !needed[node] || (readers[node] == 1 && !is_root[node]) {
            continue;
        }
        let mut leaves = Vec::new();
        let mut open: Vec<u32> = old.ands[node - first].to_vec();
        while let Some(literal) = open.pop() {
            let inner = (literal / 2) as usize;
            if inner >= first && readers[inner] == 1 && !is_root[inner] {
                open.extend(old.ands[inner - first]);
            } else {
                leaves.push(moved[inner] ^ literal & 1);
            }
        }
        moved[node] = new.all(&leaves);
    }
    let ends = ends
        .iter()
        .map(|end| moved[(end / 2) as usize] ^ end & 1)
        .collect();
    (new.ands, ends)
}

/// BLIF text with the gates, in an order that drivers come first, spread over
/// models of `size` gates each; the top model holds instances and registers.
/// Nets keep their names in every model.
pub fn in_blocks(circuit: &Circuit, size: usize) -> String {
    let order = circuit.order();
    let mut block_of = vec![usize::MAX; circuit.net_count()];
    for (at, &gate) in order.iter().enumerate() {
        block_of[circuit.gate_at(gate as usize).2.index()] = at / size;
    }
    let mut leaves = vec![false; circuit.net_count()];
    for net in circuit.outputs.iter().copied() {
        leaves[net.index()] = true;
    }
    for register in &circuit.registers {
        leaves[register.next.index()] = true;
    }
    for &gate in &order {
        let (_, inputs, output) = circuit.gate_at(gate as usize);
        for net in inputs {
            leaves[net.index()] |= block_of[net.index()] != block_of[output.index()];
        }
    }
    let name = |net: Net| circuit.name_of(net);
    let names = |nets: &[Net]| nets.iter().map(|&net| name(net)).collect::<Vec<_>>();
    let (mut top, mut models) = (String::new(), String::new());
    writeln!(top, ".model {}", circuit.name).unwrap();
    list(&mut top, ".inputs", names(&circuit.inputs));
    list(&mut top, ".outputs", names(&circuit.outputs));
    for register in &circuit.registers {
        let (next, output) = (name(register.next), name(register.output));
        writeln!(top, ".latch {next} {output} {}", initial(register.initial)).unwrap();
    }
    for (block, gates) in order.chunks(size).enumerate() {
        let gates: Vec<_> = gates.iter().map(|&g| circuit.gate_at(g as usize)).collect();
        let mut entering: Vec<Net> = gates.iter().flat_map(|gate| gate.1).copied().collect();
        entering.sort_unstable();
        entering.dedup();
        entering.retain(|net| block_of[net.index()] != block);
        let leaving = gates.iter().map(|gate| gate.2);
        let leaving: Vec<Net> = leaving.filter(|net| leaves[net.index()]).collect();
        writeln!(models, ".model part{block}").unwrap();
        list(&mut models, ".inputs", names(&entering));
        list(&mut models, ".outputs", names(&leaving));
        for (function, inputs, output) in gates {
            list(
                &mut models,
                ".names",
                inputs.iter().chain([&output]).map(|&net| name(net)),
            );
            rows(&mut models, function, inputs.len());
        }
        models.push_str(".end\n");
        let pins = entering.iter().chain(&leaving);
        let word = format!(".subckt part{block}");
        list(&mut top, &word, pins.map(|&n| format!("{0}={0}", name(n))));
    }
    top.push_str(".end\n");
    top + &models
}
