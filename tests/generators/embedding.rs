//! Words inside other logic: operands that are internal nets, sums that feed
//! further logic, feedback through registers, words in series.

use super::cells::Cell;
use super::circuit::{Circuit, Function, Net};
use super::truth::{Generated, Kind, Truth};
use super::words::Word;

/// How a short operand is made as wide as the other.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Extension {
    /// Upper bits 0: the upper positions are half adders.
    Zero,
    /// Upper bits repeat the sign: one net is the operand of many positions.
    Sign,
}

/// Both operands pass an enable first: `(x·on_x) + (y·on_y)`.
pub fn gated_operands(word: Word) -> Generated {
    let mut c = Circuit::new("gated");
    let gated = |c: &mut Circuit, name: &str| -> Vec<Net> {
        let enable = c.input(&format!("on_{name}"));
        let bus = c.input_bus(name, word.bits);
        bus.into_iter().map(|bit| c.and(bit, enable)).collect()
    };
    let a = gated(&mut c, "x");
    let b = if word.has_b() {
        gated(&mut c, "y")
    } else {
        Vec::new()
    };
    finish(c, "gated operands", word, &a, &b)
}

fn finish(mut c: Circuit, what: &str, word: Word, a: &[Net], b: &[Net]) -> Generated {
    let carry_in = word.carry_in.then(|| c.input("cin"));
    let truth = word.place(&mut c, a, b, carry_in);
    c.output_bus(&truth.sums, "s");
    if let Some(net) = truth.carry_out {
        c.output(net, "cout");
    }
    Generated::new(format!("{what}: {}", word.label()), c, vec![truth])
}

/// `a + (b ⊕ mode) + mode`; the truth is an adder of the XOR nets whose
/// carry-in is `mode`.
pub fn adder_subtractor(bits: usize, cell: Cell) -> Generated {
    let mut c = Circuit::new("adder_subtractor");
    let (a, b) = (c.input_bus("a", bits), c.input_bus("b", bits));
    let mode = c.input("mode");
    let b: Vec<Net> = b.into_iter().map(|b| c.xor(b, mode)).collect();
    let word = Word {
        carry_in: true,
        ..Word::new(Kind::Adder, bits, cell)
    };
    let mut truth = word.place(&mut c, &a, &b, Some(mode));
    truth.mode = Some(mode);
    c.output_bus(&truth.sums, "s");
    c.output(truth.carry_out.expect("asked for"), "cout");
    Generated::new(
        format!("adder-subtractor: {}", word.label()),
        c,
        vec![truth],
    )
}

/// The sum feeds multiplexers with logic results, as in an arithmetic unit; the
/// sum nets themselves are no ports.
pub fn selected_sums(word: Word) -> Generated {
    let mut c = Circuit::new("selected");
    let a = c.input_bus("a", word.bits);
    let b = if word.has_b() {
        c.input_bus("b", word.bits)
    } else {
        Vec::new()
    };
    let (carry_in, pick) = (word.carry_in.then(|| c.input("cin")), c.input("pick"));
    let truth = word.place(&mut c, &a, &b, carry_in);
    for (i, &sum) in truth.sums.iter().enumerate() {
        let other = c.and(a[i], *b.get(i).unwrap_or(&pick));
        let chosen = c.mux(pick, sum, other);
        c.output(chosen, &format!("y[{i}]"));
    }
    if let Some(net) = truth.carry_out {
        c.output(net, "cout");
    }
    Generated::new(format!("selected sums: {}", word.label()), c, vec![truth])
}

/// An adder whose overflow (the top two carries differ) is an output, so that
/// a carry inside the chain has another reader.
pub fn with_overflow(bits: usize, cell: Cell) -> Generated {
    let mut c = Circuit::new("overflow");
    let (a, b) = (c.input_bus("a", bits), c.input_bus("b", bits));
    let word = Word::new(Kind::Adder, bits, cell);
    let truth = word.place(&mut c, &a, &b, None);
    let top = bits - 1;
    let into_top = c.gate(Function::Xor, &[a[top], b[top], truth.sums[top]]);
    let overflow = c.xor(into_top, truth.carry_out.expect("asked for"));
    c.output_bus(&truth.sums, "s");
    c.output(overflow, "overflow");
    Generated::new(format!("overflow: {}", word.label()), c, vec![truth])
}

/// `total <= total + x`, where `x` has `operand_bits` bits and is extended.
/// Zero extension makes the truth's second operand end early.
pub fn accumulator(
    bits: usize,
    operand_bits: usize,
    extension: Extension,
    cell: Cell,
) -> Generated {
    assert!(0 < operand_bits && operand_bits <= bits);
    let mut c = Circuit::new("accumulator");
    let x = c.input_bus("x", operand_bits);
    let total = c.register_bus("total", bits);
    let mut truths = Vec::new();
    let next = if extension == Extension::Sign || operand_bits == bits {
        let mut b = x.clone();
        b.resize(bits, x[operand_bits - 1]);
        let word = Word {
            carry_out: false,
            ..Word::new(Kind::Adder, bits, cell)
        };
        let truth = word.place(&mut c, &total, &b, None);
        let next = truth.sums.clone();
        truths.push(truth);
        next
    } else {
        let low = Word::new(Kind::Adder, operand_bits, cell);
        let low = low.place(&mut c, &total[..operand_bits], &x, None);
        let high = Word {
            carry_in: true,
            carry_out: false,
            ..Word::new(Kind::Incrementer, bits - operand_bits, cell)
        };
        let high = high.place(&mut c, &total[operand_bits..], &[], low.carry_out);
        let next: Vec<Net> = low.sums.iter().chain(&high.sums).copied().collect();
        // One adder whose second operand has constant bits at the top.
        truths.push(Truth {
            a: total.clone(),
            sums: next.clone(),
            carry_out: None,
            ..low
        });
        next
    };
    c.set_next(&total, &next);
    let shown = c.xor(total[bits - 1], total[0]);
    c.output(shown, "shown");
    let label = format!("accumulator of {bits}, operand {operand_bits}, {extension:?}, {cell:?}");
    Generated::new(label, c, truths)
}

/// `q <= q + enable`, or `q <= q - enable` counting down.
pub fn counter(bits: usize, down: bool, cell: Cell) -> Generated {
    let mut c = Circuit::new("counter");
    let enable = c.input("enable");
    let q = c.register_bus("q", bits);
    let kind = if down {
        Kind::Decrementer
    } else {
        Kind::Incrementer
    };
    let word = Word {
        carry_in: true,
        carry_out: false,
        borrow: down,
        ..Word::new(kind, bits, cell)
    };
    let truth = word.place(&mut c, &q, &[], Some(enable));
    c.set_next(&q, &truth.sums);
    let top = c.and(q[bits - 1], enable);
    c.output(top, "top");
    Generated::new(format!("counter: {}", word.label()), c, vec![truth])
}

/// `((x0 + x1) + x2) + …`: sums of one adder are operands of the next.
pub fn series_adders(bits: usize, operands: usize, cell: Cell) -> Generated {
    let mut c = Circuit::new("series");
    let mut running = c.input_bus("x0", bits);
    let word = Word {
        carry_out: false,
        ..Word::new(Kind::Adder, bits, cell)
    };
    let mut truths = Vec::new();
    for k in 1..operands {
        let x = c.input_bus(&format!("x{k}"), bits);
        let truth = word.place(&mut c, &running, &x, None);
        running = truth.sums.clone();
        truths.push(truth);
    }
    c.output_bus(&running, "s");
    Generated::new(format!("{operands} operands: {}", word.label()), c, truths)
}
