//! From a gate's function to AND and XOR nodes.
//!
//! Every interned function becomes a short program once and is replayed for
//! each gate. Variables in which a function is linear are split off first
//! (`f = x ⊕ rest`), so that sums keep their operands visible; then variables
//! that fix the result (`x·rest`, `x + rest`), then Shannon expansion (1949) on
//! the variable that leaves the smallest cofactors. Covers beyond six inputs
//! are balanced trees over their rows.

use super::graph::{Literal, Subject};
use crate::netlist::{Cover, Function, FunctionId, Netlist, TruthTable};

/// A literal inside a program: pin or earlier step, inverted or not. Pins come
/// first, then steps; the last two values are the constants.
#[derive(Clone, Copy)]
enum Value {
    Constant(bool),
    Slot { slot: u16, inverted: bool },
}

impl std::ops::Not for Value {
    type Output = Self;
    fn not(self) -> Self {
        match self {
            Self::Constant(value) => Self::Constant(!value),
            Self::Slot { slot, inverted } => Self::Slot {
                slot,
                inverted: !inverted,
            },
        }
    }
}

#[derive(Clone, Copy)]
enum Operation {
    And(Value, Value),
    Xor(Value, Value),
}

struct Program {
    operations: Vec<Operation>,
    result: Value,
}

/// The programs of a netlist's functions, made on first use.
pub(super) struct Programs<'a> {
    netlist: &'a Netlist,
    programs: Vec<Option<Program>>,
    slots: Vec<Literal>,
}

impl<'a> Programs<'a> {
    pub(super) fn new(netlist: &'a Netlist) -> Self {
        let programs = (0..netlist.function_count()).map(|_| None).collect();
        Self {
            netlist,
            programs,
            slots: Vec::new(),
        }
    }

    /// The literal of the function on `pins`.
    pub(super) fn run(
        &mut self,
        function: FunctionId,
        pins: &[Literal],
        subject: &mut Subject,
    ) -> Literal {
        let table = match self.netlist.function_of(function) {
            Function::Cover(cover) => return cover_tree(cover, pins, subject),
            Function::Table(table) => *table,
        };
        let program =
            self.programs[function.index()].get_or_insert_with(|| Program::compile(table));
        self.slots.clear();
        self.slots.extend_from_slice(pins);
        for &operation in &program.operations {
            let literal = match operation {
                Operation::And(x, y) => {
                    let (x, y) = (resolve(&self.slots, x), resolve(&self.slots, y));
                    subject.and(x, y)
                }
                Operation::Xor(x, y) => {
                    let (x, y) = (resolve(&self.slots, x), resolve(&self.slots, y));
                    subject.xor(x, y)
                }
            };
            self.slots.push(literal);
        }
        resolve(&self.slots, program.result)
    }
}

fn resolve(slots: &[Literal], value: Value) -> Literal {
    match value {
        Value::Constant(value) => Literal::constant(value),
        Value::Slot { slot, inverted } => slots[slot as usize].xor(inverted),
    }
}

impl Program {
    fn compile(table: TruthTable) -> Self {
        let mut program = Self {
            operations: Vec::new(),
            result: Value::Constant(false),
        };
        program.result = program.expand(table);
        program
    }

    fn push(&mut self, pins: usize, operation: Operation) -> Value {
        self.operations.push(operation);
        let slot = (pins + self.operations.len() - 1) as u16;
        Value::Slot {
            slot,
            inverted: false,
        }
    }

    fn or(&mut self, pins: usize, x: Value, y: Value) -> Value {
        !self.push(pins, Operation::And(!x, !y))
    }

    /// At most six variables, each call removes one: the recursion is shallow.
    fn expand(&mut self, table: TruthTable) -> Value {
        let pins = table.inputs();
        let zero = TruthTable::new(pins, 0);
        if table == zero {
            return Value::Constant(false);
        }
        if table == zero.complement() {
            return Value::Constant(true);
        }
        let support: Vec<usize> = (0..pins).filter(|&pin| table.depends_on(pin)).collect();
        let pin_value = |pin: usize| Value::Slot {
            slot: pin as u16,
            inverted: false,
        };
        for &pin in &support {
            if table.is_linear_in(pin) {
                return match self.expand(table.cofactor(pin, false)) {
                    Value::Constant(value) => {
                        if value {
                            !pin_value(pin)
                        } else {
                            pin_value(pin)
                        }
                    }
                    rest => self.push(pins, Operation::Xor(pin_value(pin), rest)),
                };
            }
        }
        for &pin in &support {
            let (low, high) = (table.cofactor(pin, false), table.cofactor(pin, true));
            let x = pin_value(pin);
            if low == zero {
                let rest = self.expand(high);
                return self.push(pins, Operation::And(x, rest));
            }
            if high == zero {
                let rest = self.expand(low);
                return self.push(pins, Operation::And(!x, rest));
            }
            if high == zero.complement() {
                let rest = self.expand(low);
                return self.or(pins, x, rest);
            }
            if low == zero.complement() {
                let rest = self.expand(high);
                return self.or(pins, !x, rest);
            }
        }
        let width = |table: TruthTable| (0..pins).filter(|&pin| table.depends_on(pin)).count();
        let pin = *support
            .iter()
            .min_by_key(|&&pin| {
                width(table.cofactor(pin, false)) + width(table.cofactor(pin, true))
            })
            .expect("a function that is not constant depends on a pin");
        let (low, high) = (table.cofactor(pin, false), table.cofactor(pin, true));
        let (low, high) = (self.expand(low), self.expand(high));
        let x = pin_value(pin);
        let when_high = self.push(pins, Operation::And(x, high));
        let when_low = self.push(pins, Operation::And(!x, low));
        self.or(pins, when_high, when_low)
    }
}

fn cover_tree(cover: &Cover, pins: &[Literal], subject: &mut Subject) -> Literal {
    let mut rows = Vec::with_capacity(cover.cube_count());
    let mut factors = Vec::new();
    for cube in cover.cubes() {
        factors.clear();
        factors.extend(cube.map(|(pin, inverted)| pins[pin].xor(inverted)));
        rows.push(!balanced_and(&mut factors, subject));
    }
    let value = !balanced_and(&mut rows, subject);
    value.xor(cover.is_complemented())
}

/// AND of any number of literals as a balanced tree; leaves it clobbered.
fn balanced_and(literals: &mut Vec<Literal>, subject: &mut Subject) -> Literal {
    while literals.len() > 1 {
        let pairs = literals.len().div_ceil(2);
        for i in 0..pairs {
            literals[i] = match literals.get(2 * i + 1).copied() {
                Some(right) => subject.and(literals[2 * i], right),
                None => literals[2 * i],
            };
        }
        literals.truncate(pairs);
    }
    literals.first().copied().unwrap_or(Literal::TRUE)
}
