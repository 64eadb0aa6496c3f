//! Flat BLIF text of a circuit: every gate is one `.names`, in the order the
//! gates stand; every register one `.latch` without clock.

use super::circuit::{Circuit, Function};
use super::table::cubes;
use std::fmt::Write;

/// Writes a dot-word and its list, continued over lines of about 78 characters.
pub(super) fn list(text: &mut String, word: &str, names: impl IntoIterator<Item = String>) {
    let mut column = word.len();
    text.push_str(word);
    for name in names {
        if column + name.len() + 3 > 78 {
            text.push_str(" \\\n");
            column = 0;
        }
        column += name.len() + 1;
        text.push(' ');
        text.push_str(&name);
    }
    text.push('\n');
}

/// Writes the cover of a function of `inputs` pins.
pub(super) fn rows(text: &mut String, function: Function, inputs: usize) {
    let one_hot = |text: &mut String, literal: char| {
        for pin in 0..inputs {
            text.extend((0..inputs).map(|i| if i == pin { literal } else { '-' }));
            text.push_str(" 1\n");
        }
    };
    match function {
        Function::Zero => {}
        Function::One => text.push_str("1\n"),
        Function::Buffer => text.push_str("1 1\n"),
        Function::Not => text.push_str("0 1\n"),
        Function::And => writeln!(text, "{} 1", "1".repeat(inputs)).unwrap(),
        Function::Nor => writeln!(text, "{} 1", "0".repeat(inputs)).unwrap(),
        Function::Or => one_hot(text, '1'),
        Function::Nand => one_hot(text, '0'),
        Function::Xor | Function::Xnor => {
            assert!(inputs <= 8, "a parity cover of {inputs} inputs is too long");
            let odd = u32::from(function == Function::Xor);
            for minterm in (0..1u32 << inputs).filter(|m| m.count_ones() % 2 == odd) {
                text.extend((0..inputs).map(|i| if minterm >> i & 1 == 1 { '1' } else { '0' }));
                text.push_str(" 1\n");
            }
        }
        Function::Table(ones) => {
            for cube in cubes(ones, inputs) {
                text.extend(cube.iter().map(|literal| match literal {
                    Some(true) => '1',
                    Some(false) => '0',
                    None => '-',
                }));
                text.push_str(if inputs == 0 { "1\n" } else { " 1\n" });
            }
        }
        Function::Cover(rows) => {
            for row in rows {
                text.push_str(row);
                text.push_str(" 1\n");
            }
        }
    }
}

/// The register's reset value in BLIF; 3 is "unknown".
pub(super) fn initial(value: Option<bool>) -> u8 {
    value.map_or(3, u8::from)
}

impl Circuit {
    /// The circuit as flat BLIF.
    pub fn blif(&self) -> String {
        let mut text = String::with_capacity(self.gate_count() * 40);
        let names = |nets: &[super::Net]| -> Vec<String> {
            nets.iter().map(|&net| self.name_of(net)).collect()
        };
        writeln!(text, ".model {}", self.name).unwrap();
        list(&mut text, ".inputs", names(&self.inputs));
        list(&mut text, ".outputs", names(&self.outputs));
        for register in &self.registers {
            let (next, output) = (self.name_of(register.next), self.name_of(register.output));
            writeln!(text, ".latch {next} {output} {}", initial(register.initial)).unwrap();
        }
        for gate in 0..self.gate_count() {
            let (function, inputs, output) = self.gate_at(gate);
            text.push_str(".names");
            for &net in inputs.iter().chain([&output]) {
                text.push(' ');
                match self.given_name(net) {
                    Some(name) => text.push_str(name),
                    None => write!(text, "n{}", net.0).unwrap(),
                }
            }
            text.push('\n');
            rows(&mut text, function, inputs.len());
        }
        text.push_str(".end\n");
        text
    }
}
