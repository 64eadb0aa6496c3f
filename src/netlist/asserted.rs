//! What a user asserted about the paths of a netlist, as the passes need it.
//!
//! Starts and ends fall into numbered *sets* whose members no assumption tells
//! apart; a pair of a start set and an end set counts, never counts, or may take
//! several cycles. So an exact account of excluded paths costs one pass per set
//! and nothing per path. Set 0 holds what no assumption names. A start, an end or
//! a net that no path may use at all is *barred* and belongs to no set.
//!
//! Where paths between two sets count unless they pass certain nets, what counts
//! are exactly those that avoid the nets. So such a pair of sets has a numbered
//! *way*, a set of nets to avoid, and costs a pass of its own; way 0 avoids nothing.

use super::id::{BoxId, NetId, RegisterId};
use rustc_hash::{FxHashMap, FxHashSet};
use std::collections::BTreeSet;

/// Whether the paths between two sets count.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Pairing {
    /// They do.
    #[default]
    Counts,
    /// They are no paths.
    Never,
    /// They may take several cycles.
    Cycles {
        /// How many.
        cycles: u32,
        /// The assumption that says so, by index.
        entry: u32,
    },
}

/// A place where paths end.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum EndPoint {
    /// An output port, by index.
    Output(u32),
    /// A register.
    Register(RegisterId),
    /// A box.
    Box(BoxId),
    /// A cut net.
    Net(NetId),
}

/// The set of what is barred.
pub(super) const BARRED: u8 = u8::MAX;

/// What was asserted about paths.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Asserted {
    pub(super) starts: FxHashMap<NetId, u8>,
    pub(super) ends: FxHashMap<EndPoint, u8>,
    pub(super) barred: FxHashSet<NetId>,
    pub(super) arrivals: FxHashMap<NetId, i32>,
    /// By start set, by end set; sets past the table count.
    pub(super) pairings: Vec<Vec<Pairing>>,
    /// By start set, by end set, the way their paths have to take.
    pub(super) ways: Vec<Vec<u8>>,
    /// By way, from 1 on, the nets that it avoids.
    pub(super) avoided: Vec<FxHashSet<NetId>>,
}

impl Asserted {
    /// The set of a start; `None` when no path from it counts.
    #[inline]
    pub fn start_set(&self, net: NetId) -> Option<u8> {
        let set = self.starts.get(&net).copied().unwrap_or(0);
        (set != BARRED).then_some(set)
    }

    /// The set of an end; `None` when no path to it counts.
    #[inline]
    pub fn end_set(&self, end: EndPoint) -> Option<u8> {
        let set = self.ends.get(&end).copied().unwrap_or(0);
        (set != BARRED).then_some(set)
    }

    /// Whether the paths from a start set to an end set count.
    pub fn pairing(&self, start: u8, end: u8) -> Pairing {
        let row = self.pairings.get(usize::from(start));
        row.and_then(|row| row.get(usize::from(end)))
            .copied()
            .unwrap_or_default()
    }

    /// The way that paths from a start set to an end set have to take to count.
    pub fn way(&self, start: u8, end: u8) -> u8 {
        let row = self.ways.get(usize::from(start));
        row.and_then(|row| row.get(usize::from(end)))
            .copied()
            .unwrap_or_default()
    }

    /// The ways that paths from a start set may have to take.
    pub fn ways_from(&self, start: u8) -> BTreeSet<u8> {
        match self.ways.get(usize::from(start)) {
            Some(row) => row.iter().copied().collect(),
            None => BTreeSet::from([0]),
        }
    }

    /// The ways that paths to an end set may have to take.
    pub fn ways_to(&self, end: u8) -> BTreeSet<u8> {
        let column = self.ways.iter().map(|row| row.get(usize::from(end)));
        let column: BTreeSet<u8> = column.map(|way| way.copied().unwrap_or_default()).collect();
        if column.is_empty() {
            BTreeSet::from([0])
        } else {
            column
        }
    }

    /// Whether a way avoids `net`.
    #[inline]
    pub fn avoids(&self, way: u8, net: NetId) -> bool {
        way > 0 && self.avoided[usize::from(way) - 1].contains(&net)
    }

    /// Whether no path through `net` counts.
    #[inline]
    pub fn is_barred(&self, net: NetId) -> bool {
        self.barred.contains(&net)
    }

    /// When a start is ready, in whole units of the delay model, where that was
    /// asserted.
    pub fn arrival(&self, net: NetId) -> Option<i32> {
        self.arrivals.get(&net).copied()
    }
}
