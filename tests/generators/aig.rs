//! AND/inverter graphs of circuits, and their AIGER text and bytes (TR 07/1,
//! TR 11/2 for register resets).
//!
//! Gates are decomposed as balanced trees; equal ANDs are shared. XOR is
//! ~(a·b) · ~(~a·~b), so that an adder cell's carry shares its a·b, which gives
//! the seven ANDs a full adder is known to cost. Variables are numbered in the
//! order gates are reached, so shuffled gates give another numbering.

use super::circuit::{Circuit, Function};
use super::table::cubes;
use std::collections::HashMap;
use std::fmt::Write;

/// An AND/inverter graph; literals are AIGER literals.
#[derive(Clone, Debug)]
pub struct Aig {
    /// Names of the inputs.
    pub inputs: Vec<String>,
    /// Name, next literal and reset of the registers.
    pub registers: Vec<(String, u32, Option<bool>)>,
    /// Name and literal of the outputs.
    pub outputs: Vec<(String, u32)>,
    /// Right sides, larger literal first; AND number `k` is variable
    /// `inputs + registers + 1 + k`.
    pub ands: Vec<[u32; 2]>,
    /// Whether the writers add a symbol table.
    pub symbols: bool,
}

struct Maker {
    first: u32,
    ands: Vec<[u32; 2]>,
    known: HashMap<[u32; 2], u32>,
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

    fn xor(&mut self, a: u32, b: u32) -> u32 {
        let (both, neither) = (self.and(a, b), self.and(a ^ 1, b ^ 1));
        self.and(both ^ 1, neither ^ 1)
    }

    fn tree(&mut self, literals: &[u32], join: fn(&mut Self, u32, u32) -> u32) -> u32 {
        let mut row = literals.to_vec();
        while row.len() > 1 {
            row = row
                .chunks(2)
                .map(|pair| match *pair {
                    [a, b] => join(self, a, b),
                    _ => pair[0],
                })
                .collect();
        }
        row[0]
    }

    fn all(&mut self, literals: &[u32]) -> u32 {
        if literals.is_empty() {
            return 1;
        }
        self.tree(literals, Self::and)
    }

    fn any(&mut self, literals: &[u32]) -> u32 {
        let inverted: Vec<u32> = literals.iter().map(|literal| literal ^ 1).collect();
        self.all(&inverted) ^ 1
    }

    fn gate(&mut self, function: Function, literals: &[u32]) -> u32 {
        match function {
            Function::Zero => 0,
            Function::One => 1,
            Function::Buffer => literals[0],
            Function::Not => literals[0] ^ 1,
            Function::And => self.all(literals),
            Function::Nand => self.all(literals) ^ 1,
            Function::Or => self.any(literals),
            Function::Nor => self.any(literals) ^ 1,
            Function::Xor => self.tree(literals, Self::xor),
            Function::Xnor => self.tree(literals, Self::xor) ^ 1,
            Function::Table(ones) => {
                let products: Vec<u32> = cubes(ones, literals.len())
                    .iter()
                    .map(|cube| {
                        let pins = cube.iter().zip(literals);
                        let product: Vec<u32> = pins
                            .filter_map(|(literal, pin)| literal.map(|one| pin ^ u32::from(!one)))
                            .collect();
                        self.all(&product)
                    })
                    .collect();
                self.any(&products)
            }
            Function::Cover(rows) => {
                let mut products = Vec::with_capacity(rows.len());
                for row in rows {
                    let cube: Vec<u32> = row
                        .bytes()
                        .zip(literals)
                        .filter(|(symbol, _)| *symbol != b'-')
                        .map(|(symbol, literal)| literal ^ u32::from(symbol == b'0'))
                        .collect();
                    products.push(self.all(&cube));
                }
                self.any(&products)
            }
        }
    }
}

impl Aig {
    /// The graph of a circuit, with a symbol table.
    pub fn of(circuit: &Circuit) -> Self {
        let free = circuit.inputs.len() + circuit.registers.len();
        let mut maker = Maker {
            first: free as u32 + 1,
            ands: Vec::new(),
            known: HashMap::new(),
        };
        let mut literals = vec![u32::MAX; circuit.net_count()];
        let states = circuit.registers.iter().map(|register| register.output);
        for (i, net) in circuit.inputs.iter().copied().chain(states).enumerate() {
            literals[net.index()] = 2 * (i as u32 + 1);
        }
        let mut fan_ins = Vec::new();
        for gate in circuit.order() {
            let (function, inputs, output) = circuit.gate_at(gate as usize);
            fan_ins.clear();
            fan_ins.extend(inputs.iter().map(|net| literals[net.index()]));
            literals[output.index()] = maker.gate(function, &fan_ins);
        }
        let named = |net| (circuit.name_of(net), literals[net.index()]);
        Self {
            inputs: circuit.inputs.iter().map(|&n| circuit.name_of(n)).collect(),
            registers: circuit
                .registers
                .iter()
                .map(|r| (circuit.name_of(r.output), named(r.next).1, r.initial))
                .collect(),
            outputs: circuit.outputs.iter().map(|&net| named(net)).collect(),
            ands: maker.ands,
            symbols: true,
        }
    }

    /// The same without symbols.
    #[must_use]
    pub fn without_symbols(mut self) -> Self {
        self.symbols = false;
        self
    }

    /// Number of ANDs on the longest path.
    pub fn depth(&self) -> usize {
        let first = self.first_and();
        let mut levels = vec![0usize; first + self.ands.len()];
        for (k, [a, b]) in self.ands.iter().enumerate() {
            levels[first + k] = 1 + levels[(a / 2) as usize].max(levels[(b / 2) as usize]);
        }
        levels.into_iter().max().unwrap_or(0)
    }

    /// The value of every variable on 64 patterns: one word per input, one per
    /// register.
    pub fn evaluate(&self, inputs: &[u64], state: &[u64]) -> Vec<u64> {
        let mut values = vec![0];
        values.extend(inputs.iter().chain(state));
        assert_eq!(values.len(), self.first_and());
        for &[a, b] in &self.ands {
            let value = |literal: u32| {
                values[(literal / 2) as usize] ^ u64::from(literal & 1).wrapping_neg()
            };
            values.push(value(a) & value(b));
        }
        values
    }

    /// The variable of AND number 0.
    pub(super) fn first_and(&self) -> usize {
        self.inputs.len() + self.registers.len() + 1
    }

    fn header(&self, magic: &str) -> String {
        let (i, l) = (self.inputs.len(), self.registers.len());
        let (o, a) = (self.outputs.len(), self.ands.len());
        format!("{magic} {} {i} {l} {o} {a}\n", i + l + a)
    }

    fn latch(&self, index: usize) -> String {
        let own = 2 * (self.inputs.len() + 1 + index);
        let (_, next, reset) = &self.registers[index];
        match reset {
            Some(false) => format!("{next}"),
            Some(true) => format!("{next} 1"),
            None => format!("{next} {own}"),
        }
    }

    fn trailer(&self) -> String {
        let mut text = String::new();
        if self.symbols {
            for (i, name) in self.inputs.iter().enumerate() {
                writeln!(text, "i{i} {name}").unwrap();
            }
            for (i, (name, ..)) in self.registers.iter().enumerate() {
                writeln!(text, "l{i} {name}").unwrap();
            }
            for (i, (name, _)) in self.outputs.iter().enumerate() {
                writeln!(text, "o{i} {name}").unwrap();
            }
        }
        text
    }

    /// The ASCII form.
    pub fn aag(&self) -> String {
        let mut text = self.header("aag");
        for i in 0..self.inputs.len() {
            writeln!(text, "{}", 2 * (i + 1)).unwrap();
        }
        for i in 0..self.registers.len() {
            writeln!(
                text,
                "{} {}",
                2 * (self.inputs.len() + 1 + i),
                self.latch(i)
            )
            .unwrap();
        }
        for (_, literal) in &self.outputs {
            writeln!(text, "{literal}").unwrap();
        }
        for (k, [high, low]) in self.ands.iter().enumerate() {
            writeln!(text, "{} {high} {low}", 2 * (self.first_and() + k)).unwrap();
        }
        text.push_str(&self.trailer());
        text
    }

    /// The binary form.
    pub fn aig(&self) -> Vec<u8> {
        let mut bytes = self.header("aig").into_bytes();
        for i in 0..self.registers.len() {
            bytes.extend_from_slice(self.latch(i).as_bytes());
            bytes.push(b'\n');
        }
        for (_, literal) in &self.outputs {
            bytes.extend_from_slice(format!("{literal}\n").as_bytes());
        }
        for (k, &[high, low]) in self.ands.iter().enumerate() {
            let left = 2 * (self.first_and() + k) as u32;
            delta(&mut bytes, left - high);
            delta(&mut bytes, high - low);
        }
        bytes.extend_from_slice(self.trailer().as_bytes());
        bytes
    }
}

fn delta(bytes: &mut Vec<u8>, mut value: u32) {
    while value > 0x7F {
        bytes.push(value as u8 | 0x80);
        value >>= 7;
    }
    bytes.push(value as u8);
}
