//! What was declared about delays inside cells and boxes, as the passes need it.
//!
//! A delay from pin to pin stands on a gate of its own: the gate drives the output
//! pin's net, its function is what the cell does (of a box, its pin 0 alone), and
//! its other pins are there for the time they take, which the function table of
//! the netlist keeps ([`super::Netlist::declared_delays`]). So every pass follows
//! such a delay as it follows a gate, and recognition sees what the cell does and
//! nothing that nobody knows.
//!
//! Nets that lie inside such a cell or box carry no path of their own and lend
//! their name to nothing.

use super::id::{BoxId, GateId, NetId};
use rustc_hash::{FxHashMap, FxHashSet};

/// See the head of the module.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Declared {
    /// Nets inside, which no path may pass.
    pub(super) barred: FxHashSet<NetId>,
    /// Outputs of boxes from which paths still start, shown by another net.
    pub(super) open: FxHashSet<NetId>,
    /// Pins of boxes at which no path ends, since all go on.
    pub(super) passed: FxHashSet<(BoxId, u32)>,
    /// The gates of every carry cell, as the first and the one past the last, and
    /// the declaration they come from.
    pub(super) carry_cells: Vec<(GateId, GateId, u32)>,
    /// The gates that only pass delays of boxes on, each with its box.
    pub(super) passages: FxHashMap<GateId, BoxId>,
    /// Boxes of which every pair of an input and an output has a delay.
    pub(super) settled: FxHashSet<BoxId>,
}

impl Declared {
    /// Whether `net` lies inside and carries no path.
    #[inline]
    pub fn bars(&self, net: NetId) -> bool {
        self.barred.contains(&net)
    }

    /// Whether `net` lies inside.
    #[inline]
    pub fn is_inner(&self, net: NetId) -> bool {
        self.barred.contains(&net) || self.open.contains(&net)
    }

    /// Whether every path to pin `pin` of a box goes on behind it.
    pub fn passes(&self, id: BoxId, pin: u32) -> bool {
        self.passed.contains(&(id, pin))
    }

    /// Whether `gate` belongs to a carry cell.
    pub fn is_in_carry_cell(&self, gate: GateId) -> bool {
        let after = self
            .carry_cells
            .partition_point(|&(first, ..)| first <= gate);
        after > 0 && gate < self.carry_cells[after - 1].1
    }

    /// How many cells of the netlist a declaration made carry cells.
    pub fn carry_cells_of(&self, entry: usize) -> usize {
        let cells = self.carry_cells.iter();
        cells.filter(|&&(.., own)| own as usize == entry).count()
    }

    /// The box whose delay `gate` passes on, when it does nothing else.
    pub fn passage(&self, gate: GateId) -> Option<BoxId> {
        self.passages.get(&gate).copied()
    }

    /// Whether every pair of an input and an output of a box has a delay.
    pub fn settles(&self, id: BoxId) -> bool {
        self.settled.contains(&id)
    }
}
