//! The cells a ripple word is made of, in the styles real netlists show.
//!
//! A cell takes one position (an operand bit, an addend that may be constant,
//! a carry) and gives the sum and the next carry. A constant addend or carry
//! makes a half adder in the same style. Cell forms are common practice; the
//! nine-gate NAND adder is the textbook one, its NOR form follows by duality
//! since sum and majority are self-dual.

use super::circuit::{Circuit, Function, Net};

/// The style of a ripple cell.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Cell {
    /// p = a ⊕ b, carry a·b + p·c, of two-input gates.
    PropagateXor,
    /// The same with p = a + b in the carry.
    PropagateOr,
    /// Two-input NAND gates only.
    Nand,
    /// Two-input NOR gates only.
    Nor,
    /// One majority cover and one three-input parity cover.
    MajorityCover,
    /// Majority as OR of three ANDs; sum of two XORs.
    MajorityGates,
    /// Inverted carry first, sum = a·b·c + (a + b + c)·~carry.
    Mirror,
    /// carry = (a ⊕ b) ? c : a.
    MuxCarry,
    /// The carry is inverted behind every even position; odd positions take
    /// inverted operands.
    InvertedCarries,
    /// Two-input ANDs and inverters.
    AndInverter,
}

/// The second addend of a position.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Addend {
    /// Constant 0 (incrementers).
    Zero,
    /// Constant 1 (decrementers).
    One,
    /// A net.
    Net(Net),
}

/// A carry on its way.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Carry {
    /// Constant 0.
    Zero,
    /// Constant 1.
    One,
    /// A net.
    Net(Net),
    /// A net that is 1 when the carry is 0.
    Inverted(Net),
}

const MINORITY: Function = Function::Cover(&["00-", "0-0", "-00"]);
const MAJORITY: Function = Function::Cover(&["11-", "1-1", "-11"]);

impl Cell {
    /// Every style.
    pub const ALL: [Self; 10] = [
        Self::PropagateXor,
        Self::PropagateOr,
        Self::Nand,
        Self::Nor,
        Self::MajorityCover,
        Self::MajorityGates,
        Self::Mirror,
        Self::MuxCarry,
        Self::InvertedCarries,
        Self::AndInverter,
    ];

    /// An inverter in this style.
    pub fn not(self, c: &mut Circuit, a: Net) -> Net {
        match self {
            Self::Nand => c.gate(Function::Nand, &[a, a]),
            Self::Nor => c.gate(Function::Nor, &[a, a]),
            _ => c.not(a),
        }
    }

    /// One position: sum and next carry.
    pub fn step(self, c: &mut Circuit, a: Net, b: Addend, carry: Carry) -> (Net, Carry) {
        match (b, carry) {
            (Addend::Net(b), Carry::Net(x)) => self.full(c, a, b, x),
            (Addend::Net(b), Carry::Inverted(x)) => {
                let (na, nb) = (self.not(c, a), self.not(c, b));
                let sum = c.gate(Function::Xnor, &[na, nb, x]);
                (sum, Carry::Net(c.gate(MINORITY, &[na, nb, x])))
            }
            (Addend::Net(x), Carry::Zero) | (Addend::Zero, Carry::Net(x)) => self.half(c, a, x),
            (Addend::Net(x), Carry::One) | (Addend::One, Carry::Net(x)) => self.half_one(c, a, x),
            (Addend::Zero, Carry::Inverted(x)) => {
                let na = c.not(a);
                let carry = c.gate(Function::Nor, &[na, x]);
                (c.gate(Function::Xnor, &[a, x]), Carry::Net(carry))
            }
            (Addend::One, Carry::Inverted(x)) => {
                let na = c.not(a);
                let carry = c.gate(Function::Nand, &[na, x]);
                (c.xor(a, x), Carry::Net(carry))
            }
            (Addend::Zero, Carry::One) | (Addend::One, Carry::Zero) => {
                (self.not(c, a), Carry::Net(a))
            }
            (Addend::Zero, Carry::Zero) => (a, Carry::Zero),
            (Addend::One, Carry::One) => (a, Carry::One),
        }
    }

    /// One position of a subtraction that passes a borrow: difference and next
    /// borrow, `majority(~a, b, borrow)`.
    pub fn borrow_step(self, c: &mut Circuit, a: Net, b: Addend, borrow: Carry) -> (Net, Carry) {
        let less = Function::Cover(&["01"]);
        match (self, b, borrow) {
            (Self::PropagateXor, Addend::Net(b), Carry::Net(x)) => {
                let p = c.xor(a, b);
                let (kept, made) = (c.gate(less, &[p, x]), c.gate(less, &[a, b]));
                (c.xor(p, x), Carry::Net(c.or(made, kept)))
            }
            (Self::MuxCarry, Addend::Net(b), Carry::Net(x)) => {
                let p = c.xor(a, b);
                (c.xor(p, x), Carry::Net(c.mux(p, b, x)))
            }
            (Self::MajorityCover, Addend::Net(b), Carry::Net(x)) => {
                let cover = Function::Cover(&["01-", "0-1", "-11"]);
                let next = c.gate(cover, &[a, b, x]);
                (c.gate(Function::Xor, &[a, b, x]), Carry::Net(next))
            }
            (_, Addend::Zero, Carry::One) | (_, Addend::One, Carry::Zero) => {
                let na = self.not(c, a);
                (na, Carry::Net(na))
            }
            // a - b - x is the complement of ~a + b + x.
            _ => {
                let na = self.not(c, a);
                let (sum, next) = self.step(c, na, b, borrow);
                (self.not(c, sum), next)
            }
        }
    }

    /// a + b.
    fn half(self, c: &mut Circuit, a: Net, b: Net) -> (Net, Carry) {
        match self {
            Self::Nand => {
                let (sum, n1) = nand_xor(c, Function::Nand, a, b);
                (sum, Carry::Net(c.gate(Function::Nand, &[n1, n1])))
            }
            Self::Nor => {
                let (same, neither) = nand_xor(c, Function::Nor, a, b);
                let sum = c.gate(Function::Nor, &[same, same]);
                (sum, Carry::Net(c.gate(Function::Nor, &[neither, sum])))
            }
            Self::MuxCarry => {
                let p = c.xor(a, b);
                (p, Carry::Net(c.gate(Function::Cover(&["01"]), &[p, a])))
            }
            Self::InvertedCarries => {
                let next = c.gate(Function::Nand, &[a, b]);
                (c.xor(a, b), Carry::Inverted(next))
            }
            Self::AndInverter => {
                let (both, sum) = and_xor(c, a, b);
                (sum, Carry::Net(both))
            }
            _ => (c.xor(a, b), Carry::Net(c.and(a, b))),
        }
    }

    /// a + b + 1.
    fn half_one(self, c: &mut Circuit, a: Net, b: Net) -> (Net, Carry) {
        match self {
            Self::Nand => {
                let (odd, _) = nand_xor(c, Function::Nand, a, b);
                let (na, nb) = (self.not(c, a), self.not(c, b));
                let carry = c.gate(Function::Nand, &[na, nb]);
                (self.not(c, odd), Carry::Net(carry))
            }
            Self::Nor => {
                let (same, neither) = nand_xor(c, Function::Nor, a, b);
                (same, Carry::Net(self.not(c, neither)))
            }
            Self::InvertedCarries => {
                let next = c.gate(Function::Nor, &[a, b]);
                (c.gate(Function::Xnor, &[a, b]), Carry::Inverted(next))
            }
            Self::AndInverter => {
                let (na, nb) = (c.not(a), c.not(b));
                let (neither, odd) = and_xor(c, na, nb);
                (c.not(odd), Carry::Net(c.not(neither)))
            }
            _ => (c.gate(Function::Xnor, &[a, b]), Carry::Net(c.or(a, b))),
        }
    }

    /// a + b + x.
    fn full(self, c: &mut Circuit, a: Net, b: Net, x: Net) -> (Net, Carry) {
        match self {
            Self::PropagateXor => {
                let p = c.xor(a, b);
                let (made, passed) = (c.and(a, b), c.and(p, x));
                (c.xor(p, x), Carry::Net(c.or(made, passed)))
            }
            Self::PropagateOr => {
                let (odd, p) = (c.xor(a, b), c.or(a, b));
                let (made, passed) = (c.and(a, b), c.and(p, x));
                (c.xor(odd, x), Carry::Net(c.or(made, passed)))
            }
            Self::Nand | Self::Nor => {
                let gate = if self == Self::Nand {
                    Function::Nand
                } else {
                    Function::Nor
                };
                let (p, n1) = nand_xor(c, gate, a, b);
                let (sum, n5) = nand_xor(c, gate, p, x);
                (sum, Carry::Net(c.gate(gate, &[n1, n5])))
            }
            Self::MajorityCover => {
                let next = c.gate(MAJORITY, &[a, b, x]);
                (c.gate(Function::Xor, &[a, b, x]), Carry::Net(next))
            }
            Self::MajorityGates => {
                let pairs = [c.and(a, b), c.and(a, x), c.and(b, x)];
                let odd = c.xor(a, b);
                (c.xor(odd, x), Carry::Net(c.gate(Function::Or, &pairs)))
            }
            Self::Mirror => {
                let inverted = c.gate(MINORITY, &[a, b, x]);
                let cover = Function::Cover(&["111-", "1--1", "-1-1", "--11"]);
                let sum = c.gate(cover, &[a, b, x, inverted]);
                (sum, Carry::Net(c.not(inverted)))
            }
            Self::MuxCarry => {
                let p = c.xor(a, b);
                (c.xor(p, x), Carry::Net(c.mux(p, x, a)))
            }
            Self::InvertedCarries => {
                let next = c.gate(MINORITY, &[a, b, x]);
                (c.gate(Function::Xor, &[a, b, x]), Carry::Inverted(next))
            }
            Self::AndInverter => {
                let (both, p) = and_xor(c, a, b);
                let (passed, sum) = and_xor(c, p, x);
                let (n1, n2) = (c.not(both), c.not(passed));
                let neither = c.and(n1, n2);
                (sum, Carry::Net(c.not(neither)))
            }
        }
    }
}

/// Four equal gates: XOR of NANDs, XNOR of NORs; and the first gate.
fn nand_xor(c: &mut Circuit, gate: Function, a: Net, b: Net) -> (Net, Net) {
    let first = c.gate(gate, &[a, b]);
    let (left, right) = (c.gate(gate, &[a, first]), c.gate(gate, &[b, first]));
    (c.gate(gate, &[left, right]), first)
}

/// a·b and a ⊕ b of ANDs and inverters.
fn and_xor(c: &mut Circuit, a: Net, b: Net) -> (Net, Net) {
    let both = c.and(a, b);
    let (na, nb) = (c.not(a), c.not(b));
    let neither = c.and(na, nb);
    let (n1, n2) = (c.not(both), c.not(neither));
    (both, c.and(n1, n2))
}
