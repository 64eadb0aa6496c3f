//! The corpus: every kind × architecture × width × disguise that the generators
//! know, as seeded cases, and the negatives. A case is what is written to a
//! file, how its nets are evaluated without the crate, and the truth in terms of
//! a reference circuit with the same ports.

use super::aig::Aig;
use super::arrays::{Reduction, multiplier, squarer};
use super::cells::Cell;
use super::circuit::Circuit;
use super::comparators::{Comparator, Shape};
use super::disguise::disguise;
use super::embedding::{
    Extension, accumulator, adder_subtractor, counter, gated_operands, selected_sums,
    series_adders, with_overflow,
};
use super::mapper::{Cells, mapped};
use super::negatives;
use super::random::Random;
use super::reshape::{complemented, in_blocks, reassociated};
use super::rows::{Oddity, both_sums, cut_short, divider, maximum, odd_word, square_root};
use super::truth::{Generated, Kind};
use super::words::{Architecture, Word};

/// What was done to a circuit before it was written.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Disguise {
    /// Nothing.
    Plain,
    /// Renamed, gates and ports shuffled.
    Renamed,
    /// Inner nets complemented, then renamed and shuffled.
    Complemented,
    /// Gates spread over models of a hierarchy.
    Blocks,
    /// As AND/inverters.
    AndInverters,
    /// As AND/inverters re-associated, with other XOR and majority forms.
    Reassociated,
    /// As and-or-invert cells.
    AndOrInvert,
    /// As covers of so many inputs.
    Covers(usize),
}

impl Disguise {
    /// Every disguise.
    pub const ALL: [Self; 10] = [
        Self::Plain,
        Self::Renamed,
        Self::Complemented,
        Self::Blocks,
        Self::AndInverters,
        Self::Reassociated,
        Self::AndOrInvert,
        Self::Covers(4),
        Self::Covers(5),
        Self::Covers(6),
    ];

    /// What the figures are kept by.
    pub fn group(self) -> &'static str {
        match self {
            Self::Plain | Self::Renamed | Self::Complemented | Self::Blocks => "gate level",
            Self::AndInverters | Self::Reassociated => "AND/inverters",
            _ => "mapped",
        }
    }

    /// Whether the architecture is still there to be told.
    pub fn keeps_architecture(self) -> bool {
        self.group() == "gate level"
    }

    /// A word for tables.
    pub fn word(self) -> String {
        match self {
            Self::Covers(width) => format!("covers of {width}"),
            Self::AndInverters => "AND/inverters".to_owned(),
            Self::AndOrInvert => "and-or-invert".to_owned(),
            other => format!("{other:?}").to_lowercase(),
        }
    }
}

/// What is written, in the form that evaluates it.
#[derive(Clone, Debug)]
pub enum Form {
    /// Flat BLIF.
    Flat(Circuit),
    /// BLIF with a hierarchy, nets keep their names.
    Blocks(Circuit, usize),
    /// Binary AIGER.
    Graph(Aig),
}

impl Form {
    /// The circuit in a form.
    pub fn of(circuit: &Circuit, way: Disguise, seed: u64) -> Self {
        match way {
            Disguise::Plain | Disguise::Renamed => Self::Flat(circuit.clone()),
            Disguise::Complemented => Self::Flat(complemented(circuit, seed)),
            Disguise::Blocks => {
                let size = 5 + (seed % 24) as usize;
                Self::Blocks(circuit.clone(), size)
            }
            Disguise::AndInverters => Self::Graph(Aig::of(circuit)),
            Disguise::Reassociated => Self::Graph(reassociated(circuit, seed)),
            Disguise::AndOrInvert => Self::Flat(mapped(circuit, Cells::AndOrInvert)),
            Disguise::Covers(width) => Self::Flat(mapped(circuit, Cells::Covers(width))),
        }
    }

    /// The file.
    pub fn bytes(&self) -> Vec<u8> {
        match self {
            Self::Flat(circuit) => circuit.blif().into_bytes(),
            Self::Blocks(circuit, size) => in_blocks(circuit, *size).into_bytes(),
            Self::Graph(graph) => graph.aig(),
        }
    }

    /// Gates of the file.
    pub fn gates(&self) -> usize {
        match self {
            Self::Flat(circuit) | Self::Blocks(circuit, _) => circuit.gate_count(),
            Self::Graph(graph) => graph.ands.len(),
        }
    }

    /// The value of every net on 64 patterns, by the name the file gives it;
    /// an AIGER variable without symbol is `v` and its number.
    pub fn values(&self, inputs: &[u64], state: &[u64]) -> Vec<(String, u64)> {
        match self {
            Self::Flat(circuit) | Self::Blocks(circuit, _) => {
                let values = circuit.evaluate(inputs, state);
                let nets = values.into_iter().enumerate();
                nets.map(|(net, word)| (circuit.name_of(super::Net(net as u32)), word))
                    .collect()
            }
            Self::Graph(graph) => {
                let values = graph.evaluate(inputs, state);
                let states = graph.registers.iter().map(|register| &register.0);
                let symbols: Vec<&String> = graph.inputs.iter().chain(states).collect();
                let variables = values.into_iter().enumerate().skip(1);
                variables
                    .map(|(v, word)| match symbols.get(v - 1) {
                        Some(&name) => (name.clone(), word),
                        None => (format!("v{v}"), word),
                    })
                    .collect()
            }
        }
    }
}

/// One case of the corpus.
#[derive(Clone, Debug)]
pub struct Case {
    /// What the word computes, for tables.
    pub kind: &'static str,
    /// How it is built, for tables.
    pub architecture: &'static str,
    /// Positions of the word.
    pub bits: usize,
    /// What was done to it.
    pub disguise: Disguise,
    /// The truth, with the ports of the file.
    pub reference: Generated,
    /// What is written.
    pub form: Form,
}

impl Case {
    fn new(recipe: &Recipe, bits: usize, disguised: Disguise, seed: u64) -> Self {
        let mut reference = (recipe.make)(bits, seed);
        if matches!(disguised, Disguise::Renamed | Disguise::Complemented) {
            disguise(&mut reference.circuit, seed);
        }
        let form = Form::of(&reference.circuit, disguised, seed);
        Self {
            kind: recipe.kind,
            architecture: recipe.architecture,
            bits,
            disguise: disguised,
            reference,
            form,
        }
    }

    /// A line for messages.
    pub fn label(&self) -> String {
        format!("{} as {}", self.reference.label, self.disguise.word())
    }
}

/// One kind in one architecture, at any width.
pub struct Recipe {
    /// What it computes.
    pub kind: &'static str,
    /// How it is built.
    pub architecture: &'static str,
    /// Whether its size grows faster than its width, so that it is kept small.
    widest: usize,
    make: Box<dyn Fn(usize, u64) -> Generated>,
}

fn recipe(
    kind: &'static str,
    architecture: &'static str,
    widest: usize,
    make: impl Fn(usize, u64) -> Generated + 'static,
) -> Recipe {
    Recipe {
        kind,
        architecture,
        widest,
        make: Box::new(make),
    }
}

/// A word whose carry-in and carry-out come and go with the seed.
fn word(kind: Kind, architecture: Architecture, bits: usize, seed: u64) -> Word {
    let cell = match architecture {
        Architecture::Ripple(cell) => cell,
        _ => Cell::PropagateXor,
    };
    Word {
        architecture,
        carry_in: seed & 1 == 1,
        carry_out: seed & 2 == 2,
        ..Word::new(kind, bits, cell)
    }
}

/// Every recipe; the order never changes.
pub fn recipes() -> Vec<Recipe> {
    let mut all = Vec::new();
    let ripples = Cell::ALL.map(Architecture::Ripple);
    let words = [("adder", Kind::Adder), ("subtractor", Kind::Subtractor)];
    for (name, kind) in words {
        for architecture in ripples.into_iter().chain(Architecture::every_fast()) {
            let widest = match architecture {
                Architecture::FlatLookahead => 24,
                _ => 128,
            };
            let make = move |bits, seed| word(kind, architecture, bits, seed).generate();
            all.push(recipe(name, architecture.word(), widest, make));
        }
    }
    for (name, kind) in [
        ("incrementer", Kind::Incrementer),
        ("decrementer", Kind::Decrementer),
    ] {
        for architecture in ripples {
            let make = move |bits, seed: u64| {
                let borrow = kind == Kind::Decrementer && seed & 4 == 4;
                let word = word(kind, architecture, bits, seed);
                Word { borrow, ..word }.generate()
            };
            all.push(recipe(name, "ripple", 128, make));
        }
    }
    for cell in Cell::ALL {
        let shape = Shape::ALL[cell as usize % Shape::ALL.len()];
        all.push(recipe(
            "subtractor",
            "ripple-borrow",
            128,
            move |bits, seed| {
                let word = word(Kind::Subtractor, Architecture::Ripple(cell), bits, seed);
                Word {
                    borrow: true,
                    ..word
                }
                .generate()
            },
        ));
        all.push(recipe("adder-subtractor", "ripple", 128, move |bits, _| {
            adder_subtractor(bits, cell)
        }));
        all.push(recipe("accumulator", "ripple", 128, move |bits, seed| {
            let extension = [Extension::Zero, Extension::Sign][seed as usize % 2];
            let operand = if seed & 4 == 4 {
                bits
            } else {
                bits.div_ceil(2)
            };
            accumulator(bits, operand, extension, cell)
        }));
        all.push(recipe("counter", "ripple", 128, move |bits, seed| {
            counter(bits, seed & 1 == 1, cell)
        }));
        all.push(recipe("adder in series", "ripple", 64, move |bits, _| {
            series_adders(bits, 3, cell)
        }));
        all.push(recipe(
            "adder with overflow",
            "ripple",
            128,
            move |bits, _| with_overflow(bits, cell),
        ));
        all.push(recipe("divider row", "ripple", 16, move |bits, seed| {
            divider(bits, seed & 1 == 1, cell)
        }));
        all.push(recipe(
            "square root row",
            "ripple",
            16,
            move |bits, seed| square_root(bits, seed & 1 == 1, cell),
        ));
        all.push(recipe("maximum", shape_word(shape), 128, move |bits, _| {
            maximum(bits, shape)
        }));
    }
    let mixed = [
        Architecture::Ripple(Cell::PropagateXor),
        Architecture::Ripple(Cell::Nand),
        Architecture::GroupLookahead(4),
        Architecture::Sklansky,
        Architecture::BrentKung,
        Architecture::CarrySelect(4),
    ];
    for architecture in mixed {
        let name = architecture.word();
        all.push(recipe("a+b and a+b+1", name, 64, move |bits, _| {
            both_sums(bits, architecture)
        }));
        all.push(recipe("adder cut short", name, 128, move |bits, seed| {
            let (low, high) = [(0, 2), (2, 0), (3, 2), (1, 1)][seed as usize % 4];
            let word = word(Kind::Adder, architecture, bits + low + high, seed);
            cut_short(word, low, high)
        }));
        all.push(recipe("gated operands", name, 128, move |bits, seed| {
            gated_operands(word(Kind::Adder, architecture, bits, seed))
        }));
        all.push(recipe("selected sums", name, 128, move |bits, seed| {
            selected_sums(word(Kind::Adder, architecture, bits, seed))
        }));
        for oddity in Oddity::ALL {
            let kind = match oddity {
                Oddity::PartlyConstant => "partly constant",
                Oddity::Shared => "operand shared",
                Oddity::InvertedResults => "inverted results",
                Oddity::Embedded => "embedded",
            };
            all.push(recipe(kind, name, 128, move |bits, seed| {
                odd_word(word(Kind::Adder, architecture, bits, seed), oddity, seed)
            }));
        }
    }
    for way in Reduction::ALL {
        let name = match way {
            Reduction::Array => "array",
            Reduction::CarrySave => "carry-save",
            Reduction::Wallace => "wallace",
            Reduction::Dadda => "dadda",
        };
        all.push(recipe("product", name, 16, move |bits, _| {
            multiplier(bits, bits, way, Cell::PropagateXor)
        }));
        all.push(recipe("product", name, 16, move |bits, seed| {
            let rows = 4 + (seed % 8) as usize;
            multiplier(rows, bits, way, Cell::AndInverter)
        }));
        all.push(recipe("product", name, 16, move |bits, _| {
            squarer(bits, way, Cell::MajorityGates)
        }));
    }
    for comparator in Comparator::every(0) {
        let kind = match (comparator.relation, comparator.signed) {
            (super::Relation::Equal, _) => "equality",
            (_, false) => "comparator",
            (_, true) => "signed comparator",
        };
        all.push(recipe(
            kind,
            shape_word(comparator.shape),
            128,
            move |bits, _| Comparator { bits, ..comparator }.generate(),
        ));
    }
    all
}

fn shape_word(shape: Shape) -> &'static str {
    if shape.is_chain() { "ripple" } else { "tree" }
}

/// Widths the corpus goes through.
pub const WIDTHS: [usize; 12] = [4, 5, 6, 8, 11, 12, 16, 20, 24, 32, 48, 64];

/// Every recipe in every disguise, at one width each, which changes from case to
/// case; every `stride`-th of them. The widest, 128, comes once per disguise.
pub fn cases(seed: u64, stride: usize, widest: usize) -> impl Iterator<Item = Case> {
    let mut random = Random::new(seed);
    let recipes = recipes();
    let mut plan: Vec<(usize, Disguise, usize, u64)> = Vec::new();
    for at in 0..recipes.len() {
        for (d, disguised) in Disguise::ALL.into_iter().enumerate() {
            let width = WIDTHS[(at * 7 + d * 5 + random.below(3)) % WIDTHS.len()];
            let wide = (at + d) % 40 == 0;
            let bits = if wide { 128 } else { width };
            let limit = recipes[at].widest.min(widest);
            let bits = if bits <= limit {
                bits
            } else {
                4 + bits % (limit - 3)
            };
            plan.push((at, disguised, bits, random.word() >> 8));
        }
    }
    // So that every n-th case is a fair sample of kinds and disguises.
    random.shuffle(&mut plan);
    plan.into_iter()
        .step_by(stride)
        .map(move |(at, disguised, bits, seed)| Case::new(&recipes[at], bits, disguised, seed))
}

/// Circuits in which nothing is to be found, in every disguise.
pub fn negative_cases(seed: u64) -> impl Iterator<Item = Case> {
    let mut circuits = negatives::all();
    circuits.extend(negatives::more());
    circuits.into_iter().flat_map(move |circuit| {
        Disguise::ALL.map(|way| Case {
            kind: "negative",
            architecture: "none",
            bits: 0,
            disguise: way,
            form: Form::of(&circuit, way, seed),
            reference: Generated::new(circuit.name.clone(), circuit.clone(), Vec::new()),
        })
    })
}
