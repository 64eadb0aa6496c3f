//! Small questions about functions that the overlay asks when it normalises them.

use super::overlay::Literal;
use crate::netlist::TruthTable;

/// The table over the plain nodes of `inputs` in ascending order. The inputs
/// are distinct nodes.
pub(super) fn ascending(table: TruthTable, inputs: &[Literal]) -> (TruthTable, Vec<Literal>) {
    let mut order: Vec<usize> = (0..inputs.len()).collect();
    order.sort_unstable_by_key(|&pin| inputs[pin].node());
    let mut bits = 0;
    for minterm in 0..1usize << inputs.len() {
        let old = order
            .iter()
            .enumerate()
            .fold(0, |old, (new_pin, &old_pin)| {
                old | (minterm >> new_pin & 1) << old_pin
            });
        bits |= (table.bits() >> old & 1) << minterm;
    }
    let pins = order
        .iter()
        .map(|&pin| Literal::new(inputs[pin].node(), false));
    (TruthTable::new(inputs.len(), bits), pins.collect())
}

/// The table without pins it does not depend on.
pub(super) fn drop_unread(table: TruthTable, mut pins: Vec<Literal>) -> (TruthTable, Vec<Literal>) {
    let read: Vec<usize> = (0..pins.len())
        .filter(|&pin| table.depends_on(pin))
        .collect();
    if read.len() == pins.len() {
        return (table, pins);
    }
    let mut bits = 0;
    for minterm in 0..1usize << read.len() {
        let old = read
            .iter()
            .enumerate()
            .fold(0, |old, (new, &pin)| old | (minterm >> new & 1) << pin);
        bits |= (table.bits() >> old & 1) << minterm;
    }
    let table = TruthTable::new(read.len(), bits);
    pins = read.into_iter().map(|pin| pins[pin]).collect();
    (table, pins)
}
