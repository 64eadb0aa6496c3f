//! Arithmetic words: one description that gives a stand-alone block with ports,
//! or places the word among other logic.

use super::cells::{Addend, Carry, Cell};
use super::circuit::{Circuit, Function, Net};
use super::fast;
use super::truth::{Generated, Kind, Truth};

/// How the carries of a word are made. All but ripple are for adders and for
/// subtractors in carry form.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Architecture {
    /// Cell by cell.
    Ripple(Cell),
    /// Two-level lookahead inside groups of so many bits, and again over groups.
    GroupLookahead(usize),
    /// The prefix tree of Kogge and Stone, 1973.
    KoggeStone,
    /// Blocks computed for both carries, selected by the real one.
    CarrySelect(usize),
    /// Ripple blocks with a bypass.
    CarrySkip(usize),
    /// Every carry as one sum of products over all lower positions.
    FlatLookahead,
    /// Select blocks that grow by one from block to block, from two.
    CarrySelectGrowing,
    /// Blocks added without a carry, then incremented (Tyagi 1993).
    Increment(usize),
    /// Halves chosen by halves (Sklansky 1960, conditional sum).
    ConditionalSum,
    /// The divide-and-conquer prefix tree (Sklansky 1960).
    Sklansky,
    /// Brent and Kung 1982.
    BrentKung,
    /// Han and Carlson 1987: pairs, Kogge and Stone between, one row behind.
    HanCarlson,
    /// Ladner and Fischer 1980 with so many levels to spare.
    LadnerFischer(usize),
    /// Knowles 1999; the fan-out doubles from row to row up to this.
    Knowles(usize),
    /// Kogge and Stone over groups of so many bits, ripple inside.
    SparsePrefix(usize),
}

impl Architecture {
    /// Every architecture but ripple, at the sizes the corpus uses.
    pub fn every_fast() -> Vec<Self> {
        vec![
            Self::FlatLookahead,
            Self::GroupLookahead(4),
            Self::GroupLookahead(3),
            Self::CarrySkip(4),
            Self::CarrySelect(4),
            Self::CarrySelectGrowing,
            Self::Increment(4),
            Self::ConditionalSum,
            Self::Sklansky,
            Self::KoggeStone,
            Self::BrentKung,
            Self::HanCarlson,
            Self::LadnerFischer(1),
            Self::Knowles(2),
            Self::SparsePrefix(4),
        ]
    }

    /// A word for tables.
    pub fn word(self) -> &'static str {
        match self {
            Self::Ripple(_) => "ripple",
            Self::FlatLookahead => "flat-lookahead",
            Self::GroupLookahead(_) => "group-lookahead",
            Self::CarrySkip(_) => "skip",
            Self::CarrySelect(_) => "carry-select",
            Self::CarrySelectGrowing => "carry-select-growing",
            Self::Increment(_) => "carry-increment",
            Self::ConditionalSum => "conditional-sum",
            Self::Sklansky => "sklansky",
            Self::KoggeStone => "kogge-stone",
            Self::BrentKung => "brent-kung",
            Self::HanCarlson => "han-carlson",
            Self::LadnerFischer(_) => "ladner-fischer",
            Self::Knowles(_) => "knowles",
            Self::SparsePrefix(_) => "sparse-prefix",
        }
    }
}

/// A word to be made.
#[derive(Clone, Copy, Debug)]
pub struct Word {
    /// What it computes; the role of the carry-in is told at [`Kind`].
    pub kind: Kind,
    /// Number of positions.
    pub bits: usize,
    /// How it is built.
    pub architecture: Architecture,
    /// Whether it has a carry-in (an enable, of a counter).
    pub carry_in: bool,
    /// Whether its carry-out is read.
    pub carry_out: bool,
    /// Whether carries are borrows (subtractors, decrementers; ripple only).
    pub borrow: bool,
}

impl Word {
    /// A ripple word without carry-in, with carry-out.
    pub fn new(kind: Kind, bits: usize, cell: Cell) -> Self {
        Self {
            kind,
            bits,
            architecture: Architecture::Ripple(cell),
            carry_in: false,
            carry_out: true,
            borrow: false,
        }
    }

    /// Every combination of kind, cell, carry-in, carry-out and borrow form of
    /// ripple words of one width.
    pub fn every_ripple(bits: usize) -> Vec<Self> {
        let mut words = Vec::new();
        for cell in Cell::ALL {
            for kind in [
                Kind::Adder,
                Kind::Subtractor,
                Kind::Incrementer,
                Kind::Decrementer,
            ] {
                let can_borrow = matches!(kind, Kind::Subtractor | Kind::Decrementer);
                for choice in 0..if can_borrow { 8 } else { 4 } {
                    words.push(Self {
                        carry_in: choice & 1 != 0,
                        carry_out: choice & 2 != 0,
                        borrow: choice & 4 != 0,
                        ..Self::new(kind, bits, cell)
                    });
                }
            }
        }
        words
    }

    /// Every other architecture, adder and subtractor, with and without carry-in.
    pub fn every_fast(bits: usize) -> Vec<Self> {
        let architectures = [
            Architecture::GroupLookahead(4),
            Architecture::KoggeStone,
            Architecture::CarrySelect(4),
            Architecture::CarrySkip(4),
        ];
        let mut words = Vec::new();
        for architecture in architectures {
            for kind in [Kind::Adder, Kind::Subtractor] {
                for choice in 0..4 {
                    words.push(Self {
                        architecture,
                        carry_in: choice & 1 != 0,
                        carry_out: choice & 2 != 0,
                        ..Self::new(kind, bits, Cell::PropagateXor)
                    });
                }
            }
        }
        words
    }

    /// Whether the word has a second operand.
    pub fn has_b(&self) -> bool {
        matches!(self.kind, Kind::Adder | Kind::Subtractor)
    }

    /// A line for messages.
    pub fn label(&self) -> String {
        let form = if self.borrow { "borrow" } else { "carry" };
        let with = |has: bool| if has { "with" } else { "without" };
        format!(
            "{:?} of {} bits, {:?}, {} {form}-in, {} {form}-out",
            self.kind,
            self.bits,
            self.architecture,
            with(self.carry_in),
            with(self.carry_out)
        )
    }

    /// The word alone: ports `a[…]`, `b[…]`, `cin`, `s[…]`, `cout`.
    pub fn generate(&self) -> Generated {
        let mut c = Circuit::new("word");
        let a = c.input_bus("a", self.bits);
        let b = if self.has_b() {
            c.input_bus("b", self.bits)
        } else {
            Vec::new()
        };
        let carry_in = self.carry_in.then(|| c.input("cin"));
        let truth = self.place(&mut c, &a, &b, carry_in);
        c.output_bus(&truth.sums, "s");
        if let Some(net) = truth.carry_out {
            c.output(net, "cout");
        }
        Generated::new(self.label(), c, vec![truth])
    }

    /// Adds the word to a circuit. `b` is empty where the kind has none;
    /// `carry_in` is given exactly when `self.carry_in`.
    pub fn place(&self, c: &mut Circuit, a: &[Net], b: &[Net], carry_in: Option<Net>) -> Truth {
        assert_eq!(carry_in.is_some(), self.carry_in);
        assert_eq!(
            (a.len(), b.len()),
            (self.bits, if self.has_b() { self.bits } else { 0 })
        );
        let start = match carry_in {
            Some(net) => Carry::Net(net),
            None if self.default_carry() => Carry::One,
            None => Carry::Zero,
        };
        let (sums, carry) = match self.architecture {
            Architecture::Ripple(cell) => self.ripple(c, cell, a, b, start),
            fast => {
                assert!(self.has_b() && !self.borrow, "{fast:?} adds two words");
                let b: Vec<Net> = match self.kind {
                    Kind::Subtractor => b.iter().map(|&b| c.not(b)).collect(),
                    _ => b.to_vec(),
                };
                fast::add(c, fast, a, &b, start)
            }
        };
        let carry_out = self.carry_out.then(|| match carry {
            Carry::Net(net) => net,
            Carry::Inverted(net) => c.not(net),
            Carry::Zero => c.gate(Function::Zero, &[]),
            Carry::One => c.gate(Function::One, &[]),
        });
        Truth {
            kind: self.kind,
            a: a.to_vec(),
            b: b.to_vec(),
            carry_in,
            sums,
            carry_out,
            borrow: self.borrow,
            plus_one: false,
            mode: None,
            architecture: self.architecture,
        }
    }

    /// The carry-in that is meant when there is none.
    fn default_carry(&self) -> bool {
        match self.kind {
            Kind::Adder => false,
            Kind::Incrementer => true,
            Kind::Subtractor => !self.borrow,
            Kind::Decrementer => self.borrow,
        }
    }

    fn ripple(
        &self,
        c: &mut Circuit,
        cell: Cell,
        a: &[Net],
        b: &[Net],
        start: Carry,
    ) -> (Vec<Net>, Carry) {
        let mut carry = start;
        let mut sums = Vec::with_capacity(self.bits);
        for (i, &a) in a.iter().enumerate() {
            let addend = match (self.kind, self.borrow) {
                (Kind::Adder, _) | (Kind::Subtractor, true) => Addend::Net(b[i]),
                (Kind::Subtractor, false) => Addend::Net(cell.not(c, b[i])),
                (Kind::Incrementer, _) | (Kind::Decrementer, true) => Addend::Zero,
                (Kind::Decrementer, false) => Addend::One,
            };
            let (sum, next) = if self.borrow {
                cell.borrow_step(c, a, addend, carry)
            } else {
                cell.step(c, a, addend, carry)
            };
            sums.push(sum);
            carry = next;
        }
        (sums, carry)
    }
}
