//! How chains are told to be built, against adders written down from their
//! publications: `support/published.rs` names them. The places of the prefix
//! networks in the taxonomy are the published ones (Harris 2003).

mod generators;
#[path = "support/published.rs"]
mod published;
#[path = "support/recognition.rs"]
mod recognition;

use carrywise::chain::{BuiltAs, Chain};
use generators::{
    Aig, Architecture, Cell, Cells, Circuit, Generated, Kind, Truth, Word, disguise, mapped,
};
use published::Published;
use recognition::*;
use std::collections::BTreeMap;

/// An adder alone.
fn adder(built: Published, bits: usize, carry_in: bool, carry_out: bool) -> Generated {
    let mut c = Circuit::new("adder");
    let (a, b) = (c.input_bus("a", bits), c.input_bus("b", bits));
    let cin = carry_in.then(|| c.input("cin"));
    let (sums, out) = built.add(&mut c, &a, &b, cin);
    c.output_bus(&sums, "s");
    if carry_out {
        c.output(out, "cout");
    }
    let truth = Truth {
        kind: Kind::Adder,
        a,
        b,
        carry_in: cin,
        sums,
        carry_out: carry_out.then_some(out),
        borrow: false,
        architecture: Architecture::KoggeStone,
        mode: None,
        plus_one: false,
    };
    let label = format!("{built:?} of {bits} bits, carry-in {carry_in}, carry-out {carry_out}");
    Generated::new(label, c, vec![truth])
}

fn whole(label: &str, bytes: Vec<u8>, bits: usize) -> Option<Chain> {
    let netlist = parse(label, bytes);
    let found = recognise(&netlist);
    found
        .chains
        .into_iter()
        .find(|chain| chain.positions.len() == bits)
}

/// What adders of one architecture were told to be.
#[derive(Default)]
struct Tally {
    told: BTreeMap<&'static str, usize>,
    missed: usize,
}

fn table(label: &str, tallies: &[(Published, Tally)]) -> (usize, usize) {
    let (mut right, mut all) = (0, 0);
    for (built, tally) in tallies {
        let told: Vec<String> = tally.told.iter().map(|(w, n)| format!("{w} {n}")).collect();
        println!(
            "{label}: {built:?}: {}; not recognised whole {}",
            told.join(", "),
            tally.missed
        );
        right += tally.told.get(built.word()).copied().unwrap_or(0);
        all += tally.told.values().sum::<usize>();
    }
    println!("{label}: {right} of {all} right");
    (right, all)
}

fn told(form: &str, make: impl Fn(&Generated) -> Vec<u8>) -> (usize, usize) {
    let mut tallies = Vec::new();
    for built in Published::ALL {
        let mut tally = Tally::default();
        for bits in [8, 16, 24, 32] {
            for choice in 0..4 {
                let (carry_in, carry_out) = (choice & 1 == 1, choice & 2 == 2);
                if matches!(built, Published::Skip(_)) && bits == 8 && !carry_out {
                    // The only block that could be passed has lost its top.
                    continue;
                }
                let word = adder(built, bits, carry_in, carry_out);
                match whole(&word.label, make(&word), bits) {
                    Some(chain) => {
                        let told = chain.built_as.word();
                        if told != built.word() {
                            println!("{form}: {}: {told}: {:?}", word.label, chain.construction);
                        }
                        *tally.told.entry(told).or_default() += 1;
                    }
                    None => tally.missed += 1,
                }
            }
        }
        tallies.push((built, tally));
    }
    table(form, &tallies)
}

#[test]
fn published_adders_add() {
    for built in Published::ALL {
        for bits in [5, 8, 16, 17] {
            for choice in 0..4 {
                let word = adder(built, bits, choice & 1 == 1, choice & 2 == 2);
                word.check(8).unwrap();
            }
        }
    }
}

#[test]
fn gates_are_told_as_they_were_built() {
    let (right, all) = told("gates", |word| word.circuit.blif().into_bytes());
    assert!(all >= 150 && 100 * right >= 95 * all, "{right} of {all}");
}

#[test]
fn and_inverter_graphs_are_told_as_they_were_built() {
    let (right, all) = told("graph", |word| Aig::of(&word.circuit).aig());
    assert!(all >= 120 && 100 * right >= 95 * all, "{right} of {all}");
}

/// The same of the architectures that the corpus of recognition is made of. After
/// mapping into covers an architecture survives in part: what a cover swallows is
/// on no net, so fewer have to be right.
#[test]
fn covers_are_told_as_they_were_built() {
    let mut counts: BTreeMap<(&'static str, usize), BTreeMap<&'static str, usize>> =
        BTreeMap::new();
    for architecture in Architecture::every_fast() {
        for choice in 0..2 {
            let word = Word {
                architecture,
                carry_in: choice == 1,
                ..Word::new(Kind::Adder, 16, Cell::PropagateXor)
            };
            let word = word.generate();
            for inputs in [0, 4, 6] {
                let circuit = match inputs {
                    0 => word.circuit.clone(),
                    _ => mapped(&word.circuit, Cells::Covers(inputs)),
                };
                let found = whole(&word.label, circuit.blif().into_bytes(), 16);
                let told = found.map_or("(not whole)", |chain| chain.built_as.word());
                let counts = counts.entry((architecture.word(), inputs)).or_default();
                *counts.entry(told).or_default() += 1;
            }
        }
    }
    let (mut right, mut all) = (0, 0);
    for ((architecture, inputs), told) in &counts {
        println!("{architecture}, covers of {inputs} inputs: {told:?}");
        let wanted = match *architecture {
            "flat-lookahead" | "group-lookahead" => "lookahead",
            "skip" => "skip",
            "carry-select" | "carry-select-growing" => "select",
            "carry-increment" => "increment",
            "conditional-sum" => "conditional-sum",
            _ => "prefix",
        };
        if *inputs == 0 {
            right += told.get(wanted).copied().unwrap_or(0);
            all += told.values().sum::<usize>() - told.get("(not whole)").copied().unwrap_or(0);
        }
    }
    assert!(all >= 20 && 100 * right >= 95 * all, "{right} of {all}");
}

#[test]
fn disguised_gates_are_told_as_they_were_built() {
    let (right, all) = told("disguised", |word| {
        let mut circuit = word.circuit.clone();
        disguise(&mut circuit, 7);
        circuit.blif().into_bytes()
    });
    assert!(all >= 150 && 100 * right >= 95 * all, "{right} of {all}");
}

#[test]
fn prefix_networks_have_their_published_place() {
    for built in Published::ALL {
        let Some(place) = built.place() else { continue };
        let word = adder(built, 16, false, true);
        let chain = whole(&word.label, word.circuit.blif().into_bytes(), 16).expect("found");
        assert_eq!(chain.built_as, BuiltAs::Prefix, "{built:?}");
        let told = chain.construction.taxonomy.expect("a place");
        let told = (told.extra_levels, told.fan_out, told.tracks);
        assert_eq!(told, place, "{built:?}: {:?}", chain.construction);
    }
}

#[test]
fn the_nearest_scheme_is_named() {
    let names = [
        (Published::Sklansky, "sklansky"),
        (Published::KoggeStone, "kogge-stone"),
        (Published::BrentKung, "brent-kung"),
        (Published::HanCarlson, "han-carlson"),
        (Published::LadnerFischer, "ladner-fischer"),
        (Published::FlatLookahead, "flat-lookahead"),
        (Published::GroupLookahead(4), "group-lookahead"),
        (Published::Ripple, "ripple"),
    ];
    for (built, name) in names {
        for choice in 0..4 {
            let word = adder(built, 16, choice & 1 == 1, choice & 2 == 2);
            let chain = whole(&word.label, word.circuit.blif().into_bytes(), 16).expect("found");
            let nearest = chain.construction.nearest;
            assert_eq!(
                nearest,
                Some(name),
                "{}: {:?}",
                word.label,
                chain.construction
            );
        }
    }
    let word = adder(Published::GroupLookahead(4), 16, true, true);
    let chain = whole(&word.label, word.circuit.blif().into_bytes(), 16).expect("found");
    assert_eq!(chain.construction.group, Some(4));
}

/// Cells and levels as Harris 2003 draws them for 16 positions: Kogge–Stone 49
/// cells in 4 levels, Sklansky 32 in 4, Brent–Kung 26 in 6.
#[test]
fn cells_and_levels_are_counted() {
    let published = [
        (Published::KoggeStone, 49, 4),
        (Published::Sklansky, 32, 4),
        (Published::BrentKung, 26, 6),
        (Published::Ripple, 15, 15),
    ];
    for (built, cells, levels) in published {
        let word = adder(built, 16, false, true);
        let chain = whole(&word.label, word.circuit.blif().into_bytes(), 16).expect("found");
        let told = (chain.construction.cells, chain.construction.levels);
        assert_eq!(told, (Some(cells), Some(levels)), "{built:?}");
    }
}
