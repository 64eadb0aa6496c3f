//! Netlists for measuring growth: many equal parts between registers, so that
//! depth does not grow with size; and one path as long as the netlist.

use super::cells::Cell;
use super::circuit::{Circuit, Function, Net};
use super::negatives::scatter;
use super::random::Random;
use super::truth::Kind;
use super::words::Word;

/// Gates of random logic behind each adder.
const SCATTERED: usize = 120;
/// No block is larger than this.
const BLOCK_AT_MOST: usize = 800;

/// Exactly `gates` gates: 32-bit ripple accumulators in the ten cell styles,
/// each with operand selection, enable decode and random logic. Operands come
/// from registers of earlier blocks.
pub fn replicated(gates: usize, seed: u64) -> Circuit {
    let mut c = Circuit::new("replicated");
    let mut random = Random::new(seed);
    let shared = c.input_bus("x", 32);
    let control = c.input_bus("ctl", 8);
    let mut words = vec![shared.clone()];
    let mut block = 0;
    while c.gate_count() + BLOCK_AT_MOST <= gates {
        let before = c.gate_count();
        let q = c.register_bus(&format!("u{block}/q"), 32);
        add_block(&mut c, block, &q, &words, &control, &mut random);
        words.push(q);
        block += 1;
        assert!(
            c.gate_count() - before <= BLOCK_AT_MOST,
            "a block has grown"
        );
    }
    let rest = gates - c.gate_count();
    let last = scatter(&mut c, &shared, rest, &mut random);
    if let Some(&net) = last.last() {
        c.output(net, "rest");
    }
    c
}

fn add_block(
    c: &mut Circuit,
    block: usize,
    q: &[Net],
    words: &[Vec<Net>],
    control: &[Net],
    random: &mut Random,
) {
    let cell = Cell::ALL[block % Cell::ALL.len()];
    // Nearby blocks only: a netlist has neighbourhoods.
    let near = words.len().min(16);
    let mut pick = || words[words.len() - 1 - random.below(near)].clone();
    let (left, right) = (pick(), pick());
    let number: Vec<Net> = (0..3)
        .map(|_| control[random.below(control.len())])
        .collect();
    let decoded = c.gate(Function::Cover(&["101"]), &number);
    let clear = c.gate(Function::Nor, &number[..2]);
    let operand: Vec<Net> = (0..32)
        .map(|i| c.mux(decoded, left[i], right[31 - i]))
        .collect();
    let word = Word::new(Kind::Adder, 32, cell);
    let truth = word.place(c, q, &operand, None);
    let keep = c.not(clear);
    let next: Vec<Net> = truth.sums.iter().map(|&sum| c.and(sum, keep)).collect();
    let from = c.registers.len() - q.len();
    for (register, &next) in c.registers[from..].iter_mut().zip(&next) {
        register.next = next;
    }
    let mut sources = q.to_vec();
    sources.extend(truth.carry_out);
    let scattered = scatter(c, &sources, SCATTERED, random);
    c.output(scattered[SCATTERED - 1], &format!("u{block}/flag"));
}

/// A path through `gates` two-input NAND gates in series.
pub fn series(gates: usize) -> Circuit {
    let mut c = Circuit::new("series");
    let x = c.input_bus("x", 61);
    let mut value = x[0];
    for i in 0..gates {
        value = c.gate(Function::Nand, &[value, x[(i + 1) % x.len()]]);
    }
    c.output(value, "y");
    c
}
