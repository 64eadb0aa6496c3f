//! Any gate function as two-input ANDs with inversions.
//!
//! A product of two pins is one AND, so a netlist that came from AIGER keeps its
//! gates one for one. Other tables are taken apart pin by pin: a pin that is
//! exclusive-ored with the rest, then one that is ANDed or ORed with it, then a
//! choice between the two cofactors (Shannon 1938); at most six steps deep. Covers
//! become balanced trees of ANDs. Nothing is shared between gates: a rebuild for
//! size is no task of a writer.

use crate::netlist::{Cover, Function, Shape, TruthTable};

/// A literal: twice the variable, plus one when inverted; 0 is false, 1 true.
pub(super) type Literal = u32;

/// The ANDs made so far. AND `i` has variable `first + i`.
pub(super) struct Ands {
    first: u32,
    pub(super) list: Vec<[Literal; 2]>,
    /// Set when the variables do not fit a literal of 32 bits.
    pub(super) overflow: bool,
}

impl Ands {
    pub(super) fn new(first: u32) -> Self {
        Self {
            first,
            list: Vec::new(),
            overflow: false,
        }
    }

    /// A new AND, as it is.
    fn push(&mut self, operands: [Literal; 2]) -> Literal {
        let variable = u64::from(self.first) + self.list.len() as u64;
        if variable >= 1 << 31 {
            self.overflow = true;
            return 0;
        }
        self.list.push(operands);
        (variable as u32) << 1
    }

    fn and(&mut self, a: Literal, b: Literal) -> Literal {
        match (a.min(b), a.max(b)) {
            (0, _) => 0,
            (1, other) => other,
            (low, high) if low == high => low,
            (low, high) if low ^ 1 == high => 0,
            (low, high) => self.push([high, low]),
        }
    }

    fn or(&mut self, a: Literal, b: Literal) -> Literal {
        self.and(a ^ 1, b ^ 1) ^ 1
    }

    fn xor(&mut self, a: Literal, b: Literal) -> Literal {
        let neither = self.and(a ^ 1, b ^ 1);
        let both = self.and(a, b);
        self.and(neither ^ 1, both ^ 1)
    }

    /// A balanced tree of ANDs; `list` is used up.
    fn all(&mut self, list: &mut Vec<Literal>) -> Literal {
        while list.len() > 1 {
            let pairs = list.len() / 2;
            for i in 0..pairs {
                list[i] = self.and(list[2 * i], list[2 * i + 1]);
            }
            if list.len() % 2 == 1 {
                list[pairs] = list[list.len() - 1];
                list.truncate(pairs + 1);
            } else {
                list.truncate(pairs);
            }
        }
        list.pop().unwrap_or(1)
    }

    /// The literal of a gate with function `function` over `pins`.
    pub(super) fn gate(&mut self, function: &Function, pins: &[Literal]) -> Literal {
        match function {
            Function::Table(table) => match product_of_two(*table) {
                Some(signs) => self.push([0, 1].map(|pin| pins[pin] ^ signs[pin])),
                None => self.table(*table, pins),
            },
            Function::Cover(cover) => self.cover(cover, pins),
        }
    }

    fn table(&mut self, table: TruthTable, pins: &[Literal]) -> Literal {
        let one = TruthTable::new(table.inputs(), !0);
        if table.bits() == 0 {
            return 0;
        }
        if table == one {
            return 1;
        }
        let pins_used = (0..table.inputs())
            .rev()
            .filter(|&pin| table.depends_on(pin));
        let mut chosen = None;
        for pin in pins_used {
            let (low, high) = (table.cofactor(pin, false), table.cofactor(pin, true));
            let simple = low.bits() == 0 || low == one || high.bits() == 0 || high == one;
            if table.is_linear_in(pin) || simple {
                chosen = Some(pin);
                break;
            }
            chosen = chosen.or(Some(pin));
        }
        let Some(pin) = chosen else {
            // Not reached: a table without such a pin is constant.
            return u32::from(table.bits() & 1 == 1);
        };
        let (low, high) = (table.cofactor(pin, false), table.cofactor(pin, true));
        let select = pins[pin];
        if low.bits() == 0 {
            let rest = self.table(high, pins);
            return self.and(select, rest);
        }
        if high.bits() == 0 {
            let rest = self.table(low, pins);
            return self.and(select ^ 1, rest);
        }
        if low == one {
            let rest = self.table(high, pins);
            return self.or(select ^ 1, rest);
        }
        if high == one {
            let rest = self.table(low, pins);
            return self.or(select, rest);
        }
        let when_low = self.table(low, pins);
        if low == high.complement() {
            return self.xor(select, when_low);
        }
        let when_high = self.table(high, pins);
        let taken_high = self.and(select, when_high);
        let taken_low = self.and(select ^ 1, when_low);
        self.or(taken_high, taken_low)
    }

    fn cover(&mut self, cover: &Cover, pins: &[Literal]) -> Literal {
        let mut list = Vec::new();
        let mut inverted_cubes = Vec::new();
        for cube in cover.cubes() {
            list.clear();
            list.extend(cube.map(|(pin, inverted)| pins[pin] ^ u32::from(inverted)));
            inverted_cubes.push(self.all(&mut list) ^ 1);
        }
        // The OR of the cubes is where not all of them are off.
        let none = self.all(&mut inverted_cubes);
        none ^ u32::from(!cover.is_complemented())
    }
}

/// Whether each of two pins is read inverted by a plain product of both.
fn product_of_two(table: TruthTable) -> Option<[u32; 2]> {
    let is_product = table.inputs() == 2 && Function::Table(table).shape() == Shape::Product;
    if !is_product || table.bits().count_ones() != 1 {
        return None;
    }
    let minterm = table.bits().trailing_zeros();
    Some([0, 1].map(|pin| u32::from(minterm >> pin & 1 == 0)))
}
