//! Gate functions: a truth table up to six inputs, a cover beyond.
//!
//! Two gates with the same function share one interned value, so per-function
//! work (shape, delays, decomposition) is done once and not per gate.

use rustc_hash::FxHashMap;

/// A function of up to six inputs. Bit `m` of `bits` is the value at minterm
/// `m`, in which pin `i` contributes `1 << i`; bits past `2^inputs` are zero.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct TruthTable {
    inputs: u8,
    bits: u64,
}

/// The projection of pin `i` as a six-input truth table.
pub const PIN: [u64; 6] = [
    0xAAAA_AAAA_AAAA_AAAA,
    0xCCCC_CCCC_CCCC_CCCC,
    0xF0F0_F0F0_F0F0_F0F0,
    0xFF00_FF00_FF00_FF00,
    0xFFFF_0000_FFFF_0000,
    0xFFFF_FFFF_0000_0000,
];

impl TruthTable {
    /// Most inputs a truth table holds.
    pub const MAX_INPUTS: usize = 6;

    /// A table over `inputs` pins; bits past `2^inputs` are cleared. Panics
    /// above six inputs.
    pub fn new(inputs: usize, bits: u64) -> Self {
        assert!(
            inputs <= Self::MAX_INPUTS,
            "a truth table has at most six inputs"
        );
        Self {
            inputs: inputs as u8,
            bits: bits & Self::mask(inputs),
        }
    }

    fn mask(inputs: usize) -> u64 {
        if inputs == 6 {
            !0
        } else {
            (1 << (1 << inputs)) - 1
        }
    }

    /// Number of pins.
    pub fn inputs(self) -> usize {
        self.inputs as usize
    }

    /// The value column.
    pub fn bits(self) -> u64 {
        self.bits
    }

    /// The complement.
    #[must_use]
    pub fn complement(self) -> Self {
        Self::new(self.inputs(), !self.bits)
    }

    /// The table with pin `pin` read inverted.
    #[must_use]
    pub fn flip(self, pin: usize) -> Self {
        let shift = 1 << pin;
        let (high, low) = (self.bits & PIN[pin], self.bits & !PIN[pin]);
        Self::new(self.inputs(), (high >> shift) | (low << shift))
    }

    /// The cofactor with pin `pin` fixed, still over the same pins.
    #[must_use]
    pub fn cofactor(self, pin: usize, value: bool) -> Self {
        let shift = 1 << pin;
        let bits = if value {
            let half = self.bits & PIN[pin];
            half | (half >> shift)
        } else {
            let half = self.bits & !PIN[pin];
            half | (half << shift)
        };
        Self::new(self.inputs(), bits)
    }

    /// Whether the function depends on pin `pin`.
    pub fn depends_on(self, pin: usize) -> bool {
        self.cofactor(pin, false) != self.cofactor(pin, true)
    }

    /// Whether the function is `pin ⊕ (something without pin)`.
    pub fn is_linear_in(self, pin: usize) -> bool {
        self.cofactor(pin, false) == self.cofactor(pin, true).complement()
    }
}

/// A sum of products over any number of pins.
///
/// A literal is `pin << 1 | inverted`; a cube is an AND of literals, the cover
/// is the OR of its cubes, complemented when `complemented` is set.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Cover {
    inputs: u32,
    complemented: bool,
    literals: Box<[u32]>,
    ends: Box<[u32]>,
}

impl Cover {
    /// A cover over `inputs` pins. Each cube lists `(pin, inverted)` pairs with
    /// pins ascending; panics when a pin is out of range.
    pub fn new<C>(inputs: usize, complemented: bool, cubes: impl IntoIterator<Item = C>) -> Self
    where
        C: IntoIterator<Item = (usize, bool)>,
    {
        let (mut literals, mut ends) = (Vec::new(), Vec::new());
        for cube in cubes {
            for (pin, inverted) in cube {
                assert!(pin < inputs, "cube names pin {pin} of {inputs}");
                literals.push((pin as u32) << 1 | u32::from(inverted));
            }
            ends.push(literals.len() as u32);
        }
        Self {
            inputs: inputs as u32,
            complemented,
            literals: literals.into(),
            ends: ends.into(),
        }
    }

    /// Number of pins.
    pub fn inputs(&self) -> usize {
        self.inputs as usize
    }

    /// Whether the listed cubes are the off-set.
    pub fn is_complemented(&self) -> bool {
        self.complemented
    }

    /// Number of cubes.
    pub fn cube_count(&self) -> usize {
        self.ends.len()
    }

    /// The cubes, each as `(pin, inverted)` pairs.
    pub fn cubes(&self) -> impl Iterator<Item = impl Iterator<Item = (usize, bool)> + '_> + '_ {
        (0..self.ends.len()).map(|i| {
            let start = if i == 0 { 0 } else { self.ends[i - 1] as usize };
            self.literals[start..self.ends[i] as usize]
                .iter()
                .map(|&l| ((l >> 1) as usize, l & 1 == 1))
        })
    }

    /// The function on 64 input vectors at once; `pins[i]` holds pin `i`.
    pub fn evaluate(&self, pins: &[u64]) -> u64 {
        let mut value = 0;
        for cube in self.cubes() {
            let mut product = !0;
            for (pin, inverted) in cube {
                product &= if inverted { !pins[pin] } else { pins[pin] };
            }
            value |= product;
        }
        if self.complemented { !value } else { value }
    }
}

/// A gate's function of its pins, pin 0 first.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Function {
    /// Up to six inputs.
    Table(TruthTable),
    /// Seven inputs or more.
    Cover(Cover),
}

/// What a function is in the words of the trade.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Shape {
    /// Depends on no pin.
    Constant(bool),
    /// Equal to its only relevant pin, and that is its only pin.
    Buffer,
    /// The complement of its only pin.
    Inverter,
    /// One cube over all pins with any input polarities, or its complement
    /// (AND, OR, NAND, NOR).
    Product,
    /// XOR or XNOR of all pins.
    Parity,
    /// Any other function.
    Other,
}

impl Function {
    /// A constant without pins.
    pub fn constant(value: bool) -> Self {
        Self::Table(TruthTable::new(0, u64::from(value)))
    }

    /// A one-pin buffer, or an inverter.
    pub fn buffer(inverted: bool) -> Self {
        Self::Table(TruthTable::new(1, if inverted { 0b01 } else { 0b10 }))
    }

    /// AND of `inverted.len()` pins, each read inverted where `inverted` says
    /// so; the result complemented when `complemented` is set.
    pub fn product(inverted: &[bool], complemented: bool) -> Self {
        let n = inverted.len();
        if n <= TruthTable::MAX_INPUTS {
            let bits = inverted.iter().enumerate().fold(!0, |acc, (i, &inv)| {
                acc & if inv { !PIN[i] } else { PIN[i] }
            });
            let table = TruthTable::new(n, bits);
            Self::Table(if complemented {
                table.complement()
            } else {
                table
            })
        } else {
            let cube = inverted.iter().copied().enumerate();
            Self::Cover(Cover::new(n, complemented, [cube]))
        }
    }

    /// XOR of `pins` pins, complemented when `complemented` is set. Panics
    /// above six pins (wider parity gates are built as trees).
    pub fn parity(pins: usize, complemented: bool) -> Self {
        let bits = (0..pins).fold(0, |acc, i| acc ^ PIN[i]);
        let table = TruthTable::new(pins, if complemented { !bits } else { bits });
        Self::Table(table)
    }

    /// The function a cover states: a table when it has at most six inputs.
    pub fn from_cover(cover: Cover) -> Self {
        if cover.inputs() <= TruthTable::MAX_INPUTS {
            let n = cover.inputs();
            Self::Table(TruthTable::new(n, cover.evaluate(&PIN[..n])))
        } else {
            Self::Cover(cover)
        }
    }

    /// Number of pins.
    pub fn inputs(&self) -> usize {
        match self {
            Self::Table(table) => table.inputs(),
            Self::Cover(cover) => cover.inputs(),
        }
    }

    /// The complement.
    #[must_use]
    pub fn complement(&self) -> Self {
        match self {
            Self::Table(table) => Self::Table(table.complement()),
            Self::Cover(cover) => Self::Cover(Cover {
                complemented: !cover.complemented,
                ..cover.clone()
            }),
        }
    }

    /// The function with pin `pin` read inverted.
    #[must_use]
    pub fn flip(&self, pin: usize) -> Self {
        match self {
            Self::Table(table) => Self::Table(table.flip(pin)),
            Self::Cover(cover) => {
                let mut flipped = cover.clone();
                for literal in &mut flipped.literals {
                    if (*literal >> 1) as usize == pin {
                        *literal ^= 1;
                    }
                }
                Self::Cover(flipped)
            }
        }
    }

    /// The function on 64 input vectors at once; `pins[i]` holds pin `i`.
    pub fn evaluate(&self, pins: &[u64]) -> u64 {
        match self {
            Self::Cover(cover) => cover.evaluate(pins),
            Self::Table(table) => evaluate_table(table.bits, pins),
        }
    }

    /// What the function is in the words of the trade. A cover beyond six
    /// inputs is read by its rows: one cube over all pins is a product.
    pub fn shape(&self) -> Shape {
        match self {
            Self::Table(table) => table_shape(*table),
            Self::Cover(cover) => cover_shape(cover),
        }
    }
}

fn table_shape(table: TruthTable) -> Shape {
    let n = table.inputs();
    let ones = table.bits.count_ones();
    let all = 1u32 << n;
    match n {
        _ if ones == 0 => Shape::Constant(false),
        _ if ones == all => Shape::Constant(true),
        1 if table.bits == 0b10 => Shape::Buffer,
        1 => Shape::Inverter,
        _ if ones == 1 || ones == all - 1 => Shape::Product,
        _ if (0..n).all(|pin| table.is_linear_in(pin)) => Shape::Parity,
        _ => Shape::Other,
    }
}

fn cover_shape(cover: &Cover) -> Shape {
    let n = cover.inputs();
    match cover.cube_count() {
        0 => Shape::Constant(cover.complemented),
        // An empty cube is the constant one.
        _ if cover.cubes().any(|mut cube| cube.next().is_none()) => {
            Shape::Constant(!cover.complemented)
        }
        1 if cover.literals.len() == n => Shape::Product,
        // n single-literal cubes over n pins: an OR.
        m if m == n && cover.literals.len() == n && distinct_pins(cover) => Shape::Product,
        _ => Shape::Other,
    }
}

fn distinct_pins(cover: &Cover) -> bool {
    let mut seen = vec![false; cover.inputs()];
    cover
        .literals
        .iter()
        .all(|&l| !std::mem::replace(&mut seen[(l >> 1) as usize], true))
        && cover.cubes().all(|cube| cube.count() == 1)
}

/// Shannon expansion from the last pin down; at most six levels.
fn evaluate_table(bits: u64, pins: &[u64]) -> u64 {
    let Some((&select, rest)) = pins.split_last() else {
        return if bits & 1 == 1 { !0 } else { 0 };
    };
    let half = 1 << rest.len();
    let mask = if half == 64 { !0 } else { (1u64 << half) - 1 };
    let (low, high) = (bits & mask, (bits >> half) & mask);
    if low == high {
        return evaluate_table(low, rest);
    }
    let when_low = evaluate_table(low, rest);
    let when_high = evaluate_table(high, rest);
    (select & when_high) | (!select & when_low)
}

/// The interned functions of a netlist. A function whose delays were declared is
/// kept apart from the same function without.
#[derive(Clone, Default)]
pub(super) struct Functions {
    list: Vec<Function>,
    index: FxHashMap<Function, u32>,
    declared: FxHashMap<u32, Box<[i32]>>,
    declared_index: FxHashMap<(Function, Box<[i32]>), u32>,
    cells: FxHashMap<u32, CellPins>,
    cell_index: FxHashMap<(Function, CellPins), u32>,
}

/// Which output of which cell of a library a gate is.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct CellPins {
    /// The cell.
    pub cell: Vec<u8>,
    /// The output pin; empty where the gate is inside.
    pub output: Vec<u8>,
    /// The pins its fan-ins are, in their order; empty where one is inside.
    pub inputs: Vec<Vec<u8>>,
}

impl Functions {
    pub(super) fn intern(&mut self, function: Function) -> u32 {
        if let Some(&id) = self.index.get(&function) {
            return id;
        }
        let id = self.list.len() as u32;
        self.list.push(function.clone());
        self.index.insert(function, id);
        id
    }

    /// As [`Self::intern`], with the delay of every pin given.
    pub(super) fn intern_with_delays(&mut self, function: Function, delays: &[i32]) -> u32 {
        let key = (function, delays.into());
        if let Some(&id) = self.declared_index.get(&key) {
            return id;
        }
        let id = self.list.len() as u32;
        self.list.push(key.0.clone());
        self.declared.insert(id, key.1.clone());
        self.declared_index.insert(key, id);
        id
    }

    /// As [`Self::intern`], for an output of a cell.
    pub(super) fn intern_of_cell(&mut self, function: Function, pins: CellPins) -> u32 {
        let key = (function, pins);
        if let Some(&id) = self.cell_index.get(&key) {
            return id;
        }
        let id = self.list.len() as u32;
        self.list.push(key.0.clone());
        self.cells.insert(id, key.1.clone());
        self.cell_index.insert(key, id);
        id
    }

    pub(super) fn cell_pins(&self, id: u32) -> Option<&CellPins> {
        self.cells.get(&id)
    }

    pub(super) fn get(&self, id: u32) -> &Function {
        &self.list[id as usize]
    }

    pub(super) fn declared_delays(&self, id: u32) -> Option<&[i32]> {
        self.declared.get(&id).map(AsRef::as_ref)
    }

    pub(super) fn len(&self) -> usize {
        self.list.len()
    }
}
