//! Whether the carries of a chain run inside cells declared carry cells.
//!
//! What such cells take from pin to pin was declared, so a chain of them is neither
//! the ripple that its function looks like nor anything else that gates are made
//! into. Every carry between two positions has to lie in a carry cell; the lowest
//! carry may be an operand itself (an incrementer's), and the top one on no net.

use super::model::Position;
use crate::netlist::{Driver, Netlist};

/// See the head of the module.
pub(super) fn in_carry_cells(netlist: &Netlist, positions: &[Position]) -> bool {
    let Some(declared) = netlist.declared() else {
        return false;
    };
    let inside = |position: &Position| {
        position.carries.iter().any(|carry| {
            matches!(netlist.driver(carry.net), Driver::Gate(gate) if declared.is_in_carry_cell(gate))
        })
    };
    let last = positions.len() - 1;
    let mut carries = positions.iter().enumerate();
    positions.iter().any(inside)
        && carries.all(|(i, position)| {
            inside(position) || (position.carries.is_empty() && (i == 0 || i == last))
        })
}
