//! A gate's function as rows of a cover.
//!
//! A function of up to six inputs is kept as a table, so its rows are found anew: an
//! irredundant sum of products by the recursion of Minato (1992, "Fast generation of
//! prime-irredundant covers from binary decision diagrams"; Morreale 1970 before
//! him), at most six levels deep. Wider functions are covers already and their rows
//! are written as they are, off-set rows with output column 0.

use crate::netlist::function::PIN;
use crate::netlist::{Cover, Function, TruthTable};

/// The rows of one function and their output column.
pub(super) struct Rows {
    /// One plane of `0 1 -` for each row.
    pub(super) planes: Vec<Vec<u8>>,
    pub(super) column: u8,
}

pub(super) fn of(function: &Function) -> Rows {
    match function {
        Function::Table(table) => of_table(*table),
        Function::Cover(cover) => of_cover(cover),
    }
}

fn of_cover(cover: &Cover) -> Rows {
    let mut planes = Vec::with_capacity(cover.cube_count());
    for cube in cover.cubes() {
        let mut plane = vec![b'-'; cover.inputs()];
        let mut holds = true;
        for (pin, inverted) in cube {
            let literal = if inverted { b'0' } else { b'1' };
            // A pin both ways: the cube is empty and states nothing.
            holds &= plane[pin] == b'-' || plane[pin] == literal;
            plane[pin] = literal;
        }
        if holds {
            planes.push(plane);
        }
    }
    if planes.is_empty() && cover.is_complemented() {
        return Rows {
            planes: vec![vec![b'-'; cover.inputs()]],
            column: b'1',
        };
    }
    Rows {
        planes,
        column: if cover.is_complemented() { b'0' } else { b'1' },
    }
}

fn of_table(table: TruthTable) -> Rows {
    let mut planes = Vec::new();
    let mut plane = vec![b'-'; table.inputs()];
    products(table, table, table.inputs(), &mut plane, &mut planes);
    Rows {
        planes,
        column: b'1',
    }
}

fn and(a: TruthTable, b: TruthTable) -> TruthTable {
    TruthTable::new(a.inputs(), a.bits() & b.bits())
}

fn or(a: TruthTable, b: TruthTable) -> TruthTable {
    TruthTable::new(a.inputs(), a.bits() | b.bits())
}

/// Adds products that cover at least `must` and at most `may`, over the pins below
/// `pins`; returns what they cover. `plane` holds the literals fixed so far.
fn products(
    must: TruthTable,
    may: TruthTable,
    pins: usize,
    plane: &mut [u8],
    planes: &mut Vec<Vec<u8>>,
) -> TruthTable {
    if must.bits() == 0 {
        return must;
    }
    let one = TruthTable::new(may.inputs(), !0);
    if may == one {
        planes.push(plane.to_vec());
        return one;
    }
    // The highest pin that matters; one does, since `may` is not constant.
    let Some(pin) = (0..pins)
        .rev()
        .find(|&pin| must.depends_on(pin) || may.depends_on(pin))
    else {
        planes.push(plane.to_vec());
        return one;
    };
    let (must0, must1) = (must.cofactor(pin, false), must.cofactor(pin, true));
    let (may0, may1) = (may.cofactor(pin, false), may.cofactor(pin, true));
    plane[pin] = b'0';
    let low = products(and(must0, may1.complement()), may0, pin, plane, planes);
    plane[pin] = b'1';
    let high = products(and(must1, may0.complement()), may1, pin, plane, planes);
    plane[pin] = b'-';
    let left = or(and(must0, low.complement()), and(must1, high.complement()));
    let both = products(left, and(may0, may1), pin, plane, planes);
    let select = TruthTable::new(may.inputs(), PIN[pin]);
    or(both, or(and(low, select.complement()), and(high, select)))
}
