//! A gate of a netlist as static gates of unit drive, and its price.
//!
//! In this order, everything deterministic:
//! 1. A one-input gate is an inverter, or two for a buffer.
//! 2. A product is a NAND or a NOR with the inverters its polarities ask for; of
//!    the two the one whose worst pin costs less, its own load counted. So
//!    `11 0` is a NAND, `00 1` a NOR, `11 1` a NAND and an inverter.
//! 3. An exclusive-or of up to four inputs has its published value in either
//!    polarity; a wider one is a balanced tree of those of two inputs.
//! 4. A two-way multiplexer has its published value in any polarity.
//! 5. Any other function is NAND–NAND: a NAND for every row of its irredundant sum
//!    of products and one over the rows, with shared inverters for pins read
//!    inverted; or the same of its complement and an inverter, if that is faster.
//!
//! Where inversions are free (AIGER) every product is a NAND.

use super::super::factored::{Cubes, rows_of, sum_of_products};
use super::cell::EffortCell;
use crate::netlist::{Curve, Function, PinPrice, Shape, TruthTable};

/// τ in ticks.
const TAU: i32 = 1000;

/// What a pin costs inside the gate: delay before the output's own load, and load.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Default)]
struct Cost {
    delay: i32,
    load: i32,
}

impl Cost {
    /// What the pin costs a path through it, in the gate and in what drives it.
    fn of_path(self) -> i32 {
        self.delay.saturating_add(self.load)
    }
}

/// The price of every pin of `function`.
pub(in super::super) fn prices(function: &Function, free_inversions: bool) -> Vec<PinPrice> {
    let costs = costs(function, free_inversions);
    let price = |cost: Cost| PinPrice {
        delay: Curve::Line {
            fixed: cost.delay,
            slope: TAU,
        },
        load: cost.load,
    };
    costs.into_iter().map(price).collect()
}

fn load_of(cell: EffortCell, pin: usize) -> i32 {
    let thirds = i64::from(cell.effort_in_thirds(pin)) * i64::from(TAU);
    i32::try_from((thirds + 1) / 3).unwrap_or(i32::MAX / 4)
}

fn parasitic(cell: EffortCell) -> i32 {
    i32::try_from(cell.parasitic())
        .unwrap_or(i32::MAX)
        .saturating_mul(TAU)
}

fn pins(count: usize) -> u32 {
    u32::try_from(count).unwrap_or(u32::MAX)
}

fn costs(function: &Function, free_inversions: bool) -> Vec<Cost> {
    let inputs = function.inputs();
    match function.shape() {
        Shape::Constant(_) => vec![Cost::default(); inputs],
        Shape::Inverter => vec![inverter(); inputs],
        Shape::Buffer => vec![then_inverter(inverter()); inputs],
        Shape::Product if free_inversions => {
            let cell = EffortCell::Nand(pins(inputs));
            vec![alone(cell); inputs]
        }
        Shape::Product => match function.product_polarities() {
            Some((inverted, complemented)) => product(&inverted, complemented),
            None => nand_nand(function),
        },
        Shape::Parity => parity(inputs),
        Shape::Other if is_multiplexer(function) => vec![
            Cost {
                delay: parasitic(EffortCell::Multiplexer(2)),
                load: load_of(EffortCell::Multiplexer(2), 0),
            };
            inputs
        ],
        Shape::Other => nand_nand(function),
    }
}

fn alone(cell: EffortCell) -> Cost {
    Cost {
        delay: parasitic(cell),
        load: load_of(cell, 0),
    }
}

fn inverter() -> Cost {
    alone(EffortCell::Inverter)
}

/// The pin with an inverter behind the gate, which the gate drives alone.
fn then_inverter(cost: Cost) -> Cost {
    let behind = inverter();
    Cost {
        delay: cost.delay.saturating_add(behind.load + behind.delay),
        ..cost
    }
}

/// The pin with an inverter of its own before it.
fn behind_inverter(cost: Cost) -> Cost {
    let before = inverter();
    Cost {
        delay: (before.delay + cost.delay).saturating_add(cost.load),
        load: before.load,
    }
}

/// A product: `inverted` tells the pins an AND would read inverted.
fn product(inverted: &[bool], complemented: bool) -> Vec<Cost> {
    let inputs = pins(inverted.len());
    let made_of = |cell: EffortCell, wants_inverted: bool, output_inverter: bool| {
        let own = alone(cell);
        let own = if output_inverter {
            then_inverter(own)
        } else {
            own
        };
        let pin = |&flag: &bool| {
            if flag == wants_inverted {
                own
            } else {
                behind_inverter(own)
            }
        };
        inverted.iter().map(pin).collect::<Vec<Cost>>()
    };
    let nand = made_of(EffortCell::Nand(inputs), false, !complemented);
    let nor = made_of(EffortCell::Nor(inputs), true, complemented);
    cheaper(nand, nor)
}

/// The one whose worst pin costs a path less; then the sum; then the first.
fn cheaper(first: Vec<Cost>, second: Vec<Cost>) -> Vec<Cost> {
    let key = |costs: &[Cost]| {
        let each = || costs.iter().map(|cost| cost.of_path());
        (each().max(), each().map(i64::from).sum::<i64>())
    };
    if key(&second) < key(&first) {
        second
    } else {
        first
    }
}

fn parity(inputs: usize) -> Vec<Cost> {
    if inputs <= 4 {
        let cell = EffortCell::Xor(pins(inputs));
        let pin = |pin| Cost {
            delay: parasitic(cell),
            load: load_of(cell, pin),
        };
        return (0..inputs).map(pin).collect();
    }
    let two = alone(EffortCell::Xor(2));
    let levels = inputs.next_power_of_two().trailing_zeros() as i32;
    // The first pins fill the lowest level of the tree.
    let deepest = 2 * inputs - inputs.next_power_of_two();
    let pin = |pin| {
        let below = if pin < deepest { levels } else { levels - 1 } - 1;
        Cost {
            delay: two.delay + below * (two.delay + two.load),
            load: two.load,
        }
    };
    (0..inputs).map(pin).collect()
}

/// Whether one pin chooses between two others, in any polarity.
fn is_multiplexer(function: &Function) -> bool {
    let Function::Table(table) = function else {
        return false;
    };
    let only = |side: TruthTable| {
        let mut read = (0..3).filter(|&pin| side.depends_on(pin));
        match (read.next(), read.next()) {
            (Some(pin), None) => Some(pin),
            _ => None,
        }
    };
    table.inputs() == 3
        && (0..3).any(|select| {
            let low = only(table.cofactor(select, false));
            let high = only(table.cofactor(select, true));
            low.is_some() && high.is_some() && low != high
        })
}

fn nand_nand(function: &Function) -> Vec<Cost> {
    let inputs = function.inputs();
    match function {
        Function::Table(table) => {
            let on = rows(inputs, &sum_of_products(*table));
            let off = rows(inputs, &sum_of_products(table.complement()));
            cheaper(on, off.into_iter().map(then_inverter).collect())
        }
        Function::Cover(cover) => {
            let own = rows(inputs, &rows_of(cover));
            if cover.is_complemented() {
                own.into_iter().map(then_inverter).collect()
            } else {
                own
            }
        }
    }
}

/// A sum of products as NAND–NAND.
fn rows(inputs: usize, cubes: &Cubes) -> Vec<Cost> {
    if let [only] = cubes.as_slice() {
        return one_row(inputs, only);
    }
    let over = EffortCell::Nand(pins(cubes.len()));
    let second = alone(over);
    // By pin: the worst way read plain, the worst read inverted, and their loads.
    let mut plain: Vec<Option<Cost>> = vec![None; inputs];
    let mut inverted = plain.clone();
    for cube in cubes {
        let first = alone(EffortCell::Nand(pins(cube.len())));
        for &literal in cube {
            let (pin, turned) = ((literal >> 1) as usize, literal & 1 == 1);
            let (cost, turned) = if cube.len() == 1 {
                // A lone literal goes into the second NAND inverted.
                (second, !turned)
            } else {
                let delay = first.delay + second.delay.saturating_add(second.load);
                (Cost { delay, ..first }, turned)
            };
            let slot = if turned {
                &mut inverted[pin]
            } else {
                &mut plain[pin]
            };
            let known = slot.unwrap_or_default();
            *slot = Some(Cost {
                delay: known.delay.max(cost.delay),
                load: known.load.saturating_add(cost.load),
            });
        }
    }
    let both = plain.into_iter().zip(inverted).map(|(plain, inverted)| {
        let inverted = inverted.map(behind_inverter);
        match (plain, inverted) {
            (Some(plain), Some(inverted)) => Cost {
                delay: plain.delay.max(inverted.delay),
                load: plain.load.saturating_add(inverted.load),
            },
            (one, other) => one.or(other).unwrap_or_default(),
        }
    });
    both.collect()
}

/// A single row, whose pins may be fewer than the gate's.
fn one_row(inputs: usize, cube: &[u32]) -> Vec<Cost> {
    let flags: Vec<bool> = cube.iter().map(|literal| literal & 1 == 1).collect();
    let costs = match flags.as_slice() {
        [] => Vec::new(),
        [true] => vec![inverter()],
        [false] => vec![then_inverter(inverter())],
        _ => product(&flags, false),
    };
    let mut all = vec![Cost::default(); inputs];
    for (literal, cost) in cube.iter().zip(costs) {
        all[(literal >> 1) as usize] = cost;
    }
    all
}

/// Whether a static cell of common libraries has the function: one operator, a
/// multiplexer, a majority, or an and-or or or-and form that reads every pin once. Common
/// practice, no source.
pub fn is_common_cell(function: &Function) -> bool {
    let inputs = function.inputs();
    match function.shape() {
        Shape::Other => match function {
            Function::Table(table) => {
                let once = |table: TruthTable| {
                    let literals = sum_of_products(table).iter().map(Vec::len).sum::<usize>();
                    literals <= inputs
                };
                once(*table)
                    || once(table.complement())
                    || is_multiplexer(function)
                    || is_majority(*table)
            }
            Function::Cover(_) => false,
        },
        Shape::Parity => inputs <= 4,
        _ => true,
    }
}

fn is_majority(table: TruthTable) -> bool {
    const MAJORITIES: [u64; 8] = [0xE8, 0xD4, 0xB2, 0x8E, 0x17, 0x2B, 0x4D, 0x71];
    table.inputs() == 3 && MAJORITIES.contains(&table.bits())
}
