//! Circuits that hold no adder, subtractor, incrementer or decrementer of four
//! bits or more, though some look like it from afar.

use super::circuit::{Circuit, Function, Net};
use super::random::Random;

/// Every negative, at sizes where a false finding would have room.
pub fn all() -> Vec<Circuit> {
    vec![
        parity_tree(32),
        xor_chain(32),
        lfsr_next(24, &[23, 22, 21, 16]),
        barrel_shifter(4),
        priority_encoder(24),
        decoder(5),
        and_or_chain(32),
        random_logic(24, 600, 7),
        gray_code(16),
        voters(16),
    ]
}

/// The parity of a word, as a balanced tree.
pub fn parity_tree(bits: usize) -> Circuit {
    let mut c = Circuit::new("parity_tree");
    let mut row = c.input_bus("a", bits);
    while row.len() > 1 {
        row = row
            .chunks(2)
            .map(|pair| match *pair {
                [a, b] => c.xor(a, b),
                _ => pair[0],
            })
            .collect();
    }
    c.output(row[0], "odd");
    c
}

/// Running parity of a word, every prefix an output.
pub fn xor_chain(bits: usize) -> Circuit {
    let mut c = Circuit::new("xor_chain");
    let a = c.input_bus("a", bits);
    let mut running = a[0];
    for (i, &bit) in a.iter().enumerate().skip(1) {
        running = c.xor(running, bit);
        c.output(running, &format!("y[{i}]"));
    }
    c
}

/// A linear feedback shift register with the given taps.
pub fn lfsr_next(bits: usize, taps: &[usize]) -> Circuit {
    let mut c = Circuit::new("lfsr");
    let q = c.register_bus("q", bits);
    let mut fed = q[taps[0]];
    for &tap in &taps[1..] {
        fed = c.xor(fed, q[tap]);
    }
    let next: Vec<Net> = std::iter::once(fed)
        .chain(q[..bits - 1].iter().copied())
        .collect();
    c.set_next(&q, &next);
    c.output(q[bits - 1], "out");
    c
}

/// Rotates `2^stages` bits by a `stages`-bit amount.
pub fn barrel_shifter(stages: usize) -> Circuit {
    let mut c = Circuit::new("barrel");
    let amount = c.input_bus("by", stages);
    let mut row = c.input_bus("a", 1 << stages);
    for (stage, &by) in amount.iter().enumerate() {
        let (n, step) = (row.len(), 1 << stage);
        row = (0..n)
            .map(|i| c.mux(by, row[(i + n - step) % n], row[i]))
            .collect();
    }
    c.output_bus(&row, "y");
    c
}

/// Grants the lowest request, passing "none so far" along a chain.
pub fn priority_encoder(bits: usize) -> Circuit {
    let mut c = Circuit::new("priority");
    let request = c.input_bus("req", bits);
    let mut free = c.not(request[0]);
    c.output(request[0], "grant[0]");
    for (i, &bit) in request.iter().enumerate().skip(1) {
        let grant = c.and(bit, free);
        c.output(grant, &format!("grant[{i}]"));
        free = c.gate(Function::Cover(&["01"]), &[bit, free]);
    }
    c.output(free, "none");
    c
}

/// One-hot decoder.
pub fn decoder(bits: usize) -> Circuit {
    let mut c = Circuit::new("decoder");
    let a = c.input_bus("a", bits);
    let inverted: Vec<Net> = a.iter().map(|&a| c.not(a)).collect();
    for value in 0..1usize << bits {
        let literals: Vec<Net> = (0..bits)
            .map(|i| {
                if value >> i & 1 == 1 {
                    a[i]
                } else {
                    inverted[i]
                }
            })
            .collect();
        let line = c.gate(Function::And, &literals);
        c.output(line, &format!("y[{value}]"));
    }
    c
}

/// ANDs and ORs in alternation: a recurrence, but no sum anywhere.
pub fn and_or_chain(links: usize) -> Circuit {
    let mut c = Circuit::new("and_or");
    let x = c.input_bus("x", links + 1);
    let mut value = x[0];
    for (i, &bit) in x.iter().enumerate().skip(1) {
        value = if i % 2 == 0 {
            c.and(value, bit)
        } else {
            c.or(value, bit)
        };
    }
    c.output(value, "y");
    c
}

/// Random two- and three-input gates over recent nets.
pub fn random_logic(inputs: usize, gates: usize, seed: u64) -> Circuit {
    let mut c = Circuit::new("random");
    let nets = c.input_bus("x", inputs);
    let nets = scatter(&mut c, &nets, gates, &mut Random::new(seed));
    for (i, &net) in nets[nets.len() - 16..].iter().enumerate() {
        c.output(net, &format!("y[{i}]"));
    }
    c
}

/// Adds random gates that read `sources` and each other; returns all of them.
pub(super) fn scatter(
    c: &mut Circuit,
    sources: &[Net],
    gates: usize,
    random: &mut Random,
) -> Vec<Net> {
    let kinds = [
        Function::And,
        Function::Or,
        Function::Nand,
        Function::Nor,
        Function::Xor,
        Function::Cover(&["11-", "0-1"]),
        Function::Cover(&["01"]),
    ];
    let mut nets = sources.to_vec();
    for _ in 0..gates {
        let function = kinds[random.below(kinds.len())];
        let wanted = match function {
            Function::Cover(rows) => rows[0].len(),
            _ => 2,
        };
        // A window keeps the depth in hand and the logic from falling apart.
        let window = nets.len().min(48);
        let mut pins: Vec<Net> = Vec::with_capacity(wanted);
        while pins.len() < wanted {
            let net = nets[nets.len() - 1 - random.below(window)];
            if !pins.contains(&net) {
                pins.push(net);
            }
        }
        nets.push(c.gate(function, &pins));
    }
    nets.split_off(sources.len())
}

/// Binary to Gray code and the next Gray digit pairs: XORs of neighbours.
pub fn gray_code(bits: usize) -> Circuit {
    let mut c = Circuit::new("gray");
    let a = c.input_bus("a", bits);
    for i in 0..bits - 1 {
        let digit = c.xor(a[i], a[i + 1]);
        c.output(digit, &format!("y[{i}]"));
    }
    c
}

/// Independent majority voters with their disagreement: full-adder cells whose
/// carries go nowhere.
pub fn voters(count: usize) -> Circuit {
    let mut c = Circuit::new("voters");
    let [x, y, z] = ["x", "y", "z"].map(|name| c.input_bus(name, count));
    for i in 0..count {
        let pins = [x[i], y[i], z[i]];
        let vote = c.gate(Function::Cover(&["11-", "1-1", "-11"]), &pins);
        c.output(vote, &format!("vote[{i}]"));
        let odd = c.gate(Function::Xor, &pins);
        c.output(odd, &format!("odd[{i}]"));
    }
    c
}

/// Further negatives, of the corpus.
pub fn more() -> Vec<Circuit> {
    vec![
        crc_next(16, 8),
        gray_counter(12),
        voter_tree(27),
        one_hot_choice(16),
        random_logic(32, 2_000, 11),
        random_logic(16, 1_000, 12),
    ]
}

/// The next state of a check sequence register that takes a word at once, with
/// the generator x^16 + x^12 + x^5 + 1 (ITU-T V.41).
pub fn crc_next(bits: usize, word: usize) -> Circuit {
    let mut c = Circuit::new("crc");
    let data = c.input_bus("d", word);
    let q = c.register_bus("q", bits);
    let mut state = q.clone();
    for &bit in &data {
        let fed = c.xor(state[bits - 1], bit);
        let mut next = vec![fed];
        for i in 1..bits {
            next.push(match i {
                5 | 12 => c.xor(state[i - 1], fed),
                _ => state[i - 1],
            });
        }
        state = next;
    }
    c.set_next(&q, &state);
    c.output(q[bits - 1], "out");
    c
}

/// A Gray-code counter that flips one bit a step: the parity says whether bit 0
/// flips, the lowest 1 which other does.
pub fn gray_counter(bits: usize) -> Circuit {
    let mut c = Circuit::new("gray_counter");
    let q = c.register_bus("q", bits);
    let odd = q[1..].iter().fold(q[0], |odd, &bit| c.xor(odd, bit));
    let even = c.not(odd);
    let mut next = vec![c.xor(q[0], even)];
    // Whether everything below position i - 1 is 0.
    let mut clear = odd;
    for i in 1..bits {
        let flip = match i + 1 < bits {
            true => c.and(clear, q[i - 1]),
            false => clear,
        };
        next.push(c.xor(q[i], flip));
        clear = c.gate(Function::Cover(&["01"]), &[q[i - 1], clear]);
    }
    c.set_next(&q, &next);
    c.output(q[bits - 1], "out");
    c
}

/// Majorities of three in a tree, and the parity of the same votes.
pub fn voter_tree(votes: usize) -> Circuit {
    let mut c = Circuit::new("voter_tree");
    let mut row = c.input_bus("v", votes);
    let odd = row[1..].iter().fold(row[0], |odd, &vote| c.xor(odd, vote));
    c.output(odd, "odd");
    while row.len() > 1 {
        row = row
            .chunks(3)
            .map(|group| match group.len() {
                3 => c.gate(Function::Cover(&["11-", "1-1", "-11"]), group),
                _ => group[0],
            })
            .collect();
    }
    c.output(row[0], "most");
    c
}

/// Words chosen by one-hot lines, one AND-OR plane.
pub fn one_hot_choice(bits: usize) -> Circuit {
    let mut c = Circuit::new("one_hot");
    let on = c.input_bus("on", 4);
    let words: Vec<Vec<Net>> = (0..4)
        .map(|k| c.input_bus(&format!("w{k}"), bits))
        .collect();
    for i in 0..bits {
        let lines = on.iter().zip(&words);
        let taken: Vec<Net> = lines.map(|(&on, word)| c.and(on, word[i])).collect();
        let chosen = c.gate(Function::Or, &taken);
        c.output(chosen, &format!("y[{i}]"));
    }
    c
}
