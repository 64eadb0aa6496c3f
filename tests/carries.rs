//! Carries without sums: comparators of every relation, and rows whose sums are
//! gated away. Circuits are made here gate by gate from the relation between the
//! carry out of `a + ~b + c` and the comparison (two's complement, common
//! practice, no source) and held to integer arithmetic.

mod generators;
#[path = "support/recognition.rs"]
mod recognition;
mod support;

use carrywise::chain::{Chain, Kind, Relation};
use carrywise::netlist::{Bit, Netlist};
use generators::{Aig, Circuit, Function, Net, Random, disguise};
use recognition::*;

/// How the carry of one bit is made.
#[derive(Clone, Copy, Debug)]
enum Cell {
    /// `a·b + v·(a + b)`.
    SumOfProducts,
    /// `(a ⊕ b)·v + a·b`.
    PropagateXor,
    /// One cover of three inputs.
    Cover,
    /// `v·(a + b) + a·b` with the product made first: `(a + b)·(v + a·b)`.
    ProductOfSums,
}

const CELLS: [Cell; 4] = [
    Cell::SumOfProducts,
    Cell::PropagateXor,
    Cell::Cover,
    Cell::ProductOfSums,
];

fn carry(c: &mut Circuit, cell: Cell, a: Net, b: Net, v: Net) -> Net {
    match cell {
        Cell::SumOfProducts => {
            let g = c.and(a, b);
            let p = c.or(a, b);
            let through = c.and(p, v);
            c.or(g, through)
        }
        Cell::PropagateXor => {
            let g = c.and(a, b);
            let p = c.xor(a, b);
            let through = c.and(p, v);
            c.or(g, through)
        }
        Cell::Cover => c.gate(Function::Cover(&["11-", "1-1", "-11"]), &[a, b, v]),
        Cell::ProductOfSums => {
            let g = c.and(a, b);
            let p = c.or(a, b);
            let inner = c.or(g, v);
            c.and(p, inner)
        }
    }
}

/// One comparator to make.
#[derive(Clone, Copy, Debug)]
struct Compare {
    bits: usize,
    relation: Relation,
    signed: bool,
    cell: Cell,
}

impl Compare {
    /// A ripple comparator of `level` and `limit`, the result at `y`.
    fn circuit(self) -> Circuit {
        let mut c = Circuit::new("compare");
        let a = c.input_bus("level", self.bits);
        let b = c.input_bus("limit", self.bits);
        let (mut carry_out, inverted) = match self.relation {
            Relation::Greater => (c.gate(Function::Zero, &[]), false),
            Relation::LessOrEqual => (c.gate(Function::Zero, &[]), true),
            Relation::GreaterOrEqual => (c.gate(Function::One, &[]), false),
            Relation::Less => (c.gate(Function::One, &[]), true),
        };
        for i in 0..self.bits {
            let (x, y) = if self.signed && i + 1 == self.bits {
                (b[i], a[i])
            } else {
                (a[i], b[i])
            };
            let y = c.not(y);
            carry_out = carry(&mut c, self.cell, x, y, carry_out);
        }
        if inverted {
            carry_out = c.not(carry_out);
        }
        c.output(carry_out, "y");
        c
    }

    fn holds(self, a: u64, b: u64) -> bool {
        let sign = if self.signed { 1 << (self.bits - 1) } else { 0 };
        let (a, b) = (a ^ sign, b ^ sign);
        match self.relation {
            Relation::Less => a < b,
            Relation::LessOrEqual => a <= b,
            Relation::Greater => a > b,
            Relation::GreaterOrEqual => a >= b,
        }
    }
}

const RELATIONS: [Relation; 4] = [
    Relation::Less,
    Relation::LessOrEqual,
    Relation::Greater,
    Relation::GreaterOrEqual,
];

fn all(bits: usize) -> impl Iterator<Item = Compare> {
    RELATIONS.into_iter().flat_map(move |relation| {
        [false, true].into_iter().flat_map(move |signed| {
            CELLS.into_iter().map(move |cell| Compare {
                bits,
                relation,
                signed,
                cell,
            })
        })
    })
}

/// The circuits made here compare as integers do.
#[test]
fn generated_comparators_compare() {
    for compare in all(6) {
        let circuit = compare.circuit();
        let mut random = Random::new(3);
        let inputs: Vec<u64> = circuit.inputs.iter().map(|_| random.word()).collect();
        let values = circuit.evaluate(&inputs, &[]);
        let told = values[circuit.outputs[0].index()];
        for lane in 0..64 {
            let word = |bus: &[u64]| {
                let bits = bus.iter().enumerate();
                bits.map(|(i, w)| (w >> lane & 1) << i).sum::<u64>()
            };
            let (a, b) = (word(&inputs[..6]), word(&inputs[6..]));
            assert_eq!(told >> lane & 1 == 1, compare.holds(a, b), "{compare:?}");
        }
    }
}

/// The comparison as told, in terms of the circuit's own ports: the first
/// operand may be either of the two.
fn told(netlist: &Netlist, chain: &Chain) -> (usize, Relation, bool) {
    let compared = chain.comparison.expect("a comparator");
    let first = chain.positions[0].a.signal().expect("a net");
    let swapped = netlist.signal_name(first).contains("limit");
    let relation = match (compared.relation, swapped) {
        (relation, false) => relation,
        (Relation::Less, true) => Relation::Greater,
        (Relation::LessOrEqual, true) => Relation::GreaterOrEqual,
        (Relation::Greater, true) => Relation::Less,
        (Relation::GreaterOrEqual, true) => Relation::LessOrEqual,
    };
    (chain.positions.len(), relation, compared.signed)
}

#[test]
fn finds_ripple_comparators_of_every_relation() {
    for bits in [5, 16, 33] {
        for compare in all(bits) {
            let circuit = compare.circuit();
            for bytes in [circuit.blif().into_bytes(), Aig::of(&circuit).aig()] {
                let netlist = parse("compare", bytes);
                let found = recognise(&netlist);
                check_theorems("compare", &netlist, &found.chains);
                let [chain] = &found.chains[..] else {
                    panic!("{compare:?}: {} chains", found.chains.len())
                };
                assert_eq!(chain.kind, Kind::Comparator, "{compare:?}");
                let expected = (bits, compare.relation, compare.signed);
                assert_eq!(told(&netlist, chain), expected, "{compare:?}");
                assert_eq!(found.unproven, []);
            }
        }
    }
}

/// Without names and order a sign cannot be told from an exchanged bit; width
/// and truth stay.
#[test]
fn finds_disguised_comparators_at_full_width() {
    for (seed, compare) in all(12).enumerate() {
        let mut circuit = compare.circuit();
        disguise(&mut circuit, seed as u64);
        let netlist = parse("compare", circuit.blif().into_bytes());
        let found = recognise(&netlist);
        check_theorems("compare", &netlist, &found.chains);
        let [chain] = &found.chains[..] else {
            panic!("{compare:?}: {} chains", found.chains.len())
        };
        assert_eq!((chain.kind, chain.positions.len()), (Kind::Comparator, 12));
    }
}

/// A row of a restoring divider (any textbook on computer arithmetic): the
/// difference is kept where it is not negative, so its bits are gated by the
/// last carry and stand on no net of their own.
#[test]
fn finds_the_borrow_of_a_restoring_row() {
    for bits in [8, 24] {
        let mut c = Circuit::new("restoring_row");
        let r = c.input_bus("rest", bits);
        let d = c.input_bus("divisor", bits);
        let mut v = c.gate(Function::One, &[]);
        let mut below = Vec::new();
        for i in 0..bits {
            let y = c.not(d[i]);
            below.push((y, v));
            v = carry(&mut c, Cell::SumOfProducts, r[i], y, v);
        }
        c.output(v, "q");
        for (i, (y, from)) in below.into_iter().enumerate() {
            // rest ⊕ q·(divisor ⊕ borrow), in one cover.
            let rows = &["0110", "0101", "1111", "1100", "10--", "1-00"];
            let kept = c.gate(Function::Cover(rows), &[r[i], v, y, from]);
            c.output(kept, &format!("next[{i}]"));
        }
        let netlist = parse("row", c.blif().into_bytes());
        let found = recognise(&netlist);
        check_theorems("row", &netlist, &found.chains);
        let [chain] = &found.chains[..] else {
            panic!("{} chains", found.chains.len())
        };
        assert_eq!(chain.kind, Kind::Comparator);
        let expected = (bits, Relation::GreaterOrEqual, false);
        assert_eq!(told_by(&netlist, chain, "divisor"), expected);
    }
}

fn told_by(netlist: &Netlist, chain: &Chain, second: &str) -> (usize, Relation, bool) {
    let compared = chain.comparison.expect("a comparator");
    let a = chain.positions[0].a.signal().expect("a net");
    assert!(!netlist.signal_name(a).contains(second));
    (chain.positions.len(), compared.relation, compared.signed)
}

/// The fixture's threshold comparator (tests/generators/gauge.rs): signed, 16
/// bits, `too_high` when the level is above the alarm's.
#[test]
fn finds_the_threshold_of_the_tide_logger() {
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/tide_logger.blif");
    let netlist = parse("tide_logger", std::fs::read(path).expect("the fixture"));
    let found = recognise(&netlist);
    let chain = found.chains.iter().find(|c| c.kind == Kind::Comparator);
    let chain = chain.expect("a comparator");
    let compared = chain.comparison.expect("a comparator");
    let name = |bit: Bit| netlist.signal_name(bit.signal().expect("a net"));
    assert_eq!(name(chain.positions[0].a), "level[0]");
    assert_eq!(netlist.signal_name(compared.result), "too_high");
    assert_eq!(
        (chain.positions.len(), compared.relation, compared.signed),
        (16, Relation::Greater, true)
    );
}

/// EPFL `sqrt` (Amarù, Gaillardon, De Micheli, IWLS 2015; 128 bits in, 64 out):
/// the rows of the pencil-and-paper method, each comparing what is left with the
/// trial `4·root + 1`. The row that fixes root bit `k` compares `64 − k + 2` bits
/// of which the lowest are constant or one gate, so the proven chains are a few
/// bits narrower.
#[test]
fn finds_the_rows_of_the_public_square_root() {
    let Some(folder) = support::datasets() else {
        return;
    };
    let bytes = std::fs::read(folder.join("epfl/sqrt.aig")).expect("the circuit is there");
    let netlist = parse("sqrt", bytes);
    let found = recognise(&netlist);
    check_theorems("sqrt", &netlist, &found.chains);
    let widths: Vec<usize> = found.chains.iter().map(|c| c.positions.len()).collect();
    assert!(found.chains.iter().all(|c| c.kind == Kind::Comparator));
    assert!(widths.len() >= 55, "{widths:?}");
    assert!(widths[0] >= 60, "{widths:?}");
}
