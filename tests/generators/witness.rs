//! The smallest readers that can evaluate what the writers wrote, from text
//! and bytes alone. They take the generators' own output only, and exist so
//! that the writers are checked by something other than themselves.

use std::collections::HashMap;

/// Values of the outputs and of the registers' next states, in file order.
pub type Outcome = (Vec<u64>, Vec<u64>);

#[derive(Default)]
struct Model<'a> {
    inputs: Vec<&'a str>,
    outputs: Vec<&'a str>,
    latches: Vec<(&'a str, &'a str)>,
    covers: Vec<(Vec<&'a str>, Vec<&'a str>)>,
    instances: Vec<Vec<&'a str>>,
}

/// Evaluates BLIF text, hierarchical or flat, on 64 patterns.
pub fn blif(text: &str, inputs: &[u64], state: &[u64]) -> Outcome {
    let joined = text.replace("\\\n", " ");
    let mut models: Vec<(&str, Model)> = Vec::new();
    for line in joined.lines().filter(|line| !line.starts_with('#')) {
        let words: Vec<&str> = line.split_whitespace().collect();
        let Some((&first, rest)) = words.split_first() else {
            continue;
        };
        if first == ".model" {
            models.push((rest[0], Model::default()));
            continue;
        }
        let model = &mut models.last_mut().expect(".model comes first").1;
        match first {
            ".inputs" => model.inputs.extend(rest),
            ".outputs" => model.outputs.extend(rest),
            ".latch" => model.latches.push((rest[0], rest[1])),
            ".names" => model.covers.push((rest.to_vec(), Vec::new())),
            ".subckt" => model.instances.push(rest.to_vec()),
            ".end" => {}
            _ => {
                let rows = &mut model.covers.last_mut().expect("rows follow .names").1;
                assert_eq!(
                    *words.last().expect("not empty"),
                    "1",
                    "the writers list ones"
                );
                rows.push(if words.len() == 2 { first } else { "" });
            }
        }
    }
    let mut flat = Flat::default();
    let top = models[0].0;
    flat.expand(&models, top, "", &HashMap::new());
    let mut values: HashMap<String, u64> = HashMap::new();
    for (name, &word) in models[0].1.inputs.iter().zip(inputs) {
        values.insert((*name).to_owned(), word);
    }
    assert_eq!(flat.latches.len(), state.len());
    for ((_, output), &word) in flat.latches.iter().zip(state) {
        values.insert(output.clone(), word);
    }
    // Sweeps until nothing changes; the generators' circuits are small here.
    let mut open = flat.covers;
    while !open.is_empty() {
        let before = open.len();
        open.retain(|(names, rows)| {
            let (output, pins) = names.split_last().expect("an output");
            let words: Option<Vec<u64>> = pins.iter().map(|n| values.get(n).copied()).collect();
            let Some(words) = words else { return true };
            let value = rows.iter().fold(0, |any, row| {
                assert_eq!(row.len(), words.len(), "row width of {output}");
                let literals = row.bytes().zip(&words);
                any | literals.fold(!0, |all, (literal, word)| match literal {
                    b'1' => all & word,
                    b'0' => all & !word,
                    _ => all,
                })
            });
            assert!(
                values.insert(output.clone(), value).is_none(),
                "{output} driven twice"
            );
            false
        });
        assert!(open.len() < before, "a loop, or a net without driver");
    }
    let outputs = models[0].1.outputs.iter().map(|name| values[*name]);
    let next = flat.latches.iter().map(|(next, _)| values[next]);
    (outputs.collect(), next.collect())
}

#[derive(Default)]
struct Flat {
    latches: Vec<(String, String)>,
    covers: Vec<(Vec<String>, Vec<String>)>,
    instances: usize,
}

impl Flat {
    fn expand(
        &mut self,
        models: &[(&str, Model)],
        name: &str,
        path: &str,
        bound: &HashMap<&str, String>,
    ) {
        let found = models.iter().find(|(model, _)| *model == name);
        let model = &found.unwrap_or_else(|| panic!("no model {name}")).1;
        let net = |local: &str| match bound.get(local) {
            Some(actual) => actual.clone(),
            None => format!("{path}{local}"),
        };
        for (next, output) in &model.latches {
            self.latches.push((net(next), net(output)));
        }
        for (names, rows) in &model.covers {
            let rows = rows.iter().map(|row| (*row).to_owned()).collect();
            self.covers
                .push((names.iter().map(|n| net(n)).collect(), rows));
        }
        for instance in &model.instances {
            self.instances += 1;
            let inner = format!("{path}{}/", self.instances);
            let pairs = instance[1..].iter().map(|binding| {
                let (formal, actual) = binding.split_once('=').expect("formal=actual");
                (formal, net(actual))
            });
            let pairs: HashMap<&str, String> = pairs.collect();
            self.expand(models, instance[0], &inner, &pairs);
        }
    }
}

/// Evaluates AIGER bytes, either form, on 64 patterns.
pub fn aiger(bytes: &[u8], inputs: &[u64], state: &[u64]) -> Outcome {
    let mut at = 0;
    let line = |at: &mut usize| -> Vec<String> {
        let end = bytes[*at..]
            .iter()
            .position(|&b| b == b'\n')
            .expect("a line")
            + *at;
        let text = std::str::from_utf8(&bytes[*at..end]).expect("text");
        *at = end + 1;
        text.split(' ').map(str::to_owned).collect()
    };
    let number = |word: &String| word.parse::<usize>().expect("a number");
    let header = line(&mut at);
    let binary = header[0] == "aig";
    let counts: Vec<usize> = header[1..].iter().map(number).collect();
    let [most, i, l, o, a] = counts[..] else {
        panic!("five counts")
    };
    assert_eq!((i, l), (inputs.len(), state.len()));
    let mut values = vec![0u64; 2 * (most + 1)];
    let set = |values: &mut Vec<u64>, literal: usize, word: u64| {
        values[literal] = word;
        values[literal + 1] = !word;
    };
    set(&mut values, 0, 0);
    for (k, &word) in inputs.iter().enumerate() {
        let literal = if binary {
            2 * (k + 1)
        } else {
            number(&line(&mut at)[0])
        };
        set(&mut values, literal, word);
    }
    let mut next = Vec::new();
    for (k, &word) in state.iter().enumerate() {
        let words = line(&mut at);
        let own = if binary {
            2 * (i + k + 1)
        } else {
            number(&words[0])
        };
        next.push(number(&words[usize::from(!binary)]));
        set(&mut values, own, word);
    }
    let outputs: Vec<usize> = (0..o).map(|_| number(&line(&mut at)[0])).collect();
    for k in 0..a {
        let (left, right) = if binary {
            let left = 2 * (i + l + k + 1);
            let high = left - delta(bytes, &mut at);
            (left, [high, high - delta(bytes, &mut at)])
        } else {
            let words: Vec<usize> = line(&mut at).iter().map(number).collect();
            (words[0], [words[1], words[2]])
        };
        assert!(
            left > right[0] && right[0] >= right[1],
            "ANDs stand in order"
        );
        let word = values[right[0]] & values[right[1]];
        set(&mut values, left, word);
    }
    let read = |literals: Vec<usize>| literals.into_iter().map(|l| values[l]).collect();
    (read(outputs), read(next))
}

fn delta(bytes: &[u8], at: &mut usize) -> usize {
    let (mut value, mut shift) = (0, 0);
    loop {
        let byte = bytes[*at];
        *at += 1;
        value |= usize::from(byte & 0x7F) << shift;
        shift += 7;
        if byte & 0x80 == 0 {
            return value;
        }
    }
}
