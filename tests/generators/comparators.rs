//! Carries without sums: magnitude and equality comparators, as a chain of
//! links or as a tree of (generate, propagate) pairs, signed and unsigned.
//!
//! `a < b` is the borrow of `a - b`: v' = ~a·b + p·v from v = 0, where p may be
//! `~(a ⊕ b)` or `~a + b`; from v = 1 it is `a <= b`. Signed numbers (two's
//! complement) change places at the top bit. Common practice, no source.

use super::circuit::{Circuit, Function, Net};
use super::truth::{Generated, read};

/// What a comparison tells.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Relation {
    /// `a < b`.
    Less,
    /// `a <= b`.
    LessOrEqual,
    /// `a = b`.
    Equal,
}

/// How a comparator is built.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Shape {
    /// Links with p = `~(a ⊕ b)`.
    LinksXnor,
    /// Links with p = `~a + b`.
    LinksOr,
    /// Links as one majority cover each.
    LinksMajority,
    /// Links as a choice: the bits differ, then b, else the carry.
    LinksChoice,
    /// Pairs joined two by two with p = `~(a ⊕ b)`.
    TreeXnor,
    /// Pairs joined two by two with p = `~a + b`.
    TreeOr,
    /// Pairs joined four by four by wide gates.
    TreeWide,
}

impl Shape {
    /// Every shape.
    pub const ALL: [Self; 7] = [
        Self::LinksXnor,
        Self::LinksOr,
        Self::LinksMajority,
        Self::LinksChoice,
        Self::TreeXnor,
        Self::TreeOr,
        Self::TreeWide,
    ];

    /// Whether carries pass from position to position.
    pub fn is_chain(self) -> bool {
        !matches!(self, Self::TreeXnor | Self::TreeOr | Self::TreeWide)
    }
}

/// One comparison of a circuit.
#[derive(Clone, Debug)]
pub struct Comparison {
    /// What `result` tells of `a` and `b`.
    pub relation: Relation,
    /// Whether the words are in two's complement.
    pub signed: bool,
    /// First word, least significant first.
    pub a: Vec<Net>,
    /// Second word, as long.
    pub b: Vec<Net>,
    /// The answer.
    pub result: Net,
}

impl Comparison {
    /// Compares the values of 64 patterns with integer arithmetic.
    pub fn check(&self, values: &[u64]) -> Result<(), String> {
        let bits = self.a.len();
        assert!(bits <= 128, "integers of 128 bits hold no more");
        for lane in 0..64 {
            let signed = |word: u128| (word << (128 - bits)) as i128;
            let (a, b) = (read(values, &self.a, lane), read(values, &self.b, lane));
            let order = if self.signed {
                signed(a).cmp(&signed(b))
            } else {
                a.cmp(&b)
            };
            let expected = match self.relation {
                Relation::Less => order.is_lt(),
                Relation::LessOrEqual => order.is_le(),
                Relation::Equal => order.is_eq(),
            };
            if (values[self.result.index()] >> lane & 1 == 1) != expected {
                return Err(format!("{a:x} {:?} {b:x} is {expected}", self.relation));
            }
        }
        Ok(())
    }
}

/// A comparator to be made.
#[derive(Clone, Copy, Debug)]
pub struct Comparator {
    /// What it tells.
    pub relation: Relation,
    /// Whether the words are in two's complement.
    pub signed: bool,
    /// Number of positions.
    pub bits: usize,
    /// How it is built.
    pub shape: Shape,
}

impl Comparator {
    /// Every relation, sign and shape of one width.
    pub fn every(bits: usize) -> Vec<Self> {
        let mut all = Vec::new();
        for shape in Shape::ALL {
            for (relation, signed) in [
                (Relation::Less, false),
                (Relation::Less, true),
                (Relation::LessOrEqual, false),
                (Relation::LessOrEqual, true),
                (Relation::Equal, false),
            ] {
                all.push(Self {
                    relation,
                    signed,
                    bits,
                    shape,
                });
            }
        }
        all
    }

    /// A line for messages.
    pub fn label(&self) -> String {
        let sign = if self.signed { "signed" } else { "unsigned" };
        format!(
            "{sign} {:?} of {} bits, {:?}",
            self.relation, self.bits, self.shape
        )
    }

    /// The comparator alone: ports `a[…]`, `b[…]`, `y`.
    pub fn generate(&self) -> Generated {
        let mut c = Circuit::new("comparator");
        let (a, b) = (c.input_bus("a", self.bits), c.input_bus("b", self.bits));
        let told = self.place(&mut c, &a, &b);
        c.output(told.result, "y");
        Generated::new(self.label(), c, Vec::new()).with_comparisons(vec![told])
    }

    /// Adds the comparator to a circuit.
    pub fn place(&self, c: &mut Circuit, a: &[Net], b: &[Net]) -> Comparison {
        let result = match self.relation {
            Relation::Equal => self.equal(c, a, b),
            _ if self.shape.is_chain() => self.links(c, a, b),
            _ => self.tree(c, a, b),
        };
        Comparison {
            relation: self.relation,
            signed: self.signed,
            a: a.to_vec(),
            b: b.to_vec(),
            result,
        }
    }

    /// The bits of one position in the order that the link compares them.
    fn pair(&self, a: &[Net], b: &[Net], i: usize) -> (Net, Net) {
        match self.signed && i + 1 == a.len() {
            true => (b[i], a[i]),
            false => (a[i], b[i]),
        }
    }

    fn links(&self, c: &mut Circuit, a: &[Net], b: &[Net]) -> Net {
        let less = Function::Cover(&["01"]);
        let at_most = Function::Cover(&["0-", "-1"]);
        let (x, y) = self.pair(a, b, 0);
        let first = match self.relation {
            Relation::Less => less,
            _ => at_most,
        };
        let mut v = c.gate(first, &[x, y]);
        for i in 1..a.len() {
            let (x, y) = self.pair(a, b, i);
            v = match self.shape {
                Shape::LinksMajority => c.gate(Function::Cover(&["01-", "0-1", "-11"]), &[x, y, v]),
                Shape::LinksChoice => {
                    let differ = c.xor(x, y);
                    c.mux(differ, y, v)
                }
                _ => {
                    let pass = match self.shape {
                        Shape::LinksOr => at_most,
                        _ => Function::Xnor,
                    };
                    let (made, p) = (c.gate(less, &[x, y]), c.gate(pass, &[x, y]));
                    let passed = c.and(p, v);
                    c.or(made, passed)
                }
            };
        }
        v
    }

    fn tree(&self, c: &mut Circuit, a: &[Net], b: &[Net]) -> Net {
        let pass = match self.shape {
            Shape::TreeXnor => Function::Xnor,
            _ => Function::Cover(&["0-", "-1"]),
        };
        let width = if self.shape == Shape::TreeWide { 4 } else { 2 };
        let mut row: Vec<(Net, Net)> = (0..a.len())
            .map(|i| {
                let (x, y) = self.pair(a, b, i);
                let made = c.gate(Function::Cover(&["01"]), &[x, y]);
                (made, c.gate(pass, &[x, y]))
            })
            .collect();
        while row.len() > 1 {
            let joined = row.chunks(width).map(|group| {
                let (low, above) = group.split_first().expect("chunks hold something");
                let mut terms: Vec<Net> = Vec::new();
                let made = std::iter::once(low).chain(above).enumerate();
                for (i, &(made, _)) in made {
                    let mut product: Vec<Net> = group[i + 1..].iter().map(|pair| pair.1).collect();
                    product.push(made);
                    terms.push(wide(c, Function::And, &product));
                }
                let passes: Vec<Net> = group.iter().map(|pair| pair.1).collect();
                (
                    wide(c, Function::Or, &terms),
                    wide(c, Function::And, &passes),
                )
            });
            row = joined.collect();
        }
        let (made, passed) = row[0];
        match self.relation {
            Relation::Less => made,
            _ => c.or(made, passed),
        }
    }

    fn equal(&self, c: &mut Circuit, a: &[Net], b: &[Net]) -> Net {
        let pairs = a.iter().zip(b);
        let same: Vec<Net> = pairs
            .map(|(&a, &b)| c.gate(Function::Xnor, &[a, b]))
            .collect();
        if self.shape.is_chain() {
            let first = same[0];
            return same[1..].iter().fold(first, |all, &bit| c.and(all, bit));
        }
        let width = if self.shape == Shape::TreeWide { 4 } else { 2 };
        let mut row = same;
        while row.len() > 1 {
            let joined = row.chunks(width).map(|group| wide(c, Function::And, group));
            row = joined.collect();
        }
        row[0]
    }
}

/// A gate of as many inputs as needed; one net is itself.
fn wide(c: &mut Circuit, function: Function, nets: &[Net]) -> Net {
    match nets {
        [only] => *only,
        many => c.gate(function, many),
    }
}
